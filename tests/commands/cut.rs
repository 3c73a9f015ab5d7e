//! `braidwise cut` as a person runs it.

use assert_cmd::Command;
use serde_json::Value;

fn cut(model: &str, arguments: &[&str]) -> std::process::Output {
    let file = format!("{}/models/{model}.toml", env!("CARGO_MANIFEST_DIR"));
    Command::cargo_bin("braidwise").unwrap().arg("cut").arg(file).args(arguments).output().unwrap()
}

fn refused(model: &str, arguments: &[&str], says: &[&str]) {
    let output = cut(model, arguments);
    let text = String::from_utf8_lossy(&output.stderr).to_string();
    assert_eq!(output.status.code(), Some(2), "{arguments:?}: {text}");
    assert!(output.stdout.is_empty());
    for part in says {
        assert!(text.contains(part), "{arguments:?}: \"{part}\" is not in: {text}");
    }
}

#[test]
fn a_scan_comes_out_on_the_axes_of_the_contract() {
    let output = cut(
        "gauge-hut",
        &["--conductor", "coax", "--range", "6 m .. 14 m by 0.5 m", "--stock", "33, 38, 50 ft", "--json"],
    );
    assert!(output.status.success(), "{}", String::from_utf8_lossy(&output.stderr));
    let json: Value = serde_json::from_slice(&output.stdout).unwrap();
    let lengths = json["lengths_m"].as_array().unwrap();
    assert_eq!(json["conductor"], "coax");
    assert_eq!(json["variants"][0], "nominal");
    assert_eq!(lengths.first().unwrap(), 10.0, "shorter ones lose the entry");
    assert_eq!(lengths.last().unwrap(), 11.0, "longer ones leave the route of a variant");
    assert_eq!(json["variants"].as_array().unwrap().len(), 4);
    for quantity in [
        "entry_current_a",
        "entry_voltage_v",
        "end_voltage_v",
        "last_metre_current_a",
        "feed_ohm",
        "swr",
        "radiated_fraction",
    ] {
        let values = json[quantity].as_array().unwrap();
        assert_eq!(values.len(), json["variants"].as_array().unwrap().len(), "{quantity}");
        assert_eq!(values[0].as_array().unwrap().len(), 12, "{quantity}: four bands with three frequencies each");
        assert_eq!(values[0][0].as_array().unwrap().len(), lengths.len(), "{quantity}");
    }
    let warnings = json["warnings"].to_string();
    assert!(warnings.contains("the range begins at 10 m") && warnings.contains("entry"), "{warnings}");
    assert!(warnings.contains("the range ends at 11 m"), "{warnings}");
    assert!(warnings.contains("50 ft from the stock cannot be built"), "{warnings}");
    let stock: Vec<&str> = json["stock"].as_array().unwrap().iter().map(|s| s["name"].as_str().unwrap()).collect();
    assert!(stock == ["33 ft"], "{stock:?}");
    assert_eq!(json["moving_end"], "the radio's end of the coax");
}

#[test]
fn two_lengths_add_an_axis() {
    let arguments = [
        "--conductor",
        "coax",
        "--range",
        "10 m .. 11 m by 0.5 m",
        "--with",
        "radiator",
        "--with-range",
        "19 m .. 20 m by 1 m",
    ];
    let output = cut("gauge-hut", &[&arguments[..], &["--json"]].concat());
    assert!(output.status.success(), "{}", String::from_utf8_lossy(&output.stderr));
    let json: Value = serde_json::from_slice(&output.stdout).unwrap();
    assert_eq!(json["second_conductor"], "radiator");
    assert_eq!(json["second_lengths_m"], serde_json::json!([19.0, 20.0]));
    assert_eq!(json["swr"][0][0].as_array().unwrap().len(), 3);
    assert_eq!(json["swr"][0][0][0].as_array().unwrap().len(), 2);
}

#[test]
fn the_answer_in_words_says_which_end_moves() {
    let output = cut("gauge-hut", &["--conductor", "radiator", "--range", "18 m .. 21 m by 1 m"]);
    let text = String::from_utf8_lossy(&output.stdout).to_string();
    assert!(output.status.success());
    assert!(text.contains("the end of \"radiator\" at \"tip\""), "{text}");
}

#[test]
fn questions_that_cannot_be_meant_are_refused_with_the_mend() {
    let coax = |range: &'static str| ["--conductor", "coax", "--range", range];
    refused("gauge-hut", &coax("14 m .. 6 m by 0.5 m"), &["reversed", "shorter length first"]);
    refused("gauge-hut", &coax("6 m .. 14 m by 0 m"), &["step", "longer than zero"]);
    refused("gauge-hut", &coax("6 m .. 14 m"), &["step is missing", "4 m .. 25 m by 0.5 m"]);
    refused("gauge-hut", &coax("6 m"), &["no range"]);
    refused("gauge-hut", &coax("6 .. 14 by 0.5"), &["\"6 .. 14 by 0.5\"", "unit"]);
    refused("gauge-hut", &coax("20 m .. 25 m by 0.5 m"), &["no length from 20 m to 25 m", "path only 11.99 m"]);
    refused("gauge-hut", &coax("2 m .. 25 m by 0.1 mm"), &["20000 are the most", "longer steps"]);
    refused(
        "gauge-hut",
        &["--conductor", "radiater", "--range", "4 m .. 5 m by 1 m"],
        &["no conductor", "\"radiator\"?"],
    );
    refused(
        "gauge-hut",
        &["--conductor", "coax", "--range", "10.5 m .. 11 m by 0.5 m", "--with", "radiator"],
        &["with-range"],
    );
    refused(
        "gauge-hut",
        &[
            "--conductor",
            "coax",
            "--range",
            "10.5 m .. 11 m by 0.5 m",
            "--with",
            "coax",
            "--with-range",
            "1 m .. 2 m by 1 m",
        ],
        &["again"],
    );
    refused("gauge-hut", &[&coax("10 m .. 11 m by 0.5 m")[..], &["--stock", "25, 33"]].concat(), &["--stock"]);
}

#[test]
fn protective_parts_are_no_choice() {
    refused(
        "weir-gallery-40-bonded",
        &["--conductor", "steelwork bond", "--range", "1 m .. 2 m by 0.5 m"],
        &["protective", "the bond stays"],
    );
}
