//! Faults in a pattern.

use std::fmt;
use std::ops::Range;

/// What is wrong at one place of a pattern.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct PatternFault {
    /// Bytes of the pattern it concerns.
    pub span: Range<usize>,
    /// What is wrong there.
    pub kind: PatternFaultKind,
}

/// The kinds of faults a pattern can have.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum PatternFaultKind {
    /// Nothing where an atom has to stand.
    AtomExpected,
    /// A character that the language does not know at this place.
    UnknownCharacter,
    /// An element that Groupsmith does not read, or one without an aromatic form.
    UnknownElement,
    /// A number beyond what the test can be true for.
    NumberOutOfRange,
    /// A bracket, brace or parenthesis without its partner.
    Unclosed,
    /// A ring digit that occurs only once.
    OpenRing,
    /// A ring bond from an atom to itself or to an atom it is already bonded to.
    DoubleBonded,
    /// Bond signs that exclude one another, or stand in a ring twice and differ.
    ContradictoryBond,
    /// More than 32 atoms.
    TooManyAtoms,
    /// `$(…)` nested deeper than three.
    TooDeep,
    /// No atom can pass the tests.
    Unsatisfiable,
}

impl PatternFaultKind {
    /// How to mend it.
    pub const fn remedy(self) -> &'static str {
        match self {
            Self::AtomExpected => "put an atom here, such as `C`, `*` or `[CH2]`",
            Self::UnknownCharacter => {
                "see the pattern reference; inside brackets H, D, X, R, r, #, +, -, a, A, $(…) and elements are known"
            }
            Self::UnknownElement => {
                "elements are H B C N O F Si P S Cl Br I, aromatic ones c n o s p"
            }
            Self::NumberOutOfRange => "H and D go from 0 to 4, X from 0 to 6, r from 3 to 8",
            Self::Unclosed => "close what was opened here",
            Self::OpenRing => "write the same digit at the other end of the ring bond",
            Self::DoubleBonded => "close rings between two atoms that are not bonded yet",
            Self::ContradictoryBond => "keep one of the signs",
            Self::TooManyAtoms => "a pattern has at most 32 atoms",
            Self::TooDeep => "nest `$(…)` at most three deep",
            Self::Unsatisfiable => "remove one of the tests that exclude each other",
        }
    }
}

impl fmt::Display for PatternFaultKind {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(match self {
            Self::AtomExpected => "an atom is missing",
            Self::UnknownCharacter => "this is not part of the pattern language",
            Self::UnknownElement => "unknown element",
            Self::NumberOutOfRange => "number out of range",
            Self::Unclosed => "this is never closed",
            Self::OpenRing => "this ring bond has no other end",
            Self::DoubleBonded => "these atoms are already bonded, or are one atom",
            Self::ContradictoryBond => "these bond signs exclude each other",
            Self::TooManyAtoms => "too many atoms",
            Self::TooDeep => "environments are nested too deep",
            Self::Unsatisfiable => "no atom passes these tests",
        })
    }
}

impl fmt::Display for PatternFault {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(
            f,
            "character {}: {}; {}",
            self.span.start + 1,
            self.kind,
            self.kind.remedy()
        )
    }
}
