//! Made-up results for tests of tables and pictures: standing waves on a plausible Sallowford station, not solved.

#![allow(clippy::unwrap_used)]

use crate::layout::{BandEdge, Warning};
use crate::outcome::*;
use num_complex::Complex64;
use std::f64::consts::PI;

type Route<'a> = &'a [[f64; 3]];

const WIRE: [[f64; 3]; 3] = [[0.0, 0.0, 3.0], [3.4, 9.4, 9.5], [6.2, 17.0, 8.6]];
const COAX: [[f64; 3]; 5] =
    [[0.0, 0.0, 3.0], [0.0, 0.0, 0.03], [-5.6, -1.2, 0.03], [-6.6, -1.4, 0.6], [-8.6, -1.9, 0.9]];
const TAIL: [[f64; 3]; 2] = [[0.0, 0.0, 3.0], [1.9, -0.6, 2.6]];
const LEAD: [[f64; 3]; 3] = [[-6.6, -1.4, 0.6], [-6.6, -1.4, 0.0], [-6.6, -1.4, -1.5]];

/// Current and potential at (distance, whole length) for a frequency.
type Wave<'a> = &'a dyn Fn(f64, f64) -> (Complex64, f64);

fn conductor(name: &str, route: Route, joins: &[f64], wave: Wave) -> ConductorOutcome {
    let legs: Vec<f64> =
        route.windows(2).map(|p| (0..3).map(|i| (p[1][i] - p[0][i]).powi(2)).sum::<f64>().sqrt()).collect();
    let whole: f64 = legs.iter().sum();
    let mut points = Vec::new();
    let mut start = 0.0;
    for (leg, pair) in legs.iter().zip(route.windows(2)) {
        let steps = (leg / 0.1).ceil().max(1.0) as usize;
        for step in usize::from(start > 0.0)..=steps {
            let part = step as f64 / steps as f64;
            let distance_m = start + part * leg;
            let position_m = std::array::from_fn(|i| pair[0][i] + part * (pair[1][i] - pair[0][i]));
            let (current_a, volts) = wave(distance_m, whole);
            let voltage_v = (position_m[2] >= 0.0).then_some(volts);
            let sides: &[Option<Side>] = if joins.iter().any(|j| (j - distance_m).abs() < 1e-6) {
                &[Some(Side::Before), Some(Side::After)]
            } else {
                &[None]
            };
            for side in sides {
                let current_a = if *side == Some(Side::After) { current_a * 0.4 } else { current_a };
                points.push(PointOutcome { distance_m, side: *side, position_m, current_a, voltage_v });
            }
        }
        start += leg;
    }
    ConductorOutcome { name: name.into(), points }
}

fn frequency(frequency_hz: f64, band: &str, edge: BandEdge, wetness: f64) -> FrequencyOutcome {
    let k = 2.0 * PI * frequency_hz / 299_792_458.0;
    let drive = 0.55 / (1.0 + 0.2 * (frequency_hz / 7e6));
    let wire = |s: f64, l: f64| {
        let i = Complex64::new((k * (l - s)).sin() * 1.6 * drive, 0.1 * drive * (k * s).cos());
        (i, 620.0 * drive * (k * (l - s)).cos().abs() + 30.0)
    };
    let coax = |s: f64, l: f64| {
        let kc = 1.06 * k;
        let i = Complex64::new((kc * (l - s + 0.35)).sin() * drive * wetness, 0.05 * drive * (kc * s).cos());
        (-i, 380.0 * drive * (kc * (l - s + 0.35)).cos().abs() + 12.0)
    };
    let tail = |s: f64, l: f64| (Complex64::new(0.3 * drive * (k * (l - s)).sin(), 0.0), 420.0 * drive);
    let lead = |s: f64, l: f64| (Complex64::new(0.12 * drive * (1.0 - 0.6 * s / l), 0.02), 18.0 * (1.0 - s / l));
    let entry = 8.0 - 0.16;
    let conductors = vec![
        conductor("radiator", &WIRE, &[], &wire),
        conductor("counterpoise", &TAIL, &[], &tail),
        conductor("coax", &COAX, &[], &coax),
        conductor("entry rod", &LEAD, &[], &lead),
        conductor("radio", &[[-8.6, -1.9, 0.9], [-8.6, -1.9, 1.2]], &[], &|_, _| {
            (Complex64::new(0.004, 0.0), 210.0 * drive)
        }),
    ];
    let shield = &conductors[2];
    let largest = shield.points.iter().max_by(|a, b| a.current_a.norm().total_cmp(&b.current_a.norm())).unwrap();
    let highest = shield.points.iter().max_by(|a, b| a.voltage_v.unwrap().total_cmp(&b.voltage_v.unwrap())).unwrap();
    let end = shield.points.last().unwrap();
    let at_entry = shield.points.iter().find(|p| p.distance_m >= entry).unwrap();
    let radiated_w = 100.0 * (0.22 + 0.25 * (k * 9.0).sin().powi(2));
    FrequencyOutcome {
        frequency_hz,
        band: Some(band.into()),
        edge: Some(edge),
        earth: Some(SoilOutcome { permittivity: 21.0, conductivity_s_per_m: 0.011 }),
        feed: FeedOutcome {
            resistance_ohm: 2450.0 * (1.0 + 0.3 * (k * 20.0).cos()),
            reactance_ohm: 900.0 * (k * 20.0).sin(),
            voltage_v: Complex64::new(480.0, 0.0),
            current_a: Complex64::new(0.19, -0.04),
        },
        radio: RadioOutcome {
            resistance_ohm: 43.0,
            reactance_ohm: 21.0 * (k * 20.0).sin(),
            swr: 1.25 + 0.9 * (k * 31.0).sin().powi(2),
        },
        shield: Some(ShieldOutcome {
            entry_at_m: entry,
            entry_current_a: at_entry.current_a.norm(),
            entry_voltage_v: at_entry.voltage_v,
            end: ShieldEnd::Body,
            end_current_a: end.current_a.norm(),
            end_voltage_v: end.voltage_v,
            last_metre_current_a: 1.4 * end.current_a.norm(),
            largest_current_a: largest.current_a.norm(),
            largest_at_m: largest.distance_m,
            largest_voltage_v: highest.voltage_v,
            largest_voltage_at_m: Some(highest.distance_m),
        }),
        joints: vec![JointOutcome {
            at_m: entry,
            on: "coax".into(),
            conductor: "entry rod".into(),
            current_a: 0.061,
            voltage_v: Some(18.0),
        }],
        conductors,
        power: PowerOutcome {
            input_w: 100.0,
            radiated_w,
            earth_w: 84.0 - radiated_w,
            metal_w: 3.1,
            line_w: 2.4,
            transformer_w: 0.0,
            chokes: vec![PartOutcome {
                name: "entry choke".into(),
                on: "coax".into(),
                at_m: 5.5,
                dissipated_w: 10.4,
                current_a: 0.046,
                voltage_v: 228.0,
            }],
            inline: vec![],
            unaccounted_w: Some(0.1),
        },
        discretisation: DiscretisationOutcome { resistance_ohm: 12.0, reactance_ohm: 9.4 },
    }
}

fn frequencies(wetness: f64) -> Vec<FrequencyOutcome> {
    let bands = [
        ("80 m", [3.5e6, 3.65e6, 3.8e6]),
        ("40 m", [7.0e6, 7.1e6, 7.2e6]),
        ("20 m", [14.0e6, 14.175e6, 14.35e6]),
        ("15 m", [21.0e6, 21.225e6, 21.45e6]),
        ("10 m", [28.0e6, 28.85e6, 29.7e6]),
    ];
    let edges = [BandEdge::Low, BandEdge::Middle, BandEdge::High];
    let all = bands
        .iter()
        .flat_map(|(band, hertz)| hertz.iter().zip(edges).map(move |(f, edge)| frequency(*f, band, edge, wetness)));
    all.collect()
}

/// A station over soil with counterpoise, choke, entry rod and radio, on five bands with one variant.
pub(crate) fn prediction() -> Prediction {
    Prediction {
        braidwise: "0.0.0".into(),
        station: "Sallowford gauge 3, end-fed half wave over the wet meadow".into(),
        earth: EarthOutcome { kind: "soil".into(), permittivity: Some(21.0), conductivity_s_per_m: Some(0.011) },
        gap_m: 0.0032,
        unknowns: 143,
        warnings: vec![Warning {
            about: "coax".into(),
            message: "the jacket lies on the surface and counts as air, so the shield is a few percent too short electrically".into(),
        }],
        frequencies: frequencies(1.0),
        variants: vec![VariantOutcome { name: "wet".into(), frequencies: frequencies(1.3) }],
        patterns: Vec::new(),
    }
}

/// A run from 3 to 30 MHz in even steps.
pub(crate) fn curve() -> curve::CurveOutcome {
    let point = |index: i32| {
        let frequency_hz = 3e6 + 5e4 * f64::from(index);
        let k = 2.0 * PI * frequency_hz / 299_792_458.0;
        let line = Complex64::new(0.05, k * 20.4).tanh();
        let feed_ohm = 420.0 * (1.0 + 0.03 / line) / (line + 0.08) + Complex64::new(20.0, 0.0);
        let radio_ohm = feed_ohm / 49.0 + Complex64::new(0.4, 3.0);
        let reflection = ((radio_ohm - 50.0) / (radio_ohm + 50.0)).norm();
        curve::CurvePoint { frequency_hz, feed_ohm, radio_ohm, swr: (1.0 + reflection) / (1.0 - reflection) }
    };
    let mut curve = curve::CurveOutcome::of(&prediction(), 50.0, Some(2.0));
    curve.points = (0..=540).map(point).collect();
    curve
}

/// Two elevation cuts and two azimuth cuts with lobes and a null.
pub(crate) fn pattern() -> pattern::PatternOutcome {
    let gain = |elevation: f64, bearing: f64| {
        let (e, b) = (elevation.to_radians(), (bearing - 20.0).to_radians());
        let power = e.sin().powi(2) * (1.2 - 0.9 * (e.cos() * b.cos()).powi(2)) * (1.0 + 0.6 * (3.0 * e).sin()) + 1e-4;
        (elevation > 0.0 && elevation < 180.0).then(|| 10.0 * power.log10() + 2.3)
    };
    let elevations: Vec<f64> = (0..=180).map(f64::from).collect();
    let bearings: Vec<f64> = (0..=180).map(|b| 2.0 * f64::from(b)).collect();
    let up = |bearing_deg: f64| pattern::ElevationCut {
        bearing_deg,
        elevation_deg: elevations.clone(),
        gain_dbi: elevations.iter().map(|e| gain(*e, bearing_deg)).collect(),
    };
    let around = |elevation_deg: f64| pattern::AzimuthCut {
        elevation_deg,
        bearing_deg: bearings.clone(),
        gain_dbi: bearings.iter().map(|b| gain(elevation_deg, *b)).collect(),
    };
    pattern::PatternOutcome {
        station: prediction().station,
        frequency_hz: 14.175e6,
        elevation_cuts: vec![up(20.0), up(110.0)],
        azimuth_cuts: vec![around(15.0), around(30.0), around(60.0)],
    }
}
