//! The numbers a ray is traced with: one at a time (`f64`), eight side by side ([`Lanes`]), or
//! several such vectors abreast.
//!
//! The kernels are written once, over [`Real`]. No fused multiply-add is used anywhere, so that
//! the same bits come out whichever vector width the processor offers.

use std::ops::{Add, Div, Mul, Neg, Sub};

/// What the trace asks of a number.
pub trait Real:
    Copy
    + Add<Output = Self>
    + Sub<Output = Self>
    + Mul<Output = Self>
    + Div<Output = Self>
    + Neg<Output = Self>
{
    /// The same value in every lane.
    fn splat(value: f64) -> Self;
    /// Square root; NaN where the value is negative.
    fn sqrt(self) -> Self;
    /// Whether every lane's magnitude is at most `limit`; NaN counts as within, since a lane that
    /// has failed must not hold up the others.
    fn settled_within(self, limit: f64) -> bool;
}

impl Real for f64 {
    #[inline(always)]
    fn splat(value: f64) -> Self {
        value
    }

    #[inline(always)]
    fn sqrt(self) -> Self {
        f64::sqrt(self)
    }

    #[inline(always)]
    fn settled_within(self, limit: f64) -> bool {
        self.is_nan() || self.abs() <= limit
    }
}

/// Rays traced side by side.
pub const LANES: usize = 8;

/// Eight numbers side by side, one a ray.
#[derive(Debug, Clone, Copy, PartialEq)]
#[repr(align(64))]
pub struct Lanes(pub [f64; LANES]);

impl Lanes {
    /// All zeros.
    pub const ZERO: Self = Self([0.0; LANES]);

    /// All lanes added up, always in the same order.
    #[must_use]
    #[inline(always)]
    pub fn sum(self) -> f64 {
        let [a, b, c, d, e, f, g, h] = self.0;
        ((a + e) + (c + g)) + ((b + f) + (d + h))
    }

    #[inline(always)]
    fn map(self, f: impl Fn(f64) -> f64) -> Self {
        let mut out = self;
        for lane in &mut out.0 {
            *lane = f(*lane);
        }
        out
    }

    #[inline(always)]
    fn zip(self, other: Self, f: impl Fn(f64, f64) -> f64) -> Self {
        let mut out = self;
        for (lane, with) in out.0.iter_mut().zip(other.0) {
            *lane = f(*lane, with);
        }
        out
    }
}

impl Add for Lanes {
    type Output = Self;
    #[inline(always)]
    fn add(self, other: Self) -> Self {
        self.zip(other, |a, b| a + b)
    }
}

impl Sub for Lanes {
    type Output = Self;
    #[inline(always)]
    fn sub(self, other: Self) -> Self {
        self.zip(other, |a, b| a - b)
    }
}

impl Mul for Lanes {
    type Output = Self;
    #[inline(always)]
    fn mul(self, other: Self) -> Self {
        self.zip(other, |a, b| a * b)
    }
}

impl Div for Lanes {
    type Output = Self;
    #[inline(always)]
    fn div(self, other: Self) -> Self {
        self.zip(other, |a, b| a / b)
    }
}

impl Neg for Lanes {
    type Output = Self;
    #[inline(always)]
    fn neg(self) -> Self {
        self.map(|a| -a)
    }
}

/// Vectors of lanes that go through a trace abreast. One alone would wait for its own square roots
/// most of the time; the more, the fuller the processor, until its registers are.
pub(crate) const ABREAST: usize = 4;

/// Rays that go through a trace abreast.
pub(crate) const RAYS_ABREAST: usize = LANES * ABREAST;

/// [`ABREAST`] vectors of lanes.
#[derive(Debug, Clone, Copy, PartialEq)]
#[repr(align(64))]
pub(crate) struct Abreast([[f64; LANES]; ABREAST]);

impl Abreast {
    /// All its numbers, [`RAYS_ABREAST`] of them.
    #[inline(always)]
    pub(crate) fn numbers(&self) -> &[f64] {
        self.0.as_flattened()
    }

    /// The same, to be changed.
    #[inline(always)]
    pub(crate) fn numbers_mut(&mut self) -> &mut [f64] {
        self.0.as_flattened_mut()
    }

    #[inline(always)]
    fn map(self, f: impl Fn(Lanes) -> Lanes) -> Self {
        let mut out = self;
        for lanes in &mut out.0 {
            *lanes = f(Lanes(*lanes)).0;
        }
        out
    }

    #[inline(always)]
    fn zip(self, other: Self, f: impl Fn(Lanes, Lanes) -> Lanes) -> Self {
        let mut out = self;
        for (lanes, with) in out.0.iter_mut().zip(other.0) {
            *lanes = f(Lanes(*lanes), Lanes(with)).0;
        }
        out
    }
}

impl Add for Abreast {
    type Output = Self;
    #[inline(always)]
    fn add(self, other: Self) -> Self {
        self.zip(other, |a, b| a + b)
    }
}

impl Sub for Abreast {
    type Output = Self;
    #[inline(always)]
    fn sub(self, other: Self) -> Self {
        self.zip(other, |a, b| a - b)
    }
}

impl Mul for Abreast {
    type Output = Self;
    #[inline(always)]
    fn mul(self, other: Self) -> Self {
        self.zip(other, |a, b| a * b)
    }
}

impl Div for Abreast {
    type Output = Self;
    #[inline(always)]
    fn div(self, other: Self) -> Self {
        self.zip(other, |a, b| a / b)
    }
}

impl Neg for Abreast {
    type Output = Self;
    #[inline(always)]
    fn neg(self) -> Self {
        self.map(|a| -a)
    }
}

impl Real for Abreast {
    #[inline(always)]
    fn splat(value: f64) -> Self {
        Self([[value; LANES]; ABREAST])
    }

    #[inline(always)]
    fn sqrt(self) -> Self {
        self.map(Real::sqrt)
    }

    #[inline(always)]
    fn settled_within(self, limit: f64) -> bool {
        self.numbers().iter().all(|number| number.settled_within(limit))
    }
}

impl Real for Lanes {
    #[inline(always)]
    fn splat(value: f64) -> Self {
        Self([value; LANES])
    }

    #[inline(always)]
    fn sqrt(self) -> Self {
        self.map(f64::sqrt)
    }

    #[inline(always)]
    fn settled_within(self, limit: f64) -> bool {
        self.0.iter().all(|lane| lane.settled_within(limit))
    }
}
