//! The human body as a resistance that falls with touch voltage (IEC 60479-1, tables of knowledge).
//!
//! Method: the body Z(U) is interpolated linearly in the table, constant beyond its ends; across a source
//! of open-circuit volts `U0` behind `R` it takes the U where `U = U0·Z(U)/(R+Z(U))`, found by bisection
//! (the right side minus U falls with U wherever U/Z(U), the body's current, rises; so it does in every
//! row of the tables). Valid hand to hand, 50/60 Hz, large contact areas.

use crate::knowledge::BodyRow;

/// Why a table of body impedance cannot be used.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
pub enum BodyError {
    /// No such row.
    #[error("knowledge has no body table `{table}` at {percentile} %: add the row to bodies.toml")]
    Missing {
        /// Table asked for.
        table: String,
        /// Percentile asked for.
        percentile: f64,
    },
    /// Columns that do not belong together.
    #[error(
        "body table `{table}`: volts must rise, ohms be positive, and both lists be equally long"
    )]
    Bad {
        /// Table.
        table: String,
    },
}

/// Touch voltage and current of one body.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Touch {
    /// Across the body, V.
    pub volts: f64,
    /// Through it, A.
    pub amps: f64,
}

/// Impedance of a body against touch voltage.
#[derive(Clone, Debug, PartialEq)]
pub struct Body {
    steps: Vec<(f64, f64)>,
}

impl Body {
    /// From the row of a table and percentile.
    ///
    /// # Errors
    /// [`BodyError`] where the row is missing or its columns do not fit.
    pub fn from_rows(rows: &[BodyRow], table: &str, percentile: f64) -> Result<Self, BodyError> {
        let row = rows
            .iter()
            .find(|r| r.table == table && r.percentile == percentile)
            .ok_or_else(|| BodyError::Missing {
                table: table.to_owned(),
                percentile,
            })?;
        Self::new(&row.volts, &row.ohms).ok_or_else(|| BodyError::Bad {
            table: table.to_owned(),
        })
    }

    /// From two columns; nothing where they do not fit.
    pub fn new(volts: &[f64], ohms: &[f64]) -> Option<Self> {
        let rising = volts.windows(2).all(|w| matches!(w, [a, b] if a < b));
        let sound = !volts.is_empty()
            && volts.len() == ohms.len()
            && ohms.iter().all(|z| *z > 0.0 && z.is_finite());
        (rising && sound).then(|| Self {
            steps: volts.iter().copied().zip(ohms.iter().copied()).collect(),
        })
    }

    /// Ω at a touch voltage.
    pub fn ohms(&self, volts: f64) -> f64 {
        let mut before: Option<(f64, f64)> = None;
        for &(u, z) in &self.steps {
            if volts <= u {
                return before.map_or(z, |(u0, z0)| z0 + (z - z0) * (volts - u0) / (u - u0));
            }
            before = Some((u, z));
        }
        before.map_or(f64::INFINITY, |(_, z)| z)
    }

    /// What a body takes across open-circuit `volts` behind `source` Ω.
    pub fn touch(&self, volts: f64, source: f64) -> Touch {
        let (mut low, mut high) = (0.0, volts.abs());
        for _ in 0..60 {
            let middle = 0.5 * (low + high);
            let z = self.ohms(middle);
            if volts.abs() * z / (source.max(0.0) + z) > middle {
                low = middle;
            } else {
                high = middle;
            }
        }
        Touch {
            volts: low,
            amps: low / self.ohms(low),
        }
    }
}
