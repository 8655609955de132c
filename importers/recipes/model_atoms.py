#!/usr/bin/env python3
"""Makes data/model-atoms from the model atoms of a radiative-transfer package.

Source   Model atoms for non-equilibrium radiative transfer, a collection without citations per row.
Carried  PyPI lightweaver 0.17.0, licence MIT, file lightweaver/rh_atoms.py.
         The file is Python source; it is read line by line as text and never imported or executed.
Usage    model_atoms.py FILE DATA_FOLDER

Python standard library only. Rerunning gives the same bytes. Kept are the lines of the file that open an atom, a
level or a line (cut behind what is used), each with its line number. Many levels are means over a term: a level
counts as single when g = 2J + 1 and |L - S| <= J <= L + S. Energies are above the ground level of the neutral atom.
"""
import collections
import csv
import hashlib
import io
import pathlib
import re
import sys
from fractions import Fraction

sys.path.insert(0, str(pathlib.Path(__file__).parent))
import model_atoms_labels as names  # noqa: E402
import morton  # noqa: E402
import morton_source as source  # noqa: E402

SHA256 = "99982a90746acaf293bcdb48ddab6e46c5fe30407e177735c0f255829379731f"
OPEN = re.compile(r"^(\w+)_atom = lambda")
ELEMENT = re.compile(r"^AtomicModel\(element=Element\(Z=(\d+)\)")
LEVEL = re.compile(r'^\t\tAtomicLevel\(E=\s*([-\d.eE+]+), g=([\d.]+), label="([^"]*)", stage=(\d+), '
                   r"J=(None|Fraction\(\d+, \d+\)), L=(None|\d+), S=(None|Fraction\(\d+, \d+\))\)")
LINE = re.compile(r"^\t\t\w+Line\(j=(\d+), i=(\d+), f=([-\d.eE+]+)")
SAME_LEVEL_PER_CM = 0.5  # energies of one level in two atoms: closer than this, with equal J and parity

# σ of a level, 1/cm. Three decimals are printed, but the atoms differ among themselves and from the papers:
# median 0.02, one in a hundred by more than 0.5; two ions by 2.3 and 2.4.
SIGMA_PER_CM, COARSE_PER_CM = 0.3, {"Al II": 2.5, "O I": 2.5}

TERM_ATOMS = {"NiI", "NiI_small", "NiI_test"}  # whole terms stand at the energy and weight of one level
WRONG_RATES = {  # (atom, lower label, upper label): why the row gives no rate
    ("He_large", "HE I 1S 3P 3PO 2", "HE I 1S 5D 3DE 1"): "He I 1197.2 nm: f of J 2-1 and 1-2 contradict LS fractions",
    ("He_large", "HE I 1S 3P 3PO 1", "HE I 1S 5D 3DE 2"): "He I 1197.2 nm: f of J 2-1 and 1-2 contradict LS fractions",
    ("Al", "AL II 3S2 1SE", "AL II 3S 3P 1PO"): "Al II 167.1 nm: known wrong",
    ("SrI", "SR I 4P6 5S2 1SE 0", "SR I 4P6 5S5P 1PO 1"): "Sr I 460.9 nm: f = 0.27 beside 2.01 of Morton 2000",
}
HEADER = morton.LINE_HEADER[:20] + ["atom"]


def fraction(text):
    """`Fraction(3, 2)` or `1` as a number, `None` as None; nothing is evaluated."""
    if text == "None":
        return None
    parts = re.findall(r"\d+", text)
    return Fraction(int(parts[0]), int(parts[1]) if len(parts) > 1 else 1)


class Level:
    def __init__(self, match):
        energy, g, self.text, stage, *momenta = match.groups()
        self.energy, self.g, self.stage = float(energy), float(g), int(stage)
        self.j, self.l, self.s = (fraction(m) for m in momenta)
        self.configuration, self.term, self.odd = names.label(self.text)

    def single(self):
        if None in (self.j, self.l, self.s) or self.g != 2 * self.j + 1:
            return False
        return abs(self.l - self.s) <= self.j <= self.l + self.s


def extract(text):
    """The kept lines with their numbers: what opens an atom, a level, a line."""
    kept = []
    for place, line in enumerate(text.split("\n"), 1):
        for pattern in (OPEN, ELEMENT, LEVEL, LINE):
            match = pattern.match(line)
            if match:
                kept.append((place, match[0]))
    return kept


def atoms(kept):
    """(name, Z, levels, [(place, upper, lower, f)]) of each atom."""
    found = []
    for place, line in kept:
        if opened := OPEN.match(line):
            found.append((opened[1], [], [], []))
        elif element := ELEMENT.match(line):
            found[-1][1].append(int(element[1]))
        elif level := LEVEL.match(line):
            found[-1][2].append(Level(level))
        elif row := LINE.match(line):
            found[-1][3].append((place, int(row[1]), int(row[2]), float(row[3])))
    return found


def refusal(atom, lower, upper, f):
    """Why a row between two single levels is no line, or None."""
    same_parity = lower.odd == upper.odd
    change = abs(lower.j - upper.j)
    if atom in TERM_ATOMS:
        return "Ni I atoms: terms stand at the energy and weight of one level (a third of the rows break delta J)"
    if lower.j == upper.j == 0:
        return "J = 0 to 0: no single photon"
    if same_parity and lower.configuration == "1s" and upper.configuration == "2s":
        return "2s to 1s of a one-electron ion: two photons"
    if same_parity and f == 0:
        return "f = 0 between levels of one parity: no line"
    if same_parity and f > 1e-5:
        return "electric dipole strength between levels of one parity"
    if change > 1 and not same_parity and f > 1e-6:
        return "electric dipole strength with a change of J above 1"
    return None


def collect(found):
    """Rows between single levels, refused rows, and the number of rows with a term mean."""
    rows, refused, means = [], [], 0
    for atom, z, levels, lines in found:
        zero = {}
        for level in levels:
            zero[level.stage] = min(zero.get(level.stage, level.energy), level.energy)
        for place, j, i, f in lines:
            lower, upper = levels[i], levels[j]
            if not (lower.single() and upper.single()):
                means += 1
                continue
            ion = f"{source.ELEMENTS[z[0] - 1]} {source.ROMAN[lower.stage]}"
            shift = zero[lower.stage] if lower.stage else 0.0
            reason = refusal(atom, lower, upper, f)
            if reason:
                refused.append((place, reason, ion))
                continue
            rows.append({"place": place, "atom": atom, "ion": ion, "lower": lower, "upper": upper, "f": f,
                         "low": round(lower.energy - shift, 3), "high": round(upper.energy - shift, 3)})
    return rows, refused, means


def ranked(rows):
    """Atoms with the most rows of an ion lead; rows with a rate go before rows without."""
    size = collections.Counter((r["ion"], r["atom"]) for r in rows)
    first = {}
    for row in rows:
        first.setdefault((row["ion"], row["atom"]), row["place"])
    key = lambda r: (r["f"] == 0, -size[r["ion"], r["atom"]], first[r["ion"], r["atom"]], r["place"])  # noqa: E731
    return sorted(rows, key=key)


def merge(rows):
    """Levels closer than SAME_LEVEL_PER_CM become one; each pair of levels gives one line."""
    levels, lines, merged, summed = {}, {}, [], []

    def anchor(row, end, energy):
        level = row[end]
        group = levels.setdefault((row["ion"], level.j, level.odd), [])
        for held in group:
            if abs(held["energy"] - energy) <= SAME_LEVEL_PER_CM:
                if not (held["configuration"] and held["term"]):
                    held.update(configuration=level.configuration, term=level.term)
                return held
        group.append({"ion": row["ion"], "energy": energy, "j": level.j,
                      "configuration": level.configuration, "term": level.term})
        return group[-1]

    for row in ranked(rows):
        low, high = anchor(row, "lower", row["low"]), anchor(row, "upper", row["high"])
        held = lines.setdefault((id(low), id(high)), {**row, "ends": (low, high)})
        if held["place"] == row["place"]:
            continue
        if held["atom"] == row["atom"] and row["lower"].odd == row["upper"].odd:
            held["f"] += row["f"]  # magnetic dipole and electric quadrupole parts of one line
            summed.append(row["place"])
        else:
            merged.append((row["place"], held["f"], row["f"]))
    return [lv for group in levels.values() for lv in group], list(lines.values()), merged, summed


def text_of(j):
    return str(j.numerator) if j.denominator == 1 else f"{float(j):g}"


def sigma(ion, energy):
    return 0.0 if energy == 0 else COARSE_PER_CM.get(ion, SIGMA_PER_CM)


def level_row(level):
    return [level["ion"], f"{level['energy']:g}" if level["energy"] == 0 else f"{level['energy']:.3f}",
            f"{sigma(level['ion'], level['energy']):g}", level["configuration"], level["term"],
            text_of(level["j"]), int(2 * level["j"] + 1)]


def line_row(line):
    low, high = line["ends"]
    gap = high["energy"] - low["energy"]
    ion = line["ion"]
    spread = (sigma(ion, low["energy"]) ** 2 + sigma(ion, high["energy"]) ** 2) ** 0.5
    g = [int(2 * level["j"] + 1) for level in (low, high)]
    wrong = (line["atom"], line["lower"].text, line["upper"].text) in WRONG_RATES
    rate = "" if wrong or line["f"] == 0 else f"{morton.FACTOR * gap**2 * g[0] / g[1] * line['f']:.3e}"
    a, b = level_row(low), level_row(high)
    return [ion, "line", f"{1e7 / gap:.6g}" if gap < 100 else f"{1e7 / gap:.5f}", "vacuum",
            morton.up(spread * 1e7 / gap**2), a[1], a[5], b[1], b[5], rate, "", "published" if rate else "",
            line["place"], a[6], b[6], f"{line['f']:.4g}" if line["f"] else "", a[3], a[4], b[3], b[4], line["atom"]]


def write(path, header, rows):
    buffer = io.StringIO()
    writer = csv.writer(buffer, lineterminator="\n")
    writer.writerow(header)
    writer.writerows(rows)
    path.write_text(buffer.getvalue(), encoding="utf-8")
    return hashlib.sha256(path.read_bytes()).hexdigest(), len(rows)


def main():
    path, folder = pathlib.Path(sys.argv[1]), pathlib.Path(sys.argv[2]) / "model-atoms"
    data = path.read_bytes()
    if hashlib.sha256(data).hexdigest() != SHA256:
        raise SystemExit(f"{path}: the checksum is not that of lightweaver 0.17.0; fetch that version")
    kept = extract(data.decode("utf-8"))
    rows, refused, means = collect(atoms(kept))
    levels, lines, merged, summed = merge(rows)
    folder.mkdir(parents=True, exist_ok=True)
    (folder / "original.txt").write_text("".join(f"{p}:{t}\n" for p, t in kept), encoding="utf-8")
    order = lambda r: (source.order(r[0]), float(r[1]), r[5])  # noqa: E731
    lines.sort(key=lambda x: (source.order(x["ion"]), x["place"]))
    written = {"levels.csv": write(folder / "levels.csv", morton.LEVEL_HEADER, sorted(map(level_row, levels), key=order)),
               "lines.csv": write(folder / "lines.csv", HEADER, [line_row(x) for x in lines])}
    counts = {"rows": rows, "refused": refused, "means": means, "merged": merged, "summed": summed}
    (folder / "source.toml").write_text(names.manifest(written, counts, WRONG_RATES), encoding="utf-8")
    (folder / "NOTICE.txt").write_text(names.NOTICE, encoding="utf-8")
    print({k: n for k, (_, n) in written.items()}, means, len(rows), len(refused), len(merged), len(summed))


if __name__ == "__main__":
    main()
