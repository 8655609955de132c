// Bad input: one clear sentence each, and the exit status of what was wrong.

use super::common::run;

#[test]
fn each_bad_question_gets_one_sentence() {
    for (arguments, exit, words) in [
        ("780..781nm --of Rb --gas-temperature 0K", 2, "above zero"),
        ("780..781nm --of Rb --gas-temperature -5K", 2, "above zero"),
        ("780..781nm --of Rb --density 0cm-3", 2, "above zero"),
        ("780..781nm --of Rb --density 1e10cm-3 --cell-length 0cm", 2, "no length above zero"),
        ("780..781nm --of Rb --density 1e10cm-3 --cell-length 5", 2, "with its unit"),
        ("781..780nm --of Rb", 2, "780"),
        ("780nm --of Rb", 2, "not a range"),
        ("780..781nm --of Xx", 2, "no such element"),
        ("780..781nm --of 235U", 2, "actinides"),
        ("780..781nm --of \"239Pu I\"", 2, "actinides"),
        ("780..781nm --of Og", 1, "no levels are held"),
    ] {
        let found = run(&format!("lineclear tune {arguments}"));
        assert_eq!(found.exit, exit, "{arguments}: {}", found.stderr);
        assert!(found.stderr.contains(words), "{arguments}: {}", found.stderr);
        assert_eq!(found.stderr.trim().lines().count(), 1, "{arguments}: {}", found.stderr);
        assert_eq!(found.stdout, "", "{arguments}");
    }
}

/// Nothing in the range is an answer, not an error.
#[test]
fn an_empty_range_is_answered() {
    let found = run("lineclear tune 700..701nm --of Rb");
    assert_eq!(found.exit, 0, "{}", found.stderr);
    assert!(found.stdout.contains("no held line from a populated level"), "{}", found.stdout);
}

/// The stable keys of `tune`.
#[test]
fn every_stable_key_is_there() {
    let t = super::transition("87Rb I", 780.241, "");
    for key in [
        "species", "wavelength_nm", "medium", "vacuum_wavelength_nm", "wavenumber_per_cm",
        "wavenumber_uncertainty_per_cm", "lower", "upper", "rate_per_s", "rate_relative_uncertainty",
        "position_origin", "rate_origin", "position_source", "rate_source", "kind",
        "natural_width_mhz", "doppler_width_mhz", "saturation_intensity_mw_per_cm2",
        "natural_cross_section_cm2", "doppler_cross_section_cm2", "branching_fraction", "cycling",
        "lower_population", "upper_lifetime_ns",
    ] {
        assert!(!t[key].is_null(), "{key}: {t:#}");
    }
}
