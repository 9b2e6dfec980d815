//! Which measurement would tell the best candidates apart.

use super::ranked::Ranked;
use crate::evaluate::{Plan, probability_of_better};
use crate::numeric::{normal_cdf, normal_density};
use crate::report::probability_in_words;

/// Candidates from the top among which a measurement is looked for.
const LOOKED_AT: usize = 20;

/// Expected gains of the best score below this are not worth a mention.
const WORTH_TELLING: f64 = 1e-4;

/// A measurement with its chance to change the order at the top.
#[derive(Clone, Debug, PartialEq)]
pub struct NextMeasurement {
    /// Place of the candidate in the ranking, from 0.
    pub place: usize,
    /// What to measure, in words: `the boiling point of anisole`.
    pub what: String,
    /// How much better the best expected score is likely to be once it is known.
    pub gain: f64,
    /// Probability that another candidate leads once it is known.
    pub chance: f64,
    /// Share of the variance of the candidate's score that it would settle.
    pub share: f64,
    /// Why, in one sentence.
    pub reason: String,
}

/// The single measurement on one of the first candidates that is worth most for
/// telling which of them has the best expected score; `None` where none is.
///
/// Measuring one source of one candidate moves its expected score; by how much
/// is taken as normal, with the variance of [`Plan::variance_by_source`]. The
/// best candidate loses its place where it falls below the next best, another
/// takes it where it rises above the best. The worth is the expected value of
/// that information: with the standard deviation s and the difference d of the
/// two scores, s·φ(d/s) − |d|·Φ(−|d|/s), so that equal candidates are told apart
/// by what moves them most. Of equal worths the first place, then the first
/// target counts.
///
/// # Source
///
/// H. Raiffa, R. Schlaifer, Applied Statistical Decision Theory (1961), chapter
/// 5 (linear loss, normal prior); from memory.
pub fn next_measurement(plan: &Plan, ranking: &[Ranked]) -> Option<NextMeasurement> {
    let known = ranking.first()?.known;
    let alike = ranking.iter().take(LOOKED_AT);
    let alike = alike.take_while(|row| row.known > 0.0 && row.known.total_cmp(&known).is_eq());
    let scores: Vec<f64> = alike.map(|row| row.score).collect();
    // Of equal scores the first.
    let best_but = |left_out: Option<usize>| {
        let others = (0..scores.len()).filter(|&place| Some(place) != left_out);
        others.reduce(|best, place| {
            if scores[place] > scores[best] {
                place
            } else {
                best
            }
        })
    };
    let best = best_but(None)?;
    let mut found: Option<NextMeasurement> = None;
    for (place, row) in ranking[..scores.len()].iter().enumerate() {
        let rival = match place == best {
            true => best_but(Some(best)),
            false => Some(best),
        };
        let Some(rival) = rival else {
            continue;
        };
        for (source, variance) in plan.variance_by_source(&row.figures, &row.intervals) {
            let of_place = (row.score, variance);
            let of_rival = (scores[rival], 0.0);
            if variance <= 0.0 || row.variance <= 0.0 {
                continue;
            }
            let chance = match place == best {
                true => probability_of_better(of_rival, of_place),
                false => probability_of_better(of_place, of_rival),
            };
            let distance = (row.score - scores[rival]).abs();
            let gain = expected_gain(distance, variance.sqrt());
            let is_better = found.as_ref().is_none_or(|known| gain > known.gain);
            if gain < WORTH_TELLING || !is_better {
                continue;
            }
            let share = (variance / row.variance).min(1.0);
            let what = plan.sources[source].in_words(plan, row.called());
            let other = ranking[rival].called();
            let change = match place == best {
                true => format!("put {other} before it"),
                false => format!("put it before {other}"),
            };
            let reason = format!(
                "{what}, which makes up {:.0} % of the variance of its score; knowing it would {change} with a probability of {}",
                100.0 * share,
                probability_in_words(chance)
            );
            found = Some(NextMeasurement {
                place,
                what,
                gain,
                chance,
                share,
                reason,
            });
        }
    }
    found
}

/// Expected gain of a choice between two scores that far apart, one of which
/// moves with this standard deviation, above 0.
fn expected_gain(distance: f64, deviation: f64) -> f64 {
    let deviate = distance / deviation;
    (deviation * normal_density(deviate) - distance * normal_cdf(-deviate)).max(0.0)
}

#[cfg(test)]
mod tests {
    use super::*;

    /// ∫ (z − u)⁺ φ(z) dz: 0.39894 at 0 and 0.08332 at 1, the unit normal loss
    /// integral as tables print it.
    #[test]
    fn the_gain_is_the_normal_loss_integral() {
        assert!((expected_gain(0.0, 1.0) - 0.398_94).abs() < 1e-5);
        assert!((expected_gain(1.0, 1.0) - 0.083_32).abs() < 1e-5);
        assert!((expected_gain(0.5, 0.5) - 0.041_66).abs() < 1e-5);
        assert!(expected_gain(9.0, 1.0) < 1e-15);
    }
}
