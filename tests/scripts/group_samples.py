"""Writes the frozen samples of tests/data/groups/.

    python tests/scripts/group_samples.py agreements.csv groups_joback.csv

`agreements.csv` is written by the example `breakdown_agreement` into its OUT
folder; `groups_joback.csv` is the reference file that it reads (assignments
made with the MIT-licensed package `thermo` and RDKit). Needs RDKit.

agreed_breakdowns.csv: of each set, the first two rows (in the order of a hash
of the SMILES) that hold each group, then more in that order up to 100.
diverse_molecules.csv: the hard cases listed below, then rows of the reference
file in the order of the hash, skipping those whose set of Joback groups has
been seen, up to 400; each with one random spelling by RDKit.
"""

import csv
import hashlib
import sys

from rdkit import Chem, rdBase

HARD = """
C[N+](=O)[O-] CC(C)[N+](=O)[O-] O=[N+]([O-])c1ccccc1 CON=O CO[N+](=O)[O-] CN=[N+]=[N-] C[N+]#[C-] CC#[N+][O-]
CS(C)=O CS(C)(=O)=O O=S1(=O)CCCC1 CC1CC(C)S(=O)(=O)C1 COS(=O)(=O)OC CCOP(=O)(OCC)OCC CP(C)C COB(OC)OC
CC(=O)OC(C)=O O=C1CCC(=O)O1 COC(=O)OC O=C1OCCO1 CC1COC(=O)O1 CC(=O)Cl CC(=O)SC NC(N)=O CNC(=O)N(C)C COC(=O)NC
C1CO1 CC1CO1 CC1OC1C C1CCOC1 CC1CCCO1 CC1CCC(C)O1 C1COCO1 CC1OCCO1 CC1(C)OCCO1 C1COCOC1 C1OCOCO1 C1COCOCO1 C1COCCOCCOCCO1
CC1OC(C)OC(C)O1 C1COC1 c1ccoc1 c1ccc2occc2c1 c1ccc2c(c1)OCO2 c1ccc2c(c1)CCCO2 C1=CCCCO1
Cn1cccc1 c1cc[nH]c1 c1c[nH]cn1 c1ccc2[nH]ccc2c1 c1ccncc1 c1ccnnc1 c1cncnc1 c1cnccn1 c1ccc2ncccc2c1 c1ccc2cnccc2c1 c1ccc2nc3ccccc3cc2c1
[O-][n+]1ccccc1 Oc1ccccn1 O=c1cccc[nH]1 Cn1ccccc1=O O=c1cccco1 O=c1ccc2ccccc2o1 O=c1oc2ccccc2c(O)c1 O=c1ccocc1
c1cscn1 c1ccsc1 c1ccc2sccc2c1 c1csc(-c2cccs2)c1 C1CSSC1 CSSC CSSSC CSC C1CCSC1 c1ccc2ssc2c1
CN1CCCC1=O CCN1CCCC1=O CC(C)(C)N1CCCC1=O O=C1CCCCCN1 CN(C)C=O CCN(CC)C=O CNC=O NC=O CN(C)C(=O)N(C)C CN(C)C(=O)N1CC1 O=CN1CCOCC1
C1COCCN1 CN1CCOCC1 C1CCNCC1 CCN1CCCCC1 C1CN2CCC1CC2 CN1CCCCC1 CC(C)(C)N NC1CCCCC1 NN CNN CNO CC=NO
O CO OC=O CC(=O)O OO OC(=O)C(=O)O OCCO OCC(O)CO OCCOCCO OCCOCC(O)CO CCOCCO CCOC(C)CO COCC(C)O OCCOc1ccccc1
C=CC#N CC(C)=CC#N N#CC#N N#Cc1ccccc1 CC(C)C#N C#N CC#N N=C=O CN=C=O C=C=C C=C=O O=C=O S=C=S O=C=S C#C CC#C CC#CC C1CCCC#CCC1
C CC C=C CC=CC ClC=C(Cl)Cl ClC(Cl)=C(Cl)Cl C=CCl CCl ClCCl ClC(Cl)Cl ClC(Cl)(Cl)Cl CBr BrC(Br)Br ICI FC(F)F FC(F)(F)F FC(F)(F)Cl FC(Cl)(Cl)Cl
FC(F)(F)C1(F)C(F)(F)C(F)(F)C(F)(F)C(F)(F)C1(F)F FC(F)=C(F)F Fc1c(F)c(F)c(F)c(F)c1F CC(F)F FC(F)(F)CO
C[Si](C)(C)C C[Si](C)(C)O[Si](C)(C)C C[SiH](C)O[Si](C)(C)O[Si](C)(C)C CO[Si](C)(OC)OC C[Si](C)(C)Cl C[Si]1(C)OCCO1 C[Si]1(C)O[Si](C)(C)O[Si](C)(C)O[Si](C)(C)O1
C12C3C4C1C5C2C3C45 C1C2CC3CC1CC(C2)C3 C1CC2CCC1C2 CC1(C)C2CCC1(C)C(=O)C2 c1cc2ccc3cccc4ccc(c1)c2c34 c1ccc2cccc2cc1
O=C1C=CC(=O)C=C1 O=c1cccccc1 C1=CC=CC=CC=C1 CC1=CCCCC1 C=C1CCCCC1 CC(C)c1ccc(C)cc1 c1ccc2c(c1)CCCC2 c1ccc(Oc2ccccc2)cc1 c1ccc(-c2ccccc2)cc1
CC(=O)OCC(OC(C)=O)COC(C)=O CCOC(=O)C(C)O CCOC(=O)CC(=O)OCC COC(=O)c1ccccc1C(=O)OC COC(=O)Cc1ccccc1 CCOCc1ccccc1 CC(C)OCc1ccccc1
"""


def order(smiles):
    return hashlib.sha256(smiles.encode()).hexdigest()


def numbers(groups):
    return [int(entry.split(":")[0]) for entry in groups.split(";")]


def agreed(path):
    by_set = {}
    for row in csv.DictReader(open(path)):
        by_set.setdefault(row["set"], []).append(row)
    for rows in by_set.values():
        rows.sort(key=lambda row: order(row["smiles"]))
        held, chosen = {}, []
        for row in rows:
            if any(held.get(n, 0) < 2 for n in numbers(row["groups"])):
                chosen.append(row)
                for n in numbers(row["groups"]):
                    held[n] = held.get(n, 0) + 1
        for row in rows:
            if len(chosen) >= 100:
                break
            if row not in chosen:
                chosen.append(row)
        yield from sorted(chosen, key=lambda row: (len(row["smiles"]), row["smiles"]))


def diverse(path):
    chosen, seen = list(dict.fromkeys(HARD.split())), set()
    rows = sorted(csv.DictReader(open(path)), key=lambda row: order(row["smiles"]))
    for row in rows:
        kind = frozenset(numbers(row["joback_groups"]))
        if len(chosen) < 400 and kind not in seen and row["smiles"] not in chosen:
            seen.add(kind)
            chosen.append(row["smiles"])
    return chosen


def write(name, head, rows):
    with open(f"tests/data/groups/{name}", "w") as file:
        writer = csv.writer(file, lineterminator="\n")
        writer.writerow(head)
        writer.writerows(rows)


write(
    "agreed_breakdowns.csv",
    ["set", "name", "smiles", "groups"],
    ([row["set"], row["name"], row["smiles"], row["groups"]] for row in agreed(sys.argv[1])),
)
rdBase.SeedRandomNumberGenerator(20261201)
write(
    "diverse_molecules.csv",
    ["smiles", "respelled"],
    (
        [smiles, Chem.MolToSmiles(Chem.MolFromSmiles(smiles), doRandom=True)]
        for smiles in diverse(sys.argv[2])
    ),
)
