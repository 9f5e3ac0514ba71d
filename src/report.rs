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
pub mod text;

use crate::answer::Findings;
use std::fs::{self, File, Permissions};
use std::io::{self, ErrorKind, Write};
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
    let files = files(findings)?;
    let fault = |source| ReportError::from_io(folder, source);
    if folder.is_dir() {
        let whole = write_beside(folder, &files).map_err(fault)?;
        for (name, _) in &files {
            fs::rename(whole.path().join(name), folder.join(name)).map_err(fault)?;
        }
        for name in FILE_NAMES.iter().filter(|name| !files.iter().any(|(written, _)| written == *name)) {
            match fs::remove_file(folder.join(name)) {
                Err(error) if error.kind() != ErrorKind::NotFound => return Err(fault(error)),
                _ => {}
            }
        }
    } else {
        if fs::symlink_metadata(folder).is_ok() {
            return Err(ReportError::NotAFolder { path: folder.into() });
        }
        let parent = match folder.parent() {
            Some(parent) if !parent.as_os_str().is_empty() => parent,
            _ => Path::new("."),
        };
        fs::create_dir_all(parent).map_err(fault)?;
        let whole = write_beside(parent, &files).map_err(fault)?;
        fs::rename(whole.path(), folder).map_err(fault)?;
        // What was temporary now bears its final name: there is nothing left to clear away.
        let _ = whole.keep();
    }
    Ok(files.iter().map(|(name, _)| folder.join(name)).collect())
}

/// Shows a file with the program that the system has for its kind.
///
/// # Errors
/// Where the system has none or it does not start.
pub fn open(path: &Path) -> Result<(), ReportError> {
    opener::open(path).map_err(|error| ReportError::Opening { path: path.into(), reason: error.to_string() })
}

/// Names and contents of all files of a report.
fn files(findings: &Findings) -> Result<Vec<(String, Vec<u8>)>, ReportError> {
    let mut answer = serde_json::to_vec_pretty(&json::answer_json(findings)).expect("a JSON value can be written");
    answer.push(b'\n');
    let table = |write: fn(&mut Vec<u8>, &Findings) -> Result<(), csv::Error>| {
        let mut bytes = Vec::new();
        write(&mut bytes, findings).expect("rows of one length go into memory");
        bytes
    };
    let mut files = vec![
        ("answer.json".to_string(), answer),
        ("history.csv".to_string(), table(|bytes, findings| tables::write_history(bytes, findings))),
        ("profile.csv".to_string(), table(|bytes, findings| tables::write_profile(bytes, findings))),
    ];
    for figure in figure::all(findings) {
        files.push((format!("{}.svg", figure.stem), drawing::svg(&figure)?.into_bytes()));
        files.push((format!("{}.png", figure.stem), drawing::png(&figure)?));
    }
    files.push(("report.html".to_string(), page::page(findings)?.into_bytes()));
    Ok(files)
}

/// Writes all files, down to the disk, into a temporary folder within a folder.
fn write_beside(folder: &Path, files: &[(String, Vec<u8>)]) -> io::Result<TempDir> {
    let mut builder = tempfile::Builder::new();
    builder.prefix(".stillwarm-");
    #[cfg(unix)]
    {
        // The ordinary permissions of a new folder: the user's mask still applies.
        use std::os::unix::fs::PermissionsExt;
        builder.permissions(Permissions::from_mode(0o777));
    }
    let whole = builder.tempdir_in(folder)?;
    for (name, bytes) in files {
        let mut file = File::create(whole.path().join(name))?;
        file.write_all(bytes)?;
        file.sync_all()?;
    }
    Ok(whole)
}

/// stand-in
pub(crate) fn duration_words(time_s: f64, danger: bool) -> String {
    let minutes = if danger { (time_s / 60.0).floor() } else { (time_s / 60.0).ceil() };
    let (hours, minutes) = ((minutes / 60.0).floor(), minutes % 60.0);
    if hours == 0.0 { format!("{minutes} min") } else { format!("{hours} h {minutes} min") }
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
