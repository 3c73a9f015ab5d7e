//! The geometry of a pair of elements: what the integrals need to know of each.

use crate::layout::Point;
use crate::mesh::Element;

/// A straight line element as the integrals see it.
#[derive(Debug, Clone, Copy)]
pub(crate) struct Line {
    pub(crate) start: Point,
    pub(crate) end: Point,
    pub(crate) tangent: Point,
    pub(crate) length_m: f64,
    pub(crate) radius_m: f64,
}

impl Line {
    pub(crate) fn of(element: &Element) -> Self {
        Self {
            start: element.start,
            end: element.end,
            tangent: element.tangent,
            length_m: element.length_m,
            radius_m: element.radius_m,
        }
    }

    /// The element mirrored in the plane of height 0.
    pub(crate) fn mirrored(element: &Element) -> Self {
        let flip = |p: Point| Point::new(p.x, p.y, -p.z);
        Self { start: flip(element.start), end: flip(element.end), tangent: flip(element.tangent), ..Self::of(element) }
    }

    pub(crate) fn at(&self, xi: f64) -> Point {
        self.start * (0.5 * (1.0 - xi)) + self.end * (0.5 * (1.0 + xi))
    }

    pub(crate) fn middle(&self) -> Point {
        (self.start + self.end) * 0.5
    }
}

/// How the finite radii enter the distance between two elements.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(crate) enum Tubes {
    /// On one straight line and close: the exact average over both circumferences.
    Coaxial,
    /// R² = D² + c², D between points of the axes.
    Offset(f64),
}

/// Decide how the radii of a pair enter.
///
/// The average of 1/|r − r'| over the circumferences of two thin tubes is 1/D − (a²/4)∂²_t(1/D) − (b²/4)∂²_t'(1/D) + …
/// (the mean of a harmonic function over a small circle across t). On one line this is 1/√(D² + a² + b²) to second
/// order; side by side it adds nothing once integrated along a long wire. So c² = a²cos²α + b²cos²β with α, β the angles between the
/// line of sight and the axes, taken at the middles; c² = a² + b² where the two touch.
///
/// Near a joint, where one axis lies within the other's tube, that expansion fails: elements shorter than the radius would act on each
/// other more strongly than on themselves, and the matrix of the potentials would lose its definiteness. There c² goes over to
/// a² + b², for which 1/√(D² + a² + b²) is positive definite whatever the radii (a mixture of e^{−ta²} e^{−tb²} e^{−tD²}). Side by
/// side wires keep c² = 0 however close.
pub(crate) fn tubes(one: &Line, two: &Line, touch: bool) -> Tubes {
    let sum = one.radius_m + two.radius_m;
    let squares = one.radius_m.powi(2) + two.radius_m.powi(2);
    let sight = two.middle() - one.middle();
    let off_axis = |p: Point| {
        let d = p - one.start;
        (d - one.tangent * d.dot(&one.tangent)).norm()
    };
    let straight = one.tangent.cross(&two.tangent).norm() < 1e-9;
    let scale = 1e-9 * (one.length_m + two.length_m) + 1e-6 * sum;
    if straight && off_axis(two.start) < scale && off_axis(two.end) < scale {
        let gap = sight.dot(&one.tangent).abs() - 0.5 * (one.length_m + two.length_m);
        return if gap < 12.0 * sum { Tubes::Coaxial } else { Tubes::Offset(squares) };
    }
    if touch {
        return Tubes::Offset(squares);
    }
    let unit = sight / sight.norm().max(1e-12);
    let (ca, cb) = (unit.dot(&one.tangent), unit.dot(&two.tangent));
    let open = (one.radius_m * ca).powi(2) + (two.radius_m * cb).powi(2);
    let within = (1.5 - 0.5 * clearance(one, two) / sum).clamp(0.0, 1.0);
    let across = 1.0 - one.tangent.dot(&two.tangent).powi(4);
    Tubes::Offset(open + (squares - open) * within * across)
}

/// Shortest distance between two elements, m.
pub(crate) fn clearance(one: &Line, two: &Line) -> f64 {
    let ends = [
        distance_to(two, one.start),
        distance_to(two, one.end),
        distance_to(one, two.start),
        distance_to(one, two.end),
    ];
    let nearest_end = ends.into_iter().fold(f64::INFINITY, f64::min);
    let w = one.start - two.start;
    let b = one.tangent.dot(&two.tangent);
    let det = 1.0 - b * b;
    if det < 1e-6 {
        return nearest_end;
    }
    let (d, e) = (one.tangent.dot(&w), two.tangent.dot(&w));
    let (s, t) = ((b * e - d) / det, (e - b * d) / det);
    if s > 0.0 && s < one.length_m && t > 0.0 && t < two.length_m {
        return nearest_end.min((w + one.tangent * s - two.tangent * t).norm());
    }
    nearest_end
}

/// Distance of a point to an element, m.
pub(crate) fn distance_to(line: &Line, p: Point) -> f64 {
    let s = (p - line.start).dot(&line.tangent).clamp(0.0, line.length_m);
    (line.start + line.tangent * s - p).norm()
}
