//! The section with its conditions: outline, held sides with their levels, insulated sides hatched, walls, probes.

use super::clip::Window;
use super::drawing::{Align, Drawing, Lettering, Mark, PagePoint, Pen};
use super::label::Box2;
use super::number::tidy;
use super::page::{CaptionLine, Margins, Page, lettering};
use super::render::text_width;
use super::{Sheet, Subject, with_unit};
use sc_core::outline::{Containment, Outline, Point};

pub(super) const HELD: Pen = Pen::solid(4.5);
pub(super) const INSULATED: Pen = Pen::solid(1.6);
const HELD_WALL: Pen = Pen::solid(5.5);
const WALL: Pen = Pen::solid(3.2);
const HATCH: Pen = Pen { width: 0.8, tone: 0.25, dash: None };
const LEADER: Pen = Pen { width: 0.8, tone: 0.25, dash: None };
/// Distance and length of hatching strokes, in em.
const HATCH_STEP: f64 = 0.75;
const HATCH_LENGTH: f64 = 0.55;
/// What covering a pixel of the outline costs a label, for one of a line of the net.
const OUTLINE: f64 = 6.0;
/// Line spacing of labels, in em.
const LABEL_LEADING: f64 = 1.2;
/// How far a side to infinity is drawn beyond its vertex, in sizes of the section.
const RUN_OFF: f64 = 0.8;

/// A label on several lines.
#[derive(Debug, Clone)]
struct Label {
    lines: Vec<String>,
    width: f64,
    height: f64,
}

impl Label {
    fn new(lines: Vec<String>, em: f64) -> Label {
        let width = lines.iter().map(|l| text_width(l, em)).fold(0.0, f64::max) + 0.5 * em;
        let height = lines.len() as f64 * LABEL_LEADING * em;
        Label { lines, width, height }
    }

    /// Half its extent along a direction.
    fn half_along(&self, direction: [f64; 2]) -> f64 {
        0.5 * (self.width * direction[0].abs() + self.height * direction[1].abs())
    }

    fn draw(&self, page: &mut Page, place: Box2, size: f64) {
        for (i, line) in self.lines.iter().enumerate() {
            let y = place.low[1] + (i as f64 + 0.82) * LABEL_LEADING * size;
            let at = [place.middle()[0], y];
            let text = line.clone();
            page.marks.push(Mark::Text(Lettering { at, text, size, align: Align::Middle }));
        }
        page.labels.take(place);
    }
}

/// Neighbouring sides of one electrode, with the side that bears the label.
#[derive(Debug)]
struct Held {
    electrode: usize,
    bearer: usize,
    sides: Vec<usize>,
}

/// The figure of a section with its conditions.
pub fn section_figure(subject: &Subject<'_>, sheet: &Sheet) -> Drawing {
    let mut page = page_for(subject, sheet);
    draw_conditions(subject, sheet, &mut page);
    draw_probes(subject, &mut page);
    let mut caption = Vec::new();
    let em = page.em;
    caption.extend(title(subject, em));
    let line = |text: String, sample| CaptionLine { text, size: em, sample };
    caption.push(line(format!("held side, with its {}", subject.words.level), Some(HELD)));
    if (0..subject.outline.n()).any(|k| subject.section.electrode_of_side(k).is_none()) {
        caption.push(line("insulated side, hatched outside".to_owned(), Some(INSULATED)));
    }
    caption.extend(subject.fabric.map(|f| line(f.section_words(), None)));
    page.finish(&subject.scale_unit(), &caption)
}

/// The title as the first line of a caption.
pub(super) fn title(subject: &Subject<'_>, em: f64) -> Option<CaptionLine> {
    let text = subject.title?.to_owned();
    Some(CaptionLine { text, size: 1.25 * em, sample: None })
}

/// An empty page for a subject, with room for its labels.
pub(super) fn page_for(subject: &Subject<'_>, sheet: &Sheet) -> Page {
    let width = sheet.page_width();
    let em = lettering(f64::from(width));
    let outline = subject.outline;
    let window = sheet.window.or_else(|| whole(outline));
    let unit = Window { low: Point::new(0.0, 0.0), high: Point::new(1.0, 1.0) };
    let window = window.unwrap_or(unit);
    let size = window.high - window.low;
    let window = window.grown(1e-9 * size.norm());
    let base = 1.6 * em;
    let mut margins = Margins { left: base, right: base, above: base, below: base };
    for held in held_runs(subject) {
        let label = label_of(subject, held.electrode, em);
        let normal = outward(outline, held.bearer);
        let need = 2.0 * label.half_along(normal) + 2.4 * em;
        let margin = if normal[0].abs() > normal[1].abs() {
            if normal[0] < 0.0 { &mut margins.left } else { &mut margins.right }
        } else if normal[1] < 0.0 {
            &mut margins.above
        } else {
            &mut margins.below
        };
        *margin = margin.max(need);
    }
    Page::new(width, window, margins)
}

/// The window of all finite vertices and the beginnings of the sides that run off; where the section opens from such
/// a side, also as far into it.
fn whole(outline: &Outline) -> Option<Window> {
    let run_off = RUN_OFF * outline.size();
    Window::around((0..outline.n()).flat_map(|k| {
        let (a, b) = ends(outline, k, run_off);
        let endless = outline.side_length(k).is_none();
        let inward = outline.side_direction(k) * Point::new(0.0, run_off);
        let opens = move |z: Point| endless && outline.contains(z) == Containment::Inside;
        [a, b].into_iter().chain([a + inward, b + inward].into_iter().filter(move |&z| opens(z)))
    }))
}

/// A side from end to end; one that runs off is cut after a length.
fn ends(outline: &Outline, side: usize, run_off: f64) -> (Point, Point) {
    let d = outline.side_direction(side) * run_off;
    match (outline.point(side), outline.point(side + 1)) {
        (Some(a), Some(b)) => (a, b),
        (Some(a), None) => (a, a + d),
        (None, Some(b)) => (b - d, b),
        // No outline has such a side.
        (None, None) => (Point::new(f64::NAN, f64::NAN), Point::new(f64::NAN, f64::NAN)),
    }
}

/// Outward normal of a side on the page, where y points down.
fn outward(outline: &Outline, side: usize) -> [f64; 2] {
    // The section is on the left: outward is a quarter turn to the right.
    let d = outline.side_direction(side) * Point::new(0.0, -1.0);
    [d.re, -d.im]
}

/// Whether a side has the section on its other face as well.
fn is_wall(outline: &Outline, side: usize) -> bool {
    let (Some(a), Some(b)) = (outline.point(side), outline.point(side + 1)) else { return false };
    let middle = 0.5 * (a + b);
    let close = 1e-9 * outline.size();
    (0..outline.n()).filter(|&j| j != side).any(|j| {
        let (Some(p), Some(q)) = (outline.point(j), outline.point(j + 1)) else { return false };
        let d = outline.side_direction(j);
        let relative = (middle - p) * d.conj();
        let opposite = (outline.side_direction(side) * d.conj()).re < -0.5;
        opposite
            && relative.im.abs() <= close
            && relative.re >= -close
            && relative.re <= (q - p).norm() + close
    })
}

fn held_runs(subject: &Subject<'_>) -> Vec<Held> {
    let section = subject.section;
    let outline = subject.outline;
    let n = outline.n();
    let electrode = |k: usize| section.electrode_of_side(k % n);
    let first = (0..n).find(|&k| electrode(k) != electrode(k + n - 1)).unwrap_or(0);
    let mut runs: Vec<Held> = Vec::new();
    let mut before = None;
    for k in (first..first + n).map(|k| k % n) {
        if let Some(e) = electrode(k) {
            match runs.last_mut() {
                Some(run) if before == Some(e) => run.sides.push(k),
                _ => runs.push(Held { electrode: e, bearer: k, sides: vec![k] }),
            }
        }
        before = electrode(k);
    }
    for run in &mut runs {
        let length = |k: usize| outline.side_length(k).unwrap_or(outline.size());
        run.bearer =
            run.sides.iter().copied().fold(run.bearer, |a, b| if length(b) > length(a) { b } else { a });
    }
    runs
}

fn label_of(subject: &Subject<'_>, electrode: usize, em: f64) -> Label {
    let level = subject.section.levels().get(electrode).copied().unwrap_or(0.0);
    let value = with_unit(&tidy(level, 8), subject.words.level_unit);
    let name = subject.electrodes.get(electrode).map_or("", String::as_str);
    let mut lines: Vec<String> = Vec::new();
    // Names in two lines at most: an even break between words.
    let words: Vec<&str> = name.split_whitespace().collect();
    if name.chars().count() <= 16 || words.len() < 2 {
        lines.extend((!words.is_empty()).then(|| words.join(" ")));
    } else {
        let split = (1..words.len())
            .min_by_key(|&i| words[..i].join(" ").len().max(words[i..].join(" ").len()))
            .unwrap_or(1);
        lines.push(words[..split].join(" "));
        lines.push(words[split..].join(" "));
    }
    lines.push(value);
    Label::new(lines, em)
}

/// Draws the outline with its conditions and all lettering that belongs to it.
pub(super) fn draw_conditions(subject: &Subject<'_>, sheet: &Sheet, page: &mut Page) {
    let section = subject.section;
    let outline = subject.outline;
    let n = outline.n();
    let run_off = 4.0 * ((page.window.high - page.window.low).norm() + outline.size());
    let weight = (page.em / 15.0).max(0.6);
    let scaled = |pen: Pen| Pen { width: pen.width * weight, ..pen };
    for k in 0..n {
        let (a, b) = ends(outline, k, run_off);
        let held = section.electrode_of_side(k).is_some();
        let pen = match (is_wall(outline, k), held) {
            (false, true) => HELD,
            (false, false) => INSULATED,
            (true, true) => HELD_WALL,
            (true, false) => WALL,
        };
        let parts = page.line(&[a, b], scaled(pen));
        for part in &parts {
            page.labels.avoid(part, OUTLINE);
        }
        if !held && !is_wall(outline, k) {
            parts.iter().for_each(|part| hatch(outline, k, part, page));
        }
    }
    for held in held_runs(subject) {
        letter_held(subject, &held, run_off, page);
    }
    if sheet.vertex_numbers {
        number_vertices(outline, page);
    }
}

/// Short strokes outside an insulated side.
fn hatch(outline: &Outline, side: usize, part: &[PagePoint], page: &mut Page) {
    let (Some(&a), Some(&b)) = (part.first(), part.last()) else { return };
    let em = page.em;
    let length = (b[0] - a[0]).hypot(b[1] - a[1]);
    let count = (length / (HATCH_STEP * em)).floor();
    if count < 1.0 {
        return;
    }
    let normal = outward(outline, side);
    let d = [(b[0] - a[0]) / length, (b[1] - a[1]) / length];
    // Strokes lean back at 45 degrees.
    let s = HATCH_LENGTH * em * std::f64::consts::FRAC_1_SQRT_2;
    let stroke = [s * (normal[0] - d[0]), s * (normal[1] - d[1])];
    for i in 0..count as usize {
        let t = length * (i as f64 + 0.5) / count;
        let from = [a[0] + d[0] * t, a[1] + d[1] * t];
        let to = [from[0] + stroke[0], from[1] + stroke[1]];
        // In a narrow notch the stroke would reach into the section again.
        let middle = [0.5 * (from[0] + to[0]), 0.5 * (from[1] + to[1])];
        let inside = |p| outline.contains(page.in_plane(p)) == Containment::Inside;
        if !(inside(to) || inside(middle)) {
            page.labels.avoid(&[from, to], 1.0);
            page.marks.push(Mark::Line(vec![from, to], HATCH));
        }
    }
}

/// The name and level of a held run, outside its side, with a leader where it cannot stand beside it.
fn letter_held(subject: &Subject<'_>, held: &Held, run_off: f64, page: &mut Page) {
    let outline = subject.outline;
    let em = page.em;
    let label = label_of(subject, held.electrode, em);
    let mut anchors = Vec::new();
    let mut places = Vec::new();
    let mut sides = vec![held.bearer];
    sides.extend(held.sides.iter().copied().filter(|&k| k != held.bearer));
    for (gap, inward) in [(0.75, 1.0), (2.2, 1.0), (4.5, 1.0), (1.2, -1.0), (3.0, -1.0)] {
        for &side in &sides {
            let (a, b) = ends(outline, side, run_off);
            let Some(part) = page.window.clip(&[a, b]).pop() else { continue };
            let (a, b) = (page.at(part[0]), page.at(part[part.len() - 1]));
            let normal = outward(outline, side).map(|v| v * inward);
            let off = gap * em + label.half_along(normal);
            for t in [0.5, 0.35, 0.65, 0.2, 0.8] {
                let anchor = [a[0] + t * (b[0] - a[0]), a[1] + t * (b[1] - a[1])];
                let middle = [anchor[0] + off * normal[0], anchor[1] + off * normal[1]];
                anchors.push((anchor, gap));
                places.push(Box2::about(middle, label.width, label.height));
            }
        }
    }
    let Some((i, place)) = page.labels.best(places, 0.5) else { return };
    let (anchor, gap) = anchors[i];
    if gap > 1.0 {
        let toward = place.nearest(anchor);
        page.marks.push(Mark::Line(vec![anchor, toward], LEADER));
    }
    if page.labels.cost(&place) > 1.0 {
        page.marks.push(Mark::Area(place.corners().to_vec(), 1.0));
    }
    label.draw(page, place, em);
}

/// Places around a point, nearest first.
fn around(at: PagePoint, label: &Label, gap: f64) -> Vec<Box2> {
    let h = std::f64::consts::FRAC_1_SQRT_2;
    let directions = [[h, -h], [-h, -h], [h, h], [-h, h], [1.0, 0.0], [-1.0, 0.0], [0.0, -1.0], [0.0, 1.0]];
    let place = |d: [f64; 2], gap: f64| {
        let along =
            |i: usize, half: f64| at[i] + d[i] * gap + d[i].signum() * if d[i] == 0.0 { 0.0 } else { half };
        Box2::about([along(0, 0.5 * label.width), along(1, 0.5 * label.height)], label.width, label.height)
    };
    [gap, 2.5 * gap].into_iter().flat_map(|g| directions.map(|d| place(d, g))).collect()
}

fn draw_probes(subject: &Subject<'_>, page: &mut Page) {
    let em = page.em;
    let marked: Vec<_> = (subject.probes.iter()).filter(|(_, z)| page.window.contains(*z)).collect();
    for (_, z) in &marked {
        let at = page.at(*z);
        let circle = |r: f64| -> Vec<PagePoint> {
            (0..=24)
                .map(|i| f64::from(i) * std::f64::consts::TAU / 24.0)
                .map(|t| [at[0] + r * em * t.cos(), at[1] + r * em * t.sin()])
                .collect()
        };
        page.marks.push(Mark::Area(circle(0.28), 1.0));
        page.marks.push(Mark::Line(circle(0.28), Pen::solid(1.2)));
        page.marks.push(Mark::Area(circle(0.09), 0.0));
        page.labels.take(Box2::about(at, 0.6 * em, 0.6 * em));
    }
    for (name, z) in &marked {
        let Some(name) = name else { continue };
        let label = Label::new(vec![(*name).to_owned()], em);
        if let Some((_, place)) = page.labels.best(around(page.at(*z), &label, 0.45 * em), 1.0) {
            page.marks.push(Mark::Area(place.corners().to_vec(), 1.0));
            label.draw(page, place, em);
        }
    }
}

fn number_vertices(outline: &Outline, page: &mut Page) {
    let size = 0.8 * page.em;
    for k in 0..outline.n() {
        let Some(z) = outline.point(k).filter(|z| page.window.contains(*z)) else { continue };
        let label = Label::new(vec![outline.given_vertex(k).0.to_string()], size);
        if let Some((_, place)) = page.labels.best(around(page.at(z), &label, 0.35 * page.em), 1.0) {
            label.draw(page, place, size);
        }
    }
}
