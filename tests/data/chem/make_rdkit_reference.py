"""Makes rdkit_reference.csv: molecules in ten random spellings each, with what
RDKit says about them.

Run by hand, never by the tests:  python make_rdkit_reference.py FOLDER
FOLDER holds CSV files with a column `smiles` (public measured data of pure
substances). The choice is deterministic: all hand-added molecules, then those
of the files in the order of the SHA-256 of their canonical SMILES, a quota for
each kind so that rings, heteroaromatics and stereo are well represented.
"""

import csv
import gzip
import hashlib
import pathlib
import random
import sys

from rdkit import Chem, RDLogger, rdBase
from rdkit.Chem import Descriptors, rdMolDescriptors

RDLogger.DisableLog("rdApp.*")
COUNT = 2000
SPELLINGS = 10
HERE = pathlib.Path(__file__).parent


def hand_added():
    lines = (HERE / "hand_added.smi").read_text().splitlines()
    return [line.split()[0] for line in lines if line and not line.startswith("#")]


def usable(mol):
    symbols = {"H", "B", "C", "N", "O", "F", "Si", "P", "S", "Cl", "Br", "I"}
    return (
        mol is not None
        and len(Chem.GetMolFrags(mol)) == 1
        and Chem.GetFormalCharge(mol) == 0
        and all(a.GetSymbol() in symbols for a in mol.GetAtoms())
        and all(a.GetNumRadicalElectrons() == 0 for a in mol.GetAtoms())
    )


def kind(mol):
    text = Chem.MolToSmiles(mol)
    rings = mol.GetRingInfo().NumRings()
    if "@" in text or "/" in text:
        return "stereo"
    if any(a.GetIsAromatic() and a.GetSymbol() != "C" for a in mol.GetAtoms()):
        return "heteroaromatic"
    if rings >= 3:
        return "many rings"
    if rings >= 1:
        return "rings"
    if any(a.GetFormalCharge() for a in mol.GetAtoms()):
        return "charged"
    return "chain"


QUOTA = {
    "stereo": 450,
    "heteroaromatic": 350,
    "many rings": 350,
    "rings": 350,
    "charged": 80,
    "chain": 10_000,
}


def choose(folder):
    chosen, seen, used = [], set(), dict.fromkeys(QUOTA, 0)
    for text in hand_added():
        mol = Chem.MolFromSmiles(text)
        if not usable(mol):
            raise SystemExit(f"hand-added {text} is not usable")
        key = Chem.MolToSmiles(mol)
        if key not in seen:
            seen.add(key)
            chosen.append(key)
    pool = set()
    for path in sorted(pathlib.Path(folder).glob("*.csv")):
        with open(path, newline="") as file:
            for row in csv.DictReader(file):
                pool.add(row["smiles"])
    order = sorted(pool, key=lambda s: hashlib.sha256(s.encode()).hexdigest())
    for text in order:
        mol = Chem.MolFromSmiles(text)
        if not usable(mol):
            continue
        key = Chem.MolToSmiles(mol)
        group = kind(mol)
        if key in seen or used[group] >= QUOTA[group]:
            continue
        seen.add(key)
        used[group] += 1
        chosen.append(key)
        if len(chosen) == COUNT:
            break
    return chosen


def spellings(mol, seed):
    source = random.Random(seed)
    result = []
    for index in range(SPELLINGS):
        kekule = index % 2 == 1
        copy = Chem.Mol(mol)
        if kekule:
            Chem.Kekulize(copy, clearAromaticFlags=True)
        order = list(range(copy.GetNumAtoms()))
        source.shuffle(order)
        copy = Chem.RenumberAtoms(copy, order)
        result.append(Chem.MolToSmiles(copy, canonical=False, doRandom=False))
    return result


def row_of(key):
    mol = Chem.MolFromSmiles(key)
    lines = spellings(mol, key)
    for line in lines:
        if Chem.MolToSmiles(Chem.MolFromSmiles(line)) != key:
            return None
    first = Chem.MolFromSmiles(lines[0])
    # Hydrogens written as atoms (isotopes) are no atoms of the molecule here.
    heavy = [a for a in first.GetAtoms() if a.GetSymbol() != "H"] or [first.GetAtomWithIdx(0)]
    flat = Chem.Mol(mol)
    for atom in flat.GetAtoms():
        atom.SetIsotope(0)
    flat = Chem.RemoveHs(flat)
    constitution = Chem.MolToSmiles(flat, isomericSmiles=False)
    formula = rdMolDescriptors.CalcMolFormula(first)
    return {
        "constitution": hashlib.sha256(constitution.encode()).hexdigest()[:12],
        "formula": formula,
        "mass_g_per_mol": f"{Descriptors.MolWt(first):.3f}",
        "rings": first.GetNumBonds() - first.GetNumAtoms() + 1,
        "ring_atoms": "".join("1" if a.IsInRing() else "0" for a in heavy),
        "aromatic_atoms": "".join("1" if a.GetIsAromatic() else "0" for a in heavy),
        "hydrogens": "".join(
            str(a.GetTotalNumHs(includeNeighbors=True)) for a in heavy
        ),
        "spellings": " ".join(lines),
    }


def main():
    rows, dropped = [], []
    for key in choose(sys.argv[1]):
        row = row_of(key)
        (rows.append(row) if row else dropped.append(key))
    text = [
        f"# RDKit {rdBase.rdkitVersion}; made by make_rdkit_reference.py",
        f"# {len(rows)} molecules in {SPELLINGS} spellings each, every second one Kekule;"
        " properties by atom are those of the first spelling, hydrogens that are written as atoms left out",
        "constitution,formula,mass_g_per_mol,rings,ring_atoms,aromatic_atoms,hydrogens,spellings",
    ]
    text += [",".join(str(value) for value in row.values()) for row in rows]
    data = ("\n".join(text) + "\n").encode()
    with open(HERE / "rdkit_reference.csv.gz", "wb") as file:
        with gzip.GzipFile(fileobj=file, mode="wb", mtime=0, filename="") as packed:
            packed.write(data)
    print(len(rows), "molecules;", len(data), "bytes; RDKit disagrees with itself on", len(dropped))
    for key in dropped:
        print("  ", key)


main()
