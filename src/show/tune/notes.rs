//! Sentences below the table of `tune`.

use super::{name, three_digits};
use crate::advise::tune::{Absorbed, Answer, Atom, Cycling, Question, Seen, Transition};
use crate::show::line::level_name;
use crate::show::number::percent;
use crate::show::sheet::Context;

/// All notes, the most particular first.
pub(super) fn notes(
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
    let bound = |t: &&Transition| {
        !t.decays.is_complete() && t.decays.measured_ns.is_none() && t.decays.sum_per_s > 0.0
    };
    if shown.iter().any(bound) {
        notes.push(BOUNDS.into());
    }
    notes.extend(context.source_notes());
    notes
}

/// So many remarks on single transitions are printed; JSON carries the rest in its own keys.
const MOST_REMARKS: usize = 12;

/// What stands below a table with bounds in it.
const BOUNDS: &str = "≤: decays that are not held or not rated would make it smaller, and widths and \
                      saturation larger.";

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
        if !t.decays.excited_states_listed {
            out.push(format!(
                "{name}: only lines from the ground term are held; it may decay to levels that are \
                 not."
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
    let known = || shown.iter().filter_map(|t| Some((*t, t.absorbed?)));
    let words = |with_structure: bool| -> Vec<String> {
        known()
            .filter(|(_, absorbed)| absorbed.offset_mhz.is_some() == with_structure)
            .map(|(t, absorbed)| absorbed_words(t, absorbed, question))
            .collect()
    };
    let cell = question.cell_cm;
    let (resolved, plain) = (words(true), words(false));
    let mut out = Vec::new();
    if !resolved.is_empty() {
        out.push(format!(
            "Absorption of weak light over {cell} cm at the strongest point of the hyperfine \
             structure: {}.",
            resolved.join(", ")
        ));
    }
    if !plain.is_empty() {
        let hyperfine = if question.hyperfine {
            ""
        } else {
            "; without hyperfine structure, which spreads it (--hyperfine)"
        };
        out.push(format!(
            "Absorption of weak light at line centre over {cell} cm: {}{hyperfine}.",
            plain.join(", ")
        ));
    }
    if out.is_empty() {
        out.push("Absorption of the cell: not known (no rate, weight or population).".into());
    }
    out
}

/// `87Rb I 780.027 21 % at −2450 MHz (20 % of red)`.
fn absorbed_words(t: &Transition, absorbed: Absorbed, question: &Question) -> String {
    let at = |offset: f64| format!(" at {offset:+.0} MHz");
    let place = absorbed.offset_mhz.map_or_else(String::new, at);
    let narrow = format!("{} {}{place}", name(t), percent(absorbed.fraction));
    let broad = t.seen.iter().filter_map(|seen| {
        let laser = &question.lasers[seen.laser].name;
        Some(format!("{} of {laser}", percent(seen.absorbed?.fraction)))
    });
    let broad: Vec<String> = broad.collect();
    match broad.is_empty() {
        true => narrow,
        false => format!("{narrow} ({})", broad.join(", ")),
    }
}

/// What each laser sees, and how large a beam it saturates.
fn laser_notes(shown: &[&Transition], question: &Question) -> Vec<String> {
    let mut out = Vec::new();
    let mut folded = false;
    for (index, laser) in question.lasers.iter().enumerate() {
        let reached = || shown.iter().filter(|t| t.lasers.contains(&index));
        let seen = |t: &Transition| t.seen.iter().find(|s| s.laser == index).copied();
        let of: Vec<String> = reached()
            .filter_map(|t| Some((t, seen(t)?)))
            .filter_map(|(t, seen)| seen_words(&name(t), &seen, laser.power_mw))
            .take(8)
            .collect();
        if let Some(width) = laser.linewidth_mhz.filter(|_| !of.is_empty()) {
            folded = true;
            let name = &laser.name;
            out.push(format!("{name}, linewidth {width} MHz: {}.", of.join("; ")));
            continue;
        }
        let Some(power) = laser.power_mw else {
            continue;
        };
        let of: Vec<String> = reached()
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
    if folded {
        out.push(FOLDED.into());
    }
    out
}

/// How a linewidth counts.
const FOLDED: &str = "Linewidths: a laser's line is taken as a Lorentzian (white frequency noise); its \
                      width adds to the natural one, and both are folded with the Doppler profile. The \
                      table is for narrow light.";

/// `87Rb I 780.027 1.8e-9 cm² at rest, 3.3e-11 cm² in the gas, saturation 1.8 mW/cm² (11 cm²)`.
fn seen_words(name: &str, seen: &Seen, power_mw: Option<f64>) -> Option<String> {
    let gas = seen.doppler_cross_section_cm2?;
    let mut words = name.to_owned();
    if let Some(rest) = seen.natural_cross_section_cm2 {
        words.push_str(&format!(" {rest:.3e} cm² at rest,"));
    }
    words.push_str(&format!(" {gas:.3e} cm² in the gas"));
    if let Some(saturation) = seen.saturation_mw_per_cm2 {
        words.push_str(&format!(", saturation {} mW/cm²", three_digits(saturation)));
        if let Some(power) = power_mw {
            let area = three_digits(power / saturation);
            words.push_str(&format!(" (of a beam of {area} cm²)"));
        }
    }
    Some(words)
}
