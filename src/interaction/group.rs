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
use super::rest::Kernels;
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
/// Beyond this many radians in the soil only the wave in the air is left.
const SPENT_RADIANS: f64 = 8.0;

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
                nodes[i * count + j] = far_nodes((&list[i], &list[j]), clearance(&lines[i].0, other), (k0, k1));
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
fn goes_on(d: &Element, e: &Element) -> bool {
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
fn far_nodes((one, two): (&Group, &Group), gap_m: f64, (k0, k1): (f64, f64)) -> Option<(u8, u8)> {
    let k = if gap_m * k1 > SPENT_RADIANS { k0 } else { k1 };
    let (n, m) = (nodes_for(one.line.length_m, gap_m, k)?, nodes_for(two.line.length_m, gap_m, k)?);
    // an element by itself takes two to four points
    let by_elements = 9 * one.members.len() * two.members.len();
    (n * m < by_elements).then_some((n as u8, m as u8))
}

/// Fewest nodes that interpolate the rest along a line.
///
/// With the nearest singularity at x = 1 + 2 gap/length the error falls as (x + √(x² − 1))^{−n} (Bernstein), and that of a wave as
/// 2 (kl/4)^n/n!.
fn nodes_for(length_m: f64, gap_m: f64, k: f64) -> Option<usize> {
    let x = 1.0 + 2.0 * gap_m / length_m;
    let rate = x + (x * x - 1.0).sqrt();
    let mut wave = 2.0;
    let mut near = 1.0;
    for n in 1..=NODES {
        near /= rate;
        wave *= 0.25 * k * length_m / n as f64;
        if n >= FEWEST && near < ERROR && wave < ERROR {
            return Some(n);
        }
    }
    None
}
