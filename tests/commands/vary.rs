//! `braidwise vary`: killed, resumed, refused.

use std::collections::HashSet;
use std::path::Path;
use std::process::{Command, Output, Stdio};
use std::time::Duration;

/// A dipole in free space with few unknowns, so that a point takes milliseconds.
const DIPOLE: &str = r#"
title = "Weir dipole"
[earth]
kind = "none"
[points]
feed = [0, 0, 6]
[[wire]]
name = "east"
path = ["feed", [5.1, 0, 6]]
diameter = "1.6 mm"
[[wire]]
name = "west"
path = ["feed", [-5.1, 0, 6]]
length = 5
diameter = "1.6 mm"
[[wire]]
name = "earth lead"
path = [[0, 9, 0.5], [0, 9, 2]]
diameter = "4 mm"
protective = true
[[inline]]
name = "coil"
on = "east"
at = 2.5
inductance = "0.5 uH"
[feed]
at = "feed"
hot = ["east"]
cold = ["west"]
[operation]
power = "20 W"
frequencies = ["14.1 MHz", "14.3 MHz"]
"#;

const OVER: [&str; 4] =
    ["--over", "wire.east.length = 4 m .. 5.45 m by 0.05 m", "--over", "operation.power = 10 W | 20 W"];

struct Folder(tempfile::TempDir);

impl Folder {
    fn new() -> Self {
        let folder = tempfile::tempdir().unwrap();
        std::fs::write(folder.path().join("station.toml"), DIPOLE).unwrap();
        Self(folder)
    }

    fn path(&self) -> &Path {
        self.0.path()
    }

    fn command(&self, arguments: &[&str]) -> Command {
        let mut command = Command::new(env!("CARGO_BIN_EXE_braidwise"));
        command.current_dir(self.path()).args(["vary", "station.toml"]).args(arguments);
        command.stdin(Stdio::null()).stdout(Stdio::piped()).stderr(Stdio::piped());
        command
    }

    fn run(&self, arguments: &[&str]) -> Output {
        self.command(arguments).output().unwrap()
    }

    /// Keys and rows of the store, read as another program would.
    fn stored(&self) -> Vec<(String, String)> {
        let Ok(connection) = rusqlite::Connection::open(self.path().join("run.store")) else { return Vec::new() };
        let Ok(mut statement) = connection.prepare("SELECT key, rows FROM point") else { return Vec::new() };
        statement.query_map([], |r| Ok((r.get(0)?, r.get(1)?))).unwrap().map(Result::unwrap).collect()
    }
}

fn with(arguments: &[&'static str], more: &[&'static str]) -> Vec<&'static str> {
    arguments.iter().chain(more).copied().collect()
}

fn text(bytes: &[u8]) -> String {
    String::from_utf8_lossy(bytes).into_owned()
}

#[test]
fn twenty_kills_lose_no_finished_point_and_repeat_none() {
    let folder = Folder::new();
    let arguments = with(&OVER, &["--store", "run.store", "--csv", "out.csv"]);
    let mut state: u64 = 4_711;
    let mut before: HashSet<(String, String)> = HashSet::new();
    let mut killed = 0;
    for _ in 0..20 {
        state = state.wrapping_mul(6_364_136_223_846_793_005).wrapping_add(1_442_695_040_888_963_407);
        let mut child = folder.command(&arguments).spawn().unwrap();
        std::thread::sleep(Duration::from_millis((state >> 33) % 60));
        let _ = child.kill();
        killed += usize::from(!child.wait().unwrap().success());
        let stored = folder.stored();
        let now: HashSet<(String, String)> = stored.iter().cloned().collect();
        assert_eq!(now.len(), stored.len());
        assert!(before.is_subset(&now), "a finished point was lost or computed again with another result");
        before = now;
    }
    assert!(killed > 0, "no run was killed before its end");
    let last = folder.run(&arguments);
    assert!(last.status.success(), "{}", text(&last.stderr));
    let stored = folder.stored();
    assert_eq!(stored.len(), 60);
    assert!(before.is_subset(&stored.into_iter().collect()));
    // The same as a run that nobody disturbed, to the last bit.
    let calm = folder.run(&with(&OVER, &["--csv", "calm.csv"]));
    assert!(calm.status.success());
    let read = |name: &str| std::fs::read_to_string(folder.path().join(name)).unwrap();
    assert_eq!(read("out.csv"), read("calm.csv"));
    assert_eq!(read("out.csv").lines().count(), 1 + 60 * 2);
}

#[test]
fn one_thread_and_many_give_the_same_bits() {
    let folder = Folder::new();
    let soil =
        ["--set", "earth.soil=wet meadow", "--over", "points.feed.up = 5 .. 7 by 1", "--want", "feed.resistance_ohm"];
    let json = |threads: &str| {
        let out = folder.command(&with(&soil, &["--json"])).env("RAYON_NUM_THREADS", threads).output().unwrap();
        assert!(out.status.success(), "{}", text(&out.stderr));
        text(&out.stdout)
    };
    assert_eq!(json("1"), json("3"));
}

#[test]
fn a_point_is_what_predict_says_of_it() {
    let folder = Folder::new();
    // The first changes the mesh; the second only a part outside the matrix, so that its points share one solve.
    for (over, set) in [
        ("wire.east.length = 4.8 m | 5.0 m", "wire.east.length=5.0 m"),
        ("inline.coil.inductance = 1 uH .. 3 uH by 2 uH", "inline.coil.inductance=3 uH"),
    ] {
        let out = folder.run(&["--over", over, "--json", "--want", "feed.reactance_ohm"]);
        let varied: serde_json::Value = serde_json::from_slice(&out.stdout).unwrap();
        let predicted = Command::new(env!("CARGO_BIN_EXE_braidwise"))
            .current_dir(folder.path())
            .args(["predict", "station.toml", "--json", "--set", set])
            .output()
            .unwrap();
        let predicted: serde_json::Value = serde_json::from_slice(&predicted.stdout).unwrap();
        let (a, b) =
            (&varied["points"][1]["rows"][1]["values"][0], &predicted["frequencies"][1]["feed"]["reactance_ohm"]);
        let (a, b) = (a.as_f64().unwrap(), b.as_f64().unwrap());
        assert!((a / b - 1.0).abs() < 1e-9, "{over}: {a} {b}");
        assert_ne!(varied["points"][0]["rows"], varied["points"][1]["rows"]);
    }
}

#[test]
fn points_that_cannot_be_meant_are_kept_with_their_reason() {
    let folder = Folder::new();
    let out = folder.run(&["--over", "wire.east.diameter = 1.6 mm | 3 MHz", "--json", "--store", "run.store"]);
    assert!(out.status.success(), "{}", text(&out.stderr));
    let outcome: serde_json::Value = serde_json::from_slice(&out.stdout).unwrap();
    assert_eq!(outcome["points"][0]["rows"].as_array().unwrap().len(), 2);
    assert!(outcome["points"][1]["failed"].as_str().unwrap().contains("MHz"), "{outcome}");
    assert_eq!(folder.stored().len(), 2);
}

#[test]
fn a_store_of_another_station_is_refused_and_left_alone() {
    let folder = Folder::new();
    let small = ["--over", "operation.power = 10 W | 20 W", "--store", "run.store"];
    assert!(folder.run(&small).status.success());
    let before = folder.stored();
    let out = folder.run(&with(&small, &["--set", "wire.west.length=4.9"]));
    assert_eq!(out.status.code(), Some(2));
    assert!(text(&out.stderr).contains("belongs to another station"), "{}", text(&out.stderr));
    std::fs::write(folder.path().join("station.toml"), DIPOLE.replace("length = 5\n", "length = 4.9\n")).unwrap();
    let out = folder.run(&small);
    assert_eq!(out.status.code(), Some(2));
    assert!(text(&out.stderr).contains("wire.west.length is 5 there and 4.9 here"), "{}", text(&out.stderr));
    assert_eq!(folder.stored(), before);
    // A comment and another title are no other station.
    let retold = DIPOLE.replace("Weir dipole", "Dipole at the weir").replace("[feed]", "# the middle\n[feed]");
    std::fs::write(folder.path().join("station.toml"), retold).unwrap();
    assert!(folder.run(&small).status.success());
}

#[test]
fn a_write_protected_store_is_refused() {
    let folder = Folder::new();
    let small = ["--over", "operation.power = 10 W | 20 W", "--store", "run.store"];
    assert!(folder.run(&small).status.success());
    let store = folder.path().join("run.store");
    let mut permissions = std::fs::metadata(&store).unwrap().permissions();
    permissions.set_readonly(true);
    std::fs::set_permissions(&store, permissions).unwrap();
    let out = folder.run(&small);
    assert_eq!(out.status.code(), Some(1));
    assert!(text(&out.stderr).contains("write-protected"), "{}", text(&out.stderr));
}

#[cfg(unix)]
#[test]
fn a_full_disk_is_refused_cleanly_and_the_run_goes_on_later() {
    let folder = Folder::new();
    let binary = env!("CARGO_BIN_EXE_braidwise");
    // A limit on the size of files stands for a full disk; the signal that comes with it is ignored so that the write fails.
    let over = "wire.east.length = 4 m .. 5.495 m by 0.005 m";
    let script =
        format!("trap '' XFSZ; ulimit -f 96; exec '{binary}' vary station.toml --store run.store --over '{over}'");
    let out = Command::new("sh").current_dir(folder.path()).args(["-c", &script]).output().unwrap();
    assert_eq!(out.status.code(), Some(1), "{}", text(&out.stderr));
    assert!(text(&out.stderr).contains("no room"), "{}", text(&out.stderr));
    let kept: HashSet<_> = folder.stored().into_iter().collect();
    assert!(!kept.is_empty() && kept.len() < 300, "{}", kept.len());
    let out = folder.run(&["--store", "run.store", "--over", over]);
    assert!(out.status.success(), "{}", text(&out.stderr));
    let all: HashSet<_> = folder.stored().into_iter().collect();
    assert!(all.len() == 300 && kept.is_subset(&all));
}

#[cfg(unix)]
#[test]
fn ctrl_c_keeps_what_is_finished_and_ends_with_130() {
    let folder = Folder::new();
    let long = ["--over", "wire.east.length = 4 m .. 5.4999 m by 0.0001 m", "--store", "run.store"];
    let child = folder.command(&long).spawn().unwrap();
    let mut waited = 0;
    while folder.stored().is_empty() && waited < 600 {
        std::thread::sleep(Duration::from_millis(50));
        waited += 1;
    }
    let sent = Command::new("kill").args(["-INT", &child.id().to_string()]).status().unwrap();
    assert!(sent.success());
    let out = child.wait_with_output().unwrap();
    assert_eq!(out.status.code(), Some(130), "{}", text(&out.stderr));
    let said = text(&out.stderr);
    let stored = folder.stored().len();
    assert!(said.contains(&format!("{stored} of 15000 points are finished")), "{said}");
}

#[test]
fn what_cannot_be_asked_is_refused_before_anything_is_computed() {
    let folder = Folder::new();
    let cases: [(&[&str], &str); 8] = [
        (&["--over", "wire.east.lenght = 4 m | 5 m"], "did you mean \"length\""),
        (&["--over", "wire.\"earth lead\".diameter = 4 mm | 6 mm"], "protective"),
        (&["--over", "wire.east.length = 5 m .. 4 m by 1 cm"], "backwards"),
        (&["--over", "wire.east.length = 4 m .. 5 m"], "no step"),
        (&["--over", "wire.east.length = 4 m", "--over", "wire.east.length = 5 m"], "twice"),
        (&["--over", "wire.east.length = 4 m", "--want", "radio.srw"], "\"radio.swr\""),
        (&["--over", "earth.soil = bog", "--over", "earth.permittivity = 4 | 5"], "contradict"),
        (&["--over", "wire.east.length = 4 m .. 5 m", "--samples", "0"], "0 points"),
    ];
    for (arguments, reason) in cases {
        let out = folder.run(arguments);
        assert_eq!(out.status.code(), Some(2), "{arguments:?}: {}", text(&out.stderr));
        assert!(text(&out.stderr).contains(reason), "{arguments:?}: {}", text(&out.stderr));
        assert!(out.stdout.is_empty());
    }
}

#[test]
fn a_latin_hypercube_writes_csv_and_json_lines() {
    let folder = Folder::new();
    let out = folder.run(&[
        "--over",
        "wire.east.length = 4 m .. 5.4 m",
        "--over",
        "wire.west.length = 4.5 m | 5 m",
        "--samples",
        "6",
        "--seed",
        "3",
        "--csv",
        "out.csv",
        "--jsonl",
        "out.jsonl",
        "--want",
        "power.radiated_fraction",
        "--want",
        "radio.swr",
    ]);
    assert!(out.status.success(), "{}", text(&out.stderr));
    let csv = std::fs::read_to_string(folder.path().join("out.csv")).unwrap();
    assert!(csv.starts_with(
        "wire.east.length,wire.west.length,variant,frequency_hz,band,edge,power.radiated_fraction,radio.swr,failed"
    ));
    assert_eq!(csv.lines().count(), 1 + 6 * 2);
    let lines = std::fs::read_to_string(folder.path().join("out.jsonl")).unwrap();
    for line in lines.lines() {
        let row: serde_json::Value = serde_json::from_str(line).unwrap();
        assert!((0.9..1.001).contains(&row["power.radiated_fraction"].as_f64().unwrap()), "{row}");
    }
    assert!(text(&out.stdout).contains("6 points, none failed"), "{}", text(&out.stdout));
}

#[test]
fn every_point_has_its_nominal_and_its_worst_over_the_variants() {
    let folder = Folder::new();
    let variant = "[[variant]]\nname = \"end folded back\"\nset = { \"wire.west.length\" = 4.4 }\n";
    std::fs::write(folder.path().join("station.toml"), format!("{DIPOLE}{variant}")).unwrap();
    let want = ["--want", "radio.swr", "--want", "power.radiated_fraction", "--want", "feed.reactance_ohm"];
    let arguments = with(&["--over", "wire.east.length = 4.8 m | 5.0 m"], &want);
    let out = folder.run(&with(&arguments, &["--json"]));
    assert!(out.status.success(), "{}", text(&out.stderr));
    let json: serde_json::Value = serde_json::from_slice(&out.stdout).unwrap();
    for point in json["points"].as_array().unwrap() {
        let rows = point["rows"].as_array().unwrap();
        assert_eq!(rows.len(), 4);
        let [swr, radiated, reactance] = [0, 1, 2].map(|n| &point["summary"][n]);
        let all = |n: usize| rows.iter().map(move |r| r["values"][n].as_f64().unwrap());
        assert_eq!((&swr["quantity"], &swr["worse"]), (&"radio.swr".into(), &"larger".into()));
        assert_eq!(swr["over_variants"]["worst"]["value"], all(0).fold(0.0, f64::max));
        assert_eq!(radiated["over_variants"]["worst"]["value"], all(1).fold(9.0, f64::min));
        assert_eq!(reactance["over_variants"]["worst"], serde_json::Value::Null);
        assert_eq!(reactance["over_variants"]["smallest"]["value"], all(2).fold(f64::MAX, f64::min));
        let worst = &swr["over_variants"]["worst"];
        let there = rows.iter().find(|r| r["values"][0] == worst["value"]).unwrap();
        assert_eq!((&worst["variant"], &worst["frequency_hz"]), (&there["variant"], &there["frequency_hz"]));
        assert_eq!(swr["nominal"]["worst"]["variant"], "nominal");
    }
    let told = text(&folder.run(&arguments).stdout);
    assert!(told.contains("radio.swr (worst is the largest)") && told.contains("end folded back"), "{told}");
    let help = text(&folder.command(&["--help"]).output().unwrap().stdout);
    for format in ["--csv FILE", "--jsonl FILE", "--json,", "\"summary\""] {
        assert!(help.contains(format), "{format} is not in {help}");
    }
}
