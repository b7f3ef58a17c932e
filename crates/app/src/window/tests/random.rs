//! Random actions with a seed: no panic, no lost step of undo, no stuck work. A few thousand in the test, more with
//! `GAUSSGAP_ACTIONS`; `GAUSSGAP_SEED` chooses another sequence.

use super::super::Workbench;
use super::super::command;
use super::super::panels::dialogs::Dialog;
use super::super::session::Session;
use super::super::work::Engine;
use super::no_shows;
use egui::accesskit::Role;
use egui::{Event, Modifiers, PointerButton, pos2, vec2};
use egui_kittest::Harness;
use egui_kittest::kittest::NodeT as _;
use gaussgap_conclusions::{AssessError, Effort, Problem, assess};
use gaussgap_simulation::work::Work;
use std::sync::Arc;
use std::time::{Duration, Instant};

/// A small generator of pseudorandom numbers (Steele, Lea and Flood 2014, SplitMix64).
struct Dice(u64);

impl Dice {
    fn next(&mut self) -> u64 {
        self.0 = self.0.wrapping_add(0x9E37_79B9_7F4A_7C15);
        let mut z = self.0;
        z = (z ^ (z >> 30)).wrapping_mul(0xBF58_476D_1CE4_E5B9);
        z = (z ^ (z >> 27)).wrapping_mul(0x94D0_49BB_1331_11EB);
        z ^ (z >> 31)
    }

    fn below(&mut self, end: usize) -> usize {
        (self.next() % end.max(1) as u64) as usize
    }
}

/// Answers at once with figures of one plan under the asked scenario; refuses some, as a real one would.
fn quick_engine() -> Engine {
    let report = assess(&no_shows(), Effort::FULL, &Work::new()).expect("a good scenario");
    Arc::new(move |scenario, _, work| {
        if work.is_cancelled() {
            return Err(AssessError::Cancelled(gaussgap_simulation::work::Cancelled));
        }
        if scenario.source.total().is_multiple_of(13) {
            let pointer = "/n".to_owned();
            return Err(AssessError::Scenario(vec![Problem { pointer, message: "refused".to_owned() }]));
        }
        let mut report = report.clone();
        report.scenario = scenario.clone();
        Ok(report)
    })
}

/// What is typed into fields.
const TEXTS: [&str; 12] =
    ["7", "2.5%", "1e-4", "12,000", "x", "", "-3", "0", "1e300", "é ∼ ̂", "0.5\t3\n1 2", "999999999999"];

/// What would write files is left alone.
const NOT_PRESSED: [&str; 3] = ["Save the file", "Write the file", "Take the column"];

fn act(window: &mut Harness<'static, Workbench>, dice: &mut Dice) {
    let size = window.ctx.content_rect().size();
    let place =
        |dice: &mut Dice| pos2(dice.below(size.x as usize) as f32, dice.below(size.y as usize) as f32);
    match dice.below(10) {
        0..=3 => {
            // Press a widget, wherever it is.
            let nodes: Vec<_> = window
                .root()
                .children_recursive()
                .filter(|node| {
                    let node = node.accesskit_node();
                    let label = node.label().unwrap_or_default();
                    matches!(node.role(), Role::Button | Role::ComboBox | Role::CheckBox | Role::RadioButton)
                        && !NOT_PRESSED.contains(&label.as_str())
                })
                .collect();
            if let Some(node) = nodes.get(dice.below(nodes.len())) {
                node.click_accesskit();
            }
        }
        4 | 5 => {
            let fields: Vec<_> = window
                .root()
                .children_recursive()
                .filter(|node| {
                    matches!(node.accesskit_node().role(), Role::TextInput | Role::MultilineTextInput)
                })
                .collect();
            let text = TEXTS[dice.below(TEXTS.len())];
            if let Some(node) = fields.get(dice.below(fields.len())) {
                node.focus();
                if dice.below(2) == 0 {
                    window.key_press_modifiers(Modifiers::COMMAND, egui::Key::A);
                }
                window.event(Event::Text(text.to_owned()));
            }
        }
        6 | 7 => {
            let (_, keys, _) = command::ALL[dice.below(command::ALL.len())];
            if let Some(keys) = keys.get(dice.below(keys.len())) {
                window.key_press_modifiers(keys.0, keys.1);
            }
        }
        // A dialog that asks for a file is left alone by the pointer, which might press what writes it.
        8 if matches!(window.state().dialog, Some(Dialog::Path(_))) => {}
        8 => {
            let at = place(dice);
            let to = at + vec2(dice.below(200) as f32 - 100.0, dice.below(120) as f32 - 60.0);
            let button = |pos, pressed| Event::PointerButton {
                pos,
                button: PointerButton::Primary,
                pressed,
                modifiers: Modifiers::NONE,
            };
            window.event(Event::PointerMoved(at));
            window.event(button(at, true));
            window.step();
            window.event(Event::PointerMoved(to));
            window.step();
            window.event(button(to, false));
        }
        _ => {
            window.event(Event::PointerMoved(place(dice)));
            window.event(Event::Zoom(if dice.below(2) == 0 { 0.8 } else { 1.25 }));
        }
    }
}

#[test]
fn random_actions_break_nothing() {
    let number =
        |name: &str, usual: u64| std::env::var(name).ok().and_then(|text| text.parse().ok()).unwrap_or(usual);
    let (actions, seed) = (number("GAUSSGAP_ACTIONS", 2000), number("GAUSSGAP_SEED", 5));
    let mut dice = Dice(seed);
    let session = Session { scenario: Some(no_shows().to_json()), ..Session::default() };
    let workbench = Workbench::new(session, quick_engine());
    let draw = |ui: &mut egui::Ui, workbench: &mut Workbench| {
        workbench.logic(&ui.ctx().clone());
        workbench.ui(ui);
    };
    let builder = Harness::builder().with_size([1000.0, 680.0]).with_context_setup(Workbench::prepare);
    let mut window = builder.build_ui_state(draw, workbench);
    window.run_steps(2);
    let mut edits = 0;
    for action in 0..actions {
        let (before, path) = (Arc::clone(window.state().scenario()), window.state().document.revision());
        act(&mut window, &mut dice);
        window.step();
        if window.state().dialog.is_some() {
            // A dialog that has just opened is drawn, so that what is pressed next is what it shows.
            window.step();
        }
        let workbench = window.state_mut();
        assert!(
            workbench.document.path().is_none(),
            "action {action} of seed {seed}: a file was opened or written"
        );
        let changed = workbench.document.revision() != path && *workbench.scenario() != before;
        // An opened scenario starts a history of its own; everything else can be taken back.
        let steps = workbench.document.can_undo() || workbench.document.can_redo();
        if changed && steps && workbench.document.can_undo() {
            edits += 1;
            let now = Arc::clone(workbench.scenario());
            assert!(workbench.document.undo() && workbench.document.redo());
            assert_eq!(*workbench.scenario(), now, "action {action} of seed {seed}");
        }
    }
    assert!(edits > actions / 50, "only {edits} edits");
    // All the way back and forth again.
    let workbench = window.state_mut();
    let last = Arc::clone(workbench.scenario());
    let mut steps = 0;
    while workbench.document.undo() {
        steps += 1;
    }
    while workbench.document.redo() {
        steps -= 1;
    }
    assert_eq!((steps, &last), (0, workbench.scenario()));
    // Work comes to its end.
    let start = Instant::now();
    while window.state().worker.as_ref().is_some_and(super::super::work::Worker::is_busy) {
        assert!(start.elapsed() < Duration::from_secs(20), "the work is stuck (seed {seed})");
        std::thread::sleep(Duration::from_millis(5));
        window.step();
    }
}
