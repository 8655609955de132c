//! One target bound to the columns of a table.

use std::borrow::Cow;

use super::problem::{CellFault, Fault, Problem};
use crate::number::{self, Printed};
use crate::row::Row;
use crate::source::{Cell, NumberScale, Split};

/// Where the text comes from.
#[derive(Clone, Debug)]
pub(super) enum Place {
    Column(usize),
    Constant(String),
}

/// How the numbers of a table are written.
#[derive(Clone, Copy, Debug, Default)]
pub(super) struct Marks {
    pub decimal: Option<char>,
    pub group: Option<char>,
}

/// A target bound to its columns.
#[derive(Clone, Debug)]
pub(super) struct Bound {
    /// Name shown in errors: that of the column, else that of the target.
    pub name: String,
    pub places: Vec<Place>,
    pub join: String,
    pub missing: Vec<String>,
    pub missing_if_flagged: Option<String>,
    pub flags: Option<String>,
    pub split: Option<Split>,
    pub marks: Marks,
    pub scale: Option<NumberScale>,
    /// A column that, where it is not blank, says that the number is only a limit.
    pub limit: Option<usize>,
}

/// A number and the uncertainty that stood in brackets behind it.
#[derive(Clone, Copy, Debug)]
pub(super) struct Value {
    pub printed: Printed,
    pub bracket: Option<f64>,
}

impl Bound {
    pub fn new(
        name: String,
        places: Vec<Place>,
        cell: &Cell,
        table_missing: &[String],
        marks: Marks,
    ) -> Self {
        Self {
            name,
            places,
            join: cell.join.clone().unwrap_or_default(),
            missing: [&cell.missing, table_missing].concat(),
            missing_if_flagged: cell.missing_if_flagged.clone(),
            flags: cell.flags.clone(),
            split: cell.split.clone(),
            marks,
            scale: cell.scale,
            limit: None,
        }
    }

    /// A fault of this cell.
    pub fn fault(&self, text: &str, problem: Problem) -> Fault {
        Box::new(CellFault {
            column: Some(self.name.clone()),
            text: text.to_owned(),
            problem,
        })
    }

    /// The text, trimmed; `None` where it is missing.
    pub fn text<'a>(&'a self, row: &'a Row) -> Result<Option<Cow<'a, str>>, Fault> {
        match self.raw(row) {
            Cow::Borrowed(whole) => Ok(self.reduce(whole)?.map(Cow::Borrowed)),
            Cow::Owned(whole) => {
                let text = self.reduce(&whole)?;
                Ok(text.map(|text| Cow::Owned(text.to_owned())))
            }
        }
    }

    /// The part of a cell that counts.
    fn reduce<'t>(&self, raw: &'t str) -> Result<Option<&'t str>, Fault> {
        let Some(text) = self.present(raw) else {
            return Ok(None);
        };
        let text = self.piece(text)?;
        Ok((!text.is_empty()).then_some(text))
    }

    fn raw<'a>(&'a self, row: &'a Row) -> Cow<'a, str> {
        let one = |place: &'a Place| match place {
            Place::Column(index) => row.cell(*index),
            Place::Constant(text) => text.as_str(),
        };
        match self.places.as_slice() {
            [only] => Cow::Borrowed(one(only)),
            several => {
                let parts = several.iter().map(|place| one(place).trim());
                let parts: Vec<&str> = parts.filter(|part| !part.is_empty()).collect();
                Cow::Owned(parts.join(&self.join))
            }
        }
    }

    /// The text without padding and flags, unless it means missing.
    fn present<'t>(&self, raw: &'t str) -> Option<&'t str> {
        let text = raw.trim_matches([' ', '\t']);
        if text.is_empty() || self.missing.iter().any(|mark| mark == text) {
            return None;
        }
        if let Some(marks) = &self.missing_if_flagged
            && text.starts_with(|c| marks.contains(c))
        {
            return None;
        }
        let Some(flags) = &self.flags else {
            return Some(text);
        };
        let text = text.trim_matches(|c| c == ' ' || flags.contains(c));
        (!text.is_empty()).then_some(text)
    }

    fn piece<'t>(&self, text: &'t str) -> Result<&'t str, Fault> {
        let Some(Split::Piece(piece)) = &self.split else {
            return Ok(text);
        };
        let pieces: Vec<&str> = if piece.at == " " {
            text.split_ascii_whitespace().collect()
        } else {
            text.split(piece.at.as_str()).map(str::trim).collect()
        };
        let count = i32::try_from(pieces.len()).unwrap_or(i32::MAX);
        let index = if piece.take > 0 {
            piece.take - 1
        } else {
            count + piece.take
        };
        let found = usize::try_from(index).ok().and_then(|i| pieces.get(i));
        found.copied().ok_or_else(|| {
            let problem = Problem::Piece {
                at: piece.at.clone(),
                take: piece.take,
            };
            self.fault(text, problem)
        })
    }

    /// The number; `None` where it is missing.
    pub fn number(&self, row: &Row) -> Result<Option<Value>, Fault> {
        if self
            .limit
            .is_some_and(|flag| !row.cell(flag).trim().is_empty())
        {
            return Ok(None);
        }
        let Some(text) = self.text(row)? else {
            return Ok(None);
        };
        self.read_number(&text)
            .map(Some)
            .map_err(|problem| self.fault(&text, problem))
    }

    fn read_number(&self, text: &str) -> Result<Value, Problem> {
        let (digits, bracket) = match &self.split {
            Some(Split::Word(_)) => split_bracket(text)?,
            _ => (text, None),
        };
        let printed = match self.marks {
            Marks {
                decimal: None,
                group: None,
            } => number::parse(digits)?,
            marks => number::parse(&plain(digits, marks)?)?,
        };
        let bracket = bracket
            .map(|units| Ok::<_, Problem>(number::parse(units)?.value * printed.last_digit))
            .transpose()?;
        Ok(Value {
            printed: self.scaled(printed),
            bracket,
        })
    }

    fn scaled(&self, printed: Printed) -> Printed {
        match self.scale {
            None | Some(NumberScale::Dex) => printed,
            Some(NumberScale::Percent) => Printed {
                value: printed.value / 100.0,
                last_digit: printed.last_digit / 100.0,
            },
            Some(NumberScale::Log10) => {
                let value = 10f64.powf(printed.value);
                Printed {
                    value,
                    last_digit: value * std::f64::consts::LN_10 * printed.last_digit,
                }
            }
        }
    }
}

fn split_bracket(text: &str) -> Result<(&str, Option<&str>), Problem> {
    let Some((digits, rest)) = text.split_once('(') else {
        return Ok((text, None));
    };
    let units = rest.strip_suffix(')').ok_or(Problem::Bracket)?;
    if units.is_empty() || !units.bytes().all(|b| b.is_ascii_digit()) {
        return Err(Problem::Bracket);
    }
    Ok((digits, Some(units)))
}

/// A number with the decimal point of the trade and no marks between groups.
fn plain(text: &str, marks: Marks) -> Result<String, Problem> {
    let decimal = marks.decimal.unwrap_or('.');
    if decimal != '.' && marks.group != Some('.') && text.contains('.') {
        return Err(number::NumberError::Form.into());
    }
    let kept = text.chars().filter(|c| Some(*c) != marks.group);
    Ok(kept.map(|c| if c == decimal { '.' } else { c }).collect())
}
