//! The usual cautions, said beside the results they bear on.

/// What stands under every result about a station at power.
pub(super) const STATION: [&str; 6] = [
    "High voltage stands at the ends of the wire and at the feed point whenever you transmit: out of reach of people and animals.",
    "A bare feed point, counterpoise or hot shield can burn whoever touches it; insulate what can be reached.",
    "Voltages here are the conductor's potential, a guide to insulation and burns; no meter reads them as such.",
    "Keep every wire, mast and rope away from power lines, also if it falls, also while it is being put up.",
    "Lightning: bond and protect the station as the local code asks; no choke and no low standing-wave ratio does that.",
    "Local electrical codes, licensed practice and a measured survey decide, not this program.",
];

/// What stands under a choice of choke.
pub(super) const CHOKE: &str = "A choke never replaces a bond: bonds, rods and protective conductors stay as they are, and the choke goes around them.";

/// The paragraph of cautions, one a line, each behind a dash.
pub(super) fn paragraph(more: &[&str]) -> String {
    let mut text = String::from("Cautions\n");
    for line in STATION.iter().chain(more) {
        text.push_str("  - ");
        text.push_str(line);
        text.push('\n');
    }
    text
}
