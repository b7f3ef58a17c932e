//! The figures of the board: what each is called, says, draws and lists.

pub mod claim;
pub mod fit;
pub mod gap;
pub mod growth;
pub mod lists;
pub mod plot;
pub mod table;
pub mod tails;
pub mod ticks;

use super::model::edit::Edit;
use super::model::pins::Pin;
use super::model::prepared::{OwnUnits, Prepared};
use super::model::settings::Axis;
use gaussgap_conclusions::scenario::{Claim, Scenario};
use std::sync::Arc;
use table::Table;

/// One figure of the board.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum Figure {
    /// The law of the standardized sum against the normal.
    Fit,
    /// Actual minus normal.
    Gap,
    /// The distance over n.
    Growth,
    /// Both tails on a log scale.
    Tails,
    /// The claim's own numbers, actual against nominal.
    Coverage,
    /// What else could be done at the planned n.
    Remedies,
    /// Rules of thumb, judged.
    Rules,
    /// What the numbers do not say.
    Cautions,
}

/// All figures in the order of the board.
pub const ALL: [Figure; 8] = [
    Figure::Fit,
    Figure::Gap,
    Figure::Growth,
    Figure::Tails,
    Figure::Coverage,
    Figure::Remedies,
    Figure::Rules,
    Figure::Cautions,
];

/// What the figures are drawn from.
#[derive(Debug, Clone, Copy)]
pub struct View<'a> {
    /// The scenario as it is being edited.
    pub scenario: &'a Scenario,
    /// The latest answer.
    pub shown: &'a Arc<Prepared>,
    /// The latest full answer (growth, remedies, rules), and whether its growth belongs to the present laws.
    pub full: Option<&'a Arc<Prepared>>,
    /// Whether the full answer belongs to the present input.
    pub full_is_current: bool,
    /// Whether the growth of the full answer belongs to the present laws.
    pub growth_is_current: bool,
    /// The pins.
    pub pins: &'a [Pin],
    /// The shared cursor, in standard units.
    pub cursor: Option<f64>,
    /// The horizontal axis.
    pub axis: Axis,
    /// The part of the horizontal axis that is shown, in standard units.
    pub range: (f64, f64),
}

impl View<'_> {
    /// The quantity's own units, where they are wanted and known.
    pub fn own_units(&self) -> Option<OwnUnits> {
        if self.axis == Axis::Own { self.shown.own_units } else { None }
    }

    /// A place on the horizontal axis in words.
    pub fn place(&self, z: f64) -> String {
        use super::numbers::shown;
        match (self.own_units(), self.shown.own_units) {
            (Some(own), _) => {
                let unit = self.scenario.quantity.as_ref().and_then(|q| q.unit.as_deref()).unwrap_or("");
                format!("{} {unit}", shown(own.center + z * own.unit, 5)).trim_end().to_owned()
            }
            _ => format!("z = {}", shown(z, 3)),
        }
    }
}

/// What drawing a figure asks for.
#[derive(Debug, Default)]
pub struct Asked {
    /// Where the pointer or the keyboard put the cursor.
    pub cursor: Option<f64>,
    /// A change of the scenario.
    pub edit: Option<Edit>,
    /// The part of the horizontal axis to show from now on.
    pub range: Option<(f64, f64)>,
}

impl Figure {
    /// Its name.
    pub fn title(self) -> &'static str {
        match self {
            Self::Fit => "Fit",
            Self::Gap => "Gap",
            Self::Growth => "Growth",
            Self::Tails => "Tails",
            Self::Coverage => "Coverage",
            Self::Remedies => "Remedies",
            Self::Rules => "Rules of thumb",
            Self::Cautions => "Cautions",
        }
    }

    /// What its vertical axis or its rows show, in a few words beside the name.
    pub fn subtitle(self, view: &View<'_>) -> &'static str {
        match self {
            Self::Fit => "probability up to z",
            Self::Gap => "actual − normal",
            Self::Growth => "Kolmogorov distance",
            Self::Tails => "probability beyond z",
            Self::Coverage => match view.scenario.claim {
                Claim::Interval { .. } => "actual and nominal",
                Claim::Test { .. } => "actual, nominal size",
                _ => "actual and normal",
            },
            Self::Remedies => "at the planned n",
            Self::Rules => "do they agree?",
            Self::Cautions => "not in the numbers",
        }
    }

    /// Whether the report has something for this figure.
    pub fn applies(self, view: &View<'_>) -> bool {
        match self {
            Self::Fit | Self::Gap => !view.shown.fit.is_empty(),
            Self::Growth => true,
            Self::Tails => !view.shown.report.tails.is_empty(),
            Self::Coverage => view.shown.report.claim.kind != "curve",
            Self::Remedies | Self::Rules => true,
            Self::Cautions => {
                !view.shown.report.cautions.is_empty() || !view.shown.report.summand.warnings.is_empty()
            }
        }
    }

    /// Whether it is a drawing that can also be shown as a table.
    pub fn is_drawing(self) -> bool {
        matches!(self, Self::Fit | Self::Gap | Self::Growth | Self::Tails | Self::Coverage)
    }

    /// The figure as a table.
    pub fn table(self, view: &View<'_>) -> Table {
        match self {
            Self::Fit => fit::table(view),
            Self::Gap => gap::table(view),
            Self::Growth => growth::table(view),
            Self::Tails => tails::table(view),
            Self::Coverage => claim::table(view),
            Self::Remedies => lists::remedies(view),
            Self::Rules => lists::rules(view),
            Self::Cautions => lists::cautions(view),
        }
    }

    /// One line about the figure, or about the place of the cursor.
    pub fn readout(self, view: &View<'_>) -> String {
        match self {
            Self::Fit => fit::readout(view),
            Self::Gap => gap::readout(view),
            Self::Growth => growth::readout(view),
            Self::Tails => tails::readout(view),
            Self::Coverage => claim::readout(view),
            Self::Remedies | Self::Rules | Self::Cautions => String::new(),
        }
    }

    /// Draws the figure into a rectangle.
    pub fn draw(self, ui: &mut egui::Ui, rect: egui::Rect, view: &View<'_>) -> Asked {
        match self {
            Self::Fit => fit::draw(ui, rect, view),
            Self::Gap => gap::draw(ui, rect, view),
            Self::Growth => growth::draw(ui, rect, view),
            Self::Tails => tails::draw(ui, rect, view),
            Self::Coverage => claim::draw(ui, rect, view),
            Self::Remedies | Self::Rules | Self::Cautions => Asked::default(),
        }
    }
}
