//! Drive here and measure there gives the same as drive there and measure here.

use crate::draw::{Drawn, FREE, PERFECT, SOIL};
use crate::solve::{layout, ports, prepared};
use braidwise::layout::Layout;

/// Conductors in the opposite order: every pair of elements is then integrated the other way round.
fn other_way_round(layout: &Layout) -> Layout {
    let n = layout.conductors.len();
    let mut out = layout.clone();
    out.conductors.reverse();
    for m in out.junctions.iter_mut().flat_map(|j| &mut j.members) {
        m.0 = n - 1 - m.0;
    }
    for leg in out.feed.hot.iter_mut().chain(&mut out.feed.cold) {
        leg.conductor = n - 1 - leg.conductor;
    }
    for part in &mut out.parts {
        part.conductor = n - 1 - part.conductor;
    }
    out
}

fn check(station: &Layout, gaps: &[(usize, f64, f64)], allowed: f64, what: &str) {
    let n = station.conductors.len();
    let one = ports(station, gaps).admittance_s;
    let turned: Vec<_> = gaps.iter().map(|g| (n - 1 - g.0, g.1, g.2)).collect();
    let two = ports(&other_way_round(station), &turned).admittance_s;
    for i in 0..one.nrows() {
        for j in 0..one.nrows() {
            let scale = (one[(i, i)].norm() * one[(j, j)].norm()).sqrt();
            let difference = (one[(i, j)] - two[(j, i)]).norm() / scale;
            assert!(difference < allowed, "{what}, ports {i} and {j}: {difference:e}");
            assert!(i == j || one[(i, j)].norm() > 1e-6 * scale, "{what}: ports {i} and {j} must feel each other");
        }
    }
}

#[test]
fn any_two_ports_of_a_station_are_reciprocal() {
    for (earth, allowed) in [(FREE, 1e-9), (PERFECT, 1e-9), (SOIL, 1e-6)] {
        for seed in 90..93 {
            let station = layout(&Drawn::new(seed, earth).text(false));
            let coax = station.coax.as_ref().unwrap();
            let gaps = [(coax.conductor, coax.length_m - 1.0, coax.length_m - 0.99), (0, 6.0, 6.01)];
            check(&station, &gaps, allowed, earth);
        }
    }
}

#[test]
fn ports_above_and_below_the_surface_are_reciprocal() {
    let text = "[earth]\nkind = \"soil\"\npermittivity = 13\nconductivity = \"5 mS/m\"\n\
        [[wire]]\nname = \"above\"\npath = [[0, 0, 0.4], [0, 1, 3]]\ndiameter = \"40 mm\"\n\
        [[wire]]\nname = \"through\"\npath = [[0, 0, 0.4], [0, 0, -0.6]]\ndiameter = \"40 mm\"\n\
        [[wire]]\nname = \"apart\"\npath = [[1, 1, -0.5], [3, 2, -0.2]]\ndiameter = \"40 mm\"\n\
        [feed]\nat = [0, 0, 0.4]\nhot = [\"above\"]\ncold = [\"through\"]\n\
        [operation]\npower = \"1 W\"\nfrequencies = [\"14.15 MHz\"]\n";
    check(&layout(text), &[(1, 0.7, 0.78), (2, 1.0, 1.08)], 1e-5, "across the surface");
}

#[test]
fn the_matrix_is_symmetric() {
    for earth in [FREE, PERFECT, SOIL] {
        let (interaction, surroundings) = prepared(&layout(&Drawn::new(95, earth).text(false)), &[]);
        let z = interaction.fill(&surroundings);
        for i in 0..z.nrows() {
            for j in 0..i {
                let scale = (z[(i, i)].norm() * z[(j, j)].norm()).sqrt();
                assert!((z[(i, j)] - z[(j, i)]).norm() < 1e-10 * scale, "{earth}: {i} {j}");
            }
        }
    }
}
