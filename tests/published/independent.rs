//! Stations solved by independent codes (Galerkin, piecewise-linear on graded meshes, extrapolated; exact tubular kernel;
//! direct Sommerfeld contours over soil). Independent solution, no published source; the gaps there are two radii wide over free
//! space and perfect earth and 2 to 3 cm over soil. Each row carries that solution's own uncertainty.

use crate::wires::{admittance, station, wire};
use braidwise::layout::Layout;
use num_complex::Complex64;
use std::f64::consts::PI;

type Points = [[f64; 3]];

/// |ΔY| over 1 % of |Y|, 0.1 pF and the row's uncertainty.
fn over_allowed(layout: &Layout, load_ohm: Option<f64>, mhz: f64, want: (f64, f64), uncertainty_ohm: f64) -> f64 {
    let y = admittance(layout, &[], 1.0);
    let got = load_ohm.map_or(y[(0, 0)], |z| y[(0, 0)] - y[(0, 1)] * y[(1, 0)] * z / (1.0 + y[(1, 1)] * z));
    let want = Complex64::new(want.0, want.1);
    let allowed = 0.01 / want.norm() + 2e6 * PI * mhz * 0.1e-12 + uncertainty_ohm / want.norm_sqr();
    (got - want.inv()).norm() / allowed
}

fn one_wire(earth: &str, points: &Points, radius_m: f64, feed: &str) -> Layout {
    station(earth, &wire("w", points, radius_m, ""), feed, 14.15)
}

#[test]
fn wires_in_free_space_and_on_perfect_earth() {
    let straight = |half: f64, radius: f64, at: f64| {
        one_wire("none", &[[0.0, 0.0, -half], [0.0, 0.0, half]], radius, &format!("on = \"w\"\nat = {at}"))
    };
    let bent = [[-3.745_33, 0.0, -3.745_33], [0.0, 0.0, 0.0], [3.745_33, 0.0, -3.745_33]];
    let rows = [
        (straight(5.296_685, 0.001, 5.296_685), (79.558_48, 45.506_23), 0.115),
        (straight(6.356_025, 0.001, 6.356_025), (156.6686, 379.8706), 0.772),
        (straight(10.593_375, 0.001, 10.593_375), (2398.726, -2622.616), 46.7),
        (straight(5.296_685, 0.005, 5.296_685), (82.206_01, 46.509_46), 0.4),
        (straight(5.296_685, 0.001, 3.531_12), (107.9079, 57.551_77), 0.17),
        (one_wire("none", &bent, 0.001, "on = \"w\"\nat = 5.296696"), (42.5772, 12.585_73), 0.103),
        (
            one_wire(
                "perfect",
                &[[0.0; 3], [0.0, 0.0, 5.296_69]],
                0.001,
                "at = [0, 0, 0]\nhot = [\"w\"]\ncold = [\"earth\"]",
            ),
            (39.779_36, 22.753_84),
            0.0577,
        ),
    ];
    for (layout, want, uncertainty) in &rows {
        let over = over_allowed(layout, None, 14.15, *want, *uncertainty);
        assert!(over <= 1.0, "{want:?}: {over}");
        let wrong = over_allowed(layout, None, 14.15, (want.0, -want.1), *uncertainty);
        assert!(wrong > 1.0, "the sign of the reactance must count");
    }
}

#[test]
fn loop_step_and_junction() {
    let h = 2.648_345;
    let square = wire("one", &[[0.0; 3], [0.0, h, 0.0], [0.0, h, 2.0 * h], [0.0, 0.0, 2.0 * h]], 0.001, "")
        + &wire("two", &[[0.0; 3], [0.0, -h, 0.0], [0.0, -h, 2.0 * h], [0.0, 0.0, 2.0 * h]], 0.001, "");
    let step = wire("thin", &[[0.0, 0.0, -5.296_69], [0.0; 3]], 0.001, "")
        + &wire("thick", &[[0.0; 3], [0.0, 0.0, 5.296_69]], 0.005, "");
    let tee = wire("through", &[[-5.0, 0.0, 0.0], [0.0; 3], [7.0, 0.0, 0.0]], 0.001, "")
        + &wire("stem", &[[0.0; 3], [0.0, 0.0, -6.0]], 0.0025, "");
    for (wires, hot, cold, want, uncertainty) in [
        (square, "one", "two", (108.8147, -145.944), 0.13),
        (step, "thick", "thin", (80.803_86, 46.034_67), 0.259),
        (tee, "stem", "through", (55.031_41, 66.838_56), 0.245),
    ] {
        let layout = station("none", &wires, &format!("at = [0, 0, 0]\nhot = [\"{hot}\"]\ncold = [\"{cold}\"]"), 14.15);
        let over = over_allowed(&layout, None, 14.15, want, uncertainty);
        assert!(over <= 1.0, "{hot} against {cold}: {over}");
    }
}

fn end_fed(earth: &str, counterpoise: bool, choke: bool, mhz: f64) -> Layout {
    let mut wires = wire("radiator", &[[0.0, 0.0, 3.0], [18.948, 0.0, 10.0]], 0.0008, "")
        + &wire("shield", &[[0.0, 0.0, 3.0], [0.0, 0.0, 0.5], [-9.1, 0.0, 0.5]], 0.0025, "");
    let mut cold = "\"shield\"".to_string();
    if counterpoise {
        wires += &wire("counterpoise", &[[0.0, 0.0, 3.0], [0.0, 2.0, 3.0]], 0.0008, "");
        cold += ", \"counterpoise\"";
    }
    if choke {
        wires += "[[choke]]\nname = \"c\"\non = \"shield\"\nat = 1\nimpedance = { resistance = \"2 kohm\", reactance = \"0 ohm\" }\n";
    }
    station(earth, &wires, &format!("at = [0, 0, 3]\nhot = [\"radiator\"]\ncold = [{cold}]"), mhz)
}

#[test]
fn end_fed_stations() {
    for (layout, load, mhz, want, uncertainty) in [
        (end_fed("none", false, false, 7.1), None, 7.1, (3973.135, 361.9813), 37.3),
        (end_fed("perfect", true, false, 14.15), None, 14.15, (1191.036, 572.9277), 15.5),
        (end_fed("perfect", true, false, 28.4), None, 28.4, (505.8161, 488.9879), 8.47),
        (end_fed("perfect", false, true, 7.1), Some(2000.0), 7.1, (5306.453, -3035.629), 92.5),
    ] {
        let over = over_allowed(&layout, load, mhz, want, uncertainty);
        assert!(over <= 1.0, "{want:?}: {over}");
        // the same wires without the counterpoise or the choke are far outside
        let other = end_fed("none", true, false, mhz);
        assert!(over_allowed(&other, None, mhz, want, uncertainty) > 1.0);
    }
}

#[test]
fn dipoles_over_soil() {
    let soils = [
        ("average", "permittivity = 13\nconductivity = \"5 mS/m\""),
        ("poor", "permittivity = 5\nconductivity = \"1 mS/m\""),
        ("good", "permittivity = 20\nconductivity = \"30.3 mS/m\""),
        ("sea", "permittivity = 81\nconductivity = \"5 S/m\""),
    ];
    let soil = |name: &str| soils.iter().find(|s| s.0 == name).unwrap().1;
    for (name, height, r, x) in [
        ("average", 0.05, 151.532_44, 188.686_51),
        ("average", 0.5, 82.667_706, 17.491_571),
        ("poor", 0.2, 114.462_79, 69.749_314),
        ("good", 2.0, 41.904_618, 7.338_413),
        ("sea", 1.0, 8.018_523, -15.348_203),
    ] {
        let points = [[0.0, -5.1, height], [0.0, 5.1, height]];
        let z = admittance(&one_wire(soil(name), &points, 0.0008, "on = \"w\"\nat = 5.1"), &[], 1.0)[(0, 0)].inv();
        let want = Complex64::new(r, x);
        assert!((z - want).norm() < 0.02 * want.norm() + 1.5, "{name}, {height} m: {z} {want}");
    }
    let upright = [[0.0, 0.0, 0.1], [0.0, 0.0, 10.3]];
    let z = admittance(&one_wire(soil("average"), &upright, 0.0008, "on = \"w\"\nat = 5.1"), &[], 1.0)[(0, 0)].inv();
    let want = Complex64::new(95.587_311, -3.863_504);
    assert!((z - want).norm() < 0.02 * want.norm() + 1.5, "upright: {z} {want}");
}

#[test]
fn a_wire_in_the_ground() {
    let points = [[0.0, -5.0, -0.3], [0.0, 5.0, -0.3]];
    let wires = wire("w", &points, 0.001, "");
    let layout =
        station("permittivity = 13\nconductivity = \"5 mS/m\"", &wires, "on = \"w\"\nat = 5\ngap = \"25 mm\"", 7.1);
    let z = admittance(&layout, &[], 1.0)[(0, 0)].inv();
    let want = Complex64::new(216.869_53, 44.814_669);
    assert!((z - want).norm() < 0.05 * want.norm() + 1.0, "{z} {want}");
}

#[test]
fn a_monopole_on_one_rod() {
    let wires = wire("monopole", &[[0.0, 0.0, 0.05], [0.0, 0.0, 10.3]], 0.001, "")
        + &wire("lead", &[[0.0, 0.0, 0.05], [0.0, 0.0, 0.0]], 0.001, "")
        + &wire("rod", &[[0.0, 0.0, 0.0], [0.0, 0.0, -1.5]], 0.007, "");
    let feed = "at = [0, 0, 0.05]\nhot = [\"monopole\"]\ncold = [\"lead\"]\ngap = \"25 mm\"";
    let layout = station("permittivity = 13\nconductivity = \"5 mS/m\"", &wires, feed, 7.1);
    let z = admittance(&layout, &[], 1.0)[(0, 0)].inv();
    let want = Complex64::new(106.7307, -27.443_954);
    assert!((z - want).norm() < 0.02 * want.norm() + 1.5, "{z} {want}");
}
