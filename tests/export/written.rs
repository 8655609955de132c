//! Whatever the reports are, each format reads back what was written.

use importers::handover::{
    Cell, Content, FORM, Header, LevelRow, LineRow, ReportRow, SourceHeader, read,
};
use importers::source::{Format, SourceKind};
use lineclear::show::{Form, folder_writer, text_writer};
use proptest::prelude::*;
use vocabulary::atom::{HalfInteger, Species};
use vocabulary::spectrum::{LineKind, RateOrigin};

fn header() -> Header {
    Header {
        form: FORM,
        program: "lineclear".into(),
        content: Content::Reports,
        selection: "all, 'quoted' \u{2028} & <more>".into(),
        sources: vec![SourceHeader {
            key: "s".into(),
            title: "T: \"é\" #1".into(),
            citation: "C, \u{1f98a} (invented)\nsecond line".into(),
            licence: "CC0-1.0".into(),
            kind: SourceKind::Model,
            notes: vec!["- 'a': {b}".into()],
            checksum: "x".into(),
            whole: true,
            level_scale_uncertainty_per_cm: 0.1,
            level_scale_uncertainty_relative: 1e-7,
            rows_read: 3,
            rows_refused: 1,
            scope: Vec::new(),
        }],
    }
}

/// A label without blanks at its ends.
fn label() -> impl Strategy<Value = Option<String>> {
    let text = "[!-~éÅ⁻½]([ -~é,;\"'<&#]{0,10}[!-~])?";
    prop::option::of(text.prop_map(String::from))
}

fn size() -> impl Strategy<Value = f64> {
    (1e-300..1e300f64).prop_union(1e-6..1e9)
}

prop_compose! {
    fn level(number: u32)(
        energy_per_cm in size(), energy_uncertainty_per_cm in size(),
        configuration in label(), term in label(),
        twice in prop::option::of(0u16..40), g in prop::option::of(size()),
        own_row in any::<bool>(), computed in any::<bool>(), row in 0u64..1 << 40,
    ) -> LevelRow {
        LevelRow {
            source: 0, species: Species::new(26, 2), number, row, energy_per_cm,
            energy_uncertainty_per_cm, configuration, term,
            j: twice.map(HalfInteger::from_twice), g, own_row, computed,
        }
    }
}

prop_compose! {
    fn line()(
        wavenumber_per_cm in size(), sigma in prop::option::of(size()),
        rate_per_s in prop::option::of(size()), relative in prop::option::of(size()),
        intensity in prop::option::of(size()), twice in prop::option::of(0u16..40),
        kind in prop::sample::select(vec![LineKind::Line, LineKind::Mean, LineKind::Blend, LineKind::Isotope]),
        origin in prop::option::of(prop::sample::select(vec![RateOrigin::Published, RateOrigin::Derived, RateOrigin::Computed])),
        from_levels in any::<bool>(), computed in any::<bool>(), row in 0u64..1 << 40,
    ) -> LineRow {
        LineRow {
            source: 0, species: Species::new(26, 2), row,
            wavenumber_per_cm: Some(wavenumber_per_cm), wavenumber_uncertainty_per_cm: sigma,
            from_levels, lower: None, upper: Some(0), lower_j: twice.map(HalfInteger::from_twice),
            upper_j: None, rate_per_s, rate_relative_uncertainty: relative, rate_origin: origin,
            intensity, kind, computed,
        }
    }
}

fn cells<'a>(report: &'a ReportRow, number: i64) -> Vec<Cell<'a>> {
    let num = |v: Option<f64>| v.map_or(Cell::Missing, Cell::Number);
    let j = |v: Option<HalfInteger>| num(v.map(HalfInteger::value));
    let text = |v: &'a Option<String>| v.as_deref().map_or(Cell::Missing, Cell::Text);
    let link = |v: Option<u32>| v.map_or(Cell::Missing, |v| Cell::Integer(v.into()));
    let mut out = match report {
        ReportRow::Level(l) => vec![
            Cell::Text("level"),
            Cell::Text("s"),
            Cell::Text("Fe II"),
            Cell::Integer(number),
            Cell::Integer(l.row as i64),
            Cell::Number(l.energy_per_cm),
            Cell::Number(l.energy_uncertainty_per_cm),
            text(&l.configuration),
            text(&l.term),
            j(l.j),
            num(l.g),
            Cell::Truth(l.own_row),
        ],
        ReportRow::Line(l) => {
            let mut row = vec![
                Cell::Text("line"),
                Cell::Text("s"),
                Cell::Text("Fe II"),
                Cell::Integer(number),
                Cell::Integer(l.row as i64),
            ];
            row.extend([Cell::Missing; 7]);
            row.extend([
                num(l.wavenumber_per_cm),
                num(l.wavenumber_uncertainty_per_cm),
                Cell::Truth(l.from_levels),
                link(l.lower),
                link(l.upper),
                j(l.lower_j),
                j(l.upper_j),
                num(l.rate_per_s),
                num(l.rate_relative_uncertainty),
                l.rate_origin.map_or(Cell::Missing, |o| {
                    Cell::Text(match o {
                        RateOrigin::Published => "published",
                        RateOrigin::Derived => "derived",
                        _ => "computed",
                    })
                }),
                num(l.intensity),
                Cell::Text(match l.kind {
                    LineKind::Line => "line",
                    LineKind::Mean => "mean",
                    LineKind::Blend => "blend",
                    LineKind::Isotope | LineKind::Ritz => "isotope",
                }),
                Cell::Truth(l.computed),
            ]);
            return row;
        }
    };
    out.extend([Cell::Missing; 12]);
    let ReportRow::Level(l) = report else {
        return out;
    };
    out.push(Cell::Truth(l.computed));
    out
}

fn back(form: Form, reports: &[ReportRow]) -> (Header, Vec<ReportRow>) {
    let folder = tempfile::tempdir().unwrap();
    let file = folder.path().join("element=Fe/part-0.parquet");
    let mut bytes = Vec::new();
    {
        let mut writer =
            text_writer(form, Box::new(&mut bytes)).unwrap_or_else(|| folder_writer(folder.path()));
        writer.begin(&header()).unwrap();
        for (number, report) in reports.iter().enumerate() {
            writer
                .row(Species::new(26, 2), &cells(report, number as i64))
                .unwrap();
        }
        writer.finish().unwrap();
    }
    if form == Form::Parquet {
        bytes = std::fs::read(file).unwrap();
    }
    let format = match form {
        Form::Csv => Format::Ecsv,
        Form::Jsonl => Format::Jsonl,
        Form::Votable => Format::Votable,
        Form::Parquet => Format::Parquet,
    };
    let input = Box::new(std::io::Cursor::new(bytes));
    let limits = importers::Limits::default();
    let mut reader = importers::open_file("x", format, input, &limits).unwrap();
    let found = Header::parse(reader.about().unwrap()).unwrap();
    let mut rows = Vec::new();
    read(reader.as_mut(), "x", &found, &mut |row| {
        rows.push(row);
        Ok(())
    })
    .unwrap();
    (found, rows)
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(64))]
    #[test]
    fn what_is_written_reads_back_equal(
        first in level(0), second in level(1), lines in prop::collection::vec(line(), 1..6),
    ) {
        let mut reports = vec![ReportRow::Level(first), ReportRow::Level(second)];
        reports.extend(lines.into_iter().map(ReportRow::Line));
        for form in [Form::Csv, Form::Jsonl, Form::Votable, Form::Parquet] {
            let (found, rows) = back(form, &reports);
            prop_assert_eq!(&found, &header(), "{:?}", form);
            prop_assert_eq!(&rows, &reports, "{:?}", form);
        }
    }
}
