//! Tests of playing, zooming, copying, rows, bars, the handle and the pins, through the accessibility tree.

use super::*;
use crate::window::figures::fit;
use gaussgap_conclusions::scenario::Source;
use gaussgap_simulation::law::LawSpec;

fn press(window: &mut Window, label: &str) {
    window.get_by_role_and_label(Role::Button, label).click_accesskit();
    window.run_steps(3);
}

fn n_of(window: &Window) -> u64 {
    planned_n(&window.state().scenario().source)
}

fn with_law(law: LawSpec) -> Window {
    let mut scenario = no_shows();
    scenario.source = Source::Like { law, n: 40, dependence: None };
    window(&scenario)
}

fn law(window: &Window) -> LawSpec {
    match &window.state().scenario().source {
        Source::Like { law, .. } => law.clone(),
        other => panic!("like summands, not {other:?}"),
    }
}

#[test]
fn playing_steps_n_stops_and_is_one_step_of_undo() {
    let mut window = window(&no_shows());
    wait_for(&mut window, "the first answer", current);
    press(&mut window, "Play n");
    assert!(window.state().is_playing());
    wait_for(&mut window, "two steps of n", |workbench| planned_n(&workbench.scenario().source) > 140);
    press(&mut window, "Stop playing");
    let stopped = n_of(&window);
    assert!(!window.state().is_playing());
    window.run_steps(100);
    assert_eq!(n_of(&window), stopped);
    window.key_press_modifiers(egui::Modifiers::COMMAND, egui::Key::Z);
    window.run_steps(2);
    assert_eq!(n_of(&window), 120);
}

#[test]
fn zooming_panning_and_the_whole_axis_again() {
    let mut window = window(&no_shows());
    wait_for(&mut window, "the first answer", current);
    press(&mut window, "Zoom in");
    press(&mut window, "Zoom in");
    let (from, to) = window.state().board.shown_range();
    assert!((to - from - 8.4 / 2.25).abs() < 1e-9, "{from} to {to}");
    let pan = egui::Modifiers { shift: true, ..egui::Modifiers::ALT };
    window.key_press_modifiers(pan, egui::Key::ArrowRight);
    window.run_steps(2);
    assert!(window.state().board.shown_range().0 > from);
    press(&mut window, "Zoom out");
    press(&mut window, "Whole axis");
    assert_eq!(window.state().board.shown_range(), fit::WHOLE);
}

#[test]
fn the_page_is_copied_as_a_picture_and_a_figure_as_text() {
    let mut window = window(&no_shows());
    wait_for(&mut window, "the first answer", current);
    let keys = egui::Modifiers { shift: true, ..egui::Modifiers::COMMAND };
    window.key_press_modifiers(keys, egui::Key::P);
    window.step();
    let said = |workbench: &Workbench| {
        workbench.notice.as_ref().is_some_and(|notice| notice.text.contains("as a picture"))
    };
    wait_for(&mut window, "the picture", said);
    press(&mut window, "Enlarge: Fit");
    window.get_by_role_and_label(Role::Button, "Copy the table of Fit").click_accesskit();
    window.step();
    let copied = window.output().platform_output.commands.iter().any(|command| {
        matches!(command, egui::OutputCommand::CopyText(text) if text.contains("P(Z < z)\tP(Z ≤ z)"))
    });
    assert!(copied, "{:?}", window.output().platform_output.commands);
}

#[test]
fn rows_pasted_from_a_spreadsheet_become_the_table() {
    let mut window = with_law(LawSpec::Table { values: vec![0.0, 1.0], weights: vec![1.0, 1.0] });
    let label = "Table of values: value and weight a line";
    retype(&mut window, Role::MultilineTextInput, label, "faults\tdays\n0\t80\n1\t15\n6\t5");
    assert_eq!(law(&window), LawSpec::Table { values: vec![0.0, 1.0, 6.0], weights: vec![80.0, 15.0, 5.0] });
    retype(&mut window, Role::MultilineTextInput, label, "0\t80\n1 x");
    window.get_by_label_contains("line 2: expected a number");
}

#[test]
fn a_bar_of_the_histogram_is_stepped_and_dragged() {
    let start = LawSpec::Histogram { edges: vec![0.0, 1.0, 2.0], weights: vec![5.0, 5.0] };
    let mut window = with_law(start);
    let label = "Weight of the bar from 0 to 1";
    window.get_by_label(label).focus();
    window.run_steps(2);
    window.key_press(egui::Key::ArrowUp);
    window.run_steps(2);
    let LawSpec::Histogram { weights, .. } = law(&window) else { panic!("a histogram") };
    assert!(weights[0] > 5.0 && weights[1] == 5.0, "{weights:?}");
    let rect = window.get_by_label(label).rect();
    window.drag_at(rect.center());
    window.run_steps(2);
    let low = egui::pos2(rect.center().x, rect.bottom() - rect.height() * 0.1);
    window.hover_at(low);
    window.run_steps(2);
    window.drop_at(low);
    window.run_steps(2);
    let LawSpec::Histogram { weights, .. } = law(&window) else { panic!("a histogram") };
    assert!(weights[0] < 1.0 && weights[0] > 0.3 && weights[1] == 5.0, "{weights:?}");
}

#[test]
fn the_handle_in_growth_follows_the_arrow_keys() {
    let mut window = window(&no_shows());
    wait_for(&mut window, "the first answer", current);
    window.get_by_label("Planned n (handle in Growth)").focus();
    window.run_steps(2);
    window.key_press(egui::Key::ArrowRight);
    window.run_steps(2);
    assert_eq!(n_of(&window), 121);
    window.key_press_modifiers(egui::Modifiers::SHIFT, egui::Key::ArrowLeft);
    window.run_steps(2);
    assert_eq!(n_of(&window), 109);
}

#[test]
fn pins_are_renamed_moved_restored_and_removed() {
    let mut window = window(&no_shows());
    wait_for(&mut window, "the first answer", current);
    press(&mut window, "Pin");
    retype(&mut window, Role::TextInput, "Planned n", "500");
    wait_for(&mut window, "the second answer", current);
    press(&mut window, "Pin");
    retype(&mut window, Role::TextInput, "Name of pin 2", "larger ferry");
    press(&mut window, "Move pin 2 up");
    let names = |window: &Window| -> Vec<String> {
        window.state().pins.all().iter().map(|pin| pin.name.clone()).collect()
    };
    assert_eq!(names(&window)[0], "larger ferry");
    press(&mut window, "Go back to the plan of pin 2");
    assert_eq!(n_of(&window), 120);
    press(&mut window, "Remove pin 2");
    assert_eq!(names(&window), ["larger ferry"]);
}
