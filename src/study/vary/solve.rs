//! Points predicted together: one soil table a frequency and soil, one port model where only parts outside the matrix differ.

use super::Plan;
use crate::interaction::{Extent, Interaction, Surroundings};
use crate::layout::{EarthAt, Layout};
use crate::mesh::{Density, Mesh};
use crate::outcome::vary::{Quantity, VariedRow};
use crate::ports::PortModel;
use crate::station::{Catalogue, Document, Refused};
use crate::study::predict::{At, Ported, SECOND_MESH};
use crate::study::store::{Finished, StoreError};
use crate::study::watch::Watch;
use rayon::prelude::*;
use std::collections::{HashMap, HashSet};
use std::hash::{DefaultHasher, Hash, Hasher};
use std::sync::Arc;

/// Points taken up together, for each thread: enough to keep all busy, few enough that their tables fit in memory.
const POINTS_A_THREAD: usize = 16;

/// The tables of the points at work.
type Tables = HashMap<TableKey, Arc<Surroundings>>;

/// Solved meshes by their geometry.
type Shared = HashMap<String, Arc<Meshed>>;

/// Keeps a finished point.
type Put<'a> = &'a (dyn Fn(&Job, &Finished) -> Result<(), StoreError> + Sync);

/// Everything a run needs.
pub(super) struct Work<'a> {
    pub(super) document: &'a Document,
    pub(super) catalogue: &'a (dyn Catalogue + Sync),
    pub(super) plan: &'a Plan,
    pub(super) points: &'a [Vec<String>],
}

/// A point of the plan with every variant placed, or why it cannot be.
pub(super) struct Job {
    pub(super) point: usize,
    variants: Result<Vec<Variant>, String>,
}

struct Variant {
    name: String,
    layout: Layout,
    geometry: String,
}

/// A frequency and an earth.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
struct TableKey([u64; 4]);

/// A mesh, solved at every frequency of the station, and the ports of the second mesh where that is wanted.
struct Meshed {
    fine: Interaction,
    solved: Vec<(Ported, Option<PortModel>)>,
}

impl TableKey {
    fn new(frequency_hz: f64, earth: EarthAt) -> Self {
        let (kind, permittivity, conductivity) = match earth {
            EarthAt::None => (0, 0.0, 0.0),
            EarthAt::Perfect => (1, 0.0, 0.0),
            EarthAt::Soil { permittivity, conductivity_s_per_m } => (2, permittivity, conductivity_s_per_m),
        };
        Self([frequency_hz.to_bits(), kind, permittivity.to_bits(), conductivity.to_bits()])
    }
}

impl Work<'_> {
    /// Predicts points, by their place in the plan, and hands each to `put` as soon as it is finished.
    pub(super) fn run(&self, missing: Vec<usize>, watch: &dyn Watch, put: Put) -> Result<(), StoreError> {
        // Over all points of the plan, not the missing ones, so that a row does not depend on what was in the store.
        let sketches: Vec<(Option<Extent>, [u64; 2])> =
            (0..self.points.len()).into_par_iter().map(|n| self.job(n).sketch()).collect();
        let Some(extent) = sketches.iter().filter_map(|s| s.0).reduce(Extent::union) else {
            return self.run_batch(missing.iter().map(|n| self.job(*n)).collect(), &Tables::new(), watch, put);
        };
        // Points of one soil stand together, and among them those of one geometry.
        let mut order = missing;
        order.sort_by(|a, b| sketches[*a].1.cmp(&sketches[*b].1).then(a.cmp(b)));
        let mut tables = Tables::new();
        for batch in order.chunks(POINTS_A_THREAD * rayon::current_num_threads()) {
            if watch.stop() {
                break;
            }
            let jobs: Vec<Job> = batch.par_iter().map(|n| self.job(*n)).collect();
            renew(&mut tables, &jobs, &extent);
            self.run_batch(jobs, &tables, watch, put)?;
        }
        Ok(())
    }

    fn run_batch(&self, jobs: Vec<Job>, tables: &Tables, watch: &dyn Watch, put: Put) -> Result<(), StoreError> {
        let groups: Vec<&[Job]> =
            jobs.chunk_by(|a, b| a.geometry().is_some() && a.geometry() == b.geometry()).collect();
        groups.into_par_iter().try_for_each(|group| {
            let mut shared = Shared::new();
            for (n, job) in group.iter().enumerate() {
                if watch.stop() {
                    return Ok(());
                }
                let (finished, solved) = self.predict(job, tables, &shared);
                put(job, &finished)?;
                if finished.failed.is_none() {
                    shared = solved;
                    return group[n + 1..].par_iter().try_for_each(|job| {
                        if watch.stop() { Ok(()) } else { put(job, &self.predict(job, tables, &shared).0) }
                    });
                }
            }
            Ok(())
        })
    }

    /// Places a point in every variant.
    fn job(&self, point: usize) -> Job {
        let place = || -> Result<Vec<Variant>, Refused> {
            let document = self.document.with(&self.plan.sets(&self.points[point]))?;
            let place = |(name, station): (String, crate::station::Station)| match Layout::place(&station) {
                Ok(layout) => Ok(Variant { name, geometry: geometry(&layout), layout }),
                Err(faults) => Err(Refused { sources: station.sources.clone(), faults }.in_variant(&name)),
            };
            document.stations(self.catalogue)?.into_iter().map(place).collect()
        };
        Job { point, variants: place().map_err(|refused| in_words(&refused)) }
    }

    fn predict(&self, job: &Job, tables: &Tables, shared: &Shared) -> (Finished, Shared) {
        let want = self.plan.want();
        let mut solved = Shared::new();
        let mut rows = Vec::new();
        let failed = match &job.variants {
            Err(reason) => Some(reason.clone()),
            Ok(variants) => variants.iter().find_map(|variant| {
                let mesh = match shared.get(&variant.geometry).or(solved.get(&variant.geometry)) {
                    Some(mesh) => Ok(Arc::clone(mesh)),
                    None => self.solve(variant, tables).map(Arc::new),
                };
                let done = mesh.and_then(|mesh| {
                    solved.insert(variant.geometry.clone(), Arc::clone(&mesh));
                    self.rows(variant, tables, &mesh)
                });
                match done {
                    Ok(more) => {
                        rows.extend(more);
                        None
                    }
                    Err(reason) if variants.len() > 1 => Some(format!("variant \"{}\": {reason}", variant.name)),
                    Err(reason) => Some(reason),
                }
            }),
        };
        if failed.is_some() {
            rows.clear();
        }
        (Finished { want, rows, failed }, solved)
    }

    fn solve(&self, variant: &Variant, tables: &Tables) -> Result<Meshed, String> {
        let layout = &variant.layout;
        let highest = layout.operation.frequencies.iter().map(|p| p.frequency_hz).fold(0.0, f64::max);
        if highest <= 0.0 {
            return Err(crate::study::Failure::NoFrequency.to_string());
        }
        let with_image = layout.earth != crate::layout::Earth::None;
        let mesh = |factor| Interaction::new(Mesh::new(layout, highest, Density { factor }, &[]), with_image);
        let default = Density::default().factor;
        let fine = mesh(default);
        let coarse = self.plan.want.iter().any(|q| q.needs_second_mesh()).then(|| mesh(default * SECOND_MESH));
        let models = layout.operation.frequencies.par_iter().map(|point| {
            let at = At::new(layout, point, table(tables, layout, point.frequency_hz)?);
            let solved = at.solve(&fine).map_err(|e| e.to_string())?;
            let second = coarse.as_ref().map(|mesh| at.ports(mesh).map_err(|e| e.to_string())).transpose()?;
            Ok((solved, second))
        });
        let solved = models.collect::<Result<Vec<_>, String>>()?;
        Ok(Meshed { fine, solved })
    }

    fn rows(&self, variant: &Variant, tables: &Tables, meshed: &Meshed) -> Result<Vec<VariedRow>, String> {
        let layout = &variant.layout;
        let points = layout.operation.frequencies.par_iter().zip(&meshed.solved);
        let budget = self.plan.want.iter().any(Quantity::needs_power_budget);
        let rows = points.map(|(point, (solved, second))| {
            let at = At::new(layout, point, table(tables, layout, point.frequency_hz)?);
            let outcome = at.outcome_of(&meshed.fine, solved, second.as_ref(), budget).map_err(|e| e.to_string())?;
            Ok(VariedRow {
                variant: variant.name.clone(),
                frequency_hz: point.frequency_hz,
                band: point.band.clone(),
                edge: point.edge,
                values: self.plan.want.iter().map(|q| q.of(&outcome)).collect(),
            })
        });
        rows.collect()
    }
}

impl Job {
    /// Space taken up, and what points are put in order by: earths, then geometries.
    fn sketch(&self) -> (Option<Extent>, [u64; 2]) {
        let Ok(variants) = &self.variants else { return (None, [0; 2]) };
        let extent = variants.iter().map(|v| Extent::of(&v.layout)).reduce(Extent::union);
        let earths: Vec<_> = variants.iter().map(|v| v.layout.earth).collect();
        // Only to put like beside like: two that hash alike by chance do no harm.
        (extent, [hash(&format!("{earths:?}")), hash(self.geometry().unwrap_or_default())])
    }

    fn geometry(&self) -> Option<&str> {
        self.variants.as_ref().ok().and_then(|v| v.first()).map(|v| v.geometry.as_str())
    }
}

fn hash(text: &str) -> u64 {
    let mut hasher = DefaultHasher::new();
    text.hash(&mut hasher);
    hasher.finish()
}

/// Everything of a layout that the ports at its frequencies depend on, as text.
fn geometry(layout: &Layout) -> String {
    let gaps: Vec<_> = layout.parts.iter().map(|p| (p.conductor, p.from_m, p.to_m)).collect();
    let feed = (&layout.feed.hot, &layout.feed.cold, layout.feed.cold_is_earth, layout.feed.gap_m);
    let frequencies: Vec<_> = layout.operation.frequencies.iter().map(|p| p.frequency_hz).collect();
    let all = (&layout.conductors, &layout.junctions, feed, gaps, layout.earth, frequencies);
    format!("{all:?}")
}

/// Drops tables no point at work needs, builds those that are missing.
fn renew(tables: &mut Tables, jobs: &[Job], extent: &Extent) {
    let mut needed: Vec<(TableKey, f64, EarthAt)> = Vec::new();
    let mut seen = HashSet::new();
    for variant in jobs.iter().filter_map(|j| j.variants.as_ref().ok()).flatten() {
        for point in &variant.layout.operation.frequencies {
            let earth = variant.layout.earth.at(point.frequency_hz);
            let key = TableKey::new(point.frequency_hz, earth);
            if seen.insert(key) {
                needed.push((key, point.frequency_hz, earth));
            }
        }
    }
    tables.retain(|key, _| seen.contains(key));
    let missing: Vec<_> = needed.into_iter().filter(|n| !tables.contains_key(&n.0)).collect();
    // Soil constants that no half-space can have leave no table, and the point says so.
    let built: Vec<_> = missing
        .into_par_iter()
        .filter_map(|(key, f, earth)| Some((key, Arc::new(Surroundings::new(f, earth, extent).ok()?))))
        .collect();
    tables.extend(built);
}

fn table(tables: &Tables, layout: &Layout, frequency_hz: f64) -> Result<Arc<Surroundings>, String> {
    let earth = layout.earth.at(frequency_hz);
    let found = tables.get(&TableKey::new(frequency_hz, earth)).map(Arc::clone);
    found.ok_or_else(|| format!("the soil's constants cannot be at {:.4} MHz: {earth:?}", frequency_hz / 1e6))
}

/// The faults in one line.
fn in_words(refused: &Refused) -> String {
    let faults: Vec<String> = refused.faults.iter().map(|f| format!("{}: {}", f.reason, f.mend)).collect();
    faults.join("; ")
}
