//! Main switches and RCDs of a site file.

use std::collections::BTreeSet;

use super::error::SiteError;
use super::feeds::phase_word;
use super::form::{BoardForm, MainSwitchForm, RcdForm, RcdTypeForm};
use super::number::{AMPS, MILLIAMPS};
use super::reader::Reader;
use crate::site::model::{Circuit, Feed, MainSwitch, Phase, Rcd, RcdType};

/// Checks a board's main switches; the board on the service always has one.
pub fn mains(
    reader: &mut Reader<'_>,
    path: &str,
    form: &BoardForm,
    phase: Phase,
    on_service: bool,
) -> Result<Vec<MainSwitch>, SiteError> {
    let listed: Vec<(String, &MainSwitchForm)> = match (&form.main_switch, &form.main_switches) {
        (Some(_), Some(_)) => {
            return Err(SiteError::new(
                format!("{path}.main_switches"),
                "both `main_switch` and `main_switches` are given",
                "keep one: `main_switches` with a second tariff, else `main_switch`",
            ));
        }
        (Some(one), None) => vec![(format!("{path}.main_switch"), one)],
        (None, Some(list)) if !list.is_empty() => list
            .iter()
            .enumerate()
            .map(|(i, m)| (format!("{path}.main_switches[{i}]"), m))
            .collect(),
        (None, _) if on_service => {
            let id = if reader.ids.has("main") {
                format!("{}-main", form.id)
            } else {
                "main".into()
            };
            reader.ids.take(path, &id)?;
            reader.assume(
                "main switch not given: taken as 63 A that leaves the neutral alone",
                form.id.as_str(),
            );
            let poles = if phase == Phase::Three { 3 } else { 1 };
            return Ok(vec![MainSwitch {
                id,
                amps: 63.0,
                poles,
                tariff: None,
            }]);
        }
        (None, _) => return Ok(Vec::new()),
    };
    let mut mains = Vec::with_capacity(listed.len());
    for (i, (path, m)) in listed.iter().enumerate() {
        reader.ids.take(path, &m.id)?;
        let usual = if phase == Phase::Three { 3 } else { 1 };
        let poles = m.poles.unwrap_or(usual);
        let allowed: &[u64] = match phase {
            Phase::One(_) => &[1, 2],
            Phase::Three if i == 0 => &[3, 4],
            // A second tariff may take one line of three.
            Phase::Three => &[1, 2, 3, 4],
        };
        if !allowed.contains(&poles) {
            return Err(SiteError::new(
                format!("{path}.poles"),
                format!(
                    "a main switch of {poles} poles does not fit a board on {}",
                    phase_word(phase)
                ),
                "1 = L, 2 = L and N; on three phases 3 = the lines, 4 = the lines and N",
            ));
        }
        mains.push(MainSwitch {
            id: m.id.clone(),
            amps: reader.number_or(&format!("{path}.amps"), m.amps, AMPS, 63.0)?,
            poles: poles as u8,
            tariff: m.tariff.clone(),
        });
    }
    Ok(mains)
}

/// Checks a board's RCDs.
pub fn rcds(
    reader: &mut Reader<'_>,
    path: &str,
    form: &BoardForm,
    phase: Phase,
    feed: &Feed,
) -> Result<Vec<Rcd>, SiteError> {
    let forms: &[RcdForm] = form.rcds.as_deref().unwrap_or(&[]);
    let names: Vec<&str> = forms.iter().map(|r| r.id.as_str()).collect();
    let upstream = match feed {
        Feed::Submain { rcd, .. } => rcd.as_deref(),
        Feed::Service => None,
    };
    let mut rcds = Vec::with_capacity(forms.len());
    for (i, r) in forms.iter().enumerate() {
        let path = format!("{path}.rcds[{i}]");
        reader.ids.take(&path, &r.id)?;
        if ["feed", "in"].contains(&r.id.as_str()) {
            return Err(SiteError::new(
                format!("{path}.id"),
                format!("`{}` would be taken for a submain's end", r.id),
                "choose another id for this RCD",
            ));
        }
        let poles = r.poles.unwrap_or(2);
        if ![1, 2, 4].contains(&poles) || (poles == 4 && phase != Phase::Three) {
            return Err(SiteError::new(
                format!("{path}.poles"),
                format!(
                    "an RCD of {poles} poles does not fit a board on {}",
                    phase_word(phase)
                ),
                "2 = L and N, 4 = three lines and N, 1 = L alone with N through the core unswitched",
            ));
        }
        let after = match r.after.as_deref() {
            // What hangs on the submain's own RCD is after it anyhow.
            Some(name) if Some(name) == upstream => None,
            Some(name) if name != r.id && names.contains(&name) => Some(name.to_owned()),
            Some(name) => {
                let others = names.iter().filter(|n| **n != r.id);
                return Err(SiteError::unknown(
                    format!("{path}.after"),
                    "other RCD on this board",
                    name,
                    others,
                ));
            }
            None => None,
        };
        if r.ma.is_none() {
            reader.assume("RCD's rating not given: taken as 30 mA", r.id.as_str());
        }
        rcds.push(Rcd {
            id: r.id.clone(),
            amps: reader.number_or(&format!("{path}.ma"), r.ma, MILLIAMPS, 30.0)? / 1000.0,
            kind: match r.kind {
                Some(RcdTypeForm::Ac) => RcdType::Ac,
                Some(RcdTypeForm::F) => RcdType::F,
                Some(RcdTypeForm::B) => RcdType::B,
                Some(RcdTypeForm::A) | None => RcdType::A,
            },
            poles: poles as u8,
            delayed: r.delayed.unwrap_or(false),
            after,
        });
    }
    for i in 0..rcds.len() {
        let mut at = &rcds[i];
        for _ in 0..rcds.len() {
            match at
                .after
                .as_deref()
                .and_then(|id| rcds.iter().find(|r| r.id == id))
            {
                Some(next) => at = next,
                None => break,
            }
        }
        if at.after.is_some() {
            return Err(SiteError::new(
                format!("{path}.rcds[{i}].after"),
                format!(
                    "RCDs stand after each other in a loop through `{}`",
                    rcds[i].id
                ),
                "`after` names the RCD upstream; the first has none",
            ));
        }
    }
    Ok(rcds)
}

/// What hangs on one RCD must fit it: one line on a two-pole RCD, one main switch.
pub fn rcd_lines(
    path: &str,
    form: &BoardForm,
    rcds: &[Rcd],
    circuits: &[Circuit],
) -> Result<(), SiteError> {
    for (i, rcd) in rcds.iter().enumerate() {
        // Everything behind the RCD, through others too.
        let mut behind = BTreeSet::from([rcd.id.as_str()]);
        for _ in 0..rcds.len() {
            let more = rcds
                .iter()
                .filter(|r| r.after.as_deref().is_some_and(|a| behind.contains(a)));
            let more: Vec<&str> = more.map(|r| r.id.as_str()).collect();
            behind.extend(more);
        }
        let hung: Vec<&Circuit> = circuits
            .iter()
            .filter(|c| c.rcd.as_deref().is_some_and(|r| behind.contains(r)))
            .collect();
        let Some(first) = hung.first() else { continue };
        let path = format!("{path}.rcds[{i}]");
        if let Some(other) = hung.iter().find(|c| c.main != first.main) {
            return Err(SiteError::new(
                path,
                format!(
                    "circuits `{}` and `{}` hang on RCD `{}` of board `{}` but on different main switches",
                    first.id, other.id, rcd.id, form.id
                ),
                "give each tariff its own RCD",
            ));
        }
        let odd = hung
            .iter()
            .find(|c| c.phase != first.phase || c.phase == Phase::Three);
        if let (Some(other), true) = (odd, rcd.poles != 4) {
            return Err(SiteError::new(
                format!("{path}.poles"),
                format!(
                    "RCD `{}` has {} poles, but `{}` on {} hangs on it beside `{}` on {}",
                    rcd.id,
                    rcd.poles,
                    other.id,
                    phase_word(other.phase),
                    first.id,
                    phase_word(first.phase)
                ),
                "give it `\"poles\": 4`, or keep its circuits on one line",
            ));
        }
    }
    Ok(())
}
