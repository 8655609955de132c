//! Enhanced character-separated values (APE 6, versions 0.9 and 1.0).

use std::io::{BufRead, BufReader, Read};

use saphyr::{LoadableYamlNode, Scalar, Yaml};

use crate::delimited::{Delimiter, Dialect};
use crate::limits::Limits;
use crate::row::{ColumnInfo, Row, RowError, RowProblem, RowReader, check_columns};
use crate::table::DelimitedReader;
use crate::unit;

/// A column as the header declares it.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
struct Declared {
    name: String,
    datatype: String,
    unit: Option<String>,
    description: Option<String>,
}

/// What to do with a cell of the file.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
enum Use {
    /// Hand it on as it is.
    Keep,
    /// Hand it on, `nan` being no value.
    Float,
    /// True and false in capitals.
    Truth,
    /// It says that the cell of this column (as handed on) is no value.
    Mask(usize),
}

/// Reads the data lines behind the header.
pub struct EcsvReader<R> {
    body: DelimitedReader<BufReader<R>>,
    header_lines: u64,
    uses: Vec<Use>,
    columns: Vec<ColumnInfo>,
    about: Option<String>,
    raw: Row,
}

impl<R: Read> EcsvReader<R> {
    /// Reads the header and the line of column names.
    ///
    /// # Errors
    /// No header, a header that is no YAML or declares other columns than the data have.
    pub fn new(input: R, limits: &Limits) -> Result<Self, RowError> {
        let mut input = BufReader::new(input);
        let (yaml, header_lines) = read_header(&mut input, limits)?;
        let fail = |message: String| RowError::fatal(header_lines + 1, RowProblem::Format(message));
        let header = parse_header(&yaml).map_err(fail)?;
        let dialect = Dialect {
            delimiter: header.delimiter,
            quote: Some(b'"'),
            comment: Some(b"#".to_vec()),
            edge_delimiters: false,
        };
        let body = DelimitedReader::new(input, dialect, 1, limits)
            .map_err(|error| behind(error, header_lines))?;
        let names: Vec<&str> = body.columns().iter().map(|c| c.name.as_str()).collect();
        check_names(&header.declared, &names).map_err(fail)?;
        check_columns(names.len(), limits)
            .map_err(|problem| RowError::fatal(header_lines + 1, problem))?;
        let uses = uses(&header.declared);
        let kept = header.declared.iter().zip(&uses);
        let kept = kept.filter(|(_, how)| !matches!(how, Use::Mask(_)));
        let columns = kept.map(|(column, _)| column.info()).collect();
        Ok(Self {
            body,
            header_lines,
            uses,
            columns,
            about: header.about,
            raw: Row::default(),
        })
    }
}

impl Declared {
    fn info(&self) -> ColumnInfo {
        ColumnInfo {
            name: self.name.clone(),
            unit: self.unit.clone(),
            dialect: unit::Dialect::Free,
            ucd: None,
            description: self.description.clone(),
        }
    }
}

impl<R: Read> RowReader for EcsvReader<R> {
    fn columns(&self) -> &[ColumnInfo] {
        &self.columns
    }

    fn about(&self) -> Option<&str> {
        self.about.as_deref()
    }

    fn read_row(&mut self, row: &mut Row) -> Result<bool, RowError> {
        let more = self
            .body
            .read_row(&mut self.raw)
            .map_err(|error| behind(error, self.header_lines))?;
        if !more {
            return Ok(false);
        }
        row.start(self.raw.line() + self.header_lines);
        let mut kept = 0;
        for (index, how) in self.uses.iter().enumerate() {
            let cell = self.raw.cell(index);
            let cell = match how {
                Use::Mask(_) => continue,
                Use::Float if cell.eq_ignore_ascii_case("nan") => "",
                Use::Truth if cell == "True" => "true",
                Use::Truth if cell == "False" => "false",
                Use::Keep | Use::Float | Use::Truth => cell,
            };
            let masked = self
                .uses
                .iter()
                .enumerate()
                .any(|(at, other)| *other == Use::Mask(kept) && self.raw.cell(at) == "True");
            row.push(if masked { "" } else { cell });
            kept += 1;
        }
        Ok(true)
    }
}

/// Lines of the body are counted from the line of names.
fn behind(mut error: RowError, header_lines: u64) -> RowError {
    error.line += header_lines;
    error
}

/// The header's YAML and the number of its lines. The first line that is no comment stays unread.
fn read_header<R: Read>(
    input: &mut BufReader<R>,
    limits: &Limits,
) -> Result<(String, u64), RowError> {
    let mut yaml = String::new();
    let mut line = Vec::new();
    let mut count = 0u64;
    let io = |count: u64| move |error| RowError::fatal(count + 1, RowProblem::Io(error));
    loop {
        let next = input.fill_buf().map_err(io(count))?.first().copied();
        let starts_file = count == 0 && next == Some(0xef);
        if next != Some(b'#') && !starts_file {
            break;
        }
        line.clear();
        let budget = (limits.header_bytes - yaml.len().min(limits.header_bytes)) as u64;
        let mut bounded = input.by_ref().take(budget + 1);
        bounded.read_until(b'\n', &mut line).map_err(io(count))?;
        count += 1;
        if line.len() as u64 > budget {
            let problem = RowProblem::TooLong {
                what: "header",
                limit: limits.header_bytes,
            };
            return Err(RowError::fatal(count, problem));
        }
        let text = std::str::from_utf8(&line)
            .map_err(|_| RowError::fatal(count, RowProblem::Encoding { encoding: "UTF-8" }))?;
        let text = text
            .trim_start_matches('\u{feff}')
            .trim_end_matches(['\n', '\r']);
        let text = text.strip_prefix('#').unwrap_or(text);
        if count == 1 {
            check_version(text).map_err(|problem| RowError::fatal(1, problem))?;
        } else if !text.starts_with('#') {
            yaml.push_str(text.strip_prefix(' ').unwrap_or(text));
            yaml.push('\n');
        }
    }
    if count == 0 {
        let problem = RowProblem::Format("the first line is not `# %ECSV 1.0`".to_owned());
        return Err(RowError::fatal(1, problem));
    }
    Ok((yaml, count))
}

fn check_version(line: &str) -> Result<(), RowProblem> {
    let version = line.trim().strip_prefix("%ECSV").map(str::trim);
    match version {
        Some("0.9" | "1.0") => Ok(()),
        _ => Err(RowProblem::Format(
            "the first line is not `# %ECSV 1.0`".to_owned(),
        )),
    }
}

struct Header {
    delimiter: Delimiter,
    declared: Vec<Declared>,
    about: Option<String>,
}

fn parse_header(yaml: &str) -> Result<Header, String> {
    let documents =
        Yaml::load_from_str(yaml).map_err(|error| format!("the header is no YAML: {error}"))?;
    let [top] = documents.as_slice() else {
        return Err("the header should be one YAML document".to_owned());
    };
    let delimiter = match get(top, "delimiter").and_then(text).as_deref() {
        None | Some(" ") => Delimiter::Blanks,
        Some(",") => Delimiter::Byte(b','),
        Some(_) => return Err("the delimiter should be a blank or a comma".to_owned()),
    };
    let Some(Yaml::Sequence(columns)) = get(top, "datatype").map(plain) else {
        return Err("the header declares no columns (datatype)".to_owned());
    };
    let declared = columns.iter().map(declared).collect::<Result<_, _>>()?;
    Ok(Header {
        delimiter,
        declared,
        about: get(top, "meta").and_then(about),
    })
}

/// What stands in `meta` under the name of this program; `meta` is a map, or a list of maps that
/// keeps their order.
fn about(meta: &Yaml) -> Option<String> {
    match plain(meta) {
        Yaml::Sequence(entries) => entries.iter().find_map(about),
        map => get(map, crate::handover::NAME).and_then(text),
    }
}

fn declared(node: &Yaml) -> Result<Declared, String> {
    let word = |key: &str| get(node, key).and_then(text);
    let Some(datatype) = word("datatype") else {
        return Err("a column of the header has no datatype".to_owned());
    };
    // Tagged units hold their text one level deeper.
    let unit =
        get(node, "unit").and_then(|unit| text(unit).or_else(|| get(unit, "unit").and_then(text)));
    Ok(Declared {
        name: word("name").unwrap_or_default(),
        datatype,
        unit: unit.filter(|unit| !unit.trim().is_empty()),
        description: word("description"),
    })
}

/// A node without its tag, which says how one program would build it and is not acted on.
fn plain<'a, 'i>(node: &'a Yaml<'i>) -> &'a Yaml<'i> {
    match node {
        Yaml::Tagged(_, inner) => plain(inner),
        other => other,
    }
}

fn get<'a, 'i>(node: &'a Yaml<'i>, key: &str) -> Option<&'a Yaml<'i>> {
    match plain(node) {
        Yaml::Mapping(entries) => entries
            .iter()
            .find(|(own, _)| text(own).as_deref() == Some(key))
            .map(|(_, value)| value),
        _ => None,
    }
}

/// A scalar as text.
fn text(node: &Yaml) -> Option<String> {
    match plain(node) {
        Yaml::Value(Scalar::String(text)) => Some(text.to_string()),
        Yaml::Value(Scalar::Integer(number)) => Some(number.to_string()),
        Yaml::Value(Scalar::Boolean(truth)) => Some(truth.to_string()),
        Yaml::Representation(text, ..) => Some(text.to_string()),
        _ => None,
    }
}

/// Names must agree in number and order; a name that YAML takes for a number or a word of truth
/// is compared by the line of names alone.
fn check_names(declared: &[Declared], names: &[&str]) -> Result<(), String> {
    if declared.len() != names.len() {
        return Err(format!(
            "the header declares {} columns where the line of names has {}",
            declared.len(),
            names.len()
        ));
    }
    for (column, name) in declared.iter().zip(names) {
        if !column.name.is_empty() && column.name != *name {
            return Err(format!(
                "the header declares column `{}` where the line of names has `{}`",
                crate::sink::shown(&column.name),
                crate::sink::shown(name)
            ));
        }
    }
    Ok(())
}

/// The column of this name without `.mask`, if there is one.
fn mask_base<'a>(name: &'a str, declared: &[Declared]) -> Option<&'a str> {
    let base = name.strip_suffix(".mask")?;
    declared
        .iter()
        .any(|column| column.name == base)
        .then_some(base)
}

fn uses(declared: &[Declared]) -> Vec<Use> {
    let kept: Vec<&str> = declared
        .iter()
        .map(|column| column.name.as_str())
        .filter(|name| mask_base(name, declared).is_none())
        .collect();
    let mask_of = |column: &Declared| {
        let base = mask_base(&column.name, declared)?;
        kept.iter().position(|name| *name == base)
    };
    declared
        .iter()
        .map(|column| match (mask_of(column), column.datatype.as_str()) {
            (Some(index), _) => Use::Mask(index),
            (None, kind) if kind.starts_with("float") => Use::Float,
            (None, "bool") => Use::Truth,
            (None, _) => Use::Keep,
        })
        .collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    fn rows(text: &str) -> Result<Vec<Vec<String>>, String> {
        let mut reader =
            EcsvReader::new(text.as_bytes(), &Limits::default()).map_err(|e| e.to_string())?;
        let mut row = Row::default();
        let mut all = Vec::new();
        while reader.read_row(&mut row).map_err(|e| e.to_string())? {
            all.push((0..row.len()).map(|i| row.cell(i).to_owned()).collect());
        }
        Ok(all)
    }

    const HEAD: &str = "# %ECSV 1.0\n# ---\n# datatype:\n# - {name: a, unit: 1 / s, datatype: float64}\n# - {name: b, datatype: string}\n";

    #[test]
    fn data_rows_with_missing_cells() {
        let text = format!("{HEAD}a b\n1.5 \"x \"\"y\"\"\"\n# note\nnan \"\"\n\n\"\" z\n");
        assert_eq!(
            rows(&text).unwrap(),
            [["1.5", "x \"y\""], ["", ""], ["", "z"]]
        );
    }

    #[test]
    fn masks_make_cells_missing() {
        let text = "# %ECSV 1.0\n# ---\n# delimiter: ','\n# datatype:\n# - {name: a, datatype: int64}\n# - {name: a.mask, datatype: bool}\na,a.mask\n1,False\n2,True\n";
        assert_eq!(rows(text).unwrap(), [["1"], [""]]);
    }

    #[test]
    fn broken_headers_are_errors() {
        for text in [
            "",
            "a b\n1 2\n",
            "# %ECSV 7\n# ---\na\n",
            "# %ECSV 1.0\n# ---\n# datatype: [\na\n",
            "# %ECSV 1.0\n# ---\n# datatype:\n# - {name: a}\na\n",
            "# %ECSV 1.0\n# ---\n# datatype:\n# - {name: a, datatype: int8}\nb\n1\n",
            "# %ECSV 1.0\n# ---\n# datatype:\n# - {name: a, datatype: int8}\na b\n1 2\n",
            "# %ECSV 1.0\n# ---\n# delimiter: x\n# datatype:\n# - {name: a, datatype: int8}\na\n1\n",
        ] {
            assert!(rows(text).is_err(), "{text}");
        }
        assert!(
            rows(&format!("{HEAD}a b\n1 2 3\n"))
                .unwrap_err()
                .starts_with("line 7:")
        );
    }
}
