//! Pattern text to syntax tree, with the place of every fault.

use std::ops::Range;

use super::error::{PatternFault, PatternFaultKind as Kind};
use crate::chem::Element;

/// Most atoms a pattern may have.
pub(super) const ATOM_LIMIT: usize = 32;
/// Deepest nesting of `$(…)`.
const DEPTH_LIMIT: usize = 3;

/// Bonds that pass, as a bit set: bit 2(order − 1) outside rings, one higher
/// inside rings; order 4 is aromatic.
pub(in crate::groups) type BondMask = u8;

pub(super) const ANY_BOND: BondMask = 0xff;
const RING_BOND: BondMask = 0b1010_1010;
const SINGLE: BondMask = 0b0000_0011;
const DOUBLE: BondMask = 0b0000_1100;
const TRIPLE: BondMask = 0b0011_0000;
const AROMATIC: BondMask = 0b1100_0000;

/// A test inside brackets.
#[derive(Clone, Debug, PartialEq)]
pub(super) enum Test {
    /// Element; aromatic, not aromatic, or either.
    Element(Element, Option<bool>),
    Any,
    Aromatic(bool),
    Hydrogens(u8),
    Degree(u8),
    Connections(u8),
    Ring(bool),
    RingSize(u8),
    /// Sign of the charge.
    Charge(i8),
    /// Its text, by which equal environments are known, and its tree.
    Environment(String, Box<Tree>),
}

/// Tests joined by and, or, not.
#[derive(Clone, Debug, PartialEq)]
pub(super) enum Expression {
    Is(Test),
    Not(Box<Expression>),
    All(Vec<Expression>),
    AnyOf(Vec<Expression>),
}

#[derive(Clone, Debug, PartialEq)]
pub(super) struct TreeAtom {
    pub(super) tests: Expression,
    pub(super) covered: bool,
    pub(super) span: Range<usize>,
}

#[derive(Clone, Debug, PartialEq)]
pub(super) struct TreeBond {
    pub(super) atoms: [usize; 2],
    pub(super) mask: BondMask,
}

/// A parsed pattern.
#[derive(Clone, Debug, Default, PartialEq)]
pub(super) struct Tree {
    pub(super) atoms: Vec<TreeAtom>,
    pub(super) bonds: Vec<TreeBond>,
}

/// Parses a pattern; all faults that can be told apart are reported.
pub(super) fn parse(text: &str) -> Result<Tree, Vec<PatternFault>> {
    let mut parser = Parser {
        text: text.as_bytes(),
        at: 0,
        faults: Vec::new(),
    };
    let tree = parser.pattern(0);
    if parser.at < text.len() && parser.faults.is_empty() {
        parser.fault(parser.at..parser.at + 1, Kind::UnknownCharacter);
    }
    if parser.faults.is_empty() {
        Ok(tree)
    } else {
        Err(parser.faults)
    }
}

struct Parser<'t> {
    text: &'t [u8],
    at: usize,
    faults: Vec<PatternFault>,
}

/// A ring bond waiting for its other end.
struct OpenRing {
    digit: u8,
    atom: usize,
    mask: Option<BondMask>,
    at: usize,
}

impl Parser<'_> {
    fn fault(&mut self, span: Range<usize>, kind: Kind) {
        self.faults.push(PatternFault { span, kind });
    }

    fn peek(&self) -> Option<u8> {
        self.text.get(self.at).copied()
    }

    fn take(&mut self, byte: u8) -> bool {
        let found = self.peek() == Some(byte);
        self.at += usize::from(found);
        found
    }

    /// A whole pattern: up to the end of the text, or to the `)` that ends an
    /// environment.
    fn pattern(&mut self, depth: usize) -> Tree {
        let start = self.at;
        let mut tree = Tree::default();
        let mut rings: Vec<OpenRing> = Vec::new();
        self.chain(&mut tree, &mut rings, None, true, depth);
        for ring in rings {
            self.fault(ring.at..ring.at + 1, Kind::OpenRing);
        }
        if tree.atoms.len() > ATOM_LIMIT {
            self.fault(start..self.at, Kind::TooManyAtoms);
        }
        tree
    }

    /// Atoms in a row with their branches, hanging from `parent`. Stops in
    /// front of a closing bracket, at the end, or at the first fault.
    fn chain(
        &mut self,
        tree: &mut Tree,
        rings: &mut Vec<OpenRing>,
        mut parent: Option<usize>,
        covered: bool,
        depth: usize,
    ) {
        let mut first = true;
        loop {
            let bond = self.bond();
            match self.peek() {
                Some(digit @ b'1'..=b'9') if !first => {
                    let at = self.at;
                    self.at += 1;
                    let atom = parent.expect("a ring digit follows an atom");
                    self.close_ring(
                        tree,
                        rings,
                        OpenRing {
                            digit,
                            atom,
                            mask: bond,
                            at,
                        },
                    );
                    continue;
                }
                Some(open @ (b'(' | b'{')) if !first && bond.is_none() => {
                    let at = self.at;
                    self.at += 1;
                    let faults = self.faults.len();
                    self.chain(tree, rings, parent, covered && open == b'(', depth);
                    if self.faults.len() > faults {
                        return;
                    }
                    if !self.take(if open == b'(' { b')' } else { b'}' }) {
                        self.fault(at..at + 1, Kind::Unclosed);
                        return;
                    }
                    continue;
                }
                None | Some(b')' | b'}') if !first && bond.is_none() => return,
                _ => {}
            }
            let start = self.at;
            let Some(tests) = self.atom(depth) else {
                return;
            };
            let atom = tree.atoms.len();
            tree.atoms.push(TreeAtom {
                tests,
                covered,
                span: start..self.at,
            });
            if let Some(parent) = parent {
                tree.bonds.push(TreeBond {
                    atoms: [parent, atom],
                    mask: bond.unwrap_or(SINGLE | AROMATIC),
                });
            } else if bond.is_some() {
                self.fault(start..start + 1, Kind::AtomExpected);
                return;
            }
            parent = Some(atom);
            first = false;
        }
    }

    fn close_ring(&mut self, tree: &mut Tree, rings: &mut Vec<OpenRing>, end: OpenRing) {
        let Some(position) = rings.iter().position(|ring| ring.digit == end.digit) else {
            rings.push(end);
            return;
        };
        let start = rings.swap_remove(position);
        let atoms = [start.atom, end.atom];
        let bonded = tree
            .bonds
            .iter()
            .any(|bond| bond.atoms == atoms || bond.atoms == [atoms[1], atoms[0]]);
        if bonded || atoms[0] == atoms[1] {
            self.fault(end.at..end.at + 1, Kind::DoubleBonded);
            return;
        }
        let mask = match (start.mask, end.mask) {
            (Some(one), Some(other)) if one != other => {
                self.fault(end.at..end.at + 1, Kind::ContradictoryBond);
                return;
            }
            (Some(mask), _) | (None, Some(mask)) => mask,
            (None, None) => SINGLE | AROMATIC,
        };
        tree.bonds.push(TreeBond { atoms, mask });
    }

    /// Bond signs: rows of signs that must all hold, joined by `,`.
    fn bond(&mut self) -> Option<BondMask> {
        let start = self.at;
        let mut any = 0;
        let mut all = ANY_BOND;
        let mut seen = false;
        loop {
            let not = self.peek() == Some(b'!');
            let mask = match self.text.get(self.at + usize::from(not)) {
                Some(b'-') => SINGLE,
                Some(b'=') => DOUBLE,
                Some(b'#') => TRIPLE,
                Some(b':') => AROMATIC,
                Some(b'~') => ANY_BOND,
                Some(b'@') => RING_BOND,
                Some(b',') if seen && !not => {
                    self.at += 1;
                    any |= all;
                    all = ANY_BOND;
                    continue;
                }
                _ => break,
            };
            all &= if not { !mask } else { mask };
            seen = true;
            self.at += 1 + usize::from(not);
        }
        if !seen {
            return None;
        }
        let mask = any | all;
        if mask == 0 {
            self.fault(start..self.at, Kind::ContradictoryBond);
        }
        Some(mask)
    }

    fn atom(&mut self, depth: usize) -> Option<Expression> {
        let start = self.at;
        let simple =
            |element, aromatic| Some(Expression::Is(Test::Element(element, Some(aromatic))));
        let rest = &self.text[self.at..];
        let (length, found) = match rest.first() {
            Some(b'[') => return self.bracket(depth),
            Some(b'C') if rest.get(1) == Some(&b'l') => (2, simple(Element::Cl, false)),
            Some(b'B') if rest.get(1) == Some(&b'r') => (2, simple(Element::Br, false)),
            Some(b'B') => (1, simple(Element::B, false)),
            Some(b'C') => (1, simple(Element::C, false)),
            Some(b'N') => (1, simple(Element::N, false)),
            Some(b'O') => (1, simple(Element::O, false)),
            Some(b'F') => (1, simple(Element::F, false)),
            Some(b'P') => (1, simple(Element::P, false)),
            Some(b'S') => (1, simple(Element::S, false)),
            Some(b'I') => (1, simple(Element::I, false)),
            Some(b'c') => (1, simple(Element::C, true)),
            Some(b'n') => (1, simple(Element::N, true)),
            Some(b'o') => (1, simple(Element::O, true)),
            Some(b's') => (1, simple(Element::S, true)),
            Some(b'p') => (1, simple(Element::P, true)),
            Some(b'*') => (1, Some(Expression::Is(Test::Any))),
            _ => {
                self.fault(
                    start..(start + 1).min(self.text.len()).max(start),
                    Kind::AtomExpected,
                );
                return None;
            }
        };
        self.at += length;
        found
    }

    fn bracket(&mut self, depth: usize) -> Option<Expression> {
        let open = self.at;
        self.at += 1;
        let faults = self.faults.len();
        // `;` binds weakest, then `,`, then `&` or nothing.
        let mut weak = Vec::new();
        loop {
            let mut alternatives = Vec::new();
            loop {
                let mut strong = Vec::new();
                loop {
                    let first = weak.is_empty() && alternatives.is_empty() && strong.is_empty();
                    if let Some(test) = self.negated(first, depth) {
                        strong.push(test);
                    }
                    self.take(b'&');
                    match self.peek() {
                        None | Some(b']' | b',' | b';') => break,
                        _ => {}
                    }
                }
                alternatives.push(Expression::All(strong));
                if !self.take(b',') {
                    break;
                }
            }
            weak.push(Expression::AnyOf(alternatives));
            if !self.take(b';') {
                break;
            }
        }
        if !self.take(b']') {
            self.fault(open..open + 1, Kind::Unclosed);
            return None;
        }
        (self.faults.len() == faults).then_some(Expression::All(weak))
    }

    fn negated(&mut self, first: bool, depth: usize) -> Option<Expression> {
        if self.take(b'!') {
            return Some(Expression::Not(Box::new(self.negated(false, depth)?)));
        }
        self.test(first, depth).map(Expression::Is)
    }

    fn number(&mut self) -> Option<u8> {
        let start = self.at;
        while self.peek().is_some_and(|byte| byte.is_ascii_digit()) {
            self.at += 1;
        }
        let digits = std::str::from_utf8(&self.text[start..self.at]).ok()?;
        if digits.is_empty() {
            None
        } else {
            Some(digits.parse().unwrap_or(u8::MAX))
        }
    }

    /// One test; a fault is recorded and skipped so that the rest is checked too.
    fn test(&mut self, first: bool, depth: usize) -> Option<Test> {
        let start = self.at;
        let ranged = |parser: &mut Self, default: u8, range: Range<u8>| {
            let value = parser.number().unwrap_or(default);
            if range.contains(&value) {
                Some(value)
            } else {
                parser.fault(start..parser.at, Kind::NumberOutOfRange);
                None
            }
        };
        let Some(byte) = self.peek() else {
            self.fault(start..start, Kind::AtomExpected);
            return None;
        };
        self.at += 1;
        let next_is = |text: &[u8], next: u8| text.get(start + 1) == Some(&next);
        match byte {
            b'*' => Some(Test::Any),
            b'a' => Some(Test::Aromatic(true)),
            b'A' => Some(Test::Aromatic(false)),
            b'H' => ranged(self, 1, 0..5).map(Test::Hydrogens),
            b'D' => ranged(self, 1, 0..5).map(Test::Degree),
            b'X' => ranged(self, 1, 0..7).map(Test::Connections),
            b'R' => ranged(self, 1, 0..2).map(|ring| Test::Ring(ring == 1)),
            b'r' => ranged(self, 0, 3..9).map(Test::RingSize),
            b'+' => Some(Test::Charge(i8::from(ranged(self, 1, 0..2)? == 1))),
            b'-' => Some(Test::Charge(-1)),
            b'#' => {
                const NUMBERS: [u8; Element::COUNT] = [1, 5, 6, 7, 8, 9, 14, 15, 16, 17, 35, 53];
                let number = self.number().unwrap_or(0);
                match NUMBERS.iter().position(|&known| known == number) {
                    Some(index) => Some(Test::Element(Element::ALL[index], None)),
                    None => {
                        self.fault(start..self.at, Kind::UnknownElement);
                        None
                    }
                }
            }
            b'$' => {
                if !self.take(b'(') {
                    self.fault(start..self.at, Kind::UnknownCharacter);
                    return None;
                }
                if depth == DEPTH_LIMIT {
                    self.fault(start..self.at, Kind::TooDeep);
                }
                let inside = self.at;
                let tree = self.pattern(depth + 1);
                let text = String::from_utf8_lossy(&self.text[inside..self.at]).into_owned();
                if !self.take(b')') {
                    self.fault(start..start + 2, Kind::Unclosed);
                    return None;
                }
                Some(Test::Environment(text, Box::new(tree)))
            }
            b'C' if next_is(self.text, b'l') => self.two_letter(Element::Cl),
            b'B' if next_is(self.text, b'r') => self.two_letter(Element::Br),
            b'S' if next_is(self.text, b'i') => self.two_letter(Element::Si),
            b'B' => Some(Test::Element(Element::B, Some(false))),
            b'C' => Some(Test::Element(Element::C, Some(false))),
            b'N' => Some(Test::Element(Element::N, Some(false))),
            b'O' => Some(Test::Element(Element::O, Some(false))),
            b'F' => Some(Test::Element(Element::F, Some(false))),
            b'P' => Some(Test::Element(Element::P, Some(false))),
            b'S' => Some(Test::Element(Element::S, Some(false))),
            b'I' => Some(Test::Element(Element::I, Some(false))),
            b'c' => Some(Test::Element(Element::C, Some(true))),
            b'n' => Some(Test::Element(Element::N, Some(true))),
            b'o' => Some(Test::Element(Element::O, Some(true))),
            b's' => Some(Test::Element(Element::S, Some(true))),
            b'p' => Some(Test::Element(Element::P, Some(true))),
            b']' | b',' | b';' => {
                self.at = start;
                self.fault(start..start + 1, Kind::AtomExpected);
                None
            }
            other => {
                let kind = if first && other.is_ascii_alphabetic() {
                    Kind::UnknownElement
                } else {
                    Kind::UnknownCharacter
                };
                self.fault(start..start + 1, kind);
                None
            }
        }
    }

    fn two_letter(&mut self, element: Element) -> Option<Test> {
        self.at += 1;
        Some(Test::Element(element, Some(false)))
    }
}
