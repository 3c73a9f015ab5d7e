//! What is scanned, and which end of it moves.

use super::CutFailure;
use crate::layout::{ConductorKind, Layout};
use crate::station::{PathPoint, Station, Written, offer};

/// A conductor whose length can be set.
#[derive(Debug, Clone, PartialEq, Eq)]
pub(super) enum Target {
    /// The feed line.
    Coax,
    /// A wire, by its name, and the name of its last point where it has one.
    Wire(String, Option<String>),
    /// A star of radials, by its name.
    Radials(String),
}

impl Target {
    /// Find a conductor by name.
    ///
    /// # Errors
    /// A name that is not there (the nearest is offered), a rod, a protective conductor.
    pub(super) fn find(station: &Station, name: &str) -> Result<Self, CutFailure> {
        let refuse = |text: String| Err(CutFailure::Question(text));
        let protective = |name: &str| {
            refuse(format!(
                "\"{name}\" is a protective conductor: it is as the local code asks and its length is no choice; \
                 scan the coax or a wire, the bond stays"
            ))
        };
        if name == "coax" {
            return match &station.coax {
                Some(_) => Ok(Target::Coax),
                None => refuse("the station has no coax; name a wire".to_owned()),
            };
        }
        if let Some(wire) = station.wires.iter().find(|w| w.name.value == name) {
            let end = match wire.path.last().map(|p| &p.value) {
                Some(PathPoint::Named(point)) => Some(point.clone()),
                _ => None,
            };
            return if wire.metal.protective { protective(name) } else { Ok(Target::Wire(name.to_owned(), end)) };
        }
        if let Some(star) = station.radials.iter().find(|r| r.name.value == name) {
            return if star.metal.protective { protective(name) } else { Ok(Target::Radials(name.to_owned())) };
        }
        if station.rods.iter().any(|r| r.name.value == name) {
            return refuse(format!(
                "\"{name}\" is an earth rod, a protective part: its length is no choice; scan the coax or a wire"
            ));
        }
        let wires = station.wires.iter().map(|w| w.name.value.as_str());
        let known = wires.chain(station.radials.iter().map(|r| r.name.value.as_str()));
        let known: Vec<&str> = known.chain(station.coax.iter().map(|_| "coax")).collect();
        refuse(format!("no conductor is called \"{name}\"; {}", offer(name, known)))
    }

    /// As in the station file.
    pub(super) fn name(&self) -> &str {
        match self {
            Target::Coax => "coax",
            Target::Wire(name, _) | Target::Radials(name) => name,
        }
    }

    /// As it stands in a sentence.
    pub(super) fn called(&self) -> String {
        if *self == Target::Coax { "the coax".to_owned() } else { format!("\"{}\"", self.name()) }
    }

    /// The station with this conductor at a length, m.
    pub(super) fn set(&self, station: &mut Station, length_m: f64) {
        let written = |old: Option<Written<f64>>| Written { value: length_m, place: old.and_then(|w| w.place) };
        match self {
            Target::Coax => {
                if let Some(coax) = &mut station.coax {
                    coax.length_m = Some(written(coax.length_m));
                }
            }
            Target::Wire(name, _) => {
                if let Some(wire) = station.wires.iter_mut().find(|w| w.name.value == *name) {
                    wire.length_m = Some(written(wire.length_m));
                }
            }
            Target::Radials(name) => {
                if let Some(star) = station.radials.iter_mut().find(|r| r.name.value == *name) {
                    star.length_m = written(Some(star.length_m));
                }
            }
        }
    }

    /// Conductors of a layout whose last points move.
    pub(super) fn conductors(&self, layout: &Layout) -> Vec<usize> {
        let of_star = |name: &str, star: &str| {
            name.strip_prefix(star).and_then(|rest| rest.strip_prefix(' ')).is_some_and(|k| k.parse::<u32>().is_ok())
        };
        let is_meant = |c: &crate::layout::Conductor| match self {
            Target::Coax => c.kind == ConductorKind::Shield,
            Target::Wire(name, _) => c.kind == ConductorKind::Wire && c.name == *name,
            Target::Radials(name) => c.kind == ConductorKind::Radial && of_star(&c.name, name),
        };
        (0..layout.conductors.len()).filter(|&c| is_meant(&layout.conductors[c])).collect()
    }

    /// Which end moves, in words.
    pub(super) fn moving_end(&self, layout: &Layout) -> String {
        match self {
            Target::Coax => "the radio's end of the coax".to_owned(),
            Target::Radials(name) => format!("the outer ends of \"{name}\""),
            Target::Wire(name, end) => {
                let c = self.conductors(layout).first().map(|&c| &layout.conductors[c]);
                let at_feed = c.is_some_and(|c| c.points.last() == Some(&layout.feed.position));
                let end = end.as_ref().map_or_else(|| "the last point of its path".to_owned(), |e| format!("\"{e}\""));
                if at_feed {
                    format!("the end of \"{name}\" at {end}, and the feed point with it")
                } else {
                    format!("the end of \"{name}\" at {end}")
                }
            }
        }
    }
}
