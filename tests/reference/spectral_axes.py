#!/usr/bin/env python3
"""Writes spectral_axes.json: frequencies of spectral axes by astropy, for the test SpectralAxis.AgreesWithAstropy.

    python3 spectral_axes.py [FOLDER OF REAL HEADERS]

Two lists. `headers` holds invented headers with the frequencies of five channels. `real` holds the same for headers
in a folder of files that is not part of this repository (test data of astronomy libraries): only the numbers are
stored. Frequencies are in the frame of the header; `lsrk_hz` is in the LSRK, where a correction is possible.
astropy 5.2.1 parses the axes (its own copy of wcslib) and converts velocities with its units; frames are converted
by its SpectralCoord with Earth positions of its built-in ephemeris. FK4 and galactic positions too are converted by astropy.
"""
import json
import pathlib
import sys
import warnings

import numpy as np
from astropy import units as u
from astropy.coordinates import EarthLocation, SkyCoord, SpectralCoord
from astropy.io import fits
from astropy.time import Time
from astropy.wcs import WCS

warnings.simplefilter("ignore")
HERE = pathlib.Path(__file__).parent
N = 512
NU0 = 115271201800.0  # Hz, near CO 1-0: any number serves
C = 299792458.0


def frequency(ctype, values, rest):
    kind = ctype[:4]
    if kind == "FREQ":
        return values
    if kind in ("VRAD", "VOPT", "VELO"):
        convention = {"VRAD": u.doppler_radio, "VOPT": u.doppler_optical, "VELO": u.doppler_relativistic}[kind]
        return (values * u.m / u.s).to_value(u.Hz, convention(rest * u.Hz))
    if kind == "ZOPT":
        return rest / (1 + values)
    if kind == "BETA":
        return (values * C * u.m / u.s).to_value(u.Hz, u.doppler_relativistic(rest * u.Hz))
    if kind == "WAVE":
        return (values * u.m).to_value(u.Hz, u.spectral())
    if kind == "WAVN":
        return (values / u.m).to_value(u.Hz, u.spectral())
    if kind == "ENER":
        return (values * u.J).to_value(u.Hz, u.spectral())
    if kind == "AFRQ":
        return values / (2 * np.pi)
    raise ValueError(ctype)


def axis(header):
    """Five channels: pixel numbers counted from 0, frequencies in the frame of the header."""
    header = header.copy()
    if isinstance(header.get("VELREF"), str):
        header["VELREF"] = int(header["VELREF"])
    wcs = WCS(header, fix=True)
    wcs.wcs.set()
    number = wcs.wcs.spec + 1
    spectral = wcs.sub([number])
    spectral.wcs.set()
    n = header.get(f"NAXIS{number}")
    pixels = np.array([0.0, n // 4, n // 2, (3 * n) // 4, n - 1]).astype(int)
    values = spectral.wcs_pix2world(pixels, 0)[0]
    rest = header.get("RESTFRQ", header.get("RESTFREQ", 0.0)) or NU0
    if rest < 1e6:
        rest = NU0
    kind = spectral.wcs.ctype[0]
    return dict(type=kind, channels=[int(p) for p in pixels],
                frequency_hz=[float(f) for f in frequency(kind, values, rest)])


def lsrk(header, frequencies):
    specsys = header["SPECSYS"]
    if header["CTYPE2"].startswith("GLON"):
        place = SkyCoord(header["CRVAL2"] * u.deg, header["CRVAL3"] * u.deg, frame="galactic").icrs
    elif header.get("RADESYS") == "FK4":
        place = SkyCoord(header["CRVAL2"] * u.deg, header["CRVAL3"] * u.deg, frame="fk4", equinox="B1950").icrs
    else:
        place = SkyCoord(header["CRVAL2"] * u.deg, header["CRVAL3"] * u.deg, frame="icrs")
    time = Time(header.get("MJD-OBS", 58000.0), format="mjd")
    if "DATE-OBS" in header:
        time = Time(header["DATE-OBS"])
    site = EarthLocation.from_geocentric(header.get("OBSGEO-X", 2225142.0), header.get("OBSGEO-Y", -5440307.0),
                                         header.get("OBSGEO-Z", -2481029.0), unit=u.m)
    observer = {"TOPOCENT": site.get_itrs(time), "BARYCENT": "icrs", "LSRD": "lsrd", "GEOCENTR": "gcrs"}[specsys]
    target = SkyCoord(place, distance=1 * u.Mpc)
    if not isinstance(observer, str):
        start = SpectralCoord(frequencies * u.Hz, observer=observer, target=target)
        return start.with_observer_stationary_relative_to("lsrk").to_value(u.Hz)
    origin = site.get_itrs(time)
    at_site = SpectralCoord(frequencies * u.Hz, observer=origin, target=target)
    if observer == "gcrs":  # at rest relative to the centre of the Earth
        from astropy.coordinates import GCRS, CartesianRepresentation, CartesianDifferential
        still = CartesianRepresentation([0, 0, 0] * u.m).with_differentials(CartesianDifferential([0, 0, 0] * u.m / u.s))
        start = SpectralCoord(frequencies * u.Hz, observer=GCRS(still, obstime=time), target=target)
        return start.with_observer_stationary_relative_to("lsrk").to_value(u.Hz)
    # The ratio of the frequencies that observers at rest in the two frames see.
    a = at_site.with_observer_stationary_relative_to(observer).to_value(u.Hz)
    b = at_site.with_observer_stationary_relative_to("lsrk").to_value(u.Hz)
    return frequencies * (b / a)


def base(**more):
    header = fits.Header()
    header["SIMPLE"] = True
    header["BITPIX"] = -32
    header["NAXIS"] = 3
    header["NAXIS1"], header["NAXIS2"], header["NAXIS3"] = N, 1, 1
    header["CTYPE2"], header["CRVAL2"], header["CDELT2"], header["CRPIX2"] = "RA---SIN", 83.81, -0.001, 1.0
    header["CTYPE3"], header["CRVAL3"], header["CDELT3"], header["CRPIX3"] = "DEC--SIN", -5.375, 0.001, 1.0
    header["CUNIT2"] = header["CUNIT3"] = "deg"
    header["RESTFRQ"] = NU0
    header["SPECSYS"] = "LSRK"
    for key, value in more.items():
        key = key.replace("_", "-") if key.startswith(("DATE", "MJD", "OBSGEO")) else key
        if value is None:
            del header[key]
        else:
            header[key] = value
    return header


def spectral(ctype, crval, cdelt, cunit, **more):
    return base(CTYPE1=ctype, CRVAL1=crval, CDELT1=cdelt, CRPIX1=200.0, CUNIT1=cunit, **more)


def invented():
    both = []

    def add(name, ctype, crval, cdelt, cunit, **more):
        for sense, sign in (("up", 1), ("down", -1)):
            both.append((f"{name}_{sense}", spectral(ctype, crval, sign * cdelt, cunit, **more)))

    add("freq_hz", "FREQ", 115.2e9, 61e3, "Hz")
    add("freq_ghz", "FREQ", 115.2, 61e-6, "GHz")
    add("freq_no_cunit", "FREQ", 115.2e9, 61e3, "")
    add("vrad_ms", "VRAD", 7e3, 160.0, "m/s")
    add("vrad_kms", "VRAD", 7.0, 0.16, "km/s")
    add("vopt", "VOPT", -12e3, 250.0, "m/s")
    add("vopt_f2w", "VOPT-F2W", 2000.0, 0.3, "km/s")
    add("vrad_w2f", "VRAD-W2F", 900.0, 1.5, "km/s")
    add("zopt", "ZOPT", 0.02, 1e-6, "")
    add("zopt_f2w", "ZOPT-F2W", 0.3, 1e-5, "")
    add("velo", "VELO", 30e3, 300.0, "m/s")
    add("velo_f2v", "VELO-F2V", 8000.0, 0.5, "km/s")
    add("beta", "BETA", 0.01, 1e-6, "")
    add("wave", "WAVE", 2.6e-3, 2e-9, "m")
    add("wave_um", "WAVE", 2600.0, 2e-3, "um")
    add("wave_log", "WAVE-LOG", 2.6e-3, 2e-8, "m")
    add("freq_log", "FREQ-LOG", 115.2e9, 1e6, "Hz")
    add("freq_w2f", "FREQ-W2F", 115.2e9, 1e5, "Hz")
    add("wavn", "WAVN", 384.0, 2e-4, "m-1")
    add("ener", "ENER", 4.8e-4, 2e-10, "eV")
    add("afrq", "AFRQ", 7.2e11, 3e5, "rad/s")
    old = dict(SPECSYS=None)
    add("velo_lsr_radio", "VELO-LSR", 30e3, 300.0, "m/s", VELREF=257, **old)
    add("velo_lsr_optical", "VELO-LSR", 30e3, 300.0, "m/s", VELREF=1, **old)
    add("felo_lsr", "FELO-LSR", 3000e3, 300.0, "m/s", VELREF=1, **old)
    add("freq_lsr", "FREQ-LSR", 115.2e9, 61e3, "Hz", **old)
    cd = spectral("VRAD", 7e3, 1.0, "m/s")
    del cd["CDELT1"], cd["CDELT2"], cd["CDELT3"]
    cd["CD1_1"], cd["CD2_2"], cd["CD3_3"] = -160.0, -0.001, 0.001
    both.append(("cd_matrix", cd))
    pc = spectral("VRAD", 7e3, 160.0, "m/s")
    pc["PC1_1"], pc["PC2_2"], pc["PC3_3"] = 0.5, 1.0, 1.0
    both.append(("pc_matrix", pc))
    return both


def moving():
    site = dict(OBSGEO_X=2225142.0, OBSGEO_Y=-5440307.0, OBSGEO_Z=-2481029.0)
    frames = []
    for k, (ra, dec, date) in enumerate([(83.81, -5.375, "2015-02-11T02:03:04.5"), (266.4, -29.0, "2015-08-21T23:30:00"),
                                         (187.7, 12.4, "2003-05-05T12:00:00"), (30.6, 88.0, "2021-12-24T06:00:00")]):
        where = dict(CRVAL2=ra, CRVAL3=dec, DATE_OBS=date)
        frames.append((f"topocent_{k}", spectral("FREQ", 115.2e9, 61e3, "Hz", SPECSYS="TOPOCENT", **where, **site)))
        frames.append((f"barycent_{k}", spectral("VRAD", 7e3, 160.0, "m/s", SPECSYS="BARYCENT", CRVAL2=ra, CRVAL3=dec)))
        frames.append((f"geocentr_{k}", spectral("FREQ", 345.8e9, 61e3, "Hz", SPECSYS="GEOCENTR", **where)))
        frames.append((f"lsrd_{k}", spectral("VOPT", 7e3, 160.0, "m/s", SPECSYS="LSRD", CRVAL2=ra, CRVAL3=dec)))
    frames.append(("galactic", spectral("FREQ", 115.2e9, 61e3, "Hz", SPECSYS="BARYCENT", CTYPE2="GLON-CAR",
                                        CTYPE3="GLAT-CAR", CRVAL2=49.2, CRVAL3=0.0)))
    frames.append(("fk4", spectral("FREQ", 115.2e9, 61e3, "Hz", SPECSYS="BARYCENT", RADESYS="FK4", EQUINOX=1950.0)))
    return frames


def entry(name, header, store_cards=True):
    result = dict(name=name, **axis(header))
    if store_cards:
        result["cards"] = [card.image for card in header.cards]
    return result


def main():
    document = dict(origin="astropy 5.2.1, tests/reference/spectral_axes.py", headers=[], moving=[], real=[])
    for name, header in invented():
        document["headers"].append(entry(name, header))
    for name, header in moving():
        made = entry(name, header)
        made["lsrk_hz"] = [float(f) for f in lsrk(header, np.array(made["frequency_hz"]))]
        document["moving"].append(made)
    if len(sys.argv) > 1:
        for path in sorted(pathlib.Path(sys.argv[1]).iterdir()):
            try:
                if path.suffix == ".hdr":
                    text = path.read_bytes().decode("ascii", "replace")
                    header = fits.Header.fromstring(text, sep="\n" if "\n" in text else "")
                elif path.suffix == ".fits":
                    header = fits.getheader(path)
                else:
                    continue
                document["real"].append(entry(path.name, header, False))
            except Exception as error:  # no spectral axis, or one that astropy refuses
                print(f"{path.name}: {error!r}", file=sys.stderr)
    (HERE / "spectral_axes.json").write_text(json.dumps(document, indent=1) + "\n")


if __name__ == "__main__":
    main()
