//! The elements, Z = 1–118, from the bundled table `data/elements/elements.csv`.

use std::sync::OnceLock;

/// What the standard mass of an element stands for.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum MassKind {
    /// The standard atomic mass, with its uncertainty.
    Standard,
    /// The conventional value of a standard mass that is an interval (H, Li, C …).
    Conventional,
    /// The longest-lived isotope of an element that has no standard mass.
    LongestLived,
}

/// One element.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Element {
    /// Nuclear charge Z, 1–118.
    pub atomic_number: u8,
    /// Symbol, `Fe`.
    pub symbol: &'static str,
    /// Name in IUPAC spelling with a capital, `Iron`.
    pub name: &'static str,
    /// Mass of the neutral atom in the natural mixture, u.
    pub mass_u: f64,
    /// Uncertainty of the mass as the standard states it, u; `None` where it states none.
    pub mass_uncertainty_u: Option<f64>,
    /// What the mass stands for.
    pub mass_kind: MassKind,
}

const TABLE: &str = include_str!("../../../data/elements/elements.csv");

/// All elements in order of Z. The first call reads the bundled table (118 rows).
pub fn elements() -> &'static [Element] {
    static ELEMENTS: OnceLock<Vec<Element>> = OnceLock::new();
    ELEMENTS.get_or_init(|| TABLE.lines().skip(1).filter_map(read_row).collect())
}

/// The element with this Z; `None` outside 1–118.
pub fn element(atomic_number: u8) -> Option<&'static Element> {
    elements().get(usize::from(atomic_number).checked_sub(1)?)
}

/// The element with exactly this symbol, upper and lower case as the trade writes it.
pub fn element_by_symbol(symbol: &str) -> Option<&'static Element> {
    elements().iter().find(|e| e.symbol == symbol)
}

fn read_row(row: &'static str) -> Option<Element> {
    let mut fields = row.split(',');
    Some(Element {
        atomic_number: fields.next()?.parse().ok()?,
        symbol: fields.next()?,
        name: fields.next()?,
        mass_u: fields.next()?.parse().ok()?,
        mass_uncertainty_u: fields.next()?.parse().ok(),
        mass_kind: match fields.next()? {
            "standard" => MassKind::Standard,
            "conventional" => MassKind::Conventional,
            "longest-lived" => MassKind::LongestLived,
            _ => return None,
        },
    })
}

/// Symbols of natural elements (Z ≤ 94) that somebody may have meant by `text`: the one whose name
/// it is, else all that begin with the same letter, in alphabetical order.
pub(super) fn similar_symbols(text: &str) -> Vec<&'static str> {
    let named = elements()
        .iter()
        .find(|e| e.name.eq_ignore_ascii_case(text));
    if let Some(element) = named {
        return vec![element.symbol];
    }
    let Some(first) = text.chars().next() else {
        return Vec::new();
    };
    let mut symbols: Vec<_> = elements()
        .iter()
        .filter(|e| e.atomic_number <= 94)
        .filter(|e| e.symbol.starts_with(first.to_ascii_uppercase()))
        .map(|e| e.symbol)
        .collect();
    symbols.sort_unstable();
    symbols
}
