//! The matrix at one frequency, and potentials from known charges, by one walk over all pairs.

use super::kernel::outgoing_wave;
use super::line::Line;
use super::local::{internal_impedance, jacket_elastance};
use super::medium::Medium;
use super::pairs::{LARGEST_RULE, Nodes, Pair, Pairs};
use crate::layout::EarthAt;
use crate::mesh::{Element, MAX_DEGREE, Mesh};
use faer::Mat;
use num_complex::Complex64;

/// A dense complex matrix.
pub type Matrix = Mat<Complex64>;

/// Coefficients or moments against Legendre polynomials P_0..P_3 on an element.
pub type Legendre = [Complex64; MAX_DEGREE + 1];

/// Means over a pair of elements of P_a P_b times a kernel.
pub(super) type Block = [Legendre; MAX_DEGREE + 1];

pub(super) const ZERO: Block = [[Complex64::ZERO; MAX_DEGREE + 1]; MAX_DEGREE + 1];

/// What one family of source lines (the conductors themselves, or their images) contributes.
#[derive(Debug, Clone, Copy)]
struct Weight {
    /// On the horizontal components of the vector potential.
    horizontal: Complex64,
    /// On the vertical component.
    vertical: Complex64,
    /// On the scalar potential.
    potential: Complex64,
}

/// The kernels of a pair in a form both the matrix and the potentials can use.
pub(super) struct PairBlocks {
    /// Mean of t·K·t' over the pair, 1/m.
    pub(super) current: Block,
    /// Mean of K_Φ over the pair, 1/m.
    pub(super) potential: Block,
}

/// A mesh with everything its matrices at all frequencies share.
#[derive(Debug, Clone)]
pub struct Interaction {
    mesh: Mesh,
    direct: Pairs,
    image: Option<Pairs>,
    nodes: Nodes,
    image_nodes: Option<Nodes>,
}

impl Interaction {
    /// Prepare a mesh: pair lists, quadrature points and static moments.
    ///
    /// `with_image`: the earth is perfect or soil, so that mirror images occur.
    #[must_use]
    pub fn new(mesh: Mesh, with_image: bool) -> Self {
        let direct = Pairs::of(&mesh, false, |_, _| true);
        let image = with_image.then(|| Pairs::of(&mesh, true, |_, _| true));
        let nodes = Nodes::of(&mesh.elements.iter().map(Line::of).collect::<Vec<_>>());
        let image_nodes =
            with_image.then(|| Nodes::of(&mesh.elements.iter().map(Line::mirrored).collect::<Vec<_>>()));
        Self { mesh, direct, image, nodes, image_nodes }
    }

    /// The mesh.
    #[must_use]
    pub fn mesh(&self) -> &Mesh {
        &self.mesh
    }

    /// The interaction matrix at a frequency, symmetric, ohm; shape (unknowns, unknowns).
    #[must_use]
    pub fn fill(&self, frequency_hz: f64, earth: EarthAt) -> Matrix {
        let n = self.mesh.unknowns;
        let mut z = Mat::zeros(n, n);
        let medium = Medium::air(frequency_hz);
        self.walk(frequency_hz, earth, |i, j, blocks| {
            let (e, f) = (&self.mesh.elements[i], &self.mesh.elements[j]);
            let a = medium.magnetic() * (e.length_m * f.length_m);
            let p = medium.electric() * 4.0;
            scatter(e, f, &combine(&blocks.current, a, &blocks.potential, p), i != j, &mut z);
        });
        for element in &self.mesh.elements {
            add_local(element, medium, &mut z);
        }
        z
    }

    /// Scalar potential along every element from the currents, V: Legendre coefficients of the mean over the circumference.
    ///
    /// # Inputs
    /// - `currents`: Legendre coefficients of each element's current, A
    #[must_use]
    pub fn potentials(&self, frequency_hz: f64, earth: EarthAt, currents: &[Legendre]) -> Vec<Legendre> {
        let medium = Medium::air(frequency_hz);
        // Φ = 1/(4πε0) ∫ K_Φ q ds', q = −(1/jω) dI/ds, so the factor is −1/(jωε0 4π)
        let factor = -medium.electric();
        let elements = &self.mesh.elements;
        let charge: Vec<Legendre> = currents.iter().map(|c| derive(*c).map(|x| x * 2.0)).collect();
        let mut out = vec![[Complex64::ZERO; MAX_DEGREE + 1]; elements.len()];
        self.walk(frequency_hz, earth, |i, j, blocks| {
            for a in 0..=MAX_DEGREE {
                let scale = factor * (2.0 * a as f64 + 1.0);
                for b in 0..=MAX_DEGREE {
                    out[i][a] += scale * blocks.potential[a][b] * charge[j][b];
                    if i != j {
                        out[j][a] += scale * blocks.potential[b][a] * charge[i][b];
                    }
                }
            }
        });
        out
    }

    /// Hand every pair (i ≤ j) with its kernels, all images included, to a function. A pair may come in several parts.
    pub(super) fn walk(&self, frequency_hz: f64, earth: EarthAt, mut visit: impl FnMut(usize, usize, &PairBlocks)) {
        let one = Complex64::ONE;
        let medium = Medium::air(frequency_hz);
        let weight = Weight { horizontal: one, vertical: one, potential: one };
        self.walk_family(&self.direct, &self.nodes, weight, medium, &mut visit);
        if let (EarthAt::Perfect, Some(image), Some(nodes)) = (earth, &self.image, &self.image_nodes) {
            let weight = Weight { horizontal: -one, vertical: one, potential: -one };
            self.walk_family(image, nodes, weight, medium, &mut visit);
        }
    }

    fn walk_family(
        &self,
        pairs: &Pairs,
        sources: &Nodes,
        weight: Weight,
        medium: Medium,
        visit: &mut impl FnMut(usize, usize, &PairBlocks),
    ) {
        let mut scratch = Scratch::default();
        let half_k2 = 0.5 * medium.k * medium.k;
        for pair in &pairs.list {
            let (e, f) = (&self.mesh.elements[pair.one], &self.mesh.elements[pair.two]);
            let mut block = scratch.moments(pair, &self.nodes, sources, medium);
            if let Some(index) = pair.near {
                let s = &pairs.statics[index as usize];
                let area = e.length_m * f.length_m;
                for a in 0..=MAX_DEGREE {
                    for b in 0..=MAX_DEGREE {
                        block[a][b] += (s.inverse[a][b] - half_k2 * s.direct[a][b]) / area;
                    }
                }
            }
            let (t, u) = (e.tangent, f.tangent);
            let current = weight.horizontal * (t.x * u.x + t.y * u.y) + weight.vertical * (t.z * u.z);
            let blocks = PairBlocks { current: scaled(&block, current), potential: scaled(&block, weight.potential) };
            visit(pair.one, pair.two, &blocks);
        }
    }
}

fn scaled(block: &Block, factor: Complex64) -> Block {
    block.map(|row| row.map(|x| x * factor))
}

/// Metal loss and jacket of one element.
fn add_local(e: &Element, medium: Medium, z: &mut Matrix) {
    let mut a = Complex64::ZERO;
    let mut p = Complex64::ZERO;
    if let Some(sigma) = e.conductivity_s_per_m {
        a = internal_impedance(e.radius_m, sigma, medium.angular) * e.length_m;
    }
    if let Some(jacket) = e.jacket {
        let elastance =
            jacket_elastance(e.radius_m, e.radius_m + jacket.thickness_m, jacket.permittivity, medium.permittivity);
        p = elastance / Complex64::new(0.0, medium.angular) * (4.0 / e.length_m);
    }
    if a != Complex64::ZERO || p != Complex64::ZERO {
        let mut block = ZERO;
        for (k, row) in block.iter_mut().enumerate() {
            row[k] = Complex64::from(1.0 / (2.0 * k as f64 + 1.0));
        }
        scatter(e, e, &combine(&block, a, &block, p), false, z);
    }
}

/// Add an element block, given in Legendre coefficients, to the unknowns' matrix.
fn scatter(e: &Element, f: &Element, block: &Block, twice: bool, z: &mut Matrix) {
    for (u, x) in e.legendre_map() {
        let row: Legendre = std::array::from_fn(|b| (0..=MAX_DEGREE).map(|a| block[a][b] * x[a]).sum());
        for (v, y) in f.legendre_map() {
            let value: Complex64 = (0..=MAX_DEGREE).map(|b| row[b] * y[b]).sum();
            z[(u, v)] += value;
            if twice {
                z[(v, u)] += value;
            }
        }
    }
}

/// Derivative with respect to ξ of a Legendre series, of degree at most 3: P1′ = P0, P2′ = 3 P1, P3′ = 5 P2 + P0.
fn derive(c: Legendre) -> Legendre {
    [c[1] + c[3], c[2] * 3.0, c[3] * 5.0, Complex64::ZERO]
}

/// a · M + p · D N Dᵗ, D the transposed derivative.
fn combine(m: &Block, a: Complex64, n: &Block, p: Complex64) -> Block {
    let raise = |row: Legendre| [Complex64::ZERO, row[0], row[1] * 3.0, row[2] * 5.0 + row[0]];
    let rows = [raise(n[0]), raise(n[1]), raise(n[2])];
    let mut out = ZERO;
    for b in 0..=MAX_DEGREE {
        let d = raise([rows[0][b], rows[1][b], rows[2][b], Complex64::ZERO]);
        for k in 0..=MAX_DEGREE {
            out[k][b] = a * m[k][b] + p * d[k];
        }
    }
    out
}

/// Room for one pair's kernel values.
struct Scratch {
    squared: [f64; LARGEST_RULE * LARGEST_RULE],
    re: [f64; LARGEST_RULE * LARGEST_RULE],
    im: [f64; LARGEST_RULE * LARGEST_RULE],
}

impl Default for Scratch {
    fn default() -> Self {
        const N: usize = LARGEST_RULE * LARGEST_RULE;
        Self { squared: [1.0; N], re: [0.0; N], im: [0.0; N] }
    }
}

impl Scratch {
    /// Mean over both elements of P_a P_b times e^{−jkR}/R (far) or e^{−jkR}/R − 1/R + k²R/2 (near).
    fn moments(&mut self, pair: &Pair, observers: &Nodes, sources: &Nodes, medium: Medium) -> Block {
        let (n, m) = (usize::from(pair.points.0), usize::from(pair.points.1));
        let [x, y, z] = &observers.at[pair.one][n];
        let [u, v, w] = &sources.at[pair.two][m];
        for q in 0..n {
            let row = &mut self.squared[q * m..(q + 1) * m];
            for r in 0..m {
                let (dx, dy, dz) = (x[q] - u[r], y[q] - v[r], z[q] - w[r]);
                row[r] = dx * dx + dy * dy + dz * dz + pair.offset_m2;
            }
        }
        let count = n * m;
        outgoing_wave(&self.squared[..count], medium.k.re, -medium.k.im, &mut self.re, &mut self.im);
        if pair.near.is_some() {
            let half_k2 = 0.5 * medium.k * medium.k;
            for i in 0..count {
                let r = self.squared[i].sqrt();
                self.re[i] += half_k2.re * r - 1.0 / r;
                self.im[i] += half_k2.im * r;
            }
        }
        let (left, right) = (&observers.weighted[n], &observers.weighted[m]);
        let mut out = ZERO;
        for q in 0..n {
            let (re, im) = (&self.re[q * m..(q + 1) * m], &self.im[q * m..(q + 1) * m]);
            for b in 0..=MAX_DEGREE {
                let (mut sr, mut si) = (0.0, 0.0);
                for r in 0..m {
                    sr += re[r] * right[b][r];
                    si += im[r] * right[b][r];
                }
                for a in 0..=MAX_DEGREE {
                    out[a][b] += Complex64::new(sr * left[a][q], si * left[a][q]);
                }
            }
        }
        out
    }
}
