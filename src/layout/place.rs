//! The order in which a station is placed.

use super::{Coax, Conductor, ConductorKind, Earth, Jacket, Junction, Layout, LineData, Point, Soil, Warning};
use crate::station::{self, Fault, Metal, PathPoint, Place, Station, Written};

/// Vertices nearer than this are one point, m.
pub(super) const JOIN_M: f64 = 1e-3;

/// A vertex with the point it was written as.
#[derive(Debug, Clone)]
pub(super) struct Vertex {
    pub(super) at: Point,
    pub(super) name: Option<String>,
    pub(super) place: Option<Place>,
}

/// A conductor being placed.
#[derive(Debug, Clone)]
pub(super) struct Draft {
    pub(super) name: String,
    pub(super) kind: ConductorKind,
    pub(super) vertices: Vec<Vertex>,
    pub(super) metal: Metal,
    pub(super) length_m: Option<Written<f64>>,
    pub(super) place: Option<Place>,
}

impl Draft {
    pub(super) fn last(&self) -> usize {
        self.vertices.len() - 1
    }

    pub(super) fn at(&self, vertex: usize) -> Point {
        self.vertices[vertex].at
    }

    /// Distances of the vertices from the first, m.
    pub(super) fn distances_m(&self) -> Vec<f64> {
        let mut total = 0.0;
        let mut out = vec![0.0];
        for pair in self.vertices.windows(2) {
            total += (pair[1].at - pair[0].at).norm();
            out.push(total);
        }
        out
    }

    pub(super) fn length_now_m(&self) -> f64 {
        self.vertices.windows(2).map(|p| (p[1].at - p[0].at).norm()).sum()
    }

    /// The name as it stands in messages: the coax is no name but a thing.
    pub(super) fn called(&self) -> String {
        if self.kind == ConductorKind::Shield { "the coax".to_owned() } else { format!("\"{}\"", self.name) }
    }
}

/// A station half placed.
pub(super) struct Placing<'a> {
    pub(super) station: &'a Station,
    pub(super) drafts: Vec<Draft>,
    /// Tops of the rods, in file order.
    pub(super) rod_tops: Vec<Point>,
    /// The feed point, where it is given as a point.
    pub(super) feed_point: Option<Point>,
    pub(super) junctions: Vec<Junction>,
    pub(super) faults: Vec<Fault>,
    pub(super) warnings: Vec<Warning>,
}

impl Placing<'_> {
    pub(super) fn fault(&mut self, place: Option<Place>, reason: impl Into<String>, mend: impl Into<String>) {
        self.faults.push(Fault::new(place, reason, mend));
    }

    pub(super) fn warn(&mut self, about: impl Into<String>, message: impl Into<String>) {
        self.warnings.push(Warning { about: about.into(), message: message.into() });
    }

    pub(super) fn named(&self, name: &str) -> Option<usize> {
        self.drafts.iter().position(|d| d.name == name)
    }

    pub(super) fn shield(&self) -> Option<usize> {
        self.drafts.iter().position(|d| d.kind == ConductorKind::Shield)
    }

    /// The junction a vertex belongs to.
    pub(super) fn junction_of(&self, conductor: usize, vertex: usize) -> Option<&Junction> {
        self.junctions.iter().find(|j| j.members.contains(&(conductor, vertex)))
    }

    /// Ends this step: what follows would stand on sand.
    fn settled(&mut self) -> Result<(), Vec<Fault>> {
        if self.faults.is_empty() {
            return Ok(());
        }
        let mut faults = std::mem::take(&mut self.faults);
        faults.sort_by_key(|f| f.place.map(|p| (p.source, p.start)));
        faults.dedup();
        Err(faults)
    }
}

impl Layout {
    /// Places a checked station: points resolved, lengths cut, conductors joined, feed and parts put in their places.
    ///
    /// # Errors
    /// Every fault found up to the first step the next one cannot do without; never empty.
    pub fn place(station: &Station) -> Result<Layout, Vec<Fault>> {
        let mut placing = Placing {
            station,
            drafts: Vec::new(),
            rod_tops: Vec::new(),
            feed_point: None,
            junctions: Vec::new(),
            faults: Vec::new(),
            warnings: station
                .doubts
                .iter()
                .map(|(about, message)| Warning { about: about.clone(), message: message.clone() })
                .collect(),
        };
        placing.draw();
        placing.settled()?;
        placing.cut();
        placing.settled()?;
        placing.drive_rods();
        placing.part_at_surface();
        let along = placing.vertex_along();
        placing.settled()?;
        placing.join();
        let feed = placing.feed(along);
        placing.settled()?;
        let feed = feed.ok_or_else(Vec::new)?;
        let body = placing.body(&feed);
        placing.meet_earth(&feed);
        placing.judge_crossings(&feed);
        let parts = placing.parts(&feed);
        let coax = placing.line(body);
        placing.doubts(&feed);
        placing.settled()?;
        Ok(placing.finish(feed, coax, parts, body))
    }
}

impl Placing<'_> {
    /// Where the coax enters, and the data of its inside.
    fn line(&mut self, body: Option<usize>) -> Option<Coax> {
        let conductor = self.shield()?;
        let coax = self.station.coax.as_ref()?;
        let entry = self.entry_vertex(conductor, coax)?;
        let distances = self.drafts[conductor].distances_m();
        let (entry_m, length_m) = (distances[entry], *distances.last()?);
        let ends_joined = self.junction_of(conductor, self.drafts[conductor].last()).is_some();
        if entry == self.drafts[conductor].last() && (body.is_some() || !ends_joined) {
            self.warn(
                "coax",
                "nothing is modelled beyond the entry, so the current into the shack reads zero whatever it would be: \
                 carry the path on to the radio, at least 1.5 m past the entry",
            );
        }
        for (from_m, to_m) in coax.reachable_m.iter().map(|r| r.value) {
            if from_m > length_m {
                self.warn("coax", format!("the reachable stretch {from_m:.2} to {to_m:.2} m lies beyond the coax, which is {length_m:.2} m long"));
            }
        }
        let line = LineData {
            impedance_ohm: coax.impedance_ohm,
            velocity_factor: coax.velocity_factor,
            loss: coax.loss.clone(),
        };
        let reachable_m = coax.reachable_m.iter().map(|r| r.value).collect();
        Some(Coax { conductor, entry_m, length_m, line, reachable_m })
    }

    fn entry_vertex(&mut self, conductor: usize, coax: &station::Coax) -> Option<usize> {
        let draft = &self.drafts[conductor];
        let Some(entry) = &coax.entry else {
            return Some(
                draft.vertices.iter().rposition(|v| v.name.as_deref() == Some("entry")).unwrap_or(draft.last()),
            );
        };
        let found = match &entry.value {
            PathPoint::Named(name) => {
                let cut_away = || coax.path.last().is_some_and(|p| p.value == entry.value).then_some(draft.last());
                draft.vertices.iter().rposition(|v| v.name.as_ref() == Some(name)).or_else(cut_away)
            }
            PathPoint::At(_) => {
                let at = self.resolve(&entry.value, None)?;
                self.drafts[conductor].vertices.iter().rposition(|v| (v.at - at).norm() <= JOIN_M)
            }
        };
        if found.is_none() {
            self.fault(
                entry.place,
                "the entry is not a point of the coax's path",
                "put it into coax.path, or name one that is there",
            );
        }
        found
    }

    fn finish(
        self,
        feed: super::Feed,
        coax: Option<Coax>,
        parts: Vec<super::PlacedPart>,
        body: Option<usize>,
    ) -> Layout {
        let station = self.station;
        Layout {
            title: station.title.clone(),
            earth: earth(station.earth.value),
            conductors: self.drafts.into_iter().map(conductor).collect(),
            junctions: self.junctions,
            feed,
            coax,
            parts,
            radio: super::Radio { impedance_ohm: station.radio.impedance_ohm, body },
            operation: operation(&station.operation),
            limits: super::Limits { entry_current_a: station.limits.entry_current_a, swr: station.limits.swr },
            warnings: self.warnings,
        }
    }
}

fn conductor(draft: Draft) -> Conductor {
    Conductor {
        name: draft.name,
        kind: draft.kind,
        points: draft.vertices.into_iter().map(|v| v.at).collect(),
        radius_m: draft.metal.radius_m,
        conductivity_s_per_m: draft.metal.conductivity_s_per_m,
        jacket: draft.metal.jacket.map(|(permittivity, thickness_m)| Jacket { permittivity, thickness_m }),
        protective: draft.metal.protective,
    }
}

fn earth(earth: station::Earth) -> Earth {
    match earth {
        station::Earth::None => Earth::None,
        station::Earth::Perfect => Earth::Perfect,
        station::Earth::Soil { permittivity, conductivity_s_per_m } => {
            Earth::Soil(Soil::Constant { permittivity, conductivity_s_per_m })
        }
        station::Earth::LongmireSmith(conductivity_s_per_m) => {
            Earth::Soil(Soil::LongmireSmith { conductivity_s_per_m })
        }
        station::Earth::AlipioVisacro(conductivity_s_per_m) => {
            Earth::Soil(Soil::AlipioVisacro { conductivity_s_per_m })
        }
    }
}

fn operation(operation: &station::Operation) -> super::Operation {
    use super::{BandEdge, FrequencyPoint};
    let in_band = operation.bands.iter().flat_map(|(name, low_hz, high_hz)| {
        [(*low_hz, BandEdge::Low), (0.5 * (low_hz + high_hz), BandEdge::Middle), (*high_hz, BandEdge::High)]
            .map(|(frequency_hz, edge)| FrequencyPoint { frequency_hz, band: Some(name.clone()), edge: Some(edge) })
    });
    let single = operation.frequencies_hz.iter().map(|f| FrequencyPoint { frequency_hz: *f, band: None, edge: None });
    super::Operation { power_w: operation.power_w, frequencies: in_band.chain(single).collect() }
}
