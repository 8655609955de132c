//! `forget`: take a source out, as if it had never been there.

use clap::Args;

use super::options::{CatalogueOptions, OutputOptions};
use super::{CliError, Exit, Outcome, interrupt};
use crate::show;

/// Take a source out; the catalogue is then what it would be without it
#[derive(Args, Debug)]
#[command(after_help = "Example:\n  lineclear forget my-table")]
pub struct Arguments {
    /// Key of the source, as `lineclear sources` lists it
    #[arg(value_name = "KEY")]
    key: String,
    #[command(flatten)]
    output: OutputOptions,
}

pub(super) fn run(arguments: &Arguments, context: &CatalogueOptions) -> Result<Outcome, CliError> {
    let mut catalogue = context.open()?;
    catalogue.stop_when(interrupt::wish()?);
    let reports = catalogue.forget(&arguments.key)?;
    let sheet = show::forgotten(&arguments.key, reports);
    Ok(Outcome {
        sheet,
        format: arguments.output.format,
        exit: Exit::Answered,
    })
}
