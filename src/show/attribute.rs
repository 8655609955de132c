//! The answer of `attribute`.

use serde_json::{Value, json};
use vocabulary::light::{Air, Medium};

use super::line::{line_object, medium_word};
use super::number::{percent, percent_in_table, with_uncertainty};
use super::sheet::{Align, Column, Context, Sheet};
use super::unjudged::stages;
use crate::advise::attribute::{Answer, Candidate, Mark, PeakAnswer, Question, SpeciesAnswer};
use crate::advise::{Placed, placed};
use vocabulary::light::constants::PER_CM_PER_EV;

const COLUMNS: [Column; 5] = [
    Column::whole("peak\nnm", Align::Left),
    Column::whole("medium", Align::Left),
    Column::whole("mark", Align::Left),
    Column::whole("first candidate", Align::Left),
    Column::wrapped("others", Align::Left),
];

/// A false-discovery rate below this is said to be so.
const LEAST_RATE: f64 = 1e-3;

/// Species that are not present are listed where a feature matches and they are at least so likely.
const WORTH_LISTING: f64 = 0.05;

/// What was asked for by name.
#[derive(Clone, Debug, Default)]
pub struct Asked {
    /// Species were named: what cannot be told of them is said.
    pub named: bool,
    /// Requests of which nothing is held.
    pub not_held: Vec<String>,
}

/// Builds the sheet.
pub fn attribute(answer: &Answer, question: &Question, asked: &Asked, context: Context) -> Sheet {
    let medium = question.medium;
    let notes = notes(answer, asked, &context);
    let listed = || {
        answer
            .species
            .iter()
            .filter(|s| s.present || (!s.matched_nm.is_empty() && s.probability >= WORTH_LISTING))
    };
    let mut object = context.object(&notes);
    object.insert(
        "peaks".into(),
        answer
            .peaks
            .iter()
            .map(|p| peak_object(p, medium))
            .collect(),
    );
    object.insert(
        "species".into(),
        listed()
            .map(|s| species_object(s, question, medium))
            .collect(),
    );
    object.insert(
        "false_discovery_rate".into(),
        json!(answer.false_discovery_rate),
    );
    object.insert("chance_match".into(), json!(answer.chance_match));
    object.insert("chance_species".into(), json!(answer.chance_species));
    object.insert("decoys".into(), json!(answer.decoys));
    object.insert(
        "scale".into(),
        json!({
            "shift_nm": answer.scale.shift_nm,
            "stretch": answer.scale.stretch,
            "middle_vacuum_wavelength_nm": answer.scale.middle_nm,
        }),
    );
    Sheet {
        headline: headline(answer),
        columns: COLUMNS.to_vec(),
        rows: answer.peaks.iter().map(|p| row(p, medium)).collect(),
        notes,
        object,
        list: "peaks",
    }
}

fn headline(answer: &Answer) -> Vec<String> {
    let count = answer
        .peaks
        .iter()
        .filter(|p| p.attributed().is_some())
        .count();
    let rate = answer.false_discovery_rate.map_or_else(String::new, |f| {
        // Less is not to be told from ten shifted lists.
        let part = if f < LEAST_RATE {
            format!("less than {}", percent(LEAST_RATE))
        } else {
            percent(f)
        };
        format!("; {part} of these are expected to be wrong")
    });
    let mut out = vec![format!(
        "{count} of {} peaks attributed{rate}.",
        answer.peaks.len()
    )];
    let present: Vec<String> = answer
        .species
        .iter()
        .filter(|s| s.present)
        .map(|s| {
            let ending = if s.peaks == 1 { "" } else { "s" };
            format!("{} ({} peak{ending})", s.species, s.peaks)
        })
        .collect();
    if present.is_empty() {
        out.push("No species is shown.".into());
    } else {
        out.push(format!("Present: {}.", present.join(", ")));
    }
    out
}

/// A vacuum wavelength where it is shown; vacuum where air has no index.
fn place(vacuum_nm: f64, sigma_nm: f64, medium: Medium) -> Placed {
    let per_cm = 1e7 / vacuum_nm;
    let sigma_per_cm = per_cm * sigma_nm / vacuum_nm;
    placed(per_cm, sigma_per_cm, medium, Air::standard()).unwrap_or(Placed {
        wavelength_nm: vacuum_nm,
        uncertainty_nm: sigma_nm,
        medium: vocabulary::light::PositionMedium::Vacuum,
        vacuum_nm,
        extrapolated: false,
    })
}

const fn mark_word(mark: Mark) -> &'static str {
    match mark {
        Mark::Attributed => "attributed",
        Mark::Blend => "blend",
        Mark::SecondOrder => "second order",
        Mark::Doubtful => "doubtful",
        Mark::NoCandidate => "no candidate",
    }
}

fn candidate_cell(candidate: &Candidate, medium: Medium) -> String {
    let nm = place(candidate.vacuum_nm, 0.0, medium).wavelength_nm;
    let order = if candidate.order == 2 {
        " 2nd order"
    } else {
        ""
    };
    let probability = percent_in_table(candidate.probability);
    format!("{} {nm:.3}{order} {probability}", candidate.line.species)
}

fn row(peak: &PeakAnswer, medium: Medium) -> Vec<String> {
    let at = place(peak.peak.vacuum_nm, peak.peak.sigma_nm, medium);
    let cell = |c: &Candidate| candidate_cell(c, medium);
    // What is hardly likely is left to the machine-readable forms.
    let likely = |c: &&Candidate| c.probability >= 0.01;
    let others: Vec<String> = peak
        .candidates
        .iter()
        .skip(1)
        .filter(likely)
        .take(2)
        .map(cell)
        .collect();
    vec![
        with_uncertainty(at.wavelength_nm, at.uncertainty_nm),
        medium_word(at.medium).into(),
        mark_word(peak.mark).into(),
        peak.candidates
            .first()
            .filter(likely)
            .map_or_else(String::new, cell),
        others.join("\n"),
    ]
}

fn peak_object(peak: &PeakAnswer, medium: Medium) -> Value {
    let at = place(peak.peak.vacuum_nm, peak.peak.sigma_nm, medium);
    let candidates: Vec<Value> = peak
        .candidates
        .iter()
        .map(|c| candidate_object(c, medium))
        .collect();
    json!({
        "position_nm": at.wavelength_nm,
        "uncertainty_nm": at.uncertainty_nm,
        "medium": medium_word(at.medium),
        "intensity": peak.peak.intensity,
        "mark": mark_word(peak.mark),
        "attributed_to": peak.attributed().map(|c| c.line.species.to_string()),
        "candidates": candidates,
    })
}

fn candidate_object(candidate: &Candidate, medium: Medium) -> Value {
    let line = &candidate.line;
    let relative = line.wavenumber_uncertainty_per_cm / line.wavenumber_per_cm;
    let at = place(candidate.vacuum_nm, candidate.vacuum_nm * relative, medium);
    let mut object = line_object(line, &at);
    object.insert("wavenumber_per_cm".into(), json!(1e7 / candidate.vacuum_nm));
    object.insert("components".into(), json!(candidate.components));
    object.insert("order".into(), json!(candidate.order));
    object.insert("offset_nm".into(), json!(candidate.offset_nm));
    object.insert("probability".into(), json!(candidate.probability));
    Value::Object(object)
}

fn species_object(species: &SpeciesAnswer, question: &Question, medium: Medium) -> Value {
    let nm = |list: &[f64]| -> Vec<f64> {
        list.iter()
            .map(|&nm| place(nm, 0.0, medium).wavelength_nm)
            .collect()
    };
    let kt = question
        .grid
        .get(species.temperature)
        .map(|c| c.kt_per_cm / PER_CM_PER_EV);
    json!({
        "species": species.species.to_string(),
        "status": if species.present { "present" } else { "not shown" },
        "evidence": species.evidence,
        "probability": species.probability,
        "peaks": species.peaks,
        "electron_temperature_ev": kt,
        "matched": nm(&species.matched_nm),
        "missing": nm(&species.missing_nm),
    })
}

fn notes(answer: &Answer, asked: &Asked, context: &Context) -> Vec<String> {
    let mut notes = Vec::new();
    for species in answer.species.iter().filter(|s| s.present) {
        notes.push(format!(
            "{}: {} of {} strong features matched, evidence 10^{:.1}.",
            species.species,
            species.matched_nm.len(),
            species.matched_nm.len() + species.missing_nm.len(),
            species.evidence
        ));
    }
    let doubtful: Vec<String> = answer
        .species
        .iter()
        .filter(|s| !s.present && !s.matched_nm.is_empty() && s.probability >= WORTH_LISTING)
        .map(|s| format!("{} ({})", s.species, percent(s.probability)))
        .collect();
    if !doubtful.is_empty() {
        notes.push(format!("Not shown, but possible: {}.", doubtful.join(", ")));
    }
    notes.push(format!(
        "By chance: {} lists shifted by many widths show {:.1} species each, and the species found \
         would claim {} of their peaks.",
        answer.decoys,
        answer.chance_species,
        percent(answer.chance_match)
    ));
    notes.push(format!(
        "Scale: {:+.4} nm at {:.1} nm and {:+.1e} nm per nm were added to the peaks.",
        answer.scale.shift_nm, answer.scale.middle_nm, answer.scale.stretch
    ));
    let silent: Vec<String> = answer
        .species
        .iter()
        .filter(|s| !s.judged)
        .map(|s| s.species.to_string())
        .collect();
    if asked.named && !silent.is_empty() {
        let names: Vec<&str> = silent.iter().map(String::as_str).collect();
        notes.push(format!(
            "No line is held in this range of {}.",
            stages(&names)
        ));
    }
    if !asked.not_held.is_empty() {
        notes.push(format!("Nothing is held of {}.", asked.not_held.join(", ")));
    }
    if !context.assumed.is_empty() {
        notes.push(format!("Assumed: {}.", context.assumed.join(", ")));
    }
    notes.extend(context.source_notes());
    notes
}
