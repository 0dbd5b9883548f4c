//! In which order points are numbered, which others each may start from, and which of them a part
//! takes.
//!
//! A point starts warm, from a neighbour that is optimised already. Were that whichever happens to
//! be done, results would depend on threads and interruptions. So neighbours are fixed: the points
//! are halved across their longest side, again and again. One point speaks for the whole, the one
//! nearest to its middle; of the two halves the one that holds it keeps it, for the other its own
//! middle speaks from then on. The ancestors of a point are those that spoke for the halves it lay
//! in before it spoke itself, at most one a halving, and the two nearest of them are its neighbours.
//!
//! Points are numbered from coarse to fine, so that several threads find work at once. A part takes
//! points that lie together, not every N-th: of what such a stretch needs from outside, all are
//! ancestors of its first point.

/// The numbers of the points that a point may start from, all smaller than its own.
#[derive(Debug, Clone, PartialEq, Eq, Default)]
pub(super) struct Neighbours(pub(super) Vec<usize>);

/// Points in order.
#[derive(Debug, Clone)]
pub(super) struct Order {
    /// For every number, which of the points it is.
    pub(super) points: Vec<usize>,
    /// For every number, its neighbours.
    pub(super) neighbours: Vec<Neighbours>,
    /// All numbers, those of points that lie together side by side.
    together: Vec<usize>,
}

impl Order {
    /// The order of the points of a grid with so many values on each axis, those of the last axis
    /// running fastest: one step is as far along every axis.
    pub(super) fn of_grid(counts: &[usize]) -> Self {
        let total: usize = counts.iter().product();
        let place = |flat| unfold(flat, counts).into_iter().map(|index| index as f64).collect();
        let points: Vec<Vec<f64>> = (0..total).map(place).collect();
        Self::of(&points)
    }

    /// The order of points anywhere.
    pub(super) fn of(points: &[Vec<f64>]) -> Self {
        let mut halving = Halving { points, spoken: Vec::with_capacity(points.len()) };
        let mut all: Vec<usize> = (0..points.len()).collect();
        if let Some(first) = halving.middle(&all) {
            halving.speak(first, 0, &[]);
            halving.halve(&mut all, first, &mut vec![first], 1);
        }
        let spoken = halving.spoken;
        let mut coarse_first: Vec<usize> = (0..spoken.len()).collect();
        coarse_first.sort_by_key(|&at| spoken[at].level);
        let mut together = vec![0; spoken.len()];
        let mut numbers = vec![0; spoken.len()];
        for (number, &at) in coarse_first.iter().enumerate() {
            together[at] = number;
            numbers[spoken[at].point] = number;
        }
        let near =
            |&at: &usize| Neighbours(spoken[at].near.iter().map(|&point| numbers[point]).collect());
        Self {
            points: coarse_first.iter().map(|&at| spoken[at].point).collect(),
            neighbours: coarse_first.iter().map(near).collect(),
            together,
        }
    }

    /// For every unit of a run in so many parts, of which each takes every `parts`-th, the number
    /// of its point. Those of a part lie together and run from coarse to fine.
    pub(super) fn units(&self, parts: u64) -> Vec<usize> {
        let count = self.together.len();
        let parts = usize::try_from(parts).unwrap_or(usize::MAX).max(1);
        let mut units = vec![0; count];
        let mut rest = self.together.as_slice();
        for part in 0..parts.min(count) {
            let (own, others) = rest.split_at((count - part).div_ceil(parts));
            let mut own = own.to_vec();
            own.sort_unstable();
            for (nth, number) in own.into_iter().enumerate() {
                units[part + nth * parts] = number;
            }
            rest = others;
        }
        units
    }
}

/// A point that has come to speak.
struct Spoken {
    point: usize,
    /// After how many halvings.
    level: u32,
    /// The nearest of its ancestors.
    near: Vec<usize>,
}

/// The halving of points at work.
struct Halving<'p> {
    points: &'p [Vec<f64>],
    /// In an order in which those of any half stand together.
    spoken: Vec<Spoken>,
}

/// How many ancestors are neighbours.
const NEIGHBOURS: usize = 2;

impl Halving<'_> {
    /// Halves points for which `speaker`, the last of `ancestors`, speaks.
    fn halve(
        &mut self,
        points: &mut [usize],
        speaker: usize,
        ancestors: &mut Vec<usize>,
        level: u32,
    ) {
        let Some(cut) = self.cut(points) else { return };
        let (low, high) = points.split_at_mut(cut);
        let (kept, other) = if low.contains(&speaker) { (low, high) } else { (high, low) };
        self.halve(kept, speaker, ancestors, level + 1);
        let Some(next) = self.middle(other) else { return };
        self.speak(next, level, ancestors);
        ancestors.push(next);
        self.halve(other, next, ancestors, level + 1);
        ancestors.pop();
    }

    fn speak(&mut self, point: usize, level: u32, ancestors: &[usize]) {
        let mut near = ancestors.to_vec();
        let far = |other: &usize| squared(&self.points[*other], &self.points[point]);
        near.sort_by(|a, b| far(a).total_cmp(&far(b)).then(a.cmp(b)));
        near.truncate(NEIGHBOURS);
        self.spoken.push(Spoken { point, level, near });
    }

    /// Sorts points along their longest side and says how many of them make the lower half:
    /// where that can be, points with the same place on that side stay together.
    fn cut(&self, points: &mut [usize]) -> Option<usize> {
        let count = points.len();
        if count < 2 {
            return None;
        }
        let ends = self.ends(points);
        let length = |axis: &usize| ends[*axis].1 - ends[*axis].0;
        // Of equally long sides the first.
        let longest = (0..ends.len()).rev().max_by(|a, b| length(a).total_cmp(&length(b)));
        let at = |point: usize| longest.map_or(0.0, |axis| self.points[point][axis]);
        points.sort_by(|a, b| at(*a).total_cmp(&at(*b)).then(a.cmp(b)));
        let apart = (1..count).filter(|&cut| at(points[cut - 1]) < at(points[cut]));
        let middle = count / 2;
        Some(apart.min_by_key(|cut| cut.abs_diff(middle)).unwrap_or(middle))
    }

    /// The point nearest to the middle of the room that points take up.
    fn middle(&self, points: &[usize]) -> Option<usize> {
        let middle: Vec<f64> =
            self.ends(points).iter().map(|(low, high)| 0.5 * (low + high)).collect();
        let far = |point: &usize| squared(&self.points[*point], &middle);
        points.iter().copied().min_by(|a, b| far(a).total_cmp(&far(b)).then(a.cmp(b)))
    }

    /// Least and greatest coordinate on every axis.
    fn ends(&self, points: &[usize]) -> Vec<(f64, f64)> {
        let axes = self.points.first().map_or(0, Vec::len);
        let none = (f64::INFINITY, f64::NEG_INFINITY);
        let along = |axis: usize| {
            let values = points.iter().map(|&point| self.points[point][axis]);
            values.fold(none, |(low, high), value| (low.min(value), high.max(value)))
        };
        (0..axes).map(along).collect()
    }
}

fn squared(one: &[f64], other: &[f64]) -> f64 {
    one.iter().zip(other).map(|(a, b)| (a - b) * (a - b)).sum()
}

/// Indices of a point of a grid by its place, those of the last axis running fastest.
pub(super) fn unfold(mut flat: usize, counts: &[usize]) -> Vec<usize> {
    let mut point = vec![0; counts.len()];
    for (index, &count) in point.iter_mut().zip(counts).rev() {
        *index = flat % count;
        flat /= count;
    }
    point
}

#[cfg(test)]
mod tests {
    use std::collections::BTreeSet;

    use super::*;

    /// Points that all parts together compute, and those of the part that computes most.
    fn work(order: &Order, parts: usize) -> (usize, usize) {
        let units = order.units(parts as u64);
        let of_part = |part: usize| {
            let own = units.iter().enumerate().filter(|(unit, _)| unit % parts == part);
            let mut needed: BTreeSet<usize> = own.map(|(_, &number)| number).collect();
            let mut left: Vec<usize> = needed.iter().copied().collect();
            while let Some(number) = left.pop() {
                let near = order.neighbours[number].0.iter();
                left.extend(near.filter(|&&other| needed.insert(other)));
            }
            needed.len()
        };
        let each: Vec<usize> = (0..parts).map(of_part).collect();
        (each.iter().sum(), each.into_iter().max().unwrap_or(0))
    }

    #[test]
    fn every_point_has_one_number_and_neighbours_before_it() {
        for counts in [vec![1], vec![7], vec![21, 21], vec![3, 1, 5], vec![16, 2]] {
            let order = Order::of_grid(&counts);
            let total: usize = counts.iter().product();
            let all: BTreeSet<usize> = order.points.iter().copied().collect();
            assert_eq!((all.len(), order.points.len()), (total, total));
            for (number, near) in order.neighbours.iter().enumerate() {
                assert_eq!(near.0.is_empty(), number == 0);
                assert!(near.0.iter().all(|&other| other < number), "{counts:?} {number}");
            }
        }
    }

    #[test]
    fn most_points_start_one_step_away() {
        let counts = [21, 21];
        let order = Order::of_grid(&counts);
        let place = |number: usize| -> Vec<f64> {
            unfold(order.points[number], &counts).into_iter().map(|index| index as f64).collect()
        };
        let steps = |number: usize| {
            let near = order.neighbours[number].0.iter();
            near.map(|&other| squared(&place(other), &place(number))).fold(f64::INFINITY, f64::min)
        };
        let near = (1..order.points.len()).filter(|&number| steps(number) <= 1.0).count();
        assert!(near >= 441 / 2, "{near}");
    }

    #[test]
    fn parts_share_the_points_and_need_few_of_each_other() {
        for counts in [[21, 21], [5, 5]] {
            let order = Order::of_grid(&counts);
            let total = counts[0] * counts[1];
            assert_eq!(order.units(1), (0..total).collect::<Vec<_>>());
            let mut told = Vec::new();
            for parts in [1, 2, 4, 8] {
                let units: BTreeSet<usize> = order.units(parts as u64).into_iter().collect();
                assert_eq!(units.len(), total);
                let (all, most) = work(&order, parts);
                // At most one ancestor a halving for each part but the first.
                let halvings = total.ilog2() as usize + 2;
                assert!(all <= total + (parts - 1) * halvings, "{counts:?} {parts}: {all}");
                told.push((parts, all, most));
            }
            println!("{counts:?}: {told:?}");
        }
        let few = Order::of_grid(&[2]);
        assert_eq!(few.units(5), [0, 1]);
    }

    #[test]
    fn points_that_coincide_have_an_order_too() {
        let order = Order::of(&vec![vec![0.5, 0.5]; 9]);
        let all: BTreeSet<usize> = order.points.iter().copied().collect();
        assert_eq!(all.len(), 9);
        assert!(Order::of(&[]).points.is_empty());
    }
}
