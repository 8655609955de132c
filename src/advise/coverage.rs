//! Whether lines that are not listed could spoil a verdict: the scope of the sources.

use std::ops::RangeInclusive;

use vocabulary::atom::Species;
use vocabulary::spectrum::Completeness;

use super::emission::Emitter;
use super::ledger::best_claim;
use super::spectrum::Spectrum;
use crate::calc::prior::AtomClass;

/// Lines that a list leaves out, for each that it holds nearby, in spectra of an open d or f shell.
///
/// An assumption, with two measures beside it (`tests/published_values/pairs.rs`): of lines that
/// published methods and papers name as interferers, a good third is not held in such spectra, 0.7
/// for each that is held, against 0.1 in other spectra; and the number of lines of a complex
/// spectrum grows by √10 per decade of weakness (Learner 1982, J. Phys. B 15, L891), so that lines
/// somewhat weaker than those named are about four times as many.
pub const UNLISTED_IN_COMPLEX: f64 = 3.0;
/// The same in other spectra.
pub const UNLISTED_IN_SIMPLE: f64 = 1.0;
/// Lines are counted this far around a place, as a fraction of its wavelength.
pub const NEIGHBOURHOOD: f64 = 0.1;
/// Chance of an unlisted interferer below which nothing need be said.
pub const CHANCE_SAID: f64 = 0.05;
/// Chance beyond which no verdict is given.
pub const CHANCE_UNRATED: f64 = 0.30;
/// A line this weak against the target cannot change a verdict of `clear`.
const NEGLIGIBLE: f64 = 0.01;

/// What is known of one species at one place, for all targets there.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Coverage {
    /// No source claims anything here, or only lines from the ground term.
    Nothing {
        /// Ground-term lines are held here.
        ground_term: bool,
        /// Unlisted lines per nm, were it listed like a species that is covered.
        unlisted_per_nm: f64,
    },
    /// Lines are complete down to a light of `limit`.
    DownTo {
        /// The claim: a part of the strongest line in the band.
        fraction: f64,
        /// Light of the weakest line that must be listed.
        limit: f64,
        /// Unlisted lines per nm that are taken to lie around here.
        unlisted_per_nm: f64,
    },
}

impl Coverage {
    /// The best claim that holds at a vacuum wavelength (nm).
    pub fn at(spectrum: &Spectrum, emitter: &Emitter, nm: f64) -> Self {
        let around = (1.0 - NEIGHBOURHOOD) * nm..=(1.0 + NEIGHBOURHOOD) * nm;
        let nothing = |ground_term| Self::Nothing {
            ground_term,
            unlisted_per_nm: unlisted(spectrum, around.clone(), false),
        };
        let best = best_claim(&spectrum.scopes, nm);
        let Some(scope) = best else {
            return nothing(false);
        };
        let Some(fraction) = scope.completeness.limit() else {
            return nothing(scope.completeness == Completeness::GroundTerm);
        };
        // Lines that the calculator added say nothing about how many a table leaves out; they count
        // only where the claim is the calculator's own.
        let computed = scope.source.starts_with("computed-");
        let near = around.start().max(scope.from_nm)..=around.end().min(scope.to_nm);
        Self::DownTo {
            fraction,
            limit: fraction * emitter.strongest(spectrum, scope.from_nm, scope.to_nm),
            // Of a computed series none is missing.
            unlisted_per_nm: match scope.completeness {
                Completeness::Computed => 0.0,
                _ => unlisted(spectrum, near, computed),
            },
        }
    }

    /// Whether a source claims more than lines from the ground term.
    pub const fn is_known(&self) -> bool {
        matches!(self, Self::DownTo { .. })
    }

    /// Unlisted lines per nm that are taken to lie around the place.
    pub const fn unlisted_per_nm(&self) -> f64 {
        match *self {
            Self::Nothing {
                unlisted_per_nm, ..
            }
            | Self::DownTo {
                unlisted_per_nm, ..
            } => unlisted_per_nm,
        }
    }

    /// Expected number of unlisted lines within `width_nm` that could matter beside a target of
    /// this light; `None` where nothing is known.
    pub fn expected_unlisted(&self, target_light: f64, width_nm: f64) -> Option<f64> {
        match *self {
            Self::Nothing { .. } => None,
            Self::DownTo { limit, .. } if limit < NEGLIGIBLE * target_light => Some(0.0),
            Self::DownTo {
                unlisted_per_nm, ..
            } => Some(unlisted_per_nm * width_nm),
        }
    }
}

/// Unlisted lines that are taken to lie near each listed one.
pub fn unlisted_per_listed(species: Species) -> f64 {
    match AtomClass::of(species) {
        AtomClass::OpenD | AtomClass::OpenF => UNLISTED_IN_COMPLEX,
        AtomClass::Few | AtomClass::OpenP => UNLISTED_IN_SIMPLE,
    }
}

/// Unlisted lines per nm, from the listed ones of a neighbourhood.
fn unlisted(spectrum: &Spectrum, around_nm: RangeInclusive<f64>, with_computed: bool) -> f64 {
    let per_listed = unlisted_per_listed(spectrum.species);
    let listed = spectrum
        .strengths
        .iter()
        .filter(|s| with_computed || !s.computed)
        .filter(|s| around_nm.contains(&(1e7 / s.wavenumber_per_cm)))
        .count();
    per_listed * listed as f64 / (around_nm.end() - around_nm.start()).max(f64::MIN_POSITIVE)
}
