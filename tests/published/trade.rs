//! Facts of the trade, common practice one and all, as the model stations must show them.

use crate::wires::{outcome, text};
use braidwise::outcome::{FrequencyOutcome, Prediction};
use num_complex::Complex64;

fn model(name: &str) -> String {
    std::fs::read_to_string(format!("models/{name}.toml")).unwrap()
}

/// A model with pieces of its text replaced; each must be there.
fn changed(name: &str, changes: &[(&str, &str)]) -> String {
    let mut out = model(name);
    for (from, to) in changes {
        assert!(out.contains(from), "{name} has no {from:?}");
        out = out.replace(from, to);
    }
    out
}

fn predicted(station: &str) -> Prediction {
    outcome(&text(station))
}

fn feed(f: &FrequencyOutcome) -> Complex64 {
    Complex64::new(f.feed.resistance_ohm, f.feed.reactance_ohm)
}

/// Frequency in MHz instead of bands.
fn at(station: &str, bands: &str, mhz: f64) -> String {
    assert!(station.contains(bands));
    station.replace(bands, &format!("frequencies = [\"{mhz} MHz\"]"))
}

/// Length in feet at which the radiator shows no reactance, by halving between two lengths.
fn best_cut_ft(name: &str, length: &str, bands: &str, mhz: f64, range_ft: (f64, f64)) -> f64 {
    let reactance = |ft: f64| {
        let station = changed(name, &[(length, &format!("length = \"{ft} ft\""))]);
        predicted(&at(&station, bands, mhz)).frequencies[0].feed.reactance_ohm
    };
    let (mut low, mut high) = range_ft;
    assert!(
        reactance(low) > 0.0 && reactance(high) < 0.0,
        "{name} at {mhz} MHz: {} {}",
        reactance(low),
        reactance(high)
    );
    for _ in 0..7 {
        let middle = 0.5 * (low + high);
        if reactance(middle) > 0.0 {
            low = middle;
        } else {
            high = middle;
        }
    }
    0.5 * (low + high)
}

#[test]
fn the_best_cut_of_an_end_fed_half_wave() {
    // 115 to 135 ft for 80 m and 60 to 68 ft for 40 m, depending on where in the band
    let low = best_cut_ft("weir-gallery-80", "length = 38.8", "bands = [\"80\"]", 3.55, (105.0, 145.0));
    let high = best_cut_ft("weir-gallery-80", "length = 38.8", "bands = [\"80\"]", 3.95, (105.0, 145.0));
    assert!(low < 136.0 && high > 114.0 && low > 1.05 * high, "80 m: {low} and {high} ft");
    let low = best_cut_ft("weir-gallery-40", "length = 20.1", "bands = [\"40\"]", 7.02, (55.0, 72.0));
    let high = best_cut_ft("weir-gallery-40", "length = 20.1", "bands = [\"40\"]", 7.28, (55.0, 72.0));
    assert!(low < 68.5 && high > 60.0 && low > high, "40 m: {low} and {high} ft");
}

#[test]
fn turns_of_3_to_21_present_2450_ohm_as_50() {
    let ratio = text(&model("weir-gallery-40")).feed.impedance_ratio.unwrap();
    assert!((2450.0 / ratio - 50.0).abs() < 1e-9);
}

/// Standing-wave ratio at the transformer.
fn swr(z: Complex64) -> f64 {
    let gamma = (z / 49.0 - 50.0) / (z / 49.0 + 50.0);
    (1.0 + gamma.norm()) / (1.0 - gamma.norm())
}

#[test]
fn the_match_hardly_moves_with_the_coax_but_breaks_near_a_half_wave_outside() {
    let at_length = |ft: f64| {
        let station = changed("weir-gallery-40", &[("length = 11\n", &format!("length = \"{ft} ft\"\n"))]);
        feed(&predicted(&at(&station, "bands = [\"40\"]", 7.1)).frequencies[0])
    };
    let between: Vec<f64> = [12.0, 20.0, 30.0, 40.0, 48.0].into_iter().map(|ft| swr(at_length(ft))).collect();
    let worst = between.iter().copied().fold(0.0, f64::max);
    let best = between.iter().copied().fold(f64::INFINITY, f64::min);
    assert!(worst < 3.5 && worst / best < 2.5, "{between:?}");
    // a half wave at 7.1 MHz is 69 ft; the outside of a jacketed shield is some percent shorter
    // and over a metre or two the feed impedance runs through a larger loop than over all the lengths before
    let at_65 = at_length(65.0);
    let moved = |a: Complex64, b: Complex64| ((a - b) / (a + b)).norm();
    assert!(swr(at_65) > 1.25 * worst, "{at_65} {between:?}");
    let before = moved(at_length(20.0), at_length(48.0));
    let near = moved(at_length(62.0), at_length(67.0));
    assert!(near > 2.0 * before, "{near} {before}");
}

#[test]
fn a_resistive_choke_at_the_feed_point_carries_the_feed_current_and_burns_power() {
    let with = |ohm: &str| {
        let choke = format!(
            "\n[[choke]]\nat = 0\nimpedance = {{ resistance = \"{ohm}\", reactance = \"0 ohm\" }}\n[operation]"
        );
        predicted(&at(&changed("weir-gallery-40", &[("\n[operation]", &choke)]), "bands = [\"40\"]", 7.1))
    };
    let bare = predicted(&at(&model("weir-gallery-40"), "bands = [\"40\"]", 7.1));
    let mut last = 0.02;
    for (ohm, value) in [("1 kohm", 1e3), ("2 kohm", 2e3), ("5 kohm", 5e3)] {
        let p = with(ohm);
        let f = &p.frequencies[0];
        let choke = &f.power.chokes[0];
        assert!((choke.current_a / f.feed.current_a.norm() - 1.0).abs() < 0.05, "{ohm}");
        assert!(((feed(f) - feed(&bare.frequencies[0])).norm() / value - 1.0).abs() < 0.1, "{ohm}");
        let share = choke.dissipated_w / f.power.input_w;
        assert!(share > 1.3 * last, "{ohm}: {share}");
        last = share;
    }
    assert!(last > 0.4, "{last}");
    // the same choke at an entry with coax going on leaves the match alone
    let at_entry = |p: &str| {
        let station = changed("weir-gallery-40", &[("\n[operation]", &format!("\n{p}\n[operation]"))]);
        predicted(&at(&station, "bands = [\"40\"]", 7.1))
    };
    let far = at_entry("[[choke]]\nat = 8.9\nimpedance = { resistance = \"5 kohm\", reactance = \"0 ohm\" }");
    let (a, b) = (feed(&far.frequencies[0]), feed(&bare.frequencies[0]));
    assert!(((a - b) / (a + b)).norm() < 0.06, "{a} {b}");
}

#[test]
fn a_reactive_choke_near_an_open_end_can_raise_the_current_beyond_it() {
    // an inductive choke lengthens the stub beyond it towards a quarter wave
    let beyond = |choke: &str| {
        let station = changed("weir-gallery-40", &[("\n[operation]", &format!("\n{choke}\n[operation]"))]);
        let p = predicted(&at(&station, "bands = [\"40\"]", 7.1));
        let f = &p.frequencies[0];
        let points = &f.conductors.iter().find(|c| c.name == "coax").unwrap().points;
        points.iter().find(|q| q.distance_m > 9.2).unwrap().current_a.norm()
    };
    let bare = beyond("");
    let raised = [500, 1000, 1500, 2000, 3000]
        .into_iter()
        .map(|x| {
            beyond(&format!("[[choke]]\nat = 9\nimpedance = {{ resistance = \"50 ohm\", reactance = \"{x} ohm\" }}"))
        })
        .fold(0.0, f64::max);
    let resistive = beyond("[[choke]]\nat = 9\nimpedance = { resistance = \"5 kohm\", reactance = \"0 ohm\" }");
    assert!(raised > 1.2 * bare, "{bare} {raised}");
    assert!(resistive < bare, "{bare} {resistive}");
}

/// Largest current on the outside of the coax for 100 W, A.
fn largest(station: &str) -> f64 {
    predicted(station).frequencies.iter().map(|f| f.shield.as_ref().unwrap().largest_current_a).fold(0.0, f64::max)
}

#[test]
fn a_choke_at_the_feed_point_cures_straight_coax_and_not_coax_under_a_leg() {
    let straight = largest(&model("levee-straight-choke")) / largest(&model("levee-straight"));
    let slanted = largest(&model("levee-slanted-choke")) / largest(&model("levee-slanted"));
    assert!(straight < 0.3, "{straight}");
    assert!(slanted > 2.0 * straight, "{straight} {slanted}");
}

#[test]
fn open_coax_is_worst_near_half_waves_and_bonded_coax_near_odd_quarters() {
    // outside of the coax as a line from the feed point: its input impedance is high where the current for the same power is
    // least at the feed; the current at its largest peaks where it is resonant
    let lengths_m: Vec<f64> = (0..15).map(|n| 4.0 + 1.5 * f64::from(n)).collect();
    let at_7 = |name: &str, length: &str, to: &str| at(&changed(name, &[(length, to)]), "bands = [\"40\"]", 7.1);
    let open: Vec<f64> = lengths_m
        .iter()
        .map(|l| {
            swr(feed(&predicted(&at_7("weir-gallery-40", "length = 11\n", &format!("length = {l}\n"))).frequencies[0]))
        })
        .collect();
    let worst = lengths_m[(0..open.len()).max_by(|a, b| open[*a].total_cmp(&open[*b])).unwrap()];
    assert!((17.0..22.5).contains(&worst), "open: worst at {worst} m, {open:?}");
    // the bond moves the worst to odd quarter waves: 10.6 m at 7.1 MHz from the feed point to the ground, lead included
    let routes_m: Vec<f64> = (0..16).map(|n| 4.0 + f64::from(n)).collect();
    let bonded: Vec<(f64, f64)> = routes_m
        .iter()
        .map(|y| {
            let station = at_7("weir-gallery-40-bonded", "-9.4", &format!("-{y}"));
            let layout = text(&station);
            let length = layout.coax.as_ref().unwrap().length_m + 1.0;
            (length, swr(feed(&outcome(&layout).frequencies[0])))
        })
        .collect();
    let worst = bonded.iter().max_by(|a, b| a.1.total_cmp(&b.1)).unwrap();
    assert!((8.5..12.0).contains(&worst.0), "bonded: {bonded:?}");
    let near_half = bonded.iter().filter(|p| (17.0..21.0).contains(&p.0)).map(|p| p.1).fold(0.0, f64::max);
    assert!(near_half < 0.5 * worst.1, "{bonded:?}");
}
