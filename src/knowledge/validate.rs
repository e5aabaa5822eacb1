//! What a row must hold by itself: ranges, words, priors; the small tables.

use super::issue::Issue;
use super::parse::{Located, Parsed, nearest};
use super::records::*;
use super::words::{self, Meaning, all, has};

/// Issues while they are gathered.
pub type Issues = Vec<Issue>;

/// A number that must lie in a range, ends included.
pub fn within<T>(
    row: &Located<'_, T>,
    path: &str,
    value: f64,
    low: f64,
    high: f64,
    out: &mut Issues,
) {
    if !(low..=high).contains(&value) {
        let what = format!("{} is {value}", last(path));
        out.push(row.issue(path, what, format!("write a number from {low} to {high}")));
    }
}

/// A word that must be in a vocabulary.
pub fn word<T>(
    row: &Located<'_, T>,
    path: &str,
    word: &str,
    vocabulary: &[Meaning],
    out: &mut Issues,
) {
    if !has(vocabulary, word) {
        let cure = format!("write {}", nearest(word, all(vocabulary)));
        out.push(row.issue(
            path,
            format!("`{word}` is no {} known here", plain(path)),
            cure,
        ));
    }
}

/// Words of a list, each in a vocabulary.
pub fn each<T>(
    row: &Located<'_, T>,
    path: &str,
    list: &[String],
    vocabulary: &[Meaning],
    out: &mut Issues,
) {
    for (index, item) in list.iter().enumerate() {
        word(row, &format!("{path}.{index}"), item, vocabulary, out);
    }
}

/// A reference to another row.
pub fn refers<'w, T>(
    row: &Located<'_, T>,
    path: &str,
    name: &str,
    what: &str,
    known: impl Iterator<Item = &'w str> + Clone,
    out: &mut Issues,
) {
    if !known.clone().any(|k| k == name) {
        let cure = format!("write {}, or add it", nearest(name, known));
        out.push(row.issue(path, format!("there is no {what} `{name}`"), cure));
    }
}

/// An id: small letters, digits, hyphens.
pub fn id<T>(row: &Located<'_, T>, path: &str, name: &str, out: &mut Issues) {
    let good = name.starts_with(|c: char| c.is_ascii_lowercase())
        && name
            .chars()
            .all(|c| c.is_ascii_lowercase() || c.is_ascii_digit() || c == '-');
    if !good {
        let cure = "write small letters, digits and hyphens, a letter first";
        out.push(row.issue(path, format!("`{name}` is no id"), cure));
    }
}

fn last(path: &str) -> String {
    path.rsplit('.')
        .find(|p| p.parse::<usize>().is_err())
        .unwrap_or(path)
        .to_owned()
}

fn plain(path: &str) -> String {
    match last(path).as_str() {
        "at" => "place class".into(),
        other => format!("`{other}`"),
    }
}

/// A prior: finite numbers, a spread, clips in order round its middle.
pub fn prior<T>(row: &Located<'_, T>, path: &str, prior: &Prior, out: &mut Issues) {
    let mut bad = |what: &str, cure: &str| out.push(row.issue(path, what, cure));
    let clips = |low: &Option<f64>, high: &Option<f64>, middle: f64| {
        let low = low.unwrap_or(f64::NEG_INFINITY);
        let high = high.unwrap_or(f64::INFINITY);
        low < high && (low..=high).contains(&middle)
    };
    match prior {
        Prior::Fixed { value } => {
            if !value.is_finite() {
                bad("the fixed value is not finite", "write a number");
            }
        }
        Prior::Normal {
            mean,
            sd,
            low,
            high,
        } => {
            if !(mean.is_finite() && *sd > 0.0 && sd.is_finite()) {
                bad(
                    "a normal prior needs a finite mean and sd above 0",
                    "correct mean or sd",
                );
            } else if !clips(low, high, *mean) {
                bad(
                    "low and high do not enclose the mean",
                    "write low < mean < high",
                );
            }
        }
        Prior::Lognormal {
            median,
            gsd,
            low,
            high,
        } => {
            if !(*median > 0.0 && median.is_finite() && *gsd > 1.0 && gsd.is_finite()) {
                bad(
                    "a lognormal prior needs a median above 0 and gsd above 1",
                    "correct median or gsd",
                );
            } else if !clips(low, high, *median) || low.is_some_and(|l| l <= 0.0) {
                bad(
                    "low and high do not enclose the median",
                    "write 0 < low < median < high",
                );
            }
        }
        Prior::Uniform { low, high } => {
            if !(low.is_finite() && high.is_finite() && low < high) {
                bad(
                    "a uniform prior needs low below high",
                    "correct low or high",
                );
            }
        }
        Prior::Switch { p } => {
            if !(0.0..=1.0).contains(p) {
                bad("p is no probability", "write a number from 0 to 1");
            }
        }
        Prior::Either { p, lower, upper } => {
            if !(*p > 0.0 && *p < 1.0) {
                bad(
                    "p of either must be between 0 and 1",
                    "write a share of the lower part",
                );
            }
            self::prior(row, &format!("{path}.lower"), lower, out);
            self::prior(row, &format!("{path}.upper"), upper, out);
        }
    }
}

/// The small tables.
pub fn tables(parsed: &Parsed<'_>, out: &mut Issues) {
    for row in &parsed.equipment {
        let r = &row.record;
        within(row, "watts", r.watts, 0.1, 1e6, out);
        within(row, "power_factor", r.power_factor, 0.05, 1.0, out);
        within(row, "leak_farads", r.leak_farads, 0.0, 1e-5, out);
        within(row, "insulation_ohms", r.insulation_ohms, 1e3, 1e13, out);
        within(row, "on", r.on, 0.0, 1.0, out);
        if r.class != "I" && r.class != "II" {
            out.push(row.issue(
                "class",
                format!("`{}` is no class", r.class),
                "write I or II",
            ));
        }
    }
    for row in &parsed.parameters {
        let r = &row.record;
        prior(row, "prior", &r.prior, out);
        if let Some(spread) = r.spread {
            within(row, "spread", spread, 1.0, 10.0, out);
        }
        if let Some(system) = &r.system
            && !["TN-C-S", "TN-S", "TT"].contains(&system.as_str())
        {
            let what = format!("`{system}` is no supply system");
            out.push(row.issue("system", what, "write TN-C-S, TN-S or TT"));
        }
    }
    for row in &parsed.errors {
        let r = &row.record;
        within(row, "relative", r.relative, 0.0, 1.0, out);
        within(row, "absolute", r.absolute, 0.0, f64::MAX, out);
        within(row, "pickup", r.pickup, 0.0, 0.1, out);
        within(row, "over", r.over, f64::MIN_POSITIVE, f64::MAX, out);
        within(
            row,
            "resolution",
            r.resolution,
            f64::MIN_POSITIVE,
            f64::MAX,
            out,
        );
        within(row, "slip", r.slip, 0.0, 0.5, out);
    }
    for row in &parsed.limits {
        limit(row, out);
    }
    for row in &parsed.metals {
        within(row, "per_kelvin", row.record.per_kelvin, 0.001, 0.01, out);
        within(
            row,
            "ohm_mm2_per_metre",
            row.record.ohm_mm2_per_metre,
            0.01,
            1.0,
            out,
        );
    }
    bodies(parsed, out);
    cables(parsed, out);
    singles(parsed, out);
}

fn limit(row: &Located<'_, LimitRow>, out: &mut Issues) {
    let r = &row.record;
    if !words::UNITS
        .iter()
        .any(|(quantity, _)| *quantity == r.quantity)
    {
        let cure = format!(
            "write {}",
            nearest(&r.quantity, words::UNITS.iter().map(|u| u.0))
        );
        out.push(row.issue("quantity", format!("`{}` is no quantity", r.quantity), cure));
    }
    each(row, "only", &r.only, words::ONLY, out);
    if let Some(required) = &r.word {
        word(row, "word", required, words::READING_WORDS, out);
    }
    if let Some(computed) = &r.computed {
        word(row, "computed", computed, words::COMPUTED, out);
    }
    let by_breaker = r.computed.as_deref() == Some("loop-disconnection");
    if by_breaker
        && ["B", "C", "D"]
            .iter()
            .any(|c| !r.factors.get(*c).is_some_and(|f| *f > 1.0))
    {
        let what = "loop-disconnection needs a factor above 1 for each of B, C and D";
        out.push(row.issue("factors", what, "write factors = { B = …, C = …, D = … }"));
    }
    if r.least.is_none() && r.most.is_none() && r.word.is_none() && !by_breaker {
        out.push(row.issue(
            "",
            "a limit that limits nothing",
            "write least, most or word",
        ));
    }
    if let (Some(least), Some(most)) = (r.least, r.most)
        && least > most
    {
        out.push(row.issue("least", "least is above most", "exchange them"));
    }
}

fn bodies(parsed: &Parsed<'_>, out: &mut Issues) {
    for row in &parsed.bodies {
        let r = &row.record;
        within(row, "percentile", r.percentile, 0.1, 99.9, out);
        if r.volts.len() != r.ohms.len() || r.volts.len() < 2 {
            let what = format!("{} volts and {} ohms", r.volts.len(), r.ohms.len());
            out.push(row.issue("ohms", what, "write as many ohms as volts, two or more"));
        }
        if r.volts.windows(2).any(|w| w[0] >= w[1]) {
            out.push(row.issue("volts", "the volts do not rise", "sort them"));
        }
        if r.ohms.windows(2).any(|w| w[0] < w[1]) || r.ohms.iter().any(|o| *o <= 0.0) {
            out.push(row.issue(
                "ohms",
                "the ohms rise with the volts",
                "a body's impedance falls",
            ));
        }
    }
}

fn cables(parsed: &Parsed<'_>, out: &mut Issues) {
    let mut sorted: Vec<&Located<'_, CableRow>> = parsed.cables.iter().collect();
    sorted.sort_by(|a, b| a.record.mm2.total_cmp(&b.record.mm2));
    type Column = fn(&CableRow) -> Option<f64>;
    for (name, column) in [
        ("copper", (|r| r.copper) as Column),
        ("aluminium", |r| r.aluminium),
    ] {
        let mut before: Option<f64> = None;
        for row in &sorted {
            let Some(ohms) = column(&row.record) else {
                continue;
            };
            within(row, name, ohms, 1e-6, 1.0, out);
            if before.is_some_and(|thinner| ohms >= thinner) {
                out.push(row.issue(
                    name,
                    "a thicker conductor with no fewer ohms",
                    "correct the row",
                ));
            }
            before = Some(ohms);
        }
    }
    for row in &parsed.cables {
        if row.record.copper.is_none() && row.record.aluminium.is_none() {
            out.push(row.issue("mm2", "a size without ohms", "write copper or aluminium"));
        }
    }
}

fn singles(parsed: &Parsed<'_>, out: &mut Issues) {
    one("effort", &parsed.effort, out);
    one("safety", &parsed.safety, out);
    one("costs", &parsed.costs, out);
    one("beside", &parsed.beside, out);
    for row in &parsed.effort {
        let r = &row.record;
        let acts = [
            ("switch", r.switch),
            ("prove_dead", r.prove_dead),
            ("lift", r.lift),
            ("plug", r.plug),
            ("plug_all", r.plug_all),
            ("on_off", r.on_off),
            ("load", r.load),
            ("provoke", r.provoke),
            ("source", r.source),
            ("walk", r.walk),
        ];
        for (name, minutes) in acts {
            within(row, name, minutes, 0.0, 600.0, out);
        }
    }
    for row in &parsed.safety {
        let r = &row.record;
        within(row, "touch_volts", r.touch_volts, 1.0, 50.0, out);
        within(row, "body_amps", r.body_amps, 1e-4, 0.01, out);
        within(row, "lift_amps", r.lift_amps, 1e-4, 0.05, out);
        within(row, "dead_volts", r.dead_volts, 0.5, 25.0, out);
        within(row, "free_watts", r.free_watts, 0.0, 25.0, out);
        within(row, "free_loop_amps", r.free_loop_amps, 0.0, 0.015, out);
        within(row, "credible", r.credible, 0.0, 0.01, out);
    }
    for row in &parsed.costs {
        let r = &row.record;
        let costs = [
            ("wrong_repair", r.wrong_repair),
            ("refer", r.refer),
            ("danger", r.danger),
        ];
        for (name, minutes) in costs {
            within(row, name, minutes, 0.0, 1e5, out);
        }
    }
    for row in &parsed.beside {
        let r = &row.record;
        within(row, "nothing_wrong", r.nothing_wrong, 0.0, 1.0, out);
        within(row, "unlisted", r.unlisted, 1e-6, 1.0, out);
    }
}

fn one<T>(name: &str, rows: &[Located<'_, T>], out: &mut Issues) {
    if rows.is_empty() {
        out.push(Issue {
            file: format!("{name}.toml"),
            line: 0,
            what: format!("no [{name}] table in any file"),
            cure: format!("add one, as in the built-in {name} table"),
        });
    }
    for row in rows.iter().skip(1) {
        let cure = "keep one; a file of the same relative path replaces the built-in one";
        out.push(row.issue("", format!("a second [{name}] table"), cure));
    }
}
