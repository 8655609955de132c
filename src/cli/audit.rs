//! `audit`: what is wrong, or looks wrong, inside the catalogue.

use clap::Args;
use vocabulary::atom::{Species, SpeciesRequest};

use super::options::{CatalogueOptions, OutputOptions};
use super::{CliError, Exit, Outcome, window};
use crate::advise::audit::{self, KnownFindings, Lifetime};
use crate::catalogue::{Catalogue, CatalogueError, LifetimeRow};
use crate::show::{self, AuditWish};

/// Findings of the bundled tables that are decided.
const KNOWN: &str = include_str!("../../data/known_findings.toml");

/// Find what is wrong inside the catalogue, and what to do about it
///
/// Checks every report: positions against levels (wrong medium, wrong unit, one level off),
/// selection rules, J and energies against other sources, series, rates, lifetimes. Sources that disagree
/// about a line beyond 3 sigma or 25 % in rate are counted, and listed on request.
#[derive(Args, Debug)]
#[command(
    after_help = "Examples:\n  lineclear audit\n  lineclear audit --of \"Fe I\" --known\n  \
    lineclear audit --source my-table --require clean\n  lineclear audit --of \"Fe II\" --conflicts"
)]
pub struct Arguments {
    /// Species, separated by commas [default: all that are held]
    #[arg(long, value_name = "SPECIES")]
    of: Vec<String>,
    /// Only what concerns this source
    #[arg(long, value_name = "KEY")]
    source: Option<String>,
    /// Show known findings as well, with the reason
    #[arg(long)]
    known: bool,
    /// List the lines that sources disagree about
    #[arg(long)]
    conflicts: bool,
    /// Exit with status 3 if there is a finding that is not known
    #[arg(long, value_enum, value_name = "STATE")]
    require: Option<Required>,
    #[command(flatten)]
    output: OutputOptions,
}

#[derive(clap::ValueEnum, Clone, Copy, Debug, PartialEq, Eq)]
enum Required {
    Clean,
}

pub(super) fn run(arguments: &Arguments, context: &CatalogueOptions) -> Result<Outcome, CliError> {
    let requests = window::species(&arguments.of)?;
    let catalogue = context.open()?;
    if let Some(key) = &arguments.source {
        source_is_held(&catalogue, key)?;
    }
    let (species, not_held) = held(&catalogue, &requests)?;
    let reports = catalogue.reports(&species)?;
    let mut answer = audit::audit(&reports, &lifetimes(&catalogue)?);
    if let Some(key) = &arguments.source {
        answer.keep_source(key);
    }
    let known = KnownFindings::parse(KNOWN)?;
    let unexplained = answer.findings.iter().any(|f| known.of(f).is_none());
    let exit = match arguments.require {
        Some(Required::Clean) if unexplained => Exit::Unmet,
        _ => Exit::Answered,
    };
    let wish = AuditWish {
        known: arguments.known,
        conflicts: arguments.conflicts,
        not_held,
    };
    Ok(Outcome {
        sheet: show::audit(&answer, &known, &wish, catalogue.citations()?),
        format: arguments.output.format,
        exit,
    })
}

/// Lifetimes that papers report, while their source is in the catalogue.
fn lifetimes(catalogue: &Catalogue) -> Result<Vec<Lifetime>, CliError> {
    let rows = catalogue.resonance_tables()?.lifetimes;
    let lifetime = |row: LifetimeRow| Lifetime {
        species: row.species,
        configuration: row.level.configuration,
        term: row.level.term,
        j: row.level.j,
        lifetime_ns: row.lifetime_ns,
        uncertainty_ns: row.uncertainty_ns,
        paper: row.paper,
    };
    Ok(rows.into_iter().map(lifetime).collect())
}

/// Refuses the key of a source that is not loaded.
pub(super) fn source_is_held(catalogue: &Catalogue, key: &str) -> Result<(), CliError> {
    let held = catalogue.citations()?.iter().any(|(k, ..)| k == key);
    if held {
        return Ok(());
    }
    Err(CatalogueError::NoSuchSource {
        key: key.to_owned(),
    }
    .into())
}

/// Held species that are asked for (all where none is), and the requests that meet none.
pub(super) fn held(
    catalogue: &Catalogue,
    requests: &[SpeciesRequest],
) -> Result<(Vec<Species>, Vec<String>), CliError> {
    let mut species = catalogue.species()?;
    let not_held = requests
        .iter()
        .filter(|r| !species.iter().any(|s| r.matches(*s)))
        .map(ToString::to_string)
        .collect();
    species.retain(|s| requests.is_empty() || requests.iter().any(|r| r.matches(*s)));
    Ok((species, not_held))
}
