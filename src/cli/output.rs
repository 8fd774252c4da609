//! Where results go: standard output or whole files.

use super::exit::CommandError;
use crate::study::FileError;
use crate::study::file::write_whole;
use std::io::Write;
use std::path::Path;

/// To standard output. A reader who went away (`| head`) is no fault.
pub(super) fn print(text: &str) {
    let mut stdout = std::io::stdout().lock();
    let _ = stdout.write_all(text.as_bytes());
    let _ = stdout.flush();
}

/// Whether a path means standard output.
pub(super) fn is_standard(path: &Path) -> bool {
    path.as_os_str() == "-"
}

/// To a file, or to standard output for `-`.
pub(super) fn write(path: &Path, content: &[u8]) -> Result<(), CommandError> {
    if is_standard(path) {
        print(&String::from_utf8_lossy(content));
        return Ok(());
    }
    write_whole(path, content).map_err(|error| match error {
        FileError::Unwritable { path, reason } => CommandError::Unwritable { path, reason },
        other => CommandError::File(other),
    })
}

/// A folder, made if it is not there.
pub(super) fn folder(path: &Path) -> Result<(), CommandError> {
    std::fs::create_dir_all(path).map_err(|reason| CommandError::Unwritable {
        path: path.to_owned(),
        reason,
    })
}
