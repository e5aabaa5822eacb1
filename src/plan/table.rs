//! A check's outcomes in bins: probability of each under every hypothesis, shared by bits and costs.
//!
//! Numbers are binned in the coordinate u = asinh(r·y/a)/r in which the instrument's error
//! (σ² = a² + r²y²) has unit width everywhere, so the bins need no finer place than any other. Words
//! have bins of their own. A share ε of readings is gross and falls anywhere.

use crate::belief::Forecast;
use crate::belief::sight::unit_coordinate;
use crate::knowledge::ErrorRow;
use crate::network::Outcome;
use crate::numeric::special::normal_cdf;
use crate::quantity::Word;

/// Width of a bin, in spreads.
const BIN: f64 = 1.0;
/// Bins at most; beyond, they widen.
const MOST: usize = 160;

/// `p[hypothesis][bin]`, rows summing to one.
#[derive(Clone, Debug, PartialEq)]
pub struct Table {
    /// Probabilities.
    pub p: Vec<Vec<f64>>,
}

/// Bins the forecasts of one check under each hypothesis.
pub fn table(row: &ErrorRow, forecasts: &[&Forecast]) -> Table {
    let mut words: Vec<Word> = Vec::new();
    let (mut low, mut high) = (f64::INFINITY, f64::NEG_INFINITY);
    let a = row.absolute.max(row.resolution / 12f64.sqrt()).max(1e-12);
    for f in forecasts {
        for way in &f.ways {
            match way.outcome {
                Outcome::Word(w) => {
                    if !words.contains(&w) {
                        words.push(w);
                    }
                }
                Outcome::Number(y) => {
                    let u = unit_coordinate(row, y);
                    low = low.min(u - 4.0);
                    high = high.max(u + 4.0);
                }
            }
        }
    }
    let numbers = if low.is_finite() {
        ((high - low) / BIN).ceil().clamp(1.0, MOST as f64) as usize
    } else {
        0
    };
    let step = if numbers > 0 {
        (high - low) / numbers as f64
    } else {
        1.0
    };
    let bins = numbers + words.len();
    let floor = row.slip / bins.max(1) as f64;
    let p = forecasts
        .iter()
        .map(|f| {
            let mut line = vec![0.0; bins];
            let mut total = 0.0;
            let smooth = f.bandwidth(row);
            for way in &f.ways {
                total += way.weight;
                match way.outcome {
                    Outcome::Word(w) => {
                        if let Some(k) = words.iter().position(|x| *x == w) {
                            line[numbers + k] += way.weight;
                        }
                    }
                    Outcome::Number(y) => {
                        let u = unit_coordinate(row, y);
                        let here = (a * a + (row.relative * y) * (row.relative * y)).sqrt();
                        let own = (way.sd / here).clamp(0.3, 50.0);
                        let sd = (own * own + smooth * smooth).sqrt();
                        let first = (((u - 4.0 * sd - low) / step).floor().max(0.0)) as usize;
                        let last = ((((u + 4.0 * sd - low) / step).ceil()) as usize).min(numbers);
                        let mut below = normal_cdf((low + first as f64 * step - u) / sd);
                        let edge = below;
                        let mut put = 0.0;
                        for (b, cell) in line.iter_mut().enumerate().take(last).skip(first) {
                            let above = normal_cdf((low + (b + 1) as f64 * step - u) / sd);
                            *cell += way.weight * (above - below);
                            put += above - below;
                            below = above;
                        }
                        // What falls beyond the outer bins gathers in them.
                        if numbers > 0 && last > first {
                            line[first] += way.weight * edge;
                            line[last - 1] += way.weight * (1.0 - put - edge).max(0.0);
                        } else if numbers > 0 {
                            line[first.min(numbers - 1)] += way.weight;
                        }
                    }
                }
            }
            for cell in &mut line {
                *cell = if total > 0.0 {
                    *cell / total * (1.0 - row.slip) + floor
                } else {
                    1.0 / bins.max(1) as f64
                };
            }
            line
        })
        .collect();
    Table { p }
}

impl Table {
    /// Number of bins.
    pub fn bins(&self) -> usize {
        self.p.first().map_or(0, Vec::len)
    }

    /// Half the summed difference between two rows: 1 parts them wholly.
    pub fn apart(&self, a: usize, b: usize) -> f64 {
        let (Some(a), Some(b)) = (self.p.get(a), self.p.get(b)) else {
            return 0.0;
        };
        a.iter().zip(b).map(|(x, y)| (x - y).abs()).sum::<f64>() / 2.0
    }
}
