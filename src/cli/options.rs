//! Options that several commands share, and the checked values they become.

use std::path::PathBuf;

use clap::Args;
use etcetera::{BaseStrategy, choose_base_strategy};
use vocabulary::atom::{Species, SpeciesRequest};
use vocabulary::light::{Medium, NumberDensity, SpectralRange, SpectralWidth, Temperature};

use super::CliError;
use super::progress::Bar;
use crate::advise::{Conditions, EmissionModel, Verdict};
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

/// The light source.
#[derive(Args, Debug)]
pub struct SourceOptions {
    /// How the light of species compares: `visible` takes each species as seen, `lte` takes real
    /// amounts at one temperature
    #[arg(long, value_enum, default_value_t = ModelName::Visible, value_name = "MODEL")]
    model: ModelName,
    /// Temperature of the electrons, with its unit [default: 1eV]
    #[arg(long, value_name = "TEMPERATURE", allow_hyphen_values = true)]
    te: Option<String>,
    /// Electron density; ionisation then follows Saha (model lte) [default: none]
    #[arg(long, value_name = "DENSITY", allow_hyphen_values = true)]
    ne: Option<String>,
    /// Temperature of the atoms, for Doppler widths [default: 1000K]
    #[arg(long, value_name = "TEMPERATURE", allow_hyphen_values = true)]
    gas_temperature: Option<String>,
    /// Relative amounts, `Fe=0.01,He=1`, or a file mix.toml with a table [amounts]; species not named
    /// there have the amount 1
    #[arg(long, value_name = "AMOUNTS", allow_hyphen_values = true)]
    mix: Option<String>,
}

/// The light source and the instrument.
#[derive(Args, Debug)]
pub struct ConditionOptions {
    #[command(flatten)]
    source: SourceOptions,
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

#[derive(clap::ValueEnum, Clone, Copy, Debug, PartialEq, Eq)]
enum ModelName {
    Visible,
    Lte,
}

/// A checked light source, and what nobody gave.
#[derive(Clone, Debug)]
pub struct CheckedSource {
    /// The light source.
    pub conditions: Conditions,
    /// Electron temperature, as it will be shown.
    pub te: Temperature,
    /// Temperatures to scan, where a range was given; `te` is then their middle.
    pub te_scan: Vec<Temperature>,
    /// Gas temperature, as it will be shown.
    pub gas: Temperature,
    /// Amounts given.
    pub amounts: Vec<(SpeciesRequest, f64)>,
    /// What was assumed, one phrase each.
    pub assumed: Vec<String>,
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
}

impl ConditionOptions {
    /// Resolves what was typed; `range` is where a resolving power becomes a width.
    pub fn check(&self, range: &SpectralRange) -> Result<Checked, CliError> {
        let mut source = self.source.check()?;
        if !source.te_scan.is_empty() {
            return Err(CliError::Options(
                "--te takes one temperature here, such as 1eV; `passband` scans a range",
            ));
        }
        let width = match (self.resolving, &self.fwhm) {
            (Some(power), _) => resolving(power, range)?,
            (None, Some(width)) => width.parse()?,
            (None, None) => {
                let before = usize::from(source.amounts.is_empty());
                let at = source.assumed.len() - before;
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
        })
    }
}

impl SourceOptions {
    /// Resolves what was typed.
    pub fn check(&self) -> Result<CheckedSource, CliError> {
        let mut assumed = Vec::new();
        if self.model == ModelName::Visible {
            assumed.push("model visible (each species as bright as its amount)".to_owned());
        }
        let mut or_assume = |given: &Option<String>, default: &str, what: &str| {
            given.clone().unwrap_or_else(|| {
                assumed.push(format!("{what} {default}"));
                default.to_owned()
            })
        };
        let te_text = or_assume(&self.te, "1eV", "electron temperature");
        let gas: Temperature =
            or_assume(&self.gas_temperature, "1000K", "gas temperature").parse()?;
        let te_scan = match te_text.split_once("..") {
            Some((from, rest)) => temperatures(&te_text, from, rest)?,
            None => Vec::new(),
        };
        let te = match (te_scan.first(), te_scan.last()) {
            (Some(first), Some(last)) => {
                let middle = (first.ev() * last.ev()).sqrt();
                let te = Temperature::from_ev(middle.clamp(first.ev(), last.ev()));
                assumed.push(format!(
                    "electron temperature {middle:.3}eV outside the scan"
                ));
                te.unwrap_or(*first)
            }
            _ => te_text.parse()?,
        };
        let ne = self
            .ne
            .as_deref()
            .map(str::parse::<NumberDensity>)
            .transpose()?;
        if ne.is_some() && self.model == ModelName::Visible {
            return Err(CliError::Options(
                "--ne sets the ionisation balance, which --model visible does not use; \
                 add --model lte or leave --ne out",
            ));
        }
        let amounts = self
            .mix
            .as_deref()
            .map(mix)
            .transpose()?
            .unwrap_or_default();
        if amounts.is_empty() {
            assumed.push("equal amounts".to_owned());
        }
        let conditions = Conditions {
            model: match self.model {
                ModelName::Visible => EmissionModel::Visible,
                ModelName::Lte => EmissionModel::Lte,
            },
            kt_per_cm: te.kelvin() * vocabulary::light::constants::PER_CM_PER_KELVIN,
            electron_density_per_m3: ne.map(NumberDensity::per_m3),
            gas_temperature_k: gas.kelvin(),
        };
        Ok(CheckedSource {
            conditions,
            te,
            te_scan,
            gas,
            amounts,
            assumed,
        })
    }
}

/// How many temperatures a range stands for where no number follows.
const TEMPERATURES: u32 = 20;

/// `0.5..5eV:20`: temperatures at equal ratios, ends included.
fn temperatures(text: &str, from: &str, rest: &str) -> Result<Vec<Temperature>, CliError> {
    let bad = |problem: &str| {
        CliError::Usage(format!(
            "`{text}`: {problem}; write a range of temperatures such as 0.5..5eV:20"
        ))
    };
    let (to, count) = match rest.split_once(':') {
        Some((to, count)) => {
            let count = count.trim().parse::<u32>();
            let count = count.ok().filter(|n| (2..=1000).contains(n));
            (
                to,
                count.ok_or_else(|| bad("the number of steps lies between 2 and 1000"))?,
            )
        }
        None => (rest, TEMPERATURES),
    };
    let last: Temperature = to.parse()?;
    let unit = to.trim_start_matches(|c: char| !c.is_alphabetic());
    let first: Temperature = match from.trim().parse::<f64>() {
        Ok(_) => format!("{}{unit}", from.trim()).parse()?,
        Err(_) => from.parse()?,
    };
    if first.ev() >= last.ev() {
        return Err(bad("the range is empty or runs backwards"));
    }
    let ratio = last.ev() / first.ev();
    let at = |step: u32| first.ev() * ratio.powf(f64::from(step) / f64::from(count - 1));
    Ok((0..count)
        .filter_map(|step| Temperature::from_ev(at(step)))
        .collect())
}

/// Amounts typed, or in a file.
fn mix(text: &str) -> Result<Vec<(SpeciesRequest, f64)>, CliError> {
    let path = std::path::Path::new(text.trim());
    if path
        .extension()
        .is_some_and(|e| e.eq_ignore_ascii_case("toml"))
    {
        return mix_file(path);
    }
    parse_mix(text)
}

/// The table `[amounts]` of a file, `"Fe I" = 0.01`.
fn mix_file(path: &std::path::Path) -> Result<Vec<(SpeciesRequest, f64)>, CliError> {
    let text = std::fs::read_to_string(path).map_err(|cause| CliError::Unreadable {
        path: path.to_owned(),
        cause,
    })?;
    let bad = |problem: String| {
        CliError::Usage(format!(
            "{}: {problem}; write a table [amounts] with lines such as \"Fe I\" = 0.01",
            path.display()
        ))
    };
    let table: toml::Table = text
        .parse()
        .map_err(|e: toml::de::Error| bad(e.message().trim().to_owned()))?;
    let amounts = table
        .get("amounts")
        .and_then(toml::Value::as_table)
        .ok_or_else(|| bad("holds no table [amounts]".into()))?;
    let number = |value: &toml::Value| value.as_float().or(value.as_integer().map(|i| i as f64));
    let entries = amounts
        .iter()
        .map(|(species, value)| match number(value) {
            Some(amount) => Ok(format!("{species}={amount}")),
            None => Err(bad(format!("the amount of {species} is no number"))),
        })
        .collect::<Result<Vec<_>, _>>()?;
    if entries.is_empty() {
        return Err(bad("the table [amounts] is empty".into()));
    }
    parse_mix(&entries.join(","))
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

fn parse_mix(text: &str) -> Result<Vec<(SpeciesRequest, f64)>, CliError> {
    let mut amounts = Vec::new();
    for entry in text.split(',') {
        let bad = |problem| CliError::Mix {
            entry: entry.trim().to_owned(),
            problem,
        };
        let (species, amount) = entry
            .split_once('=')
            .ok_or_else(|| bad("no amount behind `=`"))?;
        let request: SpeciesRequest = species.trim().parse()?;
        let amount: f64 = amount
            .trim()
            .parse()
            .map_err(|_| bad("the amount is no number"))?;
        if !amount.is_finite() || amount < 0.0 {
            return Err(bad("an amount is zero or above"));
        }
        amounts.push((request, amount));
    }
    if amounts.iter().all(|(_, amount)| *amount == 0.0) {
        let problem = "all amounts are zero";
        return Err(CliError::Mix {
            entry: text.to_owned(),
            problem,
        });
    }
    Ok(amounts)
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
