//! From a list of species to what the catalogue holds of them.

use vocabulary::atom::{Species, SpeciesRequest, Stages};
use vocabulary::light::SpectralRange;

use super::CliError;
use super::options::amount_of;
use crate::advise::{Conditions, EmissionModel, Spectrum};
use crate::catalogue::Catalogue;

/// Spectra of all held species that are asked for, and the requests of which nothing is held.
pub struct Assembled {
    /// What is held.
    pub spectra: Vec<Spectrum>,
    /// Requests without any species held, as they read.
    pub not_held: Vec<String>,
}

/// Reads what is held of the species asked for, lines from a margin around the range.
pub fn spectra(
    catalogue: &Catalogue,
    requests: &[SpeciesRequest],
    amounts: &[(SpeciesRequest, f64)],
    range: &SpectralRange,
    margin_nm: f64,
) -> Result<Assembled, CliError> {
    let held = catalogue.species()?;
    let from = 1e7 / (range.vacuum_high_nm + margin_nm);
    let to = 1e7 / (range.vacuum_low_nm - margin_nm).max(f64::MIN_POSITIVE);
    let mut spectra: Vec<Spectrum> = Vec::new();
    let mut not_held = Vec::new();
    for request in requests {
        let mut found = false;
        for &species in held.iter().filter(|s| is_asked_for(*request, **s)) {
            found = true;
            let named = request.single().is_some();
            match spectra.iter_mut().find(|s| s.species == species) {
                Some(twice) => twice.named |= named,
                None => {
                    let amount = amount_of(species, amounts);
                    spectra.push(spectrum(catalogue, species, amount, named, from..=to)?);
                }
            }
        }
        if !found {
            not_held.push(request.to_string());
        }
    }
    Ok(Assembled { spectra, not_held })
}

/// Adds what is held of the other stages of each element, with amount zero and without lines, where
/// the model asks how an element spreads over its stages.
pub fn complete(
    catalogue: &Catalogue,
    spectra: &mut Vec<Spectrum>,
    conditions: &Conditions,
) -> Result<(), CliError> {
    let balanced = match conditions.model {
        EmissionModel::Coronal => true,
        EmissionModel::Lte => conditions.electron_density_per_m3.is_some(),
        EmissionModel::Visible | EmissionModel::Given => false,
    };
    if !balanced {
        return Ok(());
    }
    for species in catalogue.species()? {
        let same = |s: &Spectrum| {
            (s.species.atomic_number, s.species.isotope) == (species.atomic_number, species.isotope)
        };
        let there = spectra.iter().any(|s| s.species == species);
        if !there && spectra.iter().any(same) {
            // An empty range of wavenumbers.
            spectra.push(spectrum(catalogue, species, 0.0, false, 0.0..=0.0)?);
        }
    }
    Ok(())
}

/// A bare element means all its stages that are held, but for the one-electron ions from Li III on:
/// the calculator knows each of them, and hardly a source that is asked about without naming them
/// holds them.
fn is_asked_for(request: SpeciesRequest, species: Species) -> bool {
    let stripped = species.is_one_electron() && species.atomic_number > 2;
    request.matches(species) && !(stripped && request.stages == Stages::All)
}

fn spectrum(
    catalogue: &Catalogue,
    species: Species,
    amount: f64,
    named: bool,
    wavenumbers_per_cm: std::ops::RangeInclusive<f64>,
) -> Result<Spectrum, CliError> {
    let levels = catalogue.levels(species)?;
    let (from, to) = wavenumbers_per_cm.into_inner();
    Ok(Spectrum {
        lines: catalogue.lines(species, &levels, from, to)?,
        strengths: catalogue.strengths(species)?,
        scopes: catalogue.scopes(species)?,
        limit_per_cm: vocabulary::atom::limit(species).map(|l| l.energy_per_cm),
        mass_u: vocabulary::atom::mass_u(species).unwrap_or(f64::from(species.atomic_number) * 2.0),
        species,
        amount,
        named,
        levels,
    })
}
