//! `import`: load a described table, whole or not at all.

use std::path::PathBuf;

use clap::Args;
use importers::Limits;
use importers::source::Format;

use super::options::{CatalogueOptions, OutputOptions};
use super::progress::Bar;
use super::{CliError, Exit, Outcome, interrupt};
use crate::catalogue::{self, HandedOver, SourceFiles, Stated};
use crate::show;

/// Load a table of levels or lines, whole or not at all
///
/// A table is described by a source.toml beside it: citation, licence, scope and what each column
/// means (data/README.md of the project explains it; the bundled sources are examples). Files that
/// describe themselves (machine-readable tables with a byte-by-byte description, VOTable, ECSV,
/// XSAMS, FITS tables, JSON lines, Parquet; gzip of any) need only a citation and a licence. Files
/// that `lineclear export --content reports` wrote need nothing. --explain says what a file is and
/// writes a source.toml to edit.
#[derive(Args, Debug)]
#[command(
    after_help = "Examples:\n  lineclear import data/morton2003 --dry-run\n  \
    lineclear import lines.vot --citation \"A. Author 2020, Journal 1, 2\" --licence CC-BY-4.0\n  \
    lineclear import --explain lines.csv\n  lineclear import morton2003.vot"
)]
pub struct Arguments {
    /// source.toml, the folder that holds it and its tables, a file that describes itself, or an
    /// export
    #[arg(value_name = "SOURCE")]
    source: PathBuf,
    /// Say what the file is and offer a source.toml for it; nothing is loaded
    #[arg(long, conflicts_with_all = ["dry_run", "skip_bad"])]
    explain: bool,
    /// Leave out at most N bad rows and list them
    #[arg(long, value_name = "N", default_value_t = 0)]
    skip_bad: usize,
    /// Say what would be done and change nothing
    #[arg(long)]
    dry_run: bool,
    /// Licence of the table, where its source.toml names none
    #[arg(long, value_name = "LICENCE")]
    licence: Option<String>,
    /// Citation of a file that describes itself
    #[arg(long, value_name = "TEXT")]
    citation: Option<String>,
    /// Key of a file that describes itself [default: its name]
    #[arg(long, value_name = "KEY")]
    key: Option<String>,
    /// Medium of wavelengths in a file that describes itself but does not say it
    #[arg(long, value_enum, value_name = "MEDIUM")]
    medium: Option<TableMedium>,
    /// Format of a file that describes itself, where its content does not tell
    #[arg(long = "format", value_enum, value_name = "FORMAT")]
    table_format: Option<TableFormat>,
    /// Another limit on what a file may ask for, such as cell-bytes=4MiB; may be repeated
    #[arg(long, value_name = "NAME=NUMBER")]
    limit: Vec<String>,
    #[command(flatten)]
    output: OutputOptions,
}

#[derive(clap::ValueEnum, Clone, Copy, Debug, PartialEq, Eq)]
enum TableMedium {
    Air,
    Vacuum,
}

#[derive(clap::ValueEnum, Clone, Copy, Debug, PartialEq, Eq)]
enum TableFormat {
    Mrt,
    Votable,
    Ecsv,
    Xsams,
    Fits,
    Jsonl,
    Parquet,
}

impl Arguments {
    fn limits(&self) -> Result<Limits, CliError> {
        let mut limits = Limits::default();
        for text in &self.limit {
            let set = limits.set(text);
            set.map_err(|problem| CliError::Usage(format!("--limit: {problem}")))?;
        }
        Ok(limits)
    }

    /// A file that the program wrote says itself what it is.
    fn refuse_statements(&self) -> Result<(), CliError> {
        let stated = self.licence.is_some()
            || self.citation.is_some()
            || self.key.is_some()
            || self.medium.is_some()
            || self.table_format.is_some();
        if stated || self.skip_bad > 0 {
            return Err(CliError::Options(
                "the file was written by `lineclear export` and names its sources itself; only \
                 --dry-run goes with it",
            ));
        }
        Ok(())
    }

    fn files(&self) -> Result<SourceFiles, CliError> {
        let described = self.source.is_dir()
            || self
                .source
                .extension()
                .is_some_and(|e| e.eq_ignore_ascii_case("toml"));
        if described {
            let files = SourceFiles::find(&self.source)?;
            let files = files.with_limits(self.limits()?);
            return Ok(files.with_licence(self.licence.as_deref())?);
        }
        let stated = Stated {
            key: self.key.clone(),
            citation: self.citation.clone().unwrap_or_default(),
            licence: self.licence.clone().unwrap_or_default(),
            medium: self.medium.map(|m| format!("{m:?}").to_lowercase()),
            format: self.table_format.map(|format| match format {
                TableFormat::Mrt => Format::Mrt,
                TableFormat::Votable => Format::Votable,
                TableFormat::Ecsv => Format::Ecsv,
                TableFormat::Xsams => Format::Xsams,
                TableFormat::Fits => Format::Fits,
                TableFormat::Jsonl => Format::Jsonl,
                TableFormat::Parquet => Format::Parquet,
            }),
        };
        let files = SourceFiles::self_describing(&self.source, &stated)?;
        Ok(files.with_limits(self.limits()?).with_licence(None)?)
    }
}

pub(super) fn run(arguments: &Arguments, context: &CatalogueOptions) -> Result<Outcome, CliError> {
    let format = arguments.output.format;
    if arguments.explain {
        let name = arguments.source.display().to_string();
        let sheet = show::explained(&name, &catalogue::explain(&arguments.source)?);
        return Ok(Outcome {
            sheet,
            format,
            exit: Exit::Answered,
        });
    }
    if let Some(files) = HandedOver::find(&arguments.source, &arguments.limits()?)? {
        arguments.refuse_statements()?;
        let mut catalogue = context.open()?;
        catalogue.stop_when(interrupt::wish()?);
        let bar = Bar::new(context.quiet(), "importing");
        bar.pulse();
        let summary = catalogue.take_in(&files, arguments.dry_run);
        bar.finish();
        return Ok(Outcome {
            sheet: show::imported(&summary?, arguments.dry_run),
            format,
            exit: Exit::Answered,
        });
    }
    let files = arguments.files()?;
    let mut catalogue = context.open()?;
    catalogue.stop_when(interrupt::wish()?);
    let bar = Bar::new(context.quiet(), "importing");
    bar.pulse();
    let summary = files.import(&mut catalogue, arguments.skip_bad, arguments.dry_run);
    bar.finish();
    let sheet = show::imported(&summary?, arguments.dry_run);
    Ok(Outcome {
        sheet,
        format,
        exit: Exit::Answered,
    })
}
