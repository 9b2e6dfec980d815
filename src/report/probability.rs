//! Probabilities and bands in words.

use crate::quantity::Dimension;
use crate::quantity::unit::table_text;

/// A probability for people: `31 %`, `2.4 %`, `below 0.1 %`, `above 99.9 %`.
pub fn probability_in_words(probability: f64) -> String {
    let percent = 100.0 * probability;
    if probability <= 0.0 || probability >= 1.0 {
        format!("{percent:.0} %")
    } else if percent < 0.1 {
        "below 0.1 %".into()
    } else if percent > 99.9 {
        "above 99.9 %".into()
    } else if (9.95..90.05).contains(&percent) {
        format!("{percent:.0} %")
    } else {
        let text = format!("{percent:.1}");
        format!("{} %", text.strip_suffix(".0").unwrap_or(&text))
    }
}

/// Why a candidate misses a must: the value, what was wanted, and the
/// probability that the true value meets it all the same, where there is one.
pub fn missed_in_words(
    name: &str,
    value: f64,
    dimension: Dimension,
    wanted: &str,
    probability: f64,
) -> String {
    let mut text = format!(
        "{name} is {}, wanted {wanted}",
        table_text(value, dimension)
    );
    if probability > 0.0 {
        text.push_str("; probability of meeting it ");
        text.push_str(&probability_in_words(probability));
    }
    text
}

/// Ranks from 1 in ascending order, neighbours drawn together: `1–7, 9`.
pub fn ranks_in_words(ranks: impl IntoIterator<Item = u64>) -> String {
    let mut stretches: Vec<(u64, u64)> = Vec::new();
    for rank in ranks {
        match stretches.last_mut() {
            Some((_, last)) if *last + 1 == rank => *last = rank,
            _ => stretches.push((rank, rank)),
        }
    }
    let texts = stretches
        .into_iter()
        .map(|(first, last)| match last - first {
            0 => first.to_string(),
            1 => format!("{first}, {last}"),
            _ => format!("{first}–{last}"),
        });
    texts.collect::<Vec<_>>().join(", ")
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn probabilities_read_as_a_person_would_say_them() {
        for (probability, text) in [
            (0.0, "0 %"),
            (4e-5, "below 0.1 %"),
            (0.024, "2.4 %"),
            (0.05, "5 %"),
            (0.3149, "31 %"),
            (0.957, "95.7 %"),
            (0.999_9, "above 99.9 %"),
            (1.0, "100 %"),
        ] {
            assert_eq!(probability_in_words(probability), text);
        }
    }

    #[test]
    fn neighbouring_ranks_are_drawn_together() {
        assert_eq!(ranks_in_words([1, 2, 3, 4, 6, 8, 9]), "1–4, 6, 8, 9");
        assert_eq!(ranks_in_words([1]), "1");
    }

    #[test]
    fn a_chance_is_told_where_there_is_one() {
        let told = |probability| {
            missed_in_words(
                "boiling_point",
                380.0,
                Dimension::Temperature,
                "at least 390 K",
                probability,
            )
        };
        assert_eq!(told(0.0), "boiling_point is 380 K, wanted at least 390 K");
        assert_eq!(
            told(0.003),
            "boiling_point is 380 K, wanted at least 390 K; probability of meeting it 0.3 %"
        );
    }
}
