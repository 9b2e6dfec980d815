//! Searches as whole commands: threads, parts, stops, wrong input.

use std::process::{Command, Stdio};
use std::thread;
use std::time::Duration;

use groupsmith::run::RunRecord;

use crate::workbench::{Bench, Said, groupsmith};

const BRIEF: &str = r#"
title = "a small search"
[mixture]
components = ["acetone", "methanol"]
temperature = "328.5 K"
model = "unifac-dortmund"
[assembly]
count = { least = 2, most = 7 }
heavy_atoms = { at_least = 4, at_most = 9 }
structures = 3
[[target]]
figure = "boiling_point"
at_least = "367 K"
at_most = "480 K"
must = true
[[target]]
figure = "relative_volatility_infinite_dilution"
prefer = "high"
worst = 1.5
best = 5.0
[keep]
best = 12
"#;

fn assemble(bench: &Bench, more: &[&str]) -> Said {
    let mut command = groupsmith();
    let brief = bench.argument("brief.toml");
    command.args(["assemble", &brief]).args(more);
    command.output().unwrap().into()
}

fn record(bench: &Bench, folder: &str) -> RunRecord {
    let mut record: RunRecord =
        serde_json::from_str(&bench.read(&format!("{folder}/run.json"))).unwrap();
    record.timing = Default::default();
    record
}

/// Equal but for timing, as decided.
fn assert_same(bench: &Bench, one: &str, other: &str) {
    for file in ["ranked.csv", "not_ranked.csv"] {
        let of = |folder: &str| bench.read(&format!("{folder}/{file}"));
        assert_eq!(of(one), of(other), "{file} of {one} and {other}");
    }
    assert_eq!(
        record(bench, one),
        record(bench, other),
        "{one} and {other}"
    );
}

fn bench() -> (Bench, Said) {
    let bench = Bench::new();
    bench.write("brief.toml", BRIEF);
    let out = bench.argument("one");
    let said = assemble(&bench, &["--out", &out, "--threads", "1"]);
    assert_eq!(said.code, 0, "{}", said.err);
    (bench, said)
}

#[test]
fn a_search_is_the_same_on_threads_in_parts_and_after_stops() {
    let (bench, _) = bench();
    let whole = record(&bench, "one");
    let account = whole.assembly.as_ref().expect("a search has an account");
    assert_eq!(account.space, account.accounted);
    assert!(whole.counts.ranked == 12 && whole.finished);

    assemble(&bench, &["--out", &bench.argument("two"), "--threads", "2"]);
    assert_same(&bench, "one", "two");

    // parts, gathered in any order
    let mut parts = Vec::new();
    for part in ["3/3", "1/3", "2/3"] {
        let folder = bench.argument(&format!("part{}", &part[..1]));
        let said = assemble(&bench, &["--out", &folder, "--part", part]);
        assert!(said.code <= 1, "{}", said.err);
        parts.push(folder);
    }
    let gather = |parts: &[String], out: &str| -> Said {
        let mut command = groupsmith();
        command.arg("gather").args(parts).args(["--out", out]);
        command.output().unwrap().into()
    };
    let said = gather(&parts, &bench.argument("gathered"));
    assert_eq!(said.code, 0, "{}", said.err);
    assert_same(&bench, "one", "gathered");
    let said = gather(&parts[..2], &bench.argument("nothing"));
    assert_eq!(said.code, 2);
    assert!(said.err.contains("missing: 2/3"), "{}", said.err);

    // killed at several moments, then gone on with
    let out = bench.argument("killed");
    for pause_ms in [60, 150, 300, 500, 900] {
        let resume = bench.path("killed/search.json").exists();
        let brief = bench.argument("brief.toml");
        let mut command = Command::new(env!("CARGO_BIN_EXE_groupsmith"));
        command.args(["assemble", &brief, "--out", &out, "--threads", "1"]);
        command.args(["--state-every", "0"]);
        command.args(resume.then_some("--resume"));
        command.stdout(Stdio::null()).stderr(Stdio::null());
        let mut running = command.spawn().unwrap();
        thread::sleep(Duration::from_millis(pause_ms));
        running.kill().unwrap();
        running.wait().unwrap();
    }
    let resume = bench.path("killed/search.json").exists();
    let more: &[&str] = if resume { &["--resume"] } else { &[] };
    let said = assemble(&bench, &[&["--out", &out], more].concat());
    assert_eq!(said.code, 0, "{}", said.err);
    assert_same(&bench, "one", "killed");
}

#[test]
fn a_state_of_another_search_is_refused() {
    let (bench, _) = bench();
    bench.write("brief.toml", BRIEF.replace("367 K", "368 K"));
    let out = bench.argument("one");
    let said = assemble(&bench, &["--out", &out, "--resume"]);
    assert_eq!(said.code, 2, "{}", said.err);
    assert!(
        said.err.contains("belongs to another search"),
        "{}",
        said.err
    );
    let said = assemble(&bench, &["--out", &bench.argument("new"), "--resume"]);
    assert_eq!(said.code, 2, "{}", said.err);
    assert!(said.err.contains("no state of a search"), "{}", said.err);
}

#[test]
fn what_is_printed() {
    let (_, said) = bench();
    let shown: Vec<&str> = said
        .out
        .lines()
        .filter(|line| !line.starts_with("Files:"))
        .collect();
    insta::assert_snapshot!("assemble", shown.join("\n"));
}

#[test]
fn wrong_assemblies_are_told_with_what_is_wrong() {
    let mut told = String::new();
    for assembly in [
        "pieces = [\"CH3\", \"CH22\", \"ketones\"]",
        "limits = { \"oh\" = 2, rings = 3 }",
        "count = { least = 2, most = 90 }",
        "heavy_atoms = { at_least = 20 }",
        "pieces = [\"CH2\"]",
        "pieces = [\"CH2Cl\"]\nlimits = { halogen_atoms = 1 }",
        "allow = [\"anhydrid\"]",
        "surprise = 1",
    ] {
        let bench = Bench::new();
        bench.write(
            "brief.toml",
            format!("[assembly]\n{assembly}\n[[target]]\nfigure = \"boiling_point\"\nat_least = \"300 K\"\n"),
        );
        let said = assemble(&bench, &["--out", &bench.argument("out")]);
        assert_eq!(said.code, 2, "{assembly}: {}", said.err);
        assert!(!bench.path("out").exists(), "{assembly}");
        let folder = bench.argument("");
        told.push_str(&format!("{assembly}\n{}\n", said.err.replace(&folder, "")));
    }
    insta::assert_snapshot!("wrong_assemblies", told);
}

#[test]
fn explain_tells_what_kept_a_molecule_out() {
    let (bench, _) = bench();
    let mut told = String::new();
    for name in [
        "diethyl ether",
        "dichloromethane",
        "1,4-dioxane",
        "glycerol",
        "diethylamine",
        "hexane",
        "NCCC(=O)O",
    ] {
        let said = assemble(
            &bench,
            &[
                "--out",
                &bench.argument("e"),
                "--explain",
                name,
                "--show",
                "0",
            ],
        );
        assert_eq!(said.code, 0, "{}", said.err);
        let at = said
            .out
            .find(&format!("\n{name}"))
            .unwrap_or_else(|| panic!("{}", said.out));
        told.push_str(&said.out[at..]);
    }
    insta::assert_snapshot!("assemble_explain", told);
}
