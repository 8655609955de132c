//! When do two sources mean the same configuration and term?

use std::sync::Arc;

use vocabulary::atom::Species;

/// Configuration and term of a level as a source writes them, with the forms that are compared.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Label {
    /// As written, shells separated by blanks.
    pub configuration: Option<Arc<str>>,
    /// As written, trailing `o` for odd parity.
    pub term: Option<Arc<str>>,
}

/// How two labels stand to each other.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Agreement {
    /// Same term, compatible configuration.
    Same,
    /// One side says too little to tell.
    Unknown,
    /// Named otherwise, as happens to mixed levels.
    Otherwise,
    /// Another term of the same configuration: another level, unless the energies are the same to
    /// within one σ and nothing else is near (sources then disagree about the name alone).
    OtherTerm,
    /// They mean different levels: another parity.
    Different,
}

impl Label {
    /// Compares two labels of one species.
    pub fn agreement(&self, other: &Label, species: Species) -> Agreement {
        let configurations = both(&self.configuration, &other.configuration)
            .map(|(a, b)| shells_agree(&shells(a), &shells(b)));
        if species.is_one_electron() && configurations == Some(true) {
            return Agreement::Same;
        }
        let terms = both(&self.term, &other.term).map(|(a, b)| (bare_term(a), bare_term(b)));
        let parities = both(&self.odd(), &other.odd()).map(|(a, b)| a == b);
        if parities == Some(false) {
            return Agreement::Different;
        }
        match (configurations, terms) {
            (Some(true), Some((a, b))) if a == b => Agreement::Same,
            (Some(true), Some((a, b))) if is_ls(a) && is_ls(b) => Agreement::OtherTerm,
            (Some(true), None) | (None, Some(_)) | (None, None) => Agreement::Unknown,
            _ => Agreement::Otherwise,
        }
    }

    /// Whether both name the same multiplet, letter by letter after normalisation.
    pub fn same_multiplet(&self, other: &Label) -> bool {
        let (Some((c1, c2)), Some((t1, t2))) = (
            both(&self.configuration, &other.configuration),
            both(&self.term, &other.term),
        ) else {
            return false;
        };
        bare_term(t1) == bare_term(t2) && shells_agree(&shells(c1), &shells(c2))
    }

    /// Whether both name the same configuration, parents and inner shells aside.
    pub fn same_configuration(&self, other: &Label) -> bool {
        both(&self.configuration, &other.configuration)
            .is_some_and(|(a, b)| shells_agree(&shells(a), &shells(b)))
    }

    /// Whether the label says nothing.
    pub fn is_empty(&self) -> bool {
        self.configuration.is_none() && self.term.is_none()
    }

    /// Odd parity, as the term or else the configuration tells it.
    pub fn odd(&self) -> Option<bool> {
        if let Some(term) = &self.term
            && !bare_term(term).is_empty()
        {
            return Some(bare_term(term).ends_with('o'));
        }
        parity_of_shells(&shells(self.configuration.as_deref()?))
    }
}

fn both<'a, T>(a: &'a Option<T>, b: &'a Option<T>) -> Option<(&'a T, &'a T)> {
    a.as_ref().zip(b.as_ref())
}

/// A term without the letter that numbers terms of a kind (`a 6D` → `6D`).
fn bare_term(term: &str) -> &str {
    let term = term.trim();
    match term.split_once(' ') {
        Some((prefix, rest)) if prefix.chars().all(char::is_alphabetic) => rest.trim(),
        _ => term,
    }
}

fn is_ls(term: &str) -> bool {
    let mut letters = term.chars();
    letters.next().is_some_and(|c| c.is_ascii_digit())
        && letters.next().is_some_and(|c| c.is_ascii_uppercase())
}

/// Shells of a configuration without parents: `3d6 (5D) 4s` → `3d6`, `4s`; `4s2.4p` likewise.
fn shells(configuration: &str) -> Vec<String> {
    let mut out: Vec<String> = Vec::new();
    let mut depth = 0;
    let mut current = String::new();
    for c in configuration.chars() {
        match c {
            '(' | '<' | '[' => depth += 1,
            ')' | '>' | ']' => depth -= 1,
            ' ' | '.' | '\'' if depth == 0 => {
                out.push(std::mem::take(&mut current));
                continue;
            }
            c if depth == 0 => current.push(c),
            _ => {}
        }
        if depth > 0 && !current.is_empty() {
            out.push(std::mem::take(&mut current));
        }
    }
    out.push(current);
    out.retain(|s| !s.is_empty());
    out
}

/// One list names the other's last shells: sources differ in how much of the core they print.
fn shells_agree(a: &[String], b: &[String]) -> bool {
    let n = a.len().min(b.len());
    n > 0 && a[a.len() - n..] == b[b.len() - n..]
}

/// Sum of l over the electrons that are named; closed shells do not matter.
fn parity_of_shells(shells: &[String]) -> Option<bool> {
    let mut sum = 0u32;
    for shell in shells {
        let letter = shell.find(|c: char| c.is_ascii_lowercase())?;
        let l = "spdfghiklmnoqrtuv".find(shell[letter..].chars().next()?)?;
        let electrons: u32 = match &shell[letter + 1..] {
            "" => 1,
            digits => digits.parse().ok()?,
        };
        sum += u32::try_from(l).ok()? * electrons;
    }
    (!shells.is_empty()).then_some(sum % 2 == 1)
}

#[cfg(test)]
mod tests {
    use super::*;

    fn label(configuration: &str, term: &str) -> Label {
        let text = |t: &str| (!t.is_empty()).then(|| Arc::from(t));
        Label {
            configuration: text(configuration),
            term: text(term),
        }
    }

    const FE_II: Species = Species::new(26, 2);

    #[test]
    fn parents_cores_and_prefixes_do_not_part_labels() {
        let a = label("3d6 (5D) 4s", "a 6D");
        assert_eq!(a.agreement(&label("3d6 4s", "6D"), FE_II), Agreement::Same);
        let al = label("3s2 3p", "2Po");
        assert_eq!(
            al.agreement(&label("3p", "2Po"), Species::new(13, 1)),
            Agreement::Same
        );
    }

    #[test]
    fn another_term_of_the_same_configuration_is_another_level() {
        let a = label("1s 4f", "3Fo");
        assert_eq!(
            a.agreement(&label("1s 4f", "1Fo"), Species::new(2, 1)),
            Agreement::OtherTerm
        );
    }

    #[test]
    fn another_parity_is_another_level_and_a_mixed_name_is_not() {
        let a = label("3d6 4p", "z 4Fo");
        assert_eq!(
            a.agreement(&label("3d7", "4F"), FE_II),
            Agreement::Different
        );
        assert_eq!(
            a.agreement(&label("3d5 4s 4p", "z 4Do"), FE_II),
            Agreement::Otherwise
        );
        assert_eq!(a.agreement(&Label::default(), FE_II), Agreement::Unknown);
    }

    #[test]
    fn one_electron_levels_go_by_shell() {
        let a = label("4f", "2Fo");
        assert_eq!(
            a.agreement(&label("4f", ""), Species::new(1, 1)),
            Agreement::Same
        );
    }

    #[test]
    fn parity_follows_from_shells_where_no_term_is_given() {
        assert_eq!(label("3d6 (5D) 4p", "").odd(), Some(true));
        assert_eq!(label("2p4", "").odd(), Some(false));
        assert_eq!(label("", "2[3/2]o").odd(), Some(true));
        assert_eq!(label("", "").odd(), None);
    }
}
