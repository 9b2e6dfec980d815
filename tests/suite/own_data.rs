//! A user's measured data: what a file may look like, points and what lies
//! between them, what is refused, and what a vapor-pressure curve implies.

use std::sync::OnceLock;

use groupsmith::data::{DataError, Substances, TableText, Tables};
use groupsmith::quantity::{Absent, Estimate, Flag, Property, STANDARD_ATMOSPHERE_PA};
use proptest::prelude::*;

const SUBSTANCES: &str =
    "name,synonyms,cas,smiles,formula\n-,-,-,-,-\nglow oil,,,CCCCC(F)(F)CCCC(F)C,\n";
const MEASURED: &str =
    "substance,property,value,unit,temperature,pressure,source\n-,-,-,-,K,kPa,-\n";
const VAPOR: &str = "substance,equation,logarithm,pressure_unit,temperature_unit,a,b,c,d,e,\
critical_temperature,critical_pressure,low,high,source\n-,-,-,-,-,-,-,-,-,-,K,kPa,K,K,-\n";
const DENSITY: &str = "substance,equation,a,b,c,d,critical_temperature,critical_density,low,high,source\n\
-,-,-,-,-,-,K,kg/m3,K,K,-\n";

fn built_in() -> &'static Substances {
    static TABLE: OnceLock<Substances> = OnceLock::new();
    TABLE.get_or_init(|| Substances::built_in().unwrap_or_else(|error| panic!("{error}")))
}

/// A user's layer over the built-in one, each file given as name and text.
fn with(files: &[(&str, &str)]) -> Result<Substances, DataError> {
    let file = |name: &'static str| {
        let found = files.iter().find(|(given, _)| *given == name);
        found.map(|&(_, text)| TableText { file: name, text })
    };
    Substances::built_in()?.with(&Tables {
        substances: file("substances.csv"),
        measured: file("measured.csv"),
        hansen: file("hansen.csv"),
        vapor_pressure: file("vapor_pressure.csv"),
        density: file("density.csv"),
        hansen_spheres: file("hansen_spheres.csv"),
        supply: file("supply.csv"),
        conflicts: None,
    })
}

/// The new substance and rows of `measured.csv` about it.
fn oil(rows: &str) -> Substances {
    let measured = format!("{MEASURED}{rows}");
    with(&[("substances.csv", SUBSTANCES), ("measured.csv", &measured)])
        .unwrap_or_else(|error| panic!("{error}"))
}

fn faults(files: &[(&str, &str)]) -> Vec<String> {
    match with(files) {
        Ok(_) => Vec::new(),
        Err(DataError::Tables { faults }) => faults.iter().map(ToString::to_string).collect(),
    }
}

fn of(table: &Substances, name: &str, property: Property, temperature_k: f64) -> Estimate {
    let found = table.find(name).unwrap().measured(property, temperature_k);
    found.unwrap().unwrap_or_else(|reason| panic!("{reason}"))
}

// ------------------------------------------------------------ points

#[test]
fn values_between_points_say_so_and_end_soon_after_them() {
    let table = oil("glow oil,liquid_density,0.90,g/cm3,290,,own\n\
         glow oil,liquid_density,0.88,g/cm3,310,,own\n\
         glow oil,liquid_viscosity,4,mPa s,290,,own\n\
         glow oil,liquid_viscosity,1,mPa s,350,,another\n\
         glow oil,surface_tension,25,mN/m,290,,own\n\
         glow oil,surface_tension,23,mN/m,310,,own\n\
         glow oil,boiling_point,400,K,,50,own\n\
         glow oil,boiling_point,420,K,,100,own\n\
         glow oil,vapor_pressure,5,kPa,340,,own\n");
    let density = of(&table, "glow oil", Property::LiquidDensity, 300.0);
    assert!((density.value - 890.0).abs() < 1e-9);
    assert_eq!(&*density.source.unwrap(), "between measured points: own");
    // ln of the viscosity is straight in 1/T: halfway in 1/T is the geometric mean
    let middle = 2.0 / (1.0 / 290.0 + 1.0 / 350.0);
    let viscosity = of(&table, "glow oil", Property::LiquidViscosity, middle);
    assert!((viscosity.value - 2e-3).abs() < 1e-12);
    assert_eq!(
        &*viscosity.source.unwrap(),
        "between measured points: own; another"
    );
    let tension = of(&table, "glow oil", Property::SurfaceTension, 295.0);
    assert!((tension.value - 0.0245).abs() < 1e-12);
    // boiling points are points of the vapor pressure
    let middle = 2.0 / (1.0 / 400.0 + 1.0 / 420.0);
    let pressure = of(&table, "glow oil", Property::VaporPressure, middle);
    assert!((pressure.value / (5e4_f64 * 1e5).sqrt() - 1.0).abs() < 1e-9);
    let boiling = of(&table, "glow oil", Property::BoilingPoint, 0.0);
    assert!((boiling.value - 420.4).abs() < 0.11, "{}", boiling.value);
    // a stated point is that point itself
    let stated = of(&table, "glow oil", Property::LiquidDensity, 310.0);
    assert_eq!((stated.value, &*stated.source.unwrap()), (880.0, "own"));
    for (property, inside, stretched, outside) in [
        (Property::LiquidDensity, 295.0, 318.0, 321.0),
        (Property::LiquidViscosity, 295.0, 281.0, 279.0),
        (Property::SurfaceTension, 295.0, 319.0, 400.0),
        (Property::VaporPressure, 341.0, 331.0, 329.0),
    ] {
        let flags = |t: f64| of(&table, "glow oil", property, t).flags;
        assert!(!flags(inside).contains(Flag::Extrapolated), "{property:?}");
        assert!(
            flags(stretched).contains(Flag::Extrapolated),
            "{property:?}"
        );
        let beyond = table.find("glow oil").unwrap().measured(property, outside);
        assert!(
            matches!(beyond, Some(Err(Absent::OutsideRange { .. }))),
            "{property:?}: {beyond:?}"
        );
    }
}

/// Two points a hair apart may not lead to a density that no liquid has, nor a
/// number too large for SI to one without end.
#[test]
fn what_leaves_the_tables_is_finite() {
    let table = oil("glow oil,liquid_density,900,kg/m3,300,,own\n\
         glow oil,liquid_density,800,kg/m3,300.5,,own\n");
    let steep = table.find("glow oil").unwrap();
    assert!(
        steep
            .measured(Property::LiquidDensity, 300.25)
            .unwrap()
            .is_ok()
    );
    assert!(
        steep
            .measured(Property::LiquidDensity, 309.0)
            .unwrap()
            .is_err()
    );
    let measured = format!("{MEASURED}glow oil,boiling_point,400,K,,1e306,own\n");
    let found = faults(&[("substances.csv", SUBSTANCES), ("measured.csv", &measured)]);
    assert_eq!(
        found,
        ["measured.csv:3: column `pressure`: is not a finite number in SI (found `1e306`)"]
    );
}

/// A temperature that does not matter to a property does not make a second value of it.
#[test]
fn a_property_without_temperature_stands_once() {
    let measured = format!(
        "{MEASURED}toluene,flash_point,277,K,,,own\ntoluene,flash_point,281,K,298.15,,own\n"
    );
    assert_eq!(
        faults(&[("measured.csv", &measured)]),
        [
            "measured.csv:4: column `property`: stands twice for this substance: 277 and 281 (found `flash_point`)"
        ]
    );
}

#[test]
fn a_user_s_points_go_before_a_built_in_curve_where_they_reach() {
    let rows = "toluene,liquid_density,870,kg/m3,290,,own\n\
                toluene,liquid_density,850,kg/m3,310,,own\n";
    let table = oil(rows);
    let between = of(&table, "toluene", Property::LiquidDensity, 300.0);
    assert!((between.value - 860.0).abs() < 1e-9);
    let beyond = of(&table, "toluene", Property::LiquidDensity, 315.0);
    assert!(beyond.source.unwrap().contains("Perry") && beyond.flags.is_empty());
}

// ------------------------------------------------ values with a state of their own

#[test]
fn an_enthalpy_of_vaporization_at_another_temperature_is_kept_apart() {
    let table = oil("glow oil,enthalpy_of_vaporization,44,kJ/mol,298.15,,own\n\
         toluene,enthalpy_of_vaporization,38.01,kJ/mol,298.15,,own\n\
         toluene,heat_capacity_change_of_fusion,46,J/(mol K),,,own\n\
         toluene,relative_evaporation_rate,2,,,,own\n");
    let oil = table.find("glow oil").unwrap();
    assert_eq!(oil.measured(Property::EnthalpyOfVaporization, 298.15), None);
    assert_eq!(oil.values(Property::EnthalpyOfVaporization).count(), 1);
    // the built-in value at the boiling point still answers
    let at_boiling = of(&table, "toluene", Property::EnthalpyOfVaporization, 298.15);
    assert!(
        (at_boiling.value - 33_180.0).abs() < 300.0,
        "{at_boiling:?}"
    );
    let change = of(&table, "toluene", Property::HeatCapacityChangeOfFusion, 0.0);
    assert_eq!(change.value, 46.0);
    assert_eq!(
        of(&table, "toluene", Property::RelativeEvaporationRate, 0.0).value,
        2.0
    );
}

#[test]
fn supply_and_hansen_spheres_are_held() {
    let table = with(&[
        (
            "supply.csv",
            "substance,price,price_unit,availability,notes,source\n-,-,-,-,-,-\n\
             toluene,1.2,EUR/kg,tank,dry,offer of May\nacetone,,,drums,,offer of May\n",
        ),
        (
            "hansen_spheres.csv",
            "solute,dispersion,polar,hydrogen_bonding,radius,source\n-,MPa^0.5,MPa^0.5,MPa^0.5,MPa^0.5,-\n\
             Poly-X,18,6,7,8,own\n",
        ),
    ])
    .unwrap_or_else(|error| panic!("{error}"));
    let [supply] = table.find("toluene").unwrap().supplies() else {
        panic!("one statement")
    };
    assert_eq!(supply.price.as_ref().unwrap().to_string(), "1.2 EUR/kg");
    assert_eq!((&*supply.availability, &*supply.notes), ("tank", "dry"));
    assert_eq!(table.find("acetone").unwrap().supplies()[0].price, None);
    let sphere = table.hansen_sphere("poly x").unwrap();
    assert_eq!(sphere.centre_sqrt_pa, [18e3, 6e3, 7e3]);
    assert_eq!(sphere.radius_sqrt_pa, 8e3);
}

// ------------------------------------------------------------ files by hand

/// As a spreadsheet saves it: byte-order mark, CRLF, rows of commas, other units.
#[test]
fn a_file_from_a_spreadsheet_is_read() {
    let text = "\u{feff}substance,property,value,unit,temperature,source,notes\r\n\
                -,-,-,-,degC,-,-\r\n\
                toluene,liquid_viscosity,0.56,mPa s,25,own,\"capillary, twice\"\r\n\
                ,,,,,,\r\n";
    let table = with(&[("measured.csv", text)]).unwrap_or_else(|error| panic!("{error}"));
    let viscosity = of(&table, "toluene", Property::LiquidViscosity, 298.15);
    assert!((viscosity.value - 0.56e-3).abs() < 1e-12);
}

#[test]
fn faults_of_form_say_how_to_mend_them() {
    for (text, wanted) in [
        (
            "substance;property;value;unit;source\n-;-;-;-;-\ntoluene;flash_point;4,5;degC;own\n",
            "measured.csv:1: column `substance;property;value;unit;source` is several: columns are parted by commas, not by `;` or tabs, and numbers have a decimal point",
        ),
        (
            "substance,property,value,unit,source\ntoluene,flash_point,4.5,degC,own\n",
            "measured.csv:1: column `substance` has data right below it, where the row of units belongs (`-` under a column without one)",
        ),
        (
            "substance,property,value,unit,temprature,source\n-,-,-,-,K,-\ntoluene,flash_point,4.5,degC,,own\n",
            "measured.csv:1: column `temprature` is none of this table (remarks go into a column `notes`)",
        ),
        (
            "substance,property,value,unit,temperature,source\n-,-,-,-,kPa,-\n",
            "measured.csv:2: column `temperature` is in `kPa`, expected `K`",
        ),
        (
            "substance,property,value,unit,source\n-,-,-,-,-\ntoluene,boiling_point,383,K,own\n",
            "measured.csv:3: column `property`: needs its pressure, and there is no column `pressure` (found `boiling_point`)",
        ),
        (
            "substance,property,value,unit,source\n-,-,-,-,-\ntoluene,liquid_viscosity,1,mPa s,own\n",
            "measured.csv:3: column `property`: depends on temperature, and there is no column `temperature` (found `liquid_viscosity`)",
        ),
    ] {
        assert_eq!(faults(&[("measured.csv", text)]), [wanted], "{text}");
    }
    let supply = "substance,price,price_unit,source\n-,-,-,-\n\
                  toluene,3,EUR,own\nacetone,-3,EUR/kg,own\n";
    assert_eq!(
        faults(&[("supply.csv", supply)]),
        [
            "supply.csv:3: column `price_unit`: needs a unit of the form EUR/kg, found `EUR` (found `EUR`)",
            "supply.csv:4: column `price`: is negative (found `-3`)",
        ]
    );
    let spheres = "solute,dispersion,polar,hydrogen_bonding,radius,source\n-,MPa^0.5,MPa^0.5,MPa^0.5,MPa^0.5,-\n\
                   one,18,6,7,0,own\none,18,6,7,8,own\nOne,18,6,7,8,own\ntwo,18,-6,7,8,own\n";
    assert_eq!(
        faults(&[("hansen_spheres.csv", spheres)]),
        [
            "hansen_spheres.csv:3: column `radius`: is not positive (found `0`)",
            "hansen_spheres.csv:5: column `solute`: stands twice (found `One`)",
            "hansen_spheres.csv:6: column `polar`: is not between 0 and 60 MPa^0.5 (found `-6`)",
        ]
    );
}

// ------------------------------------------------------------ contradictions

/// One file of each kind is wrong: everything is told in one go, with both numbers.
#[test]
fn contradictions_are_told_at_once_with_both_numbers() {
    let substances = "name,synonyms,cas,smiles,formula\n-,-,-,-,-\n\
                      my solvent,,108-88-3,CCO,\n\
                      toluene,,,Cc1ccccc1C,\n\
                      odd one,,,CCO,C2H4O\n";
    let measured = format!(
        "{MEASURED}\
         toluene,liquid_density,920,kg/m3,298.15,,own\n\
         toluene,enthalpy_of_vaporization,43,kJ/mol,,,own\n\
         toluene,enthalpy_of_vaporization,31,kJ/mol,298.15,,own\n\
         ethanol,vapor_pressure,8,kPa,300,,own\n\
         ethanol,vapor_pressure,7,kPa,310,,own\n\
         acetone,boiling_point,340,K,,101.325,own\n\
         acetone,flash_point,255,K,,,own\n\
         acetone,flash_point,260,K,,,own\n"
    );
    let vapor = format!(
        "{VAPOR}acetone,antoine,log10,bar,K,4.42448,1312.253,-32.445,,,,,259,508,own\n\
         ethanol,antoine,log10,bar,K,5.24677,1598.673,-46.424,,,,,366,292,own\n\
             toluene,antoine,log10,bar,K,4.07827,1343.943,-53.773,,,,,273,390,own\n"
    );
    let density = format!("{DENSITY}toluene,constant,862,,,,,,293,303,own\n");
    let found = faults(&[
        ("substances.csv", substances),
        ("measured.csv", &measured),
        ("vapor_pressure.csv", &vapor),
        ("density.csv", &density),
    ]);
    insta::assert_snapshot!("contradictions", found.join("\n"));
}

/// The user's boiling point is used, and both it and the curve it parts from say so.
#[test]
fn a_boiling_point_against_a_built_in_curve_is_flagged() {
    let table = oil("toluene,boiling_point,390,K,,101.325,own\n");
    let boiling = of(&table, "toluene", Property::BoilingPoint, 0.0);
    assert_eq!(boiling.value, 390.0);
    assert!(boiling.flags.contains(Flag::Inconsistent));
    let pressure = of(&table, "toluene", Property::VaporPressure, 350.0);
    assert!(pressure.flags.contains(Flag::Inconsistent));
    let toluene = table.find("toluene").unwrap();
    let values: Vec<f64> = toluene
        .values(Property::BoilingPoint)
        .map(|constant| constant.value)
        .collect();
    assert_eq!(values.len(), 2);
    assert_eq!(values[0], 390.0);
    let conflict = table
        .conflicts_about(toluene, Property::BoilingPoint)
        .last()
        .unwrap();
    assert_eq!(&*conflict.used, "390");
    assert!((conflict.other.parse::<f64>().unwrap() - 383.78).abs() < 0.1);
    assert!(conflict.decision.contains("user"));
    // the slope is still that of the equation, not that of the few points
    let slope = toluene.clapeyron_enthalpy(383.75).unwrap().unwrap();
    assert!(
        (slope.enthalpy_j_per_mol - 33_145.0).abs() < 50.0,
        "{slope:?}"
    );
    // within 3 K nothing is said
    let table = oil("toluene,boiling_point,384,K,,101.325,own\n");
    let boiling = of(&table, "toluene", Property::BoilingPoint, 0.0);
    assert!(boiling.flags.is_empty());
}

/// Work over a range of temperatures goes through every point of the user, with
/// the shape and the reach of the built-in equation.
#[test]
fn a_built_in_curve_is_moved_through_a_user_s_points() {
    let built_in = built_in()
        .find("toluene")
        .unwrap()
        .vapor_pressure()
        .unwrap();
    let factor = |table: &Substances, t: f64| {
        let curve = table.find("toluene").unwrap().vapor_pressure().unwrap();
        curve.pressure_pa(t).unwrap() / built_in.pressure_pa(t).unwrap()
    };
    let one = oil("toluene,boiling_point,350,K,,30,own still\n");
    let curve = one.find("toluene").unwrap().vapor_pressure().unwrap();
    assert!((curve.saturation_temperature_k(30e3).unwrap() - 350.0).abs() < 1e-6);
    assert_eq!(curve.limits_k(), built_in.limits_k());
    assert!(
        curve
            .source()
            .ends_with(", moved through one measured point: own still")
    );
    let wanted = factor(&one, 350.0);
    for t in [280.0, 349.0, 351.0, 450.0] {
        assert!((factor(&one, t) / wanted - 1.0).abs() < 1e-9, "{t} K");
    }

    let two = oil("toluene,vapor_pressure,4,kPa,300,,own\n\
                   toluene,boiling_point,386,K,,101.325,own\n");
    let ends = [(300.0, 4e3), (386.0, STANDARD_ATMOSPHERE_PA)];
    for (t, p) in ends {
        let curve = two.find("toluene").unwrap().vapor_pressure().unwrap();
        assert!((curve.pressure_pa(t).unwrap() / p - 1.0).abs() < 1e-9);
    }
    let middle = 2.0 / (1.0 / 300.0 + 1.0 / 386.0);
    let mean = (factor(&two, 300.0) * factor(&two, 386.0)).sqrt();
    assert!((factor(&two, middle) / mean - 1.0).abs() < 1e-9);
    assert!((factor(&two, 450.0) / factor(&two, 386.0) - 1.0).abs() < 1e-9);
    // the same curve answers between the points
    let pressure = of(&two, "toluene", Property::VaporPressure, middle);
    assert!((pressure.value / built_in.pressure_pa(middle).unwrap() / mean - 1.0).abs() < 1e-9);

    // one point is missed by more than 3 K, so everything on the curve says so
    let off = oil("toluene,vapor_pressure,6,kPa,300,,own\n");
    for t in [300.5, 383.0] {
        let flags = of(&off, "toluene", Property::VaporPressure, t).flags;
        assert!(flags.contains(Flag::Inconsistent), "{t} K");
    }
    assert!(
        of(&off, "toluene", Property::BoilingPoint, 0.0)
            .flags
            .contains(Flag::Inconsistent)
    );
    // past the end of the curve nothing can be moved, but the contradiction is told
    let beyond = oil("toluene,boiling_point,900,K,,101.325,own\n");
    let curve = beyond.find("toluene").unwrap().vapor_pressure().unwrap();
    assert!(!curve.is_moved() && curve.is_contradicted());
    assert!(
        of(&beyond, "toluene", Property::BoilingPoint, 0.0)
            .flags
            .contains(Flag::Inconsistent)
    );
    // points to both sides of the standard atmosphere contradict the built-in boiling point
    let around = oil("toluene,boiling_point,388,K,,99,own\ntoluene,boiling_point,390,K,,104,own\n");
    let boiling = of(&around, "toluene", Property::BoilingPoint, 0.0);
    assert!((boiling.value - 388.9).abs() < 0.2, "{boiling:?}");
    assert!(boiling.flags.contains(Flag::Inconsistent));
}

/// A user's curve goes before a built-in boiling point it misses, and both say so;
/// one that misses the user's own is refused.
#[test]
fn a_user_s_curve_overrules_a_built_in_boiling_point() {
    let vapor =
        format!("{VAPOR}acetone,antoine,log10,bar,K,4.3,1312.253,-32.445,,,,,259,400,own\n");
    let table = with(&[("vapor_pressure.csv", &vapor)]).unwrap_or_else(|error| panic!("{error}"));
    let boiling = of(&table, "acetone", Property::BoilingPoint, 0.0);
    assert!((boiling.value - 338.0).abs() < 0.1, "{boiling:?}");
    assert!(boiling.flags.contains(Flag::Inconsistent));
    let pressure = of(&table, "acetone", Property::VaporPressure, 300.0);
    assert_eq!(pressure.source.as_deref(), Some("own"));
    assert!(pressure.flags.contains(Flag::Inconsistent));
    let acetone = table.find("acetone").unwrap();
    let conflict = table
        .conflicts_about(acetone, Property::BoilingPoint)
        .last()
        .unwrap();
    assert!((conflict.used.parse::<f64>().unwrap() - 338.0).abs() < 0.1);
    assert!((conflict.other.parse::<f64>().unwrap() - 329.2).abs() < 0.3);
    assert_eq!(&*conflict.used_source, "own");

    let measured = format!("{MEASURED}acetone,boiling_point,329,K,,101.325,own\n");
    let found = faults(&[("measured.csv", &measured), ("vapor_pressure.csv", &vapor)]);
    assert_eq!(found.len(), 1, "{found:?}");
    assert!(
        found[0].contains("the stated boiling point is 329 K"),
        "{found:?}"
    );
}

/// Densities and enthalpies of vaporization of the user are used against built-in
/// curves, flagged and recorded; against the user's own curves they are refused.
#[test]
fn other_values_against_built_in_curves_are_flagged() {
    let points = oil("toluene,liquid_density,920,kg/m3,298.15,,own\n\
                      toluene,enthalpy_of_vaporization,43,kJ/mol,,,own\n");
    let curve = format!("{DENSITY}toluene,constant,950,,,,,,293,303,own\n");
    let curves = with(&[("density.csv", &curve)]).unwrap_or_else(|error| panic!("{error}"));
    for (table, property, used, other) in [
        (&points, Property::LiquidDensity, 920.0, 862.0),
        (
            &points,
            Property::EnthalpyOfVaporization,
            43_000.0,
            33_145.0,
        ),
        (&curves, Property::LiquidDensity, 950.0, 864.0),
    ] {
        let found = of(table, "toluene", property, 298.15);
        assert_eq!(found.value, used);
        assert!(found.flags.contains(Flag::Inconsistent), "{property:?}");
        let toluene = table.find("toluene").unwrap();
        let mut conflicts = table.conflicts_about(toluene, property);
        let read = |text: &str| text.parse::<f64>().unwrap();
        assert!(
            conflicts.any(|one| (read(&one.used) / used - 1.0).abs() < 1e-3
                && (read(&one.other) / other - 1.0).abs() < 0.01),
            "{property:?}: {:?}",
            table.conflicts_of(toluene).collect::<Vec<_>>()
        );
    }
    let measured = format!("{MEASURED}toluene,liquid_density,870,kg/m3,298.15,,own\n");
    let found = faults(&[("measured.csv", &measured), ("density.csv", &curve)]);
    assert_eq!(found.len(), 1, "{found:?}");
    assert!(
        found[0].contains("elsewhere it is 870.0 kg/m3"),
        "{found:?}"
    );
}

// ------------------------------------------------------------ Clausius–Clapeyron

/// Values whose measured enthalpy and vapor-pressure curve part by more than is
/// allowed to a user's; `groups/substances/README.md` says what is to be thought of them.
const KNOWN_TO_PART: [&str; 2] = ["benzonitrile", "glycerol"];

#[test]
fn built_in_enthalpies_of_vaporization_fit_their_curves() {
    let mut deviations = Vec::new();
    let mut parted = Vec::new();
    for substance in built_in().iter() {
        let Some(Ok(boiling)) = substance.measured(Property::BoilingPoint, 0.0) else {
            continue;
        };
        for constant in substance.values(Property::EnthalpyOfVaporization) {
            let t = constant.temperature_k.unwrap_or(boiling.value);
            let Some(Ok(found)) = substance.clapeyron_enthalpy(t) else {
                continue;
            };
            if substance.family() == Some("acids") {
                continue;
            }
            let deviation = constant.value / found.enthalpy_j_per_mol - 1.0;
            if deviation > 0.09 || deviation < -0.09 - found.ideal_excess {
                parted.push(substance.name().to_string());
            }
            if found.delta_z < 1.0 {
                deviations.push(deviation.abs());
            }
        }
    }
    deviations.sort_by(f64::total_cmp);
    let at = |part: f64| deviations[(part * deviations.len() as f64) as usize];
    assert!(deviations.len() >= 150, "{}", deviations.len());
    assert!(
        at(0.5) < 0.01 && at(0.95) < 0.055,
        "{} {}",
        at(0.5),
        at(0.95)
    );
    parted.sort();
    assert_eq!(parted, KNOWN_TO_PART);
}

/// Water at 25 degC: 43.99 kJ/mol; benzene at 25 degC: 33.83 kJ/mol (V. Majer, V. Svoboda,
/// Enthalpies of Vaporization of Organic Compounds, 1985, and steam tables, from memory).
#[test]
fn enthalpies_of_vaporization_at_room_temperature() {
    for (name, wanted) in [("water", 43_990.0), ("benzene", 33_830.0)] {
        let found = built_in().find(name).unwrap().clapeyron_enthalpy(298.15);
        let found = found.unwrap().unwrap();
        let part = found.enthalpy_j_per_mol / wanted - 1.0;
        assert!(part.abs() < 0.015, "{name}: {found:?}");
    }
    let water = built_in().find("water").unwrap();
    assert!(water.clapeyron_enthalpy(640.0).unwrap().is_err());
}

// ------------------------------------------------------------ properties

proptest! {
    #![proptest_config(ProptestConfig::with_cases(400))]

    /// The temperature of saturation inverts the pressure, and its slope is the
    /// central difference, wherever a built-in curve reaches.
    #[test]
    fn saturation_inverts_the_curve(
        index in any::<prop::sample::Index>(),
        part in 0.02_f64..0.98,
    ) {
        let curves: Vec<_> = built_in().iter().flat_map(|one| one.vapor_pressures()).collect();
        let curve = *index.get(&curves);
        let (low, high) = curve.limits_k();
        let ends = [low, high].map(|t| curve.pressure_pa(t).unwrap().ln());
        let pressure = (ends[0] + part * (ends[1] - ends[0])).exp();
        let (t, slope) = curve.saturation_temperature_and_slope(pressure).unwrap();
        prop_assert!((low..=high).contains(&t));
        prop_assert!((curve.pressure_pa(t).unwrap() / pressure - 1.0).abs() < 1e-9);
        let h = 1e-4 * pressure;
        let at = |p: f64| curve.saturation_temperature_k(p).unwrap();
        let difference = (at(pressure + h) - at(pressure - h)) / (2.0 * h);
        prop_assert!((slope / difference - 1.0).abs() < 1e-4, "{} {}", slope, difference);
    }

    /// Vapor pressure rises between any two temperatures a built-in curve allows.
    #[test]
    fn vapor_pressure_rises(
        index in any::<prop::sample::Index>(),
        (one, other) in (0.0_f64..1.0, 0.0_f64..1.0),
    ) {
        let curves: Vec<_> = built_in().iter().flat_map(|one| one.vapor_pressures()).collect();
        let curve = *index.get(&curves);
        let (low, high) = curve.limits_k();
        let place = |part: f64| low + part * (high - low);
        let (cold, warm) = (place(one.min(other)), place(one.max(other)));
        prop_assume!(warm - cold > 1e-6);
        prop_assert!(curve.pressure_pa(cold).unwrap() < curve.pressure_pa(warm).unwrap());
    }

}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(60))]

    /// What a user writes is what comes back, in whatever unit and order.
    #[test]
    fn a_user_s_file_comes_back(
        densities in prop::collection::btree_map(280_u32..360, 700_u32..1300, 1..6),
        celsius in -60_i32..120,
    ) {
        let mut rows = format!("glow oil,flash_point,{celsius},degC,,,own\n");
        for (t, density) in densities.iter().rev() {
            let litre = f64::from(*density) / 1000.0;
            rows.push_str(&format!("glow oil,liquid_density,{litre},kg/L,{t},,own\n"));
        }
        let table = oil(&rows);
        let flash = of(&table, "glow oil", Property::FlashPoint, 0.0).value;
        prop_assert!((flash - 273.15 - f64::from(celsius)).abs() < 1e-9);
        for (&t, &density) in &densities {
            let found = of(&table, "glow oil", Property::LiquidDensity, f64::from(t));
            prop_assert!((found.value - f64::from(density)).abs() < 1e-9);
        }
        let curve = table.find("glow oil").unwrap().liquid_density().unwrap();
        let (low, high) = curve.range_k();
        prop_assert_eq!(low, f64::from(*densities.keys().next().unwrap()));
        prop_assert_eq!(high, f64::from(*densities.keys().last().unwrap()));
    }

    /// Saturation through a user's own points, exact at each of them.
    #[test]
    fn points_of_vapor_pressure_are_met(
        steps in prop::collection::vec((4.0_f64..30.0, 0.1_f64..1.5), 2..6),
    ) {
        let (mut t, mut ln_p) = (320.0, 6.0);
        let mut rows = String::new();
        let mut points = Vec::new();
        for (dt, rise) in steps {
            t += dt;
            ln_p += rise;
            points.push((t, f64::exp(ln_p)));
            rows.push_str(&format!("glow oil,vapor_pressure,{},Pa,{t},,own\n", f64::exp(ln_p)));
        }
        let table = oil(&rows);
        let curve = table.find("glow oil").unwrap().vapor_pressure().unwrap();
        for (t, p) in points {
            prop_assert!((curve.pressure_pa(t).unwrap() / p - 1.0).abs() < 1e-9);
            prop_assert!((curve.saturation_temperature_k(p).unwrap() - t).abs() < 1e-6);
        }
        prop_assert!(curve.saturation_temperature_k(STANDARD_ATMOSPHERE_PA * 1e6).is_err());
    }
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(25))]

    /// Any text is a table or a fault, never a panic.
    #[test]
    fn no_table_panics(
        rows in prop::collection::vec("(toluene|glow oil|[a-z;,\"]{0,9}),(boiling_point|liquid_density|vapor_pressure|liquid_viscosity|enthalpy_of_vaporization|[a-z_]{0,9}),-?[0-9e.]{0,5},(K|degC|kPa|Pa|-|mPa s|kg/m3|kJ/mol|[a-z]{0,3}),-?[0-9.e]{0,6},[0-9.e-]{0,6},(own)?", 0..6),
        garbage in "\\PC{0,120}",
    ) {
        let measured = format!("{MEASURED}{}\n", rows.join("\n"));
        let _ = with(&[("substances.csv", SUBSTANCES), ("measured.csv", &measured)]);
        for name in ["substances.csv", "measured.csv", "hansen.csv", "vapor_pressure.csv", "density.csv", "hansen_spheres.csv", "supply.csv"] {
            let _ = with(&[(name, &garbage)]);
        }
        let _ = with(&[("vapor_pressure.csv", &format!("{VAPOR}{garbage}\n"))]);
        let _ = with(&[("density.csv", &format!("{DENSITY}{garbage}\n"))]);
    }
}
