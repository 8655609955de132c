//! The table of two photons of one colour.

use serde_json::Value;
use vocabulary::light::PositionMedium;

use super::object::two_photon_object;
use super::{TuneWish, six};
use crate::advise::tune::{Answer, Atom, Question, TwoPhoton};
use crate::show::line::{level_name, transition_of};
use crate::show::number::percent_in_table;
use crate::show::sheet::{Align, Column, Context, Sheet};

/// Columns of two photons.
const TWO_PHOTON_COLUMNS: [Column; 6] = [
    Column::whole("laser\nnm", Align::Left),
    Column::whole("species", Align::Left),
    Column::wrapped("lower →\nupper", Align::Left),
    Column::whole("lower\npopulation", Align::Right),
    Column::wrapped("nearest\nintermediate", Align::Left),
    Column::whole("detuning\nGHz", Align::Right),
];

/// Builds the sheet of two photons of one colour.
pub(super) fn two_photon(
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
        .filter(|_| wish.with_keys)
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
        headline: [headline].into_iter().chain(wish.hint.clone()).collect(),
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
