//! Addresses in the tree of laws: which part or group, then which child at each level.

use gaussgap_conclusions::scenario::Source;
use gaussgap_simulation::law::LawSpec;

/// The address of a law inside a scenario.
#[derive(Debug, Clone, PartialEq, Eq, Hash, Default)]
pub struct Place {
    /// Which part or group; 0 where there is one law.
    pub slot: usize,
    /// Which child at each level, from the outermost law.
    pub path: Vec<usize>,
}

impl Place {
    /// The outermost law of a slot.
    pub fn top(slot: usize) -> Self {
        Self { slot, path: Vec::new() }
    }

    /// The place of a child.
    pub fn child(&self, index: usize) -> Self {
        let mut path = self.path.clone();
        path.push(index);
        Self { slot: self.slot, path }
    }
}

/// The laws directly inside a law.
pub fn children(law: &LawSpec) -> Vec<&LawSpec> {
    match law {
        LawSpec::Mixture { parts } => parts.iter().map(|part| &part.law).collect(),
        LawSpec::Affine { law, .. }
        | LawSpec::Cap { law, .. }
        | LawSpec::Restrict { law, .. }
        | LawSpec::Round { law, .. } => vec![law],
        LawSpec::Compound { count, each } => vec![count, each],
        _ => Vec::new(),
    }
}

/// One child of a law, to change.
pub fn child_mut(law: &mut LawSpec, index: usize) -> Option<&mut LawSpec> {
    match law {
        LawSpec::Mixture { parts } => parts.get_mut(index).map(|part| &mut part.law),
        LawSpec::Affine { law, .. }
        | LawSpec::Cap { law, .. }
        | LawSpec::Restrict { law, .. }
        | LawSpec::Round { law, .. } => (index == 0).then_some(&mut **law),
        LawSpec::Compound { count, each } => match index {
            0 => Some(count),
            1 => Some(each),
            _ => None,
        },
        _ => None,
    }
}

/// The law at a place.
pub fn law_at<'a>(source: &'a Source, place: &Place) -> Option<&'a LawSpec> {
    let top = match source {
        Source::Like { law, .. } => (place.slot == 0).then_some(law),
        Source::Parts { parts } => parts.get(place.slot).map(|part| &part.law),
        Source::Groups { groups } => groups.get(place.slot).map(|group| &group.law),
    };
    place.path.iter().try_fold(top?, |law, &index| children(law).get(index).copied())
}

/// The law at a place, to change.
pub fn law_mut<'a>(source: &'a mut Source, place: &Place) -> Option<&'a mut LawSpec> {
    let top = match source {
        Source::Like { law, .. } => (place.slot == 0).then_some(law),
        Source::Parts { parts } => parts.get_mut(place.slot).map(|part| &mut part.law),
        Source::Groups { groups } => groups.get_mut(place.slot).map(|group| &mut group.law),
    };
    place.path.iter().try_fold(top?, |law, &index| child_mut(law, index))
}

/// The JSON pointer of the law at a place, as problems name it.
pub fn pointer(source: &Source, place: &Place) -> String {
    let mut pointer = match source {
        Source::Like { .. } => "/law".to_owned(),
        Source::Parts { .. } => format!("/parts/{}/law", place.slot),
        Source::Groups { .. } => format!("/groups/{}/law", place.slot),
    };
    let mut law = law_at(source, &Place::top(place.slot));
    for &index in &place.path {
        match law {
            Some(LawSpec::Mixture { .. }) => pointer.push_str(&format!("/parts/{index}/law")),
            Some(LawSpec::Compound { .. }) => pointer.push_str(if index == 0 { "/count" } else { "/each" }),
            _ => pointer.push_str("/law"),
        }
        law = law.and_then(|law| children(law).get(index).copied());
    }
    pointer
}

/// The share of zeros and the law of the rest, where a law is written as "zero, or else …".
pub fn mostly_zero(law: &LawSpec) -> Option<(f64, &LawSpec)> {
    let LawSpec::Mixture { parts } = law else { return None };
    let [zero, rest] = parts.as_slice() else { return None };
    let total = zero.weight + rest.weight;
    (zero.law == LawSpec::Constant { value: 0.0 } && total > 0.0).then(|| (zero.weight / total, &rest.law))
}

/// Whether a law is one step done to a single other law (so that it is shown as a card of a stack).
pub fn is_step(law: &LawSpec) -> bool {
    mostly_zero(law).is_some()
        || matches!(
            law,
            LawSpec::Affine { .. } | LawSpec::Cap { .. } | LawSpec::Restrict { .. } | LawSpec::Round { .. }
        )
}

/// The child that the step is done to.
pub fn step_child(law: &LawSpec) -> usize {
    usize::from(mostly_zero(law).is_some())
}

/// The outermost-first list of steps over a base law: places of the steps and of the base.
pub fn stack(law: &LawSpec, place: &Place) -> (Vec<Place>, Place) {
    let mut steps = Vec::new();
    let (mut law, mut place) = (law, place.clone());
    while is_step(law) {
        let index = step_child(law);
        steps.push(place.clone());
        place = place.child(index);
        match children(law).get(index) {
            Some(child) => law = child,
            None => break,
        }
    }
    (steps, place)
}

/// The law without its outermost step.
pub fn without_step(law: &LawSpec) -> Option<LawSpec> {
    is_step(law).then(|| children(law).get(step_child(law)).map(|law| (*law).clone())).flatten()
}

/// The same step done to another law.
pub fn step_over(step: &LawSpec, inner: LawSpec) -> LawSpec {
    let mut law = step.clone();
    let index = step_child(step);
    if let Some(child) = child_mut(&mut law, index) {
        *child = inner;
    }
    law
}

/// Exchanges a step with the step inside it: done earlier by one.
pub fn earlier(law: &LawSpec) -> Option<LawSpec> {
    let inner = without_step(law)?;
    let innermost = without_step(&inner)?;
    Some(step_over(&inner, step_over(law, innermost)))
}

#[cfg(test)]
mod tests {
    use super::*;

    fn example() -> LawSpec {
        LawSpec::Cap {
            law: Box::new(LawSpec::Affine {
                law: Box::new(LawSpec::Exponential { mean: 2.0 }),
                add: 1.0,
                multiply: 3.0,
            }),
            low: None,
            high: Some(9.0),
        }
    }

    #[test]
    fn places_and_pointers_agree() {
        let source = Source::Like { law: example(), n: 3, dependence: None };
        let inner = Place { slot: 0, path: vec![0, 0] };
        assert_eq!(law_at(&source, &inner), Some(&LawSpec::Exponential { mean: 2.0 }));
        assert_eq!(pointer(&source, &inner), "/law/law/law");
        assert_eq!(law_at(&source, &Place { slot: 0, path: vec![0, 0, 0] }), None);
        assert_eq!(law_at(&source, &Place::top(1)), None);
    }

    #[test]
    fn exchanging_steps_keeps_both() {
        let swapped = earlier(&example()).expect("two steps");
        let (steps, base) = stack(&swapped, &Place::top(0));
        assert_eq!((steps.len(), base.path.len()), (2, 2));
        assert!(matches!(swapped, LawSpec::Affine { .. }));
        assert_eq!(earlier(&swapped), Some(example()));
        assert_eq!(earlier(&LawSpec::Exponential { mean: 1.0 }), None);
    }
}
