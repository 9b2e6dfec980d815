//! The user's own mixture: activity and what follows from it.

use super::Library;
use super::component::{MixtureComponent, boiling_range_k};
use super::interval;
use super::profile::Profile;
use crate::brief::Basis;
use crate::data::pairs::PairValue;
use crate::groups::SetId;
use crate::mixture::{
    ActivityModel, Azeotrope, AzeotropeKind, Boiling, Component, Condition, Excess, Extremum,
    IdealState, Liquid, LiquidPhase, MassFractions, MixtureError, MoleFractions, Unifac, Vapor,
    VolumeFractions, azeotropes, boiling_pressure, boiling_temperature, bubble_temperature,
    liquid_phases,
};
use crate::quantity::{Absent, Flag, Flags, number};

/// A molecule as a UNIFAC model sees it.
pub(super) fn record(
    library: &Library,
    unifac: &Unifac,
    set: SetId,
    profile: &Profile,
) -> Result<Component, Absent> {
    let counts = profile.complete_counts(library, set)?;
    unifac.component(counts).map_err(|error| error.absent())
}

/// Fractions of any basis as mole fractions; volumes are those of the pure
/// liquids at the temperature.
///
/// # Errors
///
/// A molar volume that is needed and absent, or fractions that are none.
pub fn mole_fractions(
    library: &Library,
    components: &[MixtureComponent],
    fractions: &[f64],
    basis: Basis,
    temperature_k: f64,
) -> Result<Vec<f64>, Absent> {
    let absent = |error: MixtureError| error.absent();
    let values = fractions.to_vec();
    let x = match basis {
        Basis::Mole => MoleFractions::new(values).map_err(absent)?,
        Basis::Mass => {
            let masses = molar_masses(components);
            let w = MassFractions::new(values).map_err(absent)?;
            MoleFractions::from_mass(&w, &masses).map_err(absent)?
        }
        Basis::Volume => {
            let volumes = molar_volumes(library, components, temperature_k)?;
            let phi = VolumeFractions::new(values).map_err(absent)?;
            MoleFractions::from_volume(&phi, &volumes).map_err(absent)?
        }
    };
    Ok(x.as_slice().to_vec())
}

fn molar_masses(components: &[MixtureComponent]) -> Vec<f64> {
    components
        .iter()
        .map(|component| component.profile.facts.molar_mass_kg_per_mol)
        .collect()
}

fn molar_volumes(
    library: &Library,
    components: &[MixtureComponent],
    temperature_k: f64,
) -> Result<Vec<f64>, Absent> {
    components
        .iter()
        .map(|component| molar_volume(library, component, temperature_k).map(|found| found.0))
        .collect()
}

fn molar_volume(
    library: &Library,
    component: &MixtureComponent,
    temperature_k: f64,
) -> Result<(f64, Flags), Absent> {
    component
        .molar_volume_m3_per_mol(library, temperature_k)
        .map_err(|reason| {
            let reason = explained(library, component, &reason);
            Absent::Because(format!("density of {}: {reason}", component.name).into())
        })
}

/// Does something with the liquid of a model; `None` for the model is the
/// ideal mixture of `count` components.
pub(super) fn with_liquid<R>(
    model: Option<(&Unifac, &[Component])>,
    count: usize,
    temperature_k: f64,
    work: impl FnOnce(&mut dyn Liquid) -> Result<R, MixtureError>,
) -> Result<R, Absent> {
    let done = match model {
        None => IdealState::new(count, temperature_k).and_then(|mut liquid| work(&mut liquid)),
        Some((unifac, components)) => unifac.mixture(components).and_then(|mixture| {
            let mut state = mixture.state(temperature_k)?;
            work(&mut state)
        }),
    };
    done.map_err(|error| error.absent())
}

/// The components of a mixture as a model sees them; `None` for the ideal mixture.
fn records(
    library: &Library,
    components: &[MixtureComponent],
    model: ActivityModel,
) -> Result<Option<Vec<Component>>, Absent> {
    let (Some(unifac), Some(set)) = (
        library.unifac(model),
        model.group_set().and_then(SetId::from_id),
    ) else {
        return Ok(None);
    };
    let all = components
        .iter()
        .map(|component| record_of_component(library, unifac, set, component));
    all.collect::<Result<_, _>>().map(Some)
}

/// A component of the mixture as a UNIFAC model sees it; where it is not
/// covered, the reason names it: reasons of candidates do not.
pub(super) fn record_of_component(
    library: &Library,
    unifac: &Unifac,
    set: SetId,
    component: &MixtureComponent,
) -> Result<Component, Absent> {
    record(library, unifac, set, &component.profile).map_err(|reason| match reason {
        Absent::NotCovered { .. } => {
            let mut profiler = super::Profiler::new();
            let what = profiler.gaps(library, &component.profile, set);
            Absent::NotCovered {
                set: set.id(),
                what: format!("{}: {what}", component.name).into(),
            }
        }
        other => other,
    })
}

/// A reason for absence in a component, in a chemist's words.
fn explained(library: &Library, component: &MixtureComponent, reason: &Absent) -> Absent {
    super::Profiler::new().explained(library, &component.profile, reason)
}

/// Bubble temperature of a mixture by a model.
pub(super) fn bubble_temperature_k(
    library: &Library,
    components: &[MixtureComponent],
    model: ActivityModel,
    x: &[f64],
    pressure_pa: f64,
) -> Result<f64, Absent> {
    let records = records(library, components, model)?;
    let pressures = |at: usize, t: f64| named_pressure(components, at, t);
    let associates = associates(components);
    let vapor = Vapor {
        pressures: &pressures,
        associates: &associates,
        range_k: range_k(components),
    };
    let guess_k = boiling_guess_k(library, components, x);
    with_liquid(
        records
            .as_deref()
            .zip(library.unifac(model))
            .map(|(records, unifac)| (unifac, records)),
        components.len(),
        guess_k,
        |liquid| bubble_temperature(liquid, x, pressure_pa, vapor, guess_k),
    )
    .map(|point| point.temperature_k)
}

fn named_pressure(
    components: &[MixtureComponent],
    at: usize,
    temperature_k: f64,
) -> Result<f64, Absent> {
    let component = &components[at];
    component
        .vapor
        .pressure_pa(temperature_k)
        .map_err(|reason| {
            Absent::Because(format!("vapor pressure of {}: {reason}", component.name).into())
        })
}

fn range_k(components: &[MixtureComponent]) -> (f64, f64) {
    boiling_range_k(components.iter().map(|component| &component.vapor))
}

fn associates(components: &[MixtureComponent]) -> Vec<bool> {
    components
        .iter()
        .map(|component| component.profile.facts.associates)
        .collect()
}

fn boiling_guess_k(library: &Library, components: &[MixtureComponent], x: &[f64]) -> f64 {
    let (mut sum, mut weights) = (0.0, 0.0);
    for (component, x) in components.iter().zip(x) {
        if let Some(boiling_k) = component.boiling_guess_k(library) {
            sum += x * boiling_k;
            weights += x;
        }
    }
    if weights > 0.0 { sum / weights } else { 350.0 }
}

/// The state at which a mixture is asked about.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct StatedState {
    /// Temperature in K; where it is absent, the bubble point at the pressure.
    pub temperature_k: Option<f64>,
    /// Pressure in Pa.
    pub pressure_pa: Option<f64>,
}

/// One quantity of a mixture, or of a component in it.
#[derive(Clone, Debug, PartialEq)]
pub struct MixtureFigure {
    /// Name of the quantity.
    pub quantity: &'static str,
    /// Component from 0; `None` for the whole.
    pub component: Option<usize>,
    /// SI unit; empty for a bare number.
    pub unit: &'static str,
    /// The model; `None` for a measured value that stands beside the models.
    pub model: Option<ActivityModel>,
    /// Whether the value is taken from measurements.
    pub measured: bool,
    /// The value, nothing where nothing is the answer (no azeotrope), or why there is none.
    pub value: Result<Option<f64>, Absent>,
    /// The ends of the 90 % interval, where there is one: of γ∞ in one substance.
    pub interval: Option<(f64, f64)>,
    /// What the reader has to know.
    pub remark: String,
}

/// Everything about one mixture by one model: the order of the contract.
///
/// `x` are mole fractions, one for each component, adding up to 1.
pub fn describe_mixture(
    library: &Library,
    components: &[MixtureComponent],
    x: &[f64],
    state: StatedState,
    model: ActivityModel,
) -> Vec<MixtureFigure> {
    let mut describer = Describer {
        library,
        components,
        x,
        model,
        records: records(library, components, model),
        figures: Vec::new(),
    };
    describer.all(state);
    describer.figures
}

/// What is measured of components at infinite dilution, to stand beside the
/// models: where one component is the whole mixture, γ∞ of the others in it.
pub fn measured_at_dilution(
    library: &Library,
    components: &[MixtureComponent],
    x: &[f64],
    temperature_k: f64,
) -> Vec<MixtureFigure> {
    let Some(solvent) = x.iter().position(|&x| x == 1.0) else {
        return Vec::new();
    };
    let solvent = &components[solvent].in_pairs;
    let found = components.iter().enumerate().filter_map(|(at, solute)| {
        let pairs = library.pairs();
        let found = pairs.gamma_infinity(&solute.in_pairs, solvent, temperature_k)?;
        Some((at, found))
    });
    found
        .flat_map(|(component, found)| {
            let ends = found.as_ref().ok().and_then(|found| {
                let (low, high) = interval::of_measured(found)?;
                Some((found.value + low, found.value + high))
            });
            let row = |quantity, of: fn(f64) -> f64| MixtureFigure {
                quantity,
                component: Some(component),
                unit: "",
                model: None,
                measured: true,
                value: found
                    .as_ref()
                    .map(|found| Some(of(found.value)))
                    .map_err(Absent::clone),
                interval: ends.map(|(low, high)| (of(low), of(high))),
                remark: found.as_ref().map_or(String::new(), ToString::to_string),
            };
            [
                row("ln_activity_coefficient", |ln_gamma| ln_gamma),
                row("activity_coefficient", f64::exp),
            ]
        })
        .collect()
}

/// Remarks one after the other, without the empty ones.
fn joined(remarks: &[&str]) -> String {
    let told: Vec<&str> = remarks
        .iter()
        .copied()
        .filter(|remark| !remark.is_empty())
        .collect();
    told.join("; ")
}

struct Describer<'a> {
    library: &'a Library,
    components: &'a [MixtureComponent],
    x: &'a [f64],
    model: ActivityModel,
    records: Result<Option<Vec<Component>>, Absent>,
    figures: Vec<MixtureFigure>,
}

impl Describer<'_> {
    fn all(&mut self, state: StatedState) {
        let guess_k = boiling_guess_k(self.library, self.components, self.x);
        let bubble_at_pressure = state.pressure_pa.map(|pressure_pa| {
            self.at(guess_k, |liquid, x, vapor| {
                boiling_temperature(liquid, x, pressure_pa, vapor, guess_k)
            })
        });
        let temperature_k = match (state.temperature_k, &bubble_at_pressure) {
            (Some(stated), _) => Ok(stated),
            (None, Some(Ok(boiling))) => Ok(boiling.point.temperature_k),
            (None, Some(Err(reason))) => Err(reason.clone()),
            (None, None) => Err(Absent::Because(
                "neither temperature nor pressure is stated".into(),
            )),
        };
        let phases = temperature_k
            .clone()
            .and_then(|t| self.at(t, |liquid, x, _| liquid_phases(liquid, x)));
        // What one liquid would have is no longer what is there.
        let unstable = match &phases {
            Ok(phases) if phases.len() > 1 => format!(
                "of one liquid of the stated composition, which is not stable: {} liquids form",
                phases.len()
            ),
            _ => String::new(),
        };
        self.activity(&temperature_k, &unstable);
        self.excess(&temperature_k, &unstable);
        self.volume(&temperature_k);
        self.bubble(state, bubble_at_pressure);
        self.azeotrope(state, guess_k);
        self.phases(phases);
    }

    /// Runs something on the liquid at a temperature.
    fn at<R>(
        &self,
        temperature_k: f64,
        work: impl FnOnce(&mut dyn Liquid, &[f64], Vapor<'_>) -> Result<R, MixtureError>,
    ) -> Result<R, Absent> {
        let records = self.records.as_ref().map_err(Absent::clone)?;
        let model = records.as_deref().zip(self.library.unifac(self.model));
        let pressures = |at: usize, t: f64| named_pressure(self.components, at, t);
        let associates = associates(self.components);
        let vapor = Vapor {
            pressures: &pressures,
            associates: &associates,
            range_k: range_k(self.components),
        };
        with_liquid(
            model.map(|(records, unifac)| (unifac, records)),
            self.components.len(),
            temperature_k,
            |liquid| work(liquid, self.x, vapor),
        )
    }

    fn put(
        &mut self,
        quantity: &'static str,
        component: Option<usize>,
        unit: &'static str,
        value: Result<Option<f64>, Absent>,
        remark: impl Into<String>,
    ) {
        let value = match value {
            Ok(Some(value)) if !value.is_finite() => Err(Absent::OutsideDomain {
                method: self.model.id(),
                what: "the value is too large for a number",
            }),
            other => other,
        };
        // Rounding of terms that cancel, as in a pure component.
        let value = value.map(|value| value.map(|v| if v.abs() < 1e-11 { 0.0 } else { v }));
        self.figures.push(MixtureFigure {
            quantity,
            component,
            unit,
            model: Some(self.model),
            measured: false,
            value,
            interval: None,
            remark: remark.into(),
        });
    }

    fn activity(&mut self, temperature_k: &Result<f64, Absent>, remark: &str) {
        let n = self.components.len();
        let ln_gamma = temperature_k.clone().and_then(|t| {
            self.at(t, |liquid, x, _| {
                let mut out = vec![0.0; n];
                liquid.ln_gamma(x, &mut out).map(|()| out)
            })
        });
        let values = |of: &dyn Fn(usize, f64) -> f64| -> Vec<Result<Option<f64>, Absent>> {
            (0..n)
                .map(|i| {
                    ln_gamma
                        .as_ref()
                        .map(|all| Some(of(i, all[i])))
                        .map_err(Absent::clone)
                })
                .collect()
        };
        let x = self.x;
        let columns = [
            ("ln_activity_coefficient", values(&|_, ln| ln)),
            ("activity_coefficient", values(&|_, ln| ln.exp())),
            ("activity", values(&|i, ln| x[i] * ln.exp())),
        ];
        for (quantity, values) in columns {
            for (component, value) in values.into_iter().enumerate() {
                self.put(quantity, Some(component), "", value, remark);
            }
        }
        if let (Ok(temperature_k), Ok(ln_gamma)) = (temperature_k, &ln_gamma) {
            for (component, ln_gamma) in ln_gamma.iter().enumerate() {
                self.interval_at_dilution(component, *temperature_k, *ln_gamma);
            }
        }
    }

    /// Puts the interval of γ∞ on the figures of a component that is infinitely
    /// dilute in one other: errors of mixed solvents were not measured.
    fn interval_at_dilution(&mut self, component: usize, temperature_k: f64, ln_gamma: f64) {
        let solvent = self.x.iter().position(|&x| x == 1.0);
        let (Some(solvent), Ok(Some(records))) = (solvent, &self.records) else {
            return;
        };
        let (Some(errors), Some(unifac)) = (
            self.library.activity_errors(self.model),
            self.library.unifac(self.model),
        ) else {
            return;
        };
        if solvent == component {
            return;
        }
        let [solute, solvent] = [component, solvent].map(|at| {
            let record = &records[at];
            (record, unifac.tables().class(record))
        });
        let (low, high) = errors.interval(errors.error(solute, solvent, temperature_k, ln_gamma));
        let ends = [ln_gamma + low, ln_gamma + high];
        let remark = errors.remark(solute.1, solvent.1).unwrap_or_default();
        for figure in &mut self.figures {
            if figure.component != Some(component) {
                continue;
            }
            let [low, high] = match figure.quantity {
                "ln_activity_coefficient" => ends,
                "activity_coefficient" => ends.map(f64::exp),
                _ => continue,
            };
            if low.is_finite() && high.is_finite() {
                figure.interval = Some((low, high));
                figure.remark = joined(&[&figure.remark, &remark]);
            }
        }
    }

    fn excess(&mut self, temperature_k: &Result<f64, Absent>, unstable: &str) {
        let excess = temperature_k
            .clone()
            .and_then(|t| self.at(t, |liquid, x, _| Excess::of(liquid, x)));
        let value = |of: fn(&Excess) -> f64| {
            excess
                .as_ref()
                .map(|all| Some(of(all)))
                .map_err(Absent::clone)
        };
        let rows = [
            (
                "excess_gibbs_energy",
                "J/mol",
                value(|e| e.gibbs_j_per_mol),
                "",
            ),
            (
                "excess_enthalpy",
                "J/mol",
                value(|e| e.enthalpy_j_per_mol),
                "",
            ),
            (
                "excess_entropy",
                "J/(mol K)",
                value(|e| e.entropy_j_per_mol_k),
                "",
            ),
            (
                "excess_internal_energy",
                "J/mol",
                value(|e| e.enthalpy_j_per_mol),
                "taken as the excess enthalpy: no excess volume is modelled",
            ),
        ];
        for (quantity, unit, value, remark) in rows {
            let remark = joined(&[remark, unstable]);
            self.put(quantity, None, unit, value, remark);
        }
    }

    fn volume(&mut self, temperature_k: &Result<f64, Absent>) {
        // What is not there takes no room: its volume need not be known.
        let found = temperature_k.clone().and_then(|t| {
            let present = self
                .components
                .iter()
                .zip(self.x)
                .filter(|(_, x)| **x > 0.0);
            present
                .map(|(component, x)| {
                    let (volume, flags) = molar_volume(self.library, component, t)?;
                    Ok((x * volume, flags))
                })
                .try_fold((0.0, Flags::NONE), |(sum, all), part: Result<_, Absent>| {
                    let (volume, flags) = part?;
                    Ok((sum + volume, all.union(flags)))
                })
        });
        let excess = match temperature_k {
            Ok(temperature_k) => self.excess_volume(*temperature_k),
            Err(_) => None,
        };
        let mut measured = false;
        let (volume, density, remark) = match found {
            Ok((ideal, flags)) => {
                let masses = molar_masses(self.components);
                let mass: f64 = self.x.iter().zip(&masses).map(|(x, m)| x * m).sum();
                let (volume, how) = match excess {
                    Some(Ok(excess)) => {
                        measured = !flags.contains(Flag::RestsOnEstimate);
                        let shown = number::text(1e6 * excess.value, 4);
                        let how =
                            format!("with the excess volume measured {excess}: {shown} cm3/mol");
                        (ideal + excess.value, how)
                    }
                    Some(Err(reason)) => (
                        ideal,
                        format!("volumes of the pure liquids add up; {reason}"),
                    ),
                    None => (ideal, String::from("volumes of the pure liquids add up")),
                };
                let remark = joined(&[&how, &flags.to_string()]);
                (Ok(Some(volume)), Ok(Some(mass / volume)), remark)
            }
            Err(reason) => (Err(reason.clone()), Err(reason), String::new()),
        };
        self.put("molar_volume", None, "m3/mol", volume, remark.clone());
        self.put("density", None, "kg/m3", density, remark);
        let of_volume = self.figures.iter_mut().rev().take(2);
        of_volume.for_each(|figure| figure.measured = measured);
    }

    /// Measured excess volume, where two components are present and it is known.
    fn excess_volume(&self, temperature_k: f64) -> Option<Result<PairValue, Absent>> {
        let mut present = self
            .components
            .iter()
            .zip(self.x)
            .filter(|(_, x)| **x > 0.0);
        let (Some((first, x1)), Some((second, _)), None) =
            (present.next(), present.next(), present.next())
        else {
            return None;
        };
        self.library
            .pairs()
            .excess_volume(&first.in_pairs, &second.in_pairs, *x1, temperature_k)
    }

    fn bubble(&mut self, state: StatedState, at_pressure: Option<Result<Boiling, Absent>>) {
        let at_temperature = state
            .temperature_k
            .map(|t| self.at(t, |liquid, x, vapor| boiling_pressure(liquid, x, vapor)));
        if let Some(point) = &at_pressure {
            let remark = self.point_remark(point);
            let value = point
                .as_ref()
                .map(|p| Some(p.point.temperature_k))
                .map_err(Absent::clone);
            self.put("bubble_temperature", None, "K", value, remark);
        }
        if let Some(point) = &at_temperature {
            let remark = self.point_remark(point);
            let value = point
                .as_ref()
                .map(|p| Some(p.point.pressure_pa))
                .map_err(Absent::clone);
            self.put("bubble_pressure", None, "Pa", value, remark);
        }
        // The vapor belongs to the stated temperature where there is one.
        if let Some(point) = at_temperature.or(at_pressure) {
            let remark = self.point_remark(&point);
            for component in 0..self.components.len() {
                let value = point
                    .as_ref()
                    .map(|p| Some(p.point.y[component]))
                    .map_err(Absent::clone);
                self.put(
                    "vapor_mole_fraction",
                    Some(component),
                    "",
                    value,
                    remark.clone(),
                );
            }
        }
    }

    fn point_remark(&self, point: &Result<Boiling, Absent>) -> String {
        match point {
            Ok(Boiling { point, liquids }) => {
                let together = match liquids.len() {
                    1 => String::new(),
                    count => format!("{count} liquids boil together"),
                };
                joined(&[
                    &self.vapor_remark(point.temperature_k, point.flags),
                    &together,
                ])
            }
            Err(_) => String::new(),
        }
    }

    /// What a reader of a vapor-side figure has to know.
    fn vapor_remark(&self, temperature_k: f64, flags: Flags) -> String {
        let mut parts: Vec<String> = Vec::new();
        for component in self.components {
            let flags = component.vapor.flags_at(temperature_k);
            for flag in flags.iter() {
                let text = match flag {
                    Flag::RestsOnEstimate => "estimated",
                    other => other.text(),
                };
                parts.push(format!("vapor pressure of {} {text}", component.name));
            }
        }
        parts.extend(flags.iter().map(|flag| flag.text().to_owned()));
        parts.join("; ")
    }

    fn azeotrope(&mut self, state: StatedState, guess_k: f64) {
        if self.components.len() != 2 {
            return;
        }
        let condition = match (state.pressure_pa, state.temperature_k) {
            (Some(pressure_pa), _) => Condition::Pressure(pressure_pa),
            (None, Some(temperature_k)) => Condition::Temperature(temperature_k),
            (None, None) => return,
        };
        let start_k = state.temperature_k.unwrap_or(guess_k);
        let found = self.at(start_k, |liquid, _, vapor| {
            azeotropes(liquid, condition, vapor, guess_k)
        });
        match found {
            Err(reason) => {
                self.put("azeotrope_temperature", None, "K", Err(reason.clone()), "");
                for component in 0..2 {
                    let value = Err(reason.clone());
                    self.put("azeotrope_mole_fraction", Some(component), "", value, "");
                }
            }
            Ok(all) if all.is_empty() => {
                let at = match condition {
                    Condition::Pressure(pressure_pa) => format!("at {pressure_pa} Pa"),
                    Condition::Temperature(temperature_k) => format!("at {temperature_k} K"),
                };
                let mut remark = format!("no azeotrope {at} by this model");
                let flags = match associates(self.components).contains(&true) {
                    true => Flags::NONE.with(Flag::VaporAssociationNotModelled),
                    false => Flags::NONE,
                };
                remark = joined(&[&remark, &self.vapor_remark(start_k, flags)]);
                self.put("azeotrope_temperature", None, "K", Ok(None), remark.clone());
                for component in 0..2 {
                    self.put(
                        "azeotrope_mole_fraction",
                        Some(component),
                        "",
                        Ok(None),
                        remark.clone(),
                    );
                }
            }
            Ok(all) => {
                for azeotrope in &all {
                    let remark = self.azeotrope_remark(azeotrope);
                    let temperature = Ok(Some(azeotrope.temperature_k));
                    self.put(
                        "azeotrope_temperature",
                        None,
                        "K",
                        temperature,
                        remark.clone(),
                    );
                    self.put(
                        "azeotrope_pressure",
                        None,
                        "Pa",
                        Ok(Some(azeotrope.pressure_pa)),
                        remark.clone(),
                    );
                    for (component, y) in [azeotrope.y1, 1.0 - azeotrope.y1].into_iter().enumerate()
                    {
                        let quantity = "azeotrope_mole_fraction";
                        self.put(quantity, Some(component), "", Ok(Some(y)), remark.clone());
                    }
                }
            }
        }
    }

    fn azeotrope_remark(&self, azeotrope: &Azeotrope) -> String {
        let mut remark = String::from(match azeotrope.extremum {
            Extremum::MinimumBoiling => "minimum-boiling",
            Extremum::MaximumBoiling => "maximum-boiling",
        });
        match &azeotrope.kind {
            AzeotropeKind::Homogeneous => remark.push_str(", one liquid"),
            AzeotropeKind::Heterogeneous { .. } => remark.push_str(", two liquids"),
        }
        let vapor = self.vapor_remark(azeotrope.temperature_k, azeotrope.flags);
        joined(&[&remark, &vapor])
    }

    fn phases(&mut self, phases: Result<Vec<LiquidPhase>, Absent>) {
        let (value, remark) = match phases {
            Err(reason) => (Err(reason), String::new()),
            Ok(phases) => {
                let remark = if phases.len() > 1 {
                    let liquids: Vec<_> = phases
                        .iter()
                        .map(|phase| {
                            let x: Vec<_> = phase.x.iter().map(|x| format!("{x:.4}")).collect();
                            format!(
                                "{:.4} of the whole with x = {}",
                                phase.fraction,
                                x.join(" ")
                            )
                        })
                        .collect();
                    liquids.join("; ")
                } else {
                    String::new()
                };
                (Ok(Some(phases.len() as f64)), remark)
            }
        };
        self.put("liquid_phases", None, "", value, remark);
    }
}
