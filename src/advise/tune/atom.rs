//! An atom on the laser bench: its spectrum, and what papers say of single levels.

use std::collections::BTreeMap;

use vocabulary::atom::HalfInteger;
use vocabulary::spectrum::{Completeness, Level};

use crate::advise::Spectrum;
use crate::advise::hyperfine::Constants;

/// A measured lifetime.
#[derive(Clone, Debug, PartialEq)]
pub struct Lifetime {
    /// Lifetime, ns.
    pub lifetime_ns: f64,
    /// 1 σ, ns.
    pub uncertainty_ns: f64,
    /// The paper.
    pub paper: String,
}

/// One species, with what papers say of its levels (by their number).
#[derive(Clone, Debug)]
pub struct Atom {
    /// Levels, lines in the range asked for, strengths of all lines.
    pub spectrum: Spectrum,
    /// Its transitions are asked for; else it only helps an isotope or is a neighbour.
    pub listed: bool,
    /// For an isotope: where the natural mixture of the same element stands in the list.
    pub mixture: Option<usize>,
    /// The rows of this isotope take the place of those of the mixture.
    pub replaces_mixture: bool,
    /// Share of the isotope in the natural mixture, a fraction of 1; 1 for the mixture.
    pub abundance: Option<f64>,
    /// Lifetimes.
    pub lifetimes: BTreeMap<u32, Lifetime>,
    /// Branching fraction and its 1 σ, by lower and upper level.
    pub branching: BTreeMap<(u32, u32), (f64, f64)>,
    /// Hyperfine constants.
    pub hyperfine: BTreeMap<u32, Constants>,
}

impl Atom {
    /// An atom of which nothing is known but its spectrum.
    pub fn new(spectrum: Spectrum) -> Self {
        Self {
            abundance: match spectrum.species.isotope {
                None => Some(1.0),
                Some(mass) => vocabulary::atom::isotope(spectrum.species.atomic_number, mass)
                    .and_then(|i| i.abundance),
            },
            spectrum,
            listed: true,
            mixture: None,
            replaces_mixture: false,
            lifetimes: BTreeMap::new(),
            branching: BTreeMap::new(),
            hyperfine: BTreeMap::new(),
        }
    }

    /// Whether a source claims more of the species than lines from its ground term.
    pub fn lists_excited_states(&self) -> bool {
        let scopes = &self.spectrum.scopes;
        scopes
            .iter()
            .any(|s| s.completeness != Completeness::GroundTerm)
    }

    /// The level that a table names, where exactly one fits.
    pub fn level_named(&self, configuration: &str, term: &str, j: HalfInteger) -> Option<u32> {
        let levels = &self.spectrum.levels;
        let mut fitting = levels
            .iter()
            .filter(|l| is_named(l, configuration, term, j));
        let first = fitting.next()?;
        fitting.next().is_none().then_some(first.number)
    }
}

/// Whether a level bears a name: J and term agree, and its configuration ends with the one named
/// (closed inner shells may stand before it).
pub fn is_named(level: &Level, configuration: &str, term: &str, j: HalfInteger) -> bool {
    let label = (
        level.configuration.as_deref(),
        level.term.as_deref(),
        level.j,
    );
    bears_name(label, configuration, term, j)
}

/// The same of configuration, term and J.
pub fn bears_name(
    label: (Option<&str>, Option<&str>, Option<HalfInteger>),
    configuration: &str,
    term: &str,
    j: HalfInteger,
) -> bool {
    label.2 == Some(j)
        && label.1.is_some_and(|t| bare(t) == bare(term))
        && label.0.is_some_and(|c| ends_with(c, configuration))
}

/// Whether two levels of an element in two isotopes are the same.
pub fn same_level(one: &Level, other: &Level) -> bool {
    let names = |one: &Level, other: &Level| match (&one.configuration, &one.term, one.j) {
        (Some(configuration), Some(term), Some(j)) => is_named(other, configuration, term, j),
        _ => false,
    };
    let named = names(one, other) || names(other, one);
    // Isotope shifts of the levels held here stay below 1 cm⁻¹, but for hydrogen.
    named || (one.j == other.j && (one.energy_per_cm - other.energy_per_cm).abs() < 0.3)
}

fn bare(term: &str) -> &str {
    crate::calc::series::label::bare_term(term)
}

/// Whether the last shells of a configuration are those named; parent terms do not count.
fn ends_with(configuration: &str, named: &str) -> bool {
    let shells = |text: &str| -> Vec<String> {
        let whole = text.split_whitespace().filter(|t| !t.starts_with('('));
        whole.map(str::to_owned).collect()
    };
    let (all, last) = (shells(configuration), shells(named));
    !last.is_empty() && all.ends_with(&last)
}
