//! The collection: finding what is measured of a pair.

use std::collections::BTreeMap;
use std::sync::Arc;

use super::member::Members;
use super::series::{Place, place};
use super::value::both;
use super::{ActivityParameters, Dilution, ExcessVolume, PairIdentity, PairModel, PairValue};
use crate::chem::Keys;
use crate::quantity::{Absent, Flags, number};

/// How far from the only measured temperature an activity coefficient may be used, in K.
const DILUTION_NEARBY_K: f64 = 3.0;

/// How far from the only measured temperature an excess volume may be used, in K.
const VOLUME_NEARBY_K: f64 = 5.0;

/// Every pair of the loaded tables.
///
/// Immutable once loaded; shared between threads.
#[derive(Debug, Default)]
pub struct Pairs {
    pub(super) members: Members,
    /// By the positions of both members, the lower first.
    pub(super) by_members: BTreeMap<(u32, u32), PairData>,
}

/// What is known of two substances; component 1 is the member of lower position.
#[derive(Debug, Default)]
pub(super) struct PairData {
    /// Of 1 in 2 and of 2 in 1, by rising temperature.
    pub(super) dilutions: [Vec<Dilution>; 2],
    /// By rising temperature.
    pub(super) volumes: Vec<ExcessVolume>,
    /// In the order of the table.
    pub(super) parameters: Vec<ActivityParameters>,
}

/// What is known of one pair.
#[derive(Clone, Copy, Debug)]
pub struct PairEntry<'a> {
    pairs: &'a Pairs,
    members: (u32, u32),
    data: &'a PairData,
}

/// The parameter sets of a model for a pair, in the order asked for.
#[derive(Clone, Debug, PartialEq)]
pub struct FoundParameters {
    /// The sets, in the order of the table; their ranges do not overlap.
    pub sets: Vec<ActivityParameters>,
    /// Whether data of another stereoisomer stand in.
    pub flags: Flags,
}

impl Pairs {
    /// Whether there are none.
    pub fn is_empty(&self) -> bool {
        self.by_members.is_empty()
    }

    /// Every pair, in the order in which the tables name their substances.
    pub fn iter(&self) -> impl Iterator<Item = PairEntry<'_>> {
        self.by_members.iter().map(|(&members, data)| PairEntry {
            pairs: self,
            members,
            data,
        })
    }

    /// Which substances of the tables a molecule answers to.
    ///
    /// # Complexity
    ///
    /// Nothing where there are no pairs, one look-up otherwise.
    pub fn identify(&self, keys: &Keys) -> PairIdentity {
        if self.members.is_empty() {
            return PairIdentity::default();
        }
        self.members.identify(keys)
    }

    /// ln γ∞ of a solute in a solvent at a temperature in K: as measured there,
    /// or ln γ∞ interpolated linearly in 1/T between measured temperatures, or
    /// measured within 3 K. `None` where nothing is measured of the pair.
    ///
    /// # Errors
    ///
    /// The temperature is too far from those measured.
    pub fn gamma_infinity(
        &self,
        solute: &PairIdentity,
        solvent: &PairIdentity,
        temperature_k: f64,
    ) -> Option<Result<PairValue, Absent>> {
        self.first_answer(solute, solvent, |data, turned| {
            let series = &data.dilutions[usize::from(turned)];
            dilution_at(series, temperature_k)
        })
    }

    /// Excess volume in m³/mol of a binary mixture at a mole fraction of the
    /// first component and a temperature in K: as measured there, or
    /// interpolated linearly between measured temperatures, or measured within
    /// 5 K. `None` where nothing is measured of the pair.
    ///
    /// # Errors
    ///
    /// Temperature or composition lie outside what is measured.
    pub fn excess_volume(
        &self,
        first: &PairIdentity,
        second: &PairIdentity,
        x1: f64,
        temperature_k: f64,
    ) -> Option<Result<PairValue, Absent>> {
        self.first_answer(first, second, |data, turned| {
            volume_at(&data.volumes, turned, x1, temperature_k)
        })
    }

    /// The parameter sets of a model, for `first` as component 1 and `second`
    /// as component 2 whatever order the table has. `None` where there are none.
    pub fn activity_parameters(
        &self,
        first: &PairIdentity,
        second: &PairIdentity,
        model: PairModel,
    ) -> Option<FoundParameters> {
        self.search(first, second)
            .map(|(data, turned, flags)| {
                let of_model = data
                    .parameters
                    .iter()
                    .filter(|set| set.parameters.model() == model);
                let sets = of_model
                    .map(|set| if turned { set.reversed() } else { set.clone() })
                    .collect();
                FoundParameters { sets, flags }
            })
            .find(|found| !found.sets.is_empty())
    }

    /// The pairs that two molecules answer to, the best match first; told with
    /// each: whether the first molecule is component 2 there.
    fn search(
        &self,
        first: &PairIdentity,
        second: &PairIdentity,
    ) -> impl Iterator<Item = (&PairData, bool, Flags)> {
        first.members().flat_map(move |(one, of_one)| {
            second.members().filter_map(move |(other, of_other)| {
                let members = (one.min(other), one.max(other));
                let data = self.by_members.get(&members)?;
                Some((data, one > other, of_one.union(of_other)))
            })
        })
    }

    /// The first value that a pair gives, else the first reason.
    fn first_answer(
        &self,
        first: &PairIdentity,
        second: &PairIdentity,
        value: impl Fn(&PairData, bool) -> Option<Result<PairValue, Absent>>,
    ) -> Option<Result<PairValue, Absent>> {
        let mut why_not = None;
        for (data, turned, flags) in self.search(first, second) {
            match value(data, turned) {
                None => {}
                Some(Ok(mut found)) => {
                    found.flags = found.flags.union(flags);
                    return Some(Ok(found));
                }
                Some(Err(reason)) => {
                    why_not.get_or_insert(Err(reason));
                }
            }
        }
        why_not
    }
}

impl<'a> PairEntry<'a> {
    /// Name of component 1.
    pub fn first(self) -> &'a Arc<str> {
        self.pairs.members.name(self.members.0)
    }

    /// Name of component 2.
    pub fn second(self) -> &'a Arc<str> {
        self.pairs.members.name(self.members.1)
    }

    /// γ∞ of component 1 in 2 and of 2 in 1, by rising temperature.
    pub fn dilutions(self) -> [&'a [Dilution]; 2] {
        self.data.dilutions.each_ref().map(Vec::as_slice)
    }

    /// Excess volumes of 1 and 2, by rising temperature.
    pub fn excess_volumes(self) -> &'a [ExcessVolume] {
        &self.data.volumes
    }

    /// Parameters of activity models for 1 and 2, in the order of the table.
    pub fn activity_parameters(self) -> &'a [ActivityParameters] {
        &self.data.parameters
    }

    /// Whether a molecule is one of the two.
    pub fn names(self, identity: &PairIdentity) -> bool {
        let (first, second) = self.members;
        identity
            .members()
            .any(|(member, _)| member == first || member == second)
    }
}

fn dilution_at(series: &[Dilution], temperature_k: f64) -> Option<Result<PairValue, Absent>> {
    if series.is_empty() {
        return None;
    }
    let of = |one: &Dilution| one.temperature_k;
    let found = match place(series, of, temperature_k, DILUTION_NEARBY_K) {
        None => Err(measured_only("gamma infinity", series.iter().map(of))),
        Some(Place::One(one)) => Ok(PairValue {
            value: one.ln_gamma,
            temperatures_k: (one.temperature_k, one.temperature_k),
            uncertainty: one.uncertainty,
            flags: Flags::NONE,
            source: Arc::clone(&one.source),
        }),
        Some(Place::Between(low, high)) => {
            let inverse = |t: f64| 1.0 / t;
            let share = (inverse(temperature_k) - inverse(low.temperature_k))
                / (inverse(high.temperature_k) - inverse(low.temperature_k));
            Ok(PairValue {
                value: low.ln_gamma + share * (high.ln_gamma - low.ln_gamma),
                temperatures_k: (low.temperature_k, high.temperature_k),
                uncertainty: low
                    .uncertainty
                    .zip(high.uncertainty)
                    .map(|(low, high)| low.max(high)),
                flags: Flags::NONE,
                source: both(&low.source, &high.source),
            })
        }
    };
    Some(found)
}

fn volume_at(
    series: &[ExcessVolume],
    turned: bool,
    x1: f64,
    temperature_k: f64,
) -> Option<Result<PairValue, Absent>> {
    if series.is_empty() {
        return None;
    }
    let Some(found) = place(
        series,
        ExcessVolume::temperature_k,
        temperature_k,
        VOLUME_NEARBY_K,
    ) else {
        let temperatures = series.iter().map(ExcessVolume::temperature_k);
        return Some(Err(measured_only("excess volume", temperatures)));
    };
    let (low, high) = match found {
        Place::One(one) => (one, one),
        Place::Between(low, high) => (low, high),
    };
    let x1 = if turned { 1.0 - x1 } else { x1 };
    if let Some(short) = [low, high].into_iter().find(|one| !one.covers(x1)) {
        let (from, to) = match turned {
            true => short.reversed().x1_range,
            false => short.x1_range,
        };
        let reason = format!(
            "excess volume is measured from {} to {} mole fraction of the first component only",
            number::short(from),
            number::short(to)
        );
        return Some(Err(Absent::Because(reason.into())));
    }
    let span_k = high.temperature_k - low.temperature_k;
    let share = if span_k > 0.0 {
        (temperature_k - low.temperature_k) / span_k
    } else {
        0.0
    };
    Some(Ok(PairValue {
        value: low.at(x1) + share * (high.at(x1) - low.at(x1)),
        temperatures_k: (low.temperature_k, high.temperature_k),
        uncertainty: None,
        flags: Flags::NONE,
        source: both(&low.source, &high.source),
    }))
}

fn measured_only(what: &str, temperatures_k: impl Iterator<Item = f64>) -> Absent {
    let all: Vec<String> = temperatures_k.map(|t| format!("{t} K")).collect();
    Absent::Because(format!("{what} is measured at {} only", all.join(", ")).into())
}
