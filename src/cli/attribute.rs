//! `attribute`: which species explain a measured list of peaks.

use std::path::PathBuf;

use clap::Args;
use serde_json::json;
use vocabulary::atom::{SpeciesRequest, Stages};
use vocabulary::light::constants::PER_CM_PER_EV;
use vocabulary::light::{Air, Medium, PositionMedium, SpectralRange, SpectralWidth};
use vocabulary::spectrum::Line;

use super::options::{CatalogueOptions, Checked, ConditionOptions, OutputOptions, medium};
use super::table_file::{ColumnIndex, TableFile};
use super::{CliError, Exit, Outcome, assemble, survey, window};
use crate::advise::Conditions;
use crate::advise::attribute::{self, Answer, Peak, Question};
use crate::catalogue::Catalogue;
use crate::show;

/// Which species made these peaks, with a false-discovery rate
///
/// Each peak gets its candidates with a probability from the position (uncertainties of peak and
/// catalogue, a fitted common shift and stretch of the scale), the strength that a species should
/// show there, and the intensity where given. Each species gets its evidence: strong lines matched,
/// strong lines missing. The same list, shifted by many line widths, tells what chance would do.
/// Peaks without a candidate, blends and lines in second order are marked. A spectrum (a column
/// `counts` or `signal`) may be given instead: its peaks are found first.
#[derive(Args, Debug)]
#[command(after_help = "Examples:\n  lineclear attribute peaks.csv\n  \
    lineclear attribute peaks.csv --among H,He,Ar,C,O,Fe,Cu,W --fwhm 0.05nm\n  \
    lineclear attribute spectrum.csv --fwhm 0.15nm --as csv\n\n\
    The file has a column of positions with its unit in the name (`position_nm`, `wavelength_A`,\n\
    `wavenumber_per_cm` …), and if known `uncertainty_nm` (1 σ, the same unit) and `intensity`.")]
pub struct Arguments {
    /// Peaks, or a spectrum, as CSV
    #[arg(value_name = "PEAKS.csv")]
    file: PathBuf,
    /// Species that may be there [default: every element held]
    #[arg(long, value_name = "SPECIES")]
    among: Vec<String>,
    /// Medium of wavelengths: auto is air from 200 nm to 2000 nm, vacuum elsewhere
    #[arg(long, value_parser = medium, default_value = "auto", value_name = "MEDIUM")]
    medium: Medium,
    #[command(flatten)]
    conditions: ConditionOptions,
    /// 1 σ of positions where the file has none [default: a tenth of the instrument width]
    #[arg(long, value_name = "WIDTH", allow_hyphen_values = true)]
    uncertainty: Option<String>,
    /// Largest common shift of the scale, and largest stretch at its ends [default: half of the
    /// instrument width]
    #[arg(long, value_name = "WIDTH", allow_hyphen_values = true)]
    shift: Option<String>,
    #[command(flatten)]
    output: OutputOptions,
}

/// Species expected in a list of unknown origin.
const SPECIES_EXPECTED: f64 = 8.0;
/// Temperatures tried where none is given, eV.
const TEMPERATURES_EV: [f64; 6] = [0.3, 0.6, 1.0, 2.0, 4.0, 8.0];
/// Column names of a spectrum's values.
const SIGNAL: [&str; 3] = ["counts", "signal", "flux"];

pub(super) fn run(arguments: &Arguments, context: &CatalogueOptions) -> Result<Outcome, CliError> {
    let requests = window::species(&arguments.among)?;
    let anywhere =
        SpectralRange::from_wavenumbers_per_cm(1e4, 5e4).ok_or(CliError::Options("no range"))?;
    let table = TableFile::read(&arguments.file)?;
    let centre = centre(&table, arguments.medium)?.unwrap_or(anywhere);
    let mut checked = arguments.conditions.check(&centre)?;
    let peaks = match table.column(&SIGNAL) {
        Some(signal) => found_peaks(&table, signal, arguments, &mut checked)?,
        None => listed_peaks(&table, arguments, &mut checked)?,
    };
    let range = span(&peaks).ok_or(CliError::NoPeak {
        path: arguments.file.clone(),
    })?;
    let catalogue = context.open()?;
    let requests = if requests.is_empty() {
        everything(&catalogue)?
    } else {
        requests
    };
    let margin_nm = 10.0 * checked.width.at_nm(range.vacuum_high_nm);
    let mut held = assemble::spectra(&catalogue, &requests, &checked.amounts, &range, margin_nm)?;
    if !arguments.among.is_empty() {
        name_isotopes(&mut held.spectra, &requests);
    }
    let first_order = 1e7
        / peaks
            .iter()
            .map(|p| p.vacuum_nm)
            .fold(f64::INFINITY, f64::min);
    let near = |s: &crate::advise::Spectrum| {
        s.lines
            .iter()
            .any(|l| l.wavenumber_per_cm <= first_order * 1.001)
    };
    if !held.spectra.iter().any(near) {
        return Err(CliError::NothingHeldThere {
            path: arguments.file.clone(),
            from_nm: 1e7 / first_order,
            to_nm: range.vacuum_high_nm,
        });
    }
    let question = question(arguments, &mut checked, &range)?;
    let answer = attribute::answer(&question, &peaks, &held.spectra)?;
    let asked = show::Asked {
        named: !arguments.among.is_empty(),
        not_held: held.not_held,
    };
    let described = describe(&catalogue, &answer, &question, &checked, &range)?;
    Ok(Outcome {
        sheet: show::attribute(&answer, &question, &asked, described),
        format: arguments.output.format,
        exit: Exit::Answered,
    })
}

/// An isotope that was asked for is as likely as a stage that was.
fn name_isotopes(spectra: &mut [crate::advise::Spectrum], requests: &[SpeciesRequest]) {
    for spectrum in spectra.iter_mut().filter(|s| s.species.isotope.is_some()) {
        let isotope = spectrum.species.isotope;
        let asked = |r: &SpeciesRequest| r.isotope == isotope && r.matches(spectrum.species);
        spectrum.named |= requests.iter().any(asked);
    }
}

/// All elements and isotopes held, each with all stages.
fn everything(catalogue: &Catalogue) -> Result<Vec<SpeciesRequest>, CliError> {
    let mut out: Vec<SpeciesRequest> = Vec::new();
    for species in catalogue.species()? {
        let request = SpeciesRequest {
            atomic_number: species.atomic_number,
            isotope: species.isotope,
            stages: Stages::All,
        };
        if !out.contains(&request) {
            out.push(request);
        }
    }
    Ok(out)
}

/// The span of a table's positions, where a resolving power becomes a width.
fn centre(table: &TableFile, medium: Medium) -> Result<Option<SpectralRange>, CliError> {
    let position = table.position_column()?;
    let (mut low, mut high) = (f64::INFINITY, 0.0_f64);
    for row in 0..table.len() {
        let wavenumber = table.wavenumber_per_cm(row, position, medium)?;
        (low, high) = (low.min(wavenumber), high.max(wavenumber));
    }
    Ok(SpectralRange::from_wavenumbers_per_cm(
        low * 0.999,
        high * 1.001,
    ))
}

fn question(
    arguments: &Arguments,
    checked: &mut Checked,
    range: &SpectralRange,
) -> Result<Question, CliError> {
    let width_nm = checked.width.at_nm(range.centre_vacuum_nm());
    let shift_bound_nm = match &arguments.shift {
        Some(text) => text
            .parse::<SpectralWidth>()?
            .at_nm(range.centre_vacuum_nm()),
        None => {
            checked
                .assumed
                .push("scale shifted by half the instrument width at most".into());
            width_nm / 2.0
        }
    };
    let given = |a: &String| a.starts_with("electron temperature");
    let grid = match checked.assumed.iter().position(given) {
        None => vec![checked.conditions.clone()],
        Some(index) => {
            checked.assumed[index] =
                "temperature of each species: the best of 0.3, 0.6, 1, 2, 4, 8 eV".into();
            let at = |ev: &f64| Conditions {
                kt_per_cm: ev * PER_CM_PER_EV,
                ..checked.conditions.clone()
            };
            TEMPERATURES_EV.iter().map(at).collect()
        }
    };
    Ok(Question {
        medium: arguments.medium,
        width: checked.width,
        grid,
        shift_bound_nm,
        species_expected: SPECIES_EXPECTED,
    })
}

fn listed_peaks(
    table: &TableFile,
    arguments: &Arguments,
    checked: &mut Checked,
) -> Result<Vec<Peak>, CliError> {
    let position = table.position_column()?;
    let uncertainty = table.position_uncertainty(position)?;
    let intensity = table.column(&["intensity"]);
    table.refuse_twice(position.column)?;
    let assumed: Option<SpectralWidth> = arguments
        .uncertainty
        .as_deref()
        .map(str::parse)
        .transpose()?;
    if uncertainty.is_none() && assumed.is_none() {
        checked
            .assumed
            .push("positions known to a tenth of the instrument width".into());
    }
    let mut peaks = Vec::with_capacity(table.len());
    for row in 0..table.len() {
        let vacuum_nm = 1e7 / table.wavenumber_per_cm(row, position, arguments.medium)?;
        let sigma_nm = match (uncertainty, assumed) {
            (Some(column), _) => table.uncertainty_nm(row, column, position.unit, vacuum_nm)?,
            (None, Some(width)) => width.at_nm(vacuum_nm),
            (None, None) => checked.width.at_nm(vacuum_nm) / 10.0,
        };
        let intensity = intensity.map(|c| table.positive(row, c)).transpose()?;
        peaks.push(peak(vacuum_nm, sigma_nm, intensity, arguments.medium));
    }
    Ok(peaks)
}

fn peak(vacuum_nm: f64, sigma_nm: f64, intensity: Option<f64>, medium: Medium) -> Peak {
    // A grating sorts wavelengths of the medium it stands in.
    let air = Air::standard();
    let second_order_vacuum_nm = match medium.of_vacuum_nm(vacuum_nm) {
        PositionMedium::Vacuum => Some(vacuum_nm / 2.0),
        PositionMedium::Air => air
            .to_air_nm(vacuum_nm)
            .and_then(|seen| air.to_vacuum_nm(seen.nm / 2.0))
            .ok()
            .map(|line| line.nm),
    };
    Peak {
        vacuum_nm,
        second_order_vacuum_nm,
        sigma_nm,
        intensity,
    }
}

/// Peaks of a spectrum; a width in wavelength becomes that of vacuum.
fn found_peaks(
    table: &TableFile,
    signal: ColumnIndex,
    arguments: &Arguments,
    checked: &mut Checked,
) -> Result<Vec<Peak>, CliError> {
    let position = table.position_column()?;
    let mut samples = Vec::with_capacity(table.len());
    for row in 0..table.len() {
        let vacuum_nm = 1e7 / table.wavenumber_per_cm(row, position, arguments.medium)?;
        samples.push((vacuum_nm, table.number(row, signal)?));
    }
    table.refuse_twice(position.column)?;
    samples.sort_by(|a, b| a.0.total_cmp(&b.0));
    let middle = samples[samples.len() / 2].0;
    let fwhm_nm = checked.width.at_nm(middle);
    checked.assumed.push(format!(
        "peaks found in {} samples, {} σ above the noise of the filtered spectrum",
        samples.len(),
        attribute::spectrum::THRESHOLD_SIGMA
    ));
    // No scale is better than a hundredth of the width.
    let floor_nm = fwhm_nm / 100.0;
    Ok(attribute::spectrum::peaks(&samples, fwhm_nm)
        .into_iter()
        .map(|found| {
            let sigma_nm = found.sigma.hypot(floor_nm);
            peak(
                found.position,
                sigma_nm,
                Some(found.height),
                arguments.medium,
            )
        })
        .collect())
}

/// From half of the shortest (second order) to the longest peak.
fn span(peaks: &[Peak]) -> Option<SpectralRange> {
    let low = peaks
        .iter()
        .map(|p| p.vacuum_nm)
        .fold(f64::INFINITY, f64::min);
    let high = peaks.iter().map(|p| p.vacuum_nm).fold(0.0, f64::max);
    SpectralRange::from_wavenumbers_per_cm(1e7 / (1.0001 * high), 1e7 / (0.4999 * low))
}

fn describe(
    catalogue: &Catalogue,
    answer: &Answer,
    question: &Question,
    checked: &Checked,
    range: &SpectralRange,
) -> Result<show::Context, CliError> {
    let mut context = survey::context("attribute", question.medium, range, checked);
    let temperatures: Vec<f64> = question
        .grid
        .iter()
        .map(|c| c.kt_per_cm / PER_CM_PER_EV)
        .collect();
    context
        .conditions
        .insert("electron_temperature_ev".into(), json!(temperatures));
    context
        .conditions
        .insert("shift_bound_nm".into(), json!(question.shift_bound_nm));
    context
        .conditions
        .insert("prior".into(), json!(answer.prior));
    let lines: Vec<&Line> = answer
        .peaks
        .iter()
        .filter_map(|p| p.attributed())
        .map(|c| &c.line)
        .collect();
    survey::cite(catalogue, &lines, &mut context)?;
    Ok(context)
}
