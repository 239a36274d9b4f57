//! Plain tables: columns parted by blanks, numbers to the right, words to the left.

use unicode_width::UnicodeWidthStr;

/// A table; its first row is the heading.
#[derive(Debug, Clone, Default)]
pub struct Table {
    rows: Vec<Vec<String>>,
}

/// Blanks between columns.
const GAP: &str = "  ";
/// Blanks before a row.
const INDENT: &str = "  ";

impl Table {
    /// A table with a heading.
    pub fn new<const N: usize>(heading: [&str; N]) -> Self {
        Self { rows: vec![heading.map(str::to_owned).to_vec()] }
    }

    /// A table with a heading of any length.
    pub fn with_heading(heading: Vec<String>) -> Self {
        Self { rows: vec![heading] }
    }

    /// Adds a row.
    pub fn row(&mut self, cells: impl IntoIterator<Item = String>) {
        self.rows.push(cells.into_iter().collect());
    }

    /// The table as text. A column is set to the right if all its cells look like numbers.
    pub fn render(&self) -> String {
        let columns = self.rows.iter().map(Vec::len).max().unwrap_or(0);
        let body = || self.rows.iter().skip(1);
        let layout: Vec<(usize, bool)> = (0..columns)
            .map(|c| {
                let width = self.rows.iter().filter_map(|r| r.get(c)).map(|t| t.width()).max().unwrap_or(0);
                (width, body().filter_map(|r| r.get(c)).all(|t| is_numeric(t)))
            })
            .collect();
        let mut out = String::new();
        for row in &self.rows {
            let mut line = INDENT.to_owned();
            for (cell, &(width, right)) in row.iter().zip(&layout) {
                let pad = " ".repeat(width - cell.width());
                if line.len() > INDENT.len() {
                    line.push_str(GAP);
                }
                if right {
                    line.push_str(&pad);
                }
                line.push_str(cell);
                if !right {
                    line.push_str(&pad);
                }
            }
            out.push_str(line.trim_end());
            out.push('\n');
        }
        out
    }
}

fn is_numeric(cell: &str) -> bool {
    cell.is_empty()
        || matches!(cell, "-" | "infinite" | "-infinite" | "yes" | "no")
        || cell.starts_with(|c: char| c.is_ascii_digit())
        || (cell.starts_with('-') && cell[1..].starts_with(|c: char| c.is_ascii_digit()))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn numbers_stand_to_the_right_and_words_to_the_left() {
        let mut table = Table::new(["side", "flux"]);
        table.row(["bed".to_owned(), "-12.5".to_owned()]);
        table.row(["Böschung".to_owned(), "3.0".to_owned()]);
        assert_eq!(table.render(), "  side       flux\n  bed       -12.5\n  Böschung    3.0\n");
    }
}
