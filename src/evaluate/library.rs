//! Everything published that an evaluation draws on, loaded once.

use std::sync::Arc;

use thiserror::Error;

use super::error::UnknownMolecule;
use super::profile::{Known, Profile, Profiler};
use crate::chem::Keys;
use crate::data::{DataError, Substance, Substances};
use crate::groups::{GroupSet, GroupsError, SetId};
use crate::mixture::{ActivityModel, Slips, Unifac};
use crate::pure::PureMethods;
use crate::quantity::Absent;
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
    unifac: [Unifac; UNIFAC_MODELS.len()],
    /// Pure-component methods.
    pub methods: PureMethods,
    /// Measured substances.
    pub substances: Substances,
    slips: Slips,
    /// That a set leaves atoms out, without saying which: finding the words takes
    /// longer than the breakdown, so it waits until somebody reads them.
    not_covered: [Absent; SetId::ALL.len()],
}

/// The models that have tables, in the order in which they are held.
const UNIFAC_MODELS: [ActivityModel; 3] = [
    ActivityModel::Unifac,
    ActivityModel::UnifacDortmund,
    ActivityModel::UnifacDortmund2006,
];

impl Library {
    /// What is built into the program; `slips` says whether suspected slips of
    /// the circulated tables are corrected.
    ///
    /// # Errors
    ///
    /// A built-in table that does not pass its checks, with file, row and column.
    pub fn built_in(slips: Slips) -> Result<Self, LibraryError> {
        let [original, dortmund, joback] = SetId::ALL.map(GroupSet::built_in);
        let [first, second, third] = UNIFAC_MODELS
            .map(|model| Unifac::built_in(model, slips).expect("every UNIFAC model has tables"));
        Ok(Self {
            sets: [original?, dortmund?, joback?],
            unifac: [first?, second?, third?],
            methods: PureMethods::built_in(),
            substances: Substances::built_in()?,
            slips,
            not_covered: SetId::ALL.map(|set| Absent::NotCovered {
                set: set.id(),
                what: "some atoms are in no group".into(),
            }),
        })
    }

    /// A group set.
    pub fn set(&self, set: SetId) -> &GroupSet {
        &self.sets[set as usize]
    }

    /// The UNIFAC behind a model; `None` for the ideal mixture.
    pub fn unifac(&self, model: ActivityModel) -> Option<&Unifac> {
        UNIFAC_MODELS
            .iter()
            .position(|&known| known == model)
            .map(|at| &self.unifac[at])
    }

    /// How suspected slips are treated.
    pub fn slips(&self) -> Slips {
        self.slips
    }

    /// Every table computed with, as (file name, text): what a fingerprint is taken of.
    pub fn texts(&self) -> Vec<(&'static str, &'static str)> {
        let mut all = Vec::new();
        for set in SetId::ALL {
            let texts = set.built_in_texts();
            all.extend([texts.groups, texts.patterns]);
        }
        for texts in ActivityModel::ALL.iter().filter_map(|model| model.texts()) {
            let files = [texts.main_groups, texts.subgroups, texts.interactions];
            all.extend(
                files
                    .into_iter()
                    .chain(texts.slips)
                    .map(|file| (file.name, file.text)),
            );
        }
        all.extend(
            Substances::built_in_texts()
                .into_iter()
                .map(|file| (file.file, file.text)),
        );
        all
    }

    /// The reason of every molecule that a set does not cover; see [`Profiler::explained`].
    pub(super) fn not_covered(&self, set: SetId) -> &Absent {
        &self.not_covered[set as usize]
    }

    /// Measured data of a molecule: of the same identity, else of the same constitution.
    pub fn known(&self, keys: &Keys) -> Option<Known<'_>> {
        let (substance, flags) = self.substances.find_structure(keys)?;
        Some(Known {
            substance,
            same_identity: flags.is_empty(),
        })
    }

    /// The molecule behind a name, CAS number or SMILES. A built-in name goes
    /// before a SMILES that reads the same.
    ///
    /// # Errors
    ///
    /// The text is neither.
    pub fn find(
        &self,
        profiler: &mut Profiler,
        text: &str,
    ) -> Result<(Option<Arc<str>>, Profile), UnknownMolecule> {
        let text = text.trim();
        match self.substances.find(text) {
            Ok(substance) => {
                let profile = profiler
                    .profile(self, substance.smiles())
                    .expect("structures of built-in substances were read when they were loaded");
                Ok((Some(Arc::clone(substance.name())), profile))
            }
            Err(name) => match profiler.profile(self, text) {
                Ok(profile) => {
                    let known = self
                        .known(&profile.keys)
                        .filter(|known| known.same_identity);
                    Ok((
                        known.map(|known| Arc::clone(known.substance.name())),
                        profile,
                    ))
                }
                Err(smiles) => Err(UnknownMolecule {
                    text: text.to_owned(),
                    smiles,
                    name,
                }),
            },
        }
    }

    pub(super) fn position(&self, substance: &Substance) -> usize {
        self.substances
            .iter()
            .position(|other| std::ptr::eq(other, substance))
            .expect("the substance is one of the library")
    }

    pub(super) fn substance(&self, position: usize) -> &Substance {
        self.substances
            .iter()
            .nth(position)
            .expect("positions come from the library")
    }
}
