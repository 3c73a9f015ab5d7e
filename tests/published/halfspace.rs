//! Half-space potentials against values from outside: arbitrary-precision quadrature, closed forms, published limits.

use braidwise::halfspace::{HalfSpace, Potentials};
use num_complex::Complex64;
use serde_json::Value;
use std::f64::consts::PI;

fn number(v: &Value) -> f64 {
    v.as_f64().expect("a number in the data file")
}

fn complex(v: &Value) -> Complex64 {
    Complex64::new(number(&v[0]), number(&v[1]))
}

fn data(text: &str) -> Value {
    serde_json::from_str(text).expect("the data file is JSON")
}

fn space_of(case: &Value) -> HalfSpace {
    HalfSpace::new(number(&case["frequency_hz"]), number(&case["permittivity"]), number(&case["conductivity_s_per_m"]))
        .expect("a soil of the data file")
}

/// Source: halfspace_reference.py beside this file (mpmath; its version and settings stand in the data).
/// Contract: 1e-6 of the larger of the value and 10⁻³/R.
#[test]
fn potentials_agree_with_arbitrary_precision_quadrature() {
    let reference = data(include_str!("halfspace_reference.json"));
    let points = reference["points"].as_array().expect("a list of points");
    assert!(points.len() >= 200);
    let mut worst = 0.0f64;
    for case in points {
        let (rho, z, zs) = (number(&case["rho_m"]), number(&case["z_m"]), number(&case["z_source_m"]));
        let got = space_of(case).potentials(rho, z, zs);
        let floor = 1e-3 / rho.hypot(z - zs);
        let values = |p: Potentials| [("xx", p.xx), ("zz", p.zz), ("phi", p.phi), ("p_rho", p.p_rho)];
        for (name, value) in values(got) {
            let wanted = complex(&case[name]);
            let error = (value - wanted).norm() / wanted.norm().max(floor);
            worst = worst.max(error);
            assert!(error < 1e-6, "{name} {case}: {value} is off by {error:e}");
        }
    }
    // Where it is largest (K_zz over sea water at 10 kHz) the reference's own two orders differ by as much.
    assert!(worst < 1e-7, "worse than it has been: {worst:e}");
}

/// A reference that must fail: the reflection coefficient at the specular angle in place of the integral.
#[test]
fn the_reflection_coefficient_is_not_the_potential() {
    let space = HalfSpace::new(7.1e6, 13.0, 5e-3).expect("average ground");
    let (rho, z) = (1.0, 0.03);
    let far = f64::hypot(rho, 2.0 * z);
    let (te, _) = space.plane_wave_reflection((rho / far).asin());
    let wave = |r: f64| (-Complex64::i() * space.k0_per_m() * r).exp() / r;
    let guess = wave(rho) + te * wave(far);
    let exact = space.potentials(rho, z, z).xx;
    assert!((guess - exact).norm() > 0.3 * exact.norm(), "{guess} {exact}");
}

/// Source: an independent solution, no published source: electric fields of unit current moments over, in and across
/// the surface of four soils, good to their ten printed digits.
#[test]
fn fields_agree_with_an_independent_solution() {
    let cases = data(include_str!("halfspace_fields.json"));
    for case in cases.as_array().expect("a list of cases") {
        let (rho, phi) = (number(&case["rho_m"]), number(&case["phi_rad"]));
        let at = [rho * phi.cos(), rho * phi.sin(), number(&case["z_m"])];
        let source = [0.0, 0.0, number(&case["z_source_m"])];
        let field = space_of(case).element_field([1.0, 0.0, 0.0], source, at).electric_v_per_m;
        let (mut gap, mut size) = (0.0, 0.0);
        for (got, wanted) in field.iter().zip(case["electric_v_per_m"].as_array().expect("three components")) {
            gap += (got - complex(wanted)).norm_sqr();
            size += complex(wanted).norm_sqr();
        }
        assert!(gap.sqrt() < 2e-9 * size.sqrt(), "{case}: {field:?}");
    }
}

/// Source: the project's reference values, section 4.4: the Sommerfeld integrals for an infinitesimal dipole evaluated
/// as formulas, verified there in the perfect-ground limit. R/R₀ and ΔX/R₀ at 7.1 MHz, printed to four decimals.
#[test]
fn resistance_of_an_infinitesimal_dipole_over_real_ground() {
    let rows: [(f64, f64, f64, [f64; 4]); 12] = [
        (13.0, 5e-3, 0.02, [18.423, 182.47, 8.831, 87.97]),
        (13.0, 5e-3, 0.05, [4.0185, 13.324, 1.5563, 5.509]),
        (13.0, 5e-3, 0.10, [2.2678, 1.818, 0.8713, 0.7586]),
        (13.0, 5e-3, 0.25, [1.2027, -0.144, 1.1538, 0.2351]),
        (13.0, 5e-3, 0.50, [0.9509, 0.023, 0.9475, -0.1406]),
        (15.0, 1e-3, 0.05, [3.2887, 12.730, 1.4322, 5.204]),
        (15.0, 1e-3, 0.25, [1.1906, -0.116, 1.1040, 0.2290]),
        (30.0, 1e-2, 0.05, [3.3540, 13.870, 1.1721, 5.535]),
        (70.0, 5.0, 0.05, [2.0392, 14.285, 0.1367, 5.246]),
        (70.0, 5.0, 0.25, [1.3013, -0.101, 1.1560, 0.4212]),
        (3.0, 1e-4, 0.05, [2.5850, 7.364, 1.4065, 3.187]),
        (3.0, 1e-4, 0.25, [1.0936, -0.081, 1.0548, 0.0885]),
    ];
    for (permittivity, conductivity, height, wanted) in rows {
        let space = HalfSpace::new(7.1e6, permittivity, conductivity).expect("a soil of the table");
        let k0 = space.k0_per_m();
        let at = [0.0, 0.0, height * 2.0 * PI / k0];
        let own = braidwise::quantity::ETA_0_OHM * k0 * k0 / (6.0 * PI);
        let vertical = -space.scattered_field([0.0, 0.0, 1.0], at, at).electric_v_per_m[2] / own;
        let horizontal = -space.scattered_field([1.0, 0.0, 0.0], at, at).electric_v_per_m[0] / own;
        let got = [1.0 + vertical.re, vertical.im, 1.0 + horizontal.re, horizontal.im];
        for (got, wanted) in got.iter().zip(wanted) {
            // Half a unit of the last printed place: the third decimal at worst, five figures where large.
            let room = 5.5e-4 + 5e-5 * wanted.abs();
            assert!((got - wanted).abs() < room, "{permittivity} {height}: {got} for {wanted}");
        }
    }
}

/// Source: K. A. Norton's flat-earth surface wave as tabulated in the project's reference values, section 5 (formula).
/// His F leaves out terms of the order of 1/(k₀d) and 1/|n|⁴; hence the room, largest close by and at low frequency.
#[test]
fn ground_wave_follows_norton() {
    let rows: [(f64, f64, f64, [f64; 3]); 8] = [
        (70.0, 5.0, 1.9e6, [0.9998, 0.9990, 0.9981]),
        (70.0, 5.0, 28.5e6, [0.9545, 0.8072, 0.6600]),
        (30.0, 1e-2, 1.9e6, [0.8164, 0.5266, 0.3436]),
        (30.0, 1e-2, 7.1e6, [0.2623, 0.0585, 0.0282]),
        (22.0, 3e-3, 1.9e6, [0.5545, 0.2138, 0.1084]),
        (15.0, 1e-3, 1.9e6, [0.3483, 0.0992, 0.0493]),
        (15.0, 1e-3, 7.1e6, [0.1040, 0.0220, 0.0110]),
        (3.0, 1e-4, 1.9e6, [0.1069, 0.0226, 0.0113]),
    ];
    for (permittivity, conductivity, frequency, wanted) in rows {
        let space = HalfSpace::new(frequency, permittivity, conductivity).expect("a soil of the table");
        for (distance, wanted) in [1e3, 5e3, 1e4].into_iter().zip(wanted) {
            let got = space.ground_wave_attenuation(distance).norm();
            let room = 2.5 / (space.k0_per_m() * distance) + 0.5 / space.index_squared().norm().powi(2) + 1e-3;
            // The last printed place counts where F is small.
            assert!(
                (got - wanted).abs() < room * wanted + 6e-5,
                "{permittivity} {frequency} {distance}: {got} {wanted}"
            );
        }
    }
}

/// Source: ITU-R BS.561: 300 V of cymomotive force for 1 kW from a short vertical on a perfect earth, 300 mV/m at 1 km
/// (with η = 120π; 299.9 with the exact one).
#[test]
fn a_kilowatt_gives_three_hundred_millivolts_at_a_kilometre() {
    let space = HalfSpace::new(1.9e6, 1.0, 1e7).expect("an almost perfect earth");
    let field = space.ground_wave_v_per_m(1e3, 1e3);
    assert!((field - 0.2999).abs() < 1e-4, "{field}");
    let sea = HalfSpace::new(28.5e6, 70.0, 5.0).expect("sea water");
    assert!(sea.ground_wave_v_per_m(1e4, 1e3) < 0.7 * 0.03);
}
