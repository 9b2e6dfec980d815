//! All properties of one molecule, in the order in which they rest on one another.

use super::StructureFacts;
use super::corresponding_states::{
    CATOIRE_NAUDET, CATOIRE_NAUDET_BOILING_POINTS_K, CATOIRE_NAUDET_CARBONS, Constants,
    LiquidDensityCurve, LiquidDensityInput, LiquidDensityMethod, SASTRI_RAO, SurfaceTensionClass,
    VaporPressureCurve, VaporPressureMethod, enthalpy_of_vaporization_clapeyron,
    enthalpy_of_vaporization_watson, flash_point_catoire_naudet, slope_of_enthalpy,
    surface_tension_sastri_rao,
};
use super::fitted::{expansion_to_298, volume_temperature_k};
use super::joback::{self, Contributions, LinearSums, State};
use super::method::{ATOMIC_WEIGHTS, WATSON};
use crate::chem::Element;
use crate::groups::GroupCounts;
use crate::quantity::{
    Absent, Estimate, Flag, Flags, Outcome, Property, PropertySet, REFERENCE_TEMPERATURE_K, Status,
};

/// One outcome for each property; indexed by [`Property`] `as usize`.
pub type Estimates = [Outcome; Property::COUNT];

/// Reduced temperature below which a vapor pressure is flagged: no data were
/// looked at there.
const VAPOR_PRESSURE_TR_LOW: f64 = 0.5;

/// What beside the boiling point and the enthalpy of vaporization leaves ln P open, half
/// widths of 90 % intervals: at the boiling point, and of the slope there as a part of it.
/// Set so that nine of ten vapor pressures of the cross-validation lie in their interval
/// (`results/2026-12-01-estimates/derived.csv`).
const VAPOR_PRESSURE_SHAPE: (f64, f64) = (0.045, 0.03);

/// By how much the boiling point counts in that interval: its own and the rest are not
/// independent. Set in the same way.
const BOILING_POINT_PART: f64 = 0.95;

/// Half width of the 90 % interval of the slope d ln P/d ln T where no enthalpy of
/// vaporization tells it; set from the 90th percentile of the errors without one.
const VAPOR_PRESSURE_SLOPE_UNKNOWN: f64 = 2.0;

/// What beside slope and boiling point leaves an enthalpy of vaporization open, as a part of
/// it: half width of a 90 % interval, set in the same way.
const ENTHALPY_SHAPE: f64 = 0.02;

/// Half width of the 90 % interval of a density carried by one K, as a part of it; set
/// in the same way.
const DENSITY_SHAPE_PER_K: f64 = 0.000_08;

/// Numbers of the alcohol and the acid group in the table of Joback and Reid.
const ALCOHOL_GROUP: u16 = 20;
const ACID_GROUP: u16 = 27;

/// How near two temperatures have to be to count as the same, K.
const SAME_TEMPERATURE_K: f64 = 1e-6;

/// The tables and the choice of methods; made once, shared by all.
#[derive(Clone, Debug)]
pub struct PureMethods {
    /// Contributions of Joback and Reid.
    pub joback: Contributions,
    /// Vapor pressure, and the acentric factor that goes with it.
    pub vapor_pressure: VaporPressureMethod,
    /// Density of the saturated liquid.
    pub liquid_density: LiquidDensityMethod,
}

impl PureMethods {
    /// The built-in table and the default methods.
    pub fn built_in() -> Self {
        Self {
            joback: Contributions::built_in(),
            vapor_pressure: VaporPressureMethod::default(),
            liquid_density: LiquidDensityMethod::default(),
        }
    }
}

/// Values that replace what a method would say, measured ones as a rule.
///
/// A given value is handed on as it stands and used by every method that
/// starts from it. One that depends on temperature replaces the estimate only
/// at its own temperature; a density is carried to other temperatures.
#[derive(Clone, Copy, Debug, Default)]
pub struct Given<'a>(pub &'a [(Property, Estimate)]);

impl<'a> Given<'a> {
    fn get(self, property: Property) -> Option<&'a Estimate> {
        self.0
            .iter()
            .find(|(given, _)| *given == property)
            .map(|(_, estimate)| estimate)
    }

    fn at(self, property: Property, temperature_k: f64) -> Option<&'a Estimate> {
        self.get(property).filter(|estimate| {
            !property.depends_on_temperature()
                || estimate
                    .temperature_k
                    .is_some_and(|t| (t - temperature_k).abs() <= SAME_TEMPERATURE_K)
        })
    }
}

/// Every property of one molecule at a temperature.
///
/// `counts` are groups of Joback and Reid, or the reason why there are none:
/// then all that rests on groups is absent for that reason, and the rest is
/// computed from `given` where it suffices.
///
/// # Units and shapes
///
/// Temperature in K; values in the SI unit of each property, indexed by
/// [`Property`] `as usize`.
///
/// # Complexity
///
/// No allocation; two dozen transcendental functions.
///
/// # Example
///
/// ```
/// use groupsmith::groups::GroupCounts;
/// use groupsmith::pure::{Given, PureMethods, StructureFacts, estimate_all};
/// use groupsmith::quantity::Property;
///
/// // Acetone: two -CH3 and a >C=O; 322.11 K by the method, 329.2 K measured.
/// let methods = PureMethods::built_in();
/// let counts = GroupCounts::from_text("1:2;24:1").unwrap();
/// let composition = methods.joback.atoms_of(&counts).unwrap();
/// let facts = StructureFacts::new(composition, 0.058_08);
/// let all = estimate_all(&methods, Ok(&counts), &facts, Given::default(), 298.15);
/// let boiling_point = all[Property::BoilingPoint as usize].as_ref().unwrap();
/// assert!((boiling_point.value - 322.11).abs() < 0.005);
/// ```
pub fn estimate_all(
    methods: &PureMethods,
    counts: Result<&GroupCounts, &Absent>,
    facts: &StructureFacts,
    given: Given<'_>,
    temperature_k: f64,
) -> Estimates {
    let all = PropertySet::ALL;
    estimate_some(methods, counts, facts, given, temperature_k, all)
}

/// As [`estimate_all`], as far as properties are in `asked`, which holds what they start
/// from too (see [`with_inputs`](super::with_inputs)); the others say that there is no
/// method, and flags that come of comparing with them are not set.
pub fn estimate_some(
    methods: &PureMethods,
    counts: Result<&GroupCounts, &Absent>,
    facts: &StructureFacts,
    given: Given<'_>,
    temperature_k: f64,
    asked: PropertySet,
) -> Estimates {
    let sums = match counts {
        Ok(counts) => methods.joback.sums(counts),
        Err(absent) => Err(absent.clone()),
    };
    let molecule = Molecule {
        methods,
        counts,
        sums: &sums,
        facts,
        given,
        temperature_k,
    };
    let ask = |property: Property, estimate: &dyn Fn() -> Outcome| match asked.contains(property) {
        true => estimate(),
        false => Err(Absent::NoMethod),
    };
    let additive =
        |property: Property, state: State| ask(property, &|| molecule.additive(property, state));
    let mut all: Estimates = [const { Err(Absent::NoMethod) }; Property::COUNT];
    let mut put = |property: Property, outcome: Outcome| all[property as usize] = outcome;

    let boiling_point = additive(Property::BoilingPoint, State::at(temperature_k));
    let critical_temperature = ask(Property::CriticalTemperature, &|| {
        molecule.critical_temperature(&boiling_point)
    });
    let state = State {
        temperature_k,
        boiling_point_k: boiling_point.as_ref().ok().map(|tb| tb.value),
        critical_temperature_k: critical_temperature.as_ref().ok().map(|tc| tc.value),
    };
    let critical_pressure = additive(Property::CriticalPressure, state);
    let critical_volume = additive(Property::CriticalVolume, state);
    let enthalpy_of_vaporization = additive(Property::EnthalpyOfVaporization, state);
    for property in [
        Property::MeltingPoint,
        Property::EnthalpyOfFusion,
        Property::IdealGasEnthalpyOfFormation,
        Property::IdealGasGibbsEnergyOfFormation,
        Property::IdealGasHeatCapacity,
    ] {
        put(property, additive(property, state));
    }
    put(
        Property::LiquidViscosity,
        ask(Property::LiquidViscosity, &|| {
            molecule.liquid_viscosity(state)
        }),
    );

    let curve = match asked.contains(Property::CriticalPressure) {
        true => molecule.curve(
            &boiling_point,
            &critical_temperature,
            &critical_pressure,
            &enthalpy_of_vaporization,
        ),
        false => Err(Absent::NoMethod),
    };
    // densities start from the factor that goes with the curve
    let acentric_factor = match asked.contains(Property::LiquidDensity) {
        true => molecule.acentric_factor(&curve),
        false => ask(Property::AcentricFactor, &|| {
            molecule.acentric_factor(&curve)
        }),
    };
    put(
        Property::VaporPressure,
        ask(Property::VaporPressure, &|| {
            molecule.vapor_pressure(&curve, &boiling_point, &enthalpy_of_vaporization)
        }),
    );
    put(
        Property::LiquidDensity,
        ask(Property::LiquidDensity, &|| {
            molecule.liquid_density(
                &curve,
                &critical_temperature,
                &critical_volume,
                &acentric_factor,
            )
        }),
    );
    put(
        Property::SurfaceTension,
        ask(Property::SurfaceTension, &|| {
            molecule.surface_tension(&curve)
        }),
    );
    put(
        Property::FlashPoint,
        ask(Property::FlashPoint, &|| {
            molecule.flash_point(
                &boiling_point,
                &critical_temperature,
                &enthalpy_of_vaporization,
            )
        }),
    );
    put(
        Property::EnthalpyOfVaporizationAt298,
        ask(Property::EnthalpyOfVaporizationAt298, &|| {
            molecule.enthalpy_of_vaporization_at_298(
                &boiling_point,
                &critical_temperature,
                &enthalpy_of_vaporization,
            )
        }),
    );
    put(Property::EnthalpyOfVaporization, enthalpy_of_vaporization);
    put(
        Property::MolarMass,
        Ok(Estimate::new(facts.molar_mass_kg_per_mol, ATOMIC_WEIGHTS)),
    );
    put(Property::BoilingPoint, boiling_point);
    put(Property::CriticalTemperature, critical_temperature);
    put(Property::CriticalPressure, critical_pressure);
    put(Property::CriticalVolume, critical_volume);
    put(Property::AcentricFactor, acentric_factor);
    for property in [
        Property::HansenDispersion,
        Property::HansenPolar,
        Property::HansenHydrogenBonding,
        Property::LogPOctanolWater,
    ] {
        if let Some(known) = given.at(property, temperature_k) {
            put(property, Ok(known.clone()));
        }
    }

    mark_solid(&mut all, temperature_k);
    mark_disorder(&mut all, Property::MeltingPoint, Property::BoilingPoint);
    mark_disorder(
        &mut all,
        Property::BoilingPoint,
        Property::CriticalTemperature,
    );
    all
}

struct Molecule<'a> {
    methods: &'a PureMethods,
    counts: Result<&'a GroupCounts, &'a Absent>,
    sums: &'a Result<LinearSums, Absent>,
    facts: &'a StructureFacts,
    given: Given<'a>,
    temperature_k: f64,
}

/// A vapor pressure curve and whether it rests on an estimate.
type Curve = Result<(VaporPressureCurve, Flags), Absent>;

impl Molecule<'_> {
    fn additive(&self, property: Property, state: State) -> Outcome {
        if let Some(known) = self.given.at(property, self.temperature_k) {
            return Ok(known.clone());
        }
        let sums = self.sums.as_ref().map_err(Absent::clone)?;
        joback::close(property, &self.methods.joback, sums, self.facts, state)
    }

    /// A value given at another temperature, with that temperature.
    fn anchor(&self, property: Property) -> Option<(&Estimate, f64)> {
        let known = self.given.get(property)?;
        Some((known, known.temperature_k?))
    }

    fn liquid_viscosity(&self, state: State) -> Outcome {
        let here = self.additive(Property::LiquidViscosity, state)?;
        match self.anchor(Property::LiquidViscosity) {
            Some((known, known_k)) if (known_k - self.temperature_k).abs() > SAME_TEMPERATURE_K => {
                let sums = self.sums.as_ref().map_err(Absent::clone)?;
                let state = State {
                    temperature_k: known_k,
                    ..state
                };
                let there = joback::close(
                    Property::LiquidViscosity,
                    &self.methods.joback,
                    sums,
                    self.facts,
                    state,
                )?;
                let ratio = here.value / there.value;
                Ok(carried(known, ratio, self.temperature_k, joback::ID))
            }
            _ => Ok(here),
        }
    }

    fn critical_temperature(&self, boiling_point: &Outcome) -> Outcome {
        if let Some(known) = self.given.get(Property::CriticalTemperature) {
            return Ok(known.clone());
        }
        let tb = value(boiling_point)?;
        let state = State {
            boiling_point_k: Some(tb.value),
            ..State::at(self.temperature_k)
        };
        Ok(self
            .additive(Property::CriticalTemperature, state)?
            .flagged(rests_on(tb)))
    }

    fn curve(&self, tb: &Outcome, tc: &Outcome, pc: &Outcome, h_vap: &Outcome) -> Curve {
        let curve =
            vapor_pressure_curve(self.methods.vapor_pressure, self.facts, [tb, tc, pc], h_vap)?;
        let flags = [tb, tc, pc, h_vap].into_iter().flatten().map(rests_on);
        Ok((curve, flags.fold(Flags::NONE, Flags::union)))
    }

    fn acentric_factor(&self, curve: &Curve) -> Outcome {
        if let Some(known) = self.given.get(Property::AcentricFactor) {
            return Ok(known.clone());
        }
        let (curve, flags) = curve.as_ref().map_err(Absent::clone)?;
        Ok(
            Estimate::new(curve.acentric_factor(), self.methods.vapor_pressure.id())
                .flagged(*flags),
        )
    }

    /// The interval joins what the boiling point leaves open with what the shape
    /// of the curve does.
    fn vapor_pressure(&self, curve: &Curve, boiling_point: &Outcome, h_vap: &Outcome) -> Outcome {
        if let Some(known) = self.given.at(Property::VaporPressure, self.temperature_k) {
            return Ok(known.clone());
        }
        let &(ref curve, mut flags) = curve.as_ref().map_err(Absent::clone)?;
        let pressure_pa = curve.pressure_pa(self.temperature_k)?;
        if curve.constants().reduced(self.temperature_k) < VAPOR_PRESSURE_TR_LOW {
            flags = flags.with(Flag::OutsideTemperatureRange);
        }
        let estimate = Estimate::new(pressure_pa, self.methods.vapor_pressure.id())
            .at(self.temperature_k)
            .flagged(flags);
        Ok(Estimate {
            interval: value(boiling_point)
                .ok()
                .and_then(|tb| self.vapor_pressure_interval(curve, tb, h_vap, pressure_pa)),
            ..estimate
        })
    }

    fn vapor_pressure_interval(
        &self,
        curve: &VaporPressureCurve,
        boiling_point: &Estimate,
        h_vap: &Outcome,
        pressure_pa: f64,
    ) -> Option<(f64, f64)> {
        let constants = curve.constants();
        let tb = boiling_point.value;
        let (low_k, high_k) = match boiling_point.status {
            Status::Measured => (tb, tb),
            Status::Estimated => boiling_point.interval?,
        };
        // ln P with the boiling point elsewhere, the other constants moving with it
        let ln_p = |moved_k: f64| {
            let tc = constants.critical_temperature_k() * moved_k / tb;
            let moved = Constants::new(moved_k, tc, constants.critical_pressure_pa(), "").ok()?;
            let moved =
                VaporPressureCurve::through_boiling_point(self.methods.vapor_pressure, moved);
            let slope = curve.slope_at_boiling_point();
            let moved = moved.and_then(|moved| moved.with_slope(slope)).ok()?;
            moved.pressure_pa(self.temperature_k).ok().map(f64::ln)
        };
        let ln_value = pressure_pa.ln();
        let far = (tb / self.temperature_k - 1.0).abs();
        let slope = match slope_source(h_vap) {
            Some(h_vap) => {
                let half = h_vap.interval.map_or(0.0, |(low, high)| 0.5 * (high - low));
                let part = VAPOR_PRESSURE_SHAPE.1.hypot(half / h_vap.value);
                part * curve.slope_at_boiling_point()
            }
            None => VAPOR_PRESSURE_SLOPE_UNKNOWN,
        };
        let shape = VAPOR_PRESSURE_SHAPE.0.hypot(slope * far);
        let joined = |moved: f64| (BOILING_POINT_PART * moved).hypot(shape);
        let below = joined(ln_value - ln_p(high_k)?);
        let above = joined(ln_p(low_k)? - ln_value);
        Some(((ln_value - below).exp(), (ln_value + above).exp()))
    }

    fn liquid_density(
        &self,
        curve: &Curve,
        tc: &Outcome,
        vc: &Outcome,
        omega: &Outcome,
    ) -> Outcome {
        if let Some(known) = self.given.at(Property::LiquidDensity, self.temperature_k) {
            return Ok(known.clone());
        }
        let omega = value(omega)?;
        let anchor = self
            .given
            .get(Property::LiquidDensity)
            .and_then(|known| Some((known, known.temperature_k?)));
        let (density_curve, flags) = if let Some((known, at_k)) = anchor {
            let tc = value(tc)?;
            let curve = LiquidDensityCurve::through_density(
                known.value,
                at_k,
                tc.value,
                omega.value,
                self.facts.molar_mass_kg_per_mol,
            )?;
            let flags = rests_on(known).union(rests_on(tc)).union(rests_on(omega));
            (curve, flags)
        } else {
            let (curve, flags) = curve.as_ref().map_err(Absent::clone)?;
            let method = self.methods.liquid_density;
            let (volume, volume_flags) = if method.needs_critical_volume() {
                let vc = value(vc)?;
                (vc.value, rests_on(vc))
            } else {
                (f64::INFINITY, Flags::NONE)
            };
            let input = LiquidDensityInput {
                constants: *curve.constants(),
                critical_volume_m3_per_mol: volume,
                acentric_factor: omega.value,
                molar_mass_kg_per_mol: self.facts.molar_mass_kg_per_mol,
            };
            (
                LiquidDensityCurve::new(method, &input)?,
                flags.union(volume_flags),
            )
        };
        let density = density_curve.density_kg_per_m3(self.temperature_k)?;
        let interval = anchor.and_then(|(known, at_k)| {
            let (low, high) = known.interval?;
            let carried = DENSITY_SHAPE_PER_K * (self.temperature_k - at_k).abs();
            let below = (1.0 - low / known.value).hypot(carried);
            let above = (high / known.value - 1.0).hypot(carried);
            Some((density * (1.0 - below).max(0.0), density * (1.0 + above)))
        });
        // a fitted density stays that of its fit, with what is to be said of it
        let fitted = anchor
            .map(|(known, _)| known)
            .filter(|known| known.status == Status::Estimated);
        let method = fitted.map_or(density_curve.method(), |known| known.method);
        Ok(Estimate {
            interval,
            note: fitted.and_then(|known| known.note.clone()),
            ..Estimate::new(density, method)
        }
        .at(self.temperature_k)
        .flagged(flags))
    }

    fn surface_tension(&self, curve: &Curve) -> Outcome {
        if let Some(known) = self.given.at(Property::SurfaceTension, self.temperature_k) {
            return Ok(known.clone());
        }
        let counts = self.counts.map_err(Absent::clone)?;
        let class = if counts.count(ACID_GROUP) > 0 {
            SurfaceTensionClass::Acid
        } else if counts.count(ALCOHOL_GROUP) > 0 {
            SurfaceTensionClass::Alcohol
        } else {
            SurfaceTensionClass::Other
        };
        let (curve, flags) = curve.as_ref().map_err(Absent::clone)?;
        let at = |t: f64| surface_tension_sastri_rao(curve.constants(), class, t);
        let tension = at(self.temperature_k)?;
        if let Some((known, known_k)) = self.anchor(Property::SurfaceTension) {
            let ratio = tension / at(known_k)?;
            return Ok(carried(known, ratio, self.temperature_k, SASTRI_RAO));
        }
        Ok(Estimate::new(tension, SASTRI_RAO)
            .at(self.temperature_k)
            .flagged(*flags))
    }

    /// Carried from the boiling point in the manner of Watson.
    fn enthalpy_of_vaporization_at_298(
        &self,
        tb: &Outcome,
        tc: &Outcome,
        h_vap: &Outcome,
    ) -> Outcome {
        if let Some(known) = self.given.get(Property::EnthalpyOfVaporizationAt298) {
            return Ok(known.clone());
        }
        let (tb, tc, h_vap) = (value(tb)?, value(tc)?, value(h_vap)?);
        let at_reference = enthalpy_of_vaporization_watson(
            h_vap.value,
            tb.value,
            tc.value,
            REFERENCE_TEMPERATURE_K,
        )
        .ok_or(Absent::OutsideDomain {
            method: WATSON,
            what: "the critical temperature is below 298.15 K",
        })?;
        let flags = rests_on(tb).union(rests_on(tc)).union(rests_on(h_vap));
        Ok(Estimate::new(at_reference, WATSON).flagged(flags))
    }

    fn flash_point(&self, tb: &Outcome, tc: &Outcome, h_vap: &Outcome) -> Outcome {
        if let Some(known) = self.given.get(Property::FlashPoint) {
            return Ok(known.clone());
        }
        let (tb, tc, h_vap) = (value(tb)?, value(tc)?, value(h_vap)?);
        let outside = |what| Absent::OutsideDomain {
            method: CATOIRE_NAUDET,
            what,
        };
        let mut flags = rests_on(tb).union(rests_on(tc)).union(rests_on(h_vap));
        if self.facts.burns_doubtfully() {
            return Err(outside(
                "where halogens are as many as hydrogens it cannot tell whether there is a flash point",
            ));
        }
        let at_reference = enthalpy_of_vaporization_watson(
            h_vap.value,
            tb.value,
            tc.value,
            REFERENCE_TEMPERATURE_K,
        )
        .ok_or_else(|| outside("the critical temperature is below 298.15 K"))?;
        let carbons = self.facts.composition.count(Element::C);
        let flash = flash_point_catoire_naudet(tb.value, at_reference, carbons)?;
        let (low, high) = CATOIRE_NAUDET_BOILING_POINTS_K;
        let (fewest, most) = CATOIRE_NAUDET_CARBONS;
        if !(low..=high).contains(&tb.value) || !(fewest..=most).contains(&carbons) {
            flags = flags.with(Flag::OutsideFamily);
        }
        Ok(Estimate::new(flash, CATOIRE_NAUDET).flagged(flags))
    }
}

/// The enthalpy of vaporization at the boiling point that goes with the slope of the
/// vapor-pressure curve there. Its interval joins those of the two with what ΔZ leaves open.
pub fn enthalpy_of_vaporization_of_slope(
    slope: Estimate,
    boiling_point: &Estimate,
    constants: &Constants,
    associates: bool,
) -> Estimate {
    let value = enthalpy_of_vaporization_clapeyron(constants, slope.value, associates);
    let ends = |estimate: &Estimate| {
        let (low, high) = estimate.interval?;
        Some((1.0 - low / estimate.value, high / estimate.value - 1.0))
    };
    let exact = matches!(boiling_point.status, Status::Measured).then_some((0.0, 0.0));
    let interval = ends(&slope).and_then(|slope| {
        let tb = ends(boiling_point).or(exact)?;
        let joined = |slope: f64, tb: f64| slope.hypot(tb).hypot(ENTHALPY_SHAPE);
        Some((
            value * (1.0 - joined(slope.0, tb.0)).max(0.0),
            value * (1.0 + joined(slope.1, tb.1)),
        ))
    });
    Estimate {
        value,
        interval,
        ..slope
    }
}

/// The liquid density that goes with a fitted molar volume: at the temperature of the fit,
/// from where [`estimate_all`] carries it. Where there are no critical constants to carry it
/// by, at 298.15 K by [`expansion_to_298`].
pub fn density_of_fitted_volume(
    volume: Estimate,
    molar_mass_kg_per_mol: f64,
    boiling_point_k: f64,
    has_critical_constants: bool,
) -> Estimate {
    let by_itself = match has_critical_constants {
        true => None,
        false => expansion_to_298(boiling_point_k),
    };
    let (expansion, temperature_k) = match by_itself {
        Some(expansion) => (expansion, REFERENCE_TEMPERATURE_K),
        None => (1.0, volume_temperature_k(boiling_point_k)),
    };
    let density = |volume: f64| molar_mass_kg_per_mol / (expansion * volume);
    Estimate {
        value: density(volume.value),
        interval: volume
            .interval
            .map(|(low, high)| (density(high), density(low))),
        ..volume
    }
    .at(temperature_k)
}

/// The vapor-pressure curve that goes with a boiling point, a critical temperature and a
/// critical pressure; its slope at the boiling point is that of the enthalpy of vaporization
/// there, where that was measured or fitted.
///
/// # Errors
///
/// A constant is absent, or they do not go together.
pub fn vapor_pressure_curve(
    method: VaporPressureMethod,
    facts: &StructureFacts,
    constants: [&Outcome; 3],
    h_vap: &Outcome,
) -> Result<VaporPressureCurve, Absent> {
    let [tb, tc, pc] = constants.map(value);
    let constants = Constants::new(tb?.value, tc?.value, pc?.value, method.id())?;
    let curve = VaporPressureCurve::through_boiling_point(method, constants)?;
    match slope_source(h_vap) {
        Some(h_vap) => {
            curve.with_slope(slope_of_enthalpy(&constants, h_vap.value, facts.associates))
        }
        None => Ok(curve),
    }
}

/// The enthalpy of vaporization, if it knows more of the slope of the vapor-pressure curve than
/// the critical constants do: a sum of group contributions does not.
fn slope_source(h_vap: &Outcome) -> Option<&Estimate> {
    h_vap
        .as_ref()
        .ok()
        .filter(|found| found.method != joback::ID)
}

/// A value carried to another temperature by the course of another method.
fn carried(known: &Estimate, ratio: f64, temperature_k: f64, course: &'static str) -> Estimate {
    Estimate {
        value: known.value * ratio,
        interval: known
            .interval
            .map(|(low, high)| (low * ratio, high * ratio)),
        status: Status::Estimated,
        method: match known.status {
            Status::Measured => course,
            Status::Estimated => known.method,
        },
        flags: known.flags.with(Flag::RestsOnEstimate),
        ..known.clone()
    }
    .at(temperature_k)
}

/// The value, or the reason why it is absent: the reader wants the first
/// cause, not the chain of properties that leads to it.
fn value(outcome: &Outcome) -> Result<&Estimate, Absent> {
    outcome.as_ref().map_err(Absent::clone)
}

fn rests_on(input: &Estimate) -> Flags {
    match input.status {
        Status::Estimated if input.flags.contains(Flag::OutsideFamily) => Flags::NONE
            .with(Flag::RestsOnEstimate)
            .with(Flag::OutsideFamily),
        Status::Estimated => Flags::NONE.with(Flag::RestsOnEstimate),
        Status::Measured => Flags::NONE,
    }
}

/// Flags what is said of a liquid below a measured melting point. Estimated
/// ones are too far off to tell.
fn mark_solid(all: &mut Estimates, temperature_k: f64) {
    let melts_above = all[Property::MeltingPoint as usize]
        .as_ref()
        .is_ok_and(|tm| tm.status == Status::Measured && tm.value > temperature_k);
    if !melts_above {
        return;
    }
    for property in [
        Property::LiquidDensity,
        Property::LiquidViscosity,
        Property::SurfaceTension,
    ] {
        if let Ok(estimate) = &mut all[property as usize] {
            estimate.flags = estimate.flags.with(Flag::BelowMeltingPoint);
        }
    }
}

/// Flags both temperatures where the lower one is not below the upper one.
fn mark_disorder(all: &mut Estimates, lower: Property, upper: Property) {
    let (Ok(low), Ok(high)) = (&all[lower as usize], &all[upper as usize]) else {
        return;
    };
    if low.value < high.value {
        return;
    }
    for property in [lower, upper] {
        if let Ok(estimate) = &mut all[property as usize] {
            estimate.flags = estimate.flags.with(Flag::Inconsistent);
        }
    }
}
