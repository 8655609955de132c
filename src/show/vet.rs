//! The answer of `vet`.

use std::collections::HashMap;

use serde_json::{Map, Value, json};
use vocabulary::light::constants::PER_CM_PER_EV;

use super::line::{line_object, multiplet_cell, position_cell, rate_cell, transition_cell};
use super::number::{percent, percent_in_table, short};
use super::physics::physics_notes;
use super::prior::prior_note;
use super::scan::{temperature, thinned, word};
use super::sheet::{Align, Column, Context, Sheet};
use super::unjudged::{unjudged_notes, unrated_value};
use super::window::{lower_bound_note, sources_cell};
use crate::advise::vet::{ALTERNATIVES_NM, Alternative, Answer, Interferer, Question, ScanPoint};
use crate::advise::{Placed, Verdict};

/// Below this part of the target's light an interferer is not worth a row; JSON holds down to a
/// thousandth of it.
pub const WORTH_A_ROW: f64 = 1e-5;
/// How many rows the table shows.
const ROWS: usize = 12;

const COLUMNS: [Column; 7] = [
    Column::whole("interferer\nnm", Align::Left),
    Column::whole("distance\nnm", Align::Right),
    Column::whole("species", Align::Left),
    Column::wrapped("lower → upper", Align::Left),
    Column::whole("rate\ns⁻¹", Align::Left),
    Column::whole("part of\ntarget", Align::Right),
    Column::whole("source", Align::Left),
];

/// Builds the sheet of a vetted line.
pub fn vet(answer: &Answer, question: &Question, context: Context) -> Sheet {
    let groups = groups(&answer.interferers);
    let shown: Vec<&Group<'_>> = groups
        .iter()
        .filter(|g| g.fraction >= WORTH_A_ROW)
        .collect();
    let notes = notes(answer, &context, shown.len());
    Sheet {
        headline: headline(answer, question),
        columns: COLUMNS.to_vec(),
        rows: shown.iter().take(ROWS).map(|g| row(g, answer)).collect(),
        object: object(answer, context, &notes),
        notes,
        list: "interferers",
    }
}

fn name(species: impl std::fmt::Display, placed: &Placed) -> String {
    format!(
        "{species} {:.3} nm ({})",
        placed.wavelength_nm, placed.medium
    )
}

fn headline(answer: &Answer, question: &Question) -> Vec<String> {
    let width_nm = question.width.at_nm(answer.placed.vacuum_nm);
    let components = match answer.components {
        1 => String::new(),
        n => format!(", {n} components"),
    };
    let mut out = vec![format!(
        "{} at {} nm (FWHM){components}: {}.",
        name(answer.line.species, &answer.feature.placed),
        short(width_nm),
        answer.verdict
    )];
    out.push(match answer.interference {
        Some(i) if i.fraction == 0.0 => {
            format!("No rated light of other species there{}.", own(answer))
        }
        Some(i) => format!(
            "{} of other species there: {} of its own (68 % interval {} to {}){}.",
            if answer.verdict.central == Verdict::Unrated {
                "Rated light"
            } else {
                "Light"
            },
            percent(i.fraction),
            percent(i.low),
            percent(i.high),
            own(answer)
        ),
        None => "Its own light is not known, so no part can be given.".to_owned(),
    });
    out.extend(resolving_words(answer, width_nm));
    out.push(alternative_words(answer));
    out
}

fn own(answer: &Answer) -> String {
    match answer.feature.own_species_fraction {
        Some(own) if own >= WORTH_A_ROW => {
            format!(
                "; other lines of {} add {}",
                answer.line.species,
                percent(own)
            )
        }
        _ => String::new(),
    }
}

fn resolving_words(answer: &Answer, width_nm: f64) -> Option<String> {
    answer.interference?;
    let now = answer.placed.vacuum_nm / width_nm;
    Some(match answer.clear_at_resolving_power {
        Some(power) => format!(
            "Clear of the rated lines from resolving power {} upwards (here: {}).",
            round(power),
            round(now)
        ),
        None => "Clear of the rated lines at no resolving power: the line's own width overlaps \
                 with theirs."
            .to_owned(),
    })
}

/// Two significant digits, rounded up: a resolving power that suffices.
fn round(power: f64) -> f64 {
    let unit = 10_f64.powf(power.log10().floor() - 1.0);
    (power / unit - 1e-9).ceil() * unit
}

fn alternative_words(answer: &Answer) -> String {
    let species = answer.line.species;
    if answer.judged_alternatives == 0 {
        return format!("No other rated line of {species} within {ALTERNATIVES_NM} nm.");
    }
    if answer.alternatives.is_empty() {
        let count = answer.judged_alternatives;
        let which = if count == 1 {
            format!(
                "The one other rated line of {species} within {ALTERNATIVES_NM} nm is not clear"
            )
        } else {
            format!("None of {count} other lines of {species} within {ALTERNATIVES_NM} nm is clear")
        };
        return format!("{which}.");
    }
    let words: Vec<String> = answer.alternatives.iter().map(one_alternative).collect();
    format!(
        "Clear lines of {species} within {ALTERNATIVES_NM} nm, the brightest first: {}.",
        words.join(", ")
    )
}

fn one_alternative(alternative: &Alternative) -> String {
    let mut words: Vec<String> = Vec::new();
    if let Some(strength) = alternative.relative_strength {
        words.push(format!("{} of its light", percent(strength)));
    }
    if alternative.verdict.high != Verdict::Clear {
        words.push(alternative.verdict.to_string());
    }
    let position = alternative.placed.wavelength_nm;
    if words.is_empty() {
        format!("{position:.3}")
    } else {
        format!("{position:.3} ({})", words.join(", "))
    }
}

/// The components of one feature of another species.
struct Group<'a> {
    /// The one that does most.
    lead: &'a Interferer,
    /// What all of them do.
    fraction: f64,
    components: usize,
}

/// Features by what they do, the worst first.
fn groups(interferers: &[Interferer]) -> Vec<Group<'_>> {
    let mut out: Vec<Group<'_>> = Vec::new();
    let mut place: HashMap<usize, usize> = HashMap::new();
    for one in interferers {
        match place.get(&one.feature) {
            Some(&index) => {
                out[index].fraction += one.fraction;
                out[index].components += 1;
            }
            None => {
                place.insert(one.feature, out.len());
                out.push(Group {
                    lead: one,
                    fraction: one.fraction,
                    components: 1,
                });
            }
        }
    }
    out.sort_by(|a, b| b.fraction.total_cmp(&a.fraction));
    out
}

fn row(group: &Group<'_>, answer: &Answer) -> Vec<String> {
    let interferer = group.lead;
    let line = &interferer.line;
    let transition = match group.components {
        1 => transition_cell(line),
        n => format!("{}\n({n} components)", multiplet_cell(line)),
    };
    let name_medium = interferer.placed.medium != answer.placed.medium;
    let mut position = position_cell(&interferer.placed, name_medium);
    if interferer.order > 1 {
        position.push_str(&format!("\norder {}", interferer.order));
    }
    let wing = if interferer.wing { "\nwing" } else { "" };
    vec![
        position,
        format!("{:+.4}", interferer.offset_nm),
        line.species.to_string(),
        transition,
        rate_cell(line.rate_per_s, line.rate_relative_uncertainty),
        format!("{}{wing}", percent_in_table(group.fraction)),
        sources_cell(std::iter::once(line)),
    ]
}

fn notes(answer: &Answer, context: &Context, worthy: usize) -> Vec<String> {
    let mut notes = Vec::new();
    if !answer.feature.remarks.is_empty() {
        let target = name(answer.line.species, &answer.feature.placed);
        notes.push(format!("{target}: {}.", answer.feature.remarks.join("; ")));
    }
    if worthy > ROWS {
        notes.push(format!(
            "Shown: the {ROWS} strongest of {worthy} interferers above 0.001 %."
        ));
    }
    notes.extend(prior_note(
        std::slice::from_ref(&answer.feature),
        answer.physics.model,
    ));
    notes.extend(scan_notes(answer));
    notes.extend(unjudged_notes(&answer.unrated));
    notes.extend(self_absorption_note(answer));
    if answer.interferers.iter().any(|i| i.order > 1) {
        notes.push(
            "Higher orders: the grating is taken to be as efficient there as in first order, with \
             no filter in front that sorts orders."
                .into(),
        );
    }
    if !context.assumed.is_empty() {
        notes.push(format!("Assumed: {}.", context.assumed.join(", ")));
    }
    notes.extend(physics_notes(&answer.physics));
    notes.extend(lower_bound_note(&answer.lower_bounds));
    let unstated = |line: &vocabulary::spectrum::Line| {
        line.rate_per_s.is_some() && line.rate_relative_uncertainty.is_none()
    };
    if unstated(&answer.line) || answer.interferers.iter().any(|i| unstated(&i.line)) {
        notes.push("±? marks rates whose source states no uncertainty; 50 % is taken.".into());
    }
    if answer.placed.extrapolated {
        notes.push("The index of air is extrapolated here (published for 300–1690 nm).".into());
    }
    notes.extend(context.source_notes());
    notes
}

/// The interference by temperature and by density.
fn scan_notes(answer: &Answer) -> Vec<String> {
    let written = |points: &[ScanPoint], at: &dyn Fn(&ScanPoint) -> Option<String>| -> String {
        let known: Vec<&ScanPoint> = points.iter().filter(|p| p.fraction.is_some()).collect();
        let words: Vec<String> = thinned(known)
            .iter()
            .filter_map(|p| Some(format!("{} at {}", percent(p.fraction?), at(p)?)))
            .collect();
        words.join(", ")
    };
    let ev = |p: &ScanPoint| Some(temperature(p.kt_per_cm / PER_CM_PER_EV));
    let density = |p: &ScanPoint| Some(format!("{:.1e} m⁻³", p.electron_density_per_m3?));
    let scans = [
        ("temperature", written(&answer.scan, &ev)),
        ("density", written(&answer.density_scan, &density)),
    ];
    scans
        .into_iter()
        .filter(|(_, words)| !words.is_empty())
        .map(|(what, words)| {
            format!("Light of the rated lines of other species by electron {what}: {words}.")
        })
        .collect()
}

fn scan_value(point: &ScanPoint) -> Value {
    json!({
        "electron_temperature_ev": point.kt_per_cm / PER_CM_PER_EV,
        "electron_density_per_m3": point.electron_density_per_m3,
        "interference_fraction": point.fraction,
        "verdict": word(point.fraction),
    })
}

fn self_absorption_note(answer: &Answer) -> Option<String> {
    let absorbed = answer.self_absorption;
    let what = if absorbed.resonance {
        "A resonance line: "
    } else {
        ""
    };
    match absorbed.depth_and_left {
        Some((depth, left)) => Some(format!(
            "{what}{} column of this density has the optical depth {} at line centre and lets {} of \
             the line's light out (uniform, Voigt profile); the verdict does not count that in.",
            if what.is_empty() { "A" } else { "a" },
            short(depth),
            percent(left)
        )),
        None if absorbed.resonance => Some(
            "A resonance line: the plasma may take its light back, and it then looks weaker than \
             here; give --column-density for an estimate."
                .into(),
        ),
        None => None,
    }
}

fn object(answer: &Answer, context: Context, notes: &[String]) -> Map<String, Value> {
    let mut object = context.object(notes);
    let mut put = |key: &str, value: Value| object.insert(key.to_owned(), value);
    let mut target = line_object(&answer.line, &answer.placed);
    target.insert("components".into(), json!(answer.components));
    put("target", Value::Object(target));
    let interference = answer.interference;
    put(
        "interference_fraction",
        json!(interference.map(|i| i.fraction)),
    );
    put("interference_low", json!(interference.map(|i| i.low)));
    put("interference_high", json!(interference.map(|i| i.high)));
    put("verdict", json!(answer.verdict.central.word()));
    put("verdict_range", json!(answer.verdict.to_string()));
    put("remarks", json!(answer.feature.remarks));
    put("unlisted_chance", json!(answer.feature.unlisted_chance));
    put("prior_chance", json!(answer.feature.prior_chance));
    put(
        "own_species_fraction",
        json!(answer.feature.own_species_fraction),
    );
    put(
        "interferers",
        answer.interferers.iter().filter_map(interferer).collect(),
    );
    put(
        "clear_at_resolving_power",
        json!(answer.clear_at_resolving_power),
    );
    put(
        "alternatives",
        answer.alternatives.iter().map(alternative).collect(),
    );
    put("judged_alternatives", json!(answer.judged_alternatives));
    let absorbed = answer.self_absorption;
    put(
        "self_absorption",
        json!({
            "resonance_line": absorbed.resonance,
            "optical_depth": absorbed.depth_and_left.map(|d| d.0),
            "light_fraction_left": absorbed.depth_and_left.map(|d| d.1),
        }),
    );
    put("scan", answer.scan.iter().map(scan_value).collect());
    put(
        "density_scan",
        answer.density_scan.iter().map(scan_value).collect(),
    );
    let pressure = answer.pressure;
    put("stark_fwhm_nm", json!(pressure.stark.map(|w| w.fwhm_nm)));
    put(
        "van_der_waals_fwhm_nm",
        json!(pressure.van_der_waals.map(|w| w.fwhm_nm)),
    );
    put("unrated", unrated_value(&answer.unrated));
    object
}

fn interferer(interferer: &Interferer) -> Option<Value> {
    if interferer.fraction < 1e-3 * WORTH_A_ROW {
        return None;
    }
    let mut object = line_object(&interferer.line, &interferer.placed);
    let mut put = |key: &str, value: Value| object.insert(key.to_owned(), value);
    put("offset_nm", json!(interferer.offset_nm));
    put("interference_fraction", json!(interferer.fraction));
    put(
        "interference_relative_uncertainty",
        json!(interferer.relative_sigma),
    );
    put("wing", json!(interferer.wing));
    put("order", json!(interferer.order));
    put("feature", json!(interferer.feature));
    Some(Value::Object(object))
}

fn alternative(alternative: &Alternative) -> Value {
    let mut object = line_object(&alternative.line, &alternative.placed);
    let mut put = |key: &str, value: Value| object.insert(key.to_owned(), value);
    put("relative_strength", json!(alternative.relative_strength));
    put("interference_fraction", json!(alternative.fraction));
    put("verdict", json!(alternative.verdict.central.word()));
    put("verdict_range", json!(alternative.verdict.to_string()));
    Value::Object(object)
}
