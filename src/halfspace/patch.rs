//! One rectangle of (ρ, ζ): the remainders at a grid of Chebyshev points by one path shared by all of them.

use super::chebyshev::spread;
use super::panels::Fineness;
use super::potentials::tilt;
use super::rule::{Node, Reach};
use super::soil::{HalfSpace, Region};
use super::spectral_sum::SpectralSum;
use super::spectrum::{Spectral, Weights};
use super::tensor::Tensor;
use crate::processor::{Vectorised, falls, mul_add, widest};
use num_complex::Complex64;

/// More samples along an axis than any table takes.
const MOST_SAMPLES: usize = 224;

/// A rectangle and how many Chebyshev points it gets each way.
#[derive(Debug, Clone, Copy)]
pub(super) struct Rectangle {
    pub rho_m: (f64, f64),
    pub zeta_m: (f64, f64),
    pub points: (usize, usize),
}

/// Chebyshev coefficients over a rectangle, by degree in ρ and ζ.
#[derive(Debug, Clone)]
pub(super) struct Patch {
    pub rectangle: Rectangle,
    pub coefficients: Tensor,
}

impl Patch {
    /// Samples the remainders over `rectangle`; Q is multiplied by `q_scale`.
    pub(super) fn sample(
        space: &HalfSpace,
        region: Region,
        rectangle: Rectangle,
        fineness: Fineness,
        q_scale: f64,
    ) -> Self {
        let (rho_m, zeta_m) = (rectangle.rho_m, rectangle.zeta_m);
        let (m, n) = rectangle.points;
        let (rhos, zetas) = (spread(rho_m, m), spread(zeta_m, n));
        let below = region == Region::Below;
        let (up_m, down_m) = if below { (0.0, zeta_m.1) } else { (zeta_m.1, 0.0) };
        let reach = Reach { region, rho_m, up_m, down_m, least_m: zeta_m.0, from_k0: false };
        let weights = Weights::new(space, region);
        let fill = |node: &Node, out: &mut [f64]| {
            let s = Spectral::at(space, node);
            let [h, q, p] = weights.reduced(&s);
            let weight = node.weight * s.lambda;
            let u = if below { s.u1 } else { s.u0 };
            widest(Columns { out, front: [weight * h, weight * q * q_scale, -node.weight * p], u, zetas: &zetas });
        };
        let mut values = SpectralSum::new(&rhos, n, &fill).run(space, reach, fineness);
        let k = space.wavenumber_per_m(region);
        for (i, &rho) in rhos.iter().enumerate() {
            for (j, &zeta) in zetas.iter().enumerate() {
                let closed = weights.slope * tilt(k, rho, zeta);
                values[(4 * m + i) * n + j] -= closed.re;
                values[(5 * m + i) * n + j] -= closed.im;
            }
        }
        Self::from_values(rectangle, values)
    }

    /// From values `[lane][rho][zeta]` at the Chebyshev points.
    pub(super) fn from_values(rectangle: Rectangle, data: Vec<f64>) -> Self {
        let (m, n) = rectangle.points;
        Self { rectangle, coefficients: Tensor { size: [m, n, 1], data }.transformed() }
    }
}

/// front · e^{−uζ} at every ζ, as lanes × ζ, as work for the processor.
struct Columns<'a> {
    out: &'a mut [f64],
    front: [Complex64; 3],
    u: Complex64,
    zetas: &'a [f64],
}

impl Vectorised for Columns<'_> {
    type Output = ();

    #[inline(always)]
    fn run<const FMA: bool>(self) {
        let n = self.zetas.len().min(MOST_SAMPLES);
        let (mut re, mut im) = ([0.0; MOST_SAMPLES], [0.0; MOST_SAMPLES]);
        falls::<FMA>(self.u, &self.zetas[..n], &mut re[..n], &mut im[..n]);
        for (front, both) in self.front.iter().zip(self.out.chunks_exact_mut(2 * n)) {
            let (to_re, to_im) = both.split_at_mut(n);
            for j in 0..n {
                to_re[j] = mul_add::<FMA>(front.re, re[j], -front.im * im[j]);
                to_im[j] = mul_add::<FMA>(front.re, im[j], front.im * re[j]);
            }
        }
    }
}
