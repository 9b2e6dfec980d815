//! Everything published that an evaluation draws on, loaded once.

use std::sync::{Arc, OnceLock};

use thiserror::Error;

use super::error::UnknownMolecule;
use super::fitted::EstimateLevel;
use super::profile::{Known, Profile, Profiler};
use crate::chem::Keys;
use crate::data::pairs::{PairTables, Pairs};
use crate::data::{DataError, Substance, Substances, TableText, Tables};
use crate::groups::{GroupSet, GroupsError, SetId};
use crate::mixture::{
    ActivityErrors, ActivityModel, ErrorModel, Slips, TableFile, Unifac, UnifacOverlay,
};
use crate::pure::PureMethods;
use crate::pure::fitted::Fitted;
use crate::quantity::Absent;
use crate::stability::{Reactions, Rules};
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

/// A table of a user's folder.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct UserTable {
    /// Where it belongs, as below `groups/`: `unifac/interactions.csv`.
    pub place: String,
    /// Its name in messages.
    pub file: String,
    /// Its text.
    pub text: String,
}

/// The tables a user may lay over the built-in ones.
pub const USER_TABLES: [&str; 19] = [
    "unifac/main_groups.csv",
    "unifac/subgroups.csv",
    "unifac/interactions.csv",
    "unifac/patterns.csv",
    "unifac-dortmund/main_groups.csv",
    "unifac-dortmund/subgroups.csv",
    "unifac-dortmund/interactions-2016.csv",
    "unifac-dortmund/interactions-2006.csv",
    "unifac-dortmund/patterns.csv",
    "substances/substances.csv",
    "substances/measured.csv",
    "substances/hansen.csv",
    "substances/vapor_pressure.csv",
    "substances/density.csv",
    "pairs/gamma_infinity.csv",
    "pairs/excess_volume.csv",
    "pairs/activity_parameters.csv",
    "substances/hansen_spheres.csv",
    "substances/supply.csv",
];

/// Group sets, activity models, pure-component methods and measured data.
///
/// What is built in is read when it is first asked for: most commands need a
/// part only. A user's tables are read, and their faults told, at once.
#[derive(Debug)]
pub struct Library {
    sets: [OnceLock<GroupSet>; SetId::ALL.len()],
    unifac: [OnceLock<Unifac>; UNIFAC_MODELS.len()],
    methods: OnceLock<PureMethods>,
    activity_errors: OnceLock<ActivityErrors>,
    substances: OnceLock<Substances>,
    /// Of the user alone: none are built in.
    pairs: Pairs,
    user: Vec<UserTable>,
    slips: Slips,
    level: EstimateLevel,
    fitted: OnceLock<Fitted>,
    rules: OnceLock<Rules>,
    reactions: OnceLock<Reactions>,
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

const SOUND: &str = "built-in tables are sound (tested), a user's were checked when they came";

impl Library {
    /// What is built into the program; `slips` says whether suspected slips of
    /// the circulated tables are corrected.
    pub fn built_in(slips: Slips) -> Self {
        Self {
            sets: [const { OnceLock::new() }; SetId::ALL.len()],
            unifac: [const { OnceLock::new() }; UNIFAC_MODELS.len()],
            methods: OnceLock::new(),
            activity_errors: OnceLock::new(),
            substances: OnceLock::new(),
            pairs: Pairs::default(),
            user: Vec::new(),
            slips,
            level: EstimateLevel::default(),
            fitted: OnceLock::new(),
            rules: OnceLock::new(),
            reactions: OnceLock::new(),
            not_covered: SetId::ALL.map(|set| Absent::NotCovered {
                set: set.id(),
                what: "some atoms are in no group".into(),
            }),
        }
    }

    /// The same with a user's tables laid over the built-in ones.
    ///
    /// # Errors
    ///
    /// A table that does not pass its checks, with file, row and column.
    pub fn with_user_tables(slips: Slips, user: Vec<UserTable>) -> Result<Self, LibraryError> {
        let mut library = Self {
            user,
            ..Self::built_in(slips)
        };
        for set in SetId::ALL {
            let _ = library.sets[set as usize].set(library.read_set(set)?);
        }
        for (at, model) in UNIFAC_MODELS.into_iter().enumerate() {
            let _ = library.unifac[at].set(library.read_unifac(model)?);
        }
        let _ = library.substances.set(library.read_substances()?);
        library.pairs = library.read_pairs()?;
        Ok(library)
    }

    fn user_table(&self, place: &str) -> Option<&UserTable> {
        self.user.iter().find(|table| table.place == place)
    }

    fn read_set(&self, set: SetId) -> Result<GroupSet, LibraryError> {
        let texts = set.built_in_texts();
        let over = |name: &str| self.user_table(&format!("{}/{name}", set.id()));
        let groups = layers(texts.groups, over("subgroups.csv"));
        let patterns = layers(texts.patterns, over("patterns.csv"));
        Ok(GroupSet::read(set.id(), &groups, &patterns)?)
    }

    fn read_unifac(&self, model: ActivityModel) -> Result<Unifac, LibraryError> {
        let folder = model
            .group_set()
            .expect("every UNIFAC model has a group set");
        let interactions = match model {
            ActivityModel::UnifacDortmund => "interactions-2016.csv",
            ActivityModel::UnifacDortmund2006 => "interactions-2006.csv",
            ActivityModel::Unifac | ActivityModel::Ideal => "interactions.csv",
        };
        let over = |name: &str| {
            self.user_table(&format!("{folder}/{name}"))
                .map(|table| TableFile {
                    name: &table.file,
                    text: &table.text,
                })
        };
        let overlay = UnifacOverlay {
            main_groups: over("main_groups.csv"),
            subgroups: over("subgroups.csv"),
            interactions: over(interactions),
        };
        Unifac::with_overlays(model, &[overlay], self.slips)
            .expect("every UNIFAC model has tables")
            .map_err(LibraryError::from)
    }

    /// The user's table of measured data at a place.
    fn user_text(&self, place: &str) -> Option<TableText<'_>> {
        self.user_table(place).map(|table| TableText {
            file: &table.file,
            text: &table.text,
        })
    }

    /// Pair tables name substances, so those of the user have to be sound before.
    fn read_pairs(&self) -> Result<Pairs, LibraryError> {
        let tables = PairTables {
            gamma_infinity: self.user_text("pairs/gamma_infinity.csv"),
            excess_volume: self.user_text("pairs/excess_volume.csv"),
            activity_parameters: self.user_text("pairs/activity_parameters.csv"),
        };
        Ok(Pairs::read(self.substances(), &tables)?)
    }

    fn read_substances(&self) -> Result<Substances, LibraryError> {
        let built_in = Substances::built_in()?;
        let over = |name: &str| self.user_text(&format!("substances/{name}.csv"));
        let tables = Tables {
            substances: over("substances"),
            measured: over("measured"),
            hansen: over("hansen"),
            vapor_pressure: over("vapor_pressure"),
            density: over("density"),
            hansen_spheres: over("hansen_spheres"),
            supply: over("supply"),
            conflicts: None,
        };
        let none = self
            .user
            .iter()
            .all(|table| !table.place.starts_with("substances/"));
        if none {
            Ok(built_in)
        } else {
            Ok(built_in.with(&tables)?)
        }
    }

    /// A group set.
    pub fn set(&self, set: SetId) -> &GroupSet {
        self.sets[set as usize].get_or_init(|| self.read_set(set).expect(SOUND))
    }

    /// The UNIFAC behind a model; `None` for the ideal mixture.
    pub fn unifac(&self, model: ActivityModel) -> Option<&Unifac> {
        let at = UNIFAC_MODELS.iter().position(|&known| known == model)?;
        Some(self.unifac[at].get_or_init(|| self.read_unifac(model).expect(SOUND)))
    }

    /// What errors ln γ∞ of a model has; `None` for a model without a fitted
    /// error. They are those of the built-in tables, whatever a user lays over them.
    pub fn activity_errors(&self, model: ActivityModel) -> Option<&ErrorModel> {
        let errors = self
            .activity_errors
            .get_or_init(|| ActivityErrors::built_in().expect(SOUND));
        errors.of(model)
    }

    /// Pure-component methods.
    pub fn methods(&self) -> &PureMethods {
        self.methods.get_or_init(PureMethods::built_in)
    }

    /// Measured substances.
    pub fn substances(&self) -> &Substances {
        self.substances
            .get_or_init(|| self.read_substances().expect(SOUND))
    }

    /// Measured data of pairs.
    pub fn pairs(&self) -> &Pairs {
        &self.pairs
    }

    /// The same with other methods for what is not measured.
    #[must_use]
    pub fn with_level(self, level: EstimateLevel) -> Self {
        Self { level, ..self }
    }

    /// Which methods estimate what is not measured.
    pub fn level(&self) -> EstimateLevel {
        self.level
    }

    /// The fitted estimates.
    pub fn fitted(&self) -> &Fitted {
        self.fitted.get_or_init(Fitted::built_in)
    }

    /// Rules on the stability and hazards of structures.
    pub fn rules(&self) -> &Rules {
        self.rules.get_or_init(|| Rules::built_in().expect(SOUND))
    }

    /// Reactions between the molecules of a mixture.
    pub fn reactions(&self) -> &Reactions {
        self.reactions
            .get_or_init(|| Reactions::built_in().expect(SOUND))
    }

    /// How suspected slips are treated.
    pub fn slips(&self) -> Slips {
        self.slips
    }

    /// The tables of the user, in the order in which they were found.
    pub fn user_tables(&self) -> &[UserTable] {
        &self.user
    }

    /// Every table computed with, as (file name, text): what a fingerprint is taken of.
    pub fn texts(&self) -> Vec<(&str, &str)> {
        let mut all: Vec<(&str, &str)> = Vec::new();
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
        let errors = ActivityErrors::BUILT_IN;
        all.push((errors.name, errors.text));
        all.extend(
            Substances::built_in_texts()
                .into_iter()
                .map(|file| (file.file, file.text)),
        );
        for text in Fitted::texts() {
            all.push(text);
        }
        all.extend([Rules::BUILT_IN, Reactions::BUILT_IN]);
        // By place: where the user keeps the folder does not matter.
        all.extend(
            self.user
                .iter()
                .map(|table| (table.place.as_str(), table.text.as_str())),
        );
        all
    }

    /// The reason of every molecule that a set does not cover; see [`Profiler::explained`].
    pub(super) fn not_covered(&self, set: SetId) -> &Absent {
        &self.not_covered[set as usize]
    }

    /// Measured data of a molecule: of the same identity, else of the same constitution.
    pub fn known(&self, keys: &Keys) -> Option<Known<'_>> {
        let (substance, flags) = self.substances().find_structure(keys)?;
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
        match self.substances().find(text) {
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
        self.substances()
            .iter()
            .position(|other| std::ptr::eq(other, substance))
            .expect("the substance is one of the library")
    }

    pub(super) fn substance(&self, position: usize) -> &Substance {
        self.substances()
            .iter()
            .nth(position)
            .expect("positions come from the library")
    }
}

/// A built-in text and, above it, the one of the user.
fn layers<'a>(
    built_in: (&'a str, &'a str),
    user: Option<&'a UserTable>,
) -> Vec<(&'a str, &'a str)> {
    let user = user.map(|table| (table.file.as_str(), table.text.as_str()));
    [Some(built_in), user].into_iter().flatten().collect()
}
