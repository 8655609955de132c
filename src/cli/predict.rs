//! `predict`: levels and lines of a series by calculation.

use std::path::{Path, PathBuf};

use clap::Args;
use serde_json::{Value, json};
use vocabulary::atom::{HalfInteger, SpeciesRequest};
use vocabulary::light::{Medium, Temperature};

use super::options::{CatalogueOptions, OutputOptions, medium};
use super::table_file::{ColumnIndex, TableFile};
use super::{CliError, Exit, Outcome};
use crate::advise::predict::{self, Answer, LowerName, PredictError, Question, SeriesName};
use crate::calc::series::{Member, orbital_number};
use crate::show::{self, Context};

/// Levels and lines of a series by calculation, with method and uncertainty
///
/// One electron and a nucleus (H I, D I, He II …): energies and rates of quantum theory. One electron
/// outside a core: a Rydberg–Ritz fit to the levels that are held, or to a table of your own. Each level
/// comes with its quantum defect, distance to the series limit, radiative lifetime, lifetime in
/// black-body radiation, and the scale of its polarisability.
#[derive(Args, Debug)]
#[command(
    after_help = "Examples:\n  lineclear predict \"Rb I\" --series nS1/2 --n 5..60\n  \
    lineclear predict \"Cs I\" --series nD5/2 --n 10..40 --to \"6p 3/2\" --temperature 300K\n  \
    lineclear predict \"H I\" --series Balmer --n 3..20\n\n\
    The file of --levels has the columns `n`, `energy_per_cm` and, where known, `uncertainty_per_cm`."
)]
pub struct Arguments {
    /// One stage: "Rb I"
    #[arg(value_name = "SPECIES")]
    species: String,
    /// nS1/2, nD5/2, n3P2 …; for one electron also Lyman, Balmer, Paschen, Brackett, Pfund, Humphreys
    #[arg(long, value_name = "SERIES")]
    series: String,
    /// First and last n: 5..60
    #[arg(long, value_name = "N..N")]
    n: String,
    /// Lines to this lower level: "5p 3/2", or "5p" for both J
    #[arg(long, value_name = "LEVEL")]
    to: Option<String>,
    /// Temperature of the black-body radiation around, with its unit
    #[arg(long, value_name = "TEMPERATURE", default_value = "300K")]
    temperature: String,
    /// Fit to the levels of this table instead of those held
    #[arg(long, value_name = "FILE.csv")]
    levels: Option<PathBuf>,
    /// Medium of wavelengths: auto is air from 200 nm to 2000 nm, vacuum elsewhere
    #[arg(long, value_parser = medium, default_value = "auto", value_name = "MEDIUM")]
    medium: Medium,
    #[command(flatten)]
    output: OutputOptions,
}

pub(super) fn run(arguments: &Arguments, context: &CatalogueOptions) -> Result<Outcome, CliError> {
    let request: SpeciesRequest = arguments.species.parse()?;
    let species = request.single().ok_or(CliError::Options(
        "series belong to one stage: name it, such as \"Rb I\"",
    ))?;
    let temperature: Temperature = arguments.temperature.parse()?;
    let (from_n, to_n) = range(&arguments.n)?;
    let (given, assumed) = match &arguments.levels {
        Some(path) => members(path)?,
        None => (Vec::new(), None),
    };
    let question = Question {
        species,
        series: series(&arguments.series)?,
        typed: arguments.series.trim().to_owned(),
        from_n,
        to_n,
        to: arguments.to.as_deref().map(lower).transpose()?,
        kelvin: Some(temperature.kelvin()),
        medium: arguments.medium,
        given,
    };
    let mut described = Context {
        command: "predict",
        medium: question.medium.to_string(),
        assumed: assumed.into_iter().collect(),
        ..Context::default()
    };
    described.conditions.insert(
        "black_body_temperature_k".into(),
        json!(temperature.kelvin()),
    );
    let answer = if species.is_one_electron() {
        if arguments.levels.is_some() {
            return Err(CliError::Options(
                "--levels is for fits; one electron and a nucleus is computed without one",
            ));
        }
        predict::one_electron(&question)?
    } else {
        fitted(&question, context, &mut described)?
    };
    let lines_first = question.to.is_some() || matches!(question.series, SeriesName::Shell { .. });
    Ok(Outcome {
        sheet: show::predict(&answer, species, lines_first, described),
        format: arguments.output.format,
        exit: Exit::Answered,
    })
}

fn fitted(
    question: &Question,
    context: &CatalogueOptions,
    described: &mut Context,
) -> Result<Answer, CliError> {
    let catalogue = context.open()?;
    let held = catalogue.outer_levels(question.species)?;
    let (setting, levels) = held.ok_or(PredictError::NoLimit {
        species: question.species,
    })?;
    let answer = predict::outer(question, &setting, &levels)?;
    for (key, citation, licence) in catalogue.citations()? {
        if answer.sources.iter().any(|used| **used == *key) {
            described.sources.insert(key, (citation, licence));
        }
    }
    let limit = json!(setting.limit_per_cm);
    described
        .conditions
        .insert("ionisation_energy_per_cm".into(), limit);
    let rydberg: Value = json!(setting.rydberg_per_cm);
    described
        .conditions
        .insert("rydberg_constant_per_cm".into(), rydberg);
    Ok(answer)
}

/// `5..60`, or one n.
fn range(text: &str) -> Result<(u32, u32), CliError> {
    let wrong = CliError::Options("--n takes whole numbers from 1 upwards, first and last: 5..60");
    let (first, last) = text.split_once("..").unwrap_or((text, text));
    let last = last.trim().trim_start_matches('=');
    match (first.trim().parse::<u32>(), last.parse::<u32>()) {
        (Ok(first), Ok(last)) if first >= 1 && first <= last && last <= MOST_N => Ok((first, last)),
        (Ok(_), Ok(last)) if last > MOST_N => Err(CliError::Options("--n goes to 150 at the most")),
        _ => Err(wrong),
    }
}

/// Highest n that can be asked for.
const MOST_N: u32 = 150;

const SHELLS: [&str; 6] = [
    "lyman",
    "balmer",
    "paschen",
    "brackett",
    "pfund",
    "humphreys",
];

/// `nS1/2`, `n 3P2`, `nd`, `Balmer`.
fn series(text: &str) -> Result<SeriesName, CliError> {
    let lower = text.trim().to_lowercase();
    if let Some(place) = SHELLS.iter().position(|name| *name == lower) {
        return Ok(SeriesName::Shell {
            lower_n: place as u32 + 1,
        });
    }
    let wrong = || {
        CliError::Options(
            "--series takes n, the letter of l and J, such as nS1/2 or n3P2, or a name such as Balmer",
        )
    };
    let rest = lower.strip_prefix('n').ok_or_else(wrong)?.trim_start();
    let digits: String = rest.chars().take_while(char::is_ascii_digit).collect();
    let rest = &rest[digits.len()..];
    let letter = rest.chars().next().ok_or_else(wrong)?;
    let l = orbital_number(letter).ok_or_else(wrong)?;
    let rest = rest[letter.len_utf8()..].trim_start();
    let rest = rest.strip_prefix('o').unwrap_or(rest);
    let multiplicity = (!digits.is_empty())
        .then(|| digits.parse())
        .transpose()
        .map_err(|_| wrong())?;
    Ok(SeriesName::Orbital {
        l,
        multiplicity,
        j: momentum(rest).ok_or_else(wrong)?,
    })
}

/// J, or nothing; `None` for what is neither.
fn momentum(text: &str) -> Option<Option<HalfInteger>> {
    let text = text.trim();
    if text.is_empty() {
        return Some(None);
    }
    let twice = match text.split_once('/') {
        Some((numerator, "2")) => numerator.parse().ok()?,
        Some(_) => return None,
        None => text.parse::<u16>().ok()?.checked_mul(2)?,
    };
    Some(Some(HalfInteger::from_twice(twice)))
}

/// `5p 3/2`, `5P3/2`, `5p`.
fn lower(text: &str) -> Result<LowerName, CliError> {
    let wrong =
        || CliError::Options("--to takes n, the letter of l and J of a level, such as \"5p 3/2\"");
    let text = text.trim().to_lowercase();
    let digits: String = text.chars().take_while(char::is_ascii_digit).collect();
    let rest = &text[digits.len()..];
    let letter = rest.chars().next().ok_or_else(wrong)?;
    Ok(LowerName {
        n: digits.parse().map_err(|_| wrong())?,
        l: orbital_number(letter).ok_or_else(wrong)?,
        j: momentum(&rest[letter.len_utf8()..]).ok_or_else(wrong)?,
    })
}

/// 1 σ of levels for which the user states none, cm⁻¹.
const UNSTATED_PER_CM: f64 = 0.01;

/// Members of the series from a table, and what had to be assumed.
fn members(path: &Path) -> Result<(Vec<Member>, Option<String>), CliError> {
    let table = TableFile::read(path)?;
    let n = table.needed(&["n"])?;
    let energy = table.needed(&["energy_per_cm"])?;
    let uncertainty = table.column(&["uncertainty_per_cm"]);
    let mut members = Vec::with_capacity(table.len());
    for row in 0..table.len() {
        let number = table.positive(row, n)?;
        if number.fract() != 0.0 || number > f64::from(MOST_N) {
            return Err(table.bad(row, n, "is not a whole number up to 150").into());
        }
        let energy_per_cm = table.number(row, energy)?;
        if energy_per_cm < 0.0 {
            let problem = "lies below the ground level; give energies above it";
            return Err(table.bad(row, energy, problem).into());
        }
        members.push(Member {
            n: number as u32,
            energy_per_cm,
            uncertainty_per_cm: match uncertainty {
                Some(column) => table.positive(row, column)?,
                None => UNSTATED_PER_CM,
            },
        });
    }
    rising(&table, (n, energy), &members)?;
    let assumed = format!("levels known to {UNSTATED_PER_CM} cm⁻¹ (no column uncertainty_per_cm)");
    Ok((members, uncertainty.is_none().then_some(assumed)))
}

/// Each n once, and energies that rise with n.
fn rising(
    table: &TableFile,
    (n, energy): (ColumnIndex, ColumnIndex),
    members: &[Member],
) -> Result<(), CliError> {
    let mut order: Vec<usize> = (0..members.len()).collect();
    order.sort_by_key(|&row| members[row].n);
    for pair in order.windows(2) {
        let [low, high] = [&members[pair[0]], &members[pair[1]]];
        if low.n == high.n {
            return Err(table
                .bad(pair[1], n, "stands twice; give each n once")
                .into());
        }
        if high.energy_per_cm <= low.energy_per_cm {
            let problem = "does not lie above the level of the n before; energies of a series rise";
            return Err(table.bad(pair[1], energy, problem).into());
        }
    }
    Ok(())
}
