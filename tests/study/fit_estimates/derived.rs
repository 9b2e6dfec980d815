//! What follows from fitted constants by relations of corresponding states: vapor pressure,
//! density at 298.15 K and elsewhere, enthalpy of vaporization at the boiling point; with
//! their intervals, as the program gives them.

use std::collections::BTreeMap;
use std::error::Error;
use std::fmt::Write as _;

use groupsmith::pure::corresponding_states::Constants;
use groupsmith::pure::fitted::{
    Family, Known, Level, Quantity, SizeClass, has_new_kind_of_atom, has_unknown_atoms,
};
use groupsmith::pure::{
    Given, PureMethods, StructureFacts, density_of_fitted_volume,
    enthalpy_of_vaporization_of_slope, estimate_all,
};
use groupsmith::quantity::{Absent, Estimate, Property, REFERENCE_TEMPERATURE_K, Status};
use rayon::prelude::*;

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

/// One of [`constants`] for a molecule from the fit without its part; the boiling point may
/// be measured.
pub(crate) fn constant(
    fit: &Fit,
    level: Level,
    quantity: Quantity,
    molecule: usize,
    measured_boiling_point: Option<f64>,
) -> Option<f64> {
    let known = known(fit, level, molecule, measured_boiling_point)?;
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

fn known(
    fit: &Fit,
    level: Level,
    molecule: usize,
    measured_boiling_point: Option<f64>,
) -> Option<Known> {
    let known = fit.known(level, molecule)?;
    Some(Known {
        boiling_point_k: measured_boiling_point.unwrap_or(known.boiling_point_k),
        ..known
    })
}

/// What the program would be given of a molecule, from fits without its part.
pub(crate) struct Derived {
    given: Vec<(Property, Estimate)>,
    facts: StructureFacts,
    /// Whether every interval that it rests on is known, so that those that follow are.
    with_intervals: bool,
    /// Whether the fits have all of its atoms.
    inside: bool,
}

impl Derived {
    pub(crate) fn of(
        fit: &Fit,
        level: Level,
        molecule: usize,
        measured_boiling_point: Option<f64>,
    ) -> Option<Self> {
        let reference = &fit.reference.molecules[molecule];
        let described = &fit.molecules[molecule];
        let known = known(fit, level, molecule, measured_boiling_point)?;
        let atoms = described.heavy_atoms();
        let (mut with_intervals, mut inside) = (true, true);
        let mut of = |quantity: Quantity| {
            let occurrences = &fit.partial[&(level, quantity)][reference.fold].occurrences;
            inside &= !has_unknown_atoms(described, occurrences);
            // the program gives no value then
            if has_new_kind_of_atom(described, occurrences) {
                return None;
            }
            let value = constant(fit, level, quantity, molecule, measured_boiling_point)?;
            let sum = quantity.opened(value, atoms, Some(known))?;
            let end = |sum: f64| quantity.closed(sum, atoms, Some(known));
            let half = fit.half_widths[&(level, quantity)].get(&molecule);
            let interval = half
                .map(|half| (end(sum - half).unwrap_or(0.0), end(sum + half)))
                .and_then(|(low, high)| Some((low, high?)));
            // critical constants enter intervals by the constants of shape alone
            let matters = !matches!(
                quantity,
                Quantity::CriticalTemperature | Quantity::CriticalPressure
            );
            with_intervals &= interval.is_some() || !matters;
            Some(Estimate {
                interval,
                ..Estimate::new(value, level.id())
            })
        };
        let boiling_point = match measured_boiling_point {
            Some(value) => Estimate {
                status: Status::Measured,
                ..Estimate::new(value, "measured")
            },
            None => of(Quantity::BoilingPoint)?,
        };
        let critical_temperature = of(Quantity::CriticalTemperature);
        let critical_pressure = of(Quantity::CriticalPressure);
        let constants = critical_temperature
            .as_ref()
            .zip(critical_pressure.as_ref());
        let constants = constants.and_then(|(temperature, pressure)| {
            let (tb, id) = (boiling_point.value, level.id());
            Constants::new(tb, temperature.value, pressure.value, id).ok()
        });
        let slope = of(Quantity::VaporPressureSlope);
        let enthalpy = slope.zip(constants).map(|(slope, constants)| {
            enthalpy_of_vaporization_of_slope(slope, &boiling_point, &constants, reference.acid)
        });
        let mass = reference.molar_mass_kg_per_mol;
        let carried = critical_temperature.is_some() && critical_pressure.is_some();
        let density = of(Quantity::MolarVolume)
            .map(|volume| density_of_fitted_volume(volume, mass, boiling_point.value, carried));
        let given = [
            (Property::BoilingPoint, Some(boiling_point)),
            (Property::CriticalTemperature, critical_temperature),
            (Property::CriticalPressure, critical_pressure),
            (Property::EnthalpyOfVaporization, enthalpy),
            (Property::LiquidDensity, density),
        ];
        let given = given
            .into_iter()
            .filter_map(|(property, estimate)| Some((property, estimate?)))
            .collect();
        Some(Self {
            given,
            facts: StructureFacts {
                molar_mass_kg_per_mol: mass,
                associates: reference.acid,
                ..StructureFacts::default()
            },
            with_intervals,
            inside,
        })
    }

    /// What the program makes of it at a temperature.
    pub(crate) fn estimate(
        &self,
        methods: &PureMethods,
        property: Property,
        temperature_k: f64,
    ) -> Option<Estimate> {
        let none = Err(&Absent::NoMethod);
        let all = estimate_all(
            methods,
            none,
            &self.facts,
            Given(&self.given),
            temperature_k,
        );
        all[property as usize].as_ref().ok().cloned()
    }
}

/// A figure that follows from fitted constants.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Figure {
    VaporPressure,
    Density,
    DensityAt298,
    EnthalpyOfVaporization,
}

impl Figure {
    pub(crate) const fn id(self) -> &'static str {
        match self {
            Self::VaporPressure => "vapor pressure",
            Self::Density => "density at T",
            Self::DensityAt298 => "density at 298.15 K",
            Self::EnthalpyOfVaporization => "enthalpy of vaporization at T_b",
        }
    }

    const fn unit(self) -> &'static str {
        match self {
            Self::VaporPressure => "log10",
            _ => "%",
        }
    }

    const fn property(self) -> Property {
        match self {
            Self::VaporPressure => Property::VaporPressure,
            Self::Density | Self::DensityAt298 => Property::LiquidDensity,
            Self::EnthalpyOfVaporization => Property::EnthalpyOfVaporization,
        }
    }
}

/// A measured value with what is derived for it.
pub(crate) struct Point {
    pub(crate) figure: Figure,
    /// Whether it starts from the measured boiling point.
    pub(crate) measured: bool,
    pub(crate) molecule: usize,
    pub(crate) temperature_k: f64,
    pub(crate) value: f64,
    pub(crate) estimate: Option<f64>,
    /// The 90 % interval, where every one that it rests on is known.
    pub(crate) interval: Option<(f64, f64)>,
    /// Whether the fits have all of its atoms.
    pub(crate) inside: bool,
}

impl Point {
    pub(crate) const fn from(&self) -> &'static str {
        if self.measured {
            "measured T_b"
        } else {
            "structure"
        }
    }

    fn error(&self) -> Option<f64> {
        let ratio = self.estimate? / self.value;
        Some(match self.figure {
            Figure::VaporPressure => ratio.log10(),
            _ => 100.0 * (ratio - 1.0),
        })
    }
}

/// Every measured value of the figures that are derived, with its estimates.
pub(crate) fn points(fit: &Fit, level: Level) -> Vec<Point> {
    let reference = &fit.reference;
    let boiling = reference.measured_boiling_points();
    let room = |values: &[(usize, f64)]| -> Vec<(usize, f64, f64)> {
        let at_room =
            |&(molecule, value): &(usize, f64)| (molecule, REFERENCE_TEMPERATURE_K, value);
        values.iter().map(at_room).collect()
    };
    let figures = [
        (Figure::VaporPressure, reference.vapor_pressures.clone()),
        (Figure::Density, reference.densities.clone()),
        (Figure::DensityAt298, room(&reference.densities_298)),
        (Figure::EnthalpyOfVaporization, room(&reference.enthalpies)),
    ];
    let methods = PureMethods::built_in();
    let mut found = Vec::new();
    for measured in [false, true] {
        let mut asked: Vec<usize> = figures
            .iter()
            .flat_map(|(_, points)| points.iter().map(|point| point.0))
            .filter(|molecule| !measured || boiling.contains_key(molecule))
            .collect();
        asked.sort_unstable();
        asked.dedup();
        let derived: BTreeMap<usize, Option<Derived>> = asked
            .into_par_iter()
            .map(|molecule| {
                let tb = boiling.get(&molecule).copied().filter(|_| measured);
                (molecule, Derived::of(fit, level, molecule, tb))
            })
            .collect();
        for (figure, points) in &figures {
            for &(molecule, temperature_k, value) in points {
                let Some(derived) = derived.get(&molecule) else {
                    continue;
                };
                let derived = derived.as_ref();
                let estimate = derived
                    .and_then(|one| one.estimate(&methods, figure.property(), temperature_k));
                found.push(Point {
                    figure: *figure,
                    measured,
                    molecule,
                    temperature_k,
                    value,
                    estimate: estimate.as_ref().map(|estimate| estimate.value),
                    interval: estimate
                        .and_then(|estimate| estimate.interval)
                        .filter(|_| derived.is_some_and(|one| one.with_intervals)),
                    inside: derived.is_some_and(|one| one.inside),
                });
            }
        }
    }
    found
}

/// Errors of one figure in one class of molecules.
#[derive(Default)]
struct Errors {
    asked: usize,
    errors: Vec<f64>,
    with_interval: usize,
    held: usize,
}

/// Errors as a table.
pub(crate) fn errors(fit: &Fit, points: &[Point]) -> Result<String, Box<dyn Error>> {
    let mut table: BTreeMap<String, Errors> = BTreeMap::new();
    for point in points {
        let described = &fit.molecules[point.molecule];
        for class in [
            "all".to_owned(),
            format!("family: {}", Family::of(described).id()),
            format!("size: {}", SizeClass::of(described.heavy_atoms()).id()),
        ] {
            let (figure, unit) = (point.figure.id(), point.figure.unit());
            let key = format!("{figure},{},{unit},{class}", point.from());
            let entry = table.entry(key).or_default();
            entry.asked += 1;
            if let Some(error) = point.error() {
                entry.errors.push(error);
                let held = point
                    .interval
                    .map(|(low, high)| (low..=high).contains(&point.value));
                entry.with_interval += usize::from(held.is_some());
                entry.held += usize::from(held == Some(true));
            }
        }
    }
    let mut text = String::from(
        "figure,from,unit,class,points,with_value,mean_abs,median_abs,p90_abs,mean_abs_best_98_percent,bias,with_interval,coverage\n",
    );
    for (what, found) in table {
        let mut values = found.errors;
        let n = values.len();
        if n == 0 {
            continue;
        }
        let bias = values.iter().sum::<f64>() / n as f64;
        values.iter_mut().for_each(|value| *value = value.abs());
        values.sort_by(f64::total_cmp);
        let mean = |count: usize| values[..count].iter().sum::<f64>() / count.max(1) as f64;
        writeln!(
            text,
            "{what},{},{n},{:.4},{:.4},{:.4},{:.4},{bias:.4},{},{:.3}",
            found.asked,
            mean(n),
            values[n / 2],
            values[n * 9 / 10],
            mean(n * 98 / 100),
            found.with_interval,
            found.held as f64 / found.with_interval.max(1) as f64
        )?;
    }
    Ok(text)
}
