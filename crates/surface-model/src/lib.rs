//! The optics of zoom beam expanders: glass, surfaces, groups, zoom states; first order; the exact
//! trace and its reverse sweep.
//!
//! # What it owns
//!
//! A [`design::Design`] is groups of elements in a [`housing`], and the zoom states they slide
//! through. Each state at each wavelength is a flat [`train::Train`] of surfaces, and everything
//! that is computed is computed on trains:
//!
//! - [`trace`]: exact rays on spheres, conics and even aspheres, meridional and skew, one body of
//!   code; [`bundle`] traces many parallel to the axis, [`skew`] one of any direction;
//! - [`reverse`]: from a traced ray the exact derivative of its optical path by every curvature,
//!   gap, index, conic constant and asphere coefficient, in one backward sweep; [`quantities`] says
//!   where each stands;
//! - [`paraxial`], [`first_order`], [`seidel`]: what theory says to first and third order;
//! - [`wavefront`]: the wavefront error of a [`traced_beam`] behind the last surface, integrated to
//!   convergence;
//!   [`far_field`] and [`pointing`]: what it does to the beam far away, and what a tilted beam does;
//! - [`gaussian`]: the real beam with M²; [`ghost`]: light that surfaces reflect; [`laser`]: what
//!   the laser's data sheet says;
//! - [`spoilt`]: the exact trace with surfaces shifted, turned and uneven, as a workshop leaves
//!   them; [`pupil`]: the wavefront over a beam of such rays, its tilt told apart;
//! - [`solid`]: thickness at the edge, volume, mass; [`glass`]: the catalogue and own glasses.
//!
//! [`temperature`] makes of a design what it is when it is warmer or colder.
//!
//! It also owns how design files are read: [`document`] for any JSON document,
//! [`optics_document`] for the optics in one.
//!
//! # What it refuses to know
//!
//! What is wanted of a design (goals, limits), what may change, how to improve it, terminals and
//! files on disk.
//!
//! # The one equation it exists for
//!
//! The wavefront error of a ray that enters at height r,
//!
//! W(r) = Σ nᵢ sᵢ(r) − Σ nᵢ tᵢ,
//!
//! its optical path to the plane through the last vertex less that of the axial ray, and its
//! derivative by everything on the right. Start reading at [`trace`], then [`reverse`].
//!
//! # Signs and units
//!
//! Light travels to +z. Lengths in mm, curvatures in 1/mm, positive with the centre to the right;
//! wavelengths in nm, in air; indices relative to air. Names carry the unit at every boundary.

pub mod bundle;
pub mod design;
pub mod design_error;
pub mod document;
pub mod far_field;
pub mod fault;
pub mod first_order;
pub mod gaussian;
pub mod ghost;
pub mod glass;
pub mod housing;
pub mod laser;
pub mod optics_document;
pub mod paraxial;
pub mod place;
pub mod pointing;
pub mod pose;
pub mod pupil;
pub mod quadrature;
pub mod quantities;
pub mod ranges;
pub mod real;
mod resolve;
mod resolve_laser;
pub mod reverse;
pub mod seidel;
pub mod sequence;
pub mod skew;
pub mod solid;
pub mod spoilt;
pub mod surface;
pub mod temperature;
pub mod trace;
pub mod traced_beam;
pub mod train;
pub mod wavefront;
