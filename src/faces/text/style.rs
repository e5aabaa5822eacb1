//! What a meaning looks like; decided once, for output and for the line editor alike.

use owo_colors::{OwoColorize, Style as Paint};

use super::markup::Meaning;

/// Colours, or none.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Style {
    colour: bool,
}

impl Style {
    /// No colour.
    pub fn plain() -> Self {
        Self { colour: false }
    }

    /// Colour.
    pub fn colour() -> Self {
        Self { colour: true }
    }

    /// By the rule of <https://no-color.org>: a terminal gets colour unless `NO_COLOR` is set and not empty; a
    /// terminal that calls itself `dumb` gets none.
    pub fn decide(is_terminal: bool, no_color: Option<&str>, term: Option<&str>) -> Self {
        let refused = no_color.is_some_and(|value| !value.is_empty());
        Self {
            colour: is_terminal && !refused && term != Some("dumb"),
        }
    }

    /// Whether colour is used.
    pub fn is_colour(self) -> bool {
        self.colour
    }

    /// The text as its meaning looks: colour only underlines what the words say.
    pub fn paint(self, meaning: Meaning, text: &str) -> String {
        if !self.colour {
            return text.to_owned();
        }
        let paint = match meaning {
            Meaning::Plain => return text.to_owned(),
            Meaning::Danger => Paint::new().red().bold(),
            Meaning::Value => Paint::new().bold(),
            Meaning::Dim => Paint::new().dimmed(),
            Meaning::Word => Paint::new().cyan(),
            Meaning::Place => Paint::new().underline(),
            Meaning::Done => Paint::new().green(),
            Meaning::Head => Paint::new().bold().reversed(),
            Meaning::Wrong => Paint::new().yellow().bold(),
        };
        text.style(paint).to_string()
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn no_color_counts_when_set_and_not_empty() {
        assert!(Style::decide(true, None, None).is_colour());
        assert!(Style::decide(true, Some(""), Some("xterm")).is_colour());
        assert!(!Style::decide(true, Some("0"), None).is_colour());
        assert!(!Style::decide(false, None, None).is_colour());
        assert!(!Style::decide(true, None, Some("dumb")).is_colour());
    }

    #[test]
    fn colour_adds_nothing_but_colour() {
        let painted = Style::colour().paint(Meaning::Danger, "60 V");
        assert!(
            painted.starts_with("\u{1b}[") && painted.contains("60 V"),
            "{painted:?}"
        );
        assert_eq!(Style::plain().paint(Meaning::Danger, "60 V"), "60 V");
    }
}
