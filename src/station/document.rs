//! The file parsed once, changed by path as often as a study likes.

use super::catalogue::Catalogue;
use super::node::{self, Node};
use super::source::{Place, Refused, Sources};
use super::types::Station;
use super::{change, check, path, protective, variant};

/// A parsed station file. Cloning and changing it is cheap against solving anything.
#[derive(Debug, Clone)]
pub struct Document {
    pub(super) sources: Sources,
    pub(super) root: Node,
}

impl Document {
    /// Parses the text; the tables are read by [`Document::station`].
    ///
    /// # Errors
    /// [`Refused`] with the syntax faults.
    pub fn parse(text: &str, file_name: &str) -> Result<Document, Refused> {
        let sources = Sources::file(file_name, text);
        match node::document(text) {
            Ok(root) => Ok(Document { sources, root }),
            Err(faults) => Err(Refused { sources, faults }),
        }
    }

    /// Reads and checks the tables.
    ///
    /// # Errors
    /// [`Refused`] with every fault found.
    pub fn station(&self, catalogue: &dyn Catalogue) -> Result<Station, Refused> {
        check::station(&self.root, &self.sources, catalogue)
            .map_err(|faults| Refused { sources: self.sources.clone(), faults })
    }

    /// This document with changes by path, each checked: a path must name something, and no protective part.
    ///
    /// # Errors
    /// [`Refused`] with a fault for each change that cannot be made.
    pub fn with(&self, sets: &[(String, String)]) -> Result<Document, Refused> {
        let mut changed = self.clone();
        change::apply(&mut changed, sets)?;
        Ok(changed)
    }

    /// Why the value a path names must not be varied or compared as a choice; `None` where it may be.
    ///
    /// # Errors
    /// [`Refused`] where the path names nothing.
    pub fn protective(&self, path: &str) -> Result<Option<String>, Refused> {
        let mut sources = self.sources.clone();
        let source = sources.add("path", path.to_owned());
        let place = Place { source, start: 0, end: u32::try_from(path.len()).unwrap_or(u32::MAX) };
        match path::target(&self.root, path, place) {
            Ok(target) => Ok(protective::reason(&self.root, &target)),
            Err(fault) => Err(Refused { sources, faults: vec![fault] }),
        }
    }

    /// Names of the variants in file order, "nominal" not among them.
    #[must_use]
    pub fn variant_names(&self) -> Vec<String> {
        check::row_names(&self.root, "variant").into_iter().map(|(name, _)| name).collect()
    }

    /// The document of a variant; "nominal" is the file as written.
    ///
    /// # Errors
    /// [`Refused`] where there is no such variant or it cannot be made.
    pub fn variant(&self, name: &str) -> Result<Document, Refused> {
        variant::document(self, name)
    }

    /// The station as written under the name "nominal", then every variant.
    ///
    /// # Errors
    /// [`Refused`] with the faults of the station, or else those of all variants.
    pub fn stations(&self, catalogue: &dyn Catalogue) -> Result<Vec<(String, Station)>, Refused> {
        let mut stations = vec![("nominal".to_owned(), self.station(catalogue)?)];
        let mut faults = Vec::new();
        for name in self.variant_names() {
            match self.variant(&name) {
                Ok(document) => match document.station(catalogue) {
                    Ok(station) => stations.push((name, station)),
                    Err(refused) => faults.extend(variant::in_variant(refused.faults, &name)),
                },
                Err(refused) => faults.extend(refused.faults),
            }
        }
        if faults.is_empty() { Ok(stations) } else { Err(Refused { sources: self.sources.clone(), faults }) }
    }
}
