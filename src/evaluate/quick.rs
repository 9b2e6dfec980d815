//! What of a plan can be told of an assembly from its counts alone, quickly.
//!
//! The assembly search asks millions of times; the figures here are those that
//! need neither a structure nor a phase equilibrium. All others are left to the
//! full evaluation.

use super::Plan;
use super::candidate::Dilute;
use super::dilution::MeasuredDilutions;
use super::figure::FigureKind;
use super::fitted::fitted_quantity;
use super::uncertainty::Spread;
use crate::brief::Want;
use crate::groups::SetId;
use crate::mixture::{Component, KeysAtTemperature, Unifac};
use crate::pure::fitted::Quantity;
use crate::quantity::{Estimate, Property, REFERENCE_TEMPERATURE_K};

/// A figure that can be had from counts.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum QuickFigure {
    /// A fitted quantity by the count level.
    Fitted(Quantity),
    /// Liquid density at 298.15 K: molar mass over fitted molar volume.
    Density,
    /// Molar mass.
    MolarMass,
    /// γ∞ of a key, 0 or 1, in the candidate, raised to `power`, times `factor`; over the
    /// molar mass of the candidate where `by_mass`.
    OfKey {
        /// Which key.
        key: usize,
        /// 1 or −1.
        power: f64,
        /// What it is multiplied by.
        factor: f64,
        /// Whether it is divided by the molar mass of the candidate.
        by_mass: bool,
    },
    /// γ∞ of the first key over that of the second, times `factor`; the larger of
    /// that and its inverse where `undirected`.
    OfKeys {
        /// What it is multiplied by.
        factor: f64,
        /// Whether the direction does not matter.
        undirected: bool,
    },
    /// Needs more than counts.
    Dear,
}

/// A target with its quick figure.
#[derive(Clone, Debug)]
pub struct QuickTarget {
    /// Its figure.
    pub figure: QuickFigure,
    /// What is wanted.
    pub want: Want,
    /// Whether it has to be met.
    pub must: bool,
    /// Its weight in the score; 0 where it does not count.
    pub weight: f64,
    /// Name of its column.
    pub name: String,
}

/// A plan as the assembly search sees it.
#[derive(Debug)]
pub struct Quick<'p> {
    plan: &'p Plan,
    /// Every target, in the order of the brief.
    pub targets: Vec<QuickTarget>,
}

impl<'p> Quick<'p> {
    /// The quick side of a plan.
    pub fn new(plan: &'p Plan) -> Self {
        let targets = plan.targets.iter().map(|planned| {
            let figure = &plan.figures[planned.figure];
            QuickTarget {
                figure: quick_figure(plan, figure.kind, figure.component, figure.temperature),
                want: planned.target.want,
                must: planned.target.must,
                weight: if planned.target.counts {
                    planned.target.weight
                } else {
                    0.0
                },
                name: figure.name.clone(),
            }
        });
        Self {
            plan,
            targets: targets.collect(),
        }
    }

    /// The plan.
    pub fn plan(&self) -> &'p Plan {
        self.plan
    }

    /// The model of the targets with the keys bound to their temperature, where
    /// some target asks for it.
    pub fn keys(&self) -> Option<(&'p Unifac, SetId, &'p KeysAtTemperature)> {
        let asks = |target: &QuickTarget| {
            matches!(
                target.figure,
                QuickFigure::OfKey { .. } | QuickFigure::OfKeys { .. }
            )
        };
        if !self.targets.iter().any(asks) {
            return None;
        }
        let model = self.plan.models.first()?;
        let (unifac, set) = model.unifac.as_ref()?;
        Some((unifac, *set, model.keys.as_ref()?))
    }

    /// Whether a must may still be met by a figure of activity that misses it
    /// bare, the errors of the model considered.
    pub fn may_meet(
        &self,
        target: usize,
        candidate: &Component,
        ln_gamma: [f64; 2],
        value: f64,
    ) -> bool {
        let confidence = self.plan.brief.ranking.confidence;
        let (Some(model), Some(keys)) = (self.plan.models.first(), self.plan.keys) else {
            return false;
        };
        if confidence <= 0.0 {
            return false;
        }
        let dilute = Dilute {
            component: Ok(candidate.clone()),
            keys: ln_gamma.map(Ok),
            errors: [0, 1].map(|key| model.error_of(keys[key], candidate, ln_gamma[key])),
        };
        let figure = &self.plan.figures[self.plan.targets[target].figure];
        let estimate = Estimate::new(value, model.model.id());
        let nothing = MeasuredDilutions::default();
        let estimate = self.plan.with_interval(estimate, figure, &nothing, &dilute);
        Spread::of(&estimate).probability(&self.targets[target].want) >= confidence
    }
}

fn quick_figure(
    plan: &Plan,
    kind: FigureKind,
    component: Option<usize>,
    temperature: usize,
) -> QuickFigure {
    let at_reference = plan.temperatures[temperature] == REFERENCE_TEMPERATURE_K;
    let key_of = |component: Option<usize>| {
        let keys = plan.keys?;
        let selected = component.unwrap_or(keys[1]);
        keys.iter().position(|&key| key == selected)
    };
    let ready = plan
        .models
        .first()
        .is_some_and(|model| model.keys.is_some());
    let ratio = plan.key_pressure_ratio.as_ref().ok().copied();
    let of_key = |key: usize, power: f64, factor: f64, by_mass: bool| QuickFigure::OfKey {
        key,
        power,
        factor,
        by_mass,
    };
    match kind {
        FigureKind::Property(Property::MolarMass) => QuickFigure::MolarMass,
        FigureKind::Property(Property::LiquidDensity) if at_reference => QuickFigure::Density,
        // the slope that it follows from is fitted, not the enthalpy itself
        FigureKind::Property(Property::EnthalpyOfVaporization) => QuickFigure::Dear,
        FigureKind::Property(property) if at_reference || !property.depends_on_temperature() => {
            fitted_quantity(property).map_or(QuickFigure::Dear, QuickFigure::Fitted)
        }
        _ if !ready => QuickFigure::Dear,
        FigureKind::GammaInfinityOfKey(key) => of_key(key, 1.0, 1.0, false),
        FigureKind::GammaInfinityOfComponent => match key_of(component) {
            Some(key) => of_key(key, 1.0, 1.0, false),
            None => QuickFigure::Dear,
        },
        FigureKind::CapacityByMole => match key_of(component) {
            Some(key) => of_key(key, -1.0, 1.0, false),
            None => QuickFigure::Dear,
        },
        FigureKind::CapacityByMass => match (key_of(component), plan.keys) {
            (Some(key), Some(keys)) => {
                let facts = &plan.components[keys[key]].profile.facts;
                of_key(key, -1.0, facts.molar_mass_kg_per_mol, true)
            }
            _ => QuickFigure::Dear,
        },
        FigureKind::Selectivity => QuickFigure::OfKeys {
            factor: 1.0,
            undirected: false,
        },
        FigureKind::RelativeVolatility | FigureKind::SeparationFactor => {
            ratio.map_or(QuickFigure::Dear, |factor| QuickFigure::OfKeys {
                factor,
                undirected: kind == FigureKind::SeparationFactor,
            })
        }
        _ => QuickFigure::Dear,
    }
}
