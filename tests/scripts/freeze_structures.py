"""Freezes tests/data/assemble/structures.csv: structures that the assembly search draws, as RDKit reads them.

    python tests/scripts/freeze_structures.py GROUPSMITH tests/data/assemble/structures.csv

Every structure of a few series is drawn by `groupsmith assemble`, read by RDKit (which checks valence and aromaticity)
and written down with RDKit's canonical SMILES and formula; two structures with one SMILES end the script.
"""

import csv
import subprocess
import sys
import tempfile
from pathlib import Path

import rdkit
from rdkit import Chem
from rdkit.Chem.rdMolDescriptors import CalcMolFormula

PLAIN = ["CH3", "CH2", "CH", "C"]
SERIES = [
    ("octanes", [], 8),
    ("hexanols", ["CH2OH", "CHOH", "COH"], 7),
    ("ethers", ["CH3O", "CH2O", "CHO-ether"], 7),
    ("ketones", ["CH3CO", "CH2CO"], 7),
    ("esters", ["HCOO", "CH3COO", "CH2COO", "COO"], 7),
    ("amines", ["CH2NH2", "CHNH2", "CH3NH", "CH2NH", "CHNH", "CH3N", "CH2N"], 6),
    ("alkylbenzenes", ["ACH", "AC", "ACCH3", "ACCH2", "ACCH"], 10),
    ("saturated rings", ["cCH2", "cCH", "cC", "cCHOH", "cCH2OCH2"], 8),
    ("nitriles and amides", ["CH2CN", "CONMe2", "CONMeCH2", "CON(CH2)2"], 8),
]


def structures(program, pieces, atoms):
    with tempfile.TemporaryDirectory() as folder:
        brief = Path(folder) / "brief.toml"
        names = ", ".join(f'"{name}"' for name in PLAIN + pieces)
        brief.write_text(
            f"""[assembly]
pieces = [{names}]
count = {{ least = 1, most = 14 }}
heavy_atoms = {{ at_least = {atoms}, at_most = {atoms} }}
molar_mass = {{ at_most = "400 g/mol" }}
structures = 100000
limits = {{ functional_groups = 1, ether = 1, OH = 1, branches = 12, quaternary_carbons = 6 }}
[[target]]
figure = "molar_mass"
at_most = "400 g/mol"
must = true
[keep]
best = 100000
"""
        )
        out = Path(folder) / "out"
        subprocess.run([program, "assemble", str(brief), "--out", str(out), "--quiet"], check=True, stdout=subprocess.DEVNULL)
        with open(out / "ranked.csv", newline="") as file:
            return [row["smiles"] for row in csv.DictReader(file)]


def main():
    program, target = sys.argv[1:]
    rows = []
    for series, pieces, atoms in SERIES:
        seen = set()
        for smiles in sorted(structures(program, pieces, atoms)):
            molecule = Chem.MolFromSmiles(smiles)
            if molecule is None:
                sys.exit(f"RDKit does not take {smiles}")
            canonical = Chem.MolToSmiles(molecule)
            if canonical in seen:
                sys.exit(f"{canonical} comes twice in {series}")
            seen.add(canonical)
            rows.append([series, " ".join(PLAIN + pieces), atoms, smiles, canonical, CalcMolFormula(molecule)])
        print(series, len(seen))
    with open(target, "w", newline="") as file:
        file.write(f"# frozen by tests/scripts/freeze_structures.py with RDKit {rdkit.__version__}; every structure was read by it, none twice in a series\n")
        writer = csv.writer(file, lineterminator="\n")
        writer.writerow(["series", "pieces", "heavy_atoms", "smiles", "rdkit_smiles", "formula"])
        writer.writerows(rows)


main()
