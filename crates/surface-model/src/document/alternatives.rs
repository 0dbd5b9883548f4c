//! Which of several alternatives somebody meant.

use serde_json::{Map, Value};

use super::problems::Problems;
use super::shape::{KeyShape, Shape};
use super::structure::{check_choice, check_node, wrong_type};
use super::trail::Trail;

/// Checks a value against the alternatives of a schema, if it has any: it has to fulfil one of
/// them. If it does not, the complaint is about the alternative that it comes nearest to.
pub(super) fn check_alternatives(value: &Value, shape: Shape, at: Trail, problems: &mut Problems) {
    let alternatives = shape.alternatives();
    if alternatives.is_empty() {
        return;
    }
    let fitting: Vec<Shape> = alternatives.into_iter().filter(|s| s.takes_type_of(value)).collect();
    if fitting.is_empty() {
        problems.add(|| wrong_type(value, shape, at));
        return;
    }
    if let Some(choices) = fitting.iter().map(|s| s.choices()).collect::<Option<Vec<_>>>() {
        check_choice(value, &choices.concat(), shape, at, problems);
        return;
    }
    let nearest = nearest_alternative(value, &fitting, at, problems.none_alike());
    problems.append(nearest);
}

/// The problems with the alternative that fits best; none if one is fulfilled.
fn nearest_alternative(value: &Value, fitting: &[Shape], at: Trail, none: Problems) -> Problems {
    let misfits: Vec<usize> = fitting.iter().map(|shape| misfit(value, *shape, at)).collect();
    let least = misfits.iter().copied().min().unwrap_or_default();
    let mut likely = fitting.iter().zip(misfits).filter(|(_, misfit)| *misfit == least);
    let problems_with = |shape: &Shape| {
        let mut problems = none.none_alike();
        check_node(value, *shape, at, &mut problems);
        problems
    };
    let Some((first, _)) = likely.next() else { return none };
    let mut best = problems_with(first);
    // An alternative that does not fit at first sight is not fulfilled: the first is told.
    while least == 0 && best.count() > 0 {
        let Some((shape, _)) = likely.next() else { break };
        let problems = problems_with(shape);
        if problems.count() < best.count() {
            best = problems;
        }
    }
    best
}

/// How far a value is from an alternative at first sight. Not 0 means that it does not fulfil it.
fn misfit(value: &Value, shape: Shape, at: Trail) -> usize {
    match (value, shape.choices()) {
        (_, Some(choices)) => usize::from(!choices.contains(value)),
        (Value::Object(map), None) => object_misfit(map, shape, at),
        _ => 0,
    }
}

/// Keys unknown and keys missing; a wrong word where an alternative allows only one outweighs them.
fn object_misfit(map: &Map<String, Value>, shape: Shape, at: Trail) -> usize {
    let unknown =
        map.keys().filter(|key| matches!(shape.key(key, at.is_root()), KeyShape::Unknown)).count();
    let missing = shape.required().filter(|key| !map.contains_key(*key)).count();
    let wrong_tags = shape
        .keys()
        .filter(|(key, expected)| match (map.get(*key), expected.get("const")) {
            (Some(found), Some(only)) => found != only,
            _ => false,
        })
        .count();
    unknown + missing + 100 * wrong_tags
}
