//! Where something stands in the file: byte spans, lines and columns.

use std::ops::Range;

/// A range of bytes of the file.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, Default, PartialOrd, Ord)]
pub struct Span {
    /// First byte.
    pub start: usize,
    /// One past the last byte.
    pub end: usize,
}

impl Span {
    /// The span from `start` up to, not including, `end`.
    pub fn new(start: usize, end: usize) -> Self {
        Self { start, end }
    }

    /// The shortest span that holds both.
    pub fn join(self, other: Self) -> Self {
        Self { start: self.start.min(other.start), end: self.end.max(other.end) }
    }
}

impl From<Range<usize>> for Span {
    fn from(range: Range<usize>) -> Self {
        Self { start: range.start, end: range.end }
    }
}

/// A value together with the place it was read from.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub struct Placed<T> {
    /// The value.
    pub value: T,
    /// Where it stands.
    pub span: Span,
}

impl<T> Placed<T> {
    /// A value read from `span`.
    pub fn new(value: T, span: impl Into<Span>) -> Self {
        Self { value, span: span.into() }
    }
}

/// A position a person can find in an editor. Both counts start at 1; a column is one character.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, Default, PartialOrd, Ord)]
pub struct Position {
    /// Line, from 1.
    pub line: usize,
    /// Column in characters, from 1.
    pub column: usize,
}

/// The position of a byte of `text`; one past the end stands after the last character.
pub fn position(text: &str, byte: usize) -> Position {
    let mut byte = byte.min(text.len());
    while !text.is_char_boundary(byte) {
        byte -= 1;
    }
    let before = &text[..byte];
    let line_start = before.rfind('\n').map_or(0, |i| i + 1);
    Position { line: before.matches('\n').count() + 1, column: before[line_start..].chars().count() + 1 }
}

/// Maps the bytes of a decoded TOML string back to the bytes of the file.
///
/// A fault inside an expression is found in the decoded string; escapes, the quotes and a skipped first line
/// break shift it against the file.
#[derive(Debug, Clone)]
pub(super) struct StringPlaces {
    whole: Span,
    /// File byte of every byte of the decoded string and of its end; empty if the two could not be matched.
    starts: Vec<usize>,
}

impl StringPlaces {
    /// `raw` is the string as it stands in the file, quotes included, from byte `at` on.
    pub(super) fn new(raw: &str, at: usize, decoded: &str) -> Self {
        let whole = Span::new(at, at + raw.len());
        let starts = Self::walk(raw, at, decoded).unwrap_or_default();
        Self { whole, starts }
    }

    fn walk(raw: &str, at: usize, decoded: &str) -> Option<Vec<usize>> {
        let quote = raw.chars().next().filter(|c| *c == '"' || *c == '\'')?;
        let fence = if raw.len() >= 6 && raw.starts_with(&quote.to_string().repeat(3)) { 3 } else { 1 };
        let inner = raw.get(fence..raw.len().checked_sub(fence)?)?;
        let mut here = fence;
        if fence == 3 {
            here += if inner.starts_with("\r\n") { 2 } else { usize::from(inner.starts_with('\n')) };
        }
        let stop = raw.len() - fence;
        let mut starts = Vec::with_capacity(decoded.len() + 1);
        for c in decoded.chars() {
            let mut rest = raw.get(here..stop)?;
            // A backslash before a line break swallows it and all blanks after it.
            while quote == '"' && rest.starts_with('\\') {
                let after = &rest[1..];
                let trimmed = after.trim_start_matches([' ', '\t', '\r', '\n']);
                if !after[..after.len() - trimmed.len()].contains('\n') {
                    break;
                }
                here += rest.len() - trimmed.len();
                rest = trimmed;
            }
            let len = if quote == '"' && rest.starts_with('\\') {
                match rest[1..].chars().next()? {
                    'x' => 4,
                    'u' => 6,
                    'U' => 10,
                    _ => 2,
                }
            } else {
                let raw_char = rest.chars().next()?;
                // A line break may be stored as \r\n and decoded as \n.
                let shortened = rest.starts_with("\r\n") && c == '\n';
                if raw_char != c && !shortened {
                    return None;
                }
                if shortened { 2 } else { raw_char.len_utf8() }
            };
            starts.extend(std::iter::repeat_n(at + here, c.len_utf8()));
            here += len;
        }
        starts.push(at + here.min(stop));
        Some(starts)
    }

    /// The file span of a range of the decoded string.
    pub(super) fn span(&self, range: Range<usize>) -> Span {
        match (self.starts.get(range.start), self.starts.get(range.end)) {
            (Some(&start), Some(&end)) => Span::new(start, end.max(start)),
            _ => self.whole,
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    #[test]
    fn columns_count_characters_not_bytes() {
        let text = "a = 1\nµ° = \"x\"\n";
        assert_eq!(position(text, 0), Position { line: 1, column: 1 });
        assert_eq!(position(text, text.find('=').unwrap()), Position { line: 1, column: 3 });
        assert_eq!(position(text, text.rfind('=').unwrap()), Position { line: 2, column: 4 });
        assert_eq!(position(text, 10_000), Position { line: 3, column: 1 });
    }

    fn places_of(file: &str, decoded: &str, needle: &str) -> String {
        let at = file.find(['"', '\'']).unwrap();
        let places = StringPlaces::new(&file[at..], at, decoded);
        let start = decoded.find(needle).unwrap();
        let span = places.span(start..start + needle.len());
        file[span.start..span.end].to_owned()
    }

    #[test]
    fn escapes_shift_the_place_in_the_file() {
        assert_eq!(places_of(r#"b = "2*t""#, "2*t", "t"), "t");
        assert_eq!(places_of(r#"b = "2\u002At""#, "2*t", "t"), "t");
        assert_eq!(places_of(r#"b = "2\u002At""#, "2*t", "*"), r"\u002A");
        assert_eq!(places_of(r#"b = "\x32\t*t""#, "2\t*t", "*"), "*");
        assert_eq!(places_of("b = '2*t'", "2*t", "2"), "2");
        assert_eq!(places_of("b = \"\"\"\n2*\\\n   t\"\"\"", "2*t", "t"), "t");
        assert_eq!(places_of("b = '''\r\n2*\r\nt'''", "2*\nt", "t"), "t");
    }

    proptest! {
        #[test]
        fn any_pair_of_strings_gives_a_span_inside_the_file(raw in ".{0,20}", decoded in ".{0,20}") {
            let places = StringPlaces::new(&raw, 7, &decoded);
            let span = places.span(0..decoded.len());
            prop_assert!(7 <= span.start && span.start <= span.end && span.end <= 7 + raw.len());
        }
    }
}
