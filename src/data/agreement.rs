//! What can be judged only when a layer is read to its end: points that belong
//! to one line, and numbers of one layer against curves of all.

use std::fmt::Write as _;
use std::sync::Arc;

use super::load::{Kind, Layer};
use super::points::{PointCurve, Points, Straight};
use super::substance::{BOILING_POINT_MISS_K, SAME_TEMPERATURE_K, is_normal_pressure, misses};
use super::{
    Conflict, Constant, DensityEquation, LiquidDensity, Substance, VaporPressure,
    VaporPressureEquation,
};
use crate::quantity::{Dimension, Property, STANDARD_ATMOSPHERE_PA, number, unit};
use crate::table::TableError;

/// By how much a stated density may differ from the substance's curve, as a part of it.
pub(super) const DENSITY_MISS: f64 = 0.05;

/// By how much a measured enthalpy of vaporization may differ from that of the
/// vapor-pressure curve, as a part of it.
///
/// Of the built-in values at the normal boiling point, carboxylic acids apart,
/// half are within 1 % and 95 % within 5 % where the critical point is known; the
/// two that are further off than this are named in `groups/substances/README.md`.
pub(super) const ENTHALPY_MISS: f64 = 0.09;

/// Significant digits of the other value of a disagreement: a curve knows no more.
const CURVE_DIGITS: u32 = 6;

/// What a user's number is remembered for: its place, for a fault found later.
pub(super) struct Stated {
    pub(super) substance: u32,
    pub(super) constant: Constant,
    /// The cell of the number; the sentence is still to come.
    pub(super) place: TableError,
}

impl Stated {
    fn fault(&self, sentence: String) -> TableError {
        let mut place = self.place.clone();
        if let TableError::Cell { fault, .. } = &mut place {
            *fault = sentence;
        }
        place
    }

    /// The curve the number is a point of, with temperature in K and value.
    fn point(&self) -> Option<(Property, f64, f64)> {
        let Constant {
            property,
            value,
            temperature_k,
            pressure_pa,
            ..
        } = self.constant;
        match property {
            Property::BoilingPoint => Some((Property::VaporPressure, value, pressure_pa?)),
            _ if property.depends_on_temperature() => Some((property, temperature_k?, value)),
            _ => None,
        }
    }
}

impl Layer<'_> {
    /// Joins points, compares them and enthalpies of vaporization with curves,
    /// and records where a user's number overrules another.
    pub(super) fn agree(&mut self) {
        let stated = std::mem::take(&mut self.stated);
        let mut points: Vec<(u32, Property, f64, f64, &Stated)> = stated
            .iter()
            .filter_map(|one| {
                let (property, temperature_k, value) = one.point()?;
                Some((one.substance, property, temperature_k, value, one))
            })
            .collect();
        points.sort_by(|a, b| (a.0, a.1).cmp(&(b.0, b.1)).then(a.2.total_cmp(&b.2)));
        for of_one in points.chunk_by(|a, b| (a.0, a.1) == (b.0, b.1)) {
            let (substance, property, ..) = of_one[0];
            let of_one: Vec<_> = of_one
                .iter()
                .map(|&(_, _, t, v, one)| (t, v, one))
                .collect();
            self.join(substance, property, &of_one);
        }
        if self.of_user {
            for one in &stated {
                self.check_enthalpy(one);
                self.record_overruled(one);
            }
        }
    }

    /// Makes a curve of the points of a property, in order of temperature.
    fn join(&mut self, substance: u32, property: Property, stated: &[(f64, f64, &Stated)]) {
        let faults = self.faults.len();
        for pair in stated.windows(2) {
            let [(t0, p0, before), (t1, p1, one)] = *pair else {
                continue;
            };
            // a boiling point and a vapor pressure may state the same point, each with its error
            let same_point = before.constant.property != one.constant.property
                && t1 - t0 <= BOILING_POINT_MISS_K;
            if property == Property::VaporPressure && p1 <= p0 && !same_point {
                self.faults.push(one.fault(format!(
                    "vapor pressure does not rise: {} at {t0:.2} K, {} at {t1:.2} K",
                    unit::table_text(p0, Dimension::Pressure),
                    unit::table_text(p1, Dimension::Pressure),
                )));
            }
        }
        let at = &self.all.substances[substance as usize];
        if property == Property::LiquidDensity {
            let fresh = self.fresh(substance, Kind::Densities);
            let curves = &at.densities[fresh..];
            let parted: Vec<_> = stated
                .iter()
                .filter_map(|&(t, density, one)| {
                    let (other, source) = contradicted_density(curves, t, density)?;
                    Some((one, Constant::density(other, t, source)))
                })
                .collect();
            for (one, other) in parted {
                if self.of_user {
                    self.record(substance, &other, one.constant.value, &one.constant.source);
                    self.all.substances[substance as usize].contradicts(property);
                } else {
                    self.faults.push(one.fault(format!(
                        "{:.1} kg/m3 is stated at {:.2} K, the curve gives {:.1} kg/m3 ({})",
                        one.constant.value,
                        other.temperature_k.unwrap_or_default(),
                        other.value,
                        other.source
                    )));
                }
            }
        }
        if self.faults.len() > faults {
            return;
        }
        let mut line: Vec<(f64, f64)> = Vec::with_capacity(stated.len());
        let mut sources: Vec<&str> = Vec::new();
        for &(t, value, one) in stated {
            if line.last().is_some_and(|&(before, other)| {
                t - before <= SAME_TEMPERATURE_K
                    || property == Property::VaporPressure && value <= other
            }) {
                continue;
            }
            line.push((t, value));
            if !sources.contains(&&*one.constant.source) {
                sources.push(&one.constant.source);
            }
        }
        let mut source = String::from(match line.len() {
            1 => "one measured point: ",
            _ => "between measured points: ",
        });
        for (position, name) in sources.iter().enumerate() {
            let between = if position > 0 { "; " } else { "" };
            let _ = write!(source, "{between}{name}");
        }
        if property == Property::VaporPressure && self.of_user {
            self.move_curve(substance, &line, &source);
        }
        self.add_line(substance, property, &line, Arc::from(source), stated[0].2);
    }

    /// Moves the older equation that would be worked with through the user's points.
    fn move_curve(&mut self, substance: u32, line: &[(f64, f64)], source: &str) {
        let fresh = self.fresh(substance, Kind::VaporPressures);
        let (own, older) = self.all.substances[substance as usize]
            .vapor_pressures
            .split_at(fresh);
        if own.iter().any(|curve| !curve.is_points()) {
            return;
        }
        let Some(at) = older.iter().position(|curve| !curve.is_points()) else {
            return;
        };
        // the lines between the points are a curve of their own, this is not
        let source = source.trim_start_matches("between ");
        let curve = older[at].moved_or_flagged(line, source);
        let boils_by_curve = self.reaches_over_normal_pressure(substance, line, &curve);
        let is_moved = curve.is_moved();
        let place = match is_moved {
            true => self.place(substance, Kind::VaporPressures),
            false => 0,
        };
        let substance = &mut self.all.substances[substance as usize];
        if is_moved {
            substance.vapor_pressures.insert(place, curve);
            substance.boils_by_curve |= boils_by_curve;
        } else {
            substance.vapor_pressures[fresh + at] = curve;
        }
    }

    /// Whether the user's points, none of them at the standard atmosphere, lie
    /// to both sides of it and contradict the boiling point stated before.
    fn reaches_over_normal_pressure(
        &self,
        substance: u32,
        line: &[(f64, f64)],
        moved: &VaporPressure,
    ) -> bool {
        let fresh = self.fresh(substance, Kind::Constants);
        let substance = &self.all.substances[substance as usize];
        let own = substance.constants[..fresh]
            .iter()
            .any(Constant::is_normal_boiling_point);
        let both_sides = line.iter().any(|&(_, p)| p <= STANDARD_ATMOSPHERE_PA)
            && line.iter().any(|&(_, p)| p >= STANDARD_ATMOSPHERE_PA);
        !own && both_sides
            && substance.stated_boiling_point().is_some_and(|stated| {
                misses(
                    moved,
                    stated.value,
                    STANDARD_ATMOSPHERE_PA,
                    BOILING_POINT_MISS_K,
                )
            })
    }

    fn add_line(
        &mut self,
        substance: u32,
        property: Property,
        line: &[(f64, f64)],
        source: Arc<str>,
        first: &Stated,
    ) {
        let straight = match property {
            Property::VaporPressure | Property::LiquidViscosity => {
                Straight::LogInReciprocalTemperature
            }
            _ => Straight::InTemperature,
        };
        // of one point only a density is good for its neighborhood
        if line.len() < 2 && property != Property::LiquidDensity {
            return;
        }
        let Some(points) = Points::new(straight, line) else {
            self.faults
                .push(first.fault("cannot be joined with the other points".into()));
            return;
        };
        let (low, high) = points.range_k();
        match property {
            Property::VaporPressure => {
                match VaporPressure::new(VaporPressureEquation::Points(points), low, high, source) {
                    Ok(curve) => {
                        let place = self.place(substance, Kind::VaporPressures);
                        let at = &mut self.all.substances[substance as usize];
                        at.vapor_pressures.insert(place, curve);
                    }
                    Err(t) => self.faults.push(first.fault(format!(
                        "the points give no pressure that rises with temperature at {t:.2} K"
                    ))),
                }
            }
            Property::LiquidDensity => {
                match LiquidDensity::new(DensityEquation::Points(points), low, high, source) {
                    Some(curve) => {
                        let place = self.place(substance, Kind::Densities);
                        let at = &mut self.all.substances[substance as usize];
                        at.densities.insert(place, curve);
                    }
                    None => {
                        self.faults.push(first.fault(
                            "gives a density that is not between 100 and 10000 kg/m3".into(),
                        ))
                    }
                }
            }
            _ => {
                let place = self.place(substance, Kind::PointCurves);
                let at = &mut self.all.substances[substance as usize];
                at.point_curves
                    .insert(place, PointCurve::new(property, points, source));
            }
        }
    }

    /// Refuses an enthalpy of vaporization that the user's own vapor-pressure
    /// curve contradicts, and records where an older curve does.
    fn check_enthalpy(&mut self, one: &Stated) {
        if one.constant.property != Property::EnthalpyOfVaporization {
            return;
        }
        let substance = &self.all.substances[one.substance as usize];
        let Some((temperature_k, implied)) = contradicted_enthalpy(substance, &one.constant) else {
            return;
        };
        // an associating vapor carries fewer moles than the equation counts
        if self
            .reader
            .read_into(substance.smiles(), &mut self.molecule)
            .is_ok()
            && self.molecule.has_carboxyl()
        {
            return;
        }
        let Some(curve) = substance.curve_for_slope(temperature_k) else {
            return;
        };
        let source = Arc::clone(curve.source());
        let own = self.fresh(one.substance, Kind::VaporPressures);
        let is_own = substance.vapor_pressures[..own]
            .iter()
            .any(|own| std::ptr::eq(own, curve));
        if !is_own {
            let other = Constant {
                value: implied,
                source,
                ..one.constant.clone()
            };
            self.record(
                one.substance,
                &other,
                one.constant.value,
                &one.constant.source,
            );
            self.all.substances[one.substance as usize].contradicts(one.constant.property);
            return;
        }
        self.faults.push(one.fault(format!(
            "{:.0} J/mol is stated, the vapor-pressure curve gives {implied:.0} J/mol at {temperature_k:.2} K ({source})",
            one.constant.value
        )));
    }

    /// Records a number of the user that parts from an older one, or a boiling
    /// point that parts from an older curve: the user's is the one used.
    fn record_overruled(&mut self, one: &Stated) {
        let constant = &one.constant;
        let property = constant.property;
        let substance = &self.all.substances[one.substance as usize];
        let fresh = self.fresh(one.substance, Kind::Constants);
        let older = substance.constants[fresh..]
            .iter()
            .find(|other| other.is_of_same_state(constant))
            .filter(|other| parts(property, constant.value, other.value))
            .map(|other| (other.value, Arc::clone(&other.source)));
        let curve = || {
            let (t, p) = match property {
                Property::BoilingPoint => (constant.value, constant.pressure_pa?),
                Property::VaporPressure => (constant.temperature_k?, constant.value),
                _ => return None,
            };
            let older = self.fresh(one.substance, Kind::VaporPressures);
            let curve = substance.vapor_pressures[older..]
                .iter()
                .find(|curve| misses(curve, t, p, BOILING_POINT_MISS_K))?;
            let value = match property {
                Property::BoilingPoint => curve.saturation_temperature_k(p).ok()?,
                _ => curve.pressure_pa(t).ok()?,
            };
            Some((value, Arc::clone(curve.source())))
        };
        let Some((other, other_source)) = older.or_else(curve) else {
            return;
        };
        let other = Constant {
            value: other,
            source: other_source,
            ..constant.clone()
        };
        self.record(one.substance, &other, constant.value, &constant.source);
    }

    /// Records that a user's value is used in place of another.
    pub(super) fn record(
        &mut self,
        substance: u32,
        constant: &Constant,
        used: f64,
        used_source: &Arc<str>,
    ) {
        let dimension = constant.property.dimension();
        let at = match constant.pressure_pa {
            Some(pressure_pa) if !is_normal_pressure(pressure_pa) => {
                format!("at {} kPa: ", number::short(pressure_pa / 1000.0))
            }
            _ => String::new(),
        };
        let text =
            |value: f64| Arc::from(number::text(unit::to_table(value, dimension), CURVE_DIGITS));
        self.all.conflicts.push(Conflict {
            substance: substance as usize,
            property: Arc::from(constant.property.id()),
            temperature_k: constant.temperature_k,
            used: text(used),
            used_source: Arc::clone(used_source),
            other: text(constant.value),
            other_source: Arc::clone(&constant.source),
            unit: Arc::from(unit::si_symbol(dimension)),
            decision: Arc::from(format!(
                "{at}a user's value goes before those that are built in"
            )),
        });
    }
}

/// The temperature in K and the enthalpy in J/mol by which a curve contradicts a measured one.
fn contradicted_enthalpy(substance: &Substance, measured: &Constant) -> Option<(f64, f64)> {
    let temperature_k = match measured.temperature_k {
        Some(temperature_k) => temperature_k,
        None => substance.measured(Property::BoilingPoint, 0.0)?.ok()?.value,
    };
    // the slope between two points carries the error of both: it contradicts nobody
    substance
        .curve_for_slope(temperature_k)
        .filter(|curve| !curve.is_points())?;
    let implied = substance.clapeyron_enthalpy(temperature_k)?.ok()?;
    let ratio = measured.value / implied.enthalpy_j_per_mol - 1.0;
    let allowed = -ENTHALPY_MISS - implied.ideal_excess..=ENTHALPY_MISS;
    (!allowed.contains(&ratio)).then_some((temperature_k, implied.enthalpy_j_per_mol))
}

/// The density in kg/m³ by which a curve contradicts a stated one, and its source.
fn contradicted_density(
    curves: &[LiquidDensity],
    temperature_k: f64,
    density_kg_per_m3: f64,
) -> Option<(f64, &Arc<str>)> {
    curves.iter().find_map(|curve| {
        let other = curve.density_kg_per_m3(temperature_k).ok()?;
        let parted = (density_kg_per_m3 / other - 1.0).abs() > DENSITY_MISS;
        parted.then(|| (other, curve.source()))
    })
}

/// Whether two numbers of a property differ by more than good sources do.
fn parts(property: Property, one: f64, other: f64) -> bool {
    let width = match property {
        Property::BoilingPoint | Property::MeltingPoint => BOILING_POINT_MISS_K,
        Property::FlashPoint => 5.0,
        Property::HansenDispersion | Property::HansenPolar | Property::HansenHydrogenBonding => {
            1000.0
        }
        Property::LiquidDensity => 0.01 * other.abs(),
        _ => 0.05 * other.abs(),
    };
    (one - other).abs() > width
}
