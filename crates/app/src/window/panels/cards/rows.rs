//! Laws given by rows: a table of values with weights, a histogram. Edited as text with a row a line, so that two
//! columns of a spreadsheet can be pasted; the bars of a histogram can be dragged.

use super::Cards;
use crate::window::model::edit::Edit;
use crate::window::model::law_tree::{self, Place};
use crate::window::numbers;
use crate::window::panels::fields::{self, Field, Look};
use crate::window::panels::finding;
use crate::window::tokens;
use egui::{EventFilter, Key, Rect, Sense, Stroke, Ui, WidgetInfo, pos2, vec2};
use gaussgap_simulation::law::LawSpec;

impl Cards<'_> {
    /// Values and weights of a table, or edges and weights of a histogram (the last edge has none).
    pub(super) fn rows(&mut self, ui: &mut Ui, place: &Place, law: &LawSpec) {
        let (first, second, histogram) = match law {
            LawSpec::Table { values, weights } => (values, weights, false),
            LawSpec::Histogram { edges, weights } => (edges, weights, true),
            _ => return,
        };
        if histogram && let Some(weights) = bars(ui, self.id(place, "bars"), first, second) {
            let law = LawSpec::Histogram { edges: first.clone(), weights };
            self.asks.edit(Edit::Law(place.clone(), law));
        }
        let (words, label) = if histogram {
            ("edge and weight, a line each", "Histogram: edge and weight a line")
        } else {
            ("value and weight, a line each", "Table of values: value and weight a line")
        };
        ui.label(words).on_hover_text("Two columns copied from a spreadsheet can be pasted here.");
        let width = ui.available_width();
        let spec = Field { look: Look::Lines(width, 5), ..Field::card(self.id(place, "rows"), label, width) };
        let before = self.fields.problems.len();
        let now = (first.clone(), second.clone());
        let read = |text: &str| read_rows(text, histogram);
        let typed = fields::field(ui, self.fields, &spec, &write_rows(&now), read, write_rows).1;
        for (_, problem) in self.fields.problems.iter().skip(before) {
            finding::mistake(ui, problem);
        }
        if let Some((first, weights)) = typed {
            let law = if histogram {
                LawSpec::Histogram { edges: first, weights }
            } else {
                LawSpec::Table { values: first, weights }
            };
            self.asks.edit(Edit::Law(place.clone(), law));
        }
        let pointer = law_tree::pointer(&self.scenario.source, place);
        for name in ["values", "edges", "weights"] {
            self.problem(ui, &format!("{pointer}/{name}"));
        }
    }
}

/// Two columns of numbers.
type Columns = (Vec<f64>, Vec<f64>);

/// A row a line, columns apart by a tab.
fn write_rows((first, second): &Columns) -> String {
    let rows = first.len().max(second.len());
    let cell = |column: &[f64], row: usize| column.get(row).map_or_else(String::new, |v| numbers::plain(*v));
    (0..rows)
        .map(|row| format!("{}\t{}", cell(first, row), cell(second, row)).trim_end().to_owned())
        .collect::<Vec<_>>()
        .join("\n")
}

/// Reads rows with columns apart by tabs, semicolons or blanks; a first line without numbers is a heading.
fn read_rows(text: &str, histogram: bool) -> Result<Columns, String> {
    let (mut first, mut second) = (Vec::new(), Vec::new());
    let lines: Vec<(usize, &str)> =
        text.lines().enumerate().filter(|(_, line)| !line.trim().is_empty()).collect();
    for (at, (number, line)) in lines.iter().enumerate() {
        let cells: Vec<&str> = if line.trim().contains('\t') {
            line.trim().split('\t').map(str::trim).collect()
        } else if line.contains(';') {
            line.split(';').map(str::trim).collect()
        } else {
            line.split_whitespace().map(|cell| cell.trim_end_matches(',')).collect()
        };
        if at == 0 && lines.len() > 1 && cells.iter().all(|cell| numbers::read_real(cell).is_err()) {
            continue;
        }
        let number = number + 1;
        let read = |cell: &str| numbers::read_real(cell).map_err(|e| format!("line {number}: {e}"));
        let last_edge = histogram && at + 1 == lines.len();
        match cells.as_slice() {
            [value, weight] => {
                first.push(read(value)?);
                second.push(read(weight)?);
            }
            [edge] if last_edge => first.push(read(edge)?),
            found => {
                let wanted = if histogram { "an edge and a weight" } else { "a value and a weight" };
                return Err(format!("line {number}: expected {wanted}, found {} cells", found.len()));
            }
        }
    }
    if histogram && first.len() == second.len() {
        return Err("the last line is the upper end: an edge without a weight".to_owned());
    }
    Ok((first, second))
}

/// Density of a bar: its weight by its width.
fn densities(edges: &[f64], weights: &[f64]) -> Option<Vec<f64>> {
    let good = edges.len() == weights.len() + 1
        && (1..=60).contains(&weights.len())
        && edges.windows(2).all(|pair| pair[1] > pair[0])
        && edges.iter().chain(weights).all(|value| value.is_finite())
        && weights.iter().all(|weight| *weight >= 0.0);
    good.then(|| edges.windows(2).zip(weights).map(|(pair, weight)| weight / (pair[1] - pair[0])).collect())
}

/// The bars of a histogram, dragged by the pointer or stepped by the arrow keys; new weights where one changed.
fn bars(ui: &mut Ui, id: egui::Id, edges: &[f64], weights: &[f64]) -> Option<Vec<f64>> {
    let heights = densities(edges, weights)?;
    let palette = tokens::palette(ui);
    let (rect, _) = ui.allocate_exact_size(vec2(ui.available_width() - 4.0, 84.0), Sense::hover());
    let (low, high) = (edges[0], edges[edges.len() - 1]);
    let tallest = heights.iter().copied().fold(0.0, f64::max);
    // While a bar is dragged the scale stays as it was, so that the bar follows the pointer.
    let held: Option<f64> = ui.data(|data| data.get_temp(id));
    let top = held.unwrap_or(if tallest > 0.0 { tallest * 1.3 } else { 1.0 });
    let x = |value: f64| rect.left() + ((value - low) / (high - low)) as f32 * rect.width();
    let mut changed = None;
    let mut dragging = false;
    for (index, height) in heights.iter().enumerate() {
        let column = Rect::from_x_y_ranges(x(edges[index])..=x(edges[index + 1]), rect.y_range());
        let response = ui.interact(column, id.with(index), Sense::click_and_drag());
        let name = format!(
            "Weight of the bar from {} to {}",
            numbers::shown(edges[index], 4),
            numbers::shown(edges[index + 1], 4)
        );
        response.widget_info(|| WidgetInfo::slider(true, weights[index], &name));
        let response = response.on_hover_cursor(egui::CursorIcon::ResizeVertical);
        let share = (height / top).clamp(0.0, 1.0) as f32;
        let bar = Rect::from_min_max(pos2(column.left(), rect.bottom() - share * rect.height()), column.max);
        let strong = response.hovered() || response.dragged() || response.has_focus();
        let fill = palette.accent.gamma_multiply(if strong { 0.55 } else { 0.3 });
        ui.painter().rect_filled(bar.shrink2(vec2(0.5, 0.0)), 0.0, fill);
        ui.painter().hline(bar.x_range(), bar.top(), Stroke::new(2.0, palette.accent));
        let width = edges[index + 1] - edges[index];
        let mut wanted = None;
        if response.dragged() {
            dragging = true;
            ui.data_mut(|data| data.insert_temp(id, top));
            wanted = response
                .interact_pointer_pos()
                .map(|at| f64::from(((rect.bottom() - at.y) / rect.height()).clamp(0.0, 1.0)) * top * width);
        }
        if response.has_focus() {
            let filter = EventFilter { vertical_arrows: true, ..EventFilter::default() };
            ui.memory_mut(|memory| memory.set_focus_lock_filter(response.id, filter));
            let presses =
                ui.input(|i| i.num_presses(Key::ArrowUp) as f64 - i.num_presses(Key::ArrowDown) as f64);
            if presses != 0.0 {
                wanted = Some((weights[index] + presses * 0.02 * top * width).max(0.0));
            }
        }
        let others = weights.iter().enumerate().any(|(i, w)| i != index && *w > 0.0);
        if let Some(weight) = wanted.map(|w| round(w, top * width)).filter(|w| others || *w > 0.0)
            && weight != weights[index]
        {
            let mut all = weights.to_vec();
            all[index] = weight;
            changed = Some(all);
        }
    }
    if !dragging && held.is_some() {
        ui.data_mut(|data| data.remove::<f64>(id));
    }
    ui.painter().hline(rect.x_range(), rect.bottom(), Stroke::new(1.0, palette.muted));
    changed
}

/// A weight to a thousandth of the power of ten of the largest one, so that dragging gives readable numbers.
fn round(weight: f64, largest: f64) -> f64 {
    let step = 10f64.powf(largest.max(1e-300).log10().ceil() - 3.0);
    let rounded = (weight / step).round() * step;
    crate::window::model::law_kinds::round_to(rounded, 6)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn rows_are_read_as_a_spreadsheet_copies_them() {
        let both = (vec![0.0, 1.5, 12_000.0], vec![6.0, 3.0, 0.025]);
        for text in [
            "0\t6\n1.5\t3\n12,000\t2.5%\n",
            "fault\tcount\r\n0\t6\r\n1.5\t3\r\n12000\t0.025",
            "0;6\n1.5; 3\n\n12000 ;2.5 %",
        ] {
            assert_eq!(read_rows(text, false).as_ref(), Ok(&both), "{text}");
        }
        assert_eq!(read_rows(&write_rows(&both), false), Ok(both));
        let histogram = (vec![0.0, 1.0, 4.0], vec![5.0, 2.0]);
        assert_eq!(read_rows("0 5\n1 2\n4", true), Ok(histogram.clone()));
        assert_eq!(read_rows(&write_rows(&histogram), true), Ok(histogram));
    }

    #[test]
    fn bad_rows_are_named_by_their_line() {
        let problem = |text, histogram| read_rows(text, histogram).expect_err("a problem");
        assert!(problem("0\t6\n1.5\tx", false).starts_with("line 2: expected a number"));
        assert!(problem("0 6\n1\n2 3", false).starts_with("line 2: expected a value and a weight"));
        assert!(problem("0 6\n1 2", true).contains("upper end"));
    }

    #[test]
    fn only_sound_histograms_have_bars() {
        assert_eq!(densities(&[0.0, 1.0, 3.0], &[1.0, 4.0]), Some(vec![1.0, 2.0]));
        for (edges, weights) in
            [(vec![0.0, 1.0], vec![]), (vec![1.0, 1.0], vec![1.0]), (vec![0.0, 1.0], vec![-1.0])]
        {
            assert_eq!(densities(&edges, &weights), None);
        }
    }
}
