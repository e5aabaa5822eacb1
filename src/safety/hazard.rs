//! The test itself, simulated under every hypothesis still credible (design §6).
//!
//! Method: a profile of each hypothesis gives the touch volts as found, what flows into the ends with the
//! mains open, and the volts that one ampere of added current puts on metal that many may touch. Where
//! added current times that, over what is there as found, stays within the limits, the test is passed;
//! else its states are solved with its loads and its instrument's burden in place. Touch volts are solved
//! open, then across 1 kΩ; from the two a source resistance follows, and with it what a body takes
//! (IEC 60479-1). A step is at risk where it raises a touch above the limits that it does not pass as
//! found, where a conductor to be lifted carries current, or where a part called dead is not.
//!
//! Long because one simulation of a test is read from its first state to its last.

use std::sync::Arc;

use super::Ground;
use super::body::{Body, Touch};
use super::book::HazardBook;
use super::exposure::{Stance, common_pairs, frame_pairs, stances};
use super::isolate::isolates;
use super::profile::Profile;
use super::wants::before_lift;
use super::world::{Assessment, Raised, Simulator, World};
use crate::checks::Check;
use crate::knowledge::{Hookup, Meter, Setup};
use crate::network::Edit;

/// Everything the gate needs to simulate a check.
pub struct Hazards<'a> {
    pub(super) book: &'a mut HazardBook,
    pub(super) worlds: &'a [World],
    pub(super) body: &'a Body,
    pub(super) simulator: &'a mut dyn Simulator,
    ends: Option<Vec<String>>,
    credible: Option<Vec<(usize, usize)>>,
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
            credible: None,
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
        if all.is_empty() {
            return result;
        }
        for (world, number) in self.credible(ground) {
            let mut touched = None;
            for (key, stance) in &all {
                keep_worst(&mut touched, self.touch(ground, world, number, key, stance));
                for end in stance.lifting.iter().filter(|end| !end.ends_with(".split")) {
                    let amps = self.end_amps(ground, (world, number), key, stance, end);
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
        let mut worlds: Vec<&World> = self.credible(ground).into_iter().map(|(w, _)| w).collect();
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
        for (world, number) in self.credible(ground) {
            for profile in self.profiles(ground, world, number).iter() {
                for (pair, touch) in pairs.iter().zip(&profile.touches) {
                    if over(ground, false, *touch) {
                        keep_worst(&mut worst, Some(raised(pair, *touch, world)));
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
        let mut sum = 0.0;
        for (world, number) in self.credible(ground) {
            let profiles = self.profiles(ground, world, number);
            let live = profiles
                .iter()
                .filter(|p| p.touches.iter().any(|t| over(ground, false, *t)))
                .count();
            sum += world.p * live as f64 / profiles.len().max(1) as f64;
        }
        self.standing = Some(sum);
        sum
    }

    /// The credible hypotheses, each with its number in the book.
    fn credible(&mut self, ground: &Ground<'_>) -> Vec<(&'a World, usize)> {
        let worlds = self.worlds;
        let book = &mut *self.book;
        let number = || {
            let credible = worlds
                .iter()
                .enumerate()
                .filter(|(_, w)| w.p >= ground.numbers.credible);
            credible.map(|(at, w)| (at, book.number(&w.id))).collect()
        };
        let known = self.credible.get_or_insert_with(number);
        known
            .iter()
            .filter_map(|(at, number)| Some((worlds.get(*at)?, *number)))
            .collect()
    }

    fn profiles(&mut self, ground: &Ground<'_>, world: &World, number: usize) -> Arc<Vec<Profile>> {
        if let Some(known) = self.book.profiles(number) {
            return known;
        }
        let ends = self.ends(ground);
        let all: Vec<Profile> = (0..world.draws)
            .map(|draw| self.profile(ground, world, draw, &ends))
            .collect();
        let all = Arc::new(all);
        self.book.keep_profiles(number, all.clone());
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
        number: usize,
        key: &str,
        stance: &Stance,
    ) -> Option<Raised> {
        if stance.dead {
            return None;
        }
        if let Some(known) = self.book.touch(key, number) {
            return known;
        }
        let mut worst = None;
        let profiles = self.profiles(ground, world, number);
        for (draw, profile) in profiles.iter().enumerate() {
            let amps = stance.added_amps + profile.taken_away(stance);
            if !stance.parts_earthing && profile.within(ground, self.body, stance.brief, amps) {
                continue;
            }
            let (setup, burden) = (&stance.setup, &stance.burden);
            let pairs = common_pairs(ground);
            let is = self.touches(world, draw, setup, burden, &pairs, floor(ground));
            for ((pair, was), is) in pairs.iter().zip(&profile.touches).zip(is) {
                if raises(ground, stance.brief, *was, is) {
                    keep_worst(&mut worst, Some(raised(pair, is, world)));
                }
            }
        }
        self.book.keep_touch(key, number, worst.clone());
        worst
    }

    /// The largest current in an end before it is lifted, A.
    fn end_amps(
        &mut self,
        ground: &Ground<'_>,
        (world, number): (&World, usize),
        key: &str,
        stance: &Stance,
        end: &str,
    ) -> f64 {
        if stance.dead {
            let profiles = self.profiles(ground, world, number);
            if profiles.iter().all(|p| p.ends.contains_key(end)) {
                let known = profiles.iter().filter_map(|p| p.ends.get(end).copied());
                return known.fold(0.0, f64::max);
            }
        }
        if let Some(known) = self.book.end(key, number, end) {
            return known;
        }
        let clamp = [Hookup::Amps {
            around: vec![end.to_owned()],
        }];
        let read = |draw| {
            let shown = self
                .simulator
                .read(world, draw, &stance.setup, &stance.burden, &clamp);
            shown.first().copied().flatten()
        };
        let amps = (0..world.draws)
            .filter_map(read)
            .map(f64::abs)
            .fold(0.0, f64::max);
        self.book.keep_end(key, number, end, amps);
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
