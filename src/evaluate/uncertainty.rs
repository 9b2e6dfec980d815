//! What the intervals of estimates make of limits, musts and the score.
//!
//! **Distribution.** A value with a 90 % interval is a two-piece normal variable:
//! the value is its median, and a deviate z of the standard normal distribution
//! stands for value + z·s, with s = half-width/1.645 of its side. The scale is
//! linear, or logarithmic where that makes the interval more nearly symmetric
//! and nothing in it is below 0. 5 % lie below the interval and 5 % above it. A
//! measured value, or one without an interval, is exact.
//!
//! **Dependence.** Targets whose figures rest on one source (the same figure, the
//! same property at two temperatures, a selectivity and the volatility made of
//! it) share their deviate and are joined exactly. Different sources count as
//! independent, though two figures of one molecule may err together: for the
//! probability of all musts there are bounds that hold however they do.
//!
//! **Score.** It is a product of powers of desirabilities, and 0 where a must is
//! missed. Of a product of independent factors the mean is the product of their
//! means, and the mean square that of their mean squares. No random numbers.

use smallvec::SmallVec;

use crate::brief::Want;
use crate::numeric::{NORMAL_90, normal_cdf, normal_moments};
use crate::quantity::{Estimate, Status};

/// Variances of a factor of the score below this are rounding and quadrature.
const LEAST_VARIANCE: f64 = 1e-12;

/// A value with the spread of what it may truly be.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Spread {
    value: f64,
    /// Standard deviation below the value, on the scale.
    below: f64,
    /// Standard deviation above it.
    above: f64,
    is_logarithmic: bool,
}

impl Spread {
    /// A value that is known.
    pub const fn exact(value: f64) -> Self {
        Self {
            value,
            below: 0.0,
            above: 0.0,
            is_logarithmic: false,
        }
    }

    /// A value with its 90 % interval, in one unit; an end on the wrong side of
    /// the value counts as no width there.
    pub fn new(value: f64, (low, high): (f64, f64)) -> Self {
        let linear = [value - low, high - value].map(|width| width.max(0.0));
        let skew = |[below, above]: [f64; 2]| (above - below).abs() / (above + below);
        if value > 0.0 && low > 0.0 && high > 0.0 {
            let logarithmic = [(value / low).ln(), (high / value).ln()].map(|width| width.max(0.0));
            if skew(logarithmic) < skew(linear) {
                return Self::with_widths(value, logarithmic, true);
            }
        }
        Self::with_widths(value, linear, false)
    }

    fn with_widths(value: f64, [below, above]: [f64; 2], is_logarithmic: bool) -> Self {
        Self {
            value,
            below: below / NORMAL_90,
            above: above / NORMAL_90,
            is_logarithmic,
        }
    }

    /// An estimate with its interval; what is measured is known.
    pub fn of(estimate: &Estimate) -> Self {
        match interval_that_counts(estimate) {
            Some(interval) => Self::new(estimate.value, interval),
            None => Self::exact(estimate.value),
        }
    }

    /// Whether there is no spread at all.
    pub fn is_exact(&self) -> bool {
        self.below <= 0.0 && self.above <= 0.0
    }

    /// The value at a deviate of the standard normal distribution.
    fn at(&self, z: f64) -> f64 {
        let step = z * if z < 0.0 { self.below } else { self.above };
        if self.is_logarithmic {
            self.value * step.exp()
        } else {
            self.value + step
        }
    }

    /// The deviate at which the value passes a limit, infinite where it never
    /// does; at the value itself, `at_value`.
    fn deviate(&self, limit: f64, at_value: f64) -> f64 {
        if limit == self.value {
            return at_value;
        }
        let step = match self.is_logarithmic {
            true if limit <= 0.0 => return f64::NEG_INFINITY,
            true => (limit / self.value).ln(),
            false => limit - self.value,
        };
        // No width on that side: an infinite deviate.
        step / if step < 0.0 { self.below } else { self.above }
    }

    /// Deviates whose values lie from `low` to `high`.
    fn deviates(&self, (low, high): (f64, f64)) -> Stretch {
        if self.is_exact() {
            return match (low..=high).contains(&self.value) {
                true => Stretch::ALL,
                false => Stretch::NONE,
            };
        }
        // A side without width is a lump at the value.
        let lump = |width: f64, end: f64| if width > 0.0 { 0.0 } else { end };
        Stretch {
            from: self.deviate(low, lump(self.below, f64::NEG_INFINITY)),
            to: self.deviate(high, lump(self.above, f64::INFINITY)),
        }
    }

    /// Probability that a want is met; 0 or 1 for an exact value.
    pub fn probability(&self, want: &Want) -> f64 {
        self.met(want).probability()
    }

    fn met(&self, want: &Want) -> Stretch {
        if self.is_exact() {
            return match want.is_met(self.value) {
                true => Stretch::ALL,
                false => Stretch::NONE,
            };
        }
        self.deviates(want.met_range())
    }
}

/// The interval of an estimate, where it makes the value uncertain.
pub fn interval_that_counts(estimate: &Estimate) -> Option<(f64, f64)> {
    estimate
        .interval
        .filter(|_| estimate.status == Status::Estimated)
}

/// Deviates from one to another; empty where `from` is not below `to`.
#[derive(Clone, Copy, Debug, PartialEq)]
struct Stretch {
    from: f64,
    to: f64,
}

impl Stretch {
    const ALL: Self = Self {
        from: f64::NEG_INFINITY,
        to: f64::INFINITY,
    };
    const NONE: Self = Self {
        from: f64::INFINITY,
        to: f64::NEG_INFINITY,
    };

    /// Of a figure that falls where its source rises.
    fn mirrored(self) -> Self {
        Self {
            from: -self.to,
            to: -self.from,
        }
    }

    fn and(self, other: Self) -> Self {
        Self {
            from: self.from.max(other.from),
            to: self.to.min(other.to),
        }
    }

    fn probability(self) -> f64 {
        (normal_cdf(self.to) - normal_cdf(self.from)).max(0.0)
    }
}

/// Whether a limit is kept, as far as the method can tell.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Judgement {
    /// It is, beyond the confidence.
    Meets,
    /// It is not, beyond the confidence.
    Fails,
    /// The interval leaves it open.
    WithinError,
}

impl Judgement {
    /// What a probability of meeting a limit says: it fails below the
    /// confidence, and meets where failing is as improbable.
    pub fn of(probability: f64, confidence: f64) -> Self {
        if probability < confidence || probability <= 0.0 {
            Self::Fails
        } else if probability >= confidence.max(1.0 - confidence) {
            Self::Meets
        } else {
            Self::WithinError
        }
    }

    /// What it says to a person.
    pub const fn text(self) -> &'static str {
        match self {
            Self::Meets => "meets",
            Self::Fails => "fails",
            Self::WithinError => "within the method's error",
        }
    }
}

/// A target with the figure of a candidate it looks at.
#[derive(Clone, Copy, Debug)]
pub(super) struct Term<'a> {
    pub(super) want: &'a Want,
    pub(super) spread: Spread,
    /// What the figure rests on; terms of one source share their deviate.
    pub(super) source: usize,
    /// Whether the figure rises with its source.
    pub(super) rises: bool,
    pub(super) must: bool,
    /// Power of the desirability in the score; 0 where the target does not count.
    pub(super) power: f64,
}

impl Term<'_> {
    fn value_at(&self, deviate: f64) -> f64 {
        self.spread.at(if self.rises { deviate } else { -deviate })
    }

    fn met(&self) -> Stretch {
        let met = self.spread.met(self.want);
        if self.rises { met } else { met.mirrored() }
    }

    /// Where the desirability changes its form.
    fn kinks(&self) -> [f64; 4] {
        self.want.kinks().map(|kink| {
            let deviate = self.spread.deviate(kink, 0.0);
            if self.rises { deviate } else { -deviate }
        })
    }
}

/// What one source makes of the score and the musts.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Factor {
    pub(super) source: usize,
    /// Probability that the musts on it are met.
    pub(super) probability: f64,
    /// Mean of its factor of the score, 0 where a must on it is missed.
    pub(super) mean: f64,
    /// Mean of its square.
    pub(super) square: f64,
}

/// What intervals make of a candidate.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Judged {
    /// The factor of everything that is exact.
    pub(super) exact: f64,
    pub(super) factors: SmallVec<[Factor; 6]>,
}

impl Judged {
    /// Judges the terms of a candidate; `exact` is the factor of the score that
    /// no interval touches.
    pub(super) fn of(exact: f64, terms: &[Term<'_>]) -> Self {
        let mut factors = SmallVec::<[Factor; 6]>::new();
        for (position, term) in terms.iter().enumerate() {
            let source = term.source;
            if terms[..position].iter().all(|other| other.source != source) {
                factors.push(factor(source, terms));
            }
        }
        Self { exact, factors }
    }

    /// Probability that all musts are met, sources being independent.
    pub(super) fn probability(&self) -> f64 {
        self.factors
            .iter()
            .map(|factor| factor.probability)
            .product()
    }

    /// Least and greatest probability of all musts, however sources hang
    /// together (the bounds of Boole and Fréchet).
    pub(super) fn probability_bounds(&self) -> (f64, f64) {
        let missed: f64 = self.factors.iter().map(|f| 1.0 - f.probability).sum();
        let least = self.factors.iter().map(|f| f.probability);
        ((1.0 - missed).max(0.0), least.fold(1.0, f64::min))
    }

    /// Mean of the score.
    pub(super) fn mean(&self) -> f64 {
        let factors = self.factors.iter().map(|factor| factor.mean);
        self.exact * factors.product::<f64>()
    }

    /// Variance of the score; 0 where nothing is uncertain, or where it is
    /// smaller than the integrals are exact.
    pub(super) fn variance(&self) -> f64 {
        if self.factors.is_empty() {
            return 0.0;
        }
        let squares = self.factors.iter().map(|factor| factor.square);
        let means = self.factors.iter().map(|factor| factor.mean * factor.mean);
        let variance = squares.product::<f64>() - means.product::<f64>();
        if variance < LEAST_VARIANCE {
            0.0
        } else {
            self.exact * self.exact * variance
        }
    }

    /// How far the expected score would vary with what a measurement of one
    /// source shows: its variance.
    pub(super) fn variance_by(&self, source: usize) -> f64 {
        let factors = self
            .factors
            .iter()
            .map(|factor| match factor.source == source {
                true => (factor.square - factor.mean * factor.mean).max(0.0),
                false => factor.mean * factor.mean,
            });
        self.exact * self.exact * factors.product::<f64>()
    }
}

fn factor(source: usize, terms: &[Term<'_>]) -> Factor {
    let of_source = || terms.iter().filter(|term| term.source == source);
    let met = of_source()
        .filter(|term| term.must)
        .fold(Stretch::ALL, |met, term| met.and(term.met()));
    let counted = || of_source().filter(|term| term.power > 0.0);
    let mut cuts = SmallVec::<[f64; 16]>::new();
    cuts.extend([met.from, met.to]);
    let inside = |deviate: f64| met.from < deviate && deviate < met.to;
    for term in counted() {
        // At 0 the two halves of the distribution meet.
        let kinks = term.kinks().into_iter().chain([0.0]);
        cuts.extend(kinks.filter(|&kink| inside(kink)));
    }
    cuts.sort_unstable_by(f64::total_cmp);
    let [mut mean, mut square] = [0.0; 2];
    if met.from < met.to {
        for ends in cuts.windows(2).filter(|ends| ends[0] < ends[1]) {
            let [from, to] = [ends[0], ends[1]];
            let middle = 0.5 * (from.max(-10.0) + to.min(10.0));
            // Between two kinks a desirability is 0, 1, or changes throughout.
            let mut changes = SmallVec::<[&Term<'_>; 4]>::new();
            let mut is_zero = false;
            for term in counted() {
                let there = term.want.desirability(term.value_at(middle));
                is_zero |= there <= 0.0;
                if there < 1.0 {
                    changes.push(term);
                }
            }
            let [first, second] = if is_zero {
                [0.0; 2]
            } else if changes.is_empty() {
                [Stretch { from, to }.probability(); 2]
            } else {
                normal_moments(from, to, |z| {
                    changes
                        .iter()
                        .map(|term| term.want.desirability(term.value_at(z)).powf(term.power))
                        .product()
                })
            };
            mean += first;
            square += second;
        }
    }
    Factor {
        source,
        probability: met.probability(),
        mean: mean.min(1.0),
        square: square.min(1.0),
    }
}

/// The 90 % interval of a score: 1.645 standard deviations to either side of the
/// mean, within 0 and 1. The score counts as normal here, which it is not near
/// its ends.
pub fn score_interval(mean: f64, variance: f64) -> (f64, f64) {
    let half = NORMAL_90 * variance.sqrt();
    ((mean - half).max(0.0), (mean + half).min(1.0))
}

/// Probability that one score is better than another, both being normal and
/// independent, each given by its mean and variance; one half where both are
/// exact and equal.
pub fn probability_of_better(one: (f64, f64), other: (f64, f64)) -> f64 {
    let difference = one.0 - other.0;
    let variance = one.1 + other.1;
    if variance > 0.0 {
        normal_cdf(difference / variance.sqrt())
    } else if difference == 0.0 {
        0.5
    } else if difference > 0.0 {
        1.0
    } else {
        0.0
    }
}

#[cfg(test)]
mod tests {
    use proptest::prelude::*;

    use super::*;
    use crate::brief::Direction;

    fn at_least(limit: f64) -> Want {
        Want::AtLeast {
            limit,
            tolerance: 0.0,
        }
    }

    fn term<'a>(want: &'a Want, spread: Spread, source: usize) -> Term<'a> {
        Term {
            want,
            spread,
            source,
            rises: true,
            must: false,
            power: 0.0,
        }
    }

    /// 5 % lie below the interval, half below the value, 5 % above, on either scale.
    #[test]
    fn the_ends_of_an_interval_are_those_of_ninety_percent() {
        for (interval, is_logarithmic) in [
            ((380.0, 400.0), false),
            ((370.0, 395.0), false),
            ((195.0, 780.0), true),
        ] {
            let spread = Spread::new(390.0, interval);
            assert_eq!(spread.is_logarithmic, is_logarithmic);
            for (limit, above) in [(interval.0, 0.95), (390.0, 0.5), (interval.1, 0.05)] {
                let found = spread.probability(&at_least(limit));
                assert!((found - above).abs() < 2e-5, "{limit}: {found}");
            }
        }
    }

    /// Φ(1) = 0.8413447461 (Abramowitz and Stegun, table 26.1).
    #[test]
    fn one_standard_deviation_is_that_of_the_table() {
        let spread = Spread::new(1.0, (1.0 - NORMAL_90, 1.0 + NORMAL_90));
        assert!((spread.probability(&at_least(0.0)) - 0.841_344_746_1).abs() < 1e-10);
        let both = Want::Between {
            low: 0.0,
            high: 2.0,
            tolerance: 0.0,
        };
        assert!((spread.probability(&both) - 0.682_689_492_1).abs() < 1e-9);
    }

    #[test]
    fn a_side_without_width_is_a_lump_at_the_value() {
        let spread = Spread::new(5.0, (5.0, 6.0));
        assert_eq!(spread.probability(&at_least(5.0)), 1.0);
        assert_eq!(spread.probability(&at_least(4.0)), 1.0);
        let at_most = |limit| Want::AtMost {
            limit,
            tolerance: 0.0,
        };
        assert_eq!(spread.probability(&at_most(5.0)), 0.5);
        assert_eq!(spread.probability(&at_most(4.9)), 0.0);
        assert!(spread.probability(&at_least(5.1)) < 0.5);
    }

    /// ∫ over a preference with weight 1: E d = [φ(a) − φ(b) + bounds …] in closed form.
    #[test]
    fn the_expected_desirability_is_the_integral_in_closed_form() {
        use crate::numeric::normal_density;
        let want = Want::Prefer {
            direction: Direction::High,
            worst: -0.7,
            best: 1.9,
        };
        let spread = Spread::new(0.0, (-NORMAL_90, NORMAL_90));
        let judged = Judged::of(
            1.0,
            &[Term {
                power: 1.0,
                ..term(&want, spread, 0)
            }],
        );
        // (z − a)/(b − a) between a and b, 1 above.
        let (a, b) = (-0.7, 1.9);
        let between = normal_density(a) - normal_density(b) - a * (normal_cdf(b) - normal_cdf(a));
        let expected = between / (b - a) + 1.0 - normal_cdf(b);
        assert!((judged.mean() - expected).abs() < 1e-9);
        assert!(judged.variance() > 0.0);
        assert!((judged.variance_by(0) - judged.variance()).abs() < 1e-15);
    }

    #[test]
    fn two_limits_on_one_figure_are_joined_exactly() {
        let spread = Spread::new(0.0, (-NORMAL_90, NORMAL_90));
        let wants = [
            at_least(-1.0),
            Want::AtMost {
                limit: 0.5,
                tolerance: 0.0,
            },
        ];
        let both: Vec<Term<'_>> = wants
            .iter()
            .map(|want| Term {
                must: true,
                ..term(want, spread, 3)
            })
            .collect();
        let judged = Judged::of(1.0, &both);
        let joint = normal_cdf(0.5) - normal_cdf(-1.0);
        assert!((judged.probability() - joint).abs() < 1e-15);
        // Nothing counts in the score: it is 1 where the musts are met.
        assert!((judged.mean() - joint).abs() < 1e-12);
        // A figure that falls with the source: its limit cuts the other side.
        let mut mirrored = both.clone();
        mirrored[1].rises = false;
        let judged = Judged::of(1.0, &mirrored);
        let joint = 1.0 - normal_cdf(-0.5);
        assert!((judged.probability() - joint).abs() < 1e-15);
        // Of two sources the product, within its bounds.
        mirrored[1].source = 4;
        let judged = Judged::of(1.0, &mirrored);
        let product = normal_cdf(1.0) * normal_cdf(0.5);
        assert!((judged.probability() - product).abs() < 1e-12);
        let (least, most) = judged.probability_bounds();
        assert!(least < product && product < most);
    }

    #[test]
    fn words_follow_the_confidence() {
        for (probability, confidence, judgement) in [
            (0.04, 0.05, Judgement::Fails),
            (0.05, 0.05, Judgement::WithinError),
            (0.95, 0.05, Judgement::Meets),
            (0.6, 0.9, Judgement::Fails),
            (0.9, 0.9, Judgement::Meets),
            (0.0, 0.0, Judgement::Fails),
            (1.0, 0.0, Judgement::Meets),
        ] {
            assert_eq!(Judgement::of(probability, confidence), judgement);
        }
    }

    fn wants() -> impl Strategy<Value = Want> {
        let number = 50.0..500.0_f64;
        prop_oneof![
            (number.clone(), 0.0..50.0_f64)
                .prop_map(|(limit, tolerance)| Want::AtLeast { limit, tolerance }),
            (number.clone(), 0.0..50.0_f64)
                .prop_map(|(limit, tolerance)| Want::AtMost { limit, tolerance }),
            (number.clone(), 0.0..200.0_f64, 0.0..50.0_f64).prop_map(|(low, width, tolerance)| {
                Want::Between {
                    low,
                    high: low + width,
                    tolerance,
                }
            }),
            (number.clone(), 1.0..100.0_f64)
                .prop_map(|(value, tolerance)| Want::CloseTo { value, tolerance }),
            (number, 1.0..200.0_f64).prop_map(|(worst, width)| Want::Prefer {
                direction: Direction::Low,
                worst,
                best: worst - width,
            }),
        ]
    }

    proptest! {
        #[test]
        fn a_wider_interval_brings_the_probability_nearer_to_one_half(
            value in 50.0..500.0_f64,
            limit in 50.0..500.0_f64,
            width in 0.1..40.0_f64,
            factor in 1.0..5.0_f64,
        ) {
            let of = |width: f64| {
                Spread::new(value, (value - width, value + width)).probability(&at_least(limit))
            };
            let (narrow, wide) = (of(width), of(width * factor));
            prop_assert!((wide - 0.5).abs() <= (narrow - 0.5).abs() + 1e-12);
            prop_assert!((wide - 0.5) * (narrow - 0.5) >= 0.0);
        }

        #[test]
        fn an_exact_value_is_certain(value in 50.0..500.0_f64, want in wants()) {
            let probability = Spread::exact(value).probability(&want);
            prop_assert_eq!(probability, f64::from(u8::from(want.is_met(value))));
        }

        /// The narrowest interval leaves the score as it is.
        #[test]
        fn narrow_intervals_tend_to_the_bare_score(
            value in 50.0..500.0_f64,
            want in wants(),
            power in 0.05..1.0_f64,
        ) {
            // A step is no limit of anything, a root is steep at 0.
            prop_assume!(want.kinks().iter().all(|kink| (kink - value).abs() > 0.1));
            let spread = Spread::new(value, (value - 1e-6, value + 1e-6));
            let judged = Judged::of(1.0, &[Term { power, ..term(&want, spread, 0) }]);
            let bare = want.desirability(value).powf(power);
            prop_assert!((judged.mean() - bare).abs() < 1e-6, "{} {bare}", judged.mean());
            prop_assert!(judged.variance() < 1e-9);
        }

        /// Against a sum over a million quantiles would be slow; 4000 steps of z do.
        #[test]
        fn moments_are_those_of_a_plain_sum(
            value in 50.0..500.0_f64,
            below in 1.0..45.0_f64,
            above in 1.0..200.0_f64,
            wants in (wants(), wants()),
            must in any::<bool>(),
        ) {
            let spread = Spread::new(value, (value - below, value + above));
            let terms = [
                Term { power: 0.4, must, ..term(&wants.0, spread, 0) },
                Term { power: 0.6, ..term(&wants.1, spread, 0) },
            ];
            let judged = Judged::of(1.0, &terms);
            let step = 0.004;
            let plain: f64 = (-2000..2000)
                .map(|i| {
                    let z = (f64::from(i) + 0.5) * step;
                    let x = spread.at(z);
                    let met = !must || wants.0.is_met(x);
                    let score = wants.0.desirability(x).powf(0.4) * wants.1.desirability(x).powf(0.6);
                    f64::from(u8::from(met)) * score * crate::numeric::normal_density(z) * step
                })
                .sum();
            prop_assert!((judged.mean() - plain).abs() < 4e-3, "{} {plain}", judged.mean());
            prop_assert!((0.0..=1.0).contains(&judged.probability()));
            let (low, high) = score_interval(judged.mean(), judged.variance());
            prop_assert!(0.0 <= low && low <= judged.mean() && judged.mean() <= high && high <= 1.0);
        }

        #[test]
        fn better_and_worse_are_complementary(a in 0.0..1.0_f64, b in 0.0..1.0_f64, v in 0.0..0.1_f64) {
            let better = probability_of_better((a, v), (b, 0.01));
            prop_assert!((better + probability_of_better((b, 0.01), (a, v)) - 1.0).abs() < 1e-12);
        }
    }
}
