"""Import of a large table against the `sqlite3` shell, in interleaved rounds.

    python3 tests/bench/import.py BINARY [ROWS [ROUNDS]]

BINARY is a release build. The table is invented: ROWS lines (10^6) of 150 ions between some 94,000
levels, wavelengths of 50 to 5000 nm in vacuum, 15 % without rate, 40 % without intensity; seed 1.
`unique` makes each line's levels its own. The peer is `.import --csv` into a table with typed columns,
then two indexes. Each round starts from a fresh copy of the catalogue that the binary builds.
The record of runs is import.md.
"""

import os
import random
import shutil
import statistics
import subprocess
import sys
import tempfile
import time
from pathlib import Path

SYMBOLS = (
    "Sc Ti V Cr Mn Fe Co Ni Cu Zn Ga Ge As Se Br Kr Rb Sr Y Zr Nb Mo Tc Ru Rh Pd Ag Cd In Sn Sb Te "
    "I Xe Cs Ba La Ce Pr Nd Pm Sm Eu Gd Tb Dy Ho Er Tm Yb"
).split()
IONS = [f"{symbol} {stage}" for symbol in SYMBOLS for stage in ("I", "II", "III")]
HEADER = "species,wavelength_nm,lower_per_cm,jl,upper_per_cm,ju,rate,intensity\n"
DESCRIPTION = """key = "survey"
title = "Survey (invented)"
citation = "invented"
licence = "CC0-1.0"
kind = "paper"
[[table]]
file = "lines.csv"
records = "lines"
[table.columns]
species = { column = "species" }
wavelength = { column = "wavelength_nm", unit = "nm", medium = "vacuum" }
lower_energy = { column = "lower_per_cm", unit = "cm-1" }
lower_j = { column = "jl" }
upper_energy = { column = "upper_per_cm", unit = "cm-1" }
upper_j = { column = "ju" }
rate = { column = "rate", unit = "s-1" }
intensity = { column = "intensity" }
"""
PEER = """CREATE TABLE line (species TEXT, wavelength_nm REAL, lower_per_cm REAL, jl REAL,
                   upper_per_cm REAL, ju REAL, rate REAL, intensity REAL);
.import --csv --skip 1 lines.csv line
CREATE INDEX by_species ON line (species, wavelength_nm);
CREATE INDEX by_wavelength ON line (wavelength_nm);
"""


def write_table(folder, rows, unique):
    draw = random.Random(1)
    levels = {
        ion: sorted((round(draw.uniform(0, 2e5), 3), draw.randrange(7)) for _ in range(627))
        for ion in IONS
    }
    with open(folder / "lines.csv", "w") as out:
        out.write(HEADER)
        for row in range(rows):
            ion = IONS[draw.randrange(len(IONS))]
            while True:
                if unique:
                    pair = [(round(draw.uniform(0, 2e5), 4), draw.randrange(7)) for _ in "lu"]
                else:
                    pair = draw.choices(levels[ion], k=2)
                (lower, jl), (upper, ju) = sorted(pair)
                if 2e3 < upper - lower < 2e5:
                    break
            rate = f"{10 ** draw.uniform(3, 9):.3e}" if draw.random() > 0.15 else ""
            intensity = str(draw.randrange(1, 10_000)) if draw.random() > 0.4 else ""
            out.write(
                f"{ion},{1e7 / (upper - lower):.4f},{lower},{jl},{upper},{ju},{rate},{intensity}\n"
            )
    (folder / "source.toml").write_text(DESCRIPTION)


def run(arguments, folder, text=None):
    """Wall and CPU time in s, peak memory in MB."""
    start = time.perf_counter()
    process = subprocess.Popen(
        arguments, cwd=folder, stdin=subprocess.PIPE, stdout=subprocess.DEVNULL
    )
    if text:
        process.stdin.write(text.encode())
    process.stdin.close()
    _, status, usage = os.wait4(process.pid, 0)
    wall = time.perf_counter() - start
    assert status == 0, arguments
    return wall, usage.ru_utime + usage.ru_stime, usage.ru_maxrss / 1024


def main():
    binary = str(Path(sys.argv[1]).resolve())
    rows = int(sys.argv[2]) if len(sys.argv) > 2 else 1_000_000
    rounds = int(sys.argv[3]) if len(sys.argv) > 3 else 5
    for unique in (False, True):
        with tempfile.TemporaryDirectory() as name:
            folder = Path(name)
            write_table(folder, rows, unique)
            run([binary, "--catalogue", "built.sqlite", "sources"], folder)
            runs = {"sqlite3": [], "lineclear": []}
            for _ in range(rounds):
                (folder / "peer.sqlite").unlink(missing_ok=True)
                runs["sqlite3"].append(run(["sqlite3", "peer.sqlite"], folder, PEER))
                for old in folder.glob("own.sqlite*"):
                    old.unlink()
                shutil.copy(folder / "built.sqlite", folder / "own.sqlite")
                runs["lineclear"].append(
                    run([binary, "--catalogue", "own.sqlite", "import", "."], folder)
                )
            print(f"{rows} rows, {'every level its own' if unique else 'shared levels'}")
            for who, all_runs in runs.items():
                wall, cpu, memory = zip(*all_runs)
                print(
                    f"  {who}: wall {statistics.median(wall):.2f} s "
                    f"({min(wall):.2f} to {max(wall):.2f}), CPU {statistics.median(cpu):.2f} s "
                    f"({min(cpu):.2f} to {max(cpu):.2f}), {max(memory):.0f} MB"
                )
            medians = [
                [statistics.median(r[i] for r in runs[who]) for i in (0, 1)]
                for who in ("lineclear", "sqlite3")
            ]
            print("  ratio: wall %.2f, CPU %.2f" % tuple(a / b for a, b in zip(*medians)))


main()
