//! Points resolved to coordinates, and the conductors drawn through them.

use super::place::{Draft, JOIN_M, Placing, Vertex};
use super::{ConductorKind, Point};
use crate::quantity::metres;
use crate::station::{
    Coordinates, Fault, GRASS_M, Height, Location, Metal, PathPoint, Place, Radials, Station, Written,
};

/// A star lying at another height than its point comes down to it at 45 degrees; below this difference it keeps the
/// point's height, m.
const LEVEL_M: f64 = 0.01;

/// East, north and height of a point before "on ground" is a number.
fn located(station: &Station, point: &PathPoint) -> Option<Coordinates> {
    let mut name = match point {
        PathPoint::At(at) => return Some(*at),
        PathPoint::Named(name) => name,
    };
    let (mut east_m, mut north_m, mut height) = (0.0, 0.0, None);
    for _ in 0..=station.points.len() {
        match &station.points.iter().find(|p| p.name.value == *name)?.location {
            Location::At(at) => {
                return Some(Coordinates {
                    east_m: at.east_m + east_m,
                    north_m: at.north_m + north_m,
                    height: height.unwrap_or(at.height),
                });
            }
            Location::From { from, bearing_deg, out_m, height: own } => {
                let (sin, cos) = bearing_deg.to_radians().sin_cos();
                east_m += out_m * sin;
                north_m += out_m * cos;
                height = height.or(*own);
                name = &from.value;
            }
        }
    }
    None
}

impl Placing<'_> {
    /// A point in space. "On ground" is one outer radius of the thickest conductor whose path goes through the point,
    /// so that what meets there is joined.
    pub(super) fn resolve(&mut self, point: &PathPoint, place: Option<Place>) -> Option<Point> {
        let Some(at) = located(self.station, point) else {
            self.faults.push(Fault::new(place, "this point is nowhere", "give it by coordinates in [points]"));
            return None;
        };
        let up_m = match at.height {
            Height::Metres(up_m) => up_m,
            Height::OnGrass => GRASS_M,
            Height::OnGround => thickest_at(self.station, &at),
        };
        Some(Point::new(at.east_m, at.north_m, up_m))
    }

    /// Draws wires, coax and radials; finds the rods' tops and the feed point.
    pub(super) fn draw(&mut self) {
        let station = self.station;
        for wire in &station.wires {
            self.draw_path(
                wire.name.value.clone(),
                ConductorKind::Wire,
                &wire.path,
                wire.metal,
                wire.length_m,
                wire.name.place,
            );
        }
        if let Some(coax) = &station.coax {
            self.draw_path(
                "coax".to_owned(),
                ConductorKind::Shield,
                &coax.path,
                coax.metal,
                coax.length_m,
                coax.table.place,
            );
        }
        for star in &station.radials {
            self.draw_star(star);
        }
        for rod in &station.rods {
            if let Some(top) = self.resolve(&rod.at.value, rod.at.place) {
                self.rod_tops.push(top);
            }
        }
        if let crate::station::FeedAt::Point(point) = &station.feed.at {
            self.feed_point = self.resolve(&point.value, point.place);
        }
    }

    fn draw_path(
        &mut self,
        name: String,
        kind: ConductorKind,
        path: &[Written<PathPoint>],
        metal: Metal,
        length_m: Option<Written<f64>>,
        place: Option<Place>,
    ) {
        let mut vertices: Vec<Vertex> = Vec::new();
        for point in path {
            let Some(at) = self.resolve(&point.value, point.place) else { continue };
            if vertices.last().is_some_and(|before| (before.at - at).norm() <= JOIN_M) {
                self.fault(
                    point.place,
                    format!("this point of \"{name}\" is where the one before it is"),
                    "leave one of the two out",
                );
            }
            let label = match &point.value {
                PathPoint::Named(name) => Some(name.clone()),
                PathPoint::At(_) => None,
            };
            vertices.push(Vertex { at, name: label, place: point.place });
        }
        if vertices.len() < 2 {
            self.fault(place, format!("\"{name}\" has no path"), "give it at least two points");
            return;
        }
        self.drafts.push(Draft { name, kind, vertices, metal, length_m, place });
    }

    fn draw_star(&mut self, star: &Radials) {
        let Some(centre) = self.resolve(&star.at.value, star.at.place) else { return };
        let length_m = star.length_m.value;
        let (end_m, lies) = match star.height.map(|h| h.value) {
            None => (centre.z, false),
            Some(Height::Metres(up_m)) => (up_m, up_m < 0.0),
            Some(Height::OnGrass) => (GRASS_M, true),
            Some(Height::OnGround) => (star.metal.outer_radius_m(), true),
        };
        let drop_m = if lies && (end_m - centre.z).abs() <= LEVEL_M { 0.0 } else { end_m - centre.z };
        let slant_m = if lies { drop_m.abs() * std::f64::consts::SQRT_2 } else { drop_m.abs() };
        if slant_m >= length_m {
            let reason = format!(
                "the radials are {} long and their height is {} from their point's",
                metres(length_m),
                metres(drop_m.abs())
            );
            self.fault(star.length_m.place, reason, "make them longer, or bring point and height together");
            return;
        }
        for k in 0..star.count {
            let bearing = (star.first_bearing_deg + 360.0 * f64::from(k) / f64::from(star.count)).to_radians();
            let along = Point::new(bearing.sin(), bearing.cos(), 0.0);
            let mut points = vec![centre];
            if lies && drop_m != 0.0 {
                let knee = centre + along * drop_m.abs() + Point::new(0.0, 0.0, drop_m);
                points.push(knee);
                points.push(knee + along * (length_m - slant_m));
            } else {
                let out_m = (length_m * length_m - drop_m * drop_m).sqrt();
                points.push(centre + along * out_m + Point::new(0.0, 0.0, drop_m));
            }
            let vertices = points.into_iter().map(|at| Vertex { at, name: None, place: star.at.place }).collect();
            self.drafts.push(Draft {
                name: format!("{} {}", star.name.value, k + 1),
                kind: ConductorKind::Radial,
                vertices,
                metal: star.metal,
                length_m: None,
                place: star.name.place,
            });
        }
    }
}

/// Largest outer radius of the conductors lying on the ground at a place, m.
fn thickest_at(station: &Station, at: &Coordinates) -> f64 {
    let here = |point: &PathPoint| {
        located(station, point).is_some_and(|p| {
            p.height == Height::OnGround && (p.east_m - at.east_m).hypot(p.north_m - at.north_m) <= JOIN_M
        })
    };
    let wires = station.wires.iter().map(|w| (&w.path, w.metal));
    let coax = station.coax.iter().map(|c| (&c.path, c.metal));
    let on_paths = wires.chain(coax).filter(|(path, _)| path.iter().any(|p| here(&p.value))).map(|(_, metal)| metal);
    let in_stars = station.radials.iter().filter(|r| here(&r.at.value)).map(|r| r.metal);
    on_paths.chain(in_stars).map(|m| m.outer_radius_m()).fold(0.0, f64::max)
}
