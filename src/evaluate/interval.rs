//! 90 % intervals of figures at infinite dilution: errors of the model where a
//! model stands behind a γ∞, the stated uncertainty where a measurement does.

use super::candidate::Dilute;
use super::dilution::MeasuredDilutions;
use super::figure::FigureKind;
use super::plan::{Plan, PlannedFigure, PlannedModel};
use crate::data::pairs::PairValue;
use crate::mixture::{ChemicalClass, Component, ErrorModel, Likeness, LnError};
use crate::quantity::Estimate;

/// What has to be added to a ln γ∞ at the ends of its interval.
pub(super) type Offsets = (f64, f64);

/// The error model of a planned model with the classes of the mixture's components.
#[derive(Clone, Debug)]
pub(super) struct PlannedErrors {
    model: ErrorModel,
    /// Class of each component; `None` where the model does not see it.
    classes: Vec<Option<ChemicalClass>>,
    /// How alike the keys are.
    keys: Option<Likeness>,
    temperature_k: f64,
}

/// Half the width of a 90 % interval for a stated uncertainty, which is taken
/// for one standard deviation of a normal distribution.
const NORMAL_90: f64 = 1.645;

/// The interval of a measured ln γ∞ around it; `None` where no uncertainty is stated.
pub(super) fn of_measured(value: &PairValue) -> Option<Offsets> {
    let reach = NORMAL_90 * value.uncertainty?;
    Some((-reach, reach))
}

impl PlannedErrors {
    pub(super) fn new(
        model: &ErrorModel,
        tables: &crate::mixture::UnifacTables,
        components: &[Result<Component, crate::quantity::Absent>],
        keys: Option<[usize; 2]>,
        temperature_k: Option<f64>,
    ) -> Option<Self> {
        let of = |at: usize| {
            let component = components[at].as_ref().ok()?;
            Some((component, tables.class(component)))
        };
        let classes = (0..components.len())
            .map(|at| of(at).map(|(_, class)| class))
            .collect();
        let keys = keys.and_then(|[first, second]| Some(Likeness::of(of(first)?, of(second)?)));
        Some(Self {
            model: model.clone(),
            classes,
            keys,
            temperature_k: temperature_k?,
        })
    }
}

impl PlannedModel {
    /// The error of ln γ∞ of a component in the candidate.
    pub(super) fn error_of(
        &self,
        at: usize,
        candidate: &Component,
        ln_gamma_inf: f64,
    ) -> Option<LnError> {
        let (errors, (unifac, _)) = (self.errors.as_ref()?, self.unifac.as_ref()?);
        let component = self.components.get(at)?.as_ref().ok()?;
        let solute = (component, errors.classes[at]?);
        let solvent = (candidate, unifac.tables().class(candidate));
        Some(
            errors
                .model
                .error(solute, solvent, errors.temperature_k, ln_gamma_inf),
        )
    }
}

impl Plan {
    /// A figure with its interval, where there is one.
    pub(super) fn with_interval(
        &self,
        mut estimate: Estimate,
        figure: &PlannedFigure,
        measured: &MeasuredDilutions,
        dilute: &Dilute,
    ) -> Estimate {
        estimate.interval = self
            .offsets(figure, measured, dilute)
            .map(|offsets| ends(figure.kind, estimate.value, offsets))
            .filter(|(low, high)| low.is_finite() && high.is_finite());
        estimate
    }

    /// The interval of the ln of the figure, as it grows with ln γ∞.
    fn offsets(
        &self,
        figure: &PlannedFigure,
        measured: &MeasuredDilutions,
        dilute: &Dilute,
    ) -> Option<Offsets> {
        let keys = self.keys;
        match figure.kind {
            FigureKind::GammaInfinityOfKey(key) => {
                self.of_component(figure, keys?[key], measured, dilute)
            }
            FigureKind::GammaInfinityOfComponent
            | FigureKind::CapacityByMole
            | FigureKind::CapacityByMass => {
                let selected = figure.component.or(keys.map(|keys| keys[1]))?;
                self.of_component(figure, selected, measured, dilute)
            }
            FigureKind::GammaInfinityOfCandidate => self.of_candidate(figure, measured, dilute),
            FigureKind::Selectivity => self.of_ratio(figure, measured, dilute),
            FigureKind::RelativeVolatility | FigureKind::SeparationFactor => {
                // The error of an estimated vapor pressure is not known.
                let measured_vapor = |key: usize| self.components[key].vapor.is_measured();
                if !keys?.into_iter().all(measured_vapor) {
                    return None;
                }
                let (low, high) = self.of_ratio(figure, measured, dilute)?;
                let turned = figure.kind == FigureKind::SeparationFactor
                    && self.second_goes_overhead(dilute)?;
                Some(if turned { (-high, -low) } else { (low, high) })
            }
            FigureKind::Property(_)
            | FigureKind::RelativeVolatilityWithSolvent
            | FigureKind::SeparationFactorWithSolvent => None,
        }
    }

    /// Whether α12∞ is below 1.
    fn second_goes_overhead(&self, dilute: &Dilute) -> Option<bool> {
        let [first, second] = [0, 1].map(|key| dilute.keys[key].as_ref().ok());
        let ratio = self.key_pressure_ratio.as_ref().ok()?;
        Some(first? - second? + ratio.ln() < 0.0)
    }

    fn of_component(
        &self,
        figure: &PlannedFigure,
        component: usize,
        measured: &MeasuredDilutions,
        dilute: &Dilute,
    ) -> Option<Offsets> {
        if let Some(value) = measured.value_of_component(component) {
            return of_measured(value);
        }
        let model = &self.models[figure.model];
        let errors = model.errors.as_ref()?;
        let key = self
            .keys
            .and_then(|keys| keys.iter().position(|&key| key == component));
        let error = match key {
            Some(key) => dilute.errors[key]?,
            None => {
                let candidate = dilute.component.as_ref().ok()?;
                let ln_gamma = model.ln_gamma_inf_of(component, candidate).ok()?;
                model.error_of(component, candidate, ln_gamma)?
            }
        };
        Some(errors.model.interval(error))
    }

    /// Of the candidate in the mixture, where that is one substance: errors of
    /// mixed solvents were not measured.
    fn of_candidate(
        &self,
        figure: &PlannedFigure,
        measured: &MeasuredDilutions,
        dilute: &Dilute,
    ) -> Option<Offsets> {
        if let Some(value) = measured.value_of_candidate() {
            return of_measured(value);
        }
        let model = &self.models[figure.model];
        let errors = model.errors.as_ref()?;
        let (unifac, _) = model.unifac.as_ref()?;
        let host = self.only_component()?;
        let solvent = (model.components[host].as_ref().ok()?, errors.classes[host]?);
        let candidate = dilute.component.as_ref().ok()?;
        let ln_gamma = model.ln_gamma_inf_in_host(candidate).ok()?;
        let solute = (candidate, unifac.tables().class(candidate));
        let error = errors
            .model
            .error(solute, solvent, errors.temperature_k, ln_gamma);
        Some(errors.model.interval(error))
    }

    /// Of γ1∞/γ2∞. Where one is measured, its uncertainty is independent of the
    /// error of the model in the other; their reaches add as squares.
    fn of_ratio(
        &self,
        figure: &PlannedFigure,
        measured: &MeasuredDilutions,
        dilute: &Dilute,
    ) -> Option<Offsets> {
        let keys = self.keys?;
        let model = &self.models[figure.model];
        let [first, second] = keys.map(|key| measured.value_of_component(key));
        if first.is_some() || second.is_some() {
            let one = self.of_component(figure, keys[0], measured, dilute)?;
            let other = self.of_component(figure, keys[1], measured, dilute)?;
            return Some((-one.0.hypot(other.1), one.1.hypot(other.0)));
        }
        let errors = model.errors.as_ref()?;
        let (unifac, _) = model.unifac.as_ref()?;
        let candidate = dilute.component.as_ref().ok()?;
        Some(errors.model.interval_of_difference(
            dilute.errors[0]?,
            dilute.errors[1]?,
            errors.keys?,
            unifac.tables().class(candidate),
        ))
    }
}

/// The ends of a figure's interval from those of the ln γ∞ or the ln ratio that
/// it is made of.
fn ends(kind: FigureKind, value: f64, (low, high): Offsets) -> (f64, f64) {
    match kind {
        // 1/γ falls as γ rises.
        FigureKind::CapacityByMole | FigureKind::CapacityByMass => {
            (value * (-high).exp(), value * (-low).exp())
        }
        // The larger of α and 1/α: where the interval of α reaches over 1, so low
        // as 1, and the other way round perhaps higher.
        FigureKind::SeparationFactor => {
            let (least, most) = (value * low.exp(), value * high.exp());
            (least.max(1.0), most.max(1.0 / least))
        }
        _ => (value * low.exp(), value * high.exp()),
    }
}
