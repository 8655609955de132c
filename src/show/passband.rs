//! The answer of `passband`.

use std::collections::HashMap;

use serde_json::{Map, Value, json};

use super::line::{line_object, multiplet_cell, position_cell, transition_cell};
use super::number::{percent, percent_in_table, purity};
use super::physics::filter_notes;
use super::scan::{
    density_value, density_words, temperature_value, temperature_words, tilt_value, tilt_words,
};
use super::sheet::{Align, Column, Context, Sheet};
use super::unjudged::{unjudged_notes, unrated_value};
use super::vet::WORTH_A_ROW;
use super::window::{lower_bound_note, sources_cell};
use crate::advise::passband::{Answer, PassbandLine, Question, SPOILERS, Target};
use crate::advise::{Placed, Verdict};

/// How many rows the table shows.
const ROWS: usize = 15;

const COLUMNS: [Column; 7] = [
    Column::whole("position\nnm", Align::Left),
    Column::whole("species", Align::Left),
    Column::wrapped("lower → upper", Align::Left),
    Column::whole("trans-\nmission", Align::Right),
    Column::whole("part of\nlight", Align::Right),
    Column::whole("", Align::Left),
    Column::whole("source", Align::Left),
];

/// Builds the sheet of a passband.
pub fn passband(answer: &Answer, question: &Question, context: Context) -> Sheet {
    let groups = groups(answer);
    let worthy: Vec<&Group<'_>> = groups.iter().filter(|g| g.is_worthy()).collect();
    let notes = notes(answer, question, &context, worthy.len());
    Sheet {
        headline: headline(answer, question),
        columns: COLUMNS.to_vec(),
        rows: worthy.iter().take(ROWS).map(|g| row(g, answer)).collect(),
        object: object(answer, context, &notes),
        notes,
        list: "lines",
    }
}

/// The components of one feature.
struct Group<'a> {
    /// The brightest.
    lead: &'a PassbandLine,
    /// Part of all light of all of them.
    light: Option<f64>,
    components: usize,
}

impl Group<'_> {
    fn is_worthy(&self) -> bool {
        self.lead.is_target || self.light.is_some_and(|f| f >= WORTH_A_ROW)
    }
}

/// Features by their light, the brightest first; unrated lines last, each by itself.
fn groups(answer: &Answer) -> Vec<Group<'_>> {
    let mut out: Vec<Group<'_>> = Vec::new();
    let mut place: HashMap<usize, usize> = HashMap::new();
    for line in &answer.lines {
        match place
            .get(&line.feature)
            .filter(|_| line.light_fraction.is_some())
        {
            Some(&index) => {
                let group = &mut out[index];
                group.components += 1;
                group.light = group.light.zip(line.light_fraction).map(|(a, b)| a + b);
            }
            None => {
                if line.light_fraction.is_some() {
                    place.insert(line.feature, out.len());
                }
                out.push(Group {
                    lead: line,
                    light: line.light_fraction,
                    components: 1,
                });
            }
        }
    }
    // Lines come by their light, so that the lead of each group is its brightest.
    out.sort_by(|a, b| {
        let light = |g: &Group<'_>| g.light.unwrap_or(-1.0);
        light(b).total_cmp(&light(a))
    });
    out
}

pub(super) fn name(line: &vocabulary::spectrum::Line, placed: &Placed) -> String {
    format!(
        "{} {:.3} nm ({})",
        line.species, placed.wavelength_nm, placed.medium
    )
}

pub(super) fn headline(answer: &Answer, question: &Question) -> Vec<String> {
    let filter = &question.filter;
    let mut light = Vec::new();
    if question.light.tilt_deg > 0.0 {
        light.push(format!("tilted {}°", question.light.tilt_deg));
    }
    if let Some(f) = question.light.f_number {
        light.push(format!("f/{f}"));
    }
    if question.light.warming_k != 0.0 {
        light.push(format!("{:+} K", question.light.warming_k));
    }
    let how = if light.is_empty() {
        String::new()
    } else {
        format!(", {}", light.join(", "))
    };
    let mut out = vec![format!(
        "Filter {:.3} nm, FWHM {:.3} nm{how}: passes around {:.3} nm.",
        filter.centre_nm(),
        filter.fwhm_nm(),
        answer.seen_centre_nm
    )];
    match &answer.target {
        Some(target) => out.extend(target_words(target, answer)),
        None => out.push("No rated line of these species comes through.".into()),
    }
    out
}

fn target_words(target: &Target, answer: &Answer) -> Vec<String> {
    let pure = target.purity.map_or_else(|| "?".into(), purity);
    let mut out = vec![format!(
        "{}: {}; transmission {}, purity {pure}.",
        name(&target.line, &target.placed),
        verdict_words(target),
        percent(target.transmission)
    )];
    if let Some(i) = target.interference {
        let own = target
            .own_species_fraction
            .filter(|own| *own >= WORTH_A_ROW)
            .map_or_else(String::new, |own| {
                format!(
                    "; other lines of {} add {}",
                    target.line.species,
                    percent(own)
                )
            });
        let rated = if target.verdict.central == Verdict::Unrated {
            "Rated light"
        } else {
            "Light"
        };
        out.push(format!(
            "{rated} of other species: {} of its own (68 % interval {} to {}){own}.",
            percent(i.fraction),
            percent(i.low),
            percent(i.high)
        ));
    }
    out.extend(spoilers(answer));
    if let Some(background) = answer.background_fraction {
        out.push(format!(
            "Background: {} of the light behind the filter.",
            purity(background)
        ));
    }
    out.push(drift_words(target));
    out
}

/// The verdict; where it is `unrated`, what the rated lines alone say beside it.
fn verdict_words(target: &Target) -> String {
    match target.interference {
        Some(i) if target.verdict.central == Verdict::Unrated => {
            format!("unrated (the rated lines alone: {})", i.verdict())
        }
        _ => target.verdict.to_string(),
    }
}

/// The lines of others that spoil most.
pub(super) fn spoilers(answer: &Answer) -> Option<String> {
    let words: Vec<String> = groups(answer)
        .iter()
        .filter(|g| !g.lead.is_target && g.light.is_some_and(|f| f >= WORTH_A_ROW))
        .take(SPOILERS)
        .map(|g| {
            let part = percent(g.light.unwrap_or(0.0));
            let lead = g.lead;
            format!(
                "{} {:.3} ({part})",
                lead.line.species, lead.placed.wavelength_nm
            )
        })
        .collect();
    (!words.is_empty()).then(|| format!("What spoils it most: {}.", words.join(", ")))
}

fn drift_words(target: &Target) -> String {
    if target.interference.is_none() {
        return "None of its light can be counted, so nothing can be said of drift.".into();
    }
    let way = |nm: Option<f64>, where_to: &str| match nm {
        Some(nm) => format!("{nm:.2} nm to the {where_to}"),
        None => format!("three widths to the {where_to}"),
    };
    let (blue, red) = target.drift_nm;
    format!(
        "The verdict on the rated lines holds while the passband drifts up to {} or {}.",
        way(blue, "blue"),
        way(red, "red")
    )
}

fn row(group: &Group<'_>, answer: &Answer) -> Vec<String> {
    let first = answer.target.as_ref().map(|t| t.placed.medium);
    let line = group.lead;
    let transition = match group.components {
        1 => transition_cell(&line.line),
        n => format!("{}\n({n} components)", multiplet_cell(&line.line)),
    };
    vec![
        position_cell(&line.placed, first != Some(line.placed.medium)),
        line.line.species.to_string(),
        transition,
        line.transmission
            .map_or_else(|| "?".into(), percent_in_table),
        group.light.map_or_else(|| "?".into(), percent_in_table),
        if line.is_target {
            "target".into()
        } else {
            String::new()
        },
        sources_cell(std::iter::once(&line.line)),
    ]
}

fn notes(answer: &Answer, question: &Question, context: &Context, worthy: usize) -> Vec<String> {
    let mut notes = Vec::new();
    if worthy > ROWS {
        notes.push(format!(
            "Shown: the {ROWS} brightest of {worthy} features above 0.001 %."
        ));
    }
    if answer.target.is_some() {
        notes.extend(temperature_words(&answer.scan));
        notes.extend(density_words(&answer.density_scan));
        notes.extend(tilt_words(&answer.tilts));
    }
    notes.extend(judgement_notes(answer, question));
    if !context.assumed.is_empty() {
        notes.push(format!("Assumed: {}.", context.assumed.join(", ")));
    }
    notes.extend(filter_notes(&answer.physics, FILTER));
    notes.extend(lower_bound_note(&answer.lower_bounds));
    notes.extend(context.source_notes());
    notes
}

/// What purity and tilt mean.
pub(super) const FILTER: &str = "Purity is the target's part of all rated light behind filter and \
    detector. A filter moves to the blue by √(1 − sin²θ/n²) when tilted.";

/// What cannot be judged, and what the filter leaves open.
pub(super) fn judgement_notes(answer: &Answer, question: &Question) -> Vec<String> {
    let mut notes = Vec::new();
    if let Some(target) = answer.target.as_ref().filter(|t| !t.remarks.is_empty()) {
        let target_name = name(&target.line, &target.placed);
        notes.push(format!("{target_name}: {}.", target.remarks.join("; ")));
    }
    let open = |l: &&PassbandLine| {
        let comes_through = |t| t >= 1e-2 * question.filter.peak();
        l.light_fraction.is_none() && l.transmission.is_some_and(comes_through)
    };
    let unlisted = |l: &&PassbandLine| l.line.is_unlisted_and_unrated();
    let unrated: Vec<String> = answer
        .lines
        .iter()
        .filter(open)
        .filter(|l| !unlisted(l))
        .filter(|l| l.prior_light_fraction.is_none_or(|f| f >= WORTH_A_ROW))
        .map(|l| format!("{} {:.3}", l.line.species, l.placed.wavelength_nm))
        .collect();
    if !unrated.is_empty() {
        let more = unrated.len().saturating_sub(ROWS);
        let end = if more > 0 {
            format!(" and {more} more")
        } else {
            String::new()
        };
        let why = if answer.physics.unfed.is_empty() {
            "no rate is known, or the detector is not"
        } else {
            "no rate or excitation is known, or the detector is not"
        };
        notes.push(format!(
            "Come through but are not rated ({why}): {}{end}.",
            unrated[..unrated.len().min(ROWS)].join(", ")
        ));
    }
    let ritz = answer.lines.iter().filter(open).filter(unlisted).count();
    if ritz > 0 {
        notes.push(format!(
            "In no table, but following from levels that are (Ritz): {ritz} of the lines that come \
             through; the prior for unknown rates counts them."
        ));
    }
    notes.extend(unjudged_notes(&answer.unrated));
    notes.push(reach_note(question));
    notes
}

fn reach_note(question: &Question) -> String {
    let (low, high) = question.background.reach_nm;
    format!("Light from {low:.1} to {high:.1} nm counts; what leaks from beyond is not known.")
}

fn object(answer: &Answer, mut context: Context, notes: &[String]) -> Map<String, Value> {
    let filter = context.conditions.remove("filter").unwrap_or_default();
    let mut object = context.object(notes);
    let mut put = |key: &str, value: Value| object.insert(key.to_owned(), value);
    put("filter", filter);
    put("seen_centre_nm", json!(answer.seen_centre_nm));
    put_target(&mut put, answer);
    put("background_fraction", json!(answer.background_fraction));
    put("spoilers", spoiler_values(answer));
    put("lines", answer.lines.iter().filter_map(line).collect());
    put("scan", answer.scan.iter().map(temperature_value).collect());
    put(
        "density_scan",
        answer.density_scan.iter().map(density_value).collect(),
    );
    put("tilt_scan", answer.tilts.iter().map(tilt_value).collect());
    put("unrated", unrated_value(&answer.unrated));
    object
}

/// The stable keys about the target.
pub(super) fn put_target(put: &mut dyn FnMut(&str, Value) -> Option<Value>, answer: &Answer) {
    let target = answer.target.as_ref();
    put(
        "target",
        target.map_or(Value::Null, |t| {
            Value::Object(line_object(&t.line, &t.placed))
        }),
    );
    put("transmission", json!(target.map(|t| t.transmission)));
    put("purity", json!(target.and_then(|t| t.purity)));
    let interference = target.and_then(|t| t.interference);
    put(
        "interference_fraction",
        json!(interference.map(|i| i.fraction)),
    );
    put("interference_low", json!(interference.map(|i| i.low)));
    put("interference_high", json!(interference.map(|i| i.high)));
    put(
        "own_species_fraction",
        json!(target.and_then(|t| t.own_species_fraction)),
    );
    put(
        "verdict",
        json!(target.map_or("unrated", |t| t.verdict.central.word())),
    );
    put(
        "verdict_range",
        json!(target.map_or_else(|| "unrated".into(), |t| t.verdict.to_string())),
    );
    put(
        "remarks",
        json!(target.map(|t| t.remarks.clone()).unwrap_or_default()),
    );
    put("prior_chance", json!(target.and_then(|t| t.prior_chance)));
    put("unlisted_chance", json!(target.map(|t| t.unlisted_chance)));
    put("drift_to_blue_nm", json!(target.and_then(|t| t.drift_nm.0)));
    put("drift_to_red_nm", json!(target.and_then(|t| t.drift_nm.1)));
}

fn spoiler_values(answer: &Answer) -> Value {
    let spoiler = |group: &Group<'_>| {
        let mut value = line(group.lead)?;
        value["light_fraction"] = json!(group.light);
        value["components"] = json!(group.components);
        Some(value)
    };
    groups(answer)
        .iter()
        .filter(|g| !g.lead.is_target && g.light.is_some())
        .take(SPOILERS)
        .filter_map(spoiler)
        .collect()
}

/// Below this part of the light a line is left out of the JSON.
const LEAST: f64 = 1e-9;

fn line(line: &PassbandLine) -> Option<Value> {
    if line.light_fraction.is_some_and(|f| f < LEAST) && !line.is_target {
        return None;
    }
    let mut object = line_object(&line.line, &line.placed);
    object.insert("transmission".into(), json!(line.transmission));
    object.insert("light_fraction".into(), json!(line.light_fraction));
    object.insert(
        "prior_light_fraction".into(),
        json!(line.prior_light_fraction),
    );
    object.insert("is_target".into(), json!(line.is_target));
    object.insert("feature".into(), json!(line.feature));
    Some(Value::Object(object))
}
