//! Interpolation at the Gauss nodes of a line that holds several elements.

use super::block::SIDE;
use super::quadrature::{gauss, legendre};
use std::sync::OnceLock;

/// Most nodes on a line.
pub(super) const MOST_NODES: usize = 16;

/// P_0, P_1, ...
type Values = [f64; MOST_NODES];

/// Means over a stretch of −1..1 of P_b (on the stretch) times the Lagrange polynomials of `count` Gauss nodes; rows b, columns nodes,
/// zero beyond `count`.
///
/// ℓ_q(x) = w_q Σ_n (n + ½) P_n(x_q) P_n(x), exact for the Gauss rule's own nodes (discrete orthogonality).
pub(super) fn stretch_weights<const N: usize>(count: usize, from: f64, to: f64) -> [[f64; N]; SIDE] {
    let nodes = gauss(count);
    let values = node_values(count);
    let rule = gauss((count + SIDE).div_ceil(2));
    let mut out = [[0.0; N]; SIDE];
    for (eta, w) in rule.nodes.iter().zip(&rule.weights) {
        let x = all_legendre(count, 0.5 * ((1.0 - eta) * from + (1.0 + eta) * to));
        let p = legendre(*eta);
        for q in 0..count.min(N) {
            let sum: f64 = x.iter().zip(&values[q]).take(count).map(|(x, y)| x * y).sum();
            let lagrange = nodes.weights[q] * sum;
            for (row, p) in out.iter_mut().zip(p) {
                row[q] += 0.5 * w * p * lagrange;
            }
        }
    }
    out
}

/// (n + ½) P_n at every node of the rules.
fn node_values(count: usize) -> &'static [Values] {
    static VALUES: OnceLock<Vec<Vec<Values>>> = OnceLock::new();
    let all = VALUES.get_or_init(|| {
        let at = |count: usize, x: &f64| {
            let p = all_legendre(count, *x);
            std::array::from_fn(|n| (n as f64 + 0.5) * p[n])
        };
        (0..=MOST_NODES).map(|count| gauss(count).nodes.iter().map(|x| at(count, x)).collect()).collect()
    });
    &all[count.min(MOST_NODES)]
}

/// P_0..P_{count − 1} at x.
fn all_legendre(count: usize, x: f64) -> Values {
    let mut p = [0.0; MOST_NODES];
    p[0] = 1.0;
    p[1] = x;
    for n in 2..count.min(MOST_NODES) {
        let m = n as f64;
        p[n] = ((2.0 * m - 1.0) * x * p[n - 1] - (m - 1.0) * p[n - 2]) / m;
    }
    p
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn means_of_polynomials_come_out_of_their_nodes_exactly() {
        for count in 2..=8 {
            let (from, to) = (-0.3, 0.55);
            let weights = stretch_weights::<8>(count, from, to);
            let nodes = &gauss(count).nodes;
            for power in 0..count as i32 {
                let rule = gauss(8);
                for b in 0..SIDE {
                    let at = |eta: f64| (0.5 * ((1.0 - eta) * from + (1.0 + eta) * to)).powi(power) * legendre(eta)[b];
                    let want: f64 = rule.nodes.iter().zip(&rule.weights).map(|(eta, w)| 0.5 * w * at(*eta)).sum();
                    let got: f64 = nodes.iter().zip(&weights[b]).map(|(x, w)| w * x.powi(power)).sum();
                    assert!((got - want).abs() < 1e-13, "{count} {power} {b}: {got} {want}");
                }
            }
            let (power, rule) = (count as i32, gauss(8));
            let at = |eta: f64| (0.5 * ((1.0 - eta) * from + (1.0 + eta) * to)).powi(power);
            let want: f64 = rule.nodes.iter().zip(&rule.weights).map(|(eta, w)| 0.5 * w * at(*eta)).sum();
            let got: f64 = nodes.iter().zip(&weights[0]).map(|(x, w)| w * x.powi(power)).sum();
            assert!((got - want).abs() > 1e-7, "{count} nodes cannot know x^{power}");
        }
    }
}
