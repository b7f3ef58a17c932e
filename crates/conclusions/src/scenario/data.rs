//! Pilot data kept in files: which a scenario asks for, and putting the values in.

use super::{Scenario, Source};
use crate::Problem;
use gaussgap_simulation::law::LawSpec;

/// A `data` law that still has to be filled from a file.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct DataRequest {
    /// JSON pointer of the law in the scenario.
    pub pointer: String,
    /// The file, relative to the scenario's own.
    pub path: String,
    /// The column: its name in the header, or its number from 1.
    pub column: String,
}

impl Scenario {
    /// The `data` laws whose values live in a file and are not there yet.
    pub fn data_requests(&self) -> Vec<DataRequest> {
        let mut requests = Vec::new();
        self.source.visit_laws(&mut |pointer, law| {
            if let LawSpec::Data { values: None, path: Some(path), column, .. } = law {
                requests.push(DataRequest {
                    pointer: pointer.to_owned(),
                    path: path.clone(),
                    column: column.clone().unwrap_or_else(|| "1".to_owned()),
                });
            }
        });
        requests
    }

    /// Puts loaded values into the `data` law at a pointer of [`Scenario::data_requests`]. The law keeps its path
    /// and column, and these, not the values, are written when the scenario is saved.
    pub fn fill_data(&mut self, pointer: &str, loaded: Vec<f64>) -> Result<(), Problem> {
        let mut loaded = Some(loaded);
        self.source.visit_laws_mut(&mut |place, law| {
            if place == pointer
                && let LawSpec::Data { values, .. } = law
            {
                *values = loaded.take();
            }
        });
        match loaded {
            None => Ok(()),
            Some(_) => Err(Problem {
                pointer: pointer.to_owned(),
                message: "there is no data law at this place".to_owned(),
            }),
        }
    }
}

impl Source {
    /// Visits every law, nested ones included, with its JSON pointer.
    pub fn visit_laws(&self, visit: &mut dyn FnMut(&str, &LawSpec)) {
        match self {
            Self::Like { law, .. } => visit_law(law, "/law", visit),
            Self::Parts { parts } => {
                for (index, part) in parts.iter().enumerate() {
                    visit_law(&part.law, &format!("/parts/{index}/law"), visit);
                }
            }
            Self::Groups { groups } => {
                for (index, group) in groups.iter().enumerate() {
                    visit_law(&group.law, &format!("/groups/{index}/law"), visit);
                }
            }
        }
    }

    /// Visits every law, nested ones included, with its JSON pointer, to change it.
    pub fn visit_laws_mut(&mut self, visit: &mut dyn FnMut(&str, &mut LawSpec)) {
        match self {
            Self::Like { law, .. } => visit_law_mut(law, "/law", visit),
            Self::Parts { parts } => {
                for (index, part) in parts.iter_mut().enumerate() {
                    visit_law_mut(&mut part.law, &format!("/parts/{index}/law"), visit);
                }
            }
            Self::Groups { groups } => {
                for (index, group) in groups.iter_mut().enumerate() {
                    visit_law_mut(&mut group.law, &format!("/groups/{index}/law"), visit);
                }
            }
        }
    }
}

fn visit_law(law: &LawSpec, pointer: &str, visit: &mut dyn FnMut(&str, &LawSpec)) {
    visit(pointer, law);
    match law {
        LawSpec::Mixture { parts } => {
            for (index, part) in parts.iter().enumerate() {
                visit_law(&part.law, &format!("{pointer}/parts/{index}/law"), visit);
            }
        }
        LawSpec::Affine { law, .. }
        | LawSpec::Cap { law, .. }
        | LawSpec::Restrict { law, .. }
        | LawSpec::Round { law, .. } => visit_law(law, &format!("{pointer}/law"), visit),
        LawSpec::Compound { count, each } => {
            visit_law(count, &format!("{pointer}/count"), visit);
            visit_law(each, &format!("{pointer}/each"), visit);
        }
        _ => {}
    }
}

fn visit_law_mut(law: &mut LawSpec, pointer: &str, visit: &mut dyn FnMut(&str, &mut LawSpec)) {
    visit(pointer, law);
    match law {
        LawSpec::Mixture { parts } => {
            for (index, part) in parts.iter_mut().enumerate() {
                visit_law_mut(&mut part.law, &format!("{pointer}/parts/{index}/law"), visit);
            }
        }
        LawSpec::Affine { law, .. }
        | LawSpec::Cap { law, .. }
        | LawSpec::Restrict { law, .. }
        | LawSpec::Round { law, .. } => visit_law_mut(law, &format!("{pointer}/law"), visit),
        LawSpec::Compound { count, each } => {
            visit_law_mut(count, &format!("{pointer}/count"), visit);
            visit_law_mut(each, &format!("{pointer}/each"), visit);
        }
        _ => {}
    }
}
