"""Freezes a second copy of the measured values of built-in substances.

The project's reference folder on pure substances was compiled from the same
handbooks by another hand than `groups/substances/`; its rows for substances
that are built in are kept here so that a test can hold one copy against the
other without the folder.

    python3 freeze_reference_copy.py REFERENCE_FOLDER REPOSITORY

writes tests/data/data/second_copy.csv.gz.
"""

import csv
import gzip
import io
import sys
from pathlib import Path

FILES = [
    # file, property, value column (SI), temperature (its column, or the number)
    ("boiling_point.csv", "boiling_point", "Tb_K", None),
    ("melting_point.csv", "melting_point", "Tm_K", None),
    ("liquid_density.csv", "liquid_density", "rho_kg_m3", 298.15),
    ("density_T.csv", "liquid_density", "rho_kg_m3", "T_K"),
    ("vapor_pressure.csv", "vapor_pressure", "Psat_Pa", "T_K"),
    ("flash_point.csv", "flash_point", "T_flash_K", None),
    ("enthalpy_vaporization.csv", "enthalpy_of_vaporization", "Hvap_J_mol", "T_K"),
    ("hansen.csv", "hansen_dispersion", "delta_d_Pa0.5", None),
    ("hansen.csv", "hansen_polar", "delta_p_Pa0.5", None),
    ("hansen.csv", "hansen_hydrogen_bonding", "delta_h_Pa0.5", None),
]


def built_in_cas(repository):
    with open(repository / "groups/substances/substances.csv", newline="") as file:
        lines = [line for line in file if not line.startswith("#")]
    rows = csv.DictReader(lines)
    return {row["cas"] for row in rows if row["cas"] not in ("", "-")}


def main():
    reference, repository = Path(sys.argv[1]), Path(sys.argv[2])
    known = built_in_cas(repository)
    out = io.StringIO()
    writer = csv.writer(out, lineterminator="\n")
    writer.writerow(["cas", "property", "temperature_k", "value", "source"])
    for name, prop, column, temperature in FILES:
        with open(reference / name, newline="") as file:
            for row in csv.DictReader(file):
                if row["cas"] not in known:
                    continue
                t = "" if temperature is None else row.get(temperature, temperature)
                if prop == "enthalpy_of_vaporization" and row["basis"] == "Tb":
                    t = "Tb"
                if row.get("T_note_K") == "293-298":
                    t = "293-298"
                writer.writerow([row["cas"], prop, t, row[column], row["source"]])
    target = repository / "tests/data/data/second_copy.csv.gz"
    with open(target, "wb") as file, gzip.GzipFile(fileobj=file, mode="wb", mtime=0) as packed:
        packed.write(out.getvalue().encode())
    print(target, len(out.getvalue().splitlines()) - 1, "rows")


main()
