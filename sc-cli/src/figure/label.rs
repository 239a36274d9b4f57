//! Where labels go: the first of several places that touches nothing of importance, or the least bad one.

use super::drawing::PagePoint;

/// An upright rectangle on the page.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) struct Box2 {
    pub(super) low: PagePoint,
    pub(super) high: PagePoint,
}

impl Box2 {
    pub(super) fn about(middle: PagePoint, width: f64, height: f64) -> Box2 {
        let half = [0.5 * width, 0.5 * height];
        Box2 {
            low: [middle[0] - half[0], middle[1] - half[1]],
            high: [middle[0] + half[0], middle[1] + half[1]],
        }
    }

    pub(super) fn middle(&self) -> PagePoint {
        [0.5 * (self.low[0] + self.high[0]), 0.5 * (self.low[1] + self.high[1])]
    }

    pub(super) fn corners(&self) -> [PagePoint; 4] {
        let (a, b) = (self.low, self.high);
        [a, [b[0], a[1]], b, [a[0], b[1]]]
    }

    /// The same with a margin.
    pub(super) fn grown(&self, margin: f64) -> Box2 {
        Box2 {
            low: [self.low[0] - margin, self.low[1] - margin],
            high: [self.high[0] + margin, self.high[1] + margin],
        }
    }

    /// Its point nearest to another.
    pub(super) fn nearest(&self, p: PagePoint) -> PagePoint {
        [p[0].clamp(self.low[0], self.high[0]), p[1].clamp(self.low[1], self.high[1])]
    }

    pub(super) fn meets(&self, other: &Box2) -> bool {
        (0..2).all(|i| self.low[i] < other.high[i] && other.low[i] < self.high[i])
    }

    fn holds(&self, other: &Box2) -> bool {
        (0..2).all(|i| self.low[i] <= other.low[i] && other.high[i] <= self.high[i])
    }

    /// Length of a segment inside.
    fn length_inside(&self, a: PagePoint, b: PagePoint) -> f64 {
        let (mut from, mut to) = (0.0_f64, 1.0_f64);
        for i in 0..2 {
            let d = b[i] - a[i];
            if d == 0.0 {
                if a[i] <= self.low[i] || a[i] >= self.high[i] {
                    return 0.0;
                }
                continue;
            }
            let (t, u) = ((self.low[i] - a[i]) / d, (self.high[i] - a[i]) / d);
            from = from.max(t.min(u));
            to = to.min(t.max(u));
        }
        (to - from).max(0.0) * (b[0] - a[0]).hypot(b[1] - a[1])
    }
}

/// What is on the page already.
#[derive(Debug)]
pub(super) struct Labels {
    frame: Box2,
    boxes: Vec<Box2>,
    lines: Vec<([PagePoint; 2], f64)>,
}

/// A label that covers another, or leaves the page, is never wanted.
const FORBIDDEN: f64 = 1e6;

impl Labels {
    pub(super) fn new(frame: Box2) -> Labels {
        Labels { frame, boxes: Vec::new(), lines: Vec::new() }
    }

    /// Lines that labels should keep off; covering a pixel of one costs its weight.
    pub(super) fn avoid(&mut self, line: &[PagePoint], weight: f64) {
        self.lines.extend(line.windows(2).map(|w| ([w[0], w[1]], weight)));
    }

    /// A place that is taken.
    pub(super) fn take(&mut self, place: Box2) {
        self.boxes.push(place);
    }

    /// How bad a place is: pixels of lines covered, and far more for what must not be.
    pub(super) fn cost(&self, place: &Box2) -> f64 {
        let others = self.boxes.iter().filter(|b| b.meets(place)).count() as f64;
        let outside = if self.frame.holds(place) { 0.0 } else { 1.0 };
        let covered: f64 =
            self.lines.iter().map(|(l, weight)| weight * place.length_inside(l[0], l[1])).sum();
        FORBIDDEN * (others + outside) + covered
    }

    /// The best of several places, earlier ones preferred by `reluctance` pixels each; `None` if all are forbidden.
    pub(super) fn best(
        &self,
        places: impl IntoIterator<Item = Box2>,
        reluctance: f64,
    ) -> Option<(usize, Box2)> {
        places
            .into_iter()
            .enumerate()
            .map(|(i, place)| (i, place, self.cost(&place) + reluctance * i as f64))
            .filter(|(_, _, cost)| *cost < FORBIDDEN)
            .min_by(|a, b| a.2.total_cmp(&b.2))
            .map(|(i, place, _)| (i, place))
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_label_takes_the_free_place() {
        let frame = Box2 { low: [0.0, 0.0], high: [100.0, 100.0] };
        let mut labels = Labels::new(frame);
        labels.take(Box2::about([50.0, 50.0], 20.0, 10.0));
        labels.avoid(&[[0.0, 80.0], [100.0, 80.0]], 1.0);
        let places =
            [[50.0, 52.0], [99.0, 20.0], [50.0, 80.0], [50.0, 30.0]].map(|p| Box2::about(p, 20.0, 10.0));
        assert_eq!(labels.best(places, 0.1).map(|b| b.0), Some(3));
        assert_eq!(labels.best(places[..2].to_vec(), 0.1), None);
    }
}
