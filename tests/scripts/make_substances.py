"""Makes groups/substances/*.csv and the pool of the examples.

Run by hand from the repository root, with the packages `chemicals` (its data
files carry the published handbook tables) and `rdkit`:

    python tests/scripts/make_substances.py

Nothing of this runs in the tests or in CI. The list of substances, with the
names and abbreviations in use, is written by hand (substances/list.txt); the
identifiers and the numbers come from the tables named in each file's head.

Selection, the same for every substance:
- identity: CAS number with a valid check digit; SMILES whose formula and
  InChI (computed by RDKit) are those of the identifier record;
- boiling point: the CRC value if another source or a vapor-pressure set
  confirms it within 3 K, else the median of the largest group that agrees;
  a value that nothing confirms is left out (it may belong to another pressure);
- vapor pressure: sets in the order of VP_ORDER; those that cover the normal
  boiling point and meet it within 1 K come first, then within 3 K; a set
  outside 3 K is left out and recorded. The first set is used, the second is
  kept as its control;
- density: Perry, else VDI, else the handbook value at 20 to 25 degC;
- melting point: the first of at least two lists that agree within 3 K;
- flash point: the median of three lists; of two that agree within 5 K the
  first; of two that disagree the one a third value supports (FLASH_DECIDED),
  else the lower, since a flash point shown too high is the dangerous error;
- disagreements go to conflicts.csv.
"""
import csv, math, os, re, statistics as st, sys, warnings
import pandas as pd
from rdkit import Chem, RDLogger
from rdkit.Chem.rdMolDescriptors import CalcMolFormula
from rdkit.Chem.inchi import MolToInchi
import chemicals
from chemicals.identifiers import CAS_from_any, search_chemical, check_CAS

warnings.filterwarnings("ignore")
RDLogger.DisableLog("rdApp.*")
HERE = os.path.dirname(os.path.abspath(__file__))
ROOT = os.path.dirname(os.path.dirname(HERE))
OUT = os.path.join(ROOT, "groups", "substances")
POOL = os.path.join(ROOT, "examples", "entrainer-acetone-methanol")
DATA = os.path.dirname(chemicals.__file__)
DATE = "2026-12-01"
ATM = 101325.0

SOURCES = {
    "crc": "CRC Handbook of Chemistry and Physics, 95th ed., CRC Press 2014",
    "webbook": "NIST Chemistry WebBook, NIST Standard Reference Database 69",
    "cas": "CAS Common Chemistry, American Chemical Society",
    "yaws": "C. L. Yaws, Thermophysical Properties of Chemicals and Hydrocarbons, 2nd ed., Gulf 2014",
    "perry-2-8": "Perry's Chemical Engineers' Handbook, 8th ed., McGraw-Hill 2007, Table 2-8",
    "perry-2-32": "Perry's Chemical Engineers' Handbook, 8th ed., McGraw-Hill 2007, Table 2-32",
    "vdi": "VDI Heat Atlas, 2nd ed., Springer 2010, section D3",
    "mcgarry": "J. McGarry, Ind. Eng. Chem. Process Des. Dev. 22 (1983) 313-322, doi:10.1021/i200021a023",
    "poling-wagner": "B. E. Poling, J. M. Prausnitz, J. P. O'Connell, The Properties of Gases and Liquids, 5th ed., McGraw-Hill 2001, Appendix A (Wagner)",
    "poling-antoine": "B. E. Poling, J. M. Prausnitz, J. P. O'Connell, The Properties of Gases and Liquids, 5th ed., McGraw-Hill 2001, Appendix A (Antoine)",
    "lb": "K. R. Hall (ed.), Landolt-Boernstein New Series IV/20, Vapor Pressure of Chemicals, Springer 1999-2001 (Antoine)",
    "serat": "F. Z. Serat, A. M. Benkouider, A. Yahiaoui, F. Bagui, Fluid Phase Equilib. 449 (2017) 52-59, doi:10.1016/j.fluid.2017.06.008 (list of evaluated experimental flash points)",
    "serat-fraction": "F. Z. Serat, A. M. Benkouider, A. Yahiaoui, F. Bagui, Fluid Phase Equilib. 449 (2017) 52-59, doi:10.1016/j.fluid.2017.06.008 (given there with more than two decimals, so perhaps calculated: half of 86 such values are more than 9 K off IEC and NFPA, mostly below)",
    "iec": "IEC 60079-20-1:2010, Table B.1",
    "nfpa": "NFPA 497 (2008), Table 4.4.2",
    "iec+nfpa": "IEC 60079-20-1:2010, Table B.1, and NFPA 497 (2008), Table 4.4.2",
    "serat+iec": "F. Z. Serat, A. M. Benkouider, A. Yahiaoui, F. Bagui, Fluid Phase Equilib. 449 (2017) 52-59, doi:10.1016/j.fluid.2017.06.008, and IEC 60079-20-1:2010, Table B.1",
    "serat+nfpa": "F. Z. Serat, A. M. Benkouider, A. Yahiaoui, F. Bagui, Fluid Phase Equilib. 449 (2017) 52-59, doi:10.1016/j.fluid.2017.06.008, and NFPA 497 (2008), Table 4.4.2",
    "serat+iec+nfpa": "F. Z. Serat, A. M. Benkouider, A. Yahiaoui, F. Bagui, Fluid Phase Equilib. 449 (2017) 52-59, doi:10.1016/j.fluid.2017.06.008, IEC 60079-20-1:2010, Table B.1, and NFPA 497 (2008), Table 4.4.2",
    "onm": "J.-C. Bradley, A. Lang, A. Williams, Open Notebook Science melting points",
    "rios": "R. Rios, R. Murcia Belmonte, SN Applied Sciences 4 (2022) 185",
    "alshehri": "A. S. Alshehri, A. K. Tula, F. You, R. Gani, AIChE J. 68 (2022) e17469",
    "schrier": "J. Schrier, Hansen solubility parameters, Wolfram Data Repository (2020)",
}
# Sets valid up to the critical point and fitted together come before short-range ones.
# Where CRC and CAS differ by more than 3 % and there is no curve: the one that a
# third handbook value (from memory) supports; None where neither is trusted.
DENSITY_DECIDED = {name: "crc" for name in (
    "2,4-dimethylpentane", "cyclooctane", "trans-decahydronaphthalene", "cyclohexylbenzene", "diethylene glycol", "isobutyl formate",
    "epsilon-caprolactone", "2-methyltetrahydrofuran", "diethoxymethane", "dibenzyl ether", "diiodomethane", "cyclohexylamine")}
DENSITY_DECIDED |= {name: "cas" for name in ("acetonylacetone", "dimethyl malonate", "diethyl phthalate", "trifluoroacetic acid")}
DENSITY_DECIDED |= {"5-methyl-2-hexanone": None}
# Vapor-pressure sets that agree with each other because they are of one origin, and are wrong.
# 4-heptanone: 58 kJ/mol at 298 K, where 2- and 3-heptanone have 47 and this substance in VDI 45.
# Tetraethylene glycol: 581 K at 101.325 kPa; 470, 518 and 561 K of the smaller ones lead to 600 K.
SETS_OUT = {"4-heptanone": ("lb", "webbook"), "tetraethylene glycol": ("lb", "webbook")}
# Melting points of liquids that are hard to crystallize: CRC and CAS copy one value, and
# others contradict it (methyl acetoacetate 193 K, trimethyl orthoformate 254 and 220 K,
# glycerol triacetate 276 K). None is used.
MELTING_OPEN = {
    "methyl acetoacetate": {"onm": 193.15},
    "trimethyl orthoformate": {"onm": 254.15},
    "glycerol triacetate": {"onm": 276.15},
}
# Flash points that two lists, or a misprint among three, leave open: the list that a closed-cup
# value of a further handbook or safety sheet (from memory, in degC) supports.
FLASH_DECIDED = {
    "isobutanol": "iec",  # 28
    "tert-butanol": "nfpa",  # 11
    "tert-amyl alcohol": "iec",  # 19
    "2-pentanone": "nfpa",  # 7
    "methyl isobutyl ketone": "iec",  # 14 to 18
    "diisobutyl ketone": "serat-fraction",  # 49
    "phenol": "iec",  # 79
    "2-methoxyethanol": "iec",  # 39
    "2-ethoxyethanol": "iec",  # 43
    "butyric acid": "nfpa",  # 72
    "diethylenetriamine": "iec",  # 97 to 99
    "isopropanolamine": "nfpa",  # 77
}
FLASH_SAME = 5.0
DECISIONS = {
    "confirmed": "the value used is confirmed by another source or by a vapor-pressure set within 3 K",
    "unresolved": "no value used: two groups of sources contradict each other and no vapor-pressure set decides",
    "curves": "no value used: two vapor-pressure sets agree on another temperature",
    "first-set": "temperature of 101.325 kPa by two sets; the first covers the boiling point or meets it better",
    "set-out": "set left out: its temperature of 101.325 kPa is more than 2.9 K off the boiling point, or off the median of the sets",
    "set-out-298": "set left out: more than 35 % off the median of the sets at 298.15 K",
    "order": "two curves; order of the sources",
    "density-out": "curve left out: more than 3 % off the other curve",
    "density-open": "no value used: the handbook value is contradicted by another one",
    "density-third": "two handbook values contradict each other; a third, from memory, decides",
    "handbook": "the handbook value was measured at 20 to 25 degC, the temperature is not kept",
    "two-sources": "the value used is that of two sources",
    "clapeyron": "value left out: far from Clausius-Clapeyron with an ideal vapor",
    "set-out-series": "set left out: far from what the isomers or smaller members of its series lead to, though another set of the same origin agrees",
    "melting-open": "no value used: the lists contradict each other, and the liquid is one that hardly crystallizes",
    "flash-median": "flash point: the median of three lists",
    "flash-lower": "flash point: two lists differ by more than 5 K and no third decides; the lower is used, since too high is the dangerous error",
    "flash-third": "flash point: the lists differ by more than 5 K; a further closed-cup value, from memory, decides",
    "hansen-order": "order of the sources; the lists partly copy one another",
}
VP_ORDER = ["poling-wagner", "perry-2-8", "mcgarry", "vdi", "poling-antoine", "lb", "webbook"]


def table(path):
    frame = pd.read_csv(os.path.join(DATA, path), sep="\t", dtype={"CAS": str})
    frame["CAS"] = frame["CAS"].map(lambda s: s if "-" in s else f"{s[:-3]}-{s[-3:-1]}-{s[-1]}")
    return frame.drop_duplicates("CAS").set_index("CAS")


def g(value):
    """The number without the noise of binary fractions."""
    text = f"{value:.10g}"
    return text


# ------------------------------------------------------------- identities

def read_list():
    family = None
    for line in open(os.path.join(HERE, "substances", "list.txt"), encoding="utf-8"):
        line = line.strip()
        if not line or line.startswith("#"):
            continue
        if line.startswith("["):
            family = line[1:-1]
            continue
        parts = [p.strip() for p in line.split("|")]
        cas = next((p[1:] for p in parts if p.startswith("=")), None)
        pool = "!pool" not in parts
        names = [p for p in parts if not p.startswith(("=", "!"))]
        yield family, names[0], names[1:], cas, pool


def identify(name, synonyms, cas):
    cas = cas or CAS_from_any(name)
    assert check_CAS(cas), (name, cas)
    record = search_chemical(cas)
    smiles = OVERRIDE_SMILES.get(cas, record.smiles)
    mol = Chem.MolFromSmiles(smiles)
    smiles = Chem.MolToSmiles(mol)
    formula = CalcMolFormula(mol)
    if cas == "7789-20-0":
        formula = "H2O"  # element counts; the isotope is in the SMILES
    elif formula != record.formula:
        sys.exit(f"{name} {cas}: formula {formula} of {smiles} against {record.formula}")
    ours, theirs = MolToInchi(mol).removeprefix("InChI=1S/"), record.InChI.removeprefix("InChI=1S/")
    if ours != theirs and cas not in OVERRIDE_SMILES:
        sys.exit(f"{name} {cas}: InChI {ours} against {theirs}")
    for other in synonyms:
        reading = Chem.MolFromSmiles(other)
        if reading and Chem.MolToSmiles(reading) != smiles and other not in READS_AS_SMILES:
            sys.exit(f"{name}: the synonym {other} is the SMILES of another molecule")
        if other.endswith("?") or re.fullmatch(r"[A-Z0-9-]+", other):
            continue  # abbreviations are used for many things
        try:
            found = CAS_from_any(other)
        except Exception:
            continue
        if found != cas:
            print("NAME", name, cas, other, found)
    return cas, smiles, formula


OVERRIDE_SMILES = {}
# Abbreviations in general use although they are also the SMILES of something else.
READS_AS_SMILES = {"PC"}

# ------------------------------------------------------------- vapor pressure

def antoine(a, b, c):
    return lambda t: math.exp((a - b / (t + c)) * math.log(10))


def wagner(a, b, c, d, tc, pc, p3, p4):
    def p(t):
        tau = max(0.0, 1 - t / tc)
        return pc * math.exp((a * tau + b * tau**1.5 + c * tau**p3 + d * tau**p4) / (1 - tau))
    return p


def extended(c1, c2, c3, c4, c5):
    return lambda t: math.exp(c1 + c2 / t + c3 * math.log(t) + c4 * t**c5)


def vp_sets(cas):
    """source -> (row cells, function, low, high)."""
    sets = {}
    if cas in PERRY_VP.index:
        r = PERRY_VP.loc[cas]
        c = [r.C1, r.C2, r.C3, r.C4, r.C5]
        sets["perry-2-8"] = (["extended-antoine", "", "", ""] + [g(x) for x in c] + ["", ""], extended(*c), r.Tmin, r.Tmax)
    if cas in MCGARRY.index:
        r = MCGARRY.loc[cas]
        sets["mcgarry"] = (["wagner-3-6", "", "", ""] + [g(x) for x in (r.A, r.B, r.C, r.D)] + ["", g(r.Tc), g(r.Pc / 1e3)],
                           wagner(r.A, r.B, r.C, r.D, r.Tc, r.Pc, 3, 6), r.Tmin, r.Tc)
    if cas in POLING_W.index:
        r = POLING_W.loc[cas]
        sets["poling-wagner"] = (["wagner-2.5-5", "", "", ""] + [g(x) for x in (r.A, r.B, r.C, r.D)] + ["", g(r.Tc), g(r.Pc / 1e3)],
                                 wagner(r.A, r.B, r.C, r.D, r.Tc, r.Pc, 2.5, 5), r.Tmin, r.Tmax)
    if cas in VDI_VP.index:
        r = VDI_VP.loc[cas]
        sets["vdi"] = (["wagner-2.5-5", "", "", ""] + [g(x) for x in (r.A, r.B, r.C, r.D)] + ["", g(r.Tc), g(r.Pc / 1e3)],
                       wagner(r.A, r.B, r.C, r.D, r.Tc, r.Pc, 2.5, 5), r.Tm, r.Tc)
    if cas in POLING_A.index:
        r = POLING_A.loc[cas]
        # printed for bar and degrees Celsius
        sets["poling-antoine"] = (["antoine", "log10", "bar", "degC", g(round(r.A - 5, 5)), g(r.B), g(round(r.C + 273.15, 3)), "", "", "", ""],
                                  antoine(r.A, r.B, r.C), r.Tmin, r.Tmax)
    if cas in LB.index:
        r = LB.loc[cas]
        # printed as decimal logarithm for kPa and kelvin
        a, b = (r.A - math.log(1000)) / math.log(10), r.B / math.log(10)
        sets["lb"] = (["antoine", "log10", "kPa", "K", g(round(a, 5)), g(round(b, 4)), g(r.C), "", "", "", ""],
                      antoine(a + 3, b, r.C), r.Tmin, r.Tmax)
    if cas in WEB.index and not pd.isna(WEB.loc[cas, "AntoineA"]):
        r = WEB.loc[cas]
        # printed as decimal logarithm for bar and kelvin
        a, b = (r.AntoineA - math.log(1e5)) / math.log(10), r.AntoineB / math.log(10)
        sets["webbook"] = (["antoine", "log10", "bar", "K", g(round(a, 5)), g(round(b, 4)), g(r.AntoineC), "", "", "", ""],
                           antoine(a + 5, b, r.AntoineC), r.AntoineTmin, r.AntoineTmax)
    return sets


def t_sat(p, low, high, target=ATM):
    """Temperature of `target` pressure inside the range stretched by a tenth."""
    a, b = low * 0.9, high * 1.1
    fa, fb = p(a) - target, p(b) - target
    if fa > 0 or fb < 0:
        return None
    for _ in range(80):
        m = (a + b) / 2
        if p(m) < target:
            a = m
        else:
            b = m
    return (a + b) / 2


# ------------------------------------------------------------- tables

def crc_value(cas, column):
    for frame in (CRC, CRC_INORG):
        if cas in frame.index and not pd.isna(frame.loc[cas, column]):
            return float(frame.loc[cas, column])
    return None


def value(frame, cas, column):
    if cas in frame.index and not pd.isna(frame.loc[cas, column]):
        return float(frame.loc[cas, column])
    return None


def agreeing(values, within):
    """The largest group of sources no further than `within` from one of them."""
    best = []
    for centre in values.values():
        group = [s for s, v in values.items() if abs(v - centre) <= within]
        if len(group) > len(best):
            best = group
    return best


def write(name, facts, columns, units, rows):
    path = os.path.join(OUT, name)
    with open(path, "w", newline="\n", encoding="utf-8") as f:
        for key, text in facts:
            f.write(f"# {key}: {text}\n")
        w = csv.writer(f, lineterminator="\n")
        w.writerow(columns)
        w.writerow(units)
        w.writerows(rows)
    print(f"{name}: {len(rows)} rows, {os.path.getsize(path)} bytes")


def flash_point(name, lists):
    """Value, key of the lists that state it, and the decision for those that differ from it."""
    decided = FLASH_DECIDED.get(name)
    if decided:
        return lists[decided], decided, "flash-third"
    if len(lists) == 3:
        value, decision = st.median(lists.values()), "flash-median"
    else:
        # a value with many decimals was hardly read off an apparatus: it comes last
        value = next((v for s, v in lists.items() if s != "serat-fraction"), None) or lists["serat-fraction"]
        decision = "flash-lower"
        if max(lists.values()) - min(lists.values()) > FLASH_SAME:
            value = min(lists.values())
    return value, "+".join(s for s, v in lists.items() if v == value), decision


def facts(title, keys, checked, notes=()):
    head = [("title", title)]
    head += [("source", f"{k}: {SOURCES[k]}") for k in SOURCES if k in keys]
    head += [("transcribed", f"{DATE}, by way of the data files of the Python package chemicals {chemicals.__version__} (MIT)"),
             ("checked", checked)]
    return head + [("note", n) for n in notes]


def main():
    global CRC, CRC_INORG, PERRY_VP, MCGARRY, POLING_W, VDI_VP, POLING_A, LB, WEB
    CRC = table("Misc/Physical Constants of Organic Compounds.csv")
    CRC_INORG = table("Misc/Physical Constants of Inorganic Compounds.csv")
    WEB = table("Misc/webbook_constants.tsv")
    CC = table("Misc/common_chemistry_data.tsv")
    YAWS = table("Phase Change/Yaws Boiling Points.tsv")
    CRC_HVAP = table("Phase Change/CRC Handbook Heat of Vaporization.tsv")
    CRC_HFUS = table("Phase Change/CRC Handbook Heat of Fusion.tsv")
    SERAT = table("Safety/DIPPR T_flash Serat.csv")
    IEC = table("Safety/IS IEC 60079-20-1 2010.tsv")
    NFPA = table("Safety/NFPA 497 2008.tsv")
    PERRY_VP = table("Vapor Pressure/Table 2-8 Vapor Pressure of Inorganic and Organic Liquids.tsv")
    MCGARRY = table("Vapor Pressure/Wagner Original McGarry.tsv")
    POLING_W = table("Vapor Pressure/Wagner Collection Poling.tsv")
    VDI_VP = table("Vapor Pressure/VDI PPDS Boiling temperatures at different pressures.tsv")
    POLING_A = table("Vapor Pressure/Antoine Collection Poling.tsv")
    LB = table("Vapor Pressure/Landolt_antoine_V20.tsv")
    PERRY_RHO = table("Density/Perry Parameters 105.tsv")
    VDI_RHO = table("Density/VDI PPDS Density of Saturated Liquids.tsv")
    HANSEN = {"rios": table("Misc/ruben_manuel_hansen_solubility_parameters.tsv"),
              "alshehri": table("Misc/alshehri_hansen_solubility_parameters.tsv"),
              "schrier": table("Misc/schrier_hansen_solubility_parameters.tsv")}

    substances, pool, measured, vapor, density, hansen, conflicts = [], [], [], [], [], [], []
    vp_spread, tb_spread, rho_spread = [], [], []
    seen_cas, keys = {}, {}
    for family, name, synonyms, cas, in_pool in read_list():
        cas, smiles, formula = identify(name, synonyms, cas)
        if cas in seen_cas:
            sys.exit(f"{name}: {cas} is {seen_cas[cas]}")
        if smiles in keys:
            sys.exit(f"{name}: {smiles} is {keys[smiles]}")
        seen_cas[cas], keys[smiles] = name, name
        substances.append([name, ";".join(synonyms), family, cas, smiles, formula])
        if in_pool:
            pool.append([name, smiles, cas, family])

        def conflict(prop, used, used_source, other, other_source, unit, note, t=""):
            conflicts.append([name, prop, t, used, used_source, other, other_source, unit, note])

        # boiling point
        sets = vp_sets(cas)
        left_out = {s: sets.pop(s) for s in SETS_OUT.get(name, ()) if s in sets}
        curves = {s: t_sat(p, lo, hi) for s, (_, p, lo, hi) in sets.items()}
        curves = {s: t for s, t in curves.items() if t}
        tb = {"crc": crc_value(cas, "Tb") or value(CRC_HVAP, cas, "Tb"), "webbook": value(WEB, cas, "Tb"),
              "cas": value(CC, cas, "Tb"), "yaws": value(YAWS, cas, "Tb")}
        tb = {s: v for s, v in tb.items() if v}
        group = agreeing(tb, 3.0) if tb else []
        chosen = None
        if "crc" in tb and (any(abs(tb["crc"] - v) <= 3 for s, v in tb.items() if s != "crc")
                            or any(abs(tb["crc"] - v) <= 3 for v in curves.values())):
            chosen = ("crc", tb["crc"])
        elif len(group) >= 2:
            median = st.median_low(sorted(tb[s] for s in group))
            chosen = next((s, v) for s, v in tb.items() if v == median and s in group)
        elif len(tb) == 1:
            s, v = next(iter(tb.items()))
            if any(abs(v - c) <= 3 for c in curves.values()):
                chosen = (s, v)
        if chosen:
            # a group as large as the one that confirms it, and no curve to decide
            rivals = agreeing({s: v for s, v in tb.items() if abs(v - chosen[1]) > 6}, 3.0)
            mine = [s for s, v in tb.items() if abs(v - chosen[1]) <= 3]
            if len(rivals) >= max(2, len(mine)) and not any(abs(chosen[1] - c) <= 3 for c in curves.values()):
                conflict("boiling_point", "", "", g(round(tb[rivals[0]], 3)), rivals[0], "K", "unresolved")
                conflict("boiling_point", "", "", g(round(chosen[1], 3)), chosen[0], "K", "unresolved")
                chosen = None
        if chosen:
            # curves that contradict it, when most curves agree among themselves, unseat it
            if curves and all(abs(chosen[1] - c) > 3 for c in curves.values()) and len(agreeing(curves, 2.0)) >= 2:
                conflict("boiling_point", "", "", g(round(chosen[1], 3)), chosen[0], "K",
                         "curves")
                chosen = None
        if chosen:
            measured.append([name, "boiling_point", g(round(chosen[1], 3)), "K", "", g(101.325), chosen[0]])
            for s, v in tb.items():
                if s != chosen[0]:
                    tb_spread.append(abs(v - chosen[1]))
                    if abs(v - chosen[1]) > 3:
                        conflict("boiling_point", g(round(chosen[1], 3)), chosen[0], g(round(v, 3)), s, "K",
                                 "confirmed")

        # vapor pressure
        for o, (_, p, lo, hi) in left_out.items():
            if sets:
                s = next(s for s in VP_ORDER if s in sets)
                conflict("vapor_pressure", g(round(sets[s][1](298.15), 1)), s, g(round(p(298.15), 1)), o, "Pa", "set-out-series", "298.15")
            else:
                conflict("vapor_pressure", g(round(chosen[1], 3)), chosen[0], g(round(t_sat(p, lo, hi), 3)), o, "K", "set-out-series")
        ranked = []
        for order, s in enumerate(VP_ORDER):
            if s not in sets:
                continue
            cells, p, lo, hi = sets[s]
            if not 100 < lo < hi:
                continue
            if s not in curves:
                # too short a range to meet 1 atm even when stretched: taken for
                # low temperatures if the line drawn on comes near the boiling point
                far = t_sat(p, lo, 2 * hi) if chosen else None
                if far and abs(far - chosen[1]) <= 10:
                    ranked.append(((True, True, order), s))
                continue
            anchor = chosen[1] if chosen else st.median(curves.values())
            miss = abs(curves[s] - anchor)
            others = [sets[o][1](298.15) for o in sets if sets[o][2] <= 298.15 <= sets[o][3]]
            off = abs(math.log(p(298.15) / st.median(others))) if len(others) >= 3 and lo <= 298.15 <= hi else 0.0
            if miss > 2.9 or off > 0.3:
                note = "set-out" if miss > 2.9 else "set-out-298"
                conflict("vapor_pressure", g(round(anchor, 3)), chosen[0] if chosen else "median of sets", g(round(curves[s], 3)), s, "K", note)
                continue
            if not chosen and len(curves) < 2:
                continue  # nothing to check it against
            covers = lo <= anchor <= hi
            ranked.append(((not covers, miss > 1.0, order), s))
        ranked.sort()
        for _, s in ranked[:2]:
            cells, p, lo, hi = sets[s]
            vapor.append([name] + cells + [g(round(lo, 3)), g(round(hi, 3)), s])
        if len(ranked) >= 2:
            (_, s1), (_, s2) = ranked[:2]
        if len(ranked) >= 2 and s1 in curves and s2 in curves:
            vp_spread.append((abs(curves[s1] - curves[s2]), name))
            if abs(curves[s1] - curves[s2]) > 1.0:
                conflict("vapor_pressure", g(round(curves[s1], 3)), s1, g(round(curves[s2], 3)), s2, "K",
                         "first-set")

        # density
        mw = MW(formula)
        rho_crc, rho_source = crc_value(cas, "rho"), "crc"
        if not rho_crc and value(CC, cas, "Vml"):
            rho_crc, rho_source = round(mw / value(CC, cas, "Vml") / 1e3, 2), "cas"
        rho_cas = mw / value(CC, cas, "Vml") / 1e3 if value(CC, cas, "Vml") else None
        if rho_cas and rho_cas < 400:
            rho_cas = None  # a gas
        no_curve = cas not in PERRY_RHO.index and cas not in VDI_RHO.index
        if no_curve and (rho_crc and rho_cas and abs(rho_crc / rho_cas - 1) > 0.03 or name in DENSITY_DECIDED):
            values = {"crc": rho_crc, "cas": rho_cas}
            picked = DENSITY_DECIDED.get(name)
            rho_crc, rho_source = values.get(picked), picked
            for s, v in values.items():
                if v and s != picked:
                    conflict("liquid_density", g(round(rho_crc, 2)) if rho_crc else "", picked or "", g(round(v, 2)), s, "kg/m3",
                             "density-third" if picked else "density-open")
        rho = []
        if cas in PERRY_RHO.index:
            r = PERRY_RHO.loc[cas]
            rho.append((["rackett-molar", g(r.C1 / 1e3), g(r.C2), g(r.C3), g(r.C4), "", ""],
                        lambda t, r=r: mw * r.C1 / r.C2 ** (1 + (1 - t / r.C3) ** r.C4) / 1e3, r.Tmin, min(r.Tmax, r.C3), "perry-2-32"))
        if cas in VDI_RHO.index and cas in VDI_VP.index:
            r = VDI_RHO.loc[cas]

            def vdi(t, r=r):
                tau = 1 - t / r.Tc
                return r.rhoc + r.A * tau**0.35 + r.B * tau ** (2 / 3) + r.C * tau + r.D * tau ** (4 / 3)
            rho.append((["critical-expansion", g(r.A), g(r.B), g(r.C), g(r.D), g(r.Tc), g(r.rhoc)], vdi, VDI_VP.loc[cas, "Tm"], r.Tc, "vdi"))
        tb_k = chosen[1] if chosen else (st.median(curves.values()) if curves else None)
        at = 298.15
        ok = []
        for cells, f, lo, hi, s in rho:
            if not lo <= at < hi:
                ok.append((cells, f, lo, hi, s))
                continue
            d = f(at)
            ref = [x[1](at) for x in rho if x[4] != s and x[2] <= at < x[3]]
            if ref and all(abs(d / x - 1) > 0.03 for x in ref):
                conflict("liquid_density", "", "", g(round(d, 1)), s, "kg/m3",
                         "density-out", g(at))
                continue
            ok.append((cells, f, lo, hi, s))
        for cells, f, lo, hi, s in ok[:2]:
            density.append([name] + cells + [g(round(lo, 3)), g(round(hi, 3)), s])
        if len(ok) >= 2 and all(x[2] <= at < x[3] for x in ok[:2]):
            d1, d2 = ok[0][1](at), ok[1][1](at)
            rho_spread.append((abs(d1 / d2 - 1), name))
            if abs(d1 / d2 - 1) > 0.01:
                conflict("liquid_density", g(round(d1, 1)), ok[0][4], g(round(d2, 1)), ok[1][4], "kg/m3", "order", g(at))
        if rho_crc and (tb_k or 0) > 305 and 300 < rho_crc < 4000 and (crc_value(cas, "Tm") or value(WEB, cas, "Tm") or 0) < 295:
            if not ok:
                density.append([name, "constant", g(rho_crc), "", "", "", "", "", "293.15", "298.15", rho_source])
            elif ok[0][2] <= at < ok[0][3]:
                d = ok[0][1](at)
                rho_spread.append((abs(d / rho_crc - 1), name))
                if abs(d / rho_crc - 1) > 0.02:
                    conflict("liquid_density", g(round(d, 1)), ok[0][4], g(rho_crc), rho_source, "kg/m3",
                             "handbook", g(at))

        # other constants
        tm = {"crc": crc_value(cas, "Tm"), "webbook": value(WEB, cas, "Tm"), "cas": value(CC, cas, "Tm")}
        tm = {s: v for s, v in tm.items() if v}
        group = agreeing(tm, 3.0) if tm else []
        if name in MELTING_OPEN:
            for o, v in (tm | MELTING_OPEN[name]).items():
                conflict("melting_point", "", "", g(round(v, 3)), o, "K", "melting-open")
        elif len(group) >= 2:
            s = group[0]
            measured.append([name, "melting_point", g(round(tm[s], 3)), "K", "", "", s])
            for o, v in tm.items():
                if abs(v - tm[s]) > 3:
                    conflict("melting_point", g(round(tm[s], 3)), s, g(round(v, 3)), o, "K", "two-sources")
        h = value(CRC_HFUS, cas, "Hfus")
        if h:
            measured.append([name, "enthalpy_of_fusion", g(h), "J/mol", "", "", "crc"])
        h = value(CRC_HVAP, cas, "HvapTb")
        if h:
            good = True
            if ranked and chosen and ranked[0][1] in curves:
                p = sets[ranked[0][1]][1]
                t = chosen[1]
                slope = (math.log(p(t + 0.5)) - math.log(p(t - 0.5)))
                clapeyron = 8.314462618 * t * t * slope  # ideal vapor: 2 to 5 % high at 1 atm
                if not 0.82 < h / clapeyron < 1.08 and not family == "acids":
                    conflict("enthalpy_of_vaporization", g(round(clapeyron, -1)), ranked[0][1], g(h), "crc", "J/mol",
                             "clapeyron", g(t))
                    good = False
            if good:
                measured.append([name, "enthalpy_of_vaporization", g(h), "J/mol", "", "", "crc"])
        listed = value(SERAT, cas, "T_flash")
        whole = listed and abs(listed * 100 - round(listed * 100)) < 1e-6
        flash = {"serat" if whole else "serat-fraction": listed, "iec": value(IEC, cas, "T_flash"), "nfpa": value(NFPA, cas, "T_flash")}
        flash = {s: round(v, 3) for s, v in flash.items() if v}
        if flash:
            t_flash, s, decision = flash_point(name, flash)
            if tb_k is None or t_flash < tb_k:
                measured.append([name, "flash_point", g(t_flash), "K", "", "", s])
                for o, v in flash.items():
                    if abs(v - t_flash) > FLASH_SAME:
                        conflict("flash_point", g(t_flash), s, g(v), o, "K", decision)

        # Hansen
        rows = {}
        for s, frame in HANSEN.items():
            if cas in frame.index:
                r = frame.loc[cas]
                rows[s] = [float(r[c]) for c in HANSEN_COLUMNS]
        if rows:
            s = next(iter(rows))
            hansen.append([name] + [g(round(x / 1e3, 2)) for x in rows[s]] + [s])
            for o, r in rows.items():
                if max(abs(a - b) for a, b in zip(rows[s], r)) > 1000:
                    conflict("hansen", " ".join(g(round(x / 1e3, 2)) for x in rows[s]), s, " ".join(g(round(x / 1e3, 2)) for x in r), o,
                             "MPa^0.5", "hansen-order")

    os.makedirs(OUT, exist_ok=True)
    os.makedirs(POOL, exist_ok=True)
    write("substances.csv", facts("Common mixture components: names, CAS numbers, structures", ["cas"],
          "CAS check digits; formula and InChI of each SMILES computed by RDKit equal those of the identifier record",
          ["synonyms are joined by ;, and one that ends in ? is in use for several substances"]),
          ["name", "synonyms", "family", "cas", "smiles", "formula"], ["-"] * 6, substances)
    used = {r[-1] for r in measured}
    write("measured.csv", facts("Measured constants of common substances", used,
          "boiling and melting points: confirmed by a second source or a vapor-pressure set within 3 K; enthalpies of vaporization against Clausius-Clapeyron; flash points: lists compared, see conflicts.csv",
          ["boiling_point is at the stated pressure; enthalpy_of_vaporization at the normal boiling point; enthalpy_of_fusion at the melting point"]),
          ["substance", "property", "value", "unit", "temperature", "pressure", "source"], ["-", "-", "-", "-", "K", "kPa", "-"], measured)
    used = {r[-1] for r in vapor}
    write("vapor_pressure.csv", facts("Vapor-pressure coefficients", used,
          "each set gives 101.325 kPa within 3 K of the boiling point in measured.csv, or, where none stands there, of the median of at least two sets; a set whose range ends far below it gives it within 10 K when drawn on",
          ["antoine: log P = a - b / (T + c), logarithm and units as stated",
           "wagner-2.5-5: ln(P/Pc) = (a q + b q^1.5 + c q^2.5 + d q^5) / (1 - q), q = 1 - T/Tc",
           "wagner-3-6: ln(P/Pc) = (a q + b q^1.5 + c q^3 + d q^6) / (1 - q), q = 1 - T/Tc",
           "extended-antoine: ln(P/Pa) = a + b/T + c ln T + d T^e, T in K",
           "the first set of a substance is used, a further one is kept as its control"]),
          ["substance", "equation", "logarithm", "pressure_unit", "temperature_unit", "a", "b", "c", "d", "e",
           "critical_temperature", "critical_pressure", "low", "high", "source"],
          ["-"] * 10 + ["K", "kPa", "K", "K", "-"], vapor)
    used = {r[-1] for r in density}
    write("density.csv", facts("Liquid density", used,
          "two curves of a substance within 3 % of each other at 298.15 K; handbook values against curves, and against each other where there is no curve",
          ["rackett-molar: molar density in mol/dm3 = a / b^(1 + (1 - T/c)^d)",
           "critical-expansion: density in kg/m3 = rho_c + a q^0.35 + b q^(2/3) + c q + d q^(4/3), q = 1 - T/Tc",
           "constant: a in kg/m3, a handbook value measured at 20 to 25 degC",
           "the first curve of a substance is used, a further one is kept as its control"]),
          ["substance", "equation", "a", "b", "c", "d", "critical_temperature", "critical_density", "low", "high", "source"],
          ["-"] * 6 + ["K", "kg/m3", "K", "K", "-"], density)
    used = {r[-1] for r in hansen}
    write("hansen.csv", facts("Hansen solubility parameters", used, "sources compared; see conflicts.csv"),
          ["substance", "dispersion", "polar", "hydrogen_bonding", "source"], ["-", "MPa^0.5", "MPa^0.5", "MPa^0.5", "-"], hansen)
    used = set(SOURCES)
    write("conflicts.csv", facts("Disagreements between the sources, and what was done", {r[4] for r in conflicts} | {r[6] for r in conflicts},
          "made by tests/scripts/make_substances.py; every disagreement above 3 K (boiling, melting point), 1 K (vapor pressure at 101.325 kPa), 1 % (two density curves), "
          "2 % (density against handbook), 5 K (flash point), 1 MPa^0.5 (Hansen)")
          + [("decision", f"{k}: {v}") for k, v in DECISIONS.items() if any(r[-1] == k for r in conflicts)],
          ["substance", "property", "temperature", "used", "used_source", "other", "other_source", "unit", "decision"],
          ["-", "-", "K"] + ["-"] * 6, conflicts)
    print("substances", len(substances), "pool", len(pool))
    print("Tb between sources: n", len(tb_spread), "median", st.median(tb_spread), "worst", max(tb_spread))
    print("Tsat between sets: n", len(vp_spread), "median", st.median(x for x, _ in vp_spread), "worst", max(vp_spread))
    print("density between sources: n", len(rho_spread), "median", st.median(x for x, _ in rho_spread), "worst", max(rho_spread))
    write_pool(pool)


HANSEN_COLUMNS = None
MASS = {"H": 1.008, "C": 12.011, "N": 14.007, "O": 15.999, "F": 18.998, "Si": 28.085, "P": 30.974, "S": 32.06, "Cl": 35.45, "Br": 79.904, "I": 126.90, "B": 10.81}


def MW(formula):
    return sum(MASS[e] * int(n or 1) for e, n in re.findall(r"([A-Z][a-z]?)(\d*)", formula))


def write_pool(pool):
    path = os.path.join(POOL, "solvents.csv")
    with open(path, "w", newline="\n", encoding="utf-8") as f:
        w = csv.writer(f, lineterminator="\n")
        w.writerow(["name", "smiles", "cas", "family"])
        w.writerows(pool)
        # two lines a real list would hold, to show what becomes of them
        w.writerow(["isopropyl alcohol", "OC(C)C", "67-63-0", "alcohols"])
        w.writerow(["1-ethyl-3-methylimidazolium acetate", "CC(=O)[O-].CCn1cc[n+](C)c1", "143314-17-4", "ionic liquids"])


if __name__ == "__main__":
    HANSEN_COLUMNS = ["HANSEN_DELTA_D", "HANSEN_DELTA_P", "HANSEN_DELTA_H"]
    main()
