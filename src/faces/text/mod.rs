//! Text tagged by meaning: wrapped to a width, laid out in tables, rendered plain or in colour.

pub mod markup;
pub mod style;
pub mod table;
pub mod wrap;

pub use markup::{Block, Meaning, Page, Text};
pub use style::Style;
pub use table::{Cell, Table};
pub use wrap::width_of;

use std::io::{self, Write};

/// Narrowest page that is laid out; a narrower terminal breaks the lines itself.
pub const NARROWEST: usize = 40;

/// Where a face writes: one stream, a width, and whether colour is wanted.
#[derive(Debug)]
pub struct Paper<W> {
    out: W,
    /// Columns.
    pub width: usize,
    /// Colours.
    pub style: Style,
}

impl<W: Write> Paper<W> {
    /// A stream with its width and its colours.
    pub fn new(out: W, width: usize, style: Style) -> Self {
        Self {
            out,
            width: width.max(NARROWEST),
            style,
        }
    }

    /// Writes a page and sends it off.
    ///
    /// # Errors
    /// The stream takes no more.
    pub fn show(&mut self, page: &Page) -> io::Result<()> {
        self.out
            .write_all(page.render(self.width, &self.style).as_bytes())?;
        self.out.flush()
    }

    /// Writes text as it is, without a newline of its own.
    ///
    /// # Errors
    /// The stream takes no more.
    pub fn raw(&mut self, text: &str) -> io::Result<()> {
        self.out.write_all(text.as_bytes())?;
        self.out.flush()
    }

    /// The stream itself.
    pub fn into_inner(self) -> W {
        self.out
    }
}

/// Columns of a page: what the terminal says, else `COLUMNS`, else 80.
pub fn columns(terminal: Option<usize>, variable: Option<&str>) -> usize {
    let stated = variable.and_then(|text| text.trim().parse().ok());
    terminal
        .or(stated)
        .filter(|width| *width > 0)
        .unwrap_or(80)
        .clamp(NARROWEST, 120)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_terminal_counts_before_the_variable_and_nonsense_is_eighty() {
        assert_eq!(columns(Some(100), Some("60")), 100);
        assert_eq!(columns(None, Some("60")), 60);
        assert_eq!(columns(None, Some("wide")), 80);
        assert_eq!(columns(Some(0), None), 80);
        assert_eq!(columns(None, Some("3")), NARROWEST);
    }
}
