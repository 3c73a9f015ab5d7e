//! Gauss–Legendre panels laid along a path so that each keeps its distance from the branch points and the pole.

use num_complex::Complex64;
use std::sync::OnceLock;

/// Largest Gauss order in use.
pub(super) const MOST_NODES: usize = 24;

/// Nodes and weights of the n-point Gauss–Legendre rule on [−1, 1], by Newton's method on the three-term recurrence.
pub(super) fn gauss(n: usize) -> &'static [(f64, f64)] {
    static RULES: OnceLock<Vec<Vec<(f64, f64)>>> = OnceLock::new();
    &RULES.get_or_init(|| (0..=MOST_NODES).map(gauss_rule).collect())[n.min(MOST_NODES)]
}

fn gauss_rule(n: usize) -> Vec<(f64, f64)> {
    let order = n as f64;
    (0..n)
        .map(|i| {
            let mut x = (std::f64::consts::PI * (i as f64 + 0.75) / (order + 0.5)).cos();
            let mut slope = 1.0;
            for _ in 0..60 {
                let (value, derivative) = legendre(n, x);
                slope = derivative;
                let step = value / derivative;
                x -= step;
                if step.abs() < 1e-16 {
                    break;
                }
            }
            (x, 2.0 / ((1.0 - x * x) * slope * slope))
        })
        .collect()
}

fn legendre(n: usize, x: f64) -> (f64, f64) {
    let (mut before, mut value) = (0.0, 1.0);
    for i in 0..n {
        let i = i as f64;
        (before, value) = (value, ((2.0 * i + 1.0) * x * value - i * before) / (i + 1.0));
    }
    (value, n as f64 * (x * value - before) / (x * x - 1.0))
}

/// How finely a path is cut.
#[derive(Debug, Clone, Copy)]
pub(super) struct Fineness {
    /// Gauss nodes in each panel.
    pub nodes: usize,
    /// Longest panel in units of the distance from its start to the nearest singularity.
    pub reach: f64,
    /// Longest panel in radians of the fastest oscillation.
    pub radians: f64,
    /// Where exponentials are cut off: e^{−depth}.
    pub depth: f64,
    /// Smallest λρ at which Hankel functions take over.
    pub hankel_from: f64,
}

/// For direct evaluation.
pub(super) const FINE: Fineness = Fineness { nodes: 20, reach: 1.0, radians: 8.0, depth: 34.0, hankel_from: 6.0 };

/// Panel ends from `from` to `to`, given the singular points in the path's own parameter and the local largest
/// step that the oscillation allows.
pub(super) fn cut(
    from: f64,
    to: f64,
    singular: &[Complex64],
    fineness: &Fineness,
    longest: impl Fn(f64) -> f64,
) -> Vec<f64> {
    let mut ends = vec![from];
    let mut at = from;
    let least = 1e-11 * (to - from).abs();
    while at < to {
        let near = singular.iter().map(|s| (s - at).norm_sqr()).fold(f64::INFINITY, f64::min).sqrt();
        let step = (fineness.reach * near).min(longest(at)).max(least);
        at = if at + 1.2 * step >= to { to } else { at + step };
        ends.push(at);
    }
    ends
}
