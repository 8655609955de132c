//! A source on disk: `source.toml` with its tables beside it.

use std::fs::File;
use std::io::{self, BufReader, Read};
use std::panic::resume_unwind;
use std::path::{Path, PathBuf};
use std::sync::mpsc::{SyncSender, sync_channel};

use importers::detect::Detected;
use importers::explain::Explanation;
use importers::record::Record;
use importers::source::{Format, SourceDescription};
use importers::{ImportError, Limits, ReadOptions, ReadReport, Sink, SinkError, read_source};
use sha2::{Digest, Sha256};

use super::error::{CatalogueError, Result, Stop};
use super::ingest::{ImportSummary, Incoming};
use super::store::Catalogue;

/// A described source whose files were found.
pub struct SourceFiles {
    description: SourceDescription,
    folder: PathBuf,
    checksum: String,
    limits: Limits,
}

impl SourceFiles {
    /// Reads `source.toml`, or the one in a folder, and takes the checksums of its tables.
    ///
    /// # Errors
    /// A file that cannot be read, a description that cannot be used, a table that is not the one
    /// that the description states.
    pub fn find(path: &Path) -> Result<Self> {
        let file = if path.is_dir() {
            path.join("source.toml")
        } else {
            path.to_owned()
        };
        let text = std::fs::read_to_string(&file).map_err(unreadable(&file))?;
        let description = SourceDescription::parse(&text, &file.display().to_string())?;
        let folder = file.parent().map(Path::to_owned).unwrap_or_default();
        let mut tables = Vec::with_capacity(description.table.len());
        for table in &description.table {
            let path = folder.join(&table.file);
            let found = sha256(&path).map_err(unreadable(&path))?;
            if let Some(stated) = table
                .sha256
                .as_ref()
                .filter(|s| !s.eq_ignore_ascii_case(&found))
            {
                let stated = stated.clone();
                return Err(CatalogueError::OtherFile {
                    path,
                    found,
                    stated,
                });
            }
            tables.push(found);
        }
        let checksum = source_checksum(&text, &tables);
        Ok(Self {
            description,
            folder,
            checksum,
            limits: Limits::default(),
        })
    }

    /// Takes a file that describes itself (a machine-readable table, VOTable, ECSV, XSAMS, FITS;
    /// packed or not) as a source of its own.
    ///
    /// # Errors
    /// A file that cannot be read or does not describe itself; a key that cannot be used.
    pub fn self_describing(path: &Path, stated: &Stated) -> Result<Self> {
        let explanation = explain(path)?;
        let format = match (stated.format, explanation.detected) {
            (Some(format), _) | (None, Detected::Table(format)) => format,
            (None, Detected::Text) => Format::Delimited,
            (None, _) => {
                return Err(CatalogueError::NoTable {
                    path: path.to_owned(),
                    what: explanation.notes.join("; "),
                });
            }
        };
        let Some(word) = self_describing_word(format) else {
            return Err(CatalogueError::NeedsDescription {
                path: path.to_owned(),
            });
        };
        if stated.citation.trim().is_empty() {
            return Err(CatalogueError::NoCitation {
                path: path.to_owned(),
            });
        }
        let name = path.file_name().unwrap_or_default().to_string_lossy();
        let quoted = |text: &str| toml::Value::from(text).to_string();
        let mut text = format!(
            "key = {}\ntitle = {}\ncitation = {}\nlicence = {}\nkind = \"paper\"\n[[table]]\n\
             file = {}\nrecords = \"lines\"\nformat = \"{word}\"\n",
            quoted(&stated.key.clone().unwrap_or_else(|| key_of(&name))),
            quoted(&name),
            quoted(&stated.citation),
            quoted(&stated.licence),
            quoted(&name),
        );
        if let Some(medium) = &stated.medium {
            text.push_str(&format!("medium = {}\n", quoted(medium)));
        }
        let description = SourceDescription::parse(&text, &path.display().to_string())?;
        let hash = sha256(path).map_err(unreadable(path))?;
        Ok(Self {
            checksum: source_checksum(&text, &[hash]),
            folder: path.parent().map(Path::to_owned).unwrap_or_default(),
            description,
            limits: Limits::default(),
        })
    }

    /// States the licence where the description names none.
    ///
    /// # Errors
    /// No licence there and none given.
    pub fn with_licence(mut self, licence: Option<&str>) -> Result<Self> {
        if let Some(licence) = licence {
            licence.clone_into(&mut self.description.licence);
        }
        if self.description.licence.trim().is_empty() {
            return Err(CatalogueError::NoLicence {
                key: self.description.key,
            });
        }
        Ok(self)
    }

    /// Other limits on what the files may ask for.
    pub fn with_limits(mut self, limits: Limits) -> Self {
        self.limits = limits;
        self
    }

    /// Key of the source.
    pub fn key(&self) -> &str {
        &self.description.key
    }

    /// Imports the source; `skip_bad` rows at most may be left out. On `dry_run`, and on any
    /// error, nothing has changed.
    ///
    /// # Errors
    /// See [`Catalogue::import`].
    pub fn import(
        &self,
        catalogue: &mut Catalogue,
        skip_bad: usize,
        dry_run: bool,
    ) -> Result<ImportSummary> {
        let incoming = Incoming {
            description: &self.description,
            checksum: &self.checksum,
            bundled: false,
        };
        let options = ReadOptions {
            skip_bad,
            limits: self.limits.clone(),
        };
        let read = |sink: &mut dyn Sink| {
            read_ahead(sink, |sink| {
                let mut open = |name: &str| -> io::Result<Box<dyn Read>> {
                    let file = File::open(self.folder.join(name))?;
                    Ok(Box::new(BufReader::with_capacity(1 << 18, file)))
                };
                read_source(&self.description, &mut open, &options, sink)
            })
        };
        catalogue.import(&incoming, read, dry_run)
    }
}

/// Records that pass from the reading to the writing thread at once.
const BATCH: usize = 256;

/// Reads on a thread of its own, a few batches ahead of the sink, so that a large table is read
/// while what was read is stored.
fn read_ahead(
    sink: &mut dyn Sink,
    read: impl FnOnce(&mut dyn Sink) -> std::result::Result<ReadReport, ImportError> + Send,
) -> std::result::Result<ReadReport, ImportError> {
    std::thread::scope(|scope| {
        let (send, receive) = sync_channel::<Vec<Record>>(8);
        let reader = scope.spawn(move || {
            let mut batches = Batches {
                send,
                batch: Vec::with_capacity(BATCH),
            };
            let report = read(&mut batches);
            batches.pass_on().map_err(ImportError::Sink)?;
            report
        });
        let stored = receive
            .iter()
            .flatten()
            .try_for_each(|record| sink.accept(record));
        drop(receive); // a reader that is ahead ends here
        let report = reader.join().unwrap_or_else(|panic| resume_unwind(panic));
        stored.map_err(ImportError::Sink).and(report)
    })
}

/// Gathers records into batches.
struct Batches {
    send: SyncSender<Vec<Record>>,
    batch: Vec<Record>,
}

impl Batches {
    /// Fails where nobody receives any more.
    fn pass_on(&mut self) -> std::result::Result<(), SinkError> {
        let batch = std::mem::replace(&mut self.batch, Vec::with_capacity(BATCH));
        self.send
            .send(batch)
            .map_err(|_| Box::new(Stop) as SinkError)
    }
}

impl Sink for Batches {
    fn accept(&mut self, record: Record) -> std::result::Result<(), SinkError> {
        self.batch.push(record);
        if self.batch.len() == BATCH {
            self.pass_on()?;
        }
        Ok(())
    }
}

/// What is said on the command line of a file that describes itself.
#[derive(Clone, Debug, Default)]
pub struct Stated {
    /// Key; the file's name where absent.
    pub key: Option<String>,
    /// Citation.
    pub citation: String,
    /// Licence.
    pub licence: String,
    /// Medium of wavelengths that do not state their own: `air` or `vacuum`.
    pub medium: Option<String>,
    /// Format, where its content does not tell.
    pub format: Option<Format>,
}

/// As much of a file as is looked at to explain it, bytes.
const EXPLAINED_BYTES: u64 = 8 << 20;

/// Says what a file is and offers a mapping for it.
///
/// # Errors
/// A file that cannot be read.
pub fn explain(path: &Path) -> Result<Explanation> {
    let file = File::open(path).map_err(unreadable(path))?;
    let unpacked = importers::unpack::unpack(Box::new(file), &Limits::default());
    let mut bytes = Vec::new();
    unpacked
        .and_then(|input| input.take(EXPLAINED_BYTES).read_to_end(&mut bytes))
        .map_err(unreadable(path))?;
    let name = path.file_name().unwrap_or_default().to_string_lossy();
    Ok(importers::explain::explain(&bytes, &name))
}

const fn self_describing_word(format: Format) -> Option<&'static str> {
    match format {
        Format::Delimited | Format::Fixed => None,
        Format::Mrt => Some("mrt"),
        Format::Votable => Some("votable"),
        Format::Ecsv => Some("ecsv"),
        Format::Xsams => Some("xsams"),
        Format::Fits => Some("fits"),
        Format::Jsonl => Some("jsonl"),
        Format::Parquet => Some("parquet"),
    }
}

/// A key from a file name: lower case, what is no letter or digit becomes a hyphen.
fn key_of(name: &str) -> String {
    let stem = name.split('.').next().unwrap_or(name).to_lowercase();
    stem.chars()
        .map(|c| if c.is_ascii_alphanumeric() { c } else { '-' })
        .collect()
}

/// Names the content of a source: SHA-256 over the text of its description and the SHA-256 (hex) of
/// each table in the order of the description.
pub(super) fn source_checksum(description: &str, tables: &[String]) -> String {
    let mut all = Sha256::new();
    all.update(description.as_bytes());
    for table in tables {
        all.update(table.as_bytes());
    }
    hex(&all.finalize())
}

fn unreadable(path: &Path) -> impl Fn(io::Error) -> CatalogueError + use<> {
    let path = path.to_owned();
    move |cause| CatalogueError::File {
        path: path.clone(),
        action: "read",
        cause,
    }
}

fn sha256(path: &Path) -> io::Result<String> {
    let mut file = File::open(path)?;
    let mut hash = Sha256::new();
    let mut buffer = vec![0; 1 << 18];
    loop {
        match file.read(&mut buffer)? {
            0 => return Ok(hex(&hash.finalize())),
            read => hash.update(&buffer[..read]),
        }
    }
}

pub(super) fn hex(bytes: &[u8]) -> String {
    bytes.iter().map(|byte| format!("{byte:02x}")).collect()
}
