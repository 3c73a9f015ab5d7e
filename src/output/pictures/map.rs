//! A map in greys and contour lines: values over two axes, for black-and-white print and for everybody's eyes.
//!
//! Values are interpolated between the points of the grid in their logarithm, because currents run over decades.

use super::axes::{Frame, clipped};
use super::drawing::{Anchor, Area, Drawing, SMALL, Spot, Words};
use std::collections::HashMap;

/// Smallest value told from nothing: nulls run to nothing, their logarithm must not.
const FLOOR: f64 = 1e-9;
/// Height of one strip of shading.
const STRIP: f64 = 2.0;
/// Contour lines shorter than this carry no number.
const NUMBERED_FROM: f64 = 24.0;

/// Values over two axes, `values[row of y][column of x]`, as logarithms; `None` where there is no value.
pub(super) struct Grid {
    x: Vec<f64>,
    y: Vec<f64>,
    values: Vec<Vec<Option<f64>>>,
}

impl Grid {
    /// Takes plain values. A single row is drawn as a strip: give it twice, at the edges of its strip.
    pub(super) fn new(x: Vec<f64>, y: Vec<f64>, values: Vec<Vec<Option<f64>>>) -> Self {
        let log = |v: Option<f64>| v.filter(|v| v.is_finite()).map(|v| v.max(FLOOR).ln());
        let values = values.into_iter().map(|row| row.into_iter().map(log).collect()).collect();
        Self { x, y, values }
    }

    /// The row at a height between two rows.
    fn row_at(&self, y: f64) -> Option<Vec<Option<f64>>> {
        let after = self.y.windows(2).position(|p| (p[0]..=p[1]).contains(&y))?;
        let t = (y - self.y[after]) / (self.y[after + 1] - self.y[after]).max(1e-300);
        let mix = |(a, b): (&Option<f64>, &Option<f64>)| a.zip(*b).map(|(a, b)| a + t * (b - a));
        Some(self.values[after].iter().zip(&self.values[after + 1]).map(mix).collect())
    }

    /// The grid with columns no closer than `least` on the paper; steps such as a join between two close columns remain.
    fn thinned(&self, frame: &Frame, least: f64) -> Self {
        let mut keep: Vec<usize> = Vec::new();
        for index in 0..self.x.len() {
            let far = keep.last().is_none_or(|k| frame.x.at(self.x[index]) - frame.x.at(self.x[*k]) >= least);
            if far || index + 1 == self.x.len() {
                keep.push(index);
            }
        }
        let pick = |row: &Vec<Option<f64>>| keep.iter().map(|k| row[*k]).collect();
        Self {
            x: keep.iter().map(|k| self.x[*k]).collect(),
            y: self.y.clone(),
            values: self.values.iter().map(pick).collect(),
        }
    }
}

/// What separates one grey from the next.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Levels {
    /// Ascending, plain values.
    pub(super) values: Vec<f64>,
    /// Which of them is a limit: drawn bold, all below it white.
    pub(super) limit: Option<f64>,
}

/// Darkest grey, light enough for a number on white ground in it.
const DARKEST: f64 = 0.36;
/// Two greys beside each other differ by no more than this: one level alone is no reason for black.
const WIDEST_STEP: f64 = 0.24;
/// Levels at most.
const MOST: usize = 6;

impl Levels {
    /// Round steps that the values reach, the limit always among them, at most six.
    pub(super) fn new(values: impl Iterator<Item = f64>, limit: Option<f64>) -> Self {
        let finite = values.filter(|v| v.is_finite() && *v > 0.0);
        let (low, high) = finite.fold((f64::INFINITY, 0.0_f64), |(l, h), v| (l.min(v), h.max(v)));
        let reached = |mut steps: Vec<f64>| {
            steps.retain(|s| limit == Some(*s) || (*s > low && *s < high));
            steps
        };
        let mut steps = match limit {
            // Multiples of the limit, some below it: what matters is how far beyond it a place is.
            Some(limit) => reached([0.25, 0.5, 1.0, 2.0, 5.0, 10.0, 20.0, 50.0, 100.0].map(|m| m * limit).to_vec()),
            None => {
                let decades = |each: &[f64]| {
                    reached((-4..=5).flat_map(|p| each.iter().map(move |s| s * 10f64.powi(p))).collect())
                };
                let fine = [&[1.0, 2.0, 5.0][..], &[1.0, 3.0], &[1.0]].map(decades);
                let [first, second, third] = fine;
                [first, second].into_iter().find(|steps| steps.len() <= MOST).unwrap_or(third)
            }
        };
        while steps.len() > MOST {
            let drop = if limit.is_none_or(|l| steps[0] < 0.5 * l) { 0 } else { steps.len() - 1 };
            steps.remove(drop);
        }
        Self { values: steps, limit }
    }

    /// Number of levels a logarithm has passed.
    fn class(&self, log: f64) -> usize {
        self.values.iter().take_while(|v| log >= v.ln()).count()
    }

    /// Grey of a class.
    pub(super) fn grey(&self, class: usize) -> f64 {
        let white = self.limit.map_or(0, |l| self.values.iter().filter(|v| **v < l).count());
        let step = ((1.0 - DARKEST) / (self.values.len() - white).max(1) as f64).min(WIDEST_STEP);
        1.0 - step * class.saturating_sub(white) as f64
    }
}

/// Whether a frame has places without a value: between those of the grid, or beyond its first or last column.
pub(super) fn has_gaps(frame: &Frame, grid: &Grid) -> bool {
    let beyond = |end: Option<&f64>, edge: f64| end.is_some_and(|x| (frame.x.at(*x) - edge).abs() > 1.0);
    grid.values.iter().flatten().any(Option::is_none)
        || beyond(grid.x.first(), frame.x.start)
        || beyond(grid.x.last(), frame.x.end)
}

/// Shades a frame; where there is no value it is hatched, because white is a value.
pub(super) fn shade(drawing: &mut Drawing, frame: &Frame, grid: &Grid, levels: &Levels) {
    let area = frame.area();
    let holes = has_gaps(frame, grid);
    if holes {
        hatch(drawing, area);
    }
    let strips = (area.height() / STRIP).round().max(1.0) as usize;
    let high = area.height() / strips as f64;
    for strip in 0..strips {
        let top = area.top + high * strip as f64;
        let part = (frame.y.start - (top + 0.5 * high)) / (frame.y.start - frame.y.end);
        let Some(row) = grid.row_at(frame.y.from + part * (frame.y.to - frame.y.from)) else {
            continue;
        };
        for (class, left, right) in runs(&grid.x, &row, frame, levels) {
            let grey = levels.grey(class);
            if grey < 1.0 || holes {
                // A little into the next strip, which covers it: no seams between strips.
                drawing.rectangle(Area::new(left, top, right, (top + high + 0.3).min(area.bottom)), grey);
            }
        }
    }
}

/// Oblique hair lines over an area.
fn hatch(drawing: &mut Drawing, area: Area) {
    const STEP: f64 = 12.0;
    let mut x = area.left - area.height();
    while x < area.right {
        for piece in clipped(&[[x, area.bottom], [x + area.height(), area.top]], area) {
            drawing.line(&piece, 0.8, 0.7);
        }
        x += STEP;
    }
}

/// Stretches of one class along a row, in picture units.
fn runs(x: &[f64], row: &[Option<f64>], frame: &Frame, levels: &Levels) -> Vec<(usize, f64, f64)> {
    let mut out: Vec<(usize, f64, f64)> = Vec::new();
    for index in 0..x.len().saturating_sub(1) {
        let (Some(a), Some(b)) = (row[index], row[index + 1]) else {
            continue;
        };
        let mut cuts = vec![0.0, 1.0];
        cuts.extend(levels.values.iter().map(|v| (v.ln() - a) / (b - a)).filter(|t| *t > 0.0 && *t < 1.0));
        cuts.sort_by(f64::total_cmp);
        for pair in cuts.windows(2) {
            let class = levels.class(a + 0.5 * (pair[0] + pair[1]) * (b - a));
            let [left, right] = [pair[0], pair[1]].map(|t| frame.x.at(x[index] + t * (x[index + 1] - x[index])));
            match out.last_mut() {
                Some((last, _, end)) if *last == class && (*end - left).abs() < 1e-6 => *end = right,
                _ => out.push((class, left, right)),
            }
        }
    }
    out
}

/// Draws the contour lines of a frame and numbers them where there is room. `taken` remembers the numbers.
pub(super) fn contours(
    drawing: &mut Drawing,
    frame: &Frame,
    grid: &Grid,
    levels: &Levels,
    (taken, said): (&mut Vec<Area>, &dyn Fn(f64) -> String),
) {
    let grid = grid.thinned(frame, 1.5);
    let mut numbers: Vec<Words> = Vec::new();
    for level in &levels.values {
        let width = if levels.limit == Some(*level) { 2.6 } else { 1.0 };
        for line in lines(&grid, level.ln()) {
            let spots: Vec<Spot> = line.iter().map(|[x, y]| frame.spot(*x, *y)).collect();
            drawing.line(&spots, width, 0.0);
            if let Some(words) = number(&spots, said(*level), frame.area(), taken) {
                taken.push(words.extent().grown(3.0));
                numbers.push(words);
            }
        }
    }
    numbers.into_iter().for_each(|words| drawing.words(words));
}

/// A contour's number, at its middle or where there is room near it.
fn number(spots: &[Spot], text: String, area: Area, taken: &[Area]) -> Option<Words> {
    let long: f64 = spots.windows(2).map(|p| (p[1][0] - p[0][0]).hypot(p[1][1] - p[0][1])).sum();
    if long < NUMBERED_FROM {
        return None;
    }
    [0.5, 0.35, 0.65, 0.2, 0.8].into_iter().find_map(|part| {
        let spot = along(spots, long * part);
        let words = Words::centred(spot, SMALL - 1.0, Anchor::Middle, text.clone()).grounded();
        let extent = words.extent().grown(2.0);
        (area.holds(&extent) && !taken.iter().any(|t| t.meets(&extent))).then_some(words)
    })
}

/// The spot at a distance along a line.
fn along(spots: &[Spot], mut distance: f64) -> Spot {
    for pair in spots.windows(2) {
        let long = (pair[1][0] - pair[0][0]).hypot(pair[1][1] - pair[0][1]);
        if distance <= long && long > 0.0 {
            return [0, 1].map(|i| pair[0][i] + distance / long * (pair[1][i] - pair[0][i]));
        }
        distance -= long;
    }
    spots[spots.len() - 1]
}

/// Where the grid crosses a level (marching squares; a saddle is cut by its mean), joined into lines.
fn lines(grid: &Grid, level: f64) -> Vec<Vec<Spot>> {
    let mut segments: Vec<[Spot; 2]> = Vec::new();
    for row in 0..grid.y.len().saturating_sub(1) {
        for column in 0..grid.x.len().saturating_sub(1) {
            // Corners in turn around the cell.
            let corners = [(row, column), (row, column + 1), (row + 1, column + 1), (row + 1, column)];
            let values: Vec<f64> = corners.iter().filter_map(|(r, c)| grid.values[*r][*c]).collect();
            if values.len() < 4 {
                continue;
            }
            let place = |i: usize| [grid.x[corners[i].1], grid.y[corners[i].0]];
            let mut crossings: Vec<Spot> = Vec::new();
            for edge in 0..4 {
                let (i, j) = (edge, (edge + 1) % 4);
                if (values[i] >= level) != (values[j] >= level) {
                    let t = (level - values[i]) / (values[j] - values[i]);
                    let (a, b) = (place(i), place(j));
                    crossings.push([a[0] + t * (b[0] - a[0]), a[1] + t * (b[1] - a[1])]);
                }
            }
            match crossings.as_slice() {
                [a, b] => segments.push([*a, *b]),
                [a, b, c, d] => {
                    let centre = values.iter().sum::<f64>() / 4.0;
                    let split = (centre >= level) == (values[0] >= level);
                    segments.extend(if split { [[*a, *b], [*c, *d]] } else { [[*d, *a], [*b, *c]] });
                }
                _ => {}
            }
        }
    }
    joined(&segments)
}

/// Segments with common ends, joined into lines.
fn joined(segments: &[[Spot; 2]]) -> Vec<Vec<Spot>> {
    let key = |s: &Spot| s.map(|v| (v * 1e9).round() as i128);
    let mut at: HashMap<[i128; 2], Vec<usize>> = HashMap::new();
    for (index, segment) in segments.iter().enumerate() {
        segment.iter().for_each(|end| at.entry(key(end)).or_default().push(index));
    }
    let mut used = vec![false; segments.len()];
    let mut follow = |start: usize, from: Spot, used: &mut Vec<bool>| {
        let mut line = vec![from];
        let (mut index, mut here) = (start, from);
        loop {
            used[index] = true;
            let [a, b] = segments[index];
            here = if key(&a) == key(&here) { b } else { a };
            line.push(here);
            let Some(next) = at.get_mut(&key(&here)).and_then(|list| list.iter().copied().find(|i| !used[*i])) else {
                return line;
            };
            index = next;
        }
    };
    let mut out = Vec::new();
    for index in 0..segments.len() {
        if used[index] {
            continue;
        }
        let [a, _] = segments[index];
        let forward = follow(index, a, &mut used);
        // What hangs on the other end of the first segment.
        let backward = (0..segments.len()).find(|i| !used[*i] && segments[*i].iter().any(|end| key(end) == key(&a)));
        let mut line = backward.map_or(Vec::new(), |i| follow(i, a, &mut used));
        line.reverse();
        line.extend(forward.into_iter().skip(usize::from(!line.is_empty())));
        out.push(line);
    }
    out
}

/// The greys in a row with the levels between them.
pub(super) fn key(drawing: &mut Drawing, at: Spot, levels: &Levels, said: &dyn Fn(f64) -> String, title: &str) {
    const WIDE: f64 = 92.0;
    let [x, y] = at;
    let title = Words::centred([x, y], SMALL, Anchor::Start, title);
    let start = title.extent().right + 14.0;
    drawing.words(title);
    for class in 0..=levels.values.len() {
        let left = start + WIDE * class as f64;
        drawing.rectangle(Area::new(left, y - 9.0, left + WIDE, y + 9.0), levels.grey(class));
    }
    drawing.outline(Area::new(start, y - 9.0, start + WIDE * (levels.values.len() + 1) as f64, y + 9.0), 1.0, 0.0);
    for (index, level) in levels.values.iter().enumerate() {
        let edge = start + WIDE * (index + 1) as f64;
        let limit = levels.limit == Some(*level);
        drawing.line(&[[edge, y - 9.0], [edge, y + 9.0]], if limit { 2.6 } else { 1.0 }, 0.0);
        let text = if limit { format!("limit {}", said(*level)) } else { said(*level) };
        drawing.write([edge, y + 25.0], SMALL - 1.0, Anchor::Middle, text);
    }
}

/// What hatching means, the words ending at a spot.
pub(super) fn key_of_gaps(drawing: &mut Drawing, [right, y]: Spot, said: &str) {
    let words = Words::centred([right, y], SMALL, Anchor::End, said);
    let edge = words.extent().left - 10.0;
    let area = Area::new(edge - 48.0, y - 9.0, edge, y + 9.0);
    drawing.words(words);
    hatch(drawing, area);
    drawing.outline(area, 1.0, 0.0);
}

/// Cuts a line of values to the frame and draws it: limits and marks over a map.
pub(super) fn upright(drawing: &mut Drawing, frame: &Frame, x: f64, width: f64) {
    let across = frame.x.at(x);
    for piece in clipped(&[[across, frame.y.start], [across, frame.y.end]], frame.area().grown(0.01)) {
        drawing.patterned(&piece, width, 0.0, super::drawing::PATTERNS[4]);
    }
}

#[cfg(test)]
mod tests {
    use super::super::axes::Scale;
    use super::*;

    fn frame() -> Frame {
        Frame { x: Scale::linear([0.0, 10.0], 0.0, 1000.0), y: Scale::linear([0.0, 1.0], 100.0, 0.0) }
    }

    #[test]
    fn a_contour_stands_where_the_logarithm_crosses() {
        // From 1 to 100: 10 is halfway in the logarithm.
        let grid = Grid::new(vec![0.0, 10.0], vec![0.0, 1.0], vec![vec![Some(1.0), Some(100.0)]; 2]);
        let found = lines(&grid, 10f64.ln());
        assert_eq!(found.len(), 1);
        assert!(found[0].iter().all(|[x, _]| (x - 5.0).abs() < 1e-12));
        let levels = Levels { values: vec![10.0], limit: Some(10.0) };
        let row = grid.row_at(0.5).unwrap_or_default();
        assert_eq!(runs(&grid.x, &row, &frame(), &levels), vec![(0, 0.0, 500.0), (1, 500.0, 1000.0)]);
    }

    #[test]
    fn a_closed_contour_is_one_line() {
        let hill = |x: f64, y: f64| Some((-(x - 5.0).powi(2) / 4.0 - (y - 0.5).powi(2) * 16.0).exp());
        let x: Vec<f64> = (0..=50).map(|i| 0.2 * f64::from(i)).collect();
        let y: Vec<f64> = (0..=20).map(|i| 0.05 * f64::from(i)).collect();
        let values = y.iter().map(|y| x.iter().map(|x| hill(*x, *y)).collect()).collect();
        let found = lines(&Grid::new(x, y, values), 0.5f64.ln());
        assert_eq!(found.len(), 1);
        assert_eq!(
            found[0].first().map(|s| s.map(|v| (v * 1e6).round())),
            found[0].last().map(|s| s.map(|v| (v * 1e6).round()))
        );
        assert!(found[0].len() > 30);
    }

    #[test]
    fn missing_values_leave_their_cells_alone() {
        let grid = Grid::new(vec![0.0, 5.0, 10.0], vec![0.0, 1.0], vec![vec![Some(1.0), Some(100.0), None]; 2]);
        assert_eq!(lines(&grid, 10f64.ln()).len(), 1);
        let row = grid.row_at(0.5).unwrap_or_default();
        let levels = Levels { values: vec![10.0], limit: None };
        assert_eq!(runs(&grid.x, &row, &frame(), &levels).last().map(|r| r.2), Some(500.0));
    }

    #[test]
    fn a_grid_that_ends_before_its_frame_leaves_a_gap() {
        let to = |end: f64| Grid::new(vec![0.0, end], vec![0.0, 1.0], vec![vec![Some(1.0), Some(2.0)]; 2]);
        assert!(has_gaps(&frame(), &to(9.5)) && !has_gaps(&frame(), &to(9.995)));
        let levels = Levels { values: vec![10.0], limit: Some(10.0) };
        let mut drawing = Drawing::new(200.0, "", "");
        shade(&mut drawing, &frame(), &to(9.5), &levels);
        let hatched = drawing.marks.iter().any(|m| match m {
            super::super::drawing::Mark::Line { points, .. } => points.iter().all(|[x, _]| *x > 950.0),
            _ => false,
        });
        assert!(hatched, "what lies beyond the grid is hatched");
    }

    #[test]
    fn the_limit_is_always_a_level_and_white_lies_below_it() {
        let levels = Levels::new([0.001, 3.0].into_iter(), Some(0.02));
        assert!(levels.values.contains(&0.02) && levels.values.len() <= MOST);
        let below = levels.values.iter().position(|v| *v == 0.02).unwrap_or(0);
        assert_eq!(levels.grey(below), 1.0);
        assert!(levels.grey(below + 1) < 0.95);
        assert!(levels.grey(levels.values.len()) >= DARKEST - 1e-12);
        assert!(Levels::new([0.5, 40.0].into_iter(), None).values.len() <= MOST);
    }
}
