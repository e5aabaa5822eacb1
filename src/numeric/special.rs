//! Elementary and special functions over `libm`, whose bits are the same on every machine.
//!
//! The platform's own `exp`, `ln`, `sin` differ in the last bit from machine to machine; a replayed log
//! must give the same odds, so every transcendental number of the program passes through here. Square
//! roots are exact by IEEE 754 and need no detour.

use num_complex::Complex64;

pub use super::normal::{
    StudentT, ln_normal_cdf, ln_normal_interval, ln_normal_pdf, ln_student_t, normal_cdf,
    normal_pdf, normal_quantile,
};

/// Natural logarithm of √(2π).
pub const LN_SQRT_2PI: f64 = 0.918_938_533_204_672_8;

/// e to the power `x`.
pub fn exp(x: f64) -> f64 {
    libm::exp(x)
}

/// e to the power `x` for `x` ≤ 0, relative error below 1e-14; taken as −700 below that.
///
/// Sums and products alone (ln 2 split in two as by Cody & Waite 1980, Taylor to the eleventh power), so that
/// the compiler works out several at once; the same bits everywhere all the same.
#[inline]
pub fn exp_many(x: f64) -> f64 {
    // Adding 1.5 · 2⁵² leaves the nearest whole number in the last bits of the mantissa.
    const ROUND: f64 = 6_755_399_441_055_744.0;
    const LN_2_HIGH: f64 = 0.693_147_180_369_123_8;
    const LN_2_LOW: f64 = 1.908_214_929_270_587_7e-10;
    const TAYLOR: [f64; 11] = [
        1.0 / 39_916_800.0,
        1.0 / 3_628_800.0,
        1.0 / 362_880.0,
        1.0 / 40_320.0,
        1.0 / 5040.0,
        1.0 / 720.0,
        1.0 / 120.0,
        1.0 / 24.0,
        1.0 / 6.0,
        0.5,
        1.0,
    ];
    let x = x.max(-700.0);
    let shifted = x * std::f64::consts::LOG2_E + ROUND;
    let whole = shifted - ROUND;
    let rest = (x - whole * LN_2_HIGH) - whole * LN_2_LOW;
    let mut sum = 0.0;
    for term in TAYLOR {
        sum = (sum + term) * rest;
    }
    (1.0 + sum) * f64::from_bits(shifted.to_bits().wrapping_add(1023) << 52)
}

/// e to the power `x`, less one, exact for small `x`.
pub fn exp_m1(x: f64) -> f64 {
    libm::expm1(x)
}

/// Natural logarithm; −∞ at 0, NaN below.
pub fn ln(x: f64) -> f64 {
    libm::log(x)
}

/// ln(1 + x), exact for small `x`.
pub fn ln_1p(x: f64) -> f64 {
    libm::log1p(x)
}

/// Logarithm to base 2 (bits).
pub fn log2(x: f64) -> f64 {
    libm::log2(x)
}

/// Logarithm to base 10 (decades).
pub fn log10(x: f64) -> f64 {
    libm::log10(x)
}

/// `x` to the power `y`.
pub fn pow(x: f64, y: f64) -> f64 {
    libm::pow(x, y)
}

/// Sine of `x` in radians.
pub fn sin(x: f64) -> f64 {
    libm::sin(x)
}

/// Cosine of `x` in radians.
pub fn cos(x: f64) -> f64 {
    libm::cos(x)
}

/// Angle of the point (`x`, `y`) in radians, −π..π.
pub fn atan2(y: f64, x: f64) -> f64 {
    libm::atan2(y, x)
}

/// Hyperbolic tangent.
pub fn tanh(x: f64) -> f64 {
    libm::tanh(x)
}

/// Magnitude of a phasor; `Complex64::norm` would call the platform's `hypot`.
///
/// Valid for magnitudes between 1e-150 and 1e150, where the square neither under- nor overflows.
pub fn abs(z: Complex64) -> f64 {
    z.norm_sqr().sqrt()
}

/// Angle of a phasor in radians, −π..π.
pub fn angle(z: Complex64) -> f64 {
    atan2(z.im, z.re)
}

/// A phasor of magnitude `r` at `radians`.
pub fn polar(r: f64, radians: f64) -> Complex64 {
    Complex64::new(r * cos(radians), r * sin(radians))
}

/// Error function.
pub fn erf(x: f64) -> f64 {
    libm::erf(x)
}

/// Complementary error function, 1 − erf(x), exact in the tail.
pub fn erfc(x: f64) -> f64 {
    libm::erfc(x)
}

/// ln |Γ(x)|.
pub fn ln_gamma(x: f64) -> f64 {
    libm::lgamma(x)
}

/// ln Σ exp(`terms`), without overflow or underflow; −∞ of nothing.
pub fn log_sum_exp(terms: &[f64]) -> f64 {
    let top = terms.iter().copied().fold(f64::NEG_INFINITY, f64::max);
    if !top.is_finite() {
        return top;
    }
    top + ln(terms.iter().map(|&t| exp(t - top)).sum())
}

/// ln(eᵃ + eᵇ).
pub fn log_add_exp(a: f64, b: f64) -> f64 {
    let (high, low) = if a >= b { (a, b) } else { (b, a) };
    if high == f64::NEG_INFINITY {
        high
    } else {
        high + ln_1p(exp(low - high))
    }
}

/// Logit, ln(p / (1 − p)).
pub fn logit(p: f64) -> f64 {
    ln(p) - ln_1p(-p)
}

/// Inverse of [`logit`].
pub fn logistic(x: f64) -> f64 {
    if x >= 0.0 {
        1.0 / (1.0 + exp(-x))
    } else {
        let e = exp(x);
        e / (1.0 + e)
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    #[test]
    fn many_at_the_ends() {
        assert_eq!(exp_many(0.0), 1.0);
        assert_eq!(exp_many(-1e300), exp_many(-700.0));
        assert!(exp_many(-700.0) < 1e-300);
    }

    #[test]
    fn nothing_sums_to_minus_infinity() {
        assert_eq!(log_sum_exp(&[]), f64::NEG_INFINITY);
        assert_eq!(log_sum_exp(&[f64::NEG_INFINITY; 3]), f64::NEG_INFINITY);
        assert_eq!(log_add_exp(f64::NEG_INFINITY, -3.0), -3.0);
    }

    proptest! {
        #[test]
        fn log_sum_exp_shifts(mut terms in prop::collection::vec(-50.0..50.0_f64, 1..20), shift in -1e5..1e5_f64) {
            let plain = log_sum_exp(&terms);
            let direct = ln(terms.iter().map(|&t| exp(t)).sum());
            prop_assert!((plain - direct).abs() < 1e-12 * plain.abs().max(1.0));
            terms.iter_mut().for_each(|t| *t += shift);
            prop_assert!((log_sum_exp(&terms) - shift - plain).abs() < 1e-9);
        }

        #[test]
        fn many_are_as_good_as_one(x in -690.0..0.0_f64) {
            prop_assert!((exp_many(x) / exp(x) - 1.0).abs() < 1e-14);
        }

        #[test]
        fn logistic_inverts_logit(p in 1e-12..1.0_f64) {
            prop_assert!((logistic(logit(p)) - p).abs() < 1e-12);
        }
    }
}
