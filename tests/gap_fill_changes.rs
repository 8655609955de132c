//! Imports and the gap fill: what changes, what must not, and catalogues of older programs.

#![allow(
    clippy::unwrap_used,
    clippy::expect_used,
    reason = "a panic in a test is its report"
)]

mod gap_fill_support;

use gap_fill_support::{
    H, RUBIDIUM, all_lines, common, copy, dump, import, import_scaled, label, level_record,
    line_record,
};
use importers::record::Record;
use lineclear::catalogue::Catalogue;
use lineclear::{importers, vocabulary};
use proptest::prelude::*;
use rusqlite::Connection;
use vocabulary::atom::{HalfInteger, Species};
use vocabulary::spectrum::{Level, PositionOrigin};

/// An invented table of a level and a line of some species.
fn invented(species: Species, shell: &str, term: &str, energy_per_cm: f64) -> Vec<Record> {
    vec![
        Record::Level(level_record(species, (shell, term, 3), energy_per_cm, 0.5)),
        Record::Line(line_record(species, energy_per_cm, 0.5)),
    ]
}

#[test]
fn order_twice_and_forget_leave_the_gap_fill_the_same() {
    let species = [H, RUBIDIUM];
    let (_folder, mut catalogue) = copy();
    let before = dump(&catalogue, &species);
    let hydrogen = invented(H, "19p", "2Po", 109_374.8);
    let rubidium = invented(RUBIDIUM, "4p6 17p", "2Po", 33_170.3);
    import(&mut catalogue, "invented-a", &hydrogen);
    import(&mut catalogue, "invented-b", &rubidium);
    let one_way = dump(&catalogue, &species);
    assert_ne!(before, one_way);
    import(&mut catalogue, "invented-b", &rubidium);
    assert!(
        dump(&catalogue, &species) == one_way,
        "importing twice changed something"
    );
    catalogue.forget("invented-a").unwrap();
    catalogue.forget("invented-b").unwrap();
    assert!(
        dump(&catalogue, &species) == before,
        "forgetting left something behind"
    );
    import(&mut catalogue, "invented-b", &rubidium);
    import(&mut catalogue, "invented-a", &hydrogen);
    assert!(
        dump(&catalogue, &species) == one_way,
        "the order of imports matters"
    );
    catalogue.forget("invented-a").unwrap();
    catalogue.forget("invented-b").unwrap();
}

/// A copy of a level or line of the tables, moved or not, as one more table may report it.
#[derive(Clone, Copy, Debug)]
struct Pick {
    species: usize,
    place: usize,
    shift_per_cm: f64,
    sigma_per_cm: f64,
    loose_line: bool,
}

const SPECIES: [Species; 3] = [Species::new(2, 1), Species::new(11, 1), Species::new(20, 2)];

fn pick() -> impl Strategy<Value = Pick> {
    let shift = prop_oneof![Just(0.0), -0.5..0.5, -20.0..20.0f64];
    (
        0usize..3,
        any::<prop::sample::Index>(),
        shift,
        0usize..3,
        any::<bool>(),
    )
        .prop_map(|(species, place, shift_per_cm, sigma, loose_line)| Pick {
            species,
            place: place.index(100_000),
            shift_per_cm,
            sigma_per_cm: [0.001, 0.1, 3.0][sigma],
            loose_line,
        })
}

fn table() -> impl Strategy<Value = Vec<Pick>> {
    prop::collection::vec(pick(), 1..6)
}

/// The records of a table: levels under the names of held or computed ones, lines near theirs.
fn records(table: &[Pick], levels: &[Vec<std::sync::Arc<Level>>; 3]) -> Vec<Record> {
    let record = |pick: &Pick| {
        let species = SPECIES[pick.species];
        let named: Vec<&std::sync::Arc<Level>> = (levels[pick.species].iter())
            .filter(|l| l.configuration.is_some() && l.term.is_some() && l.j.is_some())
            .filter(|l| l.energy_per_cm > 100.0)
            .collect();
        let level = named[pick.place % named.len()];
        let energy = level.energy_per_cm + pick.shift_per_cm;
        if pick.loose_line {
            return Record::Line(line_record(species, energy, pick.sigma_per_cm));
        }
        let name = (
            level.configuration.as_deref().unwrap(),
            level.term.as_deref().unwrap(),
            level.j.unwrap().twice(),
        );
        Record::Level(level_record(species, name, energy, pick.sigma_per_cm))
    };
    table.iter().map(record).collect()
}

proptest! {
    // Each case derives three spectra nine times, which takes seconds.
    #![proptest_config(ProptestConfig::with_cases(3))]

    /// Order and forgetting, for tables that touch series of helium, sodium and ionised calcium.
    #[test]
    fn series_do_not_depend_on_the_order_of_imports((a, b, c) in (table(), table(), table())) {
        let (_folder, mut one) = copy();
        let (_other_folder, mut other) = copy();
        let before = dump(&one, &SPECIES);
        let levels = SPECIES.map(|species| one.levels(species).unwrap());
        let tables = [&a, &b, &c].map(|table| records(table, &levels));
        let keys = ["invented-a", "invented-b", "invented-c"];
        for (catalogue, order) in [(&mut one, [0, 1, 2]), (&mut other, [2, 0, 1])] {
            for at in order {
                // Scales of their own: the widest counts, whoever came first.
                import_scaled(catalogue, keys[at], 0.05 * at as f64, &tables[at]);
            }
        }
        prop_assert!(dump(&one, &SPECIES) == dump(&other, &SPECIES), "the order matters");
        for key in keys {
            one.forget(key).unwrap();
        }
        prop_assert!(dump(&one, &SPECIES) == before, "forgetting left something behind");
    }
}

/// Computed levels of a species by series (l of the last electron, term, J), bit for bit.
fn computed_levels(catalogue: &Catalogue, species: Species) -> Vec<(String, String)> {
    let of_series = |level: &Level| {
        let configuration = level.configuration.as_deref().unwrap();
        let letter = configuration.chars().next_back().unwrap();
        let term = level.term.as_deref().unwrap();
        format!("n{letter} {term} {}", level.j.unwrap())
    };
    let levels = catalogue.levels(species).unwrap();
    let computed = levels
        .iter()
        .filter(|l| l.origin == PositionOrigin::Computed);
    let mut found: Vec<(String, String)> = computed
        .map(|level| {
            let [energy, sigma] =
                [level.energy_per_cm, level.energy_uncertainty_per_cm].map(f64::to_bits);
            let name = level.configuration.as_deref().unwrap();
            (of_series(level), format!("{name} {energy:x} {sigma:x}"))
        })
        .collect();
    found.sort();
    found
}

/// Lines of a species between levels that are not of one series, bit for bit.
fn other_lines(catalogue: &Catalogue, species: Species, letter: char, j: &str) -> Vec<String> {
    let is_of = |end: &(String, HalfInteger)| end.0.ends_with(letter) && end.1.to_string() == j;
    let mut found: Vec<String> = all_lines(catalogue, species)
        .iter()
        .filter(|line| label(line).is_some_and(|ends| !ends.iter().any(is_of)))
        .map(|line| {
            let position = line.wavenumber_per_cm.to_bits();
            let rate = line.rate_per_s.map(f64::to_bits);
            format!("{:?} {position:x} {rate:?}", label(line))
        })
        .collect();
    found.sort();
    found
}

#[test]
fn an_import_that_changes_a_series_leaves_the_others_bit_for_bit() {
    // Invented levels, near where the series put them: what counts is which others move.
    let sodium = Species::new(11, 1);
    let calcium = Species::new(20, 2);
    let cases = [
        (sodium, ("2p6 17d", "2D", 5), 'd', "5/2", "nd 2D 5/2"),
        (RUBIDIUM, ("4p6 17d", "2D", 3), 'd', "3/2", "nd 2D 3/2"),
        (calcium, ("3p6 16s", "2S", 1), 's', "1/2", "ns 2S 1/2"),
    ];
    for (species, name, letter, j, series) in cases {
        let (_folder, mut catalogue) = copy();
        let levels = catalogue.levels(species).unwrap();
        let level = levels
            .iter()
            .find(|l| {
                l.configuration.as_deref() == Some(name.0)
                    && l.j.map(HalfInteger::twice) == Some(name.2)
            })
            .unwrap();
        assert_eq!(level.origin, PositionOrigin::Computed, "{name:?} is held");
        let energy = level.energy_per_cm + 0.3 * level.energy_uncertainty_per_cm;
        let others: Vec<Species> = [H, RUBIDIUM, sodium, calcium]
            .into_iter()
            .filter(|other| *other != species)
            .collect();
        let (before, elsewhere) = (
            computed_levels(&catalogue, species),
            dump(&catalogue, &others),
        );
        let lines = other_lines(&catalogue, species, letter, j);
        let sigma = 0.1 * level.energy_uncertainty_per_cm;
        let record = Record::Level(level_record(species, name, energy, sigma));
        // A table of a wide scale: only its own series may feel it.
        import_scaled(&mut catalogue, "invented", 0.5, &[record]);
        let after = computed_levels(&catalogue, species);
        let part = |all: &[(String, String)], own: bool| -> Vec<(String, String)> {
            let of = all.iter().filter(|(key, _)| (key == series) == own);
            of.cloned().collect()
        };
        assert!(part(&before, true).len() > 2, "{series}");
        assert_ne!(
            part(&before, true),
            part(&after, true),
            "{series} was not refitted"
        );
        assert!(part(&before, false).len() > 20, "{species}");
        assert_eq!(part(&before, false), part(&after, false), "{species}");
        assert_eq!(
            lines,
            other_lines(&catalogue, species, letter, j),
            "{species}"
        );
        assert!(
            elsewhere == dump(&catalogue, &others),
            "another species changed"
        );
    }
}

#[test]
fn a_catalogue_of_an_older_calculator_is_brought_up_to_date() {
    let species = [H, RUBIDIUM, SPECIES[0], SPECIES[2]];
    let (folder, catalogue) = copy();
    let path = folder.path().join("catalogue.sqlite");
    let wanted = dump(&catalogue, &species);
    drop(catalogue);
    // What an older calculator may have left: other values, levels and lines that are missing, and its own mark.
    let connection = Connection::open(&path).unwrap();
    let stale = "UPDATE source SET checksum = 'gap fill 0' WHERE kind = 'computed' AND bundled;
                 UPDATE about SET value = 'an older program' WHERE name = 'bundle';
                 UPDATE line SET rate_per_s = 2 * rate_per_s WHERE rate_origin = 2;
                 UPDATE level SET energy_per_cm = energy_per_cm + 1 WHERE computed;
                 DELETE FROM line WHERE position_origin = 2 AND number % 3 = 0;
                 DELETE FROM scope WHERE completeness = 'computed';";
    connection.execute_batch(stale).unwrap();
    drop(connection);
    let read = || dump(&Catalogue::open(&path).unwrap(), &species);
    assert!(read() != wanted, "the older catalogue should differ");
    let run = |path: &std::path::Path| {
        let output = common::binary()
            .args(["sources", "--catalogue"])
            .arg(path)
            .output()
            .unwrap();
        assert!(
            output.status.success(),
            "{}",
            String::from_utf8_lossy(&output.stderr)
        );
        String::from_utf8(output.stderr).unwrap()
    };
    let said = run(&path);
    assert!(said.contains("brought up to this version"), "{said}");
    assert!(
        read() == wanted,
        "the refreshed catalogue differs from a fresh one"
    );
    assert_eq!(run(&path), "", "a second run has nothing to do");
}
