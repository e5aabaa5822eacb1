//! Two faults at once: a cause beside a latent defect, or two causes, best first.
//!
//! A pair weighs the product of its odds of being there, so its mass falls off fast; what is left
//! out is summed, not guessed, so that the mass not examined is known.

use std::collections::{BTreeMap, BTreeSet};

use super::enumerate::{Hypothesis, Space};

/// Pairs of singles by index, heaviest first.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct PairList {
    /// `(i, j, mass)` with `i < j`, in falling mass, ties by index.
    pub pairs: Vec<(usize, usize, f64)>,
    /// Mass of the pairs listed.
    pub kept: f64,
    /// Mass of the possible pairs left out (a sum over all of them).
    pub dropped: f64,
}

/// The heaviest pairs that together hold `fraction` of the mass of all possible pairs, at most
/// `at_most` of them.
///
/// `mass(i, j)` weighs a pair; [`Space::pair_prior`] is the plain one, and a complaint multiplies
/// it by how well it explains the call. Impossible pairs (see [`Space::excluded`]) count nothing.
/// Work is quadratic in the number of singles with a small constant; memory is that of the list.
pub fn best_first(
    space: &Space,
    mass: impl Fn(usize, usize) -> f64,
    fraction: f64,
    at_most: usize,
) -> PairList {
    let n = space.singles.len();
    let each = |visit: &mut dyn FnMut(usize, usize, f64)| {
        for i in 0..n {
            let out = space.excluded.get(&i);
            for j in i + 1..n {
                if out.is_some_and(|set| set.contains(&j)) {
                    continue;
                }
                let m = mass(i, j);
                if m > 0.0 && m.is_finite() {
                    visit(i, j, m);
                }
            }
        }
    };
    // One pass counts mass by power of two, so that the second keeps no more than it must.
    let mut by_exponent = vec![(0.0, 0); 1 << 11];
    each(&mut |_, _, m| {
        let slot: &mut (f64, usize) = &mut by_exponent[exponent(m)];
        slot.0 += m;
        slot.1 += 1;
    });
    let total: f64 = by_exponent.iter().map(|slot| slot.0).sum();
    let (mut held, mut count, mut lowest) = (0.0, 0, usize::MAX);
    for (e, &(m, c)) in by_exponent.iter().enumerate().rev() {
        if held >= fraction * total || count >= at_most {
            break;
        }
        held += m;
        count += c;
        lowest = e;
    }
    let mut pairs = Vec::with_capacity(count);
    each(&mut |i, j, m| {
        if exponent(m) >= lowest {
            pairs.push((i, j, m));
        }
    });
    pairs.sort_by(|a, b| b.2.total_cmp(&a.2).then(a.0.cmp(&b.0)).then(a.1.cmp(&b.1)));
    let mut kept = 0.0;
    let mut take = 0;
    while take < pairs.len() && take < at_most && kept < fraction * total {
        kept += pairs[take].2;
        take += 1;
    }
    pairs.truncate(take);
    PairList {
        pairs,
        kept,
        dropped: (total - kept).max(0.0),
    }
}

/// Power of two below a positive finite number.
fn exponent(m: f64) -> usize {
    ((m.to_bits() >> 52) & 0x7ff) as usize
}

impl Space {
    /// Prior odds of both faults being there.
    pub fn pair_prior(&self, i: usize, j: usize) -> f64 {
        self.singles[i].prior * self.singles[j].prior
    }

    /// Whether two singles can be there together.
    pub fn compatible(&self, i: usize, j: usize) -> bool {
        i != j
            && !self
                .excluded
                .get(&i.min(j))
                .is_some_and(|set| set.contains(&i.max(j)))
    }

    /// Two singles as one hypothesis.
    pub fn pair(&self, i: usize, j: usize) -> Hypothesis {
        let (a, b) = (&self.singles[i], &self.singles[j]);
        let mut groups = BTreeSet::from([a.group.as_str(), b.group.as_str()]);
        if a.harmless != b.harmless {
            groups.remove(if a.harmless {
                a.group.as_str()
            } else {
                b.group.as_str()
            });
        }
        // The order in which people act: the network first, then whatever must be left off.
        let action = [
            "call-network",
            "isolate",
            "repair",
            "refer",
            "nothing-found",
        ]
        .into_iter()
        .find(|word| a.action == *word || b.action == *word)
        .unwrap_or("repair");
        Hypothesis {
            id: format!("{} + {}", a.id, b.id),
            faults: a.faults.iter().chain(&b.faults).cloned().collect(),
            kinds: a.kinds.iter().chain(&b.kinds).copied().collect(),
            places: a.places.iter().chain(&b.places).cloned().collect(),
            group: groups.into_iter().collect::<Vec<_>>().join(" + "),
            action: action.to_owned(),
            minutes: if a.group == b.group {
                a.minutes.max(b.minutes)
            } else {
                a.minutes + b.minutes
            },
            invasive: a.invasive || b.invasive,
            dangerous: a.dangerous || b.dangerous,
            harmless: a.harmless && b.harmless,
            prior: self.pair_prior(i, j),
        }
    }
}

/// Pairs of singles that contradict each other or say the same twice, by lower index.
///
/// `claims[i]` are the branches, ends and properties that single `i` changes, and `sites[i]` its
/// kind and place: two singles that share one of either are no pair.
pub(crate) fn exclusions(claims: &[BTreeSet<String>]) -> BTreeMap<usize, BTreeSet<usize>> {
    let mut holders: BTreeMap<&str, Vec<usize>> = BTreeMap::new();
    for (i, set) in claims.iter().enumerate() {
        for claim in set {
            holders.entry(claim).or_default().push(i);
        }
    }
    let mut out: BTreeMap<usize, BTreeSet<usize>> = BTreeMap::new();
    for list in holders.values() {
        for (k, &i) in list.iter().enumerate() {
            out.entry(i).or_default().extend(&list[k + 1..]);
        }
    }
    out.retain(|_, set| !set.is_empty());
    out
}
