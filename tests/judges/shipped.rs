//! The designs that the project ships, and copies of them with a few numbers changed.

use driver::design_file::DesignFile;
use serde_json::Value;
use surface_model::document::{Complaints, Document};

/// Name and text of each.
pub const DESIGNS: [(&str, &str); 5] = [
    ("river", include_str!("../../configs/river-lidar-2x-6x.json")),
    ("pairs", include_str!("../../configs/two-colour-pairs.json")),
    ("collimator", include_str!("../../configs/moving-collimator.json")),
    ("asphere", include_str!("../../configs/four-groups-asphere.json")),
    ("gorge", include_str!("../../configs/gorge-lidar-pulsed.json")),
];

/// A shipped design's document.
pub fn value(name: &str) -> Value {
    let text = DESIGNS.iter().find(|(other, _)| *other == name).unwrap().1;
    serde_json::from_str(text).unwrap()
}

/// A shipped design's document with the values at some pointers replaced; the last step of a
/// pointer may be a new key.
pub fn changed(name: &str, changes: &[(&str, Value)]) -> Value {
    let mut root = value(name);
    for (pointer, value) in changes {
        let (parent, key) = pointer.rsplit_once('/').unwrap();
        match root.pointer_mut(parent).unwrap() {
            Value::Object(map) => drop(map.insert(key.to_owned(), value.clone())),
            Value::Array(list) => list[key.parse::<usize>().unwrap()] = value.clone(),
            other => panic!("{parent} is {other}"),
        }
    }
    root
}

/// A document read as a design file.
pub fn read(value: Value) -> Result<DesignFile, Complaints> {
    DesignFile::read(Document::from_value("changed.json", value))
}

/// The same, with the complaints as people read them.
pub fn told(value: Value) -> String {
    read(value).map_or_else(|complaints| complaints.to_string(), |_| "nothing".to_owned())
}

/// A text read as a design file.
pub fn design(text: &str) -> DesignFile {
    read(serde_json::from_str(text).unwrap()).unwrap()
}
