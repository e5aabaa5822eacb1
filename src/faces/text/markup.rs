//! Pieces of text tagged by what they mean, never by how they look.

use super::style::Style;
use super::table::Table;
use super::wrap::{FIRM, margin, pad, wrap};

/// What a piece of text means.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, PartialOrd, Ord)]
pub enum Meaning {
    /// Nothing in particular.
    #[default]
    Plain,
    /// What may hurt.
    Danger,
    /// A number with its unit.
    Value,
    /// Beside the point.
    Dim,
    /// A word to type.
    Word,
    /// A place.
    Place,
    /// Done, proved.
    Done,
    /// The head of a part: FIRST, NEXT, DECIDE.
    Head,
    /// What went wrong.
    Wrong,
}

/// A run of text of one meaning.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Piece {
    /// The text.
    pub text: String,
    /// What it means.
    pub meaning: Meaning,
}

/// A line of pieces before it is wrapped.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Text(pub Vec<Piece>);

impl Text {
    /// No text.
    pub fn new() -> Self {
        Self::default()
    }

    /// Adds a piece.
    #[must_use]
    pub fn with(mut self, meaning: Meaning, text: impl Into<String>) -> Self {
        self.push(meaning, text);
        self
    }

    /// Adds plain text.
    #[must_use]
    pub fn plain(self, text: impl Into<String>) -> Self {
        self.with(Meaning::Plain, text)
    }

    /// Adds a number with its unit.
    #[must_use]
    pub fn value(self, text: impl Into<String>) -> Self {
        self.with(Meaning::Value, text)
    }

    /// Adds what is beside the point.
    #[must_use]
    pub fn dim(self, text: impl Into<String>) -> Self {
        self.with(Meaning::Dim, text)
    }

    /// Adds a word to type.
    #[must_use]
    pub fn word(self, text: impl Into<String>) -> Self {
        self.with(Meaning::Word, text)
    }

    /// Adds what may hurt.
    #[must_use]
    pub fn danger(self, text: impl Into<String>) -> Self {
        self.with(Meaning::Danger, text)
    }

    /// Adds a piece in place.
    pub fn push(&mut self, meaning: Meaning, text: impl Into<String>) {
        let text = shown(&text.into());
        if !text.is_empty() {
            self.0.push(Piece { text, meaning });
        }
    }

    /// The text alone.
    pub fn bare(&self) -> String {
        self.0.iter().map(|piece| piece.text.as_str()).collect()
    }

    /// Whether there is none.
    pub fn is_empty(&self) -> bool {
        self.0.is_empty()
    }

    /// Its pieces one after another, styled.
    pub fn render(&self, style: &Style) -> String {
        self.0
            .iter()
            .map(|piece| style.paint(piece.meaning, &piece.text))
            .collect()
    }
}

impl From<&str> for Text {
    fn from(text: &str) -> Self {
        Self::new().plain(text)
    }
}

impl From<String> for Text {
    fn from(text: String) -> Self {
        Self::new().plain(text)
    }
}

/// Text from outside as it may go to a terminal: no control characters, so that nothing in a site file or a
/// log moves the cursor or changes a colour.
fn shown(text: &str) -> String {
    text.chars()
        .map(|c| match c {
            '\n' | '\t' => ' ',
            c if c.is_control()
                || matches!(c, '\u{202a}'..='\u{202e}' | '\u{2066}'..='\u{2069}') =>
            {
                '\u{fffd}'
            }
            c => c,
        })
        .collect()
}

/// A part of a page.
#[derive(Clone, Debug, PartialEq)]
pub enum Block {
    /// A paragraph: `lead` stands before its first line, the others hang below the text.
    Para {
        /// What stands in the margin.
        lead: Text,
        /// Columns of the margin.
        margin: usize,
        /// The text.
        text: Text,
    },
    /// A table, so far from the edge.
    Table(usize, Table),
    /// An empty line.
    Blank,
}

/// Blocks from top to bottom.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Page {
    /// The blocks.
    pub blocks: Vec<Block>,
}

impl Page {
    /// An empty page.
    pub fn new() -> Self {
        Self::default()
    }

    /// A paragraph from the left edge.
    pub fn line(&mut self, text: impl Into<Text>) -> &mut Self {
        self.hang(Text::new(), 0, text)
    }

    /// A paragraph behind a margin with something in it.
    pub fn hang(
        &mut self,
        lead: impl Into<Text>,
        margin: usize,
        text: impl Into<Text>,
    ) -> &mut Self {
        self.blocks.push(Block::Para {
            lead: lead.into(),
            margin,
            text: text.into(),
        });
        self
    }

    /// A table.
    pub fn table(&mut self, margin: usize, table: Table) -> &mut Self {
        self.blocks.push(Block::Table(margin, table));
        self
    }

    /// A paragraph with something in front of it that keeps its place.
    pub fn item(&mut self, text: impl Into<Text>) -> &mut Self {
        self.hang("  -", 4, text)
    }

    /// An empty line, unless one is there already or nothing is.
    pub fn blank(&mut self) -> &mut Self {
        if !matches!(self.blocks.last(), None | Some(Block::Blank)) {
            self.blocks.push(Block::Blank);
        }
        self
    }

    /// Appends another page.
    pub fn extend(&mut self, other: Self) -> &mut Self {
        self.blocks.extend(other.blocks);
        self
    }

    /// The page at a width, each line with its newline.
    pub fn render(&self, width: usize, style: &Style) -> String {
        let mut out = String::new();
        for block in &self.blocks {
            match block {
                Block::Blank => out.push('\n'),
                Block::Table(margin, table) => {
                    for line in table.lines(width.saturating_sub(*margin)) {
                        put(&mut out, &pad(Text::new(), *margin), &line, style);
                    }
                }
                Block::Para { lead, margin, text } => {
                    let room = width.saturating_sub(*margin).max(12);
                    for (row, line) in wrap(text, room).iter().enumerate() {
                        let lead = if row == 0 { lead.clone() } else { Text::new() };
                        put(&mut out, &self::margin(lead, *margin), line, style);
                    }
                }
            }
        }
        out
    }
}

/// One finished line: no blanks at its end.
fn put(out: &mut String, lead: &Text, line: &Text, style: &Style) {
    let mut all = lead.clone();
    all.0.extend(line.0.iter().cloned());
    while let Some(last) = all.0.last_mut() {
        last.text
            .truncate(last.text.trim_end_matches([' ', FIRM]).len());
        if last.text.is_empty() {
            all.0.pop();
        } else {
            break;
        }
    }
    out.push_str(&all.render(style).replace(FIRM, " "));
    out.push('\n');
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_paragraph_hangs_below_its_text_and_ends_without_blanks() {
        let mut page = Page::new();
        page.hang("NEXT", 8, "one two three four five six seven");
        page.blank().blank();
        page.line("end ");
        let text = page.render(24, &Style::plain());
        assert_eq!(
            text,
            "NEXT    one two three\n        four five six\n        seven\n\nend\n"
        );
    }

    #[test]
    fn nothing_from_outside_reaches_the_terminal_as_a_control() {
        assert_eq!(
            Text::from("a\u{1b}[31mb\u{202e}c\nd").bare(),
            "a\u{fffd}[31mb\u{fffd}c d"
        );
    }
}
