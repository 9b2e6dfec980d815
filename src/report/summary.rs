//! How a run came out, for people.

use std::collections::BTreeMap;

use super::text_table::{TextColumn, TextTable};
use crate::run::{Counts, Outcome};

/// How a target is named in counts and what it wants.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct TargetLabel<'a> {
    /// The name lines are counted under.
    pub name: &'a str,
    /// What is wanted, in words.
    pub wanted: &'a str,
}

/// The outcomes of a run and how many fell at which target.
///
/// Targets are told in the order given, also those nobody fell at, so that a
/// limit without effect is seen; anything else lines were counted under
/// follows, most first.
pub fn outcome_text(counts: &Counts, targets: &[TargetLabel<'_>]) -> String {
    let mut text = format!("{} {} read\n", counts.lines, plural(counts.lines, "line"));
    let mut table = TextTable::new([TextColumn::text(""), TextColumn::number("", "")]);
    for outcome in Outcome::ALL {
        table.add([
            format!("  {}", outcome.id()),
            counts.of(outcome).to_string(),
        ]);
        match outcome {
            Outcome::Ranked if counts.ranked_incomplete > 0 => table.add([
                "    of these with a gap, at the end".into(),
                counts.ranked_incomplete.to_string(),
            ]),
            Outcome::NotQualified => {
                add_split(&mut table, &counts.not_qualified_by_target, targets, true);
            }
            Outcome::NotAssessable => {
                add_split(&mut table, &counts.not_assessable_by_target, targets, false);
            }
            Outcome::Refused => add_split(&mut table, &counts.refused_by_reason, &[], false),
            Outcome::Ranked | Outcome::BelowKept | Outcome::Duplicate => {}
        }
    }
    text.push_str(&table.render(None));
    text
}

fn add_split(
    table: &mut TextTable,
    by: &BTreeMap<String, u64>,
    targets: &[TargetLabel<'_>],
    show_zeros: bool,
) {
    for target in targets {
        let count = by.get(target.name).copied().unwrap_or(0);
        if count > 0 || show_zeros {
            let wanted = match target.wanted {
                "" => String::new(),
                wanted => format!(": {wanted}"),
            };
            table.add([format!("    {}{wanted}", target.name), count.to_string()]);
        }
    }
    let mut others: Vec<(&String, u64)> = by
        .iter()
        .filter(|(name, _)| !targets.iter().any(|target| target.name == name.as_str()))
        .map(|(name, count)| (name, *count))
        .collect();
    // Equal counts stay in the order of their names.
    others.sort_by_key(|&(_, count)| std::cmp::Reverse(count));
    for (name, count) in others {
        table.add([format!("    {name}"), count.to_string()]);
    }
}

fn plural(count: u64, word: &str) -> String {
    match count {
        1 => word.to_owned(),
        _ => format!("{word}s"),
    }
}
