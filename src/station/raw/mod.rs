//! The station file's tables as they are written: each key with its type, read from the document with every fault
//! collected, and turned into the JSON Schema.
//!
//! Takes a [`super::node::Node`]; gives the structs below, quantities already in SI. One file per group of tables.
//! [`table!`] makes the reader and the schema of a table from the same list of keys, so that they cannot differ.

mod conductors;
mod earth;
mod feed;
mod operation;
mod parts;
mod points;
mod scalars;

pub(crate) use conductors::{RawCoax, RawJacket, RawLoss, RawRadials, RawRod, RawWire};
pub(crate) use earth::RawEarth;
pub(crate) use feed::{RawFeed, RawFeedAt, RawTransformer};
pub(crate) use operation::{RawBody, RawLimits, RawOperation, RawRadio, RawStation, RawVariant};
pub(crate) use parts::{RawChoke, RawImpedance, RawInline, RawResonant};
pub use points::{Coordinates, GRASS_M, Height, PathPoint};
pub(crate) use points::{RawLocation, RawPoints};
pub(crate) use scalars::*;

use super::node::{Node, NodeKind};
use super::source::{Fault, Place, Written};
use std::borrow::Cow;

/// Words in keys that ask for what the model does not have.
const OUTSIDE: [&str; 6] = ["slope", "layer", "sheet", "hull", "roof", "terrain"];

/// What a reading carries along.
pub(crate) struct Reader {
    /// Metres in the file's unit of bare lengths.
    pub(crate) unit_m: f64,
    /// Everything found wrong.
    pub(crate) faults: Vec<Fault>,
}

impl Reader {
    pub(crate) fn fault(&mut self, place: Place, reason: impl Into<String>, mend: impl Into<String>) {
        self.faults.push(Fault::new(Some(place), reason, mend));
    }

    fn wrong_type(&mut self, node: &Node, wanted: &str) {
        self.fault(node.place, format!("{} stands here", node.called()), format!("write {wanted}"));
    }

    /// Checks that the node is a table with these keys only.
    fn keys(&mut self, node: &Node, known: &[&str], example: &str) -> bool {
        let NodeKind::Table(entries) = &node.kind else {
            self.wrong_type(node, example);
            return false;
        };
        for entry in entries.iter().filter(|e| !known.contains(&e.key.as_str())) {
            if OUTSIDE.iter().any(|word| entry.key.contains(word)) {
                let reason = format!("`{}`: slopes, layers and sheet metal are outside the model", entry.key);
                self.fault(
                    entry.place,
                    reason,
                    "take the soil that lies within the first metres, level; model a rail, gutter or frame as wires",
                );
                continue;
            }
            let mend = match super::nearest(&entry.key, known.iter().copied()) {
                Some(name) => format!("did you mean `{name}`?"),
                None => format!("the keys here are {}", super::listed(known.iter().copied())),
            };
            self.fault(entry.place, format!("`{}` is not a key of this table", entry.key), mend);
        }
        true
    }
}

/// A type that can be read from a document.
pub(crate) trait Read: Sized {
    /// `None` with at least one fault in the reader when it cannot.
    fn read(node: &Node, reader: &mut Reader) -> Option<Self>;
}

/// A key's value in a table: required, optional, or a list of tables.
pub(crate) trait Take: Sized {
    fn take(table: &Node, key: &str, reader: &mut Reader) -> Option<Self>;
}

impl<T: Read> Take for Written<T> {
    fn take(table: &Node, key: &str, reader: &mut Reader) -> Option<Self> {
        match table.get(key) {
            Some(node) => T::read(node, reader).map(|value| Written { value, place: Some(node.place) }),
            None => {
                let whole_file = table.place.end == 0;
                let (what, mend) = if whole_file {
                    (format!("there is no [{key}]"), format!("add a table [{key}]"))
                } else {
                    (format!("`{key}` is missing here"), format!("add a line `{key} = …`"))
                };
                reader.fault(table.place, what, mend);
                None
            }
        }
    }
}

impl<T: Read> Take for Option<Written<T>> {
    fn take(table: &Node, key: &str, reader: &mut Reader) -> Option<Self> {
        match table.get(key) {
            Some(node) => T::read(node, reader).map(|value| Some(Written { value, place: Some(node.place) })),
            None => Some(None),
        }
    }
}

/// A table the file must have; `None` with its faults collected where it is missing or cannot be read.
#[derive(Debug, Clone)]
pub(crate) struct Needed<T>(pub(crate) Option<Written<T>>);

impl<T: Read> Take for Needed<T> {
    fn take(table: &Node, key: &str, reader: &mut Reader) -> Option<Self> {
        Some(Needed(<Written<T> as Take>::take(table, key, reader)))
    }
}

/// A table or value the file may have; `None` also, with its faults collected, where it cannot be read.
#[derive(Debug, Clone)]
pub(crate) struct Welcome<T>(pub(crate) Option<Written<T>>);

impl<T: Read> Take for Welcome<T> {
    fn take(table: &Node, key: &str, reader: &mut Reader) -> Option<Self> {
        Some(Welcome(<Option<Written<T>> as Take>::take(table, key, reader).flatten()))
    }
}

/// Tables in double brackets; one that cannot be read is left out, with its faults collected.
#[derive(Debug, Clone)]
pub(crate) struct Rows<T>(pub(crate) Vec<Written<T>>);

impl<T: Read> Take for Rows<T> {
    fn take(table: &Node, key: &str, reader: &mut Reader) -> Option<Self> {
        let Some(node) = table.get(key) else { return Some(Rows(Vec::new())) };
        if !matches!(node.kind, NodeKind::List(_)) {
            reader.wrong_type(node, &format!("the table in double brackets, [[{key}]]: there may be several"));
            return Some(Rows(Vec::new()));
        }
        let rows = node
            .items()
            .iter()
            .filter_map(|item| T::read(item, reader).map(|value| Written { value, place: Some(item.place) }));
        Some(Rows(rows.collect()))
    }
}

impl<T: Read> Read for Vec<Written<T>> {
    fn read(node: &Node, reader: &mut Reader) -> Option<Self> {
        if !matches!(node.kind, NodeKind::List(_)) {
            reader.wrong_type(node, "a list in square brackets");
            return None;
        }
        let items: Vec<Option<Written<T>>> = node
            .items()
            .iter()
            .map(|item| T::read(item, reader).map(|value| Written { value, place: Some(item.place) }))
            .collect();
        items.into_iter().collect()
    }
}

/// The schema of what is wrapped.
macro_rules! schema_of_inner {
    ($($wrapper:ident),*) => {$(
        impl<T: schemars::JsonSchema> schemars::JsonSchema for $wrapper<T> {
            fn schema_name() -> Cow<'static, str> {
                T::schema_name()
            }
            fn schema_id() -> Cow<'static, str> {
                T::schema_id()
            }
            fn inline_schema() -> bool {
                T::inline_schema()
            }
            fn json_schema(generator: &mut schemars::SchemaGenerator) -> schemars::Schema {
                T::json_schema(generator)
            }
        }
    )*};
}
schema_of_inner!(Written, Needed, Welcome);

impl<T: schemars::JsonSchema> schemars::JsonSchema for Rows<T> {
    fn schema_name() -> Cow<'static, str> {
        format!("{}_rows", T::schema_name()).into()
    }
    fn inline_schema() -> bool {
        true
    }
    fn json_schema(generator: &mut schemars::SchemaGenerator) -> schemars::Schema {
        schemars::json_schema!({ "type": "array", "items": generator.subschema_for::<T>() })
    }
}

/// A table of the file: the struct, its reader and its schema from one list of keys.
macro_rules! table {
    ($(#[doc = $about:literal])* $name:ident as $title:literal { $($(#[doc = $doc:literal])* $key:ident: $kind:ty,)* }) => {
        $(#[doc = $about])*
        #[derive(Debug, Clone, schemars::JsonSchema)]
        #[schemars(deny_unknown_fields, rename = $title)]
        pub(crate) struct $name { $($(#[doc = $doc])* pub(crate) $key: $kind,)* }

        impl $name {
            /// Every key of this table.
            pub(crate) const KEYS: &'static [&'static str] = &[$(stringify!($key)),*];
        }

        impl $crate::station::raw::Read for $name {
            fn read(node: &$crate::station::node::Node, reader: &mut $crate::station::raw::Reader) -> Option<Self> {
                let example = concat!("a table with the keys ", $("`", stringify!($key), "` ",)*);
                if !reader.keys(node, Self::KEYS, example.trim_end()) {
                    return None;
                }
                $(let $key = <$kind as $crate::station::raw::Take>::take(node, stringify!($key), reader);)*
                Some($name { $($key: $key?,)* })
            }
        }
    };
}
pub(crate) use table;
