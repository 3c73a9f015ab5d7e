//! Paths of values: `wire.radiator.length`, `choke."entry choke".at`, `points.foot.up`.

use super::check::row_names;
use super::node::{Entry, Node, NodeKind};
use super::raw::{
    RawChoke, RawCoax, RawEarth, RawFeed, RawInline, RawLimits, RawOperation, RawRadials, RawRadio, RawRod, RawStation,
    RawVariant, RawWire,
};
use super::source::{Fault, Place};

/// The bearing form of a point and the coordinate form.
const POINT_KEYS: [&str; 7] = ["east", "north", "up", "from", "bearing", "out", "height"];

/// Splits a path at its points, quotation marks around names taken off.
pub(super) fn split(path: &str, place: Place) -> Result<Vec<String>, Fault> {
    let mut steps = vec![String::new()];
    let mut quote: Option<char> = None;
    for c in path.trim().chars() {
        match (quote, c) {
            (Some(open), _) if c == open => quote = None,
            (None, '"' | '\'') => quote = Some(c),
            (None, '.') => steps.push(String::new()),
            _ => steps.iter_mut().last().into_iter().for_each(|step| step.push(c)),
        }
    }
    let steps: Vec<String> = steps.into_iter().map(|s| s.trim().to_owned()).collect();
    if quote.is_some() || steps.iter().any(String::is_empty) {
        return Err(Fault::new(
            Some(place),
            format!("`{path}` is no path of a value"),
            "write kind.name.key, for example wire.radiator.length or choke.\"entry choke\".at",
        ));
    }
    Ok(steps)
}

/// A table of the document and what is asked for inside it.
#[derive(Debug, Clone, PartialEq)]
pub(super) enum Target {
    /// `title` and `unit`.
    Root(String),
    /// A whole table, or a whole point.
    Whole { table: String, row: Option<usize>, point: Option<String> },
    /// A key inside a table (row number for tables in double brackets), further keys inside its value.
    Key { table: String, row: Option<usize>, keys: Vec<String> },
    /// A coordinate or other part of a point.
    Point { name: String, key: String },
}

fn keys_of(table: &str) -> Option<&'static [&'static str]> {
    Some(match table {
        "earth" => RawEarth::KEYS,
        "wire" => RawWire::KEYS,
        "radials" => RawRadials::KEYS,
        "coax" => RawCoax::KEYS,
        "feed" => RawFeed::KEYS,
        "choke" => RawChoke::KEYS,
        "inline" => RawInline::KEYS,
        "rod" => RawRod::KEYS,
        "radio" => RawRadio::KEYS,
        "operation" => RawOperation::KEYS,
        "limits" => RawLimits::KEYS,
        "variant" => RawVariant::KEYS,
        _ => return None,
    })
}

/// Whether a table stands in double brackets.
fn in_rows(table: &str) -> bool {
    matches!(table, "wire" | "radials" | "choke" | "inline" | "rod" | "variant")
}

/// What a path names in a document.
pub(super) fn target(root: &Node, path: &str, place: Place) -> Result<Target, Fault> {
    let steps = split(path, place)?;
    let nothing = |what: String, mend: String| Fault::new(Some(place), format!("`{path}` names nothing: {what}"), mend);
    let table = steps[0].clone();
    if matches!(table.as_str(), "title" | "unit") && steps.len() == 1 {
        return Ok(Target::Root(table));
    }
    if table == "points" {
        return point_target(root, &steps, nothing);
    }
    let Some(known) = keys_of(&table) else {
        let tables = RawStation::KEYS.iter().copied();
        let mend = whole_path(root, &steps).unwrap_or_else(|| super::offer(&table, tables));
        return Err(nothing(format!("there is no table \"{table}\""), mend));
    };
    let (row, rest) = if in_rows(&table) {
        let Some(name) = steps.get(1) else {
            return Err(nothing("the name is missing".to_owned(), format!("write {table}.NAME.KEY")));
        };
        let names: Vec<String> = row_names(root, &table).into_iter().map(|(n, _)| n).collect();
        let Some(row) = names.iter().position(|n| n == name) else {
            let mend = if names.is_empty() {
                format!("the file has no [[{table}]]")
            } else {
                super::offer(name, names.iter().map(String::as_str))
            };
            return Err(nothing(format!("no {table} is called \"{name}\""), mend));
        };
        (Some(row), &steps[2..])
    } else {
        (None, &steps[1..])
    };
    match rest.first() {
        None => Ok(Target::Whole { table, row, point: None }),
        Some(key) if known.contains(&key.as_str()) => Ok(Target::Key { table, row, keys: rest.to_vec() }),
        Some(key) => Err(nothing(format!("\"{key}\" is not a key there"), super::offer(key, known.iter().copied()))),
    }
}

/// The path that was meant where only a name was written: "did you mean `wire.counterpoise`?".
fn whole_path(root: &Node, steps: &[String]) -> Option<String> {
    let (name, rest) = steps.split_first()?;
    let mut named: Vec<(&str, String)> = Vec::new();
    for table in RawStation::KEYS.iter().copied().filter(|t| in_rows(t)) {
        named.extend(row_names(root, table).into_iter().map(|(n, _)| (table, n)));
    }
    let near = super::nearest(name, named.iter().map(|(_, n)| n.as_str()).chain(RawStation::KEYS.iter().copied()));
    let meant = named.iter().find(|(_, n)| n == name).or_else(|| named.iter().find(|(_, n)| near == Some(n)))?;
    let quoted = |step: &str| if step.contains([' ', '.']) { format!("\"{step}\"") } else { step.to_owned() };
    let path: Vec<String> =
        [meant.0, &meant.1].into_iter().chain(rest.iter().map(String::as_str)).map(quoted).collect();
    Some(format!("did you mean `{}`?", path.join(".")))
}

fn point_target(root: &Node, steps: &[String], nothing: impl Fn(String, String) -> Fault) -> Result<Target, Fault> {
    let points = root.get("points").map_or(&[][..], Node::entries);
    let names = points.iter().map(|e| e.key.as_str());
    let Some(name) = steps.get(1) else {
        return Err(nothing(
            "the name is missing".to_owned(),
            format!("write points.NAME.up; {}", super::offer("", names)),
        ));
    };
    if !points.iter().any(|e| e.key == *name) {
        return Err(nothing(format!("no point is called \"{name}\""), super::offer(name, names)));
    }
    match steps.get(2) {
        None => Ok(Target::Whole { table: "points".to_owned(), row: None, point: Some(name.clone()) }),
        Some(key) if steps.len() == 3 && POINT_KEYS.contains(&key.as_str()) => {
            Ok(Target::Point { name: name.clone(), key: key.clone() })
        }
        Some(key) => Err(nothing(format!("\"{key}\" is not a part of a point"), super::offer(key, POINT_KEYS))),
    }
}

/// The entries of a table of the document, made where there is none.
pub(super) fn table_mut<'a>(
    root: &'a mut Node,
    table: &str,
    row: Option<usize>,
    place: Place,
) -> Option<&'a mut Vec<Entry>> {
    let entries = entries_mut(root)?;
    if !entries.iter().any(|e| e.key == table) {
        entries.push(Entry { key: table.to_owned(), place, value: Node { place, kind: NodeKind::Table(Vec::new()) } });
    }
    let value = &mut entries.iter_mut().find(|e| e.key == table)?.value;
    let Some(row) = row else { return entries_mut(value) };
    if let NodeKind::List(rows) = &mut value.kind { entries_mut(rows.get_mut(row)?) } else { None }
}

pub(super) fn entries_mut(node: &mut Node) -> Option<&mut Vec<Entry>> {
    if let NodeKind::Table(entries) = &mut node.kind { Some(entries) } else { None }
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]
    use super::*;

    #[test]
    fn paths_split_at_points_outside_quotes() {
        let place = Place { source: 0, start: 0, end: 0 };
        let steps = |path| split(path, place).unwrap();
        assert_eq!(steps("wire.radiator.length"), ["wire", "radiator", "length"]);
        assert_eq!(steps("choke.\"entry choke\".at"), ["choke", "entry choke", "at"]);
        assert_eq!(steps("choke.entry choke.at"), ["choke", "entry choke", "at"]);
        assert_eq!(steps("wire.'no. 2'.length"), ["wire", "no. 2", "length"]);
        for bad in ["", ".", "wire..length", "wire.\"open"] {
            assert!(split(bad, place).is_err(), "{bad}");
        }
    }
}
