//! Puts labels where there is room: around their spot, near first, never over a line, a symbol or another label, and
//! with hair lines that cross neither labels nor each other.

use super::axes::clipped;
use super::drawing::{Anchor, Area, Drawing, Spot, Words, fitted};

/// What is taken already, and the box labels must stay in.
pub(super) struct Placer {
    bounds: Area,
    /// Lines and symbols: a hair line may pass over them, a label may not.
    taken: Vec<Area>,
    /// Labels.
    labels: Vec<Area>,
    /// Hair lines.
    leaders: Vec<[Spot; 2]>,
}

/// Distances tried.
const REACH: [f64; 10] = [8.0, 13.0, 19.0, 26.0, 34.0, 43.0, 54.0, 67.0, 82.0, 100.0];
/// Directions tried at each distance.
const DIRECTIONS: usize = 24;
/// Distance that one radian away from the preferred direction counts for.
const TURNING: f64 = 14.0;

impl Placer {
    pub(super) fn new(bounds: Area) -> Self {
        Self { bounds, taken: Vec::new(), labels: Vec::new(), leaders: Vec::new() }
    }

    pub(super) fn take(&mut self, area: Area) {
        self.taken.push(area);
    }

    /// Takes a polyline, as squares along it.
    pub(super) fn take_line(&mut self, points: &[Spot], half: f64) {
        const STEP: f64 = 4.0;
        for pair in points.windows(2) {
            let long = (pair[1][0] - pair[0][0]).hypot(pair[1][1] - pair[0][1]);
            let steps = (long / STEP).ceil().max(1.0) as usize;
            for step in 0..=steps {
                let t = step as f64 / steps as f64;
                let [x, y] = [0, 1].map(|i| pair[0][i] + t * (pair[1][i] - pair[0][i]));
                self.take(Area::new(x - half, y - half, x + half, y + half));
            }
        }
    }

    fn free(&self, area: &Area) -> bool {
        let wide = area.grown(2.0);
        self.bounds.holds(area)
            && !self.taken.iter().chain(&self.labels).any(|t| t.meets(&wide))
            && !self.leaders.iter().any(|l| !clipped(l, wide).is_empty())
    }

    fn clear(&self, leader: &[Spot; 2]) -> bool {
        !self.labels.iter().any(|l| !clipped(leader, *l).is_empty()) && !self.leaders.iter().any(|l| cross(l, leader))
    }

    /// The best free centre for a box of this size around a spot, in or near the direction `towards`; taken with its hair line.
    fn centre(&mut self, spot: Spot, half: [f64; 2], towards: Spot) -> Option<Spot> {
        let preferred = towards[1].atan2(towards[0]);
        let mut tried: Vec<(f64, f64, f64)> = Vec::with_capacity(REACH.len() * DIRECTIONS);
        for reach in REACH {
            for turn in 0..DIRECTIONS {
                let away = std::f64::consts::TAU * (turn as f64 / DIRECTIONS as f64 - 0.5);
                tried.push((reach + TURNING * away.abs(), reach, preferred + away));
            }
        }
        tried.sort_by(|a, b| a.0.total_cmp(&b.0));
        for (_, reach, angle) in tried {
            let (right, down) = (angle.cos(), angle.sin());
            let centre = [spot[0] + right * (reach + half[0]), spot[1] + down * (reach + half[1])];
            let area = Area::new(centre[0] - half[0], centre[1] - half[1], centre[0] + half[0], centre[1] + half[1]);
            let leader = [spot, [0, 1].map(|i| spot[i].clamp(centre[i] - half[i], centre[i] + half[i]))];
            if self.free(&area) && self.clear(&leader) {
                self.labels.push(area);
                self.leaders.push(leader);
                return Some(centre);
            }
        }
        None
    }

    /// Writes a text near a spot with a hair line to it. Left out where there is no room: the key names it anyway.
    pub(super) fn label(&mut self, drawing: &mut Drawing, spot: Spot, towards: Spot, (em, text): (f64, &str)) -> bool {
        let text = fitted(text, em, 170.0);
        let probe = Words::centred([0.0, 0.0], em, Anchor::Middle, text.as_str()).extent();
        let half = [0.5 * probe.width() + 1.0, 0.5 * probe.height() + 1.0];
        let Some(centre) = self.centre(spot, half, towards) else {
            return false;
        };
        leader(drawing, spot, centre, half);
        drawing.words(Words::centred(centre, em, Anchor::Middle, text));
        true
    }

    /// A number in a ring near a spot with a hair line to it.
    pub(super) fn numbered(&mut self, drawing: &mut Drawing, spot: Spot, towards: Spot, number: usize) -> bool {
        const RADIUS: f64 = 10.5;
        let Some(centre) = self.centre(spot, [RADIUS, RADIUS], towards) else {
            return false;
        };
        let (dx, dy) = (spot[0] - centre[0], spot[1] - centre[1]);
        let long = dx.hypot(dy).max(RADIUS);
        let edge = [centre[0] + dx / long * RADIUS, centre[1] + dy / long * RADIUS];
        drawing.line(&[spot, edge], 0.8, 0.3);
        drawing.ring(centre, RADIUS, 1.2);
        drawing.words(Words::centred(centre, 12.0, Anchor::Middle, number.to_string()));
        true
    }
}

/// A hair line from a spot to the nearest edge of a label, where they are not side by side.
fn leader(drawing: &mut Drawing, spot: Spot, centre: Spot, half: [f64; 2]) {
    let edge = [0, 1].map(|i| spot[i].clamp(centre[i] - half[i], centre[i] + half[i]));
    if (edge[0] - spot[0]).hypot(edge[1] - spot[1]) > 16.0 {
        drawing.line(&[spot, edge], 0.8, 0.3);
    }
}

/// True when two segments cross between their ends.
fn cross(a: &[Spot; 2], b: &[Spot; 2]) -> bool {
    let side = |p: &[Spot; 2], q: Spot| (p[1][0] - p[0][0]) * (q[1] - p[0][1]) - (p[1][1] - p[0][1]) * (q[0] - p[0][0]);
    side(a, b[0]) * side(a, b[1]) < -1e-9 && side(b, a[0]) * side(b, a[1]) < -1e-9
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]
    use super::*;

    #[test]
    fn crowded_numbers_find_places_of_their_own() {
        let mut drawing = Drawing::new(400.0, "", "");
        let mut placer = Placer::new(Area::new(0.0, 0.0, 400.0, 400.0));
        placer.take_line(&[[100.0, 200.0], [300.0, 200.0]], 5.0);
        for number in 0..9 {
            assert!(placer.numbered(&mut drawing, [160.0 + 9.0 * number as f64, 200.0], [0.0, 1.0], number));
        }
        for (index, a) in placer.labels.iter().enumerate() {
            assert!(placer.labels[..index].iter().all(|b| !a.meets(b)));
        }
        for (index, a) in placer.leaders.iter().enumerate() {
            assert!(placer.leaders[..index].iter().all(|b| !cross(a, b)));
        }
        // No room at all is said, not drawn over.
        let mut full = Placer::new(Area::new(0.0, 0.0, 10.0, 10.0));
        assert!(!full.numbered(&mut drawing, [5.0, 5.0], [0.0, 1.0], 1));
    }
}
