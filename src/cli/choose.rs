//! `passband choose`: which filter isolates a line best.

use std::path::{Path, PathBuf};

use clap::Args;
use serde_json::json;
use vocabulary::light::{Medium, SpectralWidth};

use super::line::wanted;
use super::optics::{OpticsOptions, number, part};
use super::options::{
    CatalogueOptions, CheckedSource, OutputOptions, Required, SourceOptions, medium,
};
use super::passband::vacuum_range;
use super::table_file::TableFile;
use super::vet::with_target;
use super::window::species;
use super::{CliError, Exit, Outcome, assemble, describe};
use crate::advise::background::Background;
use crate::advise::choose::{self, Answer, Offered, Question};
use crate::advise::passband::Question as PassbandQuestion;
use crate::advise::{Wanted, placed};
use crate::calc::filter::{Filter, Shape, tilt_ratio};
use crate::show;

/// Which filter isolates a line best: free choice, or out of a list of available ones
///
/// Tries filters over centre, width and tilt and takes the one with the largest product of purity
/// and transmission, at its worst while the passband wanders. Reports the candidates that no other
/// beats in both.
#[derive(Args, Debug)]
#[command(
    after_help = "Examples:\n  lineclear passband choose --target \"He I 667.8nm\" --among C,O,Fe,Cu --te 3eV\n  \
    lineclear passband choose --target \"He I 667.8nm\" --among Fe --stock filters.csv\n\n\
    A stock file is a CSV with centre_nm, fwhm_nm and, if known, name, peak, cavities."
)]
pub struct Arguments {
    /// The line to isolate; repeat it to choose a filter for each of several lines
    #[arg(long, value_name = "LINE", required = true, allow_hyphen_values = true)]
    target: Vec<String>,
    /// Species that are there, separated by commas: Fe (all stages held), "Fe I", Fe+
    #[arg(long, value_name = "SPECIES", required = true)]
    among: Vec<String>,
    /// Available filters, a CSV of centre_nm, fwhm_nm, and optionally name, peak, cavities
    #[arg(long, value_name = "FILE", conflicts_with_all = ["narrowest", "widest"])]
    stock: Option<PathBuf>,
    /// Narrowest width to try [default: 0.3nm]
    #[arg(long, value_name = "WIDTH", allow_hyphen_values = true)]
    narrowest: Option<String>,
    /// Widest width to try [default: 10nm]
    #[arg(long, value_name = "WIDTH", allow_hyphen_values = true)]
    widest: Option<String>,
    /// Largest tilt to try, degrees [default: 10]
    #[arg(long, value_name = "ANGLE", allow_hyphen_values = true)]
    tilt_up_to: Option<String>,
    /// How far the passband may wander to either side (tolerance, warming) [default: 0.1nm]
    #[arg(long, value_name = "WIDTH", allow_hyphen_values = true)]
    wander: Option<String>,
    #[command(flatten)]
    optics: OpticsOptions,
    #[command(flatten)]
    source: SourceOptions,
    /// Medium of wavelengths: auto is air from 200 nm to 2000 nm, vacuum elsewhere
    #[arg(long, value_parser = medium, default_value = "auto", value_name = "MEDIUM")]
    medium: Medium,
    /// Exit with status 3 unless each target is at least this clear behind its best filter
    #[arg(long, value_enum, value_name = "VERDICT")]
    require: Option<Required>,
    #[command(flatten)]
    output: OutputOptions,
}

/// Steps of the free search: widths, tilts, centres.
const STEPS: (u32, u32, u32) = (20, 21, 24);
/// Centres are tried so many widths to either side of the line.
const OFF_CENTRE: f64 = 0.6;
/// Lines are counted so many widths of the widest filter away.
const REACH: f64 = 6.0;

pub(super) fn run(arguments: &Arguments, context: &CatalogueOptions) -> Result<Outcome, CliError> {
    let mut source = arguments.source.check()?;
    if !source.te_scan.is_empty() || !source.ne_scan.is_empty() {
        return Err(CliError::Options(
            "`passband choose` takes one temperature and one density, such as --te 3eV; `passband` \
             scans a range",
        ));
    }
    let shape = arguments.optics.form(&mut source.assumed)?;
    let mut at_rest = arguments.optics.beam(0.0, 0.0, &mut source.assumed);
    at_rest.tilt_deg = 0.0;
    let wander_nm = match &arguments.wander {
        Some(text) => match number("--wander", text, &["nm"], "0.1nm")? {
            nm if nm >= 0.0 => nm,
            _ => {
                return Err(CliError::Options(
                    "--wander is zero or above, such as 0.1nm",
                ));
            }
        },
        None => {
            source
                .assumed
                .push("wander of the passband 0.1 nm".to_owned());
            0.1
        }
    };
    let catalogue = context.open()?;
    let mut answers = Vec::new();
    for typed in &arguments.target {
        let wanted = wanted(typed, arguments.medium)?;
        let line_nm = placed(
            1e7 / wanted.vacuum_nm,
            0.0,
            Medium::Auto,
            vocabulary::light::Air::standard(),
        )
        .map_err(crate::advise::AdviseError::from)?
        .wavelength_nm;
        let candidates = arguments.candidates(line_nm, &shape)?;
        let reach_nm = reach(&candidates, line_nm);
        let requests = with_target(species(&arguments.among)?, &wanted);
        let range = vacuum_range(reach_nm)?;
        source.conditions.details.far_ultraviolet = wanted.vacuum_nm < 200.0;
        let mut held = assemble::spectra(&catalogue, &requests, &source.amounts, &range, 0.0)?;
        assemble::complete(&catalogue, &mut held.spectra, &source.conditions)?;
        let passband = PassbandQuestion {
            filter: arguments.some_filter(&candidates)?,
            light: at_rest,
            detector: arguments.optics.detector()?,
            medium: arguments.medium,
            conditions: source.conditions.clone(),
            target: Some(wanted.clone()),
            background: Background {
                reach_nm,
                ..Background::default()
            },
            scan_kt_per_cm: Vec::new(),
            scan_density_per_m3: Vec::new(),
            scan_tilt_deg: Vec::new(),
            not_held: held.not_held,
        };
        let question = Question {
            passband,
            candidates,
            wander_nm,
        };
        answers.push((wanted, choose::answer(&question, &held.spectra)?));
    }
    let exit = match arguments.require {
        Some(required) if !answers.iter().all(|(_, a)| meets(a, required)) => Exit::Unmet,
        _ => Exit::Answered,
    };
    let context = arguments.describe(&catalogue, &answers, &source, wander_nm)?;
    Ok(Outcome {
        sheet: show::chosen(&answers, context),
        format: arguments.output.format,
        exit,
    })
}

fn meets(answer: &Answer, required: Required) -> bool {
    let target = answer.best.as_ref().and_then(|(.., a)| a.target.as_ref());
    target.is_some_and(|t| required.allows(t.verdict.high))
}

/// Where lines count, nm.
fn reach(candidates: &[(f64, Vec<Offered>)], line_nm: f64) -> (f64, f64) {
    let filters = || candidates.iter().flat_map(|c| &c.1).map(|o| &o.filter);
    let far = REACH * filters().map(Filter::fwhm_nm).fold(0.0, f64::max);
    ((0.98 * line_nm - far).max(1.0), line_nm + far)
}

impl Arguments {
    fn some_filter(&self, candidates: &[(f64, Vec<Offered>)]) -> Result<Filter, CliError> {
        candidates
            .iter()
            .find_map(|(_, offered)| offered.first())
            .map(|o| o.filter.clone())
            .ok_or(CliError::Options(
                "no filter is left to choose from; add some to --stock",
            ))
    }

    fn candidates(
        &self,
        line_nm: f64,
        shape: &(Shape, f64),
    ) -> Result<Vec<(f64, Vec<Offered>)>, CliError> {
        let angle = |text: &String| number("--tilt-up-to", text, &["deg", "°"], "10 or 10deg");
        let highest = self
            .tilt_up_to
            .as_ref()
            .map(angle)
            .transpose()?
            .unwrap_or(10.0);
        let tilts = if highest > 0.0 { STEPS.1 } else { 1 };
        let stock = self
            .stock
            .as_deref()
            .map(|p| self.stock(p, shape))
            .transpose()?;
        (0..tilts)
            .map(|step| {
                let tilt = highest * f64::from(step) / f64::from(STEPS.1 - 1);
                let offered = match &stock {
                    Some(stock) => stock.clone(),
                    None => self.free(line_nm, tilt, shape)?,
                };
                Ok((tilt, offered))
            })
            .collect()
    }

    /// Filters of every width around the line, as seen at this tilt.
    fn free(
        &self,
        line_nm: f64,
        tilt_deg: f64,
        (shape, peak): &(Shape, f64),
    ) -> Result<Vec<Offered>, CliError> {
        let bound = |text: &Option<String>, default: f64| match text {
            Some(text) => Ok(text.parse::<SpectralWidth>()?.at_nm(line_nm)),
            None => Ok::<f64, CliError>(default),
        };
        let narrowest = bound(&self.narrowest, 0.3)?;
        let widest = bound(&self.widest, 10.0)?;
        if narrowest > widest {
            return Err(CliError::Options("--narrowest is wider than --widest"));
        }
        let index = self
            .optics
            .complete(Filter::new(shape.clone(), line_nm, narrowest, *peak)?, 0.0)?;
        let head_on_nm = line_nm / tilt_ratio(tilt_deg, index.effective_index())?;
        let mut out = Vec::new();
        for w in 0..STEPS.0 {
            let part = f64::from(w) / f64::from(STEPS.0 - 1);
            let fwhm_nm = narrowest * (widest / narrowest).powf(part);
            for c in 0..STEPS.2 {
                let offset = OFF_CENTRE * (2.0 * f64::from(c) / f64::from(STEPS.2 - 1) - 1.0);
                let centre_nm = head_on_nm + offset * fwhm_nm;
                let filter = Filter::new(shape.clone(), centre_nm, fwhm_nm, *peak)?;
                let filter = self.optics.complete(filter, 0.0)?;
                out.push(Offered { name: None, filter });
            }
        }
        Ok(out)
    }

    /// The filters of a list.
    fn stock(&self, path: &Path, (shape, peak): &(Shape, f64)) -> Result<Vec<Offered>, CliError> {
        let table = TableFile::read(path)?;
        let centre = table.needed(&["centre_nm", "center_nm"])?;
        let fwhm = table.needed(&["fwhm_nm"])?;
        let (name, peaks, cavities) = (
            table.column(&["name"]),
            table.column(&["peak", "peak_transmission"]),
            table.column(&["cavities"]),
        );
        let mut out = Vec::with_capacity(table.len());
        for row in 0..table.len() {
            let filled =
                |column: &super::table_file::ColumnIndex| !table.text(row, *column).is_empty();
            let peak = match peaks.filter(filled) {
                Some(column) => part("peak", table.text(row, column))
                    .map_err(|_| table.bad(row, column, "is no part between 0 and 1 (100%)"))?,
                None => *peak,
            };
            let shape = match cavities.filter(filled) {
                Some(column) => match table.text(row, column).parse::<u8>() {
                    Ok(n) => Shape::Cavities(n),
                    Err(_) => {
                        return Err(table
                            .bad(row, column, "is no whole number of cavities")
                            .into());
                    }
                },
                None => shape.clone(),
            };
            let (centre_nm, fwhm_nm) = (table.positive(row, centre)?, table.positive(row, fwhm)?);
            let filter = Filter::new(shape, centre_nm, fwhm_nm, peak)
                .map_err(|cause| table.bad(row, centre, &format!("makes no filter: {cause}")))?;
            let filter = self.optics.complete(filter, 0.0)?;
            let name = name
                .map(|c| table.text(row, c).to_owned())
                .filter(|n| !n.is_empty());
            out.push(Offered { name, filter });
        }
        Ok(out)
    }

    fn describe(
        &self,
        catalogue: &crate::catalogue::Catalogue,
        answers: &[(Wanted, Answer)],
        source: &CheckedSource,
        wander_nm: f64,
    ) -> Result<show::Context, CliError> {
        let mut context = show::Context {
            command: "passband choose",
            medium: self.medium.to_string(),
            conditions: describe::conditions(
                &source.conditions,
                source.te,
                source.gas,
                &source.amounts,
            ),
            assumed: source.assumed.clone(),
            ..show::Context::default()
        };
        let lines = answers
            .iter()
            .filter_map(|(_, a)| a.best.as_ref())
            .flat_map(|(.., a)| &a.lines)
            .filter(|l| l.is_target || l.light_fraction.is_some_and(|f| f >= show::WORTH_A_ROW));
        describe::cite(&mut context, catalogue, lines.map(|l| &l.line))?;
        context
            .conditions
            .insert("wander_nm".into(), json!(wander_nm));
        Ok(context)
    }
}
