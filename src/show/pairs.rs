//! The answers of `pairs`.

use serde_json::{Value, json};
use vocabulary::light::PositionMedium;
use vocabulary::light::constants::{KELVIN_PER_EV, PER_CM_PER_EV};
use vocabulary::spectrum::Line;

use super::line::{medium_word, position_cell};
use super::marks::feature_object;
use super::number::{percent, percent_in_table, with_uncertainty};
use super::sheet::{Align, Column, Context, Sheet};
use super::unjudged::unjudged_notes;
use crate::advise::pairs::{Answer, LeftOut, Pair, Plot, Point, Question, Usable};

const COLUMNS: [Column; 6] = [
    Column::whole("first\nnm", Align::Left),
    Column::whole("upper\neV", Align::Right),
    Column::whole("second\nnm", Align::Left),
    Column::whole("upper\neV", Align::Right),
    Column::whole("difference\neV", Align::Right),
    Column::whole("error of\ntemperature", Align::Right),
];

/// Builds the sheet of pairs; the `count` best are shown.
pub fn pairs(answer: &Answer, question: &Question, count: usize, context: Context) -> Sheet {
    let shown = &answer.pairs[..count.min(answer.pairs.len())];
    let notes = notes(answer, question, shown.len(), &context);
    let mut object = context.object(&notes);
    object.insert("species".into(), json!(question.species.to_string()));
    object.insert(
        "pairs".into(),
        shown.iter().map(|p| pair_object(answer, p)).collect(),
    );
    object.insert(
        "set".into(),
        answer.set.iter().map(|s| set_object(answer, s)).collect(),
    );
    object.insert(
        "lines".into(),
        answer.usable.iter().map(usable_object).collect(),
    );
    Sheet {
        headline: headline(answer, question),
        columns: COLUMNS.to_vec(),
        rows: shown.iter().map(|p| row(answer, p)).collect(),
        notes,
        object,
        list: "pairs",
    }
}

fn kelvin(question: &Question) -> f64 {
    question.conditions.kt_per_cm / PER_CM_PER_EV * KELVIN_PER_EV
}

fn headline(answer: &Answer, question: &Question) -> Vec<String> {
    let typed = &question.range.typed;
    let (lines, species) = (answer.usable.len(), question.species);
    let Some(best) = answer.pairs.first() else {
        return vec![format!(
            "{typed}: no pair; {lines} lines of {species} are clear, rated and strong enough."
        )];
    };
    let mut out = vec![format!(
        "{typed}: {} pairs of {lines} usable lines of {species}; the best tells {:.0} K to {}.",
        answer.pairs.len(),
        kelvin(question),
        percent(best.temperature_relative_error)
    )];
    if let Some((_, Some(error))) = answer.set.last() {
        let names: Vec<String> = answer
            .set
            .iter()
            .map(|(i, _)| name(&answer.usable[*i]))
            .collect();
        out.push(format!(
            "Set of {}: {} nm tell it to {}.",
            names.len(),
            names.join(", "),
            percent(*error)
        ));
    }
    out
}

fn name(usable: &Usable) -> String {
    format!("{:.3}", usable.surveyed.feature.placed.wavelength_nm)
}

fn energy(usable: &Usable) -> f64 {
    usable.upper_energy_per_cm / PER_CM_PER_EV
}

fn row(answer: &Answer, pair: &Pair) -> Vec<String> {
    let [first, second] = [&answer.usable[pair.first], &answer.usable[pair.second]];
    vec![
        position_cell(&first.surveyed.feature.placed, false),
        format!("{:.3}", energy(first)),
        position_cell(&second.surveyed.feature.placed, false),
        format!("{:.3}", energy(second)),
        format!("{:.3}", pair.energy_difference_per_cm / PER_CM_PER_EV),
        percent_in_table(pair.temperature_relative_error),
    ]
}

fn usable_object(usable: &Usable) -> Value {
    let mut object = feature_object(&usable.surveyed);
    object.insert("upper_energy_ev".into(), json!(energy(usable)));
    object.insert("relative_light".into(), json!(usable.relative_light));
    Value::Object(object)
}

fn pair_object(answer: &Answer, pair: &Pair) -> Value {
    json!({
        "first": usable_object(&answer.usable[pair.first]),
        "second": usable_object(&answer.usable[pair.second]),
        "energy_difference_ev": pair.energy_difference_per_cm / PER_CM_PER_EV,
        "distance_nm": pair.distance_nm,
        "temperature_relative_error": pair.temperature_relative_error,
    })
}

fn set_object(answer: &Answer, (index, error): &(usize, Option<f64>)) -> Value {
    let placed = &answer.usable[*index].surveyed.feature.placed;
    json!({
        "wavelength_nm": placed.wavelength_nm,
        "medium": medium_word(placed.medium),
        "upper_energy_ev": energy(&answer.usable[*index]),
        "temperature_relative_error": error,
    })
}

/// Words for a kind of reason, and which it is.
type Kind = (&'static str, fn(&LeftOut) -> bool);

fn notes(answer: &Answer, question: &Question, shown: usize, context: &Context) -> Vec<String> {
    let mut notes = Vec::new();
    if shown < answer.pairs.len() {
        notes.push(format!(
            "Shown: the {shown} best of {} pairs.",
            answer.pairs.len()
        ));
    }
    let kinds: [Kind; 5] = [
        ("not clear in the mix, or not judged", |r| {
            matches!(r, LeftOut::NotClear(_))
        }),
        ("under other lines of the species", |r| {
            matches!(r, LeftOut::OwnSpecies(_))
        }),
        ("beside a line of the species without a known rate", |r| {
            matches!(r, LeftOut::OwnUnrated(_))
        }),
        ("without a rate", |r| matches!(r, LeftOut::NoRate)),
        ("too weak", |r| matches!(r, LeftOut::Weak(_))),
    ];
    let counts: Vec<String> = kinds
        .iter()
        .filter_map(|(words, is)| {
            let count = answer.left_out.iter().filter(|(_, r)| is(r)).count();
            (count > 0).then(|| format!("{count} {words}"))
        })
        .collect();
    if !counts.is_empty() {
        notes.push(format!("Left out: {}.", counts.join(", ")));
    }
    notes.extend(unjudged_notes(&answer.unjudged));
    if !question.not_held.is_empty() {
        notes.push(format!(
            "Nothing is held of {}.",
            question.not_held.join(", ")
        ));
    }
    notes.push(format!(
        "The error is kT/ΔE times that of the ratio: {} of each intensity, and the 1 σ of the rates{}.",
        percent(question.intensity_error),
        if answer.usable.iter().any(|u| u.rate_unstated) { " (50 % where none is stated)" } else { "" }
    ));
    notes.push("Pairs that tell it to no better than 100 % are not given. Optically thin lines, upper levels populated as in LTE: check both.".into());
    if !context.assumed.is_empty() {
        notes.push(format!("Assumed: {}.", context.assumed.join(", ")));
    }
    notes.extend(context.source_notes());
    notes
}

/// A measured line.
pub struct Measured {
    /// What the plot was given.
    pub point: Point,
    /// Where it was measured, vacuum nm.
    pub vacuum_nm: f64,
    /// The same as it was given: nm and medium.
    pub wavelength_nm: f64,
    /// Medium of that.
    pub medium: PositionMedium,
    /// Intensity after the response correction.
    pub intensity: f64,
    /// g A, s⁻¹.
    pub weighted_rate_per_s: f64,
    /// The line of the catalogue that rate or level were taken from.
    pub line: Option<Line>,
}

const PLOT_COLUMNS: [Column; 8] = [
    Column::whole("line\nnm", Align::Left),
    Column::whole("medium", Align::Left),
    Column::whole("species", Align::Left),
    Column::whole("upper\neV", Align::Right),
    Column::whole("g A\ns⁻¹", Align::Right),
    Column::whole("ln I λ/g A", Align::Right),
    Column::whole("residual\nσ", Align::Right),
    Column::whole("used", Align::Left),
];

/// Builds the sheet of a Boltzmann plot.
pub fn plot(plot: &Plot, rows: &[Measured], context: Context) -> Sheet {
    let both = || rows.iter().zip(&plot.residuals);
    let mut notes = vec![
        "Boltzmann plot: ln(I λ/g A), for photons ln(I/g A), over the upper energy, one slope for all stages; 1 σ from the \
         uncertainties of intensities and catalogue rates, widened by √(χ²/ν) where that exceeds 1. \
         Given rates count as exact: put their error into `relative_uncertainty`."
            .to_owned(),
        "Outliers: modified z score above 3.5 and off by more than 3 σ. Optically thin lines and LTE \
         are taken for granted."
            .to_owned(),
    ];
    if !plot.densities.is_empty() {
        notes.push(
            "Electron density: Saha and Boltzmann, ionisation energy of the free atom (its lowering \
             is left out)."
                .into(),
        );
    }
    if !context.assumed.is_empty() {
        notes.push(format!("Assumed: {}.", context.assumed.join(", ")));
    }
    notes.extend(context.source_notes());
    let mut columns = PLOT_COLUMNS.to_vec();
    if context
        .conditions
        .get("intensity_counts")
        .is_some_and(|c| c == "photons")
    {
        columns[4].title = "ln I/g A";
    }
    let mut object = context.object(&notes);
    object.insert("plot".into(), plot_object(plot));
    object.insert(
        "points".into(),
        both().map(|(m, r)| point_object(m, *r)).collect(),
    );
    Sheet {
        headline: plot_headline(plot, rows),
        columns,
        rows: both()
            .map(|(m, (residual, used))| {
                vec![
                    format!("{:.3}", m.wavelength_nm),
                    medium_word(m.medium).into(),
                    m.point.species.to_string(),
                    format!("{:.3}", m.point.upper_energy_ev),
                    super::number::rate(m.weighted_rate_per_s),
                    format!("{:.3}", m.point.log_population),
                    format!("{residual:+.2}"),
                    if *used {
                        "used".into()
                    } else {
                        "outlier".into()
                    },
                ]
            })
            .collect(),
        notes,
        object,
        list: "points",
    }
}

fn plot_headline(plot: &Plot, rows: &[Measured]) -> Vec<String> {
    let ev = plot.temperature_k / KELVIN_PER_EV;
    let mut out = vec![format!(
        "Excitation temperature {} K ({ev:.3} eV), χ² = {:.1} for {} degrees of freedom.",
        with_uncertainty(plot.temperature_k, plot.widened_uncertainty_k),
        plot.chi_squared,
        plot.degrees_of_freedom
    )];
    let outliers: Vec<String> = rows
        .iter()
        .zip(&plot.residuals)
        .filter(|(_, r)| !r.1)
        .map(|(m, r)| {
            format!(
                "{} {:.3} nm ({:+.1} σ)",
                m.point.species, m.wavelength_nm, r.0
            )
        })
        .collect();
    if !outliers.is_empty() {
        out.push(format!("Outliers, left out: {}.", outliers.join(", ")));
    }
    for density in &plot.densities {
        out.push(format!(
            "Electron density {:.2e} cm⁻³, within a factor {:.2} (1 σ), from {} and the stage above.",
            density.electron_density_per_m3 * 1e-6,
            density.relative_uncertainty.exp(),
            density.lower
        ));
    }
    out
}

fn plot_object(plot: &Plot) -> Value {
    let densities: Vec<Value> = plot
        .densities
        .iter()
        .map(|d| {
            json!({
                "lower_stage": d.lower.to_string(),
                "ionisation_energy_ev": d.limit_ev,
                "electron_density_per_m3": d.electron_density_per_m3,
                "log_uncertainty": d.relative_uncertainty,
            })
        })
        .collect();
    let stages: Vec<Value> = plot
        .stages
        .iter()
        .map(
            |s| json!({"species": s.species.to_string(), "intercept": s.intercept, "used": s.used}),
        )
        .collect();
    json!({
        "temperature_k": plot.temperature_k,
        "temperature_uncertainty_k": plot.uncertainty_k,
        "temperature_widened_uncertainty_k": plot.widened_uncertainty_k,
        "temperature_ev": plot.temperature_k / KELVIN_PER_EV,
        "chi_squared": plot.chi_squared,
        "degrees_of_freedom": plot.degrees_of_freedom,
        "stages": stages,
        "electron_densities": densities,
    })
}

fn point_object(measured: &Measured, (residual, used): (f64, bool)) -> Value {
    json!({
        "species": measured.point.species.to_string(),
        "wavelength_nm": measured.wavelength_nm,
        "medium": medium_word(measured.medium),
        "vacuum_wavelength_nm": measured.vacuum_nm,
        "intensity": measured.intensity,
        "weighted_rate_per_s": measured.weighted_rate_per_s,
        "upper_energy_ev": measured.point.upper_energy_ev,
        "log_population": measured.point.log_population,
        "log_population_uncertainty": measured.point.sigma,
        "residual_sigma": residual,
        "used": used,
    })
}
