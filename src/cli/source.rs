//! The light source as it is typed: model, temperatures, densities, mix.

use std::path::PathBuf;

use clap::Args;
use vocabulary::atom::SpeciesRequest;
use vocabulary::light::{NumberDensity, Temperature};

use super::CliError;
use super::mix::{self, MixFile, listed};
use super::{given, scan};
use crate::advise::{Conditions, Details, EmissionModel};

/// The light source.
#[derive(Args, Debug)]
pub struct SourceOptions {
    /// How the light of species compares: `visible` takes each species as seen, `lte` real amounts
    /// at one temperature, `coronal` excitation from the ground term in a thin plasma, `given` what
    /// a table of yours says [default: visible]
    #[arg(long, value_enum, value_name = "MODEL")]
    model: Option<ModelName>,
    /// Temperature of the electrons, with its unit [default: 1eV]
    #[arg(long, value_name = "TEMPERATURE", allow_hyphen_values = true)]
    te: Option<String>,
    /// Electron density, 1e20m-3: Stark widths, and with model lte ionisation by Saha [default:
    /// none]
    #[arg(long, value_name = "DENSITY", allow_hyphen_values = true)]
    ne: Option<String>,
    /// Temperature of the atoms, for Doppler widths [default: 1000K]
    #[arg(long, value_name = "TEMPERATURE", allow_hyphen_values = true)]
    gas_temperature: Option<String>,
    /// Relative amounts, `Fe=0.01±30%,He=1` (1 σ; +- for ±), or a file mix.toml with a table
    /// [amounts] and, if wanted, te, ne and more; species not named there have the amount 1
    #[arg(long, value_name = "AMOUNTS", allow_hyphen_values = true)]
    mix: Option<String>,
    /// Parts of an element by stage, `C I=0.2,C II=0.8±10%`; its other stages count as absent
    /// (models lte and coronal)
    #[arg(long, value_name = "PARTS", allow_hyphen_values = true)]
    ion_fractions: Option<String>,
    /// Parts of the atoms in metastable levels, `He I 2s 3S=1e-5±50%` (model coronal)
    #[arg(long, value_name = "PARTS", allow_hyphen_values = true)]
    metastable: Option<String>,
    /// Table of model given: a CSV of species and ion_fraction, or of species, wavelength_nm (or
    /// another unit in the name) and intensity; relative_uncertainty if known
    #[arg(long, value_name = "FILE.csv")]
    given: Option<PathBuf>,
    /// Neutral gas that broadens lines, `Ar=1bar` or `Ar=2e25m-3`
    #[arg(long, value_name = "GAS", allow_hyphen_values = true)]
    gas: Option<String>,
}

#[derive(clap::ValueEnum, Clone, Copy, Debug, PartialEq, Eq)]
enum ModelName {
    Visible,
    Lte,
    Coronal,
    Given,
}

impl ModelName {
    fn parse(text: &str) -> Result<Self, CliError> {
        clap::ValueEnum::from_str(text.trim(), true).map_err(|_| {
            CliError::Usage(format!(
                "model: `{text}` is no model; write visible, lte, coronal or given"
            ))
        })
    }

    fn model(self) -> EmissionModel {
        match self {
            Self::Visible => EmissionModel::Visible,
            Self::Lte => EmissionModel::Lte,
            Self::Coronal => EmissionModel::Coronal,
            Self::Given => EmissionModel::Given,
        }
    }
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
    /// Electron densities to scan, m⁻³, where a range was given; the conditions hold their middle.
    pub ne_scan: Vec<f64>,
    /// Gas temperature, as it will be shown.
    pub gas: Temperature,
    /// Amounts given.
    pub amounts: Vec<(SpeciesRequest, f64)>,
    /// What was assumed, one phrase each.
    pub assumed: Vec<String>,
}

/// What is assumed of a light source of which nothing is said.
const VISIBLE: &str = "model visible (each species as bright as its amount)";

impl CheckedSource {
    /// Says where the light lies that is looked at (vacuum nm): below 200 nm species are compared
    /// by their strongest lines there.
    pub fn look_at(&mut self, vacuum_nm: f64) {
        if vacuum_nm >= 200.0 {
            return;
        }
        self.conditions.details.far_ultraviolet = true;
        for phrase in self.assumed.iter_mut().filter(|a| *a == VISIBLE) {
            *phrase =
                "model visible (each species as bright as its amount, in its strongest line below \
                 200 nm)"
                    .to_owned();
        }
    }
}

impl SourceOptions {
    /// Resolves what was typed, and what a file of the mix says beside it; what is typed wins.
    pub fn check(&self) -> Result<CheckedSource, CliError> {
        let mut file = match self.mix.as_deref().and_then(MixFile::is_named) {
            Some(path) => MixFile::read(&path)?,
            None => MixFile::default(),
        };
        let said = file.clone();
        self.type_over(&mut file)?;
        let model = match (self.model, &file.model) {
            (Some(model), _) => model.model(),
            (None, Some(text)) => ModelName::parse(text)?.model(),
            (None, None) => EmissionModel::Visible,
        };
        let mut assumed = Vec::new();
        if model == EmissionModel::Visible {
            assumed.push(VISIBLE.to_owned());
        }
        let mut or_assume = |given: &Option<String>, default: &str, what: &str| {
            given.clone().unwrap_or_else(|| {
                assumed.push(format!("{what} {default}"));
                default.to_owned()
            })
        };
        let te_text = or_assume(&file.te, "1eV", "electron temperature");
        let gas: Temperature =
            or_assume(&file.gas_temperature, "1000K", "gas temperature").parse()?;
        let te_scan = scan::temperatures(&te_text)?;
        let te = match scan::middle(te_scan.iter().map(|t| t.ev())) {
            Some(middle) => {
                assumed.push(format!(
                    "electron temperature {middle:.3}eV outside the scan"
                ));
                Temperature::from_ev(middle).unwrap_or(te_scan[0])
            }
            None => te_text.parse()?,
        };
        let ne_scan = file.ne.as_deref().map_or(Ok(Vec::new()), scan::densities)?;
        let ne = match (scan::middle(ne_scan.iter().copied()), &file.ne) {
            (Some(middle), _) => {
                assumed.push(format!("electron density {middle:.2e}m-3 outside the scan"));
                Some(middle)
            }
            (None, Some(text)) => Some(text.parse::<NumberDensity>()?.per_m3()),
            (None, None) => None,
        };
        if let Some(name) = &self.mix {
            assumed.extend(self.as_in_file(&said, name));
        }
        let details = self.details(&file, gas, model)?;
        if details.amounts.is_empty() && details.intensities.is_empty() {
            assumed.push("equal amounts".to_owned());
        }
        refuse_unused(model, &details, !ne_scan.is_empty())?;
        Ok(CheckedSource {
            amounts: details
                .amounts
                .iter()
                .map(|e| (e.request, e.value))
                .collect(),
            conditions: Conditions {
                model,
                kt_per_cm: te.kelvin() * vocabulary::light::constants::PER_CM_PER_KELVIN,
                electron_density_per_m3: ne,
                gas_temperature_k: gas.kelvin(),
                details,
            },
            te,
            te_scan,
            ne_scan,
            gas,
            assumed,
        })
    }

    /// What comes from the file of the mix, in one phrase.
    fn as_in_file(&self, said: &MixFile, name: &str) -> Option<String> {
        let from_file = |typed: bool, what: &str, said: &Option<String>| {
            let text = said.as_ref().filter(|_| !typed)?;
            Some(format!("{what} {text}"))
        };
        let words: Vec<String> = [
            from_file(self.model.is_some(), "model", &said.model),
            from_file(self.te.is_some(), "electron temperature", &said.te),
            from_file(self.ne.is_some(), "electron density", &said.ne),
            from_file(
                self.gas_temperature.is_some(),
                "gas temperature",
                &said.gas_temperature,
            ),
        ]
        .into_iter()
        .flatten()
        .collect();
        (!words.is_empty()).then(|| format!("{} (as in {})", words.join(", "), name.trim()))
    }

    /// What is typed stands in the place of what the file says.
    fn type_over(&self, file: &mut MixFile) -> Result<(), CliError> {
        let singles = [
            (&self.te, &mut file.te),
            (&self.ne, &mut file.ne),
            (&self.gas_temperature, &mut file.gas_temperature),
        ];
        for (typed, place) in singles {
            if typed.is_some() {
                place.clone_from(typed);
            }
        }
        let mix = self.mix.as_ref().filter(|m| MixFile::is_named(m).is_none());
        if let Some(text) = mix {
            file.amounts = listed("--mix", text, "amounts as `Fe=0.01,He=1`")?;
        }
        let lists = [
            (
                "--ion-fractions",
                &self.ion_fractions,
                &mut file.ion_fractions,
                "parts as `C I=0.2,C II=0.8`",
            ),
            (
                "--metastable",
                &self.metastable,
                &mut file.metastable,
                "parts as \"He I 2s 3S=1e-5\"",
            ),
            ("--gas", &self.gas, &mut file.gas, "Ar=1bar or Ar=2e25m-3"),
        ];
        for (option, typed, place, example) in lists {
            if let Some(text) = typed {
                *place = listed(option, text, example)?;
            }
        }
        Ok(())
    }

    fn details(
        &self,
        file: &MixFile,
        gas: Temperature,
        model: EmissionModel,
    ) -> Result<Details, CliError> {
        let mut details = Details {
            amounts: mix::amounts(&file.amounts)?,
            ion_fractions: mix::ion_fractions(&file.ion_fractions)?,
            metastables: mix::metastables(&file.metastable)?,
            gas: mix::gas(&file.gas, gas)?,
            ..Details::default()
        };
        match (&self.given, model) {
            (Some(path), EmissionModel::Given) => {
                if !details.ion_fractions.is_empty() {
                    return Err(CliError::Options(
                        "--model given takes ion fractions from the table of --given; leave \
                         --ion-fractions out",
                    ));
                }
                given::read(path, &mut details)?;
            }
            (None, EmissionModel::Given) => {
                return Err(CliError::Options(
                    "--model given needs a table: add --given FILE.csv with species and \
                     ion_fraction, or species, wavelength_nm and intensity",
                ));
            }
            (Some(_), _) => {
                return Err(CliError::Options(
                    "--given goes with --model given; add that",
                ));
            }
            (None, _) => {}
        }
        Ok(details)
    }
}

/// What is said but would not be used.
fn refuse_unused(model: EmissionModel, details: &Details, scans: bool) -> Result<(), CliError> {
    let stages = matches!(
        model,
        EmissionModel::Lte | EmissionModel::Coronal | EmissionModel::Given
    );
    let positive = |e: &crate::advise::Entry| e.value > 0.0 && e.value != 1.0;
    let problem = if !details.ion_fractions.is_empty() && !stages {
        "--ion-fractions say nothing to --model visible, which takes each species as seen; add \
         --model lte or --model coronal"
    } else if !details.metastables.is_empty() && model != EmissionModel::Coronal {
        "--metastable levels are those of --model coronal; add that, or leave them out"
    } else if !details.intensities.is_empty() && details.amounts.iter().any(positive) {
        "--mix does not change intensities that are given; leave it out, or give species the amount \
         0 or 1"
    } else if scans && model == EmissionModel::Coronal {
        "--ne cannot be scanned with --model coronal, whose populations do not depend on it; give \
         one density for the widths"
    } else {
        return Ok(());
    };
    Err(CliError::Options(problem))
}
