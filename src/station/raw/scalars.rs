//! Single values: quantities with units, numbers, words.

use super::{Read, Reader};
use crate::quantity::{self, Misread};
use crate::station::node::{Node, NodeKind};
use schemars::{JsonSchema, Schema, SchemaGenerator, json_schema};
use std::borrow::Cow;

impl Read for String {
    fn read(node: &Node, reader: &mut Reader) -> Option<Self> {
        let text = node.text().map(str::to_owned);
        if text.is_none() {
            reader.wrong_type(node, "a text in quotation marks");
        }
        text
    }
}

impl Read for bool {
    fn read(node: &Node, reader: &mut Reader) -> Option<Self> {
        if let NodeKind::Flag(flag) = node.kind {
            return Some(flag);
        }
        reader.wrong_type(node, "true or false, without quotation marks");
        None
    }
}

fn number(node: &Node, reader: &mut Reader, wanted: &str) -> Option<f64> {
    match node.kind {
        NodeKind::Number(number) if number.is_finite() => Some(number),
        NodeKind::Number(_) => {
            reader.fault(node.place, "this number is not finite", format!("write {wanted}"));
            None
        }
        _ => {
            reader.wrong_type(node, wanted);
            None
        }
    }
}

impl Read for f64 {
    fn read(node: &Node, reader: &mut Reader) -> Option<Self> {
        number(node, reader, "a plain number, without quotation marks and unit")
    }
}

impl Read for u32 {
    fn read(node: &Node, reader: &mut Reader) -> Option<Self> {
        let value = number(node, reader, "a whole number")?;
        if value.fract() != 0.0 || !(0.0..=1e6).contains(&value) {
            reader.fault(node.place, "this is not a whole number from 0 to a million", "write a whole number");
            return None;
        }
        Some(value as u32) // whole and in range by the line above
    }
}

/// A text read as a quantity, its misreading turned into a fault.
pub(super) fn quantity_of(
    node: &Node,
    reader: &mut Reader,
    parse: fn(&str) -> Result<f64, Misread>,
    wanted: &str,
) -> Option<f64> {
    let Some(text) = node.text() else {
        let reason = match node.kind {
            NodeKind::Number(_) => "a bare number stands where a unit is needed".to_owned(),
            _ => format!("{} stands here", node.called()),
        };
        reader.fault(node.place, reason, format!("write {wanted}"));
        return None;
    };
    match parse(text) {
        Ok(value) => Some(value),
        Err(misread) => {
            reader.fault(node.place, misread.reason, misread.mend);
            None
        }
    }
}

/// Newtypes over f64 in SI, read from a text with a unit.
macro_rules! quantities {
    ($($(#[doc = $doc:literal])* $name:ident = $parse:path, $what:literal, $example:literal;)*) => {$(
        $(#[doc = $doc])*
        #[derive(Debug, Clone, Copy, PartialEq)]
        pub(crate) struct $name(pub(crate) f64);

        impl Read for $name {
            fn read(node: &Node, reader: &mut Reader) -> Option<Self> {
                quantity_of(node, reader, $parse, concat!($what, " with its unit: \"", $example, "\"")).map($name)
            }
        }

        impl JsonSchema for $name {
            fn schema_name() -> Cow<'static, str> {
                stringify!($name).into()
            }
            fn json_schema(_: &mut SchemaGenerator) -> Schema {
                json_schema!({ "type": "string", "description": concat!($what, " with its unit"), "examples": [$example] })
            }
        }
    )*};
}

quantities! {
    /// A thickness or width, m.
    Length = quantity::length_m, "a length", "0.8 mm";
    /// A wire's diameter, m, also from a gauge or a cross-section.
    WireSize = quantity::wire_diameter_m, "a diameter, gauge or cross-section", "1.6 mm";
    /// Hz.
    Frequency = quantity::frequency_hz, "a frequency", "7.1 MHz";
    /// W.
    Power = quantity::power_w, "a power", "100 W";
    /// Ohm.
    Resistance = quantity::resistance_ohm, "a resistance", "2.45 kohm";
    /// S/m.
    Conductivity = quantity::conductivity_s_per_m, "a conductivity", "5 mS/m";
    /// F.
    Capacitance = quantity::capacitance_f, "a capacitance", "120 pF";
    /// H.
    Inductance = quantity::inductance_h, "an inductance", "3.3 uH";
    /// A.
    Current = quantity::current_a, "a current", "20 mA";
    /// dB.
    Decibel = quantity::decibel, "a loss", "4.6 dB";
}

/// Newtypes over f64 read from a bare number or from a text with a unit.
macro_rules! bare_or_text {
    ($($(#[doc = $doc:literal])* $name:ident = $parse:path, $wanted:literal, $scale:expr;)*) => {$(
        $(#[doc = $doc])*
        #[derive(Debug, Clone, Copy, PartialEq)]
        pub(crate) struct $name(pub(crate) f64);

        impl Read for $name {
            fn read(node: &Node, reader: &mut Reader) -> Option<Self> {
                let scale: fn(&Reader) -> f64 = $scale;
                match node.kind {
                    NodeKind::Text(_) => quantity_of(node, reader, $parse, $wanted).map($name),
                    _ => number(node, reader, $wanted).map(|n| $name(n * scale(reader))),
                }
            }
        }

        impl JsonSchema for $name {
            fn schema_name() -> Cow<'static, str> {
                stringify!($name).into()
            }
            fn json_schema(_: &mut SchemaGenerator) -> Schema {
                json_schema!({ "type": ["number", "string"], "description": $wanted })
            }
        }
    )*};
}

bare_or_text! {
    /// A distance, length or coordinate, m; bare numbers are in the file's unit.
    Distance = quantity::length_m, "a number in the file's unit, or a length with its unit such as \"41 ft\"", |r| r.unit_m;
    /// Degrees.
    Angle = quantity::degrees, "an angle in degrees", |_| 1.0;
    /// A share of one.
    Fraction = quantity::fraction, "a share, 0.66 or \"66 %\"", |_| 1.0;
    /// Antenna side over radio side.
    Ratio = quantity::ratio, "an impedance ratio such as \"49:1\", the antenna side first", |_| 1.0;
}

/// A choice of words.
macro_rules! words {
    ($($(#[doc = $doc:literal])* $name:ident { $($variant:ident = $word:literal,)* })*) => {$(
        $(#[doc = $doc])*
        #[derive(Debug, Clone, Copy, PartialEq, Eq, JsonSchema)]
        pub(crate) enum $name { $(#[schemars(rename = $word)] $variant,)* }

        impl Read for $name {
            fn read(node: &Node, reader: &mut Reader) -> Option<Self> {
                const WORDS: &[&str] = &[$($word),*];
                let choices = crate::station::quoted(WORDS.iter().copied());
                match node.text() {
                    $(Some($word) => Some($name::$variant),)*
                    Some(other) => {
                        let mend = match crate::station::nearest(other, WORDS.iter().copied()) {
                            Some(word) => format!("did you mean \"{word}\"? The choices are {choices}"),
                            None => format!("the choices are {choices}"),
                        };
                        reader.fault(node.place, format!("\"{other}\" is not a choice here"), mend);
                        None
                    }
                    None => {
                        reader.wrong_type(node, &format!("one of {choices}"));
                        None
                    }
                }
            }
        }
    )*};
}

words! {
    /// The unit of bare lengths.
    LengthUnit { Metre = "m", Foot = "ft", }
    /// What the earth is.
    EarthKind { Soil = "soil", Perfect = "perfect", None = "none", }
    /// A published soil model that needs one figure.
    Dispersion { LongmireSmith = "longmire-smith", AlipioVisacro = "alipio-visacro", }
    /// How the elements of an inline part go together.
    Elements { Series = "in series", Parallel = "in parallel", }
}
