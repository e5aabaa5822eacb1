//! Which check next: bits about the repair group a minute, singles and before/after pairs, and the
//! expected cost of going on against acting now.

use std::collections::BTreeMap;

use super::information::discrete_by_group;
use super::order::repair_order_cost;
use super::table::{Table, table};
use crate::belief::{Belief, Cause, Forecast};
use crate::checks::Check;
use crate::faults::{NOTHING_WRONG, UNLISTED};
use crate::knowledge::Setup;
use crate::safety::Cleared;

/// Hypotheses in a plan, at most.
const MOST: usize = 32;
/// Odds outside the plan, at most.
const TAIL: f64 = 5e-3;
/// Pairs of checks looked at.
const PAIRS: usize = 10;
/// Bits a minute under which a check is not worth doing at all.
const WORTHLESS: f64 = 2e-4;

/// Where the visit stands.
#[derive(Clone, Copy, Debug)]
pub struct Now<'a> {
    /// State of the installation.
    pub setup: &'a Setup,
    /// Where the person stands.
    pub place: &'a str,
}

/// A check worth doing.
#[derive(Clone, Debug, PartialEq)]
pub struct Advice {
    /// Index in the list of cleared checks.
    pub check: usize,
    /// Bits about the repair group.
    pub bits: f64,
    /// Minutes from now.
    pub minutes: f64,
    /// Expected minutes to the right repair if it is done next and then acted on.
    pub cost: f64,
    /// Worth a minute, pairs counted in.
    pub rate: f64,
    /// The check it pays with, if alone it would not.
    pub with: Option<usize>,
    /// The two leading groups that it parts best.
    pub parts: Option<(String, String)>,
}

/// A repair group with what acting on it costs.
#[derive(Clone, Debug, PartialEq)]
pub struct GroupCost {
    /// Group.
    pub group: String,
    /// Minutes of the repair with its re-test, wrong repairs counted.
    pub minutes: f64,
}

/// All that the plan has worked out of one state of belief.
#[derive(Clone, Debug)]
pub struct Plan {
    /// Advice, best first.
    pub advice: Vec<Advice>,
    /// Expected minutes if one repairs now, in the best order.
    pub act_now: f64,
    /// Groups and their probability, best first.
    pub groups: Vec<(String, f64)>,
    /// Forecasts by cleared check and candidate: `(candidate, forecast)`.
    pub forecasts: Vec<Vec<(usize, Forecast)>>,
}

/// Minutes of a cleared check from now, its open hold points with tests of their own counted in.
pub fn minutes_of(belief: &Belief, cleared: &Cleared<Check>, now: Now<'_>) -> f64 {
    let model = belief.model();
    let effort = &model.knowledge.effort;
    let own = cleared
        .get()
        .minutes_from(now.setup, now.place, &model.site, effort);
    let gained: f64 = cleared
        .open_points()
        .filter_map(|p| {
            let (test, at) = (p.test.as_ref()?, p.at.as_ref()?);
            model.check(test, at).map(|i| model.checks[i].minutes + 1.0)
        })
        .sum();
    own + gained
}

/// Costs of acting on each group in minutes: its repair, and what a wrong one costs beyond.
fn group_minutes(belief: &Belief, group: &str) -> f64 {
    let costs = &belief.model().knowledge.costs;
    if group == NOTHING_WRONG {
        return costs.wrong_repair * 0.5;
    }
    if group == UNLISTED {
        return costs.refer;
    }
    let minutes = belief
        .odds()
        .hypotheses
        .iter()
        .filter_map(|&(i, _)| belief.candidates()[i].hypothesis.as_ref())
        .find(|h| h.group == group)
        .map_or(30.0, |h| h.minutes);
    minutes + costs.wrong_repair
}

/// Groups of the candidates in a table, numbered, with their minutes.
struct Numbered {
    of: Vec<usize>,
    names: Vec<String>,
    minutes: Vec<f64>,
}

fn numbered(belief: &Belief, candidates: &[usize]) -> Numbered {
    let mut index: BTreeMap<String, usize> = BTreeMap::new();
    let mut names = Vec::new();
    let of = candidates
        .iter()
        .map(|&c| {
            let name = belief.candidates()[c].group().to_owned();
            *index.entry(name.clone()).or_insert_with(|| {
                names.push(name);
                names.len() - 1
            })
        })
        .collect();
    let minutes = names.iter().map(|n| group_minutes(belief, n)).collect();
    Numbered { of, names, minutes }
}

/// Expected minutes of acting on odds `p` over candidates.
fn act(p: &[f64], groups: &Numbered, refer: f64) -> f64 {
    let mut mass = vec![0.0; groups.names.len()];
    for (&p, &g) in p.iter().zip(&groups.of) {
        mass[g] += p;
    }
    repair_order_cost(&mass, &groups.minutes, refer)
}

/// Expected minutes of acting once the check has been read.
fn act_after(table: &Table, p: &[f64], groups: &Numbered, refer: f64) -> f64 {
    let mut cost = 0.0;
    let mut joint = vec![0.0; p.len()];
    for bin in 0..table.bins() {
        let mut total = 0.0;
        for ((j, &p), row) in joint.iter_mut().zip(p).zip(&table.p) {
            *j = p * row[bin];
            total += *j;
        }
        if total <= 1e-12 {
            continue;
        }
        for j in &mut joint {
            *j /= total;
        }
        cost += total * act(&joint, groups, refer);
    }
    cost
}

/// Bits of two checks together, from draws that share their unknowns, in coarse cells of both.
fn pair_bits(
    a: &[&Forecast],
    b: &[&Forecast],
    tables: (&Table, &Table),
    p: &[f64],
    groups: &[usize],
) -> f64 {
    // Cells: where the two readings lie against each other is what a pair can tell that singles cannot.
    const CELLS: usize = 8;
    let coarse = |t: &Table, h: usize, weight: f64, line: &mut [f64]| {
        let bins = t.bins();
        for (k, x) in t.p[h].iter().enumerate() {
            line[k * CELLS / bins.max(1)] += weight * x;
        }
    };
    let mut table = vec![vec![0.0; CELLS * CELLS]; p.len()];
    for h in 0..p.len() {
        let n = a[h].ways.len().min(b[h].ways.len());
        if n == 0 || a[h].ways.len() != b[h].ways.len() {
            let (mut la, mut lb) = (vec![0.0; CELLS], vec![0.0; CELLS]);
            coarse(tables.0, h, 1.0, &mut la);
            coarse(tables.1, h, 1.0, &mut lb);
            for (i, x) in la.iter().enumerate() {
                for (j, y) in lb.iter().enumerate() {
                    table[h][i * CELLS + j] = x * y;
                }
            }
            continue;
        }
        // Ratio of the two readings, binned by its logarithm, beside the first's size.
        for (wa, wb) in a[h].ways.iter().zip(&b[h].ways) {
            use crate::network::Outcome::{Number, Word};
            let cell = match (wa.outcome, wb.outcome) {
                (Number(x), Number(y)) => {
                    let noise = (wa.sd * wa.sd + wb.sd * wb.sd).sqrt().max(1e-12);
                    let difference = ((x - y) / noise).clamp(-12.0, 12.0);
                    let d = ((difference + 12.0) / 24.0 * (CELLS as f64 - 1.0)).round() as usize;
                    d * CELLS
                }
                (Word(x), Word(y)) => usize::from(x == y) * CELLS + 1,
                _ => CELLS / 2 * CELLS + 2,
            };
            table[h][cell] += wa.weight;
        }
        for cell in &mut table[h] {
            *cell = *cell * 0.97 + 0.03 / (CELLS * CELLS) as f64;
        }
    }
    discrete_by_group(p, groups, &table)
}

/// Works out what to do next. `cleared` are the checks that safety lets through.
pub fn plan(belief: &Belief, cleared: &[Cleared<Check>], now: Now<'_>) -> Plan {
    let model = belief.model();
    let refer = model.knowledge.costs.refer;
    let checks: Vec<&Check> = cleared.iter().map(Cleared::get).collect();
    let found = belief.forecasts(&checks, TAIL, MOST);
    // Unlisted and unexamined mass stays out of the question: a broad forecast must not win bits.
    let groups = numbered(belief, &found.candidates);
    let beyond = (belief.odds().unlisted + belief.odds().not_examined).clamp(0.0, 0.95);
    let stop = |inside: f64| inside * (1.0 - beyond) + beyond * refer;
    let act_now = stop(act(&found.p, &groups, refer));
    let minutes: Vec<f64> = cleared.iter().map(|c| minutes_of(belief, c, now)).collect();
    let mut tables: Vec<Option<Table>> = Vec::with_capacity(checks.len());
    let mut advice: Vec<Advice> = Vec::new();
    for (k, check) in checks.iter().enumerate() {
        let Some(row) = model.knowledge.error_of(&check.hookup) else {
            tables.push(None);
            continue;
        };
        let column: Vec<&Forecast> = found.forecasts[k].iter().collect();
        let t = table(row, &column);
        let bits = discrete_by_group(&found.p, &groups.of, &t.p).max(0.0);
        let taken = belief.readings().iter().any(|g| {
            g.readings.first().is_some_and(|r| {
                r.test == check.test && r.at == check.at && r.epoch == belief.epoch()
            })
        });
        // A repeat mostly repeats its own slip.
        let bits = if taken { bits * 0.2 } else { bits };
        let cost = minutes[k] + stop(act_after(&t, &found.p, &groups, refer));
        advice.push(Advice {
            check: k,
            bits,
            minutes: minutes[k],
            cost,
            rate: bits / minutes[k].max(0.25),
            with: None,
            parts: parts(&t, &found.p, &groups),
        });
        tables.push(Some(t));
    }
    pairs(
        &mut advice,
        &checks,
        &found.forecasts,
        &tables,
        (&found.p, &groups.of),
        model,
        now,
    );
    advice.sort_by(|a, b| b.rate.total_cmp(&a.rate).then(a.check.cmp(&b.check)));
    advice.retain(|a| a.rate > WORTHLESS);
    let mut masses: Vec<(String, f64)> = belief.odds().groups.clone();
    masses.push((NOTHING_WRONG.to_owned(), belief.odds().nothing_wrong));
    masses.push((UNLISTED.to_owned(), belief.odds().unlisted));
    masses.sort_by(|a, b| b.1.total_cmp(&a.1).then_with(|| a.0.cmp(&b.0)));
    let forecasts = found
        .forecasts
        .into_iter()
        .map(|column| found.candidates.iter().copied().zip(column).collect())
        .collect();
    Plan {
        advice,
        act_now,
        groups: masses,
        forecasts,
    }
}

/// The two heaviest groups that a check parts best.
fn parts(table: &Table, p: &[f64], groups: &Numbered) -> Option<(String, String)> {
    let mut lead: Vec<usize> = Vec::new();
    let mut order: Vec<usize> = (0..p.len()).collect();
    order.sort_by(|&a, &b| p[b].total_cmp(&p[a]));
    for h in order {
        if lead.len() < 5 && !lead.iter().any(|&x| groups.of[x] == groups.of[h]) {
            lead.push(h);
        }
    }
    let mut best: Option<(f64, usize, usize)> = None;
    for (i, &a) in lead.iter().enumerate() {
        for &b in &lead[i + 1..] {
            let score = table.apart(a, b) * (p[a] * p[b]).sqrt();
            if best.is_none_or(|x| score > x.0) {
                best = Some((score, a, b));
            }
        }
    }
    let name = |h: usize| groups.names[groups.of[h]].clone();
    best.filter(|b| b.0 > 0.01)
        .map(|(_, a, b)| (name(a), name(b)))
}

/// Before/after pairs: the same hookup in two setups, or two hookups in one; both may gain by it.
fn pairs(
    advice: &mut [Advice],
    checks: &[&Check],
    forecasts: &[Vec<Forecast>],
    tables: &[Option<Table>],
    odds: (&[f64], &[usize]),
    model: &crate::belief::Model,
    now: Now<'_>,
) {
    let mut order: Vec<usize> = (0..advice.len()).collect();
    order.sort_by(|&a, &b| advice[b].rate.total_cmp(&advice[a].rate));
    order.truncate(PAIRS * 2);
    for (i, &x) in order.iter().enumerate() {
        for &y in &order[i + 1..] {
            let (a, b) = (advice[x].check, advice[y].check);
            let kin = checks[a].hookup == checks[b].hookup || checks[a].setup == checks[b].setup;
            if !kin || checks[a].hookup.quantity() != checks[b].hookup.quantity() {
                continue;
            }
            let (Some(ta), Some(tb)) = (&tables[a], &tables[b]) else {
                continue;
            };
            let fa: Vec<&Forecast> = forecasts[a].iter().collect();
            let fb: Vec<&Forecast> = forecasts[b].iter().collect();
            let together = pair_bits(&fa, &fb, (ta, tb), odds.0, odds.1);
            let second = checks[b].minutes_from(
                &checks[a].setup,
                &checks[a].place,
                &model.site,
                &model.knowledge.effort,
            );
            let minutes = advice[x].minutes + second;
            let rate = together / minutes.max(0.25);
            let _ = now;
            for (me, other) in [(x, b), (y, a)] {
                if rate > advice[me].rate * 1.05 {
                    advice[me].rate = rate;
                    advice[me].with = Some(other);
                }
            }
        }
    }
}

/// Whether a candidate means that nothing, or nothing known, is wrong.
pub fn is_special(belief: &Belief, candidate: usize) -> bool {
    !matches!(belief.candidates()[candidate].cause, Cause::Faults(_))
}
