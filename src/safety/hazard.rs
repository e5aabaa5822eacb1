//! The test itself, simulated under every hypothesis still credible (design §6).
//!
//! Method: a profile of each hypothesis gives the touch volts as found, what flows into the ends with the
//! mains open, and the volts that one ampere of added current puts on metal that many may touch. Where
//! added current times that, over what is there as found, stays within the limits, the test is passed;
//! else its states are solved with its loads and its instrument's burden in place. Touch volts are solved
//! open, then across 1 kΩ; from the two a source resistance follows, and with it what a body takes
//! (IEC 60479-1). A step is at risk where it raises a touch above the limits that it does not pass as
//! found, where a conductor to be lifted carries current, or where a part called dead is not.

use std::collections::BTreeMap;

use super::Ground;
use super::body::{Body, Touch};
use super::exposure::{Stance, common_pairs, frame_pairs, stances};
use super::hold::isolates;
use super::profile::Profile;
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
    /// What each hookup shows in `setup` under a hypothesis' draw, for each set of edits that a test adds;
    /// nothing where it shows no number. Nothing trips.
    fn read_each(
        &mut self,
        world: &World,
        draw: usize,
        setup: &Setup,
        tests: &[Vec<Edit>],
        hookups: &[Hookup],
    ) -> Vec<Vec<Option<f64>>>;

    /// The same with one set of edits.
    fn read(
        &mut self,
        world: &World,
        draw: usize,
        setup: &Setup,
        test: &[Edit],
        hookups: &[Hookup],
    ) -> Vec<Option<f64>> {
        self.read_each(world, draw, setup, &[test.to_vec()], hookups)
            .into_iter()
            .next()
            .unwrap_or_default()
    }
}

impl<F> Simulator for F
where
    F: FnMut(&World, usize, &Setup, &[Edit], &[Hookup]) -> Vec<Option<f64>>,
{
    fn read_each(
        &mut self,
        world: &World,
        draw: usize,
        setup: &Setup,
        tests: &[Vec<Edit>],
        hookups: &[Hookup],
    ) -> Vec<Vec<Option<f64>>> {
        tests
            .iter()
            .map(|test| self(world, draw, setup, test, hookups))
            .collect()
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
}

/// What simulating a check has shown.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Assessment {
    /// Worst touch of metal that many may touch, caused by the test itself.
    pub touch: Option<Raised>,
    /// Probability of all hypotheses under which there is such a touch.
    pub touch_p: f64,
    /// Worst current in a conductor to be lifted, over its limit.
    pub lifting: Option<Raised>,
    /// Worst touch of one frame.
    pub frame: Option<Raised>,
    /// Worst part called dead that is not; the prove-dead point finds it.
    pub not_dead: Option<Raised>,
}

/// Findings kept between questions: they depend on stance and hypothesis, not on the odds.
#[derive(Clone, Debug, Default)]
pub struct HazardBook {
    touch: BTreeMap<String, BTreeMap<String, Option<Raised>>>,
    lifting: BTreeMap<String, BTreeMap<String, BTreeMap<String, f64>>>,
    profiles: BTreeMap<String, Vec<Profile>>,
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
        self.touch
            .values_mut()
            .for_each(|by_world| drop(by_world.remove(world)));
        self.lifting
            .values_mut()
            .for_each(|by_world| drop(by_world.remove(world)));
        self.profiles.remove(world);
    }
}

/// Everything the gate needs to simulate a check.
pub struct Hazards<'a> {
    pub(super) book: &'a mut HazardBook,
    pub(super) worlds: &'a [World],
    pub(super) body: &'a Body,
    pub(super) simulator: &'a mut dyn Simulator,
    ends: Option<Vec<String>>,
    standing: Option<f64>,
}

/// Ohms across which a source is loaded to find what lies behind it.
const PROBE_OHMS: f64 = 1000.0;

/// Hypotheses that a described hazard looks into, the most probable ones.
const DESCRIBED: usize = 12;

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
            ends: None,
            standing: None,
        }
    }

    /// Simulates a check under every credible hypothesis, as far as clearing it asks: metal that many may
    /// touch, and currents in ends to be lifted.
    pub fn assess(&mut self, ground: &Ground<'_>, check: &Check) -> Assessment {
        let mut result = Assessment::default();
        let all: Vec<(String, Stance)> = stances(ground, check)
            .into_iter()
            .map(|s| (s.key(), s))
            .collect();
        let worlds = self.worlds;
        for world in worlds
            .iter()
            .filter(|w| !all.is_empty() && w.p >= ground.numbers.credible)
        {
            let mut touched = None;
            for (key, stance) in &all {
                keep_worst(&mut touched, self.touch(ground, world, key, stance));
                for end in stance.lifting.iter().filter(|end| !end.ends_with(".split")) {
                    let amps = self.end_amps(ground, world, key, stance, end);
                    if amps > ground.numbers.lift_amps {
                        let flow = Touch { volts: 0.0, amps };
                        keep_worst(
                            &mut result.lifting,
                            Some(raised(&[end.clone(), String::new()], flow, world)),
                        );
                    }
                }
            }
            if let Some(mut touched) = touched {
                touched.p = world.p;
                result.touch_p += world.p;
                keep_worst(&mut result.touch, Some(touched));
            }
        }
        result
    }

    /// Everything that may be dangerous about a check under the most probable hypotheses, frames and parts
    /// called dead included: for a text, beside [`Hazards::assess`].
    pub fn describe(&mut self, ground: &Ground<'_>, check: &Check) -> Assessment {
        let mut result = self.assess(ground, check);
        let all = stances(ground, check);
        let wants = if isolates(check) {
            before_lift(ground, check)
        } else {
            Vec::new()
        };
        let mut worlds: Vec<&World> = self
            .worlds
            .iter()
            .filter(|w| w.p >= ground.numbers.credible)
            .collect();
        worlds.sort_by(|a, b| b.p.total_cmp(&a.p));
        let frames = frame_pairs(ground);
        for world in worlds.into_iter().take(DESCRIBED) {
            for draw in 0..world.draws {
                let was = self.touches(world, draw, &Setup::default(), &[], &frames, floor(ground));
                for stance in all.iter().filter(|s| !s.dead) {
                    let is = self.touches(
                        world,
                        draw,
                        &stance.setup,
                        &stance.burden,
                        &frames,
                        floor(ground),
                    );
                    for ((pair, was), is) in frames.iter().zip(&was).zip(is) {
                        if raises(ground, stance.brief, *was, is) {
                            keep_worst(&mut result.frame, Some(raised(pair, is, world)));
                        }
                    }
                }
                let Some(first) = all.first().filter(|_| !wants.is_empty()) else {
                    continue;
                };
                let hookups: Vec<Hookup> = wants
                    .iter()
                    .map(|w| Hookup::Volts {
                        between: w.between.clone(),
                        meter: None,
                    })
                    .collect();
                let volts = self
                    .simulator
                    .read(world, draw, &first.setup, &[], &hookups);
                for (want, volts) in wants.iter().zip(volts) {
                    let volts = volts.unwrap_or(0.0).abs();
                    if volts > want.limit_volts {
                        let touch = Touch { volts, amps: 0.0 };
                        keep_worst(
                            &mut result.not_dead,
                            Some(raised(&want.between, touch, world)),
                        );
                    }
                }
            }
        }
        result
    }

    /// The worst touch as found, over the limits, under any credible hypothesis.
    pub fn standing(&mut self, ground: &Ground<'_>) -> Option<Raised> {
        let mut worst = None;
        let pairs = common_pairs(ground);
        let worlds = self.worlds;
        for world in worlds.iter().filter(|w| w.p >= ground.numbers.credible) {
            for profile in self.profiles(ground, world) {
                for (pair, touch) in pairs.iter().zip(profile.touches) {
                    if over(ground, false, touch) {
                        keep_worst(&mut worst, Some(raised(pair, touch, world)));
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
        let worlds = self.worlds;
        let mut sum = 0.0;
        for world in worlds.iter().filter(|w| w.p >= ground.numbers.credible) {
            let profiles = self.profiles(ground, world);
            let live = profiles
                .iter()
                .filter(|p| p.touches.iter().any(|t| over(ground, false, *t)))
                .count();
            sum += world.p * live as f64 / profiles.len().max(1) as f64;
        }
        self.standing = Some(sum);
        sum
    }

    fn profiles(&mut self, ground: &Ground<'_>, world: &World) -> Vec<Profile> {
        if let Some(known) = self.book.profiles.get(&world.id) {
            return known.clone();
        }
        let ends = self.ends(ground);
        let all: Vec<Profile> = (0..world.draws)
            .map(|draw| self.profile(ground, world, draw, &ends))
            .collect();
        self.book.profiles.insert(world.id.clone(), all.clone());
        all
    }

    /// Ends that any check at hand lifts.
    fn ends(&mut self, ground: &Ground<'_>) -> Vec<String> {
        let of = || {
            let mut all: Vec<String> = ground
                .catalogue
                .iter()
                .flat_map(|c| c.setup.lift.iter().cloned())
                .collect();
            all.sort();
            all.dedup();
            all.retain(|end| !end.ends_with(".split"));
            all
        };
        self.ends.get_or_insert_with(of).clone()
    }

    /// Touch across each pair; those under `floor` volts open are not looked into.
    pub(super) fn touches(
        &mut self,
        world: &World,
        draw: usize,
        setup: &Setup,
        test: &[Edit],
        pairs: &[[String; 2]],
        floor: f64,
    ) -> Vec<Touch> {
        let volts = |between: &[String; 2], meter: Option<Meter>| Hookup::Volts {
            between: between.clone(),
            meter,
        };
        let open: Vec<Hookup> = pairs.iter().map(|pair| volts(pair, None)).collect();
        let open = self.simulator.read(world, draw, setup, test, &open);
        let mut touches: Vec<Touch> = open
            .iter()
            .map(|v| Touch {
                volts: v.unwrap_or(0.0).abs(),
                amps: 0.0,
            })
            .collect();
        touches.resize(pairs.len(), Touch::default());
        let higher: Vec<usize> = (0..pairs.len())
            .filter(|i| touches.get(*i).is_some_and(|t| t.volts > floor))
            .collect();
        if higher.is_empty() {
            return touches;
        }
        let loaded: Vec<Hookup> = higher
            .iter()
            .filter_map(|i| pairs.get(*i))
            .map(|pair| volts(pair, Some(Meter::Ohms(PROBE_OHMS))))
            .collect();
        let loaded = self.simulator.read(world, draw, setup, test, &loaded);
        for (order, index) in higher.iter().enumerate() {
            let Some(slot) = touches.get_mut(*index) else {
                continue;
            };
            let across = loaded
                .get(order)
                .copied()
                .flatten()
                .unwrap_or(slot.volts)
                .abs();
            let behind = if across > 0.0 {
                PROBE_OHMS * (slot.volts / across - 1.0)
            } else {
                f64::INFINITY
            };
            *slot = if behind.is_finite() {
                self.body.touch(slot.volts, behind)
            } else {
                Touch::default()
            };
        }
        touches
    }

    /// The worst touch that a stance causes on metal that many may touch.
    fn touch(
        &mut self,
        ground: &Ground<'_>,
        world: &World,
        key: &str,
        stance: &Stance,
    ) -> Option<Raised> {
        if stance.dead {
            return None;
        }
        if let Some(known) = self
            .book
            .touch
            .get(key)
            .and_then(|by_world| by_world.get(&world.id))
        {
            return known.clone();
        }
        let pairs = common_pairs(ground);
        let profiles = self.profiles(ground, world);
        let mut worst = None;
        for (draw, profile) in profiles.iter().enumerate() {
            let passes = stance.setup.lift.is_empty()
                && profile.within(
                    ground,
                    self.body,
                    stance.brief,
                    stance.added_amps(ground, profile.line_amps),
                );
            if passes {
                continue;
            }
            let is = self.touches(
                world,
                draw,
                &stance.setup,
                &stance.burden,
                &pairs,
                floor(ground),
            );
            for ((pair, was), is) in pairs.iter().zip(&profile.touches).zip(is) {
                if raises(ground, stance.brief, *was, is) {
                    keep_worst(&mut worst, Some(raised(pair, is, world)));
                }
            }
        }
        self.book
            .touch
            .entry(key.to_owned())
            .or_default()
            .insert(world.id.clone(), worst.clone());
        worst
    }

    /// The largest current in an end before it is lifted, A.
    fn end_amps(
        &mut self,
        ground: &Ground<'_>,
        world: &World,
        key: &str,
        stance: &Stance,
        end: &str,
    ) -> f64 {
        if stance.dead {
            let profiles = self.profiles(ground, world);
            let known: Vec<f64> = profiles
                .iter()
                .filter_map(|p| p.ends.get(end).copied())
                .collect();
            if known.len() == profiles.len() {
                return known.into_iter().fold(0.0, f64::max);
            }
        }
        let by_world = self
            .book
            .lifting
            .entry(key.to_owned())
            .or_default()
            .entry(world.id.clone())
            .or_default();
        if let Some(known) = by_world.get(end) {
            return *known;
        }
        let clamp = [Hookup::Amps {
            around: vec![end.to_owned()],
        }];
        let read = |draw| {
            self.simulator
                .read(world, draw, &stance.setup, &stance.burden, &clamp)
                .first()
                .copied()
                .flatten()
        };
        let amps = (0..world.draws)
            .filter_map(read)
            .map(f64::abs)
            .fold(0.0, f64::max);
        by_world.insert(end.to_owned(), amps);
        amps
    }
}

/// The least open volts at which a body of 500 Ω, less than any table's, passes the limit of current.
pub(super) fn floor(ground: &Ground<'_>) -> f64 {
    (ground.numbers.body_amps * 500.0).min(ground.numbers.touch_volts)
}

fn raised(between: &[String; 2], touch: Touch, world: &World) -> Raised {
    Raised {
        between: between.clone(),
        volts: touch.volts,
        amps: touch.amps,
        says: world.says.clone(),
        p: world.p,
    }
}

/// Over the limits; a brief current is judged by its volts alone (trade.md A45: far more than the let-go
/// current is borne for less than a heartbeat).
pub(super) fn over(ground: &Ground<'_>, brief: bool, touch: Touch) -> bool {
    touch.volts > ground.numbers.touch_volts || (!brief && touch.amps > ground.numbers.body_amps)
}

/// Whether a touch passes a limit that it did not pass as found.
fn raises(ground: &Ground<'_>, brief: bool, was: Touch, is: Touch) -> bool {
    let numbers = ground.numbers;
    (is.volts > numbers.touch_volts && was.volts <= numbers.touch_volts)
        || (!brief && is.amps > numbers.body_amps && was.amps <= numbers.body_amps)
}

/// Keeps the worse: the higher volts, then amperes.
fn keep_worst(slot: &mut Option<Raised>, next: Option<Raised>) {
    let Some(next) = next else { return };
    let rank = |r: &Raised| (r.volts, r.amps);
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
