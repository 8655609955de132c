//! Roman numerals as the trade writes stages of ionisation: 1–118.

const PARTS: [(u8, &str); 9] = [
    (100, "C"),
    (90, "XC"),
    (50, "L"),
    (40, "XL"),
    (10, "X"),
    (9, "IX"),
    (5, "V"),
    (4, "IV"),
    (1, "I"),
];

/// Writes a stage, 1–255; the empty string for 0.
pub fn to_roman(mut number: u8) -> String {
    let mut text = String::new();
    for (value, letters) in PARTS {
        while number >= value {
            text.push_str(letters);
            number -= value;
        }
    }
    text
}

/// Reads a stage in its one correct spelling (`IV`, never `IIII`), 1–118; `None` for all else.
pub fn from_roman(text: &str) -> Option<u8> {
    let mut number = 0_u8;
    let mut rest = text;
    for (value, letters) in PARTS {
        while let Some(after) = rest.strip_prefix(letters) {
            number = number.checked_add(value)?;
            rest = after;
        }
    }
    let whole = rest.is_empty() && (1..=118).contains(&number);
    (whole && to_roman(number) == text).then_some(number)
}
