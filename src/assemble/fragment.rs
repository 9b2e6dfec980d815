//! Fragments of molecules with open ends, read from text and drawn as SMILES.
//!
//! The text is SMILES of a fragment without rings of its own, in which `{1}`,
//! `{2}`, … stand where something else is joined and `{<}`, `{>}` where a ring
//! goes on to either side: `{1}CC(=O){2}`, `{<}c(C{1}){>}`.

use std::fmt::Write as _;

use smallvec::SmallVec;
use thiserror::Error;

/// Why a text is no fragment.
#[derive(Clone, Debug, Error, PartialEq, Eq)]
pub enum FragmentError {
    /// A character that has no meaning there.
    #[error("`{text}`: nothing can be made of `{rest}`")]
    Unreadable {
        /// The text.
        text: String,
        /// Where reading stopped.
        rest: String,
    },
    /// Ends are numbered from 1 without a gap, each once.
    #[error("`{text}`: ends are numbered from 1 without a gap, each once")]
    Numbering {
        /// The text.
        text: String,
    },
    /// A ring goes on to one side only.
    #[error("`{text}`: a ring has to go on to both sides, `{{<}}` and `{{>}}`, or to none")]
    OneSided {
        /// The text.
        text: String,
    },
}

/// An atom of a fragment: its SMILES symbol and its bonds.
#[derive(Clone, Debug, PartialEq, Eq)]
struct Atom {
    symbol: String,
    /// Neighbors within the fragment, with the sign of the bond.
    bonds: SmallVec<[(u8, &'static str); 4]>,
    /// Ends at this atom, from 0, in order.
    ends: SmallVec<[u8; 4]>,
}

/// A fragment.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Fragment {
    atoms: Vec<Atom>,
    /// The atom of each end.
    end_atoms: SmallVec<[u8; 4]>,
    /// The atoms at which a ring goes on.
    ring: Option<[u8; 2]>,
}

/// What has been read so far.
struct Reading<'t> {
    text: &'t str,
    rest: &'t str,
    atoms: Vec<Atom>,
    /// The atom of each end by number.
    ends: Vec<Option<u8>>,
    ring: [Option<u8>; 2],
}

impl Fragment {
    /// Reads a fragment.
    ///
    /// # Errors
    ///
    /// The text is none.
    pub fn read(text: &str) -> Result<Self, FragmentError> {
        let mut reading = Reading {
            text,
            rest: text,
            atoms: Vec::new(),
            ends: Vec::new(),
            ring: [None; 2],
        };
        reading.chain(None)?;
        if !reading.rest.is_empty() || reading.atoms.is_empty() {
            return Err(reading.unreadable());
        }
        let numbering = || FragmentError::Numbering {
            text: text.to_owned(),
        };
        let end_atoms: Option<SmallVec<[u8; 4]>> = reading.ends.iter().copied().collect();
        let end_atoms = end_atoms.ok_or_else(numbering)?;
        let ring = match reading.ring {
            [Some(left), Some(right)] => Some([left, right]),
            [None, None] => None,
            _ => {
                return Err(FragmentError::OneSided {
                    text: text.to_owned(),
                });
            }
        };
        let mut atoms = reading.atoms;
        for (end, &atom) in end_atoms.iter().enumerate() {
            atoms[atom as usize].ends.push(end as u8);
        }
        Ok(Self {
            atoms,
            end_atoms,
            ring,
        })
    }

    /// Number of ends that are not those of a ring.
    pub fn ends(&self) -> usize {
        self.end_atoms.len()
    }

    /// The atom of an end, for telling which ends are alike.
    pub fn atom_of_end(&self, end: usize) -> usize {
        self.end_atoms[end].into()
    }

    /// Whether it is a member of a ring.
    pub fn is_ring_member(&self) -> bool {
        self.ring.is_some()
    }

    /// How many atoms it takes in the ring.
    pub fn ring_atoms(&self) -> usize {
        self.ring_path().len()
    }

    /// The atoms from one side of the ring to the other.
    fn ring_path(&self) -> SmallVec<[u8; 4]> {
        let Some([left, right]) = self.ring else {
            return SmallVec::new();
        };
        let mut path = SmallVec::from_slice(&[left]);
        self.extend_path(right, &mut path);
        path
    }

    fn extend_path(&self, goal: u8, path: &mut SmallVec<[u8; 4]>) -> bool {
        let here = *path.last().expect("a path has a start");
        if here == goal {
            return true;
        }
        for &(next, _) in &self.atoms[here as usize].bonds {
            if !path.contains(&next) {
                path.push(next);
                if self.extend_path(goal, path) {
                    return true;
                }
                path.pop();
            }
        }
        false
    }

    /// Draws a chain fragment from the atom of `entry`, or from its first atom;
    /// `join` draws what is joined at each other end.
    pub fn draw(
        &self,
        out: &mut String,
        entry: Option<usize>,
        join: &mut dyn FnMut(&mut String, usize),
    ) {
        let from = entry.map_or(0, |end| self.end_atoms[end]);
        self.draw_atom(out, from, None, entry, &[], join);
    }

    /// Draws a member of a ring from its left to its right side, or the other way
    /// round; `mark` is written after the first atom, where a ring is opened, or
    /// after the last, where it is closed.
    pub fn draw_in_ring(
        &self,
        out: &mut String,
        reversed: bool,
        marks: [&str; 2],
        join: &mut dyn FnMut(&mut String, usize),
    ) {
        let mut path = self.ring_path();
        if reversed {
            path.reverse();
        }
        for (at, &atom) in path.iter().enumerate() {
            if at > 0 {
                let before = path[at - 1];
                let bonds = &self.atoms[atom as usize].bonds;
                let bond = bonds.iter().find(|bond| bond.0 == before);
                out.push_str(bond.expect("a path goes along bonds").1);
            }
            out.push_str(&self.atoms[atom as usize].symbol);
            if at == 0 {
                out.push_str(marks[0]);
            }
            if at + 1 == path.len() {
                out.push_str(marks[1]);
            }
            self.draw_beside(out, atom, None, &path, true, join);
        }
    }

    fn draw_atom(
        &self,
        out: &mut String,
        atom: u8,
        came_from: Option<u8>,
        entry: Option<usize>,
        path: &[u8],
        join: &mut dyn FnMut(&mut String, usize),
    ) {
        let skip = (came_from.is_none()).then_some(entry).flatten();
        out.push_str(&self.atoms[atom as usize].symbol);
        let mut seen: SmallVec<[u8; 4]> = path.into();
        seen.extend(came_from);
        self.draw_beside(out, atom, skip, &seen, false, join);
    }

    /// What hangs at an atom: the last without parentheses, unless the ring goes on.
    fn draw_beside(
        &self,
        out: &mut String,
        atom: u8,
        skip: Option<usize>,
        not: &[u8],
        ring_goes_on: bool,
        join: &mut dyn FnMut(&mut String, usize),
    ) {
        let own = &self.atoms[atom as usize];
        let ends = own.ends.iter().map(|&end| usize::from(end));
        let ends: SmallVec<[usize; 4]> = ends.filter(|&end| Some(end) != skip).collect();
        let inner = own.bonds.iter().filter(|bond| !not.contains(&bond.0));
        let inner: SmallVec<[&(u8, &str); 4]> = inner.collect();
        let branches = inner.len() + ends.len();
        let mut at = 0;
        let mut branch = |out: &mut String, one: &mut dyn FnMut(&mut String)| {
            at += 1;
            if at < branches || ring_goes_on {
                out.push('(');
                one(out);
                out.push(')');
            } else {
                one(out);
            }
        };
        for bond in inner {
            branch(out, &mut |out| {
                out.push_str(bond.1);
                self.draw_atom(out, bond.0, Some(atom), None, &[], join);
            });
        }
        for end in ends {
            branch(out, &mut |out| join(out, end));
        }
    }
}

impl Reading<'_> {
    fn unreadable(&self) -> FragmentError {
        FragmentError::Unreadable {
            text: self.text.to_owned(),
            rest: self.rest.to_owned(),
        }
    }

    fn take(&mut self, prefix: &str) -> bool {
        match self.rest.strip_prefix(prefix) {
            Some(rest) => {
                self.rest = rest;
                true
            }
            None => false,
        }
    }

    /// Reads to the end of the text or of a branch.
    fn chain(&mut self, mut before: Option<u8>) -> Result<(), FragmentError> {
        let mut bond = "";
        let mut waiting: SmallVec<[String; 2]> = SmallVec::new();
        loop {
            if self.rest.is_empty() || self.rest.starts_with(')') {
                return match waiting.is_empty() {
                    true => Ok(()),
                    false => Err(self.unreadable()),
                };
            }
            if self.take("(") {
                let at = before.ok_or_else(|| self.unreadable())?;
                self.chain(Some(at))?;
                if !self.take(")") {
                    return Err(self.unreadable());
                }
            } else if self.take("{") {
                let (name, rest) = self.rest.split_once('}').ok_or_else(|| self.unreadable())?;
                self.rest = rest;
                match before {
                    Some(atom) => self.mark(name, atom)?,
                    None => waiting.push(name.to_owned()),
                }
            } else if self.take("=") {
                bond = "=";
            } else if self.take("#") {
                bond = "#";
            } else {
                let symbol = self.symbol()?;
                let atom = self.atoms.len() as u8;
                self.atoms.push(Atom {
                    symbol,
                    bonds: SmallVec::new(),
                    ends: SmallVec::new(),
                });
                if let Some(before) = before {
                    self.atoms[before as usize].bonds.push((atom, bond));
                    self.atoms[atom as usize].bonds.push((before, bond));
                }
                bond = "";
                for name in waiting.drain(..) {
                    self.mark(&name, atom)?;
                }
                before = Some(atom);
            }
        }
    }

    fn mark(&mut self, name: &str, atom: u8) -> Result<(), FragmentError> {
        let place = match name {
            "<" => &mut self.ring[0],
            ">" => &mut self.ring[1],
            _ => {
                let number: usize = name.parse().unwrap_or(0);
                if !(1..=4).contains(&number) {
                    return Err(FragmentError::Numbering {
                        text: self.text.to_owned(),
                    });
                }
                if self.ends.len() < number {
                    self.ends.resize(number, None);
                }
                &mut self.ends[number - 1]
            }
        };
        match place.replace(atom) {
            None => Ok(()),
            Some(_) => Err(FragmentError::Numbering {
                text: self.text.to_owned(),
            }),
        }
    }

    fn symbol(&mut self) -> Result<String, FragmentError> {
        let length = if self.rest.starts_with('[') {
            self.rest.find(']').map(|at| at + 1)
        } else if self.rest.starts_with("Cl") || self.rest.starts_with("Br") {
            Some(2)
        } else {
            self.rest
                .starts_with(['C', 'N', 'O', 'S', 'P', 'F', 'I', 'c', 'n', 'o', 's'])
                .then_some(1)
        };
        let length = length.ok_or_else(|| self.unreadable())?;
        let (symbol, rest) = self.rest.split_at(length);
        self.rest = rest;
        Ok(symbol.to_owned())
    }
}

/// Draws a fragment with methyl groups on all its ends, a ring filled up to six
/// atoms with `filler`.
pub(super) fn capped(fragment: &Fragment, filler: &str) -> String {
    let mut out = String::new();
    let mut cap = |out: &mut String, _: usize| out.push('C');
    if !fragment.is_ring_member() {
        fragment.draw(&mut out, None, &mut cap);
        return out;
    }
    let fill = 6 - fragment.ring_atoms();
    let _ = write!(out, "{filler}1");
    for _ in 1..fill {
        out.push_str(filler);
    }
    fragment.draw_in_ring(&mut out, false, ["", "1"], &mut cap);
    out
}

#[cfg(test)]
mod tests {
    use super::*;

    fn drawn(text: &str, entry: Option<usize>) -> String {
        let fragment = Fragment::read(text).unwrap();
        let mut out = String::new();
        fragment.draw(&mut out, entry, &mut |out, end| {
            out.push_str(["F", "Cl", "Br", "I"][end]);
        });
        out
    }

    #[test]
    fn chains_are_drawn_from_every_end() {
        assert_eq!(drawn("{1}CC(=O){2}", None), "C(C(=O)Cl)F");
        assert_eq!(drawn("{1}CC(=O){2}", Some(0)), "CC(=O)Cl");
        assert_eq!(drawn("{1}CC(=O){2}", Some(1)), "C(CF)=O");
        assert_eq!(drawn("[O-][N+](=O)C{1}", Some(0)), "C[N+]([O-])=O");
        assert_eq!(drawn("{1}C({2})({3}){4}", Some(2)), "C(F)(Cl)I");
    }

    #[test]
    fn ring_members_are_drawn_both_ways() {
        let member = Fragment::read("{<}CC(=O)OC({1}){>}").unwrap();
        assert_eq!((member.ends(), member.ring_atoms()), (1, 4));
        let mut out = String::new();
        let mut cap = |out: &mut String, _| out.push('F');
        member.draw_in_ring(&mut out, false, ["1", "2"], &mut cap);
        assert_eq!(out, "C1C(=O)OC2(F)");
        out.clear();
        member.draw_in_ring(&mut out, true, ["1", "2"], &mut cap);
        assert_eq!(out, "C1(F)OC(=O)C2");
        assert_eq!(capped(&member, "C"), "C1CCC(=O)OC1(C)");
    }

    #[test]
    fn what_is_no_fragment_is_refused() {
        for text in [
            "", "C(", "{1}", "C{2}", "C{1}C{1}", "Zz", "C1CC1", "{<}C", "C{9}",
        ] {
            assert!(Fragment::read(text).is_err(), "{text}");
        }
    }
}
