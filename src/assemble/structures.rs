//! The structures of an assembly: each drawn once.
//!
//! A structure is a tree of pieces (a ring is one node of it). Trees of an open
//! chain are built from their centre outwards: from the piece all of whose
//! branches hold at most half of the pieces, or from the joint between two
//! halves. Branches are made once for each part of the assembly and numbered;
//! ends of a piece that can be exchanged get their branches in falling order.
//! So no structure comes twice, and none has to be recognised and thrown away;
//! what is compared is the order at one piece, or the turns of one ring.
//!
//! Two structures may still be one molecule where pieces meet in a way that a
//! chemist would cut otherwise; canonical SMILES tell that.

use rustc_hash::FxHashMap;
use smallvec::SmallVec;

use super::alike::Symmetry;
use super::piece::{Drawing, Kind, Kinds, Pieces, Role};

/// Pieces with their counts, ascending by place in the table, no zero counts.
pub(super) type Multiset = SmallVec<[(u16, u8); 12]>;

/// A branch by its number.
type BranchId = u32;

/// A tree with one end left open.
#[derive(Clone, Debug, PartialEq, Eq, Hash)]
struct Branch {
    piece: u16,
    /// The open end.
    entry: u8,
    /// What hangs at the other ends, in their order.
    children: SmallVec<[BranchId; 3]>,
    kind: Kind,
    takes: Kinds,
}

/// A member of a ring with what hangs at it.
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord)]
struct Decorated {
    piece: u16,
    turned: bool,
    children: SmallVec<[BranchId; 2]>,
}

/// The structures of one assembly.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Structures {
    /// SMILES as drawn, not canonical.
    pub drawn: Vec<String>,
    /// How many there are, those beyond the drawn ones included.
    pub found: u64,
    /// Whether that is all: no search was broken off.
    pub complete: bool,
}

/// Draws the structures of assemblies.
#[derive(Debug)]
pub struct Drawer<'p> {
    pieces: &'p Pieces,
    symmetries: Vec<Option<Symmetry>>,
    branches: Vec<Branch>,
    by_part: FxHashMap<Multiset, Vec<BranchId>>,
    numbers: FxHashMap<Branch, BranchId>,
    /// Steps left before the search for more is broken off.
    steps: u64,
}

/// Branches that are kept from one assembly to the next.
const MOST_BRANCHES: usize = 400_000;

/// Steps spent on the structures of one assembly.
const STEPS: u64 = 20_000_000;

impl<'p> Drawer<'p> {
    /// For these pieces.
    pub fn new(pieces: &'p Pieces) -> Self {
        let symmetries = pieces.all.iter().map(|piece| match &piece.drawing {
            Drawing::Fragment(fragment) => Some(Symmetry::of(fragment)),
            Drawing::Molecule(_) => None,
        });
        Self {
            pieces,
            symmetries: symmetries.collect(),
            branches: Vec::new(),
            by_part: FxHashMap::default(),
            numbers: FxHashMap::default(),
            steps: STEPS,
        }
    }

    /// The structures of an assembly (place in the table, count), at most `most`
    /// of them drawn and all counted.
    pub fn structures(&mut self, assembly: &[(u16, u8)], most: usize) -> Structures {
        if self.branches.len() > MOST_BRANCHES {
            self.forget();
        }
        self.steps = STEPS;
        let mut out = Structures::default();
        if let [(piece, 1)] = *assembly
            && let Drawing::Molecule(smiles) = &self.pieces.all[usize::from(piece)].drawing
        {
            out.drawn.push(smiles.clone());
            out.found = 1;
            out.complete = true;
            return out;
        }
        if self.pieces.is_replaced(assembly) {
            out.complete = true;
            return out;
        }
        let role = |piece: u16| self.pieces.all[usize::from(piece)].role;
        let (chain, ring): (Multiset, Multiset) = assembly
            .iter()
            .copied()
            .partition(|one| role(one.0) == Role::Chain);
        if ring.is_empty() {
            self.trees(&chain, most, &mut out);
        } else {
            self.rings(&ring, &chain, most, &mut out);
        }
        out.complete = self.steps > 0;
        out
    }

    /// Forgets the branches that were made for earlier assemblies.
    pub fn forget(&mut self) {
        self.branches.clear();
        self.by_part.clear();
        self.numbers.clear();
    }

    // ------------------------------------------------------------ open chains

    fn trees(&mut self, all: &Multiset, most: usize, out: &mut Structures) {
        let pieces = size(all);
        let half = (pieces - 1) / 2;
        for &(root, _) in all {
            let mut rest = all.clone();
            remove(&mut rest, root, 1);
            let ends = self.pieces.all[usize::from(root)].ends.len();
            if ends == 0 {
                continue;
            }
            let free: SmallVec<[u8; 4]> = (0..ends as u8).collect();
            self.fill(
                root,
                &free,
                &rest,
                half,
                &mut SmallVec::new(),
                &mut |this, children| {
                    let exchanges = &this.symmetries[usize::from(root)]
                        .as_ref()
                        .expect("a fragment")
                        .exchanges;
                    if !is_first(children, exchanges) {
                        return;
                    }
                    out.found += 1;
                    if out.drawn.len() < most {
                        let mut text = String::new();
                        this.draw_piece(&mut text, root, None, &free, children);
                        out.drawn.push(text);
                    }
                },
            );
        }
        if pieces.is_multiple_of(2) {
            self.halves(all, pieces / 2, most, out);
        }
    }

    /// Two halves joined in the middle.
    fn halves(&mut self, all: &Multiset, half: u32, most: usize, out: &mut Structures) {
        for part in self.parts(all, half, half) {
            let mut other = all.clone();
            for &(piece, count) in &part {
                remove(&mut other, piece, count);
            }
            if part > other {
                continue;
            }
            let (ones, others) = (self.of_part(&part), self.of_part(&other));
            for &one in &ones {
                for &two in &others {
                    if part == other && one > two {
                        continue;
                    }
                    if !self.may_join(one, two) {
                        continue;
                    }
                    out.found += 1;
                    if out.drawn.len() < most {
                        let mut text = String::new();
                        self.draw_joined(&mut text, one, two);
                        out.drawn.push(text);
                    }
                }
            }
        }
    }

    fn may_join(&self, one: BranchId, two: BranchId) -> bool {
        let [one, two] = [one, two].map(|branch| &self.branches[branch as usize]);
        one.takes & two.kind.bit() != 0 && two.takes & one.kind.bit() != 0
    }

    /// Parts of a multiset of so many pieces that may be a tree with one open end.
    fn parts(&self, whole: &Multiset, least: u32, most: u32) -> Vec<Multiset> {
        let mut parts = Vec::new();
        let mut chosen: SmallVec<[u8; 12]> = SmallVec::from_elem(0, whole.len());
        loop {
            let count: u32 = chosen.iter().map(|&n| u32::from(n)).sum();
            if (least..=most).contains(&count) && count > 0 {
                let picked = whole.iter().zip(&chosen).filter(|(_, n)| **n > 0);
                let part: Multiset = picked.map(|(one, &n)| (one.0, n)).collect();
                if self.valence(&part) == -1 {
                    parts.push(part);
                }
            }
            let mut at = 0;
            loop {
                if at == whole.len() {
                    return parts;
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

    fn valence(&self, part: &Multiset) -> i32 {
        let ends = |piece: u16| self.pieces.all[usize::from(piece)].ends.len() as i32;
        part.iter()
            .map(|&(piece, count)| (ends(piece) - 2) * i32::from(count))
            .sum()
    }

    /// The branches made of all of a part.
    fn of_part(&mut self, part: &Multiset) -> Vec<BranchId> {
        if let Some(known) = self.by_part.get(part) {
            return known.clone();
        }
        let mut found = Vec::new();
        for &(piece, _) in part {
            let mut rest = part.clone();
            remove(&mut rest, piece, 1);
            let own = &self.pieces.all[usize::from(piece)];
            let symmetry = self.symmetries[usize::from(piece)]
                .clone()
                .expect("a fragment");
            for entry in 0..own.ends.len() as u8 {
                if symmetry.first_alike[usize::from(entry)] != entry {
                    continue;
                }
                let free: SmallVec<[u8; 4]> = (0..own.ends.len() as u8)
                    .filter(|&end| end != entry)
                    .collect();
                // exchanges that leave the open end where it is
                let exchanges: Vec<SmallVec<[u8; 4]>> = symmetry
                    .exchanges
                    .iter()
                    .filter(|exchange| exchange[usize::from(entry)] == entry)
                    .map(|exchange| {
                        let place = |end: u8| {
                            free.iter().position(|&f| f == end).expect("stays free") as u8
                        };
                        free.iter()
                            .map(|&end| place(exchange[usize::from(end)]))
                            .collect()
                    })
                    .collect();
                let most = size(&rest);
                self.fill(
                    piece,
                    &free,
                    &rest,
                    most,
                    &mut SmallVec::new(),
                    &mut |this, children| {
                        if is_first(children, &exchanges) {
                            found.push(this.number(piece, entry, &free, children));
                        }
                    },
                );
            }
        }
        if self.steps > 0 {
            self.by_part.insert(part.clone(), found.clone());
        }
        found
    }

    fn number(&mut self, piece: u16, entry: u8, free: &[u8], children: &[BranchId]) -> BranchId {
        let own = &self.pieces.all[usize::from(piece)];
        let fragment = own.fragment();
        let kind = own.ends[usize::from(entry)];
        let known = &self.pieces.kinds[usize::from(kind.0)];
        let not = free.iter().zip(children).fold(0, |not, (&end, &child)| {
            let same = fragment.atom_of_end(end.into()) == fragment.atom_of_end(entry.into());
            let joined = self.branches[child as usize].kind;
            if same {
                not | known.not_beside[usize::from(joined.0)]
            } else {
                not
            }
        });
        let branch = Branch {
            piece,
            entry,
            children: children.into(),
            kind,
            takes: known.joins & !not,
        };
        let next = self.branches.len() as BranchId;
        *self.numbers.entry(branch.clone()).or_insert_with(|| {
            self.branches.push(branch);
            next
        })
    }

    /// Gives every free end of a piece a branch of at most `most` pieces, using up
    /// all of `rest`; hands on each way.
    fn fill(
        &mut self,
        piece: u16,
        free: &[u8],
        rest: &Multiset,
        most: u32,
        children: &mut SmallVec<[BranchId; 4]>,
        found: &mut dyn FnMut(&mut Self, &[BranchId]),
    ) {
        let at = children.len();
        if at == free.len() {
            if rest.is_empty() {
                found(self, children);
            }
            return;
        }
        let left = (free.len() - at) as u32;
        let total = size(rest);
        // what the others cannot take has to go here
        let least = total.saturating_sub((left - 1) * most).max(1);
        if total < left || self.steps == 0 {
            return;
        }
        let parts = match left {
            1 if total <= most && self.valence(rest) == -1 => vec![rest.clone()],
            1 => return,
            _ => self.parts(rest, least, most.min(total + 1 - left)),
        };
        let end = usize::from(free[at]);
        for part in parts {
            let mut after = rest.clone();
            for &(one, count) in &part {
                remove(&mut after, one, count);
            }
            for branch in self.of_part(&part) {
                self.steps = self.steps.saturating_sub(1);
                if !self.may_hang(piece, end, free, children, branch) {
                    continue;
                }
                children.push(branch);
                self.fill(piece, free, &after, most, children, found);
                children.pop();
            }
        }
    }

    /// Whether a branch may hang at an end beside what hangs there already.
    fn may_hang(
        &self,
        piece: u16,
        end: usize,
        free: &[u8],
        children: &[BranchId],
        branch: BranchId,
    ) -> bool {
        let own = &self.pieces.all[usize::from(piece)];
        let fragment = own.fragment();
        let kind = own.ends[end];
        let branch = &self.branches[branch as usize];
        branch.takes & kind.bit() != 0
            && self.pieces.joins(kind, branch.kind)
            && free.iter().zip(children).all(|(&other, &child)| {
                fragment.atom_of_end(other.into()) != fragment.atom_of_end(end)
                    || self
                        .pieces
                        .may_meet(kind, self.branches[child as usize].kind, branch.kind)
            })
    }

    // ------------------------------------------------------------------- rings

    fn rings(&mut self, ring: &Multiset, chain: &Multiset, most: usize, out: &mut Structures) {
        let members = size(ring) as usize;
        let mut placed: Vec<Decorated> = Vec::with_capacity(members);
        self.place(ring, chain, &mut placed, &mut |this, placed| {
            if !this.is_first_turn(placed) {
                return;
            }
            out.found += 1;
            if out.drawn.len() < most {
                let text = this.draw_ring(placed);
                out.drawn.push(text);
            }
        });
    }

    /// Places the members of a ring one after the other.
    fn place(
        &mut self,
        ring: &Multiset,
        chain: &Multiset,
        placed: &mut Vec<Decorated>,
        found: &mut dyn FnMut(&mut Self, &[Decorated]),
    ) {
        if ring.is_empty() {
            if chain.is_empty() {
                found(self, placed);
            }
            return;
        }
        for &(piece, _) in ring {
            if self.steps == 0 {
                return;
            }
            // the ring is written from its least member
            if placed.first().is_some_and(|first| first.piece > piece) {
                continue;
            }
            let mut left = ring.clone();
            remove(&mut left, piece, 1);
            let ends = self.pieces.all[usize::from(piece)].ends.len();
            let symmetry = self.symmetries[usize::from(piece)]
                .clone()
                .expect("a fragment");
            let free: SmallVec<[u8; 4]> = (0..ends as u8).collect();
            let last_with_ends = left
                .iter()
                .all(|one| self.pieces.all[usize::from(one.0)].ends.is_empty());
            for part in self.shares(chain, ends, last_with_ends) {
                let mut after = chain.clone();
                for &(one, count) in &part {
                    remove(&mut after, one, count);
                }
                let mut ways: Vec<SmallVec<[BranchId; 2]>> = Vec::new();
                let size = size(&part);
                self.fill(
                    piece,
                    &free,
                    &part,
                    size,
                    &mut SmallVec::new(),
                    &mut |_, children| {
                        if is_first(children, &symmetry.exchanges) {
                            ways.push(children.into());
                        }
                    },
                );
                for children in ways {
                    let turns: &[bool] = if symmetry.turned.is_some() {
                        &[false]
                    } else {
                        &[false, true]
                    };
                    for &turned in turns {
                        placed.push(Decorated {
                            piece,
                            turned,
                            children: children.clone(),
                        });
                        self.place(&left, &after, placed, found);
                        placed.pop();
                    }
                }
            }
        }
    }

    /// What of the chain pieces may hang at a member with so many ends.
    fn shares(&self, chain: &Multiset, ends: usize, all: bool) -> Vec<Multiset> {
        if ends == 0 {
            return vec![Multiset::new()];
        }
        if all {
            return vec![chain.clone()];
        }
        let mut parts = Vec::new();
        let mut chosen: SmallVec<[u8; 12]> = SmallVec::from_elem(0, chain.len());
        loop {
            let picked = chain.iter().zip(&chosen).filter(|(_, n)| **n > 0);
            let part: Multiset = picked.map(|(one, &n)| (one.0, n)).collect();
            if self.valence(&part) == -(ends as i32) {
                parts.push(part);
            }
            let mut at = 0;
            loop {
                if at == chain.len() {
                    return parts;
                }
                if chosen[at] < chain[at].1 {
                    chosen[at] += 1;
                    break;
                }
                chosen[at] = 0;
                at += 1;
            }
        }
    }

    /// Whether a ring is written as the first of all its turns and reflections.
    fn is_first_turn(&self, placed: &[Decorated]) -> bool {
        let n = placed.len();
        let reflected: Vec<Decorated> =
            placed.iter().rev().map(|one| self.reflected(one)).collect();
        (0..n).all(|start| {
            let turned = |ring: &[Decorated], at: usize| ring[(start + at) % n].clone();
            let compare = |ring: &[Decorated]| {
                (0..n)
                    .map(|at| placed[at].cmp(&turned(ring, at)))
                    .find(|order| order.is_ne())
                    .unwrap_or(std::cmp::Ordering::Equal)
                    .is_le()
            };
            compare(placed) && compare(&reflected)
        })
    }

    /// A member seen from the other side.
    fn reflected(&self, one: &Decorated) -> Decorated {
        let symmetry = self.symmetries[usize::from(one.piece)]
            .as_ref()
            .expect("a fragment");
        let mut seen = one.clone();
        match &symmetry.turned {
            Some(order) => {
                for (end, &to) in order.iter().enumerate() {
                    seen.children[usize::from(to)] = one.children[end];
                }
                // alike ends carry their branches in falling order
                let orders = symmetry.exchanges.iter().map(|exchange| {
                    let mut other = seen.children.clone();
                    for (end, &to) in exchange.iter().enumerate() {
                        other[usize::from(to)] = seen.children[end];
                    }
                    other
                });
                seen.children = orders.max().unwrap_or_default();
            }
            None => seen.turned = !one.turned,
        }
        seen
    }

    // ----------------------------------------------------------------- drawing

    fn draw_piece(
        &self,
        out: &mut String,
        piece: u16,
        entry: Option<u8>,
        free: &[u8],
        children: &[BranchId],
    ) {
        let fragment = self.pieces.all[usize::from(piece)].fragment();
        fragment.draw(out, entry.map(usize::from), &mut |out, end| {
            let at = free.iter().position(|&free| usize::from(free) == end);
            self.draw_branch(out, children[at.expect("every end but the entry is free")]);
        });
    }

    fn draw_branch(&self, out: &mut String, branch: BranchId) {
        let branch = &self.branches[branch as usize];
        let ends = self.pieces.all[usize::from(branch.piece)].ends.len() as u8;
        let free: SmallVec<[u8; 4]> = (0..ends).filter(|&end| end != branch.entry).collect();
        self.draw_piece(
            out,
            branch.piece,
            Some(branch.entry),
            &free,
            &branch.children,
        );
    }

    fn draw_joined(&self, out: &mut String, one: BranchId, two: BranchId) {
        let branch = &self.branches[one as usize];
        let fragment = self.pieces.all[usize::from(branch.piece)].fragment();
        let ends = self.pieces.all[usize::from(branch.piece)].ends.len() as u8;
        let free: SmallVec<[u8; 4]> = (0..ends).filter(|&end| end != branch.entry).collect();
        fragment.draw(out, None, &mut |out, end| {
            let at = free.iter().position(|&free| usize::from(free) == end);
            self.draw_branch(out, at.map_or(two, |at| branch.children[at]));
        });
    }

    fn draw_ring(&self, placed: &[Decorated]) -> String {
        let mut text = String::new();
        let last = placed.len() - 1;
        for (at, one) in placed.iter().enumerate() {
            let marks = [
                if at == 0 { "1" } else { "" },
                if at == last { "1" } else { "" },
            ];
            let fragment = self.pieces.all[usize::from(one.piece)].fragment();
            fragment.draw_in_ring(&mut text, one.turned, marks, &mut |out, end| {
                self.draw_branch(out, one.children[end]);
            });
        }
        text
    }
}

/// Whether no exchange of alike ends puts greater branches first.
fn is_first(children: &[BranchId], exchanges: &[SmallVec<[u8; 4]>]) -> bool {
    exchanges.iter().all(|exchange| {
        let seen = exchange.iter().map(|&from| children[usize::from(from)]);
        children.iter().copied().cmp(seen).is_ge()
    })
}

fn size(multiset: &Multiset) -> u32 {
    multiset.iter().map(|one| u32::from(one.1)).sum()
}

fn remove(multiset: &mut Multiset, piece: u16, count: u8) {
    let at = multiset
        .binary_search_by_key(&piece, |one| one.0)
        .expect("what is taken away was there");
    multiset[at].1 -= count;
    if multiset[at].1 == 0 {
        multiset.remove(at);
    }
}
