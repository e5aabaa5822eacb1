//! Templates of a check filled at a place: names in braces, lists in braces, the lines of three phases.
//!
//! On a part with three lines `X.L` is all three of them where terminals are joined or enclosed (a group
//! of an insulation test, a clamp round several conductors, ends to be lifted) and `L1` where one
//! terminal is meant; a check of every line says so by its selector, `main-line`.

use super::select::Instance;
use crate::knowledge::{HoldForm, Hookup, Load, Proof, Setup, UnplugSet, fill, words};
use crate::site::{Feed, Phase, Site, lines_of, name_of};

/// Why an instance was not filled.
#[derive(Clone, Debug, PartialEq)]
pub(crate) enum Miss {
    /// The place has no such thing: the check does not fit it.
    Absent,
    /// No place has such a thing: a mistake of the knowledge files.
    Unknown(String),
}

/// Fills what a check says at one instance.
pub(crate) struct Filler<'a> {
    /// The site.
    pub site: &'a Site,
    /// Where.
    pub instance: &'a Instance,
}

impl Filler<'_> {
    /// An id or a text.
    pub fn text(&self, form: &str) -> Result<String, Miss> {
        let extra = |name: &str| {
            self.instance
                .extra
                .iter()
                .find(|(have, _)| *have == name)
                .map(|(_, v)| v.clone())
        };
        fill(form, |name| match name {
            // Of two circuits, what is called the place is both.
            "at-name" if !self.instance.extra.is_empty() => Some(self.name()),
            _ => extra(name).or_else(|| self.instance.place.names(self.site, name)),
        })
        .map_err(|e| {
            let known =
                words::has(words::ID_NAMES, &e.name) || words::has(words::TEXT_NAMES, &e.name);
            if known {
                Miss::Absent
            } else {
                Miss::Unknown(e.to_string())
            }
        })
    }

    fn name(&self) -> String {
        match self.instance.extra.as_slice() {
            [("conductor", line)] => format!("{}, {line}", self.instance.place.name(self.site)),
            _ => name_of(self.site, &self.instance.at),
        }
    }

    /// A terminal: one line of three.
    fn terminal(&self, form: &str) -> Result<String, Miss> {
        Ok(self.site.on_line(&self.text(form)?, None))
    }

    fn two(&self, forms: &[String; 2]) -> Result<[String; 2], Miss> {
        Ok([self.terminal(&forms[0])?, self.terminal(&forms[1])?])
    }

    /// Terminals or ends that belong together: every line of three.
    fn joined(&self, forms: &[String]) -> Result<Vec<String>, Miss> {
        let mut out = Vec::new();
        for form in forms {
            for id in self.ids(std::slice::from_ref(form), false)? {
                let part = id
                    .split('@')
                    .next()
                    .and_then(|body| body.strip_suffix(".L"));
                match part.and_then(|part| self.site.phase_of(part)) {
                    Some(Phase::Three) => {
                        out.extend(
                            lines_of(Phase::Three)
                                .iter()
                                .map(|line| self.site.on_line(&id, Some(line))),
                        );
                    }
                    _ => out.push(id),
                }
            }
        }
        Ok(out)
    }

    /// Devices or equipment; a list name becomes several.
    fn ids(&self, forms: &[String], plugs_only: bool) -> Result<Vec<String>, Miss> {
        let mut out: Vec<String> = Vec::new();
        for form in forms {
            let many = match form
                .strip_prefix('{')
                .and_then(|rest| rest.strip_suffix('}'))
            {
                Some(name) if words::has(words::LIST_NAMES, name) => self.list(name, plugs_only)?,
                _ => vec![self.text(form)?],
            };
            for id in many {
                if !out.contains(&id) {
                    out.push(id);
                }
            }
        }
        Ok(out)
    }

    fn list(&self, name: &str, plugs_only: bool) -> Result<Vec<String>, Miss> {
        let site = self.site;
        let place = &self.instance.place;
        let equipment = |here: Option<(usize, usize)>| -> Vec<String> {
            let all = site.equipment.iter().filter(|e| !plugs_only || e.plug);
            let at = all.filter(|e| here.is_none_or(|(b, c)| e.at.board == b && e.at.circuit == c));
            at.map(|e| e.id.clone()).collect()
        };
        Ok(match name {
            "mains" => {
                let boards = site
                    .boards
                    .iter()
                    .filter(|b| matches!(b.feed, Feed::Service));
                boards
                    .flat_map(|b| &b.mains)
                    .map(|m| m.id.clone())
                    .collect()
            }
            "all-breakers" => breakers(site, place.board(site), None),
            "rcd-breakers" | "other-breakers" => {
                let (board, rcd) = place.rcd(site).ok_or(Miss::Absent)?;
                let own = place
                    .circuit(site)
                    .and_then(|(b, c)| site.boards.get(b)?.circuits.get(c));
                let own = own
                    .filter(|_| name == "other-breakers")
                    .map(|c| format!("{}.breaker", c.id));
                let mut all = breakers(site, board, Some(rcd));
                all.retain(|id| Some(id) != own.as_ref());
                all
            }
            "circuit-equipment" => equipment(Some(place.circuit(site).ok_or(Miss::Absent)?)),
            "all-equipment" => equipment(None),
            other => return Err(Miss::Unknown(format!("`{{{other}}}` is no list"))),
        })
    }

    /// A setup.
    pub fn setup(&self, form: &Setup) -> Result<Setup, Miss> {
        Ok(Setup {
            open: self.ids(&form.open, false)?,
            closed: self.ids(&form.closed, false)?,
            lift: self.joined(&form.lift)?,
            unplug: match &form.unplug {
                UnplugSet::All(word) => UnplugSet::All(*word),
                UnplugSet::These(list) => UnplugSet::These(self.ids(list, true)?),
            },
            on: self.ids(&form.on, false)?,
            off: self.ids(&form.off, false)?,
            load: form
                .load
                .iter()
                .map(|load| {
                    Ok(Load {
                        at: self.text(&load.at)?,
                        watts: load.watts,
                    })
                })
                .collect::<Result<_, Miss>>()?,
            provoke: form.provoke,
            sources: self.sources(form)?,
        })
    }

    fn sources(
        &self,
        form: &Setup,
    ) -> Result<std::collections::BTreeMap<String, crate::knowledge::SourceMode>, Miss> {
        let mut out = std::collections::BTreeMap::new();
        for (id, mode) in &form.sources {
            if id == "all" {
                out.extend(self.site.sources.iter().map(|s| (s.id.clone(), *mode)));
            } else {
                out.insert(self.text(id)?, *mode);
            }
        }
        Ok(out)
    }

    /// A hookup.
    pub fn hookup(&self, form: &Hookup) -> Result<Hookup, Miss> {
        let at = |at: &Option<String>| at.as_ref().map(|at| self.text(at)).transpose();
        Ok(match form {
            Hookup::Volts { between, meter } => Hookup::Volts {
                between: self.two(between)?,
                meter: *meter,
            },
            Hookup::Amps { around } if around.len() == 1 => Hookup::Amps {
                around: around
                    .iter()
                    .map(|t| self.terminal(t))
                    .collect::<Result<_, Miss>>()?,
            },
            Hookup::Amps { around } => Hookup::Amps {
                around: self.joined(around)?,
            },
            Hookup::Insulation {
                between: [a, b],
                test_volts,
            } => Hookup::Insulation {
                between: [self.joined(a)?, self.joined(b)?],
                test_volts: *test_volts,
            },
            Hookup::Continuity { between } => Hookup::Continuity {
                between: self.two(between)?,
            },
            Hookup::Loop { between, amps } => Hookup::Loop {
                between: self.two(between)?,
                amps: *amps,
            },
            Hookup::TripTime {
                rcd,
                at: place,
                multiple,
                half_cycle,
            } => Hookup::TripTime {
                rcd: self.text(rcd)?,
                at: at(place)?,
                multiple: *multiple,
                half_cycle: *half_cycle,
            },
            Hookup::Ramp { rcd, at: place } => Hookup::Ramp {
                rcd: self.text(rcd)?,
                at: at(place)?,
            },
            Hookup::Holds { device } => Hookup::Holds {
                device: self.text(device)?,
            },
            Hookup::Lamp { at } => Hookup::Lamp { at: self.text(at)? },
            Hookup::Seen { at, what } => Hookup::Seen {
                at: self.text(at)?,
                what: what.clone(),
            },
        })
    }

    /// Hold points.
    pub fn hold(&self, forms: &[HoldForm]) -> Result<Vec<HoldForm>, Miss> {
        forms
            .iter()
            .map(|h| {
                Ok(HoldForm {
                    point: h.point.clone(),
                    text: self.text(&h.text)?,
                })
            })
            .collect()
    }

    /// Names of proofs.
    pub fn texts(&self, forms: &[String]) -> Result<Vec<String>, Miss> {
        forms.iter().map(|form| self.text(form)).collect()
    }

    /// Proofs given.
    pub fn proofs(&self, forms: &[Proof]) -> Result<Vec<Proof>, Miss> {
        forms
            .iter()
            .map(|p| {
                Ok(Proof {
                    what: self.text(&p.what)?,
                    ..p.clone()
                })
            })
            .collect()
    }
}

/// Breakers of circuits and submains at a board, on one RCD or all.
fn breakers(site: &Site, board: usize, rcd: Option<&str>) -> Vec<String> {
    let on = |have: &Option<String>| rcd.is_none_or(|rcd| have.as_deref() == Some(rcd));
    let circuits = site.boards.get(board).into_iter().flat_map(|b| &b.circuits);
    let mut out: Vec<String> = circuits
        .filter(|c| on(&c.rcd))
        .map(|c| format!("{}.breaker", c.id))
        .collect();
    for sub in &site.boards {
        if let Feed::Submain {
            board: from, rcd, ..
        } = &sub.feed
            && *from == board
            && on(rcd)
        {
            out.push(format!("{}.breaker", sub.id));
        }
    }
    out
}
