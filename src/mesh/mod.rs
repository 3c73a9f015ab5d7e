//! Elements and unknowns: the conductors cut finely enough for a highest frequency.
//!
//! Takes a [`Layout`] and a highest frequency; gives a [`Mesh`]: straight elements carrying a current of polynomial
//! degree 1 to 3, the map from element currents to unknowns (Kirchhoff's current law holds exactly at every junction), and
//! the ports. The mesh knows no frequency itself: everything in it holds at any lower one.
//!
//! `divide` decides where elements end, `anchor` how meshes of different lengths nest, `unknowns` numbers the currents.

mod anchor;
mod divide;
mod unknowns;

use crate::layout::{Jacket, Layout, Point};
pub use anchor::Anchor;
pub use divide::Density;
use num_complex::Complex64;

/// Highest polynomial degree of the current on an element.
pub const MAX_DEGREE: usize = 3;

/// A current at an element's end as a sum of unknowns: (unknown, factor).
pub type EndCurrent = Vec<(usize, f64)>;

/// A straight piece of a conductor with a polynomial current.
///
/// The current along it, positive from `start` to `end`, is
/// I(ξ) = I_s (1−ξ)/2 + I_e (1+ξ)/2 + Σ_q b_q (P_q(ξ) − P_{q−2}(ξ)), q = 2..=degree, ξ from −1 to 1, P_q Legendre polynomials.
#[derive(Debug, Clone)]
pub struct Element {
    /// Conductor it belongs to.
    pub conductor: usize,
    /// Distance of its start along the conductor, m.
    pub from_m: f64,
    /// Distance of its end along the conductor, m.
    pub to_m: f64,
    /// Start, m.
    pub start: Point,
    /// End, m.
    pub end: Point,
    /// Unit vector from start to end.
    pub tangent: Point,
    /// Length, m.
    pub length_m: f64,
    /// Radius of the metal, m.
    pub radius_m: f64,
    /// Jacket, if any.
    pub jacket: Option<Jacket>,
    /// Conductivity of the metal, S/m; `None` is a perfect conductor.
    pub conductivity_s_per_m: Option<f64>,
    /// Polynomial degree of the current, 1 to [`MAX_DEGREE`].
    pub degree: usize,
    /// Current at the start as a sum of unknowns (empty at a free end).
    pub start_current: EndCurrent,
    /// Current at the end as a sum of unknowns.
    pub end_current: EndCurrent,
    /// First of the `degree − 1` unknowns b_2..b_degree.
    pub first_inner: usize,
    /// Index of the node at the start; elements that share a node touch there.
    pub start_node: usize,
    /// Index of the node at the end.
    pub end_node: usize,
    /// Below the earth's surface (only over soil).
    pub below: bool,
}

impl Element {
    /// Point at ξ in −1..=1, m.
    #[must_use]
    pub fn at(&self, xi: f64) -> Point {
        self.start * (0.5 * (1.0 - xi)) + self.end * (0.5 * (1.0 + xi))
    }

    /// Legendre coefficients c_0..c_degree of the current for given unknowns (the rest zero).
    #[must_use]
    pub fn legendre_current(&self, unknowns: &[Complex64]) -> [Complex64; MAX_DEGREE + 1] {
        let end = |map: &EndCurrent| map.iter().map(|&(k, f)| unknowns[k] * f).sum::<Complex64>();
        let (start, stop) = (end(&self.start_current), end(&self.end_current));
        let mut c = [Complex64::ZERO; MAX_DEGREE + 1];
        c[0] = (start + stop) * 0.5;
        c[1] = (stop - start) * 0.5;
        for q in 2..=self.degree {
            let b = unknowns[self.first_inner + q - 2];
            c[q] += b;
            c[q - 2] -= b;
        }
        c
    }

    /// The same map the other way round: how each unknown enters c_0..c_degree, as (unknown, factors).
    #[must_use]
    pub fn legendre_map(&self) -> Vec<(usize, [f64; MAX_DEGREE + 1])> {
        let mut out = Vec::with_capacity(self.start_current.len() + self.end_current.len() + self.degree - 1);
        self.each_unknown(|unknown, factors| out.push((unknown, factors)));
        out
    }

    /// Hand every unknown of the element and its factors in c_0..c_degree to a function.
    pub fn each_unknown(&self, mut take: impl FnMut(usize, [f64; MAX_DEGREE + 1])) {
        self.start_current.iter().for_each(|&(k, f)| take(k, [0.5 * f, -0.5 * f, 0.0, 0.0]));
        self.end_current.iter().for_each(|&(k, f)| take(k, [0.5 * f, 0.5 * f, 0.0, 0.0]));
        for q in 2..=self.degree {
            let mut c = [0.0; MAX_DEGREE + 1];
            c[q] = 1.0;
            c[q - 2] = -1.0;
            take(self.first_inner + q - 2, c);
        }
    }
}

/// A series gap of stated width with a uniform field: the place where a source or a lumped part acts.
///
/// Its current is Σ weight · (mean current of the element); its voltage acts uniformly along each leg of the gap.
#[derive(Debug, Clone)]
pub struct Port {
    /// Elements of the gap; the weight is the element's share of its leg, negative where it runs against the port.
    pub elements: Vec<(usize, f64)>,
}

/// The conductors as elements and unknowns.
#[derive(Debug, Clone)]
pub struct Mesh {
    /// All elements, conductor by conductor, in order of distance.
    pub elements: Vec<Element>,
    /// Number of unknowns.
    pub unknowns: usize,
    /// Port 0 is the feed gap; then one for each of the layout's parts; then one for each extra place asked for.
    pub ports: Vec<Port>,
    /// Elements of each conductor as a range of indices.
    pub conductor_elements: Vec<std::ops::Range<usize>>,
}

impl Mesh {
    /// Mesh of a layout for frequencies up to `highest_hz`.
    ///
    /// # Inputs
    /// - `highest_hz`: the shortest wavelength decides the longest element
    /// - `density`: how fine; [`Density::default`] is what the accuracy contract is proved for
    /// - `extra_gaps`: further gaps (conductor, from m, to m) that become ports after those of the parts
    #[must_use]
    pub fn new(layout: &Layout, highest_hz: f64, density: Density, extra_gaps: &[(usize, f64, f64)]) -> Self {
        let pieces = divide::divide(layout, highest_hz, density, extra_gaps, &Anchor::default());
        unknowns::number(layout, &pieces, extra_gaps)
    }

    /// As [`Mesh::new`], but so that meshes of the same station with ends moved along their last leg share every element
    /// away from those ends.
    #[must_use]
    pub fn anchored(layout: &Layout, highest_hz: f64, density: Density, anchor: &Anchor) -> Self {
        let pieces = divide::divide(layout, highest_hz, density, &[], anchor);
        unknowns::number(layout, &pieces, &[])
    }
}
