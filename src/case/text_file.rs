//! Reading a text file that a person wrote, with a remedy for each way in which that fails.

use crate::faults::quoted;
use std::fs::File;
use std::io::Read;
use std::path::Path;

/// Why a file could not be read, and what to do.
#[derive(Debug, Clone, PartialEq, Eq)]
pub(super) struct Unreadable {
    pub message: String,
    pub help: Option<String>,
}

fn unreadable(message: impl Into<String>, help: &str) -> Unreadable {
    Unreadable { message: message.into(), help: (!help.is_empty()).then(|| help.to_owned()) }
}

/// The text of a file, without its byte-order mark; at most `most_bytes`. Messages call the file by `name`.
pub(super) fn read(path: &Path, name: &str, most_bytes: u64) -> Result<String, Unreadable> {
    let shown = quoted(name);
    if path.is_dir() {
        return Err(unreadable(format!("{shown} is a folder, not a file"), "name the file inside it"));
    }
    let not_read = |error: std::io::Error| match error.kind() {
        std::io::ErrorKind::NotFound => {
            let help = if name.contains(['\\', '\t', '\n', '\r', '\u{8}', '\u{c}']) {
                "a backslash is no separator of folders here: write the path with `/`"
            } else {
                ""
            };
            unreadable(format!("there is no file {shown}"), help)
        }
        std::io::ErrorKind::PermissionDenied => {
            unreadable(format!("{shown} may not be read"), "ask for the permission")
        }
        _ => unreadable(format!("{shown} cannot be read: {error}"), ""),
    };
    let file = File::open(path).map_err(not_read)?;
    let mut bytes = Vec::new();
    // One byte more than allowed tells a file that is too large, a device without end included.
    file.take(most_bytes + 1).read_to_end(&mut bytes).map_err(not_read)?;
    if bytes.len() as u64 > most_bytes {
        let most = most_bytes / (1 << 20);
        return Err(unreadable(format!("{shown} is larger than {most} MiB"), "is this the file that was meant?"));
    }
    decode(bytes).map_err(|fault| Unreadable { message: format!("{shown} {}", fault.message), ..fault })
}

fn decode(bytes: Vec<u8>) -> Result<String, Unreadable> {
    const AS_UTF8: &str = "save it as UTF-8 (in the editor: save as, encoding UTF-8)";
    let has_mark = bytes.starts_with(&[0xff, 0xfe]) || bytes.starts_with(&[0xfe, 0xff]);
    if has_mark || bytes.iter().take(200).filter(|&&byte| byte == 0).count() > 1 {
        return Err(unreadable("is not UTF-8 text but UTF-16, or no text at all", AS_UTF8));
    }
    let text = String::from_utf8(bytes).map_err(|error| {
        let line =
            error.as_bytes()[..error.utf8_error().valid_up_to()].iter().filter(|&&byte| byte == b'\n').count() + 1;
        unreadable(format!("is not UTF-8 text: line {line} holds a byte of another encoding"), AS_UTF8)
    })?;
    Ok(match text.strip_prefix('\u{feff}') {
        Some(rest) => rest.to_owned(),
        None => text,
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn each_way_of_failing_has_its_message() {
        let folder = tempfile::tempdir().unwrap();
        let message = |name: &str, bytes: &[u8]| {
            let path = folder.path().join(name);
            std::fs::write(&path, bytes).unwrap();
            read(&path, "FILE", 1 << 20).map_err(|fault| fault.message)
        };
        assert_eq!(message("mark", b"\xef\xbb\xbfa"), Ok("a".into()));
        assert_eq!(
            message("wide", b"\xff\xfea\0"),
            Err("`FILE` is not UTF-8 text but UTF-16, or no text at all".into())
        );
        assert_eq!(message("bare", b"a\0b\0"), Err("`FILE` is not UTF-8 text but UTF-16, or no text at all".into()));
        assert_eq!(
            message("latin", b"ok\n25 \xb0C"),
            Err("`FILE` is not UTF-8 text: line 2 holds a byte of another encoding".into())
        );
        assert_eq!(message("huge", &vec![b'a'; (1 << 20) + 1]), Err("`FILE` is larger than 1 MiB".into()));
        assert!(read(folder.path(), ".", 1).unwrap_err().message.ends_with("is a folder, not a file"));
        assert!(read(&folder.path().join("a\\b"), "a\\b", 1).unwrap_err().help.unwrap().contains("backslash"));
    }
}
