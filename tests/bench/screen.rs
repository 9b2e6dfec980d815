//! Whole screening rows: rows a second through a plan, and through to the files.

use std::hint::black_box;
use std::path::Path;
use std::sync::Arc;

use criterion::{Criterion, Throughput, criterion_group, criterion_main};
use groupsmith::brief::{Brief, Job};
use groupsmith::evaluate::{CATALOG, Library, Plan, Scratch};
use groupsmith::mixture::Slips;
use groupsmith::run::{BriefRecord, Fingerprint, Quiet, RunRecord, StopFlag, TablesRecord};
use groupsmith::screen::{Batch, Columns, Pool, Screening};

const BRIEF: &str = "examples/entrainer-acetone-methanol/brief.toml";

fn plan(use_measured: bool) -> Plan {
    let file = Path::new(env!("CARGO_MANIFEST_DIR")).join(BRIEF);
    let brief = Brief::load(&file, &CATALOG, Job::Screen).expect("the example is sound");
    let library = Library::built_in(Slips::Corrected);
    Plan::new(Arc::new(library), brief, use_measured).expect("the example is sound")
}

fn pool(plan: &Plan) -> Pool {
    let path = plan.brief.pool_path().expect("the example has a pool file");
    Pool::open(&path, Columns::default()).expect("the pool is there")
}

fn rows(criterion: &mut Criterion) {
    let plan = plan(false);
    let mut batch = Batch::default();
    pool(&plan)
        .read_batch(&mut batch, 100_000)
        .expect("the pool is readable");
    let mut group = criterion.benchmark_group("screen");
    group.throughput(Throughput::Elements(batch.len() as u64));
    group.bench_function("evaluate a row", |bencher| {
        let mut scratch = Scratch::new();
        bencher.iter(|| {
            for index in 0..batch.len() {
                if let Ok(smiles) = batch.line(index).smiles {
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
                plan: &plan,
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
            screening
                .run(pool(&plan), record)
                .expect("the example runs")
        });
    });
    group.finish();
}

criterion_group!(benches, rows);
criterion_main!(benches);
