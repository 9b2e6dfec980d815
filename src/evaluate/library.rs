//! Everything published that an evaluation draws on, loaded once.

use thiserror::Error;

use crate::chem::Canonicalizer;
use crate::data::{DataError, Substances};
use crate::groups::{GroupSet, GroupsError, SetId};
use crate::mixture::{ActivityModel, Slips, Unifac};
use crate::pure::PureMethods;
use crate::table::TableError;

/// A built-in or user table that cannot be used.
#[derive(Debug, Error)]
pub enum LibraryError {
    /// A group set.
    #[error(transparent)]
    Groups(#[from] GroupsError),
    /// A parameter table.
    #[error(transparent)]
    Table(#[from] TableError),
    /// Measured data.
    #[error(transparent)]
    Data(#[from] DataError),
}

/// Group sets, activity models, pure-component methods and measured data.
#[derive(Debug)]
pub struct Library {
    sets: [GroupSet; SetId::ALL.len()],
    unifac: [Unifac; 3],
    /// Pure-component methods.
    pub methods: PureMethods,
    /// Measured substances.
    pub substances: Substances,
    slips: Slips,
}

/// The UNIFAC models, in the order of [`Library::unifac`]'s array.
const UNIFAC_MODELS: [ActivityModel; 3] =
    [ActivityModel::Unifac, ActivityModel::UnifacDortmund, ActivityModel::UnifacDortmund2006];

impl Library {
    /// What is built into the program; `slips` says whether suspected slips of
    /// the circulated tables are corrected.
    ///
    /// # Errors
    ///
    /// A built-in table that does not pass its checks, with file, row and column.
    pub fn built_in(slips: Slips) -> Result<Self, LibraryError> {
        let [original, dortmund, joback] = SetId::ALL.map(GroupSet::built_in);
        let [first, second, third] = UNIFAC_MODELS.map(|model| {
            Unifac::built_in(model, slips).expect("every UNIFAC model has tables")
        });
        Ok(Self {
            sets: [original?, dortmund?, joback?],
            unifac: [first?, second?, third?],
            methods: PureMethods::built_in(),
            substances: Substances::built_in()?,
            slips,
        })
    }

    /// A group set.
    pub fn set(&self, set: SetId) -> &GroupSet {
        &self.sets[set as usize]
    }

    /// The UNIFAC behind a model; `None` for the ideal mixture.
    pub fn unifac(&self, model: ActivityModel) -> Option<&Unifac> {
        UNIFAC_MODELS.iter().position(|&known| known == model).map(|at| &self.unifac[at])
    }

    /// How suspected slips are treated.
    pub fn slips(&self) -> Slips {
        self.slips
    }

    /// A canonicalizer for looking molecules up; one per thread.
    pub(super) fn canonicalizer(&self) -> Canonicalizer {
        Canonicalizer::new()
    }
}
