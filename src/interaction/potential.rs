//! The scalar potential along all conductors from known currents.

use super::block::{Block, PairBlocks, SIDE};
use super::fill::{Legendre, derive};
use super::group::{FarPair, Groups, NODES};
use super::medium::Medium;
use super::walk::Visit;
use crate::mesh::Element;
use num_complex::Complex64;

/// The scalar potential as a linear map of the charges, at one frequency.
#[derive(Debug, Clone)]
pub struct PotentialMap {
    electric: Complex64,
    count: usize,
    /// Means of K_Φ for i ≤ j, row by row.
    blocks: Vec<Block>,
    far: Vec<FarPotential>,
    sights: Vec<[Option<Box<Sight>>; NODES + 1]>,
}

/// K_Φ between the nodes of two groups.
#[derive(Debug, Clone)]
struct FarPotential {
    groups: (usize, usize),
    nodes: (usize, usize),
    kernel: [[[f64; NODES]; NODES]; 2],
}

/// Elements of a group, and the means of P_b times its nodes' Lagrange polynomials on each.
#[derive(Debug, Clone)]
struct Sight {
    first: usize,
    weights: Vec<[[f64; NODES]; SIDE]>,
}

impl Sight {
    /// Charges at the nodes.
    fn gathered(&self, charge: &[Legendre]) -> [Complex64; NODES] {
        let mut out = [Complex64::ZERO; NODES];
        for (weights, charge) in self.weights.iter().zip(&charge[self.first..]) {
            for (row, c) in weights.iter().zip(charge) {
                for (out, w) in out.iter_mut().zip(row) {
                    *out += c * w;
                }
            }
        }
        out
    }

    /// Moments on the elements from values at the nodes.
    fn spread(&self, values: &[Complex64; NODES], out: &mut [Legendre]) {
        for (weights, out) in self.weights.iter().zip(&mut out[self.first..]) {
            for (row, to) in weights.iter().zip(out) {
                *to += row.iter().zip(values).map(|(w, v)| v * w).sum::<Complex64>();
            }
        }
    }
}

impl PotentialMap {
    /// Scalar potential along every element from the currents, V: Legendre coefficients of the mean over the circumference.
    ///
    /// Φ = 1/(4πε0) ∫ K_Φ q ds', q = −(1/jω) dI/ds.
    ///
    /// # Inputs
    /// - `currents`: Legendre coefficients of each element's current, A
    #[must_use]
    pub fn along(&self, currents: &[Legendre]) -> Vec<Legendre> {
        // dI/ds = (2/L) dI/dξ, and ∫ ds' over an element is L times the mean
        let charge: Vec<Legendre> = currents.iter().map(|c| derive(*c).map(|x| x * (-2.0 * self.electric))).collect();
        let mut out = vec![[Complex64::ZERO; SIDE]; self.count];
        for i in 0..self.count {
            for j in i..self.count {
                let block = &self.blocks[upper(self.count, i, j)];
                for a in 0..SIDE {
                    for b in 0..SIDE {
                        out[i][a] += block.at(a, b) * charge[j][b];
                        if i != j {
                            out[j][a] += block.at(b, a) * charge[i][b];
                        }
                    }
                }
            }
        }
        for pair in &self.far {
            let (one, two) = (&self.sights[pair.groups.0][pair.nodes.0], &self.sights[pair.groups.1][pair.nodes.1]);
            let (Some(one), Some(two)) = (one, two) else { continue };
            let at = |p: usize, q: usize| Complex64::new(pair.kernel[0][p][q], pair.kernel[1][p][q]);
            let (near, away) = (one.gathered(&charge), two.gathered(&charge));
            one.spread(&std::array::from_fn(|p| (0..NODES).map(|q| at(p, q) * away[q]).sum()), &mut out);
            if pair.groups.0 != pair.groups.1 {
                two.spread(&std::array::from_fn(|q| (0..NODES).map(|p| at(p, q) * near[p]).sum()), &mut out);
            }
        }
        for series in &mut out {
            for (a, c) in series.iter_mut().enumerate() {
                *c *= 2.0 * a as f64 + 1.0;
            }
        }
        out
    }
}

/// Place of (i, j), i ≤ j, in an upper triangle stored row by row.
fn upper(count: usize, i: usize, j: usize) -> usize {
    i * count - i * (i + 1) / 2 + j
}

/// Keeps the scalar-potential kernels of a walk.
pub(super) struct Recorder<'a> {
    elements: &'a [Element],
    map: PotentialMap,
}

impl<'a> Recorder<'a> {
    pub(super) fn new(elements: &'a [Element], medium: Medium) -> Self {
        let count = elements.len();
        let blocks = vec![Block::ZERO; count * (count + 1) / 2];
        let map = PotentialMap { electric: medium.electric(), count, blocks, far: Vec::new(), sights: Vec::new() };
        Self { elements, map }
    }

    pub(super) fn finish(self) -> PotentialMap {
        self.map
    }
}

impl Visit for Recorder<'_> {
    #[inline(always)]
    fn pair<const FMA: bool>(&mut self, i: usize, j: usize, blocks: &PairBlocks) {
        self.map.blocks[upper(self.map.count, i, j)].add::<FMA>(Complex64::ONE, &blocks.potential);
    }

    #[inline(always)]
    fn far<const FMA: bool>(&mut self, groups: &Groups, pair: &FarPair) {
        self.map.sights.resize(groups.list.len(), [const { None }; NODES + 1]);
        for (group, nodes) in [(pair.one, pair.nodes.0), (pair.two, pair.nodes.1)] {
            self.map.sights[group][nodes].get_or_insert_with(|| {
                let members = groups.list[group].members.clone();
                let weights = |k: usize| groups.weights(&self.elements[k], group, nodes);
                Box::new(Sight { first: members.start, weights: members.map(weights).collect() })
            });
        }
        let (groups, nodes) = ((pair.one, pair.two), pair.nodes);
        self.map.far.push(FarPotential { groups, nodes, kernel: pair.potential });
    }
}
