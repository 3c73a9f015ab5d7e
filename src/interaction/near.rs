//! Static moments of element pairs that touch or lie close: ∫∫ P_a P_b f(R) ds ds' for f = 1/R and f = R.
//!
//! e^{−jkR}/R = 1/R − k²R/2 + (a rest smooth enough for plain Gauss rules), so these two real matrices, which do not depend
//! on frequency, carry all that is nearly singular.
//!
//! - Coaxial tubes: R² = z² + a² + b² − 2ab cos φ averaged over φ; the double integral becomes a single one over z = s − s' with
//!   the polynomial correlation of the two elements as weight.
//! - Otherwise the inner integral is closed (powers of u over √(u² + h²)), the outer one a Gauss rule clustered by
//!   s = s_0 + δ sinh t about the places closest to the other element's ends.

use super::line::{Line, Tubes, distance_to};
use super::quadrature::{gauss, legendre};
use crate::mesh::MAX_DEGREE;

/// Moments against Legendre polynomials: row a on the first element, column b on the second.
pub(crate) type Moments = [[f64; MAX_DEGREE + 1]; MAX_DEGREE + 1];

/// Both static moment matrices of a pair, m (for 1/R) and m³ (for R).
#[derive(Debug, Clone, Copy)]
pub(crate) struct Static {
    pub(crate) inverse: Moments,
    pub(crate) direct: Moments,
}

const NONE: Moments = [[0.0; MAX_DEGREE + 1]; MAX_DEGREE + 1];

/// Static moments of a pair.
pub(crate) fn moments(one: &Line, two: &Line, tubes: Tubes) -> Static {
    match tubes {
        Tubes::Coaxial => coaxial(one, two),
        // the closed inner integral goes over the longer one: its powers then lose no digits
        Tubes::Offset(c2) if one.length_m <= two.length_m => offset(one, two, c2),
        Tubes::Offset(c2) => transposed(&offset(two, one, c2)),
    }
}

fn transposed(s: &Static) -> Static {
    let flip = |m: &Moments| std::array::from_fn(|a| std::array::from_fn(|b| m[b][a]));
    Static { inverse: flip(&s.inverse), direct: flip(&s.direct) }
}

/// Mean of 1/R over the circumferences of two coaxial tubes, (2/π) K(m)/√(z² + (a+b)²), m = 4ab/(z² + (a+b)²).
///
/// The complete elliptic integral is π/2 over the arithmetic–geometric mean of √(z² + (a+b)²) and √(z² + (a−b)²) (Gauss;
/// DLMF 19.8.5).
pub(crate) fn ring_inverse_distance(z: f64, a: f64, b: f64) -> f64 {
    let mut x = (z * z + (a + b) * (a + b)).sqrt();
    let mut y = (z * z + (a - b) * (a - b)).sqrt();
    for _ in 0..40 {
        if (x - y).abs() <= 4e-16 * x {
            break;
        }
        (x, y) = (0.5 * (x + y), (x * y).sqrt());
    }
    1.0 / x
}

fn coaxial(one: &Line, two: &Line) -> Static {
    // coordinates along the common line, from the start of `one`, in its direction
    let along = one.tangent.dot(&two.tangent).signum();
    let p = (two.start - one.start).dot(&one.tangent);
    let (low, high) = if along > 0.0 { (p, p + two.length_m) } else { (p - two.length_m, p) };
    let (a, b) = (one.radius_m, two.radius_m);
    let mut out = Static { inverse: NONE, direct: NONE };
    // z = s − s' runs from −high to L1 − low; the correlation has corners where ends meet, the kernel its peak at 0
    let mut knots = vec![-high, -low, one.length_m - high, one.length_m - low];
    let reach = (knots[0], knots[3]);
    if reach.0 < 0.0 && reach.1 > 0.0 {
        knots.push(0.0);
    }
    knots.sort_by(f64::total_cmp);
    let tiny = 1e-12 * (one.length_m + two.length_m);
    for pair in knots.windows(2) {
        if pair[1] - pair[0] <= tiny {
            continue;
        }
        cluster(pair[0], pair[1], 0.0, (a + b).min(pair[1] - pair[0]), |z, weight| {
            let f = weight * ring_inverse_distance(z, a, b);
            let r = weight * (z * z + a * a + b * b).sqrt();
            // s over the overlap of [0, L1] and [low + z, high + z]
            let s0 = 0.0_f64.max(low + z);
            let s1 = one.length_m.min(high + z);
            let rule = gauss(MAX_DEGREE + 1);
            for (x, w) in rule.nodes.iter().zip(&rule.weights) {
                let s = 0.5 * ((s1 - s0) * x + s1 + s0);
                let u = s - z;
                let pa = legendre(2.0 * s / one.length_m - 1.0);
                let pb = legendre(along * (2.0 * (u - low) / two.length_m - 1.0));
                let w = 0.5 * w * (s1 - s0);
                add(&mut out.inverse, &pa, &pb, w * f);
                add(&mut out.direct, &pa, &pb, w * r);
            }
        });
    }
    out
}

fn add(m: &mut Moments, pa: &[f64; 4], pb: &[f64; 4], w: f64) {
    for (row, x) in m.iter_mut().zip(pa) {
        for (cell, y) in row.iter_mut().zip(pb) {
            *cell += w * x * y;
        }
    }
}

/// Integrate over [from, to] with points clustered towards `centre` (inside, at an end of, or outside the interval) on the
/// scale `delta`: s = centre + δ sinh t, plus a power map against the logarithm that sits at t = 0.
fn cluster(from: f64, to: f64, centre: f64, delta: f64, mut f: impl FnMut(f64, f64)) {
    let t = |s: f64| ((s - centre) / delta).asinh();
    let (t0, t1) = (t(from), t(to));
    let at_edge = (from - centre).abs().min((to - centre).abs()) < 1e-9 * delta;
    let n = (10.0 + 1.8 * (t1 - t0)).min(36.0) as usize;
    let rule = gauss(if at_edge { n + 4 } else { n });
    for (x, w) in rule.nodes.iter().zip(&rule.weights) {
        let y = 0.5 * (1.0 + x);
        // t = t_edge + T y³ puts the nodes densely where the logarithm is
        let (tau, slope) = if !at_edge {
            (t0 + (t1 - t0) * y, t1 - t0)
        } else if (from - centre).abs() < (to - centre).abs() {
            (t0 + (t1 - t0) * y * y * y, 3.0 * (t1 - t0) * y * y)
        } else {
            let v = 1.0 - y;
            (t1 - (t1 - t0) * v * v * v, 3.0 * (t1 - t0) * v * v)
        };
        f(centre + delta * tau.sinh(), 0.5 * w * slope * delta * tau.cosh());
    }
}

fn offset(one: &Line, two: &Line, c2: f64) -> Static {
    let mut out = Static { inverse: NONE, direct: NONE };
    let foot = |p: crate::layout::Point| (p - one.start).dot(&one.tangent);
    let mut knots = vec![0.0, one.length_m];
    for p in [two.start, two.end] {
        let s = foot(p);
        if s > 1e-9 * one.length_m && s < one.length_m * (1.0 - 1e-9) {
            knots.push(s);
        }
    }
    knots.sort_by(f64::total_cmp);
    for pair in knots.windows(2) {
        let middle = 0.5 * (pair[0] + pair[1]);
        for (edge, from, to) in [(pair[0], pair[0], middle), (pair[1], middle, pair[1])] {
            let scale = (distance_to(two, one.start + one.tangent * edge).powi(2) + c2).sqrt();
            cluster_smooth(from, to, edge, scale.max(1e-9 * one.length_m), |s, weight| {
                let (inverse, direct) = inner(one, two, s, c2);
                let pa = legendre(2.0 * s / one.length_m - 1.0);
                add(&mut out.inverse, &pa, &inverse, weight);
                add(&mut out.direct, &pa, &direct, weight);
            });
        }
    }
    out
}

/// As [`cluster`] without the power map: the integrand is smooth on the scale `delta`.
fn cluster_smooth(from: f64, to: f64, centre: f64, delta: f64, mut f: impl FnMut(f64, f64)) {
    let t = |s: f64| ((s - centre) / delta).asinh();
    let (t0, t1) = (t(from), t(to));
    let rule = gauss((6.0 + 2.5 * (t1 - t0)).min(32.0) as usize);
    for (x, w) in rule.nodes.iter().zip(&rule.weights) {
        let tau = t0 + (t1 - t0) * 0.5 * (1.0 + x);
        f(centre + delta * tau.sinh(), 0.5 * w * (t1 - t0) * delta * tau.cosh());
    }
}

/// ∫ P_b(s') /R ds' and ∫ P_b(s') R ds' over `two`, seen from the point s of `one`, R² = D² + c².
fn inner(one: &Line, two: &Line, s: f64, c2: f64) -> ([f64; 4], [f64; 4]) {
    let d = one.start + one.tangent * s - two.start;
    let s0 = d.dot(&two.tangent);
    let h2 = ((d - two.tangent * s0).norm_squared() + c2).max(1e-24);
    let (u1, u2) = (-s0, two.length_m - s0);
    let (r1, r2) = ((u1 * u1 + h2).sqrt(), (u2 * u2 + h2).sqrt());
    // I_n = ∫ u^n / R du: I_0 = ln((u2 + R2)/(u1 + R1)), n I_n = [u^{n−1} R] − (n−1) h² I_{n−2}
    let log = if u1 >= 0.0 {
        ((u2 + r2) / (u1 + r1)).ln()
    } else if u2 <= 0.0 {
        ((r1 - u1) / (r2 - u2)).ln()
    } else {
        ((u2 + r2) * (r1 - u1) / h2).ln()
    };
    let mut i = [log, r2 - r1, 0.0, 0.0, 0.0, 0.0];
    let (mut p1, mut p2) = (u1, u2);
    for n in 2..6 {
        let m = n as f64;
        i[n] = (p2 * r2 - p1 * r1 - (m - 1.0) * h2 * i[n - 2]) / m;
        p1 *= u1;
        p2 *= u2;
    }
    // ∫ u^n R du = I_{n+2} + h² I_n
    let direct = [i[2] + h2 * i[0], i[3] + h2 * i[1], i[4] + h2 * i[2], i[5] + h2 * i[3]];
    (to_legendre(&[i[0], i[1], i[2], i[3]], s0, two.length_m), to_legendre(&direct, s0, two.length_m))
}

/// Power moments about the foot point to Legendre moments over the element: ξ = α + βu.
fn to_legendre(m: &[f64; 4], s0: f64, length: f64) -> [f64; 4] {
    let (alpha, beta) = (2.0 * s0 / length - 1.0, 2.0 / length);
    let x1 = alpha * m[0] + beta * m[1];
    let x2 = alpha * alpha * m[0] + 2.0 * alpha * beta * m[1] + beta * beta * m[2];
    let x3 = alpha.powi(3) * m[0]
        + 3.0 * alpha * alpha * beta * m[1]
        + 3.0 * alpha * beta * beta * m[2]
        + beta.powi(3) * m[3];
    [m[0], x1, 0.5 * (3.0 * x2 - m[0]), 0.5 * (5.0 * x3 - 3.0 * x1)]
}

#[cfg(test)]
mod tests {
    use super::super::line::tubes;
    use super::*;
    use crate::layout::Point;

    fn line(start: [f64; 3], end: [f64; 3], radius_m: f64) -> Line {
        let (start, end) = (Point::from(start), Point::from(end));
        let length_m = (end - start).norm();
        Line { start, end, tangent: (end - start) / length_m, length_m, radius_m }
    }

    /// Composite 20-point rule over panels halved towards every given place.
    fn graded(from: f64, to: f64, towards: &[f64], mut f: impl FnMut(f64, f64)) {
        let mut cuts = vec![from, to];
        for &c in towards {
            let c = c.clamp(from, to);
            let mut step = to - from;
            for _ in 0..45 {
                cuts.extend([c - step, c + step].into_iter().filter(|x| *x > from && *x < to));
                step *= 0.5;
            }
            cuts.push(c);
        }
        cuts.sort_by(f64::total_cmp);
        let rule = gauss(20);
        for p in cuts.windows(2) {
            let (m, h) = (0.5 * (p[0] + p[1]), 0.5 * (p[1] - p[0]));
            if h > 0.0 {
                for (x, w) in rule.nodes.iter().zip(&rule.weights) {
                    f(m + h * x, w * h);
                }
            }
        }
    }

    /// Both moment matrices by brute force, the kernel straight from its definition.
    fn brute(one: &Line, two: &Line, tubes: Tubes) -> Static {
        let mut out = Static { inverse: NONE, direct: NONE };
        let feet = |l: &Line, o: &Line| -> Vec<f64> {
            [o.start, o.end].iter().map(|p| (p - l.start).dot(&l.tangent)).collect()
        };
        graded(0.0, one.length_m, &feet(one, two), |s, w| {
            let p = one.start + one.tangent * s;
            let pa = legendre(2.0 * s / one.length_m - 1.0);
            let foot = (p - two.start).dot(&two.tangent);
            graded(0.0, two.length_m, &[foot], |u, v| {
                let d2 = (two.start + two.tangent * u - p).norm_squared();
                let (inverse, direct) = match tubes {
                    Tubes::Offset(c2) => (1.0 / (d2 + c2).sqrt(), (d2 + c2).sqrt()),
                    Tubes::Coaxial => {
                        let squares = one.radius_m.powi(2) + two.radius_m.powi(2);
                        (ring_inverse_distance(d2.sqrt(), one.radius_m, two.radius_m), (d2 + squares).sqrt())
                    }
                };
                let pb = legendre(2.0 * u / two.length_m - 1.0);
                add(&mut out.inverse, &pa, &pb, w * v * inverse);
                add(&mut out.direct, &pa, &pb, w * v * direct);
            });
        });
        out
    }

    /// Largest difference over the largest moment.
    fn apart(a: &Moments, b: &Moments) -> f64 {
        let flat = |m: &Moments| -> Vec<f64> { m.iter().flatten().copied().collect() };
        let scale = flat(b).iter().fold(0.0_f64, |m, x| m.max(x.abs()));
        flat(a).iter().zip(flat(b)).map(|(x, y)| (x - y).abs()).fold(0.0, f64::max) / scale
    }

    /// Stated bound of the moments of 1/R of near pairs, relative to the pair's largest.
    const BOUND_INVERSE: f64 = 1e-7;
    /// The same of R, which enters times k²/2: a few hundredths of the whole on the longest element.
    const BOUND_DIRECT: f64 = 5e-5;

    #[test]
    fn moments_of_near_pairs_keep_their_bound() {
        let a = 0.8e-3;
        let slanting = [0.0, 0.960_77, 0.277_35];
        let along = |s: f64| slanting.map(|x| x * s);
        let pairs = [
            // the same element, neighbours on a line, a neighbour much longer, a step in radius
            (line([0.0; 3], [0.0, 0.0, 0.01], a), line([0.0; 3], [0.0, 0.0, 0.01], a)),
            (line([0.0; 3], [0.0, 0.0, 1.0], a), line([0.0; 3], [0.0, 0.0, 1.0], a)),
            (line([0.0; 3], [0.0, 0.0, 0.005], a), line([0.0, 0.0, 0.005], [0.0, 0.0, 0.012], a)),
            (line([0.0; 3], [0.0, 0.0, 0.003], a), line([0.0, 0.0, 0.003], [0.0, 0.0, 1.4], a)),
            (line([0.0; 3], [0.0, 0.0, 0.02], a), line([0.0, 0.0, 0.02], [0.0, 0.0, 0.1], 4.0 * a)),
            (line([0.0; 3], [0.0, 0.0, 0.02], a), line([0.0, 0.0, 0.1], [0.0, 0.0, 0.021], a)),
            // meeting at an angle: elements shorter than the other's radius, a sharp angle, very unlike lengths
            (line([0.0; 3], along(0.000_71), a), line([0.0; 3], [0.0, 0.0, -0.004_94], 1.75e-3)),
            (line(along(0.000_71), along(0.0016), a), line([0.0; 3], [0.0, 0.0, -0.004_94], 1.75e-3)),
            (line(along(0.0016), along(0.0025), a), line([0.0, 0.0, -0.004_94], [0.0, 0.0, -0.0114], 1.75e-3)),
            (line([0.0; 3], [1.0, 0.0, 0.0], a), line([0.0; 3], [0.7, 0.3, 0.0], a)),
            (line([0.0; 3], [0.005, 0.0, 0.0], a), line([0.0; 3], [0.0, 1.2, 0.0], a)),
            // side by side, crossing, end over the middle
            (line([0.0; 3], [1.0, 0.0, 0.0], a), line([0.2, 0.01, 0.0], [1.1, 0.01, 0.0], a)),
            (line([0.0; 3], [1.0, 0.0, 0.0], a), line([0.5, -0.4, 0.02], [0.6, 0.5, 0.02], a)),
            (line([0.0; 3], [1.0, 0.0, 0.0], a), line([0.3, 0.0, 0.03], [0.3, 0.0, 0.9], a)),
            (line([0.0; 3], [1.0, 0.0, 0.0], a), line([0.3, 0.0, 0.004], [0.35, 0.0, 0.004], a)),
        ];
        for (k, (one, two)) in pairs.iter().enumerate() {
            let touch =
                [one.start, one.end].iter().any(|p| (p - two.start).norm() < 1e-9 || (p - two.end).norm() < 1e-9);
            let kind = tubes(one, two, touch);
            let (got, want) = (moments(one, two, kind), brute(one, two, kind));
            let (i, d) = (apart(&got.inverse, &want.inverse), apart(&got.direct, &want.direct));
            assert!(i < BOUND_INVERSE && d < BOUND_DIRECT, "pair {k} {kind:?}: {i:e} {d:e}");
        }
    }
}
