//! A station built in code: predict it and read the current on the outside of the coax.
//!
//!     cargo run --release --example station_in_code

use braidwise::layout::Layout;
use braidwise::station::{Document, Embedded};
use braidwise::study::{Options, predict};

const STATION: &str = r#"
title = "Twenty metres of wire at the lock keeper's"
unit = "m"

[earth]
kind = "soil"
soil = "garden loam"

[points]
feed = [0, 0, 3]
far = { from = "feed", bearing = 20, out = 19.4, height = 8.6 }
foot = [0, 0, "on grass"]
entry = [0, -7, "on grass"]
rig = [0, -9, 0.8]

[[wire]]
name = "radiator"
path = ["feed", "far"]
diameter = "1.6 mm"

[coax]
cable = "RG-58"
path = ["feed", "foot", "entry", "rig"]
entry = "entry"

[feed]
at = "feed"
hot = ["radiator"]
cold = ["coax"]
transformer = { ratio = "49:1" }

[operation]
power = "100 W"
frequencies = ["7.1 MHz", "14.2 MHz"]
"#;

fn main() -> Result<(), Box<dyn std::error::Error>> {
    let station = Document::parse(STATION, "in code")?.station(&Embedded)?;
    let layout = Layout::place(&station).map_err(|faults| format!("{faults:?}"))?;
    let prediction = predict(&layout, &Options::default())?;
    for f in &prediction.frequencies {
        let shield = f.shield.as_ref().ok_or("this station has a coax")?;
        println!(
            "{:.2} MHz: feed {:.0} {:+.0}j ohm, SWR {:.2} at the radio, {:.0} mA goes on into the shack, {:.0} % radiated",
            f.frequency_hz / 1e6,
            f.feed.resistance_ohm,
            f.feed.reactance_ohm,
            f.radio.swr,
            1e3 * shield.entry_current_a,
            100.0 * f.power.radiated_w / f.power.input_w
        );
        assert!(f.power.unaccounted_w.is_some_and(|w| w.abs() < 0.01 * f.power.input_w), "the power must balance");
    }
    Ok(())
}
