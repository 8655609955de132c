//! JSON lines: one object per line, its members being the cells.
//!
//! The members of the first object name the columns; a later object may leave some out, not add
//! others. Objects inside objects give columns joined by `_`, `null` is no value, lists are
//! refused. A first line `{"lineclear": …}` says what the file is and is no row.

use std::io::Read;

use serde::de::{Deserializer, MapAccess, Visitor};
use serde_json::value::RawValue;

use crate::limits::Limits;
use crate::lines::Lines;
use crate::row::{ColumnInfo, Row, RowError, RowProblem, RowReader, check_columns, check_length};

/// Reads one object per line.
pub struct JsonlReader<R> {
    lines: Lines<R>,
    line: Vec<u8>,
    columns: Vec<ColumnInfo>,
    about: Option<String>,
    first: Option<Vec<(String, String)>>,
    limits: Limits,
}

/// Deepest nesting of objects inside a row: the columns of a table are seldom more than two deep.
const DEPTH: usize = 8;

impl<R: Read> JsonlReader<R> {
    /// Reads as far as the first row.
    ///
    /// # Errors
    /// A first line that is no object.
    pub fn new(input: R, limits: &Limits) -> Result<Self, RowError> {
        let mut reader = Self {
            lines: Lines::new(input, limits.row_bytes),
            line: Vec::new(),
            columns: Vec::new(),
            about: None,
            first: None,
            limits: limits.clone(),
        };
        let mut members = reader.next_object().map_err(fatal)?;
        if let Some([(name, text)]) = members.as_deref()
            && name == crate::handover::NAME
        {
            reader.about = Some(text.clone());
            members = reader.next_object().map_err(fatal)?;
        }
        if let Some(members) = members {
            let members = reader.cells(members).map_err(fatal)?;
            let names = members
                .iter()
                .map(|(name, _)| ColumnInfo::with_unit_in_name(name));
            reader.columns = names.collect();
            let line = reader.lines.line();
            check_columns(reader.columns.len(), limits)
                .map_err(|problem| RowError::fatal(line, problem))?;
            reader.first = Some(members);
        }
        Ok(reader)
    }

    /// The members of the next object, as written; `None` at the end.
    fn next_object(&mut self) -> Result<Option<Vec<(String, String)>>, RowError> {
        loop {
            let more = self.lines.read(&mut self.line);
            let number = self.lines.line();
            if !more.map_err(|problem| RowError::fatal(number, problem))? {
                return Ok(None);
            }
            let text = std::str::from_utf8(&self.line).map_err(|_| {
                RowError::row(number, None, "", RowProblem::Encoding { encoding: "UTF-8" })
            })?;
            if text.trim().is_empty() {
                continue;
            }
            return members(text).map(Some).map_err(|error| {
                let message = format!("expected one JSON object per line: {error}");
                RowError::row(number, None, text, RowProblem::Format(message))
            });
        }
    }

    /// Members that are objects taken apart, texts out of their quotes.
    fn cells(&self, members: Vec<(String, String)>) -> Result<Vec<(String, String)>, RowError> {
        let mut cells = Vec::with_capacity(members.len());
        let line = self.lines.line();
        flatten("", members, (0, self.limits.columns), &mut cells).map_err(
            |(name, text, message)| {
                let message = format!("`{}`: {message}", crate::sink::shown(&name));
                RowError::row(line, None, &text, RowProblem::Format(message))
            },
        )?;
        for (_, cell) in &cells {
            check_length("cell", cell.len(), self.limits.cell_bytes)
                .map_err(|problem| RowError::row(line, None, "", problem))?;
        }
        Ok(cells)
    }

    fn fill(&self, cells: &[(String, String)], row: &mut Row) -> Result<(), RowError> {
        let line = self.lines.line();
        row.start(line);
        let in_order = cells.len() == self.columns.len()
            && cells
                .iter()
                .zip(&self.columns)
                .all(|(c, known)| c.0 == known.name);
        if in_order {
            cells.iter().for_each(|(_, cell)| row.push(cell));
            return Ok(());
        }
        if let Some((name, text)) = cells
            .iter()
            .find(|(name, _)| self.columns.iter().all(|known| known.name != *name))
        {
            let message = format!(
                "`{}` stands in no earlier object; the first one names all columns",
                crate::sink::shown(name)
            );
            return Err(RowError::row(line, None, text, RowProblem::Format(message)));
        }
        for column in &self.columns {
            let cell = cells.iter().find(|(name, _)| *name == column.name);
            row.push(cell.map_or("", |(_, text)| text));
        }
        Ok(())
    }
}

fn fatal(error: RowError) -> RowError {
    RowError {
        fatal: true,
        ..error
    }
}

/// Name, text and complaint of a member.
type Fault = (String, String, String);

fn flatten(
    prefix: &str,
    members: Vec<(String, String)>,
    (depth, most): (usize, usize),
    into: &mut Vec<(String, String)>,
) -> Result<(), Fault> {
    for (name, raw) in members {
        let name = if prefix.is_empty() {
            name
        } else {
            format!("{prefix}_{name}")
        };
        let text = match raw.as_bytes().first() {
            Some(b'{') if depth == DEPTH => {
                return Err((name, raw, format!("objects are nested beyond {DEPTH}")));
            }
            Some(b'{') => {
                let inner = self::members(&raw).map_err(|e| (name.clone(), raw.clone(), e))?;
                flatten(&name, inner, (depth + 1, most), into)?;
                continue;
            }
            Some(b'[') => return Err((name, raw, "a list is no cell of a table".to_owned())),
            Some(b'"') => serde_json::from_str(&raw)
                .map_err(|error| (name.clone(), raw.clone(), error.to_string()))?,
            _ if raw == "null" => String::new(),
            _ => raw,
        };
        if into.len() == most {
            return Err((name, text, format!("more than the limit of {most} members")));
        }
        if into.iter().any(|(known, _)| *known == name) {
            return Err((name, text, "stands twice".to_owned()));
        }
        into.push((name, text));
    }
    Ok(())
}

/// The members of an object: name and value as written.
fn members(text: &str) -> Result<Vec<(String, String)>, String> {
    struct Members;
    impl<'de> Visitor<'de> for Members {
        type Value = Vec<(String, String)>;

        fn expecting(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
            f.write_str("an object")
        }

        fn visit_map<A: MapAccess<'de>>(self, mut map: A) -> Result<Self::Value, A::Error> {
            let mut all: Vec<(String, String)> = Vec::new();
            while let Some((name, value)) = map.next_entry::<String, &RawValue>()? {
                all.push((name, value.get().to_owned()));
            }
            Ok(all)
        }
    }
    let mut parser = serde_json::Deserializer::from_str(text);
    let all = parser
        .deserialize_map(Members)
        .and_then(|all| parser.end().map(|()| all));
    all.map_err(|error| error.to_string())
}

impl<R: Read> RowReader for JsonlReader<R> {
    fn columns(&self) -> &[ColumnInfo] {
        &self.columns
    }

    fn about(&self) -> Option<&str> {
        self.about.as_deref()
    }

    fn read_row(&mut self, row: &mut Row) -> Result<bool, RowError> {
        if let Some(first) = self.first.take() {
            self.fill(&first, row)?;
            return Ok(true);
        }
        let Some(members) = self.next_object()? else {
            return Ok(false);
        };
        let cells = self.cells(members)?;
        self.fill(&cells, row)?;
        Ok(true)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn rows(text: &str) -> Result<(Vec<String>, Vec<Vec<String>>), String> {
        let mut reader =
            JsonlReader::new(text.as_bytes(), &Limits::default()).map_err(|e| e.to_string())?;
        let names = reader.columns().iter().map(|c| c.name.clone()).collect();
        let mut row = Row::default();
        let mut all = Vec::new();
        while reader.read_row(&mut row).map_err(|e| e.to_string())? {
            all.push((0..row.len()).map(|i| row.cell(i).to_owned()).collect());
        }
        Ok((names, all))
    }

    #[test]
    fn objects_become_rows_with_their_digits_kept() {
        let text =
            "{\"a\": 1.50, \"b\": {\"c\": \"x\\ny\", \"d\": null}}\n\n{\"b\":{\"c\":\"z\"}}\r\n";
        let (names, rows) = rows(text).unwrap();
        assert_eq!(names, ["a", "b_c", "b_d"]);
        assert_eq!(rows, [["1.50", "x\ny", ""], ["", "z", ""]]);
    }

    #[test]
    fn a_first_line_about_the_file_is_no_row() {
        let text = "{\"lineclear\": {\"form\":1}}\n{\"a\":true}\n";
        let reader = JsonlReader::new(text.as_bytes(), &Limits::default()).unwrap();
        assert_eq!(reader.about(), Some("{\"form\":1}"));
        assert_eq!(rows(text).unwrap().1, [["true"]]);
    }

    #[test]
    fn what_is_no_table_is_refused_with_its_line() {
        for (text, said) in [
            ("[1]\n", "line 1: expected one JSON object"),
            ("{\"a\":1}\n{\"a\":1\n", "line 2: expected one JSON object"),
            ("{\"a\":1} {\"a\":2}\n", "line 1: expected one JSON object"),
            ("{\"a\":1}\n{\"b\":1}\n", "line 2: `b` stands in no earlier"),
            ("{\"a\":[1]}\n", "line 1: `a`: a list"),
            ("{\"a\":1,\"a\":2}\n", "line 1: `a`: stands twice"),
            ("{\"a_b\":1,\"a\":{\"b\":2}}\n", "`a_b`: stands twice"),
            (
                "{\"a\":1}\n{\"a\":\"\u{0}\"}\n",
                "line 2: expected one JSON object",
            ),
        ] {
            let found = rows(text).unwrap_err();
            assert!(found.contains(said), "{text}: {found}");
        }
        let deep = format!("{}1{}", "{\"a\":".repeat(5000), "}".repeat(5000));
        assert!(rows(&deep).is_err());
    }
}
