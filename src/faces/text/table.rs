//! Tables of a few columns: as wide as they need, the flexible one wrapped when the page is narrow.

use super::markup::Text;
use super::wrap::{FIRM, pad, width_of, wrap};

/// One cell.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Cell {
    /// Its text.
    pub text: Text,
    /// Flush right.
    pub right: bool,
}

impl<T: Into<Text>> From<T> for Cell {
    fn from(text: T) -> Self {
        Self {
            text: text.into(),
            right: false,
        }
    }
}

impl Cell {
    /// Flush right.
    pub fn right(text: impl Into<Text>) -> Self {
        Self {
            text: text.into(),
            right: true,
        }
    }
}

/// Rows of cells; one column takes what the others leave.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Table {
    flexible: usize,
    rows: Vec<Vec<Cell>>,
}

/// Columns between two cells.
const GAP: usize = 2;

/// Narrowest flexible column before its neighbours give way.
const LEAST: usize = 16;

/// Narrowest column in which sentences are read.
const READABLE: usize = 22;

impl Table {
    /// A table whose column of this index may be wrapped.
    pub fn new(flexible: usize) -> Self {
        Self {
            flexible,
            rows: Vec::new(),
        }
    }

    /// Adds a row.
    pub fn row(&mut self, cells: Vec<Cell>) -> &mut Self {
        self.rows.push(cells);
        self
    }

    /// Whether it has no rows.
    pub fn is_empty(&self) -> bool {
        self.rows.is_empty()
    }

    /// Its lines at a width.
    pub fn lines(&self, width: usize) -> Vec<Text> {
        let columns = self.rows.iter().map(Vec::len).max().unwrap_or(0);
        let natural = |c: usize| {
            self.rows
                .iter()
                .filter_map(|row| row.get(c))
                .map(|cell| width_of(&cell.text))
                .max()
                .unwrap_or(0)
        };
        let mut widths: Vec<usize> = (0..columns).map(natural).collect();
        let others: usize = widths
            .iter()
            .enumerate()
            .filter(|(c, _)| *c != self.flexible)
            .map(|(_, w)| w + GAP)
            .sum();
        if let Some(flexible) = widths.get_mut(self.flexible) {
            *flexible = (*flexible).min(width.saturating_sub(others).max(LEAST));
        }
        // Too narrow to read in a column: it stands below the others.
        let room = widths.get(self.flexible).copied().unwrap_or(0);
        if columns > 1 && room < READABLE && room < natural(self.flexible) {
            return self
                .rows
                .iter()
                .flat_map(|row| self.stacked(row, width))
                .collect();
        }
        // A page too narrow even so: the widest of the others is wrapped too.
        let total =
            |widths: &[usize]| widths.iter().sum::<usize>() + GAP * columns.saturating_sub(1);
        while total(&widths) > width {
            let Some(widest) = widths.iter_mut().max_by_key(|w| **w).filter(|w| **w > 4) else {
                break;
            };
            *widest -= 1;
        }
        self.rows
            .iter()
            .flat_map(|row| lines_of(row, &widths))
            .collect()
    }

    /// A row as a line of its short cells, and the long one below.
    fn stacked(&self, row: &[Cell], width: usize) -> Vec<Text> {
        let mut first = Text::new();
        for (_, cell) in row
            .iter()
            .enumerate()
            .filter(|(c, cell)| *c != self.flexible && !cell.text.is_empty())
        {
            if !first.is_empty() {
                first.push(Default::default(), FIRM.to_string().repeat(GAP) + " ");
            }
            first.0.extend(cell.text.0.iter().cloned());
        }
        let mut lines = if first.is_empty() {
            Vec::new()
        } else {
            wrap(&first, width)
        };
        if let Some(cell) = row.get(self.flexible) {
            let below = wrap(&cell.text, width.saturating_sub(GAP).max(1));
            lines.extend(below.into_iter().map(|line| {
                let mut all = Text::new().plain(" ".repeat(GAP));
                all.0.extend(line.0);
                all
            }));
        }
        lines
    }
}

fn lines_of(row: &[Cell], widths: &[usize]) -> Vec<Text> {
    let cells: Vec<Vec<Text>> = row
        .iter()
        .zip(widths)
        .map(|(cell, width)| wrap(&cell.text, (*width).max(1)))
        .collect();
    let height = cells.iter().map(Vec::len).max().unwrap_or(0);
    (0..height)
        .map(|y| {
            let mut line = Text::new();
            for ((cell, lines), width) in row.iter().zip(&cells).zip(widths) {
                let text = lines.get(y).cloned().unwrap_or_default();
                let room = width.saturating_sub(width_of(&text));
                if cell.right {
                    line.push(Default::default(), " ".repeat(room));
                    line.0.extend(text.0);
                } else {
                    line.0.extend(pad(text, *width).0);
                }
                line.push(Default::default(), " ".repeat(GAP));
            }
            line
        })
        .collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    fn shown(width: usize) -> Vec<String> {
        let mut table = Table::new(0);
        table.row(vec![
            "supply neutral open, street side".into(),
            Cell::right("71"),
            "was 38".into(),
        ]);
        table.row(vec![
            "not on the list".into(),
            Cell::right("2"),
            Cell::default(),
        ]);
        table
            .lines(width)
            .iter()
            .map(|line| line.bare().trim_end().to_owned())
            .collect()
    }

    #[test]
    fn numbers_stand_flush_and_the_flexible_column_wraps() {
        assert_eq!(
            shown(60),
            [
                "supply neutral open, street side  71  was 38",
                "not on the list                    2"
            ]
        );
        assert_eq!(
            shown(40),
            [
                "supply neutral open, street   71  was 38",
                "side",
                "not on the list                2"
            ]
        );
        assert_eq!(
            shown(30),
            [
                "71\u{a0}\u{a0} was 38",
                "  supply neutral open, street",
                "  side",
                "2",
                "  not on the list"
            ]
        );
    }
}
