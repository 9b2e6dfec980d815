//! Rules on structures: every row at work in its example, known solvents left
//! in peace, independence of the numbering, faults of tables and names.

use std::collections::BTreeSet;

use groupsmith::chem::Molecule;
use groupsmith::groups::Pattern;
use groupsmith::stability::{Classes, Reactions, Rules, Scratch, StabilityError, Verdict};
use groupsmith::table::Table;
use proptest::prelude::*;

use crate::groups::{renumbered, rows};
use crate::workbench::{Bench, say};

const SOLVENTS: &str = include_str!("../../examples/entrainer-acetone-methanol/solvents.csv");
const DIVERSE: &str = include_str!("../data/groups/diverse_molecules.csv");
const HEAD: &str = "# title: t\n# source: s\n# transcribed: d\n# checked: c\n\
    name,pattern,with,places,verdict,reason,source,example,counterexample\n-,-,-,-,-,-,-,-,-\n";

/// Solvents in use that break a rule all the same, and rightly so: in the shelf
/// of a chemist, but none that a mixture should be treated with.
const BLOCKED_SOLVENTS: [(&str, &str); 5] = [
    // Their water and alcohol scavenging is what they are bought for.
    ("trimethyl orthoformate", "ortho-ester"),
    ("triethyl orthoformate", "ortho-ester"),
    // Reagents: they acylate whatever carries O-H or N-H.
    ("acetic anhydride", "anhydride"),
    ("propionic anhydride", "anhydride"),
    // The list draws the commercial glycol as a hemiacetal, which it is not.
    ("dipropylene glycol", "hemiacetal"),
];

fn rules() -> Rules {
    Rules::built_in().unwrap_or_else(|error| panic!("{error}"))
}

fn read(smiles: &str) -> Molecule {
    Molecule::from_smiles(smiles).unwrap_or_else(|error| panic!("{smiles}: {error}"))
}

fn broken<'r>(rules: &'r Rules, molecule: &Molecule) -> Vec<&'r str> {
    let broken = rules.broken(&mut Scratch::new(), molecule);
    broken.iter().map(|rule| rule.name.as_str()).collect()
}

#[test]
fn every_row_is_needed_where_its_example_says_so() {
    let rules = rules();
    assert!(rules.iter().len() >= 60, "{}", rules.iter().len());
    let mut faults = Vec::new();
    for rule in rules.iter() {
        for row in &rule.conditions {
            let place = format!("line {}, {} {}", row.line, rule.name, row.pattern);
            let Some(example) = &row.example else {
                faults.push(format!("{place}: no example"));
                continue;
            };
            let molecule = read(example);
            let pattern = |text: &String| Pattern::compile(text).expect("it compiled");
            let by_this_row = pattern(&row.pattern).count_places(&molecule, row.places)
                >= row.places
                && row
                    .with
                    .as_ref()
                    .is_none_or(|with| pattern(with).is_in(&molecule));
            if !by_this_row {
                faults.push(format!("{place}: not in {example}"));
            }
            if !broken(&rules, &molecule).contains(&rule.name.as_str()) {
                faults.push(format!("{place}: {example} does not break the rule"));
            }
            if let Some(other) = &row.counterexample
                && broken(&rules, &read(other)).contains(&rule.name.as_str())
            {
                faults.push(format!("{place}: {other} breaks the rule"));
            }
        }
    }
    assert!(faults.is_empty(), "\n{}", faults.join("\n"));
}

#[test]
fn names_reasons_and_sources_are_fit_to_print() {
    let (file, text) = Rules::BUILT_IN;
    let head = Table::read(file, text).expect("the table was read");
    let keys: BTreeSet<&str> = head
        .facts("source")
        .filter_map(|fact| Some(fact.split_once(':')?.0))
        .collect();
    for rule in rules().iter() {
        let plain = |text: &str| text.chars().all(|c| c.is_ascii_lowercase() || c == '-');
        assert!(plain(&rule.name), "{}", rule.name);
        assert!(
            keys.contains(rule.source.as_str()),
            "{}: {}",
            rule.name,
            rule.source
        );
        // Remarks are joined by `; ` in one cell.
        assert!(!rule.reason.contains(';'), "{}: {}", rule.name, rule.reason);
    }
}

#[test]
fn solvents_in_use_are_not_blocked() {
    let rules = rules();
    let mut blocked = Vec::new();
    let mut looked_at = 0;
    for [name, smiles] in rows(SOLVENTS, ["name", "smiles"]) {
        // The salts of the list are refused by the reader.
        let Ok(molecule) = Molecule::from_smiles(&smiles) else {
            continue;
        };
        looked_at += 1;
        for rule in rules.broken(&mut Scratch::new(), &molecule) {
            if rule.verdict == Verdict::Blocked {
                blocked.push((name.clone(), rule.name.clone()));
            }
        }
    }
    assert!(looked_at >= 400, "{looked_at}");
    blocked.sort();
    let mut wanted = BLOCKED_SOLVENTS.map(|(name, rule)| (name.to_owned(), rule.to_owned()));
    wanted.sort();
    assert_eq!(blocked, wanted);
}

/// Every rule that a molecule breaks, in the order of the table.
#[test]
fn broken_rules_are_those_expected() {
    let rules = rules();
    for (smiles, wanted) in [
        ("CCO", &[][..]),
        ("O", &[]),
        ("O=C=O", &[]),
        ("S=C=S", &[]),
        ("CN(C)C=O", &[]),
        ("CC(=O)Nc1ccccc1", &[]),
        ("c1cn[nH]c1", &[]),
        ("Cc1ccno1", &[]),
        ("CN(C)P(=O)(N(C)C)N(C)C", &[]),
        ("NCCO", &[]),
        ("Oc1ccccc1", &[]),
        ("CC(=O)CC(C)=O", &[]),
        ("CC(=O)C=C(C)O", &[]),
        ("FC(F)(F)C(F)(F)N(C(F)(F)C(F)(F)F)C(F)(F)C(F)(F)F", &[]),
        ("FC(F)OC(Cl)C(F)(F)F", &[]),
        ("CCOc1ccccc1", &[]),
        ("CC1=CC(=O)CC(C)(C)C1", &[]),
        ("C1CCOC1", &["peroxide-former"]),
        ("CC1OC(C)OC(C)O1", &["acetal", "peroxide-former"]),
        ("CCCCN=[N+]=[N-]", &["azide"]),
        ("CC(O)OO", &["o-o", "hemiacetal"]),
        ("O=CCCN", &["amine-aldehyde", "aldehyde"]),
        ("CN(C)c1ccc(C=O)cc1", &["aldehyde"]),
        ("C=CC=O", &["monomer", "aldehyde"]),
        (
            "Cc1ccc([N+](=O)[O-])cc1[N+](=O)[O-]",
            &["polynitro", "nitro"],
        ),
    ] {
        assert_eq!(broken(&rules, &read(smiles)), wanted, "{smiles}");
    }
}

#[test]
fn rules_are_switched_off_by_name() {
    let mut rules = rules();
    let tetrahydrofuran = read("C1CCOC1");
    rules.switch_off("peroxide-former").unwrap();
    assert!(broken(&rules, &tetrahydrofuran).is_empty());
    assert!(rules.iter().any(|rule| rule.name == "peroxide-former"));
    let error = rules.switch_off("hemi-acetal").unwrap_err();
    assert_eq!(
        error.to_string(),
        "there is no rule `hemi-acetal`; did you mean `hemiacetal`?\n  `groupsmith tables rules` lists them"
    );
}

#[test]
fn a_later_table_replaces_and_adds_rules() {
    let own = format!(
        "{HEAD}thiol,[SX2;H1],,,blocked,not in our plant,own,CCS,CCSC\n\
         glycol-pair,[OX2;H1]-[CX4],,2,warn,two hydroxyl groups,own,OCCO,CCO\n"
    );
    let rules = Rules::read(&[Rules::BUILT_IN, ("own.csv", &own)]).unwrap();
    let thiol = rules.iter().find(|rule| rule.name == "thiol").unwrap();
    assert_eq!(thiol.remark(), "blocked rule thiol: not in our plant");
    assert_eq!(rules.iter().last().unwrap().name, "glycol-pair");
    assert_eq!(broken(&rules, &read("OCCO")), ["glycol-pair"]);
    assert!(broken(&rules, &read("CCO")).is_empty());
}

#[test]
fn faults_of_a_table_say_where() {
    for (row, wanted) in [
        (
            "a,[C,,,warn,r,s,,",
            "own.csv:7: pattern `[C`: character 1: this is never closed; close what was opened here",
        ),
        (
            "a,C,,,maybe,r,s,,",
            "own.csv:7: column `verdict`: is neither `blocked` nor `warn` (found `maybe`)",
        ),
        (
            "a,C,,0,warn,r,s,,",
            "own.csv:7: column `places`: is not at least 1 (found `0`)",
        ),
        (
            "a,C,,,warn,,s,,",
            "own.csv:7: column `reason`: is blank (found ``)",
        ),
        (
            "a,C,,,warn,r,s,,\na,N,,,warn,,,,",
            "own.csv:8: column `verdict`: stands in the first row of a rule only; leave it blank here (found `warn`)",
        ),
    ] {
        let error = Rules::read(&[("own.csv", &format!("{HEAD}{row}\n"))]).unwrap_err();
        assert_eq!(error.to_string(), wanted);
        assert!(!matches!(error, StabilityError::UnknownRule { .. }));
    }
}

fn classes(reactions: &Reactions, smiles: &str) -> Classes {
    reactions.classes(&mut Scratch::new(), &read(smiles))
}

fn between(reactions: &Reactions, one: &str, other: &str) -> Vec<String> {
    let (one, other) = (classes(reactions, one), classes(reactions, other));
    reactions
        .between(&one, &other)
        .map(|reaction| reaction.name.clone())
        .collect()
}

#[test]
fn every_reaction_is_found_for_its_examples_in_either_role() {
    let reactions = Reactions::built_in().unwrap_or_else(|error| panic!("{error}"));
    assert!(reactions.iter().len() >= 30);
    for reaction in reactions.iter() {
        let [first, second] = &reaction.examples;
        let place = format!("line {}, {}", reaction.line, reaction.name);
        for (pattern, example) in reaction.patterns.iter().zip(&reaction.examples) {
            let pattern = Pattern::compile(pattern).expect("it compiled");
            assert!(pattern.is_in(&read(example)), "{place}: not in {example}");
        }
        for (one, other) in [(first, second), (second, first)] {
            let found = between(&reactions, one, other);
            assert!(found.contains(&reaction.name), "{place}: {one} {other}");
        }
        assert!(!reaction.reaction.contains(';'), "{place}");
    }
}

#[test]
fn reactions_are_those_expected() {
    let reactions = Reactions::built_in().unwrap();
    for (one, other, wanted) in [
        ("CCCCCC", "CO", &[][..]),
        ("c1ccccc1", "NCCO", &[]),
        ("CC(C)=O", "CO", &[]),
        ("CN(C)C=O", "CO", &[]),
        ("Clc1ccccc1", "CCNCC", &[]),
        ("CS(C)=O", "O", &[]),
        ("CCOC(C)=O", "CO", &["transesterification"]),
        ("CC(=O)O", "CCOC(C)=O", &["ester-acidolysis"]),
        ("NCCO", "CC(=O)O", &["esterification", "acid-amine"]),
        ("C1CCNC1", "CC(C)=O", &["enamine-formation"]),
        ("ClCCl", "CCNCC", &["alkylation", "chlorinated-base"]),
    ] {
        assert_eq!(between(&reactions, one, other), wanted, "{one} {other}");
    }
}

/// Flags do not exclude: the candidates rank, and their notes tell.
#[test]
fn candidates_of_a_ranking_carry_what_speaks_against_them() {
    let brief = "[mixture]\ncomponents = [\"acetone\", \"methanol\"]\ntemperature = \"330 K\"\n\
        [pool]\nfile = \"pool.csv\"\n[[target]]\nfigure = \"molar_mass\"\nprefer = \"low\"\n\
        worst = \"200 g/mol\"\nbest = \"40 g/mol\"\n";
    let pool = "smiles,name\nCCOC(C)=O,ester\nC1CCOC1,ether\nCC(O)OC,hemiacetal\nCCCCCC,alkane\n";
    let bench = Bench::with(brief, pool);
    assert_eq!(bench.screen(&[]).code, 0);
    let notes = bench.ranked("notes");
    let of = |wanted: &str| {
        let found = notes.iter().find(|(name, _)| name == wanted);
        found
            .unwrap_or_else(|| panic!("{wanted} is not ranked"))
            .1
            .as_str()
    };
    assert_eq!(
        of("ester"),
        "may react with methanol (component 2): transesterification, with acid or base"
    );
    assert_eq!(
        of("ether"),
        "caution peroxide-former: forms peroxides in air: test and inhibit"
    );
    assert!(
        of("hemiacetal")
            .contains("blocked rule hemiacetal: falls apart into carbonyl compound and alcohol"),
        "{}",
        of("hemiacetal")
    );
    assert_eq!(of("alkane"), "");
}

#[test]
fn the_table_of_rules_is_printed() {
    let said = say(&["tables", "rules"]);
    assert_eq!(said.code, 0, "{}", said.err);
    let lines: Vec<&str> = said.out.lines().collect();
    for rule in rules().iter() {
        let beginning = format!("{} ", rule.name);
        assert!(
            lines
                .iter()
                .any(|line| line.trim_start().starts_with(&beginning)
                    && line.contains(rule.verdict.id())),
            "{}",
            rule.name
        );
    }
    assert!(said.out.contains("Bretherick's Handbook"), "{}", said.out);
    assert!(said.out.contains("transesterification"), "{}", said.out);
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(200))]

    /// Renumbering the atoms changes neither the rules nor the classes.
    #[test]
    fn numbering_does_not_matter(choice in any::<prop::sample::Index>(), seed in any::<u64>()) {
        let rules = rules();
        let examples = rules.iter().flat_map(|rule| &rule.conditions);
        let mut cases: Vec<String> = examples.filter_map(|row| row.example.clone()).collect();
        cases.extend(rows(DIVERSE, ["smiles"]).into_iter().map(|[smiles]| smiles));
        let smiles = &cases[choice.index(cases.len())];
        let molecule = read(smiles);
        let other = read(&renumbered(&molecule, seed));
        prop_assert_eq!(broken(&rules, &molecule), broken(&rules, &other), "{}", smiles);
        let reactions = Reactions::built_in().unwrap();
        let mut scratch = Scratch::new();
        prop_assert_eq!(
            reactions.classes(&mut scratch, &molecule),
            reactions.classes(&mut scratch, &other)
        );
    }
}
