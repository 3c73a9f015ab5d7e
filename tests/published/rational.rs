//! Rational interpolation against functions known in closed form.

use braidwise::study::rational::{Curve, CurveError, adaptive};
use num_complex::Complex64;
use std::convert::Infallible;
use std::f64::consts::PI;

const C_M_PER_S: f64 = 299_792_458.0;

type Function = Box<dyn Fn(f64) -> Vec<Complex64>>;

fn curve(function: &Function, low: f64, high: f64, tolerance: f64, most: usize) -> Curve {
    adaptive(|x: &[f64]| Ok::<_, Infallible>(x.iter().map(|x| function(*x)).collect()), low, high, tolerance, most)
        .unwrap()
}

/// Largest error over 4,000 places: relative to the magnitude there, or to 1 % of the component's largest.
fn true_error(curve: &Curve, function: &Function, low: f64, high: f64) -> f64 {
    let places: Vec<f64> = (0..=4000).map(|i| low + (high - low) * f64::from(i) / 4000.0).collect();
    let truth: Vec<Vec<Complex64>> = places.iter().map(|x| function(*x)).collect();
    let floor: Vec<f64> =
        (0..truth[0].len()).map(|k| 0.01 * truth.iter().map(|v| v[k].norm()).fold(0.0, f64::max)).collect();
    let mut worst = 0.0;
    for (x, exact) in places.iter().zip(&truth) {
        for (k, (a, b)) in curve.eval(*x).iter().zip(exact).enumerate() {
            worst = f64::max(worst, (a - b).norm() / b.norm().max(floor[k]));
        }
    }
    worst
}

/// Admittance of a wire fed against its coax, both as lossy open lines (transmission-line antenna model): the feed's own, and
/// the currents it sends past places along the coax.
fn antenna(wire_m: f64, coax_m: f64, neper: f64, places: usize) -> Function {
    Box::new(move |f| {
        let k = 2.0 * PI * f / C_M_PER_S * 1.03;
        // Radiation takes more as the wire grows against the wavelength, and stays even in frequency.
        let grown = |length: f64| (k * length).powi(2) / (20.0 + (k * length).powi(2));
        let line = |length: f64, part: f64| Complex64::new(neper * part * (1.0 + 2.0 * grown(length)), k * length);
        let (radiator, shield) = (line(wire_m, 1.0), line(coax_m, 1.5));
        let admittance = 1.0 / (600.0 / radiator.tanh() + 350.0 / shield.tanh());
        let mut values = vec![admittance];
        for i in 1..=places {
            let left = 1.0 - f64::from(u32::try_from(i).unwrap()) / (places + 1) as f64;
            values.push(admittance * (shield * left).sinh() / shield.sinh());
        }
        values
    })
}

#[test]
fn a_station_from_3_to_30_megahertz_needs_at_most_25_samples() {
    for (wire_m, coax_m, neper) in [(20.2, 12.0, 0.06), (20.2, 12.0, 0.12), (20.2, 11.0, 0.04), (20.2, 8.0, 0.08)] {
        let function = antenna(wire_m, coax_m, neper, 5);
        let curve = curve(&function, 3e6, 30e6, 1e-3, 40);
        let error = true_error(&curve, &function, 3e6, 30e6);
        assert!(error < 1e-3, "{wire_m} {coax_m}: {error}");
        assert!(curve.converged() && curve.samples().len() <= 25, "{wire_m} {coax_m}: {}", curve.samples().len());
    }
}

#[test]
fn the_error_estimate_is_truthful() {
    let (mut covered, mut cases, mut worst) = (0, 0, 0.0);
    for wire_m in [10.0, 20.2, 33.0] {
        for (coax_m, neper) in [(5.0, 0.1), (9.0, 0.02), (12.0, 0.06), (17.0, 0.08)] {
            for (places, most) in [(1, 12), (1, 40), (5, 16), (5, 40), (40, 40)] {
                let function = antenna(wire_m, coax_m, neper, places);
                let curve = curve(&function, 3e6, 30e6, 1e-3, most);
                let error = true_error(&curve, &function, 3e6, 30e6);
                if curve.error_estimate() > 0.5 {
                    // "No good" must be true as well.
                    assert!(!curve.converged() && error > 1e-3, "{wire_m} {coax_m} {neper} {places}: {error}");
                    continue;
                }
                assert!(curve.converged() == (curve.error_estimate() < 1e-3) && error < 1e-3);
                cases += 1;
                covered += u32::from(error <= curve.error_estimate());
                worst = f64::max(worst, error / curve.error_estimate());
            }
        }
    }
    assert!(cases >= 30 && covered * 10 >= cases * 9 && worst < 3.0, "{covered} of {cases}, worst {worst}");
}

#[test]
fn sharp_resonances_are_found() {
    // Series circuits in parallel, Q = 200, spread over the range; their closed form is the definition of Q.
    let resonances = [3.6e6, 7.1e6, 14.2e6, 21.2e6, 28.4e6];
    let function: Function = Box::new(move |f| {
        let y = resonances
            .iter()
            .map(|f0| 1.0 / (50.0 * Complex64::new(1.0, 200.0 * (f / f0 - f0 / f))))
            .sum::<Complex64>();
        vec![y + Complex64::new(1e-4, f * 1e-12)]
    });
    let curve = curve(&function, 3e6, 30e6, 1e-3, 60);
    let error = true_error(&curve, &function, 3e6, 30e6);
    assert!(curve.converged() && error < 1e-3, "{error} after {}", curve.samples().len());
    let poles = curve.poles();
    for f0 in resonances {
        // Pole of 1 + jQ(f/f0 - f0/f) at f0 (1 + j/2Q), to first order.
        let wanted = Complex64::new(f0, f0 / 400.0);
        assert!(poles.iter().any(|p| (p - wanted).norm() < 0.1 * f0 / 400.0), "{f0}: {poles:?}");
    }
}

#[test]
fn the_tangent_is_met_between_its_own_poles() {
    // Real poles inside the range.
    let function: Function = Box::new(|x| vec![Complex64::new(x.tan(), 0.0), Complex64::new(1.0 / x.cos(), 0.0)]);
    let curve = curve(&function, -4.0, 5.0, 1e-6, 40);
    for i in 0..=1000 {
        let x = -4.0 + 9.0 * f64::from(i) / 1000.0;
        let value = curve.eval(x);
        assert!((value[0] - x.tan()).norm() < 1e-5 * (1.0 + x.tan().powi(2)), "{x}: {value:?}");
    }
    for pole in [-PI / 2.0, PI / 2.0, 3.0 * PI / 2.0] {
        assert!(curve.poles().iter().any(|p| (p - pole).norm() < 1e-6));
        assert!(curve.eval(pole).iter().all(|v| v.is_finite()));
    }
}

#[test]
fn noise_below_the_tolerance_does_no_harm() {
    // Tables with an error of 1e-5: a fixed pseudo-random deviation.
    let clean = antenna(20.2, 12.0, 0.06, 5);
    let noisy: Function = Box::new(move |f| {
        let values = clean(f);
        values
            .iter()
            .enumerate()
            .map(|(k, v)| v * (1.0 + 1e-5 * ((f * 1e-3 + k as f64 * 17.0).sin() * 43_758.545).fract()))
            .collect()
    });
    let clean = antenna(20.2, 12.0, 0.06, 5);
    let curve = curve(&noisy, 3e6, 30e6, 1e-3, 40);
    assert!(curve.converged() && true_error(&curve, &clean, 3e6, 30e6) < 1e-3);
    assert!(curve.samples().len() <= 30, "{}", curve.samples().len());
}

#[test]
fn smooth_and_constant_functions_cost_little() {
    let constant: Function = Box::new(|_| vec![Complex64::new(50.0, 0.0), Complex64::new(0.0, 0.0)]);
    let flat = curve(&constant, 3e6, 30e6, 1e-6, 40);
    assert!(flat.samples().len() <= 10 && (flat.eval(7e6)[0] - 50.0).norm() < 1e-9 && flat.eval(7e6)[1].norm() == 0.0);
    let coil: Function = Box::new(|f| vec![Complex64::new(3.0, f * 1e-6), 1.0 / Complex64::new(3.0, f * 1e-6)]);
    let simple = curve(&coil, 3e6, 30e6, 1e-6, 40);
    assert!(simple.samples().len() <= 10 && true_error(&simple, &coil, 3e6, 30e6) < 1e-9);
}

#[test]
fn the_budget_is_kept_and_owned_up_to() {
    let function = antenna(41.0, 30.0, 0.01, 1);
    for most in [6, 7, 8, 11] {
        let curve = curve(&function, 3e6, 30e6, 1e-6, most);
        assert_eq!(curve.samples().len(), most);
        assert!(!curve.converged() && curve.error_estimate() > 1e-6);
        assert!(curve.samples().windows(2).all(|p| p[0] < p[1]));
    }
}

#[test]
fn failing_samplers_and_empty_ranges_are_refused() {
    let one = |x: &[f64]| Ok::<_, String>(vec![vec![Complex64::new(1.0, 0.0)]; x.len()]);
    assert!(matches!(adaptive(one, 2.0, 2.0, 1e-3, 20), Err(CurveError::Range { .. })));
    assert!(matches!(adaptive(one, 3.0, f64::NAN, 1e-3, 20), Err(CurveError::Range { .. })));
    let failing = |_: &[f64]| Err::<Vec<Vec<Complex64>>, _>("singular".to_owned());
    assert_eq!(adaptive(failing, 1.0, 2.0, 1e-3, 20).unwrap_err().to_string(), "singular");
    let missing = |_: &[f64]| Ok::<_, String>(vec![vec![Complex64::new(1.0, 0.0)]]);
    assert!(matches!(adaptive(missing, 1.0, 2.0, 1e-3, 20), Err(CurveError::Shape { .. })));
    let broken = |x: &[f64]| Ok::<_, String>(vec![vec![Complex64::new(f64::NAN, 0.0)]; x.len()]);
    assert!(matches!(adaptive(broken, 1.0, 2.0, 1e-3, 20), Err(CurveError::Shape { .. })));
}
