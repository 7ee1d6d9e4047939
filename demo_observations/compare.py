#!/usr/bin/env python3
"""Truth against result: compare.py TRUTH.json FOLDER, with FOLDER/<source>/result.json for each source."""
import json
import math
import pathlib
import sys


def row(name, truth, result):
    t = result["temperature_k"]
    n = result["log10_column_density_cm2"]
    log_truth = math.log10(truth["column_density_cm2"])
    pull_t = (t["value"] - truth["temperature_k"]) / t["error"]
    pull_n = (n["value"] - log_truth) / n["error"]
    text = "%-8s %-5s %6.1f  %6.1f ± %-5.1f %+5.1f     %6.2f  %6.2f ± %-5.2f %+5.1f   %s" % (
        name, truth["species"], truth["temperature_k"], t["value"], t["error"], pull_t,
        log_truth, n["value"], n["error"], pull_n, result["verdict"])
    return text, pull_t, pull_n


def main():
    truth = json.loads(pathlib.Path(sys.argv[1]).read_text())["sources"]
    folder = pathlib.Path(sys.argv[2])
    print("                    T [K]                          lg N [cm-2]")
    print("source   line   truth  result       pull      truth  result       pull   verdict")
    worst = 0.0
    for name, true in truth.items():
        text, pull_t, pull_n = row(name, true, json.loads((folder / name / "result.json").read_text()))
        worst = max(worst, abs(pull_t), abs(pull_n))
        print(text)
    print("pull = (result - truth) / error; the largest of %d is %.1f" % (2 * len(truth), worst))
    sys.exit(0 if worst < 4 else 1)


if __name__ == "__main__":
    main()
