//! Files written whole or not at all: into a temporary file of the same folder, then renamed.

use super::OutputError;
use std::io::Write;
use std::path::{Path, PathBuf};
use std::sync::{Mutex, MutexGuard, PoisonError};
use tempfile::{Builder, NamedTempFile};

/// Temporary files that are being filled, so that a process about to end can take them with it.
struct Unfinished(Mutex<Vec<PathBuf>>);

static UNFINISHED: Unfinished = Unfinished(Mutex::new(Vec::new()));

impl Unfinished {
    fn list(&self) -> MutexGuard<'_, Vec<PathBuf>> {
        // a panic elsewhere leaves the list itself sound
        self.0.lock().unwrap_or_else(PoisonError::into_inner)
    }

    /// Takes away what is being filled and never lets go of the list: no file is begun or put in its place any more.
    fn remove(&self) {
        let list = self.list();
        for path in list.iter() {
            // gone already, or not ours to remove: there is nothing more to be done about it
            let _ = std::fs::remove_file(path);
        }
        std::mem::forget(list);
    }
}

/// Removes files that are being written. Only for a process that ends right after: nothing can be written any more.
pub(super) fn remove_unfinished() {
    UNFINISHED.remove();
}

/// Runs `fill` on a temporary file beside `path`, and puts it in the place of `path` only when everything went well.
///
/// The temporary file carries the extension of `path`, because encoders choose by it.
///
/// # Errors
/// What `fill` returns, or [`OutputError::File`] when the folder or the disk refuses.
pub(super) fn write_with(
    path: &Path,
    fill: impl FnOnce(&mut NamedTempFile) -> Result<(), OutputError>,
) -> Result<(), OutputError> {
    let failed = |source| OutputError::File { path: path.to_path_buf(), source };
    let folder = match path.parent() {
        Some(folder) if !folder.as_os_str().is_empty() => folder,
        _ => Path::new("."),
    };
    let ending = path.extension().map(|e| format!(".{}", e.to_string_lossy())).unwrap_or_default();
    let mut list = UNFINISHED.list();
    let mut file = Builder::new().prefix(".unfinished-").suffix(&ending).tempfile_in(folder).map_err(failed)?;
    list.push(file.path().to_path_buf());
    drop(list);
    let filled = fill(&mut file).and_then(|()| {
        file.flush().map_err(failed)?;
        readable_by_all(file.as_file()).map_err(failed)
    });
    let mut list = UNFINISHED.list();
    list.retain(|p| p != file.path());
    filled?;
    file.persist(path).map_err(|e| failed(e.error))?;
    Ok(())
}

/// Writes `bytes` to `path`, whole or not at all.
///
/// # Errors
/// [`OutputError::File`].
pub(super) fn write_bytes(path: &Path, bytes: &[u8]) -> Result<(), OutputError> {
    write_with(path, |file| {
        file.write_all(bytes).map_err(|source| OutputError::File { path: path.to_path_buf(), source })
    })
}

/// Temporary files are made private; a result is a file like any other.
#[cfg(unix)]
fn readable_by_all(file: &std::fs::File) -> std::io::Result<()> {
    use std::os::unix::fs::PermissionsExt;
    file.set_permissions(std::fs::Permissions::from_mode(0o644))
}

#[cfg(not(unix))]
fn readable_by_all(_file: &std::fs::File) -> std::io::Result<()> {
    Ok(())
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]
    use super::*;

    #[test]
    fn a_failed_write_leaves_the_earlier_file_and_no_litter() {
        let folder = tempfile::tempdir().unwrap();
        let path = folder.path().join("result.csv");
        write_bytes(&path, b"first").unwrap();
        let failure = write_with(&path, |file| {
            file.write_all(b"half").unwrap();
            Err(OutputError::Nothing { what: "result".into(), needs: "rows".into() })
        });
        assert!(failure.is_err());
        assert_eq!(std::fs::read(&path).unwrap(), b"first");
        assert_eq!(std::fs::read_dir(folder.path()).unwrap().count(), 1);
    }

    #[test]
    fn a_process_that_ends_takes_its_unfinished_files_along() {
        let folder = tempfile::tempdir().unwrap();
        let path = folder.path().join(".unfinished-1.csv");
        std::fs::write(&path, b"half").unwrap();
        let unfinished = Unfinished(Mutex::new(vec![path.clone(), folder.path().join("never there")]));
        unfinished.remove();
        assert!(!path.exists());
        assert!(unfinished.0.try_lock().is_err(), "nothing more is begun or finished");
    }

    #[test]
    fn what_is_finished_or_failed_is_no_longer_unfinished() {
        let folder = tempfile::tempdir().unwrap();
        let ours = |list: &[PathBuf]| list.iter().filter(|p| p.starts_with(folder.path())).count();
        write_with(&folder.path().join("a.csv"), |_| {
            assert_eq!(ours(&UNFINISHED.list()), 1);
            Ok(())
        })
        .unwrap();
        let failed = write_with(&folder.path().join("b.csv"), |_| {
            Err(OutputError::Nothing { what: "result".into(), needs: "rows".into() })
        });
        assert!(failed.is_err());
        assert_eq!(ours(&UNFINISHED.list()), 0);
        assert_eq!(std::fs::read_dir(folder.path()).unwrap().count(), 1);
    }

    #[test]
    fn a_missing_folder_is_named() {
        let folder = tempfile::tempdir().unwrap();
        let path = folder.path().join("nowhere").join("result.csv");
        let message = write_bytes(&path, b"x").unwrap_err().to_string();
        assert!(message.contains("nowhere") && message.contains("folder exists"), "{message}");
    }
}
