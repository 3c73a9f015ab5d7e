//! Where a station stands, which way it faces and from which end a wire is written must not matter.

use crate::draw::{Drawn, FREE, PERFECT, SOIL};
use crate::solve::{apart, feeds, layout, outcome};

/// What rounding may leave after hundreds of thousands of operations.
const ROUNDING: f64 = 1e-9;
/// Over soil the tables' nodes follow the station's extent; their tolerance is 10⁻⁵ of 1/R, and twenty times that may reach the feed.
const TABLES: f64 = 2e-4;

fn turned(p: [f64; 3], angle: f64) -> [f64; 3] {
    let (s, c) = angle.sin_cos();
    [c * p[0] - s * p[1], s * p[0] + c * p[1], p[2]]
}

#[test]
fn turning_about_the_vertical_and_moving_along_the_earth_change_nothing() {
    for (earth, allowed) in [(FREE, ROUNDING), (PERFECT, ROUNDING), (SOIL, TABLES)] {
        for seed in 0..4 {
            let drawn = Drawn::new(seed, earth);
            let here = feeds(&layout(&drawn.text(false)));
            let angle = 0.7 + seed as f64;
            let there = drawn.moved(|p| turned([p[0] + 31.7, p[1] - 12.3, p[2]], angle));
            let difference = apart(&here, &feeds(&layout(&there.text(false))));
            assert!(difference < allowed, "{earth}, seed {seed}: {difference:e}");
        }
    }
}

#[test]
fn in_free_space_any_turn_changes_nothing_and_over_an_earth_it_does() {
    for seed in 10..14 {
        // upright becomes east, east becomes down
        let tip_over = |p: [f64; 3]| {
            let q = turned(p, 0.3 * seed as f64);
            [q[2] + 5.0, q[1] - 3.0, 40.0 - q[0]]
        };
        let drawn = Drawn::new(seed, FREE);
        let here = feeds(&layout(&drawn.text(false)));
        let difference = apart(&here, &feeds(&layout(&drawn.moved(tip_over).text(false))));
        assert!(difference < ROUNDING, "seed {seed}: {difference:e}");
        let grounded = Drawn::new(seed, PERFECT);
        let over_earth = feeds(&layout(&grounded.text(false)));
        let lifted = grounded.moved(|p| [p[0], p[1], p[2] + 1.0]);
        assert!(apart(&over_earth, &feeds(&layout(&lifted.text(false)))) > 1e-4, "an earth must be felt");
    }
}

#[test]
fn a_path_may_be_written_from_either_end() {
    for (earth, allowed) in [(FREE, ROUNDING), (PERFECT, ROUNDING), (SOIL, ROUNDING)] {
        for seed in 20..24 {
            let drawn = Drawn::new(seed, earth);
            let (forward, backward) = (layout(&drawn.text(false)), layout(&drawn.text(true)));
            let (one, two) = (outcome(&forward), outcome(&backward));
            let difference =
                apart(&[crate::solve::feed_ohm(&one.frequencies[0])], &[crate::solve::feed_ohm(&two.frequencies[0])]);
            assert!(difference < allowed, "{earth}, seed {seed}: {difference:e}");
            // a current is positive along the path as written
            let start = |p: &braidwise::outcome::Prediction| p.frequencies[0].conductors[0].points[0].current_a;
            let end =
                |p: &braidwise::outcome::Prediction| p.frequencies[0].conductors[0].points.last().unwrap().current_a;
            assert!((start(&one) + end(&two)).norm() < 1e-7 * start(&one).norm());
        }
    }
}

#[test]
fn the_order_of_the_wires_in_the_file_does_not_matter() {
    for earth in [FREE, PERFECT, SOIL] {
        let text = Drawn::new(31, earth).text(false);
        let (head, rest) = text.split_once("[[wire]]\nname = \"radiator\"").unwrap();
        let (radiator, rest) = rest.split_once("[[wire]]").unwrap();
        let (counterpoise, tail) = rest.split_once("[coax]").unwrap();
        let swapped = format!("{head}[[wire]]{counterpoise}[[wire]]\nname = \"radiator\"{radiator}[coax]{tail}");
        let difference = apart(&feeds(&layout(&text)), &feeds(&layout(&swapped)));
        assert!(difference < if earth == SOIL { 1e-6 } else { ROUNDING }, "{earth}: {difference:e}");
    }
}
