//! The file parsed once, changed by path as often as a study likes.

use super::catalogue::Catalogue;
use super::node::{self, Node};
use super::source::{Refused, Sources};
use super::types::Station;
use super::{change, check};

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
}
