//! Every word that the pipe, the log and the site file may use, for programs that ask.

use serde_json::{Value, json};

use super::error::ErrorCode;
use crate::knowledge::{Knowledge, words};

/// Answer to `vocabulary`.
pub fn vocabulary(knowledge: &Knowledge) -> Value {
    let kinds: Vec<Value> = knowledge
        .faults
        .iter()
        .map(|kind| {
            json!({
                "kind": kind.kind,
                "name": kind.name,
                "at": kind.at,
                "to": kind.to,
                "unit": kind.value.as_ref().map(|value| &value.unit),
                "conductors": kind.conductors,
                "position": kind.position,
                "predictable": !kind.edits.is_empty(),
            })
        })
        .collect();
    json!({
        "symptoms": knowledge.symptoms.iter().map(|row| row.kind.as_str()).collect::<Vec<_>>(),
        "fault_kinds": kinds,
        "quantities": words::UNITS.iter().map(|(quantity, _)| *quantity).collect::<Vec<_>>(),
        "seen": words::all(words::SEEN).collect::<Vec<_>>(),
        "when": words::all(words::WHEN).collect::<Vec<_>>(),
        "kit": knowledge.kit.iter().map(|row| row.kind.as_str()).collect::<Vec<_>>(),
        "equipment_kinds": knowledge.equipment.iter().map(|row| row.kind.as_str()).collect::<Vec<_>>(),
        "parameters": knowledge.parameters.iter().map(|row| row.path.as_str()).collect::<Vec<_>>(),
        "errors": ErrorCode::ALL.iter().map(|code| code.as_str()).collect::<Vec<_>>(),
    })
}
