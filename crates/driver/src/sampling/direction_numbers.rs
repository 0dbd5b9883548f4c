//! Direction numbers of Sobol's points.
//!
//! S. Joe and F. Y. Kuo, *Constructing Sobol sequences with better two-dimensional projections*,
//! SIAM J. Sci. Comput. 30, 2635 (2008): the first 64 dimensions of their table D6
//! (`new-joe-kuo-6.21201`), published under the BSD licence.

/// Most coordinates a Sobol point can have.
pub(crate) const MOST_DIMENSIONS: usize = POLYNOMIALS.len() + 1;

/// The primitive polynomial of a coordinate and its first direction numbers.
pub(super) struct Polynomial {
    /// Coefficients between the first and the last, as bits, the highest power first.
    pub(super) inner: u32,
    /// The first m, as many as the polynomial's degree; m(i) is odd and below 2^i.
    pub(super) first: &'static [u32],
}

/// From the second coordinate on.
pub(super) const POLYNOMIALS: [Polynomial; 63] = [
    Polynomial { inner: 0, first: &[1] },
    Polynomial { inner: 1, first: &[1, 3] },
    Polynomial { inner: 1, first: &[1, 3, 1] },
    Polynomial { inner: 2, first: &[1, 1, 1] },
    Polynomial { inner: 1, first: &[1, 1, 3, 3] },
    Polynomial { inner: 4, first: &[1, 3, 5, 13] },
    Polynomial { inner: 2, first: &[1, 1, 5, 5, 17] },
    Polynomial { inner: 4, first: &[1, 1, 5, 5, 5] },
    Polynomial { inner: 7, first: &[1, 1, 7, 11, 19] },
    Polynomial { inner: 11, first: &[1, 1, 5, 1, 1] },
    Polynomial { inner: 13, first: &[1, 1, 1, 3, 11] },
    Polynomial { inner: 14, first: &[1, 3, 5, 5, 31] },
    Polynomial { inner: 1, first: &[1, 3, 3, 9, 7, 49] },
    Polynomial { inner: 13, first: &[1, 1, 1, 15, 21, 21] },
    Polynomial { inner: 16, first: &[1, 3, 1, 13, 27, 49] },
    Polynomial { inner: 19, first: &[1, 1, 1, 15, 7, 5] },
    Polynomial { inner: 22, first: &[1, 3, 1, 15, 13, 25] },
    Polynomial { inner: 25, first: &[1, 1, 5, 5, 19, 61] },
    Polynomial { inner: 1, first: &[1, 3, 7, 11, 23, 15, 103] },
    Polynomial { inner: 4, first: &[1, 3, 7, 13, 13, 15, 69] },
    Polynomial { inner: 7, first: &[1, 1, 3, 13, 7, 35, 63] },
    Polynomial { inner: 8, first: &[1, 3, 5, 9, 1, 25, 53] },
    Polynomial { inner: 14, first: &[1, 3, 1, 13, 9, 35, 107] },
    Polynomial { inner: 19, first: &[1, 3, 1, 5, 27, 61, 31] },
    Polynomial { inner: 21, first: &[1, 1, 5, 11, 19, 41, 61] },
    Polynomial { inner: 28, first: &[1, 3, 5, 3, 3, 13, 69] },
    Polynomial { inner: 31, first: &[1, 1, 7, 13, 1, 19, 1] },
    Polynomial { inner: 32, first: &[1, 3, 7, 5, 13, 19, 59] },
    Polynomial { inner: 37, first: &[1, 1, 3, 9, 25, 29, 41] },
    Polynomial { inner: 41, first: &[1, 3, 5, 13, 23, 1, 55] },
    Polynomial { inner: 42, first: &[1, 3, 7, 3, 13, 59, 17] },
    Polynomial { inner: 50, first: &[1, 3, 1, 3, 5, 53, 69] },
    Polynomial { inner: 55, first: &[1, 1, 5, 5, 23, 33, 13] },
    Polynomial { inner: 56, first: &[1, 1, 7, 7, 1, 61, 123] },
    Polynomial { inner: 59, first: &[1, 1, 7, 9, 13, 61, 49] },
    Polynomial { inner: 62, first: &[1, 3, 3, 5, 3, 55, 33] },
    Polynomial { inner: 14, first: &[1, 3, 1, 15, 31, 13, 49, 245] },
    Polynomial { inner: 21, first: &[1, 3, 5, 15, 31, 59, 63, 97] },
    Polynomial { inner: 22, first: &[1, 3, 1, 11, 11, 11, 77, 249] },
    Polynomial { inner: 38, first: &[1, 3, 1, 11, 27, 43, 71, 9] },
    Polynomial { inner: 47, first: &[1, 1, 7, 15, 21, 11, 81, 45] },
    Polynomial { inner: 49, first: &[1, 3, 7, 3, 25, 31, 65, 79] },
    Polynomial { inner: 50, first: &[1, 3, 1, 1, 19, 11, 3, 205] },
    Polynomial { inner: 52, first: &[1, 1, 5, 9, 19, 21, 29, 157] },
    Polynomial { inner: 56, first: &[1, 3, 7, 11, 1, 33, 89, 185] },
    Polynomial { inner: 67, first: &[1, 3, 3, 3, 15, 9, 79, 71] },
    Polynomial { inner: 70, first: &[1, 3, 7, 11, 15, 39, 119, 27] },
    Polynomial { inner: 84, first: &[1, 1, 3, 1, 11, 31, 97, 225] },
    Polynomial { inner: 97, first: &[1, 1, 1, 3, 23, 43, 57, 177] },
    Polynomial { inner: 103, first: &[1, 3, 7, 7, 17, 17, 37, 71] },
    Polynomial { inner: 115, first: &[1, 3, 1, 5, 27, 63, 123, 213] },
    Polynomial { inner: 122, first: &[1, 1, 3, 5, 11, 43, 53, 133] },
    Polynomial { inner: 8, first: &[1, 3, 5, 5, 29, 17, 47, 173, 479] },
    Polynomial { inner: 13, first: &[1, 3, 3, 11, 3, 1, 109, 9, 69] },
    Polynomial { inner: 16, first: &[1, 1, 1, 5, 17, 39, 23, 5, 343] },
    Polynomial { inner: 22, first: &[1, 3, 1, 5, 25, 15, 31, 103, 499] },
    Polynomial { inner: 25, first: &[1, 1, 1, 11, 11, 17, 63, 105, 183] },
    Polynomial { inner: 44, first: &[1, 1, 5, 11, 9, 29, 97, 231, 363] },
    Polynomial { inner: 47, first: &[1, 1, 5, 15, 19, 45, 41, 7, 383] },
    Polynomial { inner: 52, first: &[1, 3, 7, 7, 31, 19, 83, 137, 221] },
    Polynomial { inner: 55, first: &[1, 1, 1, 3, 23, 15, 111, 223, 83] },
    Polynomial { inner: 59, first: &[1, 1, 5, 13, 31, 15, 55, 25, 161] },
    Polynomial { inner: 62, first: &[1, 1, 3, 13, 25, 47, 39, 87, 257] },
];
