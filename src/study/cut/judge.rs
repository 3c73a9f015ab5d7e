//! Windows of lengths that hold on every frequency and variant, and the choice among them.

use super::CutFailure;
use super::lengths::Axis;
use super::reading::Reading;
use super::scan::{Grid, Scan};
use crate::outcome::cut::{CutPick, CutVerdict, StockOutcome};
use crate::outcome::place::WorstCase;
use crate::quantity::{engineering, metres, metres_and_feet};

/// Another length counts as better than the present one when its worst case is below this share of the present one's.
const MUCH_BETTER: f64 = 0.8;
/// With no length within the limits, the window of the least bad reaches to where the worst case has grown by this factor.
const SLACK: f64 = 1.1;
/// Most picks.
const PICKS: usize = 3;

/// The answer.
#[derive(Debug, Clone)]
pub(super) struct Judged {
    pub(super) verdict: CutVerdict,
    pub(super) why: String,
    pub(super) picks: Vec<CutPick>,
}

/// What lengths are compared by.
#[derive(Debug, Clone, Copy)]
enum Judging {
    /// The limits: some length keeps them.
    Limits,
    /// What a length reaches at best where that is above the limit, in the order of [`limited`]: none keeps them all, and what none can
    /// keep must not choose alone.
    Reachable([f64; 3]),
}

impl Judging {
    /// By the limits if any of these combinations keeps them.
    fn of(scan: &Scan, grid: &Grid) -> Self {
        let pairs = || (0..grid.lengths).flat_map(|l| (0..grid.seconds).map(move |s| (l, s)));
        let ratios: Vec<[f64; 3]> = pairs().map(|pair| ratios(scan, grid, pair)).collect();
        if ratios.iter().any(|r| r.iter().all(|x| *x <= 1.0)) {
            return Self::Limits;
        }
        Self::Reachable(std::array::from_fn(|q| ratios.iter().map(|r| r[q]).fold(f64::INFINITY, f64::min).max(1.0)))
    }

    /// How far a combination is from what it is judged by: the largest ratio against the limits, or the 4-norm of all against what
    /// can be reached, so that the furthest leads and the others decide between likes.
    fn score(self, ratios: [f64; 3]) -> f64 {
        match self {
            Self::Limits => ratios.into_iter().fold(0.0, f64::max),
            Self::Reachable(best) => ratios.iter().zip(best).map(|(r, b)| (r / b).powi(4)).sum::<f64>().powf(0.25),
        }
    }
}

/// The worst of every limited quantity over its limit, for one combination of lengths.
fn ratios(scan: &Scan, grid: &Grid, (l, s): (usize, usize)) -> [f64; 3] {
    let mut out = [0.0; 3];
    for v in 0..grid.variants {
        for f in 0..grid.frequencies {
            for (worst, (_, value, limit)) in out.iter_mut().zip(limited(scan, grid.at(v, f, l, s))) {
                *worst = f64::max(*worst, value / limit);
            }
        }
    }
    out
}

/// The quantities with limits at one reading: name, value, limit.
fn limited(scan: &Scan, r: &Reading) -> [(&'static str, f64, f64); 3] {
    let limits = scan.nominal().limits;
    [
        ("swr", r.swr, limits.swr),
        ("entry_current_a", r.entry_current_a, limits.entry_current_a),
        ("last_metre_current_a", r.last_metre_current_a, limits.entry_current_a),
    ]
}

/// The worst case of one combination of lengths: largest value over its limit.
fn worst(scan: &Scan, grid: &Grid, (l, s): (usize, usize)) -> (f64, WorstCase) {
    let mut out: Option<(f64, WorstCase)> = None;
    for (v, variant) in scan.list.iter().enumerate() {
        for (f, &frequency_hz) in scan.frequencies_hz.iter().enumerate() {
            for (quantity, value, limit) in limited(scan, grid.at(v, f, l, s)) {
                let ratio = value / limit;
                if out.as_ref().is_none_or(|o| ratio > o.0) {
                    let variant = variant.name.clone();
                    out =
                        Some((ratio, WorstCase { frequency_hz, variant, quantity: quantity.to_owned(), value, limit }));
                }
            }
        }
    }
    out.unwrap_or_else(|| {
        let none = WorstCase {
            frequency_hz: 0.0,
            variant: "nominal".to_owned(),
            quantity: "swr".to_owned(),
            value: 1.0,
            limit: scan.nominal().limits.swr,
        };
        (0.0, none)
    })
}

/// Worst ratios along the first length, each at the best second length.
struct Scores {
    ratio: Vec<f64>,
    second: Vec<usize>,
}

impl Scores {
    fn of(scan: &Scan, grid: &Grid, judging: Judging) -> Self {
        let best = |l: usize| {
            let all = (0..grid.seconds).map(|s| (judging.score(ratios(scan, grid, (l, s))), s));
            all.min_by(|a, b| a.0.total_cmp(&b.0)).unwrap_or((f64::INFINITY, 0))
        };
        let (ratio, second) = (0..grid.lengths).map(best).unzip();
        Self { ratio, second }
    }

    /// The worst of a length and its neighbours: what a cut that is a step off would give.
    fn robust(&self, l: usize) -> f64 {
        let (from, to) = (l.saturating_sub(1), (l + 1).min(self.ratio.len() - 1));
        self.ratio[from..=to].iter().copied().fold(0.0, f64::max)
    }

    /// Runs of lengths at most this bad, widest first.
    fn runs(&self, most: f64) -> Vec<(usize, usize)> {
        let mut out: Vec<(usize, usize)> = Vec::new();
        for l in (0..self.ratio.len()).filter(|&l| self.ratio[l] <= most) {
            match out.last_mut() {
                Some(run) if run.1 + 1 == l => run.1 = l,
                _ => out.push((l, l)),
            }
        }
        out.sort_by_key(|run| std::cmp::Reverse(run.1 - run.0));
        out
    }

    /// The best length of a run, one that still holds when the cut is a step off.
    fn best(&self, (from, to): (usize, usize)) -> usize {
        let key = |l: &usize| self.robust(*l);
        (from..=to).min_by(|a, b| key(a).total_cmp(&key(b))).unwrap_or(from)
    }

    /// Local minima, best first.
    fn minima(&self) -> Vec<usize> {
        let r = &self.ratio;
        let low = |l: &usize| (*l == 0 || r[*l] <= r[l - 1]) && (*l + 1 == r.len() || r[*l] < r[l + 1]);
        let mut out: Vec<usize> = (0..r.len()).filter(low).collect();
        out.sort_by(|a, b| r[*a].total_cmp(&r[*b]));
        out
    }
}

/// Judge a scan.
pub(super) fn judge(scan: &Scan, grid: &Grid, first: &Axis, second: Option<&Axis>) -> Judged {
    let judging = Judging::of(scan, grid);
    let kept = matches!(judging, Judging::Limits);
    let scores = Scores::of(scan, grid, judging);
    let mut found: Vec<(usize, (usize, usize))> =
        scores.runs(1.0).into_iter().map(|run| (scores.best(run), run)).collect();
    if !kept {
        let around = |l: usize| {
            let runs = scores.runs(SLACK * scores.ratio[l]);
            (l, runs.into_iter().find(|run| (run.0..=run.1).contains(&l)).unwrap_or((l, l)))
        };
        found = scores.minima().into_iter().map(around).collect();
    }
    found.truncate(PICKS);
    let picks: Vec<CutPick> = found
        .iter()
        .map(|&(l, run)| {
            let worst_case = worst(scan, grid, (l, scores.second[l])).1;
            let window_m = [first.lengths_m[run.0], first.lengths_m[run.1]];
            CutPick {
                length_m: first.lengths_m[l],
                second_length_m: second.map(|s| s.lengths_m[scores.second[l]]),
                window_m,
                why: reason(scan, window_m, &worst_case),
                worst: worst_case,
            }
        })
        .collect();
    let present = present(&scores, first);
    let keeps =
        kept && present.is_some_and(|l| {
            let best = found.first().map_or(f64::INFINITY, |p| scores.ratio[p.0]);
            scores.ratio[l] <= 1.0 && best >= MUCH_BETTER * scores.ratio[l]
        }) && second.is_none();
    let verdict = match (kept, keeps) {
        (false, _) => CutVerdict::NoLength,
        (true, true) => CutVerdict::Keep,
        (true, false) => CutVerdict::Cut,
    };
    let matched = found.first().is_some_and(|p| ratios(scan, grid, (p.0, scores.second[p.0]))[0] <= 1.0);
    let why = sentence(scan, first, verdict, &picks, (grid, matched));
    Judged { verdict, why, picks }
}

/// Index of the length in the file, where the range has it within a step.
fn present(scores: &Scores, first: &Axis) -> Option<usize> {
    let off = |l: usize| (first.lengths_m[l] - first.present_m).abs();
    let nearest = (0..scores.ratio.len()).min_by(|a, b| off(*a).total_cmp(&off(*b)))?;
    let step = first.lengths_m.windows(2).map(|w| w[1] - w[0]).fold(f64::INFINITY, f64::min);
    (off(nearest) <= 0.51 * step).then_some(nearest)
}

/// "SWR 1.8" or "412 mA at the entry".
fn figure(case: &WorstCase) -> String {
    match case.quantity.as_str() {
        "swr" => format!("SWR {:.2}", case.value),
        "entry_current_a" => format!("{} into the shack", engineering(case.value, "A")),
        _ => format!("{} in the last metre", engineering(case.value, "A")),
    }
}

fn at(scan: &Scan, case: &WorstCase) -> String {
    let variant = if scan.list.len() > 1 { format!(", {}", case.variant) } else { String::new() };
    format!("{} at {:.3} MHz{variant}", figure(case), case.frequency_hz / 1e6)
}

fn span(window_m: [f64; 2]) -> String {
    if window_m[0] == window_m[1] {
        metres_and_feet(window_m[0])
    } else {
        format!("{} to {}", metres_and_feet(window_m[0]), metres_and_feet(window_m[1]))
    }
}

fn reason(scan: &Scan, window_m: [f64; 2], judged: &WorstCase) -> String {
    let state = if judged.value <= judged.limit { "holds from" } else { "least bad from" };
    format!("{state} {}; at worst {}", span(window_m), at(scan, judged))
}

fn sentence(
    scan: &Scan,
    first: &Axis,
    verdict: CutVerdict,
    picks: &[CutPick],
    (grid, matched): (&Grid, bool),
) -> String {
    let Some(pick) = picks.first() else { return "nothing was computed".to_owned() };
    let all = |many: usize, what: &str| if many > 1 { format!("all {many} {what}") } else { String::new() };
    let over = [all(grid.frequencies, "frequencies"), all(grid.variants, "variants")];
    let over = over.iter().filter(|o| !o.is_empty()).cloned().collect::<Vec<_>>().join(" and ");
    let over = if over.is_empty() { String::new() } else { format!(" over {over}") };
    let with = pick.second_length_m.map_or_else(String::new, |s| format!(" with {} beside it", metres(s)));
    match verdict {
        CutVerdict::Keep => format!(
            "{} may stay at {}: within limits{over}, and no other length does better by much",
            first.target.called(),
            metres_and_feet(first.present_m)
        ),
        CutVerdict::Cut => format!(
            "{} of {}{with}: within limits{over} from {}; at worst {}",
            first.target.called(),
            metres_and_feet(pick.length_m),
            span(pick.window_m),
            at(scan, &pick.worst)
        ),
        CutVerdict::NoLength if matched => format!(
            "no length keeps the current off the shack: that takes a choke or a counterpoise. At {}{with} the match holds{over}, and the \
             current is as low as goes with that: {}",
            metres_and_feet(pick.length_m),
            at(scan, &pick.worst)
        ),
        CutVerdict::NoLength => format!(
            "no length keeps the limits{over}; the least bad is {}{with}, with {}",
            metres_and_feet(pick.length_m),
            at(scan, &pick.worst)
        ),
    }
}

/// Lengths that can be bought, best first.
///
/// # Errors
/// [`CutFailure`] of the first that cannot be solved.
pub(super) fn stock(
    scan: &Scan,
    stock: &[(String, f64)],
    second_m: Option<f64>,
) -> Result<Vec<StockOutcome>, CutFailure> {
    if stock.is_empty() {
        return Ok(Vec::new());
    }
    let lengths_m: Vec<f64> = stock.iter().map(|s| s.1).collect();
    let second = second_m.map(|s| [s]);
    let grid = scan.grid(&lengths_m, second.as_ref().map(<[f64; 1]>::as_slice))?;
    let judging = Judging::of(scan, &grid);
    let mut ranked: Vec<(f64, StockOutcome)> = stock
        .iter()
        .enumerate()
        .map(|(l, (name, length_m))| {
            let (ratio, worst_case) = worst(scan, &grid, (l, 0));
            let rank = judging.score(ratios(scan, &grid, (l, 0)));
            (
                rank,
                StockOutcome {
                    name: name.clone(),
                    length_m: *length_m,
                    within_limits: ratio <= 1.0,
                    worst: worst_case,
                },
            )
        })
        .collect();
    ranked.sort_by(|a, b| a.0.total_cmp(&b.0));
    Ok(ranked.into_iter().map(|r| r.1).collect())
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn what_no_length_can_keep_does_not_choose_alone() {
        // SWR 16.4 with 487 mA against 16.6 with 152 mA, limits 2 and 20 mA: the match differs by nothing, the current threefold
        let (loud, quiet) = ([8.2, 24.35, 20.0], [8.3, 7.6, 6.0]);
        let reachable = Judging::Reachable([8.2, 7.0, 5.8]);
        assert!(reachable.score(quiet) < reachable.score(loud));
        // the match by itself would have chosen the other one
        assert!(quiet[0] > loud[0]);
        // and a match that some length keeps still counts
        let spoiled = [40.0, 7.2, 5.9];
        assert!(reachable.score(quiet) < reachable.score(spoiled));
        assert_eq!(Judging::Limits.score([0.9, 0.5, 0.7]), 0.9);
    }
}
