//! The answer of `climb`.

use serde_json::{Map, Value, json};
use vocabulary::atom::Species;
use vocabulary::light::{Air, Medium};
use vocabulary::spectrum::PositionOrigin;

use super::line::{level_name, level_object, medium_word, position_word, rate_word};
use super::number::{plus_minus, with_uncertainty};
use super::sheet::{Align, Column, Context, Sheet};
use crate::advise::climb::{Answer, Question, Route, RydbergLevel, Short, Step, StepEnd, Target};
use crate::advise::placed;
use crate::calc::series::orbital_letter;

const COLUMNS: [Column; 7] = [
    Column::whole("route", Align::Right),
    Column::whole("step", Align::Right),
    Column::whole("laser range", Align::Left),
    Column::whole("position\nnm", Align::Left),
    Column::wrapped("lower →\nupper", Align::Left),
    Column::whole("f", Align::Right),
    Column::wrapped("close to", Align::Left),
];

/// How the answer is to be shown.
pub struct ClimbWish {
    /// Whose routes.
    pub species: Species,
    /// Medium of the positions.
    pub medium: Medium,
    /// Ranges of the lasers as typed.
    pub ranges: Vec<String>,
    /// Most routes to show.
    pub most: usize,
}

/// Builds the sheet of the routes.
pub fn climb(answer: &Answer, question: &Question, context: Context, wish: &ClimbWish) -> Sheet {
    let shown = &answer.routes[..answer.routes.len().min(wish.most)];
    let notes = notes(answer, shown, question, (&context, wish.species));
    let mut object = context.object(&notes);
    let routes = shown.iter().map(|r| route_object(r, wish)).collect();
    object.insert("routes".into(), Value::Array(routes));
    let reached = answer.short.as_ref().map(|short| {
        let levels = short.reached.iter().map(|level| level_object(level));
        levels.collect::<Vec<Value>>()
    });
    object.insert("reached".into(), json!(reached));
    Sheet {
        headline: headline(answer, question, wish),
        columns: COLUMNS.to_vec(),
        rows: shown
            .iter()
            .enumerate()
            .flat_map(|(i, r)| {
                r.steps
                    .iter()
                    .enumerate()
                    .map(move |(k, s)| row(i, k, s, wish))
            })
            .collect(),
        notes,
        object,
        list: "routes",
    }
}

fn headline(answer: &Answer, question: &Question, wish: &ClimbWish) -> Vec<String> {
    let (species, target) = (wish.species, &question.typed_target);
    let mut out = vec![match answer.routes.len() {
        0 => format!("{species} to {target}: no route through held lines within these ranges."),
        1 => format!("{species} to {target}: 1 route."),
        n => format!("{species} to {target}: {n} routes, the strongest first."),
    }];
    let into_continuum = matches!(question.target, Target::Limit(_));
    let words = |short| short_words(short, wish.medium, into_continuum);
    out.extend(answer.short.as_ref().map(words));
    out
}

/// So many levels are named that the lasers reach without coming to the target.
const NAMED: usize = 4;

fn short_words(short: &Short, medium: Medium, into_continuum: bool) -> String {
    let names: Vec<String> = (short.reached.iter().take(NAMED))
        .map(|level| level_name(level))
        .collect();
    let more = match short.reached.len().saturating_sub(NAMED) {
        0 => String::new(),
        n => format!(" and {n} more"),
    };
    let on = match &short.missing {
        Some((from, wavenumber)) => {
            let at_most = if into_continuum { "at most " } else { "" };
            let sigma = from.energy_uncertainty_per_cm;
            let nm = position(*wavenumber, sigma, medium).replace(' ', " nm in ");
            let from = level_name(from);
            format!("the nearest step to the target begins at {from} and takes {at_most}{nm}")
        }
        None => "no held line leads from there to the target".into(),
    };
    format!("Reached: {}{more}; {on}.", names.join(", "))
}

fn row(route: usize, step: usize, s: &Step, wish: &ClimbWish) -> Vec<String> {
    let close: Vec<String> = s
        .coincidences
        .iter()
        .map(|c| format!("{} {:+.2} cm⁻¹", c.species, c.offset_per_cm))
        .collect();
    vec![
        if step == 0 {
            (route + 1).to_string()
        } else {
            String::new()
        },
        (step + 1).to_string(),
        wish.ranges.get(s.laser).cloned().unwrap_or_default(),
        position_cell(s, wish.medium),
        format!("{} →\n{}", level_name(&s.from), end_name(&s.end)),
        f_cell(s),
        if close.is_empty() {
            "nothing".into()
        } else {
            close.join("\n")
        },
    ]
}

fn f_cell(s: &Step) -> String {
    match (&s.end, s.oscillator_strength) {
        (StepEnd::Continuum { .. }, _) => "–".into(),
        (_, Some(f)) if s.scaled => format!("~{f:.1e}"),
        (_, Some(f)) => format!("{f:.2e}{}", plus_minus(s.strength_relative_uncertainty)),
        (_, None) => "?".into(),
    }
}

fn position(wavenumber: f64, sigma: f64, medium: Medium) -> String {
    match placed(wavenumber, sigma, medium, Air::standard()) {
        Ok(p) => format!(
            "{} {}",
            with_uncertainty(p.wavelength_nm, p.uncertainty_nm.max(1e-6)),
            medium_word(p.medium)
        ),
        Err(_) => format!("{:.4} vacuum", 1e7 / wavenumber),
    }
}

fn position_cell(s: &Step, medium: Medium) -> String {
    let (wavenumber, sigma) = s.wavenumber_per_cm;
    match &s.end {
        StepEnd::Level(_) => position(wavenumber, sigma, medium),
        StepEnd::Rydberg { members, .. } => match members.last() {
            Some((last, at)) if members.len() > 1 => format!(
                "{}\nto {}",
                position(wavenumber, sigma, medium),
                position(*at, last.uncertainty_per_cm, medium)
            ),
            _ => position(wavenumber, sigma, medium),
        },
        StepEnd::Continuum {
            threshold_per_cm, ..
        } => {
            format!("below\n{}", position(*threshold_per_cm, sigma, medium))
        }
    }
}

fn end_name(end: &StepEnd) -> String {
    match end {
        StepEnd::Level(level) => level_name(level),
        StepEnd::Rydberg {
            term,
            l,
            j,
            members,
        } => {
            let letter = orbital_letter(*l).unwrap_or('?');
            let n = |m: Option<&(RydbergLevel, f64)>| m.map_or(0, |(m, _)| m.n);
            let (first, last) = (n(members.first()), n(members.last()));
            if first == last {
                format!("{first}{letter} {term} {j}")
            } else {
                format!("n{letter} {term} {j}, n = {first}..{last}")
            }
        }
        StepEnd::Continuum {
            excess_ev: (low, high),
            ..
        } => {
            format!("ion and electron of {low:.3}..{high:.3} eV")
        }
    }
}

fn notes(
    answer: &Answer,
    shown: &[Route],
    question: &Question,
    (context, species): (&Context, Species),
) -> Vec<String> {
    let mut notes = Vec::new();
    if shown.len() < answer.routes.len() {
        notes.push(format!(
            "Shown: the {} best of {} routes.",
            shown.len(),
            answer.routes.len()
        ));
    }
    let steps = || shown.iter().flat_map(|r| &r.steps);
    let last = |s: &Step| match &s.end {
        StepEnd::Rydberg { members, .. } => members.last().map(|(m, _)| m.n),
        _ => None,
    };
    let highest = steps().filter_map(last).max().unwrap_or(0);
    if steps().any(|s| matches!(s.end, StepEnd::Rydberg { .. })) {
        notes.push(format!(
            "Series: measured members where they are held, the others computed, up to n = {highest}. f is \
             that of the first member reached: of its paper, else by the Coulomb approximation \
             (exact for one electron); it falls as n*⁻³ along the series. Fields are not counted."
        ));
        if steps().any(|s| s.scaled) {
            notes.push(
                "~ marks an f scaled as n*⁻³ from the highest member with a held rate.".into(),
            );
        }
    }
    if steps().any(|s| matches!(s.end, StepEnd::Continuum { .. })) {
        notes.push(
            "Into the continuum: the position is the longest wavelength that reaches the limit of the \
             ground state of the ion; cross-sections and resonances above it are not held."
                .into(),
        );
    }
    if let Some(limit) = vocabulary::atom::limit(species)
        .filter(|_| steps().any(|s| !matches!(s.end, StepEnd::Level(_))))
    {
        notes.push(format!(
            "Limit: {} cm⁻¹ ({} in data/elements).",
            with_uncertainty(limit.energy_per_cm, limit.uncertainty_per_cm),
            limit.source
        ));
    }
    notes.push(
        "Ranked by the product of f (1 − m²/2), m being the distance from the middle of the laser's \
         range over half its width; routes with a strength that is not known stand last. Steps are \
         electric dipole lines that are held; each laser drives one step."
            .into(),
    );
    if question.lasers.len() == 1 {
        notes.push("One range is one laser: repeat it to use it for two steps.".into());
    }
    if !context.assumed.is_empty() {
        notes.push(format!("Assumed: {}.", context.assumed.join(", ")));
    }
    notes.extend(context.source_notes());
    notes
}

fn route_object(route: &Route, wish: &ClimbWish) -> Value {
    let steps: Vec<Value> = route
        .steps
        .iter()
        .map(|s| Value::Object(step_object(s, wish)))
        .collect();
    json!({"score": route.score, "steps": steps})
}

fn step_object(s: &Step, wish: &ClimbWish) -> Map<String, Value> {
    let mut object = Map::new();
    let mut put = |key: &str, value: Value| object.insert(key.to_owned(), value);
    let (wavenumber, sigma) = s.wavenumber_per_cm;
    let shown = placed(wavenumber, sigma, wish.medium, Air::standard()).ok();
    put("species", json!(wish.species.to_string()));
    put("laser_range", json!(wish.ranges.get(s.laser)));
    put("wavelength_nm", json!(shown.map(|p| p.wavelength_nm)));
    put("medium", json!(shown.map(|p| medium_word(p.medium))));
    put("vacuum_wavelength_nm", json!(1e7 / wavenumber));
    put("wavenumber_per_cm", json!(wavenumber));
    put("wavenumber_uncertainty_per_cm", json!(sigma));
    put("lower", level_object(&s.from));
    put("rate_per_s", json!(s.rate_per_s));
    put("rate_origin", json!(s.rate_origin.map(rate_word)));
    put("position_origin", json!(position_word(s.position_origin)));
    put("oscillator_strength", json!(s.oscillator_strength));
    let sigma = json!(s.strength_relative_uncertainty);
    put("strength_relative_uncertainty", sigma);
    put("strength_is_scaled", json!(s.scaled));
    put("mismatch", json!(s.mismatch));
    let sources: Vec<&str> = s.sources.iter().map(|k| &**k).collect();
    put("step_sources", json!(sources));
    let close: Vec<Value> = s
        .coincidences
        .iter()
        .map(|c| json!({"species": c.species.to_string(), "offset_per_cm": c.offset_per_cm}))
        .collect();
    put("coincidences", Value::Array(close));
    put_end(&mut object, s);
    object
}

fn put_end(object: &mut Map<String, Value>, s: &Step) {
    match &s.end {
        StepEnd::Level(level) => {
            object.insert("upper".into(), level_object(level));
        }
        StepEnd::Rydberg {
            term,
            l,
            j,
            members,
        } => {
            object.insert("upper".into(), Value::Null);
            let letter = orbital_letter(*l).map(String::from);
            object.insert("series".into(), json!({"term": term, "l": letter, "j": j}));
            // Along a series f falls as n*⁻³.
            let first = members.first().map_or(1.0, |(m, _)| m.effective);
            let of = |member: &RydbergLevel| {
                let f = s.oscillator_strength?;
                Some(f * (first / member.effective).powi(3))
            };
            let members: Vec<Value> = members.iter().map(|m| member_object(m, of(&m.0))).collect();
            object.insert("members".into(), Value::Array(members));
        }
        StepEnd::Continuum {
            excess_ev,
            threshold_per_cm,
        } => {
            object.insert("upper".into(), Value::Null);
            object.insert(
                "threshold_wavenumber_per_cm".into(),
                json!(threshold_per_cm),
            );
            object.insert("excess_energy_ev".into(), json!([excess_ev.0, excess_ev.1]));
        }
    }
}

fn member_object(
    (member, wavenumber): &(RydbergLevel, f64),
    oscillator_strength: Option<f64>,
) -> Value {
    json!({
        "n": member.n,
        "energy_per_cm": member.energy_per_cm,
        "energy_uncertainty_per_cm": member.uncertainty_per_cm,
        "effective_quantum_number": member.effective,
        "vacuum_wavelength_nm": 1e7 / wavenumber,
        "wavenumber_per_cm": wavenumber,
        "oscillator_strength": oscillator_strength,
        "computed": member.origin == PositionOrigin::Computed,
    })
}
