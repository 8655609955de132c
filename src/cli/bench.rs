//! The laser bench: from species and light sources as typed to atoms and lasers.

use std::collections::HashSet;
use std::path::Path;

use vocabulary::atom::{Species, SpeciesRequest};
use vocabulary::light::{Air, Medium, TypedRange};

use super::CliError;
use super::options::CatalogueOptions;
use crate::advise::Spectrum;
use crate::advise::hyperfine::Constants;
use crate::advise::tune::{Atom, Laser, LaserError, Lifetime};
use crate::catalogue::{Catalogue, NamedLevel, ResonanceTables};

/// Z of the first actinide.
const FIRST_ACTINIDE: u8 = 89;

/// What every answer about a laser says on standard error.
const CAUTION: &str = "Caution: lasers are hazardous. Class and exposure limits are those of the \
    applicable laser safety standard and of the site's laser safety officer; this program gives \
    no clearance.";

/// The caution, and a word on vapours where alkali metals, mercury, beryllium or cadmium are among
/// the species named.
pub fn caution(context: &CatalogueOptions, elements: &[u8]) {
    context.say(CAUTION);
    if let Some(vapours) = vapours(elements) {
        context.say(&vapours);
    }
}

fn vapours(elements: &[u8]) -> Option<String> {
    const ALKALI: [u8; 6] = [3, 11, 19, 37, 55, 87];
    const TOXIC: [(u8, &str); 3] = [(4, "beryllium"), (48, "cadmium"), (80, "mercury")];
    let mut words = Vec::new();
    if elements.iter().any(|z| ALKALI.contains(z)) {
        words.push("alkali metals react with water and air".to_owned());
    }
    for (z, name) in TOXIC {
        if elements.contains(&z) {
            words.push(format!("{name} is toxic"));
        }
    }
    (!words.is_empty()).then(|| {
        format!(
            "Vapours: {}; follow the site's rules and licensed practice.",
            words.join(", ")
        )
    })
}

/// Refuses isotopes of actinides.
pub fn refuse_actinide_isotopes(requests: &[SpeciesRequest]) -> Result<(), CliError> {
    let refused = |r: &&SpeciesRequest| r.atomic_number >= FIRST_ACTINIDE && r.isotope.is_some();
    match requests.iter().find(refused) {
        Some(request) => Err(LaserError::ActinideIsotope {
            species: request.to_string(),
        }
        .into()),
        None => Ok(()),
    }
}

/// Refuses actinides altogether.
pub fn refuse_actinides(requests: &[SpeciesRequest]) -> Result<(), CliError> {
    refuse_actinide_isotopes(requests)?;
    match requests.iter().find(|r| r.atomic_number >= FIRST_ACTINIDE) {
        Some(request) => Err(LaserError::ActinideRoute {
            species: request.to_string(),
        }
        .into()),
        None => Ok(()),
    }
}

/// Reads a range as a laser without a name.
pub fn laser(text: &str, medium: Medium) -> Result<Laser, CliError> {
    let typed: TypedRange = text.parse()?;
    Ok(Laser {
        name: String::new(),
        range: typed.resolve(medium, Air::standard())?,
        power_mw: None,
        linewidth_mhz: None,
    })
}

/// Reads a file of lasers: CSV with the columns `name`, `range` and, where known, `power_mw` and
/// `linewidth_mhz`.
pub fn laser_file(path: &Path, medium: Medium) -> Result<Vec<Laser>, CliError> {
    let text = std::fs::read_to_string(path).map_err(|cause| CliError::Unreadable {
        path: path.to_owned(),
        cause,
    })?;
    let mut reader = csv::ReaderBuilder::new()
        .trim(csv::Trim::All)
        .comment(Some(b'#'))
        .flexible(true)
        .from_reader(text.as_bytes());
    let bad = |line: u64, problem: String| CliError::LaserFile {
        path: path.to_owned(),
        line,
        problem,
    };
    let headers = reader.headers().map_err(|e| bad(1, e.to_string()))?.clone();
    let column = |name: &str| headers.iter().position(|h| h == name);
    let range_column = column("range").ok_or_else(|| {
        bad(
            1,
            "no column `range` (columns are name, range, power_mw, linewidth_mhz)".into(),
        )
    })?;
    let mut lasers = Vec::new();
    for record in reader.records() {
        let record = record.map_err(|e| {
            let line = e.position().map_or(0, csv::Position::line);
            bad(line, e.to_string())
        })?;
        let line = record.position().map_or(0, csv::Position::line);
        let text_of = |name: &str| column(name).and_then(|c| record.get(c)).unwrap_or_default();
        let number_of =
            |name: &str| positive(text_of(name)).map_err(|p| bad(line, format!("{name}: {p}")));
        let range = record.get(range_column).unwrap_or_default();
        let mut laser = laser(range, medium).map_err(|e| bad(line, e.to_string()))?;
        laser.name = match text_of("name") {
            "" => format!("laser {}", lasers.len() + 1),
            name => name.to_owned(),
        };
        laser.power_mw = number_of("power_mw")?;
        laser.linewidth_mhz = number_of("linewidth_mhz")?;
        lasers.push(laser);
    }
    if lasers.is_empty() {
        return Err(bad(1, "no laser is listed".into()));
    }
    Ok(lasers)
}

fn positive(text: &str) -> Result<Option<f64>, String> {
    if text.is_empty() {
        return Ok(None);
    }
    match text.parse::<f64>() {
        Ok(value) if value.is_finite() && value > 0.0 => Ok(Some(value)),
        _ => Err(format!("`{text}` is not a number above zero")),
    }
}

/// What to load: lines in this range of vacuum wavenumbers, cm⁻¹, or all levels where there is none
/// in it (two photons).
#[derive(Clone, Copy, Debug)]
pub struct Load {
    /// Lower end.
    pub from_per_cm: f64,
    /// Upper end.
    pub to_per_cm: f64,
    /// Species without a line in the range are of no use.
    pub lines_only: bool,
}

/// Which species are asked for, which are only neighbours.
pub struct Wanted<'a> {
    /// Asked for; empty means all.
    pub of: &'a [SpeciesRequest],
    /// May also be there.
    pub among: &'a [SpeciesRequest],
}

/// Atoms on the bench, and the requests of which nothing is held.
pub struct Atoms {
    /// The atoms.
    pub atoms: Vec<Atom>,
    /// Requests without any species held, as they read.
    pub not_held: Vec<String>,
}

/// Reads all atoms: of an element its single isotopes too, whose rows take the place of those of
/// the mixture; of an isotope its mixture too, for the decays that only it holds.
pub fn atoms(catalogue: &Catalogue, wanted: &Wanted<'_>, load: Load) -> Result<Atoms, CliError> {
    let held = catalogue.species()?;
    let not_held = wanted
        .of
        .iter()
        .chain(wanted.among)
        .filter(|r| !held.iter().any(|s| r.matches(*s)))
        .map(ToString::to_string)
        .collect();
    let tables = catalogue.resonance_tables()?;
    let mut chosen: Vec<Chosen> = held.iter().filter_map(|&s| choose(s, wanted)).collect();
    add_mixtures(&mut chosen, &held);
    let mut atoms = Vec::with_capacity(chosen.len());
    let useful = useful(catalogue, &chosen, load)?;
    for choice in chosen.iter().filter(|c| useful.contains(&c.species)) {
        let mut atom = Atom::new(spectrum(catalogue, choice.species, load)?);
        atom.listed = choice.listed;
        atom.replaces_mixture = choice.replaces;
        atoms.push(atom);
    }
    for index in 0..atoms.len() {
        let species = atoms[index].spectrum.species;
        if species.isotope.is_some() {
            let mixture = Species {
                isotope: None,
                ..species
            };
            atoms[index].mixture = atoms.iter().position(|a| a.spectrum.species == mixture);
        }
        annotate(&mut atoms[index], &tables);
    }
    Ok(Atoms { atoms, not_held })
}

struct Chosen {
    species: Species,
    listed: bool,
    replaces: bool,
}

fn choose(species: Species, wanted: &Wanted<'_>) -> Option<Chosen> {
    let mixture = Species {
        isotope: None,
        ..species
    };
    let asked = |requests: &[SpeciesRequest], s: Species| requests.iter().any(|r| r.matches(s));
    if wanted.of.is_empty() {
        let refused = species.atomic_number >= FIRST_ACTINIDE && species.isotope.is_some();
        return (!refused).then_some(Chosen {
            species,
            listed: true,
            replaces: species.isotope.is_some(),
        });
    }
    let isotope_of_element = species.isotope.is_some()
        && species.atomic_number < FIRST_ACTINIDE
        && asked(wanted.of, mixture);
    let listed = asked(wanted.of, species) || isotope_of_element;
    (listed || asked(wanted.among, species)).then_some(Chosen {
        species,
        listed,
        replaces: isotope_of_element,
    })
}

/// The mixture of an isotope knows more levels and decays.
fn add_mixtures(chosen: &mut Vec<Chosen>, held: &[Species]) {
    let missing: Vec<Species> = chosen
        .iter()
        .map(|c| Species {
            isotope: None,
            ..c.species
        })
        .filter(|m| held.contains(m) && !chosen.iter().any(|c| c.species == *m))
        .collect();
    for species in missing {
        if !chosen.iter().any(|c| c.species == species) {
            chosen.push(Chosen {
                species,
                listed: false,
                replaces: false,
            });
        }
    }
}

/// Species with a line in the range, and the mixtures of isotopes that have one; all of them where
/// levels alone are needed.
fn useful(
    catalogue: &Catalogue,
    chosen: &[Chosen],
    load: Load,
) -> Result<HashSet<Species>, CliError> {
    let mut useful = HashSet::new();
    for choice in chosen {
        let species = choice.species;
        if !load.lines_only || catalogue.count_lines(species, load.from_per_cm, load.to_per_cm)? > 0
        {
            useful.insert(species);
            useful.insert(Species {
                isotope: None,
                ..species
            });
        }
    }
    Ok(useful)
}

fn spectrum(catalogue: &Catalogue, species: Species, load: Load) -> Result<Spectrum, CliError> {
    let levels = catalogue.levels(species)?;
    Ok(Spectrum {
        lines: catalogue.lines(species, &levels, load.from_per_cm, load.to_per_cm)?,
        strengths: catalogue.strengths(species)?,
        scopes: catalogue.scopes(species)?,
        limit_per_cm: vocabulary::atom::limit(species).map(|l| l.energy_per_cm),
        mass_u: vocabulary::atom::mass_u(species).unwrap_or(f64::from(species.atomic_number) * 2.0),
        species,
        amount: 1.0,
        named: true,
        levels,
    })
}

/// Adds what papers say of single levels.
fn annotate(atom: &mut Atom, tables: &ResonanceTables) {
    let species = atom.spectrum.species;
    let mixture = Species {
        isotope: None,
        ..species
    };
    let find = |atom: &Atom, l: &NamedLevel| atom.level_named(&l.configuration, &l.term, l.j);
    for row in tables.lifetimes.iter().filter(|r| r.species == mixture) {
        if let Some(level) = find(atom, &row.level) {
            let lifetime = Lifetime {
                lifetime_ns: row.lifetime_ns,
                uncertainty_ns: row.uncertainty_ns,
                paper: row.paper.clone(),
            };
            atom.lifetimes.insert(level, lifetime);
        }
    }
    for row in tables.branching.iter().filter(|r| r.species == mixture) {
        if let (Some(lower), Some(upper)) = (find(atom, &row.lower), find(atom, &row.upper)) {
            atom.branching
                .insert((lower, upper), (row.fraction, row.uncertainty));
        }
    }
    for row in tables.hyperfine.iter().filter(|r| r.species == species) {
        if let Some(level) = find(atom, &row.level) {
            let constants = Constants {
                nuclear_spin: row.nuclear_spin,
                a_mhz: row.a_mhz,
                b_mhz: row.b_mhz.unwrap_or((0.0, 0.0)),
            };
            atom.hyperfine.insert(level, constants);
        }
    }
}
