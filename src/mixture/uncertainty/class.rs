//! Coarse chemical classes of molecules, and how alike two molecules are.

use smallvec::SmallVec;

use crate::mixture::unifac::{Component, MainGroup, UnifacTables};

/// The chemical class of a molecule: that of the first main group, in the order
/// below, that it has. A chlorinated alcohol is an alcohol.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
#[repr(u8)]
pub enum ChemicalClass {
    /// Water.
    Water,
    /// Carboxylic acids.
    Acid,
    /// Amides, lactams, sulfoxides, sulfones, carbonates, furfural: strongly polar, no proton donors.
    StronglyPolar,
    /// Alcohols, phenols, glycols.
    Alcohol,
    /// Amines, anilines, pyridines.
    Amine,
    /// Nitriles, nitro compounds, isocyanates.
    NitrileOrNitro,
    /// Ketones, aldehydes, esters, ethers, epoxides.
    KetoneEsterEther,
    /// Halogenated hydrocarbons.
    Halogenated,
    /// Molecules with a group that no class names: sulfides, silanes, ions, groups of a user.
    Other,
    /// Aromatic hydrocarbons.
    Aromatic,
    /// Alkanes, alkenes, alkynes.
    Aliphatic,
}

impl ChemicalClass {
    /// Every class, in the order in which they are looked for.
    pub const ALL: [Self; 11] = [
        Self::Water,
        Self::Acid,
        Self::StronglyPolar,
        Self::Alcohol,
        Self::Amine,
        Self::NitrileOrNitro,
        Self::KetoneEsterEther,
        Self::Halogenated,
        Self::Other,
        Self::Aromatic,
        Self::Aliphatic,
    ];

    /// The name used in tables.
    pub const fn id(self) -> &'static str {
        match self {
            Self::Water => "water",
            Self::Acid => "acid",
            Self::StronglyPolar => "strongly-polar",
            Self::Alcohol => "alcohol",
            Self::Amine => "amine",
            Self::NitrileOrNitro => "nitrile-nitro",
            Self::KetoneEsterEther => "ketone-ester-ether",
            Self::Halogenated => "halogenated",
            Self::Other => "other",
            Self::Aromatic => "aromatic",
            Self::Aliphatic => "aliphatic",
        }
    }

    /// The class of this name.
    pub fn from_id(id: &str) -> Option<Self> {
        Self::ALL.into_iter().find(|class| class.id() == id)
    }

    /// The class that a main group of this name makes a molecule one of; names
    /// mean the same in every UNIFAC model, numbers do not.
    pub fn of_main_group(name: &str) -> Self {
        match name {
            "H2O" => Self::Water,
            "COOH" | "HCOOH" => Self::Acid,
            "HCON(CH2)2"
            | "N-methylpyrrolidone"
            | "CON"
            | "(CH3)2SO"
            | "c-CONC"
            | "CONR"
            | "CONR2"
            | "HCONR"
            | "sulfone"
            | "furfural"
            | "carbonate" => Self::StronglyPolar,
            "OH" | "CH3OH" | "ACOH" | "(CH2OH)2" | "OCCOH" => Self::Alcohol,
            "CNH2" | "CNH" | "(C)3N" | "ACNH2" | "pyridine" | "morpholine" => Self::Amine,
            "CCN" | "CNO2" | "ACNO2" | "acrylonitrile" | "NCO" => Self::NitrileOrNitro,
            "CH2CO" | "CHO" | "CCOO" | "HCOO" | "COO" | "CH2O" | "c-CH2O" | "epoxide" => {
                Self::KetoneEsterEther
            }
            "CCl" | "CCl2" | "CCl3" | "CHCl3" | "CCl4" | "ACCl" | "I" | "Br" | "Cl(C=C)"
            | "ACF" | "CF2" | "CClF" => Self::Halogenated,
            "ACH" | "ACCH2" => Self::Aromatic,
            "CH2" | "C=C" | "C≡C" | "c-CH2" => Self::Aliphatic,
            _ => Self::Other,
        }
    }
}

/// The main groups of each class, as bits: the class of a molecule is then a
/// handful of comparisons.
#[derive(Clone, Copy, Debug, Default)]
pub(in crate::mixture) struct ClassMasks([u128; ChemicalClass::ALL.len()]);

impl ClassMasks {
    pub(in crate::mixture) fn new(main_groups: &[MainGroup]) -> Self {
        let mut masks = Self::default();
        for (at, group) in main_groups.iter().enumerate() {
            masks.0[ChemicalClass::of_main_group(&group.name) as usize] |= 1 << at;
        }
        masks
    }

    fn class(&self, mains: u128) -> ChemicalClass {
        let found = ChemicalClass::ALL
            .into_iter()
            .find(|&class| self.0[class as usize] & mains != 0);
        found.unwrap_or(ChemicalClass::Other)
    }
}

impl UnifacTables {
    /// The chemical class of a molecule.
    pub fn class(&self, component: &Component) -> ChemicalClass {
        self.class_masks.class(component.mains)
    }
}

/// How alike two solutes are: the errors of like solutes in one solvent go
/// together, and cancel in the ratio of their activity coefficients.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
#[repr(u8)]
pub enum Likeness {
    /// One and the same molecule: what makes its error is there twice.
    Same,
    /// One class, and at least 0.8 of the surface in the same main groups; so
    /// are isomers that the model cannot tell apart.
    Alike,
    /// One class, and 0.5 to 0.8 of the surface in the same main groups.
    Related,
    /// One class, less of the surface shared.
    OneClass,
    /// Different classes.
    Different,
}

impl Likeness {
    /// Those whose correlation is a parameter: all but [`Same`](Self::Same).
    pub const FITTED: [Self; 4] = [Self::Alike, Self::Related, Self::OneClass, Self::Different];

    /// The name used in tables.
    pub const fn id(self) -> &'static str {
        match self {
            Self::Same => "same",
            Self::Alike => "alike",
            Self::Related => "related",
            Self::OneClass => "one-class",
            Self::Different => "different",
        }
    }

    /// How alike two different molecules of the classes given are.
    ///
    /// The shared surface is Σ min(θ_M, θ'_M) over the main groups M, θ being
    /// the fraction of the surface of a molecule that lies in M.
    pub fn of(first: (&Component, ChemicalClass), second: (&Component, ChemicalClass)) -> Self {
        if first.1 != second.1 {
            return Self::Different;
        }
        let of_second: SmallVec<[_; 8]> = second.0.surfaces().collect();
        let shared: f64 = first
            .0
            .surfaces()
            .filter_map(|(main, theta)| {
                let (_, other) = of_second.iter().find(|entry| entry.0 == main)?;
                Some(theta.min(*other))
            })
            .sum();
        match shared {
            shared if shared >= 0.8 => Self::Alike,
            shared if shared >= 0.5 => Self::Related,
            _ => Self::OneClass,
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn names_of_classes_lead_back() {
        for (at, class) in ChemicalClass::ALL.into_iter().enumerate() {
            assert_eq!(class as usize, at);
            assert_eq!(ChemicalClass::from_id(class.id()), Some(class));
        }
    }
}
