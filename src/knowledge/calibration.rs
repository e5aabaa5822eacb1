//! Holds presence and complaints of the built-in kinds against the trade reference's table B.1.

#[cfg(test)]
mod tests {
    use std::collections::BTreeMap;

    use super::super::library::Knowledge;
    use super::super::records::FaultKind;

    /// Places of a house of 25 points, 10 circuits, 2 RCDs: what `at` and `only` leave of each class.
    fn places(kind: &FaultKind) -> f64 {
        let only = |word: &str| kind.only.iter().any(|w| w == word);
        let of = |class: &String| match class.as_str() {
            "board" if only("fed") || only("fed-earth") || only("unlinked") => 0.2,
            "point" if only("light-or-switch") => 8.0,
            "point" => 25.0,
            "circuit" => 10.0,
            "equipment" if only("element") => 6.0,
            "equipment" if only("class-II") => 4.0,
            "equipment" => 10.0,
            "rcd" => 2.0,
            "source" if only("backup") => 0.3,
            "source" => 0.5,
            _ => 1.0,
        };
        kind.at.iter().map(of).sum()
    }

    /// Share of each kind among what explains a set of complaints, best first.
    fn explains(knowledge: &Knowledge, complaints: &[&str]) -> Vec<(String, f64)> {
        let mut share: BTreeMap<&str, f64> = BTreeMap::new();
        for kind in &knowledge.faults {
            let p: f64 = complaints
                .iter()
                .filter_map(|c| kind.complaints.get(*c))
                .sum();
            share.insert(&kind.kind, kind.presence * places(kind) * p);
        }
        let sum: f64 = share.values().sum();
        let mut sorted: Vec<(String, f64)> = share
            .into_iter()
            .map(|(k, s)| (k.to_owned(), s / sum))
            .collect();
        sorted.sort_by(|a, b| b.1.total_cmp(&a.1));
        sorted
    }

    /// Each of `want` is among the first `depth`, and the first of them is first, or next to it.
    fn holds(complaints: &[&str], want: &[&str], depth: usize) {
        let knowledge = Knowledge::embedded().unwrap();
        let ranked = explains(&knowledge, complaints);
        let first = ranked
            .iter()
            .find(|(k, _)| k == want[0])
            .map_or(0.0, |(_, p)| *p);
        assert!(
            first > 0.9 * ranked[0].1,
            "{complaints:?}: {:?}",
            &ranked[..depth]
        );
        for kind in want {
            let rank = ranked.iter().position(|(k, _)| k == kind);
            assert!(
                rank.is_some_and(|r| r < depth),
                "{complaints:?}: {kind} at {rank:?} of {ranked:?}"
            );
        }
    }

    #[test]
    fn tingles_are_first_the_supply_neutral() {
        let want = [
            "service-neutral-open",
            "service-neutral-resistive",
            "class-ii-touch",
            "cord-earth-open",
            "pe-open",
            "bond-open",
        ];
        holds(&["tingle", "shock"], &want, 8);
    }

    #[test]
    fn an_rcd_trips_first_for_damp_then_for_leakage() {
        let want = [
            "damp-leak",
            "standing-leakage",
            "element-leak",
            "neutral-earth-contact",
            "neutral-on-wrong-bar",
            "active-earth-leak",
        ];
        holds(&["rcd-trips"], &want, 8);
    }

    #[test]
    fn flicker_is_first_the_supply_neutral() {
        let want = [
            "service-neutral-resistive",
            "joint-resistive",
            "service-neutral-open",
            "service-active-resistive",
            "supply-out-of-range",
        ];
        holds(
            &[
                "lamps-dim",
                "lamps-flicker",
                "lamps-brighten",
                "appliances-damaged",
            ],
            &want,
            7,
        );
    }

    #[test]
    fn an_outage_is_first_an_open_line() {
        let want = [
            "active-open",
            "neutral-open",
            "overload",
            "joint-resistive",
            "active-earth-short",
        ];
        holds(&["no-power", "breaker-trips"], &want, 7);
    }

    #[test]
    fn a_smell_is_first_a_joint() {
        holds(
            &["burning-smell"],
            &[
                "joint-resistive",
                "service-active-resistive",
                "main-neutral-resistive",
            ],
            5,
        );
    }

    #[test]
    fn an_inspector_finds_devices_and_earths() {
        let want = [
            "pe-open",
            "main-earth-open",
            "pe-resistive",
            "link-missing",
            "bond-open",
            "polarity-reversed",
        ];
        holds(
            &[
                "inspection-remark",
                "breaker-holds-on-fault",
                "rcd-test-fails",
            ],
            &want,
            14,
        );
    }

    #[test]
    fn expected_faults_are_those_of_one_call_and_its_latent_defects() {
        let knowledge = Knowledge::embedded().unwrap();
        let caused: f64 = knowledge
            .faults
            .iter()
            .map(|k| k.presence * places(k) * k.complaints.values().sum::<f64>())
            .sum();
        assert!((0.93..1.07).contains(&caused), "{caused} causes a call");
    }
}
