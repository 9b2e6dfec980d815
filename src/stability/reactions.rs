//! Reactions between the molecules of a mixture.

use super::rules::sound_pattern;
use super::{Scratch, StabilityError};
use crate::chem::Molecule;
use crate::groups::pattern::PatternList;
use crate::table::Table;

const BUILT_IN: (&str, &str) = (
    "groups/stability/reactions.csv",
    include_str!("../../groups/stability/reactions.csv"),
);

/// A reaction of two classes of molecules.
#[derive(Clone, Debug, PartialEq)]
pub struct Reaction {
    /// Name, in words joined by hyphens; several rows may share it.
    pub name: String,
    /// Patterns of the two molecules.
    pub patterns: [String; 2],
    /// What happens, and what it takes, in a chemist's words.
    pub reaction: String,
    /// Source as the table names it.
    pub source: String,
    /// SMILES of two molecules that react so.
    pub examples: [String; 2],
    /// Line of its table.
    pub line: u64,
}

/// The reactions of a table.
#[derive(Clone, Debug)]
pub struct Reactions {
    reactions: Vec<Reaction>,
    /// The two patterns of each reaction, one after the other.
    patterns: PatternList,
}

/// What a molecule can be in each reaction of a table: first, second, both, neither.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Classes(Vec<bool>);

impl Reactions {
    /// The file name and the text of the table built into the program.
    pub const BUILT_IN: (&'static str, &'static str) = BUILT_IN;

    /// The reactions built into the program.
    ///
    /// # Errors
    ///
    /// None unless the built-in table is broken, which the tests rule out.
    pub fn built_in() -> Result<Self, StabilityError> {
        let (file, text) = BUILT_IN;
        Self::read(file, text)
    }

    /// Reads reactions from the text of a table; `groups/stability/README.md`
    /// says what its columns hold.
    ///
    /// # Errors
    ///
    /// A table fault or a pattern that does not compile, with its place.
    pub fn read(file: &str, text: &str) -> Result<Self, StabilityError> {
        let table = Table::read(file, text)?;
        let name = table.column("name")?;
        let patterns = [table.column("first")?, table.column("second")?];
        let reaction = table.column("reaction")?;
        let source = table.column("source")?;
        let examples = [
            table.column("first_example")?,
            table.column("second_example")?,
        ];
        let mut reactions = Vec::with_capacity(table.rows().len());
        for row in table.rows() {
            let [first, second] = patterns;
            let [one, other] = examples;
            reactions.push(Reaction {
                name: row.required_text(name)?.to_owned(),
                patterns: [
                    sound_pattern(&table, row, row.required_text(first)?)?,
                    sound_pattern(&table, row, row.required_text(second)?)?,
                ],
                reaction: row.required_text(reaction)?.to_owned(),
                source: row.required_text(source)?.to_owned(),
                examples: [row.text(one).to_owned(), row.text(other).to_owned()],
                line: row.line(),
            });
        }
        let texts = reactions.iter().flat_map(|reaction| &reaction.patterns);
        let patterns = PatternList::compile(texts.map(String::as_str))
            .expect("patterns were compiled row by row");
        Ok(Self {
            reactions,
            patterns,
        })
    }

    /// Every reaction, in the order of the table.
    pub fn iter(&self) -> impl ExactSizeIterator<Item = &Reaction> {
        self.reactions.iter()
    }

    /// What a molecule can be in each of the reactions.
    pub fn classes(&self, scratch: &mut Scratch, molecule: &Molecule) -> Classes {
        Classes(self.patterns.find(&mut scratch.0, molecule).to_vec())
    }

    /// The reactions of two molecules with each other, in the order of the
    /// table; which is first and which second does not matter. The classes have
    /// to be of this table.
    pub fn between<'r>(
        &'r self,
        one: &'r Classes,
        other: &'r Classes,
    ) -> impl Iterator<Item = &'r Reaction> {
        self.reactions
            .iter()
            .enumerate()
            .filter_map(|(at, reaction)| {
                let (first, second) = (2 * at, 2 * at + 1);
                let react = one.0[first] && other.0[second] || one.0[second] && other.0[first];
                react.then_some(reaction)
            })
    }
}
