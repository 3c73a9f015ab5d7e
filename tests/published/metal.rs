//! What metal and jacket do to a wire.

use crate::wires::{WAVELENGTH_M, crossing, dipole_of, impedance, outcome};
use braidwise::interaction::internal_impedance;
use num_complex::Complex64;
use std::f64::consts::PI;

#[test]
fn internal_impedance_equals_bessel_functions_of_an_outside_library() {
    // tests/data/internal_impedance.py, mpmath at 30 digits; its version stands in the file's first line
    let text = std::fs::read_to_string("tests/data/internal_impedance.csv").unwrap();
    let mut seen = 0;
    for line in text.lines().skip(2) {
        let v: Vec<f64> = line.split(',').map(|x| x.parse().unwrap()).collect();
        let got = internal_impedance(v[0], v[1], 2.0 * PI * v[2]);
        let want = Complex64::new(v[3], v[4]);
        assert!((got - want).norm() < 1e-9 * want.norm(), "{line}: {got}");
        seen += 1;
    }
    assert_eq!(seen, 126);
}

#[test]
fn internal_impedance_of_two_millimetres_of_copper_as_tabulated() {
    // worked table, 58 MS/m, ohm per metre; the plane skin-effect value Rs/2πa must disagree by its missing half skin depth
    for (mhz, r, x, plane) in [
        (1.8, 0.057_106, 0.055_682, 0.055_709),
        (7.0, 0.111_244, 0.109_846, 0.109_859),
        (28.0, 0.221_096, 0.219_711, 0.219_718),
    ] {
        let z = internal_impedance(1e-3, 58e6, 2e6 * PI * mhz);
        assert!((z.re - r).abs() < 2e-6 && (z.im - x).abs() < 2e-6, "{mhz}: {z}");
        assert!((z.re - plane).abs() > 1e-3);
    }
    // direct current: 1/(σπa²) = 5.4881 mohm per metre
    assert!((internal_impedance(1e-3, 58e6, 1e-3).re - 0.005_488_1).abs() < 1e-7);
}

#[test]
fn copper_takes_what_the_internal_impedance_says() {
    // solved example, 2.052 mm, 7.1 MHz, 0.4874 λ: 72.64 + j3.57 without loss, 73.87 + j4.64 with copper (58 MS/m)
    let radius = 1.026e-3 / WAVELENGTH_M;
    let perfect = impedance(&dipole_of(0.4874, radius, ""));
    let copper_layout = dipole_of(0.4874, radius, "conductivity = \"58 MS/m\"");
    let copper = impedance(&copper_layout);
    assert!((perfect - Complex64::new(72.64, 3.57)).norm() < 0.5, "{perfect}");
    let added = copper - perfect;
    assert!((added - Complex64::new(1.23, 1.07)).norm() < 0.03, "{added}");
    // the loss itself is R'l/2 for a sinusoidal current, 1.12 of 73.87 ohm; the real one is a little fuller
    let f = &outcome(&copper_layout).frequencies[0];
    let share = f.power.metal_w / f.power.input_w;
    assert!((share - 1.12 / 73.87).abs() < 0.0006, "{share}");
}

#[test]
fn a_jacket_shortens_the_resonant_wire() {
    // solved with the equivalent radius and inductance of a thin sleeve (Popović & Nešić 1984, from memory)
    let radius = 1.026e-3 / WAVELENGTH_M;
    let resonance = |more: &str| crossing(0.44, 0.5, |l| impedance(&dipole_of(l, radius, more)).im);
    let bare = resonance("");
    assert!((bare - 0.4863).abs() < 0.0004, "{bare}");
    for (thickness_mm, permittivity, shortening) in
        [(0.4, 2.26, 0.0115), (0.8, 2.26, 0.0202), (0.76, 3.5, 0.0250), (1.2, 3.5, 0.0351)]
    {
        let jacket = format!("jacket = {{ permittivity = {permittivity}, thickness = \"{thickness_mm} mm\" }}");
        let got = 1.0 - resonance(&jacket) / bare;
        // the equivalent inductance acts a little otherwise on a standing wave than the capacitance of the sleeve does
        assert!((got - shortening).abs() < 0.0015, "{thickness_mm} mm, {permittivity}: {got}");
    }
}
