#!/usr/bin/env python3
"""Makes the bundled tables of the ions entered by hand.

usage: curated.py [DATA]        (default: the data folder of this checkout)

Reads data/curated-<ion>/entered_levels.csv and entered_lines.csv (what two separate entries from memory agree on) and
`curated_decisions.toml`; writes levels.csv, lines.csv and source.toml beside them. later_levels.csv and later_lines.csv, where they
are, hold values that one of the two entries had and a third recollection, made without a look at it, confirmed. second_levels.csv
and second_lines.csv hold what two further separate entries agree on; of these, a level of which not both are sure is kept where two
remembered lines confirm it, and a line that is there already only gives its rate. Standard library only; nothing is fetched.

Levels: those that a remembered line confirms (`line`), whose term is confirmed (`term`, three times the entry's uncertainty),
of the lowest configuration (`ground`), or known through a coarse line only (`coarse`, widened to what the line allows);
untested ones only where the decisions name a paper table that holds them; where all lines of a level miss it in one direction, its
uncertainty is widened by as much. Lines: the remembered wavelength with one unit of
its last digit, 0.001 nm at least (while remembering, wavelengths and levels were compared, so that more digits prove nothing),
and widened to the misfit where it misses its levels by more than 3 sigma. Rates: as entered, 15 % where no uncertainty was
stated, as derived where both entries took them from the multiplet by LS fractions (entered_rates.csv); components missing from a multiplet follow by `curated_rates.py`.
"""
import csv
import hashlib
import math
import os
import sys
import tomllib

import curated_labels as labels
import curated_rates as rates

HERE = os.path.dirname(os.path.abspath(__file__))
LEVEL_COLUMNS = "species energy_per_cm uncertainty_per_cm configuration term j g".split()
# The index of air is not known beyond: such lines are given where their levels put them.
HIGHEST_AIR_NM = 2500.0
LINE_COLUMNS = ("species kind wavelength_nm medium wavelength_uncertainty_nm lower_energy_per_cm lower_j upper_energy_per_cm "
                "upper_j rate_per_s rate_relative_uncertainty rate_origin from_levels row").split()
SCALE_FROM_TERM = 3.0
BY_FRACTIONS = "multiplet+LS"
BAND_GAP = 1.5
BAND_LINES = 8
BAND_END_NM = 2500.0
# Spectra of an open d or f shell: a list claims a place only where it holds so many lines within 10 % of it.
NEIGHBOURHOOD = 0.1


def read(path):
    with open(path, encoding="utf-8", newline="") as file:
        return list(csv.DictReader(file))


def last_digit(text):
    return 10.0 ** -len(text.partition(".")[2])


def decided(decisions, table, ion, **where):
    """The decisions of one table for one ion that match all given fields."""
    return [d for d in decisions.get(table, []) if d["ion"] == ion and all(d.get(k, v) == v for k, v in where.items())]


class Ion:
    """One ion: its settings, kept levels and bundled lines."""

    def __init__(self, folder, decisions):
        self.folder, self.decisions = folder, decisions
        self.name = ion_name(os.path.basename(folder))
        self.species = self.name.replace("_", " ")
        self.settings = {**decisions["defaults"], **decisions["ion"][self.name]}
        self.entered_levels = self.rows("levels.csv")
        self.entered_lines = self.rows("lines.csv")
        self.by_fractions = self.fraction_rates()
        self.left_out = []
        self.levels = sorted((level for level in map(self.level, self.entered_levels) if level), key=lambda level: level["e"])
        self.by_key = {(level["text"], level["j"]): level for level in self.levels}
        self.lines = self.make_lines()

    def rows(self, table):
        """Rows of entered_TABLE, later_TABLE and second_TABLE, numbered, with the J that the decisions correct."""
        out = []
        for prefix, mark in (("entered_", ""), ("later_", "later "), ("second_", "second ")):
            path = os.path.join(self.folder, prefix + table)
            found = read(path) if os.path.exists(path) else []
            out += [{**row, "row": f"{mark}{number}"} for number, row in enumerate(found, start=1)]
        for choice in decided(self.decisions, "j", self.name):
            for row in out:
                for energy, j in (("energy_per_cm", "j"), ("lower_energy_per_cm", "lower_j"), ("upper_energy_per_cm", "upper_j")):
                    if row.get(energy) == choice["energy"] and row[j] == choice["entered"]:
                        row[j] = choice["j"]
        return out

    def fraction_rates(self):
        """{level pair: how many of the two entries took its rate from the multiplet by LS fractions}."""
        out = {}
        for row in self.rows("rates.csv"):
            pair = row["lower_energy_per_cm"], row["lower_j"], row["upper_energy_per_cm"], row["upper_j"]
            out[pair] = (row["first_entry"], row["second_entry"]).count(BY_FRACTIONS)
        return out

    def level(self, row):
        """The kept level of one entered row, or None."""
        text, j = row["energy_per_cm"], row["j"]
        drop = decided(self.decisions, "drop_level", self.name, energy=text, j=j)
        outside = any(text in d["energies"] for d in decided(self.decisions, "outside", self.name))
        if drop or (row["tested"] == "none" and not outside):
            self.left_out.append((text, drop[0]["reason"] if drop else "no line, term or paper table tests it"))
            return None
        configuration, term, _ = labels.settle(row)
        for choice in decided(self.decisions, "label", self.name, energy=text):
            configuration, term = choice["configuration"], choice["term"]
        return dict(text=text, e=float(text), j=j, configuration=configuration, term=term, sigma=self.level_sigma(row))

    def level_sigma(self, row):
        """1 sigma in cm-1; the ground level is exact by definition."""
        text, energy, sigma = row["energy_per_cm"], float(row["energy_per_cm"]), float(row["uncertainty_per_cm"])
        if energy == 0:
            return 0.0
        if row["tested"] == "term":
            sigma *= SCALE_FROM_TERM
        if row["tested"] == "coarse":
            sigma = max(sigma, self.coarse_sigma(text, row["j"]))
        for choice in decided(self.decisions, "widen", self.name):
            if text in choice["energies"]:
                sigma = max(sigma, choice["uncertainty_per_cm"])
        sigma = max(sigma, self.settings.get("minimum_uncertainty_per_cm", 0.0))
        return max(sigma, self.common_misfit(text, row["j"], sigma))

    def common_misfit(self, text, j, sigma):
        """cm-1 by which all lines of a level (two at least) miss it in one direction, where that is significant, else 0.

        A remembered wavelength scatters by 0.7 of its last digit and at least 0.0003 nm about its levels (68 % of 1398 lines with
        three decimals lie within 0.0007 nm, of 3101 lines with four within 0.00015).
        """
        pulls = []
        for row in self.entered_lines:
            ends = {(row["lower_energy_per_cm"], row["lower_j"]): -1, (row["upper_energy_per_cm"], row["upper_j"]): 1}
            if (text, j) in ends:
                per_cm = 1e7 / float(row["wavelength_nm"]) ** 2
                scatter = max(0.0003, 0.7 * last_digit(row["wavelength_nm"])) * per_cm
                pulls.append((ends[text, j] * float(row["ritz_diff_nm"]) * per_cm, scatter))
        if len(pulls) < 2 or len({pull > 0 for pull, _ in pulls}) > 1:
            return 0.0
        weight = sum(1 / scatter**2 for _, scatter in pulls)
        mean = abs(sum(pull / scatter**2 for pull, scatter in pulls) / weight)
        return mean if mean > 2.5 * math.hypot(weight**-0.5, sigma) else 0.0

    def coarse_sigma(self, text, j):
        """What the best line of a coarsely known level allows, cm-1: its misfit and one unit of its last digit."""
        allowed = []
        for row in self.entered_lines:
            if (text, j) in ((row["lower_energy_per_cm"], row["lower_j"]), (row["upper_energy_per_cm"], row["upper_j"])):
                wavelength = float(row["wavelength_nm"])
                off = abs(float(row["ritz_diff_nm"])) + last_digit(row["wavelength_nm"])
                allowed.append(off * 1e7 / wavelength**2)
        return min(allowed)

    def make_lines(self):
        """Bundled rows: entered lines, the blends among them twice, then derived components."""
        rows, rated, seen = [], {}, set()
        for row in self.entered_lines:
            pair = row["lower_energy_per_cm"], row["lower_j"], row["upper_energy_per_cm"], row["upper_j"]
            if pair[:2] not in self.by_key or pair[2:] not in self.by_key:
                self.left_out.append((row["wavelength_nm"], "a level of it is left out"))
                continue
            rate = self.entered_rate(row)
            if rate:
                rated[pair] = rate
            if pair not in seen:
                rows += self.line_rows(row, pair, row["row"])
            seen.add(pair)
        trusted = {pair: rate for pair, rate in rated.items() if not self.by_fractions.get(pair)}
        derived = rates.derive(self.levels, trusted, lambda pair: pair not in rated)
        out = [self.with_rate(row, rated, derived) for row in rows]
        missing = sorted((pair for pair in derived if pair not in seen), key=lambda pair: (self.vacuum_nm(pair), pair))
        return out + [self.with_rate(self.ritz_row(pair, "derived"), rated, derived) for pair in missing]

    def entered_rate(self, row):
        """(rate, relative uncertainty) of an entered row, or None where it holds none or the decisions withhold it."""
        if not row["rate_per_s"]:
            return None
        stated = float(row["rate_uncertainty_percent"]) / 100 if row["rate_uncertainty_percent"] else self.settings["rate_uncertainty"]
        for choice in decided(self.decisions, "rate", self.name, wavelength_nm=row["wavelength_nm"]):
            if choice["action"] == "withhold":
                self.left_out.append((row["wavelength_nm"], choice["reason"]))
                return None
            stated = max(stated, choice["uncertainty"])
        return float(row["rate_per_s"]), stated

    def line_rows(self, row, pair, number):
        """One row, or for a blend two: the component at its Ritz position and the remembered wavelength as `blend`."""
        blends = decided(self.decisions, "blend", self.name, wavelength_nm=row["wavelength_nm"], lower_j=pair[1], upper_j=pair[3])
        measured = dict(kind="line", pair=pair, wavelength=row["wavelength_nm"], medium=row["medium"],
                        sigma=f"{self.wavelength_sigma(row, pair):.4g}", row=number)
        if not blends and row["medium"] == "air" and float(row["wavelength_nm"]) > HIGHEST_AIR_NM:
            return [self.ritz_row(pair, number)]
        if not blends:
            return [measured]
        strongest = blends[0].get("strongest_upper_j")
        if strongest:
            upper = min((level for level in self.levels if level["j"] == strongest), key=lambda level: abs(level["e"] - float(pair[2])))
            pair_of_blend = (*pair[:2], upper["text"], upper["j"])
        else:
            pair_of_blend = pair
        blend = {**measured, "kind": "blend", "pair": pair_of_blend, "sigma": f"{self.blend_sigma(row, pair):.4g}"}
        return [self.ritz_row(pair, number), blend]

    def blend_sigma(self, row, pair):
        """1 sigma of a blend taken for its strongest component, nm: never less than twice what the levels give."""
        levels = self.pair_sigma(pair) * float(row["wavelength_nm"]) ** 2 / 1e7
        return max(self.wavelength_sigma(row, pair), abs(float(row["ritz_diff_nm"])), 2 * levels)

    def wavelength_sigma(self, row, pair):
        """1 sigma of a remembered wavelength, nm."""
        wavelength, misfit = float(row["wavelength_nm"]), abs(float(row["ritz_diff_nm"]))
        sigma = max(last_digit(row["wavelength_nm"]), self.settings["minimum_line_uncertainty_nm"])
        levels = self.pair_sigma(pair) * wavelength**2 / 1e7
        return misfit if misfit > 3 * math.hypot(sigma, levels) else sigma

    def pair_sigma(self, pair):
        return math.hypot(self.by_key[pair[:2]]["sigma"], self.by_key[pair[2:]]["sigma"])

    def vacuum_nm(self, pair):
        return 1e7 / (self.by_key[pair[2:]]["e"] - self.by_key[pair[:2]]["e"])

    def ritz_row(self, pair, row):
        """A component at the position that its levels give."""
        vacuum = self.vacuum_nm(pair)
        sigma = max(self.pair_sigma(pair), 0.001) * vacuum**2 / 1e7
        digits = max(5, 1 - math.floor(math.log10(sigma)))
        return dict(kind="line", pair=pair, wavelength=f"{vacuum:.{digits}f}", medium="vacuum", sigma=f"{sigma:.3g}", row=row, ritz=True)

    def with_rate(self, row, rated, derived):
        """The finished CSV row; a blend carries no rate of its own."""
        pair = row["pair"]
        rate = uncertainty = origin = ""
        if row["kind"] == "line" and pair in rated:
            origin = "derived" if self.by_fractions.get(pair) == 2 else "published"
            rate, uncertainty = f"{rated[pair][0]:.3e}", f"{rated[pair][1]:.3g}"
        elif row["kind"] == "line" and pair in derived:
            rate, uncertainty, origin = f"{derived[pair][0]:.3e}", f"{derived[pair][1]:.3g}", "derived"
        return [self.species, row["kind"], row["wavelength"], row["medium"], row["sigma"], *pair, rate, uncertainty, origin,
                "true" if row.get("ritz") else "false", row["row"]]

    def level_rows(self):
        for level in self.levels:
            g = f"{2 * float(level['j']) + 1:g}" if level["j"] != "" else ""
            yield [self.species, level["text"], f"{level['sigma']:.4g}", level["configuration"], level["term"], level["j"], g]

    def bands(self):
        """[from, to] in nm of each band that the lines of the first entry cover; empty where they claim nothing.

        Lines lie without a gap of more than a factor 1.5, eight at least. A spectrum of an open d or f shell has lines everywhere, so
        that a sparse stretch of its list shows what was not remembered, not what is not there: there the neighbourhood must hold eight.
        """
        if self.settings.get("band") == "none":
            return []
        if "band_nm" in self.settings:
            return [self.settings["band_nm"]]
        runs, run = [], []
        first = (row for row in self.entered_lines if not row["row"].startswith("second"))
        for wavelength in sorted(float(row["wavelength_nm"]) for row in first):
            if run and wavelength > run[-1] * BAND_GAP:
                runs.append(run)
                run = []
            run.append(wavelength)
        best = max(runs + [run], key=len)
        if len(best) < BAND_LINES:
            return []
        whole = [math.floor(best[0]), min(math.ceil(best[-1]), BAND_END_NM)]
        return dense_bands(best, whole) if has_open_d_or_f_shell(self.species) else [whole]


def dense_bands(wavelengths, whole):
    """The stretches of a band, in steps of 1 nm, with eight lines within 10 % of every place."""
    def is_dense(nm):
        return sum(abs(wavelength / nm - 1) <= NEIGHBOURHOOD for wavelength in wavelengths) >= BAND_LINES

    bands = []
    for nm in range(int(whole[0]), int(whole[1])):
        if not (is_dense(nm) and is_dense(nm + 1)):
            continue
        if bands and bands[-1][1] == nm:
            bands[-1][1] = nm + 1
        else:
            bands.append([nm, nm + 1])
    return [band for band in bands if band[1] > band[0] * (1 + NEIGHBOURHOOD)]


def has_open_d_or_f_shell(species):
    """By the number of electrons and, from the sixth row on, the nuclear charge; as `AtomClass` of the program has it."""
    element, stage = species.split()
    charge, electrons = ELEMENTS.index(element) + 1, ELEMENTS.index(element) + 2 - STAGES.index(stage) - 1
    if electrons <= 18:
        return False
    if electrons <= 54:
        return 3 <= electrons - (18 if electrons <= 36 else 36) <= 10
    valence = electrons - 54
    if charge >= 70 and valence >= 15:
        return 3 <= valence - 14 <= 10
    return charge >= 57


def ion_name(folder):
    """`curated-he-i` -> `He_I`."""
    element, stage = folder.removeprefix("curated-").split("-")
    return f"{element.capitalize()}_{stage.upper()}"


def write_csv(path, columns, rows):
    with open(path, "w", encoding="utf-8", newline="") as file:
        writer = csv.writer(file, lineterminator="\n")
        writer.writerow(columns)
        writer.writerows(rows)


def quoted(text):
    return '"' + text.replace("\\", "\\\\").replace('"', '\\"') + '"'


def sha256(path):
    with open(path, "rb") as file:
        return hashlib.sha256(file.read()).hexdigest()


ELEMENTS = """H He Li Be B C N O F Ne Na Mg Al Si P S Cl Ar K Ca Sc Ti V Cr Mn Fe Co Ni Cu Zn Ga Ge As Se Br Kr Rb Sr Y Zr Nb Mo Tc Ru Rh Pd Ag
Cd In Sn Sb Te I Xe Cs Ba La Ce Pr Nd Pm Sm Eu Gd Tb Dy Ho Er Tm Yb Lu Hf Ta W Re Os Ir Pt Au Hg Tl Pb Bi""".split()
STAGES = "I II III IV V VI".split()

LEVEL_MAPPING = """species = { column = "species" }
energy = { column = "energy_per_cm", unit = "cm-1" }
energy_uncertainty = { column = "uncertainty_per_cm", unit = "cm-1" }
configuration = { column = "configuration" }
term = { column = "term" }
j = { column = "j" }
g = { column = "g" }
"""
LINE_MAPPING = """species = { column = "species" }
kind = { column = "kind" }
wavelength = { column = "wavelength_nm", unit = "nm", medium = { column = "medium" } }
wavelength_uncertainty = { column = "wavelength_uncertainty_nm", unit = "nm" }
lower_energy = { column = "lower_energy_per_cm", unit = "cm-1" }
lower_j = { column = "lower_j" }
upper_energy = { column = "upper_energy_per_cm", unit = "cm-1" }
upper_j = { column = "upper_j" }
rate = { column = "rate_per_s", unit = "s-1" }
rate_uncertainty = { column = "rate_relative_uncertainty" }
rate_origin = { column = "rate_origin" }
from_levels = { column = "from_levels" }
"""


def notes_of(ion):
    counts = f"{len(ion.levels)} of {len(ion.entered_levels)} entered levels are bundled; {len(ion.left_out)} entered rows are left out."
    derived = sum(1 for row in ion.lines if row[11] == "derived")
    notes = ["Entered twice by hand from memory; only what both entries agree on is kept. " + counts]
    if derived:
        notes.append(f"{derived} rates follow from others of their multiplet by the fractions of LS coupling (rate_origin derived).")
    return notes + ion.settings.get("notes", [])


def source_toml(ion):
    """The text of source.toml."""
    settings = ion.settings
    citation = settings["citation"]
    citation = citation if citation.endswith("from memory") else citation + " (from memory)"
    out = [f"key = {quoted(os.path.basename(ion.folder))}", f"title = {quoted(ion.species + ': levels and lines entered by hand')}",
           f"citation = {quoted(citation)}", 'licence = "CC0-1.0"', 'kind = "curated"',
           f"level_scale_uncertainty_per_cm = {settings['scale_uncertainty_per_cm']}", f"energy_scale = {quoted(settings['energy_scale'])}",
           "notes = [" + ", ".join(map(quoted, notes_of(ion))) + "]"]
    for band in ion.bands():
        out += ["", "[[scope]]", f"species = [{quoted(ion.species)}]", f"band_nm = [{float(band[0])}, {float(band[1])}]", 'completeness = "strong"']
    for name, rows, records, mapping, ignore in (("levels.csv", len(ion.levels), "levels", LEVEL_MAPPING, []),
                                                 ("lines.csv", len(ion.lines), "lines", LINE_MAPPING, ["row"])):
        if rows:
            out += ["", "[[table]]", f"file = {quoted(name)}", f"sha256 = {quoted(sha256(os.path.join(ion.folder, name)))}", f"rows = {rows}",
                    f"records = {quoted(records)}", 'format = "delimited"']
            out += [f"ignore = [{', '.join(map(quoted, ignore))}]"] if ignore else []
            out += ["[table.columns]", mapping.rstrip()]
    return "\n".join(out) + "\n"


def make(folder, decisions):
    """Writes the bundled files of one ion and returns it."""
    ion = Ion(folder, decisions)
    write_csv(os.path.join(folder, "levels.csv"), LEVEL_COLUMNS, ion.level_rows())
    write_csv(os.path.join(folder, "lines.csv"), LINE_COLUMNS, ion.lines)
    with open(os.path.join(folder, "source.toml"), "w", encoding="utf-8") as file:
        file.write(source_toml(ion))
    return ion


def main():
    data = sys.argv[1] if len(sys.argv) > 1 else os.path.join(HERE, "..", "..", "data")
    with open(os.path.join(HERE, "curated_decisions.toml"), "rb") as file:
        decisions = tomllib.load(file)
    folders = sorted(entry.path for entry in os.scandir(data) if entry.name.startswith("curated-") and entry.is_dir())
    ions = [make(folder, decisions) for folder in folders]
    unknown = set(decisions["ion"]) - {ion.name for ion in ions}
    if unknown:
        sys.exit(f"decisions for ions without a folder: {sorted(unknown)}")
    rated = [row for ion in ions for row in ion.lines if row[9]]
    print(f"{len(ions)} ions: {sum(len(i.levels) for i in ions)} levels, {sum(len(i.lines) for i in ions)} lines, {len(rated)} rates "
          f"({sum(r[11] == 'derived' for r in rated)} derived), {sum(1 for i in ions if i.bands())} with a scope")


if __name__ == "__main__":
    main()
