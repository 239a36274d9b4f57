//! Where the probes of a section file lie: points inside, and distances along sides.

use super::objection::{Objection, ProbeFault};
use super::side_words;
use crate::input::{Fault, Placed, Probe, ProbePlace, SectionFile};
use sc_core::outline::{COINCIDENCE, Containment, Outline, Point};

/// A place in the closed section.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Place {
    /// A point, inside or on a side.
    At(Point),
    /// A distance along a side (walking index) from its start.
    OnSide {
        /// The side.
        side: usize,
        /// The distance.
        s: f64,
    },
}

/// A probe and its places in order.
#[derive(Debug, Clone, PartialEq)]
pub struct PlacedProbe {
    /// Its name, if it has one.
    pub name: Option<String>,
    /// One place for a point, `count` places for each side of a name.
    pub places: Vec<Place>,
}

/// More points than this in one file are taken for a slip.
const MAX_POINTS: usize = 2_000_000;

/// Finds the places of all probes.
///
/// # Errors
/// Every probe that lies nowhere, or on two faces at once.
pub(super) fn place_probes(
    file: &SectionFile,
    outline: &Outline,
) -> Result<Vec<PlacedProbe>, Vec<Fault<Objection>>> {
    let mut placed: Vec<PlacedProbe> = Vec::new();
    let mut faults = Vec::new();
    let mut room = MAX_POINTS;
    for (k, probe) in file.probes.iter().enumerate() {
        let search = Search { file, outline, probe, words: words(k, probe) };
        match search.places() {
            Ok(places) if places.len() > room => {
                let kind = ProbeFault::TooMany { probe: search.words, limit: MAX_POINTS };
                faults.push(Fault::new(Objection::from(kind), probe.span).hint("ask for fewer points"));
                break;
            }
            Ok(places) => {
                room -= places.len();
                placed.push(PlacedProbe { name: probe.name.as_ref().map(|n| n.value.clone()), places });
            }
            Err(fault) => faults.push(*fault),
        }
    }
    if faults.is_empty() { Ok(placed) } else { Err(faults) }
}

fn words(k: usize, probe: &Probe) -> String {
    match &probe.name {
        Some(name) => format!("the probe \"{}\"", name.value),
        None => format!("probe {k}"),
    }
}

struct Search<'a> {
    file: &'a SectionFile,
    outline: &'a Outline,
    probe: &'a Probe,
    words: String,
}

/// Boxed, because it is large beside what is found.
type Found<T> = Result<T, Box<Fault<Objection>>>;

impl Search<'_> {
    fn places(&self) -> Found<Vec<Place>> {
        match &self.probe.place {
            ProbePlace::Point { at, side: None } => Ok(vec![self.point(at)?]),
            ProbePlace::Point { at, side: Some(side) } => Ok(vec![self.point_on(at, side)?]),
            ProbePlace::Along { side, count, from, to } => {
                let ends = [from, to].map(|p| p.as_ref().map(|p| p.value));
                let mut places = Vec::new();
                for k in self.sides_named(side) {
                    places.extend(self.along(k, ends, *count)?);
                }
                Ok(places)
            }
        }
    }

    /// Distance below which a point and the boundary are one.
    fn same(&self) -> f64 {
        COINCIDENCE * self.outline.size()
    }

    fn point(&self, at: &Placed<Point>) -> Found<Place> {
        let z = at.value;
        let nearest = self.outline.nearest_boundary(z);
        match self.outline.contains(z) {
            Containment::Inside => Ok(Place::At(z)),
            Containment::OnSide(_) => self.one_face(at),
            Containment::Outside if nearest.distance <= self.same() => self.one_face(at),
            Containment::Outside => {
                let distance = self.length(nearest.distance);
                let probe = self.words.clone();
                let kind = ProbeFault::Outside { probe, x: z.re, y: z.im, distance };
                let hint = format!(
                    "the nearest point of the section is ({:.6}, {:.6}), on {}",
                    nearest.foot.re + 0.0,
                    nearest.foot.im + 0.0,
                    side_words(self.file, self.outline, nearest.side)
                );
                Err(self.fault(kind, at, hint))
            }
        }
    }

    /// The place on the boundary, if it is but one.
    fn one_face(&self, at: &Placed<Point>) -> Found<Place> {
        let z = at.value;
        let n = self.outline.n();
        // A vertex is on two sides; it counts as the start of the one that leaves it.
        let mut places: Vec<(usize, f64)> = Vec::new();
        for k in 0..n {
            let Some((s, distance)) = self.foot(k, z) else { continue };
            if distance > self.same() {
                continue;
            }
            let at_end = self.outline.side_length(k).is_some_and(|length| length - s <= self.same());
            let place = if at_end { ((k + 1) % n, 0.0) } else { (k, if s <= self.same() { 0.0 } else { s }) };
            if !places.iter().any(|p| p.0 == place.0 && (p.1 - place.1).abs() <= self.same()) {
                places.push(place);
            }
        }
        match places[..] {
            [(side, s)] => Ok(Place::OnSide { side, s }),
            // The core calls it a place on a side.
            [] => Ok(Place::At(z)),
            [(first, _), (second, _), ..] => {
                let kind = ProbeFault::TwoFaces { probe: self.words.clone(), x: z.re, y: z.im };
                let words = |k| side_words(self.file, self.outline, k);
                let hint = format!(
                    "say which face with `side`: {} or {} (both need a name of their own)",
                    words(first),
                    words(second)
                );
                Err(self.fault(kind, at, hint))
            }
        }
    }

    fn point_on(&self, at: &Placed<Point>, side: &Placed<String>) -> Found<Place> {
        let z = at.value;
        let near = self
            .sides_named(side)
            .into_iter()
            .filter_map(|k| self.foot(k, z).map(|(s, distance)| (k, s, distance)))
            .min_by(|a, b| a.2.total_cmp(&b.2));
        match near {
            Some((side, s, distance)) if distance <= self.same() => Ok(Place::OnSide { side, s }),
            other => {
                let distance = self.length(other.map_or(f64::INFINITY, |o| o.2));
                let probe = self.words.clone();
                let side = side.value.clone();
                let kind = ProbeFault::OffSide { probe, x: z.re, y: z.im, side, distance };
                Err(self.fault(kind, at, "move the point onto the side, or leave `side` out"))
            }
        }
    }

    fn along(&self, side: usize, [from, to]: [Option<f64>; 2], count: usize) -> Found<Vec<Place>> {
        let probe = self.words.clone();
        let words = side_words(self.file, self.outline, side);
        let span = match &self.probe.place {
            ProbePlace::Along { side, .. } => side.span,
            ProbePlace::Point { at, .. } => at.span,
        };
        let fault =
            |kind: ProbeFault, hint: &str| Box::new(Fault::new(Objection::from(kind), span).hint(hint));
        let (low, high) = self.range(side);
        let (from, to) = (from.unwrap_or(low), to.unwrap_or(high));
        if !(from.is_finite() && to.is_finite()) {
            let kind = ProbeFault::Endless { probe, side: words };
            return Err(fault(kind, "add `from` and `to`, distances from the finite end of the side"));
        }
        let same = self.same();
        if from < low - same || to > high + same || from > to {
            let kind = ProbeFault::OffEnd { probe, from, to, side: words, low, high };
            return Err(fault(kind, "`from` and `to` are distances along the side, `from` the smaller"));
        }
        let (from, to) = (from.max(low), to.min(high));
        let last = count.max(2) - 1;
        #[expect(clippy::cast_precision_loss, reason = "a count below a million")]
        let part = |i: usize| i as f64 / last as f64;
        let s = |i| if i == last { to } else { from + (to - from) * part(i) };
        Ok((0..=last).map(|i| Place::OnSide { side, s: s(i) }).collect())
    }

    /// Least and largest distance along a side.
    fn range(&self, side: usize) -> (f64, f64) {
        match (self.outline.side_length(side), self.outline.point(side)) {
            (Some(length), _) => (0.0, length),
            (None, Some(_)) => (0.0, f64::INFINITY),
            (None, None) => (f64::NEG_INFINITY, 0.0),
        }
    }

    /// Distance along a side to the point nearest to `z`, and how far that is from `z`.
    fn foot(&self, side: usize, z: Point) -> Option<(f64, f64)> {
        let (low, high) = self.range(side);
        let start = self.outline.point(side).or_else(|| self.outline.point(side + 1))?;
        let direction = self.outline.side_direction(side);
        let d = z - start;
        let s = (d.re * direction.re + d.im * direction.im).clamp(low, high);
        Some((s, (d - direction * s).norm()))
    }

    fn sides_named(&self, name: &Placed<String>) -> Vec<usize> {
        let named = |k: usize| {
            let given = self.outline.given_side(k).0;
            let side = self.file.outline.get(given).and_then(|v| v.side.as_ref());
            side.is_some_and(|s| s.value == name.value)
        };
        (0..self.outline.n()).filter(|&k| named(k)).collect()
    }

    fn length(&self, value: f64) -> String {
        format!("{} {}", crate::report::digits::short(value), self.file.length.name)
    }

    fn fault(&self, kind: ProbeFault, at: &Placed<Point>, hint: impl Into<String>) -> Box<Fault<Objection>> {
        Box::new(Fault::new(Objection::from(kind), at.span).hint(hint))
    }
}
