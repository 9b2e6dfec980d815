//! Group sets: every pattern at work, the papers' examples, conservation of
//! atoms, independence of the numbering.

use std::collections::BTreeSet;

use groupsmith::chem::{Composition, Molecule};
use groupsmith::groups::{Breakdown, Breaker, Coverage, GroupCounts, GroupSet, Pattern, SetId};
use proptest::prelude::*;

const PRINTED_EXAMPLES: &str = include_str!("../data/groups/printed_examples.csv");
const AGREED: &str = include_str!("../data/groups/agreed_breakdowns.csv");
const DIVERSE: &str = include_str!("../data/groups/diverse_molecules.csv");

fn set(id: &str) -> GroupSet {
    let id = SetId::from_id(id).unwrap_or_else(|| panic!("no set `{id}`"));
    GroupSet::built_in(id).unwrap_or_else(|error| panic!("{error}"))
}

fn sets() -> Vec<GroupSet> {
    SetId::ALL.into_iter().map(|id| set(id.id())).collect()
}

fn read(smiles: &str) -> Molecule {
    Molecule::from_smiles(smiles).unwrap_or_else(|error| panic!("{smiles}: {error}"))
}

fn break_down(molecule: &Molecule, set: &GroupSet) -> Breakdown {
    let mut breaker = Breaker::new();
    breaker.load(molecule);
    breaker.breakdown(molecule, set)
}

pub(crate) fn rows<const N: usize>(text: &str, columns: [&str; N]) -> Vec<[String; N]> {
    let mut reader = csv::Reader::from_reader(text.as_bytes());
    let heads = reader.headers().expect("test data has heads").clone();
    let places = columns.map(|column| {
        heads
            .iter()
            .position(|head| head == column)
            .unwrap_or_else(|| panic!("test data has no column {column}"))
    });
    reader
        .records()
        .map(|row| {
            let row = row.expect("test data is CSV");
            places.map(|place| row[place].to_owned())
        })
        .collect()
}

/// Compares `set,name,smiles,groups` rows with the breakdowns; all faults at once.
fn assert_breakdowns(text: &str, at_least: usize) {
    let cases = rows(text, ["set", "name", "smiles", "groups"]);
    assert!(cases.len() >= at_least, "{} rows", cases.len());
    let sets = sets();
    let mut faults = Vec::new();
    for [id, name, smiles, groups] in &cases {
        let set = sets
            .iter()
            .find(|set| set.id() == id)
            .unwrap_or_else(|| panic!("no set `{id}`"));
        let ours = break_down(&read(smiles), set);
        let wanted = GroupCounts::from_text(groups).expect("groups of the test data");
        if ours.coverage != Coverage::Complete || ours.counts != wanted {
            faults.push(format!(
                "{id}: {name} ({smiles}): wanted {wanted}, found {} {:?}",
                ours.counts, ours.coverage
            ));
        }
    }
    assert!(faults.is_empty(), "\n{}", faults.join("\n"));
}

/// Reproduction: the examples the papers print beside their groups.
#[test]
fn printed_examples_are_reproduced() {
    assert_breakdowns(PRINTED_EXAMPLES, 270);
}

/// Regression: breakdowns on which we and an independent assignment agree.
#[test]
fn agreed_breakdowns_stay() {
    assert_breakdowns(AGREED, 300);
}

/// Each row of each pattern table is needed where its example says so.
#[test]
fn every_pattern_is_used_in_its_example() {
    for set in sets() {
        for (gives, text, example, line) in set.patterns() {
            let place = format!("{} line {line}, {text}", set.id());
            let example = example.unwrap_or_else(|| panic!("{place}: no example"));
            let molecule = read(example);
            let ours = break_down(&molecule, &set);
            assert_eq!(ours.coverage, Coverage::Complete, "{place}: {example}");
            assert!(
                ours.pieces.iter().any(|piece| piece.gives == *gives),
                "{place}: {example} is {}",
                ours.counts
            );
            let pattern =
                Pattern::compile(text).unwrap_or_else(|faults| panic!("{place}: {faults:?}"));
            assert!(pattern.is_in(&molecule), "{place}: not found in {example}");
        }
    }
}

/// Every group of a neutral molecule can be found; ions have no pattern.
#[test]
fn every_group_with_a_composition_has_a_pattern() {
    for set in sets() {
        let found: BTreeSet<u16> = set
            .patterns()
            .flat_map(|(gives, ..)| gives.iter().map(|entry| entry.0))
            .collect();
        for group in set.groups() {
            let is_ion = group.doubled_composition.is_none();
            assert_eq!(
                found.contains(&group.number),
                !is_ion,
                "{} {} {}",
                set.id(),
                group.number,
                group.formula
            );
        }
    }
}

/// What the groups add up to, together with the atoms left over, is the molecule.
#[test]
fn atoms_are_conserved() {
    let cases = rows(DIVERSE, ["smiles"]);
    assert!(cases.len() >= 400);
    let sets = sets();
    for [smiles] in &cases {
        let molecule = read(smiles);
        for set in &sets {
            let ours = break_down(&molecule, set);
            assert!(
                matches!(ours.coverage, Coverage::Complete | Coverage::Partial),
                "{} {smiles}: {:?}",
                set.id(),
                ours.coverage
            );
            let mut doubled = Composition::default();
            for (number, count) in ours.counts.iter() {
                let group = set.group(number).expect("a group of the set");
                let atoms = group
                    .doubled_composition
                    .as_ref()
                    .expect("no molecule holds an ion");
                doubled.add_times(atoms, count);
            }
            for &atom in &ours.uncovered {
                let atom = &molecule.atoms()[atom as usize];
                doubled.add(atom.element, 2);
                doubled.add(groupsmith::chem::Element::H, 2 * u16::from(atom.hydrogens));
            }
            let mut wanted = Composition::default();
            wanted.add_times(&molecule.composition(), 2);
            assert_eq!(doubled, wanted, "{} {smiles}: {}", set.id(), ours.counts);

            let mut places: Vec<u32> = ours
                .pieces
                .iter()
                .flat_map(|piece| piece.atoms.iter().copied())
                .chain(ours.uncovered.iter().copied())
                .collect();
            places.sort_unstable();
            let every: Vec<u32> = (0..molecule.atoms().len() as u32).collect();
            assert_eq!(places, every, "{} {smiles}", set.id());
            assert_eq!(
                ours.coverage == Coverage::Complete,
                ours.uncovered.is_empty()
            );
        }
    }
}

/// A spelling by another program, aromatic or not, gives the same groups.
#[test]
fn spelling_does_not_matter() {
    let sets = sets();
    for [smiles, respelled] in rows(DIVERSE, ["smiles", "respelled"]) {
        let (one, other) = (read(&smiles), read(&respelled));
        for set in &sets {
            let (one, other) = (break_down(&one, set), break_down(&other, set));
            let label = format!("{} {smiles} {respelled}", set.id());
            assert_eq!(one.counts, other.counts, "{label}");
            assert_eq!(one.uncovered.len(), other.uncovered.len(), "{label}");
        }
    }
}

/// Kinds of molecules on which the sets differ from one another or from the
/// usual machine assignment; the reasons stand in the pattern tables.
#[test]
fn decided_kinds() {
    for (id, smiles, groups) in [
        // fewest groups, then CH3O before CH2O before CHO
        ("unifac", "CCC(C)OCOC(C)CC", "1:4;2:2;3:1;25:1;26:1"),
        // the ring stays whole
        ("unifac-dortmund", "CCN1CCCCC1", "1:1;35:1;78:5"),
        // hydrogens of a substituted ring ether
        ("unifac-dortmund", "CC1CCCO1", "1:1;25:1;78:2;79:1"),
        ("unifac", "CC1CCCO1", "1:1;2:2;3:1;27:1"),
        // esters count their acid's CH3 or CH2
        ("unifac", "CCOC(=O)C(C)O", "1:2;2:1;3:1;14:1;77:1"),
        ("unifac", "COC(=O)Cc1ccccc1", "1:1;9:5;10:1;22:1"),
        // a lactone ring that counts as aromatic keeps its C=C
        ("unifac", "O=c1ccc2ccccc2o1", "6:1;9:4;10:2;77:1"),
        ("unifac-dortmund", "Cn1ccccc1=O", "6:2;86:1"),
        // kinds the method of Joback and Reid covers
        ("joback", "OC=O", "20:1;26:1"),
        ("joback", "O=C1CCC(=O)O1", "11:2;25:1;28:1"),
        ("joback", "O=C1OCCO1", "11:2;23:1;28:1"),
        ("joback", "CN1CCCC1", "1:1;11:4;33:1"),
    ] {
        let ours = break_down(&read(smiles), &set(id));
        assert_eq!(ours.coverage, Coverage::Complete, "{id} {smiles}");
        assert_eq!(ours.counts.to_string(), groups, "{id} {smiles}");
    }
}

/// Many independent choices, or choices that hang on chain ends, stay cheap:
/// none of these is refused as too ambiguous.
#[test]
fn large_ambiguous_molecules_are_answered() {
    let perfluoro = format!("FC(F)(F){}C(F)(F)F", "C(F)(F)".repeat(40));
    let polyether = format!("COCC{}OC", "OCC".repeat(60));
    let branched = format!("C{}", "C(C(=O)OC(F)(F)Cl)(OCC)".repeat(12));
    for smiles in [
        perfluoro.as_str(),
        polyether.as_str(),
        branched.as_str(),
        "FC1(F)C(F)(F)C(F)(F)C(F)(C(F)(F)C2(F)C(F)(F)C(F)(F)C(F)(F)C3(F)C(F)(F)C(F)(F)C(F)(F)C(F)(F)C32F)C(F)(F)C1(F)F",
        "NCCCN(CCCN(CCCN(CCCN)CCCN)CCCN(CCCN)CCCN)CCCN(CCCN(CCCN)CCCN)CCCN(CCCN)CCCN",
    ] {
        let molecule = read(smiles);
        for set in sets() {
            let ours = break_down(&molecule, &set);
            assert!(
                matches!(ours.coverage, Coverage::Complete | Coverage::Partial),
                "{} {smiles}: {:?}",
                set.id(),
                ours.coverage
            );
        }
    }
    let ours = break_down(&read(&polyether), &set("unifac"));
    assert_eq!(ours.counts.to_string(), "2:62;24:2;25:60");
    let ours = break_down(&read(&perfluoro), &set("unifac-dortmund"));
    assert_eq!(ours.counts.to_string(), "74:2;75:40");
}

/// Kinds for which a set has no group: said so, not forced into others.
#[test]
fn uncovered_kinds_stay_uncovered() {
    for (id, smiles) in [
        ("unifac", "CC(=O)OC(C)=O"),
        ("unifac", "CC1CO1"),
        ("unifac", "COC(=O)OC"),
        ("unifac", "N#Cc1ccccc1"),
        ("unifac", "CC(C)C(=O)C(C)C"),
        ("unifac", "CCl"),
        ("unifac", "CS(C)(=O)=O"),
        ("unifac", "CCOP(=O)(OCC)OCC"),
        ("unifac", "Cn1cccc1"),
        ("unifac", "Br"),
        ("unifac", "C1CCON1"),
        ("unifac", "N=C=O"),
        ("unifac-dortmund", "C[Si](C)(C)O[Si](C)(C)C"),
        ("unifac-dortmund", "CC1COC(=O)O1"),
        ("unifac-dortmund", "c1cc[nH]c1"),
        ("unifac-dortmund", "CNO"),
        ("unifac-dortmund", "C1CCOO1"),
        ("joback", "CS(C)=O"),
        ("joback", "[O-][n+]1ccccc1"),
        ("joback", "C[Si](C)(C)C"),
        ("joback", "O"),
        ("joback", "C"),
        ("joback", "C#N"),
        ("joback", "ClCl"),
    ] {
        let ours = break_down(&read(smiles), &set(id));
        assert_eq!(
            ours.coverage,
            Coverage::Partial,
            "{id} {smiles}: {}",
            ours.counts
        );
    }
}

/// Writes a molecule from a start atom, neighbors in the order of `priority`,
/// every atom in brackets, every bond in its Kekulé order.
fn respell(molecule: &Molecule, start: u32, priority: &[u32]) -> String {
    struct Writer<'a> {
        molecule: &'a Molecule,
        priority: &'a [u32],
        visited: Vec<bool>,
        closed: Vec<bool>,
        open: Vec<Option<u32>>,
        text: String,
    }
    impl Writer<'_> {
        fn bond(&self, bond: u32) -> &'static str {
            ["-", "=", "#"][usize::from(self.molecule.bonds()[bond as usize].kekule) - 1]
        }

        fn close(&mut self, bond: u32) {
            let digit = match self.open.iter().position(|&open| open == Some(bond)) {
                Some(digit) => {
                    self.open[digit] = None;
                    digit
                }
                None => {
                    let digit = self
                        .open
                        .iter()
                        .position(Option::is_none)
                        .expect("fewer than 90 open rings");
                    self.open[digit] = Some(bond);
                    digit
                }
            };
            let order = self.bond(bond);
            self.text.push_str(&format!("{order}%{:02}", digit + 10));
        }

        /// Marks ring bonds by a first walk, in the order the second will take.
        fn mark(&mut self, atom: u32, from: Option<u32>) {
            self.visited[atom as usize] = true;
            for neighbor in self.ordered(atom) {
                if Some(neighbor.1) == from || self.closed[neighbor.1 as usize] {
                    continue;
                }
                if self.visited[neighbor.0 as usize] {
                    self.closed[neighbor.1 as usize] = true;
                } else {
                    self.mark(neighbor.0, Some(neighbor.1));
                }
            }
        }

        fn ordered(&self, atom: u32) -> Vec<(u32, u32)> {
            let mut ordered: Vec<(u32, u32)> = self
                .molecule
                .neighbors(atom)
                .iter()
                .map(|neighbor| (neighbor.atom, neighbor.bond))
                .collect();
            ordered.sort_unstable_by_key(|&(atom, _)| self.priority[atom as usize]);
            ordered
        }

        fn write(&mut self, atom: u32, from: Option<u32>) {
            let it = self.molecule.atoms()[atom as usize];
            self.text.push('[');
            self.text.push_str(it.element.symbol());
            if it.hydrogens > 0 {
                self.text.push_str(&format!("H{}", it.hydrogens));
            }
            if it.charge != 0 {
                self.text.push_str(&format!("{:+}", it.charge));
            }
            self.text.push(']');
            let ordered = self.ordered(atom);
            for &(_, bond) in &ordered {
                if self.closed[bond as usize] {
                    self.close(bond);
                }
            }
            for &(next, bond) in &ordered {
                if Some(bond) != from && !self.closed[bond as usize] {
                    self.text.push('(');
                    let order = self.bond(bond);
                    self.text.push_str(order);
                    self.write(next, Some(bond));
                    self.text.push(')');
                }
            }
        }
    }
    let mut writer = Writer {
        molecule,
        priority,
        visited: vec![false; molecule.atoms().len()],
        closed: vec![false; molecule.bonds().len()],
        open: vec![None; 90],
        text: String::new(),
    };
    writer.mark(start, None);
    writer.write(start, None);
    writer.text
}

/// The same molecule with its atoms in another order, which the seed decides.
pub(crate) fn renumbered(molecule: &Molecule, seed: u64) -> String {
    let atoms = molecule.atoms().len();
    let mut state = seed | 1;
    let priority: Vec<u32> = (0..atoms)
        .map(|_| {
            state ^= state << 13;
            state ^= state >> 7;
            state ^= state << 17;
            (state >> 32) as u32
        })
        .collect();
    respell(molecule, (seed % atoms as u64) as u32, &priority)
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(200))]

    /// Renumbering the atoms changes neither the groups nor what is left over.
    #[test]
    fn numbering_does_not_matter(choice in any::<prop::sample::Index>(), seed in any::<u64>()) {
        let cases = rows(DIVERSE, ["smiles"]);
        let [smiles] = &cases[choice.index(cases.len())];
        let molecule = read(smiles);
        let text = renumbered(&molecule, seed);
        let other = read(&text);
        prop_assert_eq!(other.composition(), molecule.composition());
        for set in &sets() {
            let (one, other) = (break_down(&molecule, set), break_down(&other, set));
            prop_assert_eq!(&one.counts, &other.counts, "{} {} {}", set.id(), smiles, text);
            prop_assert_eq!(one.uncovered.len(), other.uncovered.len());
        }
    }
}
