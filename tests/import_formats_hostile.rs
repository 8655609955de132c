//! Files that are broken or mean harm: each is refused with a sentence, none panics, none is
//! half-read in silence.

#![allow(clippy::unwrap_used, reason = "a panic in a test is its report")]

use std::io::{Cursor, Read};

use importers::Limits;
use importers::delimited::{Delimiter, Dialect, Splitter};
use importers::detect::detect;
use importers::ecsv::EcsvReader;
use importers::explain::explain;
use importers::fits::FitsReader;
use importers::jsonl::JsonlReader;
use importers::mrt::MrtReader;
use importers::parquet::ParquetReader;
use importers::row::{Row, RowError, RowReader};
use importers::source::{Format, RecordKind};
use importers::votable::VotableReader;
use importers::xsams::XsamsReader;
use proptest::prelude::*;

fn limits() -> Limits {
    Limits {
        cell_bytes: 1000,
        row_bytes: 10_000,
        header_bytes: 100_000,
        ..Limits::default()
    }
}

fn open(format: Format, bytes: &[u8]) -> Result<Box<dyn RowReader>, RowError> {
    let input: Box<dyn Read> = Box::new(Cursor::new(bytes.to_vec()));
    let limits = limits();
    Ok(match format {
        Format::Ecsv => Box::new(EcsvReader::new(input, &limits)?),
        Format::Votable => Box::new(VotableReader::new(input, None, &limits)?),
        Format::Fits => Box::new(FitsReader::new(input, None, &limits)?),
        Format::Xsams => Box::new(XsamsReader::new(input, RecordKind::Lines, &limits)?),
        Format::Jsonl => Box::new(JsonlReader::new(input, &limits)?),
        Format::Parquet => Box::new(ParquetReader::new(input, &limits)?),
        _ => Box::new(MrtReader::new(input, &limits)?),
    })
}

/// Reads everything; the first fault as text.
fn drain(format: Format, bytes: &[u8]) -> Result<usize, String> {
    let mut reader = open(format, bytes).map_err(|error| error.to_string())?;
    let mut row = Row::default();
    let mut count = 0;
    while reader
        .read_row(&mut row)
        .map_err(|error| error.to_string())?
    {
        count += 1;
    }
    Ok(count)
}

/// A VOTable with this between its FIELDs and its end.
fn votable(fields: &str, data: &str) -> String {
    format!(
        "<VOTABLE version=\"1.4\"><RESOURCE><TABLE>{fields}<DATA>{data}</DATA></TABLE></RESOURCE></VOTABLE>"
    )
}

fn mrt(rows: &str, data: &str) -> String {
    let rule = "-".repeat(60);
    format!(
        "Title: Invented\n{rule}\nByte-by-byte Description of file: t.dat\n{rule}\n   Bytes Format Units Label Explanations\n{rule}\n{rows}{rule}\n{data}"
    )
}

const INT: &str = "<FIELD name=\"a\" datatype=\"int\"/>";

#[test]
fn good_files_are_read() {
    let table = votable(INT, "<TABLEDATA><TR><TD>1</TD></TR></TABLEDATA>");
    assert_eq!(drain(Format::Votable, table.as_bytes()), Ok(1));
    let binary = votable(
        INT,
        "<BINARY><STREAM encoding=\"base64\">AAAAAQAA\n AAI=</STREAM></BINARY>",
    );
    assert_eq!(drain(Format::Votable, binary.as_bytes()), Ok(2));
    let table = mrt("   1-  3 I3 --- n ?=-9 Number\n", "  1\n -9\n\n");
    assert_eq!(drain(Format::Mrt, table.as_bytes()), Ok(2));
}

#[test]
fn bad_votables_are_refused() {
    let one = |data: &str| votable(INT, data);
    let field =
        |attributes: &str, data: &str| votable(&format!("<FIELD name=\"a\" {attributes}/>"), data);
    let stream =
        |text: &str| format!("<BINARY><STREAM encoding=\"base64\">{text}</STREAM></BINARY>");
    let deep = format!("<VOTABLE>{}", "<RESOURCE>".repeat(100_000));
    let long = one(&format!(
        "<TABLEDATA><TR><TD>{}</TD></TR></TABLEDATA>",
        "1".repeat(2000)
    ));
    let cases = [
        (String::new(), "no element"),
        ("<VOTABLE/>".into(), "no table"),
        ("<html/>".into(), "not a VOTABLE"),
        ("<VOTABLE xmlns=\"http://example.org\"/>".into(), "not a VOTABLE"),
        ("<VOTABLE><RESOURCE><TABLE>".into(), "ends inside"),
        ("<VOTABLE><INFO name=\"QUERY_STATUS\" value=\"ERROR\">no such\u{202e} table</INFO></VOTABLE>".into(), "answered with an error: no such\\u{202e} table"),
        (one("<TABLEDATA><TR><TD>1</TD><TD>2</TD></TR></TABLEDATA>"), "2 cells where the header has 1"),
        (one("<TABLEDATA><TR/></TABLEDATA>"), "0 cells where the header has 1"),
        (one("<TABLEDATA><TR><TD>1.5</TD></TR></TABLEDATA>"), "a whole number"),
        (one("<TABLEDATA><TR><TD>&lt;</TD></TR></TABLEDATA>"), "a whole number"),
        (one("<TABLEDATA><TR><TD>&x;</TD></TR></TABLEDATA>"), "predefined entities"),
        (one("<TABLEDATA><TR><TD>1</TR></TABLEDATA>"), "no well-formed XML"),
        (one("<FITS/>"), "not read"),
        (one("<PARQUET/>"), "not read"),
        (one("<BINARY><STREAM href=\"file:///etc/passwd\"/></BINARY>"), "not opened"),
        (one("<BINARY><STREAM encoding=\"gzip\"/></BINARY>"), "not in base64"),
        (one(&stream("AAAA")), "ends inside a row"),
        (one(&stream("AA*A")), "no base64"),
        (one(&stream("AAAAAQ=")), "no base64"),
        (one(&stream("H4sIAAAA")), "packed"),
        (field("datatype=\"char\" arraysize=\"*\"", &stream("/////w==")), "claims -1 values"),
        (field("datatype=\"char\" arraysize=\"*\"", &stream("f////w==")), "longer than the limit"),
        (field("datatype=\"char\" arraysize=\"4x*\"", &stream("AAAAAQ==")), "several dimensions"),
        (field("datatype=\"char\" arraysize=\"1\"", &stream("/w==")), "no text in UTF-8"),
        (field("datatype=\"float\" arraysize=\"-3\"", ""), "is no array size"),
        (field("datatype=\"quaternion\"", ""), "no data type"),
        (field("datatype=\"boolean\"", "<TABLEDATA><TR><TD>maybe</TD></TR></TABLEDATA>"), "true or false"),
        (deep, "nested deeper than 256"),
        (long, "longer than the limit"),
        ("<!DOCTYPE a [<!ENTITY b SYSTEM 'file:///etc/passwd'>]><VOTABLE><INFO name='x' value='y'>&b;</INFO></VOTABLE>".into(), "predefined entities"),
    ];
    check(Format::Votable, &cases);
}

#[test]
fn bad_described_tables_are_refused() {
    let column = "   1-  3 I3 --- n Number\n";
    let cases = [
        (String::new(), "no byte-by-byte description"),
        ("1 2 3\n".to_owned(), "no byte-by-byte description"),
        (
            "Byte-by-byte Description of file: x\n".to_owned(),
            "breaks off",
        ),
        (mrt("", "1\n"), "has no columns"),
        (mrt("   0-  3 I3 --- n Number\n", "1\n"), "begins at 0"),
        (mrt("   5-  3 I3 --- n Number\n", "1\n"), "reversed"),
        (mrt(column, "  1\t\n"), "tabulator"),
        (
            mrt(column, "Note (1): one\n  1\n"),
            "between the notes and the data",
        ),
        (mrt(column, "12345\n"), "just outside the bytes 1-3"),
        (
            mrt("   2-  4 I3 --- n Number\n", "1234\n"),
            "just outside the bytes 2-4",
        ),
        (
            mrt(column, &format!("  1\n{}\n", "-".repeat(60))),
            "rule line inside the data",
        ),
        (mrt(column, "  \u{0}\n"), "zero byte"),
        (
            mrt(column, &format!("{}\n", " ".repeat(20_000))),
            "longer than the limit",
        ),
    ];
    check(Format::Mrt, &cases);
}

fn fits(cards: &[&str], data: &[u8]) -> Vec<u8> {
    let mut bytes = Vec::new();
    for block in [&["SIMPLE  = T", "BITPIX  = 8", "NAXIS   = 0"][..], cards] {
        for card in block.iter().chain(&["END"]) {
            bytes.extend(format!("{card:<80}").into_bytes());
        }
        bytes.resize(bytes.len().next_multiple_of(2880), b' ');
    }
    bytes.extend(data);
    bytes
}

#[test]
fn bad_fits_tables_are_refused() {
    let head = ["XTENSION= 'BINTABLE'", "BITPIX  = 8", "NAXIS   = 2"];
    let with = |more: &[&'static str]| fits(&[&head[..], more].concat(), &[0, 1]);
    let good = with(&[
        "NAXIS1  = 2",
        "NAXIS2  = 1",
        "TFIELDS = 1",
        "TFORM1  = '1I'",
    ]);
    assert_eq!(drain(Format::Fits, &good), Ok(1));
    for (bytes, expected) in [
        (Vec::new(), "no such binary table"),
        (b"SIMPLE  =".to_vec(), "inside a block"),
        (fits(&[], b""), "no such binary table"),
        (
            with(&[
                "NAXIS1  = 2",
                "NAXIS2  = 9",
                "TFIELDS = 1",
                "TFORM1  = '1I'",
            ]),
            "the file ends in row 2 of 9",
        ),
        (
            with(&[
                "NAXIS1  = 3",
                "NAXIS2  = 1",
                "TFIELDS = 1",
                "TFORM1  = '1I'",
            ]),
            "take 2 bytes where NAXIS1 says 3",
        ),
        (
            with(&["NAXIS1  = 2", "NAXIS2  = 1", "TFIELDS = 1"]),
            "TFORM1 is missing",
        ),
        (
            with(&[
                "NAXIS1  = 2",
                "NAXIS2  = 1",
                "TFIELDS = 1",
                "TFORM1  = '1Z'",
            ]),
            "no column form",
        ),
        (
            with(&["NAXIS1  = 2", "NAXIS2  = 1", "TFIELDS = 99999"]),
            "at most 999",
        ),
        (
            with(&["NAXIS1  = -2", "NAXIS2  = 1", "TFIELDS = 1"]),
            "is no size",
        ),
        (
            with(&[
                "NAXIS1  = 2",
                "NAXIS2  = 1",
                "TFIELDS = 1",
                "TFORM1  = '99999999999999999999I'",
            ]),
            "no column form",
        ),
        (
            with(&[
                "NAXIS1  = 2",
                "NAXIS2  = 1",
                "TFIELDS = 1",
                "TFORM1  = '1I'",
                "TSCAL1  = x",
            ]),
            "TSCAL1",
        ),
    ] {
        let found = drain(Format::Fits, &bytes).unwrap_err();
        assert!(found.contains(expected), "wanted {expected}, found {found}");
    }
}

fn check(format: Format, cases: &[(String, &str)]) {
    for (text, expected) in cases {
        let found = drain(format, text.as_bytes()).expect_err(text);
        assert!(
            found.contains(expected),
            "{text}\nwanted {expected}\n found {found}"
        );
        assert!(!found.chars().any(char::is_control), "{found:?}");
    }
}

#[test]
fn what_is_no_table_is_named() {
    for (bytes, expected) in [
        (&b"<!DOCTYPE html><html>"[..], "web page"),
        (b"PK\x03\x04", "archive"),
        (b"", "empty"),
        (b"\0\x01\x02", "no text"),
    ] {
        assert!(explain(bytes, "x").notes[0].contains(expected));
    }
}

#[test]
fn a_mapping_is_offered_for_what_was_recognised() {
    let table = mrt(
        "   1-  5 A5 --- Species Ion\n   7- 14 F8.3 0.1nm lambda Wavelength\n  16- 21 F6.2 [-] loggf Strength\n  23- 24 A2 --- Odd Mark\n",
        "Na I  5889.950   0.11 x\n",
    );
    let explanation = explain(table.as_bytes(), "t.txt");
    for part in [
        "format = \"mrt\"",
        "records = \"lines\"",
        "species = { column = \"Species\" }",
        "wavelength = { column = \"lambda\", medium = \"\" }  # 0.1nm Wavelength",
        "log_gf = { column = \"loggf\" }",
        "ignore = [\"Odd\"]",
    ] {
        assert!(
            explanation.mapping.contains(part),
            "{part}\n{}",
            explanation.mapping
        );
    }
    assert!(explanation.notes[0].contains("vacuum or in air"));
}

proptest! {
    /// Whatever the bytes are, every reader ends with rows or a sentence.
    #[test]
    fn arbitrary_bytes_never_panic(bytes in prop::collection::vec(any::<u8>(), 0..600)) {
        for format in [
            Format::Ecsv, Format::Votable, Format::Fits, Format::Xsams, Format::Mrt, Format::Jsonl,
            Format::Parquet,
        ] {
            let _ = drain(format, &bytes);
        }
        let _ = detect(&bytes);
        let _ = explain(&bytes, "x");
    }

    /// The same for files that begin well.
    #[test]
    fn damaged_files_never_panic(at in 0usize..1000, byte in any::<u8>(), cut in 0usize..1000) {
        let table = votable(
            "<FIELD name=\"a\" datatype=\"double\" arraysize=\"2\"><VALUES null=\"-1\"/></FIELD><FIELD name=\"b\" datatype=\"char\" arraysize=\"*\"/>",
            "<BINARY2><STREAM encoding=\"base64\">AAAAAAAAAAAAAAAAAAAAAAAAAAADYWJj</STREAM></BINARY2>",
        );
        let described = mrt("   1-  3 I3 --- n ?=-9 Number\n   5-  9 F5.2 cm-1 e ? Energy\n", "  1  2.50\n");
        let ecsv = "# %ECSV 1.0\n# ---\n# datatype:\n# - {name: a, datatype: float64}\na\n1.0\n\"x\"\n";
        let card = fits(&["XTENSION= 'BINTABLE'", "NAXIS   = 2", "NAXIS1  = 4", "NAXIS2  = 1", "TFIELDS = 1", "TFORM1  = '1E'"], &[0; 4]);
        for (format, bytes) in [
            (Format::Votable, table.into_bytes()),
            (Format::Mrt, described.into_bytes()),
            (Format::Ecsv, ecsv.as_bytes().to_vec()),
            (Format::Fits, card),
        ] {
            let mut bytes = bytes;
            let length = bytes.len();
            bytes[at % length] = byte;
            let _ = drain(format, &bytes);
            bytes.truncate(cut % length);
            let _ = drain(format, &bytes);
        }
    }

    /// The same for files of formats that others' libraries read for us, damaged anywhere.
    #[test]
    fn damaged_exports_never_panic(
        damages in prop::collection::vec((0usize..1_000_000, any::<u8>()), 1..4),
        cut in 0usize..1_000_000,
    ) {
        for (format, whole) in [
            (Format::Parquet, &include_bytes!("../importers/fuzz/corpus/parquet/harrow_bay.parquet")[..]),
            (Format::Jsonl, include_bytes!("../importers/fuzz/corpus/jsonl/harrow_bay.jsonl")),
            (Format::Ecsv, include_bytes!("../importers/fuzz/corpus/handover/harrow_bay.csv")),
        ] {
            let mut bytes = whole.to_vec();
            let length = bytes.len();
            for (at, byte) in &damages {
                bytes[at % length] = *byte;
            }
            let _ = drain(format, &bytes);
            bytes.truncate(cut % length);
            let _ = drain(format, &bytes);
        }
    }

    /// On good input the strict splitter and the csv crate see the same cells.
    #[test]
    fn splitting_agrees_with_the_csv_crate(
        rows in prop::collection::vec(prop::collection::vec("[a-z0-9,;\" \n.é-]{1,8}", 3), 1..12),
        windows in any::<bool>(),
    ) {
        let terminator = if windows { csv::Terminator::CRLF } else { csv::Terminator::Any(b'\n') };
        let mut writer = csv::WriterBuilder::new().terminator(terminator).from_writer(Vec::new());
        for row in &rows {
            writer.write_record(row).unwrap();
        }
        let bytes = writer.into_inner().unwrap();
        let mut splitter = Splitter::new(bytes.as_slice(), Dialect::default(), Limits::default());
        let mut row = Row::default();
        for expected in &rows {
            prop_assert!(splitter.read_row(&mut row).unwrap());
            let found: Vec<&str> = (0..row.len()).map(|i| row.cell(i)).collect();
            prop_assert_eq!(&found, expected);
        }
        prop_assert!(!splitter.read_row(&mut row).unwrap());
    }

    #[test]
    fn splitting_never_panics(bytes in prop::collection::vec(any::<u8>(), 0..300), blanks in any::<bool>(), edges in any::<bool>()) {
        let dialect = Dialect {
            delimiter: if blanks { Delimiter::Blanks } else { Delimiter::Byte(b'|') },
            comment: Some(b"#".to_vec()),
            edge_delimiters: edges,
            ..Dialect::default()
        };
        let mut splitter = Splitter::new(bytes.as_slice(), dialect, limits());
        let mut row = Row::default();
        // Each call takes at least one byte or ends, so this stops.
        for _ in 0..=2 * bytes.len() + 2 {
            match splitter.read_row(&mut row) {
                Ok(false) => break,
                Err(error) if error.fatal => break,
                _ => {}
            }
        }
    }
}
