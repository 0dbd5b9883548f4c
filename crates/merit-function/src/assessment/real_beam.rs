//! The real beam in every state: as it enters and leaves, at every surface and at any range, what
//! the design's own aberration does to it, and how to re-adjust.

use serde::Serialize;
use surface_model::design::{Design, ZoomState};
use surface_model::document::Address;
use surface_model::far_field::far_field;
use surface_model::gaussian::{GaussianBeam, GaussianPath, clipped};
use surface_model::place::Place;
use surface_model::pointing::pointing;
use surface_model::traced_beam::TracedBeam;
use surface_model::train::Train;

use super::finite;
use super::readjust::{Readjustment, readjustments};
use crate::goals::Goals;
use crate::wishes::Wishes;

/// The real beam in one state at one wavelength.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct BeamAssessment {
    /// Name of the state.
    pub state: String,
    /// Wavelength, nm.
    pub wavelength_nm: f64,
    /// As it enters, from the first vertex.
    pub entrance: BeamNumbers,
    /// As it leaves, from the last vertex, without the design's aberration.
    pub exit: Option<BeamNumbers>,
    /// One entry a surface.
    pub surfaces: Vec<SurfaceBeam>,
    /// One entry a range asked for.
    pub ranges: Vec<RangeBeam>,
    /// What the design's aberration does far away; `None` where rays fail.
    pub far_field: Option<FarFieldAssessment>,
    /// One entry a group that can move.
    pub readjust: Vec<Readjustment>,
    /// The beam at its largest pointing angle, if one is given.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub pointing: Option<PointingAssessment>,
}

/// A Gaussian beam in the terms of ISO 11146-1.
#[derive(Debug, Clone, Copy, PartialEq, Serialize)]
pub struct BeamNumbers {
    /// 1/e² diameter at the vertex, mm.
    pub diameter_mm: f64,
    /// Beam propagation factor M².
    pub m_squared: f64,
    /// 1/e² diameter of the waist, mm.
    pub waist_diameter_mm: f64,
    /// Where the waist is, m behind the vertex; negative before it.
    pub waist_at_m: f64,
    /// Full angle far away, mrad.
    pub divergence_mrad: f64,
    /// From the waist to √2 times its diameter, m.
    pub rayleigh_length_m: f64,
}

impl BeamNumbers {
    fn of(beam: &GaussianBeam, wavelength_nm: f64) -> Self {
        Self {
            diameter_mm: 2.0 * beam.radius_mm(0.0),
            m_squared: beam.m_squared(wavelength_nm),
            waist_diameter_mm: 2.0 * beam.waist_radius_mm,
            waist_at_m: 1e-3 * beam.waist_at_mm,
            divergence_mrad: 2e3 * beam.half_divergence_rad,
            rayleigh_length_m: 1e-3 * beam.rayleigh_length_mm(),
        }
    }
}

/// The beam at a surface.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct SurfaceBeam {
    /// Its place in the design file.
    pub at: Address,
    /// 1/e² diameter, mm.
    pub diameter_mm: f64,
    /// Share of the power outside the clear diameter, per cent.
    pub clipped_percent: f64,
}

/// The beam at a distance.
#[derive(Debug, Clone, Copy, PartialEq, Serialize)]
pub struct RangeBeam {
    /// Distance behind the last vertex, m.
    pub range_m: f64,
    /// 1/e² diameter, mm, without the design's aberration.
    pub diameter_mm: f64,
}

/// What aberration does far away.
#[derive(Debug, Clone, Copy, PartialEq, Serialize)]
pub struct FarFieldAssessment {
    /// M² behind the design, aberration included.
    pub m_squared: f64,
    /// The divergence that goes with it, mrad.
    pub divergence_mrad: Option<f64>,
    /// Intensity on axis over that without aberration or error of focus.
    pub on_axis: f64,
    /// The same after the best re-focusing.
    pub on_axis_refocused: f64,
}

/// The beam at its largest pointing angle.
#[derive(Debug, Clone, Copy, PartialEq, Serialize)]
pub struct PointingAssessment {
    /// Angle at which it enters, mrad.
    pub angle_mrad: f64,
    /// Angle at which it leaves, mrad.
    pub exit_angle_mrad: f64,
    /// How far its centre leaves from the axis, mm.
    pub exit_shift_mm: f64,
    /// RMS wavefront error, piston and tilt removed, waves.
    pub rms_waves: f64,
    /// Share of the traced power that misses a clear diameter, per cent.
    pub vignetted_percent: f64,
}

/// The real beam in every state at every wavelength, and its diameter at ranges (m behind the last
/// vertex).
#[must_use]
pub fn real_beam(design: &Design, wishes: &Wishes, ranges_m: &[f64]) -> Vec<BeamAssessment> {
    let states = design.states.iter().zip(&wishes.states);
    let all = states
        .flat_map(|(state, goals)| state.wavelengths_nm.iter().map(move |&nm| (state, goals, nm)));
    all.filter_map(|(state, goals, nm)| Looker { design, state, goals, nm }.look(ranges_m))
        .collect()
}

struct Looker<'a> {
    design: &'a Design,
    state: &'a ZoomState,
    goals: &'a Goals,
    nm: f64,
}

impl Looker<'_> {
    /// `None` where a glass or the beam is not known at the wavelength, which a resolved design
    /// rules out.
    fn look(&self, ranges_m: &[f64]) -> Option<BeamAssessment> {
        let train = self.design.train(self.state, self.nm).ok()?;
        let beam = self.design.beam.gaussian(self.nm).ok()?;
        let mut path = GaussianPath::default();
        let traced = path.trace(&train, &beam).is_ok();
        let exit = path.exit().filter(|_| traced);
        let range = |&range_m: &f64| {
            let diameter_mm = 2.0 * exit?.radius_mm(1e3 * range_m);
            Some(RangeBeam { range_m, diameter_mm: finite(diameter_mm)? })
        };
        Some(BeamAssessment {
            state: self.state.name.clone(),
            wavelength_nm: self.nm,
            entrance: BeamNumbers::of(&beam, self.nm),
            exit: exit.map(|exit| BeamNumbers::of(&exit, self.nm)),
            surfaces: if traced { self.surfaces(&train, &path) } else { Vec::new() },
            ranges: ranges_m.iter().filter_map(range).collect(),
            far_field: self.far_field(&train, &beam, exit.as_ref()),
            readjust: readjustments(self.design, self.state, &train, &beam),
            pointing: self.pointing(&train),
        })
    }

    fn surfaces(&self, train: &Train, path: &GaussianPath) -> Vec<SurfaceBeam> {
        let ids = self.design.sequence().surfaces;
        let surface = |(place, id)| {
            let radius_mm = path.radius_squared(place).sqrt();
            SurfaceBeam {
                at: Place::Radius(id).address(),
                diameter_mm: 2.0 * radius_mm,
                clipped_percent: 100.0 * clipped(train.surfaces()[place].semi_diameter, radius_mm),
            }
        };
        ids.into_iter().enumerate().map(surface).collect()
    }

    fn traced_beam(&self) -> Option<TracedBeam> {
        let beam = &self.design.beam;
        let traced = TracedBeam::new(beam.radius_mm(), beam.traced_to, self.nm).ok()?;
        Some(match self.goals.exit_focus_m {
            Some(focus) => traced.focused(1e3 * focus.wanted_m),
            None => traced,
        })
    }

    fn far_field(
        &self,
        train: &Train,
        beam: &GaussianBeam,
        exit: Option<&GaussianBeam>,
    ) -> Option<FarFieldAssessment> {
        let far = far_field(train, &self.traced_beam()?).ok()?;
        let before = beam.m_squared(self.nm);
        let m_squared = far.m_squared(before);
        Some(FarFieldAssessment {
            m_squared,
            divergence_mrad: exit
                .and_then(|exit| finite(2e3 * exit.half_divergence_rad * m_squared / before)),
            on_axis: far.on_axis,
            on_axis_refocused: far.on_axis_refocused,
        })
    }

    fn pointing(&self, train: &Train) -> Option<PointingAssessment> {
        let angle_mrad = self.design.beam.laser.pointing_mrad?;
        let turned = pointing(train, &self.traced_beam()?, 1e-3 * angle_mrad)?;
        Some(PointingAssessment {
            angle_mrad,
            exit_angle_mrad: 1e3 * turned.exit_angle_rad,
            exit_shift_mm: turned.exit_shift_mm,
            rms_waves: turned.rms_waves,
            vignetted_percent: 100.0 * turned.vignetted,
        })
    }
}
