//! The parameters on a card: names, fields, units, mistakes.

use super::Cards;
use crate::window::model::edit::Edit;
use crate::window::model::law_kinds;
use crate::window::model::law_parameters::{self, Style, Value};
use crate::window::model::law_tree::{self, Place};
use crate::window::numbers;
use crate::window::panels::fields::{self, Field, Look};
use crate::window::panels::finding;
use crate::window::tokens;
use egui::{RichText, Ui};
use gaussgap_simulation::law::LawSpec;

impl Cards<'_> {
    pub(super) fn parameters(&mut self, ui: &mut Ui, place: &Place, law: &LawSpec) {
        let mut copy = law.clone();
        let list: Vec<(&'static str, Value, Style)> = law_parameters::parameters(&mut copy)
            .into_iter()
            .filter(|_| !matches!(law, LawSpec::Table { .. } | LawSpec::Histogram { .. }))
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
            LawSpec::Table { .. } | LawSpec::Histogram { .. } => self.rows(ui, place, law),
            LawSpec::Lognormal { .. } => self.lognormal_switch(ui, place, law),
            _ => {}
        }
        self.problem(ui, &pointer);
    }

    pub(super) fn problem(&mut self, ui: &mut Ui, pointer: &str) {
        for problem in self.problems.iter().filter(|problem| problem.pointer == pointer) {
            finding::mistake(ui, &problem.message);
        }
    }

    /// One parameter: its name, its field, its unit; the mistake below.
    pub(super) fn parameter(
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
            finding::mistake(ui, problem);
        }
        typed
    }

    pub(super) fn typed(
        &mut self,
        ui: &mut Ui,
        spec: &Field<'_>,
        value: &Value,
        style: Style,
    ) -> Option<Value> {
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
    pub(super) fn lognormal_switch(&mut self, ui: &mut Ui, place: &Place, law: &LawSpec) {
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
}
