//! Every pair of elements with what does not depend on frequency: how it is integrated, and its static moments.

use super::kernel::MOST_POINTS;
use super::line::{Line, Tubes, clearance, tubes};
use super::near::{Static, moments};
use super::quadrature::{gauss, legendre};
use super::sleeve::{Sleeve, over_jacket};
use crate::mesh::{Element, Mesh};
use std::collections::HashMap;

/// A pair (one, two) of elements, `two` possibly as its mirror image.
#[derive(Debug, Clone)]
pub(crate) struct Pair {
    pub(crate) one: usize,
    pub(crate) two: usize,
    /// c² added to the squared distance between axis points, m².
    pub(crate) offset_m2: f64,
    /// Gauss points on each element.
    pub(crate) points: (u8, u8),
    /// For pairs that touch or lie close: index of the static moments.
    pub(crate) near: Option<u32>,
}

/// All pairs with one ≤ two.
#[derive(Debug, Clone)]
pub(crate) struct Pairs {
    pub(crate) list: Vec<Pair>,
    pub(crate) statics: Vec<Static>,
}

/// Nearer than this many lengths of the longer element: static part in closed form.
const NEAR_LENGTHS: f64 = 0.8;
/// Gauss points on both elements for the smooth rest of a near pair.
const NEAR_POINTS: u8 = 6;

impl Pairs {
    /// Note which rules occur on the elements: as the first of a pair, and as the second.
    pub(super) fn note_rules(&self, first: &mut [u16], second: &mut [u16]) {
        for pair in &self.list {
            first[pair.one] |= 1 << pair.points.0;
            second[pair.two] |= 1 << pair.points.1;
        }
    }

    pub(crate) fn of(mesh: &Mesh, mirrored: bool, known: &Statics, keep: impl Fn(usize, usize) -> bool) -> Self {
        let lines: Vec<Line> = mesh.elements.iter().map(Line::of).collect();
        let others: Vec<Line> =
            if mirrored { mesh.elements.iter().map(Line::mirrored).collect() } else { lines.clone() };
        let mut list = Vec::new();
        let mut statics = Vec::new();
        for (i, line) in lines.iter().enumerate() {
            for (j, other) in others.iter().enumerate().skip(i) {
                if !keep(i, j) {
                    continue;
                }
                let pair = classify(mesh, (i, line), (j, other), mirrored);
                let near = pair.1.map(|tubes| {
                    statics.push(known.get(line, other, tubes));
                    (statics.len() - 1) as u32
                });
                list.push(Pair { near, ..pair.0 });
            }
        }
        Self { list, statics }
    }
}

/// Static moments of pairs on one line, which depend only on how the two lie to each other: kept for other meshes.
#[derive(Debug, Clone, Default)]
pub struct Statics(HashMap<[i64; 7], Static>);

impl Statics {
    /// How two elements of one line lie to each other, and how their radii enter; `None` for others.
    fn key(one: &Line, two: &Line, tubes: Tubes) -> Option<[i64; 7]> {
        let along = one.tangent.dot(&two.tangent);
        let sight = two.start - one.start;
        let offset_m = sight.dot(&one.tangent);
        let off_axis_m = (sight - one.tangent * offset_m).norm();
        if along.abs() < 1.0 - 1e-14 || off_axis_m > 1e-9 * (one.length_m + two.length_m) {
            return None;
        }
        let fine = |x: f64| (x * 1e10).round() as i64;
        let how = if let Tubes::Offset(c2) = tubes { fine(c2.sqrt()) } else { -1 };
        let radii = [one.radius_m, two.radius_m].map(fine);
        Some([fine(one.length_m), fine(two.length_m), fine(offset_m), along.signum() as i64, radii[0], radii[1], how])
    }

    pub(super) fn get(&self, one: &Line, two: &Line, tubes: Tubes) -> Static {
        let key = if self.0.is_empty() { None } else { Self::key(one, two, tubes) };
        key.and_then(|key| self.0.get(&key)).copied().unwrap_or_else(|| moments(one, two, tubes))
    }

    /// Keep those of a mesh's pairs.
    pub(super) fn keep(&mut self, mesh: &Mesh, pairs: &Pairs) {
        for pair in &pairs.list {
            let Some(index) = pair.near else { continue };
            let (e, f) = (&mesh.elements[pair.one], &mesh.elements[pair.two]);
            let (one, two) = (Line::of(e), Line::of(f));
            if let Some(key) = Self::key(&one, &two, tubes(&one, &two, shares_node(e, f))) {
                self.0.insert(key, pairs.statics[index as usize]);
            }
        }
    }
}

impl Statics {
    /// Keep those of a mesh's jackets.
    pub(super) fn keep_sleeves(&mut self, mesh: &Mesh, sleeves: &[Sleeve]) {
        for sleeve in sleeves {
            let (e, f) = (&mesh.elements[sleeve.one], &mesh.elements[sleeve.two]);
            let Some(jacket) = e.jacket else { continue };
            let (one, outside) = over_jacket(e, f, jacket.thickness_m);
            if let Some(key) = Self::key(&one, &outside, Tubes::Coaxial) {
                self.0.insert(key, sleeve.over);
            }
        }
    }
}

/// How a pair is integrated; the second value is set for near pairs.
fn classify(mesh: &Mesh, one: (usize, &Line), two: (usize, &Line), mirrored: bool) -> (Pair, Option<Tubes>) {
    let (e, f) = (&mesh.elements[one.0], &mesh.elements[two.0]);
    let touch = if mirrored { clearance(one.1, two.1) < 1e-9 } else { shares_node(e, f) };
    let tubes = tubes(one.1, two.1, touch);
    let offset_m2 = match tubes {
        Tubes::Coaxial => e.radius_m.powi(2) + f.radius_m.powi(2),
        Tubes::Offset(c2) => c2,
    };
    let gap = clearance(one.1, two.1);
    let near = tubes == Tubes::Coaxial || gap < NEAR_LENGTHS * e.length_m.max(f.length_m);
    let points = if near {
        let of = |degree: usize, length: f64, other: f64| {
            if length < 0.02 * other { degree as u8 + 1 } else { NEAR_POINTS }
        };
        (of(e.degree, e.length_m, f.length_m), of(f.degree, f.length_m, e.length_m))
    } else {
        (far_points(e, gap), far_points(f, gap))
    };
    (Pair { one: one.0, two: two.0, offset_m2, points, near: None }, near.then_some(tubes))
}

fn shares_node(e: &Element, f: &Element) -> bool {
    [e.start_node, e.end_node].iter().any(|n| *n == f.start_node || *n == f.end_node)
}

/// Gauss points for an element seen from a distance.
///
/// With the nearest singularity at x = 1 + 2 gap/length the rule's error falls as (x + √(x² − 1))^{−2n}; the table keeps it below 10⁻⁶
/// of the pair's moment, and the laws over whole matrices hold it.
pub(super) fn far_points(e: &Element, gap: f64) -> u8 {
    let ratio = gap / e.length_m;
    let least = e.degree as u8 + 1;
    match ratio {
        r if r > 60.0 => 3,
        r if r > 4.0 => least,
        r if r > 1.5 => least.max(4) + 1,
        _ => least.max(4) + 2,
    }
}

/// Gauss points and their places, weights times Legendre polynomials ready for the moments.
#[derive(Debug, Clone)]
pub(crate) struct Nodes {
    /// For each element and rule size (index = points): coordinates.
    pub(crate) at: Vec<Vec<[Vec<f64>; 3]>>,
    /// For each rule size: w_q P_a(ξ_q) / 2 at each point q, a = 0..=3.
    pub(crate) weighted: Vec<Vec<[f64; 4]>>,
}

/// Largest rule used on a pair.
const LARGEST_RULE: usize = MOST_POINTS;

impl Nodes {
    /// Points on every element for the rules that occur (one bit for each number of points).
    pub(crate) fn of(lines: &[Line], used: &[u16]) -> Self {
        let at = lines
            .iter()
            .zip(used)
            .map(|(line, used)| {
                (0..=LARGEST_RULE)
                    .map(|n| {
                        if used & (1 << n) == 0 {
                            return std::array::from_fn(|_| Vec::new());
                        }
                        let rule = gauss(n.max(1));
                        std::array::from_fn(|axis| rule.nodes.iter().map(|x| line.at(*x)[axis]).collect())
                    })
                    .collect()
            })
            .collect();
        let weighted = (0..=LARGEST_RULE)
            .map(|n| {
                let rule = gauss(n.max(1));
                // n points cannot tell moments of degree n and more: left out rather than wrong
                let least = |a: usize| if a < n.max(1) { 1.0 } else { 0.0 };
                let at = |(x, w): (&f64, &f64)| {
                    let p = legendre(*x);
                    std::array::from_fn(|a| 0.5 * w * p[a] * least(a))
                };
                rule.nodes.iter().zip(&rule.weights).map(at).collect()
            })
            .collect();
        Self { at, weighted }
    }
}
