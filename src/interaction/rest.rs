//! What soil adds to a pair beyond e^{−jkR}/R: smooth kernels, integrated by plain product rules.

use super::block::{PairBlocks, SIDE};
use super::line::{Line, clearance};
use super::quadrature::{gauss, legendre};
use super::surroundings::SoilRest;
use crate::halfspace::Region;
use crate::layout::Point;
use crate::mesh::Element;
use crate::processor::mul_add;
use num_complex::Complex64;

/// Fewest points on an element; most points below it.
const FEWEST: usize = 2;
const MOST: usize = 24;

/// The soil's kernels between two straight lines.
#[derive(Debug, Clone, Copy)]
pub(super) struct Kernels {
    region: Region,
    /// One is horizontal where the other is not.
    pub(super) crossed: bool,
    /// Product of the tangents' horizontal parts, and of their vertical ones.
    level: f64,
    upright: f64,
    tangents: (Point, Point),
}

impl Kernels {
    /// For two lines on given sides of the surface.
    pub(super) fn of(e: &Element, f: &Element, region: Region) -> Self {
        let (t, u) = (e.tangent, f.tangent);
        let crossed = t.z.abs() * u.xy().norm() + u.z.abs() * t.xy().norm() > 1e-9;
        Self { region, crossed, level: t.x * u.x + t.y * u.y, upright: t.z * u.z, tangents: (t, u) }
    }

    /// t·K·t' and K_Φ between a point of each, 1/m.
    #[inline(always)]
    pub(super) fn at<const FMA: bool>(&self, soil: &SoilRest, p: Point, q: Point) -> (Complex64, Complex64) {
        let d = (p - q).xy();
        let rho = (d.x * d.x + d.y * d.y).sqrt();
        let k = soil.rest::<FMA>(self.region, rho, (p.z, q.z), self.crossed);
        let mut current = k.xx * self.level + k.zz * self.upright;
        if self.crossed && rho > 0.0 {
            let (t, u) = self.tangents;
            let toward = d / rho;
            // K_zx = p_rho cos φ, K_xz = −p_rho cos φ, φ from source to observer
            current += k.p_rho * (t.z * toward.dot(&u.xy()) - toward.dot(&t.xy()) * u.z);
        }
        (current, k.phi)
    }
}

/// Add the means over a pair of the soil's rest.
#[inline(always)]
pub(super) fn add<const FMA: bool>(e: &Element, f: &Element, soil: &SoilRest, region: Region, out: &mut PairBlocks) {
    let other = if region == Region::Across { Line::of(f) } else { Line::mirrored(f) };
    let gap = clearance(&Line::of(e), &other);
    let kernels = Kernels::of(e, f, region);
    let (one, two) = (gauss(points(e, gap, soil, kernels.crossed)), gauss(points(f, gap, soil, kernels.crossed)));
    for (xi, w) in one.nodes.iter().zip(&one.weights) {
        let p = e.at(*xi);
        let left = moments(one.nodes.len(), *xi, *w);
        let [mut current_re, mut current_im, mut potential_re, mut potential_im] = [[0.0; SIDE]; 4];
        for (eta, v) in two.nodes.iter().zip(&two.weights) {
            let right = moments(two.nodes.len(), *eta, *v);
            let (current, potential) = kernels.at::<FMA>(soil, p, f.at(*eta));
            for b in 0..SIDE {
                current_re[b] = mul_add::<FMA>(current.re, right[b], current_re[b]);
                current_im[b] = mul_add::<FMA>(current.im, right[b], current_im[b]);
                potential_re[b] = mul_add::<FMA>(potential.re, right[b], potential_re[b]);
                potential_im[b] = mul_add::<FMA>(potential.im, right[b], potential_im[b]);
            }
        }
        out.current.add_outer::<FMA>(&left, &current_re, &current_im);
        out.potential.add_outer::<FMA>(&left, &potential_re, &potential_im);
    }
}

/// Weight times P_0..P_3 at a point. A rule cannot tell moments of as high a degree as it has points: left out rather than wrong.
#[inline(always)]
pub(super) fn moments(points: usize, xi: f64, weight: f64) -> [f64; SIDE] {
    let p = legendre(xi);
    std::array::from_fn(|a| if a < points { 0.5 * weight * p[a] } else { 0.0 })
}

/// Points for an element of a pair.
///
/// The rest is smooth on the scale of its distance to the mirror point and of the wavelength or skin depth in the soil; crossed pairs
/// (vertical with horizontal) add a bounded kink at the mirror point. Against a rule with one to three
/// points more on every element the feed of the gauge hut moved by less than 10⁻⁵ at 3.5, 14 and 28 MHz.
pub(super) fn points(e: &Element, gap: f64, soil: &SoilRest, crossed: bool) -> usize {
    let ratio = gap / e.length_m;
    let turns = phase(e, gap, soil);
    if ratio > 6.0 && turns < 0.2 {
        return FEWEST;
    }
    let close = match ratio {
        r if r > 2.0 => 0,
        r if r > 0.5 => 1,
        _ => 2,
    };
    let crossing = if crossed { 4 * close } else { 0 };
    (e.degree + close + crossing + (1.5 * turns).ceil() as usize).clamp(FEWEST, MOST)
}

/// Nepers after which the wave along the soil is spent, and only the one in the air is left.
const SPENT: f64 = 10.0;

/// Radians by which the rest turns (or falls) along a line at a distance: at the soil's wavenumber down into it, and along the surface
/// too as far as that wave reaches.
pub(super) fn phase(e: &Element, gap_m: f64, soil: &SoilRest) -> f64 {
    let k1 = soil.wavenumber();
    let along = if -k1.im * gap_m > SPENT { soil.air_wavenumber() } else { k1.norm() };
    let (level, upright) = ((1.0 - e.tangent.z * e.tangent.z).max(0.0).sqrt(), e.tangent.z.abs());
    e.length_m * if e.below { (along * level).hypot(k1.norm() * upright) } else { along }
}
