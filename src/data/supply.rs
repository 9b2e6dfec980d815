//! What a solvent costs and whether it can be had.

use std::fmt;
use std::sync::Arc;

/// A price as stated, not converted: currencies and trade units stay what they are.
#[derive(Clone, Debug, PartialEq)]
pub struct Price {
    /// The number, not negative.
    pub amount: f64,
    /// Currency and unit: `EUR/kg`.
    pub unit: Arc<str>,
}

impl Price {
    /// The price; `None` if the number is negative or not finite, or the unit
    /// has not the form `CURRENCY/unit`.
    pub fn new(amount: f64, unit: &str) -> Option<Self> {
        let (currency, per) = unit.split_once('/')?;
        let named = |text: &str| !text.trim().is_empty() && !text.contains('/');
        let sound = amount.is_finite() && amount >= 0.0;
        (sound && named(currency) && named(per)).then(|| Self {
            amount,
            unit: Arc::from(unit),
        })
    }
}

impl fmt::Display for Price {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{} {}", self.amount, self.unit)
    }
}

/// One statement about price and availability of a substance.
#[derive(Clone, Debug, PartialEq)]
pub struct Supply {
    /// Price, where one is stated.
    pub price: Option<Price>,
    /// Availability in the user's words; blank where nothing is said.
    pub availability: Arc<str>,
    /// Remarks; blank where there are none.
    pub notes: Arc<str>,
    /// Who says so.
    pub source: Arc<str>,
}

/// The sphere of good solvents that was measured for a solute.
///
/// C. M. Hansen, Hansen Solubility Parameters, 2nd ed., CRC Press 2007: solvents
/// within the radius of the centre, the dispersion axis counted twice, dissolve it.
#[derive(Clone, Debug, PartialEq)]
pub struct HansenSphere {
    /// What is dissolved; often no substance of the tables, but a polymer.
    pub solute: Arc<str>,
    /// Dispersion, polar and hydrogen-bonding parameter of the centre, in Pa^0.5.
    pub centre_sqrt_pa: [f64; 3],
    /// Radius of interaction R0, in Pa^0.5.
    pub radius_sqrt_pa: f64,
    /// The published source.
    pub source: Arc<str>,
}
