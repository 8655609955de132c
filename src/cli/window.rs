//! `window`: what lies in this window, rated, with interference warnings.

use clap::Args;
use serde_json::json;
use vocabulary::atom::SpeciesRequest;
use vocabulary::light::{Air, Medium, TypedRange};

use super::options::{
    CatalogueOptions, Checked, ConditionOptions, OutputOptions, Required, medium,
};
use super::{CliError, Exit, Outcome, assemble, describe};
use crate::advise::pressure_reach_nm;
use crate::advise::window::{self, Answer, Question, REACH_WIDTHS, WindowLine};
use crate::catalogue::Catalogue;
use crate::show::{self, Context, Wish};

/// Which lines fall in this window for these species, and what gets in the way
///
/// Lists the features (what the instrument sees as one line) of the species in the range, with
/// their light and a verdict each: clear below 1 % of light from other species, tinged to 10 %,
/// blended to 50 %, swamped beyond, unrated where the data do not allow a number.
#[derive(Args, Debug)]
#[command(
    after_help = "Examples:\n  lineclear window 585..590nm --of Na,Ne,He\n  \
    lineclear window 656.28+-0.5nm --of H,D,C --fwhm 0.05nm --te 3eV\n  \
    lineclear window 15230..15245cm-1 --of \"H I, Fe I..II\" --as csv"
)]
pub struct Arguments {
    /// Range with its unit: 585..590nm, 656.28+-0.3nm, 15230..15245cm-1, 2.1..2.2eV
    #[arg(value_name = "RANGE", allow_hyphen_values = true)]
    range: String,
    /// Species, separated by commas: Fe (all stages held), "Fe I", Fe+, "Fe I..III", D, 6Li
    #[arg(long, value_name = "SPECIES", required = true)]
    of: Vec<String>,
    /// Medium of wavelengths: auto is air from 200 nm to 2000 nm, vacuum elsewhere
    #[arg(long, value_parser = medium, default_value = "auto", value_name = "MEDIUM")]
    medium: Medium,
    #[command(flatten)]
    conditions: ConditionOptions,
    /// Show each component on a row of its own
    #[arg(long)]
    components: bool,
    /// Show only the N brightest features
    #[arg(long, value_name = "N", value_parser = clap::value_parser!(u32).range(1..))]
    strongest: Option<u32>,
    /// Show also lines that no table lists and that are faint by the prior for unknown rates
    #[arg(long)]
    faint: bool,
    /// Exit with status 3 unless every feature is at least this clear
    #[arg(long, value_enum, value_name = "VERDICT")]
    require: Option<Required>,
    #[command(flatten)]
    output: OutputOptions,
}

pub(super) fn run(arguments: Arguments, context: &CatalogueOptions) -> Result<Outcome, CliError> {
    let requests = species(&arguments.of)?;
    let typed: TypedRange = arguments.range.parse()?;
    let range = typed.resolve(arguments.medium, Air::standard())?;
    let mut checked = arguments.conditions.check(&range)?;
    if range.unit_assumed {
        checked.assumed.push("nm, as the range has no unit".into());
    }
    let catalogue = context.open()?;
    let width_nm = checked.width.at_nm(range.vacuum_high_nm);
    let margin_nm = (REACH_WIDTHS * width_nm).max(pressure_reach_nm(&checked.conditions));
    let mut held = assemble::spectra(&catalogue, &requests, &checked.amounts, &range, margin_nm)?;
    assemble::complete(&catalogue, &mut held.spectra, &checked.conditions)?;
    let question = Question {
        medium: arguments.medium,
        width: checked.width,
        conditions: checked.conditions.clone(),
        not_held: held.not_held,
        range,
    };
    let answer = window::answer(&question, &held.spectra)?;
    let exit = match arguments.require {
        Some(required) if !meets(&answer, required) => Exit::Unmet,
        _ => Exit::Answered,
    };
    let wish = Wish {
        typed: format!("{} ({})", arguments.range.trim(), read_as(&question)),
        components: arguments.components,
        strongest: arguments.strongest.map(|n| n as usize),
        faint: arguments.faint,
    };
    let sheet = show::window(
        &answer,
        describe(&catalogue, &answer, &question, &checked, arguments.faint)?,
        &wish,
    );
    Ok(Outcome {
        sheet,
        format: arguments.output.format,
        exit,
    })
}

/// Species of repeated and comma-separated options.
pub(super) fn species(lists: &[String]) -> Result<Vec<SpeciesRequest>, CliError> {
    let mut requests = Vec::new();
    for list in lists {
        requests.extend(SpeciesRequest::parse_list(list)?);
    }
    Ok(requests)
}

/// `--require` asks for the upper end of the interval of each feature that a table lists; what lines
/// without a rate may do to it is part of its verdict. An answer without a feature requires that
/// the window could be judged.
fn meets(answer: &Answer, required: Required) -> bool {
    answer
        .features
        .iter()
        .filter(|f| !answer.is_unlisted(f))
        .all(|f| required.allows(f.verdict.high))
        && answer.unrated.iter().all(|u| !u.decides)
}

fn read_as(question: &Question) -> &'static str {
    use vocabulary::light::PositionMedium;
    match question.range.read_in {
        Some(PositionMedium::Air) => "read in air",
        Some(PositionMedium::Vacuum) => "read in vacuum",
        None => "vacuum wavenumbers",
    }
}

fn describe(
    catalogue: &Catalogue,
    answer: &Answer,
    question: &Question,
    checked: &Checked,
    faint: bool,
) -> Result<Context, CliError> {
    let shown = |l: &&WindowLine| faint || !answer.is_faint(&answer.features[l.feature]);
    let lines = answer.lines.iter().filter(shown).map(|l| &l.line);
    let mut context = describe::context("window", catalogue, question.medium, checked, lines)?;
    let mut put = |key: &str, value| context.conditions.insert(key.to_owned(), value);
    put(
        "fwhm_nm",
        json!(question.width.at_nm(question.range.centre_vacuum_nm())),
    );
    put(
        "range_vacuum_nm",
        json!([question.range.vacuum_low_nm, question.range.vacuum_high_nm]),
    );
    Ok(context)
}
