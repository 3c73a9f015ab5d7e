//! `[feed]`.

use super::{Distance, Length, Node, NodeKind, PathPoint, Ratio, Read, Reader, table};
use crate::quantity;
use crate::station::source::Written;
use schemars::{JsonSchema, Schema, SchemaGenerator, json_schema};
use std::borrow::Cow;

table! {
    /// An ideal transformer.
    RawTransformer as "transformer" {
        /// In impedance, antenna side over radio side: "49:1".
        ratio: Option<Written<Ratio>>,
        /// Instead of the ratio: turns on the radio side, turns on the antenna side.
        turns: Option<Written<Vec<Written<f64>>>>,
    }
}

/// `at`: a point, or with `on` a distance along that conductor.
#[derive(Debug, Clone, PartialEq)]
pub(crate) enum RawFeedAt {
    Point(PathPoint),
    /// A bare number, m.
    Distance(f64),
}

impl RawFeedAt {
    /// As a distance along a conductor, m.
    pub(crate) fn distance_m(&self) -> Option<f64> {
        match self {
            RawFeedAt::Distance(at_m) => Some(*at_m),
            RawFeedAt::Point(PathPoint::Named(text)) => quantity::length_m(text).ok(),
            RawFeedAt::Point(PathPoint::At(_)) => None,
        }
    }
}

impl Read for RawFeedAt {
    fn read(node: &Node, reader: &mut Reader) -> Option<Self> {
        match node.kind {
            NodeKind::Number(_) => Distance::read(node, reader).map(|d| RawFeedAt::Distance(d.0)),
            _ => PathPoint::read(node, reader).map(RawFeedAt::Point),
        }
    }
}

impl JsonSchema for RawFeedAt {
    fn schema_name() -> Cow<'static, str> {
        "FeedAt".into()
    }
    fn json_schema(generator: &mut SchemaGenerator) -> Schema {
        let (point, distance) = (generator.subschema_for::<PathPoint>(), generator.subschema_for::<Distance>());
        json_schema!({ "anyOf": [point, distance] })
    }
}

table! {
    /// The feed point.
    RawFeed as "feed" {
        /// The point; with `on`, a distance along that conductor.
        at: Written<RawFeedAt>,
        /// Instead of a point: the conductor fed part of the way along; hot beyond the gap, cold before it.
        on: Option<Written<String>>,
        /// Conductors on the hot terminal.
        hot: Option<Written<Vec<Written<String>>>>,
        /// Conductors on the cold terminal; "earth" at height 0 over a perfect earth.
        cold: Option<Written<Vec<Written<String>>>>,
        /// Between line and feed point.
        transformer: Option<Written<RawTransformer>>,
        /// Width of the feed gap; default four radii of the thinnest conductor at the feed.
        gap: Option<Written<Length>>,
    }
}
