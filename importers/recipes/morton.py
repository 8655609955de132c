#!/usr/bin/env python3
"""Makes data/morton2003 or data/morton2000 from the machine-readable tables of two papers.

Paper    D. C. Morton 2003, ApJS 149, 205 (hydrogen to gallium) and D. C. Morton 2000, ApJS 130, 403
         (germanium to uranium): resonance lines from the ground term, longward of the Lyman limit.
Carried  PyPI linetools 0.3.2, licence BSD-3-Clause, files linetools/data/lines/morton03_table2.dat
         and linetools/data/lines/morton00_table2.dat. The package is never imported or executed.
Usage    morton.py FILE DATA_FOLDER      (the table is recognised by its checksum)

Python standard library only. Rerunning gives the same bytes. Printed digits are never re-rounded:
a wavelength in ångström becomes nanometres by moving the decimal point.
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

FIELDS = {  # columns of the fixed layout, from 0
    "tag": (0, 8), "air": (8, 18), "vac": (18, 29), "lower": (29, 38), "upper": (38, 50),
    "flag": (50, 51), "gl": (51, 54), "gu": (54, 57), "a": (57, 68), "gamma": (68, 78),
    "f": (78, 88), "log_gf": (88, 95), "log_wf": (95, 102), "error": (102, 120),
}
ROW = re.compile(r"^.{19}\s+\d{1,7}\.\d+ |^.{15}.*\d\.\d.* \d+ ")
ION = re.compile(r"^(\d*)([A-Z][a-z]?) *([IVX]+) +(\S.*)$")
MARK = re.compile(r"^(.*?)\s*(?:\b(All|Part|One|LS)\b.*|(?<![A-Za-z])Ref\b.*|oAll.*)?$")

# f = (m_e c ε0 / 2π e²)·λ²·(g_u/g_l)·A; with CODATA 2022 this factor makes A = FACTOR·σ²·(g_l/g_u)·f, σ in cm⁻¹.
ELEMENTARY_CHARGE = 1.602176634e-19
ELECTRON_MASS = 9.1093837139e-31
VACUUM_PERMITTIVITY = 8.8541878188e-12
SPEED_OF_LIGHT = 299792458.0
FACTOR = (2 * math.pi * ELEMENTARY_CHARGE**2 / (VACUUM_PERMITTIVITY * ELECTRON_MASS * SPEED_OF_LIGHT)) * 1e4

LINE_HEADER = [
    "species", "kind", "wavelength_nm", "medium", "wavelength_uncertainty_nm",
    "lower_energy_per_cm", "lower_j", "upper_energy_per_cm", "upper_j",
    "rate_per_s", "rate_relative_uncertainty", "rate_origin", "row",
    "lower_g", "upper_g", "oscillator_strength", "lower_configuration", "lower_term",
    "upper_configuration", "upper_term", "rate_from_oscillator_strength", "flag",
]
LEVEL_HEADER = ["species", "energy_per_cm", "uncertainty_per_cm", "configuration", "term", "j", "g"]


def number(text):
    """A printed number; two kinds of damage are mended: a decimal comma and a stray final point."""
    text = text.replace(",", ".")
    if text.count(".") == 2 and text.endswith("."):
        text = text[:-1]
    return text


def last_digit(text):
    """One unit of the last printed digit: `14903.85` → 0.01, `109257.` → 1."""
    text = number(text)
    return Decimal(1).scaleb(-len(text.split(".")[1])) if "." in text else Decimal(1)


def to_nm(angstrom):
    """Moves the decimal point one place: `1215.6736` → `121.56736`."""
    return format(Decimal(angstrom).scaleb(-1), "f")


def up(value):
    """Two significant digits, rounded up, so that an uncertainty is never understated."""
    if value == 0:
        return "0"
    step = 10.0 ** (math.floor(math.log10(value)) - 1)
    digits = max(0, 1 - math.floor(math.log10(value)))
    return f"{math.ceil(value / step - 1e-9) * step:.{digits}f}"


def energy(text):
    """Energy and its σ as text; the ground level is zero by definition."""
    text = number(text)
    shown = text + "0" if text.endswith(".") else text
    if float(text) == 0:
        return "0", Decimal(0)
    return (text.rstrip(".") if text.endswith(".") else shown), last_digit(text)


def half(g):
    """J from the statistical weight: 4 → 1.5."""
    twice = int(g) - 1
    return str(twice // 2) if twice % 2 == 0 else f"{twice // 2}.5"


DOUBT = 10  # a colon or a question mark beside a level marks doubt (common practice): ten units instead of one

WRONG_WEIGHTS = {  # (row, printed g_u) → g_u, with the reason; checked against the printed figures in the suite
    (2232, "5"): ("3", "Ag II: A/f needs g = 3, and J = 0 to 2 is forbidden"),
    (3573, "10"): ("", "Pr IV: an even number of electrons allows no g = 10; the level has no J"),
}


class Table:
    """The state of a walk through the file, and what it has collected."""

    def __init__(self):
        self.ion, self.ground, self.upper, self.mark = None, ("", ""), ("", ""), ""
        self.rows, self.damaged, self.labels_dropped, self.labels_mended = [], [], [], []

    def header(self, place, line):
        match = ION.match(line)
        if not match or re.search(r"Z ?= ", line) or "=" not in line:
            return False
        mass, element, stage, rest = match.groups()
        rest = re.split(r" J[=-]|\bGROUND|\bGRND|  +IP ", rest)[0]
        ground = labels.label(re.sub(r"\ba(?=\d[A-Z])", "a ", rest))
        config, term = labels.agree(*ground)
        if not config and ground[0]:
            self.labels_dropped.append((place, rest.strip()))
        parity = labels.parity(config)
        if term and parity is not None and "(" not in term:
            term = term.rstrip("o") + ("o" if parity else "")
        self.ion, self.ground, self.upper, self.mark = (mass, element, stage), (config, term), ("", ""), ""
        return True

    def multiplet(self, place, line):
        match = MARK.match(re.sub(r"^ *J +", "", line[7:]))
        text = match[1] + ("o" if line[7:].find("oAll") >= 0 else "")
        self.mark = match[2] or ""
        printed, term = labels.label(text)
        config, term = labels.agree(printed, term)
        if printed and not config:
            self.labels_dropped.append((place, text.strip()))
        odd_below = self.ground[1].endswith("o") if self.ground[1] else None
        parity = labels.parity(config)
        if odd_below is not None and parity is not None and parity == int(odd_below):
            self.labels_dropped.append((place, text.strip()))
            config = ""
        elif odd_below is not None and term and parity is not None and term.endswith("o") == odd_below:
            self.labels_mended.append((place, text.strip()))
            term = term.rstrip("o") + ("o" if parity else "")
        self.upper = (config, term)

    def row(self, place, line):
        cells = {key: line[a:b].strip() for key, (a, b) in FIELDS.items()}
        if cells["lower"] == "" and cells["upper"] == "":
            raise SystemExit(f"line {place}: no energies in `{line}`")
        for key, text in cells.items():
            if key in ("tag", "flag") or text == "":
                continue
            if number(text) != text:
                self.damaged.append((place, text, number(text)))
            float(number(text))
        wrong = WRONG_WEIGHTS.get((place, cells["gu"]))
        if wrong:
            self.damaged.append((place, f"g = {cells['gu']}", f"g = {wrong[0] or 'unknown'} ({wrong[1]})"))
            cells["gu"] = wrong[0]
        cells["mean"] = cells.pop("tag") != ""
        self.rows.append((place, self.ion, self.ground, self.upper, self.mark, cells))

    def read(self, text):
        started = False
        for place, line in enumerate(text.split("\n"), 1):
            line = line.rstrip()
            started = started or " = H  Z" in line or " = Ge Z" in line
            if not started or line == "" or line.startswith(("Mult ", " No.")):
                continue
            if ROW.match(line):
                self.row(place, line)
            elif line[0].isalnum() and self.header(place, line):
                pass
            elif line[0].isupper():
                continue  # the heading of an element or of a page
            else:
                self.multiplet(place, line)


def species(ion, keep_mass):
    mass, element, stage = ion
    return f"{mass if keep_mass else ''}{element} {stage}"


def output_row(entry, kind, name):
    place, _, ground, upper, mark, cells = entry
    low, low_sigma = energy(cells["lower"])
    high, high_sigma = energy(cells["upper"])
    high_sigma *= DOUBT if cells["flag"] in (":", "?") else 1
    wavelength = to_nm(cells["vac"])
    nanometres = float(wavelength)
    levels_sigma = math.hypot(float(low_sigma), float(high_sigma)) * nanometres**2 * 1e-7
    sigma = max(float(last_digit(cells["vac"])) / 10, levels_sigma)
    rate, from_f = cells["a"], ""
    if not rate and cells["f"]:
        gap = float(high) - float(low)
        rate = f"{FACTOR * gap**2 * int(cells['gl']) / int(cells['gu']) * float(cells['f']):.3e}"
        from_f = "true"
    sigma_rate = f"{10 ** float(number(cells['error'])) - 1:.3g}" if cells["error"] else ""
    mean = kind == "mean"
    one_level_below = not mean or ground[1].endswith("S")
    one_level_above = kind in ("line", "isotope") and cells["gu"] != ""
    origin = ("derived" if mark == "LS" and not mean else "published") if rate else ""
    return [
        name, kind, wavelength, "vacuum", up(sigma),
        low, half(cells["gl"]) if one_level_below else "", high, half(cells["gu"]) if one_level_above else "",
        rate, sigma_rate if rate else "", origin, place,
        cells["gl"], cells["gu"], cells["f"], *ground, *upper, from_f, cells["flag"],
    ]


def multiplet_keys(rows):
    """Means that stand alone: no component row follows before the next mean or heading."""
    alone = set()
    for index, entry in enumerate(rows):
        if not entry[5]["mean"]:
            continue
        after = rows[index + 1] if index + 1 < len(rows) else None
        if after is None or after[5]["mean"] or after[0] != entry[0] + 1:
            alone.add(entry[0])
    return alone


def levels_of(entries):
    """Distinct (species, energy, g); the longest printed form and the first label stand.

    The upper level of a mean that stands alone, or of a row that lumps unresolved levels, keeps g and gets no J.
    """
    found, relabelled, lumped = {}, 0, set()
    for name, entry, kind in entries:
        _, _, ground, upper, _, cells = entry
        if kind != "line":
            lumped.add((name, float(energy(cells["upper"])[0]), cells["gu"]))
        for text, g, tag in ((cells["lower"], cells["gl"], ground), (cells["upper"], cells["gu"], upper)):
            shown, sigma = energy(text)
            sigma *= DOUBT if text == cells["upper"] and cells["flag"] in (":", "?") else 1
            key = (name, float(shown), g)
            held = found.get(key)
            if held is None:
                found[key] = [shown, sigma, tag]
                continue
            if sigma < held[1]:
                held[0], held[1] = shown, sigma
            if held[2] != tag:
                relabelled += 1
                if not (held[2][0] and held[2][1]) and tag[0] and tag[1]:
                    held[2] = tag
    rows = []
    for key, (shown, sigma, tag) in found.items():
        name, _, g = key
        rows.append([name, shown, format(sigma, "f"), *tag, "" if key in lumped or not g else half(g), g])
    return rows, relabelled


def write_csv(path, header, rows):
    buffer = io.StringIO()
    writer = csv.writer(buffer, lineterminator="\n")
    writer.writerow(header)
    writer.writerows(rows)
    path.write_text(buffer.getvalue(), encoding="utf-8")
    return hashlib.sha256(path.read_bytes()).hexdigest(), len(rows)


def split(table):
    """Lines of elements, lines of isotopes that double them, and the skipped means."""
    alone = multiplet_keys(table.rows)
    lines, doubles, skipped = [], [], []
    for entry in table.rows:
        place, ion, cells = entry[0], entry[1], entry[5]
        isotope = bool(ion[0])
        if cells["mean"] and (place not in alone or isotope):
            skipped.append(place)
        elif isotope:
            doubles.append(entry)
        else:
            lumps = not cells["mean"] and labels.lumps(entry[3][1], cells["gu"])
            lines.append((entry, "mean" if cells["mean"] else "blend" if lumps else "line"))
    return lines, doubles, skipped


def main():
    path, folder = pathlib.Path(sys.argv[1]), pathlib.Path(sys.argv[2])
    data = path.read_bytes()
    digest = hashlib.sha256(data).hexdigest()
    edition = source.EDITIONS.get(digest)
    if edition is None:
        raise SystemExit(f"{path}: checksum {digest} belongs to neither table; fetch linetools 0.3.2")
    table = Table()
    table.read(data.decode("latin-1").replace("\u00b0", "o").replace("\u0096", "-"))
    lines, doubles, skipped = split(table)
    out = folder / edition["key"]
    out.mkdir(parents=True, exist_ok=True)
    (out / "original.dat").write_bytes(data)
    named = [(species(e[1], False), e, kind) for e, kind in lines]
    level_rows, relabelled = levels_of(named)
    level_rows.sort(key=lambda r: (source.order(r[0]), float(r[1]), int(r[6] or 0)))
    written = {
        "levels.csv": write_csv(out / "levels.csv", LEVEL_HEADER, level_rows),
        "lines.csv": write_csv(out / "lines.csv", LINE_HEADER, [output_row(e, k, n) for n, e, k in named]),
    }
    if doubles:
        rows = [output_row(e, "isotope", species(e[1], True)) + [species(e[1], False)] for e in doubles]
        written["isotopes.csv"] = write_csv(out / "isotopes.csv", LINE_HEADER + ["doubles"], rows)
    counts = {
        "read": len(table.rows), "skipped": len(skipped), "damaged": table.damaged,
        "dropped": table.labels_dropped, "mended": table.labels_mended, "relabelled": relabelled,
        "means": sum(k == "mean" for _, k in lines), "blends": sum(k == "blend" for _, k in lines), "ions": len({n for n, _, _ in named}),
    }
    (out / "source.toml").write_text(source.manifest(edition, written, counts), encoding="utf-8")
    (out / "NOTICE.txt").write_text(source.NOTICE.format(**edition), encoding="utf-8")
    print(edition["key"], {name: n for name, (_, n) in written.items()}, {
        k: (len(v) if isinstance(v, list) else v) for k, v in counts.items()})


if __name__ == "__main__":
    main()
