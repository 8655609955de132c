//! `contrast`: two sources side by side.

use clap::Args;

use super::audit::{held, source_is_held};
use super::options::{CatalogueOptions, OutputOptions};
use super::{CliError, Exit, Outcome, window};
use crate::advise::contrast;
use crate::show;

/// Compare two sources: lines in both, positions, rates, the worst ten
///
/// Lines are those that the catalogue takes for the same. Offsets and ratios are the second source
/// against the first; an offset that most lines share is named (air against vacuum, calibration,
/// zero point).
#[derive(Args, Debug)]
#[command(
    after_help = "Examples:\n  lineclear contrast morton2003 verner1996\n  \
    lineclear contrast morton2003 curated-fe-i --as json"
)]
pub struct Arguments {
    /// Key of the first source, as `lineclear sources` lists it
    #[arg(value_name = "FIRST")]
    first: String,
    /// Key of the second source
    #[arg(value_name = "SECOND")]
    second: String,
    /// Species, separated by commas [default: all that they report]
    #[arg(long, value_name = "SPECIES")]
    of: Vec<String>,
    #[command(flatten)]
    output: OutputOptions,
}

pub(super) fn run(arguments: &Arguments, context: &CatalogueOptions) -> Result<Outcome, CliError> {
    let requests = window::species(&arguments.of)?;
    if arguments.first == arguments.second {
        return Err(CliError::Options(
            "a source is not compared with itself; name two different sources",
        ));
    }
    let catalogue = context.open()?;
    source_is_held(&catalogue, &arguments.first)?;
    source_is_held(&catalogue, &arguments.second)?;
    let (species, not_held) = held(&catalogue, &requests)?;
    let reports = catalogue.reports(&species)?;
    let answer = contrast::contrast(&reports, &arguments.first, &arguments.second);
    Ok(Outcome {
        sheet: show::contrast(&answer, &not_held, catalogue.citations()?),
        format: arguments.output.format,
        exit: Exit::Answered,
    })
}
