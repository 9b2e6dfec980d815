//! Logarithm and exponential of many numbers side by side.
//!
//! The bodies have no branch and no table, so that a compiler turns a loop over
//! lanes into vector code for whatever instructions it may use. They consist of
//! additions, multiplications, divisions and moves of bits, each rounded by
//! itself (no fused multiply-add), and lanes never mix: the bits of an answer
//! do not depend on the instructions.
//!
//! All functions have to be inlined into one that is compiled for the wanted
//! instructions; see [`Instructions`].

/// Numbers handled side by side: two or four vector registers of AVX2.
pub const LANES: usize = 8;

/// One number for each lane.
pub type Lanes = [f64; LANES];

/// Which instructions a vector kernel may use; the bits of its answers do not depend on it.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub enum Instructions {
    /// The best the processor offers, found when the program runs.
    #[default]
    Best,
    /// Those that every processor of the kind has; for comparisons.
    Plain,
}

/// ln 2 in two parts; the first has 42 bits, so its product with an exponent is exact.
const LN_2: [f64; 2] = [0.693_147_180_559_890_3, 5.497_923_018_708_371e-14];

/// Q of ln((1 + s)/(1 − s)) = 2 s (1 + z Q(z)), z = s², ascending.
const LN_SERIES: [f64; 7] = [
    0.333_333_333_333_333_5,
    0.199_999_999_999_497_52,
    0.142_857_143_129_877_43,
    0.111_111_055_673_975_4,
    0.090_914_445_626_308_61,
    0.076_658_608_002_780_21,
    0.073_082_248_425_217_03,
];

/// P of exp(x) = 1 + x + x² P(x), ascending.
const EXP_SERIES: [f64; 10] = [
    0.500_000_000_000_000_1,
    0.166_666_666_666_666_69,
    0.041_666_666_666_624_164,
    0.008_333_333_333_330_065,
    0.001_388_888_891_719_671_9,
    0.000_198_412_698_630_405_45,
    2.480_152_132_236_869_2e-5,
    2.755_726_848_031_002_4e-6,
    2.762_007_587_998_336_7e-7,
    2.510_037_583_256_123_4e-8,
];

/// Bits of the mantissa in a number.
const MANTISSA_BITS: u32 = f64::MANTISSA_DIGITS - 1;

/// Largest |x| that [`exp`] is made for.
const MOST_EXPONENT: f64 = 700.0;

/// ln x of each lane, for positive normal x.
///
/// x = 2^k m with m from √½ to √2 gives k ln 2 + ln m, and ln m is an odd
/// series in s = (m − 1)/(m + 1). Within 3 units in the last place of
/// `f64::ln`; anything but a positive normal number gives a number without meaning.
///
/// # Source
///
/// The series of the inverse hyperbolic tangent; coefficients derived for this
/// interval by `tests/scripts/lane_polynomials.py`.
#[inline(always)]
pub fn ln(x: &Lanes) -> Lanes {
    debug_assert!(
        x.iter().all(|x| x.is_normal() && *x > 0.0),
        "logarithm of {x:?}"
    );
    each(x, ln_of_one)
}

/// exp x of each lane, for |x| ≤ 700.
///
/// x = n ln 2 + t with |t| ≤ ln(2)/2 gives 2^n exp t. Within 2 units in the
/// last place of `f64::exp`; a larger |x| gives a number without meaning.
///
/// # Source
///
/// The series of the exponential; coefficients derived for this interval by
/// `tests/scripts/lane_polynomials.py`.
#[inline(always)]
pub fn exp(x: &Lanes) -> Lanes {
    debug_assert!(
        x.iter().all(|x| x.abs() <= MOST_EXPONENT),
        "exponential of {x:?}"
    );
    each(x, exp_of_one)
}

/// `f` of each lane.
#[inline(always)]
pub fn each(x: &Lanes, f: impl Fn(f64) -> f64) -> Lanes {
    let mut out = [0.0; LANES];
    for (out, &x) in out.iter_mut().zip(x) {
        *out = f(x);
    }
    out
}

#[inline(always)]
fn ln_of_one(x: f64) -> f64 {
    const MANTISSA: u64 = (1 << MANTISSA_BITS) - 1;
    const SQRT_HALF: u64 = std::f64::consts::FRAC_1_SQRT_2.to_bits();
    /// 2^52: a whole number below it, put into its mantissa, is added to it.
    const WHOLE: f64 = (1_u64 << MANTISSA_BITS) as f64;
    /// Exponent of 1 as it is stored.
    const BIAS: f64 = 1023.0;
    // counted from √½, so that the exponent steps there and not at powers of 2
    let counted = x.to_bits() + (1.0_f64.to_bits() - SQRT_HALF);
    let m = f64::from_bits((counted & MANTISSA) + SQRT_HALF);
    let k = f64::from_bits(counted >> MANTISSA_BITS | WHOLE.to_bits()) - (WHOLE + BIAS);
    let s = (m - 1.0) / (m + 1.0);
    let z = s * s;
    let twice = s + s;
    let ln_m = twice + twice * (z * polynomial(&LN_SERIES, z));
    k * LN_2[0] + (ln_m + k * LN_2[1])
}

#[inline(always)]
fn exp_of_one(x: f64) -> f64 {
    /// 1.5 · 2^52: a sum with it ends in a whole number, rounded to nearest.
    const TO_WHOLE: f64 = 1.5 * (1_u64 << MANTISSA_BITS) as f64;
    let shifted = x * std::f64::consts::LOG2_E + TO_WHOLE;
    let n = shifted - TO_WHOLE;
    let t = (x - n * LN_2[0]) - n * LN_2[1];
    let root = 1.0 + (t + t * t * polynomial(&EXP_SERIES, t));
    // the low bits of `shifted` are n; all others leave by the shift
    f64::from_bits(
        root.to_bits()
            .wrapping_add(shifted.to_bits() << MANTISSA_BITS),
    )
}

#[inline(always)]
fn polynomial<const N: usize>(ascending: &[f64; N], x: f64) -> f64 {
    let mut sum = ascending[N - 1];
    for &coefficient in ascending[..N - 1].iter().rev() {
        sum = sum * x + coefficient;
    }
    sum
}

#[cfg(test)]
mod tests {
    use multiversion::multiversion;
    use proptest::prelude::*;

    use super::*;

    /// Distance in units in the last place of the second.
    fn ulps(ours: f64, theirs: f64) -> f64 {
        let next = f64::from_bits(theirs.abs().to_bits() + 1);
        ((ours - theirs) / (next - theirs.abs())).abs()
    }

    fn ln_one(x: f64) -> f64 {
        ln(&[x; LANES])[0]
    }

    fn exp_one(x: f64) -> f64 {
        exp(&[x; LANES])[0]
    }

    #[multiversion(targets("x86_64+avx2"))]
    fn both_with_best(x: &Lanes) -> [Lanes; 2] {
        let ln_x = ln(x);
        [exp(&ln_x), ln_x]
    }

    #[test]
    fn logarithms_agree_with_the_library_on_wide_grids() {
        let mut worst = 0.0_f64;
        // every power of 2, with mantissas on both sides of √2 and close to 1
        for exponent in -1022..=1023 {
            for step in 0..64 {
                let x = (1.0 + f64::from(step) / 64.0) * 2.0_f64.powi(exponent);
                worst = worst.max(ulps(ln_one(x), x.ln()));
            }
        }
        for step in 1..200_000 {
            let x = f64::from(step) / 50_000.0;
            worst = worst.max(ulps(ln_one(x), x.ln()));
        }
        assert!(worst <= 3.0, "{worst} units in the last place");
        for x in [f64::MIN_POSITIVE, 1.0 - f64::EPSILON / 2.0, f64::MAX] {
            assert!(ulps(ln_one(x), x.ln()) <= 3.0, "{x:e}");
        }
        assert_eq!(ln_one(1.0), 0.0);
    }

    #[test]
    fn exponentials_agree_with_the_library_on_a_wide_grid() {
        let mut worst = 0.0_f64;
        for step in -70_000..=70_000 {
            let x = f64::from(step) / 100.0;
            worst = worst.max(ulps(exp_one(x), x.exp()));
            let near = x / 1000.0;
            worst = worst.max(ulps(exp_one(near), near.exp()));
        }
        assert!(worst <= 2.0, "{worst} units in the last place");
        assert_eq!(exp_one(0.0), 1.0);
        assert_eq!(exp_one(-0.0), 1.0);
    }

    proptest! {
        #[test]
        fn logarithms_agree_with_the_library(x in proptest::num::f64::POSITIVE | proptest::num::f64::NORMAL) {
            prop_assert!(ulps(ln_one(x), x.ln()) <= 3.0, "{x:e}");
        }

        #[test]
        fn exponentials_agree_with_the_library(x in -700.0..=700.0) {
            prop_assert!(ulps(exp_one(x), x.exp()) <= 2.0, "{x}");
        }

        #[test]
        fn instructions_and_neighbours_change_no_bit(x in proptest::array::uniform8(1e-250..1e250)) {
            let plain = [exp(&ln(&x)), ln(&x)];
            let best = both_with_best(&x);
            for lane in 0..LANES {
                prop_assert_eq!(plain[1][lane].to_bits(), best[1][lane].to_bits());
                prop_assert_eq!(plain[0][lane].to_bits(), best[0][lane].to_bits());
                prop_assert_eq!(ln_one(x[lane]).to_bits(), best[1][lane].to_bits());
            }
        }
    }
}
