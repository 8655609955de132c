//! `sources`: what is loaded, from where, under which licence.

use clap::Args;

use super::options::{CatalogueOptions, OutputOptions};
use super::{CliError, Exit, Outcome};
use crate::show;

/// List what is loaded, from where and under which licence
#[derive(Args, Debug)]
#[command(after_help = "Example:\n  lineclear sources --as csv")]
pub struct Arguments {
    #[command(flatten)]
    output: OutputOptions,
}

pub(super) fn run(arguments: &Arguments, context: &CatalogueOptions) -> Result<Outcome, CliError> {
    let catalogue = context.open()?;
    let sheet = show::sources(
        &catalogue.sources()?,
        &catalogue.path().display().to_string(),
    );
    Ok(Outcome {
        sheet,
        format: arguments.output.format,
        exit: Exit::Answered,
    })
}
