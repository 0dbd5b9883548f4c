//! Every way to spoil one value of a file.

use serde_json::{Map, Number, Value, json};

/// A spoilt file.
pub struct Mutant {
    /// What was done to it.
    pub name: String,
    pub text: String,
}

/// A key that stands for another of the same name.
const AGAIN: &str = "again:";
/// A text that stands for what JSON values cannot hold.
const RAW: &str = "raw:";

/// Every file that differs from this one in one place.
pub fn all(file: &str, text: &str) -> Vec<Mutant> {
    let root: Value = serde_json::from_str(text).unwrap();
    let names = names(&root);
    let mut mutants = Vec::new();
    for pointer in pointers(&root) {
        for (what, new) in replacements(root.pointer(&pointer).unwrap(), &names) {
            let Mutant { name, text } = spoilt(&root, &pointer, &what, new);
            mutants.push(Mutant { name: format!("{file}{name}"), text });
        }
    }
    mutants
}

/// One of them, by the place and the kind of change: each is chosen from so many.
pub fn one(
    root: &Value,
    place: impl FnOnce(usize) -> usize,
    change: impl FnOnce(usize) -> usize,
) -> String {
    let pointers = pointers(root);
    let pointer = &pointers[place(pointers.len())];
    let mut changes = replacements(root.pointer(pointer).unwrap(), &names(root));
    let (what, new) = changes.swap_remove(change(changes.len()));
    spoilt(root, pointer, &what, new).text
}

fn spoilt(root: &Value, pointer: &str, what: &str, new: Value) -> Mutant {
    let mut root = root.clone();
    *root.pointer_mut(pointer).unwrap() = new;
    Mutant { name: format!("{pointer}: {what}"), text: written(&root) }
}

fn pointers(root: &Value) -> Vec<String> {
    let mut pointers = Vec::new();
    collect(root, String::new(), &mut pointers);
    pointers
}

fn collect(value: &Value, at: String, out: &mut Vec<String>) {
    match value {
        Value::Object(map) => map.iter().for_each(|(key, value)| {
            let step = key.replace('~', "~0").replace('/', "~1");
            collect(value, format!("{at}/{step}"), out);
        }),
        Value::Array(list) => list
            .iter()
            .enumerate()
            .for_each(|(index, value)| collect(value, format!("{at}/{index}"), out)),
        _ => {}
    }
    out.push(at);
}

/// Every text of a document, once.
fn names(value: &Value) -> Vec<String> {
    let mut names = Vec::new();
    let mut rest = vec![value];
    while let Some(value) = rest.pop() {
        match value {
            Value::String(text) => names.push(text.clone()),
            Value::Array(list) => rest.extend(list),
            Value::Object(map) => rest.extend(map.values()),
            _ => {}
        }
    }
    names.sort();
    names.dedup();
    names
}

fn replacements(old: &Value, names: &[String]) -> Vec<(String, Value)> {
    let mut out = Vec::new();
    let wrong_types = [json!(null), json!(true), json!("word"), json!(7), json!([]), json!({})];
    out.extend(wrong_types.into_iter().map(|new| (format!("{new}"), new)));
    match old {
        Value::Number(number) => numbers(number, &mut out),
        Value::String(_) => texts(names, &mut out),
        Value::Array(list) => lists(list, &mut out),
        Value::Object(map) => keys(map, &mut out),
        _ => {}
    }
    out
}

fn numbers(old: &Number, out: &mut Vec<(String, Value)>) {
    let old = old.as_f64().unwrap();
    let fixed = [0.0, -0.0, 1.0, -1.0, 1e-308, 5e-324, 1e308, -1e308, 1e9, 1e6, 0.5, 1e-3];
    let near = [-old, 10.0 * old, 0.1 * old, 1.5 * old, 0.7 * old, old.next_up(), old.next_down()];
    out.extend(fixed.into_iter().chain(near).map(|new| (format!("{new:e}"), json!(new))));
    for raw in ["1e999", "-1e999", "NaN", "Infinity", "1.7976931348623157e308", "0x10", "+1"] {
        out.push((raw.to_owned(), json!(format!("{RAW}{raw}"))));
    }
}

fn texts(names: &[String], out: &mut Vec<(String, Value)>) {
    let long = "n".repeat(10_000);
    for new in ["", "*", "0", &long, "\u{0}\u{1b}[31m\u{7f}\u{202e}\n\t", "/", "~", "/~", "//*/*"] {
        let what = new.chars().take(12).collect::<String>();
        out.push((format!("{what:?}"), json!(new)));
    }
    out.extend(names.iter().map(|new| (format!("{new:?}"), json!(new))));
}

fn lists(old: &[Value], out: &mut Vec<(String, Value)>) {
    for index in 0..old.len() {
        let mut shorter = old.to_vec();
        shorter.remove(index);
        out.push((format!("without entry {index}"), Value::Array(shorter)));
    }
    let longer = old.iter().chain(old.last()).cloned().collect();
    out.push(("last entry twice".into(), Value::Array(longer)));
    let reversed = old.iter().rev().cloned().collect();
    out.push(("backwards".into(), Value::Array(reversed)));
    let long = old.iter().cycle().take(300 * old.len()).cloned().collect();
    out.push(("300 times".into(), Value::Array(long)));
}

fn keys(old: &Map<String, Value>, out: &mut Vec<(String, Value)>) {
    for key in old.keys() {
        let mut without = old.clone();
        without.shift_remove(key);
        out.push((format!("without {key}"), Value::Object(without)));

        let mut twice = old.clone();
        twice.insert(format!("{AGAIN}{key}"), old[key].clone());
        out.push((format!("{key} twice"), Value::Object(twice)));

        for other in [key.to_uppercase(), format!("{key}s"), key.replacen(['e', 'i'], "", 1)] {
            let renamed = old.iter().map(|(name, value)| {
                let name = if name == key { &other } else { name };
                (name.clone(), value.clone())
            });
            out.push((format!("{key} as {other}"), Value::Object(renamed.collect())));
        }
    }
}

/// The text of a document, what values cannot hold put in.
fn written(value: &Value) -> String {
    let mut text = serde_json::to_string_pretty(value).unwrap().replace(AGAIN, "");
    while let Some(start) = text.find(&format!("\"{RAW}")) {
        let end = start + 1 + text[start + 1..].find('"').unwrap();
        let raw = text[start + 1 + RAW.len()..end].to_owned();
        text.replace_range(start..=end, &raw);
    }
    text
}
