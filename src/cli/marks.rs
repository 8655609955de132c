//! `marks`: lines of a lamp to calibrate an instrument on, and the calibration.

use std::path::{Path, PathBuf};

use clap::Args;
use serde_json::json;
use vocabulary::light::{Air, Medium, SpectralRange, SpectralWidth, TypedRange};
use vocabulary::spectrum::Line;

use super::options::{CatalogueOptions, Checked, ConditionOptions, OutputOptions, medium};
use super::table_file::TableFile;
use super::{CliError, Exit, Outcome, assemble, window};
use crate::advise::marks::{self, Answer, Dispersion, Entry, Pairing, Question};
use crate::advise::window::REACH_WIDTHS;
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
    let typed: TypedRange = arguments.span.parse()?;
    let range = typed.resolve(arguments.medium, Air::standard())?;
    let mut checked = arguments.conditions.check(&range)?;
    if range.unit_assumed {
        checked.assumed.push("nm, as the span has no unit".into());
    }
    if !(arguments.weakest >= 0.0 && arguments.weakest < 1.0) {
        return Err(CliError::Options(
            "--weakest takes a part of one, such as 0.01",
        ));
    }
    let pixels = arguments.pixels.as_deref().map(ends).transpose()?;
    let width_nm = checked.width.at_nm(range.centre_vacuum_nm());
    let entries = arguments
        .fit
        .as_deref()
        .map(|path| read(path, arguments.medium))
        .transpose()?;
    let catalogue = context.open()?;
    let margin_nm = REACH_WIDTHS * checked.width.at_nm(range.vacuum_high_nm);
    let mut held = assemble::spectra(&catalogue, &requests, &checked.amounts, &range, margin_nm)?;
    assemble::complete(&catalogue, &mut held.spectra, &checked.conditions)?;
    let question = Question {
        position_bound_nm: position_bound(arguments, &range, width_nm, &mut checked)?,
        range,
        medium: arguments.medium,
        width: checked.width,
        conditions: checked.conditions.clone(),
        weakest: arguments.weakest,
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
    let lines = || answer.marks().flat_map(|m| &m.surveyed.lines);
    let mut context = context("marks", question.medium, &question.range, checked);
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
    cite(catalogue, lines, &mut context)?;
    Ok(context)
}

/// Conditions and assumptions of an answer over a range.
pub(super) fn context(
    command: &'static str,
    medium: Medium,
    range: &SpectralRange,
    checked: &Checked,
) -> Context {
    let mut context = Context {
        command,
        medium: medium.to_string(),
        assumed: checked.assumed.clone(),
        ..Context::default()
    };
    let model = format!("{:?}", checked.conditions.model).to_lowercase();
    let mut put = |key: &str, value| context.conditions.insert(key.to_owned(), value);
    put("model", json!(model));
    put("electron_temperature_ev", json!(checked.te.ev()));
    put(
        "electron_density_per_m3",
        json!(checked.conditions.electron_density_per_m3),
    );
    put("gas_temperature_k", json!(checked.gas.kelvin()));
    put(
        "fwhm_nm",
        json!(checked.width.at_nm(range.centre_vacuum_nm())),
    );
    put(
        "range_vacuum_nm",
        json!([range.vacuum_low_nm, range.vacuum_high_nm]),
    );
    put(
        "air",
        json!("Ciddor 1996, 15 °C, 101325 Pa, dry, 450 ppm CO2"),
    );
    context
}

/// Adds the sources of lines.
pub(super) fn cite<'l, I: Iterator<Item = &'l Line>>(
    catalogue: &Catalogue,
    lines: impl Fn() -> I,
    context: &mut Context,
) -> Result<(), CliError> {
    let mut used = std::collections::HashSet::new();
    for line in lines() {
        used.insert(line.position_source.clone());
        used.extend(line.rate_source.clone());
    }
    for (key, citation, licence) in catalogue.citations()? {
        if used.contains(key.as_str()) {
            context.sources.insert(key, (citation, licence));
        }
    }
    Ok(())
}
