//! The one-figure soil models against their own statements, each other and the handbook.

use braidwise::layout::Soil;

fn smith(conductivity_s_per_m: f64) -> Soil {
    Soil::LongmireSmith { conductivity_s_per_m }
}

fn alipio(conductivity_s_per_m: f64) -> Soil {
    Soil::AlipioVisacro { conductivity_s_per_m }
}

#[test]
fn universal_soil_is_one_curve_for_every_water_content() {
    // Longmire and Smith 1975 (from memory): relaxation frequencies go with (water/10 %)^1.28 and conductivity with
    // (water/10 %)^1.54, so a wetter soil has the permittivity of a drier one at a frequency higher by the ratio.
    let wetter_by: f64 = 2.0;
    let low = 8e-3;
    for frequency_hz in [1e5, 3.6e6, 28e6] {
        let (dry, _) = smith(low).at(frequency_hz);
        let (wet, _) = smith(low * wetter_by.powf(1.54)).at(frequency_hz * wetter_by.powf(1.28));
        assert!((wet / dry - 1.0).abs() < 1e-4, "{frequency_hz}: {dry} {wet}");
        // The wrong power must show.
        let (wrong, _) = smith(low * wetter_by.powf(1.54)).at(frequency_hz * wetter_by);
        assert!((wrong / dry - 1.0).abs() > 0.01);
    }
}

#[test]
fn universal_soil_falls_to_its_figure_and_its_floor() {
    for low in [1e-3, 1e-2] {
        assert!((smith(low).at(1e-3).1 / low - 1.0).abs() < 1e-3);
        assert!((smith(low).at(1e15).0 - 5.0).abs() < 1e-3);
        let mut last = smith(low).at(1e2);
        for step in 1..40 {
            let next = smith(low).at(1e2 * 10f64.powf(f64::from(step) * 0.15));
            assert!(next.0 < last.0 && next.1 > last.1, "permittivity falls and conductivity rises");
            last = next;
        }
    }
}

#[test]
fn two_sets_of_measurements_agree_on_conductivity() {
    // Longmire–Smith (laboratory samples, 1975) and Alipio–Visacro (soil in place, 2014) share no data: what both
    // give at the top of their common range supports both sets of coefficients, recalled from memory.
    for (low, spread) in [(5e-3, 0.1), (8e-3, 0.1), (1.5e-2, 0.1), (1e-3, 0.35)] {
        for frequency_hz in [1e6, 4e6] {
            let (one, other) = (smith(low).at(frequency_hz), alipio(low).at(frequency_hz));
            assert!((other.1 / one.1 - 1.0).abs() < spread, "{low} {frequency_hz}: {one:?} {other:?}");
            assert!((1.0..1.75).contains(&(other.0 / one.0)), "{low} {frequency_hz}: {one:?} {other:?}");
        }
    }
}

#[test]
fn universal_soil_passes_through_the_handbook_average_at_hf() {
    // Common practice: permittivity 13 and 5 mS/m for average ground at HF. A soil of 2 mS/m at low frequency.
    let (permittivity, conductivity_s_per_m) = smith(2e-3).at(7.1e6);
    assert!((11.0..17.0).contains(&permittivity) && (4e-3..7e-3).contains(&conductivity_s_per_m));
}

#[test]
fn alipio_visacro_keeps_its_stated_figures_at_one_megahertz() {
    // 2014, mean values (from memory): a soil of 1 mS/m gains 1.26 mS/m at 1 MHz.
    let (_, conductivity_s_per_m) = alipio(1e-3).at(1e6);
    assert!((conductivity_s_per_m - 2.26e-3).abs() < 1e-9);
    // Low-frequency conductivity is that at 100 Hz, within a percent or so.
    assert!((alipio(1e-3).at(1e2).1 / 1e-3 - 1.0).abs() < 0.012);
}
