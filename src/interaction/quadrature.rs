//! Gauss–Legendre rules and Legendre polynomials.

use std::sync::OnceLock;

/// Largest rule kept.
pub const MAX_POINTS: usize = 40;

/// A quadrature rule on −1..=1.
#[derive(Debug, Clone)]
pub struct Rule {
    /// Nodes, ascending.
    pub nodes: Vec<f64>,
    /// Weights, summing to 2.
    pub weights: Vec<f64>,
}

/// Gauss–Legendre rule with `n` points (1 to [`MAX_POINTS`]); exact for polynomials of degree 2n − 1.
///
/// Nodes by Newton's method on P_n from the Chebyshev-like first guess (Abramowitz & Stegun 25.4.29).
#[must_use]
pub fn gauss(n: usize) -> &'static Rule {
    static RULES: OnceLock<Vec<Rule>> = OnceLock::new();
    &RULES.get_or_init(|| (0..=MAX_POINTS).map(make).collect())[n.clamp(1, MAX_POINTS)]
}

fn make(n: usize) -> Rule {
    let mut nodes = vec![0.0; n];
    let mut weights = vec![0.0; n];
    for i in 0..n {
        let mut x = -((std::f64::consts::PI * (i as f64 + 0.75)) / (n as f64 + 0.5)).cos();
        let mut slope = 1.0;
        for _ in 0..100 {
            let (p, d) = legendre_with_slope(n, x);
            slope = d;
            let step = p / d;
            x -= step;
            if step.abs() < 1e-16 {
                break;
            }
        }
        nodes[i] = x;
        weights[i] = 2.0 / ((1.0 - x * x) * slope * slope);
    }
    Rule { nodes, weights }
}

fn legendre_with_slope(n: usize, x: f64) -> (f64, f64) {
    let (mut p0, mut p1) = (1.0, x);
    if n == 0 {
        return (1.0, 0.0);
    }
    for k in 2..=n {
        let k = k as f64;
        (p0, p1) = (p1, ((2.0 * k - 1.0) * x * p1 - (k - 1.0) * p0) / k);
    }
    (p1, n as f64 * (x * p1 - p0) / (x * x - 1.0))
}

/// P_0..P_3 at x.
#[must_use]
pub fn legendre(x: f64) -> [f64; 4] {
    [1.0, x, 0.5 * (3.0 * x * x - 1.0), 0.5 * x * (5.0 * x * x - 3.0)]
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn rules_integrate_the_polynomials_they_claim() {
        for n in 1..=MAX_POINTS {
            let rule = gauss(n);
            let at =
                |degree: i32| -> f64 { rule.nodes.iter().zip(&rule.weights).map(|(x, w)| w * x.powi(degree)).sum() };
            let even = (2 * n - 2) as i32;
            assert!((at(even) - 2.0 / f64::from(even + 1)).abs() < 1e-13, "n = {n}");
            let beyond = (2 * n) as i32;
            assert!(n > 12 || (at(beyond) - 2.0 / f64::from(beyond + 1)).abs() > 1e-12, "n = {n} must miss x^{beyond}");
        }
    }
}
