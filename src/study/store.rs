//! Where a long study keeps its finished points: a SQLite file that survives a kill at any moment.
//!
//! The file is in write-ahead mode and every point is one transaction, so a point is there whole or not at all. It belongs
//! to one station and one version of the numbers; another is refused.

use crate::outcome::vary::VariedRow;
use rusqlite::{Connection, ErrorCode, OpenFlags, OptionalExtension, params};
use serde_json::Value;
use std::path::{Path, PathBuf};
use std::sync::{Mutex, MutexGuard, PoisonError};
use std::time::Duration;

/// Version of the numbers: raised whenever a result changes by more than rounding, so that old and new rows never mix.
pub const NUMERICS: u32 = 1;

/// Marks the file as one of ours (SQLite's application id): "BRDW" in ASCII.
const APPLICATION_ID: i32 = 0x4252_4457;

/// How long to wait for another process that is writing.
const PATIENCE: Duration = Duration::from_secs(20);

/// Why the store cannot be used.
#[derive(Debug, thiserror::Error)]
pub enum StoreError {
    /// It may not be written.
    #[error("the store {} is write-protected; make it (and its folder) writable, or give another --store", path.display())]
    ReadOnly {
        /// The file.
        path: PathBuf,
    },
    /// No room.
    #[error("there is no room to write the store {}; what was finished is in it: make room and run the same command again", path.display())]
    Full {
        /// The file.
        path: PathBuf,
    },
    /// Some other file.
    #[error("{} is not a store of this program; it was left as it is: give another --store", path.display())]
    NotAStore {
        /// The file.
        path: PathBuf,
    },
    /// Rows of another station.
    #[error("the store {} belongs to another station: {difference}; its rows would not be comparable, so give another --store", path.display())]
    OtherStation {
        /// The file.
        path: PathBuf,
        /// The first thing that differs.
        difference: String,
    },
    /// Rows of another version of the program.
    #[error("the store {} was filled by numbers version {theirs}, this program computes version {}; give another --store", path.display(), NUMERICS)]
    OtherNumerics {
        /// The file.
        path: PathBuf,
        /// Its version.
        theirs: String,
    },
    /// Anything else.
    #[error("the store {} cannot be used: {source}", path.display())]
    Other {
        /// The file.
        path: PathBuf,
        /// What the database says.
        source: rusqlite::Error,
    },
    /// A row that cannot be read back.
    #[error("the store {} holds a row that cannot be read ({reason}); give another --store", path.display())]
    Damaged {
        /// The file.
        path: PathBuf,
        /// Why.
        reason: String,
    },
}

/// A finished point: its rows, or why there are none.
#[derive(Debug, Clone, PartialEq)]
pub struct Finished {
    /// Names of the values of each row.
    pub want: Vec<String>,
    /// A row a variant and frequency.
    pub rows: Vec<VariedRow>,
    /// Why it failed.
    pub failed: Option<String>,
}

/// Finished points by key. Safe to share between threads.
#[derive(Debug)]
pub struct Store {
    path: PathBuf,
    connection: Mutex<Connection>,
}

impl Store {
    /// Opens a store, or makes one, for a station.
    ///
    /// # Inputs
    /// - `station`: the station's content, by which it is told from another
    ///
    /// # Errors
    /// [`StoreError`]; the file is left as it was.
    pub fn open(path: &Path, station: &Value) -> Result<Self, StoreError> {
        if std::fs::metadata(path).is_ok_and(|m| m.permissions().readonly()) {
            return Err(StoreError::ReadOnly { path: path.to_path_buf() });
        }
        // without URI: a name that starts with "file:" is a name
        let flags = OpenFlags::SQLITE_OPEN_READ_WRITE | OpenFlags::SQLITE_OPEN_CREATE | OpenFlags::SQLITE_OPEN_NO_MUTEX;
        let connection = Connection::open_with_flags(path, flags).map_err(|e| failure(path, e))?;
        Self::prepare(path, connection, station)
    }

    /// A store that is gone when it is dropped.
    ///
    /// # Errors
    /// [`StoreError::Other`].
    pub fn in_memory(station: &Value) -> Result<Self, StoreError> {
        let path = Path::new("in memory");
        let connection = Connection::open_in_memory().map_err(|e| failure(path, e))?;
        Self::prepare(path, connection, station)
    }

    fn prepare(path: &Path, connection: Connection, station: &Value) -> Result<Self, StoreError> {
        let failed = |e| failure(path, e);
        connection.busy_timeout(PATIENCE).map_err(failed)?;
        let id: i32 = connection.pragma_query_value(None, "application_id", |r| r.get(0)).map_err(failed)?;
        let tables: i64 =
            connection.query_row("SELECT count(*) FROM sqlite_schema", [], |r| r.get(0)).map_err(failed)?;
        if id != APPLICATION_ID && tables > 0 {
            return Err(StoreError::NotAStore { path: path.to_path_buf() });
        }
        if tables > 0 {
            // Judged before anything is written.
            same_station(path, &connection, station)?;
        }
        connection.pragma_update(None, "journal_mode", "WAL").map_err(failed)?;
        // In write-ahead mode a kill loses nothing at NORMAL; only a power cut may take the last rows, whole.
        connection.pragma_update(None, "synchronous", "NORMAL").map_err(failed)?;
        let store = Self { path: path.to_path_buf(), connection: Mutex::new(connection) };
        if tables == 0 {
            store.create(station)?;
        }
        Ok(store)
    }

    fn create(&self, station: &Value) -> Result<(), StoreError> {
        let mut connection = self.connection();
        let work = |connection: &mut Connection| -> rusqlite::Result<()> {
            let transaction = connection.transaction_with_behavior(rusqlite::TransactionBehavior::Immediate)?;
            transaction.pragma_update(None, "application_id", APPLICATION_ID)?;
            transaction.execute_batch(
                "CREATE TABLE IF NOT EXISTS about (name TEXT PRIMARY KEY, value TEXT NOT NULL) WITHOUT ROWID;
                 CREATE TABLE IF NOT EXISTS point (key TEXT PRIMARY KEY, want TEXT NOT NULL, rows TEXT NOT NULL, failed TEXT);",
            )?;
            let about = [("station", station.to_string()), ("numerics", NUMERICS.to_string())];
            for (name, value) in about {
                transaction.execute("INSERT OR IGNORE INTO about VALUES (?1, ?2)", params![name, value])?;
            }
            transaction.commit()
        };
        work(&mut connection).map_err(|e| failure(&self.path, e))?;
        // Another process may have been first, for another station.
        same_station(&self.path, &connection, station)
    }

    fn connection(&self) -> MutexGuard<'_, Connection> {
        // A panic elsewhere leaves the database itself sound.
        self.connection.lock().unwrap_or_else(PoisonError::into_inner)
    }

    /// A finished point, where it is there with every quantity wanted.
    ///
    /// # Errors
    /// [`StoreError`].
    pub fn get(&self, key: &str, want: &[String]) -> Result<Option<Finished>, StoreError> {
        let connection = self.connection();
        let row: Option<(String, String, Option<String>)> = connection
            .prepare_cached("SELECT want, rows, failed FROM point WHERE key = ?1")
            .and_then(|mut s| s.query_row([key], |r| Ok((r.get(0)?, r.get(1)?, r.get(2)?))).optional())
            .map_err(|e| failure(&self.path, e))?;
        let Some((stored_want, rows, failed)) = row else { return Ok(None) };
        let damaged = |e: serde_json::Error| StoreError::Damaged { path: self.path.clone(), reason: e.to_string() };
        let stored_want: Vec<String> = serde_json::from_str(&stored_want).map_err(damaged)?;
        let rows: Vec<VariedRow> = serde_json::from_str(&rows).map_err(damaged)?;
        Ok(Finished { want: stored_want, rows, failed }.with(want))
    }

    /// Keeps a finished point, at once and for good; one that is there with fewer quantities is replaced.
    ///
    /// # Errors
    /// [`StoreError`]; the rows written before stay.
    pub fn put(&self, key: &str, finished: &Finished) -> Result<(), StoreError> {
        let text = |value: serde_json::Result<String>| {
            value.map_err(|e| StoreError::Damaged { path: self.path.clone(), reason: e.to_string() })
        };
        let want = text(serde_json::to_string(&finished.want))?;
        let rows = text(serde_json::to_string(&finished.rows))?;
        self.connection()
            .prepare_cached("INSERT OR REPLACE INTO point (key, want, rows, failed) VALUES (?1, ?2, ?3, ?4)")
            .and_then(|mut s| s.execute(params![key, want, rows, finished.failed]))
            .map_err(|e| failure(&self.path, e))?;
        Ok(())
    }

    /// Points in the store, of this and of other runs.
    ///
    /// # Errors
    /// [`StoreError`].
    pub fn count(&self) -> Result<usize, StoreError> {
        let count: i64 = self
            .connection()
            .query_row("SELECT count(*) FROM point", [], |r| r.get(0))
            .map_err(|e| failure(&self.path, e))?;
        Ok(usize::try_from(count).unwrap_or(0))
    }
}

impl Finished {
    /// The same with just these quantities, in their order; `None` where one is not there. A failed point has failed for all.
    fn with(self, want: &[String]) -> Option<Self> {
        let places: Option<Vec<usize>> = want.iter().map(|w| self.want.iter().position(|s| s == w)).collect();
        if self.failed.is_some() {
            return Some(Self { want: want.to_vec(), ..self });
        }
        let places = places?;
        let mut rows = self.rows;
        for row in &mut rows {
            row.values = places.iter().map(|p| row.values.get(*p).copied().flatten()).collect();
        }
        Some(Self { want: want.to_vec(), rows, failed: None })
    }
}

fn same_station(path: &Path, connection: &Connection, station: &Value) -> Result<(), StoreError> {
    let about = |name: &str| -> Result<String, StoreError> {
        connection.query_row("SELECT value FROM about WHERE name = ?1", [name], |r| r.get(0)).map_err(|e| match e {
            rusqlite::Error::QueryReturnedNoRows => StoreError::NotAStore { path: path.to_path_buf() },
            e => failure(path, e),
        })
    };
    let theirs = about("numerics")?;
    if theirs != NUMERICS.to_string() {
        return Err(StoreError::OtherNumerics { path: path.to_path_buf(), theirs });
    }
    let stored: Value = serde_json::from_str(&about("station")?)
        .map_err(|e| StoreError::Damaged { path: path.to_path_buf(), reason: e.to_string() })?;
    match difference("", &stored, station) {
        None => Ok(()),
        Some(difference) => Err(StoreError::OtherStation { path: path.to_path_buf(), difference }),
    }
}

/// The first place where two stations differ, in words.
fn difference(path: &str, stored: &Value, given: &Value) -> Option<String> {
    let inside = |key: &str| if path.is_empty() { key.to_owned() } else { format!("{path}.{key}") };
    match (stored, given) {
        (Value::Object(a), Value::Object(b)) => {
            let gone = a.iter().find_map(|(k, v)| match b.get(k) {
                Some(w) => difference(&inside(k), v, w),
                None => Some(format!("it has {} and this station has not", inside(k))),
            });
            gone.or_else(|| {
                let new = b.keys().find(|k| !a.contains_key(*k))?;
                Some(format!("this station has {} and it has not", inside(new)))
            })
        }
        (Value::Array(a), Value::Array(b)) if a.len() == b.len() => {
            let name =
                |v: &Value, n: usize| v.get("name").and_then(Value::as_str).map_or((n + 1).to_string(), str::to_owned);
            a.iter().zip(b).enumerate().find_map(|(n, (v, w))| difference(&inside(&name(v, n)), v, w))
        }
        (a, b) if a == b => None,
        (a, b) => Some(format!("{path} is {} there and {} here", short(a), short(b))),
    }
}

fn short(value: &Value) -> String {
    let text = value.to_string();
    if text.chars().count() > 60 { format!("{}…", text.chars().take(60).collect::<String>()) } else { text }
}

/// What the database's refusal means to a person.
fn failure(path: &Path, error: rusqlite::Error) -> StoreError {
    let path = path.to_path_buf();
    let (code, extended) = match &error {
        rusqlite::Error::SqliteFailure(e, _) => (Some(e.code), e.extended_code),
        _ => (None, 0),
    };
    match code {
        Some(ErrorCode::ReadOnly | ErrorCode::PermissionDenied) => StoreError::ReadOnly { path },
        Some(ErrorCode::DiskFull) => StoreError::Full { path },
        // a file-size limit or quota shows as a failed write or a failed extension of the file
        Some(ErrorCode::SystemIoFailure) if NO_ROOM.contains(&extended) => StoreError::Full { path },
        Some(ErrorCode::NotADatabase) => StoreError::NotAStore { path },
        _ => StoreError::Other { path, source: error },
    }
}

/// Failures of writing, extending and mapping.
const NO_ROOM: [i32; 4] = [
    rusqlite::ffi::SQLITE_IOERR_WRITE,
    rusqlite::ffi::SQLITE_IOERR_TRUNCATE,
    rusqlite::ffi::SQLITE_IOERR_SHMSIZE,
    rusqlite::ffi::SQLITE_IOERR_FSYNC,
];

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]
    use super::*;
    use serde_json::json;

    fn finished(value: f64) -> Finished {
        let row = VariedRow {
            variant: "nominal".to_owned(),
            frequency_hz: 7.1e6,
            band: None,
            edge: None,
            values: vec![Some(value), None],
        };
        Finished { want: vec!["radio.swr".to_owned(), "power.earth_w".to_owned()], rows: vec![row], failed: None }
    }

    fn want(names: &[&str]) -> Vec<String> {
        names.iter().map(|n| (*n).to_owned()).collect()
    }

    #[test]
    fn what_was_put_is_there_after_reopening_in_the_order_wanted() {
        let folder = tempfile::tempdir().unwrap();
        let path = folder.path().join("a.store");
        let station = json!({"earth": {"soil": "bog"}});
        Store::open(&path, &station).unwrap().put("k", &finished(1.0 / 3.0)).unwrap();
        let store = Store::open(&path, &station).unwrap();
        let got = store.get("k", &want(&["power.earth_w", "radio.swr"])).unwrap().unwrap();
        assert_eq!(got.rows[0].values, [None, Some(1.0 / 3.0)]);
        assert!(store.get("k", &want(&["feed.current_a"])).unwrap().is_none());
        assert!(store.get("other", &want(&[])).unwrap().is_none());
        assert_eq!(store.count().unwrap(), 1);
    }

    #[test]
    fn another_station_is_refused_with_what_differs() {
        let folder = tempfile::tempdir().unwrap();
        let path = folder.path().join("a.store");
        let station = |length: &str| json!({"wire": [{"name": "radiator", "length": length}]});
        drop(Store::open(&path, &station("20 m")).unwrap());
        let error = Store::open(&path, &station("21 m")).unwrap_err().to_string();
        assert!(error.contains("wire.radiator.length is \"20 m\" there and \"21 m\" here"), "{error}");
        assert!(Store::open(&path, &station("20 m")).is_ok());
    }

    #[test]
    fn other_numbers_and_other_files_are_refused_and_left_alone() {
        let folder = tempfile::tempdir().unwrap();
        let path = folder.path().join("a.store");
        let store = Store::open(&path, &json!({})).unwrap();
        store.connection().execute("UPDATE about SET value = '0' WHERE name = 'numerics'", []).unwrap();
        drop(store);
        assert!(matches!(Store::open(&path, &json!({})), Err(StoreError::OtherNumerics { .. })));
        let text = folder.path().join("notes.txt");
        std::fs::write(&text, "not a database, but long enough to be looked at as one".repeat(40)).unwrap();
        let before = std::fs::read(&text).unwrap();
        assert!(matches!(Store::open(&text, &json!({})), Err(StoreError::NotAStore { .. })));
        assert_eq!(std::fs::read(&text).unwrap(), before);
        let foreign = folder.path().join("foreign.db");
        Connection::open(&foreign).unwrap().execute_batch("CREATE TABLE t (x)").unwrap();
        assert!(matches!(Store::open(&foreign, &json!({})), Err(StoreError::NotAStore { .. })));
    }

    #[test]
    fn a_full_disk_is_said_and_keeps_what_was_finished() {
        let folder = tempfile::tempdir().unwrap();
        let store = Store::open(&folder.path().join("a.store"), &json!({})).unwrap();
        store.connection().pragma_update(None, "max_page_count", 12).unwrap();
        let mut kept = 0;
        let refused = loop {
            match store.put(&"k".repeat(800 + kept), &finished(1.0)) {
                Ok(()) => kept += 1,
                Err(e) => break e,
            }
            assert!(kept < 1000);
        };
        assert!(matches!(refused, StoreError::Full { .. }), "{refused}");
        assert_eq!(store.count().unwrap(), kept);
    }

    #[test]
    fn a_write_protected_store_is_refused() {
        let folder = tempfile::tempdir().unwrap();
        let path = folder.path().join("a.store");
        drop(Store::open(&path, &json!({})).unwrap());
        let mut permissions = std::fs::metadata(&path).unwrap().permissions();
        permissions.set_readonly(true);
        std::fs::set_permissions(&path, permissions).unwrap();
        assert!(matches!(Store::open(&path, &json!({})), Err(StoreError::ReadOnly { .. })));
    }
}
