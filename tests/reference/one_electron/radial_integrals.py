#!/usr/bin/env python3
"""Dipole radial integrals |int R_nl r^3 R_n'l' dr| (a0, Z = 1) by term-by-term integration of the Laguerre
polynomials in exact rational arithmetic, and partial oscillator strengths; radial_integrals.csv.

Independent of the recurrences: R_nl from its explicit polynomial (Bethe & Salpeter 1957, section 3)."""
import csv
import random
from fractions import Fraction
from math import comb, factorial

import mpmath as mp

mp.mp.dps = 40


def polynomial(n, l):
    """r^l L_(n-l-1)^(2l+1)(2r/n) as {power: coefficient}; norm squared without the polynomial."""
    k, a = n - l - 1, 2 * l + 1
    terms = {l + i: Fraction((-1) ** i * comb(k + a, k - i), factorial(i)) * Fraction(2, n) ** i for i in range(k + 1)}
    norm2 = Fraction(2, n) ** (2 * l + 3) * Fraction(factorial(k), 2 * n * factorial(n + l))
    return terms, norm2


def integral(n, l, m, k):
    a, na = polynomial(n, l)
    b, nb = polynomial(m, k)
    rate = Fraction(1, n) + Fraction(1, m)
    inverse = 1 / rate
    total = Fraction(0)
    sums = {}
    for p, c in a.items():
        for q, d in b.items():
            sums[p + q] = sums.get(p + q, 0) + c * d
    for power, c in sums.items():
        total += c * factorial(power + 3) * inverse ** (power + 4)
    square = total * total * na * nb
    return mp.sqrt(mp.mpf(square.numerator) / mp.mpf(square.denominator))


def cases():
    for n in range(2, 9):
        for m in range(1, n):
            for l in range(m):
                yield n, l + 1, m, l
                if l > 0:
                    yield n, l - 1, m, l
    rng = random.Random(20261201)
    for top in (20, 50, 100):
        for _ in range(60):
            n = rng.randint(top // 2 + 1, top)
            m = rng.randint(1, n - 1)
            l = rng.randint(0, m - 1)
            yield n, l + 1, m, l
            if l > 0:
                yield n, l - 1, m, l
    yield 100, 1, 99, 0
    yield 100, 0, 99, 1
    yield 100, 99, 99, 98
    yield 100, 50, 50, 49
    yield 100, 1, 1, 0


if __name__ == "__main__":
    with open("radial_integrals.csv", "w", newline="") as handle:
        out = csv.writer(handle, lineterminator="\n")
        out.writerow(["n", "l", "lower_n", "lower_l", "integral"])
        for n, l, m, k in dict.fromkeys(cases()):
            out.writerow([n, l, m, k, mp.nstr(integral(n, l, m, k), 18, min_fixed=0, max_fixed=0)])
