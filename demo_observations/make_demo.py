#!/usr/bin/env python3
"""Makes the tables of the demo, with the truth beside them.

An invented cloud, the Quiet Reach, seen with an invented 22 m telescope at Heronsmere. Nothing here is a
real source, telescope or person. The rotor, the Planck terms, beam dilution and noise are written out below
from textbook formulas, so that the tables owe nothing to the program that will read them. Standard library
only; the seed is fixed, so the files come out the same each time.

    python3 demo_observations/make_demo.py
"""
import json
import math
import pathlib
import random

SEED = 5318
HERE = pathlib.Path(__file__).resolve().parent
H, K, C = 6.62607015e-34, 1.380649e-23, 299792458.0
EPS0 = 8.8541878128e-12
DEBYE = 1e-21 / C
T_BACKGROUND = 2.7255
DISH_M = 22.0

# B, D [MHz], dipole moment [D], rounded from the species files of the same names, which name their sources.
ROTORS = {
    "HC3N": (4549.05837, 0.000544043, 3.73172),
    "OCS": (6081.49214, 0.00130152, 0.7152),
    "SiO": (21711.9855, 0.0298755, 3.0982),
    "C18O": (54891.4204, 0.166404, 0.11079),
    "CS": (24495.5586, 0.0400638, 1.958),
}

# name, species, T [K], N [cm-2], size [arcsec] or None, width [km/s], upper J, S/N of the best line,
# calibration error, calibration groups by frequency [GHz], upper J given as limits, file format
SOURCES = [
    ("Reed", "HC3N", 9.6, 4.0e12, None, 0.7, [8, 9, 10, 11, 12, 14, 16], 60, 0.0, [], [18], "csv"),
    ("Tallow", "OCS", 92.0, 9.0e14, 4.0, 4.5, [7, 8, 12, 13, 17, 18, 19, 24, 25, 30], 40, 0.05, [], [], "ecsv"),
    ("Marl", "SiO", 27.0, 6.0e12, 14.0, 11.0, [2, 3, 4, 5, 6], 35, 0.0, [], [12], "txt"),
    ("Sedge", "C18O", 41.0, 3.5e15, None, 2.4, [1, 2, 3, 6, 7], 120, 0.10, [150.0, 400.0], [], "csv"),
    ("Burr", "CS", 17.5, 5.0e12, 30.0, 1.9, [2, 3, 5, 6], 45, 0.08, [200.0], [12], "csv"),
]


def frequency(rotor, j):
    b, d = rotor[0], rotor[1]
    return (2 * b * j - 4 * d * j**3) * 1e6  # Hz


def energy_k(rotor, j):
    x = j * (j + 1)
    return H * 1e6 * (rotor[0] * x - rotor[1] * x * x) / K


def einstein_a(rotor, j):
    nu = frequency(rotor, j)
    return 16 * math.pi**3 * nu**3 / (3 * EPS0 * H * C**3) * j / (2 * j + 1) * (rotor[2] * DEBYE) ** 2


def partition(rotor, t):
    return sum((2 * j + 1) * math.exp(-energy_k(rotor, j) / t) for j in range(200))


def planck(nu, t):
    return H * nu / K / math.expm1(H * nu / K / t)


def beam_arcsec(nu):
    return math.degrees(1.2 * C / nu / DISH_M) * 3600


def intensity(rotor, j, t, n_cm2, size):
    """Thin line over the background, K km/s."""
    nu = frequency(rotor, j)
    n_upper = n_cm2 * 1e4 * (2 * j + 1) * math.exp(-energy_k(rotor, j) / t) / partition(rotor, t)
    filling = 1.0 if size is None else size**2 / (size**2 + beam_arcsec(nu) ** 2)
    thin = H * C**3 * einstein_a(rotor, j) * n_upper / (8 * math.pi * K * nu**2)
    return filling * thin * (1 - planck(nu, T_BACKGROUND) / planck(nu, t)) / 1e3


def observe(rng, source):
    name, species, t, n, size, width, upper, snr, calibration, edges, limits, _ = source
    rotor = ROTORS[species]
    true = {j: intensity(rotor, j, t, n, size) for j in upper + limits}
    noise = max(true[j] for j in upper) / snr
    factors = {}
    rows = []
    for j in sorted(true):
        nu = frequency(rotor, j)
        group = "band-%d" % (1 + sum(nu / 1e9 > edge for edge in edges)) if edges else "line-%d" % j
        factor = factors.setdefault(group, 1 + calibration * rng.gauss(0, 1))
        sigma = noise * rng.uniform(0.7, 1.3)
        measured = true[j] * factor + sigma * rng.gauss(0, 1)
        is_limit = j in limits
        rows.append(
            dict(
                transition="%d-%d" % (j, j - 1),
                frequency=round(nu / 1e9, 4),
                intensity=float("%.4g" % (max(measured, 0) + 3 * sigma if is_limit else measured)),
                intensity_error=float("%.3g" % sigma),
                beam_fwhm=round(beam_arcsec(nu), 1),
                fwhm=width,
                limit="true" if is_limit else "false",
                calibration_group=group if edges else None,
                calibration_error=calibration or None,
            )
        )
    return rows


UNITS = dict(frequency="GHz", intensity="K km/s", intensity_error="K km/s", beam_fwhm="arcsec", fwhm="km/s")
FITS_UNITS = dict(UNITS, intensity="K km s-1", intensity_error="K km s-1", fwhm="km s-1")
TYPES = dict(transition="string", limit="bool", calibration_group="string")


def columns(rows):
    return [key for key in rows[0] if any(row[key] is not None for row in rows)]


def as_csv(rows):
    names = columns(rows)
    header = ",".join("%s [%s]" % (n, UNITS[n]) if n in UNITS else n for n in names)
    return "\n".join([header] + [",".join(str(row[n]) for n in names) for row in rows]) + "\n"


def as_text(rows):
    names = columns(rows)
    header = "  ".join('"%s [%s]"' % (n, UNITS[n]) if n in UNITS else n for n in names)
    return "\n".join([header] + ["  ".join(str(row[n]) for n in names) for row in rows]) + "\n"


def as_ecsv(rows):
    names = columns(rows)
    lines = ["# %ECSV 1.0", "# ---", "# datatype:"]
    for n in names:
        unit = ", unit: %s" % FITS_UNITS[n] if n in FITS_UNITS else ""
        lines.append("# - {name: %s%s, datatype: %s}" % (n, unit, TYPES.get(n, "float64")))
    lines += ["# schema: astropy-2.0", " ".join(names)]
    lines += [" ".join(str(row[n]).replace("true", "True").replace("false", "False") for n in names) for row in rows]
    return "\n".join(lines) + "\n"


WRITERS = dict(csv=as_csv, txt=as_text, ecsv=as_ecsv)


def main():
    rng = random.Random(SEED)
    truth = {"seed": SEED, "sources": {}}
    for source in SOURCES:
        name, species, t, n, size = source[:5]
        rows = observe(rng, source)
        suffix = source[-1]
        table = "%s.%s" % (name.lower(), suffix)
        (HERE / table).write_text(WRITERS[suffix](rows))
        run = ["# %s in the Quiet Reach (invented)" % name, "source: %s" % name, "species: %s" % species,
               "table: %s" % table]
        if size is not None:
            run.append("source_size: %g arcsec" % size)
        (HERE / ("%s.yaml" % name.lower())).write_text("\n".join(run) + "\n")
        truth["sources"][name.lower()] = dict(species=species, temperature_k=t, column_density_cm2=n)
    (HERE / "truth.json").write_text(json.dumps(truth, indent=2) + "\n")


if __name__ == "__main__":
    main()
