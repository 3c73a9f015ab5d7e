//! Made-up results of the placement and length studies for tests: plausible shapes, not solved.

use crate::layout::Warning;
use crate::outcome::cut::*;
use crate::outcome::joint::{LengthPick, LengthsOutcome, LengthsWithoutOutcome, OverLengthAndPlace};
use crate::outcome::place::*;
use num_complex::Complex64;
use std::f64::consts::PI;

const HERTZ: [f64; 13] =
    [3.5e6, 3.65e6, 3.8e6, 7.0e6, 7.1e6, 7.2e6, 10.125e6, 14.0e6, 14.175e6, 14.35e6, 28.0e6, 28.85e6, 29.7e6];
const BANDS: [&str; 13] =
    ["80 m", "80 m", "80 m", "40 m", "40 m", "40 m", "30 m", "20 m", "20 m", "20 m", "10 m", "10 m", "10 m"];
const LENGTH_M: f64 = 12.0;
const ENTRY_M: f64 = 7.8;

fn wavenumber(hz: f64) -> f64 {
    2.0 * PI * 1.06 * hz / 299_792_458.0
}

/// Entry current with a choke of some ohms at a place: small where the choke sits in a current maximum.
fn entry_current(variant: usize, ohm: f64, hz: f64, place_m: f64, length_m: f64) -> f64 {
    let k = wavenumber(hz);
    let bare = 0.24 * (0.15 + (k * (length_m - ENTRY_M + 0.6)).sin().abs());
    let path = 260.0 * (0.3 + (k * (length_m - place_m)).cos().powi(2) * 6.0);
    let moved = if place_m > ENTRY_M { 1.35 } else { 1.0 };
    bare * moved * (1.0 + 0.25 * variant as f64) * path / (path + ohm)
}

fn swr(variant: usize, ohm: f64, hz: f64, place_m: f64) -> f64 {
    1.3 + 0.1 * variant as f64 + ohm / 2500.0 * (-place_m / 2.2).exp() + 0.25 * (wavenumber(hz) * place_m).sin().powi(2)
}

fn heat(variant: usize, ohm: f64, hz: f64, place_m: f64) -> f64 {
    let k = wavenumber(hz);
    let path = 500.0 + 1800.0 * (k * (LENGTH_M - place_m)).cos().powi(2);
    52.0 * (1.0 + 0.1 * variant as f64) * 4.0 * ohm * path / (ohm + path).powi(2) * (0.1 + 0.9 * (-place_m / 4.0).exp())
}

/// Three candidates, two variants, five bands.
pub(crate) fn place() -> PlaceOutcome {
    let ohms = [1000.0, 2000.0, 5000.0];
    let places_m: Vec<f64> = (0..=600).map(|i| 0.02 * f64::from(i)).collect();
    let over = |value: &dyn Fn(usize, f64, f64, f64) -> f64| -> OverPlace<f64> {
        let places = |v: usize, ohm: f64, hz: f64| places_m.iter().map(|p| value(v, ohm, hz, *p)).collect::<Vec<_>>();
        let frequencies = |v: usize, ohm: f64| HERTZ.iter().map(|hz| places(v, ohm, *hz)).collect::<Vec<_>>();
        (0..2).map(|v| ohms.iter().map(|ohm| frequencies(v, *ohm)).collect()).collect()
    };
    let maybe = |values: OverPlace<f64>| -> OverPlace<Option<f64>> {
        let inner = |a: Vec<Vec<Vec<f64>>>| {
            a.into_iter().map(|b| b.into_iter().map(|c| c.into_iter().map(Some).collect()).collect()).collect()
        };
        values.into_iter().map(inner).collect()
    };
    let bare = |value: &dyn Fn(usize, f64) -> f64| -> OverFrequency<f64> {
        (0..2).map(|v| HERTZ.iter().map(|hz| value(v, *hz)).collect()).collect()
    };
    let feed = |v: usize, ohm: f64, hz: f64, p: f64| {
        Complex64::new(2450.0 + 0.3 * ohm * (-p).exp(), 300.0 * (wavenumber(hz) * 20.0).sin() + v as f64)
    };
    let feeds = |v: usize, ohm: f64, hz: f64| places_m.iter().map(|p| feed(v, ohm, hz, *p)).collect::<Vec<_>>();
    let current = |v: usize, ohm: f64, hz: f64, p: f64| entry_current(v, ohm, hz, p, LENGTH_M);
    let pick = |choke: &str, at_m: f64, window_m: [f64; 2], value: f64| PlacePick {
        choke: choke.into(),
        at_m,
        window_m,
        worst: WorstCase {
            frequency_hz: 7.0e6,
            variant: "wet".into(),
            quantity: "entry_current_a".into(),
            value,
            limit: 0.1,
        },
        why: "within limits on all five bands, wet or dry".into(),
    };
    PlaceOutcome {
        braidwise: "0.0.0".into(),
        station: "Sallowford gauge 3, end-fed half wave over the wet meadow".into(),
        power_w: 100.0,
        limits: LimitsOutcome { entry_current_a: 0.1, swr: 2.0 },
        entry_at_m: ENTRY_M,
        coax_length_m: LENGTH_M,
        joins_m: vec![2.97, ENTRY_M],
        reachable_m: vec![],
        variants: vec!["nominal".into(), "wet".into()],
        chokes: ["1 kohm", "2 kohm", "5 kohm"]
            .iter()
            .zip(ohms)
            .map(|(name, ohm)| CandidateOutcome {
                name: (*name).into(),
                impedance_ohm: vec![Complex64::new(ohm, 0.0); HERTZ.len()],
            })
            .collect(),
        frequencies_hz: HERTZ.to_vec(),
        bands: BANDS.iter().map(|b| Some((*b).to_string())).collect(),
        places_m: places_m.clone(),
        without: WithoutOutcome {
            entry_current_a: bare(&|v, hz| current(v, 0.0, hz, 0.0)),
            entry_voltage_v: (0..2).map(|_| vec![Some(80.0); HERTZ.len()]).collect(),
            end_voltage_v: (0..2).map(|_| vec![Some(140.0); HERTZ.len()]).collect(),
            last_metre_current_a: bare(&|v, hz| 0.4 * current(v, 0.0, hz, 0.0)),
            feed_ohm: (0..2).map(|v| HERTZ.iter().map(|hz| feed(v, 0.0, *hz, 0.0)).collect()).collect(),
            swr: bare(&|v, hz| swr(v, 0.0, hz, 0.0)),
        },
        entry_current_a: over(&current),
        entry_voltage_v: maybe(over(&|v, ohm, hz, p| 300.0 * current(v, ohm, hz, p))),
        end_voltage_v: maybe(over(&|v, ohm, hz, p| 800.0 * current(v, ohm, hz, p) + 4.0)),
        last_metre_current_a: over(&|v, ohm, hz, p| 0.4 * current(v, ohm, hz, p)),
        feed_ohm: (0..2)
            .map(|v| ohms.iter().map(|ohm| HERTZ.iter().map(|hz| feeds(v, *ohm, *hz)).collect()).collect())
            .collect(),
        swr: over(&swr),
        choke_w: over(&heat),
        choke_v: over(&|v, ohm, hz, p| (heat(v, ohm, hz, p) * ohm).sqrt()),
        choke_a: over(&|v, ohm, hz, p| (heat(v, ohm, hz, p) / ohm).sqrt()),
        verdict: PlaceVerdict::Place,
        why: "a 5 kohm choke at 5.4 to 6.1 m keeps the entry below 100 mA on all five bands, wet or dry".into(),
        picks: vec![pick("5 kohm", 5.7, [5.4, 6.1], 0.082), pick("2 kohm", 6.4, [6.3, 6.5], 0.097)],
        clamp: vec![
            ClampOutcome { frequency_hz: 3.65e6, at_m: 4.0, current_a: 0.21, range_a: [0.19, 0.26] },
            ClampOutcome { frequency_hz: 7.1e6, at_m: 3.0, current_a: 0.31, range_a: [0.28, 0.36] },
        ],
        warnings: vec![Warning { about: "coax".into(), message: "lies on the surface".into() }],
        lengths: None,
    }
}

/// Lengths of the coax from 5 to 25 m.
pub(crate) fn cut() -> CutOutcome {
    let lengths_m: Vec<f64> = (0..=80).map(|i| 5.0 + 0.25 * f64::from(i)).collect();
    let over = |value: &dyn Fn(usize, f64, f64) -> f64| -> OverLength<f64> {
        let row = |v: usize, hz: f64| lengths_m.iter().map(|l| value(v, hz, *l)).collect::<Vec<_>>();
        OverLength::One((0..2).map(|v| HERTZ.iter().map(|hz| row(v, *hz)).collect()).collect())
    };
    let near = |v: usize, hz: f64, l: f64| 1.0 / (0.08 + (wavenumber(hz) * (l + 0.2 * v as f64)).sin().abs());
    let maybe = |scale: f64| {
        let row = |v: usize, hz: f64| lengths_m.iter().map(|l| Some(scale * near(v, hz, *l))).collect::<Vec<_>>();
        OverLength::One((0..2).map(|v| HERTZ.iter().map(|hz| row(v, *hz)).collect()).collect())
    };
    let feed = |v: usize, hz: f64| {
        lengths_m
            .iter()
            .map(|l| {
                Complex64::new(
                    2450.0 - 90.0 * near(v, hz, *l),
                    400.0 * (2.0 * wavenumber(hz) * l).sin() * near(v, hz, *l) / 6.0,
                )
            })
            .collect::<Vec<_>>()
    };
    let worst = |value: f64| WorstCase {
        frequency_hz: 14.0e6,
        variant: "wet".into(),
        quantity: "swr".into(),
        value,
        limit: 2.0,
    };
    let avoid = |frequency_hz: f64, length_m: f64| LengthToAvoid {
        frequency_hz,
        variant: "nominal".into(),
        length_m,
        quantity: "entry_current_a".into(),
        value: 0.41,
    };
    let shape = place();
    CutOutcome {
        braidwise: shape.braidwise,
        station: shape.station,
        power_w: 100.0,
        limits: shape.limits,
        variants: shape.variants,
        frequencies_hz: shape.frequencies_hz,
        bands: shape.bands,
        conductor: "coax".into(),
        moving_end: "the radio's end of the coax".into(),
        present_length_m: 12.0,
        second_conductor: None,
        second_lengths_m: None,
        entry_current_a: over(&|v, hz, l| 0.035 * near(v, hz, l)),
        entry_voltage_v: maybe(11.0),
        end_voltage_v: maybe(24.0),
        last_metre_current_a: over(&|v, hz, l| 0.012 * near(v, hz, l)),
        feed_ohm: OverLength::One((0..2).map(|v| HERTZ.iter().map(|hz| feed(v, *hz)).collect()).collect()),
        swr: over(&|v, hz, l| 1.2 + 0.12 * near(v, hz, l)),
        radiated_fraction: over(&|v, hz, l| 0.52 - 0.02 * near(v, hz, l)),
        lengths_to_avoid: vec![avoid(7.1e6, 19.7), avoid(14.175e6, 9.9), avoid(14.175e6, 19.9), avoid(28.85e6, 14.7)],
        verdict: CutVerdict::Cut,
        why: "between 10.9 and 13.1 m every band keeps SWR 2 and 100 mA at the entry, wet or dry".into(),
        picks: vec![
            CutPick {
                length_m: 12.25,
                second_length_m: None,
                window_m: [10.9, 13.1],
                worst: worst(1.82),
                why: "furthest from every resonance".into(),
            },
            CutPick {
                length_m: 16.5,
                second_length_m: None,
                window_m: [16.2, 16.9],
                worst: worst(1.96),
                why: "narrower".into(),
            },
        ],
        stock: vec![
            StockOutcome { name: "33 ft".into(), length_m: 10.06, within_limits: false, worst: worst(2.6) },
            StockOutcome { name: "50 ft".into(), length_m: 15.24, within_limits: true, worst: worst(1.9) },
        ],
        trim: vec![TrimOutcome { frequency_hz: 7.06e6, hz_per_m: -310e3 }],
        warnings: vec![],
        lengths_m,
    }
}

/// A scan of two lengths: the coax and the counterpoise.
pub(crate) fn cut_two() -> CutOutcome {
    let one = cut();
    let seconds: Vec<f64> = (0..=20).map(|i| 1.0 + 0.2 * f64::from(i)).collect();
    let spread = |values: &OverLength<f64>, offset: f64| {
        let at = |v: usize, f: usize, l: usize, s: f64| {
            values.get(v, f, l, 0).copied().unwrap_or(offset) * (0.6 + 0.3 * (s - 2.4).abs())
        };
        let row =
            |v: usize, f: usize, l: usize| seconds.iter().map(|s| at(v, f, l, *s).max(offset)).collect::<Vec<_>>();
        let plane = |v: usize, f: usize| (0..one.lengths_m.len()).map(|l| row(v, f, l)).collect::<Vec<_>>();
        OverLength::Two((0..2).map(|v| (0..HERTZ.len()).map(|f| plane(v, f)).collect()).collect())
    };
    let mut picks = one.picks.clone();
    picks.iter_mut().for_each(|p| p.second_length_m = Some(2.4));
    CutOutcome {
        entry_current_a: spread(&one.entry_current_a, 0.001),
        swr: spread(&one.swr, 1.0),
        second_conductor: Some("counterpoise".into()),
        second_lengths_m: Some(seconds.clone()),
        picks,
        ..one
    }
}

/// A placement with the length of the coax free too.
pub(crate) fn joint() -> PlaceOutcome {
    let ohms = [1000.0, 2000.0, 5000.0];
    let lengths_m: Vec<f64> = (0..=40).map(|i| 9.0 + 0.4 * f64::from(i)).collect();
    let places_m: Vec<f64> = (0..=125).map(|i| 0.2 * f64::from(i)).collect();
    let over = |value: &dyn Fn(f64, f64, f64, f64) -> f64| -> OverLengthAndPlace {
        let row = |ohm: f64, hz: f64, l: f64| {
            places_m.iter().map(|p| (*p <= l).then(|| value(ohm, hz, l, *p))).collect::<Vec<_>>()
        };
        let plane = |ohm: f64, hz: f64| lengths_m.iter().map(|l| row(ohm, hz, *l)).collect::<Vec<_>>();
        ohms.iter().map(|ohm| HERTZ.iter().map(|hz| plane(*ohm, *hz)).collect()).collect()
    };
    let current = |ohm: f64, hz: f64, l: f64, p: f64| entry_current(1, ohm, hz, p, l);
    let ratio = |ohm: f64, hz: f64, l: f64, p: f64| swr(1, ohm, hz, p) + 0.4 * (wavenumber(hz) * l).cos().powi(8);
    let without = vec![vec![Some(0.2); lengths_m.len()]; HERTZ.len()];
    let plain = place();
    let pick = |choke: &str, length_m: f64, at_m: f64| LengthPick {
        choke: choke.into(),
        length_m,
        length_window_m: [length_m - 0.6, length_m + 0.4],
        at_m,
        window_m: [at_m - 0.3, at_m + 0.2],
        worst: plain.picks[0].worst.clone(),
        why: "within limits on all five bands, wet or dry".into(),
    };
    let lengths = LengthsOutcome {
        moving_end: "the radio's end of the coax".into(),
        present_length_m: 12.0,
        chokes: plain.chokes.iter().map(|c| c.name.clone()).collect(),
        without: LengthsWithoutOutcome {
            entry_current_a: without.clone(),
            last_metre_current_a: without.clone(),
            end_voltage_v: without.clone(),
            swr: without,
        },
        end_voltage_limit_v: vec![140.0; lengths_m.len()],
        entry_current_a: over(&current),
        last_metre_current_a: over(&|ohm, hz, l, p| 0.4 * current(ohm, hz, l, p)),
        end_voltage_v: over(&|ohm, hz, l, p| 800.0 * current(ohm, hz, l, p)),
        swr: over(&ratio),
        choke_w: over(&|ohm, hz, _, p| heat(1, ohm, hz, p)),
        none_needed_at_m: vec![],
        verdict: PlaceVerdict::Place,
        why: "with 11.40 m of coax and the choke at 5.70 m: within limits on all five bands, wet or dry".into(),
        picks: vec![pick("5 kohm", 11.4, 5.7), pick("2 kohm", 15.2, 7.4), pick("5 kohm", 20.2, 9.0)],
        warnings: vec![Warning { about: "coax".into(), message: "the range begins at 9 m instead of 5 m".into() }],
        lengths_m,
        places_m,
    };
    PlaceOutcome { lengths: Some(lengths), ..plain }
}
