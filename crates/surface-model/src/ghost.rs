//! Ghosts: light that surfaces reflect, once (out of the front again, towards the laser) or twice
//! (out of the exit behind the beam), to first order.
//!
//! A ghost's way is unfolded into a train of its own: light that goes back has a negative index
//! and crosses negative gaps, and a mirror is a surface between n and −n (W. T. Welford,
//! *Aberrations of Optical Systems* (1986), ch. 3). Paraxial rays and their derivatives then are
//! those of any train, and each derivative by a place of the unfolded train is one by the surface,
//! gap or medium that stands there.

use crate::gaussian::{GaussianBeam, GaussianPath};
use crate::paraxial::{ParaxialError, ParaxialRay, ParaxialWeights};
use crate::quantities::{Quantities, Shapes};
use crate::train::Train;

/// Which surfaces reflect, counted from 0.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum Ghost {
    /// One surface; the light leaves by the front.
    Single {
        /// The surface.
        at: usize,
    },
    /// Two surfaces; the light leaves by the exit.
    Double {
        /// The one that reflects first, which stands further behind.
        first: usize,
        /// The one that reflects second.
        second: usize,
    },
}

impl Ghost {
    /// Every single reflection of a train of so many surfaces.
    pub fn singles(surfaces: usize) -> impl Iterator<Item = Self> {
        (0..surfaces).map(|at| Self::Single { at })
    }

    /// Every double reflection of a train of so many surfaces.
    pub fn doubles(surfaces: usize) -> impl Iterator<Item = Self> {
        (0..surfaces).flat_map(|first| (0..first).map(move |second| Self::Double { first, second }))
    }

    /// Share of the power that takes this way, by the reflectance of every surface; what other
    /// surfaces take away is left out, so that the ghost is at most so strong.
    ///
    /// # Panics
    /// If a surface has no reflectance.
    #[must_use]
    pub fn strength(self, reflectances: &[f64]) -> f64 {
        match self {
            Self::Single { at } => reflectances[at],
            Self::Double { first, second } => reflectances[first] * reflectances[second],
        }
    }
}

/// Reflectance of an uncoated surface at normal incidence: ((n − n′)/(n + n′))² (Fresnel).
#[must_use]
pub fn fresnel_reflectance(before: f64, behind: f64) -> f64 {
    ((before - behind) / (before + behind)).powi(2)
}

/// A real focus of a ghost between two surfaces, or outside in front of the first or behind the
/// last.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct GhostFocus {
    /// How many surfaces the light has met before: its place on the way, from 1.
    pub after: usize,
    /// From the surface it has left last to the focus along +z, mm; negative where light goes back.
    pub from_surface_mm: f64,
    /// The gap of the design it lies in; `None` outside.
    pub gap: Option<usize>,
    /// Whether it lies in glass.
    pub in_glass: bool,
    /// Distance to the nearest surface of the gap, mm; negative in glass.
    pub clearance_mm: f64,
}

/// The way of a ghost through a train, unfolded.
#[derive(Debug, Clone)]
pub struct GhostWay {
    /// Surfaces met, in order.
    surfaces: Vec<usize>,
    /// Per gap of the way, the gap of the design and the way through it: 1 forward, −1 back.
    gaps: Vec<(usize, f64)>,
    /// Per medium of the way, the medium of the design and the sign of its index.
    media: Vec<(usize, f64)>,
    unfolded: Train,
    ray: ParaxialRay,
    row: Vec<f64>,
}

impl GhostWay {
    /// Unfolds a ghost's way through a train.
    ///
    /// # Panics
    /// If the train lacks a surface of the ghost.
    #[must_use]
    pub fn new(train: &Train, ghost: Ghost) -> Self {
        let mut surfaces = Vec::new();
        let mut media = vec![(0, 1.0)];
        let forward = |range: std::ops::Range<usize>,
                       surfaces: &mut Vec<usize>,
                       media: &mut Vec<(usize, f64)>| {
            for surface in range {
                surfaces.push(surface);
                media.push((surface + 1, 1.0));
            }
        };
        let back = |range: std::ops::Range<usize>,
                    surfaces: &mut Vec<usize>,
                    media: &mut Vec<(usize, f64)>| {
            for surface in range.rev() {
                surfaces.push(surface);
                media.push((surface, -1.0));
            }
        };
        let (mirror, turned) = match ghost {
            Ghost::Single { at } => (at, None),
            Ghost::Double { first, second } => (first, Some(second)),
        };
        forward(0..mirror, &mut surfaces, &mut media);
        surfaces.push(mirror);
        media.push((mirror, -1.0));
        match turned {
            None => back(0..mirror, &mut surfaces, &mut media),
            Some(second) => {
                back(second + 1..mirror, &mut surfaces, &mut media);
                surfaces.push(second);
                media.push((second + 1, 1.0));
                forward(second + 1..train.len(), &mut surfaces, &mut media);
            }
        }
        let gap = |pair: &[usize]| {
            if pair[1] > pair[0] { (pair[0], 1.0) } else { (pair[1], -1.0) }
        };
        let gaps: Vec<(usize, f64)> = surfaces.windows(2).map(gap).collect();
        let unfolded = Train::of_design(
            surfaces.iter().map(|&surface| train.surfaces()[surface]).collect(),
            gaps.iter().map(|&(gap, sign)| sign * train.gaps()[gap]).collect(),
            media.iter().map(|&(medium, sign)| sign * train.indices()[medium]).collect(),
        );
        Self { surfaces, gaps, media, unfolded, ray: ParaxialRay::new(), row: Vec::new() }
    }

    /// Takes over the numbers of a train with the same surfaces.
    pub fn follow(&mut self, train: &Train) {
        for (own, &surface) in self.unfolded.surfaces_mut().iter_mut().zip(&self.surfaces) {
            *own = train.surfaces()[surface];
        }
        for (own, &(gap, sign)) in self.unfolded.gaps_mut().iter_mut().zip(&self.gaps) {
            *own = sign * train.gaps()[gap];
        }
    }

    /// Surfaces met, in order.
    #[must_use]
    pub fn surfaces(&self) -> &[usize] {
        &self.surfaces
    }

    /// Carries the beam's edge ray along the way.
    ///
    /// # Errors
    /// A number leaves its range.
    pub fn trace(&mut self, beam: &GaussianBeam) -> Result<(), ParaxialError> {
        let (height, slope) = beam.edge_ray();
        self.ray.trace(&self.unfolded, height, slope)
    }

    /// Carries the Gaussian beam along the way: the beam when it has left.
    ///
    /// # Errors
    /// A number leaves its range.
    pub fn trace_beam(
        &self,
        beam: &GaussianBeam,
        path: &mut GaussianPath,
    ) -> Result<(), ParaxialError> {
        path.trace(&self.unfolded, beam)
    }

    /// Length along +z of the gap behind the surface at a place of the way, mm; infinite, with its
    /// sign, when the light has left.
    ///
    /// # Panics
    /// If the way has no such place.
    #[must_use]
    pub fn length_behind_mm(&self, place: usize) -> f64 {
        let outside = self.media[place + 1].1 * f64::INFINITY;
        self.unfolded.gaps().get(place).copied().unwrap_or(outside)
    }

    /// Real foci that the traced edge ray comes to after its first reflection, in order.
    pub fn foci(&self) -> impl Iterator<Item = GhostFocus> + '_ {
        let reflected = self.media.iter().position(|&(_, sign)| sign < 0.0).unwrap_or(0);
        (reflected.saturating_sub(1)..self.surfaces.len()).filter_map(|place| self.focus(place))
    }

    fn focus(&self, place: usize) -> Option<GhostFocus> {
        let height = *self.ray.heights().get(place)?;
        let slope = *self.ray.slopes().get(place + 1)?;
        let from_surface_mm = -height / slope;
        let length = self.length_behind_mm(place);
        let part = from_surface_mm / length.signum();
        if !from_surface_mm.is_finite() || length == 0.0 || part < 0.0 || part > length.abs() {
            return None;
        }
        let in_glass = self.media[place + 1].0 != 0
            && self.gaps.get(place).is_some()
            && self.unfolded.indices()[place + 1].abs() != 1.0;
        let nearest = part.min(length.abs() - part);
        Some(GhostFocus {
            after: place + 1,
            from_surface_mm,
            gap: self.gaps.get(place).map(|&(gap, _)| gap),
            in_glass,
            clearance_mm: if in_glass { -nearest } else { nearest },
        })
    }

    /// The focus with the least clearance: nearest to glass, or deepest in it.
    #[must_use]
    pub fn closest(&self) -> Option<GhostFocus> {
        self.foci().min_by(|a, b| a.clearance_mm.total_cmp(&b.clearance_mm))
    }

    /// Hands on the exact derivatives of a focus's clearance by the quantities of the design, each
    /// with its place; a place may come up more than once.
    ///
    /// # Errors
    /// A derivative leaves the range of numbers.
    pub fn differentiate(
        &mut self,
        focus: &GhostFocus,
        quantities: Quantities,
        mut put: impl FnMut(usize, f64),
    ) -> Result<(), ParaxialError> {
        let place = focus.after - 1;
        let direction = self.media[place + 1].1;
        let length = self.length_behind_mm(place);
        let part = focus.from_surface_mm * direction;
        let from_here = part <= length.abs() - part;
        // clearance = by_part · part + by_length · |length|
        let mut by_part = if from_here { 1.0 } else { -1.0 };
        let mut by_length = if from_here { 0.0 } else { 1.0 };
        if focus.in_glass {
            (by_part, by_length) = (-by_part, -by_length);
        }
        let own = Quantities::new(self.surfaces.len(), Shapes::None);
        self.row.resize(own.count(), 0.0);
        let (here, slope) = (self.ray.heights()[place], self.ray.slopes()[place + 1]);
        match self.ray.heights().get(place + 1) {
            // part = |t| h/(h − h₊)
            Some(&there) => {
                let fall = here - there;
                let scale = by_part * length.abs() / (fall * fall);
                let heights = [(place, -scale * there), (place + 1, scale * here)];
                let weights = ParaxialWeights { heights: &heights, exit_slope: 0.0 };
                self.ray.differentiate(&self.unfolded, weights, own, &mut self.row)?;
                by_length += by_part * here / fall;
                let (gap, _) = self.gaps[place];
                put(quantities.gap(gap), by_length);
            }
            // part = −h/u along the way
            None => {
                let scale = by_part * direction;
                let heights = [(place, -scale / slope)];
                let exit_slope = scale * here / (slope * slope);
                let weights = ParaxialWeights { heights: &heights, exit_slope };
                self.ray.differentiate(&self.unfolded, weights, own, &mut self.row)?;
            }
        }
        for (i, &surface) in self.surfaces.iter().enumerate() {
            put(quantities.curvature(surface), self.row[own.curvature(i)]);
        }
        for (i, &(gap, sign)) in self.gaps.iter().enumerate() {
            put(quantities.gap(gap), sign * self.row[own.gap(i)]);
        }
        for (i, &(medium, sign)) in self.media.iter().enumerate() {
            put(quantities.index(medium), sign * self.row[own.index(i)]);
        }
        Ok(())
    }
}

/// Share of a ghost's power that couples back into the mode it came from: both Gaussian beams of
/// one wavelength and M² of 1, on one axis, by radius (mm) and wavefront curvature (1/mm) in one
/// plane (W. B. Joyce and B. C. DeLoach, Appl. Opt. 23, 4187 (1984); from memory).
#[must_use]
pub fn mode_overlap(one: (f64, f64), other: (f64, f64), wavelength_nm: f64) -> f64 {
    let ((w1, c1), (w2, c2)) = (one, other);
    let sizes = w1 / w2 + w2 / w1;
    let bend = std::f64::consts::PI * w1 * w2 * (c1 - c2) / (wavelength_nm * 1e-6);
    4.0 / (sizes * sizes + bend * bend)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::surface::Surface;

    fn train() -> Train {
        let curvatures = [0.03, -0.02, -0.05, 0.06, 0.004, -0.012];
        let surfaces = curvatures.map(|c| Surface::sphere(c, 12.0)).to_vec();
        let indices = vec![1.0, 1.5, 1.0, 1.7, 1.0, 1.46, 1.0];
        Train::new(surfaces, vec![3.0, 12.0, 2.0, 60.0, 5.0], indices).unwrap()
    }

    fn beam() -> GaussianBeam {
        GaussianBeam { waist_radius_mm: 1.2, half_divergence_rad: 2e-4, waist_at_mm: -300.0 }
    }

    #[test]
    fn a_way_meets_its_surfaces_in_order() {
        let way = |ghost| GhostWay::new(&train(), ghost).surfaces().to_vec();
        assert_eq!(way(Ghost::Single { at: 2 }), [0, 1, 2, 1, 0]);
        assert_eq!(way(Ghost::Double { first: 3, second: 1 }), [0, 1, 2, 3, 2, 1, 2, 3, 4, 5]);
        assert_eq!(way(Ghost::Double { first: 1, second: 0 }), [0, 1, 0, 1, 2, 3, 4, 5]);
        assert_eq!((Ghost::singles(6).count(), Ghost::doubles(6).count()), (6, 15));
    }

    #[test]
    fn clearances_change_as_their_derivatives_say() {
        let train = train();
        let quantities = Quantities::new(train.len(), Shapes::None);
        let mut foci = 0;
        for ghost in Ghost::singles(6).chain(Ghost::doubles(6)) {
            let mut way = GhostWay::new(&train, ghost);
            way.trace(&beam()).unwrap();
            let all: Vec<GhostFocus> = way.foci().collect();
            for focus in all {
                foci += 1;
                let mut exact = vec![0.0; quantities.count()];
                way.differentiate(&focus, quantities, |place, by| exact[place] += by).unwrap();
                for (place, &derivative) in exact.iter().enumerate() {
                    let at = |by: f64| {
                        let mut moved = train.clone();
                        let now = match quantities.at(place) {
                            crate::quantities::Quantity::Curvature(i) => {
                                train.surfaces()[i].curvature
                            }
                            crate::quantities::Quantity::Gap(i) => train.gaps()[i],
                            crate::quantities::Quantity::Index(i) => train.indices()[i],
                            _ => unreachable!("no shapes are kept"),
                        };
                        moved.set_quantity(quantities, place, now + by);
                        let mut way = GhostWay::new(&moved, ghost);
                        way.trace(&beam()).unwrap();
                        let near = way.foci().find(|other| other.after == focus.after);
                        near.unwrap().clearance_mm
                    };
                    let h = 1e-6;
                    let difference = (at(h) - at(-h)) / (2.0 * h);
                    // Indices of air are no freedom, and would make a focus count as in glass.
                    let air = (0..7).step_by(2).any(|m| place == quantities.index(m));
                    let tolerance = 1e-5 * difference.abs().max(1.0);
                    assert!(
                        air || (derivative - difference).abs() < tolerance,
                        "{ghost:?} {focus:?} place {place}: {derivative} {difference}"
                    );
                }
            }
        }
        assert!(foci > 12, "{foci}");
    }

    #[test]
    fn a_beam_overlaps_wholly_with_itself_and_less_with_a_wider_one() {
        assert_eq!(mode_overlap((1.0, 0.01), (1.0, 0.01), 532.0), 1.0);
        let wider = mode_overlap((1.0, 0.0), (2.0, 0.0), 532.0);
        assert!((wider - 0.64).abs() < 1e-15);
        assert!(mode_overlap((1.0, 0.01), (1.0, -0.01), 532.0) < 1e-3);
    }
}
