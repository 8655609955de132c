"""The `source.toml` and the notice text of the two Morton tables. Python standard library only."""

ELEMENTS = (
    "H He Li Be B C N O F Ne Na Mg Al Si P S Cl Ar K Ca Sc Ti V Cr Mn Fe Co Ni Cu Zn Ga Ge As Se Br Kr "
    "Rb Sr Y Zr Nb Mo Tc Ru Rh Pd Ag Cd In Sn Sb Te I Xe Cs Ba La Ce Pr Nd Pm Sm Eu Gd Tb Dy Ho Er Tm Yb "
    "Lu Hf Ta W Re Os Ir Pt Au Hg Tl Pb Bi Po At Rn Fr Ra Ac Th Pa U"
).split()
ROMAN = "I II III IV V VI VII VIII IX X XI XII XIII XIV XV XVI XVII XVIII XIX XX XXI XXII XXIII XXIV XXV XXVI".split()

EDITIONS = {
    "5cac1008c2b2694a4279e31272619fe607e323a8a5e61ea4985a8a6b0d6b127c": {
        "key": "morton2003",
        "title": "Atomic data for resonance absorption lines III: wavelengths longward of the Lyman limit, hydrogen to gallium",
        "citation": "D. C. Morton 2003, ApJS 149, 205, table 2",
        "file": "morton03_table2.dat",
        "computed": ["H I", "D I"],
    },
    "e15cd44f967fb3aa214f217658f7465cb08a9ae7d2f46606a4270f2f8f3a9b8a": {
        "key": "morton2000",
        "title": "Atomic data for resonance absorption lines II: wavelengths longward of the Lyman limit, heavy elements",
        "citation": "D. C. Morton 2000, ApJS 130, 403, table 2",
        "file": "morton00_table2.dat",
        "computed": [],
    },
}

NOTICE = """{key}
Data     {citation}
Carried  linetools 0.3.2 (PyPI), linetools/data/lines/{file}, kept unchanged as original.dat
Licence  BSD-3-Clause (package); the table's figures are the published facts of the paper
Holder   Copyright (c) the linetools contributors (J. X. Prochaska, N. Tejos, N. Crighton and others)
"""


def order(name):
    """Sort key of a species: atomic number, then stage, then isotope."""
    element, stage = name.split()
    mass = "".join(c for c in element if c.isdigit())
    element = element[len(mass):]
    number = 1 if element == "D" else ELEMENTS.index(element) + 1
    return number, ROMAN.index(stage), 2 if element == "D" else int(mass or 0)


def quoted(text):
    return '"' + text.replace("\\", "\\\\").replace('"', '\\"') + '"'


def notes(edition, counts, written):
    """Each skipped class with its count and reason, and every mended or odd place."""
    out = [
        f"{counts['read']} data rows: {written['lines.csv'][1]} lines of {counts['ions']} ions, "
        f"{counts['skipped']} multiplet means that have components (or belong to an isotope) are skipped"
    ]
    if "isotopes.csv" in written:
        n = written["isotopes.csv"][1]
        out.append(f"{n} rows of single isotopes are reports of the isotope, never a second line of the element: "
                   "they are in isotopes.csv, with the element in the column `doubles`")
        out.append("argon's neutral atom is printed as 40Ar I only (2 rows): they stand in isotopes.csv as well")
    if counts["means"]:
        out.append(f"{counts['means']} multiplet means stand alone and are kept as kind `mean`; their upper "
                   "levels (term means) have g and no J")
    if counts["blends"]:
        out.append(f"{counts['blends']} rows of O I give one weight for several unresolved levels (8 = 3 + 5, 15 = 3 + 5 + 7): "
                   "kind `blend`, their upper level has g and no J, and A is converted from the printed f")
    for place, printed, read in counts["damaged"]:
        out.append(f"line {place}: damaged number `{printed}` read as {read}")
    for place, text in counts["dropped"]:
        out.append(f"line {place}: configuration of `{text}` dropped: its parity or its electron "
                   "count contradicts the term or the ground term")
    for place, text in counts["mended"]:
        out.append(f"line {place}: parity mark of `{text}` set by its configuration")
    out.append("the printed air wavelength, total rate (gamma), log gf and log wavelength-f columns are not imported; "
               "air wavelengths are computed")
    out.append("energy uncertainty: one unit of the last printed digit; the ground level is zero by definition")
    out.append("a mark before the weights is carried in the column `flag`; the files do not explain it; a colon or a question "
               "mark means doubt by common practice: its level has ten units of the last digit as uncertainty")
    out.append("rows of multiplets marked LS have components shared out by LS coupling: rate_origin derived")
    out.append("relative rate uncertainty = 10^error - 1, the error column being in dex")
    if edition["computed"]:
        out.append("energies of H I and D I are printed with the reference E77 (Erickson 1977, J. Phys. Chem. Ref. Data 6, "
                   "831: calculated energies), their rates with theory: both count as computed, never as measured")
    return out


COMMON_LINE_COLUMNS = """species = { column = "species" }
kind = { column = "kind" }
wavelength = { column = "wavelength_nm", unit = "nm", medium = { column = "medium" } }
wavelength_uncertainty = { column = "wavelength_uncertainty_nm", unit = "nm" }
lower_energy = { column = "lower_energy_per_cm", unit = "cm-1" }
lower_j = { column = "lower_j" }
lower_g = { column = "lower_g" }
lower_configuration = { column = "lower_configuration" }
lower_term = { column = "lower_term" }
upper_energy = { column = "upper_energy_per_cm", unit = "cm-1" }
upper_j = { column = "upper_j" }
upper_g = { column = "upper_g" }
upper_configuration = { column = "upper_configuration" }
upper_term = { column = "upper_term" }
rate = { column = "rate_per_s", unit = "s-1" }
rate_uncertainty = { column = "rate_relative_uncertainty" }
rate_origin = { column = "rate_origin" }
from_levels = { constant = "true" }
"""

LEVEL_COLUMNS = """species = { column = "species" }
energy = { column = "energy_per_cm", unit = "cm-1" }
energy_uncertainty = { column = "uncertainty_per_cm", unit = "cm-1" }
configuration = { column = "configuration" }
term = { column = "term" }
j = { column = "j" }
g = { column = "g" }
"""


def table(name, written, records, ignore, columns, skip=()):
    digest, rows = written[name]
    lines = ["[[table]]", f'file = "{name}"', f'sha256 = "{digest}"', f"rows = {rows}",
             f'records = "{records}"', 'format = "delimited"']
    if ignore:
        lines.append("ignore = [" + ", ".join(quoted(i) for i in ignore) + "]")
    for column, text, reason in skip:
        lines.append(f"skip = [{{ column = {quoted(column)}, equals = {quoted(text)}, reason = {quoted(reason)} }}]")
    return "\n".join(lines) + "\n[table.columns]\n" + columns


def manifest(edition, written, counts):
    """The whole source.toml."""
    band = "[91.1, 100000.0]"  # longward of the Lyman limit, as the titles say
    head = [
        f'key = "{edition["key"]}"', f"title = {quoted(edition['title'])}",
        f"citation = {quoted(edition['citation'])}", 'licence = "BSD-3-Clause"', 'kind = "paper"',
        "level_scale_uncertainty_per_cm = 0.1", "level_scale_uncertainty_relative = 0.0",
        *(["computed_species = [" + ", ".join(quoted(s) for s in edition["computed"]) + "]"] if edition["computed"] else []),
        "notes = [",
        *("  " + quoted(n) + "," for n in notes(edition, counts, written)), "]", "",
        "[[scope]]", 'species = ["*"]', f"band_nm = {band}", 'completeness = "ground-term"', "",
    ]
    ignore = ["row", "oscillator_strength", "rate_from_oscillator_strength", "flag"]
    parts = ["\n".join(head), table("levels.csv", written, "levels", [], LEVEL_COLUMNS),
             table("lines.csv", written, "lines", ignore, COMMON_LINE_COLUMNS)]
    if "isotopes.csv" in written:
        parts.append(table("isotopes.csv", written, "lines", ignore + ["doubles"], COMMON_LINE_COLUMNS))
    return "\n".join(parts)
