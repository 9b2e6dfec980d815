//! What an assembly may hold: the defaults, and what a brief changes of them.

use super::error::AssemblyFault;
use super::piece::{Pieces, Role};
use crate::brief::{Assembly, Located};
use crate::quantity::unit::nearest;

/// Limits on assemblies; every one is an upper limit, ends included, but for the
/// two ranges.
#[derive(Clone, Debug, PartialEq)]
pub struct Limits {
    /// Whether each piece may be used, by its place in the table.
    pub pieces: Vec<bool>,
    /// Fewest and most pieces; whole molecules are one piece and always allowed.
    pub count: (u32, u32),
    /// Fewest and most atoms that are not hydrogen.
    pub heavy_atoms: (u32, u32),
    /// Highest molar mass, kg/mol.
    pub molar_mass_kg_per_mol: f64,
    /// Functional groups, ethers not counted.
    pub functional_groups: u32,
    /// Classes of functional groups.
    pub functional_kinds: u32,
    /// Nitrogen atoms.
    pub nitrogen_atoms: u32,
    /// Halogen atoms.
    pub halogen_atoms: u32,
    /// Branches of chains: one for a piece with three ends, two for one with four.
    pub branches: u32,
    /// Plain carbons bound to four carbons.
    pub quaternary_carbons: u32,
    /// Rings, 0 or 1.
    pub rings: u32,
    /// Functional groups of each class, by its place in [`Pieces::classes`].
    pub classes: Vec<u32>,
    /// How often each piece may occur, by its place in the table.
    pub each_piece: Vec<u32>,
}

/// The class that is limited by itself and not among the functional groups.
pub(super) const ETHER: &str = "ether";

/// Limits with names of their own, with their default.
const NAMED: [(&str, u32); 7] = [
    ("functional_groups", 3),
    ("functional_kinds", 2),
    ("nitrogen_atoms", 2),
    ("halogen_atoms", 0),
    ("branches", 3),
    ("quaternary_carbons", 1),
    ("rings", 1),
];

/// Default limits of classes; others go by the number of functional groups.
const CLASSES: [(&str, u32); 4] = [(ETHER, 4), ("OH", 2), ("COOH", 1), ("C=C", 1)];

/// Pieces, heavy atoms and molar mass unless the brief says otherwise.
const COUNT: (u32, u32) = (2, 10);
const HEAVY_ATOMS: (u32, u32) = (4, 14);
const MOLAR_MASS_KG_PER_MOL: f64 = 0.2;

/// The most pieces and heavy atoms that can be counted.
const MOST: u32 = 60;

/// Halogens where a brief asks for pieces with halogen and sets no limit.
const HALOGENS_ASKED_FOR: u32 = 3;

impl Limits {
    /// The defaults.
    pub fn new(pieces: &Pieces) -> Self {
        let named = |name: &str| {
            let found = NAMED.iter().find(|known| known.0 == name);
            found.map_or(0, |known| known.1)
        };
        let functional_groups = named("functional_groups");
        let class = |name: &String| {
            let own = CLASSES.iter().find(|known| known.0 == name);
            own.map_or(functional_groups, |known| known.1)
        };
        Self {
            pieces: pieces.all.iter().map(|piece| piece.off.is_none()).collect(),
            count: COUNT,
            heavy_atoms: HEAVY_ATOMS,
            molar_mass_kg_per_mol: MOLAR_MASS_KG_PER_MOL,
            functional_groups,
            functional_kinds: named("functional_kinds"),
            nitrogen_atoms: named("nitrogen_atoms"),
            halogen_atoms: named("halogen_atoms"),
            branches: named("branches"),
            quaternary_carbons: named("quaternary_carbons"),
            rings: named("rings"),
            classes: pieces.classes.iter().map(class).collect(),
            each_piece: vec![MOST; pieces.all.len()],
        }
    }

    /// The defaults with what a brief changes.
    ///
    /// # Errors
    ///
    /// Every fault: a name that is neither a piece nor a class, a limit that is
    /// none, limits that leave nothing.
    pub fn of(pieces: &Pieces, brief: Option<&Assembly>) -> Result<Self, Vec<AssemblyFault>> {
        let mut limits = Self::new(pieces);
        let mut faults = Vec::new();
        let Some(brief) = brief else {
            return Ok(limits);
        };
        if !brief.pieces.is_empty() {
            limits.choose(pieces, &brief.pieces, &mut faults);
        }
        if let Some(least) = &brief.least_pieces {
            limits.count.0 = least.value;
        }
        if let Some(most) = &brief.most_pieces {
            limits.count.1 = most.value;
        }
        if let Some(range) = &brief.heavy_atoms {
            let range = range.value;
            limits.heavy_atoms.0 = range.at_least.unwrap_or(limits.heavy_atoms.0);
            limits.heavy_atoms.1 = range.at_most.unwrap_or(limits.heavy_atoms.1);
        }
        if let Some(mass) = &brief.most_molar_mass_kg_per_mol {
            limits.molar_mass_kg_per_mol = mass.value;
        }
        let asked = |limits: &Self| {
            let used = pieces.all.iter().zip(&limits.pieces).filter(|one| *one.1);
            used.filter(|one| one.0.role != Role::Whole).any(|one| {
                pieces
                    .classes
                    .iter()
                    .enumerate()
                    .any(|(class, name)| name == "halogen" && one.0.of_class(class) > 0)
            })
        };
        if asked(&limits) {
            limits.halogen_atoms = HALOGENS_ASKED_FOR;
        }
        let functional = brief
            .limits
            .iter()
            .find(|one| one.0.value == "functional_groups");
        if let Some((_, most)) = functional {
            limits.functional_groups = *most;
            for (class, own) in pieces.classes.iter().zip(&mut limits.classes) {
                if !CLASSES.iter().any(|known| known.0 == class) {
                    *own = *most;
                }
            }
        }
        for (name, most) in &brief.limits {
            limits.set(pieces, name, *most, &mut faults);
        }
        for (what, (least, most)) in [("count", limits.count), ("heavy_atoms", limits.heavy_atoms)]
        {
            if most > MOST {
                faults.push(AssemblyFault::TooMany {
                    what,
                    most,
                    limit: MOST,
                });
            } else if least > most {
                faults.push(AssemblyFault::Crossed { what, least, most });
            }
        }
        if !limits.pieces.contains(&true) {
            faults.push(AssemblyFault::NoPieces);
        }
        if faults.is_empty() {
            Ok(limits)
        } else {
            Err(faults)
        }
    }

    /// Only the pieces that are named, by themselves or by their class.
    fn choose(
        &mut self,
        pieces: &Pieces,
        named: &[Located<String>],
        faults: &mut Vec<AssemblyFault>,
    ) {
        self.pieces.fill(false);
        let mut classes = Vec::new();
        for name in named {
            match (pieces.find(&name.value), pieces.class(&name.value)) {
                (Some(piece), _) => self.pieces[piece] = true,
                (None, Some(class)) => classes.push(class),
                (None, None) => faults.push(unknown(pieces, name, false)),
            }
        }
        for (piece, on) in pieces.all.iter().zip(&mut self.pieces) {
            let own = |class: &(u8, u8)| classes.contains(&usize::from(class.0));
            *on |= !piece.classes.is_empty() && piece.classes.iter().all(own);
        }
    }

    fn set(
        &mut self,
        pieces: &Pieces,
        name: &Located<String>,
        most: u32,
        faults: &mut Vec<AssemblyFault>,
    ) {
        let own = match name.value.as_str() {
            "functional_groups" => &mut self.functional_groups,
            "functional_kinds" => &mut self.functional_kinds,
            "nitrogen_atoms" => &mut self.nitrogen_atoms,
            "halogen_atoms" => &mut self.halogen_atoms,
            "branches" => &mut self.branches,
            "quaternary_carbons" => &mut self.quaternary_carbons,
            "rings" => &mut self.rings,
            other => match (pieces.class(other), pieces.find(other)) {
                (Some(class), _) => &mut self.classes[class],
                (None, Some(piece)) => &mut self.each_piece[piece],
                (None, None) => {
                    faults.push(unknown(pieces, name, true));
                    return;
                }
            },
        };
        *own = most.min(MOST);
        if self.rings > 1 {
            faults.push(AssemblyFault::TooMany {
                what: "rings",
                most,
                limit: 1,
            });
        }
    }

    /// Every limit with its name, for people.
    pub fn told<'p>(&self, pieces: &'p Pieces) -> Vec<(&'p str, u32)> {
        let named = [
            ("functional_groups", self.functional_groups),
            ("functional_kinds", self.functional_kinds),
            ("nitrogen_atoms", self.nitrogen_atoms),
            ("halogen_atoms", self.halogen_atoms),
            ("branches", self.branches),
            ("quaternary_carbons", self.quaternary_carbons),
            ("rings", self.rings),
        ];
        let classes = pieces.classes.iter().zip(&self.classes);
        let own = classes.filter(|(_, most)| **most != self.functional_groups);
        let each = pieces.all.iter().zip(&self.each_piece);
        let each = each.filter(|(_, most)| **most < MOST);
        named
            .into_iter()
            .chain(own.map(|(class, &most)| (class.as_str(), most)))
            .chain(each.map(|(piece, &most)| (piece.name.as_str(), most)))
            .collect()
    }
}

fn unknown(pieces: &Pieces, name: &Located<String>, limit: bool) -> AssemblyFault {
    let names = pieces.all.iter().map(|piece| piece.name.as_str());
    let classes = pieces.classes.iter().map(String::as_str);
    let special = NAMED.iter().map(|known| known.0).filter(|_| limit);
    let all: Vec<&str> = names.chain(classes).chain(special).collect();
    let lower = name.value.to_lowercase();
    let like = all.iter().find(|known| known.to_lowercase() == lower);
    AssemblyFault::Unknown {
        place: name.place,
        name: name.value.clone(),
        like: like
            .map(|known| (*known).to_owned())
            .or_else(|| best_match(&name.value, &all)),
    }
}

fn best_match(name: &str, all: &[&str]) -> Option<String> {
    let lower = name.to_lowercase();
    let found = all
        .iter()
        .filter(|known| {
            let known = known.to_lowercase();
            known.starts_with(&lower) || lower.starts_with(&known)
        })
        .max_by_key(|known| known.len());
    found.map(|found| (*found).to_owned()).or_else(|| {
        // names are few: leaking none, the nearest is looked for among the fixed ones
        let fixed = NAMED.iter().map(|known| known.0);
        nearest(name, fixed).map(str::to_owned)
    })
}
