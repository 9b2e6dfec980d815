//! A brief bound to tables and data: everything that is the same for every candidate.

use std::sync::Arc;

use super::component::MixtureComponent;
use super::error::{PlanCause, PlanFault};
use super::figure::{FigureKind, figure};
use super::interval::PlannedErrors;
use super::profile::Profiler;
use super::source::Source;
use super::stability::classes_of;
use super::structure::{StructureLimit, bind};
use super::{Library, solution};
use crate::brief::{self, Basis, Brief, SolventToFeed, Target};
use crate::groups::SetId;
use crate::mixture::{
    ActivityModel, Component, HostAtTemperature, KeysAtTemperature, ModelStatus, Unifac,
};
use crate::pure::{default_method, with_inputs};
use crate::quantity::{Absent, Dimension, Property, PropertySet, REFERENCE_TEMPERATURE_K};
use crate::stability::Classes;

/// The model that is used where a brief names none.
pub const DEFAULT_MODEL: ActivityModel = ActivityModel::UnifacDortmund;

/// A figure with a column of its own.
#[derive(Clone, Debug, PartialEq)]
pub struct PlannedFigure {
    /// What it is.
    pub kind: FigureKind,
    /// Name of the column, without the unit.
    pub name: String,
    /// What it measures.
    pub dimension: Dimension,
    /// Component of the mixture, from 0, where the figure takes one.
    pub(super) component: Option<usize>,
    /// Position in [`Plan::temperatures`] for a property.
    pub(super) temperature: usize,
    /// Position in [`Plan::models`] for a figure of the mixture.
    pub(super) model: usize,
    /// Properties of the candidate at that temperature that it is made of.
    pub(super) rests_on: PropertySet,
}

/// A target with the column it looks at.
#[derive(Clone, Debug)]
pub struct PlannedTarget {
    /// The target of the brief.
    pub target: Target,
    /// Position in [`Plan::figures`].
    pub figure: usize,
    /// What is wanted, in words and the unit of tables.
    pub wanted: String,
    /// Position in [`Plan::sources`].
    pub(super) source: usize,
    /// Whether the figure rises with its source.
    pub(super) rises: bool,
}

/// An activity model bound to the mixture and its temperature.
#[derive(Clone, Debug)]
pub(super) struct PlannedModel {
    pub(super) model: ActivityModel,
    pub(super) unifac: Option<(Unifac, SetId)>,
    /// Components of the mixture as the model sees them.
    pub(super) components: Vec<Result<Component, Absent>>,
    /// The two keys together: the quick way.
    pub(super) keys: Option<KeysAtTemperature>,
    /// Each component alone, for figures of one and for naming what is missing.
    pub(super) each: Vec<Result<KeysAtTemperature, Absent>>,
    /// The mixture at its composition.
    pub(super) host: Result<HostAtTemperature, Absent>,
    /// The errors of the model, where they were fitted.
    pub(super) errors: Option<PlannedErrors>,
}

/// The 90 % interval of a figure with a value.
#[cfg(test)]
pub(crate) type IntervalsForTests = fn(&PlannedFigure, f64) -> Option<(f64, f64)>;

/// A checked job bound to tables and data; shared by all threads.
#[derive(Debug)]
pub struct Plan {
    /// Tables and data.
    pub library: Arc<Library>,
    /// The brief.
    pub brief: Brief,
    /// Components of the mixture, in the order of the brief.
    pub components: Vec<MixtureComponent>,
    /// Temperature of the mixture in K: stated, or its bubble point at the stated pressure.
    pub temperature_k: Option<f64>,
    /// Mole fractions of the components, where the brief states a composition.
    pub mole_fractions: Option<Vec<f64>>,
    /// Columns, those of targets first.
    pub figures: Vec<PlannedFigure>,
    /// Targets.
    pub targets: Vec<PlannedTarget>,
    /// What the figures of targets rest on, each once.
    pub sources: Vec<Source>,
    /// What the reader of the results should know of the plan.
    pub notes: Vec<String>,
    /// Temperatures at which properties are taken; the first is 298.15 K.
    pub(super) temperatures: Vec<f64>,
    pub(super) models: Vec<PlannedModel>,
    pub(super) limits: Vec<StructureLimit>,
    /// What each component can be in reactions.
    pub(super) component_classes: Vec<Classes>,
    /// Keys, positions in `components`.
    pub(super) keys: Option<[usize; 2]>,
    /// P1/P2 of the keys at the temperature, or why it is not known.
    pub(super) key_pressure_ratio: Result<f64, Absent>,
    pub(super) use_measured: bool,
    /// Stands in for the intervals of methods where a test needs some.
    #[cfg(test)]
    pub(crate) intervals_for_tests: Option<IntervalsForTests>,
}

impl Plan {
    /// Binds a brief.
    ///
    /// Properties that depend on temperature are taken at 298.15 K unless their
    /// target states a temperature; figures of the mixture at its temperature.
    /// `use_measured` says whether measured data of candidates go before
    /// estimates; the mixture's own components always use theirs.
    ///
    /// # Errors
    ///
    /// Every fault that shows only beside tables and data.
    pub fn new(
        library: Arc<Library>,
        brief: Brief,
        use_measured: bool,
    ) -> Result<Self, Vec<PlanFault>> {
        let mut faults = Vec::new();
        let mut notes = Vec::new();
        let components = find_components(&library, &brief, &mut faults);
        let limits = bind(&library, &brief.structure, &mut faults);
        if !faults.is_empty() {
            return Err(faults);
        }

        let model_ids = planned_models(&brief);
        let keys = brief
            .mixture
            .as_ref()
            .and_then(|mixture| mixture.keys.as_ref())
            .map(|k| k.value);
        let state = match &brief.mixture {
            None => MixtureState::default(),
            Some(mixture) => MixtureState::of(&library, mixture, &components, model_ids[0])?,
        };
        notes.extend(state.notes);
        let models: Vec<_> = model_ids
            .iter()
            .map(|&model| {
                let x = state.mole_fractions.as_deref();
                PlannedModel::new(&library, model, &components, keys, state.temperature_k, x)
            })
            .collect();
        for model in &models {
            for (component, record) in components.iter().zip(&model.components) {
                if let Err(reason) = record {
                    let of_component = matches!(reason, Absent::NotCovered { .. });
                    notes.push(match of_component {
                        true => format!("{}: {reason}", model.model.id()),
                        false => format!("{} in {}: {reason}", component.name, model.model.id()),
                    });
                }
            }
        }

        let key_pressure_ratio = match (keys, state.temperature_k) {
            (Some(keys), Some(temperature_k)) => {
                let estimates_too = brief
                    .mixture
                    .as_ref()
                    .is_some_and(|mixture| mixture.estimates_for_keys);
                key_pressure_ratio(&components, keys, temperature_k, estimates_too)
            }
            _ => Err(Absent::Because(
                "the mixture has no keys or no temperature".into(),
            )),
        };

        let mut plan = Self {
            component_classes: classes_of(&library, &components),
            library,
            components,
            temperature_k: state.temperature_k,
            mole_fractions: state.mole_fractions,
            figures: Vec::new(),
            targets: Vec::new(),
            sources: Vec::new(),
            notes,
            temperatures: vec![REFERENCE_TEMPERATURE_K],
            models,
            limits,
            keys,
            key_pressure_ratio,
            use_measured,
            #[cfg(test)]
            intervals_for_tests: None,
            brief,
        };
        plan.add_targets();
        plan.add_columns();
        plan.add_notes();
        Ok(plan)
    }

    /// The activity models, the one that targets are judged by first.
    pub fn models(&self) -> impl ExactSizeIterator<Item = ActivityModel> {
        self.models.iter().map(|model| model.model)
    }

    /// The columns that hold the same figure of the mixture by the other models.
    pub fn other_models(&self, figure: usize) -> impl Iterator<Item = usize> {
        let one = &self.figures[figure];
        self.figures
            .iter()
            .enumerate()
            .filter_map(move |(at, other)| {
                let same = (one.kind, one.component, one.temperature)
                    == (other.kind, other.component, other.temperature);
                (same && one.model != other.model).then_some(at)
            })
    }

    /// What lines are counted under when they miss something: structural
    /// limits, then targets, each with what is wanted in words.
    pub fn labels(&self) -> impl Iterator<Item = (&str, &str)> {
        let limits = self
            .limits
            .iter()
            .map(|limit| (limit.label.as_str(), limit.wanted.as_str()));
        let targets = self.targets.iter().map(|target| {
            (
                self.figures[target.figure].name.as_str(),
                target.wanted.as_str(),
            )
        });
        limits.chain(targets)
    }

    /// The labels of what disqualifies a candidate that misses it.
    pub fn musts(&self) -> impl Iterator<Item = (&str, &str)> {
        let limits = self.limits.len();
        self.labels()
            .enumerate()
            .filter_map(move |(position, label)| {
                let must = position < limits || self.targets[position - limits].target.must;
                must.then_some(label)
            })
    }

    fn add_targets(&mut self) {
        for target in self.brief.targets.clone() {
            let entry = figure(target.figure.value).expect("the brief was checked by the catalog");
            let temperature = match &target.temperature_k {
                Some(at) => self.temperature(at.value),
                None => 0,
            };
            let component = match target.component.as_ref().map(|component| component.value) {
                // The second key is the component that is meant where none is named.
                named if named == self.keys.map(|keys| keys[1]) && entry.is_of_selected_key() => {
                    None
                }
                other => other,
            };
            let figure = self.column(entry.kind, entry.figure.id, component, temperature, 0);
            if !matches!(entry.kind, FigureKind::Property(_)) {
                // The other models stand beside the one that decides.
                for model in 1..self.models.len() {
                    self.column(entry.kind, entry.figure.id, component, temperature, model);
                }
            }
            let wanted = target.want.in_table_units(target.dimension).to_string();
            let (source, rises) = Source::of(entry.kind, component, self.keys);
            let known = self.sources.iter().position(|&known| known == source);
            let source = known.unwrap_or_else(|| {
                self.sources.push(source);
                self.sources.len() - 1
            });
            self.targets.push(PlannedTarget {
                target,
                figure,
                wanted,
                source,
                rises,
            });
        }
    }

    /// Adds what is shown beside the targets: every property, and the figures
    /// of the keys by every model.
    fn add_columns(&mut self) {
        for property in Property::ALL {
            self.column(FigureKind::Property(property), property.id(), None, 0, 0);
        }
        if self.keys.is_none() || self.temperature_k.is_none() {
            return;
        }
        for model in 0..self.models.len() {
            for id in [
                "gamma_infinity_first_key",
                "gamma_infinity_second_key",
                "selectivity_infinite_dilution",
                "relative_volatility_infinite_dilution",
                "capacity_mole",
                "capacity_mass",
            ] {
                let entry = figure(id).expect("a name of the register");
                self.column(entry.kind, id, None, 0, model);
            }
        }
    }

    fn temperature(&mut self, temperature_k: f64) -> usize {
        self.temperatures
            .iter()
            .position(|&known| known == temperature_k)
            .unwrap_or_else(|| {
                self.temperatures.push(temperature_k);
                self.temperatures.len() - 1
            })
    }

    /// The column of a figure, added if it is not there yet.
    fn column(
        &mut self,
        kind: FigureKind,
        id: &str,
        component: Option<usize>,
        temperature: usize,
        model: usize,
    ) -> usize {
        let known = self.figures.iter().position(|known| {
            (known.kind, known.component, known.temperature, known.model)
                == (kind, component, temperature, model)
        });
        known.unwrap_or_else(|| {
            let mut name = id.to_owned();
            if let Some(component) = component {
                name.push_str(&format!("_component_{}", component + 1));
            }
            if temperature > 0 {
                let kelvin = self.temperatures[temperature].to_string().replace('.', "_");
                name.push_str(&format!("_at_{kelvin}_k"));
            }
            if model > 0 {
                name.push('_');
                name.push_str(&self.models[model].model.id().replace('-', "_"));
            }
            let dimension = figure(id)
                .expect("columns have names of the register")
                .figure
                .dimension;
            self.figures.push(PlannedFigure {
                kind,
                name,
                dimension,
                component,
                temperature,
                model,
                rests_on: with_inputs(kind.properties()),
            });
            self.figures.len() - 1
        })
    }

    fn add_notes(&mut self) {
        if let Err(reason) = &self.key_pressure_ratio
            && self.keys.is_some()
        {
            self.notes.push(format!(
                "volatilities of the keys are not assessable: {reason}"
            ));
        }
        if self.targets.iter().all(|target| !target.target.counts) {
            self.notes.push(
                "no target counts in the score: all that qualify have score 1 and rank by canonical SMILES"
                    .into(),
            );
        }
        let by_mass = |mixture: &brief::Mixture| {
            let ratio = mixture.solvent_to_feed.as_ref();
            ratio.is_some_and(|ratio| ratio.value.basis == Basis::Mass)
        };
        if self.mole_fractions.is_none() && self.brief.mixture.as_ref().is_some_and(by_mass) {
            self.notes.push(
                "solvent_to_feed counts mass and the mixture states no fractions: an even feed by mole is taken"
                    .into(),
            );
        }
        for planned in &self.targets {
            let figure = &self.figures[planned.figure];
            if let FigureKind::Property(property) = figure.kind
                && default_method(property).is_none()
            {
                self.notes.push(format!(
                    "no method for {} is built in: only candidates with a measured value have one",
                    figure.name
                ));
            }
        }
        if let (Some(temperature_k), Some(mixture)) = (self.temperature_k, &self.brief.mixture)
            && mixture.temperature_k.is_none()
        {
            self.notes.push(format!(
                "figures of the mixture are taken at its bubble point, {temperature_k:.2} K, by {}",
                self.models[0].model.id()
            ));
        }
    }

    /// Solvent-to-feed ratio by mole for a candidate of this molar mass; a ratio
    /// by mass is turned at the stated composition of the feed (an even one
    /// where none is stated, with a note).
    pub(super) fn solvent_to_feed(&self, molar_mass_kg_per_mol: f64) -> Option<f64> {
        let ratio = self.brief.mixture.as_ref()?.solvent_to_feed.as_ref()?.value;
        let SolventToFeed { ratio, basis } = ratio;
        Some(match basis {
            Basis::Mass => {
                // The feed at its stated composition, else an even one.
                let masses = self
                    .components
                    .iter()
                    .map(|c| c.profile.facts.molar_mass_kg_per_mol);
                let feed: f64 = match &self.mole_fractions {
                    Some(x) => x.iter().zip(masses).map(|(x, mass)| x * mass).sum(),
                    None => masses.sum::<f64>() / self.components.len() as f64,
                };
                ratio * feed / molar_mass_kg_per_mol
            }
            Basis::Mole | Basis::Volume => ratio,
        })
    }
}

/// The models of a brief; the default where it names none.
fn planned_models(brief: &Brief) -> Vec<ActivityModel> {
    let named = brief
        .mixture
        .as_ref()
        .map_or(&[][..], |mixture| &mixture.models);
    let models: Vec<_> = named
        .iter()
        .filter_map(|name| match ActivityModel::from_id(name.value) {
            Some(ModelStatus::BuiltIn(model)) => Some(model),
            _ => None,
        })
        .collect();
    if models.is_empty() {
        vec![DEFAULT_MODEL]
    } else {
        models
    }
}

/// The components of a brief; what is wrong with them goes to `faults`.
fn find_components(
    library: &Library,
    brief: &Brief,
    faults: &mut Vec<PlanFault>,
) -> Vec<MixtureComponent> {
    let Some(mixture) = &brief.mixture else {
        return Vec::new();
    };
    let mut profiler = Profiler::new();
    let mut found: Vec<MixtureComponent> = Vec::new();
    // Positions of those found: others may be faulty themselves.
    let mut positions: Vec<usize> = Vec::new();
    for (position, text) in mixture.components.iter().enumerate() {
        let place = Some(text.place);
        match MixtureComponent::find(library, &mut profiler, &text.value, true) {
            Ok(component) => {
                let same = found
                    .iter()
                    .position(|other| other.profile.keys.full == component.profile.keys.full);
                if let Some(first) = same {
                    let cause = PlanCause::SameComponent {
                        first: positions[first] + 1,
                        second: position + 1,
                    };
                    faults.push(PlanFault { place, cause });
                }
                found.push(component);
                positions.push(position);
            }
            Err(error) => faults.push(PlanFault {
                place,
                cause: error.into(),
            }),
        }
    }
    found
}

/// What follows from the `[mixture]` table before any candidate.
#[derive(Debug, Default)]
struct MixtureState {
    temperature_k: Option<f64>,
    mole_fractions: Option<Vec<f64>>,
    notes: Vec<String>,
}

impl MixtureState {
    fn of(
        library: &Library,
        mixture: &crate::brief::Mixture,
        components: &[MixtureComponent],
        model: ActivityModel,
    ) -> Result<Self, Vec<PlanFault>> {
        let fault = |place, cause| {
            let place = Some(place);
            vec![PlanFault { place, cause }]
        };
        let stated_k = mixture.temperature_k.as_ref().map(|t| t.value);
        let mole_fractions = match &mixture.fractions {
            None => None,
            Some(fractions) => Some(
                solution::mole_fractions(
                    library,
                    components,
                    &fractions.value,
                    mixture.basis,
                    stated_k.unwrap_or(REFERENCE_TEMPERATURE_K),
                )
                .map_err(|reason| {
                    let reason = format!("the fractions cannot be converted: {reason}");
                    fault(fractions.place, PlanCause::Mixture { reason })
                })?,
            ),
        };
        let mut notes = Vec::new();
        let temperature_k = match (stated_k, &mixture.pressure_pa) {
            (Some(stated), _) => Some(stated),
            (None, None) => None,
            (None, Some(pressure)) => {
                let x = match &mole_fractions {
                    Some(x) => x.clone(),
                    None => {
                        notes.push(
                            "the mixture states no fractions: its temperature is the bubble point of an even mixture"
                                .into(),
                        );
                        vec![1.0 / components.len() as f64; components.len()]
                    }
                };
                let found =
                    solution::bubble_temperature_k(library, components, model, &x, pressure.value);
                Some(found.map_err(|reason| {
                    let reason = reason.to_string();
                    fault(pressure.place, PlanCause::NoTemperature { reason })
                })?)
            }
        };
        Ok(Self {
            temperature_k,
            mole_fractions,
            notes,
        })
    }
}

impl PlannedModel {
    fn new(
        library: &Library,
        model: ActivityModel,
        components: &[MixtureComponent],
        keys: Option<[usize; 2]>,
        temperature_k: Option<f64>,
        mole_fractions: Option<&[f64]>,
    ) -> Self {
        let none = || Absent::Because("the mixture has no temperature".into());
        let set = model.group_set().and_then(SetId::from_id);
        let (Some(unifac), Some(set)) = (library.unifac(model), set) else {
            return Self {
                model,
                unifac: None,
                components: Vec::new(),
                keys: None,
                each: Vec::new(),
                host: Err(none()),
                errors: None,
            };
        };
        let records: Vec<Result<Component, Absent>> = components
            .iter()
            .map(|component| solution::record_of_component(library, unifac, set, component))
            .collect();
        let groups = match temperature_k {
            None => Err(none()),
            Some(t) => unifac.at_temperature(t).map_err(|error| error.absent()),
        };
        let bind = |chosen: &[usize]| -> Result<KeysAtTemperature, Absent> {
            let groups = groups.as_ref().map_err(Absent::clone)?;
            let chosen: Vec<Component> = chosen
                .iter()
                .map(|&at| records[at].clone())
                .collect::<Result<_, _>>()?;
            KeysAtTemperature::new(groups, &chosen).map_err(|error| error.absent())
        };
        let host = (|| {
            let groups = groups.as_ref().map_err(Absent::clone)?;
            let x = mole_fractions
                .ok_or_else(|| Absent::Because("the mixture states no fractions".into()))?;
            let all: Vec<Component> = records.iter().cloned().collect::<Result<_, _>>()?;
            HostAtTemperature::new(groups, &all, x).map_err(|error| error.absent())
        })();
        let errors = library.activity_errors(model).and_then(|errors| {
            PlannedErrors::new(errors, unifac.tables(), &records, keys, temperature_k)
        });
        Self {
            model,
            errors,
            keys: keys.and_then(|keys| bind(&keys).ok()),
            each: (0..components.len()).map(|at| bind(&[at])).collect(),
            host,
            unifac: Some((unifac.clone(), set)),
            components: records,
        }
    }
}

fn key_pressure_ratio(
    components: &[MixtureComponent],
    keys: [usize; 2],
    temperature_k: f64,
    estimates_too: bool,
) -> Result<f64, Absent> {
    let pressure = |key: usize| {
        let component = &components[key];
        if !component.vapor.is_measured() && !estimates_too {
            return Err(Absent::NotMeasured {
                property: Property::VaporPressure,
                substance: Arc::clone(&component.name),
            });
        }
        component.vapor.pressure_pa(temperature_k)
    };
    Ok(pressure(keys[0])? / pressure(keys[1])?)
}
