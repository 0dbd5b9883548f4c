//! The exact trace through a train as the workshop leaves it: surfaces shifted, turned and not
//! quite round.
//!
//! Each surface has a [`Pose`]; a ray is carried from the coordinates of one surface to those of
//! the next (one turn and one shift), and there meets and leaves it exactly as in
//! [`trace`](crate::trace).
//!
//! *Irregularity* is the form error that no change of radius undoes. Its lowest form is taken, a
//! power-free astigmatism,
//!
//! δ(x, y) = ½P (r/a)² cos 2(φ − φ₀),
//!
//! P from peak to valley over the clear semi-diameter a. ISO 10110-5 calls this part of a form
//! error its irregularity and counts it in fringes, half waves of [`FRINGE_NM`] (from memory).

use multiversion::multiversion;

use crate::fault::RayFault;
use crate::pose::{Pose, Vector};
use crate::real::{Lanes, Real};
use crate::surface::Surface;
use crate::trace::{Crossing, Exit, Meeting, Ray, Stage, along, dot, find_fault, meet, refract};
use crate::train::Train;

/// One fringe: half the wavelength 546.07 nm of the mercury e line, nm of sag (ISO 10110-5 with
/// ISO 7944; from memory).
pub const FRINGE_NM: f64 = 546.07 / 2.0;

/// Newton steps from the surface without irregularity to that with it. It is less than a few
/// micrometres away and each step squares the error.
const STEPS: usize = 2;

/// A surface as it was made and mounted.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct SpoiltSurface {
    /// Its shape.
    pub surface: Surface,
    /// Where it stands.
    pub pose: Pose,
    /// Irregularity: peak to valley over the clear diameter, fringes of [`FRINGE_NM`].
    pub irregularity_fringes: f64,
    /// Direction φ₀ in which the irregularity adds sag, rad from x to y.
    pub irregularity_at_rad: f64,
}

/// A train as it was made and mounted. Light enters along the axis of the train as drawn and is
/// measured in the plane of the last vertex as drawn.
#[derive(Debug, Clone, PartialEq)]
pub struct SpoiltTrain {
    surfaces: Vec<SpoiltSurface>,
    indices: Vec<f64>,
    /// Where each vertex was drawn, mm from the first.
    drawn_at_mm: Vec<f64>,
}

impl SpoiltTrain {
    /// A train without any errors.
    #[must_use]
    pub fn of(train: &Train) -> Self {
        let mut z = 0.0;
        let mut drawn_at_mm = vec![z];
        drawn_at_mm.extend(train.gaps().iter().map(|gap| {
            z += gap;
            z
        }));
        let surfaces = train.surfaces().iter().zip(&drawn_at_mm);
        let sound = |(&surface, &z): (&Surface, &f64)| SpoiltSurface {
            surface,
            pose: Pose::on_axis(z),
            irregularity_fringes: 0.0,
            irregularity_at_rad: 0.0,
        };
        Self {
            surfaces: surfaces.map(sound).collect(),
            indices: train.indices().to_vec(),
            drawn_at_mm,
        }
    }

    /// The surfaces, to be spoilt; their number stays.
    pub fn surfaces_mut(&mut self) -> &mut [SpoiltSurface] {
        &mut self.surfaces
    }

    /// Where each vertex was drawn, mm from the first.
    #[must_use]
    pub fn drawn_at_mm(&self) -> &[f64] {
        &self.drawn_at_mm
    }

    /// Moves the drawing along the axis to other gaps (mm): every vertex goes with its drawn
    /// place, whatever shift and turn it has.
    pub fn set_gaps(&mut self, gaps_mm: &[f64]) {
        let mut z = 0.0;
        for (i, surface) in self.surfaces.iter_mut().enumerate() {
            if i > 0 {
                z += gaps_mm[i - 1];
            }
            surface.pose.vertex_mm[2] += z - self.drawn_at_mm[i];
            self.drawn_at_mm[i] = z;
        }
    }
}

/// A surface as the kernel takes it.
#[derive(Debug, Clone)]
struct SpoiltStage<N> {
    stage: Stage<N>,
    /// From the coordinates of the surface before to those of this one; `None` without a turn.
    turn: Option<[[N; 3]; 3]>,
    shift: [N; 3],
    /// Path of the axial ray of the drawing up to here, mm.
    drawn_path: N,
    /// δ = a(x² − y²) + 2bxy, 1/mm.
    irregularity: Option<[N; 2]>,
}

/// A spoilt train as the kernel takes it.
#[derive(Debug, Clone)]
pub(crate) struct SpoiltStages<N> {
    list: Vec<SpoiltStage<N>>,
    /// From the coordinates of the last surface to those of the drawing's exit plane.
    turn_out: [[N; 3]; 3],
    shift_out: [N; 3],
    last_index: N,
}

impl<N: Real> SpoiltStages<N> {
    pub(crate) fn of(train: &SpoiltTrain) -> Self {
        let mut before = Pose::on_axis(0.0);
        let mut drawn_before = 0.0;
        let mut list = Vec::with_capacity(train.surfaces.len());
        for (i, spoilt) in train.surfaces.iter().enumerate() {
            let (turn, shift) = before.change_to(&spoilt.pose);
            let drawn = train.drawn_at_mm[i];
            list.push(SpoiltStage {
                stage: Stage::alone(spoilt.surface, train.indices[i], train.indices[i + 1]),
                turn: (turn != Pose::on_axis(0.0).axes).then(|| turn.map(splat)),
                shift: splat(shift),
                drawn_path: N::splat(drawn - drawn_before),
                irregularity: irregularity(spoilt).map(|terms| terms.map(N::splat)),
            });
            (before, drawn_before) = (spoilt.pose, drawn);
        }
        let (turn, shift) = before.change_to(&Pose::on_axis(drawn_before));
        Self {
            list,
            turn_out: turn.map(splat),
            shift_out: splat(shift),
            last_index: N::splat(train.indices[train.surfaces.len()]),
        }
    }
}

fn splat<N: Real>(vector: Vector) -> [N; 3] {
    vector.map(N::splat)
}

/// The two terms of a surface's irregularity, 1/mm.
fn irregularity(spoilt: &SpoiltSurface) -> Option<[f64; 2]> {
    let semi_diameter = spoilt.surface.semi_diameter;
    if spoilt.irregularity_fringes == 0.0 {
        return None;
    }
    let half = 0.5 * spoilt.irregularity_fringes * FRINGE_NM * 1e-6;
    let strength = half / (semi_diameter * semi_diameter);
    let (sin, cos) = (2.0 * spoilt.irregularity_at_rad).sin_cos();
    Some([strength * cos, strength * sin])
}

/// p′ = turn·p + shift for the point, d′ = turn·d for the direction.
#[inline(always)]
fn carried<N: Real>(turn: Option<&[[N; 3]; 3]>, shift: &[N; 3], ray: &Ray<N, 2>) -> Ray<N, 2> {
    let (p, d) = ([ray.y[0], ray.y[1], ray.z], [ray.d[0], ray.d[1], ray.dz]);
    let Some(turn) = turn else {
        return Ray { y: [p[0] + shift[0], p[1] + shift[1]], z: p[2] + shift[2], ..*ray };
    };
    let p =
        [dot(&turn[0], &p) + shift[0], dot(&turn[1], &p) + shift[1], dot(&turn[2], &p) + shift[2]];
    let d = [dot(&turn[0], &d), dot(&turn[1], &d), dot(&turn[2], &d)];
    Ray { y: [p[0], p[1]], z: p[2], d: [d[0], d[1]], dz: d[2] }
}

/// From a meeting with the surface as drawn to that with its irregularity: Newton's method along
/// the ray, and the normal there.
#[inline(always)]
fn uneven<N: Real>(
    surface: &Surface,
    [a, b]: &[N; 2],
    met: Meeting<N, 2>,
) -> (Meeting<N, 2>, [N; 2], N) {
    let (one, two) = (N::splat(1.0), N::splat(2.0));
    let (mut at, mut path) = (met.at, met.path);
    let slopes = |at: &Ray<N, 2>, slope: N| {
        let [x, y] = at.y;
        let by_x = two * (*a * x + *b * y);
        let by_y = two * (*b * x - *a * y);
        [slope * x + by_x, slope * y + by_y]
    };
    for _ in 0..STEPS {
        let [x, y] = at.y;
        let profile = surface.profile(dot(&at.y, &at.y));
        let sag = profile.sag + *a * (x * x - y * y) + two * *b * x * y;
        let gradient = slopes(&at, profile.slope);
        let step = (sag - at.z) / (at.dz - dot(&gradient, &at.d));
        at = Ray { y: along(&at.y, step, &at.d), z: at.z + step * at.dz, ..at };
        path = path + step;
    }
    let gradient = slopes(&at, surface.profile(dot(&at.y, &at.y)).slope);
    let nz = one / (one + dot(&gradient, &gradient)).sqrt();
    let n = gradient.map(|slope| -(slope * nz));
    let cos_in = dot(&n, &at.d) + nz * at.dz;
    (Meeting { at, path, cos_in, cos_in_squared: cos_in * cos_in }, n, nz)
}

/// Traces a ray from the plane of the first vertex as drawn to that of the last.
#[inline(always)]
fn forward<N: Real>(
    stages: &SpoiltStages<N>,
    start: &Ray<N, 2>,
    crossings: &mut [Crossing<N, 2>],
) -> Exit<N, 2> {
    let mut ray = *start;
    let mut excess = N::splat(0.0);
    for (spoilt, kept) in stages.list.iter().zip(crossings) {
        let SpoiltStage { stage, turn, shift, drawn_path, irregularity } = spoilt;
        let local = carried(turn.as_ref(), shift, &ray);
        let met = meet(stage, &local);
        let (crossing, behind) = match irregularity {
            None => refract(stage, met),
            Some(terms) => {
                let (met, n, nz) = uneven(&stage.surface, terms, met);
                stage.refracted(met, &n, nz)
            }
        };
        excess = excess + stage.index * (crossing.path - *drawn_path);
        *kept = crossing;
        ray = behind;
    }
    let out = carried(Some(&stages.turn_out), &stages.shift_out, &ray);
    Exit::of(&out, excess, stages.last_index)
}

/// [`forward`] for eight rays side by side, in the widest vectors the processor has.
#[multiversion(targets("x86_64+avx512f+avx512dq+avx512vl+avx2", "x86_64+avx2", "aarch64+neon"))]
pub(crate) fn forward_lanes(
    stages: &SpoiltStages<Lanes>,
    start: &Ray<Lanes, 2>,
    crossings: &mut [Crossing<Lanes, 2>],
) -> Exit<Lanes, 2> {
    let crossings = &mut crossings[..stages.list.len()];
    forward(stages, start, crossings)
}

/// One ray's end: where it crosses the plane of the last vertex as drawn, and how.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct SpoiltRay {
    /// Transverse position, mm.
    pub position_mm: [f64; 2],
    /// Transverse direction cosines.
    pub direction: [f64; 2],
    /// Optical path less that of the drawing's axial ray, mm.
    pub path_mm: f64,
}

/// Traces one ray parallel to the axis exactly through a spoilt train.
///
/// # Errors
/// The ray misses a surface or is totally reflected: where, and why.
pub fn trace_spoilt(train: &SpoiltTrain, [x, y]: [f64; 2]) -> Result<SpoiltRay, RayFault> {
    let stages = SpoiltStages::of(train);
    let ray = Ray { y: [x, y], z: 0.0, d: [0.0, 0.0], dz: 1.0 };
    let blank = Crossing { ray, path: 0.0, cos_in: 0.0, cos_out: 0.0 };
    let mut crossings = vec![blank; train.surfaces.len()];
    let exit = forward(&stages, &ray, &mut crossings);
    match find_fault(&crossings, &exit, |number: f64| number) {
        Some(fault) => Err(fault),
        None => Ok(SpoiltRay { position_mm: exit.y, direction: exit.d, path_mm: exit.path_excess }),
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::skew::{RayStart, trace_ray};

    fn train() -> Train {
        let mut surfaces: Vec<Surface> =
            [0.03, -0.02, 0.012, 0.0].map(|c| Surface::sphere(c, 9.0)).into();
        surfaces[1].conic = -0.8;
        surfaces[2].asphere[0] = 3e-6;
        Train::new(surfaces, vec![4.0, 11.0, 2.5], vec![1.0, 1.6, 1.0, 1.75, 1.0]).unwrap()
    }

    #[test]
    fn without_errors_it_is_the_plain_trace() {
        let train = train();
        for at in [[0.0, 3.0], [2.0, -1.5], [-4.0, 0.2]] {
            let start = RayStart { position_mm: at, direction: [0.0, 0.0] };
            let plain = trace_ray(&train, start).unwrap().exit();
            let spoilt = trace_spoilt(&SpoiltTrain::of(&train), at).unwrap();
            for axis in 0..2 {
                assert!((plain.position_mm[axis] - spoilt.position_mm[axis]).abs() < 1e-13);
                assert!((plain.direction[axis] - spoilt.direction[axis]).abs() < 1e-14);
            }
            assert!((plain.path_mm - spoilt.path_mm).abs() < 1e-13);
        }
    }

    #[test]
    fn the_whole_train_shifted_is_the_beam_shifted() {
        let mut moved = SpoiltTrain::of(&train());
        for surface in moved.surfaces_mut() {
            surface.pose = surface.pose.decentred([0.7, -0.4]);
        }
        let a = trace_spoilt(&moved, [2.7, 0.6]).unwrap();
        let b = trace_spoilt(&SpoiltTrain::of(&train()), [2.0, 1.0]).unwrap();
        assert!((a.path_mm - b.path_mm).abs() < 1e-13);
        assert!((a.position_mm[0] - b.position_mm[0] - 0.7).abs() < 1e-13);
        assert!((a.direction[1] - b.direction[1]).abs() < 1e-14);
    }

    #[test]
    fn a_sphere_turned_about_its_centre_is_the_same_sphere() {
        let surface = Surface::sphere(1.0 / 40.0, 9.0);
        let single = Train::new(vec![surface], vec![], vec![1.0, 1.5]).unwrap();
        let mut turned = SpoiltTrain::of(&single);
        turned.surfaces_mut()[0].pose = Pose::on_axis(0.0).turned([0.02, -0.01], 40.0);
        let a = trace_spoilt(&turned, [1.0, 5.0]).unwrap();
        let b = trace_spoilt(&SpoiltTrain::of(&single), [1.0, 5.0]).unwrap();
        assert!((a.direction[0] - b.direction[0]).abs() < 1e-14);
        assert!((a.direction[1] - b.direction[1]).abs() < 1e-14);
        assert!((a.path_mm - b.path_mm).abs() < 1e-13);
    }

    #[test]
    fn irregularity_on_a_flat_bends_by_its_slope() {
        let flat = Surface::sphere(0.0, 10.0);
        let single = Train::new(vec![flat], vec![], vec![1.5, 1.0]).unwrap();
        let mut uneven = SpoiltTrain::of(&single);
        uneven.surfaces_mut()[0].irregularity_fringes = 2.0;
        let ray = trace_spoilt(&uneven, [5.0, 0.0]).unwrap();
        // Sag ½ · 2 fringes · (5/10)²; slope twice that over 5 mm; deviation (n − 1) times both.
        let sag = FRINGE_NM * 1e-6 * 0.25;
        assert!((ray.path_mm - 0.5 * sag).abs() < 1e-10, "{ray:?}");
        assert!((ray.direction[0] - 0.5 * 2.0 * sag / 5.0).abs() < 1e-10, "{ray:?}");
        let mut across = uneven.clone();
        across.surfaces_mut()[0].irregularity_at_rad = std::f64::consts::FRAC_PI_2;
        let other = trace_spoilt(&across, [5.0, 0.0]).unwrap();
        assert!((other.path_mm + 0.5 * sag).abs() < 1e-10);
    }

    #[test]
    fn other_gaps_are_another_drawing() {
        let train = train();
        let mut moved = SpoiltTrain::of(&train);
        let gaps = [4.1, 12.0, 2.4];
        moved.set_gaps(&gaps);
        let mut drawn = train.clone();
        drawn.gaps_mut().copy_from_slice(&gaps);
        assert_eq!(moved, SpoiltTrain::of(&drawn));
    }

    #[test]
    fn a_ray_that_fails_is_told() {
        let mut far = SpoiltTrain::of(&train());
        far.surfaces_mut()[2].pose = far.surfaces_mut()[2].pose.decentred([0.0, 500.0]);
        assert_eq!(trace_spoilt(&far, [0.0, 0.0]).unwrap_err().surface, 2);
    }
}
