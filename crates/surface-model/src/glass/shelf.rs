//! The glasses a design can name: its own, and the catalogue's.

use std::collections::{BTreeMap, BTreeSet};

use super::definition::{Definition, define, index_out_of_bounds};
use super::suggestion::nearest;
use super::{
    C_LINE_NM, DefinitionError, F_LINE_NM, Glass, GlassData, GlassDocument, GlassError,
    GlassStatus, LookupError, WavelengthRange, catalogue, find,
};

/// A design's own glasses in front of the catalogue.
#[derive(Clone, Debug, Default)]
pub(crate) struct GlassShelf {
    /// `None` for a glass whose definition has a fault.
    own: BTreeMap<String, Option<Glass>>,
}

/// A fault in the `glasses` section.
#[derive(Clone, Debug, PartialEq)]
pub(crate) struct GlassFault {
    /// Where, as a JSON Pointer (RFC 6901) inside the section: `/melt-4471/from`.
    pub(crate) at: String,
    /// What.
    pub(crate) error: GlassError,
}

impl GlassShelf {
    /// Works out the glasses a design file defines, in any order of definition, and every fault in them.
    ///
    /// The shelf is usable even with faults, so that the rest of a file can still be checked: a glass with a fault is
    /// found as [`LookupError::Faulty`], which need not be reported again.
    #[must_use]
    pub(crate) fn resolve<'a>(
        documents: impl IntoIterator<Item = (&'a str, &'a GlassDocument)>,
    ) -> (Self, Vec<GlassFault>) {
        let mut resolution = Resolution::default();
        for (name, document) in documents {
            resolution.read(name, document);
        }
        let names: Vec<&str> = resolution.order.clone();
        for name in names {
            resolution.resolve_chain(name);
        }
        let own = resolution
            .order
            .iter()
            .map(|&name| (name.to_owned(), resolution.done.get(name).cloned().flatten()));
        (Self { own: own.collect() }, resolution.faults)
    }

    /// A glass by name: the design's own first, then the catalogue's.
    ///
    /// # Errors
    /// As [`find`], and [`LookupError::Faulty`] for an own glass whose definition has a fault.
    pub(crate) fn find(&self, name: &str) -> Result<Glass, LookupError> {
        match self.own.get(name) {
            Some(Some(glass)) => Ok(glass.clone()),
            Some(None) => Err(LookupError::Faulty { name: name.to_owned() }),
            None => find(name).map_err(|error| with_own_names(error, self.own.keys())),
        }
    }
}

/// Puts a design's own names that are near in front of the catalogue's.
fn with_own_names(error: LookupError, own: impl Iterator<Item = impl AsRef<str>>) -> LookupError {
    let LookupError::Unknown { name, near: others } = error else { return error };
    let own: Vec<String> = own.map(|name| name.as_ref().to_owned()).collect();
    let mut near = nearest(&name, own.iter().map(|name| (name.as_str(), name.clone())));
    near.extend(others);
    LookupError::Unknown { name, near }
}

/// Work in progress: definitions read, glasses made.
#[derive(Default)]
struct Resolution<'a> {
    order: Vec<&'a str>,
    documents: BTreeMap<&'a str, &'a GlassDocument>,
    definitions: BTreeMap<&'a str, Definition<'a>>,
    done: BTreeMap<&'a str, Option<Glass>>,
    faults: Vec<GlassFault>,
}

impl<'a> Resolution<'a> {
    fn fault(&mut self, name: &str, at: &str, error: impl Into<GlassError>) {
        let escaped = name.replace('~', "~0").replace('/', "~1");
        self.faults.push(GlassFault { at: format!("/{escaped}{at}"), error: error.into() });
    }

    fn read(&mut self, name: &'a str, document: &'a GlassDocument) {
        if self.documents.contains_key(name) {
            self.fault(name, "", DefinitionError::Repeated { name: name.to_owned() });
            return;
        }
        self.documents.insert(name, document);
        self.order.push(name);
        if name.trim().is_empty() {
            self.fault(name, "", DefinitionError::EmptyName);
        } else if catalogue::is_taken(name) {
            self.fault(name, "", DefinitionError::Shadows { name: name.to_owned() });
        }
        match define(document) {
            Ok(definition) => {
                self.definitions.insert(name, definition);
            }
            Err(faults) => {
                for (at, error) in faults.0 {
                    self.fault(name, &at, error);
                }
                self.done.insert(name, None);
            }
        }
    }

    /// Makes a glass after the glasses it is a melt of. A loop, not a recursion: a chain may be long.
    fn resolve_chain(&mut self, name: &'a str) {
        let mut chain: Vec<&'a str> = Vec::new();
        let mut seen = BTreeSet::new();
        let mut current = name;
        while !self.done.contains_key(current) {
            if !seen.insert(current) {
                self.circle(chain.iter().copied().skip_while(|link| *link != current).collect());
                break;
            }
            chain.push(current);
            match self.definitions.get(current) {
                Some(Definition::Melt { from, .. }) if self.definitions.contains_key(from) => {
                    current = from;
                }
                _ => break,
            }
        }
        for link in chain.into_iter().rev() {
            if !self.done.contains_key(link) {
                let glass = self.make(link);
                self.done.insert(link, glass);
            }
        }
    }

    fn circle(&mut self, members: Vec<&'a str>) {
        let Some(&first) = members.first() else { return };
        let names = members.iter().chain([&first]).map(|name| (*name).to_owned()).collect();
        self.fault(first, "/from", DefinitionError::Circle { names });
        self.done.extend(members.into_iter().map(|member| (member, None)));
    }

    /// One glass whose `from`, if it is one of the design's own, is done.
    fn make(&mut self, name: &'a str) -> Option<Glass> {
        match self.definitions.remove(name)? {
            Definition::Law { law, range } => Some(Glass::new(GlassData {
                name: name.to_owned(),
                maker: None,
                status: GlassStatus::Own,
                code: None,
                source: None,
                law,
                index_shift: 0.0,
                range,
                measured_at_c: None,
                density_g_cm3: self.density(name),
                expansion_per_k: self.documents.get(name).and_then(|own| own.expansion_per_k),
                thermal: None,
                index_per_k: self.documents.get(name).and_then(|own| own.index_per_k),
            })),
            Definition::Melt { from, index_shift } => self.melt(name, from, index_shift),
        }
    }

    fn density(&self, name: &str) -> Option<f64> {
        self.documents.get(name).and_then(|document| document.density_g_cm3)
    }

    fn melt(&mut self, name: &str, from: &str, index_shift: f64) -> Option<Glass> {
        let base = match self.done.get(from) {
            // A base with a fault has been reported where it is defined.
            Some(base) => base.clone()?,
            None => match find(from) {
                Ok(base) => base,
                Err(error) => {
                    let error =
                        with_own_names(error, self.order.iter().filter(|own| **own != name));
                    self.fault(name, "/from", error);
                    return None;
                }
            },
        };
        let mut data = (*base.data).clone();
        data.name = name.to_owned();
        data.status = GlassStatus::Own;
        data.index_shift += index_shift;
        data.density_g_cm3 = self.density(name).or(data.density_g_cm3);
        if let Some(own) = self.documents.get(name) {
            data.expansion_per_k = own.expansion_per_k.or(data.expansion_per_k);
            data.index_per_k = own.index_per_k.or(data.index_per_k);
        }
        let index = |nm: f64| data.law.index(nm / 1000.0) + data.index_shift;
        // A constant index has no range; one wavelength stands for all.
        let range = data.range.or_else(|| WavelengthRange::new(F_LINE_NM, C_LINE_NM))?;
        if let Some(error) = index_out_of_bounds(range, index) {
            self.fault(name, "/index_shift", error);
            return None;
        }
        Some(Glass::new(data))
    }
}

#[cfg(test)]
mod tests;
