//! How wide the interval of an estimate is.

use super::described::Described;
use super::family::Family;
use super::model::Relatives;
use super::table::CLASSES;

/// Last heavy atom of each size class but the last.
const SIZE_ENDS: [f64; SizeClass::COUNT - 1] = [4.0, 8.0, 14.0, 20.0];

/// Size of a molecule, in classes.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, PartialOrd, Ord)]
pub struct SizeClass(pub usize);

impl SizeClass {
    /// How many there are.
    pub const COUNT: usize = 5;

    /// The class of a molecule with so many heavy atoms.
    pub fn of(heavy_atoms: f64) -> Self {
        Self(SIZE_ENDS.iter().filter(|&&end| heavy_atoms > end).count())
    }

    /// Its name in reports.
    pub const fn id(self) -> &'static str {
        [
            "01 to 04 heavy atoms",
            "05 to 08 heavy atoms",
            "09 to 14 heavy atoms",
            "15 to 20 heavy atoms",
            "21 and more heavy atoms",
        ][self.0]
    }
}

/// What is known of an estimate before its width.
#[derive(Clone, Copy, Debug)]
pub struct Ground<'a> {
    /// The sum it comes from.
    pub sum: f64,
    /// How rare the environments are in the fit.
    pub rarity: f64,
    /// Environments that the table of the fit does not have.
    pub unknown_environments: usize,
    /// Whether there are atoms of a kind that no molecule of the fit has.
    pub unknown_atoms: bool,
    /// The molecules of the fit nearby.
    pub relatives: &'a Relatives,
}

/// What tells how well a molecule is known to a fit.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Standing {
    /// Numbers that the width goes with.
    pub signs: [f64; Scale::SIGNS],
    /// Its family.
    pub family: Family,
    /// Its size.
    pub size: SizeClass,
    /// How far the nearest molecule of the fit is; 0 at levels without distances.
    pub nearest: f64,
}

impl Standing {
    /// The standing of a molecule: its size, how rare its environments are in the
    /// fit, how near its relatives are and how well they come out, the estimate itself,
    /// what classes of atoms it has, and how many hydrogen bonds it can take part in.
    pub fn of(described: &Described, ground: &Ground<'_>) -> Self {
        let nearest = ground.relatives.nearest();
        let n = described.heavy_atoms.max(1.0);
        let class = |at: usize| described.classes[at];
        let polar = class(0) + class(1) + class(2) + class(3) + class(4) + class(8);
        let donors = (class(0) + class(1)).min(4.0);
        let acceptors = (class(2) + class(3) + class(4)).min(6.0);
        let whole = [
            1.0,
            n.ln(),
            1.0 / n,
            ground.rarity.ln_1p(),
            nearest,
            (0.1 + nearest).ln(),
            polar,
            polar / n,
            class(5) / n,
            ground.relatives.ln_density(),
            ground.relatives.ln_error(),
            ground.sum,
            ground.sum * ground.sum,
            donors.ln_1p(),
            acceptors.ln_1p(),
            donors.min(acceptors),
            (ground.unknown_environments as f64).ln_1p(),
            f64::from(u8::from(ground.unknown_atoms)),
        ];
        let mut signs = [0.0; Scale::SIGNS];
        signs[..WHOLE].copy_from_slice(&whole);
        for (at, &members) in described.classes.iter().enumerate() {
            signs[WHOLE + 2 * at] = f64::from(u8::from(members > 0.0));
            signs[WHOLE + 2 * at + 1] = members / n;
        }
        Self {
            signs,
            family: Family::of(described),
            size: SizeClass::of(described.heavy_atoms),
            nearest,
        }
    }
}

/// The signs that are the sum and its square.
const SUMS: [usize; 2] = [11, 12];

/// Signs that are not those of a class of atoms.
const WHOLE: usize = 18;

/// How the half width of the 90 % interval depends on the molecule: its ln is a linear sum of
/// the [signs](Standing::signs), each held to where the fit has molecules, and a term for the
/// family, for the size and for the nearness.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Scale {
    /// Weights of the signs.
    pub weights: Signs,
    /// Least of each sign.
    pub least: Signs,
    /// Most of each sign.
    pub most: Signs,
    /// Terms of the families.
    pub families: [f64; Family::COUNT],
    /// Terms of the size classes.
    pub sizes: [f64; SizeClass::COUNT],
    /// Nearest distances at which a class of nearness ends.
    pub nearness_ends: [f64; 2],
    /// Terms of the classes of nearness.
    pub nearness: [f64; 3],
}

/// A number for each sign.
pub type Signs = [f64; Scale::SIGNS];

impl Default for Scale {
    fn default() -> Self {
        Self {
            weights: [0.0; Self::SIGNS],
            least: [0.0; Self::SIGNS],
            most: [0.0; Self::SIGNS],
            families: [0.0; Family::COUNT],
            sizes: [0.0; SizeClass::COUNT],
            nearness_ends: [0.0; 2],
            nearness: [0.0; 3],
        }
    }
}

impl Scale {
    /// How many signs there are.
    pub const SIGNS: usize = WHOLE + 2 * CLASSES.len();

    /// Class of nearness: 0 for molecules close to one of the fit, 2 for those far from all.
    pub fn nearness_class(&self, nearest: f64) -> usize {
        let ends = self.nearness_ends.iter();
        ends.filter(|&&end| nearest >= end).count()
    }

    /// ln of the half width by the signs alone.
    pub fn by_signs(&self, signs: &Signs) -> f64 {
        let held = signs.iter().zip(&self.least).zip(&self.most);
        self.weights
            .iter()
            .zip(held)
            .map(|(weight, ((sign, least), most))| weight * sign.max(*least).min(*most))
            .sum()
    }

    /// The least and the most that the half width can be for whatever sum a molecule of
    /// this standing has.
    pub(super) fn range(&self, standing: &Standing) -> (f64, f64) {
        let (mut narrow, mut wide) = (*standing, *standing);
        for sign in SUMS {
            let ends = [self.least[sign], self.most[sign]];
            let falls = self.weights[sign] < 0.0;
            [narrow.signs[sign], wide.signs[sign]] = if falls { [ends[1], ends[0]] } else { ends };
        }
        (self.half_width(&narrow), self.half_width(&wide))
    }

    /// Half width of the 90 % interval of the sum.
    pub fn half_width(&self, standing: &Standing) -> f64 {
        let classes = self.families[standing.family as usize]
            + self.sizes[standing.size.0]
            + self.nearness[self.nearness_class(standing.nearest)];
        (self.by_signs(&standing.signs) + classes).exp()
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn standing(sign: f64, size: usize, nearest: f64) -> Standing {
        let mut signs = [0.0; Scale::SIGNS];
        signs[0] = 1.0;
        signs[3] = sign;
        Standing {
            signs,
            family: Family::Ethers,
            size: SizeClass(size),
            nearest,
        }
    }

    fn scale() -> Scale {
        let mut scale = Scale {
            nearness_ends: [0.1, 0.2],
            nearness: [0.0, 0.25, 0.5],
            ..Scale::default()
        };
        scale.weights[0] = -2.0;
        scale.weights[3] = 0.5;
        scale.least = [-1.0; Scale::SIGNS];
        scale.most = [2.0; Scale::SIGNS];
        scale.families[Family::Ethers as usize] = 0.125;
        scale.sizes[1] = 1.0;
        scale
    }

    #[test]
    fn width_is_the_exponential_of_signs_and_classes() {
        let scale = scale();
        for (sign, size, nearest, ln) in [
            (0.0, 0, 0.0, -2.0 + 0.125),
            (1.0, 0, 0.0, -2.0 + 0.5 + 0.125),
            (1.0, 1, 0.0, -2.0 + 0.5 + 0.125 + 1.0),
            (1.0, 1, 0.1, -2.0 + 0.5 + 0.125 + 1.0 + 0.25),
            (1.0, 1, 0.9, -2.0 + 0.5 + 0.125 + 1.0 + 0.5),
        ] {
            let half = scale.half_width(&standing(sign, size, nearest));
            assert!((half.ln() - ln).abs() < 1e-12, "{sign} {size} {nearest}");
        }
    }

    /// A molecule beyond all of the fit has no width that was never tried.
    #[test]
    fn a_sign_counts_no_further_than_the_fit_has_molecules() {
        let scale = scale();
        let half = |sign: f64| scale.half_width(&standing(sign, 0, 0.0));
        assert!(half(1.9) < half(2.0));
        assert_eq!(half(2.0), half(50.0));
        assert_eq!(half(-1.0), half(-50.0));
    }

    #[test]
    fn size_classes_end_where_their_names_say() {
        for size in 0..SizeClass::COUNT {
            let id = SizeClass(size).id();
            let numbers: Vec<f64> = id.split(' ').filter_map(|word| word.parse().ok()).collect();
            for number in numbers {
                assert_eq!(SizeClass::of(number).0, size, "{id}");
            }
        }
    }
}
