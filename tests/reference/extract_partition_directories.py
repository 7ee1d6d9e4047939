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

# Species of ours: tag in CDMS, tag in JPL.
TAGS = {
    "CO": (28503, 28001),
    "13CO": (29501, 29001),
    "C18O": (30502, 30001),
    "CS": (44501, 44001),
    "SiO": (44505, 44002),
    "HC3N": (51501, 51001),
    "OCS": (60503, 60001),
    "HCO+": (29507, 29002),
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
