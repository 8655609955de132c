//! Unit symbols and prefixes, exact where the SI is exact (SI brochure, 9th edition; CODATA 2022).

use vocabulary::light::constants::{
    ATOMIC_MASS_UNIT_KG, ELEMENTARY_CHARGE_C, PLANCK_J_S, RYDBERG_PER_CM, SPEED_OF_LIGHT_M_PER_S,
};

use super::{Dialect, Dimension, Unit};

/// Energy of 1 Ry, J.
const RYDBERG_J: f64 = RYDBERG_PER_CM * 100.0 * PLANCK_J_S * SPEED_OF_LIGHT_M_PER_S;

/// Symbol, coefficient, power of ten, dimension, whether it takes prefixes.
type Symbol = (&'static str, f64, i32, Dimension, bool);

const ENERGY: Dimension = [2, 1, -2, 0, 0, 0, 0];
const NONE: Dimension = [0; 7];
const LENGTH: Dimension = [1, 0, 0, 0, 0, 0, 0];
const TIME: Dimension = [0, 0, 1, 0, 0, 0, 0];
const PER_TIME: Dimension = [0, 0, -1, 0, 0, 0, 0];

const SYMBOLS: [Symbol; 37] = [
    ("m", 1.0, 0, LENGTH, true),
    ("g", 1.0, -3, [0, 1, 0, 0, 0, 0, 0], true),
    ("s", 1.0, 0, TIME, true),
    ("K", 1.0, 0, [0, 0, 0, 0, 1, 0, 0], true),
    ("mol", 1.0, 0, [0, 0, 0, 0, 0, 1, 0], true),
    ("cd", 1.0, 0, [0, 0, 0, 0, 0, 0, 1], true),
    ("Hz", 1.0, 0, PER_TIME, true),
    ("N", 1.0, 0, [1, 1, -2, 0, 0, 0, 0], true),
    ("Pa", 1.0, 0, [-1, 1, -2, 0, 0, 0, 0], true),
    ("J", 1.0, 0, ENERGY, true),
    ("W", 1.0, 0, [2, 1, -3, 0, 0, 0, 0], true),
    ("C", 1.0, 0, [0, 0, 1, 1, 0, 0, 0], true),
    ("V", 1.0, 0, [2, 1, -3, -1, 0, 0, 0], true),
    ("T", 1.0, 0, [0, 1, -2, -1, 0, 0, 0], true),
    ("eV", ELEMENTARY_CHARGE_C * 1e19, -19, ENERGY, true),
    ("erg", 1.0, -7, ENERGY, false),
    ("cal", 4.184, 0, ENERGY, true),
    ("Ry", RYDBERG_J * 1e18, -18, ENERGY, false),
    ("Ryd", RYDBERG_J * 1e18, -18, ENERGY, false),
    ("hartree", 2.0 * RYDBERG_J * 1e18, -18, ENERGY, false),
    ("Ha", 2.0 * RYDBERG_J * 1e18, -18, ENERGY, false),
    ("Angstrom", 1.0, -10, LENGTH, false),
    ("Angstroem", 1.0, -10, LENGTH, false),
    ("angstrom", 1.0, -10, LENGTH, false),
    ("Å", 1.0, -10, LENGTH, false),
    ("micron", 1.0, -6, LENGTH, false),
    (
        "u",
        ATOMIC_MASS_UNIT_KG * 1e27,
        -27,
        [0, 1, 0, 0, 0, 0, 0],
        false,
    ),
    ("rad", 1.0, 0, NONE, true),
    ("sr", 1.0, 0, NONE, true),
    ("min", 60.0, 0, TIME, false),
    ("h", 3600.0, 0, TIME, false),
    ("d", 86_400.0, 0, TIME, false),
    ("yr", 31_557_600.0, 0, TIME, true),
    ("%", 1.0, -2, NONE, false),
    ("pct", 1.0, -2, NONE, false),
    ("ct", 1.0, 0, NONE, false),
    ("unitless", 1.0, 0, NONE, false),
];

const AMPERE: Symbol = ("A", 1.0, 0, [0, 0, 0, 1, 0, 0, 0], true);
const ANGSTROM: Symbol = ("A", 1.0, -10, LENGTH, false);
/// The atomic unit of energy, as one schema writes it.
const ATOMIC_ENERGY: Symbol = ("au", 2.0 * RYDBERG_J * 1e18, -18, ENERGY, false);

const PREFIXES: [(&str, i32); 22] = [
    ("da", 1),
    ("y", -24),
    ("z", -21),
    ("a", -18),
    ("f", -15),
    ("p", -12),
    ("n", -9),
    ("u", -6),
    ("µ", -6),
    ("μ", -6),
    ("m", -3),
    ("c", -2),
    ("d", -1),
    ("h", 2),
    ("k", 3),
    ("M", 6),
    ("G", 9),
    ("T", 12),
    ("P", 15),
    ("E", 18),
    ("Z", 21),
    ("Y", 24),
];

/// Finds a symbol, whole before split into prefix and symbol (`cd`, `Pa`, `min` are whole).
pub(super) fn find(text: &str, dialect: Dialect) -> Option<Unit> {
    if let Some(symbol) = whole(text, dialect) {
        return Some(unit(&symbol, 0));
    }
    PREFIXES.iter().find_map(|(prefix, exponent)| {
        let symbol = whole(text.strip_prefix(prefix)?, dialect)?;
        symbol.4.then(|| unit(&symbol, *exponent))
    })
}

fn whole(text: &str, dialect: Dialect) -> Option<Symbol> {
    match (text, dialect) {
        ("A", Dialect::Mapping | Dialect::Xsams) => Some(ANGSTROM),
        ("A", _) => Some(AMPERE),
        ("au", Dialect::Xsams) => Some(ATOMIC_ENERGY),
        _ => SYMBOLS.iter().find(|symbol| symbol.0 == text).copied(),
    }
}

fn unit(symbol: &Symbol, exponent: i32) -> Unit {
    Unit {
        coefficient: symbol.1,
        exponent: symbol.2 + exponent,
        dimension: symbol.3,
        logarithm: false,
    }
}
