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
        fn logistic_inverts_logit(p in 1e-12..1.0_f64) {
            prop_assert!((logistic(logit(p)) - p).abs() < 1e-12);
        }
    }
}
