//! Following the curve: Newton's method onto it, and continuation along it.
//!
//! At every ratio m the positions z of the moving groups solve
//!
//! ```text
//! ratio(z) = m      collimation(z) = 0      z_g = guide_g(m) for the groups left free
//! ```
//!
//! as many equations as groups that move. Differentiated along the curve, J dz/dm = (1, 0,
//! guide′): its solution is both the slope that a cam is cut to and the predictor of the next
//! step (E. L. Allgower and K. Georg, *Introduction to Numerical Continuation Methods*, SIAM 2003,
//! ch. 2). Steps are shortened until Newton's correction is small beside the step, so that the
//! curve cannot be left for another one unnoticed; where J becomes singular the curve turns back
//! and has no point at a greater ratio.

use nalgebra::{DMatrix, DVector};

use super::collimation::{Gauge, Held, HeldFault};
use super::guide::MonotoneCubic;
use super::slide::Slide;

/// Newton's method has arrived when a step is shorter than this, mm.
const ARRIVED_MM: f64 = 1e-9;
/// Ratio error, relative, and collimation, rad, that are left at most.
const LEFT: (f64, f64) = (1e-9, 1e-9);
/// Newton steps from a designed state onto the curve.
pub const FROM_A_STATE: usize = 40;
/// Newton steps from one point of it to the next.
const FROM_A_POINT: usize = 8;
/// Halvings of a Newton step.
const HALVINGS: usize = 12;
/// Newton's correction may be this part of a step along the curve.
const CORRECTION: f64 = 0.2;
/// … or this long whatever the step, mm.
const SMALL_MM: f64 = 1e-3;
/// The shortest step, as a part of the whole way.
const SHORTEST: f64 = 1e-7;

/// A point of the curve.
#[derive(Debug, Clone)]
pub struct Point {
    /// The ratio.
    pub ratio: f64,
    /// Positions of the moving groups, mm.
    pub moving_mm: Vec<f64>,
    /// Their derivatives by the ratio, mm.
    pub slopes_mm: Vec<f64>,
    /// What was held, and its derivatives.
    pub held: Held,
    /// Sign of the determinant of J: it changes where the curve turns back.
    pub(crate) sense: f64,
}

/// Why there is no point, or no further one.
#[derive(Debug, Clone, Copy, PartialEq, thiserror::Error)]
pub enum Stop {
    /// A ray does not get through.
    #[error(transparent)]
    Fault(HeldFault),
    /// The equations cannot be solved there: the curve turns back, or never was.
    #[error("no positions hold ratio and collimation there")]
    NoSolution,
}

/// The equations of the curve.
#[derive(Debug)]
pub struct Equations {
    /// How the groups slide.
    pub slide: Slide,
    /// What measures ratio and collimation.
    pub(crate) gauge: Gauge,
    /// Whether collimation is among them: not with one moving group.
    pub hold_collimation: bool,
    /// Among the moving groups, those that follow a guide.
    pub guides: Vec<(usize, MonotoneCubic)>,
}

/// Length of the residuals, a milliradian counted as much as the whole ratio.
fn size(linear: &Linear) -> f64 {
    let weighed = linear.residuals.iter().enumerate();
    weighed.map(|(row, r)| if row == 1 { (r * 1e3).powi(2) } else { r * r }).sum::<f64>().sqrt()
}

struct Linear {
    residuals: DVector<f64>,
    jacobian: DMatrix<f64>,
    held: Held,
}

impl Equations {
    fn linear(&mut self, ratio: f64, moving_mm: &[f64]) -> Result<Linear, Stop> {
        let held = self.gauge.measure(&self.slide.spacings_mm(moving_mm)).map_err(Stop::Fault)?;
        let count = moving_mm.len();
        let mut residuals = DVector::zeros(count);
        let mut jacobian = DMatrix::zeros(count, count);
        residuals[0] = held.ratio / ratio - 1.0;
        let by_ratio = self.slide.pick(&self.slide.by_position(&held.ratio_by_spacing));
        for (j, by) in by_ratio.iter().enumerate() {
            jacobian[(0, j)] = by / ratio;
        }
        let mut row = 1;
        if self.hold_collimation {
            residuals[1] = held.collimation_rad;
            let by = self.slide.pick(&self.slide.by_position(&held.collimation_by_spacing));
            for (j, by) in by.iter().enumerate() {
                jacobian[(1, j)] = *by;
            }
            row = 2;
        }
        for (group, guide) in &self.guides {
            residuals[row] = moving_mm[*group] - guide.at(ratio).0;
            jacobian[(row, *group)] = 1.0;
            row += 1;
        }
        Ok(Linear { residuals, jacobian, held })
    }

    /// Newton's method from a place near the curve, in at most so many steps.
    ///
    /// # Errors
    /// See [`Stop`].
    pub fn solve(&mut self, ratio: f64, from_mm: &[f64], steps: usize) -> Result<Point, Stop> {
        let mut moving_mm = from_mm.to_vec();
        let mut linear = self.linear(ratio, &moving_mm)?;
        for _ in 0..steps {
            let step = linear.jacobian.clone().lu().solve(&linear.residuals);
            let step = step.filter(|step| step.iter().all(|by| by.is_finite()));
            let step = step.ok_or(Stop::NoSolution)?;
            match self.shorten(ratio, &moving_mm, &linear, &step) {
                Ok((next_mm, next)) => (moving_mm, linear) = (next_mm, next),
                // What is left is the noise of the last digits.
                Err(_) if self.is_held(&linear) => break,
                Err(stop) => return Err(stop),
            }
            if step.amax() < ARRIVED_MM {
                break;
            }
        }
        if self.is_held(&linear) {
            self.point(ratio, moving_mm, linear)
        } else {
            Err(Stop::NoSolution)
        }
    }

    fn is_held(&self, linear: &Linear) -> bool {
        linear.residuals[0].abs() <= LEFT.0
            && (!self.hold_collimation || linear.residuals[1].abs() <= LEFT.1)
    }

    /// Takes as much of a Newton step as lowers the residuals.
    fn shorten(
        &mut self,
        ratio: f64,
        from_mm: &[f64],
        at: &Linear,
        step: &DVector<f64>,
    ) -> Result<(Vec<f64>, Linear), Stop> {
        let mut part = 1.0;
        let mut last = Stop::NoSolution;
        for _ in 0..HALVINGS {
            let next_mm: Vec<f64> =
                from_mm.iter().zip(step.iter()).map(|(z, by)| z - part * by).collect();
            match self.linear(ratio, &next_mm) {
                // A tiny step is taken as it is: the last digits of a residual are noise.
                Ok(next) if size(&next) < size(at) || step.amax() < 100.0 * ARRIVED_MM => {
                    return Ok((next_mm, next));
                }
                Ok(_) => {}
                Err(stop) => last = stop,
            }
            part *= 0.5;
        }
        Err(last)
    }

    fn point(&self, ratio: f64, moving_mm: Vec<f64>, linear: Linear) -> Result<Point, Stop> {
        let mut by_ratio = DVector::zeros(moving_mm.len());
        by_ratio[0] = 1.0 / ratio;
        let first_guide = moving_mm.len() - self.guides.len();
        for (k, (_, guide)) in self.guides.iter().enumerate() {
            by_ratio[first_guide + k] = guide.at(ratio).1;
        }
        let lu = linear.jacobian.lu();
        let sense = lu.determinant().signum();
        let slopes = lu.solve(&by_ratio).filter(|slopes| slopes.iter().all(|by| by.is_finite()));
        let slopes_mm = slopes.ok_or(Stop::NoSolution)?.iter().copied().collect();
        Ok(Point { ratio, moving_mm, slopes_mm, held: linear.held, sense })
    }

    /// Follows the curve from a point over the ratios asked for, in their order. Returns the
    /// points reached and, if not all were, the last ratio that was reached and why.
    pub fn follow(&mut self, start: &Point, ratios: &[f64]) -> (Vec<Point>, Option<(f64, Stop)>) {
        let mut points = Vec::new();
        let mut at = start.clone();
        let way = ratios.last().map_or(0.0, |last| (last - start.ratio).abs());
        for &ratio in ratios {
            match self.advance(&at, ratio, way) {
                Ok(point) => at = point,
                Err(stop) => return (points, Some(stop)),
            }
            points.push(at.clone());
        }
        (points, None)
    }

    /// Goes on to one ratio, in as many steps as it takes.
    fn advance(&mut self, from: &Point, ratio: f64, way: f64) -> Result<Point, (f64, Stop)> {
        let mut at = from.clone();
        let mut step = ratio - at.ratio;
        while at.ratio != ratio {
            if (ratio - at.ratio).abs() <= step.abs() {
                step = ratio - at.ratio;
            }
            let next = if step == ratio - at.ratio { ratio } else { at.ratio + step };
            match self.one_step(&at, next) {
                Ok(point) => {
                    at = point;
                    step *= 2.0;
                }
                Err(stop) => {
                    step *= 0.5;
                    if step.abs() < SHORTEST * way {
                        return Err((at.ratio, stop));
                    }
                }
            }
        }
        Ok(at)
    }

    fn one_step(&mut self, from: &Point, ratio: f64) -> Result<Point, Stop> {
        let by = ratio - from.ratio;
        let ahead = from.moving_mm.iter().zip(&from.slopes_mm);
        let predicted: Vec<f64> = ahead.map(|(z, slope)| z + by * slope).collect();
        let point = self.solve(ratio, &predicted, FROM_A_POINT)?;
        let largest =
            |a: &[f64], b: &[f64]| a.iter().zip(b).map(|(a, b)| (a - b).abs()).fold(0.0, f64::max);
        let correction = largest(&point.moving_mm, &predicted);
        let length = largest(&predicted, &from.moving_mm);
        let near = correction <= (CORRECTION * length).max(SMALL_MM);
        if near && point.sense == from.sense { Ok(point) } else { Err(Stop::NoSolution) }
    }
}
