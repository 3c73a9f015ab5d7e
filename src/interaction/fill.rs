//! The matrix at one frequency, and potentials from known charges, by one walk over all pairs.

use super::kernel::{PointPair, pair_block};
use super::line::Line;
use super::local::internal_impedance;
use super::pairs::{Nodes, Pairs, Statics};
use super::rest;
use super::sleeve::{Sleeve, sleeves};
use super::surroundings::{Family, Surroundings};
use crate::halfspace::Region;
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

/// The kernels of a pair in a form both the matrix and the potentials can use.
pub(super) struct PairBlocks {
    /// Mean of t·K·t' over the pair, 1/m.
    pub(super) current: Block,
    /// Mean of K_Φ over the pair, 1/m.
    pub(super) potential: Block,
}

/// How the unknowns enter the Legendre coefficients of an element's current.
pub(super) type UnknownMap = Vec<(usize, [f64; MAX_DEGREE + 1])>;

/// A mesh with everything its matrices at all frequencies share.
#[derive(Debug, Clone)]
pub struct Interaction {
    pub(super) mesh: Mesh,
    maps: Vec<UnknownMap>,
    /// Pairs both above, both below and across the surface.
    direct: [Pairs; 3],
    /// Mirrored pairs, both above and both below.
    pub(super) image: Option<[Pairs; 2]>,
    pub(super) nodes: Nodes,
    pub(super) image_nodes: Option<Nodes>,
    /// Jacketed pairs on one line.
    sleeves: Vec<Sleeve>,
}

impl Interaction {
    /// Prepare a mesh: pair lists, quadrature points and static moments.
    ///
    /// `with_image`: the earth is perfect or soil, so that mirror images occur.
    #[must_use]
    pub fn new(mesh: Mesh, with_image: bool) -> Self {
        Self::among(mesh, with_image, &Statics::default(), |_, _| true)
    }

    /// As [`Interaction::new`], only for some of the pairs i ≤ j of elements, with static moments already known.
    pub(super) fn among(mesh: Mesh, with_image: bool, known: &Statics, keep: impl Fn(usize, usize) -> bool) -> Self {
        let region = |i: usize, j: usize| region_of(&mesh.elements[i], &mesh.elements[j]);
        let pairs = |mirrored, wanted| Pairs::of(&mesh, mirrored, known, |i, j| keep(i, j) && region(i, j) == wanted);
        let direct = [Region::Above, Region::Below, Region::Across].map(|region| pairs(false, region));
        let image = with_image.then(|| [Region::Above, Region::Below].map(|region| pairs(true, region)));
        let (mut on_lines, mut on_images) = (vec![0; mesh.elements.len()], vec![0; mesh.elements.len()]);
        let mut as_second = vec![0; mesh.elements.len()];
        direct.iter().for_each(|pairs| pairs.note_rules(&mut on_lines, &mut as_second));
        on_lines.iter_mut().zip(&as_second).for_each(|(one, two)| *one |= two);
        image.iter().flatten().for_each(|pairs| pairs.note_rules(&mut on_lines, &mut on_images));
        let nodes = Nodes::of(&mesh.elements.iter().map(Line::of).collect::<Vec<_>>(), &on_lines);
        let image_nodes =
            with_image.then(|| Nodes::of(&mesh.elements.iter().map(Line::mirrored).collect::<Vec<_>>(), &on_images));
        let maps = mesh.elements.iter().map(Element::legendre_map).collect();
        let sleeves = sleeves(&mesh).into_iter().filter(|s| keep(s.one, s.two)).collect();
        Self { mesh, maps, direct, image, nodes, image_nodes, sleeves }
    }

    /// Static moments that other meshes with the same elements on one line can use.
    #[must_use]
    pub fn statics(&self) -> Statics {
        let mut out = Statics::default();
        self.direct.iter().for_each(|pairs| out.keep(&self.mesh, pairs));
        out
    }

    /// The mesh.
    #[must_use]
    pub fn mesh(&self) -> &Mesh {
        &self.mesh
    }

    /// The interaction matrix at a frequency, symmetric, ohm; shape (unknowns, unknowns).
    #[must_use]
    pub fn fill(&self, earth: &Surroundings) -> Matrix {
        self.fill_watched(earth, |_, _, _| {})
    }

    /// As [`Interaction::fill`], keeping the scalar-potential kernels so that [`PotentialMap::along`] need not compute them again.
    #[must_use]
    pub fn fill_with_potentials(&self, earth: &Surroundings) -> (Matrix, PotentialMap) {
        let count = self.mesh.elements.len();
        let mut map =
            PotentialMap { electric: earth.air().electric(), count, blocks: vec![ZERO; count * (count + 1) / 2] };
        let z = self.fill_watched(earth, |i, j, block| add_block(&mut map.blocks[upper(count, i, j)], block));
        (z, map)
    }

    fn fill_watched(&self, earth: &Surroundings, mut watch: impl FnMut(usize, usize, &Block)) -> Matrix {
        let n = self.mesh.unknowns;
        let mut z = Mat::zeros(n, n);
        let medium = earth.air();
        self.walk(earth, |i, j, blocks| {
            watch(i, j, &blocks.potential);
            let (e, f) = (&self.mesh.elements[i], &self.mesh.elements[j]);
            let a = medium.magnetic() * (e.length_m * f.length_m);
            let p = medium.electric() * 4.0;
            scatter(&self.maps[i], &self.maps[j], &combine(&blocks.current, a, &blocks.potential, p), i != j, &mut z);
        });
        for (element, map) in self.mesh.elements.iter().zip(&self.maps) {
            add_local(element, map, earth, &mut z);
        }
        z
    }

    /// Scalar potential along a few elements as rows over the unknowns, V/A: `rows[n][u]` are the Legendre coefficients on
    /// `elements[n]` for 1 A in unknown `u`. Walks only the pairs that these elements are in.
    #[must_use]
    pub fn potential_rows(&self, earth: &Surroundings, elements: &[usize]) -> Vec<Vec<Legendre>> {
        let factor = -earth.air().electric();
        let mut rows = vec![vec![[Complex64::ZERO; MAX_DEGREE + 1]; self.mesh.unknowns]; elements.len()];
        let mut add = |row: usize, source: usize, block: &dyn Fn(usize, usize) -> Complex64| {
            for (unknown, factors) in &self.maps[source] {
                let charge = derive(factors.map(Complex64::from)).map(|x| x * 2.0);
                for (a, to) in rows[row][*unknown].iter_mut().enumerate() {
                    let sum: Complex64 = charge.iter().enumerate().map(|(b, q)| block(a, b) * q).sum();
                    *to += factor * (2.0 * a as f64 + 1.0) * sum;
                }
            }
        };
        self.walk_some(earth, &|i, j| elements.contains(&i) || elements.contains(&j), |i, j, blocks| {
            for (row, &element) in elements.iter().enumerate() {
                if element == i {
                    add(row, j, &|a, b| blocks.potential[a][b]);
                }
                if element == j && i != j {
                    add(row, i, &|a, b| blocks.potential[b][a]);
                }
            }
        });
        rows
    }

    /// Hand every pair (i ≤ j) with its kernels, all images included, to a function. A pair may come in several parts.
    pub(super) fn walk(&self, earth: &Surroundings, visit: impl FnMut(usize, usize, &PairBlocks)) {
        self.walk_some(earth, &|_, _| true, visit);
    }

    /// The same for the pairs that `keep` lets through.
    fn walk_some(
        &self,
        earth: &Surroundings,
        keep: &impl Fn(usize, usize) -> bool,
        mut visit: impl FnMut(usize, usize, &PairBlocks),
    ) {
        for family in earth.families() {
            let place = match family.region {
                Region::Above => 0,
                Region::Below => 1,
                Region::Across => 2,
            };
            match (family.mirrored, &self.image, &self.image_nodes) {
                (false, ..) => self.walk_family(&self.direct[place], &self.nodes, &family, keep, &mut visit),
                (true, Some(image), Some(nodes)) => self.walk_family(&image[place], nodes, &family, keep, &mut visit),
                (true, ..) => debug_assert!(false, "an earth with images needs an interaction prepared with them"),
            }
        }
        for sleeve in self.sleeves.iter().filter(|s| keep(s.one, s.two)) {
            visit(sleeve.one, sleeve.two, &sleeve.blocks(earth.permittivity(self.mesh.elements[sleeve.one].below)));
        }
        let Some(soil) = earth.soil() else { return };
        for (pairs, region) in self.direct.iter().zip([Region::Above, Region::Below, Region::Across]) {
            for pair in pairs.list.iter().filter(|p| keep(p.one, p.two)) {
                let (e, f) = (&self.mesh.elements[pair.one], &self.mesh.elements[pair.two]);
                visit(pair.one, pair.two, &rest::blocks(e, f, soil, region));
            }
        }
    }

    fn walk_family(
        &self,
        pairs: &Pairs,
        sources: &Nodes,
        family: &Family,
        keep: &impl Fn(usize, usize) -> bool,
        visit: &mut impl FnMut(usize, usize, &PairBlocks),
    ) {
        let (k, weight) = (family.k, family.weight);
        let half_k2 = 0.5 * k * k;
        for pair in pairs.list.iter().filter(|p| keep(p.one, p.two)) {
            let (e, f) = (&self.mesh.elements[pair.one], &self.mesh.elements[pair.two]);
            let (n, m) = (usize::from(pair.points.0), usize::from(pair.points.1));
            let points = PointPair {
                observers: &self.nodes.at[pair.one][n],
                sources: &sources.at[pair.two][m],
                left: &self.nodes.weighted[n],
                right: &self.nodes.weighted[m],
                offset_m2: pair.offset_m2,
                rest_only: pair.near.is_some(),
            };
            let (re, im) = pair_block(&points, k.re, -k.im);
            let mut block: Block = std::array::from_fn(|a| std::array::from_fn(|b| Complex64::new(re[a][b], im[a][b])));
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

/// Which sides of the surface the two elements lie on.
pub(super) fn region_of(e: &Element, f: &Element) -> Region {
    match (e.below, f.below) {
        (false, false) => Region::Above,
        (true, true) => Region::Below,
        _ => Region::Across,
    }
}

fn scaled(block: &Block, factor: Complex64) -> Block {
    block.map(|row| row.map(|x| x * factor))
}

/// The scalar potential as a linear map of the charges, at one frequency.
#[derive(Debug, Clone)]
pub struct PotentialMap {
    electric: Complex64,
    count: usize,
    /// Means of K_Φ for i ≤ j, row by row.
    blocks: Vec<Block>,
}

impl PotentialMap {
    /// Scalar potential along every element from the currents, V: Legendre coefficients of the mean over the circumference.
    ///
    /// Φ = 1/(4πε0) ∫ K_Φ q ds', q = −(1/jω) dI/ds.
    ///
    /// # Inputs
    /// - `currents`: Legendre coefficients of each element's current, A
    #[must_use]
    pub fn along(&self, currents: &[Legendre]) -> Vec<Legendre> {
        // dI/ds = (2/L) dI/dξ, and ∫ ds' over an element is L times the mean
        let charge: Vec<Legendre> = currents.iter().map(|c| derive(*c).map(|x| x * (-2.0 * self.electric))).collect();
        let mut out = vec![[Complex64::ZERO; MAX_DEGREE + 1]; self.count];
        for i in 0..self.count {
            for j in i..self.count {
                let block = &self.blocks[upper(self.count, i, j)];
                for a in 0..=MAX_DEGREE {
                    for b in 0..=MAX_DEGREE {
                        out[i][a] += block[a][b] * charge[j][b];
                        if i != j {
                            out[j][a] += block[b][a] * charge[i][b];
                        }
                    }
                }
            }
        }
        for series in &mut out {
            for (a, c) in series.iter_mut().enumerate() {
                *c *= 2.0 * a as f64 + 1.0;
            }
        }
        out
    }
}

/// Place of (i, j), i ≤ j, in an upper triangle stored row by row.
fn upper(count: usize, i: usize, j: usize) -> usize {
    i * count - i * (i + 1) / 2 + j
}

fn add_block(sum: &mut Block, block: &Block) {
    for (row, more) in sum.iter_mut().zip(block) {
        for (cell, x) in row.iter_mut().zip(more) {
            *cell += x;
        }
    }
}

/// Metal loss of one element.
pub(super) fn add_local(e: &Element, map: &UnknownMap, earth: &Surroundings, z: &mut Matrix) {
    let Some(sigma) = e.conductivity_s_per_m else { return };
    let a = internal_impedance(e.radius_m, sigma, earth.air().angular) * e.length_m;
    let mut block = ZERO;
    for (k, row) in block.iter_mut().enumerate() {
        row[k] = Complex64::from(1.0 / (2.0 * k as f64 + 1.0));
    }
    scatter(map, map, &combine(&block, a, &ZERO, Complex64::ZERO), false, z);
}

/// Add an element block, given in Legendre coefficients, to the unknowns' matrix.
pub(super) fn scatter(one: &UnknownMap, two: &UnknownMap, block: &Block, twice: bool, z: &mut Matrix) {
    for (v, y) in two {
        let column: Legendre = std::array::from_fn(|a| (0..=MAX_DEGREE).map(|b| block[a][b] * y[b]).sum());
        for (u, x) in one {
            let value: Complex64 = (0..=MAX_DEGREE).map(|a| column[a] * x[a]).sum();
            z[(*u, *v)] += value;
            if twice {
                z[(*v, *u)] += value;
            }
        }
    }
}

/// Derivative with respect to ξ of a Legendre series, of degree at most 3: P1′ = P0, P2′ = 3 P1, P3′ = 5 P2 + P0.
pub(super) fn derive(c: Legendre) -> Legendre {
    [c[1] + c[3], c[2] * 3.0, c[3] * 5.0, Complex64::ZERO]
}

/// a · M + p · D N Dᵗ, D the transposed derivative.
pub(super) fn combine(m: &Block, a: Complex64, n: &Block, p: Complex64) -> Block {
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
