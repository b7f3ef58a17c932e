//! The plan sentence across the top: its underlined words are controls, its grammar follows the claim.

use super::Asks;
use super::fields::{self, Field, Fields};
use crate::window::command::Command;
use crate::window::model::edit::{Edit, LARGEST_N};
use crate::window::model::law_kinds::round_to;
use crate::window::model::prepared::OwnUnits;
use crate::window::numbers;
use crate::window::tokens;
use egui::{Button, Id, Popup, PopupCloseBehavior, Response, RichText, Ui, WidgetInfo};
use gaussgap_conclusions::Problem;
use gaussgap_conclusions::scenario::{
    Claim, Direction, Scenario, Sides, Source, Spread, Statistic, Tolerance,
};

/// The claim kinds: the name in files, the words of the sentence, and what each is for.
const CLAIMS: [(&str, &str, &str); 6] = [
    (
        "interval",
        "report an interval for",
        "Interval: mean ± z·σ/√n or t·s/√n, coverage and misses on each side",
    ),
    ("test", "test", "Test: size, and power where a shift is planned"),
    ("threshold", "state a chance for", "Threshold: the chance that the statistic stays within a limit"),
    ("quantile", "state a quantile of", "Quantile: a high or low point of the statistic"),
    ("deviation", "bound the deviation of", "Deviation: the chance of being far from the expectation"),
    ("curve", "treat as normal", "Whole curve: every probability at once"),
];

/// What the sentence needs to know besides the scenario.
#[derive(Debug, Clone, Copy)]
pub struct Surroundings<'a> {
    /// Where the statistic lies, for starting parameters of a newly chosen claim.
    pub near: Option<OwnUnits>,
    /// What is wrong with the scenario.
    pub problems: &'a [Problem],
    /// Whether n is being played through.
    pub playing: bool,
}

/// Draws the sentence.
pub fn show(
    ui: &mut Ui,
    fields: &mut Fields,
    scenario: &Scenario,
    around: Surroundings<'_>,
    asks: &mut Asks,
) {
    let Surroundings { near, problems, playing } = around;
    ui.spacing_mut().item_spacing.y = 4.0;
    let before = fields.problems.len();
    ui.horizontal_wrapped(|ui| {
        ui.spacing_mut().item_spacing.x = 0.0;
        ui.spacing_mut().interact_size.y = 10.0;
        Sentence { ui, fields, scenario, near, asks }.write();
    });
    n_slider(ui, scenario, playing, asks);
    for (label, problem) in fields.problems.iter().skip(before) {
        super::finding::mistake(ui, &format!("{label}: {problem}"));
    }
    for problem in problems.iter().filter(|problem| is_about_plan(&problem.pointer)) {
        super::finding::mistake(
            ui,
            &format!("{}: {}", problem.pointer.trim_start_matches('/'), problem.message),
        );
    }
}

/// Whether a problem is about the sentence and not about the laws.
pub fn is_about_plan(pointer: &str) -> bool {
    let first = pointer.trim_start_matches('/').split('/').next().unwrap_or("");
    !matches!(first, "law" | "parts" | "groups" | "dependence")
}

/// The planned n on a logarithmic scale, from 1 to a million.
fn n_slider(ui: &mut Ui, scenario: &Scenario, playing: bool, asks: &mut Asks) {
    let Source::Like { n, .. } = &scenario.source else { return };
    let mut power = (*n as f64).log10();
    ui.horizontal(|ui| {
        let palette = tokens::palette(ui);
        ui.label(RichText::new("n").color(palette.muted));
        ui.spacing_mut().slider_width = (ui.available_width() - 220.0).clamp(80.0, 420.0);
        ui.spacing_mut().interact_size.y = 16.0;
        let slider = egui::Slider::new(&mut power, 0.0..=6.0).show_value(false).step_by(0.0);
        let response = ui.name_inputs("Planned n (slider, 1 to a million)", |ui| ui.add(slider));
        ui.label(RichText::new("1 to 10⁶, log scale").size(tokens::SMALL).color(palette.muted));
        if response.changed() {
            let wanted = 10f64.powf(power).round().max(1.0) as u64;
            let step = if wanted == *n && (power - (*n as f64).log10()).abs() > 1e-12 {
                if power > (*n as f64).log10() { n + 1 } else { (n - 1).max(1) }
            } else {
                wanted
            };
            asks.edit(Edit::N { slot: 0, n: step });
        }
        asks.end_step |= response.drag_stopped();
        let words = if playing { "Stop playing" } else { "Play n" };
        if ui.small_button(words).on_hover_text(Command::Play.tip()).clicked() {
            asks.command(Command::Play);
        }
    });
}

struct Sentence<'a> {
    ui: &'a mut Ui,
    fields: &'a mut Fields,
    scenario: &'a Scenario,
    near: Option<OwnUnits>,
    asks: &'a mut Asks,
}

impl Sentence<'_> {
    fn write(mut self) {
        self.say("I will ");
        self.claim_kind();
        match self.scenario.claim {
            Claim::Interval { level, sides, spread } => self.interval(level, sides, spread),
            Claim::Test { significance, sides, spread, shift } => {
                self.test(significance, sides, spread, shift)
            }
            Claim::Threshold { at, direction } => self.threshold(at, direction),
            Claim::Quantile { p } => self.quantile(p),
            Claim::Deviation { epsilon, probability } => self.deviation(epsilon, probability),
            Claim::Curve => {
                self.subject();
                self.say("; no probability may be off by more than ");
            }
        }
        self.tolerance();
        self.say(".");
    }

    /// Words, one label each so that the sentence wraps between them.
    fn say(&mut self, words: &str) {
        for word in words.split_inclusive(' ') {
            self.ui.label(RichText::new(word).size(tokens::SENTENCE));
        }
    }

    fn claim_kind(&mut self) {
        let now = self.scenario.claim.kind();
        let words = CLAIMS.iter().find(|(kind, ..)| *kind == now).map_or(now, |(_, words, _)| words);
        let options: Vec<(&str, &str)> = CLAIMS.iter().map(|(kind, _, words)| (*kind, *words)).collect();
        if let Some(kind) = choice(self.ui, "Claim", words, &options, &now) {
            self.asks.edit(Edit::Claim(claim_of(kind, self.scenario, self.near)));
            if let Some(tolerance) = tolerance_of(kind, self.scenario) {
                self.asks.edit(Edit::Tolerance(tolerance));
            }
        }
        self.say(" ");
    }

    /// "the mean of 40 boarding times"
    fn subject(&mut self) {
        match &self.scenario.source {
            Source::Like { n, .. } => {
                self.say("the ");
                let words = if self.scenario.statistic == Statistic::Mean { "mean" } else { "sum" };
                let options = [(Statistic::Mean, "mean"), (Statistic::Sum, "sum")];
                if let Some(statistic) =
                    choice(self.ui, "Statistic", words, &options, &self.scenario.statistic)
                {
                    self.asks.edit(Edit::Statistic(statistic));
                }
                self.say(" of ");
                self.n(0, *n, "Planned n");
                self.say(" ");
                self.quantity(*n);
            }
            Source::Parts { parts } => {
                let total = self.scenario.source.total();
                let kinds =
                    if parts.len() == 1 { "kind".to_owned() } else { format!("{} kinds", parts.len()) };
                self.say(&format!("the sum of {} ", numbers::thousands(total as f64)));
                self.quantity(total);
                self.say(&format!(" of {kinds}"));
            }
            Source::Groups { groups } => {
                let (first, second) = (groups[0].n, groups[1].n);
                self.say("the difference of the means of ");
                self.n(1, second, "n of the second group");
                self.say(" and ");
                self.n(0, first, "n of the first group");
                self.say(" ");
                self.quantity(first.saturating_add(second));
            }
        }
    }

    fn n(&mut self, slot: usize, n: u64, label: &str) {
        let spec = Field::word(Id::unique(("n", slot)), label);
        let n = i64::try_from(n).unwrap_or(i64::MAX);
        let typed = fields::whole(self.ui, self.fields, &spec, n, (1, LARGEST_N as i64));
        if let Some(n) = typed.and_then(|n| u64::try_from(n).ok()) {
            self.asks.edit(Edit::N { slot, n });
        }
    }

    fn quantity(&mut self, n: u64) {
        let quantity = self.scenario.quantity.clone().unwrap_or_default();
        let name = quantity.name.clone().unwrap_or_default();
        let words = match (name.is_empty(), n) {
            (true, 1) => "value".to_owned(),
            (true, _) => "values".to_owned(),
            (false, 1) => name.clone(),
            (false, _) => plural(&name),
        };
        let response = word_button(self.ui, "Quantity", &words);
        let (fields, asks) = (&mut *self.fields, &mut *self.asks);
        Popup::menu(&response).close_behavior(PopupCloseBehavior::CloseOnClickOutside).show(|ui| {
            ui.set_width(220.0);
            ui.label("Name, in the singular");
            let spec = Field::card(Id::unique("quantity name"), "Name of the quantity", 210.0);
            if let Some(name) = fields::text(ui, fields, &spec, &name) {
                asks.edit(Edit::QuantityName(name));
            }
            ui.label("Unit");
            let spec = Field::card(Id::unique("quantity unit"), "Unit of the quantity", 210.0);
            if let Some(unit) = fields::text(ui, fields, &spec, quantity.unit.as_deref().unwrap_or("")) {
                asks.edit(Edit::QuantityUnit(unit));
            }
        });
    }

    fn interval(&mut self, level: f64, sides: Sides, spread: Spread) {
        self.subject();
        self.say(", at a level of ");
        let spec = Field::word(Id::unique("level"), "Level");
        if let Some(level) = fields::percent(self.ui, self.fields, &spec, level) {
            self.asks.edit(Edit::Claim(Claim::Interval { level, sides, spread }));
        }
        self.say(", ");
        if let Some(sides) = self.sides(sides) {
            self.asks.edit(Edit::Claim(Claim::Interval { level, sides, spread }));
        }
        self.say(", with the spread ");
        if let Some(spread) = self.spread(spread) {
            self.asks.edit(Edit::Claim(Claim::Interval { level, sides, spread }));
        }
        self.say("; coverage may be off by ");
    }

    fn test(&mut self, significance: f64, sides: Sides, spread: Spread, shift: Option<f64>) {
        let claim = |significance, sides, spread, shift| {
            Edit::Claim(Claim::Test { significance, sides, spread, shift })
        };
        self.subject();
        self.say(" at a significance of ");
        let spec = Field::word(Id::unique("significance"), "Significance");
        if let Some(significance) = fields::percent(self.ui, self.fields, &spec, significance) {
            self.asks.edit(claim(significance, sides, spread, shift));
        }
        self.say(", ");
        if let Some(sides) = self.sides(sides) {
            self.asks.edit(claim(significance, sides, spread, shift));
        }
        self.say(", with the spread ");
        if let Some(spread) = self.spread(spread) {
            self.asks.edit(claim(significance, sides, spread, shift));
        }
        self.say(", planning for a shift of ");
        let spec = Field { hint: "no", ..Field::word(Id::unique("shift"), "Planned shift in sd") };
        if let Some(shift) = fields::optional_real(self.ui, self.fields, &spec, shift) {
            self.asks.edit(claim(significance, sides, spread, shift));
        }
        let compared = if shift.is_some() { "the power" } else { "the size" };
        self.say(&format!(" sd; {compared} may be off by "));
    }

    fn threshold(&mut self, at: f64, direction: Direction) {
        self.subject();
        self.say(" being ");
        let words = if direction == Direction::AtMost { "at most" } else { "at least" };
        let options = [(Direction::AtMost, "at most"), (Direction::AtLeast, "at least")];
        if let Some(direction) = choice(self.ui, "Direction", words, &options, &direction) {
            self.asks.edit(Edit::Claim(Claim::Threshold { at, direction }));
        }
        self.say(" ");
        let spec = Field::word(Id::unique("threshold"), "Threshold");
        if let Some(at) = fields::real(self.ui, self.fields, &spec, at) {
            self.asks.edit(Edit::Claim(Claim::Threshold { at, direction }));
        }
        self.unit();
        self.say("; the chance may be off by ");
    }

    fn quantile(&mut self, p: f64) {
        self.subject();
        self.say(": the ");
        let spec = Field::word(Id::unique("quantile p"), "Quantile");
        if let Some(p) = fields::percent(self.ui, self.fields, &spec, p) {
            self.asks.edit(Edit::Claim(Claim::Quantile { p }));
        }
        self.say(" point; it may be off by ");
    }

    fn deviation(&mut self, epsilon: f64, probability: Option<f64>) {
        self.subject();
        self.say(" from its expectation: more than ");
        let spec = Field::word(Id::unique("epsilon"), "Deviation");
        if let Some(epsilon) = fields::real(self.ui, self.fields, &spec, epsilon) {
            self.asks.edit(Edit::Claim(Claim::Deviation { epsilon, probability }));
        }
        self.unit();
        self.say(" with a chance of at most ");
        let spec =
            Field { hint: "any", ..Field::word(Id::unique("deviation p"), "Largest chance of deviating") };
        if let Some(probability) = fields::optional_real(self.ui, self.fields, &spec, probability) {
            self.asks.edit(Edit::Claim(Claim::Deviation { epsilon, probability }));
        }
        self.say("; that chance may be off by ");
    }

    fn unit(&mut self) {
        if let Some(unit) = self.scenario.quantity.as_ref().and_then(|quantity| quantity.unit.as_deref()) {
            self.say(&format!(" {unit}"));
        }
    }

    fn sides(&mut self, sides: Sides) -> Option<Sides> {
        let options =
            [(Sides::Two, "two-sided"), (Sides::Lower, "lower side only"), (Sides::Upper, "upper side only")];
        let words = options.iter().find(|(known, _)| *known == sides).map_or("two-sided", |(_, words)| words);
        choice(self.ui, "Sides", words, &options, &sides)
    }

    fn spread(&mut self, spread: Spread) -> Option<Spread> {
        let options = [(Spread::Known, "known beforehand"), (Spread::Estimated, "estimated from the data")];
        let words = options.iter().find(|(known, _)| *known == spread).map_or("known", |(_, words)| words);
        choice(self.ui, "Spread", words, &options, &spread)
    }

    fn tolerance(&mut self) {
        let sd = matches!(self.scenario.claim, Claim::Quantile { .. });
        let spec = Field::word(Id::unique("tolerance"), "Tolerance");
        let (amount, relative) = match self.scenario.tolerance {
            Tolerance::Absolute(amount) => (amount, false),
            Tolerance::Relative(amount) => (amount, true),
        };
        let scale = if sd && !relative { 1.0 } else { 100.0 };
        let make = |amount: f64, relative| {
            Edit::Tolerance(if relative { Tolerance::Relative(amount) } else { Tolerance::Absolute(amount) })
        };
        let write = |amount: &f64| {
            if scale == 1.0 { numbers::plain(*amount) } else { fields::percent_digits(*amount) }
        };
        let read = |text: &str| {
            let plain = text.contains('%') || scale == 1.0;
            let amount =
                if plain { numbers::read_real(text)? } else { numbers::read_real(&format!("{text}%"))? };
            if amount > 0.0 { Ok(amount) } else { Err("must be greater than 0".to_owned()) }
        };
        let typed = fields::field(self.ui, self.fields, &spec, &write(&amount), read, write).1;
        if let Some(amount) = typed {
            self.asks.edit(make(amount, relative));
        }
        self.say(" ");
        let one = (amount * scale - 1.0).abs() < 1e-12;
        let absolute = match (sd, one) {
            (true, _) => "sd of the sum",
            (false, true) => "percentage point",
            (false, false) => "percentage points",
        };
        let options = [(false, absolute), (true, "% of the nominal number")];
        let words = if relative { options[1].1 } else { absolute };
        if let Some(relative) = choice(self.ui, "Tolerance is in", words, &options, &relative) {
            self.asks.edit(make(amount, relative));
        }
    }
}

/// The plural of a name: enough of English for names of quantities.
pub fn plural(name: &str) -> String {
    let ends = |suffixes: &[&str]| suffixes.iter().any(|suffix| name.ends_with(suffix));
    if name.ends_with('y') && !ends(&["ay", "ey", "oy", "uy"]) {
        return format!("{}ies", &name[..name.len() - 1]);
    }
    if ends(&["s", "x", "z", "ch", "sh"]) { format!("{name}es") } else { format!("{name}s") }
}

/// A claim of a kind with starting parameters for the present plan.
fn claim_of(kind: &str, scenario: &Scenario, near: Option<OwnUnits>) -> Claim {
    let near = near.unwrap_or(OwnUnits { center: 0.0, unit: 1.0 });
    let spread = scenario.claim.spread().unwrap_or(if matches!(scenario.source, Source::Parts { .. }) {
        Spread::Known
    } else {
        Spread::Estimated
    });
    match kind {
        "interval" => Claim::Interval { level: 0.95, sides: Sides::Two, spread },
        "test" => Claim::Test { significance: 0.05, sides: Sides::Two, spread, shift: None },
        "threshold" => {
            Claim::Threshold { at: round_to(near.center + 2.0 * near.unit, 3), direction: Direction::AtMost }
        }
        "quantile" => Claim::Quantile { p: 0.99 },
        "deviation" => Claim::Deviation { epsilon: round_to(2.0 * near.unit, 2), probability: None },
        _ => Claim::Curve,
    }
}

/// A tolerance that suits a kind better than the present one, where the unit changes.
fn tolerance_of(kind: &str, scenario: &Scenario) -> Option<Tolerance> {
    let was_quantile = matches!(scenario.claim, Claim::Quantile { .. });
    let absolute = matches!(scenario.tolerance, Tolerance::Absolute(_));
    match (kind == "quantile", was_quantile) {
        (true, false) if absolute => Some(Tolerance::Absolute(0.05)),
        (false, true) if absolute => Some(Tolerance::Absolute(0.01)),
        _ => None,
    }
}

/// An underlined word that can be pressed.
pub fn word_button(ui: &mut Ui, label: &str, words: &str) -> Response {
    let palette = tokens::palette(ui);
    let text = RichText::new(words).font(tokens::bold(tokens::SENTENCE)).color(palette.accent);
    ui.spacing_mut().button_padding = egui::vec2(1.0, 0.0);
    let response = ui.add(Button::new(text).frame(false));
    let name = format!("{label}: {words}");
    response.widget_info(|| WidgetInfo::labeled(egui::accesskit::Role::Button, true, &name));
    let strong = response.hovered() || response.has_focus();
    fields::underline(
        ui,
        &response,
        if strong { palette.accent } else { palette.accent.gamma_multiply(0.6) },
    );
    response
}

/// An underlined word that opens a list to choose from.
pub fn choice<T: Clone + PartialEq>(
    ui: &mut Ui,
    label: &str,
    words: &str,
    options: &[(T, &str)],
    now: &T,
) -> Option<T> {
    let response = word_button(ui, label, words);
    let mut chosen = None;
    Popup::menu(&response).show(|ui| {
        for (value, words) in options {
            if ui.selectable_label(value == now, *words).clicked() {
                chosen = Some(value.clone());
            }
        }
    });
    chosen.filter(|chosen| chosen != now)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn plurals() {
        for (one, many) in [
            ("boarding time", "boarding times"),
            ("delay", "delays"),
            ("penalty", "penalties"),
            ("loss", "losses"),
            ("batch", "batches"),
        ] {
            assert_eq!(plural(one), many);
        }
    }

    #[test]
    fn problems_are_told_apart_by_their_place() {
        assert!(is_about_plan("/n") && is_about_plan("/claim/level") && is_about_plan(""));
        assert!(!is_about_plan("/law/p") && !is_about_plan("/parts/0/law/mean"));
    }
}
