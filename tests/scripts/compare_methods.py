"""Compares the fitted estimates with published methods, molecule by molecule.

    python3 compare_methods.py PREDICTIONS_FOLDER RESULTS_FOLDER GROUPSMITH

PREDICTIONS_FOLDER is what `fit_estimates` wrote as its fourth folder: measured values and
predictions of the cross-validation, none of which rests on the part of the data the
molecule is in. GROUPSMITH is the built program; it gives the estimates of Joback and Reid
as built in, and the handbook values of `tests/data/pure/handbook_100.csv` with measured
data off. The published methods are those of the Python packages thermo, chemicals and
RDKit.

Writes into RESULTS_FOLDER

    summary.md       the fits and the nearest published method for each figure
    methods.csv      every figure, method and choice of inputs: coverage and errors, and the errors
                     of the fits on exactly the same values
    classes.csv      the same by family and by size, ten values or more, without the inputs of Joback
                     and Reid
    better.csv       where a published method has the smaller mean or median error on the values that
                     both have: without measured inputs against the structure level, with measured
                     ones against the structure level with T_b measured; classes of ten values or more,
                     a hundredth less counts as the same
    worst.csv        the twenty largest errors of the structure level for each figure, with what
                     may explain them
    handbook.csv     handbook values against the program as built and against the cross-validation
    handbook_summary.csv

Inputs of a relation: `estimated` are the structure level's predictions of T_b, T_c, P_c, V_c and
molar volume, `measured T_b` the same with T_b measured, `joback-reid` those of Joback and Reid,
`measured` measured ones only. The acentric factor is that of Lee and Kesler from the same T_b, T_c
and P_c, and Z_c follows from T_c, P_c and V_c.
"""

import csv
import math
import subprocess
import sys
import tempfile
import warnings
from collections import defaultdict
from pathlib import Path

import chemicals
import numpy as np
from chemicals import critical, interface, phase_change, vapor_pressure, viscosity, volume
from rdkit import Chem, RDLogger
from rdkit.Chem import Crippen
from thermo import Fedors, Joback
from thermo.group_contribution import Wilson_Jasperson

warnings.filterwarnings("ignore")
RDLogger.DisableLog("rdApp.*")

R = 8.314462618
ATM = 101325.0
ROOM_K = 298.15
REPOSITORY = Path(__file__).resolve().parents[2]

# figure: (file of the predictions, unit, error from estimate and value)
ABSOLUTE = lambda estimate, value: estimate - value
PERCENT = lambda estimate, value: 100.0 * (estimate / value - 1.0)
QUANTITIES = {
    "boiling_point": ("K", ABSOLUTE),
    "molar_volume": ("%", PERCENT),
    "critical_temperature": ("%", PERCENT),
    "critical_pressure": ("%", PERCENT),
    "critical_volume": ("%", PERCENT),
    "enthalpy_of_vaporization_298": ("%", PERCENT),
    "enthalpy_of_vaporization": ("%", PERCENT),
    "flash_point": ("K", ABSOLUTE),
    "melting_point": ("K", ABSOLUTE),
    "liquid_viscosity": ("ln", lambda e, v: math.log(e / v)),
    "surface_tension": ("%", PERCENT),
    "hansen_dispersion": ("MPa^0.5", lambda e, v: 1e-3 * (e - v)),
    "hansen_polar": ("MPa^0.5", lambda e, v: 1e-3 * (e - v)),
    "hansen_hydrogen_bonding": ("MPa^0.5", lambda e, v: 1e-3 * (e - v)),
    "log_p_octanol_water": ("-", ABSOLUTE),
    "ideal_gas_enthalpy_of_formation": ("kJ/mol", lambda e, v: 1e-3 * (e - v)),
    "vapor pressure": ("log10", lambda e, v: math.log10(e / v)),
    "density at T": ("%", PERCENT),
}
TITLES = {"molar_volume": "liquid density at 298 K"}
# compared as molar volumes, told as densities
DENSITIES = {"molar_volume", "density at T"}


def read(path):
    with open(path, newline="", encoding="utf-8") as file:
        return list(csv.DictReader(file))


def number(text):
    return float(text) if text else None


def canonical(smiles):
    molecule = Chem.MolFromSmiles(smiles)
    return molecule and Chem.MolToSmiles(molecule, isomericSmiles=False)


def finite(function, *arguments):
    """The positive or negative number a method gives, or None where it gives none."""
    if any(argument is None for argument in arguments):
        return None
    try:
        value = function(*arguments)
    except Exception:  # whatever a method raises, it has no value there
        return None
    if value is None or isinstance(value, complex) or not math.isfinite(value):
        return None
    return float(value)


class State:
    """What the relations start from."""

    def __init__(self, tb=None, tc=None, pc=None, vc=None, vm=None, tm=None, hvap_tb=None, hvap_298=None):
        # a state that contradicts itself is none
        if tb is not None and tc is not None and not 0 < tb < tc:
            tc = None
        self.tb, self.tc, self.pc, self.vc, self.vm, self.tm = tb, tc, pc, vc, vm, tm
        self.hvap_tb, self.hvap_298 = hvap_tb, hvap_298
        self.omega = finite(chemicals.LK_omega, tb, tc, pc)
        self.zc = pc * vc / (R * tc) if None not in (tc, pc, vc) else None


class Molecule:
    def __init__(self, row):
        self.constitution = row["constitution"]
        self.family = row["family"]
        self.heavy = int(row["heavy_atoms"])
        self.mass = 1e3 * float(row["molar_mass_kg_per_mol"])
        self.rdkit = Chem.MolFromSmiles(self.constitution)
        self.name = self.constitution
        self.states = {}
        self.built_in = {}
        self._joback = None
        hydroxyl = Chem.MolFromSmarts("[OX2H][#6]")
        acid = Chem.MolFromSmarts("C(=O)[OX2H]")
        phenol = Chem.MolFromSmarts("c[OX2H]")
        has = lambda pattern: self.rdkit is not None and self.rdkit.HasSubstructMatch(pattern)
        self.acid, self.hydroxyl = has(acid), has(hydroxyl) and not has(acid)
        self.alcohol = self.hydroxyl and not has(phenol)

    def size(self):
        for limit, text in ((4, "01 to 04"), (8, "05 to 08"), (14, "09 to 14"), (20, "15 to 20")):
            if self.heavy <= limit:
                return text + " heavy atoms"
        return "21 and more heavy atoms"

    def joback(self):
        """Groups by the patterns of thermo, only where every heavy atom is in one."""
        if self._joback is None:
            try:
                found = Joback(self.rdkit)
                self._joback = found if found.success else False
            except Exception:
                self._joback = False
        return self._joback or None

    def by_joback(self, name, *arguments):
        found = self.joback()
        if not found:
            return None
        counts = found.counts
        if name == "Tc":
            return finite(lambda: Joback.Tc(counts, arguments[0] if arguments else Joback.Tb(counts)))
        if name == "Pc":
            return finite(lambda: Joback.Pc(counts, found.atom_count))
        if name == "mul":
            return finite(lambda: found.mul(arguments[0]))
        return finite(lambda: getattr(Joback, name)(counts))


# ---------------------------------------------------------------- published relations


def shifted_vapor_pressure(equation):
    """An equation in omega made to pass through T_b, as the built-in ones are."""

    def pressure(m, s, t):
        if None in (s.tb, s.tc, s.pc) or t >= s.tc:
            return None
        from scipy.optimize import brentq

        omega = finite(lambda: brentq(lambda w: math.log(equation(s.tb, s.tc, s.pc, w) / ATM), -0.4, 3.0))
        return finite(equation, t, s.tc, s.pc, omega)

    return pressure


def below_tc(function):
    return lambda m, s, t: None if s.tc is None or t >= s.tc else function(m, s, t)


VAPOR_PRESSURES = {
    "Ambrose-Walton through T_b": shifted_vapor_pressure(vapor_pressure.Ambrose_Walton),
    "Lee-Kesler through T_b": shifted_vapor_pressure(vapor_pressure.Lee_Kesler),
    "Lee-Kesler": below_tc(lambda m, s, t: finite(vapor_pressure.Lee_Kesler, t, s.tc, s.pc, s.omega)),
    "Ambrose-Walton": below_tc(lambda m, s, t: finite(vapor_pressure.Ambrose_Walton, t, s.tc, s.pc, s.omega)),
    "boiling-critical relation (Riedel's h)": below_tc(
        lambda m, s, t: finite(vapor_pressure.boiling_critical_relation, t, s.tb, s.tc, s.pc)
    ),
    "Edalat": below_tc(lambda m, s, t: finite(vapor_pressure.Edalat, t, s.tc, s.pc, s.omega)),
    "Sanjari": below_tc(lambda m, s, t: finite(vapor_pressure.Sanjari, t, s.tc, s.pc, s.omega)),
}

# molar volumes in m3/mol
VOLUMES = {
    "Rackett (Z_c)": below_tc(lambda m, s, t: finite(volume.Rackett, t, s.tc, s.pc, s.zc)),
    "COSTALD (V_c)": below_tc(lambda m, s, t: finite(volume.COSTALD, t, s.tc, s.vc, s.omega)),
    "Yen-Woods": below_tc(lambda m, s, t: finite(volume.Yen_Woods_saturation, t, s.tc, s.vc, s.zc)),
    "Yamada-Gunn": below_tc(lambda m, s, t: finite(volume.Yamada_Gunn, t, s.tc, s.pc, s.omega)),
    "Bhirud": below_tc(lambda m, s, t: finite(volume.Bhirud_normal, t, s.tc, s.pc, s.omega)),
    "Townsend-Hales": below_tc(lambda m, s, t: finite(volume.Townsend_Hales, t, s.tc, s.vc, s.omega)),
    "Campbell-Thodos": below_tc(
        lambda m, s, t: finite(
            lambda: volume.Campbell_Thodos(t, s.tb, s.tc, s.pc, m.mass, 0.0, m.hydroxyl)
        )
    ),
    "SNM0": below_tc(lambda m, s, t: finite(volume.SNM0, t, s.tc, s.vc, s.omega)),
}

# carried to another temperature from the molar volume at 298.15 K
def carried_volume(equation):
    def value(m, s, t):
        here, there = equation(m, s, ROOM_K), equation(m, s, t)
        if None in (here, there, s.vm) or here <= 0:
            return None
        return s.vm * there / here

    return below_tc(value)


ENTHALPIES_AT_TB = {
    "Riedel": lambda m, s: finite(phase_change.Riedel, s.tb, s.tc, s.pc),
    "Chen": lambda m, s: finite(phase_change.Chen, s.tb, s.tc, s.pc),
    "Vetere": lambda m, s: finite(
        lambda: phase_change.Vetere(s.tb, s.tc, s.pc, 1.05 if m.alcohol or m.acid else 1.0)
    ),
    "Liu": lambda m, s: finite(phase_change.Liu, s.tb, s.tc, s.pc),
}
ENTHALPIES_AT_T = {
    "Pitzer": lambda m, s, t: finite(phase_change.Pitzer, t, s.tc, s.omega),
    "Morgan-Kobayashi": lambda m, s, t: finite(phase_change.MK, t, s.tc, s.omega),
    "Sivaraman-Magee-Kobayashi": lambda m, s, t: finite(phase_change.SMK, t, s.tc, s.omega),
    "Velasco": lambda m, s, t: finite(phase_change.Velasco, t, s.tc, s.omega),
}


def sastri_rao(m, s):
    kind = "alcohol" if m.alcohol else "acid" if m.acid else None
    return finite(lambda: interface.Sastri_Rao(ROOM_K, s.tb, s.tc, s.pc, kind))


SURFACE_TENSIONS = {
    "Brock-Bird": lambda m, s: finite(interface.Brock_Bird, ROOM_K, s.tb, s.tc, s.pc),
    "Pitzer": lambda m, s: finite(interface.Pitzer_sigma, ROOM_K, s.tc, s.pc, s.omega),
    "Sastri-Rao": sastri_rao,
    "Zuo-Stenby": lambda m, s: finite(interface.Zuo_Stenby, ROOM_K, s.tc, s.pc, s.omega),
    "Hakim-Steinberg-Stiel": lambda m, s: finite(
        interface.Hakim_Steinberg_Stiel, ROOM_K, s.tc, s.pc, s.omega
    ),
    "Miqueu": lambda m, s: finite(interface.Miqueu, ROOM_K, s.tc, s.vc, s.omega),
    "Gharagheizi 1": lambda m, s: finite(interface.sigma_Gharagheizi_1, ROOM_K, s.tc, m.mass, s.omega),
    "Gharagheizi 2": lambda m, s: finite(interface.sigma_Gharagheizi_2, ROOM_K, s.tb, s.tc, s.pc, s.vc),
}
VISCOSITIES = {
    "Letsou-Stiel": lambda m, s: finite(viscosity.Letsou_Stiel, ROOM_K, m.mass, s.tc, s.pc, s.omega),
    "Przedziecki-Sridhar": lambda m, s: finite(
        viscosity.Przedziecki_Sridhar, ROOM_K, s.tm, s.tc, s.pc, s.vc, s.vm, s.omega, m.mass
    ),
}


def catoire_naudet(m, s):
    """Flash point of Catoire and Naudet (J. Phys. Chem. Ref. Data 33 (2004) 1083)."""
    carbons = sum(atom.GetSymbol() == "C" for atom in m.rdkit.GetAtoms())
    return finite(lambda: 1.477 * s.tb**0.79686 * (1e-3 * s.hvap_298) ** 0.16845 * carbons**-0.05948)


def watson(m, s):
    return finite(lambda: phase_change.Watson(ROOM_K, s.hvap_tb, s.tb, s.tc))


def wilson_jasperson(at):
    def value(m, s):
        if s.tb is None:
            return None
        # missing increments of either constant make it no value
        found = Wilson_Jasperson(m.rdkit, s.tb)
        return None if found[2 + at] else found[at]

    return lambda m, s: finite(value, m, s)


def fedors(m, s):
    found = Fedors(m.rdkit)
    return found[0] if found[1] == "OK" else None


STATES = ("estimated", "measured T_b", "joback-reid", "measured")
STRUCTURE = ("structure",)


def methods_of(figure):
    """(name, choices of inputs, function of molecule, state and temperature)."""
    any_state = lambda table: [(name, STATES, lambda m, s, t, f=f: f(m, s)) for name, f in table.items()]
    at_t = lambda table: [(name, STATES, f) for name, f in table.items()]
    joback = lambda name: ("Joback-Reid (thermo)", STRUCTURE, lambda m, s, t: m.by_joback(name))
    built_in = (
        "Joback-Reid and relations (built in)",
        STRUCTURE,
        lambda m, s, t: m.built_in.get(figure),
    )
    if figure == "boiling_point":
        return [joback("Tb"), built_in]
    if figure == "melting_point":
        return [joback("Tm"), built_in]
    if figure == "critical_temperature":
        return [
            joback("Tc"),
            built_in,
            ("Joback-Reid (thermo)", ("estimated", "measured T_b"), lambda m, s, t: s.tb and m.by_joback("Tc", s.tb)),
            ("Wilson-Jasperson", ("estimated", "measured T_b"), lambda m, s, t: wilson_jasperson(0)(m, s)),
            (
                "T_c = 3/2 T_b (Perry)",
                ("estimated", "measured T_b"),
                lambda m, s, t: finite(lambda: critical.Tb_Tc_relationship(Tb=s.tb)),
            ),
            (
                "Grigoras, from P_c and V_c",
                ("measured",),
                lambda m, s, t: finite(lambda: critical.Grigoras(Pc=s.pc, Vc=s.vc)),
            ),
        ]
    if figure == "critical_pressure":
        return [
            joback("Pc"),
            built_in,
            ("Wilson-Jasperson", ("estimated", "measured T_b"), lambda m, s, t: wilson_jasperson(1)(m, s)),
            (
                "Meissner, from T_c and V_c",
                ("estimated", "measured"),
                lambda m, s, t: s.tc and s.vc and finite(lambda: critical.Meissner(Tc=s.tc, Vc=s.vc)),
            ),
            (
                "Ihmels, from T_c and V_c",
                ("estimated", "measured"),
                lambda m, s, t: s.tc and s.vc and finite(lambda: critical.Ihmels(Tc=s.tc, Vc=s.vc)),
            ),
        ]
    if figure == "critical_volume":
        return [
            joback("Vc"),
            built_in,
            ("Fedors", STRUCTURE, lambda m, s, t: finite(fedors, m, 0)),
            (
                "Ihmels, from T_c and P_c",
                ("estimated", "measured"),
                lambda m, s, t: s.tc and s.pc and finite(lambda: critical.Ihmels(Tc=s.tc, Pc=s.pc)),
            ),
            (
                "Meissner, from T_c and P_c",
                ("estimated", "measured"),
                lambda m, s, t: s.tc and s.pc and finite(lambda: critical.Meissner(Tc=s.tc, Pc=s.pc)),
            ),
        ]
    if figure == "vapor pressure":
        return at_t(VAPOR_PRESSURES)
    if figure == "molar_volume":
        return at_t(VOLUMES) + [built_in]
    if figure == "density at T":
        return at_t(VOLUMES) + [
            (f"{name}, carried from 298 K", ("estimated", "measured T_b", "measured"), carried_volume(VOLUMES[name]))
            for name in VOLUMES
            if name not in ("Campbell-Thodos",)
        ]
    if figure == "enthalpy_of_vaporization":
        return [joback("Hvap"), built_in] + any_state(ENTHALPIES_AT_TB) + [
            (name, STATES, lambda m, s, t, f=f: s.tb and f(m, s, s.tb)) for name, f in ENTHALPIES_AT_T.items()
        ]
    if figure == "enthalpy_of_vaporization_298":
        carried = [
            (
                f"{name} and Watson",
                STATES,
                lambda m, s, t, f=f: s.tb
                and s.tc
                and finite(lambda h: phase_change.Watson(ROOM_K, h, s.tb, s.tc), f(m, s)),
            )
            for name, f in ENTHALPIES_AT_TB.items()
        ]
        fitted = ("value at T_b and Watson", STATES, lambda m, s, t: watson(m, s))
        return [built_in, fitted] + carried + at_t(
            {name: (lambda m, s, t, f=f: f(m, s, ROOM_K)) for name, f in ENTHALPIES_AT_T.items()}
        )
    if figure == "flash_point":
        return [built_in, ("Catoire-Naudet", STATES, lambda m, s, t: catoire_naudet(m, s))]
    if figure == "liquid_viscosity":
        return [("Joback-Reid (thermo)", STRUCTURE, lambda m, s, t: m.by_joback("mul", ROOM_K)), built_in] + any_state(
            VISCOSITIES
        )
    if figure == "surface_tension":
        return [built_in] + any_state(SURFACE_TENSIONS)
    if figure == "log_p_octanol_water":
        return [("Wildman-Crippen (RDKit)", STRUCTURE, lambda m, s, t: finite(Crippen.MolLogP, m.rdkit))]
    if figure == "ideal_gas_enthalpy_of_formation":
        return [joback("Hf"), built_in]
    return []


# --------------------------------------------------------------------------- the tables


def summary(errors):
    errors = np.asarray(errors, dtype=float)
    absolute = np.abs(errors)
    return [
        f"{np.mean(absolute):.4g}",
        f"{np.median(absolute):.4g}",
        f"{np.quantile(absolute, 0.9):.4g}",
        f"{np.mean(errors):.4g}",
        f"{np.std(errors):.4g}",
    ]


# what a choice of inputs is fairly held against
AGAINST = {
    "structure": "structure level",
    "estimated": "structure level",
    "joback-reid": "structure level",
    "measured T_b": "structure level, measured T_b",
    "measured": "structure level, measured T_b",
}
# a hundredth less is no difference
NEARER = 0.99
# fewer values than this say nothing about a family
LEAST_VALUES = 10

SUMMARY = ["mean_abs", "median_abs", "p90_abs", "bias", "standard_deviation"]


def why(figure, molecule, point, error, off, others):
    """What may explain a large error, from what can be seen without opinion."""
    reasons = []
    # nearer to the fit than a third of the way to the measured value
    agree = [
        key
        for key, value in others.items()
        if value is not None
        and value * point["structure"] > 0
        and abs(off(value, point["structure"]) or 0.0) < 0.35 * abs(error)
    ]
    by_measured = [name for name, inputs in agree if inputs == "measured"]
    by_structure = [name for name, inputs in agree if inputs == "structure"]
    if by_measured:
        reasons.append("other measured values of it give about the estimate by " + " and ".join(by_measured))
    if by_structure:
        reasons.append("about the same by " + " and ".join(by_structure))
    if point["inside"] == "false":
        reasons.append("an atom, or what it is bound to, is in no other part of the data")
    symbols = [atom.GetSymbol() for atom in molecule.rdkit.GetAtoms()]
    hydrogens = sum(atom.GetTotalNumHs() for atom in molecule.rdkit.GetAtoms())
    if symbols.count("F") >= max(2, hydrogens):
        reasons.append("as much fluorine as hydrogen or more")
    if molecule.heavy <= 4:
        reasons.append("few atoms, few relatives")
    if molecule.acid and figure in ("enthalpy_of_vaporization", "enthalpy_of_vaporization_298", "vapor pressure"):
        reasons.append("vapor associates")
    return "; ".join(reasons) or "not explained"


class Tables:
    def __init__(self):
        self.methods, self.classes, self.better = [], [], []

    def add(self, figure, unit, name, inputs, rows, fits):
        """`rows`: (molecule, error or None) for every value; `fits`: label -> errors alike."""
        title = TITLES.get(figure, figure)
        answered = [i for i, (_, error) in enumerate(rows) if error is not None]
        if not answered:
            return
        groups = defaultdict(list)
        for i in answered:
            molecule = rows[i][0]
            groups["all"].append(i)
            groups[f"family: {molecule.family}"].append(i)
            groups[f"size: {molecule.size()}"].append(i)
        for label, members in sorted(groups.items(), key=lambda item: (item[0] != "all", item[0])):
            theirs = [rows[i][1] for i in members]
            line = [title, name, inputs, label, unit, len(rows), len(members)] if label == "all" else [
                title, name, inputs, label, unit, sum(1 for m, _ in rows if label in (f"family: {m.family}", f"size: {m.size()}")), len(members)
            ]
            line += summary(theirs)
            for fit, errors in fits.items():
                both = [(rows[i][1], errors[i]) for i in members if errors[i] is not None]
                if not both or name == fit:
                    line += ["", "", "", "", ""]
                    continue
                a, b = (np.abs(np.array(side)) for side in zip(*both))
                line += [
                    len(both),
                    f"{np.mean(a):.4g}",
                    f"{np.mean(b):.4g}",
                    f"{np.median(b):.4g}",
                    f"{100 * np.mean(a < b):.0f}",
                ]
                if fit == AGAINST[inputs] and len(both) >= LEAST_VALUES and not name.endswith(" level"):
                    mean, median = np.mean(a) < NEARER * np.mean(b), np.median(a) < NEARER * np.median(b)
                    if mean or median:
                        self.better.append(
                            [title, label, name, inputs, fit, unit, len(both)]
                            + [f"{x:.4g}" for x in (np.mean(a), np.mean(b), np.median(a), np.median(b))]
                            + ["both" if mean and median else "mean" if mean else "median"]
                        )
            if label == "all":
                self.methods.append(line)
            elif len(members) >= LEAST_VALUES and inputs != "joback-reid":
                self.classes.append(line)

    def summary(self):
        """The fits and the nearest published method for each figure, as text."""
        lines = [
            "| figure | unit | structure level | count level | Joback-Reid, built in | nearest published, no measured input | both | structure level, T_b measured | nearest published, T_b measured | both | nearest published, all inputs measured |",
            "|---|---|---|---|---|---|---|---|---|---|---|",
        ]
        figures = list(dict.fromkeys(line[0] for line in self.methods))
        for figure in figures:
            rows = [line for line in self.methods if line[0] == figure]
            told = lambda line: f"{line[7]} (median {line[8]}) of {line[6]}"
            def own(name, inputs):
                found = [line for line in rows if line[1] == name and line[2] == inputs]
                return told(found[0]) if found else "-"
            def nearest(choices, at):
                found = [
                    line
                    for line in rows
                    if line[2] in choices and not line[1].endswith(" level") and line[6] >= 0.5 * max(l[6] for l in rows if l[2] == line[2])
                ]
                if not found:
                    return "-", "-"
                line = min(found, key=lambda line: float(line[7]))
                name = line[1] if line[2] == "structure" else f"{line[1]} [{line[2]}]"
                both = f"{line[at + 1]} / {line[at + 2]}" if line[at] != "" else "-"
                return f"{name}: {told(line)}", both
            free, both_free = nearest(("structure", "estimated", "joback-reid"), 12)
            with_tb, both_tb = nearest(("measured T_b",), 17)
            measured, _ = nearest(("measured",), 17)
            lines.append(
                f"| {figure} | {rows[0][4]} | {own('structure level', 'structure')} | {own('count level', 'structure')} | "
                f"{own('Joback-Reid and relations (built in)', 'structure')} | {free} | {both_free} | "
                f"{own('structure level', 'measured T_b')} | {with_tb} | {both_tb} | {measured} |"
            )
        return "\n".join(lines) + "\n"

    def write(self, folder):
        (folder / "summary.md").write_text(
            "# Mean absolute errors\n\nWritten by `compare_methods.py`. Each cell: mean (median) of how many values. "
            "`both`: mean of the published method / mean of the structure level on exactly the values that both have.\n\n"
            + self.summary(),
            encoding="utf-8",
        )

        def write(name, header, rows):
            with open(folder / name, "w", newline="", encoding="utf-8") as file:
                out = csv.writer(file, lineterminator="\n")
                out.writerow(header)
                out.writerows(rows)

        paired = []
        for fit in ("structure", "structure_measured_Tb"):
            paired += [
                f"both_{fit}",
                f"mean_abs_where_both_{fit}",
                f"{fit}_mean_abs",
                f"{fit}_median_abs",
                f"percent_nearer_than_{fit}",
            ]
        header = ["figure", "method", "inputs", "class", "unit", "values", "answered"] + SUMMARY + paired
        write("methods.csv", header, self.methods)
        write("classes.csv", header, self.classes)
        write(
            "better.csv",
            ["figure", "class", "method", "inputs", "against", "unit", "values", "mean_abs", "mean_abs_of_fit",
             "median_abs", "median_abs_of_fit", "smaller"],
            self.better,
        )


def main():
    predictions, results, program = (Path(argument) for argument in sys.argv[1:4])
    results.mkdir(parents=True, exist_ok=True)
    molecules, fitted = load(predictions)
    add_built_in(molecules, program)
    tables, worst = Tables(), []
    for figure, (unit, error) in QUANTITIES.items():
        points = points_of(figure, predictions, molecules)
        if figure in DENSITIES:
            told = lambda e, v, error=error: error(1 / e, 1 / v)
        else:
            told = error
        off = lambda estimate, value: None if estimate is None else finite(told, estimate, value)
        fits = {
            "structure level": [off(p["structure"], p["value"]) for p in points],
            "structure level, measured T_b": [off(p["measured"], p["value"]) for p in points],
        }
        rows = lambda values: [(p["molecule"], value) for p, value in zip(points, values)]
        tables.add(figure, unit, "structure level", "structure", rows(fits["structure level"]), fits)
        tables.add(figure, unit, "structure level", "measured T_b", rows(fits["structure level, measured T_b"]), fits)
        tables.add(figure, unit, "count level", "structure", rows([off(p["count"], p["value"]) for p in points]), fits)
        independent = {}
        for name, choices, function in methods_of(figure):
            for inputs in choices:
                found, estimates = [], []
                for p in points:
                    m = p["molecule"]
                    state = m.states.get(inputs, State())
                    value = finite(function, m, state, p["t"])
                    if value is not None and value <= 0 and unit in ("%", "ln", "log10"):
                        value = None
                    found.append(off(value, p["value"]))
                    estimates.append(value)
                tables.add(figure, unit, name, inputs, rows(found), fits)
                if inputs in ("structure", "measured") and "built in" not in name:
                    independent[name, inputs] = estimates
        ranked = sorted(
            ((e, i, p) for i, (e, p) in enumerate(zip(fits["structure level"], points)) if e is not None),
            key=lambda item: -abs(item[0]),
        )
        seen = set()
        for e, i, p in ranked:
            if p["molecule"].constitution in seen:
                continue
            seen.add(p["molecule"].constitution)
            m = p["molecule"]
            worst.append(
                [TITLES.get(figure, figure), p["name"], m.constitution, m.family, m.heavy,
                 "" if p["t"] == ROOM_K else p["t"], *(f"{1e-3 * m.mass / p[key]:.6g}" if figure in DENSITIES else f"{p[key]:.6g}" for key in ("value", "structure")),
                 f"{e:.4g}", unit, p["inside"], why(figure, m, p, e, off, {n: v[i] for n, v in independent.items()})]
            )
            if len(seen) == 20:
                break
        print(figure, len(points), flush=True)
    tables.write(results)
    with open(results / "worst.csv", "w", newline="", encoding="utf-8") as file:
        out = csv.writer(file, lineterminator="\n")
        out.writerow(
            ["figure", "name", "smiles", "family", "heavy_atoms", "temperature_k", "value_si", "estimate_si", "error",
             "unit", "inside_the_fit", "likely_reason"]
        )
        out.writerows(worst)
    handbook(results, program, fitted)


def load(predictions):
    """Molecules with their states, and the predictions of both levels by quantity."""
    molecules, measured = {}, defaultdict(dict)
    fitted = {}
    for level in ("structure", "count"):
        for quantity in QUANTITIES:
            path = predictions / f"{level}-{quantity}.csv"
            if path.exists():
                fitted[level, quantity] = {row["constitution"]: row for row in read(path)}
    for (level, quantity), rows in fitted.items():
        if level == "structure":
            for constitution, row in rows.items():
                measured[constitution][quantity] = float(row["value"])
    for row in read(predictions / "constants.csv"):
        if row["level"] != "structure":
            continue
        molecule = molecules.get(row["constitution"])
        if molecule is None:
            molecule = molecules[row["constitution"]] = Molecule(row)
        known = measured[row["constitution"]]
        melting = fitted["structure", "melting_point"].get(row["constitution"])
        state = State(
            number(row["boiling_point"]),
            number(row["critical_temperature"]),
            number(row["critical_pressure"]),
            number(row["critical_volume"]),
            number(row["molar_volume"]),
            float(melting["estimate"]) if melting else None,
            number(row["enthalpy_of_vaporization"]),
            number(row["enthalpy_of_vaporization_298"]),
        )
        molecule.states["estimated" if row["from"] == "structure" else "measured T_b"] = state
        molecule.fitted = getattr(molecule, "fitted", {})
        molecule.fitted[row["from"]] = row
        if row["from"] == "structure":
            names = ["boiling_point", "critical_temperature", "critical_pressure", "critical_volume",
                     "molar_volume", "melting_point", "enthalpy_of_vaporization", "enthalpy_of_vaporization_298"]
            molecule.states["measured"] = State(*(known.get(name) for name in names))
            molecule.states["structure"] = State()
    for molecule in molecules.values():
        if molecule.rdkit is not None:
            j = molecule.by_joback
            molecule.states["joback-reid"] = State(j("Tb"), j("Tc"), j("Pc"), j("Vc"), None, j("Tm"), j("Hvap"), None)
            s = molecule.states["joback-reid"]
            s.hvap_298 = watson(molecule, s)
    return molecules, fitted


def points_of(figure, predictions, molecules):
    """Measured values of a figure with what the fits say, from structure and with T_b measured."""
    points = []
    if figure in ("vapor pressure", "density at T"):
        table = defaultdict(dict)
        for level in ("structure", "count"):
            for row in read(predictions / f"{level}-derived.csv"):
                if row["figure"] == figure and row["given"] == "true":
                    key = (row["constitution"], float(row["temperature_k"]), float(row["value"]))
                    table[key][level, row["from"]] = number(row["estimate"])
        for (constitution, t, value), found in table.items():
            molecule = molecules[constitution]
            points.append(
                {"molecule": molecule, "name": constitution, "t": t, "value": value,
                 "structure": found.get(("structure", "structure")),
                 "measured": found.get(("structure", "measured T_b")),
                 "count": found.get(("count", "structure")), "inside": ""}
            )
        if figure == "density at T":
            # compared as volumes, like all methods
            for p in points:
                mass = 1e-3 * p["molecule"].mass
                for key in ("value", "structure", "measured", "count"):
                    p[key] = p[key] and mass / p[key]
        return points
    counts = {row["constitution"]: row for row in read(predictions / f"count-{figure}.csv")}
    for row in read(predictions / f"structure-{figure}.csv"):
        molecule = molecules[row["constitution"]]
        given = row["given"] == "true"
        count = counts.get(row["constitution"])
        with_tb = molecule.fitted.get("measured T_b", {}).get(figure)
        points.append(
            {"molecule": molecule, "name": row["name"], "t": ROOM_K, "value": float(row["value"]),
             "structure": number(row["estimate"]) if given else None,
             "measured": number(with_tb) if with_tb and given and figure not in ("boiling_point", "molar_volume") else None,
             "count": number(count["estimate"]) if count and count["given"] == "true" else None,
             "inside": row["inside"]}
        )
    return points


def properties(program, smiles, level):
    """Values of the program with measured data off, by SMILES and property."""
    with tempfile.NamedTemporaryFile("w", suffix=".csv", delete=False) as file:
        file.write("smiles\n" + "\n".join(smiles) + "\n")
    run = subprocess.run(
        [program, "properties", "--from", file.name, "--format", "csv", "--estimates", level, "--estimates-only"],
        capture_output=True,
        text=True,
        check=False,
    )
    Path(file.name).unlink()
    found = defaultdict(dict)
    for row in csv.DictReader(run.stdout.splitlines()):
        if row["value"]:
            scale = 1e3 if row["unit"] == "MPa^0.5" else 1.0
            found[row["smiles"]][row["property"]] = [
                scale * float(row[key]) if row[key] else None for key in ("value", "low", "high")
            ]
    return found


def add_built_in(molecules, program):
    found = properties(program, list(molecules), "joback-reid")
    for constitution, molecule in molecules.items():
        for name, values in found.get(constitution, {}).items():
            molecule.built_in[name] = values[0]
        density = molecule.built_in.get("liquid_density")
        if density:
            molecule.built_in["molar_volume"] = 1e-3 * molecule.mass / density


def handbook(results, program, fitted):
    rows = [
        row
        for row in csv.DictReader(
            line
            for line in open(REPOSITORY / "tests/data/pure/handbook_100.csv", encoding="utf-8")
            if not line.startswith("#")
        )
    ]
    smiles = sorted({row["smiles"] for row in rows})
    levels = {level: properties(program, smiles, level) for level in ("structure", "count")}
    by_key = {
        key: {canonical(constitution): row for constitution, row in table.items()} for key, table in fitted.items()
    }
    out, grouped = [], defaultdict(list)
    for row in rows:
        name = row["property"]
        quantity = "molar_volume" if name == "liquid_density" else name
        unit, error = QUANTITIES.get(quantity, QUANTITIES["vapor pressure"])
        value = float(row["value_si"])
        line = [row["name"], row["cas"], name, row["value_si"], row["source"]]
        key = canonical(row["smiles"])
        held_out = by_key.get(("structure", quantity), {}).get(key)
        in_fit = held_out is not None
        line.append(
            "rests on other fits" if name == "vapor_pressure" else "yes" if in_fit else "no"
        )
        for level in ("structure", "count"):
            found = levels[level].get(row["smiles"], {}).get(name)
            off = finite(error, found[0], value) if found else None
            line += [f"{found[0]:.6g}" if found else "", "" if off is None else f"{off:.4g}"]
            if level == "structure":
                inside = "" if not found or found[1] is None else "yes" if found[1] <= value <= found[2] else "no"
                line.append(inside)
            if off is not None:
                kind = "in the fit" if in_fit else "not in the fit"
                if name == "vapor_pressure":
                    kind = "rests on other fits"
                grouped[name, unit, level, kind].append(off)
        for level in ("structure", "count"):
            other = by_key.get((level, quantity), {}).get(key)
            off = None
            if other and other["given"] == "true":
                estimate = float(other["estimate"])
                if name == "liquid_density":
                    estimate = float(other["value"]) / estimate * value
                off = finite(error, estimate, value)
            line.append("" if off is None else f"{off:.4g}")
            if off is not None:
                grouped[name, unit, level, "cross-validation"].append(off)
        line.append(unit)
        out.append(line)
    with open(results / "handbook.csv", "w", newline="", encoding="utf-8") as file:
        writer = csv.writer(file, lineterminator="\n")
        writer.writerow(
            ["name", "cas", "property", "value_si", "source", "in_the_fit", "structure_si", "structure_error",
             "structure_interval_holds", "count_si", "count_error", "structure_error_cross_validation",
             "count_error_cross_validation", "unit_of_error"]
        )
        writer.writerows(out)
    with open(results / "handbook_summary.csv", "w", newline="", encoding="utf-8") as file:
        writer = csv.writer(file, lineterminator="\n")
        writer.writerow(["property", "level", "values", "unit", "count"] + SUMMARY + ["worst"])
        for (name, unit, level, kind), errors in sorted(grouped.items()):
            worst = max(errors, key=abs)
            writer.writerow([name, level, kind, unit, len(errors)] + summary(errors) + [f"{worst:.4g}"])


if __name__ == "__main__":
    main()
