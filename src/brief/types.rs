//! The checked brief.

use std::path::{Path, PathBuf};
use std::sync::Arc;

use super::place::Located;
use super::structure::{CountRange, Structure};
use super::target::Target;

/// How many candidates are kept in the ranking unless the brief says otherwise.
pub const DEFAULT_KEEP_BEST: usize = 1_000;

/// The most candidates a brief may ask to keep; messages spell it out.
pub const LARGEST_KEEP_BEST: usize = 1_000_000;

/// What the brief is read for; decides which of its parts have to be there.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Job {
    /// Ranking a pool: needs `[pool]` and a target.
    Screen,
    /// Searching assemblies: needs a target.
    Assemble,
    /// Computing one mixture: needs `[mixture]`.
    Mixture,
    /// Looking at the brief itself: needs a target or a mixture.
    Check,
}

/// What fractions and ratios count.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub enum Basis {
    /// Amount of substance.
    #[default]
    Mole,
    /// Mass.
    Mass,
    /// Volume of the pure liquids before mixing.
    Volume,
}

impl Basis {
    /// Every basis.
    pub const ALL: [Self; 3] = [Self::Mole, Self::Mass, Self::Volume];

    /// The word of briefs and the command line.
    pub const fn id(self) -> &'static str {
        match self {
            Self::Mole => "mole",
            Self::Mass => "mass",
            Self::Volume => "volume",
        }
    }

    /// The basis of this name.
    pub fn from_id(id: &str) -> Option<Self> {
        Self::ALL.into_iter().find(|basis| basis.id() == id)
    }
}

/// How much solvent is added to the feed.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct SolventToFeed {
    /// Amount of solvent over amount of feed, above 0.
    pub ratio: f64,
    /// What the amounts count: mole or mass.
    pub basis: Basis,
}

/// The `[mixture]` table.
#[derive(Clone, Debug, PartialEq)]
#[non_exhaustive]
pub struct Mixture {
    /// Names or SMILES as written, at least one, no text twice.
    pub components: Vec<Located<String>>,
    /// The two key components, positions in `components` from 0; `None` when
    /// there is only one component.
    pub keys: Option<Located<[usize; 2]>>,
    /// Fractions in component order, adding up to 1.
    pub fractions: Option<Located<Vec<f64>>>,
    /// What the fractions count.
    pub basis: Basis,
    /// Temperature in K.
    pub temperature_k: Option<Located<f64>>,
    /// Pressure in Pa.
    pub pressure_pa: Option<Located<f64>>,
    /// Activity models by their names in the catalog; empty: the default.
    pub models: Vec<Located<&'static str>>,
    /// Solvent added to the feed.
    pub solvent_to_feed: Option<Located<SolventToFeed>>,
    /// Whether estimated vapor pressures of the keys may stand in for measured
    /// ones; false unless the brief says so.
    pub estimates_for_keys: bool,
}

/// The `[pool]` table.
#[derive(Clone, Debug, PartialEq)]
#[non_exhaustive]
pub struct Pool {
    /// The candidate list as written: relative to the brief, `-` for standard input.
    pub file: Located<String>,
    /// Name of the column of names, where it is not `name`.
    pub name_column: Option<Located<String>>,
    /// Name of the column of SMILES, where it is not `smiles`.
    pub smiles_column: Option<Located<String>>,
}

/// The `[assembly]` table. Whether the names in it are pieces or classes of
/// pieces is judged beside the table of pieces.
#[derive(Clone, Debug, Default, PartialEq)]
#[non_exhaustive]
pub struct Assembly {
    /// Pieces to build from, as written; empty: the default list.
    pub pieces: Vec<Located<String>>,
    /// Fewest pieces in a molecule.
    pub least_pieces: Option<Located<u32>>,
    /// Most pieces in a molecule.
    pub most_pieces: Option<Located<u32>>,
    /// Fewest and most atoms that are not hydrogen.
    pub heavy_atoms: Option<Located<CountRange>>,
    /// Highest molar mass in kg/mol.
    pub most_molar_mass_kg_per_mol: Option<Located<f64>>,
    /// How many structures of one assembly are drawn at most.
    pub structures: Option<Located<u32>>,
    /// Rules on counts or structures that are switched off, by name.
    pub allow: Vec<Located<String>>,
    /// Highest count by piece or class, in the order of the brief.
    pub limits: Vec<(Located<String>, u32)>,
}

/// What candidates are ranked by.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub enum RankBy {
    /// The expected score; a missed must counts as a score of 0.
    #[default]
    ExpectedScore,
    /// The probability that every must is met, then the expected score.
    Probability,
    /// The lower end of the interval of the score, then the expected score.
    Cautious,
}

impl RankBy {
    /// Every rule.
    pub const ALL: [Self; 3] = [Self::ExpectedScore, Self::Probability, Self::Cautious];

    /// The word of briefs.
    pub const fn id(self) -> &'static str {
        match self {
            Self::ExpectedScore => "expected-score",
            Self::Probability => "probability",
            Self::Cautious => "cautious",
        }
    }

    /// The rule of this name.
    pub fn from_id(id: &str) -> Option<Self> {
        Self::ALL.into_iter().find(|by| by.id() == id)
    }
}

/// The `[ranking]` table: what is made of the intervals of estimates.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Ranking {
    /// What candidates are ranked by.
    pub by: RankBy,
    /// A must disqualifies where the probability of meeting it is below this,
    /// from 0 to less than 1; at 0 intervals are left out and the bare numbers
    /// decide.
    pub confidence: f64,
}

impl Ranking {
    /// The confidence of a brief that states none.
    pub const DEFAULT_CONFIDENCE: f64 = 0.05;

    /// Whether intervals play a part.
    pub fn uses_intervals(&self) -> bool {
        self.confidence > 0.0
    }
}

impl Default for Ranking {
    fn default() -> Self {
        Self {
            by: RankBy::default(),
            confidence: Self::DEFAULT_CONFIDENCE,
        }
    }
}

/// A checked job, everything in SI units.
#[derive(Clone, Debug, PartialEq)]
#[non_exhaustive]
pub struct Brief {
    /// Name of the brief in messages.
    pub file: Arc<str>,
    /// Folder of the brief: what `pool.file` and `data.folder` are relative to.
    pub folder: PathBuf,
    /// The text of the brief as it stands, for the run record.
    pub text: Arc<str>,
    /// What the job is called.
    pub title: Option<Located<String>>,
    /// What it is for; a free word so far.
    pub purpose: Option<Located<String>>,
    /// The mixture.
    pub mixture: Option<Mixture>,
    /// Folder of the user's measured data as written: relative to the brief.
    pub data_folder: Option<Located<String>>,
    /// The candidate list.
    pub pool: Option<Pool>,
    /// The assembly search.
    pub assembly: Option<Located<Assembly>>,
    /// Limits on structure.
    pub structure: Structure,
    /// The targets, in the order of the brief.
    pub targets: Vec<Target>,
    /// How many candidates the ranking keeps.
    pub keep_best: usize,
    /// How the intervals of estimates count.
    pub ranking: Ranking,
}

impl Brief {
    /// Path of the pool; `None` if there is no pool or it is standard input.
    pub fn pool_path(&self) -> Option<PathBuf> {
        let file = &self.pool.as_ref()?.file.value;
        (file != "-").then(|| self.folder.join(Path::new(file)))
    }

    /// Path of the folder of measured data; `None` if the brief names none.
    pub fn data_path(&self) -> Option<PathBuf> {
        let folder = &self.data_folder.as_ref()?.value;
        Some(self.folder.join(Path::new(folder)))
    }

    /// The title, or the name of the file where there is none.
    pub fn heading(&self) -> &str {
        match &self.title {
            Some(title) => &title.value,
            None => &self.file,
        }
    }
}
