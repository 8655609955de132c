//! Sentences below the table of `tune`.

use super::{name, three_digits};
use crate::advise::tune::{Answer, Atom, Cycling, Question, Transition};
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
