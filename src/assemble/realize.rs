//! Whether an assembly has a structure at all.
//!
//! Looks at kinds of ends only: pieces with the same ends are one *shape*. A tree
//! is grown from one piece by filling, again and again, the open end that the
//! fewest of the remaining pieces fit; dead ends are remembered.

use rustc_hash::{FxHashMap, FxHashSet};
use smallvec::SmallVec;

use super::piece::{Kind, Kinds, Piece, Pieces, Role};

/// Open ends at one atom: they are of one kind.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
struct Site {
    kind: Kind,
    open: u8,
    /// Kinds that may not come here any more, for what is joined to the atom.
    not: Kinds,
}

/// Pieces that cannot be told apart by their ends.
type Shape = SmallVec<[Site; 4]>;

/// How often each shape occurs, ascending, no zero counts.
type Multiset = SmallVec<[(u8, u8); 12]>;

/// A partial tree: its open sites in order, and what is left.
type Growth = (SmallVec<[Site; 8]>, Multiset);

/// Finds out whether assemblies have structures; remembers, so one per thread.
#[derive(Debug)]
pub struct Realizer<'p> {
    pieces: &'p Pieces,
    shapes: Vec<Shape>,
    /// Shape of each piece, `None` for whole molecules.
    shape_of: Vec<Option<u8>>,
    answers: FxHashMap<(Multiset, Multiset), bool>,
    dead: FxHashSet<Growth>,
}

/// How many answers are remembered before all are forgotten, so that memory has a bound.
const MOST_REMEMBERED: usize = 200_000;

impl<'p> Realizer<'p> {
    /// For these pieces.
    pub fn new(pieces: &'p Pieces) -> Self {
        let mut shapes: Vec<Shape> = Vec::new();
        let shape_of = pieces.all.iter().map(|piece| {
            if piece.role == Role::Whole {
                return None;
            }
            let shape = shape(piece);
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
            answers: FxHashMap::default(),
            dead: FxHashSet::default(),
        }
    }

    /// Whether a molecule can be drawn of these pieces (place in the table, count).
    pub fn is_realizable(&mut self, assembly: &[(u16, u8)]) -> bool {
        let mut chain = Multiset::new();
        let mut ring = Multiset::new();
        let mut has_ring = false;
        for &(piece, count) in assembly {
            let own = &self.pieces.all[usize::from(piece)];
            let Some(shape) = self.shape_of[usize::from(piece)] else {
                return true;
            };
            let of_ring = own.role != Role::Chain;
            has_ring |= of_ring;
            if !own.ends.is_empty() {
                add(if of_ring { &mut ring } else { &mut chain }, shape, count);
            }
        }
        if self.pieces.is_replaced(assembly) {
            return false;
        }
        if chain.is_empty() {
            return has_ring && ring.is_empty();
        }
        let key = (chain, ring);
        if let Some(&known) = self.answers.get(&key) {
            return known;
        }
        let (chain, ring) = &key;
        let mut rest = chain.clone();
        let mut sites: SmallVec<[Site; 8]> = SmallVec::new();
        if has_ring {
            for &(shape, count) in ring {
                for _ in 0..count {
                    sites.extend_from_slice(&self.shapes[usize::from(shape)]);
                }
            }
        } else {
            // any piece can be the first; one with many ends parts the rest best
            let ends = |shape: u8| -> u32 {
                let sites = self.shapes[usize::from(shape)].iter();
                sites.map(|site| u32::from(site.open)).sum()
            };
            let first = chain.iter().map(|one| one.0).max_by_key(|&one| ends(one));
            let first = first.expect("there is a piece");
            remove(&mut rest, first);
            sites.extend_from_slice(&self.shapes[usize::from(first)]);
        }
        self.dead.clear();
        let answer = self.grows(sites, rest);
        if self.answers.len() > MOST_REMEMBERED {
            self.answers.clear();
        }
        self.answers.insert(key, answer);
        answer
    }

    /// Whether all that is left can be joined to the open sites, none staying open.
    fn grows(&mut self, mut sites: SmallVec<[Site; 8]>, rest: Multiset) -> bool {
        if rest.is_empty() || sites.is_empty() {
            return rest.is_empty() && sites.is_empty();
        }
        sites.sort_unstable();
        let growth = (sites, rest);
        if self.dead.contains(&growth) {
            return false;
        }
        let (sites, rest) = &growth;
        // the site that the fewest pieces fit
        let mut fewest: Option<(usize, u32)> = None;
        for (at, site) in sites.iter().enumerate() {
            if at > 0 && sites[at - 1] == *site {
                continue;
            }
            let fitting: u32 = rest
                .iter()
                .filter(|one| self.fits(site, one.0))
                .map(|one| u32::from(one.1))
                .sum();
            if fitting < u32::from(site.open) {
                self.dead.insert(growth);
                return false;
            }
            if fewest.is_none_or(|(_, known)| fitting < known) {
                fewest = Some((at, fitting));
            }
        }
        let (at, _) = fewest.expect("there is an open site");
        let site = sites[at];
        for &(shape, _) in rest {
            let entries = self.shapes[usize::from(shape)].clone();
            for (which, entry) in entries.iter().enumerate() {
                if !self.may_join(&site, entry) {
                    continue;
                }
                let mut next = sites.clone();
                match self.with(site, entry.kind) {
                    Some(left) => next[at] = left,
                    None => {
                        next.swap_remove(at);
                    }
                }
                for (other, own) in entries.iter().enumerate() {
                    if other != which {
                        next.push(*own);
                    } else if let Some(left) = self.with(*own, site.kind) {
                        next.push(left);
                    }
                }
                let mut left = rest.clone();
                remove(&mut left, shape);
                if self.grows(next, left) {
                    return true;
                }
            }
        }
        self.dead.insert(growth);
        false
    }

    /// Whether some end of a shape fits a site.
    fn fits(&self, site: &Site, shape: u8) -> bool {
        let entries = self.shapes[usize::from(shape)].iter();
        entries.into_iter().any(|entry| self.may_join(site, entry))
    }

    fn may_join(&self, site: &Site, entry: &Site) -> bool {
        self.pieces.joins(site.kind, entry.kind) && site.not & entry.kind.bit() == 0
    }

    /// A site after something was joined to it; `None` if it is full.
    fn with(&self, site: Site, joined: Kind) -> Option<Site> {
        let known = &self.pieces.kinds[usize::from(site.kind.0)];
        (site.open > 1).then(|| Site {
            open: site.open - 1,
            not: site.not | known.not_beside[usize::from(joined.0)],
            ..site
        })
    }
}

fn shape(piece: &Piece) -> Shape {
    let fragment = piece.fragment();
    let mut sites: SmallVec<[(usize, Site); 4]> = SmallVec::new();
    for (end, &kind) in piece.ends.iter().enumerate() {
        let atom = fragment.atom_of_end(end);
        match sites.iter_mut().find(|known| known.0 == atom) {
            Some(known) => known.1.open += 1,
            None => sites.push((
                atom,
                Site {
                    kind,
                    open: 1,
                    not: 0,
                },
            )),
        }
    }
    let mut shape: Shape = sites.into_iter().map(|one| one.1).collect();
    shape.sort_unstable();
    shape
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
