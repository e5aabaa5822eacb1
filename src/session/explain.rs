//! Why this test, why this verdict, and what each cause would read: the words beside the numbers.

use super::engine::Engine;
use super::view::ExpectView;
use crate::belief::{Belief, Candidate, Forecast};
use crate::faults::{Fault, NOTHING_WRONG, UNLISTED, describe};
use crate::plan::Verdict;

/// Hypotheses whose expected readings an advice shows.
const EXPECTED: usize = 6;

/// Words less likely than this are left out of what is expected.
const RARE: f64 = 0.005;

/// The faults of a candidate.
pub fn faults_of(candidate: &Candidate) -> &[Fault] {
    candidate
        .hypothesis
        .as_ref()
        .map(|h| h.faults.as_slice())
        .unwrap_or_default()
}

/// A repair group as a person says it.
pub fn says(engine: &Engine, group: &str, leader: Option<&Candidate>) -> String {
    match group {
        NOTHING_WRONG => "nothing wrong".to_owned(),
        UNLISTED => "something not on the list".to_owned(),
        _ => {
            let faults = leader.map(faults_of).unwrap_or_default();
            describe(engine.knowledge(), engine.site(), faults).unwrap_or_else(|_| group.to_owned())
        }
    }
}

/// Why a verdict stands.
pub fn verdict_why(engine: &Engine, found: &Verdict, candidate: &Candidate) -> String {
    let who = says(engine, &found.group, Some(candidate));
    let (act, test) = found.costs;
    let odds = format!("{who}: {:.0} in 100", 100.0 * found.p);
    let costs = if test.is_finite() {
        format!(
            "acting on it now is expected to take {act:.0} min, going on with the best test {test:.0} min"
        )
    } else {
        "no test that can be done would change that".to_owned()
    };
    let alone = if found.robust {
        ""
    } else {
        "; it rests on one reading"
    };
    format!("{odds}; {costs}{alone}")
}

/// What the leading hypotheses would read, the likeliest first.
pub fn expects(belief: &Belief, column: &[(usize, Forecast)]) -> Vec<ExpectView> {
    let shown = column.iter().take(EXPECTED);
    shown
        .filter_map(|(index, forecast)| expect(belief.candidates().get(*index)?.id(), forecast))
        .collect()
}

/// What one hypothesis would read; nothing where its forecast says nothing.
pub fn expect(hypothesis: &str, forecast: &Forecast) -> Option<ExpectView> {
    let hypothesis = hypothesis.to_owned();
    let finite = |at: f64| forecast.quantile(at).filter(|value| value.is_finite());
    if let (Some(p05), Some(p50), Some(p95)) = (finite(0.05), finite(0.5), finite(0.95)) {
        return Some(ExpectView::Number {
            hypothesis,
            p05,
            p50,
            p95,
        });
    }
    let likely = forecast.words().into_iter().filter(|(_, p)| *p >= RARE);
    let outcomes: std::collections::BTreeMap<_, _> = likely
        .map(|(word, p)| (word.text().to_owned(), p))
        .collect();
    (!outcomes.is_empty()).then_some(ExpectView::Words {
        hypothesis,
        outcomes,
    })
}
