"""Makes constants.csv: fundamental constants as scipy.constants carries them.

Made with scipy 1.17.1, whose table is the CODATA adjustment of 2022.
Run: python3 make.py > constants.csv
"""
from scipy import constants as c

NAMES = [
    "speed of light in vacuum", "Planck constant", "elementary charge", "Boltzmann constant",
    "Avogadro constant", "Rydberg constant", "fine-structure constant", "Bohr radius",
    "electron mass", "electron mass in u", "atomic mass constant", "vacuum electric permittivity",
    "electron volt-inverse meter relationship", "kelvin-inverse meter relationship",
    "electron volt-kelvin relationship", "Wien wavelength displacement law constant",
    "Wien frequency displacement law constant",
]
print("name,value,uncertainty,unit")
for name in NAMES:
    value, unit, sigma = c.physical_constants[name]
    print(f"{name},{value!r},{sigma!r},{unit}")
