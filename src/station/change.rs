//! Values set by path, from `--set`, studies and variants: one of a group set clears the others.

use super::document::Document;
use super::node::{self, Entry, Node, NodeKind};
use super::path::{Target, entries_mut, table_mut, target};
use super::protective;
use super::source::{Fault, Place, Refused};

/// Applies changes in order, each a path and the value as a person types it.
///
/// # Errors
/// [`Refused`] with a fault for each that cannot be made.
pub(super) fn apply(document: &mut Document, sets: &[(String, String)]) -> Result<(), Refused> {
    if sets.is_empty() {
        return Ok(());
    }
    let first_source = document.sources.count();
    let mut faults = Vec::new();
    for (path, value) in sets {
        let source = document.sources.add("--set", format!("{path}={value}"));
        let place = Place { source, start: 0, end: short(path.len()) };
        if let Err(fault) = set_one(document, path, place, typed(value, source, path.len() + 1), first_source) {
            faults.push(fault);
        }
    }
    if faults.is_empty() { Ok(()) } else { Err(Refused { sources: document.sources.clone(), faults }) }
}

fn set_one(document: &mut Document, path: &str, place: Place, value: Node, first_source: u32) -> Result<(), Fault> {
    let target = target(&document.root, path, place)?;
    if let Some(reason) = protective::reason(&document.root, &target) {
        let mend = "bonds, rods and safety conductors are given: change the file where the station itself has changed, or say \
                    in a [[variant]] what is uncertain about them";
        return Err(Fault::new(Some(place), reason, mend));
    }
    set(&mut document.root, &target, place, value, &|p| p.source >= first_source)
}

/// The value a person typed: TOML where it is TOML, else a text.
fn typed(value: &str, source: u32, offset: usize) -> Node {
    let mut parsed = node::value(value, source).filter(|v| !matches!(v.kind, NodeKind::Date)).unwrap_or_else(|| Node {
        place: Place { source, start: 0, end: short(value.len()) },
        kind: NodeKind::Text(value.trim().to_owned()),
    });
    shift(&mut parsed, short(offset));
    parsed
}

fn shift(node: &mut Node, by: u32) {
    node.place.start += by;
    node.place.end += by;
    match &mut node.kind {
        NodeKind::List(items) => items.iter_mut().for_each(|item| shift(item, by)),
        NodeKind::Table(entries) => entries.iter_mut().for_each(|entry| {
            entry.place.start += by;
            entry.place.end += by;
            shift(&mut entry.value, by);
        }),
        _ => {}
    }
}

fn short(at: usize) -> u32 {
    u32::try_from(at).unwrap_or(u32::MAX)
}

/// Puts a value into the tree. `fresh` tells values of the same batch: two of one group there contradict.
pub(super) fn set(
    root: &mut Node,
    target: &Target,
    place: Place,
    value: Node,
    fresh: &dyn Fn(Place) -> bool,
) -> Result<(), Fault> {
    match target {
        Target::Root(key) => {
            put(entries_mut(root), key, place, value);
            Ok(())
        }
        Target::Whole { table, point: Some(name), .. } => {
            put(table_mut(root, table, None, place), name, place, value);
            Ok(())
        }
        Target::Whole { .. } => {
            Err(Fault::new(Some(place), "this path names a whole table", "name one of its keys: kind.name.key"))
        }
        Target::Point { name, key } => set_point(root, name, key, place, value),
        Target::Key { table, row, keys } => {
            let Some(mut entries) = table_mut(root, table, *row, place) else {
                return Err(Fault::new(
                    Some(place),
                    format!("[{table}] is no table in this file"),
                    "mend the file first",
                ));
            };
            let mut table = table.as_str();
            for (depth, key) in keys.iter().enumerate() {
                clear_group(entries, table, key, place, value.text(), fresh)?;
                if depth + 1 == keys.len() {
                    put(Some(entries), key, place, value);
                    return Ok(());
                }
                if !entries.iter().any(|e| e.key == *key) {
                    put(Some(entries), key, place, Node { place, kind: NodeKind::Table(Vec::new()) });
                }
                let inner = entries.iter_mut().find(|e| e.key == *key).and_then(|e| entries_mut(&mut e.value));
                entries = inner.ok_or_else(|| {
                    Fault::new(Some(place), format!("`{key}` has no keys inside"), format!("end the path at `{key}`"))
                })?;
                table = key;
            }
            Ok(())
        }
    }
}

fn put(entries: Option<&mut Vec<Entry>>, key: &str, place: Place, value: Node) {
    let Some(entries) = entries else { return };
    match entries.iter_mut().find(|e| e.key == key) {
        Some(entry) => entry.value = value,
        None => entries.push(Entry { key: key.to_owned(), place, value }),
    }
}

fn set_point(root: &mut Node, name: &str, key: &str, place: Place, value: Node) -> Result<(), Fault> {
    let points = table_mut(root, "points", None, place).into_iter().flatten();
    let Some(point) = points.filter(|e| e.key == name).map(|e| &mut e.value).next() else {
        return Err(Fault::new(Some(place), format!("no point is called \"{name}\""), "name a point of the file"));
    };
    let spot = match (&mut point.kind, key) {
        (NodeKind::List(c), "east") => c.get_mut(0),
        (NodeKind::List(c), "north") => c.get_mut(1),
        (NodeKind::List(c), "up" | "height") => c.get_mut(2),
        (NodeKind::Table(_), "from" | "bearing" | "out" | "height" | "up") => {
            put(entries_mut(point), if key == "up" { "height" } else { key }, place, value);
            return Ok(());
        }
        _ => None,
    };
    let Some(spot) = spot else {
        let (form, keys) = match point.kind {
            NodeKind::Table(_) => ("from another point", "from, bearing, out or height"),
            _ => ("by coordinates", "east, north or up"),
        };
        return Err(Fault::new(
            Some(place),
            format!("\"{name}\" is given {form} and has no `{key}`"),
            format!("set {keys}"),
        ));
    };
    *spot = value;
    Ok(())
}

/// What a key replaces when it is set.
fn group(table: &str, key: &str, value: Option<&str>) -> &'static [&'static str] {
    match (table, key) {
        ("earth", "kind") if value != Some("soil") => &["soil", "permittivity", "conductivity", "dispersion"],
        ("earth", "soil") => &["permittivity", "conductivity", "dispersion", "kind"],
        ("earth", "permittivity") => &["soil", "dispersion", "kind"],
        ("earth", "conductivity") => &["soil", "kind"],
        ("earth", "dispersion") => &["soil", "permittivity", "kind"],
        ("wire" | "radials", "diameter") => &["gauge", "width"],
        ("wire" | "radials", "gauge") => &["diameter", "width"],
        ("wire" | "radials", "width") => &["diameter", "gauge"],
        ("wire" | "radials" | "rod", "metal") => &["conductivity"],
        ("wire" | "radials" | "rod", "conductivity") => &["metal"],
        ("choke", "impedance") => &["resonant"],
        ("choke", "resonant") => &["impedance"],
        ("coax", "cable") => &["shield_diameter", "outside_diameter"],
        ("coax", "shield_diameter" | "outside_diameter") => &["cable"],
        ("transformer", "ratio") => &["turns"],
        ("transformer", "turns") => &["ratio"],
        _ => &[],
    }
}

fn clear_group(
    entries: &mut Vec<Entry>,
    table: &str,
    key: &str,
    place: Place,
    value: Option<&str>,
    fresh: &dyn Fn(Place) -> bool,
) -> Result<(), Fault> {
    let others = group(table, key, value);
    // Saying kind = "soil" beside a soil agrees with it.
    let agrees = |e: &Entry| e.key == "kind" && e.value.text() == Some("soil");
    if let Some(clash) = entries.iter().find(|e| others.contains(&e.key.as_str()) && fresh(e.value.place) && !agrees(e))
    {
        let reason = format!("`{key}` and `{}` are set together and contradict", clash.key);
        return Err(Fault::new(Some(place), reason, "set one of the two"));
    }
    entries.retain(|e| !others.contains(&e.key.as_str()) || agrees(e));
    Ok(())
}
