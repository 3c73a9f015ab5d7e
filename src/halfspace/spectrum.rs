//! What stands under the integrals: exponents and Bessel functions at a node, and the spectral functions.

use super::bessel::{hankel_scaled, j01};
use super::rule::{Node, Wave, nodes};
use super::soil::{HalfSpace, Region, exp_less_one, root};
use super::{panels::FINE, rule::Reach};
use num_complex::Complex64;

/// Everything the spectral functions need at one λ.
#[derive(Debug, Clone, Copy)]
pub(super) struct Spectral {
    /// λ.
    pub lambda: Complex64,
    /// u₀ and u₁.
    pub u0: Complex64,
    /// Decay in the soil.
    pub u1: Complex64,
}

impl Spectral {
    /// u₀ and u₁ from the exact distances of a node.
    pub(super) fn at(space: &HalfSpace, node: &Node) -> Self {
        let u0 = root(node.from_k0 * (node.lambda + space.k0_per_m()));
        let u1 = root(node.from_k1 * (node.lambda + space.k1_per_m()));
        Self { lambda: node.lambda, u0, u1 }
    }
}

/// The soil's constants in the combinations that the spectral functions use.
#[derive(Debug, Clone, Copy)]
pub(super) struct Weights {
    n2: Complex64,
    over: Complex64,
    gap: Complex64,
    k0_squared: f64,
    /// (n²−1)/(n²+1), the static coefficient of P.
    pub slope: Complex64,
    below: bool,
}

impl Weights {
    /// For pairs in one region.
    pub(super) fn new(space: &HalfSpace, region: Region) -> Self {
        let n2 = space.index_squared();
        let k0_squared = space.k0_per_m() * space.k0_per_m();
        Self {
            n2,
            over: 1.0 / (n2 + 1.0),
            gap: k0_squared * (n2 - 1.0),
            k0_squared,
            slope: (n2 - 1.0) / (n2 + 1.0),
            below: region == Region::Below,
        }
    }

    /// 2/(u₀+u₁).
    pub(super) fn full_h(&self, s: &Spectral) -> Complex64 {
        2.0 / (s.u0 + s.u1)
    }

    /// 2/(n²u₀+u₁).
    pub(super) fn full_q(&self, s: &Spectral) -> Complex64 {
        2.0 / (self.n2 * s.u0 + s.u1)
    }

    /// 2(n²−1)/((u₀+u₁)(n²u₀+u₁)).
    pub(super) fn full_p(&self, s: &Spectral) -> Complex64 {
        2.0 * (self.n2 - 1.0) / ((s.u0 + s.u1) * (self.n2 * s.u0 + s.u1))
    }

    /// The three after their static parts are gone, written so that nothing cancels:
    /// 2/(u₀+u₁) − 1/u, 2/(n²u₀+u₁) − 2/((n²+1)u), λ²·2(n²−1)/(…)(…) − (n²−1)/(n²+1),
    /// u being that of the medium both points lie in (u₀ for a pair across the surface).
    pub(super) fn reduced(&self, s: &Spectral) -> [Complex64; 3] {
        let sum = s.u0 + s.u1;
        let mix = self.n2 * s.u0 + s.u1;
        let less = self.gap / sum;
        let one = Complex64::new(1.0, 0.0);
        let (u, h, q) = if self.below { (s.u1, -less, -less * self.n2) } else { (s.u0, less, less) };
        let k1_squared = self.k0_squared * self.n2;
        let p = self.slope * ((one + self.n2) * self.k0_squared * mix / sum + 2.0 * k1_squared) / (sum * mix);
        [h / (u * sum), 2.0 * q * self.over / (u * mix), p]
    }

    /// As [`Self::reduced`] times e^{−u₀z−u₁|z'|}, less the same static parts with e^{−u₀(z+|z'|)}.
    pub(super) fn reduced_across(&self, s: &Spectral, above_m: f64, below_m: f64) -> [Complex64; 3] {
        let level = (-s.u0 * (above_m + below_m)).exp();
        let lag = exp_less_one(-(s.u1 - s.u0) * below_m);
        let [h, q, p] = self.reduced(s);
        [level * (h + self.full_h(s) * lag), level * (q + self.full_q(s) * lag), level * (p + (p + self.slope) * lag)]
    }
}

/// J₀ and J₁ (or half the Hankel functions) of λρ.
pub(super) fn bessel_at(node: &Node, rho_m: f64) -> (Complex64, Complex64) {
    let z = node.lambda * rho_m;
    match node.wave {
        Wave::Standing => {
            let (j0, j1) = j01(z.re);
            (Complex64::new(j0, 0.0), Complex64::new(j1, 0.0))
        }
        Wave::Outgoing => {
            let turn = Complex64::from_polar((-z.im).exp(), z.re);
            let (h0, h1) = hankel_scaled(z);
            (h0 * turn, h1 * turn)
        }
        Wave::Incoming => {
            let turn = Complex64::from_polar(z.im.exp(), -z.re);
            let (h0, h1) = hankel_scaled(z.conj());
            (h0.conj() * turn, h1.conj() * turn)
        }
    }
}

/// Where one pair of points lies: region, horizontal distance, and the lengths in the exponents of u₀ and u₁.
#[derive(Debug, Clone, Copy)]
pub(super) struct Pair {
    pub region: Region,
    pub rho_m: f64,
    pub up_m: f64,
    pub down_m: f64,
}

impl Pair {
    /// A field point at `z_m` and a source at `z_source_m`.
    pub(super) fn new(rho_m: f64, z_m: f64, z_source_m: f64) -> Self {
        let (up_m, down_m) =
            [z_m, z_source_m].iter().fold((0.0, 0.0), |(up, down), &z| (up + z.max(0.0), down - z.min(0.0)));
        Self { region: Region::of(z_m, z_source_m), rho_m: rho_m.abs(), up_m, down_m }
    }

    /// The sum of both heights' magnitudes.
    pub(super) fn zeta_m(&self) -> f64 {
        self.up_m + self.down_m
    }

    /// Distance to the mirror point (for a pair across: as if nothing were mirrored).
    pub(super) fn mirror_m(&self) -> f64 {
        self.rho_m.hypot(self.zeta_m())
    }

    /// ∫ f dλ by the fine rule; `f` is given λ, u₀, u₁ and the two Bessel functions.
    pub(super) fn integrate<const N: usize>(
        &self,
        space: &HalfSpace,
        f: impl Fn(&Spectral, Complex64, Complex64) -> [Complex64; N],
    ) -> [Complex64; N] {
        let reach = Reach {
            region: self.region,
            rho_m: (self.rho_m, self.rho_m),
            up_m: self.up_m,
            down_m: self.down_m,
            least_m: self.zeta_m(),
            from_k0: false,
        };
        let mut sum = [Complex64::new(0.0, 0.0); N];
        for node in nodes(space, reach, FINE) {
            let spectral = Spectral::at(space, &node);
            let (b0, b1) = bessel_at(&node, self.rho_m);
            for (total, value) in sum.iter_mut().zip(f(&spectral, b0, b1)) {
                *total += node.weight * value;
            }
        }
        sum
    }

    /// e^{−u₀·up − u₁·down}.
    pub(super) fn decay(&self, s: &Spectral) -> Complex64 {
        (-(s.u0 * self.up_m + s.u1 * self.down_m)).exp()
    }
}
