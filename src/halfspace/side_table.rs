//! Tables of the remainders with both points on one side of the surface: shells of doubling distance, each a patch or
//! two of short polynomials in ρ and ζ = |z| + |z'|.

use super::leaves::Leaves;
use super::panels::Fineness;
use super::patch::{Patch, Rectangle};
use super::soil::{HalfSpace, Region};
use num_complex::Complex64;
use rayon::prelude::*;

/// The box of distances that a table covers, metres: horizontal ones and sums of both heights' magnitudes.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Distances {
    /// Smallest and largest horizontal distance.
    pub rho_m: (f64, f64),
    /// Smallest and largest sum of heights.
    pub zeta_m: (f64, f64),
}

/// Remainders of one half space with both points above, or both below, over a box of distances.
///
/// Between the shells' limits the error is at most the tolerance divided by R' = √(ρ²+ζ²).
#[derive(Debug, Clone)]
pub struct SideTable {
    region: Region,
    distances: Distances,
    tolerance: f64,
    first_shell: i64,
    /// Makes the largest distance fill its shell.
    scale_per_m: f64,
    least_m: f64,
    /// Below the surface nothing is left deeper than this.
    deepest_m: f64,
    patches: Vec<Option<Leaves>>,
    zz_from_q: Complex64,
    phi_from_q: f64,
}

/// A shell's number is the binary exponent of the larger of ρ and ζ, suitably scaled.
#[inline]
fn shell_of(size: f64) -> i64 {
    (size.to_bits() >> 52) as i64 - 1023
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
        let q_scale = contrast.norm().max(1.0);
        let k1 = space.k1_per_m().norm();
        let corner = distances.rho_m.0.max(distances.zeta_m.0);
        // Nearer than this the remainders, of the order of k₁, are nothing beside tolerance/R'.
        let least_m = corner.max(1e-3 * tolerance / k1);
        let (reduced, deepest_m) = audible(space, region, distances, tolerance);
        let largest = reduced.rho_m.1.max(distances.zeta_m.1).max(2.0 * least_m);
        let scale_per_m = (1.0 - 1e-9) / largest;
        let first_shell = shell_of(least_m * scale_per_m);
        let shells: Vec<i64> = (first_shell..0).collect();
        let patches = shells
            .par_iter()
            .flat_map_iter(|&shell| {
                let near = 2f64.powi(shell as i32) / scale_per_m;
                [near_surface(near, reduced), near_axis(near, reduced)]
            })
            .map(|rectangle| rectangle.map(|(rho, zeta)| build_patch(space, region, (rho, zeta), tolerance, q_scale)))
            .collect();
        Self {
            region,
            distances,
            tolerance,
            first_shell,
            scale_per_m,
            least_m,
            deepest_m,
            patches,
            zz_from_q: contrast / q_scale,
            phi_from_q: 1.0 / q_scale,
        }
    }

    /// The side of the surface it is for.
    #[must_use]
    pub fn region(&self) -> Region {
        self.region
    }

    /// The box it covers.
    #[must_use]
    pub fn distances(&self) -> Distances {
        self.distances
    }

    /// Its error times R'.
    #[must_use]
    pub fn tolerance(&self) -> f64 {
        self.tolerance
    }

    /// How many polynomials it holds.
    #[must_use]
    pub fn size(&self) -> usize {
        self.patches.iter().flatten().map(|p| p.leaves.len()).sum()
    }

    /// True if the pair lies within the box.
    #[must_use]
    pub fn covers(&self, rho_m: f64, zeta_m: f64) -> bool {
        let within = |x: f64, (low, high): (f64, f64)| x >= low * (1.0 - 1e-12) && x <= high * (1.0 + 1e-12);
        within(rho_m, self.distances.rho_m) && within(zeta_m, self.distances.zeta_m)
    }

    /// The remainders xx, zz, phi, p_rho at (ρ, ζ), metres. Outside the box the value is an extrapolation, or zero.
    #[inline]
    #[must_use]
    pub fn eval(&self, rho_m: f64, zeta_m: f64) -> [Complex64; 4] {
        let (mut rho, mut zeta) = (rho_m, zeta_m);
        let mut size = rho.max(zeta);
        if size < self.least_m {
            let stretch = if size > 0.0 { self.least_m / size } else { 0.0 };
            (rho, zeta, size) = (rho * stretch, zeta * stretch, self.least_m);
        }
        let shell = (shell_of(size * self.scale_per_m) - self.first_shell) as usize;
        let near = f64::from_bits(((shell as i64 + self.first_shell + 1023) as u64) << 52);
        let place = 2 * shell + usize::from(zeta * self.scale_per_m >= near);
        let Some(Some(patch)) = self.patches.get(place).filter(|_| zeta <= self.deepest_m) else {
            return [Complex64::new(0.0, 0.0); 4];
        };
        let v = patch.at(rho, zeta).eval(rho, zeta);
        let (xx, q, p) = (Complex64::new(v[0], v[1]), Complex64::new(v[2], v[3]), Complex64::new(v[4], v[5]));
        [xx, xx + self.zz_from_q * q, q * self.phi_from_q, p]
    }

    /// [`Self::eval`] for many pairs; `out` must be as long as the distances.
    pub fn eval_many(&self, rho_m: &[f64], zeta_m: &[f64], out: &mut [[Complex64; 4]]) {
        for ((out, &rho), &zeta) in out.iter_mut().zip(rho_m).zip(zeta_m) {
            *out = self.eval(rho, zeta);
        }
    }
}

/// The part of the box where the soil's own loss has left anything, and the depth where it ends.
fn audible(space: &HalfSpace, region: Region, d: Distances, tolerance: f64) -> (Distances, f64) {
    let fall = -space.k1_per_m().im;
    if region != Region::Below || fall <= 0.0 {
        return (d, f64::INFINITY);
    }
    let deepest_m = ((1.0 / tolerance).max(1.0).ln() + 3.0) / fall;
    let zeta_m = (d.zeta_m.0, d.zeta_m.1.min(deepest_m).max(d.zeta_m.0));
    (Distances { rho_m: d.rho_m, zeta_m }, deepest_m)
}

type Sides = ((f64, f64), (f64, f64));

/// ρ from `near` to twice that, ζ up to `near`, cut to the box.
fn near_surface(near: f64, d: Distances) -> Option<Sides> {
    crop(((near, 2.0 * near), (0.0, near)), d)
}

/// ζ from `near` to twice that, ρ up to twice `near`, cut to the box.
fn near_axis(near: f64, d: Distances) -> Option<Sides> {
    crop(((0.0, 2.0 * near), (near, 2.0 * near)), d)
}

fn crop((rho, zeta): Sides, d: Distances) -> Option<Sides> {
    let side = |(low, high): (f64, f64), (least, most): (f64, f64)| {
        let (low_in, high_in) = (low.max(least), high.min(most));
        // A box with no width still needs a rectangle about it.
        let least_width = 1e-3 * high;
        if high_in < low_in { None } else { Some((low_in, high_in.max(low_in + least_width))) }
    };
    Some((side(rho, d.rho_m)?, side(zeta, d.zeta_m)?))
}

fn build_patch(space: &HalfSpace, region: Region, (rho, zeta): Sides, tolerance: f64, q_scale: f64) -> Leaves {
    let far = rho.1.hypot(zeta.1);
    let near = rho.0.hypot(zeta.0);
    let k1 = space.k1_per_m();
    // The remainders are of the order of k₁ near the source and 1/R' far from it.
    let amplitude = (k1.norm() * far).min(1.0);
    let digits = (amplitude / tolerance).max(10.0).ln();
    let fineness = Fineness {
        nodes: if digits > 9.0 {
            9
        } else if digits > 6.0 {
            7
        } else {
            6
        },
        reach: 1.3,
        radians: 8.0,
        depth: digits + 1.5,
        hankel_from: (0.5 * digits + 1.0).clamp(5.0, 8.0),
    };
    let speed = if -k1.im * near > 6.0 { space.k0_per_m() } else { k1.re };
    let depth_speed = if region == Region::Below { k1.re } else { speed };
    let points = |width: f64, singular: f64, speed: f64| -> usize {
        let half = 0.5 * width / singular;
        let rate = (half.recip() + (half.recip().powi(2) + 1.0).sqrt()).ln();
        (4.0 + 0.42 * digits / rate.max(0.6) + 0.4 * speed * width).ceil().clamp(5.0, 96.0) as usize
    };
    let mut count = (points(rho.1 - rho.0, 0.75 * near, speed), points(zeta.1 - zeta.0, 0.75 * near, depth_speed));
    let allowed = 0.1 * tolerance / far;
    loop {
        let rectangle = Rectangle { rho_m: rho, zeta_m: zeta, points: count };
        let patch = Patch::sample(space, region, rectangle, fineness, q_scale);
        let (by_rho, by_zeta) = patch.tail();
        let settled = (by_rho < allowed || count.0 >= 160, by_zeta < allowed || count.1 >= 160);
        if settled == (true, true) {
            return Leaves::cut(&patch, |rho, zeta| 0.8 * tolerance / rho.hypot(zeta));
        }
        let more = |tail: f64| (2.0 + (tail / allowed).max(1.0).ln()).min(40.0) as usize;
        count.0 += if settled.0 { 0 } else { more(by_rho) };
        count.1 += if settled.1 { 0 } else { more(by_zeta) };
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
}
