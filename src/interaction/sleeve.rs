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
use super::near::{Moments, Static};
use super::pairs::{Pairs, Statics};
use crate::mesh::{Element, MAX_DEGREE, Mesh};
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
    /// Static moments of the metal with the jacket's outside.
    pub(super) over: Static,
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
///
/// # Inputs
/// - `direct`: all pairs of the mesh, with their static moments
/// - `known`: static moments of a mesh with like elements
pub(super) fn sleeves(mesh: &Mesh, direct: &[Pairs], known: &Statics) -> Vec<Sleeve> {
    let mut out = Vec::new();
    for (pairs, pair) in direct.iter().flat_map(|pairs| pairs.list.iter().map(move |pair| (pairs, pair))) {
        let (e, f) = (&mesh.elements[pair.one], &mesh.elements[pair.two]);
        let (Some(jacket), Some(near)) = (e.jacket.filter(|j| j.thickness_m > 0.0), pair.near) else { continue };
        let alike = f.jacket == e.jacket && f.radius_m == e.radius_m && f.below == e.below;
        if !alike || tubes(&Line::of(e), &Line::of(f), false) != Tubes::Coaxial {
            continue;
        }
        let bare = &pairs.statics[near as usize];
        let (one, outside) = over_jacket(e, f, jacket.thickness_m);
        let over = known.get(&one, &outside, Tubes::Coaxial);
        let area = e.length_m * f.length_m;
        let difference = std::array::from_fn(|a| {
            std::array::from_fn::<f64, { MAX_DEGREE + 1 }, _>(|b| (bare.inverse[a][b] - over.inverse[a][b]) / area)
        });
        out.push(Sleeve { one: pair.one, two: pair.two, permittivity: jacket.permittivity, difference, over });
    }
    out
}

/// The metal of the first, and the outside of the jacket of the second.
pub(super) fn over_jacket(e: &Element, f: &Element, thickness_m: f64) -> (Line, Line) {
    (Line::of(e), Line { radius_m: e.radius_m + thickness_m, ..Line::of(f) })
}
