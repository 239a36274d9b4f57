//! Polygons with sides along two axes.

use num_complex::Complex64;

use super::draw::Draw;

/// A region grown cell by cell on a grid of uneven lines.
struct Cells {
    size: usize,
    filled: Vec<bool>,
}

impl Cells {
    fn at(&self, x: isize, y: isize) -> bool {
        let size = self.size as isize;
        0 <= x && x < size && 0 <= y && y < size && self.filled[(y * size + x) as usize]
    }

    /// Whether the region stays in one piece, without hole and without sides that touch in a corner, when this cell is
    /// added: the filled ones of its eight neighbours are one stretch of their ring and share a side with it.
    fn fits(&self, x: isize, y: isize) -> bool {
        const RING: [(isize, isize); 8] =
            [(1, 0), (1, 1), (0, 1), (-1, 1), (-1, 0), (-1, -1), (0, -1), (1, -1)];
        let size = self.size as isize;
        if !(0 <= x && x < size && 0 <= y && y < size) || self.at(x, y) {
            return false;
        }
        let ring: Vec<bool> = RING.iter().map(|&(dx, dy)| self.at(x + dx, y + dy)).collect();
        let starts = (0..8).filter(|&k| ring[k] && !ring[(k + 7) % 8]).count();
        starts == 1 && (0..8).step_by(2).any(|k| ring[k])
    }

    /// Corners of the outline, counter-clockwise, as grid lines.
    fn corners(&self) -> Vec<(usize, usize)> {
        let size = self.size as isize;
        // The step along the outline that leaves a grid point with the region on the left.
        let step = |x: isize, y: isize| -> (isize, isize) {
            let (sw, se) = (self.at(x - 1, y - 1), self.at(x, y - 1));
            let (nw, ne) = (self.at(x - 1, y), self.at(x, y));
            if ne && !se {
                (1, 0)
            } else if nw && !ne {
                (0, 1)
            } else if sw && !nw {
                (-1, 0)
            } else {
                (0, -1)
            }
        };
        let first = (0..size)
            .flat_map(|y| (0..size).map(move |x| (x, y)))
            .find(|&(x, y)| self.at(x, y))
            .unwrap_or((0, 0));
        let mut corners = Vec::new();
        let mut here = first;
        let mut before = (0, -1);
        loop {
            let next = step(here.0, here.1);
            if next != before {
                corners.push((here.0 as usize, here.1 as usize));
            }
            here = (here.0 + next.0, here.1 + next.1);
            before = next;
            if here == first {
                return corners;
            }
        }
    }
}

/// A region of cells grown at random until its outline has the corners wanted.
pub(super) fn grown(draw: &mut Draw, n: usize) -> Vec<Complex64> {
    let size = (3.0 * (n as f64).sqrt()) as usize + 2;
    let mut cells = Cells { size, filled: vec![false; size * size] };
    let middle = size / 2;
    cells.filled[middle * size + middle] = true;
    let mut count = 4;
    // A cell in three or more is free to be added; the bound is far beyond what is used.
    for _ in 0..200 * size * size {
        if count >= n {
            break;
        }
        let (x, y) = (draw.index(size), draw.index(size));
        if cells.fits(x as isize, y as isize) {
            cells.filled[y * size + x] = true;
            count = cells.corners().len();
        }
    }
    let even = draw.chance(0.4);
    let narrowest = draw.log_between(0.02, 1.0);
    let mut lines = || -> Vec<f64> {
        let mut sum = 0.0;
        let mut line = vec![0.0];
        for _ in 0..size {
            sum += if even { 1.0 } else { draw.log_between(narrowest, 1.0) };
            line.push(sum);
        }
        line
    };
    let (xs, ys) = (lines(), lines());
    cells.corners().into_iter().map(|(x, y)| Complex64::new(xs[x], ys[y])).collect()
}

/// A bar with teeth of random widths, gaps and lengths.
pub(super) fn comb(draw: &mut Draw, n: usize) -> Vec<Complex64> {
    let teeth = (n.saturating_sub(4) / 4).max(1);
    let bar = draw.log_between(0.1, 3.0);
    let longest = draw.log_between(0.5, 20.0);
    let narrowest = draw.log_between(0.05, 1.0);
    let alike = draw.chance(0.3);
    let mut x = 0.0;
    let mut top = vec![Complex64::new(0.0, bar)];
    for _ in 0..teeth {
        x += draw.log_between(narrowest, 1.0);
        let from = x;
        x += draw.log_between(narrowest, 1.0);
        let tip = bar + if alike { longest } else { longest * draw.log_between(0.05, 1.0) };
        top.extend([(from, bar), (from, tip), (x, tip), (x, bar)].map(|(x, y)| Complex64::new(x, y)));
    }
    x += draw.log_between(narrowest, 1.0);
    top.push(Complex64::new(x, bar));
    let bottom = [Complex64::new(0.0, 0.0), Complex64::new(x, 0.0)];
    bottom.into_iter().chain(top.into_iter().rev()).collect()
}
