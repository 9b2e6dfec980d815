//! The collection: finding a substance by name, CAS number or structure.

use std::sync::{Arc, OnceLock};

use rustc_hash::FxHashMap;
use smallvec::SmallVec;

use super::cas::{CasFault, CasNumber};
use super::structure::{Match, StructureIndex};
use super::{
    DataError, HansenSphere, NameError, Substance, TableText, Tables, built_in, load, name,
};
use crate::chem::Keys;
use crate::quantity::{Flag, Flags, Property};

/// How many names an error message offers.
const SUGGESTIONS: usize = 3;

/// Every substance of the loaded layers.
///
/// Immutable once loaded; shared between threads.
#[derive(Debug, Default)]
pub struct Substances {
    pub(super) substances: Vec<Substance>,
    pub(super) by_name: FxHashMap<Box<str>, Named>,
    pub(super) by_cas: FxHashMap<CasNumber, u32>,
    pub(super) conflicts: Vec<Conflict>,
    pub(super) spheres: Vec<HansenSphere>,
    /// Made at the first look-up by structure: most runs of one command need none.
    pub(super) structures: OnceLock<StructureIndex>,
    /// Made at the first name that is unknown.
    spellings: OnceLock<Vec<FoldedSpelling>>,
}

/// A name or synonym as it is compared with a misspelled one.
#[derive(Debug)]
struct FoldedSpelling {
    substance: u32,
    folded: Box<str>,
    spelling: Arc<str>,
}

/// What a folded name stands for.
#[derive(Clone, Debug)]
pub(super) enum Named {
    /// One substance.
    One(u32),
    /// A name in use for several.
    Several(SmallVec<[u32; 4]>),
}

/// A disagreement between two published sources, and what was done about it.
#[derive(Clone, Debug, PartialEq)]
pub struct Conflict {
    /// Index of the substance in [`Substances::iter`].
    pub substance: usize,
    /// What they disagree about.
    pub property: Arc<str>,
    /// The temperature at which they were compared, in K, where that matters.
    pub temperature_k: Option<f64>,
    /// The value used, as text; blank where none is.
    pub used: Arc<str>,
    /// Its source.
    pub used_source: Arc<str>,
    /// The other value.
    pub other: Arc<str>,
    /// Its source.
    pub other_source: Arc<str>,
    /// Unit of both values.
    pub unit: Arc<str>,
    /// What was done and why.
    pub decision: Arc<str>,
}

impl Conflict {
    /// Whether it is about this property.
    pub fn is_about(&self, property: Property) -> bool {
        let hansen = matches!(
            property,
            Property::HansenDispersion | Property::HansenPolar | Property::HansenHydrogenBonding
        );
        *self.property == *property.id() || hansen && &*self.property == "hansen"
    }
}

impl Substances {
    /// The built-in table.
    ///
    /// # Errors
    ///
    /// None as released: the tables are checked by a test.
    pub fn built_in() -> Result<Self, DataError> {
        let mut substances = Self::default();
        // that no structure stands twice is left to a test: it would cost every start its index
        load::load(&mut substances, &built_in::TABLES, None)?;
        Ok(substances)
    }

    /// The files of the built-in layer.
    pub fn built_in_texts() -> Vec<TableText<'static>> {
        built_in::TABLES.texts()
    }

    /// Number of substances.
    pub fn len(&self) -> usize {
        self.substances.len()
    }

    /// Whether there are none.
    pub fn is_empty(&self) -> bool {
        self.substances.is_empty()
    }

    /// Every substance, in the order of the tables.
    pub fn iter(&self) -> impl ExactSizeIterator<Item = &Substance> {
        self.substances.iter()
    }

    /// The disagreements between sources that the tables record.
    pub fn conflicts(&self) -> &[Conflict] {
        &self.conflicts
    }

    /// The disagreements about a property of a substance of this collection, in
    /// the order of the tables; those about Hansen parameters answer for all three.
    pub fn conflicts_about(
        &self,
        substance: &Substance,
        property: Property,
    ) -> impl Iterator<Item = &Conflict> {
        self.conflicts_of(substance)
            .filter(move |conflict| conflict.is_about(property))
    }

    /// The disagreements about a substance of this collection, in the order of the tables.
    pub fn conflicts_of(&self, substance: &Substance) -> impl Iterator<Item = &Conflict> {
        let position = self
            .substances
            .iter()
            .position(|other| std::ptr::eq(other, substance));
        self.conflicts
            .iter()
            .filter(move |conflict| Some(conflict.substance) == position)
    }

    /// Spheres of good solvents, a user's before those that are built in.
    pub fn hansen_spheres(&self) -> &[HansenSphere] {
        &self.spheres
    }

    /// The sphere of a solute; case, spaces and hyphens do not matter.
    pub fn hansen_sphere(&self, solute: &str) -> Option<&HansenSphere> {
        let folded = name::folded(solute);
        self.spheres
            .iter()
            .find(|sphere| name::folded(&sphere.solute) == folded)
    }

    /// The substance of this name, synonym or CAS number.
    ///
    /// Case, spaces and hyphens do not matter to names.
    ///
    /// # Errors
    ///
    /// Unknown (with the names nearest to it) or in use for several
    /// substances; a CAS number that is unknown or has a wrong check digit.
    pub fn find(&self, text: &str) -> Result<&Substance, NameError> {
        self.position(text)
            .map(|position| &self.substances[position as usize])
    }

    pub(super) fn position(&self, text: &str) -> Result<u32, NameError> {
        let text = text.trim();
        match CasNumber::parse_or_fault(text) {
            Ok(cas) => {
                return self
                    .by_cas
                    .get(&cas)
                    .copied()
                    .ok_or_else(|| NameError::UnknownCas {
                        cas: cas.to_string(),
                    });
            }
            Err(CasFault::CheckDigit { expected }) => {
                return Err(NameError::CasCheckDigit {
                    text: text.to_owned(),
                    expected,
                });
            }
            Err(CasFault::Form) => {}
        }
        let folded = name::folded(text);
        let named = self.by_name.get(folded.as_str()).or_else(|| {
            name::expanded(text).and_then(|expanded| self.by_name.get(expanded.as_str()))
        });
        match named {
            Some(Named::One(position)) => Ok(*position),
            Some(Named::Several(positions)) => Err(NameError::Ambiguous {
                name: text.to_owned(),
                candidates: positions
                    .iter()
                    .map(|&position| Arc::clone(&self.substances[position as usize].name))
                    .collect(),
            }),
            None => Err(NameError::Unknown {
                name: text.to_owned(),
                nearest: self.nearest(&folded),
            }),
        }
    }

    /// The substance of this structure, with [`Flag::OtherStereoisomer`] if it
    /// is one of the same constitution but another (or no stated)
    /// stereochemistry or isotopic composition.
    ///
    /// Among several of one constitution the one without stated stereochemistry
    /// is taken, else the first of the table.
    pub fn find_structure(&self, keys: &Keys) -> Option<(&Substance, Flags)> {
        let index = self
            .structures
            .get_or_init(|| StructureIndex::of(&self.substances));
        index.find(keys).map(|found| match found {
            Match::Full(position) => (&self.substances[position as usize], Flags::NONE),
            Match::Constitution(position) => (
                &self.substances[position as usize],
                Flags::NONE.with(Flag::OtherStereoisomer),
            ),
        })
    }

    /// Every spelling with its folded form, in the order of the substances.
    fn folded_spellings(&self) -> &[FoldedSpelling] {
        self.spellings.get_or_init(|| {
            let folded = |substance: u32, spelling: &Arc<str>| FoldedSpelling {
                substance,
                folded: name::folded(spelling).into(),
                spelling: Arc::clone(spelling),
            };
            let of_one = |(position, substance)| {
                let substance: &Substance = substance;
                std::iter::once(&substance.name)
                    .chain(&substance.synonyms)
                    .map(move |spelling| folded(position, spelling))
            };
            (0..).zip(&self.substances).flat_map(of_one).collect()
        })
    }

    /// The spellings nearest to a folded name, one for each substance.
    fn nearest(&self, folded: &str) -> Vec<Arc<str>> {
        let limit = (folded.len() / 4).clamp(1, 4);
        let mut found: Vec<(usize, u32, &Arc<str>)> = Vec::new();
        for of_one in self
            .folded_spellings()
            .chunk_by(|one, other| one.substance == other.substance)
        {
            let best = of_one
                .iter()
                .filter_map(|one| {
                    let distance = name::distance(folded, &one.folded, limit)?;
                    Some((distance, one.substance, &one.spelling))
                })
                .min_by_key(|&(distance, ..)| distance);
            found.extend(best);
        }
        found.sort_unstable_by_key(|&(distance, position, _)| (distance, position));
        found.truncate(SUGGESTIONS);
        found
            .into_iter()
            .map(|(_, _, spelling)| Arc::clone(spelling))
            .collect()
    }

    /// The same substances with a further layer of tables, whose values go
    /// before those already there.
    ///
    /// # Errors
    ///
    /// [`DataError::Tables`] with every fault of the layer.
    pub fn with(mut self, tables: &Tables<'_>) -> Result<Self, DataError> {
        let structures = self
            .structures
            .take()
            .unwrap_or_else(|| StructureIndex::of(&self.substances));
        self.spellings = OnceLock::new();
        self.structures = load::load(&mut self, tables, Some(structures))?
            .map_or_else(OnceLock::new, OnceLock::from);
        Ok(self)
    }
}
