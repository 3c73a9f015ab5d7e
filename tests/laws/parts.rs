//! A part outside the matrix is the same as the part put into it.

use crate::draw::{Drawn, FREE, PERFECT, SOIL};
use crate::solve::{layout, prepared};
use braidwise::interaction::Factored;
use braidwise::ports::{PortModel, excitations};
use num_complex::Complex64;

#[test]
fn chokes_and_coils_through_the_port_model_equal_the_same_in_the_matrix() {
    for earth in [FREE, PERFECT, SOIL] {
        for seed in 80..83 {
            let station = layout(&Drawn::new(seed, earth).text(false));
            let (interaction, surroundings) = prepared(&station, &[]);
            let impedances = [Complex64::new(2700.0, 900.0), Complex64::new(3.0, 450.0)];
            let model = PortModel::solve(&interaction, &surroundings).unwrap();
            let outside = model.loaded_currents(&impedances);

            let mut matrix = interaction.fill(&surroundings);
            let p = excitations(interaction.mesh());
            for (k, z) in impedances.iter().enumerate() {
                for i in 0..matrix.nrows() {
                    for j in 0..matrix.ncols() {
                        matrix[(i, j)] += z * p[(i, k + 1)] * p[(j, k + 1)];
                    }
                }
            }
            let loaded = PortModel::from_factored(interaction.mesh(), &Factored::new(matrix).unwrap()).unwrap();
            for port in 0..3 {
                let (a, b) = (outside[port], loaded.admittance_s[(port, 0)]);
                assert!((a - b).norm() < 1e-9 * b.norm(), "{earth}, seed {seed}, port {port}: {a} {b}");
            }
            let unknowns = model.unknowns(&impedances, &outside);
            let scale = unknowns.iter().map(|x| x.norm()).fold(0.0, f64::max);
            for (k, x) in unknowns.iter().enumerate() {
                assert!((x - loaded.currents_a[(k, 0)]).norm() < 1e-9 * scale);
            }
            // without the parts the answer is another one
            assert!((outside[0] - model.admittance_s[(0, 0)]).norm() > 1e-3 * outside[0].norm());
        }
    }
}

#[test]
fn an_impedance_at_0_m_adds_itself_to_the_feed_without_a_counterpoise() {
    let text = |choke: &str| {
        format!(
            "[earth]\nkind = \"none\"\n[[wire]]\nname = \"radiator\"\npath = [[0, 0, 3], [0, 20, 8]]\ndiameter = \"1.6 mm\"\n\
             [coax]\ncable = \"RG-58\"\npath = [[0, 0, 3], [0, 0, 0.5], [0, -8, 0.5]]\n\
             [feed]\nat = [0, 0, 3]\nhot = [\"radiator\"]\ncold = [\"coax\"]\n[radio]\nbody = \"none\"\n{choke}\
             [operation]\npower = \"1 W\"\nfrequencies = [\"7.1 MHz\"]\n"
        )
    };
    let bare = crate::solve::feeds(&layout(&text("")))[0];
    let choke = "[[choke]]\nat = 0\nimpedance = { resistance = \"2 kohm\", reactance = \"500 ohm\" }\n";
    let loaded = crate::solve::feeds(&layout(&text(choke)))[0];
    // choke and feed share the gap of the junction, so they are in series exactly
    let impedance = Complex64::new(2000.0, 500.0);
    assert!((loaded - bare - impedance).norm() < 1e-3 * impedance.norm(), "{bare} {loaded}");
    assert!((loaded - bare).norm() > 1800.0);
}
