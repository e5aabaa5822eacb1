//! One reading of the circuit as told (contract §6 `predict`).

use serde::Serialize;
use serde_json::{Value, json};

use super::command;
use super::engine::Engine;
use super::error::{ErrorCode, SessionError};
use crate::faults::edits;
use crate::network::{Outcome, Prediction};
use crate::quantity::Word;

/// The one parameter that null gives a meaning: perfect insulation.
const MAY_BE_NULL: &str = "cable.insulation_ohm_metres";

/// Answer to `predict`.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct PredictAnswer {
    /// A number in SI, or a word.
    pub value: Value,
    /// Its unit.
    pub unit: crate::quantity::Unit,
    /// Devices that operated, in order.
    pub tripped: Vec<String>,
}

/// What an instrument shows, as an answer writes it.
///
/// # Errors
/// `internal`: a number that no instrument could show.
fn shown(prediction: Prediction) -> Result<PredictAnswer, SessionError> {
    let value = match prediction.outcome {
        Outcome::Number(number) if number.is_finite() => json!(number),
        Outcome::Number(number) if number.is_infinite() => json!(Word::Open.text()),
        Outcome::Number(_) => {
            let hint = "one of the numbers given is beyond what the circuit can be solved with";
            return Err(SessionError::new(
                ErrorCode::Internal,
                "the circuit has no solution",
                hint,
            ));
        }
        Outcome::Word(word) => json!(word.text()),
    };
    Ok(PredictAnswer {
        value,
        unit: prediction.unit,
        tripped: prediction.tripped,
    })
}

impl Engine {
    /// What an instrument would show, exactly, under these faults in this setup.
    ///
    /// # Errors
    /// `unknown-word`, `unknown-place`, `conflict`, `not-predictable`, `bad-request`.
    pub fn predict(&self, ask: &command::Predict) -> Result<PredictAnswer, SessionError> {
        if let Some(path) = ask
            .parameters
            .iter()
            .find(|(path, value)| value.is_none() && *path != MAY_BE_NULL)
        {
            let hint = "give a number, or leave it out for its usual value";
            return Err(SessionError::new(
                ErrorCode::BadRequest,
                format!("`parameters.{}` is null", path.0),
                hint,
            ));
        }
        let edits = edits(self.knowledge(), self.site(), &ask.faults)?;
        let setup = ask.setup.clone().unwrap_or_default();
        let protection = ask.protection.unwrap_or(false);
        shown(self.model.network.predict(
            &edits,
            &setup,
            &ask.hookup,
            &ask.parameters,
            protection,
        )?)
    }
}
