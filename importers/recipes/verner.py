#!/usr/bin/env python3
"""Makes data/verner1996 from the machine-readable table 1 of a paper on permitted resonance lines.

Paper    D. A. Verner, E. M. Verner, G. J. Ferland 1996, Atomic Data and Nuclear Data Tables 64, 1, table 1.
Carried  PyPI linetools 0.3.2, licence BSD-3-Clause, file linetools/data/lines/verner96_tab1.txt.
         The package is never imported or executed.
Usage    verner.py FILE DATA_FOLDER

Python standard library only. Rerunning gives the same bytes. A multiplet row carries ion, configurations and
terms; its components follow with a blank left part. Weights are degeneracies; wavelengths are in vacuum
throughout. Trailing zeros are padding, so they count as no digits.
"""
import csv
import hashlib
import io
import math
import pathlib
import re
import sys
from decimal import Decimal

sys.path.insert(0, str(pathlib.Path(__file__).parent))
import morton_labels as labels  # noqa: E402
import morton_source as source  # noqa: E402

SHA256 = "4cdf66c0aab373fc4f49d2b59deb2111752f29caa97d516fb7306d70bb6f6055"
FIELDS = {"wavelength": (46, 56), "lower": (56, 72), "upper": (72, 88), "gl": (88, 91), "gu": (91, 94),
          "a": (94, 103), "f": (103, 112)}
CONTRADICTIONS = {2141: "Ne I 73.59 nm: A and f of the row differ by a factor 2, so the row gives no rate"}

LINE_HEADER = [
    "species", "kind", "wavelength_nm", "medium", "wavelength_uncertainty_nm",
    "lower_energy_per_cm", "lower_j", "upper_energy_per_cm", "upper_j",
    "rate_per_s", "rate_relative_uncertainty", "rate_origin", "row",
    "lower_g", "upper_g", "oscillator_strength", "lower_configuration", "lower_term",
    "upper_configuration", "upper_term", "flag", "from_levels",
]
LEVEL_HEADER = ["species", "energy_per_cm", "uncertainty_per_cm", "configuration", "term", "j", "g"]


def unit(text):
    """One unit of the last digit that is not padding: `26.0700` → 0.01, `3911000.000000` → 1000."""
    sign, digits, exponent = Decimal(text).normalize().as_tuple()
    return 10.0**exponent if digits != (0,) else 0.0


def relative(wavelength_nm):
    """The floor of the relative σ: 1e-5, and 5e-4 below 2 nm."""
    return 5e-4 if wavelength_nm < 2.0 else 1e-5


def level_sigma(text):
    """σ of an energy: one unit of its last digit, and not below the floor of a line from the ground level."""
    value = float(text)
    if value == 0:
        return 0.0
    return max(unit(text), value * relative(1e7 / value))


def up(value):
    """Two significant digits, rounded up."""
    if value == 0:
        return "0"
    power = math.floor(math.log10(value)) - 1
    scaled = math.ceil(value / 10.0**power - 1e-9)
    return format(Decimal(scaled).scaleb(power).normalize(), "f")


def trimmed(text):
    """An energy without padding: `82259.164506` stays, `1657980.000000` → `1657980`."""
    return text.rstrip("0").rstrip(".") if "." in text else text


def parent(match):
    """`(3PE)` → `(3P)`, `(3PO)` → `(3Po)`, `(2P3/2)` stays; a counting digit as in `(3P1)` goes."""
    text = match[0]
    even_odd = re.match(r"^\((\d+[A-Z])([EO])\)$", text)
    if even_odd:
        return f"({even_odd[1]}{'o' if even_odd[2] == 'O' else ''})"
    if re.match(r"^\((\d+[A-Z])\d\)$", text):
        return text[:-2] + ")"
    return "" if re.match(r"^\(\d*\)$", text) else text


def configuration(text):
    """(configuration, flag): marks `:` and `*` go into the flag."""
    text = text.strip()
    flag = "".join(c for c in text if c in ":*")
    text = text.replace(":", "").replace("*", "")
    text = re.sub(r"\([^)]*\)", parent, text)
    return labels.configuration(text) or "", flag


def with_open_shell(lower, upper, term):
    """Writes the open 2s that the table leaves out of `2p5 (3Po) 3p`, and drops a configuration that no electron count fits."""
    counts = labels.electrons(lower), labels.electrons(upper)
    if lower.startswith("2s2 ") and None not in counts and counts[0] - counts[1] == 1:
        upper = "2s " + upper
    return labels.agree(upper, term)[0]


def heading(line):
    """Ion, labels and flag of a multiplet row."""
    element, stage = line[0:2].strip(), int(line[2:5])
    lower, flag_lower = configuration(line[5:22])
    upper, flag_upper = configuration(line[22:38])
    low_term, high_term = (part.strip() for part in line[38:46].split("-"))
    if re.match(r"^\d/2$", high_term):  # K of the pair coupling of neon and argon: a doublet parent, odd
        high_term = f"2[{high_term}]o"
    upper = with_open_shell(lower, upper, high_term)
    return f"{element} {source.ROMAN[stage - 1]}", (lower, low_term), (upper, high_term), flag_lower + flag_upper


def component(place, line, head):
    name, low, high, flag = head
    cell = {key: line[a:b].strip() for key, (a, b) in FIELDS.items()}
    wavelength = format(Decimal(cell["wavelength"]).scaleb(-1), "f")
    nanometres = float(wavelength)
    sigma = max(unit(cell["wavelength"]) / 10, relative(nanometres) * nanometres)
    gap = float(cell["upper"]) - float(cell["lower"])
    agrees = abs(1e8 / gap - float(cell["wavelength"])) <= max(1.01 * unit(cell["wavelength"]), 1.01e-4)
    if labels.lumps(low[1], cell["gl"]) or labels.lumps(high[1], cell["gu"]):
        raise SystemExit(f"line {place}: a weight that lumps several levels of the term has no J")
    j = [half(cell["gl"]), half(cell["gu"])]
    rate = "" if place in CONTRADICTIONS else cell["a"]
    return {
        "row": [name, "line", wavelength, "vacuum", up(sigma),
                trimmed(cell["lower"]), j[0], trimmed(cell["upper"]), j[1], rate, "",
                "published" if rate else "", place, cell["gl"], cell["gu"], cell["f"], *low, *high, flag,
                "true" if agrees else "false"],
        "levels": [(cell["lower"], cell["gl"], j[0], low), (cell["upper"], cell["gu"], j[1], high)],
    }


def half(g):
    twice = int(g) - 1
    return str(twice // 2) if twice % 2 == 0 else f"{twice // 2}.5"


def read(text):
    """Components, multiplet means and rows without a wavelength."""
    lines, means, unplaced, head = [], [], [], None
    for place, line in enumerate(text.rstrip("\n").split("\n"), 1):
        if line[0] != " ":
            head = heading(line)
            means.append(place)
        elif float(line[46:56]) == 0:
            unplaced.append(place)
        else:
            lines.append(component(place, line, head))
    return lines, means, unplaced


def levels_of(lines):
    found = {}
    for line in lines:
        for energy, g, j, label in line["levels"]:
            key = (line["row"][0], float(energy), int(g))
            held = found.setdefault(key, [trimmed(energy), level_sigma(energy), label, j])
            if not (held[2][0] and held[2][1]) and label[0] and label[1]:
                held[2] = label
    rows = [[name, shown, up(sigma), *label, j, g] for (name, _, g), (shown, sigma, label, j) in found.items()]
    return sorted(rows, key=lambda r: (source.order(r[0]), float(r[1]), r[6]))


def write_csv(path, header, rows):
    buffer = io.StringIO()
    writer = csv.writer(buffer, lineterminator="\n")
    writer.writerow(header)
    writer.writerows(rows)
    path.write_text(buffer.getvalue(), encoding="utf-8")
    return hashlib.sha256(path.read_bytes()).hexdigest(), len(rows)


def one_electron(lines):
    """The species of the table that have a single electron."""
    held = {line["row"][0] for line in lines}
    names = [f"{element} {roman}" for element, roman in zip(source.ELEMENTS, source.ROMAN)]
    return [name for name in names if name in held]


def manifest(written, lines, means, unplaced):
    apart = sum(line["row"][-1] == "false" for line in lines)
    notes = [
        f"{len(lines) + len(means) + len(unplaced)} data rows: {len(lines)} lines; {len(means)} multiplet rows are "
        "skipped (each is followed by its components, a single one is printed twice)",
        f"{len(unplaced)} components with wavelength 0 are skipped: the table has no energy for them",
        "the table gives degeneracies; J = (g - 1)/2, each component being a pair of single levels",
        "trailing zeros are padding: sigma is one unit of the last other digit and at least 1e-5 of the value "
        "(5e-4 below 2 nm)",
        f"{apart} lines whose wavelength is not the difference of their printed energies carry from_levels false",
        "marks `:` and `*` of a configuration are carried in the column `flag`; the file does not explain them",
        "the table gives no uncertainty of its rates: the column stays empty",
        "where an upper configuration has one electron less than 2s2 ..., the left-out open 2s is written; "
        "one that contradicts the multiplicity of its term is dropped (Fe I 3d5 4s2 (6S) 5Po)",
        "the K number that Ne I and Ar I carry in place of a term is written as a pair-coupling term",
        *(f"line {place}: {text}" for place, text in CONTRADICTIONS.items()),
        "one-electron ions: energies and rates are theory (common practice), not measurement, and count as computed",
    ]
    columns = source.COMMON_LINE_COLUMNS.replace('{ constant = "true" }', '{ column = "from_levels" }')
    head = [
        'key = "verner1996"', 'title = "Atomic data for permitted resonance lines of atoms and ions from H to Si, and S, Ar, Ca, and Fe"',
        'citation = "D. A. Verner, E. M. Verner, G. J. Ferland 1996, Atomic Data and Nuclear Data Tables 64, 1, table 1"',
        'licence = "BSD-3-Clause"', 'kind = "paper"', "level_scale_uncertainty_per_cm = 0.3",
        "level_scale_uncertainty_relative = 1e-5",
        "computed_species = [" + ", ".join(source.quoted(s) for s in one_electron(lines)) + "]", "notes = [",
        *("  " + source.quoted(n) + "," for n in notes), "]", "",
        "[[scope]]", 'species = ["*"]', "band_nm = [0.1, 671.0]", 'completeness = "ground-term"', "",
    ]
    return "\n".join(["\n".join(head), source.table("levels.csv", written, "levels", [], source.LEVEL_COLUMNS),
                      source.table("lines.csv", written, "lines", ["row", "oscillator_strength", "flag"], columns)])


def main():
    path, folder = pathlib.Path(sys.argv[1]), pathlib.Path(sys.argv[2]) / "verner1996"
    data = path.read_bytes()
    if hashlib.sha256(data).hexdigest() != SHA256:
        raise SystemExit(f"{path}: the checksum is not that of linetools 0.3.2; fetch that version")
    lines, means, unplaced = read(data.decode("ascii"))
    folder.mkdir(parents=True, exist_ok=True)
    (folder / "original.txt").write_bytes(data)
    written = {"levels.csv": write_csv(folder / "levels.csv", LEVEL_HEADER, levels_of(lines)),
               "lines.csv": write_csv(folder / "lines.csv", LINE_HEADER, [line["row"] for line in lines])}
    (folder / "source.toml").write_text(manifest(written, lines, means, unplaced), encoding="utf-8")
    edition = {"key": "verner1996", "file": "verner96_tab1.txt",
               "citation": "D. A. Verner, E. M. Verner, G. J. Ferland 1996, ADNDT 64, 1, table 1"}
    (folder / "NOTICE.txt").write_text(source.NOTICE.format(**edition).replace("original.dat", "original.txt"))
    print({k: n for k, (_, n) in written.items()}, len(means), len(unplaced),
          len({line["row"][0] for line in lines}))


if __name__ == "__main__":
    main()
