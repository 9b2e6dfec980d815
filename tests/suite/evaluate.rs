//! What a plan makes of a candidate: figures against the mixture they are the
//! limits of, against tables of measured data and against each other.

use std::sync::Arc;

use groupsmith::brief::{Brief, Job};
use groupsmith::evaluate::{
    CATALOG, EstimateLevel, Library, MixtureComponent, Plan, PlanFault, Profiler, Scratch,
    StatedState, UserTable, Verdict, describe_mixture, mole_fractions,
};
use groupsmith::mixture::{ActivityModel, Slips};
use groupsmith::quantity::{Absent, Estimate, Flag, Outcome, Property, Status};

fn library() -> Arc<Library> {
    Arc::new(Library::built_in(Slips::Corrected))
}

fn plan_of(library: &Arc<Library>, brief: &str) -> Result<Plan, Vec<PlanFault>> {
    let brief = Brief::read_for(brief, "brief.toml", &CATALOG, Job::Screen)
        .unwrap_or_else(|faults| panic!("{faults}"));
    Plan::new(Arc::clone(library), brief, true)
}

/// A mixture of these components with a target on each of these figures, all soft.
fn brief(mixture: &str, figures: &[&str]) -> String {
    let mut text = format!("[mixture]\n{mixture}\n[pool]\nfile = \"-\"\n");
    for figure in figures {
        text.push_str(&format!(
            "[[target]]\nfigure = \"{figure}\"\nprefer = \"high\"\nworst = 0.001\nbest = 1000.0\n"
        ));
    }
    text
}

const ACETONE_METHANOL: &str = "components = [\"acetone\", \"methanol\"]\n\
    fractions = [0.78, 0.22]\ntemperature = \"328.5 K\"\npressure = \"101.325 kPa\"\n\
    solvent_to_feed = 1.5\n";

const ALL: [&str; 10] = [
    "gamma_infinity_first_key",
    "gamma_infinity_second_key",
    "gamma_infinity_of_candidate",
    "selectivity_infinite_dilution",
    "relative_volatility_infinite_dilution",
    "separation_factor_infinite_dilution",
    "capacity_mole",
    "capacity_mass",
    "relative_volatility_with_solvent",
    "separation_factor_with_solvent",
];

fn outcome<'s>(plan: &Plan, scratch: &'s Scratch, name: &str) -> &'s Outcome {
    let at = plan.figures.iter().position(|figure| figure.name == name);
    &scratch.figures[at.unwrap_or_else(|| panic!("no figure {name}"))]
}

fn value(plan: &Plan, scratch: &Scratch, name: &str) -> f64 {
    match outcome(plan, scratch, name) {
        Ok(found) => found.value,
        Err(reason) => panic!("{name}: {reason}"),
    }
}

fn close(left: f64, right: f64, relative: f64) {
    assert!(
        (left - right).abs() <= relative * right.abs(),
        "{left} is not {right}"
    );
}

/// γ of each component and the vapor over a mixture of named molecules.
fn described(
    library: &Library,
    names: &[&str],
    x: &[f64],
    state: StatedState,
    model: ActivityModel,
) -> (Vec<f64>, Vec<f64>) {
    let mut profiler = Profiler::new();
    let components: Vec<MixtureComponent> = names
        .iter()
        .map(|name| MixtureComponent::find(library, &mut profiler, name, true).unwrap())
        .collect();
    let figures = describe_mixture(library, &components, x, state, model);
    let of = |quantity: &str| {
        figures
            .iter()
            .filter(|figure| figure.quantity == quantity)
            .map(|figure| figure.value.as_ref().unwrap().unwrap())
            .collect()
    };
    (of("activity_coefficient"), of("vapor_mole_fraction"))
}

const AT_328: StatedState = StatedState {
    temperature_k: Some(328.5),
    pressure_pa: None,
};

/// γ∞ is what the mixture gives where a fraction is 0.
#[test]
fn figures_at_infinite_dilution_are_limits_of_the_mixture() {
    let library = library();
    for model in [
        ActivityModel::Unifac,
        ActivityModel::UnifacDortmund,
        ActivityModel::UnifacDortmund2006,
    ] {
        let mixture = format!("{ACETONE_METHANOL}model = \"{}\"\n", model.id());
        let plan = plan_of(&library, &brief(&mixture, &ALL)).unwrap();
        let mut scratch = Scratch::new();
        for solvent in ["O", "CCCCO", "Cc1ccccc1", "CC(=O)OCC", "OCCO"] {
            plan.evaluate(&mut scratch, solvent).unwrap();
            let gamma = |names: &[&str], x: &[f64]| described(&library, names, x, AT_328, model).0;
            let first = gamma(&["acetone", solvent], &[0.0, 1.0])[0];
            let second = gamma(&["methanol", solvent], &[0.0, 1.0])[0];
            let of_it = gamma(&["acetone", "methanol", solvent], &[0.78, 0.22, 0.0])[2];
            let figure = |name: &str| value(&plan, &scratch, name);
            close(figure("gamma_infinity_first_key"), first, 1e-9);
            close(figure("gamma_infinity_second_key"), second, 1e-9);
            close(figure("gamma_infinity_of_candidate"), of_it, 1e-9);
            close(
                figure("selectivity_infinite_dilution"),
                first / second,
                1e-9,
            );
            close(figure("capacity_mole"), 1.0 / second, 1e-9);
        }
    }
}

/// M and P are taken from the tables of measured substances, not from the plan.
#[test]
fn figures_hang_together() {
    let library = library();
    let plan = plan_of(&library, &brief(ACETONE_METHANOL, &ALL)).unwrap();
    let mut scratch = Scratch::new();
    plan.evaluate(&mut scratch, "O").unwrap();
    let figure = |name: &str| value(&plan, &scratch, name);
    let pressure = |name: &str| {
        let substance = library.substances().find(name).unwrap();
        substance
            .vapor_pressure()
            .unwrap()
            .pressure_pa(328.5)
            .unwrap()
    };
    let ratio = pressure("acetone") / pressure("methanol");
    let alpha = figure("selectivity_infinite_dilution") * ratio;
    close(
        figure("relative_volatility_infinite_dilution"),
        alpha,
        1e-12,
    );
    close(
        figure("separation_factor_infinite_dilution"),
        alpha.max(1.0 / alpha),
        1e-12,
    );
    // Methanol, the second key, is the selected one: 32.042 and 18.015 g/mol.
    close(
        figure("capacity_mass"),
        figure("capacity_mole") * 32.042 / 18.015,
        1e-12,
    );
}

/// The figure with solvent is the least of y1 x2/(y2 x1) over mixtures with the
/// solvent at the bubble point, each computed as a mixture of its own.
#[test]
fn volatility_with_solvent_is_the_least_over_the_mixtures() {
    let library = library();
    let plan = plan_of(&library, &brief(ACETONE_METHANOL, &ALL)).unwrap();
    let mut scratch = Scratch::new();
    let model = ActivityModel::UnifacDortmund;
    let state = StatedState {
        temperature_k: None,
        pressure_pa: Some(101_325.0),
    };
    for solvent in ["O", "CS(C)=O"] {
        plan.evaluate(&mut scratch, solvent).unwrap();
        let mut least = f64::INFINITY;
        for z in [0.01, 0.1, 0.2, 0.3, 0.4, 0.5, 0.6, 0.7, 0.8, 0.9, 0.99] {
            let x = [z / 2.5, (1.0 - z) / 2.5, 1.5 / 2.5];
            let names = ["acetone", "methanol", solvent];
            let y = described(&library, &names, &x, state, model).1;
            least = least.min(y[0] * x[1] / (y[1] * x[0]));
        }
        assert!(least > 1.0, "acetone goes overhead beside {solvent}");
        close(
            value(&plan, &scratch, "relative_volatility_with_solvent"),
            least,
            1e-6,
        );
    }
}

#[test]
fn order_of_the_keys_turns_the_figures_around() {
    let library = library();
    let turned = "components = [\"methanol\", \"acetone\"]\nfractions = [0.22, 0.78]\n\
        temperature = \"328.5 K\"\npressure = \"101.325 kPa\"\nsolvent_to_feed = 1.5\n";
    let one = plan_of(&library, &brief(ACETONE_METHANOL, &ALL)).unwrap();
    let other = plan_of(&library, &brief(turned, &ALL)).unwrap();
    let (mut first, mut second) = (Scratch::new(), Scratch::new());
    for solvent in ["O", "Cc1ccccc1", "OCCO"] {
        one.evaluate(&mut first, solvent).unwrap();
        other.evaluate(&mut second, solvent).unwrap();
        for figure in [
            "selectivity_infinite_dilution",
            "relative_volatility_infinite_dilution",
        ] {
            close(
                value(&one, &first, figure),
                1.0 / value(&other, &second, figure),
                1e-9,
            );
        }
        for figure in [
            "separation_factor_infinite_dilution",
            "gamma_infinity_of_candidate",
            "separation_factor_with_solvent",
        ] {
            close(
                value(&one, &first, figure),
                value(&other, &second, figure),
                1e-6,
            );
        }
        // Which key goes overhead does not depend on what it is called.
        let overhead = |plan: &Plan, scratch: &mut Scratch| {
            let remarks = plan.remarks(scratch);
            let at = remarks
                .find(" overhead")
                .unwrap_or_else(|| panic!("{remarks}"));
            remarks[..at].rsplit("; ").next().unwrap().to_owned()
        };
        assert_eq!(overhead(&one, &mut first), overhead(&other, &mut second));
    }
}

/// S far from 1 may work for or against the volatility; the remark says which.
#[test]
fn a_selectivity_that_works_against_the_volatility_is_told() {
    let library = library();
    let plan = plan_of(&library, &brief(ACETONE_METHANOL, &ALL)).unwrap();
    let mut scratch = Scratch::new();
    plan.evaluate(&mut scratch, "O").unwrap();
    assert!(value(&plan, &scratch, "selectivity_infinite_dilution") > 1.0);
    assert!(plan.remarks(&mut scratch).ends_with("acetone overhead"));
    // In heptane methanol has by far the larger activity coefficient.
    plan.evaluate(&mut scratch, "CCCCCCC").unwrap();
    assert!(value(&plan, &scratch, "selectivity_infinite_dilution") < 1.0);
    assert!(value(&plan, &scratch, "relative_volatility_infinite_dilution") < 1.0);
    let remarks = plan.remarks(&mut scratch);
    assert!(
        remarks.ends_with("methanol overhead, selectivity having reversed the volatility"),
        "{remarks}"
    );
}

#[test]
fn models_stand_side_by_side_as_each_would_alone() {
    let library = library();
    let list = format!("{ACETONE_METHANOL}model = [\"unifac-dortmund\", \"unifac\", \"ideal\"]\n");
    let plan = plan_of(&library, &brief(&list, &["selectivity_infinite_dilution"])).unwrap();
    let mut scratch = Scratch::new();
    plan.evaluate(&mut scratch, "OCCO").unwrap();
    for model in ["unifac-dortmund", "unifac", "ideal"] {
        let alone = format!("{ACETONE_METHANOL}model = \"{model}\"\n");
        let alone = plan_of(&library, &brief(&alone, &["selectivity_infinite_dilution"])).unwrap();
        let mut other = Scratch::new();
        alone.evaluate(&mut other, "OCCO").unwrap();
        let suffix = match model {
            "unifac-dortmund" => String::new(),
            model => format!("_{}", model.replace('-', "_")),
        };
        for figure in [
            "gamma_infinity_first_key",
            "gamma_infinity_second_key",
            "selectivity_infinite_dilution",
            "relative_volatility_infinite_dilution",
            "capacity_mole",
            "capacity_mass",
        ] {
            assert_eq!(
                value(&plan, &scratch, &format!("{figure}{suffix}")),
                value(&alone, &other, figure),
                "{figure} by {model}"
            );
        }
    }
    assert_eq!(
        value(&plan, &scratch, "gamma_infinity_first_key_ideal"),
        1.0
    );
}

/// From estimated vapor pressures of the keys a relative volatility is noise.
#[test]
fn volatilities_need_measured_vapor_pressures_of_the_keys() {
    let library = library();
    // Not among the measured substances.
    let keys = "components = [\"CCCCC(C)COC(=O)CC\", \"acetone\"]\ntemperature = \"330 K\"\n";
    let figures = [
        "relative_volatility_infinite_dilution",
        "selectivity_infinite_dilution",
    ];
    let strict = plan_of(&library, &brief(keys, &figures)).unwrap();
    let mut scratch = Scratch::new();
    let verdict = strict.evaluate(&mut scratch, "CCO").unwrap();
    assert!(
        matches!(
            verdict,
            Verdict::Qualified { known, .. } if known < 1.0
        ),
        "{verdict:?}"
    );
    let reason = outcome(&strict, &scratch, figures[0]).as_ref().unwrap_err();
    assert!(matches!(reason, Absent::NotMeasured { .. }), "{reason}");
    assert!(outcome(&strict, &scratch, figures[1]).is_ok());
    assert!(
        strict
            .notes
            .iter()
            .any(|note| note.contains("volatilities of the keys are not assessable")),
        "{:?}",
        strict.notes
    );

    let allowed = format!("{keys}estimates_for_keys = true\n");
    let allowed = plan_of(&library, &brief(&allowed, &figures)).unwrap();
    allowed.evaluate(&mut scratch, "CCO").unwrap();
    let found = outcome(&allowed, &scratch, figures[0]).as_ref().unwrap();
    assert!(
        found.flags.contains(Flag::RestsOnEstimate),
        "{}",
        found.flags
    );
}

#[test]
fn a_pair_that_was_not_published_names_its_main_groups() {
    let library = library();
    let mixture = "components = [\"acetonitrile\", \"methanol\"]\ntemperature = \"330 K\"\n";
    let plan = plan_of(&library, &brief(mixture, &["gamma_infinity_first_key"])).unwrap();
    let mut scratch = Scratch::new();
    plan.evaluate(&mut scratch, "CS(C)=O").unwrap();
    let reason = outcome(&plan, &scratch, "gamma_infinity_first_key")
        .as_ref()
        .unwrap_err();
    let text = reason.to_string();
    assert!(
        text.contains("CCN") && text.contains("(CH3)2SO") && text.contains("not published"),
        "{text}"
    );
    // The other key has its pairs with the candidate.
    assert!(outcome(&plan, &scratch, "gamma_infinity_second_key").is_ok());
}

/// Vapor-side figures of a carboxylic acid say that its vapor is not modelled.
#[test]
fn carboxylic_acids_flag_what_rests_on_the_vapor() {
    let library = library();
    let mixture = "components = [\"water\", \"acetic acid\"]\nfractions = [0.6, 0.4]\n\
        temperature = \"380 K\"\npressure = \"1 atm\"\nsolvent_to_feed = 1.0\n";
    let plan = plan_of(&library, &brief(mixture, &ALL)).unwrap();
    let mut scratch = Scratch::new();
    plan.evaluate(&mut scratch, "CCO").unwrap();
    for figure in ALL {
        let vapor = figure.starts_with("relative") || figure.starts_with("separation");
        let found = outcome(&plan, &scratch, figure).as_ref().unwrap();
        assert_eq!(
            found.flags.contains(Flag::VaporAssociationNotModelled),
            vapor,
            "{figure}"
        );
    }
    assert!(
        plan.remarks(&mut scratch)
            .contains("vapor association not modelled")
    );

    // A candidate that is an acid flags only what its own vapor takes part in.
    let plan = plan_of(&library, &brief(ACETONE_METHANOL, &ALL)).unwrap();
    plan.evaluate(&mut scratch, "CCC(=O)O").unwrap();
    let flagged = |name: &str| {
        let found = outcome(&plan, &scratch, name).as_ref().unwrap();
        found.flags.contains(Flag::VaporAssociationNotModelled)
    };
    assert!(flagged("relative_volatility_with_solvent"));
    assert!(!flagged("relative_volatility_infinite_dilution"));
}

#[test]
fn properties_at_a_temperature_of_their_own_have_a_column_of_their_own() {
    let library = library();
    let text = "[pool]\nfile = \"-\"\n[[target]]\nfigure = \"liquid_density\"\ntemperature = \"20 degC\"\n\
        at_most = \"1100 kg/m3\"\n[[target]]\nfigure = \"vapor_pressure\"\nprefer = \"low\"\n\
        worst = \"1 bar\"\nbest = \"1 mbar\"\n";
    let plan = plan_of(&library, text).unwrap();
    let mut scratch = Scratch::new();
    plan.evaluate(&mut scratch, "O").unwrap();
    // Water at 20 °C and 25 °C: 998.2 and 997.0 kg/m³ (any handbook).
    close(
        value(&plan, &scratch, "liquid_density_at_293_15_k"),
        998.2,
        2e-3,
    );
    close(value(&plan, &scratch, "liquid_density"), 997.0, 1e-3);
}

#[test]
fn measured_values_can_be_left_out_for_candidates_only() {
    let library = library();
    let text = brief(ACETONE_METHANOL, &["relative_volatility_infinite_dilution"]);
    let read = Brief::read_for(&text, "b.toml", &CATALOG, Job::Screen).unwrap();
    let plan = Plan::new(Arc::clone(&library), read, false).unwrap();
    let mut scratch = Scratch::new();
    plan.evaluate(&mut scratch, "CCCCO").unwrap();
    let found = outcome(&plan, &scratch, "boiling_point").as_ref().unwrap();
    assert_eq!(found.method, "structure-level");
    // The keys keep theirs: the ratio of vapor pressures is there.
    assert!(outcome(&plan, &scratch, "relative_volatility_infinite_dilution").is_ok());
}

/// Mass and volume fractions as a hand calculation gives them.
#[test]
fn compositions_of_any_basis_are_the_same_mixture() {
    use groupsmith::brief::Basis;
    let library = library();
    let mut profiler = Profiler::new();
    let components: Vec<MixtureComponent> = ["ethanol", "water"]
        .iter()
        .map(|name| MixtureComponent::find(&library, &mut profiler, name, true).unwrap())
        .collect();
    let x = |basis, w: f64| {
        mole_fractions(&library, &components, &[w, 1.0 - w], basis, 298.15).unwrap()[0]
    };
    assert_eq!(x(Basis::Mole, 0.3), 0.3);
    // 46.069 and 18.015 g/mol.
    let n = [0.4 / 46.069, 0.6 / 18.015];
    close(x(Basis::Mass, 0.4), n[0] / (n[0] + n[1]), 1e-9);
    // Densities at 25 °C: 785 and 997 kg/m³ (any handbook), to a part in 300.
    let n = [0.4 * 785.0 / 46.069, 0.6 * 997.0 / 18.015];
    close(x(Basis::Volume, 0.4), n[0] / (n[0] + n[1]), 3e-3);
    assert_eq!(x(Basis::Mass, 0.0), 0.0);
}

/// The temperature of a mixture that states only its pressure is its bubble point.
#[test]
fn a_pressure_alone_gives_the_temperature() {
    let library = library();
    let mixture = "components = [\"acetone\", \"methanol\"]\nfractions = [0.78, 0.22]\npressure = \"1 atm\"\n";
    let plan = plan_of(
        &library,
        &brief(mixture, &["selectivity_infinite_dilution"]),
    )
    .unwrap();
    // Measured azeotrope: 0.78 acetone, 328.6 K (as the example brief has it).
    assert!(
        (plan.temperature_k.unwrap() - 328.6).abs() < 0.5,
        "{:?}",
        plan.temperature_k
    );
    assert!(
        plan.notes.iter().any(|note| note.contains("bubble point")),
        "{:?}",
        plan.notes
    );
}

#[test]
fn every_fault_beside_the_tables_is_told_at_once() {
    let text = "[mixture]\ncomponents = [\"acetonne\", \"CCO\", \"ethanol\", \"C(\"]\ntemperature = \"300 K\"\n\
        [pool]\nfile = \"-\"\n[[target]]\nfigure = \"boiling_point\"\nat_least = \"300 K\"\n\
        [[structure.group]]\nset = \"jobak\"\nnumber = 1\nat_most = 1\n\
        [[structure.group]]\nset = \"joback\"\nnumber = 77\nat_most = 1\n\
        [[structure.pattern]]\npattern = \"C(=\"\nat_most = 0\n";
    let faults = plan_of(&library(), text).unwrap_err();
    let told: Vec<String> = faults
        .iter()
        .map(|fault| format!("{}: {}", fault.place.unwrap().line, fault.cause))
        .collect();
    insta::assert_snapshot!("faults_of_a_plan", told.join("\n"));
}

const ONE_PAIR: &str = "# title: one pair\n# source: our own fit\n# transcribed: today\n\
    # checked: not at all\ni,j,a,b,c\n-,-,K,-,1/K\n5,18,100,0,0\n18,5,-50,0,0\n";

/// A user's value changes what rests on it, nothing else, and the texts a
/// fingerprint is taken of.
#[test]
fn a_table_of_the_user_changes_what_rests_on_it() {
    let table = UserTable {
        place: "unifac-dortmund/interactions-2016.csv".into(),
        file: "mine/interactions-2016.csv".into(),
        text: ONE_PAIR.into(),
    };
    let built_in = library();
    let own = Arc::new(Library::with_user_tables(Slips::Corrected, vec![table]).unwrap());
    let text = brief(ACETONE_METHANOL, &["gamma_infinity_second_key"]);
    let mut values = Vec::new();
    for library in [&built_in, &own] {
        let plan = plan_of(library, &text).unwrap();
        let mut scratch = Scratch::new();
        // Methanol is main group 6, 1-butanol has OH (5), pyridine is 18.
        for solvent in ["c1ccncc1", "CCCCO"] {
            plan.evaluate(&mut scratch, solvent).unwrap();
            values.push(value(&plan, &scratch, "gamma_infinity_second_key"));
        }
    }
    assert_eq!(values[..2], values[2..], "no pair of 5 and 18 is in these");
    let mut mixed = Vec::new();
    for library in [&built_in, &own] {
        let names = ["1-butanol", "pyridine"];
        let model = ActivityModel::UnifacDortmund;
        mixed.push(described(library, &names, &[0.5, 0.5], AT_328, model).0);
    }
    assert!((mixed[0][0] - mixed[1][0]).abs() > 1e-3, "{mixed:?}");
    assert_eq!(built_in.texts().len() + 1, own.texts().len());
    assert_eq!(own.texts().last().unwrap().1, ONE_PAIR);
}

/// What a component lacks is told of the component, not of the candidate.
#[test]
fn a_component_without_groups_is_named_in_every_reason() {
    let mixture =
        "components = [\"CC#CB\", \"water\"]\nfractions = [0.5, 0.5]\ntemperature = \"300 K\"\n";
    let built_in = Library::built_in(Slips::Corrected);
    let library = Arc::new(built_in.with_level(EstimateLevel::Joback));
    let plan = plan_of(&library, &brief(mixture, &["gamma_infinity_first_key"])).unwrap();
    let mut scratch = Scratch::new();
    plan.evaluate(&mut scratch, "CCO").unwrap();
    let reason = outcome(&plan, &scratch, "gamma_infinity_first_key")
        .clone()
        .unwrap_err();
    let text = scratch.explained(&plan, &reason).to_string();
    assert!(text.contains("CC#CB: atom "), "{text}");
    assert!(
        plan.notes.iter().any(|note| note.contains("CC#CB: atom ")),
        "{:?}",
        plan.notes
    );

    for (state, line) in [
        ("basis = \"volume\"\ntemperature = \"300 K\"", 3),
        ("pressure = \"1 atm\"", 4),
    ] {
        let mixture =
            format!("components = [\"CC#CB\", \"water\"]\nfractions = [0.5, 0.5]\n{state}\n");
        let faults =
            plan_of(&library, &brief(&mixture, &["gamma_infinity_first_key"])).unwrap_err();
        assert_eq!(faults.len(), 1);
        assert_eq!(faults[0].place.unwrap().line, line);
        let told = faults[0].cause.to_string();
        assert!(told.contains("CC#CB: ") && told.contains("atom "), "{told}");
    }
}

/// A boiling point of the user goes before the built-in curve in the work on a
/// mixture too, and what rests on it says that the curve had another.
#[test]
fn the_user_s_boiling_point_is_that_of_the_mixture() {
    let table = UserTable {
        place: "substances/measured.csv".into(),
        file: "own/measured.csv".into(),
        text: "substance,property,value,unit,pressure,source\n-,-,-,-,kPa,-\n\
               acetone,boiling_point,335,K,101.325,own\n"
            .into(),
    };
    let own = Library::with_user_tables(Slips::Corrected, vec![table]).unwrap();
    let mut profiler = Profiler::new();
    let acetone = MixtureComponent::find(&own, &mut profiler, "acetone", true).unwrap();
    close(acetone.vapor.pressure_pa(335.0).unwrap(), 101_325.0, 1e-9);
    assert!(acetone.vapor.is_measured());
    assert!(acetone.vapor.flags_at(335.0).contains(Flag::Inconsistent));
    // the shape is that of the built-in curve
    let built_in = MixtureComponent::find(&library(), &mut profiler, "acetone", true).unwrap();
    let ratio =
        |t: f64| acetone.vapor.pressure_pa(t).unwrap() / built_in.vapor.pressure_pa(t).unwrap();
    close(ratio(300.0), ratio(335.0), 1e-12);
    assert!(ratio(335.0) < 0.85, "{}", ratio(335.0));
}

/// A pool's own boiling point of a candidate that the tables know moves the curve
/// by which its bubble points are found; the built-in one changes nothing.
#[test]
fn a_candidate_s_own_boiling_point_counts_beside_the_keys() {
    let library = library();
    let figure = "relative_volatility_with_solvent";
    let plan = plan_of(&library, &brief(ACETONE_METHANOL, &[figure])).unwrap();
    let mut scratch = Scratch::new();
    let mut evaluate = |boiling_k: Option<f64>| {
        let own = boiling_k.map(|t| {
            let mut found = Estimate::new(t, "measured");
            found.status = Status::Measured;
            found.source = Some("own".into());
            (Property::BoilingPoint, found)
        });
        let own: Vec<_> = own.into_iter().collect();
        plan.evaluate_with(&mut scratch, "O", &own).unwrap();
        outcome(&plan, &scratch, figure).clone().unwrap()
    };
    let built_in = evaluate(None);
    assert!(!built_in.flags.contains(Flag::Inconsistent));
    let same = evaluate(Some(373.124));
    close(same.value, built_in.value, 1e-4);
    assert!(!same.flags.contains(Flag::Inconsistent));
    let other = evaluate(Some(350.0));
    assert!(
        (other.value / built_in.value - 1.0).abs() > 1e-3,
        "{other:?}"
    );
    assert!(other.flags.contains(Flag::Inconsistent));
}
