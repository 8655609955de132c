//! The tables that the program carries, and the catalogue that is built from them.

use std::collections::BTreeSet;
use std::io::{Cursor, Read};
use std::path::{Path, PathBuf};

use importers::source::SourceDescription;
use importers::{ImportError, ReadOptions, ReadReport, Sink};
use rusqlite::{Connection, OptionalExtension, TransactionBehavior};
use sha2::{Digest, Sha256};

use super::derive::{self, Labels};
use super::error::{CatalogueError, Result};
use super::files::{hex, source_checksum};
use super::gap_fill;
use super::ingest::{self, Incoming};
use super::reconcile;
use super::sources::retract;
use super::store::{Catalogue, LOCKED, failed};

#[derive(rust_embed::Embed)]
#[folder = "data/"]
#[include = "*/source.toml"]
#[include = "*/levels.csv"]
#[include = "*/lines.csv"]
#[include = "*/isotopes.csv"]
#[exclude = "elements/*"]
struct Tables;

/// A bundled source: its folder and what its description says.
struct Bundled {
    folder: String,
    description: SourceDescription,
    checksum: String,
}

impl Bundled {
    fn read(&self, sink: &mut dyn Sink) -> std::result::Result<ReadReport, ImportError> {
        let mut open = |file: &str| -> std::io::Result<Box<dyn Read>> {
            let name = format!("{}/{file}", self.folder);
            let bytes = Tables::get(&name).ok_or(std::io::ErrorKind::NotFound)?;
            Ok(Box::new(Cursor::new(bytes.data)))
        };
        importers::read_source(&self.description, &mut open, &ReadOptions::default(), sink)
    }
}

/// Folders of all bundled sources, by name.
fn folders() -> BTreeSet<String> {
    Tables::iter()
        .filter_map(|name| name.strip_suffix("/source.toml").map(str::to_owned))
        .collect()
}

/// Whether this program carries a source of this key.
pub(super) fn is_bundled(key: &str) -> Result<bool> {
    for folder in folders() {
        if bundled(&folder)?.description.key == key {
            return Ok(true);
        }
    }
    Ok(false)
}

/// SHA-256 over names and contents of all bundled files and the revisions of the calculator and of the
/// rule: names the whole set.
fn bundle_checksum() -> String {
    let mut names: Vec<_> = Tables::iter().collect();
    names.sort();
    let mut hash = Sha256::new();
    for name in names {
        hash.update(name.as_bytes());
        if let Some(file) = Tables::get(&name) {
            hash.update(file.metadata.sha256_hash());
        }
    }
    hash.update(gap_fill::REVISION);
    hash.update(reconcile::REVISION);
    hex(&hash.finalize())
}

fn bundled(folder: &str) -> Result<Bundled> {
    let damaged = |what: String| CatalogueError::Damaged {
        path: folder.into(),
        what,
    };
    let file = Tables::get(&format!("{folder}/source.toml"))
        .ok_or_else(|| damaged("its source.toml is missing".into()))?;
    let text = std::str::from_utf8(&file.data).map_err(|e| damaged(e.to_string()))?;
    let description = SourceDescription::parse(text, &format!("{folder}/source.toml"))?;
    let hash = |table: &importers::source::TableDescription| {
        Tables::get(&format!("{folder}/{}", table.file))
            .map(|file| hex(&file.metadata.sha256_hash()))
            .unwrap_or_default()
    };
    let tables: Vec<String> = description.table.iter().map(hash).collect();
    let checksum = source_checksum(text, &tables);
    Ok(Bundled {
        folder: folder.to_owned(),
        description,
        checksum,
    })
}

/// Fills an empty catalogue with all bundled sources, in one transaction.
pub(super) fn load(catalogue: &mut Catalogue, progress: &mut dyn FnMut(u64, u64)) -> Result<()> {
    let sources = folders()
        .iter()
        .map(|f| bundled(f))
        .collect::<Result<Vec<_>>>()?;
    replace(catalogue, &[], &sources, progress)
}

/// Brings the bundled sources of a catalogue up to those of this program; whether it had to.
pub(super) fn refresh(
    catalogue: &mut Catalogue,
    progress: &mut dyn FnMut(u64, u64),
) -> Result<bool> {
    let read = failed(&catalogue.path, "read");
    let built_from: Option<String> = catalogue
        .connection
        .query_row("SELECT value FROM about WHERE name = 'bundle'", [], |row| {
            row.get(0)
        })
        .optional()
        .map_err(&read)?;
    if built_from.as_deref() == Some(bundle_checksum().as_str()) {
        return Ok(false);
    }
    let held: Vec<(i64, String, String)> = catalogue
        .connection
        .prepare("SELECT id, key, checksum FROM source WHERE bundled")
        .and_then(|mut select| {
            select
                .query_map([], |row| Ok((row.get(0)?, row.get(1)?, row.get(2)?)))?
                .collect()
        })
        .map_err(&read)?;
    let ours = folders()
        .iter()
        .map(|f| bundled(f))
        .collect::<Result<Vec<_>>>()?;
    let same = |(_, key, sum): &(i64, String, String), b: &Bundled| {
        *key == b.description.key && *sum == b.checksum
    };
    let stale: Vec<i64> = held
        .iter()
        .filter(|h| !gap_fill::is_ours(&h.1) && !ours.iter().any(|b| same(h, b)))
        .map(|h| h.0)
        .collect();
    let fresh: Vec<Bundled> = ours
        .into_iter()
        .filter(|b| !held.iter().any(|h| same(h, b)))
        .collect();
    replace(catalogue, &stale, &fresh, progress)?;
    Ok(true)
}

/// Takes sources out and others in, and derives all species they are about, in one transaction.
fn replace(
    catalogue: &mut Catalogue,
    stale: &[i64],
    fresh: &[Bundled],
    progress: &mut dyn FnMut(u64, u64),
) -> Result<()> {
    let path = catalogue.path.clone();
    catalogue.keys.take();
    let written = failed(&path, "written");
    let transaction = catalogue
        .connection
        .transaction_with_behavior(TransactionBehavior::Immediate)
        .map_err(failed(&path, LOCKED))?;
    let mut labels = Labels::load(&transaction).map_err(&written)?;
    let mut species = BTreeSet::new();
    for &source in stale {
        species.extend(retract(&transaction, source).map_err(&written)?.0);
    }
    for (done, source) in fresh.iter().enumerate() {
        progress(done as u64, 2 * fresh.len() as u64);
        species.extend(store(&transaction, &path, source, &mut labels)?);
    }
    species.extend(gap_fill::install(&transaction).map_err(&written)?);
    species.extend(of_an_older_rule(&transaction).map_err(&written)?);
    let total = 2 * species.len() as u64;
    for (done, &code) in species.iter().enumerate() {
        progress((species.len() + done) as u64, total);
        derive::species(&transaction, &path, code, &mut labels)?;
    }
    transaction
        .execute(
            "INSERT OR REPLACE INTO about VALUES ('bundle', ?1), ('rule', ?2)",
            [bundle_checksum().as_str(), reconcile::REVISION],
        )
        .map_err(&written)?;
    transaction.commit().map_err(&written)?;
    progress(total, total);
    Ok(())
}

/// All species held, where another revision of the rule made their lines.
fn of_an_older_rule(connection: &Connection) -> rusqlite::Result<BTreeSet<i64>> {
    let made_by: Option<String> = connection
        .query_row("SELECT value FROM about WHERE name = 'rule'", [], |row| {
            row.get(0)
        })
        .optional()?;
    if made_by.as_deref() == Some(reconcile::REVISION) {
        return Ok(BTreeSet::new());
    }
    connection
        .prepare(
            "SELECT species FROM level UNION SELECT species FROM line
              UNION SELECT species FROM level_report UNION SELECT species FROM line_report",
        )?
        .query_map([], |row| row.get(0))?
        .collect()
}

fn store(
    connection: &Connection,
    path: &Path,
    source: &Bundled,
    labels: &mut Labels,
) -> Result<BTreeSet<i64>> {
    let incoming = Incoming {
        description: &source.description,
        checksum: &source.checksum,
        bundled: true,
    };
    let stored = ingest::store_reports(connection, path, &incoming, labels, |sink| {
        source.read(sink)
    })?;
    Ok(stored.species)
}

/// Writes a catalogue to a file that is not there: whole or not at all. Where another process was
/// quicker, its file stays.
pub(super) fn write_atomically(catalogue: &Catalogue, path: &Path) -> Result<()> {
    let file = |action: &'static str| {
        let path = path.to_owned();
        move |cause: std::io::Error| CatalogueError::File {
            path: path.clone(),
            action,
            cause,
        }
    };
    if let Some(folder) = path.parent().filter(|f| !f.as_os_str().is_empty()) {
        std::fs::create_dir_all(folder).map_err(file("created"))?;
    }
    let partial = partial_name(path);
    let copied =
        copy_into(catalogue, &partial).and_then(|()| match std::fs::hard_link(&partial, path) {
            Err(e) if e.kind() == std::io::ErrorKind::AlreadyExists => Ok(()),
            Err(_) => std::fs::rename(&partial, path).map_err(file("written")),
            Ok(()) => Ok(()),
        });
    let _ = std::fs::remove_file(&partial); // gone already where it was renamed
    copied
}

fn partial_name(path: &Path) -> PathBuf {
    let mut name = path.as_os_str().to_owned();
    name.push(format!(".partial-{}", std::process::id()));
    name.into()
}

fn copy_into(catalogue: &Catalogue, partial: &Path) -> Result<()> {
    let _ = std::fs::remove_file(partial); // of a process that died under the same number
    let copy = || -> rusqlite::Result<()> {
        catalogue
            .connection
            .execute("VACUUM INTO ?1", [partial.to_string_lossy()])?;
        let written = Connection::open(partial)?;
        written.pragma_update(None, "journal_mode", "WAL")?;
        written.close().map_err(|(_, e)| e)
    };
    copy().map_err(failed(partial, "written"))
}
