"""Writes isotope_masses_2003.csv from the Blue Obelisk Data Repository (Debian package bodr, MIT licence),
whose masses are those of the Atomic Mass Evaluation 2003 (Audi, Wapstra & Thibault 2003, Nucl. Phys. A 729, 337).

    python3 isotope_masses_2003.py /usr/share/bodr/isotopes.xml > isotope_masses_2003.csv
"""
import sys
import xml.etree.ElementTree as tree

WANTED = """1H 2H 4He 12C 13C 14N 15N 16O 17O 18O 19F 23Na 24Mg 25Mg 26Mg 27Al 28Si 29Si 30Si 31P 32S 33S 34S 36S
35Cl 37Cl 36Ar 40Ar 39K 41K 79Br 81Br 127I""".split()

masses = {}
for isotope in tree.parse(sys.argv[1]).getroot().iter("{http://www.xml-cml.org/schema}isotope"):
    for scalar in isotope.iter("{http://www.xml-cml.org/schema}scalar"):
        if scalar.get("dictRef") == "bo:exactMass":
            masses[isotope.get("number") + isotope.get("elementType")] = (scalar.text, scalar.get("errorValue"))

print("# Atomic Mass Evaluation 2003, as in Debian's bodr; made by isotope_masses_2003.py")
print("isotope,mass [u],standard error [u]")
for name in WANTED:
    print(",".join([name, *masses[name]]))
