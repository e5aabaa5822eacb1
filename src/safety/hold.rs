//! Hold points: what must be done and seen before a reading may be taken, in its order (trade.md D.1).
//!
//! Long because the order of the hold points is one sequence.

use super::Ground;
use super::isolate::{isolate_text, isolates, isolation};
use super::needs;
use super::places::{board_of_end, mains_of, parts_neutral, place_of, terminals_of};
use super::point::{HoldPoint, Stage, Want, marked, state_key};
use super::state::State;
use super::wants::{after_lift, before_lift};
use super::words::{list, words};
use crate::checks::Check;
use crate::knowledge::{Hookup, Setup, SourceMode};

/// Builds the points of one check in order.
struct Builder<'a> {
    ground: &'a Ground<'a>,
    state: &'a State,
    check: &'a Check,
    points: Vec<HoldPoint>,
}

impl Builder<'_> {
    /// Adds a point whose id is its name, with a mark of its state where it has one.
    fn push(
        &mut self,
        stage: Stage,
        name: &str,
        key: &str,
        setup: &Setup,
        text: String,
        wants: Vec<Want>,
    ) {
        let id = marked(name, key);
        let mut point = HoldPoint {
            point: id,
            text,
            setup: setup.clone(),
            wants,
            test: None,
            at: None,
            done: false,
            stage,
            key: key.to_owned(),
        };
        point.done = self.state.done(&point).is_some();
        self.points.push(point);
    }

    fn identify(&mut self) {
        let site = self.ground.site;
        let mut sources: Vec<String> = site
            .boards
            .iter()
            .flat_map(|b| &b.mains)
            .map(|m| m.id.clone())
            .collect();
        sources.extend(site.sources.iter().map(|s| s.id.clone()));
        let text = format!(
            "Find every source: {}; a second tariff, a submain, an inverter, battery, generator inlet or UPS, a \
             neighbour's supply that nobody listed. Tell the occupants what goes off (life support, alarms, lifts, \
             freezers) and keep others out.",
            list(&sources)
        );
        self.push(
            Stage::Identify,
            "identify-sources",
            "",
            &Setup::default(),
            text,
            Vec::new(),
        );
    }

    /// What the last test left lifted and this one wants landed.
    fn restore(&mut self) {
        let landing: Vec<String> = self
            .state
            .lifted()
            .iter()
            .filter(|end| !self.check.setup.lift.contains(end))
            .cloned()
            .collect();
        if landing.is_empty() {
            return;
        }
        let mut ordered = landing.clone();
        let rank = |end: &String| match end.as_str() {
            e if e.ends_with(".link") => 0,
            e if e.ends_with(".main-earth") => 1,
            e if e.ends_with(".bond") => 2,
            e if e.ends_with(".main-neutral") || e.contains(".PE@") => 3,
            e if e.contains(".N@") => 4,
            _ => 5,
        };
        ordered.sort_by_key(rank);
        let mut setup = self.state.setup().clone();
        setup.load.clear();
        setup.on.clear();
        setup.provoke = None;
        setup.lift.retain(|end| self.check.setup.lift.contains(end));
        for board in landing
            .iter()
            .filter_map(|end| board_of_end(self.ground.site, end))
        {
            for main in mains_of(self.ground.site, board) {
                if !setup.open.contains(&main) {
                    setup.open.push(main);
                }
            }
        }
        let key = format!("{}>{}", state_key(self.state.setup()), state_key(&setup));
        let text = format!(
            "With {} open and locked and the ends proved dead, refit in this order, link and {} first: {}. Pull each \
             one to see that it holds.",
            list(&setup.open),
            words(self.ground.site).main_earth,
            list(&ordered)
        );
        self.push(Stage::Restore, "restore", &key, &setup, text, Vec::new());
    }

    fn proofs(&mut self) {
        for proof in needs::proofs_needed(self.ground, self.check) {
            let from = needs::check_that_proves(self.ground, self.check, &proof);
            let done = self.state.has(&proof);
            let how = from.map_or_else(
                || "no instrument at hand gives it".to_owned(),
                |c| format!("taken by: {}", c.name),
            );
            self.points.push(HoldPoint {
                point: format!("proof-{}", proof.replace(' ', "-")),
                text: format!("Proved first: {proof} ({how})."),
                setup: from.map(|c| c.setup.clone()).unwrap_or_default(),
                wants: Vec::new(),
                test: from.map(|c| c.test.clone()),
                at: from.map(|c| c.at.clone()),
                done,
                stage: Stage::Proof,
                key: proof,
            });
        }
    }

    /// Isolate, prove dead, lift, prove again.
    fn chain(&mut self) {
        let first = self.points.len();
        let ground = self.ground;
        let off = isolation(ground, self.check);
        let key = state_key(&off);
        let wants = before_lift(ground, self.check);
        let named: Vec<&str> = wants.iter().map(|w| w.name.as_str()).collect();
        let dead_key = format!("{key}|{}", named.join(","));
        let go_on = !self.state.leaves_isolation(&Setup {
            lift: self.check.setup.lift.clone(),
            ..off.clone()
        });

        let tester = "Prove the two-pole tester on a known live source or a proving unit: it reads, its leads and tips \
                      are whole.";
        self.push(
            Stage::TesterBefore,
            "prove-tester-before",
            &dead_key,
            &off,
            tester.to_owned(),
            Vec::new(),
        );
        self.push(
            Stage::Isolate,
            "isolate",
            &key,
            &off,
            isolate_text(ground, &off),
            Vec::new(),
        );
        let covered = go_on
            && self.state.is_bracketed()
            && wants.iter().all(|w| self.state.is_dead(&w.between));
        let dead = format!(
            "Prove dead where the work is, every conductor to every other and each to a stake in open ground: all {} \
             readings at or below their limits. A proximity indicator proves nothing.",
            wants.len()
        );
        self.push(Stage::ProveDead, "prove-dead", &dead_key, &off, dead, wants);
        let after = "Prove the tester again on the same known source: it still reads.";
        self.push(
            Stage::TesterAfter,
            "prove-tester-after",
            &dead_key,
            &off,
            after.to_owned(),
            Vec::new(),
        );
        self.lifted(&off, &dead_key);
        self.settle(first, go_on, covered);
    }

    fn lifted(&mut self, off: &Setup, dead_key: &str) {
        let lift = &self.check.setup.lift;
        if lift.is_empty() {
            return;
        }
        let setup = Setup {
            lift: lift.clone(),
            ..off.clone()
        };
        let key = format!("{dead_key}|{}", state_key(&setup));
        let wants = after_lift(self.ground, self.check);
        if !lift.iter().any(|end| parts_neutral(end)) {
            let text = format!(
                "Lift {}, one at a time; insulate each end and tag it.",
                list(lift)
            );
            self.push(Stage::ProveDeadAgain, "lift", &key, &setup, text, wants);
            return;
        }
        let text = format!(
            "Lift {}, one at a time; insulate each end and tag it. A neutral that is parted may come alive: test each \
             lifted end again, to {}, to the stake and to the others, before touching it.",
            list(lift),
            words(self.ground.site).earth
        );
        self.push(
            Stage::ProveDeadAgain,
            "prove-dead-again",
            &key,
            &setup,
            text,
            wants,
        );
        let after = "Prove the tester once more on the same known source.";
        self.push(
            Stage::TesterAfterAgain,
            "prove-tester-after-again",
            &key,
            &setup,
            after.to_owned(),
            Vec::new(),
        );
    }

    /// Sets `done` by the order in which the points were done, and by proofs of dead that still stand.
    fn settle(&mut self, first: usize, go_on: bool, covered: bool) {
        let opened = {
            let open = self.state.open();
            self.points
                .get(first + 1)
                .is_some_and(|p| p.setup.open.iter().all(|device| open.contains(device)))
        };
        let order = |state: &State, p: &HoldPoint| state.order_of(&p.point, &p.key);
        let mut least = 0;
        for index in first..self.points.len() {
            let Some(point) = self.points.get_mut(index) else {
                break;
            };
            let by_proof = covered
                && match point.stage {
                    Stage::Isolate => opened,
                    Stage::TesterBefore | Stage::ProveDead | Stage::TesterAfter => true,
                    _ => false,
                };
            point.done = by_proof;
            if !go_on || by_proof {
                continue;
            }
            if let Some(when) = order(self.state, point) {
                // Before and isolating may come in either order; the rest follows what it rests on.
                point.done =
                    when > least || matches!(point.stage, Stage::TesterBefore | Stage::Isolate);
                least = least.max(when);
            }
        }
    }

    /// Closing what the last test left open, for a test that is energised.
    fn energise(&mut self) {
        let target = &self.check.setup;
        let before = if self.lifts_now() {
            isolation(self.ground, self.check)
        } else {
            self.state.setup().clone()
        };
        let closes = before
            .open
            .iter()
            .any(|device| !target.open.contains(device));
        if !self.check.energised || !closes {
            return;
        }
        let mut setup = Setup {
            open: target.open.clone(),
            lift: target.lift.clone(),
            unplug: target.unplug.clone(),
            off: target.off.clone(),
            ..Setup::default()
        };
        for source in &self.ground.site.sources {
            let mode = target
                .sources
                .get(&source.id)
                .copied()
                .unwrap_or(SourceMode::On);
            setup.sources.insert(source.id.clone(), mode);
        }
        let key = state_key(&setup);
        let ends = if target.lift.is_empty() {
            ""
        } else {
            "Lifted ends shrouded and out of reach. "
        };
        let text = format!(
            "{ends}Link and {} in place wherever they are not part of this test. Covers on, tools out, people told and \
             clear. Take off your own lock, then close what is to be closed.",
            words(self.ground.site).main_earth
        );
        self.push(Stage::Energise, "energise", &key, &setup, text, Vec::new());
    }

    /// Whether something is still to be lifted for this check.
    fn lifts_now(&self) -> bool {
        self.check
            .setup
            .lift
            .iter()
            .any(|end| !self.state.lifted().contains(end))
    }

    fn live(&mut self) {
        let touches = !matches!(
            self.check.hookup,
            Hookup::Seen { .. } | Hookup::Lamp { .. } | Hookup::Holds { .. }
        );
        if touches {
            let text = "Prove the instrument on a known source: it reads, its leads, tips and fuses are whole and fit \
                        for the place.";
            self.push(
                Stage::Live,
                "prove-tester-live",
                "",
                &Setup::default(),
                text.to_owned(),
                Vec::new(),
            );
        }
        let place = terminals_of(self.ground.site, &self.check.hookup)
            .first()
            .map_or_else(|| self.check.place.clone(), |t| place_of(t).to_owned());
        let text = "Insulating gloves and mat, one hand, no jewellery; covers stay on wherever the test can be made \
                    so. Nobody else within reach; nothing metal touched.";
        self.push(
            Stage::Live,
            &format!("live-work-{}", place.replace('.', "-")),
            "",
            &Setup::default(),
            text.to_owned(),
            Vec::new(),
        );
        let through_earth = needs::earth_path(self.check).is_some();
        let on = &self.check.setup.on;
        let what = match &self.check.hookup {
            Hookup::Holds { device } => format!("anything that {device} feeds"),
            _ if through_earth => format!(
                "frames or other metal on {}",
                place.split('.').next().unwrap_or(&place)
            ),
            _ if !on.is_empty() => format!("{}, nor metal near it", list(on)),
            _ => return,
        };
        let key = format!("keep-clear {what} {}", state_key(&self.check.setup));
        let text = format!(
            "Nobody touches {what} while the test is on. Say so, and stand where you see it."
        );
        self.push(
            Stage::Extra,
            "keep-clear",
            &key,
            &self.check.setup.clone(),
            text,
            Vec::new(),
        );
    }

    fn extras(&mut self) {
        for extra in &self.check.hold {
            let key = format!("{}|{}", extra.text, state_key(&self.check.setup));
            self.push(
                Stage::Extra,
                &extra.point,
                &key,
                &self.check.setup,
                extra.text.clone(),
                Vec::new(),
            );
        }
    }
}

/// The point that comes before everything where metal may be live as found.
pub(super) fn make_safe(state: &State) -> HoldPoint {
    let text = "Keep everyone off taps, pipes, metal and the switchboard, and out of wet places. Ring the network \
                operator's emergency line. Treat neutral, earth, enclosures and pipes as live.";
    let mut point = HoldPoint {
        point: "make-safe".to_owned(),
        text: text.to_owned(),
        setup: Setup::default(),
        wants: Vec::new(),
        test: None,
        at: None,
        done: false,
        stage: Stage::MakeSafe,
        key: String::new(),
    };
    point.done = state.done(&point).is_some();
    point
}

/// The hold points of a check in the present state, in order, each with whether it is done.
pub(super) fn hold_points(ground: &Ground<'_>, state: &State, check: &Check) -> Vec<HoldPoint> {
    let mut builder = Builder {
        ground,
        state,
        check,
        points: Vec::new(),
    };
    if state.is_standing() {
        builder.points.push(make_safe(state));
    }
    let lifts = builder.lifts_now();
    let chain = isolates(check) && (!check.energised || lifts);
    if chain
        || state
            .lifted()
            .iter()
            .any(|end| !check.setup.lift.contains(end))
    {
        builder.identify();
    }
    builder.restore();
    builder.proofs();
    if chain {
        builder.chain();
    }
    builder.energise();
    if check.energised {
        builder.live();
    }
    builder.extras();
    builder.points
}
