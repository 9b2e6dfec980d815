//! What measured curves say of one temperature: slopes of vapor-pressure curves at the
//! boiling point, molar volumes at the reference temperature.

use std::collections::BTreeMap;

use groupsmith::pure::corresponding_states::{
    Constants, VaporPressureCurve, VaporPressureMethod, slope_of_enthalpy,
};
use groupsmith::pure::fitted::{volume_carried, volume_temperature_k};
use groupsmith::quantity::{REFERENCE_TEMPERATURE_K, STANDARD_ATMOSPHERE_PA};

use super::data::{Known, Values};

/// Points of a curve: temperature in K and value.
type Points = Vec<(f64, f64)>;

/// Slopes of real substances; a curve that says otherwise is not taken.
const SLOPES: std::ops::Range<f64> = 4.0..35.0;

/// Constants that will do for the bend of a curve between 10 and 300 kPa, and for ΔZ.
fn usual(boiling_point_k: f64) -> Option<Constants> {
    Constants::new(boiling_point_k, 1.5 * boiling_point_k, 3.5e6, "usual").ok()
}

fn by_molecule(points: &[(usize, f64, f64)]) -> BTreeMap<usize, Points> {
    let mut curves: BTreeMap<usize, Points> = BTreeMap::new();
    for &(molecule, t, value) in points {
        curves.entry(molecule).or_default().push((t, value));
    }
    for points in curves.values_mut() {
        points.sort_by(|one, other| one.0.total_cmp(&other.0));
    }
    curves
}

/// d ln P/d ln T at the boiling point: by the vapor pressures, and by the enthalpy of
/// vaporization. A molecule that has both comes twice, one after the other, so that either
/// can be doubted alone.
pub(crate) fn slopes(
    vapor_pressures: &[(usize, f64, f64)],
    enthalpies: &Values,
    boiling: &BTreeMap<usize, f64>,
    molecules: &[Known],
) -> Values {
    let mut found: Values = by_molecule(vapor_pressures)
        .into_iter()
        .filter_map(|(molecule, points)| Some((molecule, slope_of_points(&points)?)))
        .filter(|(_, slope)| SLOPES.contains(slope))
        .collect();
    for &(molecule, enthalpy) in enthalpies {
        if let Some(constants) = boiling.get(&molecule).and_then(|&tb| usual(tb)) {
            let slope = slope_of_enthalpy(&constants, enthalpy, molecules[molecule].acid);
            found.push((molecule, slope));
        }
    }
    found.sort_by_key(|one| one.0);
    found
}

/// The slope at the point where the curve itself passes through one atmosphere: least squares
/// of what the points have over a corresponding-states curve, a shift and a tilt.
fn slope_of_points(points: &[(f64, f64)]) -> Option<f64> {
    let ln_p = |p: f64| (p / STANDARD_ATMOSPHERE_PA).ln();
    let (first, last) = (points.first()?, points.last()?);
    let straight = (ln_p(last.1) - ln_p(first.1)) / (last.0 / first.0).ln();
    let mut tb = last.0 * (-ln_p(last.1) / straight).exp();
    let mut slope = straight;
    for _ in 0..6 {
        let curve =
            VaporPressureCurve::through_boiling_point(VaporPressureMethod::default(), usual(tb)?)
                .ok()?;
        let mut sums = [0.0; 5];
        for &(t, p) in points {
            let over = p.ln() - curve.pressure_pa(t).ok()?.ln();
            let x = 1.0 - tb / t;
            for (sum, part) in sums.iter_mut().zip([1.0, x, x * x, over, x * over]) {
                *sum += part;
            }
        }
        let [n, x, xx, y, xy] = sums;
        let tilt = (n * xy - x * y) / (n * xx - x * x);
        let shift = (y - tilt * x) / n;
        slope = curve.slope_at_boiling_point() + tilt;
        tb *= (-shift / slope.max(3.0)).exp();
    }
    slope.is_finite().then_some(slope)
}

/// Molar volumes at the reference temperature of the fit. Those of low boilers come from
/// densities at other temperatures where there are any, else they are carried from 298.15 K;
/// what is too near to the critical point for that is left out.
pub(crate) fn volumes(
    at_298: &Values,
    densities: &[(usize, f64, f64)],
    boiling: &BTreeMap<usize, f64>,
    molecules: &[Known],
) -> Values {
    let at_298: BTreeMap<usize, f64> = at_298.iter().copied().collect();
    let curves = by_molecule(densities);
    let mut all: Vec<usize> = at_298.keys().chain(curves.keys()).copied().collect();
    all.sort_unstable();
    all.dedup();
    all.into_iter()
        .filter_map(|molecule| {
            let room = at_298.get(&molecule).copied();
            let Some(&tb) = boiling.get(&molecule) else {
                return room.map(|volume| (molecule, volume));
            };
            let to_k = volume_temperature_k(tb);
            if let Some(volume) = room.filter(|_| to_k == REFERENCE_TEMPERATURE_K) {
                return Some((molecule, volume));
            }
            let mass = molecules[molecule].molar_mass_kg_per_mol;
            let measured = curves
                .get(&molecule)
                .and_then(|points| density_at(points, to_k, 1.5 * tb, mass))
                .map(|density| mass / density);
            let carried = || volume_carried(room?, REFERENCE_TEMPERATURE_K, to_k, 1.5 * tb);
            Some((molecule, measured.or_else(carried)?))
        })
        .collect()
}

/// A density between measured ones (its logarithm straight in T), or up to 80 K past them by
/// Rackett's form.
fn density_at(points: &Points, t: f64, critical_k: f64, mass: f64) -> Option<f64> {
    let after = points.iter().position(|point| point.0 >= t);
    if let Some(after @ 1..) = after {
        let (low, high) = (points[after - 1], points[after]);
        let part = (t - low.0) / (high.0 - low.0);
        return Some(low.1 * (high.1 / low.1).powf(part));
    }
    let near = if after == Some(0) {
        points.first()?
    } else {
        points.last()?
    };
    ((near.0 - t).abs() < 80.0)
        .then(|| volume_carried(mass / near.1, near.0, t, critical_k))
        .flatten()
        .map(|volume| mass / volume)
}
