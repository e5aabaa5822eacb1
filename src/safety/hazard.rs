//! The test itself, simulated under every hypothesis still credible (design §6).
//!
//! Method: for each state that a check passes through, with its instrument's burden, the volts between
//! touchable parts are solved open, then across 1 kΩ; from the two a source resistance follows, and with it
//! what a body takes (IEC 60479-1). A step is at risk where it raises a touch above the limits that it does
//! not pass as found, where a conductor to be lifted carries current, or where a part called dead is not.

use std::collections::BTreeMap;

use super::Ground;
use super::body::{Body, Touch};
use super::exposure::{Stance, stances, touchables};
use super::hold::isolates;
use super::point::Want;
use super::wants::before_lift;
use super::words::terminal_name;
use crate::checks::Check;
use crate::knowledge::{Hookup, Meter, Setup};
use crate::network::Edit;

/// A hypothesis to simulate the test under.
#[derive(Clone, Debug, PartialEq)]
pub struct World {
    /// Its id, stable within a visit.
    pub id: String,
    /// As a person says it after `if`: `the supply neutral is open`.
    pub says: String,
    /// Its probability now.
    pub p: f64,
    /// Values drawn for it.
    pub draws: usize,
}

/// Whoever can solve the circuit under a hypothesis.
pub trait Simulator {
    /// What each hookup shows in `setup` under a hypothesis' draw, with the edits of the test itself added;
    /// nothing where it shows no number. Nothing trips.
    fn read(
        &mut self,
        world: &World,
        draw: usize,
        setup: &Setup,
        test: &[Edit],
        hookups: &[Hookup],
    ) -> Vec<Option<f64>>;
}

impl<F> Simulator for F
where
    F: FnMut(&World, usize, &Setup, &[Edit], &[Hookup]) -> Vec<Option<f64>>,
{
    fn read(
        &mut self,
        world: &World,
        draw: usize,
        setup: &Setup,
        test: &[Edit],
        hookups: &[Hookup],
    ) -> Vec<Option<f64>> {
        self(world, draw, setup, test, hookups)
    }
}

/// Something that a test raises, with the hypothesis under which it is worst.
#[derive(Clone, Debug, PartialEq)]
pub struct Raised {
    /// Where: a pair of terminals, or the end to be lifted and nothing.
    pub between: [String; 2],
    /// V, worst.
    pub volts: f64,
    /// A through a body, or in the conductor.
    pub amps: f64,
    /// The hypothesis, as a person says it.
    pub says: String,
    /// Its probability.
    pub p: f64,
    /// It is the frame of one piece of equipment: keeping off it removes the danger.
    pub local: bool,
}

/// What simulating a check has shown.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Assessment {
    /// Worst touch that the test itself causes.
    pub touch: Option<Raised>,
    /// Worst current in a conductor to be lifted, over its limit.
    pub lifting: Option<Raised>,
    /// Worst part called dead that is not; the prove-dead point finds it.
    pub not_dead: Option<Raised>,
}

/// What one stance shows under one hypothesis.
#[derive(Clone, Debug, Default, PartialEq)]
struct Finding {
    touch: Option<Raised>,
    lifting: Vec<Raised>,
}

/// Findings kept between questions: they depend on stance and hypothesis, not on the odds.
#[derive(Clone, Debug, Default)]
pub struct HazardBook {
    found: BTreeMap<String, BTreeMap<String, Finding>>,
    dead: BTreeMap<String, BTreeMap<String, Option<Raised>>>,
    /// By hypothesis, then draw, then pair.
    as_found: BTreeMap<String, Vec<Vec<Touch>>>,
}

impl HazardBook {
    /// An empty book.
    pub fn new() -> Self {
        Self::default()
    }

    /// Forgets everything (a repair changed the circuit, or draws were renewed).
    pub fn clear(&mut self) {
        *self = Self::default();
    }

    /// Forgets one hypothesis (its draws were renewed).
    pub fn forget(&mut self, world: &str) {
        self.found
            .values_mut()
            .for_each(|by_world| drop(by_world.remove(world)));
        self.dead
            .values_mut()
            .for_each(|by_world| drop(by_world.remove(world)));
        self.as_found.remove(world);
    }
}

/// Everything the gate needs to simulate a check.
pub struct Hazards<'a> {
    book: &'a mut HazardBook,
    worlds: &'a [World],
    body: &'a Body,
    simulator: &'a mut dyn Simulator,
    standing: Option<f64>,
}

/// Ohms across which a source is loaded to find what lies behind it.
const PROBE_OHMS: f64 = 1000.0;

impl<'a> Hazards<'a> {
    /// With the findings so far, the hypotheses (those under `SafetyRow::credible` are passed over), a body,
    /// and a solver.
    pub fn new(
        book: &'a mut HazardBook,
        worlds: &'a [World],
        body: &'a Body,
        simulator: &'a mut dyn Simulator,
    ) -> Self {
        Self {
            book,
            worlds,
            body,
            simulator,
            standing: None,
        }
    }

    /// Simulates a check under every credible hypothesis.
    pub fn assess(&mut self, ground: &Ground<'_>, check: &Check) -> Assessment {
        let mut result = Assessment::default();
        let all: Vec<(String, Stance)> = stances(ground, check)
            .into_iter()
            .map(|s| (s.key(), s))
            .collect();
        let wants = if isolates(check) {
            before_lift(ground, check)
        } else {
            Vec::new()
        };
        let names: Vec<&str> = wants.iter().map(|w| w.name.as_str()).collect();
        let dead_key = all
            .first()
            .map(|(key, _)| format!("{key}|{}", names.join("+")));
        let worlds = self.worlds;
        for world in worlds
            .iter()
            .filter(|w| !all.is_empty() && w.p >= ground.numbers.credible)
        {
            for (key, stance) in &all {
                let finding = self.finding(ground, world, key, stance);
                keep_worst(&mut result.touch, finding.touch, world.p);
                for raised in finding.lifting {
                    keep_worst(&mut result.lifting, Some(raised), world.p);
                }
            }
            if let (Some((_, first)), Some(key), false) = (all.first(), &dead_key, wants.is_empty())
            {
                let dead = self.not_dead(world, key, first, &wants);
                keep_worst(&mut result.not_dead, dead, world.p);
            }
        }
        result
    }

    /// The worst touch as found, over the limits, under any credible hypothesis.
    pub fn standing(&mut self, ground: &Ground<'_>) -> Option<Raised> {
        let mut worst = None;
        let pairs = touchables(ground);
        let worlds = self.worlds;
        for world in worlds.iter().filter(|w| w.p >= ground.numbers.credible) {
            for touches in self.as_found(ground, world) {
                for ((between, local), touch) in pairs.iter().zip(touches) {
                    if over(ground, touch) {
                        keep_worst(
                            &mut worst,
                            Some(raised(between, touch, world, *local)),
                            world.p,
                        );
                    }
                }
            }
        }
        worst
    }

    /// Probability that metal which many may touch is live as found.
    pub fn standing_probability(&mut self, ground: &Ground<'_>) -> f64 {
        if let Some(known) = self.standing {
            return known;
        }
        let pairs = touchables(ground);
        let worlds = self.worlds;
        let mut sum = 0.0;
        for world in worlds.iter().filter(|w| w.p >= ground.numbers.credible) {
            let draws = self.as_found(ground, world);
            let live = |touches: &Vec<Touch>| {
                pairs
                    .iter()
                    .zip(touches)
                    .any(|((_, local), t)| !local && over(ground, *t))
            };
            let share = draws.iter().filter(|t| live(t)).count() as f64 / draws.len().max(1) as f64;
            sum += world.p * share;
        }
        self.standing = Some(sum);
        sum
    }

    fn as_found(&mut self, ground: &Ground<'_>, world: &World) -> Vec<Vec<Touch>> {
        if let Some(known) = self.book.as_found.get(&world.id) {
            return known.clone();
        }
        let pairs = touchables(ground);
        let floor = floor(ground);
        let draws: Vec<Vec<Touch>> = (0..world.draws)
            .map(|draw| self.touches(world, draw, &Setup::default(), &[], &pairs, floor))
            .collect();
        self.book.as_found.insert(world.id.clone(), draws.clone());
        draws
    }

    /// Touch across each pair; those under `floor` volts open are not looked into.
    fn touches(
        &mut self,
        world: &World,
        draw: usize,
        setup: &Setup,
        test: &[Edit],
        pairs: &[([String; 2], bool)],
        floor: f64,
    ) -> Vec<Touch> {
        let volts = |between: &[String; 2], meter: Option<Meter>| Hookup::Volts {
            between: between.clone(),
            meter,
        };
        let open: Vec<Hookup> = pairs.iter().map(|(pair, _)| volts(pair, None)).collect();
        let open = self.simulator.read(world, draw, setup, test, &open);
        let mut touches = vec![Touch::default(); pairs.len()];
        let higher: Vec<usize> = (0..pairs.len())
            .filter(|i| {
                open.get(*i)
                    .copied()
                    .flatten()
                    .is_some_and(|v| v.abs() > floor)
            })
            .collect();
        if higher.is_empty() {
            return touches;
        }
        let loaded: Vec<Hookup> = higher
            .iter()
            .filter_map(|i| pairs.get(*i))
            .map(|(pair, _)| volts(pair, Some(Meter::Ohms(PROBE_OHMS))))
            .collect();
        let loaded = self.simulator.read(world, draw, setup, test, &loaded);
        for (order, index) in higher.iter().enumerate() {
            let u0 = open.get(*index).copied().flatten().unwrap_or(0.0).abs();
            let u1 = loaded.get(order).copied().flatten().unwrap_or(u0).abs();
            let behind = if u1 > 0.0 {
                PROBE_OHMS * (u0 / u1 - 1.0)
            } else {
                f64::INFINITY
            };
            if let Some(slot) = touches.get_mut(*index)
                && behind.is_finite()
            {
                *slot = self.body.touch(u0, behind);
            }
        }
        touches
    }

    fn finding(
        &mut self,
        ground: &Ground<'_>,
        world: &World,
        key: &str,
        stance: &Stance,
    ) -> Finding {
        if let Some(known) = self
            .book
            .found
            .get(key)
            .and_then(|by_world| by_world.get(&world.id))
        {
            return known.clone();
        }
        let pairs = touchables(ground);
        let mut finding = Finding::default();
        for draw in 0..world.draws {
            let touches = self.touches(
                world,
                draw,
                &stance.setup,
                &stance.burden,
                &pairs,
                floor(ground),
            );
            if touches.iter().any(|t| over(ground, *t)) {
                let before = self.as_found(ground, world);
                let before = before.get(draw);
                for (index, ((between, local), touch)) in pairs.iter().zip(&touches).enumerate() {
                    let was = before
                        .and_then(|all| all.get(index))
                        .copied()
                        .unwrap_or_default();
                    if raises(ground, was, *touch) {
                        keep_worst(
                            &mut finding.touch,
                            Some(raised(between, *touch, world, *local)),
                            world.p,
                        );
                    }
                }
            }
            if !stance.lifting.is_empty() {
                self.lifting(ground, world, draw, stance, &mut finding);
            }
        }
        self.book
            .found
            .entry(key.to_owned())
            .or_default()
            .insert(world.id.clone(), finding.clone());
        finding
    }

    fn lifting(
        &mut self,
        ground: &Ground<'_>,
        world: &World,
        draw: usize,
        stance: &Stance,
        finding: &mut Finding,
    ) {
        let clamps: Vec<Hookup> = stance
            .lifting
            .iter()
            // A cut parts all conductors at once; what is read there is a matter of its dead proof.
            .filter(|end| !end.ends_with(".split"))
            .map(|end| Hookup::Amps {
                around: vec![end.clone()],
            })
            .collect();
        let amps = self
            .simulator
            .read(world, draw, &stance.setup, &stance.burden, &clamps);
        for (clamp, amps) in clamps.iter().zip(amps) {
            let (Hookup::Amps { around }, Some(amps)) = (clamp, amps) else {
                continue;
            };
            let Some(end) = around.first() else { continue };
            if amps.abs() > ground.numbers.lift_amps {
                let touch = Touch {
                    volts: 0.0,
                    amps: amps.abs(),
                };
                finding
                    .lifting
                    .push(raised(&[end.clone(), String::new()], touch, world, false));
            }
        }
    }

    /// The worst wanted reading over its limit once isolated.
    fn not_dead(
        &mut self,
        world: &World,
        key: &str,
        stance: &Stance,
        wants: &[Want],
    ) -> Option<Raised> {
        if let Some(known) = self
            .book
            .dead
            .get(key)
            .and_then(|by_world| by_world.get(&world.id))
        {
            return known.clone();
        }
        let mut worst: Option<Raised> = None;
        let hookups: Vec<Hookup> = wants
            .iter()
            .map(|w| Hookup::Volts {
                between: w.between.clone(),
                meter: None,
            })
            .collect();
        for draw in 0..world.draws {
            let volts = self
                .simulator
                .read(world, draw, &stance.setup, &[], &hookups);
            for (want, volts) in wants.iter().zip(volts) {
                let volts = volts.unwrap_or(0.0).abs();
                if volts > want.limit_volts {
                    let touch = Touch { volts, amps: 0.0 };
                    keep_worst(
                        &mut worst,
                        Some(raised(&want.between, touch, world, false)),
                        world.p,
                    );
                }
            }
        }
        self.book
            .dead
            .entry(key.to_owned())
            .or_default()
            .insert(world.id.clone(), worst.clone());
        worst
    }
}

/// The least open volts at which a body of 500 Ω, less than any table's, passes the limit of current.
fn floor(ground: &Ground<'_>) -> f64 {
    (ground.numbers.body_amps * 500.0).min(ground.numbers.touch_volts)
}

fn raised(between: &[String; 2], touch: Touch, world: &World, local: bool) -> Raised {
    Raised {
        between: between.clone(),
        volts: touch.volts,
        amps: touch.amps,
        says: world.says.clone(),
        p: world.p,
        local,
    }
}

fn over(ground: &Ground<'_>, touch: Touch) -> bool {
    touch.volts > ground.numbers.touch_volts || touch.amps > ground.numbers.body_amps
}

/// Whether a touch passes a limit that it did not pass as found.
fn raises(ground: &Ground<'_>, was: Touch, is: Touch) -> bool {
    let numbers = ground.numbers;
    (is.volts > numbers.touch_volts && was.volts <= numbers.touch_volts)
        || (is.amps > numbers.body_amps && was.amps <= numbers.body_amps)
}

/// Keeps the worse: what cannot be kept off before what can, then the higher volts, then amperes.
fn keep_worst(slot: &mut Option<Raised>, next: Option<Raised>, p: f64) {
    let Some(mut next) = next else { return };
    next.p = p;
    let rank = |r: &Raised| (u8::from(!r.local), r.volts, r.amps);
    if slot
        .as_ref()
        .is_none_or(|known| rank(known).partial_cmp(&rank(&next)) == Some(std::cmp::Ordering::Less))
    {
        *slot = Some(next);
    }
}

impl Raised {
    /// `up to 157 V on the copper water pipe (taps) if the supply neutral is open`.
    pub fn text(&self, ground: &Ground<'_>) -> String {
        let [a, b] = &self.between;
        let place = terminal_name(ground.site, a);
        if b.is_empty() {
            return format!(
                "up to {} in {a} before it is lifted if {}",
                amps_text(self.amps),
                self.says
            );
        }
        let against = if b == "soil" {
            String::new()
        } else {
            format!(" against {}", terminal_name(ground.site, b))
        };
        let body = if self.amps > 0.0 {
            format!(" ({} through a person)", amps_text(self.amps))
        } else {
            String::new()
        };
        format!(
            "up to {:.0} V on {place}{against}{body} if {}",
            self.volts, self.says
        )
    }
}

fn amps_text(amps: f64) -> String {
    if amps < 1.0 {
        format!("{:.0} mA", amps * 1000.0)
    } else {
        format!("{amps:.1} A")
    }
}
