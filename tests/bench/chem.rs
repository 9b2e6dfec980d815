//! Reading SMILES and making canonical keys, on one core.
//!
//! Input: the molecules of `tests/data/chem/rdkit_reference.csv.gz` of 4 to 16
//! heavy atoms, first spelling (every one aromatic where possible); their number
//! and mean size are printed.

#![expect(
    clippy::print_stderr,
    reason = "the size of the input belongs to the numbers"
)]

use std::hint::black_box;

use criterion::{Criterion, Throughput, criterion_group, criterion_main};
use groupsmith::chem::{Canonicalizer, Keys, Molecule, Reader};

fn lines() -> Vec<String> {
    let packed = std::fs::File::open("tests/data/chem/rdkit_reference.csv.gz")
        .expect("benches run in the folder of the package");
    csv::ReaderBuilder::new()
        .comment(Some(b'#'))
        .from_reader(flate2::read::GzDecoder::new(packed))
        .records()
        .map(|record| {
            let record = record.expect("the reference file is CSV");
            record[7].split(' ').next().unwrap_or_default().to_owned()
        })
        .filter(|line| {
            Molecule::from_smiles(line).is_ok_and(|m| (4..=16).contains(&m.heavy_atoms()))
        })
        .collect()
}

fn chem(c: &mut Criterion) {
    let lines = lines();
    let molecules: Vec<Molecule> = lines
        .iter()
        .map(|line| Molecule::from_smiles(line).expect("filtered above"))
        .collect();
    let atoms: usize = molecules.iter().map(Molecule::heavy_atoms).sum();
    eprintln!(
        "{} molecules, {:.1} heavy atoms each",
        molecules.len(),
        atoms as f64 / molecules.len() as f64
    );
    let mut group = c.benchmark_group("chem");
    group.throughput(Throughput::Elements(lines.len() as u64));
    group.bench_function("read", |b| {
        let mut reader = Reader::new();
        let mut molecule = Molecule::default();
        b.iter(|| {
            for line in &lines {
                reader
                    .read_into(line, &mut molecule)
                    .expect("filtered above");
                black_box(&molecule);
            }
        });
    });
    group.bench_function("keys", |b| {
        let mut canonicalizer = Canonicalizer::new();
        let mut keys = Keys::default();
        b.iter(|| {
            for molecule in &molecules {
                canonicalizer.keys_into(molecule, &mut keys);
                black_box(&keys);
            }
        });
    });
    group.bench_function("molar mass", |b| {
        b.iter(|| {
            molecules
                .iter()
                .map(Molecule::molar_mass_kg_per_mol)
                .sum::<f64>()
        });
    });
    group.finish();
}

criterion_group!(benches, chem);
criterion_main!(benches);
