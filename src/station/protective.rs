//! What is given for safety's sake: rods, bonds and everything marked `protective`.

use super::check::row_names;
use super::node::{Node, NodeKind};
use super::path::Target;
use std::collections::BTreeSet;

/// Why a target must not be varied; `None` where it may.
pub(super) fn reason(root: &Node, target: &Target) -> Option<String> {
    let (table, row) = match target {
        Target::Root(_) => return None,
        Target::Point { name, .. } | Target::Whole { point: Some(name), .. } => {
            return depends_on(root, name)
                .map(|part| format!("point \"{name}\" holds {part}, and the bond stays where it is"));
        }
        Target::Whole { table, row, .. } | Target::Key { table, row, .. } => (table.as_str(), (*row)?),
    };
    if !safety_row(root, table, row) {
        return None;
    }
    let name = row_names(root, table).into_iter().nth(row).map_or_else(String::new, |(n, _)| n);
    let what = if table == "rod" { "an earth rod" } else { "marked protective" };
    Some(format!(
        "{table} \"{name}\" is {what}: it is given, and never a choice. The choke goes around the bond, the bond stays"
    ))
}

fn safety_row(root: &Node, table: &str, row: usize) -> bool {
    let marked = |node: &Node| matches!(node.get("protective").map(|p| &p.kind), Some(NodeKind::Flag(true)));
    table == "rod" || root.get(table).and_then(|rows| rows.items().get(row)).is_some_and(marked)
}

/// The first safety part whose place follows from the point.
fn depends_on(root: &Node, point: &str) -> Option<String> {
    let follows = followers(root, point);
    ["rod", "wire", "radials"].into_iter().find_map(|table| {
        let rows = root.get(table).map_or(&[][..], Node::items);
        let uses = |row: &Node| {
            let path = row.get("path").map_or(&[][..], Node::items).iter().filter_map(Node::text);
            path.chain(row.get("at").and_then(Node::text)).any(|name| follows.contains(name))
        };
        let found = (0..rows.len()).find(|&k| safety_row(root, table, k) && uses(&rows[k]))?;
        Some(format!("{table} \"{}\"", row_names(root, table).into_iter().nth(found)?.0))
    })
}

/// The point and every point measured from it.
fn followers<'a>(root: &'a Node, point: &'a str) -> BTreeSet<&'a str> {
    let points = root.get("points").map_or(&[][..], Node::entries);
    let mut found = BTreeSet::from([point]);
    for _ in 0..points.len() {
        for entry in points {
            if entry.value.get("from").and_then(Node::text).is_some_and(|from| found.contains(from)) {
                found.insert(entry.key.as_str());
            }
        }
    }
    found
}
