//! Turns findings into what people and programs read: `answer.json`, tables, figures and a page.
//!
//! [`write_folder`] writes them all. Nothing half-written is ever left under a final name: files are made in a temporary
//! folder on the same disk and moved into place once all of them are whole.

pub mod axis;
pub mod cross_section;
pub mod drawing;
pub mod figure;
mod font;
pub mod json;
pub mod page;
pub mod tables;
pub mod terminal;
pub mod text;

use crate::answer::Findings;
use crate::duration::{self, Rounding};
use std::fs::{self, File};
use std::io::{self, BufWriter, ErrorKind, Write};
use std::path::{Path, PathBuf};
use tempfile::TempDir;
use thiserror::Error;

/// Every name that a report may have in its folder. Those of an earlier report that the present one does not write are
/// taken away, lest they be taken for its own.
pub const FILE_NAMES: [&str; 10] = [
    "answer.json",
    "history.csv",
    "profile.csv",
    "histories.svg",
    "histories.png",
    "profiles.svg",
    "profiles.png",
    "heat-balance.svg",
    "heat-balance.png",
    "report.html",
];

/// A report could not be written.
#[derive(Debug, Error)]
pub enum ReportError {
    /// The folder's name belongs to something that is no folder.
    #[error("cannot write the report: {path} is no folder\nhint: name another folder")]
    NotAFolder {
        /// What is in the way.
        path: PathBuf,
    },
    /// Writing is not allowed.
    #[error("cannot write the report to {path}: {source}\nhint: name a folder that you may write to")]
    NotAllowed {
        /// Where.
        path: PathBuf,
        /// What the system says.
        source: io::Error,
    },
    /// The disk is full, or the quota.
    #[error(
        "cannot write the report to {path}: {source}\nhint: make room, or name a folder on another disk; nothing was left behind"
    )]
    Full {
        /// Where.
        path: PathBuf,
        /// What the system says.
        source: io::Error,
    },
    /// Another fault of the file system.
    #[error("cannot write the report to {path}: {source}")]
    System {
        /// Where.
        path: PathBuf,
        /// What the system says.
        source: io::Error,
    },
    /// A figure could not be drawn.
    #[error(transparent)]
    Drawing(#[from] drawing::DrawingError),
    /// The report could not be shown.
    #[error("cannot open {path}: {reason}\nhint: open it in a browser")]
    Opening {
        /// What was to be opened.
        path: PathBuf,
        /// What the system says.
        reason: String,
    },
}

impl ReportError {
    fn from_io(path: &Path, source: io::Error) -> Self {
        let path = path.to_path_buf();
        match source.kind() {
            ErrorKind::NotADirectory | ErrorKind::AlreadyExists => ReportError::NotAFolder { path },
            ErrorKind::PermissionDenied | ErrorKind::ReadOnlyFilesystem => ReportError::NotAllowed { path, source },
            ErrorKind::StorageFull | ErrorKind::QuotaExceeded => ReportError::Full { path, source },
            _ => ReportError::System { path, source },
        }
    }
}

/// Writes the whole report into a folder, which is made where it is missing, and gives the paths of its files in the order of
/// [`FILE_NAMES`]. A state without a history (`steady`) has no histories and no heat balance.
///
/// A new folder appears complete or not at all; in one that exists, whole files replace those of their names one by one, and
/// files of an earlier report that this one lacks are removed.
///
/// # Errors
/// Where the folder cannot be made or written to, or a figure cannot be drawn; nothing of this report is then left behind unless
/// the fault struck amid the replacing.
pub fn write_folder(folder: &Path, findings: &Findings) -> Result<Vec<PathBuf>, ReportError> {
    let fault = |source| ReportError::from_io(folder, source);
    let names = if folder.is_dir() {
        let whole = temporary_within(folder).map_err(fault)?;
        let names = write_files(whole.path(), folder, findings)?;
        for name in &names {
            fs::rename(whole.path().join(name), folder.join(name)).map_err(fault)?;
        }
        for name in FILE_NAMES.iter().filter(|name| !names.contains(name)) {
            match fs::remove_file(folder.join(name)) {
                Err(error) if error.kind() != ErrorKind::NotFound => return Err(fault(error)),
                _ => {}
            }
        }
        names
    } else {
        if fs::symlink_metadata(folder).is_ok() {
            return Err(ReportError::NotAFolder { path: folder.into() });
        }
        let parent = match folder.parent() {
            Some(parent) if !parent.as_os_str().is_empty() => parent,
            _ => Path::new("."),
        };
        fs::create_dir_all(parent).map_err(fault)?;
        let whole = temporary_within(parent).map_err(fault)?;
        let names = write_files(whole.path(), folder, findings)?;
        fs::rename(whole.path(), folder).map_err(fault)?;
        // What was temporary now bears its final name: there is nothing left to clear away.
        let _ = whole.keep();
        names
    };
    Ok(names.into_iter().map(|name| folder.join(name)).collect())
}

/// Shows a file with the program that the system has for its kind.
///
/// # Errors
/// Where the system has none or it does not start.
pub fn open(path: &Path) -> Result<(), ReportError> {
    opener::open(path).map_err(|error| ReportError::Opening { path: path.into(), reason: error.to_string() })
}

/// A temporary folder with the ordinary permissions of a new one, removed when it is dropped.
fn temporary_within(folder: &Path) -> io::Result<TempDir> {
    let mut builder = tempfile::Builder::new();
    builder.prefix(".stillwarm-");
    #[cfg(unix)]
    {
        use std::os::unix::fs::PermissionsExt;
        // The user's mask still applies.
        builder.permissions(fs::Permissions::from_mode(0o777));
    }
    builder.tempdir_in(folder)
}

/// Writes every file of the report, down to the disk, and gives their names; faults name the folder that they were meant for.
fn write_files(into: &Path, meant_for: &Path, findings: &Findings) -> Result<Vec<&'static str>, ReportError> {
    let fault = |source| ReportError::from_io(meant_for, source);
    let mut names = Vec::new();
    let mut write = |name: &'static str, fill: &dyn Fn(&mut BufWriter<File>) -> io::Result<()>| {
        names.push(name);
        let mut file = BufWriter::new(File::create(into.join(name))?);
        fill(&mut file)?;
        file.into_inner()?.sync_all()
    };
    write("answer.json", &|file| {
        serde_json::to_writer_pretty(&mut *file, &json::answer_json(findings))?;
        file.write_all(b"\n")
    })
    .map_err(fault)?;
    write("history.csv", &|file| Ok(tables::write_history(file, findings)?)).map_err(fault)?;
    write("profile.csv", &|file| Ok(tables::write_profile(file, findings)?)).map_err(fault)?;
    for figure in figure::all(findings) {
        let (svg, png) = (drawing::svg(&figure)?, drawing::png(&figure)?);
        let (svg_name, png_name) = figure.file_names();
        write(svg_name, &|file| file.write_all(svg.as_bytes())).map_err(fault)?;
        write(png_name, &|file| file.write_all(&png)).map_err(fault)?;
    }
    let page = page::page(findings)?;
    write("report.html", &|file| file.write_all(page.as_bytes())).map_err(fault)?;
    Ok(names)
}

/// A time in words, rounded to the safe side: down to a danger, up to a recovery.
pub(crate) fn duration_words(time_s: f64, danger: bool) -> String {
    duration::words(time_s, if danger { Rounding::Down } else { Rounding::Up })
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn faults_of_the_disk_are_told_apart() {
        let told = |kind: ErrorKind| ReportError::from_io(Path::new("out"), io::Error::from(kind));
        assert!(matches!(told(ErrorKind::StorageFull), ReportError::Full { .. }));
        assert!(matches!(told(ErrorKind::PermissionDenied), ReportError::NotAllowed { .. }));
        assert!(matches!(told(ErrorKind::ReadOnlyFilesystem), ReportError::NotAllowed { .. }));
        assert!(matches!(told(ErrorKind::NotADirectory), ReportError::NotAFolder { .. }));
        assert!(matches!(told(ErrorKind::Interrupted), ReportError::System { .. }));
    }
}
