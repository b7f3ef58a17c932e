//! The text summary of one scenario on standard output.

use gaussgap_conclusions::report::{Report, State};
use gaussgap_conclusions::words::remedy_in_words;
use gaussgap_pages::numbers;
use std::path::Path;

/// A few lines: file and title, verdict with its sentence, from which n on, the cheapest remedy that holds, and the
/// cautions. Ends with a line break.
pub fn summary(path: &Path, report: &Report) -> String {
    let mut lines = Vec::new();
    let file = path.display();
    match report.scenario.title.as_deref().map(str::trim).filter(|title| !title.is_empty()) {
        Some(title) => lines.push(format!("{file}: {}", one_line(title))),
        None => lines.push(file.to_string()),
    }
    lines.push(format!("  {}: {}", word(report.verdict.state), one_line(&report.verdict.because)));
    if let Some(checked) = &report.verdict.checked {
        let range = format!(
            "{} from {} to {} checked",
            if checked.every_n { "every n" } else { "not every n" },
            numbers::whole(checked.from),
            numbers::whole(checked.to)
        );
        lines.push(match report.verdict.safe_from {
            Some(n) => format!("  Safe from n = {} ({range}).", numbers::whole(n)),
            None => format!(
                "  Not safe from any n up to {0}: the claim still fails at {0}.",
                numbers::whole(checked.to)
            ),
        });
    }
    if let Some(distance) = report.distance.kolmogorov {
        let bound = report.distance.berry_esseen.as_ref();
        let bound = bound.map_or_else(String::new, |bound| {
            format!("; Berry–Esseen guarantees at most {}", numbers::number(bound.value, 3))
        });
        lines.push(format!("  Kolmogorov distance to the normal law {}{bound}.", numbers::figure(&distance)));
    }
    if report.verdict.state != State::Holds
        && let Some(remedy) = report.remedies.iter().find(|remedy| remedy.holds)
    {
        lines.push(format!("  What would hold: {}.", one_line(&remedy_in_words(remedy))));
    }
    lines.extend(report.cautions.iter().map(|caution| format!("  Caution: {}", one_line(caution))));
    let mut text = lines.join("\n");
    text.push('\n');
    text
}

fn word(state: State) -> &'static str {
    match state {
        State::Holds => "HOLDS",
        State::Fails => "FAILS",
        State::Undecided => "UNDECIDED",
    }
}

/// Text of a scenario on one line, without control characters.
fn one_line(text: &str) -> String {
    text.split(|c: char| c.is_whitespace() || c.is_control())
        .filter(|word| !word.is_empty())
        .collect::<Vec<_>>()
        .join(" ")
}
