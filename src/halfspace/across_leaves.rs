//! A box of (ρ, z, z') cut into smaller ones with one short polynomial each.

use super::chebyshev::monomials;
use super::spectral_sum::LANES;
use super::tensor::{Halvings, Tensor};

/// Total degree of a leaf's polynomial.
const DEGREE: usize = 5;
const SIDE: usize = DEGREE + 1;
/// Terms of total degree ≤ [`DEGREE`] in three variables.
const TERMS: usize = SIDE * (SIDE + 1) * (SIDE + 2) / 6;
/// Halvings along one axis at most.
const DEEPEST: u32 = 5;

/// Three ranges: horizontal distance, height above, depth below, metres.
pub(super) type Sides = [(f64, f64); 3];

/// One polynomial; coefficients of x^i y^j t^k, k slowest.
#[derive(Debug, Clone)]
struct Leaf {
    middle: [f64; 3],
    scale: [f64; 3],
    terms: Box<[[f64; LANES]; TERMS]>,
}

impl Leaf {
    fn new(sides: Sides, tensor: &Tensor) -> Self {
        Self {
            middle: sides.map(|(low, high)| 0.5 * (low + high)),
            scale: sides.map(|(low, high)| 2.0 / (high - low)),
            terms: Box::new(to_monomials(tensor)),
        }
    }

    fn eval(&self, at: [f64; 3]) -> [f64; LANES] {
        let [x, y, t] = [0, 1, 2].map(|axis| (at[axis] - self.middle[axis]) * self.scale[axis]);
        let mut out = [0.0; LANES];
        let mut last = TERMS;
        for k in (0..SIDE).rev() {
            let mut layer = [0.0; LANES];
            for j in (0..SIDE - k).rev() {
                let mut row = [0.0; LANES];
                for _ in 0..SIDE - k - j {
                    last -= 1;
                    step(&mut row, x, &self.terms[last]);
                }
                step(&mut layer, y, &row);
            }
            step(&mut out, t, &layer);
        }
        out
    }
}

#[inline]
fn step(sum: &mut [f64; LANES], x: f64, term: &[f64; LANES]) {
    for (sum, term) in sum.iter_mut().zip(term) {
        *sum = *sum * x + term;
    }
}

/// The leaves of one box, found through a uniform grid of cells.
#[derive(Debug, Clone)]
pub(super) struct AcrossLeaves {
    low: [f64; 3],
    cells_per_m: [f64; 3],
    cells: [usize; 3],
    grid: Vec<u32>,
    leaves: Vec<Leaf>,
}

/// A dyadic part of the box.
struct Part {
    level: [u32; 3],
    index: [usize; 3],
    tensor: Tensor,
}

impl AcrossLeaves {
    /// Cuts the box until every leaf's dropped coefficients sum to less than `allowed(largest values)`.
    pub(super) fn cut(sides: Sides, tensor: Tensor, allowed: impl Fn([f64; 3]) -> f64) -> Self {
        let mut todo = vec![Part { level: [0; 3], index: [0; 3], tensor }];
        let mut done: Vec<([u32; 3], [usize; 3], Leaf)> = Vec::new();
        let mut halvings = Halvings::default();
        while let Some(part) = todo.pop() {
            let here = [0, 1, 2].map(|axis| span(sides[axis], part.level[axis], part.index[axis]));
            let dropped = part.tensor.dropped(DEGREE);
            let room = allowed(here.map(|side| side.1));
            let lead = dropped.iter().fold(0.0f64, |a, &b| a.max(b));
            let axis = (0..3).filter(|&a| part.level[a] < DEEPEST).max_by(|&a, &b| dropped[a].total_cmp(&dropped[b]));
            match axis {
                Some(axis) if lead > room => {
                    for upper in [false, true] {
                        let (mut level, mut index) = (part.level, part.index);
                        level[axis] += 1;
                        index[axis] = 2 * index[axis] + usize::from(upper);
                        todo.push(Part {
                            level,
                            index,
                            tensor: part.tensor.half(axis, upper, SIDE + 1, &mut halvings),
                        });
                    }
                }
                _ => done.push((part.level, part.index, Leaf::new(here, &part.tensor))),
            }
        }
        Self::index(sides, done)
    }

    fn index(sides: Sides, done: Vec<([u32; 3], [usize; 3], Leaf)>) -> Self {
        let deepest = [0, 1, 2].map(|axis| done.iter().map(|part| part.0[axis]).max().unwrap_or(0));
        let cells = deepest.map(|level| 1usize << level);
        let mut grid = vec![0u32; cells.iter().product()];
        for (number, (level, index, _)) in done.iter().enumerate() {
            let size = [0, 1, 2].map(|axis| cells[axis] >> level[axis]);
            for i in 0..size[0] {
                for j in 0..size[1] {
                    for k in 0..size[2] {
                        let at = [index[0] * size[0] + i, index[1] * size[1] + j, index[2] * size[2] + k];
                        grid[(at[0] * cells[1] + at[1]) * cells[2] + at[2]] = number as u32;
                    }
                }
            }
        }
        Self {
            low: sides.map(|side| side.0),
            cells_per_m: [0, 1, 2].map(|axis| cells[axis] as f64 / (sides[axis].1 - sides[axis].0)),
            cells,
            grid,
            leaves: done.into_iter().map(|part| part.2).collect(),
        }
    }

    /// The polynomials at a point of the box.
    pub(super) fn eval(&self, at: [f64; 3]) -> [f64; LANES] {
        let cell = [0, 1, 2]
            .map(|axis| (((at[axis] - self.low[axis]) * self.cells_per_m[axis]) as usize).min(self.cells[axis] - 1));
        self.leaves[self.grid[(cell[0] * self.cells[1] + cell[1]) * self.cells[2] + cell[2]] as usize].eval(at)
    }

    /// How many polynomials there are.
    pub(super) fn len(&self) -> usize {
        self.leaves.len()
    }
}

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
    let mut cube = [[[0.0; SIDE]; SIDE]; SIDE];
    for a in 0..SIDE {
        for b in 0..SIDE - a {
            for c in 0..SIDE - a - b {
                let value = tensor.at(lane, [a, b, c]);
                for (layer, t) in cube.iter_mut().zip(&basis[c]).take(c + 1) {
                    for (row, y) in layer.iter_mut().zip(&basis[b]).take(b + 1) {
                        for (out, x) in row.iter_mut().zip(&basis[a]).take(a + 1) {
                            *out += value * x * y * t;
                        }
                    }
                }
            }
        }
    }
    let mut terms = [0.0; TERMS];
    let ordered = (0..SIDE).flat_map(|k| (0..SIDE - k).flat_map(move |j| (0..SIDE - k - j).map(move |i| (k, j, i))));
    for (term, (k, j, i)) in terms.iter_mut().zip(ordered) {
        *term = cube[k][j][i];
    }
    terms
}
