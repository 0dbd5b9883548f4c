//! Which parts exist already, as people name them.

use serde_json::Value;
use surface_model::document::{
    Address, Complaint, Complaints, Place, Source, did_you_mean, nearest, one_of, quoted,
};

use crate::design_file::DesignFile;

/// The groups and elements that words name: a group's name, an element's where no other part has
/// it, or an address of either.
///
/// # Errors
/// Every word that names no part, with the nearest that does.
pub(crate) fn parts(file: &DesignFile, words: &[String]) -> Result<Vec<Address>, Complaints> {
    let document = file.document().value();
    let known = named_parts(file);
    let mut parts: Vec<Address> = Vec::new();
    let mut wrong = Vec::new();
    for word in words {
        let found =
            if word.starts_with('/') { at_address(word, document) } else { by_name(word, &known) };
        match found {
            Ok(found) => parts.extend(found),
            Err(complaint) => {
                let source = Source { label: format!("--made {word}"), position: None };
                wrong.push((source, complaint));
            }
        }
    }
    if !wrong.is_empty() {
        return Err(Complaints::elsewhere(file.label(), wrong, document));
    }
    parts.sort();
    parts.dedup();
    Ok(parts)
}

/// Every group and every element that has a name.
fn named_parts(file: &DesignFile) -> Vec<(&str, Address)> {
    let mut parts = Vec::new();
    for (g, group) in file.design.groups.iter().enumerate() {
        let at = Address::root().key("groups").index(g);
        parts.push((group.name.as_str(), at.clone()));
        for (e, element) in group.elements.iter().enumerate() {
            let named = element.name.as_deref();
            parts.extend(named.map(|name| (name, at.clone().key("elements").index(e))));
        }
    }
    parts
}

fn by_name(word: &str, known: &[(&str, Address)]) -> Result<Vec<Address>, Complaint> {
    let found: Vec<&Address> =
        known.iter().filter(|(name, _)| *name == word).map(|(_, at)| at).collect();
    let names = || known.iter().map(|(name, _)| *name).collect::<Vec<_>>();
    match found.as_slice() {
        [only] => Ok(vec![(*only).clone()]),
        [] => Err(complaint(
            format!("no group or element is called {}", quoted(word)),
            format!("{}, or an address", one_of(names())),
            nearest(word, names()).map(did_you_mean),
        )),
        several => {
            let addresses: Vec<String> = several.iter().map(|at| at.to_string()).collect();
            Err(complaint(
                format!("{} parts are called {}", several.len(), quoted(word)),
                one_of(addresses.iter().map(String::as_str)),
                None,
            ))
        }
    }
}

fn at_address(word: &str, document: &Value) -> Result<Vec<Address>, Complaint> {
    let address: Address =
        word.parse().map_err(|error: surface_model::document::AddressSyntaxError| {
            error.complaint(Place::File)
        })?;
    let found = address.resolve(document).map_err(|error| error.complaint(Place::File))?;
    let is_part = |at: &Address| {
        matches!(at.steps().as_slice(), ["groups", _] | ["groups", _, "elements", _])
    };
    if found.iter().all(is_part) {
        return Ok(found);
    }
    Err(complaint(
        format!("{} is neither a group nor an element", quoted(word)),
        "such as \"/groups/0\" or \"/groups/0/elements/0\"".to_owned(),
        None,
    ))
}

fn complaint(found: String, expected: String, advice: Option<String>) -> Complaint {
    Complaint { place: Place::File, found, expected: Some(expected), advice }
}
