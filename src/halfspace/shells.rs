//! Shells of doubling distance, each one or two rectangles of (ρ, ζ) covered with short polynomials.

use super::leaves::Leaves;
use super::panels::Fineness;
use super::patch::{Patch, Rectangle};
use super::soil::{HalfSpace, Region};
use super::spectral_sum::LANES;
use rayon::prelude::*;

/// The box of distances that a table covers, metres: horizontal ones and sums of both heights' magnitudes.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Distances {
    /// Smallest and largest horizontal distance.
    pub rho_m: (f64, f64),
    /// Smallest and largest sum of heights.
    pub zeta_m: (f64, f64),
}

/// How functions are sampled on a rectangle.
pub(super) type Sampler<'a> = dyn Fn(Rectangle, Fineness) -> Patch + Sync + 'a;

/// Six real functions of (ρ, ζ), each to an error of the tolerance over R'.
#[derive(Debug, Clone)]
pub(super) struct Shells {
    distances: Distances,
    tolerance: f64,
    first_shell: i64,
    /// Makes the largest distance fill its shell.
    scale_per_m: f64,
    least_m: f64,
    /// Below the surface nothing is left deeper than this.
    deepest_m: f64,
    patches: Vec<Option<Block>>,
}

/// A rectangle of a shell: equal pieces, each sampled by itself, so that none spans too many wavelengths.
#[derive(Debug, Clone)]
struct Block {
    low: (f64, f64),
    pieces_per_m: (f64, f64),
    pieces: (usize, usize),
    leaves: Vec<Leaves>,
}

impl Block {
    #[inline(always)]
    fn at(&self, rho_m: f64, zeta_m: f64) -> &Leaves {
        if self.leaves.len() == 1 {
            return &self.leaves[0];
        }
        let i = ((rho_m - self.low.0) * self.pieces_per_m.0) as usize;
        let j = ((zeta_m - self.low.1) * self.pieces_per_m.1) as usize;
        &self.leaves[i.min(self.pieces.0 - 1) * self.pieces.1 + j.min(self.pieces.1 - 1)]
    }
}

/// Most Chebyshev points each way on one piece, as first guessed.
const MOST_POINTS: usize = 44;

/// A shell's number is the binary exponent of the larger of ρ and ζ, suitably scaled.
#[inline(always)]
fn shell_of(size: f64) -> i64 {
    (size.to_bits() >> 52) as i64 - 1023
}

impl Shells {
    /// Samples and cuts every rectangle. With `whole` the integrals under `sample` are of the order of 1/R' everywhere,
    /// else of k₁ where that is less.
    pub(super) fn build(
        space: &HalfSpace,
        region: Region,
        distances: Distances,
        tolerance: f64,
        whole: bool,
        sample: &Sampler<'_>,
    ) -> Self {
        let k1 = space.k1_per_m().norm();
        let corner = distances.rho_m.0.max(distances.zeta_m.0);
        // Nearer than this the remainders, of the order of k₁, are nothing beside tolerance/R'.
        let least_m = corner.max(1e-3 * tolerance / k1);
        let (reduced, deepest_m) = audible(space, region, distances, tolerance);
        let largest = reduced.rho_m.1.max(distances.zeta_m.1).max(2.0 * least_m);
        let scale_per_m = (1.0 - 1e-9) / largest;
        let first_shell = shell_of(least_m * scale_per_m);
        let patches = (first_shell..0)
            .flat_map(|shell| {
                let near = 2f64.powi(shell as i32) / scale_per_m;
                [near_surface(near, reduced), near_axis(near, reduced)]
            })
            .collect::<Vec<_>>()
            .into_par_iter()
            .map(|sides| sides.map(|sides| Task { space, region, tolerance, whole }.block(sides, sample)))
            .collect();
        Self { distances, tolerance, first_shell, scale_per_m, least_m, deepest_m, patches }
    }

    /// The box.
    pub(super) fn distances(&self) -> Distances {
        self.distances
    }

    /// The error times R'.
    pub(super) fn tolerance(&self) -> f64 {
        self.tolerance
    }

    /// How many polynomials there are.
    pub(super) fn size(&self) -> usize {
        self.patches.iter().flatten().flat_map(|block| &block.leaves).map(|piece| piece.leaves.len()).sum()
    }

    #[inline(always)]
    fn leaves(&self, rho_m: f64, zeta_m: f64) -> Option<(&Leaves, f64, f64)> {
        let (mut rho, mut zeta) = (rho_m, zeta_m);
        let mut size = rho.max(zeta);
        if size < self.least_m {
            let stretch = if size > 0.0 { self.least_m / size } else { 0.0 };
            (rho, zeta, size) = (rho * stretch, zeta * stretch, self.least_m);
        }
        let shell = shell_of(size * self.scale_per_m);
        let near = f64::from_bits(((shell + 1023) as u64) << 52);
        let place = 2 * (shell - self.first_shell) as usize + usize::from(zeta * self.scale_per_m >= near);
        let block = self.patches.get(place)?.as_ref()?;
        (zeta <= self.deepest_m).then(|| (block.at(rho, zeta), rho, zeta))
    }

    /// The functions; zero outside the box where no polynomial is.
    #[inline(always)]
    pub(super) fn eval<const FMA: bool>(&self, rho_m: f64, zeta_m: f64) -> [f64; LANES] {
        match self.leaves(rho_m, zeta_m) {
            Some((leaves, rho, zeta)) => leaves.at(rho, zeta).eval::<FMA>(rho, zeta),
            None => [0.0; LANES],
        }
    }

    /// The functions, their derivatives by ρ and those by ζ.
    pub(super) fn eval_gradient(&self, rho_m: f64, zeta_m: f64) -> [[f64; LANES]; 3] {
        match self.leaves(rho_m, zeta_m) {
            Some((leaves, rho, zeta)) => leaves.at(rho, zeta).eval_gradient(rho, zeta),
            None => [[0.0; LANES]; 3],
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

/// Ranges of ρ and ζ.
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

/// What a rectangle is built for.
#[derive(Clone, Copy)]
struct Task<'a> {
    space: &'a HalfSpace,
    region: Region,
    tolerance: f64,
    whole: bool,
}

impl Task<'_> {
    fn block(&self, (rho, zeta): Sides, sample: &Sampler<'_>) -> Block {
        let (near, far) = (rho.0.hypot(zeta.0), rho.1.hypot(zeta.1));
        let (wide, high) = (rho.1 - rho.0, zeta.1 - zeta.0);
        let guess = self.points(near, far, (wide, high));
        let pieces = (guess.0.div_ceil(MOST_POINTS), guess.1.div_ceil(MOST_POINTS));
        let cut = |low: f64, width: f64, i: usize, of: usize| {
            (low + width * i as f64 / of as f64, low + width * (i + 1) as f64 / of as f64)
        };
        let leaves = (0..pieces.0)
            .flat_map(|i| (0..pieces.1).map(move |j| (i, j)))
            .map(|(i, j)| self.patch((cut(rho.0, wide, i, pieces.0), cut(zeta.0, high, j, pieces.1)), sample))
            .collect();
        let pieces_per_m = (pieces.0 as f64 / wide, pieces.1 as f64 / high);
        Block { low: (rho.0, zeta.0), pieces_per_m, pieces, leaves }
    }

    fn patch(&self, (rho, zeta): Sides, sample: &Sampler<'_>) -> Leaves {
        let (near, far) = (rho.0.hypot(zeta.0), rho.1.hypot(zeta.1));
        let digits = self.digits(far);
        let fineness = Fineness {
            nodes: match digits {
                d if d > 9.0 => 9,
                d if d > 6.0 => 7,
                _ => 6,
            },
            reach: 1.3,
            radians: 8.0,
            depth: digits + 1.5,
            hankel_from: (0.5 * digits + 1.0).clamp(5.0, 8.0),
        };
        let mut points = self.points(near, far, (rho.1 - rho.0, zeta.1 - zeta.0));
        let allowed = 0.1 * self.tolerance / far;
        loop {
            let patch = sample(Rectangle { rho_m: rho, zeta_m: zeta, points }, fineness);
            let [by_rho, by_zeta, _] = patch.coefficients.tail();
            let settled = (by_rho < allowed || points.0 >= 160, by_zeta < allowed || points.1 >= 160);
            if settled == (true, true) {
                return Leaves::cut(patch, |rho, zeta| 0.8 * self.tolerance / rho.hypot(zeta));
            }
            let more = |tail: f64| (2.0 + (tail / allowed).max(1.0).ln()).min(40.0) as usize;
            points.0 += if settled.0 { 0 } else { more(by_rho) };
            points.1 += if settled.1 { 0 } else { more(by_zeta) };
        }
    }

    /// Natural logarithm of what the integrals must resolve: remainders are of the order of k₁ near the source and
    /// 1/R' far from it.
    fn digits(&self, far: f64) -> f64 {
        let amplitude = if self.whole { 1.0 } else { (self.space.k1_per_m().norm() * far).min(1.0) };
        (amplitude / self.tolerance).max(10.0).ln()
    }

    /// A first guess at the Chebyshev points each way, from the distance of the source and from the wavelengths.
    fn points(&self, near: f64, far: f64, (wide, high): (f64, f64)) -> (usize, usize) {
        let k1 = self.space.k1_per_m();
        let digits = self.digits(far);
        let speed = if -k1.im * near > 6.0 { self.space.k0_per_m() } else { k1.re };
        let depth_speed = if self.region == Region::Below { k1.re } else { speed };
        let guess = |width: f64, speed: f64| {
            let half = 0.5 * width / (0.75 * near);
            let rate = (half.recip() + (half.recip().powi(2) + 1.0).sqrt()).ln();
            (4.0 + 0.42 * digits / rate.max(0.6) + 0.4 * speed * width).ceil().clamp(5.0, 1e4) as usize
        };
        (guess(wide, speed), guess(high, depth_speed))
    }
}
