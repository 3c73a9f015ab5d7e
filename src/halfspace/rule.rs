//! The path of a Sommerfeld integral over λ, for every distance of a box at once.
//!
//! From 0 along the real axis past k₀ (and Re k₁, where that matters), with λ = c ± s² about each of them, which takes
//! the square-root branch points off the path. Then, if the heights make it converge, on along the real axis; else
//! J = ½(H⁽¹⁾ + H⁽²⁾), the first turned straight up, the second straight down, where they fall off as e^{−tρ}.

use super::panels::{Fineness, cut, gauss};
use super::soil::{HalfSpace, Region};
use num_complex::Complex64;

/// Which function of λρ belongs to a node.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Wave {
    /// J₀ and J₁.
    Standing,
    /// ½H⁽¹⁾, on the upper branch.
    Outgoing,
    /// ½H⁽²⁾, on the lower branch.
    Incoming,
}

/// One node of the path: λ, its exact distances to k₀ and k₁, and dλ with the quadrature weight (and the ½).
#[derive(Debug, Clone, Copy)]
pub(super) struct Node {
    pub lambda: Complex64,
    pub from_k0: Complex64,
    pub from_k1: Complex64,
    pub weight: Complex64,
    pub wave: Wave,
}

/// Distances that a rule must serve. `up_m` and `down_m` are the largest lengths in the exponents of u₀ and u₁,
/// `least_m` the smallest sum of both.
#[derive(Debug, Clone, Copy)]
pub(super) struct Reach {
    pub region: Region,
    pub rho_m: (f64, f64),
    pub up_m: f64,
    pub down_m: f64,
    pub least_m: f64,
    /// Leave out the waves that travel in the air, λ < k₀.
    pub from_k0: bool,
}

struct Path<'a> {
    space: &'a HalfSpace,
    reach: Reach,
    fineness: Fineness,
    singular: [Complex64; 6],
    nodes: Vec<Node>,
}

/// The nodes that integrate every spectral function of this module over the distances of `reach`.
pub(super) fn nodes(space: &HalfSpace, reach: Reach, fineness: Fineness) -> Vec<Node> {
    let k0 = Complex64::new(space.k0_per_m(), 0.0);
    let k1 = space.k1_per_m();
    let n2 = space.index_squared();
    let pole = k1 / super::soil::root(n2 + 1.0);
    let singular = [k0, k1, pole, -k0, -k1, -pole];
    let mut path = Path { space, reach, fineness, singular, nodes: Vec::with_capacity(512) };
    path.lay();
    path.nodes
}

impl Path<'_> {
    fn lay(&mut self) {
        let k0 = self.space.k0_per_m();
        let k1 = self.space.k1_per_m();
        let (rho, depth) = (self.reach.rho_m.0, self.fineness.depth);
        let hankel = self.reach.least_m < 2.0 * rho;
        let end = if hankel {
            let handover = self.fineness.hankel_from / rho;
            if -k1.im * rho > depth { k0 + handover } else { handover.max(k1.re + 0.5 * handover) }
        } else {
            let slowest = if self.reach.region == Region::Above { k0 } else { k1.re };
            slowest.hypot(depth / self.reach.least_m)
        };
        self.real_axis(end);
        if hankel {
            self.branches(end, depth / rho);
        }
    }

    fn real_axis(&mut self, end: f64) {
        let (k0, turn) = (self.space.k0_per_m(), self.space.k1_per_m().re);
        if !self.reach.from_k0 {
            self.about(k0, -1.0, k0);
        }
        if turn > k0 * (1.0 + 1e-9) && turn < end {
            let half = 0.5 * (turn - k0);
            self.about(k0, 1.0, half);
            self.about(turn, -1.0, half);
            self.about(turn, 1.0, end - turn);
        } else {
            self.about(k0, 1.0, end - k0);
        }
    }

    /// λ = centre ± s² over `length`.
    fn about(&mut self, centre: f64, sign: f64, length: f64) {
        if length <= 0.0 {
            return;
        }
        let mut singular = Vec::with_capacity(12);
        for point in self.singular {
            let s = ((point - centre) * sign).sqrt();
            if s.norm_sqr() > 1e-16 * length {
                singular.extend([s, -s]);
            }
        }
        let (k0, k1) = (self.space.k0_per_m(), self.space.k1_per_m());
        let (rho, radians) = (self.reach.rho_m.1, self.fineness.radians);
        let (up, down) = (self.reach.up_m, self.reach.down_m);
        let longest = |s: f64| {
            let s = s + 1e-6 * length.sqrt();
            let lambda = centre + sign * s * s;
            let slope = |k: Complex64| 2.0 * s * lambda / ((lambda - k) * (lambda + k)).norm().sqrt();
            let rate = 2.0 * s * rho + up * slope(Complex64::new(k0, 0.0)) + down * slope(k1);
            let bend = rho + up + down;
            2.0 * radians / (rate + (rate * rate + 4.0 * bend * radians).sqrt())
        };
        let ends = cut(0.0, length.sqrt(), &singular, &self.fineness, longest);
        for pair in ends.windows(2) {
            let (middle, half) = (0.5 * (pair[0] + pair[1]), 0.5 * (pair[1] - pair[0]));
            for &(x, w) in gauss(self.fineness.nodes) {
                let s = middle + half * x;
                let step = sign * s * s;
                self.nodes.push(Node {
                    lambda: Complex64::new(centre + step, 0.0),
                    from_k0: Complex64::new((centre - k0) + step, 0.0),
                    from_k1: Complex64::new((centre - k1.re) + step, -k1.im),
                    weight: Complex64::new(2.0 * s * half * w, 0.0),
                    wave: Wave::Standing,
                });
            }
        }
    }

    /// λ = end ± jt up to t = `length`.
    fn branches(&mut self, end: f64, length: f64) {
        let (k0, k1) = (self.space.k0_per_m(), self.space.k1_per_m());
        // Both branches get the same t, as tables pair them: singularities of either count for both.
        let up = Complex64::i();
        let mut singular: Vec<Complex64> =
            self.singular.iter().flat_map(|p| [(p - end) / up, (p.conj() - end) / up]).collect();
        singular.push(-end / up);
        for (sign, wave) in [(1.0, Wave::Outgoing), (-1.0, Wave::Incoming)] {
            let turn = Complex64::new(0.0, sign);
            let step = self.fineness.radians / (self.reach.rho_m.1 + self.reach.up_m + self.reach.down_m);
            let ends = cut(0.0, length, &singular, &self.fineness, |_| step);
            for pair in ends.windows(2) {
                let (middle, half) = (0.5 * (pair[0] + pair[1]), 0.5 * (pair[1] - pair[0]));
                for &(x, w) in gauss(self.fineness.nodes) {
                    let t = turn * (middle + half * x);
                    self.nodes.push(Node {
                        lambda: end + t,
                        from_k0: (end - k0) + t,
                        from_k1: (end - k1) + t,
                        weight: 0.5 * turn * half * w,
                        wave,
                    });
                }
            }
        }
    }
}
