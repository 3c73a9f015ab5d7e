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
    let within = |gap: GapLeg| -> Vec<(usize, f64)> {
        let GapLeg { conductor, from_m: from, to_m: to, sign } = gap;
        let slack = 1e-9 * (1.0 + to.abs());
        ranges[conductor]
            .clone()
            .filter(|&k| elements[k].from_m > from - slack && elements[k].to_m < to + slack)
            .map(|k| (k, sign * elements[k].length_m / (to - from)))
            .collect()
    };
    let port = |legs: Vec<GapLeg>| Port { elements: legs.into_iter().flat_map(within).collect() };
    let mut out = vec![port(layout.feed.hot.iter().map(|leg| feed_gap(layout, leg)).collect())];
    out.extend(layout.parts.iter().map(|p| port(gap_legs(layout, (p.conductor, p.from_m, p.to_m)))));
    out.extend(extra_gaps.iter().map(|&gap| port(gap_legs(layout, gap))));
    out
}

/// A stretch of a conductor that belongs to a gap.
#[derive(Debug, Clone, Copy)]
pub(super) struct GapLeg {
    pub(super) conductor: usize,
    pub(super) from_m: f64,
    pub(super) to_m: f64,
    /// Direction of the port's current along the conductor.
    pub(super) sign: f64,
}

/// Where the gap of a part acts.
///
/// Usually on its own stretch. A choke at 0 m of a coax on the cold terminal sits at the feed junction itself, between the shield and everything
/// else there. A source in one leg of a junction does what the opposite sources in all other legs do; put there, over the feed gap's
/// width, the choke and the feed share one gap, no charge collects between them, and without a counterpoise the
/// choke is in series with the feed exactly.
pub(super) fn gap_legs(layout: &Layout, (conductor, from_m, to_m): (usize, f64, f64)) -> Vec<GapLeg> {
    let own = FeedLeg { conductor, vertex: 0, forward: true };
    let is_shield = layout.coax.as_ref().is_some_and(|c| c.conductor == conductor);
    if is_shield && from_m == 0.0 && layout.feed.cold.contains(&own) && !layout.feed.cold_is_earth {
        let others = layout.feed.hot.iter().chain(layout.feed.cold.iter().filter(|leg| **leg != own));
        return others.map(|leg| feed_gap(layout, leg)).map(|leg| GapLeg { sign: -leg.sign, ..leg }).collect();
    }
    vec![GapLeg { conductor, from_m, to_m, sign: 1.0 }]
}

/// The first gap width of a leg at the feed; its sign is that of a current out of the feed point.
pub(super) fn feed_gap(layout: &Layout, leg: &FeedLeg) -> GapLeg {
    let at = layout.conductors[leg.conductor].distances_m()[leg.vertex];
    let gap_m = layout.feed.gap_m;
    let (from_m, to_m, sign) = if leg.forward { (at, at + gap_m, 1.0) } else { (at - gap_m, at, -1.0) };
    GapLeg { conductor: leg.conductor, from_m, to_m, sign }
}
