//! Rectangular axes: scales, ticks and frames, metres below and feet above.

use super::drawing::{Anchor, Area, Drawing, EM, SMALL, Spot, Words};
use crate::output::figures::FEET_PER_METRE;

/// A run of values laid along a run of the picture.
#[derive(Debug, Clone, Copy)]
pub(super) struct Scale {
    pub(super) from: f64,
    pub(super) to: f64,
    pub(super) start: f64,
    pub(super) end: f64,
    pub(super) logarithmic: bool,
}

impl Scale {
    /// Equal steps; a run of no width is widened so that something can be drawn.
    pub(super) fn linear([from, to]: [f64; 2], start: f64, end: f64) -> Self {
        let (from, to) = if to > from { (from, to) } else { (from - 0.5, from + 0.5) };
        Self { from, to, start, end, logarithmic: false }
    }

    /// Equal ratios.
    pub(super) fn logarithmic([from, to]: [f64; 2], start: f64, end: f64) -> Self {
        Self { from, to, start, end, logarithmic: true }
    }

    /// Where a value stands; beyond the ends for values beyond the run.
    pub(super) fn at(&self, value: f64) -> f64 {
        let part = if self.logarithmic {
            (value.max(1e-300) / self.from).ln() / (self.to / self.from).ln()
        } else {
            (value - self.from) / (self.to - self.from)
        };
        self.start + part * (self.end - self.start)
    }

    /// Values to mark: 1, 2 or 5 times a power of ten apart, about `count` of them.
    pub(super) fn ticks(&self, count: usize) -> Vec<f64> {
        if self.logarithmic {
            return self.logarithmic_ticks();
        }
        let step = round_step((self.to - self.from) / count.max(1) as f64);
        let first = (self.from / step - 1e-9).ceil() as i64;
        let last = (self.to / step + 1e-9).floor() as i64;
        (first..=last).map(|k| k as f64 * step).collect()
    }

    fn logarithmic_ticks(&self) -> Vec<f64> {
        let decades = (self.to / self.from).log10();
        let steps: &[f64] = match decades {
            d if d > 4.0 => &[1.0],
            d if d > 2.0 => &[1.0, 2.0, 5.0],
            d if d > 1.2 => &[1.0, 2.0, 3.0, 5.0],
            _ => &[1.0, 1.5, 2.0, 3.0, 5.0, 7.0],
        };
        let (low, high) = (self.from.log10().floor() as i32, self.to.log10().ceil() as i32);
        let all = (low..=high).flat_map(|power| steps.iter().map(move |s| s * 10f64.powi(power)));
        all.filter(|v| *v >= self.from * (1.0 - 1e-9) && *v <= self.to * (1.0 + 1e-9)).collect()
    }
}

/// The next step of 1, 2 or 5 times a power of ten that is not smaller.
pub(super) fn round_step(least: f64) -> f64 {
    let power = 10f64.powf(least.log10().floor());
    [1.0, 2.0, 5.0, 10.0].map(|s| s * power).into_iter().find(|s| *s >= least * (1.0 - 1e-9)).unwrap_or(10.0 * power)
}

/// A run that holds all finite values, widened to whole steps, with 0 in it when `zero` is asked for.
pub(super) fn run_of(values: impl Iterator<Item = f64>, zero: bool) -> [f64; 2] {
    let start = if zero { (0.0, 0.0) } else { (f64::INFINITY, f64::NEG_INFINITY) };
    let (low, high) = values.filter(|v| v.is_finite()).fold(start, |(l, h), v| (l.min(v), h.max(v)));
    if low > high {
        return [0.0, 1.0];
    }
    if high - low <= 1e-12 * high.abs().max(1e-12) {
        return [low.min(0.0), high.max(low.min(0.0) + 1.0)];
    }
    let step = round_step((high - low) / 8.0);
    [(low / step + 1e-9).floor() * step, (high / step - 1e-9).ceil() * step]
}

/// A tick's value in as many decimals as its neighbours need.
pub(super) fn tick_text(value: f64, all: &[f64]) -> String {
    let gap = all.windows(2).map(|p| (p[1] - p[0]).abs()).fold(f64::INFINITY, f64::min);
    let decimals =
        if gap.is_finite() && gap > 0.0 { (-(gap.log10() + 1e-9).floor()).clamp(0.0, 6.0) as usize } else { 1 };
    let text = format!("{:.*}", decimals, value);
    let text = if text.contains('.') { text.trim_end_matches('0').trim_end_matches('.').to_string() } else { text };
    if text == "-0" { "0".to_string() } else { text.replace('-', "−") }
}

/// Two scales and the box they span.
#[derive(Debug, Clone, Copy)]
pub(super) struct Frame {
    pub(super) x: Scale,
    pub(super) y: Scale,
}

impl Frame {
    pub(super) fn area(&self) -> Area {
        Area::new(self.x.start, self.y.end, self.x.end, self.y.start)
    }

    pub(super) fn spot(&self, x: f64, y: f64) -> Spot {
        [self.x.at(x), self.y.at(y)]
    }

    pub(super) fn outline(&self, drawing: &mut Drawing) {
        drawing.outline(self.area(), 1.25, 0.0);
    }

    /// Ticks, numbers and title on the left; hair lines across.
    pub(super) fn left(&self, drawing: &mut Drawing, title: &str, count: usize) {
        let ticks = self.y.ticks(count);
        for tick in &ticks {
            let y = self.y.at(*tick);
            drawing.line(&[[self.x.start, y], [self.x.end, y]], 0.7, 0.86);
            drawing.line(&[[self.x.start - 6.0, y], [self.x.start, y]], 1.25, 0.0);
            drawing.words(Words::centred([self.x.start - 10.0, y], SMALL, Anchor::End, tick_text(*tick, &ticks)));
        }
        let middle = 0.5 * (self.y.start + self.y.end);
        drawing.words(Words::new([self.x.start - 62.0, middle], EM, Anchor::Middle, title).upwards());
    }

    /// Ticks below, with numbers and title where `numbered`.
    pub(super) fn below(&self, drawing: &mut Drawing, title: &str, count: usize, numbered: bool) {
        let ticks = self.x.ticks(count);
        for tick in &ticks {
            let x = self.x.at(*tick);
            drawing.line(&[[x, self.y.start], [x, self.y.start + 6.0]], 1.25, 0.0);
            if numbered {
                let text = tick_text(*tick, &ticks);
                drawing.write([x, self.y.start + 21.0], SMALL, Anchor::Middle, text);
            }
        }
        if numbered {
            let middle = 0.5 * (self.x.start + self.x.end);
            drawing.write([middle, self.y.start + 43.0], EM, Anchor::Middle, title);
        }
    }

    /// The same run in feet, above.
    pub(super) fn feet_above(&self, drawing: &mut Drawing, title: &str, count: usize) {
        let feet = Scale::linear([self.x.from * FEET_PER_METRE, self.x.to * FEET_PER_METRE], self.x.start, self.x.end);
        let ticks = feet.ticks(count);
        for tick in &ticks {
            let x = feet.at(*tick);
            drawing.line(&[[x, self.y.end - 6.0], [x, self.y.end]], 1.25, 0.0);
            drawing.write([x, self.y.end - 10.0], SMALL, Anchor::Middle, tick_text(*tick, &ticks));
        }
        let middle = 0.5 * (self.x.start + self.x.end);
        drawing.write([middle, self.y.end - 30.0], EM, Anchor::Middle, title);
    }

    /// A polyline of values, cut at the edges of the box and broken where a value is missing.
    pub(super) fn pieces(&self, values: &[(f64, Option<f64>)]) -> Vec<Vec<Spot>> {
        let mut out = Vec::new();
        let mut run: Vec<Spot> = Vec::new();
        for (x, y) in values {
            match y.filter(|v| v.is_finite()) {
                Some(y) => run.push(self.spot(*x, y)),
                None => out.extend(clipped(&std::mem::take(&mut run), self.area())),
            }
        }
        out.extend(clipped(&run, self.area()));
        out
    }
}

/// The parts of a polyline inside a box (Liang and Barsky's parametric clipping, 1984).
pub(super) fn clipped(points: &[Spot], area: Area) -> Vec<Vec<Spot>> {
    let mut out: Vec<Vec<Spot>> = Vec::new();
    let mut run: Vec<Spot> = Vec::new();
    for pair in points.windows(2) {
        let Some((start, end)) = inside(pair[0], pair[1], area) else {
            out.extend((run.len() > 1).then(|| std::mem::take(&mut run)));
            run.clear();
            continue;
        };
        if run.last() != Some(&start) {
            out.extend((run.len() > 1).then(|| std::mem::take(&mut run)));
            run = vec![start];
        }
        run.push(end);
    }
    out.extend((run.len() > 1).then_some(run));
    out
}

fn inside(a: Spot, b: Spot, area: Area) -> Option<(Spot, Spot)> {
    let (dx, dy) = (b[0] - a[0], b[1] - a[1]);
    let (mut enter, mut leave) = (0.0_f64, 1.0_f64);
    let edges = [(-dx, a[0] - area.left), (dx, area.right - a[0]), (-dy, a[1] - area.top), (dy, area.bottom - a[1])];
    for (p, q) in edges {
        if p == 0.0 {
            if q < 0.0 {
                return None;
            }
        } else if p < 0.0 {
            enter = enter.max(q / p);
        } else {
            leave = leave.min(q / p);
        }
    }
    let at = |t: f64| {
        if t <= 0.0 {
            a
        } else if t >= 1.0 {
            b
        } else {
            [a[0] + t * dx, a[1] + t * dy]
        }
    };
    (enter <= leave).then(|| (at(enter), at(leave)))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn ticks_are_round_and_inside() {
        let scale = Scale::linear([0.0, 12.3], 100.0, 900.0);
        assert_eq!(scale.ticks(6), vec![0.0, 5.0, 10.0]);
        assert_eq!(scale.ticks(12), vec![0.0, 2.0, 4.0, 6.0, 8.0, 10.0, 12.0]);
        assert_eq!(tick_text(-2.0, &[-2.0, 0.0]), "−2");
        assert_eq!(tick_text(1.5, &[1.0, 1.5, 2.0]), "1.5");
        let swr = Scale::logarithmic([1.0, 10.0], 0.0, 1.0);
        assert_eq!(swr.ticks(0), vec![1.0, 1.5, 2.0, 3.0, 5.0, 7.0, 10.0]);
        assert_eq!(run_of([3.0, 47.0].into_iter(), true), [0.0, 50.0]);
        assert_eq!(run_of(std::iter::empty(), true)[0], 0.0);
    }

    #[test]
    fn a_line_is_cut_at_the_edges_of_its_box() {
        let area = Area::new(0.0, 0.0, 10.0, 10.0);
        let parts = clipped(&[[-5.0, 5.0], [5.0, 5.0], [5.0, 20.0], [8.0, 20.0], [8.0, 5.0]], area);
        assert_eq!(parts, vec![vec![[0.0, 5.0], [5.0, 5.0], [5.0, 10.0]], vec![[8.0, 10.0], [8.0, 5.0]]]);
    }
}
