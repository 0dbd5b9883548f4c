//! First order against the textbooks.

use surface_model::first_order::{FocalData, first_order};
use surface_model::paraxial::ParaxialRay;
use surface_model::surface::Surface;
use surface_model::train::Train;

fn focal(train: &Train) -> FocalData {
    first_order(train, 0..train.len()).unwrap().focal.unwrap()
}

fn singlet([r1, r2]: [f64; 2], thickness: f64, index: f64) -> Train {
    let surfaces = [r1, r2].map(|r| Surface::sphere(1.0 / r, 5.0)).to_vec();
    Train::new(surfaces, vec![thickness], vec![1.0, index, 1.0]).unwrap()
}

/// E. Hecht, *Optics*, §6.1, thick lenses:
/// 1/f = (n − 1)(1/R₁ − 1/R₂ + (n − 1)d/(nR₁R₂)), h₁ = −f(n − 1)d/(nR₂), h₂ = −f(n − 1)d/(nR₁).
#[test]
fn the_lens_makers_equation_with_thickness() {
    let cases = [([50.0, -80.0], 6.0, 1.5), ([-30.0, 20.0], 4.0, 1.7), ([15.0, 12.0], 9.0, 1.9)];
    for (radii, d, n) in cases {
        let [r1, r2] = radii;
        let f = 1.0 / ((n - 1.0) * (1.0 / r1 - 1.0 / r2 + (n - 1.0) * d / (n * r1 * r2)));
        let (h1, h2) = (-f * (n - 1.0) * d / (n * r2), -f * (n - 1.0) * d / (n * r1));
        let focal = focal(&singlet(radii, d, n));
        let close = |got: f64, expected: f64| {
            assert!((got - expected).abs() < 1e-12 * f.abs(), "{radii:?}: {got} {expected}");
        };
        close(focal.effective_focal_length_mm, f);
        close(focal.front_principal_mm, h1);
        close(focal.rear_principal_mm, h2);
        close(focal.back_focal_distance_mm, f + h2);
        close(focal.front_focal_distance_mm, h1 - f);
    }
}

/// The worked example of the same section, values from memory: R = 20 and −40 cm, 1 cm thick,
/// n = 1.5: f = 26.8 cm, h₁ = 0.22 cm, h₂ = −0.44 cm; an object 30 cm before the vertex is imaged
/// 238 cm behind the rear principal plane.
#[test]
fn hechts_thick_lens() {
    let focal = focal(&singlet([200.0, -400.0], 10.0, 1.5));
    assert!((focal.effective_focal_length_mm / 10.0 - 26.8).abs() < 0.05);
    assert!((focal.front_principal_mm / 10.0 - 0.22).abs() < 0.005);
    assert!((focal.rear_principal_mm / 10.0 + 0.44).abs() < 0.01);
    let object = 30.0 + 0.22;
    let image = 1.0 / (1.0 / (focal.effective_focal_length_mm / 10.0) - 1.0 / object);
    assert!((image - 238.0).abs() < 0.5, "{image}");
}

/// A ball lens in air has f = nR/(2(n − 1)) and both principal planes at its centre (common
/// practice; it follows from the equation above with d = 2R).
#[test]
fn a_ball_lens() {
    let (radius, n) = (4.0, 1.8);
    let focal = focal(&singlet([radius, -radius], 2.0 * radius, n));
    assert!((focal.effective_focal_length_mm - n * radius / (2.0 * (n - 1.0))).abs() < 1e-13);
    assert!((focal.front_principal_mm - radius).abs() < 1e-13);
    assert!((focal.rear_principal_mm + radius).abs() < 1e-13);
}

/// Between an object and an image a distance L apart, a thin lens of focal length f makes the
/// image at two places, u = (L ± √(L² − 4Lf))/2 from the object: symmetric, with reciprocal
/// magnifications (F. W. Bessel, Astron. Nachr. 17, 289 (1840), value from memory; Hecht,
/// *Optics*, §5.2). In a tube whose outer groups are fixed, these are the two places where the
/// moving group collimates.
#[test]
fn a_moving_group_collimates_at_two_places() {
    let n = 1.6;
    // Thin equi-convex or -concave lenses: c = K/(2(n − 1)).
    let (first, moving, last) = (100.0, 30.0, 80.0);
    let surfaces = [first, moving, last].into_iter().flat_map(|f| {
        let c = 1.0 / (2.0 * (n - 1.0) * f);
        [Surface::sphere(c, 9.0), Surface::sphere(-c, 9.0)]
    });
    let surfaces: Vec<Surface> = surfaces.collect();
    let indices = vec![1.0, n, 1.0, n, 1.0, n, 1.0];
    // From the first group's focus to the last group's.
    let apart = 150.0_f64;
    let root = (apart * apart - 4.0 * apart * moving).sqrt();
    let at = |u: f64| {
        let gaps = vec![0.0, first + u, 0.0, apart - u + last, 0.0];
        let train = Train::new(surfaces.clone(), gaps, indices.clone()).unwrap();
        let mut ray = ParaxialRay::new();
        ray.trace(&train, 1.0, 0.0).unwrap();
        (ray.exit_slope().unwrap(), ray.ratio().unwrap())
    };
    let (near, far) = ((apart - root) / 2.0, (apart + root) / 2.0);
    let ((slope_near, ratio_near), (slope_far, ratio_far)) = (at(near), at(far));
    assert!(slope_near.abs() < 1e-14 && slope_far.abs() < 1e-14, "{slope_near} {slope_far}");
    // The image of the first focus is magnified by −v/u; an upright beam comes out.
    let magnification = -(apart - near) / near;
    assert!((ratio_near + last / (first * magnification)).abs() < 1e-12);
    assert!((ratio_near * ratio_far - (last / first).powi(2)).abs() < 1e-12);
    assert!(ratio_near > 0.0 && ratio_far / ratio_near > 2.0);
    // Half way between, it does not collimate.
    assert!(at(apart / 2.0).0.abs() > 1e-4);
}

/// R. Kingslake, *Lens Design Fundamentals*: paraxial back focal distance of the cemented doublet
/// carried through the book, from its printed curvatures; value from memory: l′ = 11.28586.
///
/// The book's table is worked by hand to seven decimals. Worked so again it gives the printed
/// digits; the last slope's seventh decimal alone is worth 7e-6 of l′, which is therefore not
/// known to its last digit, and full precision may differ from it by 1e-5.
#[test]
fn kingslakes_cemented_doublet() {
    let (curvatures, gaps) = ([0.1353271, -0.1931098, -0.0616427], [1.05, 0.40]);
    let indices = [1.0, 1.517, 1.649, 1.0];
    let seven = |x: f64| (x * 1e7).round() / 1e7;
    let (mut y, mut nu) = (2.0, 0.0);
    for i in 0..3 {
        nu = seven(nu - y * seven(curvatures[i] * (indices[i + 1] - indices[i])));
        if i < 2 {
            y = seven(y + seven(gaps[i] / indices[i + 1]) * nu);
        }
    }
    let by_hand = -y / nu;
    assert!((by_hand - 11.28586).abs() < 5e-6, "{by_hand}");

    let surfaces = curvatures.map(|c| Surface::sphere(c, 2.5)).to_vec();
    let train = Train::new(surfaces, gaps.to_vec(), indices.to_vec()).unwrap();
    let distance = focal(&train).back_focal_distance_mm;
    assert!((distance - by_hand).abs() < 1e-5, "{distance} {by_hand}");
}
