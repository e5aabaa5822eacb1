//! What a site file may name that lives in knowledge: kinds of equipment and rule sets.

use std::collections::{BTreeMap, BTreeSet};

use crate::knowledge::{EquipmentRow, Knowledge};
use crate::site::model::Class;

/// The words of knowledge that a site file may use.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Known {
    /// Class of each kind of equipment.
    pub kinds: BTreeMap<String, Class>,
    /// Rule sets; empty: any is taken.
    pub rules: BTreeSet<String>,
}

impl Known {
    /// From the equipment rows of knowledge and the names of its rule sets.
    pub fn new<'a, I, S>(rows: I, rules: S) -> Self
    where
        I: IntoIterator<Item = &'a EquipmentRow>,
        S: IntoIterator<Item = &'a str>,
    {
        Self {
            kinds: rows
                .into_iter()
                .map(|row| {
                    (
                        row.kind.clone(),
                        if row.class == "II" {
                            Class::II
                        } else {
                            Class::I
                        },
                    )
                })
                .collect(),
            rules: rules.into_iter().map(str::to_owned).collect(),
        }
    }

    /// The kinds of contract §1 with their usual class: for a site read without knowledge at hand.
    pub fn contract() -> Self {
        const CLASS_I: [&str; 23] = [
            "kettle",
            "toaster",
            "iron",
            "portable heater",
            "refrigerator",
            "freezer",
            "washing machine",
            "dishwasher",
            "tumble dryer",
            "oven",
            "cooktop",
            "microwave oven",
            "storage water heater",
            "computer",
            "server",
            "luminaire",
            "air conditioner",
            "heat pump",
            "pump",
            "vehicle charger",
            "display fridge",
            "coffee machine",
            "welder",
        ];
        const CLASS_II: [&str; 5] = [
            "television",
            "lamp",
            "power tool",
            "electric fence energiser",
            "other",
        ];
        let one = CLASS_I.iter().map(|k| ((*k).to_owned(), Class::I));
        let two = CLASS_II.iter().map(|k| ((*k).to_owned(), Class::II));
        Self {
            kinds: one.chain(two).collect(),
            rules: BTreeSet::new(),
        }
    }
}

impl From<&Knowledge> for Known {
    fn from(knowledge: &Knowledge) -> Self {
        Self::new(
            &knowledge.equipment,
            knowledge.rules.iter().map(|r| r.id.as_str()),
        )
    }
}
