//! Series of one electron outside a core, fitted to the levels that are held or given.

mod entry;
mod rates;

use std::collections::BTreeMap;

use self::entry::{Entry, entry, key_words, predicted_entry};
use self::rates::Series;
use super::{Answer, PredictError, Question, SeriesName};
use crate::calc::coulomb::{
    OuterLevel, PredictedSeries, Setting, predict_scaled_series, predict_series,
};
use crate::calc::series::{LabelledLevel, SeriesError, SeriesKey, group_series, orbital_letter};

/// Members of the neighbouring series above the last n asked for, for what lifts a level.
const MORE_N: u32 = 30;

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
    check_given(question, &key, &entries)?;
    replace_given(question, &key, &mut entries);
    let labelled: Vec<LabelledLevel<'_>> = entries.iter().map(Entry::labelled).collect();
    let scales: Vec<f64> = entries.iter().map(|entry| entry.scale_per_cm).collect();
    let most_n = question.to_n + MORE_N;
    let all = predict_scaled_series(&labelled, &scales, &setting.calc(), most_n);
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
        limits: limits(&all),
    }
    .answer(asked, held)
}

/// Limits of the series that were fitted.
fn limits(all: &[PredictedSeries]) -> Vec<(SeriesKey, f64)> {
    let limit = |series: &PredictedSeries| {
        let fit = series.fit.as_ref()?.as_ref().ok()?;
        Some((series.key.clone(), fit.limit_per_cm))
    };
    all.iter().filter_map(limit).collect()
}

fn series_error(question: &Question, series: &str, cause: SeriesError) -> PredictError {
    PredictError::Series {
        species: question.species,
        series: series.to_owned(),
        cause,
    }
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

/// The members that the user gives count n as those that are held do.
fn check_given(
    question: &Question,
    key: &SeriesKey,
    entries: &[Entry],
) -> Result<(), PredictError> {
    let held = entries.iter().filter(|entry| entry.is_of(key));
    let lowest = held.map(|entry| entry.n).min().unwrap_or(key.l + 1);
    match question.given.iter().map(|member| member.n).min() {
        Some(n) if n < lowest => Err(PredictError::GivenBelow {
            species: question.species,
            series: key_words(key),
            n,
            lowest,
        }),
        _ => Ok(()),
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
            scale_per_cm: 0.0,
            method: "given".into(),
        }
    }));
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
