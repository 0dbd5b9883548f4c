//! The exact trace: rays through a [`Train`], by vector refraction, everything else is taken from it.
//!
//! One body of code traces meridional rays (`D = 1` transverse coordinate, all that is needed on
//! axis) and skew rays (`D = 2`), one at a time or many side by side.
//!
//! At each surface, in coordinates whose origin is its vertex:
//!
//! 1. *Approach.* The ray is carried to a point near the vertex plane; any point of the ray would
//!    do, but one near the surface loses no digits.
//! 2. *Meet.* With q = x² + y², the sphere or conic c(q + (1+κ)z²) = 2z is met after the further
//!    path s = F/(G + √(G² − AF)), F = c(q + (1+κ)z²) − 2z, G = d_z − c(xd_x + yd_y + (1+κ)zd_z),
//!    A = c(1 + κd_z²): W. T. Welford, *Aberrations of Optical Systems* (1986), ch. 4, written for
//!    an arbitrary starting point. Aspheres go on from there by Newton's method.
//! 3. *Refract.* With unit normal N and cos I = N·d, Snell's law is d′ = μd + (cos I′ − μ cos I)N,
//!    μ = n/n′, cos²I′ = 1 − μ²(1 − cos²I).
//!
//! A square root of a negative number is a ray that misses (2) or is totally reflected (3). It is
//! let run on as NaN, which costs nothing, and is found and told as a [`RayFault`] at the end; no
//! NaN leaves this module.

use multiversion::multiversion;

use crate::fault::{FaultReason, RayFault};
use crate::real::{Abreast, Real};
use crate::surface::Surface;
use crate::train::Train;

/// How far a ray may be off an aspheric surface when Newton's last step is taken, mm. The step
/// itself squares the error.
const NEWTON_REACH_MM: f64 = 1e-9;
/// Newton steps before an aspheric surface counts as missed.
const NEWTON_STEPS: usize = 30;

/// A surface, and the gap and the medium before it: what a ray crosses in one go.
#[derive(Debug, Clone, Copy)]
pub(crate) struct Stage<N> {
    pub(crate) surface: Surface,
    /// Whether the closed form for spheres applies.
    pub(crate) sphere: bool,
    /// Axial distance from the surface before, mm; 0 for the first.
    pub(crate) gap: N,
    /// Refractive index before the surface.
    pub(crate) index: N,
    /// That index over the one behind the surface.
    pub(crate) ratio: N,
}

impl<N: Real> Stage<N> {
    /// A surface between two media, with no gap before it.
    pub(crate) fn alone(surface: Surface, before: f64, behind: f64) -> Self {
        Self {
            surface,
            sphere: surface.is_sphere(),
            gap: N::splat(0.0),
            index: N::splat(before),
            ratio: N::splat(before / behind),
        }
    }

    /// Step 3 with the normal that is given.
    #[inline(always)]
    pub(crate) fn refracted<const D: usize>(
        &self,
        met: Meeting<N, D>,
        n: &[N; D],
        nz: N,
    ) -> (Crossing<N, D>, Ray<N, D>) {
        let (one, mu) = (N::splat(1.0), self.ratio);
        let Meeting { at, path, cos_in, cos_in_squared } = met;
        let cos_out = (one - mu * mu * (one - cos_in_squared)).sqrt();
        let gamma = cos_out - mu * cos_in;
        let behind =
            Ray { d: along(&at.d.map(|d| mu * d), gamma, n), dz: mu * at.dz + gamma * nz, ..at };
        (Crossing { ray: at, path, cos_in, cos_out }, behind)
    }
}

/// A train as the kernels take it.
#[derive(Debug, Clone)]
pub(crate) struct Stages<N> {
    /// One a surface, from left to right.
    pub(crate) list: Vec<Stage<N>>,
    /// Refractive index behind the last surface.
    pub(crate) last_index: N,
}

impl<N: Real> Stages<N> {
    pub(crate) fn of(train: &Train) -> Self {
        let gaps = std::iter::once(&0.0).chain(train.gaps());
        let media = train.indices().windows(2);
        let stage = |((surface, &gap), media): ((&Surface, &f64), &[f64])| Stage {
            gap: N::splat(gap),
            ..Stage::alone(*surface, media[0], media[1])
        };
        let list = train.surfaces().iter().zip(gaps).zip(media).map(stage).collect();
        Self { list, last_index: N::splat(train.indices()[train.len()]) }
    }
}

/// A point and a unit direction. `D` transverse coordinates, the axial one apart.
#[derive(Debug, Clone, Copy)]
pub(crate) struct Ray<N, const D: usize> {
    /// Transverse position, mm.
    pub(crate) y: [N; D],
    /// Axial position from the current vertex, mm.
    pub(crate) z: N,
    /// Transverse direction cosines.
    pub(crate) d: [N; D],
    /// Axial direction cosine.
    pub(crate) dz: N,
}

/// What the reverse sweep needs to know of one ray at one surface.
#[derive(Debug, Clone, Copy)]
pub(crate) struct Crossing<N, const D: usize> {
    /// Where the ray meets the surface, with its *incoming* direction.
    pub(crate) ray: Ray<N, D>,
    /// Path from the previous surface (or from the entrance plane), mm.
    pub(crate) path: N,
    /// Cosine of the angle of incidence.
    pub(crate) cos_in: N,
    /// Cosine of the angle of refraction.
    pub(crate) cos_out: N,
}

/// A ray carried to the plane through the last vertex.
#[derive(Debug, Clone, Copy)]
pub(crate) struct Exit<N, const D: usize> {
    /// Transverse position in that plane, mm.
    pub(crate) y: [N; D],
    /// Transverse direction cosines behind the last surface.
    pub(crate) d: [N; D],
    /// Axial direction cosine behind the last surface.
    pub(crate) dz: N,
    /// Geometric path from the last surface to that plane (negative where the sag is positive), mm.
    pub(crate) path_to_plane: N,
    /// Optical path from the plane through the first vertex, less that of the axial ray, mm.
    pub(crate) path_excess: N,
}

impl<N: Real, const D: usize> Exit<N, D> {
    /// Of the ray behind the last surface, in glass or air of index `index`; up to there its optical
    /// path is `excess` longer than that of the axial ray.
    #[inline(always)]
    pub(crate) fn of(behind: &Ray<N, D>, excess: N, index: N) -> Self {
        let path_to_plane = -behind.z / behind.dz;
        Self {
            y: along(&behind.y, path_to_plane, &behind.d),
            d: behind.d,
            dz: behind.dz,
            path_to_plane,
            path_excess: excess + index * path_to_plane,
        }
    }
}

impl<N: Real, const D: usize> Crossing<N, D> {
    /// Of a ray not yet traced.
    pub(crate) fn blank() -> Self {
        let (zero, one) = (N::splat(0.0), N::splat(1.0));
        Self { ray: Ray::axial(), path: zero, cos_in: one, cos_out: one }
    }
}

impl<N: Real, const D: usize> Exit<N, D> {
    /// Of a ray not yet traced.
    pub(crate) fn blank() -> Self {
        let (zero, one) = (N::splat(0.0), N::splat(1.0));
        Self { y: [zero; D], d: [zero; D], dz: one, path_to_plane: zero, path_excess: zero }
    }
}

#[inline(always)]
pub(crate) fn dot<N: Real, const D: usize>(a: &[N; D], b: &[N; D]) -> N {
    let mut sum = a[0] * b[0];
    for axis in 1..D {
        sum = sum + a[axis] * b[axis];
    }
    sum
}

/// a + s·b, axis by axis.
#[inline(always)]
pub(crate) fn along<N: Real, const D: usize>(a: &[N; D], s: N, b: &[N; D]) -> [N; D] {
    let mut out = *a;
    for axis in 0..D {
        out[axis] = out[axis] + s * b[axis];
    }
    out
}

impl<N: Real, const D: usize> Ray<N, D> {
    /// On the axis and along it.
    pub(crate) fn axial() -> Self {
        let zero = N::splat(0.0);
        Self { y: [zero; D], z: zero, d: [zero; D], dz: N::splat(1.0) }
    }

    #[inline(always)]
    fn advanced(&self, path: N) -> Self {
        Self { y: along(&self.y, path, &self.d), z: self.z + path * self.dz, ..*self }
    }
}

/// Unit normal of a surface at a point on it, pointing towards +z.
#[inline(always)]
pub(crate) fn normal<N: Real, const D: usize>(
    Stage { surface, sphere, .. }: &Stage<N>,
    at: &Ray<N, D>,
) -> ([N; D], N) {
    let one = N::splat(1.0);
    if *sphere {
        let c = N::splat(surface.curvature);
        return (at.y.map(|y| -(c * y)), one - c * at.z);
    }
    let q = dot(&at.y, &at.y);
    let slope = surface.profile(q).slope;
    let nz = one / (one + slope * slope * q).sqrt();
    (at.y.map(|y| -(slope * nz * y)), nz)
}

/// A ray on a surface.
pub(crate) struct Meeting<N, const D: usize> {
    pub(crate) at: Ray<N, D>,
    /// Path from the surface before, mm.
    pub(crate) path: N,
    pub(crate) cos_in: N,
    /// Its square, which on a sphere is there before the root is drawn.
    pub(crate) cos_in_squared: N,
}

/// Steps 1 and 2: carries a ray over the gap to the surface.
#[inline(always)]
pub(crate) fn meet<N: Real, const D: usize>(stage: &Stage<N>, ray: &Ray<N, D>) -> Meeting<N, D> {
    let Stage { surface, sphere, gap, .. } = stage;
    let two = N::splat(2.0);
    let ahead = *gap - ray.z;
    // 2 − d_z is 1/d_z to first order: near enough to the vertex plane, and no division.
    let approach = ahead * (two - ray.dz);
    let near = Ray { y: along(&ray.y, approach, &ray.d), z: approach * ray.dz - ahead, ..*ray };

    let c = N::splat(surface.curvature);
    let q = dot(&near.y, &near.y);
    let yd = dot(&near.y, &near.d);
    if *sphere {
        let f = c * (q + near.z * near.z) - two * near.z;
        let g = near.dz - c * (yd + near.z * near.dz);
        // On a sphere this is cos I.
        let cos_in_squared = g * g - c * f;
        let cos_in = cos_in_squared.sqrt();
        let rest = f / (g + cos_in);
        return Meeting { at: near.advanced(rest), path: approach + rest, cos_in, cos_in_squared };
    }
    let k1 = N::splat(1.0 + surface.conic);
    let f = c * (q + k1 * near.z * near.z) - two * near.z;
    let g = near.dz - c * (yd + k1 * near.z * near.dz);
    let a = c * (N::splat(1.0) + N::splat(surface.conic) * near.dz * near.dz);
    let rest = f / (g + (g * g - a * f).sqrt());
    let (at, last) = polished(surface, near.advanced(rest));
    let (n, nz) = normal(stage, &at);
    let cos_in = dot(&n, &at.d) + nz * at.dz;
    Meeting { at, path: approach + rest + last, cos_in, cos_in_squared: cos_in * cos_in }
}

/// Newton's method along the ray onto a surface given by its sag. A lane that does not settle
/// ends as NaN.
#[inline(always)]
fn polished<N: Real, const D: usize>(surface: &Surface, start: Ray<N, D>) -> (Ray<N, D>, N) {
    let (mut at, mut path) = (start, N::splat(0.0));
    let mut off = N::splat(0.0);
    for _ in 0..NEWTON_STEPS {
        let profile = surface.profile(dot(&at.y, &at.y));
        off = at.z - profile.sag;
        let step = -off / (at.dz - profile.slope * dot(&at.y, &at.d));
        at = at.advanced(step);
        path = path + step;
        if off.settled_within(NEWTON_REACH_MM) {
            return (at, path);
        }
    }
    let unsettled_is_nan =
        N::splat(0.0) * (N::splat(NEWTON_REACH_MM * NEWTON_REACH_MM) - off * off).sqrt();
    (at.advanced(unsettled_is_nan), path + unsettled_is_nan)
}

/// Step 3: the crossing and the ray behind it.
#[inline(always)]
pub(crate) fn refract<N: Real, const D: usize>(
    stage: &Stage<N>,
    met: Meeting<N, D>,
) -> (Crossing<N, D>, Ray<N, D>) {
    let (n, nz) = normal(stage, &met.at);
    stage.refracted(met, &n, nz)
}

/// Traces a ray that starts in the plane through the first vertex. `keep` is given each crossing
/// in turn: what the reverse sweep needs.
#[inline(always)]
fn forward<N: Real, const D: usize>(
    stages: &Stages<N>,
    start: &Ray<N, D>,
    mut keep: impl FnMut(usize, Crossing<N, D>),
) -> Exit<N, D> {
    let mut ray = *start;
    let mut excess = N::splat(0.0);
    for (i, stage) in stages.list.iter().enumerate() {
        let (crossing, behind) = refract(stage, meet(stage, &ray));
        excess = excess + stage.index * (crossing.path - stage.gap);
        keep(i, crossing);
        ray = behind;
    }
    Exit::of(&ray, excess, stages.last_index)
}

/// [`forward`] for meridional rays abreast, in the widest vectors the processor has, with every
/// crossing kept.
#[multiversion(targets("x86_64+avx512f+avx512dq+avx512vl+avx2", "x86_64+avx2", "aarch64+neon"))]
pub(crate) fn forward_meridional(
    stages: &Stages<Abreast>,
    start: &Ray<Abreast, 1>,
    crossings: &mut [Crossing<Abreast, 1>],
    exit: &mut Exit<Abreast, 1>,
) {
    let crossings = &mut crossings[..stages.list.len()];
    *exit = forward(stages, start, |i, crossing| crossings[i] = crossing);
}

/// The same where only the paths are wanted.
#[multiversion(targets("x86_64+avx512f+avx512dq+avx512vl+avx2", "x86_64+avx2", "aarch64+neon"))]
pub(crate) fn forward_meridional_paths(
    stages: &Stages<Abreast>,
    start: &Ray<Abreast, 1>,
    exit: &mut Exit<Abreast, 1>,
) {
    *exit = forward(stages, start, |_, _| {});
}

/// [`forward`] for one skew ray.
pub(crate) fn forward_skew(
    stages: &Stages<f64>,
    start: &Ray<f64, 2>,
    crossings: &mut [Crossing<f64, 2>],
) -> Exit<f64, 2> {
    forward(stages, start, |i, crossing| crossings[i] = crossing)
}

/// Looks through the crossings of one ray for the first that failed. `lane` reads one ray's
/// number out of the kernel's number type.
pub(crate) fn find_fault<N: Real, const D: usize>(
    crossings: &[Crossing<N, D>],
    exit: &Exit<N, D>,
    lane: impl Fn(N) -> f64,
) -> Option<RayFault> {
    let reason = |crossing: &Crossing<N, D>| {
        if !lane(crossing.cos_in).is_finite() || !lane(crossing.path).is_finite() {
            Some(FaultReason::Miss)
        } else if lane(crossing.cos_in) <= 0.0 {
            Some(FaultReason::FarSide)
        } else if !lane(crossing.cos_out).is_finite() {
            Some(FaultReason::TotalReflection)
        } else {
            None
        }
    };
    for (surface, crossing) in crossings.iter().enumerate() {
        if let Some(reason) = reason(crossing) {
            return Some(RayFault { surface, reason });
        }
    }
    let sound = lane(exit.path_excess).is_finite() && lane(exit.dz) > 0.0;
    (!sound).then_some(RayFault {
        surface: crossings.len().saturating_sub(1),
        reason: FaultReason::TurnedBack,
    })
}
