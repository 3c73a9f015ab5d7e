//! `[[wire]]`, `[[radials]]`, `[coax]` and `[[rod]]`.

use super::{
    Angle, Conductivity, Decibel, Distance, Fraction, Frequency, Height, Length, PathPoint, Read, Reader, Resistance,
    WireSize, table,
};
use crate::station::node::{Node, NodeKind};
use crate::station::source::Written;
use schemars::{JsonSchema, Schema, SchemaGenerator};
use std::borrow::Cow;

/// A list of stretches, each a list of its own: from and to.
type StretchList = Vec<Written<Vec<Written<Distance>>>>;

/// Stretches along a conductor.
#[derive(Debug, Clone)]
pub(crate) struct RawStretches(pub(crate) StretchList);

impl Read for RawStretches {
    fn read(node: &Node, reader: &mut Reader) -> Option<Self> {
        let bare = node.items().iter().find(|item| !matches!(item.kind, NodeKind::List(_)));
        if matches!(node.kind, NodeKind::List(_)) && bare.is_none() {
            return StretchList::read(node, reader).map(RawStretches);
        }
        let stands = bare.map_or_else(|| node.called(), Node::called);
        let reason = format!("{stands} stands where a stretch in square brackets of its own is wanted");
        reader.fault(
            node.place,
            reason,
            "write each stretch, from and to, in brackets inside the list: [[\"1 ft\", \"7 ft\"]]",
        );
        None
    }
}

impl JsonSchema for RawStretches {
    fn schema_name() -> Cow<'static, str> {
        StretchList::schema_name()
    }
    fn inline_schema() -> bool {
        true
    }
    fn json_schema(generator: &mut SchemaGenerator) -> Schema {
        StretchList::json_schema(generator)
    }
}

table! {
    /// A dielectric jacket.
    RawJacket as "jacket" {
        /// Relative permittivity: 2.3 for polyethylene, about 3 for PVC.
        permittivity: Written<f64>,
        /// Wall thickness.
        thickness: Written<Length>,
    }
}

table! {
    /// Any bare or jacketed conductor: radiator, counterpoise, mast, down-lead, earth lead.
    RawWire as "wire" {
        /// What it is called.
        name: Option<Written<String>>,
        /// Point names or coordinates, from first to last.
        path: Written<Vec<Written<PathPoint>>>,
        /// Cut the path there, or carry its last leg straight on to it.
        length: Option<Written<Distance>>,
        /// Of the metal.
        diameter: Option<Written<WireSize>>,
        /// Instead of the diameter: "14 AWG" or a cross-section.
        gauge: Option<Written<WireSize>>,
        /// Instead of the diameter: of a flat strap, equivalent radius a quarter of it.
        width: Option<Written<Length>>,
        /// A catalogue name, default copper; "perfect" for none of its loss.
        metal: Option<Written<String>>,
        /// Instead of the metal.
        conductivity: Option<Written<Conductivity>>,
        /// A dielectric jacket.
        jacket: Option<Written<RawJacket>>,
        /// A safety conductor: never varied, never a choice.
        protective: Option<Written<bool>>,
    }
}

table! {
    /// A star of equal straight wires from a point.
    RawRadials as "radials" {
        /// What the star is called; its wires are "NAME 1", "NAME 2" and so on.
        name: Option<Written<String>>,
        /// The point they leave from.
        at: Written<PathPoint>,
        /// How many.
        count: Written<u32>,
        /// Of each.
        length: Written<Distance>,
        /// Degrees from north, clockwise; default 0.
        first_bearing: Option<Written<Angle>>,
        /// Of the far ends; default that of the point. "on ground", "on grass" and "buried …" lie at it from near the point on.
        height: Option<Written<Height>>,
        /// Of the metal.
        diameter: Option<Written<WireSize>>,
        /// Instead of the diameter: "14 AWG" or a cross-section.
        gauge: Option<Written<WireSize>>,
        /// Instead of the diameter: of a flat strap.
        width: Option<Written<Length>>,
        /// A catalogue name, default copper; "perfect" for none of its loss.
        metal: Option<Written<String>>,
        /// Instead of the metal.
        conductivity: Option<Written<Conductivity>>,
        /// A dielectric jacket.
        jacket: Option<Written<RawJacket>>,
        /// A safety conductor: never varied, never a choice.
        protective: Option<Written<bool>>,
    }
}

table! {
    /// One point of a cable's loss.
    RawLoss as "loss" {
        /// Frequency.
        at: Written<Frequency>,
        /// Loss of 100 m.
        per_100m: Written<Decibel>,
    }
}

table! {
    /// The feed line; the outside of its shield is a conductor of the antenna.
    RawCoax as "coax" {
        /// A catalogue name; what is given beside it replaces the catalogue's.
        cable: Option<Written<String>>,
        /// Of the outside of the shield, instead of a cable.
        shield_diameter: Option<Written<Length>>,
        /// Over the jacket, where nothing else is known: the shield is estimated from it.
        outside_diameter: Option<Written<Length>>,
        /// The outer jacket.
        jacket: Option<Written<RawJacket>>,
        /// Characteristic impedance of the inside.
        impedance: Option<Written<Resistance>>,
        /// Velocity factor of the inside.
        velocity_factor: Option<Written<Fraction>>,
        /// Loss of the inside.
        loss: Option<Written<Vec<Written<RawLoss>>>>,
        /// The route, from feed point to radio.
        path: Written<Vec<Written<PathPoint>>>,
        /// The point of the route where it enters the shack; default a vertex named "entry", else its end.
        entry: Option<Written<PathPoint>>,
        /// The line ends there, and the radio with it.
        length: Option<Written<Distance>>,
        /// Stretches along the coax, from and to, where a choke could be put.
        reachable: Option<Written<RawStretches>>,
    }
}

table! {
    /// A driven earth rod.
    RawRod as "rod" {
        /// What it is called.
        name: Option<Written<String>>,
        /// The point under which it is driven.
        at: Written<PathPoint>,
        /// Below the surface.
        length: Written<Distance>,
        /// Of the rod.
        diameter: Written<Length>,
        /// A catalogue name, default steel where the catalogue has it, else copper.
        metal: Option<Written<String>>,
        /// Instead of the metal.
        conductivity: Option<Written<Conductivity>>,
    }
}
