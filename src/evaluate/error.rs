//! Why a brief or a molecule cannot be bound to tables and data.

use thiserror::Error;

use crate::brief::Place;
use crate::chem::SmilesError;
use crate::data::NameError;
use crate::groups::pattern::PatternFault;

/// A text that is neither a known name nor a readable SMILES.
#[derive(Clone, Debug, PartialEq, Error)]
#[error("{}", told(text, smiles, name))]
pub struct UnknownMolecule {
    /// The text.
    pub text: String,
    /// Why it is no SMILES.
    pub smiles: SmilesError,
    /// Why it is no name.
    pub name: NameError,
}

/// Characters beyond which a text is no name anybody mistyped.
const LONGEST_NAME: usize = 100;

fn told(text: &str, smiles: &SmilesError, name: &NameError) -> String {
    match text.char_indices().nth(LONGEST_NAME) {
        None => format!("`{text}` is neither a SMILES ({smiles}) nor a known name ({name})"),
        Some((end, _)) => format!("`{}…` is no SMILES ({smiles})", &text[..end]),
    }
}

/// A fault of a brief that shows only beside the tables and data.
#[derive(Clone, Debug, PartialEq)]
pub struct PlanFault {
    /// Where in the brief; `None` where it comes from the command line.
    pub place: Option<Place>,
    /// What is wrong.
    pub cause: PlanCause,
}

/// What is wrong with a brief beside the tables and data.
#[derive(Clone, Debug, PartialEq, Error)]
pub enum PlanCause {
    /// A component that is not known.
    #[error(transparent)]
    Component(#[from] UnknownMolecule),
    /// Two components that are one molecule.
    #[error("components {first} and {second} are the same molecule; name each once")]
    SameComponent {
        /// Position of the first, from 1.
        first: usize,
        /// Position of the second, from 1.
        second: usize,
    },
    /// A group set that does not exist.
    #[error("there is no group set `{set}`; there are unifac, unifac-dortmund and joback")]
    NoSet {
        /// The name.
        set: String,
    },
    /// A group number that the set does not have.
    #[error("group set {set} has no group {number}; `groupsmith tables groups {set}` lists them")]
    NoGroup {
        /// The set.
        set: &'static str,
        /// The number.
        number: u16,
    },
    /// A pattern that does not compile.
    #[error("the pattern `{pattern}` is not sound: {}", faults.iter().map(ToString::to_string).collect::<Vec<_>>().join("; "))]
    Pattern {
        /// The pattern.
        pattern: String,
        /// What is wrong with it.
        faults: Vec<PatternFault>,
    },
    /// No temperature to evaluate the mixture at.
    #[error(
        "the temperature of the mixture cannot be found from its pressure: {reason}; give `temperature` in [mixture]"
    )]
    NoTemperature {
        /// Why not.
        reason: String,
    },
    /// Something the model cannot do for the mixture as such.
    #[error("{reason}")]
    Mixture {
        /// What.
        reason: String,
    },
}
