"""Writes curve_of_growth_table.hpp: H(tau) = G(tau)/tau of a Gaussian line as piecewise polynomials.

    G(tau) = (1/sqrt(pi)) * integral of (1 - exp(-tau exp(-x^2))) dx

Each octave of 1 + tau is cut in four; on each quarter H is interpolated at the Chebyshev points of degree
10 from values of 30 digits and written as a polynomial in s, which runs from -1 to 1 over the quarter.
Needs Debian's python3-mpmath; takes under a minute. Run it in this folder.
"""
import pathlib

import mpmath as mp

mp.mp.dps = 34
OCTAVES = 41
QUARTERS = 4
DEGREE = 10


def saturation(tau):
    if tau < mp.mpf("1e-5"):
        return sum((-tau) ** n / (mp.factorial(n + 1) * mp.sqrt(n + 1)) for n in range(8))
    # A trapezoidal sum: with these steps it is exact to 1e-25 up to tau = 1e12 (found by halving the step).
    step = mp.mpf(1) / (24 if tau < 100 else 64)
    points = int(mp.ceil(mp.sqrt(mp.log(tau * mp.mpf(10) ** 34)) / step))
    total = -mp.expm1(-tau) / 2
    for k in range(1, points + 1):
        total -= mp.expm1(-tau * mp.exp(-((k * step) ** 2)))
    return 2 * total * step / mp.sqrt(mp.pi) / tau


def monomials(chebyshev):
    """Coefficients of powers of s from those of the Chebyshev polynomials."""
    powers = [mp.mpf(0)] * len(chebyshev)
    before, here = [mp.mpf(1)], [mp.mpf(0), mp.mpf(1)]
    for order, factor in enumerate(chebyshev):
        polynomial = before if order == 0 else here
        for power, value in enumerate(polynomial):
            powers[power] += factor * value
        if order >= 1:
            after = [mp.mpf(0)] + [2 * value for value in here]
            for power, value in enumerate(before):
                after[power] -= value
            before, here = here, after
    return powers


def quarter(octave, part):
    low = mp.mpf(2) ** octave * (1 + mp.mpf(part) / QUARTERS) - 1
    high = mp.mpf(2) ** octave * (1 + mp.mpf(part + 1) / QUARTERS) - 1
    count = DEGREE + 1
    angles = [mp.pi * (2 * k + 1) / (2 * count) for k in range(count)]
    values = [saturation((low + high) / 2 + (high - low) / 2 * mp.cos(angle)) for angle in angles]
    chebyshev = [2 * sum(v * mp.cos(j * a) for v, a in zip(values, angles)) / count for j in range(count)]
    chebyshev[0] /= 2
    return monomials(chebyshev)


quarters = [quarter(octave, part) for octave in range(OCTAVES) for part in range(QUARTERS)]
# One row per power of s: neighbouring lines gather from one row.
rows = ["    {" + ", ".join(mp.nstr(c[power], 17) for c in quarters) + "}," for power in range(DEGREE + 1)]

pathlib.Path("curve_of_growth_table.hpp").write_text(
    "// Written by curve_of_growth_table.py beside this file; do not edit.\n"
    "#pragma once\n\n"
    "namespace trotline::generated {\n\n"
    "// clang-format off\n"
    f"inline constexpr int kSaturationDegree = {DEGREE};\n"
    f"inline constexpr double kSaturation[{DEGREE + 1}][{OCTAVES * QUARTERS}] = {{\n" + "\n".join(rows) + "\n};\n"
    "// clang-format on\n\n"
    "}  // namespace trotline::generated\n"
)
