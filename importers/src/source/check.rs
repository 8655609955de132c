//! Sense checks of a description, before any table is opened.

use vocabulary::atom::SpeciesRequest;

use super::{
    Cell, Columns, Format, Ignore, RecordKind, SourceDescription, Split, TableDescription,
};

type Fault = (String, String);

fn fault<T>(place: impl Into<String>, message: impl Into<String>) -> Result<T, Fault> {
    Err((place.into(), message.into()))
}

pub(super) fn check(description: &SourceDescription) -> Result<(), Fault> {
    check_key(&description.key)?;
    for (place, value) in [
        ("title", &description.title),
        ("citation", &description.citation),
    ] {
        if value.trim().is_empty() {
            return fault(place, "is empty");
        }
    }
    for (place, value) in [
        (
            "level_scale_uncertainty_per_cm",
            description.level_scale_uncertainty_per_cm,
        ),
        (
            "level_scale_uncertainty_relative",
            description.level_scale_uncertainty_relative,
        ),
    ] {
        if !value.is_finite() || value < 0.0 {
            return fault(place, "must be zero or more");
        }
    }
    check_scopes(description)?;
    check_species("computed_species", &description.computed_species)?;
    description
        .table
        .iter()
        .enumerate()
        .try_for_each(|(index, table)| {
            check_table(table)
                .map_err(|(place, message)| (format!("table {} {place}", index + 1), message))
        })
}

fn check_key(key: &str) -> Result<(), Fault> {
    let sound = key
        .bytes()
        .all(|b| b.is_ascii_lowercase() || b.is_ascii_digit() || b"-_.".contains(&b));
    if key.is_empty() || key.len() > 64 || !sound {
        return fault(
            "key",
            "must be 1 to 64 of the characters a-z, 0-9, `-`, `_` and `.`",
        );
    }
    Ok(())
}

fn check_scopes(description: &SourceDescription) -> Result<(), Fault> {
    for (index, scope) in description.scope.iter().enumerate() {
        let place = format!("scope {}", index + 1);
        let [from, to] = scope.band_nm;
        if !(from >= 0.0 && to > from && to.is_finite()) {
            return fault(
                place,
                "band_nm must be two wavelengths in nm, the shorter first",
            );
        }
        if scope.species.is_empty() {
            return fault(place, "species is empty; write [\"*\"] for all");
        }
    }
    Ok(())
}

fn check_species(place: &str, list: &[String]) -> Result<(), Fault> {
    let wrong = |text: &String| text.parse::<SpeciesRequest>().err();
    match list.iter().find_map(wrong) {
        Some(error) => fault(place, error.to_string()),
        None => Ok(()),
    }
}

fn check_table(table: &TableDescription) -> Result<(), Fault> {
    let plain =
        !table.file.is_empty() && table.file != ".." && !table.file.contains(['/', '\\', '\0']);
    if !plain {
        return fault("file", "must be a plain file name without folders");
    }
    let named = |(place, message): Fault| (format!("({}) {place}", table.file), message);
    check_text_options(table).map_err(named)?;
    check_skips(table).map_err(named)?;
    check_targets(table).map_err(named)
}

fn check_text_options(table: &TableDescription) -> Result<(), Fault> {
    delimiter(table)?;
    single(table.quote.as_deref().filter(|q| !q.is_empty()), "quote")?;
    single(table.decimal_mark.as_deref(), "decimal_mark")?;
    single(table.group_mark.as_deref(), "group_mark")?;
    if let Some(name) = &table.medium
        && super::MediumName::parse(name).is_none()
    {
        return fault("medium", "must be vacuum, air or air-above-200nm");
    }
    if table
        .comment
        .as_ref()
        .is_some_and(|c| c.is_empty() || c.len() > 64)
    {
        return fault("comment", "must be 1 to 64 bytes long");
    }
    if let Some(hash) = &table.sha256
        && (hash.len() != 64 || !hash.bytes().all(|b| b.is_ascii_hexdigit()))
    {
        return fault("sha256", "must be 64 hexadecimal digits");
    }
    match &table.ignore {
        Ignore::Word(word) if word != "rest" => fault("ignore", "must be a list or \"rest\""),
        _ => Ok(()),
    }
}

/// The delimiter of a table of delimited text.
pub(super) fn delimiter(table: &TableDescription) -> Result<crate::delimited::Delimiter, Fault> {
    use crate::delimited::Delimiter;
    let taken = |b: u8| matches!(b, b'\r' | b'\n' | b'"' | 0) || b.is_ascii_alphanumeric();
    match table.delimiter.as_deref() {
        None => Ok(Delimiter::Byte(b',')),
        Some("tab" | "\t") => Ok(Delimiter::Byte(b'\t')),
        Some("blanks") => Ok(Delimiter::Blanks),
        Some(other) => match other.as_bytes() {
            &[byte] if byte.is_ascii() && !taken(byte) => Ok(Delimiter::Byte(byte)),
            _ => fault(
                "delimiter",
                "must be one mark such as \",\" or \";\", or \"tab\", or \"blanks\"",
            ),
        },
    }
}

fn single(text: Option<&str>, place: &str) -> Result<(), Fault> {
    match text {
        Some(text) if text.len() != 1 => fault(place, "must be one ASCII character"),
        _ => Ok(()),
    }
}

fn check_skips(table: &TableDescription) -> Result<(), Fault> {
    for rule in &table.skip {
        let tests = [&rule.equals, &rule.starts_with, &rule.contains];
        if tests.iter().filter(|test| test.is_some()).count() != 1 {
            return fault(
                "skip",
                "each rule needs one of equals, starts_with and contains",
            );
        }
        if rule.reason.trim().is_empty() {
            return fault("skip", "each rule needs a reason");
        }
    }
    Ok(())
}

fn check_targets(table: &TableDescription) -> Result<(), Fault> {
    for (target, cell) in table.columns.named() {
        let place = format!("column `{target}`");
        if !fits(target, table.records) {
            let kind = match table.records {
                RecordKind::Levels => "levels",
                RecordKind::Lines => "lines",
            };
            return fault(place, format!("is no target of {kind}"));
        }
        check_cell(target, cell, table).map_err(|message| (place, message))?;
    }
    check_needs(&table.columns, table)
}

/// Targets that only a table of levels has.
const LEVEL_ONLY: [&str; 6] = [
    "energy",
    "energy_uncertainty",
    "configuration",
    "term",
    "j",
    "g",
];
const SPECIES: [&str; 5] = ["species", "element", "stage", "charge", "isotope"];

fn fits(target: &str, records: RecordKind) -> bool {
    let level_only = LEVEL_ONLY.contains(&target);
    SPECIES.contains(&target) || level_only == (records == RecordKind::Levels)
}

fn check_cell(target: &str, cell: &Cell, table: &TableDescription) -> Result<(), String> {
    let own = [
        cell.column.is_some(),
        cell.position.is_some(),
        cell.bytes.is_some(),
        cell.constant.is_some(),
        cell.parts.is_some(),
    ];
    if own.iter().filter(|given| **given).count() != 1 {
        return Err("needs exactly one of column, position, bytes, constant and parts".into());
    }
    for part in cell.sources() {
        check_place(&part, table.format)?;
    }
    let wavelength = target == "wavelength";
    match (&cell.medium, wavelength) {
        (Some(_), false) => return Err("only a wavelength has a medium".into()),
        (None, true) if table.medium.is_none() && !self_describing(table.format) => {
            return Err("needs medium = \"vacuum\", \"air\" or \"air-above-200nm\"".into());
        }
        (Some(medium), true) => {
            medium.choice().map_err(|word| {
                format!("`{word}` is no medium; write vacuum, air or air-above-200nm")
            })?;
        }
        (None, _) => {}
    }
    check_reading(target, cell)
}

fn check_place(part: &super::Part, format: Format) -> Result<(), String> {
    let given = [
        part.column.is_some(),
        part.position.is_some(),
        part.bytes.is_some(),
        part.constant.is_some(),
    ];
    if given.iter().filter(|given| **given).count() != 1 {
        return Err("each part needs exactly one of column, position, bytes and constant".into());
    }
    match (part.bytes, format) {
        (Some([first, last]), Format::Fixed) if first == 0 || last < first => {
            Err("bytes must be two positions from 1, the first not behind the last".into())
        }
        (Some(_), Format::Fixed) => Ok(()),
        (Some(_), _) => Err("bytes belong to format = \"fixed\"".into()),
        (None, Format::Fixed) if part.constant.is_none() => {
            Err("a table of fixed width has no names: give bytes".into())
        }
        (None, _) if part.position == Some(0) => Err("position counts from 1".into()),
        (None, _) => Ok(()),
    }
}

fn check_reading(target: &str, cell: &Cell) -> Result<(), String> {
    if cell.grades.is_some() && target != "rate_uncertainty" {
        return Err("only rate_uncertainty can have grades".into());
    }
    if let Some(grades) = &cell.grades
        && grades
            .values()
            .any(|sigma| !sigma.is_finite() || *sigma <= 0.0)
    {
        return Err("each grade needs a relative 1 σ above zero".into());
    }
    match &cell.split {
        Some(Split::Word(word)) if word != "bracketed" => {
            return Err("split must be \"bracketed\" or { at = …, take = … }".into());
        }
        Some(Split::Piece(piece)) if piece.at.is_empty() || piece.take == 0 => {
            return Err("split needs a separator and a piece number, from 1 or from -1".into());
        }
        _ => {}
    }
    Ok(())
}

fn check_needs(columns: &Columns, table: &TableDescription) -> Result<(), Fault> {
    if self_describing(table.format) {
        return Ok(());
    }
    if columns.species.is_none() && columns.element.is_none() {
        return fault("columns", "need species, or element and stage");
    }
    needs(columns)
}

/// Formats that can say themselves what their columns are.
fn self_describing(format: Format) -> bool {
    !matches!(format, Format::Delimited | Format::Fixed)
}

fn needs(columns: &Columns) -> Result<(), Fault> {
    if columns.species.is_some() && (columns.element.is_some() || columns.stage.is_some()) {
        return fault("columns", "give species, or element and stage, not both");
    }
    if columns.element.is_some() && columns.stage.is_some() == columns.charge.is_some() {
        return fault("columns", "element needs one of stage and charge");
    }
    let positions = [
        &columns.wavelength,
        &columns.wavenumber,
        &columns.frequency,
        &columns.photon_energy,
    ];
    if positions.iter().filter(|p| p.is_some()).count() > 1 {
        return fault(
            "columns",
            "give one of wavelength, wavenumber, frequency and photon_energy",
        );
    }
    let rates = [
        &columns.rate,
        &columns.oscillator_strength,
        &columns.gf,
        &columns.log_gf,
    ];
    if rates.iter().filter(|r| r.is_some()).count() > 1 {
        return fault(
            "columns",
            "give one of rate, oscillator_strength, gf and log_gf",
        );
    }
    Ok(())
}
