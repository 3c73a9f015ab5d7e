//! `[[choke]]` and `[[inline]]`.

use super::{Capacitance, Distance, Elements, Inductance, Resistance, table};
use crate::station::source::Written;

table! {
    /// An impedance that is the same at every frequency.
    RawImpedance as "impedance" {
        /// Real part.
        resistance: Option<Written<Resistance>>,
        /// Imaginary part, default 0.
        reactance: Option<Written<Resistance>>,
    }
}

table! {
    /// Resistance, inductance and capacitance in parallel.
    RawResonant as "resonant" {
        /// At resonance.
        resistance: Written<Resistance>,
        /// Inductance.
        inductance: Written<Inductance>,
        /// Capacitance.
        capacitance: Written<Capacitance>,
    }
}

table! {
    /// A common-mode choke on the outside of a conductor.
    RawChoke as "choke" {
        /// What it is called.
        name: Option<Written<String>>,
        /// The conductor, default the coax.
        on: Option<Written<String>>,
        /// Distance along the conductor; along the coax from the feed point.
        at: Written<Distance>,
        /// The same at every frequency.
        impedance: Option<Written<RawImpedance>>,
        /// Instead of the impedance: a parallel resonant circuit.
        resonant: Option<Written<RawResonant>>,
    }
}

table! {
    /// A lumped part in a conductor: loading coil, trap, resistor, capacitor.
    RawInline as "inline" {
        /// What it is called.
        name: Option<Written<String>>,
        /// The conductor it is in.
        on: Written<String>,
        /// Distance along the conductor.
        at: Written<Distance>,
        /// Resistance.
        resistance: Option<Written<Resistance>>,
        /// Inductance.
        inductance: Option<Written<Inductance>>,
        /// Capacitance.
        capacitance: Option<Written<Capacitance>>,
        /// How they go together, default in series.
        elements: Option<Written<Elements>>,
    }
}
