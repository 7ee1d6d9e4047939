#!/usr/bin/env python3
"""Measures the files of spectrum_speed with astropy, numpy and scipy, and compares time with the program.

    spectrum_comparison.py PROGRAM FOLDER

PROGRAM is build/benchmark/spectrum_speed; FOLDER gets the files. For each line: robust noise, straight baseline
through the channels beside the window, sum over the window, Gaussian fit. Times are of CPU, one run after the other.
"""
import subprocess
import sys
import time
import warnings

import numpy as np
from astropy.io import fits
from astropy.wcs import WCS
from scipy.optimize import curve_fit

C = 299792.458
WINDOW = 5.0
SIDE = 128


def gauss(v, area, centre, fwhm):
    s = fwhm / 2.3548200450309493
    return area / (s * np.sqrt(2 * np.pi)) * np.exp(-0.5 * ((v - centre) / s) ** 2)


def measure(frequency, values, rest):
    step = frequency[1] - frequency[0]
    middle = (rest - frequency[0]) / step
    half = 0.5 * WINDOW / (C * abs(step) / rest)
    a, b = int(np.ceil(middle - half)), int(np.floor(middle + half)) + 1
    guard = (b - a) // 4
    beside = np.r_[a - guard - SIDE : a - guard, b + guard : b + guard + SIDE]
    line = np.polyfit(frequency[beside] - rest, values[beside], 1)
    left = values[beside] - np.polyval(line, frequency[beside] - rest)
    rms = 1.4826 * np.median(np.abs(left))
    v = C * (1 - frequency[a:b] / rest)
    t = values[a:b] - np.polyval(line, frequency[a:b] - rest)
    w = t.sum() * C * abs(step) / rest
    try:
        curve_fit(gauss, v, t, p0=[w, 0.0, 1.5], sigma=np.full(len(t), rms))
    except RuntimeError:
        pass
    return w


def million(folder):
    with fits.open(f"{folder}/million.fits") as file:
        header = file[0].header
        values = file[0].data.astype(float)
    frequency = WCS(header).wcs_pix2world(np.arange(len(values)), 0)[0]
    return sum(measure(frequency, values, frequency[3333 * i + 1000]) for i in range(300))


def table(folder):
    total = 0.0
    with fits.open(f"{folder}/table.fits") as file:
        header = file[1].header
        rest = 100e9
        for row in file[1].data:
            values = row["DATA"].astype(float)
            frequency = header["CRVAL1"] + (np.arange(len(values)) + 1 - header["CRPIX1"]) * header["CDELT1"]
            total += measure(frequency, values, rest)
    return total


def main():
    warnings.simplefilter("ignore")
    program, folder = sys.argv[1:3]
    subprocess.run([program, "write", folder], check=True)
    for job, function in (("million", million), ("table", table)):
        done = subprocess.run([program, job, folder, "1"], check=True, capture_output=True, text=True).stdout
        ours = float(done.split(" s of CPU")[0].split()[-1])
        begin = time.process_time()
        total = function(folder)
        theirs = time.process_time() - begin
        print(f"{done.strip()}\n{job} with astropy and scipy: {theirs:.3f} s of CPU, sum {total:.3f}; ratio {theirs / ours:.1f}")


if __name__ == "__main__":
    main()
