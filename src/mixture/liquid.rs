//! What an activity model offers to the phase-equilibrium functions.

use super::{MixtureError, UnifacMixture};

/// A liquid mixture at a temperature: ln γ and its derivatives.
///
/// `x` are mole fractions, used as given; outputs keep the component order.
pub trait Liquid {
    /// Number of components.
    fn components(&self) -> usize;

    /// The temperature in K.
    fn temperature_k(&self) -> f64;

    /// Moves to another temperature.
    ///
    /// # Errors
    ///
    /// [`MixtureError::Temperature`] if the model has no finite value there.
    fn set_temperature(&mut self, temperature_k: f64) -> Result<(), MixtureError>;

    /// ln γ into `out`, length n.
    ///
    /// # Errors
    ///
    /// Wrong length, negative or non-finite fraction, all fractions zero.
    fn ln_gamma(&mut self, x: &[f64], out: &mut [f64]) -> Result<(), MixtureError>;

    /// d ln γ/dT in 1/K into `out`, length n.
    ///
    /// # Errors
    ///
    /// As [`Liquid::ln_gamma`].
    fn ln_gamma_slope_per_k(&mut self, x: &[f64], out: &mut [f64]) -> Result<(), MixtureError>;

    /// ∂ ln γ_i/∂n_j at one mole of mixture into `out`, n × n by rows i.
    ///
    /// # Errors
    ///
    /// As [`Liquid::ln_gamma`]; the fractions have to add up to 1.
    fn composition_derivatives(&mut self, x: &[f64], out: &mut [f64]) -> Result<(), MixtureError>;
}

/// The components of a mixture bound to a model, whichever it is.
#[derive(Clone, Debug)]
pub enum LiquidMixture {
    /// An ideal mixture of this many components.
    Ideal(usize),
    /// A mixture of a UNIFAC model.
    Unifac(Box<UnifacMixture>),
}

impl LiquidMixture {
    /// The mixture at a temperature.
    ///
    /// # Errors
    ///
    /// No components; [`MixtureError::Temperature`].
    pub fn state(&self, temperature_k: f64) -> Result<Box<dyn Liquid + '_>, MixtureError> {
        Ok(match self {
            Self::Ideal(components) => Box::new(IdealState::new(*components, temperature_k)?),
            Self::Unifac(mixture) => Box::new(mixture.state(temperature_k)?),
        })
    }
}

/// The ideal mixture: every ln γ is 0.
#[derive(Clone, Copy, Debug)]
pub struct IdealState {
    components: usize,
    temperature_k: f64,
}

impl IdealState {
    /// An ideal mixture of this many components.
    ///
    /// # Errors
    ///
    /// No components, or a temperature that is not a positive number.
    pub fn new(components: usize, temperature_k: f64) -> Result<Self, MixtureError> {
        if components == 0 {
            return Err(MixtureError::NoComponents);
        }
        let mut state = Self {
            components,
            temperature_k,
        };
        state.set_temperature(temperature_k)?;
        Ok(state)
    }

    fn zeros(&self, x: &[f64], out: &mut [f64], length: usize) -> Result<(), MixtureError> {
        check_fractions(x, self.components)?;
        if out.len() != length {
            return Err(MixtureError::Length {
                what: "results",
                expected: length,
                found: out.len(),
            });
        }
        out.fill(0.0);
        Ok(())
    }
}

impl Liquid for IdealState {
    fn components(&self) -> usize {
        self.components
    }

    fn temperature_k(&self) -> f64 {
        self.temperature_k
    }

    fn set_temperature(&mut self, temperature_k: f64) -> Result<(), MixtureError> {
        if temperature_k > 0.0 && temperature_k.is_finite() {
            self.temperature_k = temperature_k;
            Ok(())
        } else {
            Err(MixtureError::Temperature {
                model: "ideal",
                temperature_k,
            })
        }
    }

    fn ln_gamma(&mut self, x: &[f64], out: &mut [f64]) -> Result<(), MixtureError> {
        self.zeros(x, out, self.components)
    }

    fn ln_gamma_slope_per_k(&mut self, x: &[f64], out: &mut [f64]) -> Result<(), MixtureError> {
        self.zeros(x, out, self.components)
    }

    fn composition_derivatives(&mut self, x: &[f64], out: &mut [f64]) -> Result<(), MixtureError> {
        self.zeros(x, out, self.components * self.components)
    }
}

/// Refuses a composition that is none; the sum is not judged here.
pub(super) fn check_fractions(x: &[f64], components: usize) -> Result<(), MixtureError> {
    if x.len() != components {
        return Err(MixtureError::Length {
            what: "mole fractions",
            expected: components,
            found: x.len(),
        });
    }
    let mut sum = 0.0;
    for (i, &x) in x.iter().enumerate() {
        if !(x >= 0.0 && x.is_finite()) {
            return Err(MixtureError::Value {
                what: "the mole fraction",
                component: i + 1,
                value: x,
                expected: "a number that is not negative",
            });
        }
        sum += x;
    }
    if sum > 0.0 {
        Ok(())
    } else {
        Err(MixtureError::Empty)
    }
}
