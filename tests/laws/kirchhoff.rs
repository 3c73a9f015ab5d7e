//! What flows into a junction flows out of it.

use crate::draw::{Drawn, FREE, PERFECT, SOIL};
use crate::solve::{layout, outcome};
use braidwise::outcome::Side;
use num_complex::Complex64;

#[test]
fn currents_at_every_junction_sum_to_nothing() {
    for earth in [FREE, PERFECT, SOIL] {
        for seed in 70..73 {
            let station = layout(&Drawn::new(seed, earth).text(seed % 2 == 0));
            let prediction = outcome(&station);
            let conductors = &prediction.frequencies[0].conductors;
            for junction in &station.junctions {
                let mut total = Complex64::ZERO;
                let mut largest = 0.0_f64;
                for &(conductor, vertex) in &junction.members {
                    let place = station.conductors[conductor].distances_m()[vertex];
                    for p in conductors[conductor].points.iter().filter(|p| (p.distance_m - place).abs() < 1e-9) {
                        largest = largest.max(p.current_a.norm());
                        total += match p.side {
                            Some(Side::Before) => -p.current_a,
                            _ => p.current_a,
                        };
                    }
                }
                assert!(largest > 1e-3, "three conductors meet at the feed point and carry current");
                assert!(total.norm() < 1e-12 * largest, "{earth}, seed {seed}: {total} of {largest}");
            }
        }
    }
}

#[test]
fn a_free_end_carries_no_current() {
    for earth in [FREE, SOIL] {
        let prediction = outcome(&layout(&Drawn::new(75, earth).text(false)));
        for c in &prediction.frequencies[0].conductors {
            assert!(c.points.last().unwrap().current_a.norm() < 1e-14, "{}", c.name);
        }
    }
}
