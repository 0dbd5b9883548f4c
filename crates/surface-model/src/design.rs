//! A design: groups of elements in a housing, and the zoom states they slide through.
//!
//! This is the resolved form of a design file: names are looked up, counts fit, every number is
//! finite and possible. It is made by [`OpticsDocument::resolve`](crate::optics_document::OpticsDocument::resolve).

use crate::document::Address;
use crate::fault::RayFault;
use crate::gaussian::GaussianBeam;
use crate::glass::{Glass, GlassError};
use crate::housing::Housing;
use crate::laser::{BeamFormError, Laser};
use crate::sequence::Sequence;
use crate::surface::Surface;
use crate::train::Train;

/// The laser beam that enters, collimated.
#[derive(Debug, Clone, PartialEq)]
pub struct Beam {
    /// Wavelengths in nm, in air; the first is the one ratio and exit slope are told at.
    pub wavelengths_nm: Vec<f64>,
    /// 1/e² diameter, mm.
    pub diameter_mm: f64,
    /// How far out rays are traced, in 1/e² radii.
    pub traced_to: f64,
    /// What else is known of the laser.
    pub laser: Laser,
}

impl Beam {
    /// The real beam at a wavelength; its plane of reference is the first vertex.
    ///
    /// # Errors
    /// The laser's keys contradict diffraction at this wavelength; at those of a resolved design's
    /// states they do not.
    pub fn gaussian(&self, wavelength_nm: f64) -> Result<GaussianBeam, BeamFormError> {
        self.laser.form.beam(self.diameter_mm, wavelength_nm)
    }

    /// 1/e² radius, mm.
    #[must_use]
    pub fn radius_mm(&self) -> f64 {
        0.5 * self.diameter_mm
    }

    /// Height of the outermost ray traced, mm.
    #[must_use]
    pub fn edge_mm(&self) -> f64 {
        self.traced_to * self.radius_mm()
    }
}

/// One piece of glass, or a cemented stack: n glasses, n + 1 surfaces, n thicknesses.
#[derive(Debug, Clone)]
pub struct Element {
    /// Its name, if the file gives one.
    pub name: Option<String>,
    /// Surfaces from left to right.
    pub surfaces: Vec<Surface>,
    /// Glasses between them.
    pub glasses: Vec<Glass>,
    /// Centre thicknesses, mm.
    pub thicknesses_mm: Vec<f64>,
    /// Clear diameter, mm.
    pub diameter_mm: f64,
}

/// Elements that move together.
#[derive(Debug, Clone)]
pub struct Group {
    /// Its name, unique in the design.
    pub name: String,
    /// Elements from left to right.
    pub elements: Vec<Element>,
    /// Air between neighbouring elements, vertex to vertex, mm.
    pub airs_mm: Vec<f64>,
    /// Linear expansion of its mount, where it is not the housing's, 1/K.
    pub mount_expansion_per_k: Option<f64>,
}

impl Group {
    /// First vertex to last vertex, mm.
    #[must_use]
    pub fn length_mm(&self) -> f64 {
        let glass: f64 = self.elements.iter().flat_map(|element| &element.thicknesses_mm).sum();
        glass + self.airs_mm.iter().sum::<f64>()
    }
}

/// One ratio with its spacings.
#[derive(Debug, Clone, PartialEq)]
pub struct ZoomState {
    /// Its name, unique in the design.
    pub name: String,
    /// Beam diameter out over in that is wanted; negative is an inverted beam.
    pub ratio: f64,
    /// Air between neighbouring groups, vertex to vertex, mm.
    pub spacings_mm: Vec<f64>,
    /// The beam's wavelengths in this state, nm.
    pub wavelengths_nm: Vec<f64>,
}

/// A zoom beam expander.
#[derive(Debug, Clone)]
pub struct Design {
    /// What the design is for.
    pub title: String,
    /// The beam that enters.
    pub beam: Beam,
    /// Groups from left to right, at least one.
    pub groups: Vec<Group>,
    /// The tube, and which groups stand still in it.
    pub housing: Housing,
    /// Zoom states, at least one.
    pub states: Vec<ZoomState>,
}

impl Design {
    /// Which surface and which gap of the design stands where in a train.
    #[must_use]
    pub fn sequence(&self) -> Sequence {
        Sequence::of(&self.groups)
    }

    /// The design as the flat train that one state is at one wavelength (nm). Air is 1.
    ///
    /// # Errors
    /// A glass is not known at this wavelength.
    pub fn train(&self, state: &ZoomState, wavelength_nm: f64) -> Result<Train, GlassError> {
        let mut surfaces = Vec::new();
        let mut gaps = Vec::new();
        let mut indices = vec![1.0];
        for (g, group) in self.groups.iter().enumerate() {
            for (e, element) in group.elements.iter().enumerate() {
                surfaces.extend_from_slice(&element.surfaces);
                gaps.extend_from_slice(&element.thicknesses_mm);
                for glass in &element.glasses {
                    indices.push(glass.index(wavelength_nm)?);
                }
                indices.push(1.0);
                gaps.extend(group.airs_mm.get(e));
            }
            gaps.extend(state.spacings_mm.get(g));
        }
        Ok(Train::of_design(surfaces, gaps, indices))
    }

    /// Address of an element as people read it, with names where there are any.
    #[must_use]
    pub fn element_address(&self, group: usize, element: usize) -> Address {
        let at = Address::root().key("groups");
        let Some(part) = self.groups.get(group) else { return at.index(group) };
        let at = at.key(part.name.as_str()).key("elements");
        match part.elements.get(element).and_then(|element| element.name.as_deref()) {
            Some(name) => at.key(name),
            None => at.index(element),
        }
    }

    /// Address of a surface of the train as people read it; `None` where there is no such surface.
    #[must_use]
    pub fn surface_address(&self, surface: usize) -> Option<Address> {
        let sequence = self.sequence();
        let id = sequence.surfaces.get(surface)?;
        Some(self.element_address(id.group, id.element).key("radii_mm").index(id.surface))
    }

    /// A ray's fault in words, with the surface by its address.
    #[must_use]
    pub fn fault_in_words(&self, fault: &RayFault) -> String {
        match self.surface_address(fault.surface) {
            Some(at) => format!("{} at {at}", fault.reason),
            None => fault.reason.to_string(),
        }
    }

    /// First vertex to last vertex in a state, mm.
    #[must_use]
    pub fn length_mm(&self, state: &ZoomState) -> f64 {
        let glass: f64 = self.groups.iter().map(Group::length_mm).sum();
        glass + state.spacings_mm.iter().sum::<f64>()
    }
}
