//! `[radio]`, `[operation]`, `[limits]`, `[[variant]]` and the file as a whole.

use super::{
    Current, Frequency, LengthUnit, Needed, Node, NodeKind, Power, RawChoke, RawCoax, RawEarth, RawFeed, RawInline,
    RawPoints, RawRadials, RawRod, RawWire, Read, Reader, Resistance, Rows, Welcome, table,
};
use crate::quantity;
use crate::station::node::Entry;
use crate::station::source::Written;
use schemars::{JsonSchema, Schema, SchemaGenerator, json_schema};
use std::borrow::Cow;

/// The radio's case.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(crate) enum RawBody {
    /// Ideal open end.
    None,
    /// Largest side, m.
    Side(f64),
}

impl Read for RawBody {
    fn read(node: &Node, reader: &mut Reader) -> Option<Self> {
        if node.text() == Some("none") {
            return Some(RawBody::None);
        }
        super::scalars::quantity_of(node, reader, quantity::length_m, "the largest side such as \"0.3 m\", or \"none\"")
            .map(RawBody::Side)
    }
}

impl JsonSchema for RawBody {
    fn schema_name() -> Cow<'static, str> {
        "Body".into()
    }
    fn json_schema(_: &mut SchemaGenerator) -> Schema {
        json_schema!({ "type": "string", "description": "the largest side of the case, or \"none\"", "examples": ["0.3 m", "none"] })
    }
}

table! {
    /// The radio.
    RawRadio as "radio" {
        /// Reference of the standing-wave ratio, default 50 ohm.
        impedance: Option<Written<Resistance>>,
        /// Largest side of the case at the end of the shield, default 0.3 m; "none" for an ideal open end.
        body: Option<Written<RawBody>>,
    }
}

table! {
    /// Power and frequencies.
    RawOperation as "operation" {
        /// Net power into the line at the radio end, carrier or peak envelope; default 100 W.
        power: Option<Written<Power>>,
        /// ITU region, needed with bands: 1 Europe, Africa, Middle East; 2 Americas; 3 Asia-Pacific.
        region: Option<Written<u32>>,
        /// Each gives its low edge, middle and high edge.
        bands: Option<Written<Vec<Written<String>>>>,
        /// Single frequencies.
        frequencies: Option<Written<Vec<Written<Frequency>>>>,
    }
}

table! {
    /// What `place` and `cut` must keep.
    RawLimits as "limits" {
        /// Largest current on the shield into the shack, default 20 mA.
        entry_current: Option<Written<Current>>,
        /// Largest standing-wave ratio at the radio, default 2.
        swr: Option<Written<f64>>,
    }
}

/// `set` of a variant: paths and values, applied to the document before it is read.
#[derive(Debug, Clone)]
pub(crate) struct RawSettings(pub(crate) Vec<Entry>);

impl Read for RawSettings {
    fn read(node: &Node, reader: &mut Reader) -> Option<Self> {
        if !matches!(node.kind, NodeKind::Table(_)) {
            reader.wrong_type(node, "a table of paths and values: { \"earth.soil\" = \"wet meadow\" }");
            return None;
        }
        Some(RawSettings(node.entries().to_vec()))
    }
}

impl JsonSchema for RawSettings {
    fn schema_name() -> Cow<'static, str> {
        "set".into()
    }
    fn json_schema(_: &mut SchemaGenerator) -> Schema {
        json_schema!({ "type": "object", "description": "paths of values (\"points.foot.up\") and what they become" })
    }
}

table! {
    /// An uncertainty the answer must survive: wet or dry, lifted or lying.
    RawVariant as "variant" {
        /// What it is called.
        name: Written<String>,
        /// Paths of values and what they become.
        set: Option<Written<RawSettings>>,
        /// Paths of tables left out: ["wire.earth lead"].
        without: Option<Written<Vec<Written<String>>>>,
    }
}

table! {
    /// One station.
    RawStation as "station" {
        /// What the station is called.
        title: Welcome<String>,
        /// Of bare lengths, "m" (default) or "ft".
        unit: Welcome<LengthUnit>,
        /// The earth below the station.
        earth: Needed<RawEarth>,
        /// Named places.
        points: RawPoints,
        /// Bare or jacketed conductors.
        wire: Rows<RawWire>,
        /// Stars of equal wires.
        radials: Rows<RawRadials>,
        /// The feed line.
        coax: Welcome<RawCoax>,
        /// The feed point.
        feed: Needed<RawFeed>,
        /// Common-mode chokes.
        choke: Rows<RawChoke>,
        /// Lumped parts in conductors.
        inline: Rows<RawInline>,
        /// Driven earth rods.
        rod: Rows<RawRod>,
        /// The radio.
        radio: Welcome<RawRadio>,
        /// Power and frequencies.
        operation: Needed<RawOperation>,
        /// What `place` and `cut` must keep.
        limits: Welcome<RawLimits>,
        /// Uncertainties the answer must survive.
        variant: Rows<RawVariant>,
    }
}
