//! Judging finds out no more than it takes, and comes to what a full evaluation
//! comes to: the same verdicts, reasons and figures.

use std::collections::BTreeSet;
use std::sync::Arc;

use groupsmith::brief::{Brief, Job};
use groupsmith::evaluate::{CATALOG, EstimateLevel, Library, Plan, Scratch, Verdict};
use groupsmith::mixture::Slips;
use groupsmith::quantity::{Estimate, Property};

const MIXTURE: &str = "[mixture]\ncomponents = [\"acetone\", \"methanol\"]\n\
    fractions = [0.78, 0.22]\ntemperature = \"328.5 K\"\npressure = \"101.325 kPa\"\n\
    solvent_to_feed = 1.5\n[pool]\nfile = \"-\"\n";

/// Solvents, the too volatile and the too heavy, melting ones, halogens without a flash
/// point, what older methods or group sets do not know, what no fit knows, and a chain
/// that is larger than anything of the fits.
const MOLECULES: [&str; 34] = [
    "CCCCO",
    "OCCO",
    "Cc1ccccc1",
    "CC(=O)OCC",
    "O",
    "C",
    "CCC",
    "CC(C)=O",
    "CO",
    "CS(C)=O",
    "CN1CCCC1=O",
    "C1CCNCC1",
    "CCN(CC)CCO",
    "OCC(O)CO",
    "c1ccc2ccccc2c1",
    "c1ccc(-c2ccccc2)cc1",
    "OC(=O)c1ccccc1",
    "CCCCCCCCCCCCCCCC",
    "ClC(Cl)(Cl)Cl",
    "FC(F)(F)C(F)(F)F",
    "BrCCBr",
    "C[N+](C)(C)C",
    "C[Si](C)(C)C",
    "CP(=O)(OC)OC",
    "C1=CC(=O)C=CC1=O",
    "C[S+]([O-])C",
    "CC#N",
    "S=C=S",
    "[2H]OC",
    "C/C=C/C",
    "C/C=C\\C",
    "N#CC1(C#N)C2CC1C2",
    "B(O)O",
    "IC1CC1I",
];

fn target(figure: &str, rest: &str) -> String {
    format!("[[target]]\nfigure = \"{figure}\"\n{rest}\n")
}

/// Musts and wishes of every kind, in orders in which a cheap one comes first and last.
fn briefs() -> Vec<String> {
    let boils = target("boiling_point", "at_least = \"367 K\"\nat_most = \"480 K\"");
    let melts = target("melting_point", "at_most = \"292 K\"");
    let volatility = target(
        "relative_volatility_infinite_dilution",
        "prefer = \"high\"\nworst = 1.5\nbest = 5.0",
    );
    let pressure = target(
        "vapor_pressure",
        "temperature = \"350 K\"\nprefer = \"low\"\nworst = \"50 kPa\"\nbest = \"5 kPa\"",
    );
    let flash = target("flash_point", "at_least = \"300 K\"");
    let dense = target(
        "liquid_density",
        "at_most = \"950 kg/m3\"\ntemperature = \"350 K\"",
    );
    let dense_here = target("liquid_density", "at_most = \"950 kg/m3\"");
    let thin = target("liquid_viscosity", "at_most = \"1 mPa s\"");
    let partition = target("log_p_octanol_water", "at_least = 0.5");
    let polar = target("hansen_polar", "at_most = \"9 MPa^0.5\"");
    let alone = target("gamma_infinity_of_candidate", "at_most = 3.0");
    let with_solvent = target("relative_volatility_with_solvent", "at_least = 1.2");
    let heat = target("ideal_gas_enthalpy_of_formation", "at_most = \"0 kJ/mol\"");
    let fusion = target("enthalpy_of_fusion", "at_most = \"20 kJ/mol\"");
    let tension = target("surface_tension", "at_most = \"40 mN/m\"");
    [
        ["", &boils, &melts, &volatility, &pressure],
        ["", &melts, &boils, &pressure, ""],
        ["", &partition, &flash, &boils, &volatility],
        ["", &dense, &boils, &polar, &melts],
        ["", &dense_here, &thin, &heat, &fusion],
        ["", &with_solvent, &boils, &melts, ""],
        ["", &boils, &alone, &tension, &with_solvent],
        [
            "[ranking]\nconfidence = 0\n",
            &boils,
            &melts,
            &dense_here,
            &volatility,
        ],
        [
            "[structure]\nforbidden_elements = [\"Cl\"]\n",
            &heat,
            &boils,
            &flash,
            &polar,
        ],
    ]
    .map(|parts| format!("{MIXTURE}{}", parts.concat()))
    .to_vec()
}

/// Boiling points and densities of somebody's own, now and then.
fn own(at: usize) -> Vec<(Property, Estimate)> {
    let measured = |value: f64| Estimate {
        status: groupsmith::quantity::Status::Measured,
        ..Estimate::new(value, "measured")
    };
    match at % 5 {
        0 => vec![(Property::BoilingPoint, measured(400.0))],
        1 => vec![(Property::LiquidDensity, measured(900.0).at(313.15))],
        _ => Vec::new(),
    }
}

fn kind(verdict: &Verdict) -> &'static str {
    match verdict {
        Verdict::Qualified { .. } => "qualified",
        Verdict::Missed { .. } => "missed",
        Verdict::NotAssessable { .. } => "not assessable",
    }
}

#[test]
fn judging_comes_to_what_a_full_evaluation_comes_to() {
    let mut kinds = BTreeSet::new();
    let mut spared = 0;
    for level in EstimateLevel::ALL {
        let library = Arc::new(Library::built_in(Slips::Corrected).with_level(level));
        for use_measured in [true, false] {
            for text in briefs() {
                let brief = Brief::read_for(&text, "brief.toml", &CATALOG, Job::Screen)
                    .unwrap_or_else(|faults| panic!("{faults}"));
                let plan = Plan::new(Arc::clone(&library), brief, use_measured).unwrap();
                let (mut full, mut brisk) = (Scratch::new(), Scratch::new());
                let long = "C".repeat(121);
                for (at, smiles) in MOLECULES.into_iter().chain([long.as_str()]).enumerate() {
                    let own = own(at);
                    let Ok(wanted) = plan.evaluate_with(&mut full, smiles, &own) else {
                        assert!(plan.judge(&mut brisk, smiles, &own).is_err(), "{smiles}");
                        continue;
                    };
                    let judged = plan.judge(&mut brisk, smiles, &own).unwrap();
                    assert_eq!(judged, wanted, "{smiles} {level:?}\n{text}");
                    kinds.insert(kind(&judged));
                    let asked = plan.targets.iter().map(|target| target.figure);
                    for figure in asked.filter(|_| kind(&judged) == "qualified") {
                        let value = |scratch: &Scratch| {
                            let found = scratch.figures[figure].clone();
                            found.map(|found| (found.value, found.interval))
                        };
                        assert_eq!(value(&brisk), value(&full), "{smiles}\n{text}");
                    }
                    let found = |scratch: &Scratch| {
                        scratch
                            .figures
                            .iter()
                            .filter(|figure| figure.is_ok())
                            .count()
                    };
                    assert!(found(&brisk) <= found(&full));
                    spared += found(&full) - found(&brisk);
                    // a candidate leaves nothing behind for the next one
                    assert_eq!(
                        plan.evaluate_with(&mut brisk, smiles, &own).unwrap(),
                        wanted
                    );
                    assert_eq!(brisk.figures, full.figures, "{smiles}\n{text}");
                }
            }
        }
    }
    assert_eq!(kinds.len(), 3, "{kinds:?}");
    assert!(spared > 5_000, "{spared}");
}
