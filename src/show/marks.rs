//! The answer of `marks`.

use serde_json::{Value, json};
use vocabulary::light::{Air, PositionMedium};
use vocabulary::spectrum::Line;

use super::line::{line_object, medium_word, multiplet_cell, position_cell, transition_cell};
use super::number::{in_table, percent, percent_in_table};
use super::sheet::{Align, Column, Context, Sheet};
use super::unjudged::unjudged_notes;
use crate::advise::marks::{
    Answer, Candidate, Dispersion, Entry, EntryState, Question, Refusal, Surveyed,
};

/// Builds the sheet of marks, or of a dispersion fitted to them.
pub fn marks(
    answer: &Answer,
    fitted: Option<&Dispersion>,
    question: &Question,
    context: Context,
) -> Sheet {
    let lines: Vec<Value> = answer.marks().map(mark_object).collect();
    let notes = notes(answer, question, &context);
    let mut object = context.object(&notes);
    object.insert("lines".into(), lines.into());
    object.insert(
        "refused".into(),
        answer
            .candidates
            .iter()
            .filter_map(refused_object)
            .collect(),
    );
    match fitted {
        None => Sheet {
            headline: headline(answer, question),
            columns: COLUMNS.to_vec(),
            rows: answer.marks().map(mark_row).collect(),
            notes,
            object,
            list: "lines",
        },
        Some(fit) => {
            object.insert("fit".into(), fit_object(fit));
            let entries: Vec<Value> = fit
                .entries
                .iter()
                .map(|(e, s)| entry_object(answer, fit, *e, s))
                .collect();
            object.insert("entries".into(), entries.into());
            Sheet {
                headline: fit_headline(fit),
                columns: FIT_COLUMNS.to_vec(),
                rows: fit
                    .entries
                    .iter()
                    .map(|(e, s)| entry_row(answer, fit, *e, s))
                    .collect(),
                notes,
                object,
                list: "entries",
            }
        }
    }
}

const COLUMNS: [Column; 6] = [
    Column::whole("air\nnm", Align::Left),
    Column::whole("vacuum\nnm", Align::Left),
    Column::whole("species", Align::Left),
    Column::wrapped("lower → upper", Align::Left),
    Column::whole("light", Align::Right),
    Column::whole("source", Align::Left),
];

fn headline(answer: &Answer, question: &Question) -> Vec<String> {
    let count = answer.marks().count();
    let typed = &question.range.typed;
    if count == 0 {
        return vec![format!(
            "{typed}: no mark among {} features of the lamp.",
            answer.candidates.len()
        )];
    }
    vec![format!(
        "{typed}: {count} marks of {} features of the lamp.",
        answer.candidates.len()
    )]
}

/// The strongest rated line of a feature, else its first.
pub(super) fn principal(surveyed: &Surveyed) -> Option<&Line> {
    let strength = |l: &&Line| {
        let g = l.upper.as_ref().and_then(|u| u.g).unwrap_or(1.0);
        g * l.rate_per_s.unwrap_or(-1.0)
    };
    surveyed
        .lines
        .iter()
        .max_by(|a, b| strength(a).total_cmp(&strength(b)))
}

fn air_nm(vacuum_nm: f64) -> Option<f64> {
    Air::standard().to_air_nm(vacuum_nm).ok().map(|air| air.nm)
}

/// Transition, and how many components a feature has.
pub(super) fn feature_transition(surveyed: &Surveyed) -> String {
    match (principal(surveyed), surveyed.lines.len()) {
        (Some(line), 1) => transition_cell(line),
        (Some(line), n) => format!("{}\n({n} components)", multiplet_cell(line)),
        (None, _) => "?".into(),
    }
}

fn mark_row(candidate: &Candidate) -> Vec<String> {
    let placed = &candidate.surveyed.feature.placed;
    let line = principal(&candidate.surveyed);
    vec![
        air_nm(placed.vacuum_nm)
            .map_or_else(|| "none".into(), |nm| in_table(nm, placed.uncertainty_nm)),
        in_table(placed.vacuum_nm, placed.uncertainty_nm),
        candidate.surveyed.feature.species.to_string(),
        feature_transition(&candidate.surveyed),
        candidate
            .relative_light
            .map_or_else(|| "?".into(), percent_in_table),
        line.map_or_else(String::new, |l| l.position_source.to_string()),
    ]
}

/// The keys of a line, its position being that of the feature.
pub(super) fn feature_object(surveyed: &Surveyed) -> serde_json::Map<String, Value> {
    let feature = &surveyed.feature;
    let mut object = principal(surveyed)
        .map(|line| line_object(line, &feature.placed))
        .unwrap_or_default();
    let wavenumber = 1e7 / feature.placed.vacuum_nm;
    let relative = feature.placed.uncertainty_nm / feature.placed.vacuum_nm;
    object.insert("wavenumber_per_cm".into(), json!(wavenumber));
    object.insert(
        "wavenumber_uncertainty_per_cm".into(),
        json!(wavenumber * relative),
    );
    object.insert("components".into(), json!(surveyed.lines.len()));
    object.insert("verdict".into(), json!(feature.verdict.central.word()));
    object.insert("verdict_range".into(), json!(feature.verdict.to_string()));
    object.insert(
        "own_species_fraction".into(),
        json!(feature.own_species_fraction),
    );
    object
}

fn mark_object(candidate: &Candidate) -> Value {
    let mut object = feature_object(&candidate.surveyed);
    let vacuum_nm = candidate.surveyed.feature.placed.vacuum_nm;
    object.insert("air_wavelength_nm".into(), json!(air_nm(vacuum_nm)));
    object.insert("relative_light".into(), json!(candidate.relative_light));
    Value::Object(object)
}

fn refused_object(candidate: &Candidate) -> Option<Value> {
    let refusal = candidate.refusal?;
    let feature = &candidate.surveyed.feature;
    Some(json!({
        "species": feature.species.to_string(),
        "wavelength_nm": feature.placed.wavelength_nm,
        "medium": medium_word(feature.placed.medium),
        "reason": reason(refusal),
    }))
}

fn reason(refusal: Refusal) -> String {
    match refusal {
        Refusal::NoRate => {
            "its rate is not known, so that it cannot be called clear of its neighbours".into()
        }
        Refusal::NotClear(verdict) => format!("{verdict}, not clear"),
        Refusal::OwnSpecies(f) if f.is_finite() => {
            format!(
                "other lines of its own species put {} of its light there",
                percent(f)
            )
        }
        Refusal::OwnUnrated(nm) => {
            format!("a line of its own species without a known rate lies {nm:.3} nm beside it")
        }
        Refusal::OwnSpecies(_) => "not rated against its own species".into(),
        Refusal::Uncertain(nm) => format!("its position is known to {nm:.1e} nm only"),
        Refusal::Weak(f) => format!("weak: {} of the strongest", percent(f)),
        Refusal::Forbidden => "forbidden: too slow for a lamp".into(),
        Refusal::Outshone => "a stronger mark lies in the same part of the span".into(),
    }
}

/// Words for a kind of refusal, and which it is.
type Kind = (&'static str, fn(&Refusal) -> bool);

fn notes(answer: &Answer, question: &Question, context: &Context) -> Vec<String> {
    let mut notes = Vec::new();
    let kinds: [Kind; 8] = [
        ("without a known rate", |r| matches!(r, Refusal::NoRate)),
        ("not clear of other species, or not judged", |r| {
            matches!(r, Refusal::NotClear(_))
        }),
        ("over 1 % light of their own species' other lines", |r| {
            matches!(r, Refusal::OwnSpecies(_))
        }),
        (
            "beside a line of their own species without a known rate",
            |r| matches!(r, Refusal::OwnUnrated(_)),
        ),
        ("position not known well enough", |r| {
            matches!(r, Refusal::Uncertain(_))
        }),
        ("forbidden, too slow for a lamp", |r| {
            matches!(r, Refusal::Forbidden)
        }),
        ("too weak", |r| matches!(r, Refusal::Weak(_))),
        ("outshone in their part of the span", |r| {
            matches!(r, Refusal::Outshone)
        }),
    ];
    let counts: Vec<String> = kinds
        .iter()
        .filter_map(|(words, is)| {
            let count = answer
                .candidates
                .iter()
                .filter(|c| c.refusal.as_ref().is_some_and(is))
                .count();
            (count > 0).then(|| format!("{count} {words}"))
        })
        .collect();
    if !counts.is_empty() {
        notes.push(format!("Left out: {}.", counts.join(", ")));
    }
    if let Some(parts) = question.parts {
        notes.push(format!(
            "Chosen: the strongest mark in each of {parts} parts of equal width, light being that \
             over the strongest feature of its species in the span."
        ));
    }
    if let Some((low, high)) = answer.widest_gap_nm {
        notes.push(format!(
            "Widest stretch without a mark: {low:.2} to {high:.2} nm (vacuum)."
        ));
    }
    notes.extend(unjudged_notes(&answer.unjudged));
    if !question.not_held.is_empty() {
        notes.push(format!(
            "Nothing is held of {}.",
            question.not_held.join(", ")
        ));
    }
    let ions = |c: &Candidate| c.surveyed.feature.species.stage > 1;
    if answer.candidates.iter().any(ions) {
        notes.push(
            "An element without its stage counts with all stages held; a lamp at low pressure \
             shows mostly the neutral atom (name it: \"Ar I\")."
                .into(),
        );
    }
    if !context.assumed.is_empty() {
        notes.push(format!("Assumed: {}.", context.assumed.join(", ")));
    }
    notes.push("Air: Ciddor 1996, 15 °C, 101 325 Pa, dry, 450 ppm CO₂.".into());
    notes.extend(context.source_notes());
    notes
}

const FIT_COLUMNS: [Column; 6] = [
    Column::whole("pixel", Align::Right),
    Column::whole("mark\nnm", Align::Left),
    Column::whole("species", Align::Left),
    Column::whole("residual\nnm", Align::Right),
    Column::whole("residual\npixels", Align::Right),
    Column::wrapped("used", Align::Left),
];

fn fit_headline(fit: &Dispersion) -> Vec<String> {
    let used = fit
        .entries
        .iter()
        .filter(|(_, s)| matches!(s, EntryState::Used { .. }))
        .count();
    let powers = fit.polynomial.powers();
    let terms: Vec<String> = powers
        .iter()
        .enumerate()
        .map(|(power, c)| match power {
            0 => format!("{c:.5}"),
            1 => format!("{c:+.7e} x"),
            _ => format!("{c:+.5e} x^{power}"),
        })
        .collect();
    let end = |(pixel, nm, sigma): (f64, f64, Option<f64>)| match sigma {
        Some(sigma) => format!("{:.4} ± {sigma:.4} nm at {pixel}", nm),
        None => format!("{nm:.4} nm at {pixel} (error not known)"),
    };
    vec![
        format!(
            "Order {}: {used} of {} entries used, RMS {:.4} nm.",
            fit.order,
            fit.entries.len(),
            fit.rms_nm
        ),
        format!("vacuum nm = {}, x in pixels.", terms.join(" ")),
        format!("Ends (vacuum): {}; {}.", end(fit.ends[0]), end(fit.ends[1])),
    ]
}

fn why(answer: &Answer, state: &EntryState) -> String {
    match state {
        EntryState::Used { .. } => "used".into(),
        EntryState::Outlier { deviations, .. } => {
            format!("rejected: {deviations:.1} standard deviations off the curve")
        }
        EntryState::NoMark { candidate, refusal } => {
            let feature = &answer.candidates[*candidate].surveyed.feature;
            format!(
                "rejected: {} is no mark: {}",
                feature.species,
                reason(*refusal)
            )
        }
        EntryState::Nothing {
            nearest_nm: Some(nm),
        } => {
            format!("rejected: no feature of the lamp near it (the nearest is {nm:.2} nm off)")
        }
        EntryState::Nothing { nearest_nm: None } => "rejected: the lamp has no feature here".into(),
        EntryState::Second { .. } => "rejected: another entry lies nearer to the same mark".into(),
    }
}

fn candidate_of(state: &EntryState) -> Option<(usize, Option<f64>)> {
    match state {
        EntryState::Used {
            candidate,
            residual_nm,
        }
        | EntryState::Outlier {
            candidate,
            residual_nm,
            ..
        } => Some((*candidate, Some(*residual_nm))),
        EntryState::NoMark { candidate, .. } | EntryState::Second { candidate } => {
            Some((*candidate, None))
        }
        EntryState::Nothing { .. } => None,
    }
}

fn entry_row(answer: &Answer, fit: &Dispersion, entry: Entry, state: &EntryState) -> Vec<String> {
    let found = candidate_of(state);
    let feature = found.map(|(c, _)| &answer.candidates[c].surveyed.feature);
    let residual = found.and_then(|(_, r)| r);
    let slope = fit.polynomial.slope_at(entry.pixel);
    vec![
        format!("{}", entry.pixel),
        feature.map_or_else(
            || "none".into(),
            |f| position_cell(&f.placed, f.placed.medium != PositionMedium::Air),
        ),
        feature.map_or_else(String::new, |f| f.species.to_string()),
        residual.map_or_else(String::new, |r| format!("{r:+.4}")),
        residual.map_or_else(String::new, |r| format!("{:+.3}", r / slope)),
        why(answer, state),
    ]
}

fn entry_object(answer: &Answer, fit: &Dispersion, entry: Entry, state: &EntryState) -> Value {
    let found = candidate_of(state);
    let feature = found.map(|(c, _)| &answer.candidates[c].surveyed.feature);
    let residual = found.and_then(|(_, r)| r);
    json!({
        "pixel": entry.pixel,
        "given_vacuum_wavelength_nm": entry.vacuum_nm,
        "species": feature.map(|f| f.species.to_string()),
        "wavelength_nm": feature.map(|f| f.placed.wavelength_nm),
        "medium": feature.map(|f| medium_word(f.placed.medium)),
        "vacuum_wavelength_nm": feature.map(|f| f.placed.vacuum_nm),
        "fitted_vacuum_wavelength_nm": fit.polynomial.at(entry.pixel),
        "residual_nm": residual,
        "residual_pixels": residual.map(|r| r / fit.polynomial.slope_at(entry.pixel)),
        "used": matches!(state, EntryState::Used { .. }),
        "reason": why(answer, state),
    })
}

fn fit_object(fit: &Dispersion) -> Value {
    let end = |(pixel, nm, sigma): (f64, f64, Option<f64>)| json!({"pixel": pixel, "vacuum_wavelength_nm": nm, "uncertainty_nm": sigma});
    json!({
        "order": fit.order,
        "vacuum_nm_by_power_of_pixel": fit.polynomial.powers(),
        "rms_nm": fit.rms_nm,
        "standard_deviation_nm": fit.sigma_nm,
        "ends": [end(fit.ends[0]), end(fit.ends[1])],
    })
}
