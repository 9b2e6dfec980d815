//! The best assemblies of a search, in bounded memory.

use std::collections::BinaryHeap;

use serde::{Deserialize, Serialize};
use smallvec::SmallVec;

/// An assembly that was scored.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct Scored {
    /// The score as a whole number, see [`score_key`].
    pub key: u64,
    /// How far its preferences have come, see [`advance_key`]: tells equal scores apart,
    /// such as those that can be no better.
    pub advance: i64,
    /// Pieces (place in the table) with their counts, ascending.
    pub pieces: SmallVec<[(u16, u8); 12]>,
}

/// Steps of a score from 0 to 1: what estimates do not tell apart is one.
const SCORE_STEPS: f64 = 1e3;

/// A score from 0 to 1 as a whole number of thousandths, so that no last digit decides.
pub fn score_key(score: f64) -> u64 {
    (score.clamp(0.0, 1.0) * SCORE_STEPS).round() as u64
}

/// The score that a key stands for.
pub(super) fn score_of_key(key: u64) -> f64 {
    key as f64 / SCORE_STEPS
}

/// How far preferences have come as a whole number: steps of 10⁻⁶.
pub fn advance_key(advance: f64) -> i64 {
    // a cast of what is too large, or no number, is the nearest there is
    (advance * 1e6).round() as i64
}

impl Ord for Scored {
    /// Better ones are less: a higher score, then preferences that have come further,
    /// then the fewer and earlier pieces.
    fn cmp(&self, other: &Self) -> std::cmp::Ordering {
        other
            .key
            .cmp(&self.key)
            .then_with(|| other.advance.cmp(&self.advance))
            .then_with(|| self.pieces.cmp(&other.pieces))
    }
}

impl PartialOrd for Scored {
    fn partial_cmp(&self, other: &Self) -> Option<std::cmp::Ordering> {
        Some(self.cmp(other))
    }
}

/// The best so many.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Best {
    most: usize,
    /// The worst of the kept on top.
    kept: SortedHeap,
}

/// A heap that compares by what it holds.
#[derive(Clone, Debug, Default)]
struct SortedHeap(BinaryHeap<Scored>);

impl PartialEq for SortedHeap {
    fn eq(&self, other: &Self) -> bool {
        self.0.clone().into_sorted_vec() == other.0.clone().into_sorted_vec()
    }
}

impl Best {
    /// Room for so many.
    pub fn new(most: usize) -> Self {
        Self {
            most,
            kept: SortedHeap::default(),
        }
    }

    /// Whether a score could still be among the best.
    #[inline]
    pub fn takes(&self, key: u64) -> bool {
        self.kept.0.len() < self.most || self.kept.0.peek().is_some_and(|worst| key >= worst.key)
    }

    /// Offers an assembly.
    pub fn offer(&mut self, scored: Scored) {
        if self.kept.0.len() < self.most {
            self.kept.0.push(scored);
        } else if let Some(mut worst) = self.kept.0.peek_mut()
            && scored < *worst
        {
            *worst = scored;
        }
    }

    /// Offers all that another holds: in any order, the same are kept.
    pub fn merge(&mut self, other: Self) {
        for scored in other.kept.0 {
            self.offer(scored);
        }
    }

    /// The best score so far.
    pub fn best(&self) -> Option<u64> {
        self.kept.0.iter().map(|scored| scored.key).max()
    }

    /// The kept, best first.
    pub fn sorted(&self) -> Vec<Scored> {
        self.kept.0.clone().into_sorted_vec()
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn scored(key: u64, piece: u16) -> Scored {
        Scored {
            key,
            advance: 0,
            pieces: SmallVec::from_slice(&[(piece, 1)]),
        }
    }

    #[test]
    fn the_order_of_offers_does_not_matter() {
        let all: Vec<Scored> = (0_u16..40)
            .map(|at| scored(u64::from(at % 7), at))
            .collect();
        let mut forward = Best::new(5);
        all.iter().cloned().for_each(|one| forward.offer(one));
        let mut backward = Best::new(5);
        all.iter()
            .rev()
            .cloned()
            .for_each(|one| backward.offer(one));
        assert_eq!(forward.sorted(), backward.sorted());
        let pieces: Vec<u16> = forward.sorted().iter().map(|one| one.pieces[0].0).collect();
        assert_eq!(pieces, [6, 13, 20, 27, 34]);
        assert!(forward.takes(6) && !forward.takes(5));
    }
}
