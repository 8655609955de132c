//! The answer of `sources --scope`.

use std::collections::BTreeSet;

use serde_json::{Value, json};
use vocabulary::spectrum::Completeness;

use super::number::percent;
use super::sheet::{Align, Column, Context, Sheet};
use super::window::broken;
use crate::advise::ledger::Band;
use crate::advise::{UNLISTED_IN_COMPLEX, UNLISTED_IN_SIMPLE, unlisted_per_listed};

const COLUMNS: [Column; 11] = [
    Column::whole("species", Align::Left),
    Column::whole("from\nnm", Align::Right),
    Column::whole("to\nnm", Align::Right),
    Column::whole("claim", Align::Left),
    Column::wrapped("claimed by", Align::Left),
    Column::whole("lines", Align::Right),
    Column::whole("of them\nrated", Align::Right),
    Column::whole("of\npapers", Align::Right),
    Column::whole("by\nhand", Align::Right),
    Column::whole("from levels\nalone", Align::Right),
    Column::whole("computed", Align::Right),
];

/// What is held and claimed, band by band.
pub fn scope(bands: &[Band], not_held: &[String]) -> Sheet {
    let notes = notes(bands, not_held);
    let context = Context {
        command: "sources",
        ..Context::default()
    };
    let mut object = context.object(&notes);
    let list: Vec<Value> = bands.iter().map(band_object).collect();
    object.insert("bands".into(), Value::Array(list));
    object.insert("not_held".into(), json!(not_held));
    Sheet {
        headline: vec![headline(bands, not_held)],
        columns: COLUMNS.to_vec(),
        rows: bands.iter().map(row).collect(),
        notes,
        object,
        list: "bands",
    }
}

fn headline(bands: &[Band], not_held: &[String]) -> String {
    if bands.is_empty() {
        return format!("Nothing is held of {}.", not_held.join(", "));
    }
    let species: BTreeSet<String> = bands.iter().map(|b| b.species.to_string()).collect();
    let lines: usize = bands.iter().map(|b| b.held.listed).sum();
    let rated: usize = bands.iter().map(|b| b.held.rated).sum();
    let plural = if lines == 1 { "line" } else { "lines" };
    let whose = if species.len() == 1 {
        species.into_iter().collect::<String>()
    } else {
        format!("{} species", species.len())
    };
    format!("{whose}: {lines} {plural} in tables, {rated} of them rated.")
}

fn row(band: &Band) -> Vec<String> {
    let held = &band.held;
    let mut row = vec![
        band.species.to_string(),
        wavelength(band.from_nm),
        wavelength(band.to_nm),
        band.claim.map_or("nothing", Completeness::word).to_owned(),
        band.claimed_by
            .iter()
            .map(|key| broken(key))
            .collect::<Vec<_>>()
            .join("\n"),
    ];
    let counts = [
        held.listed,
        held.rated,
        held.paper,
        held.curated,
        held.ritz,
        held.computed,
    ];
    row.extend(counts.iter().map(ToString::to_string));
    row
}

/// Four digits say where a band ends.
fn wavelength(nm: f64) -> String {
    let decimals = (3 - nm.log10().floor() as i32).clamp(0, 3) as usize;
    format!("{nm:.decimals$}")
}

fn band_object(band: &Band) -> Value {
    let held = &band.held;
    json!({
        "species": band.species.to_string(),
        "from_nm": band.from_nm,
        "to_nm": band.to_nm,
        "completeness": band.claim.map(Completeness::word),
        "limit_fraction": band.claim.and_then(Completeness::limit),
        "claimed_by": band.claimed_by.iter().map(|key| &**key).collect::<Vec<&str>>(),
        "listed": held.listed,
        "rated": held.rated,
        "from_papers": held.paper,
        "from_curated": held.curated,
        "from_models": held.model,
        "ritz": held.ritz,
        "computed": held.computed,
        "unlisted_per_listed": unlisted_per_listed(band.species),
    })
}

fn notes(bands: &[Band], not_held: &[String]) -> Vec<String> {
    let mut notes = vec!["Bands are vacuum wavelengths; lines are what tables list.".to_owned()];
    let claims: BTreeSet<Option<Completeness>> = bands.iter().map(|b| b.claim).collect();
    notes.extend(claims.into_iter().rev().map(meaning));
    if bands.iter().any(|b| b.claim == Some(Completeness::Strong)) {
        notes.push(format!(
            "For the chance that an unlisted line interferes, {UNLISTED_IN_COMPLEX} unlisted lines are \
             taken to lie near each listed one in spectra of an open d or f shell, \
             {UNLISTED_IN_SIMPLE} in others."
        ));
    }
    if bands.iter().any(|b| b.held.model > 0) {
        notes.push("Lines neither of papers nor by hand are those of model atoms.".into());
    }
    if bands.iter().any(|b| b.held.ritz > 0) {
        notes.push(
            "From levels alone: no table lists them and their rates are not known; verdicts count \
             them by the prior for unknown rates."
                .into(),
        );
    }
    if !bands.is_empty() && !not_held.is_empty() {
        notes.push(format!("Nothing is held of {}.", not_held.join(", ")));
    }
    notes
}

/// What a claim means for a verdict.
fn meaning(claim: Option<Completeness>) -> String {
    let complete = |word: &str, limit: f64| {
        format!(
            "{word}: the sources claim to list lines down to {} of the strongest of the band; weaker \
             ones may be missing.",
            percent(limit)
        )
    };
    match claim {
        Some(c @ (Completeness::Full | Completeness::Strong)) => {
            complete(c.word(), c.limit().unwrap_or_default())
        }
        Some(Completeness::Computed) => {
            "computed: all lines of the series are held; none is missing that could count.".into()
        }
        Some(Completeness::GroundTerm) => {
            "ground-term: only lines from the ground term are listed; of lines between excited states \
             nothing is known: a verdict beside this species is unrated, unless only its element is \
             named and another stage is covered there."
                .into()
        }
        None => "nothing: no source claims anything there; a verdict beside this species is unrated."
            .into(),
    }
}
