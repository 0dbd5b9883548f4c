//! Each key and value of a design made wrong, one at a time.

use serde_json::{Value, json};

use super::*;

#[test]
fn every_key_misspelt_or_removed_is_told_at_its_place() {
    let schema = design_schema();
    let mut addresses = Vec::new();
    keys(sample().value(), &Address::root(), &mut addresses);
    assert!(addresses.len() > 50);
    for at in addresses {
        let (parent, key) = (at.parent().unwrap(), at.last().unwrap().to_owned());
        let free_names = ["/glasses", "/groups/2/elements/1/shapes/1/asphere"];
        if free_names.contains(&parent.to_string().as_str()) {
            continue;
        }
        let mut value = sample().value().clone();
        let object = parent.get_mut(&mut value).and_then(Value::as_object_mut).unwrap();
        let entry = object.shift_remove(&key).unwrap();
        let removed = Document::from_value("d", value.clone()).check(&schema);
        if let Err(complaints) = removed {
            assert!(
                complaints.to_string().contains(&format!("the key \"{key}\" is missing")),
                "{at}"
            );
        }
        let object = parent.get_mut(&mut value).and_then(Value::as_object_mut).unwrap();
        let misspelt = format!("{key}x");
        object.insert(misspelt.clone(), entry);
        let document = Document::from_value("d", value);
        let complaints = document.check(&schema).unwrap_err();
        let told: Vec<_> = complaints.iter().collect();
        assert_eq!(told.len(), 1, "{at}: {complaints}");
        assert_eq!(told[0].place, Place::Key(parent.key(misspelt)));
        assert_eq!(told[0].advice, Some(did_you_mean(&key)), "{complaints}");
    }
}

#[test]
fn every_value_of_a_wrong_type_is_told_at_its_place() {
    let schema = design_schema();
    let mut addresses = Vec::new();
    keys(sample().value(), &Address::root(), &mut addresses);
    for at in addresses {
        let wrong =
            if at.get(sample().value()).unwrap().is_boolean() { json!("yes") } else { json!(true) };
        let mut value = sample().value().clone();
        *at.get_mut(&mut value).unwrap() = wrong;
        let complaints = Document::from_value("d", value).check(&schema).unwrap_err();
        let places: Vec<_> = complaints.iter().map(|told| told.place.clone()).collect();
        assert_eq!(places, [Place::Value(at)], "{complaints}");
    }
}
