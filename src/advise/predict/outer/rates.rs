//! Levels, lifetimes and lines of a series whose members and neighbours are known.

use std::sync::Arc;

use vocabulary::atom::HalfInteger;

use super::entry::{Entry, key_words};
use crate::advise::predict::{
    Answer, LevelLifetime, LowerName, PredictError, PredictedLevel, PredictedLine, Question, shown,
};
use crate::calc::coulomb::{
    BoundLevel, ComputedLine, DEEPEST, Lifetime, OuterLevel, PredictedSeries, Setting, Transition,
    black_body_lifetime, effective_quantum_number, lifetime, polarisability_scale_a0_3,
    predict_bound_lines,
};
use crate::calc::series::{SeriesFit, SeriesKey};

/// A lifetime beyond this, s, is not worth a number: the ground level in warm radiation.
const ENDLESS_S: f64 = 1e6;

/// A series with its neighbours, ready for rates.
pub(super) struct Series<'a> {
    pub question: &'a Question,
    pub setting: &'a Setting,
    pub key: &'a SeriesKey,
    pub members: Vec<Entry>,
    pub partners: Vec<Entry>,
    /// The limit as fitted, else as held, with its 1 σ, cm⁻¹.
    pub limit_per_cm: (f64, f64),
    /// Limits of all series that were fitted, cm⁻¹.
    pub limits: Vec<(SeriesKey, f64)>,
}

impl Series<'_> {
    pub fn answer(
        &self,
        asked: Option<&PredictedSeries>,
        held: &[OuterLevel],
    ) -> Result<Answer, PredictError> {
        let bound: Vec<BoundLevel<'_>> = self
            .members
            .iter()
            .chain(&self.partners)
            .map(|entry| self.bound(entry))
            .collect();
        let lines = predict_bound_lines(&bound, &self.setting.calc());
        let levels = (0..self.members.len())
            .map(|index| self.level(index, &lines))
            .collect::<Result<Vec<_>, _>>()?;
        let fit = asked.and_then(|series| series.fit.as_ref()?.as_ref().ok());
        let mut sources: Vec<Arc<str>> = held.iter().map(|level| level.source.clone()).collect();
        sources.sort();
        sources.dedup();
        Ok(Answer {
            series: key_words(self.key),
            limit_per_cm: self.limit_per_cm.0,
            limit_uncertainty_per_cm: self.limit_per_cm.1,
            limit_line: None,
            basis: self.basis(fit),
            lines: self.lines_to(&lines)?,
            levels,
            sources,
        })
    }

    /// A level with its distance to the limit as its own series fits it.
    fn bound<'e>(&self, entry: &'e Entry) -> BoundLevel<'e> {
        let fitted = self.limits.iter().find(|(key, _)| entry.is_of(key));
        let limit_per_cm = fitted.map_or(self.setting.limit_per_cm, |(_, limit)| *limit);
        BoundLevel {
            binding_per_cm: limit_per_cm - entry.energy_per_cm,
            level: entry.labelled(),
        }
    }

    fn basis(&self, fit: Option<&SeriesFit>) -> Vec<String> {
        let mut basis = vec![match fit {
            Some(fit) => fit_words(fit),
            None => {
                "Energies from the polarisation of the core, as no level of the series is held."
                    .into()
            }
        }];
        basis.push(
            "Rates and lifetimes: Coulomb approximation (Bates & Damgaard 1949), electric-dipole lines of \
             unchanged spin only; the black body does not ionise."
                .into(),
        );
        let deep = self.inside_core();
        if !deep.is_empty() {
            basis.push(format!(
                "Lifetimes are upper bounds: decays to {} are not computed, as these lie inside the core.",
                deep.join(", ")
            ));
        }
        basis
    }

    /// Lower levels that the series could decay to but whose orbitals lie inside the core.
    fn inside_core(&self) -> Vec<String> {
        let s = self.setting;
        let depth = |entry: &Entry| {
            let effective = effective_quantum_number(
                s.core_charge,
                s.rydberg_per_cm,
                s.limit_per_cm,
                entry.energy_per_cm,
            );
            effective.map_or(0.0, |nu| f64::from(entry.l) + 1.0 - nu)
        };
        let top = self
            .members
            .iter()
            .map(|m| m.energy_per_cm)
            .fold(0.0, f64::max);
        let multiplicity = |term: &str| term.chars().find(char::is_ascii_digit);
        self.partners
            .iter()
            .filter(|e| e.l.abs_diff(self.key.l) == 1 && e.energy_per_cm < top)
            .filter(|e| multiplicity(&e.term) == multiplicity(&self.key.term))
            .filter(|e| e.twice_j.abs_diff(self.key.twice_j) <= 2 && depth(e) > DEEPEST)
            .map(Entry::words)
            .collect()
    }

    fn level(&self, index: usize, lines: &[ComputedLine]) -> Result<PredictedLevel, PredictError> {
        let member = &self.members[index];
        let s = self.setting;
        let limit_per_cm = self.limit_per_cm.0;
        let binding_per_cm = limit_per_cm - member.energy_per_cm;
        let effective = effective_quantum_number(
            s.core_charge,
            s.rydberg_per_cm,
            limit_per_cm,
            member.energy_per_cm,
        )?;
        let decays = self.transitions(index, lines, true);
        let lifts = self.transitions(index, lines, false);
        let black_body = match self.question.kelvin {
            Some(kelvin) => known(black_body_lifetime(&decays, &lifts, kelvin)?),
            None => None,
        };
        Ok(PredictedLevel {
            n: member.n,
            l: member.l,
            j: Some(HalfInteger::from_twice(member.twice_j)),
            label: member.words(),
            energy_per_cm: member.energy_per_cm,
            uncertainty_per_cm: member.uncertainty_per_cm,
            binding_per_cm,
            quantum_defect: f64::from(member.n) - effective,
            method: member.method.clone(),
            lifetime: known(lifetime(&decays)),
            black_body_lifetime: black_body,
            polarisability_scale_a0_3: polarisability_scale_a0_3(effective, s.core_charge),
        })
    }

    /// Decays of a member, or the lines that lift it.
    fn transitions(&self, index: usize, lines: &[ComputedLine], down: bool) -> Vec<Transition> {
        let weight = |entry: &Entry| f64::from(entry.twice_j) + 1.0;
        let own = weight(&self.members[index]);
        lines
            .iter()
            .filter(|line| index == if down { line.upper } else { line.lower })
            .map(|line| Transition {
                wavenumber_per_cm: line.rate.wavenumber_per_cm,
                rate_per_s: line.rate.per_s,
                relative_uncertainty: line.rate.relative_uncertainty,
                weight_ratio: weight(self.entry(if down { line.lower } else { line.upper })) / own,
            })
            .collect()
    }

    fn entry(&self, index: usize) -> &Entry {
        match index.checked_sub(self.members.len()) {
            Some(partner) => &self.partners[partner],
            None => &self.members[index],
        }
    }

    fn lines_to(&self, lines: &[ComputedLine]) -> Result<Vec<PredictedLine>, PredictError> {
        let Some(to) = self.question.to else {
            return Ok(Vec::new());
        };
        let is_meant = |entry: &Entry| {
            entry.n == to.n && entry.l == to.l && to.j.is_none_or(|j| j.twice() == entry.twice_j)
        };
        let mut found: Vec<PredictedLine> = lines
            .iter()
            .filter(|line| line.upper < self.members.len() && is_meant(self.entry(line.lower)))
            .map(|line| self.line(line))
            .collect();
        found.sort_by(|a, b| (a.n, &a.lower).cmp(&(b.n, &b.lower)));
        if found.is_empty() {
            return Err(PredictError::NoLowerLevel {
                species: self.question.species,
                wanted: LowerName::words(to),
            });
        }
        Ok(found)
    }

    fn line(&self, line: &ComputedLine) -> PredictedLine {
        let [upper, lower] = [line.upper, line.lower].map(|index| self.entry(index));
        let uncertainty_per_cm = upper.uncertainty_per_cm.hypot(lower.uncertainty_per_cm);
        let wavenumber_per_cm = upper.energy_per_cm - lower.energy_per_cm;
        PredictedLine {
            n: upper.n,
            upper: upper.words(),
            lower: lower.words(),
            wavenumber_per_cm,
            uncertainty_per_cm,
            rate_per_s: line.rate.per_s,
            rate_relative_uncertainty: line.rate.relative_uncertainty,
            method: "Coulomb approximation",
            placed: shown(wavenumber_per_cm, uncertainty_per_cm, self.question.medium),
        }
    }
}

/// A lifetime that something ends.
fn known(lifetime: Lifetime) -> Option<LevelLifetime> {
    (lifetime.seconds < ENDLESS_S).then_some(LevelLifetime {
        seconds: lifetime.seconds,
        relative_uncertainty: lifetime.relative_uncertainty,
    })
}

fn fit_words(fit: &SeriesFit) -> String {
    let used: Vec<String> = fit.used.iter().map(u32::to_string).collect();
    let defects: Vec<String> = fit.coefficients.iter().map(|c| format!("{c:.6}")).collect();
    let mut words = format!(
        "Rydberg–Ritz fit to {} members (n = {}): δ₀, δ₂ … = {}; χ² = {:.1} for {} degrees of freedom.",
        used.len(),
        used.join(", "),
        defects.join(", "),
        fit.chi_squared,
        fit.degrees_of_freedom
    );
    if fit.limit_offset_per_cm != 0.0 {
        words.push_str(&format!(
            " It puts the limit {:+.3} cm⁻¹ off the one held: uncertainties beyond the last member \
             carry that.",
            fit.limit_offset_per_cm
        ));
    }
    if !fit.perturbed.is_empty() {
        let names: Vec<String> = fit.perturbed.iter().map(|(n, _)| n.to_string()).collect();
        words.push_str(&format!(
            " Set aside as perturbed: n = {}.",
            names.join(", ")
        ));
    }
    words
}
