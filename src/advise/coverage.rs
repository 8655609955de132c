//! Whether lines that are not listed could spoil a verdict: the scope of the sources.

use vocabulary::spectrum::{Completeness, Scope};

use super::emission::Emitter;
use super::spectrum::Spectrum;

/// Unlisted lines are taken to be this many times as frequent as listed ones.
pub const UNLISTED_PER_LISTED: f64 = 3.0;
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
    },
    /// Lines are complete down to a light of `limit`; above it the band holds `per_nm` lines.
    DownTo {
        /// The claim: a part of the strongest line in the band.
        fraction: f64,
        /// Light of the weakest line that must be listed.
        limit: f64,
        /// Listed lines per nm in the band.
        per_nm: f64,
    },
}

impl Coverage {
    /// The best claim that holds at a vacuum wavelength (nm).
    pub fn at(spectrum: &Spectrum, emitter: &Emitter, nm: f64) -> Self {
        let here = |s: &&Scope| (s.from_nm..=s.to_nm).contains(&nm);
        let best = spectrum.scopes.iter().filter(here).max_by(|a, b| {
            (a.completeness.cmp(&b.completeness))
                .then((b.to_nm - b.from_nm).total_cmp(&(a.to_nm - a.from_nm)))
        });
        let Some(scope) = best else {
            return Self::Nothing { ground_term: false };
        };
        match scope.completeness.limit() {
            None => Self::Nothing {
                ground_term: scope.completeness == Completeness::GroundTerm,
            },
            Some(fraction) => Self::DownTo {
                fraction,
                limit: fraction * emitter.strongest(spectrum, scope.from_nm, scope.to_nm),
                per_nm: density(spectrum, scope),
            },
        }
    }

    /// Expected number of unlisted lines within `width_nm` that could matter beside a target of
    /// this light; `None` where nothing is known.
    pub fn expected_unlisted(&self, target_light: f64, width_nm: f64) -> Option<f64> {
        match *self {
            Self::Nothing { .. } => None,
            Self::DownTo { limit, .. } if limit < NEGLIGIBLE * target_light => Some(0.0),
            Self::DownTo { per_nm, .. } => Some(UNLISTED_PER_LISTED * per_nm * width_nm),
        }
    }
}

/// Lines that the calculator added say nothing about how many a table leaves out; they count only
/// where the claim is the calculator's own.
fn density(spectrum: &Spectrum, scope: &Scope) -> f64 {
    let of_calculator = scope.source.starts_with("computed-");
    let inside = spectrum
        .strengths
        .iter()
        .filter(|s| of_calculator || !s.computed)
        .filter(|s| (scope.from_nm..=scope.to_nm).contains(&(1e7 / s.wavenumber_per_cm)))
        .count();
    inside as f64 / (scope.to_nm - scope.from_nm)
}
