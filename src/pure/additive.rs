//! Words for the two halves of an additive method.

use super::joback::Term;

/// How a closing function answers when one of its inputs rises and the others
/// stay, wherever it has a value at all.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Growth {
    /// It never falls.
    Increasing,
    /// It never rises.
    Decreasing,
    /// It falls up to `turn` and rises beyond.
    FallsThenRises {
        /// Value of the input at the turn.
        turn: f64,
    },
    /// Nothing is promised.
    Undirected {
        /// Why.
        reason: &'static str,
    },
}

/// What a closing function takes.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Input {
    /// A linear sum over the counts.
    Sum(Term),
    /// Number of atoms, hydrogens included: itself linear in the counts.
    Atoms,
    /// Molar mass: itself linear in the counts.
    MolarMass,
    /// Normal boiling point, estimated or measured.
    BoilingPoint,
}
