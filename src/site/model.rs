//! The site as checked: every default filled in, every reference resolved.
//!
//! Long because it is every part of an installation, with its meaning.

use serde::Serialize;

/// A number of the site file: given, a range, or not known.
#[derive(Clone, Copy, Debug, PartialEq, Serialize)]
pub enum Given {
    /// Not in the file: knowledge gives its prior.
    Unknown,
    /// Known to within its usual spread.
    Value(f64),
    /// Between two values.
    Range(f64, f64),
}

/// Which words a person reads.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize)]
pub enum WordSet {
    /// Active, neutral, earth.
    AuNz,
    /// Line, neutral, PE.
    Iec,
}

/// Earthing system of the supply.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize)]
pub enum System {
    /// Neutral-earth link at the installation.
    TnCS,
    /// PE from the source.
    TnS,
    /// Own electrode only.
    Tt,
}

/// Conductor metal.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize)]
pub enum Metal {
    /// Copper.
    Copper,
    /// Aluminium.
    Aluminium,
}

/// A cable run: one-way length and sections.
#[derive(Clone, Copy, Debug, PartialEq, Serialize)]
pub struct Cable {
    /// Section of L and N, mm².
    pub mm2: f64,
    /// Section of PE, mm²; `None`: no PE runs.
    pub pe_mm2: Option<f64>,
    /// Metal.
    pub metal: Metal,
}

/// A single conductor.
#[derive(Clone, Copy, Debug, PartialEq, Serialize)]
pub struct Conductor {
    /// Length, m.
    pub metres: f64,
    /// Section, mm².
    pub mm2: f64,
    /// Metal.
    pub metal: Metal,
}

/// The supply.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct Supply {
    /// 1 or 3.
    pub phases: u8,
    /// Line to neutral, open circuit, V.
    pub volts: f64,
    /// Whether the file gave `volts` (else its usual spread is that of an unknown supply).
    pub volts_given: bool,
    /// Hz.
    pub hertz: f64,
    /// Earthing system.
    pub system: System,
    /// L–N loop up to the street end of the service, Ω.
    pub network_ohms: Given,
    /// X/R of that loop.
    pub network_x_over_r: f64,
    /// Other earths of the network's neutral, or the star point's, Ω.
    pub network_earth_ohms: Given,
    /// Service cable.
    pub service: Conductor,
}

/// A bonded service pipe or structure.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct Bond {
    /// Id.
    pub id: String,
    /// Name.
    pub name: String,
    /// Bonding conductor.
    pub conductor: Conductor,
    /// Pipe to remote earth here, Ω.
    pub pipe_ohms: Given,
    /// Joined to the network's neutral in the street.
    pub street_metal: Option<bool>,
    /// Through this, Ω.
    pub street_ohms: Given,
}

/// Where the link joins neutral and earth.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize)]
pub enum LinkAt {
    /// Neutral bar to earth bar.
    Bar,
    /// Supply side of a switched neutral.
    Incoming,
}

/// Earthing of a board with its own link or electrode (the main board, or an outbuilding).
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct Earthing {
    /// Link as meant.
    pub link: bool,
    /// Where it sits.
    pub link_at: LinkAt,
    /// Main earthing conductor; `None`: no electrode here.
    pub main_earth: Option<Conductor>,
    /// Electrode to remote earth, Ω.
    pub electrode_ohms: Given,
}

/// Breaker curve.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize)]
pub enum Curve {
    /// 3–5 × In.
    B,
    /// 5–10 × In.
    C,
    /// 10–20 × In.
    D,
    /// A fuse (gG).
    Fuse,
}

/// A breaker.
#[derive(Clone, Copy, Debug, PartialEq, Serialize)]
pub struct Breaker {
    /// Curve.
    pub curve: Curve,
    /// Rated A.
    pub amps: f64,
}

/// A main switch.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct MainSwitch {
    /// Id.
    pub id: String,
    /// Rated A.
    pub amps: f64,
    /// Conductors switched.
    pub poles: u8,
    /// Tariff name of a second main switch.
    pub tariff: Option<String>,
}

impl MainSwitch {
    /// Whether it opens the neutral too.
    pub fn switches_neutral(&self) -> bool {
        self.poles == 2 || self.poles == 4
    }
}

/// RCD type.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize)]
pub enum RcdType {
    /// Sinusoidal.
    Ac,
    /// And pulsating DC.
    A,
    /// And mixed frequencies.
    F,
    /// And smooth DC.
    B,
}

/// An RCD.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct Rcd {
    /// Id.
    pub id: String,
    /// Rated residual current, A (the file gives mA).
    pub amps: f64,
    /// Type.
    pub kind: RcdType,
    /// 1: L switched, N through the core unswitched; 2: L and N; 4: three lines and N.
    pub poles: u8,
    /// Type S.
    pub delayed: bool,
    /// RCD upstream of it.
    pub after: Option<String>,
}

/// What is at a point.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize)]
pub enum PointKind {
    /// Socket outlet.
    Outlet,
    /// Fixed connection.
    Fixed,
    /// Light.
    Light,
    /// Switch.
    Switch,
    /// Junction.
    Junction,
    /// Isolator.
    Isolator,
}

/// A point on a circuit.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct Point {
    /// Id within its circuit (`p1`).
    pub id: String,
    /// Name.
    pub name: String,
    /// Cable length from the board, m.
    pub metres: f64,
    /// Index within the circuit of the point it goes on from; `None`: from the board.
    pub from: Option<usize>,
    /// What is there.
    pub kind: PointKind,
}

/// Phases of a circuit.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize)]
pub enum Phase {
    /// One line, 1 to 3.
    One(u8),
    /// Three lines.
    Three,
}

impl Phase {
    /// The line numbers (1..=3) it uses.
    pub fn lines(self) -> &'static [u8] {
        match self {
            Self::One(1) => &[1],
            Self::One(2) => &[2],
            Self::One(_) => &[3],
            Self::Three => &[1, 2, 3],
        }
    }
}

/// A final circuit.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct Circuit {
    /// Id.
    pub id: String,
    /// Name.
    pub name: String,
    /// RCD it hangs on (id), if any.
    pub rcd: Option<String>,
    /// Main switch it hangs on (id): the board's first unless named; `None`: the board has none.
    pub main: Option<String>,
    /// Phase.
    pub phase: Phase,
    /// Breaker.
    pub breaker: Breaker,
    /// Cable.
    pub cable: Cable,
    /// Points, each after the one it goes on from.
    pub points: Vec<Point>,
}

/// How a board is fed.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub enum Feed {
    /// By the service.
    Service,
    /// By a submain.
    Submain {
        /// Feeding board's index in `Site::boards`.
        board: usize,
        /// RCD of that board, if any.
        rcd: Option<String>,
        /// Its breaker there (device id `shed.breaker`).
        breaker: Breaker,
        /// Its phases.
        phase: Phase,
        /// Cable.
        cable: Cable,
        /// Length, m.
        metres: f64,
    },
}

/// A switchboard.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct Board {
    /// Id.
    pub id: String,
    /// Name.
    pub name: String,
    /// Feed.
    pub feed: Feed,
    /// Main switches, the first the usual one.
    pub mains: Vec<MainSwitch>,
    /// RCDs.
    pub rcds: Vec<Rcd>,
    /// Circuits.
    pub circuits: Vec<Circuit>,
    /// Link, main earth and electrode at this board; `None`: none here.
    pub earthing: Option<Earthing>,
}

/// Equipment class.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize)]
pub enum Class {
    /// Earthed frame.
    I,
    /// Double insulated.
    II,
}

/// A piece of equipment.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct Equipment {
    /// Id.
    pub id: String,
    /// Name.
    pub name: String,
    /// Kind: a row of knowledge, or `other`.
    pub kind: String,
    /// Index of board, circuit, point.
    pub at: PointRef,
    /// Watts at 230 V, if given.
    pub watts: Option<f64>,
    /// Class.
    pub class: Class,
    /// On a plug.
    pub plug: bool,
    /// Bonds (indices in `Site::bonds`) that its frame touches.
    pub touches: Vec<usize>,
}

/// A point by indices.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Serialize)]
pub struct PointRef {
    /// Index in `Site::boards`.
    pub board: usize,
    /// Index in its circuits.
    pub circuit: usize,
    /// Index in its points.
    pub point: usize,
}

/// Kind of a source that can backfeed.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize)]
pub enum SourceKind {
    /// PV inverter.
    PvInverter,
    /// Battery.
    Battery,
    /// Generator.
    Generator,
}

/// Where a source is connected.
#[derive(Clone, Debug, PartialEq, Eq, Serialize)]
pub enum SourcePlace {
    /// A board's load-side bars.
    Board(usize),
    /// A point.
    Point(PointRef),
}

/// A source that can backfeed.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct Source {
    /// Id.
    pub id: String,
    /// Kind.
    pub kind: SourceKind,
    /// Where.
    pub at: SourcePlace,
    /// Rating, W.
    pub watts: f64,
    /// Can feed the site alone.
    pub backup: bool,
}

/// The whole site, checked.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct Site {
    /// Name.
    pub name: String,
    /// Words.
    pub words: WordSet,
    /// Rule set id, if named.
    pub rules: Option<String>,
    /// Whether `service.fuse` may be opened.
    pub may_isolate_supply: bool,
    /// Supply.
    pub supply: Supply,
    /// Index of the board with the main earthing (fed from the service).
    pub main_board: usize,
    /// Boards; a board comes after the one that feeds it.
    pub boards: Vec<Board>,
    /// Bonds, at the main board's earth bar.
    pub bonds: Vec<Bond>,
    /// Equipment.
    pub equipment: Vec<Equipment>,
    /// Sources.
    pub sources: Vec<Source>,
}
