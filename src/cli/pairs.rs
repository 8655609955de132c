//! `pairs`: line pairs that tell the excitation temperature, and the plot of measured lines.

use std::path::{Path, PathBuf};

use clap::Args;
use serde_json::json;
use vocabulary::atom::{Species, SpeciesRequest};
use vocabulary::light::constants::PER_CM_PER_EV;
use vocabulary::light::{Air, Medium, SpectralRange, SpectralWidth};
use vocabulary::spectrum::Line;

use super::options::{CatalogueOptions, ConditionOptions, OutputOptions, medium};
use super::table_file::{ColumnIndex, PositionColumn, TableFile};
use super::{CliError, Exit, Outcome, survey, window};
use crate::advise::EmissionModel;
use crate::advise::pairs::{self, Plot, Point, Question};
use crate::advise::placed;
use crate::catalogue::Catalogue;
use crate::show::{self, Context};

/// Which lines of a species tell its excitation temperature, or what measured ones tell
///
/// Lists pairs of lines of one stage that are clear in the mix, of different upper energy and with
/// known rates, the best first, with the relative error of the temperature to be expected at
/// --te; and a set of lines for a plot. With --measured, intensities of lines give the temperature
/// by a Boltzmann plot, with its uncertainty, χ² and outliers, and with two stages the electron
/// density by the Saha equation. All lines optically thin, populations of LTE.
#[derive(Args, Debug)]
#[command(
    after_help = "Examples:\n  lineclear pairs \"Cu I\" --span 450..600nm --te 0.6eV\n  \
    lineclear pairs \"Ar I\" --span 400..850nm --within 20nm --among H,He --strongest 10\n  \
    lineclear pairs --measured lines.csv\n\n\
    The file of --measured has the columns `species`, `wavelength_nm` (or another unit in the name),\n\
    `intensity`, and where known `relative_uncertainty`, `response`, `weighted_rate_per_s` (g A) and\n\
    `upper_energy_ev`; what is not given comes from the catalogue."
)]
pub struct Arguments {
    /// One stage: "Fe I"
    #[arg(
        value_name = "SPECIES",
        required_unless_present = "measured",
        conflicts_with = "measured"
    )]
    species: Option<String>,
    /// Range in which lines may lie, with its unit
    #[arg(
        long,
        value_name = "RANGE",
        required_unless_present = "measured",
        allow_hyphen_values = true
    )]
    span: Option<String>,
    /// Other species in the source, that lines must be clear of
    #[arg(long, value_name = "SPECIES")]
    among: Vec<String>,
    /// Largest distance of the two lines
    #[arg(long, value_name = "WIDTH", allow_hyphen_values = true)]
    within: Option<String>,
    /// Relative 1 σ of a measured intensity
    #[arg(
        long,
        value_name = "FRACTION",
        default_value_t = 0.05,
        allow_hyphen_values = true
    )]
    intensity_error: f64,
    /// Weakest line, as a part of the strongest of the species in the range
    #[arg(
        long,
        value_name = "FRACTION",
        default_value_t = 0.01,
        allow_hyphen_values = true
    )]
    weakest: f64,
    /// Medium of wavelengths: auto is air from 200 nm to 2000 nm, vacuum elsewhere
    #[arg(long, value_parser = medium, default_value = "auto", value_name = "MEDIUM")]
    medium: Medium,
    #[command(flatten)]
    conditions: ConditionOptions,
    /// Show only the N best pairs
    #[arg(long, value_name = "N", default_value_t = 20, value_parser = clap::value_parser!(u32).range(1..))]
    strongest: u32,
    /// Measured intensities, for a Boltzmann plot
    #[arg(long, value_name = "FILE.csv")]
    measured: Option<PathBuf>,
    /// Intensities count photons, not energy
    #[arg(long, requires = "measured")]
    photons: bool,
    #[command(flatten)]
    output: OutputOptions,
}

pub(super) fn run(arguments: &Arguments, context: &CatalogueOptions) -> Result<Outcome, CliError> {
    let fraction = |v: f64| v > 0.0 && v < 1.0;
    if !fraction(arguments.intensity_error) {
        return Err(CliError::Options(
            "--intensity-error takes a part of one, such as 0.05",
        ));
    }
    match (&arguments.measured, &arguments.species, &arguments.span) {
        (Some(path), _, _) => measured(arguments, path, context),
        (None, Some(species), Some(span)) => find(arguments, species, span, context),
        _ => Err(CliError::Options(
            "give SPECIES and --span, or --measured FILE.csv",
        )),
    }
}

fn find(
    arguments: &Arguments,
    species: &str,
    span: &str,
    context: &CatalogueOptions,
) -> Result<Outcome, CliError> {
    let request: SpeciesRequest = species.parse()?;
    let species = request.single().ok_or(CliError::Options(
        "pairs are made inside one stage: name it, such as \"Fe I\"",
    ))?;
    let (range, checked) = survey::span(span, arguments.medium, &arguments.conditions)?;
    if matches!(
        checked.conditions.model,
        EmissionModel::Coronal | EmissionModel::Given
    ) {
        return Err(CliError::Options(
            "a temperature from line pairs rests on LTE; use --model visible or lte",
        ));
    }
    let weakest = survey::weakest(arguments.weakest)?;
    let within: Option<SpectralWidth> = arguments.within.as_deref().map(str::parse).transpose()?;
    let mut requests = vec![request];
    requests.extend(window::species(&arguments.among)?);
    let catalogue = context.open()?;
    let held = survey::held(&catalogue, &requests, &checked, &range)?;
    let question = Question {
        species,
        medium: arguments.medium,
        width: checked.width,
        conditions: checked.conditions.clone(),
        within_nm: within.map(|w| w.at_nm(range.centre_vacuum_nm())),
        intensity_error: arguments.intensity_error,
        weakest,
        not_held: held.not_held,
        range,
    };
    let answer = pairs::answer(&question, &held.spectra)?;
    let mut described = survey::context("pairs", arguments.medium, &question.range, &checked);
    described
        .conditions
        .insert("intensity_error".into(), json!(question.intensity_error));
    described
        .conditions
        .insert("within_nm".into(), json!(question.within_nm));
    described
        .conditions
        .insert("weakest".into(), json!(question.weakest));
    let lines: Vec<&Line> = answer
        .usable
        .iter()
        .flat_map(|u| &u.surveyed.lines)
        .collect();
    survey::cite(&catalogue, &lines, &mut described)?;
    let count = arguments.strongest as usize;
    Ok(Outcome {
        sheet: show::pairs(&answer, &question, count, described),
        format: arguments.output.format,
        exit: Exit::Answered,
    })
}

/// A measured line as it was read, and what the plot makes of it.
struct Reader<'t> {
    table: &'t TableFile,
    catalogue: &'t Catalogue,
    position: PositionColumn,
    species: ColumnIndex,
    intensity: ColumnIndex,
    uncertainty: Option<ColumnIndex>,
    response: Option<ColumnIndex>,
    weighted_rate: Option<ColumnIndex>,
    energy: Option<ColumnIndex>,
    default_error: f64,
    photons: bool,
    medium: Medium,
    width: SpectralWidth,
}

fn measured(
    arguments: &Arguments,
    path: &Path,
    context: &CatalogueOptions,
) -> Result<Outcome, CliError> {
    let table = TableFile::read(path)?;
    let position = table.position_column()?;
    let whole =
        SpectralRange::from_wavenumbers_per_cm(1e4, 5e4).ok_or(CliError::Options("no range"))?;
    let checked = arguments.conditions.check(&whole)?;
    let catalogue = context.open()?;
    let reader = Reader {
        species: table.needed(&["species"])?,
        intensity: table.needed(&["intensity"])?,
        uncertainty: table.column(&["relative_uncertainty"]),
        response: table.column(&["response"]),
        weighted_rate: table.column(&["weighted_rate_per_s"]),
        energy: table.column(&["upper_energy_ev"]),
        table: &table,
        catalogue: &catalogue,
        position,
        default_error: arguments.intensity_error,
        photons: arguments.photons,
        medium: arguments.medium,
        width: checked.width,
    };
    let mut rows = Vec::with_capacity(table.len());
    for row in 0..table.len() {
        rows.push(reader.row(row)?);
    }
    let points: Vec<Point> = rows.iter().map(|r| r.point).collect();
    let limit_ev = |s: Species| vocabulary::atom::limit(s).map(|l| l.energy_per_cm / PER_CM_PER_EV);
    let plot: Plot = pairs::plot(&points, limit_ev)?;
    let mut described = Context {
        command: "pairs",
        medium: arguments.medium.to_string(),
        ..Context::default()
    };
    let counted = if arguments.photons {
        "photons"
    } else {
        "energy"
    };
    described
        .conditions
        .insert("intensity_counts".into(), json!(counted));
    described
        .conditions
        .insert("intensity_error".into(), json!(arguments.intensity_error));
    described.conditions.insert(
        "response_corrected".into(),
        json!(reader.response.is_some()),
    );
    if !arguments.photons {
        described
            .assumed
            .push("intensities are energy, not photons (--photons)".into());
    }
    if reader.uncertainty.is_none() {
        let error = 100.0 * arguments.intensity_error;
        described
            .assumed
            .push(format!("intensities known to {error} %"));
    }
    if reader.response.is_none() {
        described
            .assumed
            .push("intensities are corrected for the response already".into());
    }
    let lines: Vec<&Line> = rows.iter().filter_map(|r| r.line.as_ref()).collect();
    survey::cite(&catalogue, &lines, &mut described)?;
    Ok(Outcome {
        sheet: show::plot(&plot, &rows, described),
        format: arguments.output.format,
        exit: Exit::Answered,
    })
}

impl Reader<'_> {
    fn row(&self, row: usize) -> Result<show::Measured, CliError> {
        let request: SpeciesRequest = self.table.text(row, self.species).parse()?;
        let species = request.single().ok_or_else(|| {
            self.table
                .bad(row, self.species, "is not one stage; write it as `Fe I`")
        })?;
        let wavenumber = self
            .table
            .wavenumber_per_cm(row, self.position, self.medium)?;
        let vacuum_nm = 1e7 / wavenumber;
        let mut intensity = self.table.positive(row, self.intensity)?;
        if let Some(response) = self.response {
            intensity /= self.table.positive(row, response)?;
        }
        let error = match self.uncertainty {
            Some(column) => self.table.positive(row, column)?,
            None => self.default_error,
        };
        let given = |column: Option<ColumnIndex>| -> Result<Option<f64>, CliError> {
            match column {
                Some(c) if !self.table.text(row, c).is_empty() => {
                    Ok(Some(self.table.positive(row, c)?))
                }
                _ => Ok(None),
            }
        };
        let (rate, energy) = (given(self.weighted_rate)?, given(self.energy)?);
        let line = match (rate, energy) {
            (Some(_), Some(_)) => None,
            _ => Some(self.line(row, species, vacuum_nm)?),
        };
        let upper = line.as_ref().and_then(|l| l.upper.as_ref());
        let held_rate = line
            .as_ref()
            .and_then(|l| Some(l.rate_per_s? * l.upper.as_ref()?.g?));
        let missing = |what| {
            self.table.bad(
                row,
                self.position.column,
                &format!("is a line of which no {what} is held; add it in a column of its own"),
            )
        };
        let weighted_rate = rate.or(held_rate).ok_or_else(|| missing("rate"))?;
        let upper_energy_ev = energy
            .or(upper.map(|u| u.energy_per_cm / PER_CM_PER_EV))
            .ok_or_else(|| missing("upper level"))?;
        let rate_sigma = match (rate, &line) {
            (None, Some(line)) => line
                .rate_relative_uncertainty
                .unwrap_or(crate::advise::pairs::UNSTATED_RATE_SIGMA),
            _ => 0.0,
        };
        let energy_factor = if self.photons { 1.0 } else { vacuum_nm };
        let at = placed(wavenumber, 0.0, self.medium, Air::standard())?;
        Ok(show::Measured {
            wavelength_nm: at.wavelength_nm,
            medium: at.medium,
            point: Point {
                species,
                log_population: (intensity * energy_factor / weighted_rate).ln(),
                sigma: error.hypot(rate_sigma),
                upper_energy_ev,
            },
            vacuum_nm,
            intensity,
            weighted_rate_per_s: weighted_rate,
            line,
        })
    }

    /// The rated line of the species nearest to a place, within an instrument width.
    fn line(&self, row: usize, species: Species, vacuum_nm: f64) -> Result<Line, CliError> {
        let levels = self.catalogue.levels(species)?;
        let reach = self.width.at_per_cm(vacuum_nm);
        let at = 1e7 / vacuum_nm;
        let near = self
            .catalogue
            .lines(species, &levels, at - reach, at + reach)?;
        let distance = |l: &Line| (l.wavenumber_per_cm - at).abs();
        near.into_iter()
            .filter(|l| l.rate_per_s.is_some() && l.upper.is_some())
            .min_by(|a, b| distance(a).total_cmp(&distance(b)))
            .ok_or_else(|| {
                let problem = format!(
                    "is no rated line of {species} within {} (--fwhm); give `weighted_rate_per_s` \
                     and `upper_energy_ev` in the table",
                    self.width
                );
                CliError::from(self.table.bad(row, self.position.column, &problem))
            })
    }
}
