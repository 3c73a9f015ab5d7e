//! Direct evaluation of the potentials, whole or without their closed-form parts.

use super::soil::{HalfSpace, Region, exp_less_one};
use super::spectrum::{Pair, Weights};
use num_complex::Complex64;

/// The four potentials of a pair of points, in the normalisation of the module head, 1/m.
///
/// K_zx = `p_rho` cos φ and K_zy = `p_rho` sin φ (z component of the vector potential of a horizontal current),
/// K_xz = −`p_rho` cos φ and K_yz = −`p_rho` sin φ (horizontal component of that of a vertical current), φ being the
/// direction from source to observer.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Potentials {
    /// K_xx = K_yy.
    pub xx: Complex64,
    /// K_zz.
    pub zz: Complex64,
    /// K_Φ.
    pub phi: Complex64,
    /// ∂P/∂ρ.
    pub p_rho: Complex64,
}

/// Constant coefficients of the closed-form parts.
///
/// Both points in one medium of wavenumber k, with R the distance and R' that to the mirror point:
/// `direct` × e^{−jkR}/R + `image` × e^{−jkR'}/R', except that `p_rho` has no direct part and its image is
/// `image.p_rho` × ρ/(R'(R'+ζ)) × e^{−jkR'}. Across the surface there is no mirror: `direct` is zero and `image`
/// stands before e^{−jk₀R}/R, R = √(ρ²+(|z|+|z'|)²) being the distance itself.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct ImageCoefficients {
    /// Wavenumber in the exponents, 1/m.
    pub wavenumber_per_m: Complex64,
    /// Before e^{−jkR}/R.
    pub direct: Potentials,
    /// Before e^{−jkR'}/R' or its relative.
    pub image: Potentials,
}

impl HalfSpace {
    /// The coefficients of the closed-form parts in one region.
    #[must_use]
    pub fn image_coefficients(&self, region: Region) -> ImageCoefficients {
        let n2 = self.index_squared();
        let (zero, one) = (Complex64::new(0.0, 0.0), Complex64::new(1.0, 0.0));
        let static_q = 2.0 / (n2 + 1.0);
        let slope = (n2 - 1.0) / (n2 + 1.0);
        let direct = |phi| Potentials { xx: one, zz: one, phi, p_rho: zero };
        let (direct, image) = match region {
            Region::Above => (direct(one), Potentials { xx: zero, zz: 2.0 * slope, phi: -slope, p_rho: -slope }),
            Region::Below => {
                (direct(1.0 / n2), Potentials { xx: zero, zz: -2.0 * slope, phi: slope / n2, p_rho: -slope })
            }
            Region::Across => {
                let none = Potentials { xx: zero, zz: zero, phi: zero, p_rho: zero };
                (none, Potentials { xx: one, zz: one, phi: static_q, p_rho: -slope })
            }
        };
        ImageCoefficients { wavenumber_per_m: self.wavenumber_per_m(region), direct, image }
    }

    /// The potentials less all closed-form parts of [`Self::image_coefficients`]: bounded as R' → 0.
    ///
    /// `rho_m` is the horizontal distance, heights are above the surface, all in metres. Both heights at 0 and no
    /// distance gives values that are not finite.
    #[must_use]
    pub fn remainder(&self, rho_m: f64, z_m: f64, z_source_m: f64) -> Potentials {
        let pair = Pair::new(rho_m, z_m, z_source_m);
        let weights = Weights::new(self, pair.region);
        let [h, q, p] = if pair.region == Region::Across {
            pair.integrate(self, |s, b0, b1| {
                let [h, q, p] = weights.reduced_across(s, pair.up_m, pair.down_m);
                [h * s.lambda * b0, q * s.lambda * b0, -p * b1]
            })
        } else {
            pair.integrate(self, |s, b0, b1| {
                let decay = pair.decay(s);
                let [h, q, p] = weights.reduced(s);
                [h * decay * s.lambda * b0, q * decay * s.lambda * b0, -p * decay * b1]
            })
        };
        let p_rho = p - weights.slope * tilt(self.wavenumber_per_m(pair.region), pair.rho_m, pair.zeta_m());
        self.complete(pair.region, [h, q, p_rho])
    }

    /// The whole potentials at `z_m` of a source at `z_source_m`, `rho_m` apart horizontally, metres.
    ///
    /// Accurate to better than 1e-6 of the larger of the value and 10⁻³/R for heights −3 to 60 m, distances 0.4 mm to
    /// 300 m, 10 kHz to 60 MHz. Not finite where the points coincide.
    #[must_use]
    pub fn potentials(&self, rho_m: f64, z_m: f64, z_source_m: f64) -> Potentials {
        let pair = Pair::new(rho_m, z_m, z_source_m);
        let rest = self.remainder(rho_m, z_m, z_source_m);
        let parts = self.image_coefficients(pair.region);
        let wave = |r: f64| (-Complex64::i() * parts.wavenumber_per_m * r).exp() / r;
        let region_has_mirror = pair.region != Region::Across;
        let far = pair.mirror_m();
        let (direct, image) = (wave(rho_m.hypot(z_m - z_source_m)), wave(far));
        let tilted = image * pair.rho_m / (far + pair.zeta_m());
        let join = |d: Complex64, i: Complex64, r: Complex64| {
            if region_has_mirror { d * direct + i * image + r } else { i * image + r }
        };
        Potentials {
            xx: join(parts.direct.xx, parts.image.xx, rest.xx),
            zz: join(parts.direct.zz, parts.image.zz, rest.zz),
            phi: join(parts.direct.phi, parts.image.phi, rest.phi),
            p_rho: parts.image.p_rho * tilted + rest.p_rho,
        }
    }

    /// From the remainders of H, Q and ∂P/∂ρ to those of the four potentials.
    pub(super) fn complete(&self, region: Region, [h, q, p_rho]: [Complex64; 3]) -> Potentials {
        let contrast = self.index_squared() - 1.0;
        let zz = match region {
            Region::Above => h + contrast * q,
            Region::Below => h - contrast * q,
            Region::Across => h,
        };
        Potentials { xx: h, zz, phi: q, p_rho }
    }
}

/// (e^{−jkζ} − e^{−jkR'})/ρ: what ∫ e^{−uζ} J₁(λρ) dλ = (e^{−jkζ} − e^{−jkR'}ζ/R')/ρ has beyond
/// ρ/(R'(R'+ζ)) e^{−jkR'}.
pub(super) fn tilt(k: Complex64, rho_m: f64, zeta_m: f64) -> Complex64 {
    if rho_m == 0.0 {
        return Complex64::new(0.0, 0.0);
    }
    let longer = rho_m * rho_m / (rho_m.hypot(zeta_m) + zeta_m);
    let j = Complex64::i();
    -(-j * k * zeta_m).exp() * exp_less_one(-j * k * longer) / rho_m
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]
    use super::*;

    #[test]
    fn surface_value_of_h_is_known_in_closed_form() {
        // z = z' = 0: H = 2/(k₁²−k₀²) (1/ρ) d/dρ (g₀ − g₁).
        for (f, e, s) in [(1e4, 81.0, 5.0), (7e6, 13.0, 5e-3), (6e7, 3.0, 0.0), (6e7, 3.0, 1e-4), (3e6, 5.0, 1e-3)] {
            let space = HalfSpace::new(f, e, s).unwrap();
            for rho in [1e-2, 0.3, 5.0, 300.0] {
                let slope = |k: Complex64| {
                    let jkr = Complex64::i() * k * rho;
                    -(1.0 + jkr) * (-jkr).exp() / (rho * rho * rho)
                };
                let (k0, k1) = (Complex64::new(space.k0_per_m(), 0.0), space.k1_per_m());
                let wanted = 2.0 / (k1 * k1 - k0 * k0) * (slope(k0) - slope(k1));
                let got = space.potentials(rho, 0.0, 0.0).xx;
                let room = 1e-8 / rho + 1e-13 / (rho * rho * rho * (k1 * k1 - k0 * k0).norm());
                assert!((got - wanted).norm() < room, "{f} {e} {s} {rho}: {got} {wanted}");
            }
        }
    }

    #[test]
    fn no_contrast_leaves_nothing() {
        let space = HalfSpace::new(7e6, 1.0, 0.0).unwrap();
        for (z, zs) in [(1.0, 2.0), (-1.0, -2.0)] {
            let rest = space.remainder(3.0, z, zs);
            assert!(rest.xx.norm() + rest.zz.norm() + rest.phi.norm() + rest.p_rho.norm() < 1e-14, "{rest:?}");
        }
        let whole = space.potentials(3.0, 1.0, -2.0);
        let r = 18f64.sqrt();
        let free = (-Complex64::i() * space.k0_per_m() * r).exp() / r;
        assert!((whole.xx - free).norm() < 1e-12 && (whole.phi - free).norm() < 1e-12 && whole.p_rho.norm() < 1e-13);
    }

    #[test]
    fn reduced_and_unreduced_integrals_agree() {
        for (f, e, s) in [(1e4, 81.0, 5.0), (7e6, 13.0, 5e-3), (6e7, 3.0, 1e-4)] {
            let space = HalfSpace::new(f, e, s).unwrap();
            for (rho, z, zs) in
                [(0.01f64, 0.002f64, 0.003f64), (3.0, 0.01, 0.2), (0.4, 9.0, 20.0), (2.0, -0.1, -1.0), (0.5, 1.0, -0.2)]
            {
                let far = f64::hypot(rho, z.abs() + zs.abs());
                let whole = space.potentials(rho, z, zs);
                let [xx, zz, p_rho] = space.unreduced(rho, z, zs);
                for (a, b) in [(whole.xx, xx), (whole.zz, zz), (whole.p_rho, p_rho)] {
                    assert!((a - b).norm() < 1e-9 / far, "{f} {e} {s} {rho} {z} {zs}: {a} {b}");
                }
            }
        }
    }
}
