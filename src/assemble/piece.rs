//! Pieces and kinds of ends, as read from `groups/pieces/`.

use smallvec::SmallVec;

use super::error::PieceError;
use super::fragment::{Fragment, capped};
use crate::chem::{Composition, Molecule};
use crate::groups::environment::{EnvironmentCounts, EnvironmentReader};
use crate::groups::{Breaker, Coverage, GroupCounts, GroupSet, SetId};
use crate::table::{Row, Table, TableError};

/// Where a piece stands in a molecule.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum Role {
    /// In an open chain or hanging at a ring.
    Chain,
    /// A member of a benzene ring.
    Aromatic,
    /// A member of a saturated ring.
    Ring,
    /// A molecule by itself.
    Whole,
}

impl Role {
    const ALL: [Self; 4] = [Self::Chain, Self::Aromatic, Self::Ring, Self::Whole];

    /// The word in the table of pieces.
    pub const fn id(self) -> &'static str {
        match self {
            Self::Chain => "chain",
            Self::Aromatic => "aromatic",
            Self::Ring => "ring",
            Self::Whole => "whole",
        }
    }
}

/// A kind of end, by its row in `ends.csv`.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub struct Kind(pub u8);

/// Kinds as bits.
pub type Kinds = u64;

impl Kind {
    /// Its bit.
    pub const fn bit(self) -> Kinds {
        1 << self.0
    }
}

/// What is known of a kind of end.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct EndKind {
    /// Its name.
    pub name: String,
    /// In words.
    pub words: String,
    /// Kinds it may be joined to.
    pub joins: Kinds,
    /// For each kind that may be joined to it: those that may not be joined to
    /// another end of the same atom then.
    pub not_beside: Vec<Kinds>,
}

/// A piece.
#[derive(Clone, Debug)]
pub struct Piece {
    /// Its name, as in briefs.
    pub name: String,
    /// Where it stands.
    pub role: Role,
    /// Its drawing; the whole molecule for [`Role::Whole`].
    pub drawing: Drawing,
    /// Kinds of its ends, in the order of the drawing.
    pub ends: SmallVec<[Kind; 4]>,
    /// Its groups by set, `None` where the set has none for it; index with [`SetId`].
    pub groups: [Option<GroupCounts>; SetId::ALL.len()],
    /// Functional groups in it by class, with their number.
    pub classes: SmallVec<[(u8, u8); 2]>,
    /// Why it is off unless asked for; `None` where it is on.
    pub off: Option<String>,
    /// Its atoms, hydrogens included.
    pub composition: Composition,
    /// Its atoms by what they are and what hetero atoms among them are bound to.
    pub environments: EnvironmentCounts,
    /// Line of its row.
    pub line: u64,
}

/// How a piece is drawn.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Drawing {
    /// With open ends.
    Fragment(Fragment),
    /// As a molecule.
    Molecule(String),
}

impl Piece {
    /// Its fragment.
    ///
    /// # Panics
    ///
    /// If it is a whole molecule.
    pub fn fragment(&self) -> &Fragment {
        match &self.drawing {
            Drawing::Fragment(fragment) => fragment,
            Drawing::Molecule(_) => unreachable!("a whole molecule is joined to nothing"),
        }
    }

    /// Atoms that are not hydrogen.
    pub fn heavy_atoms(&self) -> u32 {
        self.composition.heavy_atoms().into()
    }

    /// Atoms it takes in a ring.
    pub fn ring_atoms(&self) -> u32 {
        match &self.drawing {
            Drawing::Fragment(fragment) => fragment.ring_atoms() as u32,
            Drawing::Molecule(_) => 0,
        }
    }

    /// Functional groups of a class.
    pub fn of_class(&self, class: usize) -> u32 {
        let found = self.classes.iter().find(|one| usize::from(one.0) == class);
        found.map_or(0, |one| one.1.into())
    }
}

/// Every piece and kind of end.
#[derive(Clone, Debug)]
pub struct Pieces {
    /// The pieces, in the order of the table.
    pub all: Vec<Piece>,
    /// The kinds of ends.
    pub kinds: Vec<EndKind>,
    /// Names of the classes of functional groups.
    pub classes: Vec<String>,
    /// Assemblies that are a whole molecule with groups of its own, and so are none:
    /// place in the table and count, ascending.
    pub replaced: Vec<Vec<(u16, u8)>>,
}

macro_rules! table {
    ($name:literal) => {
        (
            concat!("groups/pieces/", $name),
            include_str!(concat!("../../groups/pieces/", $name)),
        )
    };
}

/// The built-in files: ends, what may not meet at a carbon, pieces.
const FILES: [(&str, &str); 3] = [
    table!("ends.csv"),
    table!("beside.csv"),
    table!("pieces.csv"),
];

impl Pieces {
    /// The files, for a fingerprint.
    pub const fn texts() -> [(&'static str, &'static str); 3] {
        FILES
    }

    /// The pieces that are built in.
    ///
    /// # Errors
    ///
    /// None unless a built-in file is broken, which the tests rule out.
    pub fn built_in<'s>(sets: impl Fn(SetId) -> &'s GroupSet) -> Result<Self, PieceError> {
        let [ends, beside, pieces] = FILES;
        let mut kinds = read_kinds(&Table::read(ends.0, ends.1)?)?;
        read_beside(&Table::read(beside.0, beside.1)?, &mut kinds)?;
        let mut classes = Vec::new();
        let table = Table::read(pieces.0, pieces.1)?;
        let all = read_pieces(&table, &kinds, &mut classes, sets)?;
        let replaced = read_replaced(&table, &all)?;
        Ok(Self {
            all,
            kinds,
            classes,
            replaced,
        })
    }

    /// The piece of this name.
    pub fn find(&self, name: &str) -> Option<usize> {
        self.all.iter().position(|piece| piece.name == name)
    }

    /// The class of this name.
    pub fn class(&self, name: &str) -> Option<usize> {
        self.classes.iter().position(|class| class == name)
    }

    /// Whether an assembly is a whole molecule with groups of its own.
    pub fn is_replaced(&self, assembly: &[(u16, u8)]) -> bool {
        self.replaced.iter().any(|known| known == assembly)
    }

    /// Whether two ends may be joined.
    pub fn joins(&self, one: Kind, other: Kind) -> bool {
        self.kinds[usize::from(one.0)].joins & other.bit() != 0
    }

    /// Whether two kinds may be joined to ends of one atom of kind `at`.
    pub fn may_meet(&self, at: Kind, one: Kind, other: Kind) -> bool {
        self.kinds[usize::from(at.0)].not_beside[usize::from(one.0)] & other.bit() == 0
    }
}

fn read_kinds(table: &Table) -> Result<Vec<EndKind>, PieceError> {
    let name = table.column("kind")?;
    let words = table.column("words")?;
    let joins = table.column("joins")?;
    let rows: Vec<Row<'_>> = table.rows().collect();
    let names: Vec<&str> = rows.iter().map(|row| row.text(name)).collect();
    let mut kinds: Vec<EndKind> = Vec::with_capacity(rows.len());
    for (at, row) in rows.iter().enumerate() {
        if at >= 64 || names[..at].contains(&names[at]) {
            return Err(row
                .fault(name, "is one kind too many, or stands twice")
                .into());
        }
        kinds.push(EndKind {
            name: row.required_text(name)?.to_owned(),
            words: row.required_text(words)?.to_owned(),
            joins: kinds_of(*row, joins, &names)?,
            not_beside: vec![0; rows.len()],
        });
    }
    // a join is stated once
    for one in 0..kinds.len() {
        for other in 0..kinds.len() {
            if kinds[one].joins >> other & 1 == 1 {
                kinds[other].joins |= 1 << one;
            }
        }
    }
    Ok(kinds)
}

fn kinds_of(
    row: Row<'_>,
    column: crate::table::Column,
    names: &[&str],
) -> Result<Kinds, TableError> {
    let mut kinds = 0;
    for word in row.text(column).split_whitespace() {
        let at = names.iter().position(|name| *name == word);
        let at = at.ok_or_else(|| row.fault(column, format!("names no kind of end: `{word}`")))?;
        kinds |= 1 << at;
    }
    Ok(kinds)
}

fn read_beside(table: &Table, kinds: &mut [EndKind]) -> Result<(), PieceError> {
    let columns = [
        table.column("at")?,
        table.column("either")?,
        table.column("other")?,
    ];
    let names: Vec<String> = kinds.iter().map(|kind| kind.name.clone()).collect();
    let names: Vec<&str> = names.iter().map(String::as_str).collect();
    for row in table.rows() {
        let [at, either, other] = columns.map(|column| kinds_of(row, column, &names));
        let [at, either, other] = [at?, either?, other?];
        for (number, kind) in kinds.iter_mut().enumerate() {
            if at >> number & 1 == 0 {
                continue;
            }
            for (joined, not) in kind.not_beside.iter_mut().enumerate() {
                if either >> joined & 1 == 1 {
                    *not |= other;
                }
                if other >> joined & 1 == 1 {
                    *not |= either;
                }
            }
        }
    }
    Ok(())
}

fn read_pieces<'s>(
    table: &Table,
    kinds: &[EndKind],
    classes: &mut Vec<String>,
    sets: impl Fn(SetId) -> &'s GroupSet,
) -> Result<Vec<Piece>, PieceError> {
    let name = table.column("piece")?;
    let role = table.column("role")?;
    let drawing = table.column("drawing")?;
    let ends = table.column("ends")?;
    let class = table.column("classes")?;
    let default = table.column("default")?;
    let reason = table.column("reason")?;
    let by_set = [
        table.column("unifac")?,
        table.column("unifac_dortmund")?,
        table.column("joback")?,
    ];
    let mut surroundings = Surroundings::new();
    let mut breaker = Breaker::new();
    let mut all: Vec<Piece> = Vec::with_capacity(table.rows().len());
    for row in table.rows() {
        let fault = |column, what: &str| PieceError::from(row.fault(column, what));
        let own_name = row.required_text(name)?.to_owned();
        if all.iter().any(|piece| piece.name == own_name) {
            return Err(fault(name, "stands twice"));
        }
        let own_role = Role::ALL
            .into_iter()
            .find(|known| known.id() == row.text(role))
            .ok_or_else(|| fault(role, "is none of chain, aromatic, ring, whole"))?;
        let text = row.required_text(drawing)?;
        let mut own_ends = SmallVec::new();
        for word in row.text(ends).split_whitespace() {
            let kind = kinds.iter().position(|kind| kind.name == word);
            let kind = kind.ok_or_else(|| fault(ends, "names no kind of end"))?;
            own_ends.push(Kind(kind as u8));
        }
        let mut groups: [Option<GroupCounts>; 3] = [None, None, None];
        let (own_drawing, composition, environments);
        if own_role == Role::Whole {
            let molecule = Molecule::from_smiles(text)
                .map_err(|error| fault(drawing, &format!("is no molecule: {error}")))?;
            breaker.load(&molecule);
            for set in SetId::ALL {
                let mut counts = GroupCounts::new();
                let coverage = breaker.counts(&molecule, sets(set), &mut counts);
                groups[set as usize] = (coverage == Coverage::Complete).then_some(counts);
            }
            composition = molecule.composition();
            environments = surroundings.of_molecule(&molecule);
            own_drawing = Drawing::Molecule(text.to_owned());
        } else {
            let fragment = Fragment::read(text)
                .map_err(|error| fault(drawing, &format!("is no fragment: {error}")))?;
            if fragment.is_ring_member() == (own_role == Role::Chain) {
                return Err(fault(drawing, "does not go with the role"));
            }
            if fragment.ends() != own_ends.len() {
                return Err(fault(ends, "are not as many as the drawing has"));
            }
            for (set, column) in SetId::ALL.into_iter().zip(by_set) {
                if row.text(column).is_empty() {
                    continue;
                }
                let counts = GroupCounts::from_text(row.text(column))
                    .filter(|counts| {
                        counts
                            .iter()
                            .all(|(number, _)| sets(set).group(number).is_some())
                    })
                    .ok_or_else(|| fault(column, "are no groups of the set"))?;
                groups[set as usize] = Some(counts);
            }
            (composition, environments) = surroundings
                .of_fragment(&fragment, own_role)
                .map_err(|error| fault(drawing, &format!("cannot be drawn: {error}")))?;
            own_drawing = Drawing::Fragment(fragment);
        }
        let off = match row.text(default) {
            "on" => None,
            "off" => Some(row.required_text(reason)?.to_owned()),
            _ => return Err(fault(default, "is neither on nor off")),
        };
        let mut own_classes = SmallVec::new();
        for word in row.text(class).split_whitespace() {
            let (word, number) = word.split_once(':').unwrap_or((word, "1"));
            let number = number
                .parse()
                .map_err(|_| fault(class, "has a number that is none"))?;
            let at = classes.iter().position(|known| known == word);
            let at = at.unwrap_or_else(|| {
                classes.push(word.to_owned());
                classes.len() - 1
            });
            own_classes.push((at as u8, number));
        }
        all.push(Piece {
            name: own_name,
            role: own_role,
            drawing: own_drawing,
            ends: own_ends,
            groups,
            classes: own_classes,
            off,
            composition,
            environments,
            line: row.line(),
        });
    }
    Ok(all)
}

fn read_replaced(table: &Table, all: &[Piece]) -> Result<Vec<Vec<(u16, u8)>>, PieceError> {
    let column = table.column("instead_of")?;
    let mut replaced = Vec::new();
    for row in table.rows().filter(|row| !row.text(column).is_empty()) {
        let mut assembly: Vec<(u16, u8)> = Vec::new();
        for word in row.text(column).split_whitespace() {
            let piece = all.iter().position(|piece| piece.name == word);
            let piece = piece.ok_or_else(|| row.fault(column, "names no piece"))? as u16;
            match assembly.iter_mut().find(|one| one.0 == piece) {
                Some(known) => known.1 += 1,
                None => assembly.push((piece, 1)),
            }
        }
        assembly.sort_unstable();
        replaced.push(assembly);
    }
    Ok(replaced)
}

/// Counts what the atoms of a piece are by drawing it into a molecule and taking
/// away what is not its own.
struct Surroundings {
    reader: EnvironmentReader,
    methyl: (Composition, EnvironmentCounts),
    aromatic_ch: (Composition, EnvironmentCounts),
    ring_ch2: (Composition, EnvironmentCounts),
}

impl Surroundings {
    fn new() -> Self {
        let mut one = Self {
            reader: EnvironmentReader::new(),
            methyl: Default::default(),
            aromatic_ch: Default::default(),
            ring_ch2: Default::default(),
        };
        one.methyl = one.share("CC", 2);
        one.aromatic_ch = one.share("c1ccccc1", 6);
        one.ring_ch2 = one.share("C1CCCCC1", 6);
        one
    }

    /// One of the equal parts of a molecule.
    fn share(&mut self, smiles: &str, parts: u16) -> (Composition, EnvironmentCounts) {
        let molecule = Molecule::from_smiles(smiles).expect("a molecule of textbooks");
        let whole = molecule.composition();
        let mut composition = Composition::default();
        for element in crate::chem::Element::ALL {
            composition.add(element, whole.count(element) / parts);
        }
        let counts = self.of_molecule(&molecule);
        (composition, counts.times(1.0 / f32::from(parts)))
    }

    fn of_molecule(&mut self, molecule: &Molecule) -> EnvironmentCounts {
        let mut counts = EnvironmentCounts::default();
        self.reader.counts_into(molecule, &mut counts);
        counts.of_pieces()
    }

    fn of_fragment(
        &mut self,
        fragment: &Fragment,
        role: Role,
    ) -> Result<(Composition, EnvironmentCounts), crate::chem::SmilesError> {
        let filler = if role == Role::Aromatic { "c" } else { "C" };
        let molecule = Molecule::from_smiles(&capped(fragment, filler))?;
        let mut composition = molecule.composition();
        let mut counts = self.of_molecule(&molecule);
        let mut without = |(atoms, own): &(Composition, EnvironmentCounts), times: usize| {
            composition.remove_times(atoms, times as u16);
            counts.add_times(own, -(times as f32));
        };
        without(&self.methyl, fragment.ends());
        if role != Role::Chain {
            let fill = match role {
                Role::Aromatic => &self.aromatic_ch,
                _ => &self.ring_ch2,
            };
            without(fill, 6 - fragment.ring_atoms());
            counts = counts.with_rings(0);
        }
        Ok((composition, counts))
    }
}
