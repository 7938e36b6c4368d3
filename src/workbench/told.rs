//! What went wrong with files, in words with the mend.

use super::update::Input;
use crate::file::SaveFault;

/// Marks of an earlier run that cannot be taken back; their file stays.
pub(super) fn not_taken_back(mut lines: Vec<String>) -> Input {
    lines.push(String::new());
    lines.push("Marks of an earlier run cannot be taken back. The file stays where it is.".to_owned());
    Input::Told { title: "marks of an earlier run", lines }
}

/// A fault with its mend.
pub(super) fn told(fault: &SaveFault) -> Vec<String> {
    let mut lines = vec![fault.to_string()];
    let mend = match fault {
        SaveFault::ChangedMeanwhile(_) => "Read it again, then save.",
        SaveFault::Unreadable(faults) => {
            lines = faults.lines();
            "Mend that file or move it away, then press s again."
        }
        SaveFault::OtherPart(_) => "Move that file away, then press s again: a new one is made.",
        SaveFault::Io { .. } => "See to the rights and the free space of its directory, then press s again.",
    };
    lines.push(String::new());
    lines.push(mend.to_owned());
    lines.push("The file is as it was, and the marks are still here.".to_owned());
    lines
}
