"""Writes the published UNIFAC tables into groups/unifac and groups/unifac-dortmund.

Numbers (R, Q, main group of a subgroup, interaction parameters) come from the Python package
`thermo` (MIT licence). Formulas, compositions and examples below are ours: formulas as the papers
print them, compositions worked out from the formula and, where the formula leaves it open, from
the van der Waals volume R of the group.

Run from the root of the repository:  python tests/scripts/make_unifac_tables.py
"""

import thermo
from thermo.unifac import DOUFIP2006, DOUFIP2016, DOUFSG, UFIP, UFSG

DATE = "2026-12-01"
VIA = f"numbers transcribed from the MIT-licensed Python package thermo {thermo.__version__}, digits kept"

# number: (formula as printed, atoms covered, example). Halves of atoms' groups are written as decimals.
COMMON = {
    1: ("CH3", "C1H3", "n-hexane = 2 CH3 + 4 CH2"),
    2: ("CH2", "C1H2", "n-hexane = 2 CH3 + 4 CH2"),
    3: ("CH", "C1H1", "2-methylpropane = 3 CH3 + 1 CH"),
    4: ("C", "C1", "2,2-dimethylpropane = 4 CH3 + 1 C"),
    5: ("CH2=CH", "C2H3", "1-hexene = 1 CH3 + 3 CH2 + 1 CH2=CH"),
    6: ("CH=CH", "C2H2", "2-hexene = 2 CH3 + 2 CH2 + 1 CH=CH"),
    7: ("CH2=C", "C2H2", "2-methyl-1-butene = 2 CH3 + 1 CH2 + 1 CH2=C"),
    8: ("CH=C", "C2H1", "2-methyl-2-butene = 3 CH3 + 1 CH=C"),
    9: ("ACH", "C1H1", "benzene = 6 ACH"),
    10: ("AC", "C1", "styrene = 1 CH2=CH + 5 ACH + 1 AC"),
    11: ("ACCH3", "C2H3", "toluene = 5 ACH + 1 ACCH3"),
    12: ("ACCH2", "C2H2", "ethylbenzene = 1 CH3 + 5 ACH + 1 ACCH2"),
    13: ("ACCH", "C2H1", "cumene = 2 CH3 + 5 ACH + 1 ACCH"),
    15: ("CH3OH", "C1H4O1", "methanol = 1 CH3OH"),
    16: ("H2O", "H2O1", "water = 1 H2O"),
    17: ("ACOH", "C1H1O1", "phenol = 5 ACH + 1 ACOH"),
    18: ("CH3CO", "C2H3O1", "2-butanone = 1 CH3 + 1 CH2 + 1 CH3CO"),
    19: ("CH2CO", "C2H2O1", "3-pentanone = 2 CH3 + 1 CH2 + 1 CH2CO"),
    20: ("CHO", "C1H1O1", "propanal = 1 CH3 + 1 CH2 + 1 CHO"),
    21: ("CH3COO", "C2H3O2", "butyl acetate = 1 CH3 + 3 CH2 + 1 CH3COO"),
    22: ("CH2COO", "C2H2O2", "methyl propanoate = 2 CH3 + 1 CH2COO"),
    23: ("HCOO", "C1H1O2", "ethyl formate = 1 CH3 + 1 CH2 + 1 HCOO"),
    24: ("CH3O", "C1H3O1", "dimethyl ether = 1 CH3 + 1 CH3O"),
    25: ("CH2O", "C1H2O1", "diethyl ether = 2 CH3 + 1 CH2 + 1 CH2O"),
    26: ("CH-O", "C1H1O1", "diisopropyl ether = 4 CH3 + 1 CH + 1 CH-O"),
    28: ("CH3NH2", "C1H5N1", "methylamine = 1 CH3NH2"),
    29: ("CH2NH2", "C1H4N1", "propylamine = 1 CH3 + 1 CH2 + 1 CH2NH2"),
    30: ("CHNH2", "C1H3N1", "isopropylamine = 2 CH3 + 1 CHNH2"),
    31: ("CH3NH", "C1H4N1", "dimethylamine = 1 CH3 + 1 CH3NH"),
    32: ("CH2NH", "C1H3N1", "diethylamine = 2 CH3 + 1 CH2 + 1 CH2NH"),
    33: ("CHNH", "C1H2N1", "diisopropylamine = 4 CH3 + 1 CH + 1 CHNH"),
    34: ("CH3N", "C1H3N1", "trimethylamine = 2 CH3 + 1 CH3N"),
    35: ("CH2N", "C1H2N1", "triethylamine = 3 CH3 + 2 CH2 + 1 CH2N"),
    36: ("ACNH2", "C1H2N1", "aniline = 5 ACH + 1 ACNH2"),
    40: ("CH3CN", "C2H3N1", "acetonitrile = 1 CH3CN"),
    41: ("CH2CN", "C2H2N1", "propionitrile = 1 CH3 + 1 CH2CN"),
    42: ("COOH", "C1H1O2", "acetic acid = 1 CH3 + 1 COOH"),
    43: ("HCOOH", "C1H2O2", "formic acid = 1 HCOOH"),
    44: ("CH2Cl", "C1H2Cl1", "1-chlorobutane = 1 CH3 + 2 CH2 + 1 CH2Cl"),
    45: ("CHCl", "C1H1Cl1", "2-chloropropane = 2 CH3 + 1 CHCl"),
    46: ("CCl", "C1Cl1", "2-chloro-2-methylpropane = 3 CH3 + 1 CCl"),
    47: ("CH2Cl2", "C1H2Cl2", "dichloromethane = 1 CH2Cl2"),
    48: ("CHCl2", "C1H1Cl2", "1,1-dichloroethane = 1 CH3 + 1 CHCl2"),
    49: ("CCl2", "C1Cl2", "2,2-dichloropropane = 2 CH3 + 1 CCl2"),
    50: ("CHCl3", "C1H1Cl3", "chloroform = 1 CHCl3"),
    51: ("CCl3", "C1Cl3", "1,1,1-trichloroethane = 1 CH3 + 1 CCl3"),
    52: ("CCl4", "C1Cl4", "tetrachloromethane = 1 CCl4"),
    53: ("ACCl", "C1Cl1", "chlorobenzene = 5 ACH + 1 ACCl"),
    54: ("CH3NO2", "C1H3N1O2", "nitromethane = 1 CH3NO2"),
    55: ("CH2NO2", "C1H2N1O2", "nitroethane = 1 CH3 + 1 CH2NO2"),
    56: ("CHNO2", "C1H1N1O2", "2-nitropropane = 2 CH3 + 1 CHNO2"),
    57: ("ACNO2", "C1N1O2", "nitrobenzene = 5 ACH + 1 ACNO2"),
    58: ("CS2", "C1S2", "carbon disulfide = 1 CS2"),
    59: ("CH3SH", "C1H4S1", "methanethiol = 1 CH3SH"),
    60: ("CH2SH", "C1H3S1", "ethanethiol = 1 CH3 + 1 CH2SH"),
    61: ("C5H4O2", "C5H4O2", "furfural = 1 C5H4O2"),
    62: ("(CH2OH)2", "C2H6O2", "1,2-ethanediol = 1 (CH2OH)2"),
    63: ("I", "I1", "iodoethane = 1 CH3 + 1 CH2 + 1 I"),
    64: ("Br", "Br1", "bromoethane = 1 CH3 + 1 CH2 + 1 Br"),
    65: ("CH≡C", "C2H1", "1-hexyne = 1 CH3 + 3 CH2 + 1 CH≡C"),
    66: ("C≡C", "C2", "2-hexyne = 2 CH3 + 2 CH2 + 1 C≡C"),
    67: ("(CH3)2SO", "C2H6O1S1", "dimethyl sulfoxide = 1 (CH3)2SO"),
    68: ("CH2=CHCN", "C3H3N1", "acrylonitrile = 1 CH2=CHCN"),
    69: ("Cl(C=C)", "Cl1", "trichloroethylene = 1 CH=C + 3 Cl(C=C)"),
    70: ("C=C", "C2", "2,3-dimethyl-2-butene = 4 CH3 + 1 C=C"),
    71: ("ACF", "C1F1", "fluorobenzene = 5 ACH + 1 ACF"),
    72: ("HCON(CH3)2", "C3H7N1O1", "N,N-dimethylformamide = 1 HCON(CH3)2"),
    73: ("HCON(CH2)2", "C3H5N1O1", "N,N-diethylformamide = 2 CH3 + 1 HCON(CH2)2"),
    74: ("CF3", "C1F3", "perfluorohexane = 2 CF3 + 4 CF2"),
    75: ("CF2", "C1F2", "perfluorohexane = 2 CF3 + 4 CF2"),
    76: ("CF", "C1F1", "perfluoromethylcyclohexane = 1 CF3 + 5 CF2 + 1 CF"),
    77: ("COO", "C1O2", "methyl acrylate = 1 CH3 + 1 CH2=CH + 1 COO"),
}

ORIGINAL = COMMON | {
    14: ("OH", "H1O1", "ethanol = 1 CH3 + 1 CH2 + 1 OH"),
    27: ("FCH2O", "C1H2O1", "tetrahydrofuran = 3 CH2 + 1 FCH2O"),
    37: ("C5H5N", "C5H5N1", "pyridine = 1 C5H5N"),
    38: ("C5H4N", "C5H4N1", "3-methylpyridine = 1 CH3 + 1 C5H4N"),
    39: ("C5H3N", "C5H3N1", "2,3-dimethylpyridine = 2 CH3 + 1 C5H3N"),
    78: ("SiH3", "H3Si1", "methylsilane = 1 CH3 + 1 SiH3"),
    79: ("SiH2", "H2Si1", "diethylsilane = 2 CH3 + 2 CH2 + 1 SiH2"),
    80: ("SiH", "H1Si1", "trimethylsilane = 3 CH3 + 1 SiH"),
    81: ("Si", "Si1", "tetramethylsilane = 4 CH3 + 1 Si"),
    82: ("SiH2O", "H2O1Si1", ""),
    83: ("SiHO", "H1O1Si1", "1,1,3,3-tetramethyldisiloxane = 4 CH3 + 1 SiH + 1 SiHO"),
    84: ("SiO", "O1Si1", "hexamethyldisiloxane = 6 CH3 + 1 Si + 1 SiO"),
    85: ("C5H9NO", "C5H9N1O1", "N-methyl-2-pyrrolidone = 1 C5H9NO"),
    86: ("CCl3F", "C1Cl3F1", "trichlorofluoromethane = 1 CCl3F"),
    87: ("CCl2F", "C1Cl2F1", "tetrachloro-1,2-difluoroethane = 2 CCl2F"),
    88: ("HCCl2F", "C1H1Cl2F1", "dichlorofluoromethane = 1 HCCl2F"),
    89: ("HCClF", "C1H1Cl1F1", "1-chloro-1,2,2,2-tetrafluoroethane = 1 CF3 + 1 HCClF"),
    90: ("CClF2", "C1Cl1F2", "1,2-dichlorotetrafluoroethane = 2 CClF2"),
    91: ("HCClF2", "C1H1Cl1F2", "chlorodifluoromethane = 1 HCClF2"),
    92: ("CClF3", "C1Cl1F3", "chlorotrifluoromethane = 1 CClF3"),
    93: ("CCl2F2", "C1Cl2F2", "dichlorodifluoromethane = 1 CCl2F2"),
    94: ("CONH2", "C1H2N1O1", "acetamide = 1 CH3 + 1 CONH2"),
    95: ("CONHCH3", "C2H4N1O1", "N-methylacetamide = 1 CH3 + 1 CONHCH3"),
    96: ("CONHCH2", "C2H3N1O1", "N-ethylacetamide = 2 CH3 + 1 CONHCH2"),
    97: ("CON(CH3)2", "C3H6N1O1", "N,N-dimethylacetamide = 1 CH3 + 1 CON(CH3)2"),
    98: ("CONCH3CH2", "C3H5N1O1", "N-ethyl-N-methylacetamide = 2 CH3 + 1 CONCH3CH2"),
    99: ("CON(CH2)2", "C3H4N1O1", "N,N-diethylacetamide = 3 CH3 + 1 CON(CH2)2"),
    100: ("C2H5O2", "C2H5O2", "2-ethoxyethanol = 1 CH3 + 1 CH2 + 1 C2H5O2"),
    101: ("C2H4O2", "C2H4O2", "2-ethoxy-1-propanol = 2 CH3 + 1 CH2 + 1 C2H4O2"),
    102: ("CH3S", "C1H3S1", "dimethyl sulfide = 1 CH3 + 1 CH3S"),
    103: ("CH2S", "C1H2S1", "diethyl sulfide = 2 CH3 + 1 CH2 + 1 CH2S"),
    104: ("CHS", "C1H1S1", "diisopropyl sulfide = 4 CH3 + 1 CH + 1 CHS"),
    105: ("C4H9NO", "C4H9N1O1", "morpholine = 1 C4H9NO"),
    106: ("C4H4S", "C4H4S1", "thiophene = 1 C4H4S"),
    107: ("C4H3S", "C4H3S1", "2-methylthiophene = 1 CH3 + 1 C4H3S"),
    108: ("C4H2S", "C4H2S1", "2,3-dimethylthiophene = 2 CH3 + 1 C4H2S"),
    109: ("NCO", "C1N1O1", "butyl isocyanate = 1 CH3 + 3 CH2 + 1 NCO"),
    118: ("(CH2)2SO2", "C2H4O2S1", "sulfolane = 2 CH2 + 1 (CH2)2SO2"),
    119: ("CH2SO2CH", "C2H3O2S1", "2-methylsulfolane = 1 CH3 + 2 CH2 + 1 CH2SO2CH"),
    178: ("imidazolium cation", "", ""),
    179: ("N(SO2CF3)2 anion", "", ""),
}

DORTMUND = COMMON | {
    14: ("OH(p)", "H1O1", "1-propanol = 1 CH3 + 2 CH2 + 1 OH(p)"),
    81: ("OH(s)", "H1O1", "2-propanol = 2 CH3 + 1 CH + 1 OH(s)"),
    82: ("OH(t)", "H1O1", "tert-butanol = 3 CH3 + 1 C + 1 OH(t)"),
    27: ("c-CH2OCH2", "C2H4O1", "tetrahydrofuran = 2 c-CH2 + 1 c-CH2OCH2"),
    37: ("AC2H2N", "C2H2N1", "pyridine = 3 ACH + 1 AC2H2N"),
    38: ("AC2HN", "C2H1N1", "2-methylpyridine = 1 CH3 + 3 ACH + 1 AC2HN"),
    39: ("AC2N", "C2N1", "2,6-dimethylpyridine = 2 CH3 + 3 ACH + 1 AC2N"),
    78: ("c-CH2", "C1H2", "cyclohexane = 6 c-CH2"),
    79: ("c-CH", "C1H1", "methylcyclohexane = 1 CH3 + 5 c-CH2 + 1 c-CH"),
    80: ("c-C", "C1", "1,1-dimethylcyclohexane = 2 CH3 + 5 c-CH2 + 1 c-C"),
    83: ("c-CH2O[CH2]1/2", "C1.5H3O1", "1,3-dioxolane = 2 c-CH2O[CH2]1/2"),
    84: ("c-[CH2]1/2O[CH2]1/2", "C1H2O1", "1,3,5-trioxane = 3 c-[CH2]1/2O[CH2]1/2"),
    85: ("CNH2", "C1H2N1", "tert-butylamine = 3 CH3 + 1 CNH2"),
    86: ("c-CONCH3", "C2H3N1O1", "N-methyl-2-pyrrolidone = 3 c-CH2 + 1 c-CONCH3"),
    87: ("c-CONCH2", "C2H2N1O1", "N-ethyl-2-pyrrolidone = 1 CH3 + 3 c-CH2 + 1 c-CONCH2"),
    88: ("c-CONCH", "C2H1N1O1", "N-isopropyl-2-pyrrolidone = 2 CH3 + 3 c-CH2 + 1 c-CONCH"),
    89: ("c-CONC", "C2N1O1", "N-tert-butyl-2-pyrrolidone = 3 CH3 + 3 c-CH2 + 1 c-CONC"),
    91: ("CONH2", "C1H2N1O1", "acetamide = 1 CH3 + 1 CONH2"),
    92: ("CONHCH3", "C2H4N1O1", "N-methylacetamide = 1 CH3 + 1 CONHCH3"),
    93: ("HCONHCH3", "C2H5N1O1", "N-methylformamide = 1 HCONHCH3"),
    94: ("HCONHCH2", "C2H4N1O1", "N-ethylformamide = 1 CH3 + 1 HCONHCH2"),
    100: ("CONHCH2", "C2H3N1O1", "N-ethylacetamide = 2 CH3 + 1 CONHCH2"),
    101: ("CON(CH3)2", "C3H6N1O1", "N,N-dimethylacetamide = 1 CH3 + 1 CON(CH3)2"),
    102: ("CONCH3CH2", "C3H5N1O1", "N-ethyl-N-methylacetamide = 2 CH3 + 1 CONCH3CH2"),
    103: ("CON(CH2)2", "C3H4N1O1", "N,N-diethylacetamide = 3 CH3 + 1 CON(CH2)2"),
    104: ("AC2H2S", "C2H2S1", "thiophene = 2 ACH + 1 AC2H2S"),
    105: ("AC2HS", "C2H1S1", "2-methylthiophene = 1 CH3 + 2 ACH + 1 AC2HS"),
    106: ("AC2S", "C2S1", "2,5-dimethylthiophene = 2 CH3 + 2 ACH + 1 AC2S"),
    107: ("c-CH2OCH", "C2H3O1", "propylene oxide = 1 CH3 + 1 c-CH2OCH"),
    108: ("c-COCH", "C2H1O1", "2,3-epoxy-2-methylbutane = 3 CH3 + 1 c-COCH"),
    109: ("c-CHOCH", "C2H2O1", "2,3-epoxybutane = 2 CH3 + 1 c-CHOCH"),
    110: ("(CH2)2SO2", "C2H4O2S1", "sulfolane = 2 c-CH2 + 1 (CH2)2SO2"),
    111: ("CH2SO2CH", "C2H3O2S1", ""),
    112: ("(CH3)2CO3", "C3H6O3", "dimethyl carbonate = 1 (CH3)2CO3"),
    113: ("(CH2)2CO3", "C3H4O3", "diethyl carbonate = 2 CH3 + 1 (CH2)2CO3"),
    114: ("CH2CH3CO3", "C3H5O3", "ethyl methyl carbonate = 1 CH3 + 1 CH2CH3CO3"),
    119: ("c-CH2OCH2 (epoxide)", "C2H4O1", "ethylene oxide = 1 c-CH2OCH2 (epoxide)"),
    122: ("CH3S", "C1H3S1", "dimethyl sulfide = 1 CH3 + 1 CH3S"),
    123: ("CH2S", "C1H2S1", "diethyl sulfide = 2 CH3 + 1 CH2 + 1 CH2S"),
    124: ("CHS", "C1H1S1", "diisopropyl sulfide = 4 CH3 + 1 CH + 1 CHS"),
    153: ("c-CH2OC", "C2H2O1", "isobutylene oxide = 2 CH3 + 1 c-CH2OC"),
    178: ("C3H2N2 cation", "", ""),
    184: ("C3H3N2 cation", "", ""),
    189: ("C4H8N cation", "", ""),
    195: ("BF4 anion", "", ""),
    196: ("C5H5N cation", "", ""),
    197: ("CF3SO3 anion", "", ""),
    201: ("SS", "S2", "dimethyl disulfide = 2 CH3 + 1 SS"),
    209: ("SO4 anion", "", ""),
    210: ("HSO4 anion", "", ""),
    211: ("PF6 anion", "", ""),
    220: ("C5H4N cation", "", ""),
}

MAIN_COMMON = {
    1: "CH2", 2: "C=C", 3: "ACH", 4: "ACCH2", 5: "OH", 6: "CH3OH", 7: "H2O", 8: "ACOH", 9: "CH2CO", 10: "CHO",
    11: "CCOO", 12: "HCOO", 13: "CH2O", 14: "CNH2", 15: "CNH", 16: "(C)3N", 17: "ACNH2", 18: "pyridine", 19: "CCN",
    20: "COOH", 21: "CCl", 22: "CCl2", 23: "CCl3", 24: "CCl4", 25: "ACCl", 26: "CNO2", 27: "ACNO2", 28: "CS2",
    29: "CH3SH", 30: "furfural", 31: "(CH2OH)2", 32: "I", 33: "Br", 34: "C≡C", 35: "(CH3)2SO", 36: "acrylonitrile",
    37: "Cl(C=C)", 38: "ACF", 39: "HCON(CH2)2", 40: "CF2", 41: "COO",
}
MAIN_ORIGINAL = MAIN_COMMON | {
    42: "SiH2", 43: "SiO", 44: "N-methylpyrrolidone", 45: "CClF", 46: "CON", 47: "OCCOH", 48: "CH2S", 49: "morpholine",
    50: "thiophene", 51: "NCO", 55: "sulfone", 84: "imidazolium", 85: "N(SO2CF3)2",
}
MAIN_DORTMUND = MAIN_COMMON | {
    42: "c-CH2", 43: "c-CH2O", 44: "HCOOH", 45: "CHCl3", 46: "c-CONC", 47: "CONR", 48: "CONR2", 49: "HCONR",
    50: "main group 50", 52: "ACS", 53: "epoxide", 55: "carbonate", 56: "sulfone", 61: "sulfide", 77: "main group 77",
    84: "imidazolium", 85: "N(SO2CF3)2", 87: "pyrrolidinium", 89: "BF4", 90: "pyridinium", 91: "CF3SO3",
    93: "disulfide", 98: "SO4", 99: "PF6",
}

ORIGINAL_SOURCES = [
    "Fredenslund, Jones, Prausnitz, AIChE J. 21 (1975) 1086-1099, doi:10.1002/aic.690210607",
    "Gmehling, Rasmussen, Fredenslund, Ind. Eng. Chem. Process Des. Dev. 21 (1982) 118-127, doi:10.1021/i200016a021 (DOI from memory)",
    "Macedo, Weidlich, Gmehling, Rasmussen, Ind. Eng. Chem. Process Des. Dev. 22 (1983) 676-678, doi:10.1021/i200023a023 (DOI from memory)",
    "Tiegs, Gmehling, Rasmussen, Fredenslund, Ind. Eng. Chem. Res. 26 (1987) 159-161, doi:10.1021/ie00061a030 (DOI from memory)",
    "Hansen, Rasmussen, Fredenslund, Schiller, Gmehling, Ind. Eng. Chem. Res. 30 (1991) 2352-2355, doi:10.1021/ie00058a017 (DOI from memory)",
    "Wittig, Lohmann, Gmehling, Ind. Eng. Chem. Res. 42 (2003) 183-188, doi:10.1021/ie020506l (DOI from memory)",
]
DORTMUND_SOURCES = [
    "Weidlich, Gmehling, Ind. Eng. Chem. Res. 26 (1987) 1372-1381, doi:10.1021/ie00067a018 (DOI from memory)",
    "Gmehling, Li, Schiller, Ind. Eng. Chem. Res. 32 (1993) 178-193, doi:10.1021/ie00013a024 (DOI from memory)",
    "Gmehling, Lohmann, Jakob, Li, Joh, Ind. Eng. Chem. Res. 37 (1998) 4876-4882, doi:10.1021/ie980347z (DOI from memory)",
    "Gmehling, Wittig, Lohmann, Joh, Ind. Eng. Chem. Res. 41 (2002) 1678-1688, doi:10.1021/ie0108043 (DOI from memory)",
    "Jakob, Grensemann, Lohmann, Gmehling, Ind. Eng. Chem. Res. 45 (2006) 7924-7933, doi:10.1021/ie060355c",
]
DORTMUND_2016_SOURCES = DORTMUND_SOURCES + [
    "Hector, Gmehling, Fluid Phase Equilib. 371 (2014) 82-92, doi:10.1016/j.fluid.2014.03.006 (ionic-liquid groups)",
    "Constantinescu, Gmehling, J. Chem. Eng. Data 61 (2016) 2738-2748, doi:10.1021/acs.jced.6b00136 (DOI from memory)",
]


def number(value):
    text = repr(float(value))
    return text.removesuffix(".0")


def cell(text):
    return f'"{text}"' if "," in text else text


def write(path, title, sources, notes, checked, columns, units, rows):
    with open(path, "w", encoding="utf-8", newline="\n") as out:
        out.write(f"# title: {title}\n")
        for source in sources:
            out.write(f"# source: {source}\n")
        out.write(f"# transcribed: {DATE}; {VIA}\n")
        out.write(f"# checked: {checked}\n")
        for note in notes:
            out.write(f"# note: {note}\n")
        for row in [columns, units, *rows]:
            out.write(",".join(cell(str(value)) for value in row) + "\n")


def mains(*tables):
    return {i for t in tables for i in t} | {j for t in tables for row in t.values() for j in row}


def main_groups(path, title, names, used, sources, notes):
    assert used == set(names), used ^ set(names)
    write(path, title, sources, notes, "every main group of a subgroup or an interaction is listed",
          ["number", "name"], ["-", "-"], [(k, names[k]) for k in sorted(names)])


def subgroups(path, title, table, ours, sources, notes):
    assert set(table) == set(ours), set(table) ^ set(ours)
    rows = [(k, table[k].main_group_id, ours[k][0], ours[k][1], number(table[k].R), number(table[k].Q), ours[k][2])
            for k in sorted(table)]
    write(path, title, sources, notes, "R and Q as circulated, not compared with the print; formulas and atoms are ours",
          ["number", "main_group", "formula", "composition", "r", "q", "example"], ["-"] * 7, rows)


def pairs(table):
    return [(i, j) for i in sorted(table) for j in sorted(table[i])]


IONS = "ions of ionic liquids (composition blank) are kept for their numbers; no neutral molecule holds them"
PRESENT = "a pair that is not listed was not published; a listed zero is a value"

folder = "groups/unifac"
main_groups(f"{folder}/main_groups.csv", "UNIFAC: main groups", MAIN_ORIGINAL,
            mains(UFIP) | {s.main_group_id for s in UFSG.values()}, ORIGINAL_SOURCES, [])
subgroups(f"{folder}/subgroups.csv", "UNIFAC: subgroups with volume R and surface area Q", UFSG, ORIGINAL,
          ORIGINAL_SOURCES, [
              "FCH2O (27) is the ring CH2O of tetrahydrofuran; its F is no fluorine",
              IONS])
write(f"{folder}/interactions.csv", "UNIFAC: group interaction parameters", ORIGINAL_SOURCES, [PRESENT],
      "as circulated; the worked examples of three textbooks are reproduced (tests/data/mixture)",
      ["i", "j", "a"], ["-", "-", "K"], [(i, j, number(UFIP[i][j])) for i, j in pairs(UFIP)])

folder = "groups/unifac-dortmund"
main_groups(f"{folder}/main_groups.csv", "Modified UNIFAC (Dortmund): main groups", MAIN_DORTMUND,
            mains(DOUFIP2006, DOUFIP2016) | {s.main_group_id for s in DOUFSG.values()}, DORTMUND_2016_SOURCES,
            ["main groups 50 and 77 have interactions in the 2016 list, but neither name nor subgroups were at hand",
             "main group 85 has interactions, but no subgroup in the transcribed list"])
subgroups(f"{folder}/subgroups.csv", "Modified UNIFAC (Dortmund): subgroups with volume R and surface area Q", DOUFSG,
          DORTMUND, DORTMUND_2016_SOURCES, [
              "27 covers c-CH2OCH2: R is too large for CH2O alone, and tetrahydrofuran is 27 with two 78",
              "83 covers c-CH2O and half of the CH2 shared between two oxygens (1,3-dioxolane is two 83); "
              "84 covers O and half of the CH2 on either side (1,3,5-trioxane is three 84)",
              "86 to 89: R and Q are as large as those of whole pyrrolidones; taken as the ring amide alone, "
              "beside three c-CH2, because measured ln gamma at infinite dilution of 92 solute-solvent states agree "
              "within 0.34 on average that way and miss by 2.86 the other way",
              IONS])
for year, table, sources in (("2006", DOUFIP2006, DORTMUND_SOURCES), ("2016", DOUFIP2016, DORTMUND_2016_SOURCES)):
    write(f"{folder}/interactions-{year}.csv", f"Modified UNIFAC (Dortmund): group interaction parameters, state of {year}",
          sources, [PRESENT, "values as circulated; slips.csv says which of them are replaced"],
          "as circulated; not compared with the print", ["i", "j", "a", "b", "c"], ["-", "-", "K", "-", "1/K"],
          [(i, j, *(number(v) for v in table[i][j])) for i, j in pairs(table)])

CHECK_SLIPS = "the circulated values below are those of the interaction file (compared when the tables are read)"
COLUMNS = ["interactions", "i", "j"]
write("groups/unifac/slips.csv", "UNIFAC: suspected slips of the interaction parameters", ORIGINAL_SOURCES,
      ["`used` blank: suspicious, but nothing better is known; the circulated value is used"], CHECK_SLIPS,
      COLUMNS + ["a", "a_used", "reason", "evidence"], ["-", "-", "-", "K", "K", "-", "-"],
      [("interactions", 7, 25, number(UFIP[7][25]), "",
        "gives infinite-dilution activity coefficients of chlorobenzenes in water about 6 too low in ln",
        "measured solubilities of chlorobenzenes; value not compared with the print"),
       ("interactions", 25, 7, number(UFIP[25][7]), "",
        "gives infinite-dilution activity coefficients of chlorobenzenes in water about 6 too low in ln",
        "measured solubilities of chlorobenzenes; value not compared with the print"),
       ("interactions", 8, 24, number(UFIP[8][24]), "",
        "gives the infinite-dilution activity coefficient of phenol in tetrachloromethane about 17 too high in ln",
        "measured infinite-dilution activity coefficients; value not compared with the print"),
       ("interactions", 24, 8, number(UFIP[24][8]), "",
        "gives the infinite-dilution activity coefficient of phenol in tetrachloromethane about 17 too high in ln",
        "measured infinite-dilution activity coefficients; value not compared with the print")])
WHY = ("gives ln gamma of cycloalkanes in pyridine of -17 to -168 at infinite dilution (measured +0.8 to +1.9); "
       "the pair is replaced as a whole by that of 2006")
EVIDENCE = ("six measured ln gamma at infinite dilution: mean error 0.26 with the pair of 2006 and 0.23 with a tenth of a and b; "
            "excess enthalpy of tetrahydrofuran and pyridine 111 J/mol against 502 J/mol (measured: tens); the pair of 2006 was printed")
write("groups/unifac-dortmund/slips.csv", "Modified UNIFAC (Dortmund): suspected slips of the interaction parameters",
      DORTMUND_2016_SOURCES, ["used values from interactions-2006.csv (Jakob et al. 2006)"], CHECK_SLIPS,
      COLUMNS + ["a", "b", "c", "a_used", "b_used", "c_used", "reason", "evidence"],
      ["-", "-", "-", "K", "-", "1/K", "K", "-", "1/K", "-", "-"],
      [("interactions-2016", i, j, *(number(v) for v in DOUFIP2016[i][j]), *(number(v) for v in DOUFIP2006[i][j]),
        WHY, EVIDENCE) for i, j in ((18, 42), (42, 18))])
