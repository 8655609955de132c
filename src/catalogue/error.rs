//! What can go wrong with a catalogue.

use std::path::PathBuf;

/// Errors of the catalogue; each says what, where and what to do.
#[derive(Debug, thiserror::Error)]
#[non_exhaustive]
pub enum CatalogueError {
    /// SQLite refused something.
    #[error("{}: the catalogue could not be {action}: {cause}", path.display())]
    Sqlite {
        /// The catalogue.
        path: PathBuf,
        /// What was being done, as a participle.
        action: &'static str,
        /// SQLite's own words.
        #[source]
        cause: rusqlite::Error,
    },
    /// Another process writes.
    #[error(
        "{}: another process is writing to the catalogue (another import?); wait until it is done \
         and try again; nothing was changed",
        path.display()
    )]
    Busy {
        /// The catalogue.
        path: PathBuf,
    },
    /// The file or its folder does not let itself be written.
    #[error(
        "{}: the catalogue cannot be written: the file, its folder or the disk is read-only; name \
         another with --catalogue",
        path.display()
    )]
    ReadOnly {
        /// The catalogue.
        path: PathBuf,
    },
    /// No room.
    #[error(
        "{}: the catalogue could not be {action}: the disk is full; free some space and try again; \
         nothing was changed",
        path.display()
    )]
    DiskFull {
        /// The catalogue.
        path: PathBuf,
        /// What was being done, as a participle.
        action: &'static str,
    },
    /// The system refused to read or write.
    #[error(
        "{}: the catalogue could not be {action}: {cause}; check the disk, its free space and \
         limits on file sizes; nothing was changed",
        path.display()
    )]
    Disk {
        /// The catalogue.
        path: PathBuf,
        /// What was being done, as a participle.
        action: &'static str,
        /// SQLite's own words.
        #[source]
        cause: rusqlite::Error,
    },
    /// A wish to stop (Ctrl-C).
    #[error("stopped as asked; nothing was changed")]
    Stopped,
    /// A file that is no catalogue.
    #[error("{}: this is not a lineclear catalogue; name another file with --catalogue", path.display())]
    NotACatalogue {
        /// The file.
        path: PathBuf,
    },
    /// Written by a later version.
    #[error(
        "{}: this catalogue is of a newer version (schema {found}, this program knows {known}); \
         update lineclear or name another file with --catalogue",
        path.display()
    )]
    Newer {
        /// The file.
        path: PathBuf,
        /// Schema of the file.
        found: i64,
        /// Latest schema known here.
        known: i64,
    },
    /// A file or folder that cannot be read or written.
    #[error("{}: cannot be {action}: {cause}", path.display())]
    File {
        /// The file or folder.
        path: PathBuf,
        /// What was being done, as a participle.
        action: &'static str,
        /// The system's own words.
        #[source]
        cause: std::io::Error,
    },
    /// A source that is not held.
    #[error("`{key}`: no such source is held; `lineclear sources` lists them")]
    NoSuchSource {
        /// The key asked for.
        key: String,
    },
    /// A source of the calculator.
    #[error(
        "`{key}`: its values are computed from the tables that are held and fill only what these \
         leave open; forget a table instead"
    )]
    Computed {
        /// The key asked for.
        key: String,
    },
    /// Another table is held under this key.
    #[error(
        "`{key}`: a source of this key with other content is held; `lineclear forget {key}` first, \
         or give the new table a key of its own"
    )]
    KeyTaken {
        /// The key.
        key: String,
    },
    /// The table cannot be read.
    #[error(transparent)]
    Import(#[from] importers::ImportError),
    /// A description that cannot be used.
    #[error(transparent)]
    Description(#[from] importers::source::DescriptionError),
    /// A table file that is not the one described.
    #[error(
        "{}: its SHA-256 is {found}, but source.toml states {stated}; restore the file or correct \
         the statement",
        path.display()
    )]
    OtherFile {
        /// The file.
        path: PathBuf,
        /// What it is.
        found: String,
        /// What was stated.
        stated: String,
    },
    /// A file that is no table at all.
    #[error("{}: {what}", path.display())]
    NoTable {
        /// The file.
        path: PathBuf,
        /// What it is, and what to do.
        what: String,
    },
    /// A file that does not say what its columns mean.
    #[error(
        "{}: this file does not describe itself; `lineclear import --explain {}` offers a \
         source.toml to edit",
        path.display(),
        path.display()
    )]
    NeedsDescription {
        /// The file.
        path: PathBuf,
    },
    /// A file that describes its columns but not its origin.
    #[error("{}: the file does not say whose it is; add --citation", path.display())]
    NoCitation {
        /// The file.
        path: PathBuf,
    },
    /// A file that this program wrote, but not like this one does.
    #[error("{}: {message}", path.display())]
    HandedOver {
        /// The file.
        path: PathBuf,
        /// What is wrong with it.
        message: String,
    },
    /// Rows that could not be handed on.
    #[error("the export could not be written: {0}")]
    Receiver(#[source] std::io::Error),
    /// No licence is known.
    #[error("`{key}`: source.toml names no licence; state one with --licence, in words if need be")]
    NoLicence {
        /// Key of the source.
        key: String,
    },
    /// A value in the catalogue that makes no sense.
    #[error("{}: damaged: {what}; run with a fresh --catalogue or restore a copy", path.display())]
    Damaged {
        /// The file.
        path: PathBuf,
        /// What is wrong.
        what: String,
    },
}

/// A wish to stop, on its way through a reader of tables.
#[derive(Debug, thiserror::Error)]
#[error("stopped as asked")]
pub(super) struct Stop;

impl CatalogueError {
    /// An error of SQLite, with what to do about it.
    pub(super) fn of_sqlite(path: PathBuf, action: &'static str, cause: rusqlite::Error) -> Self {
        use rusqlite::ErrorCode;
        match cause.sqlite_error_code() {
            Some(ErrorCode::DatabaseBusy | ErrorCode::DatabaseLocked) => Self::Busy { path },
            Some(ErrorCode::ReadOnly) => Self::ReadOnly { path },
            Some(ErrorCode::DiskFull) => Self::DiskFull { path, action },
            Some(ErrorCode::SystemIoFailure) => Self::Disk {
                path,
                action,
                cause,
            },
            Some(ErrorCode::DatabaseCorrupt | ErrorCode::NotADatabase) => Self::Damaged {
                path,
                what: cause.to_string(),
            },
            _ => Self::Sqlite {
                path,
                action,
                cause,
            },
        }
    }
}

/// A result of the catalogue.
pub type Result<T> = std::result::Result<T, CatalogueError>;
