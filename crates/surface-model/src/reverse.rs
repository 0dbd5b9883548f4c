//! The reverse sweep: from one traced ray, the exact derivative of its optical path (and, where
//! asked, of its exit point and direction or of an angle of incidence) by every quantity of the
//! train, at the cost of a few traces however many there are.
//!
//! It walks the surfaces from last to first and carries *adjoints*: x̄ is the derivative of the
//! result by x, all later steps included. For each step of the [trace](crate::trace), with X the
//! point, d the direction, N the unit normal, s the path from the previous point:
//!
//! *Refract*, d′ = μd + γN, γ = cos I′ − μ cos I, cos I = N·d:
//!
//! ```text
//! γ̄ = N·d̄′        Ī = −μγ/cos I′ · γ̄          (since ∂γ/∂cos I = μ² cos I/cos I′ − μ)
//! d̄ = μd̄′ + ĪN    N̄ = γd̄′ + Īd
//! μ̄ = d·d̄′ − γ̄(μ sin²I/cos I′ + cos I)
//! ```
//!
//! *Normal of a sphere*, N = e_z − cX: X̄ −= cN̄, c̄ −= N̄·X. *Of any other surface*, with
//! u = g(q)·(x, y), E = √(1 + u·u), N = (−u, 1)/E:
//!
//! ```text
//! ū = −N̄⊥/E + (N̄⊥·u − N̄_z)u/E³     ȳ += gū + 2g′(ū·y)y     ḡ = ū·y
//! ```
//!
//! *Meet.* Whatever the closed form or the iteration that found it, the point stays on the
//! surface: N·dX = dν, the displacement of the surface along its normal. With
//! dX = dX₀ + s dd + d ds this gives ds = (dν − N·(dX₀ + s dd))/cos I, hence, with
//! σ = n·W̄ + d·X̄ the coefficient of ds (the path s counts n in the optical path W):
//!
//! ```text
//! ν̄ = σ/cos I      X̄₀ = X̄ − ν̄N      d̄ += sX̄₀      t̄ = −X̄₀_z − nW̄
//! ```
//!
//! where t is the gap before the surface (−nW̄: the axial ray's path is subtracted) and
//! ∂ν/∂c = ½(q + z²) for a sphere, N_z ∂(sag)/∂(parameter) otherwise.
//!
//! This is reverse accumulation (A. Griewank and A. Walther, *Evaluating Derivatives*, 2nd ed.,
//! SIAM 2008, ch. 3) applied to Snell's law by hand.

use multiversion::multiversion;

use crate::quantities::Quantities;
use crate::real::{Abreast, Real};
use crate::surface::{ASPHERE_TERMS, Surface};
use crate::trace::{Crossing, Exit, Ray, Stage, Stages, along, dot, normal};

/// What is to be differentiated: a weighted sum of the quantities a ray ends with.
#[derive(Debug, Clone, Copy)]
pub(crate) struct Seed<N, const D: usize> {
    /// Weight of the optical path.
    pub(crate) path: N,
    /// Weights of the position in the exit plane.
    pub(crate) position: [N; D],
    /// Weights of the exit direction cosines.
    pub(crate) direction: [N; D],
    /// Weights of what a ray has at one surface.
    pub(crate) at: Option<(usize, AtSurface<N>)>,
}

impl<N: Real, const D: usize> Seed<N, D> {
    /// The optical path alone.
    #[inline(always)]
    pub(crate) fn path() -> Self {
        let zero = N::splat(0.0);
        Self { path: N::splat(1.0), position: [zero; D], direction: [zero; D], at: None }
    }

    /// What a ray has at one surface alone.
    #[inline(always)]
    pub(crate) fn at(surface: usize, weights: AtSurface<N>) -> Self {
        Self { path: N::splat(0.0), at: Some((surface, weights)), ..Self::path() }
    }
}

/// Weights of what a ray has at one surface.
#[derive(Debug, Clone, Copy)]
pub(crate) struct AtSurface<N> {
    /// Of the cosine of its angle of incidence.
    pub(crate) cos_in: N,
    /// Of its height, the last of its transverse coordinates.
    pub(crate) height: N,
}

/// Adjoint of the point and of the direction of a ray: the same shape as a ray.
type Adjoint<N, const D: usize> = Ray<N, D>;

/// Adjoint of the ray behind the last surface, from the seeds in the exit plane.
#[inline(always)]
fn leave<N: Real, const D: usize>(exit: &Exit<N, D>, index: N, seed: &Seed<N, D>) -> Adjoint<N, D> {
    let spread = (index * seed.path + dot(&exit.d, &seed.position)) / exit.dz;
    Adjoint {
        y: seed.position,
        z: -spread,
        d: along(&seed.direction, exit.path_to_plane, &seed.position),
        dz: -(exit.path_to_plane * spread),
    }
}

/// Adds what the normal's adjoint says to the point's adjoint, and gives the derivative by the
/// surface's curvature; those by its other numbers are handed to `put`.
#[inline(always)]
fn bend<N: Real, const D: usize>(
    surface: &Surface,
    closed_form: bool,
    at: &Ray<N, D>,
    (n_bar, nz_bar): (&[N; D], N),
    point: &mut Adjoint<N, D>,
    mut put: impl FnMut(Shape, N),
) -> N {
    let c = N::splat(surface.curvature);
    if closed_form {
        point.y = along(&point.y, -c, n_bar);
        point.z = point.z - c * nz_bar;
        return -(dot(n_bar, &at.y) + nz_bar * at.z);
    }
    let one = N::splat(1.0);
    let q = dot(&at.y, &at.y);
    let profile = surface.profile(q);
    let g = profile.slope;
    let e = one / (one + g * g * q).sqrt();
    let toward = g * dot(n_bar, &at.y) - nz_bar;
    let across = toward * g * e * e * e;
    let mut u_bar = *n_bar;
    for axis in 0..D {
        u_bar[axis] = across * at.y[axis] - e * n_bar[axis];
    }
    let g_bar = dot(&u_bar, &at.y);
    point.y = along(&point.y, g, &u_bar);
    point.y = along(&point.y, N::splat(2.0) * profile.slope_by_q * g_bar, &at.y);
    let cube = one / (profile.w * profile.w * profile.w);
    put(Shape::Conic, g_bar * N::splat(0.5) * c * c * c * q * cube);
    let mut power = q;
    for term in 0..ASPHERE_TERMS {
        put(Shape::Term(term), g_bar * N::splat(asphere_order(term) * 2.0) * power);
        power = power * q;
    }
    g_bar * cube
}

/// Power of q = r² that coefficient `term` stands for.
#[inline(always)]
fn asphere_order(term: usize) -> f64 {
    (term + 2) as f64
}

/// One of the numbers that make a surface's shape, beside its curvature.
#[derive(Clone, Copy)]
enum Shape {
    Conic,
    Term(usize),
}

/// Derivative of the surface's displacement along its normal by its curvature, times `nu_bar`;
/// those by its other numbers are handed to `put`.
#[inline(always)]
fn displace<N: Real, const D: usize>(
    surface: &Surface,
    closed_form: bool,
    at: &Ray<N, D>,
    nz: N,
    nu_bar: N,
    mut put: impl FnMut(Shape, N),
) -> N {
    let half = N::splat(0.5);
    let q = dot(&at.y, &at.y);
    if closed_form {
        return nu_bar * half * (q + at.z * at.z);
    }
    let profile = surface.profile(q);
    let z2 = profile.conic_sag * profile.conic_sag;
    let axial = nu_bar * nz;
    let over_w = axial * half / profile.w;
    put(Shape::Conic, over_w * N::splat(surface.curvature) * z2);
    let mut power = q * q;
    for term in 0..ASPHERE_TERMS {
        put(Shape::Term(term), axial * power);
        power = power * q;
    }
    over_w * (q + N::splat(1.0 + surface.conic) * z2)
}

/// Cosines of the angles to the normal before and behind a surface, and one over each.
struct Cosines<N> {
    into: N,
    out: N,
    over_into: N,
    over_out: N,
}

impl<N: Real> Cosines<N> {
    #[inline(always)]
    fn of<const D: usize>(crossing: &Crossing<N, D>) -> Self {
        let (into, out) = (crossing.cos_in, crossing.cos_out);
        // One division for both.
        let over_both = N::splat(1.0) / (into * out);
        Self { into, out, over_into: over_both * out, over_out: over_both * into }
    }
}

/// Adjoints before a refraction.
struct Refracted<N, const D: usize> {
    before: Adjoint<N, D>,
    n_bar: [N; D],
    nz_bar: N,
    gamma_bar: N,
}

/// From the adjoint behind a refraction those of the direction before it and of the normal;
/// `here` weighs what the ray itself has at this surface in the result.
#[inline(always)]
fn refract<N: Real, const D: usize>(
    at: &Ray<N, D>,
    (n, nz): (&[N; D], N),
    mu: N,
    cosines: &Cosines<N>,
    behind: &Adjoint<N, D>,
    here: Option<AtSurface<N>>,
) -> Refracted<N, D> {
    let gamma = cosines.out - mu * cosines.into;
    let gamma_bar = dot(n, &behind.d) + nz * behind.dz;
    let mut cos_bar = -(mu * gamma * cosines.over_out * gamma_bar);
    let mut before = *behind;
    if let Some(weights) = here {
        cos_bar = cos_bar + weights.cos_in;
        before.y[D - 1] = before.y[D - 1] + weights.height;
    }
    let mut n_bar = behind.d;
    for axis in 0..D {
        n_bar[axis] = gamma * behind.d[axis] + cos_bar * at.d[axis];
        before.d[axis] = mu * behind.d[axis] + cos_bar * n[axis];
    }
    let nz_bar = gamma * behind.dz + cos_bar * at.dz;
    before.dz = mu * behind.dz + cos_bar * nz;
    Refracted { before, n_bar, nz_bar, gamma_bar }
}

/// The sweep itself. `row` (length [`Quantities::count`]) receives the derivatives.
#[inline(always)]
fn backward<N: Real, const D: usize>(
    stages: &Stages<N>,
    crossings: &[Crossing<N, D>],
    exit: &Exit<N, D>,
    seed: &Seed<N, D>,
    quantities: Quantities,
    row: &mut [N],
) {
    let indices = quantities.has_indices();
    let mut behind = leave(exit, stages.last_index, seed);
    if indices {
        row[quantities.index(stages.list.len())] = seed.path * exit.path_to_plane;
    }

    for (i, (stage, crossing)) in stages.list.iter().zip(crossings).enumerate().rev() {
        let Stage { surface, sphere, gap, index: n_in, ratio } = stage;
        let Crossing { ray: at, path, .. } = crossing;
        let cosines = Cosines::of(crossing);
        let (mu, n_in) = (*ratio, *n_in);
        let (n, nz) = normal(stage, at);
        let here = seed.at.filter(|&(surface, _)| surface == i).map(|(_, weights)| weights);
        let refracted = refract(at, (&n, nz), mu, &cosines, &behind, here);
        let Refracted { mut before, n_bar, nz_bar, gamma_bar } = refracted;

        if indices {
            let sin2 = N::splat(1.0) - cosines.into * cosines.into;
            let mu_bar = dot(&at.d, &behind.d) + at.dz * behind.dz
                - gamma_bar * (mu * sin2 * cosines.over_out + cosines.into);
            let over_n_out = mu / n_in;
            let (here, next) = (quantities.index(i), quantities.index(i + 1));
            row[here] = mu_bar * over_n_out + seed.path * (*path - *gap);
            row[next] = row[next] - mu_bar * mu * over_n_out;
        }

        // Bend, then meet. Where derivatives by the conic are kept, a sphere is a conic too.
        let shapes = quantities.shapes().has(i);
        let closed_form = *sphere && !shapes;
        let place_of = |shape: Shape| match shape {
            Shape::Conic => quantities.conic(i),
            Shape::Term(term) => quantities.asphere(i, term),
        };
        let by_bend = bend(surface, closed_form, at, (&n_bar, nz_bar), &mut before, |shape, by| {
            if shapes {
                row[place_of(shape)] = by;
            }
        });
        let spread = n_in * seed.path + dot(&at.d, &before.y) + at.dz * before.z;
        let nu_bar = spread * cosines.over_into;
        let by_displacement = displace(surface, closed_form, at, nz, nu_bar, |shape, by| {
            if shapes {
                let place = place_of(shape);
                row[place] = row[place] + by;
            }
        });
        row[quantities.curvature(i)] = by_bend + by_displacement;
        before.y = along(&before.y, -nu_bar, &n);
        before.z = before.z - nu_bar * nz;
        before.d = along(&before.d, *path, &before.y);
        before.dz = before.dz + *path * before.z;
        if i > 0 {
            row[quantities.gap(i - 1)] = -(before.z + n_in * seed.path);
        }
        behind = before;
    }
}

/// [`backward`] for meridional rays abreast, in the widest vectors the processor has.
#[multiversion(targets("x86_64+avx512f+avx512dq+avx512vl+avx2", "x86_64+avx2", "aarch64+neon"))]
pub(crate) fn backward_meridional(
    stages: &Stages<Abreast>,
    crossings: &[Crossing<Abreast, 1>],
    exit: &Exit<Abreast, 1>,
    quantities: Quantities,
    row: &mut [Abreast],
) {
    backward(stages, crossings, exit, &Seed::path(), quantities, row);
}

/// [`backward`] for one skew ray.
pub(crate) fn backward_skew(
    stages: &Stages<f64>,
    crossings: &[Crossing<f64, 2>],
    exit: &Exit<f64, 2>,
    seed: &Seed<f64, 2>,
    quantities: Quantities,
    row: &mut [f64],
) {
    backward(stages, crossings, exit, seed, quantities, row);
}
