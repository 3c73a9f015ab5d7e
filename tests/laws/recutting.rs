//! A straight wire stays the same wire however it is cut in the file.

use crate::solve::{feeds, layout};
use std::f64::consts::PI;

const MHZ: [f64; 3] = [3.6, 14.15, 28.4];

fn station(earth: &str, wires: &[&str], hot: &str) -> Vec<num_complex::Complex64> {
    let mut text = format!("[earth]\nkind = \"{earth}\"\n");
    for (n, path) in wires.iter().enumerate() {
        text += &format!("[[wire]]\nname = \"w{n}\"\npath = {path}\ndiameter = \"1.6 mm\"\n");
    }
    text += &format!(
        "[[wire]]\nname = \"tail\"\npath = [[0, 0, 3], [0, -4, 3]]\ndiameter = \"1.6 mm\"\n\
         [feed]\nat = [0, 0, 3]\nhot = [\"{hot}\"]\ncold = [\"tail\"]\n\
         [operation]\npower = \"1 W\"\nfrequencies = [\"3.6 MHz\", \"14.15 MHz\", \"28.4 MHz\"]\n"
    );
    feeds(&layout(&text))
}

/// Largest |ΔY| over what the accuracy contract allows.
fn over_allowed(one: &[num_complex::Complex64], two: &[num_complex::Complex64]) -> f64 {
    let allowed = |z: &num_complex::Complex64, mhz: f64| 0.01 / z.norm() + 2e6 * PI * mhz * 0.1e-12;
    one.iter().zip(two).zip(MHZ).map(|((a, b), f)| (a.inv() - b.inv()).norm() / allowed(b, f)).fold(0.0, f64::max)
}

#[test]
fn recutting_a_straight_wire_moves_the_answer_by_less_than_half_the_contract() {
    for earth in ["none", "perfect"] {
        let whole = station(earth, &["[[0, 0, 3], [0, 20, 9]]"], "w0");
        // the same straight line with further vertices, evenly, unevenly, and as separate wires
        let recut: [&[&str]; 5] = [
            &["[[0, 0, 3], [0, 10, 6], [0, 20, 9]]"],
            &["[[0, 0, 3], [0, 0.5, 3.15], [0, 0.55, 3.165], [0, 20, 9]]"],
            &["[[0, 0, 3], [0, 19.9, 8.97], [0, 20, 9]]"],
            &["[[0, 0, 3], [0, 7, 5.1]]", "[[0, 7, 5.1], [0, 20, 9]]"],
            &["[[0, 0, 3], [0, 7, 5.1]]", "[[0, 20, 9], [0, 15, 7.5], [0, 7, 5.1]]"],
        ];
        for wires in recut {
            let over = over_allowed(&station(earth, wires, "w0"), &whole);
            assert!(over < 0.5, "{earth}, {wires:?}: {over}");
        }
        let shorter = station(earth, &["[[0, 0, 3], [0, 19.9, 8.97]]"], "w0");
        assert!(over_allowed(&shorter, &whole) > 0.5, "ten centimetres less must show");
    }
}
