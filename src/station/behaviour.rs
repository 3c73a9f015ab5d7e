//! What a station file means, change by change.
#![allow(clippy::unwrap_used)]

use super::double::Few;
use super::{Document, Earth, Law, Refused, Station, schema};
use proptest::prelude::*;

const FILE: &str = r#"
title = "Sallowford gauge hut"
[earth]
kind = "soil"
soil = "wet meadow"
[points]
feed = [0, 0, 3]
tip = { from = "feed", bearing = 90, out = 19, height = 8 }
foot = [0, 0, "on grass"]
entry = [0, -9, "on grass"]
rig = [0, -11, 0.7]
peg = [0, -9, 0]
stake = { from = "peg", bearing = 180, out = 1 }
[[wire]]
name = "radiator"
path = ["feed", "tip"]
diameter = "1.6 mm"
[[wire]]
name = "earth lead"
path = ["entry", "peg"]
gauge = "6 AWG"
protective = true
[[rod]]
name = "entry rod"
at = "peg"
length = 1.5
diameter = "14 mm"
[coax]
cable = "RG-58"
path = ["feed", "foot", "entry", "rig"]
reachable = [["1 ft", "8 ft"], [7, 9]]
[feed]
at = "feed"
hot = ["radiator"]
cold = ["coax"]
transformer = { turns = [3, 21] }
[[choke]]
name = "entry choke"
at = 9.1
impedance = { resistance = "5 kohm" }
[operation]
region = 1
bands = ["40"]
frequencies = ["10.1 MHz"]
[[variant]]
name = "dry"
set = { "earth.soil" = "dry sand", "points.foot.up" = "on ground" }
[[variant]]
name = "no bond"
without = ["wire.earth lead", "rod.entry rod"]
"#;

fn with(sets: &[(&str, &str)]) -> Result<Station, Refused> {
    let sets: Vec<(String, String)> = sets.iter().map(|(p, v)| ((*p).to_owned(), (*v).to_owned())).collect();
    Station::read(FILE, "hut.toml", &sets, &Few)
}

fn refusal(sets: &[(&str, &str)]) -> String {
    with(sets).unwrap_err().to_string()
}

#[test]
fn the_file_reads_in_si_with_defaults() {
    let station = with(&[]).unwrap();
    assert_eq!(station.earth.value, Earth::Soil { permittivity: 20.0, conductivity_s_per_m: 0.02 });
    assert_eq!(station.feed.impedance_ratio, Some(49.0));
    assert_eq!(
        (station.operation.power_w, station.radio.impedance_ohm, station.radio.body_m),
        (100.0, 50.0, Some(0.3))
    );
    assert_eq!((station.limits.entry_current_a, station.limits.swr), (0.02, 2.0));
    let coax = station.coax.unwrap();
    assert!((coax.metal.radius_m - 1.8e-3).abs() < 1e-12 && coax.metal.jacket.is_some());
    assert!((coax.reachable_m[0].value.1 - 8.0 * 0.3048).abs() < 1e-12 && coax.reachable_m[1].value == (7.0, 9.0));
    assert!(station.wires[1].metal.protective && station.rods[0].metal.protective);
    assert_eq!(station.rods[0].metal.conductivity_s_per_m, Some(6e6), "a rod is steel unless it says otherwise");
    assert_eq!(station.variants, ["dry", "no bond"]);
    let place = station.wires[0].name.place.unwrap();
    assert_eq!(station.sources.line_column(place), Some((15, 8)));
}

#[test]
fn bare_numbers_are_in_the_files_unit() {
    let feet = Station::read(&FILE.replace("[earth]", "unit = \"ft\"\n[earth]"), "hut.toml", &[], &Few).unwrap();
    assert!(feet.in_feet && (feet.parts[0].at_m.value - 9.1 * 0.3048).abs() < 1e-12);
    let text = refusal(&[("wire.radiator.diameter", "1.6")]);
    assert!(text.contains("unit is needed") && text.contains("1.6 mm"), "{text}");
}

#[test]
fn values_are_set_by_path() {
    let station = with(&[
        ("wire.radiator.length", "66 ft 6 in"),
        ("choke.\"entry choke\".at", "8.5"),
        ("coax.length", "10 m"),
        ("points.foot.up", "on ground"),
        ("points.tip.bearing", "45"),
        ("points.rig", "[0, -12, 1]"),
        ("radio.body", "none"),
        ("feed.transformer.ratio", "9:1"),
    ])
    .unwrap();
    assert!((station.wires[0].length_m.unwrap().value - 66.5 * 0.3048).abs() < 1e-12);
    assert_eq!(station.parts[0].at_m.value, 8.5);
    assert_eq!(station.radio.body_m, None);
    assert_eq!(station.feed.impedance_ratio, Some(9.0), "ratio clears turns");
}

#[test]
fn one_of_a_group_clears_the_others() {
    let earth = |sets: &[(&str, &str)]| with(sets).unwrap().earth.value;
    assert_eq!(
        earth(&[("earth.permittivity", "13"), ("earth.conductivity", "5 mS/m")]),
        Earth::Soil { permittivity: 13.0, conductivity_s_per_m: 0.005 }
    );
    assert_eq!(
        earth(&[("earth.conductivity", "5 mS/m"), ("earth.dispersion", "longmire-smith")]),
        Earth::LongmireSmith(0.005)
    );
    assert_eq!(earth(&[("earth.kind", "perfect"), ("rod", "")][..1]), Earth::Perfect);
    assert!((with(&[("wire.radiator.gauge", "14 AWG")]).unwrap().wires[0].metal.radius_m - 0.814e-3).abs() < 1e-5);
    let resonant = "{ resistance = \"4 kohm\", inductance = \"60 uH\", capacitance = \"8 pF\" }";
    assert!(matches!(
        with(&[("choke.entry choke.resonant", resonant)]).unwrap().parts[0].law,
        Law::ParallelResonant { .. }
    ));
    let one_of_two = refusal(&[("earth.permittivity", "13")]);
    assert!(one_of_two.contains("permittivity and conductivity"), "{one_of_two}");
}

#[test]
fn both_of_a_group_set_together_contradict() {
    for sets in [
        [("earth.soil", "dry sand"), ("earth.permittivity", "13")],
        [("wire.radiator.gauge", "14 AWG"), ("wire.radiator.diameter", "2 mm")],
    ] {
        let text = refusal(&sets);
        assert!(text.contains("contradict") && text.contains("--set"), "{text}");
    }
    let file = FILE.replace("\"points.foot.up\" = \"on ground\"", "\"earth.permittivity\" = 13");
    let text = Document::parse(&file, "hut.toml").unwrap().stations(&Few).unwrap_err().to_string();
    assert!(text.contains("in variant \"dry\"") && text.contains("contradict"), "{text}");
}

#[test]
fn a_path_that_names_nothing_offers_the_nearest() {
    for (path, offer) in [
        ("wire.radiater.length", "\"radiator\""),
        ("wire.radiator.lenght", "\"length\""),
        ("wires.radiator.length", "\"wire\""),
        ("points.fot.up", "\"foot\""),
        ("coax.lengths", "\"length\""),
        ("inline.coil.at", "has no [[inline]]"),
        ("points.foot.upp", "\"up\""),
        ("points.tip.east", "bearing"),
    ] {
        let text = refusal(&[(path, "1")]);
        assert!(text.contains(offer) && text.contains(path), "{path}: {text}");
    }
    let place_shown = refusal(&[("coax.length", "twelve")]);
    assert!(place_shown.contains("coax.length=twelve") && place_shown.contains("--set:1:13"), "{place_shown}");
}

#[test]
fn protective_parts_are_given() {
    for path in [
        "rod.entry rod.length",
        "wire.\"earth lead\".length",
        "wire.earth lead.protective",
        "points.peg.up",
        "points.entry.north",
    ] {
        let text = refusal(&[(path, "1")]);
        assert!(text.contains("the bond stays"), "{path}: {text}");
    }
    let document = Document::parse(FILE, "hut.toml").unwrap();
    assert!(document.protective("rod.entry rod.length").unwrap().is_some());
    assert!(document.protective("wire.radiator.length").unwrap().is_none());
    assert!(document.protective("points.foot.up").unwrap().is_none());
    assert!(document.protective("wire.nothing.length").is_err());
}

#[test]
fn variants_are_the_station_turned_the_other_way() {
    let document = Document::parse(FILE, "hut.toml").unwrap();
    let stations = document.stations(&Few).unwrap();
    let names: Vec<&str> = stations.iter().map(|(n, _)| n.as_str()).collect();
    assert_eq!(names, ["nominal", "dry", "no bond"]);
    assert_eq!(stations[1].1.earth.value, Earth::Soil { permittivity: 5.0, conductivity_s_per_m: 1e-3 });
    assert_eq!(
        (stations[2].1.wires.len(), stations[2].1.rods.len()),
        (1, 0),
        "a variant may take a bond away: it is uncertain, not chosen"
    );
    assert_eq!(stations[0].1.wires.len(), 2);
    let text = document.variant("drie").unwrap_err().to_string();
    assert!(text.contains("\"dry\""), "{text}");
    for (old, new, reason) in [
        ("\"earth.soil\" = \"dry sand\"", "\"earth.sol\" = \"dry sand\"", "\"soil\""),
        ("\"earth.soil\" = \"dry sand\"", "\"earth.soil\" = \"dry sandd\"", "dry sand"),
        ("wire.earth lead", "wire.earth led", "earth lead"),
        ("wire.earth lead", "wire.earth lead.length", "whole tables"),
        ("wire.earth lead", "earth lead", "did you mean `wire.\"earth lead\"`?"),
        ("wire.earth lead", "earth led", "did you mean `wire.\"earth lead\"`?"),
        ("set = { \"earth.soil\" = \"dry sand\", \"points.foot.up\" = \"on ground\" }", "set = {}", "changes nothing"),
        ("set = { \"earth.soil\" = \"dry sand\", \"points.foot.up\" = \"on ground\" }", "", "changes nothing"),
        (
            "set = { \"earth.soil\" = \"dry sand\", \"points.foot.up\" = \"on ground\" }",
            "set = { \"wire.earth lead.diameter\" = \"2 mm\" }\nwithout = [\"wire.earth lead\"]",
            "that contradicts",
        ),
    ] {
        let broken = Document::parse(&FILE.replace(old, new), "hut.toml").unwrap();
        let text = broken.stations(&Few).unwrap_err().to_string();
        assert!(text.contains("in variant") && text.contains(reason), "{text}");
    }
}

#[test]
fn a_layout_fault_of_a_variant_names_it_and_stretches_have_their_own_brackets() {
    let file = FILE.replace("without = [\"wire.earth lead\", \"rod.entry rod\"]", "set = { \"coax.length\" = 400 }");
    let stations = Document::parse(&file, "hut.toml").unwrap().stations(&Few).unwrap();
    let faults = crate::layout::Layout::place(&stations[2].1).unwrap_err();
    let refused =
        |name: &str| Refused { sources: stations[2].1.sources.clone(), faults: faults.clone() }.in_variant(name);
    assert!(refused("no bond").to_string().contains("in variant \"no bond\""), "{}", refused("no bond"));
    assert!(!refused("nominal").to_string().contains("in variant"));
    for bare in ["[\"1 ft\", \"8 ft\"]", "\"1 ft\""] {
        let file = FILE.replace("[[\"1 ft\", \"8 ft\"], [7, 9]]", bare);
        let refused = Station::read(&file, "hut.toml", &[], &Few).unwrap_err();
        assert!(refused.faults.len() == 1 && refused.to_string().contains("[[\"1 ft\", \"7 ft\"]]"), "{refused}");
    }
}

#[test]
fn a_conductor_left_out_leaves_the_feed_with_it() {
    let file = FILE
        .replace("cold = [\"coax\"]", "cold = [\"coax\", \"wire 3\"]")
        .replace("[[rod]]", "[[wire]]\npath = [\"feed\", [5, 5, 2]]\ndiameter = \"1 mm\"\n[[wire]]\npath = [\"tip\", [25, 0, 8]]\ndiameter = \"1 mm\"\n[[rod]]")
        .replace("\"rod.entry rod\"", "\"wire.wire 3\"");
    let stations = Document::parse(&file, "hut.toml").unwrap().stations(&Few).unwrap();
    let varied = &stations[2].1;
    assert_eq!(varied.feed.cold.iter().map(|c| c.value.as_str()).collect::<Vec<_>>(), ["coax"]);
    assert_eq!(
        varied.wires.iter().map(|w| w.name.value.as_str()).collect::<Vec<_>>(),
        ["radiator", "wire 4"],
        "numbers do not shift"
    );
}

#[test]
fn several_faults_come_in_one_go() {
    let file = FILE
        .replace("soil = \"wet", "soil = \"wett")
        .replace("RG-58", "RG-85")
        .replace("\"40\"", "\"41\"")
        .replace("at = 9.1", "at = -9");
    let refused = Station::read(&file, "hut.toml", &[], &Few).unwrap_err();
    let lines: Vec<usize> =
        refused.faults.iter().map(|f| refused.sources.line_column(f.place.unwrap()).unwrap().0).collect();
    assert_eq!(lines, [5, 29, 39, 43], "{refused}");
}

#[test]
fn what_the_model_does_not_have_is_said() {
    for (old, new) in [("[earth]", "[earth]\nslope = \"5 deg\""), ("[earth]", "[roof]\nsize = 3\n[earth]")] {
        let text = Station::read(&FILE.replacen(old, new, 1), "hut.toml", &[], &Few).unwrap_err().to_string();
        assert!(text.contains("outside the model"), "{text}");
    }
}

#[test]
fn an_outside_diameter_alone_estimates_the_shield() {
    let station = with(&[("coax.outside_diameter", "5 mm")]).unwrap();
    let coax = station.coax.unwrap();
    assert!((coax.metal.radius_m - 0.75 * 2.5e-3).abs() < 1e-12);
    assert!((coax.metal.outer_radius_m() - 2.5e-3).abs() < 1e-12, "the jacket fills up to the outside");
    assert!((coax.loss[0].1 - 4.4).abs() < 0.01 && coax.loss.len() == 2);
    assert_eq!(station.doubts.len(), 2, "shield and inside are both estimates");
}

#[test]
fn the_schema_lists_every_key() {
    let schema = schema();
    let root: Vec<&str> = schema["required"].as_array().unwrap().iter().map(|k| k.as_str().unwrap()).collect();
    assert_eq!(root, ["earth", "feed", "operation"]);
    let wire = &schema["$defs"]["wire"];
    let keys: Vec<&String> = wire["properties"].as_object().unwrap().keys().collect();
    assert_eq!(keys, super::raw::RawWire::KEYS.to_vec());
    assert_eq!(wire["required"], serde_json::json!(["path"]));
    assert_eq!(wire["additionalProperties"], serde_json::json!(false));
    assert!(!schema.to_string().contains("null"), "TOML has no null");
    assert!(wire["properties"]["length"]["description"].as_str().unwrap().contains("Cut the path"));
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 400, failure_persistence: None, rng_seed: proptest::test_runner::RngSeed::Fixed(7), ..ProptestConfig::default() })]

    /// Station text with pieces cut out, doubled and overwritten: refused or read, never a panic, and every fault shows.
    #[test]
    fn mutated_text_never_panics(edits in prop::collection::vec((0usize..1200, 0usize..40, "[\\PC\n]{0,6}|-?[0-9]{1,3}|nan|1e999|\"|\\[|\\]|= |\\{|é"), 1..4)) {
        let mut text = FILE.to_owned();
        for (at, cut, new) in edits {
            let border = |text: &str, mut at: usize| { at = at.min(text.len()); while !text.is_char_boundary(at) { at -= 1; } at };
            let from = border(&text, at);
            let to = border(&text, from + cut).max(from);
            text.replace_range(from..to, &new);
        }
        match Document::parse(&text, "mutated.toml").and_then(|d| d.stations(&Few)) {
            Ok(stations) => for (_, station) in stations {
                if let Err(faults) = crate::layout::Layout::place(&station) {
                    let refused = Refused { sources: station.sources.clone(), faults };
                    prop_assert!(!refused.faults.is_empty() && !refused.to_string().is_empty());
                }
            },
            Err(refused) => {
                prop_assert!(!refused.faults.is_empty());
                prop_assert!(!refused.to_string().is_empty() && !refused.show(true).is_empty());
            }
        }
    }
}
