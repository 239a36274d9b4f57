//! Linear least squares by Householder reflections with column pivoting.

/// A dense matrix by columns.
#[derive(Debug, Clone)]
pub(super) struct Columns {
    rows: usize,
    data: Vec<f64>,
}

impl Columns {
    pub(super) fn zeros(rows: usize, columns: usize) -> Columns {
        Columns { rows, data: vec![0.0; rows * columns] }
    }

    pub(super) fn column_mut(&mut self, j: usize) -> &mut [f64] {
        &mut self.data[j * self.rows..(j + 1) * self.rows]
    }

    fn column(&self, j: usize) -> &[f64] {
        &self.data[j * self.rows..(j + 1) * self.rows]
    }

    fn count(&self) -> usize {
        self.data.len().checked_div(self.rows).unwrap_or(0)
    }

    fn swap_columns(&mut self, i: usize, j: usize) {
        if i != j {
            let (low, high) = (i.min(j), i.max(j));
            let (head, tail) = self.data.split_at_mut(high * self.rows);
            head[low * self.rows..(low + 1) * self.rows].swap_with_slice(&mut tail[..self.rows]);
        }
    }
}

fn dot(a: &[f64], b: &[f64]) -> f64 {
    // Four partial sums let the compiler use vector instructions.
    let mut sums = [0.0; 8];
    let (a_chunks, b_chunks) = (a.chunks_exact(8), b.chunks_exact(8));
    let rest: f64 = a_chunks.remainder().iter().zip(b_chunks.remainder()).map(|(x, y)| x * y).sum();
    for (x, y) in a_chunks.zip(b_chunks) {
        for i in 0..8 {
            sums[i] += x[i] * y[i];
        }
    }
    sums.iter().sum::<f64>() + rest
}

/// Applies `I − 2 v vᵀ / (vᵀv)` to `x`, given `beta = 2/(vᵀv)`.
fn reflect(v: &[f64], beta: f64, x: &mut [f64]) {
    let factor = beta * dot(v, x);
    x.iter_mut().zip(v).for_each(|(x, v)| *x -= factor * v);
}

/// Minimises `|A x − b|` for every column `b` of `right`; columns of `A` are scaled to unit length first.
///
/// Columns whose remainder falls below `rank_tolerance` of the largest are left out (coefficient zero): the trial
/// functions are nearly dependent, and without this the coefficients would grow until they cancel.
pub(super) fn solve(mut a: Columns, mut right: Columns, rank_tolerance: f64) -> Vec<Vec<f64>> {
    let (m, n) = (a.rows, a.count());
    let scales: Vec<f64> =
        (0..n).map(|j| dot(a.column(j), a.column(j)).sqrt().max(f64::MIN_POSITIVE)).collect();
    for j in 0..n {
        let scale = scales[j];
        a.column_mut(j).iter_mut().for_each(|x| *x /= scale);
    }
    let mut order: Vec<usize> = (0..n).collect();
    let mut norms: Vec<f64> = (0..n).map(|j| dot(a.column(j), a.column(j))).collect();
    let mut exact = norms.clone();
    let mut rank = 0;
    for k in 0..n.min(m) {
        let pivot = (k..n).max_by(|&i, &j| norms[i].total_cmp(&norms[j])).unwrap_or(k);
        a.swap_columns(k, pivot);
        order.swap(k, pivot);
        norms.swap(k, pivot);
        exact.swap(k, pivot);
        let tail = &a.column(k)[k..];
        let norm = dot(tail, tail).sqrt();
        if norm.is_nan() || norm <= rank_tolerance {
            break;
        }
        rank = k + 1;
        let alpha = if tail[0] > 0.0 { -norm } else { norm };
        let mut v = tail.to_vec();
        v[0] -= alpha;
        let beta = 2.0 / dot(&v, &v);
        let column = &mut a.column_mut(k)[k..];
        column.fill(0.0);
        column[0] = alpha;
        for j in k + 1..n {
            reflect(&v, beta, &mut a.column_mut(j)[k..]);
            let top = a.column(j)[k];
            norms[j] -= top * top;
            // Downdating loses digits by cancellation; a fresh sum is taken once half of them are gone.
            if norms[j] < 1e-6 * exact[j] {
                let tail = &a.column(j)[k + 1..];
                norms[j] = dot(tail, tail);
                exact[j] = norms[j];
            }
        }
        for j in 0..right.count() {
            reflect(&v, beta, &mut right.column_mut(j)[k..]);
        }
    }
    (0..right.count())
        .map(|j| {
            let mut x = right.column(j)[..rank].to_vec();
            for i in (0..rank).rev() {
                x[i] /= a.column(i)[i];
                let (head, tail) = x.split_at_mut(i);
                head.iter_mut().zip(a.column(i)).for_each(|(x, r)| *x -= r * tail[0]);
            }
            let mut solution = vec![0.0; n];
            for (i, value) in x.into_iter().enumerate() {
                solution[order[i]] = value / scales[order[i]];
            }
            solution
        })
        .collect()
}
