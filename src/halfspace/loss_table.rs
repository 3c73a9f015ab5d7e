//! Tables of the evanescent loss kernels, in the same shells as those of the potentials.

use super::chebyshev::spread;
use super::loss::{LossKernels, LossWeights};
use super::panels::Fineness;
use super::patch::{Patch, Rectangle};
use super::rule::{Node, Reach};
use super::shells::{Distances, Shells};
use super::soil::{HalfSpace, Region};
use super::spectral_sum::{LANES, SpectralSum};
use num_complex::Complex64;

/// The evanescent loss kernels of one half space over a box of distances, for wires above the surface; errors at most
/// the tolerance over R'.
#[derive(Debug, Clone)]
pub struct LossTable {
    shells: Shells,
    image: f64,
}

impl LossTable {
    /// A table to an error of `tolerance` over R', 10⁻⁵ by the project's contract.
    #[must_use]
    pub fn build(space: &HalfSpace, distances: Distances, tolerance: f64) -> Self {
        let space = &space.not_lossless();
        let sample = |rectangle: Rectangle, fineness: Fineness| sample(space, rectangle, fineness);
        let shells = Shells::build(space, Region::Above, distances, tolerance, true, &sample);
        Self { shells, image: space.loss_image() }
    }

    /// The box it covers.
    #[must_use]
    pub fn distances(&self) -> Distances {
        self.shells.distances()
    }

    /// The kernels at (ρ, ζ), metres, without `charge`'s [`HalfSpace::loss_image`] over R'.
    #[must_use]
    pub fn remainder(&self, rho_m: f64, zeta_m: f64) -> LossKernels {
        let [across, up, charge, up_charge, ..] = self.shells.eval::<false>(rho_m, zeta_m);
        LossKernels { across, up, charge, up_charge }
    }

    /// The whole kernels at (ρ, ζ), metres.
    #[must_use]
    pub fn eval(&self, rho_m: f64, zeta_m: f64) -> LossKernels {
        let rest = self.remainder(rho_m, zeta_m);
        LossKernels { charge: rest.charge + self.image / rho_m.hypot(zeta_m), ..rest }
    }
}

/// Two real kernels ride as real and imaginary part of each of the first two functions.
fn sample(space: &HalfSpace, rectangle: Rectangle, fineness: Fineness) -> Patch {
    let (rho_m, zeta_m) = (rectangle.rho_m, rectangle.zeta_m);
    let (rhos, zetas) = (spread(rho_m, rectangle.points.0), spread(zeta_m, rectangle.points.1));
    let reach = Reach { region: Region::Above, rho_m, up_m: zeta_m.1, down_m: 0.0, least_m: zeta_m.0, from_k0: true };
    let weights = LossWeights::new(space);
    let n = zetas.len();
    let fill = |node: &Node, out: &mut [f64]| {
        let ([across, up, charge, up_charge], u0) = weights.at(node);
        let pairs = [(across + Complex64::i() * up) * node.weight, (charge + Complex64::i() * up_charge) * node.weight];
        for (j, &zeta) in zetas.iter().enumerate() {
            let fall = (-u0 * zeta).exp();
            for (f, pair) in pairs.iter().enumerate() {
                let value = pair * fall;
                out[2 * f * n + j] = value.re;
                out[(2 * f + 1) * n + j] = value.im;
            }
        }
        out[4 * n..LANES * n].fill(0.0);
    };
    let mut values = SpectralSum::new(&rhos, n, &fill).run(space, reach, fineness);
    let (m, image) = (rhos.len(), space.loss_image());
    for (i, &rho) in rhos.iter().enumerate() {
        for (j, &zeta) in zetas.iter().enumerate() {
            values[(2 * m + i) * n + j] -= image / rho.hypot(zeta);
        }
    }
    Patch::from_values(rectangle, values)
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]
    use super::*;

    #[test]
    fn the_loss_table_keeps_its_tolerance() {
        for (f, e, s) in
            [(1e4, 13.0, 5e-3), (1.8e6, 70.0, 5.0), (7.1e6, 13.0, 5e-3), (2.84e7, 3.0, 1e-4), (7e6, 5.0, 0.0)]
        {
            let space = HalfSpace::new(f, e, s).unwrap();
            let distances = Distances { rho_m: (0.0, 24.0), zeta_m: (0.006, 15.0) };
            let table = LossTable::build(&space, distances, 1e-5);
            for i in 0..120 {
                let (size, angle) = (0.006 * 4000f64.powf(f64::from(i) / 120.0), (f64::from(i) * 0.618).fract() * 1.57);
                let rho = (size * angle.cos()).clamp(0.0, 24.0);
                let zeta = (size * angle.sin()).clamp(0.006, 15.0);
                let (got, wanted) = (table.eval(rho, zeta), space.loss_kernels(rho, zeta));
                for (a, b) in [
                    (got.across, wanted.across),
                    (got.up, wanted.up),
                    (got.charge, wanted.charge),
                    (got.up_charge, wanted.up_charge),
                ] {
                    let error = (a - b).abs() * rho.hypot(zeta);
                    assert!(error < 1e-5, "{f} {e} {s} {rho} {zeta}: {error:e}");
                }
            }
        }
    }
}
