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

/// The constants that it follows from.
pub(crate) const RESTS_ON: [Quantity; 4] = [
    Quantity::BoilingPoint,
    Quantity::MolarVolume,
    Quantity::CriticalTemperature,
    Quantity::CriticalPressure,
];

/// Constants of a molecule from fits without its part; the boiling point may be measured.
struct Derived {
    constants: Constants,
    density_298: f64,
    molar_mass_kg_per_mol: f64,
}

fn derive(fit: &Fit, molecule: usize, measured_boiling_point: Option<f64>) -> Option<Derived> {
    let known = fit.known(Level::Structure, molecule)?;
    let known = Known {
        boiling_point_k: measured_boiling_point.unwrap_or(known.boiling_point_k),
        ..known
    };
    let of = |quantity: Quantity| {
        fit.without_own_part(
            quantity,
            Level::Structure,
            &fit.partial[&quantity],
            molecule,
            Some(known),
        )
    };
    let constants = Constants::new(
        known.boiling_point_k,
        of(Quantity::CriticalTemperature)?,
        of(Quantity::CriticalPressure)?,
        "derived",
    )
    .ok()?;
    Some(Derived {
        constants,
        density_298: known.molar_mass_kg_per_mol / known.molar_volume_m3_per_mol,
        molar_mass_kg_per_mol: known.molar_mass_kg_per_mol,
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

#[derive(Default)]
struct Errors(BTreeMap<String, (Vec<f64>, usize)>);

impl Errors {
    fn add(&mut self, what: &str, error: Option<f64>) {
        let entry = self.0.entry(what.to_owned()).or_default();
        entry.1 += 1;
        entry.0.extend(error.filter(|error| error.is_finite()));
    }
}

/// Errors as a table.
pub(crate) fn errors(fit: &Fit) -> Result<String, Box<dyn Error>> {
    let boiling: BTreeMap<usize, f64> = fit.reference.values[Quantity::BoilingPoint as usize]
        .iter()
        .copied()
        .collect();
    let mut errors = Errors::default();
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
                .or_insert_with(|| derive(fit, molecule, tb.filter(|_| measured)));
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
                let error = found.map(|found| (found / pressure).log10());
                errors.add(
                    &format!("vapor pressure,{},{from},log10", method.id()),
                    error,
                );
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
            let error = found.map(|found| 100.0 * (found / density - 1.0));
            errors.add(&format!("density at T,carried from 298 K,{from},%"), error);
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
                    let error = found.map(|found| 100.0 * (found / value - 1.0));
                    errors.add(
                        &format!("{},{} and Clapeyron,{from},%", quantity.id(), method.id()),
                        error,
                    );
                }
            }
        }
    }
    let mut text = String::from(
        "figure,method,from,unit,points,with_value,mean_abs,median_abs,p90_abs,mean_abs_best_98_percent,bias\n",
    );
    for (what, (mut values, asked)) in errors.0 {
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
