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
    least_m: f64,
    patches: Vec<Option<Leaves>>,
    zz_from_q: Complex64,
    phi_from_q: f64,
}

/// A shell's number is the binary exponent of the larger of ρ and ζ.
#[inline]
fn shell_of(size_m: f64) -> i64 {
    (size_m.to_bits() >> 52) as i64 - 1023
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
        let largest = distances.rho_m.1.max(distances.zeta_m.1).max(2.0 * least_m);
        let first_shell = shell_of(least_m);
        let shells: Vec<i64> = (first_shell..=shell_of(largest)).collect();
        let patches = shells
            .par_iter()
            .flat_map_iter(|&shell| {
                let near = 2f64.powi(shell as i32);
                [near_surface(near, distances), near_axis(near, distances)]
            })
            .map(|rectangle| rectangle.map(|(rho, zeta)| build_patch(space, region, (rho, zeta), tolerance, q_scale)))
            .collect();
        Self {
            region,
            distances,
            tolerance,
            first_shell,
            least_m,
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
        let shell = (shell_of(size) - self.first_shell) as usize;
        let near = f64::from_bits(((shell as i64 + self.first_shell + 1023) as u64) << 52);
        let place = 2 * shell + usize::from(zeta >= near);
        let Some(Some(patch)) = self.patches.get(place) else {
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
    let digits = (amplitude / tolerance).max(10.0).ln() + 1.5;
    let fineness = Fineness {
        nodes: if digits > 9.0 { 10 } else if digits > 6.0 { 8 } else { 6 },
        reach: 1.0,
        radians: 6.0,
        depth: digits + 1.0,
        hankel_from: (0.5 * digits).clamp(4.0, 8.0),
    };
    let speed = if -k1.im * near > 6.0 { space.k0_per_m() } else { k1.re };
    let points = |width: f64, singular: f64| -> usize {
        let half = 0.5 * width / singular;
        let rate = (half.recip() + (half.recip().powi(2) + 1.0).sqrt()).ln();
        (3.0 + digits / rate.max(0.6) + 0.6 * speed * width).ceil().clamp(5.0, 96.0) as usize
    };
    let mut count = (points(rho.1 - rho.0, 0.75 * near), points(zeta.1 - zeta.0, 0.75 * near));
    let allowed = 0.2 * tolerance / far;
    loop {
        let rectangle = Rectangle { rho_m: rho, zeta_m: zeta, points: count };
        let patch = Patch::sample(space, region, rectangle, fineness, q_scale);
        let (by_rho, by_zeta) = patch.tail();
        let settled = (by_rho < allowed || count.0 >= 160, by_zeta < allowed || count.1 >= 160);
        if settled == (true, true) {
            return Leaves::cut(&patch, |rho, zeta| 0.6 * tolerance / rho.hypot(zeta));
        }
        count.0 = if settled.0 { count.0 } else { count.0 * 3 / 2 };
        count.1 = if settled.1 { count.1 } else { count.1 * 3 / 2 };
    }
}
