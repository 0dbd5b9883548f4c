//! Bendings of thin elements that leave least spherical aberration over all states.
//!
//! An element of thin lenses in contact has, its powers given, one freedom: the curvature κ of its
//! first surface, from which the others follow. Its share of the first Seidel sum,
//! S_I = −Σ A² h Δ(u/n) (W. T. Welford, *Aberrations of Optical Systems* (1986), ch. 8; signs as
//! in [`surface_model::seidel`]), is a polynomial in κ. The κ of all elements are moved together
//! by damped least squares on the sums of all states in waves over the wavefront goal, with a
//! little of every surface's own share beside them: what cancels between strong shares comes back
//! in the higher orders.

use nalgebra::{DMatrix, DVector};

/// One of the thin lenses in contact that make an element.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) struct ThinLens {
    pub(super) index: f64,
    pub(super) power_per_mm: f64,
}

/// An element of thin lenses, and the marginal ray that meets it in every state.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct ThinElement {
    pub(super) lenses: Vec<ThinLens>,
    /// Height (mm) and slope of the outermost ray before it, one pair a state.
    pub(super) rays: Vec<(f64, f64)>,
    /// What κ may be, 1/mm.
    pub(super) range: (f64, f64),
}

/// The curvatures of an element's surfaces less that of the first, 1/mm.
pub(super) fn curvature_steps(lenses: &[ThinLens]) -> Vec<f64> {
    let mut steps = vec![0.0];
    let mut step = 0.0;
    for lens in lenses {
        step -= lens.power_per_mm / (lens.index - 1.0);
        steps.push(step);
    }
    steps
}

/// S_I of an element's surfaces for a ray, mm, each with its derivative by κ. The thin lenses
/// stand cemented.
fn shares(lenses: &[ThinLens], kappa: f64, (h, u): (f64, f64), mut put: impl FnMut(f64, f64)) {
    let (mut u, mut du, mut n, mut step) = (u, 0.0, 1.0, 0.0);
    for surface in 0..=lenses.len() {
        let n1 = lenses.get(surface).map_or(1.0, |lens| lens.index);
        let c = kappa + step;
        let (a, da) = (n * (h * c + u), n * (h + du));
        let u1 = (n * u - h * c * (n1 - n)) / n1;
        let du1 = (n * du - h * (n1 - n)) / n1;
        let (spread, dspread) = (u1 / n1 - u / n, du1 / n1 - du / n);
        put(-a * a * h * spread, -h * (2.0 * a * da * spread + a * a * dspread));
        (u, du, n) = (u1, du1, n1);
        if let Some(lens) = lenses.get(surface) {
            step -= lens.power_per_mm / (lens.index - 1.0);
        }
    }
}

/// How much a single surface's share counts beside the sum.
const OWN_SHARE: f64 = 0.03;
const MOST_STEPS: usize = 25;

/// Bends the elements, from the κ given, to the nearest least aberration. `weights` turns mm of
/// S_I into units of the goal, one a state.
pub(super) fn bend(elements: &[ThinElement], from: &[f64], weights: &[f64]) -> Vec<f64> {
    let mut problem = Problem::of(elements, weights);
    let mut kappas = problem.clamped(from);
    problem.evaluate(&kappas);
    let mut cost = problem.cost();
    let mut damping = 1e-2;
    for _ in 0..MOST_STEPS {
        let (normal, slope) = problem.normal();
        let mut stiff = normal.clone();
        for i in 0..elements.len() {
            stiff[(i, i)] += damping * normal[(i, i)].max(f64::MIN_POSITIVE);
        }
        let Some(step) = stiff.cholesky().map(|factor| factor.solve(&slope)) else { break };
        let tried: Vec<f64> = kappas.iter().zip(&step).map(|(kappa, step)| kappa - step).collect();
        let tried = problem.clamped(&tried);
        problem.evaluate(&tried);
        let now = problem.cost();
        if now < cost {
            let little = cost - now < 1e-6 * cost;
            (kappas, cost, damping) = (tried, now, damping * 0.2);
            if little {
                break;
            }
        } else {
            problem.evaluate(&kappas);
            damping *= 8.0;
            if damping > 1e6 || !now.is_finite() {
                break;
            }
        }
    }
    kappas
}

/// Residuals and their derivatives.
struct Problem<'a> {
    elements: &'a [ThinElement],
    weights: &'a [f64],
    residuals: DVector<f64>,
    by_kappa: DMatrix<f64>,
}

impl<'a> Problem<'a> {
    fn of(elements: &'a [ThinElement], weights: &'a [f64]) -> Self {
        let surfaces: usize = elements.iter().map(|element| element.lenses.len() + 1).sum();
        let rows = weights.len() * (1 + surfaces);
        let residuals = DVector::zeros(rows);
        Self { elements, weights, residuals, by_kappa: DMatrix::zeros(rows, elements.len()) }
    }

    fn clamped(&self, kappas: &[f64]) -> Vec<f64> {
        let within =
            |(kappa, element): (&f64, &ThinElement)| kappa.clamp(element.range.0, element.range.1);
        kappas.iter().zip(self.elements).map(within).collect()
    }

    fn evaluate(&mut self, kappas: &[f64]) {
        self.residuals.fill(0.0);
        self.by_kappa.fill(0.0);
        let mut row = self.weights.len();
        for (e, (element, &kappa)) in self.elements.iter().zip(kappas).enumerate() {
            for (state, (&ray, &weight)) in element.rays.iter().zip(self.weights).enumerate() {
                shares(&element.lenses, kappa, ray, |share, by_kappa| {
                    let (share, by_kappa) = (weight * share, weight * by_kappa);
                    self.residuals[state] += share;
                    self.by_kappa[(state, e)] += by_kappa;
                    self.residuals[row] = OWN_SHARE * share;
                    self.by_kappa[(row, e)] = OWN_SHARE * by_kappa;
                    row += 1;
                });
            }
        }
    }

    fn cost(&self) -> f64 {
        self.residuals.norm_squared()
    }

    fn normal(&self) -> (DMatrix<f64>, DVector<f64>) {
        (self.by_kappa.tr_mul(&self.by_kappa), self.by_kappa.tr_mul(&self.residuals))
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use surface_model::seidel::{SeidelRays, seidel};
    use surface_model::surface::Surface;
    use surface_model::train::Train;

    fn element(lenses: Vec<ThinLens>, ray: (f64, f64)) -> ThinElement {
        ThinElement { lenses, rays: vec![ray], range: (-1.0, 1.0) }
    }

    fn shape_factor(lens: ThinLens, kappa: f64) -> f64 {
        let other = kappa + curvature_steps(&[lens])[1];
        (kappa + other) / (kappa - other)
    }

    #[test]
    fn a_thin_lens_is_bent_as_the_textbook_says() {
        // F. A. Jenkins and H. E. White, Fundamentals of Optics, section 9.4 (from memory): least
        // spherical aberration at q = −2(n² − 1)p/(n + 2) with q = (r₂ + r₁)/(r₂ − r₁) and
        // p = 1 − 2f/s′, which is −1 for parallel light.
        for (index, power) in [(1.46, 0.02), (1.52, -0.03), (1.8, 0.01)] {
            for slope_share in [0.0, 0.4, -0.7] {
                let lens = ThinLens { index, power_per_mm: power };
                let h = 3.0;
                let u = slope_share * h * power;
                let behind = u - h * power;
                // 1/s′ = −u′/h behind the lens.
                let p = 1.0 - 2.0 * (-behind / h) / power;
                let wanted = -2.0 * (index * index - 1.0) * p / (index + 2.0);
                let [found] = bend(&[element(vec![lens], (h, u))], &[0.0], &[1e3])[..] else {
                    panic!("one element, one bending")
                };
                let q = shape_factor(lens, found);
                assert!((q - wanted).abs() < 0.02, "n {index} power {power} u {u}: {q} {wanted}");
            }
        }
    }

    #[test]
    fn shares_are_those_of_the_seidel_sums_and_their_slopes_are_exact() {
        let lenses = [
            ThinLens { index: 1.52, power_per_mm: 0.04 },
            ThinLens { index: 1.81, power_per_mm: -0.025 },
        ];
        let (kappa, ray) = (0.017, (4.0, -0.02));
        let steps = curvature_steps(&lenses);
        let surfaces = steps.iter().map(|step| Surface::sphere(kappa + step, 9.0)).collect();
        let train = Train::new(surfaces, vec![0.0; 2], vec![1.0, 1.52, 1.81, 1.0]).unwrap();
        let rays =
            SeidelRays { marginal_height_mm: ray.0, marginal_slope: ray.1, chief_slope: 0.0 };
        let sums = seidel(&train, rays).unwrap();
        let (mut place, h) = (0, 1e-6);
        let at = |kappa: f64| {
            let mut all = Vec::new();
            shares(&lenses, kappa, ray, |share, _| all.push(share));
            all
        };
        let (more, less) = (at(kappa + h), at(kappa - h));
        shares(&lenses, kappa, ray, |share, by_kappa| {
            let published = sums.surfaces[place].spherical_mm;
            assert!((share - published).abs() < 1e-12 * published.abs());
            let difference = (more[place] - less[place]) / (2.0 * h);
            assert!((by_kappa / difference - 1.0).abs() < 1e-6, "{by_kappa} {difference}");
            place += 1;
        });
        assert_eq!(place, 3);
    }
}
