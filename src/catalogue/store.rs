//! Opening a catalogue file, and what its connection is set to.

use std::cell::OnceCell;
use std::collections::HashMap;
use std::path::{Path, PathBuf};
use std::sync::Arc;
use std::sync::atomic::{AtomicBool, Ordering};
use std::time::Duration;

use rusqlite::{Connection, OpenFlags};
use rusqlite_migration::{M, Migrations};

use super::bundled;
use super::error::{CatalogueError, Result};

const MIGRATION_STEPS: &[M<'_>] = &[M::up(include_str!("../../schema/0001_catalogue.sql"))];
const MIGRATIONS: Migrations<'_> = Migrations::from_slice(MIGRATION_STEPS);

/// Marks a SQLite file as a catalogue: the letters `lncl`.
const APPLICATION_ID: i32 = 0x6c6e_636c;

/// How long a writer waits for another one.
const PATIENCE: Duration = Duration::from_secs(10);

/// What a writer asks for first, as a participle.
pub(super) const LOCKED: &str = "locked for writing";

/// An open catalogue.
pub struct Catalogue {
    pub(super) connection: Connection,
    pub(super) path: PathBuf,
    /// Keys of the sources by their number, read once; emptied by every write.
    pub(super) keys: OnceCell<HashMap<i64, Arc<str>>>,
    /// Becomes true where somebody wishes what is going on to stop.
    pub(super) stop: Arc<AtomicBool>,
}

/// How a catalogue came to be open.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Opened {
    /// It was there.
    Held,
    /// It was built from the bundled tables and written.
    Built,
    /// Its bundled tables were brought up to those of this program.
    Refreshed,
    /// It could not be written and lives in memory; the reason.
    InMemory(String),
}

impl Catalogue {
    /// A catalogue in memory, without any source.
    pub fn empty_in_memory() -> Result<Self> {
        let path = PathBuf::from("(memory)");
        let connection = Connection::open_in_memory().map_err(failed(&path, "opened"))?;
        let mut catalogue = Self {
            connection,
            path,
            keys: OnceCell::new(),
            stop: Arc::default(),
        };
        catalogue.migrate()?;
        Ok(catalogue)
    }

    /// A catalogue in memory with the bundled tables.
    pub fn bundled_in_memory(progress: &mut dyn FnMut(u64, u64)) -> Result<Self> {
        let mut catalogue = Self::empty_in_memory()?;
        bundled::load(&mut catalogue, progress)?;
        Ok(catalogue)
    }

    /// Opens a catalogue for reading and writing; builds it from the bundled tables where there is
    /// none, and from memory where the folder cannot be written.
    pub fn open_or_build(
        path: &Path,
        progress: &mut dyn FnMut(u64, u64),
    ) -> Result<(Self, Opened)> {
        if path.exists() {
            let mut catalogue = Self::open(path)?;
            let refreshed = bundled::refresh(&mut catalogue, progress)?;
            let opened = if refreshed {
                Opened::Refreshed
            } else {
                Opened::Held
            };
            return Ok((catalogue, opened));
        }
        let built = Self::bundled_in_memory(progress)?;
        match bundled::write_atomically(&built, path) {
            Ok(()) => Ok((Self::open(path)?, Opened::Built)),
            Err(error) => Ok((built, Opened::InMemory(error.to_string()))),
        }
    }

    /// Opens a catalogue that is there.
    ///
    /// # Errors
    /// An unreadable file, a file that is no catalogue, a catalogue of a newer version.
    pub fn open(path: &Path) -> Result<Self> {
        if path.is_dir() {
            return Err(CatalogueError::NotACatalogue {
                path: path.to_owned(),
            });
        }
        std::fs::File::open(path).map_err(|cause| CatalogueError::File {
            path: path.to_owned(),
            action: "read",
            cause,
        })?;
        let writable = OpenFlags::SQLITE_OPEN_READ_WRITE | OpenFlags::SQLITE_OPEN_NO_MUTEX;
        let read_only = OpenFlags::SQLITE_OPEN_READ_ONLY | OpenFlags::SQLITE_OPEN_NO_MUTEX;
        let connection = Connection::open_with_flags(path, writable)
            .or_else(|_| Connection::open_with_flags(path, read_only))
            .map_err(failed(path, "opened"))?;
        let connection = if needs_company(&connection) {
            open_alone(path)?
        } else {
            connection
        };
        let mut catalogue = Self {
            connection,
            path: path.to_owned(),
            keys: OnceCell::new(),
            stop: Arc::default(),
        };
        catalogue.check_kind()?;
        catalogue.migrate()?;
        Ok(catalogue)
    }

    /// Stops an import, a `forget` or an export soon after `wish` becomes true; nothing is changed
    /// then.
    pub fn stop_when(&mut self, wish: Arc<AtomicBool>) {
        self.stop = wish;
    }

    /// Keeps the file from growing beyond so many pages of 4096 bytes, as a full disk would.
    ///
    /// # Errors
    /// What SQLite says.
    pub fn limit_pages(&mut self, pages: i64) -> Result<()> {
        self.connection
            .pragma_update(None, "max_page_count", pages)
            .map_err(self.failed("opened"))
    }

    /// Where the catalogue lives; `(memory)` for one without a file.
    pub fn path(&self) -> &Path {
        &self.path
    }

    fn check_kind(&self) -> Result<()> {
        let not_one = || CatalogueError::NotACatalogue {
            path: self.path.clone(),
        };
        let pragma = |name: &str| {
            self.connection
                .pragma_query_value(None, name, |row| row.get::<_, i64>(0))
        };
        if pragma("application_id").map_err(|_| not_one())? != i64::from(APPLICATION_ID) {
            return Err(not_one());
        }
        let found = pragma("user_version").map_err(|_| not_one())?;
        let known = MIGRATION_STEPS.len() as i64;
        if found > known {
            return Err(CatalogueError::Newer {
                path: self.path.clone(),
                found,
                known,
            });
        }
        Ok(())
    }

    fn migrate(&mut self) -> Result<()> {
        let path = self.path.clone();
        let set = |catalogue: &mut Self| -> rusqlite::Result<()> {
            catalogue.connection.busy_timeout(PATIENCE)?;
            catalogue
                .connection
                .pragma_update(None, "foreign_keys", false)?;
            catalogue
                .connection
                .pragma_update(None, "temp_store", "MEMORY")
        };
        set(self).map_err(failed(&path, "opened"))?;
        let version: i64 = self
            .connection
            .pragma_query_value(None, "user_version", |row| row.get(0))
            .map_err(failed(&path, "opened"))?;
        if version == MIGRATION_STEPS.len() as i64 {
            return Ok(());
        }
        MIGRATIONS
            .to_latest(&mut self.connection)
            .map_err(|error| CatalogueError::Damaged {
                path: path.clone(),
                what: format!("its tables could not be brought up to date ({error})"),
            })?;
        self.connection
            .pragma_update(None, "application_id", APPLICATION_ID)
            .map_err(failed(&path, "marked"))
    }

    /// Sets the connection for a large write: 64 MiB of pages, so that what many species append to
    /// stays in memory, and one wait for the disk at the end (WAL keeps the file sound without more).
    pub(super) fn prepare_for_writing(&self) -> Result<()> {
        self.connection
            .execute_batch("PRAGMA cache_size = -65536; PRAGMA synchronous = NORMAL")
            .map_err(self.failed("opened"))
    }

    /// Turns an SQLite error into one of the catalogue.
    pub(super) fn failed(
        &self,
        action: &'static str,
    ) -> impl Fn(rusqlite::Error) -> CatalogueError + use<> {
        failed(&self.path, action)
    }
}

/// An error where a wish to stop has come.
pub(super) fn go_on(stop: &AtomicBool) -> Result<()> {
    if stop.load(Ordering::Relaxed) {
        return Err(CatalogueError::Stopped);
    }
    Ok(())
}

/// Whether reading fails for want of the files that SQLite keeps beside a catalogue, which it
/// cannot make in a folder that is read-only.
fn needs_company(connection: &Connection) -> bool {
    use rusqlite::ErrorCode;
    let read = connection.pragma_query_value(None, "schema_version", |_| Ok(()));
    read.is_err_and(|error| {
        matches!(
            error.sqlite_error_code(),
            Some(ErrorCode::CannotOpen | ErrorCode::ReadOnly)
        )
    })
}

/// Opens a catalogue in a read-only folder, where nobody else can be writing.
fn open_alone(path: &Path) -> Result<Connection> {
    let mut beside = path.as_os_str().to_owned();
    beside.push("-wal");
    if std::fs::metadata(beside).is_ok_and(|wal| wal.len() > 0) {
        // A part of the catalogue stands in there.
        return Err(CatalogueError::ReadOnly {
            path: path.to_owned(),
        });
    }
    let mut uri = "file:".to_owned();
    for c in path.to_string_lossy().chars() {
        match c {
            '?' => uri.push_str("%3f"),
            '#' => uri.push_str("%23"),
            '%' => uri.push_str("%25"),
            c => uri.push(c),
        }
    }
    uri.push_str("?immutable=1");
    let flags = OpenFlags::SQLITE_OPEN_READ_ONLY
        | OpenFlags::SQLITE_OPEN_NO_MUTEX
        | OpenFlags::SQLITE_OPEN_URI;
    Connection::open_with_flags(uri, flags).map_err(failed(path, "opened"))
}

pub(super) fn failed(
    path: &Path,
    action: &'static str,
) -> impl Fn(rusqlite::Error) -> CatalogueError + use<> {
    let path = path.to_owned();
    move |cause| CatalogueError::of_sqlite(path.clone(), action, cause)
}
