//! Everything a user can change in a scenario, as data, and the one function that applies it.

use super::law_tree::{self, Place};
use gaussgap_conclusions::scenario::{Claim, Quantity, Scenario, Source, Statistic, Tolerance};
use gaussgap_simulation::law::LawSpec;
use gaussgap_simulation::sum::RouteChoice;

/// The largest n a scenario may have.
pub const LARGEST_N: u64 = 1_000_000_000;

/// One change of the scenario.
#[derive(Debug, Clone, PartialEq)]
pub enum Edit {
    /// The title; empty removes it.
    Title(String),
    /// The notes; empty removes them.
    Notes(String),
    /// The name of the quantity; empty removes it.
    QuantityName(String),
    /// Its unit; empty removes it.
    QuantityUnit(String),
    /// How many summands of the kind in this slot (0 where there is one kind).
    N {
        /// Which part or group.
        slot: usize,
        /// How many.
        n: u64,
    },
    /// Mean or sum.
    Statistic(Statistic),
    /// The claim with its parameters.
    Claim(Claim),
    /// The tolerance.
    Tolerance(Tolerance),
    /// Where the summands come from, as a whole.
    Source(Source),
    /// The law at a place in the tree of laws.
    Law(Place, LawSpec),
    /// How the figures are computed.
    Route(RouteChoice),
    /// Budget of simulated sums.
    Draws(u64),
    /// Seed of the simulation.
    Seed(u64),
    /// How far *safe from* is searched.
    SearchUpTo(u64),
    /// Another whole scenario (undone like any edit).
    Replace(Box<Scenario>),
}

/// What two edits must share to be one step of undo when they follow each other closely.
#[derive(Debug, Clone, PartialEq)]
pub struct Kind(std::mem::Discriminant<Edit>, Option<Place>, usize);

impl Edit {
    /// The kind of this edit, for coalescing a drag or a word being typed into one step of undo.
    pub fn kind(&self) -> Kind {
        let (place, slot) = match self {
            Self::Law(place, _) => (Some(place.clone()), place.slot),
            Self::N { slot, .. } => (None, *slot),
            _ => (None, 0),
        };
        Kind(std::mem::discriminant(self), place, slot)
    }

    /// Applies this edit. Out-of-place addresses change nothing.
    pub fn apply(&self, scenario: &mut Scenario) {
        let text = |text: &String| (!text.trim().is_empty()).then(|| text.trim_start().to_owned());
        match self {
            Self::Title(title) => scenario.title = text(title),
            Self::Notes(notes) => scenario.notes = text(notes),
            Self::QuantityName(name) => quantity(scenario, |q| q.name = text(name)),
            Self::QuantityUnit(unit) => quantity(scenario, |q| q.unit = text(unit)),
            Self::N { slot, n } => set_n(&mut scenario.source, *slot, (*n).clamp(1, LARGEST_N)),
            Self::Statistic(statistic) => scenario.statistic = *statistic,
            Self::Claim(claim) => scenario.claim = *claim,
            Self::Tolerance(tolerance) => scenario.tolerance = *tolerance,
            Self::Source(source) => scenario.source = source.clone(),
            Self::Law(place, law) => {
                if let Some(found) = law_tree::law_mut(&mut scenario.source, place) {
                    *found = law.clone();
                }
            }
            Self::Route(route) => scenario.method.route = *route,
            Self::Draws(draws) => scenario.method.draws = *draws,
            Self::Seed(seed) => scenario.method.seed = *seed,
            Self::SearchUpTo(up_to) => scenario.search.up_to = *up_to,
            Self::Replace(other) => *scenario = (**other).clone(),
        }
    }
}

fn quantity(scenario: &mut Scenario, change: impl FnOnce(&mut Quantity)) {
    let mut quantity = scenario.quantity.take().unwrap_or_default();
    change(&mut quantity);
    scenario.quantity = (quantity != Quantity::default()).then_some(quantity);
}

fn set_n(source: &mut Source, slot: usize, n: u64) {
    match source {
        Source::Like { n: planned, .. } if slot == 0 => *planned = n,
        Source::Like { .. } => {}
        Source::Parts { parts } => {
            if let Some(part) = parts.get_mut(slot) {
                part.count = n;
            }
        }
        Source::Groups { groups } => {
            if let Some(group) = groups.get_mut(slot) {
                group.n = n;
            }
        }
    }
}

/// The number of summands in one slot, or all together.
pub fn planned_n(source: &Source) -> u64 {
    match source {
        Source::Like { n, .. } => *n,
        Source::Parts { parts } => parts.iter().fold(0, |sum, part| sum.saturating_add(part.count)),
        Source::Groups { groups } => groups[0].n.saturating_add(groups[1].n),
    }
}
