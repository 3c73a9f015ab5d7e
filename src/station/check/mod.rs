//! The tables as meant: values possible, groups complete, names that exist.
//!
//! Takes the tables as written; gives a [`Station`] or every fault. One file per group of tables; geometry is judged
//! later, in [`crate::layout`].

mod coax;
mod conductors;
mod earth;
mod feed;
mod metal;
mod operation;
mod parts;
mod points;

use super::catalogue::Catalogue;
use super::node::{Node, NodeKind};
use super::raw::{LengthUnit, PathPoint, RawStation, Read, Reader};
use super::source::{Fault, Place, Sources, Written};
use super::types::Station;

/// Reads and checks a whole document.
///
/// # Errors
/// Every fault found.
pub(super) fn station(root: &Node, sources: &Sources, catalogue: &dyn Catalogue) -> Result<Station, Vec<Fault>> {
    let unit_m = match root.get("unit").and_then(Node::text) {
        Some("ft") => crate::quantity::METRES_PER_FOOT,
        _ => 1.0,
    };
    let mut reader = Reader { unit_m, faults: Vec::new() };
    let raw = RawStation::read(root, &mut reader);
    let mut check = Check::new(root, reader.faults, catalogue);
    check.names(root);
    let station = raw.and_then(|raw| check.whole(raw, sources));
    let mut faults = check.faults;
    faults.sort_by_key(|f| f.place.map(|p| (p.source, p.start)));
    faults.dedup();
    match station {
        Some(station) if faults.is_empty() => Ok(station),
        None if faults.is_empty() => {
            Err(vec![Fault::new(Some(root.place), "this is no station file", "write the tables of a station")])
        }
        _ => Err(faults),
    }
}

/// What the checks share: names that exist, faults and doubts found.
pub(super) struct Check<'a> {
    catalogue: &'a dyn Catalogue,
    faults: Vec<Fault>,
    doubts: Vec<(String, String)>,
    /// Names of `[points]`.
    points: Vec<String>,
    /// Names a part may sit on: wires, single radials, rods, "coax".
    conductors: Vec<String>,
    /// Names of stars of radials.
    stars: Vec<String>,
}

impl<'a> Check<'a> {
    fn new(root: &Node, faults: Vec<Fault>, catalogue: &'a dyn Catalogue) -> Self {
        let points = root.get("points").map_or(&[][..], Node::entries).iter().map(|e| e.key.clone()).collect();
        let mut conductors: Vec<String> =
            [("wire"), ("rod")].iter().flat_map(|kind| row_names(root, kind)).map(|(n, _)| n).collect();
        if root.get("coax").is_some() {
            conductors.push("coax".to_owned());
        }
        let stars: Vec<String> = row_names(root, "radials").into_iter().map(|(n, _)| n).collect();
        let counts = root.get("radials").map_or(&[][..], Node::items).iter().map(|row| {
            match row.get("count").map(|n| &n.kind) {
                Some(NodeKind::Number(n)) if (1.0..=MOST_RADIALS).contains(n) => *n as usize,
                _ => 0,
            }
        });
        conductors
            .extend(stars.iter().zip(counts).flat_map(|(star, count)| (1..=count).map(move |k| format!("{star} {k}"))));
        Check { catalogue, faults, doubts: Vec::new(), points, conductors, stars }
    }

    fn fault(&mut self, place: Option<Place>, reason: impl Into<String>, mend: impl Into<String>) {
        self.faults.push(Fault::new(place, reason, mend));
    }

    fn doubt(&mut self, about: impl Into<String>, message: impl Into<String>) {
        self.doubts.push((about.into(), message.into()));
    }

    /// Names are unique within their sort, and not reserved.
    fn names(&mut self, root: &Node) {
        for sorts in [&["wire", "radials", "rod"][..], &["choke"], &["inline"], &["variant"]] {
            let mut seen: Vec<String> = Vec::new();
            for (name, place) in sorts.iter().flat_map(|sort| row_names(root, sort)) {
                if name == "coax" || name == "earth" || (sorts == ["variant"] && name == "nominal") {
                    self.fault(Some(place), format!("the name \"{name}\" is reserved"), "choose another name");
                } else if name.trim().is_empty() {
                    self.fault(Some(place), "this name is empty", "write a name, or leave the key out");
                } else if seen.contains(&name) {
                    self.fault(
                        Some(place),
                        format!("there are two called \"{name}\""),
                        "give one of them another name",
                    );
                }
                seen.push(name);
            }
        }
    }

    fn whole(&mut self, raw: RawStation, sources: &Sources) -> Option<Station> {
        let earth = raw.earth.0.and_then(|e| self.earth(e));
        let points = self.named_points(raw.points);
        let wires: Vec<_> = numbered(raw.wire.0).into_iter().map(|(k, w)| self.wire(k, w)).collect();
        let radials: Vec<_> = numbered(raw.radials.0).into_iter().map(|(k, r)| self.star(k, r)).collect();
        let rods: Vec<_> = numbered(raw.rod.0).into_iter().map(|(k, r)| self.rod(k, r)).collect();
        let coax = raw.coax.0.map(|c| self.coax(c));
        let feed = raw.feed.0.and_then(|f| self.feed(f));
        let mut parts: Vec<_> = numbered(raw.choke.0).into_iter().map(|(k, c)| self.choke(k, c)).collect();
        parts.extend(numbered(raw.inline.0).into_iter().map(|(k, p)| self.inline(k, p)));
        let radio = self.radio(raw.radio.0);
        let operation = raw.operation.0.and_then(|o| self.operation(o));
        let limits = self.limits(raw.limits.0);
        Some(Station {
            title: raw.title.0.map_or_else(String::new, |t| t.value),
            in_feet: raw.unit.0.is_some_and(|u| u.value == LengthUnit::Foot),
            earth: earth?,
            points: points?,
            wires: wires.into_iter().collect::<Option<_>>()?,
            radials: radials.into_iter().collect::<Option<_>>()?,
            coax: match coax {
                Some(coax) => Some(coax?),
                None => None,
            },
            feed: feed?,
            parts: parts.into_iter().collect::<Option<_>>()?,
            rods: rods.into_iter().collect::<Option<_>>()?,
            radio: radio?,
            operation: operation?,
            limits: limits?,
            variants: raw.variant.0.into_iter().map(|v| v.value.name.value).collect(),
            doubts: std::mem::take(&mut self.doubts),
            sources: sources.clone(),
        })
    }

    /// A value that must be above zero and, where given, at most `most`.
    fn above_zero(&mut self, value: Written<f64>, what: &str, most: f64, mend: &str) -> Option<Written<f64>> {
        if value.value > 0.0 && value.value <= most {
            return Some(value);
        }
        let reason =
            if value.value > 0.0 { format!("{what} is too large") } else { format!("{what} must be above zero") };
        self.fault(value.place, reason, mend);
        None
    }

    fn point_exists(&mut self, point: &Written<PathPoint>) -> Option<()> {
        let PathPoint::Named(name) = &point.value else { return Some(()) };
        self.name_exists(name, point.place)
    }

    fn name_exists(&mut self, name: &str, place: Option<Place>) -> Option<()> {
        if self.points.iter().any(|p| p == name) {
            return Some(());
        }
        let mend = if self.points.is_empty() {
            format!("add a table [points] with {name} = [east, north, up]")
        } else {
            super::offer(name, self.points.iter().map(String::as_str))
        };
        self.fault(place, format!("no point is called \"{name}\""), mend);
        None
    }

    fn conductor_exists(&mut self, name: &Written<String>) -> Option<()> {
        if self.conductors.contains(&name.value) {
            return Some(());
        }
        let mend = if self.stars.contains(&name.value) {
            format!("name one of its wires: \"{} 1\"", name.value)
        } else {
            super::offer(&name.value, self.conductors.iter().map(String::as_str))
        };
        self.fault(name.place, format!("no conductor is called \"{}\"", name.value), mend);
        None
    }
}

/// A star of more wires than this is refused: it would be slow and no better (common practice ends at 120).
const MOST_RADIALS: f64 = 240.0;

fn numbered<T>(rows: Vec<Written<T>>) -> Vec<(usize, Written<T>)> {
    rows.into_iter().enumerate().map(|(k, row)| (k + 1, row)).collect()
}

/// The names of all tables of a sort, given or by default, with where they stand.
pub(super) fn row_names(root: &Node, sort: &str) -> Vec<(String, Place)> {
    let rows = root.get(sort).map_or(&[][..], Node::items);
    let name_of =
        |(k, row): (usize, &Node)| match row.get("name").and_then(|n| n.text().map(|t| (t.to_owned(), n.place))) {
            Some(given) => given,
            None => (format!("{sort} {}", k + 1), row.place),
        };
    rows.iter().enumerate().map(name_of).collect()
}

/// The given name, or the sort with its number.
fn name_or(given: Option<Written<String>>, sort: &str, number: usize, table: Option<Place>) -> Written<String> {
    given.unwrap_or_else(|| Written { value: format!("{sort} {number}"), place: table })
}
