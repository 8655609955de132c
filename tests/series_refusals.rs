//! What the series fit refuses, and how it says so.

use lineclear::calc::series::polarisation::{
    CorePolarisability, NonPenetrating, inverse_fourth_power, inverse_sixth_power,
};
use lineclear::calc::series::{
    Core, LabelledLevel, Limit, Member, SeriesError, SeriesInput, fit, group_series,
};

const LIMIT_PER_CM: f64 = 33_690.8;
const RYDBERG: f64 = 109_736.6;

fn member(n: u32, defect: f64) -> Member {
    Member {
        n,
        energy_per_cm: LIMIT_PER_CM - RYDBERG / (f64::from(n) - defect).powi(2),
        uncertainty_per_cm: 0.01,
    }
}

fn input(members: Vec<Member>) -> SeriesInput {
    SeriesInput {
        core_charge: 1,
        rydberg_per_cm: RYDBERG,
        l: 0,
        core: Core::Rigid,
        limit: Limit::Fixed {
            per_cm: LIMIT_PER_CM,
            sigma_per_cm: 0.01,
        },
        members,
    }
}

fn smooth() -> Vec<Member> {
    (6..14)
        .map(|n| member(n, 3.13 + 0.18 / (f64::from(n) - 3.13).powi(2)))
        .collect()
}

#[test]
fn a_smooth_series_is_recovered() {
    let found = fit(&input(smooth())).unwrap();
    // 0.01 cm⁻¹ at n* = 10 is 5e-5 of a defect; eight members and an exact model leave less.
    assert!((found.coefficients[0] - 3.13).abs() < 5e-5, "{found:?}");
    assert!(
        found.chi_squared < 1e-3 && found.perturbed.is_empty(),
        "{found:?}"
    );
    let level = found.predict(40).unwrap();
    assert!((level.quantum_defect - 3.13 - 0.18 / 36.87_f64.powi(2)).abs() < 5e-5);
    assert!((level.binding_per_cm + level.energy_per_cm - found.limit_per_cm).abs() < 1e-9);
}

#[test]
fn a_limit_is_found_where_none_is_known() {
    let mut given = input(smooth());
    given.limit = Limit::Fitted {
        start_per_cm: LIMIT_PER_CM + 40.0,
    };
    let found = fit(&given).unwrap();
    assert!(
        (found.limit_per_cm - LIMIT_PER_CM).abs() < 3.0 * found.limit_sigma_per_cm + 1e-3,
        "{found:?}"
    );
    assert!(found.limit_sigma_per_cm < 1.0, "{found:?}");
}

#[test]
fn a_perturbed_member_is_named() {
    let mut members = smooth();
    members[4].energy_per_cm += 5.0;
    let found = fit(&input(members)).unwrap();
    let named: Vec<u32> = found.perturbed.iter().map(|(n, _)| *n).collect();
    assert_eq!(named, [10]);
    assert!(!found.used.contains(&10));
    assert!((found.coefficients[0] - 3.13).abs() < 2e-4, "{found:?}");
}

#[test]
fn a_perturbed_series_is_refused() {
    // Defects that rise through a resonance, as where a doubly excited level crosses.
    let defects = [3.10, 3.15, 3.30, 3.75, 4.0, 4.05, 4.07, 4.08];
    let members = defects
        .iter()
        .zip(6..)
        .map(|(d, n)| member(n, *d))
        .collect();
    let error = fit(&input(members)).unwrap_err();
    assert!(matches!(error, SeriesError::Perturbed { .. }), "{error}");
    assert!(error.to_string().starts_with("the series is perturbed"));
}

#[test]
fn too_few_members() {
    assert_eq!(
        fit(&input(vec![member(6, 3.2)])),
        Err(SeriesError::TooFewMembers { held: 1, needed: 2 })
    );
    let mut soft = input(smooth()[..3].to_vec());
    soft.core = Core::Soft;
    assert_eq!(
        fit(&soft),
        Err(SeriesError::TooFewMembers { held: 3, needed: 4 })
    );
    let mut open = input(smooth()[..3].to_vec());
    open.limit = Limit::Fitted {
        start_per_cm: LIMIT_PER_CM,
    };
    assert_eq!(
        fit(&open),
        Err(SeriesError::TooFewMembers { held: 3, needed: 4 })
    );
}

#[test]
fn quantum_numbers_out_of_range() {
    let mut given = input(smooth());
    given.l = 6;
    assert_eq!(
        fit(&given),
        Err(SeriesError::AngularMomentum { n: 6, l: 6 })
    );
    let found = fit(&input(smooth())).unwrap();
    assert_eq!(
        found.predict(5),
        Err(SeriesError::BelowLowest { n: 5, lowest: 6 })
    );
    assert_eq!(
        found.predict(0),
        Err(SeriesError::AngularMomentum { n: 0, l: 0 })
    );
}

#[test]
fn numbers_that_are_none() {
    for value in [f64::NAN, f64::INFINITY, -1.0] {
        let mut members = smooth();
        members[2].energy_per_cm = value;
        assert!(
            matches!(fit(&input(members)), Err(SeriesError::BadNumber { .. })),
            "{value}"
        );
        let mut given = input(smooth());
        given.rydberg_per_cm = value;
        let refused = fit(&given);
        assert!(value == f64::INFINITY || refused.is_err(), "{value}");
        given.rydberg_per_cm = RYDBERG;
        given.limit = Limit::Fixed {
            per_cm: LIMIT_PER_CM,
            sigma_per_cm: value,
        };
        assert!(
            matches!(fit(&given), Err(SeriesError::BadNumber { .. })),
            "{value}"
        );
    }
    let mut above = smooth();
    above[7].energy_per_cm = LIMIT_PER_CM + 1.0;
    assert!(matches!(
        fit(&input(above)),
        Err(SeriesError::AboveLimit { n: 13, .. })
    ));
    let mut twice = smooth();
    twice[1].n = 6;
    assert_eq!(
        fit(&input(twice)),
        Err(SeriesError::RepeatedMember { n: 6 })
    );
}

#[test]
fn the_order_of_the_members_does_not_matter() {
    let mut turned = smooth();
    turned.reverse();
    assert_eq!(fit(&input(turned)), fit(&input(smooth())));
}

fn level<'a>(
    energy_per_cm: f64,
    configuration: &'a str,
    term: &'a str,
    twice_j: u16,
) -> LabelledLevel<'a> {
    LabelledLevel {
        energy_per_cm,
        uncertainty_per_cm: 0.01,
        configuration,
        term,
        twice_j,
    }
}

#[test]
fn cores_that_have_no_single_limit() {
    // Ca I: 3d 4p lies on an excited core, 4s2 holds equivalent electrons (common practice).
    let calcium = [
        level(0.0, "4s2", "1S", 0),
        level(23_652.3, "4s 4p", "1Po", 2),
        level(36_731.6, "4s 5p", "1Po", 2),
        level(43_933.5, "3d 4p", "1Po", 2),
    ];
    let series = group_series(&calcium);
    let of = |core: &str, l: u32| {
        series
            .iter()
            .find(|s| s.key.core == core && s.key.l == l)
            .unwrap()
    };
    assert_eq!(of("4s", 1).core_on_ground(), Ok(Core::Soft));
    assert_eq!(of("4s", 1).members.len(), 2);
    assert_eq!(of("4s", 0).equivalent, [4]);
    assert!(matches!(
        of("3d", 1).core_on_ground(),
        Err(SeriesError::CoreChanging { .. })
    ));
    // C I: 2Po1/2 and 2Po3/2 of C II lie 63 cm⁻¹ apart; 2s 2p3 is an excited core.
    let carbon = [
        level(0.0, "2s2 2p2", "3P", 0),
        level(60_352.6, "2s2 2p (2Po) 3s", "3Po", 2),
        level(78_104.9, "2s2 2p (2Po) 4s", "3Po", 2),
    ];
    let series = group_series(&carbon);
    let split = series.iter().find(|s| s.members.len() == 2).unwrap();
    assert!(matches!(
        split.core_on_ground(),
        Err(SeriesError::SplitCore { .. })
    ));
    // Ar I: of the two parents 3p5 2Po3/2 is the ground state of Ar II.
    let argon = [
        level(0.0, "3p6", "1S", 0),
        level(93_143.8, "3p5 (2Po3/2) 4s", "2[3/2]o", 4),
        level(95_399.8, "3p5 (2Po1/2) 4s", "2[1/2]o", 2),
    ];
    let series = group_series(&argon);
    let on = |parent: &str| {
        series
            .iter()
            .find(|s| s.key.core.contains(parent))
            .unwrap()
            .core_on_ground()
    };
    assert_eq!(on("3/2"), Ok(Core::Soft));
    assert!(matches!(on("1/2"), Err(SeriesError::CoreChanging { .. })));
}

#[test]
fn gaps_and_rivals_are_reported() {
    let levels = [
        level(0.0, "3p6 4s", "2S", 1),
        level(21_026.6, "3p6 5s", "2S", 1),
        level(30_274.2, "3p6 7s", "2S", 1),
        level(30_280.0, "3p6 7s", "2S", 1),
        level(31_765.4, "3p6 8s", "2S", 1),
    ];
    let series = group_series(&levels);
    assert_eq!(series.len(), 1);
    assert_eq!(series[0].contested, [7]);
    assert_eq!(series[0].missing, [6, 7]);
    assert_eq!(
        series[0].members.iter().map(|m| m.n).collect::<Vec<_>>(),
        [4, 5, 8]
    );
}

#[test]
fn core_polarisation_says_where_it_ends() {
    let model = NonPenetrating {
        core_charge: 1,
        rydberg_per_cm: RYDBERG,
        limit_per_cm: LIMIT_PER_CM,
        limit_sigma_per_cm: 0.01,
        core: CorePolarisability::of_core("Rb", 1).unwrap(),
    };
    assert_eq!(
        model.level(5, 2, None),
        Err(SeriesError::Penetrating { l: 2, lowest: 3 })
    );
    assert_eq!(
        model.level(5, 5, None),
        Err(SeriesError::AngularMomentum { n: 5, l: 5 })
    );
    assert_eq!(CorePolarisability::of_core("Fe", 1), None);
    let mean = model.level(8, 4, None).unwrap().energy_per_cm;
    let split = [7, 9].map(|j| model.level(8, 4, Some(j)).unwrap().energy_per_cm);
    // The mean over j with weights 2j + 1 is the level without spin (Bethe & Salpeter 1957, §13).
    let weighted = (8.0 * split[0] + 10.0 * split[1]) / 18.0;
    assert!((weighted - mean).abs() < 1e-9, "{weighted} {mean}");
}

#[test]
fn hydrogenic_expectation_values() {
    // 2p: ⟨r⁻⁴⟩ = 1/24; 3d: ⟨r⁻⁴⟩ = 2/(15·… ) by elementary integration of r²ⁿ e^(−2r/n):
    // R(2p)² = r² e^(−r)/24 gives ∫ e^(−r)/24 = 1/24; R(3d)² = 8 r⁴ e^(−2r/3)/98 415 gives
    // ∫ r² … = (8/98 415)·2·(3/2)³ and ∫ r⁰ … = (8/98 415)·(3/2).
    let expected = [
        (inverse_fourth_power(1, 2, 1), 1.0 / 24.0),
        (inverse_fourth_power(1, 3, 2), 8.0 / 98_415.0 * 2.0 * 3.375),
        (inverse_sixth_power(1, 3, 2), 8.0 / 98_415.0 * 1.5),
        (inverse_sixth_power(2, 3, 2), 64.0 * 8.0 / 98_415.0 * 1.5),
    ];
    for (found, wanted) in expected {
        // Rational arithmetic in double precision.
        assert!((found - wanted).abs() < 1e-14 * wanted, "{found} {wanted}");
    }
}

#[test]
fn levels_that_no_curve_joins_are_refused() {
    // Rising energies, all below the limit, that belong to no one series.
    let energies = [0.0, 20_132.5, 21_000.0, 33_000.0];
    let members = (5..).zip(energies).map(|(n, energy_per_cm)| Member {
        n,
        energy_per_cm,
        uncertainty_per_cm: 0.01,
    });
    let refused = fit(&input(members.collect())).unwrap_err();
    assert!(
        matches!(refused, SeriesError::Perturbed { .. }),
        "{refused}"
    );
    // A level that is known to 0.5 cm⁻¹ may lie that far off.
    let mut members = smooth();
    members[7].uncertainty_per_cm = 0.5;
    members[7].energy_per_cm += 1.0;
    assert!(fit(&input(members)).is_ok());
}
