//! The published tables of a UNIFAC model: groups and their interactions.

use std::sync::Arc;

use crate::mixture::uncertainty::ClassMasks;
use crate::mixture::{MixtureError, PairGap};
use crate::table::TableError;

use super::reader::Reading;

/// A table file: its name in messages and its text.
#[derive(Clone, Copy, Debug)]
pub struct TableFile<'a> {
    /// Name used in messages.
    pub name: &'a str,
    /// The whole text.
    pub text: &'a str,
}

/// The files of one model.
#[derive(Clone, Copy, Debug)]
pub struct UnifacTexts<'a> {
    /// `number,name`.
    pub main_groups: TableFile<'a>,
    /// `number,main_group,formula,composition,r,q,example`.
    pub subgroups: TableFile<'a>,
    /// `i,j,a` or `i,j,a,b,c`.
    pub interactions: TableFile<'a>,
    /// Suspected slips of the interactions, if there is such a file.
    pub slips: Option<TableFile<'a>>,
}

/// Files of a user's folder that add to or override those of a model.
#[derive(Clone, Copy, Debug, Default)]
pub struct UnifacOverlay<'a> {
    /// Like [`UnifacTexts::main_groups`].
    pub main_groups: Option<TableFile<'a>>,
    /// Like [`UnifacTexts::subgroups`].
    pub subgroups: Option<TableFile<'a>>,
    /// Like [`UnifacTexts::interactions`].
    pub interactions: Option<TableFile<'a>>,
}

/// What to do about suspected slips of the circulating tables.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Hash)]
pub enum Slips {
    /// Compute with the values as they circulate.
    AsCirculated,
    /// Compute with the replacement where the slips file has one.
    #[default]
    Corrected,
}

/// A main group.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct MainGroup {
    /// Published number.
    pub number: u16,
    /// Name.
    pub name: Arc<str>,
}

/// A subgroup: what a molecule is counted in.
#[derive(Clone, Debug, PartialEq)]
pub struct Subgroup {
    /// Published number.
    pub number: u16,
    /// Published number of its main group.
    pub main_group: u16,
    /// Formula as the papers print it.
    pub formula: Arc<str>,
    /// The atoms it covers, such as `C1.5H3O1` (halves occur); `None` for ions.
    pub composition: Option<Arc<str>>,
    /// Relative van der Waals volume.
    pub r: f64,
    /// Relative van der Waals surface area.
    pub q: f64,
    /// A molecule and its groups, where the table gives one.
    pub example: Option<Arc<str>>,
    pub(super) main_index: MainIndex,
}

/// Position of a main group in [`UnifacTables::main_groups`].
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub(in crate::mixture) struct MainIndex(pub(super) u8);

impl MainIndex {
    pub(super) fn get(self) -> usize {
        usize::from(self.0)
    }
}

/// Interaction parameters of main group i with j: ψ = exp(−(a + b T + c T²)/T).
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Interaction {
    /// a in K.
    pub a_k: f64,
    /// b, dimensionless; 0 where the model has none.
    pub b: f64,
    /// c in 1/K; 0 where the model has none.
    pub c_per_k: f64,
}

/// A value of the circulating table that is suspected to be a slip.
#[derive(Clone, Debug, PartialEq)]
pub struct Slip {
    /// Main-group number of i.
    pub i: u16,
    /// Main-group number of j.
    pub j: u16,
    /// The parameters as they circulate.
    pub circulated: Interaction,
    /// What is used in their place; `None` if nothing better is known.
    pub replacement: Option<Interaction>,
    /// Why it is suspected.
    pub reason: Arc<str>,
    /// What the choice rests on.
    pub evidence: Arc<str>,
}

/// Something a user's folder changed.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Override {
    /// File that brought the change.
    pub file: Arc<str>,
    /// Line of the row.
    pub line: u64,
    /// What it is, such as `subgroup 14` or `interaction 1-5`.
    pub what: String,
    /// Whether an earlier row was replaced; otherwise the row is an addition.
    pub replaced: bool,
}

/// How many pairs of main groups have published interactions.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Coverage {
    /// Pairs of different main groups with both directions published.
    pub known: usize,
    /// Pairs of different main groups that have subgroups.
    pub possible: usize,
}

/// Everything the tables say about one ordered pair.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct PairRecord<'a> {
    /// Main group i.
    pub i: &'a MainGroup,
    /// Main group j.
    pub j: &'a MainGroup,
    /// The parameters computed with.
    pub used: Interaction,
    /// The parameters as they circulate (or as the user gave them).
    pub circulated: Interaction,
    /// The suspicion, if there is one.
    pub slip: Option<&'a Slip>,
}

/// The tables of one model, checked and indexed.
#[derive(Clone, Debug)]
pub struct UnifacTables {
    pub(super) model: &'static str,
    pub(super) main_groups: Vec<MainGroup>,
    pub(super) subgroups: Vec<Subgroup>,
    /// Position in `subgroups` by published number.
    pub(super) by_number: Vec<Option<u16>>,
    /// Row-major i, j: the parameters used.
    pub(super) used: Vec<Interaction>,
    /// Row-major i, j: as the file has them; `None` where nothing is published.
    pub(super) circulated: Vec<Option<Interaction>>,
    /// Bit j of element i: both i→j and j→i are published (or i = j).
    pub(super) known: Vec<u128>,
    pub(super) slips: Vec<Slip>,
    pub(super) treatment: Slips,
    pub(in crate::mixture) class_masks: ClassMasks,
    pub(super) sources: Vec<Arc<str>>,
    pub(super) notes: Vec<Arc<str>>,
    pub(super) overrides: Vec<Override>,
}

impl Interaction {
    /// ln ψ at a temperature: −(a/T + b + c T).
    pub fn ln_psi(&self, temperature_k: f64) -> f64 {
        -(self.a_k / temperature_k + self.b + self.c_per_k * temperature_k)
    }

    /// d ln ψ / dT at a temperature, in 1/K: a/T² − c.
    pub fn ln_psi_slope_per_k(&self, temperature_k: f64) -> f64 {
        self.a_k / (temperature_k * temperature_k) - self.c_per_k
    }
}

impl UnifacTables {
    /// Reads and checks the tables; rows of `overlays` come later and win.
    ///
    /// A slip is not applied to a pair that an overlay gives.
    ///
    /// # Errors
    ///
    /// [`TableError`] with file, line and column: a number or pair that stands
    /// twice in one file, a subgroup or interaction of an unknown main group,
    /// `r` not positive, `q` negative, an interaction of a main group with
    /// itself that is not zero, a composition that is no formula, a slip that
    /// does not repeat the circulated value.
    pub fn read(
        model: &'static str,
        texts: &UnifacTexts<'_>,
        overlays: &[UnifacOverlay<'_>],
        treatment: Slips,
    ) -> Result<Self, TableError> {
        let base = UnifacOverlay {
            main_groups: Some(texts.main_groups),
            subgroups: Some(texts.subgroups),
            interactions: Some(texts.interactions),
        };
        let mut reading = Reading::default();
        for (depth, layer) in std::iter::once(&base).chain(overlays).enumerate() {
            reading.layer(layer, depth > 0)?;
        }
        if let Some(slips) = texts.slips {
            reading.slips(slips, texts.interactions.name)?;
        }
        Ok(reading.finish(model, treatment))
    }

    /// Identifier of the model the tables belong to.
    pub fn model(&self) -> &'static str {
        self.model
    }

    /// Whether suspected slips are corrected.
    pub fn treatment(&self) -> Slips {
        self.treatment
    }

    /// The main groups, ascending by number.
    pub fn main_groups(&self) -> &[MainGroup] {
        &self.main_groups
    }

    /// The subgroups, ascending by number.
    pub fn subgroups(&self) -> &[Subgroup] {
        &self.subgroups
    }

    /// The subgroup of this published number.
    pub fn subgroup(&self, number: u16) -> Option<&Subgroup> {
        let at = (*self.by_number.get(usize::from(number))?)?;
        self.subgroups.get(usize::from(at))
    }

    /// The main group of this published number.
    pub fn main_group(&self, number: u16) -> Option<&MainGroup> {
        self.main_index(number)
            .map(|index| &self.main_groups[index.get()])
    }

    pub(super) fn main_index(&self, number: u16) -> Option<MainIndex> {
        super::reader::main_index(&self.main_groups, number)
    }

    /// Everything known of main group `i` with `j`, by published number;
    /// `None` if there is no such main group or nothing is published.
    pub fn pair(&self, i: u16, j: u16) -> Option<PairRecord<'_>> {
        let (at_i, at_j) = (self.main_index(i)?, self.main_index(j)?);
        let cell = at_i.get() * self.main_groups.len() + at_j.get();
        Some(PairRecord {
            i: &self.main_groups[at_i.get()],
            j: &self.main_groups[at_j.get()],
            used: self.used[cell],
            circulated: self.circulated[cell]?,
            slip: self.slips.iter().find(|slip| (slip.i, slip.j) == (i, j)),
        })
    }

    /// Suspected slips of these tables.
    pub fn slips(&self) -> &[Slip] {
        &self.slips
    }

    /// The papers named in the heads of the files, each once.
    pub fn sources(&self) -> &[Arc<str>] {
        &self.sources
    }

    /// The notes in the heads of the files.
    pub fn notes(&self) -> &[Arc<str>] {
        &self.notes
    }

    /// What overlays added or replaced, in order of reading.
    pub fn overrides(&self) -> &[Override] {
        &self.overrides
    }

    /// How many pairs of main groups that have subgroups can be computed.
    pub fn coverage(&self) -> Coverage {
        let mut populated = 0_u128;
        for subgroup in &self.subgroups {
            populated |= 1 << subgroup.main_index.0;
        }
        let count = populated.count_ones() as usize;
        let known: usize = self
            .known
            .iter()
            .enumerate()
            .filter(|(at, _)| populated >> at & 1 == 1)
            .map(|(at, known)| (known & populated & !(1 << at)).count_ones() as usize)
            .sum();
        Coverage {
            known: known / 2,
            possible: count * (count - 1) / 2,
        }
    }

    /// The parameters used, by position of the main groups.
    pub(super) fn interaction_at(&self, i: usize, j: usize) -> Interaction {
        self.used[i * self.main_groups.len() + j]
    }

    /// The first pair of a set of main groups (bits) that is not published.
    pub(super) fn gap(&self, present: u128) -> Result<(), PairGap> {
        let mut left = present;
        while left != 0 {
            let at = left.trailing_zeros() as usize;
            let missing = present & !self.known[at];
            if missing != 0 {
                let other = missing.trailing_zeros() as usize;
                return Err(self.pair_gap(at, other));
            }
            left &= left - 1;
        }
        Ok(())
    }

    /// The gap between two main groups given by position.
    pub(super) fn pair_gap(&self, at: usize, other: usize) -> PairGap {
        let (a, b) = (self.main_groups[at].number, self.main_groups[other].number);
        PairGap {
            first: a.min(b),
            second: a.max(b),
        }
    }

    /// The gap with the names of its main groups.
    pub fn gap_error(&self, gap: PairGap) -> MixtureError {
        let name = |number| {
            self.main_group(number)
                .map_or_else(|| "?".into(), |group| Arc::clone(&group.name))
        };
        MixtureError::MissingPair {
            model: self.model,
            first_number: gap.first,
            first: name(gap.first),
            second_number: gap.second,
            second: name(gap.second),
        }
    }
}
