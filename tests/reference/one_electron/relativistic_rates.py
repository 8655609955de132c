#!/usr/bin/env python3
"""Electric-dipole rates of point-nucleus Dirac states with retardation, as a ratio to the nonrelativistic
rate of the same component; relativistic_rates.csv.

Length-form multipole operator of Johnson 2007, Atomic Structure Theory, equations 6.129 and 6.131 (Grant 1974,
J. Phys. B 7, 1458). Wave functions: power series of the radial Dirac equation, as in uehling.py."""
import csv
import mpmath as mp
from sympy import Rational
from sympy.physics.wigner import wigner_3j, wigner_6j

from radial_integrals import integral
from uehling import ALPHA

mp.mp.dps = 30


def wave(n, kappa, za):
    """Series of P and Q (coefficients, gamma, lam, energy), natural units, normalised."""
    gamma = mp.sqrt(kappa * kappa - za * za)
    nr = n - abs(kappa)
    big = mp.sqrt((nr + gamma) ** 2 + za * za)
    energy, lam = (nr + gamma) / big, za / big
    a, b = [mp.mpf(0)] * (nr + 1), [mp.mpf(0)] * (nr + 1)
    if kappa < 0:
        a[0], b[0] = mp.mpf(1), (gamma + kappa) / za
    else:
        b[0], a[0] = mp.mpf(1), za / (gamma + kappa)
    for i in range(1, nr + 1):
        r1 = lam * a[i - 1] + (energy + 1) * b[i - 1]
        r2 = lam * b[i - 1] - (energy - 1) * a[i - 1]
        det = (gamma + i + kappa) * (gamma + i - kappa) + za * za
        a[i] = (r1 * (gamma + i - kappa) + za * r2) / det
        b[i] = ((gamma + i + kappa) * r2 - za * r1) / det
    norm = mp.mpf(0)
    for i in range(nr + 1):
        for j in range(nr + 1):
            p = 2 * gamma + i + j
            norm += (a[i] * a[j] + b[i] * b[j]) * mp.gamma(p + 1) / (2 * lam) ** (p + 1)
    s = mp.sqrt(norm)
    return [x / s for x in a], [x / s for x in b], gamma, lam, energy


def bessel_moment(order, k, p, rate):
    """int r^p j_order(k r) e^(-rate r) dr by its power series in k (converges, k < rate)."""
    total, m = mp.mpf(0), 0
    while True:
        c = mp.mpf(-1) ** m / (2**m * mp.factorial(m) * mp.fac2(2 * order + 2 * m + 1))
        q = order + 2 * m
        term = c * k**q * mp.gamma(p + q + 1) / rate ** (p + q + 1)
        total += term
        if abs(term) < abs(total) * mp.mpf(10) ** -25:
            return total
        m += 1


def reduced_c1(ka, kb):
    ja, jb = abs(ka) - Rational(1, 2), abs(kb) - Rational(1, 2)
    w = wigner_3j(ja, 1, jb, -Rational(1, 2), 0, Rational(1, 2))
    return mp.mpf(((2 * ja + 1) * (2 * jb + 1)).p) * mp.mpf(w.evalf(30)) ** 2


def dirac_rate(na, ka, nb, kb, za):
    """Rate a -> b in natural units of m c^2 / hbar."""
    pa, qa, ga, la, ea = wave(na, ka, za)
    pb, qb, gb, lb, eb = wave(nb, kb, za)
    k = ea - eb
    rate = la + lb
    value = mp.mpf(0)
    for i in range(len(pa)):
        for j in range(len(pb)):
            power = ga + gb + i + j
            even = pa[i] * pb[j] + qa[i] * qb[j]
            mixed = mp.mpf(ka - kb) / 2 * (pa[i] * qb[j] + qa[i] * pb[j]) + (pa[i] * qb[j] - qa[i] * pb[j])
            value += bessel_moment(1, k, power, rate) * even + bessel_moment(2, k, power, rate) * mixed
    q = 3 / k * value
    return mp.mpf(4) / 3 * ALPHA * k**3 * reduced_c1(ka, kb) * q * q / (2 * abs(ka))


def plain_rate(na, ka, nb, kb, za):
    la = ka if ka > 0 else -ka - 1
    lb = kb if kb > 0 else -kb - 1
    r = integral(na, la, nb, lb) / za
    k = za**2 / 2 * (mp.mpf(1) / nb**2 - mp.mpf(1) / na**2)
    ja, jb = abs(ka) - Rational(1, 2), abs(kb) - Rational(1, 2)
    six = mp.mpf(wigner_6j(lb, jb, Rational(1, 2), ja, la, 1).evalf(30)) ** 2
    return mp.mpf(4) / 3 * ALPHA * k**3 * max(la, lb) * 2 * abs(kb) * six * r * r


if __name__ == "__main__":
    states = [(n, kappa) for n in (1, 2, 3, 4) for kappa in (-1, 1, -2, 2, -3, 3, -4) if (kappa if kappa > 0 else -kappa - 1) < n]
    with open("relativistic_rates.csv", "w", newline="") as handle:
        out = csv.writer(handle, lineterminator="\n")
        out.writerow(["Z", "n", "kappa", "lower_n", "lower_kappa", "ratio"])
        for z in (1, 6, 10, 18, 26):
            for na, ka in states:
                for nb, kb in states:
                    la = ka if ka > 0 else -ka - 1
                    lb = kb if kb > 0 else -kb - 1
                    if na <= nb or abs(la - lb) != 1 or abs(abs(ka) - abs(kb)) > 1:
                        continue
                    za = z * ALPHA
                    ratio = dirac_rate(na, ka, nb, kb, za) / plain_rate(na, ka, nb, kb, za)
                    out.writerow([z, na, ka, nb, kb, mp.nstr(ratio, 12)])
            handle.flush()
