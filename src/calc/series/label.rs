//! Configurations: which electron is outermost, and what core it leaves.

use super::orbital_number;

/// The outermost electron of a configuration and the core inside it.
#[derive(Clone, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub struct OuterElectron {
    /// The core: shells and parent terms, separated by blanks; empty for a bare `3p`.
    pub core: String,
    /// Principal quantum number.
    pub n: u32,
    /// Orbital angular momentum.
    pub l: u32,
    /// Electrons in the outermost shell, this one included: 1 for a true Rydberg electron.
    pub occupancy: u32,
}

/// Reads the outermost electron of `1s 2p`, `3d6 (5D) 4s`, `5p5 (2P<3/2>) 6s`, `4s2`…
///
/// Shells are separated by blanks, parents stand in parentheses. `None` when the text has no
/// shell at its end (a coupling term such as `4s 4p (3Po)`, a jj shell, an empty label).
/// A shell of q > 1 electrons gives the core that is left when one of them is taken away.
pub fn outer_electron(configuration: &str) -> Option<OuterElectron> {
    let mut tokens: Vec<&str> = configuration.split_whitespace().collect();
    let (n, l, occupancy) = shell(tokens.pop()?)?;
    if occupancy == 0 || occupancy > 4 * l + 2 || l >= n {
        return None;
    }
    let mut core = tokens.join(" ");
    if occupancy > 1 {
        if !core.is_empty() {
            core.push(' ');
        }
        core.push_str(&shell_text(n, l, occupancy - 1));
    }
    Some(OuterElectron {
        core,
        n,
        l,
        occupancy,
    })
}

fn shell_text(n: u32, l: u32, occupancy: u32) -> String {
    let letter = super::orbital_letter(l).unwrap_or('?');
    match occupancy {
        1 => format!("{n}{letter}"),
        _ => format!("{n}{letter}{occupancy}"),
    }
}

/// Principal quantum number, l and occupancy of a shell: `3d6` → (3, 2, 6); `None` for anything else.
pub fn shell(token: &str) -> Option<(u32, u32, u32)> {
    let letter_at = token.find(|c: char| !c.is_ascii_digit())?;
    let letter = token[letter_at..].chars().next()?;
    let n = token[..letter_at].parse().ok()?;
    let l = orbital_number(letter)?;
    let count = &token[letter_at + letter.len_utf8()..];
    let occupancy = if count.is_empty() {
        1
    } else {
        count.parse().ok()?
    };
    Some((n, l, occupancy))
}

/// Parent terms of a core, in order: `3d6 (5D) 4s (6D)` → `["5D", "6D"]`.
pub fn parents(core: &str) -> Vec<&str> {
    core.split_whitespace()
        .filter_map(|token| token.strip_prefix('(')?.strip_suffix(')'))
        .collect()
}

/// Shells of a configuration without parents, full inner shells left as they stand.
pub(super) fn shells(configuration: &str) -> Vec<(u32, u32, u32)> {
    configuration.split_whitespace().filter_map(shell).collect()
}

/// A term without the letter that numbers it: `a 5D` → `5D`, `z6Fo` → `6Fo`.
pub fn bare_term(term: &str) -> &str {
    let trimmed = term.trim();
    let mut characters = trimmed.chars();
    match characters.next() {
        Some(first) if first.is_ascii_lowercase() => characters.as_str().trim_start(),
        _ => trimmed,
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn read(text: &str) -> (String, u32, u32, u32) {
        let outer = outer_electron(text).unwrap();
        (outer.core, outer.n, outer.l, outer.occupancy)
    }

    #[test]
    fn cores_and_outer_electrons() {
        // Labels as the trade writes them: common practice.
        assert_eq!(read("1s 2p"), ("1s".into(), 2, 1, 1));
        assert_eq!(read("3d6 (5D) 4s"), ("3d6 (5D)".into(), 4, 0, 1));
        assert_eq!(read("5p5 (2P<3/2>) 6s"), ("5p5 (2P<3/2>)".into(), 6, 0, 1));
        assert_eq!(read("4s2"), ("4s".into(), 4, 0, 2));
        assert_eq!(read("2s2 2p4"), ("2s2 2p3".into(), 2, 1, 4));
        assert_eq!(read("3d9 4s (3D) 5s"), ("3d9 4s (3D)".into(), 5, 0, 1));
        assert_eq!(read("12p"), (String::new(), 12, 1, 1));
        assert_eq!(parents("3d6 (5D) 4s (6D)"), ["5D", "6D"]);
    }

    #[test]
    fn what_is_no_outer_shell() {
        for text in [
            "",
            "3d7 (4F) 4s 4p (3Po)",
            "4f7 (8So7/2) 6p1/2",
            "odd",
            "2d",
            "1s3",
            "(3P)",
        ] {
            assert_eq!(outer_electron(text), None, "{text}");
        }
    }

    #[test]
    fn term_prefixes() {
        assert_eq!(bare_term("a 5D"), "5D");
        assert_eq!(bare_term("z6Fo"), "6Fo");
        assert_eq!(bare_term("2[3/2]o"), "2[3/2]o");
        assert_eq!(bare_term(""), "");
    }
}
