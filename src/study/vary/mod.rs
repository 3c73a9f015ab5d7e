//! Any values of the station file, varied together: a grid or a Latin hypercube of points, each predicted.
//!
//! Takes a parsed [`Document`], a [`Plan`] and a [`Store`]; fills the store, point by point, and gives the
//! [`VariedPoint`]s in the order of the plan. `axis` reads one value's range, `sample` makes the points, `solve` predicts a point
//! over shared soil tables and, where only parts outside the matrix differ, over a shared port model. Points that are in
//! the store are not computed again; points that cannot be meant are kept with the reason.

mod axis;
mod sample;
mod solve;

pub use axis::{Axis, AxisError, MOST_POINTS, Values};
pub use sample::{SampleError, Sampling};

use super::store::{Finished, Store, StoreError};
use super::watch::Watch;
use crate::outcome::vary::{Quantity, VariedPoint, VariedSummary};
use crate::station::{Catalogue, Document, Refused};
use serde_json::Value;
use solve::{Job, Work};
use std::sync::atomic::{AtomicUsize, Ordering};

/// What is varied, how, and what is wanted of it.
#[derive(Debug, Clone)]
pub struct Plan {
    /// The values.
    pub axes: Vec<Axis>,
    /// The points.
    pub sampling: Sampling,
    /// The columns.
    pub want: Vec<Quantity>,
}

/// How a run ended.
#[derive(Debug, Clone, PartialEq)]
pub struct Ended {
    /// Points asked for.
    pub points: usize,
    /// Of these, in the store before.
    pub there_before: usize,
    /// Of these, computed now, the failed ones among them.
    pub computed: usize,
    /// True where it was stopped before the last point.
    pub stopped: bool,
}

/// Why nothing, or nothing more, could be varied.
#[derive(Debug, thiserror::Error)]
pub enum VaryError {
    /// The points cannot be made.
    #[error(transparent)]
    Points(#[from] SampleError),
    /// A path that names nothing, a protective part, or two values that contradict.
    #[error(transparent)]
    Refused(#[from] Refused),
    /// The store.
    #[error(transparent)]
    Store(#[from] StoreError),
}

/// The content by which a store knows its station: the file's tables as written, comments and title left out, with the
/// changes made to it.
///
/// # Inputs
/// - `text`: the file, legal TOML
/// - `sets`: changes by path, in order
#[must_use]
pub fn content(text: &str, sets: &[(String, String)]) -> Value {
    let mut station: Value = toml::from_str(text).unwrap_or_else(|_| Value::from(text));
    if let Some(tables) = station.as_object_mut() {
        tables.remove("title");
        if !sets.is_empty() {
            let changes = sets.iter().map(|(path, value)| Value::from(format!("{path}={value}")));
            tables.insert("changes".to_owned(), changes.collect());
        }
    }
    station
}

impl Plan {
    /// Every point, each the values of the axes in their order.
    ///
    /// # Errors
    /// [`SampleError`].
    pub fn points(&self) -> Result<Vec<Vec<String>>, SampleError> {
        sample::points(&self.axes, self.sampling)
    }

    fn want(&self) -> Vec<String> {
        self.want.iter().map(|q| q.name.clone()).collect()
    }

    fn sets(&self, values: &[String]) -> Vec<(String, String)> {
        self.axes.iter().map(|a| a.path.clone()).zip(values.iter().cloned()).collect()
    }

    /// The name of a point in a store, the same whatever the order of the axes.
    fn key(&self, values: &[String]) -> String {
        let mut lines: Vec<String> = self.axes.iter().zip(values).map(|(a, v)| format!("{} = {v}", a.path)).collect();
        lines.sort();
        lines.join("\n")
    }
}

/// Computes every point of a plan that is not in the store.
///
/// The rows do not depend on how many threads there are, on the order of work, or on what was in the store.
///
/// # Errors
/// [`VaryError`]; points finished before stay in the store. A point that cannot be meant or solved is no error.
pub fn vary(
    document: &Document,
    catalogue: &(dyn Catalogue + Sync),
    plan: &Plan,
    store: &Store,
    watch: &dyn Watch,
) -> Result<Ended, VaryError> {
    let points = plan.points()?;
    check_paths(document, plan, &points)?;
    let want = plan.want();
    let mut missing = Vec::new();
    for (n, values) in points.iter().enumerate() {
        if store.get(&plan.key(values), &want)?.is_none() {
            missing.push(n);
        }
    }
    let there_before = points.len() - missing.len();
    watch.begins(points.len(), there_before);
    let computed = AtomicUsize::new(0);
    if !missing.is_empty() {
        let put = |job: &Job, finished: &Finished| {
            store.put(&plan.key(&points[job.point]), finished)?;
            computed.fetch_add(1, Ordering::Relaxed);
            watch.step_done();
            Ok(())
        };
        Work { document, catalogue, plan, points: &points }.run(missing, watch, &put)?;
    }
    let computed = computed.into_inner();
    Ok(Ended { points: points.len(), there_before, computed, stopped: there_before + computed < points.len() })
}

/// The points of a plan that are in the store, in the plan's order.
///
/// # Errors
/// [`VaryError`].
pub fn collect(plan: &Plan, store: &Store) -> Result<Vec<VariedPoint>, VaryError> {
    let want = plan.want();
    let mut out = Vec::new();
    for values in plan.points()? {
        if let Some(Finished { rows, failed, .. }) = store.get(&plan.key(&values), &want)? {
            let summary = VariedSummary::of(&plan.want, &rows);
            out.push(VariedPoint { values, rows, failed, summary });
        }
    }
    Ok(out)
}

/// Refuses paths that name nothing, protective parts and contradictions before anything is computed.
fn check_paths(document: &Document, plan: &Plan, points: &[Vec<String>]) -> Result<(), Refused> {
    let Some(first) = points.first() else { return Ok(()) };
    let mut refused: Option<Refused> = None;
    for set in plan.sets(first) {
        if let Err(more) = document.with(std::slice::from_ref(&set)) {
            match &mut refused {
                // The places of later faults refer to other texts than those of the first.
                Some(all) => {
                    all.faults.extend(more.faults.into_iter().map(|f| crate::station::Fault { place: None, ..f }))
                }
                None => refused = Some(more),
            }
        }
    }
    if let Some(refused) = refused {
        return Err(refused);
    }
    document.with(&plan.sets(first)).map(|_| ())
}
