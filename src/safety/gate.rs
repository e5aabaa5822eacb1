//! The gate: the only place where a check is cleared for advice, and a reading let in.

use super::Ground;
use super::hazard::Hazards;
use super::hold::{hold_points, make_safe};
use super::isolate::isolation;
use super::needs::{quiet_check, quiet_proof};
use super::point::{HoldPoint, Stage, marked, state_key};
use super::rules::{self, Refusal};
use super::state::State;
use super::world::Assessment;
use crate::checks::Check;
use crate::knowledge::Setup;

/// Something that the gate has cleared, with what must be done before it is carried out.
#[derive(Clone, Debug, PartialEq)]
pub struct Cleared<T> {
    inner: T,
    points: Vec<HoldPoint>,
    hazard: Option<String>,
}

impl<T> Cleared<T> {
    /// What was cleared.
    pub fn get(&self) -> &T {
        &self.inner
    }

    /// Its hold points, in order.
    pub fn points(&self) -> &[HoldPoint] {
        &self.points
    }

    /// Its hold points that are still open.
    pub fn open_points(&self) -> impl Iterator<Item = &HoldPoint> {
        self.points.iter().filter(|p| !p.done)
    }

    /// What may be dangerous about it, and under which cause.
    pub fn hazard(&self) -> Option<&str> {
        self.hazard.as_deref()
    }

    /// Without the hold points.
    pub fn into_inner(self) -> T {
        self.inner
    }
}

/// What the gate says of a check.
#[derive(Clone, Debug, PartialEq)]
pub enum Verdict {
    /// It may be advised; its open hold points come first.
    Cleared(Box<Cleared<Check>>),
    /// A hold point of it cannot be done.
    Held {
        /// Those points.
        points: Vec<HoldPoint>,
        /// Why not.
        why: String,
    },
    /// It is forbidden as things stand.
    Refused(Refusal),
}

impl Verdict {
    /// The cleared check, if it is.
    pub fn cleared(self) -> Option<Cleared<Check>> {
        match self {
            Self::Cleared(cleared) => Some(*cleared),
            Self::Held { .. } | Self::Refused(_) => None,
        }
    }
}

/// Why a reading is not let in.
#[derive(Clone, Debug, PartialEq)]
pub enum ReadingStop {
    /// Hold points are open.
    Open(Vec<HoldPoint>),
    /// A hold point was said to be impossible.
    Held(String),
    /// The check is forbidden as things stand.
    Refused(Refusal),
}

/// Clears checks on one ground.
#[derive(Clone, Copy, Debug)]
pub struct Gate<'a> {
    ground: Ground<'a>,
}

impl<'a> Gate<'a> {
    /// A gate on a site, with its numbers and the checks at hand.
    pub fn new(ground: Ground<'a>) -> Self {
        Self { ground }
    }

    /// The ground it stands on.
    pub fn ground(&self) -> &Ground<'a> {
        &self.ground
    }

    /// Clears, holds or refuses a check as things stand. Without `hazards` the rules alone judge: for lists
    /// that nobody acts on, never for advice.
    pub fn clear(
        &self,
        check: &Check,
        state: &State,
        mut hazards: Option<&mut Hazards<'_>>,
    ) -> Verdict {
        if let Some(refusal) = rules::refusal(&self.ground, state, check) {
            return Verdict::Refused(refusal);
        }
        let mut points = hold_points(&self.ground, state, check);
        // A proof still to be gained comes before the test, and the gate is asked again after it.
        let waits = points.iter().any(|p| p.stage == Stage::Proof && !p.done);
        let assessment = match hazards.as_deref_mut() {
            Some(hazards) if !waits => hazards.assess(&self.ground, check),
            _ => Assessment::default(),
        };
        let live = hazards
            .is_some_and(|h| h.standing_probability(&self.ground) > self.ground.numbers.standing);
        if live && !points.iter().any(|p| p.stage == Stage::MakeSafe) {
            points.insert(0, make_safe(state));
        }
        if let Some(refusal) = self.weigh(check, state, &assessment, &mut points) {
            return Verdict::Refused(refusal);
        }
        let stuck: Vec<HoldPoint> = points
            .iter()
            .filter(|p| !p.done && state.cannot(&p.point).is_some())
            .cloned()
            .collect();
        if let Some(why) = stuck.first().and_then(|p| state.cannot(&p.point)) {
            let why = why.to_owned();
            return Verdict::Held { points: stuck, why };
        }
        let hazard = self.hazard_text(check, &assessment);
        Verdict::Cleared(Box::new(Cleared {
            inner: check.clone(),
            points,
            hazard,
        }))
    }

    /// Whether a reading of the check may be taken in now: cleared anew, every hold point done.
    ///
    /// # Errors
    /// [`ReadingStop`] says what stands in the way.
    pub fn may_read(
        &self,
        check: &Check,
        state: &State,
        hazards: Option<&mut Hazards<'_>>,
    ) -> Result<Cleared<Check>, ReadingStop> {
        match self.clear(check, state, hazards) {
            Verdict::Refused(refusal) => Err(ReadingStop::Refused(refusal)),
            Verdict::Held { why, .. } => Err(ReadingStop::Held(why)),
            Verdict::Cleared(cleared) => {
                let open: Vec<HoldPoint> = cleared.open_points().cloned().collect();
                if open.is_empty() {
                    Ok(*cleared)
                } else {
                    Err(ReadingStop::Open(open))
                }
            }
        }
    }

    /// The hold point of an id, as it stands for the first check at hand that needs it.
    pub fn point(
        &self,
        id: &str,
        state: &State,
        mut hazards: Option<&mut Hazards<'_>>,
    ) -> Option<HoldPoint> {
        let by_rules = self.ground.catalogue.iter().find_map(|check| {
            hold_points(&self.ground, state, check)
                .into_iter()
                .find(|point| point.point == id)
        });
        by_rules.or_else(|| {
            self.ground.catalogue.iter().find_map(|check| {
                let cleared = self.clear(check, state, hazards.as_deref_mut()).cleared()?;
                cleared.points.into_iter().find(|point| point.point == id)
            })
        })
    }

    /// The state in which a check's ends are lifted; its own setup where it lifts nothing. For pricing.
    pub fn isolation(&self, check: &Check) -> Setup {
        isolation(&self.ground, check)
    }

    /// Turns what simulation showed into a further hold point or a refusal.
    fn weigh(
        &self,
        check: &Check,
        state: &State,
        assessment: &Assessment,
        points: &mut Vec<HoldPoint>,
    ) -> Option<Refusal> {
        if let Some(lifting) = &assessment.lifting
            && let Some(end) = lifting.between.first()
        {
            let proof = quiet_proof(end, &isolation(&self.ground, check).open);
            if !state.has(&proof) {
                let Some(clamp) = quiet_check(&self.ground, check, end) else {
                    return Some(Refusal::new(
                        lifting.text(&self.ground),
                        "open more (every main switch), or clamp the conductor in that state first",
                    ));
                };
                if !points.iter().any(|p| p.key == proof) {
                    let first = points
                        .iter()
                        .position(|p| p.stage >= Stage::TesterBefore)
                        .unwrap_or(points.len());
                    points.insert(first, proof_point(&proof, clamp));
                }
            }
        }
        let touch = assessment.touch.as_ref()?;
        // A stage goes on where the one before it has passed: little is added, and people are kept off.
        if check.staged
            && (touch.volts <= self.ground.numbers.touch_volts
                || assessment.touch_p < self.ground.numbers.standing)
        {
            points.push(self.keep_off(check, state, &touch.text(&self.ground)));
            return None;
        }
        Some(Refusal::new(
            touch.text(&self.ground),
            "prove the supply neutral by staged load, or the earth of that place, first; a smaller test current; or a \
             dead test",
        ))
    }

    fn keep_off(&self, check: &Check, state: &State, danger: &str) -> HoldPoint {
        // The id stays the same while the odds move the number in the text.
        let key = format!("keep-off {}", state_key(&check.setup));
        let mut point = HoldPoint {
            point: marked("keep-off", &key),
            text: format!(
                "Nobody touches metal, taps or pipes while the load is on: {danger}. Leads first, then the load; off \
                 again at {:.0} V.",
                self.ground.numbers.dead_volts
            ),
            setup: check.setup.clone(),
            wants: Vec::new(),
            test: None,
            at: None,
            done: false,
            stage: Stage::Extra,
            key,
        };
        point.done = state.done(&point).is_some();
        point
    }

    /// What may be dangerous about a check, with numbers: knowledge's words and what simulation shows under
    /// the most probable causes. Dearer than [`Gate::clear`]; for the few that are shown.
    pub fn hazard(&self, check: &Check, hazards: &mut Hazards<'_>) -> Option<String> {
        let assessment = hazards.describe(&self.ground, check);
        self.hazard_text(check, &assessment)
    }

    fn hazard_text(&self, check: &Check, assessment: &Assessment) -> Option<String> {
        let said = [
            &assessment.touch,
            &assessment.frame,
            &assessment.lifting,
            &assessment.not_dead,
        ]
        .into_iter()
        .flatten()
        .map(|raised| raised.text(&self.ground));
        let all: Vec<String> = check.hazard.iter().cloned().chain(said).collect();
        (!all.is_empty()).then(|| all.join("; "))
    }
}

fn proof_point(proof: &str, clamp: &Check) -> HoldPoint {
    HoldPoint {
        point: format!("proof-{}", proof.replace(' ', "-")),
        text: format!("Proved first: {proof} (taken by: {}).", clamp.name),
        setup: clamp.setup.clone(),
        wants: Vec::new(),
        test: Some(clamp.test.clone()),
        at: Some(clamp.at.clone()),
        done: false,
        stage: Stage::Proof,
        key: proof.to_owned(),
    }
}
