//! The substances that pair tables name, and which of them a molecule is.

use std::sync::Arc;

use rustc_hash::FxHashMap;
use smallvec::SmallVec;

use crate::chem::Keys;
use crate::quantity::{Flag, Flags};

/// A substance that stands in some pair.
#[derive(Clone, Debug)]
pub(super) struct Member {
    pub(super) name: Arc<str>,
    full: Box<str>,
    /// Whether it states neither stereochemistry nor isotopes.
    plain: bool,
}

/// Every substance of the pair tables, in the order in which they were named.
#[derive(Debug, Default)]
pub(super) struct Members {
    all: Vec<Member>,
    by_constitution: FxHashMap<Box<str>, SmallVec<[u32; 2]>>,
}

/// The substances of the pair tables that a molecule answers to: itself before
/// those of the same constitution. Mostly there are none.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct PairIdentity(SmallVec<[(u32, Flags); 2]>);

impl PairIdentity {
    /// Whether no pair names the molecule.
    pub fn is_empty(&self) -> bool {
        self.0.is_empty()
    }

    pub(super) fn members(&self) -> impl Iterator<Item = (u32, Flags)> {
        self.0.iter().copied()
    }
}

impl Members {
    pub(super) fn is_empty(&self) -> bool {
        self.all.is_empty()
    }

    pub(super) fn name(&self, member: u32) -> &Arc<str> {
        &self.all[member as usize].name
    }

    /// The position of a substance, added under this name if it is new.
    pub(super) fn add(&mut self, name: &Arc<str>, keys: &Keys) -> u32 {
        let alike = self
            .by_constitution
            .entry(keys.constitution.as_str().into())
            .or_default();
        let known = alike
            .iter()
            .find(|&&member| *self.all[member as usize].full == *keys.full);
        if let Some(&member) = known {
            return member;
        }
        let member = self.all.len() as u32;
        alike.push(member);
        self.all.push(Member {
            name: Arc::clone(name),
            full: keys.full.as_str().into(),
            plain: keys.full == keys.constitution,
        });
        member
    }

    /// Costs one look-up; where no pair names the constitution, nothing more.
    pub(super) fn identify(&self, keys: &Keys) -> PairIdentity {
        let Some(alike) = self.by_constitution.get(keys.constitution.as_str()) else {
            return PairIdentity::default();
        };
        let mut found: SmallVec<[(u32, Flags); 2]> = alike
            .iter()
            .map(|&member| {
                let same = *self.all[member as usize].full == *keys.full;
                let flags = match same {
                    true => Flags::NONE,
                    false => Flags::NONE.with(Flag::OtherStereoisomer),
                };
                (member, flags)
            })
            .collect();
        // Itself, then what states no stereochemistry, then in the order of the tables.
        found.sort_by_key(|&(member, flags)| {
            (!flags.is_empty(), !self.all[member as usize].plain, member)
        });
        PairIdentity(found)
    }
}
