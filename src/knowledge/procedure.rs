//! Setup and hookup: what a test physically is (contract §3).

use std::collections::BTreeMap;

use serde::{Deserialize, Serialize};

/// What is unplugged: a list of equipment, or `"all"` that has a plug.
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord, Serialize, Deserialize)]
#[serde(untagged)]
pub enum UnplugSet {
    /// The word `all`.
    All(AllWord),
    /// Equipment ids.
    These(Vec<String>),
}

impl Default for UnplugSet {
    fn default() -> Self {
        Self::These(Vec::new())
    }
}

impl UnplugSet {
    /// Whether nothing is unplugged.
    pub fn is_empty(&self) -> bool {
        matches!(self, Self::These(list) if list.is_empty())
    }
}

/// The single word `all`.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Serialize, Deserialize)]
pub enum AllWord {
    /// Everything with a plug.
    #[serde(rename = "all")]
    All,
}

/// A load that the test adds between line and neutral.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Load {
    /// Board or point.
    pub at: String,
    /// Watts at 230 V.
    pub watts: f64,
}

/// What is done to make a fault show.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Serialize, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum Provoke {
    /// Water is sprayed.
    Wet,
    /// Brought to working temperature.
    Warm,
    /// Tapped, flexed.
    Vibrate,
    /// Left with a logger.
    Wait,
}

/// Mode of a source that can backfeed.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Serialize, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum SourceMode {
    /// Running beside the supply.
    On,
    /// Off.
    Off,
    /// Feeding the site alone.
    Backup,
}

/// The complete state in which a test is taken; what it does not name is as in service.
#[derive(Clone, Debug, Default, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Setup {
    /// Devices open.
    #[serde(default, skip_serializing_if = "Vec::is_empty")]
    pub open: Vec<String>,
    /// Devices closed (named for clarity; the default state).
    #[serde(default, skip_serializing_if = "Vec::is_empty")]
    pub closed: Vec<String>,
    /// Conductor ends lifted.
    #[serde(default, skip_serializing_if = "Vec::is_empty")]
    pub lift: Vec<String>,
    /// Equipment unplugged.
    #[serde(default, skip_serializing_if = "UnplugSet::is_empty")]
    pub unplug: UnplugSet,
    /// Equipment switched on.
    #[serde(default, skip_serializing_if = "Vec::is_empty")]
    pub on: Vec<String>,
    /// Equipment switched off at its own switch.
    #[serde(default, skip_serializing_if = "Vec::is_empty")]
    pub off: Vec<String>,
    /// Added loads.
    #[serde(default, skip_serializing_if = "Vec::is_empty")]
    pub load: Vec<Load>,
    /// Provocation.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub provoke: Option<Provoke>,
    /// Modes of sources that can backfeed.
    #[serde(default, skip_serializing_if = "BTreeMap::is_empty")]
    pub sources: BTreeMap<String, SourceMode>,
}

/// Input of a voltmeter: `high-z`, `low-z`, or pure ohms.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
#[serde(untagged)]
pub enum Meter {
    /// A named input.
    Named(MeterWord),
    /// Pure ohms.
    Ohms(f64),
}

/// Named voltmeter inputs.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum MeterWord {
    /// 10 MΩ beside 100 pF.
    HighZ,
    /// 3 kΩ.
    LowZ,
}

/// What is connected where, and what is read (contract §3).
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(tag = "quantity", rename_all = "kebab-case", deny_unknown_fields)]
pub enum Hookup {
    /// V rms, AC.
    Volts {
        /// Two terminals.
        between: [String; 2],
        /// The voltmeter's input; high-z by default.
        #[serde(default, skip_serializing_if = "Option::is_none")]
        meter: Option<Meter>,
    },
    /// A rms of the phasor sum.
    Amps {
        /// Conductors inside the clamp, each counted away from the supply.
        around: Vec<String>,
    },
    /// Ω, DC, at a test voltage.
    Insulation {
        /// Two groups of terminals, joined within a group.
        between: [Vec<String>; 2],
        /// 250, 500 or 1000.
        test_volts: f64,
    },
    /// Ω, DC, leads nulled.
    Continuity {
        /// Two terminals.
        between: [String; 2],
    },
    /// Ω: magnitude of the impedance at supply frequency.
    Loop {
        /// Two terminals.
        between: [String; 2],
        /// Test current, A; 10 by default.
        #[serde(default, skip_serializing_if = "Option::is_none")]
        amps: Option<f64>,
    },
    /// s, or `no trip`.
    TripTime {
        /// The device.
        rcd: String,
        /// A point; its load terminals by default.
        #[serde(default, skip_serializing_if = "Option::is_none")]
        at: Option<String>,
        /// 0.5, 1 or 5.
        multiple: f64,
        /// 0 or 180.
        #[serde(default, skip_serializing_if = "Option::is_none")]
        half_cycle: Option<f64>,
    },
    /// A of the tester's own current at the trip, or `no trip`.
    Ramp {
        /// The device.
        rcd: String,
        /// A point; its load terminals by default.
        #[serde(default, skip_serializing_if = "Option::is_none")]
        at: Option<String>,
    },
    /// `holds` or `trips`, within a minute of being closed.
    Holds {
        /// The device.
        device: String,
    },
    /// `dims`, `brightens`, `none`.
    Lamp {
        /// A point.
        at: String,
    },
    /// `yes` or `no`.
    Seen {
        /// A place.
        at: String,
        /// What is looked for.
        what: String,
    },
}

impl Hookup {
    /// The quantity's word of contract §3.
    pub fn quantity(&self) -> &'static str {
        match self {
            Self::Volts { .. } => "volts",
            Self::Amps { .. } => "amps",
            Self::Insulation { .. } => "insulation",
            Self::Continuity { .. } => "continuity",
            Self::Loop { .. } => "loop",
            Self::TripTime { .. } => "trip-time",
            Self::Ramp { .. } => "ramp",
            Self::Holds { .. } => "holds",
            Self::Lamp { .. } => "lamp",
            Self::Seen { .. } => "seen",
        }
    }

    /// Key of the row in errors.toml that says how its instrument errs.
    pub fn error_key(&self) -> &'static str {
        match self {
            Self::Volts {
                meter: Some(Meter::Named(MeterWord::LowZ)),
                ..
            } => "volts-low-z",
            Self::Volts {
                meter: Some(Meter::Ohms(ohms)),
                ..
            } if *ohms < 1e5 => "volts-low-z",
            Self::Volts { .. } => "volts-high-z",
            Self::Loop {
                amps: Some(amps), ..
            } if *amps <= 0.1 => "loop-no-trip",
            other => other.quantity(),
        }
    }
}
