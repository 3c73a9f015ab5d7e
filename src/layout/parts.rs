//! Chokes and inline parts: where their gaps lie.

use super::place::{JOIN_M, Placing};
use super::terminals::GAP_RADII;
use super::{Feed, PartKind, PlacedPart};
use crate::quantity::{metres, metres_and_feet};
use crate::station::{Part, PartSort};

impl Placing<'_> {
    /// Places every part; chokes come first, in file order.
    pub(super) fn parts(&mut self, feed: &Feed) -> Vec<PlacedPart> {
        let mut placed: Vec<PlacedPart> = Vec::new();
        for part in &self.station.parts {
            let Some(new) = self.part(part, feed) else { continue };
            if let Some(other) = placed
                .iter()
                .find(|p| p.conductor == new.conductor && p.from_m < new.to_m - 1e-9 && new.from_m < p.to_m - 1e-9)
            {
                let reason =
                    format!("{} \"{}\" and \"{}\" sit in the same place", word(part.sort), part.name.value, other.name);
                self.fault(
                    part.at_m.place,
                    reason,
                    format!("move one of them by {} or more", metres((new.to_m - new.from_m).max(0.01))),
                );
                continue;
            }
            placed.push(new);
        }
        placed
    }

    fn part(&mut self, part: &Part, feed: &Feed) -> Option<PlacedPart> {
        let (sort, name) = (word(part.sort), &part.name.value);
        let Some(conductor) = self.named(&part.on.value) else {
            self.fault(
                part.on.place,
                format!("no conductor is called \"{}\"", part.on.value),
                "name a wire, a radial, a rod or \"coax\"",
            );
            return None;
        };
        let draft = &self.drafts[conductor];
        let (called, length_m) = (draft.called(), draft.length_now_m());
        if part.at_m.value > length_m + JOIN_M {
            let reason = format!(
                "{sort} \"{name}\" sits at {} but {called} is {} long",
                metres(part.at_m.value),
                metres(length_m)
            );
            self.fault(part.at_m.place, reason, format!("write a distance of {} or less", metres_and_feet(length_m)));
            return None;
        }
        let at_m = part.at_m.value.min(length_m);
        let width_m = GAP_RADII * draft.metal.radius_m;
        let Some((from_m, to_m)) = self.gap_at(conductor, at_m, width_m, feed) else {
            let reason = format!(
                "there is no room for {sort} \"{name}\" at {} along {called}: it needs {}",
                metres(at_m),
                metres(width_m)
            );
            self.fault(part.at_m.place, reason, "move it away from the joins");
            return None;
        };
        let kind = match part.sort {
            PartSort::Choke => PartKind::Choke,
            PartSort::Inline => PartKind::Inline,
        };
        Some(PlacedPart { name: name.clone(), kind, conductor, at_m: part.at_m.value, from_m, to_m, law: part.law })
    }

    /// The gap of a part: centred on its place; at a join on the feed side of it; inside the conductor; clear of the
    /// feed gap; never across a join.
    fn gap_at(&self, conductor: usize, at_m: f64, width_m: f64, feed: &Feed) -> Option<(f64, f64)> {
        let draft = &self.drafts[conductor];
        let distances = draft.distances_m();
        let length_m = *distances.last()?;
        let joins = (1..distances.len()).filter(|v| *v == draft.last() || self.is_join(conductor, *v, feed));
        let mut stretches: Vec<(f64, f64)> = Vec::new();
        for vertex in joins {
            let from_m = stretches.last().map_or(0.0, |s| s.1);
            stretches.push((from_m, distances[vertex]));
        }
        // Exactly at a join the part belongs to the stretch on the feed side: the higher one where the feed is at the end.
        let at_feed =
            |vertex: usize| feed.hot.iter().chain(&feed.cold).any(|l| l.conductor == conductor && l.vertex == vertex);
        let reversed = at_feed(draft.last()) && !at_feed(0);
        let holds = |&(_, to_m): &(f64, f64)| {
            if reversed { at_m < to_m - JOIN_M || to_m == length_m } else { at_m <= to_m + JOIN_M }
        };
        let (mut low_m, mut high_m) = stretches.into_iter().find(holds)?;
        for leg in feed.hot.iter().filter(|l| l.conductor == conductor) {
            let feed_m = distances[leg.vertex];
            if leg.forward && (low_m - feed_m).abs() <= JOIN_M {
                low_m += feed.gap_m;
            } else if !leg.forward && (high_m - feed_m).abs() <= JOIN_M {
                high_m -= feed.gap_m;
            }
        }
        if high_m - low_m < width_m {
            return None;
        }
        let from_m = (at_m - width_m / 2.0).clamp(low_m, high_m - width_m);
        Some((from_m, from_m + width_m))
    }

    fn is_join(&self, conductor: usize, vertex: usize, feed: &Feed) -> bool {
        self.junction_of(conductor, vertex).is_some() || self.drafts[conductor].at(vertex) == feed.position
    }
}

fn word(sort: PartSort) -> &'static str {
    match sort {
        PartSort::Choke => "choke",
        PartSort::Inline => "inline part",
    }
}
