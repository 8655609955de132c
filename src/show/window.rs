//! The answer of `window`.

use std::collections::BTreeSet;

use serde_json::{Map, Value, json};
use vocabulary::light::PositionMedium;
use vocabulary::spectrum::Line;

use super::line::{
    line_object, multiplet_cell, position_cell, put_verdict, rate_cell, transition_cell,
};
use super::number::{percent, percent_in_table};
use super::physics::physics_notes;
use super::prior::{prior_note, put_prior};
use super::sheet::{Align, Column, Context, Sheet};
use super::unjudged::{unjudged_notes, unrated_value};
use crate::advise::Verdict;
use crate::advise::window::{Answer, FAINT, WindowFeature, WindowLine};

/// Columns; the heading of the first names the medium where it is one for all rows.
const COLUMNS: [Column; 9] = [
    Column::whole("position\nnm", Align::Left),
    Column::whole("species", Align::Left),
    Column::wrapped("lower → upper", Align::Left),
    Column::whole("lower\ncm⁻¹", Align::Right),
    Column::whole("rate\ns⁻¹", Align::Left),
    Column::whole("light", Align::Right),
    Column::whole("verdict", Align::Left),
    Column::wrapped("worst\ninterferer", Align::Left),
    Column::whole("source", Align::Left),
];

/// How the answer is to be shown.
pub struct Wish {
    /// What was asked, as typed.
    pub typed: String,
    /// Show components, not features.
    pub components: bool,
    /// Show only so many features, the brightest.
    pub strongest: Option<usize>,
    /// Show also what no table lists and the prior for unknown rates takes to be faint.
    pub faint: bool,
}

/// Builds the sheet of a window.
pub fn window(answer: &Answer, context: Context, wish: &Wish) -> Sheet {
    let lit: Vec<usize> = (0..answer.features.len())
        .filter(|&f| counts(answer, &answer.features[f]))
        .collect();
    let dark = answer.features.len() - lit.len();
    let bright: Vec<usize> = (lit.iter().copied())
        .filter(|&f| wish.faint || !answer.is_faint(&answer.features[f]))
        .collect();
    let shown = chosen(answer, bright.clone(), wish.strongest);
    let mut notes = notes(answer, &context, &shown);
    if let Some(note) = unlisted_note(answer, lit.len() - bright.len()) {
        notes.insert(0, note);
    }
    if dark > 0 {
        notes.insert(
            0,
            format!("Left out: features with less than 1e-9 of the light ({dark})."),
        );
    }
    if shown.len() < bright.len() {
        let (some, all) = (shown.len(), bright.len());
        notes.insert(0, format!("Shown: the {some} brightest of {all} features."));
    }
    let medium = one_medium(answer, &shown);
    let rows = if wish.components {
        component_rows(answer, &shown, medium.is_none())
    } else {
        shown
            .iter()
            .map(|&f| feature_row(answer, f, medium.is_none()))
            .collect()
    };
    let mut columns = COLUMNS.to_vec();
    columns[0].title = match medium {
        Some(PositionMedium::Air) => "position\nnm in air",
        Some(PositionMedium::Vacuum) => "position\nnm in vacuum",
        None => "position\nnm",
    };
    let object = object(answer, &shown, context, &notes);
    Sheet {
        headline: headline(answer, wish, &bright),
        columns,
        rows,
        notes,
        object,
        list: "lines",
    }
}

/// Below this part of the light in the window a feature is as good as absent.
const DARK: f64 = 1e-9;

/// Whether a feature is worth a word: by its light, or by what a prior allows it.
fn counts(answer: &Answer, feature: &WindowFeature) -> bool {
    if let Some(light) = feature.light_fraction {
        return light >= DARK;
    }
    let mut lines = feature.components.iter().map(|&l| &answer.lines[l]);
    lines.any(|l| l.prior_light_fraction.is_none_or(|f| f >= DARK))
}

/// Features to show, by wavelength.
fn chosen(answer: &Answer, mut all: Vec<usize>, strongest: Option<usize>) -> Vec<usize> {
    if let Some(count) = strongest {
        let light = |f: usize| answer.features[f].light_fraction.unwrap_or(-1.0);
        all.sort_by(|&a, &b| light(b).total_cmp(&light(a)).then(a.cmp(&b)));
        all.truncate(count);
        all.sort_unstable();
    }
    all
}

/// What stands among the features although no table lists it.
fn unlisted_note(answer: &Answer, hidden: usize) -> Option<String> {
    let unlisted = (answer.features.iter())
        .filter(|f| answer.is_unlisted(f))
        .count();
    let shown = unlisted - hidden;
    let faint = if hidden > 0 {
        format!(
            "{hidden} more, below {} of the brightest by the prior for unknown rates, not shown \
             (--faint shows them)",
            percent(FAINT)
        )
    } else {
        "none left out".to_owned()
    };
    (unlisted > 0).then(|| {
        format!("In no table, but following from levels that are (Ritz): {shown} of these features; {faint}.")
    })
}

/// The medium of all positions shown, where it is one.
fn one_medium(answer: &Answer, shown: &[usize]) -> Option<PositionMedium> {
    let mut media = shown.iter().map(|&f| answer.features[f].placed.medium);
    let first = media.next()?;
    media.all(|m| m == first).then_some(first)
}

fn headline(answer: &Answer, wish: &Wish, counted: &[usize]) -> Vec<String> {
    if counted.is_empty() {
        let end = if answer.unrated.iter().any(|u| u.decides) {
            "the window cannot be judged (see below)".to_owned()
        } else {
            beyond_scope(answer)
        };
        return vec![format!(
            "{}: no line is held for these species; {end}.",
            wish.typed
        )];
    }
    let features = || counted.iter().map(|&f| &answer.features[f]);
    let species: BTreeSet<String> = features().map(|f| f.species.to_string()).collect();
    let count = counted.len();
    let plural = if count == 1 { "feature" } else { "features" };
    let first = format!(
        "{}: {count} {plural} of {} species.",
        wish.typed,
        species.len()
    );
    let mut out = vec![first];
    for verdict in [
        Verdict::Clear,
        Verdict::Tinged,
        Verdict::Blended,
        Verdict::Swamped,
        Verdict::Unrated,
    ] {
        out.extend(verdict_words(features(), verdict));
    }
    out
}

/// What may be there although nothing is listed.
fn beyond_scope(answer: &Answer) -> String {
    let partly: Vec<String> = answer
        .complete_down_to
        .iter()
        .filter(|(_, limit)| *limit > 0.0)
        .map(|(species, limit)| format!("{species} {}", percent(*limit)))
        .collect();
    if partly.is_empty() {
        return "their sources claim to list them all".into();
    }
    format!(
        "lines weaker than this part of the strongest may be there unlisted: {}",
        partly.join(", ")
    )
}

/// How many features a verdict's line of words names.
const NAMED: usize = 5;

fn verdict_words<'f>(
    features: impl Iterator<Item = &'f WindowFeature>,
    verdict: Verdict,
) -> Option<String> {
    let mut of: Vec<&WindowFeature> = features.filter(|f| f.verdict.central == verdict).collect();
    if of.is_empty() {
        return None;
    }
    of.sort_by(|a, b| {
        b.light_fraction
            .unwrap_or(0.0)
            .total_cmp(&a.light_fraction.unwrap_or(0.0))
    });
    let names: Vec<String> = of
        .iter()
        .take(NAMED)
        .map(|f| format!("{} {:.3}", f.species, f.placed.wavelength_nm))
        .collect();
    let rest = of.len().saturating_sub(NAMED);
    let more = if rest > 0 {
        format!(" and {rest} more")
    } else {
        String::new()
    };
    Some(format!("{verdict}: {}{more}.", names.join(", ")))
}

fn feature_row(answer: &Answer, index: usize, name_medium: bool) -> Vec<String> {
    let feature = &answer.features[index];
    let lines: Vec<&WindowLine> = feature
        .components
        .iter()
        .map(|&l| &answer.lines[l])
        .collect();
    let strongest = lines.iter().copied().max_by(|a, b| {
        a.light_fraction
            .unwrap_or(-1.0)
            .total_cmp(&b.light_fraction.unwrap_or(-1.0))
    });
    let Some(strongest) = strongest else {
        return vec![String::new(); COLUMNS.len()];
    };
    let transition = match lines.len() {
        1 => transition_cell(&strongest.line),
        n => format!("{}\n({n} components)", multiplet_cell(&strongest.line)),
    };
    let rate = rate_cell(feature.rate_per_s, feature.rate_relative_uncertainty);
    let mut row = vec![
        position_cell(&feature.placed, name_medium),
        feature.species.to_string(),
        transition,
    ];
    row.push(lower_cell(&strongest.line));
    row.push(rate);
    row.push(
        feature
            .light_fraction
            .map_or_else(|| "?".into(), percent_in_table),
    );
    row.push(feature.verdict.to_string());
    row.push(worst_cell(feature));
    row.push(sources_cell(lines.iter().map(|l| &l.line)));
    row
}

fn component_rows(answer: &Answer, shown: &[usize], name_medium: bool) -> Vec<Vec<String>> {
    let of_shown = |l: &&WindowLine| shown.contains(&l.feature);
    answer
        .lines
        .iter()
        .filter(of_shown)
        .map(|line| {
            let feature = &answer.features[line.feature];
            vec![
                position_cell(&line.placed, name_medium),
                feature.species.to_string(),
                transition_cell(&line.line),
                lower_cell(&line.line),
                rate_cell(line.line.rate_per_s, line.line.rate_relative_uncertainty),
                line.light_fraction
                    .map_or_else(|| "?".into(), percent_in_table),
                feature.verdict.to_string(),
                worst_cell(feature),
                sources_cell(std::iter::once(&line.line)),
            ]
        })
        .collect()
}

fn lower_cell(line: &Line) -> String {
    line.lower
        .as_ref()
        .map_or_else(|| "?".into(), |l| format!("{:.0}", l.energy_per_cm))
}

/// Below this part of the target's light an interferer is not worth a cell.
const WORTH_NAMING: f64 = 1e-5;

fn worst_cell(feature: &WindowFeature) -> String {
    match feature.worst.as_ref().zip(feature.worst_placed) {
        Some((worst, placed)) if worst.fraction >= WORTH_NAMING => {
            let wing = if worst.wing { " wing" } else { "" };
            let part = percent_in_table(worst.fraction);
            format!(
                "{} {:.3}\n{part}{wing}",
                worst.species, placed.wavelength_nm
            )
        }
        _ => "none".into(),
    }
}

/// Sources of position and rate, each once.
pub(super) fn sources_cell<'l>(lines: impl Iterator<Item = &'l Line>) -> String {
    let mut keys: Vec<&str> = Vec::new();
    for line in lines {
        for key in [Some(&*line.position_source), line.rate_source.as_deref()]
            .into_iter()
            .flatten()
        {
            if !keys.contains(&key) {
                keys.push(key);
            }
        }
    }
    keys.iter()
        .map(|key| broken(key))
        .collect::<Vec<_>>()
        .join("\n")
}

/// A long key is broken behind its first hyphen.
pub(super) fn broken(key: &str) -> String {
    match key.split_once('-') {
        Some((head, tail)) if key.len() > 10 => format!("{head}-\n{tail}"),
        _ => key.to_owned(),
    }
}

fn notes(answer: &Answer, context: &Context, shown: &[usize]) -> Vec<String> {
    let mut notes = Vec::new();
    for feature in shown.iter().map(|&f| &answer.features[f]) {
        if answer.is_unlisted(feature) {
            continue;
        }
        if !feature.remarks.is_empty() {
            let name = format!("{} {:.3}", feature.species, feature.placed.wavelength_nm);
            notes.push(format!("{name}: {}.", feature.remarks.join("; ")));
        }
    }
    join_like(&mut notes);
    notes.extend(prior_note(&answer.features, answer.physics.model));
    notes.extend(unjudged_notes(&answer.unrated));
    if !context.assumed.is_empty() {
        notes.push(format!("Assumed: {}.", context.assumed.join(", ")));
    }
    notes.extend(physics_notes(&answer.physics));
    notes.extend(lower_bound_note(&answer.lower_bounds));
    if answer.unstated_rates {
        notes.push("±? marks rates whose source states no uncertainty; 50 % is taken.".into());
    }
    if answer.air_extrapolated {
        notes.push("The index of air is extrapolated here (published for 300–1690 nm).".into());
    }
    notes.extend(context.source_notes());
    notes
}

/// Species whose partition function may be too small.
pub(super) fn lower_bound_note(species: &[vocabulary::atom::Species]) -> Option<String> {
    let names: Vec<String> = species.iter().map(ToString::to_string).collect();
    (!names.is_empty()).then(|| {
        format!(
            "Levels are missing that could raise the partition function by over 1 % (it is a lower \
             bound): {}.",
            names.join(", ")
        )
    })
}

/// Features that say the same are said in one sentence.
fn join_like(notes: &mut Vec<String>) {
    let mut joined: Vec<(String, Vec<String>)> = Vec::new();
    for note in notes.drain(..) {
        let Some((name, said)) = note.split_once(": ") else {
            continue;
        };
        match joined.iter_mut().find(|(known, _)| known == said) {
            Some((_, names)) => names.push(name.to_owned()),
            None => joined.push((said.to_owned(), vec![name.to_owned()])),
        }
    }
    notes.extend(joined.into_iter().map(|(said, names)| {
        let more = names.len().saturating_sub(NAMED);
        let end = if more > 0 {
            format!(" and {more} more")
        } else {
            String::new()
        };
        format!(
            "{}{end}: {said}",
            names[..names.len().min(NAMED)].join(", ")
        )
    }));
}

fn object(
    answer: &Answer,
    shown: &[usize],
    context: Context,
    notes: &[String],
) -> Map<String, Value> {
    let mut object = context.object(notes);
    let kept: Vec<usize> = (0..answer.lines.len())
        .filter(|&l| shown.contains(&answer.lines[l].feature))
        .collect();
    let new_index = |old: usize| kept.iter().position(|&k| k == old);
    let lines: Vec<Value> = kept
        .iter()
        .map(|&l| {
            let line = &answer.lines[l];
            let feature = &answer.features[line.feature];
            let mut object = line_object(&line.line, &line.placed);
            let position = shown.iter().position(|&f| f == line.feature);
            object.insert("feature".into(), json!(position));
            object.insert("light_fraction".into(), json!(line.light_fraction));
            put_prior(&mut object, line);
            put_verdict(&mut object, feature.verdict, feature.worst.as_ref());
            Value::Object(object)
        })
        .collect();
    let features: Vec<Value> = shown
        .iter()
        .map(|&f| {
            let feature = &answer.features[f];
            let components: Vec<Option<usize>> =
                feature.components.iter().map(|&l| new_index(l)).collect();
            feature_object(feature, &components)
        })
        .collect();
    object.insert("lines".into(), Value::Array(lines));
    object.insert("features".into(), Value::Array(features));
    object.insert("unrated".into(), unrated_value(&answer.unrated));
    object
}

fn feature_object(feature: &WindowFeature, components: &[Option<usize>]) -> Value {
    let mut object = Map::new();
    let mut put = |key: &str, value: Value| object.insert(key.to_owned(), value);
    put("species", json!(feature.species.to_string()));
    put("wavelength_nm", json!(feature.placed.wavelength_nm));
    put(
        "medium",
        json!(super::line::medium_word(feature.placed.medium)),
    );
    put("vacuum_wavelength_nm", json!(feature.placed.vacuum_nm));
    put("components", json!(components));
    put("rate_per_s", json!(feature.rate_per_s));
    put(
        "rate_relative_uncertainty",
        json!(feature.rate_relative_uncertainty),
    );
    put("light_fraction", json!(feature.light_fraction));
    put(
        "interference_fraction",
        json!(feature.interference.map(|i| i.fraction)),
    );
    put(
        "interference_low",
        json!(feature.interference.map(|i| i.low)),
    );
    put(
        "interference_high",
        json!(feature.interference.map(|i| i.high)),
    );
    put("own_species_fraction", json!(feature.own_species_fraction));
    put("unlisted_chance", json!(feature.unlisted_chance));
    put("prior_chance", json!(feature.prior_chance));
    put("remarks", json!(feature.remarks));
    put_verdict(&mut object, feature.verdict, feature.worst.as_ref());
    Value::Object(object)
}
