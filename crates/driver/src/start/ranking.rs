//! The best of many layouts that differ, and why the others are none.

use rayon::prelude::*;

use super::begun::GlassesOfGroups;
use super::family::Family;
use super::layout::Layout;
use super::no_layout::NoLayout;
use super::{StartError, Starts};

/// A layout and the number of its point.
#[derive(Debug, Clone)]
pub struct Ranked {
    /// Which point of the sequence it stands at.
    pub number: u64,
    /// The layout.
    pub layout: Layout,
}

/// Why points have no layout, the commonest reason first.
#[derive(Debug, Clone, Default, PartialEq, Eq)]
pub struct Refusals {
    /// Reasons with the number of points each holds for.
    pub reasons: Vec<(NoLayout, usize)>,
}

impl Refusals {
    /// Counts reasons.
    pub(crate) fn of(refused: impl Iterator<Item = NoLayout> + Clone) -> Self {
        let count = |reason| refused.clone().filter(|&other| other == reason).count();
        let mut reasons: Vec<(NoLayout, usize)> =
            NoLayout::ALL.map(|reason| (reason, count(reason))).into();
        reasons.retain(|&(_, count)| count > 0);
        reasons.sort_by_key(|&(_, count)| std::cmp::Reverse(count));
        Self { reasons }
    }
}

/// What a look at many points came to.
#[derive(Debug, Clone)]
pub struct Ranking {
    /// Points looked at.
    pub tried: u64,
    /// Points that have a layout.
    pub fitting: usize,
    /// The best layouts that differ, best first.
    pub best: Vec<Ranked>,
    /// Why the other points have none.
    pub refusals: Refusals,
}

/// Focal lengths of layouts that count as different differ by this factor in one group at least.
const DIFFERENT: f64 = 1.25;

/// What is kept of a layout until it is known to be among the best.
struct Candidate {
    number: u64,
    score: f64,
    family: Family,
    focal_lengths_mm: Vec<f64>,
    glasses: GlassesOfGroups,
}

impl Candidate {
    fn of(number: u64, layout: Layout) -> Self {
        Self {
            number,
            score: layout.score.total,
            family: layout.family,
            focal_lengths_mm: layout.focal_lengths_mm,
            glasses: layout.glasses,
        }
    }

    fn is_like(&self, other: &Self) -> bool {
        let near = |(one, two): (&f64, &f64)| (one / two).abs().ln().abs() < DIFFERENT.ln();
        self.family == other.family
            && self.glasses == other.glasses
            && self.focal_lengths_mm.iter().zip(&other.focal_lengths_mm).all(near)
    }
}

impl Starts {
    /// Looks at the first `tried` points of the sequence that `seed` begins, on all threads, and
    /// keeps the best `most` layouts that differ in family, glass or a focal length. The same on
    /// any number of threads.
    #[must_use]
    pub fn ranked(&self, tried: u64, seed: u64, most: usize) -> Ranking {
        let points = self.points(seed);
        let outcomes: Vec<Result<Candidate, NoLayout>> = (0..tried)
            .into_par_iter()
            .map(|k| self.layout(&points.point(k)).map(|layout| Candidate::of(k, layout)))
            .collect();
        let refusals =
            Refusals::of(outcomes.iter().filter_map(|outcome| outcome.as_ref().err().copied()));
        let mut fitting: Vec<Candidate> = outcomes.into_iter().flatten().collect();
        fitting.sort_by(|a, b| a.score.total_cmp(&b.score).then(a.number.cmp(&b.number)));
        let mut best: Vec<&Candidate> = Vec::new();
        for candidate in &fitting {
            if best.len() == most {
                break;
            }
            if !best.iter().any(|better| better.is_like(candidate)) {
                best.push(candidate);
            }
        }
        let again = |candidate: &&Candidate| {
            let layout = self.layout(&points.point(candidate.number)).ok()?;
            Some(Ranked { number: candidate.number, layout })
        };
        Ranking {
            tried,
            fitting: fitting.len(),
            best: best.iter().filter_map(again).collect(),
            refusals,
        }
    }

    /// Whether any of the first `tried` points has a layout.
    pub(super) fn any(&self, tried: u64, seed: u64) -> bool {
        let points = self.points(seed);
        (0..tried).into_par_iter().any(|k| self.layout(&points.point(k)).is_ok())
    }
}

/// Whether a brief has a layout among the first `tried` points.
pub(super) fn admits(starts: Result<Starts, StartError>, tried: u64, seed: u64) -> bool {
    starts.is_ok_and(|starts| starts.any(tried, seed))
}
