//! Curves over frequency from few solves: adaptive rational interpolation of many functions at once.
//!
//! Every entry of a port model, and every current it excites, has the same resonances. So one set of poles serves all of
//! them, and the samples of one entry help to place the poles of the others.

use super::barycentric::{Barycentric, Measure};
use num_complex::Complex64;
use thiserror::Error;

/// Samples taken before anything is known.
const FIRST_SAMPLES: usize = 8;
/// Samples added at a time: two, so that a second core has work.
const MORE_SAMPLES: usize = 2;
/// Places between two neighbouring samples where fits are compared.
const PLACES_BETWEEN: usize = 16;
/// Fits a curve is held against, each without one of the latest pairs of samples. Three, and the factor below, covered
/// the true error in 60 of 61 transmission-line stations with at most 1.3 times the estimate; two without a factor in 50 of 62.
const RIVALS: usize = 3;
/// What the largest difference from them is multiplied by.
const SAFETY: f64 = 2.0;
/// The fewest samples that let a curve be held against others.
const FEWEST_SAMPLES: usize = 6;
/// Closest that a place may lie to a sample, the range being −1 .. 1: a resonance narrower than this is not resolved.
const CLOSEST: f64 = 2.5e-4;
/// Samples are met to this part of the tolerance: looser fits agree with each other by chance, tighter ones chase noise.
const FIT_TIGHTER: f64 = 0.05;

/// Why there is no curve.
#[derive(Debug, Clone, PartialEq, Error)]
pub enum CurveError<E> {
    /// A solve failed.
    #[error(transparent)]
    Sample(E),
    /// The range is empty, reversed or not finite.
    #[error("a curve needs a range that rises: from {low} to {high} is none")]
    Range {
        /// Start of the range as given.
        low: f64,
        /// End of the range as given.
        high: f64,
    },
    /// The sampler broke its word.
    #[error("asked for {asked} samples of {components} values, got something else or numbers that are not finite")]
    Shape {
        /// Points asked for.
        asked: usize,
        /// Values a point.
        components: usize,
    },
}

/// An interpolated curve with values in C^m over a range of a real variable.
#[derive(Debug, Clone)]
pub struct Curve {
    centre: f64,
    half_width: f64,
    fit: Barycentric,
    samples: Vec<f64>,
    error_estimate: f64,
    converged: bool,
}

impl Curve {
    /// The values at a point of the range. Outside the range it is an extrapolation that nothing vouches for.
    #[must_use]
    pub fn eval(&self, x: f64) -> Vec<Complex64> {
        self.fit.eval((x - self.centre) / self.half_width)
    }

    /// Estimated largest error over range and components, relative to the component's magnitude at the place, or to one
    /// percent of its largest magnitude where it is smaller than that.
    ///
    /// It is twice the largest difference between this curve and three that each leave out one of its latest pairs of samples, over
    /// a grid that includes the neighbourhood of every pole near the range. Above one half it only says that the
    /// curve is no good.
    #[must_use]
    pub fn error_estimate(&self) -> f64 {
        self.error_estimate
    }

    /// Whether the estimate came below the tolerance before the samples ran out.
    #[must_use]
    pub fn converged(&self) -> bool {
        self.converged
    }

    /// Where the function was sampled, rising.
    #[must_use]
    pub fn samples(&self) -> &[f64] {
        &self.samples
    }

    /// Complex poles of the curve: x₀ + jy, the resonances of the functions where they lie near the range; those far from it
    /// only stand for what lies outside.
    #[must_use]
    pub fn poles(&self) -> Vec<Complex64> {
        self.fit.poles().into_iter().map(|t| t * self.half_width + self.centre).collect()
    }
}

/// Interpolates functions of a real variable from as few samples as it can.
///
/// Starts with Chebyshev points and fits them rationally with common support points and weights (see
/// `barycentric`); then samples where this fit differs most from those that leave out some of the latest samples, until they agree
/// to the tolerance everywhere. A pole that one fit has near the range and another has not makes them differ
/// there, so a narrow resonance is sampled and an artefact is sampled away.
///
/// # Inputs
/// - `sampler`: gives the values at a batch of points, the same number at each; called with 8 points and then 2 at a time.
/// - `low`, `high`: the range.
/// - `tolerance`: relative, as [`Curve::error_estimate`].
/// - `max_samples`: never more than this many points are asked for (but six in any case).
///
/// See [`adaptive_from`] for another number of first points.
///
/// # Output
/// A curve, also when the samples ran out: [`Curve::converged`] says so.
///
/// # Valid
/// Functions that are analytic beside the range; noise in the samples must stay well below the tolerance.
///
/// # Errors
/// - [`CurveError::Sample`] with the sampler's own error.
/// - [`CurveError::Range`] for an empty or reversed range.
/// - [`CurveError::Shape`] where the sampler gives other than what was asked, or values that are not finite.
pub fn adaptive<E>(
    sampler: impl FnMut(&[f64]) -> Result<Vec<Vec<Complex64>>, E>,
    low: f64,
    high: f64,
    tolerance: f64,
    max_samples: usize,
) -> Result<Curve, CurveError<E>> {
    adaptive_from(FIRST_SAMPLES, sampler, (low, high), tolerance, max_samples)
}

/// As [`adaptive`], with the number of Chebyshev points to start from.
///
/// # Errors
/// As [`adaptive`].
pub fn adaptive_from<E>(
    first_samples: usize,
    mut sampler: impl FnMut(&[f64]) -> Result<Vec<Vec<Complex64>>, E>,
    (low, high): (f64, f64),
    tolerance: f64,
    max_samples: usize,
) -> Result<Curve, CurveError<E>> {
    if !(low < high && (high - low).is_finite()) {
        return Err(CurveError::Range { low, high });
    }
    let (centre, half_width) = ((low + high) / 2.0, (high - low) / 2.0);
    let max_samples = max_samples.max(FEWEST_SAMPLES);
    let mut taken = Samples::default();
    taken.take(&mut sampler, &chebyshev(first_samples.clamp(2, max_samples)), centre, half_width)?;
    loop {
        let measure = Measure::new(&taken.values);
        let fit = Barycentric::fit(&taken.points, &taken.values, &measure, FIT_TIGHTER * tolerance);
        let rivals: Vec<Barycentric> =
            (1..=RIVALS).map(|batch| taken.fit_without_batch(batch, &measure, tolerance)).collect();
        let differences = compare(&fit, &rivals, &taken.points, &measure);
        let error_estimate = SAFETY * differences.iter().map(|d| d.1).fold(0.0, f64::max);
        let converged = error_estimate < tolerance;
        let room = max_samples - taken.points.len();
        if converged || room == 0 {
            let mut samples: Vec<f64> = taken.points.iter().map(|t| centre + half_width * t).collect();
            samples.sort_by(f64::total_cmp);
            return Ok(Curve { centre, half_width, fit, samples, error_estimate, converged });
        }
        let next = worst_places(&differences, &taken.points, MORE_SAMPLES.min(room));
        taken.take(&mut sampler, &next, centre, half_width)?;
    }
}

/// Samples so far, the variable brought to −1 .. 1.
#[derive(Default)]
struct Samples {
    points: Vec<f64>,
    values: Vec<Vec<Complex64>>,
}

impl Samples {
    /// The fit that leaves out the last batch of samples (1), the one before it (2) and so on.
    fn fit_without_batch(&self, batch: usize, measure: &Measure, tolerance: f64) -> Barycentric {
        let count = self.points.len();
        let (from, to) = (count.saturating_sub(MORE_SAMPLES * batch), count - (MORE_SAMPLES * (batch - 1)).min(count));
        let without = |i: &usize| !(from..to).contains(i);
        let points: Vec<f64> = (0..count).filter(without).map(|i| self.points[i]).collect();
        let values: Vec<Vec<Complex64>> = (0..count).filter(without).map(|i| self.values[i].clone()).collect();
        Barycentric::fit(&points, &values, measure, FIT_TIGHTER * tolerance)
    }

    fn take<E>(
        &mut self,
        sampler: &mut impl FnMut(&[f64]) -> Result<Vec<Vec<Complex64>>, E>,
        points: &[f64],
        centre: f64,
        half_width: f64,
    ) -> Result<(), CurveError<E>> {
        let asked: Vec<f64> = points.iter().map(|t| centre + half_width * t).collect();
        let values = sampler(&asked).map_err(CurveError::Sample)?;
        let components = self.values.first().or(values.first()).map_or(0, Vec::len);
        let whole = values.len() == asked.len()
            && components > 0
            && values.iter().all(|v| v.len() == components && v.iter().all(|x| x.is_finite()));
        if !whole {
            return Err(CurveError::Shape { asked: asked.len(), components });
        }
        self.points.extend_from_slice(points);
        self.values.extend(values);
        Ok(())
    }
}

/// Chebyshev points of the second kind on −1 .. 1, rising, ends included.
fn chebyshev(count: usize) -> Vec<f64> {
    let last = (count - 1) as f64;
    (0..count).map(|i| -(std::f64::consts::PI * i as f64 / last).cos()).collect()
}

/// Where a fit differs from its rivals: (place, largest difference), between the samples and around every pole near the range.
fn compare(fit: &Barycentric, rivals: &[Barycentric], points: &[f64], measure: &Measure) -> Vec<(f64, f64)> {
    let mut sorted = points.to_vec();
    sorted.sort_by(f64::total_cmp);
    let mut places: Vec<f64> = sorted
        .windows(2)
        .filter(|pair| pair[1] - pair[0] > 2.0 * CLOSEST)
        .flat_map(|pair| {
            let (from, step) = (pair[0], (pair[1] - pair[0]) / (PLACES_BETWEEN + 1) as f64);
            (1..=PLACES_BETWEEN).map(move |i| from + step * i as f64)
        })
        .collect();
    let poles = fit.poles();
    for pole in rivals.iter().flat_map(Barycentric::poles).chain(poles.iter().copied()) {
        let beside = pole.im.abs().max(2.0 * CLOSEST);
        for place in [pole.re - beside, pole.re + beside] {
            if place.abs() < 1.0 && beside < 0.2 && points.iter().all(|t| (t - place).abs() > CLOSEST) {
                places.push(place);
            }
        }
    }
    places
        .into_iter()
        // Never on a pole of the line itself: a sample there would dwarf all others.
        .filter(|t| poles.iter().all(|pole| (pole - t).norm() > CLOSEST))
        .map(|t| {
            let value = fit.eval(t);
            (t, rivals.iter().map(|rival| measure.deviation(&value, &rival.eval(t))).fold(0.0, f64::max))
        })
        .collect()
}

/// The places of largest difference, no two between the same two samples.
fn worst_places(differences: &[(f64, f64)], points: &[f64], count: usize) -> Vec<f64> {
    let gap = |t: f64| points.iter().filter(|p| **p < t).count();
    let mut order: Vec<(f64, f64)> = differences.to_vec();
    order.sort_by(|a, b| b.1.total_cmp(&a.1).then(a.0.total_cmp(&b.0)));
    let mut chosen: Vec<f64> = Vec::new();
    for (t, _) in order {
        if chosen.len() == count {
            break;
        }
        if chosen.iter().all(|other| gap(*other) != gap(t)) {
            chosen.push(t);
        }
    }
    chosen
}
