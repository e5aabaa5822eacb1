//! The test simulated: what it raises is refused, kept off, or waits for its proof; what it does not raise passes.

use super::*;
use crate::knowledge::{BodyRow, Marker};
use crate::network::Edit;
use crate::safety::{Body, HazardBook, Hazards, Stage, World};

fn body() -> Body {
    Body::new(
        &[25.0, 50.0, 75.0, 100.0, 125.0],
        &[1175.0, 1100.0, 1025.0, 975.0, 900.0],
    )
    .expect("a table")
}

fn world(id: &str, p: f64) -> World {
    World {
        id: id.to_owned(),
        says: format!("the {id} is open"),
        p,
        draws: 2,
    }
}

// Divider of a lost supply neutral: every tap rises by what flows back through the electrode (50 Ω and 1 Ω).
fn lost_neutral(setup: &Setup, test: &[Edit], hookups: &[Hookup]) -> Vec<Option<f64>> {
    let off = setup.open.contains(&"main".to_owned());
    let mut siemens: f64 = setup.load.iter().map(|l| l.watts / (230.0 * 230.0)).sum();
    siemens += test
        .iter()
        .map(|e| {
            if let Edit::Shunt { ohms, .. } = e {
                1.0 / ohms
            } else {
                0.0
            }
        })
        .sum::<f64>();
    let amps = if off {
        0.0
    } else {
        230.0 * siemens / (1.0 + 51.0 * siemens)
    };
    hookups
        .iter()
        .map(|h| match h {
            Hookup::Volts {
                between: [a, b], ..
            } if b == "soil" && !a.ends_with(".L") => Some(50.0 * amps),
            Hookup::Volts {
                between: [a, _], ..
            } if a.ends_with(".L") && siemens > 0.0 => Some(amps / siemens),
            Hookup::Volts { .. } => Some(0.0),
            Hookup::Amps { .. } => Some(amps),
            _ => None,
        })
        .collect()
}

fn clear(visit: &Visit, check: &Check, worlds: &[World]) -> Verdict {
    let mut book = HazardBook::new();
    let body = body();
    let mut solver = |w: &World, _: usize, s: &Setup, t: &[Edit], h: &[Hookup]| {
        if w.id == "supply neutral" {
            lost_neutral(s, t, h)
        } else {
            vec![Some(0.0); h.len()]
        }
    };
    let mut hazards = Hazards::new(&mut book, worlds, &body, &mut solver);
    Gate::new(visit.ground()).clear(check, &visit.state, Some(&mut hazards))
}

fn ground_visit() -> Visit {
    let mut stage = check(
        "stage",
        "msb",
        r#"{"load": [{"at": "msb", "watts": 25}]}"#,
        volts("msb.PE", "soil"),
    );
    stage.proves = vec![proof("supply neutral", 6.0)];
    Visit::new(house(), vec![stage])
}

#[test]
fn a_load_that_lifts_the_taps_is_refused_while_the_cause_is_credible() {
    let mut visit = ground_visit();
    visit.numbers.free_watts = 5000.0;
    let load = check(
        "load",
        "msb",
        r#"{"load": [{"at": "msb", "watts": 2300}]}"#,
        volts("msb.L", "msb.N"),
    );
    let Verdict::Refused(refusal) = clear(&visit, &load, &[world("supply neutral", 0.3)]) else {
        panic!("not refused")
    };
    assert!(
        refusal.reason.contains("157 V") || refusal.reason.contains("V on"),
        "{}",
        refusal.reason
    );
    assert!(
        refusal.reason.contains("if the supply neutral is open"),
        "{}",
        refusal.reason
    );
    assert!(matches!(
        clear(&visit, &load, &[world("supply neutral", 0.0004)]),
        Verdict::Cleared(_)
    ));
    assert!(matches!(
        clear(&visit, &load, &[world("something else", 0.9)]),
        Verdict::Cleared(_)
    ));
}

#[test]
fn the_proof_still_to_be_gained_stands_before_the_danger() {
    let mut visit = ground_visit();
    let load = check(
        "load",
        "msb",
        r#"{"load": [{"at": "msb", "watts": 2300}]}"#,
        volts("msb.L", "msb.N"),
    );
    let worlds = [world("supply neutral", 0.3)];
    let Verdict::Cleared(cleared) = clear(&visit, &load, &worlds) else {
        panic!("advisable behind its proof")
    };
    assert!(
        cleared
            .open_points()
            .any(|p| p.point == "proof-supply-neutral")
    );
    let stage = visit.catalogue[0].clone();
    visit.read(&stage, 0.2);
    assert!(
        matches!(clear(&visit, &load, &worlds), Verdict::Refused(_)),
        "the odds must have fallen too"
    );
}

#[test]
fn a_loop_test_is_judged_by_its_own_current() {
    let visit = ground_visit();
    let test = |amps| {
        check(
            "loop",
            "c1.p1",
            "{}",
            loop_test("c1.p1.L", "c1.p1.N", Some(amps)),
        )
    };
    let worlds = [world("supply neutral", 0.3)];
    let Verdict::Cleared(small) = clear(&visit, &test(0.015), &worlds) else {
        panic!("15 mA raises under 1 V")
    };
    assert_eq!(small.hazard(), None);
    let Verdict::Cleared(large) = clear(&visit, &test(10.0), &worlds) else {
        panic!("behind its proof")
    };
    assert!(large.open_points().any(|p| p.stage == Stage::Proof));
}

#[test]
fn what_is_live_as_found_is_not_the_tests_doing_but_people_are_kept_off() {
    let visit = ground_visit();
    let mut book = HazardBook::new();
    let body = body();
    let worlds = [world("supply neutral", 0.3)];
    let mut solver =
        |_: &World, _: usize, _: &Setup, _: &[Edit], h: &[Hookup]| vec![Some(120.0); h.len()];
    let mut hazards = Hazards::new(&mut book, &worlds, &body, &mut solver);
    let unplug = check(
        "v",
        "c1.p1",
        r#"{"unplug": "all"}"#,
        volts("c1.p1.L", "c1.p1.N"),
    );
    let gate = Gate::new(visit.ground());
    let Verdict::Cleared(cleared) = gate.clear(&unplug, &visit.state, Some(&mut hazards)) else {
        panic!("as found")
    };
    assert_eq!(
        cleared.points().first().map(|p| p.point.as_str()),
        Some("make-safe")
    );
    assert!(
        hazards
            .standing(&visit.ground())
            .is_some_and(|raised| raised.volts > 100.0)
    );
}

#[test]
fn a_frame_alone_is_kept_clear_of() {
    let visit = ground_visit();
    let mut book = HazardBook::new();
    let body = body();
    let worlds = [world("cord earth", 0.2)];
    let mut solver = |_: &World, _: usize, s: &Setup, _: &[Edit], h: &[Hookup]| {
        let on = s.on.contains(&"kettle".to_owned());
        let frame =
            |h: &Hookup| matches!(h, Hookup::Volts { between: [a, _], .. } if a == "kettle.frame");
        h.iter()
            .map(|h| Some(if on && frame(h) { 97.0 } else { 0.0 }))
            .collect()
    };
    let mut hazards = Hazards::new(&mut book, &worlds, &body, &mut solver);
    let on = check(
        "v",
        "c1.p1",
        r#"{"on": ["kettle"]}"#,
        volts("c1.p1.L", "c1.p1.N"),
    );
    let gate = Gate::new(visit.ground());
    let Verdict::Cleared(cleared) = gate.clear(&on, &visit.state, Some(&mut hazards)) else {
        panic!("kept clear of")
    };
    assert!(
        cleared
            .points()
            .iter()
            .any(|p| p.point.starts_with("keep-clear-") && p.text.contains("kettle"))
    );
    assert!(
        gate.hazard(&on, &mut hazards)
            .is_some_and(|text| text.contains("97 V on the frame"))
    );
}

#[test]
fn current_in_a_conductor_to_be_lifted_refuses_until_a_clamp_shows_none() {
    let lift = check(
        "n-n",
        "c1",
        r#"{"open": ["c1.breaker"], "lift": ["c1.N@board"]}"#,
        insulation(&["c1.N"], &["c1.PE"]),
    );
    let clamp = check(
        "clamp",
        "c1",
        r#"{"open": ["c1.breaker"]}"#,
        amps("c1.N@board"),
    );
    let run = |visit: &Visit| {
        let mut book = HazardBook::new();
        let body = body();
        let worlds = [world("borrowed neutral", 0.1)];
        let mut solver = |_: &World, _: usize, _: &Setup, _: &[Edit], h: &[Hookup]| {
            h.iter()
                .map(|h| {
                    Some(if matches!(h, Hookup::Amps { .. }) {
                        3.0
                    } else {
                        0.0
                    })
                })
                .collect()
        };
        let mut hazards = Hazards::new(&mut book, &worlds, &body, &mut solver);
        Gate::new(visit.ground()).clear(&lift, &visit.state, Some(&mut hazards))
    };
    let visit = Visit::new(house(), Vec::new());
    assert!(matches!(run(&visit), Verdict::Refused(r) if r.reason.contains("3.0 A in c1.N@board")));
    let mut visit = Visit::new(house(), vec![clamp.clone()]);
    let Verdict::Cleared(behind) = run(&visit) else {
        panic!("behind the clamp")
    };
    assert!(
        behind
            .open_points()
            .any(|p| p.test.as_deref() == Some("clamp"))
    );
    visit.read(&clamp, 0.004);
    let Verdict::Cleared(free) = run(&visit) else {
        panic!("clamped")
    };
    assert!(free.open_points().all(|p| p.test.is_none()));
}

#[test]
fn a_part_called_dead_that_is_not_is_said_and_still_proved() {
    let visit = Visit::new(house(), Vec::new());
    let mut book = HazardBook::new();
    let body = body();
    let worlds = [world("borrowed neutral", 0.1)];
    let mut solver = |_: &World, _: usize, s: &Setup, _: &[Edit], h: &[Hookup]| {
        let live = |h: &Hookup| matches!(h, Hookup::Volts { between, .. } if between.contains(&"c1.N".to_owned()));
        h.iter()
            .map(|h| {
                Some(if !s.open.is_empty() && live(h) {
                    230.0
                } else {
                    0.0
                })
            })
            .collect()
    };
    let mut hazards = Hazards::new(&mut book, &worlds, &body, &mut solver);
    let dead = check(
        "ins",
        "c1",
        r#"{"open": ["c1.breaker"]}"#,
        insulation(&["c1.L"], &["c1.PE"]),
    );
    let verdict = Gate::new(visit.ground()).clear(&dead, &visit.state, Some(&mut hazards));
    let Verdict::Cleared(cleared) = verdict else {
        panic!("the prove-dead point covers it")
    };
    let text = Gate::new(visit.ground()).hazard(&dead, &mut hazards);
    assert!(text.is_some_and(|text| text.contains("230 V")));
    assert!(cleared.open_points().any(|p| {
        p.wants
            .iter()
            .any(|w| w.between.contains(&"c1.N".to_owned()))
    }));
}

#[test]
fn a_stage_goes_on_behind_a_point_where_little_is_added_or_little_believed() {
    let mut visit = ground_visit();
    visit.numbers.free_watts = 5000.0;
    let stage = |watts: u32| {
        let text = format!(r#"{{"load": [{{"at": "msb", "watts": {watts}}}]}}"#);
        let mut c = check("stage", "msb", &text, volts("msb.N", "soil"));
        c.staged = true;
        c
    };
    let kept_off = |verdict: Verdict| {
        verdict
            .cleared()
            .is_some_and(|c| c.open_points().any(|p| p.point.starts_with("keep-off-")))
    };
    assert!(
        kept_off(clear(&visit, &stage(100), &[world("supply neutral", 0.3)])),
        "20 V"
    );
    assert!(matches!(
        clear(&visit, &stage(2000), &[world("supply neutral", 0.3)]),
        Verdict::Refused(_)
    ));
    assert!(kept_off(clear(
        &visit,
        &stage(2000),
        &[world("supply neutral", 0.01)]
    )));
}

#[test]
fn a_brief_current_is_judged_by_its_volts() {
    let visit = ground_visit();
    let worlds = [world("supply neutral", 0.3)];
    let ramp = check(
        "ramp",
        "rcd1",
        "{}",
        Hookup::Ramp {
            rcd: "rcd1".to_owned(),
            at: None,
        },
    );
    assert!(
        clear(&visit, &ramp, &worlds).cleared().is_some(),
        "45 mA through 50 ohms is 2 V"
    );
    let five = Hookup::TripTime {
        rcd: "rcd1".to_owned(),
        at: None,
        multiple: 20.0,
        half_cycle: None,
    };
    assert!(
        clear(&visit, &check("time", "rcd1", "{}", five), &worlds)
            .cleared()
            .is_none(),
        "0.6 A through 50 ohms"
    );
}

#[test]
fn the_body_takes_more_current_the_higher_the_touch() {
    let body = body();
    assert_eq!(body.ohms(10.0), 1175.0);
    assert!((body.ohms(37.5) - 1137.5).abs() < 1e-9);
    assert_eq!(body.ohms(400.0), 900.0);
    let stiff = body.touch(50.0, 0.0);
    assert!((stiff.volts - 50.0).abs() < 1e-9 && (stiff.amps - 50.0 / 1100.0).abs() < 1e-9);
    let soft = body.touch(230.0, 100_000.0);
    assert!(soft.volts < 3.0 && (soft.amps - 230.0 / 101_175.0).abs() < 1e-6);
    let touch = body.touch(100.0, 500.0);
    assert!(
        (touch.volts - 100.0 * body.ohms(touch.volts) / (500.0 + body.ohms(touch.volts))).abs()
            < 1e-9
    );
}

#[test]
fn tables_of_the_body_are_checked() {
    let row = |ohms: Vec<f64>| BodyRow {
        table: "wet".to_owned(),
        percentile: 5.0,
        volts: vec![25.0, 50.0],
        ohms,
        marker: Marker::Memory,
        source: String::new(),
    };
    assert!(Body::from_rows(&[row(vec![1000.0, 900.0])], "wet", 5.0).is_ok());
    assert!(Body::from_rows(&[row(vec![1000.0])], "wet", 5.0).is_err());
    assert!(Body::from_rows(&[row(vec![1000.0, 900.0])], "wet", 50.0).is_err());
}
