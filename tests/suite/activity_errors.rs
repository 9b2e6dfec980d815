//! The error models of ln γ∞: what the table says, coverage, limits.

use std::path::Path;

use groupsmith::groups::GroupCounts;
use groupsmith::mixture::{
    ActivityErrors, ActivityModel, ChemicalClass, Component, ErrorModel, Likeness, LnError, Slips,
    TableFile, Unifac,
};
use proptest::prelude::*;

const MODELS: [ActivityModel; 3] = [
    ActivityModel::Unifac,
    ActivityModel::UnifacDortmund,
    ActivityModel::UnifacDortmund2006,
];

fn errors() -> ActivityErrors {
    ActivityErrors::built_in().unwrap()
}

fn dortmund() -> Unifac {
    Unifac::built_in(ActivityModel::UnifacDortmund, Slips::Corrected)
        .unwrap()
        .unwrap()
}

fn component(unifac: &Unifac, groups: &str) -> (Component, ChemicalClass) {
    let counts = GroupCounts::from_text(groups).unwrap();
    let component = unifac.component(&counts).unwrap();
    let class = unifac.tables().class(&component);
    (component, class)
}

fn error_in(
    model: &ErrorModel,
    solute: &(Component, ChemicalClass),
    solvent: &(Component, ChemicalClass),
    ln_gamma: f64,
) -> LnError {
    model.error(
        (&solute.0, solute.1),
        (&solvent.0, solvent.1),
        298.15,
        ln_gamma,
    )
}

#[test]
fn the_head_of_the_table_tells_data_and_coverage() {
    let head: String = ActivityErrors::BUILT_IN
        .text
        .lines()
        .take_while(|line| line.starts_with('#'))
        .map(|line| format!("{line}\n"))
        .collect();
    insta::assert_snapshot!("head_of_activity_errors", head);
}

#[test]
fn every_model_with_groups_has_errors_and_the_ideal_mixture_none() {
    let errors = errors();
    for model in MODELS {
        assert_eq!(errors.of(model).unwrap().model(), model);
    }
    assert!(errors.of(ActivityModel::Ideal).is_none());
}

/// Groups of modified UNIFAC (Dortmund): the class is that of the most polar group.
#[test]
fn classes_follow_from_groups() {
    let unifac = dortmund();
    for (groups, class) in [
        ("16:1", ChemicalClass::Water),
        ("1:1;42:1", ChemicalClass::Acid),
        ("1:1;2:1;14:1", ChemicalClass::Alcohol),
        ("1:1;2:1;18:1", ChemicalClass::KetoneEsterEther),
        ("1:1;2:2;44:1", ChemicalClass::Halogenated),
        ("40:1", ChemicalClass::NitrileOrNitro),
        ("9:6", ChemicalClass::Aromatic),
        ("1:2;2:4", ChemicalClass::Aliphatic),
        ("58:1", ChemicalClass::Other),
    ] {
        assert_eq!(component(&unifac, groups).1, class, "{groups}");
    }
}

/// In-sample, so this guards the reading of the table, not the fit: the figures
/// of held-out systems stand in the head of the table.
#[test]
fn nine_of_ten_measured_values_lie_within() {
    let (errors, unifac) = (errors(), dortmund());
    let model = errors.of(ActivityModel::UnifacDortmund).unwrap();
    let path =
        Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/data/mixture/gamma_infinity_sample.csv");
    let mut reader = csv::ReaderBuilder::new()
        .comment(Some(b'#'))
        .from_path(path)
        .unwrap();
    let (mut count, mut held) = (0, 0);
    for row in reader.records() {
        let row = row.unwrap();
        let [solute, solvent] = [0, 1].map(|at| component(&unifac, &row[at]));
        let temperature_k: f64 = row[2].parse().unwrap();
        let mixture = unifac
            .mixture(&[solute.0.clone(), solvent.0.clone()])
            .unwrap();
        let mut ln_gamma = [0.0; 2];
        let mut state = mixture.state(temperature_k).unwrap();
        state.ln_gamma(&[0.0, 1.0], &mut ln_gamma).unwrap();
        let error = model.error(
            (&solute.0, solute.1),
            (&solvent.0, solvent.1),
            temperature_k,
            ln_gamma[0],
        );
        let (low, high) = model.interval(error);
        let found = row[3].parse::<f64>().unwrap() - ln_gamma[0];
        count += 1;
        held += usize::from((low..=high).contains(&found));
    }
    let share = held as f64 / f64::from(count);
    assert!(count >= 200, "{count}");
    assert!((0.86..=0.96).contains(&share), "{held} of {count}");
}

#[test]
fn water_is_predicted_less_well_than_other_solvents() {
    let (errors, unifac) = (errors(), dortmund());
    let model = errors.of(ActivityModel::UnifacDortmund).unwrap();
    let hexane = component(&unifac, "1:2;2:4");
    let butanone = component(&unifac, "1:1;2:1;18:1");
    let water = component(&unifac, "16:1");
    let width = |solvent| {
        let (low, high) = model.interval(error_in(model, &butanone, solvent, 1.5));
        high - low
    };
    assert!(width(&water) > 1.5 * width(&hexane));
}

#[test]
fn a_larger_prediction_is_less_certain() {
    let (errors, unifac) = (errors(), dortmund());
    let (ethanol, hexane) = (
        component(&unifac, "1:1;2:1;14:1"),
        component(&unifac, "1:2;2:4"),
    );
    for model in MODELS.map(|model| errors.of(model).unwrap()) {
        let scales =
            [0.1, 1.0, 4.0].map(|ln_gamma| error_in(model, &ethanol, &hexane, ln_gamma).scale);
        assert!(scales.is_sorted(), "{scales:?}");
    }
}

#[test]
fn likeness_is_told_by_class_and_shared_surface() {
    let unifac = dortmund();
    let of = |one: &str, other: &str| {
        let (one, other) = (component(&unifac, one), component(&unifac, other));
        Likeness::of((&one.0, one.1), (&other.0, other.1))
    };
    assert_eq!(of("1:2;2:4", "1:2;2:5"), Likeness::Alike);
    assert_eq!(of("1:2;2:4", "78:6"), Likeness::OneClass);
    assert_eq!(of("1:2;2:4", "9:6"), Likeness::Different);
    assert_eq!(of("1:1;2:1;14:1", "1:1;2:7;14:1"), Likeness::Related);
    // isomers that the model cannot tell apart are still two molecules
    assert_eq!(of("1:2;2:4", "1:2;2:4"), Likeness::Alike);
}

#[test]
fn errors_of_like_solutes_go_together() {
    let errors = errors();
    for model in MODELS.map(|model| errors.of(model).unwrap()) {
        let of = |likeness| model.correlation(likeness, ChemicalClass::Alcohol);
        assert!(of(Likeness::Alike) > of(Likeness::Related));
        assert!(of(Likeness::Related) > of(Likeness::Different));
        assert_eq!(of(Likeness::Same), 1.0);
    }
}

#[test]
fn thin_classes_are_told() {
    let errors = errors();
    let model = errors.of(ActivityModel::UnifacDortmund).unwrap();
    let thin = model.remark(ChemicalClass::Aliphatic, ChemicalClass::Other);
    assert_eq!(
        thin.as_deref(),
        Some("the interval rests on 11 measured values of solvents of the class `other`")
    );
    assert_eq!(
        model.remark(ChemicalClass::Aliphatic, ChemicalClass::Alcohol),
        None
    );
}

/// A class that a table does not list is taken for average, and told.
#[test]
fn a_class_without_parameters_is_average_with_a_reason() {
    let text = "# title: t\n# source: s\n# transcribed: t\n# checked: c\n\
        model,term,solute,solvent,value\n-,-,-,-,-\n\
        unifac-dortmund,ln_scale,,,-1\n\
        unifac-dortmund,ln_scale,,water,0.7\n\
        unifac-dortmund,rows,,water,50\n";
    let errors = ActivityErrors::read(TableFile { name: "own", text }).unwrap();
    let model = errors.of(ActivityModel::UnifacDortmund).unwrap();
    let unifac = dortmund();
    let [hexane, water] = ["1:2;2:4", "16:1"].map(|groups| component(&unifac, groups));
    let scale = |solvent| error_in(model, &hexane, solvent, 1.0).scale.ln();
    assert!((scale(&hexane) + 1.0).abs() < 1e-12);
    assert!((scale(&water) + 0.3).abs() < 1e-12);
    let remark = model.remark(ChemicalClass::Aliphatic, ChemicalClass::Water);
    assert_eq!(
        remark.as_deref(),
        Some("the interval rests on 0 measured values of solutes of the class `aliphatic`")
    );
}

#[test]
fn faults_of_a_table_have_a_place() {
    let head = "# title: t\n# source: s\n# transcribed: t\n# checked: c\n\
        model,term,solute,solvent,value\n-,-,-,-,-\n";
    for (row, wanted) in [
        (
            "ideal-gas,middle,,,1",
            "own:7: column `model`: is no built-in activity model (found `ideal-gas`)",
        ),
        (
            "unifac,middle,ketone,,1",
            "own:7: column `solute`: is no chemical class (found `ketone`)",
        ),
        (
            "unifac,correlation,alike,,1.2",
            "own:7: column `value`: is no correlation from -1 to 1 (found `1.2`)",
        ),
        (
            "unifac,width,,,1",
            "own:7: column `term`: is no term of an error model (found `width`)",
        ),
    ] {
        let text = format!("{head}{row}\n");
        let file = TableFile {
            name: "own",
            text: &text,
        };
        assert_eq!(ActivityErrors::read(file).unwrap_err().to_string(), wanted);
    }
}

fn error() -> impl Strategy<Value = LnError> {
    (-1.0..1.0, 0.01..3.0).prop_map(|(middle, scale)| LnError { middle, scale })
}

proptest! {
    #[test]
    fn an_interval_holds_the_value_of_the_model(error in error()) {
        let errors = errors();
        for model in MODELS.map(|model| errors.of(model).unwrap()) {
            let (low, high) = model.interval(error);
            prop_assert!(low <= 0.0 && 0.0 <= high && low < high);
        }
    }

    #[test]
    fn exchanging_the_keys_turns_the_interval_round(
        first in error(),
        second in error(),
        likeness in prop::sample::select(&Likeness::FITTED[..]),
        solvent in prop::sample::select(&ChemicalClass::ALL[..]),
    ) {
        let errors = errors();
        for model in MODELS.map(|model| errors.of(model).unwrap()) {
            let (low, high) = model.interval_of_difference(first, second, likeness, solvent);
            let turned = model.interval_of_difference(second, first, likeness, solvent);
            prop_assert!(low <= 0.0 && 0.0 <= high);
            prop_assert_eq!((low, high), (-turned.1, -turned.0));
        }
    }

    #[test]
    fn one_solute_in_both_keys_leaves_nothing_open(error in error()) {
        let errors = errors();
        for model in MODELS.map(|model| errors.of(model).unwrap()) {
            for solvent in ChemicalClass::ALL {
                let interval =
                    model.interval_of_difference(error, error, Likeness::Same, solvent);
                prop_assert_eq!(interval, (0.0, 0.0));
            }
        }
    }
}
