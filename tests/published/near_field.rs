//! Field near a half-wave dipole of 100 W against the closed form for a sinusoidal current (texts, e.g. Balanis ch. 8), exact η.

use braidwise::field::{Solution, near_field};
use braidwise::interaction::{Extent, Interaction, Surroundings};
use braidwise::layout::{EarthAt, Layout, Point};
use braidwise::mesh::{Density, Mesh};
use braidwise::ports::PortModel;
use braidwise::station::{Document, Embedded};
use num_complex::Complex64;

/// RMS electric and magnetic field at points, for 100 W into a half wave at 7.1 MHz along z.
fn fields(earth: EarthAt, height_m: f64, points: &[Point]) -> Vec<(f64, f64)> {
    let (frequency_hz, half) = (7.1e6, 0.25 * 299.792_458 / 7.1);
    let text = format!(
        "[earth]\nkind = \"none\"\n[[wire]]\nname = \"d\"\npath = [[0, 0, {}], [0, 0, {}]]\ndiameter = \"0.2 mm\"\nmetal = \"perfect\"\n\
         [feed]\non = \"d\"\nat = {half}\n[operation]\npower = \"100 W\"\nfrequencies = [\"7.1 MHz\"]\n",
        height_m - half,
        height_m + half
    );
    let station = Document::parse(&text, "dipole").unwrap().station(&Embedded).unwrap();
    let layout = Layout::place(&station).unwrap();
    let interaction =
        Interaction::new(Mesh::new(&layout, frequency_hz, Density::default(), &[]), earth != EarthAt::None);
    let surroundings = Surroundings::new(frequency_hz, earth, &Extent::of(&layout)).unwrap();
    let model = PortModel::solve(&interaction, &surroundings).unwrap();
    let currents = model.loaded_currents(&[]);
    let scale = Complex64::from((2.0 * 100.0 / currents[0].re).sqrt());
    let solution = Solution::new(interaction.mesh(), &model.unknowns(&[], &currents)).scaled(scale);
    let norm = |v: [Complex64; 3]| (v.iter().map(|c| c.norm_sqr()).sum::<f64>() / 2.0).sqrt();
    near_field(interaction.mesh(), &solution, frequency_hz, earth, points)
        .unwrap()
        .into_iter()
        .map(|f| (norm(f.electric_v_per_m), norm(f.magnetic_a_per_m)))
        .collect()
}

#[test]
fn a_half_wave_of_100_w_has_the_textbook_near_field() {
    // beside the centre at 5, 10, 20 m (the thin wire's current is a sine to a few per cent, and no more is asked)
    let beside: Vec<Point> = [5.0, 10.0, 20.0].map(|x| Point::new(x, 0.0, 0.0)).to_vec();
    let wanted = [(6.00, 0.0372), (4.82, 0.0186), (3.10, 0.0093)];
    for ((e, h), (we, wh)) in fields(EarthAt::None, 0.0, &beside).into_iter().zip(wanted) {
        assert!((e / we - 1.0).abs() < 0.06 && (h / wh - 1.0).abs() < 0.06, "{e} V/m {h} A/m against {we} {wh}");
    }
    // beside the end at 5 and 20 m
    let quarter = 0.25 * 299.792_458 / 7.1;
    let ends: Vec<Point> = [5.0, 20.0].map(|x| Point::new(x, 0.0, quarter)).to_vec();
    for ((e, h), (we, wh)) in fields(EarthAt::None, 0.0, &ends).into_iter().zip([(8.97, 0.0120), (2.66, 0.0073)]) {
        assert!((e / we - 1.0).abs() < 0.06 && (h / wh - 1.0).abs() < 0.08, "{e} V/m {h} A/m against {we} {wh}");
    }
}

#[test]
fn on_a_perfect_earth_the_field_stands_upright_and_soil_bends_it() {
    let near = [Point::new(6.0, 0.0, 0.0)];
    let ratio = |earth| fields(earth, 12.0, &near)[0];
    let (perfect, free) = (ratio(EarthAt::Perfect), ratio(EarthAt::None));
    let metal = ratio(EarthAt::Soil { permittivity: 1.0, conductivity_s_per_m: 1e7 });
    assert!(
        (metal.0 / perfect.0 - 1.0).abs() < 0.01 && (metal.1 / perfect.1 - 1.0).abs() < 0.01,
        "{metal:?} {perfect:?}"
    );
    assert!((free.1 / perfect.1 - 1.0).abs() > 0.2, "the earth must show");
}
