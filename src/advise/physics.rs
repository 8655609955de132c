//! What an answer rests on beside its lines: the model of the light and what it had to leave out.

use vocabulary::atom::Species;

use super::emission::EmissionModel;
use super::scene::Scene;
use crate::calc::shape::WidthMethod;

/// What the answer rests on.
#[derive(Clone, Debug, PartialEq)]
pub struct Physics {
    /// How species compare.
    pub model: EmissionModel,
    /// Form of the instrument's response, in a word.
    pub instrument: &'static str,
    /// Pressure widths of the lines that play a part, by method.
    pub widths: Vec<WidthUse>,
    /// Species with lines whose pressure width cannot be given.
    pub widthless: Vec<Species>,
    /// Species whose ionisation balance lacks dielectronic recombination.
    pub lacks_dielectronic: Vec<Species>,
    /// Species with lines that only cascades excite.
    pub by_cascades: Vec<Species>,
    /// Species with lines that nothing in the model excites.
    pub unfed: Vec<Species>,
}

/// How pressure widths of one kind were obtained.
#[derive(Clone, Debug, PartialEq)]
pub struct WidthUse {
    /// The method.
    pub method: WidthMethod,
    /// Of which species.
    pub species: Vec<Species>,
    /// Largest of them (FWHM), nm.
    pub widest_nm: f64,
    /// 1 σ as a factor, the largest.
    pub factor: f64,
    /// All conditions lie where the method holds.
    pub inside_validity: bool,
}

impl Physics {
    /// Of the lines (indices into the scene) that play a part in an answer.
    pub(super) fn of(
        scene: &Scene<'_>,
        model: EmissionModel,
        lines: impl Iterator<Item = usize>,
    ) -> Self {
        let mut out = Self {
            model,
            instrument: scene.form.word(),
            widths: Vec::new(),
            widthless: Vec::new(),
            lacks_dielectronic: Vec::new(),
            by_cascades: Vec::new(),
            unfed: Vec::new(),
        };
        for index in lines {
            let emission = &scene.emissions[index];
            let spectrum = &scene.spectra[emission.spectrum];
            let emitter = &scene.emitters[emission.spectrum];
            // What no table lists and nobody rates plays its part through the prior alone.
            if emitter.is_absent || emission.line.is_unlisted_and_unrated() {
                continue;
            }
            for width in emission.pressure.parts() {
                out.add_width(spectrum.species, width);
            }
            let mut note = |list: fn(&mut Self) -> &mut Vec<Species>, holds: bool| {
                let list = list(&mut out);
                if holds && !list.contains(&spectrum.species) {
                    list.push(spectrum.species);
                }
            };
            note(|p| &mut p.widthless, emission.pressure.is_missing);
            note(|p| &mut p.lacks_dielectronic, emitter.lacks_dielectronic);
            note(
                |p| &mut p.by_cascades,
                emitter.is_fed_by_cascades(emission.line),
            );
            note(|p| &mut p.unfed, emitter.is_unfed(emission.line));
        }
        out
    }

    fn add_width(&mut self, species: Species, width: crate::calc::shape::PressureWidth) {
        let same = |w: &&mut WidthUse| w.method == width.method;
        let known = match self.widths.iter_mut().find(same) {
            Some(known) => known,
            None => {
                self.widths.push(WidthUse {
                    method: width.method,
                    species: Vec::new(),
                    widest_nm: 0.0,
                    factor: 1.0,
                    inside_validity: true,
                });
                let last = self.widths.len() - 1;
                &mut self.widths[last]
            }
        };
        if !known.species.contains(&species) {
            known.species.push(species);
        }
        known.widest_nm = known.widest_nm.max(width.fwhm_nm);
        known.factor = known.factor.max(width.uncertainty_factor);
        known.inside_validity &= width.inside_validity;
    }
}
