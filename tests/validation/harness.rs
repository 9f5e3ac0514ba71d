//! What every check hands over, how it is gated, and how its page's table and the index are written.
//!
//! With `STILLWARM_WRITE=1` in the environment a gated check writes `table.md` and its figures beside its page under
//! `validation/`, and the index writes `validation/README.md`. The numbers of a page are never typed by hand.

use crate::plot::Plot;
use std::fmt::Write as _;
use std::path::PathBuf;

/// One number against its reference. `error` and `limit` are in the unit of the group's measure.
pub struct Row {
    /// What is compared.
    pub what: String,
    /// The reference.
    pub reference: f64,
    /// What the library gives.
    pub computed: f64,
    /// Distance between them.
    pub error: f64,
    /// Largest distance that passes.
    pub limit: f64,
}

impl Row {
    /// Compares by `|computed / reference - 1|`.
    pub fn relative(what: impl Into<String>, reference: f64, computed: f64, limit: f64) -> Self {
        Row { what: what.into(), reference, computed, error: (computed / reference - 1.0).abs(), limit }
    }

    /// Compares by `|computed - reference| / scale`.
    pub fn scaled(what: impl Into<String>, reference: f64, computed: f64, scale: f64, limit: f64) -> Self {
        Row { what: what.into(), reference, computed, error: (computed - reference).abs() / scale, limit }
    }

    /// Compares by how far the computed value falls short of the reference.
    pub fn at_least(what: impl Into<String>, reference: f64, computed: f64, limit: f64) -> Self {
        Row { what: what.into(), reference, computed, error: (reference - computed).max(0.0), limit }
    }

    fn passes(&self) -> bool {
        // A NaN passes nothing.
        self.error <= self.limit
    }

    fn used(&self) -> f64 {
        if self.error == 0.0 { 0.0 } else { self.error / self.limit }
    }
}

/// Rows that share a measure of error.
pub struct Group {
    /// What the rows are about, with the unit of their numbers.
    pub title: String,
    /// What the error is.
    pub measure: &'static str,
    /// The rows.
    pub rows: Vec<Row>,
}

/// Numbers that are shown but not gated: the way to a rate, the cost of a choice.
pub struct Listing {
    /// What it shows.
    pub title: String,
    /// Column heads.
    pub head: Vec<String>,
    /// Rows.
    pub rows: Vec<Vec<String>>,
}

/// What kind of reference a check has.
#[derive(Clone, Copy)]
pub enum Class {
    /// An analytic solution of the same equations.
    Exact,
    /// A numerical solution of the same equations, much finer and by another method.
    Benchmark,
    /// A closed form of a simpler model, with its differences explained.
    ClosedForm,
    /// A property that any solution has.
    Property,
}

impl Class {
    fn name(self) -> &'static str {
        match self {
            Class::Exact => "exact",
            Class::Benchmark => "benchmark",
            Class::ClosedForm => "closed form",
            Class::Property => "property",
        }
    }
}

/// One check: a folder under `validation/`.
pub struct Check {
    /// The folder.
    pub folder: &'static str,
    /// What it checks, in a few words.
    pub title: &'static str,
    /// Kind of reference.
    pub class: Class,
    /// Gated numbers.
    pub groups: Vec<Group>,
    /// Numbers shown beside.
    pub listings: Vec<Listing>,
    /// Figures: file name and plot.
    pub plots: Vec<(&'static str, Plot)>,
}

/// The folder of a check.
pub fn folder(name: &str) -> PathBuf {
    PathBuf::from(env!("CARGO_MANIFEST_DIR")).join("validation").join(name)
}

/// Reads a file of a check.
pub fn read(check: &str, file: &str) -> String {
    let path = folder(check).join(file);
    std::fs::read_to_string(&path).unwrap_or_else(|error| panic!("{}: {error}", path.display()))
}

/// The section of a check's case file.
pub fn case(check: &str, file: &str) -> stillwarm::section::Section {
    let path = folder(check).join(file);
    match stillwarm::case::load(&path, &[]) {
        Ok(loaded) => loaded.section,
        Err(faults) => panic!("{}: {faults:?}", path.display()),
    }
}

/// Whether tables, figures and the index are to be written.
fn writing() -> bool {
    std::env::var_os("STILLWARM_WRITE").is_some_and(|value| value == "1")
}

fn write(path: PathBuf, text: &str) {
    std::fs::write(&path, text).unwrap_or_else(|error| panic!("{}: {error}", path.display()));
}

/// Writes what a check shows, then fails where a row misses its limit.
pub fn gate(check: &Check) {
    if writing() {
        write(folder(check.folder).join("table.md"), &table(check));
        for (file, plot) in &check.plots {
            write(folder(check.folder).join(file), &plot.svg());
        }
    }
    assert!(!check.groups.is_empty() && check.groups.iter().all(|group| !group.rows.is_empty()), "nothing is checked");
    let misses: Vec<String> = check
        .groups
        .iter()
        .flat_map(|group| group.rows.iter().filter(|row| !row.passes()).map(move |row| (group, row)))
        .map(|(group, row)| {
            format!(
                "{}: {}: {} against {}, {} {:.2e} over the limit {:.0e}",
                group.title, row.what, row.computed, row.reference, group.measure, row.error, row.limit
            )
        })
        .collect();
    assert!(misses.is_empty(), "{} of {}:\n{}", misses.len(), check.folder, misses.join("\n"));
}

fn line(text: &mut String, cells: impl IntoIterator<Item = String>) {
    let cells: Vec<String> = cells.into_iter().collect();
    let _ = writeln!(text, "| {} |", cells.join(" | "));
}

fn head(text: &mut String, heads: &[String]) {
    line(text, heads.iter().cloned());
    line(text, heads.iter().map(|_| "---".to_owned()));
}

fn table(check: &Check) -> String {
    let mut text = String::from("<!-- Written by scripts/validate. -->\n");
    for group in &check.groups {
        let _ = writeln!(text, "\n### {}\n", group.title);
        let heads = ["what", "reference", "computed", group.measure, "limit"];
        head(&mut text, &heads.map(str::to_owned));
        for row in &group.rows {
            let numbers = [number(row.reference), number(row.computed), format!("{:.1e}", row.error)];
            line(&mut text, [vec![row.what.clone()], numbers.to_vec(), vec![format!("{:.0e}", row.limit)]].concat());
        }
    }
    for listing in &check.listings {
        let _ = writeln!(text, "\n### {}\n", listing.title);
        head(&mut text, &listing.head);
        for row in &listing.rows {
            line(&mut text, row.iter().cloned());
        }
    }
    text
}

/// A number with seven significant digits.
pub fn number(value: f64) -> String {
    if value == 0.0 || !value.is_finite() {
        return format!("{value}");
    }
    let digits = 6 - value.abs().log10().floor() as i32;
    if (0..=12).contains(&digits) { format!("{value:.*}", digits as usize) } else { format!("{value:.6e}") }
}

/// Writes the index of all checks.
pub fn write_index(checks: &[&Check]) {
    if !writing() {
        return;
    }
    let mut text = String::from(include_str!("index_head.md"));
    text.push('\n');
    head(&mut text, &["check", "class", "what", "numbers", "largest error", "limit", "margin"].map(str::to_owned));
    for check in checks {
        for group in &check.groups {
            let worst = group.rows.iter().max_by(|a, b| a.used().total_cmp(&b.used())).expect("a group has rows");
            let margin = if worst.error > 0.0 { format!("{:.1}", worst.limit / worst.error) } else { "-".into() };
            line(
                &mut text,
                [
                    format!("[{}]({}/README.md)", check.title, check.folder),
                    check.class.name().to_owned(),
                    group.title.clone(),
                    group.rows.len().to_string(),
                    format!("{:.1e} ({})", worst.error, group.measure),
                    format!("{:.0e}", worst.limit),
                    margin,
                ],
            );
        }
    }
    write(folder("README.md"), &text);
}
