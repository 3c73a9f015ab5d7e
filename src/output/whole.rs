//! Files written whole or not at all: into a temporary file of the same folder, then renamed.
//!
//! A link is followed, so that the file it names is replaced and the link stays. What is no regular file (a pipe, a terminal,
//! a device) cannot be replaced by one: it gets the finished bytes written straight into it.

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

/// Links followed one after another at most, before they are taken for a circle.
const MOST_LINKS: usize = 40;

/// Where finished bytes go.
#[derive(Debug, PartialEq)]
enum Destination {
    /// A regular file, or nothing yet: replaced as a whole.
    Replace(PathBuf),
    /// A pipe, a terminal or a device: written into.
    Straight,
}

impl Destination {
    /// What stands at a path, links followed; a link to what is not there yet leads to where the file will be.
    fn of(path: &Path) -> Destination {
        match std::fs::metadata(path) {
            Ok(there) if !there.is_file() => return Destination::Straight,
            Ok(_) => return Destination::Replace(path.canonicalize().unwrap_or_else(|_| path.to_path_buf())),
            Err(_) => {}
        }
        let mut at = path.to_path_buf();
        for _ in 0..MOST_LINKS {
            let Ok(next) = std::fs::read_link(&at) else { break };
            // a relative link starts in its own folder; an absolute one takes the place of all of it
            at = folder_of(&at).join(next);
        }
        Destination::Replace(at)
    }
}

fn folder_of(path: &Path) -> &Path {
    match path.parent() {
        Some(folder) if !folder.as_os_str().is_empty() => folder,
        _ => Path::new("."),
    }
}

/// Runs `fill` on a temporary file, and puts it in the place of `path` only when everything went well.
///
/// The temporary file stands beside what it will replace and carries the extension of `path`, because encoders choose by it.
///
/// # Errors
/// What `fill` returns, or [`OutputError::File`] when the folder or the disk refuses.
pub(super) fn write_with(
    path: &Path,
    fill: impl FnOnce(&mut NamedTempFile) -> Result<(), OutputError>,
) -> Result<(), OutputError> {
    let failed = |source| OutputError::File { path: path.to_path_buf(), source };
    let destination = Destination::of(path);
    let folder = match &destination {
        Destination::Replace(file) => folder_of(file).to_path_buf(),
        Destination::Straight => std::env::temp_dir(),
    };
    let ending = path.extension().map(|e| format!(".{}", e.to_string_lossy())).unwrap_or_default();
    let mut list = UNFINISHED.list();
    let mut file = Builder::new().prefix(".unfinished-").suffix(&ending).tempfile_in(folder).map_err(failed)?;
    list.push(file.path().to_path_buf());
    drop(list);
    let filled = fill(&mut file).and_then(|()| {
        file.flush().map_err(failed)?;
        match &destination {
            Destination::Replace(old) => take_permissions(file.as_file(), old).map_err(failed),
            // a pipe may keep it waiting: the file is still on the list meanwhile
            Destination::Straight => pour(file.path(), path).map_err(failed),
        }
    });
    let mut list = UNFINISHED.list();
    list.retain(|p| p != file.path());
    filled?;
    if let Destination::Replace(old) = &destination {
        file.persist(old).map_err(|e| failed(e.error))?;
    }
    Ok(())
}

/// Copies a finished file into what is no regular file.
fn pour(from: &Path, into: &Path) -> std::io::Result<()> {
    let mut target = std::fs::OpenOptions::new().write(true).open(into)?;
    std::io::copy(&mut std::fs::File::open(from)?, &mut target)?;
    target.flush()
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

/// Temporary files are made private; a result is a file like any other, or like the one it replaces.
#[cfg(unix)]
fn take_permissions(file: &std::fs::File, old: &Path) -> std::io::Result<()> {
    use std::os::unix::fs::PermissionsExt;
    let permissions =
        std::fs::metadata(old).map_or_else(|_| std::fs::Permissions::from_mode(0o644), |there| there.permissions());
    file.set_permissions(permissions)
}

#[cfg(not(unix))]
fn take_permissions(_file: &std::fs::File, _old: &Path) -> std::io::Result<()> {
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

    #[cfg(unix)]
    #[test]
    fn links_are_followed_and_stay_links() {
        use std::os::unix::fs::{PermissionsExt, symlink};
        let folder = tempfile::tempdir().unwrap();
        std::fs::create_dir(folder.path().join("kept")).unwrap();
        let (real, link, early) =
            (folder.path().join("kept/real.csv"), folder.path().join("link.csv"), folder.path().join("early.csv"));
        std::fs::write(&real, b"old").unwrap();
        std::fs::set_permissions(&real, std::fs::Permissions::from_mode(0o600)).unwrap();
        symlink(&real, &link).unwrap();
        // nothing there yet, and named from the link's own folder
        symlink("kept/later.csv", &early).unwrap();
        for path in [&link, &early] {
            write_bytes(path, b"new").unwrap();
            assert!(path.symlink_metadata().unwrap().is_symlink(), "{}", path.display());
        }
        assert_eq!(std::fs::read(&real).unwrap(), b"new");
        assert_eq!(real.metadata().unwrap().permissions().mode() & 0o777, 0o600);
        assert_eq!(std::fs::read(folder.path().join("kept/later.csv")).unwrap(), b"new");
    }

    #[cfg(unix)]
    #[test]
    fn what_is_no_regular_file_is_written_into_and_stays() {
        use std::os::unix::fs::FileTypeExt;
        let folder = tempfile::tempdir().unwrap();
        let pipe = folder.path().join("pipe.csv");
        assert!(std::process::Command::new("mkfifo").arg(&pipe).status().unwrap().success());
        let reader = std::thread::spawn({
            let pipe = pipe.clone();
            move || std::fs::read(pipe).unwrap()
        });
        write_bytes(&pipe, b"rows").unwrap();
        // before the reader is waited for: it would wait for ever on a file that took the pipe's place
        assert!(pipe.symlink_metadata().unwrap().file_type().is_fifo());
        assert_eq!(reader.join().unwrap(), b"rows");
        assert_eq!(Destination::of(Path::new("/dev/null")), Destination::Straight);
        write_bytes(Path::new("/dev/null"), b"rows").unwrap();
        assert!(write_bytes(folder.path(), b"rows").unwrap_err().to_string().contains("directory"));
    }
}
