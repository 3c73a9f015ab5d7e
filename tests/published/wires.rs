//! Stations made of a few wires, and their solution by the shortest way.

use braidwise::interaction::{Extent, Interaction, Surroundings};
use braidwise::layout::{Earth, Layout};
use braidwise::mesh::{Density, Mesh};
use braidwise::outcome::Prediction;
use braidwise::ports::PortModel;
use braidwise::station::{Document, Embedded};
use braidwise::study::{Options, predict};
use nalgebra::DMatrix;
use num_complex::Complex64;

/// Frequency at which the wavelength is one metre times `C_M_PER_S` / this: most checks are in wavelengths.
pub(crate) const MHZ: f64 = 7.1;
/// Wavelength there, m.
pub(crate) const WAVELENGTH_M: f64 = 299.792_458 / MHZ;

/// One wire as text.
pub(crate) fn wire(name: &str, points: &[[f64; 3]], radius_m: f64, more: &str) -> String {
    let path: Vec<String> = points.iter().map(|p| format!("[{}, {}, {}]", p[0], p[1], p[2])).collect();
    let metal = if more.contains("metal") || more.contains("conductivity") { "" } else { "metal = \"perfect\"\n" };
    format!(
        "[[wire]]\nname = \"{name}\"\npath = [{}]\ndiameter = \"{} mm\"\n{metal}{more}\n",
        path.join(", "),
        2e3 * radius_m
    )
}

/// The station of wires, a feed table and an earth ("none", "perfect", or the keys of a soil).
pub(crate) fn station(earth: &str, wires: &str, feed: &str, mhz: f64) -> Layout {
    let kind = match earth {
        "none" | "perfect" => format!("kind = \"{earth}\""),
        soil => format!("kind = \"soil\"\n{soil}"),
    };
    text(&format!(
        "unit = \"m\"\n[earth]\n{kind}\n{wires}[feed]\n{feed}\n[operation]\npower = \"100 W\"\nfrequencies = [\"{mhz} MHz\"]\n"
    ))
}

/// The station of a text, placed.
pub(crate) fn text(text: &str) -> Layout {
    let document = Document::parse(text, "check").unwrap_or_else(|e| panic!("{}\n{text}", e.show(false)));
    let station = document.station(&Embedded).unwrap_or_else(|e| panic!("{}\n{text}", e.show(false)));
    Layout::place(&station).unwrap_or_else(|e| panic!("{e:?}\n{text}"))
}

/// Short-circuit admittance matrix of feed and further gaps (conductor, from m, to m) at the only frequency, siemens.
pub(crate) fn admittance(layout: &Layout, gaps: &[(usize, f64, f64)], density: f64) -> DMatrix<Complex64> {
    let f = layout.operation.frequencies[0].frequency_hz;
    let mesh = Mesh::new(layout, f, Density { factor: density }, gaps);
    let interaction = Interaction::new(mesh, layout.earth != Earth::None);
    let earth = Surroundings::new(f, layout.earth.at(f), &Extent::of(layout)).unwrap();
    PortModel::solve(&interaction, &earth).unwrap().admittance_s
}

/// Feed impedance without any parts, ohm.
pub(crate) fn impedance(layout: &Layout) -> Complex64 {
    admittance(layout, &[], 1.0)[(0, 0)].inv()
}

/// Everything at the station's frequencies.
pub(crate) fn outcome(layout: &Layout) -> Prediction {
    predict(layout, &Options::default()).unwrap()
}

/// A centre-fed straight wire in free space.
///
/// # Inputs
/// - `length`, `radius`: in wavelengths
pub(crate) fn dipole(length: f64, radius: f64) -> Layout {
    dipole_of(length, radius, "")
}

/// The same with further keys of the wire (metal, jacket).
pub(crate) fn dipole_of(length: f64, radius: f64, more: &str) -> Layout {
    let half = 0.5 * length * WAVELENGTH_M;
    let wires = wire("d", &[[-half, 0.0, 0.0], [half, 0.0, 0.0]], radius * WAVELENGTH_M, more);
    station("none", &wires, &format!("on = \"d\"\nat = {half}"), MHZ)
}

/// Where a function of one value crosses zero between two bounds, by false position with halving (Illinois).
pub(crate) fn crossing(mut low: f64, mut high: f64, f: impl Fn(f64) -> f64) -> f64 {
    let (mut a, mut b) = (f(low), f(high));
    assert!(a * b < 0.0, "no crossing between {low} and {high}: {a} {b}");
    for _ in 0..40 {
        let middle = (low * b - high * a) / (b - a);
        let value = f(middle);
        if value * b < 0.0 {
            (low, a) = (high, b);
        } else {
            a *= 0.5;
        }
        (high, b) = (middle, value);
        if (high - low).abs() < 1e-7 * high.abs() || value == 0.0 {
            break;
        }
    }
    high
}

/// What a quantity tends to as a wire gets thinner: a cubic in 1/Ω, Ω = 2 ln(λ/2a), through four radii (in wavelengths).
pub(crate) fn thin_limit(at: impl Fn(f64) -> Complex64) -> Complex64 {
    let radii = [1e-4, 1e-6, 1e-8, 1e-10];
    let x = radii.map(|a: f64| 1.0 / (2.0 * (0.5 / a).ln()));
    (0..4)
        .map(|i| {
            let weight: f64 = (0..4).filter(|j| *j != i).map(|j| x[j] / (x[j] - x[i])).product();
            at(radii[i]) * weight
        })
        .sum()
}
