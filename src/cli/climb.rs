//! `climb`: step-wise excitation through given laser ranges.

use clap::Args;
use serde_json::{Map, Value, json};
use vocabulary::atom::{Species, SpeciesRequest};
use vocabulary::light::{Air, Medium, SpectralQuantity, Temperature};

use super::bench::{self, Load, Wanted};
use super::options::{CatalogueOptions, OutputOptions, medium};
use super::window::species;
use super::{CliError, Exit, Outcome};
use crate::advise::Spectrum;
use crate::advise::climb::{self, Answer, HIGHEST_N, Question, Target};
use crate::advise::tune::{Atom, Laser, LaserError};
use crate::catalogue::Catalogue;
use crate::show::{self, ClimbWish, Context};

/// Which routes of up to three laser steps lead to a level, a Rydberg series or the series limit
///
/// Each laser range drives one step at most; repeat a range to use it twice. Routes go through real
/// levels and are ranked by the strengths of their steps and by how near the middle of the ranges
/// they lie. Caution: laser class and exposure limits are those of the applicable laser safety
/// standard and of the site's laser safety officer; the program gives no clearance.
#[derive(Args, Debug)]
#[command(
    after_help = "Examples:\n  lineclear climb --of Rb --lasers 780+-1nm,479..481nm --to series:nS\n  \
    lineclear climb --of Rb --lasers 780+-1nm,776+-1nm --to \"5d 2D 5/2\"\n  \
    lineclear climb --of Cs --lasers 852+-1nm,500..515nm --to limit --among Rb"
)]
pub struct Arguments {
    /// The species, one: Rb (its neutral atom), "Ca II"
    #[arg(long, value_name = "SPECIES")]
    of: String,
    /// Laser ranges with their units, separated by commas
    #[arg(
        long,
        value_name = "RANGES",
        required = true,
        value_delimiter = ',',
        allow_hyphen_values = true
    )]
    lasers: Vec<String>,
    /// Where to: a level ("5d 2D 5/2", "5d", 25703.5cm-1), series:nS, series:60D, or limit
    #[arg(long, value_name = "TARGET", allow_hyphen_values = true)]
    to: String,
    /// Species in the same cell or beam: their lines close to a step are named
    #[arg(long, value_name = "SPECIES")]
    among: Vec<String>,
    /// Start from metastable levels too
    #[arg(long)]
    metastable: bool,
    /// Medium of wavelengths: auto is air from 200 nm to 2000 nm, vacuum elsewhere
    #[arg(long, value_parser = medium, default_value = "auto", value_name = "MEDIUM")]
    medium: Medium,
    /// Temperature of the atoms: populations and Doppler widths [default: 300K]
    #[arg(long, value_name = "TEMPERATURE", allow_hyphen_values = true)]
    gas_temperature: Option<String>,
    /// Show only the N best routes
    #[arg(long, value_name = "N", value_parser = clap::value_parser!(u32).range(1..), default_value_t = 20)]
    strongest: u32,
    #[command(flatten)]
    output: OutputOptions,
}

pub(super) fn run(arguments: Arguments, context: &CatalogueOptions) -> Result<Outcome, CliError> {
    let request: SpeciesRequest = arguments.of.parse()?;
    let among = species(&arguments.among)?;
    bench::refuse_actinides(&[request])?;
    let lasers = arguments
        .lasers
        .iter()
        .map(|text| bench::laser(text, arguments.medium))
        .collect::<Result<Vec<Laser>, _>>()?;
    let mut assumed = Vec::new();
    let temperature = arguments.gas_temperature.clone().unwrap_or_else(|| {
        assumed.push("gas temperature 300K".to_owned());
        "300K".to_owned()
    });
    let temperature: Temperature = temperature.parse()?;
    let catalogue = context.open()?;
    let spectrum = spectrum(&catalogue, request, &mut assumed)?;
    let question = Question {
        target: target(&catalogue, &spectrum, &arguments.to)?,
        typed_target: arguments.to.trim().to_owned(),
        temperature_k: temperature.kelvin(),
        metastable: arguments.metastable,
        lasers,
    };
    let others = others(&catalogue, spectrum.species, &among, &question.lasers)?;
    let answer = climb::answer(&question, &spectrum, &others)?;
    let mut elements = vec![request.atomic_number];
    elements.extend(among.iter().map(|r| r.atomic_number));
    bench::caution(context, &elements);
    let wish = ClimbWish {
        species: spectrum.species,
        medium: arguments.medium,
        ranges: arguments
            .lasers
            .iter()
            .map(|l| l.trim().to_owned())
            .collect(),
        most: arguments.strongest as usize,
    };
    let described = describe(&catalogue, &answer, &question, &wish, assumed)?;
    Ok(Outcome {
        sheet: show::climb(&answer, &question, described, &wish),
        format: arguments.output.format,
        exit: Exit::Answered,
    })
}

/// The one species that is meant: a bare element is its neutral atom.
fn spectrum(
    catalogue: &Catalogue,
    request: SpeciesRequest,
    assumed: &mut Vec<String>,
) -> Result<Spectrum, CliError> {
    let first = Species {
        atomic_number: request.atomic_number,
        stage: *request.stage_range().start(),
        isotope: request.isotope,
    };
    if request.single().is_none() {
        assumed.push(first.to_string());
    }
    let load = Load {
        from_per_cm: 0.0,
        to_per_cm: f64::INFINITY,
        lines_only: false,
    };
    let only = [SpeciesRequest {
        stages: vocabulary::atom::Stages::Range {
            first: first.stage,
            last: first.stage,
        },
        ..request
    }];
    let held = bench::atoms(
        catalogue,
        &Wanted {
            of: &only,
            among: &[],
        },
        load,
    )?;
    held.atoms
        .into_iter()
        .map(|a| a.spectrum)
        .find(|s| s.species == first && !s.levels.is_empty())
        .ok_or_else(|| {
            LaserError::NoLevels {
                species: first.to_string(),
            }
            .into()
        })
}

fn others(
    catalogue: &Catalogue,
    own: Species,
    among: &[SpeciesRequest],
    lasers: &[Laser],
) -> Result<Vec<Spectrum>, CliError> {
    if among.is_empty() {
        return Ok(Vec::new());
    }
    let low = lasers
        .iter()
        .map(|l| l.range.wavenumber_low_per_cm)
        .fold(f64::INFINITY, f64::min);
    let high = lasers
        .iter()
        .map(|l| l.range.wavenumber_high_per_cm)
        .fold(0.0, f64::max);
    let load = Load {
        from_per_cm: low - 1.0,
        to_per_cm: high + 1.0,
        lines_only: false,
    };
    let held = bench::atoms(
        catalogue,
        &Wanted {
            of: among,
            among: &[],
        },
        load,
    )?;
    if let Some(species) = held.not_held.into_iter().next() {
        return Err(LaserError::NoLevels { species }.into());
    }
    // Isotopes repeat the lines of their mixture, unless they were asked for by name.
    let wanted = |a: &Atom| a.listed && !a.replaces_mixture && a.spectrum.species != own;
    Ok(held
        .atoms
        .into_iter()
        .filter(wanted)
        .map(|a| a.spectrum)
        .collect())
}

fn target(catalogue: &Catalogue, spectrum: &Spectrum, typed: &str) -> Result<Target, CliError> {
    let typed = typed.trim();
    let species = spectrum.species;
    if typed.eq_ignore_ascii_case("limit") {
        let limit = vocabulary::atom::limit(species).ok_or(LaserError::NoLimit { species })?;
        return Ok(Target::Limit(limit.energy_per_cm));
    }
    if let Some(series) = typed.strip_prefix("series:") {
        return series_target(catalogue, spectrum.species, typed, series);
    }
    let named = climb::named_levels(&spectrum.levels, typed);
    if !named.is_empty() {
        return Ok(Target::Levels(named));
    }
    let energy = typed
        .parse::<SpectralQuantity>()
        .ok()
        .filter(|q| !q.unit_assumed)
        .and_then(|q| q.wavenumber_per_cm(Medium::Vacuum, Air::standard()).ok());
    if let Some(energy) = energy {
        let at = climb::levels_at(&spectrum.levels, energy);
        if !at.is_empty() {
            return Ok(Target::Levels(at));
        }
    }
    Err(LaserError::NoSuchLevel {
        species,
        target: typed.to_owned(),
        nearest: climb::nearest_levels(&spectrum.levels, typed, energy),
    }
    .into())
}

fn series_target(
    catalogue: &Catalogue,
    species: Species,
    typed: &str,
    series: &str,
) -> Result<Target, CliError> {
    let (l, n) = climb::read_series(series)
        .filter(|(_, n)| n.is_none_or(|n| n <= HIGHEST_N))
        .ok_or_else(|| LaserError::Unreadable {
            option: "--to",
            text: typed.to_owned(),
            advice: "is no series; write series:nS, series:nD or one member such as series:60S (n up to 100)",
        })?;
    let found = if species.is_one_electron() {
        climb::one_electron_series(species, l)
    } else {
        let (setting, held) = catalogue
            .outer_levels(species)?
            .ok_or(LaserError::NoLimit { species })?;
        climb::series_of(&setting, &held, l)
    };
    let found = found.map_err(|reason| LaserError::NoSeries {
        species,
        target: typed.to_owned(),
        reason: reason + &of_the_mixture(species),
    })?;
    Ok(Target::Series(found, n))
}

/// Where to look for series of a single isotope.
fn of_the_mixture(species: Species) -> String {
    if species.isotope.is_none() {
        return String::new();
    }
    let mixture = Species {
        isotope: None,
        ..species
    };
    format!("; of single isotopes few levels are held: ask for {mixture}")
}

fn describe(
    catalogue: &Catalogue,
    answer: &Answer,
    question: &Question,
    wish: &ClimbWish,
    assumed: Vec<String>,
) -> Result<Context, CliError> {
    let mut conditions = Map::new();
    conditions.insert("species".into(), json!(wish.species.to_string()));
    conditions.insert("to".into(), json!(question.typed_target));
    conditions.insert("gas_temperature_k".into(), json!(question.temperature_k));
    conditions.insert("metastable".into(), json!(question.metastable));
    let ranges: Vec<Value> = question
        .lasers
        .iter()
        .map(|l| json!([l.range.vacuum_low_nm, l.range.vacuum_high_nm]))
        .collect();
    conditions.insert("laser_ranges_vacuum_nm".into(), Value::Array(ranges));
    let mut context = Context {
        command: "climb",
        medium: wish.medium.to_string(),
        conditions,
        assumed,
        ..Context::default()
    };
    let used = |key: &str| {
        answer
            .routes
            .iter()
            .flat_map(|r| &r.steps)
            .any(|s| s.sources.iter().any(|k| &**k == key))
    };
    for (key, citation, licence) in catalogue.citations()? {
        if used(&key) {
            context.sources.insert(key, (citation, licence));
        }
    }
    Ok(context)
}
