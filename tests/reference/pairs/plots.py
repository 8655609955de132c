#!/usr/bin/env python3
"""Boltzmann plots and electron densities by numpy and scipy, for `pairs --measured`.

Invented, seeded intensities of two stages of magnesium (plots 1 to 6), of one stage with a wrong line (7, 8). The fit is
scipy's `curve_fit` with absolute sigmas, not a closed form; the error of ln n_e follows from its whole covariance by a numerical
gradient. Outliers by Iglewicz & Hoaglin 1993 (modified z above 3.5, and off by 3 sigma), the worst first, while two degrees
of freedom stay. CODATA 2022 as scipy.constants holds it.   Usage: python3 plots.py   (scipy 1.17, numpy 2.4)
"""
import csv
import pathlib

import numpy as np
from scipy import constants
from scipy.optimize import curve_fit

HERE = pathlib.Path(__file__).parent
K_EV = constants.k / constants.e
LIMIT_EV = 7.646236  # Mg I: Martin & Zalubas 1980, J. Phys. Chem. Ref. Data 9, 1 (from memory)


def log_saha(b, c1, c2):
    kt_j = constants.e / b
    return np.log(2) + 1.5 * np.log(2 * np.pi * constants.m_e * kt_j / constants.h**2) - LIMIT_EV * b + c1 - c2


def fit(stage, energy, y, sigma):
    two = stage.max() > 1

    def model(x, b, *c):
        x = x.astype(int)
        return np.where(stage[x] == 1, c[0], c[-1]) - b * energy[x]

    start = [1.3] + [y.mean() + 1.3 * energy.mean()] * (2 if two else 1)
    best, covariance = curve_fit(model, np.arange(len(y)), y, p0=start, sigma=sigma, absolute_sigma=True, xtol=1e-14, ftol=1e-14)
    residual = (y - model(np.arange(len(y)), *best)) / sigma
    return best, covariance, residual


def main():
    table = []
    for number in range(1, 9):
        rng = np.random.default_rng(number)
        two = number <= 6
        count = [rng.integers(3, 7), rng.integers(3, 6)] if two else [9, 0]
        stage = np.array([1] * count[0] + [2] * count[1])
        kelvin = rng.uniform(5000, 15000)
        energy = np.round(np.where(stage == 1, rng.uniform(2.7, 7.0, len(stage)), rng.uniform(4.4, 12.0, len(stage))), 4)
        nm = np.round(rng.uniform(250, 800, len(stage)), 4)
        rate = np.round(10 ** rng.uniform(6, 9, len(stage)), -2)
        error = np.round(rng.uniform(0.02, 0.15, len(stage)), 3)
        offset = np.where(stage == 1, 20.0, 26.0)
        y = offset - energy / (K_EV * kelvin) + error * np.clip(rng.normal(size=len(stage)), -2, 2)
        if not two:
            y[rng.integers(0, len(y))] += 1.7
        intensity = np.array([float(f"{v:.8e}") for v in np.exp(y) * rate / nm])
        with open(HERE / f"plot-{number}.csv", "w", newline="", encoding="utf-8") as out:
            writer = csv.writer(out, lineterminator="\n")
            writer.writerow(["species", "wavelength_nm", "intensity", "relative_uncertainty", "weighted_rate_per_s", "upper_energy_ev"])
            for i in range(len(y)):
                writer.writerow([f"Mg {'I' * stage[i]}", nm[i], intensity[i], error[i], rate[i], energy[i]])
        y = np.log(intensity * nm / rate)
        used = np.full(len(y), True)
        while True:
            best, covariance, residual = fit(stage[used], energy[used], y[used], error[used])
            free = used.sum() - len(best)
            middle = np.median(residual)
            score = 0.6745 * np.abs(residual - middle) / np.median(np.abs(residual - middle))
            worst = int(np.argmax(np.abs(residual - middle)))
            if free < 3 or score[worst] <= 3.5 or abs(residual[worst]) <= 3:
                break
            used[np.flatnonzero(used)[worst]] = False
        chi = float((residual**2).sum())
        widen = max(1.0, np.sqrt(chi / free)) if free else 1.0
        temperature = 1 / (K_EV * best[0])
        log_density = log_sigma = ""
        if two:
            log_density = log_saha(*best)
            steps = np.sqrt(np.diag(covariance)) * 1e-4
            gradient = [(log_saha(*(best + s)) - log_saha(*(best - s))) / (2 * s.sum()) for s in np.diag(steps)]
            log_sigma = repr(float(widen * np.sqrt(np.array(gradient) @ covariance @ np.array(gradient))))
            log_density = repr(float(log_density))
        table.append([number, repr(float(temperature)), repr(float(temperature * np.sqrt(covariance[0, 0]) / best[0])),
                      repr(chi), int(free), " ".join(str(i) for i in np.flatnonzero(~used)) or "none", log_density, log_sigma])
    with open(HERE / "plots.csv", "w", newline="", encoding="utf-8") as out:
        writer = csv.writer(out, lineterminator="\n")
        writer.writerow(["plot", "temperature_k", "temperature_uncertainty_k", "chi_squared", "degrees_of_freedom", "outliers",
                         "log_electron_density_per_m3", "log_uncertainty"])
        writer.writerows(table)


if __name__ == "__main__":
    main()
