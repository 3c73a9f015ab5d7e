//! The columns that a few new elements add to a system already known.
//!
//! New elements and those near them are paired as everywhere. Seen from further away, a straight run of new elements is one line on
//! which the kernels are smooth: they are evaluated at its Gauss nodes only and interpolated, whatever the elements on it.

use super::assembly::add_metal_loss;
use super::block::SIDE;
use super::fill::{Interaction, Matrix, UnknownMap, region_of};
use super::group::goes_on;
use super::kernel::{LINE_POINTS, LineMoments, MOST_POINTS, line_moments};
use super::lagrange::stretch_weights;
use super::line::{Line, Tubes, clearance, tubes};
use super::pairs::{Statics, far_points};
use super::probe::{Spot, slope, value_weights};
use super::quadrature::{gauss, legendre};
use super::rest::{Kernels, moments, points as rest_points};
use super::surroundings::{Family, SoilRest, Surroundings};
use crate::halfspace::Region;
use crate::mesh::{Element, MAX_DEGREE, Mesh};
use crate::processor::{Vectorised, mul_add, widest};
use faer::linalg::matmul::matmul;
use faer::{Accum, Mat, Par};
use num_complex::Complex64;

/// Gauss nodes of a run.
const NODES: usize = LINE_POINTS;
/// Elements nearer to a run than this share of its length are paired with its elements one by one. With the nearest singularity at
/// x = 1 + 2 · 0.3 the interpolation error falls as (x + √(x² − 1))^−n = 2.85^−16, 5·10⁻⁸.
const NEAR_LENGTHS: f64 = 0.3;

/// New elements of a mesh, and how they see the rest of it.
#[derive(Debug, Clone)]
pub struct Added {
    /// How the unknowns, by their places (the leading ones first, then the further ones), enter every element's current.
    maps: Vec<UnknownMap>,
    leading: usize,
    further: usize,
    /// New elements first, then those near them, with their indices in the mesh.
    close: Interaction,
    close_ids: Vec<usize>,
    new_count: usize,
    far_ids: Vec<usize>,
    runs: Vec<Run>,
    with_image: bool,
}

/// A system's further part.
#[derive(Debug, Clone)]
pub struct Columns {
    /// Against the leading unknowns; shape (leading, further).
    pub columns: Matrix,
    /// Among themselves; shape (further, further).
    pub corner: Matrix,
    /// Scalar potential at each spot, V per A of every unknown in the order of the places. For a spot on a new element all are
    /// there; for another one only the further unknowns.
    pub potentials: Vec<Vec<Complex64>>,
}

/// How far elements are seen at the nodes of a run: vector potential (its component along it), then scalar potential, of every leading
/// unknown; and the scalar potential between the run and spots on far elements.
#[derive(Debug, Clone)]
pub struct Seen {
    matrix: Matrix,
    probes: Vec<(usize, [Complex64; NODES])>,
}

/// New elements on one straight line.
#[derive(Debug, Clone)]
struct Run {
    line: Element,
    /// Element, and the ξ of the run at its start and end.
    members: Vec<(usize, f64, f64)>,
    /// For every member, weights of P_0..P_3 (means over the element) at the nodes.
    weights: Vec<[[f64; NODES]; MAX_DEGREE + 1]>,
}

impl Added {
    /// Prepare the new elements of a mesh.
    ///
    /// # Inputs
    /// - `is_new`: for every element
    /// - `places`: for every unknown; those from `leading` on are the further ones, which live on new elements only
    /// - `known`: static moments of a mesh with like elements
    /// - `reach_m`: for a run of a conductor that begins at a distance, m, how far along the conductor its line is drawn on (or less
    ///   than it is long)
    #[must_use]
    pub fn new(
        mesh: &Mesh,
        is_new: &[bool],
        (places, leading): (&[usize], usize),
        (with_image, known): (bool, &Statics),
        reach_m: impl Fn(usize, f64) -> f64,
    ) -> Self {
        let new_ids: Vec<usize> = (0..mesh.elements.len()).filter(|&k| is_new[k]).collect();
        let runs = runs(mesh, &new_ids, reach_m);
        let is_near = |k: usize| {
            let e = Line::of(&mesh.elements[k]);
            runs.iter().any(|run| {
                let limit = NEAR_LENGTHS * run.line.length_m;
                clearance(&e, &Line::of(&run.line)) < limit
                    || with_image && clearance(&e, &Line::mirrored(&run.line)) < limit
            })
        };
        let (near_ids, far_ids): (Vec<usize>, Vec<usize>) =
            (0..mesh.elements.len()).filter(|&k| !is_new[k]).partition(|&k| is_near(k));
        let new_count = new_ids.len();
        let close_ids: Vec<usize> = new_ids.into_iter().chain(near_ids).collect();
        let close = Mesh {
            elements: close_ids.iter().map(|&k| mesh.elements[k].clone()).collect(),
            unknowns: 0,
            ports: Vec::new(),
            conductor_elements: Vec::new(),
        };
        let close = Interaction::among(close, with_image, known, new_count);
        let placed = |e: &Element| {
            let mut map = e.legendre_map();
            map.iter_mut().for_each(|(unknown, _)| *unknown = places[*unknown]);
            map
        };
        let maps = mesh.elements.iter().map(placed).collect();
        let further = places.len() - leading;
        Self { maps, leading, further, close, close_ids, new_count, far_ids, runs, with_image }
    }

    /// Columns at a frequency, and potentials at spots (elements of the mesh, the same as in [`Added::new`]),
    /// from what is [`Added::seen`] on each run.
    #[must_use]
    pub fn columns(&self, mesh: &Mesh, earth: &Surroundings, spots: &[Spot], seen: &[&Seen]) -> Columns {
        let all = self.leading + self.further;
        let mut z = Mat::zeros(all, self.further);
        let mut potentials = vec![vec![Complex64::ZERO; all]; spots.len()];
        self.close_pairs(earth, spots, &mut z, &mut potentials);
        self.far_pairs(&mesh.elements, (earth, seen), spots, &mut z, &mut potentials);
        Columns {
            columns: z.get(0..self.leading, ..).to_owned(),
            corner: z.get(self.leading..all, ..).to_owned(),
            potentials,
        }
    }

    /// New elements among themselves and with those near.
    fn close_pairs(&self, earth: &Surroundings, spots: &[Spot], z: &mut Matrix, potentials: &mut [Vec<Complex64>]) {
        // only the places that occur, so that the matrix stays small
        let mut used: Vec<usize> = Vec::new();
        let mut maps: Vec<UnknownMap> = self.close_ids.iter().map(|&k| self.maps[k].clone()).collect();
        for (unknown, _) in maps.iter_mut().flatten() {
            let local = used.iter().position(|p| p == unknown).unwrap_or_else(|| {
                used.push(*unknown);
                used.len() - 1
            });
            *unknown = local;
        }
        let local: Vec<(usize, Spot)> = spots
            .iter()
            .enumerate()
            .filter_map(|(n, s)| {
                let element = self.close_ids.iter().position(|&k| k == s.element)?;
                Some((n, Spot { element, xi: s.xi }))
            })
            .collect();
        let wanted: Vec<Spot> = local.iter().map(|l| l.1).collect();
        let (mut block, rows) = self.close.gather(earth, &wanted, &maps, used.len());
        for (element, map) in self.close.mesh().elements.iter().zip(&maps).take(self.new_count) {
            add_metal_loss(element, map, earth.air().angular, &mut block);
        }
        for (j, &v) in used.iter().enumerate().filter(|(_, v)| **v >= self.leading) {
            for (i, &u) in used.iter().enumerate() {
                z[(u, v - self.leading)] += block[(i, j)];
            }
        }
        for ((n, spot), row) in local.iter().zip(&rows) {
            for (i, &u) in used.iter().enumerate() {
                if spot.element < self.new_count || u >= self.leading {
                    potentials[*n][u] += row[i];
                }
            }
        }
    }

    /// How the elements far from a run are seen on it.
    ///
    /// # Inputs
    /// - `run`: below [`Added::runs`]
    #[must_use]
    pub fn seen(&self, mesh: &Mesh, run: usize, earth: &Surroundings, spots: &[Spot]) -> Seen {
        let mut rows = vec![SeenRow::default(); self.leading];
        let mut probes = Vec::new();
        let families = earth.families();
        widest(Look {
            added: self,
            elements: &mesh.elements,
            run: &self.runs[run],
            earth: (earth, &families),
            spots,
            rows: &mut rows,
            probes: &mut probes,
        });
        let matrix = Mat::from_fn(self.leading, 2 * NODES, |u, q| rows[u].at(q));
        Seen { matrix, probes }
    }

    /// Number of straight runs.
    #[must_use]
    pub fn runs(&self) -> usize {
        self.runs.len()
    }

    /// What decides how a run is seen, as numbers: equal for two lengths that can share a [`Seen`].
    #[must_use]
    pub fn run_key(&self, mesh: &Mesh, run: usize) -> Vec<i64> {
        let fine = |x: f64| (x * 1e7).round() as i64;
        let line = &self.runs[run].line;
        let ends = line.start.iter().chain(&line.end).map(|x| fine(*x));
        let far = self.far_ids.iter().flat_map(|&k| {
            let e = &mesh.elements[k];
            [e.conductor as i64, fine(e.from_m), fine(e.to_m)]
        });
        std::iter::once(self.leading as i64).chain(ends).chain(far).collect()
    }

    /// New elements with all others, from what is seen on each run.
    fn far_pairs(
        &self,
        elements: &[Element],
        (earth, seen): (&Surroundings, &[&Seen]),
        spots: &[Spot],
        z: &mut Matrix,
        potentials: &mut [Vec<Complex64>],
    ) {
        let medium = earth.air();
        let further = z.ncols();
        for (run, Seen { matrix: seen, probes }) in self.runs.iter().zip(seen) {
            let (magnetic, electric) = (medium.magnetic(), medium.electric() * 4.0);
            let (mut laid, charge) = self.laid(elements, run, further);
            for v in 0..further {
                for q in 0..NODES {
                    laid[(q, v)] *= magnetic;
                    laid[(NODES + q, v)] = electric * charge[(q, v)];
                }
            }
            let top = z.get_mut(0..self.leading, ..);
            matmul(top, Accum::Add, seen.as_ref(), laid.as_ref(), Complex64::ONE, Par::Seq);
            let factor = -2.0 * medium.electric();
            for &(n, row) in probes {
                for v in 0..further {
                    let sum: Complex64 = (0..NODES).map(|q| row[q] * charge[(q, v)]).sum();
                    potentials[n][self.leading + v] += factor * sum;
                }
            }
            for (n, spot) in spots.iter().enumerate() {
                let Some(m) = run.members.iter().position(|m| m.0 == spot.element) else { continue };
                let w = value_weights(spot.xi);
                let at = |q: usize| (0..=MAX_DEGREE).map(|b| run.weights[m][b][q] * w[b]).sum::<f64>();
                let weights: [f64; NODES] = std::array::from_fn(at);
                for u in 0..self.leading {
                    let sum: Complex64 = (0..NODES).map(|q| seen[(u, NODES + q)] * weights[q]).sum();
                    potentials[n][u] += factor * sum;
                }
            }
        }
    }

    /// How the further unknowns lie on the nodes of a run: currents (times length; the charges' half left empty), and charges.
    fn laid(&self, elements: &[Element], run: &Run, further: usize) -> (Matrix, Matrix) {
        let mut laid = Mat::zeros(2 * NODES, further);
        let mut charges = Mat::zeros(NODES, further);
        for ((k, ..), weights) in run.members.iter().zip(&run.weights) {
            let length_m = elements[*k].length_m;
            for (place, factors) in &self.maps[*k] {
                let Some(v) = place.checked_sub(self.leading) else { continue };
                let charge = slope(factors);
                for q in 0..NODES {
                    let current: f64 = (0..=MAX_DEGREE).map(|b| weights[b][q] * factors[b]).sum();
                    let amount: f64 = (0..=MAX_DEGREE).map(|b| weights[b][q] * charge[b]).sum();
                    laid[(q, v)] += Complex64::from(length_m * current);
                    charges[(q, v)] += Complex64::from(amount);
                }
            }
        }
        (laid, charges)
    }
}

/// Real and imaginary parts at the nodes of a run.
type AtNodes = [[f64; NODES]; 2];

/// Means over an element of P_a times the kernels: vector potential (its component along the run), and scalar potential.
#[derive(Default)]
struct NodeKernels {
    current: [AtNodes; SIDE],
    potential: [AtNodes; SIDE],
}

/// How a leading unknown is seen at the nodes of a run.
#[derive(Debug, Clone, Default)]
struct SeenRow {
    current: AtNodes,
    potential: AtNodes,
}

impl SeenRow {
    /// The nodes for the current, then those for the potential.
    fn at(&self, q: usize) -> Complex64 {
        let (values, q) = if q < NODES { (&self.current, q) } else { (&self.potential, q - NODES) };
        Complex64::new(values[0][q], values[1][q])
    }
}

/// [`Added::seen`] as work for the processor.
struct Look<'a> {
    added: &'a Added,
    elements: &'a [Element],
    run: &'a Run,
    earth: (&'a Surroundings, &'a [Family]),
    spots: &'a [Spot],
    rows: &'a mut [SeenRow],
    probes: &'a mut Vec<(usize, [Complex64; NODES])>,
}

impl Vectorised for Look<'_> {
    type Output = ();

    #[inline(always)]
    fn run<const FMA: bool>(self) {
        for &k in &self.added.far_ids {
            let element = &self.elements[k];
            let sight = Sight { element, run: self.run, earth: self.earth, with_image: self.added.with_image };
            let mut kernels = NodeKernels::default();
            sight.add_all::<FMA>(&mut kernels);
            for (u, factors) in &self.added.maps[k] {
                let charge = slope(factors);
                let row = &mut self.rows[*u];
                for n in 0..SIDE {
                    add_scaled::<FMA>(element.length_m * factors[n], &kernels.current[n], &mut row.current);
                    add_scaled::<FMA>(charge[n], &kernels.potential[n], &mut row.potential);
                }
            }
            for (n, spot) in self.spots.iter().enumerate().filter(|(_, s)| s.element == k) {
                let mut value = AtNodes::default();
                for (w, potential) in value_weights(spot.xi).iter().zip(&kernels.potential) {
                    add_scaled::<FMA>(*w, potential, &mut value);
                }
                self.probes.push((n, std::array::from_fn(|q| Complex64::new(value[0][q], value[1][q]))));
            }
        }
    }
}

#[inline(always)]
fn add_scaled<const FMA: bool>(factor: f64, from: &AtNodes, to: &mut AtNodes) {
    for part in 0..2 {
        for q in 0..NODES {
            to[part][q] = mul_add::<FMA>(factor, from[part][q], to[part][q]);
        }
    }
}

/// An element as it is seen from the nodes of a run.
struct Sight<'a> {
    element: &'a Element,
    run: &'a Run,
    earth: (&'a Surroundings, &'a [Family]),
    with_image: bool,
}

impl Sight<'_> {
    #[inline(always)]
    fn add_all<const FMA: bool>(&self, out: &mut NodeKernels) {
        for family in self.earth.1 {
            let is_here = region_of(self.element, &self.run.line) == family.region;
            if is_here && (self.with_image || !family.mirrored) {
                self.add_family::<FMA>(family, out);
            }
        }
        if let Some(soil) = self.earth.0.soil() {
            self.add_rest::<FMA>(soil, out);
        }
    }

    #[inline(always)]
    fn add_family<const FMA: bool>(&self, family: &Family, out: &mut NodeKernels) {
        let (e, run) = (self.element, &self.run.line);
        let line = if family.mirrored { Line::mirrored(run) } else { Line::of(run) };
        let one = Line::of(e);
        let offset_m2 = match tubes(&one, &line, false) {
            Tubes::Offset(c2) => c2,
            Tubes::Coaxial => e.radius_m.powi(2) + run.radius_m.powi(2),
        };
        let count = usize::from(far_points(e, clearance(&one, &line))).clamp(e.degree + 1, MOST_POINTS);
        let (points, rule) = (gauss(count), gauss(NODES));
        let nodes: [_; NODES] = std::array::from_fn(|q| line.at(rule.nodes[q]));
        let (t, u) = (e.tangent, run.tangent);
        let w = family.weight;
        let along = w.horizontal * (t.x * u.x + t.y * u.y) + w.vertical * (t.z * u.z);
        let places = std::array::from_fn(|axis| std::array::from_fn(|q| nodes[q][axis]));
        let (mut at, mut left) = ([[0.0; 3]; MOST_POINTS], [[0.0; SIDE]; MOST_POINTS]);
        for (n, (xi, weight)) in points.nodes.iter().zip(&points.weights).enumerate() {
            at[n] = one.at(*xi).into();
            left[n] = legendre(*xi).map(|x| 0.5 * weight * x);
        }
        let k = (family.k.re, -family.k.im);
        let sums: LineMoments = line_moments::<FMA>((&at[..count], &left[..count]), &places, offset_m2, k);
        for a in 0..SIDE {
            add_turned::<FMA>(along, &sums[a], &mut out.current[a]);
            add_turned::<FMA>(w.potential, &sums[a], &mut out.potential[a]);
        }
    }

    #[inline(always)]
    fn add_rest<const FMA: bool>(&self, soil: &SoilRest, out: &mut NodeKernels) {
        let (e, run) = (self.element, &self.run.line);
        let region = region_of(e, run);
        let kernels = Kernels::of(e, run, region);
        let other = if region == Region::Across { Line::of(run) } else { Line::mirrored(run) };
        let points = gauss(rest_points(e, clearance(&Line::of(e), &other), soil, kernels.crossed));
        let rule = gauss(NODES);
        for (xi, weight) in points.nodes.iter().zip(&points.weights) {
            let here = e.at(*xi);
            let left = moments(points.nodes.len(), *xi, *weight);
            for q in 0..NODES {
                let (c, p) = kernels.at::<FMA>(soil, here, run.at(rule.nodes[q]));
                for a in 0..SIDE {
                    out.current[a][0][q] += c.re * left[a];
                    out.current[a][1][q] += c.im * left[a];
                    out.potential[a][0][q] += p.re * left[a];
                    out.potential[a][1][q] += p.im * left[a];
                }
            }
        }
    }
}

/// Add a complex multiple.
#[inline(always)]
fn add_turned<const FMA: bool>(factor: Complex64, from: &AtNodes, to: &mut AtNodes) {
    for q in 0..NODES {
        let (re, im) = (from[0][q], from[1][q]);
        to[0][q] = mul_add::<FMA>(factor.re, re, mul_add::<FMA>(-factor.im, im, to[0][q]));
        to[1][q] = mul_add::<FMA>(factor.re, im, mul_add::<FMA>(factor.im, re, to[1][q]));
    }
}

/// New elements gathered into straight runs.
fn runs(mesh: &Mesh, new_ids: &[usize], reach_m: impl Fn(usize, f64) -> f64) -> Vec<Run> {
    let mut groups: Vec<Vec<usize>> = Vec::new();
    for &k in new_ids {
        let follows = |last: &usize| goes_on(&mesh.elements[*last], &mesh.elements[k]);
        match groups.last_mut() {
            Some(group) if group.last().is_some_and(follows) => group.push(k),
            _ => groups.push(vec![k]),
        }
    }
    groups.iter().filter_map(|group| run(mesh, group, &reach_m)).collect()
}

fn run(mesh: &Mesh, group: &[usize], reach_m: impl Fn(usize, f64) -> f64) -> Option<Run> {
    let (first, last) = (&mesh.elements[*group.first()?], &mesh.elements[*group.last()?]);
    let mut line = first.clone();
    line.end = last.end;
    line.to_m = last.to_m;
    line.length_m = (last.end - first.start).norm();
    line.tangent = (last.end - first.start) / line.length_m;
    let wanted_m = reach_m(first.conductor, first.from_m) - first.from_m;
    if wanted_m > line.length_m {
        line.end = line.start + line.tangent * wanted_m;
        line.to_m = line.from_m + wanted_m;
        line.length_m = wanted_m;
    }
    let mut members = Vec::new();
    let mut weights = Vec::new();
    for &k in group {
        let e = &mesh.elements[k];
        let from = 2.0 * (e.start - line.start).dot(&line.tangent) / line.length_m - 1.0;
        let to = 2.0 * (e.end - line.start).dot(&line.tangent) / line.length_m - 1.0;
        members.push((k, from, to));
        weights.push(stretch_weights(NODES, from, to));
    }
    Some(Run { line, members, weights })
}
