//! Variants: the station with what is uncertain about it turned the other way.

use super::change;
use super::check::row_names;
use super::document::Document;
use super::node::{Entry, Node, NodeKind};
use super::path::{Target, entries_mut, target};
use super::raw::{RawVariant, Read, Reader};
use super::source::{Fault, Place, Refused, Written};

/// The document of a variant; "nominal" is the file as written.
///
/// # Errors
/// [`Refused`] where there is no such variant or it cannot be made.
pub(super) fn document(nominal: &Document, name: &str) -> Result<Document, Refused> {
    let mut changed = nominal.clone();
    if name == "nominal" {
        return Ok(changed);
    }
    let refused = |faults: Vec<Fault>| Refused { sources: nominal.sources.clone(), faults };
    let names = nominal.variant_names();
    let rows = nominal.root.get("variant").map_or(&[][..], Node::items);
    let Some(row) = names.iter().position(|n| n == name).and_then(|k| rows.get(k)) else {
        let mend = super::offer(name, names.iter().map(String::as_str).chain(["nominal"]));
        return Err(refused(vec![Fault::new(None, format!("no variant is called \"{name}\""), mend)]));
    };
    let mut reader = Reader { unit_m: 1.0, faults: Vec::new() };
    let Some(raw) = RawVariant::read(row, &mut reader) else { return Err(refused(reader.faults)) };
    let mut faults = reader.faults;
    let settings = raw.set.as_ref().map_or(&[][..], |s| s.value.0.as_slice());
    let without = raw.without.as_ref().map_or(&[][..], |w| w.value.as_slice());
    if settings.is_empty() && without.is_empty() {
        let mend =
            "give it set = { \"earth.soil\" = \"wet meadow\" } or without = [\"wire.counterpoise\"], or take it out";
        faults.push(Fault::new(Some(row.place), "this variant changes nothing", mend));
    }
    faults.extend(contradictions(&nominal.root, settings, without));
    let within = |p: Place| settings.iter().any(|s| s.value.place == p);
    for setting in settings {
        let set = target(&changed.root, &setting.key, setting.place)
            .and_then(|target| change::set(&mut changed.root, &target, setting.place, setting.value.clone(), &within));
        faults.extend(set.err());
    }
    for path in without {
        let place = path.place.unwrap_or(row.place);
        let gone =
            target(&changed.root, &path.value, place).and_then(|target| remove(&mut changed.root, &target, place));
        faults.extend(gone.err());
    }
    if faults.is_empty() { Ok(changed) } else { Err(refused(in_variant(faults, name))) }
}

/// Values set inside what the same variant leaves out; paths that name nothing are told elsewhere.
fn contradictions(root: &Node, settings: &[Entry], without: &[Written<String>]) -> Vec<Fault> {
    let table_of = |target: Target| match target {
        Target::Whole { table, row, point: None } | Target::Key { table, row, .. } => Some((table, row)),
        _ => None,
    };
    let of = |path: &str, place: Place| target(root, path, place).ok().and_then(table_of);
    let mut faults = Vec::new();
    for setting in settings {
        let Some(set) = of(&setting.key, setting.place) else { continue };
        if let Some(gone) = without.iter().find(|path| of(&path.value, setting.place).as_ref() == Some(&set)) {
            let reason = format!("`{}` is set here, and `{}` is left out: that contradicts", setting.key, gone.value);
            let mend = format!("take `{}` out of `set`, or `{}` out of `without`", setting.key, gone.value);
            faults.push(Fault::new(Some(setting.place), reason, mend));
        }
    }
    faults
}

/// Says which variant the faults belong to.
pub(super) fn in_variant(mut faults: Vec<Fault>, name: &str) -> Vec<Fault> {
    for fault in &mut faults {
        fault.reason = format!("in variant \"{name}\": {}", fault.reason);
    }
    faults
}

/// Takes a table out; a conductor leaves the feed's lists with it.
fn remove(root: &mut Node, target: &Target, place: Place) -> Result<(), Fault> {
    let Target::Whole { table, row, point: None } = target else {
        return Err(Fault::new(
            Some(place),
            "only whole tables can be left out",
            "write kind.name, for example \"wire.earth lead\"",
        ));
    };
    let names: Vec<String> = row_names(root, table).into_iter().map(|(n, _)| n).collect();
    let Some(entries) = entries_mut(root) else { return Ok(()) };
    let Some(row) = row else {
        entries.retain(|e| e.key != *table);
        if table == "coax" {
            leave_feed(root, "coax");
        }
        return Ok(());
    };
    if let Some(NodeKind::List(rows)) = entries.iter_mut().find(|e| e.key == *table).map(|e| &mut e.value.kind) {
        // Names by number would shift when a row goes.
        for (item, name) in rows.iter_mut().zip(&names) {
            let at = item.place;
            if let Some(keys) = entries_mut(item).filter(|keys| !keys.iter().any(|e| e.key == "name")) {
                keys.push(Entry {
                    key: "name".to_owned(),
                    place: at,
                    value: Node { place: at, kind: NodeKind::Text(name.clone()) },
                });
            }
        }
        if *row < rows.len() {
            rows.remove(*row);
        }
    }
    if let Some(name) = names.get(*row) {
        leave_feed(root, name);
    }
    Ok(())
}

fn leave_feed(root: &mut Node, name: &str) {
    let feed =
        entries_mut(root).and_then(|e| e.iter_mut().find(|e| e.key == "feed")).and_then(|e| entries_mut(&mut e.value));
    for list in feed.into_iter().flatten().filter(|e| e.key == "hot" || e.key == "cold") {
        if let NodeKind::List(names) = &mut list.value.kind {
            names.retain(|n| n.text() != Some(name));
        }
    }
}
