//! Whole screenings by the program: outcomes, order, determinism, what becomes
//! of bad pools, stopping.

use std::fmt::Write as _;
use std::io::Write as _;
use std::process::{Command, Stdio};
use std::time::{Duration, Instant};

use flate2::Compression;
use flate2::write::GzEncoder;
use groupsmith::run::Ending;

use crate::workbench::{Bench, Said, csv_rows, repository, say};

/// A must on the boiling point and a preference for light molecules.
const LIGHT: &str = r#"
title = "Light and not too volatile"
[pool]
file = "pool.csv"
[[target]]
figure = "boiling_point"
at_least = "340 K"
[[target]]
figure = "molar_mass"
prefer = "low"
worst = "200 g/mol"
best = "50 g/mol"
"#;

const SOME: &str = "name,smiles\nhexane,CCCCCC\nethanol,CCO\nheptane,CCCCCCC\nethane,CC\n";

fn gzip(content: &[u8]) -> Vec<u8> {
    let mut encoder = GzEncoder::new(Vec::new(), Compression::default());
    encoder.write_all(content).unwrap();
    encoder.finish().unwrap()
}

fn pairs(of: &[(&str, &str)]) -> Vec<(String, String)> {
    of.iter()
        .map(|(a, b)| ((*a).to_owned(), (*b).to_owned()))
        .collect()
}

/// Printed numbers have four digits: another mathematical library prints the same.
fn example(name: &str) {
    let bench = Bench::new();
    let brief = repository(&format!("examples/{name}/brief.toml"));
    let said = say(&[
        "screen",
        &brief.display().to_string(),
        "--out",
        &bench.argument("out"),
        "--show",
        "8",
    ]);
    assert_eq!(said.code, 0, "{}", said.err);
    assert_eq!(said.err, "");
    let printed = said.out.replace(&bench.argument("out"), "[out]");
    insta::assert_snapshot!(format!("example_{}", name.replace('-', "_")), printed);

    assert_eq!(bench.files(), ["not_ranked.csv", "ranked.csv", "run.json"]);
    let record = bench.record();
    assert!(record.finished && record.ended == Ending::Complete);
    let pool = repository("examples/entrainer-acetone-methanol/solvents.csv");
    let lines = std::fs::read_to_string(pool).unwrap().lines().count() - 1;
    assert_eq!(record.counts.lines, lines as u64);
    let ranked = csv_rows(&bench.read("out/ranked.csv")).len() - 1;
    let not_ranked = csv_rows(&bench.read("out/not_ranked.csv")).len() - 1;
    assert_eq!(ranked as u64, record.counts.ranked);
    assert_eq!(ranked + not_ranked, lines);
}

#[test]
fn example_of_an_entrainer() {
    example("entrainer-acetone-methanol");
}

#[test]
fn example_of_a_replacement() {
    example("replace-phenol-extractant");
}

/// Enough lines for several batches and tasks, duplicates and faults among them.
fn long_pool() -> String {
    let solvents = repository("examples/entrainer-acetone-methanol/solvents.csv");
    let solvents = std::fs::read_to_string(solvents).unwrap();
    let mut pool = solvents.clone();
    for (at, line) in solvents.lines().skip(1).enumerate() {
        let (name, rest) = line.split_once(',').unwrap();
        if !name.starts_with('"') {
            let _ = writeln!(pool, "{name} again,{rest}");
        }
        let length = 1 + at % 40;
        let _ = writeln!(
            pool,
            "ether {at},{}O{},x,y",
            "C".repeat(length),
            "C".repeat(1 + at % 7)
        );
        let _ = writeln!(pool, "bad {at},C(C,x,y");
        let chain = "C".repeat(1 + at / 8);
        let _ = writeln!(
            pool,
            "amine {at},{chain}N{chain}({}),x,y",
            "C".repeat(1 + at % 8)
        );
    }
    assert!(pool.lines().count() > 2500);
    // Twice over, so that there is more than one batch.
    let body = pool.split_once('\n').unwrap().1.to_owned();
    pool + &body
}

fn entrainer(pool: &str) -> String {
    let brief =
        std::fs::read_to_string(repository("examples/entrainer-acetone-methanol/brief.toml"))
            .unwrap();
    brief.replace("solvents.csv", pool)
}

#[test]
fn results_do_not_depend_on_threads_or_repetition() {
    let bench = Bench::with(&entrainer("pool.csv"), long_pool());
    assert_eq!(bench.screen(&["--threads", "1"]).code, 0);
    let once = bench.results();
    let counts = bench.record().counts;
    assert!(counts.duplicate > 1000 && counts.refused > 500 && counts.below_kept > 100);
    for threads in ["1", "2", "5"] {
        assert_eq!(bench.screen(&["--threads", threads]).code, 0);
        assert!(bench.results() == once, "{threads} threads differ");
    }
}

#[test]
fn a_pool_ranks_alike_however_it_comes() {
    let plain = Bench::with(LIGHT, SOME);
    assert_eq!(plain.screen(&[]).code, 0);
    let wanted = [
        plain.read("out/ranked.csv"),
        plain.read("out/not_ranked.csv"),
    ];
    let input = plain.record().input.unwrap().fingerprint;

    let packed = Bench::new();
    packed.write("brief.toml", LIGHT.replace("pool.csv", "pool.csv.gz"));
    packed.write("pool.csv.gz", gzip(SOME.as_bytes()));
    assert_eq!(packed.screen(&[]).code, 0);

    let piped = Bench::new();
    piped.write("brief.toml", LIGHT.replace("pool.csv", "-"));
    let said: Said = piped
        .screening(&[])
        .write_stdin(SOME)
        .output()
        .unwrap()
        .into();
    assert_eq!(said.code, 0, "{}", said.err);

    let piped_packed = Bench::new();
    piped_packed.write("brief.toml", LIGHT.replace("pool.csv", "-"));
    let mut command = piped_packed.screening(&[]);
    let said: Said = command
        .write_stdin(gzip(SOME.as_bytes()))
        .output()
        .unwrap()
        .into();
    assert_eq!(said.code, 0, "{}", said.err);

    for other in [packed, piped, piped_packed] {
        assert_eq!(
            [
                other.read("out/ranked.csv"),
                other.read("out/not_ranked.csv")
            ],
            wanted
        );
        assert_eq!(other.record().input.unwrap().fingerprint, input);
    }
}

#[test]
fn lines_of_smiles_and_name_rank_like_csv() {
    let bench = Bench::new();
    bench.write("brief.toml", LIGHT.replace("pool.csv", "pool.smi"));
    bench.write(
        "pool.smi",
        "CCCCCC hexane\nCCO ethanol\n\nCCCCCCC heptane\nCC ethane\n",
    );
    assert_eq!(bench.screen(&[]).code, 0);
    assert_eq!(bench.ranking(), ["ethanol", "hexane", "heptane"]);
    // Blank lines are no lines, but lines keep their number in the file.
    assert_eq!(
        bench.ranked("line"),
        pairs(&[("ethanol", "2"), ("hexane", "1"), ("heptane", "4")])
    );
}

/// Every outcome once; the stereoisomers of 1,2-dichloroethylene are two
/// candidates, heavy water is not water, another spelling is the same line.
#[test]
fn every_outcome_has_its_reason() {
    let brief = r#"
[pool]
file = "pool.csv"
[[target]]
figure = "boiling_point"
at_least = "315 K"
[[target]]
figure = "critical_temperature"
at_most = "800 K"
[[target]]
figure = "molar_mass"
prefer = "low"
worst = "200 g/mol"
best = "50 g/mol"
[keep]
best = 3
"#;
    let pool = "smiles,name,shelf\n\
        CCCCCCC,heptane,a\n\
        CC,ethane,b\n\
        C(CCC)CCC,heptane again,c\n\
        C(=C/Cl)/Cl,cis,d\n\
        Cl/C=C/Cl,trans,e\n\
        O,water,f\n\
        [2H]O[2H],heavy water,g\n\
        CCCCCCCC,octane,h\n\
        [Na+].[Cl-],salt,i\n\
        C(,broken,j\n";
    // Water is in no group of Joback and Reid.
    let by_groups = ["--estimates", "joback-reid"];
    let bench = Bench::with(brief, pool);
    let said = bench.screen(&by_groups);
    assert_eq!(said.code, 0, "{}", said.err);
    // M of dichloroethylene is 96.94, of heptane 100.2, of octane 114.2 g/mol.
    assert_eq!(bench.ranking().len(), 3);
    assert_eq!(bench.ranking()[2], "heptane");
    assert_eq!(
        bench.not_ranked("outcome"),
        pairs(&[
            ("ethane", "not-qualified"),
            ("heptane again", "duplicate"),
            ("water", "not-assessable"),
            ("heavy water", "not-assessable"),
            ("octane", "below-kept"),
            ("salt", "refused"),
            ("broken", "refused"),
        ])
    );
    let notes = bench.ranked("notes");
    let note = |name: &str| &notes.iter().find(|(known, _)| known == name).unwrap().1;
    assert!(
        note("trans").contains("stereoisomer or isotopologue of line 5"),
        "{notes:?}"
    );
    assert!(!note("cis").contains("stereoisomer"), "{notes:?}");
    let reasons = bench.not_ranked("reason");
    let reason = |name: &str| &reasons.iter().find(|(known, _)| known == name).unwrap().1;
    assert_eq!(reason("heptane again"), "the same substance as line 2");
    assert!(
        reason("water").contains("not covered by joback"),
        "{reasons:?}"
    );
    assert!(
        reason("heavy water").contains("isotopologue of line 7"),
        "{reasons:?}"
    );
    assert_eq!(reason("octane"), "qualified, but ranks below the 3 kept");
    assert!(reason("broken").starts_with("column 3:"), "{reasons:?}");
    assert_eq!(bench.not_ranked("figure")[0].1, "boiling_point");
    assert_eq!(bench.not_ranked("wanted")[0].1, "at least 315 K");

    let counts = bench.record().counts;
    assert_eq!(
        (
            counts.lines,
            counts.ranked,
            counts.below_kept,
            counts.not_qualified
        ),
        (10, 3, 1, 1)
    );
    assert_eq!(
        (counts.not_assessable, counts.duplicate, counts.refused),
        (2, 1, 2)
    );
    assert_eq!(counts.not_assessable_by_target["critical_temperature"], 2);
    assert_eq!(bench.ranked("shelf")[2].1, "a");

    // What a soft target sees of the same gap: it ranks, after all without one.
    let soft = brief.replace(
        "at_most = \"800 K\"",
        "prefer = \"high\"\nworst = \"400 K\"\nbest = \"2000 K\"",
    );
    let bench = Bench::with(&soft.replace("best = 3", "best = 9"), pool);
    assert_eq!(bench.screen(&by_groups).code, 0);
    let ranking = bench.ranking();
    assert_eq!(ranking[4..], ["water", "heavy water"]);
    assert_eq!(bench.record().counts.ranked_incomplete, 2);
    let notes = bench.ranked("notes");
    assert!(
        notes[4]
            .1
            .contains("no critical_temperature: not covered by joback"),
        "{notes:?}"
    );
    // A gap may not be hidden behind a value.
    assert_eq!(bench.ranked("critical_temperature_k")[4].1, "");
}

#[test]
fn a_limit_belongs_to_what_is_allowed() {
    // The measured boiling point of water is 373.124 K.
    for (limit, code) in [
        ("at_least = \"373.124 K\"", 0),
        ("at_least = \"373.1241 K\"", 1),
        ("at_most = \"373.124 K\"", 0),
        ("at_most = \"373.1239 K\"", 1),
        ("at_least = \"373.124 K\"\nat_most = \"373.124 K\"", 0),
    ] {
        let brief = format!(
            "[pool]\nfile = \"pool.csv\"\n[[target]]\nfigure = \"boiling_point\"\n{limit}\n"
        );
        let bench = Bench::with(&brief, "smiles,name\nO,water\n");
        let said = bench.screen(&[]);
        assert_eq!(said.code, code, "{limit}: {}", said.out);
        // No target counts: the reader is told what the order then means.
        assert!(
            said.err.contains("no target counts in the score"),
            "{}",
            said.err
        );
        if code == 0 {
            assert_eq!(bench.ranked("score"), pairs(&[("water", "1")]));
        }
    }
}

/// d = (worst − M)/(worst − best), cut at 0 and 1; M from the standard atomic
/// weights: hexane 86.178, dodecane 170.34, pentadecane 212.421 g/mol.
#[test]
fn a_desirability_of_zero_makes_the_score_zero_and_stays_in_the_ranking() {
    let brief = format!(
        "{LIGHT}\n[[target]]\nfigure = \"boiling_point\"\nprefer = \"high\"\nworst = \"300 K\"\nbest = \"301 K\"\nweight = 3.0\n"
    );
    let pool = "smiles,name\nCCCCCCCCCCCCCCC,pentadecane\nCCCCCC,hexane\nCCCCCCCCCCCC,dodecane\n";
    let bench = Bench::with(&brief, pool);
    assert_eq!(bench.screen(&[]).code, 0);
    assert_eq!(bench.ranking(), ["hexane", "dodecane", "pentadecane"]);
    let scores: Vec<f64> = bench
        .ranked("score")
        .iter()
        .map(|(_, score)| score.parse().unwrap())
        .collect();
    // Weighted geometric mean of d and 1 with weights 1 and 3.
    for (score, mass) in scores.iter().zip([86.178, 170.34, 212.421]) {
        let d: f64 = ((200.0 - mass) / 150.0_f64).clamp(0.0, 1.0);
        assert!((score - d.powf(0.25)).abs() < 1e-6, "{score} against {d}");
    }
    assert_eq!(scores[2], 0.0);
}

#[test]
fn structural_limits_are_musts() {
    let pool = "smiles,name\nCCCCCO,pentanol\nCCCCCCl,chloropentane\nOCCO,glycol\n\
        C1CCCCC1O,cyclohexanol\nCCCCCCCCCCO,decanol\nCCCCC,pentane\nCCCC(=O)O,butyric acid\n";
    let base = "[pool]\nfile = \"pool.csv\"\n[[target]]\nfigure = \"molar_mass\"\nprefer = \"low\"\nworst = \"200 g/mol\"\nbest = \"50 g/mol\"\n";
    let fallen = |structure: &str| {
        let bench = Bench::with(&format!("{base}{structure}"), pool);
        let said = bench.screen(&[]);
        assert_eq!(said.code, 0, "{structure}: {}", said.err);
        let names: Vec<String> = bench
            .not_ranked("figure")
            .into_iter()
            .map(|(name, figure)| format!("{name}: {figure}"))
            .collect();
        names.join(", ")
    };
    assert_eq!(
        fallen("[structure]\nallowed_elements = [\"C\", \"H\", \"O\"]\n"),
        "chloropentane: structure.elements"
    );
    assert_eq!(
        fallen("[structure]\nforbidden_elements = [\"Cl\"]\n"),
        "chloropentane: structure.forbidden.Cl"
    );
    assert_eq!(
        fallen("[structure]\nheavy_atoms = { at_least = 5, at_most = 7 }\n"),
        "glycol: structure.heavy_atoms, decanol: structure.heavy_atoms"
    );
    assert_eq!(
        fallen("[structure]\nrings = { at_most = 0 }\n"),
        "cyclohexanol: structure.rings"
    );
    assert_eq!(
        fallen("[structure]\nmolar_mass = { at_most = \"110 g/mol\" }\n"),
        "decanol: structure.molar_mass"
    );
    assert_eq!(
        fallen("[structure]\natoms = { O = { at_least = 1, at_most = 1 } }\n"),
        "chloropentane: structure.atoms.O, glycol: structure.atoms.O, \
         pentane: structure.atoms.O, butyric acid: structure.atoms.O"
    );
    // Group 20 of Joback and Reid is the alcohol OH.
    assert_eq!(
        fallen("[[structure.group]]\nset = \"joback\"\nnumber = 20\nat_least = 1\nat_most = 1\n"),
        "chloropentane: structure.group.joback.20, glycol: structure.group.joback.20, \
         pentane: structure.group.joback.20, butyric acid: structure.group.joback.20"
    );
    assert_eq!(
        fallen("[[structure.pattern]]\npattern = \"C(=O)[OH]\"\nname = \"acid\"\nat_most = 0\n"),
        "butyric acid: structure.pattern.acid"
    );
}

#[test]
fn what_is_wanted_of_elements_names_each_once() {
    let brief = format!("{LIGHT}[structure]\nallowed_elements = [\"C\", \"H\"]\n");
    let bench = Bench::with(&brief, SOME);
    assert_eq!(bench.screen(&[]).code, 0);
    assert_eq!(
        bench.not_ranked("wanted")[0],
        ("ethanol".into(), "only H, C".into())
    );
}

#[test]
fn only_musts_are_told_among_what_lines_fell_at() {
    let brief = format!(
        "{LIGHT}\n[[target]]\nfigure = \"boiling_point\"\nat_most = \"360 K\"\nmust = true\n[[target]]\nfigure = \"boiling_point\"\nclose_to = \"350 K\"\n"
    );
    let bench = Bench::with(&brief, SOME);
    let said = bench.screen(&[]);
    let told: Vec<&str> = said
        .out
        .lines()
        .filter(|line| line.starts_with("    "))
        .map(str::trim)
        .filter(|line| line.starts_with("boiling_point") || line.starts_with("molar_mass"))
        .collect();
    assert_eq!(told.len(), 1, "{}", said.out);
    assert!(
        told[0].starts_with("boiling_point: at least 340 K; at most 360 K")
            && told[0].ends_with(" 2"),
        "{told:?}"
    );
}

/// A candidate is told by what the files say of it.
#[test]
fn one_candidate_is_explained_whatever_became_of_it() {
    let pool = "smiles,name\nCCCCCC,hexane\nCCC,propane\nC(C)CCCC,other hexane\nC(,broken\n\
        CCCCCCCC,octane\n";
    let brief = format!("{LIGHT}\n[keep]\nbest = 1\n");
    let piped = brief.replace("pool.csv", "-");
    for (wanted, line) in [
        (
            "hexane",
            "hexane  CCCCCC  (line 2)\n  rank 1 with score 0.7588",
        ),
        // By structure the first line of it; by name the line of that name.
        (
            "CCCCCC",
            "hexane  CCCCCC  (line 2)\n  rank 1 with score 0.7588",
        ),
        (
            "OTHER HEXANE",
            "(line 4)\n  duplicate: the same substance as line 2",
        ),
        ("propane", "(line 3)\n  not-qualified: boiling_point is "),
        (
            "octane",
            "(line 6)\n  below-kept: qualified, but ranks below the 1 kept",
        ),
        ("broken", "(line 5)\n  refused: column 3: "),
        (
            "benzene",
            "benzene  c1ccccc1  (not in the pool)\n  would qualify with score ",
        ),
        (
            "CCCC",
            "CCCC  CCCC  (not in the pool)\n  would not qualify: boiling_point is ",
        ),
    ] {
        let bench = Bench::with(&brief, pool);
        let said = bench.screen(&["--explain", wanted]);
        assert_eq!(said.code, 0, "{wanted}: {}", said.err);
        assert!(said.out.contains(line), "{wanted}: {}", said.out);
        if wanted != "broken" {
            assert!(said.out.contains("molar_mass"), "{wanted}: {}", said.out);
        }
        // A pool that can be read only once is explained alike.
        let bench = Bench::with(&piped, "");
        let mut command = bench.screening(&["--explain", wanted]);
        let said: Said = command.write_stdin(pool).output().unwrap().into();
        assert!(said.out.contains(line), "{wanted}: {}", said.out);
    }
    let bench = Bench::with(&brief, pool);
    let said = bench.screen(&["--explain", "no such thing"]);
    assert_eq!(said.code, 2);
    assert!(
        said.err
            .contains("no line of the pool is called so, and `no such thing` is neither"),
        "{}",
        said.err
    );
    // What is read only once can be told only afterwards.
    let bench = Bench::with(&piped, "");
    let mut command = bench.screening(&["--explain", "no such thing"]);
    let said: Said = command.write_stdin(pool).output().unwrap().into();
    assert_eq!(said.code, 2);
    assert!(
        said.err
            .contains("no candidate of the pool is called `no such thing`"),
        "{}",
        said.err
    );
}

#[test]
fn nothing_qualified_is_told_by_the_exit_code() {
    let bench = Bench::with(&LIGHT.replace("340 K", "900 K"), SOME);
    let said = bench.screen(&[]);
    assert_eq!(said.code, 1, "{}", said.err);
    assert!(bench.record().finished);
    assert_eq!(csv_rows(&bench.read("out/ranked.csv")).len(), 1);
    assert!(said.out.contains("4 lines read"), "{}", said.out);
}

#[test]
fn files_have_the_columns_that_are_relied_upon() {
    let bench = Bench::with(
        LIGHT,
        "shelf,smiles,name,score\n3,CCCCCC,hexane,mine\n4,CC,ethane,\n",
    );
    assert_eq!(bench.screen(&[]).code, 0);
    let ranked = bench.read("out/ranked.csv");
    // Figures of targets first, then every other property, in SI.
    insta::assert_snapshot!("ranked_head", ranked.lines().next().unwrap());
    assert_eq!(
        bench.read("out/not_ranked.csv").lines().next().unwrap(),
        "line,name,smiles,outcome,figure,value,wanted,reason"
    );
    assert_eq!(bench.ranked("pool_score"), pairs(&[("hexane", "mine")]));
    let record = bench.record();
    assert_eq!(record.brief.text, LIGHT);
    assert_eq!(record.command, "screen");
    assert!(record.timing.threads > 0);
}

fn refused(pool: impl AsRef<[u8]>, code: i32, message: &str) {
    let bench = Bench::with(LIGHT, pool);
    let said = bench.screen(&[]);
    assert_eq!(said.code, code, "{}", said.err);
    assert!(said.err.contains(message), "{} lacks {message}", said.err);
    assert_eq!(said.out, "");
    assert!(bench.files().is_empty(), "{:?}", bench.files());
}

#[test]
fn pools_that_cannot_be_used_are_told_apart() {
    refused(
        "solvent,formula\nx,C\n",
        2,
        "no column is headed `smiles` or `name` or `cas`; its columns are `solvent`, `formula`",
    );
    refused("", 2, "holds no candidates: it is empty");
    refused(
        "smiles,name\n",
        2,
        "holds no candidates: there is a header and no line after it",
    );
    refused(
        "smiles,name,NAME\nC,a,b\n",
        2,
        "the column `NAME` stands twice",
    );
    refused(b"smiles\n\0\x01\x02\n", 2, "is not a text file");
    refused(b"\x89PNG\r\n\x1a\n\x00\x00", 2, "is not a text file");
    refused("\"smiles\nCCO\n", 2, "the header line has a quote");
    refused(b"smiles,\xff\nCCO,a\n", 2, "the header line is not UTF-8");
    let mut long = String::from("smiles\n");
    for at in 0..20_000 {
        let _ = writeln!(long, "{}", "C".repeat(1 + at % 30));
    }
    let packed = gzip(long.as_bytes());
    refused(
        &packed[..packed.len() / 2],
        3,
        "reading pool.csv failed after line",
    );
    // Not gzip but for its first two bytes.
    refused(
        [0x1f, 0x8b, 1, 2, 3, 4, 5, 6, 7, 8, 9, 10],
        3,
        "reading pool.csv failed",
    );

    let bench = Bench::new();
    bench.write("brief.toml", LIGHT);
    let said = bench.screen(&[]);
    assert!(
        said.code == 2 && said.err.contains("cannot open the candidate list pool.csv"),
        "{said:?}"
    );
    std::fs::create_dir(bench.path("pool.csv")).unwrap();
    let said = bench.screen(&[]);
    assert!(
        said.code == 2 && said.err.contains("pool.csv is a directory"),
        "{said:?}"
    );
}

#[test]
fn bad_lines_are_refused_one_by_one() {
    let mut pool = b"smiles,name\nCCCCCCC,fine\n".to_vec();
    pool.extend(vec![b'C'; 70_000]);
    pool.extend(
        b"\nC\xff,bad\n\"open,quote\nCCCCCCCC,also fine\nCC,too,many\n,no smiles\nC(,syntax\n",
    );
    pool.extend(b"CC[Na],element\n*CC,wild\nC[CH2],radical\nC[NH3+],charge\nCC.CC,two\nCC(C)(C)(C)C,valence\n");
    pool.extend(b"c1cccc1,aromatic\nC1CC,ring\n");
    pool.extend(vec![b'C'; 9_000]);
    pool.extend(b",long\n");
    let bench = Bench::with(LIGHT, pool);
    let said = bench.screen(&[]);
    assert_eq!(said.code, 0, "{}", said.err);
    assert_eq!(bench.ranking(), ["fine", "also fine"]);
    let counts = bench.record().counts;
    assert_eq!((counts.lines, counts.refused), (17, 15));
    let mut listed = String::new();
    for row in &csv_rows(&bench.read("out/not_ranked.csv"))[1..] {
        let smiles: String = row[2].chars().take(16).collect();
        let _ = writeln!(
            listed,
            "{} | {} | {smiles} | {} | {}",
            row[0], row[1], row[3], row[7]
        );
    }
    insta::assert_snapshot!("refused_lines", listed);
    for (reason, count) in &counts.refused_by_reason {
        assert!(*count >= 1 && !reason.is_empty());
    }
}

#[test]
fn spreadsheets_are_read_as_they_come() {
    let pool = "\u{feff}Name,SMILES\r\n\"hexane, n-\",CCCCCC\r\n\"the \"\"good\"\" one\",CCCCCCC\r\n\"two\nlines\",CCCCCCCC\r\n";
    let bench = Bench::with(LIGHT, pool);
    assert_eq!(bench.screen(&[]).code, 0);
    // Read back by another reader of CSV, the names are what they were.
    assert_eq!(
        bench.ranking(),
        ["hexane, n-", "the \"good\" one", "two\nlines"]
    );
    assert_eq!(
        bench
            .ranked("line")
            .into_iter()
            .map(|(_, line)| line)
            .collect::<Vec<_>>(),
        ["2", "3", "4"]
    );
}

#[test]
fn a_folder_that_cannot_be_written_to_is_told_before_the_run() {
    let bench = Bench::with(LIGHT, SOME);
    bench.write("file", "mine");
    let run = |out: &str| -> Said {
        crate::workbench::groupsmith()
            .current_dir(bench.path("."))
            .args(["screen", "brief.toml", "--out", out])
            .output()
            .unwrap()
            .into()
    };
    for out in ["file", "file/below"] {
        let said = run(out);
        assert_eq!(said.code, 2, "{}", said.err);
        assert!(
            said.err.contains("is a file, and a folder is needed there"),
            "{}",
            said.err
        );
    }
    assert_eq!(bench.read("file"), "mine");
    let said = run("/proc/nowhere");
    assert_eq!(said.code, 3, "{}", said.err);
    assert!(said.err.contains("/proc/nowhere"), "{}", said.err);
}

/// No file may grow past a few KiB: what a full disk is like, without one.
#[cfg(target_os = "linux")]
#[test]
fn files_that_do_not_fit_leave_nothing_behind() {
    let mut pool = String::from("smiles\n");
    for _ in 0..3000 {
        pool.push_str("CCCCCCC\n");
    }
    let bench = Bench::with(LIGHT, &pool);
    assert_eq!(bench.screen(&[]).code, 0);
    assert_eq!(bench.files().len(), 3);
    let output = Command::new("sh")
        .current_dir(bench.path("."))
        .args([
            "-c",
            "trap '' XFSZ; ulimit -f 8; exec \"$0\" screen brief.toml --out out",
        ])
        .arg(env!("CARGO_BIN_EXE_groupsmith"))
        .output()
        .unwrap();
    let said = Said::from(output);
    assert_eq!(said.code, 3, "{}", said.err);
    assert!(
        said.err.contains("not_ranked.csv: cannot be written"),
        "{}",
        said.err
    );
    // What an earlier run left is whole, and stays.
    assert_eq!(bench.files().len(), 3, "{:?}", bench.files());
}

/// Sends the signal of Ctrl-C to a screening of standard input that stays
/// open, some time after it hears that signal.
#[cfg(target_os = "linux")]
fn interrupted(bench: &Bench, sent: &str, after: Duration) -> Said {
    let mut child = Command::new(env!("CARGO_BIN_EXE_groupsmith"))
        .current_dir(bench.path("."))
        .args(["screen", "brief.toml", "--out", "out"])
        .stdin(Stdio::piped())
        .stdout(Stdio::piped())
        .stderr(Stdio::piped())
        .spawn()
        .unwrap();
    let mut input = child.stdin.take().unwrap();
    input.write_all(sent.as_bytes()).unwrap();
    input.flush().unwrap();
    let status = format!("/proc/{}/status", child.id());
    let hears = || {
        let status = std::fs::read_to_string(&status).unwrap();
        let caught = status.lines().find_map(|line| line.strip_prefix("SigCgt:"));
        // Bit 1 is signal 2, the interrupt.
        u64::from_str_radix(caught.unwrap().trim(), 16).unwrap() & 2 != 0
    };
    let begun = Instant::now();
    while !hears() {
        assert!(begun.elapsed() < Duration::from_secs(30));
        std::thread::sleep(Duration::from_millis(5));
    }
    std::thread::sleep(after);
    let kill = Command::new("kill")
        .args(["-INT", &child.id().to_string()])
        .status();
    assert!(kill.unwrap().success());
    let said = child.wait_with_output().unwrap().into();
    drop(input);
    said
}

#[cfg(target_os = "linux")]
#[test]
fn a_stopped_run_keeps_what_is_done_and_says_so() {
    let mut sent = String::from("smiles,name\n");
    for at in 0..5000 {
        let _ = writeln!(sent, "{},chain {at}", "C".repeat(1 + at % 60));
    }
    // A busy machine may not get to the first lines in the shorter time.
    for after in [Duration::from_millis(600), Duration::from_secs(8)] {
        let bench = Bench::new();
        bench.write("brief.toml", LIGHT.replace("pool.csv", "-"));
        let said = interrupted(&bench, &sent, after);
        assert_eq!(said.code, 4, "{}", said.err);
        assert!(said.out.contains("marked unfinished"), "{}", said.out);
        assert_eq!(bench.files(), ["not_ranked.csv", "ranked.csv", "run.json"]);
        let record = bench.record();
        assert!(!record.finished && record.ended == Ending::Stopped);
        let lines = record.counts.lines;
        assert!(lines < 5000, "{:?}", record.counts);
        let rows = csv_rows(&bench.read("out/ranked.csv")).len()
            + csv_rows(&bench.read("out/not_ranked.csv")).len();
        assert_eq!(rows as u64, lines + 2);
        if lines > 0 {
            return;
        }
    }
    panic!("nothing was done before the stop");
}

#[cfg(target_os = "linux")]
#[test]
fn a_run_stopped_before_its_first_line_writes_nothing() {
    let bench = Bench::new();
    bench.write("brief.toml", LIGHT.replace("pool.csv", "-"));
    let said = interrupted(&bench, "", Duration::from_millis(50));
    assert_eq!(said.code, 4, "{}", said.err);
    assert!(
        said.err.contains("stopped before a line was read"),
        "{}",
        said.err
    );
    assert!(bench.files().is_empty());
}

#[test]
fn a_closed_pipe_is_no_error_and_keeps_the_code() {
    for (limit, code) in [("340 K", 0), ("900 K", 1)] {
        let bench = Bench::with(&LIGHT.replace("340 K", limit), SOME);
        let mut child = Command::new(env!("CARGO_BIN_EXE_groupsmith"))
            .current_dir(bench.path("."))
            .args(["screen", "brief.toml", "--out", "out", "--quiet"])
            .stdout(Stdio::piped())
            .stderr(Stdio::piped())
            .spawn()
            .unwrap();
        drop(child.stdout.take());
        let output = child.wait_with_output().unwrap();
        assert_eq!(output.status.code(), Some(code));
        assert_eq!(String::from_utf8(output.stderr).unwrap(), "");
        assert!(bench.record().finished);
    }
}

#[test]
fn an_earlier_run_in_the_folder_is_replaced_whole() {
    let bench = Bench::with(LIGHT, SOME);
    assert_eq!(bench.screen(&[]).code, 0);
    let first = bench.results();
    bench.write("out/mine.txt", "stays");
    bench.write("pool.csv", "smiles,name\nCCCCCCCC,octane\n");
    assert_eq!(bench.screen(&[]).code, 0);
    assert_ne!(bench.results(), first);
    assert_eq!(bench.ranking(), ["octane"]);
    assert_eq!(bench.read("out/mine.txt"), "stays");
}

#[test]
fn columns_of_another_name_are_found() {
    let brief = LIGHT.replace(
        "file = \"pool.csv\"",
        "file = \"pool.csv\"\nsmiles_column = \"structure\"\nname_column = \"label\"",
    );
    let bench = Bench::with(&brief, "label,structure,name\nhexane,CCCCCC,x\n");
    assert_eq!(bench.screen(&[]).code, 0);
    let rows = csv_rows(&bench.read("out/ranked.csv"));
    assert_eq!(rows[1][1], "hexane");
    assert!(rows[0].contains(&"pool_name".to_owned()), "{:?}", rows[0]);
}

#[test]
fn a_candidate_that_is_in_the_mixture_already_is_marked() {
    let brief = "[mixture]\ncomponents = [\"acetone\", \"methanol\"]\ntemperature = \"330 K\"\n\
        [pool]\nfile = \"pool.csv\"\n[[target]]\nfigure = \"selectivity_infinite_dilution\"\n\
        prefer = \"high\"\nworst = 0.1\nbest = 10\n";
    let bench = Bench::with(brief, "smiles,name\nOC,wood alcohol\nO,water\n");
    assert_eq!(bench.screen(&[]).code, 0);
    for (name, notes) in bench.ranked("notes") {
        let marked = notes.contains("is component 2 of the mixture");
        assert_eq!(marked, name == "wood alcohol", "{name}: {notes}");
    }
}
