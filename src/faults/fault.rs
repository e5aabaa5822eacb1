//! A fault as contract §5 writes it.

use serde::{Deserialize, Serialize};

/// A kind at a place.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Fault {
    /// Kind.
    pub kind: String,
    /// The thing that is wrong.
    pub at: String,
    /// The other place.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub to: Option<String>,
    /// Ω unless the kind's row says otherwise.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub value: Option<f64>,
    /// `L`, `L1`–`L3`, `N`, `PE`.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub conductor: Option<String>,
    /// 0..1 from L.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub position: Option<f64>,
}
