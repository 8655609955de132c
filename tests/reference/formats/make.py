"""Makes the reference readings in this folder.

    pip install astropy pyyaml && python make.py

Copies small test files that astropy carries (BSD-3-Clause, see NOTICE) and writes a few tables with
astropy, then reads each of them with astropy and keeps every cell in readings.json. The version of
astropy stands in readings.json.
"""
import json
import shutil
import warnings
from pathlib import Path

import astropy
import numpy as np
from astropy.io import ascii
from astropy.io.votable import parse as parse_votable
from astropy.table import MaskedColumn, Table

warnings.simplefilter("ignore")
HERE = Path(__file__).parent
DATA = Path(astropy.__file__).parent / "io"
FILES = HERE / "files"

# Not copied: regression.xml, which uses data types outside the standard on purpose.
COPIED = {
    "mrt": ["cds.dat", "cdsFunctional.dat", "cdsFunctional2.dat", "cds_mrt_dashes.txt"],
    "ecsv": ["subtypes.ecsv"],
    "votable": [
        "regression.bin.tabledata.truth.1.3.xml",
        "binary2_masked_strings.xml",
        "binary2_variable_length_char.xml",
        "names.xml",
        "valid_votable.xml",
        "nonstandard_units.xml",
    ],
}


def kind_of(column):
    dtype = column.dtype
    if column.ndim > 1 or dtype.kind in "OcV":
        return "other"
    if dtype.kind == "f":
        return "f4" if dtype.itemsize == 4 else "f8"
    return {"i": "int", "u": "int", "b": "bool", "U": "text", "S": "text"}.get(dtype.kind, "other")


def cell(value, kind):
    if value is np.ma.masked or kind == "other":
        return None
    if kind in ("f4", "f8"):
        if np.isinf(value):
            return str(float(value))
        return None if np.isnan(value) else float(value)
    if kind == "int":
        return int(value)
    if kind == "bool":
        return bool(value)
    text = value.decode() if isinstance(value, bytes) else str(value)
    return text.strip()


def text_column(column):
    """Columns of objects that hold text are read as text."""
    values = [v for v in column if v is not np.ma.masked]
    return column.ndim == 1 and all(isinstance(v, (str, bytes)) for v in values)


def reading(table):
    kinds = [
        "text" if kind_of(table[n]) == "other" and text_column(table[n]) else kind_of(table[n])
        for n in table.colnames
    ]
    rows = [[cell(row[i], kinds[i]) for i in range(len(kinds))] for row in table]
    return {"columns": table.colnames, "kinds": kinds, "rows": rows}


def written():
    """A table with every plain type and missing values, written in each serialisation."""
    n = 7
    mask = [i % 3 == 1 for i in range(n)]
    table = Table(
        {
            "whole": MaskedColumn(np.arange(n, dtype="int32") * -7, mask=mask),
            "long": MaskedColumn(np.arange(n, dtype="int64") * 10**12, mask=mask),
            "byte": np.arange(n, dtype="uint8"),
            "short": np.arange(n, dtype="int16") - 3,
            "single": MaskedColumn(np.linspace(0.1, 1e-30, n).astype("float32"), mask=mask),
            "double": MaskedColumn(588.995095 * 10.0 ** (np.arange(n) * 20 - 60), mask=mask),
            "truth": np.arange(n) % 2 == 0,
            "words": MaskedColumn([f"level {i} <&> \u00b5m" for i in range(n)], mask=mask),
        }
    )
    for name, form in [("tabledata", "tabledata"), ("binary", "binary"), ("binary2", "binary2")]:
        each = table.copy()
        if form == "binary":  # plain BINARY has no mask for whole numbers
            each["whole"] = np.arange(n, dtype="int32") * -7
            each["long"] = np.arange(n, dtype="int64") * 10**12
        each.write(FILES / f"written_{name}.xml", format="votable", tabledata_format=form, overwrite=True)
    table.write(FILES / "written.ecsv", overwrite=True)
    table.write(FILES / "written_comma.ecsv", delimiter=",", overwrite=True)
    plain = table.copy()
    plain["words"] = [f"level {i}" for i in range(n)]
    plain.write(FILES / "written.fits", overwrite=True)


def main():
    FILES.mkdir(exist_ok=True)
    for name in COPIED["mrt"] + COPIED["ecsv"]:
        shutil.copy(DATA / "ascii/tests/data" / name, FILES / name)
    for name in COPIED["votable"]:
        shutil.copy(DATA / "votable/tests/data" / name, FILES / name)
    written()
    readings = {"astropy": astropy.__version__, "files": {}}
    for path in sorted(FILES.iterdir()):
        if path.suffix == ".xml":
            votable = parse_votable(path, verify="ignore")
            table = votable.get_first_table().to_table(use_names_over_ids=True)
        elif path.suffix == ".ecsv":
            table = Table.read(path, format="ascii.ecsv")
        elif path.suffix == ".fits":
            table = Table.read(path)
        elif path.suffix == ".txt":
            table = ascii.read(path, format="mrt")
        else:
            table = ascii.read(path, format="cds")
        readings["files"][path.name] = reading(table)
    text = json.dumps(readings, indent=None, ensure_ascii=False, allow_nan=False)
    (HERE / "readings.json").write_text(text.replace("]], ", "]],\n") + "\n")


if __name__ == "__main__":
    main()
