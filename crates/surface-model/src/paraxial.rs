//! The paraxial ray: heights and slopes to first order, and their exact derivatives.
//!
//! At each surface and over each gap (W. T. Welford, *Aberrations of Optical Systems* (1986),
//! ch. 3):
//!
//! ```text
//! n′u′ = nu − hc(n′ − n)        h₊ = h + tu′
//! ```
//!
//! with h the height, u the slope dh/dz (positive when the height grows), c the vertex curvature,
//! n and n′ the indices before and behind, t the gap. Only the vertex curvature counts: conic
//! constants and asphere coefficients begin at the fourth order.
//!
//! The reverse sweep carries adjoints from the last surface to the first, as
//! [`reverse`](crate::reverse) does for exact rays. With v = ū′/n′:
//!
//! ```text
//! c̄ = −h(n′ − n)v     h̄ −= c(n′ − n)v     n̄ += (u + hc)v     n̄′ −= (u′ + hc)v     ū = nv
//! t̄ = h̄₊u′            h̄ += h̄₊             ū′ += th̄₊
//! ```

use crate::quantities::Quantities;
use crate::train::Train;

/// A paraxial ray through a train. Buffers are kept from call to call: no allocation once the
/// largest train has been seen.
#[derive(Debug, Clone, Default, PartialEq)]
pub struct ParaxialRay {
    heights: Vec<f64>,
    slopes: Vec<f64>,
}

/// Weights of what a paraxial ray ends with, in a sum that is to be differentiated.
#[derive(Debug, Clone, Copy, PartialEq, Default)]
pub struct ParaxialWeights<'a> {
    /// Surfaces and the weights of the heights (mm) there; a surface may come up more than once.
    pub heights: &'a [(usize, f64)],
    /// Weight of the slope behind the last surface.
    pub exit_slope: f64,
}

/// A paraxial number that is too large to be told.
#[derive(Debug, Clone, Copy, PartialEq, Eq, thiserror::Error)]
pub enum ParaxialError {
    /// Height or slope is not finite.
    #[error("the paraxial ray runs out of all bounds at surface {}", .surface + 1)]
    Ray {
        /// Which surface, counted from 0.
        surface: usize,
    },
    /// A derivative is not finite.
    #[error("a derivative of the paraxial ray is out of all bounds, at place {place} of its row")]
    Derivative {
        /// Place in the row, in the order of [`Quantities`].
        place: usize,
    },
}

impl ParaxialRay {
    /// A ray not yet traced: no heights, no slopes.
    #[must_use]
    pub fn new() -> Self {
        Self::default()
    }

    /// Traces the ray that meets the first surface at `height` (mm) with the given slope.
    ///
    /// # Errors
    /// Height or slope leaves the range of numbers; the ray then reads as not traced.
    pub fn trace(&mut self, train: &Train, height: f64, slope: f64) -> Result<(), ParaxialError> {
        self.heights.clear();
        self.slopes.clear();
        self.slopes.push(slope);
        let (mut h, mut u) = (height, slope);
        let media = train.indices().windows(2);
        for (i, (surface, media)) in train.surfaces().iter().zip(media).enumerate() {
            let &[before, behind] = media else { continue };
            if i > 0 {
                h += train.gaps()[i - 1] * u;
            }
            u = (before * u - h * surface.curvature * (behind - before)) / behind;
            if !(h.is_finite() && u.is_finite()) {
                self.heights.clear();
                self.slopes.clear();
                return Err(ParaxialError::Ray { surface: i });
            }
            self.heights.push(h);
            self.slopes.push(u);
        }
        Ok(())
    }

    /// Height at every surface, mm, from left to right.
    #[must_use]
    pub fn heights(&self) -> &[f64] {
        &self.heights
    }

    /// Slope before every surface, then behind the last: one more than there are surfaces.
    #[must_use]
    pub fn slopes(&self) -> &[f64] {
        &self.slopes
    }

    /// Slope behind the last surface; `None` before a trace.
    #[must_use]
    pub fn exit_slope(&self) -> Option<f64> {
        if self.heights.is_empty() { None } else { self.slopes.last().copied() }
    }

    /// Height at the last surface over the height at the first: the ratio of the train for a ray
    /// that enters with slope 0. `None` where the first height is zero, or before a trace.
    #[must_use]
    pub fn ratio(&self) -> Option<f64> {
        let ratio = self.heights.last()? / self.heights.first()?;
        ratio.is_finite().then_some(ratio)
    }

    /// Exact derivatives of Σ weight × height + weight × exit slope by every quantity of the
    /// train this ray was traced through, written to `row` ([`Quantities::count`] long). Those by
    /// conic constants and asphere coefficients, where kept, are zero.
    ///
    /// The height of entry is held: the ratio's derivatives are those of the last height with
    /// weight 1 over the first height.
    ///
    /// # Errors
    /// A derivative leaves the range of numbers.
    ///
    /// # Panics
    /// If `row`, the train or a weight's surface does not fit the traced ray.
    pub fn differentiate(
        &self,
        train: &Train,
        weights: ParaxialWeights<'_>,
        quantities: Quantities,
        row: &mut [f64],
    ) -> Result<(), ParaxialError> {
        let count = train.len();
        assert!(weights.heights.iter().all(|&(surface, _)| surface < count), "a surface it has");
        let at = |surface: usize| {
            let weighed = weights.heights.iter().filter(|&&(at, _)| at == surface);
            [weighed.map(|&(_, weight)| weight).sum::<f64>()]
        };
        self.sweep(train, at, [weights.exit_slope], quantities, row.as_chunks_mut().0)
    }

    /// Exact derivatives of the height at the last surface and of the exit slope, side by side, as
    /// [`Self::differentiate`].
    ///
    /// # Errors
    /// A derivative leaves the range of numbers.
    ///
    /// # Panics
    /// If `row` or the train does not fit the traced ray.
    pub fn differentiate_end(
        &self,
        train: &Train,
        quantities: Quantities,
        row: &mut [[f64; 2]],
    ) -> Result<(), ParaxialError> {
        let last = train.len() - 1;
        let at = |surface: usize| [if surface == last { 1.0 } else { 0.0 }, 0.0];
        self.sweep(train, at, [0.0, 1.0], quantities, row)
    }

    /// The reverse sweep of `M` sums side by side, from the weights of their heights at each
    /// surface and of their exit slopes.
    #[inline]
    fn sweep<const M: usize>(
        &self,
        train: &Train,
        weights_at: impl Fn(usize) -> [f64; M],
        exit_slope: [f64; M],
        quantities: Quantities,
        row: &mut [[f64; M]],
    ) -> Result<(), ParaxialError> {
        assert_eq!(self.heights.len(), train.len(), "the train the ray was traced through");
        assert_eq!(row.len(), quantities.count(), "one place a quantity");
        row.fill([0.0; M]);
        let indices = train.indices();
        let (mut h_bar, mut u_bar) = ([0.0; M], exit_slope);
        for (i, surface) in train.surfaces().iter().enumerate().rev() {
            let (h, c) = (self.heights[i], surface.curvature);
            let (before, behind) = (indices[i], indices[i + 1]);
            let step = behind - before;
            let v = u_bar.map(|u_bar| u_bar / behind);
            row[quantities.curvature(i)] = v.map(|v| -h * step * v);
            if quantities.has_indices() {
                let (here, next) = (quantities.index(i), quantities.index(i + 1));
                for m in 0..M {
                    row[here][m] += (self.slopes[i] + h * c) * v[m];
                    row[next][m] -= (self.slopes[i + 1] + h * c) * v[m];
                }
            }
            let weights = weights_at(i);
            for m in 0..M {
                h_bar[m] = h_bar[m] + weights[m] - c * step * v[m];
                u_bar[m] = before * v[m];
            }
            if i > 0 {
                let gap = train.gaps()[i - 1];
                row[quantities.gap(i - 1)] = h_bar.map(|h_bar| h_bar * self.slopes[i]);
                for m in 0..M {
                    u_bar[m] += gap * h_bar[m];
                }
            }
        }
        let finite = |derivatives: &[f64; M]| derivatives.iter().all(|by| by.is_finite());
        match row.iter().position(|derivatives| !finite(derivatives)) {
            Some(place) => Err(ParaxialError::Derivative { place }),
            None => Ok(()),
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::quantities::Shapes;
    use crate::surface::Surface;

    fn singlet() -> Train {
        let surfaces = [0.02, -0.01].map(|c| Surface::sphere(c, 10.0)).into();
        Train::new(surfaces, vec![6.0], vec![1.0, 1.5, 1.0]).unwrap()
    }

    #[test]
    fn one_surface_after_the_other_by_hand() {
        let mut ray = ParaxialRay::new();
        ray.trace(&singlet(), 3.0, 0.1).unwrap();
        // u′ = (0.1 − 3 · 0.02 · 0.5)/1.5 = 0.07/1.5; h = 3 + 6u′ = 3.28;
        // u″ = 1.5u′ − 3.28 · (−0.01)(−0.5) = 0.07 − 0.0164.
        for (got, expected) in ray.slopes().iter().zip([0.1, 0.07 / 1.5, 0.0536]) {
            assert!((got - expected).abs() < 1e-15, "{got} {expected}");
        }
        for (got, expected) in ray.heights().iter().zip([3.0, 3.28]) {
            assert!((got - expected).abs() < 1e-15, "{got} {expected}");
        }
        assert!((ray.ratio().unwrap() - 3.28 / 3.0).abs() < 1e-15);
        assert_eq!(ray.exit_slope(), ray.slopes().last().copied());
    }

    #[test]
    fn a_second_trace_forgets_the_first() {
        let (mut used, mut fresh) = (ParaxialRay::new(), ParaxialRay::new());
        used.trace(&singlet(), 8.0, -0.3).unwrap();
        let buffers = (used.heights().as_ptr(), used.slopes().as_ptr());
        used.trace(&singlet(), 1.0, 0.0).unwrap();
        fresh.trace(&singlet(), 1.0, 0.0).unwrap();
        assert_eq!(used, fresh);
        assert_eq!(buffers, (used.heights().as_ptr(), used.slopes().as_ptr()), "the same buffers");
    }

    #[test]
    fn what_cannot_be_told_is_an_error_or_nothing() {
        let mut ray = ParaxialRay::new();
        assert_eq!((ray.ratio(), ray.exit_slope()), (None, None));
        ray.trace(&singlet(), 0.0, 0.1).unwrap();
        assert_eq!(ray.ratio(), None);
        let fault = ray.trace(&singlet(), f64::MAX, 1e308).unwrap_err();
        assert_eq!(fault, ParaxialError::Ray { surface: 1 });
        assert_eq!((ray.ratio(), ray.exit_slope()), (None, None));
        assert!(ray.trace(&singlet(), f64::NAN, 0.0).is_err());

        ray.trace(&singlet(), 1e200, 0.0).unwrap();
        let quantities = Quantities::new(2, Shapes::None);
        let weights = ParaxialWeights { exit_slope: 1e200, ..ParaxialWeights::default() };
        let mut row = vec![0.0; quantities.count()];
        let fault = ray.differentiate(&singlet(), weights, quantities, &mut row).unwrap_err();
        assert_eq!(fault, ParaxialError::Derivative { place: 0 });
    }

    #[test]
    fn shapes_have_no_first_order() {
        let train = singlet();
        let mut ray = ParaxialRay::new();
        ray.trace(&train, 2.0, 0.05).unwrap();
        let weights = ParaxialWeights { heights: &[(1, 0.3), (0, 2.0)], exit_slope: 0.7 };
        let (few, all) = (Quantities::new(2, Shapes::None), Quantities::new(2, Shapes::ALL));
        let (mut short, mut long) = (vec![9.0; few.count()], vec![9.0; all.count()]);
        ray.differentiate(&train, weights, few, &mut short).unwrap();
        ray.differentiate(&train, weights, all, &mut long).unwrap();
        for (place, &derivative) in long.iter().enumerate() {
            let same = (0..few.count()).find(|&short| few.at(short) == all.at(place));
            assert_eq!(derivative, same.map_or(0.0, |same| short[same]));
        }
    }

    #[test]
    fn the_end_s_derivatives_are_those_of_its_height_and_slope() {
        let train = singlet();
        let mut ray = ParaxialRay::new();
        ray.trace(&train, 2.0, 0.05).unwrap();
        let quantities = Quantities::new(2, Shapes::None).without_indices();
        let mut both = vec![[9.0; 2]; quantities.count()];
        ray.differentiate_end(&train, quantities, &mut both).unwrap();
        let height = ParaxialWeights { heights: &[(1, 1.0)], exit_slope: 0.0 };
        let slope = ParaxialWeights { heights: &[], exit_slope: 1.0 };
        for (sum, weights) in [height, slope].into_iter().enumerate() {
            let mut row = vec![9.0; quantities.count()];
            ray.differentiate(&train, weights, quantities, &mut row).unwrap();
            assert!(row.iter().zip(&both).all(|(one, both)| *one == both[sum]));
        }
    }
}
