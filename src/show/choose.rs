//! The answer of `passband choose`.

use serde_json::{Map, Value, json};

use super::number::{percent, percent_in_table, purity};
use super::passband::{FILTER, headline, judgement_notes, put_target};
use super::physics::filter_notes;
use super::sheet::{Align, Column, Context, Sheet};
use super::unjudged::unrated_value;
use crate::advise::Wanted;
use crate::advise::choose::{Answer, Choice};

/// How many candidates of a target the table shows.
const ROWS: usize = 10;

const COLUMNS: [Column; 8] = [
    Column::wrapped("target", Align::Left),
    Column::wrapped("filter", Align::Left),
    Column::whole("centre\nnm", Align::Right),
    Column::whole("FWHM\nnm", Align::Right),
    Column::whole("tilt\n°", Align::Right),
    Column::whole("trans-\nmission", Align::Right),
    Column::whole("purity", Align::Right),
    Column::whole("rated\nlines say", Align::Left),
];

/// Builds the sheet of a choice of filters.
pub fn chosen(answers: &[(Wanted, Answer)], context: Context) -> Sheet {
    let mut lines = Vec::new();
    let mut rows = Vec::new();
    let mut notes = Vec::new();
    for (wanted, answer) in answers {
        lines.extend(words(wanted, answer));
        rows.extend(rows_of(wanted, answer));
        if let Some((_, question, full)) = &answer.best {
            notes.extend(judgement_notes(full, question));
        }
    }
    notes.dedup();
    notes.push(
        "Figures are the worst within the wander of the passband. Largest product of purity and \
         transmission wins; among like ones (0.5 %) the smaller tilt, then the wider filter. The \
         other rows are the front: no candidate beats them in both."
            .into(),
    );
    if !context.assumed.is_empty() {
        notes.push(format!("Assumed: {}.", context.assumed.join(", ")));
    }
    for (_, answer) in answers {
        if let Some((_, _, full)) = &answer.best {
            for note in filter_notes(&full.physics, FILTER) {
                if !notes.contains(&note) {
                    notes.push(note);
                }
            }
        }
    }
    notes.extend(context.source_notes());
    Sheet {
        headline: lines,
        columns: COLUMNS.to_vec(),
        rows,
        object: object(answers, context, &notes),
        notes,
        list: "candidates",
    }
}

fn filter_words(choice: &Choice) -> String {
    let filter = &choice.offered.filter;
    let name = choice
        .offered
        .name
        .as_ref()
        .map_or_else(String::new, |n| format!("{n}, "));
    let tilt = if choice.tilt_deg > 0.0 {
        format!(", tilted {}°", choice.tilt_deg)
    } else {
        String::new()
    };
    format!(
        "{name}{:.2} nm, FWHM {:.2} nm{tilt}",
        filter.centre_nm(),
        filter.fwhm_nm()
    )
}

fn figures(choice: &Choice) -> String {
    format!(
        "passes {} at purity {}",
        percent(choice.transmission),
        purity(choice.purity)
    )
}

fn words(wanted: &Wanted, answer: &Answer) -> Vec<String> {
    let Some((best, question, full)) = &answer.best else {
        return vec![format!(
            "{}: none of {} candidates lets it through.",
            wanted.typed, answer.tried
        )];
    };
    let mut out = vec![format!(
        "{}: best of {} candidates is {}: {}.",
        wanted.typed,
        answer.tried,
        filter_words(best),
        figures(best)
    )];
    out.extend(why(best, answer));
    out.extend(headline(full, question).into_iter().skip(1));
    out
}

/// What the ends of the front would cost.
fn why(best: &Choice, answer: &Answer) -> Option<String> {
    let front = || answer.candidates.iter().filter(|c| c.on_front);
    let (brightest, purest) = (front().next()?, front().next_back()?);
    let mut parts = Vec::new();
    if brightest.transmission > best.transmission * 1.001 {
        parts.push(format!(
            "the brightest ({}) {}",
            filter_words(brightest),
            figures(brightest)
        ));
    }
    if purest.purity > best.purity * (1.0 + 1e-6) {
        parts.push(format!(
            "the purest ({}) {}",
            filter_words(purest),
            figures(purest)
        ));
    }
    (!parts.is_empty()).then(|| {
        format!(
            "Against it: {}; their products are smaller.",
            parts.join("; ")
        )
    })
}

fn rows_of(wanted: &Wanted, answer: &Answer) -> Vec<Vec<String>> {
    let best = answer.best.as_ref().map(|b| &b.0);
    let is_best = |c: &Choice| best.is_some_and(|b| same(b, c));
    let front: Vec<&Choice> = answer.candidates.iter().filter(|c| !is_best(c)).collect();
    let count = front.len().min(ROWS - 1);
    let step = |k: usize| {
        if count > 1 {
            k * (front.len() - 1) / (count - 1)
        } else {
            0
        }
    };
    let shown = (0..count).map(|k| front[step(k)]);
    best.into_iter()
        .chain(shown)
        .map(|choice| {
            let filter = &choice.offered.filter;
            let name = choice.offered.name.clone().unwrap_or_default();
            let mark = if is_best(choice) { "best" } else { "" };
            vec![
                wanted.typed.clone(),
                [name.as_str(), mark].join(" ").trim().to_owned(),
                format!("{:.2}", filter.centre_nm()),
                format!("{:.2}", filter.fwhm_nm()),
                format!("{:.1}", choice.tilt_deg),
                percent_in_table(choice.transmission),
                purity(choice.purity).replace(' ', ""),
                choice.verdict().to_string(),
            ]
        })
        .collect()
}

fn same(a: &Choice, b: &Choice) -> bool {
    let key = |c: &Choice| {
        (
            c.offered.filter.centre_nm().to_bits(),
            c.offered.filter.fwhm_nm().to_bits(),
            c.tilt_deg.to_bits(),
            c.offered.name.clone(),
        )
    };
    key(a) == key(b)
}

fn object(answers: &[(Wanted, Answer)], context: Context, notes: &[String]) -> Map<String, Value> {
    let mut object = context.object(notes);
    let candidates: Vec<Value> = answers
        .iter()
        .flat_map(|(wanted, answer)| answer.candidates.iter().map(move |c| (wanted, answer, c)))
        .map(|(wanted, answer, c)| candidate(wanted, answer, c))
        .collect();
    let best: Vec<Value> = answers
        .iter()
        .map(|(wanted, answer)| best(wanted, answer))
        .collect();
    object.insert("best".into(), Value::Array(best));
    object.insert("candidates".into(), Value::Array(candidates));
    object
}

fn best(wanted: &Wanted, answer: &Answer) -> Value {
    let mut object = Map::new();
    object.insert("typed".into(), json!(wanted.typed));
    object.insert("tried".into(), json!(answer.tried));
    if let Some((choice, _, full)) = &answer.best {
        object.insert("filter".into(), candidate(wanted, answer, choice));
        let mut put = |key: &str, value: Value| object.insert(key.to_owned(), value);
        put_target(&mut put, full);
        put("unrated", unrated_value(&full.unrated));
    }
    Value::Object(object)
}

fn candidate(wanted: &Wanted, answer: &Answer, choice: &Choice) -> Value {
    let filter = &choice.offered.filter;
    json!({
        "typed": wanted.typed,
        "name": choice.offered.name,
        "centre_nm": filter.centre_nm(),
        "fwhm_nm": filter.fwhm_nm(),
        "peak_transmission": filter.peak(),
        "tilt_deg": choice.tilt_deg,
        "transmission": choice.transmission,
        "purity": choice.purity,
        "score": choice.score(),
        "interference_fraction": choice.interference_fraction,
        "verdict": choice.verdict().word(),
        "on_front": choice.on_front,
        "is_best": answer.best.as_ref().is_some_and(|b| same(&b.0, choice)),
    })
}
