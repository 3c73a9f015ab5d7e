//! The stations of the convergence table, shared by `examples/convergence.rs` and the test that reads the table.

use braidwise::layout::Layout;
use braidwise::station::{Document, Embedded};

/// Which accuracy contract a station falls under.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(crate) enum Contract {
    /// Free space or perfect earth: admittance within 1 % and ω · 0.1 pF.
    Admittance,
    /// Over soil, feed of kilohms: reflection against 2,450 ohm within 0.01.
    Reflection,
    /// Over soil, low-impedance feed: 1 % and 0.5 ohm.
    Impedance,
}

/// One station of the table, at one or more frequencies.
#[derive(Debug, Clone)]
pub(crate) struct Case {
    /// Short name, unique.
    pub(crate) name: String,
    /// What it must keep.
    pub(crate) contract: Contract,
    /// The station file.
    pub(crate) text: String,
}

impl Case {
    /// The station, placed.
    pub(crate) fn layout(&self) -> Layout {
        let document = Document::parse(&self.text, &self.name).unwrap_or_else(|e| panic!("{}", e.show(false)));
        let station = document.station(&Embedded).unwrap_or_else(|e| panic!("{}", e.show(false)));
        Layout::place(&station).unwrap_or_else(|e| panic!("{}: {e:?}", self.name))
    }
}

/// All stations.
pub(crate) fn all() -> Vec<Case> {
    let mut out = dipoles();
    out.extend(shapes());
    out.extend(over_perfect_earth());
    out.extend(end_fed());
    out.extend(over_soil());
    out
}

fn case(name: impl Into<String>, contract: Contract, text: String) -> Case {
    Case { name: name.into(), contract, text }
}

const WAVELENGTH_M: f64 = 299.792_458 / 14.15;

fn operation(mhz: &[f64]) -> String {
    let list: Vec<String> = mhz.iter().map(|f| format!("\"{f} MHz\"")).collect();
    format!("[operation]\npower = \"1 W\"\nfrequencies = [{}]\n", list.join(", "))
}

fn wire(name: &str, points: &[[f64; 3]], diameter_mm: f64) -> String {
    let path: Vec<String> = points.iter().map(|p| format!("[{}, {}, {}]", p[0], p[1], p[2])).collect();
    format!(
        "[[wire]]\nname = \"{name}\"\npath = [{}]\ndiameter = \"{diameter_mm} mm\"\nmetal = \"perfect\"\n",
        path.join(", ")
    )
}

fn fed_on(name: &str, at_m: f64) -> String {
    format!("[feed]\non = \"{name}\"\nat = {at_m}\n")
}

fn between(at: [f64; 3], hot: &str, cold: &str) -> String {
    format!("[feed]\nat = [{}, {}, {}]\nhot = [{hot}]\ncold = [{cold}]\n", at[0], at[1], at[2])
}

fn earth(kind: &str) -> String {
    match kind {
        "none" | "perfect" => format!("[earth]\nkind = \"{kind}\"\n"),
        soil => format!("[earth]\nkind = \"soil\"\nsoil = \"{soil}\"\n"),
    }
}

fn dipoles() -> Vec<Case> {
    let mut out = Vec::new();
    for (length, radius_mm) in [
        (0.1, 1.0),
        (0.25, 1.0),
        (0.48, 1.0),
        (0.5, 0.2),
        (0.5, 1.0),
        (0.5, 5.0),
        (0.5, 20.0),
        (0.6, 1.0),
        (0.75, 1.0),
        (1.0, 0.2),
        (1.0, 1.0),
        (1.0, 5.0),
        (1.25, 1.0),
    ] {
        let half = 0.5 * length * WAVELENGTH_M;
        let text = earth("none")
            + &wire("d", &[[-half, 0.0, 0.0], [half, 0.0, 0.0]], 2.0 * radius_mm)
            + &fed_on("d", half)
            + &operation(&[14.15]);
        out.push(case(format!("dipole {length} wavelengths, radius {radius_mm} mm"), Contract::Admittance, text));
    }
    let half = 0.25 * WAVELENGTH_M;
    let text = earth("none")
        + &wire("d", &[[-half, 0.0, 0.0], [half, 0.0, 0.0]], 2.0)
        + &fed_on("d", 2.0 * half / 3.0)
        + &operation(&[14.15, 28.4]);
    out.push(case("dipole fed at a third", Contract::Admittance, text));
    out
}

fn shapes() -> Vec<Case> {
    let quarter = 0.25 * WAVELENGTH_M;
    let mut out = Vec::new();
    for angle_deg in [120.0_f64, 90.0, 45.0] {
        let (s, c) = (0.5 * angle_deg.to_radians()).sin_cos();
        let leg = |sign: f64| [sign * quarter * s, 0.0, -quarter * c];
        let text = earth("none")
            + &wire("v", &[leg(-1.0), [0.0, 0.0, 0.0], leg(1.0)], 2.0)
            + &fed_on("v", quarter)
            + &operation(&[14.15]);
        out.push(case(format!("bent dipole, {angle_deg} degrees between legs"), Contract::Admittance, text));
    }
    let text = earth("none")
        + &wire("through", &[[-5.0, 0.0, 0.0], [0.0, 0.0, 0.0], [7.0, 0.0, 0.0]], 2.0)
        + &wire("stem", &[[0.0, 0.0, 0.0], [0.0, 0.0, -6.0]], 2.0)
        + &between([0.0; 3], "\"stem\"", "\"through\"")
        + &operation(&[7.1, 14.15, 28.4]);
    out.push(case("T junction", Contract::Admittance, text));
    for (name, ratio, at) in [("at the feed", 5.0, 0.0), ("half way out", 10.0, 2.6)] {
        let text = earth("none")
            + &wire("thin", &[[0.0, 0.0, 0.0], [-5.2, 0.0, 0.0]], 1.6)
            + &wire(
                "inner",
                &[[0.0, 0.0, 0.0], [if at > 0.0 { at } else { 2.6 }, 0.0, 0.0]],
                if at > 0.0 { 1.6 } else { 1.6 * ratio },
            )
            + &wire("outer", &[[if at > 0.0 { at } else { 2.6 }, 0.0, 0.0], [5.2, 0.0, 0.0]], 1.6 * ratio)
            + &between([0.0; 3], "\"thin\"", "\"inner\"")
            + &operation(&[14.15, 28.4]);
        out.push(case(format!("radius step 1 to {ratio} {name}"), Contract::Admittance, text));
    }
    for (name, perimeter) in
        [("of a wavelength", 1.0), ("of a tenth of a wavelength", 0.1), ("of two wavelengths", 2.0)]
    {
        let h = perimeter * WAVELENGTH_M / 8.0;
        let corners = [[-h, -h], [h, -h], [h, h], [-h, h]].map(|p| [p[0], 0.0, p[1]]);
        let text = earth("none")
            + &wire("side", &[[0.0, 0.0, -h], corners[1], corners[2], [0.0, 0.0, h]], 2.0)
            + &wire("other", &[[0.0, 0.0, -h], corners[0], corners[3], [0.0, 0.0, h]], 2.0)
            + &between([0.0, 0.0, -h], "\"side\"", "\"other\"")
            + &operation(&[14.15]);
        out.push(case(format!("square loop {name}"), Contract::Admittance, text));
    }
    out
}

fn over_perfect_earth() -> Vec<Case> {
    let mut out = Vec::new();
    for height in [10.0, 2.0, 0.3] {
        let text = earth("perfect")
            + &wire("d", &[[-5.2, 0.0, height], [5.2, 0.0, height]], 1.6)
            + &fed_on("d", 5.2)
            + &operation(&[14.15, 28.4]);
        out.push(case(format!("dipole {height} m over perfect earth"), Contract::Admittance, text));
    }
    for (name, length) in [("quarter", 0.25), ("half", 0.5)] {
        let text = earth("perfect")
            + &wire("mast", &[[0.0, 0.0, 0.0], [0.0, 0.0, length * WAVELENGTH_M]], 2.0)
            + &between([0.0; 3], "\"mast\"", "\"earth\"")
            + &operation(&[14.15]);
        out.push(case(format!("{name} wave from perfect earth"), Contract::Admittance, text));
    }
    let text = earth("perfect")
        + &wire("l", &[[0.0, 0.0, 0.0], [0.0, 0.0, 9.0], [11.0, 0.0, 9.0]], 1.6)
        + &between([0.0; 3], "\"l\"", "\"earth\"")
        + &operation(&[3.6, 7.1, 21.2]);
    out.push(case("inverted L from perfect earth", Contract::Admittance, text));
    out
}

const BANDS_MHZ: [f64; 5] = [3.6, 7.1, 14.15, 21.2, 28.4];

/// An end-fed half wave with 12 m of coax down to `low_m` and on; extra tables as wanted.
fn end_fed_station(kind: &str, low_m: f64, counterpoise: bool, body: bool, extra: &str) -> String {
    let cold = if counterpoise { "\"coax\", \"counterpoise\"" } else { "\"coax\"" };
    let tail =
        if counterpoise { wire("counterpoise", &[[0.0, 0.0, 3.0], [1.9, 0.0, 2.4]], 1.6) } else { String::new() };
    earth(kind)
        + &wire("radiator", &[[0.0, 0.0, 3.0], [0.0, 19.4, 8.6]], 1.6)
        + &tail
        + &format!(
            "[coax]\ncable = \"RG-58\"\npath = [[0, 0, 3], [0, 0, {low_m}], [1.2, -6.3, {low_m}], [1.2, -9.5, 0.9]]\nlength = 12\n"
        )
        + &between([0.0, 0.0, 3.0], "\"radiator\"", cold)
        + "transformer = { ratio = \"49:1\" }\n"
        + &format!("[radio]\nbody = \"{}\"\n", if body { "0.3 m" } else { "none" })
        + extra
        + &operation(&BANDS_MHZ)
}

fn choke(at_m: f64, resistance: f64, reactance: f64) -> String {
    format!(
        "[[choke]]\nat = {at_m}\nimpedance = {{ resistance = \"{resistance} ohm\", reactance = \"{reactance} ohm\" }}\n"
    )
}

fn end_fed() -> Vec<Case> {
    let mut out = Vec::new();
    for (kind, where_) in [("none", "free space"), ("perfect", "perfect earth")] {
        for counterpoise in [false, true] {
            let text = end_fed_station(kind, 0.5, counterpoise, false, "");
            let with = if counterpoise { "with" } else { "without" };
            out.push(case(format!("end-fed, {where_}, {with} counterpoise"), Contract::Admittance, text));
        }
    }
    let at_feed = choke(0.0, 2000.0, 0.0);
    let near = choke(1.0, 2000.0, 0.0);
    let reactive = choke(1.0, 100.0, 2000.0);
    let two = choke(4.0, 3000.0, 1000.0) + &choke(10.5, 5000.0, 0.0);
    for (name, extra, counterpoise) in [
        ("2 kohm at 0 m", &at_feed, true),
        ("2 kohm at 1 m", &near, false),
        ("reactive choke at 1 m", &reactive, true),
        ("two chokes", &two, false),
    ] {
        let text = end_fed_station("perfect", 0.5, counterpoise, true, extra);
        out.push(case(format!("end-fed, perfect earth, {name}"), Contract::Admittance, text));
    }
    let bond = wire("earth lead", &[[1.2, -6.3, 0.5], [1.2, -6.3, 0.0]], 5.0);
    out.push(case(
        "end-fed, perfect earth, shield bonded",
        Contract::Admittance,
        end_fed_station("perfect", 0.5, false, true, &bond),
    ));
    out
}

fn over_soil() -> Vec<Case> {
    let mut out = Vec::new();
    for height in [5.0, 0.5, 0.05, 0.01] {
        let text = earth("pasture")
            + &wire("d", &[[-5.2, 0.0, height], [5.2, 0.0, height]], 1.6)
            + &fed_on("d", 5.2)
            + &operation(&[14.15]);
        out.push(case(format!("dipole {height} m over pasture"), Contract::Impedance, text));
    }
    for (soil, low_m) in [("wet meadow", 0.03), ("dry sand", 0.5)] {
        let text = end_fed_station(soil, low_m, false, true, "");
        out.push(case(format!("end-fed, {soil}, coax {low_m} m up"), Contract::Reflection, text));
    }
    let text = earth("pasture")
        + &wire("mast", &[[0.0, 0.0, 0.3], [0.0, 0.0, 5.2]], 4.0)
        + &wire("lead", &[[0.0, 0.0, 0.3], [0.0, 0.0, -1.2]], 14.0)
        + &between([0.0, 0.0, 0.3], "\"mast\"", "\"lead\"")
        + &operation(&[14.15]);
    out.push(case("quarter wave on one rod", Contract::Impedance, text));
    out
}
