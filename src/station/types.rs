//! The checked station: plain values in SI, each still knowing where it was written.

use super::raw::{Coordinates, Height, PathPoint};
use super::source::{Sources, Written};

/// What the person wrote, checked table by table and for names that must exist.
#[derive(Debug, Clone)]
pub struct Station {
    /// Title, may be empty.
    pub title: String,
    /// The file's lengths are in feet: show feet first.
    pub in_feet: bool,
    /// Earth.
    pub earth: Written<Earth>,
    /// Named points in file order.
    pub points: Vec<NamedPoint>,
    /// Wires in file order.
    pub wires: Vec<Wire>,
    /// Stars of radials in file order.
    pub radials: Vec<Radials>,
    /// Feed line.
    pub coax: Option<Coax>,
    /// Feed point.
    pub feed: Feed,
    /// Chokes, then inline parts, in file order.
    pub parts: Vec<Part>,
    /// Earth rods.
    pub rods: Vec<Rod>,
    /// Radio.
    pub radio: Radio,
    /// Power and frequencies.
    pub operation: Operation,
    /// Limits for studies.
    pub limits: Limits,
    /// Names of the variants.
    pub variants: Vec<String>,
    /// Legal but doubtful, found while reading: what about, what it does.
    pub doubts: Vec<(String, String)>,
    /// The texts the places refer to.
    pub sources: Sources,
}

/// The earth as given.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Earth {
    /// Free space.
    None,
    /// Ideal conductor.
    Perfect,
    /// Constants that hold at every frequency.
    Soil {
        /// Relative permittivity.
        permittivity: f64,
        /// Conductivity, S/m.
        conductivity_s_per_m: f64,
    },
    /// Longmire–Smith from the conductivity at low frequency, S/m.
    LongmireSmith(f64),
    /// Alipio–Visacro from the conductivity at 100 Hz, S/m.
    AlipioVisacro(f64),
}

/// A named place.
#[derive(Debug, Clone)]
pub struct NamedPoint {
    /// Name.
    pub name: Written<String>,
    /// Where.
    pub location: Location,
}

/// Where a named point is.
#[derive(Debug, Clone)]
pub enum Location {
    /// By coordinates.
    At(Coordinates),
    /// From another point.
    From {
        /// Name of the other point.
        from: Written<String>,
        /// Degrees from north, clockwise.
        bearing_deg: f64,
        /// Horizontal distance, m.
        out_m: f64,
        /// Height; `None` is that of the other point.
        height: Option<Height>,
    },
}

/// The round (or equivalent round) metal of a conductor.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Metal {
    /// Radius, m.
    pub radius_m: f64,
    /// Conductivity, S/m; `None` is perfect.
    pub conductivity_s_per_m: Option<f64>,
    /// Jacket: relative permittivity, thickness m.
    pub jacket: Option<(f64, f64)>,
    /// A safety conductor.
    pub protective: bool,
}

impl Metal {
    /// Radius over the jacket, m.
    #[must_use]
    pub fn outer_radius_m(&self) -> f64 {
        self.radius_m + self.jacket.map_or(0.0, |(_, thickness_m)| thickness_m)
    }
}

/// A wire.
#[derive(Debug, Clone)]
pub struct Wire {
    /// Name.
    pub name: Written<String>,
    /// Path, at least two points.
    pub path: Vec<Written<PathPoint>>,
    /// Where it is cut or carried on to, m.
    pub length_m: Option<Written<f64>>,
    /// Metal.
    pub metal: Metal,
}

/// A star of radials.
#[derive(Debug, Clone)]
pub struct Radials {
    /// Name of the star.
    pub name: Written<String>,
    /// Centre.
    pub at: Written<PathPoint>,
    /// How many.
    pub count: u32,
    /// Length of each, m.
    pub length_m: Written<f64>,
    /// Degrees from north, clockwise.
    pub first_bearing_deg: f64,
    /// Height of the far ends.
    pub height: Option<Written<Height>>,
    /// Metal.
    pub metal: Metal,
}

/// The feed line.
#[derive(Debug, Clone)]
pub struct Coax {
    /// Route from feed point to radio.
    pub path: Vec<Written<PathPoint>>,
    /// Where it enters the shack, where that is said.
    pub entry: Option<Written<PathPoint>>,
    /// Where the line ends, m.
    pub length_m: Option<Written<f64>>,
    /// The shield.
    pub metal: Metal,
    /// Characteristic impedance, ohm.
    pub impedance_ohm: f64,
    /// Velocity factor.
    pub velocity_factor: f64,
    /// Frequency Hz, dB per 100 m.
    pub loss: Vec<(f64, f64)>,
    /// Stretches where a choke could be put, m; empty where not said.
    pub reachable_m: Vec<Written<(f64, f64)>>,
    /// The table, for faults about the line as a whole.
    pub table: Written<()>,
}

/// Where the feed point is.
#[derive(Debug, Clone)]
pub enum FeedAt {
    /// At a point, with conductors on the terminals by name.
    Point(Written<PathPoint>),
    /// Part of the way along a conductor.
    Along {
        /// Its name.
        on: Written<String>,
        /// Distance, m.
        at_m: Written<f64>,
    },
}

/// The feed point.
#[derive(Debug, Clone)]
pub struct Feed {
    /// Where.
    pub at: FeedAt,
    /// Names on the hot terminal; with `Along`, besides the far part of that conductor.
    pub hot: Vec<Written<String>>,
    /// Names on the cold terminal; "earth" among them.
    pub cold: Vec<Written<String>>,
    /// Impedance ratio of the transformer, antenna side over radio side.
    pub impedance_ratio: Option<f64>,
    /// Width of the gap, m.
    pub gap_m: Option<Written<f64>>,
}

/// Choke or inline part.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum PartSort {
    /// `[[choke]]`.
    Choke,
    /// `[[inline]]`.
    Inline,
}

/// What a part is electrically.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Law {
    /// The same at every frequency, ohm.
    Fixed {
        /// Real part.
        resistance_ohm: f64,
        /// Imaginary part.
        reactance_ohm: f64,
    },
    /// All three in parallel.
    ParallelResonant {
        /// Ohm.
        resistance_ohm: f64,
        /// Henry.
        inductance_h: f64,
        /// Farad.
        capacitance_f: f64,
    },
    /// Any of the three.
    Elements {
        /// Ohm.
        resistance_ohm: Option<f64>,
        /// Henry.
        inductance_h: Option<f64>,
        /// Farad.
        capacitance_f: Option<f64>,
        /// In series.
        in_series: bool,
    },
}

/// A choke or an inline part.
#[derive(Debug, Clone)]
pub struct Part {
    /// Name.
    pub name: Written<String>,
    /// Which of the two.
    pub sort: PartSort,
    /// Conductor.
    pub on: Written<String>,
    /// Distance along it, m.
    pub at_m: Written<f64>,
    /// Impedance.
    pub law: Law,
}

/// An earth rod.
#[derive(Debug, Clone)]
pub struct Rod {
    /// Name.
    pub name: Written<String>,
    /// The point above it.
    pub at: Written<PathPoint>,
    /// Below the surface, m.
    pub length_m: Written<f64>,
    /// Metal.
    pub metal: Metal,
}

/// The radio.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Radio {
    /// Reference of the standing-wave ratio, ohm.
    pub impedance_ohm: f64,
    /// Largest side of the case, m; `None` is an ideal open end.
    pub body_m: Option<f64>,
}

/// Power and frequencies.
#[derive(Debug, Clone)]
pub struct Operation {
    /// W.
    pub power_w: f64,
    /// Bands: canonical name, low edge Hz, high edge Hz.
    pub bands: Vec<(String, f64, f64)>,
    /// Single frequencies, Hz.
    pub frequencies_hz: Vec<f64>,
}

/// Limits.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Limits {
    /// A RMS.
    pub entry_current_a: f64,
    /// At the radio.
    pub swr: f64,
}
