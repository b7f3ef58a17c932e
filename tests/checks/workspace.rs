//! The shape of the workspace: which rooms may know of which, and that committed data are what their
//! generators write.

use std::collections::BTreeSet;
use std::path::{Path, PathBuf};
use std::process::Command;

fn top() -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("..")
}

/// Names of all packages a package is built with (build and test dependencies left out).
fn built_with(package: &str) -> BTreeSet<String> {
    let output = Command::new(env!("CARGO"))
        .args(["tree", "--offline", "--locked", "--edges", "normal", "--prefix", "none", "--format", "{p}"])
        .args(["--package", package])
        .current_dir(top())
        .output()
        .expect("cargo runs");
    assert!(output.status.success(), "{}", String::from_utf8_lossy(&output.stderr));
    let text = String::from_utf8(output.stdout).expect("cargo prints UTF-8");
    text.lines().filter_map(|line| line.split_whitespace().next()).map(str::to_owned).collect()
}

fn own_rooms(package: &str) -> BTreeSet<String> {
    built_with(package).into_iter().filter(|name| name.starts_with("gaussgap") && name != package).collect()
}

fn names(names: &[&str]) -> BTreeSet<String> {
    names.iter().map(|&name| name.to_owned()).collect()
}

#[test]
fn dependencies_point_one_way() {
    assert_eq!(own_rooms("gaussgap-simulation"), names(&[]));
    assert_eq!(own_rooms("gaussgap-conclusions"), names(&["gaussgap-simulation"]));
    assert_eq!(own_rooms("gaussgap-pages"), names(&["gaussgap-simulation", "gaussgap-conclusions"]));
}

#[test]
fn only_the_program_knows_a_window() {
    for package in ["gaussgap-simulation", "gaussgap-conclusions", "gaussgap-pages"] {
        let knows = built_with(package);
        for window in ["egui", "eframe", "winit", "rfd"] {
            assert!(!knows.contains(window), "{package} is built with {window}");
        }
    }
    assert!(built_with("gaussgap").contains("egui"));
}

fn rust_files(folder: &Path, found: &mut Vec<PathBuf>) {
    for entry in std::fs::read_dir(folder).expect("a folder of the workspace") {
        let path = entry.expect("a readable entry").path();
        if path.is_dir() {
            rust_files(&path, found);
        } else if path.extension().is_some_and(|extension| extension == "rs") {
            found.push(path);
        }
    }
}

#[test]
fn the_engine_and_the_conclusions_do_no_input_or_output() {
    let mut files = Vec::new();
    for package in ["simulation", "conclusions"] {
        rust_files(&top().join("crates").join(package).join("src"), &mut files);
    }
    assert!(files.len() > 20, "the rooms were found");
    let is_test = |file: &Path| {
        file.file_stem().is_some_and(|stem| {
            let stem = stem.to_string_lossy();
            stem.ends_with("tests") || stem.ends_with("checks") || stem.ends_with("_table")
        })
    };
    for file in files.into_iter().filter(|file| !is_test(file)) {
        let text = std::fs::read_to_string(&file).expect("a source file");
        let code = text.split("#[cfg(test)]").next().unwrap_or_default();
        for forbidden in ["std::fs", "std::net", "std::process", "println!", "std::env"] {
            assert!(!code.contains(forbidden), "{} uses {forbidden}", file.display());
        }
    }
}

#[test]
fn the_top_level_holds_only_what_it_should() {
    let allowed = names(&[
        "Cargo.toml",
        "Cargo.lock",
        "README.md",
        "DEVELOPERS.md",
        "LICENSE-APACHE",
        "LICENSE-MIT",
        "rustfmt.toml",
        "crates",
        "assets",
        "tests",
        "scenarios",
        "target",
    ]);
    for entry in std::fs::read_dir(top()).expect("the top level") {
        let name = entry.expect("a readable entry").file_name().to_string_lossy().into_owned();
        assert!(name.starts_with('.') || allowed.contains(&name), "{name} does not belong at the top level");
    }
}

#[test]
fn pilot_data_are_what_their_generator_writes() {
    let committed =
        std::fs::read_to_string(top().join("scenarios/on-board-spending.csv")).expect("the pilot data");
    assert!(committed.lines().count() > 2000);
    assert!(committed == gaussgap_tests::pilot_data::on_board_spending_csv(), "run the generator again");
}
