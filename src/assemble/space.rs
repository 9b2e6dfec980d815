//! The space of a search: which multisets of pieces there are, and how many.
//!
//! An assembly belongs to the space if its valences balance (a tree of its
//! chain pieces and at most one ring can be drawn, kinds of ends aside) and every
//! limit of `[assembly]` but the molar mass holds.

use std::sync::OnceLock;

use rustc_hash::FxHashMap;
use smallvec::SmallVec;

use super::limits::{ETHER, Limits};
use super::piece::{Pieces, Role};
use crate::chem::Element;

/// Everything that is counted and limited, by place.
pub(super) const COUNTERS: usize = 32;
pub(super) const PIECES: usize = 0;
pub(super) const HEAVY: usize = 1;
pub(super) const FUNCTIONAL: usize = 2;
pub(super) const NITROGEN: usize = 3;
pub(super) const HALOGEN: usize = 4;
pub(super) const BRANCHES: usize = 5;
pub(super) const QUATERNARY: usize = 6;
pub(super) const AROMATIC: usize = 7;
pub(super) const SATURATED: usize = 8;
pub(super) const CLASSES: usize = 9;

/// The most classes that can be counted.
pub const CLASS_LIMIT: usize = COUNTERS - CLASSES;

/// Counts by place.
pub(super) type Counters = [u8; COUNTERS];

/// What holds the molecule together.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum Skeleton {
    /// An open chain.
    Chain,
    /// A benzene ring with what hangs at it.
    Aromatic,
    /// A saturated ring of five or six with what hangs at it.
    Saturated,
    /// A molecule that is one piece.
    Whole,
}

impl Skeleton {
    /// Those that pieces are joined to.
    pub(super) const JOINED: [Self; 3] = [Self::Chain, Self::Aromatic, Self::Saturated];

    /// Whether a ring of this many aromatic and saturated atoms is this skeleton.
    fn is_complete(self, aromatic: u8, saturated: u8) -> bool {
        match self {
            Self::Chain => aromatic == 0 && saturated == 0,
            Self::Aromatic => aromatic == 6 && saturated == 0,
            Self::Saturated => aromatic == 0 && matches!(saturated, 5 | 6),
            Self::Whole => false,
        }
    }
}

/// A piece as the space sees it.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) struct Member {
    /// Its place in the table.
    pub(super) piece: u16,
    /// What it adds to each counter.
    pub(super) adds: Counters,
    /// What it adds to the balance of valences: ends less two in a chain, ends in a ring.
    pub(super) balance: i8,
    /// How often it may occur.
    pub(super) most: u8,
}

/// The pieces and limits of a search.
#[derive(Clone, Debug)]
pub struct Space {
    pub(super) members: Vec<Member>,
    pub(super) roles: Vec<Role>,
    pub(super) most: Counters,
    pub(super) least_pieces: u8,
    pub(super) least_heavy: u8,
    pub(super) kinds: u32,
    pub(super) rings: bool,
    size: OnceLock<u128>,
}

/// What of a part of an assembly decides how it may go on.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Hash)]
struct State {
    counters: [u8; State::COUNTERS],
    balance: i8,
    /// Classes that occur, as bits.
    kinds: u32,
}

impl State {
    const COUNTERS: usize = 20;
}

impl Space {
    /// The space of these limits.
    pub fn new(pieces: &Pieces, limits: &Limits) -> Self {
        let byte = |number: u32| u8::try_from(number).unwrap_or(u8::MAX);
        let mut most = [u8::MAX; COUNTERS];
        most[PIECES] = byte(limits.count.1);
        most[HEAVY] = byte(limits.heavy_atoms.1);
        most[FUNCTIONAL] = byte(limits.functional_groups);
        most[NITROGEN] = byte(limits.nitrogen_atoms);
        most[HALOGEN] = byte(limits.halogen_atoms);
        most[BRANCHES] = byte(limits.branches);
        most[QUATERNARY] = byte(limits.quaternary_carbons);
        most[AROMATIC] = 6;
        most[SATURATED] = 6;
        for (class, &limit) in limits.classes.iter().enumerate() {
            most[CLASSES + class] = byte(limit);
        }
        let mut members = Vec::new();
        let mut roles = Vec::new();
        for (at, piece) in pieces.all.iter().enumerate() {
            if !limits.pieces[at] || limits.each_piece[at] == 0 {
                continue;
            }
            let mut adds = [0; COUNTERS];
            adds[PIECES] = 1;
            adds[HEAVY] = byte(piece.heavy_atoms());
            let of = |element| piece.composition.count(element);
            adds[NITROGEN] = of(Element::N) as u8;
            let halogens = [Element::F, Element::Cl, Element::Br, Element::I];
            adds[HALOGEN] = halogens.into_iter().map(of).sum::<u16>() as u8;
            for &(class, number) in &piece.classes {
                adds[CLASSES + usize::from(class)] += number;
                if pieces.classes[usize::from(class)] != ETHER {
                    adds[FUNCTIONAL] += number;
                }
            }
            let ends = piece.ends.len() as i8;
            let balance = match piece.role {
                Role::Chain => {
                    adds[BRANCHES] = (ends - 2).max(0) as u8;
                    ends - 2
                }
                Role::Aromatic => {
                    adds[AROMATIC] = piece.ring_atoms() as u8;
                    ends
                }
                Role::Ring => {
                    adds[SATURATED] = piece.ring_atoms() as u8;
                    ends
                }
                Role::Whole => 0,
            };
            let plain = piece.classes.is_empty() && piece.heavy_atoms() == 1;
            let four =
                piece.role == Role::Chain && ends == 4 || piece.role == Role::Ring && ends == 2;
            adds[QUATERNARY] = u8::from(plain && four);
            members.push(Member {
                piece: at as u16,
                adds,
                balance,
                most: byte(limits.each_piece[at]),
            });
            roles.push(piece.role);
        }
        Self {
            members,
            roles,
            most,
            least_pieces: byte(limits.count.0),
            least_heavy: byte(limits.heavy_atoms.0),
            kinds: limits.functional_kinds,
            rings: limits.rings > 0,
            size: OnceLock::new(),
        }
    }

    /// Members that take part in a skeleton, by place.
    pub(super) fn of_role(&self, role: Role) -> impl Iterator<Item = usize> + '_ {
        let roles = self.roles.iter().enumerate();
        roles
            .filter(move |(_, own)| **own == role)
            .map(|(at, _)| at)
    }

    /// Whether the counters keep every upper limit.
    #[inline]
    pub(super) fn fits(&self, counters: &Counters) -> bool {
        counters.iter().zip(&self.most).all(|(n, most)| n <= most)
            && kinds_of(counters) <= self.kinds
    }

    /// Whether a whole molecule of the list belongs to the space.
    pub(super) fn takes_whole(&self, member: usize) -> bool {
        let adds = &self.members[member].adds;
        let classes = adds[CLASSES..].iter().zip(&self.most[CLASSES..]);
        // how small it may be, and of how many kinds, is its own affair
        adds[HEAVY] <= self.most[HEAVY] && classes.into_iter().all(|(has, most)| has <= most)
    }

    /// How many multisets the space holds: an account of its own, by adding one
    /// kind of piece after the other, that knows nothing of how the search goes.
    ///
    /// # Complexity
    ///
    /// States are distinct counters that a limit looks at. Found out once.
    pub fn size(&self) -> u128 {
        *self.size.get_or_init(|| {
            let whole = self.of_role(Role::Whole).filter(|&at| self.takes_whole(at));
            let whole = whole.count() as u128;
            let skeletons = Skeleton::JOINED.into_iter();
            let rings = skeletons.filter(|&one| one == Skeleton::Chain || self.rings);
            whole + rings.map(|one| self.size_of(one)).sum::<u128>()
        })
    }

    fn size_of(&self, skeleton: Skeleton) -> u128 {
        let ring = match skeleton {
            Skeleton::Chain | Skeleton::Whole => None,
            Skeleton::Aromatic => Some(Role::Aromatic),
            Skeleton::Saturated => Some(Role::Ring),
        };
        let of_ring = ring.into_iter().flat_map(|role| self.of_role(role));
        let mut members: Vec<usize> = of_ring.chain(self.of_role(Role::Chain)).collect();
        // what closes molecules comes last: until then a state has to leave room for it
        members.sort_by_key(|&at| {
            (
                self.is_plain(at),
                std::cmp::Reverse(self.members[at].balance),
            )
        });
        let watched = self.watched(&members);
        assert!(
            watched.len() <= State::COUNTERS,
            "limits are fewer than counters"
        );
        let wanted = if skeleton == Skeleton::Chain { -2 } else { 0 };
        let mask_counts = self.kinds_matter(&members);
        let mut states: FxHashMap<State, u128> = FxHashMap::default();
        states.insert(State::default(), 1);
        let most_pieces = i32::from(self.most[PIECES]);
        for &at in &members {
            let member = &self.members[at];
            let of_member = (0..CLASS_LIMIT).filter(|class| member.adds[CLASSES + class] > 0);
            let mask: u32 = of_member.map(|class| 1 << class).sum();
            let before: Vec<(State, u128)> = states.iter().map(|(&s, &n)| (s, n)).collect();
            for (mut state, ways) in before {
                for _ in 0..member.most {
                    state.balance += member.balance;
                    state.kinds |= if mask_counts { mask } else { 0 };
                    let mut fits = state.kinds.count_ones() <= self.kinds;
                    for (value, &counter) in state.counters.iter_mut().zip(&watched) {
                        *value += member.adds[counter];
                        fits &= *value <= self.most[counter];
                    }
                    // each piece that comes takes at most one valence away
                    let left = most_pieces - i32::from(state.counters[0]);
                    if !fits || i32::from(state.balance) - wanted > left {
                        break;
                    }
                    *states.entry(state).or_insert(0) += ways;
                }
            }
        }
        let place = |counter: usize| watched.iter().position(|&known| known == counter);
        debug_assert_eq!(place(PIECES), Some(0));
        let heavy = place(HEAVY).expect("always watched");
        let [aromatic, saturated] = [AROMATIC, SATURATED].map(place);
        states
            .iter()
            .filter(|(state, _)| {
                let of = |place: Option<usize>| place.map_or(0, |at| state.counters[at]);
                i32::from(state.balance) == wanted
                    && state.counters[0] >= self.least_pieces
                    && state.counters[heavy] >= self.least_heavy
                    && skeleton.is_complete(of(aromatic), of(saturated))
            })
            .map(|(_, ways)| ways)
            .sum()
    }

    /// Whether the limit on kinds of functional groups may stop at these members.
    pub(super) fn kinds_matter(&self, members: &[usize]) -> bool {
        let of_class = |class: usize| {
            let mut adds = members
                .iter()
                .map(|&at| self.members[at].adds[CLASSES + class]);
            adds.any(|add| add > 0)
        };
        let classes = (0..CLASS_LIMIT).filter(|&class| of_class(class)).count() as u32;
        // one more than functional groups: ethers are a kind, and not among them
        self.kinds < classes.min(u32::from(self.most[FUNCTIONAL]) + 1)
    }

    /// Whether a member is a plain carbon of a chain.
    fn is_plain(&self, at: usize) -> bool {
        let member = &self.members[at];
        self.roles[at] == Role::Chain && member.adds[HEAVY] == 1 && kinds_of(&member.adds) == 0
    }

    /// Counters that some limit may stop at, for these members.
    pub(super) fn watched(&self, members: &[usize]) -> SmallVec<[usize; 16]> {
        let pieces = u32::from(self.most[PIECES]);
        let binds = |counter: usize| {
            let most = members.iter().map(|&at| self.members[at].adds[counter]);
            let most = u32::from(most.max().unwrap_or(0));
            let reach = match counter {
                // classes are functional groups, which are limited together
                CLASSES.. if most > 0 && self.counts_as_functional(members, counter) => {
                    u32::from(self.most[FUNCTIONAL])
                }
                _ => most * pieces,
            };
            most > 0 && reach > u32::from(self.most[counter])
        };
        let always = [PIECES, HEAVY, AROMATIC, SATURATED];
        (0..COUNTERS)
            .filter(|counter| {
                let used = members
                    .iter()
                    .any(|&at| self.members[at].adds[*counter] > 0);
                match *counter {
                    PIECES | HEAVY => true,
                    counter if always.contains(&counter) => used,
                    counter => binds(counter),
                }
            })
            .collect()
    }

    /// Whether every member of a class adds as much to the functional groups.
    fn counts_as_functional(&self, members: &[usize], class: usize) -> bool {
        members.iter().all(|&at| {
            let adds = &self.members[at].adds;
            adds[class] <= adds[FUNCTIONAL]
        })
    }
}

/// How many classes of functional groups occur.
#[inline]
pub(super) fn kinds_of(counters: &Counters) -> u32 {
    let classes = counters[CLASSES..].iter();
    classes.map(|&number| u32::from(number > 0)).sum()
}
