//! Whether an assembly has a structure at all.
//!
//! Looks at kinds of ends only: pieces with the same ends are one *shape*. What
//! was found for a part of an assembly is remembered, and serves all others that
//! contain it.

use std::rc::Rc;

use rustc_hash::FxHashMap;
use smallvec::SmallVec;

use super::piece::{Kind, Kinds, Piece, Pieces, Role};

/// Pieces that cannot be told apart by their ends.
#[derive(Clone, Debug, PartialEq, Eq, Hash)]
struct Shape {
    /// Kinds of the ends, and which atom each is at.
    ends: SmallVec<[(Kind, u8); 4]>,
}

/// How often each shape occurs, ascending, no zero counts.
type Multiset = SmallVec<[(u8, u8); 10]>;

/// A tree with one end left open, as whoever joins it sees it.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
struct Open {
    /// The kind of the open end.
    kind: Kind,
    /// What may be joined to it.
    takes: Kinds,
}

/// Finds out whether assemblies have structures; remembers, so one per thread.
#[derive(Debug)]
pub struct Realizer<'p> {
    pieces: &'p Pieces,
    shapes: Vec<Shape>,
    /// Shape of each piece, `None` for whole molecules.
    shape_of: Vec<Option<u8>>,
    branches: FxHashMap<Multiset, Rc<[Open]>>,
    answers: FxHashMap<(Multiset, Multiset), bool>,
}

/// How many parts are remembered before all are forgotten, so that memory has a bound.
const MOST_REMEMBERED: usize = 200_000;

impl<'p> Realizer<'p> {
    /// For these pieces.
    pub fn new(pieces: &'p Pieces) -> Self {
        let mut shapes: Vec<Shape> = Vec::new();
        let shape_of = pieces.all.iter().map(|piece| {
            if piece.role == Role::Whole {
                return None;
            }
            let shape = Shape { ends: ends(piece) };
            let known = shapes.iter().position(|known| *known == shape);
            let at = known.unwrap_or_else(|| {
                shapes.push(shape);
                shapes.len() - 1
            });
            Some(at as u8)
        });
        let shape_of = shape_of.collect();
        Self {
            pieces,
            shapes,
            shape_of,
            branches: FxHashMap::default(),
            answers: FxHashMap::default(),
        }
    }

    /// Whether a molecule can be drawn of these pieces (place in the table, count).
    pub fn is_realizable(&mut self, assembly: &[(u16, u8)]) -> bool {
        let mut chain = Multiset::new();
        let mut ring = Multiset::new();
        for &(piece, count) in assembly {
            let own = &self.pieces.all[usize::from(piece)];
            let Some(shape) = self.shape_of[usize::from(piece)] else {
                return true;
            };
            let of_ring = own.role != Role::Chain;
            if of_ring && own.ends.is_empty() {
                continue;
            }
            add(if of_ring { &mut ring } else { &mut chain }, shape, count);
        }
        let has_ring = assembly.iter().any(|&(piece, _)| {
            matches!(
                self.pieces.all[usize::from(piece)].role,
                Role::Aromatic | Role::Ring
            )
        });
        if chain.is_empty() {
            return has_ring && ring.is_empty();
        }
        let key = (chain, ring);
        if let Some(&known) = self.answers.get(&key) {
            return known;
        }
        let (chain, ring) = &key;
        let answer = if has_ring {
            let mut ends: SmallVec<[(Kind, u16); 8]> = SmallVec::new();
            let mut members = 0;
            for &(shape, count) in ring {
                for _ in 0..count {
                    // atoms of different members are different
                    let own = &self.shapes[usize::from(shape)].ends;
                    ends.extend(
                        own.iter()
                            .map(|&(kind, atom)| (kind, members << 8 | u16::from(atom))),
                    );
                    members += 1;
                }
            }
            self.fills(&ends, chain, &mut SmallVec::new(), &mut |_| true)
        } else {
            self.is_tree(chain)
        };
        if self.answers.len() > MOST_REMEMBERED {
            self.answers.clear();
        }
        self.answers.insert(key, answer);
        answer
    }

    fn is_tree(&mut self, chain: &Multiset) -> bool {
        // any piece can be the root; one with many ends parts the rest best
        let root = chain
            .iter()
            .max_by_key(|(shape, _)| self.shapes[usize::from(*shape)].ends.len());
        let Some(&(root, _)) = root else {
            return false;
        };
        let mut rest = chain.clone();
        remove(&mut rest, root);
        let ends = self.ends_of(root, None);
        if ends.is_empty() {
            return rest.is_empty();
        }
        self.fills(&ends, &rest, &mut SmallVec::new(), &mut |_| true)
    }

    fn ends_of(&self, shape: u8, but: Option<usize>) -> SmallVec<[(Kind, u16); 8]> {
        let ends = self.shapes[usize::from(shape)].ends.iter().enumerate();
        ends.filter(|(at, _)| Some(*at) != but)
            .map(|(_, &(kind, atom))| (kind, u16::from(atom)))
            .collect()
    }

    /// Gives every end a part of `rest`, all of it in the end; hands each way, as
    /// the kinds joined to the ends, to `found` until that says it is enough.
    fn fills(
        &mut self,
        ends: &[(Kind, u16)],
        rest: &Multiset,
        joined: &mut SmallVec<[Kind; 8]>,
        found: &mut dyn FnMut(&[Kind]) -> bool,
    ) -> bool {
        let at = joined.len();
        if at == ends.len() {
            return rest.is_empty() && found(joined);
        }
        let last = at + 1 == ends.len();
        let mut parts: SmallVec<[Multiset; 16]> = SmallVec::new();
        if last {
            parts.push(rest.clone());
        } else {
            self.parts(rest, &mut parts);
        }
        for part in parts {
            if self.valence(&part) != -1 {
                continue;
            }
            let branches = self.branches(&part);
            let mut left = rest.clone();
            for &(shape, count) in &part {
                for _ in 0..count {
                    remove(&mut left, shape);
                }
            }
            let (kind, atom) = ends[at];
            // branches that look alike from here are one
            let mut tried: Kinds = 0;
            for open in branches.iter() {
                let fits = open.takes & kind.bit() != 0
                    && tried & open.kind.bit() == 0
                    && ends[..at].iter().zip(&*joined).all(|(other, other_kind)| {
                        other.1 != atom || self.pieces.may_meet(kind, *other_kind, open.kind)
                    });
                if !fits {
                    continue;
                }
                tried |= open.kind.bit();
                joined.push(open.kind);
                let enough = self.fills(ends, &left, joined, found);
                joined.pop();
                if enough {
                    return true;
                }
            }
        }
        false
    }

    /// Ends over two, summed: −1 for a tree with one open end.
    fn valence(&self, part: &Multiset) -> i32 {
        part.iter()
            .map(|&(shape, count)| {
                let ends = self.shapes[usize::from(shape)].ends.len() as i32;
                (ends - 2) * i32::from(count)
            })
            .sum()
    }

    /// Every part of a multiset that may be a tree with one open end.
    fn parts(&self, whole: &Multiset, parts: &mut SmallVec<[Multiset; 16]>) {
        let mut chosen: SmallVec<[u8; 10]> = SmallVec::from_elem(0, whole.len());
        loop {
            let part: Multiset = whole
                .iter()
                .zip(&chosen)
                .filter(|(_, n)| **n > 0)
                .map(|(one, &n)| (one.0, n))
                .collect();
            if !part.is_empty() && self.valence(&part) == -1 {
                parts.push(part);
            }
            let mut at = 0;
            loop {
                if at == whole.len() {
                    return;
                }
                if chosen[at] < whole[at].1 {
                    chosen[at] += 1;
                    break;
                }
                chosen[at] = 0;
                at += 1;
            }
        }
    }

    /// The trees with one open end that can be made of all of a part.
    fn branches(&mut self, part: &Multiset) -> Rc<[Open]> {
        if let Some(known) = self.branches.get(part) {
            return Rc::clone(known);
        }
        let mut all: SmallVec<[Open; 16]> = SmallVec::new();
        for &(shape, _) in part {
            let mut rest = part.clone();
            remove(&mut rest, shape);
            let count = self.shapes[usize::from(shape)].ends.len();
            let mut tried: SmallVec<[(Kind, u8); 4]> = SmallVec::new();
            for entry in 0..count {
                let (kind, atom) = self.shapes[usize::from(shape)].ends[entry];
                if tried.contains(&(kind, atom)) {
                    continue;
                }
                tried.push((kind, atom));
                let ends = self.ends_of(shape, Some(entry));
                let joins = self.pieces.kinds[usize::from(kind.0)].joins;
                let mut add = |joined: &[Kind], pieces: &Pieces| {
                    let not = ends
                        .iter()
                        .zip(joined)
                        .filter(|(end, _)| end.1 == u16::from(atom))
                        .fold(0, |not, (_, joined)| {
                            not | pieces.kinds[usize::from(kind.0)].not_beside
                                [usize::from(joined.0)]
                        });
                    let open = Open {
                        kind,
                        takes: joins & !not,
                    };
                    if open.takes != 0 && !all.contains(&open) {
                        all.push(open);
                    }
                };
                if ends.is_empty() {
                    if rest.is_empty() {
                        add(&[], self.pieces);
                    }
                    continue;
                }
                let pieces = self.pieces;
                self.fills(&ends, &rest, &mut SmallVec::new(), &mut |joined| {
                    add(joined, pieces);
                    false
                });
            }
        }
        all.sort_unstable();
        let all: Rc<[Open]> = all.as_slice().into();
        if self.branches.len() > MOST_REMEMBERED {
            self.branches.clear();
        }
        self.branches.insert(part.clone(), Rc::clone(&all));
        all
    }
}

fn ends(piece: &Piece) -> SmallVec<[(Kind, u8); 4]> {
    let fragment = piece.fragment();
    let ends = piece.ends.iter().enumerate();
    ends.map(|(at, &kind)| (kind, fragment.atom_of_end(at) as u8))
        .collect()
}

fn add(multiset: &mut Multiset, shape: u8, count: u8) {
    match multiset.binary_search_by_key(&shape, |one| one.0) {
        Ok(at) => multiset[at].1 += count,
        Err(at) => multiset.insert(at, (shape, count)),
    }
}

fn remove(multiset: &mut Multiset, shape: u8) {
    let at = multiset
        .binary_search_by_key(&shape, |one| one.0)
        .expect("what is taken away was there");
    multiset[at].1 -= 1;
    if multiset[at].1 == 0 {
        multiset.remove(at);
    }
}
