//! Which ends of a piece are alike.

use rustc_hash::FxHashMap;
use smallvec::SmallVec;

use super::fragment::Fragment;
use crate::chem::{Canonicalizer, Keys, Molecule};

/// A way to exchange the ends of a piece that leaves it as it is: the new place
/// of each end.
pub(super) type Exchange = SmallVec<[u8; 4]>;

/// The symmetry of a piece.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub(super) struct Symmetry {
    /// Every exchange of ends that leaves the piece as it is, the identity among them.
    pub(super) exchanges: Vec<Exchange>,
    /// The first end that each end can be exchanged with.
    pub(super) first_alike: SmallVec<[u8; 4]>,
    /// Whether a member of a ring may be turned round, and how its ends go then.
    pub(super) turned: Option<Exchange>,
}

/// What stands at an end while it is looked at: all different.
const MARKS: [&str; 4] = ["F", "Cl", "Br", "I"];

/// What closes a ring to its two sides: different too.
const SIDES: [&str; 2] = ["[SiH3]", "P"];

impl Symmetry {
    /// Of a fragment, found by drawing it with different marks in every order.
    pub(super) fn of(fragment: &Fragment) -> Self {
        let mut canonicalizer = Canonicalizer::new();
        let mut keys = Keys::default();
        let mut key = |order: &[u8], turned: bool| {
            let text = marked(fragment, order, turned);
            let molecule = Molecule::from_smiles(&text).expect("marks are atoms");
            canonicalizer.keys_into(&molecule, &mut keys);
            keys.full.clone()
        };
        let orders = orders(fragment.ends());
        let plain: FxHashMap<usize, String> = orders
            .iter()
            .enumerate()
            .map(|(at, order)| (at, key(order, false)))
            .collect();
        let same = |at: &usize| plain[at] == plain[&0];
        let exchanges: Vec<Exchange> = (0..orders.len())
            .filter(same)
            .map(|at| orders[at].clone())
            .collect();
        let first_alike = (0..fragment.ends() as u8)
            .map(|end| {
                let alike = exchanges.iter().map(|order| order[usize::from(end)]);
                alike.min().unwrap_or(end)
            })
            .collect();
        let turned = fragment.is_ring_member().then(|| {
            let found = orders.iter().find(|order| key(order, true) == plain[&0]);
            found.cloned()
        });
        Self {
            exchanges,
            first_alike,
            turned: turned.flatten(),
        }
    }
}

/// Every order of `n` ends, the natural one first.
fn orders(n: usize) -> Vec<Exchange> {
    let mut all = vec![Exchange::new()];
    for _ in 0..n {
        let longer = all.iter().flat_map(|order: &Exchange| {
            let free = (0..n as u8).filter(|end| !order.contains(end));
            free.map(|end| {
                let mut order = order.clone();
                order.push(end);
                order
            })
        });
        all = longer.collect();
    }
    all
}

fn marked(fragment: &Fragment, order: &[u8], turned: bool) -> String {
    let mut out = String::new();
    let mut mark = |out: &mut String, end: usize| out.push_str(MARKS[usize::from(order[end])]);
    if !fragment.is_ring_member() {
        fragment.draw(&mut out, None, &mut mark);
        return out;
    }
    // an aromatic member is looked at as if it were not: only its sides matter
    out.push_str(SIDES[0]);
    fragment.draw_in_ring(&mut out, turned, ["", ""], &mut mark);
    out.push_str(SIDES[1]);
    out.replace('c', "C")
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn exchanges_are_those_of_the_drawing() {
        for (text, exchanges, first) in [
            ("{1}C{2}", 2, &[0, 0][..]),
            ("{1}C({2})({3}){4}", 24, &[0, 0, 0, 0]),
            ("{1}CC(=O){2}", 1, &[0, 1]),
            ("{1}C=C{2}", 2, &[0, 0]),
            ("{1}C=C({2}){3}", 2, &[0, 1, 1]),
            ("{1}C({2})=C({3}){4}", 8, &[0, 0, 0, 0]),
            ("{1}C(=O)N(C{2})C{3}", 2, &[0, 1, 1]),
        ] {
            let symmetry = Symmetry::of(&Fragment::read(text).unwrap());
            assert_eq!(symmetry.exchanges.len(), exchanges, "{text}");
            assert_eq!(symmetry.first_alike.as_slice(), first, "{text}");
        }
    }

    #[test]
    fn members_of_rings_turn_where_both_sides_are_alike() {
        for (text, turns) in [
            ("{<}COC{>}", true),
            ("{<}CC(=O){>}", false),
            ("{<}c(C{1}){>}", true),
            ("{<}COC({1}){>}", false),
            ("{<}C({1})({2}){>}", true),
        ] {
            let symmetry = Symmetry::of(&Fragment::read(text).unwrap());
            assert_eq!(symmetry.turned.is_some(), turns, "{text}");
        }
    }
}
