//! What figures rest on: those of one source err together.

use super::figure::FigureKind;
use super::plan::Plan;
use crate::quantity::Property;

/// The quantity a figure rests on, as far as it is a figure's own: a
/// measurement of it settles every figure made of it.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Source {
    /// A property of the candidate, at whatever temperature.
    Property(Property),
    /// γ∞ of a component of the mixture in the candidate.
    GammaInfinity(usize),
    /// The ratio of the γ∞ of the keys in the candidate.
    GammaRatio,
    /// A figure that shares its error with no other.
    Alone(FigureKind),
}

impl Source {
    /// The source of a figure, and whether the figure rises with it. `component`
    /// is the one the figure names; else the second of the keys is meant.
    pub(super) fn of(
        kind: FigureKind,
        component: Option<usize>,
        keys: Option<[usize; 2]>,
    ) -> (Self, bool) {
        let selected = component.or(keys.map(|keys| keys[1]));
        match (kind, selected) {
            (FigureKind::Property(property), _) => (Self::Property(property), true),
            (FigureKind::GammaInfinityOfKey(key), _) => {
                let component = keys.map_or(key, |keys| keys[key]);
                (Self::GammaInfinity(component), true)
            }
            (FigureKind::GammaInfinityOfComponent, Some(component)) => {
                (Self::GammaInfinity(component), true)
            }
            (FigureKind::CapacityByMole | FigureKind::CapacityByMass, Some(component)) => {
                (Self::GammaInfinity(component), false)
            }
            (FigureKind::Selectivity | FigureKind::RelativeVolatility, _) => {
                (Self::GammaRatio, true)
            }
            _ => (Self::Alone(kind), true),
        }
    }

    /// What to measure on a candidate of this name, as a person would say it:
    /// `the boiling point of anisole`.
    pub fn in_words(&self, plan: &Plan, candidate: &str) -> String {
        let name = |component: usize| plan.components[component].name.as_ref();
        let keys = || match plan.keys {
            Some([first, second]) => format!("{} and {}", name(first), name(second)),
            None => "the keys".into(),
        };
        match *self {
            Self::Property(property) => {
                format!("the {} of {candidate}", property.id().replace('_', " "))
            }
            Self::GammaInfinity(component) => format!(
                "the activity coefficient of {} at infinite dilution in {candidate}",
                name(component)
            ),
            Self::GammaRatio => format!(
                "the activity coefficients of {} at infinite dilution in {candidate}",
                keys()
            ),
            Self::Alone(FigureKind::GammaInfinityOfCandidate) => {
                format!(
                    "the activity coefficient of {candidate} at infinite dilution in the mixture"
                )
            }
            Self::Alone(
                FigureKind::RelativeVolatilityWithSolvent | FigureKind::SeparationFactorWithSolvent,
            ) => format!(
                "the vapor-liquid equilibrium of {} beside {candidate}",
                keys()
            ),
            Self::Alone(_) => format!(
                "the relative volatility of {} at infinite dilution in {candidate}",
                keys()
            ),
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn figures_of_one_coefficient_share_their_source() {
        let keys = Some([2, 5]);
        let of = |kind, component| Source::of(kind, component, keys);
        let second = (Source::GammaInfinity(5), true);
        assert_eq!(of(FigureKind::GammaInfinityOfKey(1), None), second);
        assert_eq!(of(FigureKind::GammaInfinityOfComponent, Some(5)), second);
        let falling = (Source::GammaInfinity(5), false);
        assert_eq!(of(FigureKind::CapacityByMole, None), falling);
        assert_eq!(of(FigureKind::CapacityByMass, None), falling);
        assert_eq!(
            of(FigureKind::CapacityByMass, Some(2)),
            (Source::GammaInfinity(2), false)
        );
        assert_eq!(
            of(FigureKind::Selectivity, None),
            of(FigureKind::RelativeVolatility, None)
        );
        // Not monotonous in the ratio.
        assert_ne!(of(FigureKind::SeparationFactor, None).0, Source::GammaRatio);
    }
}
