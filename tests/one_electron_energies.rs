//! One-electron energies against published measurements and calculations.

#![allow(clippy::unwrap_used, reason = "in a test a panic is the report")]

use lineclear::calc::one_electron::{
    NuclearMoment, Nucleus, OneElectronError, energy, gross_energy, hyperfine_levels, levels,
};
use vocabulary::atom::{HalfInteger, Species};
use vocabulary::light::constants::{
    FINE_STRUCTURE, PER_CM_PER_EV, RYDBERG_PER_CM, SPEED_OF_LIGHT_M_PER_S,
};

/// MHz per cm⁻¹.
const MHZ: f64 = SPEED_OF_LIGHT_M_PER_S * 1e-4;

fn half(twice: u16) -> HalfInteger {
    HalfInteger::from_twice(twice)
}

/// Binding energy and 1 σ, cm⁻¹.
fn bound(nucleus: &Nucleus, n: u32, l: u32, twice_j: u16) -> (f64, f64) {
    let energy = energy(nucleus, n, l, half(twice_j)).unwrap();
    (energy.binding_per_cm, energy.uncertainty_per_cm)
}

/// Distance of two levels and its 1 σ, MHz.
fn interval_mhz(nucleus: &Nucleus, upper: (u32, u32, u16), lower: (u32, u32, u16)) -> (f64, f64) {
    let all = levels(nucleus, 12).unwrap();
    let find = |q: (u32, u32, u16)| {
        all.iter()
            .find(|level| (level.n, level.l, level.j.twice()) == q)
            .unwrap()
    };
    let (distance, sigma) = find(upper).above(find(lower));
    (distance * MHZ, sigma * MHZ)
}

fn assert_near(ours: f64, published: f64, tolerance: f64, what: &str) {
    let error = (ours - published).abs();
    assert!(
        error <= tolerance,
        "{what}: {ours} against {published}, off by {error:e}"
    );
}

const ONE_S: (u32, u32, u16) = (1, 0, 1);
const TWO_S: (u32, u32, u16) = (2, 0, 1);
const TWO_P_HALF: (u32, u32, u16) = (2, 1, 1);
const TWO_P_THREE_HALVES: (u32, u32, u16) = (2, 1, 3);

/// Hydrogen 1S–2S: 2 466 061 413 187.035(10) kHz (Parthey et al. 2011, Phys. Rev. Lett. 107, 203001; from memory).
/// Deuterium: that + 670 994 334.606(15) kHz (Parthey et al. 2010, Phys. Rev. Lett. 104, 233001; from memory).
/// The goal is 10 MHz; the constants were fitted to the first, so ours must lie within our own few kHz.
#[test]
fn two_photon_line_of_hydrogen_and_deuterium() {
    let hydrogen = interval_mhz(&Nucleus::PROTON, TWO_S, ONE_S);
    let deuterium = interval_mhz(&Nucleus::DEUTERON, TWO_S, ONE_S);
    assert!(hydrogen.1 < 0.01, "σ {} MHz", hydrogen.1);
    assert_near(
        hydrogen.0,
        2_466_061_413.187_035,
        2.0 * hydrogen.1,
        "H 1S–2S",
    );
    let shift = 670_994.334_606;
    assert_near(deuterium.0 - hydrogen.0, shift, 0.003, "D − H");
}

/// 2S1/2–2P1/2: 1057.845(9) MHz (Lundeen & Pipkin 1981), 1057.8298(32) (Bezginov et al. 2019); D 1059.24(6) (Dayhoff,
/// Triebwasser & Lamb 1953, with later corrections); 2P3/2–2P1/2 10 969.0416 MHz, theory (Horbatsch & Hessels 2016,
/// Phys. Rev. A 93, 022513); all from memory. Tolerance: their 1 σ doubled; for theory 1 kHz.
#[test]
fn lamb_shift_and_fine_structure_of_the_second_shell() {
    let (lamb, sigma) = interval_mhz(&Nucleus::PROTON, TWO_S, TWO_P_HALF);
    assert!(sigma < 0.01);
    assert_near(lamb, 1_057.845, 0.018, "Lamb shift 1981");
    assert_near(lamb, 1_057.829_8, 0.006_4, "Lamb shift 2019");
    let (heavy, _) = interval_mhz(&Nucleus::DEUTERON, TWO_S, TWO_P_HALF);
    assert_near(heavy, 1059.24, 0.06, "Lamb shift of D");
    let (fine, _) = interval_mhz(&Nucleus::PROTON, TWO_P_THREE_HALVES, TWO_P_HALF);
    assert_near(fine, 10_969.041_6, 0.001, "fine structure");
    // He⁺: 14 041.13(17) MHz (van Wijngaarden, Holuj & Drake 2000, Phys. Rev. A 63, 012505; from memory).
    let (helium, sigma) = interval_mhz(&Nucleus::ALPHA, TWO_S, TWO_P_HALF);
    assert_near(
        helium,
        14_041.13,
        3.0 * 0.17_f64.hypot(sigma),
        "Lamb shift of He⁺",
    );
}

/// Two-photon and one-photon lines of H and D, MHz (input data of the CODATA adjustments, Tiesinga et al. 2021, Rev. Mod. Phys. 93,
/// 025010: 1S–3S of Garching and Paris, 2S–nS/D of Paris, 2S–4P of Garching; from memory). Tolerance: 20 kHz, the scatter of these
/// measurements (the goal is 0.1 and 1 MHz).
#[test]
fn other_lines_of_hydrogen_and_deuterium() {
    let lines = [
        (Nucleus::PROTON, (3, 0, 1), ONE_S, 2_922_743_278.665_8),
        (Nucleus::PROTON, (8, 0, 1), TWO_S, 770_649_350.012_0),
        (Nucleus::PROTON, (8, 2, 3), TWO_S, 770_649_504.450_0),
        (Nucleus::PROTON, (8, 2, 5), TWO_S, 770_649_561.584_2),
        (Nucleus::PROTON, (12, 2, 3), TWO_S, 799_191_710.472_7),
        (Nucleus::PROTON, (12, 2, 5), TWO_S, 799_191_727.403_7),
        (Nucleus::DEUTERON, (8, 0, 1), TWO_S, 770_859_041.245_7),
        (Nucleus::DEUTERON, (8, 2, 3), TWO_S, 770_859_195.701_8),
        (Nucleus::DEUTERON, (8, 2, 5), TWO_S, 770_859_252.849_5),
        (Nucleus::DEUTERON, (12, 2, 3), TWO_S, 799_409_168.038_0),
        (Nucleus::DEUTERON, (12, 2, 5), TWO_S, 799_409_184.966_8),
    ];
    for (nucleus, upper, lower, published) in lines {
        let (ours, sigma) = interval_mhz(&nucleus, upper, lower);
        assert_near(ours, published, 0.02, &format!("{upper:?}"));
        assert!(sigma < 0.01, "σ {sigma} MHz");
    }
    let all = levels(&Nucleus::PROTON, 4).unwrap();
    let beat = (all[9].above(&all[1]).0 - 0.25 * all[1].energy_per_cm) * MHZ;
    assert_near(beat, 4_797.338, 0.02, "2S–4S less 1S–2S / 4");
}

/// Ionisation energies: H 109 678.771 743 07(10), D 109 708.614 552 99(10) cm⁻¹ (with a proton radius of 0.88 fm, which makes
/// them 5e-7 cm⁻¹ larger than today's: tolerance 1e-6), He⁺ 438 908.8788(6) cm⁻¹, ³He⁺ less by the reduced mass
/// (Jentschura et al. 2005, Phys. Rev. Lett. 95, 163003; from memory).
#[test]
fn ionisation_energies_of_light_systems() {
    assert_near(
        bound(&Nucleus::PROTON, 1, 0, 1).0,
        109_678.771_743_07,
        1e-6,
        "H",
    );
    assert_near(
        bound(&Nucleus::DEUTERON, 1, 0, 1).0,
        109_708.614_552_99,
        1e-6,
        "D",
    );
    assert_near(
        bound(&Nucleus::ALPHA, 1, 0, 1).0,
        438_908.878_8,
        6e-4,
        "He⁺",
    );
    assert!(bound(&Nucleus::ALPHA, 1, 0, 1).1 < 1e-3, "goal of He⁺");
    let ratio = bound(&Nucleus::HELION, 1, 0, 1).0 / bound(&Nucleus::ALPHA, 1, 0, 1).0;
    let mass = Nucleus::HELION.reduced_mass() / Nucleus::ALPHA.reduced_mass();
    assert_near(ratio, mass, 1e-9, "³He⁺ over ⁴He⁺");
}

/// Ionisation energies of heavier one-electron ions in eV as tabulated (from memory; origin: Johnson & Soff 1985, At. Data
/// Nucl. Data Tables 33, 405; Yerokhin & Shabaev 2015, J. Phys. Chem. Ref. Data 44, 033103). Tolerance: their last
/// digit, and 1.5e-7 of the energy for the older value of the Rydberg in electronvolts.
#[test]
fn ionisation_energies_of_heavier_ions() {
    let ions = [
        (3, 7.016_003_4, 2.444, 122.454_36, 1e-5),
        (4, 9.012_183_1, 2.519, 217.718_58, 1e-5),
        (5, 11.009_305_2, 2.406, 340.226_0, 1e-4),
        (6, 12.0, 2.470_2, 489.993_18, 1e-5),
        (7, 14.003_074, 2.558_2, 667.046_1, 1e-4),
        (8, 15.994_914_6, 2.699_1, 871.410_1, 1e-4),
        (10, 19.992_440_2, 3.005_5, 1_362.199_5, 3e-4),
        (18, 39.962_383_1, 3.427_4, 4_426.222_8, 1e-3),
        (26, 55.934_936, 3.737_7, 9_277.69, 0.01),
    ];
    for (charge, mass, radius, published, digit) in ions {
        let nucleus = Nucleus::from_atomic_mass(charge, mass, 1e-6)
            .and_then(|n| n.with_radius(radius, 0.05))
            .unwrap();
        let (binding, sigma) = bound(&nucleus, 1, 0, 1);
        let tolerance = digit + 1.5e-7 * published + 2.0 * sigma / PER_CM_PER_EV;
        assert_near(
            binding / PER_CM_PER_EV,
            published,
            tolerance,
            &format!("Z = {charge}"),
        );
        let goal = if charge <= 10 { 1e-6 } else { 3e-5 };
        assert!(sigma / binding < goal, "Z = {charge}: σ {sigma}");
    }
}

/// Wavelengths of 1s–2p, Å: Lyman-α1, -α2 of C⁵⁺ … Si¹³⁺ (common practice in X-ray astronomy), of hydrogen 1215.668 24 and
/// 1215.673 64 (from memory). Tolerance: half of the last digit, and a little for the rounding of the source.
#[test]
fn lyman_alpha_of_light_ions() {
    let ions = [
        (1, 1.007_825_03, 1_215.668_24, 1_215.673_64, 2e-5),
        (6, 12.0, 33.734_2, 33.739_6, 1e-4),
        (7, 14.003_074, 24.779_2, 24.784_6, 1e-4),
        (8, 15.994_914_6, 18.967_1, 18.972_5, 1e-4),
        (10, 19.992_440_2, 12.132_1, 12.137_5, 1e-4),
        (12, 23.985_041_7, 8.419_2, 8.424_6, 1e-4),
        (14, 27.976_926_5, 6.180_4, 6.185_8, 1e-4),
    ];
    for (charge, mass, first, second, tolerance) in ions {
        let nucleus = Nucleus::from_atomic_mass(charge, mass, 1e-6).unwrap();
        let all = levels(&nucleus, 2).unwrap();
        assert_near(
            1e8 / all[3].energy_per_cm,
            first,
            tolerance,
            &format!("Z = {charge}, 2p3/2"),
        );
        assert_near(
            1e8 / all[2].energy_per_cm,
            second,
            tolerance,
            &format!("Z = {charge}, 2p1/2"),
        );
    }
}

/// Lamb shift of 1s in U⁹¹⁺: 460.2(4.6) eV measured (Gumberidze et al. 2005, Phys. Rev. Lett. 94, 223001), 463.99(39) eV
/// calculated; of Au⁷⁸⁺ 205 eV calculated (Yerokhin & Shabaev 2015); from memory. Ours must agree within 3 σ of ours, and our σ
/// must say that it is an estimate: not below theirs, not above 5 eV (1 %).
#[test]
fn lamb_shift_of_heavy_ions() {
    let ions = [
        (92, 238.050_787, 5.857_1, 463.99),
        (79, 196.966_57, 5.436_9, 205.2),
    ];
    for (charge, mass, radius, published) in ions {
        let nucleus = Nucleus::from_atomic_mass(charge, mass, 1e-4)
            .and_then(|n| n.with_radius(radius, 0.005))
            .unwrap();
        let (binding, sigma) = bound(&nucleus, 1, 0, 1);
        let (binding, sigma) = (binding / PER_CM_PER_EV, sigma / PER_CM_PER_EV);
        let za = f64::from(charge) * FINE_STRUCTURE;
        let rest = 510_998.950_69;
        let dirac = rest * (1.0 - (1.0 - za * za).sqrt());
        // Reduced mass and first recoil are in the published Lamb shift of heavy ions only as recoil: left out.
        let reduced = dirac * (1.0 - 1.0 / (1.0 + nucleus.mass_electrons()));
        let kinetic = dirac * dirac / (2.0 * rest * nucleus.mass_electrons());
        let lamb = reduced + kinetic - binding;
        assert!((0.39..5.0).contains(&sigma), "Z = {charge}: σ {sigma} eV");
        assert_near(lamb, published, 3.0 * sigma, &format!("Z = {charge}"));
    }
}

/// Goals of the model for H and D, n = 2 … 12: σ at most 1 MHz for S and 0.1 MHz for l ≥ 1, against 1s included.
#[test]
fn stated_uncertainties_meet_the_goals() {
    for nucleus in [Nucleus::PROTON, Nucleus::DEUTERON] {
        for level in levels(&nucleus, 12).unwrap() {
            let goal = if level.l == 0 { 1.0 } else { 0.1 };
            assert!(
                level.uncertainty_per_cm * MHZ < goal,
                "{}",
                level.configuration()
            );
            assert!(level.binding_uncertainty_per_cm > 0.0);
        }
    }
}

/// σ grows with Z, and the 1 σ of a fine-structure interval is far below those of its levels.
#[test]
fn uncertainty_grows_with_charge_and_cancels_in_differences() {
    let mut last = 0.0;
    for charge in [1, 2, 6, 10, 20, 40, 60, 92, 110] {
        let nucleus = Nucleus::from_atomic_mass(charge, 2.5 * f64::from(charge), 1e-3)
            .and_then(|n| n.with_radius(4.0, 0.02))
            .unwrap();
        let (binding, sigma) = bound(&nucleus, 1, 0, 1);
        assert!(
            sigma > last && sigma < 1e-2 * binding,
            "Z = {charge}: {sigma}"
        );
        last = sigma;
    }
    let all = levels(&Nucleus::PROTON, 4).unwrap();
    let (_, sigma) = all[14].above(&all[13]);
    assert!(sigma < 1e-2 * all[14].uncertainty_per_cm, "{sigma:e}");
}

/// Levels of one n approach R Z²/n² with the reduced mass as (Zα)² → small: 13.6 eV limit (common practice), and the
/// shell mean agrees with the mean of the fine structure to the size of the Lamb shift.
#[test]
fn limits_and_shell_means() {
    let limit = RYDBERG_PER_CM * Nucleus::PROTON.reduced_mass();
    assert_near(
        limit / PER_CM_PER_EV,
        13.598_287,
        1e-6,
        "Rydberg energy of H, eV",
    );
    for n in [5, 20, 50] {
        let all = levels(&Nucleus::PROTON, n).unwrap();
        let shell: Vec<_> = all.iter().filter(|level| level.n == n).collect();
        let weight: f64 = shell.iter().map(|l| l.weight()).sum();
        let mean: f64 = shell
            .iter()
            .map(|l| l.weight() * l.binding_per_cm)
            .sum::<f64>()
            / weight;
        assert_eq!(weight, 2.0 * f64::from(n * n));
        let gross = gross_energy(&Nucleus::PROTON, n).unwrap();
        // Lamb shift of 1S 0.27 cm⁻¹, falling as 1/n³ and shared by n² states.
        assert_near(
            mean,
            gross.binding_per_cm,
            0.3 / f64::from(n).powi(5) + 1e-8,
            "shell mean",
        );
        let ends = [shell[0], shell[shell.len() - 1]];
        for end in ends {
            assert_near(
                end.binding_per_cm,
                gross.binding_per_cm,
                4.0 * gross.uncertainty_per_cm,
                "end",
            );
        }
    }
    let far = gross_energy(&Nucleus::PROTON, 1000).unwrap();
    assert_near(far.binding_per_cm, limit / 1e6, 1e-9, "n = 1000");
}

/// Hyperfine structure: 2S of H 177.556 834 3(67) MHz (Kolachevsky et al. 2009), of D 40.924 454(7), of ³He⁺ −1083.354 981(9) MHz
/// (Prior & Wang 1977); 2P1/2 of H 59.22(14) MHz (Lundeen, Jessop & Pipkin 1975); from memory. Tolerance: 5e-6 for what the scaling leaves out
/// (state-dependent radiative terms), their σ for P.
#[test]
fn hyperfine_intervals() {
    let interval = |nucleus: &Nucleus, moment: &NuclearMoment, n: u32, l: u32, twice_j: u16| {
        let found = hyperfine_levels(nucleus, moment, n, l, half(twice_j)).unwrap();
        assert_eq!(found.len(), 2);
        let mean: f64 = found.iter().map(|h| h.f.weight() * h.shift_per_cm).sum();
        assert!(mean.abs() < 1e-15, "centre of gravity {mean:e}");
        (found[1].shift_per_cm - found[0].shift_per_cm) * MHZ
    };
    let (h, p) = (Nucleus::PROTON, NuclearMoment::PROTON);
    assert_near(interval(&h, &p, 1, 0, 1), 1_420.405_751_768, 1e-8, "H 1S");
    assert_near(
        interval(&h, &p, 2, 0, 1),
        177.556_834_3,
        177.0 * 5e-6,
        "H 2S",
    );
    assert_near(interval(&h, &p, 2, 1, 1), 59.22, 0.14, "H 2P1/2");
    let (d, moment) = (Nucleus::DEUTERON, NuclearMoment::DEUTERON);
    assert_near(
        interval(&d, &moment, 2, 0, 1),
        40.924_454,
        41.0 * 5e-6,
        "D 2S",
    );
    let (he, moment) = (Nucleus::HELION, NuclearMoment::HELION);
    assert_near(
        interval(&he, &moment, 2, 0, 1),
        -1_083.354_981,
        1083.0 * 5e-6,
        "³He⁺ 2S",
    );
    // Without the measured splitting the first-order formula gives 1S to its 2 σ.
    let free = NuclearMoment {
        ground_splitting_mhz: None,
        ..p
    };
    assert_near(
        interval(&h, &free, 1, 0, 1),
        1_420.405_751_768,
        1420.0 * 4e-3,
        "H 1S, first order",
    );
}

#[test]
fn questions_without_an_answer_say_why() {
    let says = |error: OneElectronError, word: &str| {
        let text = error.to_string();
        assert!(text.contains(word) && !text.ends_with('\n'), "{text}");
    };
    let h = Nucleus::PROTON;
    says(
        energy(&h, 3, 3, half(7)).unwrap_err(),
        "l goes from 0 to n − 1",
    );
    says(energy(&h, 3, 1, half(5)).unwrap_err(), "j is l + 1/2");
    says(energy(&h, 3, 0, half(3)).unwrap_err(), "j is l + 1/2");
    says(energy(&h, 0, 0, half(1)).unwrap_err(), "1 to 50");
    says(levels(&h, 51).unwrap_err(), "1 to 50");
    says(gross_energy(&h, 1001).unwrap_err(), "1 to 1000");
    says(Nucleus::new(111, 5e5, 0.0).unwrap_err(), "1 to 110");
    says(Nucleus::new(0, 5e5, 0.0).unwrap_err(), "1 to 110");
    says(
        Nucleus::new(1, f64::NAN, 0.0).unwrap_err(),
        "positive, finite",
    );
    says(
        Nucleus::from_atomic_mass(1, -1.0, 0.0).unwrap_err(),
        "positive, finite",
    );
    says(
        h.with_radius(f64::INFINITY, 0.0).unwrap_err(),
        "positive, finite",
    );
}

/// The mass of the neutral atom leads to the nuclear mass: ¹H 1.007 825 031 898 u (Wang et al. 2021, Chin. Phys. C 45,
/// 030003; from memory), ⁴He 4.002 603 254 13 u; against CODATA 2022 nuclear masses to 1e-9.
#[test]
fn nuclear_mass_from_the_atom() {
    for (charge, mass, exact) in [
        (1, 1.007_825_031_898, Nucleus::PROTON),
        (1, 2.014_101_777_844, Nucleus::DEUTERON),
        (1, 3.016_049_281_32, Nucleus::TRITON),
        (2, 3.016_029_321_97, Nucleus::HELION),
        (2, 4.002_603_254_13, Nucleus::ALPHA),
    ] {
        let made = Nucleus::from_atomic_mass(charge, mass, 1e-10).unwrap();
        let error = made.mass_electrons() / exact.mass_electrons() - 1.0;
        assert!(error.abs() < 1e-9, "{mass}: {error:e}");
    }
}

/// From the species: H is the proton, a natural mixture its commonest isotope; a stage with more electrons is refused.
#[test]
fn species_lead_to_their_nuclei() {
    let of = |text: &str| Nucleus::of(text.parse::<Species>().unwrap());
    assert_eq!(of("H I").unwrap(), Nucleus::PROTON);
    assert_eq!(of("D I").unwrap(), Nucleus::DEUTERON);
    assert_eq!(of("He II").unwrap(), Nucleus::ALPHA);
    assert_eq!(of("3He II").unwrap(), Nucleus::HELION);
    for (text, mass_number, radius_fm) in [
        ("Li III", 7, 2.444),
        ("C VI", 12, 2.470),
        ("Fe XXVI", 56, 3.738),
    ] {
        let nucleus = of(text).unwrap();
        assert_eq!(nucleus.mass_number(), mass_number, "{text}");
        assert_eq!(nucleus.radius_fm(), radius_fm, "{text}");
    }
    // Every element that the model takes has a nucleus, natural or not.
    for number in 1..=110 {
        let nucleus = Nucleus::of(Species::new(number, number)).unwrap();
        assert!(energy(&nucleus, 1, 0, half(1)).unwrap().binding_per_cm > 1e5);
    }
    let refused = of("He I").unwrap_err().to_string();
    assert_eq!(
        refused,
        "He I has 2 electrons: the one-electron model needs exactly one"
    );
    let moment = |text: &str| NuclearMoment::of(text.parse().unwrap());
    assert_eq!(moment("D I"), Some(NuclearMoment::DEUTERON));
    assert_eq!(moment("He II"), None);
}
