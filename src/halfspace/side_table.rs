//! Tables of the remainders with both points on one side of the surface, in ρ and ζ = |z| + |z'|.

use super::panels::Fineness;
use super::patch::{Patch, Rectangle};
use super::shells::{Distances, Shells};
use super::soil::{HalfSpace, Region};
use num_complex::Complex64;

/// Remainders of one half space with both points above, or both below, over a box of distances.
///
/// Each of the four is in error by at most the tolerance over R' = √(ρ²+ζ²).
#[derive(Debug, Clone)]
pub struct SideTable {
    region: Region,
    shells: Shells,
    zz_from_q: Complex64,
    phi_from_q: f64,
}

impl SideTable {
    /// A table for wires above the surface. `tolerance` is the error times R', 10⁻⁵ by the project's contract.
    #[must_use]
    pub fn above(space: &HalfSpace, distances: Distances, tolerance: f64) -> Self {
        Self::build(space, Region::Above, distances, tolerance)
    }

    /// A table for wires below the surface.
    #[must_use]
    pub fn below(space: &HalfSpace, distances: Distances, tolerance: f64) -> Self {
        Self::build(space, Region::Below, distances, tolerance)
    }

    fn build(space: &HalfSpace, region: Region, distances: Distances, tolerance: f64) -> Self {
        let n2 = space.index_squared();
        let contrast = if region == Region::Below { 1.0 - n2 } else { n2 - 1.0 };
        // K_zz needs (n² − 1) Q, so that is what is held to the tolerance.
        let q_scale = contrast.norm().max(1.0);
        let sample =
            |rectangle: Rectangle, fineness: Fineness| Patch::sample(space, region, rectangle, fineness, q_scale);
        let shells = Shells::build(space, region, distances, tolerance, false, &sample);
        Self { region, shells, zz_from_q: contrast / q_scale, phi_from_q: 1.0 / q_scale }
    }

    /// The side of the surface it is for.
    #[must_use]
    pub fn region(&self) -> Region {
        self.region
    }

    /// The box it covers.
    #[must_use]
    pub fn distances(&self) -> Distances {
        self.shells.distances()
    }

    /// Its error times R'.
    #[must_use]
    pub fn tolerance(&self) -> f64 {
        self.shells.tolerance()
    }

    /// How many polynomials it holds.
    #[must_use]
    pub fn size(&self) -> usize {
        self.shells.size()
    }

    /// True if the pair lies within the box.
    #[must_use]
    pub fn covers(&self, rho_m: f64, zeta_m: f64) -> bool {
        let d = self.distances();
        let within = |x: f64, (low, high): (f64, f64)| x >= low * (1.0 - 1e-12) && x <= high * (1.0 + 1e-12);
        within(rho_m, d.rho_m) && within(zeta_m, d.zeta_m)
    }

    /// The remainders xx, zz, phi, p_rho at (ρ, ζ), metres. Outside the box the value is an extrapolation, or zero.
    #[must_use]
    pub fn eval(&self, rho_m: f64, zeta_m: f64) -> [Complex64; 4] {
        self.eval_inlined::<false>(rho_m, zeta_m)
    }

    /// [`Self::eval`] as a part of work that [`crate::processor`] compiles.
    #[inline(always)]
    pub(crate) fn eval_inlined<const FMA: bool>(&self, rho_m: f64, zeta_m: f64) -> [Complex64; 4] {
        self.four(self.shells.eval::<FMA>(rho_m, zeta_m))
    }

    /// [`Self::eval`] for many pairs; `out` must be as long as the distances.
    pub fn eval_many(&self, rho_m: &[f64], zeta_m: &[f64], out: &mut [[Complex64; 4]]) {
        for ((out, &rho), &zeta) in out.iter_mut().zip(rho_m).zip(zeta_m) {
            *out = self.eval(rho, zeta);
        }
    }

    /// The remainders, their derivatives by ρ and those by ζ (1/m²), for fields near the wires. The derivatives come
    /// from the same polynomials and keep some two digits less.
    #[must_use]
    pub fn eval_gradient(&self, rho_m: f64, zeta_m: f64) -> [[Complex64; 4]; 3] {
        self.shells.eval_gradient(rho_m, zeta_m).map(|v| self.four(v))
    }

    #[inline(always)]
    fn four(&self, v: [f64; 6]) -> [Complex64; 4] {
        let (xx, q, p) = (Complex64::new(v[0], v[1]), Complex64::new(v[2], v[3]), Complex64::new(v[4], v[5]));
        [xx, xx + self.zz_from_q * q, q * self.phi_from_q, p]
    }
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]
    use super::*;

    /// The largest error times R' over a lattice of points spread evenly in log distance and angle.
    fn worst(space: &HalfSpace, table: &SideTable) -> f64 {
        let d = table.distances();
        let side = if table.region() == Region::Below { -1.0 } else { 1.0 };
        let mut worst = 0.0f64;
        let (near, far) = (d.rho_m.0.hypot(d.zeta_m.0), d.rho_m.1.hypot(d.zeta_m.1));
        for i in 0..23 {
            for j in 0..7 {
                let (size, angle) =
                    (near * (far / near).powf((f64::from(i) + 0.37) / 23.0), (f64::from(j) + 0.4) * 0.21);
                let rho = (size * angle.cos()).clamp(d.rho_m.0, d.rho_m.1);
                let zeta = (size * angle.sin()).clamp(d.zeta_m.0, d.zeta_m.1);
                let wanted = space.remainder(rho, side * 0.4 * zeta, side * 0.6 * zeta);
                let got = table.eval(rho, zeta);
                for (a, b) in got.into_iter().zip([wanted.xx, wanted.zz, wanted.phi, wanted.p_rho]) {
                    worst = worst.max((a - b).norm() * rho.hypot(zeta));
                }
            }
        }
        worst
    }

    const SOILS: [(f64, f64, f64); 6] = [
        (1e4, 13.0, 5e-3),
        (1.8e6, 81.0, 5.0),
        (7.1e6, 13.0, 5e-3),
        (2.84e7, 3.0, 1e-4),
        (6e7, 81.0, 5.0),
        (1.41e7, 5.0, 0.0),
    ];

    #[test]
    fn tables_keep_their_tolerance_above_and_below() {
        for (f, e, s) in SOILS {
            let space = HalfSpace::new(f, e, s).unwrap();
            let d = Distances { rho_m: (0.0, 24.0), zeta_m: (0.004, 15.0) };
            let above = worst(&space, &SideTable::above(&space, d, 1e-5));
            assert!(above < 1e-5, "above {f} {e} {s}: {above:e}");
            let d = Distances { rho_m: (0.0, 12.0), zeta_m: (0.01, 3.0) };
            let below = worst(&space, &SideTable::below(&space, d, 1e-5));
            assert!(below < 1e-5, "below {f} {e} {s}: {below:e}");
        }
    }

    #[test]
    fn a_coarser_tolerance_is_really_coarser() {
        let space = HalfSpace::new(7.1e6, 13.0, 5e-3).unwrap();
        let d = Distances { rho_m: (0.0, 24.0), zeta_m: (0.004, 15.0) };
        let coarse = worst(&space, &SideTable::above(&space, d, 1e-2));
        assert!(coarse > 1e-5 && coarse < 1e-2, "{coarse:e}");
    }

    #[test]
    fn flat_and_narrow_boxes_are_served() {
        let space = HalfSpace::new(7.1e6, 13.0, 5e-3).unwrap();
        for d in [
            Distances { rho_m: (0.0, 21.0), zeta_m: (0.02, 0.02) },
            Distances { rho_m: (5.0, 5.0), zeta_m: (1.0, 1.0) },
            Distances { rho_m: (0.0, 0.0), zeta_m: (0.1, 30.0) },
            Distances { rho_m: (0.001, 9.0), zeta_m: (0.0, 0.0) },
        ] {
            let error = worst(&space, &SideTable::above(&space, d, 1e-5));
            assert!(error < 1e-5, "{d:?}: {error:e}");
        }
    }

    #[test]
    fn one_thread_or_many_give_the_same_bits() {
        let space = HalfSpace::new(7.1e6, 13.0, 5e-3).unwrap();
        let d = Distances { rho_m: (0.0, 9.0), zeta_m: (0.02, 5.0) };
        let build = |threads| {
            let pool = rayon::ThreadPoolBuilder::new().num_threads(threads).build().unwrap();
            let table = pool.install(|| SideTable::above(&space, d, 1e-5));
            (0..200).map(|i| table.eval(0.045 * f64::from(i), 0.02 + 0.02 * f64::from(i))).collect::<Vec<_>>()
        };
        assert_eq!(build(1), build(3));
    }

    #[test]
    fn gradients_agree_with_differences() {
        let space = HalfSpace::new(7.1e6, 13.0, 5e-3).unwrap();
        let table = SideTable::above(&space, Distances { rho_m: (0.0, 24.0), zeta_m: (0.01, 15.0) }, 1e-5);
        for (rho, zeta) in [(0.03, 0.05), (1.0, 0.2), (5.0, 9.0), (19.0, 0.1)] {
            let h = 1e-3 * zeta;
            let [_, by_rho, by_zeta] = table.eval_gradient(rho, zeta);
            let all = |p: crate::halfspace::Potentials| [p.xx, p.zz, p.phi, p.p_rho];
            let at = |rho: f64, zeta: f64| all(space.remainder(rho, 0.5 * zeta, 0.5 * zeta));
            let far = rho.hypot(zeta);
            for i in 0..4 {
                let wanted = (at(rho + h, zeta)[i] - at(rho - h, zeta)[i]) / (2.0 * h);
                assert!((by_rho[i] - wanted).norm() * far * far < 2e-3, "{rho} {zeta} {i} {} {wanted}", by_rho[i]);
                let wanted = (at(rho, zeta + h)[i] - at(rho, zeta - h)[i]) / (2.0 * h);
                assert!((by_zeta[i] - wanted).norm() * far * far < 2e-3, "{rho} {zeta} {i} {} {wanted}", by_zeta[i]);
            }
        }
    }
}
