//! Tests of the window through its accessibility tree, with the real engine.

mod features;
mod random;

use super::Workbench;
use super::model::edit::planned_n;
use super::model::examples;
use super::session::Session;
use egui::accesskit::Role;
use egui_kittest::Harness;
use egui_kittest::kittest::Queryable as _;
use gaussgap_conclusions::scenario::Scenario;
use std::sync::Arc;
use std::time::{Duration, Instant};

type Window = Harness<'static, Workbench>;

/// A window of a size on a session, with the real engine.
fn window_on(session: Session, size: [f32; 2]) -> Window {
    let workbench = Workbench::new(session, Arc::new(gaussgap_conclusions::assess));
    let draw = |ui: &mut egui::Ui, workbench: &mut Workbench| {
        workbench.logic(&ui.ctx().clone());
        workbench.ui(ui);
    };
    let builder = Harness::builder().with_size(size).with_context_setup(Workbench::prepare);
    let mut window = builder.build_ui_state(draw, workbench);
    window.run_steps(3);
    window
}

/// A window on a scenario.
fn window(scenario: &Scenario) -> Window {
    window_on(Session { scenario: Some(scenario.to_json()), ..Session::default() }, [1400.0, 900.0])
}

fn no_shows() -> Scenario {
    let text = examples::EXAMPLES.iter().find(|e| e.file == "no-shows.json").expect("bundled").text;
    Scenario::parse(text).expect("bundled scenarios are good")
}

/// Steps until a condition holds.
fn wait_for(window: &mut Window, what: &str, good: impl Fn(&Workbench) -> bool) {
    let start = Instant::now();
    while !good(window.state()) {
        assert!(start.elapsed() < Duration::from_secs(60), "waited too long for {what}");
        std::thread::sleep(Duration::from_millis(10));
        window.step();
    }
    window.run_steps(2);
}

fn current(workbench: &Workbench) -> bool {
    workbench.latest().is_some_and(|(_, current, _)| current)
}

/// Types a text into a field in place of what it holds.
fn retype(window: &mut Window, role: Role, label: &str, text: &str) {
    window.get_by_role_and_label(role, label).focus();
    window.step();
    window.key_press_modifiers(egui::Modifiers::COMMAND, egui::Key::A);
    window.step();
    window.get_by_role_and_label(role, label).type_text(text);
    window.run_steps(2);
}

#[test]
fn typing_an_n_changes_the_plan_and_the_finding() {
    let mut window = window(&no_shows());
    wait_for(&mut window, "the first answer", current);
    let before = window.state().latest().expect("an answer").0.report.clone();
    retype(&mut window, Role::TextInput, "Planned n", "12,000");
    assert_eq!(planned_n(&window.state().scenario().source), 12_000);
    wait_for(&mut window, "the new answer", current);
    let after = window.state().latest().expect("an answer").0.report.clone();
    let distance = |report: &gaussgap_conclusions::report::Report| {
        report.distance.kolmogorov.expect("finite variance").value
    };
    assert!(distance(&after) < distance(&before) / 5.0);
    window.get_by_label(&after.verdict.because);
}

#[test]
fn a_mistake_is_named_and_the_last_good_finding_stays() {
    let mut window = window(&no_shows());
    wait_for(&mut window, "the first answer", current);
    let because = window.state().latest().expect("an answer").0.report.verdict.because.clone();
    retype(&mut window, Role::TextInput, "Planned n", "12,00x");
    window.get_by_label_contains("Planned n: expected a number such as");
    window.get_by_label("The figures belong to the previous input.");
    window.get_by_label(&because);
    retype(&mut window, Role::TextInput, "Bernoulli: probability p", "2.5");
    let has_problem = |workbench: &Workbench| !workbench.findings.problems.is_empty();
    wait_for(&mut window, "the engine's refusal", has_problem);
    window.get_by_label(&because);
    retype(&mut window, Role::TextInput, "Bernoulli: probability p", "2.5%");
    wait_for(&mut window, "an answer again", |workbench| !has_problem(workbench) && current(workbench));
}

#[test]
fn undo_and_redo_from_the_keyboard() {
    let mut window = window(&no_shows());
    retype(&mut window, Role::TextInput, "Planned n", "77");
    assert_eq!(planned_n(&window.state().scenario().source), 77);
    window.key_press_modifiers(egui::Modifiers::COMMAND, egui::Key::Z);
    window.run_steps(2);
    assert_eq!(planned_n(&window.state().scenario().source), 120);
    window.key_press_modifiers(egui::Modifiers::COMMAND, egui::Key::Y);
    window.run_steps(2);
    assert_eq!(planned_n(&window.state().scenario().source), 77);
}

#[test]
fn another_law_is_chosen_and_a_step_is_added() {
    let mut window = window(&no_shows());
    wait_for(&mut window, "the first answer", current);
    window.get_by_role_and_label(Role::ComboBox, "Base law").click();
    window.run_steps(3);
    window.get_by_label("Exponential").click();
    window.run_steps(3);
    wait_for(&mut window, "the answer for the new law", current);
    window.get_by_label("+ then …").click();
    window.run_steps(3);
    window.get_by_label("Capped").click();
    window.run_steps(3);
    let text = window.state().scenario().to_json();
    assert!(text.contains("\"cap\"") && text.contains("\"exponential\""), "{text}");
    wait_for(&mut window, "the answer for the capped law", current);
}

#[test]
fn the_report_is_exported() {
    let folder = tempfile::tempdir().expect("a folder");
    let mut window = window(&no_shows());
    wait_for(&mut window, "the full answer", |workbench| {
        workbench.latest().is_some_and(|(_, now, full)| now && full)
    });
    window.key_press_modifiers(egui::Modifiers::COMMAND, egui::Key::E);
    window.run_steps(3);
    let path = folder.path().join("by-enter.png");
    retype(&mut window, Role::TextInput, "Path", &path.display().to_string());
    window.key_press(egui::Key::Enter);
    window.run_steps(3);
    wait_for(&mut window, "the picture", |_| path.exists());
    for (kind, ending) in
        [("Report (JSON)", "json"), ("Curves (CSV)", "csv"), ("Page as vectors (SVG)", "svg")]
    {
        window.key_press_modifiers(egui::Modifiers::COMMAND, egui::Key::E);
        window.run_steps(3);
        window.get_by_label(kind).click();
        window.run_steps(3);
        let path = folder.path().join(format!("out.{ending}"));
        retype(&mut window, Role::TextInput, "Path", &path.display().to_string());
        window.get_by_label("Write the file").click();
        window.run_steps(3);
        wait_for(&mut window, "the file", |_| path.exists());
        assert!(std::fs::metadata(&path).expect("written").len() > 500);
    }
    let text = std::fs::read_to_string(folder.path().join("out.json")).expect("written");
    assert!(text.contains("gaussgap-report/1"));
}

#[test]
fn saving_guards_and_comes_back() {
    let folder = tempfile::tempdir().expect("a folder");
    let path = folder.path().join("plan.json");
    let mut window = window(&no_shows());
    retype(&mut window, Role::TextInput, "Planned n", "90");
    window.key_press_modifiers(egui::Modifiers::COMMAND, egui::Key::N);
    window.run_steps(3);
    window.get_by_label("Save the changes to this plan?");
    window.get_by_label("Cancel").click();
    window.run_steps(3);
    window.key_press_modifiers(egui::Modifiers::COMMAND, egui::Key::S);
    window.run_steps(3);
    retype(&mut window, Role::TextInput, "Path", &path.display().to_string());
    window.get_by_label("Save the file").click();
    window.run_steps(3);
    let read = Scenario::parse(&std::fs::read_to_string(&path).expect("saved")).expect("a scenario");
    assert_eq!(read, **window.state().scenario());
    let session = window.state().session();
    let again = window_on(session, [1000.0, 680.0]);
    assert_eq!(again.state().scenario(), window.state().scenario());
}

#[test]
fn a_bad_file_is_named_and_nothing_is_lost() {
    let folder = tempfile::tempdir().expect("a folder");
    let path = folder.path().join("bad.json");
    std::fs::write(&path, r#"{"format":"gaussgap-scenario/1","law":{"kind":"exponential","mean":1},"n":0}"#)
        .expect("written");
    let mut window = window(&no_shows());
    window.state_mut().open_file(&path);
    window.run_steps(3);
    window.get_by_label("This file cannot be opened");
    window.get_by_label_contains("/n");
    assert_eq!(planned_n(&window.state().scenario().source), 120);
}

#[test]
fn every_bundled_scenario_opens_from_the_start_page_in_both_sizes() {
    for size in [[1400.0, 900.0], [1000.0, 680.0]] {
        for example in examples::EXAMPLES {
            let title = Scenario::parse(example.text).expect("good").title.expect("a title");
            let mut window = window_on(Session::default(), size);
            window.get_by_role_and_label(Role::Button, &title).click_accesskit();
            window.run_steps(4);
            assert_eq!(window.state().scenario().title.as_ref(), Some(&title));
        }
    }
}

#[test]
fn pins_and_tables_and_the_overview_of_keys() {
    let mut window = window(&no_shows());
    wait_for(&mut window, "the first answer", current);
    window.get_by_label("Pin").click();
    window.run_steps(3);
    retype(&mut window, Role::TextInput, "Planned n", "500");
    wait_for(&mut window, "the second answer", current);
    window.get_by_label("present plan");
    window.get_by_label("Remove pin 1");
    window.get_by_label("Fit: Table").click();
    window.run_steps(3);
    window.get_by_label("P(Z ≤ z)");
    window.key_press(egui::Key::F1);
    window.run_steps(3);
    window.get_by_label("Undo the last edit");
}
