#!/usr/bin/env python3
"""Makes the survey of the demo: spectra of 64 invented sources in 6 species, and the truth.

    python3 demo_observations/make_survey.py FOLDER

FOLDER/spectra/*.fits: one file a source, a FITS binary table with one spectrum a row; FOLDER/survey.yaml: the
description; FOLDER/truth.json. The same invented cloud and telescope as make_demo.py, whose formulas are used:
they owe nothing to the program that reads the spectra. Standard library only; the seed is fixed.

What a survey must find out for itself is built in, and listed in truth.json under `traps`: sources with two
temperatures, one line that is 30 % too bright in every source (a wrong calibration), a source seen in one line only.
"""
import array
import json
import math
import pathlib
import random
import sys

import make_demo as demo

SEED = 9071
ROTORS = dict(demo.ROTORS, **{"H13CO+": (43377.300853, 0.0783727, 3.9)})
# Vibrations [cm-1, degeneracy] that count below 200 K, from the same files.
MODES = {"HC3N": [(222.4, 2), (498.7, 2), (663.4, 2), (878.0, 1)], "OCS": [(520.4, 2), (859.0, 1)]}
UPPER = {
    "HC3N": [9, 10, 11, 12, 16, 18, 24],
    "OCS": [7, 8, 13, 18, 19],
    "SiO": [2, 3, 4, 5, 6],
    "C18O": [1, 2, 3],
    "CS": [2, 3, 5, 6],
    "H13CO+": [1, 2, 3, 4],
}
GROUPS = {  # temperature [K] from, to; size [arcsec] or None; width [km/s] from, to
    "Fen": (7.0, 13.0, None, 0.5, 1.2),
    "Kettle": (14.0, 30.0, 25.0, 1.0, 2.5),
    "Drumlin": (25.0, 60.0, 12.0, 2.0, 4.0),
    "Esker": (40.0, 110.0, 6.0, 3.5, 6.0),
}
PER_GROUP = 16
CHANNELS = 320
WRONG = ("SiO", 5, 1.30)  # species, upper J, factor of the miscalibrated line
TWO_LAYERS = ["Drumlin 3", "Drumlin 11", "Esker 5"]
ONE_LINE = ("Fen 9", "OCS")
BLOCK = 2880


def ground_state(species, t):
    """The share of molecules that do not vibrate."""
    share = 1.0
    for wavenumber, degeneracy in MODES.get(species, []):
        share *= (1.0 - math.exp(-demo.H * demo.C * wavenumber * 100 / demo.K / t)) ** degeneracy
    return share


def tau_of(species, j, t, n_cm2, width, v):
    """Optical depth at velocities v [km/s] from the centre of a Gaussian line."""
    rotor = ROTORS[species]
    nu = demo.frequency(rotor, j)
    n_cm2 = n_cm2 * ground_state(species, t)
    upper = n_cm2 * 1e4 * (2 * j + 1) * math.exp(-demo.energy_k(rotor, j) / t) / demo.partition(rotor, t)
    area = demo.C**3 * demo.einstein_a(rotor, j) * upper / (8 * math.pi * nu**3)
    area *= math.expm1(demo.H * nu / demo.K / t)
    centre = math.sqrt(4 * math.log(2) / math.pi) / (width * 1e3) * area
    return [centre * math.exp(-4 * math.log(2) * (x / width) ** 2) for x in v]


def brightness(species, j, layers, size, width, v):
    """Main-beam temperature [K] at velocities v; layers, (T, N) each, do not shade one another."""
    nu = demo.frequency(ROTORS[species], j)
    filling = 1.0 if size is None else size**2 / (size**2 + demo.beam_arcsec(nu) ** 2)
    total = [0.0] * len(v)
    for t, n in layers:
        step = filling * (demo.planck(nu, t) - demo.planck(nu, demo.T_BACKGROUND))
        for i, tau in enumerate(tau_of(species, j, t, n, width, v)):
            total[i] -= step * math.expm1(-tau)
    return total


def sources(rng):
    for group, (cold, warm, size, narrow, wide) in GROUPS.items():
        for number in range(1, PER_GROUP + 1):
            kinetic = cold * (warm / cold) ** rng.random()
            width = rng.uniform(narrow, wide)
            yield "%s %d" % (group, number), kinetic, size, width, rng.uniform(-18.0, 22.0)


def column_for(rng, species, t, size, width):
    """A column density whose brightest line peaks at 0.15 to 0.5 K."""
    trial = 1e12
    peak = max(max(brightness(species, j, [(t, trial)], size, width, [0.0])) for j in UPPER[species])
    return float("%.3g" % (trial * rng.uniform(0.15, 0.5) / peak))


def observe(rng, name, species, layers, size, width, vlsr):
    """Spectra of one species in one source: one a line, noise 6 to 9 mK a channel."""
    rotor = ROTORS[species]
    upper = UPPER[species][:1] if (name, species) == ONE_LINE else UPPER[species]
    rows = []
    for j in upper:
        nu = demo.frequency(rotor, j)
        channel = width / 8.0
        v = [(i - CHANNELS / 2) * channel for i in range(CHANNELS)]
        factor = WRONG[2] if (species, j) == WRONG[:2] else 1.0
        noise = rng.uniform(0.006, 0.009)
        clean = brightness(species, j, layers, size, width, v)
        tilt = rng.gauss(0, 0.5) * noise
        data = [factor * y + tilt * x / v[-1] + rng.gauss(0, noise) for x, y in zip(v, clean)]
        rows.append(dict(nu=nu, channel=channel, vlsr=vlsr, data=data))
    return rows


def card(key, value, comment=""):
    if isinstance(value, bool):
        text = "%20s" % ("T" if value else "F")
    elif isinstance(value, str):
        text = "'%-8s'" % value
    else:
        text = "%20s" % (repr(value) if isinstance(value, float) else value)
    return ("%-8s= %s%s" % (key, text, " / " + comment if comment else "")).ljust(80)[:80]


def padded(data, filler):
    return data + filler * (-len(data) % BLOCK)


def big_endian(code, values):
    data = array.array(code, values)
    if sys.byteorder == "little":
        data.byteswap()
    return data.tobytes()


def fits_bytes(name, rows):
    """A FITS binary table, one spectrum a row; frequencies in the LSRK."""
    columns = [("DATA", "%dE" % CHANNELS, "K"), ("CRVAL1", "1D", "Hz"), ("CDELT1", "1D", "Hz"), ("BMAJ", "1D", "deg")]
    width = 4 * CHANNELS + 3 * 8
    primary = [card("SIMPLE", True), card("BITPIX", 8), card("NAXIS", 0), card("EXTEND", True), "END".ljust(80)]
    head = [card("XTENSION", "BINTABLE"), card("BITPIX", 8), card("NAXIS", 2), card("NAXIS1", width),
            card("NAXIS2", len(rows)), card("PCOUNT", 0), card("GCOUNT", 1), card("TFIELDS", len(columns))]
    for i, (column, form, unit) in enumerate(columns, 1):
        head += [card("TTYPE%d" % i, column), card("TFORM%d" % i, form), card("TUNIT%d" % i, unit)]
    head += [card("EXTNAME", "SINGLE DISH"), card("OBJECT", name), card("TELESCOP", "Heronsmere 22 m (invented)"),
             card("CTYPE1", "FREQ"), card("CUNIT1", "Hz"), card("CRPIX1", CHANNELS / 2 + 1.0), card("SPECSYS", "LSRK"),
             "END".ljust(80)]
    data = b""
    for row in rows:
        light = demo.C / 1e3
        centre = row["nu"] * (1 - row["vlsr"] / light)
        data += big_endian("f", row["data"])
        data += big_endian("d", [centre, -row["nu"] * row["channel"] / light, demo.beam_arcsec(row["nu"]) / 3600])
    return (padded("".join(primary).encode(), b" ") + padded("".join(head).encode(), b" ") + padded(data, b"\0"))


DESCRIPTION = """# A survey of the Quiet Reach (invented)
spectra: spectra/*.fits
species: [HC3N, OCS, SiO, C18O, CS, H13CO+]
defaults: {method: likelihood}
exceptions:
  - {sources: "Kettle *", source_size: 25 arcsec}
  - {sources: "Drumlin *", source_size: 12 arcsec}
  - {sources: "Esker *", source_size: 6 arcsec}
  # V_LSR of each source, a window of three line widths, and the width itself
%s
outputs:
  tables: [ecsv, fits, votable, latex]
"""


def main():
    folder = pathlib.Path(sys.argv[1])
    (folder / "spectra").mkdir(parents=True, exist_ok=True)
    rng = random.Random(SEED)
    truth = {"seed": SEED, "jobs": [], "traps": {
        "line %d-%d of %s" % (WRONG[1], WRONG[1] - 1, WRONG[0]): "%.0f %% too bright in every source" % (100 * (WRONG[2] - 1)),
        ", ".join(TWO_LAYERS): "two temperatures",
        "%s, %s" % ONE_LINE: "one line only"}}
    exceptions = []
    for name, kinetic, size, width, vlsr in sources(rng):
        rows = []
        for species in UPPER:
            t = kinetic * rng.uniform(0.8, 1.1)
            n = column_for(rng, species, t, size, width)
            layers = [(t, n)] if name not in TWO_LAYERS else [(t, n), (4 * t, 2 * n)]
            rows += observe(rng, name, species, layers, size, width, vlsr)
            trap = name in TWO_LAYERS or species == WRONG[0] or (name, species) == ONE_LINE
            truth["jobs"].append(dict(source=name, species=species, temperature_k=t, column_density_cm2=n, trap=trap))
        (folder / "spectra" / ("%s.fits" % name)).write_bytes(fits_bytes(name, rows))
        exceptions.append("  - {sources: %s, vlsr: %.3f km/s, window: %.3f km/s, line_width: %.3f km/s}" %
                          (name, vlsr, 3 * width, width))
    (folder / "survey.yaml").write_text(DESCRIPTION % "\n".join(exceptions))
    (folder / "truth.json").write_text(json.dumps(truth, indent=1) + "\n")


if __name__ == "__main__":
    main()
