//! Ionisation limits from the bundled table `data/elements/limits.csv`.

use std::sync::OnceLock;

use super::Species;
use super::element::element_by_symbol;
use super::isotope::{isotope, mass_u};
use crate::light::constants::ELECTRON_MASS_U;

/// Where the uncertainty of a limit comes from.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum LimitUncertainty {
    /// The source states it.
    Stated,
    /// One unit of the last printed digit.
    LastDigit,
    /// Ten units of the last printed digit: the author marks the value as doubtful.
    Doubtful,
}

/// Energy from the ground level of a species to the ground level of the next stage, as one source
/// reports it.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Limit {
    /// The limit, cm⁻¹.
    pub energy_per_cm: f64,
    /// 1 σ, cm⁻¹.
    pub uncertainty_per_cm: f64,
    /// Where the uncertainty comes from.
    pub uncertainty_origin: LimitUncertainty,
    /// Key of the source in `data/elements/source.toml`.
    pub source: &'static str,
}

const TABLE: &str = include_str!("../../../data/elements/limits.csv");

struct Report {
    species: Species,
    limit: Limit,
}

/// The ionisation limit that leads: the newer evaluation where there is one, else the headers of
/// Morton 2003 and 2000. An isotope without a limit of its own takes that of the natural mixture,
/// scaled by the reduced mass for one electron (an exact scaling of the Rydberg energy), else
/// unchanged with the normal mass shift added to its 1 σ. `None` where nothing is known.
pub fn limit(species: Species) -> Option<Limit> {
    let own = limit_reports(species).next();
    own.or_else(|| limit_of_mixture(species))
}

/// All reports of the limit of exactly this species, the leading one first. Reports that
/// contradict the stage before (a header has lost a digit) are kept in the table and left out here.
pub fn limit_reports(species: Species) -> impl Iterator<Item = Limit> {
    reports()
        .iter()
        .filter(move |report| report.species == species)
        .map(|report| report.limit)
}

fn limit_of_mixture(species: Species) -> Option<Limit> {
    let mass_number = species.isotope?;
    isotope(species.atomic_number, mass_number)?;
    let mixture = Species::new(species.atomic_number, species.stage);
    let mut limit = limit_reports(mixture).next()?;
    let nucleus_u = |of: Species| Some(mass_u(of)? - f64::from(of.stage) * ELECTRON_MASS_U);
    let reduced = |of: Species| Some(1.0 / (1.0 + ELECTRON_MASS_U / nucleus_u(of)?));
    let ratio = reduced(species)? / reduced(leading_isotope(mixture))?;
    if species.is_one_electron() {
        limit.energy_per_cm *= ratio;
    } else {
        let mass_shift_per_cm = limit.energy_per_cm * (ratio - 1.0).abs();
        limit.uncertainty_per_cm = limit.uncertainty_per_cm.hypot(mass_shift_per_cm);
    }
    Some(limit)
}

/// The limits of one-electron ions are those of the most abundant isotope, as the trade gives them.
fn leading_isotope(mixture: Species) -> Species {
    let share = |i: &super::Isotope| i.abundance.unwrap_or(0.0);
    let most = super::isotopes(mixture.atomic_number)
        .max_by(|a, b| share(a).total_cmp(&share(b)))
        .filter(|i| mixture.is_one_electron() && share(i) > 0.0);
    Species {
        isotope: most.map(|i| i.mass_number),
        ..mixture
    }
}

fn reports() -> &'static [Report] {
    static REPORTS: OnceLock<Vec<Report>> = OnceLock::new();
    REPORTS.get_or_init(|| {
        let mut symbol = "";
        let mut atomic_number = None;
        let read = |row: &'static str| {
            let (element, rest) = row.split_once(',')?;
            // Rows of one element stand together: each symbol is looked up once.
            if element != symbol {
                symbol = element;
                atomic_number = element_by_symbol(symbol).map(|e| e.atomic_number);
            }
            read_row(atomic_number?, rest)
        };
        TABLE.lines().skip(1).filter_map(read).collect()
    })
}

fn read_row(atomic_number: u8, row: &'static str) -> Option<Report> {
    let fields: Vec<&'static str> = row.split(',').collect();
    let &[
        isotope,
        stage,
        energy,
        sigma,
        origin,
        source,
        _place,
        refused,
    ] = fields.as_slice()
    else {
        return None;
    };
    let species = Species {
        atomic_number,
        stage: stage.parse().ok()?,
        isotope: isotope.parse().ok(),
    };
    let limit = Limit {
        energy_per_cm: energy.parse().ok()?,
        uncertainty_per_cm: sigma.parse().ok()?,
        uncertainty_origin: match origin {
            "stated" => LimitUncertainty::Stated,
            "last digit" => LimitUncertainty::LastDigit,
            "doubtful" => LimitUncertainty::Doubtful,
            _ => return None,
        },
        source,
    };
    refused.is_empty().then_some(Report { species, limit })
}
