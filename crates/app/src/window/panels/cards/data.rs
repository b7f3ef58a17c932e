//! The card of pilot data: a file and its column, or values typed or pasted.

use super::Cards;
use crate::window::model::edit::Edit;
use crate::window::model::law_parameters::{Style, Value};
use crate::window::model::law_tree::{self, Place};
use crate::window::panels::Ask;
use crate::window::panels::fields::{self, Field};
use egui::{RichText, Ui};
use gaussgap_simulation::law::LawSpec;

impl Cards<'_> {
    pub(super) fn data(
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
}
