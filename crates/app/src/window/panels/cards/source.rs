//! What is summed: like summands, unlike parts or two groups, and how the summands depend on each other.

use super::{Cards, small};
use crate::window::model::edit::{Edit, LARGEST_N};
use crate::window::numbers;
use crate::window::panels::fields::{self, Field};
use crate::window::panels::finding;
use crate::window::tokens;
use egui::{ComboBox, Id, RichText, Ui};
use gaussgap_conclusions::scenario::{Dependence, Group, Part, Source};
use gaussgap_simulation::law::LawSpec;

impl Cards<'_> {
    /// Like summands, unlike parts, or two groups.
    pub(super) fn source_shape(&mut self, ui: &mut Ui) {
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

    pub(super) fn slot_header(&mut self, ui: &mut Ui, slot: usize, word: &str, n: u64) {
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

    pub(super) fn dependence(&mut self, ui: &mut Ui) {
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
            finding::mistake(ui, &problem.message);
        }
    }
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

    #[test]
    fn reshaping_there_and_back_keeps_the_law() {
        let source = Source::Like { law: LawSpec::Exponential { mean: 3.0 }, n: 17, dependence: None };
        for to in [1, 2] {
            assert_eq!(reshape(&reshape(&source, to), 0), source);
        }
    }
}
