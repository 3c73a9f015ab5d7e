//! `[points]`, and points inside paths.

use super::{Angle, Distance, Read, Reader, Take, table};
use crate::quantity;
use crate::station::node::{Node, NodeKind};
use crate::station::source::Written;
use schemars::{JsonSchema, Schema, SchemaGenerator, json_schema};
use std::borrow::Cow;

/// Height of a point.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Height {
    /// Of the axis over the earth's surface, m.
    Metres(f64),
    /// The conductor lies on the earth: its axis is one outer radius up.
    OnGround,
    /// The conductor lies in short grass: its axis is [`GRASS_M`] up.
    OnGrass,
}

/// Axis height of a conductor lying "on grass", m: a thumb's width and a half of stalks (common practice; put a number
/// where it matters, for close to soil every centimetre counts).
pub const GRASS_M: f64 = 0.03;

const HEIGHTS: &str =
    "a height in the file's unit, a length such as \"36 ft\", \"on ground\", \"on grass\" or \"buried 10 cm\"";

impl Read for Height {
    fn read(node: &Node, reader: &mut Reader) -> Option<Self> {
        let Some(text) = node.text() else {
            if !matches!(node.kind, NodeKind::Number(_)) {
                reader.wrong_type(node, HEIGHTS);
                return None;
            }
            return Distance::read(node, reader).map(|d| Height::Metres(d.0));
        };
        let read = match text.trim() {
            "on ground" => return Some(Height::OnGround),
            "on grass" => return Some(Height::OnGrass),
            other => match other.strip_prefix("buried ") {
                Some(depth) => quantity::length_m(depth).map(|depth_m| -depth_m),
                None if other.starts_with(|c: char| c.is_ascii_digit() || "+-.".contains(c)) => {
                    quantity::length_m(other)
                }
                None => {
                    reader.fault(node.place, format!("\"{other}\" is no height"), format!("write {HEIGHTS}"));
                    return None;
                }
            },
        };
        match read {
            Ok(height_m) => Some(Height::Metres(height_m)),
            Err(misread) => {
                reader.fault(node.place, misread.reason, misread.mend);
                None
            }
        }
    }
}

impl JsonSchema for Height {
    fn schema_name() -> Cow<'static, str> {
        "Height".into()
    }
    fn json_schema(_: &mut SchemaGenerator) -> Schema {
        json_schema!({ "type": ["number", "string"], "description": HEIGHTS, "examples": [3, "36 ft", "on ground", "on grass", "buried 10 cm"] })
    }
}

/// East, north, up.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Coordinates {
    /// m.
    pub east_m: f64,
    /// m.
    pub north_m: f64,
    /// Over the earth's surface.
    pub height: Height,
}

impl Read for Coordinates {
    fn read(node: &Node, reader: &mut Reader) -> Option<Self> {
        let [east, north, up] = node.items() else {
            let reason = match node.items().len() {
                0 => format!("{} stands where a point is needed", node.called()),
                n => format!("a point has three coordinates, here {} {n}", if n == 1 { "is" } else { "are" }),
            };
            reader.fault(node.place, reason, "write [east, north, up], for example [0, 19.4, 8.6]");
            return None;
        };
        let (east, north) = (Distance::read(east, reader), Distance::read(north, reader));
        let height = Height::read(up, reader);
        Some(Coordinates { east_m: east?.0, north_m: north?.0, height: height? })
    }
}

fn coordinates_schema(generator: &mut SchemaGenerator) -> Schema {
    let (distance, height) = (generator.subschema_for::<Distance>(), generator.subschema_for::<Height>());
    json_schema!({
        "type": "array", "minItems": 3, "maxItems": 3,
        "prefixItems": [distance.clone(), distance, height],
        "description": "east, north, up; height 0 is the earth's surface"
    })
}

/// A point of a path: a name, or coordinates.
#[derive(Debug, Clone, PartialEq)]
pub enum PathPoint {
    /// Of `[points]`.
    Named(String),
    /// Given on the spot.
    At(Coordinates),
}

impl Read for PathPoint {
    fn read(node: &Node, reader: &mut Reader) -> Option<Self> {
        match node.text() {
            Some(name) => Some(PathPoint::Named(name.to_owned())),
            None => Coordinates::read(node, reader).map(PathPoint::At),
        }
    }
}

impl JsonSchema for PathPoint {
    fn schema_name() -> Cow<'static, str> {
        "PathPoint".into()
    }
    fn json_schema(generator: &mut SchemaGenerator) -> Schema {
        let at = coordinates_schema(generator);
        json_schema!({ "anyOf": [{ "type": "string", "description": "the name of a point" }, at] })
    }
}

table! {
    /// A place reached from another.
    RawBearing as "place from another" {
        /// The point to start from.
        from: Written<String>,
        /// Degrees from north, clockwise.
        bearing: Written<Angle>,
        /// Horizontal distance.
        out: Written<Distance>,
        /// Over the earth's surface; default the height of the point started from.
        height: Option<Written<Height>>,
    }
}

/// Where a named point is.
#[derive(Debug, Clone)]
pub(crate) enum RawLocation {
    At(Coordinates),
    From(RawBearing),
}

impl Read for RawLocation {
    fn read(node: &Node, reader: &mut Reader) -> Option<Self> {
        match node.kind {
            NodeKind::Table(_) => RawBearing::read(node, reader).map(RawLocation::From),
            _ => Coordinates::read(node, reader).map(RawLocation::At),
        }
    }
}

/// All named points, in the order of the file.
#[derive(Debug, Clone, Default)]
pub(crate) struct RawPoints(pub(crate) Vec<(Written<String>, RawLocation)>);

impl Take for RawPoints {
    fn take(table: &Node, key: &str, reader: &mut Reader) -> Option<Self> {
        let Some(node) = table.get(key) else { return Some(RawPoints::default()) };
        if !matches!(node.kind, NodeKind::Table(_)) {
            reader.wrong_type(node, "a table of named points: feed = [0, 0, 3]");
            return Some(RawPoints::default());
        }
        let points = node.entries().iter().filter_map(|entry| {
            let location = RawLocation::read(&entry.value, reader)?;
            Some((Written { value: entry.key.clone(), place: Some(entry.place) }, location))
        });
        Some(RawPoints(points.collect()))
    }
}

impl JsonSchema for RawPoints {
    fn schema_name() -> Cow<'static, str> {
        "points".into()
    }
    fn json_schema(generator: &mut SchemaGenerator) -> Schema {
        let (at, from) = (coordinates_schema(generator), generator.subschema_for::<RawBearing>());
        json_schema!({ "type": "object", "additionalProperties": { "anyOf": [at, from] }, "description": "named places" })
    }
}
