//! Features of a wide span, each judged where the sources' claims are the same throughout.

use vocabulary::atom::Species;
use vocabulary::light::{Medium, SpectralRange, SpectralWidth};

use super::OWN_LIGHT_ALLOWED;
use crate::advise::emission::{Conditions, Emitter, emitters};
use crate::advise::error::AdviseError;
use crate::advise::scene::REACH_WIDTHS;
use crate::advise::spectrum::Spectrum;
use crate::advise::window::{self, Unjudged, WindowFeature};
use vocabulary::spectrum::Line;

/// A judged feature with its lines.
#[derive(Clone, Debug)]
pub struct Surveyed {
    /// The feature and its verdict.
    pub feature: WindowFeature,
    /// Its lines, by wavelength.
    pub lines: Vec<Line>,
    /// Relative light, one unit for the whole span; `None` where none of its lines is rated.
    pub light: Option<f64>,
    /// Distance, in nm, of a line of its own species of which no rate is known, and which by the
    /// prior's median puts more than [`OWN_LIGHT_ALLOWED`] of the feature's light there.
    pub unrated_neighbour_nm: Option<f64>,
}

/// What a span holds.
#[derive(Clone, Debug, Default)]
pub struct Survey {
    /// All features, by wavelength.
    pub features: Vec<Surveyed>,
    /// Species that cannot be judged in some part of it.
    pub unjudged: Vec<Unjudged>,
}

/// Judges all features of a span. The span is cut where a source's claimed band begins or ends, so
/// that each piece is judged by the claims that hold there.
///
/// # Errors
/// As [`window::answer`].
pub fn survey(
    spectra: &[Spectrum],
    conditions: &Conditions,
    width: SpectralWidth,
    range: &SpectralRange,
    medium: Medium,
    not_held: &[String],
) -> Result<Survey, AdviseError> {
    let emitters = emitters(spectra, conditions)?;
    let mut out: Vec<Surveyed> = Vec::new();
    let mut unjudged: Vec<Unjudged> = Vec::new();
    for piece in pieces(spectra, range) {
        let margin_nm = REACH_WIDTHS * width.at_nm(piece.vacuum_high_nm);
        let near = near(spectra, &piece, margin_nm);
        let question = window::Question {
            range: piece.clone(),
            medium,
            width,
            conditions: conditions.clone(),
            not_held: not_held.to_vec(),
        };
        let answer = window::answer(&question, &near)?;
        let unrated = unrated(&answer, spectra, &emitters);
        for one in &answer.unrated {
            // Of several reasons along the span the first is said, unless a later one decides more.
            let said = |u: &Unjudged| u.species == one.species && u.decides >= one.decides;
            if !unjudged.iter().any(said) {
                unjudged.push(one.clone());
            }
        }
        for (index, feature) in answer.features.into_iter().enumerate() {
            // A feature across a cut belongs to the piece that holds its centre.
            if !piece.contains_per_cm(1e7 / feature.placed.vacuum_nm) {
                continue;
            }
            let lines: Vec<Line> = feature
                .components
                .iter()
                .map(|&c| answer.lines[c].line.clone())
                .collect();
            let emitter = spectra
                .iter()
                .position(|s| s.species == feature.species)
                .map(|i| &emitters[i]);
            let rated: Vec<f64> = lines
                .iter()
                .filter_map(|l| emitter.and_then(|e| e.light(l)))
                .collect();
            let light: Option<f64> = (!rated.is_empty()).then(|| rated.iter().sum());
            let width_nm = width.at_nm(feature.placed.vacuum_nm);
            out.push(Surveyed {
                unrated_neighbour_nm: light
                    .and_then(|own| neighbour(&unrated, index, &feature, own, width_nm)),
                feature,
                lines,
                light,
            });
        }
    }
    out.sort_by(|a, b| {
        a.feature
            .placed
            .vacuum_nm
            .total_cmp(&b.feature.placed.vacuum_nm)
    });
    Ok(Survey {
        features: out,
        unjudged,
    })
}

/// A line without a rate: whose, where (vacuum nm), of which feature, its light by the prior's median.
struct Unrated {
    species: Species,
    nm: f64,
    feature: usize,
    light: f64,
}

fn unrated(answer: &window::Answer, spectra: &[Spectrum], emitters: &[Emitter]) -> Vec<Unrated> {
    let read = |line: &window::WindowLine| {
        let rate = line.prior.filter(|_| line.line.rate_per_s.is_none())?;
        let index = spectra
            .iter()
            .position(|s| s.species == line.line.species)?;
        Some(Unrated {
            species: line.line.species,
            nm: 1e7 / line.line.wavenumber_per_cm,
            feature: line.feature,
            light: emitters[index].light_at_rate(&line.line, rate.median_rate_per_s())?,
        })
    };
    answer.lines.iter().filter_map(read).collect()
}

/// The nearest unrated line of its species that may spoil a feature, seen with a Gaussian instrument.
fn neighbour(
    unrated: &[Unrated],
    index: usize,
    feature: &WindowFeature,
    own: f64,
    width_nm: f64,
) -> Option<f64> {
    let off = |u: &Unrated| (u.nm - feature.placed.vacuum_nm).abs();
    let spoils = |u: &&Unrated| {
        let overlap = (-4.0 * std::f64::consts::LN_2 * (off(u) / width_nm).powi(2)).exp();
        u.species == feature.species
            && u.feature != index
            && u.light * overlap >= OWN_LIGHT_ALLOWED * own
    };
    unrated
        .iter()
        .filter(spoils)
        .map(off)
        .min_by(f64::total_cmp)
}

/// The span, cut at the ends of claimed bands.
fn pieces(spectra: &[Spectrum], range: &SpectralRange) -> Vec<SpectralRange> {
    let mut cuts: Vec<f64> = spectra
        .iter()
        .flat_map(|s| &s.scopes)
        .flat_map(|scope| [scope.from_nm, scope.to_nm])
        .filter(|nm| (range.vacuum_low_nm..range.vacuum_high_nm).contains(nm))
        .map(|nm| 1e7 / nm)
        .collect();
    cuts.push(range.wavenumber_low_per_cm);
    cuts.push(range.wavenumber_high_per_cm);
    cuts.sort_by(f64::total_cmp);
    cuts.windows(2)
        .filter_map(|ends| SpectralRange::from_wavenumbers_per_cm(ends[0], ends[1]))
        .collect()
}

/// The spectra with only the lines that can matter in a piece.
fn near(spectra: &[Spectrum], piece: &SpectralRange, margin_nm: f64) -> Vec<Spectrum> {
    let from = 1e7 / (piece.vacuum_high_nm + margin_nm);
    let to = 1e7 / (piece.vacuum_low_nm - margin_nm).max(f64::MIN_POSITIVE);
    let cut = |s: &Spectrum| {
        let first = s.lines.partition_point(|l| l.wavenumber_per_cm < from);
        let last = s.lines.partition_point(|l| l.wavenumber_per_cm <= to);
        Spectrum {
            lines: s.lines[first..last.max(first)].to_vec(),
            species: s.species,
            amount: s.amount,
            named: s.named,
            levels: s.levels.clone(),
            strengths: s.strengths.clone(),
            limit_per_cm: s.limit_per_cm,
            mass_u: s.mass_u,
            scopes: s.scopes.clone(),
        }
    };
    spectra.iter().map(cut).collect()
}
