//! Molecules by name and CAS number alone.

use thiserror::Error;

use super::Library;
use crate::data::{NameError, Substance};

/// A name or CAS number that leads to no single substance.
#[derive(Clone, Debug, PartialEq, Eq, Error)]
pub enum NoSubstance {
    /// Unknown, in use for several substances, or a CAS number that is none.
    #[error(transparent)]
    Name(#[from] NameError),
    /// Name and CAS number that belong to two substances.
    #[error(
        "`{name}` is {named}, but CAS number {cas} is that of {numbered}; leave the wrong one out"
    )]
    Contradiction {
        /// The name as given.
        name: String,
        /// The substance of that name.
        named: String,
        /// The CAS number as given.
        cas: String,
        /// The substance of that number.
        numbered: String,
    },
}

impl NoSubstance {
    /// A short name to count refusals by.
    pub const fn reason(&self) -> &'static str {
        match self {
            Self::Name(NameError::Unknown { .. }) => "unknown-name",
            Self::Name(NameError::Ambiguous { .. }) => "ambiguous-name",
            Self::Name(NameError::CasCheckDigit { .. }) => "cas-check-digit",
            Self::Name(NameError::UnknownCas { .. }) => "unknown-cas",
            Self::Contradiction { .. } => "name-against-cas",
        }
    }
}

impl Library {
    /// The substance of a name, a CAS number, or both; one of them may be empty.
    /// The number decides; a name that is not in the tables does not contradict it.
    ///
    /// # Errors
    ///
    /// Neither leads to a single substance, or both lead to two.
    pub fn substance_of(&self, name: &str, cas: &str) -> Result<&Substance, NoSubstance> {
        let substances = self.substances();
        if cas.is_empty() {
            return Ok(substances.find(name)?);
        }
        let numbered = substances.find(cas)?;
        match substances.find(name) {
            Ok(named) if !std::ptr::eq(named, numbered) => Err(NoSubstance::Contradiction {
                name: name.to_owned(),
                named: named.name().to_string(),
                cas: cas.to_owned(),
                numbered: numbered.name().to_string(),
            }),
            _ => Ok(numbered),
        }
    }
}
