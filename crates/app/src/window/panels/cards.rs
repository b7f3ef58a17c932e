//! Law cards on the left: a base law, then what is done to it, as a stack; facts and a picture at the bottom.

use super::fields::{self, Field, Fields, Look};
use super::{Ask, Asks, law_picture};
use crate::window::figures::View;
use crate::window::model::edit::{Edit, LARGEST_N};
use crate::window::model::law_kinds::{self, Near};
use crate::window::model::law_parameters::{self, Style, Value};
use crate::window::model::law_tree::{self, Place};
use crate::window::numbers;
use crate::window::tokens;
use egui::{ComboBox, Frame, Id, Margin, RichText, Stroke, Ui};
use gaussgap_conclusions::Problem;
use gaussgap_conclusions::scenario::{Dependence, Group, Part, Scenario, Source};
use gaussgap_simulation::law::{LawSpec, MixturePart};

/// Everything the cards are drawn from.
pub struct Cards<'a> {
    /// The texts of the fields.
    pub fields: &'a mut Fields,
    /// The scenario.
    pub scenario: &'a Scenario,
    /// What is wrong with it.
    pub problems: &'a [Problem],
    /// The latest answer, if there is one.
    pub view: Option<&'a View<'a>>,
    /// What is asked for.
    pub asks: &'a mut Asks,
}

impl Cards<'_> {
    /// Draws all cards.
    pub fn show(&mut self, ui: &mut Ui) {
        self.source_shape(ui);
        match &self.scenario.source {
            Source::Like { law, .. } => {
                self.stack(ui, &Place::top(0), law);
                self.facts(ui, 0);
            }
            Source::Parts { parts } => {
                for (slot, part) in parts.iter().enumerate() {
                    self.slot_header(ui, slot, "Part", part.count);
                    self.stack(ui, &Place::top(slot), &part.law);
                    self.facts(ui, slot);
                    ui.add_space(tokens::SPACE);
                }
                if ui.button("+ another part").clicked()
                    && let Some(last) = parts.last()
                {
                    let mut parts = parts.clone();
                    parts.push(last.clone());
                    self.asks.edit(Edit::Source(Source::Parts { parts }));
                }
            }
            Source::Groups { groups } => {
                for (slot, group) in groups.iter().enumerate() {
                    self.slot_header(ui, slot, "Group", group.n);
                    self.stack(ui, &Place::top(slot), &group.law);
                    self.facts(ui, slot);
                    ui.add_space(tokens::SPACE);
                }
            }
        }
        self.dependence(ui);
    }

    /// Like summands, unlike parts, or two groups.
    fn source_shape(&mut self, ui: &mut Ui) {
        let options = ["n like summands", "unlike parts", "two groups"];
        let now = match &self.scenario.source {
            Source::Like { .. } => 0,
            Source::Parts { .. } => 1,
            Source::Groups { .. } => 2,
        };
        let mut chosen = now;
        let combo =
            ComboBox::from_id_salt("summands").selected_text(options[now]).width(ui.available_width() - 8.0);
        ui.name_inputs("Summands", |ui| {
            combo.show_ui(ui, |ui| {
                for (index, words) in options.iter().enumerate() {
                    ui.selectable_value(&mut chosen, index, *words);
                }
            })
        });
        if chosen != now {
            self.asks.edit(Edit::Source(reshape(&self.scenario.source, chosen)));
        }
    }

    fn slot_header(&mut self, ui: &mut Ui, slot: usize, word: &str, n: u64) {
        ui.horizontal(|ui| {
            ui.label(RichText::new(format!("{word} {}", slot + 1)).font(tokens::bold(tokens::BODY)));
            let counted = if word == "Part" { "copies" } else { "n" };
            ui.label(counted);
            let label = format!("{word} {}: {counted}", slot + 1);
            let spec = Field::card(Id::unique(("count", slot)), &label, 80.0);
            let n = i64::try_from(n).unwrap_or(i64::MAX);
            let typed = fields::whole(ui, self.fields, &spec, n, (1, LARGEST_N as i64));
            if let Some(n) = typed.and_then(|n| u64::try_from(n).ok()) {
                self.asks.edit(Edit::N { slot, n });
            }
            if let Source::Parts { parts } = &self.scenario.source
                && parts.len() > 1
                && small(ui, "Remove", &format!("Remove part {}", slot + 1))
            {
                let mut parts = parts.clone();
                parts.remove(slot);
                self.asks.edit(Edit::Source(Source::Parts { parts }));
            }
        });
    }

    /// A base law and the steps done to it, in the order they are done.
    fn stack(&mut self, ui: &mut Ui, top: &Place, law: &LawSpec) {
        let (steps, base_place) = law_tree::stack(law, top);
        let source = &self.scenario.source;
        if let Some(base) = law_tree::law_at(source, &base_place) {
            self.card(ui, &base_place, base, None);
        }
        for (index, place) in steps.iter().enumerate().rev() {
            if let Some(step) = law_tree::law_at(source, place) {
                self.card(ui, place, step, Some(index + 1 < steps.len()));
            }
        }
        self.add_step(ui, top, law);
    }

    fn add_step(&mut self, ui: &mut Ui, top: &Place, law: &LawSpec) {
        ui.push_id(("add", &top.path, top.slot), |ui| {
            ui.menu_button("+ then …", |ui| {
                for (kind, words) in law_kinds::STEPS {
                    if ui.button(words).clicked() {
                        let near = self.near(top.slot);
                        self.asks.edit(Edit::Law(top.clone(), law_kinds::step(kind, law.clone(), near)));
                        ui.close();
                    }
                }
            });
        });
    }

    fn near(&self, slot: usize) -> Near {
        let report = self.view.map(|view| &view.shown.report);
        let summand = report.map(|report| report.summands.get(slot).unwrap_or(&report.summand));
        Near::new(summand.and_then(|s| s.mean), summand.and_then(|s| s.sd))
    }

    /// One card. `step` is `None` for a base law, else whether the step can be moved one earlier.
    fn card(&mut self, ui: &mut Ui, place: &Place, law: &LawSpec, step: Option<bool>) {
        let palette = tokens::palette(ui);
        let frame = Frame::new()
            .fill(palette.card)
            .stroke(Stroke::new(1.0, palette.line))
            .corner_radius(tokens::CORNER)
            .inner_margin(Margin { left: 12, right: 8, top: 6, bottom: 8 });
        let shown = ui.push_id(("card", place.slot, &place.path), |ui| {
            frame.show(ui, |ui| {
                ui.set_width(ui.available_width());
                ui.spacing_mut().item_spacing.y = 4.0;
                match step {
                    None => self.base_header(ui, place, law),
                    Some(movable) => self.step_header(ui, place, law, movable),
                }
                self.parameters(ui, place, law);
                self.nested(ui, place, law, step.is_some());
            })
        });
        // The spine of the card: full for a base law, dashed for a step, so that they differ without colour.
        let rect = shown.response.rect;
        let spine = [rect.left_top() + egui::vec2(4.0, 4.0), rect.left_bottom() + egui::vec2(4.0, -4.0)];
        let stroke = Stroke::new(2.5, palette.accent);
        if step.is_none() {
            ui.painter().line_segment(spine, stroke);
        } else {
            ui.painter().extend(egui::Shape::dashed_line(&spine, stroke, 5.0, 4.0));
        }
        ui.add_space(1.0);
    }

    fn base_header(&mut self, ui: &mut Ui, place: &Place, law: &LawSpec) {
        let now = law_kinds::kind(law);
        let mut chosen = now;
        let title = RichText::new(law_kinds::title(law)).font(tokens::bold(tokens::BODY));
        let combo = ComboBox::from_id_salt("kind")
            .selected_text(title)
            .width(ui.available_width() - 12.0)
            .height(420.0);
        ui.name_inputs("Base law", |ui| {
            combo.show_ui(ui, |ui| {
                for (kind, words) in law_kinds::BASES {
                    ui.selectable_value(&mut chosen, kind, words);
                }
            })
        });
        if chosen != now {
            let near = self.near(place.slot);
            self.asks.edit(Edit::Law(place.clone(), law_kinds::base(chosen, near)));
        }
    }

    fn step_header(&mut self, ui: &mut Ui, place: &Place, law: &LawSpec, movable: bool) {
        let title = law_kinds::title(law);
        ui.horizontal(|ui| {
            ui.label(RichText::new(title).font(tokens::bold(tokens::BODY)));
            ui.with_layout(egui::Layout::right_to_left(egui::Align::Center), |ui| {
                if small(ui, "×", &format!("Remove the step: {title}"))
                    && let Some(inner) = law_tree::without_step(law)
                {
                    self.asks.edit(Edit::Law(place.clone(), inner));
                }
                if movable
                    && small(ui, "↑", &format!("Do this step earlier: {title}"))
                    && let Some(law) = law_tree::earlier(law)
                {
                    self.asks.edit(Edit::Law(place.clone(), law));
                }
            });
        });
        if let Some((share, _)) = law_tree::mostly_zero(law) {
            ui.horizontal(|ui| {
                ui.label("share of zeros");
                let spec = Field::card(self.id(place, "zeros"), "Share of zeros", 110.0);
                if let Some(share) = fields::percent(ui, self.fields, &spec, share) {
                    self.asks.edit(Edit::Law(place.clone(), with_zeros(law, share)));
                }
            });
        }
    }

    fn id(&self, place: &Place, name: &str) -> Id {
        Id::unique((place.slot, &place.path, name))
    }

    fn parameters(&mut self, ui: &mut Ui, place: &Place, law: &LawSpec) {
        let mut copy = law.clone();
        let list: Vec<(&'static str, Value, Style)> = law_parameters::parameters(&mut copy)
            .into_iter()
            .map(|(name, parameter)| {
                let (value, style) = parameter.read();
                (name, value, style)
            })
            .collect();
        let pointer = law_tree::pointer(&self.scenario.source, place);
        for (name, value, style) in list {
            if let Some(value) = self.parameter(ui, place, law, name, &value, style) {
                let changed = law_parameters::with_parameter(law, name, &value);
                self.asks.edit(Edit::Law(place.clone(), changed));
            }
            self.problem(ui, &format!("{pointer}/{name}"));
        }
        match law {
            LawSpec::Data { values, path, column, .. } => {
                self.data(ui, place, law, values.as_deref(), path.as_deref(), column.as_deref());
            }
            LawSpec::Lognormal { .. } => self.lognormal_switch(ui, place, law),
            _ => {}
        }
        self.problem(ui, &pointer);
    }

    fn problem(&mut self, ui: &mut Ui, pointer: &str) {
        for problem in self.problems.iter().filter(|problem| problem.pointer == pointer) {
            super::finding::mistake(ui, &problem.message);
        }
    }

    /// One parameter: its name, its field, its unit; the mistake below.
    fn parameter(
        &mut self,
        ui: &mut Ui,
        place: &Place,
        law: &LawSpec,
        name: &str,
        value: &Value,
        style: Style,
    ) -> Option<Value> {
        let words = law_parameters::words(law, name);
        let label = format!("{}: {words}", law_kinds::title(law));
        let id = self.id(place, name);
        let unit = match style {
            Style::Amount | Style::Limit => self.scenario.quantity.as_ref().and_then(|q| q.unit.clone()),
            _ => None,
        };
        let before = self.fields.problems.len();
        let long = matches!(style, Style::Numbers | Style::Text);
        let typed = if long {
            ui.label(&words);
            let width = ui.available_width();
            let rows = if style == Style::Text { 1 } else { 2 };
            let spec = Field { look: Look::Lines(width, rows), ..Field::card(id, &label, width) };
            self.typed(ui, &spec, value, style)
        } else {
            ui.horizontal(|ui| {
                let field_width = 92.0;
                let unit_width = 34.0;
                let room = (ui.available_width() - field_width - unit_width).max(40.0);
                let size = egui::vec2(room, ui.spacing().interact_size.y);
                ui.allocate_ui_with_layout(size, egui::Layout::left_to_right(egui::Align::Center), |ui| {
                    ui.set_min_width(room);
                    ui.add(egui::Label::new(&words).truncate());
                });
                let hint = if style == Style::Limit { "none" } else { "" };
                let spec = Field { hint, ..Field::card(id, &label, field_width) };
                let typed = self.typed(ui, &spec, value, style);
                if let Some(unit) = unit {
                    ui.label(RichText::new(unit).size(tokens::SMALL).color(tokens::palette(ui).muted));
                }
                typed
            })
            .inner
        };
        for (_, problem) in self.fields.problems.iter().skip(before) {
            super::finding::mistake(ui, problem);
        }
        typed
    }

    fn typed(&mut self, ui: &mut Ui, spec: &Field<'_>, value: &Value, style: Style) -> Option<Value> {
        let list =
            |values: &Vec<f64>| values.iter().map(|v| numbers::plain(*v)).collect::<Vec<_>>().join(", ");
        match (value, style) {
            (Value::Real(value), _) => fields::real(ui, self.fields, spec, *value).map(Value::Real),
            (Value::Limit(value), _) => {
                fields::optional_real(ui, self.fields, spec, *value).map(Value::Limit)
            }
            (Value::Whole(value), Style::Whole(low, high)) => {
                fields::whole(ui, self.fields, spec, *value, (low, high)).map(Value::Whole)
            }
            (Value::Whole(_), _) => None,
            (Value::Numbers(values), _) => {
                fields::field(ui, self.fields, spec, &list(values), numbers::read_list, list)
                    .1
                    .map(Value::Numbers)
            }
            (Value::Text(text), _) => fields::text(ui, self.fields, spec, text).map(Value::Text),
        }
    }

    /// Lognormal is given by its mean and sd or by those of its logarithm; switching keeps the law.
    fn lognormal_switch(&mut self, ui: &mut Ui, place: &Place, law: &LawSpec) {
        let LawSpec::Lognormal { log_mean, log_sd, mean, sd } = law else { return };
        let by_logarithm = log_mean.is_some();
        let words = if by_logarithm { "give mean and sd instead" } else { "give the logarithm's instead" };
        if !ui.add(egui::Button::new(RichText::new(words).size(tokens::SMALL)).frame(false)).clicked() {
            return;
        }
        let switched = match (log_mean, log_sd, mean, sd) {
            (Some(m), Some(s), _, _) => {
                let mean = (m + s * s / 2.0).exp();
                LawSpec::Lognormal {
                    log_mean: None,
                    log_sd: None,
                    mean: Some(mean),
                    sd: Some(mean * (s * s).exp_m1().sqrt()),
                }
            }
            (_, _, Some(mean), Some(sd)) if *mean > 0.0 => {
                let variance = ((sd / mean) * (sd / mean)).ln_1p();
                let log_mean = Some(mean.ln() - variance / 2.0);
                LawSpec::Lognormal { log_mean, log_sd: Some(variance.sqrt()), mean: None, sd: None }
            }
            _ => return,
        };
        self.asks.edit(Edit::Law(place.clone(), switched));
    }

    fn data(
        &mut self,
        ui: &mut Ui,
        place: &Place,
        law: &LawSpec,
        values: Option<&[f64]>,
        path: Option<&str>,
        column: Option<&str>,
    ) {
        let label = |text: &str| RichText::new(text).size(12.0);
        if let Some(path) = path {
            ui.label(label(&format!("file {path}")));
            ui.horizontal(|ui| {
                ui.label("column");
                let spec = Field::card(self.id(place, "column"), "Column of the data file", 130.0);
                if let Some(column) = fields::text(ui, self.fields, &spec, column.unwrap_or("")) {
                    let law = match law.clone() {
                        LawSpec::Data { path, tail, .. } => {
                            LawSpec::Data { values: None, path, column: Some(column), tail }
                        }
                        other => other,
                    };
                    self.asks.edit(Edit::Law(place.clone(), law));
                }
            });
            let pointer = law_tree::pointer(&self.scenario.source, place);
            self.problem(ui, &format!("{pointer}/path"));
            self.problem(ui, &format!("{pointer}/column"));
        } else {
            let values = Value::Numbers(values.unwrap_or_default().to_vec());
            if let Some(Value::Numbers(values)) =
                self.parameter(ui, place, law, "values", &values, Style::Numbers)
            {
                let law = LawSpec::Data { values: Some(values), path: None, column: None, tail: None };
                self.asks.edit(Edit::Law(place.clone(), law));
            }
        }
        if ui.button("Choose a CSV file …").clicked() {
            self.asks.list.push(Ask::ChooseData(place.clone()));
        }
    }

    /// The laws inside a mixture or a random number of laws.
    fn nested(&mut self, ui: &mut Ui, place: &Place, law: &LawSpec, is_step: bool) {
        match law {
            LawSpec::Mixture { parts } if !is_step => {
                for (index, part) in parts.iter().enumerate() {
                    ui.horizontal(|ui| {
                        ui.label("weight");
                        let label = format!("Weight of part {}", index + 1);
                        let spec = Field::card(self.id(place, &format!("weight {index}")), &label, 80.0);
                        if let Some(weight) = fields::real(ui, self.fields, &spec, part.weight) {
                            let mut parts = parts.clone();
                            parts[index].weight = weight;
                            self.asks.edit(Edit::Law(place.clone(), LawSpec::Mixture { parts }));
                        }
                        if parts.len() > 1
                            && small(ui, "×", &format!("Remove part {} of the mixture", index + 1))
                        {
                            let mut parts = parts.clone();
                            parts.remove(index);
                            self.asks.edit(Edit::Law(place.clone(), LawSpec::Mixture { parts }));
                        }
                    });
                    let pointer = law_tree::pointer(&self.scenario.source, place);
                    self.problem(ui, &format!("{pointer}/parts/{index}/weight"));
                    self.stack(ui, &place.child(index), &part.law);
                }
                if ui.button("+ another part of the mixture").clicked() {
                    let mut parts = parts.clone();
                    let near = self.near(place.slot);
                    parts.push(MixturePart { weight: 1.0, law: law_kinds::base("normal", near) });
                    self.asks.edit(Edit::Law(place.clone(), LawSpec::Mixture { parts }));
                }
            }
            LawSpec::Compound { count, each } => {
                ui.label("how many:");
                self.stack(ui, &place.child(0), count);
                ui.label("of each:");
                self.stack(ui, &place.child(1), each);
            }
            _ => {}
        }
    }

    /// The finished law: a small picture and what is known of it.
    fn facts(&mut self, ui: &mut Ui, slot: usize) {
        if let Some(view) = self.view {
            law_picture::show(ui, view, slot);
        }
    }

    fn dependence(&mut self, ui: &mut Ui) {
        let Source::Like { law, n, dependence } = &self.scenario.source else { return };
        let options = ["independent", "moving average", "autoregressive", "without replacement"];
        let now = match dependence {
            None => 0,
            Some(Dependence::MovingAverage { .. }) => 1,
            Some(Dependence::Autoregressive { .. }) => 2,
            Some(Dependence::WithoutReplacement { .. }) => 3,
        };
        ui.add_space(tokens::GAP);
        ui.label(RichText::new("Summands are").color(tokens::palette(ui).muted));
        let mut chosen = now;
        let combo = ComboBox::from_id_salt("dependence")
            .selected_text(options[now])
            .width(ui.available_width() - 8.0);
        ui.name_inputs("Dependence", |ui| {
            combo.show_ui(ui, |ui| {
                for (index, words) in options.iter().enumerate() {
                    ui.selectable_value(&mut chosen, index, *words);
                }
            })
        });
        let like = |dependence| Edit::Source(Source::Like { law: law.clone(), n: *n, dependence });
        if chosen != now {
            self.asks.edit(like(match chosen {
                1 => Some(Dependence::MovingAverage { weights: vec![1.0, 0.5] }),
                2 => Some(Dependence::Autoregressive { correlation: 0.4 }),
                3 => Some(Dependence::WithoutReplacement { population: n.saturating_mul(5) }),
                _ => None,
            }));
        }
        match dependence {
            Some(Dependence::MovingAverage { weights }) => {
                let list = |values: &Vec<f64>| {
                    values.iter().map(|v| numbers::plain(*v)).collect::<Vec<_>>().join(", ")
                };
                let width = ui.available_width();
                let spec = Field::card(Id::unique("ma weights"), "Weights of the moving average", width);
                let typed = fields::field(ui, self.fields, &spec, &list(weights), numbers::read_list, list).1;
                if let Some(weights) = typed {
                    self.asks.edit(like(Some(Dependence::MovingAverage { weights })));
                }
            }
            Some(Dependence::Autoregressive { correlation }) => {
                let spec = Field::card(Id::unique("ar correlation"), "Correlation of neighbours", 100.0);
                if let Some(correlation) = fields::real(ui, self.fields, &spec, *correlation) {
                    self.asks.edit(like(Some(Dependence::Autoregressive { correlation })));
                }
            }
            Some(Dependence::WithoutReplacement { population }) => {
                let spec = Field::card(Id::unique("population"), "Size of the population", 100.0);
                let now = i64::try_from(*population).unwrap_or(i64::MAX);
                let typed = fields::whole(ui, self.fields, &spec, now, (1, 1_000_000_000_000));
                if let Some(population) = typed.and_then(|p| u64::try_from(p).ok()) {
                    self.asks.edit(like(Some(Dependence::WithoutReplacement { population })));
                }
            }
            None => {}
        }
        for problem in self.problems.iter().filter(|problem| problem.pointer.starts_with("/dependence")) {
            super::finding::mistake(ui, &problem.message);
        }
    }
}

/// A small button with a name for those who do not see it.
pub fn small(ui: &mut Ui, text: &str, name: &str) -> bool {
    let response = ui.small_button(text);
    response.widget_info(|| egui::WidgetInfo::labeled(egui::accesskit::Role::Button, true, name));
    response.on_hover_text(name).clicked()
}

/// A mostly-zero law with another share of zeros, on the scale its weights have.
fn with_zeros(law: &LawSpec, share: f64) -> LawSpec {
    let mut law = law.clone();
    if let LawSpec::Mixture { parts } = &mut law
        && let [zero, rest] = parts.as_mut_slice()
    {
        let total = zero.weight + rest.weight;
        zero.weight = share * total;
        rest.weight = total - zero.weight;
    }
    law
}

/// The summands in another shape, keeping the laws and counts there are.
fn reshape(source: &Source, to: usize) -> Source {
    let kinds: Vec<(LawSpec, u64)> = match source {
        Source::Like { law, n, .. } => vec![(law.clone(), *n)],
        Source::Parts { parts } => parts.iter().map(|part| (part.law.clone(), part.count)).collect(),
        Source::Groups { groups } => groups.iter().map(|group| (group.law.clone(), group.n)).collect(),
    };
    let kind = |index: usize| {
        kinds.get(index).or(kinds.first()).cloned().unwrap_or((LawSpec::Normal { mean: 0.0, sd: 1.0 }, 40))
    };
    match to {
        1 => Source::Parts {
            parts: (0..kinds.len().max(2))
                .map(|index| {
                    let (law, count) = kind(index);
                    Part { law, count }
                })
                .collect(),
        },
        2 => Source::Groups {
            groups: [0, 1].map(|index| {
                let (law, n) = kind(index);
                Group { law, n }
            }),
        },
        _ => {
            let (law, n) = kind(0);
            Source::Like { law, n, dependence: None }
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use gaussgap_simulation::law::LawSpec;

    #[test]
    fn the_share_of_zeros_keeps_the_scale_of_the_weights() {
        let zero = MixturePart { weight: 97.0, law: LawSpec::Constant { value: 0.0 } };
        let rest = MixturePart { weight: 3.0, law: LawSpec::Exponential { mean: 1.0 } };
        let law = LawSpec::Mixture { parts: vec![zero, rest] };
        let changed = with_zeros(&law, 0.9);
        let LawSpec::Mixture { parts } = &changed else { panic!("a mixture") };
        assert_eq!((parts[0].weight, parts[1].weight), (90.0, 10.0));
    }

    #[test]
    fn reshaping_there_and_back_keeps_the_law() {
        let source = Source::Like { law: LawSpec::Exponential { mean: 3.0 }, n: 17, dependence: None };
        for to in [1, 2] {
            assert_eq!(reshape(&reshape(&source, to), 0), source);
        }
    }
}
