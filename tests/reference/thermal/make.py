"""Makes radiance.csv and peaks.csv: Planck's law with 40 digits, constants of the SI (exact).

Planck's law as textbooks give it; peaks by mpmath's root finder, not from a table.
Made with mpmath 1.4.1. Run: python3 make.py (writes both files beside itself).
"""
import pathlib
from mpmath import mp, mpf, exp, findroot

mp.dps = 40
H, C, KB, E = mpf("6.62607015e-34"), mpf(299792458), mpf("1.380649e-23"), mpf("1.602176634e-19")
HERE = pathlib.Path(__file__).parent


def per_nm(nm, kelvin):
    m = mpf(nm) * mpf("1e-9")
    return 2 * H * C**2 / m**5 / (exp(H * C / (m * KB * kelvin)) - 1) * mpf("1e-9")


def per_hz(hertz, kelvin):
    v = mpf(hertz)
    return 2 * H * v**3 / C**2 / (exp(H * v / (KB * kelvin)) - 1)


with open(HERE / "radiance.csv", "w") as out:
    print("kelvin,vacuum_nm,radiance_w_per_m2_sr_nm,hertz,radiance_w_per_m2_sr_hz", file=out)
    for kelvin in (300, 1000, 2856, 5772, 11600, 100000):
        for nm in (10, 100, 250, 500, 656.28, 1000, 10000, 1000000, 1e9):
            hertz = int(C / (mpf(nm) * mpf("1e-9")))
            values = mp.nstr(per_nm(nm, kelvin), 15), hertz, mp.nstr(per_hz(hertz, kelvin), 15)
            print(kelvin, repr(nm), *values, sep=",", file=out)

x_wavelength = findroot(lambda x: x - 5 * (1 - exp(-x)), 5)
x_frequency = findroot(lambda x: x - 3 * (1 - exp(-x)), 3)
with open(HERE / "peaks.csv", "w") as out:
    print("kelvin,peak_wavelength_nm,peak_frequency_thz", file=out)
    for kelvin in (2.725, 300, 2856, 5772, 11604.518121550082):
        t = mpf(str(kelvin))
        print(kelvin, mp.nstr(H * C / (x_wavelength * KB * t) * 10**9, 15),
              mp.nstr(x_frequency * KB * t / H / 10**12, 15), sep=",", file=out)
