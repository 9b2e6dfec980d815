//! The molecule of a line: its SMILES, or the substance it names.

use thiserror::Error;

use super::pool::{LineFault, PoolLine, Stated};
use crate::evaluate::{Library, NoSubstance};

/// A line whose molecule is settled.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Resolved<'a> {
    /// SMILES: as given, else of the substance.
    pub smiles: &'a str,
    /// Name: as given, else of the substance that a CAS number stands for.
    pub name: &'a str,
}

/// Why a line leads to no molecule.
#[derive(Clone, Debug, PartialEq, Error)]
pub enum Unresolved {
    /// The line itself cannot be used.
    #[error("the line {0}")]
    Fault(LineFault),
    /// Its name or CAS number is that of no single substance.
    #[error("{0}")]
    Name(NoSubstance),
}

impl Unresolved {
    /// A short name to count refusals by.
    pub const fn reason(&self) -> &'static str {
        match self {
            Self::Fault(fault) => fault.reason(),
            Self::Name(fault) => fault.reason(),
        }
    }
}

impl<'b> PoolLine<'b> {
    /// The molecule of the line; names are looked up in the library. Its SMILES
    /// is not read yet.
    ///
    /// # Errors
    ///
    /// Why the line leads to no molecule.
    pub fn resolved<'a>(&self, library: &'a Library) -> Result<Resolved<'a>, Unresolved>
    where
        'b: 'a,
    {
        let name = self.name;
        match self.molecule {
            Err(fault) => Err(Unresolved::Fault(fault.clone())),
            Ok(Stated::Smiles(smiles)) => Ok(Resolved { smiles, name }),
            Ok(Stated::Named { name, cas }) => {
                let substance = library.substance_of(name, cas).map_err(Unresolved::Name)?;
                let name = match name {
                    "" => substance.name(),
                    name => name,
                };
                let smiles = substance.smiles();
                Ok(Resolved { smiles, name })
            }
        }
    }
}
