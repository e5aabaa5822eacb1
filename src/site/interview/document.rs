//! The site file that grows with the answers.

use std::collections::BTreeSet;

use serde_json::{Map, Value, json};

use super::lines::CircuitLine;
use crate::site::file::SCHEMA;

/// Id of the board on the service.
pub const MAIN_BOARD: &str = "msb";

/// An RCD as answered.
#[derive(Clone, Debug, PartialEq)]
pub struct RcdLine {
    /// mA.
    pub ma: f64,
    /// Type S.
    pub delayed: bool,
}

/// Equipment as answered.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct EquipmentLine {
    /// Kind.
    pub kind: String,
    /// Name of something that is no kind.
    pub name: Option<String>,
    /// Number of its point on the circuit, from 1.
    pub point: usize,
}

/// A further board as answered.
#[derive(Clone, Debug, PartialEq)]
pub struct BoardLine {
    /// Name.
    pub name: String,
    /// m.
    pub metres: Option<f64>,
    /// A.
    pub amps: Option<f64>,
    /// mm².
    pub mm2: Option<f64>,
}

#[derive(Clone, Debug, PartialEq)]
struct BoardDraft {
    id: String,
    name: String,
    fed_from: Value,
    rcds: Vec<(String, RcdLine)>,
    circuits: Vec<Value>,
    last: (String, usize),
}

/// What was answered so far.
#[derive(Clone, Debug, PartialEq)]
pub struct Draft {
    /// Name of the site.
    pub name: String,
    /// `au-nz`, `iec`.
    pub words: &'static str,
    /// 1 or 3.
    pub phases: u8,
    /// Earthing system.
    pub system: &'static str,
    /// m.
    pub service_metres: Option<f64>,
    /// mm².
    pub service_mm2: Option<f64>,
    /// May draw the fuse.
    pub may_isolate: bool,
    /// A.
    pub main_amps: Option<f64>,
    /// Main switch opens N.
    pub main_neutral: bool,
    /// A bonded pipe.
    pub water_pipe: bool,
    boards: Vec<BoardDraft>,
    equipment: Vec<Value>,
    ids: BTreeSet<String>,
    circuits: usize,
    rcds: usize,
}

impl Default for Draft {
    fn default() -> Self {
        let taken = [
            "service",
            "network",
            "soil",
            "electrode",
            MAIN_BOARD,
            "main",
            "water",
            "board",
        ];
        Self {
            name: "unnamed site".into(),
            words: "au-nz",
            phases: 1,
            system: "TN-C-S",
            service_metres: None,
            service_mm2: None,
            may_isolate: false,
            main_amps: None,
            main_neutral: false,
            water_pipe: false,
            boards: vec![BoardDraft {
                id: MAIN_BOARD.into(),
                name: "main switchboard".into(),
                fed_from: json!("service"),
                rcds: Vec::new(),
                circuits: Vec::new(),
                last: (String::new(), 0),
            }],
            equipment: Vec::new(),
            ids: taken.map(str::to_owned).into(),
            circuits: 0,
            rcds: 0,
        }
    }
}

impl Draft {
    fn here(&self) -> Option<&BoardDraft> {
        self.boards.last()
    }

    /// Name of the board that is asked about.
    pub fn board_name(&self) -> &str {
        self.here().map_or("the board", |b| b.name.as_str())
    }

    /// Whether that is the main board.
    pub fn is_main(&self) -> bool {
        self.boards.len() == 1
    }

    /// Whether the supply has three phases.
    pub fn three_phases(&self) -> bool {
        self.phases == 3
    }

    /// Circuits of all boards.
    pub fn circuits(&self) -> usize {
        self.circuits
    }

    /// Circuits of the board that is asked about.
    pub fn circuits_here(&self) -> usize {
        self.here().map_or(0, |b| b.circuits.len())
    }

    /// RCD ids of that board.
    pub fn rcds_here(&self) -> Vec<String> {
        self.here()
            .map(|b| b.rcds.iter().map(|(id, _)| id.clone()).collect())
            .unwrap_or_default()
    }

    /// How a circuit names its RCD.
    pub fn rcd_choice(&self) -> String {
        match self.rcds_here().len() {
            0 => "none".into(),
            1 => "1 or none".into(),
            n => format!("1 to {n}, or none"),
        }
    }

    /// Name of the circuit last given.
    pub fn last_circuit_name(&self) -> String {
        let last = self.here().and_then(|b| b.circuits.last());
        last.and_then(|c| c["name"].as_str())
            .unwrap_or("the circuit")
            .to_owned()
    }

    /// Number of its points.
    pub fn last_circuit_points(&self) -> usize {
        self.here().map_or(0, |b| b.last.1)
    }

    /// A new id made of a name.
    fn fresh(&mut self, name: &str) -> String {
        let slug: String = name
            .to_lowercase()
            .chars()
            .map(|c| if c.is_ascii_alphanumeric() { c } else { '-' })
            .take(40)
            .collect();
        let parts: Vec<&str> = slug.split('-').filter(|p| !p.is_empty()).collect();
        let mut base = parts.join("-");
        if !base.starts_with(|c: char| c.is_ascii_lowercase()) {
            base = format!("x{base}");
        }
        let mut id = base.clone();
        let mut n = 1;
        while !self.ids.insert(id.clone()) {
            n += 1;
            id = format!("{base}-{n}");
        }
        id
    }

    /// RCDs of the board that is asked about.
    pub fn add_rcds(&mut self, rcds: &[RcdLine]) {
        for rcd in rcds {
            self.rcds += 1;
            let id = self.fresh(&format!("rcd{}", self.rcds));
            if let Some(board) = self.boards.last_mut() {
                board.rcds.push((id, rcd.clone()));
            }
        }
    }

    /// A circuit with evenly spread points; cable by its breaker, kind of point by its name.
    pub fn add_circuit(&mut self, line: CircuitLine) {
        self.circuits += 1;
        let id = self.fresh(&format!("c{}", self.circuits));
        let kind = point_kind(&line.name);
        let amps = line
            .amps
            .unwrap_or(if kind == "light" { 10.0 } else { 20.0 });
        let points: Vec<Value> = (1..=line.points)
            .map(|n| {
                let mut point =
                    json!({"id": format!("p{n}"), "name": format!("point {n}"), "kind": kind});
                if let Some(far) = line.metres {
                    // Whole decimetres: the file is read and edited by people.
                    point["metres"] =
                        json!((far * (n as f64) / (line.points as f64) * 10.0).ceil() / 10.0);
                }
                point
            })
            .collect();
        let circuit = json!({
            "id": id, "name": line.name, "rcd": line.rcd, "phase": line.phase,
            "breaker": {"curve": if self.words == "iec" { "B" } else { "C" }, "amps": amps},
            "cable": {"mm2": section(amps)}, "points": points,
        });
        if let Some(board) = self.boards.last_mut() {
            board.last = (id, line.points);
            board.circuits.push(circuit);
        }
    }

    /// Equipment on the circuit last given.
    pub fn add_equipment(&mut self, list: Vec<EquipmentLine>) {
        for line in list {
            let id = self.fresh(line.name.as_deref().unwrap_or(&line.kind));
            let circuit = self.here().map(|b| b.last.0.clone()).unwrap_or_default();
            let fixed = matches!(
                line.kind.as_str(),
                "oven"
                    | "cooktop"
                    | "storage water heater"
                    | "luminaire"
                    | "air conditioner"
                    | "heat pump"
                    | "vehicle charger"
            );
            let mut equipment = json!({
                "id": id, "kind": line.kind, "at": format!("{circuit}.p{}", line.point), "plug": !fixed,
            });
            if let Some(name) = line.name {
                equipment["name"] = json!(name);
            }
            if self.water_pipe
                && matches!(
                    line.kind.as_str(),
                    "storage water heater" | "washing machine" | "dishwasher"
                )
            {
                equipment["touches"] = json!(["water"]);
            }
            self.equipment.push(equipment);
        }
    }

    /// A further board, fed from the main one.
    pub fn add_board(&mut self, line: BoardLine) {
        let id = self.fresh(&line.name);
        let amps = line.amps.unwrap_or(32.0);
        let mut feed = json!({
            "board": MAIN_BOARD, "rcd": null, "breaker": {"curve": "C", "amps": amps},
            "cable": {"mm2": line.mm2.unwrap_or_else(|| section(amps))},
        });
        if let Some(metres) = line.metres {
            feed["metres"] = json!(metres);
        }
        self.boards.push(BoardDraft {
            id,
            name: line.name,
            fed_from: feed,
            rcds: Vec::new(),
            circuits: Vec::new(),
            last: (String::new(), 0),
        });
    }

    /// Whether the board last given has its own link and electrode: then no PE runs to it.
    pub fn set_link(&mut self, link: bool) {
        if let (true, Some(board)) = (link, self.boards.last_mut()) {
            board.fed_from["link"] = json!(true);
            board.fed_from["cable"]["pe_mm2"] = Value::Null;
        }
    }

    /// The whole document.
    pub fn document(&self) -> Value {
        let mut service = Map::new();
        for (key, value) in [("metres", self.service_metres), ("mm2", self.service_mm2)] {
            if let Some(v) = value {
                service.insert(key.into(), json!(v));
            }
        }
        let bonds = if self.water_pipe {
            json!([{"id": "water", "name": "metal water pipe"}])
        } else {
            json!([])
        };
        let boards: Vec<Value> = self.boards.iter().map(|b| self.board(b)).collect();
        json!({
            "schema": SCHEMA, "name": self.name, "words": self.words, "rules": null,
            "may_isolate_supply": self.may_isolate,
            "supply": {"phases": self.phases, "system": self.system, "service": service},
            "earthing": {"board": MAIN_BOARD, "link": self.system == "TN-C-S", "bonds": bonds},
            "boards": boards, "equipment": self.equipment,
        })
    }

    fn board(&self, board: &BoardDraft) -> Value {
        let poles = |id: &String| {
            let three = board
                .circuits
                .iter()
                .filter(|c| c["rcd"] == json!(id))
                .map(|c| &c["phase"]);
            let phases: BTreeSet<String> = three.map(Value::to_string).collect();
            if phases.len() > 1 || phases.contains("\"L1L2L3\"") {
                4
            } else {
                2
            }
        };
        let rcds: Vec<Value> = board
            .rcds
            .iter()
            .map(|(id, r)| json!({"id": id, "ma": r.ma, "type": "A", "poles": poles(id), "delayed": r.delayed}))
            .collect();
        let mut out = json!({"id": board.id, "name": board.name, "fed_from": board.fed_from});
        if board.id == MAIN_BOARD {
            let lines = if self.three_phases() { 3 } else { 1 };
            let mut main = json!({"id": "main", "poles": lines + u8::from(self.main_neutral)});
            if let Some(amps) = self.main_amps {
                main["amps"] = json!(amps);
            }
            out["main_switch"] = main;
        }
        out["rcds"] = json!(rcds);
        out["circuits"] = json!(board.circuits);
        out
    }
}

/// What is at the points of a circuit, by its name.
fn point_kind(name: &str) -> &'static str {
    let name = name.to_lowercase();
    let has = |words: &[&str]| words.iter().any(|w| name.contains(w));
    if has(&["light"]) {
        "light"
    } else if has(&[
        "water", "oven", "cook", "hob", "stove", "heat", "pump", "air", "charger",
    ]) {
        "fixed"
    } else {
        "outlet"
    }
}

/// The usual copper section behind a breaker, mm².
fn section(amps: f64) -> f64 {
    match amps {
        a if a <= 10.0 => 1.5,
        a if a <= 20.0 => 2.5,
        a if a <= 25.0 => 4.0,
        a if a <= 32.0 => 6.0,
        a if a <= 45.0 => 10.0,
        a if a <= 63.0 => 16.0,
        a if a <= 100.0 => 35.0,
        _ => 70.0,
    }
}
