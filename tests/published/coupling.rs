//! Wires that feel each other: parallel dipoles, folded dipole, images in a perfect earth.

use crate::wires::{MHZ, WAVELENGTH_M, admittance, impedance, station, thin_limit, wire};
use braidwise::layout::Layout;
use num_complex::Complex64;
use std::f64::consts::PI;

/// Mutual impedance of half waves side by side, d/λ and ohm (Carter 1932; Balanis ch. 8; exact η).
const SIDE_BY_SIDE: [(f64, f64, f64); 8] = [
    (0.05, 71.61, 24.25),
    (0.10, 67.29, 7.53),
    (0.20, 51.36, -19.16),
    (0.25, 40.76, -28.33),
    (0.50, -12.52, -29.91),
    (0.75, -22.48, 6.63),
    (1.00, 4.01, 17.73),
    (1.50, -1.89, -12.30),
];

const RADIUS: f64 = 1e-6;
/// Half wave and thin: the current is nearly the sine that the formulas assume.
const HALF_M: f64 = 0.25 * WAVELENGTH_M;

fn pair(distance: f64, radius: f64) -> Layout {
    let d = distance * WAVELENGTH_M;
    let a = radius * WAVELENGTH_M;
    let wires = wire("one", &[[-HALF_M, 0.0, 0.0], [HALF_M, 0.0, 0.0]], a, "")
        + &wire("two", &[[-HALF_M, d, 0.0], [HALF_M, d, 0.0]], a, "");
    station("none", &wires, &format!("on = \"one\"\nat = {HALF_M}"), MHZ)
}

fn alone() -> Complex64 {
    let wires = wire("one", &[[-HALF_M, 0.0, 0.0], [HALF_M, 0.0, 0.0]], RADIUS * WAVELENGTH_M, "");
    impedance(&station("none", &wires, &format!("on = \"one\"\nat = {HALF_M}"), MHZ))
}

#[test]
fn parallel_half_waves_couple_as_carter_found() {
    for (d, r, x) in SIDE_BY_SIDE {
        let mutual = thin_limit(|radius| {
            let gap = 4.0 * radius * WAVELENGTH_M;
            let y = admittance(&pair(d, radius), &[(1, HALF_M, HALF_M + gap)], 1.0);
            -y[(0, 1)] / (y[(0, 0)] * y[(1, 1)] - y[(0, 1)] * y[(1, 0)])
        });
        let carter = Complex64::new(r, x);
        assert!((mutual - carter).norm() < 1.0, "{d}: {mutual} {carter}");
        assert!((mutual - carter.conj()).norm() > 1.0, "{d}: the sign of X must count");
    }
}

#[test]
fn a_parasitic_wire_reflects_the_square_of_the_mutual_impedance() {
    // Z = Z11 − Z21²/Z22 with the parasite closed
    let own = Complex64::new(73.079, 42.515);
    for (d, r, x) in SIDE_BY_SIDE {
        let z = thin_limit(|radius| impedance(&pair(d, radius)));
        let want = own - Complex64::new(r, x).powi(2) / own;
        assert!((z - want).norm() < 1.5, "{d}: {z} {want}");
        assert!((z - own).norm() > 1.5 || d > 0.9, "{d}: the parasite must show");
    }
}

#[test]
fn a_horizontal_half_wave_over_perfect_earth_sees_its_image() {
    // Z = Z11 − Z21(2h), Carter's Z21
    let own = alone();
    for (height, r, x) in [
        (0.05, 5.79, 34.98),
        (0.1, 21.72, 61.67),
        (0.25, 85.60, 72.42),
        (0.5, 69.07, 24.79),
        (0.75, 74.97, 54.81),
        (1.0, 72.00, 33.16),
    ] {
        let h = height * WAVELENGTH_M;
        let wires = wire("d", &[[-HALF_M, 0.0, h], [HALF_M, 0.0, h]], RADIUS * WAVELENGTH_M, "");
        let z = impedance(&station("perfect", &wires, &format!("on = \"d\"\nat = {HALF_M}"), MHZ));
        // table of the formula with Z11 = 73.08 + j42.52: what is compared is the change that the earth makes
        let want = Complex64::new(r - 73.08, x - 42.52);
        assert!(((z - own) - want).norm() < 0.05 * 75.0, "{height}: {} {want}", z - own);
    }
}

#[test]
fn a_vertical_half_wave_over_perfect_earth_sees_its_image() {
    // collinear half waves with an end gap of 2s (formula): lower end s above the earth
    let own = alone();
    for (s, r, x) in [(0.05, 87.7, 38.5), (0.125, 75.1, 34.6), (0.25, 69.0, 41.8), (0.5, 74.8, 42.7)] {
        let low = s * WAVELENGTH_M;
        let wires = wire("d", &[[0.0, 0.0, low], [0.0, 0.0, low + 2.0 * HALF_M]], RADIUS * WAVELENGTH_M, "");
        let z = impedance(&station("perfect", &wires, &format!("on = \"d\"\nat = {HALF_M}"), MHZ));
        let want = Complex64::new(r - 73.08, x - 42.52);
        assert!(((z - own) - want).norm() < 1.5, "{s}: {} {want}", z - own);
    }
}

#[test]
fn a_quarter_wave_on_perfect_earth_is_half_a_dipole() {
    // 36.54 + j21.26 ohm in the thin limit (image theory); at a/λ = 10⁻⁴ half of the solved 80.5 + j46.1
    let radius = 1e-4;
    let wires = wire("m", &[[0.0, 0.0, 0.0], [0.0, 0.0, HALF_M]], radius * WAVELENGTH_M, "");
    let z = impedance(&station("perfect", &wires, "at = [0, 0, 0]\nhot = [\"m\"]\ncold = [\"earth\"]", MHZ));
    assert!((z - Complex64::new(40.25, 23.05)).norm() < 0.4, "{z}");
}

fn folded(spacing_m: f64, driven_m: f64, other_m: f64, half_m: f64) -> Complex64 {
    let s = spacing_m;
    let wires = wire("left", &[[0.0, 0.0, 0.0], [-half_m, 0.0, 0.0]], driven_m, "")
        + &wire("right", &[[0.0, 0.0, 0.0], [half_m, 0.0, 0.0]], driven_m, "")
        + &wire("back", &[[-half_m, 0.0, 0.0], [-half_m, 0.0, s], [half_m, 0.0, s], [half_m, 0.0, 0.0]], other_m, "");
    impedance(&station("none", &wires, "at = [0, 0, 0]\nhot = [\"right\"]\ncold = [\"left\"]", MHZ))
}

#[test]
fn a_folded_dipole_steps_the_resistance_up_by_four_and_by_its_radii() {
    // (1 + c)² Zd in parallel with the line mode (Uda & Mushiake; Balanis ch. 9), Zd of the pair as one thick wire; at resonance
    // the line mode is nearly open. c = ln(s/a1)/ln(s/a2), a1 the driven radius (form from memory).
    let (s, half) = (0.15, 0.2375 * WAVELENGTH_M);
    for (driven, other) in [(2e-3_f64, 2e-3_f64), (1e-3, 8e-3), (8e-3, 1e-3)] {
        let c = (s / driven).ln() / (s / other).ln();
        let step = (1.0 + c).powi(2);
        // equivalent radius of two wires carrying 1 : c (geometric mean by the currents)
        let share = 1.0 / (1.0 + c);
        let thick = (share * share * f64::ln(driven)
            + (1.0 - share).powi(2) * f64::ln(other)
            + 2.0 * share * (1.0 - share) * f64::ln(s))
        .exp();
        let wires = wire("d", &[[-half, 0.0, 0.0], [half, 0.0, 0.0]], thick, "");
        let single = impedance(&station("none", &wires, &format!("on = \"d\"\nat = {half}"), MHZ));
        let line = 60.0 * (s * s / (driven * other)).ln();
        let stub = Complex64::new(0.0, line * (2.0 * PI * half / WAVELENGTH_M).tan());
        // two stubs in series across the driven gap; the other wire's share of the line voltage follows the same c
        let want = (1.0 / (single * step) + 1.0 / (2.0 * stub)).inv();
        let got = folded(s, driven, other, half);
        assert!((got.re / want.re - 1.0).abs() < 0.03, "{driven} {other}: {got} against {want}, single {single}");
        // the reactance turns by 5 % of |Z| for each half percent of length, which the two end pieces of 15 cm are worth
        assert!((got / want - 1.0).norm() < 0.08, "{driven} {other}: {got} against {want}, single {single}");
    }
}
