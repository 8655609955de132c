//! Numbers with a unit behind them: the split that every parser of this room shares.

use super::QuantityError;

/// What is being read, for messages.
#[derive(Clone, Copy)]
pub(super) struct Wanted {
    pub what: &'static str,
    pub example: &'static str,
}

/// Splits `1.5e3nm` into 1500 and `nm` (blanks trimmed). The sign of the number is not judged.
pub(super) fn split(text: &str, wanted: Wanted) -> Result<(f64, &str), QuantityError> {
    let Wanted { what, example } = wanted;
    let text = text.trim();
    if text.is_empty() {
        return Err(QuantityError::Empty { what, example });
    }
    let end = number_end(text);
    let (number, unit) = text.split_at(end);
    if end == 0 {
        return Err(no_number(text, wanted));
    }
    let value: f64 = number.parse().map_err(|_| no_number(text, wanted))?;
    if !value.is_finite() {
        return Err(QuantityError::NotFinite {
            text: text.to_owned(),
            what,
            example,
        });
    }
    Ok((value, unit.trim()))
}

/// As [`split`], and above zero.
pub(super) fn split_positive(text: &str, wanted: Wanted) -> Result<(f64, &str), QuantityError> {
    let (value, unit) = split(text, wanted)?;
    if value > 0.0 {
        return Ok((value, unit));
    }
    Err(QuantityError::NotPositive {
        text: text.trim().to_owned(),
        what: wanted.what,
    })
}

fn no_number(text: &str, wanted: Wanted) -> QuantityError {
    let Wanted { what, example } = wanted;
    let word = text.trim_start_matches(['+', '-']).to_ascii_lowercase();
    if ["nan", "inf"].iter().any(|name| word.starts_with(name)) {
        return QuantityError::NotFinite {
            text: text.to_owned(),
            what,
            example,
        };
    }
    QuantityError::NotANumber {
        text: text.to_owned(),
        number: text.to_owned(),
        what,
        example,
    }
}

/// Byte after `[+-]digits[.digits][e[+-]digits]`; 0 where no number stands in front. An `e` that no
/// digit follows belongs to the unit (`1eV`).
fn number_end(text: &str) -> usize {
    let bytes = text.as_bytes();
    let digits_from = |at: usize| {
        bytes[at..]
            .iter()
            .position(|b| !b.is_ascii_digit())
            .map_or(bytes.len(), |n| at + n)
    };
    let sign = usize::from(matches!(bytes.first(), Some(b'+' | b'-')));
    let mut end = digits_from(sign);
    let mut digits = end - sign;
    if bytes.get(end) == Some(&b'.') {
        let after = digits_from(end + 1);
        digits += after - end - 1;
        end = after;
    }
    if digits == 0 {
        return 0;
    }
    if matches!(bytes.get(end), Some(b'e' | b'E')) {
        let start = end + 1 + usize::from(matches!(bytes.get(end + 1), Some(b'+' | b'-')));
        if bytes.get(start).is_some_and(u8::is_ascii_digit) {
            end = digits_from(start);
        }
    }
    end
}
