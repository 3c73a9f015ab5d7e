//! Soil turned into nothing is free space, and soil turned into metal is a perfect earth.

use crate::draw::{Drawn, PERFECT, SOIL};
use crate::solve::{apart, feeds, layout};
use braidwise::layout::{Earth, Soil};

fn soil(permittivity: f64, conductivity_s_per_m: f64) -> Earth {
    Earth::Soil(Soil::Constant { permittivity, conductivity_s_per_m })
}

#[test]
fn soil_of_permittivity_one_and_no_conductivity_is_free_space() {
    for seed in 50..54 {
        let mut station = layout(&Drawn::new(seed, SOIL).text(false));
        let over_soil = feeds(&station);
        station.earth = soil(1.0, 0.0);
        let nothing = feeds(&station);
        station.earth = Earth::None;
        let free = feeds(&station);
        let difference = apart(&nothing, &free);
        assert!(difference < 1e-9, "seed {seed}: {difference:e}");
        assert!(apart(&over_soil, &free) > 1e-3, "real soil must show");
    }
}

#[test]
fn a_wire_in_the_ground_of_permittivity_one_is_a_wire_in_free_space() {
    let text = "[earth]\nkind = \"soil\"\npermittivity = 13\nconductivity = \"5 mS/m\"\n\
        [[wire]]\nname = \"above\"\npath = [[0, 0, 0.4], [0, 1, 3]]\ndiameter = \"40 mm\"\nmetal = \"perfect\"\n\
        [[wire]]\nname = \"through\"\npath = [[0, 0, 0.4], [0, 0, -0.3], [1, 0, -0.3]]\ndiameter = \"40 mm\"\nmetal = \"perfect\"\n\
        [feed]\nat = [0, 0, 0.4]\nhot = [\"above\"]\ncold = [\"through\"]\n\
        [operation]\npower = \"1 W\"\nfrequencies = [\"14.15 MHz\"]\n";
    let mut station = layout(text);
    let over_soil = feeds(&station);
    station.earth = soil(1.0, 0.0);
    let nothing = feeds(&station);
    station.earth = Earth::None;
    let free = feeds(&station);
    assert!(apart(&nothing, &free) < 1e-9, "{nothing:?} {free:?}");
    assert!(apart(&over_soil, &free) > 0.1, "real soil must show");
}

#[test]
fn soil_that_conducts_like_metal_is_a_perfect_earth() {
    for seed in 60..64 {
        let mut station = layout(&Drawn::new(seed, PERFECT).text(false));
        let perfect = feeds(&station);
        // the surface impedance of 10⁷ S/m at 30 MHz is 5 mohm, 10⁻⁵ of the wave impedance; 10³ S/m is a hundred times that
        for (conductivity, allowed) in [(1e7, 3e-4), (1e3, 3e-2)] {
            station.earth = soil(1.0, conductivity);
            let difference = apart(&feeds(&station), &perfect);
            assert!(difference < allowed, "seed {seed}, {conductivity} S/m: {difference:e}");
        }
        station.earth = soil(13.0, 0.005);
        assert!(apart(&feeds(&station), &perfect) > 1e-3, "real soil must show");
    }
}

#[test]
fn a_wire_cut_at_the_surface_and_one_running_through_agree() {
    let station = |paths: &[&str]| {
        let mut text = "[earth]\nkind = \"soil\"\npermittivity = 13\nconductivity = \"5 mS/m\"\n\
            [[wire]]\nname = \"mast\"\npath = [[0, 0, 1], [0, 0, 6]]\ndiameter = \"10 mm\"\n"
            .to_string();
        for (n, path) in paths.iter().enumerate() {
            text += &format!("[[wire]]\nname = \"lead {n}\"\npath = {path}\ndiameter = \"10 mm\"\n");
        }
        text += "[feed]\nat = [0, 0, 1]\nhot = [\"mast\"]\ncold = [\"lead 0\"]\n\
            [operation]\npower = \"1 W\"\nfrequencies = [\"7.1 MHz\"]\n";
        feeds(&layout(&text))
    };
    let through = station(&["[[0, 0, 1], [0, 0, -1.5]]"]);
    let cut = station(&["[[0, 0, 1], [0, 0, 0]]", "[[0, 0, 0], [0, 0, -1.5]]"]);
    assert!(apart(&through, &cut) < 1e-9, "{through:?} {cut:?}");
    let shorter = station(&["[[0, 0, 1], [0, 0, -1.2]]"]);
    assert!(apart(&through, &shorter) > 1e-3, "a shorter rod must show");
}
