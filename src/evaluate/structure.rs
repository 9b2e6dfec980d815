//! Limits on the structure of candidates, bound to sets and patterns.

use super::Library;
use super::error::{PlanCause, PlanFault};
use super::profile::Profile;
use crate::brief::{self, CountRange, Located, Place};
use crate::chem::Element;
use crate::groups::{Coverage, Pattern, SetId};
use crate::quantity::{Absent, Dimension};

/// One structural limit.
#[derive(Clone, Debug)]
pub(super) struct StructureLimit {
    /// What a miss is counted under.
    pub(super) label: String,
    /// What is wanted, in words.
    pub(super) wanted: String,
    rule: Rule,
}

#[derive(Clone, Debug)]
enum Rule {
    Elements {
        allowed: Vec<Element>,
    },
    Forbidden(Element),
    HeavyAtoms(CountRange),
    Rings(CountRange),
    MolarMass {
        low: Option<f64>,
        high: Option<f64>,
    },
    Atoms(Element, CountRange),
    Group {
        set: SetId,
        number: u16,
        count: CountRange,
    },
    Pattern {
        pattern: Box<Pattern>,
        count: CountRange,
    },
}

/// A structural limit that is missed: the value and what it measures.
pub(super) type Missed = (f64, Dimension);

impl StructureLimit {
    /// Whether a molecule keeps to the limit.
    ///
    /// # Errors
    ///
    /// The reason why it cannot be judged (a set does not cover the molecule).
    pub(super) fn check(
        &self,
        library: &Library,
        profile: &Profile,
    ) -> Result<Option<Missed>, Absent> {
        let composition = &profile.facts.composition;
        let counted = |count: u32, range: &CountRange| {
            (!range.contains(count)).then_some((f64::from(count), Dimension::Number))
        };
        Ok(match &self.rule {
            Rule::Elements { allowed } => {
                let others: u32 = Element::ALL
                    .into_iter()
                    .filter(|element| *element != Element::H && !allowed.contains(element))
                    .map(|element| u32::from(composition.count(element)))
                    .sum();
                (others > 0).then_some((f64::from(others), Dimension::Number))
            }
            Rule::Forbidden(element) => {
                let count = composition.count(*element);
                (count > 0).then_some((f64::from(count), Dimension::Number))
            }
            Rule::HeavyAtoms(range) => counted(profile.facts.heavy_atoms, range),
            Rule::Rings(range) => counted(profile.molecule.ring_count() as u32, range),
            Rule::MolarMass { low, high } => {
                let mass = profile.facts.molar_mass_kg_per_mol;
                let within =
                    low.is_none_or(|low| mass >= low) && high.is_none_or(|high| mass <= high);
                (!within).then_some((mass, Dimension::MolarMass))
            }
            Rule::Atoms(element, range) => counted(u32::from(composition.count(*element)), range),
            Rule::Group { set, number, count } => {
                if profile.coverage.of(*set) != Coverage::Complete {
                    return Err(library.not_covered(*set).clone());
                }
                counted(
                    u32::from(profile.counts[*set as usize].count(*number)),
                    count,
                )
            }
            Rule::Pattern { pattern, count } => {
                // One more than the limit is enough to know that it is passed.
                let limit = count.at_most.map_or(usize::MAX, |most| most as usize + 1);
                let limit = limit.max(count.at_least.unwrap_or(0) as usize);
                counted(pattern.count_places(&profile.molecule, limit) as u32, count)
            }
        })
    }
}

/// Binds the `[structure]` table; faults are collected, not the first one only.
pub(super) fn bind(
    library: &Library,
    structure: &brief::Structure,
    faults: &mut Vec<PlanFault>,
) -> Vec<StructureLimit> {
    let mut limits = Vec::new();
    let mut add = |label: String, wanted: String, rule: Rule| {
        limits.push(StructureLimit {
            label,
            wanted,
            rule,
        });
    };
    if let Some(allowed) = &structure.allowed {
        let names: Vec<_> = allowed
            .value
            .iter()
            .filter(|&&element| element != Element::H)
            .map(|element| element.symbol())
            .collect();
        add(
            "structure.elements".into(),
            format!(
                "only {}",
                ["H"]
                    .into_iter()
                    .chain(names)
                    .collect::<Vec<_>>()
                    .join(", ")
            ),
            Rule::Elements {
                allowed: allowed.value.clone(),
            },
        );
    }
    for element in &structure.forbidden {
        let symbol = element.value.symbol();
        add(
            format!("structure.forbidden.{symbol}"),
            format!("no {symbol}"),
            Rule::Forbidden(element.value),
        );
    }
    if let Some(range) = &structure.heavy_atoms {
        add(
            "structure.heavy_atoms".into(),
            words(&range.value, "heavy atoms"),
            Rule::HeavyAtoms(range.value),
        );
    }
    if let Some(range) = &structure.rings {
        add(
            "structure.rings".into(),
            words(&range.value, "rings"),
            Rule::Rings(range.value),
        );
    }
    if let Some(Located {
        value: (low, high), ..
    }) = structure.molar_mass_kg_per_mol
    {
        let end = |word: &str, value: Option<f64>| {
            value.map(|mass| format!("{word} {} g/mol", mass * 1e3))
        };
        let ends: Vec<_> = [end("at least", low), end("at most", high)]
            .into_iter()
            .flatten()
            .collect();
        add(
            "structure.molar_mass".into(),
            ends.join(" and "),
            Rule::MolarMass { low, high },
        );
    }
    for (element, range) in &structure.atoms {
        let symbol = element.value.symbol();
        add(
            format!("structure.atoms.{symbol}"),
            words(range, &format!("{symbol} atoms")),
            Rule::Atoms(element.value, *range),
        );
    }
    for limit in &structure.groups {
        let fault = |place: Place, cause: PlanCause| PlanFault {
            place: Some(place),
            cause,
        };
        let Some(set) = SetId::from_id(&limit.set.value) else {
            let cause = PlanCause::NoSet {
                set: limit.set.value.clone(),
            };
            faults.push(fault(limit.set.place, cause));
            continue;
        };
        let number = limit.number.value;
        let Some(group) = library.set(set).group(number) else {
            faults.push(fault(
                limit.number.place,
                PlanCause::NoGroup {
                    set: set.id(),
                    number,
                },
            ));
            continue;
        };
        add(
            format!("structure.group.{}.{number}", set.id()),
            words(&limit.count, &group.formula),
            Rule::Group {
                set,
                number,
                count: limit.count,
            },
        );
    }
    for limit in &structure.patterns {
        let text = &limit.pattern.value;
        let name = limit.name.as_ref().unwrap_or(text);
        match Pattern::compile(text) {
            Ok(pattern) => add(
                format!("structure.pattern.{name}"),
                words(&limit.count, name),
                Rule::Pattern {
                    pattern: Box::new(pattern),
                    count: limit.count,
                },
            ),
            Err(found) => faults.push(PlanFault {
                place: Some(limit.pattern.place),
                cause: PlanCause::Pattern {
                    pattern: text.clone(),
                    faults: found,
                },
            }),
        }
    }
    limits
}

fn words(range: &CountRange, what: &str) -> String {
    match (range.at_least, range.at_most) {
        (None, None) => format!("any number of {what}"),
        (Some(least), None) => format!("at least {least} {what}"),
        (None, Some(0)) => format!("no {what}"),
        (None, Some(most)) => format!("at most {most} {what}"),
        (Some(least), Some(most)) if least == most => format!("exactly {least} {what}"),
        (Some(least), Some(most)) => format!("{least} to {most} {what}"),
    }
}
