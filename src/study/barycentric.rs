//! One rational fit of many functions at once: common support points and weights, so common poles.

use nalgebra::DMatrix;
use num_complex::Complex64;

/// How a deviation of a component is judged: against its own magnitude there, but never against less than `FLOOR` of
/// its largest magnitude.
const FLOOR: f64 = 0.01;

/// More components than this are first brought down to as many combinations as there are points.
const MOST_COMPONENTS: usize = 24;

/// Sizes of the components over the samples, for judging deviations.
#[derive(Debug, Clone)]
pub(super) struct Measure {
    floors: Vec<f64>,
}

impl Measure {
    /// From samples, `values[point][component]`.
    pub(super) fn new(values: &[Vec<Complex64>]) -> Self {
        let components = values.first().map_or(0, Vec::len);
        let largest: Vec<f64> =
            (0..components).map(|k| values.iter().map(|v| v[k].norm()).fold(0.0, f64::max)).collect();
        let overall = largest.iter().copied().fold(0.0, f64::max);
        // A component that is rounding noise beside the others must not be chased.
        let floors = largest.iter().map(|size| FLOOR * size.max(1e-12 * overall).max(f64::MIN_POSITIVE)).collect();
        Measure { floors }
    }

    /// What a deviation of component `k` is divided by where the component has this value.
    fn size(&self, k: usize, value: Complex64) -> f64 {
        value.norm().max(self.floors[k])
    }

    /// The largest judged deviation over the components; infinite where one is not a number.
    pub(super) fn deviation(&self, one: &[Complex64], other: &[Complex64]) -> f64 {
        let mut worst = 0.0;
        for (k, (a, b)) in one.iter().zip(other).enumerate() {
            let deviation = (a - b).norm() / self.size(k, *a).max(self.size(k, *b));
            if deviation.is_nan() {
                return f64::INFINITY;
            }
            worst = f64::max(worst, deviation);
        }
        worst
    }
}

/// A rational function of one real variable with values in C^m, in barycentric form:
/// r(t) = Σ wⱼ fⱼ/(t − tⱼ) / Σ wⱼ/(t − tⱼ).
#[derive(Debug, Clone)]
pub(super) struct Barycentric {
    support: Vec<f64>,
    weights: Vec<Complex64>,
    values: Vec<Vec<Complex64>>,
}

impl Barycentric {
    /// Fits samples at distinct points by greedy choice of support points (the AAA algorithm: Y. Nakatsukasa, O. Sète and
    /// L. N. Trefethen, SIAM J. Sci. Comput. 40(3), A1494–A1522, 2018; here for several functions at once): the next support
    /// point is the sample with the largest deviation, the weights are the least singular vector of the Loewner matrix
    /// stacked over points and components.
    ///
    /// Stops when all samples are met to `enough`, or when more weights would leave too few equations.
    pub(super) fn fit(points: &[f64], values: &[Vec<Complex64>], measure: &Measure, enough: f64) -> Self {
        let rows = Rows::new(values, measure);
        let most = rows.most_support_points();
        let mut chosen = vec![furthest_from_mean(values, measure)];
        let mut fit = Barycentric::with_support(&chosen, points, values, &rows);
        loop {
            let worst = (0..points.len())
                .filter(|i| !chosen.contains(i))
                .map(|i| (i, measure.deviation(&values[i], &fit.eval(points[i]))))
                .max_by(|a, b| a.1.total_cmp(&b.1));
            match worst {
                Some((i, deviation)) if deviation > enough && chosen.len() < most => chosen.push(i),
                _ => return fit,
            }
            fit = Barycentric::with_support(&chosen, points, values, &rows);
        }
    }

    fn with_support(chosen: &[usize], points: &[f64], values: &[Vec<Complex64>], rows: &Rows) -> Self {
        let others: Vec<usize> = (0..points.len()).filter(|i| !chosen.contains(i)).collect();
        let components = rows.components();
        let loewner = DMatrix::from_fn(others.len() * components, chosen.len(), |row, column| {
            let (i, k, j) = (others[row / components], row % components, chosen[column]);
            (rows.functions[i][k] - rows.functions[j][k]) / (points[i] - points[j]) * rows.emphasis[i][k]
        });
        Barycentric {
            support: chosen.iter().map(|&j| points[j]).collect(),
            weights: least_singular_vector(loewner),
            values: chosen.iter().map(|&j| values[j].clone()).collect(),
        }
    }

    /// The value at a point.
    pub(super) fn eval(&self, t: f64) -> Vec<Complex64> {
        if let Some(j) = self.support.iter().position(|s| *s == t) {
            return self.values[j].clone();
        }
        let components = self.values.first().map_or(0, Vec::len);
        let mut denominator = Complex64::new(0.0, 0.0);
        let mut size = 0.0;
        let mut sums = vec![Complex64::new(0.0, 0.0); components];
        for ((s, w), value) in self.support.iter().zip(&self.weights).zip(&self.values) {
            let term = w / (t - s);
            denominator += term;
            size += term.norm();
            for (sum, v) in sums.iter_mut().zip(value) {
                *sum += term * v;
            }
        }
        // Exactly on a pole: very large, not infinite.
        if denominator.norm() < 1e-15 * size {
            denominator = Complex64::new(1e-15 * size, 0.0);
        }
        for sum in &mut sums {
            *sum /= denominator;
        }
        sums
    }

    /// The poles: the zeros of Σ wⱼ/(t − tⱼ), as eigenvalues.
    ///
    /// They are the transmission zeros of the system (A, B, C) = (diag t, 1, wᵀ), which are the eigenvalues of
    /// A − B (CB)⁻¹ C A but for one zero eigenvalue; the points are moved away from the origin first so that it stands apart.
    pub(super) fn poles(&self) -> Vec<Complex64> {
        const AWAY: f64 = 10.0;
        let n = self.support.len();
        let sum: Complex64 = self.weights.iter().sum();
        if n < 2 || sum.norm() < 1e-14 {
            return Vec::new();
        }
        let matrix = DMatrix::from_fn(n, n, |i, j| {
            let moved = self.support[j] + AWAY;
            let diagonal = if i == j { Complex64::new(moved, 0.0) } else { Complex64::new(0.0, 0.0) };
            diagonal - self.weights[j] * moved / sum
        });
        let Some(schur) = nalgebra::Schur::try_new(matrix, 1e-14, 10_000) else { return Vec::new() };
        let triangle = schur.unpack().1;
        let mut eigenvalues: Vec<Complex64> = (0..n).map(|i| triangle[(i, i)]).collect();
        if let Some(spurious) = (0..n).min_by(|a, b| eigenvalues[*a].norm().total_cmp(&eigenvalues[*b].norm())) {
            eigenvalues.swap_remove(spurious);
        }
        eigenvalues.into_iter().map(|e| e - AWAY).collect()
    }
}

/// What the weights are fitted to: the components brought to a common size, and how much each equation counts.
struct Rows {
    functions: Vec<Vec<Complex64>>,
    emphasis: Vec<Vec<f64>>,
}

impl Rows {
    fn new(values: &[Vec<Complex64>], measure: &Measure) -> Self {
        let scaled: Vec<Vec<Complex64>> =
            values.iter().map(|v| v.iter().zip(&measure.floors).map(|(x, floor)| x / floor).collect()).collect();
        if measure.floors.len() <= MOST_COMPONENTS {
            let emphasis = values
                .iter()
                .map(|v| v.iter().enumerate().map(|(k, x)| measure.floors[k] / measure.size(k, *x)).collect())
                .collect();
            return Rows { functions: scaled, emphasis };
        }
        // X = R^H Q^H with Q's columns orthonormal: the n columns of R^H say everything about the fit that X says.
        let (points, components) = (values.len(), measure.floors.len());
        let adjoint = DMatrix::from_fn(components, points, |k, i| scaled[i][k].conj());
        let triangle = adjoint.qr().unpack_r();
        let functions: Vec<Vec<Complex64>> =
            (0..points).map(|i| triangle.column(i).iter().map(|x| x.conj()).collect()).collect();
        let emphasis = functions
            .iter()
            .map(|row: &Vec<Complex64>| {
                let norm = row.iter().map(Complex64::norm_sqr).sum::<f64>().sqrt();
                vec![if norm > 0.0 { 1.0 / norm } else { 1.0 }; row.len()]
            })
            .collect();
        Rows { functions, emphasis }
    }

    fn components(&self) -> usize {
        self.functions.first().map_or(0, Vec::len)
    }

    /// As many weights as the equations carry, with at least two samples left to be met by fit alone.
    fn most_support_points(&self) -> usize {
        let points = self.functions.len();
        let independent = self.independent_components();
        let carried = (points * independent).div_ceil(independent + 1);
        carried.min(points.saturating_sub(2)).max(1)
    }

    /// Components that are not combinations of others over these samples.
    fn independent_components(&self) -> usize {
        let matrix = DMatrix::from_fn(self.functions.len(), self.components(), |i, k| self.functions[i][k]);
        let singular = matrix.singular_values();
        let largest = singular.iter().copied().fold(0.0, f64::max);
        singular.iter().filter(|s| **s > 1e-8 * largest).count().max(1)
    }
}

fn furthest_from_mean(values: &[Vec<Complex64>], measure: &Measure) -> usize {
    let count = values.len() as f64;
    let components = measure.floors.len();
    let mean: Vec<Complex64> =
        (0..components).map(|k| values.iter().map(|v| v[k]).sum::<Complex64>() / count).collect();
    (0..values.len())
        .max_by(|a, b| measure.deviation(&values[*a], &mean).total_cmp(&measure.deviation(&values[*b], &mean)))
        .unwrap_or(0)
}

/// The unit vector that the matrix makes least of.
fn least_singular_vector(matrix: DMatrix<Complex64>) -> Vec<Complex64> {
    let columns = matrix.ncols();
    if columns < 2 || matrix.nrows() == 0 {
        return vec![Complex64::new(1.0, 0.0); columns];
    }
    // The triangle has the singular vectors of the whole, and the shape the decomposition wants: at least square.
    let tall = if matrix.nrows() < columns { matrix.insert_rows(0, columns, Complex64::new(0.0, 0.0)) } else { matrix };
    let triangle = tall.qr().unpack_r();
    let decomposition = nalgebra::SVD::new(triangle, false, true);
    let least = decomposition.singular_values.imin();
    match decomposition.v_t {
        Some(v_t) => v_t.row(least).iter().map(|x| x.conj()).collect(),
        None => vec![Complex64::new(1.0, 0.0); columns],
    }
}
