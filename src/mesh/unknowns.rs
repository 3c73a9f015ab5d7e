//! From pieces to elements with numbered unknowns and ports.

use super::divide::Piece;
use super::{Element, EndCurrent, Mesh, Port};
use crate::layout::{Earth, FeedLeg, Layout, Point};

/// Number the currents: N element ends at a junction share N − 1 unknowns (N where it is bonded to a perfect earth).
pub(super) fn number(layout: &Layout, pieces: &[Vec<Piece>], extra_gaps: &[(usize, f64, f64)]) -> Mesh {
    let mut elements = Vec::new();
    let mut conductor_elements = Vec::new();
    let mut nodes = Nodes::new(layout);
    for (index, conductor) in layout.conductors.iter().enumerate() {
        let first = elements.len();
        let count = pieces[index].len();
        for (k, piece) in pieces[index].iter().enumerate() {
            let start_node = if k == 0 { nodes.at_vertex(index, 0) } else { nodes.last };
            let end_node = match piece.end_vertex {
                Some(vertex) => nodes.at_vertex(index, vertex),
                None => nodes.fresh(),
            };
            debug_assert!(k + 1 < count || piece.end_vertex == Some(conductor.points.len() - 1));
            elements.push(element(layout, index, piece, start_node, end_node));
        }
        conductor_elements.push(first..elements.len());
    }
    let unknowns = assign_currents(&mut elements, &nodes);
    let ports = ports(layout, &elements, &conductor_elements, extra_gaps);
    Mesh { elements, unknowns, ports, conductor_elements }
}

fn element(layout: &Layout, conductor: usize, piece: &Piece, start_node: usize, end_node: usize) -> Element {
    let c = &layout.conductors[conductor];
    let along: Point = piece.end - piece.start;
    let length_m = along.norm();
    let middle_up = 0.5 * (piece.start.z + piece.end.z);
    Element {
        conductor,
        from_m: piece.from_m,
        to_m: piece.to_m,
        start: piece.start,
        end: piece.end,
        tangent: along / length_m,
        length_m,
        radius_m: c.radius_m,
        jacket: c.jacket,
        conductivity_s_per_m: c.conductivity_s_per_m,
        degree: piece.degree,
        start_current: EndCurrent::new(),
        end_current: EndCurrent::new(),
        first_inner: 0,
        start_node,
        end_node,
        below: matches!(layout.earth, Earth::Soil(_)) && middle_up < 0.0,
    }
}

/// Node numbers: one for each junction, one for every other vertex or cut.
struct Nodes {
    junction_of: Vec<Vec<Option<usize>>>,
    to_earth: Vec<bool>,
    last: usize,
}

impl Nodes {
    fn new(layout: &Layout) -> Self {
        let mut junction_of: Vec<Vec<Option<usize>>> =
            layout.conductors.iter().map(|c| vec![None; c.points.len()]).collect();
        for (node, junction) in layout.junctions.iter().enumerate() {
            for &(conductor, vertex) in &junction.members {
                junction_of[conductor][vertex] = Some(node);
            }
        }
        let to_earth = layout.junctions.iter().map(|j| j.to_earth).collect();
        Self { junction_of, to_earth, last: 0 }
    }

    fn fresh(&mut self) -> usize {
        self.to_earth.push(false);
        self.last = self.to_earth.len() - 1;
        self.last
    }

    fn at_vertex(&mut self, conductor: usize, vertex: usize) -> usize {
        match self.junction_of[conductor][vertex] {
            Some(node) => {
                self.last = node;
                node
            }
            None => self.fresh(),
        }
    }
}

/// Give each element its end currents and inner unknowns; returns the number of unknowns.
fn assign_currents(elements: &mut [Element], nodes: &Nodes) -> usize {
    let mut ends: Vec<Vec<(usize, bool)>> = vec![Vec::new(); nodes.to_earth.len()];
    for (k, e) in elements.iter().enumerate() {
        ends[e.start_node].push((k, true));
        ends[e.end_node].push((k, false));
    }
    let mut next = 0;
    let mut done = vec![false; ends.len()];
    for k in 0..elements.len() {
        for node in [elements[k].start_node, elements[k].end_node] {
            if !done[node] {
                done[node] = true;
                next = share_node(elements, &ends[node], nodes.to_earth[node], next);
            }
        }
        elements[k].first_inner = next;
        next += elements[k].degree - 1;
    }
    next
}

/// Outflow o of an end is +I at an element's start and −I at its end; free outflows are the unknowns, the first end balances.
fn share_node(elements: &mut [Element], ends: &[(usize, bool)], to_earth: bool, first: usize) -> usize {
    let mut set = |&(k, at_start): &(usize, bool), outflow: EndCurrent| {
        if at_start {
            elements[k].start_current = outflow;
        } else {
            elements[k].end_current = outflow.into_iter().map(|(u, f)| (u, -f)).collect();
        }
    };
    if to_earth {
        for (n, end) in ends.iter().enumerate() {
            set(end, vec![(first + n, 1.0)]);
        }
        return first + ends.len();
    }
    if ends.len() > 1 {
        set(&ends[0], (0..ends.len() - 1).map(|n| (first + n, -1.0)).collect());
    }
    for (n, end) in ends.iter().skip(1).enumerate() {
        set(end, vec![(first + n, 1.0)]);
    }
    first + ends.len().saturating_sub(1)
}

fn ports(
    layout: &Layout,
    elements: &[Element],
    ranges: &[std::ops::Range<usize>],
    extra_gaps: &[(usize, f64, f64)],
) -> Vec<Port> {
    let within = |conductor: usize, from: f64, to: f64, sign: f64| -> Vec<(usize, f64)> {
        let slack = 1e-9 * (1.0 + to.abs());
        ranges[conductor]
            .clone()
            .filter(|&k| elements[k].from_m > from - slack && elements[k].to_m < to + slack)
            .map(|k| (k, sign * elements[k].length_m / (to - from)))
            .collect()
    };
    let feed = layout.feed.hot.iter().flat_map(|leg| {
        let (from, to) = feed_gap(layout, leg);
        within(leg.conductor, from, to, if leg.forward { 1.0 } else { -1.0 })
    });
    let mut out = vec![Port { elements: feed.collect() }];
    out.extend(layout.parts.iter().map(|p| Port { elements: within(p.conductor, p.from_m, p.to_m, 1.0) }));
    out.extend(extra_gaps.iter().map(|&(c, from, to)| Port { elements: within(c, from, to, 1.0) }));
    out
}

/// Interval along the conductor that the feed gap takes on a hot leg, m.
pub(super) fn feed_gap(layout: &Layout, leg: &FeedLeg) -> (f64, f64) {
    let at = layout.conductors[leg.conductor].distances_m()[leg.vertex];
    if leg.forward { (at, at + layout.feed.gap_m) } else { (at - layout.feed.gap_m, at) }
}
