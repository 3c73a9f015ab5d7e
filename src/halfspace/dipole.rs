//! Electric and magnetic field of a current element anywhere over, in or across the surface.
//!
//! With p the current moment, A ∝ K·p and Φ from the element's two end charges,
//! E = −jω(μ₀/4π) K·p + (1/(4πε₀jω)) ∇(p_t·∇K_Φ − p_z ∂K_Φ/∂z'), H = (1/4π) ∇×(K·p); the derivatives act on
//! closed forms and under the integrals.

use super::soil::{HalfSpace, Region};
use super::spectrum::{Pair, Weights};
use crate::quantity::{EPSILON_0_F_PER_M, MU_0_H_PER_M};
use num_complex::Complex64;
use std::f64::consts::PI;

/// A field at a point: east, north, up.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct DipoleField {
    /// Electric field, V/m.
    pub electric_v_per_m: [Complex64; 3],
    /// Magnetic field, A/m.
    pub magnetic_a_per_m: [Complex64; 3],
}

/// e^{−jkR}/R and its derivatives: ∂_i g = `first` r_i, ∂_i ∂_j g = `first` δ_ij + `second` r_i r_j.
#[derive(Clone, Copy)]
struct Spherical {
    value: Complex64,
    first: Complex64,
    second: Complex64,
    along: f64,
}

impl Spherical {
    fn new(k: Complex64, rho_m: f64, along: f64) -> Self {
        let r = rho_m.hypot(along);
        let jkr = Complex64::i() * k * r;
        let value = (-jkr).exp() / r;
        let first = -(1.0 + jkr) * value / (r * r);
        let second = (3.0 + 3.0 * jkr + jkr * jkr) * value / (r * r * r * r);
        Self { value, first, second, along }
    }
}

/// The derivatives that the field needs: `_r` is ∂/∂ρ, `_o` that over ρ, `_z` by the observer's height, `_s` by the
/// source's.
#[derive(Clone, Copy)]
struct Derivatives {
    h: Complex64,
    h_r: Complex64,
    h_z: Complex64,
    zz: Complex64,
    zz_r: Complex64,
    q_o: Complex64,
    q_rr: Complex64,
    q_rz: Complex64,
    q_rs: Complex64,
    q_zs: Complex64,
    p_r: Complex64,
    p_o: Complex64,
    p_rr: Complex64,
    p_rz: Complex64,
}

impl HalfSpace {
    /// The field at `at_m` of a current element of moment `moment_a_m` (A·m) at `source_m`; east, north, up, metres.
    ///
    /// Below the surface the field is that in the soil. Not finite at the element itself; a point at height 0 is
    /// taken just above the surface.
    #[must_use]
    pub fn element_field(&self, moment_a_m: [f64; 3], source_m: [f64; 3], at_m: [f64; 3]) -> DipoleField {
        self.field(moment_a_m, source_m, at_m, true)
    }

    /// [`Self::element_field`] less the field of the same element in an unbounded medium like its own, for a point on the
    /// same side of the surface: what the other medium adds. Finite at the element itself.
    #[must_use]
    pub fn scattered_field(&self, moment_a_m: [f64; 3], source_m: [f64; 3], at_m: [f64; 3]) -> DipoleField {
        self.field(moment_a_m, source_m, at_m, false)
    }

    fn field(&self, moment_a_m: [f64; 3], source_m: [f64; 3], at_m: [f64; 3], direct: bool) -> DipoleField {
        let (dx, dy) = (at_m[0] - source_m[0], at_m[1] - source_m[1]);
        let rho = dx.hypot(dy);
        let (cos, sin) = if rho > 0.0 { (dx / rho, dy / rho) } else { (1.0, 0.0) };
        let d = self.derivatives(rho, at_m[2], source_m[2], direct);
        let radial = moment_a_m[0] * cos + moment_a_m[1] * sin;
        let across = moment_a_m[1] * cos - moment_a_m[0] * sin;
        let up = moment_a_m[2];
        let (magnetic, charge) = (
            -Complex64::i() * self.omega() * MU_0_H_PER_M / (4.0 * PI),
            1.0 / (4.0 * PI * EPSILON_0_F_PER_M * Complex64::i() * self.omega()),
        );
        // Cylindrical components: along ρ, along φ, up.
        let e_rho = magnetic * (d.h * radial - d.p_r * up) + charge * (d.q_rr * radial - d.q_rs * up);
        let e_phi = magnetic * d.h * across + charge * d.q_o * across;
        let e_up = magnetic * (d.p_r * radial + d.zz * up) + charge * (d.q_rz * radial - d.q_zs * up);
        let h_rho = (d.p_o - d.h_z) * across;
        let h_phi = (d.h_z - d.p_rr) * radial - (d.p_rz + d.zz_r) * up;
        let h_up = d.h_r * across;
        let turn = |rho: Complex64, phi: Complex64, up: Complex64| [rho * cos - phi * sin, rho * sin + phi * cos, up];
        let fourth = 0.25 / PI;
        DipoleField {
            electric_v_per_m: turn(e_rho, e_phi, e_up),
            magnetic_a_per_m: turn(h_rho * fourth, h_phi * fourth, h_up * fourth),
        }
    }

    /// K_xx, K_zz and ∂P/∂ρ without any part taken out under the integrals.
    #[cfg(test)]
    pub(super) fn unreduced(&self, rho_m: f64, z_m: f64, z_source_m: f64) -> [Complex64; 3] {
        let d = self.derivatives(rho_m, z_m, z_source_m, true);
        [d.h, d.zz, d.p_r]
    }

    fn derivatives(&self, rho_m: f64, z_m: f64, z_source_m: f64, direct: bool) -> Derivatives {
        let mut d = self.spectral_derivatives(rho_m, z_m, z_source_m);
        let region = Region::of(z_m, z_source_m);
        if region == Region::Across {
            return d;
        }
        let k = self.wavenumber_per_m(region);
        let charge = if region == Region::Below { 1.0 / self.index_squared() } else { Complex64::new(1.0, 0.0) };
        let parts = [(1.0, -1.0, z_m - z_source_m), (-1.0, 1.0, z_m + z_source_m)];
        for (sign, source_sign, along) in parts.into_iter().skip(usize::from(!direct)) {
            let g = Spherical::new(k, rho_m, along);
            d.h += sign * g.value;
            d.h_r += sign * g.first * rho_m;
            d.h_z += sign * g.first * g.along;
            d.zz += sign * g.value;
            d.zz_r += sign * g.first * rho_m;
            let weight = charge * sign;
            d.q_o += weight * g.first;
            d.q_rr += weight * (g.first + g.second * rho_m * rho_m);
            d.q_rz += weight * g.second * rho_m * g.along;
            d.q_rs += weight * source_sign * g.second * rho_m * g.along;
            d.q_zs += weight * source_sign * (g.first + g.second * g.along * g.along);
        }
        d
    }

    fn spectral_derivatives(&self, rho_m: f64, z_m: f64, z_source_m: f64) -> Derivatives {
        let pair = Pair::new(rho_m, z_m, z_source_m);
        let weights = Weights::new(self, pair.region);
        let sums = pair.integrate(self, |s, b0, b1| {
            let fall = |height: f64| if height >= 0.0 { -s.u0 } else { s.u1 };
            let (dz, ds) = (fall(z_m), fall(z_source_m));
            let over = if rho_m > 0.0 { b1 / rho_m } else { 0.5 * s.lambda };
            let scale = pair.decay(s) * s.lambda;
            let (h, q, p) = (weights.full_h(s) * scale, weights.full_q(s) * scale, weights.full_p(s) * scale);
            let slope = -s.lambda * b1;
            let over = -s.lambda * over;
            let bend = -s.lambda * s.lambda * b0 - over;
            [
                h * b0,
                h * slope,
                h * dz * b0,
                q * b0,
                q * slope,
                q * over,
                q * bend,
                q * dz * slope,
                q * ds * slope,
                q * dz * ds * b0,
                p * slope,
                p * over,
                p * bend,
                p * dz * slope,
            ]
        });
        let [h, h_r, h_z, q, q_r, q_o, q_rr, q_rz, q_rs, q_zs, p_r, p_o, p_rr, p_rz] = sums;
        let contrast = match pair.region {
            Region::Above => self.index_squared() - 1.0,
            Region::Below => 1.0 - self.index_squared(),
            Region::Across => Complex64::new(0.0, 0.0),
        };
        let (zz, zz_r) = (h + contrast * q, h_r + contrast * q_r);
        Derivatives { h, h_r, h_z, zz, zz_r, q_o, q_rr, q_rz, q_rs, q_zs, p_r, p_o, p_rr, p_rz }
    }
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]
    use super::*;

    const SOILS: [(f64, f64, f64); 4] = [(1e4, 70.0, 5.0), (7.1e6, 13.0, 5e-3), (6e7, 3.0, 1e-4), (2.84e7, 5.0, 0.0)];

    fn size(v: [Complex64; 3]) -> f64 {
        v.iter().map(|c| c.norm_sqr()).sum::<f64>().sqrt()
    }

    #[test]
    fn source_and_observer_may_change_places() {
        for (f, e, s) in SOILS {
            let space = HalfSpace::new(f, e, s).unwrap();
            for (a, b) in [
                ([0.0, 0.0, 0.5], [1.0, 2.0, 3.0]),
                ([0.0, 0.0, -0.5], [0.3, 0.1, -0.2]),
                ([0.0, 0.0, 0.4], [0.5, -0.3, -0.7]),
            ] {
                let (p, q) = ([0.3, -0.8, 1.0], [1.0, 0.4, -0.6]);
                let dot = |field: DipoleField, m: [f64; 3]| {
                    (0..3).map(|i| field.electric_v_per_m[i] * m[i]).sum::<Complex64>()
                };
                let there = dot(space.element_field(p, a, b), q);
                let back = dot(space.element_field(q, b, a), p);
                assert!((there - back).norm() < 1e-9 * there.norm(), "{f} {a:?} {b:?}: {there} {back}");
            }
        }
    }

    #[test]
    fn tangential_fields_and_normal_current_are_continuous_at_the_surface() {
        for (f, e, s) in SOILS {
            let space = HalfSpace::new(f, e, s).unwrap();
            for source in [[0.0, 0.0, 0.3], [0.0, 0.0, -0.3]] {
                let at = |z: f64| space.element_field([0.5, 0.2, 1.0], source, [0.4, 0.7, z]);
                let (above, below) = (at(0.0), at(-1e-13));
                let (e0, e1) = (above.electric_v_per_m, below.electric_v_per_m);
                let scale = 1e-8 * size(e0);
                assert!(
                    (e0[0] - e1[0]).norm() < scale && (e0[1] - e1[1]).norm() < scale,
                    "{f} {source:?} {e0:?} {e1:?}"
                );
                // The normal field in sea water is so small that its digits end nine places under the others'.
                let room = scale + 1e-12 * space.index_squared().norm() * size(e0);
                assert!((e0[2] - e1[2] * space.index_squared()).norm() < room, "{f} {source:?} {e0:?} {e1:?}");
                let (h0, h1) = (above.magnetic_a_per_m, below.magnetic_a_per_m);
                assert!((0..3).all(|i| (h0[i] - h1[i]).norm() < 1e-8 * size(h0)), "{f} {source:?} {h0:?} {h1:?}");
            }
        }
    }

    #[test]
    fn magnetic_field_is_the_curl_of_the_electric_one() {
        let space = HalfSpace::new(7.1e6, 13.0, 5e-3).unwrap();
        for (source, at) in [
            ([0.0, 0.0, 1.5], [2.0, 1.0, 0.7]),
            ([0.0, 0.0, -0.5], [0.6, 0.4, 1.0]),
            ([0.0, 0.0, -0.5], [0.6, 0.4, -1.0]),
        ] {
            let moment = [0.4, -0.7, 1.0];
            let step = 1e-3;
            let slope = |axis: usize| {
                let shifted = |by: f64| {
                    let mut at: [f64; 3] = at;
                    at[axis] += by;
                    space.element_field(moment, source, at).electric_v_per_m
                };
                let (ahead, behind) = (shifted(step), shifted(-step));
                [0, 1, 2].map(|i| (ahead[i] - behind[i]) / (2.0 * step))
            };
            let d = [slope(0), slope(1), slope(2)];
            let curl = [d[1][2] - d[2][1], d[2][0] - d[0][2], d[0][1] - d[1][0]];
            let h = space.element_field(moment, source, at).magnetic_a_per_m;
            for i in 0..3 {
                let wanted = curl[i] / (-Complex64::i() * space.omega() * MU_0_H_PER_M);
                assert!((h[i] - wanted).norm() < 1e-4 * size(h), "{source:?} {i}: {} {wanted}", h[i]);
            }
        }
    }

    #[test]
    fn a_very_good_conductor_mirrors_perfectly() {
        let space = HalfSpace::new(7.1e6, 1.0, 1e7).unwrap();
        let (near, far) = (space.potentials(1.0, 0.5, 0.7), f64::hypot(1.0, 1.2));
        let wave = |r: f64| (-Complex64::i() * space.k0_per_m() * r).exp() / r;
        let (direct, image) = (wave(f64::hypot(1.0, 0.2)), wave(far));
        assert!((near.xx - (direct - image)).norm() < 1e-4);
        assert!((near.phi - (direct - image)).norm() < 1e-4);
        assert!((near.zz - (direct + image)).norm() < 1e-4);
    }
}
