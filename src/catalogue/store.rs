//! Opening a catalogue file, and what its connection is set to.

use std::cell::OnceCell;
use std::collections::HashMap;
use std::path::{Path, PathBuf};
use std::sync::Arc;
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

/// What cannot be done while another process writes, as a participle.
pub(super) const LOCKED: &str = "locked for writing (is another import running?)";

/// An open catalogue.
pub struct Catalogue {
    pub(super) connection: Connection,
    pub(super) path: PathBuf,
    /// Keys of the sources by their number, read once; emptied by every write.
    pub(super) keys: OnceCell<HashMap<i64, Arc<str>>>,
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
        let mut catalogue = Self {
            connection,
            path: path.to_owned(),
            keys: OnceCell::new(),
        };
        catalogue.check_kind()?;
        catalogue.migrate()?;
        Ok(catalogue)
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

    /// Turns an SQLite error into one of the catalogue.
    pub(super) fn failed(
        &self,
        action: &'static str,
    ) -> impl Fn(rusqlite::Error) -> CatalogueError + use<> {
        failed(&self.path, action)
    }
}

pub(super) fn failed(
    path: &Path,
    action: &'static str,
) -> impl Fn(rusqlite::Error) -> CatalogueError + use<> {
    let path = path.to_owned();
    move |cause| CatalogueError::Sqlite {
        path: path.clone(),
        action,
        cause,
    }
}
