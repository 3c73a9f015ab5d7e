//! A patch cut into rectangles with one short polynomial each.

use super::chebyshev::monomials;
use super::patch::Patch;
use super::spectral_sum::LANES;
use super::tensor::{Halvings, Tensor};
use crate::processor::mul_add;

/// Total degree of a leaf's polynomial.
pub(super) const DEGREE: usize = 5;
const SIDE: usize = DEGREE + 1;
/// Terms of total degree ≤ [`DEGREE`].
pub(super) const TERMS: usize = (DEGREE + 1) * (DEGREE + 2) / 2;
/// Halvings each way at most.
const DEEPEST: u32 = 7;

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
    #[inline(always)]
    pub(super) fn eval<const FMA: bool>(&self, rho_m: f64, zeta_m: f64) -> [f64; LANES] {
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
                    row[lane] = mul_add::<FMA>(row[lane], x, term[lane]);
                }
            }
            last -= count + 1;
            for lane in 0..LANES {
                out[lane] = mul_add::<FMA>(out[lane], y, row[lane]);
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

/// A dyadic part of a patch: halvings and index each way, and its Chebyshev coefficients.
struct Part {
    level: [u32; 2],
    index: [usize; 2],
    tensor: Tensor,
}

impl Leaves {
    /// Cuts `patch` until every leaf's dropped coefficients sum to less than `allowed(largest ρ, largest ζ)`.
    pub(super) fn cut(patch: Patch, allowed: impl Fn(f64, f64) -> f64) -> Self {
        let sides = [patch.rectangle.rho_m, patch.rectangle.zeta_m];
        let mut todo = vec![Part { level: [0; 2], index: [0; 2], tensor: patch.coefficients }];
        let mut done: Vec<(Place, Leaf)> = Vec::new();
        let mut halvings = Halvings::default();
        while let Some(part) = todo.pop() {
            let [rho, zeta] = [0, 1].map(|axis| span(sides[axis], part.level[axis], part.index[axis]));
            let dropped = part.tensor.dropped(DEGREE);
            let axis = if dropped[0] >= dropped[1] { 0 } else { 1 };
            if dropped[axis] > allowed(rho.1, zeta.1) && part.level[axis] < DEEPEST {
                for upper in [false, true] {
                    let (mut level, mut index) = (part.level, part.index);
                    level[axis] += 1;
                    index[axis] = 2 * index[axis] + usize::from(upper);
                    todo.push(Part { level, index, tensor: part.tensor.half(axis, upper, DEGREE + 2, &mut halvings) });
                }
                continue;
            }
            let leaf = Leaf {
                rho_m: 0.5 * (rho.0 + rho.1),
                per_rho: 2.0 / (rho.1 - rho.0),
                zeta_m: 0.5 * (zeta.0 + zeta.1),
                per_zeta: 2.0 / (zeta.1 - zeta.0),
                terms: to_monomials(&part.tensor),
            };
            done.push(((part.level, part.index), leaf));
        }
        Self::index(sides, done)
    }

    fn index([rho, zeta]: [(f64, f64); 2], done: Vec<(Place, Leaf)>) -> Self {
        let deepest = [0, 1].map(|axis| done.iter().map(|(place, _)| place.0[axis]).max().unwrap_or(0));
        let cells = (1usize << deepest[0], 1usize << deepest[1]);
        let mut grid = vec![0u32; cells.0 * cells.1];
        for (number, ((level, index), _)) in done.iter().enumerate() {
            let size = (cells.0 >> level[0], cells.1 >> level[1]);
            for i in 0..size.0 {
                for j in 0..size.1 {
                    grid[(index[0] * size.0 + i) * cells.1 + index[1] * size.1 + j] = number as u32;
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
    #[inline(always)]
    pub(super) fn at(&self, rho_m: f64, zeta_m: f64) -> &Leaf {
        let i = ((rho_m - self.low.0) * self.cells_per_m.0) as usize;
        let j = ((zeta_m - self.low.1) * self.cells_per_m.1) as usize;
        let cell = i.min(self.cells.0 - 1) * self.cells.1 + j.min(self.cells.1 - 1);
        &self.leaves[self.grid[cell] as usize]
    }
}

/// Halvings and index each way.
type Place = ([u32; 2], [usize; 2]);

fn span(range: (f64, f64), level: u32, index: usize) -> (f64, f64) {
    let step = (range.1 - range.0) / f64::from(1u32 << level);
    (range.0 + step * index as f64, range.0 + step * (index + 1) as f64)
}

fn to_monomials(tensor: &Tensor) -> [[f64; LANES]; TERMS] {
    let basis = monomials::<SIDE>();
    let mut terms = [[0.0; LANES]; TERMS];
    for (lane, values) in (0..LANES).map(|lane| (lane, lane_to_monomials(tensor, lane, &basis))) {
        for (term, value) in terms.iter_mut().zip(values) {
            term[lane] = value;
        }
    }
    terms
}

fn lane_to_monomials(tensor: &Tensor, lane: usize, basis: &[[f64; SIDE]; SIDE]) -> [f64; TERMS] {
    let mut half = [[0.0; SIDE]; SIDE];
    for (k, polynomial) in basis.iter().enumerate() {
        for l in 0..SIDE - k {
            let value = tensor.at(lane, [k, l, 0]);
            for (row, b) in half.iter_mut().zip(polynomial).take(k + 1) {
                row[l] += b * value;
            }
        }
    }
    let mut terms = [0.0; TERMS];
    let mut place = terms.iter_mut();
    for j in 0..SIDE {
        for (row, term) in half.iter().take(SIDE - j).zip(place.by_ref()) {
            *term = basis.iter().zip(row).skip(j).map(|(polynomial, r)| polynomial[j] * r).sum();
        }
    }
    terms
}
