//! One grammar for units with the variations of each dialect: products, quotients, powers, a
//! leading scale, a logarithm.

use super::{Dialect, NONE, Unit, UnitError, symbols};

/// Reads a whole unit text.
pub(super) fn parse(text: &str, dialect: Dialect) -> Result<Unit, UnitError> {
    let trimmed = text.trim();
    let unknown = || UnitError::Unknown {
        text: text.to_owned(),
    };
    if trimmed.len() > 200 {
        return Err(unknown());
    }
    match (trimmed, dialect) {
        ("---" | "-", Dialect::Cds) => return Ok(Unit::ONE),
        ("", Dialect::Fits | Dialect::Free) => return Ok(Unit::ONE),
        _ => {}
    }
    if dialect == Dialect::Cds {
        if trimmed.contains(char::is_whitespace) {
            return Err(unknown());
        }
        if let Some(inner) = trimmed.strip_prefix('[').and_then(|t| t.strip_suffix(']')) {
            return parse(inner, dialect).map(Unit::logarithm_of);
        }
    }
    for function in ["log10(", "log("] {
        if let Some(inner) = trimmed
            .strip_prefix(function)
            .and_then(|t| t.strip_suffix(')'))
        {
            return parse(inner, dialect).map(Unit::logarithm_of);
        }
    }
    let mut parser = Parser {
        rest: trimmed,
        dialect,
        depth: 0,
    };
    let unit = parser.expression().ok_or_else(unknown)?;
    if parser.rest.is_empty() {
        Ok(unit)
    } else {
        Err(unknown())
    }
}

struct Parser<'a> {
    rest: &'a str,
    dialect: Dialect,
    depth: usize,
}

impl Parser<'_> {
    /// Factors joined by products and quotients, taken from left to right.
    fn expression(&mut self) -> Option<Unit> {
        self.depth += 1;
        if self.depth > 16 {
            return None;
        }
        let mut unit = match self.rest.strip_prefix('/') {
            Some(rest) => {
                self.rest = rest.trim_start();
                Unit::ONE.times(self.factor()?, -1)?
            }
            None => self.factor()?,
        };
        loop {
            let before = self.rest;
            self.rest = self.rest.trim_start();
            let blank = self.rest.len() < before.len();
            let sign = match self.rest.chars().next() {
                None | Some(')') => break,
                Some('/') => -1,
                Some('.' | '*' | '·') => 1,
                Some(_) if blank || before.starts_with(|c: char| c.is_alphabetic() || c == '%') => {
                    unit = unit.times(self.factor()?, 1)?;
                    continue;
                }
                Some(_) => return None,
            };
            self.rest = self.rest[1..].trim_start();
            unit = unit.times(self.factor()?, sign)?;
        }
        self.depth -= 1;
        Some(unit)
    }

    fn factor(&mut self) -> Option<Unit> {
        if let Some(rest) = self.rest.strip_prefix('(') {
            self.rest = rest.trim_start();
            let inner = self.expression()?;
            self.rest = self.rest.trim_start().strip_prefix(')')?;
            let power = self.power()?;
            return inner.power(power);
        }
        if self.rest.starts_with(|c: char| c.is_ascii_digit()) {
            return self.scale();
        }
        let end = self
            .rest
            .find(|c: char| !(c.is_alphabetic() || c == '%'))
            .unwrap_or(self.rest.len());
        let (name, rest) = self.rest.split_at(end);
        let unit = symbols::find(name, self.dialect)?;
        self.rest = rest;
        let power = self.power()?;
        unit.power(power)
    }

    /// A number: `0.1`, `10**-8`, `10-20`, `1.5x10+11`, `1e8`.
    fn scale(&mut self) -> Option<Unit> {
        let end = self
            .rest
            .find(|c: char| !(c.is_ascii_digit() || c == '.'))
            .unwrap_or(self.rest.len());
        let mut number = &self.rest[..end];
        // A point before a symbol is the sign of a product.
        if number.ends_with('.') {
            number = &number[..end - 1];
        }
        self.rest = &self.rest[number.len()..];
        if number == "10"
            && ["**", "^", "+", "-"]
                .iter()
                .any(|mark| self.rest.starts_with(mark))
        {
            return Some(Unit {
                exponent: self.ten_power()?,
                ..Unit::ONE
            });
        }
        let mut unit = decimal(number)?;
        if let Some(rest) = self
            .rest
            .strip_prefix("x10")
            .or(self.rest.strip_prefix("×10"))
        {
            self.rest = rest;
            unit.exponent = unit.exponent.checked_add(self.ten_power()?)?;
        } else if let Some(rest) = self.rest.strip_prefix(['e', 'E'])
            && rest.starts_with(|c: char| c.is_ascii_digit() || c == '-' || c == '+')
        {
            self.rest = rest;
            unit.exponent = unit.exponent.checked_add(self.integer()?)?;
        }
        Some(unit)
    }

    /// The power of a ten: `**-8`, `^-8`, `+6`, `-20`.
    fn ten_power(&mut self) -> Option<i32> {
        for mark in ["**", "^"] {
            if let Some(rest) = self.rest.strip_prefix(mark) {
                self.rest = rest;
                return self.bracketed_integer();
            }
        }
        if self.rest.starts_with(['+', '-']) {
            return self.integer();
        }
        None
    }

    /// The power of a symbol, 1 where none is written.
    fn power(&mut self) -> Option<i32> {
        for mark in ["**", "^"] {
            if let Some(rest) = self.rest.strip_prefix(mark) {
                self.rest = rest;
                return self.bracketed_integer();
            }
        }
        let bare = self.dialect != Dialect::VoUnits;
        if bare
            && self
                .rest
                .starts_with(|c: char| c.is_ascii_digit() || c == '-' || c == '+')
        {
            return self.integer();
        }
        Some(1)
    }

    fn bracketed_integer(&mut self) -> Option<i32> {
        match self.rest.strip_prefix('(') {
            None => self.integer(),
            Some(rest) => {
                self.rest = rest;
                let power = self.integer()?;
                self.rest = self.rest.strip_prefix(')')?;
                Some(power)
            }
        }
    }

    fn integer(&mut self) -> Option<i32> {
        let signed = usize::from(self.rest.starts_with(['+', '-']));
        let digits = self.rest[signed..]
            .find(|c: char| !c.is_ascii_digit())
            .unwrap_or(self.rest.len() - signed);
        let (number, rest) = self.rest.split_at(signed + digits);
        let number: i32 = number.parse().ok()?;
        self.rest = rest;
        (number.abs() < 100).then_some(number)
    }
}

/// A decimal number as digits and a power of ten, so that it stays exact.
fn decimal(text: &str) -> Option<Unit> {
    let (whole, fraction) = text.split_once('.').unwrap_or((text, ""));
    let digits = format!("{whole}{fraction}");
    let size: u64 = digits.parse().ok()?;
    if size == 0 || size > 1 << 53 {
        return None;
    }
    Some(Unit {
        coefficient: size as f64,
        exponent: -i32::try_from(fraction.len()).ok()?,
        dimension: NONE,
        logarithm: false,
    })
}
