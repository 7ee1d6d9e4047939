#!/usr/bin/env python3
"""The same job with numpy, scipy and astropy: survey_with_scipy.py PROGRAM FOLDER [MOST]

Reads FOLDER/lines.csv, fits T and ln N of every source on the intensities (thin lines, background, Gaussian
noise) with scipy.optimize.least_squares, and writes ECSV, FITS and VOTable. On as many processes as cores.
"""
import json
import multiprocessing
import subprocess
import sys
import time

import numpy as np
from astropy.io import ascii as table_text
from astropy.table import Table
from scipy.optimize import least_squares

H, K, C = 6.62607015e-34, 1.380649e-23, 299792458.0


def molecule(program):
    text = subprocess.run([program, "species", "CO", "--levels", "--lines", "100 GHz..1400 GHz", "--json"],
                          check=True, capture_output=True, text=True).stdout
    species = json.loads(text)
    levels = (np.array([level["energy_k"] for level in species["levels"]]),
              np.array([level["degeneracy"] for level in species["levels"]]))
    return {line["transition"]: line for line in species["lines"]}, levels


def planck(frequency_hz, temperature_k):
    t0 = H * frequency_hz / K
    return t0 / np.expm1(t0 / temperature_k)


def fit(job):
    source, frequency, energy, weight, a, w, sigma, energies, weights = job
    factor = H * C**3 * a / (8 * np.pi * K * frequency**2) / 1e3 * weight
    background = planck(frequency, 2.7255)

    def residuals(x):
        t = np.exp(x[0])
        q = np.sum(weights * np.exp(-energies / t))
        model = np.exp(x[1]) / q * np.exp(-energy / t) * factor * (1.0 - background / planck(frequency, t))
        return (model - w) / sigma

    good = w > 0
    slope, intercept = np.polyfit(energy[good], np.log(w[good] / factor[good]), 1, w=w[good] / sigma[good])
    t = -1.0 / slope if slope < 0 else 50.0
    start = [np.log(t), intercept + np.log(np.sum(weights * np.exp(-energies / t)))]
    best = least_squares(residuals, start, method="lm")
    covariance = np.linalg.inv(best.jac.T @ best.jac)
    t = np.exp(best.x[0])
    return (source, t, t * np.sqrt(covariance[0, 0]), (best.x[1] - np.log(1e4)) / np.log(10),
            np.sqrt(covariance[1, 1]) / np.log(10), 2 * best.cost)


def main():
    began = time.perf_counter()
    program, folder = sys.argv[1], sys.argv[2]
    lines, (energies, weights) = molecule(program)
    table = table_text.read(f"{folder}/lines.csv", format="csv", fast_reader=True)
    columns = {name: np.asarray(table[name]) for name in table.colnames}
    sources = columns["source"]
    starts = np.flatnonzero(np.r_[True, sources[1:] != sources[:-1]])
    ends = np.r_[starts[1:], len(sources)]
    jobs = []
    for start, end in zip(starts, ends):
        found = [lines[label] for label in columns["transition"][start:end]]
        jobs.append((str(sources[start]), np.array([x["frequency_mhz"] for x in found]) * 1e6,
                     np.array([x["upper_energy_k"] for x in found]), np.array([x["upper_degeneracy"] for x in found]),
                     np.array([x["einstein_a_s1"] for x in found]), columns["intensity [K km/s]"][start:end],
                     columns["intensity_error [K km/s]"][start:end], energies, weights))
    with multiprocessing.Pool() as pool:
        results = pool.map(fit, jobs, chunksize=64)
    out = Table(rows=results, names=["source", "temperature", "temperature_error", "log10_column_density",
                                     "log10_column_density_error", "chi2"])
    out.write(f"{folder}/scipy.ecsv", format="ascii.ecsv", overwrite=True)
    out.write(f"{folder}/scipy.fits", overwrite=True)
    out.write(f"{folder}/scipy.vot", format="votable", overwrite=True)
    print(f"scipy: {len(jobs)} jobs in {time.perf_counter() - began:.2f} s")


main()
