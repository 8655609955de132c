//! `predict` against published numbers, and what it says to questions that make no sense.

#![allow(clippy::unwrap_used, reason = "a panic in a test is its report")]

mod common;

use common::{json, run};
use lineclear::catalogue::Catalogue;
use serde_json::Value;

fn list<'a>(answer: &'a Value, key: &str) -> &'a Vec<Value> {
    answer[key].as_array().unwrap()
}

fn number(value: &Value) -> f64 {
    value.as_f64().unwrap()
}

#[test]
fn balmer_series_of_hydrogen() {
    let answer = json("lineclear predict \"H I\" --series Balmer --n 3..20");
    let lines = list(&answer, "lines");
    assert_eq!(lines.len(), 18);
    // Hα to Hδ in air, nm, and the limit: common practice, to the last digit given.
    for (line, nm) in lines.iter().zip([656.28, 486.13, 434.05, 410.17]) {
        let found = number(&line["wavelength_nm"]);
        assert!((found - nm).abs() < 0.006, "{found} for {nm}");
    }
    assert!((number(&answer["series_limit_nm"]) - 364.5).abs() < 0.1);
    // A(3 → 2), A(4 → 2): Wiese, Smith & Glennon 1966, NSRDS-NBS 4, table for H.
    for (line, rate) in lines.iter().zip([4.410e7, 8.419e6]) {
        let found = number(&line["rate_per_s"]);
        assert!((found / rate - 1.0).abs() < 1e-3, "{found} for {rate}");
    }
}

/// Fitted limits against measured ionisation energies, from memory: Li Bushaw et al. 2007, Phys. Rev. A
/// 75, 052503; Na Baugh et al. 1998, Phys. Rev. A 58, 1585; K Lorenzen & Niemax 1983, Phys. Scr. 27, 300; Rb
/// Mack et al. 2011, Phys. Rev. A 83, 052515; Cs Deiglmayr et al. 2016, Phys. Rev. A 93, 013424; Mg II
/// Risberg 1955, Ark. Fys. 9, 483; He Kandula et al. 2010, Phys. Rev. Lett. 105, 063001. A fit that reaches
/// elsewhere must say so in its σ: 2 σ and the last digit given.
#[test]
fn limits_of_series_are_those_measured() {
    let doublets = ["nS1/2", "nP1/2", "nP3/2", "nD3/2", "nD5/2"];
    let helium = ["n1S0", "n3S1", "n1P1", "n3P2", "n1D2"];
    for (species, limit_per_cm, series) in [
        ("Li I", 43_487.159, doublets),
        ("Na I", 41_449.451, doublets),
        ("K I", 35_009.814, doublets),
        ("Rb I", 33_690.805, doublets),
        ("Cs I", 31_406.468, doublets),
        ("Mg II", 121_267.61, doublets),
        ("He I", 198_310.669, helium),
    ] {
        for name in series {
            let answer = json(&format!(
                "lineclear predict \"{species}\" --series {name} --n 30..40"
            ));
            let found = number(&answer["series_limit_per_cm"]);
            let sigma = number(&answer["series_limit_uncertainty_per_cm"]);
            let off = (found - limit_per_cm).abs();
            println!("{species} {name}: {found:.3} ± {sigma:.3}, {off:.3} off");
            assert!(
                off < 2.0 * sigma + 0.001,
                "{species} {name}: {off} ± {sigma}"
            );
            // The highest member carries nearly all of it.
            let last = list(&answer, "levels").last().unwrap();
            assert!(number(&last["uncertainty_per_cm"]) > 0.3 * sigma, "{last}");
        }
    }
}

#[test]
fn all_named_series_begin_above_their_shell() {
    let names = [
        "Lyman",
        "Balmer",
        "Paschen",
        "Brackett",
        "Pfund",
        "Humphreys",
    ];
    for (name, m) in names.iter().zip(1..) {
        let first = m + 1;
        let answer = json(&format!(
            "lineclear predict \"D I\" --series {name} --n {first}..{}",
            m + 5
        ));
        assert_eq!(list(&answer, "lines").len(), 5, "{name}");
        let below = run(&format!(
            "lineclear predict \"D I\" --series {name} --n {m}..9"
        ));
        assert_eq!(below.exit, 2, "{name}");
        assert!(
            below.stderr.contains(&format!("n ≥ {first}")),
            "{}",
            below.stderr
        );
    }
}

#[test]
fn rubidium_s_series_has_the_published_quantum_defect() {
    let answer = json(
        "lineclear predict \"Rb I\" --series nS1/2 --n 5..60 --to \"5p 3/2\" --temperature 300K",
    );
    let levels = list(&answer, "levels");
    assert_eq!(levels.len(), 56);
    // δ(30 S1/2) = 3.1311804 + 0.1784/(30 − δ)² = 3.1314: Li, Mourachko, Noel & Gallagher 2003,
    // Phys. Rev. A 67, 052502. The levels held are known to 0.01 cm⁻¹, the limit to 0.1: 1e-2 in δ at n = 30.
    let thirty = levels.iter().find(|l| l["n"] == 30).unwrap();
    let sigma = number(&thirty["uncertainty_per_cm"]);
    let slope = 2.0 * 109_736.6 / (30.0f64 - 3.13).powi(3);
    let off = number(&thirty["quantum_defect"]) - 3.1314;
    assert!(
        off.abs() < 3.0 * sigma / slope + 1e-3,
        "{off}, σ {}",
        sigma / slope
    );
    assert!(sigma < 0.3, "{sigma}");
    // Lifetime of 28 S at 0 K, 1.43 × 25.0^2.94 ns, and at 300 K a good part of it: Beterov, Ryabtsev,
    // Tretyakov & Entin 2009, Phys. Rev. A 79, 052504 (fit of their table; from memory), to 10 %.
    let twenty_eight = levels.iter().find(|l| l["n"] == 28).unwrap();
    let free = number(&twenty_eight["lifetime_ns"]);
    let published = 1.43 * (28.0f64 - 3.131).powf(2.94);
    assert!(
        (free / published - 1.0).abs() < 0.1,
        "{free} for {published}"
    );
    let warm = number(&twenty_eight["black_body_lifetime_ns"]);
    assert!(warm < 0.85 * free && warm > 0.3 * free, "{warm} of {free}");
    // Lines from 6 S and up end on 5p 3/2.
    let lines = list(&answer, "lines");
    assert_eq!(lines.len(), 55);
    // 7s – 5p 3/2 at 741 nm: Rb I 740.82 nm in air, common practice.
    let seven = lines.iter().find(|l| l["n"] == 7).unwrap();
    assert!(
        (number(&seven["wavelength_nm"]) - 740.82).abs() < 0.02,
        "{seven}"
    );
}

/// Near the limit the levels of two series lie closer together than their fitted limits agree: what
/// black-body radiation does must not feel that.
#[test]
fn black_body_radiation_shortens_high_levels_as_published() {
    let answer = json("lineclear predict \"Rb I\" --series nS1/2 --n 40..110 --temperature 300K");
    let levels = list(&answer, "levels");
    // Rate 2.14e10 A n*^−D/(exp(315780 B/(n*^C T)) − 1) s⁻¹ of Rb nS, T in K: Beterov, Ryabtsev, Tretyakov &
    // Entin 2009, Phys. Rev. A 79, 052504, equation 14 and table 1 (from memory); a fit that
    // holds to some per cent, the least at its end, n = 80.
    let (a, b, c, d) = (0.134, 0.251, 2.567, 4.426);
    for n in [40, 60, 80] {
        let level = levels.iter().find(|l| l["n"] == n).unwrap();
        let effective = f64::from(n) - number(&level["quantum_defect"]);
        let occupation = ((315_780.0 * b) / (effective.powf(c) * 300.0)).exp_m1();
        let published = 2.14e10 * a / effective.powf(d) / occupation;
        let [warm, free] = ["black_body_lifetime_ns", "lifetime_ns"].map(|key| number(&level[key]));
        let found = 1e9 / warm - 1e9 / free;
        assert!(
            (found / published - 1.0).abs() < 0.08,
            "{n}: {found} s⁻¹, {published} s⁻¹"
        );
    }
    for key in ["lifetime_ns", "black_body_lifetime_ns"] {
        for pair in levels.windows(2) {
            let [low, high] = [&pair[0], &pair[1]].map(|l| number(&l[key]));
            // n² to n³ in all, 1.8 % a step at n = 110 at the least.
            assert!(high > low, "{key}: {pair:?}");
        }
    }
}

#[test]
fn methods_name_what_is_held_and_what_is_fitted() {
    let answer = json("lineclear predict \"Cs I\" --series nS1/2 --n 6..40");
    let methods: Vec<&str> = list(&answer, "levels")
        .iter()
        .map(|l| l["method"].as_str().unwrap())
        .collect();
    assert!(methods[0].starts_with("held, "), "{}", methods[0]);
    assert_eq!(methods[34], "Rydberg–Ritz fit");
    assert!(answer["notes"].to_string().contains("members (n ="));
    let high = json("lineclear predict \"Cs I\" --series nG7/2 --n 5..9");
    assert_eq!(list(&high, "levels")[3]["method"], "core polarisation");
}

#[test]
fn the_catalogue_and_predict_agree() {
    for (species, series, term) in [
        ("Na I", "nD5/2", "2D"),
        ("Rb I", "nF7/2", "2Fo"),
        ("Ca II", "nS1/2", "2S"),
    ] {
        let answer = json(&format!(
            "lineclear predict \"{species}\" --series {series} --n 7..20"
        ));
        let catalogue = Catalogue::open(common::catalogue()).unwrap();
        let held = catalogue.levels(species.parse().unwrap()).unwrap();
        let mut compared = 0;
        for level in list(&answer, "levels") {
            let end = level["label"].as_str().unwrap().split(' ').next().unwrap();
            let same = held.iter().find(|h| {
                let configuration = h.configuration.as_deref().unwrap_or("");
                configuration.split(' ').next_back() == Some(end)
                    && h.term.as_deref() == Some(term)
                    && h.j.map(|j| j.to_string()).as_deref() == level["j"].as_str()
            });
            let same = same.unwrap_or_else(|| panic!("{species} {level}"));
            let off = same.energy_per_cm - number(&level["energy_per_cm"]);
            // The same numbers by the same functions: rounding only.
            assert!(off.abs() < 1e-9, "{species} {level}: {off}");
            compared += 1;
        }
        assert_eq!(compared, 14);
    }
}

#[test]
fn a_table_of_ones_own_is_fitted() {
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("levels.csv");
    // Invented members: δ = 3.1, limit that of Rb I (33 690.81 cm⁻¹, Morton 2000), R = 109 736.6 cm⁻¹.
    let mut text = String::from("n,energy_per_cm,uncertainty_per_cm\n");
    for n in 8..16 {
        let energy = 33_690.81 - 109_736.606 / (f64::from(n) - 3.1).powi(2);
        text.push_str(&format!("{n},{energy:.5},0.001\n"));
    }
    std::fs::write(&path, text).unwrap();
    let answer = json(&format!(
        "lineclear predict \"Rb I\" --series nS1/2 --n 8..40 --levels {}",
        path.display()
    ));
    let levels = list(&answer, "levels");
    assert_eq!(levels[0]["method"], "given");
    // The limit may move within its σ of 0.1 cm⁻¹, which moves δ by 1e-2 at n = 40.
    let off = number(&levels[32]["quantum_defect"]) - 3.1;
    assert!(off.abs() < 0.03, "{off}");
}

#[test]
fn each_bad_question_gets_one_sentence() {
    let cases = [
        ("\"Rb I\" --series nX1/2 --n 5..9", 2, "l"),
        ("\"Rb I\" --series nS3/2 --n 5..9", 2, "no series"),
        ("\"Rb I\" --series nS1/2 --n 2..9", 2, "lowest"),
        ("\"Rb I\" --series nD5/2 --n 2..9", 2, "l must be below n"),
        ("\"Rb I\" --series Balmer --n 3..9", 2, "one electron"),
        ("\"H I\" --series nP1/2 --n 1..9", 2, "l goes from 0"),
        ("\"H I\" --series nP5/2 --n 2..9", 2, "j is"),
        ("\"H I\" --series Balmer --n 2..9", 2, "n ≥ 3"),
        ("\"He I\" --series nP --n 2..9", 2, "could mean"),
        ("\"Rb I\" --series nP3/2 --n 9..5", 2, "--n"),
        (
            "\"Rb I\" --series nP3/2 --n 5..9 --to \"5p 3/2\"",
            2,
            "no level",
        ),
        ("Rb --series nP3/2 --n 5..9", 2, "one stage"),
        (
            "\"Rb I\" --series nP3/2 --n 5..9 --temperature 0K",
            2,
            "temperature",
        ),
    ];
    for (arguments, exit, words) in cases {
        let found = run(&format!("lineclear predict {arguments}"));
        assert_eq!(found.exit, exit, "{arguments}: {}", found.stderr);
        assert!(found.stdout.is_empty(), "{arguments}");
        assert!(
            found.stderr.contains(words),
            "{arguments}: {}",
            found.stderr
        );
        assert_eq!(
            found.stderr.trim_end().lines().count(),
            1,
            "{arguments}: {}",
            found.stderr
        );
    }
}

#[test]
fn too_few_members_are_refused() {
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("one.csv");
    std::fs::write(&path, "n,energy_per_cm\n5,0\n").unwrap();
    let found = run(&format!(
        "lineclear predict \"Rb I\" --series nS1/2 --n 5..9 --levels {}",
        path.display()
    ));
    assert_eq!(found.exit, 1, "{}", found.stderr);
    assert!(found.stderr.contains("needs"), "{}", found.stderr);
}
