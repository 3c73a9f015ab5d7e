//! Where elements end: fine towards gaps, junctions, bends and ends, coarse away from them.
//!
//! Each conductor has *features*: places x_k where the charge changes over a length h_k (a few radii at an end, the gap
//! width at a gap, the clearance where another conductor comes close). The wanted element size is
//! h(x) = min(h_max, min_k(h_k + g |x − x_k|)); between two forced nodes the elements take equal shares of ∫ dx/h, so that
//! the division does not depend on the direction of the path. Sizes grow geometrically by e^g away from a feature.

use super::anchor::{Anchor, end_pattern};
use super::unknowns::{feed_gap, gap_legs};
use crate::layout::{Layout, Point};
use crate::quantity::SPEED_OF_LIGHT_M_PER_S;

/// How fine the mesh is. The numbers of the default come from the convergence table (tests/laws/convergence).
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Density {
    /// All sizes are divided by this; 1 is the default mesh.
    pub factor: f64,
}

impl Default for Density {
    fn default() -> Self {
        Self { factor: 1.0 }
    }
}

/// Longest element in wavelengths of the highest frequency.
const LONGEST_WAVELENGTHS: f64 = 0.14;
/// Elements longer than this in wavelengths carry degree 3, shorter ones degree 2.
const CUBIC_WAVELENGTHS: f64 = 0.05;
/// Element size at a free end, in radii.
const END_RADII: f64 = 4.0;
/// Element size at a bend or junction, in radii.
const JOINT_RADII: f64 = 4.0;
/// Growth rate of the size with distance from a feature.
pub(super) const GROWTH: f64 = 1.4;
/// A bend below this angle (radians) is no feature.
const BEND_RADIANS: f64 = 0.05;

/// One future element.
#[derive(Debug, Clone)]
pub(super) struct Piece {
    pub(super) from_m: f64,
    pub(super) to_m: f64,
    pub(super) start: Point,
    pub(super) end: Point,
    /// The conductor's vertex at its end, where there is one.
    pub(super) end_vertex: Option<usize>,
    pub(super) degree: usize,
}

#[derive(Debug, Clone, Copy)]
struct Feature {
    at_m: f64,
    size_m: f64,
}

/// Cut every conductor into pieces.
pub(super) fn divide(
    layout: &Layout,
    highest_hz: f64,
    density: Density,
    extra_gaps: &[(usize, f64, f64)],
    anchor: &Anchor,
) -> Vec<Vec<Piece>> {
    let wavelength_m = SPEED_OF_LIGHT_M_PER_S / highest_hz;
    let gaps = all_gaps(layout, extra_gaps);
    (0..layout.conductors.len())
        .map(|index| {
            let mut features = own_features(layout, index, &gaps, anchor);
            features.extend(neighbour_features(layout, index, LONGEST_WAVELENGTHS * wavelength_m, anchor));
            let end = anchor.moves(index).then(|| {
                let last = layout.conductors[index].points.len() - 1;
                vertex_size_radii(layout, index, last).map(|radii| radii * layout.conductors[index].radius_m)
            });
            divide_one(layout, index, &gaps, &features, (wavelength_m, density, end))
        })
        .collect()
}

/// All gaps as (conductor, from, to).
fn all_gaps(layout: &Layout, extra_gaps: &[(usize, f64, f64)]) -> Vec<(usize, f64, f64)> {
    let parts = layout.parts.iter().map(|p| (p.conductor, p.from_m, p.to_m));
    let of_parts = parts.chain(extra_gaps.iter().copied()).flat_map(|gap| gap_legs(layout, gap));
    let of_feed = layout.feed.hot.iter().map(|leg| feed_gap(layout, leg));
    of_feed.chain(of_parts).map(|leg| (leg.conductor, leg.from_m, leg.to_m)).collect()
}

/// Ends, bends, junctions and gaps of a conductor itself.
fn own_features(layout: &Layout, index: usize, gaps: &[(usize, f64, f64)], anchor: &Anchor) -> Vec<Feature> {
    let c = &layout.conductors[index];
    let at = c.distances_m();
    let mut out = Vec::new();
    for (vertex, &at_m) in at.iter().enumerate().filter(|v| !(anchor.moves(index) && v.0 + 1 == at.len())) {
        if let Some(radii) = vertex_size_radii(layout, index, vertex) {
            out.push(Feature { at_m, size_m: radii * c.radius_m });
        }
    }
    for &(_, from, to) in gaps.iter().filter(|g| g.0 == index) {
        let size_m = to - from;
        out.push(Feature { at_m: from, size_m });
        out.push(Feature { at_m: to, size_m });
    }
    out
}

/// Size in radii wanted at a vertex; `None` where the conductor just goes straight on.
fn vertex_size_radii(layout: &Layout, index: usize, vertex: usize) -> Option<f64> {
    let c = &layout.conductors[index];
    let members: Vec<(usize, usize)> = layout
        .junctions
        .iter()
        .find(|j| j.members.contains(&(index, vertex)))
        .map_or_else(|| vec![(index, vertex)], |j| j.members.clone());
    let legs: Vec<(Point, f64)> = members
        .iter()
        .flat_map(|&(other, v)| {
            let o = &layout.conductors[other];
            let here = o.points[v];
            let towards = |w: usize| ((o.points[w] - here).normalize(), o.radius_m);
            let before = (v > 0).then(|| towards(v - 1));
            let after = (v + 1 < o.points.len()).then(|| towards(v + 1));
            before.into_iter().chain(after)
        })
        .collect();
    match legs.as_slice() {
        [_] => Some(END_RADII),
        [(d1, r1), (d2, r2)] => {
            let bend = (-d1.dot(d2)).clamp(-1.0, 1.0).acos();
            let step = (r1 / r2 - 1.0).abs() > 1e-6;
            (bend > BEND_RADIANS || step).then_some(JOINT_RADII * r1.max(*r2) / c.radius_m)
        }
        _ => Some(JOINT_RADII),
    }
}

/// Places where an end or bend of another conductor, or a crossing, comes close without touching. What moves with an end makes
/// no feature on conductors that stay, so that their division stays too.
fn neighbour_features(layout: &Layout, index: usize, longest_m: f64, anchor: &Anchor) -> Vec<Feature> {
    let c = &layout.conductors[index];
    let at = c.distances_m();
    let mut out = Vec::new();
    for (leg, ends) in c.points.windows(2).enumerate() {
        let length = at[leg + 1] - at[leg];
        let mut consider = |place: f64, clearance: f64| {
            if clearance > c.radius_m && clearance < longest_m && place > 0.0 && place < length {
                out.push(Feature { at_m: at[leg] + place, size_m: 2.0 * clearance });
            }
        };
        for (other, o) in layout.conductors.iter().enumerate() {
            for (k, pair) in o.points.windows(2).enumerate() {
                if other == index && k.abs_diff(leg) <= 1 {
                    continue;
                }
                let ignored = |vertex: usize| !anchor.carries(index) && anchor.displaces(layout, other, vertex);
                for p in pair.iter().enumerate().filter(|(n, _)| !ignored(k + n)).map(|(_, p)| p) {
                    let (place, clearance) = foot(ends[0], ends[1], *p);
                    consider(place, clearance);
                }
                let carried = anchor.carries(other) && !anchor.carries(index);
                if let Some((place, clearance)) = crossing(ends, pair).filter(|_| !carried) {
                    consider(place, clearance);
                }
            }
        }
    }
    out
}

/// Foot of a point on the line through two others: distance from the first, and clearance.
fn foot(a: Point, b: Point, p: Point) -> (f64, f64) {
    let t = (b - a).normalize();
    let s = (p - a).dot(&t);
    (s, (p - a - t * s).norm())
}

/// Closest approach of two legs where it lies inside both and they are not nearly parallel.
fn crossing(one: &[Point], two: &[Point]) -> Option<(f64, f64)> {
    let (u, v) = ((one[1] - one[0]).normalize(), (two[1] - two[0]).normalize());
    let w = one[0] - two[0];
    let b = u.dot(&v);
    let det = 1.0 - b * b;
    if det < 0.03 {
        return None;
    }
    let (d, e) = (u.dot(&w), v.dot(&w));
    let s = (b * e - d) / det;
    let t = (e - b * d) / det;
    let inside = s > 0.0 && s < (one[1] - one[0]).norm() && t > 0.0 && t < (two[1] - two[0]).norm();
    inside.then(|| (s, (one[0] + u * s - two[0] - v * t).norm()))
}

fn divide_one(
    layout: &Layout,
    index: usize,
    gaps: &[(usize, f64, f64)],
    features: &[Feature],
    (wavelength_m, density, end): (f64, Density, Option<Option<f64>>),
) -> Vec<Piece> {
    let c = &layout.conductors[index];
    let at = c.distances_m();
    let mut nodes: Vec<(f64, Option<usize>)> = at.iter().enumerate().map(|(v, &x)| (x, Some(v))).collect();
    for &(_, from, to) in gaps.iter().filter(|g| g.0 == index) {
        for x in [from, to] {
            if nodes.iter().all(|n| (n.0 - x).abs() > 1e-9 * (1.0 + x)) {
                nodes.push((x, None));
            }
        }
    }
    nodes.sort_by(|a, b| a.0.total_cmp(&b.0));
    let size = Size { features, longest_m: LONGEST_WAVELENGTHS * wavelength_m };
    let mut out = Vec::new();
    for (n, pair) in nodes.windows(2).enumerate() {
        let (from, to) = (pair[0].0, pair[1].0);
        let cuts = match end {
            Some(end_m) if n + 2 == nodes.len() => anchored(&size, (from, to), end_m, density.factor),
            _ => size.cut(from, to, density.factor),
        };
        for (k, ends) in cuts.windows(2).enumerate() {
            let last = k + 2 == cuts.len();
            let length = ends[1] - ends[0];
            out.push(Piece {
                from_m: ends[0],
                to_m: ends[1],
                start: point_at(&c.points, &at, ends[0]),
                end: point_at(&c.points, &at, ends[1]),
                end_vertex: if last { pair[1].1 } else { None },
                degree: if length > CUBIC_WAVELENGTHS * wavelength_m { 3 } else { 2 },
            });
        }
    }
    out
}

/// Point at a distance along a polyline; exact at its vertices.
fn point_at(points: &[Point], at: &[f64], x: f64) -> Point {
    if let Some(v) = at.iter().position(|d| *d == x) {
        return points[v];
    }
    let leg = at.partition_point(|d| *d < x).clamp(1, at.len() - 1) - 1;
    let t = (x - at[leg]) / (at[leg + 1] - at[leg]);
    points[leg] * (1.0 - t) + points[leg + 1] * t
}

/// Ends of the elements of a last stretch whose end moves: whole steps from its start, whole steps back from its end
/// (`end_m`: size wanted there), and the few elements between shared as everywhere else.
fn anchored(size: &Size, (from, to): (f64, f64), end_m: Option<f64>, factor: f64) -> Vec<f64> {
    let end_m = end_m.unwrap_or(size.longest_m).min(size.longest_m);
    let back = end_pattern(end_m, to - from, factor, |d| size.at(to - d));
    let bridge_to = to - back.last().copied().unwrap_or(0.0);
    let mut trunk = size.steps(from, bridge_to, factor);
    if trunk.len() > 1 && trunk.last().is_some_and(|t| bridge_to - t < 0.6 * size.at(bridge_to) / factor) {
        trunk.pop();
    }
    let mut features = size.features.to_vec();
    features.push(Feature { at_m: to, size_m: end_m });
    let both = Size { features: &features, longest_m: size.longest_m };
    let mut out = trunk;
    let bridge_from = out.pop().unwrap_or(from);
    out.extend(both.cut(bridge_from, bridge_to, factor));
    out.extend(back.iter().rev().skip(1).map(|d| to - d));
    if !back.is_empty() {
        out.push(to);
    }
    out
}

/// The wanted size along one conductor.
struct Size<'a> {
    features: &'a [Feature],
    longest_m: f64,
}

/// Far beyond any conductor, m: steps laid towards it do not know where the conductor ends.
const HORIZON_M: f64 = 1e5;

impl Size<'_> {
    /// Places at whole steps of ∫ dx/h from a start, the start included, up to a limit.
    fn steps(&self, from: f64, limit: f64, factor: f64) -> Vec<f64> {
        let knots = self.knots(from, from + HORIZON_M);
        let mut out = vec![from];
        let mut before = 0.0;
        for pair in knots.windows(2) {
            let share = factor * self.share(pair[0], pair[1]);
            while out.len() as f64 <= before + share {
                let place = self.inverse(pair[0], pair[1], (out.len() as f64 - before) / factor);
                if place > limit {
                    return out;
                }
                out.push(place);
            }
            before += share;
        }
        out
    }

    fn at(&self, x: f64) -> f64 {
        self.features.iter().map(|f| f.size_m + GROWTH * (x - f.at_m).abs()).fold(self.longest_m, f64::min)
    }

    /// Ends of the elements between two forced nodes, both nodes included.
    fn cut(&self, from: f64, to: f64, factor: f64) -> Vec<f64> {
        let knots = self.knots(from, to);
        let shares: Vec<f64> = knots.windows(2).map(|k| factor * self.share(k[0], k[1])).collect();
        let total: f64 = shares.iter().sum();
        let count = (total - 1e-6).ceil().max(1.0);
        let mut out = vec![from];
        let (mut leg, mut before) = (0, 0.0);
        for n in 1..count as usize {
            let wanted = total * n as f64 / count;
            while leg + 1 < shares.len() && before + shares[leg] < wanted {
                before += shares[leg];
                leg += 1;
            }
            out.push(self.inverse(knots[leg], knots[leg + 1], (wanted - before) / factor));
        }
        out.push(to);
        out
    }

    /// Places between which h is one straight line.
    fn knots(&self, from: f64, to: f64) -> Vec<f64> {
        let mut out = vec![from, to];
        let mut add = |x: f64| {
            if x > from && x < to {
                out.push(x);
            }
        };
        for (i, f) in self.features.iter().enumerate() {
            add(f.at_m);
            let reach = (self.longest_m - f.size_m) / GROWTH;
            add(f.at_m - reach);
            add(f.at_m + reach);
            for g in &self.features[..i] {
                // lines of opposite slope meet between the two features
                let (l, r) = if f.at_m < g.at_m { (f, g) } else { (g, f) };
                add(0.5 * (l.at_m + r.at_m) + 0.5 * (r.size_m - l.size_m) / GROWTH);
            }
        }
        out.sort_by(f64::total_cmp);
        out.dedup_by(|a, b| (*a - *b).abs() < 1e-12);
        if let Some(last) = out.last_mut() {
            *last = to;
        }
        out
    }

    /// ∫ dx/h over a stretch where h is linear.
    fn share(&self, x0: f64, x1: f64) -> f64 {
        let (h0, h1) = (self.at(x0), self.at(x1));
        let ratio = h1 / h0;
        if (ratio - 1.0).abs() < 1e-9 { (x1 - x0) / h0 } else { (x1 - x0) / (h1 - h0) * ratio.ln() }
    }

    /// The place in a linear stretch up to which ∫ dx/h has the wanted value.
    fn inverse(&self, x0: f64, x1: f64, share: f64) -> f64 {
        let (h0, h1) = (self.at(x0), self.at(x1));
        let slope = (h1 - h0) / (x1 - x0);
        if (h1 / h0 - 1.0).abs() < 1e-9 { x0 + share * h0 } else { x0 + h0 * (slope * share).exp_m1() / slope }
    }
}
