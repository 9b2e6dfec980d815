//! The batch path for candidates of the same main groups: one candidate a lane.

use multiversion::multiversion;
use smallvec::{SmallVec, smallvec};

use crate::mixture::PairGap;
use crate::numeric::lanes::{Instructions, LANES, Lanes, each, ln};

use super::component::Combinatorial;
use super::dilute::KeysAtTemperature;
use super::kernel::HALF_Z;

/// The key components at one temperature, for ln γ∞ of each in many pure
/// candidates that consist of the same main groups.
///
/// The answers are those of [`KeysAtTemperature::ln_gamma_inf`] but for
/// rounding. All that depends on the main groups is gathered once; what is left
/// of a candidate is, for each key, a weighted sum of the numbers
///
/// * 1/r′, q/r, ln r and ln q, where r′ is r or r^(3/4),
/// * ln S_k for each main group k of the keys, S_k = Σ_N A_N ψ_Nk,
/// * A_N/S_N for each main group N of the candidate.
///
/// The weight of A_N/S_N is −Σ_k A_k ψ_kN over the main groups of the key, which
/// is why the double sum of the residual part is not seen here. A main group
/// that both the key and the candidate have needs its S only once.
///
/// # Source
///
/// That of [`Unifac`](super::Unifac).
///
/// # Complexity
///
/// With G main groups in the candidate, C in the keys and K keys: two logarithms
/// and C more, G + 2 divisions, and about (G + C) G + K (G + C) products a candidate.
///
/// # Example
///
/// ln γ∞ of ethanol in n-hexane, n-heptane and n-octane, which are made of the
/// main group 1 alone.
///
/// ```
/// use groupsmith::groups::GroupCounts;
/// use groupsmith::mixture::{
///     ActivityModel, CandidateLanes, KeysAtTemperature, SharedGroups, Slips, Unifac,
/// };
/// use groupsmith::numeric::lanes::Instructions;
///
/// let unifac = Unifac::built_in(ActivityModel::UnifacDortmund, Slips::Corrected).unwrap()?;
/// let ethanol = unifac.component(&GroupCounts::from_iter([(1, 1), (2, 1), (14, 1)]))?;
/// let keys = KeysAtTemperature::new(&unifac.at_temperature(323.15)?, &[ethanol])?;
/// let alkanes = SharedGroups::new(&keys, &[1]).map_err(|gap| unifac.tables().gap_error(gap))?;
///
/// let ch3 = unifac.tables().subgroup(1).unwrap();
/// let ch2 = unifac.tables().subgroup(2).unwrap();
/// let r = [4.0, 5.0, 6.0].map(|n| 2.0 * ch3.r + n * ch2.r);
/// let q = [4.0, 5.0, 6.0].map(|n| 2.0 * ch3.q + n * ch2.q);
/// let mut ln_gamma_inf = [0.0; 3];
/// alkanes.ln_gamma_inf(
///     Instructions::Best,
///     &CandidateLanes { r: &r, q: &q, areas: &[&q] },
///     &mut [&mut ln_gamma_inf],
/// );
/// assert!(ln_gamma_inf[0] > ln_gamma_inf[1] && ln_gamma_inf[1] > ln_gamma_inf[2]);
/// # Ok::<(), groupsmith::mixture::MixtureError>(())
/// ```
#[derive(Clone, Debug)]
pub struct SharedGroups {
    combinatorial: Combinatorial,
    /// Main groups of the candidates.
    mains: usize,
    /// Rows of ψ_Nc over the main groups N of the candidates: the first rows are
    /// for c among these, in their order, the others for main groups of the keys only.
    psi: Vec<f64>,
    /// For each main group of the keys: its row of `psi`.
    key_rows: Vec<usize>,
    keys: Vec<Weights>,
}

/// What the numbers of a candidate count in ln γ∞ of one key.
#[derive(Clone, Debug)]
struct Weights {
    constant: f64,
    per_r_flory: f64,
    q_per_r: f64,
    ln_r: f64,
    ln_q: f64,
    /// Positions in `key_rows`, and the weight of that ln S.
    ln_s: SmallVec<[(usize, f64); 4]>,
    /// For each main group N of the candidates: weight of A_N/S_N.
    shares: Vec<f64>,
}

/// Candidates of the same main groups, side by side.
#[derive(Clone, Copy, Debug)]
pub struct CandidateLanes<'a> {
    /// Relative van der Waals volume of each candidate; positive.
    pub r: &'a [f64],
    /// Relative van der Waals surface area of each: the sum of its `areas`; positive.
    pub q: &'a [f64],
    /// For each main group, in the order given to [`SharedGroups::new`]: the
    /// surface Σ ν_k Q_k each candidate has in it, not negative.
    pub areas: &'a [&'a [f64]],
}

impl SharedGroups {
    /// Gathers what the keys need for candidates of these main groups (published numbers).
    ///
    /// # Errors
    ///
    /// [`PairGap`] if an interaction among them, or of one with any key, is not
    /// published: the gap that [`KeysAtTemperature::ln_gamma_inf`] names for a
    /// candidate with the main groups in this order.
    ///
    /// # Panics
    ///
    /// If the model has no such main group, if one is given twice, or none at all.
    pub fn new(keys: &KeysAtTemperature, mains: &[u16]) -> Result<Self, PairGap> {
        assert!(!mains.is_empty(), "candidates have main groups");
        let tables = keys.groups().tables();
        let mut rows: SmallVec<[usize; 16]> = SmallVec::new();
        for &number in mains {
            let main = tables
                .main_index(number)
                .unwrap_or_else(|| panic!("{} has no main group {number}", tables.model()))
                .get();
            assert!(!rows.contains(&main), "main group {number} stands twice");
            rows.push(main);
        }
        let bits = rows.iter().fold(0, |bits, main| bits | 1 << main);
        keys.check(rows.iter().copied(), bits)?;
        let own = rows.clone();
        let key_mains: SmallVec<[usize; 8]> = keys.mains().collect();
        let mut key_rows = Vec::with_capacity(key_mains.len());
        for &main in &key_mains {
            let row = rows.iter().position(|&row| row == main);
            key_rows.push(row.unwrap_or(rows.len()));
            if row.is_none() {
                rows.push(main);
            }
        }
        let groups = keys.groups();
        let psi = rows
            .iter()
            .flat_map(|&to| own.iter().map(move |&from| groups.psi(from, to)))
            .collect();
        let combinatorial = groups.combinatorial();
        let keys = keys
            .keys()
            .map(|(key, areas)| Weights {
                constant: key.constant,
                per_r_flory: -key.r_flory,
                q_per_r: HALF_Z * key.r,
                ln_r: HALF_Z * key.q - combinatorial.power(),
                ln_q: (1.0 - HALF_Z) * key.q,
                ln_s: areas
                    .clone()
                    .enumerate()
                    .filter(|&(_, area)| area != 0.0)
                    .map(|(at, area)| (at, -area))
                    .collect(),
                shares: own
                    .iter()
                    .map(|&to| {
                        let both = key_mains.iter().zip(areas.clone());
                        -both
                            .map(|(&from, area)| area * groups.psi(from, to))
                            .sum::<f64>()
                    })
                    .collect(),
            })
            .collect();
        Ok(Self {
            combinatorial,
            mains: own.len(),
            psi,
            key_rows,
            keys,
        })
    }

    /// ln γ∞ of each key in each pure candidate.
    ///
    /// The bits of an answer depend neither on the instructions nor on the other
    /// candidates. Whether the value can be one (the callers' range check) is
    /// not judged here.
    ///
    /// # Units and shapes
    ///
    /// `out`: a slice for each key in the order of the keys, each as long as there
    /// are candidates. Any number of candidates will do; a multiple of
    /// [`LANES`] leaves no lane unused.
    ///
    /// # Panics
    ///
    /// If the slices are not as many, or not as long, as said.
    pub fn ln_gamma_inf(
        &self,
        instructions: Instructions,
        candidates: &CandidateLanes<'_>,
        out: &mut [&mut [f64]],
    ) {
        let n = candidates.r.len();
        assert_eq!(candidates.q.len(), n, "one surface for each candidate");
        assert_eq!(candidates.areas.len(), self.mains, "areas of every group");
        assert_eq!(out.len(), self.keys.len(), "one result for each key");
        for areas in candidates.areas {
            assert_eq!(areas.len(), n, "one area for each candidate");
        }
        for out in &*out {
            assert_eq!(out.len(), n, "one result for each candidate");
        }
        self.whole_blocks(instructions, candidates, out);
        let rest = n % LANES;
        if rest > 0 {
            self.last_block(instructions, candidates, out, n - rest);
        }
    }

    /// The candidates from `start` on, fewer than a block: lanes past the end repeat the last.
    #[cold]
    fn last_block(
        &self,
        instructions: Instructions,
        candidates: &CandidateLanes<'_>,
        out: &mut [&mut [f64]],
        start: usize,
    ) {
        let filled = |all: &[f64]| -> Lanes {
            std::array::from_fn(|lane| all[(start + lane).min(all.len() - 1)])
        };
        let areas: SmallVec<[Lanes; 8]> = candidates.areas.iter().map(|all| filled(all)).collect();
        let areas: SmallVec<[&[f64]; 8]> = areas.iter().map(|areas| &areas[..]).collect();
        let block = CandidateLanes {
            r: &filled(candidates.r),
            q: &filled(candidates.q),
            areas: &areas,
        };
        let mut found: SmallVec<[Lanes; 4]> = smallvec![[0.0; LANES]; out.len()];
        let mut slices: SmallVec<[&mut [f64]; 4]> =
            found.iter_mut().map(|found| &mut found[..]).collect();
        self.whole_blocks(instructions, &block, &mut slices);
        for (out, found) in out.iter_mut().zip(slices) {
            let out = &mut out[start..];
            out.copy_from_slice(&found[..out.len()]);
        }
    }

    fn whole_blocks(
        &self,
        instructions: Instructions,
        candidates: &CandidateLanes<'_>,
        out: &mut [&mut [f64]],
    ) {
        match instructions {
            Instructions::Best => with_best_instructions(self, candidates, out),
            Instructions::Plain => self.blocks(candidates, out),
        }
    }

    /// Leaves out what does not fill a block.
    #[inline(always)]
    fn blocks(&self, candidates: &CandidateLanes<'_>, out: &mut [&mut [f64]]) {
        let rows = self.psi.len() / self.mains;
        let needed = rows + self.key_rows.len() + self.mains;
        // a call may be for a single block, where the heap would cost as much as the rest
        let mut few = [[0.0; LANES]; 16];
        let mut many;
        let scratch = if needed <= few.len() {
            &mut few[..needed]
        } else {
            many = vec![[0.0; LANES]; needed];
            &mut many
        };
        let (s, scratch) = scratch.split_at_mut(rows);
        let (ln_s, areas) = scratch.split_at_mut(self.key_rows.len());
        let (r, q) = (blocks_of(candidates.r), blocks_of(candidates.q));
        for (at, (r, q)) in r.iter().zip(q).enumerate() {
            for (areas, all) in areas.iter_mut().zip(candidates.areas) {
                *areas = blocks_of(all)[at];
            }
            for (s, row) in s.iter_mut().zip(self.psi.chunks_exact(self.mains)) {
                *s = weighted([0.0; LANES], row, areas);
            }
            for (ln_s, &row) in ln_s.iter_mut().zip(&self.key_rows) {
                *ln_s = ln(&s[row]);
            }
            let (ln_r, ln_q) = (ln(r), ln(q));
            let per_r_flory = each(r, |r| 1.0 / self.combinatorial.r_flory(r));
            let q_per_r = ratio(q, r);
            // from here on the shares A_N/S_N
            let shares = &mut *areas;
            for (share, s) in shares.iter_mut().zip(&*s) {
                *share = ratio(share, s);
            }
            for (key, out) in self.keys.iter().zip(&mut *out) {
                let mut sum = [0.0; LANES];
                for lane in 0..LANES {
                    sum[lane] = key.constant
                        + key.per_r_flory * per_r_flory[lane]
                        + key.q_per_r * q_per_r[lane]
                        + key.ln_r * ln_r[lane]
                        + key.ln_q * ln_q[lane];
                }
                for &(at, weight) in &key.ln_s {
                    for lane in 0..LANES {
                        sum[lane] += weight * ln_s[at][lane];
                    }
                }
                out.as_chunks_mut().0[at] = weighted(sum, &key.shares, shares);
            }
        }
    }
}

/// [`SharedGroups::blocks`] compiled once for each set of instructions.
#[multiversion(targets("x86_64+avx2"))]
fn with_best_instructions(
    shared: &SharedGroups,
    candidates: &CandidateLanes<'_>,
    out: &mut [&mut [f64]],
) {
    shared.blocks(candidates, out);
}

#[inline(always)]
fn blocks_of(all: &[f64]) -> &[Lanes] {
    all.as_chunks().0
}

#[inline(always)]
fn ratio(above: &Lanes, below: &Lanes) -> Lanes {
    let mut out = [0.0; LANES];
    for lane in 0..LANES {
        out[lane] = above[lane] / below[lane];
    }
    out
}

/// `sum` + Σ weight · lanes.
#[inline(always)]
fn weighted(mut sum: Lanes, weights: &[f64], of: &[Lanes]) -> Lanes {
    for (&weight, of) in weights.iter().zip(of) {
        for lane in 0..LANES {
            sum[lane] += weight * of[lane];
        }
    }
    sum
}
