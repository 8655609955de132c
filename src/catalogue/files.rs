//! A source on disk: `source.toml` with its tables beside it.

use std::fs::File;
use std::io::{self, BufReader, Read};
use std::path::{Path, PathBuf};

use importers::source::SourceDescription;
use importers::{ReadOptions, read_source};
use sha2::{Digest, Sha256};

use super::error::{CatalogueError, Result};
use super::ingest::{ImportSummary, Incoming};
use super::store::Catalogue;

/// A described source whose files were found.
pub struct SourceFiles {
    description: SourceDescription,
    folder: PathBuf,
    checksum: String,
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
            ..ReadOptions::default()
        };
        let mut open = |name: &str| -> io::Result<Box<dyn Read>> {
            Ok(Box::new(BufReader::with_capacity(
                1 << 18,
                File::open(self.folder.join(name))?,
            )))
        };
        let read = |sink: &mut dyn importers::Sink| {
            read_source(&self.description, &mut open, &options, sink)
        };
        catalogue.import(&incoming, read, dry_run)
    }
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
