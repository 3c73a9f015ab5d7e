//! The earth's surface: rods driven, conductors parted where they pass through it, what touches it judged.

use super::place::{Draft, JOIN_M, Placing, Vertex};
use super::{ConductorKind, Feed, Junction, Point};
use crate::quantity::metres;
use crate::station::Earth;

/// Heights smaller than this are height 0, m: rounding, not meaning.
const ZERO_M: f64 = 1e-7;

impl Placing<'_> {
    /// Draws the rods with their leads.
    pub(super) fn drive_rods(&mut self) {
        let earth = self.station.earth.value;
        for (rod, top) in self.station.rods.iter().zip(self.rod_tops.clone()) {
            let name = &rod.name.value;
            if earth == Earth::None {
                self.fault(
                    rod.at.place,
                    format!("rod \"{name}\" has no earth to be driven into"),
                    "write earth.kind = \"soil\", or take the rod out",
                );
                continue;
            }
            let surface = Point::new(top.x, top.y, 0.0);
            let mut points = vec![top, surface, surface - Point::new(0.0, 0.0, rod.length_m.value)];
            if top.z.abs() <= JOIN_M {
                // No lead to speak of: what ends there ends on the rod's head, at height 0.
                points.remove(0);
                for vertex in
                    self.drafts.iter_mut().flat_map(|d| &mut d.vertices).filter(|v| (v.at - top).norm() <= JOIN_M)
                {
                    vertex.at = surface;
                }
                if self.feed_point.is_some_and(|f| (f - top).norm() <= JOIN_M) {
                    self.feed_point = Some(surface);
                }
            } else if top.z < 0.0 {
                points.remove(1);
                if -top.z >= rod.length_m.value - JOIN_M {
                    let reason = format!(
                        "rod \"{name}\" reaches {} down, but its head is {} down",
                        metres(rod.length_m.value),
                        metres(-top.z)
                    );
                    self.fault(rod.length_m.place, reason, "make it longer: a rod's length counts from the surface");
                    continue;
                }
            }
            if earth == Earth::Perfect {
                self.warn(
                    name,
                    "a perfect earth needs no rod: only its lead remains, and what ends at height 0 is bonded without resistance. Real rods have \
                     tens to hundreds of ohm; write kind = \"soil\" to see them",
                );
                if top.z < 0.0 {
                    self.fault(
                        rod.at.place,
                        "nothing can be below a perfect earth",
                        "raise the point to height 0, or write kind = \"soil\"",
                    );
                }
                points.retain(|p| p.z >= 0.0);
            }
            if points.len() < 2 {
                continue;
            }
            let vertices = points.into_iter().map(|at| Vertex { at, name: None, place: rod.at.place }).collect();
            let draft = Draft {
                name: name.clone(),
                kind: ConductorKind::Rod,
                vertices,
                metal: rod.metal,
                length_m: None,
                place: rod.name.place,
            };
            self.drafts.push(draft);
        }
    }

    /// Puts a vertex at height 0 wherever a leg passes through the surface of soil; refuses legs lying in it and,
    /// over a perfect earth, anything below it.
    pub(super) fn part_at_surface(&mut self) {
        if self.station.earth.value == Earth::None {
            return;
        }
        for vertex in self.drafts.iter_mut().flat_map(|d| &mut d.vertices) {
            if vertex.at.z.abs() <= ZERO_M {
                vertex.at.z = 0.0;
            }
        }
        for index in 0..self.drafts.len() {
            self.judge_legs(index);
            let draft = &mut self.drafts[index];
            let mut vertices: Vec<Vertex> = Vec::with_capacity(draft.vertices.len());
            for vertex in draft.vertices.drain(..) {
                if let Some(before) = vertices.last().filter(|b| b.at.z * vertex.at.z < 0.0) {
                    let share = before.at.z / (before.at.z - vertex.at.z);
                    let mut at = before.at + (vertex.at - before.at) * share;
                    at.z = 0.0;
                    let place = vertex.place;
                    vertices.push(Vertex { at, name: None, place });
                }
                vertices.push(vertex);
            }
            draft.vertices = vertices;
        }
    }

    fn judge_legs(&mut self, index: usize) {
        let perfect = self.station.earth.value == Earth::Perfect;
        let draft = self.drafts[index].clone();
        let called = draft.called();
        if perfect && let Some(below) = draft.vertices.iter().find(|v| v.at.z < 0.0) {
            let reason = format!("{called} goes {} below a perfect earth, where nothing can be", metres(-below.at.z));
            self.fault(below.place.or(draft.place), reason, "raise it, or write kind = \"soil\" under [earth]");
            return;
        }
        if let Some(leg) = draft.vertices.windows(2).find(|leg| leg[0].at.z == 0.0 && leg[1].at.z == 0.0) {
            let reason = format!("a leg of {called} lies at height 0, half in the earth");
            let place = leg[1].place.or(draft.place);
            self.fault(
                place,
                reason,
                "write \"on ground\" (axis one outer radius up) or \"on grass\" as its height, or \"buried 5 cm\"",
            );
            return;
        }
        if draft.kind == ConductorKind::Rod {
            return;
        }
        let outer_m = draft.metal.outer_radius_m();
        if let Some(sunk) = draft.vertices.iter().find(|v| v.at.z != 0.0 && v.at.z.abs() < outer_m * (1.0 - 1e-6)) {
            let reason = format!(
                "the axis of {called} is {} {} the surface, less than its radius of {}",
                metres(sunk.at.z.abs()),
                if sunk.at.z > 0.0 { "over" } else { "below" },
                metres(outer_m)
            );
            self.fault(
                sunk.place.or(draft.place),
                reason,
                "write \"on ground\" (axis one outer radius up), or 0 to bring it down to the surface",
            );
        }
    }

    /// Over a perfect earth what ends at height 0 is bonded to it; over soil it must meet something that goes on below.
    pub(super) fn meet_earth(&mut self, feed: &Feed) {
        match self.station.earth.value {
            Earth::None => {}
            Earth::Perfect => self.bond(feed),
            _ => self.need_below(),
        }
    }

    fn bond(&mut self, feed: &Feed) {
        for junction in &mut self.junctions {
            junction.to_earth |= junction.position.z == 0.0;
        }
        for (conductor, draft) in self.drafts.iter().enumerate() {
            for (vertex, v) in draft.vertices.iter().enumerate() {
                let insulated = v.at == feed.position && draft.kind == ConductorKind::Shield;
                if v.at.z == 0.0
                    && !insulated
                    && !self.junctions.iter().any(|j| j.members.contains(&(conductor, vertex)))
                {
                    self.junctions.push(Junction {
                        position: v.at,
                        members: vec![(conductor, vertex)],
                        to_earth: true,
                    });
                }
            }
        }
    }

    fn need_below(&mut self) {
        let below = |(conductor, vertex): (usize, usize)| {
            let draft = &self.drafts[conductor];
            let next = |v: Option<usize>| v.and_then(|v| draft.vertices.get(v)).is_some_and(|v| v.at.z < 0.0);
            next(vertex.checked_sub(1)) || next(Some(vertex + 1))
        };
        let mut faults = Vec::new();
        for (conductor, draft) in self.drafts.iter().enumerate() {
            for (vertex, v) in draft.vertices.iter().enumerate().filter(|(_, v)| v.at.z == 0.0) {
                let goes_on = match self.junction_of(conductor, vertex) {
                    Some(junction) => junction.members.iter().copied().any(below),
                    None => below((conductor, vertex)),
                };
                if !goes_on {
                    let reason = format!("{} comes down to the soil at height 0 and ends on nothing", draft.called());
                    let mend = "drive a [[rod]] at that point, carry the path on below (\"buried 10 cm\"), or stop above: \"on ground\"";
                    faults.push((v.place.or(draft.place), reason, mend));
                }
            }
        }
        for (place, reason, mend) in faults {
            self.fault(place, reason, mend);
        }
    }
}
