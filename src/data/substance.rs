//! One substance with everything measured that is held about it.

use std::sync::Arc;

use smallvec::SmallVec;

use super::{CasNumber, LiquidDensity, PointCurve, Supply, VaporPressure};
use crate::chem::Composition;
use crate::quantity::{
    Absent, Estimate, Flag, Flags, Outcome, Property, STANDARD_ATMOSPHERE_PA, Status,
};

/// By how much a vapor-pressure curve may miss a stated boiling point, in K.
pub(super) const BOILING_POINT_MISS_K: f64 = 3.0;

/// Relative width around the standard atmosphere in which a boiling point counts as normal.
const NORMAL_PRESSURE_WIDTH: f64 = 1e-3;

/// Half-width in K within which a measured point at one temperature answers for another.
pub(super) const SAME_TEMPERATURE_K: f64 = 0.01;

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
    pub(super) point_curves: Vec<PointCurve>,
    pub(super) supplies: Vec<Supply>,
    /// Whether a user's curve goes before an older boiling point it contradicts.
    pub(super) boils_by_curve: bool,
    /// Properties of which a user's value contradicts an older one.
    pub(super) contradicted: Vec<Property>,
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

    /// Every measured number of a property, the preferred one first.
    pub fn values(&self, property: Property) -> impl Iterator<Item = &Constant> {
        self.constants
            .iter()
            .filter(move |constant| constant.property == property)
    }

    /// The preferred vapor-pressure curve for work over a range of
    /// temperatures: the first equation, else measured points. An older equation
    /// beside a user's points has been moved through them.
    pub fn vapor_pressure(&self) -> Option<&VaporPressure> {
        let equation = self.vapor_pressures.iter().find(|curve| !curve.is_points());
        equation.or(self.vapor_pressures.first())
    }

    /// Every vapor-pressure curve, the preferred one first.
    pub fn vapor_pressures(&self) -> &[VaporPressure] {
        &self.vapor_pressures
    }

    /// The preferred density curve: the first equation, else measured points.
    pub fn liquid_density(&self) -> Option<&LiquidDensity> {
        let equation = self.densities.iter().find(|curve| !curve.is_points());
        equation.or(self.densities.first())
    }

    /// Every density curve, the preferred one first.
    pub fn liquid_densities(&self) -> &[LiquidDensity] {
        &self.densities
    }

    /// Curves through measured points of viscosity, surface tension and ideal-gas
    /// heat capacity, the preferred one of a property first.
    pub fn point_curves(&self) -> &[PointCurve] {
        &self.point_curves
    }

    /// Price and availability, the user's latest statement first.
    pub fn supplies(&self) -> &[Supply] {
        &self.supplies
    }

    /// The measured value of a property, `None` if nothing is held about it.
    ///
    /// - A property that depends on temperature is the number stated within
    ///   0.01 K of `temperature_k`; else it is taken from the first curve (an
    ///   equation, or the lines between measured points) whose range holds the
    ///   temperature, else from the first that may be stretched so far, then with
    ///   a flag. If none applies, the outcome is [`Absent::OutsideRange`].
    /// - The boiling point is the number stated for 101.325 kPa; failing that,
    ///   the temperature at which the vapor-pressure curve reaches it, rounded to
    ///   0.1 K because a curve knows no more; its source says so.
    ///   So it does where a user's curve contradicts an older stated one.
    /// - Boiling point and vapor pressure are flagged [`Flag::Inconsistent`]
    ///   where a boiling point and a curve of different layers part by more than
    ///   3 K; densities where those of different layers part by more than 5 %;
    ///   the enthalpy of vaporization where an older curve contradicts a user's.
    /// - The enthalpy of vaporization is that at the normal boiling point; one
    ///   stated for another temperature does not answer for it.
    /// - `temperature_k` does not matter to other properties.
    pub fn measured(&self, property: Property, temperature_k: f64) -> Option<Outcome> {
        match property {
            Property::BoilingPoint => self.boiling_point(),
            Property::VaporPressure => self
                .point(property, temperature_k)
                .or_else(|| self.vapor_pressure_at(temperature_k)),
            Property::LiquidDensity => self
                .point(property, temperature_k)
                .map(|found| found.map(|value| value.flagged(self.flags_of(property))))
                .or_else(|| self.density_at(temperature_k)),
            property if property.depends_on_temperature() => self
                .point(property, temperature_k)
                .or_else(|| self.between_points(property, temperature_k)),
            Property::EnthalpyOfVaporization => self
                .values(property)
                .find(|constant| constant.temperature_k.is_none())
                .map(|constant| Ok(constant.estimate().flagged(self.flags_of(property)))),
            property => self
                .values(property)
                .next()
                .map(|constant| Ok(constant.estimate())),
        }
    }

    fn point(&self, property: Property, temperature_k: f64) -> Option<Outcome> {
        self.values(property)
            .find(|constant| {
                constant
                    .temperature_k
                    .is_some_and(|t| (t - temperature_k).abs() <= SAME_TEMPERATURE_K)
            })
            .map(|constant| Ok(constant.estimate()))
    }

    /// The preferred boiling point stated for 101.325 kPa.
    pub(super) fn stated_boiling_point(&self) -> Option<&Constant> {
        self.constants
            .iter()
            .find(|constant| constant.is_normal_boiling_point())
    }

    /// [`Flag::Inconsistent`] where the curve contradicts other data or misses
    /// the stated boiling point.
    fn flags_of_boiling_point(&self, curve: &VaporPressure) -> Flags {
        let parted = self.stated_boiling_point().is_some_and(|constant| {
            misses(
                curve,
                constant.value,
                STANDARD_ATMOSPHERE_PA,
                BOILING_POINT_MISS_K,
            )
        });
        if parted {
            curve.flags().with(Flag::Inconsistent)
        } else {
            curve.flags()
        }
    }

    fn boiling_point(&self) -> Option<Outcome> {
        if let Some(constant) = self.stated_boiling_point()
            && !self.boils_by_curve
        {
            let flags = self
                .vapor_pressure()
                .map_or(Flags::NONE, |curve| self.flags_of_boiling_point(curve));
            return Some(Ok(constant.estimate().flagged(flags)));
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

    /// The curve that answers at a temperature: the first that covers it, else
    /// the first that can be stretched to it, else the first.
    fn vapor_pressure_at_best(&self, temperature_k: f64) -> Option<&VaporPressure> {
        preferred(
            &self.vapor_pressures,
            |curve| (curve.covers(temperature_k), curve.limits_k()),
            temperature_k,
        )
    }

    /// The same among equations, whose slope is better than that of points; points failing that.
    pub(super) fn curve_for_slope(&self, temperature_k: f64) -> Option<&VaporPressure> {
        let equations: SmallVec<[&VaporPressure; 4]> = self
            .vapor_pressures
            .iter()
            .filter(|curve| !curve.is_points() && !curve.is_moved())
            .collect();
        preferred(
            &equations,
            |curve| (curve.covers(temperature_k), curve.limits_k()),
            temperature_k,
        )
        .copied()
        .or_else(|| self.vapor_pressure_at_best(temperature_k))
    }

    fn vapor_pressure_at(&self, temperature_k: f64) -> Option<Outcome> {
        let curve = self.vapor_pressure_at_best(temperature_k)?;
        Some(
            curve
                .pressure_pa(temperature_k)
                .map(|p| {
                    let flags = curve
                        .flags_at(temperature_k)
                        .union(self.flags_of_boiling_point(curve));
                    from_curve(p, Some(temperature_k), flags, curve.source())
                })
                .map_err(Absent::from),
        )
    }

    /// Notes that a user's value of the property contradicts an older one.
    pub(super) fn contradicts(&mut self, property: Property) {
        if !self.contradicted.contains(&property) {
            self.contradicted.push(property);
        }
    }

    fn flags_of(&self, property: Property) -> Flags {
        match self.contradicted.contains(&property) {
            true => Flags::NONE.with(Flag::Inconsistent),
            false => Flags::NONE,
        }
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
                    let flags = curve
                        .flags_at(temperature_k)
                        .union(self.flags_of(Property::LiquidDensity));
                    from_curve(density, Some(temperature_k), flags, curve.source())
                })
                .map_err(Absent::from),
        )
    }

    fn between_points(&self, property: Property, temperature_k: f64) -> Option<Outcome> {
        let of_property: SmallVec<[&PointCurve; 2]> = self
            .point_curves
            .iter()
            .filter(|curve| curve.property() == property)
            .collect();
        let curve = preferred(
            &of_property,
            |curve| (curve.covers(temperature_k), curve.limits_k()),
            temperature_k,
        )?;
        Some(
            curve
                .value(temperature_k)
                .map(|value| {
                    let flags = curve.flags_at(temperature_k);
                    from_curve(value, Some(temperature_k), flags, curve.source())
                })
                .map_err(Absent::from),
        )
    }
}

/// Whether a curve misses a measured boiling point by more than `width_k`;
/// one that reaches neither its temperature nor its pressure does not.
pub(super) fn misses(
    curve: &VaporPressure,
    temperature_k: f64,
    pressure_pa: f64,
    width_k: f64,
) -> bool {
    let at = |t: f64| curve.pressure_pa(t).ok();
    let (low_k, high_k) = curve.limits_k();
    // a curve that has the pressure before its end misses a point beyond it
    at((temperature_k - width_k).min(high_k)).is_some_and(|low| low > pressure_pa)
        || at((temperature_k + width_k).max(low_k)).is_some_and(|high| high < pressure_pa)
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
    /// Whether the other number is of the same property in the same state:
    /// within 0.01 K and a thousandth of the pressure, where these matter to it.
    pub fn is_of_same_state(&self, other: &Self) -> bool {
        let same = |one: Option<f64>, other: Option<f64>, width: f64| match (one, other) {
            (Some(one), Some(other)) => (one - other).abs() <= width,
            (one, other) => one == other,
        };
        let takes_temperature = self.property.depends_on_temperature()
            || self.property == Property::EnthalpyOfVaporization;
        let takes_pressure = takes_temperature || self.property == Property::BoilingPoint;
        let width_pa = NORMAL_PRESSURE_WIDTH * self.pressure_pa.unwrap_or(0.0);
        self.property == other.property
            && (!takes_temperature
                || same(self.temperature_k, other.temperature_k, SAME_TEMPERATURE_K))
            && (!takes_pressure || same(self.pressure_pa, other.pressure_pa, width_pa))
    }

    /// Whether it is a boiling point at 101.325 kPa.
    pub(super) fn is_normal_boiling_point(&self) -> bool {
        self.property == Property::BoilingPoint && self.pressure_pa.is_some_and(is_normal_pressure)
    }

    /// A liquid density in kg/m³ at a temperature in K.
    pub(super) fn density(value: f64, temperature_k: f64, source: &Arc<str>) -> Self {
        Self {
            property: Property::LiquidDensity,
            value,
            temperature_k: Some(temperature_k),
            pressure_pa: None,
            source: Arc::clone(source),
        }
    }

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
        note: None,
    }
}
