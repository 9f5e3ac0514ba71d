//! One mistake a file: every file under `tests/bad` is refused (or warned of) with the exact text of the snapshot
//! beside it. A line `# --set path=value` in a file is given as an override.

use std::path::{Path, PathBuf};
use stillwarm::case;

fn folder(name: &str) -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("tests").join(name)
}

/// Files of a folder with an extension, sorted.
fn files(name: &str, extension: &str) -> Vec<PathBuf> {
    let entries = std::fs::read_dir(folder(name)).expect("the folder of cases");
    let mut files: Vec<_> = entries
        .map(|entry| entry.expect("an entry").path())
        .filter(|path| path.extension().is_some_and(|found| found == extension))
        .collect();
    files.sort();
    files
}

/// What is told of a file, and whether it was refused.
fn told(path: &Path) -> (bool, String) {
    let text = std::fs::read_to_string(path).expect("a case");
    let overrides: Vec<_> = text.lines().filter_map(|line| line.strip_prefix("# --set ")).map(str::to_owned).collect();
    let name = path.file_name().expect("a name").to_string_lossy();
    match case::load_text(&name, &text, path.parent().expect("a folder"), &overrides) {
        Ok(loaded) => (false, loaded.warnings.to_string()),
        Err(faults) => (true, faults.to_string()),
    }
}

#[test]
fn every_bad_file_gets_its_exact_message() {
    let files = files("bad", "toml");
    assert!(files.len() >= 45, "only {} bad files", files.len());
    let mut settings = insta::Settings::clone_current();
    settings.set_snapshot_path(folder("bad"));
    settings.set_prepend_module_to_snapshot(false);
    settings.set_omit_expression(true);
    settings.bind(|| {
        for path in files {
            let name = path.file_stem().expect("a name").to_string_lossy().into_owned();
            let (is_refused, message) = told(&path);
            assert_eq!(is_refused, !name.starts_with("warning_"), "{name}:\n{message}");
            assert!(!message.is_empty(), "{name} is not even warned of");
            insta::assert_snapshot!(name, message);
        }
    });
}

#[test]
fn every_snapshot_has_its_file() {
    for snapshot in files("bad", "snap") {
        assert!(snapshot.with_extension("toml").exists(), "{} has no case", snapshot.display());
    }
}

#[test]
fn good_files_are_read_without_a_word() {
    for path in files("good", "toml") {
        let (is_refused, message) = told(&path);
        assert!(!is_refused && message.is_empty(), "{}:\n{message}", path.display());
    }
}
