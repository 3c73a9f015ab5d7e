//! The TOML document as a small owned tree that knows its places and can be changed by path.

use super::source::{Fault, Place};
use toml::Spanned;
use toml::de::{DeTable, DeValue};

/// A value of the document.
#[derive(Debug, Clone)]
pub(crate) struct Node {
    pub(crate) place: Place,
    pub(crate) kind: NodeKind,
}

#[derive(Debug, Clone)]
pub(crate) enum NodeKind {
    Text(String),
    Number(f64),
    Flag(bool),
    List(Vec<Node>),
    Table(Vec<Entry>),
    /// Dates, which no key takes.
    Date,
}

/// A key with its value.
#[derive(Debug, Clone)]
pub(crate) struct Entry {
    pub(crate) key: String,
    pub(crate) place: Place,
    pub(crate) value: Node,
}

impl Node {
    /// The word for what was written, for messages.
    pub(crate) fn called(&self) -> &'static str {
        match self.kind {
            NodeKind::Text(_) => "a text",
            NodeKind::Number(_) => "a number",
            NodeKind::Flag(_) => "true or false",
            NodeKind::List(_) => "a list",
            NodeKind::Table(_) => "a table",
            NodeKind::Date => "a date",
        }
    }

    pub(crate) fn text(&self) -> Option<&str> {
        if let NodeKind::Text(text) = &self.kind { Some(text) } else { None }
    }

    pub(crate) fn entries(&self) -> &[Entry] {
        if let NodeKind::Table(entries) = &self.kind { entries } else { &[] }
    }

    pub(crate) fn items(&self) -> &[Node] {
        if let NodeKind::List(items) = &self.kind { items } else { &[] }
    }

    pub(crate) fn get(&self, key: &str) -> Option<&Node> {
        self.entries().iter().find(|e| e.key == key).map(|e| &e.value)
    }
}

/// Parses a whole document.
///
/// # Errors
/// Every syntax fault the parser could go on past.
pub(crate) fn document(text: &str) -> Result<Node, Vec<Fault>> {
    let (table, errors) = DeTable::parse_recoverable(text);
    if !errors.is_empty() {
        let mut faults: Vec<Fault> = errors.iter().map(|e| syntax_fault(e.message(), e.span(), text)).collect();
        // What the parser trips over after the first fault of a line follows from it.
        let line = |f: &Fault| {
            f.place
                .map(|p| text.as_bytes()[..(p.start as usize).min(text.len())].iter().filter(|b| **b == b'\n').count())
        };
        faults.sort_by_key(|f| f.place.map(|p| p.start));
        faults.dedup_by_key(|f| line(f));
        return Err(faults);
    }
    Ok(Node { place: place(0, &(0..0)), kind: NodeKind::Table(entries(table.get_ref(), 0)) })
}

/// Parses one value, standing at `source`.
pub(crate) fn value(text: &str, source: u32) -> Option<Node> {
    DeValue::parse(text).ok().map(|v| node(&v, source))
}

fn syntax_fault(message: &str, span: Option<std::ops::Range<usize>>, text: &str) -> Fault {
    let at = span.map(|s| place(0, &s));
    let line = at.map_or("", |p| {
        let start = text[..(p.start as usize).min(text.len())].rfind('\n').map_or(0, |n| n + 1);
        text[start..].lines().next().unwrap_or("")
    });
    let mend = if message.contains("duplicate key") {
        "write it once".to_owned()
    } else if line.contains('=') {
        "write `key = value`, texts and quantities in quotation marks: length = \"41 ft\"".to_owned()
    } else {
        "write `key = value` lines under [table] headings; a # starts a comment".to_owned()
    };
    let first = message.lines().next().unwrap_or("not TOML");
    Fault::new(at, format!("this is not TOML: {first}"), mend)
}

fn place(source: u32, span: &std::ops::Range<usize>) -> Place {
    let short = |at: usize| u32::try_from(at).unwrap_or(u32::MAX);
    Place { source, start: short(span.start), end: short(span.end) }
}

fn entries(table: &DeTable<'_>, source: u32) -> Vec<Entry> {
    let mut list: Vec<Entry> = table
        .iter()
        .map(|(key, value)| Entry {
            key: key.get_ref().to_string(),
            place: place(source, &key.span()),
            value: node(value, source),
        })
        .collect();
    list.sort_by_key(|entry| entry.place.start);
    list
}

fn node(value: &Spanned<DeValue<'_>>, source: u32) -> Node {
    let kind = match value.get_ref() {
        DeValue::String(text) => NodeKind::Text(text.to_string()),
        DeValue::Integer(number) => NodeKind::Number(i64::from_str_radix(number.as_str(), number.radix()).map_or_else(
            |_| number.as_str().parse().unwrap_or(f64::NAN),
            |n| n as f64, // exact below 2^53, far beyond any count or coordinate
        )),
        DeValue::Float(number) => NodeKind::Number(number.as_str().parse().unwrap_or(f64::NAN)),
        DeValue::Boolean(flag) => NodeKind::Flag(*flag),
        DeValue::Datetime(_) => NodeKind::Date,
        DeValue::Array(items) => NodeKind::List(items.iter().map(|item| node(item, source)).collect()),
        DeValue::Table(table) => NodeKind::Table(entries(table, source)),
    };
    Node { place: place(source, &value.span()), kind }
}
