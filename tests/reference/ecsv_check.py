#!/usr/bin/env python3
"""Checks the ECSV that trotline writes with astropy, and writes the ECSV files that its tests read.

    python3 ecsv_check.py          compare trotline_table.ecsv with the numbers below (astropy 5.2.1)
    python3 ecsv_check.py write    write astropy_space.ecsv and astropy_comma.ecsv anew

trotline_table.ecsv is pinned to the writer by the test IntensityTable.WrittenEcsvIsTheTextThatAstropyReads.
"""
import pathlib
import sys

import numpy as np
from astropy import units as u
from astropy.table import MaskedColumn, Table

HERE = pathlib.Path(__file__).parent

FREQUENCY_GHZ = [115.271, 230.538, 345.796]
INTENSITY = [4.21, -0.5, 1.0]
NOTE = 'a "quoted" word, and a comma'


def write():
    table = Table(meta={"comments": ["invented numbers"]})
    table["transition"] = ["1(0,1)-0(0,0)", "2-1", "3-2"]
    table["frequency"] = MaskedColumn(FREQUENCY_GHZ, unit=u.GHz, description="rest frequency")
    table["intensity"] = MaskedColumn(INTENSITY, unit=u.K * u.km / u.s, format=".3f")
    table["intensity"].format = None
    table["intensity_error"] = MaskedColumn([0.08, 0.08, 0.3], unit=u.K * u.km / u.s)
    table["beam_fwhm"] = MaskedColumn([27.4, 0.0, 9.1], unit=u.arcsec, mask=[False, True, False])
    table["limit"] = np.array([False, False, True])
    table["note"] = MaskedColumn([NOTE, "x", "last"], mask=[False, True, False])
    table.write(HERE / "astropy_space.ecsv", format="ascii.ecsv", overwrite=True)
    table.write(HERE / "astropy_comma.ecsv", format="ascii.ecsv", delimiter=",", overwrite=True)


def check():
    table = Table.read(HERE / "trotline_table.ecsv", format="ascii.ecsv")
    assert list(table["frequency"]) == FREQUENCY_GHZ and table["frequency"].unit == u.GHz
    assert list(table["intensity"]) == INTENSITY and table["intensity"].unit == u.K * u.km / u.s
    assert list(table["intensity_error"][:2]) == [0.08, 0.08] and table["intensity_error"].mask[2]
    assert abs(table["beam_fwhm"][0] - 27.4) < 1e-13 and table["beam_fwhm"].mask[1]
    assert table["beam_fwhm"].unit == u.arcsec
    assert list(table["limit"]) == [False, False, True] and table["limit"].dtype == bool
    assert list(table["transition"]) == ["1(0,1)-0(0,0)", "2-1", "#3-2"]
    assert table["note"][0] == NOTE and table["note"].mask[1] and table["note"][2] == "Größe µ"
    print("trotline_table.ecsv: astropy reads every value as meant")


if __name__ == "__main__":
    write() if sys.argv[1:] == ["write"] else check()
