//! The soil's rest between groups of elements that are far from each other's images.
//!
//! Meshes are graded: most elements are much shorter than their distance from the mirror point, over which the rest varies. A
//! straight run of elements is one line here, and two lines that are far enough see each other at a few Gauss nodes only,
//! whatever the elements on them. What is near is left to `rest`, pair by pair.

use super::block::SIDE;
use super::fill::region_of;
use super::lagrange::stretch_weights;
use super::line::{Line, clearance};
use super::quadrature::gauss;
use super::rest::{Kernels, phase};
use super::surroundings::SoilRest;
use crate::halfspace::Region;
use crate::mesh::Element;

/// Most nodes on a group.
pub(super) const NODES: usize = 8;
/// Fewest.
const FEWEST: usize = 2;
/// Allowed error of the interpolation, relative to the rest.
const ERROR: f64 = 3e-6;
/// Longest group in radians of the wave in the air.
const AIR_RADIANS: f64 = 1.3;
/// And in the soil, unless that makes it shorter than [`SHORTEST_RADIANS`] in the air.
const SOIL_RADIANS: f64 = 2.0;
/// Groups are not made shorter than this, in radians of the wave in the air.
const SHORTEST_RADIANS: f64 = 0.25;
/// A straight run of elements.
#[derive(Debug, Clone)]
pub(super) struct Group {
    /// From its first element's start to its last one's end.
    pub(super) line: Element,
    /// Elements, first and one past the last.
    pub(super) members: std::ops::Range<usize>,
}

/// Elements gathered into groups, and which of these are far from each other.
#[derive(Debug, Clone)]
pub(super) struct Groups {
    pub(super) list: Vec<Group>,
    /// Group of every element.
    pub(super) of: Vec<u32>,
    /// Nodes on the first and second group of a pair; none where they are near.
    nodes: Vec<Option<(u8, u8)>>,
}

/// Kernels between the nodes of two groups, real and imaginary parts.
#[derive(Debug, Clone)]
pub(super) struct FarPair {
    pub(super) one: usize,
    pub(super) two: usize,
    /// Nodes on each.
    pub(super) nodes: (usize, usize),
    /// t·K·t', 1/m.
    pub(super) current: [[[f64; NODES]; NODES]; 2],
    /// K_Φ, 1/m.
    pub(super) potential: [[[f64; NODES]; NODES]; 2],
}

impl Groups {
    /// Gather elements; none is together with one on the other side of `split`.
    pub(super) fn of(elements: &[Element], split: usize, soil: &SoilRest) -> Self {
        let (k0, k1) = (soil.air_wavenumber(), soil.wavenumber().norm());
        let longest_m = (SOIL_RADIANS / k1).clamp(SHORTEST_RADIANS / k0, AIR_RADIANS / k0);
        let mut list: Vec<Group> = Vec::new();
        let mut of = Vec::with_capacity(elements.len());
        let mut from = 0;
        for k in 1..=elements.len() {
            let goes_on = k < elements.len() && k != split && goes_on(&elements[k - 1], &elements[k]);
            if !goes_on && k > from {
                cut_run(&elements[from..k], from, longest_m, &mut list);
                from = k;
            }
        }
        for (number, group) in list.iter().enumerate() {
            of.extend(group.members.clone().map(|_| number as u32));
        }
        let count = list.len();
        let lines: Vec<(Line, Line)> = list.iter().map(|g| (Line::of(&g.line), Line::mirrored(&g.line))).collect();
        let mut nodes = vec![None; count * count];
        for i in 0..count {
            for j in i..count {
                let region = region_of(&list[i].line, &list[j].line);
                let other = if region == Region::Across { &lines[j].0 } else { &lines[j].1 };
                nodes[i * count + j] = far_nodes((&list[i], &list[j]), clearance(&lines[i].0, other), soil);
            }
        }
        Self { list, of, nodes }
    }

    /// The pair of elements (i ≤ j) lies in groups far from each other.
    #[inline]
    pub(super) fn are_far(&self, i: usize, j: usize) -> bool {
        self.nodes_of(self.of[i] as usize, self.of[j] as usize).is_some()
    }

    #[inline]
    fn nodes_of(&self, one: usize, two: usize) -> Option<(u8, u8)> {
        self.nodes[one * self.list.len() + two]
    }

    /// Pairs of groups (one ≤ two) far from each other.
    pub(super) fn far(&self) -> impl Iterator<Item = (usize, usize, (usize, usize))> + '_ {
        let count = self.list.len();
        (0..count).flat_map(move |one| {
            (one..count).filter_map(move |two| {
                let (n, m) = self.nodes_of(one, two)?;
                Some((one, two, (usize::from(n), usize::from(m))))
            })
        })
    }

    /// Means over a member of P_b times the Lagrange polynomials of its group's nodes, rows b.
    pub(super) fn weights(&self, element: &Element, group: usize, nodes: usize) -> [[f64; NODES]; SIDE] {
        let line = &self.list[group].line;
        let at = |p: crate::layout::Point| 2.0 * (p - line.start).dot(&line.tangent) / line.length_m - 1.0;
        stretch_weights(nodes, at(element.start), at(element.end))
    }

    /// Kernels between two groups.
    #[inline(always)]
    pub(super) fn pair<const FMA: bool>(
        &self,
        (one, two): (usize, usize),
        nodes: (usize, usize),
        soil: &SoilRest,
    ) -> FarPair {
        let (e, f) = (&self.list[one].line, &self.list[two].line);
        let kernels = Kernels::of(e, f, region_of(e, f));
        let mut out =
            FarPair { one, two, nodes, current: [[[0.0; NODES]; NODES]; 2], potential: [[[0.0; NODES]; NODES]; 2] };
        let (rule, other) = (gauss(nodes.0), gauss(nodes.1));
        for (p, xi) in rule.nodes.iter().enumerate() {
            let here = e.at(*xi);
            for (q, eta) in other.nodes.iter().enumerate() {
                let (current, potential) = kernels.at::<FMA>(soil, here, f.at(*eta));
                (out.current[0][p][q], out.current[1][p][q]) = (current.re, current.im);
                (out.potential[0][p][q], out.potential[1][p][q]) = (potential.re, potential.im);
            }
        }
        out
    }
}

/// The second element goes straight on from the first.
pub(super) fn goes_on(d: &Element, e: &Element) -> bool {
    d.conductor == e.conductor
        && d.below == e.below
        && (d.to_m - e.from_m).abs() < 1e-9
        && d.tangent.dot(&e.tangent) > 1.0 - 1e-12
}

/// Cut a straight run into equal parts and give each the elements whose middles lie on it, the same from either end: one in the
/// middle between two parts stands alone.
fn cut_run(run: &[Element], first: usize, longest_m: f64, list: &mut Vec<Group>) {
    let (Some(head), Some(tail)) = (run.first(), run.last()) else { return };
    let (from_m, length_m) = (head.from_m, tail.to_m - head.from_m);
    let parts = (length_m / longest_m - 1e-9).ceil().max(1.0);
    let part = |e: &Element| {
        let at = (0.5 * (e.from_m + e.to_m) - from_m) / length_m * parts;
        ((at - 1e-6).floor() as i64, (at + 1e-6).floor() as i64)
    };
    let mut start = 0;
    for k in 1..=run.len() {
        if k < run.len() && part(&run[k]) == part(&run[start]) {
            continue;
        }
        let mut line = run[start].clone();
        line.end = run[k - 1].end;
        line.to_m = run[k - 1].to_m;
        line.length_m = (line.end - line.start).norm();
        list.push(Group { line, members: first + start..first + k });
        start = k;
    }
}

/// Nodes on each group of a pair this far apart; `None` where the rest is not smooth enough, or where few elements make it
/// not worth while.
fn far_nodes((one, two): (&Group, &Group), gap_m: f64, soil: &SoilRest) -> Option<(u8, u8)> {
    let (n, m) = (nodes_for(&one.line, gap_m, soil)?, nodes_for(&two.line, gap_m, soil)?);
    // an element by itself takes two to four points
    let by_elements = 9 * one.members.len() * two.members.len();
    (n * m < by_elements).then_some((n as u8, m as u8))
}

/// Fewest nodes that interpolate the rest along a line.
///
/// With the nearest singularity at x = 1 + 2 gap/length the error falls as (x + √(x² − 1))^{−n} (Bernstein), and that of a wave of
/// phase φ along the line as 2 (φ/4)^n/n!.
fn nodes_for(line: &Element, gap_m: f64, soil: &SoilRest) -> Option<usize> {
    let x = 1.0 + 2.0 * gap_m / line.length_m;
    let rate = x + (x * x - 1.0).sqrt();
    let quarter = 0.25 * phase(line, gap_m, soil);
    let (mut wave, mut near) = (2.0, 1.0);
    for n in 1..=NODES {
        near /= rate;
        wave *= quarter / n as f64;
        if n >= FEWEST && near < ERROR && wave < ERROR {
            return Some(n);
        }
    }
    None
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]
    use super::*;
    use crate::interaction::{Extent, Surroundings};
    use crate::layout::{EarthAt, Layout};
    use crate::mesh::{Density, Mesh};
    use crate::station::{Document, Embedded};
    use num_complex::Complex64;

    fn mesh(model: &str) -> (Layout, Mesh) {
        let station = Document::parse(model, "model").unwrap().station(&Embedded).unwrap();
        let layout = Layout::place(&station).unwrap();
        let mesh = Mesh::new(&layout, 28e6, Density { factor: 1.5 }, &[]);
        (layout, mesh)
    }

    /// Means of the kernels over two elements, P_0 on both, by a rule finer than any.
    fn brute(e: &Element, f: &Element, soil: &SoilRest) -> [Complex64; 2] {
        let (kernels, rule) = (Kernels::of(e, f, region_of(e, f)), gauss(12));
        let mut out = [Complex64::ZERO; 2];
        for (x, w) in rule.nodes.iter().zip(&rule.weights) {
            for (y, v) in rule.nodes.iter().zip(&rule.weights) {
                let (current, potential) = kernels.at::<false>(soil, e.at(*x), f.at(*y));
                out[0] += current * (0.25 * w * v);
                out[1] += potential * (0.25 * w * v);
            }
        }
        out
    }

    #[test]
    fn groups_see_each_other_as_their_elements_do() {
        let models = [
            include_str!("../../models/gauge-hut-rod.toml"),
            include_str!("../../models/reservoir-radials-buried.toml"),
            include_str!("../../models/quarry-on-rock.toml"),
        ];
        let soils = [(13.0, 5e-3), (3.0, 1e-4), (81.0, 5.0)];
        let (mut worst, mut pairs, mut coarse) = (0.0f64, 0, 0.0f64);
        for (model, hz) in models.iter().flat_map(|m| [1.8e6, 7.1e6, 28e6].map(|hz| (m, hz))) {
            let (layout, mesh) = mesh(model);
            for (permittivity, conductivity_s_per_m) in soils {
                let earth = EarthAt::Soil { permittivity, conductivity_s_per_m };
                let surroundings = Surroundings::new(hz, earth, &Extent::of(&layout)).unwrap();
                let soil = surroundings.soil().unwrap();
                let groups = Groups::of(&mesh.elements, mesh.elements.len(), soil);
                for (one, two, nodes) in groups.far().step_by(7) {
                    let pair = groups.pair::<false>((one, two), nodes, soil);
                    let (i, j) = (groups.list[one].members.start, groups.list[two].members.end - 1);
                    let (e, f) = (&mesh.elements[i], &mesh.elements[j]);
                    let (left, right) = (groups.weights(e, one, nodes.0), groups.weights(f, two, nodes.1));
                    let mean = |kernel: &[[[f64; NODES]; NODES]; 2]| -> Complex64 {
                        let terms = (0..NODES).flat_map(|p| (0..NODES).map(move |q| (p, q)));
                        let term = |(p, q): (usize, usize)| {
                            Complex64::new(kernel[0][p][q], kernel[1][p][q]) * (left[0][p] * right[0][q])
                        };
                        terms.map(term).sum()
                    };
                    let wanted = brute(e, f, soil);
                    let got = [mean(&pair.current), mean(&pair.potential)];
                    let across = region_of(e, f) == Region::Across;
                    let other = if across { Line::of(f) } else { Line::mirrored(f) };
                    let far_m = clearance(&Line::of(e), &other);
                    for (a, b) in got.iter().zip(wanted) {
                        worst = worst.max((a - b).norm() * far_m);
                        coarse = coarse.max((pair.potential[0][0][0] - b.re).abs() * far_m);
                    }
                    pairs += 1;
                }
            }
        }
        assert!(pairs > 500, "{pairs} pairs");
        // times the distance: twice the tables' own tolerance
        assert!(worst < 2e-5, "{worst:e}");
        assert!(coarse > 1e-2, "one node must not do: {coarse:e}");
    }
}
