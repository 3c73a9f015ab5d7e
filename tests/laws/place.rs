//! Placing a choke: against `predict` with the choke in the file, on stations drawn at random, and what must come out of it.

use braidwise::layout::{Layout, PartLaw};
use braidwise::network::Chain;
use braidwise::outcome::place::{PlaceOutcome, PlaceVerdict};
use braidwise::station::{Document, Embedded};
use braidwise::study::{Candidate, Options, PlaceOptions, place, predict};
use num_complex::Complex64;

/// Sequence of numbers in 0..1 from a seed (Numerical-Recipes linear congruence, high bits).
struct Draw(u64);

impl Draw {
    fn next(&mut self) -> f64 {
        self.0 = self.0.wrapping_mul(6_364_136_223_846_793_005).wrapping_add(1_442_695_040_888_963_407);
        (self.0 >> 11) as f64 / (1_u64 << 53) as f64
    }

    fn between(&mut self, low: f64, high: f64) -> f64 {
        low + (high - low) * self.next()
    }
}

fn layout(text: &str) -> Layout {
    let document = Document::parse(text, "drawn.toml").unwrap_or_else(|e| panic!("{}\n{text}", e.show(false)));
    let station = document.station(&Embedded).unwrap_or_else(|e| panic!("{}\n{text}", e.show(false)));
    Layout::place(&station).unwrap_or_else(|e| panic!("{e:?}\n{text}"))
}

/// A station at random: wire, coax with bends, sometimes a counterpoise, a lead joined at the entry, no body.
fn station(draw: &mut Draw, number: usize) -> String {
    let earth = match number % 3 {
        0 => "kind = \"none\"".to_string(),
        1 => "kind = \"perfect\"".to_string(),
        _ => format!(
            "kind = \"soil\"\npermittivity = {:.1}\nconductivity = \"{:.2} mS/m\"",
            draw.between(4.0, 30.0),
            draw.between(0.3, 20.0)
        ),
    };
    let (up, low) = (draw.between(2.0, 8.0), draw.between(0.03, 0.4));
    let (run, turn) = (draw.between(1.5, 5.0), draw.between(-1.5, 1.5));
    let mut text = format!(
        "title = \"drawn\"\n[earth]\n{earth}\n[points]\nfeed = [0, 0, {up:.3}]\ntip = [0, {:.3}, {:.3}]\n\
         foot = [0.1, -0.2, {low:.3}]\nentry = [{turn:.3}, -{run:.3}, {low:.3}]\nrig = [{turn:.3}, -{:.3}, 0.9]\n",
        draw.between(9.0, 21.0),
        draw.between(3.0, 9.0),
        run + draw.between(1.6, 2.6)
    );
    text.push_str("[[wire]]\nname = \"radiator\"\npath = [\"feed\", \"tip\"]\ndiameter = \"1.6 mm\"\n");
    let counterpoise = draw.next() < 0.5;
    if counterpoise {
        text.push_str(&format!(
            "[[wire]]\nname = \"counterpoise\"\npath = [\"feed\", [{:.2}, -0.4, {:.2}]]\ndiameter = \"1.6 mm\"\n",
            draw.between(1.5, 4.0),
            up - 0.5
        ));
    }
    if draw.next() < 0.5 {
        let down = if number % 3 == 1 { 0.0 } else { 0.6 };
        text.push_str(&format!(
            "[[wire]]\nname = \"lead\"\npath = [\"entry\", [{:.3}, -{run:.3}, {down}]]\ndiameter = \"3 mm\"\n",
            turn + 0.5
        ));
    }
    let cold = if counterpoise { "\"coax\", \"counterpoise\"" } else { "\"coax\"" };
    text.push_str(&format!(
        "[coax]\ncable = \"RG-58\"\npath = [\"feed\", \"foot\", \"entry\", \"rig\"]\nentry = \"entry\"\n\
         [feed]\nat = \"feed\"\nhot = [\"radiator\"]\ncold = [{cold}]\ntransformer = {{ ratio = \"49:1\" }}\n\
         [operation]\npower = \"100 W\"\nfrequencies = [\"{:.3} MHz\"]\n",
        draw.between(3.5, 29.0)
    ));
    if number.is_multiple_of(2) {
        text.push_str("[radio]\nbody = \"none\"\n");
    }
    text
}

fn choke(name: &str, at_m: f64, ohm: Complex64) -> String {
    format!(
        "[[choke]]\nname = \"{name}\"\nat = \"{at_m} m\"\nimpedance = {{ resistance = \"{} ohm\", reactance = \"{} ohm\" }}\n",
        ohm.re, ohm.im
    )
}

/// Reflection against the usual 2,450 ohm.
fn reflection(z: Complex64) -> Complex64 {
    (z - 2450.0) / (z + 2450.0)
}

fn candidate(ohm: Complex64) -> Candidate {
    Candidate { name: format!("{ohm}"), law: PartLaw::Fixed { resistance_ohm: ohm.re, reactance_ohm: ohm.im } }
}

/// One place of the study against the prediction of the station with the choke in its file.
fn compare(out: &PlaceOutcome, with_choke: &str, choke: usize, place: usize) {
    let told = format!("choke {} at {} m\n{with_choke}", out.chokes[choke].name, out.places_m[place]);
    let prediction = predict(&layout(with_choke), &Options::default()).unwrap();
    let there = &prediction.frequencies[0];
    let shield = there.shield.as_ref().unwrap();
    let largest = shield.largest_current_a;
    let entry = out.entry_current_a[0][choke][0][place];
    assert!(
        (entry - shield.entry_current_a).abs() < 0.01 * largest,
        "entry {entry} {} of {largest}: {told}",
        shield.entry_current_a
    );
    let z = Complex64::new(there.feed.resistance_ohm, there.feed.reactance_ohm);
    let apart = (reflection(z) - reflection(out.feed_ohm[0][choke][0][place])).norm();
    assert!(apart < 0.01, "reflection at the feed {apart}: {told}");
    let carried = there.power.chokes.iter().find(|c| c.name == "new").unwrap();
    let current = out.choke_a[0][choke][0][place];
    assert!((current - carried.current_a).abs() < 0.01 * largest, "choke {current} {}: {told}", carried.current_a);
    // the prediction's own points lie up to 0.1 m apart, so its first one within the metre is up to that far inside
    let coax = prediction.conductors_of(0, "coax");
    let last = coax.last().unwrap().0;
    let within = |metre: f64| coax.iter().filter(|p| p.0 >= last - metre).map(|p| p.1).fold(0.0, f64::max);
    let (low, high) = (within(0.99), within(1.11));
    let most = out.last_metre_current_a[0][choke][0][place];
    assert!(
        most > low - 0.015 * largest && most < high + 0.015 * largest,
        "last metre {low} {most} {high} of {largest}: {told}"
    );
}

/// Points of a conductor as (distance, current).
trait Points {
    fn conductors_of(&self, frequency: usize, name: &str) -> Vec<(f64, f64)>;
}

impl Points for braidwise::outcome::Prediction {
    fn conductors_of(&self, frequency: usize, name: &str) -> Vec<(f64, f64)> {
        let found = self.frequencies[frequency].conductors.iter().find(|c| c.name == name).unwrap();
        found.points.iter().map(|p| (p.distance_m, p.current_a.norm())).collect()
    }
}

#[test]
fn a_place_equals_the_prediction_with_the_choke_in_the_file() {
    let mut draw = Draw(20_260_711);
    let impedances = [
        Complex64::new(500.0, 0.0),
        Complex64::new(8000.0, 0.0),
        Complex64::new(700.0, 900.0),
        Complex64::new(60.0, -1200.0),
    ];
    for number in 0..20 {
        let mut text = station(&mut draw, number);
        let mut options = PlaceOptions { candidates: impedances.map(candidate).to_vec(), ..PlaceOptions::default() };
        if number % 4 == 3 {
            // a first choke that stays: the study places the second
            text.push_str(&choke("first", draw.between(0.8, 1.6), Complex64::new(2000.0, 300.0)));
            options.keep = vec!["first".to_string()];
        }
        let out = place(&layout(&text), &[], &options).unwrap();
        for _ in 0..2 {
            let at = (draw.next() * out.places_m.len() as f64) as usize;
            let which = (draw.next() * impedances.len() as f64) as usize;
            compare(&out, &format!("{text}{}", choke("new", out.places_m[at], impedances[which])), which, at);
        }
        let join = out.joins_m.first().and_then(|j| out.places_m.iter().position(|p| p == j));
        if let Some(at) = join {
            for beside in [at, at + 1] {
                compare(&out, &format!("{text}{}", choke("new", out.places_m[beside], impedances[1])), 1, beside);
            }
        }
    }
}

#[test]
fn places_beside_a_bend_at_ground_level_and_beside_the_feed_are_as_exact_as_any() {
    for (name, megahertz, places_m) in [
        ("sand-spit-random-wire", 24.9, &[1.26, 1.27, 1.28, 1.3, 1.33][..]),
        ("weir-gallery-40-bonded", 7.1, &[0.01, 0.02, 0.05, 2.15, 2.17][..]),
    ] {
        let file = model(name);
        let line = |l: &str| match l {
            l if l.starts_with("bands") => format!("frequencies = [\"{megahertz} MHz\"]"),
            l => l.to_string(),
        };
        let text = file.lines().map(line).collect::<Vec<_>>().join("\n");
        let ohm = Complex64::new(5000.0, 0.0);
        let options = PlaceOptions { candidates: vec![candidate(ohm)], ..PlaceOptions::default() };
        let out = place(&layout(&text), &[], &options).unwrap();
        for at_m in places_m {
            let place = out.places_m.iter().position(|p| (p - at_m).abs() < 1e-9).unwrap();
            compare(&out, &format!("{text}\n{}", choke("new", *at_m, ohm)), 0, place);
        }
    }
}

fn model(name: &str) -> String {
    std::fs::read_to_string(format!("{}/models/{name}.toml", env!("CARGO_MANIFEST_DIR"))).unwrap()
}

/// A model over a perfect earth on one frequency, so that the tests stay quick.
fn on_one_frequency(name: &str, megahertz: f64) -> Layout {
    let mut layout = layout(&model(name));
    layout.operation.frequencies.retain(|f| (f.frequency_hz - megahertz * 1e6).abs() < 0.2e6);
    layout.operation.frequencies.truncate(1);
    assert_eq!(layout.operation.frequencies.len(), 1);
    layout
}

#[test]
fn heat_for_a_fixed_drive_peaks_at_the_magnitude_of_the_path_impedance() {
    let layout = on_one_frequency("gauge-hut-bonded", 14.0);
    let frequency_hz = layout.operation.frequencies[0].frequency_hz;
    let chain = Chain::of(&layout).at(frequency_hz);
    // a short and an open circuit give the path's impedance; resistances 2 % apart look for the hottest
    let mut ohm = vec![1e-3, 1e9];
    ohm.extend((0..500).map(|n| 10.0 * 1.02_f64.powi(n)));
    let candidates = ohm.iter().map(|r| candidate(Complex64::from(*r))).collect();
    let out = place(&layout, &[], &PlaceOptions { candidates, step_m: 0.5, ..PlaceOptions::default() }).unwrap();
    for at in 0..out.places_m.len() {
        let volts = |c: usize| chain.state(out.feed_ohm[0][c][0][at], out.power_w).unwrap().feed_voltage_v;
        let short_a = out.choke_a[0][0][0][at] / volts(0);
        let open_v = out.choke_v[0][1][0][at] / volts(1);
        let path_ohm = open_v / short_a;
        let heat = |c: &usize| out.choke_w[0][*c][0][at] / volts(*c).powi(2);
        let hottest = (2..ohm.len()).max_by(|a, b| heat(a).total_cmp(&heat(b))).unwrap();
        assert!((ohm[hottest] / path_ohm).ln().abs() < 0.011, "at {}: {} {path_ohm}", out.places_m[at], ohm[hottest]);
    }
}

#[test]
fn without_a_counterpoise_a_choke_at_the_feed_point_only_adds_to_the_feed() {
    let layout = layout(&model("gauge-hut"));
    let mut layout = Layout { earth: braidwise::layout::Earth::Perfect, ..layout };
    layout.operation.frequencies.truncate(9);
    layout.operation.frequencies.drain(..3);
    let out = place(&layout, &[], &PlaceOptions::default()).unwrap();
    for (c, choke) in out.chokes.iter().enumerate() {
        for f in 0..out.frequencies_hz.len() {
            let rise = out.feed_ohm[0][c][f][0] - out.without.feed_ohm[0][f];
            let z = choke.impedance_ohm[f];
            // what is lost is the capacitance of the few millimetres between the feed gap and the choke's
            let in_series = out.without.feed_ohm[0][f] + z;
            let lost_s = (out.feed_ohm[0][c][f][0].inv() - in_series.inv()).norm();
            let lost_f = lost_s / (2.0 * std::f64::consts::PI * out.frequencies_hz[f]);
            assert!(lost_f < 0.5e-12, "{} at {}: {rise}, {lost_f} F", choke.name, out.frequencies_hz[f]);
        }
    }
    // common practice: at the feed point of an end-fed wire with nothing but its coax to work against, a choke is in the wrong place
    let whole = out.coax_length_m;
    for pick in &out.picks {
        assert!(pick.at_m > 0.1 * whole, "{} at {}", pick.choke, pick.at_m);
    }
    assert!(out.picks[0].at_m > 0.25 * whole, "{:?}", out.picks[0]);
}

#[test]
fn a_bond_at_the_entry_moves_the_choke() {
    let bonded = on_one_frequency("gauge-hut-bonded", 14.0);
    let text = model("gauge-hut-bonded");
    let (from, to) = (text.find("[[wire]]\nname = \"entry bond\"").unwrap(), text.find("[coax]").unwrap());
    let mut open = layout(&format!("{}{}", &text[..from], &text[to..]));
    open.operation.frequencies.clone_from(&bonded.operation.frequencies);
    let options = PlaceOptions { candidates: vec![candidate(Complex64::from(5000.0))], ..PlaceOptions::default() };
    let (with, without) = (place(&bonded, &[], &options).unwrap(), place(&open, &[], &options).unwrap());
    let (a, b) = (&with.picks[0], &without.picks[0]);
    // the place for the bonded station breaks a limit on the open one, whose window begins metres further down
    assert!(a.at_m < b.window_m[0] && b.window_m[0] > a.window_m[0] + 2.0, "{a:?} {b:?}");
    assert!(with.warnings.iter().any(|w| w.about == "entry bond" && w.message.contains("stays")));
}

/// Common practice: on a centre-fed wire whose coax falls straight away, the choke belongs at the feed point.
#[test]
fn on_a_straight_centre_fed_wire_the_feed_point_is_within_the_window() {
    let options = PlaceOptions { step_m: 0.05, ..PlaceOptions::default() };
    let study = |name: &str| place(&layout(&model(name)), &[], &options).unwrap();
    // largest current on the way into the shack, over the frequencies, with 5 kohm at 0 m against none
    let left = |out: &PlaceOutcome| {
        let most = |of: &mut dyn Iterator<Item = f64>| of.fold(0.0, f64::max);
        let choke = out.chokes.iter().position(|c| c.name == "5 kohm").unwrap();
        let with = most(&mut out.entry_current_a[0][choke].iter().map(|f| f[0]));
        with / most(&mut out.without.entry_current_a[0].iter().copied())
    };
    let (straight, slanted) = (study("levee-straight"), study("levee-slanted"));
    assert!(straight.picks.iter().any(|p| p.window_m[0] == 0.0), "{:?}", straight.picks);
    assert!(slanted.picks.iter().all(|p| p.window_m[0] > 0.0), "{:?}", slanted.picks);
    assert!(left(&straight) < 0.2 && left(&slanted) > 2.0 * left(&straight), "{} {}", left(&straight), left(&slanted));
}

#[test]
fn variants_share_places_and_the_verdict_rests_on_the_worst() {
    let nominal = on_one_frequency("gauge-hut-bonded", 7.0);
    let mut shorter = model("gauge-hut-bonded");
    shorter = shorter.replace("rig = [1.2, -8.4, 0.9]", "rig = [1.2, -8.0, 0.9]");
    let variants = vec![("line pulled in".to_string(), layout(&shorter))];
    let options = PlaceOptions { step_m: 0.05, ..PlaceOptions::default() };
    let out = place(&nominal, &variants, &options).unwrap();
    assert_eq!(out.variants, ["nominal", "line pulled in"]);
    assert!(out.places_m.last().unwrap() < &(out.coax_length_m - 0.3));
    assert!(out.warnings.iter().any(|w| w.about == "coax" && w.message.contains("only")));
    let alone = place(&nominal, &[], &options).unwrap();
    assert_eq!(alone.entry_current_a[0][0][0][..50], out.entry_current_a[0][0][0][..50]);
    let pick = &out.picks[0];
    let choke = out.chokes.iter().position(|c| c.name == pick.choke).unwrap();
    let at = out.places_m.iter().position(|p| *p == pick.at_m).unwrap();
    let worst = (0..2).map(|v| out.entry_current_a[v][choke][0][at]).fold(0.0, f64::max);
    if pick.worst.quantity == "entry_current_a" {
        assert_eq!(pick.worst.value, worst);
    }
    assert!(pick.worst.value / pick.worst.limit >= worst / out.limits.entry_current_a);
    let clamp = &out.clamp[0];
    assert!(clamp.range_a[0] <= clamp.current_a && clamp.current_a <= clamp.range_a[1] && clamp.range_a[0] > 0.0);
}

#[test]
fn loose_limits_need_no_choke_and_reach_limits_the_picks() {
    let mut layout = on_one_frequency("gauge-hut-bonded", 7.0);
    let options = PlaceOptions { step_m: 0.05, ..PlaceOptions::default() };
    layout.coax.as_mut().unwrap().reachable_m = vec![(3.0, 4.0)];
    let out = place(&layout, &[], &options).unwrap();
    assert!(out.picks.iter().all(|p| (3.0..=4.0).contains(&p.at_m) && p.window_m[0] >= 3.0 && p.window_m[1] <= 4.0));
    assert!(out.clamp.iter().all(|c| (3.0..=4.0).contains(&c.at_m)));
    layout.limits = braidwise::layout::Limits { entry_current_a: 50.0, swr: 500.0 };
    let out = place(&layout, &[], &options).unwrap();
    assert_eq!(out.verdict, PlaceVerdict::NoneNeeded);
    layout.limits = braidwise::layout::Limits { entry_current_a: 1e-6, swr: 1.001 };
    let out = place(&layout, &[], &options).unwrap();
    assert_eq!(out.verdict, PlaceVerdict::NoPlace);
    assert!(out.why.contains("limit") && out.picks[0].worst.value > out.picks[0].worst.limit);
}

#[test]
fn one_thread_and_many_give_the_same_bits() {
    let mut layout = layout(&model("gauge-hut-bonded"));
    layout.operation.frequencies.truncate(6);
    let options = PlaceOptions { step_m: 0.1, ..PlaceOptions::default() };
    let with = |threads: usize| {
        let pool = rayon::ThreadPoolBuilder::new().num_threads(threads).build().unwrap();
        pool.install(|| place(&layout, &[], &options).unwrap())
    };
    assert_eq!(with(1), with(3));
}
