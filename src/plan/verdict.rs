//! When to stop testing: acting now is expected to cost less than any further test (design §5).

use super::choose::{Plan, is_special};
use crate::belief::Belief;
use crate::checks::Check;
use crate::faults::{NOTHING_WRONG, UNLISTED};
use crate::safety::Cleared;

/// What to do now in place of another test.
#[derive(Clone, Debug, PartialEq)]
pub struct Verdict {
    /// Repair group.
    pub group: String,
    /// Likeliest candidate in it.
    pub candidate: usize,
    /// Probability of the group.
    pub p: f64,
    /// `repair`, `call-network`, `isolate`, `refer`, `nothing-found`.
    pub action: String,
    /// Expected minutes of acting now, and of the best further test.
    pub costs: (f64, f64),
    /// Confirming test: index in `Model::checks`.
    pub confirm: Option<usize>,
    /// Others that it could be: group and probability.
    pub could_be: Vec<(String, f64)>,
    /// No single reading carries it: it stands with any one left out.
    pub robust: bool,
}

/// Least probability of a group that is acted on at all: below, a test or a referral comes first.
const ACTABLE: f64 = 0.5;
/// Probability of a slip from which a reading is to be taken again before anything is cut open.
const SUSPECT: f64 = 0.5;

/// A reading that the leading answer calls a slip: entry, test, place, probability.
pub fn suspect(belief: &Belief) -> Option<(u64, String, String, f64)> {
    let lead = belief.odds().hypotheses.first().map(|h| h.0)?;
    let worst = belief
        .slips(lead)
        .into_iter()
        .max_by(|a, b| a.3.total_cmp(&b.3))?;
    (worst.3 > SUSPECT).then_some(worst)
}

/// The verdict, if one stands.
pub fn verdict(belief: &Belief, plan: &Plan, cleared: &[Cleared<Check>]) -> Option<Verdict> {
    let readings = belief
        .readings()
        .iter()
        .filter(|g| !g.readings.is_empty())
        .count();
    if readings == 0 {
        return None;
    }
    let (group, p) = plan.groups.iter().find(|g| g.0 != UNLISTED).cloned()?;
    let unlisted = belief.odds().unlisted;
    let best_test = plan
        .advice
        .iter()
        .map(|a| a.cost)
        .fold(f64::INFINITY, f64::min);
    let could_be: Vec<(String, f64)> = plan
        .groups
        .iter()
        .filter(|g| g.0 != group && g.1 > 0.005)
        .take(5)
        .cloned()
        .collect();
    let lead = belief
        .candidates()
        .iter()
        .position(|c| c.group() == group && Some(c.id()) == best_id(belief, &group))
        .or_else(|| belief.find(&group))?;
    if unlisted > p && unlisted > ACTABLE && plan.advice.is_empty() {
        return Some(Verdict {
            group: UNLISTED.to_owned(),
            candidate: lead,
            p: unlisted,
            action: "refer".to_owned(),
            costs: (plan.act_now, best_test),
            confirm: None,
            could_be: plan
                .groups
                .iter()
                .filter(|g| g.0 != UNLISTED)
                .take(5)
                .cloned()
                .collect(),
            robust: true,
        });
    }
    // Worth more testing, and something to test with.
    if plan.act_now > best_test {
        return None;
    }
    if p < ACTABLE {
        // Sets that no available check can split go together; nothing left to tell them apart.
        if !plan.advice.is_empty() || p < 0.05 {
            return None;
        }
    }
    let candidate = &belief.candidates()[lead];
    let action = if group == NOTHING_WRONG {
        "nothing-found".to_owned()
    } else {
        candidate
            .hypothesis
            .as_ref()
            .map_or_else(|| "refer".to_owned(), |h| h.action.clone())
    };
    let invasive = candidate.hypothesis.as_ref().is_some_and(|h| h.invasive);
    let robust = !invasive || belief.survives_any_one_left_out(&group);
    if invasive && !robust && !plan.advice.is_empty() {
        return None;
    }
    let urgent = action == "call-network";
    if !urgent && suspect(belief).is_some() && !plan.advice.is_empty() {
        return None;
    }
    let confirm = if is_special(belief, lead) {
        None
    } else {
        confirming(belief, lead, cleared)
    };
    Some(Verdict {
        group,
        candidate: lead,
        p,
        action,
        costs: (plan.act_now, best_test),
        confirm,
        could_be,
        robust,
    })
}

fn best_id<'a>(belief: &'a Belief, group: &str) -> Option<&'a str> {
    belief
        .odds()
        .hypotheses
        .iter()
        .map(|h| &belief.candidates()[h.0])
        .find(|c| c.group() == group)
        .map(|c| c.id())
}

/// The confirming look or test of a candidate that is available and was not taken since the last repair.
fn confirming(belief: &Belief, candidate: usize, cleared: &[Cleared<Check>]) -> Option<usize> {
    let model = belief.model();
    let hypothesis = belief.candidates()[candidate].hypothesis.as_ref()?;
    let mut best: Option<(usize, usize)> = None;
    for (kind, place) in hypothesis.kinds.iter().zip(&hypothesis.places) {
        let Some(test) = model
            .knowledge
            .faults
            .get(*kind)
            .and_then(|k| k.repair.confirm.clone())
        else {
            continue;
        };
        for check in cleared.iter().map(Cleared::get).filter(|c| c.test == test) {
            let near = nearness(&check.at, place);
            let done = belief.readings().iter().any(|g| {
                g.readings
                    .iter()
                    .any(|r| r.test == check.test && r.at == check.at && r.epoch == belief.epoch())
            });
            if near > 0 && !done && best.is_none_or(|b| near > b.0) {
                best = model.check(&check.test, &check.at).map(|i| (near, i));
            }
        }
    }
    best.map(|b| b.1)
}

/// How well a check's place fits a fault's: the same, the same circuit, or anything.
pub fn nearness(check: &str, fault: &str) -> usize {
    let circuit = |s: &str| s.split('.').next().unwrap_or_default().to_owned();
    if check == fault {
        3
    } else if circuit(check) == circuit(fault) {
        2
    } else {
        1
    }
}
