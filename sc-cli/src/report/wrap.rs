//! Paragraphs of a width that a terminal and a page hold.

use unicode_width::UnicodeWidthStr;

/// Columns of a line.
const WIDTH: usize = 96;

/// Words in lines, the first one after `first`, the others after as many blanks.
pub fn wrapped(first: &str, text: &str) -> String {
    let indent = " ".repeat(first.width());
    let mut out = String::new();
    let mut line = first.to_owned();
    let mut empty = true;
    for word in text.split_whitespace() {
        if !empty && line.width() + 1 + word.width() > WIDTH {
            out.push_str(&line);
            out.push('\n');
            line.clone_from(&indent);
            empty = true;
        }
        if !empty {
            line.push(' ');
        }
        line.push_str(word);
        empty = false;
    }
    out.push_str(&line);
    out.push('\n');
    out
}

/// A paragraph for each text, after a dash.
pub fn bullets<T: AsRef<str>>(texts: &[T]) -> String {
    texts.iter().map(|t| wrapped("  - ", t.as_ref())).collect()
}
