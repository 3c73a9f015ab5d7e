//! The feed point: which legs are on which terminal, and the gap.

use super::place::{JOIN_M, Placing, Vertex};
use super::{ConductorKind, Feed, FeedLeg, Point};
use crate::quantity::{metres, metres_and_feet};
use crate::station::{Earth, FeedAt, Written};

/// Width of a gap in radii of its conductor, where the file says nothing.
pub(super) const GAP_RADII: f64 = 4.0;

impl Placing<'_> {
    /// With `feed.on`: the vertex of the feed point on that conductor, made where there is none.
    pub(super) fn vertex_along(&mut self) -> Option<(usize, usize)> {
        let FeedAt::Along { on, at_m } = &self.station.feed.at else { return None };
        let Some(conductor) = self.named(&on.value) else {
            self.fault(
                on.place,
                format!("no conductor is called \"{}\"", on.value),
                "name a wire, a radial or the coax",
            );
            return None;
        };
        let draft = &self.drafts[conductor];
        let (distances, length_m) = (draft.distances_m(), draft.length_now_m());
        if at_m.value <= JOIN_M || at_m.value >= length_m - JOIN_M {
            let reason = format!(
                "the feed point sits at {} but \"{}\" is {} long",
                metres(at_m.value),
                on.value,
                metres_and_feet(length_m)
            );
            self.fault(at_m.place, reason, "write a distance between its ends; at an end use at, hot and cold");
            return None;
        }
        let next = distances.iter().position(|d| *d >= at_m.value - JOIN_M)?;
        if (distances[next] - at_m.value).abs() <= JOIN_M {
            return Some((conductor, next));
        }
        let (from, to) = (draft.at(next - 1), draft.at(next));
        let share = (at_m.value - distances[next - 1]) / (distances[next] - distances[next - 1]);
        let vertex = Vertex { at: from + (to - from) * share, name: None, place: at_m.place };
        self.drafts[conductor].vertices.insert(next, vertex);
        Some((conductor, next))
    }

    /// Sorts the legs at the feed point onto the terminals; a coax left off both is taken out of the junction.
    pub(super) fn feed(&mut self, along: Option<(usize, usize)>) -> Option<Feed> {
        let station = self.station;
        let position = match along {
            Some((conductor, vertex)) => self.drafts[conductor].at(vertex),
            None => self.snapped(self.feed_point?),
        };
        let mut here: Vec<(usize, usize)> = Vec::new();
        for (c, draft) in self.drafts.iter().enumerate() {
            here.extend(draft.vertices.iter().enumerate().filter(|(_, v)| v.at == position).map(|(v, _)| (c, v)));
        }
        let (mut hot, mut cold) = (Vec::new(), Vec::new());
        if let Some((conductor, vertex)) = along {
            hot.push(FeedLeg { conductor, vertex, forward: true });
            cold.push(FeedLeg { conductor, vertex, forward: false });
        }
        self.terminal(&station.feed.hot, &here, position, &mut hot);
        self.terminal(&station.feed.cold, &here, position, &mut cold);
        let on_terminal = |c: usize| hot.iter().chain(&cold).any(|leg| leg.conductor == c);
        let strays: Vec<usize> = here.iter().map(|h| h.0).filter(|c| !on_terminal(*c)).collect();
        for stray in strays {
            self.stray(stray, position, along.is_some());
        }
        if let Some(shield) = self.shield() {
            let begins = self.drafts[shield].at(0);
            if begins != position {
                let reason = format!("the coax begins {} from the feed point", metres((begins - position).norm()));
                self.fault(
                    self.drafts[shield].vertices[0].place,
                    reason,
                    "begin coax.path with the feed point: the route runs from there to the radio",
                );
            }
        }
        let named_earth = station.feed.cold.iter().find(|c| c.value == "earth");
        if let Some(earth) = named_earth.filter(|_| station.earth.value != Earth::Perfect || position.z != 0.0) {
            let reason = "\"earth\" is a terminal only at height 0 over a perfect earth";
            self.fault(earth.place, reason, "over soil drive a [[rod]] at the feed point and name it under cold");
        }
        let cold_is_earth = station.earth.value == Earth::Perfect && position.z == 0.0;
        let gap_m = self.gap(&hot, &here)?;
        Some(Feed { position, hot, cold, cold_is_earth, gap_m, impedance_ratio: station.feed.impedance_ratio })
    }

    /// The vertex within joining distance, else the point itself.
    fn snapped(&self, point: Point) -> Point {
        let vertices = self.drafts.iter().flat_map(|d| d.vertices.iter().map(|v| v.at));
        let nearest = vertices.min_by(|a, b| (a - point).norm().total_cmp(&(b - point).norm()));
        nearest.filter(|v| (v - point).norm() <= JOIN_M).unwrap_or(point)
    }

    fn terminal(
        &mut self,
        names: &[Written<String>],
        here: &[(usize, usize)],
        position: Point,
        legs: &mut Vec<FeedLeg>,
    ) {
        for name in names.iter().filter(|n| n.value != "earth") {
            let of_star = format!("{} ", name.value);
            let meant: Vec<usize> = (0..self.drafts.len())
                .filter(|&c| {
                    let draft = &self.drafts[c];
                    draft.name == name.value
                        || (draft.kind == ConductorKind::Radial
                            && draft.name.strip_prefix(&of_star).is_some_and(|k| k.parse::<u32>().is_ok()))
                })
                .collect();
            let found: Vec<(usize, usize)> = here.iter().copied().filter(|(c, _)| meant.contains(c)).collect();
            if found.is_empty() {
                let distance = meant
                    .iter()
                    .flat_map(|c| self.drafts[*c].vertices.iter())
                    .map(|v| (v.at - position).norm())
                    .reduce(f64::min);
                let reason = match distance {
                    Some(d) => {
                        format!("\"{}\" has no point at the feed point; its nearest is {} away", name.value, metres(d))
                    }
                    None => format!("\"{}\" is not there", name.value),
                };
                self.fault(name.place, reason, "let its path begin, end or bend at the feed point");
            }
            for (conductor, vertex) in found {
                let last = self.drafts[conductor].last();
                if vertex > 0 {
                    legs.push(FeedLeg { conductor, vertex, forward: false });
                }
                if vertex < last {
                    legs.push(FeedLeg { conductor, vertex, forward: true });
                }
            }
        }
    }

    /// A conductor at the feed point that is on neither terminal.
    fn stray(&mut self, conductor: usize, position: Point, along: bool) {
        let draft = &self.drafts[conductor];
        if draft.kind == ConductorKind::Shield {
            for junction in &mut self.junctions {
                junction.members.retain(|m| *m != (conductor, 0) || junction.position != position);
            }
            self.junctions.retain(|j| j.members.len() > 1);
            if along {
                let message = "the shield is left insulated at the feed point; where it is connected there, add cold = [\"coax\"] under [feed]";
                self.warn("coax", message);
            }
            return;
        }
        let reason = format!("{} meets the feed point but is on neither terminal", draft.called());
        self.fault(
            draft.place,
            reason,
            format!("add \"{}\" to hot or cold under [feed], or end it elsewhere", self.drafts[conductor].name),
        );
    }

    fn gap(&mut self, hot: &[FeedLeg], here: &[(usize, usize)]) -> Option<f64> {
        let thinnest_m = here.iter().map(|(c, _)| self.drafts[*c].metal.radius_m).reduce(f64::min)?;
        let given = self.station.feed.gap_m;
        let gap_m = given.map_or(GAP_RADII * thinnest_m, |g| g.value);
        let short = hot.iter().find_map(|leg| {
            let draft = &self.drafts[leg.conductor];
            let next = if leg.forward { leg.vertex + 1 } else { leg.vertex - 1 };
            let leg_m = (draft.at(next) - draft.at(leg.vertex)).norm();
            (gap_m >= leg_m).then(|| (draft.called(), leg_m))
        });
        if let Some((called, leg_m)) = short {
            let place = given.and_then(|g| g.place);
            let reason =
                format!("the feed gap is {} wide but the first leg of {called} only {}", metres(gap_m), metres(leg_m));
            self.fault(place, reason, "write a smaller gap, or a longer leg at the feed point");
            return None;
        }
        Some(gap_m)
    }
}
