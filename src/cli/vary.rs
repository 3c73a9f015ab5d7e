//! `braidwise vary`.

use super::flags::StationArgs;
use super::load::{Loaded, load, set};
use super::progress::interruptible;
use super::stop::Stop;
use crate::layout::{Layout, PartKind};
use crate::outcome::vary::{DEFAULT_WANT, Quantity, VaryOutcome, quantity_names};
use crate::output;
use crate::station::Embedded;
use crate::study::store::{Store, StoreError};
use crate::study::vary::{self, Axis, Plan, Sampling, VaryError};
use clap::Args;
use std::io::Write;
use std::path::PathBuf;

/// Arguments of `vary`.
#[derive(Debug, Args)]
#[command(after_help = quantities())]
pub(super) struct Vary {
    #[command(flatten)]
    station: StationArgs,
    /// A value and what it is to be, e.g. 'coax.length = 5 m .. 25 m by 0.5 m' or 'earth.soil = "bog" | "dry sand"' (repeatable)
    #[arg(long = "over", value_name = "PATH = VALUES", required = true)]
    over: Vec<String>,
    /// A quantity to report, a column each (repeatable); see the list below
    #[arg(long = "want", value_name = "QUANTITY")]
    want: Vec<String>,
    /// Take N points by Latin hypercube instead of every combination
    #[arg(long, value_name = "N")]
    samples: Option<usize>,
    /// Start of the random numbers of --samples; the same seed takes the same points
    #[arg(long, value_name = "S", default_value_t = 1, requires = "samples")]
    seed: u64,
    /// Keep finished points in this file and go on from there next time; without it nothing outlives the run
    #[arg(long, value_name = "FILE")]
    store: Option<PathBuf>,
    /// Write a row a point, variant and frequency as CSV
    #[arg(long, value_name = "FILE")]
    csv: Option<PathBuf>,
    /// Write the same as JSON lines
    #[arg(long, value_name = "FILE")]
    jsonl: Option<PathBuf>,
    /// One JSON document on standard output, nothing else
    #[arg(long)]
    json: bool,
}

fn quantities() -> String {
    let mut text = String::from(
        "A point that cannot be meant or solved is kept with its reason, and the rest go on.\n\
         Rods, bonds and everything protective are given and cannot be varied.\n\n\
         Formats: --csv FILE, a row a point, variant and frequency, a column a quantity; --jsonl FILE, the same rows as JSON\n\
         lines, an object a line; --json, one document with the rows of every point and its \"summary\": each quantity as\n\
         written and at its worst over the variants, with the variant and frequency. With none of them, tables to read.\n\n\
         Quantities for --want, currents and voltages RMS:\n",
    );
    for name in quantity_names() {
        text.push_str(&format!("  {name}\n"));
    }
    text
}

impl Vary {
    pub(super) fn run(&self) -> Result<(), Stop> {
        let loaded = load(&self.station)?;
        let plan = self.plan(&loaded.layout)?;
        let store = self.open()?;
        let (ended, interrupted) =
            interruptible("points", |watch| vary::vary(&loaded.document, &Embedded, &plan, &store, watch));
        let ended = ended?;
        if ended.stopped || interrupted {
            let kept = match &self.store {
                Some(path) => format!("they are in {}, and the same command goes on from there", path.display()),
                None => "they are gone; with --store FILE they are kept".to_owned(),
            };
            let done = ended.there_before + ended.computed;
            return Err(Stop::Interrupted(format!("{done} of {} points are finished; {kept}", ended.points)));
        }
        self.write(&loaded, &plan, &store)
    }

    fn plan(&self, layout: &Layout) -> Result<Plan, Stop> {
        let usage = |e: String| Stop::Usage(e);
        let axes = self.over.iter().map(|text| Axis::read(text)).collect::<Result<Vec<_>, _>>();
        let names = |kind: PartKind| -> Vec<String> {
            layout.parts.iter().filter(|p| p.kind == kind).map(|p| p.name.clone()).collect()
        };
        let (chokes, inline) = (names(PartKind::Choke), names(PartKind::Inline));
        let mut wanted: Vec<String> = self.want.clone();
        if wanted.is_empty() {
            wanted = DEFAULT_WANT.iter().map(|n| (*n).to_owned()).collect();
        }
        let want = wanted.iter().map(|name| Quantity::named(name, &chokes, &inline)).collect::<Result<Vec<_>, _>>();
        let sampling = match self.samples {
            Some(samples) => Sampling::LatinHypercube { samples, seed: self.seed },
            None => Sampling::Grid,
        };
        let plan = Plan {
            axes: axes.map_err(|e| usage(e.to_string()))?,
            sampling,
            want: want.map_err(|e| usage(e.to_string()))?,
        };
        plan.points().map_err(|e| usage(e.to_string()))?;
        Ok(plan)
    }

    fn open(&self) -> Result<Store, Stop> {
        let name = &self.station.file;
        let text =
            std::fs::read_to_string(name).map_err(|e| Stop::Could(format!("cannot read {}: {e}", name.display())))?;
        let sets = self.station.sets.iter().map(|s| set(s)).collect::<Result<Vec<_>, _>>()?;
        let content = vary::content(&text, &sets);
        Ok(match &self.store {
            Some(path) => Store::open(path, &content)?,
            None => Store::in_memory(&content)?,
        })
    }

    fn write(&self, loaded: &Loaded, plan: &Plan, store: &Store) -> Result<(), Stop> {
        let outcome = VaryOutcome {
            braidwise: env!("CARGO_PKG_VERSION").to_owned(),
            station: loaded.layout.title.clone(),
            over: plan.axes.iter().map(|a| a.path.clone()).collect(),
            want: plan.want.iter().map(|q| q.name.clone()).collect(),
            points: vary::collect(plan, store)?,
        };
        if let Some(path) = &self.csv {
            output::whole_file(path, |w| output::vary::csv(&outcome, w))?;
        }
        if let Some(path) = &self.jsonl {
            output::whole_file(path, |w| output::vary::json_lines(&outcome, w))?;
        }
        let text = if self.json {
            serde_json::to_string(&outcome).map_err(|e| Stop::Could(e.to_string()))?
        } else {
            output::vary::table(&outcome)
        };
        writeln!(std::io::stdout().lock(), "{text}")?;
        Ok(())
    }
}

impl From<VaryError> for Stop {
    fn from(error: VaryError) -> Self {
        match error {
            VaryError::Refused(refused) => Stop::Refused(refused),
            VaryError::Points(error) => Stop::Usage(error.to_string()),
            VaryError::Store(error) => error.into(),
        }
    }
}

impl From<StoreError> for Stop {
    fn from(error: StoreError) -> Self {
        match error {
            // the command line names the wrong store
            StoreError::OtherStation { .. } | StoreError::OtherNumerics { .. } | StoreError::NotAStore { .. } => {
                Stop::Usage(error.to_string())
            }
            _ => Stop::Could(error.to_string()),
        }
    }
}
