//! Tables of the remainders for pairs across the surface, in horizontal distance, height and depth: shells of doubling
//! distance, each up to three boxes of short polynomials.

use super::across_leaves::{AcrossLeaves, Sides};
use super::chebyshev::spread;
use super::panels::Fineness;
use super::potentials::tilt;
use super::rule::{Node, Reach};
use super::soil::{HalfSpace, Region};
use super::spectral_sum::{LANES, SpectralSum};
use super::spectrum::{Spectral, Weights};
use super::tensor::Tensor;
use crate::processor::{Vectorised, falls, mul_add, widest};
use num_complex::Complex64;
use rayon::prelude::*;

/// The box that an [`AcrossTable`] covers, metres.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct AcrossDistances {
    /// Smallest and largest horizontal distance.
    pub rho_m: (f64, f64),
    /// Lowest and greatest height of the point above.
    pub height_m: (f64, f64),
    /// Least and greatest depth of the point below, counted downward.
    pub depth_m: (f64, f64),
}

/// Remainders of pairs across the surface of one half space: error at most the tolerance over the distance.
#[derive(Debug, Clone)]
pub struct AcrossTable {
    distances: AcrossDistances,
    tolerance: f64,
    first_shell: i64,
    scale_per_m: f64,
    least_m: f64,
    boxes: Vec<Option<AcrossLeaves>>,
}

#[inline]
fn shell_of(size: f64) -> i64 {
    (size.to_bits() >> 52) as i64 - 1023
}

impl AcrossTable {
    /// A table to an error of `tolerance` over the distance, 10⁻⁵ by the project's contract.
    #[must_use]
    pub fn build(space: &HalfSpace, distances: AcrossDistances, tolerance: f64) -> Self {
        let sides = [distances.rho_m, distances.height_m, distances.depth_m];
        let corner = sides.iter().fold(0.0f64, |a, side| a.max(side.0));
        let least_m = corner.max(1e-3 * tolerance / space.k1_per_m().norm());
        let largest = sides.iter().fold(2.0 * least_m, |a, side| a.max(side.1));
        let scale_per_m = (1.0 - 1e-9) / largest;
        let first_shell = shell_of(least_m * scale_per_m);
        let boxes = (first_shell..0)
            .flat_map(|shell| shell_boxes(2f64.powi(shell as i32) / scale_per_m))
            .map(|ranges| crop(ranges, sides))
            .collect::<Vec<_>>()
            .into_par_iter()
            .map(|sides| sides.map(|sides| build_box(space, sides, tolerance)))
            .collect();
        Self { distances, tolerance, first_shell, scale_per_m, least_m, boxes }
    }

    /// The box it covers.
    #[must_use]
    pub fn distances(&self) -> AcrossDistances {
        self.distances
    }

    /// Its error times the distance.
    #[must_use]
    pub fn tolerance(&self) -> f64 {
        self.tolerance
    }

    /// How many polynomials it holds.
    #[must_use]
    pub fn size(&self) -> usize {
        self.boxes.iter().flatten().map(AcrossLeaves::len).sum()
    }

    /// The remainders xx, zz, phi, p_rho for a point `height_m` above the surface and one `depth_m` below it, whichever
    /// is the source. Outside the box the value is an extrapolation, or zero.
    #[must_use]
    pub fn eval(&self, rho_m: f64, height_m: f64, depth_m: f64) -> [Complex64; 4] {
        let mut at = [rho_m, height_m, depth_m];
        let mut size = at.iter().fold(0.0f64, |a, &b| a.max(b));
        if size < self.least_m {
            let stretch = if size > 0.0 { self.least_m / size } else { 0.0 };
            at = at.map(|x| x * stretch);
            size = self.least_m;
        }
        let shell = shell_of(size * self.scale_per_m);
        let near = f64::from_bits(((shell + 1023) as u64) << 52);
        let kind = if at[1] * self.scale_per_m >= near {
            1
        } else if at[2] * self.scale_per_m >= near {
            2
        } else {
            0
        };
        let Some(Some(leaves)) = self.boxes.get(3 * (shell - self.first_shell) as usize + kind) else {
            return [Complex64::new(0.0, 0.0); 4];
        };
        let v = leaves.eval(at);
        let xx = Complex64::new(v[0], v[1]);
        [xx, xx, Complex64::new(v[2], v[3]), Complex64::new(v[4], v[5])]
    }
}

/// Where the horizontal distance is the largest, the height, the depth.
fn shell_boxes(near: f64) -> [Sides; 3] {
    let (inner, shell, whole) = ((0.0, near), (near, 2.0 * near), (0.0, 2.0 * near));
    [[shell, inner, inner], [whole, shell, whole], [whole, inner, shell]]
}

fn crop(ranges: Sides, limits: Sides) -> Option<Sides> {
    let mut out = ranges;
    for (side, limit) in out.iter_mut().zip(limits) {
        let (low, high) = (side.0.max(limit.0), side.1.min(limit.1));
        if high < low {
            return None;
        }
        // A range of no width still needs a box about it.
        *side = (low, high.max(low + 1e-3 * side.1));
    }
    Some(out)
}

fn build_box(space: &HalfSpace, sides: Sides, tolerance: f64) -> AcrossLeaves {
    let corner = |pick: fn(&(f64, f64)) -> f64| {
        let [rho, height, depth] = [0, 1, 2].map(|axis| pick(&sides[axis]));
        rho.hypot(height + depth)
    };
    let (near, far) = (corner(|s| s.0), corner(|s| s.1));
    let k1 = space.k1_per_m();
    let digits = ((k1.norm() * far).min(1.0) / tolerance).max(10.0).ln();
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
    let air = if -k1.im * near > 6.0 { space.k0_per_m() } else { k1.re };
    let mut count = [0, 1, 2].map(|axis| {
        let width = sides[axis].1 - sides[axis].0;
        let half = 0.5 * width / (0.75 * near);
        let rate = (half.recip() + (half.recip().powi(2) + 1.0).sqrt()).ln();
        let (speed, turns) = if axis == 2 { (k1.norm().min(digits / width), 0.6) } else { (air, 0.45) };
        (4.0 + 0.42 * digits / rate.max(0.6) + turns * speed * width).ceil().clamp(5.0, 60.0) as usize
    });
    let allowed = 0.1 * tolerance / far;
    loop {
        let tensor = sample(space, sides, count, fineness);
        let tail = tensor.tail();
        let settled = [0, 1, 2].map(|axis| tail[axis] < allowed || count[axis] >= 80);
        if settled == [true; 3] {
            let room = |[rho, height, depth]: [f64; 3]| 0.8 * tolerance / rho.hypot(height + depth);
            return AcrossLeaves::cut(sides, tensor, room);
        }
        for axis in 0..3 {
            if !settled[axis] {
                count[axis] += (2.0 + (tail[axis] / allowed).max(1.0).ln()).min(30.0) as usize;
            }
        }
    }
}

/// Chebyshev coefficients of the remainders over one box.
fn sample(space: &HalfSpace, sides: Sides, count: [usize; 3], fineness: Fineness) -> Tensor {
    let [rhos, heights, depths] = [0, 1, 2].map(|axis| spread(sides[axis], count[axis]));
    let weights = Weights::new(space, Region::Across);
    let reach = Reach {
        region: Region::Across,
        rho_m: sides[0],
        up_m: sides[1].1 + sides[2].1,
        down_m: sides[2].1,
        least_m: sides[1].0 + sides[2].0,
        from_k0: false,
    };
    let columns = heights.len() * depths.len();
    let fill = |node: &Node, out: &mut [f64]| {
        let s = Spectral::at(space, node);
        widest(Columns {
            out,
            fronts: fronts(&weights, node, &s),
            u: (s.u0, s.u1),
            heights: &heights,
            depths: &depths,
        });
    };
    let mut data = SpectralSum::new(&rhos, columns, &fill).run(space, reach, fineness);
    let k0 = Complex64::new(space.k0_per_m(), 0.0);
    let lane = rhos.len() * columns;
    for (i, &rho) in rhos.iter().enumerate() {
        for (j, &height) in heights.iter().enumerate() {
            for (k, &depth) in depths.iter().enumerate() {
                let closed = weights.slope * tilt(k0, rho, height + depth);
                let place = i * columns + j * depths.len() + k;
                data[(LANES - 2) * lane + place] -= closed.re;
                data[(LANES - 1) * lane + place] -= closed.im;
            }
        }
    }
    Tensor { size: count, data }.transformed()
}

/// Weighted spectral functions in front of e^{−u₀(z+|z'|)}, and in front of e^{−u₀z−u₁|z'|}.
fn fronts(weights: &Weights, node: &Node, s: &Spectral) -> [[Complex64; 2]; 3] {
    let weight = node.weight * s.lambda;
    let [h, q, p] = weights.reduced(s);
    let (full_h, full_q) = (weight * weights.full_h(s), weight * weights.full_q(s));
    let full_p = -node.weight * (p + weights.slope);
    [[weight * h - full_h, full_h], [weight * q - full_q, full_q], [-node.weight * p - full_p, full_p]]
}

/// The spectral side of one node at every height and depth, as work for the processor.
struct Columns<'a> {
    out: &'a mut [f64],
    fronts: [[Complex64; 2]; 3],
    u: (Complex64, Complex64),
    heights: &'a [f64],
    depths: &'a [f64],
}

/// Most Chebyshev points along one axis, and what is usually enough.
const MOST_SAMPLES: usize = 128;
const FEW_SAMPLES: usize = 24;

impl Vectorised for Columns<'_> {
    type Output = ();

    #[inline(always)]
    fn run<const FMA: bool>(self) {
        if self.heights.len().max(self.depths.len()) <= FEW_SAMPLES {
            self.write::<FEW_SAMPLES, FMA>();
        } else {
            self.write::<MOST_SAMPLES, FMA>();
        }
    }
}

impl Columns<'_> {
    #[inline(always)]
    fn write<const ROOM: usize, const FMA: bool>(self) {
        let (m, n) = (self.heights.len().min(ROOM), self.depths.len().min(ROOM));
        let [mut up_re, mut up_im, mut level_re, mut level_im, mut down_re, mut down_im] = [[0.0; ROOM]; 6];
        falls::<FMA>(self.u.0, &self.heights[..m], &mut up_re[..m], &mut up_im[..m]);
        falls::<FMA>(self.u.0, &self.depths[..n], &mut level_re[..n], &mut level_im[..n]);
        falls::<FMA>(self.u.1, &self.depths[..n], &mut down_re[..n], &mut down_im[..n]);
        for ([near, full], both) in self.fronts.iter().zip(self.out.chunks_exact_mut(2 * m * n)) {
            let (mut deep_re, mut deep_im) = ([0.0; ROOM], [0.0; ROOM]);
            for j in 0..n {
                let re = mul_add::<FMA>(near.re, level_re[j], -near.im * level_im[j]);
                let im = mul_add::<FMA>(near.re, level_im[j], near.im * level_re[j]);
                deep_re[j] = mul_add::<FMA>(full.re, down_re[j], mul_add::<FMA>(-full.im, down_im[j], re));
                deep_im[j] = mul_add::<FMA>(full.re, down_im[j], mul_add::<FMA>(full.im, down_re[j], im));
            }
            let (to_re, to_im) = both.split_at_mut(m * n);
            for i in 0..m {
                let (re, im) = (up_re[i], up_im[i]);
                let (to_re, to_im) = (&mut to_re[i * n..(i + 1) * n], &mut to_im[i * n..(i + 1) * n]);
                for j in 0..n {
                    to_re[j] = mul_add::<FMA>(deep_re[j], re, -deep_im[j] * im);
                    to_im[j] = mul_add::<FMA>(deep_re[j], im, deep_im[j] * re);
                }
            }
        }
    }
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]
    use super::*;

    #[test]
    fn the_table_across_keeps_its_tolerance() {
        for (f, e, s) in [(1e4, 13.0, 5e-3), (1.8e6, 70.0, 5.0), (7.1e6, 13.0, 5e-3), (2.84e7, 3.0, 1e-4)] {
            let space = HalfSpace::new(f, e, s).unwrap();
            let distances = AcrossDistances { rho_m: (0.003, 20.0), height_m: (0.0, 8.0), depth_m: (0.0, 1.6) };
            let table = AcrossTable::build(&space, distances, 1e-5);
            for i in 0..60 {
                let t = |a: f64, (low, high): (f64, f64)| low + (high - low) * (f64::from(i) * a + 0.3).fract().powi(4);
                let at = [t(0.618, distances.rho_m), t(0.414, distances.height_m), t(0.732, distances.depth_m)];
                let wanted = space.remainder(at[0], at[1], -at[2]);
                let got = table.eval(at[0], at[1], at[2]);
                let far = at[0].hypot(at[1] + at[2]);
                for (a, b) in got.into_iter().zip([wanted.xx, wanted.zz, wanted.phi, wanted.p_rho]) {
                    let error = (a - b).norm() * far;
                    assert!(error < 1e-5, "{f} {e} {s} {at:?}: {error:e}");
                }
            }
        }
    }
}
