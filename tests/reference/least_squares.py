"""Straight lines by statsmodels' weighted and generalised least squares, for tests/inference.

Run with Debian's python3-statsmodels; writes least_squares.json beside itself. The tests read the file
and need no Python.
"""
import json
import pathlib

import numpy as np
import statsmodels.api as sm

rng = np.random.default_rng(20260401)
cases = []
for number in range(40):
    lines = int(rng.integers(3, 16))
    x = np.sort(rng.uniform(3.0, 600.0, lines))
    sigma = rng.uniform(0.01, 0.4, lines)
    y = rng.uniform(20, 35) - x / rng.uniform(8.0, 400.0) + sigma * rng.standard_normal(lines)
    design = sm.add_constant(x)
    if number % 2 == 0:
        kind = "weighted"
        covariance = np.diag(sigma**2)
        model = sm.WLS(y, design, weights=1.0 / sigma**2)
    else:
        kind = "generalised"
        # calibration errors shared by the lines of one of three groups
        group = rng.integers(0, 3, lines)
        calibration = rng.uniform(0.03, 0.2, 3)
        covariance = np.diag(sigma**2) + np.where(
            group[:, None] == group[None, :], calibration[group][:, None] * calibration[group][None, :], 0.0
        )
        model = sm.GLS(y, design, sigma=covariance)
    fit = model.fit()
    residual = y - design @ fit.params
    cases.append(
        dict(
            kind=kind,
            x=x.tolist(),
            y=y.tolist(),
            sigma=sigma.tolist(),
            covariance=covariance.tolist(),
            coefficients=fit.params.tolist(),
            coefficient_covariance=fit.normalized_cov_params.tolist(),
            chi2=float(residual @ np.linalg.solve(covariance, residual)),
        )
    )

out = dict(source=f"statsmodels {sm.__version__ if hasattr(sm, '__version__') else ''} WLS and GLS", cases=cases)
path = pathlib.Path(__file__).with_suffix(".json")
path.write_text(json.dumps(out, indent=None, separators=(",", ":")) + "\n")
