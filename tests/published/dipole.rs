//! Straight wires in free space against handbook formulas and independent solutions.
//!
//! "Solved" values: Hallén's equation with the exact tubular kernel and a magnetic frill feed (outer over inner radius 2.302),
//! three mesh densities agreeing to 0.25 % or better; an independent solution, no published source. Gap and frill differ by a
//! constant susceptance, so reactance is compared only where the wire is thin and the feed low.

use crate::wires::{MHZ, WAVELENGTH_M, admittance, crossing, dipole, impedance, station, thin_limit, wire};
use num_complex::Complex64;
use std::f64::consts::PI;

/// (η/4π) Cin(2π) and (η/4π) Si(2π) with η = 376.7303 ohm: Carter 1932, Balanis ch. 8.
const THIN_LIMIT_OHM: Complex64 = Complex64::new(73.0790, 42.5151);

#[test]
fn the_half_wave_tends_to_the_induced_emf_value_as_it_gets_thinner() {
    // Z against 1/Ω, Ω = 2 ln(l/a), is smooth; four thin wires fix a cubic whose value at 1/Ω = 0 is the thin limit
    let limit = thin_limit(|radius| impedance(&dipole(0.5, radius)));
    assert!((limit - THIN_LIMIT_OHM).norm() < 0.3, "{limit}");
    // a real wire is not at the limit (caution of every finite-radius table)
    assert!((impedance(&dipole(0.5, 1e-5)) - THIN_LIMIT_OHM).norm() > 5.0);
}

#[test]
fn the_half_wave_of_finite_radius_reads_as_solved() {
    for (radius, r, x) in [
        (1.0e-3, 86.6, 48.2),
        (5.0e-4, 84.1, 47.6),
        (1.0e-4, 80.5, 46.1),
        (2.3e-5, 78.8, 45.2),
        (1.0e-5, 78.1, 44.8),
        (1.0e-6, 76.9, 44.2),
    ] {
        let z = impedance(&dipole(0.5, radius));
        // half a percent and half an ohm as the solved table allows itself; the thickest also differs by the feed
        let slack = if radius > 4e-4 { 2.0 } else { 1.0 };
        assert!((z.re - r).abs() < slack * 0.005 * r, "a/λ = {radius}: {z}");
        assert!((z.im - x).abs() < slack * 0.5, "a/λ = {radius}: {z}");
    }
}

#[test]
fn a_coarse_mesh_without_grading_would_be_caught() {
    // three elements a half, the accuracy of which the half-ohm tolerance above must not let pass
    let coarse = admittance(&dipole(0.5, 1e-4), &[], 0.12)[(0, 0)].inv();
    assert!((coarse - Complex64::new(80.5, 46.1)).norm() > 0.5, "{coarse}");
}

/// Admittance of a centre-fed wire of a/λ = 0.007022 with a gap one radius wide about its middle, siemens.
fn thick(length: f64) -> Complex64 {
    let (half, a) = (0.5 * length * WAVELENGTH_M, 0.007_022 * WAVELENGTH_M);
    let wires = wire("d", &[[-half, 0.0, 0.0], [half, 0.0, 0.0]], a, "");
    let feed = format!("on = \"d\"\nat = {}\ngap = \"{} mm\"", half - 0.5 * a, 1e3 * a);
    admittance(&station("none", &wires, &feed, MHZ), &[], 2.0)[(0, 0)]
}

#[test]
fn conductance_of_a_thick_wire_against_length() {
    // solved, a/λ = 0.007022: G does not depend on the feed model, B does by one constant
    let rows = [
        (0.50, 0.043, 2.854),
        (1.00, 1.151, 6.731),
        (1.25, 7.554, 10.338),
        (1.50, 11.216, -2.677),
        (PI / 2.0, 8.323, -3.713),
        (1.75, 4.322, -3.002),
        (2.00, 2.422, -1.533),
        (2.50, 1.344, 0.189),
        (3.00, 1.025, 1.337),
        (PI, 0.986, 1.652),
        (3.50, 0.985, 2.560),
        (4.00, 1.742, 4.711),
        (4.50, 9.823, 3.146),
        (1.5 * PI, 6.707, -1.988),
    ];
    let y: Vec<Complex64> = rows.iter().map(|(kh, ..)| thick(kh / PI) * 1e3).collect();
    let constant = y.iter().zip(rows).map(|(y, r)| y.im - r.2).sum::<f64>() / rows.len() as f64;
    for (y, (kh, g, b)) in y.iter().zip(rows) {
        // near the two resonances a tenth of a percent of length moves G and B by several percent of the largest |Y|
        let steep = 0.02 * (g * g + b * b).sqrt();
        assert!((y.re - g).abs() < 0.01 * g + 0.01 + steep, "kh = {kh}: {y} mS, {g}");
        assert!((y.im - constant - b).abs() < 0.05 + steep, "kh = {kh}: {y} mS less {constant}, {b}");
    }
    assert!(constant.abs() < 1.0, "{constant} mS");
}

#[test]
fn first_resonance_against_thickness() {
    for (ratio, length, r) in [
        (50.0, 0.4628, 72.7),
        (100.0, 0.4687, 72.2),
        (250.0, 0.4747, 72.0),
        (1000.0, 0.4807, 72.0),
        (5000.0, 0.4850, 72.1),
        (1e4, 0.4863, 72.1),
        (1e5, 0.4894, 72.3),
    ] {
        let of = |l: f64| dipole(l, l / (2.0 * ratio));
        let found = crossing(0.44, 0.5, |l| impedance(&of(l)).im);
        let resistance = impedance(&of(found)).re;
        // below l/2a = 50 the feed alone moves the length by several tenths of a percent (same source)
        let allowed = if ratio < 200.0 { 0.004 } else { 0.001 };
        assert!((found / length - 1.0).abs() < allowed, "l/2a = {ratio}: {found} against {length}");
        assert!((resistance / r - 1.0).abs() < 0.01, "l/2a = {ratio}: {resistance} ohm against {r}");
    }
}

#[test]
fn shortening_follows_the_first_order_formula_for_thin_wires() {
    // 0.2255/(ln(l/a) − 1) of a half wave: first-order theory of the thin wire (texts); 4 % of the shortening is its own error at 10⁵
    let ratio: f64 = 1e5;
    let found = crossing(0.44, 0.5, |l| impedance(&dipole(l, l / (2.0 * ratio))).im);
    let formula = 0.2255 / ((2.0 * ratio).ln() - 1.0);
    assert!(((1.0 - 2.0 * found) / formula - 1.0).abs() < 0.07, "{} {formula}", 1.0 - 2.0 * found);
}

#[test]
fn antiresonance_near_a_full_wave() {
    for (radius, length, r, z) in [
        (1e-4, 0.9235, 3957.0, Complex64::new(1923.0, -2182.0)),
        (2.3e-5, 0.9416, 5706.0, Complex64::new(3014.0, -3086.0)),
        (1e-5, 0.9487, 6833.0, Complex64::new(3737.0, -3658.0)),
    ] {
        let found = crossing(0.85, 1.0, |l| impedance(&dipole(l, radius)).im);
        let resistance = impedance(&dipole(found, radius)).re;
        assert!((found / length - 1.0).abs() < 0.004, "a/λ = {radius}: {found} against {length}");
        assert!((resistance / r - 1.0).abs() < 0.02, "a/λ = {radius}: {resistance} against {r}");
        // at a full wave, as admittance with the slack of the accuracy contract and 0.1 pF for the other feed
        let y = admittance(&dipole(1.0, radius), &[], 1.0)[(0, 0)];
        let allowed = 0.01 * z.inv().norm() + 2e6 * PI * MHZ * 0.15e-12;
        assert!((y - z.inv()).norm() < allowed, "a/λ = {radius}: {} against {z}", y.inv());
    }
    // Schelkunoff: Za²/199 with Za = 120(ln(l/a) − 1) is 17 % high at a/λ = 10⁻⁵
    let za = 120.0 * ((1.0_f64 / 1e-5).ln() - 1.0);
    let found = crossing(0.85, 1.0, |l| impedance(&dipole(l, 1e-5)).im);
    let over = za * za / 199.0 / impedance(&dipole(found, 1e-5)).re;
    assert!((1.12..1.22).contains(&over), "{over}");
}

#[test]
fn elliotts_formula_disagrees_with_the_finite_radius_by_what_it_leaves_out() {
    // R = 122.65 − 204.1u + 110u², X = −[120(ln(2h/a) − 1)cot u − 162.5 + 140u − 40u²], Elliott 1981 (coefficients from memory);
    // it fits the induced EMF of a sinusoidal current, not the current of a thick wire
    let u = PI / 2.0;
    let elliott = Complex64::new(122.65 - 204.1 * u + 110.0 * u * u, 162.5 - 140.0 * u + 40.0 * u * u);
    assert!((elliott - Complex64::new(73.46, 41.28)).norm() < 0.02, "{elliott}");
    assert!((elliott - THIN_LIMIT_OHM).norm() < 1.5);
    for (radius, low, high) in [(3.175e-3, 17.0, 23.0), (5.0e-3, 20.0, 27.0)] {
        let z = admittance(&dipole(0.5, radius), &[], 2.0)[(0, 0)].inv();
        let above = z.re - elliott.re;
        assert!(above > low && above < high, "a/λ = {radius}: {z}, {above} ohm above");
    }
}

#[test]
fn off_centre_feed_raises_the_resistance_by_the_square_of_the_current() {
    // R = R_centre / cos²(kx) for a sinusoidal current (texts); at a third from the end kx = π/6
    let radius = 2.3e-5;
    let length = 0.4863 * WAVELENGTH_M;
    let at = |share: f64| {
        let wires = wire("d", &[[0.0, 0.0, 0.0], [length, 0.0, 0.0]], radius * WAVELENGTH_M, "");
        impedance(&station("none", &wires, &format!("on = \"d\"\nat = {}", share * length), MHZ))
    };
    let centre = at(0.5);
    for share in [0.4, 1.0 / 3.0, 0.25] {
        let sine = (PI * share).sin();
        let want = centre.re / (sine * sine);
        let got = at(share).re;
        assert!((got / want - 1.0).abs() < 0.06, "{share}: {got} against {want}");
        assert!(got > 1.05 * centre.re);
    }
}
