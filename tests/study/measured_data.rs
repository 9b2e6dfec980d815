//! What the built-in measured data hold, how far their sources disagree, and
//! what the estimates miss by on those substances.
//!
//! Takes the folder to write to and nothing else:
//!
//! ```text
//! cargo run --release --example measured_data -- OUTPUT_FOLDER
//! ```
//!
//! `counts.csv`: substances and values by kind. `disagreements.csv`: recorded
//! disagreements by property. `estimates.csv`: errors of the default methods,
//! measured data off, by family of the table.

use std::collections::BTreeMap;
use std::error::Error;
use std::path::PathBuf;

use groupsmith::data::{Conflict, Substances};
use groupsmith::evaluate::{Library, Profiler, properties};
use groupsmith::mixture::Slips;
use groupsmith::quantity::{Property, REFERENCE_TEMPERATURE_K};

type Fault = Box<dyn Error>;

fn main() -> Result<(), Fault> {
    let mut arguments = std::env::args_os().skip(1);
    let (Some(folder), None) = (arguments.next(), arguments.next()) else {
        return Err("usage: measured_data OUTPUT_FOLDER".into());
    };
    let folder = PathBuf::from(folder);
    std::fs::create_dir_all(&folder)?;
    let library = Library::built_in(Slips::Corrected);
    let substances = library.substances();
    std::fs::write(folder.join("counts.csv"), counts(substances))?;
    std::fs::write(folder.join("disagreements.csv"), disagreements(substances))?;
    std::fs::write(folder.join("estimates.csv"), estimates(&library)?)?;
    Ok(())
}

fn counts(substances: &Substances) -> String {
    let mut by_kind: BTreeMap<&str, [usize; 2]> = BTreeMap::new();
    let mut add = |kind, values: usize| {
        let count = by_kind.entry(kind).or_default();
        count[0] += usize::from(values > 0);
        count[1] += values;
    };
    for substance in substances.iter() {
        add("substance", 1);
        add("vapor-pressure curve", substance.vapor_pressures().len());
        add("density curve", substance.liquid_densities().len());
        for property in Property::ALL {
            let values = substance.constants().iter();
            let of_this = values.filter(|constant| constant.property == property);
            add(property.id(), of_this.count());
        }
    }
    let mut text = String::from("kind,substances,values\n");
    for (kind, [with, values]) in by_kind {
        if values > 0 {
            text.push_str(&format!("{kind},{with},{values}\n"));
        }
    }
    text
}

fn disagreements(substances: &Substances) -> String {
    let mut by_property: BTreeMap<(&str, &str), Vec<(f64, &str)>> = BTreeMap::new();
    for conflict in substances.conflicts() {
        let substance = substances.iter().nth(conflict.substance);
        let name = substance.map_or("", |substance| substance.name());
        // A row without a used value says why there is none.
        if let Some(difference) = difference(conflict) {
            by_property
                .entry((&conflict.property, unit(conflict)))
                .or_default()
                .push((difference, name));
        }
    }
    let mut text = String::from("property,unit,disagreements,median,worst,worst_of\n");
    for ((property, unit), mut differences) in by_property {
        differences.sort_by(|a, b| a.0.total_cmp(&b.0));
        let median = differences[differences.len() / 2].0;
        let &(worst, name) = differences.last().expect("no group is empty");
        text.push_str(&format!(
            "{property},{unit},{},{median:.2},{worst:.2},\"{name}\"\n",
            differences.len()
        ));
    }
    text
}

/// Difference of the two values: in percent for densities, else in their unit;
/// the largest of the three for Hansen parameters.
fn difference(conflict: &Conflict) -> Option<f64> {
    let numbers = |text: &str| -> Vec<f64> {
        text.split_whitespace()
            .filter_map(|number| number.parse().ok())
            .collect()
    };
    let (used, other) = (numbers(&conflict.used), numbers(&conflict.other));
    let largest = used
        .iter()
        .zip(&other)
        .map(|(used, other)| match &*conflict.unit {
            "K" | "MPa^0.5" => (used - other).abs(),
            _ => 100.0 * (other / used - 1.0).abs(),
        })
        .max_by(f64::total_cmp)?;
    Some(largest)
}

fn unit(conflict: &Conflict) -> &str {
    match &*conflict.unit {
        unit @ ("K" | "MPa^0.5") => unit,
        _ => "percent",
    }
}

/// Properties in which the error is a difference in K; the others are in percent.
const IN_KELVIN: [Property; 3] = [
    Property::BoilingPoint,
    Property::MeltingPoint,
    Property::FlashPoint,
];

fn estimates(library: &Library) -> Result<String, Fault> {
    let mut profiler = Profiler::new();
    let mut errors: BTreeMap<(Property, &str, &str), Vec<f64>> = BTreeMap::new();
    let mut asked: BTreeMap<Property, usize> = BTreeMap::new();
    for substance in library.substances().iter() {
        let profile = profiler.profile(library, substance.smiles())?;
        let all = properties(library, &profile, None, REFERENCE_TEMPERATURE_K);
        for property in Property::ALL {
            let Some(Ok(measured)) = substance.measured(property, REFERENCE_TEMPERATURE_K) else {
                continue;
            };
            *asked.entry(property).or_default() += 1;
            let Ok(estimate) = &all[property as usize] else {
                continue;
            };
            let error = if IN_KELVIN.contains(&property) {
                estimate.value - measured.value
            } else {
                100.0 * (estimate.value / measured.value - 1.0)
            };
            for family in ["all", substance.family().unwrap_or("none")] {
                errors
                    .entry((property, estimate.method, family))
                    .or_default()
                    .push(error);
            }
        }
    }
    let mut text = String::from(
        "property,method,family,unit,measured,estimated,mean_abs,median_abs,worst_abs,bias\n",
    );
    for ((property, method, family), mut errors) in errors {
        let count = errors.len() as f64;
        let bias = errors.iter().sum::<f64>() / count;
        errors.iter_mut().for_each(|error| *error = error.abs());
        errors.sort_by(f64::total_cmp);
        let mean = errors.iter().sum::<f64>() / count;
        let unit = if IN_KELVIN.contains(&property) {
            "K"
        } else {
            "percent"
        };
        let measured = match family {
            "all" => asked[&property].to_string(),
            _ => String::new(),
        };
        text.push_str(&format!(
            "{},{method},{family},{unit},{measured},{},{mean:.2},{:.2},{:.2},{bias:+.2}\n",
            property.id(),
            errors.len(),
            errors[errors.len() / 2],
            errors[errors.len() - 1],
        ));
    }
    Ok(text)
}
