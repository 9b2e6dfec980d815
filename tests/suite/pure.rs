//! Pure-component methods: transcription of the table, reproduction of worked
//! examples, and what has to hold for every molecule.

use groupsmith::groups::GroupCounts;
use groupsmith::pure::joback::{self, Contributions, State, Term};
use groupsmith::pure::{
    Estimates, Given, PureMethods, StructureFacts, default_method, estimate_all, methods_of,
};
use groupsmith::quantity::{Absent, Estimate, Flag, Property, Status};

fn counts(text: &str) -> GroupCounts {
    GroupCounts::from_text(text).expect("test counts are well formed")
}

fn facts(table: &Contributions, counts: &GroupCounts, molar_mass: f64) -> StructureFacts {
    let composition = table.atoms_of(counts).expect("test counts are groups");
    StructureFacts::new(composition, molar_mass, 0)
}

fn measured(value: f64) -> Estimate {
    Estimate {
        status: Status::Measured,
        ..Estimate::new(value, "measured")
    }
}

fn value(all: &Estimates, property: Property) -> f64 {
    all[property as usize]
        .as_ref()
        .expect("property is present")
        .value
}

/// Cells of the printed table, from memory of it.
#[test]
fn table_holds_printed_cells() {
    let table = Contributions::built_in();
    let cells = [
        (1, Term::Tb, "23.58"),
        (1, Term::EtaA, "548.29"),
        (2, Term::Pc, "0"),
        (4, Term::HFus, "-1.460"),
        (11, Term::CpC, "-8.00e-6"),
        (14, Term::Tc, "0.0082"),
        (15, Term::Vc, "32"),
        (16, Term::Tb, "-0.03"),
        (17, Term::HForm, "-71.55"),
        (20, Term::Tc, "0.0741"),
        (21, Term::Vc, "-25"),
        (27, Term::Tb, "169.09"),
        (29, Term::Tb, "-10.50"),
        (34, Term::Pc, "-0.0099"),
        (38, Term::GForm, "-16.83"),
        (41, Term::HVap, "5.984"),
    ];
    for (number, term, printed) in cells {
        let printed: f64 = printed.parse().expect("a number");
        assert_eq!(
            table.contribution(number, term),
            Some(printed),
            "group {number}, {term:?}"
        );
    }
    assert_eq!(table.formula(1), Some("-CH3"));
    assert_eq!(table.formula(41), Some("-S- (ring)"));
    assert_eq!(table.formula(42), None);
    assert_eq!(table.is_ring_group(11), Some(true));
    assert_eq!(table.is_ring_group(2), Some(false));
}

/// Groups whose viscosity contributions the table leaves blank, and the other blanks.
#[test]
fn blank_cells_stay_blank() {
    let table = Contributions::built_in();
    let without = |term| -> Vec<u16> {
        (1..=41)
            .filter(|&number| table.contribution(number, term).is_none())
            .collect()
    };
    let viscosity = [
        7, 8, 9, 10, 13, 16, 25, 30, 31, 32, 33, 34, 35, 36, 37, 38, 39, 40, 41,
    ];
    assert_eq!(without(Term::EtaA), viscosity);
    assert_eq!(without(Term::EtaB), viscosity);
    assert_eq!(without(Term::Tc), [36]);
    assert_eq!(without(Term::Pc), [36]);
    assert_eq!(without(Term::Vc), [34, 36]);
    assert_eq!(without(Term::Tm), [34]);
    assert_eq!(without(Term::GForm), [34]);
    assert_eq!(without(Term::CpA), [34]);
    assert_eq!(without(Term::HFus), [34, 36]);
    for term in [Term::Tb, Term::HForm, Term::HVap] {
        assert!(without(term).is_empty(), "{term:?}");
    }
}

#[test]
fn a_blank_contribution_names_the_group() {
    let methods = PureMethods::built_in();
    // Acetonitrile: every property of the table but the viscosity.
    let groups = counts("1:1;37:1");
    let facts = facts(&methods.joback, &groups, 0.041_053);
    let all = estimate_all(&methods, Ok(&groups), &facts, Given::default(), 298.15);
    assert_eq!(
        all[Property::LiquidViscosity as usize],
        Err(Absent::NoContribution {
            method: joback::ID,
            group: "-CN".into()
        })
    );
    assert!(all[Property::BoilingPoint as usize].is_ok());
}

/// The paper's example, p-dichlorobenzene, and acetone as handbooks print it;
/// both from memory.
#[test]
fn worked_examples_come_out() {
    use Property::*;
    let table = Contributions::built_in();
    let dichlorobenzene = "14:4;15:2;17:2";
    let acetone = "1:2;24:1";
    // (counts, molar mass g/mol, property, temperature, measured T_b, printed value, half a printed digit)
    let cases = [
        (dichlorobenzene, BoilingPoint, 298.0, None, 443.4, 0.05),
        (dichlorobenzene, MeltingPoint, 298.0, None, 256.0, 0.5),
        (
            dichlorobenzene,
            CriticalTemperature,
            298.0,
            None,
            675.0,
            0.5,
        ),
        (
            dichlorobenzene,
            CriticalPressure,
            298.0,
            None,
            41.5e5,
            0.05e5,
        ),
        (dichlorobenzene, CriticalVolume, 298.0, None, 362e-6, 0.6e-6),
        (
            dichlorobenzene,
            IdealGasEnthalpyOfFormation,
            298.0,
            None,
            26.41e3,
            5.0,
        ),
        (
            dichlorobenzene,
            IdealGasGibbsEnergyOfFormation,
            298.0,
            None,
            78.56e3,
            5.0,
        ),
        (
            dichlorobenzene,
            EnthalpyOfVaporization,
            298.0,
            None,
            40.66e3,
            5.0,
        ),
        (dichlorobenzene, EnthalpyOfFusion, 298.0, None, 13.3e3, 50.0),
        (
            dichlorobenzene,
            LiquidViscosity,
            333.8,
            None,
            7.26e-4,
            0.01e-4,
        ),
        (acetone, BoilingPoint, 298.0, None, 322.11, 0.005),
        (acetone, MeltingPoint, 298.0, None, 173.5, 0.05),
        (acetone, CriticalTemperature, 298.0, None, 500.559, 0.0005),
        (acetone, CriticalPressure, 298.0, None, 48.025e5, 50.0),
        (acetone, CriticalVolume, 298.0, None, 209.5e-6, 0.05e-6),
        (
            acetone,
            IdealGasEnthalpyOfFormation,
            298.0,
            None,
            -217.83e3,
            5.0,
        ),
        (
            acetone,
            IdealGasGibbsEnergyOfFormation,
            298.0,
            None,
            -154.54e3,
            5.0,
        ),
        (acetone, IdealGasHeatCapacity, 300.0, None, 75.32, 0.01),
        (acetone, EnthalpyOfVaporization, 298.0, None, 29.018e3, 0.5),
        (acetone, EnthalpyOfFusion, 298.0, None, 5.125e3, 0.5),
        (
            acetone,
            CriticalTemperature,
            298.0,
            Some(329.25),
            511.65,
            0.1,
        ),
    ];
    for (text, property, temperature_k, boiling_point_k, printed, tolerance) in cases {
        let groups = counts(text);
        let molar_mass = if text == acetone { 0.058_08 } else { 0.147_00 };
        let facts = facts(&table, &groups, molar_mass);
        let state = State {
            boiling_point_k,
            ..State::at(temperature_k)
        };
        let sums = table.sums(&groups).expect("groups of the table");
        let found = joback::close(property, &table, &sums, &facts, state)
            .expect("worked example has a value")
            .value;
        assert!(
            (found - printed).abs() <= tolerance,
            "{text} {property:?}: {found}, printed {printed}"
        );
    }
}

#[test]
fn defaults_are_registered_once() {
    for property in Property::ALL {
        let methods: Vec<_> = methods_of(property).collect();
        let defaults = methods
            .iter()
            .filter(|method| Some(**method) == default_method(property))
            .count();
        assert_eq!(defaults, usize::from(!methods.is_empty()), "{property:?}");
        for (position, method) in methods.iter().enumerate() {
            assert!(
                methods[..position]
                    .iter()
                    .all(|other| other.id != method.id),
                "{property:?} has {} twice",
                method.id
            );
        }
    }
}

#[test]
fn measured_values_replace_estimates_and_carry_on() {
    let methods = PureMethods::built_in();
    let groups = counts("1:2;24:1");
    let facts = facts(&methods.joback, &groups, 0.058_08);
    let given = [(Property::BoilingPoint, measured(329.2))];
    let all = estimate_all(&methods, Ok(&groups), &facts, Given(&given), 329.2);
    assert_eq!(value(&all, Property::BoilingPoint), 329.2);
    let vapor_pressure = all[Property::VaporPressure as usize].as_ref().unwrap();
    assert!((vapor_pressure.value / 101_325.0 - 1.0).abs() < 1e-12);
    assert!(vapor_pressure.flags.contains(Flag::RestsOnEstimate));
}
