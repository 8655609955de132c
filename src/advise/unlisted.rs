//! What is known of each species around a place, and the chance that an unlisted line interferes.

use std::cell::RefCell;
use std::collections::HashMap;
use std::rc::Rc;

use vocabulary::atom::Species;

use super::coverage::{CHANCE_SAID, CHANCE_UNRATED, Coverage};
use super::scene::Scene;
use super::spectrum::Spectrum;
use super::verdict::VerdictRange;
use super::window::WindowFeature;

/// Features this near to the centre (as a fraction of it) share its coverage; others share that of a
/// place twice as far apart from the next.
const SHARED: f64 = 0.01;

/// Neutral atoms and first ions: a source that shows the one may well show the other.
const ARC_STAGES: std::ops::RangeInclusive<u8> = 1..=2;

/// Species whose unlisted lines are this likely against those of the first are named beside it.
const LIKELY: f64 = 1.0 / 3.0;
/// How many species are named.
const NAMED: usize = 3;

/// What is known of each species, species by species as in the scene.
pub(super) struct Knowledge<'a, 's> {
    scene: &'a Scene<'s>,
    centre_nm: f64,
    at_centre: Rc<[Coverage]>,
    /// What is known at other places, by their number.
    elsewhere: RefCell<HashMap<i64, Rc<[Coverage]>>>,
}

impl<'a, 's> Knowledge<'a, 's> {
    /// `centre_nm` is a vacuum wavelength.
    pub fn new(scene: &'a Scene<'s>, centre_nm: f64) -> Self {
        Self {
            scene,
            centre_nm,
            at_centre: coverage(scene, centre_nm),
            elsewhere: RefCell::default(),
        }
    }

    /// What is known at the centre.
    pub fn at_centre(&self) -> &[Coverage] {
        &self.at_centre
    }

    /// What is known around a place.
    pub fn at(&self, nm: f64) -> Rc<[Coverage]> {
        let step = (nm / self.centre_nm).ln() / (2.0 * SHARED);
        let place = step.round();
        if place == 0.0 || !place.is_finite() {
            return self.at_centre.clone();
        }
        let there = || coverage(self.scene, self.centre_nm * (place * 2.0 * SHARED).exp());
        let mut elsewhere = self.elsewhere.borrow_mut();
        elsewhere.entry(place as i64).or_insert_with(there).clone()
    }

    /// Whether a species without knowledge spoils the verdicts of others: it does where its stage
    /// was named, and where no stage of its element is known here.
    pub fn decides(&self, coverage: &[Coverage], spectrum: usize) -> bool {
        let this = &self.scene.spectra[spectrum];
        if coverage[spectrum].is_known() || self.scene.emitters[spectrum].is_absent {
            return false;
        }
        let element_known = self.siblings(coverage, spectrum).next().is_some();
        this.named || !element_known
    }

    /// Stages of the same element that are covered, and what is known of them.
    fn siblings<'c>(
        &self,
        coverage: &'c [Coverage],
        spectrum: usize,
    ) -> impl Iterator<Item = (u8, &'c Coverage)> {
        let this = self.scene.spectra[spectrum].species;
        let same_element = move |s: &Spectrum| {
            s.species.atomic_number == this.atomic_number && s.species.isotope == this.isotope
        };
        let spectra = self.scene.spectra;
        (spectra.iter().zip(coverage))
            .filter(move |(s, c)| same_element(s) && c.is_known())
            .map(|(s, c)| (s.species.stage, c))
    }

    /// Whether a species without knowledge that does not decide is taken to lie as dense as what is
    /// held of its element.
    pub fn stands_in(&self, spectrum: usize) -> bool {
        ARC_STAGES.contains(&self.scene.spectra[spectrum].species.stage)
    }

    /// Expected number of unlisted lines of such a species.
    pub fn stand_in(&self, coverage: &[Coverage], spectrum: usize, width_nm: f64) -> f64 {
        if !self.stands_in(spectrum) {
            return 0.0;
        }
        let own = coverage[spectrum].unlisted_per_nm();
        let densest = self
            .siblings(coverage, spectrum)
            .filter(|(stage, _)| ARC_STAGES.contains(stage))
            .map(|(_, c)| c.unlisted_per_nm())
            .fold(own, f64::max);
        densest * width_nm
    }
}

/// Says the chance that an unlisted line interferes, from the expected numbers of each species, the
/// largest first.
pub(super) fn say_unlisted(expected: &[(f64, Species)], out: &mut WindowFeature) {
    let all: f64 = expected.iter().map(|(number, _)| number).sum();
    let chance = 1.0 - (-all).exp();
    out.unlisted_chance = chance;
    let likeliest = expected.first().map_or(0.0, |e| e.0);
    let names: Vec<String> = (expected.iter())
        .filter(|e| e.0 >= LIKELY * likeliest)
        .take(NAMED)
        .map(|e| e.1.to_string())
        .collect();
    let said = format!(
        "{:.0} % chance that an unlisted line interferes, most likely of {}",
        100.0 * chance,
        either(&names)
    );
    if chance > CHANCE_UNRATED {
        out.verdict = VerdictRange::UNRATED;
        out.remarks.push(said);
    } else if chance >= CHANCE_SAID {
        out.remarks.push(said);
    }
}

/// `A`, `A or B`, `A, B or C`.
fn either(names: &[String]) -> String {
    match names {
        [before @ .., last] if !before.is_empty() => format!("{} or {last}", before.join(", ")),
        _ => names.concat(),
    }
}

fn coverage(scene: &Scene<'_>, nm: f64) -> Rc<[Coverage]> {
    (scene.spectra.iter().zip(&scene.emitters))
        .map(|(spectrum, emitter)| Coverage::at(spectrum, emitter, nm))
        .collect()
}
