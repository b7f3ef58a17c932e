//! The bundled scenarios of the Quillmere Ferry Line, and the blank one.

use gaussgap_conclusions::scenario::{
    Claim, MethodSpec, Quantity, SCENARIO_FORMAT, Scenario, Search, Sides, Source, Spread, Statistic,
    Tolerance,
};
use gaussgap_simulation::law::LawSpec;
use gaussgap_simulation::sum::RouteChoice;

/// A bundled scenario: its file name and text.
#[derive(Debug, Clone, Copy)]
pub struct Example {
    /// File name.
    pub file: &'static str,
    /// The scenario document.
    pub text: &'static str,
}

macro_rules! examples {
    ($($file:literal),* $(,)?) => {
        [$(Example { file: $file, text: include_str!(concat!("../../../../../scenarios/", $file)) }),*]
    };
}

/// All bundled scenarios, in the order of the start page.
pub const EXAMPLES: [Example; 11] = examples![
    "boarding-time.json",
    "on-board-spending.json",
    "no-shows.json",
    "deck-load.json",
    "damage-claims.json",
    "gauge-rounding.json",
    "fuel-per-crossing.json",
    "ticket-queue.json",
    "delay-cost-capped.json",
    "storm-repairs.json",
    "salvage-delay.json",
];

/// The pilot data that bundled scenarios name: file name and text.
pub const DATA: [(&str, &str); 1] =
    [("on-board-spending.csv", include_str!("../../../../../scenarios/on-board-spending.csv"))];

/// A plan to start from.
pub fn blank() -> Scenario {
    Scenario {
        format: SCENARIO_FORMAT.to_owned(),
        title: None,
        notes: None,
        quantity: Some(Quantity { name: Some("waiting time".to_owned()), unit: Some("min".to_owned()) }),
        source: Source::Like { law: LawSpec::Exponential { mean: 10.0 }, n: 40, dependence: None },
        statistic: Statistic::Mean,
        claim: Claim::Interval { level: 0.95, sides: Sides::Two, spread: Spread::Known },
        tolerance: Tolerance::Absolute(0.01),
        method: MethodSpec {
            route: RouteChoice::Auto,
            draws: 4_000_000,
            seed: 20_260_101,
            confidence: 0.999,
        },
        probe_z: vec![-4.0, -3.0, -2.0, -1.0, 0.0, 1.0, 2.0, 3.0, 4.0],
        search: Search { up_to: 10_000 },
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn every_bundled_scenario_of_the_folder_is_listed() {
        let folder = std::path::Path::new(env!("CARGO_MANIFEST_DIR")).join("../../scenarios");
        let mut files: Vec<String> = std::fs::read_dir(folder)
            .expect("the folder of scenarios")
            .filter_map(|entry| entry.ok()?.file_name().into_string().ok())
            .filter(|name| name.ends_with(".json") || name.ends_with(".csv"))
            .collect();
        files.sort();
        let mut listed: Vec<&str> = EXAMPLES.iter().map(|e| e.file).chain(DATA.iter().map(|d| d.0)).collect();
        listed.sort_unstable();
        assert_eq!(files, listed);
    }
}
