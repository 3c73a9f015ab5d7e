//! Radiated power of many lengths from one quadratic form: the lines their conductors lie on, and how a current is laid on them.

use crate::field::{CurrentNode, Solution, Sphere};
use crate::interaction::quadrature::{MAX_POINTS, Rule, gauss, legendre};
use crate::layout::{Layout, Point};
use crate::mesh::{Element, MAX_DEGREE, Mesh};
use faer::Mat;
use num_complex::Complex64;

/// A mesh's points are on a line when they are this close to it, m.
const ON_LINE_M: f64 = 1e-6;
/// Gauss points on an element, and on one shorter than `SHORT` of the wavelength's radian.
const POINTS: [usize; 2] = [5, 2];
/// Such an element is a point with a slope, 1/24 SHORT⁴ off.
const SHORT: f64 = 0.03;

/// Gauss nodes on a stretch of one conductor.
#[derive(Debug, Clone)]
struct Piece {
    from_m: f64,
    to_m: f64,
    start: Point,
    tangent: Point,
    first: usize,
    nodes: usize,
}

/// A conductor that moves whole with an end: nodes on it for a few places of the end.
#[derive(Debug, Clone)]
struct Carried {
    conductor: usize,
    /// The conductor when the end is at `from`.
    points: Vec<Point>,
    from: Point,
    /// Unit vector of the motion and how far it goes, m.
    direction: Point,
    range_m: f64,
    places: usize,
    /// Its pieces, node numbers for the first place.
    pieces: Vec<Piece>,
    /// Nodes of one place.
    stride: usize,
}

/// Lines and the form of the power of currents on them.
#[derive(Debug, Clone)]
pub(super) struct Radiation {
    pieces: Vec<Vec<Piece>>,
    carried: Vec<Carried>,
    form: Mat<Complex64>,
    k_per_m: f64,
    /// How every element of the longest mesh lies on the nodes: node, weights of its Legendre coefficients, m.
    laid: Vec<Option<Vec<Laid>>>,
}

/// A node, and how much of each Legendre coefficient of an element's current (A) lies on it (A m).
type Laid = (usize, [f64; MAX_DEGREE + 1]);

impl Radiation {
    /// Lines of the longest layout of a family, the shortest one and the conductors whose ends move.
    pub(super) fn new((longest, mesh): (&Layout, &Mesh), shortest: &Layout, moving: &[usize], sphere: &Sphere) -> Self {
        let mut nodes = Vec::new();
        let mut pieces = Vec::new();
        let mut carried = Vec::new();
        for (index, conductor) in longest.conductors.iter().enumerate() {
            if moving.contains(&index) || same(&conductor.points, &shortest.conductors[index].points) {
                pieces.push(lay(&conductor.points, Point::zeros(), sphere, &mut nodes));
                continue;
            }
            pieces.push(Vec::new());
            let (from, to) = (shortest.conductors[index].points[0], conductor.points[0]);
            let range_m = (to - from).norm();
            if range_m <= ON_LINE_M {
                continue;
            }
            let direction = (to - from) / range_m;
            let points = shortest.conductors[index].points.clone();
            let places = sphere.nodes_for(range_m).min(MAX_POINTS);
            let rule = gauss(places);
            let mut first = Vec::new();
            let before = nodes.len();
            for (n, x) in rule.nodes.iter().enumerate() {
                let laid = lay(&points, direction * (0.5 * (1.0 + x) * range_m), sphere, &mut nodes);
                if n == 0 {
                    first = laid;
                }
            }
            let stride = (nodes.len() - before) / places;
            carried.push(Carried { conductor: index, points, from, direction, range_m, places, pieces: first, stride });
        }
        let k_per_m = sphere.k_per_m();
        let fixed = |c: usize| !carried.iter().any(|one| one.conductor == c);
        let laid = mesh
            .elements
            .iter()
            .map(|e| {
                fixed(e.conductor).then(|| lay_element(e, (&pieces[e.conductor], k_per_m), Point::zeros())).flatten()
            })
            .collect();
        Self { pieces, carried, form: sphere.form(&nodes), k_per_m, laid }
    }

    /// Power of a solution, W; `None` where the mesh leaves the lines.
    pub(super) fn radiated_w(
        &self,
        layout: &Layout,
        (mesh, twins): (&Mesh, &[Option<usize>]),
        solution: &Solution,
    ) -> Option<f64> {
        let n = self.form.nrows();
        let mut moments = vec![Complex64::ZERO; n];
        for (c, range) in mesh.conductor_elements.iter().enumerate() {
            let moved = match self.carried.iter().find(|carried| carried.conductor == c) {
                Some(carried) => Some((carried, carried.place(&layout.conductors[c].points)?)),
                None => None,
            };
            for k in range.clone() {
                let (e, current) = (&mesh.elements[k], &solution.currents[k]);
                let on = |w: &[f64; MAX_DEGREE + 1]| current.iter().zip(w).map(|(c, w)| c * w).sum::<Complex64>();
                match (&moved, twins[k].and_then(|twin| self.laid[twin].as_ref())) {
                    (Some((carried, (shift, weights))), _) => {
                        let pieces = (carried.pieces.as_slice(), self.k_per_m);
                        for (q, w) in lay_element(e, pieces, *shift - carried.first_shift())? {
                            for (p, weight) in weights.iter().enumerate() {
                                moments[q + p * carried.stride] += on(&w) * weight;
                            }
                        }
                    }
                    (None, Some(laid)) => laid.iter().for_each(|(q, w)| moments[*q] += on(w)),
                    (None, None) => {
                        let laid = lay_element(e, (&self.pieces[c], self.k_per_m), Point::zeros())?;
                        laid.iter().for_each(|(q, w)| moments[*q] += on(w));
                    }
                }
            }
        }
        let column = Mat::from_fn(n, 1, |i, _| moments[i]);
        let image = &self.form * &column;
        Some((0..n).map(|i| (moments[i].conj() * image[(i, 0)]).re).sum())
    }
}

impl Carried {
    /// Shift of the first place's nodes from where the conductor is at `from`.
    fn first_shift(&self) -> Point {
        self.direction * (0.5 * (1.0 + gauss(self.places).nodes[0]) * self.range_m)
    }

    /// Where the conductor is, as a shift from `from` and weights of the places; `None` where it has not moved whole along the line.
    fn place(&self, points: &[Point]) -> Option<(Point, Vec<f64>)> {
        let shift = points.first()? - self.from;
        let along = shift.dot(&self.direction);
        let whole = points.len() == self.points.len()
            && points.iter().zip(&self.points).all(|(p, q)| (p - q - shift).norm() < ON_LINE_M);
        let on_line = (shift - self.direction * along).norm() < ON_LINE_M;
        let x = 2.0 * along / self.range_m - 1.0;
        (whole && on_line && x.abs() < 1.0 + 1e-6).then(|| (shift, lagrange(self.places, x)))
    }
}

fn same(one: &[Point], two: &[Point]) -> bool {
    one.len() == two.len() && one.iter().zip(two).all(|(p, q)| (p - q).norm() < ON_LINE_M)
}

/// Gauss nodes along a polyline shifted as a whole.
fn lay(points: &[Point], shift: Point, sphere: &Sphere, nodes: &mut Vec<CurrentNode>) -> Vec<Piece> {
    let mut out = Vec::new();
    let mut before_m = 0.0;
    for leg in points.windows(2) {
        let length_m = (leg[1] - leg[0]).norm();
        let tangent = (leg[1] - leg[0]) / length_m;
        let parts = (length_m / sphere.longest_m()).ceil().max(1.0);
        for part in 0..parts as usize {
            let (from, to) = (length_m * part as f64 / parts, length_m * (part + 1) as f64 / parts);
            let rule = gauss(sphere.nodes_for(to - from));
            let start = leg[0] + tangent * from + shift;
            out.push(Piece {
                from_m: before_m + from,
                to_m: before_m + to,
                start,
                tangent,
                first: nodes.len(),
                nodes: rule.nodes.len(),
            });
            let at = |x: &f64| start + tangent * (0.5 * (1.0 + x) * (to - from));
            nodes.extend(rule.nodes.iter().map(|x| CurrentNode { position: at(x), tangent }));
        }
        before_m += length_m;
    }
    out
}

fn rule(e: &Element, k_per_m: f64) -> &'static Rule {
    gauss(POINTS[usize::from(k_per_m * e.length_m < SHORT)])
}

/// How the current of an element lies on the nodes of the pieces it is part of; `None` where it lies on none.
fn lay_element(e: &Element, (pieces, k_per_m): (&[Piece], f64), shift: Point) -> Option<Vec<Laid>> {
    let rule = rule(e, k_per_m);
    let mut out: Vec<Laid> = Vec::new();
    for (xi, w) in rule.nodes.iter().zip(&rule.weights) {
        let along_m = e.from_m + 0.5 * (1.0 + xi) * e.length_m;
        let piece = pieces.iter().find(|p| along_m <= p.to_m + 1e-9).or(pieces.last())?;
        let off = e.at(*xi) - shift - piece.start;
        let s = off.dot(&piece.tangent);
        if (off - piece.tangent * s).norm() > ON_LINE_M || piece.tangent.dot(&e.tangent) < 1.0 - 1e-9 {
            return None;
        }
        let x = 2.0 * s / (piece.to_m - piece.from_m) - 1.0;
        if x.abs() > 1.0 + 1e-6 {
            return None;
        }
        let first = out.iter().position(|l| l.0 == piece.first).unwrap_or_else(|| {
            out.extend((0..piece.nodes).map(|q| (piece.first + q, [0.0; MAX_DEGREE + 1])));
            out.len() - piece.nodes
        });
        let p = legendre(*xi).map(|p| p * 0.5 * w * e.length_m);
        for ((_, weights), l) in out[first..].iter_mut().zip(lagrange(piece.nodes, x)) {
            weights.iter_mut().zip(p).for_each(|(weight, p)| *weight += l * p);
        }
    }
    Some(out)
}

/// Lagrange polynomials of a Gauss rule's nodes at x, in barycentric form (weights (−1)^q √((1 − x_q²) w_q): Wang and Xiang,
/// Mathematics of Computation 81, 2012, from memory).
fn lagrange(nodes: usize, x: f64) -> Vec<f64> {
    let rule = gauss(nodes);
    if let Some(hit) = rule.nodes.iter().position(|n| (x - n).abs() < 1e-14) {
        return (0..nodes).map(|q| if q == hit { 1.0 } else { 0.0 }).collect();
    }
    let mut sign = -1.0;
    let mut out: Vec<f64> = rule
        .nodes
        .iter()
        .zip(&rule.weights)
        .map(|(n, w)| {
            sign = -sign;
            sign * ((1.0 - n * n) * w).sqrt() / (x - n)
        })
        .collect();
    let total: f64 = out.iter().sum();
    for value in &mut out {
        *value /= total;
    }
    out
}

/// Power of a solution point by point, W.
pub(super) fn direct(mesh: &Mesh, solution: &Solution, sphere: &Sphere) -> f64 {
    let mut nodes = Vec::new();
    let mut moments = Vec::new();
    for (e, current) in mesh.elements.iter().zip(&solution.currents) {
        let rule = rule(e, sphere.k_per_m());
        for (xi, w) in rule.nodes.iter().zip(&rule.weights) {
            let i: Complex64 = current.iter().zip(legendre(*xi)).map(|(c, p)| c * p).sum();
            nodes.push(CurrentNode { position: e.at(*xi), tangent: e.tangent });
            moments.push(i * (0.5 * w * e.length_m));
        }
    }
    sphere.radiated_w(&nodes, &moments)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn lagrange_polynomials_reproduce_a_wave() {
        for (nodes, turns) in [(16, 1.0), (26, 10.0), (32, 15.0)] {
            let rule = gauss(nodes);
            for x in [-1.0, -0.83, 0.0, 0.123, 1.0] {
                let wave = |x: f64| Complex64::from_polar(1.0, turns * x);
                let got: Complex64 = lagrange(nodes, x).iter().zip(&rule.nodes).map(|(l, n)| wave(*n) * l).sum();
                assert!((got - wave(x)).norm() < 1e-6, "{nodes} nodes, {turns}: {}", (got - wave(x)).norm());
            }
            let few = lagrange(nodes / 2, -0.99);
            let rough: Complex64 =
                few.iter().zip(&gauss(nodes / 2).nodes).map(|(l, n)| Complex64::from_polar(1.0, turns * n) * l).sum();
            assert!(turns < 5.0 || (rough - Complex64::from_polar(1.0, -0.99 * turns)).norm() > 1e-3, "half the nodes");
        }
    }
}
