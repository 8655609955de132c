//! Series of one electron outside a core, fitted to the levels that are held or given.

use std::collections::BTreeMap;
use std::sync::Arc;

use vocabulary::atom::HalfInteger;

use super::{
    Answer, LevelLifetime, LowerName, PredictError, PredictedLevel, PredictedLine, Question,
    SeriesName, shown,
};
use crate::calc::coulomb::{
    ComputedLine, DEEPEST, Lifetime, OuterLevel, PredictedSeries, Setting, Transition,
    black_body_lifetime, effective_quantum_number, lifetime, polarisability_scale_a0_3,
    predict_lines, predict_series,
};
use crate::calc::series::{
    LabelledLevel, SeriesError, SeriesFit, SeriesKey, group_series, orbital_letter, outer_electron,
};

/// Members of the neighbouring series above the last n asked for, for what lifts a level.
const MORE_N: u32 = 10;

/// A lifetime beyond this, s, is not worth a number: the ground level in warm radiation.
const ENDLESS_S: f64 = 1e6;

/// A level in the making.
#[derive(Clone, Debug)]
struct Entry {
    configuration: String,
    term: String,
    twice_j: u16,
    n: u32,
    l: u32,
    core: String,
    energy_per_cm: f64,
    uncertainty_per_cm: f64,
    method: String,
}

impl Entry {
    fn labelled(&self) -> LabelledLevel<'_> {
        LabelledLevel {
            energy_per_cm: self.energy_per_cm,
            uncertainty_per_cm: self.uncertainty_per_cm,
            configuration: &self.configuration,
            term: &self.term,
            twice_j: self.twice_j,
        }
    }

    fn is_of(&self, key: &SeriesKey) -> bool {
        self.core == key.core
            && self.l == key.l
            && self.twice_j == key.twice_j
            && crate::calc::series::label::bare_term(&self.term) == key.term
    }

    fn words(&self) -> String {
        let electron = self.configuration.split_whitespace().last().unwrap_or("");
        format!(
            "{electron} {} {}",
            self.term,
            HalfInteger::from_twice(self.twice_j)
        )
    }
}

/// Answers for a species with several electrons; `held` are its measured levels.
///
/// # Errors
/// A series that is not there or cannot be fitted, n below its lowest member, no such lower level.
pub fn outer(
    question: &Question,
    setting: &Setting,
    held: &[OuterLevel],
) -> Result<Answer, PredictError> {
    let SeriesName::Orbital { l, .. } = question.series else {
        return Err(named(question));
    };
    if l >= question.from_n {
        let cause = SeriesError::AngularMomentum {
            n: question.from_n,
            l,
        };
        return Err(series_error(question, &question.typed, cause));
    }
    let mut entries: Vec<Entry> = held.iter().filter_map(entry).collect();
    let labelled: Vec<LabelledLevel<'_>> = entries.iter().map(Entry::labelled).collect();
    let key = wanted_key(question, setting, &labelled)?;
    drop(labelled);
    replace_given(question, &key, &mut entries);
    let labelled: Vec<LabelledLevel<'_>> = entries.iter().map(Entry::labelled).collect();
    let all = predict_series(&labelled, &setting.calc(), question.to_n + MORE_N);
    let asked = all.iter().find(|series| series.key == key);
    let members = members(question, &key, &entries, asked)?;
    let partners = partners(&key, &entries, &all);
    let fit = asked.and_then(|series| series.fit.as_ref()?.as_ref().ok());
    let limit_per_cm = fit.map_or((setting.limit_per_cm, setting.limit_sigma_per_cm), |fit| {
        (fit.limit_per_cm, fit.limit_sigma_per_cm)
    });
    Series {
        question,
        setting,
        key: &key,
        members,
        partners,
        limit_per_cm,
    }
    .answer(asked, held)
}

fn series_error(question: &Question, series: &str, cause: SeriesError) -> PredictError {
    PredictError::Series {
        species: question.species,
        series: series.to_owned(),
        cause,
    }
}

fn entry(level: &OuterLevel) -> Option<Entry> {
    let outer = outer_electron(&level.configuration)?;
    Some(Entry {
        configuration: level.configuration.clone(),
        term: level.term.clone(),
        twice_j: level.twice_j,
        n: outer.n,
        l: outer.l,
        core: if outer.occupancy > 1 {
            String::new()
        } else {
            outer.core
        },
        energy_per_cm: level.energy_per_cm,
        uncertainty_per_cm: level.uncertainty_per_cm,
        method: format!("held, {}", level.source),
    })
}

/// `nS1/2` of `2S`, for lists.
fn key_words(key: &SeriesKey) -> String {
    let letter = orbital_letter(key.l).unwrap_or('?');
    format!(
        "n{letter} {} {}",
        key.term,
        HalfInteger::from_twice(key.twice_j)
    )
}

/// The series that is meant.
fn wanted_key(
    question: &Question,
    setting: &Setting,
    labelled: &[LabelledLevel<'_>],
) -> Result<SeriesKey, PredictError> {
    let SeriesName::Orbital { l, multiplicity, j } = question.series else {
        return Err(named(question));
    };
    let on_ground: Vec<SeriesKey> = group_series(labelled)
        .into_iter()
        .filter(|series| series.ground_core && !series.members.is_empty())
        .map(|series| series.key)
        .collect();
    let made = predict_series(labelled, &setting.calc(), question.to_n)
        .into_iter()
        .filter(|series| series.fit.is_none())
        .map(|series| series.key);
    let known: Vec<SeriesKey> = on_ground.into_iter().chain(made).collect();
    let is_meant = |key: &&SeriesKey| {
        key.l == l
            && j.is_none_or(|j| j.twice() == key.twice_j)
            && multiplicity.is_none_or(|m| key.term.starts_with(&m.to_string()))
    };
    let meant: Vec<&SeriesKey> = known.iter().filter(is_meant).collect();
    match meant.as_slice() {
        [single] => Ok((*single).clone()),
        [] => Err(PredictError::NoSuchSeries {
            species: question.species,
            typed: question.typed.clone(),
            held: known.iter().map(key_words).collect(),
        }),
        several => Err(PredictError::Ambiguous {
            species: question.species,
            typed: question.typed.clone(),
            held: several.iter().map(|key| key_words(key)).collect(),
        }),
    }
}

fn named(question: &Question) -> PredictError {
    PredictError::Named {
        species: question.species,
        typed: question.typed.clone(),
    }
}

/// Puts the members that the user gives in place of those held.
fn replace_given(question: &Question, key: &SeriesKey, entries: &mut Vec<Entry>) {
    if question.given.is_empty() {
        return;
    }
    let letter = orbital_letter(key.l).unwrap_or('?');
    entries.retain(|entry| !entry.is_of(key));
    entries.extend(question.given.iter().map(|member| {
        Entry {
            configuration: format!("{} {}{letter}", key.core, member.n)
                .trim()
                .to_owned(),
            term: key.term.clone(),
            twice_j: key.twice_j,
            n: member.n,
            l: key.l,
            core: key.core.clone(),
            energy_per_cm: member.energy_per_cm,
            uncertainty_per_cm: member.uncertainty_per_cm,
            method: "given".into(),
        }
    }));
}

fn predicted_entry(key: &SeriesKey, n: u32, energy: (f64, f64), method: &str) -> Entry {
    let letter = orbital_letter(key.l).unwrap_or('?');
    Entry {
        configuration: format!("{} {n}{letter}", key.core).trim().to_owned(),
        term: key.term.clone(),
        twice_j: key.twice_j,
        n,
        l: key.l,
        core: key.core.clone(),
        energy_per_cm: energy.0,
        uncertainty_per_cm: energy.1,
        method: method.to_owned(),
    }
}

const FITTED: &str = "Rydberg–Ritz fit";
const POLARISED: &str = "core polarisation";

/// The members asked for: held where they are, else predicted.
fn members(
    question: &Question,
    key: &SeriesKey,
    entries: &[Entry],
    asked: Option<&PredictedSeries>,
) -> Result<Vec<Entry>, PredictError> {
    let refuse = |cause| series_error(question, &key_words(key), cause);
    let held: BTreeMap<u32, &Entry> = entries
        .iter()
        .filter(|e| e.is_of(key))
        .map(|e| (e.n, e))
        .collect();
    let lowest = held.keys().next().copied().unwrap_or(key.l + 1);
    if question.from_n < lowest {
        return Err(refuse(SeriesError::BelowLowest {
            n: question.from_n,
            lowest,
        }));
    }
    let mut members = Vec::new();
    for n in question.from_n..=question.to_n {
        if let Some(entry) = held.get(&n) {
            members.push((*entry).clone());
            continue;
        }
        let (prediction, method) = match asked.map(|series| &series.fit) {
            Some(Some(Ok(fit))) => (fit.predict(n).map_err(refuse)?, FITTED),
            Some(Some(Err(cause))) => return Err(refuse(cause.clone())),
            _ => {
                let made = asked.and_then(|s| s.levels.iter().find(|l| l.prediction.n == n));
                let made =
                    made.ok_or_else(|| refuse(SeriesError::TooFewMembers { held: 0, needed: 2 }))?;
                (made.prediction, POLARISED)
            }
        };
        let energy = (prediction.energy_per_cm, prediction.uncertainty_per_cm);
        members.push(predicted_entry(key, n, energy, method));
    }
    Ok(members)
}

/// Levels of the neighbouring series on the same core, held and predicted.
fn partners(key: &SeriesKey, entries: &[Entry], all: &[PredictedSeries]) -> Vec<Entry> {
    let near = |l: u32| l.abs_diff(key.l) == 1;
    let held = entries
        .iter()
        .filter(|e| near(e.l) || e.core.is_empty())
        .cloned();
    let made = all
        .iter()
        .filter(|series| near(series.key.l) && series.key.core == key.core)
        .flat_map(|series| {
            let method = if series.fit.is_some() {
                FITTED
            } else {
                POLARISED
            };
            series.levels.iter().map(move |level| {
                let p = &level.prediction;
                let energy = (p.energy_per_cm, p.uncertainty_per_cm);
                predicted_entry(&series.key, p.n, energy, method)
            })
        });
    held.chain(made).collect()
}

/// A series with its neighbours, ready for rates.
struct Series<'a> {
    question: &'a Question,
    setting: &'a Setting,
    key: &'a SeriesKey,
    members: Vec<Entry>,
    partners: Vec<Entry>,
    /// The limit as fitted, else as held, with its 1 σ, cm⁻¹.
    limit_per_cm: (f64, f64),
}

impl Series<'_> {
    fn answer(
        &self,
        asked: Option<&PredictedSeries>,
        held: &[OuterLevel],
    ) -> Result<Answer, PredictError> {
        let labelled: Vec<LabelledLevel<'_>> = self
            .members
            .iter()
            .chain(&self.partners)
            .map(Entry::labelled)
            .collect();
        let lines = predict_lines(&labelled, &self.setting.calc());
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
        PredictedLine {
            n: upper.n,
            upper: upper.words(),
            lower: lower.words(),
            wavenumber_per_cm: line.rate.wavenumber_per_cm,
            uncertainty_per_cm,
            rate_per_s: line.rate.per_s,
            rate_relative_uncertainty: line.rate.relative_uncertainty,
            method: "Coulomb approximation",
            placed: shown(
                line.rate.wavenumber_per_cm,
                uncertainty_per_cm,
                self.question.medium,
            ),
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
    if !fit.perturbed.is_empty() {
        let names: Vec<String> = fit.perturbed.iter().map(|(n, _)| n.to_string()).collect();
        words.push_str(&format!(
            " Set aside as perturbed: n = {}.",
            names.join(", ")
        ));
    }
    words
}
