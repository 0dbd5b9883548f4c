//! `glass`: looking through the catalogue.

use report::text;
use serde_json::{Map, Value, json};
use surface_model::glass::{Equivalent, Glass, SHORTEST_NM, equivalents, find, search};

use crate::arguments::GlassArguments;
use crate::console::Console;
use crate::exit_status::ExitStatus;
use crate::failure::Failure;

/// What is asked for.
enum Request {
    Search(Vec<String>),
    Nearest { glass: Glass, most: usize },
}

impl Request {
    fn of(arguments: &mut GlassArguments) -> Result<Self, Failure> {
        for &nm in &arguments.at_nm {
            if !(nm.is_finite() && nm >= SHORTEST_NM) {
                return Err(Failure::Argument {
                    option: "--at-nm",
                    found: nm.to_string(),
                    constraint: "at least 100: it is in nanometres, 0.532 µm is 532",
                });
            }
        }
        Ok(match arguments.nearest.take() {
            Some(name) => Self::Nearest { glass: find(&name)?, most: arguments.most },
            None => Self::Search(std::mem::take(&mut arguments.words)),
        })
    }
}

pub(crate) fn run(mut arguments: GlassArguments, console: &Console) -> Result<ExitStatus, Failure> {
    let request = Request::of(&mut arguments)?;
    let wavelengths_nm = arguments.at_nm;
    let (found, document, table) = match request {
        Request::Search(words) => {
            let found = search(&words)?;
            let list = found.iter().map(|glass| entry(glass, &wavelengths_nm)).collect();
            (found.len(), document(list), text::glass::glasses(&found, &wavelengths_nm))
        }
        Request::Nearest { glass, most } => {
            let found = equivalents(&glass, &wavelengths_nm, most)?;
            let list = found.iter().map(|near| beside(near, &wavelengths_nm)).collect();
            (found.len(), document(list), text::glass::equivalents(&found, &wavelengths_nm))
        }
    };
    if arguments.json {
        console.print_json(&document)?;
    } else if found > 0 {
        console.print(&table)?;
    } else {
        console.say("drawtube: no glass suits; try fewer words");
    }
    Ok(if found > 0 { ExitStatus::Done } else { ExitStatus::Failed })
}

fn document(glasses: Vec<Value>) -> Value {
    json!({ "format": "drawtube-glasses/1", "glasses": glasses })
}

/// A glass with its index at every wavelength; null where it is not known.
fn entry(glass: &Glass, wavelengths_nm: &[f64]) -> Value {
    with_indices(json!(glass.summary()), glass, wavelengths_nm)
}

fn beside(equivalent: &Equivalent, wavelengths_nm: &[f64]) -> Value {
    let mut entry = entry(&equivalent.glass, wavelengths_nm);
    if let (Value::Object(map), Value::Object(differences)) = (&mut entry, json!(equivalent)) {
        map.extend(differences.into_iter().filter(|(key, _)| key != "glass"));
    }
    entry
}

fn with_indices(mut entry: Value, glass: &Glass, wavelengths_nm: &[f64]) -> Value {
    if let Value::Object(map) = &mut entry
        && !wavelengths_nm.is_empty()
    {
        let indices = wavelengths_nm.iter().map(|&nm| {
            let index = glass.index(nm).ok();
            Value::Object(Map::from_iter([
                ("wavelength_nm".to_owned(), json!(nm)),
                ("index".to_owned(), json!(index)),
            ]))
        });
        map.insert("indices".to_owned(), indices.collect());
    }
    entry
}
