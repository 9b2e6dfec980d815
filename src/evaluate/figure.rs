//! The register of figures: what a target can be set on.

use super::component::VaporCurve;
use crate::brief;
use crate::mixture::{ActivityModel, RESERVED_MODELS};
use crate::quantity::{Dimension, Property, PropertySet};

/// Something a candidate is judged by.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum FigureKind {
    /// A pure-component property of the candidate.
    Property(Property),
    /// γ∞ of a key in the candidate as solvent; keys count from 0.
    GammaInfinityOfKey(usize),
    /// γ∞ of any component of the mixture in the candidate as solvent.
    GammaInfinityOfComponent,
    /// γ∞ of the candidate in the mixture at its stated composition.
    GammaInfinityOfCandidate,
    /// S12∞ = γ1∞/γ2∞ of the two keys in the candidate.
    Selectivity,
    /// α12∞ = S12∞ · P1/P2.
    RelativeVolatility,
    /// The larger of α12∞ and 1/α12∞: which key goes overhead is left open.
    SeparationFactor,
    /// 1/γ∞ of the selected key: moles of key per mole of candidate.
    CapacityByMole,
    /// (1/γ∞) · M(key)/M(candidate): mass of key per mass of candidate.
    CapacityByMass,
    /// The smallest α12 of the keys along the solvent-free composition,
    /// candidate added at the stated ratio.
    RelativeVolatilityWithSolvent,
    /// The same whichever key goes overhead: the smallest α12, or the smallest
    /// 1/α12 where that is larger; below 1 an azeotrope is left.
    SeparationFactorWithSolvent,
}

impl FigureKind {
    /// Properties of the candidate that it is made of.
    pub(super) fn properties(self) -> PropertySet {
        match self {
            Self::Property(property) => PropertySet::NONE.with(property),
            Self::RelativeVolatilityWithSolvent | Self::SeparationFactorWithSolvent => {
                VaporCurve::PROPERTIES
            }
            Self::GammaInfinityOfKey(_)
            | Self::GammaInfinityOfComponent
            | Self::GammaInfinityOfCandidate
            | Self::Selectivity
            | Self::RelativeVolatility
            | Self::SeparationFactor
            | Self::CapacityByMole
            | Self::CapacityByMass => PropertySet::NONE,
        }
    }
}

/// A figure with its name and what it says.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct FigureEntry {
    /// What it is.
    pub kind: FigureKind,
    /// Name, dimension and needs, as briefs know it.
    pub figure: brief::Figure,
    /// One line for people.
    pub title: &'static str,
}

impl FigureEntry {
    /// Whether it is of the second key unless another component is named.
    pub(super) fn is_of_selected_key(&self) -> bool {
        matches!(
            self.kind,
            FigureKind::CapacityByMole | FigureKind::CapacityByMass
        )
    }
}

const NOTHING: brief::Needs = brief::Needs {
    mixture: false,
    keys: false,
    fractions: false,
    state: false,
    pressure: false,
    solvent_to_feed: false,
    component: brief::Need::Refused,
    at_temperature: brief::Need::Refused,
};

const KEYS: brief::Needs = brief::Needs {
    mixture: true,
    keys: true,
    state: true,
    ..NOTHING
};

const WITH_SOLVENT: brief::Needs = brief::Needs {
    mixture: true,
    keys: true,
    pressure: true,
    solvent_to_feed: true,
    ..NOTHING
};

const fn entry(
    kind: FigureKind,
    id: &'static str,
    needs: brief::Needs,
    title: &'static str,
) -> FigureEntry {
    FigureEntry {
        kind,
        figure: brief::Figure {
            id,
            dimension: Dimension::Number,
            needs,
        },
        title,
    }
}

/// Figures of a candidate together with the mixture.
const OF_MIXTURE: [FigureEntry; 11] = [
    entry(
        FigureKind::GammaInfinityOfKey(0),
        "gamma_infinity_first_key",
        KEYS,
        "activity coefficient of the first key at infinite dilution in the candidate",
    ),
    entry(
        FigureKind::GammaInfinityOfKey(1),
        "gamma_infinity_second_key",
        KEYS,
        "activity coefficient of the second key at infinite dilution in the candidate",
    ),
    entry(
        FigureKind::GammaInfinityOfComponent,
        "gamma_infinity_of_component",
        brief::Needs {
            mixture: true,
            state: true,
            component: brief::Need::Required,
            ..NOTHING
        },
        "activity coefficient of a named component at infinite dilution in the candidate",
    ),
    entry(
        FigureKind::GammaInfinityOfCandidate,
        "gamma_infinity_of_candidate",
        brief::Needs {
            mixture: true,
            fractions: true,
            state: true,
            ..NOTHING
        },
        "activity coefficient of the candidate at infinite dilution in the mixture",
    ),
    entry(
        FigureKind::Selectivity,
        "selectivity_infinite_dilution",
        KEYS,
        "S12: activity coefficient of the first key over that of the second, in the candidate",
    ),
    entry(
        FigureKind::RelativeVolatility,
        "relative_volatility_infinite_dilution",
        KEYS,
        "alpha12 = S12 P1/P2; above 1 the first key goes overhead, below 1 the second",
    ),
    entry(
        FigureKind::SeparationFactor,
        "separation_factor_infinite_dilution",
        KEYS,
        "the larger of alpha12 and 1/alpha12, whichever key goes overhead",
    ),
    entry(
        FigureKind::CapacityByMole,
        "capacity_mole",
        brief::Needs {
            component: brief::Need::Optional,
            ..KEYS
        },
        "moles of the selected component (the second key unless named) per mole of candidate: 1/gamma",
    ),
    entry(
        FigureKind::CapacityByMass,
        "capacity_mass",
        brief::Needs {
            component: brief::Need::Optional,
            ..KEYS
        },
        "mass of the selected component (the second key unless named) per mass of candidate",
    ),
    entry(
        FigureKind::RelativeVolatilityWithSolvent,
        "relative_volatility_with_solvent",
        WITH_SOLVENT,
        "smallest alpha12 over the solvent-free range (1 to 99 mol%), at the bubble point with the solvent; the first key is to go overhead",
    ),
    entry(
        FigureKind::SeparationFactorWithSolvent,
        "separation_factor_with_solvent",
        WITH_SOLVENT,
        "the same whichever key goes overhead; below 1 an azeotrope is left",
    ),
];

const fn of_property(property: Property) -> FigureEntry {
    let at_temperature = if property.depends_on_temperature() {
        brief::Need::Optional
    } else {
        brief::Need::Refused
    };
    FigureEntry {
        kind: FigureKind::Property(property),
        figure: brief::Figure {
            id: property.id(),
            dimension: property.dimension(),
            needs: brief::Needs {
                at_temperature,
                ..NOTHING
            },
        },
        title: "pure-component property",
    }
}

/// Every figure, properties first.
pub const FIGURES: [FigureEntry; Property::COUNT + OF_MIXTURE.len()] = {
    let mut all = [OF_MIXTURE[0]; Property::COUNT + OF_MIXTURE.len()];
    let mut at = 0;
    while at < all.len() {
        all[at] = if at < Property::COUNT {
            of_property(Property::ALL[at])
        } else {
            OF_MIXTURE[at - Property::COUNT]
        };
        at += 1;
    }
    all
};

const NAMES: [brief::Figure; FIGURES.len()] = {
    let mut all = [FIGURES[0].figure; FIGURES.len()];
    let mut at = 0;
    while at < all.len() {
        all[at] = FIGURES[at].figure;
        at += 1;
    }
    all
};

const MODELS: [brief::Model; ActivityModel::ALL.len() + RESERVED_MODELS.len()] = {
    let mut all = [brief::Model {
        id: "",
        built_in: true,
    }; ActivityModel::ALL.len() + RESERVED_MODELS.len()];
    let mut at = 0;
    while at < all.len() {
        all[at] = if at < ActivityModel::ALL.len() {
            brief::Model {
                id: ActivityModel::ALL[at].id(),
                built_in: true,
            }
        } else {
            brief::Model {
                id: RESERVED_MODELS[at - ActivityModel::ALL.len()].0,
                built_in: false,
            }
        };
        at += 1;
    }
    all
};

/// What a brief may name.
pub const CATALOG: brief::FigureCatalog<'static> = brief::FigureCatalog {
    figures: &NAMES,
    models: &MODELS,
};

/// The figure of this name.
pub fn figure(id: &str) -> Option<&'static FigureEntry> {
    FIGURES.iter().find(|entry| entry.figure.id == id)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn names_are_unique() {
        for (at, entry) in FIGURES.iter().enumerate() {
            assert!(
                FIGURES[..at]
                    .iter()
                    .all(|other| other.figure.id != entry.figure.id)
            );
        }
    }
}
