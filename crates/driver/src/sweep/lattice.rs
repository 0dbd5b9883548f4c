//! In which order points are numbered, and which others each may start from.
//!
//! A point starts warm, from a neighbour that is optimised already. Were that whichever happens to
//! be done, results would depend on threads and interruptions. So neighbours are fixed: points are
//! refined from coarse to fine, as a ruler is divided. With tz(i) the number of zero bits behind
//! the last one bit of index i (of 0 as many as you like), a point's level is the least tz of its
//! indices; along the first axis that has it, the points 2^level below and above are coarser, and
//! those are its neighbours. Every chain ends at the origin after some steps for each doubling of
//! an axis, so whoever takes one part of a sweep can compute the few ancestors of its points too.

/// The numbers of the points that a point may start from, all smaller than its own.
#[derive(Debug, Clone, PartialEq, Eq, Default)]
pub(super) struct Neighbours(pub(super) Vec<usize>);

/// A grid, refined from coarse to fine.
pub(super) struct Lattice {
    counts: Vec<usize>,
    /// Indices of every point, by its number.
    points: Vec<Vec<usize>>,
}

impl Lattice {
    /// The grid with so many values on each axis, at least one.
    pub(super) fn new(counts: &[usize]) -> Self {
        let total: usize = counts.iter().product();
        let mut points: Vec<Vec<usize>> = (0..total).map(|flat| unfold(flat, counts)).collect();
        // Stable: within a level in the order of a table, the last axis fastest.
        points.sort_by_key(|point| {
            let level = level(point);
            let finest = point.iter().filter(|&&i| zeros(i) == level).count();
            (std::cmp::Reverse(level), finest)
        });
        Self { counts: counts.to_vec(), points }
    }

    pub(super) fn points(&self) -> &[Vec<usize>] {
        &self.points
    }

    /// The neighbours of every point, by its number.
    pub(super) fn neighbours(&self) -> Vec<Neighbours> {
        let mut numbers = vec![0; self.points.len()];
        for (number, point) in self.points.iter().enumerate() {
            numbers[fold(point, &self.counts)] = number;
        }
        let number = |point: &Vec<usize>| numbers[fold(point, &self.counts)];
        let of = |point: &Vec<usize>| {
            let level = level(point);
            let axis = point.iter().position(|&i| i > 0 && zeros(i) == level);
            let Some(axis) = axis else { return Neighbours::default() };
            let step = 1_usize << level;
            let moved = |index: usize| {
                let mut other = point.clone();
                other[axis] = index;
                other
            };
            let below = moved(point[axis] - step);
            let above = Some(point[axis] + step).filter(|&i| i < self.counts[axis]).map(moved);
            Neighbours(std::iter::once(below).chain(above).map(|point| number(&point)).collect())
        };
        self.points.iter().map(of).collect()
    }
}

/// Which points a point may start from.
#[derive(Debug, Clone)]
pub(super) enum Neighbourhood {
    /// In a grid, worked out beforehand.
    Grid(Vec<Neighbours>),
    /// Among points without an order, numbered as drawn: looked for when they are wanted, for to
    /// look for those of all takes time in proportion to the square of their number.
    Cloud(Vec<Vec<f64>>),
}

impl Neighbourhood {
    /// The numbers of the points that a point may start from, all smaller than its own.
    pub(super) fn of(&self, number: usize) -> Vec<usize> {
        match self {
            Self::Grid(neighbours) => neighbours[number].0.clone(),
            Self::Cloud(points) => nearest_two(points, number),
        }
    }
}

/// The two points nearest to one, nearest first, among those with numbers below the last power of
/// two, of which there are at least half as many; of equals the first.
fn nearest_two(points: &[Vec<f64>], number: usize) -> Vec<usize> {
    let Some(below) = number.checked_ilog2().map(|bits| (1_usize << bits).min(number)) else {
        return Vec::new();
    };
    let distance = |other: usize| -> f64 {
        let pairs = points[other].iter().zip(&points[number]);
        pairs.map(|(a, b)| (a - b) * (a - b)).sum()
    };
    let mut nearest: Vec<(f64, usize)> = Vec::with_capacity(3);
    for other in 0..below {
        let apart = distance(other);
        let place = nearest.partition_point(|(nearer, _)| *nearer <= apart);
        if place < 2 {
            nearest.insert(place, (apart, other));
            nearest.truncate(2);
        }
    }
    nearest.into_iter().map(|(_, other)| other).collect()
}

/// Zero bits behind the last one bit.
fn zeros(index: usize) -> u32 {
    if index == 0 { usize::BITS } else { index.trailing_zeros() }
}

fn level(point: &[usize]) -> u32 {
    point.iter().map(|&index| zeros(index)).min().unwrap_or(usize::BITS)
}

/// Place of a point in a table with the last axis fastest.
fn fold(point: &[usize], counts: &[usize]) -> usize {
    point.iter().zip(counts).fold(0, |flat, (&index, &count)| flat * count + index)
}

fn unfold(mut flat: usize, counts: &[usize]) -> Vec<usize> {
    let mut point = vec![0; counts.len()];
    for (index, &count) in point.iter_mut().zip(counts).rev() {
        *index = flat % count;
        flat /= count;
    }
    point
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn every_point_has_neighbours_before_it_and_one_step_away() {
        for counts in [vec![1], vec![7], vec![21, 21], vec![3, 1, 5], vec![16, 2]] {
            let lattice = Lattice::new(&counts);
            let neighbours = lattice.neighbours();
            assert_eq!(lattice.points().len(), counts.iter().product::<usize>());
            assert!(neighbours[0].0.is_empty() && lattice.points()[0].iter().all(|&i| i == 0));
            for (number, near) in neighbours.iter().enumerate().skip(1) {
                let point = &lattice.points()[number];
                assert!(!near.0.is_empty(), "{point:?}");
                for &other in &near.0 {
                    assert!(other < number, "{point:?}");
                    let apart = point.iter().zip(&lattice.points()[other]);
                    assert_eq!(apart.filter(|(a, b)| a != b).count(), 1, "{point:?}");
                }
            }
        }
    }

    #[test]
    fn a_part_needs_few_ancestors() {
        let neighbours = Lattice::new(&[21, 21]).neighbours();
        let deepest =
            neighbours.iter().enumerate().fold(vec![0], |mut depth: Vec<usize>, (n, near)| {
                if n > 0 {
                    depth.push(near.0.iter().map(|&other| depth[other] + 1).max().unwrap_or(0));
                }
                depth
            });
        assert!(deepest.iter().max().is_some_and(|&deepest| deepest <= 10), "{deepest:?}");
    }

    #[test]
    fn a_cloud_grows_by_doubling() {
        let points: Vec<Vec<f64>> = (0..9).map(|i| vec![f64::from(i * 7 % 9)]).collect();
        let cloud = Neighbourhood::Cloud(points.clone());
        let near: Vec<Vec<usize>> = (0..points.len()).map(|number| cloud.of(number)).collect();
        // They stand at 0 7 5 3 1 8 6 4 2; each looks below its last power of two.
        let expected: [&[usize]; 9] =
            [&[], &[0], &[1, 0], &[0, 1], &[0, 3], &[1, 2], &[1, 2], &[2, 3], &[3, 4]];
        assert_eq!(near, expected);
    }
}
