//! Measured values beside what a model predicts.

use std::collections::{BTreeMap, BTreeSet};

use groupsmith::evaluate::{Library, Profiler};
use groupsmith::groups::SetId;
use groupsmith::mixture::{ActivityModel, ChemicalClass, Component, Likeness};
use groupsmith::run::Fingerprint;

use super::Fault;

/// Folds of the cross-validation.
pub(super) const FOLDS: u64 = 5;

/// Two temperatures nearer than this are one, K.
const NEAR_K: f64 = 2.0;

/// One measured ln γ∞ with its prediction.
pub(super) struct Case {
    pub(super) solute: (Component, ChemicalClass),
    pub(super) solvent: (Component, ChemicalClass),
    pub(super) predicted: f64,
    /// Measured less predicted.
    pub(super) residual: f64,
    pub(super) temperature_k: f64,
    pub(super) fold: u64,
    solute_key: String,
    solvent_key: String,
}

impl Case {
    fn system(&self) -> (&str, &str) {
        let (one, other) = (self.solute_key.as_str(), self.solvent_key.as_str());
        (one.min(other), one.max(other))
    }

    pub(super) fn in_water(&self) -> bool {
        self.solvent.1 == ChemicalClass::Water
    }
}

/// Two solutes in one solvent at one temperature, as positions of cases.
pub(super) struct PairOfCases {
    pub(super) first: usize,
    pub(super) second: usize,
    pub(super) likeness: Likeness,
    /// Such that a solvent counts by the root of its pairs.
    pub(super) weight: f64,
    /// Which solvent, as a number.
    pub(super) solvent: usize,
}

/// Rows that cannot be used.
#[derive(Default)]
pub(super) struct LeftOut {
    pub(super) suspect: usize,
    pub(super) no_groups: usize,
    pub(super) no_pair: usize,
}

/// All values that a model predicts.
pub(super) struct Cases {
    pub(super) model: ActivityModel,
    pub(super) all: Vec<Case>,
    pub(super) pairs: Vec<PairOfCases>,
}

impl Cases {
    pub(super) fn read(
        library: &Library,
        model: ActivityModel,
        text: &str,
    ) -> Result<(Self, LeftOut), Fault> {
        let set = model.group_set().and_then(SetId::from_id);
        let set = set.ok_or("the model has no groups")?;
        let unifac = library.unifac(model).ok_or("the model has no tables")?;
        let mut profiler = Profiler::new();
        let mut left_out = LeftOut::default();
        let mut all = Vec::new();
        for row in csv::Reader::from_reader(text.as_bytes()).deserialize() {
            let row: BTreeMap<String, String> = row?;
            if !row["flag"].is_empty() {
                left_out.suspect += 1;
                continue;
            }
            let solute = profiler.profile(library, &row["solute_smiles"])?;
            let solvent = profiler.profile(library, &row["solvent_smiles"])?;
            let counts = [&solute, &solvent].map(|one| one.complete_counts(library, set));
            let [Ok(of_solute), Ok(of_solvent)] = counts else {
                left_out.no_groups += 1;
                continue;
            };
            let pair = [unifac.component(of_solute)?, unifac.component(of_solvent)?];
            let Ok(mixture) = unifac.mixture(&pair) else {
                left_out.no_pair += 1;
                continue;
            };
            let temperature_k = row["T_K"].parse()?;
            let mut ln_gamma = [0.0; 2];
            mixture
                .state(temperature_k)?
                .ln_gamma(&[0.0, 1.0], &mut ln_gamma)?;
            let [of_solute, of_solvent] = pair.map(|component| {
                let class = unifac.tables().class(&component);
                (component, class)
            });
            let mut case = Case {
                solute: of_solute,
                solvent: of_solvent,
                predicted: ln_gamma[0],
                residual: row["ln_gamma_inf"].parse::<f64>()? - ln_gamma[0],
                temperature_k,
                fold: 0,
                solute_key: solute.keys.constitution,
                solvent_key: solvent.keys.constitution,
            };
            let (one, other) = case.system();
            let hash = Fingerprint::new()
                .with_section("one", one.as_bytes())
                .with_section("other", other.as_bytes());
            // The high bits: the low ones of this hash follow the last bytes.
            case.fold = (hash.value() >> 64) as u64 % FOLDS;
            all.push(case);
        }
        let pairs = pairs(&all);
        Ok((Self { model, all, pairs }, left_out))
    }

    pub(super) fn systems(&self) -> usize {
        let systems: BTreeSet<_> = self.all.iter().map(Case::system).collect();
        systems.len()
    }

    /// Positions of the cases that are wanted.
    pub(super) fn indices(&self, wanted: impl Fn(&Case) -> bool) -> Vec<usize> {
        let all = self.all.iter().enumerate();
        all.filter(|(_, case)| wanted(case))
            .map(|(at, _)| at)
            .collect()
    }
}

/// Different solutes in one solvent at temperatures near each other.
fn pairs(all: &[Case]) -> Vec<PairOfCases> {
    let mut by_solvent: BTreeMap<&str, Vec<usize>> = BTreeMap::new();
    for (at, case) in all.iter().enumerate() {
        by_solvent.entry(&case.solvent_key).or_default().push(at);
    }
    let mut pairs = Vec::new();
    for (solvent, members) in by_solvent.into_values().enumerate() {
        let begin = pairs.len();
        for (position, &first) in members.iter().enumerate() {
            for &second in &members[position + 1..] {
                let (one, other) = (&all[first], &all[second]);
                let near = (one.temperature_k - other.temperature_k).abs() <= NEAR_K;
                if near && one.solute_key != other.solute_key {
                    let likeness = Likeness::of(
                        (&one.solute.0, one.solute.1),
                        (&other.solute.0, other.solute.1),
                    );
                    pairs.push(PairOfCases {
                        first,
                        second,
                        likeness,
                        weight: 0.0,
                        solvent,
                    });
                }
            }
        }
        let weight = 1.0 / ((pairs.len() - begin).max(1) as f64).sqrt();
        for pair in &mut pairs[begin..] {
            pair.weight = weight;
        }
    }
    pairs
}
