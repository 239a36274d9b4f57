//! Which sides are held.

use super::draw::Draw;

/// Two to four runs of held sides, an insulated run after each; the electrode of each side, and the levels.
pub(super) fn pick(draw: &mut Draw, n: usize) -> (Vec<Option<usize>>, Vec<f64>) {
    let wanted = match draw.index(20) {
        0..16 => 2,
        16..19 => 3,
        _ => 4,
    };
    let count = wanted.min(n / 2);
    // Twice as many different starts as electrodes: held, insulated, held, ...
    let mut order: Vec<usize> = (0..n).collect();
    for k in 0..2 * count {
        let other = draw.whole(k, n - 1);
        order.swap(k, other);
    }
    let mut starts = order[..2 * count].to_vec();
    starts.sort_unstable();
    let single = draw.chance(0.6);
    let shift = draw.index(n);
    let mut electrodes = vec![None; n];
    for e in 0..count {
        let (first, end) = (starts[2 * e], starts[2 * e + 1]);
        let end = if single { first + 1 } else { end };
        for k in first..end {
            electrodes[(k + shift) % n] = Some(e);
        }
    }
    let alike = draw.chance(0.5);
    let levels = match count {
        2 => vec![1.0, 0.0],
        // Two levels on three conductors, or three levels.
        3 if alike => vec![1.0, 0.0, 1.0],
        3 => vec![1.0, 0.0, 0.4],
        _ => vec![1.0, 0.0, 0.7, 0.2],
    };
    (electrodes, levels)
}
