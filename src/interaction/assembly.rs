//! From the moments of pairs to the matrix over the unknowns.

use super::block::{PairBlocks, SIDE, weak_form};
use super::fill::{Matrix, UnknownMap};
use super::group::{FarPair, Groups, NODES};
use super::local::internal_impedance;
use super::medium::Medium;
use super::probe::slope;
use super::walk::Visit;
use crate::mesh::Element;
use crate::processor::mul_add;
use faer::Mat;
use num_complex::Complex64;

/// Unknowns handled at once.
const LANES: usize = 4;

/// How the unknowns enter the `S` amplitudes of an element's or group's current: row by row, and again with the unknowns in lanes.
#[derive(Debug, Clone)]
pub(super) struct Amplitudes<const S: usize> {
    pub(super) rows: Vec<[f64; S]>,
    lanes: Vec<[[f64; LANES]; S]>,
}

impl<const S: usize> Amplitudes<S> {
    fn new(rows: Vec<[f64; S]>) -> Self {
        let lane = |four: &[[f64; S]]| -> [[f64; LANES]; S] {
            std::array::from_fn(|s| std::array::from_fn(|l| four.get(l).map_or(0.0, |row| row[s])))
        };
        let lanes = rows.chunks(LANES).map(lane).collect();
        Self { rows, lanes }
    }
}

/// An element's unknowns and how they enter its Legendre coefficients.
#[derive(Debug, Clone)]
struct Entry {
    unknowns: Vec<usize>,
    current: Amplitudes<SIDE>,
}

/// A group's unknowns, their currents (times length) and charges at its nodes.
#[derive(Debug, Clone)]
pub(super) struct GroupEntry {
    pub(super) unknowns: Vec<usize>,
    current: Amplitudes<NODES>,
    pub(super) charge: Amplitudes<NODES>,
}

/// Entries of groups by the number of nodes, made when first wanted.
pub(super) struct GroupEntries<'a> {
    pub(super) elements: &'a [Element],
    maps: &'a [UnknownMap],
    made: Vec<[Option<Box<GroupEntry>>; NODES + 1]>,
}

impl<'a> GroupEntries<'a> {
    pub(super) fn new(elements: &'a [Element], maps: &'a [UnknownMap]) -> Self {
        Self { elements, maps, made: Vec::new() }
    }

    /// Make an entry that [`Self::get`] can give.
    pub(super) fn prepare(&mut self, groups: &Groups, group: usize, nodes: usize) {
        self.made.resize(groups.list.len(), [const { None }; NODES + 1]);
        if self.made[group][nodes].is_none() {
            self.made[group][nodes] = Some(Box::new(self.entry(groups, group, nodes)));
        }
    }

    pub(super) fn get(&self, group: usize, nodes: usize) -> Option<&GroupEntry> {
        self.made[group][nodes].as_deref()
    }

    fn entry(&self, groups: &Groups, group: usize, nodes: usize) -> GroupEntry {
        let mut unknowns: Vec<usize> = Vec::new();
        let (mut current, mut charge): (Vec<[f64; NODES]>, Vec<[f64; NODES]>) = (Vec::new(), Vec::new());
        for k in groups.list[group].members.clone() {
            let e = &self.elements[k];
            let weights = groups.weights(e, group, nodes);
            for (unknown, factors) in &self.maps[k] {
                let place = unknowns.iter().position(|u| u == unknown).unwrap_or_else(|| {
                    unknowns.push(*unknown);
                    current.push([0.0; NODES]);
                    charge.push([0.0; NODES]);
                    unknowns.len() - 1
                });
                let slopes = slope(factors);
                for b in 0..SIDE {
                    for q in 0..nodes {
                        current[place][q] += e.length_m * weights[b][q] * factors[b];
                        charge[place][q] += weights[b][q] * slopes[b];
                    }
                }
            }
        }
        GroupEntry { unknowns, current: Amplitudes::new(current), charge: Amplitudes::new(charge) }
    }
}

/// The matrix while it is gathered.
///
/// Its reactive factors are left out until the end, and of a symmetric pair of entries only one is summed:
/// Z = j (S + Sᵗ), S real factors times the kernels.
pub(super) struct Assembly<'a> {
    elements: &'a [Element],
    entries: Vec<Entry>,
    groups: GroupEntries<'a>,
    /// Row by row.
    sum: Vec<Complex64>,
    unknowns: usize,
    magnetic: f64,
    electric: f64,
}

impl<'a> Assembly<'a> {
    /// An empty matrix over some unknowns.
    pub(super) fn new(elements: &'a [Element], maps: &'a [UnknownMap], unknowns: usize, medium: Medium) -> Self {
        let entry = |map: &UnknownMap| Entry {
            unknowns: map.iter().map(|m| m.0).collect(),
            current: Amplitudes::new(map.iter().map(|m| m.1).collect()),
        };
        Self {
            elements,
            entries: maps.iter().map(entry).collect(),
            groups: GroupEntries::new(elements, maps),
            sum: vec![Complex64::ZERO; unknowns * unknowns],
            unknowns,
            magnetic: medium.magnetic().im,
            electric: 4.0 * medium.electric().im,
        }
    }

    /// The matrix, ohm.
    pub(super) fn finish(self) -> Matrix {
        let n = self.unknowns;
        Mat::from_fn(n, n, |r, c| {
            let both = self.sum[r * n + c] + self.sum[c * n + r];
            Complex64::new(-both.im, both.re)
        })
    }
}

impl Visit for Assembly<'_> {
    #[inline(always)]
    fn pair<const FMA: bool>(&mut self, i: usize, j: usize, blocks: &PairBlocks) {
        let half = if i == j { 0.5 } else { 1.0 };
        let area = self.elements[i].length_m * self.elements[j].length_m;
        let weak =
            weak_form::<FMA>(half * self.magnetic * area, &blocks.current, half * self.electric, &blocks.potential);
        let (one, two) = (&self.entries[i], &self.entries[j]);
        for (u, x) in one.unknowns.iter().zip(&one.current.rows) {
            let (re, im) = (applied::<SIDE, SIDE, FMA>(x, &weak.re), applied::<SIDE, SIDE, FMA>(x, &weak.im));
            let row = &mut self.sum[u * self.unknowns..(u + 1) * self.unknowns];
            for (v, lanes) in two.unknowns.chunks(LANES).zip(&two.current.lanes) {
                let mut sums = [[0.0; LANES]; 2];
                add_across::<SIDE, FMA>(&re, lanes, SIDE, &mut sums[0]);
                add_across::<SIDE, FMA>(&im, lanes, SIDE, &mut sums[1]);
                for (l, v) in v.iter().enumerate() {
                    row[*v] += Complex64::new(sums[0][l], sums[1][l]);
                }
            }
        }
    }

    #[inline(always)]
    fn far<const FMA: bool>(&mut self, groups: &Groups, pair: &FarPair) {
        self.groups.prepare(groups, pair.one, pair.nodes.0);
        self.groups.prepare(groups, pair.two, pair.nodes.1);
        let half = if pair.one == pair.two { 0.5 } else { 1.0 };
        let entries = (self.groups.get(pair.one, pair.nodes.0), self.groups.get(pair.two, pair.nodes.1));
        let (Some(one), Some(two)) = entries else { return };
        let (magnetic, electric) = (half * self.magnetic, half * self.electric);
        for ((u, x), q) in one.unknowns.iter().zip(&one.current.rows).zip(&one.charge.rows) {
            let current = applied_both::<FMA>(magnetic, x, &pair.current, pair.nodes.0);
            let charge = applied_both::<FMA>(electric, q, &pair.potential, pair.nodes.0);
            let row = &mut self.sum[u * self.unknowns..(u + 1) * self.unknowns];
            let lanes = two.current.lanes.iter().zip(&two.charge.lanes);
            for (v, (x, q)) in two.unknowns.chunks(LANES).zip(lanes) {
                let mut sums = [[0.0; LANES]; 2];
                for part in 0..2 {
                    add_across::<NODES, FMA>(&current[part], x, pair.nodes.1, &mut sums[part]);
                    add_across::<NODES, FMA>(&charge[part], q, pair.nodes.1, &mut sums[part]);
                }
                for (l, v) in v.iter().enumerate() {
                    row[*v] += Complex64::new(sums[0][l], sums[1][l]);
                }
            }
        }
    }
}

/// xᵗ M.
#[inline(always)]
fn applied<const S: usize, const T: usize, const FMA: bool>(x: &[f64; S], m: &[[f64; T]; S]) -> [f64; T] {
    let mut out = [0.0; T];
    for s in 0..S {
        for t in 0..T {
            out[t] = mul_add::<FMA>(x[s], m[s][t], out[t]);
        }
    }
    out
}

/// factor · xᵗ M of the first `count` rows, for both parts of M.
#[inline(always)]
fn applied_both<const FMA: bool>(
    factor: f64,
    x: &[f64; NODES],
    m: &[[[f64; NODES]; NODES]; 2],
    count: usize,
) -> [[f64; NODES]; 2] {
    let mut out = [[0.0; NODES]; 2];
    for s in 0..count.min(NODES) {
        let x = factor * x[s];
        for part in 0..2 {
            for t in 0..NODES {
                out[part][t] = mul_add::<FMA>(x, m[part][s][t], out[part][t]);
            }
        }
    }
    out
}

/// Add Σ_s row_s · lanes_s over the first `count`.
#[inline(always)]
fn add_across<const S: usize, const FMA: bool>(
    row: &[f64; S],
    lanes: &[[f64; LANES]; S],
    count: usize,
    out: &mut [f64; LANES],
) {
    for s in 0..count.min(S) {
        for l in 0..LANES {
            out[l] = mul_add::<FMA>(row[s], lanes[s][l], out[l]);
        }
    }
}

/// Metal loss of one element, over the unknowns.
pub(super) fn add_metal_loss(e: &Element, map: &UnknownMap, angular: f64, z: &mut Matrix) {
    let Some(sigma) = e.conductivity_s_per_m else { return };
    let impedance = internal_impedance(e.radius_m, sigma, angular) * e.length_m;
    for (v, y) in map {
        for (u, x) in map {
            let product: f64 = (0..SIDE).map(|a| x[a] * y[a] / (2.0 * a as f64 + 1.0)).sum();
            z[(*u, *v)] += impedance * product;
        }
    }
}
