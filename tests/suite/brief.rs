//! Briefs: every field, every fault, and texts nobody would write.

use std::fs;
use std::path::{Path, PathBuf};

use groupsmith::brief::{
    Basis, Brief, BriefError, Cause, Direction, Figure, FigureCatalog, Job, Model, Need, Needs,
    Want,
};
use groupsmith::quantity::{Dimension, Property};
use proptest::prelude::*;
use serde::Deserialize;

const MODELS: [Model; 3] = [
    Model {
        id: "unifac",
        built_in: true,
    },
    Model {
        id: "unifac-dortmund",
        built_in: true,
    },
    Model {
        id: "nrtl",
        built_in: false,
    },
];

/// Stands in for the figures of the program: some properties, three figures of
/// a mixture.
fn figures() -> Vec<Figure> {
    let mut figures: Vec<Figure> = [
        Property::BoilingPoint,
        Property::MeltingPoint,
        Property::AcentricFactor,
        Property::LiquidDensity,
    ]
    .into_iter()
    .map(|property| Figure {
        id: property.id(),
        dimension: property.dimension(),
        needs: Needs {
            at_temperature: match property.depends_on_temperature() {
                true => Need::Optional,
                false => Need::Refused,
            },
            ..Needs::default()
        },
    })
    .collect();
    figures.extend([
        Figure {
            id: "selectivity_infinite_dilution",
            dimension: Dimension::Number,
            needs: Needs {
                mixture: true,
                keys: true,
                state: true,
                ..Needs::default()
            },
        },
        Figure {
            id: "activity_coefficient_in_candidate",
            dimension: Dimension::Number,
            needs: Needs {
                mixture: true,
                state: true,
                component: Need::Required,
                ..Needs::default()
            },
        },
        Figure {
            id: "relative_volatility",
            dimension: Dimension::Number,
            needs: Needs {
                mixture: true,
                keys: true,
                pressure: true,
                solvent_to_feed: true,
                ..Needs::default()
            },
        },
    ]);
    figures
}

fn with_catalog<T>(run: impl FnOnce(&FigureCatalog<'_>) -> T) -> T {
    run(&FigureCatalog {
        figures: &figures(),
        models: &MODELS,
    })
}

fn data(name: &str) -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR"))
        .join("tests/data/brief")
        .join(name)
}

fn text_of(name: &str) -> String {
    fs::read_to_string(data(name)).unwrap()
}

fn read(text: &str) -> Result<Brief, groupsmith::brief::Faults> {
    with_catalog(|catalog| Brief::read(text, "brief.toml", catalog))
}

#[test]
fn a_sound_brief_becomes_si() {
    let brief =
        with_catalog(|catalog| Brief::load(&data("sound.toml"), catalog, Job::Screen)).unwrap();
    assert_eq!(brief.heading(), "Entrainers for ethyl acetate and ethanol");
    assert_eq!(brief.purpose.as_ref().unwrap().value, "entrainer");
    assert_eq!(brief.pool_path().unwrap(), data("solvents.csv"));
    assert_eq!(brief.keep_best, 50);

    let mixture = brief.mixture.as_ref().unwrap();
    assert_eq!(mixture.components.len(), 3);
    assert_eq!(mixture.keys.unwrap().value, [0, 1]);
    let fractions = &mixture.fractions.as_ref().unwrap().value;
    assert!((fractions.iter().sum::<f64>() - 1.0).abs() < 1e-15);
    assert_eq!(mixture.basis, Basis::Mass);
    assert_eq!(mixture.temperature_k.unwrap().value, 345.15);
    assert_eq!(mixture.pressure_pa.unwrap().value, 101_325.0);
    let models: Vec<_> = mixture.models.iter().map(|model| model.value).collect();
    assert_eq!(models, ["unifac-dortmund", "unifac"]);
    let solvent = mixture.solvent_to_feed.unwrap().value;
    assert_eq!((solvent.ratio, solvent.basis), (2.0, Basis::Mass));
    assert!(mixture.estimates_for_keys);

    let structure = &brief.structure;
    assert_eq!(
        structure.molar_mass_kg_per_mol.unwrap().value,
        (None, Some(0.15))
    );
    assert_eq!(structure.allowed.as_ref().unwrap().value.len(), 4);
    assert_eq!(structure.groups[0].number.value, 14);
    assert_eq!(structure.patterns[0].pattern.value, "[O][O]");
    assert!(!structure.patterns[0].count.contains(1));
    assert_eq!(structure.atoms[0].1.at_least, Some(1));

    let wants: Vec<Want> = brief.targets.iter().map(|target| target.want).collect();
    assert_eq!(
        wants,
        [
            Want::Between {
                low: 390.15,
                high: 523.15,
                tolerance: 0.0
            },
            Want::CloseTo {
                value: 950.0,
                tolerance: 100.0
            },
            Want::Prefer {
                direction: Direction::High,
                worst: 1.0,
                best: 4.0
            },
            Want::AtMost {
                limit: 3.0,
                tolerance: 1.5
            },
            Want::Prefer {
                direction: Direction::High,
                worst: 1.1,
                best: 3.0
            },
            Want::AtMost {
                limit: 283.15,
                tolerance: 20.0 * 5.0 / 9.0
            },
        ]
    );
    let musts: Vec<_> = brief.targets.iter().map(|t| (t.must, t.counts)).collect();
    assert_eq!(
        musts,
        [
            (true, false),
            (false, true),
            (false, true),
            (false, true),
            (true, true),
            (false, true)
        ]
    );
    assert_eq!(brief.targets[1].temperature_k.unwrap().value, 298.15);
    assert_eq!(brief.targets[3].component.unwrap().value, 2);
    let place = brief.targets[0].figure.place;
    assert_eq!((place.line, place.column), (45, 10));
}

/// The rule of the ranking, and that it needs intervals where it says so.
#[test]
fn a_ranking_has_a_rule_and_a_confidence() {
    use groupsmith::brief::RankBy;
    let with = |ranking: &str| {
        read(&format!(
            "[[target]]\nfigure = \"boiling_point\"\nat_least = \"400 K\"\n[ranking]\n{ranking}\n"
        ))
    };
    for by in RankBy::ALL {
        let found = with(&format!("by = \"{}\"\nconfidence = 0.2", by.id())).unwrap();
        assert_eq!((found.ranking.by, found.ranking.confidence), (by, 0.2));
    }
    assert!(!with("confidence = 0").unwrap().ranking.uses_intervals());
    for (ranking, told) in [
        (
            "by = \"score\"",
            "accepted: expected-score, probability, cautious",
        ),
        ("confidence = 1", "has to be from 0 to less than 1"),
        ("confidence = -0.1", "has to be from 0 to less than 1"),
        ("confidence = \"5 %\"", "is a text, not a number"),
        ("sure = 0.05", "accepted: by, confidence"),
        (
            "by = \"cautious\"\nconfidence = 0",
            "`ranking.by` has no meaning without `confidence > 0`",
        ),
    ] {
        let faults = with(ranking).unwrap_err().to_string();
        assert!(faults.contains(told), "{faults}");
    }
}

#[test]
fn what_is_left_out_has_its_documented_default() {
    let brief = read(
        "[mixture]\ncomponents = [\"CCO\", \"O\"]\nsolvent_to_feed = 1.5\n\
         [[target]]\nfigure = \"boiling_point\"\nclose_to = \"400 K\"\n\
         [[target]]\nfigure = \"acentric_factor\"\nclose_to = 0.5\n",
    )
    .unwrap();
    assert_eq!(brief.keep_best, groupsmith::brief::DEFAULT_KEEP_BEST);
    assert_eq!(brief.ranking.by, groupsmith::brief::RankBy::ExpectedScore);
    assert_eq!(brief.ranking.confidence, 0.05);
    assert_eq!(brief.heading(), "brief.toml");
    let mixture = brief.mixture.unwrap();
    assert_eq!(mixture.keys.unwrap().value, [0, 1]);
    assert_eq!(mixture.basis, Basis::Mole);
    assert!(mixture.models.is_empty() && !mixture.estimates_for_keys);
    assert_eq!(mixture.solvent_to_feed.unwrap().value.basis, Basis::Mole);
    assert_eq!(
        brief.targets[0].want,
        Want::CloseTo {
            value: 400.0,
            tolerance: 20.0
        }
    );
    assert_eq!(
        brief.targets[1].want,
        Want::CloseTo {
            value: 0.5,
            tolerance: 0.1
        }
    );
    assert!(brief.structure.is_empty());
}

#[test]
fn line_ends_and_a_byte_order_mark_change_nothing_but_the_text() {
    let plain = text_of("sound.toml");
    let windows = format!("\u{feff}{}", plain.replace('\n', "\r\n"));
    let one = read(&plain).unwrap();
    let mut other = read(&windows).unwrap();
    assert_eq!(&*other.text, windows);
    other.text = one.text.clone();
    assert_eq!(one, other);

    let faulty = text_of("faulty.toml");
    let windows = format!("\u{feff}{}", faulty.replace('\n', "\r\n"));
    assert_eq!(
        read(&faulty).unwrap_err().to_string(),
        read(&windows).unwrap_err().to_string()
    );
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
struct Cases {
    case: Vec<Case>,
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
struct Case {
    name: String,
    brief: String,
    faults: Vec<String>,
}

/// A new cause does not compile until it has a name here, and the test below
/// fails until a case has it.
fn kind_of(cause: &Cause) -> &'static str {
    match cause {
        Cause::Syntax { .. } => "Syntax",
        Cause::UnknownKey { .. } => "UnknownKey",
        Cause::Kind { .. } => "Kind",
        Cause::Empty { .. } => "Empty",
        Cause::Missing { .. } => "Missing",
        Cause::Quantity { .. } => "Quantity",
        Cause::Range { .. } => "Range",
        Cause::Word { .. } => "Word",
        Cause::UnknownFigure { .. } => "UnknownFigure",
        Cause::UnknownModel { .. } => "UnknownModel",
        Cause::ModelNotBuiltIn { .. } => "ModelNotBuiltIn",
        Cause::UnknownElement { .. } => "UnknownElement",
        Cause::Fractions { .. } => "Fractions",
        Cause::UnknownComponent { .. } => "UnknownComponent",
        Cause::Twice { .. } => "Twice",
        Cause::NothingWanted { .. } => "NothingWanted",
        Cause::TwoWants { .. } => "TwoWants",
        Cause::Stray { .. } => "Stray",
        Cause::Reversed { .. } => "Reversed",
        Cause::Scale { .. } => "Scale",
        Cause::Needs { .. } => "Needs",
        Cause::NotTaken { .. } => "NotTaken",
        Cause::NoLimit { .. } => "NoLimit",
    }
}

const KINDS: usize = 23;

#[test]
fn every_kind_of_fault_is_found_at_its_place() {
    let cases: Cases = toml_edit::de::from_str(&text_of("faults.toml")).unwrap();
    let mut seen = std::collections::BTreeSet::new();
    let mut shown = String::new();
    let mut wrong = Vec::new();
    for case in &cases.case {
        let faults = read(&case.brief).expect_err(&case.name);
        let found: Vec<String> = faults
            .iter()
            .map(|fault| {
                let kind = kind_of(&fault.cause);
                seen.insert(kind);
                format!("{}:{} {kind}", fault.place.line, fault.place.column)
            })
            .collect();
        if found != case.faults {
            wrong.push(format!("{}: {found:?}", case.name));
        }
        shown.push_str(&format!("== {}\n{faults}\n\n", case.name));
    }
    assert!(wrong.is_empty(), "{wrong:#?}");
    assert_eq!(seen.len(), KINDS, "kinds without a case; seen: {seen:?}");
    insta::assert_snapshot!("faults", shown);
}

#[test]
fn all_faults_of_a_brief_are_told_at_once() {
    let faults = with_catalog(|catalog| Brief::load(&data("faulty.toml"), catalog, Job::Screen))
        .unwrap_err();
    insta::assert_snapshot!("faulty_brief", faults.to_string());
}

#[test]
fn each_job_needs_its_parts() {
    let text = "[mixture]\ncomponents = [\"CCO\"]\n";
    let missing = |job| -> Vec<String> {
        match with_catalog(|catalog| Brief::read_for(text, "brief.toml", catalog, job)) {
            Ok(_) => Vec::new(),
            Err(faults) => faults.iter().map(|fault| fault.cause.to_string()).collect(),
        }
    };
    assert_eq!(
        missing(Job::Screen),
        ["the brief has no `[pool]`", "the brief has no `[[target]]`"]
    );
    assert_eq!(missing(Job::Assemble), ["the brief has no `[[target]]`"]);
    assert_eq!(missing(Job::Mixture), ["`[mixture]` has no `temperature`"]);
    assert!(missing(Job::Check).is_empty());
}

#[test]
fn a_path_that_is_no_brief_is_told_from_a_faulty_one() {
    let folder = tempfile::tempdir().unwrap();
    let load = |name: &str| {
        with_catalog(|catalog| Brief::load(&folder.path().join(name), catalog, Job::Check))
    };
    assert!(matches!(
        load("absent.toml"),
        Err(BriefError::Missing { .. })
    ));
    fs::create_dir(folder.path().join("folder")).unwrap();
    let error = load("folder").unwrap_err();
    assert!(matches!(error, BriefError::Folder { .. }));
    assert!(error.to_string().contains("brief.toml"));

    fs::write(folder.path().join("binary"), b"title = 1\n\xff\xfe\x00").unwrap();
    assert!(matches!(
        load("binary"),
        Err(BriefError::NotText { line: 2, .. })
    ));
    fs::write(folder.path().join("nul.toml"), b"title = \"\0\"").unwrap();
    assert!(matches!(load("nul.toml"), Err(BriefError::Faults(_))));
    let large = fs::File::create(folder.path().join("large")).unwrap();
    large.set_len(5 << 20).unwrap();
    assert!(matches!(load("large"), Err(BriefError::TooLarge { .. })));
    fs::write(folder.path().join("empty.toml"), b"").unwrap();
    assert!(matches!(load("empty.toml"), Err(BriefError::Faults(_))));
}

#[test]
fn a_deeply_nested_brief_is_a_fault_not_a_crash() {
    let deep = format!("title = {}1{}", "[".repeat(20_000), "]".repeat(20_000));
    assert!(read(&deep).is_err());
    let tables = format!("[{}]", vec!["a"; 20_000].join("."));
    assert!(read(&tables).is_err());
}

/// Lines a brief could hold, sound and not, to be put together at random.
fn line() -> impl Strategy<Value = String> {
    let key = prop::sample::select(vec![
        "title",
        "components",
        "keys",
        "fractions",
        "basis",
        "temperature",
        "pressure",
        "model",
        "file",
        "figure",
        "component",
        "at_least",
        "at_most",
        "close_to",
        "tolerance",
        "prefer",
        "worst",
        "best",
        "must",
        "weight",
        "solvent_to_feed",
        "rings",
        "atoms",
        "molar_mass",
        "allowed_elements",
        "number",
        "set",
        "pattern",
        "mixture",
        "target",
        "count",
        "limits",
    ]);
    let value = prop_oneof![
        prop::sample::select(vec![
            "1",
            "-1",
            "0.5",
            "nan",
            "inf",
            "-inf",
            "1e400",
            "9223372036854775807",
            "true",
            "\"\"",
            "\"345 K\"",
            "\"1e999 bar\"",
            "\"high\"",
            "\"CCO\"",
            "\"boiling_point\"",
            "\"relative_volatility\"",
            "[]",
            "[1, 2]",
            "[0.5, 0.5]",
            "[\"CCO\", \"O\"]",
            "{ at_least = 3, at_most = 1 }",
            "{ ratio = 0, basis = \"mass\" }",
            "{}",
            "1979-05-27",
            "[[1], {}]",
            "'''x'''",
        ])
        .prop_map(str::to_owned),
        "\"[ -~µ°²\u{2212}]{0,12}\"",
    ];
    let head = prop::sample::select(vec![
        "[mixture]",
        "[pool]",
        "[[target]]",
        "[structure]",
        "[[structure.group]]",
        "[[structure.pattern]]",
        "[keep]",
        "[ranking]",
        "[assembly]",
        "[mixture.solvent_to_feed]",
        "[target]",
    ]);
    prop_oneof![
        4 => (key, value).prop_map(|(key, value)| format!("{key} = {value}")),
        1 => head.prop_map(str::to_owned),
    ]
}

/// Faults are sorted, and each has a place inside the text.
fn judge(text: &str) {
    if let Err(faults) = read(text) {
        let lines = text.split('\n').count() as u32;
        let places: Vec<_> = faults.iter().map(|fault| fault.place).collect();
        assert!(!places.is_empty());
        assert!(places.is_sorted());
        assert!(places.iter().all(|place| place.line <= lines), "{text:?}");
        assert!(!faults.to_string().is_empty());
    }
}

proptest! {
    #[test]
    fn no_text_panics(text in "\\PC{0,200}") {
        judge(&text);
    }

    #[test]
    fn no_brief_panics(lines in prop::collection::vec(line(), 0..24)) {
        judge(&lines.join("\n"));
    }

    #[test]
    fn a_damaged_brief_is_judged(cut in 0_usize..1_500, insert in "[\\x00-\\x7f]{0,3}") {
        let mut text = text_of("sound.toml");
        let cut = cut.min(text.len());
        text.insert_str(cut, &insert);
        judge(&text);
        text.truncate(cut);
        judge(&text);
    }
}
