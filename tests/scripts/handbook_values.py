"""Freezes handbook values of a hundred well-known substances.

    python3 handbook_values.py REFERENCE_FOLDER > tests/data/pure/handbook_100.csv

Values come by way of the data files of the Python package chemicals (MIT); the column
`source` names where they were printed. `in_reference` says whether the constitution has a
value of that property in the project's reference folder, on which the estimates are
fitted: `no` makes it a value that no fit has seen. The list of names was drawn up
beforehand, without a look at errors.
"""

import csv
import sys
from pathlib import Path

import chemicals
from rdkit import Chem
from thermo import SurfaceTension, VaporPressure, ViscosityLiquid, VolumeLiquid

ROOM_K = 298.15

# one name a line, so that names may hold blanks and commas
NAMES = """
water
methanol
ethanol
1-propanol
2-propanol
1-butanol
2-butanol
isobutanol
tert-butanol
1-pentanol
1-octanol
cyclohexanol
benzyl alcohol
phenol
ethylene glycol
1,2-propanediol
glycerol
acetone
2-butanone
methyl isobutyl ketone
cyclohexanone
acetophenone
acetaldehyde
benzaldehyde
furfural
formic acid
acetic acid
benzoic acid
acetic anhydride
methyl formate
ethyl acetate
propyl acetate
butyl acetate
vinyl acetate
methyl methacrylate
dimethyl phthalate
dimethyl carbonate
gamma-butyrolactone
diethyl ether
diisopropyl ether
methyl tert-butyl ether
tetrahydrofuran
1,4-dioxane
anisole
2-methoxyethanol
2-butoxyethanol
furan
propylene oxide
pentane
hexane
heptane
octane
decane
dodecane
hexadecane
isopentane
2,2,4-trimethylpentane
cyclopentane
cyclohexane
methylcyclohexane
1-hexene
isoprene
benzene
toluene
ethylbenzene
o-xylene
p-xylene
cumene
styrene
tetralin
naphthalene
biphenyl
dichloromethane
chloroform
carbon tetrachloride
1,2-dichloroethane
trichloroethylene
tetrachloroethylene
chlorobenzene
1,2-dichlorobenzene
bromobenzene
acetonitrile
acrylonitrile
nitromethane
nitrobenzene
aniline
pyridine
triethylamine
butylamine
piperidine
morpholine
ethylenediamine
ethanolamine
N,N-dimethylformamide
N-methylpyrrolidone
formamide
dimethyl sulfoxide
sulfolane
carbon disulfide
thiophene
"""


CRC = "CRC Handbook of Chemistry and Physics, 95th ed., 2014"
PERRY = "Perry's Chemical Engineers' Handbook, 8th ed., 2007"
IUPAC = "Vapor-Liquid Critical Properties of Elements and Compounds, parts 1-12, J. Chem. Eng. Data 1995-2015"


def at_room(kind, method, cas):
    """A correlation at 298.15 K; `None` outside its range."""
    correlation = kind(CASRN=cas)
    if method not in correlation.all_methods:
        return None
    low, high = correlation.T_limits[method]
    if not low <= ROOM_K <= high:
        return None
    return correlation.calculate(ROOM_K, method)


def critical(function, cas):
    value = function(cas, method="IUPAC")
    return (value, IUPAC) if value is not None else (function(cas, method="CRC"), CRC)


def values(cas):
    """(property, temperature, SI value or None, source)."""
    if cas == "7732-18-5":
        # the organic tables leave water out
        yield "boiling_point", "", 373.12, CRC + ", from memory"
        yield "melting_point", "", 273.15, CRC + ", from memory"
    else:
        yield "boiling_point", "", chemicals.Tb(cas, method="CRC_ORG"), CRC
        yield "melting_point", "", chemicals.Tm(cas, method="CRC_ORG"), CRC
    for name, function in (
        ("critical_temperature", chemicals.Tc),
        ("critical_pressure", chemicals.Pc),
        ("critical_volume", chemicals.Vc),
    ):
        yield name, "", *critical(function, cas)
    volume = at_room(VolumeLiquid, "DIPPR_PERRY_8E", cas)
    density = None if volume is None else 1e-3 * chemicals.MW(cas) / volume
    yield "liquid_density", ROOM_K, density, PERRY + ", Table 2-32"
    yield "vapor_pressure", ROOM_K, at_room(VaporPressure, "DIPPR_PERRY_8E", cas), PERRY + ", Table 2-8"
    table = chemicals.phase_change.Hvap_data_CRC
    for name, column in (("enthalpy_of_vaporization", "HvapTb"), ("enthalpy_of_vaporization_298", "Hvap298")):
        value = table.at[cas, column] if cas in table.index else None
        yield name, "" if name.endswith("vaporization") else ROOM_K, value, CRC
    yield "liquid_viscosity", ROOM_K, at_room(ViscosityLiquid, "DIPPR_PERRY_8E", cas), PERRY + ", Table 2-313"
    for method, source in (
        ("REFPROP", "Mulero and Cachadina, J. Phys. Chem. Ref. Data 41 (2012) 043105"),
        ("JASPER", "Jasper, J. Phys. Chem. Ref. Data 1 (1972) 841, as in Lange's Handbook of Chemistry, 16th ed."),
        ("SOMAYAJULU2", "Somayajulu, Int. J. Thermophys. 9 (1988) 559, revised by Mulero et al. 2013"),
    ):
        tension = at_room(SurfaceTension, method, cas)
        if tension is not None:
            yield "surface_tension", ROOM_K, tension, source
            break
    yield (
        "flash_point",
        "",
        chemicals.T_flash(cas, method="Serat DIPPR (2017)"),
        "Serat et al., Fluid Phase Equilib. 449 (2017) 52 (DIPPR)",
    )
    yield "log_p_octanol_water", "", chemicals.logP(cas, method="CRC"), CRC
    if "ATCT_G" in chemicals.Hfg_methods(cas):
        yield (
            "ideal_gas_enthalpy_of_formation",
            ROOM_K,
            chemicals.Hfg(cas, method="ATCT_G"),
            "Active Thermochemical Tables 1.112",
        )
    else:
        yield "ideal_gas_enthalpy_of_formation", ROOM_K, chemicals.Hfg(cas, method="CRC"), CRC
    for name, function in (
        ("hansen_dispersion", chemicals.hansen_delta_d),
        ("hansen_polar", chemicals.hansen_delta_p),
        ("hansen_hydrogen_bonding", chemicals.hansen_delta_h),
    ):
        yield name, "", function(cas, method="MANUEL_RUBEN_2022"), "Rios and Murcia Belmonte, SN Applied Sciences 4 (2022) 185"


FILES = {
    "boiling_point": ("boiling_point.csv", "Tb_K", None),
    "melting_point": ("melting_point.csv", "Tm_K", None),
    "critical_temperature": ("critical.csv", "Tc_K", None),
    "critical_pressure": ("critical.csv", "Pc_Pa", None),
    "critical_volume": ("critical.csv", "Vc_m3_mol", None),
    "liquid_density": ("liquid_density.csv", "rho_kg_m3", None),
    "vapor_pressure": ("vapor_pressure.csv", "Psat_Pa", None),
    "enthalpy_of_vaporization": ("enthalpy_vaporization.csv", "Hvap_J_mol", ("basis", "Tb")),
    "enthalpy_of_vaporization_298": ("enthalpy_vaporization.csv", "Hvap_J_mol", ("basis", "298.15")),
    "liquid_viscosity": ("viscosity_liquid.csv", "mu_Pa_s", ("T_K", "298.15")),
    "surface_tension": ("surface_tension.csv", "sigma_N_m", None),
    "flash_point": ("flash_point.csv", "T_flash_K", None),
    "log_p_octanol_water": ("logp.csv", "log10_Kow", None),
    "ideal_gas_enthalpy_of_formation": ("ideal_gas_formation.csv", "Hf298_J_mol", None),
    "hansen_dispersion": ("hansen.csv", "delta_d_Pa0.5", None),
    "hansen_polar": ("hansen.csv", "delta_p_Pa0.5", None),
    "hansen_hydrogen_bonding": ("hansen.csv", "delta_h_Pa0.5", None),
}


def constitution(smiles):
    return Chem.MolToSmiles(Chem.MolFromSmiles(smiles), isomericSmiles=False)


def known(folder):
    """Constitutions with a value in the reference folder, by property."""
    found = {}
    for name, (file, column, only) in FILES.items():
        with open(folder / file, newline="", encoding="utf-8") as table:
            found[name] = {
                constitution(row["smiles"])
                for row in csv.DictReader(table)
                if row[column] and (only is None or row[only[0]].startswith(only[1]))
            }
    return found


def main():
    reference = known(Path(sys.argv[1]))
    names = NAMES.strip().split("\n")
    assert len(names) == len(set(names)) == 100, len(names)
    print("# title: Handbook values of a hundred well-known substances, SI units")
    print("# transcribed: 2026-12-01, by way of the data files of the Python package chemicals", chemicals.__version__, "(MIT)")
    print("# made by: tests/scripts/handbook_values.py")
    out = csv.writer(sys.stdout, lineterminator="\n")
    out.writerow(["name", "cas", "smiles", "property", "temperature_k", "value_si", "in_reference", "source"])
    for name in names:
        record = chemicals.search_chemical(name)
        smiles = Chem.MolToSmiles(Chem.MolFromSmiles(record.smiles), isomericSmiles=False)
        for quantity, temperature, value, source in values(record.CASs):
            if value is None or value != value:
                continue
            inside = "yes" if smiles in reference[quantity] else "no"
            out.writerow([name, record.CASs, smiles, quantity, temperature, f"{value:.6g}", inside, source])


if __name__ == "__main__":
    main()
