//! Law cards on the left: a base law, then what is done to it, as a stack; facts and a picture at the bottom.

mod data;
mod parameters;
mod rows;
mod source;

use super::fields::{self, Field, Fields};
use super::{Asks, law_picture};
use crate::window::figures::View;
use crate::window::model::edit::Edit;
use crate::window::model::law_kinds::{self, Near};
use crate::window::model::law_tree::{self, Place};
use crate::window::tokens;
use egui::{ComboBox, Frame, Id, Margin, RichText, Stroke, Ui};
use gaussgap_conclusions::Problem;
use gaussgap_conclusions::scenario::{Scenario, Source};
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

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_share_of_zeros_keeps_the_scale_of_the_weights() {
        let zero = MixturePart { weight: 97.0, law: LawSpec::Constant { value: 0.0 } };
        let rest = MixturePart { weight: 3.0, law: LawSpec::Exponential { mean: 1.0 } };
        let law = LawSpec::Mixture { parts: vec![zero, rest] };
        let changed = with_zeros(&law, 0.9);
        let LawSpec::Mixture { parts } = &changed else { panic!("a mixture") };
        assert_eq!((parts[0].weight, parts[1].weight), (90.0, 10.0));
    }
}
