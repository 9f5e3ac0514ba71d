//! The span-keeping walk through a case file: every value knows the text that it came from.
//!
//! A TOML text becomes a tree of [`Node`]s. [`Fields`] is one table of it, checked against its [`Table`] of keys: keys
//! that nobody knows and keys of later work are refused as it is opened. Quantities of every kind are read by the one
//! routine [`quantity_of`].

use super::keys::{self, Key, Standing, Table};
use super::raw::{Located, Quantity};
use crate::faults::{Fault, Faults, Span, quoted};
use crate::units::{self, Kind};
use toml::de::{DeTable, DeValue};

/// A value with the text that it came from.
#[derive(Debug, Clone)]
pub(super) struct Node {
    pub span: Span,
    pub value: Value,
}

/// What a value is.
#[derive(Debug, Clone)]
pub(super) enum Value {
    Text(String),
    Number(f64),
    Boolean,
    Moment,
    Array(Vec<Node>),
    Table(Vec<Entry>),
}

/// A key and its value.
#[derive(Debug, Clone)]
pub(super) struct Entry {
    pub key: String,
    pub key_span: Span,
    pub node: Node,
}

impl Node {
    /// What it is, with its article.
    pub fn what(&self) -> &'static str {
        match self.value {
            Value::Text(_) => "text",
            Value::Number(_) => "a number",
            Value::Boolean => "true or false",
            Value::Moment => "a date",
            Value::Array(_) => "a list",
            Value::Table(_) => "a table",
        }
    }

    fn from_toml(span: Span, value: &DeValue<'_>) -> Node {
        let value = match value {
            DeValue::String(text) => Value::Text(text.to_string()),
            DeValue::Integer(number) => {
                let whole =
                    i128::from_str_radix(number.as_str(), number.radix()).map_or(f64::NAN, |whole| whole as f64);
                Value::Number(whole)
            }
            DeValue::Float(number) => Value::Number(number.as_str().parse().unwrap_or(f64::NAN)),
            DeValue::Boolean(_) => Value::Boolean,
            DeValue::Datetime(_) => Value::Moment,
            DeValue::Array(items) => Value::Array(
                items.iter().map(|item| Node::from_toml(Span::new(span.source, item.span()), item.get_ref())).collect(),
            ),
            DeValue::Table(table) => Value::Table(entries(span.source, table)),
        };
        Node { span, value }
    }
}

fn entries(source: usize, table: &DeTable<'_>) -> Vec<Entry> {
    let mut entries: Vec<_> = table
        .iter()
        .map(|(key, value)| Entry {
            key: key.get_ref().to_string(),
            key_span: Span::new(source, key.span()),
            node: Node::from_toml(Span::new(source, value.span()), value.get_ref()),
        })
        .collect();
    // In the order of the file, not of the alphabet.
    entries.sort_by_key(|entry| entry.key_span.start);
    entries
}

/// Reads a TOML text that `faults` already holds; every syntax error at once.
pub(super) fn parse(source: usize, text: &str, faults: &mut Faults) -> Node {
    let (table, errors) = DeTable::parse_recoverable(text);
    for error in errors {
        let span = Span::new(source, error.span().unwrap_or(0..0));
        let message = error.message().trim().replace('\n', ", ");
        let line_start = text.get(..span.start).and_then(|before| before.rfind('\n')).map_or(0, |at| at + 1);
        let line = text.get(line_start..).unwrap_or("").lines().next().unwrap_or("");
        let mut fault = Fault::error(span, format!("not TOML: {message}"));
        if line.contains(['\u{201c}', '\u{201d}', '\u{2018}', '\u{2019}']) {
            fault = fault.label("typographic quotes").help("write the plain `\"`");
        } else if line.contains('\\') {
            fault = fault
                .label("a backslash starts an escape in double quotes")
                .help("write paths with `/`, or in single quotes");
        } else if message.contains("duplicate key") {
            fault = fault
                .label("said before")
                .help("keep one of the two; several layers, heaters or events each stand under [[double brackets]]");
        } else if message.contains("must be quoted") {
            let quoted = line.split('#').next().and_then(|line| line.split_once('='));
            fault.message = "text and quantities stand in double quotes".into();
            fault = fault
                .label("without quotes")
                .help_if(quoted.map(|(key, value)| format!("write {} = \"{}\"", key.trim(), value.trim())));
        }
        faults.push(fault);
    }
    Node { span: Span::new(source, 0..0), value: Value::Table(entries(source, table.get_ref())) }
}

/// Reads the value of an override that `faults` already holds, at `offset` of that text: TOML if it is TOML, else text.
pub(super) fn parse_value(source: usize, offset: usize, text: &str) -> Node {
    let shifted = |span: Span| Span::new(source, span.start + offset..span.end + offset);
    match DeValue::parse(text) {
        Ok(value) => {
            let mut node = Node::from_toml(Span::new(source, value.span()), value.get_ref());
            shift(&mut node, &shifted);
            node
        }
        Err(_) => Node { span: shifted(Span::new(source, 0..text.len())), value: Value::Text(text.trim().into()) },
    }
}

fn shift(node: &mut Node, shifted: &impl Fn(Span) -> Span) {
    node.span = shifted(node.span);
    match &mut node.value {
        Value::Array(items) => items.iter_mut().for_each(|item| shift(item, shifted)),
        Value::Table(entries) => entries.iter_mut().for_each(|entry| {
            entry.key_span = shifted(entry.key_span);
            shift(&mut entry.node, shifted);
        }),
        _ => {}
    }
}

/// One table of the file, its keys checked.
#[derive(Clone, Copy)]
pub(super) struct Fields<'a> {
    /// What stands for the whole table in messages: its head, or its first key.
    pub span: Span,
    entries: &'a [Entry],
    table: &'static Table,
}

impl<'a> Fields<'a> {
    /// Opens a table: refuses what is none, and every key that `table` does not hold.
    pub fn open(node: &'a Node, table: &'static Table, faults: &mut Faults) -> Option<Self> {
        let Value::Table(entries) = &node.value else {
            let is_headed = matches!(node.value, Value::Array(_)) && table.title.starts_with('[');
            faults.push(
                Fault::error(node.span, format!("{} is a table, not {}", table.title, node.what()))
                    .label("no table")
                    .note(format!("its keys: {}", table.modelled()))
                    .help_if(is_headed.then(|| format!("there is one only: head it by {}", table.title))),
            );
            return None;
        };
        for entry in entries {
            match table.find(&entry.key) {
                Some(Key { standing: Standing::Modelled, .. }) => {}
                Some(Key { standing: Standing::Later, about, .. }) => faults.push(
                    Fault::error(
                        entry.key_span,
                        format!("{} in {} is not yet modelled", quoted(&entry.key), table.title),
                    )
                    .label("not yet modelled")
                    .note(format!("meant for {about}; refused, for an answer that ignored it would be wrong"))
                    .help("take it out, or say what it stands for by keys that are modelled"),
                ),
                None => faults.push(unknown_key(entry, table)),
            }
        }
        Some(Fields { span: node.span, entries, table })
    }

    fn entry(&self, key: &str) -> Option<&'a Entry> {
        debug_assert!(self.table.find(key).is_some_and(Key::is_modelled), "{key} is no key of {}", self.table.title);
        self.entries.iter().find(|entry| entry.key == key)
    }

    /// Whether any of these keys stands here, be it misspelt: what depends on it has then been told.
    pub fn says(&self, keys: &[&str]) -> bool {
        self.entries.iter().any(|entry| {
            let known = self.table.find(&entry.key).map(|key| key.name);
            known.or_else(|| self.table.nearest(&entry.key)).is_some_and(|name| keys.contains(&name))
        })
    }

    /// Whether a key of later work stands here: what it stands for is then not missing.
    pub fn has_later(&self) -> bool {
        self.entries.iter().any(|entry| self.table.find(&entry.key).is_some_and(|key| !key.is_modelled()))
    }

    /// The value of a key.
    pub fn get(&self, key: &str) -> Option<&'a Node> {
        self.entry(key).map(|entry| &entry.node)
    }

    /// Where a key stands, if it does.
    pub fn key_span(&self, key: &str) -> Option<Span> {
        self.entry(key).map(|entry| entry.key_span)
    }

    /// Which of these keys stand in the table.
    pub fn present(&self, keys: &[&'static str]) -> Vec<(&'static str, Span)> {
        keys.iter().filter_map(|&key| self.key_span(key).map(|span| (key, span))).collect()
    }

    /// Reports a key that must stand here.
    pub fn missing(&self, key: &str, faults: &mut Faults) {
        if self.says(&[key]) {
            return;
        }
        let about = self.table.find(key).map_or("", |key| key.about);
        faults.push(
            Fault::error(self.span, format!("{} needs `{key}`: {about}", self.table.title))
                .label(format!("`{key}` is missing")),
        );
    }

    /// The value of a key that must stand here.
    pub fn require(&self, key: &str, faults: &mut Faults) -> Option<&'a Node> {
        let node = self.get(key);
        if node.is_none() {
            self.missing(key, faults);
        }
        node
    }

    /// Reports all but the first of keys that exclude one another.
    pub fn at_most_one(&self, keys: &[&'static str], why: &str, faults: &mut Faults) {
        if let [first, others @ ..] = self.present(keys).as_slice() {
            for other in others {
                faults.push(
                    Fault::error(other.1, format!("`{}` and `{}` contradict each other: {why}", first.0, other.0))
                        .label("take out one of the two")
                        .also(first.1, "the other"),
                );
            }
        }
    }

    /// Text of a key.
    pub fn text(&self, key: &str, faults: &mut Faults) -> Option<Located<String>> {
        text_of(self.get(key)?, key, faults)
    }

    /// Text of a key that must stand here.
    pub fn required_text(&self, key: &str, faults: &mut Faults) -> Option<Located<String>> {
        text_of(self.require(key, faults)?, key, faults)
    }

    /// Quantity of a key.
    pub fn quantity(&self, key: &str, kind: Kind, faults: &mut Faults) -> Option<Quantity> {
        quantity_of(self.get(key)?, &[kind], faults)
    }

    /// Quantity of a key that must stand here.
    pub fn required_quantity(&self, key: &str, kind: Kind, faults: &mut Faults) -> Option<Quantity> {
        quantity_of(self.require(key, faults)?, &[kind], faults)
    }

    /// A sub-table of a key.
    pub fn table(&self, key: &str, table: &'static Table, faults: &mut Faults) -> Option<Fields<'a>> {
        let entry = self.entry(key)?;
        let fields = Fields::open(&entry.node, table, faults)?;
        Some(Fields { span: head_span(entry), ..fields })
    }

    /// Every table of a list of tables, as `[[key]]` writes it.
    pub fn tables(&self, key: &str, table: &'static Table, faults: &mut Faults) -> Vec<Fields<'a>> {
        let Some(entry) = self.entry(key) else { return Vec::new() };
        let Value::Array(items) = &entry.node.value else {
            faults.push(
                Fault::error(entry.key_span, format!("`{key}` is a list of tables"))
                    .label("single brackets, or a single value")
                    .help(format!("head each of them by {} in double brackets", table.title)),
            );
            return Vec::new();
        };
        items.iter().filter_map(|item| Fields::open(item, table, faults)).collect()
    }
}

/// What stands for a table: its head `[key]`, or the key of an inline table.
fn head_span(entry: &Entry) -> Span {
    if entry.node.span.end > entry.node.span.start { entry.node.span } else { entry.key_span }
}

fn unknown_key(entry: &Entry, table: &Table) -> Fault {
    let mut fault = Fault::error(entry.key_span, format!("{} has no key {}", table.title, quoted(&entry.key)))
        .label("unknown key")
        .note(format!("its keys: {}", table.modelled()));
    if let Some(near) = table.nearest(&entry.key) {
        fault = fault.help(format!("did you mean `{near}`?"));
    } else if let Some(home) = keys::home_of(&entry.key) {
        fault = fault.help(format!("`{}` belongs in {home}", entry.key));
    }
    fault
}

/// Text, where the value is text.
pub(super) fn text_of(node: &Node, key: &str, faults: &mut Faults) -> Option<Located<String>> {
    match &node.value {
        Value::Text(text) if text.trim().is_empty() => {
            faults.push(Fault::error(node.span, format!("`{key}` is empty")).label("empty"));
            None
        }
        Value::Text(text) => Some(Located { value: text.trim().to_owned(), span: node.span }),
        _ => {
            faults.push(
                Fault::error(node.span, format!("`{key}` is text, not {}", node.what()))
                    .label("in double quotes, please"),
            );
            None
        }
    }
}

/// A list, where the value is a list.
pub(super) fn list_of<'a>(node: &'a Node, key: &str, holds: &str, faults: &mut Faults) -> Option<&'a [Node]> {
    match &node.value {
        Value::Array(items) => Some(items),
        _ => {
            faults.push(
                Fault::error(node.span, format!("`{key}` is a list of {holds}, not {}", node.what())).label("no list"),
            );
            None
        }
    }
}

/// A quantity of one of several kinds, alone or as `{ value = ..., tolerance = ... }`: the one routine for all of them.
pub(super) fn quantity_of(node: &Node, kinds: &[Kind], faults: &mut Faults) -> Option<Quantity> {
    let Value::Table(_) = &node.value else {
        let (kind, value_si) = plain_quantity(node, kinds, faults)?;
        return Some(Quantity { kind, value_si, tolerance: None, span: node.span });
    };
    let fields = Fields::open(node, &keys::QUANTITY, faults)?;
    let value = fields.require("value", faults)?;
    let (kind, value_si) = plain_quantity(value, kinds, faults)?;
    let tolerance = fields.get("tolerance").and_then(|node| tolerance_of(node, kind, value_si, faults));
    Some(Quantity { kind, value_si, tolerance, span: value.span })
}

/// A tolerance on a value, in the value's own SI unit: a share of it, or a difference.
pub(super) fn tolerance_of(node: &Node, kind: Kind, value_si: f64, faults: &mut Faults) -> Option<Located<f64>> {
    let difference = if kind == Kind::Temperature { Kind::TemperatureDifference } else { kind };
    let kinds = if kind == Kind::Temperature { vec![difference] } else { vec![Kind::Share, difference] };
    let (given, tolerance) = plain_quantity(node, &kinds, faults)?;
    let tolerance = if given == Kind::Share && kind != Kind::Share { tolerance * value_si.abs() } else { tolerance };
    if tolerance < 0.0 || (kind != Kind::Temperature && value_si > 0.0 && tolerance >= value_si) {
        faults.push(
            Fault::error(node.span, "a tolerance lies between nothing and the whole value")
                .label("out of range")
                .help("it is the half width: \"10 %\" means from 90 to 110 % of the value"),
        );
        return None;
    }
    Some(Located { value: tolerance, span: node.span })
}

fn plain_quantity(node: &Node, kinds: &[Kind], faults: &mut Faults) -> Option<(Kind, f64)> {
    let name = Kind::name_of_any(kinds);
    let (kind, value) = match &node.value {
        Value::Number(number) if kinds.contains(&Kind::Number) => (Kind::Number, *number),
        Value::Text(text) => match units::parse_any(kinds, text) {
            Ok(quantity) => quantity,
            Err(fault) => {
                // Point into the quotes, unless escapes make the text longer than what it stands for.
                let inside = Span { start: node.span.start + 1, end: node.span.end.saturating_sub(1), ..node.span };
                let quoted_as_is = inside.start <= inside.end && faults.text_of(inside) == text;
                let bare_as_is = faults.text_of(node.span) == text;
                let base = if quoted_as_is { Some(inside.start) } else { bare_as_is.then_some(node.span.start) };
                let span = base.map_or(node.span, |base| {
                    Span::new(node.span.source, base + fault.part.start..base + fault.part.end)
                });
                let mut told = Fault::error(span, fault.to_string()).label(fault.label()).help_if(fault.help());
                if !matches!(fault.reason, units::Reason::Comma(_) | units::Reason::TooLarge) {
                    told = told.note(format!("accepted: {}", fault.accepted()));
                }
                faults.push(told);
                return None;
            }
        },
        Value::Number(_) => {
            let example = kinds.first().map_or("", |kind| kind.example());
            faults.push(
                Fault::error(node.span, format!("a {name} needs its unit"))
                    .label("a number without its unit")
                    .note(format!(
                        "accepted: {}",
                        kinds.iter().map(|&kind| units::accepted(kind)).collect::<Vec<_>>().join(", ")
                    ))
                    .help(format!("write the number and its unit in double quotes, as in \"{example}\"")),
            );
            return None;
        }
        _ => {
            let example = kinds.first().map_or("", |kind| kind.example());
            faults.push(
                Fault::error(node.span, format!("a {name} is wanted here, not {}", node.what()))
                    .label("no quantity")
                    .help(format!("write it in double quotes, as in \"{example}\"")),
            );
            return None;
        }
    };
    let (low, high) = kind.plausible();
    if kind == Kind::Temperature && value < 0.0 {
        faults.push(Fault::error(node.span, "a temperature below absolute zero").label("below -273.15 degC"));
        return None;
    }
    let told = faults.text_of(node.span).trim_matches(['"', '\'']).to_owned();
    if kind != Kind::Number && value < low && low == 0.0 {
        faults.push(Fault::error(node.span, format!("a {} cannot be negative", kind.name())).label("negative"));
        return None;
    }
    if kind == Kind::Share && value > high {
        faults.push(Fault::error(node.span, "a share lies between 0 and 100 %").label("out of range"));
        return None;
    }
    if !(low..=high).contains(&value) {
        faults.push(
            Fault::error(node.span, format!("a {} of {} is out of any physical range", kind.name(), quoted(&told)))
                .label("out of range")
                .help("check the unit and the decimal point"),
        );
        return None;
    }
    Some((kind, value))
}
