//! Plan and elevation of a station: which way it is seen, how large, and where on the paper.

use super::drawing::{Area, Spot};
use crate::outcome::FrequencyOutcome;

/// Which way a view looks.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) enum Look {
    /// From above, north up.
    Down,
    /// From the side; unit vector east, north of what runs to the right.
    Level([f64; 2]),
}

/// One view, laid on the paper.
#[derive(Debug, Clone, Copy)]
pub(super) struct View {
    pub(super) look: Look,
    /// Picture units per metre.
    pub(super) scale: f64,
    /// Right and up in metres of the middle of `area`.
    middle: [f64; 2],
    pub(super) area: Area,
}

/// Room for labels around what is drawn.
const MARGIN: f64 = 58.0;
/// Room for the heading of a view.
const HEADING: f64 = 26.0;

impl Look {
    /// Metres to the right and up.
    pub(super) fn flat(self, position_m: [f64; 3]) -> [f64; 2] {
        match self {
            Self::Down => [position_m[0], position_m[1]],
            Self::Level([east, north]) => [position_m[0] * east + position_m[1] * north, position_m[2]],
        }
    }
}

impl View {
    pub(super) fn spot(&self, position_m: [f64; 3]) -> Spot {
        let [right, up] = self.look.flat(position_m);
        let Area { left, top, right: edge, bottom } = self.area;
        [
            0.5 * (left + edge) + (right - self.middle[0]) * self.scale,
            0.5 * (top + bottom) - (up - self.middle[1]) * self.scale,
        ]
    }
}

/// Bearing from which the elevation is seen, degrees from north.
pub(super) fn seen_from_deg(right: [f64; 2]) -> f64 {
    right[1].atan2(-right[0]).to_degrees().rem_euclid(360.0)
}

/// The horizontal direction in which the station is longest (principal axis of its points), pointing east.
pub(super) fn broadest(frequency: &FrequencyOutcome) -> [f64; 2] {
    let all = || frequency.conductors.iter().flat_map(|c| c.points.iter().map(|p| p.position_m));
    let count = all().count().max(1) as f64;
    let mean = [0, 1].map(|i| all().map(|p| p[i]).sum::<f64>() / count);
    let moment = |i: usize, j: usize| all().map(|p| (p[i] - mean[i]) * (p[j] - mean[j])).sum::<f64>();
    let angle = 0.5 * (2.0 * moment(0, 1)).atan2(moment(0, 0) - moment(1, 1));
    let (north, east) = angle.sin_cos();
    if east < 0.0 { [-east, -north] } else { [east, north] }
}

/// Lays both views into a box at one scale, beside or above each other, whichever is larger.
pub(super) fn lay(frequency: &FrequencyOutcome, room: Area) -> [View; 2] {
    let looks = [Look::Down, Look::Level(broadest(frequency))];
    let boxes = looks.map(|look| extent(frequency, look));
    let size = boxes.map(|b| [b[1][0] - b[0][0], b[1][1] - b[0][1]]);
    let free = |across: f64, count: f64, heading: f64| across - count * (2.0 * MARGIN + heading);
    let fit = |room: f64, need: f64| room / need.max(0.5);
    let [plan, side] = size;
    let stacked = fit(free(room.width(), 1.0, 0.0), plan[0].max(side[0]))
        .min(fit(free(room.height(), 2.0, HEADING), plan[1] + side[1]));
    let beside = fit(free(room.width(), 2.0, 0.0), plan[0] + side[0])
        .min(fit(free(room.height(), 1.0, HEADING), plan[1].max(side[1])));
    let scale = stacked.max(beside).max(1e-3);
    let areas = if stacked >= beside {
        let spare = room.height() - (plan[1] + side[1]) * scale - 2.0 * (2.0 * MARGIN + HEADING);
        let cut = room.top + HEADING + 2.0 * MARGIN + plan[1] * scale + 0.5 * spare.max(0.0);
        [
            Area::new(room.left, room.top + HEADING, room.right, cut),
            Area::new(room.left, cut + HEADING, room.right, room.bottom),
        ]
    } else {
        let spare = room.width() - (plan[0] + side[0]) * scale - 4.0 * MARGIN;
        let cut = room.left + 2.0 * MARGIN + plan[0] * scale + 0.5 * spare.max(0.0);
        let top = room.top + HEADING;
        [Area::new(room.left, top, cut, room.bottom), Area::new(cut, top, room.right, room.bottom)]
    };
    std::array::from_fn(|i| View {
        look: looks[i],
        scale,
        middle: [0.5 * (boxes[i][0][0] + boxes[i][1][0]), 0.5 * (boxes[i][0][1] + boxes[i][1][1])],
        area: areas[i],
    })
}

/// Least and greatest of right and up; an elevation always shows height 0.
fn extent(frequency: &FrequencyOutcome, look: Look) -> [[f64; 2]; 2] {
    let start = ([f64::INFINITY; 2], [f64::NEG_INFINITY; 2]);
    let all = frequency.conductors.iter().flat_map(|c| c.points.iter().map(|p| look.flat(p.position_m)));
    let (mut low, mut high) =
        all.fold(start, |(l, h), p| ([l[0].min(p[0]), l[1].min(p[1])], [h[0].max(p[0]), h[1].max(p[1])]));
    if look != Look::Down {
        (low[1], high[1]) = (low[1].min(0.0), high[1].max(0.0));
    }
    if low[0] > high[0] { [[0.0; 2], [1.0; 2]] } else { [low, high] }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::output::sample;

    #[test]
    fn the_elevation_looks_across_the_longest_side() {
        assert_eq!(seen_from_deg([1.0, 0.0]), 180.0);
        assert!((seen_from_deg([0.0, 1.0]) - 90.0).abs() < 1e-9);
        // The sample runs from south-west to north-north-east.
        let [east, north] = broadest(&sample::prediction().frequencies[0]);
        assert!(east > 0.4 && north > 0.6, "{east} {north}");
    }

    #[test]
    fn both_views_have_one_scale_and_stay_in_their_boxes() {
        let frequency = &sample::prediction().frequencies[0];
        for view in lay(frequency, Area::new(30.0, 80.0, 860.0, 880.0)) {
            for point in frequency.conductors.iter().flat_map(|c| &c.points) {
                let [x, y] = view.spot(point.position_m);
                assert!(view.area.holds(&Area::new(x, y, x, y)), "{x} {y} {:?}", view.area);
            }
        }
    }
}
