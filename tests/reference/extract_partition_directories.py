"""Takes log10 Q of some species out of the two published directories, into partition_directories.yaml.

Run by hand: python3 extract_partition_directories.py > partition_directories.yaml
The directories are those distributed with Debian's python3-astroquery: catdir.cat of CDMS (Mueller et al. 2001, A&A
370, L49; 2005, J. Mol. Struct. 742, 215) and of JPL (Pickett et al. 1998, JQSRT 60, 883).
"""

import pathlib
import re

ASTROQUERY = pathlib.Path("/usr/lib/python3/dist-packages/astroquery")
CDMS_TEMPERATURES = [1000, 500, 300, 225, 150, 75, 37.5, 18.75, 9.375, 5, 2.725]
JPL_TEMPERATURES = [300, 225, 150, 75, 37.5, 18.75, 9.375]

# Species of ours: tag in CDMS, tag in JPL; 0 where there is none.
TAGS = {
    "CO": (28503, 28001),
    "13CO": (29501, 29001),
    "C18O": (30502, 30001),
    "CS": (44501, 44001),
    "SiO": (44505, 44002),
    "HC3N": (51501, 51001),
    "OCS": (60503, 60001),
    "HCO+": (29507, 29002),
    "13C18O": (31502, 0),
    "13CS": (45501, 45001),
    "29SiO": (45504, 45002),
    "30SiO": (46502, 0),
    "34SO": (50501, 50001),
    "C17O": (29503, 29006),
    "C2H3CN": (53515, 53001),
    "C2H5CN": (55502, 55001),
    "C34S": (46501, 46001),
    "C3S": (68503, 68001),
    "c-C3H2": (38508, 38002),
    "CCH": (25501, 25001),
    "CCS": (56502, 56007),
    "CH2NH": (29518, 29003),
    "CH3-13CN": (42509, 42007),
    "CH3CCH": (40502, 40001),
    "CH3CN": (41505, 41001),
    "DCN": (28509, 28004),
    "DCO+": (30510, 30003),
    "DNC": (28508, 28007),
    "H13CN": (28501, 28002),
    "H13CO+": (30504, 30002),
    "H2-13CO": (31503, 31002),
    "H2CCO": (42501, 42002),
    "H2CO": (30501, 30004),
    "H2CS": (46509, 46003),
    "H2O": (0, 18003),
    "H2S": (34502, 34002),
    "HC15N": (28506, 28003),
    "HC5N": (75503, 75001),
    "HC7N": (99501, 99002),
    "HCN": (27501, 27001),
    "HCOOH": (46506, 46005),
    "HCS+": (45506, 45005),
    "HDCO": (31501, 31003),
    "HDO": (0, 19002),
    "HN13C": (28515, 28005),
    "HNC": (27502, 27002),
    "HNCO": (43511, 43002),
    "l-C3H2": (38501, 0),
    "N2D+": (30509, 30009),
    "N2H+": (29506, 29005),
    "NH2CHO": (45512, 45003),
    "NH3": (17506, 17002),
    "OC34S": (62505, 62001),
    "PH3": (34501, 34003),
    "PN": (45511, 45013),
    "SiS": (60506, 60002),
    "SO": (48501, 48001),
    "SO2": (64502, 64002),
}

# Further entries of CDMS for the same species: CO with its vibrational states.
MORE_CDMS_TAGS = {"CO": 28512}


def cdms_entries():
    for line in (ASTROQUERY / "linelists/cdms/data/catdir.cat").read_text().splitlines():
        fields = [field.strip() for field in line.split("|")]
        if len(fields) == 3 + len(CDMS_TEMPERATURES) and fields[0].isdigit():
            yield int(fields[0]), fields[1], dict(zip(CDMS_TEMPERATURES, fields[3:]))


def jpl_entries():
    for line in (ASTROQUERY / "jplspec/data/catdir.cat").read_text().splitlines():
        numbers = re.findall(r"\d+\.\d{4}", line[20:])
        if len(numbers) == len(JPL_TEMPERATURES):
            yield int(line[:6]), line[7:20].strip(), dict(zip(JPL_TEMPERATURES, numbers))


def show(species, directory, entries, tag):
    for found, name, values in entries:
        if found == tag:
            table = ", ".join(f"{t}: {q}" for t, q in values.items() if q != "---")
            print(f"- {{species: {species}, directory: {directory}, tag: {tag}, entry: '{name}', log10_q: {{{table}}}}}")
            return
    if tag != 0:
        print(f"# {species}: no entry {tag} in {directory}")


def main():
    print("# log10 Q by temperature [K], four digits as printed. Made by extract_partition_directories.py.")
    for species, (cdms, jpl) in TAGS.items():
        show(species, "CDMS", cdms_entries(), cdms)
        show(species, "JPL", jpl_entries(), jpl)
    for species, tag in MORE_CDMS_TAGS.items():
        show(species, "CDMS", cdms_entries(), tag)


if __name__ == "__main__":
    main()
