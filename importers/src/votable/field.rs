//! A column of a VOTable: type, size, unit, null value.

use std::io::Read;

use crate::row::{ColumnInfo, RowError, RowProblem};
use crate::unit::Dialect;
use crate::xml::{Element, Node, Xml};

/// Primitive types of the standard.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Type {
    Boolean,
    Bit,
    UnsignedByte,
    Short,
    Int,
    Long,
    Char,
    UnicodeChar,
    Float,
    Double,
    FloatComplex,
    DoubleComplex,
}

/// How many values a cell holds.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Size {
    /// One value, no array.
    One,
    /// This many.
    Fixed(usize),
    /// A count stands before the values.
    Variable,
    /// A variable array of several dimensions, whose count is read differently by different
    /// programs.
    Unclear,
}

/// A column.
#[derive(Clone, Debug)]
pub(super) struct Field {
    pub name: String,
    pub kind: Type,
    pub size: Size,
    unit: Option<String>,
    ucd: Option<String>,
    description: Option<String>,
    pub null: Option<String>,
}

impl Field {
    /// Reads a FIELD element that has just opened, up to its end.
    pub fn read<R: Read>(xml: &mut Xml<R>, element: &Element) -> Result<Self, RowError> {
        let text = |name: &str| element.attribute(name).map(str::to_owned);
        let datatype = element.attribute("datatype").unwrap_or("char");
        let Some(kind) = type_of(datatype) else {
            let datatype = crate::sink::shown(datatype);
            return Err(xml.fail(format!("`{datatype}` is no data type of the standard")));
        };
        let arraysize = element.attribute("arraysize").unwrap_or_default().trim();
        let Some(size) = size_of(arraysize) else {
            let arraysize = crate::sink::shown(arraysize);
            return Err(xml.fail(format!("`{arraysize}` is no array size")));
        };
        let mut field = Self {
            name: text("name").or_else(|| text("ID")).unwrap_or_default(),
            kind,
            size,
            unit: text("unit"),
            ucd: text("ucd"),
            description: None,
            null: None,
        };
        let depth = xml.depth();
        while xml.depth() >= depth {
            match xml.pull()? {
                Some(Node::Open(inner)) if inner.name == "VALUES" => {
                    field.null = inner.attribute("null").map(|null| null.trim().to_owned());
                    xml.skip()?;
                }
                Some(Node::Open(inner)) if inner.name == "DESCRIPTION" => {
                    field.description = Some(xml.content()?.trim().to_owned());
                }
                Some(Node::Open(_)) => xml.skip()?,
                Some(_) => {}
                None => break,
            }
        }
        Ok(field)
    }

    /// What is known about the column.
    pub fn info(&self) -> ColumnInfo {
        ColumnInfo {
            name: self.name.clone(),
            unit: self.unit.clone().filter(|unit| !unit.trim().is_empty()),
            dialect: Dialect::VoUnits,
            ucd: self.ucd.clone(),
            description: self.description.clone(),
        }
    }

    fn is_text(&self) -> bool {
        matches!(self.kind, Type::Char | Type::UnicodeChar)
    }

    fn is_integer(&self) -> bool {
        matches!(
            self.kind,
            Type::UnsignedByte | Type::Short | Type::Int | Type::Long
        )
    }

    /// The text of a TD as a cell; empty for a null.
    pub fn text(&self, text: &str) -> Result<String, RowProblem> {
        if self.is_text() {
            return Ok(text.to_owned());
        }
        let text = text.trim();
        if text.is_empty() || self.null.as_deref() == Some(text) {
            return Ok(String::new());
        }
        let words: Vec<String> = text
            .split_ascii_whitespace()
            .map(|word| self.word(word))
            .collect::<Result<_, _>>()?;
        Ok(words.join(" "))
    }

    fn word(&self, word: &str) -> Result<String, RowProblem> {
        if self.kind == Type::Boolean {
            return match word.to_ascii_lowercase().as_str() {
                "t" | "true" | "1" => Ok("true".to_owned()),
                "f" | "false" | "0" => Ok("false".to_owned()),
                "?" => Ok(String::new()),
                _ => Err(expected("true or false")),
            };
        }
        if self.is_integer() {
            let hexadecimal = word.strip_prefix("0x").or(word.strip_prefix("0X"));
            let value = match hexadecimal {
                Some(digits) => i64::from_str_radix(digits, 16),
                None => word.parse(),
            };
            let value = value.map_err(|_| expected("a whole number"))?.to_string();
            let null = self.null.as_deref() == Some(value.as_str());
            return Ok(if null { String::new() } else { value });
        }
        // A float that is no number is the null of floats.
        Ok(if word.eq_ignore_ascii_case("nan") {
            String::new()
        } else {
            word.to_owned()
        })
    }
}

fn expected(what: &str) -> RowProblem {
    RowProblem::Format(format!("expected {what}"))
}

fn type_of(name: &str) -> Option<Type> {
    Some(match name {
        "boolean" => Type::Boolean,
        "bit" => Type::Bit,
        "unsignedByte" => Type::UnsignedByte,
        "short" => Type::Short,
        "int" => Type::Int,
        "long" => Type::Long,
        "char" => Type::Char,
        "unicodeChar" => Type::UnicodeChar,
        "float" => Type::Float,
        "double" => Type::Double,
        "floatComplex" => Type::FloatComplex,
        "doubleComplex" => Type::DoubleComplex,
        _ => return None,
    })
}

/// `5`, `*`, `5*`, `3x4`, `3x*`.
fn size_of(text: &str) -> Option<Size> {
    if text.is_empty() {
        return Some(Size::One);
    }
    let variable = text.ends_with('*');
    let sizes = text.strip_suffix('*').unwrap_or(text);
    let several = sizes.contains('x');
    let sizes = sizes.strip_suffix('x').unwrap_or(sizes);
    let mut count = 1usize;
    for part in sizes.split('x').filter(|part| !part.is_empty()) {
        count = count.checked_mul(part.trim().parse().ok()?)?;
    }
    Some(match (variable, several) {
        (true, true) => Size::Unclear,
        (true, false) => Size::Variable,
        (false, _) => Size::Fixed(count),
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn array_sizes() {
        for (text, expected) in [
            ("", Some(Size::One)),
            ("5", Some(Size::Fixed(5))),
            ("*", Some(Size::Variable)),
            ("5*", Some(Size::Variable)),
            ("3x4", Some(Size::Fixed(12))),
            ("3x*", Some(Size::Unclear)),
            ("-1", None),
            ("x y", None),
            ("99999999999999999999", None),
            ("9999999999x9999999999x9999999999", None),
        ] {
            assert_eq!(size_of(text), expected, "{text}");
        }
    }
}
