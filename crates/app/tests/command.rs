//! The command, driven as a program: exit statuses, messages, outputs, without a display or standard input.

use serde_json::Value;
use std::path::{Path, PathBuf};
use std::process::{Command, Output, Stdio};

fn gaussgap(folder: &Path, arguments: &[&str]) -> Output {
    Command::new(env!("CARGO_BIN_EXE_gaussgap"))
        .args(arguments)
        .current_dir(folder)
        .stdin(Stdio::null())
        .env_remove("DISPLAY")
        .env_remove("WAYLAND_DISPLAY")
        .output()
        .unwrap()
}

fn code(output: &Output) -> i32 {
    output.status.code().unwrap()
}

fn stdout(output: &Output) -> String {
    String::from_utf8(output.stdout.clone()).unwrap()
}

fn stderr(output: &Output) -> String {
    String::from_utf8(output.stderr.clone()).unwrap()
}

fn names(folder: &Path) -> Vec<String> {
    let mut names: Vec<String> = std::fs::read_dir(folder)
        .unwrap()
        .map(|entry| entry.unwrap().file_name().to_string_lossy().into_owned())
        .collect();
    names.sort();
    names
}

/// A folder with one plan that holds, one that fails and one that is misspelt.
struct Plans {
    folder: tempfile::TempDir,
}

/// An exponential sum: the distance is 0.02429 at n = 30 and 0.01330 at n = 100, so a tolerance of 0.02 decides.
const PLAN: &str = r#"{"format": "gaussgap-scenario/1", "title": "Ferry queue", "law": {"kind": "exponential", "mean": 48},
 "n": NUMBER, "tolerance": {"absolute": 0.02}, "search": {"up_to": 60}}"#;

impl Plans {
    fn new() -> Self {
        let folder = tempfile::tempdir().unwrap();
        let write = |name: &str, text: &str| std::fs::write(folder.path().join(name), text).unwrap();
        write("holds.json", &PLAN.replace("NUMBER", "100"));
        write("fails.json", &PLAN.replace("NUMBER", "30"));
        write("typo.json", &PLAN.replace("NUMBER", "30").replace("tolerance", "tolerence"));
        Self { folder }
    }

    fn path(&self) -> &Path {
        self.folder.path()
    }

    fn file(&self, name: &str) -> PathBuf {
        self.path().join(name)
    }

    fn run(&self, arguments: &[&str]) -> Output {
        gaussgap(self.path(), arguments)
    }
}

#[test]
fn version_help_and_usage_errors() {
    let plans = Plans::new();
    let output = plans.run(&["--version"]);
    assert_eq!((code(&output), stdout(&output)), (0, format!("gaussgap {}\n", env!("CARGO_PKG_VERSION"))));
    let output = plans.run(&["assess", "--help"]);
    assert_eq!(code(&output), 0);
    for option in
        ["--json", "--png", "--svg", "--csv", "--set", "--quiet", "Exit status: 0 every claim holds"]
    {
        assert!(stdout(&output).contains(option), "{option}");
    }
    assert_eq!(code(&plans.run(&["assess"])), 2);
    assert_eq!(code(&plans.run(&["assess", "holds.json", "--jsno", "-"])), 2);
    assert_eq!(code(&plans.run(&["schema", "something"])), 2);
}

#[test]
fn without_a_display_one_line_names_the_command_that_needs_none() {
    let plans = Plans::new();
    for arguments in [&[][..], &["open", "holds.json"], &["--renderer", "cpu"]] {
        let output = plans.run(arguments);
        assert_eq!(code(&output), 4);
        let message = stderr(&output);
        assert!(message.lines().count() == 1 && message.contains("gaussgap assess"), "{message}");
    }
}

#[test]
fn schemas_are_json_schemas() {
    let plans = Plans::new();
    for document in ["scenario", "report"] {
        let output = plans.run(&["schema", document]);
        assert_eq!(code(&output), 0);
        let schema: Value = serde_json::from_str(&stdout(&output)).unwrap();
        assert!(schema["$schema"].as_str().unwrap().contains("json-schema.org"));
        assert!(schema["properties"]["format"].is_object());
    }
}

#[test]
fn bad_input_is_named_with_file_and_place_and_nothing_is_written() {
    let plans = Plans::new();
    let write = |name: &str, text: &str| std::fs::write(plans.file(name), text).unwrap();
    write("syntax.json", "{\n  \"format\": }");
    write(
        "weight.json",
        r#"{"format": "gaussgap-scenario/1", "n": 0, "law": {"kind": "normal", "mean": 0}}"#,
    );
    let before = names(plans.path());
    let messages = [
        ("none.json", "none.json: cannot be read: "),
        ("syntax.json", "syntax.json: line 2, column 13: "),
        ("typo.json", "typo.json: /tolerence: "),
        ("weight.json", "weight.json: /n: must lie between 1 and"),
        ("weight.json", "weight.json: /law"),
        ("no*such.json", "no*such.json: matches no file"),
    ];
    for (scenario, message) in messages {
        let output = plans.run(&["assess", scenario, "--json", "out.json", "--png", "out.png"]);
        assert_eq!(code(&output), 2, "{scenario}: {}", stderr(&output));
        assert!(
            stderr(&output).lines().any(|line| line.starts_with(message)),
            "{message} in {}",
            stderr(&output)
        );
        assert_eq!(stdout(&output), "");
        assert_eq!(names(plans.path()), before);
    }
}

#[test]
fn overrides_are_checked() {
    let plans = Plans::new();
    for (set, message) in [
        ("n=200", "--set: "),
        ("/n", "--set: "),
        ("/n=\"many\"", "holds.json: /n: "),
        ("/nn=3", "holds.json: /nn: "),
        ("/probe_z/99=3", "holds.json: /probe_z"),
        ("/law/mean=-1", "holds.json: /law/mean: "),
    ] {
        let output = plans.run(&["assess", "holds.json", "--set", set]);
        assert_eq!(code(&output), 2, "{set}: {}", stderr(&output));
        assert!(stderr(&output).contains(message), "{set}: {}", stderr(&output));
    }
}

#[test]
fn outputs_that_cannot_be_are_refused_before_the_work() {
    let plans = Plans::new();
    let output = plans.run(&["assess", "holds.json", "--json", "no/such/folder.json"]);
    assert_eq!(code(&output), 4);
    assert_eq!(stderr(&output), "no/such/folder.json: cannot be written: there is no folder no/such\n");
    let output = plans.run(&["assess", "holds.json", "--json", "holds.json"]);
    assert_eq!(code(&output), 2);
    let output = plans.run(&["assess", "holds.json", "fails.json", "--png", "page.png"]);
    assert_eq!(code(&output), 2);
    assert!(stderr(&output).contains("{}"), "{}", stderr(&output));
}

#[test]
fn the_exit_status_is_the_finding() {
    let plans = Plans::new();
    let output = plans.run(&["assess", "holds.json"]);
    assert_eq!(code(&output), 0, "{}", stderr(&output));
    assert!(stdout(&output).starts_with("holds.json: Ferry queue\n  HOLDS: "), "{}", stdout(&output));
    assert_eq!(stderr(&output), "");
    let output = plans.run(&["assess", "fails.json"]);
    assert_eq!(code(&output), 1);
    assert!(stdout(&output).contains("  FAILS: Not safe at n = 30"), "{}", stdout(&output));
    assert!(stdout(&output).contains("Safe from n = 45"), "{}", stdout(&output));
    let output = plans.run(&["assess", "fails.json", "--set", "/n=100", "--quiet"]);
    assert_eq!((code(&output), stdout(&output).as_str()), (0, ""));
}

#[test]
fn one_report_is_an_object_on_standard_output_and_nothing_else() {
    let plans = Plans::new();
    let output = plans.run(&["assess", "fails.json", "--json", "-"]);
    assert_eq!(code(&output), 1);
    let report: Value = serde_json::from_str(&stdout(&output)).unwrap();
    assert_eq!(report["format"], "gaussgap-report/1");
    assert_eq!(report["program"]["name"], "gaussgap");
    assert_eq!(report["scenario"]["statistic"], "mean");
    assert_eq!(report["verdict"]["state"], "fails");
    // sup |F − Φ| for 30 exponential summands: 0.024291 (facts checked with SciPy, six decimals).
    let distance = &report["distance"]["kolmogorov"];
    assert!((distance["value"].as_f64().unwrap() - 0.024_291).abs() < 1e-6, "{distance}");
    assert_eq!(distance["basis"], "bound");
}

#[test]
fn several_scenarios_one_line_each_in_order_and_a_bad_one_stops_nobody() {
    let plans = Plans::new();
    let output = plans.run(&["assess", "fails.json", "typo.json", "holds.json", "--json", "-"]);
    assert_eq!(code(&output), 2);
    let states: Vec<String> = stdout(&output)
        .lines()
        .map(|line| {
            serde_json::from_str::<Value>(line).unwrap()["verdict"]["state"].as_str().unwrap().to_owned()
        })
        .collect();
    assert_eq!(states, ["fails", "holds"]);
    assert!(stderr(&output).starts_with("typo.json: /tolerence: "), "{}", stderr(&output));
    // The shell did not expand the pattern: the program does.
    let output = plans.run(&["assess", "*s.json", "--json", "all.jsonl", "--png", "./", "--quiet"]);
    assert_eq!(code(&output), 1, "{}", stderr(&output));
    assert_eq!(std::fs::read_to_string(plans.file("all.jsonl")).unwrap().lines().count(), 2);
    for name in ["fails.png", "holds.png"] {
        assert!(std::fs::read(plans.file(name)).unwrap().starts_with(b"\x89PNG"), "{name}");
    }
    assert!(names(plans.path()).iter().all(|name| !name.ends_with(".part")));
}

#[test]
fn pages_and_curves_are_written_whole() {
    let plans = Plans::new();
    std::fs::write(plans.file("page.svg"), "old").unwrap();
    let output =
        plans.run(&["assess", "fails.json", "--svg", "page.svg", "--csv", "curves-{}.csv", "--quiet"]);
    assert_eq!(code(&output), 1, "{}", stderr(&output));
    let svg = std::fs::read_to_string(plans.file("page.svg")).unwrap();
    assert!(svg.starts_with("<svg ") && svg.trim_end().ends_with("</svg>") && svg.contains("Ferry queue"));
    let curves = std::fs::read_to_string(plans.file("curves-fails.csv")).unwrap();
    assert!(curves.starts_with("z_sd,mean_units,at_or_below_probability,"), "{}", &curves[..80]);
    assert!(curves.lines().count() > 100);
}

#[test]
fn a_law_without_finite_variance_fails_with_the_reason() {
    let plans = Plans::new();
    let set = r#"/law={"kind":"lomax","shape":1.5,"scale":3}"#;
    let output = plans.run(&["assess", "holds.json", "--set", set, "--json", "-"]);
    assert_eq!(code(&output), 1, "{}", stderr(&output));
    let report: Value = serde_json::from_str(&stdout(&output)).unwrap();
    assert!(report["distance"]["kolmogorov"].is_null());
    assert!(!report["cautions"].as_array().unwrap().is_empty());
}

/// A reader that goes away early is no reason to panic.
#[test]
fn a_closed_pipe_is_no_panic() {
    let plans = Plans::new();
    let mut child = Command::new(env!("CARGO_BIN_EXE_gaussgap"))
        .args(["assess", "fails.json", "holds.json", "fails.json", "--json", "-"])
        .current_dir(plans.path())
        .stdin(Stdio::null())
        .stdout(Stdio::piped())
        .stderr(Stdio::piped())
        .spawn()
        .unwrap();
    drop(child.stdout.take());
    let output = child.wait_with_output().unwrap();
    assert_eq!(code(&output), 4);
    assert_eq!(stderr(&output), "");
}
