//! A JSON Schema as the check reads it: what a node may be, and how to say so.

use serde_json::Value;

use super::wording::{counted, either, quoted};
use super::{NOTE, SCHEMA};

/// How many references to references are followed before a schema is taken to allow anything.
const LONGEST_CHAIN: usize = 32;

/// A schema within a root schema, references followed.
#[derive(Clone, Copy)]
pub(super) struct Shape<'s> {
    root: &'s Value,
    schema: &'s Value,
}

/// What an object's schema says to a key.
pub(super) enum KeyShape<'s> {
    /// Its value has this shape.
    Known(Shape<'s>),
    /// It holds a remark.
    Remark,
    /// The key is not allowed.
    Unknown,
}

impl<'s> Shape<'s> {
    /// The shape of a whole document.
    pub(super) fn of(root: &'s Value) -> Self {
        Self { root, schema: root }.within(root)
    }

    fn within(self, schema: &'s Value) -> Self {
        let mut schema = schema;
        for _ in 0..LONGEST_CHAIN {
            let Some(reference) = schema.get("$ref").and_then(Value::as_str) else {
                return Self { schema, ..self };
            };
            let pointer = reference.strip_prefix('#').unwrap_or(reference);
            match self.root.pointer(pointer) {
                Some(target) => schema = target,
                None => break,
            }
        }
        Self { schema: &Value::Bool(true), ..self }
    }

    /// A keyword of the schema.
    pub(super) fn get(self, keyword: &str) -> Option<&'s Value> {
        self.schema.get(keyword)
    }

    fn list(self, keyword: &str) -> &'s [Value] {
        self.get(keyword).and_then(Value::as_array).map_or(&[], Vec::as_slice)
    }

    /// A keyword whose value is a number.
    pub(super) fn number(self, keyword: &str) -> Option<f64> {
        self.get(keyword).and_then(Value::as_f64)
    }

    /// A keyword whose value is a count.
    pub(super) fn count(self, keyword: &str) -> Option<usize> {
        self.get(keyword).and_then(Value::as_u64).and_then(|count| usize::try_from(count).ok())
    }

    fn types(self) -> Vec<&'s str> {
        match self.get("type") {
            Some(Value::String(one)) => vec![one],
            Some(Value::Array(several)) => several.iter().filter_map(Value::as_str).collect(),
            _ => Vec::new(),
        }
    }

    /// Whether the schema is `false`, which nothing fulfils.
    fn is_never(self) -> bool {
        self.schema == &Value::Bool(false)
    }

    /// The only values allowed, from `const` or `enum`.
    pub(super) fn choices(self) -> Option<&'s [Value]> {
        match (self.get("const"), self.get("enum")) {
            (Some(one), _) => Some(std::slice::from_ref(one)),
            (None, Some(Value::Array(several))) => Some(several),
            _ => None,
        }
    }

    /// Whether the type of `value` is allowed. Any number passes for a whole one here: that it is
    /// not whole is told by itself.
    pub(super) fn takes_type_of(self, value: &Value) -> bool {
        if self.is_never() {
            return false;
        }
        if let Some(choices) = self.choices() {
            return choices.iter().any(|choice| same_type(choice, value));
        }
        let types = self.types();
        types.is_empty() || types.iter().any(|name| is_of_type(value, name))
    }

    /// Whether a number has to be whole.
    pub(super) fn is_whole(self) -> bool {
        let types = self.types();
        types.contains(&"integer") && !types.contains(&"number")
    }

    /// Whether anything at all is said about keys.
    fn has_keys(self) -> bool {
        self.get("properties").is_some() || self.get("patternProperties").is_some()
    }

    /// The known keys of an object with their schemas.
    pub(super) fn keys(self) -> impl Iterator<Item = (&'s str, Self)> {
        let properties = self.get("properties").and_then(Value::as_object);
        properties
            .into_iter()
            .flatten()
            .map(move |(key, schema)| (key.as_str(), self.within(schema)))
    }

    /// The keys that have to be there.
    pub(super) fn required(self) -> impl Iterator<Item = &'s str> {
        self.list("required").iter().filter_map(Value::as_str)
    }

    /// What the schema says to a key of an object.
    pub(super) fn key(self, key: &str, at_root: bool) -> KeyShape<'s> {
        if let Some(schema) = self.get("properties").and_then(|known| known.get(key)) {
            return KeyShape::Known(self.within(schema));
        }
        if key == NOTE || (key == SCHEMA && at_root) {
            return KeyShape::Remark;
        }
        let patterns = self.get("patternProperties").and_then(Value::as_object);
        for (pattern, schema) in patterns.into_iter().flatten() {
            if matches_pattern(pattern, key) {
                return KeyShape::Known(self.within(schema));
            }
        }
        match self.get("additionalProperties") {
            Some(Value::Bool(false)) => KeyShape::Unknown,
            None if self.has_keys() => KeyShape::Unknown,
            Some(schema) => KeyShape::Known(self.within(schema)),
            None => KeyShape::Known(self.within(&Value::Bool(true))),
        }
    }

    /// The shape of an entry of a list; `None` if there may be none at this index.
    pub(super) fn entry(self, index: usize) -> Option<Self> {
        let schema = self.list("prefixItems").get(index).or_else(|| self.get("items"));
        let shape = self.within(schema.unwrap_or(&Value::Bool(true)));
        (!shape.is_never()).then_some(shape)
    }

    /// All the schemas of `allOf`.
    pub(super) fn all_of(self) -> impl Iterator<Item = Self> {
        self.list("allOf").iter().map(move |schema| self.within(schema))
    }

    /// The schemas of `anyOf` and `oneOf`, those within them in their place.
    pub(super) fn alternatives(self) -> Vec<Self> {
        let mut out = Vec::new();
        self.collect_alternatives(&mut out, LONGEST_CHAIN);
        out
    }

    fn collect_alternatives(self, out: &mut Vec<Self>, depth: usize) {
        for schema in self.list("anyOf").iter().chain(self.list("oneOf")) {
            let shape = self.within(schema);
            let nested = shape.get("anyOf").or_else(|| shape.get("oneOf")).is_some();
            if nested && shape.get("type").is_none() && depth > 0 {
                shape.collect_alternatives(out, depth - 1);
            } else {
                out.push(shape);
            }
        }
    }

    /// What the schema allows, in plain words: `a list of numbers`, `"flat"`.
    pub(super) fn in_words(self) -> String {
        self.described(3)
    }

    fn described(self, depth: usize) -> String {
        if self.is_never() {
            return "nothing".into();
        }
        if let Some(choices) = self.choices() {
            return choices_in_words(choices);
        }
        let alternatives = self.alternatives();
        if !alternatives.is_empty() {
            return kinds(alternatives.into_iter().map(|shape| shape.described(depth)));
        }
        let types = self.types();
        if types.is_empty() {
            return "any value".into();
        }
        kinds(types.into_iter().map(|name| match name {
            "null" => "null".into(),
            "boolean" => "true or false".into(),
            "string" => "a text in quotes".into(),
            "number" | "integer" => self.number_in_words(),
            "array" => self.list_in_words(depth),
            _ => self.object_in_words(),
        }))
    }

    /// The numbers that are allowed, in plain words.
    pub(super) fn number_in_words(self) -> String {
        let kind = if self.is_whole() { "a whole number" } else { "a number" };
        format!("{kind}{}", self.range())
    }

    /// The range of a number: ` from 0 to 1`, ` above 0`, or nothing.
    fn range(self) -> String {
        let bound = |keyword| self.number(keyword).map(plainly);
        let (least, most) = (bound("minimum"), bound("maximum"));
        if let (Some(least), Some(most)) = (&least, &most) {
            return format!(" from {least} to {most}");
        }
        let low = least.map(|least| format!("of at least {least}"));
        let low = low.or_else(|| bound("exclusiveMinimum").map(|limit| format!("above {limit}")));
        let high = most.map(|most| format!("of at most {most}"));
        let high = high.or_else(|| bound("exclusiveMaximum").map(|limit| format!("below {limit}")));
        let both: Vec<String> = low.into_iter().chain(high).collect();
        if both.is_empty() { String::new() } else { format!(" {}", both.join(" and ")) }
    }

    fn list_in_words(self, depth: usize) -> String {
        let count = match (self.count("minItems"), self.count("maxItems")) {
            (Some(least), Some(most)) if least == most => Some(least),
            _ => None,
        };
        let entry = self.get("items").filter(|_| depth > 0).map(|schema| self.within(schema));
        let noun = entry.and_then(|entry| match entry.types().as_slice() {
            _ if entry.choices().is_some() => None,
            ["number"] => Some("number"),
            ["integer"] => Some("whole number"),
            ["string"] => Some("text"),
            ["object"] => Some("object"),
            ["array"] => Some("list"),
            _ => None,
        });
        match (noun, count, entry) {
            (Some(noun), Some(count), _) => format!("a list of {}", counted(count, noun)),
            (Some(noun), None, _) => format!("a list of {noun}s"),
            (None, Some(count), _) => format!("a list with {}", counted(count, "entry")),
            (None, None, Some(entry)) if !entry.is_never() => {
                format!("a list, each entry {}", entry.described(depth - 1))
            }
            _ => "a list".into(),
        }
    }

    fn object_in_words(self) -> String {
        let required: Vec<String> = self.required().map(quoted).collect();
        match required.as_slice() {
            [] => "an object".into(),
            [front @ .., last] if !front.is_empty() && required.len() <= 4 => {
                format!("an object with {} and {last}", front.join(", "))
            }
            [only] => format!("an object with {only}"),
            _ => "an object".into(),
        }
    }

    /// The first sentence of the description, if it is short.
    pub(super) fn remark(self) -> Option<&'s str> {
        let text = self.get("description")?.as_str()?;
        let line = text.lines().next()?;
        let sentence = line.split(". ").next()?.trim_end_matches('.');
        (!sentence.is_empty() && sentence.len() <= 100).then_some(sentence)
    }
}

/// A limit without a needless point.
fn plainly(limit: f64) -> String {
    if limit.abs() < 1e15 { limit.to_string() } else { format!("{limit:e}") }
}

/// Words for allowed values.
fn choices_in_words(choices: &[Value]) -> String {
    let words: Vec<String> = choices
        .iter()
        .map(|choice| choice.as_str().map_or_else(|| choice.to_string(), quoted))
        .collect();
    if words.len() > 2 { format!("one of {}", words.join(", ")) } else { either(&words) }
}

/// Kinds, each once, the way a sentence lists them; null, the least telling, last.
fn kinds(parts: impl Iterator<Item = String>) -> String {
    let mut out: Vec<String> = Vec::new();
    for part in parts {
        if !out.contains(&part) {
            out.push(part);
        }
    }
    out.sort_by_key(|part| part == "null");
    either(&out)
}

fn is_of_type(value: &Value, name: &str) -> bool {
    match name {
        "null" => value.is_null(),
        "boolean" => value.is_boolean(),
        "string" => value.is_string(),
        "number" | "integer" => value.is_number(),
        "array" => value.is_array(),
        "object" => value.is_object(),
        _ => false,
    }
}

fn same_type(one: &Value, other: &Value) -> bool {
    std::mem::discriminant(one) == std::mem::discriminant(other)
}

/// The patterns that are understood: those of maps whose keys are whole numbers.
pub(super) const PATTERNS: [&str; 2] = [r"^\d+$", r"^-?\d+$"];

fn matches_pattern(pattern: &str, key: &str) -> bool {
    let digits = if pattern == PATTERNS[1] { key.strip_prefix('-').unwrap_or(key) } else { key };
    PATTERNS.contains(&pattern)
        && !digits.is_empty()
        && digits.bytes().all(|byte| byte.is_ascii_digit())
}
