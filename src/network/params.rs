//! The unknown numbers of an installation, each with its path, prior and the value `predict` uses.

use std::collections::BTreeMap;

use super::NetworkError;
use crate::knowledge::{Knowledge, Prior};
use crate::numeric::dist::{self, Clip};
use crate::numeric::special;
use crate::site::{Given, Site, System};

/// Index of a parameter in its table.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub struct ParamId(pub usize);

/// One parameter.
#[derive(Clone, Debug, PartialEq)]
pub struct ParamSpec {
    /// Dotted path of contract §6 (`supply.network_ohms`, `kettle.watts`, `kettle.on`, …).
    pub path: String,
    /// Its distribution for belief, the site file's number already taken in.
    pub prior: Prior,
    /// What `predict` takes: the file's number, a range's geometric mean, or the prior median.
    pub point: f64,
}

/// All parameters of a site.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct ParamTable {
    /// In order of index.
    pub specs: Vec<ParamSpec>,
    /// Index by path.
    pub by_path: BTreeMap<String, ParamId>,
}

/// The median of a prior.
pub fn median(prior: &Prior) -> f64 {
    match *prior {
        Prior::Fixed { value } => value,
        Prior::Normal { mean, .. } => mean,
        Prior::Lognormal { median, .. } => median,
        Prior::Uniform { low, high } => (low + high) / 2.0,
        Prior::Switch { p } => f64::from(u8::from(p > 0.5)),
        Prior::Either {
            p,
            ref lower,
            ref upper,
        } => median(if p > 0.5 { lower } else { upper }),
    }
}

/// The value of a prior at a standard normal deviate `z` (its quantile at Φ(z)), clipped.
pub fn at_normal(prior: &Prior, z: f64) -> f64 {
    match *prior {
        Prior::Fixed { value } => value,
        Prior::Normal {
            mean,
            sd,
            low,
            high,
        } => dist::normal(z, mean, sd, Clip::new(low, high)),
        Prior::Lognormal {
            median,
            gsd,
            low,
            high,
        } => dist::lognormal(z, median, gsd, Clip::new(low, high)),
        Prior::Uniform { low, high } => dist::uniform(z, low, high),
        Prior::Switch { p } => f64::from(u8::from(special::normal_cdf(z) < p)),
        Prior::Either {
            p,
            ref lower,
            ref upper,
        } => {
            let u = special::normal_cdf(z);
            if u < p {
                at_normal(lower, special::normal_quantile(u / p))
            } else {
                at_normal(upper, special::normal_quantile((u - p) / (1.0 - p)))
            }
        }
    }
}

/// The prior of a number that the site file gives: known within its usual spread, or a range.
fn given_prior(given: Given, unknown: &Prior, spread: f64) -> (Prior, f64) {
    match given {
        Given::Unknown => (unknown.clone(), median(unknown)),
        Given::Value(value) if value > 0.0 => (
            Prior::Lognormal {
                median: value,
                gsd: spread,
                low: None,
                high: None,
            },
            value,
        ),
        Given::Value(value) => (Prior::Fixed { value }, value),
        Given::Range(low, high) => {
            let mean = (low * high).sqrt();
            // The two ends stand two deviations out, and clip.
            let gsd = special::exp(special::ln((high / low).max(1.0 + 1e-9)) / 4.0);
            (
                Prior::Lognormal {
                    median: mean,
                    gsd,
                    low: Some(low),
                    high: Some(high),
                },
                mean,
            )
        }
    }
}

impl ParamTable {
    /// The index of a path.
    pub fn id(&self, path: &str) -> Option<ParamId> {
        self.by_path.get(path).copied()
    }

    /// The values that `predict` uses.
    pub fn points(&self) -> Vec<f64> {
        self.specs.iter().map(|s| s.point).collect()
    }

    /// Adds a parameter, or finds it.
    pub(super) fn add(&mut self, path: &str, prior: Prior, point: f64) -> ParamId {
        if let Some(&id) = self.by_path.get(path) {
            return id;
        }
        let id = ParamId(self.specs.len());
        self.specs.push(ParamSpec {
            path: path.to_owned(),
            prior,
            point,
        });
        self.by_path.insert(path.to_owned(), id);
        id
    }

    fn row<'k>(
        knowledge: &'k Knowledge,
        path: &str,
        system: Option<System>,
    ) -> Result<&'k crate::knowledge::ParameterRow, NetworkError> {
        let system = match system {
            Some(System::TnCS) => "TN-C-S",
            Some(System::TnS) => "TN-S",
            Some(System::Tt) => "TT",
            None => "",
        };
        knowledge.parameter(path, system).ok_or_else(|| {
            NetworkError::Bad(format!(
                "knowledge has no parameter row for {path}; add one"
            ))
        })
    }

    /// A parameter with a row of knowledge and, perhaps, a number of the site file.
    pub(super) fn declare(
        &mut self,
        path: &str,
        given: Given,
        system: Option<System>,
        knowledge: &Knowledge,
    ) -> Result<ParamId, NetworkError> {
        let row = Self::row(knowledge, path, system)?;
        let (prior, point) = given_prior(given, &row.prior, row.spread.unwrap_or(1.1));
        Ok(self.add(path, prior, point))
    }

    /// A parameter whose row is relative to a rating (`trip_amps` in multiples of IΔn).
    pub(super) fn declare_scaled(
        &mut self,
        path: &str,
        row: &str,
        scale: f64,
        knowledge: &Knowledge,
    ) -> Result<ParamId, NetworkError> {
        let prior = scaled(
            &Self::row(knowledge, &format!("*.{row}"), None)?.prior,
            scale,
        );
        let point = median(&prior);
        Ok(self.add(path, prior, point))
    }

    /// A parameter of equipment: near its row's number, or the site file's, by the spread of its path's row.
    pub(super) fn declare_near(
        &mut self,
        path: &str,
        given: Given,
        row_value: f64,
        knowledge: &Knowledge,
    ) -> Result<ParamId, NetworkError> {
        let row = Self::row(knowledge, path, None)?;
        let spread = row.spread.unwrap_or(1.1);
        // Factors of the row: its prior is a factor on the equipment's number.
        let unknown = scaled(&row.prior, row_value);
        let (prior, point) = match given {
            Given::Unknown if row_value > 0.0 => (unknown, row_value),
            Given::Unknown => (Prior::Fixed { value: row_value }, row_value),
            given => given_prior(given, &unknown, spread),
        };
        Ok(self.add(path, prior, point))
    }

    /// Insulation of equipment to its frame, each side, Ω; `predict` takes it as perfect, since the
    /// contract's circuit has none.
    pub(super) fn declare_insulation(&mut self, path: &str, median: f64) -> ParamId {
        self.add(
            path,
            Prior::Lognormal {
                median,
                gsd: 4.0,
                low: None,
                high: None,
            },
            f64::INFINITY,
        )
    }

    /// Equipment on or off as found; `predict` takes it as off.
    pub(super) fn declare_on(&mut self, path: &str, p: f64) -> ParamId {
        self.add(path, Prior::Switch { p }, 0.0)
    }

    /// A yes or no of the site: known, or with its row's probability.
    pub(super) fn declare_switch(
        &mut self,
        path: &str,
        given: Given,
        knowledge: &Knowledge,
    ) -> Result<ParamId, NetworkError> {
        match given {
            Given::Value(value) => Ok(self.add(path, Prior::Fixed { value }, value)),
            _ => {
                let row = Self::row(knowledge, path, None)?;
                let point = median(&row.prior);
                Ok(self.add(path, row.prior.clone(), point))
            }
        }
    }
}

fn scaled(prior: &Prior, k: f64) -> Prior {
    match prior.clone() {
        Prior::Fixed { value } => Prior::Fixed { value: value * k },
        Prior::Normal {
            mean,
            sd,
            low,
            high,
        } => Prior::Normal {
            mean: mean * k,
            sd: sd * k,
            low: low.map(|x| x * k),
            high: high.map(|x| x * k),
        },
        Prior::Lognormal {
            median,
            gsd,
            low,
            high,
        } => Prior::Lognormal {
            median: median * k,
            gsd,
            low: low.map(|x| x * k),
            high: high.map(|x| x * k),
        },
        Prior::Uniform { low, high } => Prior::Uniform {
            low: low * k,
            high: high * k,
        },
        Prior::Switch { p } => Prior::Switch { p },
        Prior::Either { p, lower, upper } => Prior::Either {
            p,
            lower: Box::new(scaled(&lower, k)),
            upper: Box::new(scaled(&upper, k)),
        },
    }
}

/// Parameters that laws use by name.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Common {
    /// `supply.volts`.
    pub volts: ParamId,
    /// `supply.network_ohms`.
    pub network_ohms: ParamId,
    /// `supply.network_x_over_r`.
    pub x_over_r: ParamId,
    /// `cable.celsius`.
    pub celsius: ParamId,
    /// `cable.farads_per_metre`.
    pub farads: ParamId,
    /// `cable.reactance_per_metre`.
    pub reactance: ParamId,
    /// `cable.insulation_ohm_metres`.
    pub insulation: ParamId,
    /// `joint_ohms`.
    pub joint: ParamId,
    /// `contact_ohms`.
    pub contact: ParamId,
    /// `loads_as_found`: a factor on what draws as found; `predict` takes it as one.
    pub as_found: ParamId,
    /// `stake_ohms`: the stake's own resistance; `predict` takes it as zero.
    pub stake: ParamId,
}

impl Common {
    pub(super) fn declare(
        table: &mut ParamTable,
        site: &Site,
        knowledge: &Knowledge,
    ) -> Result<Self, NetworkError> {
        let supply = &site.supply;
        let volts = if supply.volts_given {
            Given::Value(supply.volts)
        } else {
            Given::Unknown
        };
        let volts = table.declare("supply.volts", volts, None, knowledge)?;
        table.specs[volts.0].point = supply.volts;
        let network_ohms = table.declare(
            "supply.network_ohms",
            supply.network_ohms,
            Some(supply.system),
            knowledge,
        )?;
        let x_over_r = table.add(
            "supply.network_x_over_r",
            Prior::Fixed {
                value: supply.network_x_over_r,
            },
            supply.network_x_over_r,
        );
        let mut plain = |path: &str| table.declare(path, Given::Unknown, None, knowledge);
        let celsius = plain("cable.celsius")?;
        let farads = plain("cable.farads_per_metre")?;
        let reactance = plain("cable.reactance_per_metre")?;
        let insulation = plain("cable.insulation_ohm_metres")?;
        let length = plain("cable.length_factor")?;
        let joint = plain("joint_ohms")?;
        let contact = plain("contact_ohms")?;
        let stake = plain("stake_ohms")?;
        let as_found = plain("loads_as_found")?;
        table.specs[as_found.0].point = 1.0;
        // Contract §6: `predict` is at 20 °C, without joint, contact or stake resistance.
        table.specs[celsius.0].point = 20.0;
        table.specs[length.0].point = 1.0;
        for zero in [joint, contact, stake] {
            table.specs[zero.0].point = 0.0;
        }
        Ok(Self {
            volts,
            network_ohms,
            x_over_r,
            celsius,
            farads,
            reactance,
            insulation,
            joint,
            contact,
            as_found,
            stake,
        })
    }
}
