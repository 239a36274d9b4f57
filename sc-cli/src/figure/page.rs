//! The page: the section at one scale for both directions, with room for labels around it and for the caption below.

use super::clip::Window;
use super::drawing::{Align, Drawing, Lettering, Mark, PagePoint, Pen};
use super::label::{Box2, Labels};
use super::number::tidy;
use super::render::text_width;
use sc_core::outline::Point;

/// The section is drawn at most this many times as high as the page is wide, and made narrower for it.
const TALLEST: f64 = 0.95;
/// Em of the lettering for a page 1000 pixels wide, and its limits.
const LETTERING: f64 = 15.0;
const LETTERING_LIMITS: (f64, f64) = (9.0, 40.0);
/// Line spacing in em.
const LEADING: f64 = 1.45;

/// Space that the labels around the section need, in pixels.
#[derive(Debug, Clone, Copy, Default)]
pub(super) struct Margins {
    pub(super) left: f64,
    pub(super) right: f64,
    pub(super) above: f64,
    pub(super) below: f64,
}

/// A line of the caption: words, perhaps after a sample of a pen.
#[derive(Debug, Clone)]
pub(super) struct CaptionLine {
    pub(super) text: String,
    pub(super) size: f64,
    pub(super) sample: Option<Pen>,
}

/// A page being drawn.
#[derive(Debug)]
pub(super) struct Page {
    width: f64,
    /// Em of the lettering.
    pub(super) em: f64,
    /// What is drawn of the plane.
    pub(super) window: Window,
    /// Pixels per unit of length.
    pub(super) scale: f64,
    origin: PagePoint,
    frame: Box2,
    pub(super) marks: Vec<Mark>,
    pub(super) labels: Labels,
}

/// Em for a page of a width.
pub(super) fn lettering(width: f64) -> f64 {
    (LETTERING * width / 1000.0).clamp(LETTERING_LIMITS.0, LETTERING_LIMITS.1)
}

impl Page {
    pub(super) fn new(width: u32, window: Window, margins: Margins) -> Page {
        let width = f64::from(width);
        let size = window.high - window.low;
        let (w, h) = (size.re.max(f64::MIN_POSITIVE), size.im.max(f64::MIN_POSITIVE));
        let room = (width - margins.left - margins.right).max(0.3 * width);
        let scale = (room / w).min(TALLEST * width / h);
        let left = margins.left + 0.5 * (room - w * scale);
        let origin = [left, margins.above + h * scale];
        let frame = Box2 { low: [0.0, 0.0], high: [width, margins.above + h * scale + margins.below] };
        Page {
            width,
            em: lettering(width),
            window,
            scale,
            origin,
            frame,
            marks: Vec::new(),
            labels: Labels::new(frame),
        }
    }

    pub(super) fn at(&self, z: Point) -> PagePoint {
        let d = z - self.window.low;
        [self.origin[0] + d.re * self.scale, self.origin[1] - d.im * self.scale]
    }

    /// The point of the plane at a place on the page.
    pub(super) fn in_plane(&self, p: PagePoint) -> Point {
        let d = [p[0] - self.origin[0], self.origin[1] - p[1]];
        self.window.low + Point::new(d[0], d[1]) / self.scale
    }

    /// Draws a line of the plane, cut at the window, and returns its parts on the page.
    pub(super) fn line(&mut self, line: &[Point], pen: Pen) -> Vec<Vec<PagePoint>> {
        let parts: Vec<Vec<PagePoint>> =
            (self.window.clip(line).iter()).map(|part| part.iter().map(|z| self.at(*z)).collect()).collect();
        self.marks.extend(parts.iter().map(|part| Mark::Line(part.clone(), pen)));
        parts
    }

    pub(super) fn text(&mut self, text: &str, at: PagePoint, align: Align) {
        self.marks.push(Mark::Text(Lettering { at, text: text.to_owned(), size: self.em, align }));
    }

    /// A text on a white ground about a point.
    pub(super) fn framed_text(&mut self, text: &str, around: Box2, size: f64) {
        self.marks.push(Mark::Area(around.corners().to_vec(), 1.0));
        let middle = around.middle();
        let at = [middle[0], middle[1] + 0.36 * size];
        self.marks.push(Mark::Text(Lettering { at, text: text.to_owned(), size, align: Align::Middle }));
    }

    /// The scale bar below the section: four divisions, the ends lettered.
    fn scale_bar(&mut self, top: f64, unit: &str) {
        let length = round_below(0.3 * self.width / self.scale);
        let (left, height) = (0.04 * self.width, 0.35 * self.em);
        let part = length * self.scale / 4.0;
        let edge = Pen::solid(0.8);
        for i in 0..4 {
            let x = left + part * f64::from(i);
            let y = top;
            let corners = vec![[x, y], [x + part, y], [x + part, y + height], [x, y + height], [x, y]];
            if i % 2 == 0 {
                self.marks.push(Mark::Area(corners.clone(), 0.0));
            }
            self.marks.push(Mark::Line(corners, edge));
        }
        let below = top + height + 1.15 * self.em;
        self.text("0", [left, below], Align::Middle);
        self.text(&tidy(0.5 * length, 3), [left + 2.0 * part, below], Align::Middle);
        let end = [left + 4.0 * part, below];
        let last = tidy(length, 3);
        // The number stands below the end of the bar, its unit after it.
        self.text(&last, end, Align::Middle);
        if !unit.is_empty() {
            let after = end[0] + 0.5 * text_width(&last, self.em) + 0.3 * self.em;
            self.text(unit, [after, below], Align::Start);
        }
    }

    /// Puts the scale bar and the caption below the section.
    pub(super) fn finish(mut self, length_unit: &str, caption: &[CaptionLine]) -> Drawing {
        let mut y = self.frame.high[1] + 0.4 * self.em;
        self.scale_bar(y, length_unit);
        y += 2.2 * self.em;
        let left = 0.04 * self.width;
        let room = 0.92 * self.width;
        for line in caption {
            let indent = if line.sample.is_some() { 4.0 * line.size } else { 0.0 };
            for (i, words) in wrapped(&line.text, line.size, room - indent).iter().enumerate() {
                y += LEADING * line.size;
                if let Some(pen) = line.sample.filter(|_| i == 0) {
                    let level = y - 0.33 * line.size;
                    let sample = vec![[left, level], [left + 3.2 * line.size, level]];
                    self.marks.push(Mark::Line(sample, pen));
                }
                let text = words.clone();
                let at = [left + indent, y];
                self.marks.push(Mark::Text(Lettering { at, text, size: line.size, align: Align::Start }));
            }
        }
        y += self.em;
        let mut marks = vec![Mark::Area(
            vec![[0.0, 0.0], [self.width, 0.0], [self.width, y.ceil()], [0.0, y.ceil()]],
            1.0,
        )];
        marks.extend(self.marks);
        Drawing { width: self.width as u32, height: y.ceil() as u32, marks }
    }
}

/// The largest of 1, 2, 4, 5 times a power of ten that is not above a length.
fn round_below(length: f64) -> f64 {
    if !(length.is_finite() && length > 0.0) {
        return 1.0;
    }
    let decade = 10_f64.powf(length.log10().floor());
    [5.0, 4.0, 2.0, 1.0]
        .into_iter()
        .map(|m| m * decade)
        .find(|l| *l <= length * (1.0 + 1e-9))
        .unwrap_or(decade)
}

/// Words on lines no wider than the room; a word wider than that has a line of its own.
fn wrapped(text: &str, size: f64, room: f64) -> Vec<String> {
    let mut lines: Vec<String> = Vec::new();
    for word in text.split_whitespace() {
        match lines.last_mut() {
            Some(line) if text_width(&format!("{line} {word}"), size) <= room => {
                line.push(' ');
                line.push_str(word);
            }
            _ => lines.push(word.to_owned()),
        }
    }
    lines
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn scale_bars_have_round_lengths() {
        for (length, want) in [(0.37, 0.2), (1.0, 1.0), (9.9, 5.0), (4400.0, 4000.0), (f64::NAN, 1.0)] {
            assert!((round_below(length) - want).abs() < 1e-12 * want, "{length}");
        }
    }

    #[test]
    fn captions_are_wrapped_between_words() {
        let lines = wrapped("a flow net with many words in its caption", 15.0, 120.0);
        assert!(lines.len() > 2);
        assert!(lines.iter().all(|l| text_width(l, 15.0) <= 120.0), "{lines:?}");
    }
}
