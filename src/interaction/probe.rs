//! The scalar potential at a few places as rows over the unknowns, gathered while the matrix is filled.

use super::assembly::GroupEntries;
use super::block::{Block, PairBlocks, SIDE};
use super::fill::UnknownMap;
use super::group::{FarPair, Groups, NODES};
use super::medium::Medium;
use super::quadrature::legendre;
use super::walk::Visit;
use crate::mesh::{Element, MAX_DEGREE};
use num_complex::Complex64;

/// A place on an element.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Spot {
    /// Index of the element.
    pub element: usize,
    /// ξ from −1 to 1.
    pub xi: f64,
}

/// Weights (2a + 1) P_a(ξ) that make a Legendre series' value out of its moments.
pub(super) fn value_weights(xi: f64) -> [f64; MAX_DEGREE + 1] {
    let p = legendre(xi);
    std::array::from_fn(|a| (2.0 * a as f64 + 1.0) * p[a])
}

/// Derivative with respect to ξ of real Legendre coefficients.
#[inline(always)]
pub(super) fn slope(c: &[f64; MAX_DEGREE + 1]) -> [f64; MAX_DEGREE + 1] {
    [c[1] + c[3], 3.0 * c[2], 5.0 * c[3], 0.0]
}

/// Gathers Σ_a weight_a · (moment a of the potential on an element) as rows over the unknowns.
pub(super) struct Probes<'a> {
    maps: &'a [UnknownMap],
    groups: GroupEntries<'a>,
    /// Element and weights of every row.
    at: &'a [(usize, [f64; SIDE])],
    /// The same at the nodes of its group, by their number.
    at_nodes: Vec<[Option<[f64; NODES]>; NODES + 1]>,
    rows: Vec<Vec<Complex64>>,
    factor: Complex64,
}

impl<'a> Probes<'a> {
    pub(super) fn new(
        elements: &'a [Element],
        maps: &'a [UnknownMap],
        at: &'a [(usize, [f64; SIDE])],
        unknowns: usize,
        medium: Medium,
    ) -> Self {
        let rows = vec![vec![Complex64::ZERO; unknowns]; at.len()];
        let groups = GroupEntries::new(elements, maps);
        Self { maps, groups, at, at_nodes: vec![[None; NODES + 1]; at.len()], rows, factor: -2.0 * medium.electric() }
    }

    /// The rows, V per A.
    pub(super) fn finish(mut self) -> Vec<Vec<Complex64>> {
        self.rows.iter_mut().flatten().for_each(|value| *value *= self.factor);
        self.rows
    }
}

impl Visit for Probes<'_> {
    #[inline(always)]
    fn pair<const FMA: bool>(&mut self, i: usize, j: usize, blocks: &PairBlocks) {
        for ((element, weights), row) in self.at.iter().zip(&mut self.rows) {
            if *element == i {
                probe(weights, &blocks.potential, false, &self.maps[j], row);
            }
            if *element == j && i != j {
                probe(weights, &blocks.potential, true, &self.maps[i], row);
            }
        }
    }

    #[inline(always)]
    fn far<const FMA: bool>(&mut self, groups: &Groups, pair: &FarPair) {
        for turned in [false, true] {
            if turned && pair.one == pair.two {
                continue;
            }
            let (here, there) = if turned { (pair.two, pair.one) } else { (pair.one, pair.two) };
            let (n, m) = if turned { (pair.nodes.1, pair.nodes.0) } else { pair.nodes };
            for spot in 0..self.at.len() {
                let (element, weights) = self.at[spot];
                if groups.of[element] as usize != here {
                    continue;
                }
                let e = &self.groups.elements[element];
                let own = *self.at_nodes[spot][n].get_or_insert_with(|| {
                    let own = groups.weights(e, here, n);
                    std::array::from_fn(|p| (0..SIDE).map(|a| weights[a] * own[a][p]).sum())
                });
                self.groups.prepare(groups, there, m);
                let Some(entry) = self.groups.get(there, m) else { continue };
                let seen = seen(pair, turned, &own);
                for (unknown, charge) in entry.unknowns.iter().zip(&entry.charge.rows) {
                    self.rows[spot][*unknown] += charge.iter().zip(&seen).map(|(c, s)| s * c).sum::<Complex64>();
                }
            }
        }
    }
}

/// The potential of unit charges at the nodes of a group, summed with weights over those of the other.
fn seen(pair: &FarPair, turned: bool, own: &[f64; NODES]) -> [Complex64; NODES] {
    let [re, im] = &pair.potential;
    let at = |p: usize, q: usize| if turned { (re[q][p], im[q][p]) } else { (re[p][q], im[p][q]) };
    std::array::from_fn(|q| {
        let terms = own.iter().enumerate().map(|(p, w)| {
            let (re, im) = at(p, q);
            Complex64::new(w * re, w * im)
        });
        terms.sum()
    })
}

/// What the charges of one element add to the potential at a spot of another.
fn probe(weights: &[f64; SIDE], block: &Block, turned: bool, map: &UnknownMap, row: &mut [Complex64]) {
    let at = |a: usize, b: usize| if turned { block.at(b, a) } else { block.at(a, b) };
    let seen: [Complex64; SIDE] = std::array::from_fn(|b| (0..SIDE).map(|a| at(a, b) * weights[a]).sum());
    for (unknown, factors) in map {
        let charge = slope(factors);
        row[*unknown] += charge.iter().zip(&seen).map(|(c, s)| s * c).sum::<Complex64>();
    }
}
