//! Values from outside, each with its source, from memory of it.

use super::tables::{
    LevelName, MHZ_PER_CM, Row, close, constants, energy_mhz, half, hyperfine_mhz, number, table,
};

/// Fine-structure intervals of the first resonance doublets, from printed level tables
/// (Moore 1949, 1952, 1958, Atomic Energy Levels, Circular 467, from memory), cm⁻¹.
/// Tolerance: the tables print 0.01 cm⁻¹ and older positions; Cs is 554.11 there.
#[test]
fn fine_structure_of_the_alkali_doublets() {
    let levels = table("levels.csv");
    for (species, shell, printed) in [
        ("6Li I", "2p", 0.34),
        ("7Li I", "2p", 0.34),
        ("23Na I", "3p", 17.20),
        ("39K I", "4p", 57.72),
        ("41K I", "4p", 57.72),
        ("85Rb I", "5p", 237.60),
        ("87Rb I", "5p", 237.60),
        ("133Cs I", "6p", 554.11),
        ("40Ca II", "4p", 222.90),
        ("138Ba II", "6p", 1690.84),
        ("1H I", "2p", 0.366),
    ] {
        let high = energy_mhz(&levels, species, (shell, "2Po", "3/2"));
        let low = energy_mhz(&levels, species, (shell, "2Po", "1/2"));
        let tolerance = if printed < 1.0 { 0.01 } else { 0.08 };
        close(species, (high - low) / MHZ_PER_CM, printed, tolerance);
    }
}

/// Fine structure of He 2³P by microwaves: 29 616.95 and 2 291.18 MHz (Castillega, Livingston, Sanders and
/// Shiner 2000, Phys. Rev. Lett. 84, 4321; Borbely et al. 2009, Phys. Rev. A 79, 060503; from memory).
/// Tolerance: the optical row for J = 2 has σ 0.03 MHz.
#[test]
fn fine_structure_of_the_helium_triplet() {
    let levels = table("levels.csv");
    let energy = |j| energy_mhz(&levels, "4He I", ("1s 2p", "3Po", j));
    close("J = 0 to 1", energy("0") - energy("1"), 29_616.95, 0.1);
    close("J = 1 to 2", energy("1") - energy("2"), 2_291.18, 0.1);
}

/// Ground-state splittings, MHz; each by its own microwave paper, not by the table's A constants.
#[test]
fn ground_hyperfine_splittings() {
    let rows = table("hyperfine.csv");
    for (species, level, splitting_mhz, tolerance) in [
        // Hellwig et al. 1970, IEEE Trans. Instrum. Meas. 19, 200.
        ("1H I", ("1s", "2S", "1/2"), 1_420.405_752, 1e-6),
        // Wineland and Ramsey 1972, Phys. Rev. A 5, 821.
        ("D I", ("1s", "2S", "1/2"), 327.384_352_5, 1e-6),
        // Beckmann, Böklen and Elke 1974, Z. Phys. 270, 173.
        ("6Li I", ("2s", "2S", "1/2"), 228.205_26, 1e-4),
        ("7Li I", ("2s", "2S", "1/2"), 803.504_087, 1e-5),
        ("23Na I", ("3s", "2S", "1/2"), 1_771.626_129, 1e-5),
        ("39K I", ("4s", "2S", "1/2"), 461.719_720, 1e-5),
        ("41K I", ("4s", "2S", "1/2"), 254.013_872, 1e-5),
        // Eisinger, Bederson and Feld 1952, Phys. Rev. 86, 73.
        ("40K I", ("4s", "2S", "1/2"), 1_285.79, 0.02),
        // Penselin, Moran, Cohen and Winkler 1962, Phys. Rev. 127, 524.
        ("85Rb I", ("5s", "2S", "1/2"), 3_035.732_44, 1e-4),
        // Bize et al. 1999, Europhys. Lett. 45, 558.
        ("87Rb I", ("5s", "2S", "1/2"), 6_834.682_610_904, 1e-8),
        // The second, by definition.
        ("133Cs I", ("6s", "2S", "1/2"), 9_192.631_770, 1e-9),
        // Blatt and Werth 1982, Phys. Rev. A 25, 1476.
        ("137Ba II", ("6s", "2S", "1/2"), 8_037.741_667, 1e-4),
    ] {
        let row = constants(&rows, species, level);
        let (i, j) = (half(&row["nuclear_spin"]), half(&row["j"]));
        let split = (hyperfine_mhz(row, i + j) - hyperfine_mhz(row, i + j - 1.0)).abs();
        close(species, split, splitting_mhz, tolerance);
    }
}

/// A constants of two isotopes stand as their nuclear g factors (moments: Fuller 1976, J. Phys. Chem. Ref. Data 5,
/// 835, from memory). Tolerance 1 %: hyperfine anomaly and second order stay below it in these levels.
#[test]
fn hyperfine_constants_of_isotopes_stand_as_their_g_factors() {
    let rows = table("hyperfine.csv");
    for (first, second, level, ratio) in [
        (
            "7Li I",
            "6Li I",
            ("2s", "2S", "1/2"),
            (3.2564 / 1.5) / 0.82205,
        ),
        ("39K I", "41K I", ("4s", "2S", "1/2"), 0.39147 / 0.21487),
        (
            "40K I",
            "39K I",
            ("4s", "2S", "1/2"),
            (-1.2981 / 4.0) / (0.39147 / 1.5),
        ),
        (
            "87Rb I",
            "85Rb I",
            ("5s", "2S", "1/2"),
            (2.7512 / 1.5) / (1.3530 / 2.5),
        ),
        (
            "87Rb I",
            "85Rb I",
            ("5p", "2Po", "3/2"),
            (2.7512 / 1.5) / (1.3530 / 2.5),
        ),
        (
            "137Ba I",
            "135Ba I",
            ("6s 6p", "1Po", "1"),
            0.93737 / 0.83794,
        ),
        (
            "171Yb I",
            "173Yb I",
            ("6s 6p", "3Po", "1"),
            (0.49367 / 0.5) / (-0.6799 / 2.5),
        ),
        (
            "199Hg I",
            "201Hg I",
            ("6s 6p", "3Po", "1"),
            (0.50589 / 0.5) / (-0.56023 / 1.5),
        ),
    ] {
        let a = |species| number(constants(&rows, species, level), "a_mhz");
        let found = a(first) / a(second);
        close(
            &format!("{first}/{second} {level:?}"),
            found / ratio,
            1.0,
            0.01,
        );
    }
}

/// Components of the Rb and Cs stabilised lasers (Ye et al. 1996, Opt. Lett. 21, 1280; Quinn 2003, Metrologia 40, 103:
/// the crossover F' = 2, 3 of ⁸⁷Rb at 384 227 981.9 MHz), from memory. Tolerance: the printed digits.
#[test]
fn known_components_of_the_rubidium_line() {
    let (levels, rows) = (table("levels.csv"), table("hyperfine.csv"));
    let centroid = energy_mhz(&levels, "87Rb I", ("5p", "2Po", "3/2"));
    let ground = constants(&rows, "87Rb I", ("5s", "2S", "1/2"));
    let upper = constants(&rows, "87Rb I", ("5p", "2Po", "3/2"));
    let component = |f| centroid + hyperfine_mhz(upper, f) - hyperfine_mhz(ground, 2.0);
    close("F = 2 to 3", component(3.0), 384_228_115.203, 0.02);
    let crossover = 0.5 * (component(2.0) + component(3.0));
    close("crossover", crossover, 384_227_981.9, 0.1);
}

/// The 1S–2S shift of D on H is the reduced mass (electron to proton and deuteron mass ratios 1836.152673 and
/// 3670.482968, CODATA 2022); the rest is nuclear size and recoil beyond it, below 3e-5 of the shift (common practice).
#[test]
fn deuterium_lies_above_hydrogen_by_the_reduced_mass() {
    let levels = table("levels.csv");
    let energy = |species| energy_mhz(&levels, species, ("2s", "2S", "1/2"));
    let ratio = (1.0 + 1.0 / 1_836.152_673) / (1.0 + 1.0 / 3_670.482_968);
    let expected = energy("1H I") * (ratio - 1.0);
    let shift = energy("D I") - energy("1H I");
    close("1S-2S of D on H", shift / expected, 1.0, 3e-5);
}

/// Light elements shift by mass, so that the heavier isotope lies higher; in Ba, Yb and Hg the field shift of an ns
/// electron leads and the heavier even isotope lies lower (common practice; King 1984, Isotope Shifts in Atomic Spectra).
#[test]
fn isotope_shifts_have_the_sign_of_their_cause() {
    let levels = table("levels.csv");
    let rising: [(&[&str], LevelName); 8] = [
        (&["1H I", "D I"], ("2p", "2Po", "1/2")),
        (&["6Li I", "7Li I"], ("2p", "2Po", "3/2")),
        (&["39K I", "40K I", "41K I"], ("4p", "2Po", "1/2")),
        (&["85Rb I", "87Rb I"], ("5p", "2Po", "3/2")),
        (
            &["40Ca I", "42Ca I", "43Ca I", "44Ca I", "46Ca I", "48Ca I"],
            ("4s 4p", "1Po", "1"),
        ),
        (
            &["84Sr I", "86Sr I", "87Sr I", "88Sr I"],
            ("5s 5p", "1Po", "1"),
        ),
        (
            &["176Yb I", "174Yb I", "172Yb I", "170Yb I", "168Yb I"],
            ("6s 6p", "1Po", "1"),
        ),
        (
            &["204Hg I", "202Hg I", "200Hg I", "198Hg I"],
            ("6s 6p", "3Po", "1"),
        ),
    ];
    for (isotopes, level) in rising {
        for pair in isotopes.windows(2) {
            let (low, high) = (
                energy_mhz(&levels, pair[0], level),
                energy_mhz(&levels, pair[1], level),
            );
            assert!(low < high, "{pair:?}: {low} {high}");
        }
    }
}

/// D2 over D1: radial parts alike, so the rates stand as the cubes of the frequencies. Tolerance 2 %: spin–orbit mixing
/// of the radial parts grows to 1.2 % in Cs (Fermi 1930; Rafac et al. 1999, Phys. Rev. A 60, 3648, from memory).
#[test]
fn doublet_rates_stand_as_the_cubes_of_the_frequencies() {
    let lines = table("lines.csv");
    let mut checked = 0;
    for species in ["7Li I", "23Na I", "39K I", "87Rb I", "133Cs I"] {
        let doublet: Vec<&Row> = lines
            .iter()
            .filter(|row| row["species"] == species && row["lower_energy_per_cm"] == "0")
            .collect();
        assert_eq!(doublet.len(), 2, "{species}");
        let (second, first) = (doublet[0], doublet[1]);
        let frequencies = number(first, "wavelength_nm") / number(second, "wavelength_nm");
        let rates = number(second, "rate_per_s") / number(first, "rate_per_s");
        close(species, rates / frequencies.powi(3), 1.0, 0.02);
        checked += 1;
    }
    assert_eq!(checked, 5);
}

/// Oscillator strengths of the alkali doublets, D1 + D2, close to one (Na 0.96, K 1.00, Rb 1.03, Cs 1.06: Wiese, Smith and
/// Miles 1969 and Corney 1977, Atomic and Laser Spectroscopy, from memory), f = 1.4992e-14 λ² (g_u/g_l) A with λ in nm
/// (Corney 1977). Tolerance 2 %: the books round to two digits.
#[test]
fn alkali_doublets_hold_about_one_oscillator() {
    let lines = table("lines.csv");
    for (species, printed) in [
        ("7Li I", 0.747),
        ("23Na I", 0.961),
        ("39K I", 1.00),
        ("87Rb I", 1.04),
        ("133Cs I", 1.06),
    ] {
        let sum: f64 = lines
            .iter()
            .filter(|row| row["species"] == species && row["lower_energy_per_cm"] == "0")
            .map(|row| {
                let weight = (2.0 * half(&row["upper_j"]) + 1.0) / 2.0;
                1.4992e-14
                    * number(row, "wavelength_nm").powi(2)
                    * weight
                    * number(row, "rate_per_s")
            })
            .sum();
        close(species, sum / printed, 1.0, 0.02);
    }
}
