//! The designs that are measured.

use std::path::PathBuf;

use driver::design_file::DesignFile;
use driver::optimise::merit_of;
use merit_function::problem::MeritFunction;
use serde_json::Value;
use surface_model::document::Document;

use crate::Failure;

/// A design of `benchmarks/designs/` with what it is about.
pub(crate) struct Measured {
    pub(crate) name: &'static str,
    pub(crate) about: &'static str,
}

/// Limits on single numbers only: what solvers that know bounds and nothing else can take. The
/// first four have one minimum inside all bounds.
pub(crate) const DESIGNS: [Measured; 10] = [
    Measured { name: "three-singlets", about: "five states" },
    Measured { name: "four-singlets", about: "six states" },
    Measured { name: "cemented-pairs", about: "two wavelengths, four states" },
    Measured { name: "one-mover", about: "one moving group, two states" },
    Measured { name: "river-lidar-2x-6x", about: "three singlets, five states" },
    Measured { name: "four-singlets-six-states", about: "four singlets, six states" },
    Measured { name: "two-colour-pairs", about: "three cemented pairs, two wavelengths" },
    Measured { name: "one-mover-three-states", about: "one moving group, three states" },
    Measured { name: "moving-collimator", about: "one moving group, two states" },
    Measured { name: "four-groups-asphere", about: "four groups, an asphere, three states" },
];

/// The folder of this workspace member.
pub(crate) fn home() -> PathBuf {
    PathBuf::from(env!("CARGO_MANIFEST_DIR"))
}

/// Where a design's file is.
pub(crate) fn path(name: &str) -> PathBuf {
    home().join("designs").join(format!("{name}.json"))
}

/// Reads a design of `benchmarks/designs/`.
pub(crate) fn load(name: &str) -> Result<DesignFile, Failure> {
    Ok(DesignFile::read(Document::parse(name, &std::fs::read(path(name))?)?)?)
}

/// The document of a design, to be changed.
pub(crate) fn document(name: &str) -> Result<Value, Failure> {
    Ok(serde_json::from_slice(&std::fs::read(path(name))?)?)
}

/// The merit function of a document.
pub(crate) fn merit_of_document(label: &str, document: Value) -> Result<MeritFunction, Failure> {
    let file = DesignFile::read(Document::from_value(label, document))?;
    Ok(merit_of(&file)?)
}

/// A design with `count` states over the same ratios, its spacings interpolated. What is held of
/// the last state stays held.
pub(crate) fn with_states(name: &str, count: usize) -> Result<Value, Failure> {
    let mut document = document(name)?;
    let last = document["states"][document["states"].as_array().map_or(0, Vec::len) - 1].clone();
    let states = between_states(&document["states"], count).ok_or("the states are not as known")?;
    document["states"] = states;
    if let Some(held) = document.get_mut("held").and_then(Value::as_array_mut) {
        let old = format!("/states/{}/", last["name"].as_str().unwrap_or_default());
        let new = format!("/states/{}/", count - 1);
        for address in held {
            *address = Value::from(address.as_str().unwrap_or_default().replace(&old, &new));
        }
    }
    Ok(document)
}

/// `count` states spread evenly over the ratios of the given ones.
pub(crate) fn between_states(states: &Value, count: usize) -> Option<Value> {
    let states = states.as_array()?;
    let read = |state: &Value| -> Option<(f64, Vec<f64>)> {
        let spacings = state["spacings_mm"].as_array()?.iter().map(Value::as_f64);
        Some((state["ratio"].as_f64()?, spacings.collect::<Option<_>>()?))
    };
    let known: Vec<(f64, Vec<f64>)> = states.iter().map(read).collect::<Option<_>>()?;
    let (first, last) = (known.first()?.0, known.last()?.0);
    let mut made = Vec::with_capacity(count);
    for i in 0..count {
        let ratio = first + (last - first) * i as f64 / (count - 1).max(1) as f64;
        let pair = known.windows(2).find(|pair| ratio <= pair[1].0 + 1e-9)?;
        let share = (ratio - pair[0].0) / (pair[1].0 - pair[0].0);
        let spacings = pair[0].1.iter().zip(&pair[1].1).map(|(a, b)| a + share * (b - a));
        made.push(serde_json::json!({
            "name": format!("state {i}"), "ratio": ratio, "spacings_mm": spacings.collect::<Vec<f64>>(),
        }));
    }
    Some(Value::Array(made))
}

/// The designs of `configs/`, by name, in the order of their names.
pub(crate) fn shipped() -> Result<Vec<(String, Value)>, Failure> {
    let mut all = Vec::new();
    for entry in std::fs::read_dir(home().join("../configs"))? {
        let path = entry?.path();
        if path.extension().is_none_or(|extension| extension != "json") {
            continue;
        }
        let document: Value = serde_json::from_slice(&std::fs::read(&path)?)?;
        if document["format"] == "drawtube/1" {
            let name = path.file_stem().unwrap_or_default().to_string_lossy().into_owned();
            all.push((name, document));
        }
    }
    all.sort_by(|a, b| a.0.cmp(&b.0));
    Ok(all)
}
