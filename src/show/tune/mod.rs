//! The answer of `tune`.

mod notes;
mod object;
mod two_photon;

use std::collections::BTreeSet;

use serde_json::Value;

use self::notes::notes;
use self::object::transition_object;
use self::two_photon::two_photon;
use super::line::{level_name, transition_cell};
use super::number::{percent, percent_in_table, plus_minus, rate, with_uncertainty};
use super::sheet::{Align, Column, Context, Sheet};
use crate::advise::hyperfine::Component;
use crate::advise::tune::{Answer, Atom, Cycling, POPULATED, Question, Transition};

/// Columns of one photon.
const COLUMNS: [Column; 8] = [
    Column::whole("air nm\nvacuum nm\nTHz", Align::Left),
    Column::whole("species", Align::Left),
    Column::wrapped("lower →\nupper\n(part of atoms)", Align::Left),
    Column::whole("rate s⁻¹\nf\nlifetime", Align::Left),
    Column::whole("natural\nDoppler\nMHz", Align::Right),
    Column::whole("natural\nDoppler\ncm²", Align::Right),
    Column::whole("saturation\nmW/cm²\nrecoil cm/s", Align::Right),
    Column::wrapped("back to start\nleaks to", Align::Left),
];

/// How the answer is to be shown.
pub struct TuneWish {
    /// What was asked, as typed.
    pub typed: String,
    /// Show only so many, the strongest.
    pub strongest: Option<usize>,
    /// Where to look when nothing was found.
    pub hint: Option<String>,
    /// The form of the answer needs the keys of each row.
    pub with_keys: bool,
}

/// Builds the sheet of a tuning range.
pub fn tune(
    answer: &Answer,
    atoms: &[Atom],
    question: &Question,
    context: Context,
    wish: &TuneWish,
) -> Sheet {
    if question.two_photons {
        return two_photon(answer, atoms, question, context, wish);
    }
    let shown = chosen(answer, wish.strongest);
    let mut notes = notes(&shown, answer, atoms, question, &context);
    if shown.len() < answer.transitions.len() {
        let (some, all) = (shown.len(), answer.transitions.len());
        notes.insert(
            0,
            format!("Shown: the {some} strongest of {all} transitions."),
        );
    }
    let mut object = context.object(&notes);
    // Thousands of rows have thousands of keys: they are made where they are printed.
    let list = shown
        .iter()
        .filter(|_| wish.with_keys)
        .map(|t| transition_object(t, atoms, question))
        .collect();
    object.insert("transitions".into(), Value::Array(list));
    Sheet {
        headline: headline(&shown, answer.transitions.len(), wish),
        columns: COLUMNS.to_vec(),
        rows: shown.iter().flat_map(|t| rows(t, question)).collect(),
        notes,
        object,
        list: "transitions",
    }
}

fn chosen(answer: &Answer, strongest: Option<usize>) -> Vec<&Transition> {
    let mut all: Vec<&Transition> = answer.transitions.iter().collect();
    if let Some(count) = strongest {
        all.sort_by(|a, b| b.weight().total_cmp(&a.weight()));
        all.truncate(count);
    }
    all.sort_by(|a, b| {
        b.line
            .wavenumber_per_cm
            .total_cmp(&a.line.wavenumber_per_cm)
    });
    all
}

fn headline(shown: &[&Transition], all: usize, wish: &TuneWish) -> Vec<String> {
    let typed = &wish.typed;
    if shown.is_empty() {
        let nothing = format!(
            "{typed}: no held line from a populated level lies in this range (levels with at least \
             {} of the atoms, or metastable ones where asked for).",
            percent(POPULATED)
        );
        return [nothing].into_iter().chain(wish.hint.clone()).collect();
    }
    let species: BTreeSet<String> = shown.iter().map(|t| t.line.species.to_string()).collect();
    let plural = if all == 1 {
        "transition"
    } else {
        "transitions"
    };
    let mut out = vec![format!(
        "{typed}: {all} {plural} from populated levels, {} species.",
        species.len()
    )];
    let closed: Vec<String> = shown
        .iter()
        .filter(|t| t.cycling == Cycling::Closed)
        .take(6)
        .map(|t| name(t))
        .collect();
    if !closed.is_empty() {
        out.push(format!("closed: {}.", closed.join(", ")));
    }
    out
}

fn name(t: &Transition) -> String {
    format!("{} {:.3}", t.line.species, t.placed.wavelength_nm)
}

fn rows(t: &Transition, question: &Question) -> Vec<Vec<String>> {
    let strengths = t.strengths;
    let unknown = || "?".to_owned();
    let number = |v: Option<f64>| v.map_or_else(unknown, |v| format!("{v:.3e}"));
    let mut rate_lines = match t.line.rate_per_s {
        Some(value) => {
            format!(
                "{}{}",
                rate(value),
                plus_minus(t.line.rate_relative_uncertainty)
            )
        }
        None => "not known".into(),
    };
    if let Some(s) = strengths {
        rate_lines.push_str(&format!("\nf {}", three_digits(s.oscillator_strength)));
    }
    rate_lines.push_str(&format!("\n{}", lifetime_cell(t)));
    let population = match t.lower_population {
        Some(p) => percent(p),
        None => "metastable".into(),
    };
    let lasers: Vec<&str> = t
        .lasers
        .iter()
        .map(|&l| question.lasers[l].name.as_str())
        .filter(|n| !n.is_empty())
        .collect();
    let mut out = vec![vec![
        position_cell(t),
        [&[t.line.species.to_string().as_str()][..], &lasers]
            .concat()
            .join("\n"),
        format!("{}\n({population})", transition_cell(&t.line)),
        rate_lines,
        format!(
            "{}\n{}",
            t.natural_width_mhz.map_or_else(unknown, three_digits),
            three_digits(t.doppler_width_mhz)
        ),
        format!(
            "{}\n{}",
            number(strengths.and_then(|s| s.natural_cross_section_cm2)),
            number(strengths.map(|s| s.doppler_cross_section_cm2))
        ),
        format!(
            "{}\n{}",
            t.saturation_mw_per_cm2.map_or_else(unknown, four_digits),
            four_digits(t.recoil_cm_per_s)
        ),
        cycling_cell(t),
    ]];
    out.extend(t.components.iter().map(|c| component_row(t, c)));
    out
}

fn position_cell(t: &Transition) -> String {
    let relative = t.line.wavenumber_uncertainty_per_cm / t.line.wavenumber_per_cm;
    let sigma = |nm: f64| nm * relative;
    let air = t.air_nm.map_or_else(|| "–".into(), |nm| six(nm, sigma(nm)));
    format!(
        "{air}\n{}\n{}",
        six(t.placed.vacuum_nm, sigma(t.placed.vacuum_nm)),
        with_uncertainty(
            t.frequency_thz(),
            (t.frequency_uncertainty_mhz() * 1e-6).max(1e-7)
        )
    )
}

/// At most six decimals: a smaller σ shows as one unit of the sixth.
fn six(nm: f64, sigma_nm: f64) -> String {
    with_uncertainty(nm, sigma_nm.max(1e-6))
}

fn three_digits(value: f64) -> String {
    digits(value, 3)
}

fn four_digits(value: f64) -> String {
    digits(value, 4)
}

fn digits(value: f64, count: i32) -> String {
    if !(1e-3..1e5).contains(&value) {
        return format!("{value:.*e}", (count - 1).max(0) as usize);
    }
    let decimals = (count - 1 - value.log10().floor() as i32).max(0) as usize;
    format!("{value:.decimals$}")
}

fn lifetime_cell(t: &Transition) -> String {
    let unit = |ns: f64| match ns {
        v if v < 1e3 => format!("{} ns", four_digits(v)),
        v if v < 1e6 => format!("{} µs", four_digits(v / 1e3)),
        v if v < 1e9 => format!("{} ms", four_digits(v / 1e6)),
        v => format!("{} s", four_digits(v / 1e9)),
    };
    match (t.decays.measured_ns, t.decays.lifetime_ns()) {
        (Some((ns, _)), _) => unit(ns),
        (None, Some(ns)) => {
            let bound = if t.decays.is_complete() { "" } else { "≤ " };
            format!("{bound}{}", unit(ns))
        }
        (None, None) => "lifetime ?".into(),
    }
}

fn cycling_cell(t: &Transition) -> String {
    let back = match (t.branching_fraction, t.decays.measured_ns) {
        (None, _) => "?".into(),
        (Some(back), None) if !t.decays.is_complete() => format!("≤ {}", back_in_table(back)),
        (Some(back), _) => back_in_table(back),
    };
    let mut cell = match (t.cycling, t.cycling.photons()) {
        (Cycling::Closed, _) => format!("{back} closed"),
        (Cycling::Leaks { .. }, Some(n)) => {
            let most = if back.starts_with('≤') { "≤ " } else { "" };
            format!("{back} leaks\n{most}{} photons", photons(n))
        }
        (Cycling::AtMost { .. }, Some(n)) => format!("{back}\n> {} photons", photons(n)),
        _ => format!("{back} unrated"),
    };
    if let Some(leak) = t.leaks.first().filter(|_| t.cycling != Cycling::Closed) {
        let doubt = if leak.fraction.is_none() { " ?" } else { "" };
        cell.push_str(&format!("\n{}{doubt}", level_name(&leak.level)));
    }
    cell
}

/// A branching fraction close to 1 keeps the digits that tell it from 1.
fn back_in_table(fraction: f64) -> String {
    match 1.0 - fraction {
        rest if rest > 0.0 && rest < 0.01 => format!("{:.3}%", 100.0 * fraction),
        _ => percent_in_table(fraction),
    }
}

fn photons(n: f64) -> String {
    if n < 1e4 {
        format!("{n:.1}")
    } else {
        format!("{n:.1e}")
    }
}

fn component_row(t: &Transition, component: &Component) -> Vec<String> {
    let closed = if component.closed { "closed" } else { "" };
    let mut row = vec![
        format!(
            "  {:+.2}({:.2}) MHz",
            component.offset_mhz, component.offset_uncertainty_mhz
        ),
        String::new(),
        format!("F {} → {}", component.lower_f, component.upper_f),
        format!("share {:.4}", component.share),
    ];
    row.resize(COLUMNS.len() - 1, String::new());
    row.push(closed.into());
    debug_assert!(t.components.len() > 1 || component.share > 0.0);
    row
}
