//! Station files that cannot be meant, under `malformed/`: each says in its first three lines which line is at fault,
//! a piece of the reason and a piece of the mend.

use super::few::Few;
use braidwise::layout::Layout;
use braidwise::station::{Document, Refused};
use std::path::{Path, PathBuf};

struct Case {
    name: String,
    text: String,
    line: usize,
    reason: String,
    mend: String,
}

fn cases() -> Vec<Case> {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/commands/malformed");
    let mut files: Vec<PathBuf> = std::fs::read_dir(folder).unwrap().map(|f| f.unwrap().path()).collect();
    files.sort();
    files.iter().map(|file| case(file)).collect()
}

fn case(file: &Path) -> Case {
    let text = std::fs::read_to_string(file).unwrap();
    let head = |key: &str| {
        let start = format!("# {key}: ");
        let line = text.lines().take(3).find_map(|l| l.strip_prefix(&start));
        line.unwrap_or_else(|| panic!("{} has no `{start}` in its head", file.display())).to_owned()
    };
    let (line, reason, mend) = (head("line").parse().unwrap(), head("reason"), head("mend"));
    let name = file.file_name().unwrap().to_string_lossy().into_owned();
    Case { name, line, reason, mend, text }
}

/// Everything `check` does before it says a file is good.
fn judge(case: &Case) -> Result<(), Refused> {
    for (_, station) in Document::parse(&case.text, &case.name)?.stations(&Few)? {
        Layout::place(&station).map_err(|faults| Refused { sources: station.sources.clone(), faults })?;
    }
    Ok(())
}

#[test]
fn fifty_files_are_refused_with_line_reason_and_mend() {
    let cases = cases();
    assert!(cases.len() >= 50, "{} files", cases.len());
    let mut wrong = Vec::new();
    for case in &cases {
        let Err(refused) = judge(case) else {
            wrong.push(format!("{} is not refused", case.name));
            continue;
        };
        let told = refused.faults.iter().any(|fault| {
            let line = fault.place.and_then(|p| refused.sources.line_column(p)).map(|(line, _)| line);
            line == Some(case.line) && fault.reason.contains(&case.reason) && fault.mend.contains(&case.mend)
        });
        let shown = refused.to_string();
        if !told || !shown.contains(&format!("{}:{}:", case.name, case.line)) {
            wrong.push(format!(
                "{}: wanted line {} with {:?} and {:?}, told\n{shown}",
                case.name, case.line, case.reason, case.mend
            ));
        }
    }
    assert!(wrong.is_empty(), "{}", wrong.join("\n\n"));
}

#[test]
fn one_mistake_is_one_fault() {
    // A few faults drag others with them; most must not.
    let cases = cases();
    let single = cases.iter().filter(|c| judge(c).is_err_and(|r| r.faults.len() == 1)).count();
    assert!(single * 10 >= cases.len() * 8, "only {single} of {} files are told one fault", cases.len());
}

#[test]
fn the_program_refuses_them_with_status_two_and_nothing_on_standard_output() {
    for case in cases() {
        // Variants are read by the commands that compute them.
        if case.name.starts_with("variant-") {
            continue;
        }
        let folder = tempfile::tempdir().unwrap();
        std::fs::write(folder.path().join(&case.name), &case.text).unwrap();
        let mut program = std::process::Command::new(env!("CARGO_BIN_EXE_braidwise"));
        let run = program.args(["predict", &case.name, "--json"]).current_dir(folder.path()).output().unwrap();
        let told = String::from_utf8_lossy(&run.stderr);
        let place = format!("{}:{}:", case.name, case.line);
        assert_eq!(run.status.code(), Some(2), "{}: {told}", case.name);
        assert!(run.stdout.is_empty(), "{}", case.name);
        for part in [&place, &case.reason, &case.mend] {
            assert!(told.contains(part), "{}: no {part:?} in\n{told}", case.name);
        }
    }
}

#[test]
fn what_a_variant_cannot_be_placed_as_names_the_variant() {
    let folder = tempfile::tempdir().unwrap();
    let model = std::fs::read_to_string(format!("{}/models/gauge-hut.toml", env!("CARGO_MANIFEST_DIR"))).unwrap();
    let broken = format!("{model}\n[[variant]]\nname = \"short\"\nset = {{ \"coax.length\" = 3 }}\n");
    std::fs::write(folder.path().join("m.toml"), broken).unwrap();
    let mut program = std::process::Command::new(env!("CARGO_BIN_EXE_braidwise"));
    let run = program.args(["check", "m.toml"]).current_dir(folder.path()).output().unwrap();
    let told = String::from_utf8_lossy(&run.stderr);
    assert!(run.status.code() == Some(2) && told.contains("in variant \"short\""), "{told}");
}

#[test]
fn lengths_and_resistances_below_zero_get_the_programs_own_message() {
    let model = format!("{}/models/gauge-hut.toml", env!("CARGO_MANIFEST_DIR"));
    for (command, more, says) in [
        ("place", vec!["--impedance", "-2 kohm"], "a choke has more than 0 ohm"),
        ("cut", vec!["--conductor", "coax", "--range", "-3 m .. 9 m by 1 m"], "a length must be longer than zero"),
        (
            "cut",
            vec!["--conductor", "coax", "--range", "3 m .. 9 m by 1 m", "--stock", "-3 ft"],
            "a length must be longer than zero",
        ),
    ] {
        let run = std::process::Command::new(env!("CARGO_BIN_EXE_braidwise"))
            .arg(command)
            .arg(&model)
            .args(more)
            .output()
            .unwrap();
        let told = String::from_utf8_lossy(&run.stderr);
        assert!(run.status.code() == Some(2) && told.contains(says), "{told}");
    }
}
