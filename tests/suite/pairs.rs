//! Measured data of pairs: the form of the tables, what they are converted to,
//! what is refused, and what `mixture` and `screen` make of them.

use groupsmith::chem::{Keys, Reader};
use groupsmith::data::pairs::{
    ActivityParameters, PairIdentity, PairModel, PairParameters, PairTables, Pairs,
};
use groupsmith::data::{Substances, TableText};
use groupsmith::quantity::Flag;
use proptest::prelude::*;

use crate::workbench::{Bench, csv_rows, repository, say};

const GAMMA: &str = "solute,solvent,gamma_infinity,temperature,uncertainty,source\n-,-,-,K,-,-\n";
const VOLUME: &str = "first,second,a0,a1,a2,temperature,x1_low,x1_high,source\n\
-,-,cm3/mol,cm3/mol,cm3/mol,K,-,-,-\n";
const ACTIVITY: &str = "first,second,model,convention,unit,a12,a21,dependence,b12,b21,alpha,\
volume1,volume2,r1,q1,r2,q2,low,high,source\n\
-,-,-,-,-,-,-,-,-,-,-,cm3/mol,cm3/mol,-,-,-,-,K,K,-\n";

fn substances() -> &'static Substances {
    static BUILT_IN: std::sync::OnceLock<Substances> = std::sync::OnceLock::new();
    BUILT_IN.get_or_init(|| Substances::built_in().unwrap())
}

fn read(gamma: &str, volume: &str, activity: &str) -> Result<Pairs, String> {
    let texts = [(GAMMA, gamma), (VOLUME, volume), (ACTIVITY, activity)]
        .map(|(head, rows)| format!("{head}{rows}"));
    let file = |at: usize, file| {
        let text = &*texts[at];
        Some(TableText { file, text })
    };
    let tables = PairTables {
        gamma_infinity: file(0, "gamma_infinity.csv"),
        excess_volume: file(1, "excess_volume.csv"),
        activity_parameters: file(2, "activity_parameters.csv"),
    };
    Pairs::read(substances(), &tables).map_err(|error| error.to_string())
}

fn sound(gamma: &str, volume: &str, activity: &str) -> Pairs {
    read(gamma, volume, activity).unwrap_or_else(|faults| panic!("{faults}"))
}

fn keys(smiles: &str) -> Keys {
    let molecule = Reader::new().read(smiles).unwrap();
    groupsmith::chem::Canonicalizer::new().keys(&molecule)
}

fn identity(pairs: &Pairs, smiles: &str) -> PairIdentity {
    pairs.identify(&keys(smiles))
}

// -------------------------------------------------------------------- the form

#[test]
fn substances_are_named_by_name_number_or_smiles() {
    let pairs = sound(
        "ethanol,water,3.9,298.15,0.05,A. Author\n64-17-5,O,4.1,313.15,,A. Author\n\
         CCCCCCCCCCCCCCCCCCCCN,water,1e6,300,,A. Author\n",
        "",
        "",
    );
    assert_eq!(pairs.iter().count(), 2);
    let [ethanol, water] = ["CCO", "O"].map(|smiles| identity(&pairs, smiles));
    let at = |t: f64| pairs.gamma_infinity(&ethanol, &water, t).unwrap();
    let found = at(298.15).unwrap();
    assert!((found.value - 3.9f64.ln()).abs() < 1e-12);
    assert_eq!(
        found.to_string(),
        "at 298.15 K, ln gamma to 0.05 (A. Author)"
    );
    assert!((at(316.0).unwrap().value - 4.1f64.ln()).abs() < 1e-12);
    assert_eq!(
        at(316.2).unwrap_err().to_string(),
        "gamma infinity is measured at 298.15 K, 313.15 K only"
    );
    assert!(pairs.gamma_infinity(&water, &ethanol, 298.15).is_none());
    assert!(identity(&pairs, "CCC").is_empty());
    let amine = identity(&pairs, "NCCCCCCCCCCCCCCCCCCCC");
    assert!(pairs.gamma_infinity(&amine, &water, 300.0).is_some());
}

/// ln γ∞ is linear in 1/T where the partial excess enthalpy is constant.
#[test]
fn between_temperatures_ln_gamma_is_linear_in_the_inverse() {
    let rows = "ethanol,water,3,300,,a\nethanol,water,5,320,,b\n";
    let pairs = sound(rows, "", "");
    let [ethanol, water] = ["CCO", "O"].map(|smiles| identity(&pairs, smiles));
    let middle = 2.0 / (1.0 / 300.0 + 1.0 / 320.0);
    let found = pairs
        .gamma_infinity(&ethanol, &water, middle)
        .unwrap()
        .unwrap();
    assert!((found.value - 15f64.ln() / 2.0).abs() < 1e-12);
    assert_eq!(found.to_string(), "between 300 K and 320 K (a; b)");
}

#[test]
fn a_stereoisomer_answers_where_the_molecule_itself_does_not() {
    let pairs = sound(
        "C[C@H](O)CC,water,20,298.15,,a\nCCC(C)O,toluene,9,298.15,,a\n",
        "",
        "",
    );
    let [right, left, water, toluene] =
        ["C[C@H](O)CC", "C[C@@H](O)CC", "O", "Cc1ccccc1"].map(|smiles| identity(&pairs, smiles));
    let at = |solute, solvent| {
        pairs
            .gamma_infinity(solute, solvent, 298.15)
            .unwrap()
            .unwrap()
    };
    let other = |flags: groupsmith::quantity::Flags| flags.contains(Flag::OtherStereoisomer);
    assert!(!other(at(&right, &water).flags));
    assert!(other(at(&left, &water).flags));
    // Named in one pair, and still found by its constitution in another.
    assert!(other(at(&right, &toluene).flags));
}

// ----------------------------------------------------------------- conversions

fn only(pairs: &Pairs) -> &ActivityParameters {
    let mut all = pairs.iter();
    let entry = all.next().unwrap();
    assert!(all.next().is_none());
    &entry.activity_parameters()[0]
}

fn parameters(row: &str) -> PairParameters {
    only(&sound("", "", &format!("{row}\n"))).parameters
}

fn assert_same(a: PairParameters, b: PairParameters) {
    for t in [280.0, 353.15] {
        let [a, b] = [a, b].map(|set| set.ln_gamma_infinity(t));
        for (a, b) in a.into_iter().zip(b) {
            assert!((a - b).abs() < 1e-9 * a.abs().max(1.0), "{a} {b}");
        }
    }
}

/// Energies in cal/mol, J/mol and K, turned by hand: 1 cal = 4.184 J, R = 8.31446261815324 J/(mol K).
#[test]
fn the_unit_of_an_energy_does_not_matter() {
    const R: f64 = 8.314_462_618_153_24;
    let sets: [(&str, &str); 4] = [
        ("wilson,lambda12-lambda11", ",76.92,18.07,,,,"),
        ("nrtl,g12-g22", "0.3,,,,,,"),
        ("uniquac,u12-u22", ",,,2.1055,1.972,0.92,1.4"),
        ("margules-2,energy", ",,,,,,"),
    ];
    for (model, rest) in sets {
        let of = |unit: &str, per_cal: f64| {
            let (a12, a21) = (437.98 * per_cal, 1238.0 * per_cal);
            let (b12, b21) = (-0.25 * per_cal, 0.5 * per_cal);
            let row = format!(
                "2-propanol,water,{model},{unit},{a12},{a21},a+bT,{b12},{b21},{rest},300,360,a"
            );
            parameters(&row)
        };
        let cal = of("cal/mol", 1.0);
        assert_same(cal, of("J/mol", 4.184));
        assert_same(cal, of("K", 4.184 / R));
    }
}

#[test]
fn the_base_of_the_logarithm_does_not_matter() {
    for model in ["margules-2", "van-laar"] {
        // van Laar constants of ethanol and water (from memory of the collections)
        let of = |base: &str, scale: f64| {
            let (a12, a21) = (1.6798 * scale, 0.9227 * scale);
            let b = 30.0 * scale;
            parameters(&format!(
                "ethanol,water,{model},{base},-,{a12},{a21},a+b/T,{b},{b},,,,,,,,300,360,a"
            ))
        };
        let ln = of("ln", 1.0);
        assert_same(ln, of("log10", std::f64::consts::LOG10_E));
        let [first, second] = ln.ln_gamma_infinity(300.0);
        assert!((first - 1.7798).abs() < 1e-12 && (second - 1.0227).abs() < 1e-12);
    }
}

/// J. M. Smith, H. C. Van Ness, M. M. Abbott, Introduction to Chemical Engineering Thermodynamics, Wilson
/// example of 2-propanol (1) and water (2) at 353.15 K: a12 = 437.98, a21 = 1238.00 cal/mol, V1 = 76.92, V2 =
/// 18.07 cm3/mol give Λ12 = 0.1258, Λ21 = 0.7292 (from memory; R there is 1.987 cal/(mol K)).
#[test]
fn wilson_parameters_are_those_of_a_printed_example() {
    let row = "2-propanol,water,wilson,lambda12-lambda11,cal/mol,437.98,1238.00,,,,,76.92,18.07,,,,,298.15,373.15,a";
    let found = parameters(row);
    let PairParameters::Wilson {
        ln_lambda12,
        ln_lambda21,
    } = found
    else {
        panic!("{found:?}");
    };
    assert!((ln_lambda12.at(353.15).exp() - 0.1258).abs() < 2e-4);
    assert!((ln_lambda21.at(353.15).exp() - 0.7292).abs() < 2e-4);
    let factors = "2-propanol,water,wilson,Lambda12,-,0.1258,0.7292,,,,,,,,,,,353.15,353.15,a";
    let [a, b] = [found, parameters(factors)].map(|set| set.ln_gamma_infinity(353.15));
    assert!(
        (a[0] - b[0]).abs() < 1e-3 && (a[1] - b[1]).abs() < 1e-3,
        "{a:?} {b:?}"
    );
}

/// The same book's NRTL set of methanol (1) and water (2): b12 = -253.88, b21 = 845.21 cal/mol, alpha = 0.2994
/// (from memory); its R is 1.987 cal/(mol K).
#[test]
fn nrtl_numbers_are_energies_over_rt() {
    let energies =
        "methanol,water,nrtl,g12-g22,cal/mol,-253.88,845.21,,,,0.2994,,,,,,,298.15,373.15,a";
    let rt: f64 = 1.987_204_258_640_83 * 340.0;
    let (tau12, tau21) = (-253.88 / rt, 845.21 / rt);
    let numbers = format!("methanol,water,nrtl,tau12,-,{tau12},{tau21},,,,0.2994,,,,,,,340,340,a");
    let [a, b] =
        [parameters(energies), parameters(&numbers)].map(|set| set.ln_gamma_infinity(340.0));
    assert!((a[0] - b[0]).abs() < 1e-9 && (a[1] - b[1]).abs() < 1e-9);
    // τ21 + τ12 exp(−α τ12), by hand
    assert!((a[0] - (tau21 + tau12 * (-0.2994 * tau12).exp())).abs() < 1e-9);
}

#[test]
fn parameters_come_in_the_order_asked_for() {
    let rows = "ethanol,water,van-laar,ln,-,1.6798,0.9227,,,,,,,,,,,298,320,low\n\
                water,ethanol,van-laar,ln,-,0.95,1.7,,,,,,,,,,,320,360,high\n\
                ethanol,water,nrtl,tau12,-,-0.1,1.5,,,,0.3,,,,,,,298,360,a\n";
    let pairs = sound("", "", rows);
    let [ethanol, water] = ["CCO", "O"].map(|smiles| identity(&pairs, smiles));
    let limits = |first, second| -> Vec<[f64; 2]> {
        let found = pairs
            .activity_parameters(first, second, PairModel::VanLaar)
            .unwrap();
        let sets = found.sets.iter();
        sets.map(|set| set.parameters.ln_gamma_infinity(320.0))
            .collect()
    };
    assert_eq!(limits(&ethanol, &water), [[1.6798, 0.9227], [1.7, 0.95]]);
    assert_eq!(limits(&water, &ethanol), [[0.9227, 1.6798], [0.95, 1.7]]);
    let of = |model| pairs.activity_parameters(&ethanol, &water, model);
    assert!(of(PairModel::Nrtl).is_some() && of(PairModel::Uniquac).is_none());
}

proptest! {
    /// A row turned around, odd coefficients with their sign changed, is the same volume.
    #[test]
    fn the_order_of_an_excess_volume_does_not_matter(
        a in prop::array::uniform3(-5.0..5.0f64), x in 0.1..0.9f64, t in 295.0..318.0f64,
    ) {
        let [a0, a1, a2] = a;
        let rows = format!(
            "ethanol,water,{a0},{a1},{a2},298.15,0.1,0.9,a\nethanol,water,{a0},,,313.15,0,1,a\n"
        );
        let turned = format!(
            "water,ethanol,{a0},{},{a2},298.15,0.1,0.9,a\nwater,ethanol,{a0},,,313.15,0,1,a\n", -a1
        );
        let [one, other] = [rows, turned].map(|rows| sound("", &rows, ""));
        let at = |pairs: &Pairs, first: &str, second: &str, x1: f64| {
            let [first, second] = [first, second].map(|smiles| identity(pairs, smiles));
            pairs.excess_volume(&first, &second, x1, t).unwrap().unwrap().value
        };
        let value = at(&one, "CCO", "O", x);
        prop_assert!((value - at(&one, "O", "CCO", 1.0 - x)).abs() < 1e-18);
        prop_assert!((value - at(&other, "CCO", "O", x)).abs() < 1e-18);
        if t < 298.15 {
            let by_hand = 1e-6 * x * (1.0 - x) * (a0 + a1 * (2.0 * x - 1.0) + a2 * (2.0 * x - 1.0).powi(2));
            prop_assert!((value - by_hand).abs() < 1e-18);
        }
    }

    /// Turned twice, parameters are what they were; turned once, the limits change places.
    ///
    /// Energies below -250 K would take ln gamma out of what a table may hold.
    #[test]
    fn turning_parameters_exchanges_the_limits(
        a12 in -250.0..900.0f64, a21 in -250.0..900.0f64, t in 280.0..400.0f64, which in 0..4usize,
    ) {
        let (model, rest) = [
            ("wilson,lambda12-lambda11", ",58.7,18.1,,,,"),
            ("nrtl,g12-g22", "0.3,,,,,,"),
            ("uniquac,u12-u22", ",,,2.1055,1.972,0.92,1.4"),
            ("margules-2,energy", ",,,,,,"),
        ][which];
        let set = parameters(&format!("ethanol,water,{model},K,{a12},{a21},,,,{rest},300,360,a"));
        prop_assert_eq!(set.reversed().reversed(), set);
        let [first, second] = set.ln_gamma_infinity(t);
        prop_assert_eq!(set.reversed().ln_gamma_infinity(t), [second, first]);
    }
}

// ------------------------------------------------------------ what is refused

#[test]
fn faults_of_pair_tables() {
    let gamma = "\
ethanol,water,0,298.15,,a
ethanol,water,-2,298.15,,a
ethanol,water,1e30,298.15,,a
ethanol,water,3.9,298.15,,a
64-17-5,O,4.2,298.15,,a
ethanol,water,4,25,,a
ethanol,water,4,350,-0.1,a
ethanol,water,4,360,,
etanol,watr,4,370,,a
not a molecule,water,4,370,,a
ethanol,CCO,1,300,,a
";
    let volume = "\
ethanol,water,-4.2,1.4,-1.4,298.15,0.1,0.9,a
water,ethanol,-4.2,-1.4,-1.4,298.15,0.1,0.9,a
water,ethanol,-4.2,1.4,-1.4,298.15,0.1,0.9,a
ethanol,water,-4.2,,-1.4,303.15,0.1,0.9,a
ethanol,water,,,,303.15,0.1,0.9,a
ethanol,water,-4.2,,,303.15,0.9,0.1,a
ethanol,water,-4.2,,,303.15,0.1,90,a
ethanol,water,-420,,,303.15,0.1,0.9,a
";
    let activity = "\
ethanol,water,margules,ln,-,1,1,,,,,,,,,,,300,360,a
ethanol,water,van-laar,,-,1,1,,,,,,,,,,,300,360,a
ethanol,water,van-laar,log,-,1,1,,,,,,,,,,,300,360,a
ethanol,water,van-laar,ln,-,1,-1,,,,,,,,,,,300,360,a
ethanol,water,van-laar,ln,-,1,1,,,,,,,,,,,360,300,a
ethanol,water,van-laar,ln,J/mol,1,1,,,,,,,,,,,300,360,a
ethanol,water,nrtl,g12-g22,-,1,1,,,,0.3,,,,,,,300,360,a
ethanol,water,nrtl,g12-g22,K,1,1,,,,,,,,,,,300,360,a
ethanol,water,nrtl,g12-g22,K,1,1,a+b/T,1,1,0.3,,,,,,,300,360,a
ethanol,water,nrtl,g12-g22,K,1,1,,1,,0.3,,,,,,,300,360,a
ethanol,water,nrtl,g12-g22,K,1,1,,,,0.3,58.7,18.1,,,,,300,360,a
ethanol,water,wilson,Lambda12,-,0,1,,,,,,,,,,,300,360,a
ethanol,water,wilson,lambda12-lambda11,K,1,1,,,,,,,,,,,300,360,a
ethanol,water,uniquac,tau12,-,1,1,,,,,,,2.1,1.9,0.9,,300,360,a
ethanol,water,margules-1,ln,-,1,1,,,,,,,,,,,300,360,a
ethanol,water,margules-1,ln,-,80,,,,,,,,,,,,300,360,a
ethanol,water,van-laar,ln,-,1.6798,0.9227,,,,,,,,,,,300,360,a
water,ethanol,van-laar,log10,-,0.40072,0.72953,,,,,,,,,,,350,370,a
water,ethanol,van-laar,ln,-,1.6798,0.9227,,,,,,,,,,,350,370,a
";
    let faults = read(gamma, volume, activity).unwrap_err();
    insta::assert_snapshot!(faults);
}

#[test]
fn a_column_that_is_missing_is_told_where_it_is_needed() {
    let text = "first,second,model,convention,unit,a12,a21,low,high,source\n-,-,-,-,-,-,-,K,K,-\n\
                ethanol,water,nrtl,g12-g22,K,1,1,300,360,a\n";
    let tables = PairTables {
        activity_parameters: Some(TableText {
            file: "a.csv",
            text,
        }),
        ..PairTables::default()
    };
    let faults = Pairs::read(substances(), &tables).unwrap_err().to_string();
    assert_eq!(
        faults,
        "a.csv:3: column `model`: needs a column `alpha`, which is missing (found `nrtl`)"
    );
}

// -------------------------------------------------------------- what it is for

/// A folder of pair tables.
fn own(tables: &[(&str, &str)]) -> (Bench, String) {
    let bench = Bench::new();
    for (name, text) in tables {
        bench.write(&format!("own/pairs/{name}.csv"), text);
    }
    let folder = bench.argument("own");
    (bench, folder)
}

fn mixture(arguments: &[&str]) -> Vec<Vec<String>> {
    let said = say(&[&["mixture", "--format", "csv"][..], arguments].concat());
    assert_eq!(said.code, 0, "{}", said.err);
    csv_rows(&said.out)
}

fn row<'r>(rows: &'r [Vec<String>], quantity: &str, model: &str) -> &'r [String] {
    let found = rows
        .iter()
        .find(|row| row[0] == quantity && row[4] == model);
    found.unwrap_or_else(|| panic!("no {quantity} by {model}"))
}

/// Densities that the coefficients were not fitted to are met within 0.2 %, the pure liquids of the built-in
/// curves being off by 0.1 %; without excess volume they are off by 1.5 to 3.5 %.
#[test]
fn a_measured_excess_volume_gives_the_density_of_ethanol_and_water() {
    let data = |name: &str| {
        std::fs::read_to_string(repository(&format!("tests/data/pairs/{name}.csv"))).unwrap()
    };
    let (_bench, folder) = own(&[("excess_volume", &data("excess_volume"))]);
    let measured = data("ethanol_water_density");
    let rows = csv_rows(
        measured
            .split_inclusive('\n')
            .skip(2)
            .collect::<String>()
            .as_str(),
    );
    for point in &rows[2..] {
        let ethanol: f64 = point[0].parse().unwrap();
        let density = 1000.0 * point[1].parse::<f64>().unwrap();
        let fractions = format!("{},{}", ethanol / 100.0, 1.0 - ethanol / 100.0);
        let asked = [
            "--component",
            "ethanol",
            "--component",
            "water",
            "--basis",
            "mass",
            "--temperature",
            "298.15 K",
            "--fractions",
            &fractions,
        ];
        let of = |more: &[&str]| {
            let rows = mixture(&[&asked[..], more].concat());
            let row = row(&rows, "density", "unifac-dortmund");
            (
                row[2].parse::<f64>().unwrap() / density - 1.0,
                row[5].clone(),
                row[6].clone(),
            )
        };
        let (off, status, detail) = of(&["--tables", &folder]);
        assert!(off.abs() < 2e-3, "{ethanol}: {off}");
        assert_eq!(status, "measured");
        assert!(
            detail.contains("excess volume measured at 298.15 K (US National"),
            "{detail}"
        );
        let (off, status, detail) = of(&[]);
        assert!(off < -1.4e-2, "{ethanol}: {off}");
        assert_eq!(status, "calculated");
        assert_eq!(detail, "volumes of the pure liquids add up");
    }
}

#[test]
fn an_excess_volume_that_does_not_reach_is_told() {
    let rows = format!("{VOLUME}ethanol,water,-4,,,298.15,0.2,0.9,a\n");
    let (_bench, folder) = own(&[("excess_volume", &rows)]);
    let of = |fractions: &str, temperature: &str, components: &[&str]| {
        let mut asked = vec![
            "--tables",
            &folder,
            "--fractions",
            fractions,
            "--temperature",
            temperature,
        ];
        components
            .iter()
            .for_each(|name| asked.extend(["--component", name]));
        let rows = mixture(&asked);
        let row = row(&rows, "molar_volume", "unifac-dortmund");
        (row[5].clone(), row[6].clone())
    };
    let two = ["water", "ethanol"];
    assert_eq!(of("0.5,0.5", "303 K", &two).0, "measured");
    assert_eq!(
        of("0.5,0.5", "304 K", &two).1,
        "volumes of the pure liquids add up; excess volume is measured at 298.15 K only"
    );
    assert_eq!(
        of("0.9,0.1", "298.15 K", &two).1,
        "volumes of the pure liquids add up; excess volume is measured from 0.1 to 0.8 mole fraction of the first component only"
    );
    let three = ["water", "ethanol", "acetone"];
    assert_eq!(of("0.5,0.3,0.2", "298.15 K", &three).0, "calculated");
    assert_eq!(of("0.5,0.5,0", "298.15 K", &three).0, "measured");
}

/// A measured excess volume on estimated volumes is not a measured volume; with measured data left out it is
/// not used at all.
#[test]
fn an_excess_volume_alone_measures_no_volume() {
    // an ether that is in no table
    let rows = format!("{VOLUME}CCCCCCC(CC)OCCC,acetone,-4,,,298.15,0,1,invented\n");
    let (_bench, folder) = own(&[("excess_volume", &rows)]);
    let of = |more: &[&str]| {
        let asked = [
            "--component",
            "acetone",
            "--component",
            "CCCCCCC(CC)OCCC",
            "--fractions",
            "0.5,0.5",
            "--temperature",
            "298.15 K",
            "--tables",
            &folder,
        ];
        let rows = mixture(&[&asked[..], more].concat());
        let row = row(&rows, "molar_volume", "unifac-dortmund");
        (row[5].clone(), row[6].clone())
    };
    let (status, detail) = of(&[]);
    assert_eq!(status, "calculated");
    assert_eq!(
        detail,
        "with the excess volume measured at 298.15 K (invented): -1 cm3/mol; rests on other estimates"
    );
    let (status, detail) = of(&["--estimates-only"]);
    assert_eq!(status, "calculated");
    assert!(
        detail.starts_with("volumes of the pure liquids add up"),
        "{detail}"
    );
}

#[test]
fn a_measured_gamma_stands_beside_the_models_at_infinite_dilution() {
    let rows = format!("{GAMMA}ethanol,water,3.76,298.15,,A. Author\n");
    let (_bench, folder) = own(&[("gamma_infinity", &rows)]);
    let asked = [
        "--component",
        "ethanol",
        "--component",
        "water",
        "--fractions",
        "0,1",
        "--tables",
        &folder,
    ];
    let at = |more: &[&str]| mixture(&[&asked[..], more].concat());
    let rows = at(&[
        "--temperature",
        "298.15 K",
        "--model",
        "ideal",
        "--model",
        "unifac",
    ]);
    let measured = row(&rows, "activity_coefficient", "measured");
    assert_eq!(
        measured[1..],
        [
            "1",
            "3.76",
            "",
            "measured",
            "measured",
            "at 298.15 K (A. Author)",
            "",
            ""
        ]
    );
    assert_eq!(row(&rows, "activity_coefficient", "ideal")[2], "1");
    assert_eq!(rows.iter().filter(|row| row[4] == "measured").count(), 2);
    // At the boiling point of water the measurement is too far away.
    let rows = at(&["--pressure", "1 atm"]);
    let measured = row(&rows, "activity_coefficient", "measured");
    assert_eq!(measured[5], "not-assessable");
    let rows = at(&["--temperature", "298.15 K", "--estimates-only"]);
    assert!(rows.iter().all(|row| row[4] != "measured"));
}

const BRIEF: &str = "[mixture]\ncomponents = [\"acetone\", \"methanol\"]\ntemperature = \"328.5 K\"\n\
    model = [\"unifac-dortmund\", \"ideal\"]\n[pool]\nfile = \"pool.csv\"\n\
    [[target]]\nfigure = \"selectivity_infinite_dilution\"\nprefer = \"high\"\nworst = 0.1\nbest = 100\n";
const POOL: &str = "smiles,name\nCC(C)O,2-propanol\nOCCO,glycol\nCCCCCCO,hexanol\n";

/// Invented values that put the last candidate first.
#[test]
fn a_measured_gamma_changes_the_rank() {
    let both = format!(
        "{GAMMA}acetone,1-hexanol,30,328.5,,invented\nmethanol,1-hexanol,0.5,320,,invented\n\
         methanol,1-hexanol,0.5,340,,invented too\n"
    );
    let one = format!("{GAMMA}acetone,1-hexanol,30,328.5,,invented\n");
    let screened = |rows: Option<&str>, more: &[&str]| {
        let bench = Bench::with(BRIEF, POOL);
        let mut arguments = more.to_vec();
        if let Some(rows) = rows {
            bench.write("own/pairs/gamma_infinity.csv", rows);
            arguments.extend(["--tables", "own"]);
        }
        let said = bench.screen(&arguments);
        assert_eq!(said.code, 0, "{}", said.err);
        let ranked = csv_rows(&bench.read("out/ranked.csv"));
        let column = |name: &str| ranked[0].iter().position(|head| head == name).unwrap();
        let columns = [
            "name",
            "selectivity_infinite_dilution",
            "selectivity_infinite_dilution_ideal",
            "notes",
        ];
        columns.map(|name| ranked[1][column(name)].clone())
    };
    let without = screened(None, &[]);
    assert_ne!(without[0], "hexanol");
    let [name, selectivity, ideal, remarks] = screened(Some(&both), &[]);
    assert_eq!([&*name, &*selectivity, &*ideal], ["hexanol", "60", "60"]);
    assert_eq!(
        remarks,
        "selectivity_infinite_dilution measured; gamma infinity of acetone measured at 328.5 K (invented); \
         gamma infinity of methanol measured between 320 K and 340 K (invented; invented too)"
    );
    let [name, _, ideal, remarks] = screened(Some(&one), &[]);
    assert_eq!([&*name, &*ideal], ["hexanol", "30"]);
    assert_eq!(
        remarks,
        "selectivity_infinite_dilution mixes measured and estimated values; \
         gamma infinity of acetone measured at 328.5 K (invented)"
    );
    // Too far from the temperature: the model's value, and it is said.
    let elsewhere = format!("{GAMMA}acetone,OCCO,30,298.15,,invented\n");
    let [name, _, _, remarks] = screened(Some(&elsewhere), &[]);
    assert_eq!([&name, &without[0]], ["glycol", "glycol"]);
    assert_eq!(
        remarks,
        "acetone: gamma infinity is measured at 298.15 K only"
    );
    assert_eq!(
        screened(Some(&both), &["--estimates-only"])[..2],
        without[..2]
    );
}

#[test]
fn pair_tables_are_shown() {
    let gamma = format!("{GAMMA}ethanol,water,3.76,298.15,0.05,A. Author\n");
    let volume = format!("{VOLUME}ethanol,water,-4.2,1.4,,298.15,0.1,0.9,B. Author\n");
    let activity = format!(
        "{ACTIVITY}ethanol,water,nrtl,g12-g22,K,-50,700,a+bT,0.1,-0.2,0.3,,,,,,,300,360,C. Author\n\
         acetone,water,van-laar,log10,-,0.9,0.7,,,,,,,,,,,320,350,C. Author\n"
    );
    let (_bench, folder) = own(&[
        ("gamma_infinity", &gamma),
        ("excess_volume", &volume),
        ("activity_parameters", &activity),
    ]);
    let shown = |names: &[&str]| {
        let said = say(&[&["--tables", &folder, "tables", "pairs"][..], names].concat());
        assert_eq!(said.code, 0, "{}", said.err);
        said.out
    };
    let all = [&[][..], &["acetone"][..], &["O", "64-17-5"][..]].map(shown);
    insta::assert_snapshot!(all.join("\n"));
    assert!(shown(&["toluene"]).starts_with("no pair data of toluene"));
    let said = say(&["tables", "pairs", "ethanoll"]);
    assert!(
        said.code == 2 && said.err.contains("near it: `ethanol`"),
        "{said:?}"
    );
}

/// A pair may name a substance that only the user's own list knows.
#[test]
fn a_substance_of_the_user_may_stand_in_a_pair() {
    let gamma = format!("{GAMMA}house blend base,water,3.76,298.15,,A. Author\n");
    let (bench, folder) = own(&[("gamma_infinity", &gamma)]);
    let said = say(&["--tables", &folder, "tables", "pairs"]);
    assert!(
        said.code == 2 && said.err.contains("is neither a known name nor a SMILES"),
        "{said:?}"
    );
    bench.write(
        "own/substances/substances.csv",
        "# title: t\n# source: s\n# transcribed: d\n# checked: c\nname,synonyms,cas,smiles,formula\n\
         -,-,-,-,-\nhouse blend base,,,CCCCOCCOCCOCCC,\n",
    );
    let said = say(&["--tables", &folder, "tables", "pairs"]);
    assert!(
        said.code == 0 && said.out.contains("house blend base"),
        "{said:?}"
    );
}
