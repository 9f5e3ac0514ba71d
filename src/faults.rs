//! Faults of input, each pointing at the text that causes it, all of them at once.
//!
//! A [`Fault`] says what is wrong, where, what is accepted and what to do. [`Faults`] gathers them together with the
//! texts that they point into (a case file, a series, an override from the command line) and shows them in the way
//! of a compiler.

use annotate_snippets::{AnnotationKind, Group, Level, Origin, Renderer, Snippet, normalize_untrusted_str};
use std::fmt;
use std::io::IsTerminal;
use std::ops::Range;

/// A stretch of one of the texts.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub struct Span {
    /// Which text: what [`Faults::add_source`] returned.
    pub source: usize,
    /// First byte.
    pub start: usize,
    /// Byte after the last.
    pub end: usize,
}

impl Span {
    /// A stretch of the text `source`.
    pub fn new(source: usize, range: Range<usize>) -> Self {
        Span { source, start: range.start, end: range.end }
    }
}

/// Whether a fault stops the work.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Severity {
    /// The input means nothing, or contradicts itself.
    Error,
    /// The input is sound but may not be what was meant.
    Warning,
}

/// One fault of the input.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Fault {
    /// Whether it stops the work.
    pub severity: Severity,
    /// Where; `None` where it concerns the whole file.
    pub span: Option<Span>,
    /// What is wrong, in one line.
    pub message: String,
    /// A few words to stand under the text.
    pub label: String,
    /// Other places that it has to do with.
    pub also: Vec<(Span, String)>,
    /// What would be accepted, and other facts.
    pub notes: Vec<String>,
    /// What to do.
    pub help: Option<String>,
}

impl Fault {
    /// A fault that stops the work.
    pub fn error(span: Span, message: impl Into<String>) -> Self {
        Fault {
            severity: Severity::Error,
            span: Some(span),
            message: message.into(),
            label: String::new(),
            also: Vec::new(),
            notes: Vec::new(),
            help: None,
        }
    }

    /// A fault that does not stop the work.
    pub fn warning(span: Span, message: impl Into<String>) -> Self {
        Fault { severity: Severity::Warning, ..Fault::error(span, message) }
    }

    /// A fault of a whole file.
    pub fn of_file(message: impl Into<String>) -> Self {
        Fault { span: None, ..Fault::error(Span::new(0, 0..0), message) }
    }

    /// With words under the text.
    pub fn label(mut self, label: impl Into<String>) -> Self {
        self.label = label.into();
        self
    }

    /// With another place.
    pub fn also(mut self, span: Span, label: impl Into<String>) -> Self {
        self.also.push((span, label.into()));
        self
    }

    /// With a fact.
    pub fn note(mut self, note: impl Into<String>) -> Self {
        self.notes.push(note.into());
        self
    }

    /// With the remedy.
    pub fn help(mut self, help: impl Into<String>) -> Self {
        self.help = Some(help.into());
        self
    }

    /// With the remedy, where there is one.
    pub fn help_if(mut self, help: Option<String>) -> Self {
        self.help = help.or(self.help);
        self
    }
}

#[derive(Debug, Clone)]
struct Source {
    name: String,
    text: String,
}

/// Faults and the texts that they point into.
#[derive(Debug, Clone, Default)]
pub struct Faults {
    sources: Vec<Source>,
    list: Vec<Fault>,
}

impl Faults {
    /// Takes in a text under the name by which messages call it; returns the number that [`Span::source`] holds.
    pub fn add_source(&mut self, name: impl Into<String>, text: impl Into<String>) -> usize {
        self.sources.push(Source { name: name.into(), text: text.into() });
        self.sources.len() - 1
    }

    /// Adds a fault.
    pub fn push(&mut self, fault: Fault) {
        // A table that two places refer to is read twice; its faults are told once.
        if !self.list.contains(&fault) {
            self.list.push(fault);
        }
    }

    /// Whether there is none.
    pub fn is_empty(&self) -> bool {
        self.list.is_empty()
    }

    /// Whether any of them stops the work.
    pub fn has_errors(&self) -> bool {
        self.list.iter().any(|fault| fault.severity == Severity::Error)
    }

    /// The faults, in the order of the texts.
    pub fn iter(&self) -> impl Iterator<Item = &Fault> {
        let mut sorted: Vec<_> = self.list.iter().collect();
        sorted.sort_by_key(|fault| fault.span.map(|span| (span.source, span.start, span.end)));
        sorted.into_iter()
    }

    /// The bytes of a text that a span stands for.
    pub fn text_of(&self, span: Span) -> &str {
        self.sources.get(span.source).and_then(|source| source.text.get(span.start..span.end)).unwrap_or("")
    }

    /// How many there are, in words: `2 errors, 1 warning`.
    pub fn summary(&self) -> String {
        let count = |severity, name: &str| {
            let count = self.list.iter().filter(|fault| fault.severity == severity).count();
            let plural = if count == 1 { "" } else { "s" };
            (count > 0).then(|| format!("{count} {name}{plural}"))
        };
        let parts: Vec<_> =
            [count(Severity::Error, "error"), count(Severity::Warning, "warning")].into_iter().flatten().collect();
        if parts.is_empty() { "no faults".into() } else { parts.join(", ") }
    }

    /// All of them as text, each with file, line, column and the text underlined; coloured for a terminal if asked.
    pub fn render(&self, colour: bool) -> String {
        let renderer = if colour { Renderer::styled() } else { Renderer::plain() };
        let shown: Vec<_> = self.iter().map(|fault| renderer.render(&[self.group(fault)])).collect();
        // The renderer pads empty lines.
        let trimmed: Vec<_> = shown.join("\n\n").lines().map(|line| line.trim_end().to_owned()).collect();
        trimmed.join("\n")
    }

    /// All of them as text for standard error: coloured where a person watches and `NO_COLOR` is not set.
    pub fn render_for_stderr(&self) -> String {
        let forbids_colour = std::env::var_os("NO_COLOR").is_some_and(|value| !value.is_empty());
        self.render(std::io::stderr().is_terminal() && !forbids_colour)
    }

    fn group<'a>(&'a self, fault: &'a Fault) -> Group<'a> {
        let level = match fault.severity {
            Severity::Error => Level::ERROR,
            Severity::Warning => Level::WARNING,
        };
        let mut group = Group::with_title(level.primary_title(normalize_untrusted_str(&fault.message)));
        match fault.span.filter(|span| span.source < self.sources.len()) {
            Some(span) => {
                let label = Some(fault.label.as_str()).filter(|label| !label.is_empty()).map(normalize_untrusted_str);
                let primary = (span, AnnotationKind::Primary, label);
                let context = fault
                    .also
                    .iter()
                    .filter(|(other, _)| other.source < self.sources.len())
                    .map(|(other, label)| (*other, AnnotationKind::Context, Some(normalize_untrusted_str(label))));
                let all: Vec<_> = std::iter::once(primary).chain(context).collect();
                let mut shown = Vec::new();
                for number in all.iter().map(|(span, ..)| span.source) {
                    if shown.contains(&number) {
                        continue;
                    }
                    shown.push(number);
                    let source = &self.sources[number];
                    let mut snippet = Snippet::source(source.text.as_str()).path(source.name.as_str());
                    for (span, kind, label) in all.iter().filter(|(span, ..)| span.source == number) {
                        snippet = snippet.annotation(kind.span(within(&source.text, *span)).label(label.clone()));
                    }
                    group = group.element(snippet);
                }
            }
            None => {
                if let Some(source) = self.sources.first() {
                    group = group.element(Origin::path(source.name.as_str()));
                }
            }
        }
        for note in &fault.notes {
            group = group.element(Level::NOTE.message(normalize_untrusted_str(note)));
        }
        if let Some(help) = &fault.help {
            group = group.element(Level::HELP.message(normalize_untrusted_str(help)));
        }
        group
    }
}

/// The span as a range that lies in the text, on borders of characters, and on one line.
fn within(text: &str, span: Span) -> Range<usize> {
    let floor = |mut at: usize| {
        at = at.min(text.len());
        while !text.is_char_boundary(at) {
            at -= 1;
        }
        at
    };
    let start = floor(span.start);
    let end = floor(span.end).max(start);
    let line_end = text[start..].find(['\n', '\r']).map_or(text.len(), |length| start + length);
    start..end.min(line_end.max(start))
}

impl fmt::Display for Faults {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(&self.render(false))
    }
}

impl std::error::Error for Faults {}

/// The candidate spelt most like a word, if one is alike at all.
pub fn nearest<'a>(word: &str, candidates: impl IntoIterator<Item = &'a str>) -> Option<&'a str> {
    let word = word.to_lowercase();
    candidates
        .into_iter()
        .map(|candidate| (strsim::damerau_levenshtein(&candidate.to_lowercase(), &word), candidate))
        .filter(|(distance, candidate)| *distance <= 1.max(candidate.chars().count().max(word.chars().count()) / 3))
        .min_by_key(|(distance, _)| *distance)
        .map(|(_, candidate)| candidate)
}

/// A user's words as a message shows them: in backticks, cut where they run on.
pub fn quoted(words: &str) -> String {
    const MOST: usize = 60;
    let line = words.split(['\n', '\r']).next().unwrap_or("");
    if line.len() == words.len() && line.chars().count() <= MOST {
        return format!("`{line}`");
    }
    format!("`{}...`", line.chars().take(MOST).collect::<String>())
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn faults_come_in_the_order_of_the_text_with_line_and_column() {
        let mut faults = Faults::default();
        let source = faults.add_source("line.toml", "a = 1\nbb = 2\n");
        faults.push(Fault::warning(Span::new(source, 6..8), "second").label("here").help("do this"));
        faults.push(Fault::error(Span::new(source, 0..1), "first").note("accepted: c"));
        assert_eq!(faults.summary(), "1 error, 1 warning");
        assert_eq!(
            faults.to_string(),
            "error: first\n --> line.toml:1:1\n  |\n1 | a = 1\n  | ^\n  |\n  = note: accepted: c\n\n\
             warning: second\n --> line.toml:2:1\n  |\n2 | bb = 2\n  | ^^ here\n  |\n  = help: do this"
        );
        assert!(faults.render(true).contains('\u{1b}'));
    }

    #[test]
    fn spans_that_fit_no_text_are_shown_as_well_as_can_be() {
        let mut faults = Faults::default();
        let source = faults.add_source("x", "é\n");
        faults.push(Fault::error(Span::new(source, 1..999), "beyond"));
        faults.push(Fault::error(Span::new(7, 1..2), "no such text"));
        assert!(faults.to_string().contains("beyond"));
    }

    #[test]
    fn the_nearest_name_is_like_the_word_or_none_is() {
        assert_eq!(nearest("thicknes", ["thickness", "material"]), Some("thickness"));
        assert_eq!(nearest("Matrial", ["thickness", "material"]), Some("material"));
        assert_eq!(nearest("zebra", ["thickness", "material"]), None);
    }
}
