//! The coax as a choke sees it: where a gap fits, where the mesh gets ports, how to interpolate between them.
//!
//! The line is cut into *stretches* at everything that kinks what a choke does: ends, joins, bends, the entry, parts that stay.
//! Within a stretch all port parameters are smooth in u(s) = s/h_max + [ln(1 + γ d/h₀) − ln(1 + γ d′/h₀)]/γ, with d and d′
//! the distances from the stretch's first and last place: logarithmic near its ends, where charge piles up, linear
//! between. Ports stand at equal steps of u; between them polynomials in u of degree [`STENCIL`] − 1.

use crate::layout::Layout;

/// Width of a choke's gap in radii of the shield, as everywhere.
const GAP_RADII: f64 = 4.0;
/// A place this close past a join still counts as at the join, m (as the layout does).
const JOIN_M: f64 = 1e-3;
/// A bend below this angle is no feature, radians.
const BEND_RADIANS: f64 = 0.05;
/// Widest step between ports in wavelengths of the highest frequency. Set by the errors measured in tests/laws/place.rs.
const WIDEST_WAVELENGTHS: f64 = 0.1;
/// Steps grow by this much of the distance from a stretch's end. At 1.4, and with first steps of 8 gap widths at bends, places a few
/// centimetres past a bend at ground level were wrong by 11 % of the largest current; so are none by more than 1 %.
const GROWTH: f64 = 0.8;
/// First step at an end, a join, a bend, the entry or a part, in gap widths.
const FIRST_STEP_GAPS: f64 = 2.0;
/// The first port past the one at 0 m begins here, in gap widths.
const PAST_FEED_GAPS: f64 = 0.25;
/// Most ports that one interpolated value is taken from.
const STENCIL: usize = 8;

/// Part of the line between two features.
#[derive(Debug, Clone)]
pub(super) struct Stretch {
    /// Start of the metal, m.
    pub(super) from_m: f64,
    /// End of the metal, m.
    pub(super) to_m: f64,
    /// The port at 0 m alone: a choke there is at the feed junction, which nothing beside it continues smoothly.
    at_feed: bool,
    /// Index of its first port.
    pub(super) first_node: usize,
    /// Centres of its ports, m, ascending.
    pub(super) nodes_m: Vec<f64>,
    scale: Scale,
}

/// Something that kinks what a choke does.
#[derive(Debug, Clone, Copy)]
struct Feature {
    from_m: f64,
    to_m: f64,
}

/// The coordinate u of a stretch.
#[derive(Debug, Clone, Copy)]
struct Scale {
    low_m: f64,
    high_m: f64,
    widest_m: f64,
    /// First step at both ends.
    first_m: f64,
}

impl Scale {
    fn at(&self, s: f64) -> f64 {
        let log = |d: f64| (GROWTH * d.max(0.0) / self.first_m).ln_1p() / GROWTH;
        (s - self.low_m) / self.widest_m + log(s - self.low_m) - log(self.high_m - s)
    }

    /// Place with a wanted u, by bisection: u rises with s.
    fn inverse(&self, u: f64) -> f64 {
        let (mut low, mut high) = (self.low_m, self.high_m);
        for _ in 0..60 {
            let middle = 0.5 * (low + high);
            if self.at(middle) < u {
                low = middle;
            } else {
                high = middle;
            }
        }
        0.5 * (low + high)
    }
}

/// Where a choke sits, in terms of the ports around it.
#[derive(Debug, Clone)]
pub(super) struct Seat {
    /// Index of the stretch.
    pub(super) stretch: usize,
    /// Centre of the choke's gap, m.
    pub(super) centre_m: f64,
    /// First port of the stencil.
    pub(super) first_node: usize,
    /// Weight of each port from there on; they sum to one.
    pub(super) weights: Vec<f64>,
}

/// The coax of one station.
#[derive(Debug, Clone)]
pub(super) struct Line {
    /// Index of the shield.
    pub(super) conductor: usize,
    /// Width of a gap, m.
    pub(super) gap_m: f64,
    /// Whole length, m.
    pub(super) length_m: f64,
    /// Joins between the ends, m.
    pub(super) joins_m: Vec<f64>,
    /// Everything a choke can sit in, in order.
    pub(super) stretches: Vec<Stretch>,
    /// Gaps of the parts that stay, m.
    taken_m: Vec<(f64, f64)>,
    /// Ends, joins: a choke's gap never crosses these, m.
    walls_m: Vec<f64>,
}

impl Line {
    /// The coax of a layout whose chokes to be placed are already taken out; `None` without a coax.
    pub(super) fn of(layout: &Layout, shortest_wavelength_m: f64) -> Option<Self> {
        let coax = layout.coax.as_ref()?;
        let shield = &layout.conductors[coax.conductor];
        let at = shield.distances_m();
        let length_m = *at.last()?;
        let gap_m = GAP_RADII * shield.radius_m;
        let joined = |v: usize| {
            layout
                .junctions
                .iter()
                .any(|j| j.members.contains(&(coax.conductor, v)) && (j.members.len() > 1 || j.to_earth))
        };
        let joins_m: Vec<f64> = (1..at.len() - 1).filter(|&v| joined(v)).map(|v| at[v]).collect();
        let start_m =
            if layout.feed.hot.iter().any(|l| l.conductor == coax.conductor) { layout.feed.gap_m } else { 0.0 };
        let mut walls_m = vec![start_m, length_m];
        walls_m.extend(&joins_m);
        walls_m.sort_by(f64::total_cmp);
        let parts = layout.parts.iter().filter(|p| p.conductor == coax.conductor);
        let taken_m: Vec<(f64, f64)> = parts.map(|p| (p.from_m, p.to_m)).collect();
        let bends = (1..at.len() - 1).filter(|&v| {
            let (a, b) = (shield.points[v] - shield.points[v - 1], shield.points[v + 1] - shield.points[v]);
            a.angle(&b) > BEND_RADIANS
        });
        let hard = |(from_m, to_m): (f64, f64)| Feature { from_m, to_m };
        let mut features: Vec<Feature> = walls_m.iter().map(|&x| hard((x, x))).collect();
        features.push(hard((coax.entry_m, coax.entry_m)));
        features.extend(taken_m.iter().map(|g| hard(*g)));
        features.extend(bends.map(|v| hard((at[v], at[v]))));
        features.sort_by(|a, b| a.from_m.total_cmp(&b.from_m));
        features.dedup_by(|later, first| later.to_m == first.to_m && later.from_m == first.from_m);
        let mut line =
            Self { conductor: coax.conductor, gap_m, length_m, joins_m, stretches: Vec::new(), taken_m, walls_m };
        line.lay_ports(&features, shortest_wavelength_m);
        Some(line)
    }

    fn lay_ports(&mut self, features: &[Feature], shortest_wavelength_m: f64) {
        for pair in features.windows(2) {
            let (mut from_m, to_m) = (pair[0].to_m, pair[1].from_m);
            if to_m - from_m < self.gap_m * (1.0 - 1e-9) {
                continue;
            }
            if from_m == 0.0 {
                self.port_at_feed();
                from_m = PAST_FEED_GAPS * self.gap_m;
                if to_m - from_m < self.gap_m {
                    continue;
                }
            }
            let first_node = self.node_count();
            let (low_m, high_m) = (from_m + 0.5 * self.gap_m, (to_m - 0.5 * self.gap_m).max(from_m + 0.5 * self.gap_m));
            let scale = Scale {
                low_m,
                high_m,
                widest_m: WIDEST_WAVELENGTHS * shortest_wavelength_m,
                first_m: FIRST_STEP_GAPS * self.gap_m,
            };
            let (start, end) = (scale.at(low_m), scale.at(high_m));
            let mut steps = (end - start).ceil().max(1.0) as usize;
            // ports no closer than a gap's width, so that their gaps do not overlap
            steps = steps.min(((high_m - low_m) / self.gap_m).floor() as usize);
            let inner = (1..steps).map(|n| scale.inverse(start + (end - start) * n as f64 / steps as f64));
            let mut nodes_m: Vec<f64> = std::iter::once(low_m).chain(inner).collect();
            if steps > 0 {
                nodes_m.push(high_m);
            }
            self.stretches.push(Stretch { from_m, to_m, at_feed: false, first_node, nodes_m, scale });
        }
    }

    fn port_at_feed(&mut self) {
        let centre = 0.5 * self.gap_m;
        let scale = Scale { low_m: centre, high_m: centre, widest_m: self.gap_m, first_m: self.gap_m };
        let (from_m, to_m, first_node) = (0.0, self.gap_m, self.node_count());
        self.stretches.push(Stretch { from_m, to_m, at_feed: true, first_node, nodes_m: vec![centre], scale });
    }

    /// Number of ports.
    pub(super) fn node_count(&self) -> usize {
        self.stretches.iter().map(|s| s.nodes_m.len()).sum()
    }

    /// Gaps of all ports for the mesher: (conductor, from m, to m).
    pub(super) fn gaps(&self) -> Vec<(usize, f64, f64)> {
        let half = 0.5 * self.gap_m;
        let nodes = self.stretches.iter().flat_map(|s| s.nodes_m.iter().map(move |c| (s, *c)));
        nodes
            .map(|(s, c)| {
                // exactly on the stretch's end where it is meant to be, so that no sliver of an element is left
                let from = if c - half - s.from_m < 1e-9 { s.from_m } else { c - half };
                let to = if s.to_m - c - half < 1e-9 { s.to_m } else { c + half };
                (self.conductor, from, to)
            })
            .collect()
    }

    /// Where a choke at a distance from the feed point sits; `None` beyond the line and where a part that stays is in the way.
    pub(super) fn seat(&self, at_m: f64) -> Option<Seat> {
        if at_m > self.length_m + JOIN_M || self.stretches.is_empty() {
            return None;
        }
        let wall = self.walls_m.iter().skip(1).position(|&to| at_m <= to + JOIN_M)?;
        let (low, high) = (self.walls_m[wall], self.walls_m[wall + 1]);
        let half = 0.5 * self.gap_m;
        let centre = at_m.max(low + half).min(high - half);
        if self.taken_m.iter().any(|&(from, to)| centre - half < to - 1e-9 && from < centre + half - 1e-9) {
            return None;
        }
        // a stretch between the same walls, the nearest where the gap would straddle a bend; at one the feed side
        let inside = |s: &&Stretch| {
            s.from_m >= low - 1e-9 && s.to_m <= high + 1e-9 && (!s.at_feed || centre <= s.nodes_m[0] + 1e-9)
        };
        let off = |s: &Stretch| (s.from_m - centre).max(centre - s.to_m).max(0.0);
        let nearest = self.stretches.iter().filter(inside).min_by(|a, b| off(a).total_cmp(&off(b)))?;
        let stretch = self.stretches.iter().position(|s| s.first_node == nearest.first_node)?;
        let first = nearest.nodes_m[0];
        let last = *nearest.nodes_m.last()?;
        Some(self.seat_in(stretch, centre.clamp(first, last)))
    }

    fn seat_in(&self, stretch: usize, centre_m: f64) -> Seat {
        let s = &self.stretches[stretch];
        let count = s.nodes_m.len();
        let size = count.min(STENCIL);
        let above = s.nodes_m.partition_point(|c| *c < centre_m);
        let first = above.saturating_sub(size / 2).min(count - size);
        let start = s.scale.at(s.nodes_m[0]);
        let step = if count > 1 { (s.scale.at(s.nodes_m[count - 1]) - start) / (count - 1) as f64 } else { 1.0 };
        let t = (s.scale.at(centre_m) - start) / step - first as f64;
        // Lagrange's weights for ports at 0, 1, 2, …
        let weight =
            |k: usize| (0..size).filter(|&j| j != k).map(|j| (t - j as f64) / (k as f64 - j as f64)).product::<f64>();
        Seat { stretch, centre_m, first_node: s.first_node + first, weights: (0..size).map(weight).collect() }
    }

    /// Places a step apart from 0 to an end, each join and the end itself included, and the next place after each join.
    pub(super) fn places(&self, step_m: f64, end_m: f64) -> Vec<f64> {
        let joins: Vec<f64> = self.joins_m.iter().copied().filter(|j| *j < end_m - JOIN_M).collect();
        let apart = |x: f64| x < end_m - JOIN_M && joins.iter().all(|j| (x - j).abs() > JOIN_M);
        let count = (end_m / step_m).floor() as usize;
        // n·step in whole micrometres, so that 0.07 is 0.07
        let mut places: Vec<f64> =
            (0..=count).map(|n| (n as f64 * step_m * 1e6).round() / 1e6).filter(|x| apart(*x)).collect();
        for join in &joins {
            places.push(*join);
            let beside = join + 0.01;
            if !places.iter().any(|p| *p > *join && *p <= beside) && apart(beside) {
                places.push(beside);
            }
        }
        places.push(end_m);
        places.sort_by(f64::total_cmp);
        places.retain(|p| self.seat(*p).is_some());
        places
    }
}
