//! Regenerates `tests/data/convergence.csv`: the default mesh of many stations against refined ones at the same gap width.
//!
//! `cargo run --release --example convergence` writes the table; with `--show` it prints a summary only.

#![allow(clippy::unwrap_used)]

#[path = "../tests/laws/cases.rs"]
mod cases;
#[path = "../tests/laws/refinement.rs"]
mod refinement;

fn main() {
    let only_show = std::env::args().any(|a| a == "--show");
    let filter = std::env::args().skip(1).find(|a| !a.starts_with("--"));
    let mut table = String::from(refinement::HEADER);
    for case in cases::all() {
        if filter.as_ref().is_some_and(|f| !case.name.contains(f.as_str())) {
            continue;
        }
        for row in refinement::refine(&case, &[1.0, 2.0, 4.0]) {
            eprintln!("{}", row.summary());
            table.push_str(&row.csv());
        }
    }
    if !only_show && filter.is_none() {
        std::fs::write("tests/data/convergence.csv", table).unwrap();
    }
}
