//! Length scans: the fast answer is the slow one, results run smoothly, and the worst lengths come out where theory puts them.

use braidwise::interaction::{Extent, Interaction, Surroundings};
use braidwise::layout::Layout;
use braidwise::mesh::{Anchor, Density, Mesh};
use braidwise::outcome::cut::{CutOutcome, OverLength};
use braidwise::ports::PortModel;
use braidwise::station::{Document, Embedded, Station};
use braidwise::study::cut::{Lengths, Method, Question, cut};
use braidwise::study::{Options, predict};

fn station(text: &str) -> Station {
    Document::parse(text, "test").and_then(|d| d.station(&Embedded)).unwrap()
}

fn model(name: &str) -> String {
    std::fs::read_to_string(format!("{}/models/{name}.toml", env!("CARGO_MANIFEST_DIR"))).unwrap()
}

fn question(conductor: &str, lengths_m: Vec<f64>) -> Question {
    Question {
        first: Lengths { conductor: conductor.into(), lengths_m },
        second: None,
        stock: Vec::new(),
        method: Method::Shared,
        density: Density::default(),
        trim: true,
    }
}

fn steps(from: f64, to: f64, step: f64) -> Vec<f64> {
    (0..=((to - from) / step + 1e-9) as usize).map(|n| from + step * n as f64).collect()
}

fn scan(text: &str, question: &Question) -> CutOutcome {
    cut(&[("nominal".into(), station(text))], question).unwrap()
}

/// Largest difference of two scans, relative to the largest value of each quantity along the scan. Potentials at a point hang on the
/// highest moments, which the shared scan integrates better than the full matrix: they count a tenth.
fn difference(a: &CutOutcome, b: &CutOutcome) -> f64 {
    let numbers = |c: &CutOutcome| -> Vec<Vec<f64>> {
        let plain = |v: &OverLength<f64>| match v {
            OverLength::One(v) => v.iter().flatten().flatten().copied().collect::<Vec<f64>>(),
            OverLength::Two(v) => v.iter().flatten().flatten().flatten().copied().collect(),
        };
        let volts = |v: &OverLength<Option<f64>>| match v {
            OverLength::One(v) => v.iter().flatten().flatten().map(|x| x.unwrap_or(0.0)).collect::<Vec<f64>>(),
            OverLength::Two(v) => v.iter().flatten().flatten().flatten().map(|x| x.unwrap_or(0.0)).collect(),
        };
        vec![
            plain(&c.swr),
            plain(&c.entry_current_a),
            plain(&c.last_metre_current_a),
            plain(&c.radiated_fraction),
            volts(&c.entry_voltage_v),
            volts(&c.end_voltage_v),
        ]
    };
    let mut worst = 0.0_f64;
    for (n, (x, y)) in numbers(a).iter().zip(&numbers(b)).enumerate() {
        assert_eq!(x.len(), y.len());
        let scale = x.iter().fold(1e-12_f64, |m, v| m.max(v.abs()));
        let off = x.iter().zip(y).map(|(p, q)| (p - q).abs() / scale).fold(0.0, f64::max);
        worst = worst.max(if n < 4 { off } else { 0.1 * off });
    }
    worst
}

/// Small reproducible random numbers (a linear congruential generator, Knuth's constants, from memory).
struct Dice(u64);

impl Dice {
    fn roll(&mut self, from: f64, to: f64) -> f64 {
        self.0 = self.0.wrapping_mul(6_364_136_223_846_793_005).wrapping_add(1_442_695_040_888_963_407);
        from + (to - from) * ((self.0 >> 11) as f64 / (1_u64 << 53) as f64)
    }
}

fn random_station(dice: &mut Dice, kind: usize) -> String {
    let earth =
        ["kind = \"none\"", "kind = \"perfect\"", "kind = \"soil\"\npermittivity = 13\nconductivity = \"5 mS/m\""]
            [kind % 3];
    let up = dice.roll(3.0, 8.0);
    let tip = [dice.roll(-8.0, 8.0), dice.roll(8.0, 22.0), dice.roll(3.0, 12.0)];
    let low = dice.roll(0.3, 2.5);
    let entry = [dice.roll(-2.0, 2.0), dice.roll(-6.0, -3.0), low];
    let rig = [dice.roll(-4.0, 4.0), dice.roll(-26.0, -20.0), dice.roll(0.6, 2.5)];
    let choke = if dice.roll(0.0, 1.0) > 0.5 {
        "[[choke]]\nname = \"c\"\nat = 2.0\nimpedance = { resistance = \"2 kohm\", reactance = \"500 ohm\" }\n"
    } else {
        ""
    };
    let body = if dice.roll(0.0, 1.0) > 0.5 { "\"0.3 m\"" } else { "\"none\"" };
    let (counterpoise, cold) = if dice.roll(0.0, 1.0) > 0.5 {
        (
            "[[wire]]\nname = \"counterpoise\"\npath = [\"feed\", [3, 2, 2.5]]\nlength = 2\ndiameter = \"1.6 mm\"\n",
            "\"coax\", \"counterpoise\"",
        )
    } else {
        ("", "\"coax\"")
    };
    format!(
        "title = \"drawn\"\nunit = \"m\"\n[earth]\n{earth}\n[points]\nfeed = [0, 0, {up}]\nfoot = [0, -0.4, {low}]\n\
         tip = {tip:?}\nentry = {entry:?}\nrig = {rig:?}\n[[wire]]\nname = \"radiator\"\npath = [\"feed\", \"tip\"]\ndiameter = \"1.6 mm\"\n\
         jacket = {{ permittivity = 2.3, thickness = \"0.6 mm\" }}\n{counterpoise}[coax]\ncable = \"RG-58\"\n\
         path = [\"feed\", \"foot\", \"entry\", \"rig\"]\n[feed]\nat = \"feed\"\nhot = [\"radiator\"]\ncold = [{cold}]\n\
         transformer = {{ ratio = \"49:1\" }}\n{choke}[radio]\nbody = {body}\n[operation]\npower = \"100 W\"\n\
         frequencies = [\"{:.3} MHz\", \"{:.3} MHz\"]\n",
        dice.roll(3.5, 10.0),
        dice.roll(10.0, 28.0)
    )
}

#[test]
fn the_shared_scan_equals_every_length_alone() {
    let mut dice = Dice(7);
    for n in 0..20 {
        let text = random_station(&mut dice, n);
        let conductor = if n % 5 == 4 { "radiator" } else { "coax" };
        let from = if conductor == "coax" { 15.0 } else { 9.0 };
        let mut question = question(conductor, steps(from, from + 3.5, 0.5));
        let shared = scan(&text, &question);
        question.method = Method::Alone;
        let alone = scan(&text, &question);
        assert!(shared.lengths_m.len() == 8, "{text}");
        let off = difference(&shared, &alone);
        assert!(off < 1e-6, "station {n}: {off:.2e}\n{text}");
        // another mesh must show
        if n == 0 {
            question.density = Density { factor: 1.3 };
            assert!(difference(&shared, &scan(&text, &question)) > 1e-5);
        }
    }
}

#[test]
fn two_lengths_scanned_jointly_equal_each_alone() {
    let text = model("gauge-hut-counterpoise");
    let mut question = question("coax", steps(10.2, 11.4, 0.4));
    question.second = Some(Lengths { conductor: "counterpoise".into(), lengths_m: vec![1.5, 2.0] });
    let shared = scan(&text, &question);
    question.method = Method::Alone;
    let off = difference(&shared, &scan(&text, &question));
    assert!(off < 1e-6, "{off:.2e}");
    assert_eq!(shared.second_lengths_m, Some(vec![1.5, 2.0]));
}

/// The weir gallery's station with this much coax.
fn with_coax(length_m: f64) -> Layout {
    let mut built = station(&model("weir-gallery-40"));
    built.coax.as_mut().unwrap().length_m = Some(length_m.into());
    Layout::place(&built).unwrap()
}

fn anchored(layout: &Layout) -> Mesh {
    let shield = layout.coax.as_ref().unwrap().conductor;
    Mesh::anchored(layout, 29.7e6, Density::default(), &Anchor::new(layout, &[shield]))
}

#[test]
fn meshes_of_two_lengths_share_all_but_the_elements_near_the_end() {
    let (long, short) = (with_coax(30.0), with_coax(29.63));
    let differing = |a: &Mesh, b: &Mesh| {
        let there = |e: &braidwise::mesh::Element| {
            b.elements.iter().any(|f| (e.start - f.start).norm() < 1e-9 && (e.end - f.end).norm() < 1e-9)
        };
        a.elements.iter().filter(|e| !there(e)).count()
    };
    let nested = differing(&anchored(&long), &anchored(&short));
    assert!(nested <= 10, "{nested}");
    let plain = |layout: &Layout| Mesh::new(layout, 29.7e6, Density::default(), &[]);
    let own = differing(&plain(&long), &plain(&short));
    assert!(own > 2 * nested, "without the anchor they must not: {own} against {nested}");
}

/// Smooth: third differences over a centimetre stay small, which a change of mesh from length to length would break.
#[test]
fn results_against_length_are_smooth() {
    let text = model("weir-gallery-40").replace("bands = [\"40\"]", "frequencies = [\"29 MHz\"]");
    let lengths = steps(9.0, 10.6, 0.01);
    let third = |y: &[f64]| {
        let scale = y.iter().fold(0.0_f64, |m, v| m.max(*v));
        y.windows(4).map(|w| (w[3] - 3.0 * w[2] + 3.0 * w[1] - w[0]).abs() / scale).fold(0.0, f64::max)
    };
    let scanned = scan(&text, &question("coax", lengths.clone()));
    let feed: Vec<f64> = (0..lengths.len()).map(|n| scanned.feed_ohm.get(0, 0, n, 0).unwrap().inv().norm()).collect();
    let current: Vec<f64> = (0..lengths.len()).map(|n| *scanned.entry_current_a.get(0, 0, n, 0).unwrap()).collect();
    // one length solved on another mesh must show as a jump
    let mut spoiled = feed.clone();
    let layout = with_coax(lengths[80]);
    let earth = Surroundings::new(29e6, layout.earth.at(29e6), &Extent::of(&layout)).unwrap();
    let interaction = Interaction::new(Mesh::new(&layout, 29e6, Density { factor: 0.7 }, &[]), true);
    spoiled[80] = PortModel::solve(&interaction, &earth).unwrap().admittance_s[(0, 0)].norm();
    assert!(third(&feed) < 1e-4 && third(&current) < 1e-4, "{:.1e} {:.1e}", third(&feed), third(&current));
    assert!(third(&spoiled) > 1e-4, "{:.1e}", third(&spoiled));
}

#[test]
fn the_present_length_reads_as_predict_does() {
    let text = model("gauge-hut");
    let mut built = station(&text);
    built.coax.as_mut().unwrap().length_m = Some(11.5.into());
    let prediction = predict(&Layout::place(&built).unwrap(), &Options::default()).unwrap();
    let shared = scan(&text, &question("coax", vec![10.5, 11.0, 11.5]));
    for (f, at) in prediction.frequencies.iter().enumerate() {
        let feed = num_complex::Complex64::new(at.feed.resistance_ohm, at.feed.reactance_ohm);
        let reflection = |z: num_complex::Complex64| (z - 2450.0) / (z + 2450.0);
        let z = *shared.feed_ohm.get(0, f, 2, 0).unwrap();
        assert!((reflection(z) - reflection(feed)).norm() < 0.02, "{} MHz: {z} {feed}", at.frequency_hz / 1e6);
        let entry = *shared.entry_current_a.get(0, f, 2, 0).unwrap();
        let shield = at.shield.as_ref().unwrap();
        assert!((entry - shield.entry_current_a).abs() < 0.03 * shield.largest_current_a);
        let fraction = *shared.radiated_fraction.get(0, f, 2, 0).unwrap();
        assert!((fraction - at.power.radiated_w / at.power.input_w).abs() < 0.02);
    }
}

/// Common practice: 115 to 135 ft for 80 m and 60 to 68 ft for 40 m, shorter for the top of the band.
#[test]
fn the_best_cut_of_an_end_fed_half_wave_is_where_practice_has_it() {
    let foot = 0.3048;
    for (name, range, practice) in [
        ("weir-gallery-80", steps(30.0, 45.0, 0.5), [115.0 * foot, 135.0 * foot]),
        ("weir-gallery-40", steps(16.0, 24.0, 0.25), [60.0 * foot, 68.0 * foot]),
    ] {
        let found = scan(&model(name), &question("radiator", range));
        let best = found.picks[0].length_m;
        assert!((practice[0]..=practice[1]).contains(&best), "{name}: {best} m");
        let rule = &found.trim[0];
        assert!(rule.hz_per_m < 0.0, "a shorter wire is higher");
        // a half wave: df/dl is about -f/l
        let whole = rule.hz_per_m * best / rule.frequency_hz;
        assert!((-1.15..-0.75).contains(&whole), "{name}: {whole}");
    }
}

/// Common practice: an open shield is worst near half-wave multiples of its outside, a bonded one near odd quarter waves; with the
/// coax as the only return the match hardly moves between 10 and 50 ft of open coax.
#[test]
fn open_coax_is_worst_near_half_waves_and_bonded_coax_near_odd_quarters() {
    let open = model("weir-gallery-40").replace("bands = [\"40\"]", "frequencies = [\"7.1 MHz\"]");
    let low = open.replace("8.6]", "1.0]").replace(", 9]", ", 1.4]");
    let bonded = format!("{low}\n[[rod]]\nat = \"far\"\nlength = 1.5\ndiameter = \"14 mm\"\n");
    let quarter = 299.792_458 / 7.1 / 4.0;
    let found = |text: &str| scan(text, &question("coax", steps(4.0, 64.0, 0.5)));
    let peaks = |found: &CutOutcome, quantity: &str| -> Vec<f64> {
        found.lengths_to_avoid.iter().filter(|a| a.quantity == quantity).map(|a| a.length_m / quarter).collect()
    };
    let near = |peaks: &[f64], quarters: &[f64]| {
        peaks.len() == quarters.len() && peaks.iter().zip(quarters).all(|(p, q)| (p / q - 1.0).abs() < 0.08)
    };
    let high = found(&open);
    let swr = peaks(&high, "swr");
    assert!((swr[0] / 2.0 - 1.0).abs() < 0.08, "the match breaks at the half wave: {swr:?}");
    assert!(near(&peaks(&high, "end_voltage_v"), &[2.0, 4.0, 6.0]), "{:?}", peaks(&high, "end_voltage_v"));
    let steady: Vec<f64> = (0..21).map(|n| *high.swr.get(0, 0, n, 0).unwrap()).collect();
    assert!(steady.iter().all(|s| (1.6..1.9).contains(s)), "4 to 14 m: {steady:?}");
    let earthed = peaks(&found(&bonded), "end_voltage_v");
    assert!(near(&earthed, &[1.0, 3.0, 5.0]), "{earthed:?}");
    assert!(!near(&earthed, &[2.0, 4.0, 6.0]));
}
