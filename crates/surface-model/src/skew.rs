//! One ray of any direction, surface by surface: what the `trace` command shows, and what beams
//! that enter at an angle are made of.

use crate::fault::{FaultReason, RayFault};
use crate::quantities::{Quantities, Shapes};
use crate::reverse::{AtSurface, Seed, backward_skew};
use crate::trace::{Crossing, Exit, Ray, Stages, find_fault, forward_skew, normal};
use crate::train::Train;

/// Where a ray starts: a point of the plane through the first vertex, and a direction.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct RayStart {
    /// Transverse position in the plane through the first vertex, mm.
    pub position_mm: [f64; 2],
    /// Transverse direction cosines; the axial one follows and is positive.
    pub direction: [f64; 2],
}

impl RayStart {
    /// A ray parallel to the axis at height `height_mm` in the y direction.
    #[must_use]
    pub fn parallel(height_mm: f64) -> Self {
        Self { position_mm: [0.0, height_mm], direction: [0.0, 0.0] }
    }
}

/// A ray at one surface.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct RayPoint {
    /// Where it meets the surface, mm; z from that surface's vertex.
    pub position_mm: [f64; 3],
    /// Unit direction on arrival.
    pub direction_in: [f64; 3],
    /// Unit normal of the surface there, towards +z.
    pub normal: [f64; 3],
    /// Angle of incidence, rad.
    pub incidence_rad: f64,
    /// Angle of refraction, rad.
    pub refraction_rad: f64,
    /// Geometric path from the previous surface, mm (from the entrance plane for the first).
    pub path_mm: f64,
}

/// A traced ray.
#[derive(Debug, Clone)]
pub struct RayPath {
    stages: Stages<f64>,
    crossings: Vec<Crossing<f64, 2>>,
    exit: Exit<f64, 2>,
}

/// The quantities a ray ends with, or weights for them in a sum that is to be differentiated.
#[derive(Debug, Clone, Copy, PartialEq, Default)]
pub struct ExitSum {
    /// Optical path to the plane through the last vertex less that of the axial ray, mm.
    pub path_mm: f64,
    /// Transverse position in that plane, mm.
    pub position_mm: [f64; 2],
    /// Transverse direction cosines behind the last surface.
    pub direction: [f64; 2],
}

/// Traces one ray exactly through a train.
///
/// # Errors
/// The ray misses a surface or is totally reflected: where, and why.
pub fn trace_ray(train: &Train, start: RayStart) -> Result<RayPath, RayFault> {
    let [l, m] = start.direction;
    let axial = (1.0 - l * l - m * m).sqrt();
    let sound = start.position_mm.iter().all(|x| x.is_finite()) && axial > 0.0;
    if !sound {
        return Err(RayFault { surface: 0, reason: FaultReason::Miss });
    }
    let ray = Ray { y: start.position_mm, z: 0.0, d: start.direction, dz: axial };
    let blank = Crossing { ray, path: 0.0, cos_in: 0.0, cos_out: 0.0 };
    let mut crossings = vec![blank; train.len()];
    let stages = Stages::of(train);
    let exit = forward_skew(&stages, &ray, &mut crossings);
    match find_fault(&crossings, &exit, |number: f64| number) {
        Some(fault) => Err(fault),
        None => Ok(RayPath { stages, crossings, exit }),
    }
}

impl RayPath {
    /// The ray at every surface, from left to right.
    #[must_use]
    pub fn points(&self) -> Vec<RayPoint> {
        let point = |(crossing, stage): (&Crossing<f64, 2>, _)| {
            let at = &crossing.ray;
            let (n, nz) = normal(stage, at);
            RayPoint {
                position_mm: [at.y[0], at.y[1], at.z],
                direction_in: [at.d[0], at.d[1], at.dz],
                normal: [n[0], n[1], nz],
                incidence_rad: crossing.cos_in.min(1.0).acos(),
                refraction_rad: crossing.cos_out.min(1.0).acos(),
                path_mm: crossing.path,
            }
        };
        self.crossings.iter().zip(&self.stages.list).map(point).collect()
    }

    /// What the ray ends with in the plane through the last vertex.
    #[must_use]
    pub fn exit(&self) -> ExitSum {
        ExitSum { path_mm: self.exit.path_excess, position_mm: self.exit.y, direction: self.exit.d }
    }

    /// Exact derivatives of Σ weight × exit quantity by every quantity of the train, in the order
    /// of [`Quantities`]; `shapes` says for which surfaces conic constants and asphere
    /// coefficients are among them.
    #[must_use]
    pub fn differentiate(&self, weights: &ExitSum, shapes: Shapes) -> Vec<f64> {
        let seed = Seed {
            path: weights.path_mm,
            position: weights.position_mm,
            direction: weights.direction,
            at: None,
        };
        self.sweep(&seed, Quantities::new(self.stages.list.len(), shapes))
    }

    /// Cosine of the angle of incidence at every surface, from left to right.
    pub fn cos_incidences(&self) -> impl Iterator<Item = f64> + '_ {
        self.crossings.iter().map(|crossing| crossing.cos_in)
    }

    /// Exact derivatives of the cosine of the angle of incidence at one surface, by these
    /// quantities of the train.
    #[must_use]
    pub fn differentiate_cos_incidence(&self, surface: usize, quantities: Quantities) -> Vec<f64> {
        self.sweep(&Seed::at(surface, AtSurface { cos_in: 1.0, height: 0.0 }), quantities)
    }

    /// Height in the y direction at every surface, mm, from left to right.
    pub fn heights_mm(&self) -> impl Iterator<Item = f64> + '_ {
        self.crossings.iter().map(|crossing| crossing.ray.y[1])
    }

    /// Exact derivatives of the height in the y direction at one surface, by these quantities of
    /// the train.
    #[must_use]
    pub fn differentiate_height(&self, surface: usize, quantities: Quantities) -> Vec<f64> {
        self.sweep(&Seed::at(surface, AtSurface { cos_in: 0.0, height: 1.0 }), quantities)
    }

    fn sweep(&self, seed: &Seed<f64, 2>, quantities: Quantities) -> Vec<f64> {
        let mut row = vec![0.0; quantities.count()];
        backward_skew(&self.stages, &self.crossings, &self.exit, seed, quantities, &mut row);
        row
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::quantities::Quantity;
    use crate::surface::{Surface, asphere_power};

    /// A pair with every kind of surface: sphere, conic, asphere, flat.
    fn train(conics: bool) -> Train {
        let mut surfaces: Vec<Surface> =
            [0.03, -0.02, 0.012, 0.0].map(|c| Surface::sphere(c, 9.0)).into();
        if conics {
            surfaces[1].conic = -0.8;
            surfaces[2].conic = 0.4;
            surfaces[2].asphere[0] = 3e-6;
            surfaces[2].asphere[1] = -2e-9;
        }
        Train::new(surfaces, vec![4.0, 11.0, 2.5], vec![1.0, 1.6, 1.0, 1.75, 1.1]).unwrap()
    }

    fn nudged(train: &Train, quantities: Quantities, place: usize, by: f64) -> Train {
        let mut surfaces = train.surfaces().to_vec();
        let mut gaps = train.gaps().to_vec();
        let mut indices = train.indices().to_vec();
        match quantities.at(place) {
            Quantity::Curvature(i) => surfaces[i].curvature += by,
            Quantity::Gap(i) => gaps[i] += by,
            Quantity::Index(medium) => indices[medium] += by,
            Quantity::Conic(i) => surfaces[i].conic += by,
            Quantity::Asphere(i, term) => surfaces[i].asphere[term] += by,
        }
        Train::new(surfaces, gaps, indices).unwrap()
    }

    fn sum(exit: &ExitSum, weights: &ExitSum) -> f64 {
        exit.path_mm * weights.path_mm
            + (0..2)
                .map(|axis| {
                    exit.position_mm[axis] * weights.position_mm[axis]
                        + exit.direction[axis] * weights.direction[axis]
                })
                .sum::<f64>()
    }

    /// Holds derivatives of a value by every quantity against differences.
    fn agree(exact: &[f64], train: &Train, about: &str, value: impl Fn(&Train) -> f64) {
        let quantities = Quantities::new(train.len(), Shapes::ALL);
        for (place, &derivative) in exact.iter().enumerate() {
            // A step that moves the sag by about a micrometre.
            let h = match quantities.at(place) {
                Quantity::Asphere(_, term) => 1e-3 / 6_f64.powi(asphere_power(term) as i32),
                _ => 1e-5,
            };
            let at = |by| value(&nudged(train, quantities, place, by));
            // Fourth-order central difference.
            let difference = (8.0 * (at(h) - at(-h)) - (at(2.0 * h) - at(-2.0 * h))) / (12.0 * h);
            let scale = 1e-9 / h * 1e-3 + 1e-7 * difference.abs();
            assert!(
                (derivative - difference).abs() < scale,
                "{about}, place {place}: {derivative} {difference}"
            );
        }
    }

    #[test]
    fn the_reverse_sweep_agrees_with_central_differences_by_every_quantity() {
        let start = RayStart { position_mm: [2.0, 5.0], direction: [0.04, -0.07] };
        let all = [
            ExitSum { path_mm: 1.0, ..ExitSum::default() },
            ExitSum { position_mm: [1.0, 0.0], ..ExitSum::default() },
            ExitSum { direction: [0.0, 1.0], ..ExitSum::default() },
            ExitSum { path_mm: 0.7, position_mm: [0.2, -0.3], direction: [1.5, 0.4] },
        ];
        for conics in [false, true] {
            let train = train(conics);
            for weights in all {
                let exact = trace_ray(&train, start).unwrap().differentiate(&weights, Shapes::ALL);
                agree(&exact, &train, &format!("conics {conics}, {weights:?}"), |moved| {
                    sum(&trace_ray(moved, start).unwrap().exit(), &weights)
                });
            }
        }
    }

    #[test]
    fn heights_at_surfaces_agree_with_central_differences_by_every_quantity() {
        let start = RayStart { position_mm: [2.0, 5.0], direction: [0.04, -0.07] };
        let train = train(true);
        let quantities = Quantities::new(train.len(), Shapes::ALL);
        for surface in 0..train.len() {
            let exact = trace_ray(&train, start).unwrap().differentiate_height(surface, quantities);
            agree(&exact, &train, &format!("surface {surface}"), |moved| {
                trace_ray(moved, start).unwrap().heights_mm().nth(surface).unwrap()
            });
        }
    }

    #[test]
    fn without_shapes_the_other_derivatives_are_the_same() {
        let start = RayStart { position_mm: [1.0, -4.0], direction: [0.02, 0.03] };
        let weights = ExitSum { path_mm: 1.0, direction: [0.1, 0.2], ..ExitSum::default() };
        let train = train(false);
        let path = trace_ray(&train, start).unwrap();
        let few = path.differentiate(&weights, Shapes::None);
        let (short, long) = (Quantities::new(4, Shapes::None), Quantities::new(4, Shapes::ALL));
        let all = path.differentiate(&weights, Shapes::ALL);
        for (place, &b) in all.iter().enumerate() {
            let same = (0..short.count()).find(|&few| short.at(few) == long.at(place));
            let Some(same) = same else { continue };
            let a = few[same];
            assert!((a - b).abs() <= 1e-13 * b.abs().max(1.0), "{a} {b}");
        }
    }

    #[test]
    fn a_meridional_skew_ray_is_the_bundle_s_ray() {
        use crate::bundle::Bundle;
        for conics in [false, true] {
            let train = train(conics);
            let heights: Vec<f64> = (0..11).map(|i| 0.5 * f64::from(i)).collect();
            let mut paths = vec![0.0; heights.len()];
            let mut bundle = Bundle::new();
            bundle.load([&train], &heights);
            bundle.trace_kept(&mut paths).unwrap();
            let quantities = bundle.differentiate_all(Shapes::ALL);
            for (i, &height) in heights.iter().enumerate() {
                let ray = trace_ray(&train, RayStart::parallel(height)).unwrap();
                assert!((ray.exit().path_mm - paths[i]).abs() < 1e-13);
                let weights = ExitSum { path_mm: 1.0, ..ExitSum::default() };
                let row = ray.differentiate(&weights, Shapes::ALL);
                for (place, &expected) in row.iter().enumerate().take(quantities.count()) {
                    let got = bundle.path_derivatives(0, place).nth(i).unwrap();
                    assert!((got - expected).abs() <= 1e-12 * expected.abs().max(1.0));
                }
            }
        }
    }

    #[test]
    fn failing_rays_say_where_and_why() {
        let glass_to_air = |c: f64| {
            Train::new(
                vec![Surface::sphere(0.0, 20.0), Surface::sphere(c, 20.0)],
                vec![5.0],
                vec![1.0, 1.5, 1.0],
            )
            .unwrap()
        };
        let fault = trace_ray(&glass_to_air(-0.05), RayStart::parallel(25.0)).unwrap_err();
        assert_eq!(fault, RayFault { surface: 1, reason: FaultReason::Miss });
        let fault = trace_ray(&glass_to_air(-0.05), RayStart::parallel(15.0)).unwrap_err();
        assert_eq!(fault, RayFault { surface: 1, reason: FaultReason::TotalReflection });
        let nowhere = RayStart { position_mm: [f64::NAN, 0.0], direction: [0.0, 0.0] };
        assert!(trace_ray(&glass_to_air(0.0), nowhere).is_err());
    }
}
