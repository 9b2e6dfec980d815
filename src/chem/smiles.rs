//! The text of a line: purr reads it, a follower of ours writes down atoms and
//! bonds as they stand. Nothing of purr leaves this file.
//!
//! Known edges of purr 0.9 and what is done about them: it recurses once per
//! chain atom, so the line is limited and long ones run on a grown stack; its
//! own builder panics on some stereo classes and lets self bonds and doubled
//! bonds pass, so it is not used; it takes ring number 73 for 74, so lines that
//! use both are renumbered first.

use std::borrow::Cow;

use purr::feature::{AtomKind, BondKind, BracketAromatic, BracketSymbol, Configuration, Rnum};
use purr::read::{Error, Trace, read};
use purr::walk::Follower;

use super::{Element, SmilesError, SmilesFault};

/// Longest line that is read, in bytes.
pub const MAX_LINE_BYTES: usize = 8 * 1024;

/// Most heavy atoms of a molecule.
pub const MAX_HEAVY_ATOMS: usize = 999;

/// No atom, no bond.
pub(super) const NONE: u32 = u32::MAX;

/// Stack set aside for one character of a line; a test measures what purr takes
/// (144 bytes for each atom of a chain, built for development).
const STACK_PER_CHARACTER: usize = 1024;

/// Stack for everything else that runs below the reader.
const STACK_BASE: usize = 128 * 1024;

/// An atom as it stands in the line.
#[derive(Clone, Copy, Debug)]
pub(super) struct LineAtom {
    pub(super) element: Element,
    pub(super) charge: i8,
    /// Hydrogens inside the bracket.
    pub(super) hydrogens: u8,
    /// Mass number, 0 where none is stated.
    pub(super) isotope: u16,
    pub(super) bracket: bool,
    pub(super) lower_case: bool,
    pub(super) turn: Turn,
}

/// Tetrahedral mark of an atom.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Turn {
    None,
    /// `@`: the others run counterclockwise, seen from the first neighbor.
    Counterclockwise,
    /// `@@`.
    Clockwise,
}

/// Bond symbol of the line.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum LineOrder {
    Elided,
    Single,
    Double,
    Triple,
    Aromatic,
}

/// A bond as it stands in the line.
#[derive(Clone, Copy, Debug)]
pub(super) struct LineBond {
    /// From, to; a ring bond runs from where it opens to where it closes.
    pub(super) atoms: [u32; 2],
    pub(super) order: LineOrder,
    /// `/` +1, `\` −1, read from the first atom to the second; 0 without.
    pub(super) direction: i8,
    /// Place among the bonds of each end: ascending in the order of the text.
    pub(super) places: [u32; 2],
    /// For ring bonds which ring number of the line closes it, else [`NONE`].
    pub(super) ring_event: u32,
}

/// Where in the line a fault lies.
#[derive(Clone, Copy, Debug)]
pub(super) enum Place {
    /// At an atom, counted in the line.
    Atom(u32),
    /// At a ring number, counted in the line.
    RingNumber(u32),
}

/// A fault whose column is not known yet.
pub(super) type Fault = (Place, SmilesFault);

/// Atoms and bonds of a line.
#[derive(Debug)]
pub(super) struct Line {
    pub(super) atoms: Vec<LineAtom>,
    pub(super) bonds: Vec<LineBond>,
    pub(super) has_hydrogen_atoms: bool,
    pub(super) has_turns: bool,
    pub(super) has_directions: bool,
    pub(super) has_lower_case: bool,
    pub(super) has_charges: bool,
    stack: Vec<u32>,
    /// Open bond of each ring number.
    open: [u32; 100],
    open_count: u32,
    ring_events: u32,
    places: u32,
    heavy_atoms: usize,
    fault: Option<Fault>,
}

impl Default for Line {
    fn default() -> Self {
        Self {
            atoms: Vec::new(),
            bonds: Vec::new(),
            has_hydrogen_atoms: false,
            has_turns: false,
            has_directions: false,
            has_lower_case: false,
            has_charges: false,
            stack: Vec::new(),
            open: [NONE; 100],
            open_count: 0,
            ring_events: 0,
            places: 0,
            heavy_atoms: 0,
            fault: None,
        }
    }
}

impl Line {
    /// Reads a line; what is there before is forgotten.
    pub(super) fn read(&mut self, text: &str) -> Result<(), SmilesError> {
        if text.is_empty() {
            return Err(SmilesError {
                column: 1,
                fault: SmilesFault::Empty,
            });
        }
        if text.len() > MAX_LINE_BYTES {
            return Err(SmilesError {
                column: 1,
                fault: SmilesFault::TooLong {
                    bytes: text.len(),
                    limit: MAX_LINE_BYTES,
                },
            });
        }
        self.clear();
        let unambiguous = renumber(text)?;
        match on_deep_stack(text, || read(&unambiguous, self, None)) {
            Ok(()) => {}
            // A fault found on the way lies left of a syntax fault.
            Err(_) if self.fault.is_some() => {}
            Err(error) => return Err(syntax_error(text, &error)),
        }
        if self.fault.is_none() && self.open_count > 0 {
            let event = self
                .open
                .iter()
                .filter(|&&bond| bond != NONE)
                .map(|&bond| self.bonds[bond as usize].ring_event)
                .min()
                .unwrap_or(0);
            self.fault = Some((
                Place::RingNumber(event),
                SmilesFault::OpenRing { number: 0 },
            ));
        }
        match self.fault.take() {
            None => Ok(()),
            Some(fault) => Err(locate(text, fault)),
        }
    }

    fn clear(&mut self) {
        self.atoms.clear();
        self.bonds.clear();
        self.has_hydrogen_atoms = false;
        self.has_turns = false;
        self.has_directions = false;
        self.has_lower_case = false;
        self.has_charges = false;
        self.stack.clear();
        if self.open_count > 0 {
            self.open.fill(NONE);
        }
        self.open_count = 0;
        self.ring_events = 0;
        self.places = 0;
        self.heavy_atoms = 0;
        self.fault = None;
    }

    fn push(&mut self, kind: &AtomKind) {
        let index = self.atoms.len() as u32;
        self.stack.push(index);
        let atom = match line_atom(kind) {
            Ok(atom) => atom,
            Err(fault) => {
                self.fault = Some((Place::Atom(index), fault));
                return;
            }
        };
        if atom.element == Element::H {
            self.has_hydrogen_atoms = true;
        } else {
            self.heavy_atoms += 1;
        }
        self.has_lower_case |= atom.lower_case;
        self.has_turns |= atom.turn != Turn::None;
        self.has_charges |= atom.charge != 0;
        self.atoms.push(atom);
        if self.heavy_atoms > MAX_HEAVY_ATOMS {
            let fault = SmilesFault::TooManyAtoms {
                limit: MAX_HEAVY_ATOMS,
            };
            self.fault = Some((Place::Atom(index), fault));
        }
    }

    fn next_place(&mut self) -> u32 {
        self.places += 1;
        self.places
    }

    fn bond_symbol(&mut self, kind: &BondKind, place: Place) -> Option<(LineOrder, i8)> {
        Some(match kind {
            BondKind::Elided => (LineOrder::Elided, 0),
            BondKind::Single => (LineOrder::Single, 0),
            BondKind::Double => (LineOrder::Double, 0),
            BondKind::Triple => (LineOrder::Triple, 0),
            BondKind::Aromatic => (LineOrder::Aromatic, 0),
            BondKind::Up => {
                self.has_directions = true;
                (LineOrder::Single, 1)
            }
            BondKind::Down => {
                self.has_directions = true;
                (LineOrder::Single, -1)
            }
            BondKind::Quadruple => {
                self.fault = Some((place, SmilesFault::QuadrupleBond));
                return None;
            }
        })
    }

    /// Closes an open ring bond at `atom`.
    fn close(&mut self, bond: u32, atom: u32, (order, direction): (LineOrder, i8), event: u32) {
        let place = self.next_place();
        let bond = &mut self.bonds[bond as usize];
        bond.ring_event = event;
        let fault = if bond.atoms[0] == atom {
            Some(SmilesFault::SelfRing { number: 0 })
        } else {
            match (bond.order, order) {
                (LineOrder::Elided, _) => {
                    bond.order = order;
                    bond.direction = -direction;
                    None
                }
                (_, LineOrder::Elided) => None,
                (here, there) if here == there => {
                    // Both ends may state a direction if it is the same one.
                    let clash =
                        bond.direction != 0 && direction != 0 && bond.direction == direction;
                    if bond.direction == 0 {
                        bond.direction = -direction;
                    }
                    clash.then_some(SmilesFault::RingOrder { number: 0 })
                }
                _ => Some(SmilesFault::RingOrder { number: 0 }),
            }
        };
        bond.atoms[1] = atom;
        bond.places[1] = place;
        if let Some(fault) = fault {
            self.fault = Some((Place::RingNumber(event), fault));
        }
    }
}

impl Follower for Line {
    fn root(&mut self, kind: AtomKind) {
        if self.fault.is_some() {
            return;
        }
        if self.atoms.is_empty() {
            self.push(&kind);
        } else {
            let place = Place::Atom(self.atoms.len() as u32);
            self.fault = Some((place, SmilesFault::Components));
        }
    }

    fn extend(&mut self, bond_kind: BondKind, atom_kind: AtomKind) {
        if self.fault.is_some() {
            return;
        }
        let parent = *self.stack.last().expect("purr roots a chain first");
        let atom = self.atoms.len() as u32;
        let Some((order, direction)) = self.bond_symbol(&bond_kind, Place::Atom(atom)) else {
            return;
        };
        self.push(&atom_kind);
        let place = self.next_place();
        self.bonds.push(LineBond {
            atoms: [parent, atom],
            order,
            direction,
            places: [place, place],
            ring_event: NONE,
        });
    }

    fn join(&mut self, bond_kind: BondKind, number: Rnum) {
        let event = self.ring_events;
        self.ring_events += 1;
        if self.fault.is_some() {
            return;
        }
        let atom = *self.stack.last().expect("purr roots a chain first");
        let Some(symbol) = self.bond_symbol(&bond_kind, Place::RingNumber(event)) else {
            return;
        };
        let slot = number as usize;
        let open = self.open[slot];
        if open == NONE {
            let place = self.next_place();
            self.open[slot] = self.bonds.len() as u32;
            self.open_count += 1;
            self.bonds.push(LineBond {
                atoms: [atom, NONE],
                order: symbol.0,
                direction: symbol.1,
                places: [place, NONE],
                ring_event: event,
            });
        } else {
            self.open[slot] = NONE;
            self.open_count -= 1;
            self.close(open, atom, symbol, event);
        }
    }

    fn pop(&mut self, depth: usize) {
        if self.fault.is_none() {
            let left = self.stack.len().saturating_sub(depth);
            self.stack.truncate(left);
        }
    }
}

/// Runs the reader where its recursion has room.
fn on_deep_stack<T>(text: &str, run: impl FnOnce() -> T) -> T {
    let needed = STACK_BASE + STACK_PER_CHARACTER * text.len();
    stacker::maybe_grow(needed, needed, run)
}

/// The line with ring number 73 renamed where 74 is used beside it.
fn renumber(text: &str) -> Result<Cow<'_, str>, SmilesError> {
    if !text.contains('%') || !text.contains("%73") || !text.contains("%74") {
        return Ok(Cow::Borrowed(text));
    }
    let free = (10..=99)
        .map(|number| format!("%{number}"))
        .find(|number| !text.contains(number.as_str()));
    match free {
        Some(free) => Ok(Cow::Owned(text.replace("%73", &free))),
        None => Err(SmilesError {
            column: text.find("%73").map_or(1, |byte| column_of(text, byte)),
            fault: SmilesFault::RingNumbers,
        }),
    }
}

fn column_of(text: &str, byte: usize) -> usize {
    text[..byte].chars().count() + 1
}

fn line_atom(kind: &AtomKind) -> Result<LineAtom, SmilesFault> {
    use purr::feature::{Aliphatic, Aromatic};
    let bare = |element, lower_case| {
        Ok(LineAtom {
            element,
            charge: 0,
            hydrogens: 0,
            isotope: 0,
            bracket: false,
            lower_case,
            turn: Turn::None,
        })
    };
    let unsupported = |symbol: String| Err(SmilesFault::Element { symbol });
    match kind {
        AtomKind::Star => Err(SmilesFault::Wildcard),
        AtomKind::Aliphatic(symbol) => match symbol {
            Aliphatic::B => bare(Element::B, false),
            Aliphatic::C => bare(Element::C, false),
            Aliphatic::N => bare(Element::N, false),
            Aliphatic::O => bare(Element::O, false),
            Aliphatic::S => bare(Element::S, false),
            Aliphatic::P => bare(Element::P, false),
            Aliphatic::F => bare(Element::F, false),
            Aliphatic::Cl => bare(Element::Cl, false),
            Aliphatic::Br => bare(Element::Br, false),
            Aliphatic::I => bare(Element::I, false),
            Aliphatic::At | Aliphatic::Ts => unsupported(symbol.to_string()),
        },
        AtomKind::Aromatic(symbol) => bare(
            match symbol {
                Aromatic::B => Element::B,
                Aromatic::C => Element::C,
                Aromatic::N => Element::N,
                Aromatic::O => Element::O,
                Aromatic::P => Element::P,
                Aromatic::S => Element::S,
            },
            true,
        ),
        AtomKind::Bracket {
            isotope,
            symbol,
            configuration,
            hcount,
            charge,
            map: _,
        } => {
            let (element, lower_case) = match symbol {
                BracketSymbol::Star => return Err(SmilesFault::Wildcard),
                BracketSymbol::Element(symbol) => match bracket_element(symbol) {
                    Some(element) => (element, false),
                    None => return unsupported(symbol.to_string()),
                },
                BracketSymbol::Aromatic(symbol) => match symbol {
                    BracketAromatic::B => (Element::B, true),
                    BracketAromatic::C => (Element::C, true),
                    BracketAromatic::N => (Element::N, true),
                    BracketAromatic::O => (Element::O, true),
                    BracketAromatic::S => (Element::S, true),
                    BracketAromatic::P => (Element::P, true),
                    BracketAromatic::Se | BracketAromatic::As => {
                        return unsupported(symbol.to_string());
                    }
                },
            };
            Ok(LineAtom {
                element,
                charge: charge.as_ref().map_or(0, Into::into),
                hydrogens: hcount.as_ref().map_or(0, Into::into),
                isotope: isotope.as_ref().map_or(0, Into::into),
                bracket: true,
                lower_case,
                turn: match configuration {
                    Some(Configuration::TH1) => Turn::Counterclockwise,
                    Some(Configuration::TH2) => Turn::Clockwise,
                    // Allene, square-planar, bipyramidal and octahedral
                    // classes are read and not kept.
                    _ => Turn::None,
                },
            })
        }
    }
}

fn bracket_element(symbol: &purr::feature::Element) -> Option<Element> {
    use purr::feature::Element as Symbol;
    Some(match symbol {
        Symbol::H => Element::H,
        Symbol::B => Element::B,
        Symbol::C => Element::C,
        Symbol::N => Element::N,
        Symbol::O => Element::O,
        Symbol::F => Element::F,
        Symbol::Si => Element::Si,
        Symbol::P => Element::P,
        Symbol::S => Element::S,
        Symbol::Cl => Element::Cl,
        Symbol::Br => Element::Br,
        Symbol::I => Element::I,
        _ => return None,
    })
}

fn syntax_error(text: &str, error: &Error) -> SmilesError {
    let at = match error {
        Error::EndOfLine => text.chars().count(),
        Error::Character(at) => *at,
    };
    let mut depth = 0_usize;
    let mut in_bracket = false;
    for character in text.chars().take(at) {
        match character {
            '[' => in_bracket = true,
            ']' => in_bracket = false,
            '(' if !in_bracket => depth += 1,
            ')' if !in_bracket => depth = depth.saturating_sub(1),
            _ => {}
        }
    }
    let before = at.checked_sub(1).and_then(|at| text.chars().nth(at));
    let after_number =
        before.is_some_and(|character| character == '%' || character.is_ascii_digit());
    let (fault, column) = match text.chars().nth(at) {
        Some(found) => {
            let remedy = match found {
                _ if in_bracket => {
                    "inside brackets stand mass number, symbol, @ or @@, H count and charge, in this order, then `]`"
                }
                ')' if depth == 0 => "there is no `(` open that it could close",
                ')' => "a branch needs an atom between `(` and `)`",
                ']' => "there is no `[` open that it could close",
                '(' => "a branch follows an atom",
                _ if found.is_whitespace() => "a SMILES holds no blanks",
                _ if before == Some('%')
                    || (after_number && text.chars().take(at).any(|c| c == '%')) =>
                {
                    "a ring number after `%` has two digits"
                }
                _ if found.is_ascii_digit() => "a ring number follows an atom",
                _ if found.is_alphabetic() => {
                    "outside brackets stand B C N O P S F Cl Br I and aromatic b c n o p s"
                }
                _ => "an atom, a bond symbol, a ring number or a branch is expected",
            };
            (SmilesFault::Character { found, remedy }, at + 1)
        }
        None => {
            let remedy = if in_bracket {
                "close the bracket atom with `]`"
            } else if before == Some('%') {
                "a ring number after `%` has two digits"
            } else if before.is_some_and(|character| "-=#$:/\\.(".contains(character)) {
                "an atom is expected"
            } else if depth > 0 {
                "close the branch with `)`"
            } else {
                "an atom is expected"
            };
            (SmilesFault::EndOfLine { remedy }, at + 1)
        }
    };
    SmilesError { column, fault }
}

/// Gives a fault its column by reading the line once more with a trace.
pub(super) fn locate(text: &str, (place, mut fault): Fault) -> SmilesError {
    let unambiguous = renumber(text).unwrap_or(Cow::Borrowed(text));
    let mut trace = Trace::new();
    let mut nowhere = Nowhere;
    // The line may have a syntax fault further right; the places before it stand.
    let _ = on_deep_stack(text, || read(&unambiguous, &mut nowhere, Some(&mut trace)));
    let range = match place {
        Place::Atom(atom) => trace.atom(atom as usize),
        Place::RingNumber(event) => trace.rnum(event as usize),
    };
    let start = range.as_ref().map_or(0, |range| range.start);
    if let (
        Some(range),
        SmilesFault::OpenRing { number }
        | SmilesFault::SelfRing { number }
        | SmilesFault::DoubledRing { number }
        | SmilesFault::RingOrder { number },
    ) = (range, &mut fault)
    {
        *number = text
            .chars()
            .take(range.end)
            .skip(range.start)
            .filter_map(|character| character.to_digit(10))
            .fold(0, |number, digit| number * 10 + digit as u8);
    }
    SmilesError {
        column: start + 1,
        fault,
    }
}

struct Nowhere;

impl Follower for Nowhere {
    fn root(&mut self, _: AtomKind) {}
    fn extend(&mut self, _: BondKind, _: AtomKind) {}
    fn join(&mut self, _: BondKind, _: Rnum) {}
    fn pop(&mut self, _: usize) {}
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Notes the least stack that was left.
    struct Depth(usize);

    impl Depth {
        fn note(&mut self) {
            let left = stacker::remaining_stack().expect("known on this platform");
            self.0 = self.0.min(left);
        }
    }

    impl Follower for Depth {
        fn root(&mut self, _: AtomKind) {
            self.note();
        }
        fn extend(&mut self, _: BondKind, _: AtomKind) {
            self.note();
        }
        fn join(&mut self, _: BondKind, _: Rnum) {
            self.note();
        }
        fn pop(&mut self, _: usize) {}
    }

    #[test]
    fn stack_that_is_set_aside_is_enough() {
        for piece in ["C(", "C", "C1C=1", "[CH2]/"] {
            let text = piece.repeat(MAX_LINE_BYTES / piece.len());
            let mut depth = Depth(usize::MAX);
            let start = on_deep_stack(&text, || {
                let start = stacker::remaining_stack().expect("known on this platform");
                // A fault at the end of the line does not matter here.
                let _ = read(&text, &mut depth, None);
                start
            });
            let each = (start - depth.0) / text.len();
            assert!(
                2 * each < STACK_PER_CHARACTER,
                "{piece}: {each} bytes a character"
            );
        }
    }
}
