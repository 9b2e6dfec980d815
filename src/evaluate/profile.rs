//! What a structure alone says: keys, groups and facts, before any brief.

use smallvec::SmallVec;

use super::Library;
use super::fitted::{EstimateLevel, FittedValues};
use crate::chem::{Canonicalizer, Keys, Molecule, Reader, SmilesError};
use crate::data::Substance;
use crate::groups::environment::{EnvironmentCounts, EnvironmentReader};
use crate::groups::{Breakdown, Breaker, Coverage, GroupCounts, SetId};
use crate::pure::{Estimates, Given, StructureFacts, estimate_some};
use crate::quantity::{
    Absent, Estimate, Flag, Flags, Property, PropertySet, REFERENCE_TEMPERATURE_K,
};

/// A molecule with its canonical keys, its groups in every set, and its facts.
#[derive(Clone, Debug, Default)]
pub struct Profile {
    /// The molecule.
    pub molecule: Molecule,
    /// Canonical keys.
    pub keys: Keys,
    /// Counts by set; index with [`SetId`].
    pub counts: [GroupCounts; SetId::ALL.len()],
    /// How far each set covers the molecule.
    pub coverage: Coverages,
    /// Atom environments, which the fitted estimates rest on, as far as those of the
    /// library's level do.
    pub environments: EnvironmentCounts,
    /// Facts that travel with the counts.
    pub facts: StructureFacts,
}

/// Coverage by set.
#[derive(Clone, Copy, Debug)]
pub struct Coverages([Coverage; SetId::ALL.len()]);

impl Default for Coverages {
    fn default() -> Self {
        Self([Coverage::Partial; SetId::ALL.len()])
    }
}

impl Coverages {
    /// The coverage by one set.
    pub fn of(&self, set: SetId) -> Coverage {
        self.0[set as usize]
    }
}

impl Profile {
    /// The counts in a set, if they are complete.
    ///
    /// # Errors
    ///
    /// That some atom is in no group; [`Profiler::gaps`] says which.
    pub fn complete_counts(&self, library: &Library, set: SetId) -> Result<&GroupCounts, Absent> {
        if self.coverage.of(set) == Coverage::Complete {
            Ok(&self.counts[set as usize])
        } else {
            Err(library.not_covered(set).clone())
        }
    }
}

/// Reads structures into profiles; holds the scratch memory, one per thread.
pub struct Profiler {
    reader: Reader,
    canonicalizer: Canonicalizer,
    breaker: Breaker,
    environments: EnvironmentReader,
}

impl Default for Profiler {
    fn default() -> Self {
        Self::new()
    }
}

impl Profiler {
    /// A profiler with empty scratch memory.
    pub fn new() -> Self {
        Self {
            reader: Reader::new(),
            canonicalizer: Canonicalizer::new(),
            breaker: Breaker::new(),
            environments: EnvironmentReader::new(),
        }
    }

    /// Reads a SMILES and breaks it down in every set.
    ///
    /// # Errors
    ///
    /// The line is no molecule that Groupsmith takes.
    pub fn profile(&mut self, library: &Library, smiles: &str) -> Result<Profile, SmilesError> {
        let mut profile = Profile::default();
        self.profile_into(library, smiles, &mut profile)?;
        Ok(profile)
    }

    /// The same into memory that is used again; after an error the profile is
    /// of no use.
    ///
    /// # Errors
    ///
    /// As [`profile`](Self::profile).
    pub fn profile_into(
        &mut self,
        library: &Library,
        smiles: &str,
        profile: &mut Profile,
    ) -> Result<(), SmilesError> {
        self.reader.read_into(smiles, &mut profile.molecule)?;
        let molecule = &profile.molecule;
        self.canonicalizer.keys_into(molecule, &mut profile.keys);
        match library.level().environments() {
            Some(order) => {
                self.environments
                    .counts_up_to_into(order, molecule, &mut profile.environments)
            }
            None => profile.environments.clear(),
        }
        self.breaker.load(molecule);
        for set in SetId::ALL {
            let counts = &mut profile.counts[set as usize];
            profile.coverage.0[set as usize] =
                self.breaker.counts(molecule, library.set(set), counts);
        }
        profile.facts =
            StructureFacts::new(molecule.composition(), molecule.molar_mass_kg_per_mol());
        profile.facts.associates = molecule.has_carboxyl();
        Ok(())
    }

    /// The breakdown in one set, with the place of every group.
    pub fn breakdown(&mut self, library: &Library, profile: &Profile, set: SetId) -> Breakdown {
        self.breaker.load(&profile.molecule);
        self.breaker.breakdown(&profile.molecule, library.set(set))
    }

    /// Why a set does not cover a molecule, in a chemist's words.
    pub fn gaps(&mut self, library: &Library, profile: &Profile, set: SetId) -> String {
        let breakdown = self.breakdown(library, profile, set);
        breakdown.gaps(&profile.molecule, library.set(set))
    }

    /// A reason for absence with the words for an uncovered part filled in.
    pub fn explained(&mut self, library: &Library, profile: &Profile, absent: &Absent) -> Absent {
        for set in SetId::ALL {
            if absent == library.not_covered(set) {
                let what = self.gaps(library, profile, set).into();
                return Absent::NotCovered {
                    set: set.id(),
                    what,
                };
            }
        }
        absent.clone()
    }
}

/// Measured data of a molecule.
#[derive(Clone, Copy, Debug)]
pub struct Known<'l> {
    /// The substance.
    pub substance: &'l Substance,
    /// Whether stereochemistry and isotopes are the same too.
    pub same_identity: bool,
}

/// Measured values that go before estimates; room for all without allocation.
pub(super) type GivenValues = SmallVec<[(Property, Estimate); 12]>;

/// The measured values of a substance at a temperature.
pub(super) fn measured_values(known: Option<Known<'_>>, temperature_k: f64) -> GivenValues {
    let Some(known) = known else {
        return GivenValues::new();
    };
    let flags = if known.same_identity {
        Flags::NONE
    } else {
        Flags::NONE.with(Flag::OtherStereoisomer)
    };
    Property::ALL
        .into_iter()
        .filter_map(|property| {
            let value = known.substance.measured(property, temperature_k)?.ok()?;
            Some((property, value.flagged(flags)))
        })
        .collect()
}

/// Every property of a molecule at a temperature, measured before estimated.
pub fn properties(
    library: &Library,
    profile: &Profile,
    known: Option<Known<'_>>,
    temperature_k: f64,
) -> Estimates {
    properties_with(library, profile, known, &[], temperature_k)
}

/// The same with measured values of the user's own, which go before those of
/// the tables: at their temperature, where the property depends on one. At
/// other temperatures the tables come first, and an own density is carried
/// over where they have none.
pub fn properties_with(
    library: &Library,
    profile: &Profile,
    known: Option<Known<'_>>,
    own: &[(Property, Estimate)],
    temperature_k: f64,
) -> Estimates {
    let given = |t: f64| given_values(measured_values(known, t), own, t);
    let mut fitted = FittedValues::default();
    let at_reference = given(REFERENCE_TEMPERATURE_K);
    fitted.add(library, profile, &at_reference, PropertySet::ALL);
    let given = given(temperature_k);
    properties_from(
        library,
        profile,
        given,
        &fitted,
        temperature_k,
        PropertySet::ALL,
    )
}

/// The properties asked for of a molecule at a temperature, from values given for it and
/// the fitted estimates; `asked` holds what they start from (see [`with_inputs`](crate::pure::with_inputs)).
pub(super) fn properties_from(
    library: &Library,
    profile: &Profile,
    mut given: GivenValues,
    fitted: &FittedValues,
    temperature_k: f64,
    asked: PropertySet,
) -> Estimates {
    let mut counts = profile.complete_counts(library, SetId::Joback);
    // what the fits leave out for its size is not for an older method either
    if library.level() != EstimateLevel::Joback && profile.environments.is_empty() {
        counts = Err(Absent::OutsideDomain {
            method: library.level().id(),
            what: "the molecule is larger than anything the method was fitted on",
        });
    }
    given.extend(fitted.values.iter().cloned());
    let mut some = estimate_some(
        library.methods(),
        counts.as_ref().map(|counts| *counts),
        &profile.facts,
        Given(&given),
        temperature_k,
        asked,
    );
    // where nothing else answers, the reason of the fit is the one that tells most
    for (property, reason) in &fitted.refused {
        let outcome = &mut some[*property as usize];
        if outcome.is_err() {
            *outcome = Err(reason.clone());
        }
    }
    some
}

/// Own values and those of the tables in the order in which they count.
pub(super) fn given_values(
    mut of_tables: GivenValues,
    own: &[(Property, Estimate)],
    temperature_k: f64,
) -> GivenValues {
    if own.is_empty() {
        return of_tables;
    }
    let distance_k = |value: &Estimate| {
        value
            .temperature_k
            .map_or(0.0, |t| (t - temperature_k).abs())
    };
    let is_here = |value: &Estimate| distance_k(value) <= SAME_TEMPERATURE_K;
    let mut given: GivenValues = own
        .iter()
        .filter(|(_, value)| is_here(value))
        .cloned()
        .collect();
    for (property, value) in &mut given {
        if property.depends_on_temperature() {
            value.temperature_k = Some(temperature_k);
        }
    }
    given.append(&mut of_tables);
    let mut elsewhere: SmallVec<[&(Property, Estimate); 4]> =
        own.iter().filter(|(_, value)| !is_here(value)).collect();
    elsewhere.sort_by(|(_, one), (_, other)| distance_k(one).total_cmp(&distance_k(other)));
    given.extend(elsewhere.into_iter().cloned());
    given
}

/// Two temperatures nearer than this are one, K.
pub(super) const SAME_TEMPERATURE_K: f64 = 0.01;
