//! Parameters of binary activity models, in one convention whatever the table's.

use std::sync::Arc;

use super::PLAUSIBLE_LN_GAMMA_INFINITY;

/// A model whose parameters belong to a pair of substances.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum PairModel {
    /// Margules with one parameter.
    MargulesOne,
    /// Margules with two parameters.
    MargulesTwo,
    /// van Laar.
    VanLaar,
    /// Wilson.
    Wilson,
    /// NRTL.
    Nrtl,
    /// UNIQUAC.
    Uniquac,
}

impl PairModel {
    /// Every model.
    pub const ALL: [Self; 6] = [
        Self::MargulesOne,
        Self::MargulesTwo,
        Self::VanLaar,
        Self::Wilson,
        Self::Nrtl,
        Self::Uniquac,
    ];

    /// The word of the `model` column.
    pub const fn id(self) -> &'static str {
        match self {
            Self::MargulesOne => "margules-1",
            Self::MargulesTwo => "margules-2",
            Self::VanLaar => "van-laar",
            Self::Wilson => "wilson",
            Self::Nrtl => "nrtl",
            Self::Uniquac => "uniquac",
        }
    }

    /// The model of this name.
    pub fn from_id(id: &str) -> Option<Self> {
        Self::ALL.into_iter().find(|model| model.id() == id)
    }
}

/// A number that depends on temperature as constant + slope / T.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct InverseLinear {
    /// The part that does not depend on temperature.
    pub constant: f64,
    /// The slope in K.
    pub slope_k: f64,
}

impl InverseLinear {
    /// The number at a temperature in K.
    pub fn at(self, temperature_k: f64) -> f64 {
        self.constant + self.slope_k / temperature_k
    }
}

/// Parameters for components 1 and 2: dimensionless, on natural logarithms.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum PairParameters {
    /// g^E/RT = A x1 x2
    MargulesOne {
        /// A.
        a: InverseLinear,
    },
    /// g^E/RT = x1 x2 (A21 x1 + A12 x2)
    MargulesTwo {
        /// A12, the ln γ∞ of component 1.
        a12: InverseLinear,
        /// A21, the ln γ∞ of component 2.
        a21: InverseLinear,
    },
    /// g^E/RT = A12 A21 x1 x2 / (A12 x1 + A21 x2)
    VanLaar {
        /// A12, the ln γ∞ of component 1.
        a12: InverseLinear,
        /// A21, the ln γ∞ of component 2.
        a21: InverseLinear,
    },
    /// g^E/RT = −x1 ln(x1 + Λ12 x2) − x2 ln(x2 + Λ21 x1)
    Wilson {
        /// ln Λ12, where Λ12 = (V2/V1) exp(−(λ12 − λ11)/RT).
        ln_lambda12: InverseLinear,
        /// ln Λ21.
        ln_lambda21: InverseLinear,
    },
    /// g^E/RT = x1 x2 (τ21 G21/(x1 + x2 G21) + τ12 G12/(x2 + x1 G12)), G = exp(−α τ)
    Nrtl {
        /// τ12 = (g12 − g22)/RT.
        tau12: InverseLinear,
        /// τ21 = (g21 − g11)/RT.
        tau21: InverseLinear,
        /// α, the same for both.
        alpha: f64,
    },
    /// Combinatorial part with r, q and z = 10; residual part
    /// −q1 x1 ln(θ1 + θ2 τ21) − q2 x2 ln(θ2 + θ1 τ12)
    Uniquac {
        /// ln τ12 = −(u12 − u22)/RT.
        ln_tau12: InverseLinear,
        /// ln τ21 = −(u21 − u11)/RT.
        ln_tau21: InverseLinear,
        /// Volume parameters r1, r2.
        r: [f64; 2],
        /// Surface parameters q1, q2.
        q: [f64; 2],
    },
}

impl PairParameters {
    /// The model they belong to.
    pub const fn model(&self) -> PairModel {
        match self {
            Self::MargulesOne { .. } => PairModel::MargulesOne,
            Self::MargulesTwo { .. } => PairModel::MargulesTwo,
            Self::VanLaar { .. } => PairModel::VanLaar,
            Self::Wilson { .. } => PairModel::Wilson,
            Self::Nrtl { .. } => PairModel::Nrtl,
            Self::Uniquac { .. } => PairModel::Uniquac,
        }
    }

    /// The same with the components in the other order.
    #[must_use]
    pub const fn reversed(self) -> Self {
        match self {
            Self::MargulesOne { a } => Self::MargulesOne { a },
            Self::MargulesTwo { a12, a21 } => Self::MargulesTwo { a12: a21, a21: a12 },
            Self::VanLaar { a12, a21 } => Self::VanLaar { a12: a21, a21: a12 },
            Self::Wilson {
                ln_lambda12,
                ln_lambda21,
            } => Self::Wilson {
                ln_lambda12: ln_lambda21,
                ln_lambda21: ln_lambda12,
            },
            Self::Nrtl {
                tau12,
                tau21,
                alpha,
            } => Self::Nrtl {
                tau12: tau21,
                tau21: tau12,
                alpha,
            },
            Self::Uniquac {
                ln_tau12,
                ln_tau21,
                r: [r1, r2],
                q: [q1, q2],
            } => Self::Uniquac {
                ln_tau12: ln_tau21,
                ln_tau21: ln_tau12,
                r: [r2, r1],
                q: [q2, q1],
            },
        }
    }

    /// ln γ∞ of component 1 in 2 and of component 2 in 1 at a temperature in K:
    /// the limits of the model, by which tables are checked.
    pub fn ln_gamma_infinity(&self, temperature_k: f64) -> [f64; 2] {
        [
            self.ln_gamma_infinity_of_first(temperature_k),
            self.reversed().ln_gamma_infinity_of_first(temperature_k),
        ]
    }

    fn ln_gamma_infinity_of_first(&self, temperature_k: f64) -> f64 {
        match self {
            Self::MargulesOne { a } => a.at(temperature_k),
            Self::MargulesTwo { a12, .. } | Self::VanLaar { a12, .. } => a12.at(temperature_k),
            Self::Wilson {
                ln_lambda12,
                ln_lambda21,
            } => 1.0 - ln_lambda12.at(temperature_k) - ln_lambda21.at(temperature_k).exp(),
            Self::Nrtl {
                tau12,
                tau21,
                alpha,
            } => {
                let tau12 = tau12.at(temperature_k);
                tau21.at(temperature_k) + tau12 * (-alpha * tau12).exp()
            }
            Self::Uniquac {
                ln_tau12,
                ln_tau21,
                r: [r1, r2],
                q: [q1, q2],
            } => {
                let l = |r: f64, q: f64| 5.0 * (r - q) - (r - 1.0);
                let ratio = r1 / r2;
                let combinatorial = ratio.ln() + 5.0 * q1 * (q1 / q2 / ratio).ln() + l(*r1, *q1)
                    - ratio * l(*r2, *q2);
                let residual = 1.0 - ln_tau21.at(temperature_k) - ln_tau12.at(temperature_k).exp();
                combinatorial + q1 * residual
            }
        }
    }

    /// The first ln γ∞ that no pair of molecules has, if there is one.
    pub(super) fn implausible(&self, temperature_k: f64) -> Option<f64> {
        self.ln_gamma_infinity(temperature_k)
            .into_iter()
            .find(|ln_gamma| !PLAUSIBLE_LN_GAMMA_INFINITY.contains(ln_gamma))
    }
}

/// A parameter set with where it holds and where it comes from.
#[derive(Clone, Debug, PartialEq)]
pub struct ActivityParameters {
    /// The parameters.
    pub parameters: PairParameters,
    /// Lowest and highest temperature in K of the data they were fitted to.
    pub range_k: (f64, f64),
    /// Published source.
    pub source: Arc<str>,
    /// Line of the table.
    pub(super) line: u64,
}

impl ActivityParameters {
    /// The same with the components in the other order.
    #[must_use]
    pub fn reversed(&self) -> Self {
        Self {
            parameters: self.parameters.reversed(),
            ..self.clone()
        }
    }

    /// The temperatures in K that both sets hold at; `None` if there are none.
    /// Ranges that merely meet at an end share nothing.
    pub(super) fn overlap_k(&self, other: &Self) -> Option<(f64, f64)> {
        let low = self.range_k.0.max(other.range_k.0);
        let high = self.range_k.1.min(other.range_k.1);
        let point = |range: (f64, f64)| range.0 == range.1;
        let shared = low < high || low == high && (point(self.range_k) || point(other.range_k));
        shared.then_some((low, high))
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Ideal in the residual part, UNIQUAC is left with the sizes: equal ones leave nothing.
    #[test]
    fn limits_vanish_for_an_ideal_pair() {
        let one = InverseLinear::default();
        for parameters in [
            PairParameters::MargulesOne { a: one },
            PairParameters::Wilson {
                ln_lambda12: one,
                ln_lambda21: one,
            },
            PairParameters::Nrtl {
                tau12: one,
                tau21: one,
                alpha: 0.3,
            },
            PairParameters::Uniquac {
                ln_tau12: one,
                ln_tau21: one,
                r: [2.1, 2.1],
                q: [1.9, 1.9],
            },
        ] {
            for ln_gamma in parameters.ln_gamma_infinity(300.0) {
                assert!(ln_gamma.abs() < 1e-12, "{parameters:?}: {ln_gamma}");
            }
        }
    }

    #[test]
    fn names_lead_to_their_model() {
        for model in PairModel::ALL {
            assert_eq!(PairModel::from_id(model.id()), Some(model));
        }
        assert_eq!(PairModel::from_id("margules"), None);
    }
}
