//! One candidate evaluated by a plan.

use smallvec::SmallVec;

use super::component::{VaporCurve, boiling_range_k};
use super::dilution::{MeasuredDilutions, origin};
use super::figure::FigureKind;
use super::fitted::FittedValues;
use super::plan::{Plan, PlannedFigure, PlannedModel};
use super::profile::{
    GivenValues, Known, Profile, Profiler, given_values, measured_values, properties_from,
};
use super::solution::with_liquid;
use super::uncertainty::{Judged, Judgement, Spread, Term};
use crate::chem::SmilesError;
use crate::data::pairs::PLAUSIBLE_LN_GAMMA_INFINITY;
use crate::mixture::{Component, LnError, Unifac, Vapor, liquid_phases, relative_volatility};
use crate::pure::Estimates;
use crate::quantity::{
    Absent, Dimension, Estimate, Flag, Flags, Outcome, Property, PropertySet,
    REFERENCE_TEMPERATURE_K, Status,
};
use crate::stability;

/// Solvent-free mole fractions of the first key at which the relative
/// volatility beside the solvent is looked at.
const SOLVENT_FREE_POINTS: [f64; 11] = [0.01, 0.1, 0.2, 0.3, 0.4, 0.5, 0.6, 0.7, 0.8, 0.9, 0.99];

/// Positions in [`SOLVENT_FREE_POINTS`] at which the liquid is tested for a
/// split: the test costs more than all the rest of a row.
const SPLIT_POINTS: [usize; 3] = [1, 5, 9];

/// What a plan makes of a candidate.
#[derive(Clone, Debug, PartialEq)]
pub enum Verdict {
    /// Every must is met.
    Qualified {
        /// Weighted geometric mean of the desirabilities of what counts and is
        /// known, 0 to 1; 1 where nothing counts, 0 where nothing is known.
        /// Where intervals count, its expected value, a missed must being 0.
        score: f64,
        /// Share of the weights whose figures have a value: 1 where all do.
        known: f64,
        /// Variance of the score: 0 where no interval counts.
        variance: f64,
        /// Probability that every must is met.
        probability: f64,
    },
    /// A must is missed beyond the confidence of the brief.
    Missed {
        /// Position in [`Plan::labels`].
        label: usize,
        /// The value, in SI, and what it measures.
        value: f64,
        /// Its dimension.
        dimension: Dimension,
        /// Probability of meeting it all the same: 0 for an exact value.
        probability: f64,
    },
    /// A must cannot be judged.
    NotAssessable {
        /// Position in [`Plan::labels`].
        label: usize,
        /// Why not.
        reason: Absent,
    },
}

/// Memory for evaluating candidates, one per thread.
#[derive(Default)]
pub struct Scratch {
    profiler: Profiler,
    /// The last candidate.
    pub profile: Profile,
    /// Its figures, in the order of [`Plan::figures`]. After [`Plan::judge`] those that
    /// were not asked for are absent.
    pub figures: Vec<Outcome>,
    /// Which figures were found out.
    told: Vec<bool>,
    properties: Vec<AtTemperature>,
    fitted: FittedValues,
    measured: MeasuredDilutions,
    dilute: Vec<Option<Dilute>>,
    stability: stability::Scratch,
}

/// Properties of a candidate at one temperature of the plan.
#[derive(Debug)]
struct AtTemperature {
    /// Values that go before estimates.
    given: GivenValues,
    estimates: Estimates,
    /// Which of them were asked for.
    told: PropertySet,
}

impl Scratch {
    /// Empty memory.
    pub fn new() -> Self {
        Self::default()
    }

    /// A reason for absence in the last candidate, with the words for an
    /// uncovered part filled in.
    pub fn explained(&mut self, plan: &Plan, absent: &Absent) -> Absent {
        self.profiler
            .explained(&plan.library, &self.profile, absent)
    }
}

/// Relative volatilities α12 of the keys along the solvent-free composition.
struct AlphaRange {
    least: f64,
    most: f64,
    flags: Flags,
}

/// A candidate with what its figures are computed from.
#[derive(Clone, Copy)]
struct Candidate<'a> {
    profile: &'a Profile,
    known: Option<Known<'a>>,
    /// Measured values of the user's own.
    own: &'a [(Property, Estimate)],
    measured: &'a MeasuredDilutions,
}

/// A candidate whose figures are found out as they are asked for.
struct Inquiry<'a> {
    plan: &'a Plan,
    candidate: Candidate<'a>,
    fitted: &'a mut FittedValues,
    properties: &'a mut Vec<AtTemperature>,
    /// By each model of the plan.
    dilute: &'a mut [Option<Dilute>],
    figures: &'a mut [Outcome],
    told: &'a mut [bool],
}

impl Inquiry<'_> {
    /// A figure of the plan.
    fn figure(&mut self, at: usize) -> &Outcome {
        if !self.told[at] {
            self.told[at] = true;
            self.figures[at] = self.found(at);
        }
        &self.figures[at]
    }

    fn found(&mut self, at: usize) -> Outcome {
        let plan = self.plan;
        let figure = &plan.figures[at];
        self.ask(figure.temperature, figure.rests_on);
        if let FigureKind::Property(property) = figure.kind {
            return plan.tested(
                figure,
                self.properties[figure.temperature].estimates[property as usize].clone(),
            );
        }
        let candidate = self.candidate;
        let dilute = self.dilute[figure.model].get_or_insert_with(|| {
            let mut of_model = plan.dilute(&plan.models[figure.model], candidate.profile);
            of_model.prefer(candidate.measured, plan.keys);
            of_model
        });
        let estimates = &self.properties[figure.temperature].estimates;
        plan.tested(figure, plan.figure(figure, &candidate, estimates, dilute))
    }

    /// Finds out properties at a temperature of the plan.
    fn ask(&mut self, temperature: usize, asked: PropertySet) {
        let here = &self.properties[temperature];
        if here.told.contains_all(asked) {
            return;
        }
        let library = &self.plan.library;
        let profile = self.candidate.profile;
        let at_reference = &self.properties[0].given;
        self.fitted.add(library, profile, at_reference, asked);
        let some = self.by_methods(temperature, self.fitted, asked);
        let here = &mut self.properties[temperature];
        for (property, found) in Property::ALL.into_iter().zip(some) {
            if asked.contains(property) {
                here.estimates[property as usize] = found;
            }
        }
        here.told = here.told.union(asked);
    }

    fn by_methods(
        &self,
        temperature: usize,
        fitted: &FittedValues,
        asked: PropertySet,
    ) -> Estimates {
        let given = self.properties[temperature].given.clone();
        let temperature_k = self.plan.temperatures[temperature];
        let library = &self.plan.library;
        properties_from(
            library,
            self.candidate.profile,
            given,
            fitted,
            temperature_k,
            asked,
        )
    }

    /// Whether a figure is known to have a value before it is found out: one whose
    /// older method starts from nothing and answers, which stands in if the fit does not.
    fn surely_has_value(&self, at: usize) -> bool {
        if self.told[at] {
            return self.figures[at].is_ok();
        }
        let figure = &self.plan.figures[at];
        let FigureKind::Property(property) = figure.kind else {
            return false;
        };
        let alone = PropertySet::NONE.with(property);
        if figure.rests_on != alone {
            return false;
        }
        let without_fit = FittedValues::default();
        self.by_methods(figure.temperature, &without_fit, alone)[property as usize].is_ok()
    }

    /// Finds out all that has not been asked for.
    fn complete(&mut self) {
        for temperature in 0..self.properties.len() {
            self.ask(temperature, PropertySet::ALL);
        }
        // flags come of comparing with what was not asked for before
        self.told.fill(false);
        for at in 0..self.figures.len() {
            self.figure(at);
        }
    }
}

/// A candidate at infinite dilution with the keys, by one model.
pub(super) struct Dilute {
    /// The candidate as the model sees it.
    pub(super) component: Result<Component, Absent>,
    /// ln γ∞ of the keys in the candidate.
    pub(super) keys: [Result<f64, Absent>; 2],
    /// The errors of the model in them, where they are known.
    pub(super) errors: [Option<LnError>; 2],
}

impl Dilute {
    /// Puts measured values of the keys in place of the model's.
    fn prefer(&mut self, measured: &MeasuredDilutions, keys: Option<[usize; 2]>) {
        for (value, key) in self.keys.iter_mut().zip(keys.into_iter().flatten()) {
            if let Some(ln_gamma) = measured.of_component(key) {
                *value = Ok(ln_gamma);
            }
        }
    }
}

impl Plan {
    /// Evaluates a candidate; its figures and keys are left in `scratch`.
    ///
    /// # Errors
    ///
    /// The line is no molecule that Groupsmith takes.
    pub fn evaluate(&self, scratch: &mut Scratch, smiles: &str) -> Result<Verdict, SmilesError> {
        self.evaluate_with(scratch, smiles, &[])
    }

    /// The same with measured values of the user's own, which go before those of
    /// the tables; left out where the plan leaves measured data out.
    ///
    /// # Errors
    ///
    /// As [`evaluate`](Self::evaluate).
    pub fn evaluate_with(
        &self,
        scratch: &mut Scratch,
        smiles: &str,
        own: &[(Property, Estimate)],
    ) -> Result<Verdict, SmilesError> {
        self.read(scratch, smiles)?;
        let mut inquiry = self.inquiry(scratch, own);
        inquiry.complete();
        Ok(self.verdict(&mut inquiry))
    }

    /// The verdict of [`evaluate_with`](Self::evaluate_with) without finding out more than it
    /// takes: the musts in their order until one decides, and what else targets look
    /// at only if all are met.
    ///
    /// # Errors
    ///
    /// As [`evaluate`](Self::evaluate).
    pub fn judge(
        &self,
        scratch: &mut Scratch,
        smiles: &str,
        own: &[(Property, Estimate)],
    ) -> Result<Verdict, SmilesError> {
        self.read(scratch, smiles)?;
        let mut inquiry = self.inquiry(scratch, own);
        Ok(self.verdict(&mut inquiry))
    }

    fn read(&self, scratch: &mut Scratch, smiles: &str) -> Result<(), SmilesError> {
        let profiler = &mut scratch.profiler;
        profiler.profile_into(&self.library, smiles, &mut scratch.profile)
    }

    /// Begins with the candidate that was read last.
    fn inquiry<'a>(
        &'a self,
        scratch: &'a mut Scratch,
        own: &'a [(Property, Estimate)],
    ) -> Inquiry<'a> {
        let Scratch {
            profile,
            figures,
            told,
            properties,
            fitted,
            measured,
            dilute,
            ..
        } = scratch;
        let known = self
            .library
            .known(&profile.keys)
            .filter(|_| self.use_measured);
        let own = if self.use_measured { own } else { &[] };
        fitted.clear();
        properties.clear();
        properties.extend(self.temperatures.iter().map(|&t| AtTemperature {
            given: given_values(measured_values(known, t), own, t),
            estimates: [const { Err(Absent::NoMethod) }; Property::COUNT],
            told: PropertySet::NONE,
        }));
        self.measured_dilutions(profile, measured);
        dilute.clear();
        dilute.resize_with(self.models.len(), || None);
        told.clear();
        told.resize(self.figures.len(), false);
        figures.clear();
        figures.resize(self.figures.len(), Err(Absent::NoMethod));
        Inquiry {
            plan: self,
            candidate: Candidate {
                profile,
                known,
                own,
                measured,
            },
            fitted,
            properties,
            dilute,
            figures,
            told,
        }
    }

    /// A figure as it was found, with the interval that a test puts in.
    #[cfg(test)]
    fn tested(&self, figure: &PlannedFigure, mut found: Outcome) -> Outcome {
        if let (Some(interval), Ok(found)) = (self.intervals_for_tests, &mut found) {
            found.interval = interval(figure, found.value);
        }
        found
    }

    #[cfg(not(test))]
    fn tested(&self, _: &PlannedFigure, found: Outcome) -> Outcome {
        found
    }

    fn dilute(&self, model: &PlannedModel, profile: &Profile) -> Dilute {
        let needless = || Absent::Because("the mixture has no keys".into());
        let Some((unifac, set)) = &model.unifac else {
            return Dilute {
                component: Err(needless()),
                keys: [Ok(0.0), Ok(0.0)],
                errors: [None; 2],
            };
        };
        let component = super::solution::record(&self.library, unifac, *set, profile);
        let keys = match (&component, self.keys) {
            (_, None) => [Err(needless()), Err(needless())],
            (Err(reason), _) => [Err(reason.clone()), Err(reason.clone())],
            (Ok(component), Some(keys)) => {
                let mut together = [0.0; 2];
                let quick = model
                    .keys
                    .as_ref()
                    .is_some_and(|keys| keys.ln_gamma_inf(component, &mut together).is_ok());
                if quick {
                    together.map(|value| plausible(value, model))
                } else {
                    keys.map(|key| model.ln_gamma_inf_of(key, component))
                }
            }
        };
        let errors = match (&component, self.keys) {
            (Ok(candidate), Some(of)) => [0, 1].map(|key| {
                let ln_gamma = *keys[key].as_ref().ok()?;
                model.error_of(of[key], candidate, ln_gamma)
            }),
            _ => [None; 2],
        };
        Dilute {
            component,
            keys,
            errors,
        }
    }

    /// A figure of the mixture; `estimates` are the candidate's properties at 298.15 K
    /// as far as the figure rests on them.
    fn figure(
        &self,
        figure: &PlannedFigure,
        candidate: &Candidate<'_>,
        estimates: &Estimates,
        of_candidate: &Dilute,
    ) -> Outcome {
        let Candidate {
            profile, measured, ..
        } = *candidate;
        let model = &self.models[figure.model];
        let temperature_k = self.temperature_k.unwrap_or(REFERENCE_TEMPERATURE_K);
        let calculated = |value: f64| Estimate::new(value, model.model.id()).at(temperature_k);
        let [first, second] = &of_candidate.keys;
        let of_keys = |key: usize| [first, second][key].as_ref().map_err(Absent::clone);
        let of_component = |component: Option<usize>| -> Result<f64, Absent> {
            let selected = component.or(self.keys.map(|keys| keys[1]));
            let Some(selected) = selected else {
                return Err(Absent::Because("the mixture has no keys".into()));
            };
            if let Some(key) = self
                .keys
                .and_then(|keys| keys.iter().position(|&k| k == selected))
            {
                return of_keys(key).copied();
            }
            if let Some(ln_gamma) = measured.of_component(selected) {
                return Ok(ln_gamma);
            }
            if model.unifac.is_none() {
                return Ok(0.0);
            }
            let candidate = of_candidate.component.as_ref().map_err(Absent::clone)?;
            model.ln_gamma_inf_of(selected, candidate)
        };
        let value = match figure.kind {
            FigureKind::Property(property) => return estimates[property as usize].clone(),
            FigureKind::GammaInfinityOfKey(key) => of_keys(key)?.exp(),
            FigureKind::GammaInfinityOfComponent => of_component(figure.component)?.exp(),
            FigureKind::GammaInfinityOfCandidate => {
                if let Some(ln_gamma) = measured.of_candidate() {
                    ln_gamma.exp()
                } else if model.unifac.is_none() {
                    1.0
                } else {
                    let candidate = of_candidate.component.as_ref().map_err(Absent::clone)?;
                    model.ln_gamma_inf_in_host(candidate)?.exp()
                }
            }
            FigureKind::Selectivity => (of_keys(0)? - of_keys(1)?).exp(),
            FigureKind::RelativeVolatility | FigureKind::SeparationFactor => {
                let selectivity = (of_keys(0)? - of_keys(1)?).exp();
                let ratio = self.key_pressure_ratio.as_ref().map_err(Absent::clone)?;
                let alpha = selectivity * ratio;
                let value = if figure.kind == FigureKind::SeparationFactor {
                    alpha.max(1.0 / alpha)
                } else {
                    alpha
                };
                let alpha = calculated(value).flagged(self.vapor_flags(temperature_k));
                let alpha = self.with_interval(alpha, figure, measured, of_candidate);
                return finite(self.marked(alpha, figure, measured));
            }
            FigureKind::CapacityByMole => (-of_component(figure.component)?).exp(),
            FigureKind::CapacityByMass => {
                let selected = figure
                    .component
                    .or(self.keys.map(|keys| keys[1]))
                    .unwrap_or(0);
                let of_key = self.components[selected]
                    .profile
                    .facts
                    .molar_mass_kg_per_mol;
                (-of_component(figure.component)?).exp() * of_key
                    / profile.facts.molar_mass_kg_per_mol
            }
            FigureKind::RelativeVolatilityWithSolvent | FigureKind::SeparationFactorWithSolvent => {
                let range = self.with_solvent(model, of_candidate, candidate, estimates);
                return range.and_then(|range| {
                    let value = if figure.kind == FigureKind::SeparationFactorWithSolvent {
                        range.least.max(1.0 / range.most)
                    } else {
                        range.least
                    };
                    finite(Estimate::new(value, model.model.id()).flagged(range.flags))
                });
            }
        };
        let estimate = self.with_interval(calculated(value), figure, measured, of_candidate);
        finite(self.marked(estimate, figure, measured))
    }

    /// Flags of figures that rest on the vapor pressures of the keys.
    fn vapor_flags(&self, temperature_k: f64) -> Flags {
        let Some(keys) = self.keys else {
            return Flags::NONE;
        };
        keys.iter().fold(Flags::NONE, |flags, &key| {
            let key = &self.components[key];
            let flags = flags.union(key.vapor.flags_at(temperature_k));
            if key.profile.facts.associates {
                flags.with(Flag::VaporAssociationNotModelled)
            } else {
                flags
            }
        })
    }

    /// The relative volatilities of the keys beside the candidate.
    fn with_solvent(
        &self,
        model: &PlannedModel,
        dilute: &Dilute,
        candidate: &Candidate<'_>,
        estimates: &Estimates,
    ) -> Result<AlphaRange, Absent> {
        let because = |text: &str| Absent::Because(text.into());
        let profile = candidate.profile;
        let keys = self
            .keys
            .ok_or_else(|| because("the mixture has no keys"))?;
        let pressure_pa = self
            .brief
            .mixture
            .as_ref()
            .and_then(|mixture| mixture.pressure_pa.as_ref())
            .ok_or_else(|| because("the mixture states no pressure"))?
            .value;
        let ratio = self
            .solvent_to_feed(profile.facts.molar_mass_kg_per_mol)
            .ok_or_else(|| because("the mixture states no solvent_to_feed"))?;
        // Without measured vapor pressures of the keys the figure is noise.
        self.key_pressure_ratio.as_ref().map_err(Absent::clone)?;
        let curve = VaporCurve::of_candidate(
            &self.library,
            profile,
            candidate.known,
            candidate.own,
            estimates,
        )?;
        let [first, second] = keys.map(|key| &self.components[key]);
        let pressures = |component: usize, temperature_k: f64| match component {
            0 => first.vapor.pressure_pa(temperature_k),
            1 => second.vapor.pressure_pa(temperature_k),
            _ => curve.pressure_pa(temperature_k),
        };
        let vapor = Vapor {
            pressures: &pressures,
            associates: &[
                first.profile.facts.associates,
                second.profile.facts.associates,
                profile.facts.associates,
            ],
            range_k: boiling_range_k([&first.vapor, &second.vapor, &curve].into_iter()),
        };
        let guess_k = self.temperature_k.unwrap_or(350.0);
        let components = model.ternary(keys, dilute.component.as_ref())?;
        let points = with_liquid(
            components
                .as_ref()
                .map(|(unifac, records)| (*unifac, &records[..])),
            3,
            guess_k,
            |liquid| {
                let points = relative_volatility(
                    liquid,
                    ratio,
                    &SOLVENT_FREE_POINTS,
                    pressure_pa,
                    vapor,
                    guess_k,
                )?;
                // A split would make the volatility that of one liquid that is not there.
                for point in SPLIT_POINTS.map(|at| &points[at]) {
                    let feed = 1.0 / (1.0 + ratio);
                    let x1 = point.x1_solvent_free;
                    liquid.set_temperature(point.temperature_k)?;
                    let z = [x1 * feed, (1.0 - x1) * feed, 1.0 - feed];
                    if liquid_phases(liquid, &z)?.len() > 1 {
                        return Ok(Err(x1));
                    }
                }
                Ok(Ok(points))
            },
        )?;
        let points = points.map_err(|x1| {
            Absent::Because(
                format!(
                    "two liquids form beside the candidate (solvent-free, {x1} of {})",
                    first.name
                )
                .into(),
            )
        })?;
        let alphas = || points.iter().map(|point| point.alpha);
        let flags = points
            .iter()
            .fold(Flags::NONE, |flags, point| flags.union(point.flags));
        let curves = [&first.vapor, &second.vapor, &curve];
        let flags = match curves.iter().any(|curve| curve.is_contradicted()) {
            true => flags.with(Flag::Inconsistent),
            false => flags,
        };
        Ok(AlphaRange {
            least: alphas().fold(f64::INFINITY, f64::min),
            most: alphas().fold(0.0, f64::max),
            flags: if curve.is_measured() {
                flags
            } else {
                flags.with(Flag::RestsOnEstimate)
            },
        })
    }

    fn verdict(&self, inquiry: &mut Inquiry<'_>) -> Verdict {
        match self.fallen(inquiry) {
            Some(fallen) => fallen,
            None => self.qualified(inquiry),
        }
    }

    /// The verdict on a candidate that misses a must or cannot be judged.
    fn fallen(&self, inquiry: &mut Inquiry<'_>) -> Option<Verdict> {
        // The structure is known whatever the figures are, so it decides first.
        let mut unjudged = None;
        for (label, limit) in self.limits.iter().enumerate() {
            match limit.check(&self.library, inquiry.candidate.profile) {
                Ok(None) => {}
                Ok(Some((value, dimension))) => {
                    return Some(Verdict::Missed {
                        label,
                        value,
                        dimension,
                        probability: 0.0,
                    });
                }
                Err(reason) => {
                    unjudged.get_or_insert(Verdict::NotAssessable { label, reason });
                }
            }
        }
        if unjudged.is_some() {
            return unjudged;
        }
        let mut missed = None;
        for (position, planned) in self.targets.iter().enumerate() {
            let target = &planned.target;
            // After a must that is missed only one that cannot be judged changes anything.
            if !target.must || missed.is_some() && inquiry.surely_has_value(planned.figure) {
                continue;
            }
            let label = self.limits.len() + position;
            match inquiry.figure(planned.figure) {
                Err(reason) => {
                    let reason = reason.clone();
                    return Some(Verdict::NotAssessable { label, reason });
                }
                Ok(_) if missed.is_some() => {}
                Ok(found) => {
                    let probability = self.spread(found).probability(&target.want);
                    let judgement = Judgement::of(probability, self.brief.ranking.confidence);
                    if judgement == Judgement::Fails {
                        missed = Some(Verdict::Missed {
                            label,
                            value: found.value,
                            dimension: target.dimension,
                            probability,
                        });
                    }
                }
            }
        }
        missed
    }

    /// The verdict on a candidate that meets every must.
    fn qualified(&self, inquiry: &mut Inquiry<'_>) -> Verdict {
        let mut is_uncertain = false;
        let (mut sum, mut known, mut weights) = (0.0, 0.0, 0.0);
        for planned in &self.targets {
            let target = &planned.target;
            if target.counts {
                weights += target.weight;
            }
            if let Ok(found) = inquiry.figure(planned.figure) {
                let spread = self.spread(found);
                is_uncertain |= !spread.is_exact();
                if target.counts {
                    known += target.weight;
                    if spread.is_exact() {
                        sum += target.weight * target.want.desirability(found.value).ln();
                    }
                }
            }
        }
        let exact = if known > 0.0 {
            (sum / known).exp()
        } else if weights > 0.0 {
            0.0
        } else {
            1.0
        };
        let figures = &*inquiry.figures;
        let judged = match is_uncertain {
            true => {
                let spread = |at: usize| figures[at].as_ref().ok().map(|found| self.spread(found));
                self.judged(exact, known, spread)
            }
            false => Judged::of(exact, &[]),
        };
        Verdict::Qualified {
            score: judged.mean(),
            known: if weights > 0.0 { known / weights } else { 1.0 },
            variance: judged.variance(),
            probability: judged.probability(),
        }
    }

    /// An estimate as far as the brief takes it for uncertain.
    fn spread(&self, found: &Estimate) -> Spread {
        match self.brief.ranking.uses_intervals() {
            true => Spread::of(found),
            false => Spread::exact(found.value),
        }
    }

    /// What the uncertain figures make of a candidate, where `exact` is the
    /// factor of the exact ones and `known` the sum of the weights that count.
    fn judged(&self, exact: f64, known: f64, spread: impl Fn(usize) -> Option<Spread>) -> Judged {
        let terms: SmallVec<[Term<'_>; 8]> = self
            .targets
            .iter()
            .filter_map(|planned| {
                let spread = spread(planned.figure).filter(|spread| !spread.is_exact())?;
                let target = &planned.target;
                Some(Term {
                    want: &target.want,
                    spread,
                    source: planned.source,
                    rises: planned.rises,
                    must: target.must,
                    power: if target.counts {
                        target.weight / known
                    } else {
                        0.0
                    },
                })
            })
            .collect();
        Judged::of(exact, &terms)
    }

    /// Judges a candidate of the ranking again from its figures in SI and their
    /// intervals, in the order of [`Plan::figures`].
    fn judged_again(&self, figures: &[Option<f64>], intervals: &[Option<(f64, f64)>]) -> Judged {
        let spread = |at: usize| {
            let value = figures[at]?;
            Some(
                match intervals[at].filter(|_| self.brief.ranking.uses_intervals()) {
                    Some(interval) => Spread::new(value, interval),
                    None => Spread::exact(value),
                },
            )
        };
        let (mut sum, mut known) = (0.0, 0.0);
        for planned in self.targets.iter().filter(|planned| planned.target.counts) {
            let Some(spread) = spread(planned.figure) else {
                continue;
            };
            let target = &planned.target;
            known += target.weight;
            if spread.is_exact() {
                let value = figures[planned.figure].expect("it has a spread");
                sum += target.weight * target.want.desirability(value).ln();
            }
        }
        let exact = if known > 0.0 {
            (sum / known).exp()
        } else {
            1.0
        };
        self.judged(exact, known, spread)
    }

    /// How far a measurement could move the expected score of a candidate of the
    /// ranking: for each of [`Plan::sources`] that is uncertain the variance of
    /// the expected score over what the measurement may show, in the order of
    /// the sources.
    pub fn variance_by_source(
        &self,
        figures: &[Option<f64>],
        intervals: &[Option<(f64, f64)>],
    ) -> Vec<(usize, f64)> {
        let judged = self.judged_again(figures, intervals);
        let mut sources: Vec<(usize, f64)> = judged
            .factors
            .iter()
            .map(|factor| (factor.source, judged.variance_by(factor.source)))
            .collect();
        sources.sort_unstable_by_key(|&(source, _)| source);
        sources
    }

    /// Probability that the last candidate meets a target, by its position in
    /// [`Plan::targets`]; `None` where its figure is absent.
    pub fn probability_of(&self, scratch: &Scratch, target: usize) -> Option<f64> {
        let planned = &self.targets[target];
        let found = scratch.figures[planned.figure].as_ref().ok()?;
        Some(self.spread(found).probability(&planned.target.want))
    }

    /// Least and greatest probability that the last candidate meets every must,
    /// however the errors of its figures hang together; both 1 where no interval
    /// counts. The candidate has to have qualified.
    pub fn probability_bounds(&self, scratch: &Scratch) -> (f64, f64) {
        let figures = &scratch.figures;
        let spread = |at: usize| figures[at].as_ref().ok().map(|found| self.spread(found));
        self.judged(1.0, 1.0, spread).probability_bounds()
    }

    /// What a reader of the ranking has to know of a candidate: gaps, what was
    /// measured, flags of the figures of targets, which key goes overhead, what speaks
    /// against its structure.
    pub fn remarks(&self, scratch: &mut Scratch) -> String {
        let mut remarks = String::new();
        let mut add = |text: &str| {
            if !remarks.is_empty() {
                remarks.push_str("; ");
            }
            remarks.push_str(text);
        };
        let mut told: Vec<usize> = Vec::new();
        let mut origins: Vec<String> = Vec::new();
        for target in &self.targets {
            if told.contains(&target.figure) {
                continue;
            }
            told.push(target.figure);
            let name = &self.figures[target.figure].name;
            match &scratch.figures[target.figure] {
                Err(reason) => {
                    let reason =
                        scratch
                            .profiler
                            .explained(&self.library, &scratch.profile, reason);
                    add(&format!("no {name}: {reason}"));
                }
                Ok(found) => {
                    if found.status == Status::Measured {
                        add(&format!("{name} measured"));
                    }
                    if let Some(open) = self.left_open(target.figure, found) {
                        add(&open);
                    }
                    let planned = &self.figures[target.figure];
                    for (of, value) in self.rests_on(planned, &scratch.measured) {
                        let told = value.map(|value| origin(of, value));
                        origins.extend(told.filter(|told| !origins.contains(told)));
                    }
                    if found.status == Status::Estimated && found.source.is_some() {
                        add(&format!("{name} mixes measured and estimated values"));
                    }
                    for flag in found
                        .flags
                        .iter()
                        .filter(|&flag| flag != Flag::RestsOnEstimate)
                    {
                        add(&format!("{name}: {}", flag.text()));
                    }
                }
            }
        }
        for origin in &origins {
            add(origin);
        }
        if let Some(direction) = self.direction(&scratch.figures) {
            add(&direction);
        }
        let molecule = &scratch.profile.molecule;
        for remark in self.stability_remarks(&mut scratch.stability, molecule) {
            add(&remark);
        }
        remarks
    }

    /// That the interval of a figure leaves its musts open.
    fn left_open(&self, figure: usize, found: &Estimate) -> Option<String> {
        let spread = self.spread(found);
        if spread.is_exact() {
            return None;
        }
        let musts = self
            .targets
            .iter()
            .filter(|planned| planned.figure == figure);
        let open = musts.filter(|planned| planned.target.must).any(|planned| {
            let probability = spread.probability(&planned.target.want);
            Judgement::of(probability, self.brief.ranking.confidence) == Judgement::WithinError
        });
        let name = &self.figures[figure].name;
        open.then(|| format!("{name}: limit {}", Judgement::WithinError.text()))
    }

    /// Which key goes overhead, and whether the selectivity works against the
    /// volatility.
    fn direction(&self, figures: &[Outcome]) -> Option<String> {
        let keys = self.keys?;
        // Where nothing is distilled, nothing goes overhead.
        let distilled = self.targets.iter().any(|target| {
            matches!(
                self.figures[target.figure].kind,
                FigureKind::RelativeVolatility
                    | FigureKind::SeparationFactor
                    | FigureKind::RelativeVolatilityWithSolvent
                    | FigureKind::SeparationFactorWithSolvent
            )
        });
        if !distilled {
            return None;
        }
        let value = |kind: FigureKind| {
            let at = self
                .figures
                .iter()
                .position(|f| f.kind == kind && f.model == 0)?;
            figures[at].as_ref().ok().map(|found| found.value)
        };
        let selectivity = value(FigureKind::Selectivity)?;
        let alpha = value(FigureKind::RelativeVolatility)?;
        let ratio = alpha / selectivity;
        let [first, second] = keys.map(|key| &self.components[key].name);
        let overhead = if alpha > 1.0 { first } else { second };
        let against = (selectivity - 1.0) * (ratio - 1.0) < 0.0;
        Some(if !against {
            format!("{overhead} overhead")
        } else if (alpha > 1.0) == (ratio > 1.0) {
            format!("{overhead} overhead, though selectivity works against volatility")
        } else {
            format!("{overhead} overhead, selectivity having reversed the volatility")
        })
    }
}

/// A ln γ∞ that can be one, or the reason why it is not taken for one.
fn plausible(ln_gamma_inf: f64, model: &PlannedModel) -> Result<f64, Absent> {
    if PLAUSIBLE_LN_GAMMA_INFINITY.contains(&ln_gamma_inf) {
        Ok(ln_gamma_inf)
    } else {
        Err(Absent::OutsideDomain {
            method: model.model.id(),
            what: "ln gamma at infinite dilution lies outside -10 to 40, so an interaction of the table is not fit for this pair",
        })
    }
}

/// A value that leaves the room is finite, or absent for that reason.
fn finite(estimate: Estimate) -> Outcome {
    if estimate.value.is_finite() {
        Ok(estimate)
    } else {
        Err(Absent::OutsideDomain {
            method: estimate.method,
            what: "the value is too large for a number",
        })
    }
}

impl PlannedModel {
    /// ln γ∞ of a component of the mixture in a candidate.
    pub(super) fn ln_gamma_inf_of(
        &self,
        component: usize,
        candidate: &Component,
    ) -> Result<f64, Absent> {
        let record = self.each[component].as_ref().map_err(Absent::clone)?;
        let mut value = [0.0];
        record
            .ln_gamma_inf(candidate, &mut value)
            .map_err(|gap| record.groups().tables().gap_error(gap).absent())?;
        plausible(value[0], self)
    }

    pub(super) fn ln_gamma_inf_in_host(&self, candidate: &Component) -> Result<f64, Absent> {
        let host = self.host.as_ref().map_err(Absent::clone)?;
        let (unifac, _) = self
            .unifac
            .as_ref()
            .expect("a host belongs to a UNIFAC model");
        let value = host
            .ln_gamma_inf(candidate)
            .map_err(|gap| unifac.tables().gap_error(gap).absent())?;
        plausible(value, self)
    }

    /// The two keys and a candidate as the model sees them; `None` for the ideal mixture.
    fn ternary(
        &self,
        keys: [usize; 2],
        candidate: Result<&Component, &Absent>,
    ) -> Result<Option<(&Unifac, [Component; 3])>, Absent> {
        let Some((unifac, _)) = &self.unifac else {
            return Ok(None);
        };
        let record = |key: usize| self.components[key].clone();
        let candidate = candidate.map_err(Absent::clone)?.clone();
        Ok(Some((
            unifac,
            [record(keys[0])?, record(keys[1])?, candidate],
        )))
    }
}
