//! From arrays to one choice: what keeps the limits, with which window, and why.
//!
//! A place is judged by its worst over all frequencies and variants of four quantities: the current into the shack and the largest
//! current within a metre of the radio, both against `entry_current`; the standing-wave ratio against `swr`; and the voltage of
//! the shield at the radio, which a choke may not raise above the worst the station shows without it. So an open end, where the
//! current is nothing by definition, cannot pass as a quiet one.
//!
//! Which of two places is better goes by all four together: the 4-norm of their worst ratios, so that the furthest from its limit leads
//! and the others decide between likes. A standing-wave ratio that the station has without a choke too is not held against a place there: no
//! choke mends the match, and the currents must not be chosen by it.
//!
//! The default of 20 mA is what test level 2 of IEC 61000-4-6 drives through its common-mode impedance: 3 V over 150 ohm (values from
//! memory). A standing-wave ratio of 2 is common practice.

use super::words;
use crate::outcome::place::{OverFrequency, OverPlace, PlaceOutcome, PlacePick, PlaceVerdict, WorstCase};
use std::cmp::Ordering;

/// A hand may set a choke this far beside the mark, m.
const SLACK_M: f64 = 0.05;
/// Voltage at the radio below which none is held against a choke, V: the source voltage of IEC 61000-4-6 test level 2.
const LEAST_VOLTAGE_V: f64 = 3.0;
/// A choke may raise the worst voltage at the radio by this factor.
const VOLTAGE_SLACK: f64 = 1.05;
/// Heat in the choke worth naming, as a share of the power.
pub(super) const LARGE_HEAT: f64 = 0.05;
/// A standing-wave ratio this much above the one without a choke is held against a choke, whatever the limit.
const SWR_SLACK: f64 = 1.1;
/// With no place within the limits, the worst case may get worse by this factor inside the window of the least bad.
const WINDOW_WORSE: f64 = 1.1;

/// What is judged, by the names of the arrays.
pub(super) const QUANTITIES: [&str; 4] = ["entry_current_a", "last_metre_current_a", "swr", "end_voltage_v"];

/// One value against its limit.
#[derive(Debug, Clone, Copy)]
pub(super) struct Case {
    variant: usize,
    frequency: usize,
    quantity: usize,
    value: f64,
    limit: f64,
    /// What the value is held against where two places are compared.
    against: f64,
}

impl Case {
    fn ratio(&self) -> f64 {
        self.value / self.limit
    }

    pub(super) fn outcome(&self, of: &PlaceOutcome) -> WorstCase {
        WorstCase {
            frequency_hz: of.frequencies_hz[self.frequency],
            variant: of.variants[self.variant].clone(),
            quantity: QUANTITIES[self.quantity].to_string(),
            value: self.value,
            limit: self.limit,
        }
    }
}

/// How a place stands.
#[derive(Debug, Clone, Copy)]
pub(super) struct Judged {
    /// Cases beyond a limit.
    pub(super) beyond: usize,
    /// Largest share of the power that the choke turns into heat.
    pub(super) heat: f64,
    pub(super) worst: Case,
    /// Worst ratio of every quantity, as places are compared by them.
    ratios: [f64; 4],
}

impl Judged {
    fn of(cases: impl Iterator<Item = Case>) -> Option<Self> {
        let mut out: Option<Self> = None;
        for case in cases {
            let beyond = out.map_or(0, |o| o.beyond) + usize::from(case.ratio() > 1.0);
            let worst = out.map(|o| o.worst).filter(|w| w.ratio() >= case.ratio()).unwrap_or(case);
            let mut ratios = out.map_or([0.0; 4], |o| o.ratios);
            ratios[case.quantity] = f64::max(ratios[case.quantity], case.value / case.against);
            out = Some(Self { beyond, heat: 0.0, worst, ratios });
        }
        out
    }

    /// The 4-norm of the worst ratios.
    fn norm(&self) -> f64 {
        self.ratios.iter().map(|r| r.powi(4)).sum::<f64>().powf(0.25)
    }

    /// What keeps its limits comes first. Then the least of all four quantities together, the furthest beyond its limit leading, however many
    /// cases are; among what keeps them, of two alike the cooler.
    pub(super) fn better(&self, other: &Self) -> Ordering {
        let rank = |j: &Self| j.norm().max(f64::MIN_POSITIVE).ln() + if j.keeps() { j.heat } else { 0.0 };
        other.keeps().cmp(&self.keeps()).then(rank(self).total_cmp(&rank(other)))
    }

    /// All limits are kept.
    pub(super) fn keeps(&self) -> bool {
        self.beyond == 0
    }

    /// Whether another place is as good as far as a window goes.
    pub(super) fn window_takes(&self, other: &Self) -> bool {
        if self.keeps() { other.keeps() } else { other.norm() <= WINDOW_WORSE * self.norm() }
    }
}

/// Limits in the order of [`QUANTITIES`].
pub(super) fn limits(outcome: &PlaceOutcome) -> [f64; 4] {
    let highest = outcome.without.end_voltage_v.iter().flatten().flatten().fold(0.0_f64, |m, v| m.max(*v));
    let volts = (VOLTAGE_SLACK * highest).max(LEAST_VOLTAGE_V);
    [outcome.limits.entry_current_a, outcome.limits.entry_current_a, outcome.limits.swr, volts]
}

fn cases<'a>(
    outcome: &'a PlaceOutcome,
    limits: [f64; 4],
    value: impl Fn(usize, usize, usize) -> Option<f64> + 'a,
) -> impl Iterator<Item = Case> + 'a {
    let (variants, frequencies) = (outcome.variants.len(), outcome.frequencies_hz.len());
    let all = (0..variants).flat_map(move |v| (0..frequencies).flat_map(move |f| (0..4).map(move |q| (v, f, q))));
    all.filter_map(move |(variant, frequency, quantity)| {
        let value = value(variant, frequency, quantity)?;
        let limit = limits[quantity];
        let bare = if quantity == 2 { SWR_SLACK * outcome.without.swr[variant][frequency] } else { 0.0 };
        Some(Case { variant, frequency, quantity, value, limit, against: limit.max(bare) })
    })
}

/// How the station stands without a choke.
pub(super) fn judge_without(outcome: &PlaceOutcome, limits: [f64; 4]) -> Option<Judged> {
    let w = &outcome.without;
    let plain = |of: &OverFrequency<f64>, v: usize, f: usize| Some(of[v][f]);
    Judged::of(cases(outcome, limits, |v, f, q| match q {
        0 => plain(&w.entry_current_a, v, f),
        1 => plain(&w.last_metre_current_a, v, f),
        2 => plain(&w.swr, v, f),
        _ => w.end_voltage_v[v][f],
    }))
}

fn judge(outcome: &PlaceOutcome, limits: [f64; 4], choke: usize, place: usize) -> Option<Judged> {
    let plain = |of: &OverPlace<f64>, v: usize, f: usize| Some(of[v][choke][f][place]);
    let heat = hottest(outcome, choke, place).map_or(0.0, |h| h.0);
    let judged = Judged::of(cases(outcome, limits, |v, f, q| match q {
        0 => plain(&outcome.entry_current_a, v, f),
        1 => plain(&outcome.last_metre_current_a, v, f),
        2 => plain(&outcome.swr, v, f),
        _ => outcome.end_voltage_v[v][choke][f][place],
    }));
    judged.map(|j| Judged { heat, ..j })
}

/// How every place stands, `[choke][place]`.
pub(super) fn judge_all(outcome: &PlaceOutcome, limits: [f64; 4]) -> Vec<Vec<Judged>> {
    (0..outcome.chokes.len())
        .map(|c| (0..outcome.places_m.len()).filter_map(|p| judge(outcome, limits, c, p)).collect())
        .collect()
}

/// Of the places within a hand's breadth of one the worst.
pub(super) fn worst_beside(places_m: &[f64], judged: &[Judged], place: usize) -> usize {
    let near = |q: &usize| (places_m[*q] - places_m[place]).abs() <= SLACK_M + 1e-9;
    let low = (0..=place).rev().take_while(near).last().unwrap_or(place);
    let high = (place..places_m.len()).take_while(near).last().unwrap_or(place);
    (low..=high).max_by(|a, b| judged[*a].better(&judged[*b])).unwrap_or(place)
}

/// Fill in verdict, reason and picks.
pub(super) fn decide(outcome: &mut PlaceOutcome) {
    let limits = limits(outcome);
    let offered = offered(outcome);
    let judged = judge_all(outcome, limits);
    let mut found: Vec<(Judged, PlacePick)> =
        (0..outcome.chokes.len()).filter_map(|c| pick(outcome, c, &judged[c], &offered)).collect();
    let width = |p: &PlacePick| p.window_m[1] - p.window_m[0];
    found.sort_by(|a, b| a.0.better(&b.0).then(width(&b.1).total_cmp(&width(&a.1))));
    let without = judge_without(outcome, limits);
    let (verdict, why) = match (without.filter(Judged::keeps), found.first()) {
        (Some(worst), _) => (PlaceVerdict::NoneNeeded, none_needed(outcome, &worst)),
        (None, Some((best, pick))) if best.keeps() => (PlaceVerdict::Place, pick.why.clone()),
        (None, Some((best, _))) => {
            let worse = without.is_some_and(|w| w.better(best) == Ordering::Less);
            let note = if worse { "; the station without a choke is less far beyond its limits" } else { "" };
            (PlaceVerdict::NoPlace, no_place(outcome, &judged, &offered) + note)
        }
        (None, None) => {
            (PlaceVerdict::NoPlace, "no place of the coax is within the stretches that can be reached".to_string())
        }
    };
    outcome.verdict = verdict;
    outcome.why = why;
    outcome.picks = found.into_iter().map(|f| f.1).collect();
}

/// Which places a hand can reach.
pub(super) fn offered(outcome: &PlaceOutcome) -> Vec<bool> {
    let within = |x: f64| outcome.reachable_m.iter().any(|r| x >= r[0] - 1e-9 && x <= r[1] + 1e-9);
    outcome.places_m.iter().map(|x| outcome.reachable_m.is_empty() || within(*x)).collect()
}

/// The best place of a choke that also holds a hand's breadth to either side, with its window.
fn pick(outcome: &PlaceOutcome, choke: usize, judged: &[Judged], offered: &[bool]) -> Option<(Judged, PlacePick)> {
    let places = &outcome.places_m;
    let robust: Vec<Option<Judged>> =
        (0..places.len()).map(|p| offered[p].then(|| judged[worst_beside(places, judged, p)])).collect();
    let best = robust.iter().enumerate().filter_map(|(p, r)| r.map(|r| (p, r))).min_by(|a, b| a.1.better(&b.1))?.0;
    let here = judged[best];
    let holds = |q: usize| offered[q] && here.window_takes(&judged[q]);
    let low = (0..=best).rev().take_while(|q| holds(*q)).last().unwrap_or(best);
    let high = (best..places.len()).take_while(|q| holds(*q)).last().unwrap_or(best);
    let mut pick = PlacePick {
        choke: outcome.chokes[choke].name.clone(),
        at_m: places[best],
        window_m: [places[low], places[high]],
        worst: here.worst.outcome(outcome),
        why: String::new(),
    };
    pick.why = why(outcome, choke, best, &here, &pick);
    Some((here, pick))
}

fn why(outcome: &PlaceOutcome, choke: usize, place: usize, here: &Judged, pick: &PlacePick) -> String {
    let at = words::window(pick.window_m);
    let count = outcome.variants.len() * outcome.frequencies_hz.len() * QUANTITIES.len();
    let mut text = if here.keeps() {
        format!("at {at}: within limits on {}{}", words::bands(outcome), words::variants(outcome))
    } else {
        format!("at {at}: {} of {count} values beyond a limit; {}", here.beyond, words::case(&pick.worst))
    };
    if let Some((share, frequency, variant)) = hottest(outcome, choke, place).filter(|h| h.0 > LARGE_HEAT) {
        let with = if variant == 0 { String::new() } else { format!(" with \"{}\"", outcome.variants[variant]) };
        text.push_str(&format!(
            "; the choke turns up to {:.0} % of the power into heat (at {}{with})",
            100.0 * share,
            words::megahertz(outcome.frequencies_hz[frequency])
        ));
    }
    text
}

/// Largest share of the power in the choke: (share, frequency, variant).
fn hottest(outcome: &PlaceOutcome, choke: usize, place: usize) -> Option<(f64, usize, usize)> {
    let all =
        outcome.choke_w.iter().enumerate().flat_map(|(v, c)| {
            c[choke].iter().enumerate().map(move |(f, places)| (places[place] / outcome.power_w, f, v))
        });
    all.max_by(|a, b| a.0.total_cmp(&b.0))
}

fn none_needed(outcome: &PlaceOutcome, judged: &Judged) -> String {
    format!(
        "the station keeps its limits without one on {}{}; what comes closest: {}",
        words::bands(outcome),
        words::variants(outcome),
        words::case(&judged.worst.outcome(outcome))
    )
}

/// Which limit cannot be met: the quantity whose best over all places and chokes is furthest beyond.
fn no_place(outcome: &PlaceOutcome, judged: &[Vec<Judged>], offered: &[bool]) -> String {
    let limits = limits(outcome);
    let mut impossible: Vec<(f64, Case)> = (0..QUANTITIES.len())
        .filter_map(|q| {
            let each = judged.iter().enumerate().flat_map(|(c, places)| {
                let open = (0..places.len()).filter(|p| offered[*p]);
                open.filter_map(move |p| worst_of(outcome, limits, c, p, q))
            });
            each.min_by(|a, b| a.ratio().total_cmp(&b.ratio())).map(|case| (case.ratio(), case))
        })
        .filter(|(ratio, _)| *ratio > 1.0)
        .collect();
    impossible.sort_by(|a, b| b.0.total_cmp(&a.0));
    let reasons: Vec<String> = impossible
        .iter()
        .map(|(_, case)| {
            let worst = case.outcome(outcome);
            let (name, value, limit) = words::quantity(&worst);
            let with = if case.variant == 0 { String::new() } else { format!(" with \"{}\"", worst.variant) };
            format!("{name} is at best {value} (limit {limit}) at {}{with}", words::megahertz(worst.frequency_hz))
        })
        .collect();
    if reasons.is_empty() {
        "no place keeps them all on every frequency and in every variant at once".to_string()
    } else {
        reasons.join(", and ")
    }
}

/// The worst case of one quantity at a place.
fn worst_of(outcome: &PlaceOutcome, limits: [f64; 4], choke: usize, place: usize, quantity: usize) -> Option<Case> {
    let value = |v: usize, f: usize| match quantity {
        0 => Some(outcome.entry_current_a[v][choke][f][place]),
        1 => Some(outcome.last_metre_current_a[v][choke][f][place]),
        2 => Some(outcome.swr[v][choke][f][place]),
        _ => outcome.end_voltage_v[v][choke][f][place],
    };
    cases(outcome, limits, |v, f, q| if q == quantity { value(v, f) } else { None })
        .max_by(|a, b| a.ratio().total_cmp(&b.ratio()))
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]
    use super::*;
    use crate::outcome::place::CandidateOutcome;
    use num_complex::Complex64;

    /// One choke at places a metre apart on three frequencies; the entry current is given, everything else is quiet.
    fn outcome(entry_a: [[f64; 4]; 3]) -> PlaceOutcome {
        let mut out = super::super::answers::arrays(&[], 0);
        let same = |value: f64| vec![vec![vec![vec![value; 4]; 3]]];
        let volts = vec![vec![vec![vec![Some(1.0); 4]; 3]]];
        out.power_w = 100.0;
        out.limits.entry_current_a = 0.02;
        out.limits.swr = 2.0;
        out.variants = vec!["nominal".to_string()];
        out.chokes =
            vec![CandidateOutcome { name: "2 kohm".to_string(), impedance_ohm: vec![Complex64::from(2e3); 3] }];
        out.frequencies_hz = vec![7e6, 14e6, 21e6];
        out.places_m = vec![1.0, 2.0, 3.0, 4.0];
        out.entry_current_a = vec![vec![entry_a.map(|f| f.to_vec()).to_vec()]];
        out.last_metre_current_a = same(0.001);
        out.swr = same(1.5);
        out.choke_w = same(0.1);
        (out.entry_voltage_v, out.end_voltage_v) = (volts.clone(), volts);
        out.without.entry_current_a = vec![vec![0.3; 3]];
        out.without.last_metre_current_a = vec![vec![0.001; 3]];
        out.without.swr = vec![vec![1.5; 3]];
        out.without.end_voltage_v = vec![vec![Some(1.0); 3]];
        decide(&mut out);
        out
    }

    #[test]
    fn one_huge_excess_is_worse_than_several_small_ones() {
        let out = outcome([[0.010, 0.022, 0.10, 0.2], [0.010, 0.023, 0.10, 0.2], [0.140, 0.024, 0.10, 0.2]]);
        let pick = &out.picks[0];
        assert_eq!(out.verdict, PlaceVerdict::NoPlace);
        assert_eq!((pick.at_m, pick.worst.value, pick.worst.frequency_hz), (2.0, 0.024, 21e6));
        assert!(pick.why.contains("3 of 12 values beyond a limit"), "{}", pick.why);
        assert!(out.why.contains("the current into the shack is at best 24 mA (limit 20 mA) at 21 MHz"), "{}", out.why);
        assert!(!out.why.contains("without a choke"), "{}", out.why);
    }

    #[test]
    fn a_match_that_no_choke_mends_does_not_choose_the_place_and_likes_are_told_apart_by_the_rest() {
        let mut out = outcome([[0.010, 0.012, 0.018, 0.2]; 3]);
        let swr = |values: [f64; 4]| vec![vec![vec![values.to_vec(); 3]]];
        // within the limits the match is the same everywhere: the least current is chosen
        out.swr = swr([1.99, 1.99, 1.99, 1.99]);
        decide(&mut out);
        assert_eq!((out.verdict, out.picks[0].at_m), (PlaceVerdict::Place, 1.0));
        // beyond its limit with and without, and a little better where the current is large
        out.without.swr = vec![vec![8.7; 3]];
        out.swr = swr([9.4, 9.4, 8.6, 8.5]);
        decide(&mut out);
        assert_eq!((out.verdict, out.picks[0].at_m), (PlaceVerdict::NoPlace, 1.0));
        // a choke that spoils the match is another matter
        out.swr = swr([20.0, 20.0, 8.6, 8.5]);
        decide(&mut out);
        assert_eq!(out.picks[0].at_m, 3.0);
    }

    #[test]
    fn a_place_within_the_limits_comes_before_any_beyond_and_nothing_beyond_is_in_its_window() {
        let out = outcome([[0.0199; 4], [0.0199, 0.0199, 0.0201, 0.0199], [0.0199; 4]]);
        assert_eq!(out.verdict, PlaceVerdict::Place);
        assert_eq!((out.picks[0].at_m, out.picks[0].window_m), (1.0, [1.0, 2.0]));
    }

    #[test]
    fn where_every_choke_makes_it_worse_that_is_said() {
        let out = outcome([[0.5; 4]; 3]);
        assert!(out.why.ends_with("the station without a choke is less far beyond its limits"), "{}", out.why);
    }
}
