//! Why a line of SMILES is refused.

use thiserror::Error;

use super::Element;

/// A refused line: the place and what is wrong with it.
///
/// `column` counts characters from 1. Where a fault belongs to the line as a
/// whole (net charge), it is the column of the first atom that shows it.
#[derive(Clone, Debug, PartialEq, Eq, Error)]
#[error("column {column}: {fault}")]
pub struct SmilesError {
    /// Column of the fault, in characters from 1.
    pub column: usize,
    /// What is wrong.
    pub fault: SmilesFault,
}

impl SmilesError {
    /// Short machine name of the fault, for counting refused lines.
    pub const fn reason(&self) -> &'static str {
        self.fault.reason()
    }
}

/// What can be wrong with a line of SMILES.
#[derive(Clone, Debug, PartialEq, Eq, Error)]
pub enum SmilesFault {
    /// Nothing in the line.
    #[error("the line holds no SMILES; write one, for example CCO for ethanol")]
    Empty,
    /// More bytes than a line may have.
    #[error("the line has {bytes} bytes and at most {limit} are read; shorten it")]
    TooLong {
        /// Bytes in the line.
        bytes: usize,
        /// The limit.
        limit: usize,
    },
    /// More atoms than a molecule may have.
    #[error("the molecule has more than {limit} heavy atoms; larger ones are not read")]
    TooManyAtoms {
        /// The limit.
        limit: usize,
    },
    /// A character that cannot stand at its place.
    #[error("`{found}` cannot stand here; {remedy}")]
    Character {
        /// The character.
        found: char,
        /// How to mend it.
        remedy: &'static str,
    },
    /// The line ends too early.
    #[error("the line ends too early; {remedy}")]
    EndOfLine {
        /// How to mend it.
        remedy: &'static str,
    },
    /// More ring bonds open at once than the reader can tell apart.
    #[error("all ring bond numbers from 10 to 99 are in use; number the ring bonds anew")]
    RingNumbers,
    /// A wildcard atom.
    #[error("`*` stands for any atom; write the atom that is meant")]
    Wildcard,
    /// An element outside [`Element`].
    #[error("element {symbol} is not supported; H B C N O F Si P S Cl Br I are")]
    Element {
        /// Symbol as read.
        symbol: String,
    },
    /// An isotope that the table of atomic weights does not list.
    #[error(
        "{element}-{mass_number} is not among the isotopes of the table of atomic weights; leave the mass number out"
    )]
    Isotope {
        /// Element.
        element: Element,
        /// Mass number as read.
        mass_number: u16,
    },
    /// A second component.
    #[error("a second component begins here; write one molecule a line")]
    Components,
    /// A ring bond that is never closed.
    #[error("ring bond {number} is opened but not closed; write the number at a second atom")]
    OpenRing {
        /// Ring bond number.
        number: u8,
    },
    /// A ring bond from an atom to itself.
    #[error("ring bond {number} joins an atom to itself; move one end to another atom")]
    SelfRing {
        /// Ring bond number.
        number: u8,
    },
    /// A ring bond between atoms that are bonded already.
    #[error("ring bond {number} joins two atoms that are bonded already; remove one of the bonds")]
    DoubledRing {
        /// Ring bond number.
        number: u8,
    },
    /// A ring bond with two different orders.
    #[error(
        "ring bond {number} has one order where it opens and another where it closes; state it once"
    )]
    RingOrder {
        /// Ring bond number.
        number: u8,
    },
    /// A quadruple bond.
    #[error("quadruple bonds are not supported; use `-`, `=`, `#` or `:`")]
    QuadrupleBond,
    /// Number of bonds that the element does not have.
    #[error("{}", valence_sentence(*element, *charge, *bonds))]
    Valence {
        /// Element.
        element: Element,
        /// Formal charge.
        charge: i8,
        /// Sum of bond orders, hydrogens included.
        bonds: u8,
    },
    /// A bracket atom short of hydrogens.
    #[error(
        "{} with {bonds} bond{} is a radical; state all hydrogens it has",
        charged_name(*element, *charge),
        if *bonds == 1 { "" } else { "s" }
    )]
    Radical {
        /// Element.
        element: Element,
        /// Formal charge.
        charge: i8,
        /// Sum of bond orders, hydrogens included.
        bonds: u8,
    },
    /// A charge that the element does not carry in a neutral molecule.
    #[error("{element} with charge {charge:+} is not supported")]
    Charge {
        /// Element.
        element: Element,
        /// Formal charge.
        charge: i8,
    },
    /// The molecule is an ion.
    #[error("the molecule has net charge {charge:+}; write the neutral molecule")]
    NetCharge {
        /// Net charge.
        charge: i32,
    },
    /// A lower-case atom outside every ring.
    #[error("lower-case (aromatic) atom outside a ring; write it upper-case")]
    AromaticOutsideRing,
    /// Lower-case atoms without alternating single and double bonds.
    #[error(
        "the aromatic ring has no arrangement of alternating double bonds; a hydrogen may be missing, for example [nH] in pyrrole"
    )]
    NoKekuleForm,
    /// Lower-case atoms of a ring that is not aromatic, with a choice of double bonds.
    #[error(
        "this ring is not aromatic and its double bonds could stand in more than one place; write it upper-case with its double bonds"
    )]
    AmbiguousKekuleForm,
    /// Direction marks that contradict each other.
    #[error(
        "the marks `/` and `\\` around this double bond contradict each other; correct or remove them"
    )]
    Direction,
}

impl SmilesFault {
    /// Short machine name of the fault.
    pub const fn reason(&self) -> &'static str {
        match self {
            Self::Empty => "empty",
            Self::TooLong { .. } => "too-long",
            Self::TooManyAtoms { .. } => "too-many-atoms",
            Self::Character { .. } | Self::EndOfLine { .. } => "syntax",
            Self::RingNumbers => "ring-numbers",
            Self::Wildcard => "wildcard",
            Self::Element { .. } => "unsupported-element",
            Self::Isotope { .. } => "unsupported-isotope",
            Self::Components => "several-components",
            Self::OpenRing { .. } => "open-ring-bond",
            Self::SelfRing { .. } => "self-ring-bond",
            Self::DoubledRing { .. } => "doubled-ring-bond",
            Self::RingOrder { .. } => "ring-bond-order",
            Self::QuadrupleBond => "quadruple-bond",
            Self::Valence { .. } => "impossible-valence",
            Self::Radical { .. } => "radical",
            Self::Charge { .. } => "unsupported-charge",
            Self::NetCharge { .. } => "net-charge",
            Self::AromaticOutsideRing => "aromatic-outside-ring",
            Self::NoKekuleForm => "no-kekule-form",
            Self::AmbiguousKekuleForm => "ambiguous-kekule-form",
            Self::Direction => "contradicting-directions",
        }
    }
}

fn charged_name(element: Element, charge: i8) -> String {
    if charge == 0 {
        element.name().to_owned()
    } else {
        format!("{} with charge {charge:+}", element.name())
    }
}

fn valence_sentence(element: Element, charge: i8, bonds: u8) -> String {
    let plural = if bonds == 1 { "" } else { "s" };
    let charge = if charge == 0 {
        "no charge".to_owned()
    } else {
        format!("charge {charge:+}")
    };
    format!(
        "{} with {bonds} bond{plural} and {charge} is not a possible valence",
        element.name()
    )
}
