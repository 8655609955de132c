//! The stable keys of `tune`.

use serde_json::{Map, Value, json};
use vocabulary::spectrum::Level;

use crate::advise::hyperfine::Component;
use crate::advise::tune::{Atom, Cycling, MHZ_PER_CM, Question, Transition, TwoPhoton, same_level};
use crate::show::line::{level_object, line_object, medium_word};

/// The keys of a transition.
pub(super) fn transition_object(t: &Transition, atoms: &[Atom], question: &Question) -> Value {
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
    put("decays_complete", json!(t.decays.is_complete()));
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
    put("absorbed_fraction", json!(t.absorbed.map(|a| a.fraction)));
    let offset = t.absorbed.and_then(|a| a.offset_mhz);
    put("absorbed_at_offset_mhz", json!(offset));
    let lasers: Vec<&str> = t
        .lasers
        .iter()
        .map(|&l| question.lasers[l].name.as_str())
        .collect();
    put("lasers", json!(lasers));
    let seen = t.seen.iter().map(|s| {
        json!({
            "laser": question.lasers[s.laser].name,
            "linewidth_mhz": s.linewidth_mhz,
            "natural_cross_section_cm2": s.natural_cross_section_cm2,
            "doppler_cross_section_cm2": s.doppler_cross_section_cm2,
            "saturation_intensity_mw_per_cm2": s.saturation_mw_per_cm2,
            "absorbed_fraction": s.absorbed.map(|a| a.fraction),
            "absorbed_at_offset_mhz": s.absorbed.and_then(|a| a.offset_mhz),
        })
    });
    put("seen_by", Value::Array(seen.collect()));
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
        let twin = levels.iter().find(|l| same_level(upper, l))?;
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

/// The keys of a two-photon transition.
pub(super) fn two_photon_object(t: &TwoPhoton, atoms: &[Atom], question: &Question) -> Value {
    let level = |l: &Level| level_object(l);
    let mut object = Map::new();
    let mut put = |key: &str, value: Value| object.insert(key.to_owned(), value);
    let (photon, sigma) = t.photon_per_cm;
    put("species", json!(atoms[t.atom].spectrum.species.to_string()));
    put("wavelength_nm", json!(t.placed.wavelength_nm));
    put("wavelength_uncertainty_nm", json!(t.placed.uncertainty_nm));
    put("medium", json!(medium_word(t.placed.medium)));
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
