//! `marks`: lines of a lamp to calibrate an instrument on, and the calibration.

use std::path::{Path, PathBuf};

use clap::Args;
use serde_json::json;
use vocabulary::light::{Medium, SpectralRange, SpectralWidth};
use vocabulary::spectrum::Line;

use super::options::{CatalogueOptions, Checked, ConditionOptions, OutputOptions, medium};
use super::table_file::TableFile;
use super::{CliError, Exit, Outcome, survey, window};
use crate::advise::marks::{self, Answer, Dispersion, Entry, Pairing, Question};
use crate::catalogue::Catalogue;
use crate::show::{self, Context};

/// Which lines of a lamp an instrument may be calibrated on
///
/// Lists features of the lamp that are clear of other species and of the lamp's own lines at the
/// instrument width, whose position is known well enough and that are strong enough. The span is
/// cut into parts of equal width and the strongest mark of each part is chosen, so that marks
/// spread over the span. With --fit, measured pixels with their wavelengths give a polynomial
/// dispersion: wrong entries are rejected and named, and the error at the ends is given.
#[derive(Args, Debug)]
#[command(
    after_help = "Examples:\n  lineclear marks --lamp Ne --span 580..725nm --fwhm 0.2nm\n  \
    lineclear marks --lamp Hg,Ar --span 400..800nm --as csv\n  \
    lineclear marks --lamp Ne --span 575..730nm --fwhm 0.2nm --fit pixels.csv --order 2\n\n\
    Caution: lamps can emit ultraviolet light and hold mercury at high voltage; the applicable \
    safety standards and the site's safety officer decide how they are used."
)]
pub struct Arguments {
    /// Species of the lamp, separated by commas
    #[arg(long, value_name = "SPECIES", required = true)]
    lamp: Vec<String>,
    /// Range to be calibrated, with its unit
    #[arg(long, value_name = "RANGE", allow_hyphen_values = true)]
    span: String,
    /// Medium of wavelengths: auto is air from 200 nm to 2000 nm, vacuum elsewhere
    #[arg(long, value_parser = medium, default_value = "auto", value_name = "MEDIUM")]
    medium: Medium,
    #[command(flatten)]
    conditions: ConditionOptions,
    /// Largest 1 σ of the position of a mark [default: a twentieth of the instrument width]
    #[arg(long, value_name = "WIDTH", allow_hyphen_values = true)]
    position_bound: Option<String>,
    /// Weakest mark, as a part of the strongest feature of its species in the span
    #[arg(
        long,
        value_name = "FRACTION",
        default_value_t = 0.01,
        allow_hyphen_values = true
    )]
    weakest: f64,
    /// Parts that the span is cut into; 0 keeps every mark
    #[arg(long, value_name = "N", default_value_t = 24)]
    parts: usize,
    /// Measured entries, columns `pixel` and `wavelength_nm` (or another unit in the name)
    #[arg(long, value_name = "PEAKS.csv")]
    fit: Option<PathBuf>,
    /// Order of the polynomial of the dispersion
    #[arg(long, value_name = "N", default_value_t = 2, value_parser = clap::value_parser!(u8).range(1..=7))]
    order: u8,
    /// First and last pixel, for the error at the ends: 0..2047 [default: the outermost entries]
    #[arg(
        long,
        value_name = "PIXELS",
        requires = "fit",
        allow_hyphen_values = true
    )]
    pixels: Option<String>,
    #[command(flatten)]
    output: OutputOptions,
}

pub(super) fn run(arguments: &Arguments, context: &CatalogueOptions) -> Result<Outcome, CliError> {
    let requests = window::species(&arguments.lamp)?;
    let (range, mut checked) =
        survey::span(&arguments.span, arguments.medium, &arguments.conditions)?;
    let weakest = survey::weakest(arguments.weakest)?;
    let pixels = arguments.pixels.as_deref().map(ends).transpose()?;
    let width_nm = checked.width.at_nm(range.centre_vacuum_nm());
    let entries = arguments
        .fit
        .as_deref()
        .map(|path| read(path, arguments.medium))
        .transpose()?;
    let catalogue = context.open()?;
    let held = survey::held(&catalogue, &requests, &checked, &range)?;
    let question = Question {
        position_bound_nm: position_bound(arguments, &range, width_nm, &mut checked)?,
        range,
        medium: arguments.medium,
        width: checked.width,
        conditions: checked.conditions.clone(),
        weakest,
        parts: (arguments.parts > 0).then_some(arguments.parts),
        not_held: held.not_held,
    };
    let answer = marks::answer(&question, &held.spectra)?;
    let fitted = entries
        .map(|entries| fit(&entries, &answer, width_nm, arguments.order, pixels))
        .transpose()?;
    let described = describe(&catalogue, &answer, &question, &checked)?;
    let sheet = show::marks(&answer, fitted.as_ref(), &question, described);
    Ok(Outcome {
        sheet,
        format: arguments.output.format,
        exit: Exit::Answered,
    })
}

fn position_bound(
    arguments: &Arguments,
    range: &SpectralRange,
    width_nm: f64,
    checked: &mut Checked,
) -> Result<f64, CliError> {
    match &arguments.position_bound {
        Some(text) => {
            let bound: SpectralWidth = text.parse()?;
            Ok(bound.at_nm(range.centre_vacuum_nm()))
        }
        None => {
            let bound_nm = width_nm / 20.0;
            checked
                .assumed
                .push(format!("positions known to {bound_nm:.2e} nm"));
            Ok(bound_nm)
        }
    }
}

/// Measured wavelengths of entries lie within this many instrument widths of their mark.
const ENTRY_REACH_WIDTHS: f64 = 2.0;

fn fit(
    entries: &[Entry],
    answer: &Answer,
    width_nm: f64,
    order: u8,
    ends: Option<(f64, f64)>,
) -> Result<Dispersion, CliError> {
    let pairing = Pairing::new(entries, answer, ENTRY_REACH_WIDTHS * width_nm);
    Ok(marks::fit(&pairing, answer, usize::from(order), ends)?)
}

fn ends(text: &str) -> Result<(f64, f64), CliError> {
    let bad = || CliError::Options("--pixels takes two different numbers, such as 0..2047");
    let (low, high) = text.split_once("..").ok_or_else(bad)?;
    let number = |t: &str| {
        t.trim()
            .parse::<f64>()
            .ok()
            .filter(|v| v.is_finite())
            .ok_or_else(bad)
    };
    let (low, high) = (number(low)?, number(high)?);
    if low < high {
        Ok((low, high))
    } else {
        Err(bad())
    }
}

fn read(path: &Path, medium: Medium) -> Result<Vec<Entry>, CliError> {
    let table = TableFile::read(path)?;
    let pixel = table.needed(&["pixel", "pixels"])?;
    let position = table.position_column()?;
    table.refuse_twice(pixel)?;
    let mut entries = Vec::with_capacity(table.len());
    for row in 0..table.len() {
        entries.push(Entry {
            pixel: table.number(row, pixel)?,
            vacuum_nm: 1e7 / table.wavenumber_per_cm(row, position, medium)?,
        });
    }
    Ok(entries)
}

fn describe(
    catalogue: &Catalogue,
    answer: &Answer,
    question: &Question,
    checked: &Checked,
) -> Result<Context, CliError> {
    let lines: Vec<&Line> = answer.marks().flat_map(|m| &m.surveyed.lines).collect();
    let mut context = survey::context("marks", question.medium, &question.range, checked);
    context.conditions.insert(
        "position_bound_nm".into(),
        json!(question.position_bound_nm),
    );
    context
        .conditions
        .insert("weakest".into(), json!(question.weakest));
    context
        .conditions
        .insert("parts".into(), json!(question.parts));
    survey::cite(catalogue, &lines, &mut context)?;
    Ok(context)
}
