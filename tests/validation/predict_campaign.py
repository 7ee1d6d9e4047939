#!/usr/bin/env python3
"""Whether the lines that `trotline predict` chooses keep its promise: predict_campaign.py PROGRAM [SOURCES]

For each of three plans, 500 sources are observed twice: in the chosen lines, and in as many of the brightest.
Intensities and noise are made here, from the equations of a homogeneous layer in LTE (curve of growth by numerical
integration) with levels from `PROGRAM species NAME --json`; T and N are fitted here too, by scipy. Claims:
  1. the scatter of T is within 10 % of what predict expects, for both sets of lines (500 sources know a scatter
     to 3.2 %, so 10 % is three of its errors);
  2. the chosen lines give the smaller scatter;
  3. the same when the sources differ from the plan by 30 % in T and a factor 2 in N.
Then the campaign in the chosen lines goes through `PROGRAM survey` by the method of the likelihood, and its T
must scatter alike.
"""
import json
import pathlib
import subprocess
import sys
import tempfile

import numpy as np
from scipy.optimize import least_squares

H, K, C = 6.62607015e-34, 1.380649e-23, 299792458.0
PLANS = [
    ("CH3CN", 45.0, 3e13, ["--line-width", "5 km/s", "--dish", "30 m", "--source-size", "10 arcsec", "--bands",
                           "84 GHz..116 GHz, 200 GHz..270 GHz", "--rms", "12 mK", "--channel", "0.5 km/s"], 4),
    ("HC3N", 22.0, 1e13, ["--line-width", "1.5 km/s", "--beam", "20 arcsec", "--bands",
                          "70 GHz..116 GHz at 100 K, 125 GHz..180 GHz at 130 K, 200 GHz..275 GHz at 200 K",
                          "--time", "20 min", "--channel", "0.3 km/s"], 3),
    ("SO2", 60.0, 1e14, ["--line-width", "4 km/s", "--dish", "12 m", "--source-size", "20 arcsec", "--bands",
                         "84 GHz..116 GHz, 211 GHz..275 GHz, 275 GHz..373 GHz", "--rms", "15 mK", "--channel",
                         "0.4 km/s"], 5),
]
failures = 0


def check(holds, claim):
    global failures
    failures += not holds
    print("pass " if holds else "FAIL ", claim, flush=True)


def planck(nu, t):
    return H * nu / K / np.expm1(H * nu / K / t)


class Layer:
    """W of lines from T and ln N."""

    def __init__(self, program, species, lines, width):
        text = subprocess.run([program, "species", species, "--levels", "--json"], check=True, capture_output=True,
                              text=True).stdout
        levels = json.loads(text)["levels"]
        self.energies = np.array([level["energy_k"] for level in levels])
        self.weights = np.array([level["degeneracy"] for level in levels])
        get = lambda key: np.array([line[key] for line in lines])
        self.nu, self.energy, self.weight = get("frequency_mhz") * 1e6, get("upper_energy_k"), get("upper_degeneracy")
        self.a, self.filling, self.width = get("einstein_a_s1"), get("filling"), width
        self.x = np.linspace(-4.0, 4.0, 801)  # in units of the 1/e half width

    def intensity(self, ln_n, t):
        q = np.sum(self.weights * np.exp(-self.energies / t))
        upper = np.exp(ln_n) * 1e4 / q * self.weight * np.exp(-self.energy / t)
        area = C**3 * self.a * upper / (8 * np.pi * self.nu**3) * np.expm1(H * self.nu / K / t)
        tau = np.sqrt(4 * np.log(2) / np.pi) / (self.width * 1e3) * area
        grown = np.trapezoid(-np.expm1(-tau[:, None] * np.exp(-self.x**2)), self.x, axis=1) if hasattr(
            np, "trapezoid") else np.trapz(-np.expm1(-tau[:, None] * np.exp(-self.x**2)), self.x, axis=1)
        half = self.width / (2 * np.sqrt(np.log(2)))
        return self.filling * (planck(self.nu, t) - planck(self.nu, 2.7255)) * grown * half

    def fit(self, w, sigma, ln_n, t):
        def residuals(p):
            return (self.intensity(p[0], np.exp(p[1])) - w) / sigma

        best = least_squares(residuals, [ln_n, np.log(t)], x_scale=[1.0, 1.0], method="lm")
        return np.exp(best.x[1])

    def expected(self, ln_n, t, sigma):
        """Error of T from numerical derivatives: Fisher information written out again."""
        step = 1e-4
        by_n = (self.intensity(ln_n + step, t) - self.intensity(ln_n - step, t)) / (2 * step)
        by_t = (self.intensity(ln_n, t * (1 + step)) - self.intensity(ln_n, t * (1 - step))) / (2 * step)
        g = np.array([by_n, by_t]) / sigma
        return t * np.sqrt(np.linalg.inv(g @ g.T)[1, 1])


def main():
    program, count = sys.argv[1], int(sys.argv[2]) if len(sys.argv) > 2 else 500
    random = np.random.default_rng(42)
    for species, t, n, telescope, choose in PLANS:
        width = float(telescope[telescope.index("--line-width") + 1].split()[0])
        plan = json.loads(subprocess.run(
            [program, "predict", species, "--temperature", f"{t} K", "--column-density", f"{n} cm-2", *telescope,
             "--choose", str(choose), "--json"], check=True, capture_output=True, text=True).stdout)
        size = next(x for x in plan["expected_by_number_of_lines"] if x["lines"] == choose)
        scatter = {}
        for name, mark, answer in (("chosen", "chosen", size["best"]), ("brightest", "among_brightest", size["brightest"])):
            lines = [line for line in plan["lines"] if line[mark]]
            check(len(lines) == choose and not any(line["blended_with"] for line in lines),
                  f"{species}, {name}: " + ", ".join(line["transition"] for line in lines))
            layer = Layer(program, species, lines, width)
            sigma = np.array([line["intensity_error_k_km_s"] for line in lines])
            promised = answer["temperature_error_k"]
            true = layer.intensity(np.log(n), t)
            worst = np.max(np.abs(true / np.array([line["intensity_k_km_s"] for line in lines]) - 1))
            check(worst < 1e-3, f"  intensities agree with those written out here, worst by {worst:.1e}")
            found = np.array([layer.fit(true + sigma * random.standard_normal(choose), sigma, np.log(n), t)
                              for _ in range(count)])
            scatter[name] = np.std(found, ddof=1)
            check(abs(scatter[name] / promised - 1) < 0.10,
                  f"  T scatters by {scatter[name]:.4g} K, promised {promised:.4g} K: ratio {scatter[name] / promised:.3f}")
            pulls, errors = [], []
            for _ in range(count):
                own_t, own_n = t * 1.3 ** random.uniform(-1, 1), np.log(n) + np.log(2) * random.uniform(-1, 1)
                w = layer.intensity(own_n, own_t) + sigma * random.standard_normal(choose)
                errors.append(layer.fit(w, sigma, own_n, own_t) - own_t)
                pulls.append(errors[-1] / layer.expected(own_n, own_t, sigma))
            scatter[name + " varied"] = np.sqrt(np.mean(np.square(errors)))
            check(abs(np.std(pulls) - 1) < 0.10, f"  sources that differ: error over expected error {np.std(pulls):.3f}")
            if name == "chosen":
                through_survey(program, species, lines, sigma, true, promised, width, count, random, telescope)
        check(scatter["chosen"] < scatter["brightest"],
              f"  the chosen lines beat the brightest {scatter['brightest'] / scatter['chosen']:.2f} times")
        check(scatter["chosen varied"] < scatter["brightest varied"],
              f"  and {scatter['brightest varied'] / scatter['chosen varied']:.2f} times for sources that differ")
    print(f"{failures} failed")
    sys.exit(failures > 0)


def through_survey(program, species, lines, sigma, true, promised, width, count, random, telescope):
    with tempfile.TemporaryDirectory() as folder:
        place = pathlib.Path(folder)
        rows = ["source,transition,intensity [K km/s],intensity_error [K km/s],beam_fwhm [arcsec],fwhm [km/s]"]
        for source in range(count):
            for line, w, s in zip(lines, true, sigma):
                rows.append(f"S{source},{line['transition']},{w + s * random.standard_normal():.9g},{s:.9g},"
                            f"{line['beam_fwhm_arcsec']:.9g},{width}")
        (place / "lines.csv").write_text("\n".join(rows) + "\n")
        size = (f", source_size: {telescope[telescope.index('--source-size') + 1]}" if "--source-size" in telescope else "")
        (place / "survey.yaml").write_text(f"tables: lines.csv\nspecies: [{species}]\ndefaults: {{method: likelihood{size}}}\n"
                                           "outputs: {tables: [csv], figures: no, page: no}\n")
        run = subprocess.run([program, "survey", place / "survey.yaml", "--out", place / "out"], capture_output=True,
                             text=True)
        if "there is no 'likelihood'" in run.stderr:
            print("skip   the program does not know the method of the likelihood")
            return
        table = np.genfromtxt(place / "out/results.csv", delimiter=",", names=True, dtype=None, encoding="utf-8")
        name = next(x for x in table.dtype.names if x.startswith("temperature_K") or x == "temperature")
        scatter = np.nanstd(table[name], ddof=1)
        check(abs(scatter / promised - 1) < 0.10, f"  through the survey: {scatter:.4g} K, ratio {scatter / promised:.3f}")


main()
