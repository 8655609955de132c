//! Electron configurations as level tables print them: `3d6 (5D) 4s`, `1s 2p`, `2s2(1S)2p`.

use std::fmt;

use super::HalfInteger;
use crate::spectrum::Parity;

/// Letters of a single electron's l = 0, 1, 2 …: s p d f, then the alphabet without j, and without
/// those already used (common practice).
const ORBITAL_LETTERS: &[u8] = b"spdfghiklmnoqrtuvwxyz";

/// Letter of l = 0–20; `None` beyond.
pub fn orbital_letter(l: u8) -> Option<char> {
    ORBITAL_LETTERS
        .get(usize::from(l))
        .map(|&letter| char::from(letter))
}

/// The l of a letter; `None` for one that names none.
pub fn orbital_number(letter: char) -> Option<u8> {
    let at = ORBITAL_LETTERS
        .iter()
        .position(|&known| char::from(known) == letter)?;
    u8::try_from(at).ok()
}

/// One shell: `3d6`.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub struct Shell {
    /// Principal quantum number, above l.
    pub n: u16,
    /// Orbital momentum.
    pub l: u8,
    /// Electrons in it, 1 to 4 l + 2.
    pub electrons: u8,
    /// Momentum j = l ± ½ of its one electron, where a table of jj coupling gives it: `6p3/2`.
    pub j: Option<HalfInteger>,
}

impl fmt::Display for Shell {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let letter = orbital_letter(self.l).unwrap_or('?');
        write!(f, "{}{letter}", self.n)?;
        match (self.electrons, self.j) {
            (1, None) => Ok(()),
            (_, Some(j)) => write!(f, "{j}"),
            (electrons, None) => write!(f, "{electrons}"),
        }
    }
}

/// A part of a configuration: a shell, or the term of the electrons before it.
#[derive(Clone, Debug, PartialEq, Eq, Hash)]
enum Part {
    Shell(Shell),
    Parent(String),
}

/// A configuration: shells, and parent terms in parentheses.
#[derive(Clone, Debug, PartialEq, Eq, Hash)]
pub struct Configuration {
    parts: Vec<Part>,
}

/// The electron that stands last in a configuration, and what is left without it.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct OuterElectron {
    /// Everything else, in the catalogue's spelling; empty for hydrogen.
    pub core: String,
    /// Its principal quantum number.
    pub n: u16,
    /// Its orbital momentum.
    pub l: u8,
    /// Electrons in its shell, itself included.
    pub electrons: u8,
}

impl Configuration {
    /// Reads a configuration with or without blanks (or points) between shells. Digits between two
    /// letters (`2s22p2`) are split so that the first shell takes as many as it can hold. `None`
    /// for text with anything else in it, without a shell, or with an impossible shell.
    pub fn parse(text: &str) -> Option<Self> {
        let mut parts = Vec::new();
        let mut rest = text.trim();
        while !rest.is_empty() {
            let (part, after) = match rest.strip_prefix('(') {
                Some(inner) => read_parent(inner)?,
                None => read_shell(rest)?,
            };
            parts.push(part);
            rest = after.trim_start_matches([' ', '.']);
        }
        let sound = parts.iter().any(|part| matches!(part, Part::Shell(_)));
        sound.then_some(Self { parts })
    }

    /// The shells in the order in which they stand.
    pub fn shells(&self) -> impl Iterator<Item = Shell> {
        self.parts.iter().filter_map(|part| match part {
            Part::Shell(shell) => Some(*shell),
            Part::Parent(_) => None,
        })
    }

    /// Parity: odd where the sum of l over all electrons is odd. Closed shells that a table leaves
    /// out do not matter, for they are even.
    pub fn parity(&self) -> Parity {
        let sum: u32 = self
            .shells()
            .map(|shell| u32::from(shell.l) * u32::from(shell.electrons))
            .sum();
        if sum.is_multiple_of(2) {
            Parity::Even
        } else {
            Parity::Odd
        }
    }

    /// The electron that stands last: of `3d6 (5D) 4s` the 4s, of `2s2 2p2` one 2p.
    pub fn outer_electron(&self) -> Option<OuterElectron> {
        let at = self
            .parts
            .iter()
            .rposition(|part| matches!(part, Part::Shell(_)))?;
        let Part::Shell(shell) = self.parts[at] else {
            return None;
        };
        let mut core = self.parts[..at].to_vec();
        if shell.electrons > 1 {
            core.push(Part::Shell(Shell {
                electrons: shell.electrons - 1,
                ..shell
            }));
        }
        Some(OuterElectron {
            core: Self { parts: core }.to_string(),
            n: shell.n,
            l: shell.l,
            electrons: shell.electrons,
        })
    }
}

/// The catalogue's spelling: parts separated by blanks.
impl fmt::Display for Configuration {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        for (index, part) in self.parts.iter().enumerate() {
            if index > 0 {
                f.write_str(" ")?;
            }
            match part {
                Part::Shell(shell) => write!(f, "{shell}")?,
                Part::Parent(term) => write!(f, "({term})")?,
            }
        }
        Ok(())
    }
}

fn read_parent(inner: &str) -> Option<(Part, &str)> {
    let (term, after) = inner.split_once(')')?;
    let term = term.trim();
    let sound = !term.is_empty() && !term.contains('(');
    sound.then(|| (Part::Parent(term.to_owned()), after))
}

fn read_shell(text: &str) -> Option<(Part, &str)> {
    let (n_digits, rest) = split_digits(text);
    let n: u16 = n_digits.parse().ok()?;
    let letter = rest.chars().next()?;
    let l = orbital_number(letter)?;
    let rest = &rest[letter.len_utf8()..];
    let (electrons, j, after) = match read_momentum(rest, l) {
        Some((j, after)) => (1, Some(j), after),
        None => {
            let (electrons, after) = read_occupation(rest, l)?;
            (electrons, None, after)
        }
    };
    let possible = n > u16::from(l) && (1..=4 * l + 2).contains(&electrons);
    let shell = Shell { n, l, electrons, j };
    possible.then_some((Part::Shell(shell), after))
}

/// `3/2` behind the letter of a shell: the momentum of its one electron.
fn read_momentum(rest: &str, l: u8) -> Option<(HalfInteger, &str)> {
    let (digits, after) = split_digits(rest);
    let after = after.strip_prefix("/2")?;
    let twice: u16 = digits.parse().ok()?;
    let sound = twice.abs_diff(2 * u16::from(l)) == 1;
    sound.then(|| (HalfInteger::from_twice(twice), after))
}

/// The number of electrons behind the letter of a shell; none means one.
fn read_occupation(rest: &str, l: u8) -> Option<(u8, &str)> {
    let (digits, after) = split_digits(rest);
    let taken = if after.starts_with(|c: char| orbital_number(c).is_some()) {
        occupation_before_shell(digits, after, l)?
    } else {
        digits.len()
    };
    let electrons = match &digits[..taken] {
        "" => 1,
        count => count.parse().ok()?,
    };
    Some((electrons, &rest[taken..]))
}

fn split_digits(text: &str) -> (&str, &str) {
    let end = text.find(|c: char| !c.is_ascii_digit());
    text.split_at(end.unwrap_or(text.len()))
}

/// How many of the digits between two letters belong to the first shell: as many as it can hold
/// and the next shell's n can spare.
fn occupation_before_shell(digits: &str, after: &str, l: u8) -> Option<usize> {
    let next_l = u16::from(orbital_number(after.chars().next()?)?);
    let fits = |&taken: &usize| {
        let (count, n) = digits.split_at(taken);
        let held = count
            .parse::<u8>()
            .is_ok_and(|count| (1..=4 * l + 2).contains(&count));
        let next = !n.starts_with('0') && n.parse::<u16>().is_ok_and(|n| n > next_l);
        (taken == 0 || held) && next
    };
    (0..digits.len()).rev().find(fits)
}
