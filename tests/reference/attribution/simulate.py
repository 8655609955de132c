#!/usr/bin/env python3
"""Simulated peak lists for `attribute`: features of the catalogue, perturbed; two of ten species are withheld from the search.

Invented, seeded: amounts (log-normal, sigma 0.7), strengths (log-normal, sigma 0.7 about LTE at 1 eV), positions (Gaussian,
0.02 nm), the 100 strongest peaks of 250 to 900 nm. A peak is assignable when its species may be found and no other true line
lies within the position error; this is fixed before any matching.   Usage: python3 simulate.py LINECLEAR CATALOGUE
"""
import csv, json, math, pathlib, random, subprocess, sys

HERE = pathlib.Path(__file__).parent
POOL = ["Ar I", "He I", "Ne I", "Fe I", "Cu I", "Hg I", "Kr I", "Xe I", "Ti I", "Cr I", "Ni I", "Mn I", "Al I", "Zn I", "Cd I",
        "Na I", "K I", "Ca I", "Mg I", "O I", "N I", "C II", "O II", "N II", "Fe II", "Ti II", "Ca II", "Ar II", "V I", "Co I", "Sr I", "Ba II"]
SIGMA, PEAKS, SPECIES, WITHHELD = 0.02, 100, 8, 2


def ask(arguments):
    out = subprocess.run([sys.argv[1], "--catalogue", sys.argv[2], *arguments, "--as", "json"], capture_output=True, text=True)
    return json.loads(out.stdout)


def main():
    features = {}
    for species in POOL:
        rows = [(f["wavelength_nm"], f["light_fraction"]) for f in ask(["window", "250..900nm", "--of", species])["features"]
                if f["light_fraction"]]
        if len(rows) >= 6:
            features[species] = rows
    elements = sorted({s.split()[0] for s in features})
    table = []
    for seed in range(1, 9):
        rng = random.Random(seed)
        chosen, taken = [], set()
        for species in rng.sample(sorted(features), len(features)):
            if species.split()[0] not in taken and len(chosen) < SPECIES + WITHHELD:
                chosen.append(species)
                taken.add(species.split()[0])
        hidden = set(chosen[SPECIES:])
        lines = []
        for species in chosen:
            amount = math.exp(rng.gauss(0, 0.7)) * (0.3 if species in hidden else 1.0)
            strongest = max(l for _, l in features[species])
            lines += [(w, amount * l / strongest * math.exp(rng.gauss(0, 0.7)), species) for w, l in features[species]]
        lines = sorted(sorted(lines, key=lambda l: -l[1])[:PEAKS])
        peaks = sorted((round(w + rng.gauss(0, SIGMA), 4), i, s, w) for w, i, s in lines)
        clean = [s not in hidden and not any(abs(w - v) < SIGMA and (v, t) != (w, s) for v, _, t in lines) for _, _, s, w in peaks]
        path = HERE / f"peaks-{seed}.csv"
        with open(path, "w", encoding="utf-8", newline="") as file:
            writer = csv.writer(file, lineterminator="\n")
            writer.writerow(["position_nm", "uncertainty_nm", "intensity", "species", "true_nm", "assignable"])
            writer.writerows([p, SIGMA, f"{i:.4e}", s, f"{w:.4f}", int(c)] for (p, i, s, w), c in zip(peaks, clean))
        among = ",".join(e for e in elements if e not in {s.split()[0] for s in hidden})
        answer = ask(["attribute", str(path), "--among", among])
        right = attributed = wrong = 0
        for peak, (_, _, species, place), assignable in zip(answer["peaks"], peaks, clean):
            first = peak["candidates"][0] if peak["candidates"] else None
            good = first and first["species"] == species and abs(first["wavelength_nm"] - place) < 0.01
            right += bool(assignable and good)
            if peak["attributed_to"]:
                attributed += 1
                wrong += not good
        present = {s["species"] for s in answer["species"] if s["status"] == "present"}
        true = set(chosen) - hidden
        table.append([seed, len(peaks), sum(clean), right, attributed, wrong, f"{wrong / attributed:.3f}",
                      f"{answer['false_discovery_rate']:.3f}", len(present & true), len(true & {p[2] for p in peaks}),
                      " ".join(sorted(present - true)) or "none", " ".join(sorted(hidden))])
        print(table[-1], flush=True)
    with open(HERE / "table.csv", "w", encoding="utf-8", newline="") as file:
        writer = csv.writer(file, lineterminator="\n")
        writer.writerow(["seed", "peaks", "assignable", "right_first", "attributed", "wrong", "true_false_discovery_rate",
                         "reported_false_discovery_rate", "species_found", "species_there", "species_claimed_wrongly", "withheld"])
        writer.writerows(table)


if __name__ == "__main__":
    main()
