//! An invented house, checks on it, and a person who does hold points: the stand of the safety tests.

use std::collections::BTreeMap;

use super::{Gate, Ground, HoldPoint, ReadingStop, State, StateEvent, Verdict};
use crate::checks::Check;
use crate::knowledge::{Hookup, Meter, Proof, SafetyRow, Setup, procedure::MeterWord};
use crate::quantity::ParsedValue;
use crate::site::Site;
use crate::site::file::{Known, load_str};

mod gates;
mod hazards;
mod points;
mod real;
mod states;

/// A house on TN-C-S: two circuits on two RCDs, a heater without one, a water pipe.
pub fn house() -> Site {
    site(
        r#"{"schema": "straypath-site/1", "words": "au-nz", "may_isolate_supply": true,
        "supply": {"system": "TN-C-S"},
        "earthing": {"board": "msb", "main_earth": {"metres": 4, "mm2": 6},
            "bonds": [{"id": "water", "name": "water pipe", "metres": 9, "mm2": 4}]},
        "boards": [{"id": "msb", "name": "main switchboard", "fed_from": "service",
            "main_switch": {"id": "main", "amps": 63, "poles": 1},
            "rcds": [{"id": "rcd1", "ma": 30}, {"id": "rcd2", "ma": 30}],
            "circuits": [
                {"id": "c1", "name": "kitchen", "rcd": "rcd1", "breaker": {"curve": "C", "amps": 20},
                 "cable": {"mm2": 2.5}, "points": [{"id": "p1", "metres": 9}, {"id": "p2", "metres": 14}]},
                {"id": "c2", "name": "beds", "rcd": "rcd2", "breaker": {"curve": "C", "amps": 20},
                 "cable": {"mm2": 2.5}, "points": [{"id": "p1", "metres": 17}]},
                {"id": "c3", "name": "heater", "rcd": null, "breaker": {"curve": "C", "amps": 25},
                 "cable": {"mm2": 4}, "points": [{"id": "p1", "metres": 12, "kind": "fixed"}]}]}],
        "equipment": [{"id": "kettle", "kind": "kettle", "at": "c1.p1", "watts": 2200, "class": "I", "plug": true}],
        "sources": []}"#,
    )
}

/// A site from its file.
pub fn site(text: &str) -> Site {
    load_str(text, &Known::contract())
        .expect("the test's site file is sound")
        .0
}

/// The numbers of the rules as the tests assume them.
pub fn numbers() -> SafetyRow {
    SafetyRow {
        touch_volts: 25.0,
        body_amps: 0.005,
        lift_amps: 0.05,
        dead_volts: 6.0,
        free_watts: 25.0,
        free_loop_amps: 0.015,
        supply_proof: "supply neutral".to_owned(),
        credible: 0.001,
        earth_proof: "earth continuity {at}".to_owned(),
        earth_lift_volts: 2.0,
        standing: 0.05,
    }
}

/// A setup as JSON.
pub fn setup(text: &str) -> Setup {
    serde_json::from_str(text).expect("the test's setup is sound")
}

/// A check; energised unless it is a dead quantity or its first place is switched off and only looked at.
pub fn check(test: &str, at: &str, setup_text: &str, hookup: Hookup) -> Check {
    let dead = matches!(
        hookup,
        Hookup::Insulation { .. } | Hookup::Continuity { .. }
    );
    Check {
        test: test.to_owned(),
        at: at.to_owned(),
        form: 0,
        name: test.to_owned(),
        text: String::new(),
        setup: setup(setup_text),
        hookup,
        unit: "V".to_owned(),
        minutes: 3.0,
        energised: !dead,
        kit: Vec::new(),
        hold: Vec::new(),
        needs: Vec::new(),
        proves: Vec::new(),
        hazard: None,
        limits: Vec::new(),
        recheck_only: false,
        staged: false,
        place: at.split('.').next().unwrap_or(at).to_owned(),
    }
}

pub fn pair(a: &str, b: &str) -> [String; 2] {
    [a.to_owned(), b.to_owned()]
}

pub fn volts(a: &str, b: &str) -> Hookup {
    Hookup::Volts {
        between: pair(a, b),
        meter: None,
    }
}

pub fn low_z(a: &str, b: &str) -> Hookup {
    Hookup::Volts {
        between: pair(a, b),
        meter: Some(Meter::Named(MeterWord::LowZ)),
    }
}

pub fn loop_test(a: &str, b: &str, amps: Option<f64>) -> Hookup {
    Hookup::Loop {
        between: pair(a, b),
        amps,
    }
}

pub fn insulation(a: &[&str], b: &[&str]) -> Hookup {
    let group = |terminals: &[&str]| terminals.iter().map(|t| (*t).to_owned()).collect();
    Hookup::Insulation {
        between: [group(a), group(b)],
        test_volts: 500.0,
    }
}

pub fn continuity(a: &str, b: &str) -> Hookup {
    Hookup::Continuity {
        between: pair(a, b),
    }
}

pub fn amps(end: &str) -> Hookup {
    Hookup::Amps {
        around: vec![end.to_owned()],
    }
}

pub fn proof(what: &str, most: f64) -> Proof {
    Proof {
        what: what.to_owned(),
        least: None,
        most: Some(most),
        word: None,
    }
}

/// A visit: a site, its checks, the state so far.
pub struct Visit {
    pub site: Site,
    pub numbers: SafetyRow,
    pub catalogue: Vec<Check>,
    pub state: State,
    entry: u64,
}

impl Visit {
    pub fn new(site: Site, catalogue: Vec<Check>) -> Self {
        Self {
            site,
            numbers: numbers(),
            catalogue,
            state: State::new(),
            entry: 0,
        }
    }

    pub fn ground(&self) -> Ground<'_> {
        Ground {
            site: &self.site,
            numbers: &self.numbers,
            catalogue: &self.catalogue,
        }
    }

    pub fn verdict(&self, check: &Check) -> Verdict {
        Gate::new(self.ground()).clear(check, &self.state, None)
    }

    pub fn refused(&self, check: &Check) -> bool {
        matches!(self.verdict(check), Verdict::Refused(_))
    }

    pub fn points(&self, check: &Check) -> Vec<HoldPoint> {
        match self.verdict(check) {
            Verdict::Cleared(cleared) => cleared.points().to_vec(),
            other => panic!("not cleared: {other:?}"),
        }
    }

    pub fn open(&self, check: &Check) -> Vec<String> {
        self.points(check)
            .into_iter()
            .filter(|p| !p.done)
            .map(|p| p.point)
            .collect()
    }

    pub fn apply(&mut self, event: &StateEvent<'_>) {
        let ground = Ground {
            site: &self.site,
            numbers: &self.numbers,
            catalogue: &self.catalogue,
        };
        self.state.apply(&ground, event);
    }

    /// Does one point with 0 V wherever it wants a reading.
    pub fn done(&mut self, point: &HoldPoint) {
        self.entry += 1;
        let volts: BTreeMap<String, f64> =
            point.wants.iter().map(|w| (w.name.clone(), 0.0)).collect();
        assert_eq!(State::judge(point, &volts), Ok(()));
        let entry = self.entry;
        self.apply(&StateEvent::PointDone {
            point,
            volts: &volts,
            entry,
        });
    }

    /// Does every open point in order.
    pub fn do_all(&mut self, check: &Check) {
        for _ in 0..30 {
            let Some(point) = self.points(check).into_iter().find(|p| !p.done) else {
                return;
            };
            assert!(point.test.is_none(), "{} is done by a reading", point.point);
            self.done(&point);
        }
        panic!("points stay open: {:?}", self.open(check));
    }

    pub fn may_read(&self, check: &Check) -> Result<(), ReadingStop> {
        Gate::new(self.ground())
            .may_read(check, &self.state, None)
            .map(|_| ())
    }

    pub fn read(&mut self, check: &Check, value: f64) {
        self.entry += 1;
        let entry = self.entry;
        self.apply(&StateEvent::Reading {
            check,
            value: &ParsedValue::Value { value },
            entry,
        });
    }
}
