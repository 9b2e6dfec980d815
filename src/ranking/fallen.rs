//! A candidate that is not ranked, and at what it fell.

use crate::evaluate::{Plan, Scratch, Verdict};
use crate::quantity::Dimension;
use crate::report::missed_in_words;
use crate::run::Outcome;

/// At what a candidate fell.
#[derive(Clone, Debug, PartialEq)]
pub struct Fallen {
    /// How it came out.
    pub outcome: Outcome,
    /// Name of the figure or structural limit.
    pub label: String,
    /// Its value in SI, and what it measures.
    pub value: Option<(f64, Dimension)>,
    /// What was wanted, in words.
    pub wanted: String,
    /// Why, in words.
    pub reason: String,
}

impl Fallen {
    /// At what the last candidate of `scratch` fell by a verdict; `None` where it qualified.
    pub fn of(plan: &Plan, scratch: &mut Scratch, verdict: &Verdict) -> Option<Self> {
        let label = |position: usize| {
            let label = plan.labels().nth(position);
            label.expect("verdicts name labels of the plan")
        };
        match verdict {
            Verdict::Qualified { .. } => None,
            &Verdict::Missed {
                label: position,
                value,
                dimension,
                probability,
            } => {
                let (name, wanted) = label(position);
                Some(Self {
                    outcome: Outcome::NotQualified,
                    label: name.to_owned(),
                    value: Some((value, dimension)),
                    wanted: wanted.to_owned(),
                    reason: missed_in_words(name, value, dimension, wanted, probability),
                })
            }
            Verdict::NotAssessable {
                label: position,
                reason,
            } => {
                let (name, wanted) = label(*position);
                Some(Self {
                    outcome: Outcome::NotAssessable,
                    label: name.to_owned(),
                    value: None,
                    wanted: wanted.to_owned(),
                    reason: scratch.explained(plan, reason).to_string(),
                })
            }
        }
    }
}
