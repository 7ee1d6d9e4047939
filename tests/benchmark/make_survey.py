#!/usr/bin/env python3
"""Writes an invented survey: make_survey.py PROGRAM JOBS FOLDER [METHOD]

FOLDER/lines.csv holds JOBS sources with 12 lines of CO each, thin, S/N 25, T 12 to 120 K; FOLDER/survey.yaml
describes it. Molecular data come from `PROGRAM species CO --json`.
"""
import json
import subprocess
import sys

import numpy as np

H, K, C = 6.62607015e-34, 1.380649e-23, 299792458.0


def planck(frequency_hz, temperature_k):
    t0 = H * frequency_hz / K
    return t0 / np.expm1(t0 / temperature_k)


def main():
    program, jobs, folder = sys.argv[1], int(sys.argv[2]), sys.argv[3]
    method = sys.argv[4] if len(sys.argv) > 4 else "line"
    text = subprocess.run([program, "species", "CO", "--levels", "--lines", "100 GHz..1400 GHz", "--json"],
                          check=True, capture_output=True, text=True).stdout
    species = json.loads(text)
    lines = species["lines"][:12]
    levels = species["levels"]
    energies = np.array([level["energy_k"] for level in levels])
    weights = np.array([level["degeneracy"] for level in levels])
    frequency = np.array([line["frequency_mhz"] for line in lines]) * 1e6
    energy = np.array([line["upper_energy_k"] for line in lines])
    weight = np.array([line["upper_degeneracy"] for line in lines])
    a = np.array([line["einstein_a_s1"] for line in lines])
    labels = [line["transition"] for line in lines]
    random = np.random.default_rng(6)
    with open(f"{folder}/lines.csv", "w") as out:
        out.write("source,species,transition,intensity [K km/s],intensity_error [K km/s],beam_fwhm [arcsec],"
                  "fwhm [km/s]\n")
        for job in range(jobs):
            t = 12.0 * 10.0 ** random.random()
            column = 10.0 ** random.uniform(14.0, 15.5) * 1e4
            q = np.sum(weights * np.exp(-energies / t))
            upper = column / q * weight * np.exp(-energy / t)
            w = upper * H * C**3 * a / (8 * np.pi * K * frequency**2) / 1e3
            w *= 1.0 - planck(frequency, 2.7255) / planck(frequency, t)
            sigma = 0.04 * np.abs(w) + 0.002
            measured = w + sigma * random.standard_normal(len(w))
            for i, label in enumerate(labels):
                out.write(f"Buoy {job},CO,{label},{measured[i]:.6g},{sigma[i]:.4g},{2700 / (frequency[i] / 1e9):.4g},3.0\n")
    with open(f"{folder}/survey.yaml", "w") as out:
        out.write(f"tables: lines.csv\nspecies: CO\ndefaults: {{method: {method}}}\n"
                  "outputs: {tables: [ecsv, csv, fits, votable, latex], figures: no, page: no}\n")


main()
