"""Adjusts B and D of linear molecules to rest_frequencies.yaml, and B, D, H and L of CO to a published list.

Run by hand when the frequencies change: python3 fit_linear_constants.py [CO_LINE_LIST]
Needs numpy and PyYAML (Debian: python3-numpy python3-yaml). The argument is a file in the 80-column format
with the 95 lines of CO in v = 0 (CDMS entry 28503, version of 2008).
"""

import pathlib
import sys

import numpy as np
import yaml

CO_B = 57635.96804  # MHz, result of fit_co() below
CO_H = 0.172302e-6  # MHz
ISOTOPOLOGUES = {"13CO": 55101.012, "C18O": 54891.420}  # B in MHz, for H ~ mu^-3 ~ B^3


def power_steps(upper_j, powers):
    x = upper_j * (upper_j + 1.0)
    y = upper_j * (upper_j - 1.0)
    return np.column_stack([x**k - y**k for k in powers])


def fit(upper_j, frequencies, powers):
    """Coefficients of x, x^2 ...; all lines count alike."""
    design = power_steps(upper_j, powers)
    scale = np.abs(design).max(axis=0)
    result = np.linalg.lstsq(design / scale, frequencies, rcond=None)[0]
    return result / scale


def fit_measured():
    groups = yaml.safe_load((pathlib.Path(__file__).parent / "rest_frequencies.yaml").read_text())
    for group in groups:
        name = group["species"]
        upper_j = np.array(list(group["lines"]), dtype=float)
        frequencies = np.array(list(group["lines"].values()))
        h = CO_H * (ISOTOPOLOGUES[name] / CO_B) ** 3 if name in ISOTOPOLOGUES else 0.0
        rest = frequencies - h * power_steps(upper_j, [3])[:, 0]
        b, minus_d = fit(upper_j, rest, [1, 2])
        worst = np.abs(power_steps(upper_j, [1, 2]) @ [b, minus_d] - rest).max()
        print(f"{name:5} B {b:.9g} MHz  D {-minus_d * 1e3:.6g} kHz  H {h * 1e6:.4g} Hz  worst {worst * 1e3:.1f} kHz")


def fit_co(path):
    rows = pathlib.Path(path).read_text().splitlines()
    upper_j = np.array([float(row[55:57]) for row in rows])
    frequencies = np.array([float(row[0:13]) for row in rows])
    b, minus_d, h, l = fit(upper_j, frequencies, [1, 2, 3, 4])
    print(f"CO    B {b:.10g} MHz  D {-minus_d * 1e3:.9g} kHz  H {h * 1e6:.9g} Hz  L {l * 1e6:.9g} Hz")


if __name__ == "__main__":
    fit_measured()
    if len(sys.argv) > 1:
        fit_co(sys.argv[1])
