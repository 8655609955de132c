//! The answer of `contrast`.

use serde_json::{Value, json};
use vocabulary::light::{Air, Medium};

use super::number::percent;
use super::sheet::{Align, Column, Context, Sheet};
use crate::advise::contrast::{Comparison, Contrast, Pair, Trend};
use crate::advise::placed;

const COLUMNS: [Column; 9] = [
    Column::whole("species", Align::Left),
    Column::wrapped("in both", Align::Right),
    Column::wrapped("only first", Align::Right),
    Column::wrapped("only second", Align::Right),
    Column::wrapped("offset (pm)", Align::Right),
    Column::wrapped("spread (pm)", Align::Right),
    Column::wrapped("beyond 3 sigma", Align::Right),
    Column::wrapped("rate ratio", Align::Right),
    Column::wrapped("rates beyond 25 %", Align::Right),
];

/// Two sources side by side.
pub fn contrast(
    answer: &Contrast,
    not_held: &[String],
    citations: Vec<(String, String, String)>,
) -> Sheet {
    let notes = notes(answer, not_held);
    let context = Context {
        command: "contrast",
        medium: "auto".into(),
        conditions: [(
            "air".to_owned(),
            json!("Ciddor 1996, 15 °C, 101325 Pa, dry, 450 ppm CO2"),
        )]
        .into_iter()
        .collect(),
        sources: citations
            .into_iter()
            .filter(|(key, ..)| *key == answer.keys.0 || *key == answer.keys.1)
            .map(|(key, citation, licence)| (key, (citation, licence)))
            .collect(),
        ..Context::default()
    };
    let mut object = context.object(&notes);
    object.insert("first".into(), json!(answer.keys.0));
    object.insert("second".into(), json!(answer.keys.1));
    let species = answer
        .species
        .iter()
        .map(|(species, c)| comparison_object(&species.to_string(), c));
    object.insert("species".into(), Value::Array(species.collect()));
    object.insert("total".into(), comparison_object("all", &answer.total));
    object.insert("trend".into(), trend_object(answer.trend));
    object.insert("decades".into(), decades_object(answer));
    let list = |pairs: &[Pair]| Value::Array(pairs.iter().map(pair_object).collect());
    object.insert("worst_positions".into(), list(&answer.worst_positions));
    object.insert("worst_rates".into(), list(&answer.worst_rates));
    let shared = answer.species.iter().filter(|(_, c)| c.both > 0);
    let mut rows: Vec<Vec<String>> = shared
        .map(|(species, c)| comparison_row(&species.to_string(), c))
        .collect();
    rows.push(comparison_row("all", &answer.total));
    Sheet {
        headline: headline(answer),
        columns: COLUMNS.to_vec(),
        rows,
        notes,
        object,
        list: "species",
    }
}

fn headline(answer: &Contrast) -> Vec<String> {
    let (first, second) = &answer.keys;
    let c = &answer.total;
    vec![
        format!(
            "{} lines are in both {first} and {second}, {} only in {first}, {} only in {second}.",
            c.both, c.only_first, c.only_second
        ),
        trend_words(answer),
    ]
}

fn trend_words(answer: &Contrast) -> String {
    let (first, second) = &answer.keys;
    match answer.trend {
        Trend::TooFew => "Too few lines are in both to tell how positions compare.".into(),
        Trend::None => "Positions show no offset that most lines share.".into(),
        Trend::SecondInAir => format!(
            "Wavelengths of {second} are shorter by what the index of air makes of them: they are \
             in air and were declared as vacuum, or those of {first} the other way round."
        ),
        Trend::FirstInAir => format!(
            "Wavelengths of {first} are shorter by what the index of air makes of them: they are \
             in air and were declared as vacuum, or those of {second} the other way round."
        ),
        Trend::Relative(share) => format!(
            "Wavelengths of {second} differ by one fraction, {share:+.2e}, from those of {first}: \
             a calibration."
        ),
        Trend::Constant(nm) => format!(
            "Wavelengths of {second} differ by one length, {nm:+.2e} nm, from those of {first}: a \
             zero point."
        ),
        Trend::ConstantPerCm(per_cm) => format!(
            "Wavenumbers of {second} differ by one amount, {per_cm:+.2e} cm-1, from those of \
             {first}: a ground level or an energy scale."
        ),
    }
}

fn trend_object(trend: Trend) -> Value {
    match trend {
        Trend::TooFew => json!({"kind": "too few lines"}),
        Trend::None => json!({"kind": "none"}),
        Trend::SecondInAir => json!({"kind": "second in air"}),
        Trend::FirstInAir => json!({"kind": "first in air"}),
        Trend::Relative(fraction) => json!({"kind": "relative", "fraction": fraction}),
        Trend::Constant(nm) => json!({"kind": "constant", "offset_nm": nm}),
        Trend::ConstantPerCm(per_cm) => json!({"kind": "constant", "offset_per_cm": per_cm}),
    }
}

fn comparison_object(name: &str, c: &Comparison) -> Value {
    json!({
        "species": name,
        "both": c.both,
        "only_first": c.only_first,
        "only_second": c.only_second,
        "offset_nm": c.offset_nm,
        "offset_spread_nm": c.offset_spread_nm,
        "beyond_three_sigma": c.beyond_three_sigma,
        "rated": c.rated,
        "rate_ratio": c.rate_ratio,
        "rate_spread_dex": c.rate_spread_dex,
        "rates_beyond_quarter": c.beyond_quarter,
    })
}

fn comparison_row(name: &str, c: &Comparison) -> Vec<String> {
    let pm = |nm: Option<f64>| nm.map_or_else(String::new, |nm| picometres(nm, 2));
    let some = |count: usize, of: usize| {
        if of == 0 {
            String::new()
        } else {
            count.to_string()
        }
    };
    vec![
        name.to_owned(),
        c.both.to_string(),
        c.only_first.to_string(),
        c.only_second.to_string(),
        pm(c.offset_nm),
        pm(c.offset_spread_nm),
        some(c.beyond_three_sigma, c.both),
        c.rate_ratio.map_or_else(String::new, |r| format!("{r:.3}")),
        some(c.beyond_quarter, c.rated),
    ]
}

fn decades_object(answer: &Contrast) -> Value {
    let list = answer.decades.iter().map(|d| {
        json!({
            "rate_from_per_s": 10f64.powi(d.exponent),
            "lines": d.lines,
            "rate_ratio": d.rate_ratio,
            "rate_spread_dex": d.rate_spread_dex,
        })
    });
    Value::Array(list.collect())
}

fn pair_object(pair: &Pair) -> Value {
    let shown = placed(
        pair.wavenumber_per_cm,
        pair.offset_uncertainty_per_cm,
        Medium::Auto,
        Air::standard(),
    );
    json!({
        "species": pair.species.to_string(),
        "wavelength_nm": shown.as_ref().ok().map(|s| s.wavelength_nm),
        "medium": shown.ok().map(|s| format!("{:?}", s.medium).to_lowercase()),
        "wavenumber_per_cm": pair.wavenumber_per_cm,
        "offset_nm": pair.offset_nm(),
        "offset_per_cm": pair.offset_per_cm,
        "offset_in_sigma": pair.pull(),
        "rate_per_s": pair.rate_per_s,
        "rate_ratio": pair.rate_ratio,
        "first_row": pair.rows.0,
        "second_row": pair.rows.1,
    })
}

fn notes(answer: &Contrast, not_held: &[String]) -> Vec<String> {
    let mut notes: Vec<String> = not_held
        .iter()
        .map(|request| format!("Nothing is held of {request}."))
        .collect();
    let c = &answer.total;
    if c.rated > 0 {
        notes.push(format!(
            "Rates: {} of {} differ by more than 25 % ({}); median ratio {:.3}, spread {:.2} dex.",
            c.beyond_quarter,
            c.rated,
            percent(c.beyond_quarter as f64 / c.rated as f64),
            c.rate_ratio.unwrap_or(f64::NAN),
            c.rate_spread_dex.unwrap_or(f64::NAN),
        ));
        let list: Vec<String> = answer
            .decades
            .iter()
            .map(|d| {
                format!(
                    "1e{} s-1: {:.3}, {:.2} dex ({})",
                    d.exponent, d.rate_ratio, d.rate_spread_dex, d.lines
                )
            })
            .collect();
        notes.push(format!(
            "Median ratio and spread by strength, rates of {} from (number of lines): {}.",
            answer.keys.0,
            list.join("; ")
        ));
    }
    for (what, pairs) in [
        ("Furthest apart in position", &answer.worst_positions),
        ("Furthest apart in rate", &answer.worst_rates),
    ] {
        if !pairs.is_empty() {
            let list: Vec<String> = pairs.iter().map(|p| pair_words(p, what)).collect();
            notes.push(format!("{what}: {}.", list.join("; ")));
        }
    }
    notes.push(
        "Offset and ratio are the second source against the first, medians with robust spreads; \
         1 pm = 0.001 nm. Species without a line in both are in the other forms of this answer."
            .to_owned(),
    );
    notes
}

fn pair_words(pair: &Pair, what: &str) -> String {
    let shown = placed(pair.wavenumber_per_cm, 0.0, Medium::Auto, Air::standard());
    let nm = shown.map_or_else(|_| pair.vacuum_nm(), |s| s.wavelength_nm);
    let at = format!("{} {nm:.4} nm", pair.species);
    let rows = format!("rows {} and {}", pair.rows.0, pair.rows.1);
    if what.ends_with("rate") {
        format!(
            "{at} {} times ({rows})",
            times(pair.rate_ratio.unwrap_or(f64::NAN))
        )
    } else {
        format!(
            "{at} {} pm, {:.1} sigma ({rows})",
            picometres(pair.offset_nm(), 2),
            pair.pull().abs()
        )
    }
}

/// A ratio with three digits or so.
fn times(ratio: f64) -> String {
    match ratio {
        r if (0.01..1000.0).contains(&r) => format!("{r:.3}"),
        r => format!("{r:.2e}"),
    }
}

/// A length in pm; one that rounds to nothing has no sign.
fn picometres(nm: f64, decimals: usize) -> String {
    let text = format!("{:.decimals$}", 1e3 * nm);
    match text.strip_prefix('-') {
        Some(rest) if rest.chars().all(|c| c == '0' || c == '.') => rest.to_owned(),
        _ => text,
    }
}
