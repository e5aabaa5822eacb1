//! What the causes still likely would read in a test, for a reading to be held against.

use super::Session;
use super::error::SessionError;
use super::explain::expect;
use super::view::ExpectView;

/// Hypotheses less likely than this have no say.
const TAIL: f64 = 1e-3;

impl Session {
    /// What the leading `count` hypotheses would read in a test, the likeliest first.
    ///
    /// # Errors
    /// `unknown-test`.
    pub fn expected(
        &self,
        test: &str,
        at: &str,
        count: usize,
    ) -> Result<Vec<ExpectView>, SessionError> {
        let check = self.visit.engine.check(test, at)?;
        let belief = self.visit.mind.belief();
        let table = belief.forecasts(&[check], TAIL, count);
        let column = table
            .forecasts
            .first()
            .map(Vec::as_slice)
            .unwrap_or_default();
        let each = table.candidates.iter().zip(column);
        Ok(each
            .filter_map(|(index, forecast)| expect(belief.candidates().get(*index)?.id(), forecast))
            .collect())
    }
}
