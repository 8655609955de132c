//! Numbers as tables print them: strict grammar, exact value, and the place of the last digit.

use thiserror::Error;

/// A number with the precision of its print.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Printed {
    /// The value, correctly rounded.
    pub value: f64,
    /// One unit of the last printed digit, in the unit of the value.
    pub last_digit: f64,
}

/// Why a text is no number.
#[derive(Clone, Copy, Debug, Error, PartialEq, Eq)]
pub enum NumberError {
    /// Nothing there.
    #[error("expected a number, found nothing")]
    Empty,
    /// Not of the form digits, point, digits, exponent.
    #[error("expected a number such as 12.5, -0.3 or 1.2e-5")]
    Form,
    /// Beyond the largest number.
    #[error("the number is too large to hold")]
    TooLarge,
    /// A number that is not zero but too small to tell from it.
    #[error("the number is too small to tell from zero")]
    TooSmall,
}

const EXACT_POWERS: [f64; 23] = [
    1e0, 1e1, 1e2, 1e3, 1e4, 1e5, 1e6, 1e7, 1e8, 1e9, 1e10, 1e11, 1e12, 1e13, 1e14, 1e15, 1e16,
    1e17, 1e18, 1e19, 1e20, 1e21, 1e22,
];
/// Integers up to this are exact in an `f64`.
const EXACT_INTEGER: u64 = 1 << 53;

/// What the digits of a number say before they are put together.
#[derive(Clone, Copy)]
struct Scan {
    negative: bool,
    mantissa: u64,
    /// The mantissa holds all digits.
    whole: bool,
    zero: bool,
    exponent: i32,
    plain: bool,
}

/// Reads `[+-]digits[.digits][e|E|d|D[+-]digits]`, blanks around it allowed.
///
/// # Errors
/// Anything else, infinities, `NaN`, and numbers that an `f64` cannot hold.
pub fn parse(text: &str) -> Result<Printed, NumberError> {
    let text = text.trim_matches([' ', '\t']);
    let scan = scan(text.as_bytes())?;
    let last_digit = power_of_ten(scan.exponent);
    let value = match quick(&scan) {
        Some(value) => value,
        None => careful(text, &scan)?,
    };
    if !last_digit.is_finite() {
        return Err(NumberError::TooLarge);
    }
    Ok(Printed { value, last_digit })
}

/// The shortest text that reads back as this number; empty for NaN, which means no value.
pub fn double_text(value: f64) -> String {
    let size = value.abs();
    if value.is_nan() {
        String::new()
    } else if value == 0.0 || (1e-5..1e16).contains(&size) {
        value.to_string()
    } else {
        format!("{value:e}")
    }
}

/// As [`double_text`], for single precision.
pub fn single_text(value: f32) -> String {
    let size = value.abs();
    if value.is_nan() {
        String::new()
    } else if value == 0.0 || (1e-5..1e16).contains(&size) {
        value.to_string()
    } else {
        format!("{value:e}")
    }
}

/// 10 to a power, correctly rounded inside the exact range and to one unit outside.
fn power_of_ten(exponent: i32) -> f64 {
    match exponent {
        0..=22 => EXACT_POWERS[exponent as usize],
        -22..=-1 => 1.0 / EXACT_POWERS[-exponent as usize],
        _ => 10f64.powi(exponent),
    }
}

fn scan(bytes: &[u8]) -> Result<Scan, NumberError> {
    let (negative, mut at) = match bytes.first() {
        None => return Err(NumberError::Empty),
        Some(b'-') => (true, 1),
        Some(b'+') => (false, 1),
        Some(_) => (false, 0),
    };
    let mut digits = Digits::default();
    at = digits.take(bytes, at);
    let before = digits.count;
    if bytes.get(at) == Some(&b'.') {
        at = digits.take(bytes, at + 1);
    }
    if digits.count == 0 {
        return Err(NumberError::Form);
    }
    let after = i32::try_from(digits.count - before).map_err(|_| NumberError::TooSmall)?;
    let (exponent, plain) = match bytes.get(at) {
        None => (0, true),
        Some(b'e' | b'E' | b'd' | b'D') => (exponent(&bytes[at + 1..])?, false),
        Some(_) => return Err(NumberError::Form),
    };
    Ok(Scan {
        negative,
        mantissa: digits.mantissa,
        whole: digits.whole,
        zero: digits.zero,
        exponent: exponent.saturating_sub(after),
        plain,
    })
}

/// Digits gathered so far.
struct Digits {
    mantissa: u64,
    count: usize,
    whole: bool,
    zero: bool,
}

impl Default for Digits {
    fn default() -> Self {
        Self {
            mantissa: 0,
            count: 0,
            whole: true,
            zero: true,
        }
    }
}

impl Digits {
    fn take(&mut self, bytes: &[u8], mut at: usize) -> usize {
        while let Some(digit) = bytes.get(at).map(|b| b.wrapping_sub(b'0')) {
            if digit > 9 {
                break;
            }
            self.zero &= digit == 0;
            if self.mantissa < EXACT_INTEGER {
                self.mantissa = self.mantissa * 10 + u64::from(digit);
            } else {
                self.whole = false;
            }
            self.count += 1;
            at += 1;
        }
        at
    }
}

fn exponent(bytes: &[u8]) -> Result<i32, NumberError> {
    let (sign, digits) = match bytes.first() {
        Some(b'-') => (-1, &bytes[1..]),
        Some(b'+') => (1, &bytes[1..]),
        _ => (1, bytes),
    };
    if digits.is_empty() || !digits.iter().all(u8::is_ascii_digit) {
        return Err(NumberError::Form);
    }
    let size = digits.iter().fold(0i32, |sum, b| {
        sum.saturating_mul(10)
            .saturating_add(i32::from(b - b'0'))
            .min(1_000_000)
    });
    Ok(sign * size)
}

/// The exact case (Clinger 1990, PLDI 25, 92): an integer and a power of ten that both fit.
fn quick(scan: &Scan) -> Option<f64> {
    if !scan.whole || scan.mantissa > EXACT_INTEGER || scan.exponent.unsigned_abs() > 22 {
        return None;
    }
    let power = EXACT_POWERS[scan.exponent.unsigned_abs() as usize];
    let size = scan.mantissa as f64;
    let value = if scan.exponent < 0 {
        size / power
    } else {
        size * power
    };
    Some(if scan.negative { -value } else { value })
}

fn careful(text: &str, scan: &Scan) -> Result<f64, NumberError> {
    let value: f64 = if scan.plain {
        text.parse()
    } else {
        text.replace(['d', 'D'], "e").parse()
    }
    .map_err(|_| NumberError::Form)?;
    if !value.is_finite() {
        return Err(NumberError::TooLarge);
    }
    if value == 0.0 && !scan.zero {
        return Err(NumberError::TooSmall);
    }
    Ok(value)
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    #[test]
    fn reads_the_forms_that_tables_print() {
        for (text, value, last_digit) in [
            ("588.995095", 588.995_095, 1e-6),
            (" 12 ", 12.0, 1.0),
            ("-.5", -0.5, 0.1),
            ("5.", 5.0, 1.0),
            ("+1.50E-3", 1.5e-3, 1e-5),
            ("1.2D+08", 1.2e8, 1e7),
            ("0.000", 0.0, 1e-3),
        ] {
            let read = parse(text).unwrap();
            assert_eq!(read.value, value, "{text}");
            // One rounding of the power of ten at most.
            let off = (read.last_digit / last_digit - 1.0).abs();
            assert!(off <= f64::EPSILON, "{text}: {}", read.last_digit);
        }
    }

    #[test]
    fn refuses_what_is_no_finite_number() {
        for text in [
            "",
            " ",
            "nan",
            "NaN",
            "inf",
            "-Infinity",
            "1e",
            "e5",
            ".",
            "+",
            "1.2.3",
            "1 2",
            "0x10",
            "1_000",
            "1,5",
            "１",
            "--1",
            "1e+-5",
        ] {
            assert!(parse(text).is_err(), "{text}");
        }
        assert_eq!(parse("1e999"), Err(NumberError::TooLarge));
        assert_eq!(parse("1e-999"), Err(NumberError::TooSmall));
        assert_eq!(parse("1e99999999999999999999"), Err(NumberError::TooLarge));
    }

    proptest! {
        /// The quick way and the library's way agree to the last bit.
        #[test]
        fn agrees_with_the_standard_library(mantissa in any::<u64>(), cut in 0usize..18, power in -40i32..40) {
            let digits = mantissa.to_string();
            let cut = cut.min(digits.len());
            let text = format!("{}.{}e{power}", &digits[..cut], &digits[cut..]);
            prop_assume!(digits.len() > 1 || cut > 0);
            let expected: f64 = text.parse().unwrap();
            prop_assert_eq!(parse(&text).unwrap().value, expected, "{}", text);
        }

        #[test]
        fn never_panics(text in "\\PC*") {
            let _ = parse(&text);
        }
    }
}
