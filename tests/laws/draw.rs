//! Randomly drawn stations, the same ones every time.

/// SplitMix64 (Steele, Lea & Flood 2014): small, and the same on every machine.
pub(crate) struct Dice(u64);

impl Dice {
    /// A sequence of its own for each seed.
    pub(crate) fn new(seed: u64) -> Self {
        Self(seed.wrapping_mul(0x9e37_79b9_7f4a_7c15))
    }

    /// Uniform in 0..1.
    pub(crate) fn unit(&mut self) -> f64 {
        self.0 = self.0.wrapping_add(0x9e37_79b9_7f4a_7c15);
        let mut z = self.0;
        z = (z ^ (z >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
        z = (z ^ (z >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
        ((z ^ (z >> 31)) >> 11) as f64 / (1_u64 << 53) as f64
    }

    /// Uniform between two values.
    pub(crate) fn between(&mut self, low: f64, high: f64) -> f64 {
        low + (high - low) * self.unit()
    }
}

/// A station in pieces, so that a law can change one of them.
#[derive(Debug, Clone)]
pub(crate) struct Drawn {
    /// Earth table.
    pub(crate) earth: String,
    /// Path of the radiator from the feed point.
    pub(crate) radiator: Vec<[f64; 3]>,
    /// Path of the counterpoise from the feed point.
    pub(crate) counterpoise: Vec<[f64; 3]>,
    /// Route of the coax from the feed point.
    pub(crate) coax: Vec<[f64; 3]>,
    /// Choke on the coax: at, resistance, reactance.
    pub(crate) choke: (f64, f64, f64),
    /// Inline coil on the radiator: at, inductance in microhenry.
    pub(crate) coil: (f64, f64),
    /// MHz.
    pub(crate) mhz: f64,
}

/// Earth tables to draw from.
pub(crate) const FREE: &str = "kind = \"none\"";
/// Perfect earth.
pub(crate) const PERFECT: &str = "kind = \"perfect\"";
/// Ordinary soil (the usual middle class of amateur tables, common practice).
pub(crate) const SOIL: &str = "kind = \"soil\"\npermittivity = 13\nconductivity = \"5 mS/m\"";

impl Drawn {
    /// A station with a bent radiator, a counterpoise, coax with two bends, a choke and a coil.
    pub(crate) fn new(seed: u64, earth: &str) -> Self {
        let mut d = Dice::new(seed);
        let feed = [d.between(-2.0, 2.0), d.between(-2.0, 2.0), d.between(2.5, 5.0)];
        let bearing = d.between(0.0, 6.2);
        let away = |from: [f64; 3], turn: f64, out: f64, up: f64| {
            [from[0] + out * (bearing + turn).cos(), from[1] + out * (bearing + turn).sin(), up]
        };
        let knee = away(feed, 0.0, d.between(4.0, 8.0), d.between(6.0, 9.0));
        let tip = away(knee, d.between(-0.9, 0.9), d.between(6.0, 12.0), d.between(4.0, 9.0));
        let tail = away(feed, d.between(1.8, 2.6), d.between(1.5, 4.0), d.between(1.5, 2.5));
        let low = d.between(0.3, 1.0);
        let foot = away(feed, d.between(3.2, 3.6), d.between(0.3, 1.0), low);
        let wall = away(foot, d.between(3.6, 4.4), d.between(4.0, 8.0), low);
        let rig = away(wall, d.between(3.0, 4.0), d.between(1.5, 3.0), 1.2);
        Self {
            earth: earth.to_string(),
            radiator: vec![feed, knee, tip],
            counterpoise: vec![feed, tail],
            coax: vec![feed, foot, wall, rig],
            choke: (d.between(0.3, 5.0), d.between(200.0, 4000.0), d.between(-1000.0, 2000.0)),
            coil: (d.between(1.0, 3.5), d.between(0.5, 5.0)),
            mhz: d.between(3.5, 29.0),
        }
    }

    /// Every point moved by a function.
    pub(crate) fn moved(&self, by: impl Fn([f64; 3]) -> [f64; 3]) -> Self {
        let path = |p: &Vec<[f64; 3]>| p.iter().map(|q| by(*q)).collect();
        Self {
            radiator: path(&self.radiator),
            counterpoise: path(&self.counterpoise),
            coax: path(&self.coax),
            ..self.clone()
        }
    }

    /// The station file; `backwards` writes the wires from their far ends.
    pub(crate) fn text(&self, backwards: bool) -> String {
        let path = |points: &[[f64; 3]], turn: bool| {
            let mut list: Vec<String> = points.iter().map(|p| format!("[{}, {}, {}]", p[0], p[1], p[2])).collect();
            if turn {
                list.reverse();
            }
            list.join(", ")
        };
        let length: f64 = self.radiator.windows(2).map(|p| distance(p[0], p[1])).sum();
        let coil_at = if backwards { length - self.coil.0 } else { self.coil.0 };
        let feed = self.radiator[0];
        format!(
            "unit = \"m\"\n[earth]\n{}\n\
             [[wire]]\nname = \"radiator\"\npath = [{}]\ndiameter = \"1.6 mm\"\n\
             [[wire]]\nname = \"counterpoise\"\npath = [{}]\ndiameter = \"1.2 mm\"\njacket = {{ permittivity = 2.3, thickness = \"0.6 mm\" }}\n\
             [coax]\ncable = \"RG-58\"\npath = [{}]\n\
             [feed]\nat = [{}, {}, {}]\nhot = [\"radiator\"]\ncold = [\"coax\", \"counterpoise\"]\ntransformer = {{ ratio = \"49:1\" }}\n\
             [[choke]]\nat = {}\nimpedance = {{ resistance = \"{} ohm\", reactance = \"{} ohm\" }}\n\
             [[inline]]\nname = \"coil\"\non = \"radiator\"\nat = {coil_at}\ninductance = \"{} uH\"\n\
             [radio]\nbody = \"none\"\n\
             [operation]\npower = \"100 W\"\nfrequencies = [\"{} MHz\"]\n",
            self.earth,
            path(&self.radiator, backwards),
            path(&self.counterpoise, backwards),
            path(&self.coax, false),
            feed[0],
            feed[1],
            feed[2],
            self.choke.0,
            self.choke.1,
            self.choke.2,
            self.coil.1,
            self.mhz
        )
    }
}

/// Distance of two points, m.
pub(crate) fn distance(p: [f64; 3], q: [f64; 3]) -> f64 {
    (0..3).map(|i| (p[i] - q[i]).powi(2)).sum::<f64>().sqrt()
}
