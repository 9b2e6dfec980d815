//! Rules on one structure.

use smallvec::SmallVec;

use super::{Scratch, StabilityError};
use crate::chem::Molecule;
use crate::groups::pattern::PatternList;
use crate::groups::{GroupsError, Pattern};
use crate::quantity::unit::nearest;
use crate::table::{Row, Table};

const BUILT_IN: (&str, &str) = (
    "groups/stability/rules.csv",
    include_str!("../../groups/stability/rules.csv"),
);

/// What a broken rule says of a structure.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum Verdict {
    /// No solvent: it does not last, or nobody would handle it.
    Blocked,
    /// Usable by one who knows of it.
    Warn,
}

impl Verdict {
    /// Every verdict.
    pub const ALL: [Self; 2] = [Self::Blocked, Self::Warn];

    /// The word in tables.
    pub const fn id(self) -> &'static str {
        match self {
            Self::Blocked => "blocked",
            Self::Warn => "warn",
        }
    }

    /// What a remark begins with.
    pub const fn heading(self) -> &'static str {
        match self {
            Self::Blocked => "blocked rule",
            Self::Warn => "caution",
        }
    }
}

/// One row of a rule: what has to be in a molecule to break it.
#[derive(Clone, Debug, PartialEq)]
pub struct Condition {
    /// The pattern.
    pub pattern: String,
    /// In how many places it has to be found.
    pub places: usize,
    /// A second pattern that has to be found too.
    pub with: Option<String>,
    /// SMILES of a molecule that breaks the rule by this row.
    pub example: Option<String>,
    /// SMILES of a molecule that does not.
    pub counterexample: Option<String>,
    /// Line of its table.
    pub line: u64,
}

/// A rule; it is broken where any of its conditions holds.
#[derive(Clone, Debug, PartialEq)]
pub struct Rule {
    /// Name, in words joined by hyphens.
    pub name: String,
    /// What breaking it says.
    pub verdict: Verdict,
    /// Why, in a chemist's words.
    pub reason: String,
    /// Source as the table names it.
    pub source: String,
    /// Its rows.
    pub conditions: Vec<Condition>,
}

impl Rule {
    /// The remark on a structure that breaks it: `caution thiol: …`.
    pub fn remark(&self) -> String {
        format!("{} {}: {}", self.verdict.heading(), self.name, self.reason)
    }
}

/// Positions of a condition's patterns in the list of patterns.
#[derive(Clone, Copy, Debug)]
struct Compiled {
    rule: usize,
    pattern: usize,
    places: usize,
    with: Option<usize>,
}

/// The rules of one or more tables.
#[derive(Clone, Debug)]
pub struct Rules {
    rules: Vec<Rule>,
    on: Vec<bool>,
    /// In the order of the rules.
    compiled: Vec<Compiled>,
    patterns: PatternList,
    sources: Vec<String>,
}

impl Rules {
    /// The file name and the text of the table built into the program.
    pub const BUILT_IN: (&'static str, &'static str) = BUILT_IN;

    /// The rules built into the program, all switched on.
    ///
    /// # Errors
    ///
    /// None unless the built-in table is broken, which the tests rule out.
    pub fn built_in() -> Result<Self, StabilityError> {
        Self::read(&[BUILT_IN])
    }

    /// Reads rules from the texts of tables, each with its file name for
    /// messages; `groups/stability/README.md` says what their columns hold. A
    /// rule of a later table replaces one of the same name in its place, a new
    /// one comes after the others. All rules are switched on.
    ///
    /// # Errors
    ///
    /// A table fault, a verdict of another word, a pattern that does not
    /// compile: each with its place.
    pub fn read(tables: &[(&str, &str)]) -> Result<Self, StabilityError> {
        let mut rules: Vec<Rule> = Vec::new();
        let mut sources = Vec::new();
        for (file, text) in tables {
            let table = Table::read(file, text)?;
            sources.extend(table.facts("source").map(str::to_owned));
            for rule in read_rules(&table)? {
                match rules.iter_mut().find(|known| known.name == rule.name) {
                    Some(known) => *known = rule,
                    None => rules.push(rule),
                }
            }
        }
        let mut texts: Vec<&str> = Vec::new();
        let mut compiled = Vec::new();
        for (at, rule) in rules.iter().enumerate() {
            for condition in &rule.conditions {
                let mut add = |text| {
                    texts.push(text);
                    texts.len() - 1
                };
                compiled.push(Compiled {
                    rule: at,
                    pattern: add(&condition.pattern),
                    places: condition.places,
                    with: condition.with.as_deref().map(add),
                });
            }
        }
        let patterns = PatternList::compile(texts).expect("patterns were compiled row by row");
        Ok(Self {
            on: vec![true; rules.len()],
            rules,
            compiled,
            patterns,
            sources,
        })
    }

    /// The sources of the tables, each as `key: reference`.
    pub fn sources(&self) -> impl ExactSizeIterator<Item = &str> {
        self.sources.iter().map(String::as_str)
    }

    /// Every rule, switched on or not, in the order of the table.
    pub fn iter(&self) -> impl ExactSizeIterator<Item = &Rule> {
        self.rules.iter()
    }

    /// Switches a rule off, by its name.
    ///
    /// # Errors
    ///
    /// [`StabilityError::UnknownRule`] with the nearest name there is.
    pub fn switch_off(&mut self, name: &str) -> Result<(), StabilityError> {
        match self.rules.iter().position(|rule| rule.name == name) {
            Some(at) => {
                self.on[at] = false;
                Ok(())
            }
            None => {
                let names = self.rules.iter().map(|rule| rule.name.as_str());
                Err(StabilityError::UnknownRule {
                    name: name.to_owned(),
                    nearest: nearest(name, names).map(str::to_owned),
                })
            }
        }
    }

    /// The rules that a molecule breaks, of those switched on, in the order of
    /// the table, whatever the numbering of its atoms.
    ///
    /// # Complexity
    ///
    /// Patterns are tried only at atoms of matching element, aromaticity and
    /// hydrogens, each until it is found once.
    pub fn broken(&self, scratch: &mut Scratch, molecule: &Molecule) -> SmallVec<[&Rule; 4]> {
        // Counting looks at the molecule again, so it waits for what is left.
        let mut candidates: SmallVec<[Compiled; 8]> = SmallVec::new();
        let found = self.patterns.find(&mut scratch.0, molecule);
        candidates.extend(self.compiled.iter().copied().filter(|condition| {
            self.on[condition.rule]
                && found[condition.pattern]
                && condition.with.is_none_or(|with| found[with])
        }));
        let mut broken = SmallVec::new();
        let mut last = None;
        for condition in candidates {
            let Compiled {
                rule,
                pattern,
                places,
                ..
            } = condition;
            if last == Some(rule) {
                continue;
            }
            let patterns = &self.patterns;
            if places == 1
                || patterns.count_places(pattern, &mut scratch.0, molecule, places) >= places
            {
                broken.push(&self.rules[rule]);
                last = Some(rule);
            }
        }
        broken
    }
}

fn read_rules(table: &Table) -> Result<Vec<Rule>, StabilityError> {
    table.knows_only(&[
        "name",
        "pattern",
        "with",
        "places",
        "verdict",
        "reason",
        "source",
        "example",
        "counterexample",
        "notes",
    ])?;
    let name = table.column("name")?;
    let pattern = table.column("pattern")?;
    let with = table.column("with")?;
    let places = table.column("places")?;
    let verdict = table.column("verdict")?;
    let reason = table.column("reason")?;
    let source = table.column("source")?;
    let example = table.column("example")?;
    let counterexample = table.column("counterexample")?;
    let optional = |text: &str| {
        Some(text)
            .filter(|text| !text.is_empty())
            .map(str::to_owned)
    };
    let mut rules: Vec<Rule> = Vec::new();
    for row in table.rows() {
        let condition = Condition {
            pattern: sound_pattern(table, row, row.required_text(pattern)?)?,
            places: match row.text(places) {
                "" => 1,
                _ => match row.required_integer(places)? {
                    0 => return Err(row.fault(places, "is not at least 1").into()),
                    count => usize::from(count),
                },
            },
            with: match row.text(with) {
                "" => None,
                text => Some(sound_pattern(table, row, text)?),
            },
            example: optional(row.text(example)),
            counterexample: optional(row.text(counterexample)),
            line: row.line(),
        };
        let called = row.required_text(name)?;
        if let Some(known) = rules.iter_mut().find(|rule| rule.name == called) {
            for column in [verdict, reason, source] {
                if !row.text(column).is_empty() {
                    let fault = "stands in the first row of a rule only; leave it blank here";
                    return Err(row.fault(column, fault).into());
                }
            }
            known.conditions.push(condition);
            continue;
        }
        let word = row.required_text(verdict)?;
        rules.push(Rule {
            name: called.to_owned(),
            verdict: Verdict::ALL
                .into_iter()
                .find(|verdict| verdict.id() == word)
                .ok_or_else(|| row.fault(verdict, "is neither `blocked` nor `warn`"))?,
            reason: row.required_text(reason)?.to_owned(),
            source: row.required_text(source)?.to_owned(),
            conditions: vec![condition],
        });
    }
    Ok(rules)
}

/// The pattern of a row, if it compiles.
pub(super) fn sound_pattern(
    table: &Table,
    row: Row<'_>,
    text: &str,
) -> Result<String, StabilityError> {
    match Pattern::compile(text) {
        Ok(_) => Ok(text.to_owned()),
        Err(faults) => Err(StabilityError::Pattern(GroupsError::Pattern {
            file: table.file().to_owned(),
            line: row.line(),
            pattern: text.to_owned(),
            faults,
        })),
    }
}
