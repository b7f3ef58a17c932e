//! Capping the summand at a stated value: calmer sums, at the price of a bias that is stated.

use super::{claim_with, from_facts};
use crate::claims::is_studentized;
use crate::cost;
use crate::prepared::Prepared;
use crate::report::Remedy;
use crate::scenario::{Claim, Source};
use crate::words::nouns::{text_with_unit, with_unit};
use crate::words::numbers::{number_to, percent};
use gaussgap_simulation::law::LawSpec;
use gaussgap_simulation::sum::SumSpec;
use gaussgap_simulation::work::{Cancelled, Work};

/// Shares of the law left untouched, the mildest cap first.
const SHARES: [f64; 3] = [0.999, 0.99, 0.95];

/// Units of work for the caps of claims that are not simulated (see [`cost`]); the first is always tried.
const ALLOWED: f64 = 3000.0;

/// Laws less skewed than this gain nothing from a cap.
const LEAST_SKEWNESS: f64 = 0.5;

/// The mildest cap that holds, or the mildest and the hardest one tried where none does.
pub(super) fn remedies(prepared: &Prepared, work: &Work) -> Result<Vec<Remedy>, Cancelled> {
    let (Source::Like { law: spec, .. }, [law]) = (&prepared.scenario.source, prepared.laws.as_slice())
    else {
        return Ok(Vec::new());
    };
    // A cap changes the number a threshold asks about; there it is no remedy.
    if matches!(prepared.scenario.claim, Claim::Threshold { .. })
        || law.atoms.len() == 2 && law.pieces.is_empty()
    {
        return Ok(Vec::new());
    }
    let moments = law.moments;
    let (upper, lower) = law.tail_indices();
    let downwards = match moments.skewness {
        Some(skewness) if skewness.abs() < LEAST_SKEWNESS => return Ok(Vec::new()),
        Some(skewness) => skewness < 0.0,
        None => lower < upper,
    };
    let mut tried = Vec::new();
    let mut spent = 0.0;
    for share in SHARES {
        work.check()?;
        let exact = if downwards { law.quantile_above(share) } else { law.quantile(share) };
        // A limit that can be stated: three significant digits.
        let limit = format!("{exact:.2e}").parse::<f64>().unwrap_or(exact);
        // A limit at or beyond the end of the law caps nothing.
        if if downwards { limit <= law.support.0 } else { limit >= law.support.1 } {
            continue;
        }
        let (low, high) = if downwards { (Some(limit), None) } else { (None, Some(limit)) };
        let capped = LawSpec::Cap { law: Box::new(spec.clone()), low, high };
        let Ok(capped) = capped.compile() else { continue };
        if capped.moments.variance.is_none_or(|variance| variance == 0.0) {
            continue;
        }
        if !is_studentized(&prepared.scenario.claim) {
            let spec = SumSpec::like_summands(capped.clone(), prepared.total());
            spent += cost::of_sum(&spec);
            if spent > ALLOWED && !tried.is_empty() {
                break;
            }
        }
        let Some(facts) = claim_with(prepared, std::slice::from_ref(&capped), &prepared.planned, work)?
        else {
            continue;
        };
        let side = if downwards { "from below at" } else { "at" };
        let name = format!("cap each value {side} {}", with_unit(prepared.scenario, limit));
        let remedy =
            from_facts(prepared, name, &facts, &bias(prepared, moments.mean, capped.moments.mean, share));
        if remedy.holds {
            return Ok(vec![remedy]);
        }
        tried.push(remedy);
    }
    // Nothing holds: the mildest and the hardest show what a cap buys.
    if tried.len() > 2 {
        tried.remove(1);
    }
    Ok(tried)
}

/// What the cap costs.
fn bias(prepared: &Prepared, before: Option<f64>, after: Option<f64>, share: f64) -> String {
    // As many digits as tell the two means apart.
    let told = |before: f64, after: f64, value: f64| {
        let digits =
            (4..=9).find(|digits| number_to(before, *digits) != number_to(after, *digits)).unwrap_or(4);
        text_with_unit(prepared.scenario, &number_to(value, digits))
    };
    let touched = percent((1e6 * (1.0 - share)).round() / 1e6);
    match (before, after) {
        (Some(before), Some(after)) if before != 0.0 => format!(
            "changes what is estimated: {touched} of the values are capped, and the mean becomes {} instead of {}, \
             a bias of {} %",
            told(before, after, after),
            told(before, after, before),
            number_to(100.0 * (after / before - 1.0), 2)
        ),
        (_, Some(after)) => format!(
            "changes what is estimated: {touched} of the values are capped, and the mean becomes {}",
            with_unit(prepared.scenario, after)
        ),
        _ => format!("changes what is estimated: {touched} of the values are capped"),
    }
}
