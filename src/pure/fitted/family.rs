//! Families of molecules: errors are reported and intervals are set by them.

use super::described::Described;
use super::table::{CARBOXYL, PHOSPHORUS_OR_BORON, SILICON};

/// The family of a molecule, by what is in it; the first that fits.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, PartialOrd, Ord)]
pub enum Family {
    /// Silicon.
    Silicon,
    /// Phosphorus or boron.
    PhosphorusAndBoron,
    /// Sulfur.
    Sulfur,
    /// Fluorine.
    Fluorides,
    /// Nitrogen and oxygen.
    NitrogenWithOxygen,
    /// Chlorine, bromine or iodine beside oxygen or nitrogen.
    HalidesWithOxygenOrNitrogen,
    /// Chlorine, bromine or iodine.
    Halides,
    /// Nitrogen.
    AminesNitrilesHeterocycles,
    /// A carboxyl group.
    Acids,
    /// Hydroxyl and doubly bound oxygen.
    HydroxyCarbonyls,
    /// Hydroxyl and an aromatic ring.
    PhenolsAndAromaticAlcohols,
    /// Hydroxyl.
    Alcohols,
    /// Doubly bound oxygen.
    KetonesAldehydesEsters,
    /// Oxygen.
    Ethers,
    /// An aromatic ring.
    AromaticHydrocarbons,
    /// None of these.
    #[default]
    OtherHydrocarbons,
}

impl Family {
    /// How many there are.
    pub const COUNT: usize = 16;

    /// The family of a molecule.
    pub fn of(described: &Described) -> Self {
        let has = |class: usize| described.has_class(class);
        // in the order of the table of classes
        let (hydroxyl, carbonyl, aromatic, sulfur) = (has(0), has(2), has(7), has(8));
        let (oxygen, nitrogen) = (hydroxyl || carbonyl || has(3), has(1) || has(4));
        // fluorine is a halogen, too: it is asked for first
        let (halogen, fluorine) = (has(5), has(6));
        match () {
            () if has(SILICON) => Self::Silicon,
            () if has(PHOSPHORUS_OR_BORON) => Self::PhosphorusAndBoron,
            () if sulfur => Self::Sulfur,
            () if fluorine => Self::Fluorides,
            () if nitrogen && oxygen => Self::NitrogenWithOxygen,
            () if halogen && (oxygen || nitrogen) => Self::HalidesWithOxygenOrNitrogen,
            () if halogen => Self::Halides,
            () if nitrogen => Self::AminesNitrilesHeterocycles,
            () if has(CARBOXYL) => Self::Acids,
            () if hydroxyl && carbonyl => Self::HydroxyCarbonyls,
            () if hydroxyl && aromatic => Self::PhenolsAndAromaticAlcohols,
            () if hydroxyl => Self::Alcohols,
            () if carbonyl => Self::KetonesAldehydesEsters,
            () if oxygen => Self::Ethers,
            () if aromatic => Self::AromaticHydrocarbons,
            () => Self::OtherHydrocarbons,
        }
    }

    /// Its name in reports.
    pub const fn id(self) -> &'static str {
        match self {
            Self::Silicon => "silicon",
            Self::PhosphorusAndBoron => "phosphorus and boron",
            Self::Sulfur => "sulfur",
            Self::Fluorides => "fluorides",
            Self::NitrogenWithOxygen => "nitrogen with oxygen",
            Self::HalidesWithOxygenOrNitrogen => "halides with oxygen or nitrogen",
            Self::Halides => "chlorides bromides iodides",
            Self::AminesNitrilesHeterocycles => "amines nitriles heterocycles",
            Self::Acids => "acids",
            Self::HydroxyCarbonyls => "hydroxy carbonyls",
            Self::PhenolsAndAromaticAlcohols => "phenols and aromatic alcohols",
            Self::Alcohols => "alcohols",
            Self::KetonesAldehydesEsters => "ketones aldehydes esters",
            Self::Ethers => "ethers",
            Self::AromaticHydrocarbons => "aromatic hydrocarbons",
            Self::OtherHydrocarbons => "other hydrocarbons",
        }
    }
}
