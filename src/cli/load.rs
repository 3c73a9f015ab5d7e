//! From a file name and `--set` changes to a placed station.

use super::flags::StationArgs;
use super::stop::Stop;
use crate::layout::Layout;
use crate::outcome::place::LimitsOutcome;
use crate::output::References;
use crate::station::{Document, Embedded, Refused, Station};

/// A station read and placed.
pub(super) struct Loaded {
    pub(super) document: Document,
    pub(super) layout: Layout,
    /// Variants of the file by name, the nominal station not among them.
    pub(super) variants: Vec<(String, Layout)>,
}

/// Read, change, check and place.
pub(super) fn load(args: &StationArgs) -> Result<Loaded, Stop> {
    let name = args.file.display().to_string();
    let text = std::fs::read_to_string(&args.file).map_err(|e| match e.kind() {
        std::io::ErrorKind::NotFound => {
            Stop::Could(format!("there is no file {name}; give the path of a station file (TOML)"))
        }
        std::io::ErrorKind::InvalidData => {
            Stop::Usage(format!("{name} is not UTF-8 text; save the station file as UTF-8"))
        }
        _ => Stop::Could(format!("cannot read {name}: {e}")),
    })?;
    let sets = args.sets.iter().map(|s| set(s)).collect::<Result<Vec<_>, _>>()?;
    let document = Document::parse(&text, &name)?.with(&sets)?;
    let mut placed = Vec::new();
    for (name, station) in document.stations(&Embedded)? {
        let layout = place(&station).map_err(|refused| refused.in_variant(&name))?;
        placed.push((name, layout));
    }
    // the first is the station as written
    let (_, layout) = placed.remove(0);
    Ok(Loaded { document, layout, variants: placed })
}

/// Place a station in space.
pub(super) fn place(station: &Station) -> Result<Layout, Refused> {
    Layout::place(station).map_err(|faults| Refused { sources: station.sources.clone(), faults })
}

/// PATH=VALUE into its halves.
pub(super) fn set(text: &str) -> Result<(String, String), Stop> {
    match text.split_once('=') {
        Some((path, value)) if !path.trim().is_empty() && !value.trim().is_empty() => {
            Ok((path.trim().to_string(), value.trim().to_string()))
        }
        _ => Err(Stop::Usage(format!("--set '{text}' is not PATH=VALUE; write for example --set 'coax.length=12 m'"))),
    }
}

/// What tables and pictures measure results against.
pub(super) fn references(layout: &Layout) -> References {
    References {
        radio_impedance_ohm: layout.radio.impedance_ohm,
        impedance_ratio: layout.feed.impedance_ratio,
        limits: Some(LimitsOutcome { entry_current_a: layout.limits.entry_current_a, swr: layout.limits.swr }),
    }
}
