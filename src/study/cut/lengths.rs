//! Which of the lengths asked for can be built: those that keep every join and stay on the route.

use super::moving::Target;
use super::{CutFailure, Lengths};
use crate::interaction::Extent;
use crate::layout::{Layout, Warning};
use crate::quantity::metres;
use crate::station::{Fault, Station};

/// One scanned length.
#[derive(Debug, Clone)]
pub(super) struct Axis {
    pub(super) target: Target,
    /// In the file, m.
    pub(super) present_m: f64,
    /// That can be built, m, ascending, at least one.
    pub(super) lengths_m: Vec<f64>,
    /// What was left out and why.
    pub(super) warnings: Vec<Warning>,
    /// The space that all these lengths take up, one a variant.
    pub(super) extents: Vec<Extent>,
}

impl Axis {
    /// A length that can be built, the longest, m.
    pub(super) fn anchor_m(&self) -> f64 {
        self.lengths_m.last().copied().unwrap_or(self.present_m)
    }
}

/// Place every variant with lengths set.
///
/// # Errors
/// The faults of the first variant that cannot be placed.
pub(super) fn place(station: &Station, sets: &[(&Target, f64)]) -> Result<Layout, Vec<Fault>> {
    let mut changed = station.clone();
    for (target, length_m) in sets {
        target.set(&mut changed, *length_m);
    }
    Layout::place(&changed)
}

/// Check the lengths of one conductor, another one's held.
///
/// # Errors
/// [`CutFailure::Question`] when no length of the range can be built.
pub(super) fn axis(
    stations: &[(String, Station)],
    asked: &Lengths,
    held: Option<(&Target, f64)>,
) -> Result<Axis, CutFailure> {
    let nominal = &stations[0].1;
    let target = Target::find(nominal, &asked.conductor)?;
    let present = Layout::place(nominal)
        .map_err(|faults| crate::station::Refused { sources: nominal.sources.clone(), faults })?;
    let present_m = target.conductors(&present).first().map_or(0.0, |&c| present.conductors[c].length_m());
    let mut warnings = Vec::new();
    let present_extent = Extent::of(&present);
    let mut extents = vec![present_extent; stations.len()];
    let verdicts: Vec<Option<Fault>> =
        asked.lengths_m.iter().map(|&length_m| fault(stations, &target, length_m, held, &mut extents)).collect();
    let (Some(low), Some(high)) =
        (verdicts.iter().position(Option::is_none), verdicts.iter().rposition(Option::is_none))
    else {
        return Err(none_fits(&target, asked, verdicts));
    };
    if let Some(fault) = low.checked_sub(1).and_then(|n| verdicts[n].as_ref()) {
        let shortest = shortest(stations, &target, (asked.lengths_m[low - 1], asked.lengths_m[low]), held);
        warnings.push(left_out(
            &target,
            &format!(
                "the range begins at {} instead of {}: the shortest that keeps every join is {} ({})",
                metres(asked.lengths_m[low]),
                metres(asked.lengths_m[0]),
                metres(shortest),
                fault.reason
            ),
        ));
    }
    if let Some(Some(fault)) = verdicts.get(high + 1) {
        let (to, asked_to) = (asked.lengths_m[high], asked.lengths_m[asked.lengths_m.len() - 1]);
        let text = format!(
            "the range ends at {} instead of {}: {}; {}",
            metres(to),
            metres(asked_to),
            fault.reason,
            fault.mend
        );
        warnings.push(left_out(&target, &text));
    }
    for (length_m, verdict) in asked.lengths_m.iter().zip(&verdicts).take(high).skip(low) {
        if let Some(fault) = verdict {
            warnings.push(left_out(&target, &format!("{} is left out: {}", metres(*length_m), fault.reason)));
        }
    }
    let kept: Vec<f64> = (low..=high).filter(|&n| verdicts[n].is_none()).map(|n| asked.lengths_m[n]).collect();
    Ok(Axis { target, present_m, lengths_m: kept, warnings, extents })
}

fn left_out(target: &Target, message: &str) -> Warning {
    Warning { about: target.name().to_owned(), message: message.to_owned() }
}

/// Why a length cannot be built, in any variant; where it can, its extents join those of the others.
fn fault(
    stations: &[(String, Station)],
    target: &Target,
    length_m: f64,
    held: Option<(&Target, f64)>,
    extents: &mut [Extent],
) -> Option<Fault> {
    let mut sets = vec![(target, length_m)];
    sets.extend(held);
    let placed = stations.iter().map(|(_, station)| place(station, &sets)).collect::<Result<Vec<_>, _>>();
    match placed {
        Ok(layouts) => {
            extents.iter_mut().zip(&layouts).for_each(|(all, layout)| *all = all.union(Extent::of(layout)));
            None
        }
        Err(faults) => Some(first_of(faults)),
    }
}

fn first_of(faults: Vec<Fault>) -> Fault {
    faults.into_iter().next().unwrap_or_else(|| Fault::new(None, "the station cannot be placed", "check the file"))
}

fn none_fits(target: &Target, asked: &Lengths, verdicts: Vec<Option<Fault>>) -> CutFailure {
    let (Some(from), Some(to)) = (asked.lengths_m.first(), asked.lengths_m.last()) else {
        return CutFailure::Question(format!("the range of {} is empty", target.called()));
    };
    let fault = first_of(verdicts.into_iter().flatten().collect());
    CutFailure::Question(format!(
        "no length from {} to {} of {} can be built: {}; {}",
        metres(*from),
        metres(*to),
        target.called(),
        fault.reason,
        fault.mend
    ))
}

/// The shortest length that can be built, to a centimetre, m.
fn shortest(
    stations: &[(String, Station)],
    target: &Target,
    (mut fails, mut holds): (f64, f64),
    held: Option<(&Target, f64)>,
) -> f64 {
    while holds - fails > 0.005 {
        let middle = 0.5 * (fails + holds);
        if fault(stations, target, middle, held, &mut []).is_none() { holds = middle } else { fails = middle }
    }
    (holds * 100.0).ceil() / 100.0
}

/// Lengths that can be bought and built; the rest is warned of.
pub(super) fn stock(
    stations: &[(String, Station)],
    axis: &mut Axis,
    stock: &[(String, f64)],
    warnings: &mut Vec<Warning>,
) -> Vec<(String, f64)> {
    let mut kept = Vec::new();
    for (name, length_m) in stock {
        match fault(stations, &axis.target, *length_m, None, &mut axis.extents) {
            None => kept.push((name.clone(), *length_m)),
            Some(fault) => warnings
                .push(left_out(&axis.target, &format!("{name} from the stock cannot be built here: {}", fault.reason))),
        }
    }
    kept
}
