//! Molecules: reading, valence, rings, aromaticity, identity.

use std::collections::{HashMap, HashSet};
use std::sync::LazyLock;
use std::time::Instant;

use groupsmith::chem::{BondOrder, Canonicalizer, Composition, Keys, Molecule, Reader};
use proptest::prelude::*;
use proptest::test_runner::{RngAlgorithm, TestCaseError, TestRng};

fn read(text: &str) -> Molecule {
    Molecule::from_smiles(text).unwrap_or_else(|error| panic!("{text}: {error}"))
}

fn formula(text: &str) -> String {
    read(text).composition().to_string()
}

fn aromatic_atoms(text: &str) -> usize {
    read(text).atoms().iter().filter(|a| a.aromatic).count()
}

#[test]
fn hydrogens_follow_the_valence() {
    for (text, expected) in [
        ("C", "CH4"),
        ("[H][H]", "H2"),
        ("[HH]", "H2"),
        ("O", "H2O"),
        ("[2H]O[2H]", "H2O"),
        ("[H]OC", "CH4O"),
        ("C#N", "CHN"),
        ("CS(C)=O", "C2H6OS"),
        ("CS(=O)(=O)C", "C2H6O2S"),
        ("COP(=O)(OC)OC", "C3H9O4P"),
        ("c1cc[nH]c1", "C4H5N"),
        ("c1ccncc1", "C5H5N"),
        ("c1ccsc1", "C4H4S"),
        ("C[Si](C)(C)O[Si](C)(C)C", "C6H18OSi2"),
        ("CB(O)O", "CH5BO2"),
        ("FS(F)(F)(F)(F)F", "F6S"),
        ("ClCCl", "CH2Cl2"),
        ("C[NH3+].[Cl-]", ""),
        ("C[N+](=O)[O-]", "CH3NO2"),
        ("[C-]#[O+]", "CO"),
        ("N(=O)O", "HNO2"),
        ("BrBr", "Br2"),
    ] {
        if expected.is_empty() {
            assert!(Molecule::from_smiles(text).is_err());
        } else {
            assert_eq!(formula(text), expected, "{text}");
        }
    }
}

#[test]
fn rings_and_aromatic_atoms() {
    for (text, rings, aromatic) in [
        ("c1ccccc1", 1, 6),
        ("C1=CC=CC=C1", 1, 6),
        ("c1ccc2ccccc2c1", 2, 10),
        ("C1=CC=C2C=CC=CC2=C1", 2, 10),
        ("c1ccc2cccc2cc1", 2, 10),
        ("C1=CC=CC=CC=C1", 1, 0),
        ("O=C1C=CC(=O)C=C1", 1, 0),
        ("O=c1cc[nH]cc1", 1, 6),
        ("C1CC1", 1, 0),
        ("C12C3C4C1C5C2C3C45", 5, 0),
        ("c1ccc2c(c1)Cc1ccccc1-2", 3, 12),
        ("c1ccc(-c2ccccc2)cc1", 2, 12),
        ("C1=CC2=CC=CC=C2C=C1", 2, 10),
        ("O=C1OC(=O)C=C1", 1, 0),
    ] {
        let molecule = read(text);
        assert_eq!(molecule.ring_count(), rings, "{text}");
        assert_eq!(aromatic_atoms(text), aromatic, "{text}");
    }
}

#[test]
fn orders_follow_the_model() {
    let toluene = read("CC1=CC=CC=C1");
    let orders: Vec<BondOrder> = toluene.bonds().iter().map(|bond| bond.order).collect();
    assert_eq!(orders[0], BondOrder::Single);
    assert!(
        orders[1..]
            .iter()
            .all(|&order| order == BondOrder::Aromatic)
    );
    assert_eq!(toluene.atoms()[1].ring_sizes, 1 << 6);
    assert_eq!(toluene.neighbors(0).len(), 1);
}

#[test]
fn refusals_name_column_and_reason() {
    for (text, column, reason) in [
        ("", 1, "empty"),
        ("C*", 2, "wildcard"),
        ("CC[*]", 3, "wildcard"),
        ("CN(C)(C)C", 2, "impossible-valence"),
        ("CC(C)(C)(C)C", 2, "impossible-valence"),
        ("CO(C)C", 2, "impossible-valence"),
        ("C1CC", 2, "open-ring-bond"),
        ("C11", 3, "self-ring-bond"),
        ("C12CC12", 6, "doubled-ring-bond"),
        ("C1C1", 4, "doubled-ring-bond"),
        ("C=1CC#1", 7, "ring-bond-order"),
        ("c1cccc1", 1, "no-kekule-form"),
        ("c1ccccccc1", 1, "ambiguous-kekule-form"),
        ("cc", 1, "aromatic-outside-ring"),
        ("C[NH3+]", 2, "net-charge"),
        ("C[CH2]", 2, "radical"),
        ("[O]", 1, "radical"),
        ("[H]", 1, "radical"),
        ("CC.O", 4, "several-components"),
        ("C[Se]C", 2, "unsupported-element"),
        ("[Na+].[Cl-]", 1, "unsupported-element"),
        ("C$C", 3, "quadruple-bond"),
        ("C[15C]", 2, "unsupported-isotope"),
        ("CC(", 4, "syntax"),
        ("CC)", 3, "syntax"),
        ("C[C", 4, "syntax"),
        ("C C", 2, "syntax"),
        ("CX", 2, "syntax"),
        ("C%1C", 4, "syntax"),
        ("F/C(\\Cl)=C/F", 3, "contradicting-directions"),
        ("OCl(=O)(=O)=O", 2, "impossible-valence"),
    ] {
        let error = Molecule::from_smiles(text).expect_err(text);
        assert_eq!(error.reason(), reason, "{text}: {error}");
        assert_eq!(error.column, column, "{text}: {error}");
    }
    let sentence = Molecule::from_smiles("CN(C)(C)C").unwrap_err().to_string();
    assert_eq!(
        sentence,
        "column 2: nitrogen with 4 bonds and no charge is not a possible valence"
    );
}

#[test]
fn keys_of_common_molecules() {
    for (text, constitution, full) in [
        ("OCC", "CCO", "CCO"),
        ("C1=CC=CC=C1C", "Cc1ccccc1", "Cc1ccccc1"),
        ("OC(C)=O", "CC(=O)O", "CC(=O)O"),
        ("[2H]O[2H]", "O", "O([2H])[2H]"),
        ("[H][2H]", "[H][H]", "[H][2H]"),
        ("Cl\\C=C\\Cl", "ClC=CCl", "Cl/C=C/Cl"),
        ("c1cc[nH]c1", "c1ccc[nH]1", "c1ccc[nH]1"),
    ] {
        let keys = read(text).keys();
        let again = read(&keys.full).keys();
        assert_eq!(keys, again, "{text}");
        assert_eq!(keys.constitution, constitution, "{text}");
        if !full.is_empty() {
            assert_eq!(keys.full, full, "{text}");
        }
    }
}

#[test]
fn spellings_of_one_group_agree() {
    for spellings in [
        &["CN(=O)=O", "C[N+](=O)[O-]", "C[N+]([O-])=O"][..],
        &["CS(C)=O", "C[S+](C)[O-]"],
        &["CS(=O)(=O)C", "C[S+2]([O-])([O-])C", "C[S+](=O)([O-])C"],
        &["c1ccn(=O)cc1", "c1cc[n+]([O-])cc1", "O=N1=CC=CC=C1"],
        &["CC#N=O", "CC#[N+][O-]", "C[C-]=[N+]=O"],
        &["C[N+]#[C-]", "CN#C", "CN=[C]", "CN#[C]"],
        &["CN=[N+]=[N-]", "CN=N#N", "C[N-][N+]#N"],
        &["C=[N+]=[N-]", "C=N#N", "[CH2-][N+]#N"],
        &["CP(C)(C)=O", "C[P+](C)(C)[O-]"],
        &["C=N(=O)C", "C=[N+]([O-])C"],
        &["CN=N(=O)C", "CN=[N+]([O-])C"],
        &["N#N=O", "N#[N+][O-]", "[N-]=[N+]=O"],
        &["[C-]#[O+]", "[C]=O"],
        &["C[S@](=O)CC", "C[S@+]([O-])CC"],
    ] {
        let first = read(spellings[0]).keys();
        for spelling in spellings {
            assert_eq!(read(spelling).keys(), first, "{spelling}");
        }
    }
}

#[test]
fn stereo_that_means_something_is_kept() {
    // Same full key within a line, other full key on the next, for each constitution.
    let same = |a: &str, b: &str| {
        let (a_keys, b_keys) = (read(a).keys(), read(b).keys());
        assert_eq!(a_keys.full, b_keys.full, "{a} {b}");
        assert_eq!(a_keys.constitution, b_keys.constitution, "{a} {b}");
    };
    let different = |a: &str, b: &str| {
        let (a_keys, b_keys) = (read(a).keys(), read(b).keys());
        assert_ne!(a_keys.full, b_keys.full, "{a} {b}");
        assert_eq!(a_keys.constitution, b_keys.constitution, "{a} {b}");
    };
    different("Cl/C=C/Cl", "Cl/C=C\\Cl");
    different("Cl/C=C/Cl", "ClC=CCl");
    same("Cl/C=C/Cl", "Cl\\C=C\\Cl");
    same("Cl/C=C/Cl", "C(\\Cl)=C/Cl");
    same("Cl/C([H])=C/Cl", "Cl/C=C/Cl");
    same("Cl/C(=C/Cl)[H]", "[H]/C(Cl)=C\\Cl");
    same("C/C=C(/C)C", "CC=C(C)C");
    same("C[C@H](C)O", "CC(C)O");
    different("C[C@H](N)O", "C[C@@H](N)O");
    same("C[C@H](N)O", "N[C@@H](C)O");
    same("C[C@H](N)O", "[C@H](N)(C)O");
    same("C[C@]([H])(N)O", "C[C@H](N)O");
    same("[H][C@@](C)(N)O", "C[C@H](N)O");
    same("C[C@H]1CC[C@@H](C)CC1", "C[C@@H]1CC[C@H](C)CC1");
    different("C[C@H]1CC[C@@H](C)CC1", "C[C@H]1CC[C@H](C)CC1");
    same("C[C@H]1CCC(C)CC1", "CC1CCC(C)CC1");
    same("O[C@H]1CCCCC1", "OC1CCCCC1");
    different("C[C@H](O)[C@@H](C)O", "C[C@H](O)[C@H](C)O");
    same("C[C@H](O)[C@@H](C)O", "O[C@H](C)[C@@H](O)C");
    same("N/C=N/[H]", "[H]/N=C/N");
    different("N/C=N/[H]", "N/C=N\\[H]");
    different("[2H]C", "C");
    different("[13CH4]", "C");
    same("C1C/C=C/CC1", "C1CC=CCC1");
    different("C1CCC/C=C/CC1", "C1CCC/C=C\\CC1");
    same("C[C@@](F)(Cl)Br", "C[C@](F)(Br)Cl");
    same("C[N@](CC)CCC", "CN(CC)CCC");
    different("C[S@](=O)CC", "C[S@@](=O)CC");
    same("CC=[C@]=CC", "CC=C=CC");
    same("F[C@AL1H](Br)Cl", "FC(Br)Cl");
    different("F/C=C/C=C/F", "F/C=C/C=C\\F");
    same("C[C@@H](O)[C@H](Cl)[C@@H](C)O", "C[C@@H](O)C(Cl)[C@@H](C)O");
    different(
        "C[C@@H](O)[C@H](Cl)[C@H](C)O",
        "C[C@@H](O)[C@@H](Cl)[C@H](C)O",
    );
}

/// One molecule of the reference set.
struct Reference {
    constitution: String,
    formula: String,
    mass_g_per_mol: f64,
    rings: usize,
    ring_atoms: String,
    aromatic_atoms: String,
    hydrogens: String,
    spellings: Vec<String>,
}

fn references() -> Vec<Reference> {
    let packed = std::fs::File::open("tests/data/chem/rdkit_reference.csv.gz").unwrap();
    let mut reader = csv::ReaderBuilder::new()
        .comment(Some(b'#'))
        .from_reader(flate2::read::GzDecoder::new(packed));
    reader
        .records()
        .map(|record| {
            let record = record.unwrap();
            let cell = |index: usize| record[index].to_owned();
            Reference {
                constitution: cell(0),
                formula: cell(1),
                mass_g_per_mol: record[2].parse().unwrap(),
                rings: record[3].parse().unwrap(),
                ring_atoms: cell(4),
                aromatic_atoms: cell(5),
                hydrogens: cell(6),
                spellings: record[7].split(' ').map(str::to_owned).collect(),
            }
        })
        .collect()
}

fn digits<T: Into<u32>>(values: impl Iterator<Item = T>) -> String {
    values
        .map(|value| char::from_digit(value.into(), 10).unwrap())
        .collect()
}

#[test]
fn reference_spellings_collapse_and_molecules_stay_apart() {
    let references = references();
    assert_eq!(references.len(), 2000);
    let mut reader = Reader::new();
    let mut canonicalizer = Canonicalizer::new();
    let mut seen: HashMap<String, &str> = HashMap::new();
    let mut constitutions: HashMap<String, &str> = HashMap::new();
    let mut faults = Vec::new();
    for reference in &references {
        assert_eq!(reference.spellings.len(), 10);
        let mut keys: Option<Keys> = None;
        for spelling in &reference.spellings {
            let molecule = match reader.read(spelling) {
                Ok(molecule) => molecule,
                Err(error) => {
                    faults.push(format!("{spelling}: {error}"));
                    continue;
                }
            };
            let these = canonicalizer.keys(&molecule);
            let again = reader.read(&these.full).map(|m| canonicalizer.keys(&m));
            if again.as_ref() != Ok(&these) {
                faults.push(format!("{spelling}: {these:?} read again gives {again:?}"));
            }
            match &keys {
                None => keys = Some(these),
                Some(first) if *first == these => {}
                Some(first) => faults.push(format!(
                    "{} -> {first:?}; {spelling} -> {these:?}",
                    reference.spellings[0]
                )),
            }
        }
        let Some(keys) = keys else { continue };
        assert!(keys.canonical);
        if let Some(other) = seen.insert(keys.full.clone(), &reference.spellings[0]) {
            faults.push(format!(
                "{} and {other} get one key {}",
                reference.spellings[0], keys.full
            ));
        }
        // Equal constitutions have equal constitution keys, and only they.
        let known = constitutions.insert(keys.constitution.clone(), &reference.constitution);
        if known.is_some_and(|known| known != reference.constitution) {
            faults.push(format!("{} joins two constitutions", keys.constitution));
        }
    }
    let groups: HashSet<&str> = references.iter().map(|r| r.constitution.as_str()).collect();
    assert!(
        faults.is_empty(),
        "{} faults\n{}",
        faults.len(),
        faults.join("\n")
    );
    assert_eq!(groups.len(), constitutions.len());
}

#[test]
fn reference_rings_hydrogens_formula_and_mass_agree() {
    let exceptions = std::fs::read_to_string("tests/data/chem/aromatic_exceptions.csv").unwrap();
    let mut exceptions: HashMap<&str, &str> = exceptions
        .lines()
        .filter(|line| !line.starts_with('#'))
        .skip(1)
        .map(|line| line.split_once(',').unwrap())
        .collect();
    let mut faults = Vec::new();
    for reference in references() {
        let molecule = read(&reference.spellings[0]);
        let atoms = molecule.atoms();
        let mut compare = |what: &str, ours: String, theirs: &str| {
            if ours != theirs {
                let spelling = &reference.spellings[0];
                faults.push(format!("{spelling} {what}: {ours}, RDKit {theirs}"));
            }
        };
        // RDKit puts hydrogen first where there is no carbon; Hill does not.
        let formula = Composition::from_formula(&reference.formula).unwrap();
        compare(
            "formula",
            molecule.composition().to_string(),
            &formula.to_string(),
        );
        compare(
            "rings",
            molecule.ring_count().to_string(),
            &reference.rings.to_string(),
        );
        compare(
            "ring atoms",
            digits(atoms.iter().map(|a| a.in_ring)),
            &reference.ring_atoms,
        );
        compare(
            "hydrogens",
            digits(atoms.iter().map(|a| a.hydrogens)),
            &reference.hydrogens,
        );
        let aromatic = digits(atoms.iter().map(|atom| atom.aromatic));
        let exception = exceptions.remove(molecule.keys().full.as_str());
        if exception.is_none() {
            compare("aromatic atoms", aromatic, &reference.aromatic_atoms);
        } else if aromatic == reference.aromatic_atoms {
            compare("exception", aromatic, "");
        }
        // RDKit carries older atomic weights of B, Si, S and Cl.
        let mass = molecule.molar_mass_kg_per_mol() * 1e3;
        let relative = (mass / reference.mass_g_per_mol - 1.0).abs();
        if relative > 2.2e-4 {
            compare(
                "mass",
                format!("{mass:.3}"),
                &reference.mass_g_per_mol.to_string(),
            );
        }
    }
    assert!(
        faults.is_empty(),
        "{} faults\n{}",
        faults.len(),
        faults.join("\n")
    );
    assert!(exceptions.is_empty(), "no such molecules: {exceptions:?}");
}

/// Writes a molecule in a random order: Kekulé form, every atom in brackets,
/// no isotopes, no marks.
fn respell(molecule: &Molecule, source: &mut TestRng) -> String {
    let atoms = molecule.atoms().len();
    let mut order: Vec<u32> = (0..atoms as u32).collect();
    for last in (1..atoms).rev() {
        order.swap(last, source.random_range(0..=last));
    }
    let rank: Vec<usize> = (0..atoms as u32)
        .map(|atom| order.iter().position(|&other| other == atom).unwrap())
        .collect();
    let mut text = String::new();
    let mut seen = vec![false; atoms];
    let mut numbers: HashMap<u32, usize> = HashMap::new();
    let start = order[0];
    spell_branch(
        molecule,
        start,
        None,
        &rank,
        &mut seen,
        &mut numbers,
        &mut text,
    );
    text
}

fn spell_branch(
    molecule: &Molecule,
    atom: u32,
    by: Option<u32>,
    rank: &[usize],
    seen: &mut [bool],
    numbers: &mut HashMap<u32, usize>,
    text: &mut String,
) {
    let symbol = |order: u8| ["", "", "=", "#"][usize::from(order)];
    if let Some(bond) = by {
        text.push_str(symbol(molecule.bonds()[bond as usize].kekule));
    }
    seen[atom as usize] = true;
    let here = &molecule.atoms()[atom as usize];
    let charge = match here.charge {
        0 => String::new(),
        charge => format!("{charge:+}"),
    };
    text.push_str(&format!("[{}H{}{charge}]", here.element, here.hydrogens));
    let mut neighbors = molecule.neighbors(atom).to_vec();
    neighbors.sort_by_key(|neighbor| rank[neighbor.atom as usize]);
    // Ring bonds of both directions stand at the atom, before its branches:
    // those that a depth-first walk will close are found by walking ahead.
    let mut branches = Vec::new();
    let mut reached = seen.to_vec();
    for neighbor in &neighbors {
        if Some(neighbor.bond) == by {
            continue;
        }
        if seen[neighbor.atom as usize] {
            let number = numbers.remove(&neighbor.bond).unwrap();
            text.push_str(&format!("%{number}"));
        } else if reached[neighbor.atom as usize] {
            let number = (10..100)
                .find(|n| *n != 73 && !numbers.values().any(|used| used == n))
                .unwrap();
            numbers.insert(neighbor.bond, number);
            text.push_str(symbol(molecule.bonds()[neighbor.bond as usize].kekule));
            text.push_str(&format!("%{number}"));
        } else {
            branches.push(*neighbor);
            let mut open = vec![neighbor.atom];
            while let Some(next) = open.pop() {
                if !std::mem::replace(&mut reached[next as usize], true) {
                    open.extend(molecule.neighbors(next).iter().map(|n| n.atom));
                }
            }
        }
    }
    for (index, branch) in branches.iter().enumerate() {
        let is_last = index + 1 == branches.len();
        if !is_last {
            text.push('(');
        }
        spell_branch(
            molecule,
            branch.atom,
            Some(branch.bond),
            rank,
            seen,
            numbers,
            text,
        );
        if !is_last {
            text.push(')');
        }
    }
}

/// Spellings of the reference set.
fn spellings() -> &'static [String] {
    static SPELLINGS: LazyLock<Vec<String>> = LazyLock::new(|| {
        references()
            .into_iter()
            .flat_map(|reference| reference.spellings)
            .collect()
    });
    &SPELLINGS
}

/// Reads, and if that works, checks that the keys are read back as they are.
fn read_and_check(text: &str) -> Result<(), TestCaseError> {
    let Ok(molecule) = Molecule::from_smiles(text) else {
        return Ok(());
    };
    let keys = molecule.keys();
    prop_assert!(keys.canonical);
    for key in [&keys.constitution, &keys.full] {
        match Molecule::from_smiles(key) {
            Ok(again) => {
                let again = again.keys();
                prop_assert_eq!(&again.constitution, &keys.constitution, "{} {}", text, key);
                prop_assert_eq!(&again.full, key, "{}", text);
            }
            Err(error) => prop_assert!(false, "{} gives {}: {}", text, key, error),
        }
    }
    Ok(())
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(cases()))]

    #[test]
    fn keys_do_not_depend_on_the_numbering(index in any::<prop::sample::Index>(), seed in any::<u64>()) {
        let line: &String = index.get(spellings());
        let molecule = read(line);
        let mut bytes = [0; 32];
        bytes[..8].copy_from_slice(&seed.to_le_bytes());
        let mut source = TestRng::from_seed(RngAlgorithm::ChaCha, &bytes);
        let text = respell(&molecule, &mut source);
        let again = Molecule::from_smiles(&text);
        prop_assert!(again.is_ok(), "{} {:?}", text, again);
        let again = again.unwrap();
        prop_assert_eq!(again.keys().constitution, molecule.keys().constitution);
        prop_assert_eq!(again.composition(), molecule.composition());
        prop_assert_eq!(again.ring_count(), molecule.ring_count());
        let aromatic = |m: &Molecule| m.atoms().iter().filter(|a| a.aromatic).count();
        prop_assert_eq!(aromatic(&again), aromatic(&molecule));
    }

    #[test]
    fn no_text_panics(text in "\\PC{0,80}") {
        read_and_check(&text)?;
    }

    #[test]
    fn no_text_of_smiles_characters_panics(
        text in "[CNOSPFBIclnospbrHi\\[\\]()=#$:/\\\\@+\\-.%0-9*]{0,60}"
    ) {
        read_and_check(&text)?;
    }

    #[test]
    fn no_sequence_of_smiles_pieces_panics(
        pieces in prop::collection::vec(prop::sample::select(PIECES), 0..30)
    ) {
        read_and_check(&pieces.concat())?;
    }

    #[test]
    fn changed_lines_are_read_right_or_refused(
        index in any::<prop::sample::Index>(),
        edits in prop::collection::vec((any::<prop::sample::Index>(), 0..3_u8, prop::sample::select(PIECES)), 1..4)
    ) {
        let line: &String = index.get(spellings());
        let mut text = line.clone();
        for (place, kind, piece) in edits {
            if text.is_empty() {
                break;
            }
            let at = place.index(text.len());
            match kind {
                0 => text.insert_str(at, piece),
                1 => {
                    text.remove(at);
                }
                _ => text.replace_range(at..=at, piece),
            }
        }
        read_and_check(&text)?;
    }
}

/// Cases of each property; `PROPTEST_CASES` asks for more.
fn cases() -> u32 {
    std::env::var("PROPTEST_CASES")
        .ok()
        .and_then(|cases| cases.parse().ok())
        .unwrap_or(1000)
}

const PIECES: &[&str] = &[
    "C", "C", "C", "c", "c", "N", "n", "O", "o", "S", "s", "P", "p", "B", "b", "F", "Cl", "(", ")",
    "(", ")", "1", "1", "2", "2", "3", "%10", "%73", "%74", "=", "=", "#", "-", ":", "/", "\\",
    ".", "[nH]", "[C@H]", "[C@@H]", "[C@]", "[C@@]", "[N+]", "[n+]", "[O-]", "[S+]", "[P+]",
    "[C-]", "[2H]", "[H]", "[13C]", "[C@TB1]", "[C@AL1]", "[C@OH3]", "[C@SP2]", "[S@]", "[P@@]",
    "[Si]", "C(=O)", "c1ccccc1", "C1CC1", "/C=C/", "\\C=C/", "[C@H](F)", "C12", "*", "[", "]",
    "[CH4:1]",
];

#[test]
fn ring_numbers_73_and_74_are_told_apart() {
    assert_eq!(
        read("C%73CC%74CCC%73CC%74").keys(),
        read("C1CC2CCC1CC2").keys()
    );
    let all: String = (10..100).map(|n| format!("C%{n}")).collect();
    let error = Molecule::from_smiles(&all).unwrap_err();
    assert_eq!(error.reason(), "ring-numbers");
}

/// SMILES of a graph of carbon atoms along a path through all of them.
fn along_path(atoms: usize, bonds: &[(usize, usize)]) -> String {
    let mut open: Vec<Option<(usize, usize)>> = vec![None; 100];
    let mut text = String::new();
    for atom in 0..atoms {
        text.push('C');
        for &(a, b) in bonds {
            let (first, last) = (a.min(b), a.max(b));
            if last == atom {
                let number = open.iter().position(|o| *o == Some((first, last))).unwrap();
                open[number] = None;
                text.push_str(&format!("%{number}"));
            } else if first == atom {
                let number = (10..73).find(|&n| open[n].is_none()).unwrap();
                open[number] = Some((first, last));
                text.push_str(&format!("%{number}"));
            }
        }
    }
    text
}

#[test]
fn hard_lines_finish() {
    let repeat = |piece: &str, times: usize| piece.repeat(times);
    let prism = |n: usize| {
        // Two rings joined rung by rung; the path zigzags from ring to ring.
        let mut bonds = Vec::new();
        for rung in 0..n {
            let [a, b] = [2 * rung, 2 * rung + 1];
            let next = (rung + 1) % n;
            // The path holds a–b and b–next a.
            let (x, y) = (2 * next, 2 * next + 1);
            bonds.push((a, x));
            bonds.push((b, y));
        }
        bonds.retain(|&(a, b)| a.abs_diff(b) != 1);
        along_path(2 * n, &bonds)
    };
    // A square net on a torus: all atoms alike, many cycles of four.
    let torus = |n: usize| {
        let atoms = n * n;
        let mut bonds: Vec<_> = (0..atoms).map(|atom| (atom, (atom + n) % atoms)).collect();
        bonds.push((atoms - 1, 0));
        along_path(atoms, &bonds)
    };
    let dendrimer =
        |depth: usize| (0..depth).fold("C".to_owned(), |branch, _| format!("C({branch}){branch}"));
    let c60 = std::fs::read_to_string("tests/data/chem/hand_added.smi").unwrap();
    let c60 = c60
        .lines()
        .find(|l| l.ends_with("buckminsterfullerene"))
        .unwrap();
    let c60 = c60.split(' ').next().unwrap().to_owned();
    let cases = [
        ("chain too long", repeat("C", 8192), Some("too-many-atoms")),
        ("longer than 8 KiB", repeat("C", 8193), Some("too-long")),
        ("long chain", repeat("C", 999), None),
        ("open branches", repeat("C(", 900), Some("syntax")),
        (
            "many open branches",
            repeat("C(", 4096),
            Some("too-many-atoms"),
        ),
        ("parentheses", repeat("(", 8192), Some("syntax")),
        ("brackets", repeat("[", 8192), Some("syntax")),
        (
            "doubled ring bonds",
            repeat("C%99", 800),
            Some("doubled-ring-bond"),
        ),
        (
            "ring bond digits",
            format!("C{}", repeat("1", 8000)),
            Some("self-ring-bond"),
        ),
        ("large ring", format!("C1{}C1", repeat("C", 997)), None),
        ("hydrogens", repeat("[H]", 2000), Some("impossible-valence")),
        ("charges", repeat("[N+]", 900), Some("net-charge")),
        ("phenyl groups on a chain", repeat("C(c1ccccc1)", 120), None),
        (
            "phenylene chain",
            format!("{}C", repeat("c1ccc(cc1)", 150)),
            None,
        ),
        ("spiro chain", format!("C{}C", repeat("C1(CC1)", 100)), None),
        ("fused squares", repeat("C1CC1", 199), None),
        ("prism", prism(90), None),
        ("torus", torus(16), None),
        ("buckminsterfullerene", c60, None),
        ("dendrimer", dendrimer(8), None),
        ("tert-butyl chain", repeat("C(C)(C)", 330), None),
        ("polyene", format!("F{}F", repeat("/C=C", 400)), None),
        (
            "ring of double bonds",
            format!("C1{}=C1", repeat("=CC", 300)),
            None,
        ),
        (
            "lower-case ring",
            format!("c1{}c1", repeat("c", 900)),
            Some("ambiguous-kekule-form"),
        ),
        (
            "odd lower-case ring",
            format!("c1{}c1", repeat("c", 899)),
            Some("no-kekule-form"),
        ),
        (
            "centers on a chain",
            format!("C{}C", repeat("[C@H](F)", 300)),
            None,
        ),
        (
            "ring of centers",
            format!("[C@H]1(F){}C1", repeat("[C@H](F)", 300)),
            None,
        ),
        (
            "symmetrical ring of centers",
            format!("[C@H]1(F){}[C@H]1F", repeat("[C@H](F)", 148)),
            None,
        ),
    ];
    // As much stack as a thread of rayon has.
    let run = move || {
        let mut faults = Vec::new();
        for (name, text, reason) in cases {
            let start = Instant::now();
            match (Molecule::from_smiles(&text), reason) {
                (Ok(molecule), None) => {
                    let keys = molecule.keys();
                    assert!(keys.canonical, "{name}");
                    let again =
                        Molecule::from_smiles(&keys.full).unwrap_or_else(|e| panic!("{name}: {e}"));
                    assert_eq!(again.keys(), keys, "{name}");
                }
                (Err(error), Some(reason)) if error.reason() == reason => {}
                (result, _) => faults.push(format!("{name}: {:?}", result.err())),
            }
            // A guard against exponential work, not a measurement.
            assert!(
                start.elapsed().as_secs() < 20,
                "{name} took {:?}",
                start.elapsed()
            );
        }
        assert!(faults.is_empty(), "{}", faults.join("\n"));
    };
    std::thread::Builder::new()
        .stack_size(2 * 1024 * 1024)
        .spawn(run)
        .unwrap()
        .join()
        .unwrap();
}

#[test]
fn marks_of_neighbors_do_not_contradict() {
    // The marks at the carbonyl carbon belong to the double bonds beside it.
    let keys = read("O/C=C\\C(=O)/C(C)=C/C").keys();
    assert_eq!(read(&keys.full).keys(), keys);
    assert!(Molecule::from_smiles("F/C=C\\C(=C(C)C)/C=C/F").is_ok());
}
