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
