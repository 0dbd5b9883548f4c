//! What must hold for any train: scaling, reversal, plates in collimated light, and derivatives
//! against central differences.
#![cfg(test)]

use proptest::prelude::*;
use surface_model::first_order::first_order;
use surface_model::paraxial::{ParaxialRay, ParaxialWeights};
use surface_model::quantities::{Quantities, Shapes};
use surface_model::seidel::{SeidelRays, seidel};
use surface_model::solid::{ShapeGradient, Solid};
use surface_model::surface::{ASPHERE_TERMS, Surface, asphere_power};
use surface_model::traced_beam::TracedBeam;
use surface_model::train::Train;
use surface_model::wavefront::{wavefront_error, wavefront_samples};

/// Two to six gently curved surfaces, some of them aspheric.
fn trains() -> impl Strategy<Value = Train> {
    let surface = (-0.02..0.02, -2.0..1.0, -1e-7..1e-7).prop_map(|(c, conic, r4)| {
        let mut surface = Surface::sphere(c, 8.0);
        surface.conic = conic;
        surface.asphere[0] = r4;
        surface
    });
    (2_usize..=6).prop_flat_map(move |count| {
        let surfaces = prop::collection::vec(surface.clone(), count);
        let gaps = prop::collection::vec(0.5..12.0, count - 1);
        let indices = prop::collection::vec(1.0..1.9, count + 1);
        (surfaces, gaps, indices).prop_map(|(s, g, n)| Train::new(s, g, n).unwrap())
    })
}

/// Two lenses in air with the space between them that makes them afocal.
fn afocal_trains() -> impl Strategy<Value = Train> {
    let lens = |least: f64, most: f64| (least..most, -0.01..0.01, 1.45..1.8, 1.0..5.0);
    let sign = prop_oneof![Just(-1.0), Just(1.0)];
    let parts = (lens(0.03, 0.06), lens(0.01, 0.02), sign);
    parts.prop_filter_map("lenses that can be set afocal", |(first, second, sign)| {
        let (strength, bend, n1, t1) = first;
        let (weak, lean, n2, t2) = second;
        let curvatures = [
            bend + sign * strength / 2.0,
            bend - sign * strength / 2.0,
            lean + weak / 2.0,
            lean - weak / 2.0,
        ];
        let surfaces = curvatures.map(|c| Surface::sphere(c, 8.0)).to_vec();
        let indices = vec![1.0, n1, 1.0, n2, 1.0];
        let mut train = Train::new(surfaces, vec![t1, 0.0, t2], indices).ok()?;
        let front = first_order(&train, 0..2).ok()?.focal?;
        let rear = first_order(&train, 2..4).ok()?.focal?;
        train.gaps_mut()[1] = front.back_focal_distance_mm - rear.front_focal_distance_mm;
        Some(train)
    })
}

fn scaled(train: &Train, s: f64) -> Train {
    let surface = |surface: &Surface| {
        let mut out = Surface { curvature: surface.curvature / s, ..*surface };
        for (term, coefficient) in out.asphere.iter_mut().enumerate() {
            *coefficient *= s.powi(1 - asphere_power(term) as i32);
        }
        out
    };
    let surfaces = train.surfaces().iter().map(surface).collect();
    let gaps = train.gaps().iter().map(|gap| gap * s).collect();
    Train::new(surfaces, gaps, train.indices().to_vec()).unwrap()
}

/// The train with one of its quantities changed.
fn nudged(train: &Train, quantities: Quantities, place: usize, by: f64) -> Train {
    let mut surfaces = train.surfaces().to_vec();
    let mut gaps = train.gaps().to_vec();
    let mut indices = train.indices().to_vec();
    for (i, surface) in surfaces.iter_mut().enumerate() {
        let hit = place == quantities.curvature(i);
        surface.curvature += if hit { by } else { 0.0 };
    }
    for (i, gap) in gaps.iter_mut().enumerate() {
        *gap += if place == quantities.gap(i) { by } else { 0.0 };
    }
    for (i, index) in indices.iter_mut().enumerate() {
        *index += if place == quantities.index(i) { by } else { 0.0 };
    }
    Train::new(surfaces, gaps, indices).unwrap()
}

fn traced(train: &Train, height: f64, slope: f64) -> ParaxialRay {
    let mut ray = ParaxialRay::new();
    ray.trace(train, height, slope).unwrap();
    ray
}

/// Fourth-order central difference.
fn difference(h: f64, at: impl Fn(f64) -> f64) -> f64 {
    (8.0 * (at(h) - at(-h)) - (at(2.0 * h) - at(-2.0 * h))) / (12.0 * h)
}

fn close(a: f64, b: f64, relative: f64, absolute: f64) -> Result<(), TestCaseError> {
    prop_assert!((a - b).abs() <= relative * b.abs() + absolute, "{a} against {b}");
    Ok(())
}

proptest! {
    #[test]
    fn lengths_scale_together(train in trains(), s in 0.2..5.0) {
        let large = scaled(&train, s);
        let beam = |s: f64| TracedBeam::new(2.0 * s, 1.5, 500.0).unwrap();
        let small_paths = wavefront_samples(&train, &beam(1.0), 9).unwrap();
        let large_paths = wavefront_samples(&large, &beam(s), 9).unwrap();
        for (a, b) in large_paths.iter().zip(&small_paths) {
            close(a.height_mm, s * b.height_mm, 1e-14, 0.0)?;
            // Rounding of paths of up to 100 mm, in waves of 500 nm.
            close(a.waves, s * b.waves, 1e-12, 1e-8)?;
        }
        let (a, b) = (wavefront_error(&large, &beam(s)).unwrap(), wavefront_error(&train, &beam(1.0)).unwrap());
        close(a.rms_waves, s * b.rms_waves, 3e-6, 1e-5)?;
        close(a.pv_waves, s * b.pv_waves, 3e-6, 1e-5)?;

        let part = 0..train.len();
        let (a, b) = (first_order(&large, part.clone()).unwrap(), first_order(&train, part).unwrap());
        if let (Some(a), Some(b)) = (a.focal, b.focal) {
            close(a.effective_focal_length_mm, s * b.effective_focal_length_mm, 1e-9, 0.0)?;
            close(a.back_focal_distance_mm, s * b.back_focal_distance_mm, 1e-9, 1e-9)?;
        }
        let (a, b) = (traced(&large, s, 0.0), traced(&train, 1.0, 0.0));
        close(a.ratio().unwrap(), b.ratio().unwrap(), 1e-12, 1e-14)?;

        let rays = |s| SeidelRays { marginal_height_mm: s, marginal_slope: 0.0, chief_slope: 0.1 };
        let (a, b) = (seidel(&large, rays(s)).unwrap().total, seidel(&train, rays(1.0)).unwrap().total);
        close(a.spherical_mm, s * b.spherical_mm, 1e-10, 1e-15)?;
        close(a.distortion_mm, s * b.distortion_mm, 1e-10, 1e-13)?;
    }

    #[test]
    fn an_afocal_train_reversed_has_the_inverse_ratio(train in afocal_trains()) {
        let (there, back) = (traced(&train, 1.0, 0.0), traced(&train.reversed(), 1.0, 0.0));
        prop_assert!(there.exit_slope().unwrap().abs() < 1e-14);
        prop_assert!(back.exit_slope().unwrap().abs() < 1e-14);
        close(there.ratio().unwrap() * back.ratio().unwrap(), 1.0, 1e-12, 0.0)?;
        prop_assert_eq!(first_order(&train, 0..4).unwrap().focal, None);
    }

    #[test]
    fn a_plate_in_collimated_light_changes_nothing(
        train in trains(), n in 1.3..2.0, thickness in 0.5..10.0, gap in 0.0..20.0,
    ) {
        let mut surfaces = vec![Surface::sphere(0.0, 8.0); 2];
        surfaces.extend_from_slice(train.surfaces());
        let mut gaps = vec![thickness, gap];
        gaps.extend_from_slice(train.gaps());
        let mut indices = vec![train.indices()[0], n];
        indices.extend_from_slice(train.indices());
        let longer = Train::new(surfaces, gaps, indices).unwrap();

        let (a, b) = (traced(&longer, 1.3, 0.0), traced(&train, 1.3, 0.0));
        prop_assert_eq!(a.ratio(), b.ratio());
        prop_assert_eq!(a.exit_slope(), b.exit_slope());
        let beam = TracedBeam::new(2.0, 1.5, 500.0).unwrap();
        let with = wavefront_samples(&longer, &beam, 9).unwrap();
        let without = wavefront_samples(&train, &beam, 9).unwrap();
        for (a, b) in with.iter().zip(&without) {
            close(a.waves, b.waves, 0.0, 1e-8)?;
        }
        let rays = SeidelRays { marginal_height_mm: 1.0, marginal_slope: 0.0, chief_slope: 0.0 };
        let plates = &seidel(&longer, rays).unwrap().surfaces[..2];
        prop_assert!(plates.iter().all(|share| share.spherical_mm == 0.0));
    }

    #[test]
    fn paraxial_derivatives_are_those_of_central_differences(
        train in trains(), height in 0.5..3.0, slope in -0.05..0.05,
        weight in -1.0..1.0, exit in -1.0..1.0, at in any::<prop::sample::Index>(),
    ) {
        let quantities = Quantities::new(train.len(), Shapes::None);
        let (last, inner) = (train.len() - 1, at.index(train.len()));
        let everything = [(last, 1.0 / height), (inner, weight)];
        let only_slope = ParaxialWeights { heights: &[], exit_slope: 1.0 };
        let only_ratio = ParaxialWeights { heights: &everything[..1], exit_slope: 0.0 };
        let sum = ParaxialWeights { heights: &everything, exit_slope: exit };
        let mut row = vec![f64::NAN; quantities.count()];
        for weights in [only_slope, only_ratio, sum] {
            let value = |train: &Train| {
                let ray = traced(train, height, slope);
                let heights = weights.heights.iter();
                heights.map(|&(i, weight)| weight * ray.heights()[i]).sum::<f64>()
                    + weights.exit_slope * ray.exit_slope().unwrap()
            };
            let ray = traced(&train, height, slope);
            ray.differentiate(&train, weights, quantities, &mut row).unwrap();
            for (place, &exact) in row.iter().enumerate() {
                let by_difference = difference(1e-3, |by| value(&nudged(&train, quantities, place, by)));
                close(exact, by_difference, 1e-8, 1e-9)?;
            }
        }
    }

    #[test]
    fn thickness_derivatives_are_those_of_central_differences(
        curvatures in [-0.04..0.04, -0.04..0.04], conics in [-2.0..1.0, -2.0..1.0],
        r4 in -1e-5..1e-5, r10 in -1e-10..1e-10, axial_mm in 1.0..8.0, height in 1.0..10.0,
    ) {
        let mut ends = [0, 1].map(|side| {
            let mut surface = Surface::sphere(curvatures[side], 10.0);
            surface.conic = conics[side];
            surface
        });
        ends[0].asphere[0] = r4;
        ends[1].asphere[3] = r10;
        let thickness = |ends: &[Surface; 2], axial_mm| {
            Solid { front: &ends[0], back: &ends[1], axial_mm }.thickness(height).unwrap()
        };
        let solid = Solid { front: &ends[0], back: &ends[1], axial_mm };
        let exact = solid.thickness_gradient(height).unwrap();
        prop_assert_eq!(exact.thickness_mm, thickness(&ends, axial_mm));
        close(difference(1e-3, |by| thickness(&ends, axial_mm + by)), 1.0, 0.0, 1e-11)?;
        let gradients: [ShapeGradient; 2] = [exact.by_front, exact.by_back];
        for (side, gradient) in gradients.iter().enumerate() {
            let moved = |h: f64, change: &dyn Fn(&mut Surface, f64)| difference(h, |by| {
                let mut moved = ends;
                change(&mut moved[side], by);
                thickness(&moved, axial_mm)
            });
            close(gradient.curvature, moved(1e-4, &|s, by| s.curvature += by), 1e-8, 1e-9)?;
            close(gradient.conic, moved(1e-3, &|s, by| s.conic += by), 1e-8, 1e-10)?;
            for term in 0..ASPHERE_TERMS {
                let power = height.powi(asphere_power(term) as i32);
                let by_difference = moved(1e-2 / power, &|s, by| s.asphere[term] += by);
                close(gradient.asphere[term] / power, by_difference / power, 0.0, 1e-11)?;
            }
        }
    }
}
