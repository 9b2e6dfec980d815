"""Writes groups/joback/contributions.csv.

The numbers come from the MIT-licensed package `thermo` (version printed into
the head of the file); formulas, compositions and ring flags are written here
from the paper's table. Run from the root of the repository:

    python tests/scripts/joback_contributions.py > groups/joback/contributions.csv
"""

import csv
import sys
from importlib.metadata import version

from thermo.group_contribution.joback import JOBACK_GROUPS

# (formula, composition of the group, 1 where the group is a ring increment)
GROUPS = [
    ("-CH3", "CH3", 0), ("-CH2-", "CH2", 0), (">CH-", "CH", 0), (">C<", "C", 0),
    ("=CH2", "CH2", 0), ("=CH-", "CH", 0), ("=C<", "C", 0), ("=C=", "C", 0),
    ("≡CH", "CH", 0), ("≡C-", "C", 0),
    ("-CH2- (ring)", "CH2", 1), (">CH- (ring)", "CH", 1), (">C< (ring)", "C", 1),
    ("=CH- (ring)", "CH", 1), ("=C< (ring)", "C", 1),
    ("-F", "F", 0), ("-Cl", "Cl", 0), ("-Br", "Br", 0), ("-I", "I", 0),
    ("-OH (alcohol)", "HO", 0), ("-OH (phenol)", "HO", 0),
    ("-O- (nonring)", "O", 0), ("-O- (ring)", "O", 1),
    (">C=O (nonring)", "CO", 0), (">C=O (ring)", "CO", 1),
    ("O=CH- (aldehyde)", "CHO", 0), ("-COOH (acid)", "CHO2", 0),
    ("-COO- (ester)", "CO2", 0), ("=O (except as above)", "O", 0),
    ("-NH2", "H2N", 0), (">NH (nonring)", "HN", 0), (">NH (ring)", "HN", 1),
    (">N- (nonring)", "N", 0), ("-N= (nonring)", "N", 0), ("-N= (ring)", "N", 1),
    ("=NH", "HN", 0), ("-CN", "CN", 0), ("-NO2", "NO2", 0),
    ("-SH", "HS", 0), ("-S- (nonring)", "S", 0), ("-S- (ring)", "S", 1),
]

# (column, unit, attribute, printed format)
COLUMNS = [
    ("tc", "-", "Tc", "%.4f"), ("pc", "bar^-0.5", "Pc", "%.4f"),
    ("vc", "cm3/mol", "Vc", "%.0f"), ("tb", "K", "Tb", "%.2f"), ("tm", "K", "Tm", "%.2f"),
    ("hform", "kJ/mol", "Hform", "%.2f"), ("gform", "kJ/mol", "Gform", "%.2f"),
    ("cp_a", "J/(mol K)", "Cpa", "%.2E"), ("cp_b", "J/(mol K2)", "Cpb", "%.2E"),
    ("cp_c", "J/(mol K3)", "Cpc", "%.2E"), ("cp_d", "J/(mol K4)", "Cpd", "%.2E"),
    ("hfus", "kJ/mol", "Hfus", "%.3f"), ("hvap", "kJ/mol", "Hvap", "%.3f"),
    ("eta_a", "K", "mua", "%.2f"), ("eta_b", "-", "mub", "%.3f"),
]

out = sys.stdout
out.write(
    "# title: Group contributions of Joback and Reid to eleven pure-component properties\n"
    "# source: Joback, K. G.; Reid, R. C. Estimation of Pure-Component Properties from Group-Contributions. "
    "Chem. Eng. Commun. 57 (1987) 233-243, doi:10.1080/00986448708960487, table of group contributions\n"
    "# transcribed: 2026-12-01, numbers taken from the MIT-licensed Python package thermo %s "
    "by tests/scripts/joback_contributions.py; formulas and compositions written from the paper's table\n"
    "# checked: the worked examples for p-dichlorobenzene and acetone come out to their printed digits; "
    "cells spot-checked from memory of the printed table, not against the paper itself; "
    "compositions times counts give the molecular formula of 23232 of 23234 molecules of a machine-made assignment "
    "(the two are formic acid and hydrogen cyanide, whose H on the group is in no group)\n"
    "# note: a blank cell is blank in the table: no contribution was published for that group and property. "
    "The 0.0000 of -CH2- for pc is printed; the 0.000 of the ring carbonyl for hfus is kept as circulated, "
    "whether the print has a zero or a dash there could not be checked\n" % version("thermo")
)
writer = csv.writer(out, lineterminator="\n")
writer.writerow(["number", "formula", "composition", "ring"] + [c[0] for c in COLUMNS])
writer.writerow(["-", "-", "-", "-"] + [c[1] for c in COLUMNS])
by_number = {group.group_id: group for group in JOBACK_GROUPS.values()}
for number, (formula, composition, ring) in enumerate(GROUPS, start=1):
    cells = []
    for _, _, attribute, form in COLUMNS:
        value = getattr(by_number[number], attribute)
        if value is None:
            cells.append("")
            continue
        text = form % value
        assert abs(float(text) - value) <= 1e-12 * max(1.0, abs(value)), (number, attribute, value)
        cells.append(text)
    writer.writerow([number, formula, composition, ring] + cells)
