//! Targets: what a figure should be, and how well a value meets it.

use std::fmt;

use super::place::{Located, Place};
use crate::quantity::unit::{reading_unit, to_table};
use crate::quantity::{Dimension, number};

/// Which way is better.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Direction {
    /// The larger the better.
    High,
    /// The smaller the better.
    Low,
}

/// What a value should be. All numbers in the SI unit of the figure.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Want {
    /// At least `limit`.
    AtLeast {
        /// The lowest wanted value.
        limit: f64,
        /// How far below the limit the desirability has fallen to 0; 0: at once.
        tolerance: f64,
    },
    /// At most `limit`.
    AtMost {
        /// The highest wanted value.
        limit: f64,
        /// How far above the limit the desirability has fallen to 0; 0: at once.
        tolerance: f64,
    },
    /// From `low` to `high`, ends included.
    Between {
        /// The lowest wanted value.
        low: f64,
        /// The highest wanted value, not below `low`.
        high: f64,
        /// How far outside the desirability has fallen to 0; 0: at once.
        tolerance: f64,
    },
    /// As near to `value` as can be.
    CloseTo {
        /// The best value.
        value: f64,
        /// How far off the desirability has fallen to 0; above 0.
        tolerance: f64,
    },
    /// As far in one direction as counts.
    Prefer {
        /// Which way is better.
        direction: Direction,
        /// The value from which on the desirability is 0.
        worst: f64,
        /// The value from which on the desirability is 1; never equal to `worst`.
        best: f64,
    },
}

impl Want {
    /// How well a value meets the wish: 0 not at all, 1 entirely.
    ///
    /// The one- and two-sided functions of Derringer and Suich with exponent 1:
    ///
    /// - `Prefer`, their one-sided function: d = (y − worst)/(best − worst),
    ///   cut at 0 and 1; for [`Direction::Low`] `worst` is above `best`.
    /// - `CloseTo`, their two-sided function with limits at equal distance from
    ///   the target: d = 1 − |y − value|/tolerance, cut at 0.
    /// - limits: d = 1 where the limit is kept; beyond it d falls in a straight
    ///   line to 0 at `tolerance`. Without tolerance it is a step.
    ///
    /// An exponent other than 1 is not offered: the weight of a target already
    /// raises its desirability to a power in the geometric mean.
    ///
    /// **Zero.** A desirability of 0 makes the weighted geometric mean 0
    /// whatever the other figures are. Such a candidate is not excluded unless
    /// the target is a must: it ranks after every candidate with a score.
    ///
    /// **Absence.** A figure without a value has no desirability, and none may
    /// be made up for it: this function is then not called, and what becomes of
    /// the candidate is decided by whoever ranks.
    ///
    /// # Units and shapes
    ///
    /// `value_si` in the SI unit of the figure, finite.
    ///
    /// # Source
    ///
    /// G. Derringer, R. Suich, Journal of Quality Technology 12 (1980) 214–219,
    /// doi:10.1080/00224065.1980.11980968.
    ///
    /// # Example
    ///
    /// ```
    /// use groupsmith::brief::{Direction, Want};
    /// let want = Want::Prefer { direction: Direction::High, worst: 1.0, best: 4.0 };
    /// assert_eq!(want.desirability(2.5), 0.5);
    /// ```
    pub fn desirability(&self, value_si: f64) -> f64 {
        match *self {
            Self::AtLeast { limit, tolerance } => beyond(limit - value_si, tolerance),
            Self::AtMost { limit, tolerance } => beyond(value_si - limit, tolerance),
            Self::Between {
                low,
                high,
                tolerance,
            } => beyond((low - value_si).max(value_si - high), tolerance),
            Self::CloseTo { value, tolerance } => beyond((value_si - value).abs(), tolerance),
            Self::Prefer { worst, best, .. } => {
                ((value_si - worst) / (best - worst)).clamp(0.0, 1.0)
            }
        }
    }

    /// How far a preference has come from `worst` to `best`, not cut at either end; 0
    /// for other wishes. It tells values apart whose desirability is the same.
    pub fn advance(&self, value_si: f64) -> f64 {
        match *self {
            Self::Prefer { worst, best, .. } => (value_si - worst) / (best - worst),
            _ => 0.0,
        }
    }

    /// Whether a value passes where the target is a must.
    ///
    /// A limit is met exactly up to the limit, its tolerance aside; a value to
    /// be close to, within its tolerance; a preference, when the value is not
    /// worse than `worst`. The ends belong to what is met.
    pub fn is_met(&self, value_si: f64) -> bool {
        match *self {
            Self::AtLeast { limit, .. } => value_si >= limit,
            Self::AtMost { limit, .. } => value_si <= limit,
            Self::Between { low, high, .. } => (low..=high).contains(&value_si),
            Self::CloseTo { value, tolerance } => (value_si - value).abs() <= tolerance,
            Self::Prefer {
                direction, worst, ..
            } => match direction {
                Direction::High => value_si >= worst,
                Direction::Low => value_si <= worst,
            },
        }
    }

    /// The values that pass where the target is a must, from the lowest to the
    /// highest, infinite where there is no end: those [`is_met`](Self::is_met) is
    /// true for.
    pub const fn met_range(&self) -> (f64, f64) {
        match *self {
            Self::AtLeast { limit, .. } => (limit, f64::INFINITY),
            Self::AtMost { limit, .. } => (f64::NEG_INFINITY, limit),
            Self::Between { low, high, .. } => (low, high),
            Self::CloseTo { value, tolerance } => (value - tolerance, value + tolerance),
            Self::Prefer {
                direction: Direction::High,
                worst,
                ..
            } => (worst, f64::INFINITY),
            Self::Prefer {
                direction: Direction::Low,
                worst,
                ..
            } => (f64::NEG_INFINITY, worst),
        }
    }

    /// The values between which the desirability is a straight line; some may
    /// stand twice.
    pub const fn kinks(&self) -> [f64; 4] {
        match *self {
            Self::AtLeast { limit, tolerance } => [limit - tolerance, limit, limit, limit],
            Self::AtMost { limit, tolerance } => [limit, limit, limit, limit + tolerance],
            Self::Between {
                low,
                high,
                tolerance,
            } => [low - tolerance, low, high, high + tolerance],
            Self::CloseTo { value, tolerance } => {
                [value - tolerance, value, value, value + tolerance]
            }
            Self::Prefer { worst, best, .. } => [worst, worst, best, best],
        }
    }

    /// Whether it is a limit rather than a value to approach.
    pub const fn is_limit(&self) -> bool {
        matches!(
            self,
            Self::AtLeast { .. } | Self::AtMost { .. } | Self::Between { .. }
        )
    }

    /// Words for the `wanted` column, in the unit of tables: `at least 390 K`.
    pub fn in_table_units(&self, dimension: Dimension) -> WantText<'_> {
        WantText {
            want: self,
            dimension,
            for_reading: false,
        }
    }

    /// Words for people, in the unit people read: `at most 101.3 kPa`.
    pub fn in_reading_units(&self, dimension: Dimension) -> WantText<'_> {
        WantText {
            want: self,
            dimension,
            for_reading: true,
        }
    }
}

/// Desirability at a distance beyond a limit (negative: inside it).
fn beyond(distance: f64, tolerance: f64) -> f64 {
    if distance <= 0.0 {
        1.0
    } else if tolerance > 0.0 {
        (1.0 - distance / tolerance).max(0.0)
    } else {
        0.0
    }
}

/// A [`Want`] in words; see [`Want::in_table_units`].
#[derive(Clone, Copy, Debug)]
pub struct WantText<'a> {
    want: &'a Want,
    dimension: Dimension,
    for_reading: bool,
}

impl fmt::Display for WantText<'_> {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let reading = reading_unit(self.dimension).filter(|_| self.for_reading);
        let convert = |value_si: f64| match reading {
            Some(unit) => unit.from_si(value_si),
            None => to_table(value_si, self.dimension),
        };
        // A width is converted as a difference: no unit shown here is shifted
        // against SI, so the same conversion serves.
        let show = |value_si: f64| number::short(convert(value_si));
        match *self.want {
            Want::AtLeast { limit, .. } => write!(f, "at least {}", show(limit))?,
            Want::AtMost { limit, .. } => write!(f, "at most {}", show(limit))?,
            Want::Between { low, high, .. } => write!(f, "{} to {}", show(low), show(high))?,
            Want::CloseTo { value, tolerance } => {
                write!(f, "{} within {}", show(value), show(tolerance))?;
            }
            Want::Prefer {
                direction,
                worst,
                best,
            } => write!(
                f,
                "{} ({} to {})",
                match direction {
                    Direction::High => "high",
                    Direction::Low => "low",
                },
                show(worst),
                show(best)
            )?,
        }
        let symbol = match reading {
            Some(unit) => unit.symbol,
            None => crate::quantity::unit::si_symbol(self.dimension),
        };
        if symbol.is_empty() {
            Ok(())
        } else {
            write!(f, " {symbol}")
        }
    }
}

/// One `[[target]]` of a brief.
#[derive(Clone, Debug, PartialEq)]
pub struct Target {
    /// The figure, by its name in the catalog.
    pub figure: Located<&'static str>,
    /// What the figure measures.
    pub dimension: Dimension,
    /// Which component of the mixture is meant, from 0, where the figure takes one.
    pub component: Option<Located<usize>>,
    /// The temperature the figure is taken at in K, where the target states one.
    pub temperature_k: Option<Located<f64>>,
    /// What is wanted.
    pub want: Want,
    /// Whether missing it disqualifies a candidate.
    pub must: bool,
    /// Weight in the score, above 0; without meaning where `counts` is false.
    pub weight: f64,
    /// Whether the target counts in the score: all but must limits do.
    pub counts: bool,
    /// Where the target begins.
    pub place: Place,
}

#[cfg(test)]
mod tests {
    use super::*;

    /// The two functions with exponent 1, evaluated by hand. Scales and responses
    /// are those of the tire-tread example of Derringer and Suich 1980 as
    /// remembered (abrasion index 120 to 170, elongation at break 400 to 600
    /// around 500); they were not compared with the print.
    #[test]
    fn desirability_follows_the_published_functions() {
        let abrasion = Want::Prefer {
            direction: Direction::High,
            worst: 120.0,
            best: 170.0,
        };
        assert_eq!(abrasion.desirability(120.0), 0.0);
        assert_eq!(abrasion.desirability(100.0), 0.0);
        assert!((abrasion.desirability(129.5) - 0.19).abs() < 1e-15);
        assert_eq!(abrasion.desirability(170.0), 1.0);
        assert_eq!(abrasion.desirability(200.0), 1.0);

        let elongation = Want::CloseTo {
            value: 500.0,
            tolerance: 100.0,
        };
        assert_eq!(elongation.desirability(500.0), 1.0);
        assert!((elongation.desirability(465.7) - 0.657).abs() < 1e-12);
        assert!((elongation.desirability(534.3) - 0.657).abs() < 1e-12);
        assert_eq!(elongation.desirability(400.0), 0.0);
        assert_eq!(elongation.desirability(700.0), 0.0);
    }

    #[test]
    fn low_is_high_mirrored() {
        let low = Want::Prefer {
            direction: Direction::Low,
            worst: 10.0,
            best: 2.0,
        };
        assert_eq!(low.desirability(12.0), 0.0);
        assert_eq!(low.desirability(8.0), 0.25);
        assert_eq!(low.desirability(2.0), 1.0);
        assert_eq!(low.desirability(-5.0), 1.0);
        assert!(low.is_met(10.0) && !low.is_met(10.1));
    }

    #[test]
    fn limits_are_steps_unless_they_have_a_tolerance() {
        let hard = Want::AtLeast {
            limit: 390.0,
            tolerance: 0.0,
        };
        assert_eq!(hard.desirability(390.0), 1.0);
        assert_eq!(hard.desirability(389.9), 0.0);
        let soft = Want::Between {
            low: 300.0,
            high: 350.0,
            tolerance: 20.0,
        };
        assert_eq!(soft.desirability(320.0), 1.0);
        assert_eq!(soft.desirability(295.0), 0.75);
        assert_eq!(soft.desirability(365.0), 0.25);
        assert_eq!(soft.desirability(371.0), 0.0);
        assert!(!soft.is_met(351.0));
    }

    #[test]
    fn wishes_read_as_a_person_would_say_them() {
        let text = |want: Want, dimension| {
            (
                want.in_table_units(dimension).to_string(),
                want.in_reading_units(dimension).to_string(),
            )
        };
        assert_eq!(
            text(
                Want::AtMost {
                    limit: 101_325.0,
                    tolerance: 0.0
                },
                Dimension::Pressure
            ),
            ("at most 101325 Pa".into(), "at most 101.325 kPa".into())
        );
        assert_eq!(
            text(
                Want::CloseTo {
                    value: 17_400.0,
                    tolerance: 2_000.0
                },
                Dimension::SolubilityParameter
            ),
            (
                "17.4 within 2 MPa^0.5".into(),
                "17.4 within 2 MPa^0.5".into()
            )
        );
        assert_eq!(
            text(
                Want::Prefer {
                    direction: Direction::High,
                    worst: 1.0,
                    best: 4.0
                },
                Dimension::Number
            )
            .0,
            "high (1 to 4)"
        );
    }
}
