//! Compares the mixture room with a folder of reference files and prints the deviations.
//!
//! `cargo run --release --example mixture_reference -- FOLDER`; the folder holds
//! `model_reference_*.csv`, `published_examples.csv`, `gamma_infinity.csv`,
//! `azeotropes.csv`, `lle.csv` and the `reference_predictions_*.csv`, its sibling
//! `pure` holds `vapor_pressure.csv` and `groups_unifac.csv`.

#![expect(
    clippy::print_stdout,
    reason = "a study program reports to standard output"
)]

use std::collections::HashMap;
use std::path::{Path, PathBuf};
use std::time::{Duration, Instant};

use groupsmith::groups::GroupCounts;
use groupsmith::mixture::{
    ActivityModel, AzeotropeKind, Component, Condition, Excess, MixtureError, Slips, Unifac,
    UnifacMixture, Vapor, azeotropes, liquid_phases,
};
use groupsmith::quantity::Absent;

type Fault = Box<dyn std::error::Error>;
type Row = HashMap<String, String>;

fn main() -> Result<(), Fault> {
    let folder = std::env::args_os()
        .nth(1)
        .map(PathBuf::from)
        .ok_or("give the folder of the reference files")?;
    let circulated =
        |model| Unifac::built_in(model, Slips::AsCirculated).ok_or("model without groups");
    let original = circulated(ActivityModel::Unifac)??;
    let dortmund = circulated(ActivityModel::UnifacDortmund)??;
    let dortmund_2006 = circulated(ActivityModel::UnifacDortmund2006)??;
    let by_name = |name: &str| match name {
        "unifac_original" => Some(&original),
        "dortmund_2016" => Some(&dortmund),
        "dortmund_2006" => Some(&dortmund_2006),
        _ => None,
    };

    let begun = Instant::now();
    for model in ActivityModel::ALL {
        drop(Unifac::built_in(model, Slips::Corrected).transpose()?);
    }
    println!(
        "reading the built-in tables of all models: {:.1?}",
        begun.elapsed()
    );
    println!("model values, table as circulated (largest absolute deviation)");
    for name in ["unifac_original", "dortmund_2016", "dortmund_2006"] {
        let unifac = by_name(name).ok_or("unknown model")?;
        let rows = read(&folder, &format!("model_reference_{name}.csv"))?;
        let mut worst = Worst::default();
        for row in &rows {
            worst.add(unifac, row)?;
        }
        println!("{name:>18}: {} rows  {worst}", rows.len());
    }

    let rows = read(&folder, "model_reference_missing_pairs.csv")?;
    let mut refused = 0;
    let mut other = 0;
    for row in &rows {
        let Some(unifac) = by_name(&row["model"]) else {
            other += 1;
            continue;
        };
        match mixture(unifac, row) {
            Err(MixtureError::MissingPair {
                first_number,
                second_number,
                ..
            }) if row["missing_main_group_pairs"]
                .split_whitespace()
                .any(|pair| pair == format!("{first_number}-{second_number}")) =>
            {
                refused += 1;
            }
            other => return Err(format!("{}: {other:?}", row["id"]).into()),
        }
    }
    println!(
        "missing pairs: {} rows, {refused} refused with a listed pair, {other} of models not built in",
        rows.len()
    );

    println!("published examples (deviation, tolerance)");
    for row in &read(&folder, "published_examples.csv")? {
        let unifac = by_name(&row["model"]).ok_or("unknown model")?;
        let deviation = published_deviation(unifac, row)?;
        let tolerance: f64 = row["tolerance"].parse()?;
        let verdict = if deviation <= tolerance {
            "within"
        } else {
            "OUTSIDE"
        };
        println!(
            "  {:<24} {:<22} {deviation:.3e} {tolerance:.1e} {verdict}",
            row["example"], row["quantity"]
        );
    }
    println!("liquids formed by the mixtures of the model files (fractions of 0 left as they are)");
    for name in ["unifac_original", "dortmund_2016", "dortmund_2006"] {
        let unifac = by_name(name).ok_or("unknown model")?;
        liquids_of_reference(
            unifac,
            name,
            &read(&folder, &format!("model_reference_{name}.csv"))?,
        )?;
    }
    gamma_infinity(&folder)?;
    azeotrope_statistics(&folder)?;
    miscibility(&folder)?;
    Ok(())
}

/// How many liquids the reference mixtures form, how often the search fails, and its speed.
fn liquids_of_reference(unifac: &Unifac, name: &str, rows: &[Row]) -> Result<(), Fault> {
    let mut counts = [0_u32; 4];
    let mut worst = 0.0_f64;
    let mut slowest = (Duration::ZERO, String::new());
    let start = Instant::now();
    for row in rows {
        let mixture = mixture(unifac, row)?;
        let n = mixture.components();
        let amounts = numbers(row, "x", n)?;
        let sum: f64 = amounts.iter().sum();
        let x: Vec<f64> = amounts.iter().map(|x| x / sum).collect();
        let mut state = mixture.state(row["T_K"].parse()?)?;
        let begun = Instant::now();
        match liquid_phases(&mut state, &x) {
            Ok(phases) => {
                counts[phases.len()] += 1;
                let mut first = vec![0.0; n];
                let mut other = vec![0.0; n];
                state.ln_gamma(&phases[0].x, &mut first)?;
                for phase in &phases[1..] {
                    state.ln_gamma(&phase.x, &mut other)?;
                    for i in (0..n).filter(|&i| x[i] > 0.0) {
                        let difference =
                            phases[0].x[i].ln() + first[i] - phase.x[i].ln() - other[i];
                        worst = worst.max(difference.abs());
                    }
                }
            }
            Err(fault) => {
                counts[0] += 1;
                println!("    {}: {fault}", row["id"]);
            }
        }
        let took = begun.elapsed();
        if took > slowest.0 {
            slowest = (took, row["id"].clone());
        }
    }
    println!(
        "{name:>18}: one {}, two {}, three {}, failed {}; largest difference of ln activity {worst:.1e}; {:.1?} in all, slowest {:.1?} ({})",
        counts[1],
        counts[2],
        counts[3],
        counts[0],
        start.elapsed(),
        slowest.0,
        slowest.1
    );
    Ok(())
}

/// Errors of ln γ∞ by class, with the group assignments listed beside the reference predictions.
fn gamma_infinity(folder: &Path) -> Result<(), Fault> {
    let measured = by_id(read(folder, "gamma_infinity.csv")?);
    let predicted = read(folder, "reference_predictions_gamma_infinity.csv")?;
    println!("ln gamma at infinite dilution against measurement (suspect rows left out)");
    for (model, slips, groups, reference) in [
        (
            ActivityModel::Unifac,
            Slips::Corrected,
            "original",
            "unifac_original",
        ),
        (
            ActivityModel::UnifacDortmund,
            Slips::Corrected,
            "dortmund",
            "",
        ),
        (
            ActivityModel::UnifacDortmund,
            Slips::AsCirculated,
            "dortmund",
            "dortmund_2016",
        ),
        (
            ActivityModel::UnifacDortmund2006,
            Slips::Corrected,
            "dortmund",
            "",
        ),
    ] {
        let unifac = Unifac::built_in(model, slips).ok_or("model without groups")??;
        let mut errors: HashMap<String, Vec<f64>> = HashMap::new();
        let (mut missing, mut no_groups) = (0, 0);
        let mut from_reference = 0.0_f64;
        for row in &predicted {
            let fact = &measured[&row["id"]];
            let pair = [
                component(&unifac, &row[&format!("groups_solute_{groups}")]),
                component(&unifac, &row[&format!("groups_solvent_{groups}")]),
            ];
            let [Ok(solute), Ok(solvent)] = pair else {
                no_groups += 1;
                continue;
            };
            let Ok(mixture) = unifac.mixture(&[solute, solvent]) else {
                missing += 1;
                continue;
            };
            let mut out = [0.0; 2];
            mixture
                .state(fact["T_K"].parse()?)?
                .ln_gamma(&[0.0, 1.0], &mut out)?;
            if let Some(value) = row
                .get(&format!("ln_gamma_inf_{reference}"))
                .filter(|value| !value.is_empty())
            {
                from_reference = from_reference.max((out[0] - value.parse::<f64>()?).abs());
            }
            if fact["flag"].is_empty() {
                let error = (out[0] - fact["ln_gamma_inf"].parse::<f64>()?).abs();
                errors.entry("all".into()).or_default().push(error);
                errors.entry(fact["class"].clone()).or_default().push(error);
            }
        }
        print!("  {} {slips:?}:", model.id());
        let mut classes: Vec<_> = errors.iter_mut().collect();
        classes.sort_by(|a, b| a.0.cmp(b.0));
        for (class, errors) in classes {
            errors.sort_by(f64::total_cmp);
            let mean = errors.iter().sum::<f64>() / errors.len() as f64;
            print!(
                "  {class} n {} mean {mean:.3} median {:.3};",
                errors.len(),
                errors[errors.len() / 2]
            );
        }
        println!("  missing pair {missing}, no groups {no_groups}");
        if !reference.is_empty() {
            println!("      largest deviation from the reference predictions {from_reference:.1e}");
        }
    }
    Ok(())
}

/// Vapor pressure through the points of `pure/vapor_pressure.csv`: a parabola of ln p in 1/T, least squares.
fn vapor_pressures(folder: &Path) -> Result<HashMap<String, [f64; 3]>, Fault> {
    let mut points: HashMap<String, Vec<(f64, f64)>> = HashMap::new();
    let pure = folder.join("../pure");
    for row in read(&pure, "vapor_pressure.csv")? {
        let pressure = row
            .get("P_Pa")
            .or_else(|| row.get("vapor_pressure_Pa"))
            .or_else(|| row.get("Psat_Pa"))
            .ok_or("no column of the vapor pressure")?;
        points.entry(row["smiles"].clone()).or_default().push((
            1.0 / row["T_K"].parse::<f64>()?,
            pressure.parse::<f64>()?.ln(),
        ));
    }
    let mut fits = HashMap::new();
    for (smiles, points) in points {
        if points.len() < 3 {
            continue;
        }
        // scaled to 1000/T to keep the normal equations well conditioned
        let (mut a, mut b) = (vec![0.0; 9], vec![0.0; 3]);
        for (u, ln_p) in points {
            let powers = [1.0, 1e3 * u, 1e6 * u * u];
            for i in 0..3 {
                b[i] += powers[i] * ln_p;
                for j in 0..3 {
                    a[i * 3 + j] += powers[i] * powers[j];
                }
            }
        }
        if groupsmith::numeric::solve_dense(&mut a, &mut b) {
            fits.insert(smiles, [b[0], b[1], b[2]]);
        }
    }
    Ok(fits)
}

/// Group counts by SMILES from the listed assignments.
fn assignments(folder: &Path) -> Result<HashMap<String, [String; 2]>, Fault> {
    let measured = by_id(read(folder, "gamma_infinity.csv")?);
    let mut groups = HashMap::new();
    for row in read(&folder.join("../pure"), "groups_unifac.csv")? {
        groups.insert(
            row["smiles"].clone(),
            [
                row["unifac_subgroups"].clone(),
                row["dortmund_subgroups"].clone(),
            ],
        );
    }
    for row in read(folder, "reference_predictions_gamma_infinity.csv")? {
        for side in ["solute", "solvent"] {
            groups.insert(
                measured[&row["id"]][&format!("{side}_smiles")].clone(),
                [
                    row[&format!("groups_{side}_original")].clone(),
                    row[&format!("groups_{side}_dortmund")].clone(),
                ],
            );
        }
    }
    Ok(groups)
}

fn azeotrope_statistics(folder: &Path) -> Result<(), Fault> {
    let predictions = read(folder, "reference_predictions_azeotropes.csv")?;
    let fits = vapor_pressures(folder)?;
    let groups = assignments(folder)?;
    println!(
        "azeotropes at 101.325 kPa (vapor pressures fitted to the points of pure/vapor_pressure.csv)"
    );
    for (model, set) in [
        (ActivityModel::Unifac, 0),
        (ActivityModel::UnifacDortmund, 1),
        (ActivityModel::UnifacDortmund2006, 1),
    ] {
        let unifac = Unifac::built_in(model, Slips::Corrected).ok_or("model without groups")??;
        let (mut assessed, mut right, mut kind_right, mut kinds) = (0, 0, 0, 0);
        let (mut t_error, mut x_error, mut t_other) = (Vec::new(), Vec::new(), Vec::new());
        let (mut compared, mut agree) = (0, 0);
        let mut faults: HashMap<String, u32> = HashMap::new();
        for row in read(folder, "azeotropes.csv")? {
            let names = [&row["smiles_1"], &row["smiles_2"]];
            let (Some(p1), Some(p2), Some(g1), Some(g2)) = (
                fits.get(names[0]),
                fits.get(names[1]),
                groups.get(names[0]),
                groups.get(names[1]),
            ) else {
                continue;
            };
            let [Ok(one), Ok(two)] = [component(&unifac, &g1[set]), component(&unifac, &g2[set])]
            else {
                continue;
            };
            let Ok(mixture) = unifac.mixture(&[one, two]) else {
                continue;
            };
            let closure = |i: usize, t: f64| -> Result<f64, Absent> {
                let p = if i == 0 { p1 } else { p2 };
                let u = 1e3 / t;
                Ok((p[0] + u * (p[1] + u * p[2])).exp())
            };
            let vapor = Vapor {
                pressures: &closure,
                associates: &[false, false],
                range_k: (200.0, 600.0),
            };
            let mut state = mixture.state(350.0)?;
            let found = match azeotropes(&mut state, Condition::Pressure(101_325.0), vapor, 350.0) {
                Ok(found) => found,
                Err(fault) => {
                    let name = fault.to_string();
                    *faults.entry(name.chars().take(60).collect()).or_default() += 1;
                    continue;
                }
            };
            assessed += 1;
            let exists = row["azeotrope"] == "yes";
            right += u32::from(found.is_empty() != exists);
            if let Some(other) = predictions.iter().find(|other| {
                other["id"] == row["id"]
                    && other["model"] == "dortmund_2016"
                    && other["status"] == "ok"
                    && model == ActivityModel::UnifacDortmund
            }) {
                compared += 1;
                let theirs = other["azeotrope_predicted"] == "yes";
                let ours_kind = match found.first().map(|one| &one.kind) {
                    Some(AzeotropeKind::Homogeneous) => "homogeneous",
                    Some(AzeotropeKind::Heterogeneous { .. }) => "heterogeneous",
                    None => "none",
                };
                let their_kind = if theirs {
                    other["kind_predicted"].as_str()
                } else {
                    "none"
                };
                if ours_kind == their_kind {
                    agree += 1;
                } else {
                    println!(
                        "    {} {} {}: ours {ours_kind} {:?}, reference {their_kind} {} {}",
                        row["id"],
                        row["name_1"],
                        row["name_2"],
                        found
                            .iter()
                            .map(|one| (one.y1, one.temperature_k))
                            .collect::<Vec<_>>(),
                        other["x_1_predicted"],
                        other["T_az_K_predicted"]
                    );
                }
                if let (Some(one), true) = (found.first(), theirs) {
                    t_other.push(
                        (one.temperature_k - other["T_az_K_predicted"].parse::<f64>()?).abs(),
                    );
                }
            }
            if let (true, Some(one)) = (exists, found.first()) {
                t_error.push((one.temperature_k - row["T_az_K"].parse::<f64>()?).abs());
                if let Ok(x) = row["x_1"].parse::<f64>() {
                    x_error.push((one.y1 - x).abs());
                }
                let heterogeneous = matches!(one.kind, AzeotropeKind::Heterogeneous { .. });
                if !row["kind"].is_empty() {
                    kinds += 1;
                    kind_right += u32::from(heterogeneous == (row["kind"] == "heterogeneous"));
                }
            }
        }
        println!(
            "  {}: {assessed} assessed, presence right {right}, kind right {kind_right} of {kinds}, mean |dT| {:.2} K, mean |dx| {:.3}, faults {faults:?}",
            model.id(),
            mean(&t_error),
            mean(&x_error)
        );
        if compared > 0 {
            println!(
                "    reference predictions: same presence and kind {agree} of {compared}, mean |dT| {:.3} K",
                mean(&t_other)
            );
        }
    }
    Ok(())
}

/// Number of liquids at x = 0.5 against the stated miscibility.
fn miscibility(folder: &Path) -> Result<(), Fault> {
    let groups = assignments(folder)?;
    println!("liquids of equal amounts of two substances against stated miscibility");
    for (model, set) in [
        (ActivityModel::Unifac, 0),
        (ActivityModel::UnifacDortmund, 1),
    ] {
        let unifac = Unifac::built_in(model, Slips::Corrected).ok_or("model without groups")??;
        let mut table = [[0_u32; 2]; 2];
        let mut faults = 0;
        for row in read(folder, "lle.csv")? {
            let stated = match row["miscible"].as_str() {
                "yes" => 1,
                "no" => 0,
                _ => continue,
            };
            let (Some(g1), Some(g2)) = (groups.get(&row["smiles_1"]), groups.get(&row["smiles_2"]))
            else {
                continue;
            };
            let [Ok(one), Ok(two)] = [component(&unifac, &g1[set]), component(&unifac, &g2[set])]
            else {
                continue;
            };
            let Ok(mixture) = unifac.mixture(&[one, two]) else {
                continue;
            };
            let mut state = mixture.state(row["T_K"].parse()?)?;
            // any split counts, wherever it lies
            let mut splits = false;
            for x1 in [0.02, 0.1, 0.3, 0.5, 0.7, 0.9, 0.98] {
                match liquid_phases(&mut state, &[x1, 1.0 - x1]) {
                    Ok(phases) => splits |= phases.len() > 1,
                    Err(fault) => {
                        faults += 1;
                        println!("    {} x1 {x1}: {fault}", row["id"]);
                    }
                }
            }
            table[stated][usize::from(!splits)] += 1;
        }
        println!(
            "  {}: immiscible found {} missed {}, miscible found {} missed {}, faults {faults}",
            model.id(),
            table[0][0],
            table[0][1],
            table[1][1],
            table[1][0]
        );
    }
    Ok(())
}

fn by_id(rows: Vec<Row>) -> HashMap<String, Row> {
    rows.into_iter()
        .map(|row| (row["id"].clone(), row))
        .collect()
}

fn mean(values: &[f64]) -> f64 {
    values.iter().sum::<f64>() / values.len().max(1) as f64
}

/// Largest deviations of one model.
#[derive(Default)]
struct Worst {
    ln_gamma: f64,
    combinatorial: f64,
    residual: f64,
    gibbs: f64,
    enthalpy: f64,
}

impl Worst {
    fn add(&mut self, unifac: &Unifac, row: &Row) -> Result<(), Fault> {
        let mixture = mixture(unifac, row)?;
        let n = mixture.components();
        let x = numbers(row, "x", n)?;
        let mut state = mixture.state(row["T_K"].parse()?)?;
        let mut ln_gamma = vec![0.0; n];
        let (mut combinatorial, mut residual) = (ln_gamma.clone(), ln_gamma.clone());
        state.ln_gamma(&x, &mut ln_gamma)?;
        state.ln_gamma_parts(&x, &mut combinatorial, &mut residual)?;
        let excess = Excess::of(&mut state, &x)?;
        for (worst, ours, name) in [
            (&mut self.ln_gamma, &ln_gamma, "lngamma"),
            (&mut self.combinatorial, &combinatorial, "lngamma_comb"),
            (&mut self.residual, &residual, "lngamma_res"),
        ] {
            for (a, b) in ours.iter().zip(numbers(row, name, n)?) {
                *worst = worst.max((a - b).abs());
            }
        }
        let gibbs: f64 = row["GE_J_per_mol"].parse()?;
        let enthalpy: f64 = row["HE_J_per_mol"].parse()?;
        self.gibbs = self.gibbs.max((excess.gibbs_j_per_mol - gibbs).abs());
        self.enthalpy = self
            .enthalpy
            .max((excess.enthalpy_j_per_mol - enthalpy).abs());
        Ok(())
    }
}

impl std::fmt::Display for Worst {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        write!(
            f,
            "ln gamma {:.1e} (combinatorial {:.1e}, residual {:.1e}), GE {:.1e} J/mol, HE {:.1e} J/mol",
            self.ln_gamma, self.combinatorial, self.residual, self.gibbs, self.enthalpy
        )
    }
}

fn read(folder: &Path, name: &str) -> Result<Vec<Row>, Fault> {
    let path = folder.join(name);
    let mut reader =
        csv::Reader::from_path(&path).map_err(|fault| format!("{}: {fault}", path.display()))?;
    Ok(reader.deserialize().collect::<Result<_, _>>()?)
}

fn numbers(row: &Row, name: &str, n: usize) -> Result<Vec<f64>, Fault> {
    (1..=n)
        .map(|i| Ok(row[&format!("{name}_{i}")].parse()?))
        .collect()
}

fn component(unifac: &Unifac, groups: &str) -> Result<Component, MixtureError> {
    let counts = GroupCounts::from_text(groups).unwrap_or_default();
    unifac.component(&counts)
}

fn mixture(unifac: &Unifac, row: &Row) -> Result<UnifacMixture, MixtureError> {
    let n: usize = row["n"].parse().unwrap_or(0);
    let components: Vec<_> = (1..=n)
        .map(|i| component(unifac, &row[&format!("groups_{i}")]))
        .collect::<Result<_, _>>()?;
    unifac.mixture(&components)
}

fn published_deviation(unifac: &Unifac, row: &Row) -> Result<f64, Fault> {
    let mixture = mixture(unifac, row)?;
    let n = mixture.components();
    let x = numbers(row, "x", n)?;
    let mut state = mixture.state(row["T_K"].parse()?)?;
    if row["quantity"] == "HE J/mol" {
        let printed: f64 = row["printed_1"].parse()?;
        return Ok((Excess::of(&mut state, &x)?.enthalpy_j_per_mol - printed).abs());
    }
    let (mut combinatorial, mut residual) = (vec![0.0; n], vec![0.0; n]);
    state.ln_gamma_parts(&x, &mut combinatorial, &mut residual)?;
    let ours: Vec<f64> = match row["quantity"].as_str() {
        "gamma" => combinatorial
            .iter()
            .zip(&residual)
            .map(|(c, r)| (c + r).exp())
            .collect(),
        "ln gamma combinatorial" => combinatorial,
        "ln gamma residual" => residual,
        other => return Err(format!("unknown quantity {other}").into()),
    };
    Ok(ours
        .iter()
        .zip(numbers(row, "printed", n)?)
        .map(|(a, b)| (a - b).abs())
        .fold(0.0, f64::max))
}
