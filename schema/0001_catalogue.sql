-- Why: the first catalogue. Sources keep their rows as reports, never edited; levels and lines are
-- what follows from all reports of a species by one rule, and can be made anew at any time.
-- Gains: lines lie clustered by species and wavenumber, so that a window is one range read per
-- species; texts are stored once; what is missing is NULL.

-- One row a fact about this file.
CREATE TABLE about (
    name  TEXT PRIMARY KEY,  -- 'bundle': checksum of the bundled tables it was built from;
                             -- 'rule': revision of the rule that made levels and lines
    value TEXT NOT NULL
) STRICT, WITHOUT ROWID;

-- A published table.
CREATE TABLE source (
    id                               INTEGER PRIMARY KEY,
    key                              TEXT NOT NULL UNIQUE,  -- short name, shown beside values
    title                            TEXT NOT NULL,
    citation                         TEXT NOT NULL,         -- paper, handbook or measurement
    licence                          TEXT NOT NULL,         -- SPDX identifier or the words given
    kind                             TEXT NOT NULL CHECK (kind IN ('paper', 'curated', 'model', 'computed')),
    notes                            TEXT NOT NULL,         -- JSON list of sentences
    checksum                         TEXT NOT NULL,         -- SHA-256 of description and tables, hex
    bundled                          INTEGER NOT NULL,      -- 1: came with the program
    level_scale_uncertainty_per_cm   REAL NOT NULL,         -- cm-1, common to all its levels
    level_scale_uncertainty_relative REAL NOT NULL,         -- fraction of the energy
    rows_read                        INTEGER NOT NULL,      -- rows of its tables, as imported
    rows_refused                     INTEGER NOT NULL       -- of these left out on request
) STRICT;

-- What a source claims to cover.
CREATE TABLE scope (
    species      INTEGER NOT NULL,  -- code: (Z * 128 + stage) * 512 + mass number of an isotope
    source       INTEGER NOT NULL REFERENCES source (id),
    from_nm      REAL NOT NULL,     -- vacuum wavelength, nm
    to_nm        REAL NOT NULL,     -- vacuum wavelength, nm
    completeness TEXT NOT NULL CHECK (completeness IN ('full', 'strong', 'computed', 'ground-term')),
    PRIMARY KEY (species, source, from_nm, to_nm)
) STRICT, WITHOUT ROWID;

-- Configurations and terms, each text once.
CREATE TABLE label (
    id   INTEGER PRIMARY KEY,
    text TEXT NOT NULL UNIQUE
) STRICT;

-- A level as one source gives it.
CREATE TABLE level_report (
    species                   INTEGER NOT NULL,
    source                    INTEGER NOT NULL REFERENCES source (id),
    number                    INTEGER NOT NULL,  -- counts from 0 inside source and species
    place                     INTEGER NOT NULL,  -- line of the table file
    energy_per_cm             REAL NOT NULL,     -- cm-1 above the ground level
    energy_uncertainty_per_cm REAL NOT NULL,     -- cm-1, 1 sigma
    configuration             INTEGER REFERENCES label (id),
    term                      INTEGER REFERENCES label (id),
    twice_j                   INTEGER,           -- 2 J
    g                         REAL,              -- statistical weight, where given instead of J
    computed                  INTEGER NOT NULL,  -- 1: not measured
    own_row                   INTEGER NOT NULL,  -- 1: a row of a table; 0: only named by a line
    PRIMARY KEY (species, source, number)
) STRICT, WITHOUT ROWID;

-- A line as one source gives it.
CREATE TABLE line_report (
    species                       INTEGER NOT NULL,
    source                        INTEGER NOT NULL REFERENCES source (id),
    number                        INTEGER NOT NULL,  -- counts from 0 inside source and species
    place                         INTEGER NOT NULL,  -- line of the table file
    wavenumber_per_cm             REAL,              -- cm-1 in vacuum
    wavenumber_uncertainty_per_cm REAL,              -- cm-1, 1 sigma
    from_levels                   INTEGER NOT NULL,  -- 1: the source computed it from its levels
    lower                         INTEGER,           -- level_report.number of the same source
    upper                         INTEGER,           -- level_report.number of the same source
    lower_twice_j                 INTEGER,           -- 2 J where no level is linked
    upper_twice_j                 INTEGER,           -- 2 J where no level is linked
    rate_per_s                    REAL,              -- s-1, spontaneous emission
    rate_relative_uncertainty     REAL,              -- fraction, 1 sigma
    rate_origin                   INTEGER,           -- 0 published, 1 derived, 2 computed
    intensity                     REAL,              -- the source's own figure, no unit
    kind                          INTEGER NOT NULL,  -- 0 line, 1 mean, 2 blend, 3 isotope
    computed                      INTEGER NOT NULL,  -- 1: not measured
    PRIMARY KEY (species, source, number)
) STRICT, WITHOUT ROWID;

-- A level as concluded from all reports.
CREATE TABLE level (
    species                   INTEGER NOT NULL,
    number                    INTEGER NOT NULL,  -- rank by energy inside the species, from 0
    energy_per_cm             REAL NOT NULL,     -- cm-1 above the ground level
    energy_uncertainty_per_cm REAL NOT NULL,     -- cm-1, 1 sigma
    configuration             INTEGER REFERENCES label (id),
    term                      INTEGER REFERENCES label (id),
    twice_j                   INTEGER,           -- 2 J
    g                         REAL,              -- statistical weight
    computed                  INTEGER NOT NULL,  -- 1: no source measured it
    source                    INTEGER NOT NULL REFERENCES source (id),
    PRIMARY KEY (species, number)
) STRICT, WITHOUT ROWID;

-- A line as concluded from all reports; clustered for range reads.
CREATE TABLE line (
    species                       INTEGER NOT NULL,
    wavenumber_per_cm             REAL NOT NULL,     -- cm-1 in vacuum
    number                        INTEGER NOT NULL,  -- rank by wavenumber inside the species, from 0
    wavenumber_uncertainty_per_cm REAL NOT NULL,     -- cm-1, 1 sigma
    position_origin               INTEGER NOT NULL,  -- 0 measured, 1 ritz, 2 computed
    position_source               INTEGER NOT NULL REFERENCES source (id),
    lower                         INTEGER,           -- level.number of the same species
    upper                         INTEGER,           -- level.number of the same species
    rate_per_s                    REAL,              -- s-1
    rate_relative_uncertainty     REAL,              -- fraction, 1 sigma
    rate_origin                   INTEGER,           -- 0 published, 1 derived, 2 computed
    rate_source                   INTEGER REFERENCES source (id),
    kind                          INTEGER NOT NULL,  -- 0 line, 1 mean, 2 blend, 3 isotope,
                                                     -- 4 ritz: in no table, from levels alone
    PRIMARY KEY (species, wavenumber_per_cm, number)
) STRICT, WITHOUT ROWID;
