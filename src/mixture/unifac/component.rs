//! A component as UNIFAC sees it: volume, surface, and surface by main group.

use std::sync::Arc;

use smallvec::SmallVec;

use crate::groups::GroupCounts;
use crate::mixture::{ActivityModel, MixtureError};
use crate::table::TableError;

use super::kernel::UnifacMixture;
use super::tables::{MainIndex, Slips, UnifacOverlay, UnifacTables};

/// The combinatorial part of a UNIFAC model.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Combinatorial {
    /// Staverman and Guggenheim, with r as it is.
    Original,
    /// The same with r^(3/4) in the Flory–Huggins term (Weidlich and Gmehling 1987).
    ThreeQuarters,
}

impl Combinatorial {
    /// The power of r in the Flory–Huggins term.
    pub(super) fn power(self) -> f64 {
        match self {
            Self::Original => 1.0,
            Self::ThreeQuarters => 0.75,
        }
    }

    /// r to that power.
    #[inline(always)]
    pub(super) fn r_flory(self, r: f64) -> f64 {
        match self {
            Self::Original => r,
            Self::ThreeQuarters => {
                let root = r.sqrt();
                root * root.sqrt()
            }
        }
    }
}

/// A UNIFAC model: its tables and its combinatorial part.
///
/// # Source
///
/// `unifac`: Fredenslund, Jones, Prausnitz, AIChE J. 21 (1975) 1086–1099.
/// `unifac-dortmund`: Weidlich, Gmehling, Ind. Eng. Chem. Res. 26 (1987) 1372–1381.
/// Parameters: the heads of the table files.
///
/// # Example
///
/// Diethylamine (0.4) and n-heptane at 308.15 K; Smith, Van Ness and Abbott
/// print γ = 1.133 and 1.047.
///
/// ```
/// use groupsmith::groups::GroupCounts;
/// use groupsmith::mixture::{ActivityModel, Slips, Unifac};
///
/// let unifac = Unifac::built_in(ActivityModel::Unifac, Slips::Corrected).unwrap()?;
/// let amine = unifac.component(&GroupCounts::from_iter([(1, 2), (2, 1), (32, 1)]))?;
/// let heptane = unifac.component(&GroupCounts::from_iter([(1, 2), (2, 5)]))?;
/// let mixture = unifac.mixture(&[amine, heptane])?;
/// let mut ln_gamma = [0.0; 2];
/// mixture.state(308.15)?.ln_gamma(&[0.4, 0.6], &mut ln_gamma)?;
/// assert!((ln_gamma[0].exp() - 1.133).abs() < 0.0005);
/// assert!((ln_gamma[1].exp() - 1.047).abs() < 0.0005);
/// # Ok::<(), groupsmith::mixture::MixtureError>(())
/// ```
#[derive(Clone, Debug)]
pub struct Unifac {
    pub(super) tables: Arc<UnifacTables>,
    pub(super) combinatorial: Combinatorial,
}

/// Group data of one molecule in one UNIFAC model.
///
/// Subgroups of one main group have the same interactions, so the kernels need
/// no more than the surface a molecule has in each main group:
/// A_M = Σ ν_k Q_k over the subgroups k of M.
#[derive(Clone, Debug, PartialEq)]
pub struct Component {
    pub(super) model: &'static str,
    pub(super) r: f64,
    pub(super) q: f64,
    /// r, or r^(3/4), for the Flory–Huggins term.
    pub(super) r_flory: f64,
    /// Main groups and surface in each, in order of first appearance.
    pub(super) areas: SmallVec<[(MainIndex, f64); 8]>,
    /// Main groups as bits.
    pub(in crate::mixture) mains: u128,
}

impl Component {
    /// Relative van der Waals volume r = Σ ν_k R_k.
    pub fn r(&self) -> f64 {
        self.r
    }

    /// Relative van der Waals surface area q = Σ ν_k Q_k.
    pub fn q(&self) -> f64 {
        self.q
    }

    /// Main groups and the fraction of the surface in each.
    pub(in crate::mixture) fn surfaces(&self) -> impl Iterator<Item = (MainIndex, f64)> {
        self.areas.iter().map(|&(main, area)| (main, area / self.q))
    }
}

impl Unifac {
    /// The built-in tables of a model; `None` for a model that has no groups.
    ///
    /// # Errors
    ///
    /// None unless a built-in file is broken, which the tests rule out.
    pub fn built_in(model: ActivityModel, slips: Slips) -> Option<Result<Self, TableError>> {
        Self::with_overlays(model, &[], slips)
    }

    /// The built-in tables with files of a user's folder laid over them.
    ///
    /// # Errors
    ///
    /// Faults of the overlays, with file, line and column.
    pub fn with_overlays(
        model: ActivityModel,
        overlays: &[UnifacOverlay<'_>],
        slips: Slips,
    ) -> Option<Result<Self, TableError>> {
        let texts = model.texts()?;
        let combinatorial = match model {
            ActivityModel::Ideal => return None,
            ActivityModel::Unifac => Combinatorial::Original,
            ActivityModel::UnifacDortmund | ActivityModel::UnifacDortmund2006 => {
                Combinatorial::ThreeQuarters
            }
        };
        Some(
            UnifacTables::read(model.id(), &texts, overlays, slips).map(|tables| Self {
                tables: Arc::new(tables),
                combinatorial,
            }),
        )
    }

    /// The tables computed with.
    pub fn tables(&self) -> &UnifacTables {
        &self.tables
    }

    /// The record of a molecule with these group counts.
    ///
    /// # Errors
    ///
    /// [`MixtureError::UnknownGroup`] for a number the list does not have;
    /// [`MixtureError::NoSurface`] if there are no groups or none has a surface.
    pub fn component(&self, counts: &GroupCounts) -> Result<Component, MixtureError> {
        let mut component = Component {
            model: self.tables.model(),
            r: 0.0,
            q: 0.0,
            r_flory: 0.0,
            areas: SmallVec::new(),
            mains: 0,
        };
        for (number, count) in counts.iter() {
            let Some(group) = self.tables.subgroup(number) else {
                return Err(MixtureError::UnknownGroup {
                    model: self.tables.model(),
                    number,
                });
            };
            let count = f64::from(count);
            component.r += count * group.r;
            component.q += count * group.q;
            let bit = 1_u128 << group.main_index.0;
            if component.mains & bit == 0 {
                component.mains |= bit;
                component.areas.push((group.main_index, count * group.q));
            } else if let Some(entry) = component
                .areas
                .iter_mut()
                .find(|entry| entry.0 == group.main_index)
            {
                entry.1 += count * group.q;
            }
        }
        if component.q <= 0.0 {
            return Err(MixtureError::NoSurface {
                model: self.tables.model(),
                component: counts.to_string(),
            });
        }
        component.r_flory = self.combinatorial.r_flory(component.r);
        Ok(component)
    }

    /// A mixture of these components, in this order.
    ///
    /// # Errors
    ///
    /// [`MixtureError::MissingPair`] naming two main groups whose interaction
    /// is not published in both directions; [`MixtureError::NoComponents`].
    ///
    /// # Panics
    ///
    /// If a component was made by another model.
    pub fn mixture(&self, components: &[Component]) -> Result<UnifacMixture, MixtureError> {
        UnifacMixture::new(&self.tables, components)
    }
}
