//! The station file: what the person wrote, in SI units, checked, every value still knowing where it stands.
//!
//! Takes the TOML text of section "The station file" of README and a [`Catalogue`]; gives a [`Station`], or a
//! [`Refused`] with every fault found, each with line, column, reason and mend. The steps: `source` texts and places,
//! `node` the document as a tree, `path`, `change`, `protective` and
//! `variant` values set by path, `raw` the tables as written, `check` the tables as
//! meant. A [`Document`] is the file parsed once, for studies that set values many times.

#[cfg(test)]
mod behaviour;
mod catalogue;
mod change;
mod check;
mod document;
mod node;
mod path;
mod protective;
mod raw;
mod schema;
mod source;
mod types;
mod variant;

pub use catalogue::{Cable, Catalogue, Embedded};
pub use document::Document;
pub use raw::{Coordinates, GRASS_M, Height, PathPoint};
pub use schema::schema;
pub use source::{Fault, Place, Refused, Sources, Written};
pub use types::{
    Coax, Earth, Feed, FeedAt, Law, Limits, Location, Metal, NamedPoint, Operation, Part, PartSort, Radials, Radio,
    Rod, Station, Wire,
};

#[cfg(test)]
pub(crate) use catalogue::double;

impl Station {
    /// Reads a station file, with changes by path applied first: `[("coax.length", "20 ft")]`.
    ///
    /// # Errors
    /// [`Refused`] with every fault found.
    pub fn read(
        text: &str,
        file_name: &str,
        sets: &[(String, String)],
        catalogue: &dyn Catalogue,
    ) -> Result<Station, Refused> {
        Document::parse(text, file_name)?.with(sets)?.station(catalogue)
    }
}

/// The nearest of some names, if any is near enough to have been meant.
pub(crate) fn nearest<'a>(name: &str, known: impl IntoIterator<Item = &'a str>) -> Option<&'a str> {
    let wanted = name.to_lowercase();
    known
        .into_iter()
        .map(|candidate| (strsim::jaro_winkler(&wanted, &candidate.to_lowercase()), candidate))
        .filter(|(score, _)| *score > 0.8)
        .max_by(|a, b| a.0.total_cmp(&b.0))
        .map(|(_, candidate)| candidate)
}

/// "`a`, `b`, `c`".
pub(crate) fn listed<'a>(names: impl IntoIterator<Item = &'a str>) -> String {
    names.into_iter().map(|name| format!("`{name}`")).collect::<Vec<_>>().join(", ")
}

/// "\"a\", \"b\"", at most a dozen.
pub(crate) fn quoted<'a>(names: impl IntoIterator<Item = &'a str>) -> String {
    let all: Vec<String> = names.into_iter().map(|name| format!("\"{name}\"")).collect();
    match all.len() {
        0 => "none".to_owned(),
        1..=12 => all.join(", "),
        n => format!("{} and {} more", all[..12].join(", "), n - 12),
    }
}

/// "did you mean …?", else the list of what there is.
pub(crate) fn offer<'a>(name: &str, known: impl IntoIterator<Item = &'a str> + Clone) -> String {
    match nearest(name, known.clone()) {
        Some(near) => format!("did you mean \"{near}\"?"),
        None => format!("there is {}", quoted(known)),
    }
}
