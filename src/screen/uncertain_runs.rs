//! Whole screenings whose figures have intervals, put in by the test.

use std::collections::BTreeMap;
use std::io::Cursor;
use std::path::Path;
use std::sync::{Arc, LazyLock};

use proptest::prelude::*;

use super::{Columns, Pool, Screened, Screening};
use crate::brief::{Brief, Job};
use crate::evaluate::{
    CATALOG, EstimateLevel, FigureKind, IntervalsForTests, Library, Plan, PlannedFigure, Scratch,
    Verdict,
};
use crate::mixture::Slips;
use crate::quantity::Property;
use crate::ranking::Ranked;
use crate::run::{BriefRecord, Fingerprint, Quiet, RunRecord, StopFlag, TablesRecord};

static LIBRARY: LazyLock<Arc<Library>> = LazyLock::new(|| {
    Arc::new(Library::built_in(Slips::Corrected).with_level(EstimateLevel::Joback))
});

pub(crate) const BRIEF: &str = r#"
[pool]
file = "-"
[[target]]
figure = "boiling_point"
at_least = "370 K"
[[target]]
figure = "liquid_density"
prefer = "high"
worst = "600 kg/m3"
best = "1000 kg/m3"
[[target]]
figure = "molar_mass"
prefer = "low"
worst = "250 g/mol"
best = "50 g/mol"
"#;

/// Alkanes and ethers around the limit.
fn pool() -> String {
    let mut pool = String::from("name,smiles,band\n");
    for length in 4..14 {
        pool.push_str(&format!("alkane {length},{},x\n", "C".repeat(length)));
        for other in 1..4 {
            let (one, two) = ("C".repeat(length), "C".repeat(other));
            pool.push_str(&format!("ether {length} {other},{one}O{two},y\n"));
        }
    }
    pool
}

/// 5 % of the boiling point, 10 % of the density downwards and 15 % upwards.
pub(crate) fn wide(figure: &PlannedFigure, value: f64) -> Option<(f64, f64)> {
    match figure.kind {
        FigureKind::Property(Property::BoilingPoint) => Some((0.95 * value, 1.05 * value)),
        FigureKind::Property(Property::LiquidDensity) => Some((0.9 * value, 1.15 * value)),
        _ => None,
    }
}

/// A brief bound with intervals put in; measured data are left out.
pub(crate) fn plan(brief: &str, intervals: Option<IntervalsForTests>) -> Plan {
    let brief = Brief::read_for(brief, "brief.toml", &CATALOG, Job::Screen).unwrap();
    let mut plan = Plan::new(Arc::clone(&LIBRARY), brief, false).unwrap();
    plan.intervals_for_tests = intervals;
    plan
}

fn run(
    brief: &str,
    intervals: Option<IntervalsForTests>,
    threads: usize,
    folder: &Path,
) -> Screened {
    screened(&plan(brief, intervals), threads, folder)
}

pub(crate) fn screened(plan: &Plan, threads: usize, folder: &Path) -> Screened {
    let columns = Columns {
        smiles: None,
        name: None,
    };
    let pool = Pool::from_reader(Box::new(Cursor::new(pool())), "pool", None, columns).unwrap();
    let tables = TablesRecord {
        fingerprint: Fingerprint::of(b"tables"),
        of_user: Vec::new(),
        choices: Vec::new(),
    };
    let record = RunRecord::new("screen", BriefRecord::new("brief.toml", ""), tables);
    let screening = Screening {
        plan,
        folder,
        threads,
        stop: &StopFlag::new(),
        listener: &Quiet,
    };
    let screened = screening.run(pool, record).unwrap();
    assert!(screened.counts.add_up());
    screened
}

fn read(folder: &Path, file: &str) -> String {
    std::fs::read_to_string(folder.join(file)).unwrap()
}

fn record(folder: &Path) -> RunRecord {
    serde_json::from_str(&read(folder, "run.json")).unwrap()
}

/// Rows of a table by their names, cells by their heads.
fn rows(folder: &Path, file: &str) -> BTreeMap<String, BTreeMap<String, String>> {
    let text = read(folder, file);
    let mut reader = csv::Reader::from_reader(text.as_bytes());
    let head = reader.headers().unwrap().clone();
    reader
        .records()
        .map(|record| {
            let record = record.unwrap();
            let cells = head.iter().zip(&record);
            let row: BTreeMap<String, String> = cells.map(|(a, b)| (a.into(), b.into())).collect();
            (row["name"].clone(), row)
        })
        .collect()
}

#[test]
fn a_must_fails_only_beyond_the_confidence() {
    let folder = tempfile::tempdir().unwrap();
    let exact = run(BRIEF, None, 1, folder.path());
    let fell_exactly = rows(folder.path(), "not_ranked.csv");
    assert!(
        read(folder.path(), "ranked.csv")
            .lines()
            .next()
            .unwrap()
            .contains(",line,notes,pool_band,probability,score_low,score_high,band")
    );

    let uncertain = run(BRIEF, Some(wide), 1, folder.path());
    let fell = rows(folder.path(), "not_ranked.csv");
    assert!(uncertain.counts.ranked > exact.counts.ranked);
    assert!(uncertain.counts.not_qualified > 0);
    // Who fell in spite of the interval fell without it, and the chance is told.
    assert!(fell.keys().all(|name| fell_exactly.contains_key(name)));
    let told = |name: &str| fell[name]["reason"].clone();
    assert!(
        fell.keys()
            .any(|name| told(name).contains("probability of meeting it")),
        "{fell:?}"
    );

    let ranked = rows(folder.path(), "ranked.csv");
    for row in ranked.values() {
        let number = |head: &str| row[head].parse::<f64>().unwrap();
        assert!((0.05..=1.0).contains(&number("probability")));
        assert!(number("score_low") <= number("score"));
        assert!(number("score") <= number("score_high"));
        assert!(number("boiling_point_k_low") < number("boiling_point_k"));
        assert!(number("liquid_density_kg_per_m3") < number("liquid_density_kg_per_m3_high"));
        assert!(!row.contains_key("molar_mass_kg_per_mol_low"));
        let open = (0.05..0.95).contains(&number("probability"));
        assert_eq!(
            row["notes"].contains("within the method's error"),
            open,
            "{row:?}"
        );
    }

    // Nothing but certainty would do.
    let strict = format!("{BRIEF}[ranking]\nconfidence = 0.99\n");
    let strict = run(&strict, Some(wide), 1, folder.path());
    assert!(strict.counts.ranked < exact.counts.ranked);
    assert!(strict.ranking.iter().all(|row| row.probability >= 0.99));
}

#[test]
fn without_confidence_the_bare_numbers_decide() {
    let folder = tempfile::tempdir().unwrap();
    let exact = run(BRIEF, None, 1, folder.path());
    let not_ranked = read(folder.path(), "not_ranked.csv");
    let bare = format!("{BRIEF}[ranking]\nconfidence = 0\n");
    let bare = run(&bare, Some(wide), 1, folder.path());
    assert_eq!(read(folder.path(), "not_ranked.csv"), not_ranked);
    let order = |screened: &Screened| -> Vec<(u64, u64)> {
        let ranking = screened.ranking.iter();
        ranking.map(|row| (row.line, row.score.to_bits())).collect()
    };
    assert_eq!(order(&bare), order(&exact));
    for row in rows(folder.path(), "ranked.csv").values() {
        for column in ["probability", "score_low", "score_high", "band"] {
            assert_eq!(row[column], "");
        }
        // What is known of the figures is shown all the same.
        assert_ne!(row["boiling_point_k_low"], "");
    }
}

#[test]
fn no_interval_ranks_as_the_bare_numbers_by_every_rule() {
    let folder = tempfile::tempdir().unwrap();
    let exact = run(BRIEF, None, 1, folder.path());
    let table = read(folder.path(), "ranked.csv");
    for by in ["expected-score", "probability", "cautious"] {
        let brief = format!("{BRIEF}[ranking]\nby = \"{by}\"\n");
        let found = run(&brief, None, 1, folder.path());
        assert_eq!(read(folder.path(), "ranked.csv"), table);
        assert!(found.ranking.iter().all(|row| row.probability == 1.0));
        assert_eq!(record(folder.path()).ranking.unwrap().by, by);
    }
    assert!(exact.ranking.iter().all(|row| row.variance == 0.0));
}

#[test]
fn rules_order_by_what_they_are_called_after() {
    let folder = tempfile::tempdir().unwrap();
    for (by, merit) in [
        ("expected-score", (|row| row.score) as fn(&Ranked) -> f64),
        ("probability", |row| row.probability),
        ("cautious", |row| {
            crate::evaluate::score_interval(row.score, row.variance).0
        }),
    ] {
        let brief = format!("{BRIEF}[ranking]\nby = \"{by}\"\n[keep]\nbest = 7\n");
        let found = run(&brief, Some(wide), 2, folder.path());
        assert_eq!(found.ranking.len(), 7);
        let merits: Vec<f64> = found.ranking.iter().map(merit).collect();
        assert!(
            merits.is_sorted_by(|one, other| one >= other),
            "{by}: {merits:?}"
        );
    }
}

#[test]
fn the_files_do_not_depend_on_the_number_of_threads() {
    let one = tempfile::tempdir().unwrap();
    let four = tempfile::tempdir().unwrap();
    run(BRIEF, Some(wide), 1, one.path());
    run(BRIEF, Some(wide), 4, four.path());
    for file in ["ranked.csv", "not_ranked.csv"] {
        assert_eq!(read(one.path(), file), read(four.path(), file));
    }
    assert_eq!(record(one.path()).ranking, record(four.path()).ranking);
}

#[test]
fn the_record_tells_the_band_of_the_first_and_what_to_measure() {
    let folder = tempfile::tempdir().unwrap();
    let found = run(BRIEF, Some(wide), 1, folder.path());
    let ranking = record(folder.path()).ranking.unwrap();
    let of_first = found
        .ranking
        .iter()
        .filter(|row| row.band == Some(1))
        .count();
    assert!(of_first > 1);
    assert_eq!(ranking.in_first_band, of_first as u64);
    let next = ranking.measure_next.unwrap();
    assert!(next.chance > 0.2 && next.chance < 1.0, "{next:?}");
    assert!(next.share_of_variance > 0.0 && next.share_of_variance <= 1.0);
    insta::assert_snapshot!(next.reason, @"the boiling point of ether 6 1, which makes up 84 % of the variance of its score; knowing it would put it before ether 7 1 with a probability of 36 %");
    // Nothing to measure where nothing is uncertain.
    run(BRIEF, None, 1, folder.path());
    assert_eq!(record(folder.path()).ranking.unwrap().measure_next, None);
}

/// A target with limits drawn at random, some of them musts.
fn targets() -> impl Strategy<Value = String> {
    let figure = prop::sample::select(vec![
        ("boiling_point", "K", 300.0, 200.0),
        ("liquid_density", "kg/m3", 650.0, 250.0),
        ("molar_mass", "g/mol", 50.0, 200.0),
    ]);
    (figure, 0.0..1.0_f64, 0.0..0.5_f64, 0..4_u8, any::<bool>()).prop_map(
        |((figure, unit, low, width), at, more, form, must)| {
            let low = low + at * width;
            let high = low + more * width + 1.0;
            let wanted = match form {
                0 => format!("at_least = \"{low} {unit}\""),
                1 => format!("at_most = \"{low} {unit}\""),
                2 => format!("at_least = \"{low} {unit}\"\nat_most = \"{high} {unit}\""),
                _ => {
                    format!("prefer = \"high\"\nworst = \"{low} {unit}\"\nbest = \"{high} {unit}\"")
                }
            };
            format!("[[target]]\nfigure = \"{figure}\"\n{wanted}\nmust = {must}\n")
        },
    )
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(64))]

    /// Confidence 0 leaves every interval out; any other one passes whoever
    /// passes by the bare numbers with all musts within reach.
    #[test]
    fn verdicts_without_confidence_are_those_of_bare_numbers(
        targets in prop::collection::vec(targets(), 1..5),
        length in 4..14_usize,
    ) {
        let plan = |ranking: &str, intervals: Option<IntervalsForTests>| {
            let text = format!("[pool]\nfile = \"-\"\n{}{ranking}", targets.concat());
            plan(&text, intervals)
        };
        let mut scratch = Scratch::new();
        let smiles = format!("{}OC", "C".repeat(length));
        let today = plan("", None).evaluate(&mut scratch, &smiles).unwrap();
        let bare = plan("[ranking]\nconfidence = 0\n", Some(wide));
        prop_assert_eq!(&bare.evaluate(&mut scratch, &smiles).unwrap(), &today);
        let lenient = plan("[ranking]\nconfidence = 1e-9\n", Some(wide));
        if let Verdict::Qualified { .. } = today {
            let found = lenient.evaluate(&mut scratch, &smiles).unwrap();
            let Verdict::Qualified { score, probability, .. } = found else {
                panic!("{found:?}");
            };
            let (least, most) = lenient.probability_bounds(&scratch);
            prop_assert!(least <= probability + 1e-12 && probability <= most + 1e-12);
            prop_assert!(score <= probability + 1e-9);
        }
    }
}
