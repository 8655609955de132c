//! Term symbols, configurations, selection rules, one-electron labels.

use vocabulary::atom::{
    Configuration, DipoleClass, HalfInteger, OneElectronLabel, OuterElectron, Term, dipole_class,
    electric_quadrupole_allowed, magnetic_dipole_allowed, orbital_letter, orbital_number,
};
use vocabulary::spectrum::Parity;

fn half(text: &str) -> HalfInteger {
    HalfInteger::parse(text).unwrap()
}

fn ls(multiplicity: u8, l: u8, odd: bool, prefix: Option<char>) -> Term {
    Term::Ls {
        multiplicity,
        l,
        odd,
        prefix,
    }
}

#[test]
fn terms_of_every_coupling_are_read() {
    let pair = |front: &str, k: &str, odd| Term::PairCoupling {
        k: half(k),
        front: HalfInteger::parse(front),
        odd,
    };
    let jj = |core: &str, outer: &str, odd| Term::Jj {
        core: half(core),
        outer: half(outer),
        odd,
    };
    for (text, term, shown) in [
        ("3Po", ls(3, 1, true, None), "3Po"),
        ("2S", ls(2, 0, false, None), "2S"),
        ("a 6D", ls(6, 2, false, Some('a')), "a 6D"),
        ("z7Do", ls(7, 2, true, Some('z')), "z 7Do"),
        ("5F°", ls(5, 3, true, None), "5Fo"),
        ("5F*", ls(5, 3, true, None), "5Fo"),
        ("1K", ls(1, 7, false, None), "1K"),
        ("2Oo", ls(2, 11, true, None), "2Oo"),
        ("2[3/2]o", pair("2", "3/2", true), "2[3/2]o"),
        ("2[7/2]", pair("2", "7/2", false), "2[7/2]"),
        ("[5/2]o", pair("", "5/2", true), "[5/2]o"),
        ("3[2]", pair("3", "2", false), "3[2]"),
        ("1/2[3/2]o", pair("1/2", "3/2", true), "1/2[3/2]o"),
        ("0[2]", pair("0", "2", false), "0[2]"),
        ("(2,1/2)o", jj("2", "1/2", true), "(2,1/2)o"),
        ("(3/2,1/2)", jj("3/2", "1/2", false), "(3/2,1/2)"),
        ("blend", Term::Unknown("blend".into()), "blend"),
        ("", Term::Unknown(String::new()), ""),
        ("0S", Term::Unknown("0S".into()), "0S"),
        ("3J", Term::Unknown("3J".into()), "3J"),
    ] {
        let read = Term::parse(text);
        assert_eq!(read, term, "{text}");
        assert_eq!(read.to_string(), shown, "{text}");
        assert_eq!(Term::parse(shown), term, "{shown} again");
    }
    assert_eq!(Term::parse("3Po").parity(), Some(Parity::Odd));
    assert_eq!(Term::parse("?").parity(), None);
}

#[test]
fn terms_allow_the_right_j() {
    let allowed = |text: &str| -> Vec<String> {
        let j = Term::parse(text).allowed_j();
        j.iter().map(ToString::to_string).collect()
    };
    // Common practice: 3P has J = 0, 1, 2; 6D has 1/2 to 9/2; 2[3/2] has 1 and 2.
    assert_eq!(allowed("3Po"), ["0", "1", "2"]);
    assert_eq!(allowed("a 6D"), ["1/2", "3/2", "5/2", "7/2", "9/2"]);
    assert_eq!(allowed("2S"), ["1/2"]);
    assert_eq!(allowed("7S"), ["3"]);
    assert_eq!(allowed("2[3/2]o"), ["1", "2"]);
    assert_eq!(allowed("2[1/2]"), ["0", "1"]);
    // The number before the bracket as a multiplicity or as the momentum of the core.
    assert_eq!(allowed("0[2]"), ["3/2", "5/2"]);
    assert_eq!(allowed("3[3/2]o"), ["1/2", "1", "3/2", "2", "5/2"]);
    assert_eq!(allowed("(2,1/2)"), ["3/2", "5/2"]);
    assert!(allowed("?").is_empty());
}

#[test]
fn known_lines_fall_into_their_classes() {
    let class = |a: &str, ja: &str, b: &str, jb: &str| {
        let (a, b) = (Term::parse(a), Term::parse(b));
        dipole_class((&a, Some(half(ja))), (&b, Some(half(jb))))
    };
    use DipoleClass::{
        Allowed, Intercombination, MomentumForbidden, OrbitalForbidden, ParityForbidden,
    };
    // Common practice: Na D; Hg I 253.7 nm; Hg I 265.6 nm; [O III] 500.7 nm; He I 2 3S - 1 1S.
    assert_eq!(class("2S", "1/2", "2Po", "3/2"), Some(Allowed));
    assert_eq!(class("1S", "0", "3Po", "1"), Some(Intercombination));
    assert_eq!(class("1S", "0", "3Po", "0"), Some(MomentumForbidden));
    assert_eq!(class("1S", "0", "3Po", "2"), Some(MomentumForbidden));
    assert_eq!(class("3P", "2", "1D", "2"), Some(ParityForbidden));
    assert_eq!(class("3S", "1", "1S", "0"), Some(ParityForbidden));
    assert_eq!(class("2S", "1/2", "2So", "1/2"), Some(OrbitalForbidden));
    assert_eq!(class("3Po", "2", "3F", "3"), Some(OrbitalForbidden));
    assert_eq!(class("3Po", "1", "3P", "1"), Some(Allowed));
    assert_eq!(class("2[3/2]o", "2", "2[5/2]", "3"), None);
    assert_eq!(
        class("2[3/2]o", "2", "2[5/2]", "4"),
        Some(MomentumForbidden)
    );
    let (s, p) = (Term::parse("2S"), Term::parse("2Po"));
    assert_eq!(dipole_class((&s, None), (&p, None)), Some(Allowed));
    assert_eq!(dipole_class((&p, None), (&s, None)), Some(Allowed));
}

#[test]
fn forbidden_lines_of_nebulae_have_their_multipoles() {
    let both = |a: &str, ja: &str, b: &str, jb: &str| {
        let (a, b) = (Term::parse(a), Term::parse(b));
        let (a, b) = ((&a, half(ja)), (&b, half(jb)));
        (
            magnetic_dipole_allowed(a, b),
            electric_quadrupole_allowed(a, b),
        )
    };
    // Common practice: [O III] 500.7 nm is M1 (and E2), 436.3 nm E2 only, 493.1 nm E2 only,
    // [S II] 673.1 nm both; 0-0 and Na D neither.
    assert_eq!(both("3P", "2", "1D", "2"), (Some(true), Some(true)));
    assert_eq!(both("1D", "2", "1S", "0"), (Some(false), Some(true)));
    assert_eq!(both("3P", "0", "1D", "2"), (Some(false), Some(true)));
    assert_eq!(both("4So", "3/2", "2Do", "3/2"), (Some(true), Some(true)));
    assert_eq!(both("3P", "0", "1S", "0"), (Some(false), Some(false)));
    assert_eq!(both("2P", "1/2", "2P", "1/2"), (Some(true), Some(false)));
    assert_eq!(both("2S", "1/2", "2Po", "3/2"), (Some(false), Some(false)));
    assert_eq!(both("?", "1/2", "2Po", "3/2"), (None, None));
}

#[test]
fn configurations_are_read_with_and_without_blanks() {
    for (text, shown, parity, last) in [
        ("1s", "1s", Parity::Even, "1s"),
        ("1s 2p", "1s 2p", Parity::Odd, "2p"),
        ("3d6 (5D) 4s", "3d6 (5D) 4s", Parity::Even, "4s"),
        ("3d6(5D)4s4p(3P)", "3d6 (5D) 4s 4p (3P)", Parity::Odd, "4p"),
        ("2s22p2", "2s2 2p2", Parity::Even, "2p2"),
        ("2s2(1S)2p", "2s2 (1S) 2p", Parity::Odd, "2p"),
        ("3s23p63d2(3F)4s", "3s2 3p6 3d2 (3F) 4s", Parity::Even, "4s"),
        ("4s24p65s2", "4s2 4p6 5s2", Parity::Even, "5s2"),
        ("3d104s", "3d10 4s", Parity::Even, "4s"),
        ("4f145d106s2", "4f14 5d10 6s2", Parity::Even, "6s2"),
        ("5p5 (2P1/2) 6s", "5p5 (2P1/2) 6s", Parity::Odd, "6s"),
        ("3s 10p", "3s 10p", Parity::Odd, "10p"),
        ("2s2p3", "2s 2p3", Parity::Odd, "2p3"),
        ("3s2.3p", "3s2 3p", Parity::Odd, "3p"),
        ("4f", "4f", Parity::Odd, "4f"),
        (
            "4f7 (8So7/2) 6p3/2",
            "4f7 (8So7/2) 6p3/2",
            Parity::Even,
            "6p3/2",
        ),
        (
            "4f13 (2Fo7/2) 5d5/26s2",
            "4f13 (2Fo7/2) 5d5/2 6s2",
            Parity::Odd,
            "6s2",
        ),
    ] {
        let read = Configuration::parse(text).unwrap_or_else(|| panic!("{text}"));
        assert_eq!(read.to_string(), shown, "{text}");
        assert_eq!(read.parity(), parity, "{text}");
        assert_eq!(read.shells().last().unwrap().to_string(), last, "{text}");
        assert_eq!(Configuration::parse(shown), Some(read), "{shown} again");
    }
    for text in [
        "", "(3P)", "2d", "1p", "3s3", "3d11", "abc", "3d6 (5D", "3d6 ()", "4", "s", "3s?", "6p5/2",
    ] {
        assert_eq!(Configuration::parse(text), None, "{text}");
    }
}

#[test]
fn the_outer_electron_is_taken_off() {
    let outer = |text: &str| {
        Configuration::parse(text)
            .unwrap()
            .outer_electron()
            .unwrap()
    };
    let expected = |core: &str, n, l, electrons| OuterElectron {
        core: core.into(),
        n,
        l,
        electrons,
    };
    assert_eq!(outer("3d6 (5D) 4s"), expected("3d6 (5D)", 4, 0, 1));
    assert_eq!(outer("1s2p"), expected("1s", 2, 1, 1));
    assert_eq!(outer("2s2 2p2"), expected("2s2 2p", 2, 1, 2));
    assert_eq!(outer("3d6(5D)4s4p(3P)"), expected("3d6 (5D) 4s", 4, 1, 1));
    assert_eq!(outer("3p"), expected("", 3, 1, 1));
}

#[test]
fn one_electron_labels_are_consistent() {
    let label = OneElectronLabel::new(3, 2, half("5/2")).unwrap();
    assert_eq!(
        (label.configuration().as_str(), label.to_string().as_str()),
        ("3d", "3d 5/2")
    );
    assert_eq!(label.term().to_string(), "2D");
    for (n, l, j) in [
        (1, 1, "1/2"),
        (0, 0, "1/2"),
        (2, 0, "3/2"),
        (2, 1, "5/2"),
        (2, 1, "1"),
    ] {
        assert_eq!(OneElectronLabel::new(n, l, half(j)), None, "{n} {l} {j}");
    }
    let read = |text: &str, j: &str| {
        OneElectronLabel::from_level(&Configuration::parse(text).unwrap(), half(j))
    };
    assert_eq!(read("2p", "3/2"), OneElectronLabel::new(2, 1, half("3/2")));
    assert_eq!(read("1s 2p", "3/2"), None);
    assert_eq!(read("2p2", "3/2"), None);
    for l in 0..=20 {
        let letter = orbital_letter(l).unwrap();
        assert_eq!(orbital_number(letter), Some(l));
        // Every term of a label allows its J.
        let label =
            OneElectronLabel::new(30, l, HalfInteger::from_twice(2 * u16::from(l) + 1)).unwrap();
        assert!(label.term().allowed_j().contains(&label.j));
    }
    assert_eq!(orbital_letter(21), None);
    assert_eq!(orbital_number('j'), None);
    let deep = OneElectronLabel::new(30, 25, half("51/2")).unwrap();
    assert_eq!(deep.configuration(), "30[l=25]");
}
