//! Which measurements of a series in temperature answer for a temperature.

/// Temperatures this near to each other, in K, are one.
pub(super) const SAME_TEMPERATURE_K: f64 = 0.01;

/// What stands for the temperature asked for.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) enum Place<'a, T> {
    /// One measurement, at the temperature or near it.
    One(&'a T),
    /// The measurements below and above.
    Between(&'a T, &'a T),
}

/// Finds the place of a temperature in a series that rises in temperature;
/// `None` where it lies outside by more than `nearby_k`.
pub(super) fn place<T>(
    series: &[T],
    temperature_of: impl Fn(&T) -> f64,
    temperature_k: f64,
    nearby_k: f64,
) -> Option<Place<'_, T>> {
    let off = |one: &&T| (temperature_of(one) - temperature_k).abs();
    let above = series.partition_point(|one| temperature_of(one) < temperature_k);
    let (below, above) = (series[..above].last(), series.get(above));
    let nearest = below
        .into_iter()
        .chain(above)
        .min_by(|a, b| off(a).total_cmp(&off(b)))?;
    match (below, above) {
        (Some(below), Some(above)) if off(&nearest) > SAME_TEMPERATURE_K => {
            Some(Place::Between(below, above))
        }
        _ => (off(&nearest) <= nearby_k).then_some(Place::One(nearest)),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_place_of_a_temperature_is_at_near_between_or_none() {
        let series = [290.0, 300.0, 320.0];
        let at = |t: f64| place(&series, |one| *one, t, 3.0);
        assert_eq!(at(300.0), Some(Place::One(&300.0)));
        assert_eq!(at(300.005), Some(Place::One(&300.0)));
        assert_eq!(at(301.0), Some(Place::Between(&300.0, &320.0)));
        assert_eq!(at(287.0), Some(Place::One(&290.0)));
        assert_eq!(at(323.0), Some(Place::One(&320.0)));
        assert_eq!(at(286.9), None);
        assert_eq!(at(323.1), None);
        assert_eq!(place(&[] as &[f64], |one| *one, 300.0, 3.0), None);
    }
}
