//! The error of ln γ∞ and of the difference of two of them in one solvent.

use super::class::{ChemicalClass, Likeness};
use crate::mixture::unifac::Component;
use crate::mixture::{ActivityModel, TableFile};

pub(super) const CLASSES: usize = ChemicalClass::ALL.len();

/// |ln γ∞| is counted from here: a prediction near 0 is not exact.
const MAGNITUDE_OFFSET: f64 = 0.3;

/// Most interactions are fitted to states warmer than this, in K.
const COLD_BELOW_K: f64 = 300.0;

/// Classes of fewer measured values than this are said to be thin.
const THIN_ROWS: u32 = 30;

/// The error models of all activity models that have one.
#[derive(Clone, Debug)]
pub struct ActivityErrors {
    pub(super) models: Vec<ErrorModel>,
}

impl ActivityErrors {
    /// The built-in table.
    pub const BUILT_IN: TableFile<'static> = TableFile {
        name: "groups/estimates/activity_errors.csv",
        text: include_str!("../../../groups/estimates/activity_errors.csv"),
    };

    /// The error model of an activity model; `None` where none is fitted, as
    /// for the ideal mixture.
    pub fn of(&self, model: ActivityModel) -> Option<&ErrorModel> {
        self.models.iter().find(|errors| errors.model == model)
    }
}

/// The errors of one activity model by class of solute and of solvent.
///
/// The error (measured less predicted ln γ∞) has a middle
///
/// ```text
/// μ = μ0 + μ(solute class) + μ(solvent class)
/// ```
///
/// and a scale s; q are the relative surface areas:
///
/// ```text
/// ln s = c0 + c(solute class) + c(solvent class) + c(both)
///      + m ln(0.3 + |ln γ∞|) + n min(ln γ∞, 0)
///      + a ln q(solute) + b ln q(solvent) + t max(300 K − T, 0)/10 K
/// ```
///
/// The 90 % interval reaches from μ + k_low s to μ + k_high s, widened where
/// need be so that it holds the value itself.
///
/// The difference of the errors of two solutes in one solvent has the middle
/// μ1 − μ2 and the scale (s1² + s2² − 2 ρ s1 s2)^½; ρ depends on how alike the
/// solutes are and on whether the solvent is water.
///
/// # Source
///
/// Fitted by the study `fit_activity_errors`; the table's head names the data.
///
/// # Validity
///
/// The classes, temperatures and magnitudes of the data: mostly 290 to 400 K.
#[derive(Clone, Debug, PartialEq)]
pub struct ErrorModel {
    pub(super) model: ActivityModel,
    /// Middle and constant part of ln s, by solute class, then solvent class.
    pub(super) cells: [[Cell; CLASSES]; CLASSES],
    pub(super) slopes: Slopes,
    /// k_low and k_high.
    pub(super) quantiles: (f64, f64),
    /// ρ and the factor k of the interval, by [`Likeness::FITTED`], then not water, water.
    pub(super) pairs: [[Pair; 2]; Likeness::FITTED.len()],
    /// Measured values behind each class of solute, and of solvent.
    pub(super) rows: [[u32; CLASSES]; 2],
}

#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub(super) struct Cell {
    pub(super) middle: f64,
    pub(super) ln_scale: f64,
}

#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub(super) struct Slopes {
    pub(super) magnitude: f64,
    pub(super) negative: f64,
    pub(super) solute_surface: f64,
    pub(super) solvent_surface: f64,
    pub(super) cold: f64,
}

#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub(super) struct Pair {
    pub(super) correlation: f64,
    pub(super) factor: f64,
}

/// The error of a predicted ln γ∞: where it lies and how wide it is.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct LnError {
    /// Measured less predicted value in the middle of the distribution.
    pub middle: f64,
    /// Scale; the quantiles of the model are counted in it.
    pub scale: f64,
}

impl LnError {
    /// Scale of the difference of two errors, (s1² + s2² − 2 ρ s1 s2)^½.
    ///
    /// Written as (s1 − s2)² + 2 (1 − ρ) s1 s2, which never falls below 0.
    pub fn scale_of_difference(self, other: Self, correlation: f64) -> f64 {
        let apart = self.scale - other.scale;
        (apart * apart + 2.0 * (1.0 - correlation) * (self.scale * other.scale)).sqrt()
    }
}

impl ErrorModel {
    /// The activity model.
    pub fn model(&self) -> ActivityModel {
        self.model
    }

    /// The quantities of which ln s is a linear function, beside the classes.
    pub fn covariates(
        solute: &Component,
        solvent: &Component,
        temperature_k: f64,
        ln_gamma_inf: f64,
    ) -> [f64; 5] {
        [
            (MAGNITUDE_OFFSET + ln_gamma_inf.abs()).ln(),
            ln_gamma_inf.min(0.0),
            solute.q().ln(),
            solvent.q().ln(),
            (COLD_BELOW_K - temperature_k).max(0.0) / 10.0,
        ]
    }

    /// The error of ln γ∞ of a solute in a solvent, as the model predicts it.
    pub fn error(
        &self,
        solute: (&Component, ChemicalClass),
        solvent: (&Component, ChemicalClass),
        temperature_k: f64,
        ln_gamma_inf: f64,
    ) -> LnError {
        let cell = self.cells[solute.1 as usize][solvent.1 as usize];
        let [magnitude, negative, of_solute, of_solvent, cold] =
            Self::covariates(solute.0, solvent.0, temperature_k, ln_gamma_inf);
        let ln_scale = cell.ln_scale
            + self.slopes.magnitude * magnitude
            + self.slopes.negative * negative
            + self.slopes.solute_surface * of_solute
            + self.slopes.solvent_surface * of_solvent
            + self.slopes.cold * cold;
        LnError {
            middle: cell.middle,
            scale: ln_scale.exp(),
        }
    }

    /// What has to be added to ln γ∞ at the two ends of its 90 % interval; the
    /// first is at most 0, the second at least 0.
    pub fn interval(&self, error: LnError) -> (f64, f64) {
        let (low, high) = self.quantiles;
        around_zero(
            error.middle + low * error.scale,
            error.middle + high * error.scale,
        )
    }

    /// The same for the difference of ln γ∞ of two solutes in one solvent, first
    /// less second. The other way round it is the same with the sign changed;
    /// for one and the same solute it has no width.
    pub fn interval_of_difference(
        &self,
        first: LnError,
        second: LnError,
        likeness: Likeness,
        solvent: ChemicalClass,
    ) -> (f64, f64) {
        let Some(at) = Likeness::FITTED.iter().position(|&known| known == likeness) else {
            return (0.0, 0.0);
        };
        let pair = self.pairs[at][usize::from(solvent == ChemicalClass::Water)];
        let reach = pair.factor * first.scale_of_difference(second, pair.correlation);
        let middle = first.middle - second.middle;
        around_zero(middle - reach, middle + reach)
    }

    /// The correlation of the errors of two solutes in one solvent; 1 for one
    /// and the same solute.
    pub fn correlation(&self, likeness: Likeness, solvent: ChemicalClass) -> f64 {
        let at = Likeness::FITTED.iter().position(|&known| known == likeness);
        at.map_or(1.0, |at| {
            self.pairs[at][usize::from(solvent == ChemicalClass::Water)].correlation
        })
    }

    /// What a reader has to know of an interval: that few measured values, or
    /// none, stand behind a class. Nothing where there are enough.
    pub fn remark(&self, solute: ChemicalClass, solvent: ChemicalClass) -> Option<String> {
        let thin = |side: usize, class: ChemicalClass, of: &str| {
            let rows = self.rows[side][class as usize];
            (rows < THIN_ROWS).then(|| {
                format!(
                    "the interval rests on {rows} measured values of {of} of the class `{}`",
                    class.id()
                )
            })
        };
        thin(0, solute, "solutes").or_else(|| thin(1, solvent, "solvents"))
    }
}

/// An interval widened so that it holds 0: the value of the model itself.
fn around_zero(low: f64, high: f64) -> (f64, f64) {
    (low.min(0.0), high.max(0.0))
}
