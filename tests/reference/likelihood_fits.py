"""Most likely N and T of 200 simulated tables of intensities by scipy, for tests/inference.

Thin, thick, over a background, diluted in beams of different size, and with a third of the lines as limits:
40 tables each. The model is written from the formulas with numpy alone: Q of a rigid rotor by direct sum, the
curve of growth by a trapezoidal sum. Gaussian data go through scipy.optimize.least_squares (and curve_fit's
covariance, the inverse of J'J); tables with limits through scipy.optimize.minimize of -ln L with
scipy.special.log_ndtr, and the covariance is the inverse of the matrix of second derivatives, by differences
of sixth order. Run with Debian's python3-scipy; writes likelihood_fits.json beside itself.
"""
import json
import pathlib

import numpy as np
import scipy
from scipy import optimize, special

H, K, C = 6.62607015e-34, 1.380649e-23, 299792458.0
B_K = 2.766  # rotor constant over k [K]
GRID = np.linspace(-8.0, 8.0, 385)  # trapezoidal sum in units of the half width at 1/e
PROFILE = np.exp(-(GRID**2))
STEP = GRID[1] - GRID[0]
J = np.arange(150)


def ln_q(t):
    return np.log(np.sum((2 * J + 1) * np.exp(-B_K * J * (J + 1) / t)))


def planck(t0, t):
    return t0 / np.expm1(t0 / t) if t > 0 else 0.0 * t0


def intensities(table, ln_n, ln_t):
    """W [K km/s] of every line at ln N [cm^-2] and ln T [K]."""
    t = np.exp(ln_t)
    nu, energy, g, a = (np.array(table[key]) for key in ("frequency_hz", "energy_k", "degeneracy", "einstein_a"))
    width, beam = np.array(table["fwhm_km_s"]), np.array(table["beam_arcsec"])
    t0 = H * nu / K
    column = g * np.exp(ln_n - ln_q(t) - energy / t) * 1e4
    area = C**3 * a * column / (8 * np.pi * nu**3) * np.expm1(t0 / t) / 1e3
    half_width = width / (2 * np.sqrt(np.log(2)))
    tau0 = area / (np.sqrt(np.pi) * half_width)
    growth = -np.expm1(-tau0[:, None] * PROFILE[None, :]).sum(axis=1) * STEP
    filling = 1.0 if table["size_arcsec"] == 0 else 1.0 / (1.0 + (beam / table["size_arcsec"]) ** 2)
    return filling * (planck(t0, t) - planck(t0, table["background_k"])) * half_width * growth


def residuals(table, x):
    return (intensities(table, *x) - np.array(table["intensity"])) / np.array(table["sigma"])


def cost(table, x):
    e = residuals(table, x)
    limit = np.array(table["limit"])
    return 0.5 * np.sum(e[~limit] ** 2) - np.sum(special.log_ndtr(-e[limit]))


def gradient(function, x, step=2e-3):
    """Central difference of sixth order."""
    result = []
    for k in range(len(x)):
        unit = np.zeros(len(x))
        unit[k] = step
        result.append(
            (45 * (function(x + unit) - function(x - unit)) - 9 * (function(x + 2 * unit) - function(x - 2 * unit))
             + (function(x + 3 * unit) - function(x - 3 * unit))) / (60 * step)
        )
    return np.array(result)


def fit(table, truth):
    starts = [truth] + [truth + np.array(shift) for shift in ((1.5, 0.4), (-1.0, -0.3), (0.5, 0.8), (3.0, -0.5))]
    if not any(table["limit"]):
        jacobian = lambda x: gradient(lambda y: residuals(table, y), x).T
        best = min(
            (optimize.least_squares(lambda x: residuals(table, x), start, jac=jacobian, method="lm", xtol=1e-14,
                                    ftol=1e-14, gtol=1e-14) for start in starts),
            key=lambda result: result.cost,
        ).x
        j = jacobian(best)
        return best, np.linalg.inv(j.T @ j)
    best = min(
        (optimize.minimize(lambda x: cost(table, x), start, method="Nelder-Mead",
                           options=dict(xatol=1e-9, fatol=1e-12, maxiter=4000)) for start in starts),
        key=lambda result: result.fun,
    ).x
    for _ in range(4):  # Newton, to the last digits
        slope = gradient(lambda x: cost(table, x), best)
        curvature = gradient(lambda x: gradient(lambda y: cost(table, y), x), best)
        best = best - np.linalg.solve(curvature, slope)
    curvature = gradient(lambda x: gradient(lambda y: cost(table, y), x), best)
    return best, np.linalg.inv(0.5 * (curvature + curvature.T))


def simulate(rng, kind):
    lines = int(rng.integers(4, 13))
    upper = np.sort(rng.choice(np.arange(1, 16), lines, replace=False))
    t = np.exp(rng.uniform(np.log(12.0), np.log(150.0)))
    nu = 2 * B_K * K / H * upper
    table = dict(
        kind=kind,
        frequency_hz=nu.tolist(),
        energy_k=(B_K * upper * (upper + 1.0)).tolist(),
        degeneracy=(2.0 * upper + 1).tolist(),
        einstein_a=(7.2e-8 * 3 * upper**4.0 / (2 * upper + 1)).tolist(),
        fwhm_km_s=rng.uniform(1.0, 6.0, lines).tolist(),
        beam_arcsec=(28.0 / upper * rng.uniform(0.5, 2.0)).tolist(),
        background_k=2.7255,
        size_arcsec=0.0,
        limit=[False] * lines,
    )
    wanted = {"thin": rng.uniform(0.01, 0.2), "thick": np.exp(rng.uniform(np.log(1.0), np.log(20.0)))}.get(
        kind, np.exp(rng.uniform(np.log(0.05), np.log(3.0)))
    )
    if kind == "background":
        table["background_k"] = float(rng.uniform(5.0, 0.7 * t))
    if kind == "dilution":
        table["size_arcsec"] = float(rng.uniform(3.0, 20.0))
    ln_n = 30.0
    for _ in range(60):  # the column density at which the largest tau0 is the wanted one
        t0 = H * nu / K
        column = np.array(table["degeneracy"]) * np.exp(ln_n - ln_q(t) - np.array(table["energy_k"]) / t) * 1e4
        tau0 = (C**3 * np.array(table["einstein_a"]) * column / (8 * np.pi * nu**3) * np.expm1(t0 / t) / 1e3
                / (np.sqrt(np.pi) * np.array(table["fwhm_km_s"]) / (2 * np.sqrt(np.log(2)))))
        ln_n += np.log(wanted / tau0.max())
    truth = np.array([ln_n, np.log(t)])
    model = intensities(table, *truth)
    signal_to_noise = np.exp(rng.uniform(np.log(5.0), np.log(60.0)))
    sigma = np.maximum(np.median(model) / signal_to_noise * rng.uniform(0.7, 1.5, lines), 1e-3 * model)
    observed = model + sigma * rng.standard_normal(lines)
    if kind == "limits":
        limit = np.zeros(lines, bool)
        limit[np.argsort(model / sigma)[: max(1, lines // 3)]] = True
        observed = np.where(limit, np.maximum(observed, 0) + 2 * sigma, observed)
        table["limit"] = limit.tolist()
    table["intensity"] = observed.tolist()
    table["sigma"] = sigma.tolist()
    return table, truth


def main():
    rng = np.random.default_rng(20260510)
    tables = []
    while len(tables) < 200:
        kind = ("thin", "thick", "background", "dilution", "limits")[len(tables) % 5]
        table, truth = simulate(rng, kind)
        best, covariance = fit(table, truth)
        # a temperature that the data do not hold (3 sigma in ln T above 1) is no test of a best fit
        if not np.all(np.isfinite(covariance)) or covariance[1, 1] > 0.1 or abs(best[1] - truth[1]) > 1.5:
            continue
        table.update(ln_column=float(best[0]), ln_temperature=float(best[1]), covariance=covariance.tolist(),
                     cost=float(cost(table, best)))
        tables.append(table)

    out = dict(source=f"scipy {scipy.__version__} least_squares and minimize, numpy {np.__version__}", tables=tables)
    path = pathlib.Path(__file__).with_suffix(".json")
    path.write_text(json.dumps(out, separators=(",", ":")) + "\n")


if __name__ == "__main__":
    main()
