#!/usr/bin/env python3
"""Makes the measured-looking data of the invented Harrow Bay bench, for tests of identification, calibration and thermometry.

Positions come from printed tables (../lines.csv, ../lamp_lists.csv), never from the
catalogue. Intensities, noise, errors, pixels and temperatures are invented; the truth of each set is written beside it.
Python standard library only, seeded: rerunning gives the same bytes.   Usage: python3 make.py
"""
import csv
import math
import pathlib
import random

HERE = pathlib.Path(__file__).parent
BOLTZMANN_EV_PER_K = 8.617333262e-5  # exact to the digits given, CODATA 2022
EV_NM = 1239.841984332  # h c / e in eV nm, exact constants of the SI

# Rough strengths as a lamp of the trade shows them (1 to 1000), from memory of no particular lamp: invented.
STRENGTHS = {
    "Hg I": {"253.6517": 1000, "296.7280": 60, "302.1498": 40, "312.5668": 80, "313.1548": 90, "313.1839": 70,
             "334.1477": 20, "365.0153": 300, "365.4836": 80, "366.3279": 60, "404.6563": 350, "407.7831": 30,
             "435.8328": 700, "491.6068": 8, "546.0735": 600, "576.9598": 180, "579.0663": 190},
    "Ne I": {"540.0562": 60, "585.2488": 500, "588.1895": 120, "594.4834": 180, "597.5534": 60, "602.9997": 50,
             "607.4338": 160, "609.6163": 200, "614.3063": 350, "616.3594": 120, "621.7281": 100, "626.6495": 180,
             "630.4789": 60, "633.4428": 250, "638.2992": 280, "640.2248": 700, "650.6528": 350, "653.2882": 110,
             "659.8953": 180, "667.8276": 220, "671.7043": 140, "692.9467": 200, "703.2413": 600, "717.3938": 60,
             "724.5167": 220, "743.8898": 90},
    "Ar I": {"415.8590": 30, "419.8317": 25, "420.0674": 35, "425.9362": 25, "430.0101": 20, "675.2834": 15,
             "687.1289": 15, "696.5431": 300, "706.7218": 200, "714.7042": 15, "727.2936": 120, "738.3980": 350,
             "750.3869": 600, "751.4652": 400, "763.5106": 800, "772.3761": 350, "772.4207": 250, "794.8176": 250,
             "800.6157": 250, "801.4786": 400, "810.3693": 500, "811.5311": 1000, "826.4522": 300, "840.8210": 400,
             "842.4648": 600, "852.1442": 150, "866.7944": 60, "912.2967": 500},
    "Kr I": {"427.3970": 40, "431.9580": 40, "436.2642": 25, "437.6122": 35, "446.3690": 35, "450.2354": 30,
             "557.0289": 200, "587.0916": 300, "758.7414": 400, "760.1546": 700, "768.5246": 200, "769.4540": 350,
             "785.4823": 250, "805.9505": 300, "810.4366": 600, "811.2901": 900, "819.0057": 500, "826.3242": 450,
             "829.8110": 500, "850.8873": 350, "877.6751": 500, "892.8693": 300},
    "Xe I": {"450.0977": 20, "462.4276": 60, "467.1226": 100, "473.4152": 40, "480.7019": 40, "491.6507": 30,
             "492.3152": 30, "764.2024": 80, "823.1635": 900, "828.0116": 700, "834.6822": 250, "840.9189": 200,
             "881.9411": 1000, "895.2251": 350, "904.5447": 400, "916.2652": 300, "979.9699": 300, "992.3198": 250},
    "He I": {"318.7745": 20, "361.3642": 5, "388.8648": 500, "396.4729": 20, "402.6191": 50, "438.7929": 10,
             "447.148": 200, "471.3146": 30, "492.1931": 20, "501.5678": 100, "504.7738": 10, "587.5615": 500,
             "667.8152": 100, "706.519": 200, "728.135": 50},
    "Cd I": {"228.802": 600, "326.106": 100, "340.365": 60, "346.620": 90, "361.051": 100, "467.815": 80,
             "479.991": 120, "508.582": 200, "643.847": 200},
    "Zn I": {"213.856": 600, "307.590": 30, "328.233": 50, "330.258": 70, "334.502": 80, "468.014": 90,
             "472.215": 150, "481.053": 180, "636.234": 150},
    "Na I": {"330.237": 15, "330.298": 8, "568.263": 30, "568.8205": 50, "588.9950": 1000, "589.5924": 600,
             "615.422": 5, "616.075": 9, "818.326": 150, "819.482": 250},
    "Fe I": {"371.9935": 700, "373.4864": 800, "373.7131": 600, "374.5561": 500, "374.9485": 500, "375.8233": 350,
             "381.5840": 350, "382.0425": 500, "382.5881": 400, "385.9911": 600, "388.6282": 350, "404.5812": 500,
             "406.3594": 350, "407.1738": 300, "427.1760": 250, "430.7902": 250, "432.5762": 300, "438.3545": 500,
             "440.4750": 300, "441.5122": 150, "527.0356": 80, "532.8038": 120, "537.1489": 90},
    "Cr I": {"357.869": 500, "359.349": 450, "360.533": 350, "425.434": 400, "427.480": 350, "428.972": 250,
             "520.451": 80, "520.604": 130, "520.844": 180},
    "Mn I": {"279.482": 300, "279.827": 250, "403.076": 400, "403.307": 300, "403.449": 200, "404.136": 100,
             "475.404": 50, "478.342": 60, "482.352": 70},
    "Ni I": {"341.476": 300, "344.626": 120, "346.165": 150, "349.296": 180, "352.454": 300, "361.939": 250,
             "385.830": 60},
    "Cu I": {"324.754": 600, "327.396": 500, "510.554": 120, "515.324": 150, "521.820": 200, "578.213": 60},
    "W I": {"400.875": 120, "407.436": 90, "429.461": 80, "430.211": 70},
    "D I": {"656.101": 400, "486.000": 120, "433.928": 50},
    "C II": {"426.700": 20, "426.726": 30, "657.805": 60, "658.288": 40},
    "O II": {"407.587": 25, "441.490": 25, "464.914": 30},
}

SETS = {
    "mercury-argon": {"Hg I": 1.0, "Ar I": 0.4},
    "neon": {"Ne I": 1.0},
    "argon": {"Ar I": 1.0},
    "krypton-neon": {"Kr I": 1.0, "Ne I": 0.3},
    "xenon": {"Xe I": 1.0},
    "sodium-street-lamp": {"Na I": 1.0, "Ne I": 0.15},
    "cadmium-zinc": {"Cd I": 1.0, "Zn I": 0.8, "Ar I": 0.1},
    "steel-arc": {"Fe I": 1.0, "Cr I": 0.7, "Mn I": 0.6, "Ni I": 0.5, "Cu I": 0.3},
    "harrow-bay": {"D I": 1.0, "He I": 0.5, "Ar I": 0.2, "C II": 0.8, "O II": 0.7, "Cu I": 0.2, "Fe I": 0.1, "W I": 0.5},
}
POSITION_ERROR_NM = 0.02
FAINTEST = 3.0
SECOND_ORDER_FROM_NM, SECOND_ORDER_SHARE = 250.0, 0.06

# gA (per s) and upper energies (eV) of lines for thermometry, from papers, from memory.
COPPER = [  # Bielski 1975, J. Quant. Spectrosc. Radiat. Transfer 15, 463
    ("Cu I", 465.112, 3.04e8, 7.737), ("Cu I", 510.554, 8.0e6, 3.817), ("Cu I", 515.324, 2.4e8, 6.191),
    ("Cu I", 521.820, 4.5e8, 6.192), ("Cu I", 570.024, 9.6e5, 3.817), ("Cu I", 578.213, 3.3e6, 3.786),
]
ARGON = [  # Wiese, Brault, Danzmann, Helbig and Kock 1989, Phys. Rev. A 39, 2461
    ("Ar I", 415.859, 7.0e6, 14.529), ("Ar I", 420.067, 6.77e6, 14.499), ("Ar I", 425.936, 3.98e6, 14.738),
    ("Ar I", 430.010, 1.885e6, 14.506), ("Ar I", 696.543, 1.917e7, 13.328), ("Ar I", 706.722, 1.90e7, 13.302),
    ("Ar I", 738.398, 4.235e7, 13.302), ("Ar I", 750.387, 4.45e7, 13.480), ("Ar I", 763.511, 1.225e8, 13.172),
    ("Ar I", 811.531, 2.317e8, 13.076),
]
MAGNESIUM = [  # Kelleher and Podobedova 2008, J. Phys. Chem. Ref. Data 37, 267
    ("Mg I", 285.213, 1.473e9, 4.346), ("Mg I", 383.829, 1.127e9, 5.946), ("Mg I", 518.360, 1.68e8, 5.108),
    ("Mg II", 279.553, 1.04e9, 4.434), ("Mg II", 280.270, 5.14e8, 4.422),
]
PLOTS = {  # name: (lines, invented temperature K, invented intensity error)
    "copper-arc": (COPPER, 6200.0, 0.05), "argon-arc": (ARGON, 11500.0, 0.06), "magnesium-plasma": (MAGNESIUM, 9000.0, 0.05),
}
MAGNESIUM_NE_PER_CM3, MAGNESIUM_LIMIT_EV = 3.0e16, 7.646235
SAHA_PER_CM3_K15 = 4.829366e15  # 2 (2 pi m_e k / h^2)^(3/2) in cm-3 K-3/2, CODATA 2022


def printed():
    """(species, wavelength text) -> air wavelength, nm."""
    found = {}
    for name in ("lines.csv", "lamp_lists.csv"):
        with open(HERE.parent / name, encoding="utf-8", newline="") as file:
            for row in csv.DictReader(file):
                if row["medium"] == "air":
                    found[row["species"], row["wavelength_nm"]] = float(row["wavelength_nm"])
    return found


def write(name, header, rows):
    with open(HERE / name, "w", encoding="utf-8", newline="") as file:
        writer = csv.writer(file, lineterminator="\n")
        writer.writerow(header)
        writer.writerows(rows)


def peaks(name, mix, table, rng):
    """A peak list: every strong enough line once, moved by the position error; ultraviolet lines again in second order."""
    rows = []
    for species, amount in mix.items():
        for text, strength in STRENGTHS[species].items():
            wavelength = table[species, text]
            rows.append((wavelength, strength * amount, species, text, 1))
            if name == "mercury-argon" and wavelength >= SECOND_ORDER_FROM_NM and 2 * wavelength < 900:
                rows.append((2 * wavelength, strength * amount * SECOND_ORDER_SHARE, species, text, 2))
    rows = sorted(row for row in rows if row[1] >= FAINTEST)
    measured, truth = [], []
    for wavelength, strength, species, text, order in rows:
        place = f"{wavelength + rng.gauss(0, POSITION_ERROR_NM):.4f}"
        measured.append([place, POSITION_ERROR_NM, f"{strength * math.exp(rng.gauss(0, 0.15)):.2f}"])
        truth.append([place, species, text, order])
    write(f"peaks-{name}.csv", ["position_nm", "uncertainty_nm", "intensity"], measured)
    write(f"truth-{name}.csv", ["position_nm", "species", "wavelength_nm", "order"], truth)
    return len(rows)


def spectrum(table, rng):
    """A recorded spectrum, 400 to 600 nm: mercury and helium, Gaussian lines of 0.15 nm FWHM, counts with noise."""
    width, step = 0.15 / (2 * math.sqrt(2 * math.log(2))), 0.05
    lines = [(table[s, t], 12.0 * v * (1.0 if s == "Hg I" else 0.6), s, t) for s in ("Hg I", "He I")
             for t, v in STRENGTHS[s].items() if 400 < table[s, t] < 600]
    rows = []
    for index in range(4001):
        place = 400 + step * index
        clean = 80 + sum(h * math.exp(-0.5 * ((place - w) / width) ** 2) for w, h, _, _ in lines if abs(place - w) < 2)
        rows.append([f"{place:.2f}", f"{clean + rng.gauss(0, math.sqrt(clean) + 3):.1f}"])
    write("spectrum-mercury-helium.csv", ["wavelength_nm", "counts"], rows)
    write("truth-spectrum-mercury-helium.csv", ["position_nm", "species", "wavelength_nm", "counts"],
          [[f"{w:.4f}", s, t, f"{h:.1f}"] for w, h, s, t in sorted(lines)])


def pixels(table, rng):
    """Neon lines on an array of 2048 pixels: lambda = 575 + 0.08 x - 2.5e-6 x^2 nm, and two wrong entries."""
    rows, truth = [], []
    for text in STRENGTHS["Ne I"]:
        wavelength = table["Ne I", text]
        inner = 0.08 ** 2 - 4 * 2.5e-6 * (wavelength - 575)
        if wavelength < 575 or inner < 0:
            continue
        pixel = (0.08 - math.sqrt(inner)) / (2 * 2.5e-6)
        if 0 <= pixel < 2048:
            wrong = text in ("621.7281", "671.7043")
            moved = pixel + rng.gauss(0, 0.05) + (6.0 if wrong else 0.0)
            rows.append([f"{moved:.3f}", text])
            truth.append([f"{moved:.3f}", text, "wrong" if wrong else "right"])
    write("pixels-neon.csv", ["pixel", "wavelength_nm"], rows)
    write("truth-pixels-neon.csv", ["pixel", "wavelength_nm", "entry"], truth)


def fit_temperature(lines, intensities, error):
    """Weighted straight line through ln(I lambda / gA) against E: T and its 1 sigma, closed form (Bevington 1969, chapter 6)."""
    points = [(e, math.log(i * w / ga)) for (_, w, ga, e), i in zip(lines, intensities)]
    n = len(points)
    mean_e, mean_y = sum(e for e, _ in points) / n, sum(y for _, y in points) / n
    spread = sum((e - mean_e) ** 2 for e, _ in points)
    slope = sum((e - mean_e) * (y - mean_y) for e, y in points) / spread
    temperature = -1 / (BOLTZMANN_EV_PER_K * slope)
    sigma = error / math.sqrt(spread) * temperature ** 2 * BOLTZMANN_EV_PER_K
    chi_squared = sum(((y - mean_y - slope * (e - mean_e)) / error) ** 2 for e, y in points)
    return temperature, sigma, chi_squared


def plots(rng):
    summary = []
    for name, (lines, temperature, error) in PLOTS.items():
        kt = BOLTZMANN_EV_PER_K * temperature
        rows, intensities = [], []
        for species, wavelength, ga, energy in lines:
            height = 1e-5 * ga / wavelength * math.exp(-energy / kt)
            if species == "Mg II":  # Saha: n_II / n_I over the partition functions, which cancel against the Boltzmann factors
                height *= SAHA_PER_CM3_K15 * temperature ** 1.5 * math.exp(-MAGNESIUM_LIMIT_EV / kt) / MAGNESIUM_NE_PER_CM3
            intensities.append(height * 1e6 * math.exp(rng.gauss(0, error)))
            rows.append([species, f"{wavelength:.3f}", f"{intensities[-1]:.5e}", error, f"{ga:.4e}", energy])
        write(f"plot-{name}.csv", ["species", "wavelength_nm", "intensity", "relative_uncertainty", "weighted_rate_per_s", "upper_energy_ev"], rows)
        one = [i for i, line in enumerate(lines) if line[0].endswith(" I")]
        fit = fit_temperature([lines[i] for i in one], [intensities[i] for i in one], error)
        density = MAGNESIUM_NE_PER_CM3 if name == "magnesium-plasma" else ""
        summary.append([name, temperature, density, len(one), *(f"{x:.6g}" for x in fit)])
    write("plots.csv", ["name", "invented_temperature_k", "invented_electrons_per_cm3", "lines_of_first_stage", "fitted_temperature_k",
                        "fitted_uncertainty_k", "chi_squared"], summary)


def main():
    table, rng = printed(), random.Random(20260612)
    for name, mix in SETS.items():
        print(name, peaks(name, mix, table, rng))
    spectrum(table, rng)
    pixels(table, rng)
    plots(rng)


if __name__ == "__main__":
    main()
