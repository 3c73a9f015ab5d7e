//! The scalar potential at a few places as rows over the unknowns, gathered while the matrix is filled.

use super::fill::{Block, Interaction, Matrix, UnknownMap, add_local, combine, scatter};
use super::quadrature::legendre;
use super::surroundings::Surroundings;
use crate::mesh::{Element, MAX_DEGREE};
use faer::Mat;
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
pub(super) fn slope(c: &[f64; MAX_DEGREE + 1]) -> [f64; MAX_DEGREE + 1] {
    [c[1] + c[3], 3.0 * c[2], 5.0 * c[3], 0.0]
}

/// What the charges of one element add to the potential at a spot of another, into a row over the unknowns.
fn probe(weights: &[f64; MAX_DEGREE + 1], block: &Block, turned: bool, map: &UnknownMap, row: &mut [Complex64]) {
    let at = |a: usize, b: usize| if turned { block[b][a] } else { block[a][b] };
    let seen: [Complex64; MAX_DEGREE + 1] =
        std::array::from_fn(|b| (0..=MAX_DEGREE).map(|a| at(a, b) * weights[a]).sum());
    for (unknown, factors) in map {
        let charge = slope(factors);
        row[*unknown] += charge.iter().zip(&seen).map(|(c, s)| s * c).sum::<Complex64>();
    }
}

impl Interaction {
    /// As [`Interaction::fill`], with the scalar potential at some spots, V per A of every unknown; rows in the order of the spots.
    ///
    /// Φ = 1/(4πε0) ∫ K_Φ q ds', q = −(1/jω) dI/ds.
    #[must_use]
    pub fn fill_probed(&self, earth: &Surroundings, spots: &[Spot]) -> (Matrix, Vec<Vec<Complex64>>) {
        let elements = &self.mesh().elements;
        let maps: Vec<UnknownMap> = elements.iter().map(Element::legendre_map).collect();
        let (z, rows) = self.gather(earth, spots, &maps, self.mesh().unknowns);
        let mut z = z;
        for (element, map) in elements.iter().zip(&maps) {
            add_local(element, map, earth, &mut z);
        }
        (z, rows)
    }

    /// Matrix (without what elements do to themselves alone) and potential rows over given unknowns.
    pub(super) fn gather(
        &self,
        earth: &Surroundings,
        spots: &[Spot],
        maps: &[UnknownMap],
        unknowns: usize,
    ) -> (Matrix, Vec<Vec<Complex64>>) {
        let medium = earth.air();
        let elements = &self.mesh().elements;
        let mut z = Mat::zeros(unknowns, unknowns);
        let mut rows = vec![vec![Complex64::ZERO; unknowns]; spots.len()];
        let weights: Vec<_> = spots.iter().map(|s| value_weights(s.xi)).collect();
        self.walk(earth, |i, j, blocks| {
            let a = medium.magnetic() * (elements[i].length_m * elements[j].length_m);
            let block = combine(&blocks.current, a, &blocks.potential, medium.electric() * 4.0);
            scatter(&maps[i], &maps[j], &block, i != j, &mut z);
            for ((spot, weights), row) in spots.iter().zip(&weights).zip(&mut rows) {
                if spot.element == i {
                    probe(weights, &blocks.potential, false, &maps[j], row);
                }
                if spot.element == j && i != j {
                    probe(weights, &blocks.potential, true, &maps[i], row);
                }
            }
        });
        let factor = -2.0 * medium.electric();
        for value in rows.iter_mut().flatten() {
            *value *= factor;
        }
        (z, rows)
    }
}
