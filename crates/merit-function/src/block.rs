//! The shape every least-squares problem of this program has: blocks, one a zoom state.
//!
//! The residuals of a state depend on the *shared* variables (glass shapes, thicknesses) and on
//! that state's *own* variables (its spacings), nothing else. The Jacobian is therefore
//!
//! ```text
//!         shared      own₁  own₂  own₃
//!       ┌ S₁          O₁              ┐
//!   J = │ S₂                O₂        │
//!       └ S₃                      O₃  ┘
//! ```
//!
//! and only the blocks `Sₖ` and `Oₖ` are ever stored: memory and work grow in proportion to the
//! number of states.
//!
//! Variables are packed in one vector, shared ones first, then the own ones of state 0, 1, ….

use std::ops::Range;

use nalgebra::{DMatrix, DVector};

/// How many variables and residuals there are, and which state they belong to.
#[derive(Debug, Clone, PartialEq, Eq, Default)]
pub struct BlockShape {
    /// Number of shared variables.
    pub shared: usize,
    /// Per state, the number of its own variables.
    pub own: Vec<usize>,
    /// Per state, the number of its residuals.
    pub rows: Vec<usize>,
}

impl BlockShape {
    /// Number of states.
    #[must_use]
    pub fn states(&self) -> usize {
        self.own.len()
    }

    /// Number of variables in the packed vector.
    #[must_use]
    pub fn variables(&self) -> usize {
        self.shared + self.own.iter().sum::<usize>()
    }

    /// Number of residuals of all states together.
    #[must_use]
    pub fn residuals(&self) -> usize {
        self.rows.iter().sum()
    }

    /// Where in the packed vector the own variables of `state` stand.
    #[must_use]
    pub fn own_range(&self, state: usize) -> Range<usize> {
        let start = self.shared + self.own[..state].iter().sum::<usize>();
        start..start + self.own[state]
    }
}

/// One state's residuals and its two blocks of the Jacobian.
#[derive(Debug, Clone, PartialEq)]
pub struct StateBlock {
    /// Residuals, one a row, dimensionless: 1 is a goal missed by exactly its `within`.
    pub residuals: DVector<f64>,
    /// Derivatives by the shared variables: rows × shared.
    pub by_shared: DMatrix<f64>,
    /// Derivatives by the state's own variables: rows × own.
    pub by_own: DMatrix<f64>,
}

/// A limit as the solver sees it: `value ≥ 0` is kept, and this is its gradient.
///
/// A limit belongs either to the shared variables alone (`state` is `None`) or to them and one
/// state's own variables, so that it fits the block structure.
#[derive(Debug, Clone, PartialEq)]
pub struct LimitRow {
    /// Distance to the line that must not be crossed, in the limit's own unit (mm for lengths);
    /// negative when crossed.
    pub value: f64,
    /// How far it may be crossed before it counts as crossed, in the same unit (1 µm for lengths).
    pub tolerance: f64,
    /// The state whose own variables it depends on, if any.
    pub state: Option<usize>,
    /// Gradient by the shared variables. Zeros where the limit is so far away that it cannot
    /// matter to a step of ordinary length.
    pub by_shared: DVector<f64>,
    /// Gradient by the state's own variables; empty when `state` is `None`.
    pub by_own: DVector<f64>,
}

/// Everything a step needs to know about a point: residuals, Jacobian blocks, limits.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct Linearisation {
    /// One block a state.
    pub states: Vec<StateBlock>,
    /// Limits with their gradients. Bounds of single variables are not among them.
    pub limits: Vec<LimitRow>,
}

impl Linearisation {
    /// Room for a problem of this shape, all zeros, no limits.
    #[must_use]
    pub fn zeros(shape: &BlockShape) -> Self {
        let block = |state: usize| StateBlock {
            residuals: DVector::zeros(shape.rows[state]),
            by_shared: DMatrix::zeros(shape.rows[state], shape.shared),
            by_own: DMatrix::zeros(shape.rows[state], shape.own[state]),
        };
        Self { states: (0..shape.states()).map(block).collect(), limits: Vec::new() }
    }

    /// Sum of squares of all residuals, in state order.
    #[must_use]
    pub fn sum_of_squares(&self) -> f64 {
        self.states.iter().map(|block| block.residuals.norm_squared()).sum()
    }
}

/// A closed range of one variable; `low ≤ high`, infinities allowed.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Bounds {
    /// Smallest value allowed.
    pub low: f64,
    /// Largest value allowed.
    pub high: f64,
}

impl Bounds {
    /// No bounds at all.
    pub const FREE: Self = Self { low: f64::NEG_INFINITY, high: f64::INFINITY };

    /// The nearest value inside.
    #[must_use]
    pub fn clamp(self, value: f64) -> f64 {
        value.max(self.low).min(self.high)
    }

    /// The part both ranges share, or `None` when they share nothing.
    #[must_use]
    pub fn meet(self, other: Self) -> Option<Self> {
        let both = Self { low: self.low.max(other.low), high: self.high.min(other.high) };
        (both.low <= both.high).then_some(both)
    }
}

/// A least-squares problem in blocks, with bounds and limits: what the solvers of the driver take.
///
/// Implementations evaluate at any point within [`Self::bounds`]; a point at which the residuals
/// do not exist (a ray misses a surface) is a [`Self::Fault`], not a NaN.
pub trait BlockProblem {
    /// Why a point cannot be evaluated.
    type Fault: std::error::Error + Send + Sync + 'static;

    /// Number of variables and residuals, by state.
    fn shape(&self) -> &BlockShape;

    /// Range of every variable of the packed vector.
    fn bounds(&self) -> &[Bounds];

    /// Residuals of all states, packed in state order, written to `out`
    /// (length [`BlockShape::residuals`]).
    ///
    /// # Errors
    /// The point cannot be evaluated; `out` then has no meaning.
    fn residuals(&mut self, variables: &[f64], out: &mut [f64]) -> Result<(), Self::Fault>;

    /// Residuals, Jacobian blocks and limits with gradients. `out` was made by
    /// [`Linearisation::zeros`] for this shape; its buffers are reused.
    ///
    /// # Errors
    /// The point cannot be evaluated; `out` then has no meaning.
    fn linearise(&mut self, variables: &[f64], out: &mut Linearisation) -> Result<(), Self::Fault>;

    /// Values of the limits alone, in the order in which [`Self::linearise`] lists them,
    /// written to `out` (cleared first). Cheap beside the residuals.
    ///
    /// # Errors
    /// The point cannot be evaluated; `out` then has no meaning.
    fn limits(&mut self, variables: &[f64], out: &mut Vec<f64>) -> Result<(), Self::Fault>;
}
