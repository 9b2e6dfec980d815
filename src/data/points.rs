//! Measured points at several temperatures, and what lies between them.

use std::fmt;
use std::sync::Arc;

use super::OutOfRange;
use crate::quantity::{Flag, Flags, Property};

/// How far past the outermost points a value is still given, in K.
pub(super) const POINT_STRETCH_K: f64 = 10.0;

/// In which coordinates measured points are joined by straight lines.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Straight {
    /// The value against T: densities, surface tensions, heat capacities.
    InTemperature,
    /// The logarithm of the value against 1/T: vapor pressures, viscosities.
    LogInReciprocalTemperature,
}

/// Measured values at one or more temperatures, joined by straight lines.
///
/// # Units and shapes
///
/// Temperatures in K, rising and positive; values in the SI unit of what was
/// measured, positive where their logarithm is taken.
#[derive(Clone, Debug, PartialEq)]
pub struct Points {
    straight: Straight,
    /// Temperature in K and value.
    points: Arc<[(f64, f64)]>,
}

impl Points {
    /// The points; `None` if there is none, their temperatures do not rise, or
    /// a value has no logarithm where one is taken.
    pub fn new(straight: Straight, points: &[(f64, f64)]) -> Option<Self> {
        let rising = points.windows(2).all(|pair| pair[0].0 < pair[1].0);
        let sound = points.iter().all(|&(t, value)| {
            t > 0.0
                && t.is_finite()
                && value.is_finite()
                && (straight == Straight::InTemperature || value > 0.0)
        });
        (!points.is_empty() && rising && sound).then(|| Self {
            straight,
            points: points.into(),
        })
    }

    /// Temperatures in K with the values measured there, rising.
    pub fn points(&self) -> &[(f64, f64)] {
        &self.points
    }

    /// The lowest and the highest temperature, in K.
    pub fn range_k(&self) -> (f64, f64) {
        (self.points[0].0, self.points[self.points.len() - 1].0)
    }

    /// The value, or its logarithm where lines are straight in that, and its
    /// slope in 1/K; past the ends the outermost line goes on.
    pub(super) fn ordinate_and_slope(&self, temperature_k: f64) -> (f64, f64) {
        let place = |(t, value): (f64, f64)| match self.straight {
            Straight::InTemperature => (t, value),
            Straight::LogInReciprocalTemperature => (1.0 / t, value.ln()),
        };
        let [.., _, _] = *self.points else {
            return (place(self.points[0]).1, 0.0);
        };
        let above = self
            .points
            .partition_point(|&(t, _)| t <= temperature_k)
            .clamp(1, self.points.len() - 1);
        let (x0, y0) = place(self.points[above - 1]);
        let (x1, y1) = place(self.points[above]);
        let (x, dx_dt) = match self.straight {
            Straight::InTemperature => (temperature_k, 1.0),
            Straight::LogInReciprocalTemperature => {
                let x = 1.0 / temperature_k;
                (x, -x * x)
            }
        };
        let slope = (y1 - y0) / (x1 - x0);
        (y0 + slope * (x - x0), slope * dx_dt)
    }

    /// The value at a temperature, whatever the range.
    pub(super) fn value(&self, temperature_k: f64) -> f64 {
        let (ordinate, _) = self.ordinate_and_slope(temperature_k);
        match self.straight {
            Straight::InTemperature => ordinate,
            Straight::LogInReciprocalTemperature => ordinate.exp(),
        }
    }
}

impl fmt::Display for Points {
    /// How many points there are and how they are joined; the value where there is one.
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match *self.points {
            [(_, value)] => write!(f, "{value}"),
            ref points => write!(
                f,
                "{} points, {}",
                points.len(),
                match self.straight {
                    Straight::InTemperature => "straight in T",
                    Straight::LogInReciprocalTemperature => "the logarithm straight in 1/T",
                }
            ),
        }
    }
}

/// A property that is known at points of temperature, with range and source.
///
/// # Validity
///
/// Between the outermost points; up to 10 K past them with
/// [`Flag::Extrapolated`], further there is no value.
#[derive(Clone, Debug, PartialEq)]
pub struct PointCurve {
    property: Property,
    points: Points,
    source: Arc<str>,
}

impl PointCurve {
    /// The curve of a property through two or more points.
    pub(super) fn new(property: Property, points: Points, source: Arc<str>) -> Self {
        Self {
            property,
            points,
            source,
        }
    }

    /// What was measured.
    pub fn property(&self) -> Property {
        self.property
    }

    /// The points.
    pub fn points(&self) -> &Points {
        &self.points
    }

    /// The lowest and the highest temperature measured, in K.
    pub fn range_k(&self) -> (f64, f64) {
        self.points.range_k()
    }

    /// The range with the stretch in which values are still given, in K.
    pub fn limits_k(&self) -> (f64, f64) {
        let (low, high) = self.range_k();
        (low - POINT_STRETCH_K, high + POINT_STRETCH_K)
    }

    /// The published sources of the points.
    pub fn source(&self) -> &Arc<str> {
        &self.source
    }

    pub(super) fn covers(&self, temperature_k: f64) -> bool {
        let (low, high) = self.range_k();
        (low..=high).contains(&temperature_k)
    }

    /// [`Flag::Extrapolated`] outside the points.
    pub fn flags_at(&self, temperature_k: f64) -> Flags {
        if self.covers(temperature_k) {
            Flags::NONE
        } else {
            Flags::NONE.with(Flag::Extrapolated)
        }
    }

    /// The value in the SI unit of the property.
    ///
    /// # Errors
    ///
    /// [`OutOfRange::Temperature`] past the [limits](Self::limits_k), or where
    /// the line has run out of positive values.
    pub fn value(&self, temperature_k: f64) -> Result<f64, OutOfRange> {
        let (low_k, high_k) = self.limits_k();
        let value = self.points.value(temperature_k);
        if (low_k..=high_k).contains(&temperature_k) && value > 0.0 && value.is_finite() {
            Ok(value)
        } else {
            Err(OutOfRange::Temperature {
                temperature_k,
                low_k,
                high_k,
            })
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn lines_go_through_the_points_and_on_past_them() {
        let points = Points::new(Straight::InTemperature, &[(290.0, 800.0), (310.0, 780.0)]);
        let points = points.unwrap();
        for (t, wanted) in [
            (290.0, 800.0),
            (300.0, 790.0),
            (310.0, 780.0),
            (315.0, 775.0),
        ] {
            assert!((points.value(t) - wanted).abs() < 1e-9, "{t} K");
        }
        let single = Points::new(Straight::InTemperature, &[(290.0, 800.0)]).unwrap();
        assert_eq!(single.ordinate_and_slope(280.0), (800.0, 0.0));
    }

    #[test]
    fn logarithms_are_straight_in_reciprocal_temperature() {
        let law = |t: f64| (10.0 - 2000.0 / t).exp();
        let measured = [280.0, 300.0, 350.0].map(|t| (t, law(t)));
        let points = Points::new(Straight::LogInReciprocalTemperature, &measured).unwrap();
        for t in [275.0, 280.0, 290.0, 330.0, 350.0, 355.0] {
            assert!((points.value(t) / law(t) - 1.0).abs() < 1e-12, "{t} K");
            let slope = points.ordinate_and_slope(t).1;
            assert!((slope - 2000.0 / (t * t)).abs() < 1e-12, "{t} K");
        }
    }

    #[test]
    fn what_cannot_be_joined_is_refused() {
        let log = Straight::LogInReciprocalTemperature;
        assert_eq!(Points::new(log, &[]), None);
        assert_eq!(Points::new(log, &[(300.0, 1.0), (300.0, 2.0)]), None);
        assert_eq!(Points::new(log, &[(300.0, 0.0)]), None);
    }
}
