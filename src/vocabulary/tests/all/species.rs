//! Species notation: every spelling, every ambiguity, every message.

use vocabulary::atom::{Species, SpeciesError, SpeciesRequest, Stages, from_roman, to_roman};

fn request(text: &str) -> SpeciesRequest {
    text.parse().unwrap_or_else(|e| panic!("{text}: {e}"))
}

fn message(text: &str) -> String {
    match text.parse::<SpeciesRequest>() {
        Ok(read) => panic!("`{text}` was read as {read}"),
        Err(error) => error.to_string(),
    }
}

#[test]
fn every_spelling_is_read() {
    let table = [
        ("Fe", "Fe"),
        (" Fe ", "Fe"),
        ("Fe I", "Fe I"),
        ("FeI", "Fe I"),
        ("Fe  II", "Fe II"),
        ("Fe+", "Fe II"),
        ("Fe++", "Fe III"),
        ("Fe2+", "Fe III"),
        ("Fe 2+", "Fe III"),
        ("Fe I..III", "Fe I..III"),
        ("FeI..III", "Fe I..III"),
        ("Fe I .. III", "Fe I..III"),
        ("Fe I..I", "Fe I"),
        ("D", "D"),
        ("D I", "D I"),
        ("DI", "D I"),
        ("2H I", "D I"),
        ("T", "T"),
        ("3H", "T"),
        ("6Li", "6Li"),
        ("6Li I", "6Li I"),
        ("6LiII", "6Li II"),
        ("198Hg I", "198Hg I"),
        ("198HgI", "198Hg I"),
        ("He II", "He II"),
        ("W XLVI", "W XLVI"),
    ];
    for (typed, shown) in table {
        assert_eq!(request(typed).to_string(), shown, "{typed}");
    }
}

#[test]
fn upper_and_lower_case_tell_elements_from_stages() {
    let table = [
        ("NI", "N I"),
        ("Ni", "Ni"),
        ("NiI", "Ni I"),
        ("SI", "S I"),
        ("Si", "Si"),
        ("CI", "C I"),
        ("VI", "V I"),
        ("V I", "V I"),
        ("In", "In"),
        ("InI", "In I"),
        ("I", "I"),
        ("I I", "I I"),
        ("II", "I I"),
        ("III", "I II"),
        ("IV", "I V"),
        ("CoII", "Co II"),
        ("HoI", "Ho I"),
        ("HI", "H I"),
        ("CV", "C V"),
        ("XeI", "Xe I"),
        ("TI", "T I"),
        ("Ti", "Ti"),
        ("PI", "P I"),
        ("OV", "O V"),
        ("YbII", "Yb II"),
    ];
    for (typed, shown) in table {
        assert_eq!(request(typed).to_string(), shown, "{typed}");
    }
}

#[test]
fn wrong_case_is_read_only_where_one_reading_is_left() {
    for (typed, shown) in [
        ("fe", "Fe"),
        ("FE", "Fe"),
        ("fe i", "Fe I"),
        ("fei", "Fe I"),
        ("vi", "V I"),
        ("fe ii", "Fe II"),
        ("na", "Na"),
        ("HG I", "Hg I"),
        ("he", "He"),
        ("w", "W"),
        ("d", "D"),
        ("198hg i", "198Hg I"),
        ("Fe i", "Fe I"),
    ] {
        assert_eq!(request(typed).to_string(), shown, "{typed}");
    }
    assert_eq!(
        message("si"),
        "`si` can be read as S I or Si; write one of them"
    );
    assert_eq!(
        message("ni"),
        "`ni` can be read as N I or Ni; write one of them"
    );
}

#[test]
fn each_error_is_one_sentence_that_helps() {
    let table = [
        ("Fx", "`Fx`: no such element; did you mean F, Fe, Fr?"),
        ("Fx II", "`Fx`: no such element; did you mean F, Fe, Fr?"),
        ("iron", "`iron`: no such element; did you mean Fe?"),
        (
            "Qq",
            "`Qq`: no such element; write a symbol such as Fe, He or W",
        ),
        (
            "17",
            "`17`: no such element; write a symbol such as Fe, He or W",
        ),
        (
            "",
            "a species is missing; write a list such as Na, Ne I, He",
        ),
        (
            "He III",
            "`He III`: helium has the stages He I to He II; a bare nucleus has no lines",
        ),
        (
            "H+",
            "`H+`: hydrogen has one stage, H I; a bare nucleus has no lines",
        ),
        (
            "D II",
            "`D II`: hydrogen has one stage, D I; a bare nucleus has no lines",
        ),
        (
            "Li300+",
            "`Li300+`: lithium has the stages Li I to Li III; a bare nucleus has no lines",
        ),
        (
            "Fe III..I",
            "`Fe III..I`: the stages run backwards; write the lower one first",
        ),
        (
            "Fe IIII",
            "`Fe IIII`: `IIII` is no stage of ionisation; write Fe I, Fe+ or Fe I..III",
        ),
        (
            "Fe 1",
            "`Fe 1`: `1` is no stage of ionisation; write Fe I, Fe+ or Fe I..III",
        ),
        (
            "Fe I..",
            "`Fe I..`: `I..` is no stage of ionisation; write Fe I, Fe+ or Fe I..III",
        ),
        (
            "Fe-",
            "`Fe-`: `-` is no stage of ionisation; write Fe I, Fe+ or Fe I..III",
        ),
        (
            "7Fe",
            "`7Fe`: no isotope of iron with mass number 7 is known; the nearest is 45Fe",
        ),
        (
            "99999Hg I",
            "`99999Hg I`: no isotope of mercury with mass number 99999 is known; the nearest is 216Hg",
        ),
        (
            "3D",
            "`3D`: no isotope of hydrogen with mass number 3 is known; the nearest is 2H",
        ),
    ];
    for (typed, expected) in table {
        assert_eq!(message(typed), expected);
    }
}

#[test]
fn a_list_is_read_once_per_entry() {
    let list = SpeciesRequest::parse_list("Na, Ne I,He , Na").unwrap();
    let shown: Vec<String> = list.iter().map(ToString::to_string).collect();
    assert_eq!(shown, ["Na", "Ne I", "He"]);
    assert_eq!(
        SpeciesRequest::parse_list("Na,,He").unwrap_err(),
        SpeciesError::Empty
    );
    let loose = SpeciesRequest::parse_list("Fe I,II").unwrap_err();
    assert_eq!(
        loose.to_string(),
        "`II` can be read as Fe II or I I; write one of them"
    );
    assert!(SpeciesRequest::parse_list("Na I, V, W").is_ok());
    assert!(SpeciesRequest::parse_list("Fe, II").is_ok());
}

#[test]
fn the_natural_mixture_and_its_isotopes_are_kept_apart() {
    let protium: Species = "H I".parse().unwrap();
    let deuterium: Species = "D I".parse().unwrap();
    assert!(request("H").matches(protium) && !request("H").matches(deuterium));
    assert!(request("D").matches(deuterium) && !request("D").matches(protium));
    assert!(!request("Li").matches("6Li I".parse().unwrap()));
    assert!(request("Fe I..III").matches("Fe II".parse().unwrap()));
    assert!(!request("Fe I..III").matches("Fe IV".parse().unwrap()));
    assert_eq!(request("Fe").stages, Stages::All);
    assert_eq!(request("Fe").single(), None);
}

#[test]
fn one_species_needs_its_stage() {
    let error = "Fe".parse::<Species>().unwrap_err().to_string();
    assert_eq!(error, "`Fe` names no single stage; write one, such as Fe I");
    let error = "6Li I..II".parse::<Species>().unwrap_err().to_string();
    assert_eq!(
        error,
        "`6Li I..II` names no single stage; write one, such as 6Li I"
    );
}

#[test]
fn roman_numerals_have_one_spelling() {
    for number in 1..=118 {
        assert_eq!(from_roman(&to_roman(number)), Some(number));
    }
    for wrong in ["", "IIII", "VV", "IC", "i", "CXIX", "ABC"] {
        assert_eq!(from_roman(wrong), None, "{wrong}");
    }
}
