//! Many lengths for the price of a few: what their meshes have in common is filled and factored once.
//!
//! Lengths that end on the same leg of the route make a family. The longest one's matrix, ordered from what all share outward along
//! the scanned conductor, is factored once; each shorter one is a leading block of it bordered by the elements near its
//! own end. Every answer is checked by its residual; where that is not small, or meshes do not nest, the length is solved alone.

use super::CutFailure;
use super::radiation::Radiation;
use super::reading::{Reading, Spots};
use super::scan::{At, Scan, Variant, finish, singular, solve};
use crate::interaction::{Added, Bordered, Interaction, Leading, Seen};
use crate::layout::{Earth, Layout};
use crate::mesh::{Element, Mesh};
use crate::ports::{PortModel, excitations};
use faer::Mat;
use nalgebra::DMatrix;
use num_complex::Complex64;
use rayon::prelude::*;
use std::collections::HashMap;
use std::hash::{BuildHasherDefault, Hasher};

/// Largest residual, relative to the right side, of an answer that stands.
const MOST_RESIDUAL: f64 = 1e-9;
/// A family of fewer lengths than this is solved one by one.
const LEAST_FAMILY: usize = 3;

/// One combination of lengths, placed and meshed.
struct Placed {
    index: usize,
    layout: Layout,
    mesh: Mesh,
}

/// An unknown by the elements it lives on and how, mixed into one number.
type UnknownKey = u64;

/// A length split into what it shares and its border.
struct Border {
    placed: Placed,
    is_new: Vec<bool>,
    places: Vec<usize>,
    leading: usize,
    /// The longest one's element that is the same, for every element.
    twins: Vec<Option<usize>>,
}

/// A length as a leading block and a border.
struct Member {
    border: Border,
    added: Added,
    /// What decides how each run is seen.
    keys: Vec<Vec<i64>>,
}

/// How far out the longest length with the same leading block reaches on each scanned conductor, so that all draw the same run.
struct Reach(HashMap<(usize, usize, i64), f64>);

impl Reach {
    fn key(leading: usize, conductor: usize, from_m: f64) -> (usize, usize, i64) {
        (leading, conductor, (from_m * 1e7).round() as i64)
    }

    fn of(borders: &[Border], moving: &[usize]) -> Self {
        let mut out = HashMap::new();
        for border in borders {
            let mesh = &border.placed.mesh;
            for &conductor in moving {
                let mut range = mesh.conductor_elements[conductor].clone();
                let Some(last) = range.clone().next_back() else { continue };
                // the run that ends at the moving end begins with the first new element on its leg
                let on_leg = |k: &usize| {
                    border.is_new[*k] && mesh.elements[*k].tangent.dot(&mesh.elements[last].tangent) > 1.0 - 1e-12
                };
                let Some(first) = range.find(on_leg) else { continue };
                let key = Self::key(border.leading, conductor, mesh.elements[first].from_m);
                let to_m: &mut f64 = out.entry(key).or_insert(0.0);
                *to_m = to_m.max(mesh.elements[last].to_m);
            }
        }
        Self(out)
    }

    fn to_m(&self, leading: usize, conductor: usize, from_m: f64) -> f64 {
        self.0.get(&Self::key(leading, conductor, from_m)).copied().unwrap_or(0.0)
    }
}

/// Lengths that share a factorisation.
struct Family {
    layout: Layout,
    shortest: Layout,
    moving: Vec<usize>,
    interaction: Interaction,
    /// Unknown of the longest for every place.
    order: Vec<usize>,
    members: Vec<Member>,
}

/// Readings `[combination][frequency]`.
///
/// # Errors
/// [`CutFailure`] of the first length that cannot be solved.
pub(super) fn readings(
    scan: &Scan,
    variant: &Variant,
    combinations: &[Vec<f64>],
) -> Result<Vec<Vec<Reading>>, CutFailure> {
    let placed = combinations
        .par_iter()
        .enumerate()
        .map(|(index, lengths_m)| {
            let layout = scan.place(variant, lengths_m)?;
            let mesh = scan.mesh(&layout);
            Ok(Placed { index, layout, mesh })
        })
        .collect::<Result<Vec<_>, CutFailure>>()?;
    let mut groups: HashMap<Vec<u64>, Vec<Placed>> = HashMap::new();
    for one in placed {
        let key = kind(&one.layout, &combinations[one.index]);
        groups.entry(key).or_default().push(one);
    }
    let mut groups: Vec<Vec<Placed>> = groups.into_values().collect();
    groups.sort_by_key(|g| g.first().map_or(0, |p| p.index));
    let mut done: Vec<(usize, Vec<Reading>)> = Vec::new();
    for group in groups {
        let (family, alone) = Family::of(scan, group, &variant.earth);
        let rest = alone.par_iter().map(|p| Ok((p.index, p.alone(&variant.earth)?)));
        done.extend(rest.collect::<Result<Vec<_>, CutFailure>>()?);
        if let Some(family) = family {
            done.extend(family.readings(&variant.earth)?);
        }
    }
    done.sort_by_key(|d| d.0);
    Ok(done.into_iter().map(|d| d.1).collect())
}

/// Lengths of one kind may nest: as many vertices everywhere, and any second length the same.
fn kind(layout: &Layout, lengths_m: &[f64]) -> Vec<u64> {
    let vertices = layout.conductors.iter().map(|c| c.points.len() as u64);
    vertices.chain(lengths_m.iter().skip(1).map(|l| l.to_bits())).collect()
}

impl Placed {
    fn alone(&self, earths: &[At]) -> Result<Vec<Reading>, CutFailure> {
        let interaction = Interaction::new(self.mesh.clone(), self.layout.earth != Earth::None);
        earths.par_iter().map(|at| solve(&self.layout, &interaction, at)).collect()
    }
}

/// An element by where it lies, so that it is recognised in the mesh of another length, mixed into one number.
fn element_key(e: &Element) -> u64 {
    let fine = |x: f64| (x * 1e7).round() as i64 as u64;
    let at = [e.from_m, e.to_m, e.start.x, e.start.y, e.start.z, e.end.x, e.end.y, e.end.z];
    let first = mixed((e.conductor as u64) << 8 | e.degree as u64);
    at.into_iter().fold(first, |key, x| mixed(key ^ fine(x)))
}

/// A map by numbers that are spread over 64 bits already.
type Mixed<T> = HashMap<u64, T, BuildHasherDefault<Plain>>;

/// Takes a number as its own hash.
#[derive(Debug, Default)]
struct Plain(u64);

impl Hasher for Plain {
    fn finish(&self) -> u64 {
        self.0
    }

    fn write(&mut self, bytes: &[u8]) {
        bytes.iter().for_each(|b| self.0 = mixed(self.0 ^ u64::from(*b)));
    }

    fn write_u64(&mut self, value: u64) {
        self.0 = value;
    }
}

/// For every unknown of a mesh: its key, and its level (`None` where it lives on an element that has none).
fn unknown_keys(mesh: &Mesh, ids: &[usize], levels: &[Option<usize>]) -> Vec<(UnknownKey, Option<usize>)> {
    let mut out = vec![(0_u64, Some(0)); mesh.unknowns];
    for (element, id) in mesh.elements.iter().zip(ids) {
        let level = levels[*id];
        element.each_unknown(|unknown, factors| {
            let how = factors.iter().fold(0_u64, |code, f| code * 16 + (4.0 * f + 8.0) as u64);
            let (key, highest) = &mut out[unknown];
            // a sum, so that the order of the elements does not matter
            *key = key.wrapping_add(mixed((*id as u64) << 20 | how));
            *highest = highest.zip(level).map(|(a, b)| a.max(b));
        });
    }
    out
}

/// A number spread over 64 bits (the finaliser of SplitMix64; Steele, Lea and Flood, OOPSLA 2014, from memory).
fn mixed(x: u64) -> u64 {
    let x = x.wrapping_add(0x9e37_79b9_7f4a_7c15);
    let x = (x ^ (x >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
    let x = (x ^ (x >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
    x ^ (x >> 31)
}

impl Family {
    /// The lengths of a group that nest, and the others.
    fn of(scan: &Scan, mut group: Vec<Placed>, earths: &[At]) -> (Option<Self>, Vec<Placed>) {
        if group.len() < LEAST_FAMILY || earths.is_empty() {
            return (None, group);
        }
        group.sort_by_key(|p| p.index);
        let mut known: Mixed<usize> = Mixed::default();
        let ids: Vec<Vec<usize>> = group
            .iter()
            .map(|p| {
                let id = |e: &Element| {
                    let next = known.len();
                    *known.entry(element_key(e)).or_insert(next)
                };
                p.mesh.elements.iter().map(id).collect()
            })
            .collect();
        let mut count = vec![0_usize; known.len()];
        for id in ids.iter().flatten() {
            count[*id] += 1;
        }
        let master = group.len() - 1;
        let levels = levels(&group[master].mesh, &ids[master], &count, group.len());
        let master_keys = unknown_keys(&group[master].mesh, &ids[master], &levels);
        let mut order: Vec<(usize, usize)> =
            master_keys.iter().enumerate().filter_map(|(u, (_, level))| Some(((*level)?, u))).collect();
        order.sort_unstable();
        let places: Mixed<(usize, usize)> =
            order.iter().enumerate().map(|(place, &(level, u))| (master_keys[u].0, (level, place))).collect();
        let with_image = group[master].layout.earth != Earth::None;
        let layout = group[master].layout.clone();
        let shortest = group[0].layout.clone();
        let moving = scan.moving(&layout);
        let interaction = Interaction::new(group[master].mesh.clone(), with_image);
        let statics = interaction.statics();
        let common: Common = (&levels, &order, &places);
        let mut twins = vec![None; known.len()];
        ids[master].iter().enumerate().for_each(|(k, id)| twins[*id] = Some(k));
        let split: Vec<Result<Border, Box<Placed>>> =
            group.into_iter().zip(&ids).map(|(placed, ids)| Border::new(placed, ids, common, &twins)).collect();
        let (mut borders, mut alone) = (Vec::new(), Vec::new());
        for one in split {
            match one {
                Ok(border) => borders.push(border),
                Err(placed) => alone.push(*placed),
            }
        }
        let reach = Reach::of(&borders, &moving);
        let members = borders
            .into_par_iter()
            .map(|border| {
                let added = Added::new(
                    &border.placed.mesh,
                    &border.is_new,
                    (&border.places, border.leading),
                    (with_image, &statics),
                    |conductor, from_m| reach.to_m(border.leading, conductor, from_m),
                );
                let keys = (0..added.runs()).map(|run| added.run_key(&border.placed.mesh, run)).collect();
                Member { border, added, keys }
            })
            .collect();
        let order = order.iter().map(|o| o.1).collect();
        (Some(Self { layout, shortest, moving, interaction, order, members }), alone)
    }

    fn readings(&self, earths: &[At]) -> Result<Vec<(usize, Vec<Reading>)>, CutFailure> {
        let by_frequency =
            earths.par_iter().map(|at| self.at(at)).collect::<Result<Vec<Vec<Reading>>, CutFailure>>()?;
        let of = |m: usize| by_frequency.iter().map(|row| row[m]).collect();
        Ok(self.members.iter().enumerate().map(|(m, member)| (member.border.placed.index, of(m))).collect())
    }

    /// All members at one frequency.
    fn at(&self, at: &At) -> Result<Vec<Reading>, CutFailure> {
        let earth = &at.earth;
        let mesh = self.interaction.mesh();
        let spots = Spots::of_potential(Spots::of(&self.layout, mesh, earth.frequency_hz()).as_ref());
        let (z, rows) = self.interaction.fill_probed(earth, &spots);
        let n = self.order.len();
        let common = Leading::new(Mat::from_fn(n, n, |i, j| z[(self.order[i], self.order[j])]));
        let rows: Vec<Vec<Complex64>> = rows.iter().map(|row| self.order.iter().map(|&u| row[u]).collect()).collect();
        let radiation = Radiation::new((&self.layout, mesh), &self.shortest, &self.moving, &at.sphere);
        let seen = self.seen(at);
        self.members
            .par_iter()
            .map(|member| match &common {
                Ok(common) => member.solve((common, &rows, &radiation), &seen, at),
                Err(_) => member.alone(at),
            })
            .collect()
    }
}

impl Family {
    /// What several members see alike, at one frequency.
    fn seen(&self, at: &At) -> HashMap<&[i64], Seen> {
        let mut users: HashMap<&[i64], (usize, &Member, usize)> = HashMap::new();
        for member in &self.members {
            for (run, key) in member.keys.iter().enumerate() {
                users.entry(key.as_slice()).or_insert((0, member, run)).0 += 1;
            }
        }
        let several: Vec<_> = users.into_iter().filter(|(_, (count, ..))| *count > 1).collect();
        several
            .into_par_iter()
            .map(|(key, (_, member, run))| {
                let Placed { layout, mesh, .. } = &member.border.placed;
                let spots = Spots::of_potential(Spots::of(layout, mesh, at.earth.frequency_hz()).as_ref());
                (key, member.added.seen(mesh, run, &at.earth, &spots))
            })
            .collect()
    }
}

/// How far out along the scanned conductors each shared element of the longest lies: 0 where all lengths have it.
fn levels(mesh: &Mesh, ids: &[usize], count: &[usize], members: usize) -> Vec<Option<usize>> {
    let mut out = vec![None; count.len()];
    let mut outward: Vec<(f64, usize)> = Vec::new();
    for (element, &id) in mesh.elements.iter().zip(ids) {
        match count[id] {
            n if n == members => out[id] = Some(0),
            1 => {}
            _ => outward.push((element.from_m, id)),
        }
    }
    outward.sort_by(|a, b| a.0.total_cmp(&b.0));
    let mut level = 0;
    let mut last_m = f64::NEG_INFINITY;
    for (from_m, id) in outward {
        if from_m > last_m + 1e-6 {
            level += 1;
            last_m = from_m;
        }
        out[id] = Some(level);
    }
    out
}

/// Levels of elements, places of the longest's unknowns in order with their levels, and the places by unknown.
type Common<'a> = (&'a [Option<usize>], &'a [(usize, usize)], &'a Mixed<(usize, usize)>);

impl Border {
    /// A length against the common part; given back where it does not nest.
    fn new(
        placed: Placed,
        ids: &[usize],
        (levels, order, known): Common,
        twins: &[Option<usize>],
    ) -> Result<Self, Box<Placed>> {
        let mut here = vec![false; levels.len()];
        ids.iter().for_each(|id| here[*id] = true);
        // the outermost level up to which every element is here
        let missing = levels.iter().zip(&here).filter(|(_, here)| !**here).filter_map(|(level, _)| *level).min();
        let below = missing.unwrap_or(usize::MAX);
        let mut is_new: Vec<bool> = ids.iter().map(|id| levels[*id].is_none_or(|level| level >= below)).collect();
        let leading = order.partition_point(|(level, _)| *level < below);
        let keys = unknown_keys(&placed.mesh, ids, levels);
        let mut places = vec![usize::MAX; keys.len()];
        let mut found = 0;
        let mut further = leading;
        for (unknown, (key, _)) in keys.iter().enumerate() {
            match known.get(key) {
                Some((level, place)) if *level < below => {
                    places[unknown] = *place;
                    found += 1;
                }
                _ => {
                    places[unknown] = further;
                    further += 1;
                }
            }
        }
        if found != leading || leading == 0 {
            return Err(Box::new(placed));
        }
        for (k, element) in placed.mesh.elements.iter().enumerate() {
            element.each_unknown(|u, _| is_new[k] |= places[u] >= leading);
        }
        let twins = ids.iter().map(|id| twins[*id]).collect();
        Ok(Self { placed, is_new, places, leading, twins })
    }
}

impl Member {
    fn alone(&self, at: &At) -> Result<Reading, CutFailure> {
        let layout = &self.border.placed.layout;
        solve(layout, &Interaction::new(self.border.placed.mesh.clone(), layout.earth != Earth::None), at)
    }

    /// As a leading block of the common factors with its own border.
    fn solve(
        &self,
        (common, common_rows, radiation): (&Leading, &[Vec<Complex64>], &Radiation),
        shared: &HashMap<&[i64], Seen>,
        at: &At,
    ) -> Result<Reading, CutFailure> {
        let earth = &at.earth;
        let Border { placed: Placed { layout, mesh, .. }, is_new, places, leading, twins } = &self.border;
        let spots = Spots::of(layout, mesh, earth.frequency_hz());
        let wanted = Spots::of_potential(spots.as_ref());
        let own: Vec<Option<Seen>> = (0..self.keys.len())
            .map(|run| match shared.get(self.keys[run].as_slice()) {
                Some(_) => None,
                None => Some(self.added.seen(mesh, run, earth, &wanted)),
            })
            .collect();
        let seen: Vec<&Seen> = own
            .iter()
            .zip(&self.keys)
            .filter_map(|(own, key)| own.as_ref().or_else(|| shared.get(key.as_slice())))
            .collect();
        let border = self.added.columns(mesh, earth, &wanted, &seen);
        let excite = excitations(mesh);
        let ports = excite.ncols();
        let mut right = Mat::zeros(mesh.unknowns, ports);
        for (unknown, &place) in places.iter().enumerate() {
            for port in 0..ports {
                right[(place, port)] = excite[(unknown, port)];
            }
        }
        let system = Bordered { leading: *leading, columns: &border.columns, corner: &border.corner };
        let (x, residual) = common.solve(system, &right).map_err(|source| singular(earth, source))?;
        if residual > MOST_RESIDUAL {
            return self.alone(at);
        }
        let currents_a = Mat::from_fn(mesh.unknowns, ports, |u, port| x[(places[u], port)]);
        let admittance_s = DMatrix::from_fn(ports, ports, |i, j| {
            (0..mesh.unknowns).map(|k| excite[(k, i)] * currents_a[(k, j)]).sum()
        });
        let model = PortModel { admittance_s, currents_a };
        let rows: Vec<Vec<Complex64>> = wanted
            .iter()
            .zip(&border.potentials)
            .zip(common_rows)
            .map(|((spot, own), common)| {
                let known = !is_new[spot.element];
                let at = |place: usize| if known && place < *leading { common[place] } else { own[place] };
                places.iter().map(|&place| at(place)).collect()
            })
            .collect();
        finish(layout, mesh, at, (&model, spots, &rows, Some((radiation, twins))))
    }
}
