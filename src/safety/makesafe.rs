//! What is owed at once for a complaint: warnings, make-safe orders, and whether metal counts as live.

use crate::knowledge::{SymptomRow, WarningRow};

/// The warning that tells people to keep off metal; a complaint that owes it makes every metal part live
/// until a stake says otherwise.
const KEEP_OFF: &str = "keep-off-metal";

/// A warning (contract §6).
#[derive(Clone, Debug, PartialEq, Eq, serde::Serialize)]
pub struct Warning {
    /// Code.
    pub code: String,
    /// What to do or tell.
    pub text: String,
}

/// Warnings owed for a complaint, in its row's order; a code without a row speaks for itself.
pub fn warnings(symptom: &SymptomRow, rows: &[WarningRow]) -> Vec<Warning> {
    symptom
        .warnings
        .iter()
        .map(|code| {
            let text = rows
                .iter()
                .find(|row| &row.code == code)
                .map_or_else(|| code.replace('-', " "), |r| r.text.clone());
            Warning {
                code: code.clone(),
                text,
            }
        })
        .collect()
}

/// Whether a complaint makes every metal part live until shown otherwise (fold [`super::StateEvent::Standing`]).
pub fn is_standing(symptom: &SymptomRow) -> bool {
    symptom.warnings.iter().any(|code| code == KEEP_OFF)
}
