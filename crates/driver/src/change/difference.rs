//! What differs between two design files: what moved, and by how much.

use serde::Serialize;
use serde_json::{Map, Value};
use surface_model::document::Address;

/// One thing that differs.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Difference {
    /// Where, with names; of the file after if it is there, else of the file before.
    pub at: Address,
    /// What it was; null where there was nothing.
    pub from: Option<Value>,
    /// What it is; null where there is nothing.
    pub to: Option<Value>,
    /// By how much a number moved, in the unit its key names; null where it is none.
    pub by: Option<f64>,
    /// The same in per cent of what it was; null for what was zero.
    pub by_percent: Option<f64>,
}

/// Everything that differs between two documents, remarks aside, in the order of the first.
/// Entries of lists are held against those of the same name where all have one, else in order.
#[must_use]
pub fn differences(before: &Value, after: &Value) -> Vec<Difference> {
    let mut comparison = Comparison { before, after, found: Vec::new() };
    comparison.values(&Address::root(), Some(before), Some(after));
    comparison.found
}

struct Comparison<'a> {
    before: &'a Value,
    after: &'a Value,
    found: Vec<Difference>,
}

impl Comparison<'_> {
    fn values(&mut self, at: &Address, from: Option<&Value>, to: Option<&Value>) {
        match (from, to) {
            (Some(Value::Object(from)), Some(Value::Object(to))) => self.objects(at, from, to),
            (Some(Value::Array(from)), Some(Value::Array(to))) => self.lists(at, from, to),
            _ if same(from, to) => {}
            _ => self.differ(at, from, to),
        }
    }

    fn objects(&mut self, at: &Address, from: &Map<String, Value>, to: &Map<String, Value>) {
        let added = to.keys().filter(|key| !from.contains_key(*key));
        let keys = from.keys().chain(added).filter(|key| *key != "note" && *key != "$schema");
        for key in keys {
            self.values(&at.clone().key(key.as_str()), from.get(key), to.get(key));
        }
    }

    fn lists(&mut self, at: &Address, from: &[Value], to: &[Value]) {
        if let (Some(names_before), Some(names_after)) = (names(from), names(to)) {
            let added = names_after.iter().filter(|name| !names_before.contains(*name));
            for name in names_before.iter().chain(added) {
                let of = |list, names: &[&str]| entry(list, names, name);
                let (old, new) = (of(from, &names_before), of(to, &names_after));
                let index = new.or(old).map_or(0, |(index, _)| index);
                let here = at.clone().index(index);
                self.values(&here, old.map(|(_, entry)| entry), new.map(|(_, entry)| entry));
            }
        } else {
            for index in 0..from.len().max(to.len()) {
                self.values(&at.clone().index(index), from.get(index), to.get(index));
            }
        }
    }

    fn differ(&mut self, at: &Address, from: Option<&Value>, to: Option<&Value>) {
        let numbers = from.and_then(Value::as_f64).zip(to.and_then(Value::as_f64));
        let by = numbers.map(|(from, to)| to - from);
        let by_percent = numbers
            .filter(|(from, _)| *from != 0.0)
            .map(|(from, to)| (to - from) / from.abs() * 100.0)
            .filter(|percent| percent.is_finite());
        let document = if to.is_some() { self.after } else { self.before };
        self.found.push(Difference {
            at: at.with_names(document),
            from: from.cloned(),
            to: to.cloned(),
            by,
            by_percent,
        });
    }
}

/// Two numbers that differ by less of themselves differ by rounding alone.
const ROUNDING: f64 = 1e-14;

/// Whether two values are the same; 2 and 2.0 are, and numbers that nothing but rounding moved.
fn same(from: Option<&Value>, to: Option<&Value>) -> bool {
    match (from.and_then(Value::as_f64), to.and_then(Value::as_f64)) {
        (Some(from), Some(to)) => (to - from).abs() <= ROUNDING * from.abs().max(to.abs()),
        _ => from == to,
    }
}

/// The names of all entries, if each has one of its own.
fn names(list: &[Value]) -> Option<Vec<&str>> {
    let names: Option<Vec<&str>> =
        list.iter().map(|entry| entry.get("name").and_then(Value::as_str)).collect();
    let names = names?;
    let mut sorted = names.clone();
    sorted.sort_unstable();
    sorted.windows(2).all(|pair| pair[0] != pair[1]).then_some(names)
}

fn entry<'v>(list: &'v [Value], names: &[&str], name: &str) -> Option<(usize, &'v Value)> {
    let index = names.iter().position(|other| *other == name)?;
    Some((index, list.get(index)?))
}
