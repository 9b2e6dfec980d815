//! The closing half: from sums to properties.

use super::{Contributions, ID, LinearSums, Term};
use crate::pure::{Growth, Input, StructureFacts};
use crate::quantity::{Absent, Estimate, Flag, Flags, Outcome, Property, REFERENCE_TEMPERATURE_K};

/// Sum of the T_c column at which its closing function turns: 0.965 / 2.
const TC_TURN: f64 = 0.4825;

/// Sum of the T_c column at which T_b/T_c has come back to the 0.584 of no
/// groups at all; beyond it every further group makes T_c absurd.
const TC_END: f64 = 0.965;

/// Temperatures between which the heat capacities were fitted.
const CP_RANGE_K: (f64, f64) = (273.0, 1000.0);

/// Reduced temperature up to which the viscosity was fitted.
const VISCOSITY_TR_MAX: f64 = 0.7;

/// What a closing function needs beside sums and structure.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct State {
    /// Temperature of the heat capacity and the viscosity, K.
    pub temperature_k: f64,
    /// Normal boiling point for T_c, K, measured or estimated; `None`: the method's own.
    pub boiling_point_k: Option<f64>,
    /// Critical temperature to judge the range of the viscosity with, K; `None`: not judged.
    pub critical_temperature_k: Option<f64>,
}

impl State {
    /// A temperature, the boiling point left to the method.
    pub const fn at(temperature_k: f64) -> Self {
        Self {
            temperature_k,
            boiling_point_k: None,
            critical_temperature_k: None,
        }
    }
}

/// Any of the eleven properties, closing functions of Joback and Reid.
///
/// With Σ the sum of the property's column and n the number of atoms:
/// T_b = 198.2 + Σ; T_m = 122.5 + Σ; T_c = T_b / (0.584 + 0.965 Σ − Σ²);
/// P_c = (0.113 + 0.0032 n − Σ)^−2 bar; V_c = 17.5 + Σ cm³/mol;
/// ΔH_f = 68.29 + Σ and ΔG_f = 53.88 + Σ kJ/mol (ideal gas, 298 K);
/// c_p = Σa − 37.93 + (Σb + 0.210) T + (Σc − 3.91e−4) T² + (Σd + 2.06e−7) T³ J/(mol K);
/// ΔH_vap = 15.30 + Σ and ΔH_fus = −0.88 + Σ kJ/mol;
/// η = M exp((Σa − 597.82)/T + Σb − 11.202) Pa s, M in g/mol.
///
/// # Units and shapes
///
/// SI in and out; the sums stay in the printed units.
///
/// # Source
///
/// K. G. Joback, R. C. Reid, Chem. Eng. Commun. 57 (1987) 233–243,
/// doi:10.1080/00986448708960487, tables of equations and contributions.
///
/// # Validity
///
/// Small organic molecules with few functional groups; c_p between 273 and
/// 1000 K and η up to about 0.7 T_c are flagged where they are left.
///
/// # Errors
///
/// [`Absent::NoContribution`] for a blank cell; [`Absent::OutsideDomain`] where
/// the closing function has no physical value; [`Absent::NoMethod`] for a
/// property that is none of the eleven.
pub fn close(
    property: Property,
    contributions: &Contributions,
    sums: &LinearSums,
    facts: &StructureFacts,
    state: State,
) -> Outcome {
    let sum = |term| {
        sums.get(term)
            .map_err(|number| contributions.no_contribution(number))
    };
    let plain = |value: f64| Estimate::new(value, ID);
    let outcome = match property {
        Property::BoilingPoint => plain(positive(boiling_point(sum(Term::Tb)?))?),
        Property::MeltingPoint => plain(positive(122.5 + sum(Term::Tm)?)?),
        Property::CriticalTemperature => {
            let tc = sum(Term::Tc)?;
            let (tb, flags) = match state.boiling_point_k {
                Some(tb) => (tb, Flags::NONE),
                None => (
                    positive(boiling_point(sum(Term::Tb)?))?,
                    Flags::NONE.with(Flag::RestsOnEstimate),
                ),
            };
            let denominator = 0.584 + 0.965 * tc - tc * tc;
            // Below −0.336 the denominator is not even positive; above TC_END the
            // parabola falls towards zero and T_c goes to infinity with it.
            if !(denominator > 0.0 && denominator < 1.0 && tc <= TC_END) {
                return Err(outside(
                    "the sum of the groups is outside what the critical temperature was fitted on",
                ));
            }
            // Beyond the turn a further group lowers T_c: the form was not made for such chains.
            let family = if tc > TC_TURN {
                Flags::NONE.with(Flag::OutsideFamily)
            } else {
                Flags::NONE
            };
            plain(positive(tb / denominator)?).flagged(flags.union(family))
        }
        Property::CriticalPressure => {
            let root = 0.113 + 0.0032 * f64::from(facts.atoms) - sum(Term::Pc)?;
            // The square would hide a negative root, and a vanishing one is no pressure.
            if root <= 0.0 {
                return Err(outside(
                    "the inverse root of the critical pressure is negative",
                ));
            }
            plain(positive(1e5 / (root * root))?)
        }
        Property::CriticalVolume => plain(positive(1e-6 * (17.5 + sum(Term::Vc)?))?),
        Property::IdealGasEnthalpyOfFormation => {
            plain(1e3 * (68.29 + sum(Term::HForm)?)).at(REFERENCE_TEMPERATURE_K)
        }
        Property::IdealGasGibbsEnergyOfFormation => {
            plain(1e3 * (53.88 + sum(Term::GForm)?)).at(REFERENCE_TEMPERATURE_K)
        }
        Property::IdealGasHeatCapacity => {
            let t = temperature(state.temperature_k)?;
            let a = sum(Term::CpA)? - 37.93;
            let b = sum(Term::CpB)? + 0.210;
            let c = sum(Term::CpC)? - 3.91e-4;
            let d = sum(Term::CpD)? + 2.06e-7;
            plain(positive(a + t * (b + t * (c + t * d)))?)
                .at(t)
                .flagged(flag_outside(t, CP_RANGE_K))
        }
        Property::EnthalpyOfVaporization => plain(positive(1e3 * (15.30 + sum(Term::HVap)?))?),
        Property::EnthalpyOfFusion => plain(positive(1e3 * (-0.88 + sum(Term::HFus)?))?),
        Property::LiquidViscosity => {
            let t = temperature(state.temperature_k)?;
            let exponent = (sum(Term::EtaA)? - 597.82) / t + sum(Term::EtaB)? - 11.202;
            let molar_mass_g_per_mol = 1e3 * facts.molar_mass_kg_per_mol;
            let high = state
                .critical_temperature_k
                .map_or(f64::INFINITY, |tc| VISCOSITY_TR_MAX * tc);
            plain(positive(molar_mass_g_per_mol * exponent.exp())?)
                .at(t)
                .flagged(flag_outside(t, (0.0, high)))
        }
        _ => return Err(Absent::NoMethod),
    };
    Ok(outcome)
}

/// In which direction each input moves the closing function of a property.
///
/// Only where the function has a value, at fixed positive temperature; for
/// T_c, Σ of its own column and the boiling point are independent inputs.
/// Empty for a property that is none of the eleven.
pub const fn growth(property: Property) -> &'static [(Input, Growth)] {
    use Growth::{Decreasing, FallsThenRises, Increasing};
    use Input::{Atoms, BoilingPoint, MolarMass, Sum};
    match property {
        Property::BoilingPoint => &[(Sum(Term::Tb), Increasing)],
        Property::MeltingPoint => &[(Sum(Term::Tm), Increasing)],
        Property::CriticalTemperature => &[
            (Sum(Term::Tc), FallsThenRises { turn: TC_TURN }),
            (BoilingPoint, Increasing),
        ],
        Property::CriticalPressure => &[(Sum(Term::Pc), Increasing), (Atoms, Decreasing)],
        Property::CriticalVolume => &[(Sum(Term::Vc), Increasing)],
        Property::IdealGasEnthalpyOfFormation => &[(Sum(Term::HForm), Increasing)],
        Property::IdealGasGibbsEnergyOfFormation => &[(Sum(Term::GForm), Increasing)],
        Property::IdealGasHeatCapacity => &[
            (Sum(Term::CpA), Increasing),
            (Sum(Term::CpB), Increasing),
            (Sum(Term::CpC), Increasing),
            (Sum(Term::CpD), Increasing),
        ],
        Property::EnthalpyOfVaporization => &[(Sum(Term::HVap), Increasing)],
        Property::EnthalpyOfFusion => &[(Sum(Term::HFus), Increasing)],
        Property::LiquidViscosity => &[
            (Sum(Term::EtaA), Increasing),
            (Sum(Term::EtaB), Increasing),
            (MolarMass, Increasing),
        ],
        _ => &[],
    }
}

const fn boiling_point(sum: f64) -> f64 {
    198.2 + sum
}

const fn outside(what: &'static str) -> Absent {
    Absent::OutsideDomain { method: ID, what }
}

fn positive(value: f64) -> Result<f64, Absent> {
    if value > 0.0 && value.is_finite() {
        Ok(value)
    } else {
        Err(outside("the closing function gives no positive number"))
    }
}

fn temperature(temperature_k: f64) -> Result<f64, Absent> {
    if temperature_k > 0.0 && temperature_k.is_finite() {
        Ok(temperature_k)
    } else {
        Err(outside("the temperature is not above 0 K"))
    }
}

fn flag_outside(temperature_k: f64, (low_k, high_k): (f64, f64)) -> Flags {
    if temperature_k < low_k || temperature_k > high_k {
        Flags::NONE.with(Flag::OutsideTemperatureRange)
    } else {
        Flags::NONE
    }
}
