//! A perfect earth is the same as the mirror image of every wire, written out in free space.

use crate::draw::{Drawn, PERFECT};
use crate::solve::{layout, ports};
use braidwise::layout::{Earth, Junction, Layout, Point};

fn mirror(p: Point) -> Point {
    Point::new(p.x, p.y, -p.z)
}

/// The station and its image, in free space; ends bonded to the earth meet their images.
fn with_image(layout: &Layout) -> Layout {
    let n = layout.conductors.len();
    let mut both = layout.clone();
    both.earth = Earth::None;
    both.junctions.clear();
    for c in &layout.conductors {
        let mut image = c.clone();
        image.name = format!("image of {}", c.name);
        image.points = c.points.iter().map(|p| mirror(*p)).collect();
        both.conductors.push(image);
    }
    for j in &layout.junctions {
        let image: Vec<_> = j.members.iter().map(|&(c, v)| (c + n, v)).collect();
        if j.to_earth {
            let members = j.members.iter().copied().chain(image).collect();
            both.junctions.push(Junction { members, to_earth: false, ..j.clone() });
        } else {
            both.junctions.push(j.clone());
            both.junctions.push(Junction { position: mirror(j.position), members: image, to_earth: false });
        }
    }
    both
}

/// Feed admittance over the perfect earth, and with the image's gap driven the opposite way.
fn both_ways(layout: &Layout) -> (num_complex::Complex64, num_complex::Complex64, num_complex::Complex64) {
    let over_earth = ports(layout, &[]).admittance_s[(0, 0)];
    let leg = layout.feed.hot[0];
    assert!(leg.forward && leg.vertex == 0);
    let gap = (leg.conductor + layout.conductors.len(), 0.0, layout.feed.gap_m);
    let y = ports(&with_image(layout), &[gap]).admittance_s;
    let image_port = y.nrows() - 1;
    (over_earth, y[(0, 0)] - y[(0, image_port)], y[(0, 0)] + y[(0, image_port)])
}

#[test]
fn a_station_over_perfect_earth_equals_itself_with_its_image() {
    for seed in 40..44 {
        let mut drawn = Drawn::new(seed, PERFECT);
        // high enough that the mesher does not take wire and image for close neighbours
        drawn = drawn.moved(|p| [p[0], p[1], p[2] + 6.0]);
        let mut station = layout(&drawn.text(false));
        // the gaps of parts are features of the mesh, and the images have none
        station.parts.clear();
        let (earth, image, wrong) = both_ways(&station);
        assert!((earth - image).norm() < 1e-9 * earth.norm(), "seed {seed}: {earth} {image}");
        assert!((earth - wrong).norm() > 1e-4 * earth.norm(), "seed {seed}: an image of the wrong sign must show");
    }
}

#[test]
fn a_wire_bonded_to_perfect_earth_equals_one_that_meets_its_image() {
    // leaning, so that wire and image meet at an angle and the mesher grades both alike
    let text = "[earth]\nkind = \"perfect\"\n\
        [[wire]]\nname = \"mast\"\npath = [[0, 0, 9], [0, 1, 0]]\ndiameter = \"4 mm\"\n\
        [[wire]]\nname = \"top\"\npath = [[0, 0, 9], [6, 2, 11]]\ndiameter = \"2 mm\"\n\
        [feed]\nat = [0, 0, 9]\nhot = [\"top\"]\ncold = [\"mast\"]\n\
        [operation]\npower = \"1 W\"\nfrequencies = [\"7.1 MHz\"]\n";
    let (earth, image, wrong) = both_ways(&layout(text));
    assert!((earth - image).norm() < 1e-9 * earth.norm(), "{earth} {image}");
    assert!((earth - wrong).norm() > 0.1 * earth.norm());
}
