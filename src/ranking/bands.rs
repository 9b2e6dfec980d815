//! Candidates of a ranking that cannot be told apart.

use super::ranked::Ranked;
use crate::evaluate::probability_of_better;

/// A candidate is told apart from the first of a band where its chance to score
/// better is not above this.
pub const BAND_CHANCE: f64 = 0.2;

/// Places after the first of a band among which its members are looked for.
const FARTHEST: usize = 1_000;

/// Gives every candidate with a score the number of its band, from 1.
///
/// The first candidate without a band begins one; to it belong all later ones
/// whose chance to score better than it is above [`BAND_CHANCE`], scores being
/// normal and independent ([`probability_of_better`]), and which know the same
/// share of the weights. A candidate of a later band may stand between those of
/// an earlier one. Equal exact scores share a band.
///
/// # Complexity
///
/// At most a thousand comparisons for each band.
pub fn number_bands(ranking: &mut [Ranked]) {
    let mut bands = 0;
    for first in 0..ranking.len() {
        if ranking[first].band.is_some() || ranking[first].known <= 0.0 {
            continue;
        }
        bands += 1;
        let (before, after) = ranking.split_at_mut(first + 1);
        let leader = &mut before[first];
        leader.band = Some(bands);
        for other in after.iter_mut().take(FARTHEST) {
            // Scores of other shares of the weights are not comparable.
            if other.known.total_cmp(&leader.known).is_ne() {
                break;
            }
            let chance = probability_of_better(
                (other.score, other.variance),
                (leader.score, leader.variance),
            );
            if other.band.is_none() && chance > BAND_CHANCE {
                other.band = Some(bands);
            }
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn bands(of: &[(f64, f64, f64)]) -> Vec<Option<u64>> {
        let mut ranking: Vec<Ranked> = of
            .iter()
            .map(|&(known, score, variance)| Ranked {
                known,
                score,
                variance,
                ..Ranked::default()
            })
            .collect();
        number_bands(&mut ranking);
        ranking.iter().map(|row| row.band).collect()
    }

    #[test]
    fn exact_scores_are_told_apart_unless_they_are_equal() {
        let found = bands(&[(1.0, 0.9, 0.0), (1.0, 0.9, 0.0), (1.0, 0.8999, 0.0)]);
        assert_eq!(found, [Some(1), Some(1), Some(2)]);
    }

    #[test]
    fn a_wide_score_further_down_belongs_to_the_first() {
        // Standard deviations 0.01 and 0.2: chances of 0.2 % and 40 %.
        let found = bands(&[(1.0, 0.85, 1e-4), (1.0, 0.81, 1e-4), (1.0, 0.8, 0.04)]);
        assert_eq!(found, [Some(1), Some(2), Some(1)]);
    }

    /// Φ(−0.85) = 0.198 and Φ(−0.83) = 0.203 (Abramowitz and Stegun, table 26.1).
    #[test]
    fn the_chance_of_a_band_is_one_in_five() {
        let deviation = 0.1_f64;
        let variance = deviation * deviation / 2.0;
        let below = |deviates: f64| (1.0, 0.8 - deviates * deviation, variance);
        let found = bands(&[(1.0, 0.8, variance), below(0.83), below(0.85)]);
        assert_eq!(found, [Some(1), Some(1), Some(2)]);
    }

    #[test]
    fn incomplete_candidates_have_bands_of_their_own_and_none_without_score() {
        let found = bands(&[(1.0, 0.5, 0.04), (0.5, 0.9, 0.04), (0.0, 0.0, 0.0)]);
        assert_eq!(found, [Some(1), Some(2), None]);
    }
}
