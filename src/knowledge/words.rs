//! The closed vocabularies of knowledge files: what a selector, a condition, a brace may say.
//!
//! A word here is implemented by a higher layer: `EACH` and its names by `checks`, the place classes
//! by `faults`, `ONLY` by both. An unknown word in a file is an error at load, so none can be missed.

/// A word and what it means.
pub type Meaning = (&'static str, &'static str);

/// Place classes of a fault's `at` and `to`, and of a complaint's `at`.
pub const PLACES: &[Meaning] = &[
    ("service", "the word `service`"),
    ("network", "the word `network`"),
    ("board", "a switchboard"),
    ("rcd", "an RCD"),
    ("circuit", "a circuit"),
    (
        "breaker",
        "a circuit's or submain's breaker, `c1.breaker` (complaints only)",
    ),
    ("point", "a point, `c1.p1`"),
    ("equipment", "a piece of equipment"),
    ("bond", "a bonded service or structure"),
    (
        "electrode",
        "`electrode`, or `shed.electrode` of a board with its own",
    ),
    ("source", "a source that can backfeed"),
    (
        "bar",
        "a neutral bar: `msb.N`, or `msb.rcd2.N` (as `to` only)",
    ),
];

/// Selectors of a check's `each`: the check is made once for every such place, which is `{at}`.
pub const EACH: &[Meaning] = &[
    (
        "once",
        "the whole site; `{at}` and `{board}` are the main board",
    ),
    ("main-board", "the board that the service feeds"),
    ("board", "every board"),
    (
        "sub-board",
        "every board that a submain feeds; `{board}` is the one that feeds it",
    ),
    (
        "main-line",
        "each line of the main board on three phases, as `{conductor}`; `{at}` is the board",
    ),
    ("rcd", "every RCD"),
    ("circuit", "every circuit"),
    ("circuit-on-rcd", "every circuit on an RCD"),
    (
        "circuit-pair",
        "two circuits of one board on different neutral bars, `{a}` and `{b}`",
    ),
    ("point", "every point"),
    ("outlet", "every point of kind outlet"),
    (
        "last-point",
        "of each circuit the point farthest from its board",
    ),
    (
        "joint",
        "every point, every circuit's end in its board, every submain's end",
    ),
    ("inner-point", "every point from which another goes on"),
    (
        "split",
        "of each circuit with at least three points the one nearest its middle",
    ),
    ("bond", "every bond"),
    ("equipment", "every piece of equipment"),
    ("plug-equipment", "equipment on a plug"),
    ("frame", "class I equipment"),
    ("element", "equipment with a heating element"),
    ("source", "every source that can backfeed"),
    (
        "electrode",
        "`electrode`, and `shed.electrode` of every board with its own",
    ),
];

/// Conditions on a place, in `only` of faults, checks and limits; all must hold.
pub const ONLY: &[Meaning] = &[
    ("TN-C-S", "the supply's system"),
    ("TN-S", "the supply's system"),
    ("TT", "the supply's system"),
    ("TN", "the supply's system is TN-C-S or TN-S"),
    (
        "has-link",
        "the place's board has its own neutral-earth link, as meant",
    ),
    (
        "no-link",
        "the place's board has no link of its own, as meant",
    ),
    (
        "has-electrode",
        "the place's board has its own main earth and electrode",
    ),
    ("submain", "the place's board is fed by a submain"),
    ("main-board", "a board: the one that the service feeds"),
    (
        "unlinked",
        "a board: it has no link of its own, as meant; any other place fits",
    ),
    ("fed", "a board: a submain feeds it; any other place fits"),
    (
        "fed-earth",
        "a board: a submain with an earth conductor feeds it; any other place fits",
    ),
    (
        "has-pe",
        "an earth conductor runs to the place with its feed (all but a submain with `pe_mm2` null)",
    ),
    (
        "mains-open-neutral",
        "every main switch of the place's board opens the neutral",
    ),
    (
        "solid-neutral",
        "a main switch of the place's board leaves the neutral closed",
    ),
    ("switched-rcd", "the RCD opens its neutral"),
    ("delayed", "the RCD is of type S"),
    ("not-delayed", "the RCD is not of type S"),
    ("on-rcd", "the place is behind an RCD of its board"),
    (
        "other-bar",
        "`to` hangs on another neutral bar of the same board than `at`",
    ),
    (
        "nearest-point",
        "in each other circuit, `to` is only the point nearest to `at` in cable length",
    ),
    (
        "light-or-switch",
        "the point is a light, a switch or a junction",
    ),
    ("class-I", "the equipment has an earthed frame"),
    ("class-II", "the equipment is double insulated"),
    ("element", "the equipment has a heating element"),
    ("plug", "the equipment is on a plug"),
    ("fixed", "the equipment is not on a plug"),
    ("three-phase", "the supply has three phases"),
    ("single-phase", "the supply has one phase"),
    ("backup", "the source can feed the site alone"),
];

/// Names in braces that become one id. Where a place has no such thing, the fault or check does not fit it.
pub const ID_NAMES: &[Meaning] = &[
    ("at", "the place"),
    ("to", "the fault's other place"),
    ("a", "the first circuit of a pair"),
    ("b", "the second circuit of a pair"),
    (
        "point",
        "the place's point; of equipment, where it is connected",
    ),
    ("circuit", "the place's circuit"),
    ("to-circuit", "the circuit of `to`"),
    (
        "circuits",
        "the circuits of the place and of `to`, in the file's order",
    ),
    (
        "board",
        "the place's board; of a bond, the main board; of a sub-board, the one that feeds it",
    ),
    ("rcd", "the RCD that the place hangs on; of an RCD, itself"),
    (
        "bus",
        "what its bars hang on: the RCD as `msb.rcd1`, else the board as `msb`",
    ),
    ("main", "the main switch that feeds the place"),
    ("conductor", "the fault's conductor: L, L1, L2, L3, N, PE"),
];

/// Names in braces that become several ids; only as a whole element of a list in a setup.
pub const LIST_NAMES: &[Meaning] = &[
    ("mains", "every main switch of the main board"),
    (
        "all-breakers",
        "every circuit and submain breaker of the place's board",
    ),
    (
        "rcd-breakers",
        "every circuit and submain breaker on the place's RCD",
    ),
    ("other-breakers", "the same without the place's own circuit"),
    (
        "circuit-equipment",
        "equipment on the place's circuit (in `unplug`: with a plug)",
    ),
    ("all-equipment", "all equipment (in `unplug`: with a plug)"),
];

/// Names in braces that become words a person reads, besides those of [`ID_NAMES`].
pub const TEXT_NAMES: &[Meaning] = &[
    ("line", "active / line"),
    ("neutral", "neutral"),
    ("earth", "earth / PE"),
    ("link", "the neutral-earth link in the site's words"),
    ("rcd-word", "safety switch (RCD) / RCD"),
    (
        "conductor-name",
        "the fault's conductor in the site's words",
    ),
    ("at-name", "the place as a person calls it"),
    ("to-name", "the other place as a person calls it"),
    (
        "conductor-name",
        "the fault's conductor in the site's words",
    ),
    ("board-name", "the place's board as a person calls it"),
    ("circuit-name", "the place's circuit as a person calls it"),
];

/// Words of an edit's amount, besides numbers and terminals.
pub const AMOUNTS: &[Meaning] = &[
    ("open", "infinite ohms"),
    ("value", "the fault's value"),
    ("230/value", "230 V over the fault's value"),
];

/// What an action may be (contract §6, verdict).
pub const ACTIONS: &[Meaning] = &[
    ("repair", "the electrician repairs it"),
    ("call-network", "the network operator's work"),
    ("isolate", "leave off, tagged"),
    ("refer", "another specialist's work"),
    ("nothing-found", "nothing to repair"),
];

/// What a look may look for (contract §3).
pub const SEEN: &[Meaning] = &[
    ("loose", "a conductor moves in its terminal"),
    ("burnt", "discoloured, charred, smelling"),
    ("hot", "warmer than its neighbours"),
    ("wet", "water or its traces"),
    ("corroded", "green, white or rusty"),
    ("missing", "not there"),
    ("wrong-bar", "landed on another bar"),
    ("damaged", "cut, crushed, cracked"),
];

/// Units of a fault's value.
pub const VALUE_UNITS: &[Meaning] = &[
    ("ohm", "ohms"),
    ("A", "amperes"),
    ("V", "volts"),
    ("s", "seconds"),
    ("factor", "a multiple of the device's own"),
];

/// Units a check's bare number may take, by quantity.
pub const UNITS: &[(&str, &[&str])] = &[
    ("volts", &["V"]),
    ("amps", &["A", "mA"]),
    ("insulation", &["MΩ"]),
    ("continuity", &["Ω"]),
    ("loop", &["Ω"]),
    ("trip-time", &["ms"]),
    ("ramp", &["mA"]),
    ("holds", &[""]),
    ("lamp", &[""]),
    ("seen", &[""]),
];

/// When a complaint shows (contract §6, symptom detail).
pub const WHEN: &[Meaning] = &[
    ("always", "all the time"),
    ("at-once", "as soon as it is switched on"),
    ("in-use", "while something is in use"),
    ("switching-on", "when something is switched on"),
    ("now-and-then", "from time to time"),
    ("rain", "in or after rain"),
    ("once", "it happened once"),
];

/// How a limit's `least` and `most` follow from the site.
pub const COMPUTED: &[Meaning] = &[
    (
        "loop-disconnection",
        "most = share_of_volts × nominal volts / (factor of the breaker's curve × its rating)",
    ),
    (
        "times-rated-residual",
        "least and most are multiples of the RCD's rated residual current",
    ),
    (
        "times-nominal-volts",
        "least and most are multiples of the nominal volts",
    ),
    (
        "over-forecast",
        "least and most are added to what the sound installation would read there",
    ),
    (
        "touch-over-residual",
        "most = touch volts in `most` / the rated residual current of the RCD ahead",
    ),
];

/// Words a reading may be (contract §3).
pub const READING_WORDS: &[Meaning] = &[
    ("holds", "the device stays in"),
    ("trips", "the device operates"),
    ("no trip", "the test ends without operation"),
    ("yes", "seen"),
    ("no", "looked for, not seen"),
    ("dims", "the lamp dims"),
    ("brightens", "the lamp brightens"),
    ("none", "the lamp does not change"),
    ("open", "infinite ohms"),
];

/// Warning codes of contract §6.
pub const WARNINGS: &[&str] = &[
    "keep-off-metal",
    "call-network",
    "do-not-touch-board",
    "switch-off",
    "evacuate",
    "report-shock",
];

/// Whether a vocabulary holds a word.
pub fn has(vocabulary: &[Meaning], word: &str) -> bool {
    vocabulary.iter().any(|(known, _)| *known == word)
}

/// The words of a vocabulary.
pub fn all<'a>(vocabulary: &'a [Meaning]) -> impl Iterator<Item = &'static str> + 'a {
    vocabulary.iter().map(|(word, _)| *word)
}
