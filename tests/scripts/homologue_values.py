"""Freezes published boiling and critical temperatures of homologous series.

    python3 homologue_values.py REFERENCE_FOLDER > tests/data/pure/homologues.csv

Values come by way of the data files of the Python package chemicals (MIT); the column
`source` names where they were printed. `in_reference` says whether the project's reference
folder, on which the estimates are fitted, has a value of that property.
"""

import csv
import sys
from pathlib import Path

import chemicals
from handbook_values import CRC, IUPAC, constitution, known
from rdkit import Chem

YAWS = "Yaws, Thermophysical Properties of Chemicals and Hydrocarbons, 2nd ed., 2014"

# name, what follows the chain, carbons outside the chain
SERIES = [
    ("n-alkanes", "", 0),
    ("1-alkanols", "O", 0),
    ("n-alkylbenzenes", "c1ccccc1", 6),
    ("methyl n-alkanoates", "C(=O)OC", 2),
    ("2-alkanones", "C(=O)C", 2),
]
MOST_CARBONS = 30


def first(function, cas, sources):
    for method, source in sources:
        value = function(cas, method=method)
        if value is not None:
            return value, source
    return None, None


def main():
    reference = known(Path(sys.argv[1]))
    print("# title: Published boiling and critical temperatures of homologous series, K")
    print("# transcribed: 2026-12-01, by way of the data files of the Python package chemicals", chemicals.__version__, "(MIT)")
    print("# made by: tests/scripts/homologue_values.py")
    out = csv.writer(sys.stdout, lineterminator="\n")
    out.writerow(["series", "carbons", "smiles", "property", "value_k", "in_reference", "source"])
    for series, after, others in SERIES:
        for chain in range(1, MOST_CARBONS - others + 1):
            smiles = "C" * chain + after
            key = Chem.MolToInchiKey(Chem.MolFromSmiles(smiles))
            try:
                cas = chemicals.CAS_from_any("InChIKey=" + key)
            except ValueError:
                continue
            for name, function, sources in (
                ("boiling_point", chemicals.Tb, [("CRC_ORG", CRC), ("YAWS", YAWS)]),
                ("critical_temperature", chemicals.Tc, [("IUPAC", IUPAC), ("CRC", CRC)]),
            ):
                value, source = first(function, cas, sources)
                if value is None:
                    continue
                inside = "yes" if constitution(smiles) in reference[name] else "no"
                out.writerow([series, chain + others, smiles, name, f"{value:.6g}", inside, source])


if __name__ == "__main__":
    main()
