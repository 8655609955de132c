#!/usr/bin/env python3
"""Makes data/cashman2017 from the machine-readable table of revised oscillator strengths.

Paper    F. H. Cashman, V. P. Kulkarni, R. Kisielius, G. J. Ferland, P. Bogdanovich 2017, ApJS 230, 8, table 1.
Carried  PyPI linetools 0.3.2, licence BSD-3-Clause, file linetools/data/lines/cashman17.ascii.
         The package is never imported or executed.
Usage    cashman.py FILE DATA_FOLDER

Python standard library only. Rerunning gives the same bytes. The table is one of rates: its wavelengths only say
which line is meant. The ion hides in a name (`CI_1657`, `CI_1139p8`); labels carry superscripts between `^` and
subscripts between `_`. A is converted from the printed f with the printed weights.
"""
import csv
import hashlib
import io
import pathlib
import re
import sys
from decimal import Decimal

sys.path.insert(0, str(pathlib.Path(__file__).parent))
import morton  # noqa: E402
import morton_labels as labels  # noqa: E402
import morton_source as source  # noqa: E402

SHA256 = "4f4a4cd5a5a77e541b3dbd7a170970dad60f4649e78bb4597a01244f5245843c"

# The note of the table gives, for each grade, the accuracy of f in per cent that it stands for; taken as 1 σ.
# The lowest grade says only "greater than 50 %": a factor 2 is entered. `A'` is read as the grade without the mark.
SIGMA = {"AAA": 0.003, "AA": 0.01, "A+": 0.02, "A": 0.03, "A'": 0.03, "B+": 0.07, "B": 0.10,
         "C+": 0.18, "C": 0.25, "D+": 0.40, "D": 0.50, "E": 1.0}
FACTOR_TWO = {566: "Ga I 221.9 nm: f and log gf differ by a factor 2, sigma 1 entered"}
IDENTIFICATION_NM = 0.0003  # nine of ten wavelengths lie this close to Morton's; none is used as a position

HEADER = [
    "species", "kind", "wavelength_nm", "medium", "wavelength_uncertainty_nm",
    "lower_energy_per_cm", "lower_j", "upper_energy_per_cm", "upper_j",
    "rate_per_s", "rate_relative_uncertainty", "rate_origin", "row",
    "lower_g", "upper_g", "oscillator_strength", "lower_configuration", "lower_term",
    "upper_configuration", "upper_term", "rate_reference",
]


def plain(text):
    """`^2^P^o^` → `2Po`: the marks of super- and subscripts go, what they hold stays."""
    return text.replace("^", "").replace("_", "")


def shells(text):
    """`4s^2^4p^5^(^2^P_3/2_)5s` → `4s2 4p5 (2P3/2) 5s`; the marks make the splitting certain."""
    out, rest = [], text.strip()
    while rest:
        parent = re.match(r"^\(([^)]*)\)\s*", rest)
        shell = re.match(r"^(\d+)([spdfgh])(?:\^(\d+)\^)?\s*", rest)
        if parent:
            out.append(f"({plain(parent[1]).strip()})")
        elif shell:
            out.append(f"{shell[1]}{shell[2]}{shell[3] or ''}")
        else:
            return ""
        rest = rest[(parent or shell).end():]
    return " ".join(out)


def label(text):
    """(configuration, term, J as printed or None) of one level."""
    text = re.sub(r" {2,}", " ", text.strip())
    match = re.match(
        r"^(?P<config>\S.*?)(?: (?P<prefix>[a-z]) | ?)"
        r"(?:(?P<mult>\^\d+\^|\d+)(?P<letter>[A-Z]|\[\d/2\]))?(?P<odd>\^o\^?)?_(?P<j>[\d/]+)(?P<end>[_-]?)$", text)
    if not match:
        raise SystemExit(f"label `{text}` has a form that the recipe does not know")
    term = plain(match["mult"]) + match["letter"] + ("o" if match["odd"] else "") if match["letter"] else ""
    if term and match["prefix"]:
        term = f"{match['prefix']} {term}"
    printed = match["j"] if match["end"] == "_" else None
    return labels.agree(shells(match["config"]), term)[0], term, printed


def weight(j):
    """2J + 1 of a printed J, `7/2` → 8."""
    top, _, bottom = j.partition("/")
    return 2 * int(top) // int(bottom or 1) + 1


def convert(place, cell, broken):
    """One output row."""
    element, stage = re.match(r"^([A-Z][a-z]?)([IVX]+)_", cell["name"]).groups()
    ends = []
    for key, g in (("lower_LSJ_level", cell["gj"]), ("upper_LSJ_level", cell["gk"])):
        config, term, j = label(cell[key])
        if j is None or weight(j) != int(g):
            broken.append((place, cell[key], g))
        ends.append((config, term))
    wavelength = Decimal(cell["wrest"]).scaleb(-1)
    observed = Decimal(cell["wobs"]).scaleb(-1) if cell["wobs"] else wavelength
    sigma = max(float(abs(observed - wavelength)), IDENTIFICATION_NM)
    gap = 1e7 / float(wavelength)
    rate = morton.FACTOR * gap**2 * int(cell["gj"]) / int(cell["gk"]) * float(cell["f"])
    relative = 1.0 if place in FACTOR_TWO else SIGMA.get(cell["grade"])
    if cell["grade"] and relative is None:
        raise SystemExit(f"line {place}: grade `{cell['grade']}` is not in the note of the table")
    return [
        f"{element} {stage}", "line", format(wavelength, "f"), "vacuum", morton.up(sigma),
        "", morton.half(cell["gj"]), "", morton.half(cell["gk"]),
        f"{rate:.3e}", "" if relative is None else f"{relative:g}", "published", place,
        cell["gj"], cell["gk"], cell["f"], *ends[0], *ends[1], cell["Ref"],
    ]


def read(text):
    """Rows, refused rows and broken J."""
    rows, refused, broken, header = [], [], [], None
    for place, line in enumerate(text.split("\n"), 1):
        if line.startswith(";") or not line.strip():
            continue
        if header is None:
            header = line.strip().split(",")
            continue
        cell = dict(zip(header, next(csv.reader([line])), strict=True))
        element = re.match(r"^([A-Z][a-z]?)[IVX]+_", cell["name"])[1]
        if source.ELEMENTS[int(cell["Z"]) - 1] != element:
            refused.append((place, cell["Z"], cell["name"]))
            continue
        rows.append(convert(place, cell, broken))
    return rows, refused, broken


def manifest(written, rows, refused, broken):
    ungraded = sum(r[10] == "" for r in rows)
    notes = [
        f"{len(rows) + len(refused)} data rows: {len(rows)} lines of {len({r[0] for r in rows})} ions, {len(refused)} refused",
        *(f"line {p}: refused, it contradicts itself: atomic number {z}, name {n}" for p, z, n in refused),
        *(f"line {p}: the J of `{t}` is damaged; J follows from the printed weight {g}" for p, t, g in broken),
        "the grades are translated to relative sigma by the table's own note (0.3, 1, 2, 3, 7, 10, 18, 25, 40, 50 per cent); "
        "its last grade, greater than 50 per cent, is entered as 1; one grade with a prime is read without it",
        f"{ungraded} rows carry no grade: no uncertainty is entered",
        *(f"line {p}: {t}" for p, t in FACTOR_TWO.items()),
        "rates only: the wavelength (computed by the authors from levels) says which line is meant; its sigma is the "
        "distance to the printed observed wavelength, at least 0.0003 nm",
        "one configuration whose electron count contradicts its term (Ti II 3d3 (3F) 4p 4Do) is dropped",
        "A = 0.667025 sigma^2 (g_l/g_u) f from the printed f and weights (CODATA 2022)",
    ]
    ignore = ["row", "oscillator_strength", "rate_reference"]
    head = [
        'key = "cashman2017"',
        'title = "Atomic data revisions for transitions relevant to observations of interstellar, circumgalactic, and intergalactic matter"',
        'citation = "F. H. Cashman, V. P. Kulkarni, R. Kisielius, G. J. Ferland, P. Bogdanovich 2017, ApJS 230, 8, table 1"',
        'licence = "BSD-3-Clause"', 'kind = "paper"', "level_scale_uncertainty_per_cm = 0.1",
        "level_scale_uncertainty_relative = 0.0", "notes = [",
        *("  " + source.quoted(n) + "," for n in notes), "]", "",
        "# No scope: the table revises the rates of chosen lines and claims completeness nowhere.", "",
    ]
    columns = source.COMMON_LINE_COLUMNS
    return "\n".join(["\n".join(head), source.table("lines.csv", written, "lines", ignore, columns)])


def main():
    path, folder = pathlib.Path(sys.argv[1]), pathlib.Path(sys.argv[2]) / "cashman2017"
    data = path.read_bytes()
    if hashlib.sha256(data).hexdigest() != SHA256:
        raise SystemExit(f"{path}: the checksum is not that of linetools 0.3.2; fetch that version")
    rows, refused, broken = read(data.decode("utf-8"))
    folder.mkdir(parents=True, exist_ok=True)
    (folder / "original.txt").write_bytes(data)
    buffer = io.StringIO()
    writer = csv.writer(buffer, lineterminator="\n")
    writer.writerow(HEADER)
    writer.writerows(rows)
    (folder / "lines.csv").write_text(buffer.getvalue(), encoding="utf-8")
    written = {"lines.csv": (hashlib.sha256((folder / "lines.csv").read_bytes()).hexdigest(), len(rows))}
    (folder / "source.toml").write_text(manifest(written, rows, refused, broken), encoding="utf-8")
    edition = {"key": "cashman2017", "file": "cashman17.ascii", "citation": "F. H. Cashman et al. 2017, ApJS 230, 8, table 1"}
    (folder / "NOTICE.txt").write_text(source.NOTICE.format(**edition).replace("original.dat", "original.txt"))
    print(len(rows), refused, broken, len({r[0] for r in rows}))


if __name__ == "__main__":
    main()
