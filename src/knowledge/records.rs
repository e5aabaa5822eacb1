//! The serde forms of the knowledge files: what a fault kind, a check, a row of equipment says.
//!
//! Strings in braces are filled per place; which names may stand where is in [`super::words`].
//!
//! Long because it is every record of the knowledge files, with its meaning.

use std::collections::BTreeMap;

use serde::Deserialize;

use super::procedure::{Hookup, Provoke, Setup};

/// How well a number is known (reference markers).
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Deserialize, serde::Serialize)]
#[serde(rename_all = "lowercase")]
pub enum Marker {
    /// Read in a retrieved text.
    Seen,
    /// Recalled, not re-read.
    Memory,
    /// Arithmetic on other rows.
    Computed,
    /// Judgement only.
    Guess,
    /// Partly one, partly the other.
    Mixed,
}

/// A distribution of a positive or bounded quantity.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(tag = "dist", rename_all = "lowercase", deny_unknown_fields)]
pub enum Prior {
    /// Known exactly.
    Fixed {
        /// Value.
        value: f64,
    },
    /// Normal, clipped.
    Normal {
        /// Mean.
        mean: f64,
        /// Standard deviation.
        sd: f64,
        /// Lower clip.
        #[serde(default)]
        low: Option<f64>,
        /// Upper clip.
        #[serde(default)]
        high: Option<f64>,
    },
    /// Lognormal, clipped: median and geometric standard deviation.
    Lognormal {
        /// Median.
        median: f64,
        /// Geometric standard deviation (> 1).
        gsd: f64,
        /// Lower clip.
        #[serde(default)]
        low: Option<f64>,
        /// Upper clip.
        #[serde(default)]
        high: Option<f64>,
    },
    /// Uniform.
    Uniform {
        /// Lower end.
        low: f64,
        /// Upper end.
        high: f64,
    },
    /// One with probability `p`, else zero.
    Switch {
        /// Probability of one.
        p: f64,
    },
    /// From `lower` with probability `p`, else from `upper`; the two do not overlap.
    Either {
        /// Probability of the lower part.
        p: f64,
        /// The lower part.
        lower: Box<Prior>,
        /// The upper part.
        upper: Box<Prior>,
    },
}

/// The unknown value of a fault kind.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct FaultValue {
    /// `ohm`, `A`, `V`, `s` or `factor`.
    pub unit: String,
    /// Its distribution where the fault is present.
    pub prior: Prior,
    /// How well that is known.
    pub marker: Marker,
    /// Where from.
    pub source: String,
}

/// An amount in an edit: a number, or one of the words [`crate::knowledge::words::AMOUNTS`].
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(untagged)]
pub enum Amount {
    /// A number, SI.
    Number(f64),
    /// `open`, `value` (the fault's), `230/value`, or a terminal where a conductor lands.
    Word(String),
}

/// One circuit edit of a fault kind, with templates unfilled (design §2).
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(rename_all = "kebab-case", deny_unknown_fields)]
pub enum EditForm {
    /// Ohms in series with a branch (`open` removes it).
    Series {
        /// Branch key (see `network::keys`): `service.N`, `network.N`, `msb.main-neutral`, `msb.link`,
        /// `msb.main-earth`, `water.bond`, `cord kettle.PE`, `into c1.p1.N`, `c1.N@board`, …
        branch: String,
        /// Ohms.
        ohms: Amount,
    },
    /// Ohms in place of a branch's own.
    Replace {
        /// Branch key.
        branch: String,
        /// Ohms.
        ohms: Amount,
    },
    /// A resistance between two terminals.
    Shunt {
        /// Terminals.
        between: [String; 2],
        /// Ohms.
        ohms: Amount,
        /// Only while provoked so, or raining.
        #[serde(default)]
        when: Option<Provoke>,
    },
    /// A capacitance between two terminals that draws so many amperes at 230 V, 50 Hz.
    Capacitor {
        /// Terminals.
        between: [String; 2],
        /// A at 230 V.
        amps: Amount,
    },
    /// Two conductors exchanged at a point's terminals.
    Swap {
        /// The point.
        at: String,
        /// Two of `L`, `N`, `PE`.
        conductors: [String; 2],
    },
    /// Service L and N exchanged on the street side of the link.
    SwapService {},
    /// A conductor's end landed elsewhere.
    Move {
        /// Liftable end, as `c1.N@board`.
        end: String,
        /// Terminal it lands on.
        to: Amount,
    },
    /// The source's line-to-neutral volts.
    SourceVolts {
        /// V.
        volts: Amount,
    },
    /// A path from the network's first line to the pipe with street metal, else to soil: a neighbour's
    /// load that returns here.
    NetworkInjection {
        /// Ohms.
        ohms: Amount,
    },
    /// A leak to the frame from a position along a heating element.
    Element {
        /// Equipment.
        equipment: String,
        /// Ohms.
        ohms: Amount,
    },
    /// The property of a protective device.
    Device {
        /// Device id.
        id: String,
        /// `trip-amps`, `trip-seconds`, `dead`.
        what: String,
        /// Its new value.
        #[serde(default)]
        value: Option<Amount>,
    },
}

/// How a fault comes and goes.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Manner {
    /// Probability that it shows in an ordinary reading.
    pub shows: f64,
    /// Probability that it shows when provoked so.
    #[serde(default)]
    pub provoked: BTreeMap<Provoke, f64>,
}

/// What may be seen at a place under a fault.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Look {
    /// Place.
    pub at: String,
    /// `loose`, `burnt`, …
    pub what: String,
    /// Probability that a look finds it.
    pub p: f64,
}

/// How often a check reads a word under a fault that has no edit, in place of the circuit's forecast.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct OutcomeForm {
    /// Check id.
    pub test: String,
    /// Place of the check, filled as in edits.
    pub at: String,
    /// The word it reads (for a number: what it reads is left to the sound circuit).
    pub word: String,
    /// Probability of that word.
    pub p: f64,
}

/// The repair that a hypothesis asks for.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Repair {
    /// Repairs with the same group (filled) are one.
    pub group: String,
    /// What to do.
    pub text: String,
    /// Working minutes.
    pub minutes: f64,
    /// `repair`, `call-network`, `isolate`, `refer`, `nothing-found`.
    pub action: String,
    /// Opens, cuts or replaces something that was sound to look at.
    #[serde(default)]
    pub invasive: bool,
    /// Re-tests owed: check ids, taken at the place that fits.
    #[serde(default)]
    pub rechecks: Vec<String>,
    /// The confirming look or test: a check id, at the place that fits.
    #[serde(default)]
    pub confirm: Option<String>,
}

/// A fault kind (contract §5): edits with distributions, how often, what follows.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct FaultKind {
    /// The word of contract §5.
    pub kind: String,
    /// What a person reads.
    pub name: String,
    /// Place classes for `at`: `service`, `network`, `board`, `point`, `circuit`, `equipment`, `rcd`, `bond`, `electrode`, `source`.
    pub at: Vec<String>,
    /// Place class for `to`.
    #[serde(default)]
    pub to: Option<String>,
    /// Conditions on the place, all of which must hold: [`crate::knowledge::words::ONLY`].
    #[serde(default)]
    pub only: Vec<String>,
    /// Choices for `conductor`.
    #[serde(default)]
    pub conductors: Vec<String>,
    /// Whether it has a `position` (0..1 from L).
    #[serde(default)]
    pub position: bool,
    /// Its unknown value.
    #[serde(default)]
    pub value: Option<FaultValue>,
    /// Circuit edits; empty: not predictable.
    #[serde(default)]
    pub edits: Vec<EditForm>,
    /// Outcomes of checks that the edits do not tell.
    #[serde(default)]
    pub outcomes: Vec<OutcomeForm>,
    /// How it comes and goes; absent: steady.
    #[serde(default)]
    pub manner: Option<Manner>,
    /// Expected number in an installation that calls, per place `at` it can sit at; the choices of `to`
    /// and `conductor` at that place share it equally.
    pub presence: f64,
    /// Marker of `presence` and `complaints`.
    pub marker: Marker,
    /// Source of `presence`.
    pub source: String,
    /// P(the person complains of this | this fault, and there was a call).
    pub complaints: BTreeMap<String, f64>,
    /// P(the complaint comes when | this fault is its cause), by the words of [`crate::knowledge::words::WHEN`];
    /// a word that is left out has the even share, one in seven.
    #[serde(default)]
    pub when: BTreeMap<String, f64>,
    /// A latent defect may stand beside any other cause.
    #[serde(default)]
    pub latent: bool,
    /// Nothing to repair.
    #[serde(default)]
    pub harmless: bool,
    /// Dangerous if left.
    #[serde(default)]
    pub dangerous: bool,
    /// What it is taken for.
    #[serde(default)]
    pub confused_with: Vec<String>,
    /// What may be seen.
    #[serde(default)]
    pub looks: Vec<Look>,
    /// The repair.
    pub repair: Repair,
}

/// A proof that a reading gives, or a test needs: free words, filled per place.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Proof {
    /// Its name, such as `earth continuity {at}`.
    pub what: String,
    /// Reading must be at or above this (SI).
    #[serde(default)]
    pub least: Option<f64>,
    /// Reading must be at or below this (SI).
    #[serde(default)]
    pub most: Option<f64>,
    /// Reading must be this word.
    #[serde(default)]
    pub word: Option<String>,
}

/// A hold point of a check beyond those that its setup makes necessary.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct HoldForm {
    /// Short id.
    pub point: String,
    /// What is to be done and seen.
    pub text: String,
}

/// A check: a setup and a hookup for each place it fits (contract §3, trade.md C).
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct CheckForm {
    /// The word for it.
    pub id: String,
    /// What a person reads.
    pub name: String,
    /// Place selector: [`crate::knowledge::words::EACH`].
    pub each: String,
    /// Conditions on the place, all of which must hold: [`crate::knowledge::words::ONLY`].
    #[serde(default)]
    pub only: Vec<String>,
    /// Setup with templates.
    #[serde(default)]
    pub setup: Setup,
    /// Hookup with templates.
    pub hookup: Hookup,
    /// Unit of a bare number.
    pub unit: String,
    /// Minutes of the measurement alone.
    pub minutes: f64,
    /// Instruments: each entry is one need, alternatives parted by `|`.
    pub kit: Vec<String>,
    /// How to connect and what to watch, in the imperative.
    pub text: String,
    /// Rows of trade.md C it stands for.
    #[serde(default)]
    pub rows: Vec<String>,
    /// Extra hold points.
    #[serde(default)]
    pub hold: Vec<HoldForm>,
    /// Proofs that must stand before it.
    #[serde(default)]
    pub needs: Vec<String>,
    /// Proofs that its reading gives.
    #[serde(default)]
    pub proves: Vec<Proof>,
    /// The hazard with a fault present, if any.
    #[serde(default)]
    pub hazard: Option<String>,
    /// Limit rows that judge it as a re-test.
    #[serde(default)]
    pub limits: Vec<String>,
    /// Never advised, only owed as a re-test or typed by hand.
    #[serde(default)]
    pub recheck_only: bool,
    /// A stage of the procedure that proves the supply neutral: its own `needs` stand in place of that
    /// proof, so its load may go above what is free.
    #[serde(default)]
    pub staged: bool,
}

/// A row of equipment.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct EquipmentRow {
    /// The word of contract §1.
    pub kind: String,
    /// Watts at 230 V.
    pub watts: f64,
    /// Power factor.
    pub power_factor: f64,
    /// Capacitance line–frame and neutral–frame, each, F.
    pub leak_farads: f64,
    /// Insulation to the frame, each side, Ω.
    pub insulation_ohms: f64,
    /// `I` or `II`.
    pub class: String,
    /// Has a heating element that can leak along its length.
    pub element: bool,
    /// Electronics that block DC between line and neutral.
    pub electronics: bool,
    /// Usually on a plug.
    pub plug: bool,
    /// Probability that it draws its load as found.
    pub on: f64,
    /// How well this is known.
    pub marker: Marker,
    /// Where from.
    pub source: String,
}

/// A parameter of the network that the site file may leave open.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct ParameterRow {
    /// Dotted path of contract §6, with `*` for an id.
    pub path: String,
    /// Only for this supply system.
    #[serde(default)]
    pub system: Option<String>,
    /// Its prior where the site says nothing.
    pub prior: Prior,
    /// The prior is a factor on what is known of the thing: an equipment row's number, an RCD's rating.
    #[serde(default)]
    pub factor: bool,
    /// Geometric standard deviation where the site gives a number.
    #[serde(default)]
    pub spread: Option<f64>,
    /// How well this is known.
    pub marker: Marker,
    /// Where from.
    pub source: String,
}

/// How an instrument errs when it reads a quantity.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct ErrorRow {
    /// What [`Hookup::error_key`] says: `volts-high-z`, `volts-low-z`, `loop-no-trip`, else the quantity.
    pub quantity: String,
    /// Relative standard deviation.
    pub relative: f64,
    /// Absolute standard deviation, SI.
    pub absolute: f64,
    /// Share of the gross current inside a clamp that leaks into its reading.
    #[serde(default)]
    pub pickup: f64,
    /// Upper end of its range, SI.
    pub over: f64,
    /// Smallest step, SI.
    pub resolution: f64,
    /// Probability that a reading (a number or a word) is wrong altogether.
    pub slip: f64,
    /// How well this is known.
    pub marker: Marker,
    /// Where from.
    pub source: String,
}

/// A sign that, simulated, makes a complaint likely.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Sign {
    /// State in which it shows.
    #[serde(default)]
    pub setup: Setup,
    /// What is read.
    pub hookup: Hookup,
    /// It shows when the reading is this word,
    #[serde(default)]
    pub word: Option<String>,
    /// or above this,
    #[serde(default)]
    pub above: Option<f64>,
    /// or below this (SI).
    #[serde(default)]
    pub below: Option<f64>,
    /// Only for these classes of place.
    #[serde(default)]
    pub at: Vec<String>,
    /// Only when the complaint's `when` is one of these.
    #[serde(default)]
    pub when: Vec<String>,
}

/// A complaint (symptom kind of contract §6).
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct SymptomRow {
    /// The word.
    pub kind: String,
    /// What a person reads.
    pub name: String,
    /// Place classes `at` may be.
    pub at: Vec<String>,
    /// Warning codes owed at once.
    #[serde(default)]
    pub warnings: Vec<String>,
    /// Simulated signs. P(complaint here | a cause) is the kind's `complaints` entry, times 1 where any
    /// sign that fits the place and `when` shows under it, times `floor` where none does; without a
    /// fitting sign it is that entry alone.
    #[serde(default)]
    pub signs: Vec<Sign>,
    /// Factor where no sign shows.
    pub floor: f64,
    /// Factor where the fault sits at quite another place than the one told; its square root where both
    /// share a circuit or board, and for nothing wrong and an unlisted cause, which may be anywhere.
    /// A kind without edits shows no sign: elsewhere its factor is `floor`, if that is less.
    /// Absent: 1.
    #[serde(default)]
    pub elsewhere: Option<f64>,
    /// P(complaint of this kind | nothing wrong now, and there was a call).
    pub nothing_wrong: f64,
    /// P(complaint of this kind | an unlisted cause, and there was a call).
    pub unlisted: f64,
}

/// A warning or make-safe order.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct WarningRow {
    /// The code of contract §6.
    pub code: String,
    /// What to do or tell.
    pub text: String,
}

/// A limit of a standard.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct LimitRow {
    /// Row id.
    pub id: String,
    /// Rule sets it belongs to; empty: every one.
    #[serde(default)]
    pub rules: Vec<String>,
    /// Quantity of contract §3 that it judges.
    pub quantity: String,
    /// Conditions on the place: words of [`crate::knowledge::words::ONLY`].
    #[serde(default)]
    pub only: Vec<String>,
    /// Least acceptable, SI.
    #[serde(default)]
    pub least: Option<f64>,
    /// Most acceptable, SI.
    #[serde(default)]
    pub most: Option<f64>,
    /// Required word.
    #[serde(default)]
    pub word: Option<String>,
    /// How `least` and `most` follow from the site: [`crate::knowledge::words::COMPUTED`].
    #[serde(default)]
    pub computed: Option<String>,
    /// For `loop-disconnection`: multiple of the breaker's rating that surely trips it, by curve `B` `C` `D`.
    #[serde(default)]
    pub factors: BTreeMap<String, f64>,
    /// For `loop-disconnection`: share of the nominal volts that is counted on (Cmin); 1 where absent.
    #[serde(default)]
    pub share_of_volts: Option<f64>,
    /// The text to show.
    pub text: String,
    /// Standard and clause.
    pub source: String,
    /// How well it is known.
    pub marker: Marker,
}

/// A rule set: the jurisdiction and edition that a site names in `rules`.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct RuleRow {
    /// The word in the site file.
    pub id: String,
    /// What a person reads.
    pub name: String,
    /// The emergency number.
    pub emergency: String,
    /// What local law asks after a shock, as text to show.
    pub report: String,
    /// Where from.
    pub source: String,
    /// How well it is known.
    pub marker: Marker,
}

/// An instrument of contract §6 `kit`.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct KitRow {
    /// The word.
    pub kind: String,
    /// What a person reads.
    pub name: String,
    /// Words it is taken to bring with it.
    #[serde(default)]
    pub brings: Vec<String>,
}

/// Resistance of a conductor by IEC 60228.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct CableRow {
    /// Cross-section, mm².
    pub mm2: f64,
    /// Plain copper class 1/2, Ω/m at 20 °C.
    #[serde(default)]
    pub copper: Option<f64>,
    /// Aluminium, Ω/m at 20 °C.
    #[serde(default)]
    pub aluminium: Option<f64>,
    /// How well it is known.
    pub marker: Marker,
    /// Where from.
    pub source: String,
}

/// A metal's temperature coefficient of resistance.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct MetalRow {
    /// `copper` or `aluminium`.
    pub metal: String,
    /// Per kelvin, at 20 °C.
    pub per_kelvin: f64,
    /// Ω·mm²/m at 20 °C, for sizes between the rows.
    pub ohm_mm2_per_metre: f64,
    /// How well it is known.
    pub marker: Marker,
    /// Where from.
    pub source: String,
}

/// A row of a body-impedance table (IEC 60479-1): ohms against touch volts, hand to hand.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct BodyRow {
    /// Edition and state of the skin: `dry-1994`, `dry`, `wet`, `salt-wet`.
    pub table: String,
    /// Percentile of people: 5, 50, 95.
    pub percentile: f64,
    /// Touch volts, rising.
    pub volts: Vec<f64>,
    /// Impedance at each, Ω.
    pub ohms: Vec<f64>,
    /// How well it is known.
    pub marker: Marker,
    /// Where from.
    pub source: String,
}

/// Minutes of the acts that change a setup.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Effort {
    /// Open or close a device.
    pub switch: f64,
    /// Lock, tag and prove dead.
    pub prove_dead: f64,
    /// Lift or land an end.
    pub lift: f64,
    /// Pull or restore one plug.
    pub plug: f64,
    /// Pull or restore all plugs.
    pub plug_all: f64,
    /// Switch equipment on or off.
    pub on_off: f64,
    /// Add or remove a test load.
    pub load: f64,
    /// Wet, warm, flex; wait.
    pub provoke: f64,
    /// Change a source's mode.
    pub source: f64,
    /// Walk to another place.
    pub walk: f64,
}

/// Rules of safety that are numbers (design §6), each with its marker in the file.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct SafetyRow {
    /// Volts at which touchable metal is at risk, skin wet or unknown.
    pub touch_volts: f64,
    /// Amperes through a body.
    pub body_amps: f64,
    /// Amperes in a conductor to be lifted.
    pub lift_amps: f64,
    /// Default limit of a prove-dead reading, V.
    pub dead_volts: f64,
    /// Added watts above which the supply neutral must be proved.
    pub free_watts: f64,
    /// Loop amperes above which the supply neutral must be proved.
    pub free_loop_amps: f64,
    /// The proof that frees them.
    pub supply_proof: String,
    /// Probability below which a hypothesis is not credible for a hazard.
    pub credible: f64,
    /// The proof that a test between line and PE at `{at}` needs.
    #[serde(default = "default_earth_proof")]
    pub earth_proof: String,
    /// Volts from earth bar to soil above which main earth and link stay where they are.
    #[serde(default = "default_earth_lift_volts")]
    pub earth_lift_volts: f64,
    /// Probability of live metal as found above which everyone is kept off it before any test.
    #[serde(default = "default_standing")]
    pub standing: f64,
}

fn default_earth_proof() -> String {
    "earth continuity {at}".to_owned()
}

fn default_earth_lift_volts() -> f64 {
    2.0
}

fn default_standing() -> f64 {
    0.05
}

/// Expected shares of what is not a fault kind, in the units of `presence`.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Beside {
    /// Calls where nothing is wrong now.
    pub nothing_wrong: f64,
    /// Calls whose cause no kind describes.
    pub unlisted: f64,
}

/// Costs that decide when to stop (minutes).
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct CostRow {
    /// A repair at the wrong place, beyond its own minutes.
    pub wrong_repair: f64,
    /// Giving up and calling another.
    pub refer: f64,
    /// Leaving a dangerous fault.
    pub danger: f64,
}
