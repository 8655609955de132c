#!/usr/bin/env python3
"""Makes data/elements/limits.csv and limits-differences.csv: ionisation limits.

Get the package file (it is read as a zip archive, never installed or run):
    pip download --no-deps linetools==0.3.2
then:
    python3 importers/recipes/limits.py linetools-0.3.2-py3-none-any.whl [OUT_FOLDER]

Two kinds of report, both kept:
* data/elements/limits-curated.csv (kept input): entered twice by hand, the newer evaluations;
* the `IP =` headers of the ions in the tables of Morton 2000 and 2003.
Where both stand, the newer one leads (it comes first); a species without a curated row falls back
to Morton. limits-differences.csv lists the species whose reports differ by more than 10 cm-1.

1 sigma of a header: the printed `+-`, else `(n)` in units of the last digit, else one unit of the
last printed digit (for a whole number: of its last digit that is not zero), ten times that where
the author doubts the value (`:`). Refused: values below the limit of the stage before (one header
has lost a digit); they stay in the table with `refused` in the last column.
"""
import csv
import hashlib
import io
import pathlib
import re
import sys
import zipfile

WHEEL_SHA256 = "100a833d63f16e1c6b4bbd555c840bd070090037cb92c137305f1cbbad6867cc"
TABLES = [
    ("morton2003", "linetools/data/lines/morton03_table2.dat", "5cac1008c2b2694a"),
    ("morton2000", "linetools/data/lines/morton00_table2.dat", "e15cd44f967fb3aa"),
]
OUT = pathlib.Path(__file__).resolve().parents[2] / "data" / "elements"
ROMAN = {name: stage for stage, name in enumerate("I II III IV V VI VII VIII".split(), start=1)}
ION = re.compile(r"^(\d*)([A-Z][a-z]?)\s*([IVX]+)\s")
VALUE = re.compile(r"IP\s*=\s*(\d+\.?\d*)(:?)(?:\((\d+)\))?\s*(?:\+-\s*(\d+\.?\d*))?")
COLUMNS = ["element", "isotope", "stage", "limit_per_cm", "uncertainty_per_cm",
           "uncertainty_origin", "source", "place", "refused"]


def member(archive, name, start):
    content = archive.read(name)
    if not hashlib.sha256(content).hexdigest().startswith(start):
        sys.exit(f"{name}: sha256 differs")
    return content.decode("latin-1")


def last_digit_unit(number):
    """One unit of the last digit that carries meaning."""
    if "." in number and not number.endswith("."):
        return 10.0 ** -len(number.split(".")[1])
    digits = number.rstrip(".")
    return 10.0 ** (len(digits) - len(digits.rstrip("0")))


def sigma(number, doubt, bracket, plus_minus):
    if plus_minus and float(plus_minus) > 0:
        return float(plus_minus), "stated"
    if bracket:
        return int(bracket) * last_digit_unit(number), "stated"
    return last_digit_unit(number) * (10 if doubt else 1), "doubtful" if doubt else "last digit"


def headers(key, content):
    """One report per species and value: headers repeat after page breaks."""
    seen = set()
    for place, line in enumerate(content.splitlines(), start=1):
        ion, value = ION.match(line), VALUE.search(line)
        if not ion or not value:
            continue
        isotope, element, roman = ion.groups()
        if element == "D":
            isotope, element = "2", "H"
        species = (element, isotope, ROMAN[roman])
        if (species, value[1]) in seen:
            continue
        seen.add((species, value[1]))
        error, origin = sigma(*value.groups())
        yield [*species, value[1].rstrip("."), f"{error:.6g}", origin, key, place, ""]


def curated(path):
    with open(path, newline="", encoding="utf-8") as file:
        for place, row in enumerate(csv.DictReader(file), start=2):
            yield [row["element"], "", int(row["stage"]), row["ionisation_energy_per_cm"],
                   row["uncertainty_per_cm"], "stated", "limits-curated", place, ""]


def mark_refused(rows):
    """A limit below that of the stage before cannot be: its header has lost a digit."""
    leading = {}
    for row in rows:
        leading.setdefault((row[0], row[1], row[2]), float(row[3]))
    for row in rows:
        before = leading.get((row[0], row[1], row[2] - 1))
        if before is not None and float(row[3]) < before:
            row[8] = f"below the limit of stage {row[2] - 1}"


def differences(rows):
    yield ["element", "stage", "newer_per_cm", "newer_uncertainty_per_cm", "older_per_cm",
           "older_uncertainty_per_cm", "older_source", "newer_minus_older_per_cm"]
    newer = {(r[0], r[2]): r for r in rows if r[6] == "limits-curated"}
    for row in rows:
        lead = newer.get((row[0], row[2]))
        if row[6] == "limits-curated" or row[1] or lead is None:
            continue
        gap = float(lead[3]) - float(row[3])
        if abs(gap) > 10:
            yield [row[0], row[2], lead[3], lead[4], row[3], row[4], row[6], f"{gap:.1f}"]


def write(path, rows):
    rows = list(rows)
    with open(path, "w", newline="", encoding="utf-8") as out:
        csv.writer(out, lineterminator="\n").writerows(rows)
    digest = hashlib.sha256(path.read_bytes()).hexdigest()
    print(f"{path.name}: {len(rows) - 1} rows, sha256 {digest}")


def order_of_elements(folder):
    with open(folder / "elements.csv", newline="", encoding="utf-8") as file:
        return {row["symbol"]: int(row["atomic_number"]) for row in csv.DictReader(file)}


def main():
    if len(sys.argv) not in (2, 3):
        sys.exit(__doc__)
    out = pathlib.Path(sys.argv[2]) if len(sys.argv) == 3 else OUT
    wheel = pathlib.Path(sys.argv[1]).read_bytes()
    if hashlib.sha256(wheel).hexdigest() != WHEEL_SHA256:
        sys.exit(f"{sys.argv[1]}: not the package file this recipe was written for")
    rows = list(curated(OUT / "limits-curated.csv"))
    with zipfile.ZipFile(io.BytesIO(wheel)) as archive:
        for key, name, start in TABLES:
            rows.extend(headers(key, member(archive, name, start)))
    number = order_of_elements(OUT)
    rows.sort(key=lambda r: (number[r[0]], int(r[1] or 0), r[2]))
    mark_refused(rows)
    write(out / "limits.csv", [COLUMNS, *rows])
    write(out / "limits-differences.csv", differences(rows))


if __name__ == "__main__":
    main()
