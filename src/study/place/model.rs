//! One frequency of one variant, reduced to what a choke at any place needs.
//!
//! With 1 V on the feed and a choke Z at s: I_s = Y_s0/(1 + Z Y_ss), feed admittance Y_00 − Y_0s Z I_s, and every current or potential
//! O = O_0 − O_s Z I_s, O_s what 1 V at s excites there. Parts that stay are loaded on first (Sherman–Morrison–Woodbury on the
//! small port matrix), so that here only the feed and the places remain.

use super::line::{Line, Seat};
use crate::interaction::quadrature::legendre;
use crate::interaction::{Interaction, Legendre, SingularMatrix, Surroundings};
use crate::layout::Layout;
use crate::mesh::{Element, Mesh};
use crate::ports::PortModel;
use faer::Mat;
use nalgebra::DMatrix;
use num_complex::Complex64;

/// Distance between samples of the current near the radio, m.
const SAMPLE_M: f64 = 0.05;

/// A point of the shield: element of the coax (counted on the coax) and ξ on it.
#[derive(Debug, Clone, Copy)]
struct Spot {
    element: usize,
    xi: f64,
    at_m: f64,
}

/// What is read off the currents: the same for every frequency of a mesh.
#[derive(Debug, Clone)]
pub(super) struct Readings {
    /// Where the current goes on into the shack: element of the mesh and ξ; `None` where nothing is modelled beyond.
    entry_current: Option<(usize, f64)>,
    /// Potentials at the entry and the end: element of the mesh and ξ; `None` below the surface.
    potentials: [Option<(usize, f64)>; 2],
    /// Samples within a metre of the radio end.
    last_metre: Vec<Spot>,
}

impl Readings {
    /// For a mesh of a layout with a coax.
    pub(super) fn of(layout: &Layout, mesh: &Mesh, line: &Line) -> Self {
        let range = mesh.conductor_elements[line.conductor].clone();
        let elements = &mesh.elements[range.clone()];
        let entry_m = layout.coax.as_ref().map_or(0.0, |c| c.entry_m);
        let at_end = line.length_m - entry_m < 1e-6;
        let near = |x: f64| (x - entry_m).abs() < 1e-9 * (1.0 + entry_m);
        let before = elements.iter().position(|e| near(e.to_m)).unwrap_or(elements.len() - 1);
        let after = elements.iter().position(|e| near(e.from_m)).unwrap_or(0);
        let entry_current = if at_end {
            layout.radio.body.map(|body| (mesh.conductor_elements[body].start, -1.0))
        } else {
            Some((range.start + after, -1.0))
        };
        let join = line.joins_m.iter().any(|j| near(*j)) || entry_m < 1e-9;
        let entry = if join && !at_end { (range.start + after, -1.0) } else { (range.start + before, 1.0) };
        let end = (range.end - 1, 1.0);
        let dry = |(k, xi): (usize, f64)| (!mesh.elements[k].below).then_some((k, xi));
        let first_m = (line.length_m - 1.0).max(0.0);
        let steps = ((line.length_m - first_m) / SAMPLE_M).round().max(1.0) as usize;
        let mut last_metre: Vec<Spot> = (0..=steps)
            .map(|n| spot(elements, first_m + (line.length_m - first_m) * n as f64 / steps as f64, true))
            .collect();
        let joins = line.joins_m.iter().filter(|j| **j > first_m);
        last_metre.extend(joins.flat_map(|j| [spot(elements, *j, false), spot(elements, *j, true)]));
        Self { entry_current, potentials: [dry(entry), dry(end)], last_metre }
    }
}

/// The spot at a distance; exactly at an element's end the one before or after it.
fn spot(elements: &[Element], at_m: f64, after: bool) -> Spot {
    let slack = 1e-9 * (1.0 + at_m);
    let edge = if after { at_m + slack } else { at_m - slack };
    let element = elements.partition_point(|e| e.to_m < edge).min(elements.len() - 1);
    let e = &elements[element];
    Spot { element, xi: (2.0 * (at_m - e.from_m) / e.length_m - 1.0).clamp(-1.0, 1.0), at_m }
}

/// The reduced model.
#[derive(Debug, Clone)]
pub(super) struct Model {
    /// Admittance of the feed with no choke, S.
    feed_s: Complex64,
    /// For each port its own admittance, S, and that to the feed, S.
    own_s: Vec<Complex64>,
    to_feed_s: Vec<Complex64>,
    /// Entry current, entry and end potential for 1 V at the feed (first column) and at each port.
    fixed: Vec<[Option<Complex64>; 3]>,
    /// Current along the coax for 1 V at the feed and at each port: Legendre coefficients of each element.
    profiles: Vec<Vec<Legendre>>,
    last_metre: Vec<Spot>,
    /// (from, to) of each element of the coax, m.
    edges: Vec<(f64, f64)>,
}

/// What 1 V at a place excites.
#[derive(Debug, Clone)]
pub(super) struct Excited {
    own_s: Complex64,
    to_feed_s: Complex64,
    fixed: [Option<Complex64>; 3],
    last_metre: Vec<Complex64>,
}

/// The station with a choke, for 1 V (RMS) at the feed: magnitudes.
#[derive(Debug, Clone, Copy)]
pub(super) struct Loaded {
    pub(super) feed_s: Complex64,
    pub(super) choke_a: f64,
    pub(super) entry_a: f64,
    pub(super) entry_v: Option<f64>,
    pub(super) end_v: Option<f64>,
    pub(super) last_metre_a: f64,
}

impl Model {
    /// Solve one frequency. `parts_ohm` are the impedances of the layout's parts.
    pub(super) fn solve(
        interaction: &Interaction,
        earth: &Surroundings,
        line: &Line,
        readings: &Readings,
        parts_ohm: &[Complex64],
    ) -> Result<Self, SingularMatrix> {
        let ports = PortModel::solve(interaction, earth)?;
        Ok(Self::reduce(&ports, interaction, earth, line, readings, parts_ohm))
    }

    /// Reduce solved ports.
    pub(super) fn reduce(
        ports: &PortModel,
        interaction: &Interaction,
        earth: &Surroundings,
        line: &Line,
        readings: &Readings,
        parts_ohm: &[Complex64],
    ) -> Self {
        let mesh = interaction.mesh();
        let nodes = line.node_count();
        let first = mesh.ports.len() - nodes;
        let (y, currents) = with_parts(ports, parts_ohm, first);
        let port = |n: usize| if n == 0 { 0 } else { first + n - 1 };
        let column = |n: usize| -> Vec<Complex64> { (0..mesh.unknowns).map(|u| currents[(u, port(n))]).collect() };
        let columns: Vec<Vec<Complex64>> = (0..=nodes).map(column).collect();
        let wet: Vec<usize> = readings.potentials.iter().flatten().map(|p| p.0).collect();
        let rows = interaction.potential_rows(earth, &wet);
        let potential = |which: usize, c: &[Complex64]| {
            readings.potentials[which].map(|(element, xi)| {
                let row = &rows[wet.iter().position(|w| *w == element).unwrap_or(0)];
                let p = legendre(xi);
                row.iter().zip(c).map(|(r, i)| series(r, &p) * i).sum::<Complex64>()
            })
        };
        let fixed = columns
            .iter()
            .map(|c| {
                let entry = readings.entry_current;
                let entry_a = entry.map(|(k, xi)| series(&mesh.elements[k].legendre_current(c), &legendre(xi)));
                [entry_a, potential(0, c), potential(1, c)]
            })
            .collect();
        let coax = &mesh.elements[mesh.conductor_elements[line.conductor].clone()];
        Self {
            feed_s: y[(0, 0)],
            own_s: (1..=nodes).map(|n| y[(port(n), port(n))]).collect(),
            to_feed_s: (1..=nodes).map(|n| y[(port(n), 0)]).collect(),
            fixed,
            profiles: columns.iter().map(|c| coax.iter().map(|e| e.legendre_current(c)).collect()).collect(),
            last_metre: readings.last_metre.clone(),
            edges: coax.iter().map(|e| (e.from_m, e.to_m)).collect(),
        }
    }

    /// What 1 V at a place excites, interpolated between the ports.
    pub(super) fn excited(&self, line: &Line, seat: &Seat) -> Excited {
        let nodes = seat.first_node..seat.first_node + seat.weights.len();
        let mix = |values: &[Complex64]| -> Complex64 {
            values[nodes.clone()].iter().zip(&seat.weights).map(|(v, w)| v * w).sum()
        };
        let fixed = std::array::from_fn(|q| {
            let each = nodes.clone().zip(&seat.weights).map(|(n, w)| self.fixed[n + 1][q].map(|v| v * w));
            each.sum::<Option<Complex64>>()
        });
        Excited {
            own_s: mix(&self.own_s),
            to_feed_s: mix(&self.to_feed_s),
            fixed,
            last_metre: self.last_metre.iter().map(|s| self.current(line, seat, s)).collect(),
        }
    }

    /// Current at a spot of the coax for 1 V at a place.
    ///
    /// In the choke's own stretch the ports' currents are taken not at the spot but at the same share of the way from the choke to
    /// the stretch's end: the current's peak beside the choke moves with it.
    fn current(&self, line: &Line, seat: &Seat, spot: &Spot) -> Complex64 {
        let stretch = &line.stretches[seat.stretch];
        let moves = spot.at_m > stretch.from_m - 1e-9 && spot.at_m < stretch.to_m + 1e-9;
        let share = if spot.at_m >= seat.centre_m {
            (spot.at_m - seat.centre_m) / (stretch.to_m - seat.centre_m)
        } else {
            (spot.at_m - seat.centre_m) / (seat.centre_m - stretch.from_m)
        };
        let mut sum = Complex64::ZERO;
        for (k, weight) in seat.weights.iter().enumerate() {
            let node = seat.first_node + k;
            let centre = stretch.nodes_m[node - stretch.first_node];
            let there = if moves {
                let reach = if share >= 0.0 { stretch.to_m - centre } else { centre - stretch.from_m };
                self.spot(centre + share * reach, spot)
            } else {
                *spot
            };
            sum += self.profile(node + 1, &there) * weight;
        }
        sum
    }

    /// The spot at a distance, on the same side of a join as another.
    fn spot(&self, at_m: f64, like: &Spot) -> Spot {
        if (at_m - like.at_m).abs() < 1e-9 {
            return *like;
        }
        let element = self.edges.partition_point(|e| e.1 < at_m).min(self.edges.len() - 1);
        let (from, to) = self.edges[element];
        Spot { element, xi: (2.0 * (at_m - from) / (to - from) - 1.0).clamp(-1.0, 1.0), at_m }
    }

    fn profile(&self, column: usize, spot: &Spot) -> Complex64 {
        series(&self.profiles[column][spot.element], &legendre(spot.xi))
    }

    /// The station without a choke, for 1 V at the feed.
    pub(super) fn without(&self) -> Loaded {
        let [entry_a, entry_v, end_v] = self.fixed[0];
        let last = self.last_metre.iter().map(|s| self.profile(0, s).norm());
        Loaded {
            feed_s: self.feed_s,
            choke_a: 0.0,
            entry_a: entry_a.map_or(0.0, |x| x.norm()),
            entry_v: entry_v.map(|x| x.norm()),
            end_v: end_v.map(|x| x.norm()),
            last_metre_a: last.fold(0.0, f64::max),
        }
    }

    /// Currents in the last metre without a choke, for 1 V at the feed, in the order of [`Excited`].
    pub(super) fn last_metre_without(&self) -> Vec<Complex64> {
        self.last_metre.iter().map(|s| self.profile(0, s)).collect()
    }

    /// The station with a choke, for 1 V at the feed.
    pub(super) fn loaded(&self, there: &Excited, last_metre: &[Complex64], choke_ohm: Complex64) -> Loaded {
        let current = there.to_feed_s / (Complex64::ONE + choke_ohm * there.own_s);
        let back_v = choke_ohm * current;
        let with = |q: usize| self.fixed[0][q].zip(there.fixed[q]).map(|(o, s)| (o - s * back_v).norm());
        let squares = last_metre.iter().zip(&there.last_metre).map(|(o, s)| (o - s * back_v).norm_sqr());
        Loaded {
            feed_s: self.feed_s - there.to_feed_s * back_v,
            choke_a: current.norm(),
            entry_a: with(0).unwrap_or(0.0),
            entry_v: with(1),
            end_v: with(2),
            last_metre_a: squares.fold(0.0, f64::max).sqrt(),
        }
    }

    /// Magnitudes of the current at distances along the coax with a choke (a seat and its impedance) or none, for 1 V at the feed, A.
    pub(super) fn along(&self, line: &Line, choke: Option<(&Seat, Complex64)>, at_m: &[f64]) -> Vec<f64> {
        let nowhere = Spot { element: 0, xi: 0.0, at_m: f64::INFINITY };
        let back_v = choke.map(|(seat, choke_ohm)| {
            let there = self.excited(line, seat);
            (seat, choke_ohm * there.to_feed_s / (Complex64::ONE + choke_ohm * there.own_s))
        });
        let with = |x: &f64| {
            let spot = self.spot(*x, &nowhere);
            let taken = back_v.map_or(Complex64::ZERO, |(seat, v)| self.current(line, seat, &spot) * v);
            (self.profile(0, &spot) - taken).norm()
        };
        at_m.iter().map(with).collect()
    }

    /// Feed admittance with a choke or none, S.
    pub(super) fn feed(&self, line: &Line, choke: Option<(&Seat, Complex64)>) -> Complex64 {
        choke.map_or(self.feed_s, |(seat, choke_ohm)| self.loaded(&self.excited(line, seat), &[], choke_ohm).feed_s)
    }
}

fn series(c: &Legendre, p: &[f64; 4]) -> Complex64 {
    c.iter().zip(p).map(|(c, p)| c * p).sum()
}

/// Admittances and currents with the layout's parts in place: Y − Y_K Z_K (1 + Y_KK Z_K)⁻¹ Y_K·, the same for the currents.
///
/// Ports 1 to `first` − 1 are the parts.
fn with_parts(model: &PortModel, parts_ohm: &[Complex64], first: usize) -> (DMatrix<Complex64>, Mat<Complex64>) {
    let y = &model.admittance_s;
    let used: Vec<usize> = (1..first).filter(|&k| parts_ohm[k - 1] != Complex64::ZERO).collect();
    if used.is_empty() {
        return (y.clone(), model.currents_a.clone());
    }
    let n = used.len();
    let loop_matrix = DMatrix::from_fn(n, n, |i, j| {
        let unit = if i == j { Complex64::ONE } else { Complex64::ZERO };
        unit + y[(used[i], used[j])] * parts_ohm[used[j] - 1]
    });
    let right = DMatrix::from_fn(n, y.ncols(), |i, j| y[(used[i], j)]);
    // 1 + Y Z of a passive structure and passive parts has an inverse; without one the parts carry nothing
    let through = loop_matrix.lu().solve(&right).unwrap_or_else(|| DMatrix::zeros(n, y.ncols()));
    let back = DMatrix::from_fn(n, y.ncols(), |i, j| parts_ohm[used[i] - 1] * through[(i, j)]);
    let admittance = DMatrix::from_fn(y.nrows(), y.ncols(), |i, j| {
        y[(i, j)] - used.iter().enumerate().map(|(a, &k)| y[(i, k)] * back[(a, j)]).sum::<Complex64>()
    });
    let c = &model.currents_a;
    let currents = Mat::from_fn(c.nrows(), c.ncols(), |i, j| {
        c[(i, j)] - used.iter().enumerate().map(|(a, &k)| c[(i, k)] * back[(a, j)]).sum::<Complex64>()
    });
    (admittance, currents)
}
