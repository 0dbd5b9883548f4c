//! The best trade between two numbers of many things (the Pareto front).

/// Which of these pairs no other beats, being no larger in both and smaller in one, from the least
/// of the first number to the least of the second; of equal pairs the first counts. A pair that is
/// not finite is none of them.
#[must_use]
pub fn front(pairs: &[[f64; 2]]) -> Vec<usize> {
    let mut order: Vec<usize> =
        (0..pairs.len()).filter(|&k| pairs[k].iter().all(|number| number.is_finite())).collect();
    order.sort_by(|&j, &k| {
        let [[a, b], [c, d]] = [pairs[j], pairs[k]];
        a.total_cmp(&c).then(b.total_cmp(&d)).then(j.cmp(&k))
    });
    let mut least = f64::INFINITY;
    order.retain(|&k| {
        let beats = pairs[k][1] < least;
        least = least.min(pairs[k][1]);
        beats
    });
    order
}

#[cfg(test)]
mod tests {
    use super::front;

    #[test]
    fn the_front_is_what_nothing_beats_in_both() {
        let pairs = [
            [1.0, 9.0],
            [2.0, 5.0],
            [2.0, 4.0],
            [3.0, 4.0],
            [f64::NAN, 0.0],
            [4.0, 1.0],
            [5.0, 2.0],
            [1.0, 9.0],
            [0.5, f64::INFINITY],
        ];
        assert_eq!(front(&pairs), [0, 2, 5]);
        assert!(front(&[]).is_empty());
    }
}
