//! The batch path: many candidates at one temperature, at infinite dilution.

use std::sync::Arc;

use crate::mixture::liquid::check_fractions;
use crate::mixture::{MixtureError, PairGap};

use super::component::{Combinatorial, Component, Unifac};
use super::kernel::HALF_Z;
use super::tables::{MainIndex, UnifacTables};

/// ψ of all main groups of a model at one temperature; shared by the batch records.
#[derive(Clone, Debug)]
pub struct GroupsAtTemperature {
    tables: Arc<UnifacTables>,
    temperature_k: f64,
    combinatorial: Combinatorial,
    /// Row m, column n: ψ_mn; 1 where nothing is published, and never used there.
    psi: Vec<f64>,
}

impl GroupsAtTemperature {
    fn new(
        tables: &Arc<UnifacTables>,
        combinatorial: Combinatorial,
        temperature_k: f64,
    ) -> Result<Self, MixtureError> {
        let n = tables.main_groups().len();
        let mut psi = vec![1.0; n * n];
        let refused = MixtureError::Temperature {
            model: tables.model(),
            temperature_k,
        };
        if !(temperature_k > 0.0 && temperature_k.is_finite()) {
            return Err(refused);
        }
        for i in 0..n {
            for j in 0..n {
                let ln_psi = tables.interaction_at(i, j).ln_psi(temperature_k);
                if ln_psi.abs() > super::kernel::MOST_LN_PSI {
                    return Err(refused);
                }
                // two thirds of the pairs are the diagonal or not published
                if ln_psi != 0.0 {
                    psi[i * n + j] = ln_psi.exp();
                }
            }
        }
        Ok(Self {
            tables: Arc::clone(tables),
            temperature_k,
            combinatorial,
            psi,
        })
    }

    /// The temperature in K.
    pub fn temperature_k(&self) -> f64 {
        self.temperature_k
    }

    /// The tables behind it, for [`UnifacTables::gap_error`].
    pub fn tables(&self) -> &UnifacTables {
        &self.tables
    }

    fn main_groups(&self) -> usize {
        self.tables.main_groups().len()
    }

    /// The combinatorial part of the model.
    pub(super) fn combinatorial(&self) -> Combinatorial {
        self.combinatorial
    }

    /// ψ of two main groups by position.
    pub(super) fn psi(&self, from: usize, to: usize) -> f64 {
        self.psi[from * self.main_groups() + to]
    }

    /// Σ_N' A_N' ψ_N'N of a pure component for its own main group `main`: S_N times q.
    #[inline]
    fn own_sum(&self, one: &Component, main: MainIndex) -> f64 {
        let n = self.main_groups();
        one.areas
            .iter()
            .map(|&(other, area)| area * self.psi[other.get() * n + main.get()])
            .sum()
    }

    /// Σ_M A_M E_M = −Σ_M A_M ln S_M of a pure component: the double sum in E adds up to q.
    fn pure_term(&self, one: &Component) -> f64 {
        // one main group: S = 1
        if one.areas.len() == 1 {
            return 0.0;
        }
        let sum: f64 = one
            .areas
            .iter()
            .map(|&(main, area)| area * self.own_sum(one, main).ln())
            .sum();
        one.q * one.q.ln() - sum
    }
}

/// Columns are handled four at a time, the rest filled with groups of no surface.
const LANES: usize = 4;

/// The key components at one temperature, for ln γ∞ of each in one pure candidate after another.
///
/// Everything that does not depend on the candidate is computed once: ψ of
/// every main group with those of the keys, and the pure-component terms of the
/// keys. A candidate then costs one logarithm for each main group of the keys
/// and two for the combinatorial part.
#[derive(Clone, Debug)]
pub struct KeysAtTemperature {
    groups: Arc<GroupsAtTemperature>,
    keys: Vec<Key>,
    mains: u128,
    /// Main groups of the keys, and blocks of [`LANES`] that hold them.
    columns: usize,
    blocks: usize,
    /// For each main group N and block: ψ_Nk, then ψ_kN.
    psi: Vec<[[f64; LANES]; 2]>,
    /// For each key and block: A_k.
    areas: Vec<[f64; LANES]>,
}

/// What ln γ∞ of a key needs besides its surface by main group.
#[derive(Clone, Debug)]
pub(super) struct Key {
    /// Everything in ln γ∞ that does not depend on the candidate: with
    /// Σ A_k (1 + ln q_candidate) = q (1 + ln q_candidate) taken out of the residual part.
    pub(super) constant: f64,
    pub(super) r_flory: f64,
    pub(super) r: f64,
    pub(super) q: f64,
}

impl KeysAtTemperature {
    /// Binds the keys to a temperature.
    ///
    /// Interactions of the keys with one another are not needed and not asked for.
    ///
    /// # Errors
    ///
    /// [`MixtureError::MissingPair`] within one key; [`MixtureError::NoComponents`].
    ///
    /// # Panics
    ///
    /// If a key was made by another model.
    pub fn new(
        groups: &Arc<GroupsAtTemperature>,
        keys: &[Component],
    ) -> Result<Self, MixtureError> {
        if keys.is_empty() {
            return Err(MixtureError::NoComponents);
        }
        let tables = groups.tables();
        let n = groups.main_groups();
        let mut mains = 0;
        let mut records = Vec::with_capacity(keys.len());
        for key in keys {
            assert_eq!(key.model, tables.model(), "a key of another model");
            tables.gap(key.mains).map_err(|gap| tables.gap_error(gap))?;
            mains |= key.mains;
            records.push(Key {
                constant: 1.0 + key.r_flory.ln() - HALF_Z * key.q * (1.0 + (key.r / key.q).ln())
                    + key.q
                    - groups.pure_term(key),
                r_flory: key.r_flory,
                r: key.r,
                q: key.q,
            });
        }
        let places: Vec<usize> = positions(mains).collect();
        let blocks = places.len().div_ceil(LANES);
        let mut psi = vec![[[1.0; LANES]; 2]; n * blocks];
        for main in 0..n {
            for (at, &key_main) in places.iter().enumerate() {
                let block = &mut psi[main * blocks + at / LANES];
                block[0][at % LANES] = groups.psi[main * n + key_main];
                block[1][at % LANES] = groups.psi[key_main * n + main];
            }
        }
        let mut areas = vec![[0.0; LANES]; keys.len() * blocks];
        for (k, key) in keys.iter().enumerate() {
            for (at, &place) in places.iter().enumerate() {
                if let Some((_, area)) = key.areas.iter().find(|(main, _)| main.get() == place) {
                    areas[k * blocks + at / LANES][at % LANES] = *area;
                }
            }
        }
        Ok(Self {
            groups: Arc::clone(groups),
            keys: records,
            mains,
            columns: places.len(),
            blocks,
            psi,
            areas,
        })
    }

    /// Number of keys.
    pub fn len(&self) -> usize {
        self.keys.len()
    }

    /// Whether there is no key; never so for a record that [`Self::new`] made.
    pub fn is_empty(&self) -> bool {
        self.keys.is_empty()
    }

    /// The interactions it was made with, for [`UnifacTables::gap_error`].
    pub fn groups(&self) -> &GroupsAtTemperature {
        &self.groups
    }

    /// ln γ∞ of each key in the pure candidate, into `out` in the order of the keys.
    ///
    /// # Errors
    ///
    /// [`PairGap`] if an interaction within the candidate, or of the candidate with any key, is not published.
    ///
    /// # Panics
    ///
    /// If `out` is not as long as there are keys.
    pub fn ln_gamma_inf(&self, candidate: &Component, out: &mut [f64]) -> Result<(), PairGap> {
        assert_eq!(out.len(), self.keys.len(), "one result for each key");
        debug_assert_eq!(candidate.model, self.groups.tables.model());
        let mains = candidate.areas.iter().map(|&(main, _)| main.get());
        self.check(mains, candidate.mains)?;
        let (ln_r, ln_q) = (candidate.r.ln(), candidate.q.ln());
        let ln_r_flory = self.groups.combinatorial.power() * ln_r;
        let per_r_flory = 1.0 / candidate.r_flory;
        let q_per_r = candidate.q / candidate.r;
        let by_surface = HALF_Z * (ln_r - ln_q) + ln_q;
        for (out, key) in out.iter_mut().zip(&self.keys) {
            *out = key.constant - key.r_flory * per_r_flory - ln_r_flory
                + HALF_Z * key.r * q_per_r
                + key.q * by_surface;
        }
        // Θ_N/S_N of the candidate; the factors 1/q of Θ and S cancel
        let mut few = [0.0; 8];
        let mut many;
        let w = if candidate.areas.len() <= few.len() {
            &mut few[..candidate.areas.len()]
        } else {
            many = vec![0.0; candidate.areas.len()];
            &mut many
        };
        for (w, &(main, area)) in w.iter_mut().zip(&candidate.areas) {
            *w = area / self.groups.own_sum(candidate, main);
        }
        for block in 0..self.blocks {
            let mut s = [0.0; LANES];
            let mut sum = [0.0; LANES];
            for (&(main, area), &w) in candidate.areas.iter().zip(&*w) {
                let [from, to] = &self.psi[main.get() * self.blocks + block];
                for lane in 0..LANES {
                    s[lane] += area * from[lane];
                    sum[lane] += w * to[lane];
                }
            }
            let mut e = [0.0; LANES];
            let used = LANES.min(self.columns - block * LANES);
            for lane in 0..used {
                e[lane] = s[lane].ln() + sum[lane];
            }
            for (k, out) in out.iter_mut().enumerate() {
                let areas = &self.areas[k * self.blocks + block];
                for lane in 0..LANES {
                    *out -= areas[lane] * e[lane];
                }
            }
        }
        Ok(())
    }

    /// The first unpublished pair among the main groups of a candidate (by
    /// position, and the same as `bits`) or between one of them and a key.
    pub(super) fn check(
        &self,
        mains: impl Iterator<Item = usize>,
        bits: u128,
    ) -> Result<(), PairGap> {
        gap_with(&self.groups.tables, mains, bits | self.mains)
    }

    /// The main groups of the keys by position, ascending.
    pub(super) fn mains(&self) -> impl Iterator<Item = usize> {
        positions(self.mains)
    }

    /// Each key with its surface in each of [`Self::mains`].
    pub(super) fn keys(&self) -> impl Iterator<Item = (&Key, impl Iterator<Item = f64> + Clone)> {
        let areas = self.areas.chunks_exact(self.blocks);
        self.keys
            .iter()
            .zip(areas)
            .map(|(key, areas)| (key, areas.as_flattened()[..self.columns].iter().copied()))
    }
}

/// A mixture of stated composition at one temperature, for ln γ∞ of one candidate after another in it.
#[derive(Clone, Debug)]
pub struct HostAtTemperature {
    groups: Arc<GroupsAtTemperature>,
    mains: u128,
    r: f64,
    r_flory: f64,
    q: f64,
    /// E_M in the host, for every main group of the set.
    e: Vec<f64>,
}

impl HostAtTemperature {
    /// Binds the host to a temperature; `x` are its mole fractions, used as given.
    ///
    /// # Errors
    ///
    /// [`MixtureError::MissingPair`] among the components (those with x = 0
    /// included); a composition that is none.
    ///
    /// # Panics
    ///
    /// If a component was made by another model.
    pub fn new(
        groups: &Arc<GroupsAtTemperature>,
        components: &[Component],
        x: &[f64],
    ) -> Result<Self, MixtureError> {
        if components.is_empty() {
            return Err(MixtureError::NoComponents);
        }
        check_fractions(x, components.len())?;
        let tables = groups.tables();
        let n = groups.main_groups();
        let mut host = Self {
            groups: Arc::clone(groups),
            mains: 0,
            r: 0.0,
            r_flory: 0.0,
            q: 0.0,
            e: vec![0.0; n],
        };
        let mut theta = vec![0.0; n];
        for (one, &x) in components.iter().zip(x) {
            assert_eq!(one.model, tables.model(), "a component of another model");
            host.mains |= one.mains;
            host.r += x * one.r;
            host.r_flory += x * one.r_flory;
            host.q += x * one.q;
            for &(main, area) in &one.areas {
                theta[main.get()] += x * area;
            }
        }
        tables
            .gap(host.mains)
            .map_err(|gap| tables.gap_error(gap))?;
        for theta in &mut theta {
            *theta /= host.q;
        }
        let s: Vec<f64> = (0..n)
            .map(|m| (0..n).map(|k| theta[k] * groups.psi[k * n + m]).sum())
            .collect();
        for (m, e) in host.e.iter_mut().enumerate() {
            let sum: f64 = (0..n)
                .map(|k| theta[k] * groups.psi[m * n + k] / s[k])
                .sum();
            *e = 1.0 - s[m].ln() - sum;
        }
        Ok(host)
    }

    /// ln γ∞ of the candidate in the host.
    ///
    /// # Errors
    ///
    /// [`PairGap`] if an interaction within the candidate, or with the host, is not published.
    pub fn ln_gamma_inf(&self, candidate: &Component) -> Result<f64, PairGap> {
        debug_assert_eq!(candidate.model, self.groups.tables.model());
        let mains = candidate.areas.iter().map(|&(main, _)| main.get());
        gap_with(&self.groups.tables, mains, candidate.mains | self.mains)?;
        let residual: f64 = candidate
            .areas
            .iter()
            .map(|&(main, area)| area * self.e[main.get()])
            .sum::<f64>()
            - self.groups.pure_term(candidate);
        let v_flory = candidate.r_flory / self.r_flory;
        let v_per_f = (candidate.r * self.q) / (self.r * candidate.q);
        Ok(residual + 1.0 - v_flory + v_flory.ln()
            - HALF_Z * candidate.q * (1.0 - v_per_f + v_per_f.ln()))
    }
}

/// The first unpublished pair of one of `mains` (by position) with one of `needed` (bits).
fn gap_with(
    tables: &UnifacTables,
    mains: impl Iterator<Item = usize>,
    needed: u128,
) -> Result<(), PairGap> {
    for main in mains {
        let missing = needed & !tables.known[main];
        if missing != 0 {
            return Err(tables.pair_gap(main, missing.trailing_zeros() as usize));
        }
    }
    Ok(())
}

/// The places of the bits that are set, ascending.
fn positions(mut bits: u128) -> impl Iterator<Item = usize> {
    std::iter::from_fn(move || {
        let at = bits.trailing_zeros() as usize;
        bits &= bits.wrapping_sub(1);
        (at < 128).then_some(at)
    })
}

impl Unifac {
    /// ψ of all main groups at a temperature, for the batch records.
    ///
    /// # Errors
    ///
    /// [`MixtureError::Temperature`].
    pub fn at_temperature(
        &self,
        temperature_k: f64,
    ) -> Result<Arc<GroupsAtTemperature>, MixtureError> {
        GroupsAtTemperature::new(&self.tables, self.combinatorial, temperature_k).map(Arc::new)
    }
}
