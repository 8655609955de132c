"""Reads the four exports of the invented xenon table with other programs' readers, checks that they
agree cell by cell, and writes what they read to readings.json.

    python check.py FOLDER

FOLDER holds x.csv, x.jsonl, x.vot and x.d, made by
`lineclear export --source harrow-bay-xenon --as FORM --to FOLDER/x.END`.
Made with astropy 7, pyarrow 21 and duckdb 1.4 or the versions named in the file.
"""

import json
import math
import sys
from pathlib import Path

import astropy
import duckdb
import pyarrow
import pyarrow.dataset
import pyarrow.parquet
from astropy.io.votable import parse_single_table
from astropy.table import Table

folder = Path(sys.argv[1])


def plain(value):
    """A cell as Python has it: None where it is missing."""
    if value is None or type(value).__name__ == "MaskedConstant":
        return None
    if hasattr(value, "item"):
        value = value.item()
    if isinstance(value, float) and math.isnan(value):
        return None
    return None if value == "" else value


def of_table(table):
    return [{name: plain(row[name]) for name in table.colnames} for row in table]


lines = [json.loads(line) for line in (folder / "x.jsonl").read_text().splitlines()]
header, rows = lines[0]["lineclear"], lines[1:]
ecsv = Table.read(folder / "x.csv", format="ascii.ecsv")
votable = parse_single_table(folder / "x.vot", verify="exception")
arrow = pyarrow.dataset.dataset(folder / "x.d", partitioning="hive").to_table()
about = json.loads(
    pyarrow.parquet.read_schema(folder / "x.d/element=Xe/part-0.parquet").metadata[b"lineclear"]
)
duck = duckdb.sql(
    f"SELECT * FROM read_parquet('{folder}/x.d/**/*.parquet', hive_partitioning = true)"
)
assert duckdb.sql(
    f"SELECT count(*) FROM read_csv('{folder}/x.csv', comment = '#')"
).fetchall() == [(len(rows),)]
duck_rows = [dict(zip(duck.columns, row)) for row in duck.fetchall()]

readings = {
    "astropy, ECSV": of_table(ecsv),
    "astropy, VOTable": of_table(votable.to_table()),
    "pyarrow": arrow.to_pylist(),
    "duckdb": duck_rows,
}
for name, read in readings.items():
    for row in read:
        if name in ("pyarrow", "duckdb"):
            assert row.pop("element") == "Xe", row
    assert read == rows, (name, [(a, b) for a, b in zip(read, rows) if a != b][:1])
assert json.loads(ecsv.meta["lineclear"]) == header
assert about == header
assert ecsv["wavenumber_per_cm"].unit == "1 / cm"
assert votable.to_table()["rate_per_s"].unit == "1 / s"
assert header["sources"][0]["licence"] == "CC0-1.0"
versions = {m.__name__: m.__version__ for m in (astropy, pyarrow, duckdb)}
text = json.dumps({"versions": versions, "rows": rows}, indent=1, ensure_ascii=False)
(Path(__file__).parent / "readings.json").write_text(text + "\n")
print(len(rows), "rows, the same in all four files;", versions)
