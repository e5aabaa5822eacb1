//! A hidden installation: values drawn apart from the engine's, a fault drawn in, instruments that err.

use std::sync::Arc;

use super::command::{Detail, Symptom, When};
use crate::belief::cloud::{BY_CHANCE, aim, shown};
use crate::belief::sight::spread;
use crate::belief::{Model, World};
use crate::checks::{Check, sign_at};
use crate::faults::{Hypothesis, NOTHING_WRONG};
use crate::knowledge::{ErrorRow, Hookup, Setup, Sign};
use crate::network::params::at_normal;
use crate::network::{Outcome, QuickSolver, Values};
use crate::numeric::rng::Stream;
use crate::quantity::{Unit, Word, format};
use crate::site::places;

/// A world that only instruments can see.
#[derive(Debug)]
pub struct Hidden {
    model: Arc<Model>,
    world: World,
    sound: World,
    theta: Vec<f64>,
    stream: Stream,
    /// What is wrong; `None`: nothing.
    pub truth: Option<Hypothesis>,
    /// The values of its unknowns.
    pub values: Vec<f64>,
    /// Repaired: from now on the circuit is sound.
    pub mended: bool,
}

impl Hidden {
    /// Draws loads, earths and the fault's values.
    pub fn draw(model: Arc<Model>, truth: Option<Hypothesis>, seed: u64) -> Option<Self> {
        let mut stream = Stream::new(seed, "hidden", 0);
        let sound = World::sound(&model);
        let mut world = match &truth {
            Some(h) => World::new(&model, &h.faults).ok()?,
            None => sound.clone(),
        };
        let theta = model
            .network
            .params
            .specs
            .iter()
            .map(|s| at_normal(&s.prior, stream.normal()))
            .collect();
        let z: Vec<f64> = world.unknowns.iter().map(|_| stream.normal()).collect();
        let values = world.values(&z);
        world.set(&z);
        Some(Self {
            model,
            world,
            sound,
            theta,
            stream,
            truth,
            values,
            mended: false,
        })
    }

    /// Repair group of the truth.
    pub fn group(&self) -> &str {
        self.truth.as_ref().map_or(NOTHING_WRONG, |h| &h.group)
    }

    fn now(&self, setup: &Setup, stream: &mut Stream) -> &World {
        if self.mended || !stream.chance(self.world.shows(setup.provoke)) {
            &self.sound
        } else {
            &self.world
        }
    }

    fn outcome(&self, world: &World, setup: &Setup, hookup: &Hookup) -> Option<(Outcome, f64)> {
        let aim = aim(world, setup, hookup)?;
        let values = Values {
            theta: &self.theta,
            common: &self.model.network.common,
        };
        let seen = shown(&QuickSolver::new(&world.wiring, values), &aim);
        Some((seen.outcome, seen.enclosed))
    }

    /// What an instrument reads, as a person would write it down.
    pub fn read(&mut self, check: &Check) -> Option<String> {
        let mut stream = std::mem::replace(&mut self.stream, Stream::new(0, "", 0));
        let text = self.read_with(check, &mut stream);
        self.stream = stream;
        text
    }

    fn read_with(&self, check: &Check, stream: &mut Stream) -> Option<String> {
        if let Hookup::Seen { at, what } = &check.hookup {
            let looks = if self.mended {
                &self.sound.looks
            } else {
                &self.world.looks
            };
            let miss = looks
                .iter()
                .filter(|t| t.at == *at && t.what == *what)
                .fold(1.0 - BY_CHANCE / 3.0, |m, t| m * (1.0 - t.p));
            return Some(
                if stream.chance(1.0 - miss) {
                    "yes"
                } else {
                    "no"
                }
                .to_owned(),
            );
        }
        if !self.mended
            && let Some(t) = self
                .world
                .outcomes
                .iter()
                .find(|t| t.what == check.test && t.at == check.at)
            && stream.chance(t.p)
        {
            return Some(t.word.clone());
        }
        let (outcome, enclosed) =
            self.outcome(self.now(&check.setup, stream), &check.setup, &check.hookup)?;
        let row = self.model.knowledge.error_of(&check.hookup)?;
        Some(match outcome {
            Outcome::Word(word) => word_text(word).to_owned(),
            Outcome::Number(x) => number_text(x, enclosed, row, &check.hookup, stream),
        })
    }

    /// Volts between two terminals in a state, for a hold point's reading.
    pub fn volts(&mut self, setup: &Setup, between: &[String; 2]) -> String {
        let hookup = Hookup::Volts {
            between: between.clone(),
            meter: Some(crate::knowledge::Meter::Ohms(200e3)),
        };
        let mut stream = std::mem::replace(&mut self.stream, Stream::new(0, "", 0));
        let world = self.now(setup, &mut stream);
        let volts = match self.outcome(world, setup, &hookup) {
            Some((Outcome::Number(x), _)) => x,
            _ => 0.0,
        };
        let shown = (volts + 0.05 * stream.normal() * (1.0 + volts / 20.0)).max(0.0);
        self.stream = stream;
        format!("{shown:.1} V")
    }

    /// The complaint that the person makes: of those that the fault leads to, one whose sign shows here.
    pub fn complaint(&mut self) -> Symptom {
        let model = Arc::clone(&self.model);
        let mut stream = std::mem::replace(&mut self.stream, Stream::new(0, "", 0));
        let made = self.complain(&model, &mut stream);
        self.stream = stream;
        made
    }

    fn complain(&self, model: &Model, stream: &mut Stream) -> Symptom {
        let mut weights: Vec<(String, f64)> = match &self.truth {
            Some(h) => h
                .kinds
                .iter()
                .filter_map(|&k| model.knowledge.faults.get(k))
                .flat_map(|k| k.complaints.iter().map(|(c, p)| (c.clone(), *p)))
                .collect(),
            None => model
                .knowledge
                .symptoms
                .iter()
                .map(|s| (s.kind.clone(), s.nothing_wrong))
                .collect(),
        };
        while !weights.is_empty() {
            let w: Vec<f64> = weights.iter().map(|x| x.1).collect();
            let Some(pick) = stream.categorical(&w) else {
                break;
            };
            let (kind, _) = weights.remove(pick);
            let Some(row) = model.knowledge.symptom(&kind) else {
                continue;
            };
            let wet = self.world.shows(Some(crate::knowledge::Provoke::Wet))
                > 2.0 * self.world.shows(None);
            let when = wet.then_some(When::Rain);
            let detail = when.map(|when| Detail {
                when: Some(when),
                with: None,
                text: None,
            });
            if row.signs.is_empty() {
                return Symptom {
                    at: self.own_place(model, &row.at),
                    kind,
                    detail,
                };
            }
            let mut fitting: Vec<String> = Vec::new();
            for class in &row.at {
                for place in places(&model.site, class) {
                    if row
                        .signs
                        .iter()
                        .any(|s| self.sign_shows(model, s, &place.id, when))
                    {
                        fitting.push(place.id.clone());
                    }
                }
            }
            if let Some(at) = self.nearest_own(fitting) {
                return Symptom {
                    kind,
                    at: Some(at),
                    detail,
                };
            }
        }
        let classes = model
            .knowledge
            .symptom("inspection-remark")
            .map(|r| r.at.clone())
            .unwrap_or_default();
        Symptom {
            kind: "inspection-remark".to_owned(),
            at: self.own_place(model, &classes),
            detail: None,
        }
    }

    fn sign_shows(&self, model: &Model, sign: &Sign, at: &str, when: Option<When>) -> bool {
        if !sign.when.is_empty() && !when.is_some_and(|w| sign.when.iter().any(|x| x == w.as_str()))
        {
            return false;
        }
        let Some((setup, hookup)) = sign_at(&model.site, &sign.at, at, &sign.setup, &sign.hookup)
        else {
            return false;
        };
        let reads = |world: &World| match self.outcome(world, &setup, &hookup) {
            Some((Outcome::Number(x), _)) => {
                sign.above.is_some_and(|a| x > a) || sign.below.is_some_and(|b| x < b)
            }
            Some((Outcome::Word(w), _)) => sign.word.as_deref() == Some(word_text(w)),
            None => false,
        };
        reads(&self.world)
    }

    /// Of several places, one on the fault's own circuit, else the first.
    fn nearest_own(&self, places: Vec<String>) -> Option<String> {
        let own: Vec<&str> = self
            .truth
            .iter()
            .flat_map(|h| &h.places)
            .filter_map(|p| p.split('.').next())
            .collect();
        let near = places
            .iter()
            .find(|p| own.contains(&p.split('.').next().unwrap_or_default()))
            .cloned();
        near.or_else(|| places.into_iter().next())
    }

    fn own_place(&self, model: &Model, classes: &[String]) -> Option<String> {
        let h = self.truth.as_ref()?;
        let all: Vec<String> = classes
            .iter()
            .flat_map(|c| places(&model.site, c))
            .map(|p| p.id)
            .collect();
        h.places
            .iter()
            .find(|p| all.contains(p))
            .cloned()
            .or_else(|| {
                let circuits: Vec<String> = h
                    .places
                    .iter()
                    .filter_map(|p| p.split('.').next())
                    .map(str::to_owned)
                    .collect();
                circuits.into_iter().find(|c| all.contains(c))
            })
    }
}

/// A word as readings write it.
pub fn word_text(word: Word) -> &'static str {
    match word {
        Word::Holds => "holds",
        Word::Trips => "trips",
        Word::NoTrip => "no trip",
        Word::Yes => "yes",
        Word::No => "no",
        Word::Dims => "dims",
        Word::Brightens => "brightens",
        Word::None => "none",
        Word::Open => "OL",
        Word::Unknown => "unknown",
    }
}

fn number_text(
    x: f64,
    enclosed: f64,
    row: &ErrorRow,
    hookup: &Hookup,
    stream: &mut Stream,
) -> String {
    if x >= row.over {
        return "OL".to_owned();
    }
    let read = (x + spread(row, x, enclosed) * stream.normal()).max(0.0);
    if read >= row.over {
        return "OL".to_owned();
    }
    let step = row.resolution.max(1e-9);
    let read = (read / step).round() * step;
    let unit = match hookup {
        Hookup::Volts { .. } => Unit::Volt,
        Hookup::Amps { .. } | Hookup::Ramp { .. } => Unit::Ampere,
        Hookup::TripTime { .. } => Unit::Second,
        _ => Unit::Ohm,
    };
    format(read, unit)
}
