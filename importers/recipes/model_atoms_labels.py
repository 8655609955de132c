"""Labels of the model atoms, and their `source.toml` and notice text. Python standard library only."""
import collections
import re

import morton_labels as labels
import morton_source as source

FUDGE = "this Mg II atom has 3p of J = 3/2 at 35672.8 per cm, 88 below 35760.88 (Morton 2003): no level is there"
NOTICE = """model-atoms
Data     Model atoms for non-equilibrium radiative transfer (levels and oscillator strengths, no citation per row)
Carried  lightweaver 0.17.0 (PyPI), lightweaver/rh_atoms.py; the lines used are kept with their numbers in original.txt
Licence  MIT
Holder   Copyright (c) 2019 Christopher M J Osborne
"""
TERM = re.compile(r"(?:(?<=\s)([a-z])-?)?(\d)([spdfghi])([eo])(?:\d?[\d/ ]*)$")


def configuration(text):
    """`2P6 3S 3S` → `2p6 3s2`; `2S2 2P (2PO)3D` → `2s2 2p (2Po) 3d`; `4s.4p` → `4s 4p`."""
    text = text.lower().replace(".", " ").replace(":", "").strip()
    text = re.sub(r"\((\d)([spdfghi])([eo]?)\)", lambda m: f"({m[1]}{m[2].upper()}{'o' if m[3] == 'o' else ''})", text)
    text = labels.configuration(text) or ""
    return re.sub(r"\b(\d+[a-z]) \1\b(?! \()", r"\g<1>2", text)


def label(text):
    """(configuration, term, odd?) of one level.

    The parity is that of the configuration where it can be read; the printed letter is wrong in places (`3PE1`, `1SO`).
    """
    bare = re.sub(r"^[A-Za-z]{1,2} ?[IVX]+\s+|^[a-z]{1,2} [ivx]+\s+", "", text)
    match = TERM.search(bare.lower())
    if not match:
        return "", "", None
    config = configuration(bare[: match.start()])
    parity = labels.parity(config)
    odd = match[4] == "o" if parity is None else parity == 1
    term = f"{match[2]}{match[3].upper()}{'o' if odd else ''}"
    return labels.agree(config, term)[0], f"{match[1]} {term}" if match[1] else term, odd


def manifest(written, counts, wrong_rates):
    """The source.toml with the reason of every row that is no line."""
    rows, refused, merged = counts["rows"], counts["refused"], counts["merged"]
    single = len(rows) + len(refused)
    reasons = collections.Counter(reason for _, reason, _ in refused)
    apart = sum(1 for _, a, b in merged if a and b and not 0.8 < a / b < 1.25)
    notes = [
        f"{single + counts['means']} rows: {counts['means']} with a level that is a term mean are skipped, {single} join "
        "two single levels (g = 2J + 1 and J allowed by L and S)",
        *(f"{n} of them refused: {reason}" for reason, n in reasons.most_common()),
        *(f"line {place} refused: {reason}" for place, reason, ion in refused if ion != "Ni I"),
        f"{len(merged)} rows repeat a line of another atom (levels within 0.5 per cm, equal J and parity) and are merged; "
        f"{apart} of them give an f that differs by more than 25 per cent",
        f"{len(counts['summed'])} rows are the second multipole part of a line of the same atom: their f are added",
        "f = 0 is no measured zero: the line has no rate",
        *(f"{why}: no rate entered ({lower} to {upper})" for (_, lower, upper), why in wrong_rates.items()),
        "energies are counted from the lowest level of the ion in its atom",
        "level uncertainty 0.3 per cm; Al II and O I 2.5 per cm, by which they differ from the papers",
        "level scale uncertainty 10 per cm: the singlets of one He I atom lie 4 and of another 6 per cm below the measured "
        "levels, Mg II 4s 9 per cm; the 0.1 per cm first taken for the scale proved wrong. Levels of one name in two atoms "
        "are one level",
        f"not read: Mg II 280.326 nm (atom MgII_fun) and its upper level: {FUDGE}",
        "no rate carries an uncertainty; no row has a citation: lowest preference",
        "C VI has a single electron: its energies and rates are theory (common practice) and count as computed",
    ]
    columns = source.COMMON_LINE_COLUMNS
    head = [
        'key = "model-atoms"', 'title = "Model atoms for non-equilibrium radiative transfer"',
        'citation = "Model atoms distributed with lightweaver 0.17.0 (C. M. J. Osborne, I. Milić 2021, ApJ 917, 14); no citation per row"',
        'licence = "MIT"', 'kind = "model"', "level_scale_uncertainty_per_cm = 10.0",
        "level_scale_uncertainty_relative = 0.0", 'computed_species = ["C VI"]', "notes = [",
        *("  " + source.quoted(n) + "," for n in notes), "]", "",
        "# No scope: each atom is a selection of levels made for one stellar problem, and none lists all strong lines of its ion.",
        "",
    ]
    ignore = ["row", "oscillator_strength", "atom"]
    return "\n".join(["\n".join(head), source.table("levels.csv", written, "levels", [], source.LEVEL_COLUMNS,
                                                      [("energy_per_cm", "35672.800", FUDGE)]),
                      source.table("lines.csv", written, "lines", ignore, columns, [("atom", "MgII_fun", FUDGE)])])
