//! Conductors placed in space and joined: what the mesher and the solver need, nothing more.
//!
//! Takes a checked [`crate::station`]; gives a [`Layout`] in metres, with junctions found, lengths cut, rods and
//! radials drawn out as conductors, and every place (feed, choke, inline part, entry) resolved to a
//! distance along a conductor.

#[cfg(test)]
mod behaviour;
mod body;
mod crossings;
mod cut;
mod doubts;
mod earth;
mod heights;
mod joins;
mod parts;
mod place;
mod surface;
mod terminals;

/// The impedance of a lumped part, as data.
pub use crate::station::Law as PartLaw;

use nalgebra::Vector3;

/// A point or direction in space, metres: east, north, up.
pub type Point = Vector3<f64>;

/// One station, placed. Everything downstream (mesh, solver, studies) reads only this.
#[derive(Debug, Clone)]
pub struct Layout {
    /// The station's title.
    pub title: String,
    /// What the earth is; its constants at a frequency come from [`Earth::at`].
    pub earth: Earth,
    /// All conductors: wires, the shield ("coax"), radials, rods, leads to rods, the radio's body.
    pub conductors: Vec<Conductor>,
    /// Where conductor vertices are electrically joined. A vertex belongs to at most one junction.
    pub junctions: Vec<Junction>,
    /// The feed point.
    pub feed: Feed,
    /// The coax, where there is one.
    pub coax: Option<Coax>,
    /// Chokes and inline parts, placed, in file order (chokes first).
    pub parts: Vec<PlacedPart>,
    /// The radio.
    pub radio: Radio,
    /// Power and frequencies.
    pub operation: Operation,
    /// What `place` and `cut` must keep.
    pub limits: Limits,
    /// Things legal but doubtful.
    pub warnings: Vec<Warning>,
}

/// The earth below the station.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Earth {
    /// Free space.
    None,
    /// Ideal conductor at height 0.
    Perfect,
    /// Lossy half-space below height 0.
    Soil(Soil),
}

/// What is known of a soil.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Soil {
    /// Constants that hold at every frequency.
    Constant {
        /// Relative permittivity.
        permittivity: f64,
        /// Conductivity, S/m.
        conductivity_s_per_m: f64,
    },
    /// Longmire–Smith universal soil from one figure: the low-frequency conductivity.
    LongmireSmith {
        /// Conductivity at low frequency, S/m.
        conductivity_s_per_m: f64,
    },
    /// Alipio–Visacro causal model from one figure: the low-frequency conductivity.
    AlipioVisacro {
        /// Conductivity at 100 Hz, S/m.
        conductivity_s_per_m: f64,
    },
}

/// The earth at one frequency.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum EarthAt {
    /// Free space.
    None,
    /// Ideal conductor.
    Perfect,
    /// Lossy half-space with these constants.
    Soil {
        /// Relative permittivity.
        permittivity: f64,
        /// Conductivity, S/m.
        conductivity_s_per_m: f64,
    },
}

/// What part of the station a conductor is.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum ConductorKind {
    /// A `[[wire]]`.
    Wire,
    /// The outside of the coax shield, always named "coax".
    Shield,
    /// One radial of a `[[radials]]` star.
    Radial,
    /// A `[[rod]]`, the straight lead drawn down to it included.
    Rod,
    /// The case of the radio at the end of the shield.
    Body,
}

/// A dielectric jacket.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Jacket {
    /// Relative permittivity.
    pub permittivity: f64,
    /// Thickness, m: the outer radius is the conductor's radius plus this.
    pub thickness_m: f64,
}

/// A conductor as a polyline.
#[derive(Debug, Clone)]
pub struct Conductor {
    /// Unique name.
    pub name: String,
    /// What it is.
    pub kind: ConductorKind,
    /// Vertices, at least two, metres. Includes both ends, every bend, every junction, the feed point, and a vertex at height 0 wherever
    /// it passes through the surface of soil. Joined vertices have bit-identical coordinates.
    pub points: Vec<Point>,
    /// Radius of the metal, m.
    pub radius_m: f64,
    /// Conductivity of the metal, S/m; `None` is a perfect conductor.
    pub conductivity_s_per_m: Option<f64>,
    /// Dielectric jacket.
    pub jacket: Option<Jacket>,
    /// A safety conductor: never varied, never a choice.
    pub protective: bool,
}

/// Conductor vertices joined to each other, to a perfect earth, or both.
#[derive(Debug, Clone)]
pub struct Junction {
    /// Where.
    pub position: Point,
    /// (conductor index, vertex index) of every vertex joined here.
    pub members: Vec<(usize, usize)>,
    /// Bonded to the perfect earth at height 0 (never set over soil or in free space).
    pub to_earth: bool,
}

/// A leg leaving the feed point.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct FeedLeg {
    /// Index of the conductor.
    pub conductor: usize,
    /// Vertex of the feed point on it.
    pub vertex: usize,
    /// True when the leg runs towards higher vertex numbers.
    pub forward: bool,
}

/// The feed point: one junction at which the hot legs begin with the gap.
#[derive(Debug, Clone)]
pub struct Feed {
    /// Where.
    pub position: Point,
    /// Legs on the hot terminal; the first `gap_m` of each is the feed gap, all at the same voltage.
    pub hot: Vec<FeedLeg>,
    /// Legs on the cold terminal.
    pub cold: Vec<FeedLeg>,
    /// The cold terminal is (also) the perfect earth.
    pub cold_is_earth: bool,
    /// Width of the gap, m.
    pub gap_m: f64,
    /// Impedance ratio of the ideal transformer, antenna side over radio side (49.0 for "49:1"); `None` without one.
    pub impedance_ratio: Option<f64>,
}

/// The feed line, inside and along.
#[derive(Debug, Clone)]
pub struct Coax {
    /// Index of the shield among the conductors.
    pub conductor: usize,
    /// Distance of the shack entry from the feed end, m. What counts is the radio side of everything joined there.
    pub entry_m: f64,
    /// Whole length, m.
    pub length_m: f64,
    /// Line data of the inside.
    pub line: LineData,
    /// Stretches where a hand can reach the line to put a choke on, m from the feed end; empty: all of it.
    pub reachable_m: Vec<(f64, f64)>,
}

/// The inside of the coax as data.
#[derive(Debug, Clone, PartialEq)]
pub struct LineData {
    /// Nominal characteristic impedance, ohm.
    pub impedance_ohm: f64,
    /// Velocity factor.
    pub velocity_factor: f64,
    /// Loss points: (frequency Hz, dB per 100 m), at least one; fitted to k1·√f + k2·f by the network.
    pub loss: Vec<(f64, f64)>,
}

/// Whether a part is a choke or an inline part.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum PartKind {
    /// A `[[choke]]`.
    Choke,
    /// An `[[inline]]` part.
    Inline,
}

/// A choke or an inline part in its place.
#[derive(Debug, Clone)]
pub struct PlacedPart {
    /// Name.
    pub name: String,
    /// Choke or inline.
    pub kind: PartKind,
    /// Index of the conductor it sits on.
    pub conductor: usize,
    /// Its place: distance along the conductor, m.
    pub at_m: f64,
    /// Start of its gap, m along the conductor.
    pub from_m: f64,
    /// End of its gap, m along the conductor.
    pub to_m: f64,
    /// Its impedance.
    pub law: PartLaw,
}

/// The radio.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Radio {
    /// Reference for standing-wave ratio, ohm.
    pub impedance_ohm: f64,
    /// Index of the body conductor, where there is one.
    pub body: Option<usize>,
}

/// Power and frequencies.
#[derive(Debug, Clone)]
pub struct Operation {
    /// Net power into the line at the radio end, W.
    pub power_w: f64,
    /// Frequencies in file order: bands first, then single frequencies.
    pub frequencies: Vec<FrequencyPoint>,
}

/// One frequency and why it is asked for.
#[derive(Debug, Clone, PartialEq)]
pub struct FrequencyPoint {
    /// Hz.
    pub frequency_hz: f64,
    /// Band name as in the catalogue ("40 m").
    pub band: Option<String>,
    /// Where in the band.
    pub edge: Option<BandEdge>,
}

/// Where in a band a frequency lies.
#[derive(Debug, Clone, Copy, PartialEq, Eq, serde::Serialize, serde::Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum BandEdge {
    /// Low edge.
    Low,
    /// Middle.
    Middle,
    /// High edge.
    High,
}

/// What `place` and `cut` must keep.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Limits {
    /// Largest current that may enter the shack on the shield, A RMS.
    pub entry_current_a: f64,
    /// Largest standing-wave ratio at the radio.
    pub swr: f64,
}

/// Something legal but doubtful, computed all the same.
#[derive(Debug, Clone, PartialEq, serde::Serialize, serde::Deserialize)]
pub struct Warning {
    /// What it is about (a table or conductor of the file).
    pub about: String,
    /// What it does to the numbers, and the mend.
    pub message: String,
}

impl Conductor {
    /// Distances of the vertices from the first one, m; same length as `points`.
    #[must_use]
    pub fn distances_m(&self) -> Vec<f64> {
        let mut total = 0.0;
        let mut out = vec![0.0];
        for pair in self.points.windows(2) {
            total += (pair[1] - pair[0]).norm();
            out.push(total);
        }
        out
    }

    /// Whole length, m.
    #[must_use]
    pub fn length_m(&self) -> f64 {
        self.points.windows(2).map(|p| (p[1] - p[0]).norm()).sum()
    }

    /// Radius over the jacket, m.
    #[must_use]
    pub fn outer_radius_m(&self) -> f64 {
        self.radius_m + self.jacket.map_or(0.0, |j| j.thickness_m)
    }
}
