//! Compares our breakdowns with the machine-made assignments of a reference folder.
//!
//! `cargo run --release --example breakdown_agreement -- FOLDER [OUT]`; the
//! folder holds `groups_unifac.csv` and `groups_joback.csv`. Prints the
//! agreement of each set and the differences by kind of change; with OUT also
//! writes `differences.csv`, `covered_only_by_us.csv` and `agreements.csv` there.

#![expect(
    clippy::print_stdout,
    reason = "a study program reports to standard output"
)]

use std::collections::{BTreeMap, BTreeSet};
use std::fs::File;
use std::path::{Path, PathBuf};
use std::time::{Duration, Instant};

use groupsmith::chem::{Molecule, Reader};
use groupsmith::groups::{Breaker, Coverage, GroupCounts, GroupSet, SetId};

type Fault = Box<dyn std::error::Error>;

/// A set and where the reference folder keeps its assignments.
struct Subject {
    set: SetId,
    file: &'static str,
    groups: &'static str,
    balance: Option<&'static str>,
}

const SUBJECTS: [Subject; 3] = [
    Subject {
        set: SetId::Unifac,
        file: "groups_unifac.csv",
        groups: "unifac_subgroups",
        balance: Some("unifac_atoms_balance"),
    },
    Subject {
        set: SetId::UnifacDortmund,
        file: "groups_unifac.csv",
        groups: "dortmund_subgroups",
        balance: Some("dortmund_atoms_balance"),
    },
    Subject {
        set: SetId::Joback,
        file: "groups_joback.csv",
        groups: "joback_groups",
        balance: None,
    },
];

/// A row on which table and breakdown do not say the same.
struct Difference {
    name: String,
    smiles: String,
    table: String,
    ours: String,
    uncovered: usize,
}

#[derive(Default)]
struct Tally {
    rows: usize,
    unreadable: usize,
    balanced: usize,
    complete: usize,
    agreed: usize,
    too_ambiguous: usize,
    unbalanced_by_us: usize,
    covered_only_by_us: usize,
    slowest: (Duration, String),
    spent: Duration,
}

struct Outputs {
    differences: csv::Writer<File>,
    ours_only: csv::Writer<File>,
    agreements: csv::Writer<File>,
}

impl Outputs {
    fn create(folder: &Path) -> Result<Self, Fault> {
        let open = |name: &str, head: &[&str]| -> Result<csv::Writer<File>, Fault> {
            let mut writer = csv::Writer::from_path(folder.join(name))?;
            writer.write_record(head)?;
            Ok(writer)
        };
        Ok(Self {
            differences: open(
                "differences.csv",
                &[
                    "set",
                    "change",
                    "uncovered_atoms",
                    "name",
                    "smiles",
                    "table",
                    "ours",
                ],
            )?,
            ours_only: open(
                "covered_only_by_us.csv",
                &["set", "name", "smiles", "table", "ours"],
            )?,
            agreements: open("agreements.csv", &["set", "name", "smiles", "groups"])?,
        })
    }
}

fn main() -> Result<(), Fault> {
    let mut arguments = std::env::args_os().skip(1).map(PathBuf::from);
    let folder = arguments
        .next()
        .ok_or("give the folder of the reference files")?;
    let mut outputs = match arguments.next() {
        Some(out) => Some(Outputs::create(&out)?),
        None => None,
    };
    for subject in &SUBJECTS {
        study(&folder, subject, outputs.as_mut())?;
    }
    Ok(())
}

fn study(folder: &Path, subject: &Subject, mut outputs: Option<&mut Outputs>) -> Result<(), Fault> {
    let set = GroupSet::built_in(subject.set)?;
    let id = set.id();
    let mut file = csv::Reader::from_path(folder.join(subject.file))?;
    let heads = file.headers()?.clone();
    let column = |name: &str| {
        heads
            .iter()
            .position(|head| head == name)
            .ok_or_else(|| format!("{} has no column {name}", subject.file))
    };
    let (name, smiles, groups) = (column("name")?, column("smiles")?, column(subject.groups)?);
    let balance = subject.balance.map(column).transpose()?;

    let mut reader = Reader::new();
    let mut molecule = Molecule::default();
    let mut breaker = Breaker::new();
    let mut counts = GroupCounts::new();
    let mut tally = Tally::default();
    let mut changes: BTreeMap<String, Vec<Difference>> = BTreeMap::new();
    for row in file.records() {
        let row = row?;
        tally.rows += 1;
        if reader.read_into(&row[smiles], &mut molecule).is_err() {
            tally.unreadable += 1;
            println!("unreadable: {}", &row[smiles]);
            continue;
        }
        let start = Instant::now();
        breaker.load(&molecule);
        let coverage = breaker.counts(&molecule, &set, &mut counts);
        let spent = start.elapsed();
        tally.spent += spent;
        if spent > tally.slowest.0 {
            tally.slowest = (spent, row[smiles].to_owned());
        }
        match coverage {
            Coverage::TooAmbiguous => {
                tally.too_ambiguous += 1;
                println!("too ambiguous: {}", &row[smiles]);
            }
            Coverage::Unbalanced => {
                tally.unbalanced_by_us += 1;
                println!("unbalanced by us: {} {counts}", &row[smiles]);
            }
            Coverage::Complete | Coverage::Partial => {}
        }
        let complete = coverage == Coverage::Complete;
        let table = GroupCounts::from_text(&row[groups]).ok_or("a table cell is no list")?;
        let balanced = balance.is_none_or(|column| &row[column] == "1");
        if !balanced {
            if complete {
                tally.covered_only_by_us += 1;
                if let Some(outputs) = outputs.as_deref_mut() {
                    outputs.ours_only.write_record([
                        id,
                        &row[name],
                        &row[smiles],
                        &row[groups],
                        &counts.to_string(),
                    ])?;
                }
            }
            continue;
        }
        tally.balanced += 1;
        tally.complete += usize::from(complete);
        if complete && counts == table {
            tally.agreed += 1;
            if let Some(outputs) = outputs.as_deref_mut() {
                let groups = counts.to_string();
                outputs
                    .agreements
                    .write_record([id, &row[name], &row[smiles], &groups])?;
            }
            continue;
        }
        let uncovered = breaker.breakdown(&molecule, &set).uncovered.len();
        changes
            .entry(change(&table, &counts, uncovered))
            .or_default()
            .push(Difference {
                name: row[name].to_owned(),
                smiles: row[smiles].to_owned(),
                table: table.to_string(),
                ours: counts.to_string(),
                uncovered,
            });
    }
    print(id, &tally, &changes);
    if let Some(outputs) = outputs {
        for (change, members) in &changes {
            for member in members {
                outputs.differences.write_record([
                    id,
                    change,
                    &member.uncovered.to_string(),
                    &member.name,
                    &member.smiles,
                    &member.table,
                    &member.ours,
                ])?;
            }
        }
    }
    Ok(())
}

/// What has to be added to the table's counts to get ours, and how many atoms
/// we leave uncovered.
fn change(table: &GroupCounts, ours: &GroupCounts, uncovered: usize) -> String {
    let numbers: BTreeSet<u16> = table
        .iter()
        .chain(ours.iter())
        .map(|entry| entry.0)
        .collect();
    let mut parts: Vec<String> = numbers
        .into_iter()
        .map(|number| {
            let difference = i32::from(ours.count(number)) - i32::from(table.count(number));
            (number, difference)
        })
        .filter(|&(_, difference)| difference != 0)
        .map(|(number, difference)| format!("{number}:{difference:+}"))
        .collect();
    if uncovered > 0 {
        parts.push(format!("{uncovered} uncovered"));
    }
    parts.join(" ")
}

fn print(id: &str, tally: &Tally, changes: &BTreeMap<String, Vec<Difference>>) {
    let share = |part: usize| 100.0 * part as f64 / tally.balanced as f64;
    println!(
        "{id}: {} rows, {} unreadable, {} too ambiguous, {} unbalanced by us",
        tally.rows, tally.unreadable, tally.too_ambiguous, tally.unbalanced_by_us
    );
    println!(
        "  rows whose atoms balance in the table: {}; agreed {} ({:.2} %), complete {} ({:.2} %)",
        tally.balanced,
        tally.agreed,
        share(tally.agreed),
        tally.complete,
        share(tally.complete)
    );
    println!(
        "  other rows that we cover completely: {}",
        tally.covered_only_by_us
    );
    println!(
        "  {:.1} us a molecule; slowest {:.0} us: {}",
        tally.spent.as_secs_f64() * 1e6 / tally.rows as f64,
        tally.slowest.0.as_secs_f64() * 1e6,
        tally.slowest.1
    );
    let mut ordered: Vec<_> = changes.iter().collect();
    ordered.sort_by_key(|(change, members)| (std::cmp::Reverse(members.len()), *change));
    for (change, members) in ordered {
        let first = &members[0];
        println!(
            "  {:>4}  {change}  {} table {} ours {}",
            members.len(),
            first.smiles,
            first.table,
            first.ours
        );
    }
}
