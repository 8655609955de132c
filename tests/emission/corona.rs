//! The corona model inside an answer, against van Regemorter's table and by hand.

use lineclear::advise::{
    AdviseError, Conditions, EmissionModel, Entry, LevelName, Metastable, Spectrum, Verdict,
};
use lineclear::vocabulary::atom::Species;

use super::invented::{conditions, one_line, spectrum, vet};

/// k T, cm⁻¹.
const KT: f64 = 20_000.0;

fn whole(species: &str) -> Entry {
    Entry {
        request: species.parse().unwrap(),
        value: 1.0,
        relative_sigma: 0.0,
    }
}

/// All atoms neutral, so that only excitation counts.
fn neutral(species: &[&str]) -> Conditions {
    let mut conditions = conditions(EmissionModel::Coronal, KT);
    conditions.details.ion_fractions = species.iter().map(|s| whole(s)).collect();
    conditions
}

/// Light of lines behind a filter that passes all alike, as parts of the whole.
fn lights(spectra: &[Spectrum], conditions: Conditions) -> Vec<(f64, Option<f64>)> {
    let answer = super::behind::ask(&super::behind::flat(conditions), spectra).unwrap();
    let mut out: Vec<(f64, Option<f64>)> = answer
        .lines
        .iter()
        .map(|l| (l.placed.vacuum_nm, l.light_fraction))
        .collect();
    out.sort_by(|a, b| a.0.total_cmp(&b.0));
    out
}

#[test]
fn resonance_lines_are_as_bright_as_van_regemorter_says() {
    // His table 2 for atoms: ḡ = 0.100 at y = 1, 0.063 at y = 2. X = 1.58e-11 f ḡ e^(−y)/(ΔE √T)
    // m³/s (eV); power ∝ X ΔE, so that the ratio of lines of equal f is that of ḡ e^(−y).
    let (near, far) = (KT, 2.0 * KT);
    // f ∝ A/σ².
    let spectra = [
        one_line(21, 1e7 / near, 1e7),
        one_line(22, 1e7 / far, 1e7 * (far / near).powi(2)),
    ];
    let light = lights(&spectra, neutral(&["Sc I", "Ti I"]));
    let ratio = light[1].1.unwrap() / light[0].1.unwrap();
    let expected = 0.100 * (-1_f64).exp() / (0.063 * (-2_f64).exp());
    assert!((ratio / expected - 1.0).abs() < 1e-6, "{ratio} {expected}");
}

/// Ground 1S; 1Po excited by a dipole; 1S above the ground term, reached from 1Po; and a triplet
/// system that no dipole reaches from the ground level.
fn with_triplets() -> Spectrum {
    spectrum(
        Species::new(21, 1),
        &[
            (0.0, 1.0, "4s2", "1S"),
            (15_000.0, 3.0, "4s 5s", "3S"),
            (16_000.0, 1.0, "4s 5s", "1S"),
            (36_000.0, 3.0, "4s 6p", "1Po"),
            (37_000.0, 3.0, "4s 6p", "3Po"),
        ],
        &[
            (0, 3, Some(3e7)),
            (2, 3, Some(1e7)),
            (1, 4, Some(5e7)),
            (0, 2, None),
        ],
    )
}

#[test]
fn an_excited_level_decays_by_its_branches() {
    let light = lights(&[with_triplets()], neutral(&["Sc I"]));
    let of = |nm: f64| {
        light
            .iter()
            .find(|l| (l.0 - nm).abs() < 1e-6)
            .unwrap()
            .1
            .unwrap()
    };
    // Photons 3 : 1, power as photons times wavenumber.
    let ratio = of(1e7 / 36_000.0) / of(1e7 / 20_000.0);
    assert!((ratio / (3.0 * 36.0 / 20.0) - 1.0).abs() < 1e-9, "{ratio}");
}

#[test]
fn a_triplet_is_rated_only_where_a_metastable_level_is_given() {
    let triplet_nm = 1e7 / 22_000.0;
    let answer = vet(
        &[with_triplets()],
        "Sc I",
        triplet_nm,
        0.1,
        neutral(&["Sc I"]),
    );
    assert_eq!(answer.verdict.central, Verdict::Unrated);
    let said = answer.feature.remarks.join(" ");
    assert!(said.contains("no excitation of it is known"), "{said}");

    let light_at = |fraction: f64| {
        let mut conditions = neutral(&["Sc I"]);
        conditions.details.metastables = vec![Metastable {
            species: Species::new(21, 1),
            level: LevelName::Label("5s 3S".into()),
            fraction,
            relative_sigma: 0.0,
        }];
        let light = lights(&[with_triplets()], conditions);
        let of = |nm: f64| light.iter().find(|l| (l.0 - nm).abs() < 1e-6).unwrap().1;
        of(triplet_nm).unwrap() / of(1e7 / 36_000.0).unwrap()
    };
    // m/(1 − m), the ground level keeping the rest.
    let (few, many) = (light_at(1e-5), light_at(1e-2));
    let expected = (1e-2 / 0.99) / (1e-5 / (1.0 - 1e-5));
    assert!((many / few / expected - 1.0).abs() < 1e-9, "{few} {many}");
}

#[test]
fn a_metastable_level_may_be_named_by_its_energy() {
    let with = |level: LevelName| {
        let mut conditions = neutral(&["Sc I"]);
        conditions.details.metastables = vec![Metastable {
            species: Species::new(21, 1),
            level,
            fraction: 1e-3,
            relative_sigma: 0.0,
        }];
        super::behind::ask(&super::behind::flat(conditions), &[with_triplets()])
    };
    let named = with(LevelName::Label("5s 3S".into())).unwrap();
    let by_energy = with(LevelName::Energy(15_000.2)).unwrap();
    let light = |a: &lineclear::advise::passband::Answer| -> Vec<Option<f64>> {
        a.lines.iter().map(|l| l.light_fraction).collect()
    };
    assert_eq!(light(&named), light(&by_energy));
    let unknown = with(LevelName::Label("5s 5S".into()));
    assert!(matches!(unknown, Err(AdviseError::NoSuchLevel { .. })));
}

#[test]
fn the_uncertainty_of_a_metastable_population_is_in_the_interval() {
    let interval = |relative_sigma: f64| {
        let mut conditions = neutral(&["Sc I", "Ti I"]);
        conditions.details.metastables = vec![Metastable {
            species: Species::new(21, 1),
            level: LevelName::Label("5s 3S".into()),
            fraction: 1e-3,
            relative_sigma,
        }];
        let spectra = [with_triplets(), one_line(22, 1e7 / 22_000.0 + 0.02, 1e7)];
        let answer = vet(&spectra, "Sc I", 1e7 / 22_000.0, 0.1, conditions);
        let interference = answer.interference.unwrap();
        (interference.high / interference.fraction).ln().powi(2)
    };
    // Log variances add: ln(1 + 1) for 100 %, all of it from this level.
    let added = interval(1.0) - interval(0.0);
    let alone = |sigma: f64| (1.0 + sigma * sigma).ln();
    // The level's own σ holds a factor of 3 (1.53), to which 1.0 adds in quadrature.
    let factor: f64 = (3_f64.ln().powi(2).exp() - 1.0).sqrt();
    let rate = 0.1_f64;
    let expected = alone(rate.hypot(factor).hypot(1.0)) - alone(rate.hypot(factor));
    assert!((added - expected).abs() < 1e-3, "{added} {expected}");
}

#[test]
fn stages_follow_the_users_parts() {
    let ion = Species::new(21, 2);
    let levels = [(0.0, 1.0, "4s2", "1S"), (20_000.0, 3.0, "4s 4p", "1Po")];
    let ion = spectrum(ion, &levels, &[(0, 1, Some(1e7))]);
    let atom = one_line(21, 501.0, 1e7);
    for model in [
        EmissionModel::Coronal,
        EmissionModel::Lte,
        EmissionModel::Given,
    ] {
        let ratio = |neutral: f64, ionised: f64| {
            let mut conditions = conditions(model, KT);
            let part = |species: &str, value: f64| Entry {
                value,
                ..whole(species)
            };
            conditions.details.ion_fractions = vec![part("Sc I", neutral), part("Sc II", ionised)];
            let light = lights(&[atom.clone(), ion.clone()], conditions);
            light[0].1.unwrap() / light[1].1.unwrap()
        };
        let change = ratio(0.2, 0.8) / ratio(0.6, 0.4);
        // 4 : 2/3.
        assert!((change / 6.0 - 1.0).abs() < 1e-9, "{model:?}: {change}");
    }
}

#[test]
fn stages_of_an_element_are_balanced_by_rates_where_no_parts_are_given() {
    // Two ways: the answer's ratio of lines, and the balance of the calculator itself.
    use lineclear::calc::plasma::{
        CoreTransition, absorption_f, coronal_balance, excitation_rate, stage_rates,
    };
    use lineclear::vocabulary::atom::limit;
    let (one, two) = (Species::new(2, 1), Species::new(2, 2));
    let helium = spectrum(
        one,
        &[(0.0, 1.0, "1s2", "1S"), (171_134.9, 3.0, "1s 2p", "1Po")],
        &[(0, 1, Some(1.8e9))],
    );
    let mut helium = helium;
    helium.limit_per_cm = limit(one).map(|l| l.energy_per_cm);
    let mut ion = spectrum(
        two,
        &[(0.0, 2.0, "1s", "2S"), (329_179.0, 4.0, "2p", "2Po")],
        &[(0, 1, Some(1.0e10))],
    );
    ion.limit_per_cm = limit(two).map(|l| l.energy_per_cm);
    let kt = 8.0 * 8065.544;
    let light = lights(&[helium, ion], conditions(EmissionModel::Coronal, kt));
    let ratio = light[0].1.unwrap() / light[1].1.unwrap();

    let core = [CoreTransition {
        energy_ev: 329_179.0 / 8_065.543_937,
        absorption_f: absorption_f(1.0e10, 4.0, 2.0, 329_179.0),
    }];
    let rates = |species: Species, core: &[CoreTransition]| {
        let energy = limit(species).unwrap().energy_per_cm;
        let r = stage_rates(species, energy, core, kt).unwrap();
        (r.ionisation_m3_per_s, r.recombination_m3_per_s)
    };
    let parts = coronal_balance(&[rates(one, &core), rates(two, &[])]).unwrap();
    use lineclear::calc::plasma::Target;
    let x = |energy: f64, f: f64, target| excitation_rate(energy, f, kt, target).unwrap();
    let f_one = absorption_f(1.8e9, 3.0, 1.0, 171_134.9);
    let expected = parts[1] * x(329_179.0, core[0].absorption_f, Target::Ion) * 329_179.0
        / (parts[0] * x(171_134.9, f_one, Target::Neutral) * 171_134.9);
    assert!((ratio / expected - 1.0).abs() < 1e-6, "{ratio} {expected}");
}
