//! ln γ of a stated mixture and its derivatives.

use crate::mixture::MixtureError;
use crate::mixture::liquid::{Liquid, check_fractions};

use super::component::Component;
use super::tables::{Interaction, UnifacTables};

/// Half of the coordination number z = 10.
pub(super) const HALF_Z: f64 = 5.0;

/// Largest |ln ψ| taken as meaningful; keeps every product of the kernel finite.
pub(super) const MOST_LN_PSI: f64 = 150.0;

/// The components of a mixture and the interactions of their main groups.
///
/// Immutable and shared between threads; a [`UnifacState`] computes with it.
#[derive(Clone, Debug)]
pub struct UnifacMixture {
    model: &'static str,
    components: usize,
    /// Main groups of the mixture.
    mains: usize,
    /// The same filled up to a multiple of [`LANES`] with groups of no surface
    /// that interact with none: the length of every row below.
    width: usize,
    r: Vec<f64>,
    q: Vec<f64>,
    r_flory: Vec<f64>,
    ln_r_flory: Vec<f64>,
    ln_r_per_q: Vec<f64>,
    /// Row i: surface of component i in each main group of the mixture.
    areas: Vec<f64>,
    /// The main groups of component i are `own[own_ends[i - 1]..own_ends[i]]`.
    own: Vec<OwnMain>,
    own_ends: Vec<usize>,
    /// Cell of ψ and its parameters, where they are not all zero.
    interactions: Vec<(usize, Interaction)>,
}

/// Rows are handled four numbers at a time.
const LANES: usize = 4;

/// A main group within one pure component.
#[derive(Clone, Copy, Debug)]
struct OwnMain {
    main: usize,
    area: f64,
    /// Surface fraction.
    theta: f64,
}

impl UnifacMixture {
    pub(super) fn new(
        tables: &UnifacTables,
        components: &[Component],
    ) -> Result<Self, MixtureError> {
        if components.is_empty() {
            return Err(MixtureError::NoComponents);
        }
        assert!(
            components
                .iter()
                .all(|component| component.model == tables.model()),
            "components of one model may not enter a mixture of another"
        );
        let present = components.iter().fold(0, |bits, one| bits | one.mains);
        tables.gap(present).map_err(|gap| tables.gap_error(gap))?;

        let places: Vec<usize> = (0..tables.main_groups().len())
            .filter(|&at| present >> at & 1 == 1)
            .collect();
        let mains = places.len();
        let width = mains.next_multiple_of(LANES);
        let mut areas = vec![0.0; components.len() * width];
        let mut own = Vec::new();
        let mut own_ends = Vec::with_capacity(components.len());
        for (row, component) in areas.chunks_exact_mut(width).zip(components) {
            for &(main, area) in &component.areas {
                let below = present & ((1 << main.0) - 1);
                let main = below.count_ones() as usize;
                row[main] = area;
                own.push(OwnMain {
                    main,
                    area,
                    theta: area / component.q,
                });
            }
            own_ends.push(own.len());
        }
        let mut interactions = Vec::with_capacity(mains * mains);
        for (m, &place_m) in places.iter().enumerate() {
            for (n, &place_n) in places.iter().enumerate() {
                let parameters = tables.interaction_at(place_m, place_n);
                if parameters != Interaction::default() {
                    interactions.push((m * width + n, parameters));
                }
            }
        }
        let column = |of: fn(&Component) -> f64| components.iter().map(of).collect();
        Ok(Self {
            model: tables.model(),
            components: components.len(),
            mains,
            width,
            r: column(|one| one.r),
            q: column(|one| one.q),
            r_flory: column(|one| one.r_flory),
            ln_r_flory: column(|one| one.r_flory.ln()),
            ln_r_per_q: column(|one| (one.r / one.q).ln()),
            areas,
            own,
            own_ends,
            interactions,
        })
    }

    /// Number of components.
    pub fn components(&self) -> usize {
        self.components
    }

    /// Identifier of the model.
    pub fn model(&self) -> &'static str {
        self.model
    }

    /// The mixture at a temperature, ready to compute.
    ///
    /// # Errors
    ///
    /// [`MixtureError::Temperature`] if it is not a positive number or so low
    /// that an interaction leaves the range of numbers.
    pub fn state(&self, temperature_k: f64) -> Result<UnifacState<'_>, MixtureError> {
        let (n, g) = (self.components, self.width);
        let mut state = UnifacState {
            mixture: self,
            temperature_k: f64::NAN,
            psi: vec![1.0; g * g],
            pure: vec![0.0; n],
            slopes_at_k: f64::NAN,
            psi_slope: Vec::new(),
            pure_slope: Vec::new(),
            theta: vec![0.0; g],
            s: vec![0.0; g],
            w: vec![0.0; g],
            e: vec![0.0; g],
            spare: Vec::new(),
        };
        state.set_temperature(temperature_k)?;
        Ok(state)
    }
}

/// A mixture at a temperature, with the scratch memory of the kernel.
///
/// A new composition at the same temperature is cheap; a new temperature
/// recomputes the interactions and the pure-component terms.
///
/// With A_iM the surface of component i in main group M, Θ_M the surface
/// fraction of M in the mixture, S_M = Σ_N Θ_N ψ_NM and
/// E_M = 1 − ln S_M − Σ_N Θ_N ψ_MN / S_N, the residual part is
/// ln γ_i^R = Σ_M A_iM (E_M − E_M in pure i): the sum over subgroups of the
/// 1975 paper (eqs. 8–11), taken by main group because ψ depends on those only.
/// In pure i the last sum adds up to q_i over A_iM, which leaves −Σ_M A_iM ln S_M.
///
/// The combinatorial part is ln γ_i^C = 1 − V' + ln V' − 5 q (1 − V/F + ln(V/F)),
/// V = r_i/Σ x_j r_j, F = q_i/Σ x_j q_j, V' = V for the original model and the
/// same with r^(3/4) for the modified one (Weidlich and Gmehling 1987, eqs. 3–6).
///
/// Fractions enter as given: a published example whose fractions do not add up
/// to 1 is reproduced as printed.
#[derive(Clone, Debug)]
pub struct UnifacState<'m> {
    mixture: &'m UnifacMixture,
    temperature_k: f64,
    /// Row m, column n: ψ_mn.
    psi: Vec<f64>,
    /// Σ_M A_iM E_M of pure i.
    pure: Vec<f64>,
    /// Temperature at which the two slopes below were made; NaN before the first time.
    slopes_at_k: f64,
    psi_slope: Vec<f64>,
    pure_slope: Vec<f64>,
    theta: Vec<f64>,
    s: Vec<f64>,
    /// Θ_N / S_N.
    w: Vec<f64>,
    e: Vec<f64>,
    spare: Vec<f64>,
}

/// Sums over the components of a composition, in the forms the combinatorial part needs.
struct Sums {
    /// Σ x q.
    q: f64,
    /// Σ x q / Σ x r.
    q_per_r: f64,
    ln_r_per_q: f64,
    /// 1/Σ x r', r' being r or r^(3/4).
    per_r_flory: f64,
    ln_r_flory: f64,
}

impl Sums {
    fn new(r: f64, r_flory: f64, q: f64) -> Self {
        let q_per_r = q / r;
        Self {
            q,
            q_per_r,
            ln_r_per_q: -q_per_r.ln(),
            per_r_flory: 1.0 / r_flory,
            ln_r_flory: r_flory.ln(),
        }
    }
}

/// S, Θ/S and E of the group mixture with surface fractions `theta`; E of the first `mains` groups only.
#[inline]
fn group_terms(
    psi: &[f64],
    mains: usize,
    theta: &[f64],
    s: &mut [f64],
    w: &mut [f64],
    e: &mut [f64],
) {
    let width = theta.len();
    s.fill(0.0);
    for (&theta, row) in theta[..mains].iter().zip(psi.chunks_exact(width)) {
        add_times(s, theta, row);
    }
    for ((w, &theta), &s) in w.iter_mut().zip(theta).zip(&*s) {
        *w = theta / s;
    }
    // groups of the filling have Θ = 0 and every ψ = 1, so S = 1 there
    for ((e, &s), row) in e[..mains].iter_mut().zip(&*s).zip(psi.chunks_exact(width)) {
        *e = 1.0 - s.ln() - dot(row, w);
    }
}

/// Adds `factor` times `row`; lengths are equal and multiples of [`LANES`].
#[inline]
fn add_times(sum: &mut [f64], factor: f64, row: &[f64]) {
    for (sum, row) in sum
        .as_chunks_mut::<LANES>()
        .0
        .iter_mut()
        .zip(row.as_chunks::<LANES>().0)
    {
        for (sum, value) in sum.iter_mut().zip(row) {
            *sum += factor * value;
        }
    }
}

/// Scalar product; lengths are equal and multiples of [`LANES`].
#[inline]
fn dot(a: &[f64], b: &[f64]) -> f64 {
    let mut sums = [0.0; LANES];
    for (a, b) in a
        .as_chunks::<LANES>()
        .0
        .iter()
        .zip(b.as_chunks::<LANES>().0)
    {
        for ((sum, a), b) in sums.iter_mut().zip(a).zip(b) {
            *sum += a * b;
        }
    }
    (sums[0] + sums[2]) + (sums[1] + sums[3])
}

impl UnifacState<'_> {
    /// The temperature in K.
    pub fn temperature_k(&self) -> f64 {
        self.temperature_k
    }

    /// Moves to another temperature.
    ///
    /// # Errors
    ///
    /// Like [`UnifacMixture::state`]; the state is then left at NaN and refuses to compute.
    pub fn set_temperature(&mut self, temperature_k: f64) -> Result<(), MixtureError> {
        let mixture = self.mixture;
        self.temperature_k = f64::NAN;
        let refused = || MixtureError::Temperature {
            model: mixture.model,
            temperature_k,
        };
        if !(temperature_k > 0.0 && temperature_k.is_finite()) {
            return Err(refused());
        }
        let per_k = 1.0 / temperature_k;
        let mut largest = 0.0_f64;
        for &(cell, p) in &mixture.interactions {
            let ln_psi = -(p.a_k * per_k + p.b + p.c_per_k * temperature_k);
            largest = largest.max(ln_psi.abs());
            self.psi[cell] = ln_psi.exp();
        }
        if largest > MOST_LN_PSI {
            return Err(refused());
        }
        let mut start = 0;
        for (pure, &end) in self.pure.iter_mut().zip(&mixture.own_ends) {
            let own = &mixture.own[start..end];
            *pure = pure_term(&self.psi, mixture.width, own);
            start = end;
        }
        self.temperature_k = temperature_k;
        Ok(())
    }

    /// Checks the fractions and sets Θ and its terms; returns the sums over the components.
    fn compose(&mut self, x: &[f64]) -> Result<Sums, MixtureError> {
        let mixture = self.mixture;
        check_fractions(x, mixture.components)?;
        if self.temperature_k.is_nan() {
            return Err(MixtureError::Temperature {
                model: mixture.model,
                temperature_k: self.temperature_k,
            });
        }
        let (mut r, mut r_flory, mut q) = (0.0, 0.0, 0.0);
        self.theta.fill(0.0);
        for (i, (&x, areas)) in x
            .iter()
            .zip(mixture.areas.chunks_exact(mixture.width))
            .enumerate()
        {
            r += x * mixture.r[i];
            r_flory += x * mixture.r_flory[i];
            q += x * mixture.q[i];
            add_times(&mut self.theta, x, areas);
        }
        let per_q = 1.0 / q;
        for theta in &mut self.theta {
            *theta *= per_q;
        }
        group_terms(
            &self.psi,
            mixture.mains,
            &self.theta,
            &mut self.s,
            &mut self.w,
            &mut self.e,
        );
        Ok(Sums::new(r, r_flory, q))
    }

    fn combinatorial(&self, i: usize, sums: &Sums) -> f64 {
        let mixture = self.mixture;
        let (r, q) = (mixture.r[i], mixture.q[i]);
        let v_flory = mixture.r_flory[i] * sums.per_r_flory;
        let ln_v_flory = mixture.ln_r_flory[i] - sums.ln_r_flory;
        let ln_v_per_f = mixture.ln_r_per_q[i] - sums.ln_r_per_q;
        1.0 - v_flory + ln_v_flory - HALF_Z * (q - r * sums.q_per_r + q * ln_v_per_f)
    }

    fn residual(&self, i: usize) -> f64 {
        let g = self.mixture.width;
        dot(&self.mixture.areas[i * g..(i + 1) * g], &self.e) - self.pure[i]
    }

    /// ln γ of every component.
    ///
    /// # Units and shapes
    ///
    /// `x`: mole fractions, length n, used as given; `out`: length n, component order kept.
    /// A fraction of 0 gives the value at infinite dilution.
    ///
    /// # Errors
    ///
    /// [`MixtureError::Length`], [`MixtureError::Value`] for a negative or
    /// non-finite fraction, [`MixtureError::Empty`].
    pub fn ln_gamma(&mut self, x: &[f64], out: &mut [f64]) -> Result<(), MixtureError> {
        check_length("results", out.len(), self.mixture.components)?;
        let sums = self.compose(x)?;
        for (i, out) in out.iter_mut().enumerate() {
            *out = self.combinatorial(i, &sums) + self.residual(i);
        }
        Ok(())
    }

    /// The combinatorial and the residual part of ln γ; shapes and errors as [`Self::ln_gamma`].
    ///
    /// # Errors
    ///
    /// As [`Self::ln_gamma`].
    pub fn ln_gamma_parts(
        &mut self,
        x: &[f64],
        combinatorial: &mut [f64],
        residual: &mut [f64],
    ) -> Result<(), MixtureError> {
        check_length("results", combinatorial.len(), self.mixture.components)?;
        check_length("results", residual.len(), self.mixture.components)?;
        let sums = self.compose(x)?;
        for i in 0..self.mixture.components {
            combinatorial[i] = self.combinatorial(i, &sums);
            residual[i] = self.residual(i);
        }
        Ok(())
    }

    /// d ln γ / dT at constant composition, in 1/K.
    ///
    /// Only ψ depends on T, so only the residual part contributes.
    ///
    /// # Errors
    ///
    /// As [`Self::ln_gamma`].
    pub fn ln_gamma_slope_per_k(&mut self, x: &[f64], out: &mut [f64]) -> Result<(), MixtureError> {
        check_length("results", out.len(), self.mixture.components)?;
        self.compose(x)?;
        self.make_slopes();
        let g = self.mixture.width;
        self.spare.resize(self.spare.len().max(g), 0.0);
        group_slopes(
            &self.psi,
            &self.psi_slope,
            &self.theta,
            &self.s,
            &mut self.spare,
            &mut self.e,
        );
        for ((out, areas), &pure) in out
            .iter_mut()
            .zip(self.mixture.areas.chunks_exact(g))
            .zip(&self.pure_slope)
        {
            *out = dot(areas, &self.e) - pure;
        }
        Ok(())
    }

    fn make_slopes(&mut self) {
        if self.slopes_at_k == self.temperature_k {
            return;
        }
        let mixture = self.mixture;
        let g = mixture.width;
        self.psi_slope.clear();
        self.psi_slope.resize(g * g, 0.0);
        for &(cell, p) in &mixture.interactions {
            self.psi_slope[cell] = self.psi[cell] * p.ln_psi_slope_per_k(self.temperature_k);
        }
        self.pure_slope.clear();
        let mut start = 0;
        for &end in &mixture.own_ends {
            let own = &mixture.own[start..end];
            self.pure_slope.push(
                -own.iter()
                    .map(|of| {
                        of.area * own_s(&self.psi_slope, g, own, of.main)
                            / own_s(&self.psi, g, own, of.main)
                    })
                    .sum::<f64>(),
            );
            start = end;
        }
        self.slopes_at_k = self.temperature_k;
    }

    /// ∂ ln γ_i/∂n_j at one mole of mixture, T and the other amounts constant.
    ///
    /// # Units and shapes
    ///
    /// `x`: length n, adds up to 1; `out`: n × n, row i is ln γ_i, column j the amount n_j.
    /// Rows are free of units (1/mol at one mole). The matrix is symmetric, and
    /// Σ_i x_i ∂ ln γ_i/∂n_j = 0 (Gibbs–Duhem).
    ///
    /// # Errors
    ///
    /// As [`Self::ln_gamma`], and [`MixtureError::Sum`] if the fractions do not
    /// add up to 1 within 1e-9.
    pub fn composition_derivatives(
        &mut self,
        x: &[f64],
        out: &mut [f64],
    ) -> Result<(), MixtureError> {
        let mixture = self.mixture;
        let (n, g) = (mixture.components, mixture.width);
        check_length("results", out.len(), n * n)?;
        let Sums {
            per_r_flory,
            q,
            q_per_r,
            ..
        } = self.compose(x)?;
        let sum: f64 = x.iter().sum();
        if (sum - 1.0).abs() > 1e-9 {
            return Err(MixtureError::Sum { sum });
        }
        // P_jM = Σ_N A_jN ψ_NM
        self.spare.clear();
        self.spare.resize((n * g).max(g), 0.0);
        for (p, areas) in self
            .spare
            .chunks_exact_mut(g)
            .zip(mixture.areas.chunks_exact(g))
        {
            for (&area, row) in areas.iter().zip(self.psi.chunks_exact(g)) {
                for (p, &psi) in p.iter_mut().zip(row) {
                    *p += area * psi;
                }
            }
        }
        for j in 0..n {
            let area_j = &mixture.areas[j * g..(j + 1) * g];
            let p_j = &self.spare[j * g..(j + 1) * g];
            // ∂E_M/∂n_j; the change of the total surface cancels but for q_j
            for (m, (e, row)) in self.e.iter_mut().zip(self.psi.chunks_exact(g)).enumerate() {
                let mut sum = mixture.q[j] - p_j[m] / self.s[m];
                for k in 0..g {
                    sum += row[k] * (self.w[k] * p_j[k] - area_j[k]) / self.s[k];
                }
                *e = sum / q;
            }
            let (v_j, f_j) = (mixture.r[j] * q_per_r / q, mixture.q[j] / q);
            let flory_j = mixture.r_flory[j] * per_r_flory;
            for i in 0..n {
                let combinatorial = (1.0 - mixture.r_flory[i] * per_r_flory) * (1.0 - flory_j)
                    - HALF_Z * (mixture.q[i] - mixture.r[i] * q_per_r) * (f_j - v_j);
                out[i * n + j] = combinatorial + dot(&mixture.areas[i * g..(i + 1) * g], &self.e);
            }
        }
        Ok(())
    }
}

fn check_length(what: &'static str, found: usize, expected: usize) -> Result<(), MixtureError> {
    if found == expected {
        Ok(())
    } else {
        Err(MixtureError::Length {
            what,
            expected,
            found,
        })
    }
}

/// Σ_M A_M E_M of a pure component, over its own main groups only.
///
/// There Σ_M A_M Σ_N Θ_N ψ_MN/S_N = q, so it is −Σ_M A_M ln S_M.
#[inline]
fn pure_term(psi: &[f64], width: usize, own: &[OwnMain]) -> f64 {
    // one main group: S = 1
    if own.len() == 1 {
        return 0.0;
    }
    -own.iter()
        .map(|of| of.area * own_s(psi, width, own, of.main).ln())
        .sum::<f64>()
}

/// S_M of a pure component, or its slope if `psi` holds slopes.
#[inline]
fn own_s(psi: &[f64], width: usize, own: &[OwnMain], main: usize) -> f64 {
    own.iter()
        .map(|one| one.theta * psi[one.main * width + main])
        .sum()
}

/// dE_M/dT = −S'_M/S_M − Σ_N Θ_N (ψ'_MN/S_N − ψ_MN S'_N/S_N²), into `e`.
fn group_slopes(
    psi: &[f64],
    psi_slope: &[f64],
    theta: &[f64],
    s: &[f64],
    s_slope: &mut [f64],
    e: &mut [f64],
) {
    let g = theta.len();
    let s_slope = &mut s_slope[..g];
    s_slope.fill(0.0);
    for (&theta, row) in theta.iter().zip(psi_slope.chunks_exact(g)) {
        for (s, &slope) in s_slope.iter_mut().zip(row) {
            *s += theta * slope;
        }
    }
    for (m, e) in e.iter_mut().enumerate() {
        let mut sum = -s_slope[m] / s[m];
        for n in 0..g {
            let (psi, slope) = (psi[m * g + n], psi_slope[m * g + n]);
            sum -= theta[n] / s[n] * (slope - psi * s_slope[n] / s[n]);
        }
        *e = sum;
    }
}

impl Liquid for UnifacState<'_> {
    fn components(&self) -> usize {
        self.mixture.components
    }

    fn temperature_k(&self) -> f64 {
        self.temperature_k
    }

    fn set_temperature(&mut self, temperature_k: f64) -> Result<(), MixtureError> {
        UnifacState::set_temperature(self, temperature_k)
    }

    fn ln_gamma(&mut self, x: &[f64], out: &mut [f64]) -> Result<(), MixtureError> {
        UnifacState::ln_gamma(self, x, out)
    }

    fn ln_gamma_slope_per_k(&mut self, x: &[f64], out: &mut [f64]) -> Result<(), MixtureError> {
        UnifacState::ln_gamma_slope_per_k(self, x, out)
    }

    fn composition_derivatives(&mut self, x: &[f64], out: &mut [f64]) -> Result<(), MixtureError> {
        UnifacState::composition_derivatives(self, x, out)
    }
}
