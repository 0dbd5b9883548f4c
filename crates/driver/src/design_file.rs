//! A design file: the document as it was written, and what its owners make of it.

use std::sync::OnceLock;

use merit_function::variables::FreePlace;
use merit_function::wishes::{Wishes, WishesDocument};
use schemars::Schema;
use serde_json::Value;
use surface_model::design::Design;
use surface_model::document::{
    Address, Complaint, Complaints, Document, Place as PlaceInFile, layout, union,
};
use surface_model::optics_document::OpticsDocument;
use surface_model::place::Place;
use surface_model::ranges::LARGEST_RADIUS_MM;

use crate::document_kind::{DESIGN, part};
use crate::freedom::{self, FreedomDocument};
use crate::tolerance::{self, Tolerances, TolerancesDocument};

/// A design file, read and checked.
#[derive(Debug, Clone)]
pub struct DesignFile {
    document: Document,
    /// The optics: `beam` … `states`.
    pub design: Design,
    /// What is wanted: `goals` and `limits`.
    pub wishes: Wishes,
    /// What may change: `free` less `held`.
    pub free: Vec<FreePlace>,
    /// How well it can be built: `tolerances`.
    pub tolerances: Tolerances,
}

impl DesignFile {
    /// Reads a design file.
    ///
    /// # Errors
    /// Everything that is wrong with it, placed in its text.
    pub fn read(document: Document) -> Result<Self, Complaints> {
        DESIGN.refuse_others(&document)?;
        document.check(own_schema())?;
        let optics: OpticsDocument = document.read()?;
        let wanted: WishesDocument = document.read()?;
        let freedom: FreedomDocument = document.read()?;
        let workshop: TolerancesDocument = document.read()?;

        let (design, wishes) = match (optics.resolve(), wanted.resolve()) {
            (Ok(design), Ok(wishes)) => (design, wishes),
            (design, wishes) => {
                let optics = design.err().into_iter().flatten().map(Complaint::from);
                let wanted = wishes.err().into_iter().flatten().map(Complaint::from);
                return Err(document.refuse(optics.chain(wanted)));
            }
        };
        let lacks = wishes.lacks_of(&design).map(Complaint::from);
        if let Some(complaint) = lacks.or_else(|| silent_about_temperature(&design, &wishes)) {
            return Err(document.refuse([complaint]));
        }
        let free = freedom::resolve(&freedom, &design, document.value());
        let tolerances = tolerance::resolve(&workshop, &design, document.value());
        match (free, tolerances) {
            (Ok(free), Ok(tolerances)) => Ok(Self { document, design, wishes, free, tolerances }),
            (free, tolerances) => {
                let free = free.err().into_iter().flatten();
                Err(document.refuse(free.chain(tolerances.err().into_iter().flatten())))
            }
        }
    }

    /// What messages call the file.
    #[must_use]
    pub fn label(&self) -> &str {
        self.document.label()
    }

    /// The document as it was written.
    #[must_use]
    pub fn document(&self) -> &Document {
        &self.document
    }

    /// The same file with the free numbers of `design` in place of its own; remarks, order and
    /// everything else stay.
    ///
    /// # Errors
    /// The numbers do not make a design (a surface no longer reaches its clear diameter).
    pub fn with_numbers_of(&self, design: &Design) -> Result<Self, Complaints> {
        let mut value = self.document.value().clone();
        let mut places: Vec<Place> = self.free.iter().map(|free| free.place).collect();
        // Spacings that follow from the housing may move without being free themselves.
        let spacings = Place::all(design).into_iter();
        places.extend(spacings.filter(|place| matches!(place, Place::Spacing { .. })));
        for place in places {
            let now = place.value(design);
            if now.to_bits() != place.value(&self.design).to_bits() {
                put(&mut value, place, now);
            }
        }
        Self::read(Document::from_value(self.label(), value))
    }

    /// The same file with more that the optimiser must leave alone: addresses with indices for
    /// entries of lists, added to `held`.
    ///
    /// # Errors
    /// One of them holds nothing that could change.
    pub(crate) fn holding(&self, addresses: &[Address]) -> Result<Self, Complaints> {
        let mut value = self.document.value().clone();
        hold(&mut value, addresses);
        Self::read(Document::from_value(self.label(), value))
    }

    /// The text of the file.
    #[must_use]
    pub fn text(&self) -> String {
        layout(self.document.value())
    }
}

/// Goals at other temperatures need to know how everything changes with temperature.
pub(crate) fn silent_about_temperature(design: &Design, wishes: &Wishes) -> Option<Complaint> {
    let listed = wishes.temperatures_c.iter().enumerate();
    listed.into_iter().find_map(|(i, &temperature_c)| {
        let error = design.at_temperature(temperature_c).err()?;
        Some(Complaint {
            place: PlaceInFile::Value(Address::root().key("temperatures_c").index(i)),
            found: error.to_string(),
            expected: None,
            advice: error.advice(),
        })
    })
}

/// Adds addresses to `held`, with names; those that stand there already are left out.
pub(crate) fn hold(value: &mut Value, addresses: &[Address]) {
    let words: Vec<Value> =
        addresses.iter().map(|at| Value::from(at.with_names(value).to_string())).collect();
    let Value::Object(map) = value else { return };
    if words.is_empty() {
        return;
    }
    if let Value::Array(held) = map.entry("held").or_insert_with(|| Value::Array(Vec::new())) {
        for word in words {
            if !held.contains(&word) {
                held.push(word);
            }
        }
    }
}

/// Writes one number into a document, in the file's own unit: a radius too large for a file is
/// flat. A place that the document lacks (a conic constant left out) is made.
fn put(value: &mut Value, place: Place, number: f64) {
    let written = match place {
        Place::Radius(_) if (1.0 / number).abs() > LARGEST_RADIUS_MM => Value::from("flat"),
        Place::Radius(_) => Value::from(1.0 / number),
        _ => Value::from(number),
    };
    let at = place.address();
    if let Some(slot) = at.get_mut(value) {
        *slot = written;
    } else if let Some(parent) = at.parent()
        && let (Some(Value::Object(map)), Some(key)) = (parent.get_mut(value), at.last())
    {
        map.insert(key.to_owned(), written);
    }
}

/// The schema of design files, made once.
fn own_schema() -> &'static Schema {
    static SCHEMA: OnceLock<Schema> = OnceLock::new();
    SCHEMA.get_or_init(design_schema)
}

/// JSON Schema of design files: the union of what its owners read.
#[must_use]
pub fn design_schema() -> Schema {
    let parts = [
        part::<OpticsDocument>(),
        part::<WishesDocument>(),
        part::<FreedomDocument>(),
        part::<TolerancesDocument>(),
    ];
    union("A drawtube design", &parts)
}
