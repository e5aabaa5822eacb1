//! The state of the installation as the person has made it, folded from events: setup, proofs, points done.

use std::collections::{BTreeMap, BTreeSet};

use super::Ground;
use super::event::{DeadProof, NotDead, StateEvent};
use super::needs::{QUIET, proves_quiet};
use super::places::{parts_neutral, place_of_end};
use super::point::{HoldPoint, Stage, state_key};
use super::proof::{Gained, gives, stake_reading};
use crate::checks::Check;
use crate::knowledge::{Hookup, Proof, Setup, SourceMode};
use crate::quantity::{ParsedValue, Word};
use crate::site::Site;

/// A hold point that was done.
#[derive(Clone, Debug, PartialEq)]
struct Done {
    entry: u64,
    order: u64,
    stage: Stage,
    key: String,
}

/// Volts from the earth bar to an independent stake, as found.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct StakeVolts {
    /// Largest reading, V.
    pub volts: f64,
    /// Log entry.
    pub entry: u64,
}

/// How far the tester's two proofs enclose the proof of dead.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
enum Tester {
    /// Not proved in this state.
    #[default]
    Unproved,
    /// Proved before.
    Before,
    /// Proved before, and dead proved since.
    Used,
    /// Proved before and after.
    Bracketed,
}

/// The state of the visit, as far as safety goes.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct State {
    /// The setup in which the installation is now.
    setup: Setup,
    tripped: BTreeMap<String, u64>,
    dead: Vec<DeadProof>,
    done: BTreeMap<String, Done>,
    cannot: BTreeMap<String, (String, u64)>,
    proofs: BTreeMap<String, Gained>,
    standing: bool,
    network_attended: bool,
    stake: Option<StakeVolts>,
    tester: Tester,
    order: u64,
}

impl State {
    /// Everything in service, nothing proved.
    pub fn new() -> Self {
        Self::default()
    }

    /// The setup in which the installation is now.
    pub fn setup(&self) -> &Setup {
        &self.setup
    }

    /// Devices open, those found tripped included.
    pub fn open(&self) -> Vec<String> {
        let all: BTreeSet<&String> = self.setup.open.iter().chain(self.tripped.keys()).collect();
        all.into_iter().cloned().collect()
    }

    /// Ends lifted.
    pub fn lifted(&self) -> &[String] {
        &self.setup.lift
    }

    /// Devices found tripped and not reset since.
    pub fn tripped(&self) -> impl Iterator<Item = &String> {
        self.tripped.keys()
    }

    /// What is proved dead in the present state.
    pub fn proved_dead(&self) -> &[DeadProof] {
        &self.dead
    }

    /// Conditions proved, with their log entries.
    pub fn proofs(&self) -> impl Iterator<Item = (&String, u64)> {
        self.proofs
            .iter()
            .map(|(what, gained)| (what, gained.entry))
    }

    /// Whether a condition is proved now.
    pub fn has(&self, proof: &str) -> bool {
        self.proofs.contains_key(proof)
    }

    /// Whether the complaint makes every metal part live until shown otherwise.
    pub fn is_standing(&self) -> bool {
        self.standing
    }

    /// Whether the network operator has attended since the complaint.
    pub fn network_attended(&self) -> bool {
        self.network_attended
    }

    /// The last reading from the earth bar to a stake as found.
    pub fn stake(&self) -> Option<StakeVolts> {
        self.stake
    }

    /// Why a hold point was said to be impossible.
    pub fn cannot(&self, point: &str) -> Option<&str> {
        self.cannot.get(point).map(|(why, _)| why.as_str())
    }

    /// Log entry of a point done, if its state is still the one it was done in.
    pub fn done(&self, point: &HoldPoint) -> Option<u64> {
        self.done
            .get(&point.point)
            .filter(|d| d.key == point.key)
            .map(|d| d.entry)
    }

    /// Order in which a point was done, later ones higher.
    pub(super) fn order_of(&self, id: &str, key: &str) -> Option<u64> {
        self.done.get(id).filter(|d| d.key == key).map(|d| d.order)
    }

    /// Whether two terminals are proved dead against each other now.
    pub(super) fn is_dead(&self, between: &[String; 2]) -> bool {
        self.dead.iter().any(|p| {
            (p.at == between[0] && p.against == between[1])
                || (p.at == between[1] && p.against == between[0])
        })
    }

    /// Whether going to a setup closes or lands something, or lets a source feed.
    pub(super) fn leaves_isolation(&self, to: &Setup) -> bool {
        gives_back(&self.setup, to)
    }

    /// Whether the tester was proved before and after what is proved dead.
    pub(super) fn is_bracketed(&self) -> bool {
        self.tester == Tester::Bracketed
    }

    /// Judges the readings of a point: the first one over its limit, or missing (as infinite volts).
    ///
    /// # Errors
    /// [`NotDead`] names the want, what was read and the limit.
    pub fn judge(point: &HoldPoint, volts: &BTreeMap<String, f64>) -> Result<(), NotDead> {
        for want in &point.wants {
            let read = volts.get(&want.name).copied().unwrap_or(f64::INFINITY);
            if read.is_nan() || read.abs() > want.limit_volts {
                return Err(NotDead {
                    name: want.name.clone(),
                    between: want.between.clone(),
                    volts: read,
                    limit: want.limit_volts,
                });
            }
        }
        Ok(())
    }

    /// Folds one event in.
    pub fn apply(&mut self, ground: &Ground<'_>, event: &StateEvent<'_>) {
        let site = ground.site;
        self.order += 1;
        match event {
            StateEvent::Arranged(setup) => self.arrange(site, setup),
            StateEvent::PointDone {
                point,
                volts,
                entry,
            } => self.point_done(site, point, volts, *entry),
            StateEvent::PointCannot { point, why, entry } => {
                self.done.remove(*point);
                self.cannot
                    .insert((*point).to_owned(), ((*why).to_owned(), *entry));
            }
            StateEvent::Reading {
                check,
                value,
                entry,
            } => self.reading(ground, check, value, *entry),
            StateEvent::FoundTripped { device, entry } => {
                self.tripped.insert((*device).to_owned(), *entry);
            }
            StateEvent::Repaired { places, by_network } => self.repaired(site, places, *by_network),
            StateEvent::Standing => self.standing = true,
            StateEvent::Resumed => self.resumed(),
            StateEvent::Retracted(entry) => self.retracted(*entry),
        }
    }

    fn arrange(&mut self, site: &Site, to: &Setup) {
        if gives_back(&self.setup, to) {
            self.dead.clear();
            self.tester = Tester::Unproved;
            self.done.retain(|_, d| d.stage.outlives_state());
            self.proofs.retain(|what, _| !what.starts_with(QUIET));
        } else if to
            .lift
            .iter()
            .any(|end| parts_neutral(end) && !self.setup.lift.contains(end))
        {
            self.dead.clear();
            self.done.retain(|_, d| d.stage != Stage::ProveDeadAgain);
        }
        if state_key(&self.setup) != state_key(to) {
            self.done
                .retain(|_, d| !matches!(d.stage, Stage::Energise | Stage::Restore));
        }
        let moved: Vec<String> = self
            .setup
            .lift
            .iter()
            .filter(|end| !to.lift.contains(end))
            .chain(to.lift.iter().filter(|end| !self.setup.lift.contains(end)))
            .map(|end| touched_by(site, end))
            .collect();
        if !moved.is_empty() {
            self.withdraw(site, &moved);
        }
        self.tripped.retain(|device, _| !to.closed.contains(device));
        let mut next = (*to).clone();
        // What a setup leaves unsaid about a source stays as it is: nobody switched it.
        for (source, mode) in &self.setup.sources {
            next.sources.entry(source.clone()).or_insert(*mode);
        }
        self.setup = next;
    }

    fn point_done(
        &mut self,
        site: &Site,
        point: &HoldPoint,
        volts: &BTreeMap<String, f64>,
        entry: u64,
    ) {
        if point.stage.moves() {
            self.arrange(site, &point.setup);
        }
        for want in &point.wants {
            let [at, against] = want.between.clone();
            let read = volts.get(&want.name).copied().unwrap_or(f64::INFINITY);
            self.dead.retain(|p| (&p.at, &p.against) != (&at, &against));
            self.dead.push(DeadProof {
                at,
                against,
                volts: read,
                entry,
            });
        }
        self.tester = match (point.stage, self.tester) {
            (Stage::TesterBefore, _) => Tester::Before,
            (Stage::ProveDead | Stage::ProveDeadAgain, Tester::Unproved) => Tester::Unproved,
            (Stage::ProveDead | Stage::ProveDeadAgain, _) if !point.wants.is_empty() => {
                Tester::Used
            }
            (Stage::TesterAfter | Stage::TesterAfterAgain, Tester::Used) => Tester::Bracketed,
            (_, same) => same,
        };
        self.cannot.remove(&point.point);
        let done = Done {
            entry,
            order: self.order,
            stage: point.stage,
            key: point.key.clone(),
        };
        self.done.insert(point.point.clone(), done);
    }

    fn reading(&mut self, ground: &Ground<'_>, check: &Check, value: &ParsedValue, entry: u64) {
        let site = ground.site;
        self.arrange(site, &check.setup);
        if let Hookup::Holds { device } = &check.hookup {
            if matches!(value, ParsedValue::Word { word: Word::Trips }) {
                self.tripped.insert(device.clone(), entry);
            } else {
                self.tripped.remove(device);
            }
        }
        if let Some(volts) = stake_reading(site, check, value) {
            self.stake = Some(StakeVolts { volts, entry });
        }
        let most = Some(ground.numbers.lift_amps);
        let quiet = proves_quiet(check).map(|what| Proof {
            what,
            least: None,
            most,
            word: None,
        });
        for proof in check.proves.iter().chain(&quiet) {
            if gives(proof, value) {
                let places = check.at.split('+').map(str::to_owned).collect();
                self.proofs
                    .insert(proof.what.clone(), Gained { entry, places });
            } else {
                self.proofs.remove(&proof.what);
            }
        }
    }

    fn repaired(&mut self, site: &Site, places: &[String], by_network: bool) {
        let mut all = places.to_vec();
        if by_network {
            self.network_attended = true;
            all.push("service".to_owned());
        }
        self.withdraw(site, &all);
        self.stake = None;
        self.tripped.clear();
    }

    fn resumed(&mut self) {
        self.dead.clear();
        self.tester = Tester::Unproved;
        self.done.retain(|_, d| d.stage == Stage::MakeSafe);
        // What holds for the whole site hangs on a supply that may have changed meanwhile.
        self.proofs
            .retain(|what, gained| !gained.is_site_wide(what));
        self.stake = None;
    }

    fn retracted(&mut self, entry: u64) {
        self.dead.retain(|p| p.entry != entry);
        self.done.retain(|_, d| d.entry != entry);
        self.cannot.retain(|_, (_, e)| *e != entry);
        self.proofs.retain(|_, gained| gained.entry != entry);
        self.tripped.retain(|_, e| *e != entry);
        if self.stake.is_some_and(|s| s.entry == entry) {
            self.stake = None;
        }
    }

    /// Withdraws proofs of conditions at the places, and those of the whole site where a place is one
    /// that the supply's neutral or the earthing passes through.
    fn withdraw(&mut self, site: &Site, places: &[String]) {
        let common = |p: &String| {
            matches!(p.as_str(), "service" | "network" | "electrode")
                || site.board_index(p.split('.').next().unwrap_or(p)).is_some()
        };
        let wide = places.iter().any(common);
        self.proofs.retain(|what, gained| {
            if gained.is_site_wide(what) {
                return !wide;
            }
            !places.iter().any(|place| gained.sits_at(what, place))
        });
    }
}

/// The place whose proofs fall when an end is lifted or landed: a cut cable touches its whole circuit.
fn touched_by(site: &Site, end: &str) -> String {
    let place = place_of_end(site, end);
    match place.split_once('.') {
        Some((circuit, _)) => circuit.to_owned(),
        None => place,
    }
}

/// Whether going from one setup to another closes a device, lands an end, or lets a source feed.
fn gives_back(from: &Setup, to: &Setup) -> bool {
    from.open.iter().any(|device| !to.open.contains(device))
        || from.lift.iter().any(|end| !to.lift.contains(end))
        || to.sources.iter().any(|(id, mode)| {
            *mode != SourceMode::Off && from.sources.get(id) == Some(&SourceMode::Off)
        })
}
