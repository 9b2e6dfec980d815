//! A group set: its groups and the patterns that find them.

use std::sync::Arc;

use super::GroupCounts;
use super::error::GroupsError;
use super::pattern::{Environments, Filing, Program};
use crate::chem::{Composition, Element};
use crate::table::{Row, Table};

/// A group of a set, as published.
#[derive(Clone, Debug, PartialEq)]
pub struct Group {
    /// Published number.
    pub number: u16,
    /// Formula as the paper prints it.
    pub formula: Arc<str>,
    /// Atoms it stands for, doubled: some groups hold half an atom. `None` for
    /// an ion, which no neutral molecule holds.
    pub doubled_composition: Option<Composition>,
}

/// A pattern with what it gives.
#[derive(Clone, Debug)]
pub(super) struct GroupPattern {
    pub(super) gives: GroupCounts,
    /// How many groups that is.
    pub(super) groups: u16,
    /// The first pattern that gives the same at the same rank.
    pub(super) like: u16,
    pub(super) program: Program,
    pub(super) rank: u16,
    pub(super) text: String,
    pub(super) example: Option<String>,
    pub(super) line: u64,
}

/// A published group set with our patterns for it.
#[derive(Clone, Debug)]
pub struct GroupSet {
    id: &'static str,
    groups: Vec<Group>,
    pub(super) patterns: Vec<GroupPattern>,
    pub(super) environments: Environments,
    filing: Filing,
}

impl GroupSet {
    /// Reads a set from the texts of its group tables (columns `number`,
    /// `formula`, `composition`) and its pattern tables; each text comes with
    /// the file name for messages. A group of a later table replaces one of the
    /// same number; patterns of later tables are added.
    ///
    /// # Errors
    ///
    /// A table fault, a duplicate or unknown group number, a composition that
    /// is no formula, a pattern that does not compile: each with its place.
    pub fn read(
        id: &'static str,
        group_tables: &[(&str, &str)],
        pattern_tables: &[(&str, &str)],
    ) -> Result<Self, GroupsError> {
        let mut groups: Vec<Group> = Vec::new();
        for (file, text) in group_tables {
            for group in read_groups(&Table::read(file, text)?)? {
                match groups.binary_search_by_key(&group.number, |known| known.number) {
                    Ok(at) => groups[at] = group,
                    Err(at) => groups.insert(at, group),
                }
            }
        }
        let mut patterns = Vec::new();
        let mut environments = Environments::default();
        for (file, text) in pattern_tables {
            let table = Table::read(file, text)?;
            read_patterns(&table, &groups, &mut environments, &mut patterns)?;
        }
        let filing = Filing::of(
            patterns
                .iter()
                .map(|pattern: &GroupPattern| &pattern.program),
        );
        Ok(Self {
            id,
            groups,
            patterns,
            environments,
            filing,
        })
    }

    /// Identifier of the set, as in the `set` column.
    pub fn id(&self) -> &'static str {
        self.id
    }

    /// The groups, ascending by number.
    pub fn groups(&self) -> &[Group] {
        &self.groups
    }

    /// The group with this published number.
    pub fn group(&self, number: u16) -> Option<&Group> {
        let at = self
            .groups
            .binary_search_by_key(&number, |group| group.number)
            .ok()?;
        Some(&self.groups[at])
    }

    /// Every pattern as (what it gives, its text, an example molecule, its line).
    pub fn patterns(
        &self,
    ) -> impl ExactSizeIterator<Item = (&GroupCounts, &str, Option<&str>, u64)> {
        self.patterns.iter().map(|pattern| {
            (
                &pattern.gives,
                pattern.text.as_str(),
                pattern.example.as_deref(),
                pattern.line,
            )
        })
    }

    /// Counts in words: `2 CH3, 1 CH2`.
    pub fn describe(&self, counts: &GroupCounts) -> String {
        counts
            .iter()
            .map(|(number, count)| match self.group(number) {
                Some(group) => format!("{count} {}", group.formula),
                None => format!("{count} of unknown group {number}"),
            })
            .collect::<Vec<_>>()
            .join(", ")
    }

    /// Whether the groups' formulas add up to the composition of the molecule.
    pub fn conserves(&self, counts: &GroupCounts, composition: &Composition) -> bool {
        let mut doubled = Composition::default();
        for (number, count) in counts.iter() {
            match self
                .group(number)
                .and_then(|group| group.doubled_composition.as_ref())
            {
                Some(composition) => doubled.add_times(composition, count),
                None => return false,
            }
        }
        Element::ALL
            .into_iter()
            .all(|element| doubled.count(element) == 2 * composition.count(element))
    }

    pub(super) fn filed_under(&self, key: u8) -> &[u16] {
        self.filing.under(key)
    }
}

fn read_groups(table: &Table) -> Result<Vec<Group>, GroupsError> {
    let number = table.column("number")?;
    let formula = table.column("formula")?;
    let composition = table.column("composition")?;
    let mut groups: Vec<Group> = Vec::with_capacity(table.rows().len());
    for row in table.rows() {
        let group = Group {
            number: row.required_integer(number)?,
            formula: row.required_text(formula)?.into(),
            doubled_composition: match row.text(composition) {
                "" => None,
                text => Some(doubled_composition(text).ok_or_else(|| {
                    row.fault(composition, "is no formula of whole or half atoms")
                })?),
            },
        };
        match groups.binary_search_by_key(&group.number, |known| known.number) {
            Ok(_) => return Err(row.fault(number, "stands twice").into()),
            Err(at) => groups.insert(at, group),
        }
    }
    Ok(groups)
}

fn read_patterns(
    table: &Table,
    groups: &[Group],
    environments: &mut Environments,
    patterns: &mut Vec<GroupPattern>,
) -> Result<(), GroupsError> {
    let gives = table.column("gives")?;
    let pattern = table.column("pattern")?;
    let rank = table.column("rank")?;
    let example = table.column("example")?;
    for row in table.rows() {
        let counts = read_gives(row, gives, groups)?;
        let text = row.required_text(pattern)?;
        let program =
            Program::compile(text, environments).map_err(|faults| GroupsError::Pattern {
                file: table.file().to_owned(),
                line: row.line(),
                pattern: text.to_owned(),
                faults,
            })?;
        let rank = if row.text(rank).is_empty() {
            0
        } else {
            row.required_integer(rank)?
        };
        let like = patterns
            .iter()
            .position(|other| other.gives == counts && other.rank == rank)
            .unwrap_or(patterns.len());
        patterns.push(GroupPattern {
            groups: counts.total() as u16,
            gives: counts,
            like: like as u16,
            program,
            rank,
            text: text.to_owned(),
            example: Some(row.text(example))
                .filter(|text| !text.is_empty())
                .map(str::to_owned),
            line: row.line(),
        });
    }
    Ok(())
}

fn read_gives(
    row: Row<'_>,
    column: crate::table::Column,
    groups: &[Group],
) -> Result<GroupCounts, GroupsError> {
    let counts = GroupCounts::from_text(row.required_text(column)?)
        .ok_or_else(|| row.fault(column, "is not of the form `number:count`"))?;
    for (number, _) in counts.iter() {
        if groups
            .binary_search_by_key(&number, |group| group.number)
            .is_err()
        {
            return Err(row
                .fault(column, format!("group {number} is not in the set"))
                .into());
        }
    }
    Ok(counts)
}

/// Twice the atoms of a formula whose counts may end in `.5`.
fn doubled_composition(text: &str) -> Option<Composition> {
    let mut doubled = Composition::default();
    let mut rest = text;
    while !rest.is_empty() {
        let letters = rest
            .chars()
            .skip(1)
            .take_while(char::is_ascii_lowercase)
            .count();
        let length = 1 + letters.min(1);
        let element = Element::from_symbol(rest.get(..length)?)?;
        rest = &rest[length..];
        let digits = rest
            .find(|next: char| !next.is_ascii_digit() && next != '.')
            .unwrap_or(rest.len());
        let atoms: f64 = if digits == 0 {
            1.0
        } else {
            rest[..digits].parse().ok()?
        };
        rest = &rest[digits..];
        let twice = 2.0 * atoms;
        if twice.fract() != 0.0 || !(0.0..=2000.0).contains(&twice) {
            return None;
        }
        doubled.add(element, twice as u16);
    }
    Some(doubled)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn half_atoms_are_read() {
        let doubled = doubled_composition("C1.5H3O").unwrap();
        assert_eq!(doubled.count(Element::C), 3);
        assert_eq!(doubled.count(Element::H), 6);
        assert_eq!(doubled.count(Element::O), 2);
        assert_eq!(doubled_composition("C0.3"), None);
        assert_eq!(doubled_composition("é"), None);
    }
}
