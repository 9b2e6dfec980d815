//! 90 % intervals of figures at infinite dilution, from errors of the model.

use std::sync::Arc;

use groupsmith::brief::{Brief, Job};
use groupsmith::evaluate::{
    CATALOG, Library, MixtureComponent, Plan, Profiler, Scratch, StatedState, describe_mixture,
};
use groupsmith::mixture::{ActivityModel, Slips};
use groupsmith::quantity::Estimate;

const FIGURES: [&str; 7] = [
    "gamma_infinity_first_key",
    "gamma_infinity_second_key",
    "selectivity_infinite_dilution",
    "relative_volatility_infinite_dilution",
    "separation_factor_infinite_dilution",
    "capacity_mole",
    "capacity_mass",
];

/// The figures of candidates beside two keys, by a model.
fn figures(keys: [&str; 2], model: &str, candidates: &[&str]) -> Vec<Vec<Estimate>> {
    let [first, second] = keys;
    let mut text = format!(
        "[mixture]\ncomponents = [\"{first}\", \"{second}\"]\ntemperature = \"328.5 K\"\n\
         model = \"{model}\"\n[pool]\nfile = \"-\"\n"
    );
    for figure in FIGURES {
        text.push_str(&format!(
            "[[target]]\nfigure = \"{figure}\"\nprefer = \"high\"\nworst = 0.001\nbest = 1000.0\n"
        ));
    }
    let brief = Brief::read_for(&text, "brief.toml", &CATALOG, Job::Screen).unwrap();
    let plan = Plan::new(Arc::new(Library::built_in(Slips::Corrected)), brief, true).unwrap();
    let mut scratch = Scratch::new();
    let mut all = Vec::new();
    for candidate in candidates {
        plan.evaluate(&mut scratch, candidate).unwrap();
        let found = FIGURES.map(|name| {
            let at = plan.figures.iter().position(|figure| figure.name == name);
            scratch.figures[at.unwrap()].clone().unwrap()
        });
        all.push(found.to_vec());
    }
    all
}

#[test]
fn every_figure_at_infinite_dilution_lies_in_its_interval() {
    for model in ["unifac", "unifac-dortmund", "unifac-dortmund-2006"] {
        for of_candidate in figures(["acetone", "methanol"], model, &["O", "CCCCO", "c1ccccc1C"]) {
            for (name, figure) in FIGURES.iter().zip(of_candidate) {
                let (low, high) = figure.interval.unwrap_or_else(|| panic!("{name}"));
                assert!(
                    0.0 < low && low <= figure.value && figure.value <= high && low < high,
                    "{name}: {low} {} {high}",
                    figure.value
                );
            }
        }
    }
}

#[test]
fn the_ideal_mixture_has_no_interval() {
    for figure in &figures(["acetone", "methanol"], "ideal", &["O"])[0] {
        assert_eq!(figure.interval, None);
    }
}

/// Exchanging the keys turns selectivity and volatility over, ends exchanged;
/// the separation factor stays.
#[test]
fn exchanging_the_keys_turns_the_intervals_over() {
    let candidates = ["O", "CCCCO", "CS(C)=O"];
    let one = figures(["acetone", "methanol"], "unifac-dortmund", &candidates);
    let other = figures(["methanol", "acetone"], "unifac-dortmund", &candidates);
    let close =
        |left: f64, right: f64| assert!((left / right - 1.0).abs() < 1e-9, "{left} {right}");
    for (one, other) in one.iter().zip(&other) {
        for at in [2, 3] {
            let ((low, high), (turned_low, turned_high)) =
                (one[at].interval.unwrap(), other[at].interval.unwrap());
            close(low, 1.0 / turned_high);
            close(high, 1.0 / turned_low);
        }
        let (factor, turned) = (one[4].interval.unwrap(), other[4].interval.unwrap());
        close(factor.0, turned.0);
        close(factor.1, turned.1);
        assert!(factor.0 >= 1.0);
    }
}

/// The errors of ketones that are like each other cancel in part.
#[test]
fn the_selectivity_of_like_keys_is_surer_than_of_unlike_ones() {
    let width = |keys| {
        let (low, high) = figures(keys, "unifac-dortmund", &["CCCCCCCCO"])[0][2]
            .interval
            .unwrap();
        f64::ln(high / low)
    };
    assert!(width(["2-pentanone", "2-hexanone"]) < 0.8 * width(["2-pentanone", "toluene"]));
}

#[test]
fn a_component_at_no_fraction_in_another_has_an_interval() {
    let library = Library::built_in(Slips::Corrected);
    let mut profiler = Profiler::new();
    let components = ["acetone", "water"]
        .map(|name| MixtureComponent::find(&library, &mut profiler, name, true).unwrap());
    let state = StatedState {
        temperature_k: Some(298.15),
        pressure_pa: None,
    };
    let describe = |x: &[f64]| {
        describe_mixture(
            &library,
            &components,
            x,
            state,
            ActivityModel::UnifacDortmund,
        )
    };
    let dilute = describe(&[0.0, 1.0]);
    let of = |quantity: &str, component: usize| {
        let figure = dilute
            .iter()
            .find(|figure| (figure.quantity, figure.component) == (quantity, Some(component)));
        figure.unwrap().interval
    };
    let (low, high) = of("ln_activity_coefficient", 0).unwrap();
    assert_eq!(of("activity_coefficient", 0), Some((low.exp(), high.exp())));
    assert_eq!(of("activity_coefficient", 1), None, "the solvent itself");
    assert!(
        describe(&[0.5, 0.5])
            .iter()
            .all(|figure| figure.interval.is_none())
    );
}
