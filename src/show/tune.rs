//! The answer of `tune`.

use std::collections::BTreeSet;

use serde_json::{Map, Value, json};
use vocabulary::light::PositionMedium;
use vocabulary::spectrum::Level;

use super::line::{level_name, level_object, line_object, transition_cell, transition_of};
use super::number::{percent, percent_in_table, plus_minus, rate, with_uncertainty};
use super::sheet::{Align, Column, Context, Sheet};
use crate::advise::hyperfine::Component;
use crate::advise::tune::{
    Answer, Atom, Cycling, MHZ_PER_CM, POPULATED, Question, Transition, TwoPhoton,
};

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

/// Columns of two photons.
const TWO_PHOTON_COLUMNS: [Column; 6] = [
    Column::whole("laser\nnm", Align::Left),
    Column::whole("species", Align::Left),
    Column::wrapped("lower →\nupper", Align::Left),
    Column::whole("lower\npopulation", Align::Right),
    Column::wrapped("nearest\nintermediate", Align::Left),
    Column::whole("detuning\nGHz", Align::Right),
];

/// How the answer is to be shown.
pub struct TuneWish {
    /// What was asked, as typed.
    pub typed: String,
    /// Show only so many, the strongest.
    pub strongest: Option<usize>,
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
    let list = shown
        .iter()
        .map(|t| transition_object(t, atoms, question))
        .collect();
    object.insert("transitions".into(), Value::Array(list));
    Sheet {
        headline: headline(&shown, answer.transitions.len(), &wish.typed),
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

fn headline(shown: &[&Transition], all: usize, typed: &str) -> Vec<String> {
    if shown.is_empty() {
        return vec![format!(
            "{typed}: no held line from a populated level lies in this range (levels with at least \
             {} of the atoms, or metastable ones where asked for).",
            percent(POPULATED)
        )];
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
            let bound = if t.decays.unrated().next().is_some() {
                "≤ "
            } else {
                ""
            };
            format!("{bound}{}", unit(ns))
        }
        (None, None) => "lifetime ?".into(),
    }
}

fn cycling_cell(t: &Transition) -> String {
    let back = t
        .branching_fraction
        .map_or_else(|| "?".into(), back_in_table);
    let mut cell = match (t.cycling, t.cycling.photons()) {
        (Cycling::Closed, _) => format!("{back} closed"),
        (Cycling::Leaks { .. }, Some(n)) => format!("{back} leaks\n{} photons", photons(n)),
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

fn notes(
    shown: &[&Transition],
    answer: &Answer,
    atoms: &[Atom],
    question: &Question,
    context: &Context,
) -> Vec<String> {
    let mut notes = Vec::new();
    for t in shown {
        notes.extend(remarks(t));
    }
    notes.truncate(MOST_REMARKS);
    notes.extend(hyperfine_notes(shown, question));
    notes.extend(absorption_notes(shown, question));
    notes.extend(laser_notes(shown, question));
    let few: Vec<String> = atoms
        .iter()
        .filter(|a| a.listed && a.mixture.is_some() && !a.replaces_mixture)
        .map(|a| format!("{} ({})", a.spectrum.species, a.spectrum.strengths.len()))
        .collect();
    if !few.is_empty() {
        notes.push(format!(
            "Of single isotopes only the lines of papers are held: {}; ask for the element to see \
             its other transitions.",
            few.join(", ")
        ));
    }
    if !answer.lower_bounds.is_empty() {
        let names: Vec<String> = answer
            .lower_bounds
            .iter()
            .map(|&a| atoms[a].spectrum.species.to_string())
            .collect();
        notes.push(format!(
            "Populations are upper bounds (levels or the series limit are missing): {}.",
            names.join(", ")
        ));
    }
    if !context.assumed.is_empty() {
        notes.push(format!("Assumed: {}.", context.assumed.join(", ")));
    }
    notes.extend(PHYSICS.map(str::to_owned));
    notes.extend(context.source_notes());
    notes
}

/// So many remarks on single transitions are printed; JSON carries the rest in its own keys.
const MOST_REMARKS: usize = 12;

const PHYSICS: [&str; 2] = [
    "Populated: at least 0.01 % of the atoms, by Boltzmann at the gas temperature. Cross-sections are \
     peak values for unpolarised atoms; natural widths add the decay rates of both levels; f is \
     that of absorption.",
    "Saturation is that of a two-level atom, π h c Γ/(3 λ³). Closed: no other held level is reached \
     by electric dipole decay; hyperfine levels and repumping are not counted, nor are fields. \
     Photons: the mean number scattered before an atom is lost.",
];

fn remarks(t: &Transition) -> Vec<String> {
    let mut out = Vec::new();
    let name = name(t);
    if let Some((missing, sigma)) = t.decays.missing_fraction() {
        let unrated: Vec<String> = t.decays.unrated().map(|l| level_name(l)).take(4).collect();
        let to = if unrated.is_empty() {
            String::new()
        } else {
            format!("; not rated: to {}", unrated.join(", "))
        };
        if missing > (2.0 * sigma).max(0.01) {
            out.push(format!(
                "{name}: the held decays make up {} of the measured decay rate{to}.",
                percent(1.0 - missing)
            ));
        } else if missing < -(3.0 * sigma).max(0.03) {
            out.push(format!(
                "{name}: the held decays exceed the measured decay rate by {}.",
                percent(-missing)
            ));
        }
    } else if t.cycling == Cycling::Unrated {
        let unrated: Vec<String> = t.decays.unrated().map(|l| level_name(l)).take(4).collect();
        if !unrated.is_empty() {
            out.push(format!(
                "{name}: decays to {} are not rated.",
                unrated.join(", ")
            ));
        }
    }
    if !t.neighbours.is_empty() {
        let close: Vec<String> = t
            .neighbours
            .iter()
            .map(|n| {
                let part = n.relative_absorption.map_or_else(String::new, |r| {
                    format!(", {r:.1e} of its absorption at equal amounts")
                });
                format!("{} at {:+.0} MHz{part}", n.species, n.offset_mhz)
            })
            .collect();
        out.push(format!("{name}: also absorbed by {}.", close.join("; ")));
    }
    out
}

fn hyperfine_notes(shown: &[&Transition], question: &Question) -> Vec<String> {
    if !question.hyperfine {
        return Vec::new();
    }
    let mut out = vec![
        "Hyperfine components: sub-Doppler positions as distances from the centre of gravity, shares \
         of the line strength by 6j symbols (sum 1); first order, no fields."
            .to_owned(),
    ];
    let mut reasons: Vec<&str> = shown.iter().filter_map(|t| t.no_components).collect();
    reasons.sort_unstable();
    reasons.dedup();
    for reason in reasons {
        let of: Vec<String> = shown
            .iter()
            .filter(|t| t.no_components == Some(reason))
            .map(|t| name(t))
            .take(6)
            .collect();
        out.push(format!("No components of {}: {reason}.", of.join(", ")));
    }
    out
}

fn absorption_notes(shown: &[&Transition], question: &Question) -> Vec<String> {
    if question.density_per_cm3.is_none() {
        return Vec::new();
    }
    let absorbed: Vec<String> = shown
        .iter()
        .filter_map(|t| Some(format!("{} {}", name(t), percent(t.absorbed_fraction?))))
        .collect();
    match absorbed.is_empty() {
        true => vec!["Absorption of the cell: not known (no rate, weight or population).".into()],
        false => vec![format!(
            "Absorption of weak light at line centre over {} cm: {}; without hyperfine structure.",
            question.cell_cm,
            absorbed.join(", ")
        )],
    }
}

/// How large a beam each laser saturates.
fn laser_notes(shown: &[&Transition], question: &Question) -> Vec<String> {
    let mut out = Vec::new();
    for (index, laser) in question.lasers.iter().enumerate() {
        let Some(power) = laser.power_mw else {
            continue;
        };
        let of: Vec<String> = shown
            .iter()
            .filter(|t| t.lasers.contains(&index))
            .filter_map(|t| {
                let area = power / t.saturation_mw_per_cm2?;
                Some(format!("{} {} cm²", name(t), three_digits(area)))
            })
            .take(8)
            .collect();
        if !of.is_empty() {
            out.push(format!(
                "{}, {power} mW: saturates, on resonance and with a line narrower than the natural \
                 width, beams up to {}.",
                laser.name,
                of.join(", ")
            ));
        }
    }
    out
}

fn transition_object(t: &Transition, atoms: &[Atom], question: &Question) -> Value {
    let mut object = line_object(&t.line, &t.placed);
    let mut put = |key: &str, value: Value| object.insert(key.to_owned(), value);
    let strengths = t.strengths;
    put("air_wavelength_nm", json!(t.air_nm));
    put("frequency_thz", json!(t.frequency_thz()));
    put(
        "frequency_uncertainty_mhz",
        json!(t.frequency_uncertainty_mhz()),
    );
    put(
        "oscillator_strength",
        json!(strengths.map(|s| s.oscillator_strength)),
    );
    put("natural_width_mhz", json!(t.natural_width_mhz));
    put("doppler_width_mhz", json!(t.doppler_width_mhz));
    put(
        "saturation_intensity_mw_per_cm2",
        json!(t.saturation_mw_per_cm2),
    );
    put("recoil_cm_per_s", json!(t.recoil_cm_per_s));
    put(
        "natural_cross_section_cm2",
        json!(strengths.and_then(|s| s.natural_cross_section_cm2)),
    );
    put(
        "doppler_cross_section_cm2",
        json!(strengths.map(|s| s.doppler_cross_section_cm2)),
    );
    put("branching_fraction", json!(t.branching_fraction));
    put("cycling", json!(t.cycling.word()));
    put("leak_fraction", json!(leak_fraction(t.cycling)));
    put("photons_before_loss", json!(t.cycling.photons()));
    let leaks: Vec<Value> = t
        .leaks
        .iter()
        .map(|l| json!({"level": level_object(&l.level), "fraction": l.fraction}))
        .collect();
    put("leaks", Value::Array(leaks));
    put("lower_population", json!(t.lower_population));
    put("isotope_fraction", json!(t.isotope_fraction));
    put("upper_lifetime_ns", json!(t.decays.lifetime_ns()));
    put(
        "upper_lifetime_uncertainty_ns",
        json!(t.decays.measured_ns.map(|m| m.1)),
    );
    put(
        "upper_lifetime_measured",
        json!(t.decays.measured_ns.is_some()),
    );
    put("lifetime_paper", json!(paper(t, atoms)));
    put("held_decay_rate_per_s", json!(t.decays.sum_per_s));
    put(
        "missing_decay_fraction",
        json!(t.decays.missing_fraction().map(|m| m.0)),
    );
    let unrated: Vec<Value> = t.decays.unrated().map(|l| level_object(l)).collect();
    put("unrated_decays_to", Value::Array(unrated));
    put("absorbed_fraction", json!(t.absorbed_fraction));
    let lasers: Vec<&str> = t
        .lasers
        .iter()
        .map(|&l| question.lasers[l].name.as_str())
        .collect();
    put("lasers", json!(lasers));
    let components: Vec<Value> = t
        .components
        .iter()
        .map(|c| component_object(t, c))
        .collect();
    put("hyperfine", Value::Array(components));
    let neighbours: Vec<Value> = t
        .neighbours
        .iter()
        .map(|n| {
            json!({
                "species": n.species.to_string(),
                "vacuum_wavelength_nm": n.vacuum_nm,
                "offset_mhz": n.offset_mhz,
                "relative_absorption": n.relative_absorption,
            })
        })
        .collect();
    put("neighbours", Value::Array(neighbours));
    Value::Object(object)
}

fn leak_fraction(cycling: Cycling) -> Option<f64> {
    match cycling {
        Cycling::Closed => Some(0.0),
        Cycling::Leaks { fraction } | Cycling::AtMost { fraction } => Some(fraction),
        Cycling::Unrated => None,
    }
}

/// The paper of the lifetime: of the species, else of its mixture.
fn paper<'a>(t: &Transition, atoms: &'a [Atom]) -> Option<&'a str> {
    let upper = t.line.upper.as_ref()?;
    let own = atoms[t.atom].lifetimes.get(&upper.number);
    let of_mixture = || {
        let mixture = &atoms[atoms[t.atom].mixture?];
        let levels = &mixture.spectrum.levels;
        let twin = levels
            .iter()
            .find(|l| crate::advise::tune::same_level(upper, l))?;
        mixture.lifetimes.get(&twin.number)
    };
    own.or_else(of_mixture).map(|l| l.paper.as_str())
}

fn component_object(t: &Transition, c: &Component) -> Value {
    json!({
        "lower_f": c.lower_f.to_string(),
        "upper_f": c.upper_f.to_string(),
        "share": c.share,
        "offset_mhz": c.offset_mhz,
        "offset_uncertainty_mhz": c.offset_uncertainty_mhz,
        "frequency_thz": t.frequency_thz() + c.offset_mhz * 1e-6,
        "frequency_uncertainty_mhz": t.frequency_uncertainty_mhz().hypot(c.offset_uncertainty_mhz),
        "vacuum_wavelength_nm": 1e7 / (t.line.wavenumber_per_cm + c.offset_mhz / MHZ_PER_CM),
        "closed": c.closed,
    })
}

fn two_photon(
    answer: &Answer,
    atoms: &[Atom],
    question: &Question,
    context: Context,
    wish: &TuneWish,
) -> Sheet {
    let mut shown: Vec<&TwoPhoton> = answer.two_photon.iter().rev().collect();
    if let Some(count) = wish.strongest {
        // The nearer the intermediate level, the stronger.
        shown.sort_by(|a, b| {
            let far = |t: &TwoPhoton| t.detuning_ghz().map_or(f64::INFINITY, f64::abs);
            far(a).total_cmp(&far(b))
        });
        shown.truncate(count);
    }
    let mut notes = Vec::new();
    if !context.assumed.is_empty() {
        notes.push(format!("Assumed: {}.", context.assumed.join(", ")));
    }
    notes.push(
        "Two photons of one colour: one parity, ΔJ = 0 or J, J′ and 2 in a triangle. Two beams against \
         each other cancel the Doppler shift to first order: all atoms are excited at once, in a line \
         of the natural width of the upper level. Detuning: photon less first step. Strengths are \
         not computed."
            .into(),
    );
    notes.extend(context.source_notes());
    let mut object = context.object(&notes);
    let list = shown
        .iter()
        .map(|t| two_photon_object(t, atoms, question))
        .collect();
    object.insert("transitions".into(), Value::Array(list));
    let count = shown.len();
    let headline = if count == 0 {
        format!(
            "{}: no two-photon transition from a populated level is held in this range.",
            wish.typed
        )
    } else {
        let plural = if count == 1 {
            "transition"
        } else {
            "transitions"
        };
        format!(
            "{}: {count} two-photon {plural} from populated levels.",
            wish.typed
        )
    };
    Sheet {
        headline: vec![headline],
        columns: TWO_PHOTON_COLUMNS.to_vec(),
        rows: shown.iter().map(|t| two_photon_row(t, atoms)).collect(),
        notes,
        object,
        list: "transitions",
    }
}

fn two_photon_row(t: &TwoPhoton, atoms: &[Atom]) -> Vec<String> {
    let medium = match t.placed.medium {
        PositionMedium::Air => "air",
        PositionMedium::Vacuum => "vacuum",
    };
    vec![
        format!(
            "{} {medium}",
            six(t.placed.wavelength_nm, t.placed.uncertainty_nm)
        ),
        atoms[t.atom].spectrum.species.to_string(),
        transition_of(&t.lower, &t.upper),
        t.lower_population
            .map_or_else(|| "metastable".into(), percent_in_table),
        t.intermediate
            .as_deref()
            .map_or_else(|| "none held".into(), level_name),
        t.detuning_ghz()
            .map_or_else(|| "?".into(), |d| format!("{d:+.1}")),
    ]
}

fn two_photon_object(t: &TwoPhoton, atoms: &[Atom], question: &Question) -> Value {
    let level = |l: &Level| level_object(l);
    let mut object = Map::new();
    let mut put = |key: &str, value: Value| object.insert(key.to_owned(), value);
    let (photon, sigma) = t.photon_per_cm;
    put("species", json!(atoms[t.atom].spectrum.species.to_string()));
    put("wavelength_nm", json!(t.placed.wavelength_nm));
    put("wavelength_uncertainty_nm", json!(t.placed.uncertainty_nm));
    put("medium", json!(super::line::medium_word(t.placed.medium)));
    put("vacuum_wavelength_nm", json!(t.placed.vacuum_nm));
    put("wavenumber_per_cm", json!(photon));
    put("wavenumber_uncertainty_per_cm", json!(sigma));
    put("frequency_thz", json!(photon * MHZ_PER_CM * 1e-6));
    put("frequency_uncertainty_mhz", json!(sigma * MHZ_PER_CM));
    put("photons", json!(2));
    put("lower", level(&t.lower));
    put("upper", level(&t.upper));
    put(
        "intermediate",
        t.intermediate.as_deref().map_or(Value::Null, level),
    );
    put("detuning_ghz", json!(t.detuning_ghz()));
    put("lower_population", json!(t.lower_population));
    let lasers: Vec<&str> = t
        .lasers
        .iter()
        .map(|&l| question.lasers[l].name.as_str())
        .collect();
    put("lasers", json!(lasers));
    Value::Object(object)
}
