//! The exact trace against laws and cases that have an exact answer.

use surface_model::fault::{FaultReason, RayFault};
use surface_model::skew::{RayPath, RayStart, trace_ray};
use surface_model::surface::Surface;
use surface_model::train::Train;

fn one_surface(surface: Surface, before: f64, behind: f64) -> Train {
    Train::new(vec![surface], vec![], vec![before, behind]).unwrap()
}

fn axial(direction: [f64; 2]) -> f64 {
    (1.0 - direction[0] * direction[0] - direction[1] * direction[1]).sqrt()
}

/// Where a traced ray is at the axial distance `z` behind the last vertex.
fn at(path: &RayPath, z: f64) -> [f64; 2] {
    let exit = path.exit();
    let run = z / axial(exit.direction);
    [0, 1].map(|axis| exit.position_mm[axis] + run * exit.direction[axis])
}

/// Starts over the disc of a given radius, none of them on a line through the centre alone.
fn pupil(radius: f64) -> Vec<[f64; 2]> {
    let ring = |i: usize| {
        let (r, angle) = (radius * (i as f64 / 24.0), 2.399_963 * i as f64);
        [r * angle.cos(), r * angle.sin()]
    };
    (1..=24).map(ring).collect()
}

/// Snell's law at a flat, by hand: 30° in air, sin I′ = 0.5/1.5 = 1/3, cos I′ = √8/3.
#[test]
fn snells_law_at_a_flat() {
    let flat = one_surface(Surface::sphere(0.0, 9.0), 1.0, 1.5);
    let start = RayStart { position_mm: [0.0, 0.0], direction: [0.3, 0.4] };
    let path = trace_ray(&flat, start).unwrap();
    let [x, y] = path.exit().direction;
    assert!((x - 0.2).abs() < 1e-15 && (y - 0.8 / 3.0).abs() < 1e-15, "{x} {y}");
    assert!((axial([x, y]) - 8.0_f64.sqrt() / 3.0).abs() < 1e-15);
    let point = &path.points()[0];
    assert!((point.incidence_rad - std::f64::consts::FRAC_PI_6).abs() < 1e-15);
    assert!((point.refraction_rad - (1.0_f64 / 3.0).asin()).abs() < 1e-15);
}

/// Snell's law in vector form, by hand (M. Born and E. Wolf, *Principles of Optics*, §3.2.2): a
/// sphere of radius 5 met at height 3, normal (−3, 4)/5, sin I = 0.6, n′ = 1.2, so sin I′ = 1/2;
/// d′ = d/1.2 + (√3/2 − 0.8/1.2)N.
#[test]
fn snells_law_at_a_sphere() {
    let sphere = one_surface(Surface::sphere(0.2, 4.9), 1.0, 1.2);
    let path = trace_ray(&sphere, RayStart::parallel(3.0)).unwrap();
    let point = &path.points()[0];
    for (got, expected) in point.position_mm.iter().zip([0.0, 3.0, 1.0]) {
        assert!((got - expected).abs() < 1e-14);
    }
    for (got, expected) in point.normal.iter().zip([0.0, -0.6, 0.8]) {
        assert!((got - expected).abs() < 1e-15);
    }
    let gamma = 0.75_f64.sqrt() - 2.0 / 3.0;
    let direction = path.exit().direction;
    assert_eq!(direction[0], 0.0);
    assert!((direction[1] + 0.6 * gamma).abs() < 1e-15);
    assert!((axial(direction) - (5.0 / 6.0 + 0.8 * gamma)).abs() < 1e-15);
}

/// Total internal reflection begins at sin I = n′/n (Born and Wolf, §1.5.4).
#[test]
fn total_reflection_begins_at_the_critical_angle() {
    let glass_to_air = one_surface(Surface::sphere(0.0, 9.0), 1.5, 1.0);
    let at = |sine: f64| {
        let start = RayStart { position_mm: [0.0, 0.0], direction: [0.0, sine] };
        trace_ray(&glass_to_air, start)
    };
    let below = at(1.0 / 1.5 - 1e-12).unwrap();
    assert!(axial(below.exit().direction) < 2e-6, "it leaves along the surface");
    let fault = at(1.0 / 1.5 + 1e-12).unwrap_err();
    assert_eq!(fault, RayFault { surface: 0, reason: FaultReason::TotalReflection });
}

/// Rays through the axial point `focus` behind the last vertex, and as long as the axial one.
fn assert_stigmatic(train: &Train, focus: f64, radius: f64, fastest: f64) {
    let index = train.indices()[train.len()];
    let mut steepest = 0.0_f64;
    for position_mm in pupil(radius) {
        let start = RayStart { position_mm, direction: [0.0, 0.0] };
        let path = trace_ray(train, start).unwrap();
        let [x, y] = at(&path, focus);
        assert!(x.hypot(y) < 1e-12, "{position_mm:?} misses by {}", x.hypot(y));
        let exit = path.exit();
        let [px, py] = exit.position_mm;
        // Over the axial ray: path in the train, then to the focus less the axial distance.
        let (p2, to_focus) = (px * px + py * py, focus / axial(exit.direction));
        let excess = exit.path_mm + index * p2 / (to_focus + focus);
        assert!(excess.abs() < 1e-12, "{position_mm:?}: path differs by {excess}");
        steepest = steepest.max(exit.direction[0].hypot(exit.direction[1]));
    }
    assert!(steepest > fastest, "a fast cone, not {steepest}");
}

/// Descartes' ovals for an object at infinity are conics (Born and Wolf, *Principles of Optics*,
/// on perfectly imaging refracting surfaces): light going out of glass of index n, collimated in
/// it, meets its focus behind a hyperboloid of conic constant −n².
#[test]
fn a_hyperboloid_images_collimated_light_out_of_glass() {
    for n in [1.5, 1.78] {
        let mut back = Surface::sphere(-1.0 / 10.0, 30.0);
        back.conic = -n * n;
        let surfaces = vec![Surface::sphere(0.0, 30.0), back];
        let train = Train::new(surfaces, vec![40.0], vec![1.0, n, 1.0]).unwrap();
        assert_stigmatic(&train, 10.0 / (n - 1.0), 28.0, 0.55);
        // The sphere in its place does not.
        let mut sphere = train.clone();
        sphere.surfaces_mut()[1].conic = 0.0;
        let [x, y] = at(&trace_ray(&sphere, RayStart::parallel(3.0)).unwrap(), 10.0 / (n - 1.0));
        assert!(x.hypot(y) > 0.01);
    }
}

/// The same for light that enters glass from air, collimated: an ellipsoid of conic constant
/// −1/n², whose far focus is the image.
#[test]
fn an_ellipsoid_images_collimated_light_into_glass() {
    for n in [1.5, 1.78_f64] {
        let mut front = Surface::sphere(1.0 / 10.0, 30.0);
        front.conic = -1.0 / (n * n);
        let widest = 10.0 / (1.0 - 1.0 / (n * n)).sqrt();
        let train = one_surface(front, 1.0, n);
        assert_stigmatic(&train, n * 10.0 / (n - 1.0), 0.95 * widest, 0.5);
    }
}

/// A sphere of radius R images, without error, the concentric sphere of radius R n′/n onto that of
/// radius R n/n′: its aplanatic points (Born and Wolf, §4.2.3; R. Kingslake, *Lens Design
/// Fundamentals*, on aplanatic surfaces). Any ray, skew or not, aimed at a point of the one goes
/// through the point of the other in the same direction from the centre.
#[test]
fn aplanatic_spheres_are_imaged_without_error() {
    let (radius, n, n1) = (10.0, 1.0, 1.6);
    let train = one_surface(Surface::sphere(1.0 / radius, 9.9), n, n1);
    for [tilt_x, tilt_y] in [[0.0, 0.0], [0.05, 0.0], [0.1, -0.2], [0.0, 0.3]] {
        let toward = [tilt_x, tilt_y, axial([tilt_x, tilt_y])];
        let point = |distance: f64| toward.map(|t| t * distance);
        let (object, image) = (point(radius * n1 / n), point(radius * n / n1));
        for p in pupil(8.0) {
            let aim = [object[0] - p[0], object[1] - p[1], object[2] + radius];
            let length = aim.iter().map(|x| x * x).sum::<f64>().sqrt();
            let start = RayStart { position_mm: p, direction: [aim[0] / length, aim[1] / length] };
            let path = trace_ray(&train, start).unwrap();
            let [x, y] = at(&path, image[2] + radius);
            let miss = (x - image[0]).hypot(y - image[1]);
            assert!(miss < 1e-12, "{toward:?} {p:?}: {miss}");
        }
    }
}

/// The axial pair of aplanatic points obeys the sine condition: sin U′/sin U = n′/n for rays
/// towards R(1 + n′/n) behind the vertex.
#[test]
fn aplanatic_points_obey_the_sine_condition() {
    let (radius, n1) = (10.0, 1.6);
    let train = one_surface(Surface::sphere(1.0 / radius, 9.9), 1.0, n1);
    let object = radius * (1.0 + n1);
    for [x, y] in pupil(9.0) {
        let length = (x * x + y * y + object * object).sqrt();
        let direction = [-x / length, -y / length];
        let path = trace_ray(&train, RayStart { position_mm: [x, y], direction }).unwrap();
        let out = path.exit().direction;
        let sines = out[0].hypot(out[1]) / direction[0].hypot(direction[1]);
        assert!((sines - n1).abs() < 1e-13, "{sines}");
    }
}

/// R. Kingslake, *Lens Design Fundamentals*: the cemented doublet carried through the book,
/// radii 7.3895, −5.1784, −16.2225 (c = 0.1353271, −0.1931098, −0.0616427), d = 1.05, 0.40,
/// n = 1.517, 1.649, with the marginal ray at Y = 2. Value from memory: L′ = 11.29390.
#[test]
fn kingslakes_cemented_doublet() {
    let surfaces = [7.3895, -5.1784, -16.2225].map(|r| Surface::sphere(1.0 / r, 2.5)).to_vec();
    let train = Train::new(surfaces, vec![1.05, 0.40], vec![1.0, 1.517, 1.649, 1.0]).unwrap();
    let exit = trace_ray(&train, RayStart::parallel(2.0)).unwrap().exit();
    let marginal = -exit.position_mm[1] * axial(exit.direction) / exit.direction[1];
    assert!((marginal - 11.29390).abs() < 5e-6, "{marginal}");
}
