//! What an answer rests on, in sentences.

use vocabulary::atom::Species;

use super::number::short;
use crate::advise::{EmissionModel, Physics, WidthUse};

/// All that a line seen by an instrument rests on.
pub(super) fn physics_notes(physics: &Physics) -> Vec<String> {
    let mut notes = vec![format!(
        "{}; {}.",
        model(physics.model),
        width_words(physics)
    )];
    notes.extend(left_out(physics));
    notes.extend(width_notes(physics));
    notes
}

/// What a line behind a filter rests on; `filter` says the rest.
pub(super) fn filter_notes(physics: &Physics, filter: &str) -> Vec<String> {
    let mut notes = vec![format!("{}. {filter}", model(physics.model))];
    notes.extend(left_out(physics));
    notes.extend(width_notes(physics));
    notes
}

/// What the model had to leave out.
fn left_out(physics: &Physics) -> Vec<String> {
    let mut notes = Vec::new();
    if !physics.lacks_dielectronic.is_empty() {
        notes.push(format!(
            "No dielectronic recombination is counted between stages of {}, as no resonance \
             transitions of the next stage are among the species: its ions are then taken to be \
             more frequent than they are.",
            elements(&physics.lacks_dielectronic)
        ));
    }
    if !physics.by_cascades.is_empty() {
        notes.push(format!(
            "Some lines of {} have upper levels that only cascades reach; their intervals count in \
             direct excitation by a usual collision strength.",
            names(&physics.by_cascades)
        ));
    }
    if !physics.unfed.is_empty() {
        notes.push(format!(
            "Some lines of {} have upper levels that no dipole-allowed excitation reaches, and \
             cascades less than other excitation usually does: they are not rated; --metastable \
             may give a way there.",
            names(&physics.unfed)
        ));
    }
    notes
}

const fn model(model: EmissionModel) -> &'static str {
    match model {
        EmissionModel::Visible | EmissionModel::Lte => {
            "Optically thin; light is power; populations of LTE inside each species, Planck–Larkin \
             weighted"
        }
        EmissionModel::Coronal => {
            "Model coronal, optically thin; light is power: excitation by electrons from the \
             ground term and given metastable levels (mean Gaunt factor of van Regemorter 1962, \
             for ions Mewe 1972; within a factor of 3 for atoms, 2 for ions, which the intervals \
             count in), radiative decay with cascades; stages by ionisation after Lotz 1968 and \
             recombination after Seaton 1959 and Burgess 1965 where no parts are given"
        }
        EmissionModel::Given => {
            "Model given, optically thin; light is power: stages or lines as in the table of \
             --given, other lines of a species by LTE, Planck–Larkin weighted"
        }
    }
}

/// What makes the width of a line.
fn width_notes(physics: &Physics) -> Vec<String> {
    let mut notes: Vec<String> = physics.widths.iter().map(width).collect();
    if !physics.widthless.is_empty() {
        notes.push(format!(
            "No pressure width is to be had for some lines of {}: configuration or limit of a level \
             is not known.",
            names(&physics.widthless)
        ));
    }
    notes
}

/// `Doppler, natural, Stark and Gaussian instrument widths`.
fn width_words(physics: &Physics) -> String {
    let pressure = if physics.widths.is_empty() {
        ""
    } else {
        ", pressure (Lorentzian)"
    };
    let seen = match physics.instrument {
        "gaussian" => {
            return format!("Doppler, natural{pressure} and Gaussian instrument widths (Voigt)");
        }
        "measured" => "the measured response",
        "triangular" => "a triangular response",
        _ => "a rectangular response",
    };
    let own = if pressure.is_empty() {
        "Doppler and natural"
    } else {
        "Doppler, natural and pressure (Lorentzian)"
    };
    format!("{own} widths, convolved with {seen}")
}

fn width(width: &WidthUse) -> String {
    use crate::calc::shape::WidthMethod;
    let what = match width.method {
        WidthMethod::VanDerWaals => "Van der Waals widths",
        WidthMethod::Resonance => "Resonance widths",
        _ => "Stark widths",
    };
    let estimate = if width.method.is_estimate() {
        "estimates, "
    } else {
        ""
    };
    let known = if width.factor < 1.5 {
        format!("±{:.0} %", 100.0 * (width.factor - 1.0))
    } else {
        format!("within a factor of {}", width.factor)
    };
    let outside = if width.inside_validity {
        ""
    } else {
        "; outside the range that the paper states for some"
    };
    format!(
        "{what} of {}: up to {} nm ({estimate}{known}; {}){outside}.",
        names(&width.species),
        short(width.widest_nm),
        width.method.citation()
    )
}

/// How many species are named.
const NAMED: usize = 6;

fn names(species: &[Species]) -> String {
    let mut words: Vec<String> = species
        .iter()
        .take(NAMED)
        .map(ToString::to_string)
        .collect();
    if species.len() > NAMED {
        words.push(format!("{} more", species.len() - NAMED));
    }
    words.join(", ")
}

fn elements(species: &[Species]) -> String {
    let mut words: Vec<String> = Vec::new();
    for one in species {
        let name = one.to_string();
        let element = name.split(' ').next().unwrap_or(&name).to_owned();
        if !words.contains(&element) {
            words.push(element);
        }
    }
    words.join(", ")
}
