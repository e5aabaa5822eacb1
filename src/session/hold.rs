//! Hold points: what was done before a test, and seen; readings over their limits are evidence.

use std::collections::BTreeMap;

use serde_json::{Value, json};

use super::Session;
use super::command;
use super::engine::Engine;
use super::error::{ErrorCode, SessionError};
use super::event::Event;
use super::view::PointAnswer;
use crate::checks::{Check, energised};
use crate::knowledge::{Hookup, Meter, procedure::MeterWord};
use crate::quantity::{Parsed, ParsedValue, nearest, parse};
use crate::safety::{HoldPoint, State};

/// A voltmeter as a two-pole tester is.
fn hookup(between: &[String; 2]) -> Hookup {
    Hookup::Volts {
        between: between.clone(),
        meter: Some(Meter::Named(MeterWord::LowZ)),
    }
}

/// The readings that a point wants, understood.
///
/// # Errors
/// `bad-request` for one that is missing or not wanted; `bad-reading`, `wrong-unit`.
pub fn readings(
    engine: &Engine,
    point: &HoldPoint,
    given: Option<&BTreeMap<String, String>>,
) -> Result<BTreeMap<String, Parsed>, SessionError> {
    let none = BTreeMap::new();
    let given = given.unwrap_or(&none);
    let wanted: Vec<&str> = point.wants.iter().map(|want| want.name.as_str()).collect();
    if let Some(name) = given.keys().find(|name| !wanted.contains(&name.as_str())) {
        let near = nearest(name, &wanted, 1);
        let hint = near.first().map_or_else(
            || format!("it wants {}", listed(&wanted)),
            |n| format!("the nearest is `{n}`"),
        );
        let text = format!("the hold point `{}` wants no reading `{name}`", point.point);
        return Err(SessionError::new(ErrorCode::BadRequest, text, hint)
            .with("path", format!("readings.{name}")));
    }
    let mut all = BTreeMap::new();
    for want in &point.wants {
        let Some(text) = given.get(&want.name) else {
            let missing: Vec<&str> = wanted
                .iter()
                .copied()
                .filter(|name| !given.contains_key(*name))
                .collect();
            return Err(SessionError::new(
                ErrorCode::BadRequest,
                format!(
                    "the hold point `{}` lacks the readings {}",
                    point.point,
                    listed(&missing)
                ),
                "read each of them, in volts, and send them all together",
            )
            .with("missing", missing));
        };
        let parsed = parse(text, &engine.asked(&hookup(&want.between), "V"))
            .map_err(SessionError::from)
            .map_err(|error| error.with("path", format!("readings.{}", want.name)))?;
        if matches!(parsed.value, ParsedValue::Word { .. }) {
            let text = format!("`{}` wants volts, not a word", want.name);
            return Err(SessionError::new(
                ErrorCode::BadReading,
                text,
                "read it in volts",
            ));
        }
        all.insert(want.name.clone(), parsed);
    }
    Ok(all)
}

fn listed(names: &[&str]) -> String {
    if names.is_empty() {
        "no readings".to_owned()
    } else {
        format!("`{}`", names.join("`, `"))
    }
}

/// The highest volts that each reading may mean.
pub fn volts(parsed: &BTreeMap<String, Parsed>) -> BTreeMap<String, f64> {
    let highest = |value: ParsedValue| match value {
        ParsedValue::Value { value } => value,
        ParsedValue::Range { high, .. } => high,
        ParsedValue::Under { under } => under,
        ParsedValue::Over { .. } | ParsedValue::Word { .. } => f64::INFINITY,
    };
    parsed
        .iter()
        .map(|(name, parsed)| (name.clone(), highest(parsed.value)))
        .collect()
}

/// The readings of a point as tests of their own, so that they count as evidence.
pub fn as_checks(
    engine: &Engine,
    point: &HoldPoint,
    parsed: &BTreeMap<String, Parsed>,
) -> Vec<(Check, Parsed)> {
    let Some(form) = engine.checks().first() else {
        return Vec::new();
    };
    let each = point
        .wants
        .iter()
        .filter_map(|want| Some((want, *parsed.get(&want.name)?)));
    each.map(|(want, parsed)| {
        let mut check = form.clone();
        check.test = "prove-dead".to_owned();
        check.at = want.between.join("+");
        check.setup = point.setup.clone();
        check.hookup = hookup(&want.between);
        check.unit = "V".to_owned();
        check.energised = energised(&check.setup, &check.hookup, engine.site());
        check.proves = Vec::new();
        (check, parsed)
    })
    .collect()
}

/// Points as an answer shows them.
pub fn shown(points: &[HoldPoint]) -> Value {
    json!(points)
}

/// The refusal of a reading whose points are not all done.
pub fn open_error(check: &Check, points: &[HoldPoint]) -> SessionError {
    let names: Vec<&str> = points.iter().map(|point| point.point.as_str()).collect();
    SessionError::new(
        ErrorCode::HoldPointOpen,
        format!(
            "`{}` at `{}` has open hold points: {}",
            check.test,
            check.at,
            listed(&names)
        ),
        "do each of them, in order, and say so with `hold-point`; then read again",
    )
    .with("points", shown(points))
}

impl Session {
    /// A hold point was done, or cannot be.
    ///
    /// # Errors
    /// `bad-request` (unknown point, no reason, a reading missing), `hold-point-open` for a point that
    /// only a test's reading does, `not-dead` (recorded as evidence; the point stays open), log errors.
    pub fn hold_point(&mut self, ask: &command::HoldPoint) -> Result<PointAnswer, SessionError> {
        self.going()?;
        let Some(point) = self.visit.point(&ask.point) else {
            let hint = "take the ids from the `hold_points` of an advice or of the refusal of a reading; they change \
                        when the state does";
            let text = format!("no test needs a hold point `{}` now", ask.point);
            return Err(SessionError::new(ErrorCode::UnknownWord, text, hint));
        };
        if !ask.done {
            if ask.why.as_deref().is_none_or(|why| why.trim().is_empty()) {
                let text = format!("`{}` is not done and there is no `why`", ask.point);
                return Err(SessionError::new(
                    ErrorCode::BadRequest,
                    text,
                    "say why it cannot be done",
                ));
            }
            let entry = self.record(Event::HoldPoint(ask.clone()))?;
            return Ok(self.point_answer(entry, &point));
        }
        if let (Some(test), Some(at)) = (&point.test, &point.at) {
            return Err(SessionError::new(
                ErrorCode::HoldPointOpen,
                format!(
                    "`{}` is done by a reading of `{test}` at `{at}` and by nothing else",
                    ask.point
                ),
                "take that test first",
            )
            .with("points", shown(std::slice::from_ref(&point))));
        }
        let parsed = readings(&self.visit.engine, &point, ask.readings.as_ref())?;
        let dead = State::judge(&point, &volts(&parsed));
        let entry = self.record(Event::HoldPoint(ask.clone()))?;
        match dead {
            Ok(()) => Ok(self.point_answer(entry, &point)),
            Err(alive) => Err(SessionError::new(
                ErrorCode::NotDead,
                alive.to_string(),
                "it counts as evidence, and the point stays open: find what feeds it, make that dead, prove again",
            )
            .with("entry", entry)
            .with("points", shown(std::slice::from_ref(&point)))),
        }
    }

    /// Points still open of the test that this one was done for: the one last shown with it.
    fn point_answer(&mut self, entry: u64, point: &HoldPoint) -> PointAnswer {
        let open_points = {
            let visit = &self.visit;
            let shown = self
                .shown
                .iter()
                .filter_map(|key| visit.engine.check(&key.test, &key.at).ok());
            let mut tests = shown
                .chain(visit.available.iter())
                .filter_map(|check| visit.clear_by_rules(check).cleared());
            let of_this =
                tests.find(|cleared| cleared.points().iter().any(|p| p.point == point.point));
            of_this
                .map(|cleared| cleared.open_points().cloned().collect())
                .unwrap_or_default()
        };
        let verdict = self.note_verdict();
        PointAnswer {
            entry,
            open_points,
            verdict,
        }
    }
}
