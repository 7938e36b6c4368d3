//! Reading a whole file as text, with clear words for everything that is not a text file.

use super::{FileFault, FileFaults};
use std::fs::File;
use std::io::{ErrorKind, Read};
use std::path::Path;

/// Largest file read, bytes.
const MOST_BYTES: u64 = 256 << 20;

/// Most values a file may hold, told by the marks between them: some times what the largest outline needs. Reading
/// more would fill the memory of a small machine before anyone could say that they are too many.
const MOST_VALUES: usize = 6_000_000;

/// The text of a file.
///
/// # Errors
/// One fault: not there, not a file, not readable, too large, not UTF-8.
pub(super) fn text_of(path: &Path) -> Result<String, FileFaults> {
    let fault = |line: Option<usize>, text: String| FileFaults {
        path: path.to_owned(),
        faults: vec![FileFault { line, text }],
    };
    let mut bytes = Vec::new();
    let read = File::open(path).and_then(|file| file.take(MOST_BYTES + 1).read_to_end(&mut bytes));
    match read {
        Err(error) if error.kind() == ErrorKind::NotFound => return Err(fault(None, "there is no such file".into())),
        Err(error) if error.kind() == ErrorKind::IsADirectory || path.is_dir() => {
            return Err(fault(None, "is a folder; name a file in it".into()));
        }
        Err(error) => return Err(fault(None, error.to_string())),
        Ok(read) if read as u64 > MOST_BYTES => {
            return Err(fault(None, format!("is larger than {} MiB; simplify the outline", MOST_BYTES >> 20)));
        }
        Ok(_) => {}
    }
    if bytes.iter().filter(|byte| matches!(byte, b',' | b'[' | b'=' | b'\n')).count() > MOST_VALUES {
        return Err(fault(None, "holds more values than any outline; simplify it".into()));
    }
    String::from_utf8(bytes).map_err(|error| {
        let before = &error.as_bytes()[..error.utf8_error().valid_up_to()];
        let line = 1 + before.iter().filter(|&&byte| byte == b'\n').count();
        fault(Some(line), "is not UTF-8 text; save it as UTF-8".into())
    })
}
