//! Jackets: the charge that a dielectric sleeve binds on its two surfaces.
//!
//! A line charge q on the metal (radius a) binds −(1 − ε_m/ε_j) q on the metal's side of the sleeve and as much of the other sign
//! on its outside (radius b). On the metal the potential then changes by (1/ε_j − 1/ε_m) times the difference of the static ring
//! kernels K_aa − K_ab. For charge that varies slowly its integral is 2 ln(b/a), the elastance of the shell per length
//! (1/ε_j − 1/ε_m) ln(b/a)/(2π ε0) (Richmond & Newman 1976 and Popović & Nešić 1984, from memory). Taken as a local term
//! instead, the negative elastance would outweigh the tube's own for charge that varies within a radius or two, and a fine mesh
//! would find resonances that are not there.

use super::block::{Block, PairBlocks};
use super::line::{Line, Tubes, tubes};
use super::near::{Moments, moments};
use crate::mesh::{MAX_DEGREE, Mesh};
use num_complex::Complex64;

/// Two elements on one line in one jacket.
#[derive(Debug, Clone)]
pub(super) struct Sleeve {
    pub(super) one: usize,
    pub(super) two: usize,
    /// Relative permittivity of the jacket.
    permittivity: f64,
    /// Mean of P_a P_b (K_aa − K_ab) over the pair, 1/m.
    difference: Moments,
}

impl Sleeve {
    /// What the jacket adds to a pair in a medium of this relative permittivity.
    pub(super) fn blocks(&self, medium: Complex64) -> PairBlocks {
        let factor = 1.0 / self.permittivity - 1.0 / medium;
        let mut potential = Block::ZERO;
        potential.add_real::<false>(factor, &self.difference);
        PairBlocks { current: Block::ZERO, potential }
    }
}

/// All pairs (one ≤ two) that share a jacket and lie on one line, near enough for the two kernels to differ.
pub(super) fn sleeves(mesh: &Mesh) -> Vec<Sleeve> {
    let mut out = Vec::new();
    for (i, e) in mesh.elements.iter().enumerate() {
        let Some(jacket) = e.jacket.filter(|j| j.thickness_m > 0.0) else { continue };
        for (j, f) in mesh.elements.iter().enumerate().skip(i) {
            if f.jacket != e.jacket || f.radius_m != e.radius_m || f.below != e.below {
                continue;
            }
            let (one, two) = (Line::of(e), Line::of(f));
            if tubes(&one, &two, false) != Tubes::Coaxial {
                continue;
            }
            let outside = Line { radius_m: e.radius_m + jacket.thickness_m, ..two };
            let (bare, over) = (moments(&one, &two, Tubes::Coaxial), moments(&one, &outside, Tubes::Coaxial));
            let area = e.length_m * f.length_m;
            let difference = std::array::from_fn(|a| {
                std::array::from_fn::<f64, { MAX_DEGREE + 1 }, _>(|b| (bare.inverse[a][b] - over.inverse[a][b]) / area)
            });
            out.push(Sleeve { one: i, two: j, permittivity: jacket.permittivity, difference });
        }
    }
    out
}
