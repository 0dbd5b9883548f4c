//! What the kinds of document have in common: a `format` that names kind and version, and a JSON
//! Schema made of parts.

use schemars::generate::SchemaSettings;
use schemars::{JsonSchema, Schema};
use serde_json::Value;
use surface_model::document::{
    Address, Complaint, Complaints, Document, Place as PlaceInFile, quoted,
};

/// A kind of document: the name its formats begin with, the newest version read, and what people
/// call it.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(crate) struct DocumentKind {
    stem: &'static str,
    newest: u32,
    called: &'static str,
    /// The commands that take one.
    taken_by: &'static str,
}

/// Design files.
pub(crate) const DESIGN: DocumentKind = DocumentKind {
    stem: "drawtube",
    newest: 1,
    called: "a design",
    taken_by: "assess and optimise take it",
};

/// Briefs.
pub(crate) const BRIEF: DocumentKind = DocumentKind {
    stem: "drawtube-brief",
    newest: 1,
    called: "a brief",
    taken_by: "start makes designs of it",
};

/// Sweep plans.
pub(crate) const PLAN: DocumentKind = DocumentKind {
    stem: "drawtube-plan",
    newest: 1,
    called: "a sweep plan",
    taken_by: "sweep takes it",
};

const KINDS: [DocumentKind; 3] = [DESIGN, BRIEF, PLAN];

impl DocumentKind {
    /// Refuses a document of a newer format, or of another kind, by name, before anything else is
    /// held against it. One without a format, or with one that is no text, passes: the schema
    /// tells that better.
    pub(crate) fn refuse_others(self, document: &Document) -> Result<(), Complaints> {
        let Some(Value::String(format)) = document.value().get("format") else { return Ok(()) };
        let own = format!("{}/{}", self.stem, self.newest);
        if *format == own {
            return Ok(());
        }
        let (stem, version) = format.split_once('/').unwrap_or((format, ""));
        let newer = version.parse().is_ok_and(|version: u32| version > self.newest);
        let advice = if stem == self.stem {
            newer.then(|| "this file was written for a newer drawtube".to_owned())
        } else {
            let other = KINDS.iter().find(|kind| kind.stem == stem);
            other.map(|other| {
                format!("this is {}, not {}: {}", other.called, self.called, other.taken_by)
            })
        };
        let at = Address::root().key("format");
        Err(document.refuse([Complaint {
            place: PlaceInFile::Value(at),
            found: format!("the format is {}", quoted(format)),
            expected: Some(quoted(&own)),
            advice,
        }]))
    }
}

/// The schema of a type without references, so that a document can be held against it step by
/// step.
pub(crate) fn part<T: JsonSchema>() -> Schema {
    let settings =
        SchemaSettings::draft2020_12().with(|settings| settings.inline_subschemas = true);
    settings.into_generator().into_root_schema_for::<T>()
}

#[cfg(test)]
mod tests {
    use surface_model::document::unchecked_keywords;

    /// A schema may say more than the check understands; then the check would be laxer than it.
    #[test]
    fn nothing_that_the_schemas_say_is_passed_over() {
        for schema in [
            crate::design_file::design_schema(),
            crate::brief::brief_schema(),
            crate::sweep::plan_schema(),
        ] {
            assert_eq!(unchecked_keywords(&schema), []);
        }
    }
}
