//! From a model to the arrays: every choke at every place of one variant and frequency, scaled to the power at the radio.

use super::model::Model;
use super::{Prepared, Solved};
use crate::network::{ChainAt, ChainError};
use crate::outcome::place::{LimitsOutcome, OverFrequency, OverPlace, PlaceOutcome, PlaceVerdict, WithoutOutcome};
use num_complex::Complex64;

/// One choke at every place.
#[derive(Debug, Clone, Default)]
pub(super) struct Column {
    entry_current_a: Vec<f64>,
    entry_voltage_v: Vec<Option<f64>>,
    end_voltage_v: Vec<Option<f64>>,
    last_metre_current_a: Vec<f64>,
    feed_ohm: Vec<Complex64>,
    swr: Vec<f64>,
    choke_w: Vec<f64>,
    choke_v: Vec<f64>,
    choke_a: Vec<f64>,
}

/// One variant at one frequency.
#[derive(Debug, Clone)]
pub(super) struct Answer {
    /// Without a choke: a column of one place.
    without: Column,
    /// One a choke.
    chokes: Vec<Column>,
}

impl Column {
    fn with_room(places: usize) -> Self {
        Self {
            entry_current_a: Vec::with_capacity(places),
            entry_voltage_v: Vec::with_capacity(places),
            end_voltage_v: Vec::with_capacity(places),
            last_metre_current_a: Vec::with_capacity(places),
            feed_ohm: Vec::with_capacity(places),
            swr: Vec::with_capacity(places),
            choke_w: Vec::with_capacity(places),
            choke_v: Vec::with_capacity(places),
            choke_a: Vec::with_capacity(places),
        }
    }

    fn push(
        &mut self,
        loaded: &super::model::Loaded,
        chain: &ChainAt,
        choke_ohm: Complex64,
        power_w: f64,
    ) -> Result<(), ChainError> {
        let feed_ohm = loaded.feed_s.inv();
        let state = chain.state(feed_ohm, power_w)?;
        let volts = state.feed_voltage_v;
        let choke_a = loaded.choke_a * volts;
        self.entry_current_a.push(loaded.entry_a * volts);
        self.entry_voltage_v.push(loaded.entry_v.map(|v| v * volts));
        self.end_voltage_v.push(loaded.end_v.map(|v| v * volts));
        self.last_metre_current_a.push(loaded.last_metre_a * volts);
        self.feed_ohm.push(feed_ohm);
        self.swr.push(state.radio_swr);
        self.choke_w.push(choke_ohm.re * choke_a * choke_a);
        self.choke_v.push(choke_ohm.norm() * choke_a);
        self.choke_a.push(choke_a);
        Ok(())
    }
}

impl Answer {
    pub(super) fn of(
        model: &Model,
        variant: &Prepared,
        chokes_ohm: &[Complex64],
        frequency_hz: f64,
        power_w: f64,
    ) -> Result<Self, ChainError> {
        let chain = variant.chain.at(frequency_hz);
        let mut without = Column::with_room(1);
        without.push(&model.without(), &chain, Complex64::ZERO, power_w)?;
        let last_metre = model.last_metre_without();
        let mut chokes = vec![Column::with_room(variant.seats.len()); chokes_ohm.len()];
        for seat in &variant.seats {
            let there = model.excited(&variant.line, seat);
            for (column, choke_ohm) in chokes.iter_mut().zip(chokes_ohm) {
                column.push(&model.loaded(&there, &last_metre, *choke_ohm), &chain, *choke_ohm, power_w)?;
            }
        }
        Ok(Self { without, chokes })
    }
}

/// The answers of all variants and frequencies as arrays; everything else of the outcome is empty.
pub(super) fn arrays(solved: &[Vec<Solved>], chokes: usize) -> PlaceOutcome {
    PlaceOutcome {
        braidwise: String::new(),
        station: String::new(),
        power_w: 0.0,
        limits: LimitsOutcome { entry_current_a: 0.0, swr: 0.0 },
        entry_at_m: 0.0,
        coax_length_m: 0.0,
        joins_m: Vec::new(),
        reachable_m: Vec::new(),
        variants: Vec::new(),
        chokes: Vec::new(),
        frequencies_hz: Vec::new(),
        bands: Vec::new(),
        places_m: Vec::new(),
        without: WithoutOutcome {
            entry_current_a: one(solved, |c| &c.entry_current_a),
            entry_voltage_v: one(solved, |c| &c.entry_voltage_v),
            end_voltage_v: one(solved, |c| &c.end_voltage_v),
            last_metre_current_a: one(solved, |c| &c.last_metre_current_a),
            feed_ohm: one(solved, |c| &c.feed_ohm),
            swr: one(solved, |c| &c.swr),
        },
        entry_current_a: all(solved, chokes, |c| &c.entry_current_a),
        entry_voltage_v: all(solved, chokes, |c| &c.entry_voltage_v),
        end_voltage_v: all(solved, chokes, |c| &c.end_voltage_v),
        last_metre_current_a: all(solved, chokes, |c| &c.last_metre_current_a),
        feed_ohm: all(solved, chokes, |c| &c.feed_ohm),
        swr: all(solved, chokes, |c| &c.swr),
        choke_w: all(solved, chokes, |c| &c.choke_w),
        choke_v: all(solved, chokes, |c| &c.choke_v),
        choke_a: all(solved, chokes, |c| &c.choke_a),
        verdict: PlaceVerdict::NoPlace,
        why: String::new(),
        picks: Vec::new(),
        clamp: Vec::new(),
        warnings: Vec::new(),
        lengths: None,
    }
}

fn one<T: Clone>(solved: &[Vec<Solved>], pick: impl Fn(&Column) -> &Vec<T>) -> OverFrequency<T> {
    solved.iter().map(|v| v.iter().flat_map(|s| pick(&s.answer.without).iter().cloned()).collect()).collect()
}

fn all<T: Clone>(solved: &[Vec<Solved>], chokes: usize, pick: impl Fn(&Column) -> &Vec<T>) -> OverPlace<T> {
    let of =
        |v: &Vec<Solved>| (0..chokes).map(|c| v.iter().map(|s| pick(&s.answer.chokes[c]).clone()).collect()).collect();
    solved.iter().map(of).collect()
}
