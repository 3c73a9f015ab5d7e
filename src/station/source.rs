//! Texts that values come from (the file, each `--set`), places in them, and faults shown at those places.

use annotate_snippets::{AnnotationKind, Level, Renderer, Snippet};
use std::fmt;
use std::ops::Deref;
use std::sync::Arc;

/// Where a value stands: a byte range in one of the [`Sources`].
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub struct Place {
    /// Index of the text; 0 is the file.
    pub source: u32,
    /// First byte.
    pub start: u32,
    /// One past the last byte.
    pub end: u32,
}

/// A value and where it was written; dereferences to the value.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Written<T> {
    /// The value.
    pub value: T,
    /// Where; `None` for a default or a station built in code.
    pub place: Option<Place>,
}

impl<T> Written<T> {
    /// The same place with another value.
    pub fn map<U>(self, change: impl FnOnce(T) -> U) -> Written<U> {
        Written { value: change(self.value), place: self.place }
    }
}

impl<T> From<T> for Written<T> {
    fn from(value: T) -> Self {
        Written { value, place: None }
    }
}

impl<T> Deref for Written<T> {
    type Target = T;
    fn deref(&self) -> &T {
        &self.value
    }
}

/// The texts a station was read from. Cheap to clone.
#[derive(Debug, Clone, Default)]
pub struct Sources(Arc<Vec<Source>>);

#[derive(Debug, Clone)]
struct Source {
    name: String,
    text: String,
}

impl Sources {
    /// One file.
    #[must_use]
    pub fn file(name: &str, text: &str) -> Self {
        Sources(Arc::new(vec![Source { name: name.to_owned(), text: text.to_owned() }]))
    }

    pub(crate) fn count(&self) -> u32 {
        u32::try_from(self.0.len()).unwrap_or(u32::MAX)
    }

    /// Adds a text and returns its index.
    pub(crate) fn add(&mut self, name: &str, text: String) -> u32 {
        let list = Arc::make_mut(&mut self.0);
        list.push(Source { name: name.to_owned(), text });
        u32::try_from(list.len() - 1).unwrap_or(u32::MAX)
    }

    /// Line and column (from 1, in characters) of a place.
    #[must_use]
    pub fn line_column(&self, place: Place) -> Option<(usize, usize)> {
        let text = &self.0.get(place.source as usize)?.text;
        let before = text.get(..(place.start as usize).min(text.len()))?;
        let line_start = before.rfind('\n').map_or(0, |at| at + 1);
        Some((before.matches('\n').count() + 1, before[line_start..].chars().count() + 1))
    }
}

/// One thing that cannot be meant.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Fault {
    /// Where, if it stands anywhere.
    pub place: Option<Place>,
    /// What is wrong and why.
    pub reason: String,
    /// What to write instead.
    pub mend: String,
}

impl Fault {
    /// A fault at a place.
    pub fn new(place: Option<Place>, reason: impl Into<String>, mend: impl Into<String>) -> Self {
        Fault { place, reason: reason.into(), mend: mend.into() }
    }
}

/// A station that was refused, with every fault found.
#[derive(Debug, Clone)]
pub struct Refused {
    /// The texts the places refer to.
    pub sources: Sources,
    /// At least one.
    pub faults: Vec<Fault>,
}

impl Refused {
    /// The same faults, each saying which variant it belongs to; "nominal" is the file as written and needs no word.
    #[must_use]
    pub fn in_variant(mut self, name: &str) -> Self {
        if name != "nominal" {
            self.faults = super::variant::in_variant(self.faults, name);
        }
        self
    }

    /// Every fault with the line it stands on, a caret, the reason and the mend; ANSI colours where `colour`.
    #[must_use]
    pub fn show(&self, colour: bool) -> String {
        let renderer = if colour { Renderer::styled() } else { Renderer::plain() };
        let shown: Vec<String> = self.faults.iter().map(|fault| show_one(&self.sources, fault, &renderer)).collect();
        shown.join("\n\n")
    }
}

fn show_one(sources: &Sources, fault: &Fault, renderer: &Renderer) -> String {
    let title = Level::ERROR.primary_title(fault.reason.as_str());
    let mend = Level::HELP.message(fault.mend.as_str());
    let placed = fault.place.and_then(|p| sources.0.get(p.source as usize).map(|s| (p, s)));
    let group = match placed {
        Some((place, source)) => {
            let span = char_span(&source.text, place);
            let snippet = Snippet::source(source.text.as_str())
                .path(source.name.as_str())
                .annotation(AnnotationKind::Primary.span(span));
            title.element(snippet).element(mend)
        }
        None => title.element(mend),
    };
    renderer.render(&[group])
}

/// The place kept inside the text, on character borders, and to its first line.
fn char_span(text: &str, place: Place) -> std::ops::Range<usize> {
    let inside = |at: u32| {
        let mut at = (at as usize).min(text.len());
        while !text.is_char_boundary(at) {
            at -= 1;
        }
        at
    };
    let (start, end) = (inside(place.start), inside(place.end.max(place.start)));
    let first_line = text[start..end].find('\n').map_or(end, |at| start + at);
    start..first_line
}

impl fmt::Display for Refused {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(&self.show(false))
    }
}

impl std::error::Error for Refused {}
