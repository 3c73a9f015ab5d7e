//! Line, transformer and standing-wave ratio against closed forms and published tables.

use braidwise::catalogue::cable;
use braidwise::layout::LineData;
use braidwise::network::{Chain, Line, LossFit, Transformer, reflection, swr};
use num_complex::Complex64;

const C_M_PER_S: f64 = 299_792_458.0;

fn line_of(name: &str) -> Line {
    let row = cable(name).unwrap();
    Line::new(&LineData {
        impedance_ohm: row.impedance_ohm,
        velocity_factor: row.velocity_factor,
        loss: row.loss.clone(),
    })
}

fn c(re: f64, im: f64) -> Complex64 {
    Complex64::new(re, im)
}

#[test]
fn loss_fits_evaluate_as_tabulated() {
    // Fit through the 30 and 150 MHz rows of a national licence manual, dB per 100 m, evaluated by hand.
    let mhz = [1.0, 1.8, 3.5, 7.0, 10.0, 14.0, 21.0, 28.0, 50.0, 100.0];
    let tables = [
        ("RG-58", [1.46, 1.96, 2.74, 3.88, 4.65, 5.51, 6.76, 7.83, 10.5, 15.0]),
        ("RG-213", [0.63, 0.84, 1.18, 1.68, 2.01, 2.39, 2.95, 3.42, 4.63, 6.68]),
        ("RG-8X", [1.15, 1.54, 2.16, 3.06, 3.67, 4.36, 5.36, 6.21, 8.37, 12.0]),
    ];
    for (name, losses) in tables {
        let fit = line_of(name).loss;
        for (f, printed) in mhz.iter().zip(losses) {
            // Printed to three figures, from constants rounded to five digits.
            let print_error = if printed >= 10.0 { 0.052 } else { 0.0055 };
            assert!((fit.at(f * 1e6) - printed).abs() < print_error, "{name} {f} MHz: {} {printed}", fit.at(f * 1e6));
        }
        // All skin effect from the 30 MHz point alone must disagree at 100 MHz.
        let loss = &cable(name).unwrap().loss;
        let alone = LossFit::new(&loss[..1]);
        assert!((alone.at(100e6) - losses[9]).abs() > 0.051, "{name}");
    }
}

#[test]
fn three_points_are_fitted_by_least_squares() {
    // Points made from k1 and k2 come back whatever their number.
    let (k1, k2) = (1.4564e-3, 4.23e-9);
    let points: Vec<(f64, f64)> = [1e6, 10e6, 30e6, 150e6].iter().map(|f: &f64| (*f, k1 * f.sqrt() + k2 * f)).collect();
    let fit = LossFit::new(&points);
    assert!((fit.skin_db_per_100m / k1 - 1.0).abs() < 1e-10 && (fit.dielectric_db_per_100m / k2 - 1.0).abs() < 1e-8);
}

#[test]
fn matched_loss_is_the_fitted_one_and_delay_the_sheet_capacitance() {
    for name in ["RG-58", "RG-213", "RG-8X"] {
        let line = line_of(name);
        for f in [1.8e6, 7.1e6, 28.5e6] {
            let at = line.at(f);
            let db = 20.0 * (at.propagation_per_m.re * 100.0).exp().log10();
            assert!((db - line.loss.at(f)).abs() < 1e-9);
            let matched = at.loaded(30.0, at.impedance_ohm);
            assert!((matched.input_ohm - at.impedance_ohm).norm() < 1e-9);
            assert!((20.0 * matched.voltage.norm().log10() + 0.3 * line.loss.at(f)).abs() < 1e-9);
        }
        // Compiled sheets: 101 pF/m for RG-58, 98 to 101 for RG-213, 82 to 85 for RG-8X. Y'/(omega) at HF.
        let at = line.at(100e6);
        let farad_per_m = (at.propagation_per_m / at.impedance_ohm).im / (2.0 * std::f64::consts::PI * 100e6);
        let sheet = if name == "RG-8X" { 82e-12..87e-12 } else { 98e-12..102e-12 };
        assert!(sheet.contains(&farad_per_m), "{name} {farad_per_m}");
    }
}

#[test]
fn characteristic_impedance_leans_capacitive_by_skin_effect() {
    // Transmission-line theory, first order: Z_c = Z0 [1 + (1 - j) alpha_c/beta + j alpha_d/beta].
    let line = line_of("RG-58");
    let f = 3.6e6;
    let at = line.at(f);
    let beta = 2.0 * std::f64::consts::PI * f / (0.66 * C_M_PER_S);
    let neper = |db: f64| db / 100.0 / (20.0 / std::f64::consts::LN_10);
    let skin = neper(line.loss.skin_db_per_100m * f.sqrt());
    let dielectric = neper(line.loss.dielectric_db_per_100m * f);
    let theory = 50.0 * (1.0 + c(skin, dielectric - skin) / beta);
    assert!((at.impedance_ohm - theory).norm() < 0.02, "{} {theory}", at.impedance_ohm);
    assert!(at.impedance_ohm.im < -1.0, "a real 50 ohm must disagree");
}

#[test]
fn quarter_and_half_waves_transform_as_the_closed_form() {
    let line = Line::new(&LineData { impedance_ohm: 50.0, velocity_factor: 0.66, loss: vec![(10e6, 0.0)] });
    let f = 7.1e6;
    let at = line.at(f);
    let quarter = 0.25 * 0.66 * C_M_PER_S / f;
    let load = c(30.0, 40.0);
    assert!((at.input_impedance(quarter, load) - 2500.0 / load).norm() < 1e-9);
    assert!((at.input_impedance(2.0 * quarter, load) - load).norm() < 1e-9);
    // An eighth wave, shorted: j Z0.
    assert!((at.input_impedance(quarter / 2.0, c(0.0, 0.0)) - c(0.0, 50.0)).norm() < 1e-9);
    // Any other length: Z0 (Z + j Z0 tan)/(Z0 + j Z tan).
    let tan = c(0.0, (0.7f64).tan());
    let length = 0.7 / (std::f64::consts::PI / 2.0) * quarter;
    assert!((at.input_impedance(length, load) - 50.0 * (load + 50.0 * tan) / (50.0 + load * tan)).norm() < 1e-9);
}

#[test]
fn chain_matrix_and_wave_form_agree_with_a_ladder_of_short_sections() {
    // 20,000 sections of series Z' and shunt Y', Richardson-free: second order in the section length.
    for name in ["RG-58", "RG-316"] {
        let at = line_of(name).at(14.2e6);
        let (length, sections) = (23.0, 20_000);
        let step = length / f64::from(sections);
        let series = at.propagation_per_m * at.impedance_ohm * step;
        let shunt = at.propagation_per_m / at.impedance_ohm * step;
        let load = c(2450.0 / 49.0 * 1.7, -35.0);
        let (mut voltage, mut current, mut lost) = (load, c(1.0, 0.0), 0.0);
        for _ in 0..sections {
            let middle = voltage + current * series / 2.0;
            let before = current + middle * shunt;
            lost += 0.5 * (current.norm_sqr() + before.norm_sqr()) * series.re + middle.norm_sqr() * shunt.re;
            voltage = middle + before * series / 2.0;
            current = before;
        }
        let loaded = at.loaded(length, load);
        assert!((loaded.input_ohm / (voltage / current) - 1.0).norm() < 1e-6);
        assert!((loaded.voltage * voltage / load - 1.0).norm() < 1e-6);
        assert!((loaded.current * current - 1.0).norm() < 1e-6);
        let chain = at.abcd(length);
        assert!((chain.a * load + chain.b_ohm - voltage).norm() < 1e-5 * voltage.norm());
        assert!((chain.c_s * load + chain.d - current).norm() < 1e-5 * current.norm());
        assert!((chain.a * chain.d - chain.b_ohm * chain.c_s - 1.0).norm() < 1e-12, "reciprocal");
        // What the ladder's resistances take is what the chain calls line loss.
        let state = station(Some((line_of(name), length))).at(14.2e6).state(load * 49.0, 100.0).unwrap();
        let share = lost / (voltage * current.conj()).re;
        assert!((state.line_w / 100.0 / share - 1.0).abs() < 1e-4, "{} {}", state.line_w, share);
    }
}

fn station(line: Option<(Line, f64)>) -> Chain {
    Chain { transformer: Transformer { impedance_ratio: 49.0 }, line, radio_impedance_ohm: 50.0 }
}

#[test]
fn loss_of_a_mismatched_line_follows_the_handbook_formula() {
    // Handbook (common practice): total loss = 10 log[(a^2 - |G|^2)/(a (1 - |G|^2))], a = 10^(matched dB/10), for a real Z0.
    // Averaged over a half wave of line, where the complex Z_c's ripple cancels.
    let line = line_of("RG-213");
    let f = 7.1e6;
    let load = c(200.0, 0.0);
    let half = 0.5 * 0.66 * C_M_PER_S / f;
    let gamma = reflection(load, 50.0).norm_sqr();
    let mut ratio = 0.0;
    for i in 0..16 {
        let length = 40.0 + half * f64::from(i) / 16.0;
        let a = 10f64.powf(line.loss.at(f) * length / 100.0 / 10.0);
        let handbook = 10.0 * ((a * a - gamma) / (a * (1.0 - gamma))).log10();
        let state = station(Some((line, length))).at(f).state(load * 49.0, 100.0).unwrap();
        let ours = -10.0 * (state.feed_w / 100.0).log10();
        assert!((ours / handbook - 1.0).abs() < 0.06, "{length}: {ours} {handbook}");
        ratio += ours / handbook / 16.0;
    }
    assert!((ratio - 1.0).abs() < 0.01, "{ratio}");
}

#[test]
fn turns_of_three_to_twenty_one_present_2450_as_50() {
    // Common practice.
    let transformer = Transformer::from_turns(3.0, 21.0);
    assert!((transformer.impedance_ratio - 49.0).abs() < 1e-12);
    assert!((transformer.radio_side(c(2450.0, 0.0)) - 50.0).norm() < 1e-12);
    // 8:1 is 64:1, 3200 ohm; 7.5:1 is 56.25:1, 2812 ohm (arithmetic).
    assert!((Transformer::from_turns(2.0, 15.0).impedance_ratio - 56.25).abs() < 1e-12);
    let state = station(None).at(7.1e6).state(c(2450.0, 0.0), 100.0).unwrap();
    assert_eq!((state.radio_swr, state.line_w, state.transformer_w), (1.0, 0.0, 0.0));
    // 100 W in 2450 ohm: 495 V.
    assert!((state.feed_voltage_v - 494.975).abs() < 0.001 && (state.feed_current_a - 0.20203).abs() < 1e-5);
}

#[test]
fn standing_wave_ratios_of_shunt_and_series_reactance() {
    // D. G. Fern, "The Four Times the Impedance Rule", and arithmetic: printed to three decimals.
    for (multiple, printed) in [(3.0, 1.393), (4.0, 1.283), (5.0, 1.221), (10.0, 1.105)] {
        let shunted = (c(1.0 / 50.0, 0.0) + c(0.0, 50.0 * multiple).inv()).inv();
        assert!((swr(shunted, 50.0) - printed).abs() < 5.1e-4, "{multiple}");
    }
    for (multiple, printed) in [(0.1, 1.105), (0.2, 1.221), (0.5, 1.640)] {
        assert!((swr(c(50.0, 50.0 * multiple), 50.0) - printed).abs() < 5.1e-4, "{multiple}");
    }
    // 2450 ohm at 50 ohm: |reflection| 0.960.
    assert!((reflection(c(2450.0, 0.0), 50.0).re - 0.960).abs() < 1e-9);
}

#[test]
fn hopeless_loads_are_computed_or_refused_but_never_not_a_number() {
    let chain = station(Some((line_of("RG-58"), 12.0))).at(3.6e6);
    for feed in [c(1e-9, -5e4), c(1e9, 0.0), c(0.0, 100.0), c(1e-12, 0.0)] {
        let state = chain.state(feed, 100.0).unwrap();
        let numbers = [state.radio_swr, state.feed_voltage_v, state.feed_current_a, state.line_w, state.line_end_swr];
        assert!(numbers.iter().all(|x| x.is_finite() && *x >= 0.0), "{feed}: {state:?}");
        assert!(state.line_w <= 100.0 && (state.feed_w + state.line_w - 100.0).abs() < 1e-6);
    }
    let lossless = Line::new(&LineData { impedance_ohm: 50.0, velocity_factor: 0.66, loss: vec![(1e7, 0.0)] });
    let refused = station(Some((lossless, 12.0))).at(3.6e6).state(c(0.0, 100.0), 100.0);
    assert!(refused.is_err_and(|e| e.to_string().contains("no power can flow")));
    assert!(chain.state(c(f64::NAN, 0.0), 100.0).is_err());
}
