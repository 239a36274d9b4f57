//! A figure as a list of marks on a page, in pixels from the upper left corner, before any file format.

/// A place on the page: to the right, and down.
pub type PagePoint = [f64; 2];

/// How a line is drawn. Weight and dash carry the meaning, so that a copy in grey says the same.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Pen {
    /// Width in pixels.
    pub width: f64,
    /// 0 black, 1 white.
    pub tone: f64,
    /// Lengths of a dash and of the gap after it, in pixels; `None` is drawn through.
    pub dash: Option<[f64; 2]>,
}

impl Pen {
    /// A line drawn through, in black.
    pub const fn solid(width: f64) -> Pen {
        Pen { width, tone: 0.0, dash: None }
    }
}

/// How a text stands to its point.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Align {
    /// To the right of it.
    Start,
    /// About it.
    Middle,
    /// To the left of it.
    End,
}

/// A line of text.
#[derive(Debug, Clone, PartialEq)]
pub struct Lettering {
    /// Point on the base line.
    pub at: PagePoint,
    /// The words.
    pub text: String,
    /// Size of the em in pixels.
    pub size: f64,
    /// Where the point is along the text.
    pub align: Align,
}

/// One thing drawn.
#[derive(Debug, Clone, PartialEq)]
pub enum Mark {
    /// A line.
    Line(Vec<PagePoint>, Pen),
    /// A filled polygon of a tone.
    Area(Vec<PagePoint>, f64),
    /// A text.
    Text(Lettering),
}

/// A finished page.
#[derive(Debug, Clone, PartialEq)]
pub struct Drawing {
    /// Width in pixels.
    pub width: u32,
    /// Height in pixels.
    pub height: u32,
    /// What is on it, the lowest first.
    pub marks: Vec<Mark>,
}

/// Cuts a line into its dashes; the last one ends with the line.
pub(crate) fn dashes(line: &[PagePoint], [dash, gap]: [f64; 2]) -> Vec<Vec<PagePoint>> {
    let length: f64 = line.windows(2).map(|w| distance(w[0], w[1])).sum();
    if length <= 2.0 * dash + gap {
        return vec![line.to_vec()];
    }
    // A whole number of gaps, so that the line begins and ends with a dash.
    let count = ((length - dash) / (dash + gap)).round().max(1.0);
    let stretch = length / (count * (dash + gap) + dash);
    let (dash, gap) = (dash * stretch, gap * stretch);
    let mut out = Vec::new();
    let mut current = vec![line[0]];
    let (mut drawing, mut left) = (true, dash);
    for w in line.windows(2) {
        let (mut a, b) = (w[0], w[1]);
        loop {
            let rest = distance(a, b);
            if rest < left {
                left -= rest;
                if drawing {
                    current.push(b);
                }
                break;
            }
            let part = left / rest;
            a = [a[0] + part * (b[0] - a[0]), a[1] + part * (b[1] - a[1])];
            if drawing {
                current.push(a);
                out.push(std::mem::take(&mut current));
            } else {
                current = vec![a];
            }
            drawing = !drawing;
            left = if drawing { dash } else { gap };
        }
    }
    if drawing && current.len() > 1 {
        out.push(current);
    }
    out
}

pub(crate) fn distance(a: PagePoint, b: PagePoint) -> f64 {
    (b[0] - a[0]).hypot(b[1] - a[1])
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn dashes_begin_and_end_with_the_line() {
        let line = [[0.0, 0.0], [50.0, 0.0], [50.0, 33.0]];
        let parts = dashes(&line, [8.0, 5.0]);
        assert_eq!(parts.len(), 7);
        assert!(distance(parts[0][0], line[0]) < 1e-12);
        assert!(distance(*parts[6].last().unwrap(), line[2]) < 1e-9);
        let drawn: f64 = parts.iter().flat_map(|p| p.windows(2).map(|w| distance(w[0], w[1]))).sum();
        assert!((drawn / 83.0 - 56.0 / 86.0).abs() < 1e-9, "{drawn}");
    }
}
