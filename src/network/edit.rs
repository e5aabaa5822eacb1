//! Edits of the circuit: what faults are made of, with every template filled and value set.

use crate::knowledge::Provoke;

/// One edit. Branch keys and terminals are strings of contract §2 and of `network::keys`:
/// `service.N`, `network.N`, `msb.main-neutral`, `msb.link`, `msb.main-earth`, `electrode`,
/// `shed.electrode`, `water.bond`, `c1.N@board`, `shed.N@board`, `into c1.p1.N` (the conductor that
/// reaches that terminal; of a circuit its end in the board, of a board its submain's end in the
/// board that feeds it), `cord kettle.PE`.
#[derive(Clone, Debug, PartialEq)]
pub enum Edit {
    /// Ohms in series with a branch; infinite: opened.
    Series {
        /// Branch key.
        branch: String,
        /// Ω.
        ohms: f64,
    },
    /// Ohms in place of a branch's own.
    Replace {
        /// Branch key.
        branch: String,
        /// Ω.
        ohms: f64,
    },
    /// A resistance between two terminals.
    Shunt {
        /// Terminals.
        between: [String; 2],
        /// Ω.
        ohms: f64,
        /// Only while provoked so.
        when: Option<Provoke>,
    },
    /// A capacitance between two terminals.
    Capacitor {
        /// Terminals.
        between: [String; 2],
        /// F.
        farads: f64,
    },
    /// Two conductors exchanged at a point's terminals; what goes on from it is right again.
    Swap {
        /// Point, `c1.p1`.
        at: String,
        /// Two of `L`, `N`, `PE`.
        conductors: [String; 2],
    },
    /// Service L and N exchanged on the street side of the link.
    SwapService,
    /// A conductor's end landed on another terminal.
    Move {
        /// Liftable end, `c1.N@board`.
        end: String,
        /// Terminal.
        to: String,
    },
    /// The source's line-to-neutral volts.
    SourceVolts(f64),
    /// A leak to the frame from a position along an element.
    Element {
        /// Equipment id.
        equipment: String,
        /// 0..1 from L.
        position: f64,
        /// Ω.
        ohms: f64,
    },
    /// A current-limiting path from the network's first line to a terminal (a neighbour's return).
    NetworkInjection {
        /// Bond id whose street end takes it, or `None` for soil.
        bond: Option<String>,
        /// Ω.
        ohms: f64,
    },
    /// RCD threshold, A.
    TripAmps {
        /// RCD.
        rcd: String,
        /// A.
        amps: f64,
    },
    /// RCD time at 1 ×, s.
    TripSeconds {
        /// RCD.
        rcd: String,
        /// s.
        seconds: f64,
    },
    /// An RCD that never operates.
    DeadRcd {
        /// RCD.
        rcd: String,
    },
}
