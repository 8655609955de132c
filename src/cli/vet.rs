//! `vet`: is this one line clear at this instrument width?

use clap::Args;
use serde_json::json;
use vocabulary::atom::SpeciesRequest;
use vocabulary::light::{Medium, SpectralRange};

use super::line::{around, wanted};
use super::options::{
    CatalogueOptions, Checked, ConditionOptions, OutputOptions, Required, column_density, medium,
};
use super::passband::kt_per_cm;
use super::window::species;
use super::{CliError, Exit, Outcome, assemble, describe};
use crate::advise::vet::{self, ALTERNATIVES_NM, Answer, Order, Question};
use crate::advise::{REACH_WIDTHS, Wanted, pressure_reach_nm};
use crate::catalogue::Catalogue;
use crate::show;

/// Whether one line is clear of the light of other species, by what it is disturbed, and what helps
///
/// Gives the part of the light at the line that comes from other species, with its uncertainty, each
/// interferer with its distance, the resolving power from which on the line is clear, and clear
/// lines of the same species within 100 nm. LINE is a position (the brightest line there is meant)
/// or a species with a position (its line nearest to it).
#[derive(Args, Debug)]
#[command(
    after_help = "Examples:\n  lineclear vet \"He I 667.8nm\" --among C,O,Fe,Cu --fwhm 0.05nm\n  \
    lineclear vet \"Cd II@226.502nm\" --among Fe,Ni,Ti --resolving 20000 --require clear\n  \
    lineclear vet \"Na I@589nm\" --among He --column-density 1e16m-2\n  \
    lineclear vet 656.28nm --among H,He,Fe --orders 2 --as json\n  \
    lineclear vet \"He I 667.8nm\" --among C,Fe --te 0.5..5eV:9 --mix \"Fe=0.01±30%\"\n\n\
    Hollow-cathode lamps and discharges bring high voltage and ultraviolet light: follow the safety\n\
    rules of the site."
)]
pub struct Arguments {
    /// The line: "He I 667.8nm", He@667.8nm, or a position such as 667.815nm
    #[arg(value_name = "LINE", allow_hyphen_values = true)]
    line: String,
    /// Species that are there beside it, separated by commas: Fe (all stages held), "Fe I", Fe+
    #[arg(long, value_name = "SPECIES", required = true)]
    among: Vec<String>,
    /// Medium of wavelengths: auto is air from 200 nm to 2000 nm, vacuum elsewhere
    #[arg(long, value_parser = medium, default_value = "auto", value_name = "MEDIUM")]
    medium: Medium,
    #[command(flatten)]
    conditions: ConditionOptions,
    /// Highest order of the grating whose light reaches the detector; without a filter that sorts
    /// orders, lines at λ/2 and λ/3 show at λ
    #[arg(long, value_name = "N", default_value_t = 1,
        value_parser = clap::value_parser!(u8).range(1..=10))]
    orders: u8,
    /// Atoms of the line's species along the line of sight, for self-absorption: 1e16m-2
    #[arg(long, value_name = "DENSITY", allow_hyphen_values = true)]
    column_density: Option<String>,
    /// Exit with status 3 unless the line is at least this clear
    #[arg(long, value_enum, value_name = "VERDICT")]
    require: Option<Required>,
    #[command(flatten)]
    output: OutputOptions,
}

pub(super) fn run(arguments: Arguments, context: &CatalogueOptions) -> Result<Outcome, CliError> {
    let wanted = wanted(&arguments.line, arguments.medium)?;
    let requests = with_target(species(&arguments.among)?, &wanted);
    let column_per_m2 = arguments
        .column_density
        .as_deref()
        .map(column_density)
        .transpose()?;
    let centre = around(wanted.vacuum_nm)?;
    let checked = arguments.conditions.check_scans(&centre)?;
    let catalogue = context.open()?;
    let width_nm = checked.width.at_nm(wanted.vacuum_nm);
    let reach_nm = (REACH_WIDTHS * width_nm).max(pressure_reach_nm(&checked.conditions));
    let margin_nm = ALTERNATIVES_NM.max(reach_nm) + reach_nm;
    let mut held = assemble::spectra(&catalogue, &requests, &checked.amounts, &centre, margin_nm)?;
    assemble::complete(&catalogue, &mut held.spectra, &checked.conditions)?;
    let orders = orders(&catalogue, &requests, &checked, &wanted, arguments.orders)?;
    let question = Question {
        wanted,
        medium: arguments.medium,
        width: checked.width,
        conditions: checked.conditions.clone(),
        not_held: held.not_held,
        column_per_m2,
        scan_kt_per_cm: checked.te_scan.iter().map(|te| kt_per_cm(*te)).collect(),
        scan_density_per_m3: checked.ne_scan.clone(),
    };
    let answer = vet::answer(&question, &held.spectra, &orders)?;
    let exit = match arguments.require {
        Some(required) if !required.allows(answer.verdict.high) => Exit::Unmet,
        _ => Exit::Answered,
    };
    let context = describe(&catalogue, &answer, &question, &checked, arguments.orders)?;
    Ok(Outcome {
        sheet: show::vet(&answer, &question, context),
        format: arguments.output.format,
        exit,
    })
}

/// The species of the target belongs to the mix.
pub(super) fn with_target(
    mut requests: Vec<SpeciesRequest>,
    wanted: &Wanted,
) -> Vec<SpeciesRequest> {
    if let Some(target) = wanted.request
        && !requests.contains(&target)
    {
        requests.insert(0, target);
    }
    requests
}

fn orders(
    catalogue: &Catalogue,
    requests: &[SpeciesRequest],
    checked: &Checked,
    wanted: &Wanted,
    highest: u8,
) -> Result<Vec<Order>, CliError> {
    let width_nm = checked.width.at_nm(wanted.vacuum_nm);
    (2..=highest)
        .map(|order| {
            let centre_nm = wanted.vacuum_nm / f64::from(order);
            let range: SpectralRange = around(centre_nm)?;
            // Room for the dispersion of air between the orders: 1e-4 of the wavelength.
            let margin_nm = REACH_WIDTHS * width_nm / f64::from(order) + 1e-4 * centre_nm;
            let mut held =
                assemble::spectra(catalogue, requests, &checked.amounts, &range, margin_nm)?;
            assemble::complete(catalogue, &mut held.spectra, &checked.conditions)?;
            Ok(Order {
                order,
                spectra: held.spectra,
            })
        })
        .collect()
}

fn describe(
    catalogue: &Catalogue,
    answer: &Answer,
    question: &Question,
    checked: &Checked,
    orders: u8,
) -> Result<show::Context, CliError> {
    let shown = answer
        .interferers
        .iter()
        .filter(|i| i.fraction >= show::WORTH_A_ROW);
    let lines = std::iter::once(&answer.line)
        .chain(shown.map(|i| &i.line))
        .chain(answer.alternatives.iter().map(|a| &a.line));
    let mut context = describe::context("vet", catalogue, question.medium, checked, lines)?;
    let mut put = |key: &str, value| context.conditions.insert(key.to_owned(), value);
    put(
        "fwhm_nm",
        json!(question.width.at_nm(answer.placed.vacuum_nm)),
    );
    put("highest_order", json!(orders));
    put("column_density_per_m2", json!(question.column_per_m2));
    Ok(context)
}
