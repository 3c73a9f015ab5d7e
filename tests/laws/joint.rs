//! Length of the coax and place of a choke together: each length is what `place` says of a station with that length in its file.

use braidwise::layout::Layout;
use braidwise::outcome::joint::LengthsOutcome;
use braidwise::outcome::place::{OverPlace, PlaceOutcome, PlaceVerdict};
use braidwise::station::{Document, Embedded, Station};
use braidwise::study::{Candidate, Failure, PlaceFailure, PlaceOptions, Unwatched, Watch, place, place_over_lengths};
use std::sync::atomic::{AtomicUsize, Ordering};

const STATION: &str = r#"
title = "Sallowford, a coax that may be shorter"
[earth]
EARTH
[points]
feed = [0, 0, 3]
tip = [0, 15, 6]
foot = [0, 0, 0.1]
entry = [1.2, -3.3, 0.1]
rig = [1.2, -7.4, 0.9]
[[wire]]
name = "radiator"
path = ["feed", "tip"]
diameter = "1.6 mm"
[[wire]]
name = "lead"
path = ["entry", [1.6, -3.3, 0.6]]
diameter = "2 mm"
[coax]
cable = "RG-58"
path = ["feed", "foot", "entry", "rig"]
entry = "entry"
LENGTH
[feed]
at = "feed"
hot = ["radiator"]
cold = ["coax"]
transformer = { ratio = "49:1" }
[operation]
power = "100 W"
frequencies = ["14.2 MHz", "21.1 MHz"]
[[variant]]
name = "lifted"
set = { "points.foot.up" = 0.3 }
"#;

const PERFECT: &str = "kind = \"perfect\"";
const SOIL: &str = "kind = \"soil\"\npermittivity = 13\nconductivity = \"5 mS/m\"";

fn stations(earth: &str, length: &str, more: &str) -> Vec<(String, Station)> {
    let text = STATION.replace("EARTH", earth).replace("LENGTH", length) + more;
    let document = Document::parse(&text, "drawn").unwrap_or_else(|e| panic!("{}", e.show(false)));
    document.stations(&Embedded).unwrap_or_else(|e| panic!("{}", e.show(false)))
}

fn options() -> PlaceOptions {
    let candidates = vec![Candidate::resistance(1e3), Candidate::resistance(5e3)];
    PlaceOptions { candidates, step_m: 0.1, ..PlaceOptions::default() }
}

/// `place` on the station with a length written in its file.
fn alone(earth: &str, length_m: f64, more: &str, options: &PlaceOptions) -> PlaceOutcome {
    let placed: Vec<(String, Layout)> = stations(earth, &format!("length = {length_m}"), more)
        .into_iter()
        .map(|(name, station)| (name, Layout::place(&station).unwrap()))
        .collect();
    place(&placed[0].1, &placed[1..], options).unwrap()
}

/// Largest difference of a row from `place`, relative to the largest value of each quantity.
fn difference(joint: &LengthsOutcome, row: usize, alone: &PlaceOutcome) -> f64 {
    let volts = |of: &OverPlace<Option<f64>>| -> OverPlace<f64> {
        let inner = |v: &Vec<Vec<Vec<Option<f64>>>>| {
            v.iter().map(|c| c.iter().map(|f| f.iter().map(|p| p.unwrap()).collect()).collect()).collect()
        };
        of.iter().map(inner).collect()
    };
    let ends = volts(&alone.end_voltage_v);
    let pairs = [
        (&joint.entry_current_a, &alone.entry_current_a),
        (&joint.last_metre_current_a, &alone.last_metre_current_a),
        (&joint.swr, &alone.swr),
        (&joint.choke_w, &alone.choke_w),
        (&joint.end_voltage_v, &ends),
    ];
    let mut worst = 0.0_f64;
    for (rows, values) in pairs {
        let scale = values.iter().flatten().flatten().flatten().fold(0.0_f64, |m, v| m.max(*v));
        for (c, of_choke) in rows.iter().enumerate() {
            for (f, lengths) in of_choke.iter().enumerate() {
                for (p, place_m) in alone.places_m.iter().enumerate() {
                    let at = joint.places_m.iter().position(|x| (x - place_m).abs() < 1e-9).unwrap();
                    let most = values.iter().map(|v| v[c][f][p]).fold(0.0, f64::max);
                    worst = worst.max((lengths[row][at].unwrap() - most).abs() / scale);
                }
            }
        }
    }
    worst
}

#[test]
fn every_length_is_what_place_says_of_a_station_with_it() {
    // over soil the tables of all lengths reach further than those of one, and differ by their own error
    for (earth, most) in [(PERFECT, 1e-9), (SOIL, 2e-4)] {
        let lengths_m = [8.0, 8.75, 9.5];
        let joint = place_over_lengths(&stations(earth, "", ""), &lengths_m, &options(), &Unwatched).unwrap();
        assert_eq!(joint.lengths_m, lengths_m);
        for (row, length_m) in lengths_m.iter().enumerate() {
            let alone = alone(earth, *length_m, "", &options());
            let off = difference(&joint, row, &alone);
            assert!(off < most, "{length_m} m: {off}");
            let beyond = joint.places_m.iter().position(|p| *p > length_m + 1e-6);
            assert_eq!(beyond.map(|p| joint.swr[0][0][row][p]), beyond.map(|_| None));
            let bare = alone.without.swr.iter().map(|v| v[1]).fold(0.0, f64::max);
            assert!((joint.without.swr[1][row].unwrap() / bare - 1.0).abs() < most);
        }
        // and the check can fail: another length's row is far off
        assert!(difference(&joint, 2, &alone(earth, 8.75, "", &options())) > 0.01);
    }
}

#[test]
fn one_length_gives_the_choice_of_place() {
    for power in
        ["", "[limits]\nentry_current = \"60 mA\"\nswr = 12\n", "[limits]\nentry_current = \"9 A\"\nswr = 400\n"]
    {
        let alone = alone(PERFECT, 9.0, power, &options());
        let joint = place_over_lengths(&stations(PERFECT, "", power), &[9.0], &options(), &Unwatched).unwrap();
        assert_eq!(joint.verdict, alone.verdict);
        assert_eq!(joint.none_needed_at_m.is_empty(), alone.verdict != PlaceVerdict::NoneNeeded);
        assert_eq!(joint.picks.len(), alone.picks.len());
        for (a, b) in joint.picks.iter().zip(&alone.picks) {
            assert_eq!((&a.choke, a.at_m, a.window_m), (&b.choke, b.at_m, b.window_m));
            assert_eq!((a.length_m, a.length_window_m), (9.0, [9.0, 9.0]));
            let (x, y) = (&a.worst, &b.worst);
            assert_eq!((&x.quantity, &x.variant, x.frequency_hz), (&y.quantity, &y.variant, y.frequency_hz));
            assert!((x.value / y.value - 1.0).abs() < 1e-9);
        }
    }
}

#[test]
fn a_choke_that_goes_limits_no_length_and_one_that_stays_does() {
    let choke = |name: &str, at_m: f64| {
        format!("[[choke]]\nname = \"{name}\"\nat = {at_m}\nimpedance = {{ resistance = \"2 kohm\" }}\n")
    };
    let written = stations(PERFECT, "", &(choke("first", 8.3) + &choke("second", 2.0)));
    let lengths_m = [8.0, 8.5, 9.0];
    let plain = PlaceOptions { step_m: 0.2, ..PlaceOptions::default() };
    let free = place_over_lengths(&written, &lengths_m, &plain, &Unwatched).unwrap();
    assert_eq!(free.chokes, ["first", "second"]);
    assert_eq!(free.lengths_m, lengths_m);
    let keep = PlaceOptions { keep: vec!["first".to_string()], ..plain };
    let kept = place_over_lengths(&written, &lengths_m, &keep, &Unwatched).unwrap();
    assert_eq!((kept.chokes.as_slice(), kept.lengths_m.as_slice()), (&["second".to_string()][..], &[8.5, 9.0][..]));
    assert!(kept.warnings.iter().any(|w| w.message.contains("\"first\" sits at 8.3 m")), "{:?}", kept.warnings);
}

/// Counts what it is told, and stops after so many steps.
struct Counts {
    announced: AtomicUsize,
    done: AtomicUsize,
    most: usize,
}

impl Watch for Counts {
    fn begins(&self, steps: usize, there: usize) {
        self.announced.fetch_add(steps - there, Ordering::SeqCst);
    }

    fn step_done(&self) {
        self.done.fetch_add(1, Ordering::SeqCst);
    }

    fn stop(&self) -> bool {
        self.done.load(Ordering::SeqCst) >= self.most
    }
}

#[test]
fn the_watcher_is_told_of_every_step_and_may_stop() {
    let written = stations(PERFECT, "", "");
    let run = |most: usize| {
        let watch = Counts { announced: AtomicUsize::new(0), done: AtomicUsize::new(0), most };
        let out = place_over_lengths(&written, &[8.5, 9.0], &options(), &watch);
        (out, watch.announced.into_inner(), watch.done.into_inner())
    };
    let (out, announced, done) = run(usize::MAX);
    assert!(out.is_ok() && announced == done && done > 0);
    let (out, _, done) = run(3);
    assert!(matches!(out, Err(PlaceFailure::Study(Failure::Stopped))) && done < announced);
}
