//! One substance with everything measured that is held about it.

use std::sync::Arc;

use super::{CasNumber, LiquidDensity, VaporPressure};
use crate::chem::Composition;
use crate::quantity::{Absent, Estimate, Flags, Outcome, Property, STANDARD_ATMOSPHERE_PA, Status};

/// Relative width around the standard atmosphere in which a boiling point counts as normal.
const NORMAL_PRESSURE_WIDTH: f64 = 1e-3;

/// Half-width in K within which a measured point at one temperature answers for another.
const SAME_TEMPERATURE_K: f64 = 0.01;

/// One measured number.
#[derive(Clone, Debug, PartialEq)]
pub struct Constant {
    /// What was measured.
    pub property: Property,
    /// The value in the SI unit of the property.
    pub value: f64,
    /// The temperature it belongs to, in K, where it depends on one.
    pub temperature_k: Option<f64>,
    /// The pressure it belongs to, in Pa, where that is stated.
    pub pressure_pa: Option<f64>,
    /// The published source.
    pub source: Arc<str>,
}

/// A substance: identity, names, and measured data in order of preference.
#[derive(Clone, Debug)]
pub struct Substance {
    pub(super) name: Arc<str>,
    pub(super) synonyms: Vec<Arc<str>>,
    pub(super) family: Option<Arc<str>>,
    pub(super) cas: Option<CasNumber>,
    pub(super) smiles: Arc<str>,
    pub(super) composition: Composition,
    pub(super) molar_mass_kg_per_mol: f64,
    pub(super) constants: Vec<Constant>,
    pub(super) vapor_pressures: Vec<VaporPressure>,
    pub(super) densities: Vec<LiquidDensity>,
}

impl Substance {
    /// The name it goes by in tables and messages.
    pub fn name(&self) -> &Arc<str> {
        &self.name
    }

    /// Other names, in the order of the table.
    pub fn synonyms(&self) -> &[Arc<str>] {
        &self.synonyms
    }

    /// The family it is listed under, where one is stated.
    pub fn family(&self) -> Option<&str> {
        self.family.as_deref()
    }

    /// CAS number, where one is known.
    pub fn cas(&self) -> Option<CasNumber> {
        self.cas
    }

    /// Structure, with stereochemistry and isotopes where the name states them.
    pub fn smiles(&self) -> &str {
        &self.smiles
    }

    /// Element counts.
    pub fn composition(&self) -> &Composition {
        &self.composition
    }

    /// Molar mass in kg/mol, isotopes of the structure counted.
    pub fn molar_mass_kg_per_mol(&self) -> f64 {
        self.molar_mass_kg_per_mol
    }

    /// Every single measured number, the preferred one of a property first.
    pub fn constants(&self) -> &[Constant] {
        &self.constants
    }

    /// The preferred vapor-pressure curve.
    pub fn vapor_pressure(&self) -> Option<&VaporPressure> {
        self.vapor_pressures.first()
    }

    /// Every vapor-pressure curve, the preferred one first.
    pub fn vapor_pressures(&self) -> &[VaporPressure] {
        &self.vapor_pressures
    }

    /// The preferred density curve.
    pub fn liquid_density(&self) -> Option<&LiquidDensity> {
        self.densities.first()
    }

    /// Every density curve, the preferred one first.
    pub fn liquid_densities(&self) -> &[LiquidDensity] {
        &self.densities
    }

    /// The measured value of a property, `None` if nothing is held about it.
    ///
    /// - A property that depends on temperature is taken from the first curve
    ///   whose range holds `temperature_k`, else from the first that may be
    ///   stretched so far, then with a flag; a single number counts within
    ///   0.01 K of its temperature. If neither applies, the outcome is
    ///   [`Absent::OutsideRange`].
    /// - The boiling point is the number stated for 101.325 kPa; failing that,
    ///   the temperature at which the vapor-pressure curve reaches it, rounded to
    ///   0.1 K because a curve knows no more; its source says so.
    /// - `temperature_k` does not matter to other properties.
    pub fn measured(&self, property: Property, temperature_k: f64) -> Option<Outcome> {
        match property {
            Property::BoilingPoint => self.boiling_point(),
            Property::VaporPressure => self
                .point(property, temperature_k)
                .or_else(|| self.vapor_pressure_at(temperature_k)),
            Property::LiquidDensity => self
                .point(property, temperature_k)
                .or_else(|| self.density_at(temperature_k)),
            property if property.depends_on_temperature() => self.point(property, temperature_k),
            property => self
                .constants
                .iter()
                .find(|constant| constant.property == property)
                .map(|constant| Ok(constant.estimate())),
        }
    }

    fn point(&self, property: Property, temperature_k: f64) -> Option<Outcome> {
        self.constants
            .iter()
            .find(|constant| {
                constant.property == property
                    && constant
                        .temperature_k
                        .is_some_and(|t| (t - temperature_k).abs() <= SAME_TEMPERATURE_K)
            })
            .map(|constant| Ok(constant.estimate()))
    }

    fn boiling_point(&self) -> Option<Outcome> {
        let stated = self.constants.iter().find(|constant| {
            constant.property == Property::BoilingPoint
                && constant.pressure_pa.is_some_and(is_normal_pressure)
        });
        if let Some(constant) = stated {
            return Some(Ok(constant.estimate()));
        }
        let curve = self.vapor_pressure()?;
        Some(
            curve
                .saturation_temperature_k(STANDARD_ATMOSPHERE_PA)
                .map(|t| {
                    let source = format!(
                        "vapor-pressure curve at 101.325 kPa, rounded to 0.1 K: {}",
                        curve.source()
                    );
                    let rounded = (t * 10.0).round() / 10.0;
                    from_curve(rounded, None, curve.flags_at(t), &Arc::from(source))
                })
                .map_err(Absent::from),
        )
    }

    fn vapor_pressure_at(&self, temperature_k: f64) -> Option<Outcome> {
        let curve = preferred(
            &self.vapor_pressures,
            |curve| (curve.covers(temperature_k), curve.limits_k()),
            temperature_k,
        )?;
        Some(
            curve
                .pressure_pa(temperature_k)
                .map(|p| {
                    let flags = curve.flags_at(temperature_k);
                    from_curve(p, Some(temperature_k), flags, curve.source())
                })
                .map_err(Absent::from),
        )
    }

    fn density_at(&self, temperature_k: f64) -> Option<Outcome> {
        let curve = preferred(
            &self.densities,
            |curve| (curve.covers(temperature_k), curve.limits_k()),
            temperature_k,
        )?;
        Some(
            curve
                .density_kg_per_m3(temperature_k)
                .map(|density| {
                    let flags = curve.flags_at(temperature_k);
                    from_curve(density, Some(temperature_k), flags, curve.source())
                })
                .map_err(Absent::from),
        )
    }
}

pub(super) fn is_normal_pressure(pressure_pa: f64) -> bool {
    (pressure_pa / STANDARD_ATMOSPHERE_PA - 1.0).abs() <= NORMAL_PRESSURE_WIDTH
}

/// The first curve that covers the temperature, else the first that can be
/// stretched to it, else the first.
fn preferred<C>(
    curves: &[C],
    reach: impl Fn(&C) -> (bool, (f64, f64)),
    temperature_k: f64,
) -> Option<&C> {
    let within = |curve: &&C| {
        let (low, high) = reach(curve).1;
        (low..=high).contains(&temperature_k)
    };
    curves
        .iter()
        .find(|curve| reach(curve).0)
        .or_else(|| curves.iter().find(within))
        .or(curves.first())
}

impl Constant {
    fn estimate(&self) -> Estimate {
        from_curve(self.value, self.temperature_k, Flags::NONE, &self.source)
    }
}

fn from_curve(value: f64, temperature_k: Option<f64>, flags: Flags, source: &Arc<str>) -> Estimate {
    Estimate {
        value,
        interval: None,
        temperature_k,
        method: "measured",
        status: Status::Measured,
        flags,
        source: Some(Arc::clone(source)),
    }
}
