//! Text from data is not trusted: what a terminal would obey is escaped.

use std::borrow::Cow;

/// The text with control and direction characters escaped (`\u{1b}`).
pub fn safe(text: &str) -> Cow<'_, str> {
    let obeyed = |c: char| {
        (c.is_control() && c != '\n')
            || matches!(c, '\u{200e}' | '\u{200f}' | '\u{202a}'..='\u{202e}' | '\u{2066}'..='\u{2069}')
    };
    if !text.contains(obeyed) {
        return Cow::Borrowed(text);
    }
    let mut out = String::with_capacity(text.len() + 8);
    for c in text.chars() {
        if obeyed(c) {
            out.extend(c.escape_unicode())
        } else {
            out.push(c)
        }
    }
    Cow::Owned(out)
}

/// Breaks a sentence at blanks so that no line is longer than `width` characters; later lines are
/// set in by two blanks.
pub fn wrap(text: &str, width: usize) -> String {
    let mut out = String::with_capacity(text.len() + 16);
    let mut column = 0;
    for word in text.split_whitespace() {
        let length = word.chars().count();
        if column > 0 && column + 1 + length > width {
            out.push_str("\n  ");
            column = 2;
        } else if column > 0 {
            out.push(' ');
            column += 1;
        }
        out.push_str(word);
        column += length;
    }
    out
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn escapes_what_a_terminal_obeys() {
        assert_eq!(safe("Fe\u{1b}[31m"), "Fe\\u{1b}[31m");
        assert_eq!(safe("1s 2p ³P°"), "1s 2p ³P°");
    }

    #[test]
    fn wraps_at_blanks() {
        assert_eq!(wrap("one two three", 8), "one two\n  three");
        assert_eq!(wrap("", 8), "");
    }
}
