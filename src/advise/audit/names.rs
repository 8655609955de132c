//! When do two labels name the same level?

use std::sync::Arc;

use vocabulary::report::{ConcludedLevel, ReportedLevel};

use crate::calc::series::label::bare_term;

/// Configuration and term, both given.
#[derive(Clone, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub(super) struct Name {
    /// The outermost shell; inner shells, which sources print more or less of, are left out.
    outer: String,
    /// Shell inside of it, empty where none is printed.
    next: String,
    /// Parent terms, as many as are printed.
    parents: Vec<String>,
    /// The letter that numbers terms of one kind, where there is one.
    letter: Option<char>,
    term: String,
    twice_j: u16,
}

impl Name {
    pub fn of_report(level: &ReportedLevel) -> Option<Self> {
        let j = level.j?.twice();
        Self::new(&level.configuration, &level.term, j)
    }

    pub fn of_concluded(level: &ConcludedLevel) -> Option<Self> {
        let j = level.j?.twice();
        Self::new(&level.configuration, &level.term, j)
    }

    fn new(
        configuration: &Option<Arc<str>>,
        term: &Option<Arc<str>>,
        twice_j: u16,
    ) -> Option<Self> {
        let tokens = configuration.as_deref()?.split_whitespace();
        let (parents, mut shells): (Vec<&str>, Vec<&str>) =
            tokens.partition(|token| token.starts_with('('));
        let outer = shells.pop()?.to_owned();
        let term = term.as_deref()?.trim();
        let bare = bare_term(term);
        let letter = term.chars().next().filter(|_| bare.len() < term.len());
        (!bare.is_empty()).then(|| Self {
            outer,
            next: shells.pop().unwrap_or_default().to_owned(),
            parents: parents.into_iter().map(str::to_owned).collect(),
            letter,
            term: bare.to_owned(),
            twice_j,
        })
    }

    /// What names that agree have in common, for looking them up.
    pub fn key(&self) -> (u16, String) {
        (self.twice_j, self.term.clone())
    }

    /// The same configuration and term, as far as both print it, and the same J.
    pub fn agrees(&self, other: &Self) -> bool {
        self.twice_j == other.twice_j && self.same_term(other)
    }

    /// The same configuration and term, as far as both print it.
    pub fn same_term(&self, other: &Self) -> bool {
        let next = self.next == other.next || self.next.is_empty() || other.next.is_empty();
        let parents = self.parents.len() != other.parents.len() || self.parents == other.parents;
        let letter = self.letter.zip(other.letter).is_none_or(|(a, b)| a == b);
        self.outer == other.outer && self.term == other.term && next && parents && letter
    }
}
