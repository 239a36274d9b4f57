//! Plain tables: columns parted by blanks, numbers below one another, words to the left.

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

    /// The table as text. In a column of numbers the decimal points stand below one another.
    pub fn render(&self) -> String {
        let columns = self.rows.iter().map(Vec::len).max().unwrap_or(0);
        let columns: Vec<Column> = (0..columns).map(|c| Column::new(&self.rows, c)).collect();
        let mut out = String::new();
        for (r, row) in self.rows.iter().enumerate() {
            let mut line = INDENT.to_owned();
            for (c, (cell, column)) in row.iter().zip(&columns).enumerate() {
                if c > 0 {
                    line.push_str(GAP);
                }
                column.set(cell, r == 0, &mut line);
            }
            out.push_str(line.trim_end());
            out.push('\n');
        }
        out
    }
}

/// How a column is set.
struct Column {
    width: usize,
    /// For numbers: width of what stands behind the digits of the whole part.
    behind: Option<usize>,
}

impl Column {
    fn new(rows: &[Vec<String>], c: usize) -> Self {
        let cells = || rows.iter().skip(1).filter_map(|r| r.get(c)).map(String::as_str);
        let heading = rows.first().and_then(|r| r.get(c)).map_or(0, |t| t.width());
        if !cells().all(is_numeric) {
            return Self {
                width: cells().map(UnicodeWidthStr::width).max().unwrap_or(0).max(heading),
                behind: None,
            };
        }
        let behind = cells().map(|t| t.width() - whole(t)).max().unwrap_or(0);
        let before = cells().map(whole).max().unwrap_or(0);
        let words = cells().filter(|t| !has_digits(t)).map(UnicodeWidthStr::width).max().unwrap_or(0);
        Self { width: heading.max(words).max(before + behind), behind: Some(behind) }
    }

    fn set(&self, cell: &str, is_heading: bool, line: &mut String) {
        let blanks = |n: usize| " ".repeat(n);
        let room = self.width - cell.width();
        match self.behind {
            None => {
                line.push_str(cell);
                line.push_str(&blanks(room));
            }
            Some(behind) if !is_heading && has_digits(cell) => {
                let after = behind - (cell.width() - whole(cell));
                line.push_str(&blanks(room - after));
                line.push_str(cell);
                line.push_str(&blanks(after));
            }
            Some(_) => {
                line.push_str(&blanks(room));
                line.push_str(cell);
            }
        }
    }
}

/// Width of a number up to its decimal point, exponent or unit; of a word, none.
fn whole(cell: &str) -> usize {
    if has_digits(cell) {
        cell.find(|c: char| !c.is_ascii_digit() && c != '-').unwrap_or(cell.len())
    } else {
        cell.width()
    }
}

fn has_digits(cell: &str) -> bool {
    cell.trim_start_matches('-').starts_with(|c: char| c.is_ascii_digit())
}

/// A number, or a word in the place of one.
fn is_numeric(cell: &str) -> bool {
    matches!(cell, "" | "-" | "infinite" | "-infinite") || has_digits(cell)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn decimal_points_stand_below_one_another() {
        let mut table = Table::new(["side", "flux"]);
        table.row(["bed".to_owned(), "-12.5".to_owned()]);
        table.row(["Böschung".to_owned(), "3".to_owned()]);
        table.row(["end".to_owned(), "-".to_owned()]);
        let expected = "  side       flux\n  bed       -12.5\n  Böschung    3\n  end           -\n";
        assert_eq!(table.render(), expected);
    }
}
