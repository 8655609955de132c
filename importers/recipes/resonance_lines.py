#!/usr/bin/env python3
"""Makes levels.csv, lines.csv and source.toml of data/resonance-lines from its kept inputs.

Inputs   frequencies.csv, isotope_shifts.csv, hyperfine.csv, lifetimes.csv, branching.csv, anchors.csv:
         values of papers, entered from memory, each row with its paper.
Usage    resonance_lines.py DATA_FOLDER

Level energies are sums of the given frequencies from the ground level, at the centre of gravity of the
hyperfine structure. A row that is a hyperfine component is brought to the centre of gravity by
E(F) = A K/2 + B (3/4 K (K+1) - I (I+1) J (J+1)) / (2 I (2I-1) J (2J-1)), K = F(F+1) - I(I+1) - J(J+1)
(Casimir 1936; Arimondo, Inguscio and Violino 1977, Rev. Mod. Phys. 49, 31).
A line's rate is branching fraction / lifetime. Python standard library only; rerunning gives the same bytes.
"""
import csv
import hashlib
import io
import pathlib
import re
import sys
from decimal import Decimal, getcontext
from fractions import Fraction

getcontext().prec = 40
MHZ_PER_CM = Decimal("29979.2458")  # speed of light, exact: 1 cm-1 in MHz
LEVELS = ["species", "energy_per_cm", "uncertainty_per_cm", "configuration", "term", "j", "g", "source"]
LINES = [
    "species", "kind", "wavelength_nm", "medium", "wavelength_uncertainty_nm", "lower_energy_per_cm", "lower_j",
    "upper_energy_per_cm", "upper_j", "rate_per_s", "rate_relative_uncertainty", "rate_origin", "row",
    "lower_configuration", "lower_term", "upper_configuration", "upper_term", "source",
]


def read(folder, name):
    with open(folder / name, encoding="utf-8", newline="") as file:
        return list(csv.DictReader(file))


def level(row, side=""):
    return tuple(row[side + part] for part in ("configuration", "term", "j"))


def element(species):
    """`87Rb I` belongs to `Rb I`, `D I` to `H I`."""
    return re.sub(r"^\d+", "", species).replace("D ", "H ")


def exact(fraction):
    return Decimal(fraction.numerator) / Decimal(fraction.denominator)


def hyperfine_shift(constants, j, f):
    """Energy of F above the centre of gravity and its variance, MHz."""
    i, j, f = Fraction(constants["nuclear_spin"]), Fraction(j), Fraction(f)
    k = f * (f + 1) - i * (i + 1) - j * (j + 1)
    first, first_sigma = exact(k / 2), Decimal(constants["a_uncertainty_mhz"])
    shift, variance = first * Decimal(constants["a_mhz"]), (first * first_sigma) ** 2
    if constants["b_mhz"]:
        second = exact((k * (k + 1) * 3 / 4 - i * (i + 1) * j * (j + 1)) / (2 * i * (2 * i - 1) * j * (2 * j - 1)))
        shift += second * Decimal(constants["b_mhz"])
        variance += (second * Decimal(constants["b_uncertainty_mhz"])) ** 2
    return shift, variance


def centroid(row, hyperfine):
    """Frequency of the centre of gravity and its variance, MHz."""
    frequency, variance = Decimal(row["frequency_mhz"]), Decimal(row["uncertainty_mhz"]) ** 2
    for side, sign in (("lower_", 1), ("upper_", -1)):
        f = row[side + "f"]
        if f:
            shift, extra = hyperfine_shift(hyperfine[row["species"], level(row, side)], row[side + "j"], f)
            frequency, variance = frequency + sign * shift, variance + extra
    return frequency, variance


def transitions(folder):
    """(species, lower, upper) -> (frequency, variance, row, source), absolute ones and those from a shift."""
    hyperfine = {(row["species"], level(row)): row for row in read(folder, "hyperfine.csv")}
    found = {}
    for number, row in enumerate(read(folder, "frequencies.csv"), 2):
        key = row["species"], level(row, "lower_"), level(row, "upper_")
        if key in found:
            sys.exit(f"frequencies.csv, line {number}: this transition stands there twice")
        found[key] = (*centroid(row, hyperfine), f"frequencies.csv:{number}", row["source"])
    for number, row in enumerate(read(folder, "isotope_shifts.csv"), 2):
        lower, upper = level(row, "lower_"), level(row, "upper_")
        frequency, variance, _, source = found[row["reference"], lower, upper]
        variance += Decimal(row["uncertainty_mhz"]) ** 2
        found[row["species"], lower, upper] = (
            frequency + Decimal(row["shift_mhz"]), variance, f"isotope_shifts.csv:{number}",
            f"{row['source']}; on {row['reference']}: {source}",
        )
    return found


def chain(first, then):
    return f"{first}; {then}" if first else then


def energies(folder, found):
    """(species, level) -> (energy, variance, source) in MHz above the ground level."""
    held = {}
    for row in read(folder, "anchors.csv"):
        variance = (Decimal(row["uncertainty_per_cm"]) * MHZ_PER_CM) ** 2
        held[row["species"], level(row)] = Decimal(row["energy_per_cm"]) * MHZ_PER_CM, variance, row["source"]
    anchored = {species for species, _ in held}
    for species, lower, _ in found:  # the first lower level of a species is its ground level
        if species not in anchored:
            held[species, lower] = Decimal(0), Decimal(0), ""
            anchored.add(species)
    changed = True
    while changed:
        changed = False
        for (species, lower, upper), (frequency, variance, _, source) in found.items():
            low, high = (species, lower), (species, upper)
            if low in held and high not in held:
                held[high] = held[low][0] + frequency, held[low][1] + variance, chain(held[low][2], source)
                changed = True
            elif high in held and low not in held:
                held[low] = held[high][0] - frequency, held[high][1] + variance, chain(held[high][2], source)
                changed = True
    return held


def allowed(lower, upper):
    """Electric dipole by parity and J; spin is not asked (intercombination lines are listed)."""
    low, high = Fraction(lower[2]), Fraction(upper[2])
    return lower[1].endswith("o") != upper[1].endswith("o") and abs(low - high) <= 1 and low + high > 0


def plain(value, sigma, least, finer=2):
    """The value with digits down to 10^-finer of its sigma, at least `least` behind the point."""
    places = least if not sigma else max(least, finer - sigma.adjusted())
    return f"{value:.{min(places, 14)}f}"


def energy_text(energy, variance):
    """Finer than its sigma, because intervals are known better than a common anchor (helium)."""
    return plain(energy / MHZ_PER_CM, variance.sqrt() / MHZ_PER_CM, 4, 4) if energy else "0"


def short(value):
    return f"{value:.2E}" if value else "0"


def rates(folder):
    lifetimes = {(row["species"], level(row)): row for row in read(folder, "lifetimes.csv")}
    found = {}
    for row in read(folder, "branching.csv"):
        life = lifetimes[row["species"], level(row, "upper_")]
        tau, fraction = Decimal(life["lifetime_ns"]), Decimal(row["fraction"])
        relative = ((Decimal(life["uncertainty_ns"]) / tau) ** 2 + (Decimal(row["uncertainty"]) / fraction) ** 2).sqrt()
        found[row["species"], level(row, "lower_"), level(row, "upper_")] = (
            f"{fraction / tau * 10 ** 9:.5E}", f"{relative:.6f}", f"{life['source']}; branching: {row['source']}")
    return found


def complete(found, held, rated):
    """Adds the lines that have a rate and two held levels but no frequency of their own."""
    for species in sorted({species for species, _, _ in found}):
        for name, lower, upper in rated:
            low, high = held.get((species, lower)), held.get((species, upper))
            if element(species) == name and low and high and (species, lower, upper) not in found:
                found[species, lower, upper] = (high[0] - low[0], low[1] + high[1], "difference of levels", "as its levels")


def line_row(key, transition, held, rated):
    species, lower, upper = key
    frequency, variance, row, source = transition
    rate, relative, rate_source = rated.get((element(species), lower, upper), ("", "", ""))
    wavelength = MHZ_PER_CM * 10 ** 7 / frequency
    sigma = wavelength * variance.sqrt() / frequency
    ends = []
    for end in (lower, upper):
        ends += [energy_text(*held[species, end][:2]), end[2]]
    paper = f"position: {source}" + (f"; rate: {rate_source}" if rate else "")
    return [species, "isotope", plain(wavelength, sigma, 6), "vacuum", short(sigma), *ends, rate, relative,
            "published" if rate else "", row, lower[0], lower[1], upper[0], upper[1], paper]


def write(folder, name, header, rows):
    text = io.StringIO()
    writer = csv.writer(text, lineterminator="\n")
    writer.writerow(header)
    writer.writerows(rows)
    data = text.getvalue().encode()
    (folder / name).write_bytes(data)
    return hashlib.sha256(data).hexdigest(), len(rows)


SOURCE = """key = "resonance-lines"
title = "Resonance lines and low levels of single isotopes: frequencies, lifetimes, hyperfine structure"
citation = "papers named in each row, values from memory"
licence = "CC0-1.0"
kind = "curated"
level_scale_uncertainty_per_cm = 0.0
level_scale_uncertainty_relative = 0.0
notes = [
  "frequencies, shifts, hyperfine constants, lifetimes and branching fractions are kept as entered; levels.csv and lines.csv follow from them by the recipe",
  "energies and wavelengths are those of the centre of gravity of the hyperfine structure; components follow from hyperfine.csv",
  "lines are the electric dipole ones by parity and J; clock and two-photon frequencies give levels only",
  "an isotope with a shift only takes the frequency of its reference isotope plus the shift; the uncertainties add in squares",
  "a rate is branching fraction over lifetime; a line without either has none",
  "138Ba I and 88Sr I singlet lines rest on levels of the natural mixture, 198Hg I on a lamp wavelength: their uncertainties are the widest here",
]

[[table]]
file = "levels.csv"
sha256 = "{levels[0]}"
rows = {levels[1]}
records = "levels"
format = "delimited"
ignore = ["source"]
[table.columns]
species = {{ column = "species" }}
energy = {{ column = "energy_per_cm", unit = "cm-1" }}
energy_uncertainty = {{ column = "uncertainty_per_cm", unit = "cm-1" }}
configuration = {{ column = "configuration" }}
term = {{ column = "term" }}
j = {{ column = "j" }}
g = {{ column = "g" }}

[[table]]
file = "lines.csv"
sha256 = "{lines[0]}"
rows = {lines[1]}
records = "lines"
format = "delimited"
ignore = ["row", "source"]
[table.columns]
species = {{ column = "species" }}
kind = {{ column = "kind" }}
wavelength = {{ column = "wavelength_nm", unit = "nm", medium = {{ column = "medium" }} }}
wavelength_uncertainty = {{ column = "wavelength_uncertainty_nm", unit = "nm" }}
lower_energy = {{ column = "lower_energy_per_cm", unit = "cm-1" }}
lower_j = {{ column = "lower_j" }}
lower_configuration = {{ column = "lower_configuration" }}
lower_term = {{ column = "lower_term" }}
upper_energy = {{ column = "upper_energy_per_cm", unit = "cm-1" }}
upper_j = {{ column = "upper_j" }}
upper_configuration = {{ column = "upper_configuration" }}
upper_term = {{ column = "upper_term" }}
rate = {{ column = "rate_per_s", unit = "s-1" }}
rate_uncertainty = {{ column = "rate_relative_uncertainty" }}
rate_origin = {{ column = "rate_origin" }}
from_levels = {{ constant = "false" }}
"""


def main(folder):
    found = transitions(folder)
    held, rated = energies(folder, found), rates(folder)
    for species, *ends in found:
        if any((species, end) not in held for end in ends):
            sys.exit(f"{species}: {ends} hangs on no ground level")
    complete(found, held, rated)
    levels = []
    for (species, (configuration, term, j)), (energy, variance, source) in held.items():
        sigma = variance.sqrt() / MHZ_PER_CM
        text, weight = energy_text(energy, variance), 2 * Fraction(j) + 1
        levels.append([species, text, short(sigma), configuration, term, j, weight, source])
    levels.sort(key=lambda row: (element(row[0]), row[0], float(row[1])))
    lines = [line_row(key, transition, held, rated) for key, transition in found.items() if allowed(*key[1:])]
    lines.sort(key=lambda row: (element(row[0]), row[0], float(row[2])))
    written = {"levels": write(folder, "levels.csv", LEVELS, levels), "lines": write(folder, "lines.csv", LINES, lines)}
    (folder / "source.toml").write_text(SOURCE.format(**written), encoding="utf-8")
    print(f"{len(levels)} levels, {len(lines)} lines, {sum(1 for row in lines if row[9])} with a rate")


if __name__ == "__main__":
    main(pathlib.Path(sys.argv[1]))
