//! What follows from fitted constants by relations of corresponding states:
//! vapor pressure, density away from 298.15 K, enthalpy of vaporization.

use std::collections::BTreeMap;
use std::error::Error;
use std::fmt::Write as _;

use groupsmith::pure::corresponding_states::{
    Constants, LiquidDensityCurve, VaporPressureCurve, VaporPressureMethod,
};
use groupsmith::pure::fitted::{Known, Level, Quantity};
use groupsmith::quantity::{GAS_CONSTANT_J_PER_MOL_K, REFERENCE_TEMPERATURE_K};

use super::Fit;

/// What is kept for every molecule, from fits without its part: boiling point and molar
/// volume, and all that rests on them.
pub(crate) fn constants() -> impl Iterator<Item = Quantity> {
    Quantity::ALL
        .into_iter()
        .filter(|&quantity| is_base(quantity) || quantity.terms(Level::Structure).rests_on_others)
}

/// Whether other quantities rest on it.
pub(crate) const fn is_base(quantity: Quantity) -> bool {
    matches!(quantity, Quantity::BoilingPoint | Quantity::MolarVolume)
}

/// Constants of a molecule from fits without its part; the boiling point may be measured.
struct Derived {
    constants: Constants,
    density_298: f64,
    molar_mass_kg_per_mol: f64,
}

/// One of [`constants`] for a molecule from the fit without its part; the boiling point may be measured.
pub(crate) fn constant(
    fit: &Fit,
    level: Level,
    quantity: Quantity,
    molecule: usize,
    measured_boiling_point: Option<f64>,
) -> Option<f64> {
    let known = fit.known(level, molecule)?;
    let known = Known {
        boiling_point_k: measured_boiling_point.unwrap_or(known.boiling_point_k),
        ..known
    };
    match quantity {
        Quantity::BoilingPoint => Some(known.boiling_point_k),
        Quantity::MolarVolume => Some(known.molar_volume_m3_per_mol),
        _ => fit.without_own_part(
            quantity,
            level,
            &fit.partial[&(level, quantity)],
            molecule,
            Some(known),
        ),
    }
}

fn derive(
    fit: &Fit,
    level: Level,
    molecule: usize,
    measured_boiling_point: Option<f64>,
) -> Option<Derived> {
    let of = |quantity| constant(fit, level, quantity, molecule, measured_boiling_point);
    let constants = Constants::new(
        of(Quantity::BoilingPoint)?,
        of(Quantity::CriticalTemperature)?,
        of(Quantity::CriticalPressure)?,
        "derived",
    )
    .ok()?;
    let molar_mass_kg_per_mol = fit.reference.molecules[molecule].molar_mass_kg_per_mol;
    Some(Derived {
        constants,
        density_298: molar_mass_kg_per_mol / of(Quantity::MolarVolume)?,
        molar_mass_kg_per_mol,
    })
}

/// Enthalpy of vaporization in J/mol by Clausius and Clapeyron with the compressibility
/// factor difference of Haggenmacher.
fn clapeyron(curve: &VaporPressureCurve, constants: &Constants, t: f64) -> Option<f64> {
    let h = 1e-3 * t;
    let [low, high] = [t - h, t + h].map(|t| curve.pressure_pa(t).ok().map(f64::ln));
    let slope = (high? - low?) / (2.0 * h);
    let pr = curve.pressure_pa(t).ok()? / constants.critical_pressure_pa();
    let tr = constants.reduced(t);
    let dz = (1.0 - pr / tr.powi(3)).max(0.0).sqrt();
    Some(GAS_CONSTANT_J_PER_MOL_K * t * t * slope * dz)
}

/// A measured value with what is derived for it.
pub(crate) struct Point {
    /// Figure, method and what it was derived from.
    pub(crate) what: [String; 3],
    pub(crate) molecule: usize,
    pub(crate) temperature_k: f64,
    pub(crate) value: f64,
    pub(crate) estimate: Option<f64>,
}

impl Point {
    fn unit(&self) -> &'static str {
        if self.what[0] == "vapor pressure" {
            "log10"
        } else {
            "%"
        }
    }

    fn error(&self) -> Option<f64> {
        let ratio = self.estimate? / self.value;
        let error = if self.unit() == "log10" {
            ratio.log10()
        } else {
            100.0 * (ratio - 1.0)
        };
        Some(error).filter(|error| error.is_finite())
    }
}

/// Every measured value of the figures that are derived, with its estimates.
pub(crate) fn points(fit: &Fit, level: Level) -> Vec<Point> {
    let boiling: BTreeMap<usize, f64> = fit.reference.values[Quantity::BoilingPoint as usize]
        .iter()
        .copied()
        .collect();
    let mut points = Vec::new();
    let mut add = |what: [&str; 3], (molecule, temperature_k, value), estimate| {
        points.push(Point {
            what: what.map(str::to_owned),
            molecule,
            temperature_k,
            value,
            estimate,
        });
    };
    let mut cache: BTreeMap<(usize, bool), Option<Derived>> = BTreeMap::new();
    let methods = [
        VaporPressureMethod::AmbroseWalton,
        VaporPressureMethod::LeeKesler,
        VaporPressureMethod::Riedel,
    ];
    for measured in [false, true] {
        let from = if measured {
            "measured T_b"
        } else {
            "structure"
        };
        let mut get = |molecule: usize| {
            let tb = boiling.get(&molecule).copied();
            if measured && tb.is_none() {
                return None;
            }
            let derived = cache
                .entry((molecule, measured))
                .or_insert_with(|| derive(fit, level, molecule, tb.filter(|_| measured)));
            derived
                .as_ref()
                .map(|d| (d.constants, d.density_298, d.molar_mass_kg_per_mol))
        };
        for &(molecule, t, pressure) in &fit.reference.vapor_pressures {
            if measured && !boiling.contains_key(&molecule) {
                continue;
            }
            for method in methods {
                let found = get(molecule).and_then(|(constants, ..)| {
                    let curve =
                        VaporPressureCurve::through_boiling_point(method, constants).ok()?;
                    curve.pressure_pa(t).ok()
                });
                let what = ["vapor pressure", method.id(), from];
                add(what, (molecule, t, pressure), found);
            }
        }
        for &(molecule, t, density) in &fit.reference.densities {
            let found = get(molecule).and_then(|(constants, density_298, mass)| {
                let curve =
                    VaporPressureCurve::through_boiling_point(methods[0], constants).ok()?;
                let density = LiquidDensityCurve::through_density(
                    density_298,
                    REFERENCE_TEMPERATURE_K,
                    constants.critical_temperature_k(),
                    curve.acentric_factor(),
                    mass,
                )
                .ok()?;
                density.density_kg_per_m3(t).ok()
            });
            let what = ["density at T", "carried from 298 K", from];
            add(what, (molecule, t, density), found);
        }
        for (quantity, at) in [
            (Quantity::EnthalpyOfVaporization, None),
            (
                Quantity::EnthalpyOfVaporizationAt298,
                Some(REFERENCE_TEMPERATURE_K),
            ),
        ] {
            for &(molecule, value) in &fit.reference.values[quantity as usize] {
                for method in methods {
                    let found = get(molecule).and_then(|(constants, ..)| {
                        let curve =
                            VaporPressureCurve::through_boiling_point(method, constants).ok()?;
                        let t = at.unwrap_or(constants.boiling_point_k());
                        clapeyron(&curve, &constants, t)
                    });
                    let method = format!("{} and Clapeyron", method.id());
                    let what = [quantity.id(), &method, from];
                    add(what, (molecule, at.unwrap_or(f64::NAN), value), found);
                }
            }
        }
    }
    points
}

/// Errors as a table.
pub(crate) fn errors(points: &[Point]) -> Result<String, Box<dyn Error>> {
    let mut errors: BTreeMap<String, (Vec<f64>, usize)> = BTreeMap::new();
    for point in points {
        let what = format!("{},{}", point.what.join(","), point.unit());
        let entry = errors.entry(what).or_default();
        entry.1 += 1;
        entry.0.extend(point.error());
    }
    let mut text = String::from(
        "figure,method,from,unit,points,with_value,mean_abs,median_abs,p90_abs,mean_abs_best_98_percent,bias\n",
    );
    for (what, (mut values, asked)) in errors {
        let n = values.len();
        let bias = values.iter().sum::<f64>() / n as f64;
        values.iter_mut().for_each(|value| *value = value.abs());
        values.sort_by(f64::total_cmp);
        let mean = |count: usize| values[..count].iter().sum::<f64>() / count as f64;
        writeln!(
            text,
            "{what},{asked},{n},{:.4},{:.4},{:.4},{:.4},{bias:.4}",
            mean(n),
            values[n / 2],
            values[n * 9 / 10],
            mean(n * 98 / 100)
        )?;
    }
    Ok(text)
}
