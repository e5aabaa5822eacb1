//! What knowledge holds, as rows that a face may print (`straypath knowledge list`).

use super::library::Knowledge;
use super::records::Marker;

/// One line of the list.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Entry {
    /// `fault`, `check`, `equipment`, `symptom`, `limit`, `rules`, `parameter`, `instrument error`, `kit`.
    pub table: &'static str,
    /// The word or id.
    pub word: String,
    /// What a person reads: name and where it applies.
    pub says: String,
    /// How well it is known, where that is written.
    pub marker: Option<Marker>,
    /// Where from, where that is written.
    pub source: String,
}

/// Everything, table by table, in the files' order.
pub fn entries(knowledge: &Knowledge) -> Vec<Entry> {
    let mut out = Vec::new();
    let mut add = |table, word: &str, says: String, marker: Option<Marker>, source: &str| {
        out.push(Entry {
            table,
            word: word.to_owned(),
            says,
            marker,
            source: source.to_owned(),
        });
    };
    for f in &knowledge.faults {
        let says = format!("{}; at {}", f.name, f.at.join(", "));
        add("fault", &f.kind, says, Some(f.marker), &f.source);
    }
    for c in &knowledge.checks {
        let says = format!(
            "{}; {} at each {}, {} min",
            c.name,
            c.hookup.quantity(),
            c.each,
            c.minutes
        );
        add("check", &c.id, says, None, &c.rows.join(", "));
    }
    for e in &knowledge.equipment {
        let says = format!("{} W, class {}", e.watts, e.class);
        add("equipment", &e.kind, says, Some(e.marker), &e.source);
    }
    for s in &knowledge.symptoms {
        add(
            "symptom",
            &s.kind,
            format!("{}; at {}", s.name, s.at.join(", ")),
            None,
            "",
        );
    }
    for l in &knowledge.limits {
        let rules = if l.rules.is_empty() {
            "every rule set".into()
        } else {
            l.rules.join(", ")
        };
        add(
            "limit",
            &l.id,
            format!("{}; {rules}", l.text),
            Some(l.marker),
            &l.source,
        );
    }
    for r in &knowledge.rules {
        add("rules", &r.id, r.name.clone(), Some(r.marker), &r.source);
    }
    for p in &knowledge.parameters {
        let says = p.system.clone().unwrap_or_default();
        add("parameter", &p.path, says, Some(p.marker), &p.source);
    }
    for e in &knowledge.errors {
        let says = format!("{} % and {} of its unit", 100.0 * e.relative, e.absolute);
        add(
            "instrument error",
            &e.quantity,
            says,
            Some(e.marker),
            &e.source,
        );
    }
    for k in &knowledge.kit {
        add("kit", &k.kind, k.name.clone(), None, "");
    }
    out
}

/// The list as plain text, one entry a line, tables parted by their counts.
pub fn text(knowledge: &Knowledge) -> String {
    let entries = entries(knowledge);
    let mut out = String::new();
    let mut table = "";
    for entry in &entries {
        if entry.table != table {
            table = entry.table;
            let count = entries.iter().filter(|e| e.table == table).count();
            out.push_str(&format!("{table}: {count}\n"));
        }
        let marker = entry
            .marker
            .map_or(String::new(), |m| format!(" [{m:?}]").to_lowercase());
        out.push_str(&format!("  {}  {}{marker}\n", entry.word, entry.says));
    }
    out.push_str(&format!("digest {}\n", knowledge.digest));
    out
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn every_kind_and_check_is_listed_once() {
        let knowledge = Knowledge::embedded().unwrap();
        let entries = entries(&knowledge);
        let count = |table, word: &str| {
            entries
                .iter()
                .filter(|e| e.table == table && e.word == word)
                .count()
        };
        assert!(
            knowledge
                .faults
                .iter()
                .all(|f| count("fault", &f.kind) == 1)
        );
        assert!(knowledge.checks.iter().all(|c| count("check", &c.id) == 1));
        let text = text(&knowledge);
        assert!(text.ends_with(&format!("digest {}\n", knowledge.digest)));
    }
}
