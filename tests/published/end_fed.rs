//! A long wire with a short tail, and a half wave from a perfect earth.
//!
//! Solved values: Galerkin, 400 segments a wavelength, about ±2 % in R and ±0.001 λ; an independent solution, no published source.

use crate::wires::{MHZ, WAVELENGTH_M, admittance, crossing, impedance, station, wire};
use braidwise::layout::Layout;
use num_complex::Complex64;
use std::f64::consts::PI;

const RADIUS: f64 = 2.3e-5;

fn end_fed(tail: f64, radiator: f64) -> Layout {
    let at = tail * WAVELENGTH_M;
    let wires = wire("w", &[[0.0, 0.0, 0.0], [at + radiator * WAVELENGTH_M, 0.0, 0.0]], RADIUS * WAVELENGTH_M, "");
    station("none", &wires, &format!("on = \"w\"\nat = {at}"), MHZ)
}

#[test]
fn impedance_with_a_tail_as_solved() {
    let rows = [
        (0.02, [(2418.0, -2047.0), (2727.0, -2560.0), (1742.0, -4347.0)]),
        (0.05, [(2798.0, -296.0), (3138.0, -895.0), (1967.0, -2908.0)]),
        (0.10, [(3112.0, 400.0), (3459.0, -271.0), (2114.0, -2419.0)]),
        (0.15, [(3314.0, 659.0), (3653.0, -57.0), (2187.0, -2258.0)]),
        (0.20, [(3476.0, 796.0), (3800.0, 46.0), (2233.0, -2173.0)]),
        (0.25, [(3626.0, 883.0), (3927.0, 106.0), (2268.0, -2111.0)]),
    ];
    for (tail, values) in rows {
        for (radiator, (r, x)) in [0.475, 0.480, 0.500].into_iter().zip(values) {
            let want = Complex64::new(r, x).inv();
            let got = admittance(&end_fed(tail, radiator), &[], 1.0)[(0, 0)];
            // 3 % of |Y| for the solved values' 2 % and 0.001 λ, and 0.15 pF for the narrower gap
            let allowed = 0.03 * want.norm() + 2e6 * PI * MHZ * 0.15e-12;
            assert!((got - want).norm() < allowed, "tail {tail}, radiator {radiator}: {} against {r} {x}", got.inv());
        }
    }
}

#[test]
fn a_tail_of_a_fiftieth_never_resonates_and_one_of_a_twentieth_just_does() {
    let worst =
        (0..17).map(|n| impedance(&end_fed(0.02, 0.45 + 0.005 * f64::from(n))).im).fold(f64::NEG_INFINITY, f64::max);
    assert!(worst < -1000.0, "{worst}");
    for (tail, length, r) in [(0.05, 0.471, 2407.0), (0.10, 0.478, 3319.0), (0.20, 0.480, 3798.0)] {
        let found = crossing(0.465, 0.49, |l| impedance(&end_fed(tail, l)).im);
        assert!((found - length).abs() < 0.002, "tail {tail}: {found}");
        let resistance = impedance(&end_fed(tail, found)).re;
        assert!((resistance / r - 1.0).abs() < 0.05, "tail {tail}: {resistance}");
    }
}

#[test]
fn a_half_wave_from_perfect_earth() {
    // X = 0 at 0.4708 λ with 2,853 ohm: half of the solved full-wave antiresonance
    let mast = |h: f64| {
        let wires = wire("m", &[[0.0, 0.0, 0.0], [0.0, 0.0, h * WAVELENGTH_M]], RADIUS * WAVELENGTH_M, "");
        station("perfect", &wires, "at = [0, 0, 0]\nhot = [\"m\"]\ncold = [\"earth\"]", MHZ)
    };
    let found = crossing(0.44, 0.5, |h| impedance(&mast(h)).im);
    assert!((found / 0.4708 - 1.0).abs() < 0.004, "{found}");
    let r = impedance(&mast(found)).re;
    assert!((r / 2853.0 - 1.0).abs() < 0.02, "{r}");
}
