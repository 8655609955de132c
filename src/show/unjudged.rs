//! What cannot be judged, in sentences and under stable keys.

use serde_json::{Value, json};

use crate::advise::window::Unjudged;

/// The stable keys of what cannot be judged.
pub(super) fn unrated_value(unrated: &[Unjudged]) -> Value {
    unrated
        .iter()
        .map(|u| json!({"species": u.species, "reason": u.reason, "decides": u.decides, "counted": u.counted}))
        .collect()
}

/// What cannot be judged, and why.
pub(super) fn unjudged_notes(unrated: &[Unjudged]) -> Vec<String> {
    let mut notes = Vec::new();
    let listed = |decides: bool, counted: bool, reason: &str| {
        let of: Vec<&str> = unrated
            .iter()
            .filter(|u| u.decides == decides && u.counted == counted && u.reason == reason)
            .map(|u| u.species.as_str())
            .collect();
        stages(&of)
    };
    let mut reasons: Vec<&str> = unrated.iter().map(|u| u.reason.as_str()).collect();
    reasons.sort_unstable();
    reasons.dedup();
    for reason in &reasons {
        let names = listed(true, false, reason);
        if !names.is_empty() {
            notes.push(format!(
                "{names}: {reason}, so no line there can be called clear."
            ));
        }
    }
    for reason in &reasons {
        let names = listed(false, true, reason);
        if !names.is_empty() {
            notes.push(format!(
                "{names}: {reason}; unlisted ones are counted as if as dense as those of the other \
                 stage; name the stage to have it decide."
            ));
        }
        let names = listed(false, false, reason);
        if !names.is_empty() {
            notes.push(format!(
                "Not judged, as {reason}: {names}; name the stage to have it count."
            ));
        }
    }
    notes
}

/// Stages that follow each other are written as a range: `Fe III..XXVI`.
pub(super) fn stages(species: &[&str]) -> String {
    let read = |name: &str| name.parse::<vocabulary::atom::Species>().ok();
    let mut runs: Vec<(&str, &str)> = Vec::new();
    for &name in species {
        let follows = |last: &str| {
            read(last).zip(read(name)).is_some_and(|(a, b)| {
                (a.atomic_number, a.isotope, a.stage + 1) == (b.atomic_number, b.isotope, b.stage)
            })
        };
        match runs.last_mut() {
            Some(run) if follows(run.1) => run.1 = name,
            _ => runs.push((name, name)),
        }
    }
    let written = runs
        .iter()
        .map(|&(first, last)| match last.rsplit_once(' ') {
            Some((_, stage)) if first != last => format!("{first}..{stage}"),
            _ => first.to_owned(),
        });
    written.collect::<Vec<_>>().join(", ")
}
