//! Measured data: the built-in tables, their curves, names, and what is refused.

use groupsmith::chem::{Composition, Molecule, Reader};
use groupsmith::data::{
    DataError, LiquidDensity, NameError, Substances, TableText, Tables, VaporPressure,
};
use groupsmith::quantity::{
    Absent, Flag, Flags, Property, REFERENCE_TEMPERATURE_K, STANDARD_ATMOSPHERE_PA, Status,
};
use serde::Deserialize;

const HEAD: &str =
    "# title: t\n# source: k: A. Author, A Book, 1999\n# transcribed: d\n# checked: c\n";
const SUBSTANCE_COLUMNS: &str = "name,synonyms,cas,smiles,formula\n-,-,-,-,-\n";
const MEASURED_COLUMNS: &str =
    "substance,property,value,unit,temperature,pressure,source\n-,-,-,-,K,kPa,-\n";
const VAPOR_COLUMNS: &str = "substance,equation,logarithm,pressure_unit,temperature_unit,a,b,c,d,e,\
critical_temperature,critical_pressure,low,high,source\n-,-,-,-,-,-,-,-,-,-,K,kPa,K,K,-\n";
const DENSITY_COLUMNS: &str = "substance,equation,a,b,c,d,critical_temperature,critical_density,\
low,high,source\n-,-,-,-,-,-,K,kg/m3,K,K,-\n";

fn built_in() -> Substances {
    Substances::built_in().unwrap_or_else(|error| panic!("{error}"))
}

fn text(columns: &str, rows: &str) -> String {
    format!("{HEAD}{columns}{rows}")
}

fn file<'a>(file: &'a str, text: &'a str) -> Option<TableText<'a>> {
    Some(TableText { file, text })
}

// ------------------------------------------------------------ what is built in

#[test]
fn enough_substances_have_all_three() {
    let substances = built_in();
    let all_three = substances
        .iter()
        .filter(|substance| {
            substance.vapor_pressure().is_some()
                && substance.liquid_density().is_some()
                && substance
                    .constants()
                    .iter()
                    .any(|constant| constant.property == Property::BoilingPoint)
        })
        .count();
    assert!(substances.len() >= 500, "{}", substances.len());
    assert!(all_three >= 400, "{all_three}");
}

/// The substances that the mixtures of a solvent house are made of.
#[test]
fn common_components_have_vapor_pressure_and_density() {
    let substances = built_in();
    for name in [
        "water",
        "methanol",
        "ethanol",
        "1-propanol",
        "2-propanol",
        "1-butanol",
        "2-butanol",
        "isobutanol",
        "tert-butanol",
        "1-pentanol",
        "1-hexanol",
        "1-octanol",
        "acetone",
        "MEK",
        "MIBK",
        "cyclohexanone",
        "methyl acetate",
        "ethyl acetate",
        "n-butyl acetate",
        "isopropyl acetate",
        "diethyl ether",
        "DIPE",
        "MTBE",
        "THF",
        "1,4-dioxane",
        "ethylene glycol",
        "propylene glycol",
        "diethylene glycol",
        "2-butoxyethanol",
        "acetonitrile",
        "DMF",
        "NMP",
        "DMSO",
        "dichloromethane",
        "chloroform",
        "1,2-dichloroethane",
        "chlorobenzene",
        "benzene",
        "toluene",
        "ethylbenzene",
        "o-xylene",
        "m-xylene",
        "p-xylene",
        "styrene",
        "cumene",
        "n-pentane",
        "n-hexane",
        "n-heptane",
        "n-octane",
        "n-decane",
        "n-hexadecane",
        "cyclohexane",
        "methylcyclohexane",
        "formic acid",
        "acetic acid",
        "propionic acid",
        "triethylamine",
        "diethylamine",
        "aniline",
        "pyridine",
        "furfural",
        "nitromethane",
        "dimethyl carbonate",
        "GBL",
    ] {
        let substance = substances.find(name).unwrap();
        assert!(
            substance
                .measured(Property::BoilingPoint, 300.0)
                .unwrap()
                .is_ok(),
            "{name}"
        );
        assert!(
            substance.vapor_pressure().is_some(),
            "{name} has no vapor pressure"
        );
        assert!(
            substance.liquid_density().is_some(),
            "{name} has no density"
        );
    }
}

#[test]
fn every_built_in_number_has_a_full_source() {
    let substances = built_in();
    for substance in substances.iter() {
        let sources = substance
            .constants()
            .iter()
            .map(|constant| &constant.source)
            .chain(
                substance
                    .vapor_pressures()
                    .iter()
                    .map(VaporPressure::source),
            )
            .chain(
                substance
                    .liquid_densities()
                    .iter()
                    .map(LiquidDensity::source),
            );
        for source in sources {
            // a key of the table head that was not replaced by its reference is short
            assert!(source.len() > 20, "{}: {source}", substance.name());
        }
    }
    assert!(!substances.conflicts().is_empty());
    for conflict in substances.conflicts() {
        assert!(conflict.other_source.len() > 14, "{conflict:?}");
        assert!(conflict.decision.len() > 20, "{conflict:?}");
    }
}

/// Vapor pressure rises all over the allowed range, its slope is the central
/// difference, and the saturation temperature inverts it.
#[test]
fn every_built_in_vapor_pressure_curve_is_sound() {
    for substance in built_in().iter() {
        for curve in substance.vapor_pressures() {
            let (low, high) = curve.limits_k();
            let mut before = 0.0;
            for step in 0..=20 {
                let t = (low + (high - low) * f64::from(step) / 20.0).min(high);
                let p = curve.pressure_pa(t).unwrap();
                assert!(
                    p.is_finite() && p > before,
                    "{} {curve:?} at {t}",
                    substance.name()
                );
                before = p;
                let back = curve.saturation_temperature_k(p).unwrap_or(t);
                assert!(
                    (back - t).abs() < 1e-6 * t,
                    "{} {curve:?}: {t} K comes back as {back} K",
                    substance.name()
                );
                // Wagner's equation has a half-integer power at the critical point
                let h = 1e-3;
                if (1..20).contains(&step) {
                    let (_, slope) = curve.ln_pressure_and_slope(t).unwrap();
                    let ln_p = |t: f64| curve.ln_pressure_and_slope(t).unwrap().0;
                    let difference = (ln_p(t + h) - ln_p(t - h)) / (2.0 * h);
                    assert!(
                        (slope / difference - 1.0).abs() < 1e-5,
                        "{} {curve:?} at {t}",
                        substance.name()
                    );
                }
            }
        }
    }
}

#[test]
fn every_curve_of_a_substance_meets_its_boiling_point() {
    for substance in built_in().iter() {
        let Some(Ok(boiling_point)) = substance.measured(Property::BoilingPoint, 300.0) else {
            continue;
        };
        for curve in substance.vapor_pressures() {
            if let Ok(t) = curve.saturation_temperature_k(STANDARD_ATMOSPHERE_PA) {
                assert!(
                    (t - boiling_point.value).abs() <= 3.0,
                    "{}",
                    substance.name()
                );
            }
        }
    }
}

#[test]
fn every_built_in_density_curve_falls_with_temperature() {
    for substance in built_in().iter() {
        // water has its maximum in the range
        if matches!(&**substance.name(), "water" | "deuterium oxide") {
            continue;
        }
        for curve in substance.liquid_densities() {
            let (low, high) = curve.range_k();
            let top = curve.density_kg_per_m3(low).unwrap();
            let middle = curve.density_kg_per_m3(0.5 * (low + high)).unwrap();
            let end = curve.density_kg_per_m3(high - 1e-3 * (high - low)).unwrap();
            assert!(
                top >= middle && middle >= end,
                "{} {curve:?}",
                substance.name()
            );
        }
    }
}

// -------------------------------------------------------- independent values

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
struct KnownValues {
    vapor_pressure: Vec<KnownPressure>,
    boiling_point: Vec<KnownBoilingPoint>,
    density: Vec<KnownDensity>,
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
struct KnownPressure {
    name: String,
    substance: String,
    temperature_k: f64,
    pressure_pa: f64,
    /// Relative.
    tolerance: f64,
    source: String,
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
struct KnownBoilingPoint {
    name: String,
    substance: String,
    temperature_k: f64,
    tolerance_k: f64,
    source: String,
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
struct KnownDensity {
    name: String,
    substance: String,
    temperature_k: f64,
    density_kg_per_m3: f64,
    /// Relative.
    tolerance: f64,
    source: String,
}

#[test]
fn curves_give_known_values() {
    let known: KnownValues =
        toml_edit::de::from_str(include_str!("../data/data/known_values.toml")).unwrap();
    let substances = built_in();
    let mut misses = Vec::new();
    let mut check = |name: &str, source: &str, found: f64, wanted: f64, tolerance: f64| {
        assert!(!source.is_empty());
        if (found - wanted).abs() > tolerance {
            misses.push(format!(
                "{name}: {found} instead of {wanted} ± {tolerance} ({source})"
            ));
        }
    };
    for case in &known.vapor_pressure {
        for curve in substances.find(&case.substance).unwrap().vapor_pressures() {
            if (curve.range_k().0..=curve.range_k().1).contains(&case.temperature_k) {
                let p = curve.pressure_pa(case.temperature_k).unwrap();
                let width = case.tolerance * case.pressure_pa;
                check(&case.name, &case.source, p, case.pressure_pa, width);
            }
        }
    }
    for case in &known.boiling_point {
        let substance = substances.find(&case.substance).unwrap();
        let stated = substance
            .measured(Property::BoilingPoint, 0.0)
            .unwrap()
            .unwrap();
        check(
            &case.name,
            &case.source,
            stated.value,
            case.temperature_k,
            case.tolerance_k,
        );
        let curve = substance.vapor_pressure().unwrap();
        let t = curve
            .saturation_temperature_k(STANDARD_ATMOSPHERE_PA)
            .unwrap();
        check(
            &case.name,
            &case.source,
            t,
            case.temperature_k,
            case.tolerance_k,
        );
    }
    for case in &known.density {
        let substance = substances.find(&case.substance).unwrap();
        let found = substance.measured(Property::LiquidDensity, case.temperature_k);
        let width = case.tolerance * case.density_kg_per_m3;
        check(
            &case.name,
            &case.source,
            found.unwrap().unwrap().value,
            case.density_kg_per_m3,
            width,
        );
    }
    assert!(misses.is_empty(), "{}", misses.join("\n"));
}

/// Closed-cup flash points in degC as handbooks and safety sheets state them,
/// from memory (Sax, Dangerous Properties of Industrial Materials; the International
/// Chemical Safety Cards). Isobutanol stands in one of the lists at -40 degC.
#[test]
fn flash_points_are_those_of_handbooks() {
    let substances = built_in();
    for (name, celsius) in [
        ("methanol", 11.0),
        ("ethanol", 13.0),
        ("2-propanol", 12.0),
        ("isobutanol", 28.0),
        ("acetone", -18.0),
        ("toluene", 4.0),
        ("DMF", 58.0),
        ("acetic acid", 39.0),
        ("1,2-dichloroethane", 13.0),
        ("methyl acetate", -10.0),
    ] {
        let found = substances.find(name).unwrap();
        let found = found.measured(Property::FlashPoint, 0.0).unwrap().unwrap();
        assert!(
            (found.value - celsius - 273.15).abs() <= 5.0,
            "{name}: {} K instead of {celsius} degC ({:?})",
            found.value,
            found.source
        );
    }
}

/// Where two lists are all there is, they are far apart and nothing decides,
/// the lower flash point is used, whichever list it stands in.
#[test]
fn the_lower_of_two_flash_points_far_apart_is_used() {
    let substances = built_in();
    let mut seen = 0;
    for conflict in substances.conflicts() {
        if &*conflict.property == "flash_point" && conflict.decision.contains("the lower is used") {
            let number = |text: &str| text.parse::<f64>().unwrap();
            assert!(number(&conflict.used) + 5.0 < number(&conflict.other));
            let name = substances.iter().nth(conflict.substance).unwrap();
            let shown = name.measured(Property::FlashPoint, 0.0).unwrap().unwrap();
            assert!((shown.value - number(&conflict.used)).abs() < 1e-9);
            seen += 1;
        }
    }
    assert!(seen >= 10, "{seen}");
}

/// Values that no list settles are not shown; those that stay are the plausible ones.
#[test]
fn doubtful_values_are_left_out() {
    let substances = built_in();
    for name in [
        "methyl acetoacetate",
        "trimethyl orthoformate",
        "glycerol triacetate",
    ] {
        let substance = substances.find(name).unwrap();
        assert!(
            substance.measured(Property::MeltingPoint, 0.0).is_none(),
            "{name}"
        );
    }
    let ketone = substances.find("4-heptanone").unwrap();
    let pressure = ketone.measured(Property::VaporPressure, 298.15);
    let pressure = pressure.unwrap().unwrap().value;
    // its isomers have 521 and 562 Pa and boil 7 and 2 K higher
    assert!((562.0..=850.0).contains(&pressure), "{pressure} Pa");
    let glycol = substances.find("tetraethylene glycol").unwrap();
    let boiling = glycol.measured(Property::BoilingPoint, 0.0);
    // about 600 K, from memory
    assert!((boiling.unwrap().unwrap().value - 600.0).abs() < 4.0);
}

/// A boiling point that comes from a curve says so, and claims no more digits than it has.
#[test]
fn a_boiling_point_from_a_curve_is_rounded_and_says_so() {
    let mut seen = 0;
    for substance in built_in().iter() {
        let stated = substance
            .constants()
            .iter()
            .any(|constant| constant.property == Property::BoilingPoint);
        if stated {
            continue;
        }
        if let Some(Ok(boiling)) = substance.measured(Property::BoilingPoint, 0.0) {
            let tenths = boiling.value * 10.0;
            assert!((tenths - tenths.round()).abs() < 1e-6, "{}", boiling.value);
            let source = boiling.source.unwrap();
            assert!(source.starts_with("vapor-pressure curve"), "{source}");
            seen += 1;
        }
    }
    assert!(seen > 0);
}

/// Antoine's equation as two textbooks print it.
#[test]
fn antoine_in_printed_units() {
    let substances = text(
        SUBSTANCE_COLUMNS,
        "ethanenitrile,,,CC#N,C2H3N\nnitromethane,,,C[N+](=O)[O-],CH3NO2\nwater,,,O,H2O\n",
    );
    let vapor = text(
        VAPOR_COLUMNS,
        "ethanenitrile,antoine,ln,kPa,degC,14.2724,2945.47,224.00,,,,,283,363,k\n\
         nitromethane,antoine,ln,kPa,degC,14.2043,2972.64,209.00,,,,,283,363,k\n\
         water,antoine,log10,mmHg,degC,8.07131,1730.63,233.426,,,,,274.15,373.15,k\n",
    );
    let table = Substances::default()
        .with(&Tables {
            substances: file("substances.csv", &substances),
            vapor_pressure: file("vapor_pressure.csv", &vapor),
            ..Tables::default()
        })
        .unwrap();
    let at = |name: &str, t: f64| {
        let curve = table.find(name).unwrap().vapor_pressure().unwrap();
        curve.pressure_pa(t).unwrap()
    };
    // Smith, Van Ness, Abbott, Introduction to Chemical Engineering Thermodynamics,
    // example of acetonitrile and nitromethane at 75 degC: 83.21 and 41.98 kPa (from memory).
    assert!((at("ethanenitrile", 348.15) - 83_210.0).abs() < 5.0);
    assert!((at("nitromethane", 348.15) - 41_980.0).abs() < 5.0);
    // The set for water, 1 to 100 degC, log10 and mmHg: 760 mmHg at 100 degC (from memory).
    assert!((at("water", 373.15) / STANDARD_ATMOSPHERE_PA - 1.0).abs() < 5e-4);
    let source = table
        .find("water")
        .unwrap()
        .vapor_pressure()
        .unwrap()
        .source();
    assert_eq!(&**source, "A. Author, A Book, 1999");
}

// ------------------------------------------------------------------ look-ups

#[test]
fn names_synonyms_and_cas_numbers_are_found() {
    let substances = built_in();
    for (spelling, name) in [
        ("MEK", "methyl ethyl ketone"),
        ("isopropyl alcohol", "2-propanol"),
        ("Iso-Propyl  Alcohol", "2-propanol"),
        ("67-64-1", "acetone"),
        (" Ethyl Acetate ", "ethyl acetate"),
        ("t-butanol", "tert-butanol"),
        ("N-methylpyrrolidone", "N-methyl-2-pyrrolidone"),
        ("hexane", "n-hexane"),
        ("α-pinene", "alpha-pinene"),
        ("perchloroethylene", "tetrachloroethylene"),
        ("ether", "diethyl ether"),
        ("EC", "ethylene carbonate"),
        ("CHCl3", "chloroform"),
        ("CCl4", "carbon tetrachloride"),
        ("(R)-limonene", "(+)-limonene"),
    ] {
        assert_eq!(
            &**substances.find(spelling).unwrap().name(),
            name,
            "{spelling}"
        );
    }
}

#[test]
fn what_is_not_found_says_what_is_near() {
    let substances = built_in();
    let message = |text: &str| substances.find(text).unwrap_err().to_string();
    assert_eq!(
        message("tolune"),
        "no substance is called `tolune`; near it: `toluene`"
    );
    assert_eq!(
        message("DEA"),
        "`DEA` may mean `diethylamine` or `diethanolamine`: say which"
    );
    assert_eq!(
        message("Xylene"),
        "`Xylene` may mean `o-xylene`, `m-xylene` or `p-xylene`: say which"
    );
    assert_eq!(
        message("67-64-2"),
        "`67-64-2` is not a CAS number: its check digit should be 1"
    );
    assert_eq!(
        message("58-08-2"),
        "no substance with CAS number 58-08-2 is in the tables; a SMILES will do instead"
    );
    assert_eq!(
        message("unobtainium hexahydrate"),
        "no substance is called `unobtainium hexahydrate`; give a SMILES or a CAS number instead"
    );
    assert!(matches!(
        substances.find(""),
        Err(NameError::Unknown { .. })
    ));
}

#[test]
fn structures_are_found_by_full_key_then_by_constitution() {
    let substances = built_in();
    let find = |smiles: &str| {
        let keys = Molecule::from_smiles(smiles).unwrap().keys();
        let (substance, flags) = substances.find_structure(&keys)?;
        Some((substance.name().to_string(), flags))
    };
    let plain = |name: &str| Some((name.to_owned(), Flags::NONE));
    let other = |name: &str| Some((name.to_owned(), Flags::NONE.with(Flag::OtherStereoisomer)));
    assert_eq!(find("OC(C)C"), plain("2-propanol"));
    assert_eq!(find("C1=CC=CC=C1C"), plain("toluene"));
    assert_eq!(find("C[S+](C)[O-]"), plain("dimethyl sulfoxide"));
    assert_eq!(find("Cl/C=C\\Cl"), plain("cis-1,2-dichloroethylene"));
    assert_eq!(find("Cl/C=C/Cl"), plain("trans-1,2-dichloroethylene"));
    assert_eq!(find("ClC=CCl"), other("cis-1,2-dichloroethylene"));
    assert_eq!(find("[2H]O[2H]"), plain("deuterium oxide"));
    assert_eq!(find("[2H]O"), other("water"));
    assert_eq!(find("CC(O)(F)I"), None);
    for substance in substances.iter() {
        // so no structure stands twice
        assert_eq!(find(substance.smiles()), plain(substance.name()));
    }
}

#[test]
fn measured_values_carry_their_source_and_flags() {
    let substances = built_in();
    let toluene = substances.find("toluene").unwrap();
    let density = toluene
        .measured(Property::LiquidDensity, REFERENCE_TEMPERATURE_K)
        .unwrap()
        .unwrap();
    assert_eq!(density.status, Status::Measured);
    assert_eq!(density.method, "measured");
    assert_eq!(density.temperature_k, Some(REFERENCE_TEMPERATURE_K));
    assert_eq!(density.flags, Flags::NONE);
    assert!(density.source.unwrap().contains("Perry"));
    assert_eq!(toluene.measured(Property::SurfaceTension, 300.0), None);

    // 164 K is below the range of toluene's curves, 2000 K above every stretch
    let cold = toluene
        .measured(Property::VaporPressure, 164.0)
        .unwrap()
        .unwrap();
    assert!(cold.flags.contains(Flag::Extrapolated));
    assert!(matches!(
        toluene.measured(Property::VaporPressure, 2000.0),
        Some(Err(Absent::OutsideRange { .. }))
    ));
    let curve = toluene.vapor_pressure().unwrap();
    assert!(curve.saturation_temperature_k(1e9).is_err());
    assert!(curve.saturation_temperature_k(0.0).is_err());
    assert!(curve.saturation_temperature_k(f64::NAN).is_err());
    assert!(curve.pressure_pa(f64::NAN).is_err());
}

// -------------------------------------------------------------------- layers

#[test]
fn a_further_layer_goes_before_the_built_in_one() {
    let substances = text(
        SUBSTANCE_COLUMNS,
        "acetone,house acetone,67-64-1,,\nglow oil,,,CCCCCCCCCCO,\n",
    );
    let measured = text(
        MEASURED_COLUMNS,
        "house acetone,boiling_point,56.2,degC,,101.325,own still\n\
         MEK,boiling_point,320,K,,50,own still\n\
         glow oil,liquid_viscosity,11,mPa s,298.15,,k\n",
    );
    let density = text(
        DENSITY_COLUMNS,
        "acetone,constant,784,,,,,,297.15,299.15,k\n",
    );
    let table = built_in()
        .with(&Tables {
            substances: file("own/substances.csv", &substances),
            measured: file("own/measured.csv", &measured),
            density: file("own/density.csv", &density),
            ..Tables::default()
        })
        .unwrap_or_else(|error| panic!("{error}"));
    let acetone = table.find("acetone").unwrap();
    let boiling_point = acetone
        .measured(Property::BoilingPoint, 0.0)
        .unwrap()
        .unwrap();
    assert!((boiling_point.value - 329.35).abs() < 1e-9);
    assert_eq!(&*boiling_point.source.unwrap(), "own still");
    // the older value is still there, behind
    let values = acetone
        .constants()
        .iter()
        .filter(|constant| constant.property == Property::BoilingPoint);
    assert_eq!(values.count(), 2);
    let density = acetone
        .measured(Property::LiquidDensity, 298.15)
        .unwrap()
        .unwrap();
    assert_eq!(density.value, 784.0);
    // elsewhere the built-in curve answers
    let warm = acetone
        .measured(Property::LiquidDensity, 320.0)
        .unwrap()
        .unwrap();
    assert!(warm.flags.is_empty() && warm.value < 770.0);
    // a boiling point at another pressure does not pass for the normal one
    let mek = table
        .find("MEK")
        .unwrap()
        .measured(Property::BoilingPoint, 0.0);
    assert!((mek.unwrap().unwrap().value - 352.7).abs() < 0.5);
    // another name for a known structure leads to the known substance
    let oil = table.find("glow oil").unwrap();
    assert!(std::ptr::eq(oil, table.find("1-decanol").unwrap()));
    assert_eq!(
        oil.composition(),
        &Composition::from_formula("C10H22O").unwrap()
    );
    let viscosity = oil
        .measured(Property::LiquidViscosity, 298.15)
        .unwrap()
        .unwrap();
    assert!((viscosity.value - 0.011).abs() < 1e-12);
    assert_eq!(oil.measured(Property::LiquidViscosity, 310.0), None);
}

/// One row a fault: which table, its rows (the first is line 7), the message.
#[test]
fn faults_are_refused_with_file_row_and_column() {
    let cases = [
        (
            "substances",
            "propanone,,67-64-2,CC(C)=O,C3H6O",
            "substances.csv:7: column `cas`: has a wrong check digit: 1 would fit (found `67-64-2`)",
        ),
        (
            "substances",
            "propanone,,67641,CC(C)=O,C3H6O",
            "substances.csv:7: column `cas`: is not a CAS number (found `67641`)",
        ),
        (
            "substances",
            "propanone,,,CC(C)=O,C3H8O",
            "substances.csv:7: column `formula`: is not that of the SMILES, which is C3H6O (found `C3H8O`)",
        ),
        (
            "substances",
            "propanone,,,CC(C)=O,hello",
            "substances.csv:7: column `formula`: is not a formula (found `hello`)",
        ),
        (
            "substances",
            "one,,,CCCO,\none,,,CCC,",
            "substances.csv:8: column `name`: stands twice: it is `one` already (found `one`)",
        ),
        (
            "substances",
            "one,,64-17-5,CCCO,\ntwo,,64-17-5,CCC,",
            "substances.csv:8: column `cas`: stands twice: it is `one` already (found `64-17-5`)",
        ),
        (
            "substances",
            "one,x,,CCCO,\ntwo,X,,CCC,",
            "substances.csv:8: column `synonyms`: `X` is already a name of `one` (found `X`)",
        ),
        (
            "substances",
            "one,x?,,CCCO,\ntwo,x,,CCC,",
            "substances.csv:8: column `synonyms`: `x` is in use for several substances (found `x`)",
        ),
        (
            "substances",
            "base,,,CCCO,",
            "substances.csv:7: column `smiles`: is not the structure of `base`, CCO (found `CCCO`)",
        ),
        (
            "substances",
            "one,,,,",
            "substances.csv:7: column `smiles`: is blank (found ``)",
        ),
        (
            "substances",
            "one,,,CCCO,\ntwo,,,OCCC,",
            "substances.csv:8: column `smiles`: stands twice: it is `one` already (found `OCCC`)",
        ),
        (
            "substances",
            "base,,,,C2H4O",
            "substances.csv:7: column `formula`: is not that of `base`, C2H6O (found `C2H4O`)",
        ),
        (
            "measured",
            "nobody,boiling_point,350,K,,101.325,k",
            "measured.csv:7: column `substance`: no substance is called `nobody`; give a SMILES or a CAS number instead (found `nobody`)",
        ),
        (
            "measured",
            "base,boiling_pint,350,K,,101.325,k",
            "measured.csv:7: column `property`: is not a property that can be measured (found `boiling_pint`)",
        ),
        (
            "measured",
            "base,boiling_point,350,K,,,k",
            "measured.csv:7: column `pressure`: has to be a positive number for a boiling point (found ``)",
        ),
        (
            "measured",
            "base,flash_point,-3,K,,,k",
            "measured.csv:7: column `value`: is not positive (found `-3`)",
        ),
        (
            "measured",
            "base,flash_point,280,K,,,k\nbase,flash_point,290,K,,,k",
            "measured.csv:8: column `property`: stands twice for this substance: 280 and 290 (found `flash_point`)",
        ),
        (
            "measured",
            "base,liquid_viscosity,0.001,Pa s,,,k",
            "measured.csv:7: column `temperature`: is blank, and the property depends on it (found ``)",
        ),
        (
            "measured",
            "base,flash_point,280,K,,,",
            "measured.csv:7: column `source`: is blank (found ``)",
        ),
        (
            "vapor_pressure",
            "base,antoine,log10,bar,K,4.2,1177,-55,,,,,420,280,k",
            "vapor_pressure.csv:7: column `high`: is not above the lower end of the range, 420 K (found `280`)",
        ),
        (
            "vapor_pressure",
            "base,antoine,log2,bar,K,4.2,1177,-55,,,,,280,420,k",
            "vapor_pressure.csv:7: column `logarithm`: should be log10 or ln (found `log2`)",
        ),
        (
            "vapor_pressure",
            "base,antoine,log10,bar,K,4.2,-1177,-55,,,,,280,420,k",
            "vapor_pressure.csv:7: column `equation`: gives no pressure that rises with temperature at 280.00 K (found `antoine`)",
        ),
        (
            "vapor_pressure",
            "base,antoine,log10,bar,K,5.24677,1598.673,-46.424,,,,,292,366,k",
            "vapor_pressure.csv:7: column `equation`: the curve gives 351.45 K at 101.325 kPa, the stated boiling point is 360 K (found `antoine`)",
        ),
        (
            "vapor_pressure",
            "base,antwine,log10,bar,K,4.2,1177,-55,,,,,280,420,k",
            "vapor_pressure.csv:7: column `equation`: should be antoine, wagner-2.5-5, wagner-3-6 or extended-antoine (found `antwine`)",
        ),
        (
            "density",
            "base,constant,12,,,,,,290,300,k",
            "density.csv:7: column `equation`: gives a density that is not between 100 and 10000 kg/m3 (found `constant`)",
        ),
        (
            "density",
            "base,constant,-12,,,,,,290,300,k",
            "density.csv:7: column `a`: is not positive (found `-12`)",
        ),
        (
            "density",
            "base,constant,789,,,,,,290,300,k\nbase,constant,889,,,,,,290,300,k",
            "density.csv:8: column `equation`: the curve gives 889.0 kg/m3 at 292.50 K, elsewhere it is 789.0 kg/m3 (found `constant`)",
        ),
    ];
    let base_substances = text(SUBSTANCE_COLUMNS, "base,,,CCO,C2H6O\n");
    let base_measured = text(MEASURED_COLUMNS, "base,boiling_point,360,K,,101.325,k\n");
    for (which, rows, wanted) in cases {
        let base = Substances::default()
            .with(&Tables {
                substances: file("substances.csv", &base_substances),
                measured: file("measured.csv", &base_measured),
                ..Tables::default()
            })
            .unwrap();
        let columns = match which {
            "substances" => SUBSTANCE_COLUMNS,
            "measured" => MEASURED_COLUMNS,
            "vapor_pressure" => VAPOR_COLUMNS,
            _ => DENSITY_COLUMNS,
        };
        let (name, table) = (format!("{which}.csv"), text(columns, &format!("{rows}\n")));
        let this = |other: &str| file(&name, &table).filter(|_| which == other);
        let error = base
            .with(&Tables {
                substances: this("substances"),
                // a curve is refused against its own layer only
                measured: match which {
                    "vapor_pressure" => file("measured.csv", &base_measured),
                    _ => this("measured"),
                },
                vapor_pressure: this("vapor_pressure"),
                density: this("density"),
                ..Tables::default()
            })
            .expect_err(rows);
        assert_eq!(error.to_string(), wanted, "{rows}");
    }
}

#[test]
fn every_fault_of_a_layer_is_reported_at_once() {
    let substances = text(
        SUBSTANCE_COLUMNS,
        "one,,67-64-2,CCO,\ntwo,,,C(C,\nthree,,,CCC,\n",
    );
    let error = Substances::default()
        .with(&Tables {
            substances: file("substances.csv", &substances),
            ..Tables::default()
        })
        .unwrap_err();
    let DataError::Tables { faults } = error;
    assert_eq!(faults.len(), 2);
}

// ------------------------------------------------------------------ the pool

/// Every line of the examples' pool is the substance it is called, but for the
/// salt its README speaks of.
#[test]
fn the_pool_holds_what_it_says() {
    let substances = built_in();
    let pool = include_str!("../../examples/entrainer-acetone-methanol/solvents.csv");
    let mut reader = Reader::new();
    let mut lines = 0;
    let mut salts = 0;
    for record in csv::Reader::from_reader(pool.as_bytes()).records() {
        let record = record.unwrap();
        let (name, smiles, cas) = (&record[0], &record[1], &record[2]);
        lines += 1;
        let Ok(molecule) = reader.read(smiles) else {
            salts += 1;
            assert_eq!(name, "1-ethyl-3-methylimidazolium acetate");
            continue;
        };
        let substance = substances.find(name).unwrap();
        assert_eq!(&molecule.composition(), substance.composition(), "{name}");
        assert!(
            std::ptr::eq(substance, substances.find(cas).unwrap()),
            "{name}"
        );
    }
    assert!(lines >= 300, "{lines}");
    assert_eq!(salts, 1);
}
