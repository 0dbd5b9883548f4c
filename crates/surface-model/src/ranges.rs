//! How far the numbers of a design may go, in a file and so in whatever changes one.

/// Longest length anywhere, mm: a kilometre. Beyond it is a slip of the pen.
pub const LONGEST_MM: f64 = 1e6;

/// Smallest radius of curvature, mm, whatever its sign.
pub const SMALLEST_RADIUS_MM: f64 = 1e-3;

/// Largest radius of curvature, mm, whatever its sign; a surface that is flatter is `"flat"`.
pub const LARGEST_RADIUS_MM: f64 = 1e9;

/// Largest conic constant, whatever its sign.
pub const LARGEST_CONIC: f64 = 1e6;

/// Largest asphere coefficient, mm^(1−power), whatever its sign.
pub const LARGEST_COEFFICIENT: f64 = 1e6;

/// Largest linear expansion of a tube or mount, 1/K, whatever its sign: ten times that of the
/// metals that expand most. Beyond it is a slip of the pen.
pub const LARGEST_EXPANSION_PER_K: f64 = 3e-4;
