//! Atomic states as levels.

use super::Owner;
use super::quantity::Quantity;
use super::tree::Tree;
use crate::number::double_text;
use crate::row::ColumnInfo;
use crate::unit::{Dialect, ToPerCm};

/// A state in the catalogue's units.
#[derive(Clone, Debug)]
pub(super) struct State {
    pub line: u64,
    pub owner: [String; 3],
    /// Energy and 1 σ, cm⁻¹, or what is wrong with it.
    pub energy: Result<Option<(f64, f64)>, String>,
    pub configuration: String,
    pub term: String,
    pub j: String,
    pub g: String,
    hyperfine: bool,
}

const LETTERS: [char; 12] = ['s', 'p', 'd', 'f', 'g', 'h', 'i', 'k', 'l', 'm', 'n', 'o'];

/// The columns of a table of levels.
pub(super) fn columns() -> Vec<ColumnInfo> {
    let names = [
        ("element", None),
        ("charge", None),
        ("isotope", None),
        ("energy", Some("cm-1")),
        ("energy_uncertainty", Some("cm-1")),
        ("configuration", None),
        ("term", None),
        ("j", None),
        ("g", None),
    ];
    names.map(|(name, unit)| column(name, unit)).to_vec()
}

/// A column under the name of its target.
pub(super) fn column(name: &str, unit: Option<&str>) -> ColumnInfo {
    ColumnInfo {
        unit: unit.map(str::to_owned),
        dialect: Dialect::Mapping,
        ..ColumnInfo::named(name)
    }
}

impl State {
    pub fn new(tree: &Tree, owner: &Owner, line: u64) -> Self {
        let numbers = ["AtomicQuantumNumbers"];
        let text = |name: &str| tree.text_at(&[numbers[0], name]).unwrap_or_default();
        let odd = text("Parity").eq_ignore_ascii_case("odd");
        let component = main_component(tree);
        Self {
            line,
            owner: [
                owner.element.clone(),
                owner.charge.clone(),
                owner.isotope.clone(),
            ],
            energy: energy(tree),
            configuration: component.and_then(configuration).unwrap_or_default(),
            term: component.and_then(|c| term(c, odd)).unwrap_or_default(),
            j: text("TotalAngularMomentum"),
            g: tree
                .text_at(&["AtomicNumericalData", "StatisticalWeight"])
                .unwrap_or_default(),
            hyperfine: !text("HyperfineMomentum").is_empty(),
        }
    }

    /// The cells of a level, or why it is none.
    pub fn cells(&self) -> Result<Vec<String>, String> {
        let mut cells = self.owner.to_vec();
        cells.extend(self.end()?);
        Ok(cells)
    }

    /// Energy, uncertainty, configuration, term, J and weight.
    pub fn end(&self) -> Result<[String; 6], String> {
        if self.hyperfine {
            return Err("a state of hyperfine structure is no level of its own".to_owned());
        }
        let (energy, sigma) = match self.energy.clone()? {
            Some((energy, sigma)) => (double_text(energy), double_text(sigma)),
            None => (String::new(), String::new()),
        };
        Ok([
            energy,
            sigma,
            self.configuration.clone(),
            self.term.clone(),
            self.j.clone(),
            self.g.clone(),
        ])
    }

    /// 2J + 1, else the stated weight.
    pub fn weight(&self) -> Option<f64> {
        let j = vocabulary::atom::HalfInteger::parse(&self.j)
            .map(vocabulary::atom::HalfInteger::weight);
        j.or_else(|| crate::number::parse(&self.g).ok().map(|g| g.value))
    }
}

fn energy(tree: &Tree) -> Result<Option<(f64, f64)>, String> {
    let Some(energy) = tree.at(&["AtomicNumericalData", "StateEnergy"]) else {
        return Ok(None);
    };
    let quantity = Quantity::read(energy)?;
    match quantity.unit.to_per_cm() {
        Some(ToPerCm::Times(factor)) => Ok(Some((
            quantity.printed.value * factor,
            quantity.uncertainty() * factor,
        ))),
        _ => Err("`StateEnergy` has no unit of energy".to_owned()),
    }
}

/// The component with the largest share.
fn main_component(tree: &Tree) -> Option<&Tree> {
    let share = |component: &Tree| {
        let text = component.text_at(&["MixingCoefficient"])?;
        crate::number::parse(&text)
            .ok()
            .map(|read| read.value.abs())
    };
    let composition = tree.at(&["AtomicComposition"])?;
    let mut best: Option<(&Tree, f64)> = None;
    for component in composition.all("Component") {
        let share = share(component).unwrap_or(0.0);
        if best.is_none_or(|(_, known)| share > known) {
            best = Some((component, share));
        }
    }
    best.map(|(component, _)| component)
}

fn configuration(component: &Tree) -> Option<String> {
    let whole = component.at(&["Configuration"])?;
    if let Some(label) = whole.text_at(&["ConfigurationLabel"]) {
        return Some(label);
    }
    let shells = whole.at(&["Shells"])?.all("Shell").map(shell);
    let shells: Option<Vec<String>> = shells.collect();
    shells
        .filter(|shells| !shells.is_empty())
        .map(|shells| shells.join(" "))
}

fn shell(shell: &Tree) -> Option<String> {
    let n = shell.text_at(&["PrincipalQuantumNumber"])?;
    let l: usize = shell
        .text_at(&["OrbitalAngularMomentum", "Value"])?
        .parse()
        .ok()?;
    let letter = LETTERS.get(l)?;
    let count = shell.text_at(&["NumberOfElectrons"]).unwrap_or_default();
    let count = count.trim_end_matches('0').trim_end_matches('.').to_owned();
    Some(format!(
        "{n}{letter}{}",
        if count == "1" { "" } else { &count }
    ))
}

fn term(component: &Tree, odd: bool) -> Option<String> {
    let term = component.at(&["Term"])?;
    let parity = if odd { "o" } else { "" };
    if let Some(ls) = term.at(&["LS"]) {
        let symbol = match ls.text_at(&["L", "Symbol"]) {
            Some(symbol) => symbol,
            None => {
                let l: usize = ls.text_at(&["L", "Value"])?.parse().ok()?;
                LETTERS.get(l)?.to_ascii_uppercase().to_string()
            }
        };
        let multiplicity = match ls.text_at(&["Multiplicity"]) {
            Some(multiplicity) => multiplicity,
            None => {
                let s = vocabulary::atom::HalfInteger::parse(&ls.text_at(&["S"])?)?;
                (s.twice() + 1).to_string()
            }
        };
        return Some(format!("{multiplicity}{symbol}{parity}"));
    }
    term.text_at(&["TermLabel"])
}
