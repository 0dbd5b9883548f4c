//! Aberrations of the third order, and wavefront error, against formulas in closed form.

use surface_model::first_order::first_order;
use surface_model::paraxial::ParaxialRay;
use surface_model::seidel::{SeidelRays, seidel};
use surface_model::skew::{RayStart, trace_ray};
use surface_model::surface::Surface;
use surface_model::traced_beam::TracedBeam;
use surface_model::train::Train;
use surface_model::wavefront::{wavefront_error, wavefront_samples};

const INDEX: f64 = 1.5;
const POWER: f64 = 0.01;

/// A lens of no thickness with shape factor B = (c₁ + c₂)/(c₁ − c₂).
fn thin_lens(shape: f64) -> Train {
    let difference = POWER / (INDEX - 1.0);
    let curvatures = [(shape + 1.0) / 2.0, (shape - 1.0) / 2.0].map(|part| part * difference);
    let surfaces = curvatures.map(|c| Surface::sphere(c, 9.0)).to_vec();
    Train::new(surfaces, vec![0.0], vec![1.0, INDEX, 1.0]).unwrap()
}

/// Spherical aberration of a thin lens with collimated light, conjugate factor C = −1 (W. T.
/// Welford, *Aberrations of Optical Systems* (1986), on thin lenses):
/// S_I = h⁴K³/4 [(n/(n−1))² + (n+2)/(n(n−1)²) (B + 2(n²−1)C/(n+2))² − nC²/(n+2)].
fn thin_lens_spherical(h: f64, shape: f64) -> f64 {
    let n = INDEX;
    let bent = shape - 2.0 * (n * n - 1.0) / (n + 2.0);
    let bracket =
        (n / (n - 1.0)).powi(2) + (n + 2.0) / (n * (n - 1.0).powi(2)) * bent * bent - n / (n + 2.0);
    h.powi(4) * POWER.powi(3) / 4.0 * bracket
}

/// Where the exact ray at height `h` crosses the axis, less where the paraxial one does.
fn longitudinal_spherical(train: &Train, h: f64) -> f64 {
    let exit = trace_ray(train, RayStart::parallel(h)).unwrap().exit();
    let sine = exit.direction[1];
    let marginal = -exit.position_mm[1] * (1.0 - sine * sine).sqrt() / sine;
    let focal = first_order(train, 0..train.len()).unwrap().focal.unwrap();
    marginal - focal.back_focal_distance_mm
}

const SHAPES: [f64; 6] = [-2.0, -1.0, 0.0, 5.0 / 7.0, 1.0, 2.0];

#[test]
fn seidel_sum_of_a_thin_lens_by_shape() {
    let rays = SeidelRays { marginal_height_mm: 3.0, marginal_slope: 0.0, chief_slope: 0.0 };
    for shape in SHAPES {
        let sum = seidel(&thin_lens(shape), rays).unwrap().total.spherical_mm;
        let expected = thin_lens_spherical(3.0, shape);
        assert!((sum - expected).abs() < 1e-12 * expected, "{shape}: {sum} {expected}");
    }
}

/// The exact rays tend to L′ − l′ = −S_I/(2u′²), with an error in proportion to the square of the
/// aperture.
#[test]
fn exact_rays_of_a_thin_lens_by_shape() {
    for shape in SHAPES {
        let train = thin_lens(shape);
        let off_by = |h: f64| {
            let slope = h * POWER;
            let expected = -thin_lens_spherical(h, shape) / (2.0 * slope * slope);
            longitudinal_spherical(&train, h) / expected - 1.0
        };
        let (wide, narrow) = (off_by(4.0), off_by(2.0));
        assert!(narrow.abs() < 4e-3, "{shape}: {narrow}");
        let order = wide / narrow;
        assert!((order - 4.0).abs() < 0.05, "{shape}: error falls by {order}, not 4");
        // Without the error's leading term, six digits agree.
        let rest = (4.0 * narrow - wide) / 3.0;
        assert!(rest.abs() < 1e-5, "{shape}: {rest}");
    }
}

/// The least spherical aberration is at B = 2(n² − 1)/(n + 2), 5/7 for n = 1.5: nearly, but not
/// quite, convex-plano.
#[test]
fn the_best_shape_of_a_thin_lens() {
    let best = |h: f64| {
        let [a, b, c] = [0.5, 0.7, 0.9].map(|shape| longitudinal_spherical(&thin_lens(shape), h));
        0.7 - 0.1 * (c - a) / (c - 2.0 * b + a)
    };
    let expected = 2.0 * (INDEX * INDEX - 1.0) / (INDEX + 2.0);
    assert!((expected - 5.0 / 7.0).abs() < 1e-15);
    let (wide, narrow) = (best(4.0), best(2.0));
    let limit = (4.0 * narrow - wide) / 3.0;
    assert!((limit - expected).abs() < 1e-5, "{narrow} {wide} {limit}");
}

/// A negative and a positive lens set afocal, from which a beam comes out wider.
fn galilean() -> Train {
    let curvatures = [-0.03, 0.02, 0.0, -0.016];
    let surfaces = curvatures.map(|c| Surface::sphere(c, 9.0)).to_vec();
    let indices = vec![1.0, 1.52, 1.0, 1.62, 1.0];
    let mut train = Train::new(surfaces, vec![2.0, 0.0, 4.0], indices).unwrap();
    let focal = |part| first_order(&train, part).unwrap().focal.unwrap();
    let (front, rear) = (focal(0..2), focal(2..4));
    train.gaps_mut()[1] = front.back_focal_distance_mm - rear.front_focal_distance_mm;
    assert!(train.gaps()[1] > 1.0);
    train
}

/// Welford, *Aberrations of Optical Systems* (1986), ch. 7 and 8: W = S_I/8 (r/h)⁴ to the fourth
/// order, W positive where the wavefront is ahead; optical path is less by as much there.
#[test]
fn exact_wavefront_tends_to_the_seidel_sum() {
    let train = galilean();
    let rays = SeidelRays { marginal_height_mm: 1.0, marginal_slope: 0.0, chief_slope: 0.0 };
    let spherical = seidel(&train, rays).unwrap().total.spherical_mm;
    let off_by = |r: f64| {
        let beam = TracedBeam::new(r, 1.0, 1e6).unwrap(); // one wave a millimetre
        let excess = wavefront_samples(&train, &beam, 2).unwrap()[1].waves;
        excess / (-spherical / 8.0 * r.powi(4)) - 1.0
    };
    let (wide, narrow) = (off_by(2.0), off_by(1.0));
    assert!(narrow.abs() < 0.02, "{narrow}");
    assert!((wide / narrow - 4.0).abs() < 0.1, "{wide} {narrow}");
    assert!(((4.0 * narrow - wide) / 3.0).abs() < 1e-4, "{wide} {narrow}");
}

/// Wavefront aberration, ahead of the plane wave along the chief ray, of the ray that enters at
/// `pupil` (mm) in a beam that comes in at a direction cosine `field` in y through the first
/// vertex, mm.
fn ahead(train: &Train, pupil: [f64; 2], field: f64) -> f64 {
    let trace = |position_mm| {
        trace_ray(train, RayStart { position_mm, direction: [0.0, field] }).unwrap().exit()
    };
    let (ray, chief) = (trace(pupil), trace([0.0, 0.0]));
    let axial = |[x, y]: [f64; 2]| (1.0 - x * x - y * y).sqrt();
    let along =
        ray.direction[1] * chief.direction[1] + axial(ray.direction) * axial(chief.direction);
    // From the incoming plane wave through the vertex, through the train, and on to the outgoing
    // plane wave through the point where the chief ray leaves.
    let rest = (ray.position_mm[1] - chief.position_mm[1]) * chief.direction[1] / along;
    chief.path_mm - (field * pupil[1] + ray.path_mm - rest)
}

/// W = ½ S_II (y/h)³ for the part odd in the pupil, to the third order and for a small field.
#[test]
fn exact_coma_tends_to_the_seidel_sum() {
    let train = galilean();
    let field = 1e-4;
    let rays = SeidelRays { marginal_height_mm: 1.0, marginal_slope: 0.0, chief_slope: field };
    let coma = seidel(&train, rays).unwrap().total.coma_mm;
    let off_by = |y: f64| {
        let odd = (ahead(&train, [0.0, y], field) - ahead(&train, [0.0, -y], field)) / 2.0;
        odd / (0.5 * coma * y.powi(3)) - 1.0
    };
    let (wide, narrow) = (off_by(2.0), off_by(1.0));
    assert!(narrow.abs() < 0.02, "{narrow}");
    assert!((wide / narrow - 4.0).abs() < 0.1, "{wide} {narrow}");
    assert!(((4.0 * narrow - wide) / 3.0).abs() < 1e-4, "{wide} {narrow}");
}

/// The part quadratic in pupil and field, W = ½ S_III (y/h)² + ¼ (S_III + S_IV)(r/h)²: what is
/// left of the even part without the spherical aberration on axis.
#[test]
fn exact_astigmatism_and_curvature_tend_to_the_seidel_sums() {
    let train = galilean();
    let part = |pupil: [f64; 2], field: f64| {
        let even = |field: f64| {
            let turned = pupil.map(|coordinate| -coordinate);
            (ahead(&train, pupil, field) + ahead(&train, turned, field)) / 2.0
        };
        let rays = SeidelRays { marginal_height_mm: 1.0, marginal_slope: 0.0, chief_slope: field };
        let sums = seidel(&train, rays).unwrap().total;
        let [x2, y2] = pupil.map(|coordinate| coordinate * coordinate);
        let expected = sums.astigmatism_mm * y2 / 2.0
            + (sums.astigmatism_mm + sums.petzval_mm) * (x2 + y2) / 4.0;
        (even(field) - even(0.0)) / expected - 1.0
    };
    for [x, y] in [[0.0, 1.0], [1.0, 0.0], [0.6, 0.8]] {
        let (wide, narrow) = (part([x, y], 0.04), part([x / 2.0, y / 2.0], 0.02));
        assert!((wide / narrow - 4.0).abs() < 0.2, "{x} {y}: {wide} {narrow}");
        assert!(((4.0 * narrow - wide) / 3.0).abs() < 1e-3, "{x} {y}: {wide} {narrow}");
    }
}

/// Distortion: the chief ray leaves with a tangent that is short of the paraxial one by
/// S_V/(2n′h′), h′ the marginal height at the exit.
#[test]
fn exact_distortion_tends_to_the_seidel_sum() {
    let train = galilean();
    let (mut marginal, mut chief) = (ParaxialRay::new(), ParaxialRay::new());
    marginal.trace(&train, 1.0, 0.0).unwrap();
    let mut off_by = |tangent: f64| {
        let rays =
            SeidelRays { marginal_height_mm: 1.0, marginal_slope: 0.0, chief_slope: tangent };
        let distortion = seidel(&train, rays).unwrap().total.distortion_mm;
        chief.trace(&train, 0.0, tangent).unwrap();
        let sine = tangent / tangent.hypot(1.0);
        let start = RayStart { position_mm: [0.0, 0.0], direction: [0.0, sine] };
        let out = trace_ray(&train, start).unwrap().exit().direction[1];
        let short = chief.exit_slope().unwrap() - out / (1.0 - out * out).sqrt();
        short / (distortion / (2.0 * marginal.heights()[3])) - 1.0
    };
    let (wide, narrow) = (off_by(0.04), off_by(0.02));
    assert!((wide / narrow - 4.0).abs() < 0.2, "{wide} {narrow}");
    assert!(((4.0 * narrow - wide) / 3.0).abs() < 1e-3, "{wide} {narrow}");
}

/// Pure defocus W = a r² over a Gaussian cut at t radii: x = 2r²/w² is then distributed
/// exponentially up to X = 2t², whose variance is 1 − X²eˣ/(eˣ − 1)² (elementary; e.g. N. L.
/// Johnson, S. Kotz and N. Balakrishnan, *Continuous Univariate Distributions*, on the truncated
/// exponential, value from memory). RMS = |a|w²/2 times its root, PV = |a|t²w².
#[test]
fn defocus_of_a_truncated_gaussian_beam() {
    // Collimated light leaves a plano-convex lens of long focal length: W = −Kr²/2 but for terms
    // in (Kr)², 1e-8 of it here.
    let (power, w, wavelength) = (1e-4, 1.2, 632.8);
    let surfaces = vec![Surface::sphere(0.0, 5.0), Surface::sphere(-power / 0.5, 5.0)];
    let train = Train::new(surfaces, vec![2.0], vec![1.0, 1.5, 1.0]).unwrap();
    for reach in [0.3, 1.0, 1.5, 2.5] {
        let beam = TracedBeam::new(w, reach, wavelength).unwrap();
        let error = wavefront_error(&train, &beam).unwrap();
        let a = power / 2.0 * 1e6 / wavelength;
        let x = 2.0 * reach * reach;
        let variance = 1.0 - x * x * x.exp() / x.exp_m1().powi(2);
        let rms = a * w * w / 2.0 * variance.sqrt();
        let pv = a * reach * reach * w * w;
        let close = |got: f64, expected: f64| {
            assert!((got - expected).abs() < 2e-7 * expected, "{reach}: {got} {expected}");
        };
        close(error.rms_waves, rms);
        close(error.pv_waves, pv);
    }
}
