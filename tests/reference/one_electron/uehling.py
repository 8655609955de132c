#!/usr/bin/env python3
"""Uehling shift of point-nucleus Dirac states, as the scaled remainder G of
F = V40 + V50 (Za) + (Za)^2 [V61 ln (Za)^-2 + G]; energy = (alpha/pi) (Za)^4/n^3 F m c^2.

Potential: Uehling 1935; form as in Mohr, Plunien & Soff 1998, Phys. Rep. 293, 227.
Writes uehling.csv (n, kappa, Z, F, G)."""
import csv
import mpmath as mp

mp.mp.dps = 40
ALPHA = mp.mpf("7.2973525643e-3")


def density(n, kappa, za):
    """List of (power, coefficient) and lam: g^2 + f^2 (radial, u-type) = e^(-2 lam r) sum c r^p, norm 1."""
    gamma = mp.sqrt(kappa * kappa - za * za)
    nr = n - abs(kappa)
    big = mp.sqrt((nr + gamma) ** 2 + za * za)
    energy = (nr + gamma) / big
    lam = za / big
    # solve the power series of the Dirac equation: G = r^gamma e^(-lam r) sum a_i r^i, F likewise b_i
    # G' = -kappa/r G + (E + 1 + za/r) F ; F' = kappa/r F - (E - 1 + za/r) G
    a = [mp.mpf(0)] * (nr + 1)
    b = [mp.mpf(0)] * (nr + 1)
    # order r^(gamma-1): (gamma + kappa) a0 = za b0
    if kappa < 0:
        a[0] = mp.mpf(1)
        b[0] = (gamma + kappa) / za
    else:
        b[0] = mp.mpf(1)
        a[0] = za / (gamma + kappa)
    for i in range(1, nr + 1):
        # (gamma+i+kappa) a_i - za b_i = lam a_(i-1) + (E+1) b_(i-1)
        # za a_i + (gamma+i-kappa) b_i = lam b_(i-1) - (E-1) a_(i-1)
        r1 = lam * a[i - 1] + (energy + 1) * b[i - 1]
        r2 = lam * b[i - 1] - (energy - 1) * a[i - 1]
        det = (gamma + i + kappa) * (gamma + i - kappa) + za * za
        a[i] = (r1 * (gamma + i - kappa) + za * r2) / det
        b[i] = ((gamma + i + kappa) * r2 - za * r1) / det
    poly = {}
    for i in range(nr + 1):
        for j in range(nr + 1):
            poly[i + j] = poly.get(i + j, 0) + a[i] * a[j] + b[i] * b[j]
    terms = [(2 * gamma + p, c) for p, c in poly.items()]
    norm = sum(c * mp.gamma(p + 1) / (2 * lam) ** (p + 1) for p, c in terms)
    return [(p, c / norm) for p, c in terms], lam


def uehling(n, kappa, za):
    """F of the Uehling shift."""
    terms, lam = density(n, kappa, za)

    def inner(t):
        return sum(c * mp.gamma(p) / (2 * lam + 2 * t) ** p for p, c in terms)

    # t = 1/s
    def outer(s):
        t = 1 / s
        return mp.sqrt(t * t - 1) / (t * t) * (1 + 1 / (2 * t * t)) * inner(t) * t * t

    value = mp.quad(outer, [0, mp.mpf("0.01"), mp.mpf("0.1"), mp.mpf("0.5"), 1])
    energy = -2 * ALPHA * za / (3 * mp.pi) * value
    return energy / (ALPHA / mp.pi * za**4 / mp.mpf(n) ** 3)


if __name__ == "__main__":
    with open("uehling.csv", "w", newline="") as handle:
        out = csv.writer(handle, lineterminator="\n")
        out.writerow(["n", "kappa", "Z", "F", "G"])
        for kappa in (-1, 1, -2):
            for n in (1, 2, 3, 4, 5):
                if n < abs(kappa) + (1 if kappa > 0 else 0):
                    continue
                for z in [1] + list(range(10, 111, 10)):
                    za = z * ALPHA
                    f = uehling(n, kappa, za)
                    s = 1 if kappa == -1 else 0
                    low = s * (-mp.mpf(4) / 15 + 5 * mp.pi / 48 * za - mp.mpf(2) / 15 * za**2 * mp.log(za**-2))
                    out.writerow([n, kappa, z, mp.nstr(f, 12), mp.nstr((f - low) / za**2, 9)])
                handle.flush()
