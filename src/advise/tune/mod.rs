//! The answer of `tune`: which transitions a laser reaches from populated levels.

mod atom;
mod decay;
mod error;
mod neighbour;
mod populated;
mod seen;
pub mod strength;
mod two_photon;

use std::sync::Arc;

use vocabulary::light::{Air, Medium, PositionMedium, SpectralRange};
use vocabulary::spectrum::{Level, Line};

pub use atom::{Atom, Lifetime, bears_name, is_named, same_level};
pub use decay::{Cycling, Decay, DecayBook, Decays, dipole_allowed};
pub use error::LaserError;
pub use neighbour::Neighbour;
pub use populated::{POPULATED, Populated};
pub use seen::{Absorbed, Seen};
pub use two_photon::{TwoPhoton, two_photon_allowed};

use super::hyperfine::{self, Component, Constants};
use super::{Placed, placed};
use crate::calc::shape::ShapeError;
use seen::Narrow;
use strength::Dipole;

/// MHz of 1 cm⁻¹.
pub const MHZ_PER_CM: f64 = 29_979.245_8;

/// A light source.
#[derive(Clone, Debug, PartialEq)]
pub struct Laser {
    /// Its name; empty for a range typed on the command line.
    pub name: String,
    /// Where it can be tuned.
    pub range: SpectralRange,
    /// Power, mW.
    pub power_mw: Option<f64>,
    /// Linewidth (FWHM), MHz.
    pub linewidth_mhz: Option<f64>,
}

/// What is asked.
#[derive(Clone, Debug)]
pub struct Question {
    /// Light sources, at least one.
    pub lasers: Vec<Laser>,
    /// Medium of the positions shown.
    pub medium: Medium,
    /// Temperature of the gas, K: populations and Doppler widths.
    pub temperature_k: f64,
    /// Density of all atoms of an element, cm⁻³, in all its isotopes.
    pub density_per_cm3: Option<f64>,
    /// Length of the cell, cm.
    pub cell_cm: f64,
    /// Start from metastable levels too.
    pub metastable: bool,
    /// Give hyperfine components.
    pub hyperfine: bool,
    /// Two photons of one colour instead of one.
    pub two_photons: bool,
}

/// A level that takes a part of the decays elsewhere.
#[derive(Clone, Debug, PartialEq)]
pub struct Leak {
    /// The level.
    pub level: Arc<Level>,
    /// Its part of the decays; `None` where it is not rated.
    pub fraction: Option<f64>,
}

/// What follows from the rate of a line.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Strengths {
    /// Absorption oscillator strength.
    pub oscillator_strength: f64,
    /// Peak cross-section of atoms at rest, cm².
    pub natural_cross_section_cm2: Option<f64>,
    /// Peak cross-section of the gas, cm².
    pub doppler_cross_section_cm2: f64,
}

/// One transition that a laser reaches.
#[derive(Clone, Debug)]
pub struct Transition {
    /// Whose, in the list of atoms.
    pub atom: usize,
    /// The line.
    pub line: Line,
    /// The lasers that reach it.
    pub lasers: Vec<usize>,
    /// Position in the medium asked for.
    pub placed: Placed,
    /// Wavelength in air, nm, where the index of air is known.
    pub air_nm: Option<f64>,
    /// How the upper level decays.
    pub decays: Arc<Decays>,
    /// Part of the decays that leads back to the start.
    pub branching_fraction: Option<f64>,
    /// Whether it cycles.
    pub cycling: Cycling,
    /// Where else the upper level goes.
    pub leaks: Vec<Leak>,
    /// Natural width (FWHM), MHz; a lower bound where decays are not rated.
    pub natural_width_mhz: Option<f64>,
    /// Doppler width (FWHM), MHz.
    pub doppler_width_mhz: f64,
    /// What follows from the rate, where it and the weights are held.
    pub strengths: Option<Strengths>,
    /// Two-level saturation intensity, mW/cm².
    pub saturation_mw_per_cm2: Option<f64>,
    /// Velocity that one photon gives, cm/s.
    pub recoil_cm_per_s: f64,
    /// Fraction of the atoms in the lower level; `None` for a metastable level that the
    /// temperature does not fill.
    pub lower_population: Option<f64>,
    /// Part of the atoms of its element that this isotope is; 1 where it was asked for by name.
    pub isotope_fraction: Option<f64>,
    /// What the cell absorbs of weak narrow light.
    pub absorbed: Option<Absorbed>,
    /// What lasers with a linewidth of their own see of it.
    pub seen: Vec<Seen>,
    /// Hyperfine components; empty where not asked for or not known.
    pub components: Vec<Component>,
    /// Why there are no components, where they were asked for.
    pub no_components: Option<&'static str>,
    /// Absorption of other elements close by.
    pub neighbours: Vec<Neighbour>,
}

impl Transition {
    /// Frequency, THz.
    pub fn frequency_thz(&self) -> f64 {
        self.line.wavenumber_per_cm * MHZ_PER_CM * 1e-6
    }

    /// 1 σ of the frequency, MHz.
    pub fn frequency_uncertainty_mhz(&self) -> f64 {
        self.line.wavenumber_uncertainty_per_cm * MHZ_PER_CM
    }

    /// Cross-section of the gas times the part of the element's atoms in the lower level (all of
    /// the isotope's for a metastable one): how much of the light a gas of this species takes.
    pub fn weight(&self) -> f64 {
        let population =
            self.lower_population.unwrap_or(1.0) * self.isotope_fraction.unwrap_or(0.0);
        self.strengths
            .map_or(0.0, |s| s.doppler_cross_section_cm2 * population)
    }
}

/// The answer.
#[derive(Clone, Debug, Default)]
pub struct Answer {
    /// Transitions by wavenumber, from low to high.
    pub transitions: Vec<Transition>,
    /// Two-photon transitions by wavenumber.
    pub two_photon: Vec<TwoPhoton>,
    /// Species (by place in the list) whose populations rest on too few levels.
    pub lower_bounds: Vec<usize>,
}

impl Answer {
    /// Vacuum wavenumber (cm⁻¹) of the laser for each transition, and its name: species and
    /// wavelength in nm in the medium asked for.
    pub fn positions(&self, atoms: &[Atom]) -> Vec<(f64, String)> {
        let name = |atom: usize, placed: &Placed| {
            let medium = match placed.medium {
                PositionMedium::Air => "air",
                PositionMedium::Vacuum => "vacuum",
            };
            let species = atoms[atom].spectrum.species;
            format!("{species} {:.3} nm ({medium})", placed.wavelength_nm)
        };
        let one = self.transitions.iter();
        let one = one.map(|t| (t.line.wavenumber_per_cm, name(t.atom, &t.placed)));
        let two = self.two_photon.iter();
        let two = two.map(|t| (t.photon_per_cm.0, name(t.atom, &t.placed)));
        one.chain(two).collect()
    }
}

/// Answers the question from the atoms that may be there.
///
/// # Errors
/// A temperature or mass that gives no populations or widths; air beyond its bounds.
pub fn answer(question: &Question, atoms: &[Atom]) -> Result<Answer, LaserError> {
    let populated = atoms
        .iter()
        .map(|a| Populated::new(&a.spectrum, question.temperature_k, question.metastable))
        .collect::<Result<Vec<_>, _>>()?;
    let mut answer = Answer::default();
    if question.two_photons {
        answer.two_photon = two_photon::answer(question, atoms, &populated)?;
    } else {
        let mut bench = Bench {
            question,
            atoms,
            populated: &populated,
            book: DecayBook::new(atoms),
            air: Air::standard(),
        };
        for atom in (0..atoms.len()).filter(|&a| atoms[a].listed) {
            bench.transitions(atom, &mut answer.transitions)?;
        }
        answer.transitions.sort_by(|a, b| {
            a.line
                .wavenumber_per_cm
                .total_cmp(&b.line.wavenumber_per_cm)
        });
        neighbour::find(&mut answer.transitions, atoms, &populated);
    }
    answer.lower_bounds = (0..atoms.len())
        .filter(|&a| populated[a].lower_bound && answer.transitions.iter().any(|t| t.atom == a))
        .collect();
    Ok(answer)
}

/// Names the species of an error of the profiles.
fn in_species(atom: &Atom) -> impl Fn(ShapeError) -> LaserError + use<> {
    let species = atom.spectrum.species;
    move |cause| super::AdviseError::Shape { species, cause }.into()
}

/// Lasers that reach a wavenumber (cm⁻¹).
fn reaching(lasers: &[Laser], wavenumber_per_cm: f64) -> Vec<usize> {
    let reaches = |at: &usize| lasers[*at].range.contains_per_cm(wavenumber_per_cm);
    (0..lasers.len()).filter(reaches).collect()
}

struct Bench<'a> {
    question: &'a Question,
    atoms: &'a [Atom],
    populated: &'a [Populated],
    book: DecayBook<'a>,
    air: &'a Air,
}

impl Bench<'_> {
    fn transitions(&mut self, atom: usize, into: &mut Vec<Transition>) -> Result<(), LaserError> {
        let atoms = self.atoms;
        for line in &atoms[atom].spectrum.lines {
            let (Some(lower), Some(upper)) = (&line.lower, &line.upper) else {
                continue;
            };
            let lasers = reaching(&self.question.lasers, line.wavenumber_per_cm);
            if lasers.is_empty()
                || !self.populated[atom].holds(lower.number)
                || self.replaced(atom, lower, upper)
            {
                continue;
            }
            into.push(self.transition(atom, line, (lower, upper), lasers)?);
        }
        Ok(())
    }

    /// Whether a listed isotope holds this transition of the mixture better.
    fn replaced(&self, mixture: usize, lower: &Level, upper: &Level) -> bool {
        let same = |l: &Line| match (&l.lower, &l.upper) {
            (Some(low), Some(up)) => same_level(low, lower) && same_level(up, upper),
            _ => false,
        };
        self.atoms
            .iter()
            .filter(|a| a.mixture == Some(mixture) && a.replaces_mixture)
            .any(|a| a.spectrum.lines.iter().any(same))
    }

    fn transition(
        &mut self,
        atom: usize,
        line: &Line,
        (lower, upper): (&Arc<Level>, &Arc<Level>),
        lasers: Vec<usize>,
    ) -> Result<Transition, LaserError> {
        let question = self.question;
        let mass_u = self.atoms[atom].spectrum.mass_u;
        let vacuum_nm = 1e7 / line.wavenumber_per_cm;
        let placed = placed(
            line.wavenumber_per_cm,
            line.wavenumber_uncertainty_per_cm,
            question.medium,
            self.air,
        )
        .map_err(super::AdviseError::from)?;
        let decays = self.book.of(atom, upper);
        let cycling = self.book.cycling(atom, lower, upper);
        let lower_rate = self.book.of(atom, lower).total_per_s().unwrap_or(0.0);
        let total = decays.total_per_s().or(line.rate_per_s);
        let natural_hz = total.map(|upper_rate| (upper_rate + lower_rate) / std::f64::consts::TAU);
        let failed = in_species(&self.atoms[atom]);
        let dipole = dipole(line, lower, upper);
        let strengths = dipole
            .map(|dipole| seen::strengths(question, &dipole, natural_hz, mass_u))
            .transpose()
            .map_err(&failed)?;
        let thermal = self.populated[atom].thermally(lower.number);
        let lower_population = self.populated[atom]
            .fraction(lower.number)
            .filter(|_| thermal);
        let (components, no_components) = self.components(atom, lower, upper);
        let absorbers = self.absorbers(atom, lower_population);
        let saturation = total.map(|t| strength::saturation_mw_per_cm2(vacuum_nm, t));
        let narrow = Narrow {
            dipole,
            natural_hz,
            saturation_mw_per_cm2: saturation,
            mass_u,
            absorbers_per_cm3: absorbers,
            components: components.iter().map(|c| (c.share, c.offset_mhz)).collect(),
        };
        Ok(Transition {
            atom,
            seen: seen::seen(question, &lasers, &narrow).map_err(&failed)?,
            lasers,
            placed,
            air_nm: self.air.index(vacuum_nm).ok().map(|n| vacuum_nm / n.index),
            branching_fraction: self.branching(atom, line, (lower, upper), total),
            leaks: leaks(&decays, (lower, upper), total),
            cycling,
            natural_width_mhz: natural_hz.map(|hz| hz * 1e-6),
            doppler_width_mhz: strength::doppler_width_mhz(
                vacuum_nm,
                question.temperature_k,
                mass_u,
            )
            .map_err(&failed)?,
            saturation_mw_per_cm2: saturation,
            recoil_cm_per_s: strength::recoil_cm_per_s(vacuum_nm, mass_u),
            isotope_fraction: self.part(atom),
            absorbed: seen::absorbed(question, &narrow, natural_hz).map_err(&failed)?,
            strengths,
            lower_population,
            components,
            no_components,
            neighbours: Vec::new(),
            decays,
            line: line.clone(),
        })
    }

    fn branching(
        &self,
        atom: usize,
        line: &Line,
        (lower, upper): (&Level, &Level),
        total: Option<f64>,
    ) -> Option<f64> {
        let published = self.atoms[atom]
            .branching
            .get(&(lower.number, upper.number));
        published
            .map(|b| b.0)
            .or_else(|| Some((line.rate_per_s? / total?).min(1.0)))
    }

    /// Part of the atoms of its element that an isotope is; 1 where it was asked for by name.
    fn part(&self, atom: usize) -> Option<f64> {
        let atom = &self.atoms[atom];
        if atom.replaces_mixture {
            atom.abundance
        } else {
            Some(1.0)
        }
    }

    /// Atoms of the cell in the lower level, cm⁻³.
    fn absorbers(&self, atom: usize, population: Option<f64>) -> Option<f64> {
        Some(self.question.density_per_cm3? * self.part(atom)? * population?)
    }

    fn components(
        &self,
        atom: usize,
        lower: &Level,
        upper: &Level,
    ) -> (Vec<Component>, Option<&'static str>) {
        if !self.question.hyperfine {
            return (Vec::new(), None);
        }
        match components(&self.atoms[atom], lower, upper) {
            Ok(components) => (components, None),
            Err(why) => (Vec::new(), Some(why)),
        }
    }
}

/// What the strengths of a line are made from, where its rate and weights are held.
fn dipole(line: &Line, lower: &Level, upper: &Level) -> Option<Dipole> {
    Some(Dipole {
        vacuum_nm: 1e7 / line.wavenumber_per_cm,
        rate_per_s: line.rate_per_s?,
        lower_weight: lower.g?,
        upper_weight: upper.g?,
    })
}

/// Hyperfine components of a line of one isotope, or why they are not known.
fn components(atom: &Atom, lower: &Level, upper: &Level) -> Result<Vec<Component>, &'static str> {
    let Some(mass) = atom.spectrum.species.isotope else {
        return Err("the natural mixture; no frequencies of its single isotopes are held");
    };
    let even = |n: u16| n.is_multiple_of(2);
    if even(mass) && even(u16::from(atom.spectrum.species.atomic_number)) {
        return Err("an even–even nucleus has no spin: a single component");
    }
    let (Some(lower_j), Some(upper_j)) = (lower.j, upper.j) else {
        return Err("J is not known");
    };
    let spin = atom.hyperfine.values().next().map(|c| c.nuclear_spin);
    let of = |level: &Level, j: vocabulary::atom::HalfInteger| {
        // A level with J = 0 has no splitting.
        let unsplit = |nuclear_spin| Constants {
            nuclear_spin,
            a_mhz: (0.0, 0.0),
            b_mhz: (0.0, 0.0),
        };
        let held = atom.hyperfine.get(&level.number).copied();
        held.or_else(|| spin.filter(|_| j.twice() == 0).map(unsplit))
    };
    match (of(lower, lower_j), of(upper, upper_j)) {
        (Some(low), Some(up)) => Ok(hyperfine::components((lower_j, &low), (upper_j, &up))),
        _ => Err("hyperfine constants are not held for both levels"),
    }
}

/// Where else a level goes, the largest part first; those not rated last, the likeliest first:
/// same multiplicity, then the largest energy.
fn leaks(decays: &Decays, (start, upper): (&Level, &Level), total: Option<f64>) -> Vec<Leak> {
    let mut leaks: Vec<Leak> = decays
        .decays
        .iter()
        .filter(|d| !same_level(&d.lower, start))
        .map(|d| Leak {
            level: Arc::clone(&d.lower),
            fraction: d.rate_per_s.zip(total).map(|(rate, total)| rate / total),
        })
        .collect();
    let changes_spin = |l: &Leak| multiplicity(&l.level) != multiplicity(upper);
    leaks.sort_by(|a, b| {
        let rated = |l: &Leak| l.fraction.unwrap_or(-1.0);
        rated(b)
            .total_cmp(&rated(a))
            .then(changes_spin(a).cmp(&changes_spin(b)))
            .then(a.level.energy_per_cm.total_cmp(&b.level.energy_per_cm))
    });
    leaks
}

/// The figure in front of an LS term.
fn multiplicity(level: &Level) -> Option<char> {
    let term = crate::calc::series::label::bare_term(level.term.as_deref()?);
    term.chars().next().filter(char::is_ascii_digit)
}
