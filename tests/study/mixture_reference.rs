//! Compares the mixture room with a folder of reference files and prints the deviations.
//!
//! `cargo run --release --example mixture_reference -- FOLDER`; the folder holds
//! `model_reference_*.csv`, `published_examples.csv`, `gamma_infinity.csv`,
//! `azeotropes.csv` and the two `reference_predictions_*.csv`.

#![expect(
    clippy::print_stdout,
    reason = "a study program reports to standard output"
)]

use std::collections::HashMap;
use std::path::{Path, PathBuf};

use groupsmith::groups::GroupCounts;
use groupsmith::mixture::{
    ActivityModel, Component, Excess, MixtureError, Slips, Unifac, UnifacMixture,
};

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
    Ok(())
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
