//! Fractions of a composition.

use thiserror::Error;

/// How far the sum of fractions may be from 1: room for `0.333, 0.333, 0.334`
/// written with four digits, none for a forgotten component.
pub const FRACTION_SUM_TOLERANCE: f64 = 1e-4;

/// Why numbers are not the fractions of a composition.
///
/// The message continues a sentence whose subject is the list.
#[derive(Clone, Copy, Debug, PartialEq, Error)]
pub enum FractionError {
    /// Another number of fractions than of components.
    #[error("holds {fractions} for {components} component{}", if *.components == 1 { "" } else { "s" })]
    Count {
        /// Fractions given.
        fractions: usize,
        /// Components given.
        components: usize,
    },
    /// A fraction below 0 or above 1, or not a number.
    #[error("holds {value} for component {component}, outside 0 to 1")]
    Range {
        /// Component, from 1.
        component: usize,
        /// The fraction.
        value: f64,
    },
    /// The fractions do not add up to 1.
    #[error("adds up to {sum}, not to 1")]
    Sum {
        /// What they add up to.
        sum: f64,
    },
}

/// The fractions of `components` components, divided by their sum.
///
/// A sum within [`FRACTION_SUM_TOLERANCE`] of 1 is taken for rounding and
/// divided out, so that the result adds up to 1; any other sum is refused
/// rather than rescaled. A fraction of 0 is allowed.
///
/// # Errors
///
/// See [`FractionError`].
pub fn checked_fractions(fractions: &[f64], components: usize) -> Result<Vec<f64>, FractionError> {
    if fractions.len() != components {
        return Err(FractionError::Count {
            fractions: fractions.len(),
            components,
        });
    }
    for (position, &value) in fractions.iter().enumerate() {
        if !(0.0..=1.0).contains(&value) {
            return Err(FractionError::Range {
                component: position + 1,
                value,
            });
        }
    }
    let sum: f64 = fractions.iter().sum();
    if (sum - 1.0).abs() > FRACTION_SUM_TOLERANCE {
        // Ten digits: 0.1 + 0.8 is to be called 0.9, not 0.9000000000000000222.
        return Err(FractionError::Sum {
            sum: (sum * 1e10).round() / 1e10,
        });
    }
    Ok(fractions.iter().map(|value| value / sum).collect())
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn rounded_fractions_are_divided_by_their_sum() {
        let fractions = checked_fractions(&[0.333_33, 0.333_33, 0.333_33], 3).unwrap();
        assert!((fractions.iter().sum::<f64>() - 1.0).abs() < 1e-15);
        assert_eq!(checked_fractions(&[0.0, 1.0], 2), Ok(vec![0.0, 1.0]));
    }

    #[test]
    fn what_is_no_composition_is_refused() {
        let message = |fractions: &[f64], components| {
            checked_fractions(fractions, components)
                .unwrap_err()
                .to_string()
        };
        assert_eq!(message(&[0.1, 0.8], 2), "adds up to 0.9, not to 1");
        assert_eq!(message(&[0.5], 2), "holds 1 for 2 components");
        assert_eq!(message(&[], 1), "holds 0 for 1 component");
        assert_eq!(
            message(&[1.2, -0.2], 2),
            "holds 1.2 for component 1, outside 0 to 1"
        );
        assert_eq!(
            message(&[f64::NAN, 1.0], 2),
            "holds NaN for component 1, outside 0 to 1"
        );
    }
}
