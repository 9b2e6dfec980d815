//! Breakdown into group sets and rules on structures: molecules a second, and the slowest molecule.

use std::hint::black_box;

use criterion::{Criterion, Throughput, criterion_group, criterion_main};
use groupsmith::chem::{Molecule, Reader};
use groupsmith::groups::{Breaker, GroupCounts, GroupSet, SetId};
use groupsmith::stability::{Rules, Scratch};

/// The pool of the examples: real solvents of about nine heavy atoms.
const POOL: &str = include_str!("../../examples/entrainer-acetone-methanol/solvents.csv");

fn lines() -> Vec<String> {
    let mut reader = csv::Reader::from_reader(POOL.as_bytes());
    let heads = reader.headers().expect("the pool has a header").clone();
    let column = heads
        .iter()
        .position(|head| head == "smiles")
        .expect("the pool has SMILES");
    let mut smiles = Reader::new();
    reader
        .records()
        .map(|record| record.expect("the pool is CSV")[column].to_owned())
        .filter(|text| smiles.read(text).is_ok())
        .collect()
}

fn breakdown(criterion: &mut Criterion) {
    let lines = lines();
    let sets = SetId::ALL.map(|set| GroupSet::built_in(set).expect("built-in sets are sound"));
    let mut group = criterion.benchmark_group("groups");
    group.throughput(Throughput::Elements(lines.len() as u64));
    group.bench_function("SMILES to unifac and joback", |bencher| {
        let (mut reader, mut breaker) = (Reader::new(), Breaker::new());
        let (mut molecule, mut counts) = (Molecule::default(), GroupCounts::new());
        bencher.iter(|| {
            for line in &lines {
                reader
                    .read_into(line, &mut molecule)
                    .expect("readable, see above");
                breaker.load(&molecule);
                for set in [SetId::Unifac, SetId::Joback] {
                    black_box(breaker.counts(&molecule, &sets[set as usize], &mut counts));
                }
            }
        });
    });
    for set in SetId::ALL {
        group.bench_function(set.id(), |bencher| {
            let mut reader = Reader::new();
            let molecules: Vec<Molecule> = lines
                .iter()
                .map(|line| reader.read(line).expect("readable, see above"))
                .collect();
            let (mut breaker, mut counts) = (Breaker::new(), GroupCounts::new());
            bencher.iter(|| {
                for molecule in &molecules {
                    breaker.load(molecule);
                    black_box(breaker.counts(molecule, &sets[set as usize], &mut counts));
                }
            });
        });
    }
    group.finish();
}

fn rules(criterion: &mut Criterion) {
    let mut reader = Reader::new();
    let molecules: Vec<Molecule> = lines()
        .iter()
        .map(|line| reader.read(line).expect("readable, see above"))
        .collect();
    let rules = Rules::built_in().expect("built-in rules are sound");
    let mut group = criterion.benchmark_group("stability");
    group.throughput(Throughput::Elements(molecules.len() as u64));
    group.bench_function("broken rules", |bencher| {
        let mut scratch = Scratch::new();
        bencher.iter(|| {
            for molecule in &molecules {
                black_box(rules.broken(&mut scratch, molecule));
            }
        });
    });
    group.finish();
}

criterion_group!(benches, breakdown, rules);
criterion_main!(benches);
