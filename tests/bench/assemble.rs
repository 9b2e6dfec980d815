//! Rates of the assembly search: nodes, whole searches, structures drawn.

use std::hint::black_box;
use std::sync::Arc;
use std::time::Duration;

use criterion::{Criterion, Throughput, criterion_group, criterion_main};
use groupsmith::assemble::{Drawer, Job, Limits, Pieces};
use groupsmith::brief::{Brief, Job as Purpose};
use groupsmith::evaluate::{CATALOG, Library, Plan, Quick};
use groupsmith::mixture::Slips;

/// Seventeen open-chain pieces, two to twelve of them, up to six functional groups.
const SEVENTEEN: &str = r#"
[assembly]
pieces = ["CH3", "CH2", "CH", "C", "CH2=CH", "CH2OH", "CHOH", "CH3CO", "CH2CO", "CH3COO", "CH2COO", "CH3O", "CH2O", "CH2NH2", "CH3NH", "CH2CN", "COOH"]
count = { least = 2, most = 12 }
heavy_atoms = { at_least = 2, at_most = 40 }
molar_mass = { at_most = "250 g/mol" }
limits = { functional_groups = 6, functional_kinds = 7, ether = 6, OH = 6, COOH = 6, "C=C" = 6, nitrogen_atoms = 6, branches = 12, quaternary_carbons = 12 }
[[target]]
figure = "boiling_point"
at_least = "350 K"
at_most = "550 K"
must = true
[[target]]
figure = "melting_point"
at_most = "350 K"
must = true
"#;

/// Two keys, by two models.
const KEYS: &str = r#"
[mixture]
components = ["acetone", "methanol"]
temperature = "328.5 K"
model = "unifac-dortmund"
[[target]]
figure = "selectivity_infinite_dilution"
prefer = "high"
worst = 1.0
best = 4.0
"#;

fn plan(text: &str) -> Plan {
    let brief = Brief::read_for(text, "bench.toml", &CATALOG, Purpose::Assemble).expect("sound");
    let library = Arc::new(Library::built_in(Slips::Corrected));
    Plan::new(library, brief, false).expect("sound")
}

fn searches(criterion: &mut Criterion) {
    for (name, text) in [
        ("linear sums", SEVENTEEN.to_owned()),
        ("linear sums and activity", format!("{SEVENTEEN}{KEYS}")),
    ] {
        let plan = plan(&text);
        let pieces = Pieces::built_in(|set| plan.library.set(set)).expect("sound");
        let asked = plan.brief.assembly.as_ref().map(|assembly| &assembly.value);
        let limits = Limits::of(&pieces, asked).expect("sound");
        let job = || {
            let quick = Quick::new(&plan);
            Job::new(&pieces, &limits, quick, plan.library.fitted(), &[]).expect("sound")
        };
        let job = job();
        let (nodes, found) = job.search_all(1000);
        assert!(found.account.scored > 10_000, "{:?}", found.account);
        let mut group = criterion.benchmark_group("search of 17 open-chain pieces");
        group
            .sample_size(10)
            .measurement_time(Duration::from_secs(10));
        group.throughput(Throughput::Elements(nodes));
        group.bench_function(name, |bencher| {
            bencher.iter(|| black_box(job.search_all(1000)));
        });
        group.finish();
    }
}

fn drawings(criterion: &mut Criterion) {
    let library = Library::built_in(Slips::Corrected);
    let pieces = Pieces::built_in(|set| library.set(set)).expect("sound");
    let assembly = |parts: &[(&str, u8)]| -> Vec<(u16, u8)> {
        let find = |name: &str| pieces.find(name).expect("a piece") as u16;
        let mut all: Vec<(u16, u8)> = parts.iter().map(|&(name, n)| (find(name), n)).collect();
        all.sort_unstable();
        all
    };
    let open = assembly(&[
        ("CH3", 4),
        ("CH2", 4),
        ("CH", 2),
        ("CH2O", 1),
        ("CH2COO", 1),
    ]);
    let ring = assembly(&[
        ("cCH2", 3),
        ("cCH", 2),
        ("cCHOH", 1),
        ("CH3", 3),
        ("CH2", 2),
        ("CH", 1),
    ]);
    let aromatic = assembly(&[
        ("ACH", 3),
        ("ACCH2", 2),
        ("ACCH3", 1),
        ("CH3", 2),
        ("CH2", 1),
        ("CH2COO", 1),
    ]);
    let mut group = criterion.benchmark_group("structures drawn");
    for (name, assembly) in [
        ("open chains", open),
        ("saturated rings", ring),
        ("benzene rings", aromatic),
    ] {
        let all = Drawer::new(&pieces).structures(&assembly, usize::MAX);
        assert!(all.complete && all.found > 50, "{name}: {}", all.found);
        group.throughput(Throughput::Elements(all.found));
        let mut drawer = Drawer::new(&pieces);
        group.bench_function(name, |bencher| {
            bencher.iter(|| {
                drawer.forget();
                black_box(drawer.structures(&assembly, usize::MAX))
            });
        });
    }
    group.finish();
}

criterion_group!(benches, searches, drawings);
criterion_main!(benches);
