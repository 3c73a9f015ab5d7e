//! The matrix at one frequency, and potentials from known charges.

use super::assembly::{Assembly, add_metal_loss};
use super::line::Line;
use super::pairs::{Nodes, Pairs, Statics};
use super::potential::{PotentialMap, Recorder};
use super::probe::{Probes, Spot, value_weights};
use super::sleeve::{Sleeve, sleeves};
use super::surroundings::Surroundings;
use crate::halfspace::Region;
use crate::mesh::{Element, MAX_DEGREE, Mesh};
use faer::Mat;
use num_complex::Complex64;

/// A dense complex matrix.
pub type Matrix = Mat<Complex64>;

/// Coefficients or moments against Legendre polynomials P_0..P_3 on an element.
pub type Legendre = [Complex64; MAX_DEGREE + 1];

/// How the unknowns enter the Legendre coefficients of an element's current.
pub(super) type UnknownMap = Vec<(usize, [f64; MAX_DEGREE + 1])>;

/// A mesh with everything its matrices at all frequencies share.
#[derive(Debug, Clone)]
pub struct Interaction {
    pub(super) mesh: Mesh,
    maps: Vec<UnknownMap>,
    /// Elements from here on are not paired among themselves.
    pub(super) split: usize,
    /// Pairs both above, both below and across the surface.
    pub(super) direct: [Pairs; 3],
    /// Mirrored pairs, both above and both below.
    pub(super) image: Option<[Pairs; 2]>,
    pub(super) nodes: Nodes,
    pub(super) image_nodes: Option<Nodes>,
    /// Jacketed pairs on one line.
    pub(super) sleeves: Vec<Sleeve>,
}

impl Interaction {
    /// Prepare a mesh: pair lists, quadrature points and static moments.
    ///
    /// `with_image`: the earth is perfect or soil, so that mirror images occur.
    #[must_use]
    pub fn new(mesh: Mesh, with_image: bool) -> Self {
        let split = mesh.elements.len();
        Self::among(mesh, with_image, &Statics::default(), split)
    }

    /// As [`Interaction::new`], with static moments already known, and without the pairs among the elements from `split` on.
    pub(super) fn among(mesh: Mesh, with_image: bool, known: &Statics, split: usize) -> Self {
        let region = |i: usize, j: usize| region_of(&mesh.elements[i], &mesh.elements[j]);
        let pairs = |mirrored, wanted| Pairs::of(&mesh, mirrored, known, |i, j| i < split && region(i, j) == wanted);
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
        let sleeves = sleeves(&mesh, &direct, known);
        Self { mesh, maps, split, direct, image, nodes, image_nodes, sleeves }
    }

    /// Static moments that other meshes with the same elements on one line can use.
    #[must_use]
    pub fn statics(&self) -> Statics {
        let mut out = Statics::default();
        self.direct.iter().for_each(|pairs| out.keep(&self.mesh, pairs));
        out.keep_sleeves(&self.mesh, &self.sleeves);
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
        let mut assembly = self.assembly(earth);
        self.walk(earth, &mut assembly);
        self.with_metal_loss(assembly.finish(), earth)
    }

    /// As [`Interaction::fill`], keeping the scalar-potential kernels so that [`PotentialMap::along`] need not compute them again.
    #[must_use]
    pub fn fill_with_potentials(&self, earth: &Surroundings) -> (Matrix, PotentialMap) {
        let recorder = Recorder::new(&self.mesh.elements, earth.air());
        let mut both = (self.assembly(earth), recorder);
        self.walk(earth, &mut both);
        (self.with_metal_loss(both.0.finish(), earth), both.1.finish())
    }

    /// As [`Interaction::fill`], with the scalar potential at some spots, V per A of every unknown; rows in the order of the spots.
    ///
    /// Φ = 1/(4πε0) ∫ K_Φ q ds', q = −(1/jω) dI/ds.
    #[must_use]
    pub fn fill_probed(&self, earth: &Surroundings, spots: &[Spot]) -> (Matrix, Vec<Vec<Complex64>>) {
        let (z, rows) = self.gather(earth, spots, &self.maps, self.mesh.unknowns);
        (self.with_metal_loss(z, earth), rows)
    }

    /// Matrix (without the metal's loss) and potential rows over given unknowns.
    pub(super) fn gather(
        &self,
        earth: &Surroundings,
        spots: &[Spot],
        maps: &[UnknownMap],
        unknowns: usize,
    ) -> (Matrix, Vec<Vec<Complex64>>) {
        let elements = &self.mesh.elements;
        let at: Vec<_> = spots.iter().map(|s| (s.element, value_weights(s.xi))).collect();
        let assembly = Assembly::new(elements, maps, unknowns, earth.air());
        let mut both = (assembly, Probes::new(elements, maps, &at, unknowns, earth.air()));
        self.walk(earth, &mut both);
        (both.0.finish(), both.1.finish())
    }

    /// Scalar potential along a few elements as rows over the unknowns, V/A: `rows[n][u]` are the Legendre coefficients on
    /// `elements[n]` for 1 A in unknown `u`. Walks only the pairs that these elements are in.
    #[must_use]
    pub fn potential_rows(&self, earth: &Surroundings, elements: &[usize]) -> Vec<Vec<Legendre>> {
        let coefficient = |a: usize| std::array::from_fn(|b| if a == b { 2.0 * a as f64 + 1.0 } else { 0.0 });
        let at: Vec<_> = elements.iter().flat_map(|&k| (0..=MAX_DEGREE).map(move |a| (k, coefficient(a)))).collect();
        let mut wanted = vec![false; self.mesh.elements.len()];
        elements.iter().for_each(|&k| wanted[k] = true);
        let mut probes = Probes::new(&self.mesh.elements, &self.maps, &at, self.mesh.unknowns, earth.air());
        self.walk_some(earth, Some(&wanted), &mut probes);
        let rows = probes.finish();
        let legendre = |four: &[Vec<Complex64>]| -> Vec<Legendre> {
            (0..self.mesh.unknowns).map(|u| std::array::from_fn(|a| four[a][u])).collect()
        };
        rows.chunks(MAX_DEGREE + 1).map(legendre).collect()
    }

    fn assembly(&self, earth: &Surroundings) -> Assembly<'_> {
        Assembly::new(&self.mesh.elements, &self.maps, self.mesh.unknowns, earth.air())
    }

    fn with_metal_loss(&self, mut z: Matrix, earth: &Surroundings) -> Matrix {
        for (element, map) in self.mesh.elements.iter().zip(&self.maps) {
            add_metal_loss(element, map, earth.air().angular, &mut z);
        }
        z
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

/// Derivative with respect to ξ of a Legendre series, of degree at most 3: P1′ = P0, P2′ = 3 P1, P3′ = 5 P2 + P0.
pub(super) fn derive(c: Legendre) -> Legendre {
    [c[1] + c[3], c[2] * 3.0, c[3] * 5.0, Complex64::ZERO]
}
