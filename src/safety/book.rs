//! Findings kept between questions: they depend on stance and hypothesis, not on the odds.

use std::collections::BTreeMap;
use std::sync::Arc;

use super::profile::Profile;
use super::world::Raised;

/// What is known of one stance, by the hypothesis' number.
#[derive(Clone, Debug, Default)]
pub(super) struct Known {
    /// Worst touch; the outer option: looked into.
    touch: Vec<Option<Option<Raised>>>,
    /// Current in ends to be lifted, A.
    ends: BTreeMap<String, Vec<Option<f64>>>,
}

/// The book of findings of a visit.
#[derive(Clone, Debug, Default)]
pub struct HazardBook {
    numbers: BTreeMap<String, usize>,
    profiles: Vec<Option<Arc<Vec<Profile>>>>,
    stances: BTreeMap<String, Known>,
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
        let Some(number) = self.numbers.get(world).copied() else {
            return;
        };
        if let Some(slot) = self.profiles.get_mut(number) {
            *slot = None;
        }
        for known in self.stances.values_mut() {
            if let Some(slot) = known.touch.get_mut(number) {
                *slot = None;
            }
            for amps in known.ends.values_mut() {
                if let Some(slot) = amps.get_mut(number) {
                    *slot = None;
                }
            }
        }
    }

    /// The number of a hypothesis.
    pub(super) fn number(&mut self, world: &str) -> usize {
        if let Some(known) = self.numbers.get(world) {
            return *known;
        }
        let next = self.numbers.len();
        self.numbers.insert(world.to_owned(), next);
        next
    }

    /// The profile of a hypothesis.
    pub(super) fn profiles(&self, number: usize) -> Option<Arc<Vec<Profile>>> {
        self.profiles.get(number).cloned().flatten()
    }

    /// Keeps the profile of a hypothesis.
    pub(super) fn keep_profiles(&mut self, number: usize, profiles: Arc<Vec<Profile>>) {
        put(&mut self.profiles, number, profiles);
    }

    /// The worst touch of a stance under a hypothesis, if looked into.
    pub(super) fn touch(&self, key: &str, number: usize) -> Option<Option<Raised>> {
        self.stances.get(key)?.touch.get(number).cloned().flatten()
    }

    /// Keeps it.
    pub(super) fn keep_touch(&mut self, key: &str, number: usize, touch: Option<Raised>) {
        put(
            &mut self.stances.entry(key.to_owned()).or_default().touch,
            number,
            touch,
        );
    }

    /// The current in an end under a hypothesis, if looked into.
    pub(super) fn end(&self, key: &str, number: usize, end: &str) -> Option<f64> {
        self.stances
            .get(key)?
            .ends
            .get(end)?
            .get(number)
            .copied()
            .flatten()
    }

    /// Keeps it.
    pub(super) fn keep_end(&mut self, key: &str, number: usize, end: &str, amps: f64) {
        let known = self.stances.entry(key.to_owned()).or_default();
        put(known.ends.entry(end.to_owned()).or_default(), number, amps);
    }
}

/// Puts a value at a place of a list that grows.
fn put<T: Clone>(list: &mut Vec<Option<T>>, at: usize, value: T) {
    if list.len() <= at {
        list.resize(at + 1, None);
    }
    if let Some(slot) = list.get_mut(at) {
        *slot = Some(value);
    }
}
