//! Where along a movement curve something holds, and where it is worst.

use super::document::CurvePoint;

/// A stretch of neighbouring points at which something holds, and the worst value there.
pub(super) struct Stretch {
    /// Its smallest and largest ratio.
    pub(super) from: f64,
    pub(super) to: f64,
    pub(super) worst: f64,
    /// The ratio at which that is met.
    pub(super) worst_at: f64,
}

impl Stretch {
    /// Where it is, as a sentence about it begins.
    pub(super) fn between(&self) -> String {
        if self.from == self.to {
            format!("at {:.4}x", self.from)
        } else {
            format!("from {:.4}x to {:.4}x", self.from, self.to)
        }
    }
}

/// Where the first number of `badness` is above zero; a stretch's worst value is the second where
/// the first is greatest.
pub(super) fn stretches(
    points: &[CurvePoint],
    badness: impl Fn(usize) -> Option<(f64, f64)>,
) -> Vec<Stretch> {
    let mut stretches: Vec<Stretch> = Vec::new();
    let mut open: Option<(Stretch, f64)> = None;
    for (k, point) in points.iter().enumerate() {
        match badness(k).filter(|(bad, _)| *bad > 0.0) {
            Some((bad, value)) => {
                let (stretch, worst) = open.get_or_insert_with(|| {
                    let at = point.ratio;
                    (Stretch { from: at, to: at, worst: value, worst_at: at }, bad)
                });
                stretch.to = point.ratio;
                if bad > *worst {
                    *worst = bad;
                    (stretch.worst, stretch.worst_at) = (value, point.ratio);
                }
            }
            None => stretches.extend(open.take().map(|(stretch, _)| stretch)),
        }
    }
    stretches.extend(open.map(|(stretch, _)| stretch));
    stretches
}
