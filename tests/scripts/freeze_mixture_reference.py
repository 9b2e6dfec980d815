"""Freezes a part of the model reference values into tests/data/mixture.

Run from the root of the repository:
    python tests/scripts/freeze_mixture_reference.py FOLDER
FOLDER holds model_reference_*.csv and published_examples.csv; the values there were computed with
the Python package thermo and with an independent implementation written from the papers.
"""

import csv
import pathlib
import sys

source = pathlib.Path(sys.argv[1])
target = pathlib.Path("tests/data/mixture")
target.mkdir(parents=True, exist_ok=True)

KEEP = ["id", "n"] + [f"{c}_{i}" for i in range(1, 5) for c in ("name", "groups", "x")] + ["T_K"]
KEEP += [f"{c}_{i}" for c in ("lngamma", "lngamma_comb", "lngamma_res") for i in range(1, 5)]
KEEP += ["GE_J_per_mol", "HE_J_per_mol"]
HEAD = [
    "# source: Python package thermo (MIT licence), parameters as circulated; equal within 2e-14 in ln gamma",
    "# source: to an independent implementation of the published equations",
]


def read(name):
    with open(source / name, encoding="utf-8", newline="") as file:
        return list(csv.DictReader(file))


def write(name, head, columns, rows):
    with open(target / name, "w", encoding="utf-8", newline="") as file:
        file.write("".join(line + "\n" for line in head))
        out = csv.DictWriter(file, columns, extrasaction="ignore", lineterminator="\n")
        out.writeheader()
        out.writerows(rows)


for model, name in (
    ("unifac_original", "unifac"),
    ("dortmund_2016", "unifac-dortmund"),
    ("dortmund_2006", "unifac-dortmund-2006"),
):
    rows = read(f"model_reference_{model}.csv")
    write(f"{name}.csv", HEAD, KEEP, rows[::4])

missing = [r for r in read("model_reference_missing_pairs.csv") if r["model"] in ("unifac_original", "dortmund_2016", "dortmund_2006")]
columns = ["id", "model", "n"] + [f"{c}_{i}" for i in range(1, 5) for c in ("name", "groups", "x")]
write("missing_pairs.csv", ["# source: main-group pairs absent from the circulating tables of thermo (MIT licence)"],
      columns + ["T_K", "missing_main_group_pairs"], missing[::3])

published = read("published_examples.csv")
last = ""
for row in published:
    last = row["source"] = last + row["source"][4:] if row["source"].startswith("same") else row["source"]
    last = last.split(", excess")[0]
columns = ["id", "example", "model", "quantity", "n"]
columns += [f"{c}_{i}" for i in range(1, 5) for c in ("name", "groups", "x", "printed")]
columns += ["T_K", "tolerance", "source", "provenance", "note"]
write("published_examples.csv", [], columns, published)
