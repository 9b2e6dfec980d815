//! The mixture room: reproduction of frozen values, thermodynamic identities, equilibrium.

use std::collections::HashMap;
use std::path::Path;

use groupsmith::groups::GroupCounts;
use groupsmith::mixture::{
    ActivityModel, AzeotropeKind, Component, Condition, Excess, Extremum, HostAtTemperature,
    IdealState, KeysAtTemperature, Liquid, LiquidMixture, MassFractions, MixtureError, ModelStatus,
    MoleFractions, Slips, Unifac, UnifacMixture, Vapor, VolumeFractions, azeotropes,
    bubble_pressure, bubble_temperature, liquid_phases, relative_volatility,
};
use groupsmith::numeric::central_difference;
use groupsmith::quantity::{Absent, Flag};
use proptest::prelude::*;

type Row = HashMap<String, String>;

fn read(name: &str) -> Vec<Row> {
    let path = Path::new(env!("CARGO_MANIFEST_DIR"))
        .join("tests/data/mixture")
        .join(name);
    csv::ReaderBuilder::new()
        .comment(Some(b'#'))
        .from_path(path)
        .unwrap()
        .deserialize()
        .collect::<Result<_, _>>()
        .unwrap()
}

fn numbers(row: &Row, name: &str, n: usize) -> Vec<f64> {
    (1..=n)
        .map(|i| row[&format!("{name}_{i}")].parse().unwrap())
        .collect()
}

fn built_in(model: ActivityModel, slips: Slips) -> Unifac {
    Unifac::built_in(model, slips).unwrap().unwrap()
}

fn component(unifac: &Unifac, groups: &str) -> Component {
    unifac
        .component(&GroupCounts::from_text(groups).unwrap())
        .unwrap()
}

fn mixture(unifac: &Unifac, groups: &[&str]) -> UnifacMixture {
    let components: Vec<_> = groups.iter().map(|text| component(unifac, text)).collect();
    unifac.mixture(&components).unwrap()
}

fn mixture_of_row(unifac: &Unifac, row: &Row) -> Result<UnifacMixture, MixtureError> {
    let n: usize = row["n"].parse().unwrap();
    let components: Vec<_> = (1..=n)
        .map(|i| component(unifac, &row[&format!("groups_{i}")]))
        .collect();
    unifac.mixture(&components)
}

fn model_of_reference(name: &str) -> ActivityModel {
    match name {
        "unifac_original" => ActivityModel::Unifac,
        "dortmund_2016" => ActivityModel::UnifacDortmund,
        "dortmund_2006" => ActivityModel::UnifacDortmund2006,
        other => panic!("unknown model {other}"),
    }
}

fn assert_close(ours: f64, theirs: f64, tolerance: f64, what: &str) {
    assert!(
        (ours - theirs).abs() <= tolerance,
        "{what}: {ours} instead of {theirs}"
    );
}

#[test]
fn frozen_model_values_are_reproduced() {
    for (model, rows) in [
        (ActivityModel::Unifac, 60),
        (ActivityModel::UnifacDortmund, 65),
        (ActivityModel::UnifacDortmund2006, 60),
    ] {
        let unifac = built_in(model, Slips::AsCirculated);
        let table = read(&format!("{}.csv", model.id()));
        assert_eq!(table.len(), rows);
        for row in &table {
            let id = &row["id"];
            let mixture = mixture_of_row(&unifac, row).unwrap();
            let n = mixture.components();
            let x = numbers(row, "x", n);
            let mut state = mixture.state(row["T_K"].parse().unwrap()).unwrap();
            let mut ln_gamma = vec![0.0; n];
            let (mut combinatorial, mut residual) = (vec![0.0; n], vec![0.0; n]);
            state.ln_gamma(&x, &mut ln_gamma).unwrap();
            state
                .ln_gamma_parts(&x, &mut combinatorial, &mut residual)
                .unwrap();
            // the files carry 12 significant digits
            for (ours, name) in [
                (&ln_gamma, "lngamma"),
                (&combinatorial, "lngamma_comb"),
                (&residual, "lngamma_res"),
            ] {
                for (a, b) in ours.iter().zip(numbers(row, name, n)) {
                    assert_close(*a, b, 1e-8, &format!("{id} {name}"));
                }
            }
            let excess = Excess::of(&mut state, &x).unwrap();
            let gibbs = row["GE_J_per_mol"].parse().unwrap();
            let enthalpy = row["HE_J_per_mol"].parse().unwrap();
            assert_close(excess.gibbs_j_per_mol, gibbs, 1e-5, id);
            assert_close(excess.enthalpy_j_per_mol, enthalpy, 1e-5, id);
            assert_close(
                excess.entropy_j_per_mol_k * state.temperature_k(),
                enthalpy - gibbs,
                1e-5,
                id,
            );
        }
    }
}

#[test]
fn an_unpublished_pair_is_named_and_never_a_number() {
    let table = read("missing_pairs.csv");
    assert!(table.len() >= 20);
    for row in &table {
        let unifac = built_in(model_of_reference(&row["model"]), Slips::Corrected);
        let pairs: Vec<_> = row["missing_main_group_pairs"].split_whitespace().collect();
        match mixture_of_row(&unifac, row) {
            Err(
                fault @ MixtureError::MissingPair {
                    first_number,
                    second_number,
                    ..
                },
            ) => {
                assert!(pairs.contains(&format!("{first_number}-{second_number}").as_str()));
                assert!(matches!(fault.absent(), Absent::NoInteraction { .. }));
            }
            other => panic!("{}: {other:?}", row["id"]),
        }
    }
}

#[test]
fn printed_worked_examples_are_reproduced() {
    let table = read("published_examples.csv");
    assert_eq!(table.len(), 12);
    for row in &table {
        let unifac = built_in(model_of_reference(&row["model"]), Slips::AsCirculated);
        let mixture = mixture_of_row(&unifac, row).unwrap();
        let n = mixture.components();
        let x = numbers(row, "x", n);
        let tolerance: f64 = row["tolerance"].parse().unwrap();
        let mut state = mixture.state(row["T_K"].parse().unwrap()).unwrap();
        if row["quantity"] == "HE J/mol" {
            let printed = row["printed_1"].parse().unwrap();
            let ours = Excess::of(&mut state, &x).unwrap().enthalpy_j_per_mol;
            assert_close(ours, printed, tolerance, &row["id"]);
            continue;
        }
        let (mut combinatorial, mut residual) = (vec![0.0; n], vec![0.0; n]);
        state
            .ln_gamma_parts(&x, &mut combinatorial, &mut residual)
            .unwrap();
        for (i, printed) in numbers(row, "printed", n).into_iter().enumerate() {
            let ours = match row["quantity"].as_str() {
                "gamma" => (combinatorial[i] + residual[i]).exp(),
                "ln gamma combinatorial" => combinatorial[i],
                "ln gamma residual" => residual[i],
                other => panic!("unknown quantity {other}"),
            };
            assert_close(ours, printed, tolerance, &row["id"]);
        }
    }
}

/// Mixtures for the identities: alcohols, water, aromatics, ethers, an acid, a long chain.
const DORTMUND_MIXTURES: [&[&str]; 4] = [
    &["1:1;2:1;14:1", "16:1", "9:6"],
    &["78:6", "9:5;11:1", "1:1;18:1", "1:2;2:14"],
    &["27:1;78:2", "50:1", "1:1;42:1"],
    &["15:1", "1:2;2:4"],
];
const ORIGINAL_MIXTURES: [&[&str]; 3] = [
    &["1:1;2:1;14:1", "16:1", "9:6"],
    &["1:1;18:1", "1:2;2:1;25:1", "50:1", "15:1"],
    &["67:1", "16:1"],
];

fn each_mixture(mut check: impl FnMut(&UnifacMixture)) {
    for (model, mixtures) in [
        (ActivityModel::UnifacDortmund, &DORTMUND_MIXTURES[..]),
        (ActivityModel::UnifacDortmund2006, &DORTMUND_MIXTURES[..]),
        (ActivityModel::Unifac, &ORIGINAL_MIXTURES[..]),
    ] {
        let unifac = built_in(model, Slips::Corrected);
        for groups in mixtures {
            check(&mixture(&unifac, groups));
        }
    }
}

fn normalized(amounts: &[f64], n: usize) -> Vec<f64> {
    let sum: f64 = amounts[..n].iter().sum();
    amounts[..n].iter().map(|amount| amount / sum).collect()
}

/// n g^E/RT of amounts that need not add up to 1.
fn excess_of_amounts(mixture: &UnifacMixture, temperature_k: f64, amounts: &[f64]) -> f64 {
    let n = amounts.len();
    let mut ln_gamma = vec![0.0; n];
    let x = normalized(amounts, n);
    mixture
        .state(temperature_k)
        .unwrap()
        .ln_gamma(&x, &mut ln_gamma)
        .unwrap();
    amounts.iter().zip(&ln_gamma).map(|(n, g)| n * g).sum()
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(24))]

    #[test]
    fn ln_gamma_is_the_partial_molar_excess_gibbs_energy(
        amounts in prop::array::uniform4(0.02_f64..1.0), temperature_k in 250.0_f64..450.0
    ) {
        each_mixture(|mixture| {
            let n = mixture.components();
            let x = normalized(&amounts, n);
            let mut ln_gamma = vec![0.0; n];
            let mut state = mixture.state(temperature_k).unwrap();
            state.ln_gamma(&x, &mut ln_gamma).unwrap();
            for i in 0..n {
                let numerical = central_difference(
                    |amount| {
                        let mut amounts = x.clone();
                        amounts[i] = amount;
                        excess_of_amounts(mixture, temperature_k, &amounts)
                    },
                    x[i],
                    1e-5 * x[i],
                );
                assert_close(ln_gamma[i], numerical, 1e-6, "d(n gE/RT)/dn");
            }
        });
    }

    #[test]
    fn composition_derivatives_obey_gibbs_duhem_and_differences(
        amounts in prop::array::uniform4(0.02_f64..1.0), temperature_k in 250.0_f64..450.0
    ) {
        each_mixture(|mixture| {
            let n = mixture.components();
            let x = normalized(&amounts, n);
            let mut state = mixture.state(temperature_k).unwrap();
            let mut slopes = vec![0.0; n * n];
            state.composition_derivatives(&x, &mut slopes).unwrap();
            for j in 0..n {
                let duhem: f64 = (0..n).map(|i| x[i] * slopes[i * n + j]).sum();
                assert_close(duhem, 0.0, 1e-11, "Gibbs-Duhem");
                for i in 0..n {
                    assert_close(slopes[i * n + j], slopes[j * n + i], 1e-9, "symmetry");
                    let numerical = central_difference(
                        |amount| {
                            let mut amounts = x.clone();
                            amounts[j] = amount;
                            let mut ln_gamma = vec![0.0; n];
                            state.ln_gamma(&normalized(&amounts, n), &mut ln_gamma).unwrap();
                            ln_gamma[i]
                        },
                        x[j],
                        1e-5 * x[j],
                    );
                    let scale = 1.0 + numerical.abs();
                    assert_close(slopes[i * n + j], numerical, 1e-5 * scale, "d ln gamma/dn");
                }
            }
        });
    }

    #[test]
    fn enthalpy_obeys_gibbs_helmholtz(
        amounts in prop::array::uniform4(0.02_f64..1.0), temperature_k in 250.0_f64..450.0
    ) {
        each_mixture(|mixture| {
            let x = normalized(&amounts, mixture.components());
            let gibbs_per_t = |temperature_k: f64| {
                let mut state = mixture.state(temperature_k).unwrap();
                Excess::of(&mut state, &x).unwrap().gibbs_j_per_mol / temperature_k
            };
            let slope = central_difference(gibbs_per_t, temperature_k, 0.05);
            let mut state = mixture.state(temperature_k).unwrap();
            let excess = Excess::of(&mut state, &x).unwrap();
            let numerical = -temperature_k * temperature_k * slope;
            assert_close(excess.enthalpy_j_per_mol, numerical, 2e-3, "Gibbs-Helmholtz");
        });
    }

    #[test]
    fn ln_gamma_vanishes_towards_the_pure_component(
        temperature_k in 250.0_f64..450.0, i in 0_usize..4
    ) {
        each_mixture(|mixture| {
            let n = mixture.components();
            let i = i % n;
            let mut state = mixture.state(temperature_k).unwrap();
            let mut ln_gamma = vec![0.0; n];
            let mut x = vec![0.0; n];
            x[i] = 1.0;
            state.ln_gamma(&x, &mut ln_gamma).unwrap();
            assert_close(ln_gamma[i], 0.0, 1e-13, "pure");
            assert!(ln_gamma.iter().all(|value| value.is_finite()));
        });
    }

    #[test]
    fn order_and_splitting_change_nothing(
        amounts in prop::array::uniform3(0.0_f64..1.0), share in 0.0_f64..1.0,
        temperature_k in 250.0_f64..450.0
    ) {
        prop_assume!(amounts.iter().sum::<f64>() > 0.01);
        let unifac = built_in(ActivityModel::UnifacDortmund, Slips::Corrected);
        let [a, b, c] = ["1:1;2:1;14:1", "16:1", "1:1;2:1;21:1"];
        let x = normalized(&amounts, 3);
        let ln_gamma = |groups: &[&str], x: &[f64]| {
            let mut out = vec![0.0; x.len()];
            mixture(&unifac, groups).state(temperature_k).unwrap().ln_gamma(x, &mut out).unwrap();
            out
        };
        let plain = ln_gamma(&[a, b, c], &x);
        let turned = ln_gamma(&[c, a, b], &[x[2], x[0], x[1]]);
        let split = ln_gamma(&[a, b, c, b], &[x[0], share * x[1], x[2], (1.0 - share) * x[1]]);
        for i in 0..3 {
            assert_close(turned[(i + 1) % 3], plain[i], 1e-12, "order");
            assert_close(split[i], plain[i], 1e-12, "splitting");
        }
        assert_close(split[3], plain[1], 1e-12, "splitting");
    }

    #[test]
    fn the_batch_path_agrees_with_the_mixture(temperature_k in 250.0_f64..450.0, share in 0.0_f64..1.0) {
        for model in [ActivityModel::Unifac, ActivityModel::UnifacDortmund] {
            let unifac = built_in(model, Slips::Corrected);
            let keys = [component(&unifac, "1:1;2:1;14:1"), component(&unifac, "1:1;2:1;21:1")];
            let groups = unifac.at_temperature(temperature_k).unwrap();
            let batch = KeysAtTemperature::new(&groups, &keys).unwrap();
            let host = HostAtTemperature::new(&groups, &keys, &[share, 1.0 - share]).unwrap();
            for text in ["16:1", "9:6", "1:2;2:14", "1:1;2:2;25:1", "67:1", "50:1", "1:1;2:3;14:1;3:1;9:4;10:2"] {
                let candidate = component(&unifac, text);
                let mixture = unifac.mixture(&[keys[0].clone(), keys[1].clone(), candidate.clone()]).unwrap();
                let mut state = mixture.state(temperature_k).unwrap();
                let mut expected = [0.0; 3];
                state.ln_gamma(&[0.0, 0.0, 1.0], &mut expected).unwrap();
                let mut found = [0.0; 2];
                batch.ln_gamma_inf(&candidate, &mut found).unwrap();
                assert_close(found[0], expected[0], 1e-11, text);
                assert_close(found[1], expected[1], 1e-11, text);
                state.ln_gamma(&[share, 1.0 - share, 0.0], &mut expected).unwrap();
                assert_close(host.ln_gamma_inf(&candidate).unwrap(), expected[2], 1e-11, text);
            }
        }
    }
}

#[test]
fn the_batch_path_names_a_missing_pair() {
    let unifac = built_in(ActivityModel::Unifac, Slips::Corrected);
    let groups = unifac.at_temperature(298.15).unwrap();
    // dimethyl sulfide (48) with bromobenzene (33): not published
    let sulfide = component(&unifac, "1:1;102:1");
    let bromide = component(&unifac, "9:5;10:1;64:1");
    let keys = KeysAtTemperature::new(&groups, std::slice::from_ref(&sulfide)).unwrap();
    let gap = keys.ln_gamma_inf(&bromide, &mut [0.0]).unwrap_err();
    assert!((gap.first == 3 || gap.first == 33) && gap.second == 48);
    let host = HostAtTemperature::new(&groups, &[sulfide], &[1.0]).unwrap();
    assert!(host.ln_gamma_inf(&bromide).is_err());
    let text = unifac.tables().gap_error(gap).to_string();
    assert!(text.contains("CH2S"), "{text}");
}

#[test]
fn fractions_are_never_renormalized_in_silence() {
    let unifac = built_in(ActivityModel::Unifac, Slips::Corrected);
    let mixture = mixture(&unifac, &["1:1;2:1;14:1", "16:1"]);
    let mut state = mixture.state(330.0).unwrap();
    let (mut full, mut part) = ([0.0; 2], [0.0; 2]);
    state.ln_gamma(&[0.5, 0.5], &mut full).unwrap();
    state.ln_gamma(&[0.4, 0.4], &mut part).unwrap();
    assert!((full[0] - part[0]).abs() > 1e-3);
    assert!(matches!(
        state.composition_derivatives(&[0.4, 0.4], &mut [0.0; 4]),
        Err(MixtureError::Sum { .. })
    ));
}

#[test]
fn impossible_input_is_refused() {
    let unifac = built_in(ActivityModel::Unifac, Slips::Corrected);
    let unknown = GroupCounts::from_text("1:1;999:1").unwrap();
    assert!(matches!(
        unifac.component(&unknown),
        Err(MixtureError::UnknownGroup { number: 999, .. })
    ));
    for none in ["", "4:3"] {
        let counts = GroupCounts::from_text(none).unwrap();
        assert!(matches!(
            unifac.component(&counts),
            Err(MixtureError::NoSurface { .. })
        ));
    }
    assert!(matches!(
        unifac.mixture(&[]),
        Err(MixtureError::NoComponents)
    ));
    let mixture = mixture(&unifac, &["1:1;2:1;14:1", "16:1"]);
    for temperature_k in [0.0, -1.0, 1e-3, f64::NAN, f64::INFINITY] {
        assert!(matches!(
            mixture.state(temperature_k),
            Err(MixtureError::Temperature { .. })
        ));
    }
    let mut state = mixture.state(300.0).unwrap();
    let mut out = [0.0; 2];
    assert!(matches!(
        state.ln_gamma(&[1.0], &mut out),
        Err(MixtureError::Length { .. })
    ));
    assert!(matches!(
        state.ln_gamma(&[-0.1, 1.1], &mut out),
        Err(MixtureError::Value { component: 1, .. })
    ));
    assert!(matches!(
        state.ln_gamma(&[0.0, 0.0], &mut out),
        Err(MixtureError::Empty)
    ));
    assert!(state.set_temperature(-5.0).is_err());
    assert!(state.ln_gamma(&[0.5, 0.5], &mut out).is_err());
}

#[test]
fn every_model_of_the_contract_is_built_in_or_reserved() {
    for id in ["ideal", "unifac", "unifac-dortmund", "unifac-dortmund-2006"] {
        assert!(matches!(
            ActivityModel::from_id(id),
            Some(ModelStatus::BuiltIn(model)) if model.id() == id
        ));
    }
    for id in [
        "unifac-lyngby",
        "unifac-lle",
        "unifac-2",
        "unifac-dortmund-2",
        "regular-solution",
        "margules",
        "van-laar",
        "wilson",
        "nrtl",
        "uniquac",
    ] {
        assert_eq!(ActivityModel::from_id(id), Some(ModelStatus::Reserved));
    }
    assert_eq!(ActivityModel::from_id("unifac-3"), None);
}

/// Antoine coefficients in log10(p/mmHg), t in °C, from memory of the usual handbook tables:
/// ethanol, water, benzene, chloroform, acetone, 1-butanol.
fn antoine(name: &str) -> (f64, f64, f64) {
    match name {
        "ethanol" => (8.20417, 1642.89, 230.300),
        "water" => (8.07131, 1730.63, 233.426),
        "benzene" => (6.90565, 1211.033, 220.790),
        "chloroform" => (6.95465, 1170.966, 226.232),
        "acetone" => (7.11714, 1210.595, 229.664),
        "1-butanol" => (7.47680, 1362.39, 178.77),
        other => panic!("no coefficients of {other}"),
    }
}

fn pressures<'a>(names: &'a [&'a str]) -> impl Fn(usize, f64) -> Result<f64, Absent> + 'a {
    move |component, temperature_k| {
        let (a, b, c) = antoine(names[component]);
        let log10_mmhg = a - b / (temperature_k - 273.15 + c);
        Ok(10_f64.powf(log10_mmhg) * 101_325.0 / 760.0)
    }
}

const RANGE_K: (f64, f64) = (260.0, 480.0);

#[test]
fn the_bubble_point_closes_and_a_pure_liquid_boils_at_its_boiling_point() {
    let unifac = built_in(ActivityModel::UnifacDortmund, Slips::Corrected);
    let mixture = mixture(&unifac, &["1:1;2:1;14:1", "16:1"]);
    let mut state = mixture.state(300.0).unwrap();
    let closure = pressures(&["ethanol", "water"]);
    let vapor = Vapor {
        pressures: &closure,
        associates: &[false, false],
        range_k: RANGE_K,
    };
    for x1 in [0.0, 0.1, 0.5, 0.9, 1.0] {
        let x = [x1, 1.0 - x1];
        let point = bubble_temperature(&mut state, &x, 101_325.0, vapor, 350.0).unwrap();
        let again = bubble_pressure(&mut state, &x, vapor).unwrap();
        assert_close(again.pressure_pa / 101_325.0, 1.0, 1e-9, "pressure");
        assert_close(point.y.iter().sum(), 1.0, 1e-12, "vapor");
        assert_eq!(point.y, again.y);
        assert!(point.flags.is_empty());
        if x1 == 1.0 {
            let own = closure(0, point.temperature_k).unwrap();
            assert_close(own / 101_325.0, 1.0, 1e-9, "pure");
        }
    }
    let far = Vapor {
        range_k: (260.0, 300.0),
        ..vapor
    };
    assert!(matches!(
        bubble_temperature(&mut state, &[0.5, 0.5], 101_325.0, far, 280.0),
        Err(MixtureError::NotBracketed { .. })
    ));
    let acid = Vapor {
        associates: &[true, false],
        ..vapor
    };
    let flagged = bubble_pressure(&mut state, &[0.5, 0.5], acid).unwrap();
    assert!(flagged.flags.contains(Flag::VaporAssociationNotModelled));
    let without = bubble_pressure(&mut state, &[0.0, 1.0], acid).unwrap();
    assert!(without.flags.is_empty());
    let absent = |_: usize, _: f64| Err(Absent::NoMethod);
    let nothing = Vapor {
        pressures: &absent,
        ..vapor
    };
    assert!(matches!(
        bubble_temperature(&mut state, &[0.5, 0.5], 101_325.0, nothing, 350.0),
        Err(MixtureError::VaporPressure { component: 1, .. })
    ));
}

#[test]
fn known_azeotropes_are_found() {
    let unifac = built_in(ActivityModel::UnifacDortmund, Slips::Corrected);
    // measured: Horsley, Azeotropic Data III (from memory); tolerances are those of the model
    for (names, groups, kind, t_k, y1) in [
        (
            ["ethanol", "water"],
            ["1:1;2:1;14:1", "16:1"],
            "min",
            351.3,
            0.90,
        ),
        (
            ["ethanol", "benzene"],
            ["1:1;2:1;14:1", "9:6"],
            "min",
            341.0,
            0.45,
        ),
        (
            ["acetone", "chloroform"],
            ["1:1;18:1", "50:1"],
            "max",
            337.6,
            0.34,
        ),
        (
            ["1-butanol", "water"],
            ["1:1;2:3;14:1", "16:1"],
            "hetero",
            365.9,
            0.25,
        ),
    ] {
        let mixture = mixture(&unifac, &groups);
        let mut state = mixture.state(300.0).unwrap();
        let closure = pressures(&names);
        let vapor = Vapor {
            pressures: &closure,
            associates: &[false, false],
            range_k: RANGE_K,
        };
        let found = azeotropes(&mut state, Condition::Pressure(101_325.0), vapor, 350.0).unwrap();
        assert_eq!(found.len(), 1, "{names:?}: {found:?}");
        let one = &found[0];
        assert_close(one.temperature_k, t_k, 1.0, names[0]);
        assert_close(one.y1, y1, 0.04, names[0]);
        assert_close(one.pressure_pa, 101_325.0, 1.0, names[0]);
        match &one.kind {
            AzeotropeKind::Homogeneous => {
                assert!(kind != "hetero", "{names:?}");
                let x = [one.y1, 1.0 - one.y1];
                let point = bubble_temperature(&mut state, &x, 101_325.0, vapor, 350.0).unwrap();
                assert_close(point.y[0], x[0], 1e-8, "vapor equals liquid");
            }
            AzeotropeKind::Heterogeneous { x1_low, x1_high } => {
                assert_eq!(kind, "hetero", "{names:?}");
                state.set_temperature(one.temperature_k).unwrap();
                assert_equal_activities(
                    &mut state,
                    &[*x1_low, 1.0 - x1_low],
                    &[*x1_high, 1.0 - x1_high],
                );
            }
        }
        let expected = if kind == "max" {
            Extremum::MaximumBoiling
        } else {
            Extremum::MinimumBoiling
        };
        assert_eq!(one.extremum, expected);

        // the same state from the other side, at its temperature
        let there = azeotropes(
            &mut state,
            Condition::Temperature(one.temperature_k),
            vapor,
            350.0,
        )
        .unwrap();
        assert_eq!(there.len(), 1);
        assert_close(there[0].y1, one.y1, 1e-6, "constant temperature");
        assert_close(
            there[0].pressure_pa / one.pressure_pa,
            1.0,
            1e-6,
            "constant temperature",
        );
    }
}

#[test]
fn an_ideal_mixture_has_no_azeotrope_and_one_liquid() {
    let ideal = LiquidMixture::Ideal(2);
    let mut boxed = ideal.state(300.0).unwrap();
    let state = &mut *boxed;
    assert!(LiquidMixture::Ideal(0).state(300.0).is_err());
    let closure = pressures(&["ethanol", "water"]);
    let vapor = Vapor {
        pressures: &closure,
        associates: &[false, false],
        range_k: RANGE_K,
    };
    let found = azeotropes(state, Condition::Pressure(101_325.0), vapor, 350.0).unwrap();
    assert!(found.is_empty());
    assert_eq!(liquid_phases(state, &[0.5, 0.5]).unwrap().len(), 1);
    let excess = Excess::of(state, &[0.5, 0.5]).unwrap();
    assert_eq!(excess.gibbs_j_per_mol, 0.0);
    assert_eq!(excess.enthalpy_j_per_mol, 0.0);
    assert!(matches!(
        azeotropes(
            &mut IdealState::new(3, 300.0).unwrap(),
            Condition::Pressure(101_325.0),
            vapor,
            350.0
        ),
        Err(MixtureError::NotBinary { found: 3, .. })
    ));
}

fn assert_equal_activities(state: &mut dyn Liquid, a: &[f64], b: &[f64]) {
    let n = a.len();
    let (mut ga, mut gb) = (vec![0.0; n], vec![0.0; n]);
    state.ln_gamma(a, &mut ga).unwrap();
    state.ln_gamma(b, &mut gb).unwrap();
    for i in (0..n).filter(|&i| a[i] > 0.0) {
        assert_close(a[i].ln() + ga[i], b[i].ln() + gb[i], 1e-8, "activity");
    }
}

/// g/RT of mixing.
fn gibbs(state: &mut dyn Liquid, x: &[f64]) -> f64 {
    let mut ln_gamma = vec![0.0; x.len()];
    state.ln_gamma(x, &mut ln_gamma).unwrap();
    x.iter()
        .zip(&ln_gamma)
        .filter(|(x, _)| **x > 0.0)
        .map(|(x, g)| x * (x.ln() + g))
        .sum()
}

#[test]
fn liquids_share_activities_close_the_balance_and_leave_no_lower_trial_phase() {
    let unifac = built_in(ActivityModel::UnifacDortmund, Slips::Corrected);
    for (groups, z, temperature_k, count) in [
        (&["1:1;2:3;14:1", "16:1"][..], &[0.2, 0.8][..], 298.15, 2),
        (&["1:2;2:4", "16:1"], &[0.5, 0.5], 298.15, 2),
        (&["1:2;2:4", "16:1"], &[0.99, 0.01], 298.15, 2),
        (&["1:2;2:4", "9:6"], &[0.5, 0.5], 298.15, 1),
        (&["1:1;2:1;14:1", "16:1"], &[0.3, 0.7], 298.15, 1),
        (
            &["9:6", "1:1;2:1;14:1", "16:1"],
            &[0.4, 0.2, 0.4],
            298.15,
            2,
        ),
        (
            &["9:6", "1:1;2:1;14:1", "16:1"],
            &[0.0, 0.5, 0.5],
            298.15,
            1,
        ),
        // hexane, nitromethane, water
        (&["1:2;2:4", "54:1", "16:1"], &[0.33, 0.33, 0.34], 293.15, 3),
    ] {
        let mixture = mixture(&unifac, groups);
        let mut state = mixture.state(temperature_k).unwrap();
        let phases = liquid_phases(&mut state, z).unwrap();
        assert_eq!(phases.len(), count, "{groups:?}: {phases:?}");
        assert_close(
            phases.iter().map(|p| p.fraction).sum(),
            1.0,
            1e-9,
            "fractions",
        );
        for (i, &z) in z.iter().enumerate() {
            let back: f64 = phases.iter().map(|p| p.fraction * p.x[i]).sum();
            assert_close(back, z, 1e-9, "balance");
        }
        for phase in &phases[1..] {
            assert_equal_activities(&mut state, &phases[0].x, &phase.x);
        }
        // no trial phase of a coarse grid lies below the common tangent plane
        let mut ln_gamma = vec![0.0; z.len()];
        state.ln_gamma(&phases[0].x, &mut ln_gamma).unwrap();
        let plane: Vec<f64> = phases[0]
            .x
            .iter()
            .zip(&ln_gamma)
            .map(|(x, g)| if *x > 0.0 { x.ln() + g } else { 0.0 })
            .collect();
        for a in 0..=20_u32 {
            for b in 0..=(20 - a) {
                let third = f64::from(20 - a - b) / 20.0;
                let w = match z.len() {
                    2 => vec![f64::from(a) / 20.0, 1.0 - f64::from(a) / 20.0],
                    _ => vec![f64::from(a) / 20.0, f64::from(b) / 20.0, third],
                };
                if w.iter().zip(z).any(|(w, z)| *w > 0.0 && *z == 0.0) {
                    continue;
                }
                let below: f64 = w.iter().zip(&plane).map(|(w, p)| w * p).sum();
                let distance = gibbs(&mut state, &w) - below;
                assert!(distance > -1e-7, "{groups:?}: {w:?} lies {distance} below");
            }
        }
    }
}

#[test]
fn a_stability_search_that_swings_settles() {
    let unifac = built_in(ActivityModel::Unifac, Slips::Corrected);
    // ethanol and hexane: plain substitution swings between two trial phases here
    let mixture = mixture(&unifac, &["1:1;2:1;14:1", "1:2;2:4"]);
    let mut state = mixture.state(298.15).unwrap();
    for x1 in [0.05, 0.1, 0.15, 0.2, 0.3] {
        let phases = liquid_phases(&mut state, &[x1, 1.0 - x1]).unwrap();
        for phase in &phases[1..] {
            assert_equal_activities(&mut state, &phases[0].x, &phase.x);
        }
    }
}

#[test]
fn a_solvent_moves_the_relative_volatility() {
    let unifac = built_in(ActivityModel::UnifacDortmund, Slips::Corrected);
    // ethanol, water, 1,2-ethanediol; the solvent hardly boils
    let mixture = mixture(&unifac, &["1:1;2:1;14:1", "16:1", "62:1"]);
    let mut state = mixture.state(300.0).unwrap();
    let keys = pressures(&["ethanol", "water"]);
    let closure = |component: usize, temperature_k: f64| match component {
        2 => Ok(1000.0),
        other => keys(other, temperature_k),
    };
    let vapor = Vapor {
        pressures: &closure,
        associates: &[false; 3],
        range_k: RANGE_K,
    };
    let points = [0.0, 0.5, 0.9, 1.0];
    let mut volatility =
        |ratio| relative_volatility(&mut state, ratio, &points, 101_325.0, vapor, 350.0).unwrap();
    let without = volatility(0.0);
    let with = volatility(1.0);
    assert!(without[3].alpha < 1.0, "azeotrope without solvent");
    assert!(
        with.iter().all(|point| point.alpha > 1.0),
        "broken by glycol"
    );
    assert!(relative_volatility(&mut state, -1.0, &points, 101_325.0, vapor, 350.0).is_err());
    assert!(relative_volatility(&mut state, 1.0, &[1.5], 101_325.0, vapor, 350.0).is_err());
}

#[test]
fn compositions_convert_there_and_back() {
    // ethanol and water; kg/mol, m3/mol at 298 K
    let masses = [0.046_069, 0.018_015];
    let volumes = [5.868e-5, 1.807e-5];
    let mass = MassFractions::new(vec![0.5, 0.5]).unwrap();
    let mole = MoleFractions::from_mass(&mass, &masses).unwrap();
    assert_close(mole.as_slice()[0], 0.281_120, 1e-5, "by mole");
    let back = mole.to_mass(&masses).unwrap();
    assert_close(back.as_slice()[0], 0.5, 1e-14, "back to mass");
    let volume = mole.to_volume(&volumes).unwrap();
    let again = MoleFractions::from_volume(&volume, &volumes).unwrap();
    assert_close(again.as_slice()[0], mole.as_slice()[0], 1e-14, "by volume");
    let density = mole.ideal_density_kg_per_m3(&masses, &volumes).unwrap();
    // half a kilogram of each: 1 / (0.5/785.1 + 0.5/997.0)
    assert_close(density, 878.4, 0.5, "density");
    assert!(matches!(
        VolumeFractions::new(vec![0.5, 0.4]),
        Err(MixtureError::Sum { .. })
    ));
    assert!(MoleFractions::from_amounts(vec![0.0, 0.0]).is_err());
    assert!(MoleFractions::from_mass(&mass, &[0.046, 0.0]).is_err());
    assert!(MoleFractions::from_mass(&mass, &[0.046]).is_err());
}
