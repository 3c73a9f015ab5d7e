//! Earth rods at low frequency against Dwight's formulas, and the models of rods that must not agree.

use braidwise::layout::{Conductor, ConductorKind, EarthAt, Junction, Point};
use braidwise::study::earthing::impedance_to_remote_earth;

fn conductor(name: &str, points: Vec<Point>, radius_m: f64) -> Conductor {
    Conductor {
        name: name.into(),
        kind: ConductorKind::Rod,
        points,
        radius_m,
        conductivity_s_per_m: None,
        jacket: None,
        protective: false,
    }
}

fn resistance(conductors: Vec<Conductor>, junctions: Vec<Junction>, resistivity_ohm_m: f64) -> f64 {
    let earth = EarthAt::Soil { permittivity: 10.0, conductivity_s_per_m: 1.0 / resistivity_ohm_m };
    impedance_to_remote_earth(conductors, junctions, (0, 0), 1e3, earth).unwrap().re
}

fn rod(length_m: f64, radius_m: f64, resistivity_ohm_m: f64) -> f64 {
    let down = conductor("rod", vec![Point::zeros(), Point::new(0.0, 0.0, -length_m)], radius_m);
    resistance(vec![down], Vec::new(), resistivity_ohm_m)
}

#[test]
fn a_driven_rod_has_dwights_resistance() {
    // R = ρ/(2πL) (ln(4L/a) − 1): Dwight 1936 (Elec. Eng. 55), as in IEEE Std 142; the formula takes the leakage as even along the
    // rod (Howe's average potential), which lies 0 to 3 % above the true value for rods of these proportions
    for (length, radius, resistivity) in
        [(3.0, 8e-3, 100.0), (1.8, 8e-3, 100.0), (1.2, 8e-3, 1000.0), (3.048, 9.5e-3, 20.0)]
    {
        let dwight = resistivity / (2.0 * std::f64::consts::PI * length) * ((4.0 * length / radius).ln() - 1.0);
        let solved = rod(length, radius, resistivity);
        assert!((0.96..1.01).contains(&(solved / dwight)), "{length} m: {solved} against {dwight}");
        // some pages print the rule with the diameter in place of the radius and no −1: 5 % off, and it must show
        let misprint = resistivity / (2.0 * std::f64::consts::PI * length) * (4.0 * length / (2.0 * radius)).ln();
        assert!((solved / misprint - 1.0).abs() > 0.03, "{solved} against {misprint}");
    }
}

#[test]
fn the_worked_example_of_a_military_handbook_is_met() {
    // MIL-HDBK-419A vol. II, 1.2.2.2: a 10 ft × 3/4 in rod in 10,000 ohm·cm reads 32 ohm (from a nomograph)
    let solved = rod(10.0 * 0.3048, 0.75 * 0.0254 / 2.0, 100.0);
    assert!((solved - 32.0).abs() < 1.5, "{solved}");
}

#[test]
fn a_buried_wire_has_dwights_resistance() {
    // R = ρ/(4πL) [ln(4L/a) + ln(4L/s) − 2 + s/2L − s²/16L² + …], length 2L, depth s/2 (Dwight, form from memory)
    for (whole, wanted) in [(5.0, 35.5), (10.0, 19.9)] {
        let half = 0.5 * whole;
        let wire = |x: f64| conductor("wire", vec![Point::new(0.0, 0.0, -0.1), Point::new(x, 0.0, -0.1)], 1e-3);
        let middle = Junction { position: Point::new(0.0, 0.0, -0.1), members: vec![(0, 0), (1, 0)], to_earth: false };
        let solved = resistance(vec![wire(half), wire(-half)], vec![middle], 100.0);
        assert!((solved / wanted - 1.0).abs() < 0.04, "{whole} m: {solved} against {wanted}");
        // Sunde 1949 (form from memory): R = ρ/(πL) (ln(2L/√(2ad)) − 1), whole length L, depth d
        let sunde = 100.0 / (std::f64::consts::PI * whole) * ((2.0 * whole / (2.0_f64 * 1e-3 * 0.1).sqrt()).ln() - 1.0);
        assert!((solved / sunde - 1.0).abs() < 0.04, "{whole} m: {solved} against {sunde}");
    }
}
