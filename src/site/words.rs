//! The trade's words of a site: what a person reads for line, neutral, earth, link and RCD.

use super::model::{Site, WordSet};

/// Words that fill templates of knowledge.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Words {
    /// `{line}`.
    pub line: &'static str,
    /// `{neutral}`.
    pub neutral: &'static str,
    /// `{earth}`.
    pub earth: &'static str,
    /// `{link}`.
    pub link: &'static str,
    /// `{rcd-word}`.
    pub rcd: &'static str,
    /// The conductor from the earth bar to the electrode.
    pub main_earth: &'static str,
    /// One letter each for line, neutral and earth, as in `A–N`.
    pub letters: [&'static str; 3],
}

/// Words of Australia and New Zealand.
const AU_NZ: Words = Words {
    line: "active",
    neutral: "neutral",
    earth: "earth",
    link: "neutral-earth link",
    rcd: "safety switch (RCD)",
    main_earth: "main earth",
    letters: ["A", "N", "E"],
};

/// Words of the IEC.
const IEC: Words = Words {
    line: "line",
    neutral: "neutral",
    earth: "PE",
    link: "link of PEN and PE",
    rcd: "RCD",
    main_earth: "earthing conductor",
    letters: ["L", "N", "PE"],
};

/// The words of a site.
pub fn words(site: &Site) -> Words {
    match site.words {
        WordSet::AuNz => AU_NZ,
        WordSet::Iec => IEC,
    }
}

impl Words {
    /// The word for a conductor's designation: `N` is `neutral`, `L2` is `active L2`.
    pub fn conductor(&self, designation: &str) -> String {
        match designation {
            "L" => self.line.to_owned(),
            "N" => self.neutral.to_owned(),
            "PE" => self.earth.to_owned(),
            line => format!("{} {line}", self.line),
        }
    }

    /// Fills `{line}`, `{neutral}`, `{earth}`, `{link}`, `{rcd-word}`; other braces stay.
    pub fn fill(&self, template: &str) -> String {
        self.fill_with(template, &|_| None)
    }

    /// As `fill`, with names of the caller's own, which come first; a name that nobody knows stays in its braces.
    pub fn fill_with(&self, template: &str, own: &dyn Fn(&str) -> Option<String>) -> String {
        let mut out = String::with_capacity(template.len() + 32);
        let mut rest = template;
        while let Some(start) = rest.find('{') {
            let Some(length) = rest[start..].find('}') else {
                break;
            };
            let name = &rest[start + 1..start + length];
            out.push_str(&rest[..start]);
            match own(name).or_else(|| self.word(name).map(str::to_owned)) {
                Some(text) => out.push_str(&text),
                None => out.push_str(&rest[start..=start + length]),
            }
            rest = &rest[start + length + 1..];
        }
        out.push_str(rest);
        out
    }

    /// The word for a name in braces.
    pub fn word(&self, name: &str) -> Option<&'static str> {
        Some(match name {
            "line" => self.line,
            "neutral" => self.neutral,
            "earth" => self.earth,
            "link" => self.link,
            "rcd-word" => self.rcd,
            _ => return None,
        })
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn templates_take_the_sites_words_and_leave_the_rest() {
        let text = AU_NZ.fill("Lift the {neutral} of {at-name}, then the {link}; {rcd-word} off {");
        assert_eq!(
            text,
            "Lift the neutral of {at-name}, then the neutral-earth link; safety switch (RCD) off {"
        );
        let own = |name: &str| (name == "at-name").then(|| "bench".to_owned());
        assert_eq!(IEC.fill_with("{line} at {at-name}", &own), "line at bench");
    }
}
