//! `export`: hand data on, with its sources and licences.

use std::fs::{self, File};
use std::io::{self, BufWriter, Write};
use std::path::{Path, PathBuf};

use clap::Args;
use importers::handover::{Content, Header};
use vocabulary::atom::Species;
use vocabulary::light::{Air, Medium, TypedRange};

use super::options::{CatalogueOptions, medium};
use super::{CliError, Exit, interrupt, window};
use crate::catalogue::{Catalogue, CatalogueError, Receiver, Selection};
use crate::show::{Form, RowWriter, folder_writer, text_writer};

/// Hand on lines, levels or the rows of sources, with citations and licences
///
/// Lines and levels are what the catalogue concludes, each with uncertainty, origin and the key of
/// its source. With --content reports (or --source) the rows of the sources go out as they are kept,
/// and `lineclear import` takes the file in elsewhere without loss. Parquet makes a folder with one
/// folder per element, which query engines read as one table.
#[derive(Args, Debug)]
#[command(
    after_help = "Examples:\n  lineclear export 500..600nm --of \"Fe I\" --to iron.csv\n  \
    lineclear export --of He --content levels --as jsonl\n  \
    lineclear export --source morton2003 --as votable --to morton2003.vot\n  \
    lineclear export --as parquet --to lines.parquet.d"
)]
pub struct Arguments {
    /// Range with its unit, for lines and reports of lines [default: all]
    #[arg(value_name = "RANGE", allow_hyphen_values = true)]
    range: Option<String>,
    /// Species, separated by commas [default: all that are held]
    #[arg(long, value_name = "SPECIES")]
    of: Vec<String>,
    /// What to hand on [default: lines; reports with --source]
    #[arg(long, value_enum, value_name = "CONTENT")]
    content: Option<Wanted>,
    /// Reports of this source only, by its key; may be repeated
    #[arg(long, value_name = "KEY")]
    source: Vec<String>,
    /// Medium in which a range of wavelengths is read: auto is air from 200 nm to 2000 nm
    #[arg(long, value_parser = medium, default_value = "auto", value_name = "MEDIUM")]
    medium: Medium,
    /// Format
    #[arg(long = "as", value_enum, default_value_t = Form::Csv, value_name = "FORM")]
    form: Form,
    /// File, or folder for parquet [default: standard output]
    #[arg(long, value_name = "PATH")]
    to: Option<PathBuf>,
    /// Replace what stands at that path; a folder only if it is an export
    #[arg(long, requires = "to")]
    replace: bool,
}

#[derive(clap::ValueEnum, Clone, Copy, Debug, PartialEq, Eq)]
enum Wanted {
    /// Lines as concluded, with their levels.
    Lines,
    /// Levels as concluded.
    Levels,
    /// The rows of the sources; can be imported again.
    Reports,
}

pub(super) fn run(arguments: &Arguments, context: &CatalogueOptions) -> Result<Exit, CliError> {
    let selection = selection(arguments)?;
    if arguments.form == Form::Parquet && arguments.to.is_none() {
        return Err(CliError::Options(
            "parquet is a folder of files; name it with --to",
        ));
    }
    let mut catalogue = context.open()?;
    catalogue.stop_when(interrupt::wish()?);
    let done = match &arguments.to {
        None => to_output(&catalogue, &selection, arguments.form)?,
        Some(path) => to_path(&catalogue, &selection, arguments, path)?,
    };
    let place = match &arguments.to {
        None => String::new(),
        Some(path) => format!("{}: ", path.display()),
    };
    let what = match selection.content {
        Content::Lines => "line",
        Content::Levels => "level",
        Content::Reports => "report",
    };
    let many = if done.rows == 1 { "" } else { "s" };
    let of = if done.sources == 1 {
        "source"
    } else {
        "sources"
    };
    context.say(&format!(
        "{place}{} {what}{many} from {} {of}; {}.",
        done.rows, done.sources, selection.words
    ));
    Ok(Exit::Answered)
}

/// An export of nothing is no answer: the species may be spelt right and not be held.
fn not_empty(done: &Done, selection: &Selection) -> Result<(), CliError> {
    if done.rows == 0 {
        return Err(CliError::NothingToExport {
            words: selection.words.clone(),
        });
    }
    Ok(())
}

fn selection(arguments: &Arguments) -> Result<Selection, CliError> {
    let content = match (arguments.content, arguments.source.is_empty()) {
        (Some(Wanted::Reports), _) | (None, false) => Content::Reports,
        (Some(_), false) => {
            return Err(CliError::Options(
                "lines and levels are concluded from all sources; --source goes with --content reports",
            ));
        }
        (Some(Wanted::Levels), true) => Content::Levels,
        (Some(Wanted::Lines) | None, true) => Content::Lines,
    };
    if content == Content::Levels && arguments.range.is_some() {
        return Err(CliError::Options("a range selects lines, not levels"));
    }
    let species = window::species(&arguments.of)?;
    let mut words = match species.as_slice() {
        [] => "all species".to_owned(),
        some => some
            .iter()
            .map(ToString::to_string)
            .collect::<Vec<_>>()
            .join(", "),
    };
    let mut range_per_cm = None;
    if let Some(text) = &arguments.range {
        let typed: TypedRange = text.parse()?;
        let range = typed.resolve(arguments.medium, Air::standard())?;
        range_per_cm = Some((range.wavenumber_low_per_cm, range.wavenumber_high_per_cm));
        words.push_str(&format!(
            ", {:.4} to {:.4} nm in vacuum",
            range.vacuum_low_nm, range.vacuum_high_nm
        ));
    }
    Ok(Selection {
        content,
        species,
        range_per_cm,
        sources: arguments.source.clone(),
        words,
    })
}

/// What was handed on.
struct Done {
    rows: u64,
    sources: usize,
}

/// Hands rows to a writer and counts the sources.
struct Counted<'w> {
    writer: Box<dyn RowWriter + 'w>,
    sources: usize,
}

impl Receiver for Counted<'_> {
    fn begin(&mut self, header: &Header) -> io::Result<()> {
        self.sources = header.sources.len();
        self.writer.begin(header)
    }

    fn row(&mut self, species: Species, cells: &[importers::handover::Cell<'_>]) -> io::Result<()> {
        self.writer.row(species, cells)
    }
}

fn write(
    catalogue: &Catalogue,
    selection: &Selection,
    writer: Box<dyn RowWriter + '_>,
) -> Result<Done, CliError> {
    let mut counted = Counted { writer, sources: 0 };
    let rows = catalogue.hand_over(selection, &mut counted)?;
    counted.writer.finish().map_err(CatalogueError::Receiver)?;
    let done = Done {
        rows,
        sources: counted.sources,
    };
    not_empty(&done, selection)?;
    Ok(done)
}

fn to_output(catalogue: &Catalogue, selection: &Selection, form: Form) -> Result<Done, CliError> {
    let out = BufWriter::with_capacity(1 << 16, io::stdout().lock());
    match text_writer(form, Box::new(out)) {
        Some(writer) => write(catalogue, selection, writer),
        None => Err(CliError::Options("this format needs --to")),
    }
}

/// Writes aside, and puts it in place only when it is whole.
fn to_path(
    catalogue: &Catalogue,
    selection: &Selection,
    arguments: &Arguments,
    path: &Path,
) -> Result<Done, CliError> {
    refuse_other(path, arguments)?;
    let aside = beside(path, "partial");
    let result = if arguments.form == Form::Parquet {
        to_folder(catalogue, selection, &aside)
    } else {
        to_file(catalogue, selection, arguments.form, &aside)
    };
    let placed = result.and_then(|done| {
        put_in_place(&aside, path).map_err(unwritable(path))?;
        Ok(done)
    });
    if placed.is_err() {
        let _ = fs::remove_file(&aside); // one of the two is there, or neither
        let _ = fs::remove_dir_all(&aside);
    }
    placed
}

fn to_file(
    catalogue: &Catalogue,
    selection: &Selection,
    form: Form,
    aside: &Path,
) -> Result<Done, CliError> {
    let mut file = File::create(aside).map_err(unwritable(aside))?;
    let out: Box<dyn Write + '_> = Box::new(BufWriter::with_capacity(1 << 16, &mut file));
    let Some(writer) = text_writer(form, out) else {
        return Err(CliError::Options("this format needs a folder"));
    };
    let done = write(catalogue, selection, writer).map_err(|error| at(error, aside))?;
    file.sync_all().map_err(unwritable(aside))?;
    Ok(done)
}

fn to_folder(catalogue: &Catalogue, selection: &Selection, aside: &Path) -> Result<Done, CliError> {
    fs::create_dir(aside).map_err(unwritable(aside))?;
    write(catalogue, selection, folder_writer(aside)).map_err(|error| at(error, aside))
}

/// A failed write with the file that it was to go to.
fn at(error: CliError, path: &Path) -> CliError {
    match error {
        CliError::Catalogue(CatalogueError::Receiver(cause)) => unwritable(path)(cause),
        other => other,
    }
}

fn unwritable(path: &Path) -> impl Fn(io::Error) -> CliError + use<> {
    let path = path.to_owned();
    move |cause| CliError::Unwritable {
        path: path.clone(),
        cause,
    }
}

/// A name of our own beside a path, so that both lie on one disk.
fn beside(path: &Path, word: &str) -> PathBuf {
    let mut name = path.as_os_str().to_owned();
    name.push(format!(".{word}-{}", std::process::id()));
    name.into()
}

/// Nothing is replaced without the wish, and no folder that is not an export.
fn refuse_other(path: &Path, arguments: &Arguments) -> Result<(), CliError> {
    let taken = |problem| {
        Err(CliError::PathTaken {
            path: path.to_owned(),
            problem,
        })
    };
    if fs::symlink_metadata(path).is_err() {
        return Ok(());
    }
    if !arguments.replace {
        return taken("is there already; name another path or add --replace");
    }
    match (path.is_dir(), arguments.form == Form::Parquet) {
        (false, false) => Ok(()),
        (true, true) if is_export(path) => Ok(()),
        (true, true) => taken("is a folder that holds other things than an export; name another"),
        (true, false) => taken("is a folder; name a file"),
        (false, true) => taken("is a file; name a folder"),
    }
}

/// Whether a folder holds nothing but folders of elements with Parquet files.
fn is_export(folder: &Path) -> bool {
    let names = |folder: &Path| -> Vec<(String, PathBuf)> {
        let entries = fs::read_dir(folder).into_iter().flatten().flatten();
        let named = entries.map(|e| (e.file_name().to_string_lossy().into_owned(), e.path()));
        named.collect()
    };
    names(folder).iter().all(|(name, path)| {
        name.starts_with("element=") && names(path).iter().all(|(name, _)| name == "part-0.parquet")
    })
}

fn put_in_place(aside: &Path, path: &Path) -> io::Result<()> {
    if !path.is_dir() {
        return fs::rename(aside, path);
    }
    let old = beside(path, "old");
    fs::rename(path, &old)?;
    fs::rename(aside, path)?;
    fs::remove_dir_all(old)
}
