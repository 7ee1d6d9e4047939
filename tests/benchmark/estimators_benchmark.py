#!/usr/bin/python3
"""Estimators of trotline against numpy and scipy that do the same, in one run on one core.

    tests/benchmark/estimators_benchmark.py build/benchmark/estimators_benchmark

Processor times, so that other work on the machine counts little. The numpy lines are the shortest that give
intercept, slope, their variances and covariance, and chi2; `matrix` lets its linear algebra do the sums instead.
The scipy fit is least_squares with a vectorised model, an analytic curve of growth by the trapezoidal sum, and the
covariance from its Jacobian; it is given the truth as its start, trotline is given none. Needs Debian's
python3-scipy.
"""
import json
import os
import pathlib
import subprocess
import sys
import time

for variable in ("OMP_NUM_THREADS", "OPENBLAS_NUM_THREADS"):
    os.environ[variable] = "1"
sys.path.insert(0, str(pathlib.Path(__file__).resolve().parent.parent / "reference"))

import numpy as np
from scipy import optimize

import likelihood_fits

LINES = 12
POSITIONS = 1_000_000


def processor_time(function, least_seconds=2.0):
    function()
    best = np.inf
    begin = time.process_time()
    while time.process_time() - begin < least_seconds:
        start = time.process_time()
        function()
        best = min(best, time.process_time() - start)
    return best


def numpy_lines(energy, y, sigma):
    w = 1 / sigma**2
    s = w.sum(0)
    sx = (w * energy[:, None]).sum(0)
    sy = (w * y).sum(0)
    sxx = (w * energy[:, None] ** 2).sum(0)
    sxy = (w * energy[:, None] * y).sum(0)
    determinant = s * sxx - sx**2
    slope = (s * sxy - sx * sy) / determinant
    intercept = (sxx * sy - sx * sxy) / determinant
    chi2 = (((y - intercept - slope * energy[:, None]) / sigma) ** 2).sum(0)
    return intercept, -slope, sxx / determinant, s / determinant, sx / determinant, chi2


def numpy_matrix(energy, y, sigma):
    w = 1 / sigma**2
    wy = w * y
    s, sx, sxx = np.stack([np.ones(LINES), energy, energy**2]) @ w
    sy, sxy = np.stack([np.ones(LINES), energy]) @ wy
    determinant = s * sxx - sx**2
    slope = (s * sxy - sx * sy) / determinant
    intercept = (sxx * sy - sx * sxy) / determinant
    residual = y - intercept - slope * energy[:, None]
    return intercept, -slope, sxx / determinant, s / determinant, sx / determinant, np.einsum("ij,ij,ij->j", w, residual, residual)


def numpy_times():
    rng = np.random.default_rng(20260608)
    j = np.arange(1, LINES + 1)
    energy = 2.766 * j * (j + 1.0)
    sigma = 0.05 + 0.1 * rng.random((LINES, POSITIONS))
    y = 28.0 - energy[:, None] / 40.0 + 0.1 * rng.random((LINES, POSITIONS))
    for a, b in zip(numpy_lines(energy, y[:, :9], sigma[:, :9]), numpy_matrix(energy, y[:, :9], sigma[:, :9])):
        assert np.allclose(a, b)
    return processor_time(lambda: numpy_lines(energy, y, sigma)), processor_time(lambda: numpy_matrix(energy, y, sigma))


def scipy_time(fits=20):
    rng = np.random.default_rng(20260607)
    upper = np.arange(1, LINES + 1)
    table = dict(frequency_hz=2 * 2.766 * likelihood_fits.K / likelihood_fits.H * upper, energy_k=2.766 * upper * (upper + 1.0),
                 degeneracy=2.0 * upper + 1, einstein_a=7.2e-8 * 3 * upper**4.0 / (2 * upper + 1),
                 fwhm_km_s=np.full(LINES, 3.0), beam_arcsec=np.zeros(LINES), size_arcsec=0.0, background_k=2.7255)
    sources = []
    for _ in range(fits):
        truth = np.array([37.0 + rng.random(), np.log(20.0) + 1.6 * rng.random()])
        exact = likelihood_fits.intensities(table, *truth)
        sources.append((truth, exact * (1 + rng.standard_normal(LINES) / 15), exact / 15))

    def run():
        for truth, observed, sigma in sources:
            fit = optimize.least_squares(
                lambda x: (likelihood_fits.intensities(table, *x) - observed) / sigma, truth, method="lm", xtol=1e-9,
                ftol=1e-9)
            np.linalg.inv(fit.jac.T @ fit.jac)

    return processor_time(run) / fits


def main():
    command = ["taskset", "-c", "0", sys.argv[1], "--benchmark_format=json", "--benchmark_min_time=0.4", "--benchmark_repetitions=5"]
    document = json.loads(subprocess.run(command, check=True, stdout=subprocess.PIPE, stderr=subprocess.DEVNULL).stdout)
    unit = dict(ns=1e-9, us=1e-6, ms=1e-3)
    runs = [b for b in document["benchmarks"] if b["run_type"] == "iteration"]
    more = {}
    for run in runs:  # the best of the repetitions, as for numpy
        if run["name"] not in more or run["cpu_time"] < more[run["name"]]["cpu_time"]:
            more[run["name"]] = run
    ours = {name: run["cpu_time"] * unit[run["time_unit"]] for name, run in more.items()}
    os.sched_setaffinity(0, {0})
    lines, matrix = numpy_times()
    line = ours["straight_lines_of_a_million/1/iterations:1/repeats:15"]
    fit = ours["likelihood_fits"] / 2000
    scipy_fit = scipy_time()
    gigabytes = more["memory_read"]["bytes_per_second"] / 1e9
    print(f"straight lines, 1e6 x 12: {line * 1e3:.1f} ms; numpy {lines * 1e3:.0f} ms, {lines / line:.1f} times; "
          f"numpy by matrices {matrix * 1e3:.0f} ms, {matrix / line:.1f} times")
    print(f"  memory gives {gigabytes:.1f} GB/s: reading the 192 MB takes {0.192 / gigabytes * 1e3:.1f} ms of these")
    print(f"likelihood fits: {1 / fit:.0f} a second, {scipy_fit / fit:.0f} times scipy; "
          f"not settled to one answer: {more['likelihood_fits']['unanswered']:.2%}")
    print(f"likelihood fit of one source with all that is reported of it: {ours['likelihood_fit_of_one_source'] * 1e6:.0f} us")
    print(f"posterior of two parameters: {ours['posterior_of_two'] * 1e3:.2f} ms")
    print(f"ensemble moves: {more['ensemble_moves']['items_per_second'] / 1e6:.2f} million model evaluations a second")
    print(f"model evaluation: {ours['model_evaluation/0'] * 1e9:.0f} ns, with derivatives {ours['model_evaluation/1'] * 1e9:.0f} ns")


if __name__ == "__main__":
    main()
