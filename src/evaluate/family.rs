//! The chemical family of a molecule, and its relatives among the substances.

use std::sync::Arc;

use super::{Library, Profile, Profiler};
use crate::data::Substance;
use crate::groups::{Coverage, GroupCounts, SetId};

/// The family of a molecule.
#[derive(Clone, Debug)]
pub struct Family<'l> {
    /// Its name in the list of substances.
    pub name: Arc<str>,
    /// How it was found, in words.
    pub how: String,
    /// The other substances of the family, in the order of the list.
    pub relatives: Vec<&'l Substance>,
}

/// Kinds of functional groups that a molecule has: one bit for each.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
struct Kinds(u64);

impl Kinds {
    /// From the groups of Joback and Reid, numbered as in the paper. Saturated
    /// chains (1 to 4) are no functional group; groups that differ in their
    /// hydrogens only are one kind: double bonds, triple bonds, saturated rings,
    /// unsaturated rings.
    fn of(counts: &GroupCounts) -> Self {
        let bits = counts.iter().fold(0, |bits, (number, _)| {
            let kind = match number {
                1..=4 => return bits,
                5..=8 => 5,
                9..=10 => 9,
                11..=13 => 11,
                14..=15 => 14,
                other => other,
            };
            bits | 1 << kind
        });
        Self(bits)
    }
}

/// Families of the substances of a library.
#[derive(Debug)]
pub struct Families<'l> {
    library: &'l Library,
    /// Substances that have a family and whose groups are complete.
    kinds: Vec<(Kinds, &'l Substance)>,
}

impl<'l> Families<'l> {
    /// Breaks down every substance of the library that has a family.
    pub fn new(library: &'l Library, profiler: &mut Profiler) -> Self {
        let with_family = library
            .substances()
            .iter()
            .filter(|one| one.family().is_some());
        let kinds = with_family.filter_map(|substance| {
            let profile = profiler.profile(library, substance.smiles()).ok()?;
            Some((kinds(&profile)?, substance))
        });
        Self {
            library,
            kinds: kinds.collect(),
        }
    }

    /// The family of a molecule: the one it has in the list, else the one that
    /// more than half of the substances with the same kinds of functional
    /// groups have.
    ///
    /// # Errors
    ///
    /// Why none fits, as a sentence.
    pub fn of(&self, profile: &Profile) -> Result<Family<'l>, String> {
        let known = self
            .library
            .known(&profile.keys)
            .map(|known| known.substance);
        if let Some(substance) = known
            && let Some(family) = substance.family()
        {
            let how = format!("{} is in the list", substance.name());
            return Ok(self.family(family, how, Some(substance)));
        }
        let Some(own) = kinds(profile) else {
            return Err(
                "no family fits: the groups of Joback and Reid do not cover the molecule".into(),
            );
        };
        let alike: Vec<&str> = self
            .kinds
            .iter()
            .filter(|(kinds, _)| *kinds == own)
            .filter_map(|(_, substance)| substance.family())
            .collect();
        let mut families: Vec<(usize, &str)> = Vec::new();
        for family in &alike {
            match families.iter_mut().find(|(_, known)| known == family) {
                Some((count, _)) => *count += 1,
                None => families.push((1, family)),
            }
        }
        let most = families.iter().copied().max_by_key(|(count, _)| *count);
        match most {
            None => Err(
                "no family fits: no substance of the list has the same functional groups".into(),
            ),
            Some((count, family)) if 2 * count > alike.len() => {
                let how = format!(
                    "{count} of the {} substances with the same functional groups",
                    alike.len()
                );
                Ok(self.family(family, how, known))
            }
            Some(_) => {
                let names: Vec<&str> = families.iter().map(|(_, name)| *name).collect();
                Err(format!(
                    "no family fits: substances with the same functional groups are {}",
                    names.join(", ")
                ))
            }
        }
    }

    fn family(&self, name: &str, how: String, but: Option<&Substance>) -> Family<'l> {
        let is_other = |one: &&Substance| but.is_none_or(|but| !std::ptr::eq(*one, but));
        let all = self.library.substances().iter();
        Family {
            name: name.into(),
            how,
            relatives: all
                .filter(|one| one.family() == Some(name))
                .filter(is_other)
                .collect(),
        }
    }
}

/// The kinds of functional groups; `None` where some atom is in no group.
fn kinds(profile: &Profile) -> Option<Kinds> {
    let is_complete = profile.coverage.of(SetId::Joback) == Coverage::Complete;
    is_complete.then(|| Kinds::of(&profile.counts[SetId::Joback as usize]))
}
