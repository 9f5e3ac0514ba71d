//! From a case file's text to a validated [`Section`].
//!
//! ```text
//!  text --walk--> tree with spans --overrides--> tree --read--> raw::Case --resolve--> Section
//! ```
//!
//! Every fault points at the text that causes it, and all of them come at once.

pub mod keys;
mod overrides;
pub mod raw;
mod read;
mod resolve;
mod series_file;
mod text_file;
mod walk;

#[cfg(test)]
mod tests;

use crate::faults::{Fault, Faults};
use crate::section::Section;
use series_file::SeriesFiles;
use sha2::{Digest, Sha256};
use std::path::Path;

/// Largest case file [bytes]: a case is written by hand.
const MOST_BYTES: u64 = 4 << 20;

/// A case that was read and found sound.
#[derive(Debug, Clone)]
pub struct Loaded {
    /// What it means.
    pub section: Section,
    /// What may not have been meant.
    pub warnings: Faults,
    /// SHA-256 of the text, the overrides and the series, in hexadecimal digits.
    pub digest: String,
    /// The overrides, as given.
    pub overrides: Vec<String>,
    /// Facts that a report shows: a built-in material that the case replaces, say.
    pub notes: Vec<String>,
}

/// Reads a case file and what it refers to.
///
/// # Errors
/// Every fault of the file and of the overrides (`path=value`), warnings among them.
pub fn load(path: &Path, overrides: &[String]) -> Result<Loaded, Faults> {
    let name = path.display().to_string();
    match text_file::read(path, &name, MOST_BYTES) {
        Ok(text) => load_text(&name, &text, path.parent().unwrap_or(Path::new("")), overrides),
        Err(fault) => {
            let mut faults = Faults::default();
            faults.push(Fault::of_file(fault.message).help_if(fault.help));
            Err(faults)
        }
    }
}

/// Reads a case from its text; `name` is what messages call it, `folder` what its paths are relative to.
///
/// # Errors
/// Every fault of the text and of the overrides (`path=value`), warnings among them.
pub fn load_text(name: &str, text: &str, folder: &Path, overrides: &[String]) -> Result<Loaded, Faults> {
    let text = text.strip_prefix('\u{feff}').unwrap_or(text);
    let mut faults = Faults::default();
    let source = faults.add_source(name, text);
    let mut root = walk::parse(source, text, &mut faults);
    // What a broken text seems to lack would only bury what broke it.
    if faults.has_errors() {
        return Err(faults);
    }
    for text in overrides {
        overrides::apply(&mut root, text, &mut faults);
    }
    let mut files = SeriesFiles::new(folder);
    let resolved = raw::Case::read(&root, &mut faults)
        .and_then(|case| resolve::resolve(&case, default_title(name), &mut files, &mut faults));
    match resolved {
        Some((section, notes)) if !faults.has_errors() => {
            let digest = digest(text, overrides, &files);
            Ok(Loaded { section, warnings: faults, digest, overrides: overrides.to_vec(), notes })
        }
        _ => {
            if !faults.has_errors() {
                faults.push(Fault::of_file("the case could not be understood, and no fault of it was found"));
            }
            Err(faults)
        }
    }
}

/// Title of a case that has none: its file's name.
fn default_title(name: &str) -> String {
    Path::new(name).file_stem().map_or_else(|| name.to_owned(), |stem| stem.to_string_lossy().into_owned())
}

fn digest(text: &str, overrides: &[String], files: &SeriesFiles<'_>) -> String {
    let mut hash = Sha256::new();
    for part in std::iter::once(text).chain(overrides.iter().map(String::as_str)).chain(files.texts()) {
        // The length keeps parts apart.
        hash.update((part.len() as u64).to_le_bytes());
        hash.update(part.as_bytes());
    }
    hash.finalize().iter().map(|byte| format!("{byte:02x}")).collect()
}
