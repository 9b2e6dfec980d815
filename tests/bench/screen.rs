//! Whole screening rows: rows a second through a plan, and through to the files.

use std::hint::black_box;
use std::path::Path;
use std::sync::Arc;

use criterion::{Criterion, Throughput, criterion_group, criterion_main};
use groupsmith::brief::{Brief, Job};
use groupsmith::evaluate::{CATALOG, Library, Plan, Scratch};
use groupsmith::mixture::Slips;
use groupsmith::run::{BriefRecord, Fingerprint, Quiet, RunRecord, StopFlag, TablesRecord};
use groupsmith::screen::{Batch, Columns, Pool, Screening, Stated};

/// What a row holds beside its three breakdowns, two keys and all properties:
/// γ∞ of two keys and what follows from it.
const BRIEF: &str = r#"
title = "rows"
[mixture]
components = ["acetone", "methanol"]
temperature = "328.5 K"
[pool]
file = "solvents.csv"
[[target]]
figure = "boiling_point"
at_least = "367 K"
[[target]]
figure = "relative_volatility_infinite_dilution"
prefer = "high"
worst = 1.5
best = 5.0
"#;

fn plan(use_measured: bool) -> Plan {
    let mut brief = Brief::read_for(BRIEF, "rows.toml", &CATALOG, Job::Screen)
        .expect("the brief above is sound");
    brief.folder =
        Path::new(env!("CARGO_MANIFEST_DIR")).join("examples/entrainer-acetone-methanol");
    let library = Library::built_in(Slips::Corrected);
    Plan::new(Arc::new(library), brief, use_measured).expect("the brief above is sound")
}

fn pool(plan: &Plan) -> Pool {
    let path = plan.brief.pool_path().expect("the example has a pool file");
    Pool::open(&path, Columns::default()).expect("the pool is there")
}

fn rows(criterion: &mut Criterion) {
    for (use_measured, name) in [
        (false, "estimates only"),
        (true, "measured before estimates"),
    ] {
        measure(criterion, &plan(use_measured), name);
    }
}

fn measure(criterion: &mut Criterion, plan: &Plan, name: &str) {
    let mut batch = Batch::default();
    pool(plan)
        .read_batch(&mut batch, 100_000)
        .expect("the pool is readable");
    let mut group = criterion.benchmark_group(format!("screen, {name}"));
    group.throughput(Throughput::Elements(batch.len() as u64));
    group.bench_function("evaluate a row", |bencher| {
        let mut scratch = Scratch::new();
        bencher.iter(|| {
            for index in 0..batch.len() {
                if let Ok(Stated::Smiles(smiles)) = batch.line(index).molecule {
                    let _ = black_box(plan.evaluate(&mut scratch, smiles));
                }
            }
        });
    });
    group.bench_function("pool to files, one thread", |bencher| {
        let folder = tempfile::tempdir().expect("a temporary folder");
        let stop = StopFlag::new();
        bencher.iter(|| {
            let screening = Screening {
                plan,
                folder: folder.path(),
                threads: 1,
                stop: &stop,
                listener: &Quiet,
            };
            let tables = TablesRecord {
                fingerprint: Fingerprint::new(),
                of_user: Vec::new(),
                choices: Vec::new(),
            };
            let record = RunRecord::new("screen", BriefRecord::new("brief.toml", ""), tables);
            screening.run(pool(plan), record).expect("the example runs")
        });
    });
    group.finish();
}

criterion_group!(benches, rows);
criterion_main!(benches);
