//! How a station is placed: joins, cuts, the feed, parts, rods, the radio's body and the earth's surface.
#![allow(clippy::unwrap_used)]

use super::{ConductorKind, Layout, Point};
use crate::station::{Refused, Station, double::Few};

/// A station of parts: `earth`, `points` with the usual ones, then the rest of the tables.
fn station(earth: &str, rest: &str) -> Station {
    let text = format!(
        "[earth]\n{earth}\n[points]\nfeed = [0, 0, 3]\ntip = [19, 0, 8]\nfoot = [0, 0, 0.03]\nentry = [0, -9, 0.03]\nrig = [0, -11, 1]\n\
         [operation]\nfrequencies = [\"7.1 MHz\"]\n{rest}"
    );
    Station::read(&text, "test.toml", &[], &Few).unwrap_or_else(|e| panic!("{e}"))
}

const SOIL: &str = "permittivity = 13\nconductivity = \"5 mS/m\"";
const FREE: &str = "kind = \"none\"";
const PERFECT: &str = "kind = \"perfect\"";
const RADIATOR: &str = "[[wire]]\nname = \"radiator\"\npath = [\"feed\", \"tip\"]\ndiameter = \"1.6 mm\"\n";
const COAX: &str = "[coax]\nshield_diameter = \"4 mm\"\nimpedance = \"50 ohm\"\nvelocity_factor = 0.66\nloss = [{ at = \"10 MHz\", per_100m = \"4.6 dB\" }]\npath = [\"feed\", \"foot\", \"entry\", \"rig\"]\n";
const FEED: &str = "[feed]\nat = \"feed\"\nhot = [\"radiator\"]\ncold = [\"coax\"]\n";

fn usual(earth: &str, more: &str) -> Station {
    station(earth, &format!("{RADIATOR}{COAX}{more}\n{FEED}"))
}

fn placed(station: &Station) -> Layout {
    Layout::place(station).unwrap_or_else(|faults| panic!("{}", Refused { sources: station.sources.clone(), faults }))
}

fn refused(station: &Station) -> String {
    let faults = Layout::place(station).expect_err("must be refused");
    Refused { sources: station.sources.clone(), faults }.to_string()
}

fn index(layout: &Layout, name: &str) -> usize {
    layout.conductors.iter().position(|c| c.name == name).unwrap()
}

fn wire(name: &str, path: &str) -> String {
    format!("[[wire]]\nname = \"{name}\"\npath = {path}\ndiameter = \"2 mm\"\n")
}

#[track_caller]
fn says(text: &str, parts: &[&str]) {
    for part in parts {
        assert!(text.contains(part), "no {part:?} in\n{text}");
    }
}

#[test]
fn ends_and_vertices_within_a_millimetre_join_bit_for_bit() {
    let layout = placed(&usual(FREE, &wire("gutter", "[[5, -9.0004, 0.03], [0.0003, -9, 0.0304]]")));
    let (coax, gutter) = (index(&layout, "coax"), index(&layout, "gutter"));
    let junction = layout.junctions.iter().find(|j| j.members.contains(&(gutter, 1))).unwrap();
    assert_eq!(junction.members.len(), 2);
    assert!(junction.members.contains(&(coax, 2)), "at the coax's vertex part of the way along");
    for &(c, v) in &junction.members {
        assert_eq!(layout.conductors[c].points[v], junction.position);
    }
    let apart = placed(&usual(FREE, &wire("gutter", "[[5, -9, 0.03], [0.02, -9, 0.03]]")));
    assert!(
        !apart.junctions.iter().any(|j| j.members.iter().any(|m| m.0 == gutter)),
        "two centimetres off is not joined"
    );
}

#[test]
fn a_loop_closes_on_itself() {
    let layout = placed(&usual(FREE, &wire("fence", "[[9, 0, 1], [9, 5, 1], [14, 5, 1], [9, 0, 1]]")));
    let fence = index(&layout, "fence");
    assert!(layout.junctions.iter().any(|j| j.members == [(fence, 0), (fence, 3)]));
}

#[test]
fn crossing_without_a_shared_point_is_insulated_or_refused_when_too_close() {
    let over = placed(&usual(FREE, &wire("fence", "[[-1, -5, 0.2], [1, -5, 0.2]]")));
    assert_eq!(over.junctions.iter().filter(|j| j.members.iter().any(|m| m.0 == index(&over, "fence"))).count(), 0);
    let text = refused(&usual(FREE, &wire("fence", "[[-1, -5, 0.032], [1, -5, 0.032]]")));
    says(&text, &["\"fence\" and the coax", "2 mm apart", "common point"]);
    let touching = refused(&usual(FREE, &wire("fence", "[[-1, -5, 0.5], [0, -5, 0.03]]")));
    says(&touching, &["common point of their paths"]);
    let doubled = refused(&usual(FREE, &wire("lead", "[\"foot\", \"entry\"]")));
    says(&doubled, &["\"lead\" and the coax"]);
    let itself = refused(&usual(FREE, &wire("fence", "[[9, 0, 1], [14, 0, 1], [14, 5, 1], [12, -3, 1]]")));
    says(&itself, &["of itself"]);
}

#[test]
fn radials_close_together_at_their_centre_are_excused() {
    let star = "[[radials]]\nname = \"star\"\nat = \"feed\"\ncount = 60\nlength = 5\ndiameter = \"1.6 mm\"\n";
    let feed = FEED.replace("[\"coax\"]", "[\"coax\", \"star\"]");
    let layout = placed(&station(FREE, &format!("{RADIATOR}{COAX}{star}{feed}")));
    assert_eq!(layout.feed.cold.len(), 61);
    let second = &layout.conductors[index(&layout, "star 2")];
    assert_eq!(second.kind, ConductorKind::Radial);
    let bearing = second.points[1] - second.points[0];
    assert!((bearing.x - 5.0 * 6f64.to_radians().sin()).abs() < 1e-12, "clockwise from north");
}

#[test]
fn radials_lying_low_come_down_near_their_point() {
    let star = "[[radials]]\nname = \"star\"\nat = [3, 3, 0.1]\ncount = 2\nlength = 5\nheight = \"buried 10 cm\"\ndiameter = \"1.6 mm\"\n";
    let layout = placed(&usual(SOIL, star));
    let first = &layout.conductors[index(&layout, "star 1")];
    let heights: Vec<f64> = first.points.iter().map(|p| p.z).collect();
    assert_eq!(heights, [0.1, 0.0, -0.1, -0.1], "45 degrees down, a vertex in the surface, then level");
    assert!((first.length_m() - 5.0).abs() < 1e-12);
}

#[test]
fn the_gap_is_four_radii_of_the_thinnest_or_as_given() {
    assert!((placed(&usual(FREE, "")).feed.gap_m - 3.2e-3).abs() < 1e-15);
    let given = station(FREE, &format!("{RADIATOR}{COAX}{FEED}gap = \"1 cm\"\n"));
    assert!((placed(&given).feed.gap_m - 0.01).abs() < 1e-15);
    let wide = station(
        FREE,
        &format!(
            "{RADIATOR}{}{COAX}{}gap = \"20 cm\"\n",
            wire("stub", "[\"feed\", [0, 0, 3.1]]"),
            FEED.replace("[\"radiator\"]", "[\"radiator\", \"stub\"]")
        ),
    );
    says(&refused(&wide), &["first leg of \"stub\" only 0.1 m"]);
}

#[test]
fn every_end_at_the_feed_is_on_a_terminal() {
    says(
        &refused(&usual(FREE, &wire("mast", "[\"feed\", [0, 0.5, 0.5]]"))),
        &["\"mast\" meets the feed point", "hot or cold"],
    );
    let stub_feed = wire("stub", "[[0, 0, 3.5], [0, 5, 5]]") + &FEED.replace("[\"radiator\"]", "[\"stub\"]");
    let elsewhere = station(FREE, &format!("{RADIATOR}{COAX}{stub_feed}"));
    says(&refused(&elsewhere), &["\"stub\" has no point at the feed point", "0.5 m away"]);
    let mut late = usual(FREE, "");
    late.coax.as_mut().unwrap().path.remove(0);
    says(&refused(&late), &["\"coax\" has no point at the feed point", "the coax begins 2.97 m from the feed point"]);
}

#[test]
fn a_conductor_passing_through_has_both_sides_on_its_terminal() {
    let through = RADIATOR.replace("[\"feed\", \"tip\"]", "[[-5, 0, 4], \"feed\", \"tip\"]");
    let layout = placed(&station(FREE, &format!("{through}{COAX}{FEED}")));
    let legs: Vec<(usize, bool)> = layout.feed.hot.iter().map(|l| (l.vertex, l.forward)).collect();
    assert_eq!(legs, [(1, false), (1, true)]);
}

#[test]
fn a_coax_left_off_both_terminals_is_insulated() {
    let counterpoise = wire("counterpoise", "[\"feed\", [-2, 0, 2]]");
    let feed = FEED.replace("[\"coax\"]", "[\"counterpoise\"]");
    let layout = placed(&station(FREE, &format!("{RADIATOR}{counterpoise}{COAX}{feed}")));
    let coax = index(&layout, "coax");
    let junction = layout.junctions.iter().find(|j| j.position == layout.feed.position).unwrap();
    assert_eq!(junction.members.len(), 2);
    assert!(!junction.members.contains(&(coax, 0)));
    assert_eq!(layout.conductors[coax].points[0], layout.feed.position);
}

#[test]
fn a_wire_can_be_fed_part_of_the_way_along() {
    let feed = "[feed]\non = \"dipole\"\nat = \"44 ft\"\n";
    let layout = placed(&station(FREE, &format!("{}{feed}", wire("dipole", "[[0, 0, 10], [40, 0, 10]]"))));
    assert_eq!(layout.conductors[0].points.len(), 3);
    assert!((layout.feed.position.x - 44.0 * 0.3048).abs() < 1e-12);
    assert!(layout.feed.hot[0].forward && !layout.feed.cold[0].forward && layout.feed.hot[0].vertex == 1);
    assert!(layout.junctions.is_empty() && layout.coax.is_none());
    let beyond = station(FREE, &format!("{}{}", wire("dipole", "[[0, 0, 10], [10, 0, 10]]"), feed));
    says(&refused(&beyond), &["13.41 m but \"dipole\" is 10 m"]);
    let with_coax =
        wire("dipole", "[[-3, 0, 3], [9, 0, 3]]") + COAX + "[feed]\non = \"dipole\"\nat = 3\ncold = [\"coax\"]\n";
    let layout = placed(&station(FREE, &with_coax));
    assert_eq!((layout.feed.cold.len(), layout.junctions[0].members.len()), (2, 2));
    let off = placed(&station(FREE, &with_coax.replace("cold = [\"coax\"]\n", "")));
    assert!(off.warnings.iter().any(|w| w.message.contains("insulated at the feed point")));
}

#[test]
fn parts_sit_centred_and_on_the_feed_side_of_joins() {
    let choke = |at: &str| format!("[[choke]]\nname = \"c\"\nat = {at}\nimpedance = {{ resistance = \"1 kohm\" }}\n");
    let bond = wire("gutter", "[[5, -9, 0.03], \"entry\"]");
    let gap = |at: &str| {
        let layout = placed(&usual(FREE, &(choke(at) + &bond)));
        (layout.parts[0].from_m, layout.parts[0].to_m)
    };
    let near = |got: (f64, f64), from: f64, to: f64| {
        assert!((got.0 - from).abs() < 1e-9 && (got.1 - to).abs() < 1e-9, "{got:?}")
    };
    near(gap("5"), 4.996, 5.004);
    near(gap("0"), 0.0, 0.008);
    near(gap("0.001"), 0.0, 0.008);
    near(gap("11.97"), 11.962, 11.97); // at the join with the gutter: on the feed side
    near(gap("11.968"), 11.962, 11.97);
    near(gap("11.973"), 11.97, 11.978);
    let length = placed(&usual(FREE, "")).coax.unwrap().length_m;
    near(gap(&format!("{length:.6}")), length - 0.008, length);
    says(&refused(&usual(FREE, &choke("20"))), &["choke \"c\" sits at 20 m but the coax is 14.19 m long"]);
    says(
        &refused(&usual(FREE, &(choke("5") + &choke("5.005").replace("\"c\"", "\"d\"")))),
        &["\"d\" and \"c\" sit in the same place"],
    );
}

#[test]
fn an_inline_part_at_the_foot_of_the_hot_wire_stands_clear_of_the_feed_gap() {
    let coil =
        |at: &str, on: &str| format!("[[inline]]\nname = \"coil\"\non = \"{on}\"\nat = {at}\ninductance = \"34 uH\"\n");
    let layout = placed(&usual(FREE, &coil("0", "radiator")));
    let (part, gap_m) = (&layout.parts[0], layout.feed.gap_m);
    assert!((part.from_m - gap_m).abs() < 1e-12 && (part.to_m - 2.0 * gap_m).abs() < 1e-12);
    let reversed = RADIATOR.replace("[\"feed\", \"tip\"]", "[\"tip\", \"feed\"]");
    let layout = placed(&station(FREE, &format!("{reversed}{COAX}{}{FEED}", coil("19.646882", "radiator"))));
    assert!((layout.conductors[0].length_m() - gap_m - layout.parts[0].to_m).abs() < 1e-9);
}

#[test]
fn the_radio_has_a_body_unless_the_shield_is_joined() {
    let layout = placed(&usual(SOIL, ""));
    let body = &layout.conductors[layout.radio.body.unwrap()];
    assert_eq!((body.kind, body.conductivity_s_per_m), (ConductorKind::Body, None));
    assert!(
        (body.points[1] - body.points[0] - Point::new(0.0, -0.3, 0.0)).norm() < 1e-12,
        "on in the direction of the last leg, level"
    );
    assert!((body.radius_m - 0.015).abs() < 1e-15);
    assert!(layout.junctions.iter().any(|j| j.position == body.points[0] && j.members.len() == 2));
    assert!(placed(&usual(SOIL, "[radio]\nbody = \"none\"\n")).radio.body.is_none());
    assert!(placed(&usual(SOIL, &wire("charger", "[\"rig\", [3, -11, 1]]"))).radio.body.is_none());
    let mut low = usual(SOIL, "");
    low.coax.as_mut().unwrap().path.pop();
    let layout = placed(&low);
    assert!((layout.conductors[layout.radio.body.unwrap()].radius_m - 0.015).abs() < 1e-12, "half of 3 cm");
    let mut hanging = usual(FREE, "");
    hanging.coax.as_mut().unwrap().path.truncate(2);
    let layout = placed(&hanging);
    let body = &layout.conductors[layout.radio.body.unwrap()];
    assert!(
        (body.points[1] - body.points[0] - Point::new(0.0, 0.3, 0.0)).norm() < 1e-12,
        "north where the coax hangs straight"
    );
}

#[test]
fn height_zero_over_perfect_earth_is_bonded() {
    let layout = placed(&usual(PERFECT, &wire("lead", "[\"entry\", [0, -9, 0]]")));
    let lead = index(&layout, "lead");
    let bond = layout.junctions.iter().find(|j| j.members.contains(&(lead, 1))).unwrap();
    assert!(bond.to_earth && bond.members.len() == 1);
    assert!(layout.junctions.iter().filter(|j| j.to_earth).count() == 1);
    says(
        &refused(&usual(PERFECT, &wire("lead", "[[1, 0, 0], [2, 0, 0]]"))),
        &["lies at height 0", "\"on ground\"", "\"on grass\""],
    );
    says(&refused(&usual(PERFECT, &wire("lead", "[[1, 0, 1], [1, 0, -1]]"))), &["below a perfect earth"]);
    says(
        &refused(&usual(PERFECT, &wire("lead", "[[1, 0, 0.0005], [2, 0, 0.0005]]"))),
        &["less than its radius", "on ground"],
    );
}

#[test]
fn the_earth_is_a_terminal_only_at_height_zero_over_perfect_earth() {
    let mono = wire("radiator", "[[0, 0, 0], [0, 0, 10]]");
    let feed = "[feed]\nat = [0, 0, 0]\nhot = [\"radiator\"]\ncold = [\"earth\"]\n";
    let layout = placed(&station(PERFECT, &(mono.clone() + feed)));
    assert!(layout.feed.cold_is_earth && layout.feed.cold.is_empty());
    assert!(layout.junctions.len() == 1 && layout.junctions[0].to_earth && layout.junctions[0].members == [(0, 0)]);
    let raised =
        station(PERFECT, &(wire("radiator", "[[0, 0, 1], [0, 0, 10]]") + &feed.replace("[0, 0, 0]", "[0, 0, 1]")));
    says(&refused(&raised), &["only at height 0 over a perfect earth"]);
    says(&refused(&station(FREE, &(mono + feed))), &["only at height 0 over a perfect earth"]);
}

#[test]
fn height_zero_over_soil_must_go_on_below() {
    says(&refused(&usual(SOIL, &wire("lead", "[\"entry\", [0, -9, 0]]"))), &["ends on nothing", "[[rod]]", "buried"]);
    let rod = "[[rod]]\nname = \"r\"\nat = [0, -9, 0]\nlength = 1.5\ndiameter = \"14 mm\"\n";
    let layout = placed(&usual(SOIL, &(wire("lead", "[\"entry\", [0, -9, 0]]") + rod)));
    let rod_points = &layout.conductors[index(&layout, "r")].points;
    assert_eq!(rod_points.iter().map(|p| p.z).collect::<Vec<_>>(), [0.0, -1.5]);
    assert!(layout.warnings.iter().all(|w| !w.message.contains("bonded to nothing")));
    let below =
        placed(&usual(SOIL, &(wire("lead", "[\"entry\", [0, -9, 0]]") + &wire("tail", "[[0, -9, 0], [0, -9, -1]]"))));
    assert!(below.junctions.iter().all(|j| !j.to_earth), "soil is no bond");
    let through = placed(&usual(SOIL, &wire("post", "[[4, 4, 1], [5, 4, -1]]")));
    let post = &through.conductors[index(&through, "post")].points;
    assert!(post.len() == 3 && post[1].z == 0.0 && (post[1].x - 4.5).abs() < 1e-12, "a vertex in the surface");
}

#[test]
fn rods_reach_up_to_a_raised_point() {
    let rod = |at: &str| format!("[[rod]]\nname = \"r\"\nat = {at}\nlength = 1.5\ndiameter = \"14 mm\"\n");
    let layout = placed(&usual(SOIL, &rod("\"entry\"")));
    let r = &layout.conductors[index(&layout, "r")];
    assert_eq!(r.points.iter().map(|p| p.z).collect::<Vec<_>>(), [0.03, 0.0, -1.5]);
    assert!(r.protective && r.kind == ConductorKind::Rod);
    let on_perfect = placed(&usual(PERFECT, &rod("\"entry\"")));
    assert_eq!(on_perfect.conductors[index(&on_perfect, "r")].points.len(), 2, "only the lead remains");
    assert!(on_perfect.warnings.iter().any(|w| w.about == "r" && w.message.contains("needs no rod")));
    says(&refused(&usual(FREE, &rod("\"entry\""))), &["no earth to be driven into"]);
    let lone = placed(&usual(SOIL, &rod("[3, 3, 0]")));
    assert!(
        lone.warnings
            .iter()
            .any(|w| w.message.contains("bonded to nothing") && w.message.contains("local electrical code"))
    );
    says(&refused(&usual(SOIL, &rod("[3, 3, \"buried 2 m\"]"))), &["its head is 2 m down"]);
    let on_wire = "[[wire]]\nname = \"bond\"\npath = [\"entry\", [1, -9, \"on ground\"]]\ndiameter = \"1.6 mm\"\n";
    let head = placed(&usual(SOIL, &(on_wire.to_owned() + &rod("[1, -9, \"on ground\"]"))));
    assert_eq!(head.conductors[index(&head, "bond")].points[1].z, 0.0, "a wire lying at a rod's head ends on the head");
}

#[test]
fn on_ground_is_one_outer_radius_and_meets_the_thickest() {
    let thin = "[[wire]]\nname = \"thin\"\npath = [\"peg\", [5, 5, \"on ground\"]]\ndiameter = \"1 mm\"\n";
    let mut text = format!("{RADIATOR}{COAX}{thin}{FEED}").replace("\"foot\", \"entry\"", "\"foot\", \"peg\"");
    text.push_str("[points.peg]\nfrom = \"entry\"\nbearing = 0\nout = 0\nheight = \"on ground\"\n");
    let layout = placed(&station(FREE, &text));
    let thin = &layout.conductors[index(&layout, "thin")];
    assert!((thin.points[0].z - 2e-3).abs() < 1e-12, "the coax's radius, so that both meet");
    assert!((thin.points[1].z - 0.5e-3).abs() < 1e-12);
    assert_eq!(layout.junctions.iter().filter(|j| j.members.len() == 2).count(), 3);
}

#[test]
fn a_length_cuts_or_carries_on() {
    let with_length = |length: &str| {
        placed(&station(
            FREE,
            &format!("{}length = {length}\n{COAX}{FEED}", RADIATOR.replace("\"tip\"]", "[10, 0, 3], \"tip\"]")),
        ))
    };
    for (length, vertices) in [("5", 2), ("12", 3), ("30", 3), ("10", 2)] {
        let layout = with_length(length);
        let wire = &layout.conductors[0];
        assert!((wire.length_m() - length.parse::<f64>().unwrap()).abs() < 1e-9, "{length}");
        assert_eq!(wire.points.len(), vertices, "{length}");
    }
    let coax = |length: &str, more: &str| station(FREE, &format!("{RADIATOR}{COAX}length = {length}\n{more}{FEED}"));
    says(&refused(&coax("20", "")), &["the coax is 20 m long but its path only 14.19 m", "move the last point"]);
    says(&refused(&coax("10", "")), &["the coax is cut at 10 m", "the entry needs \"entry\" at 11.97 m"]);
    says(&refused(&coax("2", &wire("gutter", "[\"foot\", [5, 0, 0.03]]"))), &["\"gutter\" needs \"foot\""]);
    let choke = "[[choke]]\nname = \"far\"\nat = 13\nimpedance = { resistance = \"1 kohm\" }\n";
    says(&refused(&coax("12.5", choke)), &["choke \"far\" sits at 13 m but the coax is 12.5 m long"]);
}

#[test]
fn what_is_joined_only_at_the_last_vertex_moves_with_the_end() {
    let text = format!("{RADIATOR}{COAX}length = 13\n{}{FEED}", wire("charger", "[\"rig\", [3, -11, 1]]"));
    let layout = placed(&station(FREE, &text));
    let (coax, charger) = (&layout.conductors[index(&layout, "coax")], &layout.conductors[index(&layout, "charger")]);
    assert_eq!(coax.points.last(), charger.points.first());
    assert_eq!(charger.points[1], Point::new(3.0, -11.0, 1.0), "only the joined vertex moves");
    assert!(layout.radio.body.is_none());
    assert!((layout.coax.as_ref().unwrap().length_m - 13.0).abs() < 1e-9);
}

#[test]
fn the_entry_is_the_vertex_called_so_or_the_named_one_or_the_end() {
    let entry = |change: &dyn Fn(String) -> String| {
        let layout = placed(&station(FREE, &change(format!("{RADIATOR}{COAX}{FEED}"))));
        (layout.coax.as_ref().unwrap().entry_m, layout.warnings.iter().any(|w| w.message.contains("beyond the entry")))
    };
    assert!((entry(&|t| t).0 - 11.97).abs() < 1e-9 && !entry(&|t| t).1);
    assert!((entry(&|t| t.replace("[coax]", "[coax]\nentry = \"foot\"")).0 - 2.97).abs() < 1e-9);
    let (at_end, warned) = entry(&|t| t.replace("\"entry\", \"rig\"", "[0, -9, 0.03], \"rig\""));
    assert!((at_end - 14.18).abs() < 0.02 && warned, "nothing beyond: zero with a warning");
    let off = station(FREE, &format!("{RADIATOR}{COAX}{FEED}").replace("[coax]", "[coax]\nentry = \"tip\""));
    says(&refused(&off), &["not a point of the coax's path"]);
}

#[test]
fn doubtful_things_are_computed_with_a_warning() {
    let about = |more: &str| {
        let layout = placed(&usual(SOIL, more));
        layout.warnings.iter().map(|w| format!("{}: {}", w.about, w.message)).collect::<Vec<_>>().join("\n")
    };
    assert_eq!(about(""), "");
    says(&about(&wire("low", "[[1, 1, 0.004], [4, 1, 0.004]]")), &["low: runs 4 mm from the surface"]);
    let lying = wire("lying", "[[1, 1, \"on ground\"], [4, 1, \"on ground\"]]")
        + "jacket = { permittivity = 2.3, thickness = \"1 mm\" }\n";
    says(&about(&lying), &["lying: lies on the surface", "as in air"]);
    says(&about(&wire("kink", "[[1, 1, 1], [4, 1, 1], [4, 1.0015, 1], [8, 2, 1]]")), &["kink: has a leg of 1.5 mm"]);
    let bonded = wire("bond", "[[1, 1, 1], [4, 1, 1]]") + "protective = true\n";
    let in_bond = bonded + "[[choke]]\non = \"bond\"\nat = 1\nimpedance = { resistance = \"1 kohm\" }\n";
    says(&about(&in_bond), &["nothing may interrupt a bond"]);
    let at_end = "[[choke]]\non = \"radiator\"\nat = \"19646.882 mm\"\nimpedance = { resistance = \"1 kohm\" }\n";
    says(&about(at_end), &["open end of \"radiator\""]);
}

#[test]
fn soils_outside_their_range_are_computed_with_a_warning() {
    let about = |earth: &str, frequency: &str| {
        let mut station = usual(earth, "");
        station.operation.frequencies_hz = vec![crate::quantity::frequency_hz(frequency).unwrap()];
        placed(&station).warnings.iter().filter(|w| w.about == "earth").map(|w| w.message.clone()).collect::<String>()
    };
    let alipio = "conductivity = \"5 mS/m\"\ndispersion = \"alipio-visacro\"";
    says(&about(alipio, "7.1 MHz"), &["up to 4 MHz", "longmire-smith"]);
    assert_eq!(about(alipio, "3.6 MHz"), "");
    assert_eq!(about(SOIL, "7.1 MHz"), "");
    says(&about(SOIL, "70 MHz"), &["10 kHz to 60 MHz"]);
    assert_eq!(about(PERFECT, "70 MHz"), "");
}

#[test]
fn faults_of_one_step_come_together() {
    let text = refused(&usual(
        FREE,
        "[[choke]]\nname = \"a\"\nat = 30\nimpedance = { resistance = \"1 kohm\" }\n[[choke]]\nname = \"b\"\nat = 40\nimpedance = { resistance = \"1 kohm\" }\n",
    ));
    says(&text, &["choke \"a\" sits at 30 m", "choke \"b\" sits at 40 m"]);
}
