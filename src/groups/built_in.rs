//! The group sets that are built in.

use super::{GroupSet, GroupsError};

/// A published group set.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum SetId {
    /// Original UNIFAC with its published revisions.
    Unifac,
    /// Modified UNIFAC (Dortmund).
    UnifacDortmund,
    /// Joback and Reid 1987.
    Joback,
}

/// The texts a set is read from, each with its file name.
#[derive(Clone, Copy, Debug)]
pub struct SetTexts<'a> {
    /// The group table.
    pub groups: (&'a str, &'a str),
    /// The pattern table.
    pub patterns: (&'a str, &'a str),
}

macro_rules! table {
    ($path:literal) => {
        ($path, include_str!(concat!("../../", $path)))
    };
}

impl SetId {
    /// Every set, in display order; `ALL[s as usize] == s`.
    pub const ALL: [Self; 3] = [Self::Unifac, Self::UnifacDortmund, Self::Joback];

    /// The name used in arguments and the `set` column.
    pub const fn id(self) -> &'static str {
        match self {
            Self::Unifac => "unifac",
            Self::UnifacDortmund => "unifac-dortmund",
            Self::Joback => "joback",
        }
    }

    /// One line for people.
    pub const fn title(self) -> &'static str {
        match self {
            Self::Unifac => "original UNIFAC subgroups with the published revisions",
            Self::UnifacDortmund => "modified UNIFAC (Dortmund) subgroups",
            Self::Joback => "groups of Joback and Reid 1987",
        }
    }

    /// The set of this name.
    pub fn from_id(id: &str) -> Option<Self> {
        Self::ALL.into_iter().find(|set| set.id() == id)
    }

    /// The texts built into the program.
    pub const fn built_in_texts(self) -> SetTexts<'static> {
        match self {
            Self::Unifac => SetTexts {
                groups: table!("groups/unifac/subgroups.csv"),
                patterns: table!("groups/unifac/patterns.csv"),
            },
            Self::UnifacDortmund => SetTexts {
                groups: table!("groups/unifac-dortmund/subgroups.csv"),
                patterns: table!("groups/unifac-dortmund/patterns.csv"),
            },
            Self::Joback => SetTexts {
                groups: table!("groups/joback/contributions.csv"),
                patterns: table!("groups/joback/patterns.csv"),
            },
        }
    }
}

impl GroupSet {
    /// A set as built into the program.
    ///
    /// # Errors
    ///
    /// None unless a built-in file is broken, which the tests rule out.
    pub fn built_in(set: SetId) -> Result<Self, GroupsError> {
        let texts = set.built_in_texts();
        Self::read(set.id(), &[texts.groups], &[texts.patterns])
    }
}
