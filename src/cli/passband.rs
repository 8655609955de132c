//! `passband`: what a filter lets through, and which filter isolates a line best.

use std::path::PathBuf;

use clap::{Args, Subcommand};
use serde_json::{Map, Value, json};
use vocabulary::light::{Medium, SpectralRange, Temperature};

use super::choose;
use super::line::wanted;
use super::optics::{OpticsOptions, curve, kelvin, number, part, wavelength, width};
use super::options::{
    CatalogueOptions, CheckedSource, OutputOptions, Required, SourceOptions, medium,
};
use super::vet::with_target;
use super::window::species;
use super::{CliError, Exit, Outcome, assemble, describe};
use crate::advise::background::{Background, Scale};
use crate::advise::passband::{self, Question};
use crate::advise::{AdviseError, EmissionModel, REACH_WIDTHS, Wanted};
use crate::calc::filter::{Filter, Illumination, Shape};
use crate::catalogue::Catalogue;
use crate::show;

/// What a given filter lets through, how pure a line is behind it; `choose` finds the best filter
///
/// Lists the lines behind a filter with their transmission and their part of the light, the purity
/// of the target with a verdict, how purity changes with temperature and tilt, and how far the
/// passband may drift. Wavelengths of filters are those of their makers: in air, at normal
/// incidence.
#[derive(Args, Debug)]
#[command(
    args_conflicts_with_subcommands = true,
    subcommand_negates_reqs = true,
    after_help = "Examples:\n  lineclear passband --centre 667.8nm --fwhm 1nm --among He,C,O,Fe,Cu --target \"He I 667.8nm\"\n  \
    lineclear passband --curve filter.csv --among He,Fe --te 0.5..5eV:20 --tilt 4\n  \
    lineclear passband --centre 668nm --fwhm 3nm --among He --hot 2500K --emissivity 0.4\n      \
    --target-radiance 1\n  \
    lineclear passband choose --target \"He I 667.8nm\" --among C,O,Fe,Cu\n\n\
    Hot cathodes, lamps and discharges bring heat, high voltage and ultraviolet light: follow the\n\
    safety rules of the site."
)]
pub struct Arguments {
    #[command(subcommand)]
    choose: Option<Choose>,
    /// Centre of the passband at normal incidence: 668nm
    #[arg(
        long,
        value_name = "WAVELENGTH",
        required_unless_present = "curve",
        requires = "fwhm",
        conflicts_with = "curve"
    )]
    centre: Option<String>,
    /// Full width of the passband at half of its peak
    #[arg(
        long,
        value_name = "WIDTH",
        requires = "centre",
        allow_hyphen_values = true
    )]
    fwhm: Option<String>,
    /// Measured transmission, a CSV of wavelength_nm and transmission (0 to 1) or
    /// transmission_percent
    #[arg(long, value_name = "FILE", conflicts_with_all = ["shape", "cavities", "peak"])]
    curve: Option<PathBuf>,
    /// Species that are there, separated by commas: Fe (all stages held), "Fe I", Fe+
    #[arg(long, value_name = "SPECIES", required = true)]
    among: Vec<String>,
    /// The line that the filter is for [default: the one with the most light behind it]
    #[arg(long, value_name = "LINE", allow_hyphen_values = true)]
    target: Option<String>,
    /// Angle between beam and the filter's normal, degrees [default: 0]
    #[arg(long, value_name = "ANGLE", allow_hyphen_values = true)]
    tilt: Option<String>,
    /// How much warmer the filter is than where it was specified: 10K
    #[arg(long, value_name = "KELVIN", allow_hyphen_values = true)]
    warming: Option<String>,
    /// Shift of the centre with temperature, nm/K [default: 0.02 where --warming is given]
    #[arg(long, value_name = "NUMBER", allow_hyphen_values = true)]
    coefficient: Option<String>,
    #[command(flatten)]
    optics: OpticsOptions,
    #[command(flatten)]
    source: SourceOptions,
    /// Temperature of a hot surface in view; needs --target-radiance, or --density with --path
    #[arg(long, value_name = "TEMPERATURE", allow_hyphen_values = true)]
    hot: Option<String>,
    /// Emissivity of the hot surface [default: 1]
    #[arg(
        long,
        value_name = "PART",
        requires = "hot",
        allow_hyphen_values = true
    )]
    emissivity: Option<String>,
    /// Count the free-free continuum of the plasma; needs --ne and --path
    #[arg(long, requires = "path")]
    free_free: bool,
    /// Length of the plasma along the line of sight, in metres: 0.1m
    #[arg(long, value_name = "LENGTH", allow_hyphen_values = true)]
    path: Option<String>,
    /// Radiance of the target before the filter, W per m² and sr: sets the scale for a background
    #[arg(
        long,
        value_name = "NUMBER",
        conflicts_with = "density",
        allow_hyphen_values = true
    )]
    target_radiance: Option<f64>,
    /// Density that the amount 1 stands for, 1e19m-3: sets the scale (not with model visible)
    #[arg(
        long,
        value_name = "DENSITY",
        requires = "path",
        allow_hyphen_values = true
    )]
    density: Option<String>,
    /// Medium of wavelengths: auto is air from 200 nm to 2000 nm, vacuum elsewhere
    #[arg(long, value_parser = medium, default_value = "auto", value_name = "MEDIUM")]
    medium: Medium,
    /// Exit with status 3 unless the target is at least this clear
    #[arg(long, value_enum, value_name = "VERDICT")]
    require: Option<Required>,
    #[command(flatten)]
    output: OutputOptions,
}

#[derive(Debug, Subcommand)]
enum Choose {
    Choose(Box<choose::Arguments>),
}

/// Tilts that are scanned where nobody tilts further, degrees.
const TILTS_TO: u32 = 10;
/// Temperatures of the scan where none are given: as many, from te/4 to 4 te.
const TEMPERATURES: i32 = 9;

pub(super) fn run(arguments: Arguments, context: &CatalogueOptions) -> Result<Outcome, CliError> {
    if let Some(Choose::Choose(arguments)) = arguments.choose {
        return choose::run(&arguments, context);
    }
    let mut source = arguments.source.check()?;
    let filter = arguments.filter(&mut source.assumed)?;
    let light = arguments.light(&mut source.assumed)?;
    let target = arguments
        .target
        .as_deref()
        .map(|text| wanted(text, arguments.medium))
        .transpose()?;
    let mut requests = species(&arguments.among)?;
    if let Some(wanted) = &target {
        requests = with_target(requests, wanted);
    }
    let reach_nm = arguments.reach_nm(&filter)?;
    if let Some(wanted) = &target {
        refuse_outside(wanted, &filter, reach_nm)?;
    }
    let catalogue = context.open()?;
    let range = vacuum_range(reach_nm)?;
    source.look_at(filter.centre_nm());
    let mut held = assemble::spectra(&catalogue, &requests, &source.amounts, &range, 0.0)?;
    assemble::complete(&catalogue, &mut held.spectra, &source.conditions)?;
    let question = Question {
        background: arguments.background(&source, reach_nm)?,
        detector: arguments.optics.detector()?,
        medium: arguments.medium,
        conditions: source.conditions.clone(),
        target,
        scan_kt_per_cm: scanned(&source).map(kt_per_cm).collect(),
        scan_density_per_m3: source.ne_scan.clone(),
        scan_tilt_deg: tilts(light.tilt_deg),
        not_held: held.not_held,
        filter,
        light,
    };
    let answer = passband::answer(&question, &held.spectra)?;
    let verdict = answer.target.as_ref().map(|t| t.verdict.high);
    let exit = match arguments.require {
        Some(required) if !verdict.is_some_and(|v| required.allows(v)) => Exit::Unmet,
        _ => Exit::Answered,
    };
    let context = arguments.describe(&catalogue, &answer, &question, &source)?;
    Ok(Outcome {
        sheet: show::passband(&answer, &question, context),
        format: arguments.output.format,
        exit,
    })
}

/// A target that the filter cannot even leak.
fn refuse_outside(wanted: &Wanted, filter: &Filter, reach_nm: (f64, f64)) -> Result<(), CliError> {
    let (low, high) = reach_nm;
    if (low..=high).contains(&wanted.vacuum_nm) {
        return Ok(());
    }
    Err(CliError::Advise(AdviseError::OutsidePassband {
        wanted: wanted.typed.clone(),
        line_nm: wanted.vacuum_nm,
        centre_nm: filter.centre_nm(),
        fwhm_nm: filter.fwhm_nm(),
    }))
}

/// Temperatures of the scan.
fn scanned(source: &CheckedSource) -> impl Iterator<Item = Temperature> + '_ {
    let around = move || {
        let step = |k: i32| 2_f64.powf(f64::from(k) / 2.0);
        let half = (TEMPERATURES - 1) / 2;
        (-half..=half).filter_map(move |k| Temperature::from_ev(source.te.ev() * step(k)))
    };
    let default = source.te_scan.is_empty().then(around).into_iter().flatten();
    source.te_scan.iter().copied().chain(default)
}

pub(super) fn kt_per_cm(te: Temperature) -> f64 {
    te.kelvin() * vocabulary::light::constants::PER_CM_PER_KELVIN
}

fn tilts(tilt_deg: f64) -> Vec<f64> {
    let to = f64::from(TILTS_TO).max(tilt_deg.ceil());
    (0..=TILTS_TO)
        .map(|step| to * f64::from(step) / f64::from(TILTS_TO))
        .collect()
}

/// The range of vacuum wavelengths around one that a filter maker gives, nm.
pub(super) fn vacuum_range((low, high): (f64, f64)) -> Result<SpectralRange, CliError> {
    // Air shifts wavelengths by 3e-4 of themselves.
    let (low, high) = (low * (1.0 - 5e-4), high * (1.0 + 5e-4));
    SpectralRange::from_wavenumbers_per_cm(1e7 / high, 1e7 / low.max(1.0)).ok_or(CliError::Options(
        "the passband reaches beyond all that can be reckoned with",
    ))
}

impl Arguments {
    fn filter(&self, assumed: &mut Vec<String>) -> Result<Filter, CliError> {
        let drift = self.drift_nm_per_k(assumed)?;
        let filter = match (&self.curve, &self.centre, &self.fwhm) {
            (Some(path), ..) => Filter::measured(curve(path, false)?),
            (None, Some(centre), Some(fwhm)) => {
                let centre_nm = wavelength(centre)?;
                let (shape, peak) = self.optics.form(assumed)?;
                Filter::new(shape, centre_nm, width(fwhm, centre_nm)?, peak)?
            }
            _ => {
                return Err(CliError::Options(
                    "a filter needs --centre and --fwhm, or --curve with a file",
                ));
            }
        };
        self.optics.complete(filter, drift)
    }

    fn drift_nm_per_k(&self, assumed: &mut Vec<String>) -> Result<f64, CliError> {
        match (&self.coefficient, &self.warming) {
            (Some(text), _) => number("--coefficient", text, &["nm/K"], "0.02nm/K"),
            (None, Some(_)) => {
                assumed.push("temperature coefficient 0.02 nm/K".to_owned());
                Ok(0.02)
            }
            (None, None) => Ok(0.0),
        }
    }

    fn light(&self, assumed: &mut Vec<String>) -> Result<Illumination, CliError> {
        let angle = |text: &String| number("--tilt", text, &["deg", "°"], "5 or 5deg");
        let tilt_deg = self.tilt.as_ref().map(angle).transpose()?.unwrap_or(0.0);
        let warmer = |text: &String| number("--warming", text, &["K"], "10K");
        let warming_k = self
            .warming
            .as_ref()
            .map(warmer)
            .transpose()?
            .unwrap_or(0.0);
        Ok(self.optics.beam(tilt_deg, warming_k, assumed))
    }

    /// Where the filter may transmit: to the limits of its blocking or its curve, else to
    /// [`REACH_WIDTHS`] widths, and as far to the blue as tilting takes it.
    fn reach_nm(&self, filter: &Filter) -> Result<(f64, f64), CliError> {
        if let Some(limits) = self.optics.blocked_nm()? {
            return Ok(limits);
        }
        let far = REACH_WIDTHS * filter.fwhm_nm();
        let centre = filter.centre_nm();
        Ok(((0.98 * centre - far).max(1.0), centre + far))
    }

    fn background(
        &self,
        source: &CheckedSource,
        reach_nm: (f64, f64),
    ) -> Result<Background, CliError> {
        let path = |text: &String| number("--path", text, &["m"], "0.1m");
        let path_m = self.path.as_ref().map(path).transpose()?;
        if path_m.is_some_and(|p| p <= 0.0) || self.target_radiance.is_some_and(|r| r <= 0.0) {
            return Err(CliError::Options(
                "--path and --target-radiance take numbers above zero",
            ));
        }
        if self.free_free && source.conditions.electron_density_per_m3.is_none() {
            return Err(CliError::Options(
                "--free-free needs the electron density: add --ne 1e20m-3, or ne to the file of the mix",
            ));
        }
        let scale = match (&self.density, self.target_radiance) {
            (Some(_), _) if source.conditions.model == EmissionModel::Visible => {
                return Err(CliError::Options(
                    "--density sets no scale for --model visible, where lines are as bright as \
                     they are seen; give --target-radiance or another model",
                ));
            }
            (Some(text), _) => Some(Scale::Density(
                text.parse::<vocabulary::light::NumberDensity>()?.per_m3(),
            )),
            (None, Some(radiance)) => Some(Scale::TargetRadiance(radiance)),
            (None, None) => None,
        };
        if scale.is_none() && (self.hot.is_some() || self.free_free) {
            return Err(CliError::Options(
                "a background needs to know how bright the lines are; give --target-radiance, or \
                 --density with --path",
            ));
        }
        let emissivity = self.emissivity.as_deref().map(|e| part("--emissivity", e));
        let emissivity = emissivity.transpose()?.unwrap_or(1.0);
        let hot = self.hot.as_deref().map(kelvin).transpose()?;
        Ok(Background {
            hot: hot.map(|k| (k, emissivity)),
            free_free: self.free_free,
            path_m,
            scale,
            reach_nm,
        })
    }

    fn describe(
        &self,
        catalogue: &Catalogue,
        answer: &passband::Answer,
        question: &Question,
        source: &CheckedSource,
    ) -> Result<show::Context, CliError> {
        let mut context = show::Context {
            command: "passband",
            medium: question.medium.to_string(),
            conditions: describe::conditions(
                &source.conditions,
                source.te,
                source.gas,
                &source.amounts,
            ),
            assumed: source.assumed.clone(),
            ..show::Context::default()
        };
        let shown = answer
            .lines
            .iter()
            .filter(|l| l.is_target || l.light_fraction.is_some_and(|f| f >= show::WORTH_A_ROW));
        describe::cite(&mut context, catalogue, shown.map(|l| &l.line))?;
        let background = question.background;
        let mut put = |key: &str, value| context.conditions.insert(key.to_owned(), value);
        put("hot_temperature_k", json!(background.hot.map(|h| h.0)));
        put("emissivity", json!(background.hot.map(|h| h.1)));
        put("free_free", json!(background.free_free));
        put("path_m", json!(background.path_m));
        put("target_radiance_w_per_m2_sr", json!(self.target_radiance));
        put(
            "detector_threshold_nm",
            json!(question.detector.threshold_nm()),
        );
        put("filter", Value::Object(self.filter_object(question)));
        Ok(context)
    }

    fn filter_object(&self, question: &Question) -> Map<String, Value> {
        let filter = &question.filter;
        let mut object = Map::new();
        let mut put = |key: &str, value: Value| object.insert(key.to_owned(), value);
        put("centre_nm", json!(filter.centre_nm()));
        put("fwhm_nm", json!(filter.fwhm_nm()));
        put("peak_transmission", json!(filter.peak()));
        let (shape, cavities) = shape_words(filter.shape());
        put("shape", json!(shape));
        put("cavities", json!(cavities));
        put("blocking_od", json!(self.optics.blocking_od()));
        put("effective_index", json!(filter.effective_index()));
        put("tilt_deg", json!(question.light.tilt_deg));
        put("f_number", json!(question.light.f_number));
        put("warming_k", json!(question.light.warming_k));
        object
    }
}

/// The form of a passband in a word, and its cavities.
fn shape_words(shape: &Shape) -> (&'static str, Option<u8>) {
    match shape {
        Shape::Cavities(n) => ("cavities", Some(*n)),
        Shape::Gaussian => ("gaussian", None),
        Shape::Rectangular => ("rectangular", None),
        Shape::Measured(_) => ("measured", None),
    }
}
