//! Antennas small against the wavelength, where radiation resistance and inductance have closed forms.

use crate::wires::{MHZ, WAVELENGTH_M, impedance, outcome, station, wire};
use braidwise::layout::Layout;
use num_complex::Complex64;
use std::f64::consts::PI;

fn short_dipole(length: f64, ratio: f64) -> Layout {
    let half = 0.5 * length * WAVELENGTH_M;
    let wires = wire("d", &[[-half, 0.0, 0.0], [half, 0.0, 0.0]], half / ratio, "");
    station("none", &wires, &format!("on = \"d\"\nat = {half}"), MHZ)
}

#[test]
fn a_short_dipole_radiates_by_its_current_moment() {
    // R = 80π²(l_e/λ)² of a short current moment (Hertz; 20π²(l/λ)² is the same with a triangular current, l_e = l/2)
    for length in [0.02, 0.05] {
        let layout = short_dipole(length, 100.0);
        let f = &outcome(&layout).frequencies[0];
        let points = &f.conductors[0].points;
        let moment: Complex64 = points
            .windows(2)
            .map(|p| (p[0].current_a + p[1].current_a) * 0.5 * (p[1].distance_m - p[0].distance_m))
            .sum();
        let effective = (moment / f.feed.current_a).norm() / WAVELENGTH_M;
        let hertz = 80.0 * PI * PI * effective * effective * (376.730_3 / (120.0 * PI));
        let r = f.feed.resistance_ohm;
        assert!((r / hertz - 1.0).abs() < 0.005 + 10.0 * length * length, "{length}: {r} {hertz}");
        // finite thickness draws charge to the middle: the triangle's value is 5 to 12 % above (King 1956: 18.3 against 20, from memory)
        let triangle = 20.0 * PI * PI * length * length;
        assert!((0.86..0.97).contains(&(r / triangle)), "{length}: {r} {triangle}");
    }
}

#[test]
fn a_short_dipole_is_a_capacitor() {
    // X = −120[ln(l/2a) − 1]/tan(πl/λ) (texts; Schelkunoff's average impedance), good to some percent
    for (length, want) in [(0.02, -6876.0), (0.05, -2731.0), (0.10, -1331.0)] {
        let x = impedance(&short_dipole(length, 100.0)).im;
        assert!((x / want - 1.0_f64).abs() < 0.06, "{length}: {x} against {want}");
    }
}

fn loop_of(circumference_m: f64, radius_m: f64) -> (Layout, f64) {
    let sides = 24;
    let r = circumference_m / (2.0 * f64::from(sides) * (PI / f64::from(sides)).sin());
    let corner = |n: i32| {
        let angle = 2.0 * PI * f64::from(n) / f64::from(sides);
        [r * angle.cos(), r * angle.sin(), 0.0]
    };
    let one: Vec<_> = (0..=sides / 2).map(corner).collect();
    let two: Vec<_> =
        (0..=sides / 2).map(|n| if n == sides / 2 { corner(n) } else { corner((sides - n) % sides) }).collect();
    let wires = wire("one", &one, radius_m, "") + &wire("two", &two, radius_m, "");
    let area = 0.5 * f64::from(sides) * r * r * (2.0 * PI / f64::from(sides)).sin();
    (station("none", &wires, &format!("at = [{r}, 0, 0]\nhot = [\"one\"]\ncold = [\"two\"]"), MHZ), area)
}

#[test]
fn a_small_loop_radiates_by_the_square_of_its_area() {
    // R = 31171 (A/λ²)² (texts); the current of a loop of circumference C is uniform to (πC/λ)²/2 or so
    for share in [0.02, 0.05] {
        let (layout, area) = loop_of(share * WAVELENGTH_M, 1e-3);
        let want = 31171.0 * (area / (WAVELENGTH_M * WAVELENGTH_M)).powi(2);
        let r = impedance(&layout).re;
        let allowed = 0.01 + (2.0 * PI * share).powi(2);
        assert!((r / want - 1.0).abs() < allowed, "C = {share} λ: {r} {want}");
        // the fourth power of the size, and not another, within the tolerance
        assert!((r / (want / share) - 1.0).abs() > 0.5);
    }
}

#[test]
fn a_small_loop_has_the_inductance_of_its_ring() {
    // L = μ0 R [ln(8R/b) − 2], surface current (texts): 3.955 µH at R = 0.5 m, b = 1 mm
    let radius_m = 0.5;
    let (layout, _) = loop_of(2.0 * PI * radius_m, 1e-3);
    let want = 2e6 * PI * MHZ * 3.955e-6;
    let x = impedance(&layout).im;
    // the loop is 0.07 λ round: tan(kC/2)/(kC/2) − 1 = 1.8 %; a polygon of 24 sides has half a percent less area
    assert!((x / want - 1.0).abs() < 0.025, "{x} {want}");
}
