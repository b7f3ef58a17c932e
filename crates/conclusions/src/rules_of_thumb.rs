//! Rules of thumb, judged: what each asks for, whether the planned n meets it, whether the computed verdict agrees.

use crate::bounds::two_valued;
use crate::prepared::Prepared;
use crate::report::{RuleOfThumb, State};
use crate::scenario::{LARGEST_N, Source};

/// One rule: its words, its source, and the smallest n it accepts for a summand, `None` where no n does.
struct Rule {
    words: &'static str,
    source: &'static str,
    needs: fn(&Shape) -> Option<f64>,
    only_two_valued: bool,
    /// The rule speaks only of laws more skewed than this.
    beyond_skewness: Option<f64>,
}

/// What the rules look at in one law.
struct Shape {
    skewness: Option<f64>,
    p: Option<f64>,
}

const RULES: &[Rule] = &[
    Rule {
        words: "n ≥ 30 (whatever the law)",
        source: "common practice",
        needs: |_| Some(30.0),
        only_two_valued: false,
        beyond_skewness: None,
    },
    Rule {
        words: "np ≥ 5 and nq ≥ 5 (the curve of a count, with continuity correction)",
        source: "common practice",
        needs: |shape| shape.p.map(|p| 5.0 / p.min(1.0 - p)),
        only_two_valued: true,
        beyond_skewness: None,
    },
    Rule {
        words: "np ≥ 10 and nq ≥ 10 (the same, stricter)",
        source: "common practice",
        needs: |shape| shape.p.map(|p| 10.0 / p.min(1.0 - p)),
        only_two_valued: true,
        beyond_skewness: None,
    },
    Rule {
        words: "npq ≥ 9 (the same, by the variance)",
        source: "common practice",
        needs: |shape| shape.p.map(|p| 9.0 / (p * (1.0 - p))),
        only_two_valued: true,
        beyond_skewness: None,
    },
    Rule {
        words: "n > 25 γ² (two-sided 95 % t-interval wrong at most 6 % of the time)",
        source: "Cochran, Sampling Techniques, 3rd ed., §2.15 (from memory)",
        needs: |shape| shape.skewness.map(|skewness| above(25.0 * skewness * skewness)),
        only_two_valued: false,
        beyond_skewness: None,
    },
    Rule {
        words: "n > 28 + 25 γ² (the same, with the normal quantile and an estimated spread)",
        source: "Sugden, Smith and Jones 2000, JRSS B 62:787–793 (formula from memory)",
        needs: |shape| shape.skewness.map(|skewness| above(28.0 + 25.0 * skewness * skewness)),
        only_two_valued: false,
        beyond_skewness: None,
    },
    Rule {
        words: "n ≥ 355 γ² in each group, where |γ| > 1 (each 2.5 % tail between 2 % and 3 %)",
        source: "Kohavi et al. 2014, KDD, p. 8",
        needs: |shape| {
            let skewness = shape.skewness?;
            // Of two groups, one may be milder than the rule speaks of; it asks for nothing there.
            Some(if skewness.abs() > 1.0 { 355.0 * skewness * skewness } else { 1.0 })
        },
        only_two_valued: false,
        beyond_skewness: Some(1.0),
    },
];

/// The smallest whole number greater than a bound.
fn above(bound: f64) -> f64 {
    bound.floor() + 1.0
}

/// Every rule that applies to the scenario.
pub(crate) fn rules(prepared: &Prepared, state: State) -> Vec<RuleOfThumb> {
    let shapes = prepared
        .laws
        .iter()
        .map(|law| Shape { skewness: law.moments.skewness, p: two_valued(law) })
        .collect::<Vec<_>>();
    let like = matches!(prepared.scenario.source, Source::Like { .. });
    let unlike_parts = matches!(prepared.scenario.source, Source::Parts { .. });
    RULES
        .iter()
        .filter(|rule| !rule.only_two_valued || (like && shapes.iter().all(|shape| shape.p.is_some())))
        .filter(|rule| {
            let skewed = |limit: f64| {
                shapes.iter().any(|shape| shape.skewness.is_none_or(|skewness| skewness.abs() > limit))
            };
            rule.beyond_skewness.is_none_or(skewed)
        })
        // Unlike parts have no common skewness; only the rule that ignores the law speaks of them.
        .filter(|rule| !unlike_parts || (rule.needs)(&Shape { skewness: None, p: None }).is_some())
        .map(|rule| judge(rule, &shapes, prepared, state))
        .collect()
}

fn judge(rule: &Rule, shapes: &[Shape], prepared: &Prepared, state: State) -> RuleOfThumb {
    let needs = shapes.iter().map(rule.needs).collect::<Vec<_>>();
    // In every group the group's own n; otherwise the total.
    let sizes = match prepared.scenario.source {
        Source::Groups { .. } => prepared.planned.clone(),
        _ => vec![prepared.total(); shapes.len()],
    };
    let enough = needs
        .iter()
        .zip(&sizes)
        .all(|(needs, n)| needs.is_some_and(|needs| *n as f64 >= needs - 1e-9 * needs));
    let largest =
        needs.iter().copied().try_fold(0.0_f64, |largest, needs| needs.map(|needs| largest.max(needs)));
    let n =
        largest.map(|needs| (needs - 1e-9 * needs).ceil().max(1.0)).filter(|n| *n <= LARGEST_N as f64 * 1e6);
    RuleOfThumb {
        rule: rule.words.to_owned(),
        source: rule.source.to_owned(),
        n: n.map(|n| n as u64),
        says: if enough { "enough" } else { "not enough" }.to_owned(),
        agrees: match state {
            State::Holds => Some(enough),
            State::Fails => Some(!enough),
            State::Undecided => None,
        },
    }
}
