//! `import`: load a described table, whole or not at all.

use std::path::PathBuf;

use clap::Args;

use super::options::{CatalogueOptions, OutputOptions};
use super::progress::Bar;
use super::{CliError, Exit, Outcome};
use crate::catalogue::SourceFiles;
use crate::show;

/// Load a table of levels or lines, whole or not at all
///
/// The table is described by a source.toml beside it: citation, licence, scope and what each
/// column means (data/README.md of the project explains it; the bundled sources are examples).
#[derive(Args, Debug)]
#[command(after_help = "Example:\n  lineclear import data/morton2003 --dry-run")]
pub struct Arguments {
    /// source.toml, or the folder that holds it and its tables
    #[arg(value_name = "SOURCE")]
    source: PathBuf,
    /// Leave out at most N bad rows and list them
    #[arg(long, value_name = "N", default_value_t = 0)]
    skip_bad: usize,
    /// Say what would be done and change nothing
    #[arg(long)]
    dry_run: bool,
    /// Licence of the table, where its source.toml names none
    #[arg(long, value_name = "LICENCE")]
    licence: Option<String>,
    #[command(flatten)]
    output: OutputOptions,
}

pub(super) fn run(arguments: &Arguments, context: &CatalogueOptions) -> Result<Outcome, CliError> {
    let files = SourceFiles::find(&arguments.source)?.with_licence(arguments.licence.as_deref())?;
    let mut catalogue = context.open()?;
    let bar = Bar::new(context.quiet(), "importing");
    bar.pulse();
    let summary = files.import(&mut catalogue, arguments.skip_bad, arguments.dry_run);
    bar.finish();
    let sheet = show::imported(&summary?, arguments.dry_run);
    Ok(Outcome {
        sheet,
        format: arguments.output.format,
        exit: Exit::Answered,
    })
}
