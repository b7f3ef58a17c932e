//! A report in one paragraph, for copying and for the command's text output.

use super::numbers::{about_points, whole};
use super::plan::plan_sentence;
use crate::report::{Remedy, Report, State};
use crate::scenario::Scenario;
use gaussgap_simulation::sum::Route;

/// The report in one paragraph: the plan, the finding, from which n on it is safe, the cheapest remedy that
/// holds, the distance, and how it was computed.
pub fn summary_paragraph(report: &Report) -> String {
    let mut sentences = vec![plan_sentence(&report.scenario), report.verdict.because.clone()];
    sentences.extend(safe_from_sentence(report));
    if report.verdict.state != State::Holds
        && let Some(remedy) = report.remedies.iter().find(|remedy| remedy.holds)
    {
        sentences.push(format!("What would hold: {}.", remedy_in_words(remedy)));
    }
    if let Some(distance) = &report.distance.kolmogorov {
        let error = match report.method.route {
            Some(Route::Simulation) => format!(" (± {})", about_points(distance.error)),
            _ => String::new(),
        };
        sentences.push(format!(
            "The largest gap between the actual law and the normal curve is {} of probability{error}.",
            about_points(distance.value)
        ));
    }
    if let Some(route) = report.method.route {
        let how = match (route, report.method.draws) {
            (Route::Simulation, Some(draws)) => format!("by simulation with {} draws", whole(draws)),
            (Route::Simulation, None) => "by simulation".to_owned(),
            (exact, draws) => {
                let exact = match exact {
                    Route::ClosedForm => "in closed form",
                    Route::Lattice => "exactly, on the lattice of its values",
                    _ => "by numerical inversion",
                };
                match draws {
                    Some(draws) => {
                        format!("{exact}, and the claim by simulation with {} draws", whole(draws))
                    }
                    None => exact.to_owned(),
                }
            }
        };
        sentences.push(format!("Computed {how}."));
    }
    sentences.join(" ")
}

/// A remedy with what it gives: `take n = 325: 285 more than planned; the interval then covers 94.7 %`.
pub fn remedy_in_words(remedy: &Remedy) -> String {
    if remedy.note.trim().is_empty() {
        remedy.name.clone()
    } else {
        format!("{}: {}", remedy.name, remedy.note.trim())
    }
}

/// `Safe from n = 230 on (every n up to 10,000 was checked).`
pub(crate) fn safe_from_sentence(report: &Report) -> Option<String> {
    let checked = report.verdict.checked.as_ref()?;
    let up_to = whole(checked.to);
    let how = if checked.every_n {
        format!("every n up to {up_to} was checked")
    } else {
        format!(
            "{} values of n up to {up_to} were checked",
            whole(checked.which.as_ref().map_or(0, Vec::len) as u64)
        )
    };
    let n = size_word(&report.scenario);
    Some(match report.verdict.safe_from {
        Some(from) if from <= checked.from && report.verdict.last_failing.is_none() => {
            format!("Safe at every {n} ({how}).")
        }
        Some(from) => format!("Safe from {n} = {} on ({how}).", whole(from)),
        None => format!("No safe {n} was found up to {up_to}."),
    })
}

/// What n counts in this scenario.
fn size_word(scenario: &Scenario) -> &'static str {
    match scenario.source {
        crate::scenario::Source::Like { .. } => "n",
        _ => "total n",
    }
}
