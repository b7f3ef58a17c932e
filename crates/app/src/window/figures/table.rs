//! A figure as a table: headings and rows of text.

use super::super::tokens;
use egui::{RichText, ScrollArea, Ui};

/// A table.
#[derive(Debug, Clone, Default, PartialEq)]
pub struct Table {
    /// Headings.
    pub columns: Vec<String>,
    /// Rows of as many cells.
    pub rows: Vec<Vec<String>>,
    /// What to say where there are no rows.
    pub empty: String,
    /// Whether the last column is running text that wraps.
    pub wraps: bool,
}

impl Table {
    /// A table with headings.
    pub fn new(columns: &[&str]) -> Self {
        Self { columns: columns.iter().map(|c| (*c).to_owned()).collect(), ..Self::default() }
    }

    /// Tab-separated text for the clipboard.
    pub fn to_text(&self) -> String {
        std::iter::once(&self.columns)
            .chain(&self.rows)
            .map(|row| row.join("\t"))
            .collect::<Vec<_>>()
            .join("\n")
    }
}

/// Shows a table in the space at hand, scrolling where it is longer.
pub fn show(ui: &mut Ui, id: egui::Id, table: &Table) {
    let palette = tokens::palette(ui);
    if table.rows.is_empty() {
        ui.label(RichText::new(&table.empty).color(palette.muted));
        return;
    }
    let heading = |text: &str| RichText::new(text).font(tokens::bold(tokens::SMALL)).color(palette.muted);
    let area = if table.wraps { ScrollArea::vertical() } else { ScrollArea::both() };
    area.id_salt(id).auto_shrink(false).show(ui, |ui| {
        if table.wraps {
            return stacked(ui, table);
        }
        egui::Grid::new(id.with("grid"))
            .num_columns(table.columns.len())
            .spacing([14.0, 3.0])
            .striped(true)
            .show(ui, |ui| {
                for column in &table.columns {
                    ui.label(heading(column));
                }
                ui.end_row();
                for row in &table.rows {
                    for cell in row {
                        ui.label(RichText::new(cell).size(12.0));
                    }
                    ui.end_row();
                }
            });
    });
}

/// Rows whose last cell is running text: the short cells on one line, the text below.
fn stacked(ui: &mut Ui, table: &Table) {
    let palette = tokens::palette(ui);
    for (index, row) in table.rows.iter().enumerate() {
        if index > 0 {
            ui.separator();
        }
        if let Some((text, short)) = row.split_last() {
            ui.spacing_mut().item_spacing.y = 2.0;
            if !short.is_empty() {
                ui.horizontal_wrapped(|ui| {
                    for (column, cell) in short.iter().enumerate() {
                        let rich = RichText::new(cell).size(12.5);
                        let rich = match cell.chars().next() {
                            _ if column == 0 => rich.font(tokens::bold(12.5)),
                            Some('✓') => rich.color(palette.holds),
                            Some('✗') => rich.color(palette.fails),
                            _ => rich,
                        };
                        ui.label(rich);
                        ui.add_space(6.0);
                    }
                });
            }
            if !text.is_empty() {
                ui.label(RichText::new(text).size(12.0).color(if short.is_empty() {
                    palette.ink
                } else {
                    palette.muted
                }));
            }
        }
    }
}
