"""Posterior quantiles and evidence of N and T of some tables of likelihood_fits.json by scipy, for tests/inference.

Flat priors in ln N over [11, 60] and in ln T over [ln 2.8, ln 2000]. The model and the likelihood are those of
likelihood_fits.py (numpy and scipy.special alone). For every node of one parameter the other is integrated by
scipy.integrate.quad over pieces about the conditional peak; the logarithm of the marginal density is interpolated
by a cubic spline, whose cumulative integral scipy.optimize.brentq inverts. Run with Debian's python3-scipy; writes
posteriors.json beside itself.
"""
import json
import pathlib

import numpy as np
import scipy
from scipy import integrate, interpolate, optimize

from likelihood_fits import cost

BOUNDS = [(11.0, 60.0), (np.log(2.8), np.log(2000.0))]
LEVELS = [0.025, 0.15865525393145705, 0.5, 1 - 0.15865525393145705, 0.975]
CHOSEN = [0, 1, 2, 3, 4, 20, 21, 22, 23, 24]


def line_integral(function, peak, width, bounds):
    """Of exp(-function) along one parameter, by pieces about its peak."""
    low, high = max(bounds[0], peak - 60 * width), min(bounds[1], peak + 60 * width)
    least = optimize.minimize_scalar(function, bounds=(max(low, peak - 8 * width), min(high, peak + 8 * width)),
                                     method="bounded", options=dict(xatol=1e-6))
    cuts = sorted({low, high, *np.clip(least.x + width * np.array([-12, -6, -3, -1, 0, 1, 3, 6, 12]), low, high)})
    floor = least.fun
    total = sum(integrate.quad(lambda x: np.exp(floor - function(x)), a, b, epsabs=1e-13, epsrel=1e-9)[0]
                for a, b in zip(cuts, cuts[1:]))
    return np.log(total) - floor, least.x


def marginal(table, which):
    best = np.array([table["ln_column"], table["ln_temperature"]])
    covariance = np.array(table["covariance"])
    sigma = np.sqrt(covariance[which, which])
    other = 1 - which
    width = 1 / np.sqrt(np.linalg.inv(covariance)[other, other])
    nodes, values = [], []
    for direction in (1, -1):
        peak, top, i = best[other], None, 0 if direction == 1 else 1
        while True:
            x = best[which] + direction * i * 0.125 * sigma
            if not BOUNDS[which][0] <= x <= BOUNDS[which][1]:
                break
            point = lambda y: cost(table, (x, y) if which == 0 else (y, x))
            value, peak = line_integral(point, peak + direction * 0.125 * covariance[0, 1] / sigma * (i > 0), width,
                                        BOUNDS[other])
            nodes.append(x)
            values.append(value)
            top = value if top is None else max(top, value)
            if value < top - 20 or i > 800:
                break
            i += 1
    order = np.argsort(nodes)
    nodes, values = np.array(nodes)[order], np.array(values)[order]
    spline = interpolate.CubicSpline(nodes, values)
    fine = np.linspace(nodes[0], nodes[-1], 40 * (len(nodes) - 1) + 1)
    density = np.exp(spline(fine) - values.max())
    below = interpolate.CubicSpline(fine, integrate.cumulative_trapezoid(density, fine, initial=0))
    total = below(nodes[-1])
    quantiles = [optimize.brentq(lambda x: below(x) - level * total, nodes[0], nodes[-1]) for level in LEVELS]
    return [float(q) for q in quantiles], float(np.log(total) + values.max())


def main():
    here = pathlib.Path(__file__)
    tables = json.loads(here.with_name("likelihood_fits.json").read_text())["tables"]
    posteriors = []
    for number in CHOSEN:
        table = tables[number]
        column, ln_total = marginal(table, 0)
        temperature, again = marginal(table, 1)
        assert abs(ln_total - again) < 1e-4, (number, ln_total, again)
        limit = np.array(table["limit"])
        constant = np.sum(np.log(np.array(table["sigma"])[~limit] * np.sqrt(2 * np.pi)))
        volume = sum(np.log(high - low) for low, high in BOUNDS)
        posteriors.append(dict(table=number, ln_column=column, ln_temperature=temperature,
                               minus_ln_evidence=-(ln_total - constant - volume)))
        print(number, table["kind"], column, temperature, flush=True)
    out = dict(source=f"scipy {scipy.__version__} quad and brentq, numpy {np.__version__}", posteriors=posteriors)
    here.with_suffix(".json").write_text(json.dumps(out, indent=1) + "\n")


if __name__ == "__main__":
    main()
