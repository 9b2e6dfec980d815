//! Syntax tree to a program that finds the pattern in a molecule.

use super::error::{PatternFault, PatternFaultKind};
use super::syntax::{ANY_BOND, ATOM_LIMIT, BondMask, Expression, Test, Tree, parse};
use crate::chem::{Molecule, Neighbor};
use crate::groups::features::{self, FeatureWord};

/// Tests of one atom that all have to hold: every bit of its word must be
/// allowed, and all required bits must be there.
#[derive(Clone, Debug, PartialEq)]
struct Clause {
    allowed: FeatureWord,
    required: FeatureWord,
    /// Positions in [`Environments`] and whether each has to be found.
    environments: Vec<(usize, bool)>,
}

impl Clause {
    fn allows_key(&self, key: usize) -> bool {
        let word = features::key_word(key);
        word & !self.allowed == 0 && self.required & features::KEY_FIELDS & !word == 0
    }
}

/// One atom of the pattern in the order in which it is looked for.
#[derive(Clone, Debug)]
struct Step {
    /// One of these has to hold.
    clauses: Vec<Clause>,
    /// The earlier step it is bonded to (unused in the first step).
    parent: usize,
    bond: BondMask,
    /// Further bonds to earlier steps.
    closures: Vec<(usize, BondMask)>,
}

/// A pattern compiled against a table of [`Environments`].
#[derive(Clone, Debug)]
pub(in crate::groups) struct Program {
    /// Covered atoms first, then context.
    steps: Vec<Step>,
    covered: usize,
}

/// The `$(…)` of one or more patterns; equal ones are kept once.
#[derive(Clone, Debug, Default)]
pub(in crate::groups) struct Environments {
    texts: Vec<String>,
    programs: Vec<Program>,
}

/// What is known of a molecule while patterns are looked for in it.
pub(in crate::groups) struct Search<'a> {
    pub(in crate::groups) molecule: &'a Molecule,
    pub(in crate::groups) words: &'a [FeatureWord],
    environments: &'a Environments,
    /// One for each environment and atom: 0 not looked at yet, 1 is not there, 2 is there.
    seen: &'a mut Vec<u8>,
}

impl<'a> Search<'a> {
    /// A search that has looked at nothing yet; `seen` is scratch memory.
    pub(in crate::groups) fn new(
        molecule: &'a Molecule,
        words: &'a [FeatureWord],
        environments: &'a Environments,
        seen: &'a mut Vec<u8>,
    ) -> Self {
        seen.clear();
        seen.resize(environments.programs.len() * words.len(), 0);
        Self {
            molecule,
            words,
            environments,
            seen,
        }
    }

    /// Whether an atom is the first atom of an environment.
    fn holds(&mut self, environment: usize, atom: u32) -> bool {
        let at = environment * self.words.len() + atom as usize;
        if self.seen[at] == 0 {
            let environments = self.environments;
            let there = environments.programs[environment].is_at(self, atom);
            self.seen[at] = 1 + u8::from(there);
        }
        self.seen[at] == 2
    }
}

/// A compiled pattern that stands alone.
#[derive(Clone, Debug)]
pub struct Pattern {
    program: Program,
    environments: Environments,
}

/// The molecule atoms of the covered pattern atoms, in step order.
type Place = [u32; ATOM_LIMIT];

impl Pattern {
    /// Compiles a pattern.
    ///
    /// # Errors
    ///
    /// Every fault that can be told apart, each with its place and remedy.
    pub fn compile(text: &str) -> Result<Self, Vec<PatternFault>> {
        let mut environments = Environments::default();
        let program = Program::compile(text, &mut environments)?;
        Ok(Self {
            program,
            environments,
        })
    }

    /// Whether the pattern is found anywhere in the molecule.
    pub fn is_in(&self, molecule: &Molecule) -> bool {
        self.count_places(molecule, 1) > 0
    }

    /// In how many places (different sets of covered atoms) the pattern is
    /// found; counting stops at `limit`.
    pub fn count_places(&self, molecule: &Molecule, limit: usize) -> usize {
        let (mut words, mut seen) = (Vec::new(), Vec::new());
        features::words_into(molecule, &mut words);
        let mut search = Search::new(molecule, &words, &self.environments, &mut seen);
        self.program.count_places(&mut search, limit)
    }
}

impl Program {
    /// Compiles a pattern whose environments go to (or are already in) a table.
    pub(in crate::groups) fn compile(
        text: &str,
        environments: &mut Environments,
    ) -> Result<Self, Vec<PatternFault>> {
        Self::from_tree(&parse(text)?, None, environments)
    }

    /// Whether an atom with this key (see [`features::key`]) can be the first one looked for.
    pub(in crate::groups) fn may_start_at(&self, key: usize) -> bool {
        self.steps[0]
            .clauses
            .iter()
            .any(|clause| clause.allows_key(key))
    }

    /// Calls `found` with the covered atoms of every place whose first step is
    /// at `atom`; symmetric places repeat. Stops when `found` returns false.
    pub(in crate::groups) fn find_at(
        &self,
        search: &mut Search<'_>,
        atom: u32,
        found: &mut impl FnMut(&[u32]) -> bool,
    ) {
        if !self.passes(0, search, atom) {
            return;
        }
        let mut place = [0; ATOM_LIMIT];
        place[0] = atom;
        self.extend(1, search, &mut place, found);
    }

    /// Whether the first step of some place is at `atom`.
    pub(in crate::groups) fn is_at(&self, search: &mut Search<'_>, atom: u32) -> bool {
        let mut there = false;
        self.find_at(search, atom, &mut |_| {
            there = true;
            false
        });
        there
    }

    /// In how many places (different sets of covered atoms) the pattern is in
    /// the molecule; counting stops at `limit`.
    pub(in crate::groups) fn count_places(&self, search: &mut Search<'_>, limit: usize) -> usize {
        let mut places: Vec<Vec<u32>> = Vec::new();
        for atom in 0..search.words.len() as u32 {
            self.find_at(search, atom, &mut |place| {
                let mut place = place.to_vec();
                place.sort_unstable();
                if !places.contains(&place) {
                    places.push(place);
                }
                places.len() < limit
            });
            if places.len() >= limit {
                break;
            }
        }
        places.len()
    }

    /// Looks for the covered steps from `step` on; false when the caller is to stop.
    fn extend(
        &self,
        step: usize,
        search: &mut Search<'_>,
        place: &mut Place,
        found: &mut impl FnMut(&[u32]) -> bool,
    ) -> bool {
        if step == self.covered {
            return !self.has_context(step, search, place) || found(&place[..self.covered]);
        }
        let molecule = search.molecule;
        let parent = place[self.steps[step].parent];
        for neighbor in molecule.neighbors(parent) {
            if self.fits(step, search, place, neighbor) {
                place[step] = neighbor.atom;
                if !self.extend(step + 1, search, place, found) {
                    return false;
                }
            }
        }
        true
    }

    /// Whether the context steps from `step` on can be placed.
    fn has_context(&self, step: usize, search: &mut Search<'_>, place: &mut Place) -> bool {
        if step == self.steps.len() {
            return true;
        }
        let molecule = search.molecule;
        let parent = place[self.steps[step].parent];
        molecule.neighbors(parent).iter().any(|neighbor| {
            self.fits(step, search, place, neighbor) && {
                place[step] = neighbor.atom;
                self.has_context(step + 1, search, place)
            }
        })
    }

    fn fits(
        &self,
        step: usize,
        search: &mut Search<'_>,
        place: &Place,
        neighbor: &Neighbor,
    ) -> bool {
        let wanted = &self.steps[step];
        let molecule = search.molecule;
        passes_bond(neighbor, wanted.bond)
            && !place[..step].contains(&neighbor.atom)
            && wanted.closures.iter().all(|&(other, mask)| {
                molecule
                    .neighbors(neighbor.atom)
                    .iter()
                    .any(|bond| bond.atom == place[other] && passes_bond(bond, mask))
            })
            && self.passes(step, search, neighbor.atom)
    }

    fn passes(&self, step: usize, search: &mut Search<'_>, atom: u32) -> bool {
        let word = search.words[atom as usize];
        self.steps[step].clauses.iter().any(|clause| {
            word & !clause.allowed == 0
                && word & clause.required == clause.required
                && clause
                    .environments
                    .iter()
                    .all(|&(environment, wanted)| search.holds(environment, atom) == wanted)
        })
    }

    /// Lays the steps out; `first` forces the first atom of the text to come
    /// first (environments are found from there), otherwise the covered atom
    /// that fewest atoms pass.
    fn from_tree(
        tree: &Tree,
        first: Option<usize>,
        environments: &mut Environments,
    ) -> Result<Self, Vec<PatternFault>> {
        let mut clauses = Vec::with_capacity(tree.atoms.len());
        let mut faults = Vec::new();
        for atom in &tree.atoms {
            let found = normal_form(&atom.tests, true, environments, &mut faults);
            if found.is_empty() && faults.is_empty() {
                faults.push(PatternFault {
                    span: atom.span.clone(),
                    kind: PatternFaultKind::Unsatisfiable,
                });
            }
            clauses.push(found);
        }
        if !faults.is_empty() {
            return Err(faults);
        }

        let selectivity = |atom: usize| -> usize {
            let keys = (0..features::KEYS)
                .filter(|&key| {
                    clauses[atom]
                        .iter()
                        .any(|clause: &Clause| clause.allows_key(key))
                })
                .count();
            // Carbon is common: look for anything else first.
            let carbon = clauses[atom].iter().any(|clause| {
                clause.allowed & features::ELEMENT.bit(crate::chem::Element::C as usize) != 0
            });
            keys + if carbon { features::KEYS } else { 0 }
        };
        let covered: Vec<usize> = (0..tree.atoms.len())
            .filter(|&atom| tree.atoms[atom].covered)
            .collect();
        let start = first.unwrap_or_else(|| {
            covered
                .iter()
                .copied()
                .min_by_key(|&atom| selectivity(atom))
                .expect("the first atom of a pattern is covered")
        });

        let mut order = vec![start];
        let mut steps: Vec<Step> = Vec::new();
        // Covered atoms first, so that context is only ever asked whether it is there.
        for context_too in [false, true] {
            while let Some((position, atom)) =
                order.iter().enumerate().find_map(|(position, &at)| {
                    tree.bonds.iter().find_map(|bond| {
                        let other = other_end(bond.atoms, at)?;
                        let wanted = context_too || tree.atoms[other].covered;
                        (wanted && !order.contains(&other)).then_some((position, other))
                    })
                })
            {
                let _ = position;
                order.push(atom);
            }
        }
        for (position, &atom) in order.iter().enumerate() {
            let mut links = order[..position]
                .iter()
                .enumerate()
                .filter_map(|(earlier, &other)| {
                    tree.bonds
                        .iter()
                        .find(|bond| other_end(bond.atoms, atom) == Some(other))
                        .map(|bond| (earlier, bond.mask))
                });
            let (parent, bond) = links.next().unwrap_or((0, ANY_BOND));
            let closures = links.collect();
            steps.push(Step {
                clauses: clauses[atom].clone(),
                parent,
                bond,
                closures,
            });
        }
        Ok(Self {
            steps,
            covered: covered.len(),
        })
    }
}

fn other_end(atoms: [usize; 2], atom: usize) -> Option<usize> {
    if atoms[0] == atom {
        Some(atoms[1])
    } else if atoms[1] == atom {
        Some(atoms[0])
    } else {
        None
    }
}

fn passes_bond(bond: &Neighbor, mask: BondMask) -> bool {
    let bit = 2 * (bond.order as u8 - 1) + u8::from(bond.in_ring);
    mask & (1 << bit) != 0
}

/// The expression (or its negation) as alternatives of joint tests; those that
/// nothing can pass are dropped.
fn normal_form(
    expression: &Expression,
    wanted: bool,
    environments: &mut Environments,
    faults: &mut Vec<PatternFault>,
) -> Vec<Clause> {
    match expression {
        Expression::Is(Test::Environment(text, tree)) => {
            let known = environments.texts.iter().position(|other| other == text);
            let environment = match known {
                Some(environment) => environment,
                None => match Program::from_tree(tree, Some(0), environments) {
                    Ok(program) => {
                        environments.texts.push(text.clone());
                        environments.programs.push(program);
                        environments.programs.len() - 1
                    }
                    Err(more) => {
                        faults.extend(more);
                        return Vec::new();
                    }
                },
            };
            vec![Clause {
                allowed: features::ALL,
                required: 0,
                environments: vec![(environment, wanted)],
            }]
        }
        Expression::Is(test) => plain(test, wanted),
        Expression::Not(inner) => normal_form(inner, !wanted, environments, faults),
        Expression::All(parts) | Expression::AnyOf(parts) => {
            let all = matches!(expression, Expression::All(_)) == wanted;
            let parts = parts
                .iter()
                .map(|part| normal_form(part, wanted, environments, faults));
            if all {
                let parts: Vec<_> = parts.collect();
                parts.into_iter().fold(vec![EVERYTHING], |sofar, part| {
                    sofar
                        .iter()
                        .flat_map(|one| part.iter().filter_map(|other| both(one, other)))
                        .collect()
                })
            } else {
                parts.flatten().collect()
            }
        }
    }
}

const EVERYTHING: Clause = Clause {
    allowed: features::ALL,
    required: 0,
    environments: Vec::new(),
};

fn both(one: &Clause, other: &Clause) -> Option<Clause> {
    let allowed = one.allowed & other.allowed;
    let required = one.required | other.required;
    let possible = required & !allowed == 0
        && features::ONE_HOT
            .iter()
            .all(|field| allowed & field.mask() != 0);
    possible.then(|| Clause {
        allowed,
        required,
        environments: one
            .environments
            .iter()
            .chain(&other.environments)
            .copied()
            .collect(),
    })
}

fn plain(test: &Test, wanted: bool) -> Vec<Clause> {
    use features::{AROMATIC, CHARGE, CONNECTIONS, DEGREE, ELEMENT, Field, HYDROGENS, RING};
    // A field with exactly one bit set: keep that bit, or all others.
    let one_hot = |field: Field, value: usize| {
        let bit = field.bit(value);
        let keep = if wanted { bit } else { field.mask() & !bit };
        Clause {
            allowed: features::ALL & !field.mask() | keep,
            required: 0,
            environments: vec![],
        }
    };
    match *test {
        Test::Any => {
            if wanted {
                vec![EVERYTHING]
            } else {
                vec![]
            }
        }
        Test::Element(element, None) => vec![one_hot(ELEMENT, element as usize)],
        Test::Element(element, Some(aromatic)) => {
            let is = one_hot(ELEMENT, element as usize);
            let form = one_hot(AROMATIC, usize::from(aromatic));
            if wanted {
                both(&is, &form).into_iter().collect()
            } else {
                vec![is, form]
            }
        }
        Test::Aromatic(aromatic) => vec![one_hot(AROMATIC, usize::from(aromatic))],
        Test::Hydrogens(count) => vec![one_hot(HYDROGENS, usize::from(count))],
        Test::Degree(count) => vec![one_hot(DEGREE, usize::from(count))],
        Test::Connections(count) => vec![one_hot(CONNECTIONS, usize::from(count))],
        Test::Ring(ring) => vec![one_hot(RING, usize::from(ring))],
        Test::Charge(sign) => vec![one_hot(CHARGE, (1 + sign) as usize)],
        Test::RingSize(size) => {
            debug_assert!(
                features::RING_SIZE.contains(usize::from(size) - 3),
                "checked by the parser"
            );
            let bit = features::RING_SIZE.bit(usize::from(size) - 3);
            vec![if wanted {
                Clause {
                    allowed: features::ALL,
                    required: bit,
                    environments: vec![],
                }
            } else {
                Clause {
                    allowed: features::ALL & !bit,
                    required: 0,
                    environments: vec![],
                }
            }]
        }
        Test::Environment(..) => unreachable!("handled by the caller"),
    }
}
