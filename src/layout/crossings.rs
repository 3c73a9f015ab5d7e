//! Conductors that come closer than they are thick without being joined.

use super::place::Placing;
use super::{Feed, Point};
use crate::quantity::metres;
use std::collections::{BTreeMap, BTreeSet};

/// Within this many sums of radii of a common joint two legs may touch: wires leave a terminal in nearly the same
/// direction (radials 3 degrees apart are clear of each other after 20).
const EXCUSED_RADII: f64 = 50.0;

/// A leg as the judgement needs it.
struct Leg {
    conductor: usize,
    from: Point,
    to: Point,
    /// Distance of its start along the conductor, m.
    start_m: f64,
    outer_m: f64,
}

impl Placing<'_> {
    /// Refuses axes closer than the sum of the outer radii where they are not joined.
    pub(super) fn judge_crossings(&mut self, feed: &Feed) {
        let legs = self.legs();
        let joints = self.joints(feed);
        let mut told: BTreeSet<(usize, usize)> = BTreeSet::new();
        for (k, a) in legs.iter().enumerate() {
            for b in &legs[k + 1..] {
                let reach_m = a.outer_m + b.outer_m;
                if told.contains(&(a.conductor, b.conductor)) || apart(a, b, reach_m) {
                    continue;
                }
                let common = joints.get(&(a.conductor, b.conductor)).map_or(&[][..], Vec::as_slice);
                if let Some((gap_m, at)) = too_close(a, b, reach_m, common) {
                    told.insert((a.conductor, b.conductor));
                    self.too_close(a.conductor, b.conductor, gap_m, reach_m, at);
                }
            }
        }
    }

    fn legs(&self) -> Vec<Leg> {
        let of = |(conductor, draft): (usize, &super::place::Draft)| {
            let distances = draft.distances_m();
            let outer_m = draft.metal.outer_radius_m();
            let pairs = draft.vertices.windows(2).zip(distances);
            pairs
                .map(|(v, start_m)| Leg { conductor, from: v[0].at, to: v[1].at, start_m, outer_m })
                .collect::<Vec<_>>()
        };
        self.drafts.iter().enumerate().flat_map(of).collect()
    }

    /// Places where two conductors meet, for every pair (a conductor with itself included).
    fn joints(&self, feed: &Feed) -> BTreeMap<(usize, usize), Vec<Point>> {
        let mut meetings: Vec<(Point, Vec<usize>)> =
            self.junctions.iter().map(|j| (j.position, j.members.iter().map(|m| m.0).collect())).collect();
        // A coax left off both terminals is at the feed point too.
        let at_feed = (0..self.drafts.len()).filter(|c| self.drafts[*c].vertices.iter().any(|v| v.at == feed.position));
        meetings.push((feed.position, at_feed.collect()));
        let mut joints: BTreeMap<(usize, usize), Vec<Point>> = BTreeMap::new();
        for (position, members) in meetings {
            for &a in &members {
                for &b in members.iter().filter(|b| a <= **b) {
                    joints.entry((a, b)).or_default().push(position);
                }
            }
        }
        joints
    }

    fn too_close(&mut self, a: usize, b: usize, gap_m: f64, reach_m: f64, at: Point) {
        let (first, second) = (self.drafts[a].called(), self.drafts[b].called());
        let where_ = format!("near [{:.2}, {:.2}, {:.2}]", at.x, at.y, at.z);
        let reason = if a == b {
            format!(
                "{first} comes within {} of itself {where_}, closer than it is thick ({})",
                metres(gap_m),
                metres(reach_m)
            )
        } else {
            format!(
                "{first} and {second} are {} apart {where_}, closer than they are thick ({})",
                metres(gap_m),
                metres(reach_m)
            )
        };
        let place = self.drafts[b].place.or(self.drafts[a].place);
        self.fault(
            place,
            reason,
            "give both a common point of their paths to join them, or lead them past each other at a distance",
        );
    }
}

/// Quick look: boxes around the legs further apart than the reach.
fn apart(a: &Leg, b: &Leg, reach_m: f64) -> bool {
    (0..3).any(|i| {
        let (a_low, a_high) = (a.from[i].min(a.to[i]), a.from[i].max(a.to[i]));
        let (b_low, b_high) = (b.from[i].min(b.to[i]), b.from[i].max(b.to[i]));
        a_low > b_high + reach_m || b_low > a_high + reach_m
    })
}

/// The least distance and where, if it is below the reach and not near a common joint.
fn too_close(a: &Leg, b: &Leg, reach_m: f64, joints: &[Point]) -> Option<(f64, Point)> {
    let excused_m = EXCUSED_RADII * reach_m;
    let clear = |leg: &Leg| -> Vec<(Point, Point, f64)> {
        let mut pieces = vec![(leg.from, leg.to, leg.start_m)];
        for joint in joints {
            pieces = pieces.into_iter().flat_map(|piece| outside(piece, *joint, excused_m)).collect();
        }
        pieces
    };
    for (a0, a1, a_start) in clear(a) {
        for (b0, b1, b_start) in clear(b) {
            let (gap_m, s, t) = segment_distance(a0, a1, b0, b1);
            if gap_m >= reach_m * (1.0 - 1e-9) {
                continue;
            }
            if a.conductor == b.conductor {
                let way_m = (b_start + t * (b1 - b0).norm()) - (a_start + s * (a1 - a0).norm());
                // A bend: the way from one to the other along the wire is short.
                if way_m.abs() <= excused_m {
                    continue;
                }
            }
            return Some((gap_m, a0 + (a1 - a0) * s));
        }
    }
    None
}

/// What of a piece lies outside a ball.
fn outside(piece: (Point, Point, f64), centre: Point, radius_m: f64) -> Vec<(Point, Point, f64)> {
    let (from, to, start_m) = piece;
    let way = to - from;
    let length = way.norm();
    if length == 0.0 {
        return Vec::new();
    }
    let along = (centre - from).dot(&way) / length;
    let off = (centre - from).norm_squared() - along * along;
    let half = radius_m * radius_m - off;
    if half <= 0.0 {
        return vec![piece];
    }
    let (enter, leave) = (along - half.sqrt(), along + half.sqrt());
    let mut rest = Vec::new();
    if enter > 0.0 {
        rest.push((from, from + way * (enter.min(length) / length), start_m));
    }
    if leave < length {
        let leave = leave.max(0.0);
        rest.push((from + way * (leave / length), to, start_m + leave));
    }
    rest
}

/// Least distance of two segments and the shares along each where it is reached.
///
/// # Source
/// Elementary: the unconstrained minimum of the quadratic distance, clamped to the segments one after the other.
fn segment_distance(a0: Point, a1: Point, b0: Point, b1: Point) -> (f64, f64, f64) {
    let (u, v, w) = (a1 - a0, b1 - b0, a0 - b0);
    let (uu, vv, uv, uw, vw) = (u.dot(&u), v.dot(&v), u.dot(&v), u.dot(&w), v.dot(&w));
    let share = |top: f64, bottom: f64| if bottom > 0.0 { (top / bottom).clamp(0.0, 1.0) } else { 0.0 };
    let best_t = |s: f64| share(vw + s * uv, vv);
    let best_s = |t: f64| share(t * uv - uw, uu);
    // Inner minimum first, then each end: parallel legs have no single inner one.
    let s = share(uv * vw - vv * uw, uu * vv - uv * uv);
    let (t, mut best) = (best_t(s), (f64::INFINITY, 0.0, 0.0));
    for (s, t) in [(best_s(t), t), (0.0, best_t(0.0)), (1.0, best_t(1.0)), (best_s(0.0), 0.0), (best_s(1.0), 1.0)] {
        let distance = (a0 + u * s - b0 - v * t).norm();
        if distance < best.0 {
            best = (distance, s, t);
        }
    }
    best
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn distances_of_segments() {
        let p = Point::new;
        let crossing = segment_distance(p(-1.0, 0.0, 0.0), p(1.0, 0.0, 0.0), p(0.5, -1.0, 0.2), p(0.5, 1.0, 0.2));
        assert!(
            (crossing.0 - 0.2).abs() < 1e-12 && (crossing.1 - 0.75).abs() < 1e-12 && (crossing.2 - 0.5).abs() < 1e-12
        );
        let parallel = segment_distance(p(0.0, 0.0, 0.0), p(1.0, 0.0, 0.0), p(2.0, 1.0, 0.0), p(3.0, 1.0, 0.0));
        assert!((parallel.0 - 2f64.sqrt()).abs() < 1e-12);
        let end_on = segment_distance(p(0.0, 0.0, 0.0), p(1.0, 0.0, 0.0), p(3.0, 0.0, 0.0), p(1.5, 0.0, 0.0));
        assert!((end_on.0 - 0.5).abs() < 1e-12);
    }

    #[test]
    fn a_ball_takes_the_middle_out() {
        let p = Point::new;
        let rest = outside((p(-1.0, 0.0, 0.0), p(1.0, 0.0, 0.0), 5.0), p(0.0, 0.0, 0.0), 0.25);
        assert_eq!(rest.len(), 2);
        assert!((rest[1].2 - 6.25).abs() < 1e-12 && (rest[1].0.x - 0.25).abs() < 1e-12);
        assert_eq!(outside((p(0.0, 0.0, 0.0), p(0.1, 0.0, 0.0), 0.0), p(0.0, 0.0, 0.0), 0.25).len(), 0);
    }
}
