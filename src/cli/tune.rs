//! `tune`: which transitions a laser reaches from populated levels.

use std::path::PathBuf;

use clap::Args;
use serde_json::{Map, Value, json};
use vocabulary::atom::SpeciesRequest;
use vocabulary::light::{Medium, NumberDensity, PositionMedium, Temperature};

use super::bench::{self, Load, Wanted};
use super::options::{CatalogueOptions, OutputOptions, medium};
use super::window::species;
use super::{CliError, Exit, Outcome};
use crate::advise::tune::{self, Answer, Atom, Laser, LaserError, Question};
use crate::catalogue::Catalogue;
use crate::show::{self, Context, Format, TuneWish};

/// Which transitions a laser of this tuning range reaches from populated levels
///
/// Lists, for each, position and frequency, rate, lifetime, widths, cross-sections, saturation,
/// recoil, and whether it cycles. Of an element its single isotopes are shown where frequencies of
/// papers are held. Caution: laser class and exposure limits are those of the applicable laser
/// safety standard and of the site's laser safety officer; the program gives no clearance.
#[derive(Args, Debug)]
#[command(after_help = "Examples:\n  lineclear tune 776..800nm --of Rb\n  \
    lineclear tune 780.0..780.5nm --of 87Rb --hyperfine --density 1e10cm-3 --cell-length 7.5cm\n  \
    lineclear tune 1083+-1nm --of He --metastable\n  \
    lineclear tune 770..780nm --of Rb --photons 2\n  \
    lineclear tune --laser sources.csv --of Rb,Cs    (columns: name,range,power_mw,linewidth_mhz)")]
pub struct Arguments {
    /// Tuning range with its unit: 776..800nm, 780.2+-0.2nm, 384.2..384.3THz
    #[arg(
        value_name = "RANGE",
        required_unless_present = "laser",
        allow_hyphen_values = true
    )]
    range: Option<String>,
    /// File of lasers instead of a range: CSV with name, range, power_mw, linewidth_mhz
    #[arg(long, value_name = "FILE", conflicts_with = "range")]
    laser: Option<PathBuf>,
    /// Species, separated by commas: Rb (its isotopes too), "Rb I", 87Rb [default: all held]
    #[arg(long, value_name = "SPECIES")]
    of: Vec<String>,
    /// Species that may absorb in the same range [default: those of --of]
    #[arg(long, value_name = "SPECIES")]
    among: Vec<String>,
    /// Medium of wavelengths: auto is air from 200 nm to 2000 nm, vacuum elsewhere
    #[arg(long, value_parser = medium, default_value = "auto", value_name = "MEDIUM")]
    medium: Medium,
    /// Start from metastable levels too: no lower level is reached by electric dipole decay
    #[arg(long)]
    metastable: bool,
    /// Temperature of the atoms: populations and Doppler widths [default: 300K]
    #[arg(long, value_name = "TEMPERATURE", allow_hyphen_values = true)]
    gas_temperature: Option<String>,
    /// Density of the atoms of each element, for the absorption of a cell: 1e10cm-3
    #[arg(long, value_name = "DENSITY", allow_hyphen_values = true)]
    density: Option<String>,
    /// Length of the cell, with its unit [default: 1cm]
    #[arg(
        long,
        value_name = "LENGTH",
        requires = "density",
        allow_hyphen_values = true
    )]
    cell_length: Option<String>,
    /// Give the hyperfine components of single isotopes
    #[arg(long, conflicts_with = "photons")]
    hyperfine: bool,
    /// 2: transitions by two photons of one colour
    #[arg(long, value_name = "N", value_parser = clap::value_parser!(u8).range(1..=2), default_value_t = 1)]
    photons: u8,
    /// Show only the N strongest, by cross-section times population
    #[arg(long, value_name = "N", value_parser = clap::value_parser!(u32).range(1..))]
    strongest: Option<u32>,
    #[command(flatten)]
    output: OutputOptions,
}

pub(super) fn run(arguments: Arguments, context: &CatalogueOptions) -> Result<Outcome, CliError> {
    let (of, among) = (species(&arguments.of)?, species(&arguments.among)?);
    bench::refuse_actinide_isotopes(&of)?;
    let (question, assumed) = check(&arguments)?;
    let catalogue = context.open()?;
    let wanted = Wanted {
        of: &of,
        among: &among,
    };
    let held = bench::atoms(&catalogue, &wanted, load(&question))?;
    refuse_not_held(&held.not_held, &of)?;
    let answer = tune::answer(&question, &held.atoms)?;
    let elements: Vec<u8> = of
        .iter()
        .map(|r: &SpeciesRequest| r.atomic_number)
        .collect();
    bench::caution(context, &elements);
    let described = describe(&catalogue, &answer, &held.atoms, &question, assumed)?;
    let empty = answer.transitions.is_empty() && answer.two_photon.is_empty();
    let wish = TuneWish {
        typed: typed(&arguments, &question),
        hint: match empty {
            true => hint(&catalogue, &wanted, &arguments, &question)?,
            false => None,
        },
        strongest: arguments.strongest.map(|n| n as usize),
        with_keys: !matches!(arguments.output.format, Format::Table | Format::Markdown),
    };
    Ok(Outcome {
        sheet: show::tune(&answer, &held.atoms, &question, described, &wish),
        format: arguments.output.format,
        exit: Exit::Answered,
    })
}

/// Where to look when nothing lies in a range: in the other medium, else at the nearest transition of
/// the species asked for.
fn hint(
    catalogue: &Catalogue,
    wanted: &Wanted<'_>,
    arguments: &Arguments,
    question: &Question,
) -> Result<Option<String>, CliError> {
    let (Some(range), [laser]) = (&arguments.range, question.lasers.as_slice()) else {
        return Ok(None);
    };
    let found = |laser: Laser, medium: Medium| -> Result<Vec<(f64, String)>, CliError> {
        let question = Question {
            lasers: vec![laser],
            medium,
            ..question.clone()
        };
        let held = bench::atoms(catalogue, wanted, load(&question))?;
        Ok(tune::answer(&question, &held.atoms)?.positions(&held.atoms))
    };
    let other = match laser.range.read_in {
        Some(PositionMedium::Air) => Some((Medium::Vacuum, "vacuum")),
        Some(PositionMedium::Vacuum) => Some((Medium::Air, "air")),
        None => None,
    };
    if let Some((medium, word)) = other
        && let Ok(laser) = bench::laser(range, medium)
    {
        let names: Vec<String> = found(laser, medium)?
            .into_iter()
            .map(|(_, name)| name)
            .collect();
        if let Some(first) = names.first() {
            return Ok(Some(match names.len() {
                1 => format!("Read in {word} the range holds {first}: ask with --medium {word}."),
                n => format!(
                    "Read in {word} the range holds {n}, {first} among them: ask with --medium {word}."
                ),
            }));
        }
    }
    if wanted.of.is_empty() {
        return Ok(None);
    }
    let mut wide = laser.clone();
    wide.range.wavenumber_low_per_cm /= 2.0;
    wide.range.wavenumber_high_per_cm *= 2.0;
    let far = |wavenumber: f64| {
        let range = &laser.range;
        (range.wavenumber_low_per_cm - wavenumber).max(wavenumber - range.wavenumber_high_per_cm)
    };
    let nearest = found(wide, question.medium)?
        .into_iter()
        .min_by(|a, b| far(a.0).total_cmp(&far(b.0)));
    Ok(nearest.map(|(_, name)| format!("The nearest is {name}.")))
}

fn check(arguments: &Arguments) -> Result<(Question, Vec<String>), CliError> {
    let mut assumed = Vec::new();
    let lasers = match (&arguments.range, &arguments.laser) {
        (Some(range), _) => vec![bench::laser(range, arguments.medium)?],
        (None, Some(path)) => bench::laser_file(path, arguments.medium)?,
        (None, None) => return Err(CliError::Options("give a RANGE or a file with --laser")),
    };
    if lasers.iter().any(|l| l.range.unit_assumed) {
        assumed.push("nm, as the range has no unit".to_owned());
    }
    let temperature = arguments.gas_temperature.clone().unwrap_or_else(|| {
        assumed.push("gas temperature 300K".to_owned());
        "300K".to_owned()
    });
    let temperature: Temperature = temperature.parse()?;
    let density = arguments
        .density
        .as_deref()
        .map(str::parse::<NumberDensity>)
        .transpose()?;
    let cell_cm = match &arguments.cell_length {
        Some(text) => length_cm(text)?,
        None => {
            if density.is_some() {
                assumed.push("cell length 1cm".to_owned());
            }
            1.0
        }
    };
    let question = Question {
        lasers,
        medium: arguments.medium,
        temperature_k: temperature.kelvin(),
        density_per_cm3: density.map(NumberDensity::per_cm3),
        cell_cm,
        metastable: arguments.metastable,
        hyperfine: arguments.hyperfine,
        two_photons: arguments.photons == 2,
    };
    Ok((question, assumed))
}

fn length_cm(text: &str) -> Result<f64, LaserError> {
    const UNITS: [(&str, f64); 3] = [("mm", 0.1), ("cm", 1.0), ("m", 100.0)];
    let unreadable = || LaserError::Unreadable {
        option: "--cell-length",
        text: text.trim().to_owned(),
        advice: "is no length above zero; write it with its unit, such as 7.5cm",
    };
    UNITS
        .iter()
        .find_map(|(unit, cm)| {
            let value: f64 = text.trim().strip_suffix(unit)?.trim().parse().ok()?;
            Some(value * cm)
        })
        .filter(|cm| cm.is_finite() && *cm > 0.0)
        .ok_or_else(unreadable)
}

fn refuse_not_held(not_held: &[String], of: &[SpeciesRequest]) -> Result<(), LaserError> {
    let asked = of
        .iter()
        .map(ToString::to_string)
        .find(|name| not_held.contains(name));
    asked.map_or(Ok(()), |species| Err(LaserError::NoLevels { species }))
}

/// The lines to read: those of all lasers; two photons need levels alone.
fn load(question: &Question) -> Load {
    let ranges = || question.lasers.iter().map(|l| &l.range);
    Load {
        from_per_cm: ranges()
            .map(|r| r.wavenumber_low_per_cm)
            .fold(f64::INFINITY, f64::min),
        to_per_cm: ranges()
            .map(|r| r.wavenumber_high_per_cm)
            .fold(0.0, f64::max),
        lines_only: !question.two_photons,
    }
}

/// What was asked, and in which medium a range was read.
fn typed(arguments: &Arguments, question: &Question) -> String {
    let read_in = match question.lasers.first().and_then(|l| l.range.read_in) {
        Some(PositionMedium::Air) => " (read in air)",
        Some(PositionMedium::Vacuum) => " (read in vacuum)",
        None => "",
    };
    match (&arguments.range, &arguments.laser) {
        (Some(range), _) => format!("{}{read_in}", range.trim()),
        (None, Some(path)) => path.display().to_string(),
        (None, None) => String::new(),
    }
}

fn describe(
    catalogue: &Catalogue,
    answer: &Answer,
    atoms: &[Atom],
    question: &Question,
    assumed: Vec<String>,
) -> Result<Context, CliError> {
    let mut context = Context {
        command: "tune",
        medium: question.medium.to_string(),
        conditions: conditions(question),
        assumed,
        ..Context::default()
    };
    let papers = answer.transitions.iter().any(|t| {
        t.decays.measured_ns.is_some()
            || !t.components.is_empty()
            || atoms[t.atom].spectrum.species.isotope.is_some()
    });
    let used = |key: &str| {
        let of_line = answer
            .transitions
            .iter()
            .any(|t| &*t.line.position_source == key || t.line.rate_source.as_deref() == Some(key));
        let of_levels = answer
            .two_photon
            .iter()
            .any(|t| &*t.lower.source == key || &*t.upper.source == key);
        of_line || of_levels || (papers && key == "resonance-lines")
    };
    for (key, citation, licence) in catalogue.citations()? {
        if used(&key) {
            context.sources.insert(key, (citation, licence));
        }
    }
    Ok(context)
}

fn conditions(question: &Question) -> Map<String, Value> {
    let mut out = Map::new();
    let mut put = |key: &str, value: Value| out.insert(key.to_owned(), value);
    put("gas_temperature_k", json!(question.temperature_k));
    put("density_per_cm3", json!(question.density_per_cm3));
    put(
        "cell_length_cm",
        json!(question.density_per_cm3.map(|_| question.cell_cm)),
    );
    put("metastable", json!(question.metastable));
    put("photons", json!(if question.two_photons { 2 } else { 1 }));
    let lasers: Vec<Value> = question
        .lasers
        .iter()
        .map(|l| {
            json!({
                "name": l.name,
                "range_vacuum_nm": [l.range.vacuum_low_nm, l.range.vacuum_high_nm],
                "power_mw": l.power_mw,
                "linewidth_mhz": l.linewidth_mhz,
            })
        })
        .collect();
    put("lasers", Value::Array(lasers));
    put(
        "air",
        json!("Ciddor 1996, 15 °C, 101325 Pa, dry, 450 ppm CO2"),
    );
    out
}
