//! Fast against slow: a choke through the port model equals the same impedance put into the matrix of the same mesh.
#![allow(clippy::unwrap_used)]

use super::line::{Line, Seat};
use super::model::{Model, Readings};
use crate::interaction::{Extent, Factored, Interaction, Surroundings};
use crate::layout::{Layout, PartKind, PartLaw, PlacedPart};
use crate::mesh::{Density, Mesh};
use crate::ports::{PortModel, excitations};
use crate::quantity::SPEED_OF_LIGHT_M_PER_S;
use crate::station::{Document, Embedded};
use num_complex::Complex64;

const STATION: &str = r#"
title = "Sallowford, a short coax with a bond"
[earth]
EARTH
[points]
feed = [0, 0, 3]
tip = [0, 15, 6]
foot = [0, 0, 0.1]
entry = [1.2, -3.3, 0.1]
rig = [1.2, -5.4, 0.9]
[[wire]]
name = "radiator"
path = ["feed", "tip"]
diameter = "1.6 mm"
[[wire]]
name = "lead"
path = ["entry", [1.6, -3.3, 0.6]]
diameter = "2 mm"
[coax]
cable = "RG-58"
path = ["feed", "foot", "entry", "rig"]
entry = "entry"
[feed]
at = "feed"
hot = ["radiator"]
cold = ["coax"]
[operation]
power = "100 W"
frequencies = ["14.2 MHz"]
"#;

const FREQUENCY_HZ: f64 = 14.2e6;

fn layout(earth: &str) -> Layout {
    let document = Document::parse(&STATION.replace("EARTH", earth), "short.toml").unwrap();
    Layout::place(&document.station(&Embedded).unwrap()).unwrap()
}

struct Bench {
    layout: Layout,
    line: Line,
    interaction: Interaction,
    earth: Surroundings,
}

impl Bench {
    fn new(layout: Layout) -> Self {
        let line = Line::of(&layout, SPEED_OF_LIGHT_M_PER_S / FREQUENCY_HZ).unwrap();
        let mesh = Mesh::new(&layout, FREQUENCY_HZ, Density::default(), &line.gaps());
        let earth = Surroundings::new(FREQUENCY_HZ, layout.earth.at(FREQUENCY_HZ), &Extent::of(&layout)).unwrap();
        Self { line, interaction: Interaction::new(mesh, true), earth, layout }
    }

    fn model(&self, parts_ohm: &[Complex64]) -> Model {
        let readings = Readings::of(&self.layout, self.interaction.mesh(), &self.line);
        Model::solve(&self.interaction, &self.earth, &self.line, &readings, parts_ohm).unwrap()
    }

    /// The same by brute force: impedances at ports put into the matrix, then the model with nothing more on it.
    fn brute(&self, loads: &[(usize, Complex64)]) -> Model {
        let mesh = self.interaction.mesh();
        let excite = excitations(mesh);
        let mut matrix = self.interaction.fill(&self.earth);
        for &(port, ohm) in loads {
            for i in 0..mesh.unknowns {
                for j in 0..mesh.unknowns {
                    matrix[(i, j)] += excite[(i, port)] * ohm * excite[(j, port)];
                }
            }
        }
        let ports = PortModel::from_factored(mesh, &Factored::new(matrix).unwrap()).unwrap();
        let readings = Readings::of(&self.layout, mesh, &self.line);
        let none = vec![Complex64::ZERO; self.layout.parts.len()];
        Model::reduce(&ports, &self.interaction, &self.earth, &self.line, &readings, &none)
    }

    fn seats(&self) -> Vec<(usize, Seat)> {
        let first_port = self.interaction.mesh().ports.len() - self.line.node_count();
        let nodes = self.line.stretches.iter().flat_map(|s| {
            let ends = [0, s.nodes_m.len() / 2, s.nodes_m.len() - 1];
            ends.map(|n| (s.first_node + n, s.nodes_m[n]))
        });
        nodes.map(|(n, centre)| (first_port + n, self.line.seat(centre).unwrap())).collect()
    }
}

fn compare(bench: &Bench, kept: &[(usize, Complex64)], kept_ohm: &[Complex64]) {
    let fast = bench.model(kept_ohm);
    let last_metre = fast.last_metre_without();
    for (port, seat) in bench.seats() {
        for choke in [Complex64::from(500.0), Complex64::from(1e4), Complex64::new(80.0, -1500.0)] {
            let mut loads = kept.to_vec();
            loads.push((port, choke));
            let slow = bench.brute(&loads).without();
            let quick = fast.loaded(&fast.excited(&bench.line, &seat), &last_metre, choke);
            let scale = slow.feed_s.norm();
            assert!((quick.feed_s - slow.feed_s).norm() < 1e-8 * scale, "feed at port {port}");
            for (a, b) in [(quick.entry_a, slow.entry_a), (quick.last_metre_a, slow.last_metre_a)] {
                assert!((a - b).abs() < 1e-8 * scale, "current at port {port}: {a} {b}");
            }
            for (a, b) in [(quick.entry_v, slow.entry_v), (quick.end_v, slow.end_v)] {
                assert!((a.unwrap() - b.unwrap()).abs() < 1e-7, "voltage for 1 V at port {port}: {a:?} {b:?}");
            }
        }
    }
}

#[test]
fn a_choke_at_a_port_equals_the_matrix_with_it() {
    for earth in ["kind = \"perfect\"", "kind = \"soil\"\npermittivity = 13\nconductivity = \"5 mS/m\""] {
        compare(&Bench::new(layout(earth)), &[], &[]);
    }
}

#[test]
fn two_chokes_equal_the_matrix_with_both() {
    let mut layout = layout("kind = \"perfect\"");
    let shield = layout.coax.as_ref().unwrap().conductor;
    let width = 4.0 * layout.conductors[shield].radius_m;
    layout.parts.push(PlacedPart {
        name: "first".to_string(),
        kind: PartKind::Choke,
        conductor: shield,
        at_m: 2.0,
        from_m: 2.0 - 0.5 * width,
        to_m: 2.0 + 0.5 * width,
        law: PartLaw::Fixed { resistance_ohm: 3000.0, reactance_ohm: 500.0 },
    });
    let kept = Complex64::new(3000.0, 500.0);
    let bench = Bench::new(layout);
    assert!(bench.line.seat(2.001).is_none(), "no second choke where the first one is");
    compare(&bench, &[(1, kept)], &[kept]);
}

#[test]
fn a_place_at_a_join_is_on_its_feed_side() {
    let bench = Bench::new(layout("kind = \"perfect\""));
    let join = bench.line.joins_m[0];
    let (before, after) = (bench.line.seat(join).unwrap(), bench.line.seat(join + 0.002).unwrap());
    assert!((before.centre_m - (join - 0.5 * bench.line.gap_m)).abs() < 1e-9);
    assert!((after.centre_m - (join + 0.5 * bench.line.gap_m)).abs() < 1e-9 && after.stretch == before.stretch + 1);
    let places = bench.line.places(0.01, bench.line.length_m);
    assert!(places.contains(&join) && places.contains(&bench.line.length_m) && places[0] == 0.0);
    assert!(places.windows(2).all(|p| p[1] > p[0]));
    let last = bench.line.seat(bench.line.length_m).unwrap();
    assert!((last.centre_m + 0.5 * bench.line.gap_m - bench.line.length_m).abs() < 1e-9);
    assert!(places.iter().all(|p| (bench.line.seat(*p).unwrap().weights.iter().sum::<f64>() - 1.0).abs() < 1e-9));
}
