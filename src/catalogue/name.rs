//! How names are compared, and how rows are found by them.

/// The name as compared: lower case, without spaces, hyphens, underscores, strokes and full stops.
pub(super) fn key(name: &str) -> String {
    name.chars()
        .filter(|c| !c.is_whitespace() && !matches!(c, '-' | '_' | '/' | '.'))
        .flat_map(char::to_lowercase)
        .collect()
}

/// A row that goes by one or more names.
pub(super) trait Named {
    /// The name it is listed under.
    fn name(&self) -> &str;
    /// Further names it answers to.
    fn aliases(&self) -> &[String];
}

/// The row that answers to a name.
pub(super) fn find<'a, R: Named>(rows: &'a [R], name: &str) -> Option<&'a R> {
    let wanted = key(name);
    rows.iter().find(|row| key(row.name()) == wanted || row.aliases().iter().any(|alias| key(alias) == wanted))
}

#[cfg(test)]
mod tests {
    use super::key;

    #[test]
    fn capitals_spaces_and_strokes_do_not_matter() {
        assert_eq!(key(" RG-58 C/U"), key("rg58cu"));
        assert_ne!(key("RG-58"), key("RG-59"));
    }
}
