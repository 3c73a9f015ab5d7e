//! The power that currents above the surface send down through it.
//!
//! Parseval over the transverse wavenumber λ at z = 0, wave by wave (TE and TM), with F = ∫ J e^{+jk·ρ − u₀z} dV the
//! spectrum of the currents and q̃ that of their charge:
//!
//! P = (1/8π²) ∫ d²k { A |F_v|² + B |T|² }, A = ωμ₀ Im u₁/|u₀+u₁|², B = (1/ωε₀) Im(u₁n̄²)/|n²u₀+u₁|²,
//!
//! F_v across the direction of propagation and T = λF_z − ju₀F_u = (k₀²F_z − jωu₀q̃)/λ by continuity. Two parts:
//!
//! - λ < k₀, plane waves that travel down: what reaches the ground of each is 1 − |Γ|², so this part is a sum over
//!   the directions of the lower hemisphere, [`HalfSpace::downward_power_w_per_sr`].
//! - λ > k₀, the near field: with F_u expressed by q̃ and F_z the angle integrates to J₀, and four kernels of (ρ, ζ)
//!   remain, [`LossKernels`], which go under the same double integrals over the wires as the potentials.
//!
//! Evanescent power, peak phasors, q the charge per length (∂I/∂s = −jωq):
//!
//! P = ½ω Re ∬ { (μ₀/4π)(`across` J_t\*·J_t' + `up` J_z\*J_z') + `charge` q\*q'/(4πε₀) − (η₀/2π) `up_charge` Im(J_z q'\*) }
//!
//! Nothing large cancels in it: near the ground `charge` alone carries the loss, with the coefficient of
//! [`HalfSpace::loss_image`] over R', as a few millimetres above the soil demand.

use super::panels::FINE;
use super::rule::{Node, Reach, nodes};
use super::soil::{HalfSpace, Region, root};
use super::spectrum::bessel_at;
use crate::quantity::ETA_0_OHM;
use num_complex::Complex64;
use std::f64::consts::PI;

/// The kernels of the evanescent earth loss at one pair of distances, 1/m, normalised as the potentials are.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct LossKernels {
    /// Between horizontal currents.
    pub across: f64,
    /// Between vertical currents.
    pub up: f64,
    /// Between charges, whole: the image part is in it.
    pub charge: f64,
    /// Between a vertical current and a charge.
    pub up_charge: f64,
}

/// What the spectral weights of the loss need.
#[derive(Debug, Clone, Copy)]
pub(super) struct LossWeights {
    k0: f64,
    k1: Complex64,
    n2: Complex64,
    loss: f64,
}

impl LossWeights {
    pub(super) fn new(space: &HalfSpace) -> Self {
        let (k0, n2) = (space.k0_per_m(), space.index_squared());
        Self { k0, k1: space.k1_per_m(), n2, loss: k0 * k0 * n2.im.abs() }
    }

    /// The four weights times λ, and u₀. On the real axis all are real; off it their analytic continuation, conjugate
    /// quantities becoming functions of their own with the branch point at the conjugate of k₁.
    pub(super) fn at(&self, node: &Node) -> ([Complex64; 4], Complex64) {
        let lambda = node.lambda;
        let k1_conj = self.k1.conj();
        let n2_conj = self.n2.conj();
        let u0 = root(node.from_k0 * (lambda + self.k0));
        let u1 = root(node.from_k1 * (lambda + self.k1));
        let from_conj = node.from_k1 + Complex64::new(0.0, 2.0 * self.k1.im);
        let u1_conj = root(from_conj * (lambda + k1_conj));
        let te = self.loss / ((u1 + u1_conj) * (u0 + u1) * (u0 + u1_conj));
        let tm = (u1 * n2_conj - u1_conj * self.n2)
            / Complex64::new(0.0, 2.0)
            / ((self.n2 * u0 + u1) * (n2_conj * u0 + u1_conj));
        let k0_squared = self.k0 * self.k0;
        let over = 2.0 / lambda;
        let weights = [
            2.0 * te * lambda,
            (k0_squared * tm - u0 * u0 * te) * over,
            (u0 * u0 * tm - k0_squared * te) * over,
            self.k0 * u0 * (te + tm) * over,
        ];
        (weights, u0)
    }
}

impl HalfSpace {
    /// Coefficient of 1/R' in the charge kernel of the loss, 2 |Im n²|/|n²+1|².
    #[must_use]
    pub fn loss_image(&self) -> f64 {
        2.0 * self.index_squared().im.abs() / (self.index_squared() + 1.0).norm_sqr()
    }

    /// The evanescent loss kernels at horizontal distance `rho_m` and sum of heights `zeta_m`, metres, by quadrature.
    #[must_use]
    pub fn loss_kernels(&self, rho_m: f64, zeta_m: f64) -> LossKernels {
        let reach = Reach {
            region: Region::Above,
            rho_m: (rho_m, rho_m),
            up_m: zeta_m,
            down_m: 0.0,
            least_m: zeta_m,
            from_k0: true,
        };
        let space = self.not_lossless();
        let weights = LossWeights::new(&space);
        let mut sum = [0.0; 4];
        for node in nodes(&space, reach, FINE) {
            let (values, u0) = weights.at(&node);
            let scale = node.weight * (-u0 * zeta_m).exp() * bessel_at(&node, rho_m).0;
            for (total, value) in sum.iter_mut().zip(values) {
                *total += (value * scale).re;
            }
        }
        LossKernels { across: sum[0], up: sum[1], charge: sum[2], up_charge: sum[3] }
    }

    /// Reflection coefficients of the ground for a plane wave `theta_rad` from the vertical: TE (electric field
    /// horizontal) and TM (magnetic field horizontal, by its magnetic field), each 1 − 2/(…) free of cancellation.
    #[must_use]
    pub fn plane_wave_reflection(&self, theta_rad: f64) -> (Complex64, Complex64) {
        let (sin, cos) = theta_rad.sin_cos();
        let inside = root(self.index_squared() - sin * sin);
        let n2 = self.index_squared();
        ((cos - inside) / (cos + inside), (n2 * cos - inside) / (n2 * cos + inside))
    }

    /// Power per solid angle that goes into the ground from plane waves travelling down at `theta_rad` from straight
    /// down, towards azimuth `phi_rad`, W/sr. `spectrum_a_m` is F = ∫ J e^{+jk·r} dV (A·m, peak; east, north, up) with
    /// k = k₀ (sin θ cos φ, sin θ sin φ, −cos θ). Integrate over the lower hemisphere, sin θ dθ dφ.
    #[must_use]
    pub fn downward_power_w_per_sr(&self, theta_rad: f64, phi_rad: f64, spectrum_a_m: [Complex64; 3]) -> f64 {
        let (te, tm) = self.plane_wave_reflection(theta_rad);
        let [east, north, up] = spectrum_a_m;
        let (sin, cos) = phi_rad.sin_cos();
        let across = north * cos - east * sin;
        let along = (east * cos + north * sin) * theta_rad.cos() + up * theta_rad.sin();
        let k0 = self.k0_per_m();
        let front = ETA_0_OHM * k0 * k0 / (32.0 * PI * PI);
        front * ((1.0 - te.norm_sqr()) * across.norm_sqr() + (1.0 - tm.norm_sqr()) * along.norm_sqr())
    }
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]
    use super::*;
    use crate::quantity::{EPSILON_0_F_PER_M, MU_0_H_PER_M};

    /// A straight uniform current of 1 A between two points, with the charges at its ends.
    struct Rod {
        ends: [[f64; 3]; 2],
        points: Vec<([f64; 3], f64)>,
        moment: [f64; 3],
    }

    impl Rod {
        fn new(ends: [[f64; 3]; 2]) -> Self {
            let moment = [0, 1, 2].map(|i| ends[1][i] - ends[0][i]);
            let points = super::super::panels::gauss(8)
                .iter()
                .map(|&(x, w)| ([0, 1, 2].map(|i| ends[0][i] + 0.5 * (1.0 + x) * moment[i]), 0.5 * w))
                .collect();
            Self { ends, points, moment }
        }

        /// Charge over 1/(jω): out of the first end, into the second.
        fn charges(&self) -> [([f64; 3], f64); 2] {
            [(self.ends[0], -1.0), (self.ends[1], 1.0)]
        }

        /// ∫ e^{+jk·r} of the current.
        fn spectrum(&self, k: [f64; 3]) -> Complex64 {
            self.points.iter().map(|(r, w)| Complex64::from_polar(*w, k[0] * r[0] + k[1] * r[1] + k[2] * r[2])).sum()
        }
    }

    fn apart(a: [f64; 3], b: [f64; 3]) -> f64 {
        (a[0] - b[0]).hypot(a[1] - b[1])
    }

    /// Imaginary parts of K_xx, K_zz, K_Φ, finite where the points coincide.
    fn imaginary(space: &HalfSpace, a: [f64; 3], b: [f64; 3]) -> [f64; 3] {
        let rho = apart(a, b);
        let (rest, parts) = (space.remainder(rho, a[2], b[2]), space.image_coefficients(Region::Above));
        let (k, r) = (space.k0_per_m(), rho.hypot(a[2] - b[2]));
        let direct = if k * r < 1e-6 { -k } else { -(k * r).sin() / r };
        let far = rho.hypot(a[2] + b[2]);
        let image = Complex64::from_polar(1.0 / far, -k * far);
        [
            direct + (rest.xx + parts.image.xx * image).im,
            direct + (rest.zz + parts.image.zz * image).im,
            direct + (rest.phi + parts.image.phi * image).im,
        ]
    }

    fn input_w(space: &HalfSpace, rod: &Rod) -> f64 {
        let omega = space.omega();
        let flat = rod.moment[0].powi(2) + rod.moment[1].powi(2);
        let (mut currents, mut charges) = (0.0, 0.0);
        for (a, u) in &rod.points {
            for (b, v) in &rod.points {
                let [xx, zz, _] = imaginary(space, *a, *b);
                currents += u * v * (flat * xx + rod.moment[2].powi(2) * zz);
            }
        }
        for (a, u) in rod.charges() {
            for (b, v) in rod.charges() {
                charges += u * v * imaginary(space, a, b)[2] / (omega * omega);
            }
        }
        0.5 * omega * (charges / (4.0 * PI * EPSILON_0_F_PER_M) - MU_0_H_PER_M / (4.0 * PI) * currents)
    }

    fn evanescent_w(space: &HalfSpace, rod: &Rod) -> f64 {
        let omega = space.omega();
        let flat = rod.moment[0].powi(2) + rod.moment[1].powi(2);
        let kernels = |a: [f64; 3], b: [f64; 3]| space.loss_kernels(apart(a, b), a[2] + b[2]);
        let mut sum = 0.0;
        for (a, u) in &rod.points {
            for (b, v) in &rod.points {
                let k = kernels(*a, *b);
                sum += MU_0_H_PER_M / (4.0 * PI) * u * v * (flat * k.across + rod.moment[2].powi(2) * k.up);
            }
            for (b, v) in rod.charges() {
                // q = v/(jω), so Im(J_z q*) = J_z v/ω.
                sum -= ETA_0_OHM / (2.0 * PI) * u * rod.moment[2] * kernels(*a, b).up_charge * v / omega;
            }
        }
        for (a, u) in rod.charges() {
            for (b, v) in rod.charges() {
                sum += u * v / (omega * omega) * kernels(a, b).charge / (4.0 * PI * EPSILON_0_F_PER_M);
            }
        }
        0.5 * omega * sum
    }

    /// Radiated and plane-wave earth power, by directions.
    fn by_directions_w(space: &HalfSpace, rod: &Rod) -> [f64; 2] {
        let k0 = space.k0_per_m();
        let mut sums = [0.0; 2];
        let rings = 48;
        for panel in 0..4 {
            for &(x, w) in super::super::panels::gauss(20) {
                // cos θ = s² crowds the directions towards the horizon, where the pseudo-Brewster angle of good ground is.
                let s = 0.25 * (f64::from(panel) + 0.5 * (1.0 + x));
                let theta = (s * s).acos();
                let weight = 0.125 * w * 2.0 * s * 2.0 * PI / f64::from(rings);
                for i in 0..rings {
                    let phi = 2.0 * PI * f64::from(i) / f64::from(rings);
                    let k = [k0 * theta.sin() * phi.cos(), k0 * theta.sin() * phi.sin(), k0 * theta.cos()];
                    let (up, down) = (rod.spectrum(k), rod.spectrum([k[0], k[1], -k[2]]));
                    let moment = rod.moment.map(|m| down * m);
                    sums[1] += weight * space.downward_power_w_per_sr(theta, phi, moment);
                    let (te, tm) = space.plane_wave_reflection(theta);
                    let along = rod.moment[0] * phi.cos() + rod.moment[1] * phi.sin();
                    let across = rod.moment[1] * phi.cos() - rod.moment[0] * phi.sin();
                    let horizontal = across * (up + te * down);
                    let vertical =
                        along * theta.cos() * (up - tm * down) - rod.moment[2] * theta.sin() * (up + tm * down);
                    let front = ETA_0_OHM * k0 * k0 / (32.0 * PI * PI);
                    sums[0] += weight * front * (horizontal.norm_sqr() + vertical.norm_sqr());
                }
            }
        }
        sums
    }

    #[test]
    fn input_is_radiation_plus_earth_loss() {
        for (f, e, s) in [(1.8e6, 70.0, 5.0), (7.1e6, 13.0, 5e-3), (2.84e7, 3.0, 1e-4), (1.41e7, 5.0, 0.0)] {
            let space = HalfSpace::new(f, e, s).unwrap();
            for ends in [
                [[0.0, 0.0, 0.4], [0.0, 0.0, 0.6]],
                [[0.0, 0.0, 0.003], [0.3, 0.1, 0.003]],
                [[0.0, 0.0, 3.0], [0.3, 0.1, 3.0]],
                [[0.0, 0.0, 0.3], [0.2, 0.0, 0.5]],
            ] {
                let rod = Rod::new(ends);
                let input = input_w(&space, &rod);
                let [radiated, plane] = by_directions_w(&space, &rod);
                let evanescent = evanescent_w(&space, &rod);
                let gap = input - radiated - plane - evanescent;
                assert!(
                    gap.abs() < 1e-6 * input && radiated > 0.0 && plane >= 0.0 && evanescent > 0.0,
                    "{f} {e} {s} {ends:?}: in {input:e} sky {radiated:e} plane {plane:e} near {evanescent:e} gap {:e}",
                    gap / input
                );
            }
        }
    }
}
