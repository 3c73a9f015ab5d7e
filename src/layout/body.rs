//! The radio's case at the end of the shield.

use super::place::{Draft, Placing, Vertex};
use super::{ConductorKind, Feed, Junction, Point};
use crate::station::{Earth, Metal};

impl Placing<'_> {
    /// Draws the radio's body where the shield's end is joined to nothing: straight, level, on in the direction of the
    /// last leg that is not vertical (north if none), as long as its largest side, a twentieth of it thick at most and
    /// clear of the earth. Returns its index.
    pub(super) fn body(&mut self, feed: &Feed) -> Option<usize> {
        let side_m = self.station.radio.body_m?;
        let shield = self.shield()?;
        let draft = &self.drafts[shield];
        let last = draft.last();
        let end = draft.at(last);
        let over_earth = self.station.earth.value != Earth::None;
        if self.junction_of(shield, last).is_some() || end == feed.position || (over_earth && end.z == 0.0) {
            return None;
        }
        let legs = draft.vertices.windows(2).rev().map(|leg| leg[1].at - leg[0].at);
        let level = legs
            .map(|leg| (Point::new(leg.x, leg.y, 0.0), leg.norm()))
            .find(|(level, length)| level.norm() > 1e-6 * length);
        let direction = level.map_or(Point::new(0.0, 1.0, 0.0), |(level, _)| level.normalize());
        let mut radius_m = side_m / 20.0;
        if over_earth {
            radius_m = radius_m.min(end.z.abs() / 2.0);
        }
        let place = draft.vertices[last].place;
        let vertex = |at: Point| Vertex { at, name: None, place };
        let body = self.drafts.len();
        let name = self.free_name("radio body");
        self.drafts.push(Draft {
            name,
            kind: ConductorKind::Body,
            vertices: vec![vertex(end), vertex(end + direction * side_m)],
            metal: Metal { radius_m, conductivity_s_per_m: None, jacket: None, protective: false },
            length_m: None,
            place,
        });
        self.junctions.push(Junction { position: end, members: vec![(shield, last), (body, 0)], to_earth: false });
        Some(body)
    }

    /// The name, or with a number behind it where the file uses it already.
    fn free_name(&self, name: &str) -> String {
        if self.named(name).is_none() {
            return name.to_owned();
        }
        (2..).map(|k| format!("{name} {k}")).find(|n| self.named(n).is_none()).unwrap_or_else(|| name.to_owned())
    }
}
