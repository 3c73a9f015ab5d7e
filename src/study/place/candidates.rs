//! The chokes that may be placed.

use super::{PlaceFailure, PlaceOptions};
use crate::layout::{FrequencyPoint, Layout, PartKind, PartLaw};
use crate::network;
use crate::outcome::place::CandidateOutcome;
use crate::quantity::engineering;

/// Resistances tried where neither the file nor the question names a choke, ohm: from a few ferrite sleeves to a many-turn winding
/// (common practice).
pub const DEFAULT_RESISTANCES_OHM: [f64; 5] = [500.0, 1e3, 2e3, 5e3, 10e3];

/// A choke that may be placed.
#[derive(Debug, Clone, PartialEq)]
pub struct Candidate {
    /// Name.
    pub name: String,
    /// Its impedance.
    pub law: PartLaw,
}

impl Candidate {
    /// A pure resistance, ohm, named as a person writes it.
    #[must_use]
    pub fn resistance(resistance_ohm: f64) -> Self {
        Self { name: engineering(resistance_ohm, "ohm"), law: PartLaw::Fixed { resistance_ohm, reactance_ohm: 0.0 } }
    }

    pub(super) fn outcome(&self, frequencies: &[FrequencyPoint]) -> CandidateOutcome {
        CandidateOutcome {
            name: self.name.clone(),
            impedance_ohm: frequencies.iter().map(|f| network::impedance(&self.law, f.frequency_hz)).collect(),
        }
    }
}

/// The file's chokes on the coax that are not kept, then those asked for; with neither the default set.
pub(super) fn of(layout: &Layout, options: &PlaceOptions) -> Result<Vec<Candidate>, PlaceFailure> {
    let shield = layout.coax.as_ref().map(|c| c.conductor);
    let own: Vec<_> =
        layout.parts.iter().filter(|p| p.kind == PartKind::Choke && Some(p.conductor) == shield).collect();
    for name in &options.keep {
        if !own.iter().any(|p| p.name == *name) {
            let names: Vec<String> = own.iter().map(|p| format!("\"{}\"", p.name)).collect();
            let known = if names.is_empty() { "none".to_string() } else { names.join(", ") };
            return Err(PlaceFailure::UnknownChoke { name: name.clone(), known });
        }
    }
    let movable = own.iter().filter(|p| !options.keep.contains(&p.name));
    let mut out: Vec<Candidate> = movable.map(|p| Candidate { name: p.name.clone(), law: p.law }).collect();
    out.extend(options.candidates.iter().cloned());
    if out.is_empty() {
        out.extend(DEFAULT_RESISTANCES_OHM.map(Candidate::resistance));
    }
    Ok(out)
}
