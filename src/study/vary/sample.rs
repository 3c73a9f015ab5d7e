//! Which points: the product of all axes, or a Latin hypercube over them.

use super::axis::{Axis, MOST_POINTS};

/// How points are chosen.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Sampling {
    /// Every combination; the last axis runs fastest.
    Grid,
    /// As many points as samples: each axis is cut into that many equal shares and every share is used once (M. D. McKay,
    /// R. J. Beckman and W. J. Conover, Technometrics 21(2), 239–245, 1979).
    LatinHypercube {
        /// How many points.
        samples: usize,
        /// Start of the random numbers; the same seed gives the same points.
        seed: u64,
    },
}

/// Why no points can be made.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
pub enum SampleError {
    /// No axis.
    #[error("nothing is varied: give --over 'PATH = 4 m .. 25 m by 0.5 m'")]
    NoAxis,
    /// The same path twice.
    #[error("{path} is varied twice; give each path one --over")]
    Twice {
        /// Which.
        path: String,
    },
    /// A grid needs steps.
    #[error("the range of {path} has no step; add `by STEP`, or sample it with --samples N")]
    NoStep {
        /// Which.
        path: String,
    },
    /// Too many, or none.
    #[error("{count} points are outside 1 to {MOST_POINTS}; take longer steps, or --samples N")]
    Count {
        /// How many.
        count: String,
    },
}

/// All points, each the values of the axes in their order.
///
/// # Errors
/// [`SampleError`].
pub(super) fn points(axes: &[Axis], sampling: Sampling) -> Result<Vec<Vec<String>>, SampleError> {
    if axes.is_empty() {
        return Err(SampleError::NoAxis);
    }
    if let Some((_, axis)) = axes.iter().enumerate().find(|(n, a)| axes[..*n].iter().any(|b| b.path == a.path)) {
        return Err(SampleError::Twice { path: axis.path.clone() });
    }
    match sampling {
        Sampling::Grid => grid(axes),
        Sampling::LatinHypercube { samples, seed } if (1..=MOST_POINTS).contains(&samples) => {
            Ok(latin_hypercube(axes, samples, seed))
        }
        Sampling::LatinHypercube { samples, .. } => Err(SampleError::Count { count: samples.to_string() }),
    }
}

fn grid(axes: &[Axis]) -> Result<Vec<Vec<String>>, SampleError> {
    let counts = axes
        .iter()
        .map(|a| a.count().ok_or_else(|| SampleError::NoStep { path: a.path.clone() }))
        .collect::<Result<Vec<_>, _>>()?;
    let total = counts.iter().try_fold(1_usize, |n, c| n.checked_mul(*c)).filter(|n| *n <= MOST_POINTS);
    let Some(total) = total else {
        let product: f64 = counts.iter().map(|c| *c as f64).product();
        return Err(SampleError::Count { count: format!("{product:.3e}") });
    };
    let point = |mut n: usize| {
        let mut values: Vec<String> = Vec::with_capacity(axes.len());
        for (axis, count) in axes.iter().zip(&counts).rev() {
            values.push(axis.at(n % count));
            n /= count;
        }
        values.reverse();
        values
    };
    Ok((0..total).map(point).collect())
}

fn latin_hypercube(axes: &[Axis], samples: usize, seed: u64) -> Vec<Vec<String>> {
    let mut random = SplitMix(seed);
    let mut points = vec![Vec::with_capacity(axes.len()); samples];
    for axis in axes {
        let mut shares: Vec<usize> = (0..samples).collect();
        for last in (1..samples).rev() {
            shares.swap(last, (random.next_share() * (last + 1) as f64) as usize);
        }
        for (point, share) in points.iter_mut().zip(shares) {
            point.push(axis.at_share((share as f64 + random.next_share()) / samples as f64));
        }
    }
    points
}

/// SplitMix64 (G. L. Steele, D. Lea and C. H. Flood, OOPSLA 2014, "Fast splittable pseudorandom number generators").
struct SplitMix(u64);

impl SplitMix {
    /// Uniform in 0 to 1, 1 not reached.
    fn next_share(&mut self) -> f64 {
        self.0 = self.0.wrapping_add(0x9e37_79b9_7f4a_7c15);
        let mut z = self.0;
        z = (z ^ (z >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
        z = (z ^ (z >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
        ((z ^ (z >> 31)) >> 11) as f64 / (1_u64 << 53) as f64
    }
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]
    use super::*;

    fn axes(texts: &[&str]) -> Vec<Axis> {
        texts.iter().map(|t| Axis::read(t).unwrap()).collect()
    }

    #[test]
    fn a_grid_is_the_product_of_its_axes() {
        let all = points(&axes(&["a.b = 1 .. 3 by 1", "earth.soil = dry sand | bog"]), Sampling::Grid).unwrap();
        assert_eq!(all.len(), 6);
        assert_eq!(all[1], ["1", "bog"]);
        assert_eq!(all[4], ["3", "dry sand"]);
    }

    #[test]
    fn a_latin_hypercube_uses_every_share_once_and_repeats_with_its_seed() {
        let over = axes(&["a.b = 0 .. 50 m", "c.d = 100 .. 200", "e.f = x | y"]);
        let hypercube = |seed| points(&over, Sampling::LatinHypercube { samples: 50, seed }).unwrap();
        let all = hypercube(7);
        let number = |text: &str| text.split(' ').next().unwrap().parse::<f64>().unwrap();
        let mut shares: Vec<usize> = all.iter().map(|p| number(&p[0]) as usize).collect();
        shares.sort_unstable();
        assert_eq!(shares, (0..50).collect::<Vec<_>>());
        let mut second: Vec<usize> = all.iter().map(|p| ((number(&p[1]) - 100.0) / 2.0) as usize).collect();
        second.sort_unstable();
        assert_eq!(second, (0..50).collect::<Vec<_>>());
        assert_eq!(all.iter().filter(|p| p[2] == "x").count(), 25);
        assert_eq!(all, hypercube(7));
        assert_ne!(all, hypercube(8));
    }

    #[test]
    fn what_makes_no_points_is_refused() {
        let refused = |texts: &[&str], sampling| points(&axes(texts), sampling).unwrap_err().to_string();
        assert!(refused(&[], Sampling::Grid).contains("nothing is varied"));
        assert!(refused(&["a.b = 1 .. 2"], Sampling::Grid).contains("no step"));
        assert!(refused(&["a.b = 1 | 2", "a.b = 3"], Sampling::Grid).contains("twice"));
        let many = ["a.b = 1 .. 900000 by 1", "c.d = 1 .. 900000 by 1"];
        assert!(refused(&many, Sampling::Grid).contains("8.100e11 points"));
        assert!(refused(&["a.b = 1 | 2"], Sampling::LatinHypercube { samples: 0, seed: 1 }).contains("0 points"));
    }
}
