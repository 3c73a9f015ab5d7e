//! Ctrl-C during a long study: status 130, nothing half written.
#![cfg(unix)]

use std::process::{Command, Output, Stdio};
use std::time::{Duration, Instant};

/// Waits until a program takes Ctrl-C into its own hands (bit 1 of the caught signals; elsewhere than on Linux it is given a second).
fn until_it_listens(id: u32) {
    let listens = || {
        let Ok(status) = std::fs::read_to_string(format!("/proc/{id}/status")) else { return false };
        let caught = status.lines().find_map(|l| l.strip_prefix("SigCgt:"));
        caught.and_then(|c| u64::from_str_radix(c.trim(), 16).ok()).is_some_and(|c| c & 2 != 0)
    };
    let patience = Duration::from_secs(if cfg!(target_os = "linux") { 60 } else { 1 });
    let since = Instant::now();
    while !listens() && since.elapsed() < patience {
        std::thread::sleep(Duration::from_millis(5));
    }
    // and now it reads the station and begins
    std::thread::sleep(Duration::from_millis(400));
}

/// Runs a command in a folder, presses Ctrl-C (twice where `impatient`) and waits for its end; what lies in the folder then.
fn interrupt(arguments: &[&str], impatient: bool) -> (Output, Vec<String>) {
    let folder = tempfile::tempdir().unwrap();
    let model = format!("{}/models/gauge-hut.toml", env!("CARGO_MANIFEST_DIR"));
    let mut command = Command::new(env!("CARGO_BIN_EXE_braidwise"));
    command.current_dir(folder.path()).arg(arguments[0]).arg(model).args(&arguments[1..]);
    let child = command.stdin(Stdio::null()).stdout(Stdio::piped()).stderr(Stdio::piped()).spawn().unwrap();
    until_it_listens(child.id());
    for _ in 0..1 + usize::from(impatient) {
        assert!(Command::new("kill").args(["-INT", &child.id().to_string()]).status().unwrap().success());
        std::thread::sleep(Duration::from_millis(20));
    }
    let output = child.wait_with_output().unwrap();
    let left = std::fs::read_dir(folder.path()).unwrap();
    (output, left.map(|f| f.unwrap().file_name().to_string_lossy().into_owned()).collect())
}

const PLACE: [&str; 6] = ["place", "--lengths", "10 m .. 11.4 m by 2 cm", "--csv", "out.csv", "--json"];
const CUT: [&str; 8] =
    ["cut", "--conductor", "radiator", "--range", "15 m .. 22 m by 2 mm", "--csv", "out.csv", "--json"];
const PREDICT: [&str; 9] =
    ["predict", "--from", "3 MHz", "--to", "30 MHz", "--points", "2000", "--touchstone", "out.s1p"];

#[test]
fn a_long_study_ends_with_130_and_leaves_nothing() {
    for arguments in [&PLACE[..], &CUT, &PREDICT] {
        let (output, left) = interrupt(arguments, false);
        let said = String::from_utf8_lossy(&output.stderr);
        assert_eq!(output.status.code(), Some(130), "{arguments:?}: {said}");
        assert!(said.contains("interrupted: nothing was written"), "{arguments:?}: {said}");
        assert!(output.stdout.is_empty() && left.is_empty(), "{arguments:?}: {left:?}");
    }
}

#[test]
fn a_second_ctrl_c_ends_it_at_once() {
    let (output, left) = interrupt(&CUT, true);
    assert_eq!(output.status.code(), Some(130), "{}", String::from_utf8_lossy(&output.stderr));
    assert!(output.stdout.is_empty() && left.is_empty(), "{left:?}");
}
