//! Fits the error models of ln γ∞ and checks them on systems held out.
//!
//! ```text
//! cargo run --release --example fit_activity_errors -- REFERENCE OUTPUT DATE
//! ```
//!
//! REFERENCE holds `gamma_infinity.csv` (columns `solute_smiles`,
//! `solvent_smiles`, `T_K`, `ln_gamma_inf`, `flag`). Into OUTPUT go
//! `activity_errors.csv` (the table of `groups/estimates/`), `coverage.csv`,
//! `correlation.csv` and `tried.csv`. The same input gives the same bytes.
//!
//! Every row that is not flagged as suspect is computed from its two
//! structures: groups, then the model; no measured data are used. Systems
//! (unordered pairs of constitutions) fall into five folds by a hash of their
//! canonical SMILES, so that no system is both fitted and tested.

#![expect(
    clippy::print_stdout,
    reason = "a study program reports to standard output"
)]

mod cases;
mod fit;
mod held_out;

use std::error::Error;
use std::fmt::Write as _;
use std::path::PathBuf;

use groupsmith::evaluate::Library;
use groupsmith::mixture::{ActivityModel, Slips};
use groupsmith::run::Fingerprint;

use cases::{Cases, LeftOut};
use fit::Variant;
use held_out::{Check, Summary};

type Fault = Box<dyn Error>;

/// The models that have an error, in display order.
const MODELS: [ActivityModel; 3] = [
    ActivityModel::Unifac,
    ActivityModel::UnifacDortmund,
    ActivityModel::UnifacDortmund2006,
];

fn main() -> Result<(), Fault> {
    let arguments: Vec<_> = std::env::args().skip(1).collect();
    let [reference, output, date] = &arguments[..] else {
        return Err("usage: fit_activity_errors REFERENCE OUTPUT DATE".into());
    };
    let text = std::fs::read_to_string(PathBuf::from(reference).join("gamma_infinity.csv"))?;
    let output = PathBuf::from(output);
    std::fs::create_dir_all(&output)?;
    let library = Library::built_in(Slips::Corrected);

    let mut body = String::new();
    let mut figures = String::new();
    let mut coverage = String::from(Check::HEAD);
    let mut correlation = String::from(fit::CORRELATION_HEAD);
    let mut tried = String::from(Summary::HEAD);
    for model in MODELS {
        let (cases, left_out) = Cases::read(&library, model, &text)?;
        let LeftOut {
            suspect,
            no_groups,
            no_pair,
        } = left_out;
        println!(
            "{}: {} values of {} systems; left out: {suspect} suspect, {no_groups} without groups, {no_pair} without an interaction",
            model.id(),
            cases.all.len(),
            cases.systems(),
        );
        let fitted = fit::fit(&cases, &cases.indices(|_| true), Variant::CHOSEN)?;
        body.push_str(&fitted.table(Variant::CHOSEN));
        correlation.push_str(&fitted.correlations());
        for variant in Variant::ALL {
            let check = Check::cross_validated(&cases, variant)?;
            let summary = check.summary();
            tried.push_str(&summary.line(model, variant));
            if variant == Variant::CHOSEN {
                coverage.push_str(&check.table());
                writeln!(
                    figures,
                    "# note: {}: {} values of {} systems; held out by system, five folds: {summary}",
                    model.id(),
                    cases.all.len(),
                    cases.systems(),
                )?;
                println!("  {summary}");
            }
        }
    }
    let table = format!(
        "# title: errors of ln gamma at infinite dilution by chemical class of solute and solvent\n\
         # source: fitted by the study fit_activity_errors to values of Brouwer, Kersten, Bargeman, Schuur, Sep. Purif. Technol. 272 (2021) 118727 (compilation of measured activity coefficients; read from a public copy of its data)\n\
         # transcribed: {date}; fitted, not transcribed\n\
         # checked: coverage on systems held out, figures below; results/2026-12-01-activity-errors\n\
         # note: FNV-1a fingerprint of the values fitted to: {}\n\
         {figures}\
         model,term,solute,solvent,value\n-,-,-,-,-\n{body}",
        Fingerprint::of(text.as_bytes()),
    );
    for (name, text) in [
        ("activity_errors.csv", table),
        ("coverage.csv", coverage),
        ("correlation.csv", correlation),
        ("tried.csv", tried),
    ] {
        std::fs::write(output.join(name), text)?;
    }
    Ok(())
}
