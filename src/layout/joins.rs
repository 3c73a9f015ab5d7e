//! Which vertices are one point.

use super::place::{JOIN_M, Placing};
use super::{Junction, Point};

/// Vertices of one conductor are joined only when the way between them is longer than this, m: a loop closed on
/// itself, not two vertices that happen to be close.
const LOOP_M: f64 = 0.01;

impl Placing<'_> {
    /// Joins vertices within a millimetre of each other and gives them the very same coordinates.
    pub(super) fn join(&mut self) {
        let all: Vec<(usize, usize)> =
            self.drafts.iter().enumerate().flat_map(|(c, d)| (0..d.vertices.len()).map(move |v| (c, v))).collect();
        let at = |k: usize| self.drafts[all[k].0].at(all[k].1);
        let distances: Vec<Vec<f64>> = self.drafts.iter().map(super::place::Draft::distances_m).collect();
        let mut group: Vec<usize> = (0..all.len()).collect();
        for a in 0..all.len() {
            for b in a + 1..all.len() {
                let ((ca, va), (cb, vb)) = (all[a], all[b]);
                let apart = ca != cb || (distances[ca][va] - distances[cb][vb]).abs() > LOOP_M;
                if apart && (at(a) - at(b)).norm() <= JOIN_M {
                    let (from, to) = (group[b], group[a]);
                    group.iter_mut().filter(|g| **g == from).for_each(|g| *g = to);
                }
            }
        }
        let mut firsts: Vec<usize> = group.clone();
        firsts.sort_unstable();
        firsts.dedup();
        for first in firsts {
            let members: Vec<(usize, usize)> = (0..all.len()).filter(|k| group[*k] == first).map(|k| all[k]).collect();
            if members.len() < 2 {
                continue;
            }
            let position = self.meeting_point(&members);
            for &(conductor, vertex) in &members {
                self.drafts[conductor].vertices[vertex].at = position;
            }
            self.junctions.push(Junction { position, members, to_earth: false });
        }
    }

    /// Height 0 wins, so that contact with the earth is never lost in rounding; else the first member's place.
    fn meeting_point(&self, members: &[(usize, usize)]) -> Point {
        let points: Vec<Point> = members.iter().map(|&(c, v)| self.drafts[c].at(v)).collect();
        points.iter().copied().find(|p| p.z == 0.0).unwrap_or(points[0])
    }
}
