//! `braidwise place`.

use assert_cmd::Command;
use serde_json::Value;

fn place(model: &str, more: &[&str]) -> assert_cmd::assert::Assert {
    let file = format!("{}/models/{model}.toml", env!("CARGO_MANIFEST_DIR"));
    Command::cargo_bin("braidwise").unwrap().arg("place").arg(file).args(more).assert()
}

fn text(of: &[u8]) -> String {
    String::from_utf8(of.to_vec()).unwrap()
}

#[test]
fn json_has_the_axes_of_the_contract() {
    let done = place("levee-straight", &["--json", "--step", "5 cm", "--impedance", "2 kohm"]).success();
    let out: Value = serde_json::from_slice(&done.get_output().stdout).unwrap();
    let (places, frequencies) = (out["places_m"].as_array().unwrap(), out["frequencies_hz"].as_array().unwrap());
    assert_eq!(out["variants"][0], "nominal");
    assert_eq!(out["chokes"][0]["name"], "2 kohm");
    assert_eq!(out["chokes"][0]["impedance_ohm"][0], serde_json::json!([2000.0, 0.0]));
    let arrays = [
        "entry_current_a",
        "entry_voltage_v",
        "end_voltage_v",
        "last_metre_current_a",
        "feed_ohm",
        "swr",
        "choke_w",
        "choke_v",
        "choke_a",
    ];
    for name in arrays {
        let over = out[name][0][0].as_array().unwrap();
        assert_eq!(over.len(), frequencies.len(), "{name}");
        assert_eq!(over[0].as_array().unwrap().len(), places.len(), "{name}");
    }
    assert_eq!(out["without"]["swr"][0].as_array().unwrap().len(), frequencies.len());
    let pick = &out["picks"][0];
    assert!(pick["window_m"][0].as_f64() <= pick["at_m"].as_f64() && pick["worst"]["limit"].is_number());
    assert!(["none needed", "place", "no place meets the limits"].contains(&out["verdict"].as_str().unwrap()));
    assert!(text(&done.get_output().stderr).is_empty());
}

#[test]
fn one_resistance_given_twice_is_one_candidate() {
    let more = ["--json", "--step", "50 cm", "--impedance", "2 kohm", "--impedance", "2000 ohm"];
    let out: Value = serde_json::from_slice(&place("levee-straight", &more).success().get_output().stdout).unwrap();
    assert_eq!(out["chokes"].as_array().unwrap().len(), 1);
}

#[test]
fn a_person_reads_one_answer_with_its_cautions() {
    let done = place("levee-straight-choke", &["--step", "10 cm"]).success();
    let out = text(&done.get_output().stdout);
    assert!(
        out.contains("feed choke") && out.contains("clamp a current meter") && out.contains("never replaces a bond"),
        "{out}"
    );
    assert!(!out.contains("NaN"));
}

#[test]
fn what_cannot_be_meant_is_refused() {
    for (model, more, reason) in [
        ("levee-straight", vec!["--impedance", "2 kilo"], "--impedance"),
        ("levee-straight", vec!["--impedance", "0 ohm"], "more than 0 ohm"),
        ("levee-straight", vec!["--step", "3 m"], "1 mm to 1 m"),
        ("levee-straight", vec!["--step", "a hand"], "--step"),
        ("levee-straight-choke", vec!["--keep", "feed chock"], "\"feed choke\""),
        ("half-wave-alone", vec![], "no coax"),
    ] {
        let done = place(model, &more).code(2);
        let said = text(&done.get_output().stderr);
        assert!(said.contains(reason) && done.get_output().stdout.is_empty(), "{said}");
    }
}

#[test]
fn lengths_are_tried_too_and_come_out_as_json_and_pictures() {
    let folder = tempfile::tempdir().unwrap();
    let plots = folder.path().join("plots");
    let more = ["--json", "--step", "20 cm", "--impedance", "2 kohm", "--plots", plots.to_str().unwrap()];
    let plain = place("levee-straight", &more[..5]).success();
    let done = place("levee-straight", &[&more[..], &["--lengths", "13 m .. 15 m by 0.5 m"]].concat()).success();
    let read =
        |done: &assert_cmd::assert::Assert| -> Value { serde_json::from_slice(&done.get_output().stdout).unwrap() };
    let (mut out, plain) = (read(&done), read(&plain));
    let lengths = out.as_object_mut().unwrap().remove("lengths").unwrap();
    assert_eq!(out, plain, "the answer at the station's own length stays as it is");
    let (of, places) = (lengths["lengths_m"].as_array().unwrap(), lengths["places_m"].as_array().unwrap());
    for name in ["entry_current_a", "last_metre_current_a", "end_voltage_v", "swr", "choke_w"] {
        let over = lengths[name].as_array().unwrap();
        assert_eq!(over.len(), out["chokes"].as_array().unwrap().len(), "{name}");
        assert_eq!(over[0].as_array().unwrap().len(), out["frequencies_hz"].as_array().unwrap().len(), "{name}");
        assert_eq!(over[0][0].as_array().unwrap().len(), of.len(), "{name}");
        assert_eq!(over[0][0][0].as_array().unwrap().len(), places.len(), "{name}");
    }
    let pick = &lengths["picks"][0];
    for (at, window) in [("length_m", "length_window_m"), ("at_m", "window_m")] {
        let [at, low, high] = [&pick[at], &pick[window][0], &pick[window][1]].map(|v| v.as_f64().unwrap());
        assert!(low <= at && at <= high, "{pick}");
    }
    assert_eq!(of.first().unwrap(), 14.0, "shorter ones lose the entry");
    assert!(lengths["warnings"].to_string().contains("the range begins at 14 m instead of 13 m"), "{lengths}");
    assert!(pick["why"].as_str().unwrap().contains("of coax and the choke at"), "{pick}");
    for ending in ["svg", "png"] {
        assert!(plots.join(format!("length-and-place-2-kohm.{ending}")).exists());
    }
}

#[test]
fn a_person_reads_the_pair_of_length_and_place() {
    let more = ["--step", "50 cm", "--impedance", "2 kohm", "--lengths", "14 m .. 15 m by 0.5 m"];
    let out = text(&place("levee-straight", &more).success().get_output().stdout);
    assert!(out.contains("Length of the coax and place of the choke together"), "{out}");
    assert!(out.contains("of coax with choke \"2 kohm\" at") && !out.contains("NaN"), "{out}");
}

#[test]
fn lengths_that_cannot_be_meant_are_refused() {
    for (range, reason) in [
        ("14 m .. 12 m by 1 m", "reversed"),
        ("12 m .. 14 m", "step is missing"),
        ("12 m .. 14 m by 0 m", "longer than zero"),
        ("12 .. 14 by 1", "unit"),
        ("", "no range"),
        ("40 m .. 50 m by 1 m", "no length from 40 m to 50 m of the coax can be built"),
        ("1 m .. 15 m by 0.1 mm", "20000 are the most"),
    ] {
        let done = place("levee-straight", &["--lengths", range]).code(2);
        let said = text(&done.get_output().stderr);
        assert!(said.contains(reason) && done.get_output().stdout.is_empty(), "{range}: {said}");
    }
    let done = place("half-wave-alone", &["--lengths", "12 m .. 14 m by 1 m"]).code(2);
    assert!(text(&done.get_output().stderr).contains("no coax"));
}
