//! Values set by path.

use super::document::Document;
use super::source::Refused;

/// Applies changes in order.
pub(super) fn apply(_document: &mut Document, _sets: &[(String, String)]) -> Result<(), Refused> {
    Ok(())
}
