#!/usr/bin/env python3
"""Reads the tables of a survey back with programs that are not ours: read_survey_tables.py FOLDER

ECSV, FITS and VOTable with astropy, compared value by value; VOTable by `stilts votlint`, FITS by `fitsverify`,
LaTeX by pdflatex, where these are installed. Exits 1 when something is wrong, 77 when astropy is missing.
"""
import os
import shutil
import subprocess
import sys
import tempfile
import warnings

try:
    import numpy as np
    from astropy.io.votable import parse_single_table
    from astropy.table import Table
except ImportError:
    print("astropy is not installed: skipped")
    sys.exit(77)

folder = sys.argv[1]
failures = 0


def check(holds, claim):
    global failures
    failures += not holds
    print("pass " if holds else "FAIL ", claim)


def texts(column):
    return [str(x) if x is not np.ma.masked else "" for x in column]


def ascii_text(text):
    return "".join(c if ord(c) < 0x7F else "\\u{%X}" % ord(c) for c in text)


with warnings.catch_warnings():
    warnings.simplefilter("error")
    ecsv = Table.read(os.path.join(folder, "results.ecsv"), format="ascii.ecsv")
    fits = Table.read(os.path.join(folder, "results.fits"))
    votable = parse_single_table(os.path.join(folder, "results.vot"), verify="exception").to_table()
    csv = Table.read(os.path.join(folder, "results.csv"), format="ascii.csv")

check(ecsv.colnames == fits.colnames == votable.colnames, "ECSV, FITS and VOTable have the same columns")
check([name.split(" [")[0] for name in csv.colnames] == ecsv.colnames, "CSV has them too")
check(len(ecsv) == len(fits) == len(votable) == len(csv) > 0, f"and the same {len(ecsv)} rows")
for name in ecsv.colnames:
    check(ecsv[name].unit == fits[name].unit == votable[name].unit, f"{name}: unit {ecsv[name].unit}")
    if ecsv[name].dtype.kind == "f":
        a, b, c = (np.ma.filled(np.ma.asarray(t[name], dtype=float), np.nan) for t in (ecsv, fits, votable))
        check(np.array_equal(a, b, equal_nan=True) and np.array_equal(a, c, equal_nan=True), f"{name}: the same bits")
    elif ecsv[name].dtype.kind == "U":
        a, b, c = texts(ecsv[name]), texts(fits[name]), texts(votable[name])
        check(a == c and [ascii_text(x).rstrip() for x in a] == [x.rstrip() for x in b], f"{name}: the same texts")
    else:
        same = all((x is np.ma.masked) == (y is np.ma.masked) and (x is np.ma.masked or x == y)
                   for x, y in zip(ecsv[name], votable[name]))
        check(same, f"{name}: the same values")


def run(arguments, **options):
    return subprocess.run(arguments, capture_output=True, text=True, **options)


if shutil.which("stilts"):
    lint = run(["stilts", "votlint", os.path.join(folder, "results.vot")])
    check(lint.returncode == 0 and "ERROR" not in lint.stdout + lint.stderr and "WARNING" not in lint.stdout,
          "votlint has nothing to complain of " + (lint.stdout + lint.stderr)[:300])
if shutil.which("fitsverify"):
    verify = run(["fitsverify", "-q", os.path.join(folder, "results.fits")])
    check(verify.returncode == 0 and "OK" in verify.stdout, "fitsverify: " + verify.stdout.strip())
if shutil.which("pdflatex"):
    with tempfile.TemporaryDirectory() as place:
        shutil.copy(os.path.join(folder, "results.tex"), place)
        with open(os.path.join(place, "paper.tex"), "w") as paper:
            paper.write("\\documentclass{article}\\usepackage{longtable}\\begin{document}\n"
                        "\\input{results}\n\\end{document}\n")
        latex = run(["pdflatex", "-interaction=nonstopmode", "-halt-on-error", "paper.tex"], cwd=place)
        check(latex.returncode == 0, "LaTeX compiles " + ("" if latex.returncode == 0 else latex.stdout[-800:]))
print(f"{failures} failed")
sys.exit(failures > 0)
