//! Options that several commands share, and the checked values they become.

use std::path::PathBuf;

use clap::Args;
use etcetera::{BaseStrategy, choose_base_strategy};
use vocabulary::atom::{Species, SpeciesRequest};
use vocabulary::light::{Medium, SpectralRange, SpectralWidth, Temperature};

use super::progress::Bar;
pub use super::source::{CheckedSource, SourceOptions};
use super::{CliError, instrument};
use crate::advise::{Conditions, InstrumentForm, Verdict};
use crate::catalogue::{Catalogue, Opened};
use crate::show::Format;

/// Where the catalogue is, and how much is said.
#[derive(Args, Debug)]
pub struct CatalogueOptions {
    /// Catalogue file [default: catalogue.sqlite in the user's data folder]
    #[arg(long, global = true, value_name = "FILE")]
    catalogue: Option<PathBuf>,
    /// Say nothing on standard error but errors
    #[arg(long, short, global = true)]
    quiet: bool,
}

impl CatalogueOptions {
    /// Opens the catalogue, building it on the first run.
    pub fn open(&self) -> Result<Catalogue, CliError> {
        let path = match &self.catalogue {
            Some(path) => path.clone(),
            None => default_path()?,
        };
        let bar = Bar::new(self.quiet, "building the catalogue");
        let (catalogue, opened) =
            Catalogue::open_or_build(&path, &mut |done, total| bar.show(done, total))?;
        bar.finish();
        match opened {
            Opened::Built => self.say(&format!("catalogue built: {}", path.display())),
            Opened::Refreshed => self.say("catalogue brought up to this version's tables"),
            Opened::InMemory(why) => self.say(&format!("working from memory: {why}")),
            Opened::Held => {}
        }
        Ok(catalogue)
    }

    /// Whether to keep quiet.
    pub fn quiet(&self) -> bool {
        self.quiet
    }

    /// A word on standard error.
    pub fn say(&self, words: &str) {
        if !self.quiet {
            eprintln!("{words}");
        }
    }
}

fn default_path() -> Result<PathBuf, CliError> {
    let strategy = choose_base_strategy().map_err(|_| CliError::NoDataFolder)?;
    Ok(strategy
        .data_dir()
        .join("lineclear")
        .join("catalogue.sqlite"))
}

/// How the answer is written.
#[derive(Args, Debug)]
pub struct OutputOptions {
    /// Form of the answer
    #[arg(long = "as", value_enum, default_value_t = Format::Table, value_name = "FORM")]
    pub format: Format,
}

/// The light source and the instrument.
#[derive(Args, Debug)]
pub struct ConditionOptions {
    #[command(flatten)]
    source: SourceOptions,
    /// Form of the instrument's response: gaussian, triangular (equal slits), rectangular (a wide
    /// slit), or a CSV of offset_nm and response, which brings its width [default: gaussian]
    #[arg(long, value_name = "FORM")]
    instrument: Option<String>,
    /// Full width at half maximum of the instrument [default: 0.1nm]
    #[arg(
        long,
        value_name = "WIDTH",
        conflicts_with = "resolving",
        allow_hyphen_values = true
    )]
    fwhm: Option<String>,
    /// Resolving power of the instrument, instead of --fwhm
    #[arg(long, value_name = "NUMBER", allow_hyphen_values = true)]
    resolving: Option<f64>,
}

/// Checked conditions, and what nobody gave.
#[derive(Clone, Debug)]
pub struct Checked {
    /// The light source.
    pub conditions: Conditions,
    /// Electron temperature, as it will be shown.
    pub te: Temperature,
    /// Gas temperature, as it will be shown.
    pub gas: Temperature,
    /// Instrument width.
    pub width: SpectralWidth,
    /// Amounts given.
    pub amounts: Vec<(SpeciesRequest, f64)>,
    /// What was assumed, one phrase each.
    pub assumed: Vec<String>,
    /// Temperatures to scan, where a range was given.
    pub te_scan: Vec<Temperature>,
    /// Electron densities to scan, m⁻³, where a range was given.
    pub ne_scan: Vec<f64>,
}

impl ConditionOptions {
    /// Resolves what was typed; `range` is where a resolving power becomes a width. Ranges to be
    /// scanned are refused.
    pub fn check(&self, range: &SpectralRange) -> Result<Checked, CliError> {
        let checked = self.check_scans(range)?;
        let problem = if !checked.te_scan.is_empty() {
            "--te takes one temperature here, such as 1eV; `vet` and `passband` scan a range"
        } else if !checked.ne_scan.is_empty() {
            "--ne takes one density here, such as 1e20m-3; `vet` and `passband` scan a range"
        } else {
            return Ok(checked);
        };
        Err(CliError::Options(problem))
    }

    /// As [`ConditionOptions::check`], ranges to be scanned included.
    pub fn check_scans(&self, range: &SpectralRange) -> Result<Checked, CliError> {
        let mut source = self.source.check()?;
        source.look_at(range.centre_vacuum_nm());
        let form = instrument::form(self.instrument.as_deref())?;
        source.conditions.details.instrument = form;
        let curve = match &source.conditions.details.instrument {
            InstrumentForm::Measured(curve) => Some(curve.fwhm_nm()),
            _ => None,
        };
        let width = match (self.resolving, &self.fwhm, curve) {
            (None, None, Some(fwhm_nm)) => SpectralWidth::from_nm(fwhm_nm),
            (_, _, Some(_)) => {
                return Err(CliError::Options(
                    "a measured --instrument brings its own width; leave --fwhm and --resolving out",
                ));
            }
            (Some(power), ..) => resolving(power, range)?,
            (None, Some(width), _) => width.parse()?,
            (None, None, None) => {
                let last = source.assumed.last().is_some_and(|a| a == "equal amounts");
                let at = source.assumed.len() - usize::from(last);
                let assumed = "instrument width (FWHM) 0.1nm".to_owned();
                source.assumed.insert(at, assumed);
                SpectralWidth::from_nm(0.1)
            }
        };
        Ok(Checked {
            conditions: source.conditions,
            te: source.te,
            gas: source.gas,
            width,
            amounts: source.amounts,
            assumed: source.assumed,
            te_scan: source.te_scan,
            ne_scan: source.ne_scan,
        })
    }
}

fn resolving(power: f64, range: &SpectralRange) -> Result<SpectralWidth, CliError> {
    if power.is_finite() && power >= 1.0 {
        Ok(SpectralWidth::from_nm(range.centre_vacuum_nm() / power))
    } else {
        Err(CliError::Options(
            "--resolving takes a number from 1 upwards, such as 20000",
        ))
    }
}

/// The amount of a species: of the most exact entry that matches it, else 1.
pub fn amount_of(species: Species, amounts: &[(SpeciesRequest, f64)]) -> f64 {
    let matching = || {
        amounts
            .iter()
            .filter(|(request, _)| request.matches(species))
    };
    matching()
        .find(|(request, _)| request.single().is_some())
        .or_else(|| matching().next())
        .map_or(1.0, |(_, amount)| *amount)
}

/// The least clear verdict that `--require` accepts.
#[derive(clap::ValueEnum, Clone, Copy, Debug, PartialEq, Eq)]
pub enum Required {
    Clear,
    Tinged,
    Blended,
}

impl Required {
    /// Whether a verdict is good enough; `unrated` never is.
    pub fn allows(self, worst: Verdict) -> bool {
        let bound = match self {
            Self::Clear => Verdict::Clear,
            Self::Tinged => Verdict::Tinged,
            Self::Blended => Verdict::Blended,
        };
        worst <= bound
    }
}

/// Reads a column density, m⁻²: `1e16m-2`, `1e12cm-2`.
pub fn column_density(text: &str) -> Result<f64, CliError> {
    let typed = text.trim();
    let bad = || {
        CliError::Usage(format!(
            "`{typed}`: a column density is a number above zero with its unit, such as 1e16m-2 or \
             1e12cm-2"
        ))
    };
    let units = [
        ("cm-2", 1e4),
        ("cm⁻²", 1e4),
        ("/cm2", 1e4),
        ("m-2", 1.0),
        ("m⁻²", 1.0),
        ("/m2", 1.0),
    ];
    let (number, size) = units
        .iter()
        .find_map(|(unit, size)| Some((typed.strip_suffix(unit)?, size)))
        .ok_or_else(bad)?;
    let value: f64 = number.trim().parse().map_err(|_| bad())?;
    let per_m2 = value * size;
    if per_m2.is_finite() && per_m2 > 0.0 {
        Ok(per_m2)
    } else {
        Err(bad())
    }
}

/// Reads `--medium`.
pub fn medium(text: &str) -> Result<Medium, String> {
    text.parse()
        .map_err(|e: vocabulary::light::QuantityError| e.to_string())
}
