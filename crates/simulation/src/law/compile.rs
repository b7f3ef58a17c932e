//! From a law as written to a law made ready: checks, normal form, facts.

use super::checks::{Checks, shares, show};
use super::density::StandardMoments;
use super::form::Form;
use super::opaque::Opaque;
use super::probabilities::Prepared;
use super::{
    ClosedFamily, ClosedForm, Law, LawParts, LawProblem, LawSpec, MixturePart, Moments, Piece, compound,
    families, lattice, moments,
};

/// Deepest nesting of operations.
const DEEPEST: usize = 64;

/// Smallest share of a mixture: keeps moments of rare, huge parts inside the range of doubles.
const LEAST_SHARE: f64 = 1e-250;

/// Most continuous pieces of one law.
const MOST_PIECES: usize = 1 << 14;

impl LawSpec {
    /// Makes the law ready for computing, or reports everything that is wrong with it.
    ///
    /// The pointers of the problems are relative to the law; a `data` law must carry its `values`.
    pub fn compile(&self) -> Result<Law, Vec<LawProblem>> {
        let mut problems = Vec::new();
        match form(self, "", 0, &mut problems) {
            Some(form) if problems.is_empty() => match finish(form) {
                Ok(law) => Ok(law),
                Err(message) => Err(vec![LawProblem { pointer: String::new(), message }]),
            },
            _ => {
                if problems.is_empty() {
                    let message = "cannot be made ready for computing".to_owned();
                    problems.push(LawProblem { pointer: String::new(), message });
                }
                Err(problems)
            }
        }
    }
}

/// The normal form of the law at `pointer`; `None` after reporting problems.
fn form(spec: &LawSpec, pointer: &str, depth: usize, problems: &mut Vec<LawProblem>) -> Option<Form> {
    if depth > DEEPEST {
        Checks::new(pointer, problems)
            .problem("", format!("must not be nested more than {DEEPEST} operations deep"));
        return None;
    }
    let inner = |law: &LawSpec, name: &str, problems: &mut Vec<LawProblem>| {
        form(law, &format!("{pointer}/{name}"), depth + 1, problems)
    };
    match spec {
        LawSpec::Mixture { parts } => mixture(parts, pointer, depth, problems),
        LawSpec::Affine { law, add, multiply } => {
            let mut checks = Checks::new(pointer, problems);
            let good = checks.finite("add", *add) & checks.finite("multiply", *multiply);
            let law = inner(law, "law", problems)?;
            let image = good.then(|| law.affine(*add, *multiply))?;
            if !representable(&image) {
                Checks::new(pointer, problems).problem(
                    "multiply",
                    format!("makes values too large or too small (got {})", show(*multiply)),
                );
                return None;
            }
            Some(image)
        }
        LawSpec::Cap { law, low, high } | LawSpec::Restrict { law, low, high } => {
            let mut checks = Checks::new(pointer, problems);
            let good = limits(*low, *high, matches!(spec, LawSpec::Restrict { .. }), &mut checks);
            let law = inner(law, "law", problems)?;
            let (low, high) = (low.unwrap_or(f64::NEG_INFINITY), high.unwrap_or(f64::INFINITY));
            let result = good.then(|| match spec {
                LawSpec::Cap { .. } => law.cap(low, high),
                _ => law.restrict(low, high),
            })?;
            accepted(result, pointer, problems)
        }
        LawSpec::Round { law, step } => {
            let good = Checks::new(pointer, problems).positive("step", *step);
            let law = inner(law, "law", problems)?;
            let result = good.then(|| law.round(*step))?;
            accepted(result, pointer, problems)
        }
        LawSpec::Compound { count, each } => {
            let count = inner(count, "count", problems);
            let each = inner(each, "each", problems);
            let (count, each) = (count?, each?);
            if let Err(message) = compound::check_count(&count) {
                Checks::new(&format!("{pointer}/count"), problems).problem("", message);
                return None;
            }
            accepted(compound::compile(count, each), pointer, problems)
        }
        _ => families::compile(spec, &mut Checks::new(pointer, problems)),
    }
}

fn mixture(
    parts: &[MixturePart],
    pointer: &str,
    depth: usize,
    problems: &mut Vec<LawProblem>,
) -> Option<Form> {
    let mut checks = Checks::new(pointer, problems);
    let mut good = true;
    if parts.is_empty() {
        checks.problem("parts", "must hold at least one part (got none)");
        good = false;
    }
    for (index, part) in parts.iter().enumerate() {
        good &= checks.positive(&format!("parts/{index}/weight"), part.weight);
    }
    if good {
        let weights: Vec<f64> = parts.iter().map(|part| part.weight).collect();
        for (index, share) in shares(&weights).into_iter().enumerate() {
            if share < LEAST_SHARE {
                let message =
                    format!("must be at least {LEAST_SHARE:e} of all weights (got {})", show(weights[index]));
                checks.problem(&format!("parts/{index}/weight"), message);
                good = false;
            }
        }
    }
    let forms: Vec<Option<Form>> = parts
        .iter()
        .enumerate()
        .map(|(index, part)| form(&part.law, &format!("{pointer}/parts/{index}/law"), depth + 1, problems))
        .collect();
    let forms: Vec<Form> = forms.into_iter().collect::<Option<_>>()?;
    if !good {
        return None;
    }
    let mixed = Form::mixture(parts.iter().map(|part| part.weight).zip(forms).collect());
    if mixed.pieces.len() > MOST_PIECES {
        Checks::new(pointer, problems)
            .problem("parts", format!("must not have more than {MOST_PIECES} continuous pieces in all"));
        return None;
    }
    Some(mixed)
}

/// Whether the limits of a cap or a restriction are usable.
fn limits(low: Option<f64>, high: Option<f64>, strictly: bool, checks: &mut Checks) -> bool {
    let mut good = true;
    for (name, limit) in [("low", low), ("high", high)] {
        if let Some(limit) = limit {
            good &= checks.finite(name, limit);
        }
    }
    if let (Some(low), Some(high), true) = (low, high, good)
        && (high < low || (strictly && high == low))
    {
        let relation = if strictly { "greater than" } else { "at least" };
        checks.problem("high", format!("must be {relation} `low` = {} (got {})", show(low), show(high)));
        good = false;
    }
    good
}

fn accepted(result: Result<Form, String>, pointer: &str, problems: &mut Vec<LawProblem>) -> Option<Form> {
    match result {
        Ok(form) => Some(form),
        Err(message) => {
            Checks::new(pointer, problems).problem("", message);
            None
        }
    }
}

/// Whether all values and scales are ordinary doubles.
fn representable(form: &Form) -> bool {
    let ordinary = |value: f64| value.is_finite() && value.abs() < 1e305;
    let scale = |value: f64| ordinary(value) && value.abs() > 1e-305;
    form.atoms.iter().all(|atom| ordinary(atom.value))
        && form.pieces.iter().all(|piece| ordinary(piece.add) && scale(piece.multiply))
        && form.opaque.iter().all(|opaque| ordinary(opaque.add) && scale(opaque.multiply))
}

/// The facts about a normal form.
pub(super) fn finish(mut form: Form) -> Result<Law, String> {
    form.merge_atoms();
    form.pieces.retain(|piece| piece.mass() > 0.0);
    if form.atoms.is_empty() && form.pieces.is_empty() && form.opaque.is_empty() {
        return Err("nothing is left of the law".to_owned());
    }
    let discrete = form.pieces.is_empty() && form.opaque.is_empty();
    if discrete && form.atoms.len() == 1 {
        form.closed_form = None;
        form.exact = Some(StandardMoments::finite(form.atoms[0].value, 0.0, 0.0, -3.0));
    }
    if discrete && form.missing_mass == 0.0 && form.closed_form.is_none() {
        two_values(&mut form);
    }
    let found = moments::of_form(&form);
    let index = moments::tail_index(&form);
    warn(&mut form.warnings, index);
    if !form.opaque.is_empty() && index > 3.0 {
        form.warnings.push(
            "the third absolute moment of this law is not computed: no Berry–Esseen bound is given"
                .to_owned(),
        );
    }
    let lattice = if discrete { lattice::of_atoms(&form.atoms) } else { None };
    let only_simulation = only_simulation(&form);
    let support = form.support();
    let sd = found.standard.sd;
    if found.standard.mean.is_some_and(|mean| !mean.is_finite()) || sd.is_some_and(|sd| !sd.is_finite()) {
        return Err("its mean or spread is too large to be written as a number".to_owned());
    }
    let known = [found.standard.skewness, found.standard.excess_kurtosis, found.third_absolute_ratio];
    if known.iter().flatten().any(|value| value.is_nan()) {
        return Err("a part of it lies too far out in a tail for double precision".to_owned());
    }
    let constant = sd == Some(0.0);
    // Squares and cubes may leave the range of doubles where the sd does not: `Law::sd` and
    // `Law::third_absolute_ratio` stay exact.
    let ordinary = |value: f64| {
        if constant { 0.0 } else { value.clamp(f64::MIN_POSITIVE, f64::MAX) }
    };
    let inside_doubles = |value: f64| value.clamp(f64::MIN, f64::MAX);
    let moments = Moments {
        mean: found.standard.mean,
        variance: sd.map(|sd| ordinary(sd * sd)),
        skewness: if constant { None } else { found.standard.skewness.map(inside_doubles) },
        excess_kurtosis: if constant { None } else { found.standard.excess_kurtosis.map(inside_doubles) },
        third_absolute_central: match (sd, found.third_absolute_ratio) {
            (Some(_), _) if constant => Some(0.0),
            (Some(sd), Some(ratio)) => Some(ordinary(ratio * sd * sd * sd)),
            _ => None,
        },
    };
    let parts = LawParts {
        atoms: form.atoms,
        missing_mass: form.missing_mass,
        pieces: form.pieces,
        lattice,
        closed_form: form.closed_form,
        moments,
        support,
        only_simulation,
        warnings: form.warnings,
    };
    Ok(Law::from_prepared(Prepared::new(
        parts,
        form.opaque,
        sd,
        found.third_absolute_ratio.map(inside_doubles),
    )))
}

/// A law on two values is an affine image of a Bernoulli law.
fn two_values(form: &mut Form) {
    if let [low, high] = form.atoms[..] {
        let width = high.value - low.value;
        if width.is_finite() {
            // The rarer value counts as the success, because its mass is the better known.
            let (p, add, multiply) = if high.mass <= low.mass {
                (high.mass, low.value, width)
            } else {
                (low.mass, high.value, -width)
            };
            form.closed_form =
                Some(ClosedForm { family: ClosedFamily::Binomial { trials: 1, p }, add, multiply });
            form.exact = Some(families::bernoulli_moments(p).image(add, multiply));
        }
    }
}

fn only_simulation(form: &Form) -> Option<String> {
    let opaque: &Opaque = form.opaque.first()?;
    let alone = form.opaque.len() == 1 && form.atoms.is_empty() && form.pieces.is_empty();
    if alone && opaque.law.has_closed_form() && form.closed_form.is_some() {
        return None;
    }
    Some(opaque.law.reason())
}

fn warn(warnings: &mut Vec<String>, tail_index: f64) {
    let sentence = if tail_index <= 1.0 {
        "no mean: sums of this quantity have no normal limit"
    } else if tail_index <= 2.0 {
        "infinite variance: sums of this quantity have no normal limit, and a standard error of the mean does not \
         exist"
    } else if tail_index <= 3.0 {
        "no third moment: convergence is slower than 1/√n"
    } else if tail_index <= 4.0 {
        "no fourth moment: the excess kurtosis does not exist, and estimates of the spread settle slowly"
    } else {
        return;
    };
    warnings.push(sentence.to_owned());
}

impl Law {
    /// A law from its normal form; the caller answers for the facts in it.
    #[allow(dead_code, reason = "used by tests that build laws by hand")]
    pub(crate) fn from_parts(parts: LawParts) -> Self {
        let sd = parts.moments.variance.map(f64::sqrt);
        let ratio = match (sd, parts.moments.third_absolute_central) {
            (Some(sd), Some(third)) if sd > 0.0 => Some(third / sd / sd / sd),
            _ => None,
        };
        Self::from_prepared(Prepared::new(parts, Vec::new(), sd, ratio))
    }

    /// The law of −X.
    pub fn reflected(&self) -> Self {
        let mut parts = LawParts {
            atoms: self
                .atoms
                .iter()
                .rev()
                .map(|atom| super::Atom { value: 0.0 - atom.value, ..*atom })
                .collect(),
            missing_mass: self.missing_mass,
            pieces: self
                .pieces
                .iter()
                .map(|piece| Piece { add: -piece.add, multiply: -piece.multiply, ..piece.clone() })
                .collect(),
            lattice: None,
            closed_form: self.closed_form.map(|closed| ClosedForm {
                add: -closed.add,
                multiply: -closed.multiply,
                ..closed
            }),
            moments: Moments {
                mean: self.moments.mean.map(|mean| 0.0 - mean),
                skewness: self.moments.skewness.map(|skewness| 0.0 - skewness),
                ..self.moments
            },
            support: (-self.support.1, -self.support.0),
            only_simulation: self.only_simulation.clone(),
            warnings: self.warnings.clone(),
        };
        parts.lattice = self.lattice.and_then(|lattice| {
            parts.atoms.first().map(|first| super::Lattice { offset: first.value, ..lattice })
        });
        let opaque = self
            .prepared()
            .opaque
            .iter()
            .map(|o| Opaque { add: -o.add, multiply: -o.multiply, ..o.clone() })
            .collect();
        Self::from_prepared(Prepared::new(parts, opaque, self.sd(), self.third_absolute_ratio()))
    }
}
