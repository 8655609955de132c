//! `sources`: what is loaded, from where, under which licence.

use clap::Args;

use vocabulary::atom::SpeciesRequest;

use super::options::{CatalogueOptions, OutputOptions};
use super::window::species;
use super::{CliError, Exit, Outcome};
use crate::advise::ledger::{Band, bands};
use crate::catalogue::Catalogue;
use crate::show;

/// List what is loaded, from where and under which licence
///
/// With --scope: what is held of a species, band by band: how many lines, on what they rest, and
/// what the sources claim to cover. Verdicts go by these claims.
#[derive(Args, Debug)]
#[command(
    after_help = "Examples:\n  lineclear sources --as csv\n  lineclear sources --scope \"Fe I..II\""
)]
pub struct Arguments {
    /// Show what is held and claimed of these species, separated by commas: Fe, "Fe I..III", D
    #[arg(long, value_name = "SPECIES")]
    scope: Vec<String>,
    #[command(flatten)]
    output: OutputOptions,
}

pub(super) fn run(arguments: &Arguments, context: &CatalogueOptions) -> Result<Outcome, CliError> {
    let requests = species(&arguments.scope)?;
    let catalogue = context.open()?;
    let sheet = if requests.is_empty() {
        let path = catalogue.path().display().to_string();
        show::sources(&catalogue.sources()?, &path)
    } else {
        let (bands, not_held) = ledger(&catalogue, &requests)?;
        show::scope(&bands, &not_held)
    };
    Ok(Outcome {
        sheet,
        format: arguments.output.format,
        exit: Exit::Answered,
    })
}

/// Bands of all held species that are asked for, and the requests of which nothing is held.
fn ledger(
    catalogue: &Catalogue,
    requests: &[SpeciesRequest],
) -> Result<(Vec<Band>, Vec<String>), CliError> {
    let sources = catalogue.sources()?;
    let kind_of = |key: &str| {
        let found = sources.iter().find(|s| s.key == key);
        found.map(|s| s.kind.clone()).unwrap_or_default()
    };
    let held = catalogue.species()?;
    let mut out = Vec::new();
    for &species in held
        .iter()
        .filter(|s| requests.iter().any(|r| r.matches(**s)))
    {
        let levels = catalogue.levels(species)?;
        let lines = catalogue.lines(species, &levels, 0.0, f64::MAX)?;
        out.extend(bands(
            species,
            &catalogue.scopes(species)?,
            &lines,
            &kind_of,
        ));
    }
    let not_held = requests
        .iter()
        .filter(|r| !held.iter().any(|s| r.matches(*s)))
        .map(ToString::to_string)
        .collect();
    Ok((out, not_held))
}
