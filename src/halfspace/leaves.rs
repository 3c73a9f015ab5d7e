//! A patch cut into rectangles with one short polynomial each.

use super::chebyshev::{monomials, restriction};
use super::patch::Patch;
use super::spectral_sum::LANES;

/// Total degree of a leaf's polynomial.
pub(super) const DEGREE: usize = 5;
/// Terms of total degree ≤ [`DEGREE`].
pub(super) const TERMS: usize = (DEGREE + 1) * (DEGREE + 2) / 2;
/// Chebyshev coefficients looked at each way when a leaf is judged.
const SEEN: usize = DEGREE + 3;
/// Halvings each way at most.
const DEEPEST: u32 = 6;

/// One rectangle: x = (ρ − `rho_m`)·`per_rho`, y = (ζ − `zeta_m`)·`per_zeta`, both in [−1, 1]; coefficients of
/// x^i y^j row by row of j.
#[derive(Debug, Clone)]
pub(super) struct Leaf {
    pub rho_m: f64,
    pub per_rho: f64,
    pub zeta_m: f64,
    pub per_zeta: f64,
    pub terms: [[f64; LANES]; TERMS],
}

impl Leaf {
    /// The polynomials at (ρ, ζ).
    #[inline]
    pub(super) fn eval(&self, rho_m: f64, zeta_m: f64) -> [f64; LANES] {
        let x = (rho_m - self.rho_m) * self.per_rho;
        let y = (zeta_m - self.zeta_m) * self.per_zeta;
        let mut out = self.terms[TERMS - 1];
        let mut last = TERMS - 1;
        for j in (0..DEGREE).rev() {
            let count = DEGREE - j;
            let mut row = self.terms[last - 1];
            for i in 1..=count {
                let term = &self.terms[last - 1 - i];
                for lane in 0..LANES {
                    row[lane] = row[lane] * x + term[lane];
                }
            }
            last -= count + 1;
            for lane in 0..LANES {
                out[lane] = out[lane] * y + row[lane];
            }
        }
        out
    }
}

impl Leaf {
    /// The polynomials, their derivatives by ρ and those by ζ.
    pub(super) fn eval_gradient(&self, rho_m: f64, zeta_m: f64) -> [[f64; LANES]; 3] {
        let x = (rho_m - self.rho_m) * self.per_rho;
        let y = (zeta_m - self.zeta_m) * self.per_zeta;
        let [mut value, mut by_x, mut by_y] = [[0.0; LANES]; 3];
        let mut last = TERMS;
        for j in (0..=DEGREE).rev() {
            let [mut row, mut slope] = [[0.0; LANES]; 2];
            for _ in 0..=DEGREE - j {
                last -= 1;
                for lane in 0..LANES {
                    slope[lane] = slope[lane] * x + row[lane];
                    row[lane] = row[lane] * x + self.terms[last][lane];
                }
            }
            for lane in 0..LANES {
                by_y[lane] = by_y[lane] * y + value[lane];
                value[lane] = value[lane] * y + row[lane];
                by_x[lane] = by_x[lane] * y + slope[lane];
            }
        }
        [value, by_x.map(|d| d * self.per_rho), by_y.map(|d| d * self.per_zeta)]
    }
}

/// The leaves of a patch, found through a uniform grid of cells.
#[derive(Debug, Clone)]
pub(super) struct Leaves {
    pub low: (f64, f64),
    pub cells_per_m: (f64, f64),
    pub cells: (usize, usize),
    pub grid: Vec<u32>,
    pub leaves: Vec<Leaf>,
}

/// A dyadic part of a patch: halvings and index each way.
#[derive(Debug, Clone, Copy)]
struct Part {
    level: (u32, u32),
    index: (usize, usize),
}

impl Leaves {
    /// Cuts `patch` until every leaf's dropped coefficients sum to less than `allowed(largest ρ, largest ζ)`.
    pub(super) fn cut(patch: &Patch, allowed: impl Fn(f64, f64) -> f64) -> Self {
        let (rho, zeta) = (patch.rectangle.rho_m, patch.rectangle.zeta_m);
        let mut strips = Strips::new(patch);
        let mut todo = vec![Part { level: (0, 0), index: (0, 0) }];
        let mut done: Vec<(Part, Leaf)> = Vec::new();
        while let Some(part) = todo.pop() {
            let seen = strips.leaf(part);
            let [left, right] = span(rho, part.level.0, part.index.0);
            let [bottom, top] = span(zeta, part.level.1, part.index.1);
            let dropped = dropped(&seen);
            let room = allowed(right, top);
            let (split_rho, split_zeta) = if dropped.0.max(dropped.1) <= room {
                (false, false)
            } else {
                let lead = dropped.0.max(dropped.1);
                (dropped.0 > 0.25 * lead && part.level.0 < DEEPEST, dropped.1 > 0.25 * lead && part.level.1 < DEEPEST)
            };
            if split_rho || split_zeta {
                todo.extend(children(part, split_rho, split_zeta));
                continue;
            }
            let leaf = Leaf {
                rho_m: 0.5 * (left + right),
                per_rho: 2.0 / (right - left),
                zeta_m: 0.5 * (bottom + top),
                per_zeta: 2.0 / (top - bottom),
                terms: to_monomials(&seen),
            };
            done.push((part, leaf));
        }
        Self::index((rho, zeta), done)
    }

    fn index((rho, zeta): ((f64, f64), (f64, f64)), done: Vec<(Part, Leaf)>) -> Self {
        let deepest = done.iter().fold((0, 0), |d, (p, _)| (p.level.0.max(d.0), p.level.1.max(d.1)));
        let cells = (1usize << deepest.0, 1usize << deepest.1);
        let mut grid = vec![0u32; cells.0 * cells.1];
        for (number, (part, _)) in done.iter().enumerate() {
            let size = (cells.0 >> part.level.0, cells.1 >> part.level.1);
            for i in 0..size.0 {
                for j in 0..size.1 {
                    grid[(part.index.0 * size.0 + i) * cells.1 + part.index.1 * size.1 + j] = number as u32;
                }
            }
        }
        Self {
            low: (rho.0, zeta.0),
            cells_per_m: (cells.0 as f64 / (rho.1 - rho.0), cells.1 as f64 / (zeta.1 - zeta.0)),
            cells,
            grid,
            leaves: done.into_iter().map(|(_, leaf)| leaf).collect(),
        }
    }

    /// The leaf at a point of the patch (or the nearest one).
    #[inline]
    pub(super) fn at(&self, rho_m: f64, zeta_m: f64) -> &Leaf {
        let i = ((rho_m - self.low.0) * self.cells_per_m.0) as usize;
        let j = ((zeta_m - self.low.1) * self.cells_per_m.1) as usize;
        let cell = i.min(self.cells.0 - 1) * self.cells.1 + j.min(self.cells.1 - 1);
        &self.leaves[self.grid[cell] as usize]
    }
}

fn span(range: (f64, f64), level: u32, index: usize) -> [f64; 2] {
    let step = (range.1 - range.0) / f64::from(1u32 << level);
    [range.0 + step * index as f64, range.0 + step * (index + 1) as f64]
}

fn children(part: Part, split_rho: bool, split_zeta: bool) -> Vec<Part> {
    let mut out = Vec::with_capacity(4);
    for i in 0..=usize::from(split_rho) {
        for j in 0..=usize::from(split_zeta) {
            out.push(Part {
                level: (part.level.0 + u32::from(split_rho), part.level.1 + u32::from(split_zeta)),
                index: (
                    part.index.0 * (1 + usize::from(split_rho)) + i,
                    part.index.1 * (1 + usize::from(split_zeta)) + j,
                ),
            });
        }
    }
    out
}

/// Coefficients seen on a part, `[lane][rho degree][zeta degree]`.
type Seen = [[[f64; SEEN]; SEEN]; LANES];

/// The patch restricted in ρ, kept for the many parts that share it.
struct Strips<'a> {
    patch: &'a Patch,
    by_rho: Vec<Option<Vec<f64>>>,
    by_zeta: Vec<Option<Vec<f64>>>,
}

impl<'a> Strips<'a> {
    fn new(patch: &'a Patch) -> Self {
        let count = 2usize << DEEPEST;
        Self { patch, by_rho: vec![None; count], by_zeta: vec![None; count] }
    }

    fn leaf(&mut self, part: Part) -> Seen {
        let (m, n) = self.patch.rectangle.points;
        let patch = self.patch;
        let strip = self.by_rho[(1 << part.level.0) + part.index.0].get_or_insert_with(|| {
            let [low, high] = span((-1.0, 1.0), part.level.0, part.index.0);
            let matrix = restriction(SEEN, m, low, high);
            let mut strip = vec![0.0; LANES * SEEN * n];
            for lane in 0..LANES {
                for k in 0..SEEN {
                    let out = &mut strip[(lane * SEEN + k) * n..(lane * SEEN + k + 1) * n];
                    for i in 0..m {
                        let a = matrix[k * m + i];
                        for (o, c) in
                            out.iter_mut().zip(&patch.coefficients[(lane * m + i) * n..(lane * m + i + 1) * n])
                        {
                            *o += a * c;
                        }
                    }
                }
            }
            strip
        });
        let matrix = self.by_zeta[(1 << part.level.1) + part.index.1].get_or_insert_with(|| {
            let [low, high] = span((-1.0, 1.0), part.level.1, part.index.1);
            let matrix = restriction(SEEN, n, low, high);
            (0..n).flat_map(|j| (0..SEEN).map(move |l| (j, l))).map(|(j, l)| matrix[l * n + j]).collect()
        });
        let mut seen = [[[0.0; SEEN]; SEEN]; LANES];
        for (lane, seen) in seen.iter_mut().enumerate() {
            for (k, row) in seen.iter_mut().enumerate() {
                let strip = &strip[(lane * SEEN + k) * n..(lane * SEEN + k + 1) * n];
                for (c, a) in strip.iter().zip(matrix.chunks_exact(SEEN)) {
                    for (out, a) in row.iter_mut().zip(a) {
                        *out += c * a;
                    }
                }
            }
        }
        seen
    }
}

/// Sums of the coefficients that a total degree of [`DEGREE`] leaves out, by the direction that has the higher degree;
/// the largest over the three functions.
fn dropped(seen: &Seen) -> (f64, f64) {
    let (mut by_rho, mut by_zeta) = (0.0f64, 0.0f64);
    for pair in seen.chunks_exact(2) {
        let (mut rho, mut zeta) = (0.0, 0.0);
        for k in 0..SEEN {
            for l in 0..SEEN {
                if k + l > DEGREE {
                    let size = pair[0][k][l].abs().max(pair[1][k][l].abs());
                    if k >= l {
                        rho += size;
                    }
                    if l >= k {
                        zeta += size;
                    }
                }
            }
        }
        by_rho = by_rho.max(rho);
        by_zeta = by_zeta.max(zeta);
    }
    (by_rho, by_zeta)
}

fn to_monomials(seen: &Seen) -> [[f64; LANES]; TERMS] {
    const SIDE: usize = DEGREE + 1;
    let basis = monomials::<SIDE>();
    let mut terms = [[0.0; LANES]; TERMS];
    for (lane, seen) in seen.iter().enumerate() {
        let mut half = [[0.0; SIDE]; SIDE];
        for k in 0..SIDE {
            for l in 0..SIDE - k {
                for (i, b) in basis[k].iter().enumerate().take(k + 1) {
                    half[i][l] += b * seen[k][l];
                }
            }
        }
        let mut place = 0;
        for j in 0..SIDE {
            for row in half.iter().take(SIDE - j) {
                terms[place][lane] = (j..SIDE).map(|l| basis[l][j] * row[l]).sum();
                place += 1;
            }
        }
    }
    terms
}
