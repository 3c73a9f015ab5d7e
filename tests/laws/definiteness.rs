//! The static energy of any charge on the conductors is positive, however fine the mesh.
//!
//! Where it is not, refining a mesh runs into resonances that no antenna has.

use crate::solve::layout;
use braidwise::interaction::{Extent, Interaction, Surroundings};
use braidwise::layout::{Earth, Layout};
use braidwise::mesh::{Density, Mesh};
use nalgebra::DMatrix;

/// Lowest eigenvalue of the scaled reactance matrix at 1 kHz, where the charge decides alone.
fn lowest(station: &Layout, factor: f64) -> f64 {
    let mesh = Mesh::new(station, 28e6, Density { factor }, &[]);
    let interaction = Interaction::new(mesh, station.earth != Earth::None);
    let earth = Surroundings::new(1e3, station.earth.at(1e3), &Extent::of(station)).unwrap();
    let z = interaction.fill(&earth);
    let n = z.nrows();
    let scaled = DMatrix::from_fn(n, n, |a, b| -z[(a, b)].im / (z[(a, a)].im * z[(b, b)].im).abs().sqrt());
    scaled.symmetric_eigenvalues().min()
}

fn wires(kind: &str, list: &[(&str, f64, &str)], feed: &str) -> Layout {
    let mut text = format!("[earth]\nkind = \"{kind}\"\n");
    for (n, (path, diameter, more)) in list.iter().enumerate() {
        text += &format!("[[wire]]\nname = \"w{n}\"\npath = {path}\ndiameter = \"{diameter} mm\"\n{more}\n");
    }
    layout(&format!("{text}[feed]\n{feed}\n[operation]\npower = \"1 W\"\nfrequencies = [\"28 MHz\"]\n"))
}

#[test]
fn jackets_bends_and_unlike_radii_keep_the_static_energy_positive() {
    let jacket = "jacket = { permittivity = 2.3, thickness = \"0.8 mm\" }";
    let at = "at = [0, 0, 3]\nhot = [\"w0\"]\ncold = [\"w1\"";
    let stations = [
        wires(
            "none",
            &[("[[0, 0, 3], [0, 2, 3]]", 1.6, ""), ("[[0, 0, 3], [0, 0, 1]]", 3.5, jacket)],
            &format!("{at}]"),
        ),
        wires(
            "perfect",
            &[("[[0, 0, 3], [0, 2, 4]]", 1.6, jacket), ("[[0, 0, 3], [0, 0.3, 0.5]]", 3.5, jacket)],
            &format!("{at}]"),
        ),
        // a thin wire on the top of a thick mast, with a third one leaving
        wires(
            "none",
            &[
                ("[[0, 0, 3], [0, 2, 3.4]]", 1.6, ""),
                ("[[0, 0, 3], [0, 0, 1]]", 30.0, ""),
                ("[[0, 0, 3], [1.5, 0, 2.8]]", 1.6, ""),
            ],
            &format!("{at}, \"w2\"]"),
        ),
        // a sharp bend of a thick tube
        wires(
            "none",
            &[("[[0, 0, 3], [0, 2, 3]]", 20.0, ""), ("[[0, 0, 3], [0, 1.9, 2]]", 20.0, "")],
            &format!("{at}]"),
        ),
    ];
    for (k, station) in stations.iter().enumerate() {
        for factor in [1.0, 2.0, 4.0] {
            let value = lowest(station, factor);
            println!("station {k}, density {factor}: {value:e}");
            assert!(value > 1e-7, "station {k}, density {factor}: {value:e}");
        }
    }
}
