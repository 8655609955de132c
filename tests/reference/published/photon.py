"""Writes photon.csv: one photon, said five ways, in exact arithmetic.

The constants are exact by definition of the SI (2019), as CODATA 2022 lists them:
c = 299 792 458 m/s, h = 6.626 070 15e-34 J s, e = 1.602 176 634e-19 C.
Run: python3 photon.py > photon.csv
"""
from decimal import Decimal, getcontext
from fractions import Fraction

getcontext().prec = 40
C = Fraction(299792458)
H = Fraction(662607015) * Fraction(10) ** -42
E = Fraction(1602176634) * Fraction(10) ** -28

WAVELENGTHS_NM = ["10", "30.378", "58.4334", "91.1267", "121.567", "184.95", "193.4", "253.728",
                  "393.477", "486.271", "532", "589.158", "632.991", "656.464", "780.241",
                  "852.347", "1083.33", "1550", "2058.69", "4051.2", "10591", "100000",
                  "211061140.5"]


def digits(value, count=15):
    """The fraction as a decimal number with that many significant digits."""
    number = Decimal(value.numerator) / Decimal(value.denominator)
    return f"{number:.{count - 1}e}"


print("vacuum_wavelength_nm,wavenumber_per_cm,frequency_thz,energy_ev,momentum_kg_m_per_s")
for text in WAVELENGTHS_NM:
    metres = Fraction(text) / 10 ** 9
    hertz = C / metres
    row = [1 / metres / 100, hertz / 10 ** 12, H * hertz / E, H / metres]
    print(",".join([text] + [digits(x) for x in row]))
