//! From every length × every place to one pair: what keeps the limits, with a window in both, and why.
//!
//! A pair is judged as a place is, by the same limits and with the same hand's breadth. Among pairs that keep them, the one is chosen
//! that does so best when the coax comes out a step longer or shorter.

use super::joint::Row;
use super::verdict::{Judged, LARGE_HEAT, QUANTITIES};
use super::words;
use crate::outcome::joint::{LengthPick, LengthsOutcome};
use crate::outcome::place::{PlaceOutcome, PlaceVerdict, WorstCase};
use std::cmp::Ordering;
use std::ops::RangeInclusive;

/// Index of a length and of a place.
type Pair = (usize, usize);

/// A pair with how it stands.
struct Found {
    /// With a hand's breadth to either side.
    robust: Judged,
    /// And a step of the length to either side.
    over_lengths: Judged,
    here: Judged,
    pick: LengthPick,
}

/// Everything that was computed for one choke.
struct Field<'a> {
    rows: &'a [Row],
    choke: usize,
    places: usize,
}

impl Field<'_> {
    fn judged(&self, (l, p): Pair) -> Option<&Judged> {
        self.rows.get(l)?.judged[self.choke][p].as_ref()
    }

    /// Out of reach is `None`.
    fn robust(&self, (l, p): Pair) -> Option<&Judged> {
        let beside = self.rows.get(l)?.robust[self.choke][p]?;
        self.judged((l, beside))
    }

    fn over_lengths(&self, (l, p): Pair) -> Option<&Judged> {
        (l.saturating_sub(1)..=l + 1).filter_map(|k| self.robust((k, p))).max_by(|a, b| a.better(b))
    }

    /// The order of two pairs, the better first.
    fn order(&self, a: Pair, b: Pair) -> Ordering {
        match (self.robust(a), self.robust(b)) {
            (Some(x), Some(y)) if x.keeps() && y.keeps() => match (self.over_lengths(a), self.over_lengths(b)) {
                (Some(x), Some(y)) => x.better(y),
                _ => Ordering::Equal,
            },
            (Some(x), Some(y)) => x.better(y),
            (x, y) => y.is_some().cmp(&x.is_some()),
        }
    }

    /// The best pair of some lengths.
    fn best(&self, lengths: impl Iterator<Item = usize>) -> Option<Pair> {
        let pairs = lengths.flat_map(|l| (0..self.places).map(move |p| (l, p)));
        pairs.filter(|pair| self.robust(*pair).is_some()).min_by(|a, b| self.order(*a, *b))
    }

    /// Lengths beside a pair's that hold at its place, and places beside it that hold at its length, by index.
    fn windows(&self, (l, p): Pair) -> Option<(RangeInclusive<usize>, RangeInclusive<usize>)> {
        let here = self.judged((l, p))?;
        let holds =
            |pair: Pair| self.robust(pair).is_some() && self.judged(pair).is_some_and(|there| here.window_takes(there));
        let first = (0..=l).rev().take_while(|k| holds((*k, p))).last().unwrap_or(l);
        let last = (l..self.rows.len()).take_while(|k| holds((*k, p))).last().unwrap_or(l);
        // places without a seat lie between others where a part is in the way, and end a window
        let low = (0..=p).rev().take_while(|q| holds((l, *q))).last().unwrap_or(p);
        let high = (p..self.places).take_while(|q| holds((l, *q))).last().unwrap_or(p);
        Some((first..=last, low..=high))
    }
}

/// Fill in verdict, reason and picks. `frame` has what was asked of which station, its arrays are empty.
pub(super) fn decide(out: &mut LengthsOutcome, frame: &PlaceOutcome, rows: &[Row]) {
    let mut found: Vec<Found> = (0..frame.chokes.len()).flat_map(|c| of_a_choke(out, frame, rows, c)).collect();
    let width = |f: &Found| f.pick.window_m[1] - f.pick.window_m[0];
    found.sort_by(|a, b| {
        let both = a.robust.keeps() && b.robust.keeps();
        let order = if both { a.over_lengths.better(&b.over_lengths) } else { a.robust.better(&b.robust) };
        order.then(width(b).total_cmp(&width(a)))
    });
    let bare: Vec<usize> = (0..rows.len()).filter(|&l| rows[l].without.is_some_and(|w| w.keeps())).collect();
    out.none_needed_at_m = bare.iter().map(|&l| rows[l].length_m).collect();
    let (verdict, why) = match (none_needed(frame, rows, &bare), found.first()) {
        (Some(why), _) => (PlaceVerdict::NoneNeeded, why),
        (None, Some(best)) if best.here.keeps() => (PlaceVerdict::Place, best.pick.why.clone()),
        (None, Some(_)) => (PlaceVerdict::NoPlace, no_pair(out, frame, rows)),
        (None, None) => {
            (PlaceVerdict::NoPlace, "no place of the coax is within the stretches that can be reached".to_string())
        }
    };
    (out.verdict, out.why) = (verdict, why);
    out.picks = found.into_iter().map(|f| f.pick).collect();
}

/// The best pair of a choke, and the best outside that pair's window of lengths where it keeps the limits too.
fn of_a_choke(out: &LengthsOutcome, frame: &PlaceOutcome, rows: &[Row], choke: usize) -> Vec<Found> {
    let field = Field { rows, choke, places: out.places_m.len() };
    let Some(first) = field.best(0..rows.len()) else { return Vec::new() };
    let mut pairs = vec![first];
    if let Some((lengths, _)) = field.windows(first) {
        let other = field.best((0..rows.len()).filter(|l| !lengths.contains(l)));
        pairs.extend(other.filter(|pair| field.robust(*pair).is_some_and(Judged::keeps)));
    }
    pairs.into_iter().filter_map(|pair| found(out, frame, &field, pair)).collect()
}

fn found(out: &LengthsOutcome, frame: &PlaceOutcome, field: &Field, pair: Pair) -> Option<Found> {
    let (lengths, places) = field.windows(pair)?;
    let here = *field.judged(pair)?;
    let mut pick = LengthPick {
        choke: out.chokes[field.choke].clone(),
        length_m: out.lengths_m[pair.0],
        length_window_m: [out.lengths_m[*lengths.start()], out.lengths_m[*lengths.end()]],
        at_m: out.places_m[pair.1],
        window_m: [out.places_m[*places.start()], out.places_m[*places.end()]],
        worst: here.worst.outcome(frame),
        why: String::new(),
    };
    pick.why = why(frame, &pick, &here);
    Some(Found { robust: *field.robust(pair)?, over_lengths: *field.over_lengths(pair)?, here, pick })
}

fn why(frame: &PlaceOutcome, pick: &LengthPick, here: &Judged) -> String {
    let at = words::window([pick.at_m; 2]);
    let length = words::window([pick.length_m; 2]);
    let count = frame.variants.len() * frame.frequencies_hz.len() * QUANTITIES.len();
    let stands = if here.keeps() {
        format!("within limits on {}{}", words::bands(frame), words::variants(frame))
    } else {
        format!("{} of {count} values beyond a limit; {}", here.beyond, words::case(&pick.worst))
    };
    let heat = if here.heat > LARGE_HEAT {
        format!("; the choke turns up to {:.0} % of the power into heat", 100.0 * here.heat)
    } else {
        String::new()
    };
    format!(
        "with {length} of coax and the choke at {at}: {stands}{heat}; at that length the choke may sit at {}, and with it there the coax may be {} long",
        words::window(pick.window_m),
        words::window(pick.length_window_m)
    )
}

/// Where some lengths need no choke: the one furthest from its limits, and those beside it.
fn none_needed(frame: &PlaceOutcome, rows: &[Row], bare: &[usize]) -> Option<String> {
    let without = |l: usize| rows.get(l)?.without;
    let beside = |l: usize| (l.saturating_sub(1)..=l + 1).filter_map(without).max_by(|a, b| a.better(b));
    let best = *bare.iter().min_by(|a, b| match (beside(**a), beside(**b)) {
        (Some(x), Some(y)) => x.better(&y),
        _ => Ordering::Equal,
    })?;
    let first = (0..=best).rev().take_while(|l| bare.contains(l)).last().unwrap_or(best);
    let last = (best..rows.len()).take_while(|l| bare.contains(l)).last().unwrap_or(best);
    Some(format!(
        "with {} of coax ({} holds) the station keeps its limits without a choke on {}{}; what comes closest: {}",
        words::window([rows[best].length_m; 2]),
        words::window([rows[first].length_m, rows[last].length_m]),
        words::bands(frame),
        words::variants(frame),
        words::case(&without(best)?.worst.outcome(frame))
    ))
}

/// Which limit cannot be met: the quantity whose best over all lengths, places and chokes is furthest beyond.
fn no_pair(out: &LengthsOutcome, frame: &PlaceOutcome, rows: &[Row]) -> String {
    let mut impossible: Vec<(f64, WorstCase)> = (0..QUANTITIES.len())
        .filter_map(|q| {
            let pairs = rows.iter().flat_map(|row| (0..out.places_m.len()).map(move |p| (row, p)));
            let all = pairs.flat_map(|(row, p)| (0..frame.chokes.len()).map(move |c| (row, p, c)));
            let reached = all.filter(|(row, p, c)| row.robust[*c][*p].is_some());
            let cases = reached.filter_map(|(row, p, c)| worst_of(frame, row, q, (c, p)));
            cases.min_by(|a, b| (a.value / a.limit).total_cmp(&(b.value / b.limit)))
        })
        .map(|case| (case.value / case.limit, case))
        .filter(|(ratio, _)| *ratio > 1.0)
        .collect();
    impossible.sort_by(|a, b| b.0.total_cmp(&a.0));
    if impossible.is_empty() {
        return "no length and place keep them all on every frequency and in every variant at once".to_string();
    }
    let reasons = impossible.iter().map(|(_, worst)| {
        let (name, value, limit) = words::quantity(worst);
        format!("{name} is at best {value} (limit {limit}) at {}", words::megahertz(worst.frequency_hz))
    });
    reasons.collect::<Vec<_>>().join(", and ")
}

/// The frequency at which a quantity is largest, over all variants.
fn worst_of(frame: &PlaceOutcome, row: &Row, quantity: usize, (choke, place): (usize, usize)) -> Option<WorstCase> {
    let values = row.worst[quantity][choke].iter().enumerate().filter_map(|(f, places)| Some((f, places[place]?)));
    let (f, value) = values.max_by(|a, b| a.1.total_cmp(&b.1))?;
    Some(WorstCase {
        frequency_hz: frame.frequencies_hz[f],
        variant: String::new(),
        quantity: QUANTITIES[quantity].to_string(),
        value,
        limit: row.limits[quantity],
    })
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]
    use super::*;
    use crate::outcome::joint::LengthsWithoutOutcome;
    use crate::outcome::place::CandidateOutcome;
    use num_complex::Complex64;

    const LENGTHS_M: [f64; 5] = [10.0, 10.5, 11.0, 11.5, 12.0];

    /// What was asked: one choke, one frequency, places a metre apart up to 5 m.
    fn frame() -> PlaceOutcome {
        let mut out = super::super::answers::arrays(&[], 0);
        out.power_w = 100.0;
        (out.limits.entry_current_a, out.limits.swr) = (0.02, 2.0);
        out.variants = vec!["nominal".to_string()];
        out.chokes = vec![CandidateOutcome { name: "2 kohm".to_string(), impedance_ohm: vec![Complex64::from(2e3)] }];
        (out.frequencies_hz, out.bands) = (vec![7e6], vec![None]);
        out
    }

    /// Lengths with a current into the shack at each place and without a choke; the rest is quiet.
    fn rows(entry_a: [[f64; 5]; 5], without_a: [f64; 5]) -> Vec<Row> {
        let row = |l: usize| {
            let mut one = frame();
            one.places_m = vec![1.0, 2.0, 3.0, 4.0, 5.0];
            let same = |value: f64| vec![vec![vec![vec![value; 5]]]];
            one.entry_current_a = vec![vec![vec![entry_a[l].to_vec()]]];
            (one.last_metre_current_a, one.swr, one.choke_w) = (same(0.001), same(1.2), same(0.1));
            one.end_voltage_v = vec![vec![vec![vec![Some(1.0); 5]]]];
            one.without.entry_current_a = vec![vec![without_a[l]]];
            one.without.last_metre_current_a = vec![vec![0.001]];
            one.without.swr = vec![vec![1.2]];
            one.without.end_voltage_v = vec![vec![Some(1.0)]];
            Row::of(&one, LENGTHS_M[l], &[0, 1, 2, 3, 4], 5)
        };
        (0..5).map(row).collect()
    }

    fn decided(rows: &[Row]) -> LengthsOutcome {
        let nothing = || LengthsWithoutOutcome {
            entry_current_a: vec![],
            last_metre_current_a: vec![],
            end_voltage_v: vec![],
            swr: vec![],
        };
        let mut out = LengthsOutcome {
            moving_end: "the radio's end of the coax".to_string(),
            present_length_m: 12.0,
            lengths_m: LENGTHS_M.to_vec(),
            places_m: vec![1.0, 2.0, 3.0, 4.0, 5.0],
            chokes: vec!["2 kohm".to_string()],
            without: nothing(),
            end_voltage_limit_v: vec![3.0; 5],
            entry_current_a: vec![],
            last_metre_current_a: vec![],
            end_voltage_v: vec![],
            swr: vec![],
            choke_w: vec![],
            none_needed_at_m: vec![],
            verdict: PlaceVerdict::NoPlace,
            why: String::new(),
            picks: vec![],
            warnings: vec![],
        };
        decide(&mut out, &frame(), rows);
        out
    }

    #[test]
    fn the_pair_that_holds_a_step_longer_or_shorter_beats_a_lone_better_one() {
        // the lowest current of all stands alone at 10 m; from 11 m on a wide field is nearly as good
        let mut entry_a = [[0.05; 5]; 5];
        entry_a[0][1] = 0.004;
        for length in &mut entry_a[2..] {
            length[2..].fill(0.012);
        }
        entry_a[4][4] = 0.03;
        let out = decided(&rows(entry_a, [0.3; 5]));
        assert_eq!(out.verdict, PlaceVerdict::Place);
        let pick = &out.picks[0];
        assert_eq!((pick.length_m, pick.length_window_m), (11.5, [11.0, 12.0]));
        assert_eq!((pick.at_m, pick.window_m), (3.0, [3.0, 5.0]));
        assert!(
            pick.why.starts_with("with 11.50 m of coax and the choke at 3.00 m: within limits on 7 MHz"),
            "{}",
            pick.why
        );
        let second = &out.picks[1];
        assert_eq!((second.length_m, second.at_m, second.length_window_m), (10.0, 2.0, [10.0, 10.0]));
    }

    #[test]
    fn with_nothing_within_the_limits_the_least_excess_is_named_and_what_cannot_be_met() {
        let mut entry_a = [[0.5; 5]; 5];
        entry_a[3] = [0.4, 0.042, 0.040, 0.3, 0.4];
        entry_a[2][2] = 0.043;
        let out = decided(&rows(entry_a, [0.3; 5]));
        assert_eq!(out.verdict, PlaceVerdict::NoPlace);
        let pick = &out.picks[0];
        assert_eq!((out.picks.len(), pick.length_m, pick.at_m, pick.worst.value), (1, 11.5, 3.0, 0.040));
        assert_eq!((pick.length_window_m, pick.window_m), ([11.0, 11.5], [2.0, 3.0]));
        assert_eq!(out.why, "the current into the shack is at best 40 mA (limit 20 mA) at 7 MHz");
    }

    #[test]
    fn lengths_that_need_no_choke_are_named() {
        let out = decided(&rows([[0.01; 5]; 5], [0.3, 0.015, 0.012, 0.018, 0.3]));
        assert_eq!((out.verdict, out.none_needed_at_m.as_slice()), (PlaceVerdict::NoneNeeded, &[10.5, 11.0, 11.5][..]));
        assert!(out.why.starts_with("with 11.00 m of coax (10.50 to 11.50 m holds) the station keeps"), "{}", out.why);
        assert_eq!(out.picks[0].choke, "2 kohm");
    }
}
