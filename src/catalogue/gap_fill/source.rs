//! The computed sources in the catalogue: title, citation, notes, claims.

use std::collections::BTreeSet;
use std::sync::Arc;

use rusqlite::{Connection, OptionalExtension, params};
use vocabulary::atom::Species;

use super::{REVISION, one_electron, scope};
use crate::catalogue::reconcile::{RankedSource, SourceKind};

/// A source whose reports are made by calculation.
pub(super) struct ComputedSource {
    key: &'static str,
    title: &'static str,
    citation: &'static str,
    notes: &'static [&'static str],
}

/// Levels and lines of one electron and a nucleus.
pub(super) const ONE_ELECTRON: ComputedSource = ComputedSource {
    key: "computed-one-electron",
    title: "One electron and a nucleus, computed",
    citation: "Mohr & Taylor 2000, Rev. Mod. Phys. 72, 351; Tiesinga et al. 2021, Rev. Mod. Phys. 93, \
               025010; rates: Bethe & Salpeter 1957, Quantum Mechanics of One- and Two-Electron Atoms",
    notes: &[
        "computed, not measured: Dirac energies with recoil, radiative and nuclear-size terms; the uncertainty of each line is its own",
        "all fine-structure lines to upper n = 20 for nuclear charges up to 8, to n = 10 for charges up to 30",
        "rates are nonrelativistic electric-dipole rates with a relative uncertainty of 1.5 (Zα)²",
    ],
};

/// Levels of regular series, and rates by the Coulomb approximation.
pub(super) const SERIES: ComputedSource = ComputedSource {
    key: "computed-series",
    title: "Rydberg series and Coulomb-approximation rates, computed",
    citation: "Ritz 1903, Phys. Z. 4, 406; Drake & Swainson 1991, Phys. Rev. A 44, 5448; rates: Bates & Damgaard \
               1949, Phil. Trans. R. Soc. A 242, 101",
    notes: &[
        "computed, not measured: levels to n = 20 of series whose quantum defects are regular, fitted to the levels that tables hold; series with l from 3 to 6 outside a closed shell from the polarisation of the core",
        "rates of one electron outside its core in LS coupling, for lines that no table rates or lists; those uncertain by more than a factor e are left out",
        "the uncertainties were tuned on one half of published levels and rates and judged on the other half",
    ],
};

const ALL: [&ComputedSource; 2] = [&ONE_ELECTRON, &SERIES];

/// Whether a key belongs to the calculator.
pub fn is_ours(key: &str) -> bool {
    ALL.iter().any(|source| source.key == key)
}

/// A computed source as the rule needs it, where the catalogue holds it.
pub(super) fn ranked(
    connection: &Connection,
    source: &ComputedSource,
) -> rusqlite::Result<Option<RankedSource>> {
    let id: Option<i64> = connection
        .prepare_cached("SELECT id FROM source WHERE key = ?1 AND bundled AND kind = 'computed'")?
        .query_row([source.key], |row| row.get(0))
        .optional()?;
    Ok(id.map(|id| RankedSource {
        id,
        key: Arc::from(source.key),
        kind: SourceKind::Computed,
        scale_per_cm: 0.0,
        scale_relative: 0.0,
    }))
}

/// Puts the computed sources in, or brings them up to this program's; the species that have to be
/// derived for it, none where all was there.
pub fn install(connection: &Connection) -> rusqlite::Result<BTreeSet<i64>> {
    let mut current = true;
    for source in ALL {
        current &= is_current(connection, source)?;
    }
    if current {
        return Ok(BTreeSet::new());
    }
    for source in ALL {
        put(connection, source)?;
    }
    claim(connection)?;
    let mut species: BTreeSet<i64> = one_electron::species().map(Species::code).collect();
    let mut select = connection.prepare(
        "SELECT DISTINCT species FROM level_report
          UNION SELECT DISTINCT species FROM line_report",
    )?;
    for code in select.query_map([], |row| row.get(0))? {
        species.insert(code?);
    }
    Ok(species)
}

fn is_current(connection: &Connection, source: &ComputedSource) -> rusqlite::Result<bool> {
    connection.query_row(
        "SELECT count(*) FROM source WHERE key = ?1 AND checksum = ?2",
        [source.key, REVISION],
        |row| Ok(row.get::<_, i64>(0)? == 1),
    )
}

fn put(connection: &Connection, source: &ComputedSource) -> rusqlite::Result<()> {
    connection.execute(
        "INSERT INTO source (key, title, citation, licence, kind, notes, checksum, bundled,
                             level_scale_uncertainty_per_cm, level_scale_uncertainty_relative,
                             rows_read, rows_refused)
         VALUES (?1, ?2, ?3, 'CC0-1.0', 'computed', ?4, ?5, 1, 0, 0, 0, 0)
             ON CONFLICT (key) DO UPDATE
            SET title = excluded.title, citation = excluded.citation, notes = excluded.notes,
                checksum = excluded.checksum",
        params![
            source.key,
            source.title,
            source.citation,
            serde_json::Value::from(source.notes.to_vec()).to_string(),
            REVISION,
        ],
    )?;
    Ok(())
}

/// Writes what the one-electron source claims to cover.
fn claim(connection: &Connection) -> rusqlite::Result<()> {
    let Some(source) = ranked(connection, &ONE_ELECTRON)? else {
        return Ok(());
    };
    connection.execute("DELETE FROM scope WHERE source = ?1", [source.id])?;
    let mut insert = connection.prepare_cached(
        "INSERT OR REPLACE INTO scope (species, source, from_nm, to_nm, completeness)
         VALUES (?1, ?2, ?3, ?4, ?5)",
    )?;
    for species in one_electron::species() {
        for claim in scope::claims(species) {
            let word = claim.completeness.word();
            let (from, to) = (claim.from_nm, claim.to_nm);
            insert.execute(params![species.code(), source.id, from, to, word])?;
        }
    }
    Ok(())
}
