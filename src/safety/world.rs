//! Hypotheses as safety sees them, whoever solves the circuit under them, and what is found to be raised.

use super::Ground;
use super::words::terminal_name;
use crate::knowledge::{Hookup, Setup};
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
