//! `groupsmith tables pairs`: what the user's pair tables hold.

use super::error::CliError;
use super::output;
use crate::data::pairs::{ActivityParameters, Dilution, InverseLinear, PairEntry, PairParameters};
use crate::evaluate::{Library, Profiler};
use crate::quantity::number::short;
use crate::report::{TextColumn, TextTable};

/// The pairs that name every substance asked about; in full where two are.
pub(super) fn text(library: &Library, asked: &[&str]) -> Result<String, CliError> {
    let mut profiler = Profiler::new();
    let mut wanted = Vec::new();
    for name in asked {
        let (_, profile) = library.find(&mut profiler, name)?;
        wanted.push(library.pairs().identify(&profile.keys));
    }
    let entries: Vec<PairEntry<'_>> = library
        .pairs()
        .iter()
        .filter(|entry| wanted.iter().all(|identity| entry.names(identity)))
        .collect();
    if entries.is_empty() {
        let of = match asked {
            [] => String::new(),
            names => format!(" of {}", names.join(" and ")),
        };
        return Ok(format!(
            "no pair data{of}; none are built in, your own are read from the folder given with --data\n"
        ));
    }
    Ok(match asked.len() {
        2 => entries.iter().map(|&entry| in_full(entry)).collect(),
        _ => overview(&entries),
    })
}

fn overview(entries: &[PairEntry<'_>]) -> String {
    let mut table = TextTable::new([
        TextColumn::text("first"),
        TextColumn::text("second"),
        TextColumn::text("gamma infinity of first"),
        TextColumn::text("of second"),
        TextColumn::text("excess volume"),
        TextColumn::text("parameters"),
    ]);
    let temperatures = |all: &mut dyn Iterator<Item = f64>| {
        let all: Vec<String> = all.map(|t| format!("{t} K")).collect();
        all.join(", ")
    };
    for entry in entries {
        let of = |series: &[Dilution]| temperatures(&mut series.iter().map(|d| d.temperature_k));
        let [first, second] = entry.dilutions();
        let volumes = entry.excess_volumes().iter();
        let mut models: Vec<&str> = entry
            .activity_parameters()
            .iter()
            .map(|set| set.parameters.model().id())
            .collect();
        models.dedup();
        table.add([
            entry.first().to_string(),
            entry.second().to_string(),
            of(first),
            of(second),
            temperatures(&mut volumes.map(|volume| volume.temperature_k())),
            models.join(", "),
        ]);
    }
    table.render(output::width())
}

fn in_full(entry: PairEntry<'_>) -> String {
    let names = [entry.first(), entry.second()];
    let mut text = format!("1: {}\n2: {}\n", names[0], names[1]);
    for (of, series) in entry.dilutions().into_iter().enumerate() {
        for one in series {
            let uncertainty = one
                .uncertainty
                .map_or(String::new(), |u| format!(" (ln gamma to {u})"));
            text.push_str(&format!(
                "  gamma infinity of {} in {} at {} K: {}{uncertainty}  ({})\n",
                names[of],
                names[1 - of],
                one.temperature_k,
                short(one.ln_gamma.exp()),
                one.source
            ));
        }
    }
    for volume in entry.excess_volumes() {
        let coefficients = volume.coefficients_m3_per_mol().iter().enumerate();
        let coefficients: Vec<String> = coefficients
            .map(|(k, a)| format!("A{k} = {}", short(1e6 * a)))
            .collect();
        let (low, high) = volume.x1_range();
        text.push_str(&format!(
            "  excess volume in cm3/mol at {} K, x1 from {} to {}: {}  ({})\n",
            volume.temperature_k(),
            short(low),
            short(high),
            coefficients.join(", "),
            volume.source()
        ));
    }
    for set in entry.activity_parameters() {
        text.push_str(&parameters(set));
    }
    text
}

/// Parameters as they are held: without unit, on natural logarithms.
fn parameters(set: &ActivityParameters) -> String {
    let number = |name: &str, number: InverseLinear| match number {
        InverseLinear {
            constant,
            slope_k: 0.0,
        } => {
            format!("{name} = {}", short(constant))
        }
        InverseLinear {
            constant: 0.0,
            slope_k,
        } => {
            format!("{name} = {} K/T", short(slope_k))
        }
        InverseLinear { constant, slope_k } => {
            let sign = if slope_k < 0.0 { '-' } else { '+' };
            format!(
                "{name} = {} {sign} {} K/T",
                short(constant),
                short(slope_k.abs())
            )
        }
    };
    let numbers = match set.parameters {
        PairParameters::MargulesOne { a } => number("A", a),
        PairParameters::MargulesTwo { a12, a21 } | PairParameters::VanLaar { a12, a21 } => {
            format!("{}, {}", number("A12", a12), number("A21", a21))
        }
        PairParameters::Wilson {
            ln_lambda12,
            ln_lambda21,
        } => format!(
            "{}, {}",
            number("ln Lambda12", ln_lambda12),
            number("ln Lambda21", ln_lambda21)
        ),
        PairParameters::Nrtl {
            tau12,
            tau21,
            alpha,
        } => format!(
            "{}, {}, alpha = {alpha}",
            number("tau12", tau12),
            number("tau21", tau21)
        ),
        PairParameters::Uniquac {
            ln_tau12,
            ln_tau21,
            r,
            q,
        } => format!(
            "{}, {}, r = {} and {}, q = {} and {}",
            number("ln tau12", ln_tau12),
            number("ln tau21", ln_tau21),
            r[0],
            r[1],
            q[0],
            q[1]
        ),
    };
    let (low, high) = set.range_k;
    format!(
        "  {} from {low} K to {high} K: {numbers}  ({})\n",
        set.parameters.model().id(),
        set.source
    )
}
