//! Sums over rates: oscillator-strength sums and lifetimes.

use super::support::{Ion, ion, ions};

/// Absorption oscillator strength of a line: f = 1.4992e-14 (lambda/nm)^2 (g_u/g_l) A s, from 2 pi e0 m c^3 / (e^2 w^2); Corney 1977,
/// Atomic and Laser Spectroscopy, eq. 4.29.
fn oscillator_strengths(ion: &Ion, lower: &str, j: &str) -> f64 {
    ion.lines
        .iter()
        .filter(|line| {
            line.kind == "line" && (line.lower.0.as_str(), line.lower.1.as_str()) == (lower, j)
        })
        .filter_map(|line| {
            let (low, up) = (ion.level(&line.lower)?, ion.level(&line.upper)?);
            let wavelength_nm = 1e7 / ion.ritz_per_cm(line);
            Some(1.4992e-14 * wavelength_nm.powi(2) * up.g? / low.g? * line.rate_per_s?)
        })
        .sum()
}

/// Electrons outside the closed shells of a configuration (s2, p6, d10, f14 count as closed unless outermost).
fn outer_electrons(configuration: &str) -> f64 {
    let shells: Vec<(char, f64)> = configuration
        .split(' ')
        .filter(|word| !word.starts_with('('))
        .filter_map(|word| {
            let letter = word.chars().nth(1)?;
            let count = word
                .get(2..)
                .filter(|c| !c.is_empty())
                .map_or(Some(1.0), |c| c.parse().ok())?;
            Some((letter, count))
        })
        .collect();
    let open = |(letter, count): &(char, f64)| {
        !matches!((letter, *count as u32), ('p', 6) | ('d', 10) | ('f', 14))
    };
    let total: f64 = shells
        .iter()
        .filter(|shell| open(shell))
        .map(|shell| shell.1)
        .sum();
    if total > 0.0 {
        total
    } else {
        shells.last().map_or(0.0, |shell| shell.1)
    }
}

/// Thomas-Reiche-Kuhn: the absorption from the ground level into bound levels stays below the number of its outer electrons (Condon & Shortley
/// 1935, chapter 4, section 9). 10 %: the accuracy of the rates.
#[test]
fn absorption_from_the_ground_level_obeys_the_sum_rule() {
    let mut checked = 0;
    for ion in ions() {
        let ground = &ion.levels[0];
        let j = ion
            .lines
            .iter()
            .find(|line| line.lower.0.parse() == Ok(0.0))
            .map(|line| line.lower.1.clone());
        let sum = j.map_or(0.0, |j| oscillator_strengths(ion, &ground.text, &j));
        let electrons = outer_electrons(&ground.configuration);
        if sum > 0.0 && electrons > 0.0 {
            checked += 1;
            assert!(
                sum < 1.1 * electrons,
                "{}: {sum:.3} for {electrons} electrons",
                ion.species
            );
        }
    }
    println!("{checked} ions");
    assert!(checked > 70, "{checked}");
}

/// The sum for one electron outside closed shells is dominated by the resonance doublet: between 0.6 and 1.15.
/// (Li 0.75, Na 0.96, K 1.0, Rb 1.02, Cs 1.06: Morton 2000, 2003, core polarisation above 1.)
#[test]
fn resonance_doublets_carry_the_strength_of_one_electron() {
    for species in [
        "Li I", "Na I", "K I", "Rb I", "Cs I", "Mg II", "Ca II", "Sr II", "Ba II",
    ] {
        let ion = ion(species);
        let sum = oscillator_strengths(ion, &ion.levels[0].text, "0.5");
        println!("{species}: {sum:.3}");
        assert!((0.6..1.15).contains(&sum), "{species}: {sum}");
    }
}

/// Lifetime of a level whose decays are all held, ns.
fn lifetime_ns(ion: &Ion, energy: &str, j: f64) -> f64 {
    let decays = ion.lines.iter().filter(|line| {
        line.kind == "line" && line.upper.0 == energy && line.upper.1.parse() == Ok(j)
    });
    1e9 / decays.filter_map(|line| line.rate_per_s).sum::<f64>()
}

/// Measured or calculated lifetimes, from memory of the papers named; 2 %: the rates' own uncertainty is below that.
#[test]
fn lifetimes_of_resonance_levels() {
    for (species, energy, j, ns) in [
        ("He I", "171134.89695", 1.0, 0.5551), // 2 1P: Drake & Morton 2007, J. Phys. Chem. Ref. Data 36
        ("Na I", "16956.170", 0.5, 16.299), // 3p 1/2: Volz, Majerus, Liebel, Schmitt & Schmoranzer 1996, Phys. Rev. Lett. 76, 2862
        ("Na I", "16973.366", 1.5, 16.254), // 3p 3/2: the same
    ] {
        let ion = ion(species);
        let text = ion
            .levels
            .iter()
            .find(|l| {
                (l.energy_per_cm - energy.parse::<f64>().unwrap()).abs() < 0.01 && l.j == Some(j)
            })
            .unwrap()
            .text
            .clone();
        let held = lifetime_ns(ion, &text, j);
        assert!(
            (held / ns - 1.0).abs() < 0.02,
            "{species} {energy}: {held} against {ns}"
        );
    }
}
