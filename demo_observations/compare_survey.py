#!/usr/bin/env python3
"""Truth against result of the demo's survey: compare_survey.py TRUTH.json FOLDER, FOLDER holding results.ecsv."""
import csv
import json
import math
import pathlib
import sys


def rows_of(path):
    with open(path, encoding="utf-8") as lines:
        return {(row["source"], row["species"]): row for row in csv.DictReader(x for x in lines if not x.startswith("#"))}


def number(row, name):
    return float(row[name]) if row[name] else math.nan


def share(hits):
    return "%3.0f %% of %d" % (100 * sum(hits) / len(hits), len(hits))


def main():
    truth = json.loads(pathlib.Path(sys.argv[1]).read_text())
    folder = pathlib.Path(sys.argv[2])
    rows = rows_of(folder / "results.ecsv")
    inside = {"T 68": [], "T 95": [], "N 68": [], "N 95": []}
    ratios, shifts, unanswered = [], [], []
    for job in truth["jobs"]:
        if job["trap"]:
            continue
        row = rows[job["source"], job["species"]]
        if row["status"] != "done":
            unanswered.append("%s %s" % (job["source"], job["species"]))
            continue
        true = {"T": job["temperature_k"], "N": math.log10(job["column_density_cm2"])}
        for letter, name in (("T", "temperature"), ("N", "log10_column_density")):
            for level in ("68", "95"):
                low, high = number(row, "%s_low%s" % (name, level)), number(row, "%s_high%s" % (name, level))
                inside["%s %s" % (letter, level)].append(not (true[letter] < low or true[letter] > high))
        ratios.append(abs(number(row, "temperature") / true["T"] - 1))
        shifts.append(abs(number(row, "log10_column_density") - true["N"]))
    ratios.sort()
    shifts.sort()
    print("Truth against result, %d sources and species without a trap:" % len(ratios))
    print("  T is off by %.1f %% (median), N by %.1f %%" %
          (100 * ratios[len(ratios) // 2], 100 * (10 ** shifts[len(shifts) // 2] - 1)))
    for letter in "TN":
        print("  intervals of %s that hold the truth: 68 %%: %s, 95 %%: %s" %
              (letter, share(inside[letter + " 68"]), share(inside[letter + " 95"])))
    if unanswered:
        print("  without an answer: " + ", ".join(unanswered))
    print("Traps that were built in, and what the survey says of them:")
    for what, how in truth["traps"].items():
        print("  %s: %s" % (what, how))
    found = [line.split("\t") for line in (folder / "figures/line-residuals.tsv").read_text().splitlines()[1:]]
    off = sorted((row for row in found if row[5] == "1"), key=lambda row: -abs(float(row[1])))
    if off:
        print("  the line that is off most, over all sources: %s, by %+.1f sigma" % (off[0][6][2:], float(off[0][1])))
    for source in ", ".join(truth["traps"]).split(", "):
        verdicts = [row["verdict"] for (name, species), row in rows.items() if name == source and species != "SiO"]
        if len(verdicts) > 3 and source not in [job["source"] for job in truth["jobs"] if not job["trap"]]:
            bad = sum("does not" in verdict for verdict in verdicts)
            print("  %s: one temperature is refused for %d of %d species" % (source, bad, len(verdicts)))
    good = sum(inside["T 95"]) / len(inside["T 95"])
    sys.exit(0 if good > 0.85 else 1)


if __name__ == "__main__":
    main()
