//! What a hypothesis' draw does to metal that many may touch: as found, per ampere of added current, with the mains open.

use std::collections::BTreeMap;

use super::Ground;
use super::body::{Body, Touch};
use super::exposure::{Stance, common_pairs, mains_off};
use super::hazard::{Hazards, floor, over};
use super::places::conductors_at;
use super::world::World;
use crate::knowledge::{Hookup, Setup};
use crate::network::Edit;

/// The profile of one draw.
#[derive(Clone, Debug, Default, PartialEq)]
pub(super) struct Profile {
    /// Touch across each common pair as found.
    pub touches: Vec<Touch>,
    /// Volts on the worst common pair per ampere added between line and neutral, or line and earth, at any board, Ω.
    pub ohms: f64,
    /// Line current of each circuit as found, the largest of its lines, A.
    pub circuits: BTreeMap<String, f64>,
    /// Current in each end with the mains open, A.
    pub ends: BTreeMap<String, f64>,
}

/// A burden so heavy that what flows as found counts little beside it, Ω.
const HEAVY_OHMS: f64 = 0.5;

impl Profile {
    /// Amperes that a stance takes off, each of which may unbalance the lines.
    pub fn taken_away(&self, stance: &Stance) -> f64 {
        stance
            .lose
            .iter()
            .filter_map(|id| self.circuits.get(id))
            .sum()
    }

    /// Whether added amperes leave every common pair within the limits. The bound adds magnitudes, so it
    /// errs to the safe side; current added at a point passes through its board.
    pub fn within(&self, ground: &Ground<'_>, body: &Body, brief: bool, amps: f64) -> bool {
        let most = self.touches.iter().map(|t| t.volts).fold(0.0, f64::max);
        let volts = most + self.ohms * amps;
        volts.is_finite() && !over(ground, brief, body.touch(volts, 0.0))
    }
}

impl Hazards<'_> {
    /// Works out the profile of a draw.
    pub(super) fn profile(
        &mut self,
        ground: &Ground<'_>,
        world: &World,
        draw: usize,
        ends: &[String],
    ) -> Profile {
        let pairs = common_pairs(ground);
        let as_found = Setup::default();
        let touches = self.touches(world, draw, &as_found, &[], &pairs, floor(ground));
        let circuits = self.circuits(ground, world, draw);
        let ohms = self.ohms(ground, world, draw, &pairs);
        let clamps: Vec<Hookup> = ends
            .iter()
            .map(|end| Hookup::Amps {
                around: vec![end.clone()],
            })
            .collect();
        let amps = self
            .simulator
            .read(world, draw, &mains_off(ground), &[], &clamps);
        let ends = ends
            .iter()
            .cloned()
            .zip(amps)
            .filter_map(|(end, amps)| Some((end, amps?.abs())))
            .collect();
        Profile {
            touches,
            ohms,
            circuits,
            ends,
        }
    }

    /// Line currents of the circuits as found.
    fn circuits(
        &mut self,
        ground: &Ground<'_>,
        world: &World,
        draw: usize,
    ) -> BTreeMap<String, f64> {
        let site = ground.site;
        let ids = site
            .boards
            .iter()
            .flat_map(|b| &b.circuits)
            .map(|c| c.id.clone());
        let lines: Vec<(String, String)> = ids
            .flat_map(|id| {
                let lines = conductors_at(site, &id)
                    .map(|c| c.lines)
                    .unwrap_or_default();
                lines.into_iter().map(move |line| (id.clone(), line))
            })
            .collect();
        let clamps: Vec<Hookup> = lines
            .iter()
            .map(|(_, line)| Hookup::Amps {
                around: vec![line.clone()],
            })
            .collect();
        let amps = self
            .simulator
            .read(world, draw, &Setup::default(), &[], &clamps);
        let mut all: BTreeMap<String, f64> = BTreeMap::new();
        for ((id, _), amps) in lines.into_iter().zip(amps) {
            let slot = all.entry(id).or_default();
            *slot = slot.max(amps.unwrap_or(0.0).abs());
        }
        all
    }

    /// Volts per ampere on the worst pair, over every board, line, and return.
    fn ohms(
        &mut self,
        ground: &Ground<'_>,
        world: &World,
        draw: usize,
        pairs: &[[String; 2]],
    ) -> f64 {
        let mut burdens: Vec<[String; 2]> = Vec::new();
        for board in &ground.site.boards {
            let Some(conductors) = conductors_at(ground.site, &board.id) else {
                continue;
            };
            for line in &conductors.lines {
                for back in conductors.neutral.iter().chain(&conductors.earth) {
                    burdens.push([line.clone(), back.clone()]);
                }
            }
        }
        let tests: Vec<Vec<Edit>> = burdens
            .iter()
            .map(|between| {
                vec![Edit::Shunt {
                    between: between.clone(),
                    ohms: HEAVY_OHMS,
                    when: None,
                }]
            })
            .collect();
        let volts = |between: &[String; 2]| Hookup::Volts {
            between: between.clone(),
            meter: None,
        };
        let hookups: Vec<Hookup> = burdens.iter().chain(pairs).map(volts).collect();
        let read = self
            .simulator
            .read_each(world, draw, &Setup::default(), &tests, &hookups);
        let mut worst = 0.0_f64;
        for (index, shown) in read.iter().enumerate() {
            let amps = shown.get(index).copied().flatten().unwrap_or(0.0).abs() / HEAVY_OHMS;
            let most = shown
                .iter()
                .skip(burdens.len())
                .flatten()
                .map(|v| v.abs())
                .fold(0.0, f64::max);
            // Next to nothing flows where a line or its return is lost: nothing can be added there either.
            if amps > 1e-3 {
                worst = worst.max(most / amps);
            }
        }
        worst
    }
}
