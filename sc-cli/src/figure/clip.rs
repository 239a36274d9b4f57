//! Cutting lines at the edge of a window: the drawing back ends clamp instead, which would draw along the frame.

use sc_core::outline::Point;

/// An upright rectangle in the plane of the section.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Window {
    /// Left and lower corner.
    pub low: Point,
    /// Right and upper corner.
    pub high: Point,
}

impl Window {
    /// The least window with all points in it.
    pub fn around(points: impl IntoIterator<Item = Point>) -> Option<Window> {
        points.into_iter().filter(|p| p.is_finite()).fold(None, |window, p| {
            let Window { low, high } = window.unwrap_or(Window { low: p, high: p });
            Some(Window {
                low: Point::new(low.re.min(p.re), low.im.min(p.im)),
                high: Point::new(high.re.max(p.re), high.im.max(p.im)),
            })
        })
    }

    /// The same with a margin on all sides.
    pub fn grown(&self, margin: f64) -> Window {
        let m = Point::new(margin, margin);
        Window { low: self.low - m, high: self.high + m }
    }

    /// Whether a point is in it.
    pub fn contains(&self, p: Point) -> bool {
        self.low.re <= p.re && p.re <= self.high.re && self.low.im <= p.im && p.im <= self.high.im
    }

    /// The part of a segment in the window (Liang and Barsky 1984).
    fn segment(&self, a: Point, b: Point) -> Option<(Point, Point)> {
        let d = b - a;
        let (mut from, mut to) = (0.0_f64, 1.0_f64);
        let edges = [
            (-d.re, a.re - self.low.re),
            (d.re, self.high.re - a.re),
            (-d.im, a.im - self.low.im),
            (d.im, self.high.im - a.im),
        ];
        for (p, q) in edges {
            if p == 0.0 {
                if q < 0.0 {
                    return None;
                }
            } else if p < 0.0 {
                from = from.max(q / p);
            } else {
                to = to.min(q / p);
            }
        }
        let at = |t: f64| {
            if t <= 0.0 {
                a
            } else if t >= 1.0 {
                b
            } else {
                a + d * t
            }
        };
        (from <= to).then(|| (at(from), at(to)))
    }

    /// The parts of a line in the window.
    pub fn clip(&self, line: &[Point]) -> Vec<Vec<Point>> {
        let mut out: Vec<Vec<Point>> = Vec::new();
        let mut open = false;
        for w in line.windows(2) {
            match self.segment(w[0], w[1]).filter(|_| w[0].is_finite() && w[1].is_finite()) {
                Some((a, b)) => {
                    match out.last_mut() {
                        Some(part) if open => part.push(b),
                        _ => out.push(vec![a, b]),
                    }
                    open = (b - w[1]).norm() == 0.0;
                }
                None => open = false,
            }
        }
        out
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_line_that_leaves_and_returns_gives_two_parts() {
        let window = Window { low: Point::new(0.0, 0.0), high: Point::new(2.0, 1.0) };
        let line: Vec<Point> = [(-1.0, 0.5), (0.5, 0.5), (1.0, 2.0), (1.5, 0.5), (1.6, 0.5)]
            .map(|(x, y)| Point::new(x, y))
            .into();
        let parts = window.clip(&line);
        assert_eq!(parts.len(), 2, "{parts:?}");
        assert!(parts.iter().flatten().all(|p| window.grown(1e-12).contains(*p)));
        assert!((parts[0][0] - Point::new(0.0, 0.5)).norm() < 1e-12);
        assert!(window.clip(&[Point::new(3.0, 3.0), Point::new(4.0, 0.0)]).is_empty());
        assert!(window.clip(&[Point::new(f64::NAN, 3.0), Point::new(1.0, 0.5)]).is_empty());
    }
}
