//! Modules use only what stands above them in `src/lib.rs`.

use std::path::Path;

/// Modules in the order in which the crate declares them.
fn order() -> Vec<String> {
    std::fs::read_to_string("src/lib.rs")
        .unwrap()
        .lines()
        .filter_map(|l| l.strip_prefix("pub mod ")?.strip_suffix(';').map(str::to_string))
        .collect()
}

/// Files of a module.
fn files(path: &Path, out: &mut Vec<std::path::PathBuf>) {
    for entry in std::fs::read_dir(path).unwrap() {
        let path = entry.unwrap().path();
        if path.is_dir() {
            files(&path, out);
        } else if path.extension().is_some_and(|e| e == "rs") {
            out.push(path);
        }
    }
}

/// Modules named by `crate::` paths in code (comments left out, links in them mean nothing to the compiler).
fn used(source: &str) -> Vec<String> {
    let code: Vec<&str> = source.lines().filter(|l| !l.trim_start().starts_with("//")).collect();
    let code = code.join("\n");
    let mut out = Vec::new();
    for (at, _) in code.match_indices("crate::") {
        let rest = &code[at + "crate::".len()..];
        let names = match rest.strip_prefix('{') {
            Some(list) => list.split('}').next().unwrap_or_default().split(',').map(str::trim).collect(),
            None => vec![rest],
        };
        for name in names {
            let end = name.find(|c: char| !c.is_alphanumeric() && c != '_').unwrap_or(name.len());
            out.push(name[..end].to_string());
        }
    }
    out
}

/// Uses of a module standing below.
fn upward(order: &[String], module: &str, source: &str) -> Vec<String> {
    let place = |name: &str| order.iter().position(|m| m == name);
    used(source).into_iter().filter(|name| place(name) > place(module)).collect()
}

#[test]
fn no_module_uses_one_that_stands_below_it() {
    let order = order();
    assert!(order.len() > 8 && order[0] == "quantity" && order.last().unwrap() == "cli", "{order:?}");
    for module in &order {
        let mut list = Vec::new();
        files(&Path::new("src").join(module), &mut list);
        assert!(!list.is_empty());
        for file in list {
            // tests beside the code may use what stands below it
            let stem = file.file_stem().and_then(|s| s.to_str()).unwrap_or_default().to_string();
            let parent = std::fs::read_to_string(file.with_file_name("mod.rs")).unwrap_or_default();
            if parent.contains(&format!("#[cfg(test)]\nmod {stem};")) {
                continue;
            }
            let wrong = upward(&order, module, &std::fs::read_to_string(&file).unwrap());
            assert!(wrong.is_empty(), "{} uses {wrong:?}, below {module}", file.display());
        }
    }
}

#[test]
fn the_check_itself_can_fail() {
    let order = order();
    assert_eq!(upward(&order, "mesh", "use crate::layout::Layout;\nuse crate::study::predict;"), ["study"]);
    assert_eq!(upward(&order, "mesh", "use crate::{layout, output};"), ["output"]);
    assert!(upward(&order, "mesh", "//! see [`crate::study`]").is_empty());
}

#[test]
fn output_and_outcome_know_nothing_of_the_solver() {
    for folder in ["src/output", "src/outcome"] {
        let mut list = Vec::new();
        files(Path::new(folder), &mut list);
        for file in list {
            let source = std::fs::read_to_string(&file).unwrap();
            let code = source.split("#[cfg(test)]").next().unwrap();
            for name in used(code) {
                let solver = ["mesh", "halfspace", "interaction", "ports", "field", "network", "study", "cli"];
                assert!(!solver.contains(&name.as_str()), "{} uses {name}", file.display());
            }
        }
    }
}
