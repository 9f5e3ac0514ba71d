//! The shipped cases, embedded, so that a new case can start from one anywhere.

use std::fs::OpenOptions;
use std::io::{self, Write};
use std::path::{Path, PathBuf};
use thiserror::Error;

/// The case that `new` copies when none is named.
pub const DEFAULT: &str = "water-branch-outage";

/// A shipped case.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Shipped {
    /// Its name: the file's, without the ending.
    pub name: &'static str,
    /// The verb that it is made for.
    pub verb: &'static str,
    /// Its text.
    pub text: &'static str,
    /// A series beside it: file name and text.
    pub series: Option<(&'static str, &'static str)>,
}

macro_rules! shipped {
    ($($name:literal $verb:literal $(with $series:literal)?),+ $(,)?) => {
        &[$(Shipped {
            name: $name,
            verb: $verb,
            text: include_str!(concat!("../cases/", $name, ".toml")),
            series: shipped!(@series $($series)?),
        }),+]
    };
    (@series $series:literal) => { Some(($series, include_str!(concat!("../cases/", $series)))) };
    (@series) => { None };
}

/// Every shipped case.
pub const CASES: &[Shipped] = shipped![
    "water-branch-outage" "outage",
];

/// A shipped case could not be written.
#[derive(Debug, Error)]
pub enum WriteError {
    /// Something bears the name already.
    #[error("{path} exists already, and is left as it is\nhint: name another file")]
    Exists {
        /// What exists.
        path: PathBuf,
    },
    /// The file system says no.
    #[error("cannot write {path}: {source}")]
    System {
        /// Where.
        path: PathBuf,
        /// What the system says.
        source: io::Error,
    },
}

impl Shipped {
    /// Writes the case, and its series beside it; gives the files written. Nothing that exists is touched.
    ///
    /// # Errors
    /// Where a file exists already or cannot be written.
    pub fn write(&self, path: &Path) -> Result<Vec<PathBuf>, WriteError> {
        let mut files = vec![(path.to_path_buf(), self.text)];
        if let Some((name, text)) = self.series {
            files.push((path.parent().unwrap_or(Path::new("")).join(name), text));
        }
        if let Some((path, _)) = files.iter().find(|(path, _)| path.symlink_metadata().is_ok()) {
            return Err(WriteError::Exists { path: path.clone() });
        }
        for (path, text) in &files {
            // `create_new` closes the gap between the look above and the writing.
            OpenOptions::new()
                .write(true)
                .create_new(true)
                .open(path)
                .and_then(|mut file| file.write_all(text.as_bytes()))
                .map_err(|source| match source.kind() {
                    io::ErrorKind::AlreadyExists => WriteError::Exists { path: path.clone() },
                    _ => WriteError::System { path: path.clone(), source },
                })?;
        }
        Ok(files.into_iter().map(|(path, _)| path).collect())
    }

    /// Its title, as the file gives it.
    pub fn title(&self) -> &'static str {
        self.text
            .lines()
            .find_map(|line| line.strip_prefix("title = "))
            .map_or(self.name, |title| title.trim_matches('"'))
    }
}

/// The shipped case of a name.
pub fn find(name: &str) -> Option<&'static Shipped> {
    CASES.iter().find(|case| case.name == name.trim_end_matches(".toml"))
}

/// Every name.
pub fn names() -> impl Iterator<Item = &'static str> {
    CASES.iter().map(|case| case.name)
}

/// Every case with its verb and title, a line each.
pub fn list_text() -> String {
    let width = names().map(str::len).max().unwrap_or(0);
    CASES.iter().map(|case| format!("{:width$}  {:7}  {}\n", case.name, case.verb, case.title())).collect()
}
