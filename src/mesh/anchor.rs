//! Meshes that nest: which ends move, and how a conductor is divided back from an end that does.
//!
//! With a length scanned, elements laid in whole steps of ∫ dx/h from the last fixed place stay where they are, and those
//! near the moving end keep their distance from it; only the one or two between differ from length to length.

use super::divide::GROWTH;
use crate::layout::{ConductorKind, Layout};

/// What moves when lengths are scanned; nothing by default.
#[derive(Debug, Clone, Default, PartialEq, Eq)]
pub struct Anchor {
    moving: Vec<usize>,
    carried: Vec<usize>,
}

impl Anchor {
    /// The last points of these conductors move along their last legs, and what is joined there with them.
    #[must_use]
    pub fn new(layout: &Layout, moving: &[usize]) -> Self {
        let is_end = |&(c, v): &(usize, usize)| moving.contains(&c) && v + 1 == layout.conductors[c].points.len();
        let at_ends = layout.junctions.iter().filter(|j| j.members.iter().any(is_end));
        let joined = at_ends.flat_map(|j| j.members.iter().map(|m| m.0));
        let bodies = (0..layout.conductors.len()).filter(|&c| layout.conductors[c].kind == ConductorKind::Body);
        let mut carried: Vec<usize> = joined.chain(bodies).filter(|c| !moving.contains(c)).collect();
        carried.sort_unstable();
        carried.dedup();
        Self { moving: moving.to_vec(), carried }
    }

    /// The conductor's last point moves.
    pub(super) fn moves(&self, conductor: usize) -> bool {
        self.moving.contains(&conductor)
    }

    /// The conductor is joined to an end that moves.
    pub(super) fn carries(&self, conductor: usize) -> bool {
        self.carried.contains(&conductor)
    }

    /// The vertex moves with an end.
    pub(super) fn displaces(&self, layout: &Layout, conductor: usize, vertex: usize) -> bool {
        self.carries(conductor) || self.moves(conductor) && vertex + 1 == layout.conductors[conductor].points.len()
    }
}

/// Distances back from a moving end at whole steps of ∫ dx/h, h = end size + growth · distance, as long as that is finer
/// than what the rest of the conductor asks for (`wanted` at a distance back), and room is left before its start.
pub(super) fn end_pattern(end_m: f64, room_m: f64, factor: f64, wanted: impl Fn(f64) -> f64) -> Vec<f64> {
    let mut out = Vec::new();
    loop {
        let n = (out.len() + 1) as f64;
        let back = end_m * (GROWTH * n / factor).exp_m1() / GROWTH;
        let size = end_m + GROWTH * back;
        if size > wanted(back) || room_m - back < 0.5 * size / factor {
            return out;
        }
        out.push(back);
    }
}
