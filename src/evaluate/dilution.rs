//! Measured activity coefficients at infinite dilution of a candidate with the
//! components of the mixture: they go before those of any model.

use smallvec::SmallVec;

use super::figure::FigureKind;
use super::plan::{Plan, PlannedFigure};
use super::profile::Profile;
use crate::data::pairs::PairValue;
use crate::quantity::{Absent, Estimate, Flag, Status};

/// A measured value, or why those that there are do not serve.
type Measured = Result<PairValue, Absent>;

/// What is measured of a candidate and the mixture; mostly nothing.
#[derive(Debug, Default)]
pub(super) struct MeasuredDilutions {
    /// ln γ∞ of each component in the candidate; empty where none is measured.
    of_components: Vec<Option<Measured>>,
    /// ln γ∞ of the candidate in the mixture, where that is one substance.
    of_candidate: Option<Measured>,
}

impl MeasuredDilutions {
    /// ln γ∞ of a component in the candidate.
    pub(super) fn of_component(&self, component: usize) -> Option<f64> {
        self.value_of_component(component).map(|found| found.value)
    }

    /// ln γ∞ of the candidate in the mixture.
    pub(super) fn of_candidate(&self) -> Option<f64> {
        self.value_of_candidate().map(|found| found.value)
    }

    /// The measured value behind ln γ∞ of a component in the candidate.
    pub(super) fn value_of_component(&self, component: usize) -> Option<&PairValue> {
        self.of_components.get(component)?.as_ref()?.as_ref().ok()
    }

    /// The measured value behind ln γ∞ of the candidate in the mixture.
    pub(super) fn value_of_candidate(&self) -> Option<&PairValue> {
        self.of_candidate.as_ref()?.as_ref().ok()
    }

    fn is_empty(&self) -> bool {
        self.of_components.is_empty() && self.of_candidate.is_none()
    }
}

/// One γ∞ that a figure rests on: of what, and what is measured of it.
pub(super) type RestsOn<'a> = (&'a str, Option<&'a Measured>);

impl Plan {
    /// Looks up what is measured of a candidate. Costs nothing where no pair
    /// names a component, one look-up where none names the candidate.
    pub(super) fn measured_dilutions(&self, profile: &Profile, found: &mut MeasuredDilutions) {
        found.of_components.clear();
        found.of_candidate = None;
        let pairs = self.library.pairs();
        let Some(temperature_k) = self.temperature_k else {
            return;
        };
        let named = |component: &super::MixtureComponent| !component.in_pairs.is_empty();
        if !self.use_measured || !self.components.iter().any(named) {
            return;
        }
        let candidate = pairs.identify(&profile.keys);
        if candidate.is_empty() {
            return;
        }
        let of_components = self
            .components
            .iter()
            .map(|component| pairs.gamma_infinity(&component.in_pairs, &candidate, temperature_k));
        found.of_components.extend(of_components);
        if found.of_components.iter().all(Option::is_none) {
            found.of_components.clear();
        }
        found.of_candidate = self.only_component().and_then(|only| {
            let solvent = &self.components[only].in_pairs;
            pairs.gamma_infinity(&candidate, solvent, temperature_k)
        });
    }

    /// The component that is the whole mixture, if one is.
    pub(super) fn only_component(&self) -> Option<usize> {
        let x = self.mole_fractions.as_ref()?;
        x.iter().position(|&x| x == 1.0)
    }

    /// The γ∞ that a figure rests on; none where nothing is measured.
    pub(super) fn rests_on<'a>(
        &'a self,
        figure: &PlannedFigure,
        measured: &'a MeasuredDilutions,
    ) -> SmallVec<[RestsOn<'a>; 2]> {
        if measured.is_empty() {
            return SmallVec::new();
        }
        let component = |at: usize| {
            let value = measured.of_components.get(at).and_then(Option::as_ref);
            (&*self.components[at].name, value)
        };
        let key = |key: usize| self.keys.map(|keys| component(keys[key]));
        match figure.kind {
            FigureKind::GammaInfinityOfKey(of) => key(of).into_iter().collect(),
            FigureKind::Selectivity
            | FigureKind::RelativeVolatility
            | FigureKind::SeparationFactor => [key(0), key(1)].into_iter().flatten().collect(),
            FigureKind::GammaInfinityOfComponent
            | FigureKind::CapacityByMole
            | FigureKind::CapacityByMass => {
                let named = figure.component.map(component);
                named.or_else(|| key(1)).into_iter().collect()
            }
            FigureKind::GammaInfinityOfCandidate => {
                let value = measured.of_candidate.as_ref();
                [("the candidate", value)].into_iter().collect()
            }
            FigureKind::Property(_)
            | FigureKind::RelativeVolatilityWithSolvent
            | FigureKind::SeparationFactorWithSolvent => SmallVec::new(),
        }
    }

    /// A figure with what is measured of it said. It counts as measured if
    /// nothing in it is estimated.
    pub(super) fn marked(
        &self,
        mut estimate: Estimate,
        figure: &PlannedFigure,
        measured: &MeasuredDilutions,
    ) -> Estimate {
        let rests_on = self.rests_on(figure, measured);
        let mut sources: Vec<String> = Vec::new();
        for (of, measured) in &rests_on {
            if let Some(Ok(value)) = measured {
                estimate.flags = estimate.flags.union(value.flags);
                sources.push(origin_of(of, value));
            }
        }
        if sources.is_empty() {
            return estimate;
        }
        if sources.len() == rests_on.len() && !estimate.flags.contains(Flag::RestsOnEstimate) {
            estimate.status = Status::Measured;
            estimate.method = "measured";
        }
        estimate.source = Some(sources.join("; ").into());
        estimate
    }
}

/// Where a measured γ∞ comes from in words, or why it is not used.
pub(super) fn origin(of: &str, measured: &Measured) -> String {
    match measured {
        Ok(value) => origin_of(of, value),
        Err(reason) => format!("{of}: {reason}"),
    }
}

fn origin_of(of: &str, value: &PairValue) -> String {
    format!("gamma infinity of {of} measured {value}")
}
