//! Where the outputs of each scenario go, decided and checked before any work begins.

use super::arguments::AssessArguments;
use super::status::Status;
use std::collections::BTreeMap;
use std::path::{Path, PathBuf};

/// What is written.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Format {
    /// The report.
    Json,
    /// The page as a picture.
    Png,
    /// The page as vectors.
    Svg,
    /// The curves.
    Csv,
}

impl Format {
    const fn option(self) -> &'static str {
        match self {
            Self::Json => "--json",
            Self::Png => "--png",
            Self::Svg => "--svg",
            Self::Csv => "--csv",
        }
    }

    const fn ending(self) -> &'static str {
        match self {
            Self::Json => "json",
            Self::Png => "png",
            Self::Svg => "svg",
            Self::Csv => "csv",
        }
    }
}

/// Where something is written.
#[derive(Debug, Clone, PartialEq, Eq)]
pub enum Place {
    /// Standard output.
    StandardOutput,
    /// A file.
    File(PathBuf),
}

/// All outputs of a run.
#[derive(Debug, Default)]
pub struct Outputs {
    /// The outputs of each scenario, in the order of the scenarios.
    pub each: Vec<Vec<(Format, Place)>>,
    /// Where the reports of several scenarios go, one line each.
    pub lines: Option<Place>,
}

impl Outputs {
    /// Whether standard output belongs to an output, so that no text summary may be mixed in.
    pub fn use_standard_output(&self) -> bool {
        self.lines == Some(Place::StandardOutput)
            || self.each.iter().flatten().any(|(_, place)| *place == Place::StandardOutput)
    }
}

/// Why the outputs can't be as asked for.
#[derive(Debug)]
pub struct Refusal {
    /// Bad input, or a place that can't be written to.
    pub status: Status,
    /// One line.
    pub line: String,
}

impl Refusal {
    fn bad_input(line: String) -> Self {
        Self { status: Status::BadInput, line }
    }
}

/// Decides where everything goes.
pub fn plan(arguments: &AssessArguments, scenarios: &[PathBuf]) -> Result<Outputs, Refusal> {
    let several = scenarios.len() > 1;
    let asked = [
        (Format::Json, &arguments.json),
        (Format::Png, &arguments.png),
        (Format::Svg, &arguments.svg),
        (Format::Csv, &arguments.csv),
    ];
    let mut outputs = Outputs { each: vec![Vec::new(); scenarios.len()], lines: None };
    let mut on_standard_output = None;
    for (format, path) in asked {
        let Some(path) = path else { continue };
        if path.as_os_str() == "-"
            && let Some(other) = on_standard_output.replace(format.option())
        {
            let line = format!("gaussgap: {other} and {} cannot both go to standard output", format.option());
            return Err(Refusal::bad_input(line));
        }
        match destination(path) {
            Destination::StandardOutput | Destination::File if several && format == Format::Json => {
                outputs.lines = Some(place(path));
            }
            Destination::StandardOutput | Destination::File if several => {
                return Err(Refusal::bad_input(format!(
                    "gaussgap: {option} {}: with several scenarios PATH must be a folder or contain {{}}, such as pages/{{}}.{ending}",
                    path.display(),
                    option = format.option(),
                    ending = format.ending()
                )));
            }
            Destination::StandardOutput | Destination::File => outputs.each[0].push((format, place(path))),
            Destination::Folder | Destination::Pattern => {
                for (index, scenario) in scenarios.iter().enumerate() {
                    outputs.each[index].push((format, Place::File(named_after(scenario, path, format))));
                }
            }
        }
    }
    check(&outputs, scenarios)?;
    Ok(outputs)
}

enum Destination {
    StandardOutput,
    File,
    Folder,
    Pattern,
}

fn destination(path: &Path) -> Destination {
    let text = path.to_string_lossy();
    if text == "-" {
        Destination::StandardOutput
    } else if text.contains("{}") {
        Destination::Pattern
    } else if path.is_dir() || text.ends_with(std::path::is_separator) {
        Destination::Folder
    } else {
        Destination::File
    }
}

fn place(path: &Path) -> Place {
    if path.as_os_str() == "-" { Place::StandardOutput } else { Place::File(path.to_owned()) }
}

/// The file of one scenario in a folder, or by a pattern with `{}`.
fn named_after(scenario: &Path, path: &Path, format: Format) -> PathBuf {
    let stem = scenario.file_stem().unwrap_or_default().to_string_lossy();
    match destination(path) {
        Destination::Pattern => PathBuf::from(path.to_string_lossy().replace("{}", &stem)),
        _ => path.join(format!("{stem}.{}", format.ending())),
    }
}

/// No file twice, no scenario overwritten, every folder there.
fn check(outputs: &Outputs, scenarios: &[PathBuf]) -> Result<(), Refusal> {
    let inputs: Vec<PathBuf> = scenarios.iter().filter_map(|path| path.canonicalize().ok()).collect();
    let all = outputs.each.iter().flatten().map(|(_, place)| place).chain(&outputs.lines);
    let mut seen: BTreeMap<PathBuf, ()> = BTreeMap::new();
    for place in all {
        let Place::File(path) = place else { continue };
        let shown = path.display();
        let folder = path.parent().filter(|folder| !folder.as_os_str().is_empty()).unwrap_or(Path::new("."));
        let Ok(real_folder) = folder.canonicalize() else {
            let line = format!("{shown}: cannot be written: there is no folder {}", folder.display());
            return Err(Refusal { status: Status::Failure, line });
        };
        let in_folder = path.file_name().map_or_else(|| real_folder.clone(), |name| real_folder.join(name));
        let real = path.canonicalize().unwrap_or(in_folder);
        if inputs.contains(&real) {
            return Err(Refusal::bad_input(format!(
                "{shown}: would overwrite a scenario that is to be assessed"
            )));
        }
        if seen.insert(real, ()).is_some() {
            return Err(Refusal::bad_input(format!("{shown}: two outputs would be written to this file")));
        }
    }
    Ok(())
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::command::arguments::{Arguments, Command};
    use clap::Parser;

    fn planned(folder: &Path, line: &str, scenarios: &[&str]) -> Result<Outputs, Refusal> {
        let line = line.replace("DIR", folder.to_str().unwrap());
        let words = ["gaussgap", "assess", "x.json"].into_iter().chain(line.split_whitespace());
        let Some(Command::Assess(arguments)) = Arguments::try_parse_from(words).unwrap().command else {
            panic!()
        };
        let scenarios: Vec<PathBuf> = scenarios.iter().map(|name| folder.join(name)).collect();
        plan(&arguments, &scenarios)
    }

    #[test]
    fn one_scenario_goes_to_the_named_files() {
        let folder = tempfile::tempdir().unwrap();
        let outputs = planned(folder.path(), "--json - --png DIR/a.png", &["plan.json"]).unwrap();
        assert!(outputs.use_standard_output() && outputs.lines.is_none());
        assert_eq!(outputs.each[0][1], (Format::Png, Place::File(folder.path().join("a.png"))));
    }

    #[test]
    fn several_need_a_folder_or_braces_for_pages_but_share_a_json_file() {
        let folder = tempfile::tempdir().unwrap();
        let outputs = planned(
            folder.path(),
            "--json DIR/all.jsonl --png DIR --svg DIR/p-{}.svg",
            &["a.json", "b.json"],
        );
        let outputs = outputs.unwrap();
        assert_eq!(outputs.lines, Some(Place::File(folder.path().join("all.jsonl"))));
        assert_eq!(outputs.each[1][0], (Format::Png, Place::File(folder.path().join("b.png"))));
        assert_eq!(outputs.each[1][1], (Format::Svg, Place::File(folder.path().join("p-b.svg"))));
        let refusal = planned(folder.path(), "--png DIR/one.png", &["a.json", "b.json"]).unwrap_err();
        assert_eq!(refusal.status, Status::BadInput);
        assert!(refusal.line.contains("pages/{}.png"), "{}", refusal.line);
    }

    #[test]
    fn clashes_and_missing_folders_are_refused_before_any_work() {
        let folder = tempfile::tempdir().unwrap();
        std::fs::create_dir_all(folder.path().join("x")).unwrap();
        std::fs::write(folder.path().join("plan.json"), "{}").unwrap();
        let refuse = |line, scenarios: &[&str]| planned(folder.path(), line, scenarios).unwrap_err();
        assert!(refuse("--png DIR", &["a.json", "x/a.json"]).line.contains("two outputs"));
        assert!(refuse("--png DIR/p --svg DIR/x/../p", &["plan.json"]).line.contains("two outputs"));
        assert!(refuse("--json DIR/plan.json", &["plan.json"]).line.contains("would overwrite a scenario"));
        assert!(refuse("--json - --svg -", &["plan.json"]).line.contains("standard output"));
        let refusal = refuse("--json DIR/none/a.json", &["plan.json"]);
        assert_eq!(refusal.status, Status::Failure);
        assert!(refusal.line.contains("there is no folder"), "{}", refusal.line);
    }
}
