//! How likely a reading is, given what the circuit shows: instrument error, range, slips.
//!
//! A reading y of a forecast μ: normal with σ² = (r·μ)² + a² + step²/12 + (pickup · enclosed)²
//! (IEC 61557 classes by knowledge), censored over the range; with probability ε it is a slip: a decimal
//! or prefix off, or anything at all. The mixture bounds what one reading can say (Box & Tiao 1968).

use crate::knowledge::ErrorRow;
use crate::network::Outcome;
use crate::numeric::special::{exp, ln, ln_normal_pdf, log_add_exp, normal_cdf};
use crate::quantity::{Parsed, ParsedValue, Word};

/// asinh by logarithms (Abramowitz & Stegun 4.6.20).
fn asinh(x: f64) -> f64 {
    if x < 0.0 {
        -asinh(-x)
    } else {
        ln(x + (x * x + 1.0).sqrt())
    }
}

/// The coordinate u = asinh(r·y/a)/r in which an instrument's error (σ² = a² + r²y²) has unit width.
pub fn unit_coordinate(row: &ErrorRow, y: f64) -> f64 {
    let a = row.absolute.max(row.resolution / 12f64.sqrt()).max(1e-12);
    let r = row.relative.max(1e-4);
    asinh(r * y / a) / r
}

/// A forecast with what its error needs.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Shown {
    /// What the instrument would show without error.
    pub outcome: Outcome,
    /// A inside the clamp.
    pub enclosed: f64,
}

/// Standard deviation of a reading of `mean`, SI.
pub fn spread(row: &ErrorRow, mean: f64, enclosed: f64) -> f64 {
    let parts = [
        row.relative * mean,
        row.absolute,
        row.resolution / 12f64.sqrt(),
        row.pickup * enclosed,
    ];
    parts.iter().map(|p| p * p).sum::<f64>().sqrt().max(1e-12)
}

/// Log density (or probability) of a reading that is no slip; `soften` multiplies the spread, `smooth`
/// (in the coordinate of unit error) is added to it: the bandwidth of a handful of draws.
pub fn core(row: &ErrorRow, shown: Shown, parsed: &Parsed, soften: f64, smooth: f64) -> f64 {
    let soften = if parsed.rough { soften * 4.0 } else { soften };
    let mean = match shown.outcome {
        Outcome::Word(word) => {
            let same = matches!(parsed.value, ParsedValue::Word { word: w } if w == word);
            return if same { 0.0 } else { f64::NEG_INFINITY };
        }
        Outcome::Number(mean) => mean,
    };
    let sd = if mean.is_finite() {
        let own = spread(row, mean, shown.enclosed) * soften;
        let unit = spread(row, mean, 0.0) * smooth;
        (own * own + unit * unit).sqrt()
    } else {
        1.0
    };
    let beyond = mean >= row.over;
    match parsed.value {
        ParsedValue::Value { value } if beyond => {
            // At the end of its range an instrument may still show a number.
            if value >= 0.8 * row.over {
                -1.0 - ln(row.over)
            } else {
                f64::NEG_INFINITY
            }
        }
        ParsedValue::Value { value } => ln_normal_pdf(value, mean, sd),
        ParsedValue::Range { .. } if beyond => f64::NEG_INFINITY,
        ParsedValue::Range { low, high } => {
            let wide = (high - low) / 12f64.sqrt();
            ln_normal_pdf((low + high) / 2.0, mean, (sd * sd + wide * wide).sqrt())
        }
        ParsedValue::Over { over } => {
            if mean.is_infinite() {
                0.0
            } else {
                ln(normal_cdf((mean - over) / sd).max(1e-300))
            }
        }
        ParsedValue::Under { under } => {
            if mean.is_infinite() {
                f64::NEG_INFINITY
            } else {
                ln(normal_cdf((under - mean) / sd).max(1e-300))
            }
        }
        ParsedValue::Word { word: Word::Open } => {
            if beyond {
                0.0
            } else {
                ln(normal_cdf((mean - row.over) / sd).max(1e-300))
            }
        }
        ParsedValue::Word { .. } => f64::NEG_INFINITY,
    }
}

/// Log density of a reading that is a slip of whatever kind: uniform in the logarithm over the range.
pub fn gross(row: &ErrorRow, parsed: &Parsed) -> f64 {
    let step = row.resolution.max(row.over * 1e-9);
    let decades = ln((row.over / step).max(10.0));
    let at = |y: f64| -ln((y.abs() + 10.0 * step) * decades);
    match parsed.value {
        ParsedValue::Value { value } => at(value),
        ParsedValue::Range { low, high } => at((low + high) / 2.0),
        ParsedValue::Over { .. } | ParsedValue::Under { .. } | ParsedValue::Word { .. } => ln(0.3),
    }
}

/// Log density of a slip: a decimal or a prefix off, or anything.
pub fn slip(row: &ErrorRow, shown: Shown, parsed: &Parsed, soften: f64) -> f64 {
    let anything = ln(0.6) + gross(row, parsed);
    let (ParsedValue::Value { value }, Outcome::Number(mean)) = (parsed.value, shown.outcome)
    else {
        return anything;
    };
    if !mean.is_finite() {
        return anything;
    }
    [0.1, 10.0, 1e-3, 1e3].iter().fold(anything, |sum, factor| {
        let sd = spread(row, mean, shown.enclosed) * factor * soften;
        log_add_exp(sum, ln(0.1) + ln_normal_pdf(value, mean * factor, sd))
    })
}

/// Log likelihood of all readings of one test at one place: right together, or slips together.
pub fn together(row: &ErrorRow, cores: f64, slips: f64) -> f64 {
    log_add_exp(ln(1.0 - row.slip) + cores, ln(row.slip) + slips)
}

/// Probability that they are slips.
pub fn slip_share(row: &ErrorRow, cores: f64, slips: f64) -> f64 {
    exp(ln(row.slip) + slips - together(row, cores, slips))
}
