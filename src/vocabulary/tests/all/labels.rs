//! Labels of the bundled level tables: how many are read, and whether parity and J fit.

use vocabulary::atom::{Configuration, HalfInteger, Term};

use crate::support::{path, rows};

#[derive(Default)]
struct Count {
    labelled: usize,
    unread: Vec<String>,
    parity_differs: Vec<String>,
    j_differs: Vec<String>,
}

fn count(folders: impl Fn(&str) -> bool) -> Count {
    let mut count = Count::default();
    let mut names: Vec<String> = std::fs::read_dir(path("data"))
        .unwrap()
        .map(|entry| entry.unwrap().file_name().into_string().unwrap())
        .filter(|name| folders(name))
        .collect();
    names.sort();
    for name in names {
        for row in rows(&format!("data/{name}/levels.csv")) {
            add(&mut count, &row);
        }
    }
    count
}

fn add(count: &mut Count, row: &[String]) {
    let [species, energy, _, configuration, term, j, ..] = row else {
        panic!("{row:?}");
    };
    let place = || format!("{species} {energy} {configuration} {term} {j}");
    let read_configuration = Configuration::parse(configuration);
    let read_term = Term::parse(term);
    let bare = configuration.is_empty() && term.is_empty();
    count.labelled += usize::from(!bare);
    let unread_configuration = read_configuration.is_none() && !configuration.is_empty();
    if unread_configuration || (read_term.parity().is_none() && !term.is_empty()) {
        count.unread.push(place());
    }
    if let (Some(configuration), Some(parity)) = (read_configuration, read_term.parity())
        && configuration.parity() != parity
    {
        count.parity_differs.push(place());
    }
    if let Some(j) = HalfInteger::parse(j)
        && read_term.parity().is_some()
        && !read_term.allowed_j().contains(&j)
    {
        count.j_differs.push(place());
    }
}

#[test]
fn labels_of_the_papers_are_read_and_their_slips_known() {
    let count = count(|name| name.starts_with("morton"));
    assert!(count.labelled > 5400, "{}", count.labelled);
    assert_eq!(count.unread, [""; 0]);
    // The papers' own slips, as printed: a missing mark of odd parity, and J that the term forbids.
    assert_eq!(
        count.parity_differs,
        ["Pr II 22885.59 4f3 6s 5I 5", "Pr II 23261.36 4f3 6s 5I 5",]
    );
    assert_eq!(
        count.j_differs,
        [
            "Xe I 95912.898 5p5 (2Po3/2) 10d [7/2]o 1",
            "Er III 29466.42 4f11 (4Io) 5d (11/2,3/2)o 3",
            "Yb II 46902.71 4f13 (2Fo7/2) 5d2 (3F) 3[5/2]o 0.5",
            "Pt I 34122.165 5d9 6p 3Po 3",
            "U V 65538.11 5f 6s2 6p6 6d 1Fo 4",
            "Si I 61346.784 3s2 3p (2Po1/2) 5g 2[9/2]o 3",
        ]
    );
}

#[test]
fn labels_of_the_curated_tables_are_read_and_sound() {
    let count = count(|name| name.starts_with("curated"));
    assert!(count.labelled > 2900, "{}", count.labelled);
    assert_eq!(count.unread, [""; 0]);
    assert_eq!(count.parity_differs, [""; 0]);
    assert_eq!(count.j_differs, [""; 0]);
}
