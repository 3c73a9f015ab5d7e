//! `length`: a path cut there, or its last leg carried straight on to it.

use super::place::{Draft, JOIN_M, Placing, Vertex};
use super::{ConductorKind, Point};
use crate::quantity::metres;
use crate::station::Written;

impl Placing<'_> {
    /// Cuts every conductor that has a `length`; what is joined only at the last vertex moves with the end.
    pub(super) fn cut(&mut self) {
        // The coax first: wires may end where it ends.
        let mut order: Vec<usize> = (0..self.drafts.len()).collect();
        order.sort_by_key(|&i| self.drafts[i].kind != ConductorKind::Shield);
        for conductor in order {
            if let Some(length) = self.drafts[conductor].length_m {
                self.cut_one(conductor, length);
            }
        }
    }

    fn cut_one(&mut self, conductor: usize, length: Written<f64>) {
        let draft = &self.drafts[conductor];
        let distances = draft.distances_m();
        let last = draft.last();
        let route_m = distances[last];
        let over_m = length.value - route_m;
        if over_m.abs() <= 1e-9 {
            return;
        }
        if over_m > JOIN_M && draft.kind == ConductorKind::Shield {
            let reason = format!("the coax is {} long but its path only {}", metres(length.value), metres(route_m));
            let mend =
                format!("move the last point {} further on, or write length = \"{}\"", metres(over_m), metres(route_m));
            self.fault(length.place, reason, mend);
            return;
        }
        if length.value < 10.0 * JOIN_M {
            let reason = format!("{} would be {} long", draft.called(), metres(length.value));
            self.fault(length.place, reason, "write a length of a centimetre or more, or leave the conductor out");
            return;
        }
        let old_end = draft.at(last);
        // The first vertex at or past the cut becomes the end; on the last leg it is the last vertex that moves.
        let kept = distances.iter().position(|d| *d >= length.value - JOIN_M).unwrap_or(last).max(1);
        let (from, to) = (draft.at(kept - 1), draft.at(kept));
        let exact = (distances[kept] - length.value).abs() <= JOIN_M && kept < last;
        let end = if exact {
            to
        } else {
            from + (to - from) * ((length.value - distances[kept - 1]) / (distances[kept] - distances[kept - 1]))
        };
        let first_dropped = if exact { kept + 1 } else { kept };
        for vertex in first_dropped..last {
            self.needed(conductor, vertex, length);
        }
        let draft = &mut self.drafts[conductor];
        // The end is still what the last point was meant to be ("rig"), wherever it now is.
        let end_name = draft.vertices[last].name.clone();
        draft.vertices.truncate(kept + 1);
        if !exact {
            draft.vertices[kept] = Vertex { at: end, name: end_name, place: length.place };
        }
        self.move_with_end(conductor, old_end, end);
    }

    /// Faults for everything that needs a dropped vertex.
    fn needed(&mut self, conductor: usize, vertex: usize, length: Written<f64>) {
        let draft = &self.drafts[conductor];
        let at = draft.at(vertex);
        let spot = draft.vertices[vertex].name.as_ref().map_or_else(|| "that point".to_owned(), |n| format!("\"{n}\""));
        let called = draft.called();
        let shield = draft.kind == ConductorKind::Shield;
        let reached_m = draft.distances_m()[vertex];
        let near = |p: &Point| (p - at).norm() <= JOIN_M;
        let mut needs: Vec<String> = self
            .drafts
            .iter()
            .enumerate()
            .filter(|(other, d)| *other != conductor && d.vertices.iter().any(|v| near(&v.at)))
            .map(|(_, d)| d.called())
            .collect();
        needs.extend(
            self.station
                .rods
                .iter()
                .zip(&self.rod_tops)
                .filter(|(_, top)| near(top))
                .map(|(r, _)| format!("rod \"{}\"", r.name.value)),
        );
        if self.feed_point.as_ref().is_some_and(near) {
            needs.push("the feed point".to_owned());
        }
        if shield && self.is_entry(draft, vertex) {
            needs.push("the entry".to_owned());
        }
        for need in needs {
            let reason = format!(
                "{called} is cut at {}, but {need} needs {spot} at {} along it",
                metres(length.value),
                metres(reached_m)
            );
            self.fault(
                length.place,
                reason,
                format!("write a length above {}, or move what is joined there", metres(reached_m)),
            );
        }
    }

    fn is_entry(&self, draft: &Draft, vertex: usize) -> bool {
        let name = draft.vertices[vertex].name.as_deref();
        match self.station.coax.as_ref().and_then(|c| c.entry.as_ref()).map(|e| &e.value) {
            Some(crate::station::PathPoint::Named(entry)) => name == Some(entry.as_str()),
            Some(crate::station::PathPoint::At(at)) => {
                let here = draft.at(vertex);
                (here.x - at.east_m).hypot(here.y - at.north_m) <= JOIN_M
            }
            None => name == Some("entry"),
        }
    }

    fn move_with_end(&mut self, conductor: usize, old: Point, new: Point) {
        for (other, draft) in self.drafts.iter_mut().enumerate() {
            for vertex in draft.vertices.iter_mut().filter(|v| other != conductor && (v.at - old).norm() <= JOIN_M) {
                vertex.at = new;
            }
        }
        for top in self.rod_tops.iter_mut().chain(self.feed_point.iter_mut()).filter(|t| (**t - old).norm() <= JOIN_M) {
            *top = new;
        }
    }
}
