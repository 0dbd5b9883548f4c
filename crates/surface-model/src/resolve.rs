//! From what the file says to a [`Design`]: names looked up, counts and ranges checked. All
//! faults are collected, not only the first.

use std::collections::HashSet;

use crate::design::{Beam, Design, Element, Group, ZoomState};
use crate::design_error::{Allowed, DesignError, DesignFault};
use crate::document::Address;
use crate::glass::{GlassShelf, LookupError};
use crate::housing::Housing;
use crate::optics_document::{
    ElementDocument, GroupDocument, OpticsDocument, RadiusDocument, ShapeDocument, StateDocument,
};
use crate::ranges::{
    LARGEST_COEFFICIENT, LARGEST_CONIC, LARGEST_EXPANSION_PER_K, LARGEST_RADIUS_MM, LONGEST_MM,
    SMALLEST_RADIUS_MM,
};
use crate::resolve_laser::{beam_fault, laser};
use crate::surface::{ASPHERE_TERMS, Surface, asphere_power};

const LENGTH: Allowed = Allowed { low: 0.0, high: LONGEST_MM, above_low: true, unit: " mm" };
const DISTANCE: Allowed = Allowed { above_low: false, ..LENGTH };
const WAVELENGTH: Allowed = Allowed { low: 100.0, high: 30_000.0, above_low: false, unit: " nm" };
const REACH: Allowed = Allowed { low: 0.0, high: 4.0, above_low: true, unit: "" };
const RADIUS: Allowed = Allowed {
    low: SMALLEST_RADIUS_MM,
    high: LARGEST_RADIUS_MM,
    above_low: false,
    unit: " mm either way",
};
const RATIO: Allowed = Allowed { low: 0.01, high: 100.0, above_low: false, unit: " either way" };
const EXPANSION: Allowed = Allowed {
    low: -LARGEST_EXPANSION_PER_K,
    high: LARGEST_EXPANSION_PER_K,
    above_low: false,
    unit: " 1/K",
};
const CONIC: Allowed =
    Allowed { low: -LARGEST_CONIC, high: LARGEST_CONIC, above_low: false, unit: "" };
const COEFFICIENT: Allowed =
    Allowed { low: -LARGEST_COEFFICIENT, high: LARGEST_COEFFICIENT, above_low: false, unit: "" };

/// Collects faults as it goes.
struct Resolver {
    shelf: GlassShelf,
    faults: Vec<DesignFault>,
}

impl OpticsDocument {
    /// Looks up every name, checks every count and range.
    ///
    /// # Errors
    /// Every fault found, each with its address.
    pub fn resolve(&self) -> Result<Design, Vec<DesignFault>> {
        let design = self.resolve_unfitted()?;
        let mut faults = Vec::new();
        fit(&design, &mut faults);
        if faults.is_empty() { Ok(design) } else { Err(faults) }
    }

    /// As [`Self::resolve`], but the spacings need not fit the fixed groups: for a design whose
    /// parts have changed and whose spacings are still to be fitted
    /// ([`Design::fit_to_housing`]).
    ///
    /// # Errors
    /// Every other fault found, each with its address.
    pub fn resolve_unfitted(&self) -> Result<Design, Vec<DesignFault>> {
        let definitions = self.glasses.iter().map(|(name, glass)| (name.as_str(), glass));
        let (shelf, glass_faults) = GlassShelf::resolve(definitions);
        let mut resolver = Resolver { shelf, faults: Vec::new() };
        for fault in glass_faults {
            let within: Address = fault.at.parse().unwrap_or_default();
            let steps = within.steps();
            let at = steps.into_iter().fold(Address::root().key("glasses"), Address::key);
            resolver.fault(at, DesignError::OwnGlass(fault.error));
        }
        let beam = resolver.beam(self);
        let groups = resolver.groups(&self.groups);
        let housing = resolver.housing(self);
        let states = resolver.states(self);
        if !resolver.faults.is_empty() {
            return Err(resolver.faults);
        }
        let design = Design { title: self.title.clone(), beam, groups, housing, states };
        resolver.indices(&design);
        resolver.faults.extend(beam_fault(&design));
        if resolver.faults.is_empty() { Ok(design) } else { Err(resolver.faults) }
    }
}

impl Resolver {
    fn fault(&mut self, at: Address, error: DesignError) {
        self.faults.push(DesignFault { at, error });
    }

    fn check(&mut self, at: Address, quantity: &'static str, found: f64, allowed: Allowed) {
        if !allowed.contains(found) {
            self.fault(at, DesignError::OutOfRange { quantity, found, allowed });
        }
    }

    fn check_all(&mut self, at: &Address, quantity: &'static str, list: &[f64], allowed: Allowed) {
        for (i, &found) in list.iter().enumerate() {
            self.check(at.clone().index(i), quantity, found, allowed);
        }
    }

    fn count(&mut self, at: Address, what: &'static str, found: usize, needed: usize, why: String) {
        if found != needed {
            self.fault(at, DesignError::Count { what, found, needed, because: why });
        }
    }

    fn name(&mut self, at: Address, name: &str, taken: &mut HashSet<String>) {
        let number = !name.is_empty() && name.bytes().all(|byte| byte.is_ascii_digit());
        if name.trim().is_empty() || name == "*" || number {
            self.fault(at, DesignError::NameUnfit(name.into()));
        } else if !taken.insert(name.into()) {
            self.fault(at, DesignError::NameTwice(name.into()));
        }
    }

    fn wavelengths(&mut self, at: &Address, wavelengths_nm: &[f64]) {
        self.check_all(at, "a wavelength", wavelengths_nm, WAVELENGTH);
        for (i, wavelength) in wavelengths_nm.iter().enumerate() {
            if wavelengths_nm[..i].contains(wavelength) {
                self.fault(at.clone().index(i), DesignError::WavelengthTwice(*wavelength));
            }
        }
    }

    fn beam(&mut self, document: &OpticsDocument) -> Beam {
        let at = Address::root().key("beam");
        let beam = &document.beam;
        self.wavelengths(&at.clone().key("wavelengths_nm"), &beam.wavelengths_nm);
        self.check(at.clone().key("diameter_mm"), "the beam diameter", beam.diameter_mm, LENGTH);
        self.check(at.key("traced_to"), "the reach of the traced rays", beam.traced_to, REACH);
        let (laser, faults) = laser(document);
        self.faults.extend(faults);
        Beam {
            wavelengths_nm: beam.wavelengths_nm.clone(),
            diameter_mm: beam.diameter_mm,
            traced_to: beam.traced_to,
            laser,
        }
    }

    fn groups(&mut self, groups: &[GroupDocument]) -> Vec<Group> {
        let mut taken = HashSet::new();
        let mut out = Vec::with_capacity(groups.len());
        for (g, group) in groups.iter().enumerate() {
            let at = Address::root().key("groups").index(g);
            self.name(at.clone().key("name"), &group.name, &mut taken);
            let airs_at = at.clone().key("airs_mm");
            let elements = group.elements.len();
            let why = format!("one fewer than the {elements} elements");
            let needed = elements.saturating_sub(1);
            self.count(airs_at.clone(), "airs", group.airs_mm.len(), needed, why);
            self.check_all(&airs_at, "an air", &group.airs_mm, DISTANCE);
            self.expansion(at.clone().key("mount_expansion_per_k"), group.mount_expansion_per_k);
            let mut names = HashSet::new();
            let mut parts = Vec::with_capacity(elements);
            for (e, element) in group.elements.iter().enumerate() {
                let at = at.clone().key("elements").index(e);
                if let Some(name) = &element.name {
                    self.name(at.clone().key("name"), name, &mut names);
                }
                parts.extend(self.element(&at, element));
            }
            out.push(Group {
                name: group.name.clone(),
                elements: parts,
                airs_mm: group.airs_mm.clone(),
                mount_expansion_per_k: group.mount_expansion_per_k,
            });
        }
        out
    }

    fn element(&mut self, at: &Address, element: &ElementDocument) -> Option<Element> {
        let glasses = element.glasses.len();
        let radii = element.radii_mm.len();
        let before = self.faults.len();
        let why = format!("one more than the {glasses} glasses");
        self.count(at.clone().key("radii_mm"), "radii", radii, glasses + 1, why);
        let why = format!("one for each of the {glasses} glasses");
        let thicknesses_at = at.clone().key("thicknesses_mm");
        let thicknesses = element.thicknesses_mm.len();
        self.count(thicknesses_at.clone(), "thicknesses", thicknesses, glasses, why);
        if let Some(shapes) = &element.shapes {
            let why = format!("one for each of the {} surfaces", glasses + 1);
            self.count(at.clone().key("shapes"), "shapes", shapes.len(), glasses + 1, why);
        }
        self.check_all(&thicknesses_at, "a centre thickness", &element.thicknesses_mm, LENGTH);
        let diameter_at = at.clone().key("diameter_mm");
        self.check(diameter_at, "a clear diameter", element.diameter_mm, LENGTH);
        let mut resolved = Vec::with_capacity(glasses);
        let mut faulty = false;
        for (i, name) in element.glasses.iter().enumerate() {
            match self.shelf.find(name) {
                Ok(glass) => resolved.push(glass),
                // Its definition has been told of already.
                Err(LookupError::Faulty { .. }) => faulty = true,
                Err(error) => self.fault(at.clone().key("glasses").index(i), error.into()),
            }
        }
        let surfaces = self.surfaces(at, element);
        (self.faults.len() == before && !faulty).then(|| Element {
            name: element.name.clone(),
            surfaces,
            glasses: resolved,
            thicknesses_mm: element.thicknesses_mm.clone(),
            diameter_mm: element.diameter_mm,
        })
    }

    fn surfaces(&mut self, at: &Address, element: &ElementDocument) -> Vec<Surface> {
        let semi_diameter = 0.5 * element.diameter_mm;
        let mut surfaces = Vec::with_capacity(element.radii_mm.len());
        for (i, radius) in element.radii_mm.iter().enumerate() {
            let radius_at = at.clone().key("radii_mm").index(i);
            let before = self.faults.len();
            let curvature = match *radius {
                RadiusDocument::Flat(_) => 0.0,
                RadiusDocument::Mm(radius_mm) => {
                    if !RADIUS.contains(radius_mm.abs()) {
                        let quantity = "a radius";
                        let error =
                            DesignError::OutOfRange { quantity, found: radius_mm, allowed: RADIUS };
                        self.fault(radius_at.clone(), error);
                    }
                    1.0 / radius_mm
                }
            };
            let mut surface = Surface::sphere(curvature, semi_diameter);
            let shape = element.shapes.as_ref().and_then(|shapes| shapes.get(i)?.as_ref());
            if let Some(shape) = shape {
                self.shape(&at.clone().key("shapes").index(i), shape, &mut surface);
            }
            let sound = self.faults.len() == before && LENGTH.contains(element.diameter_mm);
            if sound && surface.sag(semi_diameter).is_none() {
                let error = DesignError::Reach {
                    radius_mm: 1.0 / curvature,
                    diameter_mm: element.diameter_mm,
                };
                self.fault(radius_at, error);
            }
            surfaces.push(surface);
        }
        surfaces
    }

    fn shape(&mut self, at: &Address, shape: &ShapeDocument, surface: &mut Surface) {
        self.check(at.clone().key("conic"), "a conic constant", shape.conic, CONIC);
        surface.conic = shape.conic;
        for (power, &coefficient) in &shape.asphere {
            let here = at.clone().key("asphere").key(power.as_str());
            let term = (0..ASPHERE_TERMS).find(|&term| asphere_power(term).to_string() == *power);
            let Some(term) = term else {
                self.fault(here, DesignError::AspherePower(power.clone()));
                continue;
            };
            self.check(here, "an asphere coefficient", coefficient, COEFFICIENT);
            surface.asphere[term] = coefficient;
        }
    }

    fn housing(&mut self, document: &OpticsDocument) -> Housing {
        let at = Address::root().key("housing");
        let housing = &document.housing;
        self.check(at.clone().key("track_mm"), "the track", housing.track_mm, LENGTH);
        let names: Vec<&str> = document.groups.iter().map(|group| group.name.as_str()).collect();
        let mut fixed = vec![false; names.len()];
        for (i, name) in housing.fixed.iter().enumerate() {
            let here = at.clone().key("fixed").index(i);
            match names.iter().position(|other| other == name) {
                Some(group) if fixed[group] => {
                    self.fault(here, DesignError::NameTwice(name.clone()));
                }
                Some(group) => fixed[group] = true,
                None => {
                    let known = names.iter().map(|&name| name.to_owned()).collect();
                    self.fault(here, DesignError::UnknownGroup { name: name.clone(), known });
                }
            }
        }
        self.expansion(at.key("expansion_per_k"), housing.expansion_per_k);
        let expansion_per_k = housing.expansion_per_k;
        Housing { track_mm: housing.track_mm, fixed, expansion_per_k }
    }

    fn expansion(&mut self, at: Address, found: Option<f64>) {
        if let Some(found) = found {
            self.check(at, "an expansion", found, EXPANSION);
        }
    }

    fn states(&mut self, document: &OpticsDocument) -> Vec<ZoomState> {
        let mut taken = HashSet::new();
        let mut out = Vec::with_capacity(document.states.len());
        for (k, state) in document.states.iter().enumerate() {
            let at = Address::root().key("states").index(k);
            self.name(at.clone().key("name"), &state.name, &mut taken);
            out.push(self.state(&at, state, document));
        }
        out
    }

    fn state(
        &mut self,
        at: &Address,
        state: &StateDocument,
        document: &OpticsDocument,
    ) -> ZoomState {
        if !RATIO.contains(state.ratio.abs()) {
            let (quantity, found) = ("a ratio", state.ratio);
            let error = DesignError::OutOfRange { quantity, found, allowed: RATIO };
            self.fault(at.clone().key("ratio"), error);
        }
        let groups = document.groups.len();
        let spacings_at = at.clone().key("spacings_mm");
        let found = state.spacings_mm.len();
        let why = format!("one fewer than the {groups} groups");
        self.count(spacings_at.clone(), "spacings", found, groups.saturating_sub(1), why);
        self.check_all(&spacings_at, "a spacing", &state.spacings_mm, DISTANCE);
        if let Some(wavelengths_nm) = &state.wavelengths_nm {
            self.wavelengths(&at.clone().key("wavelengths_nm"), wavelengths_nm);
        }
        let wavelengths_nm =
            state.wavelengths_nm.clone().unwrap_or_else(|| document.beam.wavelengths_nm.clone());
        ZoomState {
            name: state.name.clone(),
            ratio: state.ratio,
            spacings_mm: state.spacings_mm.clone(),
            wavelengths_nm,
        }
    }

    /// Every glass must be known at every wavelength it is used at; each glass is told once.
    fn indices(&mut self, design: &Design) {
        let used: Vec<f64> =
            design.states.iter().flat_map(|state| state.wavelengths_nm.clone()).collect();
        for (g, group) in design.groups.iter().enumerate() {
            for (e, element) in group.elements.iter().enumerate() {
                for (i, glass) in element.glasses.iter().enumerate() {
                    if let Some(error) = used.iter().find_map(|&nm| glass.index(nm).err()) {
                        let at = Address::root().key("groups").index(g).key("elements").index(e);
                        self.fault(at.key("glasses").index(i), DesignError::Index(error));
                    }
                }
            }
        }
    }
}

fn fit(design: &Design, faults: &mut Vec<DesignFault>) {
    if let Some(mismatch) = design.housing_mismatch() {
        let at = Address::root().key("states").index(mismatch.state);
        let error = DesignError::Housing {
            state: design.states[mismatch.state].name.clone(),
            found_mm: mismatch.found_mm,
            needed_mm: mismatch.needed_mm,
        };
        faults.push(DesignFault { at: at.key("spacings_mm").index(mismatch.spacing), error });
    }
}
