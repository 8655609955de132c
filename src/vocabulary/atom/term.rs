//! Term symbols: LS coupling, pair (jK) coupling, jj coupling.

use std::fmt;

use super::HalfInteger;
use crate::spectrum::Parity;

/// Letters of the total orbital momentum L = 0, 1, 2 …: S P D F, then the alphabet without J, and
/// without those already used (common practice).
const L_LETTERS: &[u8] = b"SPDFGHIKLMNOQRTUVWXYZ";

/// A term symbol. Odd terms carry a trailing `o`.
#[derive(Clone, Debug, PartialEq, Eq, Hash)]
pub enum Term {
    /// LS coupling, `a 6Do`: multiplicity 2S + 1 and L.
    Ls {
        /// 2S + 1, at least 1.
        multiplicity: u8,
        /// L.
        l: u8,
        /// Odd parity.
        odd: bool,
        /// The letter that numbers terms of one kind (`a`, `z`), where the source gives one.
        prefix: Option<char>,
    },
    /// Pair coupling, `2[3/2]o`: K = momentum of the core + l of the outer electrons, whose spin
    /// couples last.
    PairCoupling {
        /// K.
        k: HalfInteger,
        /// The number before the bracket: in some tables the multiplicity 2s + 1 of the outer
        /// electrons, in others the momentum of the core (`1/2[3/2]o`); `None` where none stands.
        front: Option<HalfInteger>,
        /// Odd parity.
        odd: bool,
    },
    /// jj coupling, `(2,1/2)o`: the angular momenta of core and outer electron.
    Jj {
        /// j of the core.
        core: HalfInteger,
        /// j of the outer electron.
        outer: HalfInteger,
        /// Odd parity.
        odd: bool,
    },
    /// Text that names no term of these kinds, blanks trimmed.
    Unknown(String),
}

impl Term {
    /// Reads a term; never fails: what cannot be read is `Unknown` and keeps its text.
    /// A trailing `o`, `°` or `*` marks odd parity.
    pub fn parse(text: &str) -> Self {
        let text = text.trim();
        let (body, odd) = match text.strip_suffix(['o', '°', '*']) {
            Some(body) => (body.trim_end(), true),
            None => (text, false),
        };
        read_pair(body, odd)
            .or_else(|| read_jj(body, odd))
            .or_else(|| read_ls(body, odd))
            .unwrap_or_else(|| Self::Unknown(text.to_owned()))
    }

    /// Parity that the symbol shows; `None` for text that is no term.
    pub fn parity(&self) -> Option<Parity> {
        match self {
            Self::Ls { odd, .. } | Self::PairCoupling { odd, .. } | Self::Jj { odd, .. } => {
                Some(if *odd { Parity::Odd } else { Parity::Even })
            }
            Self::Unknown(_) => None,
        }
    }

    /// All J that the term allows, lowest first: |L − S| … L + S, or |j₁ − j₂| … j₁ + j₂. In pair
    /// coupling K ± ½, and where the number before the bracket can be a multiplicity 2s + 1 also
    /// |K − s| … K + s. Empty for text that is no term.
    pub fn allowed_j(&self) -> Vec<HalfInteger> {
        match *self {
            Self::Ls {
                multiplicity, l, ..
            } => coupled(2 * u16::from(l), u16::from(multiplicity) - 1),
            Self::PairCoupling { k, front, .. } => {
                let mut allowed = coupled(k.twice(), 1);
                if let Some(twice_spin) = front.and_then(multiplicity_less_one) {
                    allowed.extend(coupled(k.twice(), twice_spin));
                    allowed.sort_unstable();
                    allowed.dedup();
                }
                allowed
            }
            Self::Jj { core, outer, .. } => coupled(core.twice(), outer.twice()),
            Self::Unknown(_) => Vec::new(),
        }
    }
}

/// All momenta from |a − b| to a + b in whole steps; arguments are twice the momenta.
fn coupled(twice_a: u16, twice_b: u16) -> Vec<HalfInteger> {
    (twice_a.abs_diff(twice_b)..=twice_a.saturating_add(twice_b))
        .step_by(2)
        .map(HalfInteger::from_twice)
        .collect()
}

/// Twice the spin of a multiplicity: a whole number above 0, less one.
fn multiplicity_less_one(front: HalfInteger) -> Option<u16> {
    let whole = front.twice().is_multiple_of(2);
    (whole && front.twice() > 0).then(|| front.twice() / 2 - 1)
}

/// `6D`, `a 6D`, `z7D` (multiplicity, letter), blanks optional.
fn read_ls(body: &str, odd: bool) -> Option<Term> {
    let mut rest = body;
    let mut prefix = None;
    if let Some(letter) = rest.chars().next().filter(char::is_ascii_lowercase) {
        prefix = Some(letter);
        rest = rest[1..].trim_start();
    }
    let letter_at = rest.find(|c: char| !c.is_ascii_digit())?;
    let (digits, letter) = rest.split_at(letter_at);
    let multiplicity: u8 = digits.parse().ok().filter(|&m| m > 0)?;
    let &[letter] = letter.as_bytes() else {
        return None;
    };
    let l = L_LETTERS.iter().position(|&known| known == letter)?;
    Some(Term::Ls {
        multiplicity,
        l: u8::try_from(l).ok()?,
        odd,
        prefix,
    })
}

/// `2[3/2]`, `[3/2]`, `1/2[3/2]` or `0[2]`.
fn read_pair(body: &str, odd: bool) -> Option<Term> {
    let (front, rest) = body.split_once('[')?;
    let k = HalfInteger::parse(rest.strip_suffix(']')?)?;
    let front = match front.trim() {
        "" => None,
        front => Some(HalfInteger::parse(front)?),
    };
    Some(Term::PairCoupling { k, front, odd })
}

/// `(2,1/2)`.
fn read_jj(body: &str, odd: bool) -> Option<Term> {
    let inner = body.strip_prefix('(')?.strip_suffix(')')?;
    let (core, outer) = inner.split_once(',')?;
    Some(Term::Jj {
        core: HalfInteger::parse(core)?,
        outer: HalfInteger::parse(outer)?,
        odd,
    })
}

/// The catalogue's spelling: `a 6D`, `3Po`, `2[3/2]o`, `(2,1/2)o`.
impl fmt::Display for Term {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let mark = |odd: &bool| if *odd { "o" } else { "" };
        match self {
            Self::Ls {
                multiplicity,
                l,
                odd,
                prefix,
            } => {
                if let Some(prefix) = prefix {
                    write!(f, "{prefix} ")?;
                }
                let letter = L_LETTERS.get(usize::from(*l)).copied().unwrap_or(b'?');
                write!(f, "{multiplicity}{}{}", char::from(letter), mark(odd))
            }
            Self::PairCoupling { k, front, odd } => {
                if let Some(front) = front {
                    write!(f, "{front}")?;
                }
                write!(f, "[{k}]{}", mark(odd))
            }
            Self::Jj { core, outer, odd } => write!(f, "({core},{outer}){}", mark(odd)),
            Self::Unknown(text) => f.write_str(text),
        }
    }
}
